"""The bands of a 1D crystal as monotone branches, and every k at which a band has a given energy.

k is in π/a, from 0 to 1 (E(−k) = E(k), all integrals being real). Bands are sorted by energy at each k, so they are
continuous, with a kink where two cross.
"""

from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise
from typing import Final

import numpy as np
from numpy.typing import NDArray

from bandbook.errors import PhysicsError
from bandbook.model import Model
from bandbook.solver.bloch_states import BlochStates, batches, bloch_states
from bandbook.solver.canonical import tolerance
from bandbook.solver.hamiltonian import band_states, bloch_derivative

#: Intervals of the first mesh.
FIRST_MESH: Final = 64
#: How often an interval is halved at most while the mesh is made.
DEEPEST: Final = 14
#: Steps that the search for an extreme or kink takes at most, and how close to a known point it ends, π/a.
MOST_STEPS: Final = 150
CLOSE: Final = 1e-13
#: Part of the total width by which a cubic through the ends of an interval may miss the band at its middle.
MISS: Final = 1e-8
#: Part of the total width within which a level takes the k of a band edge.
EDGE: Final = 1e-8
#: Part of the total width by which the two branches that meet in a kink may miss each other.
HOLE: Final = 1e-12
#: Shortest run of constant energy that makes a band flat, π/a.
FLAT: Final = 0.02
#: Part of the total width per π/a below which a slope counts as none.
SLOPE: Final = 1e-6


@dataclass(frozen=True, eq=False)
class Branch:
    """A stretch of k over which one sorted band rises or falls.

    Attributes:
        band: Number of the band, from 0, ascending.
        k: Mesh, rising, π/a, ``(node,)``; the ends are extremes or kinks of the band, or the zone's ends.
        energy: Energies at the mesh, eV, monotone, ``(node,)``.
        slope_before: dE/dk below each node, eV per π/a, ``(node,)``.
        slope_after: dE/dk above each node; different where bands touch.
        is_smooth: Whether the band is level at the first and the last node.
    """

    band: int
    k: NDArray[np.float64]
    energy: NDArray[np.float64]
    slope_before: NDArray[np.float64]
    slope_after: NDArray[np.float64]
    is_smooth: tuple[bool, bool]


@dataclass(frozen=True, eq=False)
class Branches:
    """All branches of a 1D crystal.

    Attributes:
        model: The crystal.
        branches: The monotone stretches, band by band, k rising.
        ranges: Lowest and highest energy of each band, eV, ``(band, 2)``.
        flat: Energies at which a band is constant over an interval, eV, ``(flat,)``.
        total_width: Lowest to highest energy of all bands, eV.
    """

    model: Model
    branches: tuple[Branch, ...]
    ranges: NDArray[np.float64]
    flat: NDArray[np.float64]
    total_width: float

    @property
    def near_edge(self) -> float:
        """Distance within which a level belongs to a band edge, eV."""
        return max(EDGE * self.total_width, tolerance(self.total_width))


@dataclass(frozen=True)
class Solution:
    """One k at which a band has the energy asked for.

    Attributes:
        row: Which of the energies asked for.
        k: π/a.
        band: Number of the sorted band, from 0.
        is_edge: Whether the energy is that of a level end of the branch within tolerance, and k is that end's.
    """

    row: int
    k: float
    band: int
    is_edge: bool


@lru_cache(maxsize=16)
def branches_of(model: Model) -> Branches:
    """Return the monotone branches of all bands of a 1D crystal.

    An adaptive mesh: an interval is halved until a cubic through its ends (energies and Hellmann–Feynman slopes) gives
    the middle. Where a slope changes its sign between two nodes, the extreme or kink is found by bisection and becomes
    a node.

    Raises:
        PhysicsError: The crystal is not one-dimensional, or its overlap matrix is not positive definite at some k.

    >>> from bandbook.model import Coupling, Site
    >>> chain = Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
    >>> branches_of(chain).ranges.tolist()
    [[-2.0, 2.0]]
    """
    if model.dimension != 1:
        raise PhysicsError(f"the crystal has dimension {model.dimension}; branches are for 1; ask for bands instead")
    mesh = _with_extremes(model, _adapted(model))
    width = float(mesh.energy.max() - mesh.energy.min())
    stretches: list[Branch] = []
    flats: list[float] = []
    for band in range(model.n_sites):
        is_flat = _flat_intervals(mesh, band, width)
        flats += [float(energy) for energy in np.unique(mesh.energy[:-1, band][is_flat].round(12))]
        stretches += _stretches(mesh, band, is_flat=is_flat, width=width)
    ranges = np.stack([mesh.energy.min(axis=0), mesh.energy.max(axis=0)], axis=1)
    return Branches(model, tuple(stretches), ranges, np.unique(flats), width)


def _adapted(model: Model) -> BlochStates:
    """Return the bands on a mesh on which they are cubic between neighbours."""
    mesh = bloch_states(model, np.linspace(0, 1, FIRST_MESH + 1))
    pending = np.ones(FIRST_MESH, dtype=np.bool_)
    for _ in range(DEEPEST):
        if not pending.any():
            break
        left = np.flatnonzero(pending)
        middle = bloch_states(model, (mesh.k[left] + mesh.k[left + 1]) / 2)
        width = float(mesh.energy.max() - mesh.energy.min())
        missed = np.abs(_cubic_middle(mesh, left) - middle.energy).max(axis=1) > MISS * width + 1e-13
        marks = np.concatenate([np.zeros(len(mesh.k)), missed.astype(np.float64)])
        mesh, order = mesh.joined(middle)
        marks[left] = missed
        pending = marks[order][:-1].astype(np.bool_)
    return mesh


def _cubic_middle(mesh: BlochStates, left: NDArray[np.intp]) -> NDArray[np.float64]:
    step = (mesh.k[left + 1] - mesh.k[left])[:, None]
    ends = (mesh.energy[left] + mesh.energy[left + 1]) / 2
    middle: NDArray[np.float64] = ends + step * (mesh.slope_after[left] - mesh.slope_before[left + 1]) / 8
    return middle


def _with_extremes(model: Model, mesh: BlochStates) -> BlochStates:
    """Return the mesh with a node at every extreme and kink at which a band turns."""
    least = SLOPE * 1e-4 * float(mesh.energy.max() - mesh.energy.min())
    after = np.where(np.abs(mesh.slope_after) > least, mesh.slope_after, 0.0)
    before = np.where(np.abs(mesh.slope_before) > least, mesh.slope_before, 0.0)
    left, band = np.nonzero(after[:-1] * before[1:] < 0)
    if not len(left):
        return mesh
    found = _turns(model, mesh, left, band)
    return mesh.joined(bloch_states(model, _apart(found, mesh.k)))[0]


def _turns(model: Model, mesh: BlochStates, left: NDArray[np.intp], band: NDArray[np.intp]) -> NDArray[np.float64]:
    """Return k of the extreme or kink in each interval, where the band's slopes at the two ends differ in sign.

    In turn: where the tangents at the ends meet (exact for a kink) and where the slope's secant is zero (fast for a
    smooth extreme); halving once in three steps bounds the number of steps.
    """
    low = np.stack([mesh.k[left], mesh.energy[left, band], mesh.slope_after[left, band]])
    high = np.stack([mesh.k[left + 1], mesh.energy[left + 1, band], mesh.slope_before[left + 1, band]])
    found = (low[0] + high[0]) / 2
    open_ = np.arange(len(left))
    for step in range(MOST_STEPS):
        one, two = low[:, open_], high[:, open_]
        k = np.clip(_guess(one, two, step % 3), one[0], two[0])
        found[open_] = k
        open_ = open_[(k - one[0] > CLOSE) & (two[0] - k > CLOSE)]
        if not len(open_):
            break
        k, each = found[open_], (np.arange(len(open_)), band[open_])
        states = bloch_states(model, k)
        here = np.stack([k, states.energy[each], states.slope_before[each]])
        is_before = (here[2] > 0) == (low[2, open_] > 0)
        low[:, open_[is_before]] = here[:, is_before]
        high[:, open_[~is_before]] = here[:, ~is_before]
    turns: NDArray[np.float64] = found
    return turns


def _guess(one: NDArray[np.float64], two: NDArray[np.float64], way: int) -> NDArray[np.float64]:
    """Return where the band turns between two points (k, energy, slope): by tangents, by the slope, or halfway."""
    (k, energy, slope), (k_two, energy_two, slope_two) = one, two
    if way == 0:
        guess: NDArray[np.float64] = k + (energy_two - energy - slope_two * (k_two - k)) / (slope - slope_two)
    elif way == 1:
        guess = k + slope * (k_two - k) / (slope - slope_two)
    else:
        guess = (k + k_two) / 2
    return guess


def _apart(found: NDArray[np.float64], known: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return the new nodes that are not on top of another."""
    found = np.unique(found)
    found = found[np.concatenate([[True], np.diff(found) > 1e-14])]
    return found[~np.isin(found, known)]


def _flat_intervals(mesh: BlochStates, band: int, width: float) -> NDArray[np.bool_]:
    """Return which intervals belong to a run of constant energy that is long enough to make the band flat there."""
    energy = mesh.energy[:, band]
    level = np.abs(np.diff(energy)) <= tolerance(width)
    edges = np.flatnonzero(np.diff(np.concatenate([[0], level.astype(np.int8), [0]])))
    is_flat = np.zeros(len(level), dtype=np.bool_)
    for start, stop in edges.reshape(-1, 2):
        run = energy[start : stop + 1]
        if mesh.k[stop] - mesh.k[start] > FLAT and run.max() - run.min() <= 2 * tolerance(width):
            is_flat[start:stop] = True
    return is_flat


def _stretches(mesh: BlochStates, band: int, *, is_flat: NDArray[np.bool_], width: float) -> list[Branch]:
    """Return the monotone stretches of one band outside its flat parts."""
    energy = mesh.energy[:, band]
    way = np.where(is_flat, 0.0, np.sign(np.diff(energy)))
    turns = np.flatnonzero(np.diff(way)) + 1
    bounds = [0, *turns.tolist(), len(way)]
    level = SLOPE * width
    found = []
    for start, stop in pairwise(bounds):
        if way[start] == 0 and is_flat[start]:
            continue
        part = slice(start, stop + 1)
        smooth = bool(abs(mesh.slope_after[start, band]) < level), bool(abs(mesh.slope_before[stop, band]) < level)
        slopes = mesh.slope_before[part, band], mesh.slope_after[part, band]
        found.append(Branch(band, mesh.k[part], energy[part], *slopes, is_smooth=smooth))
    return found


def solve_for_k(crystal: Branches, energies: NDArray[np.float64]) -> list[Solution]:
    """Return every k in [0, π/a] at which a band has one of the energies.

    Args:
        crystal: The branches.
        energies: eV, ``(row,)``.

    Returns:
        Solutions, by row, then rising k. k is good to the last bits of the band's energy; a level end within
        1e-8 of the total width gives its own k.

    >>> from bandbook.model import Coupling, Site
    >>> chain = Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
    >>> [round(found.k, 12) for found in solve_for_k(branches_of(chain), np.array([-2.0, -1.0, 5.0]))]
    [0.0, 0.333333333333]
    """
    edges = [found for branch in crystal.branches for found in _edges(crystal, branch, energies)]
    taken = {(found.row, found.band, found.k) for found in edges}
    brackets = [_brackets(crystal, branch, energies, taken) for branch in crystal.branches]
    row = np.concatenate([np.zeros(0, dtype=np.intp), *(found[0] for found in brackets)])
    band = np.repeat([branch.band for branch in crystal.branches], [len(found[0]) for found in brackets])
    ends = np.concatenate([np.zeros((6, 0)), *(found[1] for found in brackets)], axis=1)
    k = _roots(crystal.model, energies[row], band, ends)
    inner = [Solution(int(r), float(x), int(b), is_edge=False) for r, b, x in zip(row, band, k, strict=True)]
    return sorted({*edges, *inner}, key=lambda found: (found.row, found.k, found.band))


def _is_snapped(crystal: Branches, branch: Branch, end: int) -> bool:
    """Whether a level close to this end of a branch takes the end's k: at edges of the band, and where it is level."""
    return branch.is_smooth[end] or bool(branch.energy[-end] in crystal.ranges[branch.band])


def _edges(crystal: Branches, branch: Branch, energies: NDArray[np.float64]) -> list[Solution]:
    found = []
    for end in (0, 1):
        if _is_snapped(crystal, branch, end):
            rows = np.flatnonzero(np.abs(energies - branch.energy[-end]) <= crystal.near_edge)
            k = float(branch.k[-end])
            found += [Solution(int(row), k, branch.band, is_edge=True) for row in rows]
    return found


def _brackets(
    crystal: Branches, branch: Branch, energies: NDArray[np.float64], taken: set[tuple[int, int, float]]
) -> tuple[NDArray[np.intp], NDArray[np.float64]]:
    """Return the rows whose energy the branch takes, and the mesh around each k: k, energy and slope, low then high."""
    rising = bool(branch.energy[-1] >= branch.energy[0])
    energy = branch.energy if rising else branch.energy[::-1]
    limits = (float(branch.k[0]), float(branch.k[-1]))
    slack = HOLE * crystal.total_width
    rows = np.flatnonzero((energies >= energy[0] - slack) & (energies <= energy[-1] + slack))
    free = [not any((int(row), branch.band, end) in taken for end in limits) for row in rows]
    rows = rows[np.array(free, dtype=np.bool_)]
    at = np.clip(np.searchsorted(energy, energies[rows]), 1, len(energy) - 1)
    low = at - 1 if rising else len(energy) - 1 - at
    points = (branch.k, branch.energy, branch.slope_after, branch.slope_before)
    k, level, after, before = points
    return rows, np.stack([k[low], level[low], after[low], k[low + 1], level[low + 1], before[low + 1]])


def _roots(
    model: Model, energies: NDArray[np.float64], band: NDArray[np.intp], ends: NDArray[np.float64]
) -> NDArray[np.float64]:
    """Return k with E_band(k) = energy inside each bracket.

    The first guess is where the cubic through the ends has the energy; then Newton's steps, halving where one leaves
    the bracket, until the next step cannot matter.
    """
    k = _cubic_roots(energies, ends)
    low, high, rising = ends[0].copy(), ends[3].copy(), ends[4] > ends[1]
    least = 4 * np.finfo(np.float64).eps * (1.0 + float(np.abs(energies).max(initial=0.0)))
    open_ = np.arange(len(k))
    for _ in range(60):
        if not len(open_):
            break
        at, chosen = k[open_], band[open_]
        energy, slope = _values(model, at, chosen)
        miss = energy - energies[open_]
        is_past = (miss > 0) == rising[open_]
        high[open_] = np.where(is_past, at, high[open_])
        low[open_] = np.where(is_past, low[open_], at)
        next_k = at - np.divide(miss, slope, out=np.full_like(miss, np.inf), where=slope != 0)
        inside = (next_k >= low[open_]) & (next_k <= high[open_])
        k[open_] = np.where(inside, next_k, (low[open_] + high[open_]) / 2)
        step = np.abs(k[open_] - at)
        bend = np.abs(ends[5] - ends[2])[open_] / (ends[3] - ends[0])[open_] + np.abs(slope)
        done = inside & ((step < CLOSE) | (10 * bend * step**2 < CLOSE * np.abs(slope)))
        k[open_] = np.where(np.abs(miss) <= least, np.where(inside, k[open_], at), k[open_])
        open_ = open_[~(done | (np.abs(miss) <= least))]
    return k


def _cubic_roots(energies: NDArray[np.float64], ends: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return where the cubic through both ends of each bracket has the energy, by halving."""
    k, energy, slope, k_two, energy_two, slope_two = ends
    step = k_two - k
    rising = energy_two > energy
    low, high = np.zeros_like(k), np.ones_like(k)
    for _ in range(50):
        t = (low + high) / 2
        value = (
            energy * (1 + 2 * t) * (1 - t) ** 2
            + energy_two * t**2 * (3 - 2 * t)
            + step * t * (1 - t) * (slope * (1 - t) - slope_two * t)
        )
        is_past = (value > energies) == rising
        low, high = np.where(is_past, low, t), np.where(is_past, t, high)
    guess: NDArray[np.float64] = k + step * (low + high) / 2
    return guess


def _values(
    model: Model, k: NDArray[np.float64], band: NDArray[np.intp]
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Return energy and slope of one band at each k, eV and eV per π/a."""
    energy, slope = np.empty(len(k)), np.empty(len(k))
    for part in batches(model, len(k)):
        levels, vectors = band_states(model, k[part, None])
        each = np.arange(len(levels))
        energy[part], u = levels[each, band[part]], vectors[each, :, band[part]]
        dH, dS = bloch_derivative(model, k[part, None], 0)
        slope[part] = np.einsum("ks,kst,kt->k", u.conj(), dH, u, optimize=True).real
        if dS is not None:
            slope[part] -= energy[part] * np.einsum("ks,kst,kt->k", u.conj(), dS, u, optimize=True).real
    return energy, np.pi * slope
