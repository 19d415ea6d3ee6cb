"""The bands of a crystal: E(k) on a path, extremes in the whole zone, gaps, Fermi energy, masses, energy per cell."""

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from bandbook.errors import PhysicsError
from bandbook.model import Model
from bandbook.solver.filling import energy_per_cell, fermi_energy
from bandbook.solver.hamiltonian import band_energies
from bandbook.solver.labels import is_backbone
from bandbook.solver.masses import Mass, mass_at
from bandbook.solver.zone import Path, favoured_places, lowest, named_points, path_of, zone_mesh

Real = NDArray[np.float64]

#: Bands closer than this part of the total width touch.
TOUCH: Final = 1e-8
#: Sites of the largest cell whose bands are computed on meshes.
MOST_SITES: Final = 1500
#: Bands up to which each band's range is refined.
MOST_REFINED: Final = 12


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
        has_extended_zone: Whether the crystal is one unbranched chain, whose bands unfold (:func:`extended_k`).
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
    has_extended_zone: bool

    @property
    def widths(self) -> Real:
        """Width of each band, eV, ``(band,)``."""
        widths: Real = self.ranges[:, 1] - self.ranges[:, 0]
        return widths


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
    zone = _Zone(model)
    ranges = _ranges(zone)
    width = float(ranges.max() - ranges.min())
    edges = _edges(zone, width)
    direct_gap, direct_k = _direct(zone, edges)
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
        energy_per_cell=energy_per_cell(model, edges.kind, fermi, closest=direct_k),
        mass_hole=_mass(model, edges.valence, edges.kind, width),
        mass_electron=_mass(model, edges.conduction, edges.kind, width),
        has_extended_zone=is_backbone(model),
    )


def _energy(extreme: Extreme | None) -> float | None:
    return None if extreme is None else extreme.energy


class _Zone:
    """The bands of a crystal on a mesh of the whole zone, and extremes between its points."""

    def __init__(self, model: Model) -> None:
        self.model = model
        self.mesh = zone_mesh(model)
        self.values = band_energies(model, self.mesh)
        self.favoured = favoured_places(model)

    def least(self, band: int, *, sign: int = 1) -> tuple[float, Real]:
        """Return the least energy of a band (the least of its negative with ``sign`` −1) and where it is."""

        def energy(k: Real) -> Real:
            return sign * band_energies(self.model, k)[:, band]

        return lowest(energy, self.mesh, sign * self.values[:, band], favoured=self.favoured)

    def least_distance(self, band: int) -> tuple[float, Real]:
        """Return the least vertical distance of a band from the one below and where it is."""

        def distance(k: Real) -> Real:
            energies = band_energies(self.model, k)
            return np.asarray(energies[:, band] - energies[:, band - 1])

        values = self.values[:, band] - self.values[:, band - 1]
        return lowest(distance, self.mesh, values, favoured=self.favoured)


def _ranges(zone: _Zone) -> Real:
    """Return the refined range of each band; bands of large cells keep what the mesh found, all but the outermost."""
    n_bands = zone.values.shape[1]
    ranges = np.stack([zone.values.min(axis=0), zone.values.max(axis=0)], axis=1)
    for band in range(n_bands):
        if n_bands <= MOST_REFINED or band == 0:
            ranges[band, 0] = zone.least(band)[0]
        if n_bands <= MOST_REFINED or band == n_bands - 1:
            ranges[band, 1] = -zone.least(band, sign=-1)[0]
    return ranges


def _edges(zone: _Zone, width: float) -> _Edges:
    n_filled = zone.model.n_electrons / 2
    if n_filled != round(n_filled):
        return _Edges(None, None, "band partly filled", 0.0)
    filled = round(n_filled)
    valence = conduction = None
    if filled > 0:
        top = zone.least(filled - 1, sign=-1)
        valence = Extreme(-top[0], _tuple(top[1]), filled)
    if filled < zone.model.n_sites:
        bottom = zone.least(filled)
        conduction = Extreme(bottom[0], _tuple(bottom[1]), filled + 1)
    if valence is None or conduction is None:
        return _Edges(valence, conduction, "insulator", None)
    gap = conduction.energy - valence.energy
    if gap > TOUCH * width:
        return _Edges(valence, conduction, "insulator", gap)
    kind = "bands touch" if gap > -TOUCH * width else "bands cross or overlap"
    return _Edges(valence, conduction, kind, 0.0)


def _direct(zone: _Zone, edges: _Edges) -> tuple[float | None, tuple[float, ...] | None]:
    if edges.valence is None or edges.conduction is None:
        return None, None
    found, k = zone.least_distance(edges.conduction.band - 1)
    return max(0.0, found), _tuple(k)


def _tuple(k: Real) -> tuple[float, ...]:
    return tuple(float(part) for part in k)


def _mass(model: Model, extreme: Extreme | None, kind: str, width: float) -> Mass:
    if kind != "insulator":
        return Mass(None, (), "no gap, so no extreme of its own")
    if extreme is None:
        return Mass(None, (), "no such band")
    return mass_at(model, np.array(extreme.k), band=extreme.band - 1, width=width)
