"""Fermi energy and energy per cell of a crystal, from its exact electron count."""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from bandbook.model import Model
from bandbook.solver.branches import branches_of
from bandbook.solver.hamiltonian import band_energies
from bandbook.solver.quadrature import integral
from bandbook.solver.simplices import filled_part, zone_simplices

Real = NDArray[np.float64]

#: A mean over the zone has settled when doubling the mesh changes it by less, eV.
SETTLED: Final = 2e-10
#: Matrix elements that a mesh may ask for in all.
MOST_NUMBERS: Final = 4_000_000
#: Steps of the finest mesh along a line.
LONGEST: Final = 2**11
#: Sites of the largest cell whose bands get a node at each extreme.
MOST_TURNS: Final = 40
#: What the bands do at the Fermi energy of a metal.
METALS: Final = frozenset({"bands cross or overlap", "band partly filled"})


def fermi_energy(model: Model, kind: str, valence: float | None, conduction: float | None) -> float | None:
    """Return the Fermi energy, eV: mid-gap in an insulator, where bands touch their energy, otherwise from the filling.

    Args:
        model: The crystal.
        kind: What the bands do at the Fermi energy.
        valence: Highest energy of the highest filled band, eV.
        conduction: Lowest energy of the next one, eV.
    """
    if kind not in METALS:
        return None if valence is None or conduction is None else (valence + conduction) / 2
    if model.dimension == 1:
        return _fermi_line(model)
    return _fermi_zone(model)


def _fermi_zone(model: Model) -> float:
    """Return the energy below which linear triangles or tetrahedra hold half the electrons.

    Two meshes; the error of the finer one, n⁻², is taken from their difference.
    """
    n_each = _finest(model)
    coarse, fine = (_fermi_mesh(model, steps) for steps in (n_each // 2, n_each))
    return fine + (fine - coarse) / 3


def _fermi_mesh(model: Model, n_each: int) -> float:
    from scipy import optimize

    corners = zone_simplices(model, n_each)
    wanted = model.n_electrons / 2 / model.n_sites

    def excess(energy: float) -> float:
        return float(filled_part(corners, energy).mean()) - wanted

    low, high = float(corners.min()), float(corners.max())
    if wanted <= 0 or high <= low:
        return low
    return float(optimize.brentq(excess, low - 1e-9, high, xtol=1e-13, rtol=1e-14))


def _finest(model: Model) -> int:
    """Return the steps along each vector of the finest mesh that is asked for, a multiple of 4."""
    n_each = (MOST_NUMBERS / (8 * model.n_sites**2)) ** (1 / model.dimension)
    return max(24, min(int(n_each), 480 if model.dimension == 2 else 60) // 4 * 4)


def _mesh(model: Model, n_each: int) -> Real:
    """Return an even mesh, half a step off Γ, π/a."""
    axis = -1.0 + (2.0 * np.arange(n_each) + 1.0) / n_each
    return np.stack(np.meshgrid(*[axis] * model.dimension, indexing="ij"), axis=-1).reshape(-1, model.dimension)


@dataclass(frozen=True, eq=False)
class Line:
    """The bands of a 1D crystal at some k between which each of them rises or falls.

    Attributes:
        model: The crystal.
        k: π/a, from 0 to 1, ``(node,)``.
        energy: Sorted bands, eV, ``(node, band)``.
    """

    model: Model
    k: Real
    energy: Real

    def fermi_points(self, energy: float) -> list[tuple[float, int]]:
        """Return each k at which a band passes an energy, and the band."""
        from scipy import optimize

        is_above = self.energy > energy
        found = []
        for step, band in zip(*np.nonzero(is_above[1:] != is_above[:-1]), strict=True):

            def distance(k: float, band: int = int(band)) -> float:
                return float(band_energies(self.model, np.array([[k]]))[0, band] - energy)

            ends = float(self.k[step]), float(self.k[step + 1])
            is_inside = distance(ends[0]) * distance(ends[1]) < 0
            place = optimize.brentq(distance, *ends, xtol=1e-15) if is_inside else ends[int(is_above[step, band])]
            found.append((float(place), int(band)))
        return found

    def filled_states(self, energy: float) -> float:
        """Return the states below an energy, per cell and spin."""
        is_below = self.energy <= energy
        lengths = np.diff(self.k)[:, None] * (is_below[:-1] & is_below[1:])
        total = float(lengths.sum())
        for k, band in self.fermi_points(energy):
            step = min(max(int(np.searchsorted(self.k, k, side="right")) - 1, 0), len(self.k) - 2)
            if is_below[step, band] == is_below[step + 1, band]:
                step -= 1  # the band passes at the node
            total += k - self.k[step] if is_below[step, band] else self.k[step + 1] - k
        return float(total)


def line_of(model: Model) -> Line:
    """Return the bands of a 1D crystal with a node at each extreme of each band (on an even mesh where bands are many).

    >>> from bandbook.model import Coupling, Site
    >>> chain = Model((Site("A"),), (Coupling(0, 0, -1.0, (1,)),), dimension=1)
    >>> round(line_of(chain).filled_states(-1.0), 12)
    0.333333333333
    """
    if model.n_sites > MOST_TURNS:
        k = np.linspace(0.0, 1.0, 2401)
    else:
        k = np.unique(np.concatenate([np.array([0.0, 1.0]), *(branch.k for branch in branches_of(model).branches)]))
    return Line(model, k, band_energies(model, k[:, None]))


def _fermi_line(model: Model) -> float:
    """Return the energy below which the bands of a line hold half the electrons."""
    from scipy import optimize

    line = line_of(model)
    wanted = model.n_electrons / 2

    def excess(energy: float) -> float:
        return line.filled_states(energy) - wanted

    low, high = float(line.energy.min()), float(line.energy.max())
    if wanted <= 0 or high <= low:
        return low
    return float(optimize.brentq(excess, low - 1e-9, high, xtol=1e-13, rtol=1e-14))


def energy_per_cell(
    model: Model, kind: str, fermi: float | None, *, closest: tuple[float, ...] | None = None
) -> float | None:
    """Return the energy of the occupied states, both spins, eV per cell; ``None`` where its mean does not settle.

    In 1D by even meshes, which converge exponentially in an insulator, otherwise by panels between the Fermi points or
    the k where bands touch; in 2D and 3D by meshes that are doubled until they settle. For the alternating chain it is
    (4/π)(β₁ + β₂)E(m), m = 4β₁β₂/(β₁ + β₂)².

    Args:
        model: The crystal.
        kind: What the bands do at the Fermi energy.
        fermi: Fermi energy, eV.
        closest: The k at which the highest filled and the lowest empty band come closest, π/a.
    """
    n_filled = round(model.n_electrons / 2)
    if model.dimension > 1:
        return _zone_energy(model, is_metal=kind in METALS)
    if kind in METALS and fermi is not None:
        return _metal_line_energy(model, fermi)

    def occupied(k: Real) -> Real:
        return np.asarray(band_energies(model, k[:, None])[:, :n_filled].sum(axis=1))

    found = _even_mean(occupied) if kind == "insulator" else None
    if found is None:
        points = sorted({0.0, 1.0, min(abs(closest[0]), 1.0) if closest else 0.0})
        found = integral(occupied, points, within=SETTLED / 100)
    return None if found is None else 2 * found


def _even_mean(function: Callable[[Real], Real]) -> float | None:
    """Return the mean over 0 to 1 by even meshes, which converge exponentially when the function is smooth and even."""
    n_steps, total = 32, float("nan")
    ends = float(function(np.array([0.0, 1.0])).sum()) / 2
    inner = float(function(np.arange(1, n_steps) / n_steps).sum())
    while n_steps <= LONGEST:
        previous, total = total, (ends + inner) / n_steps
        if abs(total - previous) < SETTLED / 100:
            return total
        inner += float(function((np.arange(n_steps) + 0.5) / n_steps).sum())
        n_steps *= 2
    return None


def _metal_line_energy(model: Model, fermi: float) -> float | None:
    def occupied(k: Real) -> Real:
        return np.asarray(np.minimum(band_energies(model, k[:, None]) - fermi, 0.0).sum(axis=1))

    points = sorted({0.0, 1.0, *(k for k, _ in line_of(model).fermi_points(fermi))})
    found = integral(occupied, points, within=SETTLED / 100)
    return None if found is None else 2 * found + model.n_electrons * fermi


def _zone_energy(model: Model, *, is_metal: bool) -> float | None:
    """Return twice the zone's mean of the filled states: meshes n, 2n, …, the leading error extrapolated away.

    The error falls as n⁻³ where bands touch in a point and as n⁻² where they are partly filled; exponentially in an
    insulator.
    """
    n_each, previous, better = 12 if model.dimension == 3 else 48, None, None
    order = 2 if is_metal else 3
    while n_each**model.dimension * model.n_sites**2 <= MOST_NUMBERS:
        mean = _mean_filled(model, n_each, is_metal=is_metal)
        if previous is not None:
            if not is_metal and abs(mean - previous) < SETTLED:
                return 2 * mean
            last, better = better, mean + (mean - previous) / (2**order - 1)
            if last is not None and abs(better - last) < SETTLED:
                return 2 * better
        previous, n_each = mean, 2 * n_each
    return None


def _mean_filled(model: Model, n_each: int, *, is_metal: bool) -> float:
    energies = band_energies(model, _mesh(model, n_each))
    if not is_metal:
        return float(energies[:, : round(model.n_electrons / 2)].sum(axis=1).mean())
    levels = np.sort(energies.ravel())
    wanted = model.n_electrons / 2 * len(energies)
    whole = int(wanted)
    rest = (wanted - whole) * float(levels[whole]) if whole < len(levels) else 0.0
    return (float(levels[:whole].sum()) + rest) / len(energies)
