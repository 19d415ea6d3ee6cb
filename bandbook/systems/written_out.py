"""A system written out: lattice vectors, sites and couplings."""

from collections.abc import Mapping
from typing import Any

from bandbook.errors import AuthorError
from bandbook.model import Coupling, Model, Site
from bandbook.parameters import Field, Problem, one_of
from bandbook.systems.form import COMMON, Builders, Checked, Form, problems_of, with_common

FIELDS = (
    Field("vectors", "vectors", "lattice vectors, none for a molecule", unit="Å", default=(), length=(0, 3)),
    Field(
        "sites",
        "rows",
        "the sites of the cell",
        length=(1, 5000),
        fields=(
            Field("name", "name", "name of the site"),
            Field("at", "vector", "position", unit="Å", default=None),
            Field("alpha", "number", "Coulomb integral", unit="eV", default=0.0),
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
            Field("cell", "integers", "cell of the second site (default the home cell)", default=None, length=(1, 3)),
            Field("beta", "number", "resonance integral", unit="eV"),
            Field("overlap", "number", "overlap integral", default=0.0, above=-1.0, most=0.999999),
        ),
    ),
    *COMMON,
)


def fields(given: Mapping[str, Any]) -> tuple[Field, ...]:  # noqa: ARG001 - one signature for every form
    """Return the fields."""
    return FIELDS


def inspect(checked: Checked) -> list[Problem]:
    """Return names that no site has, cells of the wrong length, anything named twice, then what the model refuses."""
    problems = [*_sites_twice(checked), *_couplings(checked)]
    return problems or problems_of(checked, build)


def _sites_twice(checked: Checked) -> list[Problem]:
    names = [row["name"] for row in checked["sites"]]
    return [
        Problem(
            f'the name "{name}" stands twice', "every site has a name of its own", "rename one", ("sites", row, "name")
        )
        for row, name in enumerate(names)
        if name in names[:row]
    ]


def _couplings(checked: Checked) -> list[Problem]:
    names = [row["name"] for row in checked["sites"]]
    dimension = len(checked["vectors"])
    problems: list[Problem] = []
    seen: set[tuple[str, str, tuple[int, ...]]] = set()
    for number, row in enumerate(checked["couplings"]):
        place = ("couplings", number)
        unknown = [end for end in ("from", "to") if row[end] not in names]
        problems += [one_of(row[end], names, "site").below(*place, end) for end in unknown]
        cell = _cell(row, dimension)
        if len(cell) != dimension:
            wanted = (
                "no `cell` in a molecule" if not dimension else f"{dimension} whole numbers, one each lattice vector"
            )
            problems.append(Problem(f"found {len(cell)} numbers", wanted, "correct it", (*place, "cell")))
            continue
        bond, back = (row["from"], row["to"], cell), (row["to"], row["from"], tuple(-step for step in cell))
        if bond in seen or back in seen:
            found = f"the bond {row['from']}–{row['to']} in cell {list(cell)} stands twice"
            problems.append(Problem(found, "its Hermitian partner is added by itself", "remove one", place))
        if bond == back:
            found = f"site {row['from']} is bonded to itself"
            problems.append(Problem(found, "two sites, or another cell", "use alpha for a site's own energy", place))
        seen.add(bond)
    return problems


def _cell(row: Mapping[str, Any], dimension: int) -> tuple[int, ...]:
    return (0,) * dimension if row["cell"] is None else tuple(row["cell"])


def build(checked: Checked, builders: Builders) -> Model:  # noqa: ARG001 - one signature for every form
    """Return the Model of a checked system written out.

    Raises:
        AuthorError: Two couplings of the same bond, or lattice vectors that span no cell.
    """
    names = [row["name"] for row in checked["sites"]]
    number = {name: index for index, name in enumerate(names)}
    dimension = len(checked["vectors"])
    sites = tuple(Site(row["name"], row["alpha"], _at(row["at"])) for row in checked["sites"])
    couplings = tuple(
        Coupling(number[row["from"]], number[row["to"]], row["beta"], _cell(row, dimension), row["overlap"])
        for row in checked["couplings"]
    )
    if not sites:
        raise AuthorError([Problem("there are no sites", "at least one is needed", "add a site", ("sites",))])
    vectors = tuple(_at(vector) or (0.0, 0.0, 0.0) for vector in checked["vectors"])
    return with_common(Model(sites, couplings, dimension=dimension, vectors=vectors), checked)


def _at(numbers: list[float] | None) -> tuple[float, float, float] | None:
    return None if numbers is None else (numbers[0], numbers[1], numbers[2])


WRITTEN_OUT = Form("written-out", "sites", "vectors, sites and couplings written out", fields, inspect, build)
