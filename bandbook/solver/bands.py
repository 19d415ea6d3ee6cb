"""The bands of a crystal: E(k) on a path, extremes in the whole zone, gaps, Fermi energy, masses, energy per cell."""

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from bandbook.errors import PhysicsError
from bandbook.model import Model
from bandbook.solver.filling import energy_per_cell, fermi_energy
from bandbook.solver.hamiltonian import band_energies
from bandbook.solver.masses import Mass, mass_at
from bandbook.solver.zone import Path, lowest, named_points, path_of, zone_mesh

Real = NDArray[np.float64]

#: Bands closer than this part of the total width touch.
TOUCH: Final = 1e-8
#: Sites of the largest cell whose bands are computed on meshes.
MOST_SITES: Final = 1500


@dataclass(frozen=True)
class Extreme:
    """An extreme of a band.

    Attributes:
        energy: eV.
        k: π/a along each lattice vector.
        band: The band, from 1.
    """

    energy: float
    k: tuple[float, ...]
    band: int


@dataclass(frozen=True)
class Bands:
    """The bands of a crystal.

    Attributes:
        path: The path.
        energies: E on the path, eV, ``(point, band)``.
        points: Name → energies there, eV, ``(band,)``.
        ranges: Lowest and highest energy of each band in the whole zone, eV, ``(band, 2)``.
        kind: ``"insulator"``, ``"bands touch"``, ``"bands cross or overlap"`` or ``"band partly filled"``.
        gap: Smallest gap in the whole zone, eV; 0 where there is none; ``None`` where no band is filled or none empty.
        direct_gap: Smallest vertical distance of the highest filled and the lowest empty band, eV, or ``None``.
        direct_k: Where it is, π/a.
        valence: Highest filled state, or ``None``.
        conduction: Lowest empty state, or ``None``.
        fermi_energy: Mid-gap in an insulator, eV; ``None`` where no filling defines one.
        total_width: Lowest to highest, gaps included, eV.
        energy_per_cell: Occupied states, both spins, eV; ``None`` where the mesh does not settle.
        mass_hole: At the top of the valence band.
        mass_electron: At the bottom of the conduction band.
    """

    path: Path
    energies: Real
    points: dict[str, Real]
    ranges: Real
    kind: str
    gap: float | None
    direct_gap: float | None
    direct_k: tuple[float, ...] | None
    valence: Extreme | None
    conduction: Extreme | None
    fermi_energy: float | None
    total_width: float
    energy_per_cell: float | None
    mass_hole: Mass
    mass_electron: Mass


@dataclass(frozen=True)
class _Edges:
    valence: Extreme | None
    conduction: Extreme | None
    kind: str
    gap: float | None


def solve_bands(model: Model, *, n_points: int = 240) -> Bands:
    """Return the bands of a crystal.

    Args:
        model: A crystal, dimension 1 to 3.
        n_points: Points of the path.

    Raises:
        PhysicsError: The model is a molecule, its cell is too large, or its overlap matrix is not positive definite.

    >>> from bandbook.model import Coupling, Site
    >>> sites = (Site("A"), Site("B"))
    >>> bonds = (Coupling(0, 1, -2.85, (0,)), Coupling(1, 0, -2.15, (1,)))
    >>> round(solve_bands(Model(sites, bonds, dimension=1)).gap, 9)
    1.4
    """
    if model.dimension == 0:
        raise PhysicsError("a molecule has no bands; bands need one lattice vector or more; ask for its levels")
    if model.n_sites > MOST_SITES:
        found = f"the cell has {model.n_sites} sites"
        raise PhysicsError(f"{found}; bands are computed up to {MOST_SITES}; take a smaller cell")
    path = path_of(model, n_points)
    mesh = zone_mesh(model)
    values = band_energies(model, mesh)
    ranges = _ranges(model, mesh, values)
    width = float(ranges.max() - ranges.min())
    edges = _edges(model, mesh, values, width)
    direct_gap, direct_k = _direct(model, mesh, values, edges)
    fermi = fermi_energy(model, edges.kind, _energy(edges.valence), _energy(edges.conduction))
    return Bands(
        path=path,
        energies=band_energies(model, path.k),
        points={name: band_energies(model, np.array([k]))[0] for name, k in named_points(model).items()},
        ranges=ranges,
        kind=edges.kind,
        gap=edges.gap,
        direct_gap=direct_gap,
        direct_k=direct_k,
        valence=edges.valence,
        conduction=edges.conduction,
        fermi_energy=fermi,
        total_width=width,
        energy_per_cell=energy_per_cell(model, edges.kind, fermi),
        mass_hole=_mass(model, edges.valence, edges.kind, width),
        mass_electron=_mass(model, edges.conduction, edges.kind, width),
    )


def _energy(extreme: Extreme | None) -> float | None:
    return None if extreme is None else extreme.energy


def _ranges(model: Model, mesh: Real, values: Real) -> Real:
    """Return the refined range of each band; bands of large cells keep what the mesh found, all but the outermost."""
    n_bands = values.shape[1]
    ranges = np.stack([values.min(axis=0), values.max(axis=0)], axis=1)
    chosen = range(n_bands) if n_bands <= 12 else (0, n_bands - 1)
    for band in chosen:
        ranges[band, 0] = _least(model, mesh, values, band=band, sign=1)[0]
        ranges[band, 1] = -_least(model, mesh, values, band=band, sign=-1)[0]
    return ranges


def _least(model: Model, mesh: Real, values: Real, *, band: int, sign: int) -> tuple[float, Real]:
    return lowest(lambda k: sign * band_energies(model, k)[:, band], mesh, sign * values[:, band])


def _edges(model: Model, mesh: Real, values: Real, width: float) -> _Edges:
    n_filled = model.n_electrons / 2
    if n_filled != round(n_filled):
        return _Edges(None, None, "band partly filled", 0.0)
    filled = round(n_filled)
    valence = conduction = None
    if filled > 0:
        top = _least(model, mesh, values, band=filled - 1, sign=-1)
        valence = Extreme(-top[0], tuple(float(part) for part in top[1]), filled)
    if filled < model.n_sites:
        bottom = _least(model, mesh, values, band=filled, sign=1)
        conduction = Extreme(bottom[0], tuple(float(part) for part in bottom[1]), filled + 1)
    if valence is None or conduction is None:
        return _Edges(valence, conduction, "insulator", None)
    gap = conduction.energy - valence.energy
    if gap > TOUCH * width:
        return _Edges(valence, conduction, "insulator", gap)
    kind = "bands touch" if gap > -TOUCH * width else "bands cross or overlap"
    return _Edges(valence, conduction, kind, 0.0)


def _direct(model: Model, mesh: Real, values: Real, edges: _Edges) -> tuple[float | None, tuple[float, ...] | None]:
    if edges.valence is None or edges.conduction is None:
        return None, None
    band = edges.conduction.band - 1

    def distance(k: Real) -> Real:
        energies = band_energies(model, k)
        return energies[:, band] - energies[:, band - 1]

    found, k = lowest(distance, mesh, values[:, band] - values[:, band - 1])
    return max(0.0, found), tuple(float(part) for part in k)


def _mass(model: Model, extreme: Extreme | None, kind: str, width: float) -> Mass:
    if extreme is None or kind != "insulator":
        return Mass(
            None,
            (),
            "no gap, so no extreme of its own" if extreme is not None or kind != "insulator" else "no such band",
        )
    return mass_at(model, np.array(extreme.k), band=extreme.band - 1, width=width)
