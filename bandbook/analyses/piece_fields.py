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


def inspect_piece(study: Mapping[str, Any], model: Model | None) -> list[Problem]:
    """Return what is wrong with a piece: cells missing or too many, names that no site has, changes of no kind."""
    if model is None:
        return []
    if model.dimension == 0:
        return [*_on_molecule(study), *_names(study, model), *_changes(study, model)]
    return [*_cells(study, model), *_ring(study, model), *_names(study, model), *_changes(study, model)]


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
    counts = cells if isinstance(cells, list) else [cells]
    if model.dimension > 1 and len(counts) != model.dimension:
        return [Problem(f"found {cells}", f"the system is periodic: {wanted}", "correct it", ("cells",))]
    if math.prod(counts) > MOST_CELLS and model.dimension > 1:
        return [Problem(f"{math.prod(counts)} cells in all", f"at most {MOST_CELLS}", "take fewer", ("cells",))]
    return []


def _ring(study: Mapping[str, Any], model: Model) -> list[Problem]:
    del model
    given = [name for name in ("add", "drop") if study[name]]
    if study["ends"] != "ring":
        return []
    return [
        Problem(f'"{name}" with ends = "ring"', "a ring has no end", "remove one of them", (name,)) for name in given
    ]


def _names(study: Mapping[str, Any], model: Model) -> list[Problem]:
    names = [site.name for site in model.sites]
    problems = []
    for key in ("add", "drop"):
        for row, name in enumerate(study[key]):
            problems += [] if name in names else [one_of(name, names, "site").below(key, row)]
    for row, change in enumerate(study["changes"]):
        for key in ("site", "from", "to"):
            name = change[key]
            problems += (
                [] if name is None or name in names else [one_of(name, names, "site").below("changes", row, key)]
            )
    return problems


def _changes(study: Mapping[str, Any], model: Model) -> list[Problem]:
    problems = []
    for row, change in enumerate(study["changes"]):
        is_site = change["site"] is not None and (change["alpha"] is not None or bool(change["remove"]))
        is_bond = None not in (change["from"], change["to"], change["beta"])
        if is_site == is_bond:
            allowed = "site with alpha or remove = true; or from, to and beta"
            problems.append(Problem("a change of neither or both kinds", allowed, "correct it", ("changes", row)))
        if model.dimension == 0 and change["cell"] is not None:
            problems.append(
                Problem("a cell on a molecule", "a molecule has none", "remove it", ("changes", row, "cell"))
            )
        if model.dimension and change["cell"] is None:
            problems.append(Problem("no cell", "cells count from 0", "add cell = 0", ("changes", row)))
    return problems


def cut_of(study: Mapping[str, Any]) -> dict[str, Any]:
    """Return the keys of a checked study as the solver takes them."""
    return {"ends": study["ends"], "add": study["add"], "drop": study["drop"], "changes": study["changes"]}
