"""A system written out: lattice vectors, sites and couplings."""

from collections.abc import Iterator, Mapping
from typing import Any

from bandbook.model import Coupling, Model, Site, spans_cell
from bandbook.parameters import Field, Problem, one_of
from bandbook.systems.form import COMMON, Builders, Checked, Form, electron_problems, problems_of, with_common

Bond = tuple[str, str, tuple[int, ...]]

#: The largest energy and length that are taken for meant, eV and Å.
_MOST = 1e6

FIELDS = (
    Field(
        "vectors", "vectors", "lattice vectors, none for a molecule", "Å", (), least=-_MOST, most=_MOST, length=(0, 3)
    ),
    Field(
        "sites",
        "rows",
        "the sites of the cell",
        length=(1, 5000),
        fields=(
            Field("name", "name", "name of the site"),
            Field("at", "vector", "position", "Å", None, least=-_MOST, most=_MOST),
            Field("alpha", "number", "Coulomb integral", "eV", 0.0, least=-_MOST, most=_MOST),
        ),
    ),
    Field(
        "couplings",
        "rows",
        "the bonds, each once; the Hermitian partner is added",
        default=(),
        length=(0, 50_000),
        fields=(
            Field("from", "name", "site in the home cell"),
            Field("to", "name", "site in `cell`"),
            Field(
                "cell",
                "integers",
                "cell of the second site (default: the home cell)",
                default=None,
                least=-1000,
                most=1000,
                length=(0, 3),
            ),
            Field("beta", "number", "resonance integral", "eV", least=-_MOST, most=_MOST),
            Field("overlap", "number", "overlap integral", default=0.0, above=-1.0, most=0.999999),
        ),
    ),
    *COMMON,
)


def fields(given: Mapping[str, Any]) -> tuple[Field, ...]:  # noqa: ARG001 - one signature for every form
    """Return the fields."""
    return FIELDS


def inspect(checked: Checked) -> list[Problem]:
    """Return names that no site has, cells of the wrong length, anything named twice, vectors that span no cell.

    Rows that the fields found wrong are passed over; what only the model sees is asked when there is nothing else.
    """
    sites = None if checked["sites"] is None else [row for row in checked["sites"] if row is not None]
    vectors = checked["vectors"]
    problems = [] if sites is None else [*_sites_twice(checked["sites"]), *_electrons(checked, len(checked["sites"]))]
    if vectors is not None and all(vector is not None and None not in vector for vector in vectors):
        problems += [] if spans_cell(vectors) else [_flat()]
    if sites is not None and vectors is not None and checked["couplings"] is not None:
        problems += _couplings(checked, {row["name"] for row in sites})
        if not problems and _is_right(checked):
            problems = problems_of(checked, build)
    return problems


def _is_right(value: Any) -> bool:
    """Return whether no row lacks a value that a row must have: whether the model can be built."""
    if not isinstance(value, Mapping):
        return value is not None and (not isinstance(value, list) or all(_is_right(entry) for entry in value))
    optional = {"name", "electrons", "beta_unit"} if "sites" in value else {"at", "cell"}
    return all(_is_right(entry) for key, entry in value.items() if entry is not None or key not in optional)


def _electrons(checked: Checked, n_sites: int) -> list[Problem]:
    return electron_problems(checked, n_sites=n_sites, own=n_sites)


def _flat() -> Problem:
    return Problem("the lattice vectors span no cell", "vectors that are independent", "correct them", ("vectors",))


def _sites_twice(sites: list[Any]) -> Iterator[Problem]:
    seen: set[str] = set()
    for number, row in enumerate(sites):
        name = None if row is None else row["name"]
        if name in seen:
            found = f'the name "{name}" stands twice'
            yield Problem(found, "every site has a name of its own", "rename one", ("sites", number, "name"))
        seen |= set() if name is None else {name}


def _couplings(checked: Checked, names: set[str | None]) -> Iterator[Problem]:
    dimension = len(checked["vectors"])
    known = [row["name"] for row in checked["sites"] if row is not None and row["name"] is not None]
    seen: set[Bond] = set()
    for number, row in enumerate(checked["couplings"]):
        if row is None:
            continue
        found = [*_unknown_ends(row, known, names), *_wrong_cell(row, dimension)]
        if not found and None not in (row["from"], row["to"], *(row["cell"] or ())):
            bond = (row["from"], row["to"], _cell(row, dimension))
            found += _wrong_bond(bond, seen)
            seen.add(bond)
        yield from (problem.below("couplings", number) for problem in found)


def _unknown_ends(row: Mapping[str, Any], known: list[str], names: set[str | None]) -> list[Problem]:
    """Return an end that no site has; where a site's own name is wrong, it may be the one that is meant."""
    if None in names:
        return []
    ends = [end for end in ("from", "to") if row[end] is not None and row[end] not in names]
    return [one_of(row[end], known, "site").below(end) for end in ends]


def _wrong_cell(row: Mapping[str, Any], dimension: int) -> list[Problem]:
    cell = _cell(row, dimension)
    if len(cell) == dimension:
        return []
    if dimension == 0:
        return [Problem("a cell in a system without vectors", "a molecule has none", "remove it", ("cell",))]
    wanted = "1 whole number" if dimension == 1 else f"{dimension} whole numbers, one for each lattice vector"
    return [Problem(f"found a list of {len(cell)}", wanted, "correct it", ("cell",))]


def _wrong_bond(bond: Bond, seen: set[Bond]) -> list[Problem]:
    start, end, cell = bond
    back = (end, start, tuple(-step for step in cell))
    where = f" in cell {list(cell)}" if cell else ""
    if bond == back:
        found = f"site {start} is bonded to itself"
        return [Problem(found, "two sites, or a site and its image in another cell", "use alpha for its own energy")]
    if bond in seen or back in seen:
        return [Problem(f"the bond {start}–{end}{where} stands twice", "its partner is added by itself", "remove one")]
    return []


def _cell(row: Mapping[str, Any], dimension: int) -> tuple[int, ...]:
    return (0,) * dimension if row["cell"] is None else tuple(row["cell"])


def build(checked: Checked, builders: Builders) -> Model:  # noqa: ARG001 - one signature for every form
    """Return the Model of a checked system written out.

    Raises:
        AuthorError: The electrons do not fit on the sites.
        PhysicsError: The model breaks its own invariants.
    """
    names = [row["name"] for row in checked["sites"]]
    number = {name: index for index, name in enumerate(names)}
    dimension = len(checked["vectors"])
    sites = tuple(Site(row["name"], row["alpha"], _at(row["at"])) for row in checked["sites"])
    couplings = tuple(
        Coupling(
            number[row["from"]], number[row["to"]], row["beta"], cell=_cell(row, dimension), overlap=row["overlap"]
        )
        for row in checked["couplings"]
    )
    vectors = tuple((x, y, z) for x, y, z in checked["vectors"])
    return with_common(Model(sites, couplings, dimension=dimension, vectors=vectors), checked)


def _at(numbers: list[float] | None) -> tuple[float, float, float] | None:
    return None if numbers is None else (numbers[0], numbers[1], numbers[2])


WRITTEN_OUT = Form("written-out", "sites", "vectors, sites and couplings written out", fields, inspect, build)
