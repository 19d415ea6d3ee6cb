"""The question ``bands``: E(k) of a crystal, its gap searched in the whole zone, widths, masses."""

from collections.abc import Mapping
from typing import Any

from bandbook.analyses.analysis import Analysis, Asked
from bandbook.analyses.bands_figures import GREEK, draw
from bandbook.exhibits import Column, Quantity, QuantityName, Table
from bandbook.model import Model
from bandbook.parameters import Problem
from bandbook.solver.bands import Bands, Extreme, solve_bands
from bandbook.solver.masses import Mass

Edge = tuple[str, Extreme, Mass]


def inspect(study: Mapping[str, Any], model: Model | None) -> list[Problem]:
    """Return the one thing that can be wrong: a molecule has no bands."""
    del study
    if model is None or model.dimension:
        return []
    found = "the system is a molecule"
    return [Problem(found, "bands need a periodic system", 'ask question = "levels"', ("question",))]


def compute(asked: Asked) -> Bands:
    """Solve the bands."""
    return solve_bands(asked.model)


def report(asked: Asked, result: Bands) -> tuple[Quantity, ...]:
    """Return the quantities."""
    valence, conduction = result.valence, result.conduction
    electrons = asked.model.n_electrons
    fixed = (
        asked.quantity("gap", "difference", result.gap, "smallest gap in the whole zone"),
        asked.quantity("direct_gap", "difference", result.direct_gap, "smallest vertical distance at the gap"),
        asked.quantity("total_width", "difference", result.total_width, "lowest to highest energy, gaps included"),
        asked.quantity("fermi_energy", "level", result.fermi_energy, "Fermi energy, mid-gap in an insulator"),
        asked.quantity("valence_top", "level", valence.energy if valence else None, "highest filled state"),
        asked.quantity("conduction_bottom", "level", conduction.energy if conduction else None, "lowest empty state"),
        asked.quantity(
            "energy_per_cell", "total", result.energy_per_cell, "energy of the occupied states, both spins",
            electrons=electrons,
        ),
        asked.quantity("mass_hole", "mass", result.mass_hole.mean, "effective mass, valence top"),
        asked.quantity("mass_electron", "mass", result.mass_electron.mean, "effective mass, conduction bottom"),
    )  # fmt: skip
    points = tuple(
        asked.quantity(f"energy_{name}_{number}", "level", float(energy), f"band {number} at {GREEK.get(name, name)}")
        for name, energies in result.points.items()
        for number, energy in enumerate(energies, start=1)
    )
    return (*fixed, *points)


def tabulate(asked: Asked, result: Bands) -> tuple[Table, ...]:
    """Return where the edges are, the principal masses in two and three dimensions, and the energies on the path."""
    k_heads = _k_heads(asked.model.dimension)
    found = (
        ("valence top", result.valence, result.mass_hole),
        ("conduction bottom", result.conduction, result.mass_electron),
    )
    edges = tuple((name, extreme, mass) for name, extreme, mass in found if extreme is not None)
    tables = [_edges_table(edges, k_heads)] if edges else []
    if any(len(mass.principal) > 1 for _, _, mass in edges):
        tables.append(_masses_table(edges, asked.model.dimension))
    bands = tuple(
        Column(f"band_{number + 1}", f"E{number + 1}", f"energy of band {number + 1} from below", "eV", 6, 4)
        for number in range(result.energies.shape[1])
    )
    path = tuple(
        (*(float(part) for part in k), *(float(energy) for energy in energies))
        for k, energies in zip(result.path.k, result.energies, strict=True)
    )
    return (*tables, Table("path", "Energies on the path.", (*k_heads, *bands), path, most_shown=12))


def _k_heads(dimension: int) -> tuple[Column, ...]:
    if dimension == 1:
        return (Column("k", "k", "k along the lattice vector", "π/a", 6, 4),)
    return tuple(
        Column(f"k{axis + 1}", f"k{'₁₂₃'[axis]}", f"k along lattice vector {axis + 1}", "π/a", 6, 4)
        for axis in range(dimension)
    )


def _edges_table(edges: tuple[Edge, ...], k_heads: tuple[Column, ...]) -> Table:
    heads = (
        Column("edge", "edge", "which edge"),
        Column("band", "band", "number of the band from below"),
        Column("energy", "E", "energy", "eV", 6, 4),
        *k_heads,
        Column("mass", "m*", "effective mass, geometric mean of the principal masses", "m_e", 6, 4),
        Column("remark", "remark", "why there is no mass"),
    )
    rows: tuple[tuple[Any, ...], ...] = tuple(
        (name, extreme.band, extreme.energy, *extreme.k, mass.mean, mass.reason) for name, extreme, mass in edges
    )
    return Table("edges", "Band edges, searched in the whole zone.", heads, rows)


def _masses_table(edges: tuple[Edge, ...], dimension: int) -> Table:
    heads = (
        Column("edge", "edge", "which edge"),
        *(
            Column(f"mass_{axis + 1}", f"m{'₁₂₃'[axis]}", "principal value of the mass tensor, ascending", "m_e", 6, 4)
            for axis in range(dimension)
        ),
    )
    rows: tuple[tuple[Any, ...], ...] = tuple((name, *mass.principal) for name, _, mass in edges if mass.principal)
    return Table("masses", "Principal values of the effective-mass tensors at the band edges.", heads, rows)


def warn(asked: Asked, result: Bands) -> tuple[str, ...]:
    """Return what a reader could be misled by."""
    warnings = []
    if result.kind != "insulator":
        warnings.append(f"The gap is 0: {result.kind}. There is no effective mass.")
    if result.energy_per_cell is None:
        warnings.append(
            "The energy per cell is left out: its mean over the zone does not settle to the decimals that are kept."
        )
    if asked.model.dimension > 1 and result.kind in {"bands cross or overlap", "band partly filled"}:
        warnings.append("The Fermi energy comes from counting states on a mesh and is good to a few meV only.")
    return tuple(warnings)


BANDS = Analysis(
    question="bands",
    meaning="E(k) of a crystal: gap, widths, Fermi energy, effective masses",
    example='question = "bands"\n',
    fields=(),
    quantities=(
        QuantityName("gap", "difference", "smallest gap in the whole zone"),
        QuantityName("direct_gap", "difference", "smallest vertical distance of the bands at the gap"),
        QuantityName("total_width", "difference", "lowest to highest energy, gaps included"),
        QuantityName("fermi_energy", "level", "Fermi energy, mid-gap in an insulator"),
        QuantityName("valence_top", "level", "highest filled state"),
        QuantityName("conduction_bottom", "level", "lowest empty state"),
        QuantityName("energy_per_cell", "total", "energy of the occupied states, both spins"),
        QuantityName("mass_hole", "mass", "effective mass at the top of the valence band"),
        QuantityName("mass_electron", "mass", "effective mass at the bottom of the conduction band"),
        QuantityName("energy_<point>_<n>", "level", "energy of band n at a named point: Gamma, X, K, M, …"),
    ),
    inspect=inspect,
    compute=compute,
    report=report,
    tabulate=tabulate,
    draw=draw,
    warn=warn,
)
