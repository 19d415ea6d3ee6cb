"""Gap against length: HOMO–LUMO for every N, the gap levels of long pieces, the extended gap and its limit."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from bandbook.errors import PhysicsError
from bandbook.model import Model
from bandbook.solver.bands import solve_bands
from bandbook.solver.decay import slowest_decay
from bandbook.solver.levels import frontier_energies
from bandbook.solver.piece import Piece, cut_piece

Real = NDArray[np.float64]

#: A long piece has this many decay lengths.
DECAY_LENGTHS: Final = 10.0
#: Cells of the longest piece that is asked for its gap levels.
LONGEST: Final = 20_000
#: A level is a gap level outside the bands by more than this part of the total width.
OUTSIDE: Final = 1e-8
#: Levels on each side of the Fermi energy that a series looks at.
EACH_SIDE: Final = 12


@dataclass(frozen=True)
class Cut:
    """How every piece of a series is cut: ends, sites added and dropped, changes."""

    ends: str = "open"
    add: tuple[str, ...] = ()
    drop: tuple[str, ...] = ()
    changes: tuple[Mapping[str, Any], ...] = ()

    def piece(self, model: Model, n_cells: int) -> Piece:
        """Return the piece of ``n_cells`` cells."""
        return cut_piece(model, cells=n_cells, ends=self.ends, add=self.add, drop=self.drop, changes=self.changes)


@dataclass(frozen=True)
class Series:
    """Gap against length.

    Attributes:
        n_cells: Lengths, ``(length,)``.
        n_sites: Sites of each piece.
        electrons: Electrons of each piece.
        gap: HOMO–LUMO, eV; 0 for an open shell; ``nan`` where nothing is filled or nothing empty.
        is_open_shell: Whether the highest group is partly filled.
        extended_gap: Gap without the gap levels, eV; ``nan`` where there is none.
        n_gap_levels: Gap levels in the fundamental gap of long pieces; ``None`` where that cannot be told.
        band_gap: The computed limit, eV.
        kind: What the parent's bands do at the Fermi energy.
        reason: Why there is no extended gap; empty otherwise.
    """

    n_cells: NDArray[np.intp]
    n_sites: NDArray[np.intp]
    electrons: NDArray[np.intp]
    gap: Real
    is_open_shell: NDArray[np.bool_]
    extended_gap: Real
    n_gap_levels: int | None
    band_gap: float
    kind: str
    reason: str = ""


def gap_series(model: Model, *, lengths: Sequence[int], cut: Cut | None = None) -> Series:
    """Return gap and extended gap of pieces of a crystal.

    Args:
        model: A crystal of dimension 1.
        lengths: Cells, ascending.
        cut: How the pieces are cut.

    Raises:
        PhysicsError: The model is not periodic in one direction, or a piece cannot be cut.
    """
    if model.dimension != 1:
        raise PhysicsError(
            f"a length series of a {model.dimension}-dimensional model; one dimension is allowed; ask another question"
        )
    cut = cut or Cut()
    bands = solve_bands(model, n_points=8)
    pieces = [cut.piece(model, n_cells) for n_cells in lengths]
    n_gap, reason = _gap_level_count(model, cut, bands)
    rows = [_row(piece, bands, n_gap) for piece in pieces]
    gap, is_open, extended = (np.array(column) for column in zip(*rows, strict=True))
    return Series(
        np.array(lengths, dtype=np.intp),
        np.array([piece.n_sites for piece in pieces], dtype=np.intp),
        np.array([piece.electrons for piece in pieces], dtype=np.intp),
        gap,
        is_open.astype(bool),
        extended,
        n_gap,
        bands.gap or 0.0,
        bands.kind,
        reason,
    )


def _row(piece: Piece, bands: Any, n_gap: int | None) -> tuple[float, bool, float]:
    """Return gap, open shell and extended gap of one piece."""
    energies, first = frontier_energies(piece, each_side=EACH_SIDE + (n_gap or 0))
    gap, is_open = _frontier(energies, first, piece.electrons, bands.total_width)
    if n_gap is None:
        return gap, is_open, float("nan")
    middle = bands.fermi_energy
    rest = np.sort(energies[np.argsort(np.abs(energies - middle), kind="stable")[n_gap:]])
    above, below = rest[rest > middle], rest[rest <= middle]
    extended = float(above.min() - below.max()) if above.size and below.size else float("nan")
    return gap, is_open, extended


def _frontier(energies: Real, first: int, electrons: int, width: float) -> tuple[float, bool]:
    """Return HOMO–LUMO gap and whether the highest group is partly filled."""
    upper = electrons // 2 - first
    if electrons % 2:
        return 0.0, True
    if not 0 < upper < len(energies):
        return float("nan"), False
    gap = float(energies[upper] - energies[upper - 1])
    is_open = gap <= max(1e-10 * width, 1e-10)
    return (0.0 if is_open else gap), is_open


def _gap_level_count(model: Model, cut: Cut, bands: Any) -> tuple[int | None, str]:
    """Return the number of gap levels in the fundamental gap of long pieces: the same at N and 2N, both long."""
    if bands.kind != "insulator" or not bands.gap:
        return None, "the infinite system has no gap"
    if cut.ends == "ring":
        return 0, ""
    n_cells = 16
    previous: int | None = None
    while n_cells <= LONGEST:
        levels = _levels_in_gap(cut.piece(model, n_cells), bands)
        decays = [slowest_decay(model, float(energy)) for energy in levels]
        is_long = all(decay is not None and n_cells * decay >= DECAY_LENGTHS for decay in decays)
        if is_long and previous == len(levels):
            return previous, ""
        previous = len(levels) if is_long else None
        n_cells *= 2
    return None, f"the gap levels do not settle up to {LONGEST} cells"


def _levels_in_gap(piece: Piece, bands: Any) -> Real:
    energies, _ = frontier_energies(piece, each_side=EACH_SIDE)
    margin = OUTSIDE * bands.total_width
    inside = (energies > bands.valence.energy + margin) & (energies < bands.conduction.energy - margin)
    return np.asarray(energies[inside], dtype=np.float64)
