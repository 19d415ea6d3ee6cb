"""The keys that cut a piece out of a crystal, shared by several questions."""

import math
from collections.abc import Mapping
from typing import Any

from bandbook.model import Model
from bandbook.parameters import MOST_CELLS, Field, Problem, one_of

CELLS = Field(
    "cells",
    "cells",
    "number of cells; a list of them in two and three dimensions",
    default=None,
    least=1,
    most=MOST_CELLS,
)
LENGTHS = Field("cells", "lengths", "numbers of cells, a range or a list", least=1, most=MOST_CELLS)
CUT = (
    Field("ends", "choice", "open ends, or joined to a ring", default="open", choices=("open", "ring")),
    Field("add", "names", "sites of the next cell that close the far end", default=()),
    Field("drop", "names", "sites left out of the first cell", default=()),
    Field("changes", "rows", "defects, substituents, walls", default=(), fields=(
        Field("cell", "cells", "cell of the change, from 0; none on a molecule", default=None, least=0),
        Field("site", "name", "site that is changed", default=None),
        Field("alpha", "number", "its new Coulomb integral", unit="eV", default=None),
        Field("remove", "flag", "whether it is taken out", default=None),
        Field("from", "name", "first site of the bond that is changed", default=None),
        Field("to", "name", "second site of the bond that is changed", default=None),
        Field("to_cell", "cells", "cell of the second site (default: where the crystal has it)", default=None, least=0),
        Field("beta", "number", "new resonance integral of the bond", unit="eV", default=None),
    )),
)  # fmt: skip


#: The keys of a change that name a site.
_NAMED = ("site", "from", "to")
#: The keys that make a change; ``cell`` and ``to_cell`` say where.
CHANGES = (("site", "alpha"), ("site", "remove"), ("from", "to", "beta"))


def charge_warning(model: Model, n_cells: int) -> tuple[str, ...]:
    """Return what a reader could be misled by where a charged cell is repeated: the charge counts for each."""
    missing = sum(site.electrons for site in model.sites) - model.n_electrons
    if not missing or n_cells < 2 or not model.dimension:
        return ()
    number = f"{abs(missing) * n_cells:g} electrons {'fewer' if missing > 0 else 'more'}"
    return (f"Charge and electrons count for the cell: this piece has {number} than its sites bring.",)


def inspect_piece(study: Mapping[str, Any], model: Model | None) -> list[Problem]:
    """Return what is wrong with a piece: its cells, its ends, names that no site has, changes of no kind or outside.

    Args:
        study: Checked parameters, a single number of cells in each direction.
        model: The model; ``None`` where it is not known before the run.
    """
    if model is None:
        return []
    sizes = _sizes(study, model)
    if sizes and study["add"]:
        sizes = (sizes[0] + 1, *sizes[1:])  # the cell of the added sites
    shape = _on_molecule(study) if model.dimension == 0 else [*_cells(study, model), *_ends(study, model)]
    return [*shape, *_names(study, model), *_changes(study, sizes)]


def _sizes(study: Mapping[str, Any], model: Model) -> tuple[int, ...] | None:
    """Return the cells along each lattice vector, ``()`` for a molecule, ``None`` where they are not given aright."""
    cells = study.get("cells")
    if model.dimension == 0:
        return ()
    sizes = tuple(cells) if isinstance(cells, list) else (cells,)
    return sizes if len(sizes) == model.dimension and None not in sizes else None


def _on_molecule(study: Mapping[str, Any]) -> list[Problem]:
    given = [name for name in ("cells", "add", "drop") if study.get(name)]
    given += ["ends"] if study["ends"] == "ring" else []
    return [
        Problem(f'"{name}" cuts a piece, and this system is a molecule', "a molecule takes none", "remove it", (name,))
        for name in given
    ]


def _cells(study: Mapping[str, Any], model: Model) -> list[Problem]:
    cells = study["cells"]
    wanted = "a whole number" if model.dimension == 1 else f"a list of {model.dimension} whole numbers"
    if cells is None:
        remedy = f"add cells = {4 if model.dimension == 1 else [4] * model.dimension}"
        return [Problem('the key "cells" is missing', f"the system is periodic: {wanted}", remedy)]
    sizes = _sizes(study, model)
    if sizes is None:
        return [Problem(f"found {cells}", f"the system is periodic: {wanted}", "correct it", ("cells",))]
    if math.prod(sizes) > MOST_CELLS:
        return [Problem(f"{math.prod(sizes)} cells in all", f"at most {MOST_CELLS}", "take fewer", ("cells",))]
    return []


def _ends(study: Mapping[str, Any], model: Model) -> list[Problem]:
    given = [name for name in ("add", "drop") if study[name]]
    if study["ends"] == "ring":
        wrong = ('with ends = "ring"', "a ring has no end", "remove one of them")
    elif model.dimension > 1:
        wrong = (f"in {model.dimension} dimensions", "they finish the ends of a line of cells", "use changes instead")
    else:
        return []
    return [Problem(f'"{name}" {wrong[0]}', *wrong[1:], (name,)) for name in given]


def _names(study: Mapping[str, Any], model: Model) -> list[Problem]:
    known = [site.name for site in model.sites]
    given: list[tuple[tuple[str | int, ...], str | None]] = [
        ((key, row), name) for key in ("add", "drop") for row, name in enumerate(study[key])
    ]
    given += [(("changes", row, key), change[key]) for row, change in enumerate(study["changes"]) for key in _NAMED]
    return [one_of(name, known, "site").below(*key) for key, name in given if name is not None and name not in known]


def _changes(study: Mapping[str, Any], sizes: tuple[int, ...] | None) -> list[Problem]:
    return [
        problem.below("changes", row)
        for row, change in enumerate(study["changes"])
        for problem in [*_kind(change), *(() if sizes is None else _place(change, sizes))]
    ]


def _kind(change: Mapping[str, Any]) -> list[Problem]:
    """Return the problem of a change that is not exactly one of those there are."""
    given = {key for key, value in change.items() if value is not None and value is not False}
    made = given - {"cell"} - ({"to_cell"} if "from" in given else set())
    if any(made == set(keys) for keys in CHANGES):
        return []
    allowed = "site with alpha, or site with remove = true, or from with to and beta"
    return [Problem("a change of neither or both kinds", allowed, "correct it")]


def _place(change: Mapping[str, Any], sizes: tuple[int, ...]) -> list[Problem]:
    """Return what is wrong with the cells that a change names."""
    named = [(key, change[key]) for key in ("cell", "to_cell") if change[key] is not None]
    if not sizes:
        return [Problem("a cell on a molecule", "a molecule has none", "remove it", (key,)) for key, _ in named]
    if change["cell"] is None:
        first = 0 if len(sizes) == 1 else [0] * len(sizes)
        return [Problem("a change without a cell", "cells count from 0", f"add cell = {first}")]
    reach = " and ".join(f"0 to {size - 1}" for size in sizes)
    return [
        Problem(f"there is no cell {cell} in the piece", f"its cells count {reach}", "correct it", (key,))
        for key, cell in named
        if not _is_inside(cell, sizes)
    ]


def _is_inside(cell: int | list[int], sizes: tuple[int, ...]) -> bool:
    place = cell if isinstance(cell, list) else [cell]
    return len(place) == len(sizes) and all(0 <= part < size for part, size in zip(place, sizes, strict=True))


def cut_of(study: Mapping[str, Any]) -> dict[str, Any]:
    """Return the keys of a checked study as the solver takes them."""
    return {"ends": study["ends"], "add": study["add"], "drop": study["drop"], "changes": study["changes"]}
