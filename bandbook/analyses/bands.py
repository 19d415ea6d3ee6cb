"""The question ``bands``: E(k) of a crystal, its gap searched in the whole zone, widths, masses."""

from collections.abc import Mapping
from typing import Any

from bandbook.analyses.analysis import Analysis, Asked
from bandbook.exhibits import Column, Figure, Quantity, QuantityName, Table, typeset
from bandbook.exhibits import drawing as pen
from bandbook.model import Model
from bandbook.parameters import Problem
from bandbook.solver.bands import Bands, Extreme, solve_bands

GREEK = {"Gamma": "Γ"}


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
    """Return where the edges are, and the energies on the path."""
    dimension = asked.model.dimension
    k_heads = tuple(
        Column(
            f"k{axis + 1}" if dimension > 1 else "k",
            f"k{'₁₂₃'[axis]}" if dimension > 1 else "k",
            "k along a lattice vector",
            "π/a",
            6,
            4,
        )
        for axis in range(dimension)
    )
    edges = (
        ("valence top", result.valence, result.mass_hole),
        ("conduction bottom", result.conduction, result.mass_electron),
    )
    rows = tuple(_edge_row(name, extreme, mass) for name, extreme, mass in edges if extreme is not None)
    heads = (
        Column("edge", "edge", "which edge"),
        Column("band", "band", "number of the band from below"),
        Column("energy", "E", "energy", "eV", 6, 4),
        *k_heads,
        Column("mass", "m*", "effective mass, geometric mean", "m_e", 6, 4),
        Column("remark", "remark", "why there is no mass"),
    )
    tables = (Table("edges", "Band edges, searched in the whole zone.", heads, rows),) if rows else ()
    bands = tuple(
        Column(f"band_{number + 1}", f"E{number + 1}", "energy of the band", "eV", 6, 4)
        for number in range(result.energies.shape[1])
    )
    path = tuple(
        (*(float(part) for part in k), *(float(energy) for energy in energies))
        for k, energies in zip(result.path.k, result.energies, strict=True)
    )
    return (*tables, Table("path", "Energies on the path.", (*k_heads, *bands), path, most_shown=12))


def _edge_row(name: str, extreme: Extreme, mass: Any) -> tuple[Any, ...]:
    return (name, extreme.band, extreme.energy, *extreme.k, mass.mean, mass.reason)


def _words(result: Bands) -> str:
    if result.kind != "insulator":
        return f"{result.kind}; Fermi energy {typeset(result.fermi_energy, 3)} eV"
    if result.gap is None or result.valence is None or result.conduction is None:
        return "no gap between a filled and an empty band"
    at = ", ".join(typeset(part, 3) for part in result.conduction.k)
    kind = "direct" if abs(result.gap - (result.direct_gap or 0.0)) < 1e-7 else "indirect"
    return f"insulator with a {kind} gap of {typeset(result.gap, 3)} eV, lowest empty state at k = ({at}) π/a"


def draw(asked: Asked, result: Bands) -> tuple[Figure, ...]:
    """Return E(k) on the path."""
    words = f"{_words(result)}; total width {typeset(result.total_width, 3)} eV"
    names = [GREEK.get(name, name) for name in result.path.names]
    route = "–".join(names)

    def strokes(axes: Any) -> None:
        axes.plot(result.path.distance, result.energies, color=pen.SERIES[0], linewidth=1.2)
        ticks = [float(result.path.distance[at]) for at in result.path.at]
        for tick in ticks:
            axes.axvline(tick, color=pen.LINE, linewidth=0.8, zorder=0)
        axes.set_xlim(ticks[0], ticks[-1])
        if asked.model.dimension == 1:
            middle = [ticks[0] + part * (ticks[-1] - ticks[0]) for part in (0, 0.25, 0.5, 0.75, 1)]
            axes.set_xticks(middle, [f"{names[0]}  0", "1/4", "1/2", "3/4", f"{names[-1]}  1"])
            axes.set_xlabel("k / (π/a)")
        else:
            axes.set_xticks(ticks, names)
            axes.set_xlabel("k along the path")
        if result.fermi_energy is not None:
            pen.rule(axes, result.fermi_energy, "Fermi energy")
        pen.energy_axis(axes, beta=asked.model.beta_unit, alpha=asked.model.alpha_unit)

    text = (f"Bands along {route}: {words}.", f"E(k) along {route}: {words}.")
    return (pen.drawn("bands" if asked.name == "bands" else f"{asked.name}-bands", strokes, words=text, height=4.2),)


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
