"""The question ``levels``: the levels of a molecule or a piece, and where they lie on the bands of its crystal."""

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from bandbook.analyses.analysis import Analysis, Asked, counted
from bandbook.analyses.levels_figures import draw
from bandbook.analyses.piece_fields import CELLS, CUT, charge_warning, cut_of, inspect_piece
from bandbook.exhibits import Column, Quantity, QuantityName, Table
from bandbook.model import Model
from bandbook.parameters import Problem
from bandbook.solver import Levels, Piece, Places, cut_piece, is_backbone, node_labels, place_on_bands, solve_levels

#: W below this is worth a warning: the k does not describe the level.
LEAST_W = 0.5
#: Sites that a warning names.
MOST_NAMED = 4


@dataclass(frozen=True, eq=False)
class LevelsResult:
    """What the question gave.

    Attributes:
        piece: The piece.
        levels: Its levels.
        places: Where they lie on the parent's bands.
        nodes: Node labels, ``None`` where they make no sense.
        lonely: Sites that the cut leaves with one bond.
    """

    piece: Piece
    levels: Levels
    places: Places
    nodes: tuple[float | None, ...] | None
    lonely: tuple[int, ...] = ()


def inspect(study: Mapping[str, Any], model: Model | None) -> list[Problem]:
    """Return what is wrong with the piece."""
    return inspect_piece(study, model)


def compute(asked: Asked) -> LevelsResult:
    """Cut the piece, solve it, place its levels."""
    cells = asked.study["cells"] if asked.model.dimension else None
    piece = cut_piece(asked.model, cells=cells, **cut_of(asked.study))
    levels = solve_levels(piece)
    places = place_on_bands(asked.model, piece, levels)
    return LevelsResult(piece, levels, places, node_labels(piece, levels), tuple(dangling(asked.model, piece)))


def report(asked: Asked, result: LevelsResult) -> tuple[Quantity, ...]:
    """Return the quantities."""
    levels, places = result.levels, result.places
    has_parent = asked.model.dimension > 0
    fixed = (
        asked.quantity("homo", "level", levels.homo, "highest occupied level"),
        asked.quantity("lumo", "level", levels.lumo, "lowest level with room"),
        asked.quantity("gap", "difference", levels.gap, "HOMO–LUMO distance, 0 for an open shell"),
        asked.quantity(
            "pi_energy", "total", levels.pi_energy, "energy of all electrons", electrons=result.piece.electrons
        ),
        asked.quantity("open_shell", "count", float(levels.is_open_shell), "1 for an open shell, otherwise 0"),
        asked.quantity(
            "gap_levels",
            "count",
            float(places.n_gap_levels) if has_parent else None,
            "levels outside every parent band",
        ),
    )
    numbers = range(levels.first + 1, levels.first + 1 + len(levels.energy))
    energies = tuple(
        asked.quantity(f"energy_{n}", "level", float(energy), f"energy of level {n}, counted from below")
        for n, energy in zip(numbers, levels.energy, strict=True)
    )
    k = tuple(
        asked.quantity(f"k_{n}", "wavenumber", value, f"k of level {n} on the parent band")
        for n, value in zip(numbers, places.k, strict=True)
    )
    return (*fixed, *energies, *k)


def tabulate(asked: Asked, result: LevelsResult) -> tuple[Table, ...]:
    """Return the table of levels, a row a level, without columns that do not apply."""
    levels, places, beta = result.levels, result.places, asked.model.beta_unit
    blank = (None,) * len(levels.energy)
    x = blank if beta is None else tuple((levels.energy - asked.model.alpha_unit) / beta)
    columns = (
        (Column("n", "n", "number of the level from below"), range(levels.first + 1, levels.first + len(x) + 1)),
        (Column("energy", "E", "energy", "eV", 6, 4), levels.energy),
        (Column("x", "x", "(E − α)/β, positive when bonding", "", 6, 4), x),
        (Column("degeneracy", "g", "size of its degenerate group"), levels.degeneracy),
        (Column("occupation", "electrons", "electrons of the level", "", 3, 1), levels.occupation),
        (Column("k", "k", "k on the parent band", "π/a", 12, 4), places.k),
        (Column("w", "W", "part of the level in the Bloch states of that k", "", 6, 3), places.W),
        (Column("k_extended", "k ext.", "k in the extended zone", "π/a", 12, 4), places.extended_k),
        (
            Column("node_label", "node label", "sign changes over N − 1; a label, no k", "π/spacing", 6, 4),
            result.nodes or blank,
        ),
        (Column("place", "gap level at", "where a gap level sits"), places.place),
        (
            Column(
                "participation", "participation", "participation ratio: over how many sites it spreads", "sites", 6, 2
            ),
            levels.participation,
        ),
        (Column("reason", "remark", "why k or W is missing"), tuple(reason or None for reason in places.reason)),
    )
    used = [(head, values) for head, values in columns if any(value is not None for value in values)]
    rows = tuple(tuple(_cell(value) for value in row) for row in zip(*(values for _, values in used), strict=True))
    rows = tuple(
        tuple(
            "" if value is None and head.decimals is None else value for value, (head, _) in zip(row, used, strict=True)
        )
        for row in rows
    )
    caption = f"Levels of the {'molecule' if not asked.model.dimension else 'piece'}, from below."
    return (Table("levels", caption, tuple(head for head, _ in used), rows),)


def _cell(value: Any) -> Any:
    return value.item() if isinstance(value, np.generic) else value


def dangling(model: Model, piece: Piece) -> list[int]:
    """Return the sites that have one bond in the piece and more in the crystal; none for an unbranched chain.

    The ends of a chain are what one means; a ribbon or a skeleton with such sites is not the molecule that one means.
    """
    if model.dimension == 0 or is_backbone(model):
        return []
    bonds = [index for coupling in model.couplings if coupling.beta for index in (coupling.start, coupling.end)]
    in_crystal = np.bincount(np.array(bonds, dtype=np.intp), minlength=model.n_sites)
    lonely = np.flatnonzero((piece.coordination == 1) & (in_crystal[piece.site] > 1))
    return [int(site) for site in lonely]


def _named(model: Model, piece: Piece, site: int) -> str:
    return f"{model.sites[piece.site[site]].name} of cell {', '.join(str(step) for step in piece.cell[site])}"


def warn(asked: Asked, result: LevelsResult) -> tuple[str, ...]:
    """Return what a reader could be misled by."""
    levels, places, piece = result.levels, result.places, result.piece
    warnings = list(charge_warning(asked.model, math.prod(piece.n_cells)))
    if levels.is_open_shell:
        warnings.append("Open shell: the highest group is partly filled and counted evenly; the gap is 0.")
    lonely = result.lonely
    if lonely:
        names = ", ".join(_named(asked.model, piece, site) for site in lonely[:MOST_NAMED]) + (
            ", …" if len(lonely) > MOST_NAMED else ""
        )
        warnings.append(
            f"The cut leaves {counted(len(lonely), 'one-coordinated site')} ({names}); add or drop sites to finish it."
        )
    weak = [W for W in places.W if W is not None and W < LEAST_W]
    if weak:
        warnings.append(f"{counted(len(weak), 'level')} with W below {LEAST_W}: the k says little about them.")
    if any(reason == "in a flat band" for reason in places.reason):
        warnings.append("Levels in a flat band have no k.")
    if levels.is_selected:
        warnings.append(
            f"Only {len(levels.energy)} of {levels.n_levels} levels, those around the Fermi energy, were computed."
        )
    return tuple(warnings)


LEVELS = Analysis(
    question="levels",
    meaning="the levels of a molecule or of a piece of a crystal, and their k on the bands of the crystal",
    example='question = "levels"\ncells = 4\nends = "open"\n',
    fields=(CELLS, *CUT),
    quantities=(
        QuantityName("homo", "level", "highest occupied level"),
        QuantityName("lumo", "level", "lowest level with room"),
        QuantityName("gap", "difference", "HOMO–LUMO distance, 0 for an open shell"),
        QuantityName("pi_energy", "total", "energy of all electrons; none above 2,000 sites"),
        QuantityName("open_shell", "count", "1 for an open shell, otherwise 0"),
        QuantityName("gap_levels", "count", "levels outside every parent band"),
        QuantityName("energy_<n>", "level", "energy of level n, from 1 upwards"),
        QuantityName("k_<n>", "wavenumber", "k of level n on the parent band"),
    ),
    inspect=inspect,
    compute=compute,
    report=report,
    tabulate=tabulate,
    draw=draw,
    warn=warn,
)
