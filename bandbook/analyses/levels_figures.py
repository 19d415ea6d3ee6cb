"""Figures of the question ``levels``: the level diagram, and the levels on the bands of the crystal."""

from typing import TYPE_CHECKING, Any

import numpy as np

from bandbook.analyses.analysis import Asked
from bandbook.exhibits import Figure, typeset
from bandbook.exhibits import drawing as pen
from bandbook.solver.hamiltonian import band_energies

if TYPE_CHECKING:
    from bandbook.analyses.levels import LevelsResult

#: Levels above which a diagram shows those around the Fermi energy only.
MOST_DRAWN = 40
#: Bands above which the picture of levels on the band keeps those around the Fermi energy.
MOST_BANDS = 24


def draw(asked: Asked, result: "LevelsResult") -> tuple[Figure, ...]:
    """Return the level diagram and, for a piece of a one-dimensional crystal, the levels on its bands."""
    figures = [_diagram(asked, result)]
    if asked.model.dimension == 1:
        figures.append(_on_bands(asked, result))
    return tuple(figures)


def _gap_words(asked: Asked, result: "LevelsResult") -> str:
    levels, beta = result.levels, asked.model.beta_unit
    if levels.is_open_shell:
        return f"open shell at {typeset(levels.homo, 3)} eV"
    if levels.gap is None:
        return "no gap"
    in_beta = f" ({typeset(levels.gap / abs(beta), 3)} |β|)" if beta else ""
    return f"gap {typeset(levels.gap, 3)} eV{in_beta}"


def _diagram(asked: Asked, result: "LevelsResult") -> Figure:
    levels = result.levels
    chosen = _near_fermi(result)
    shown = len(chosen)
    part = "" if shown == levels.n_levels else f" The {shown} around the Fermi energy are drawn."
    homo = f", HOMO {typeset(levels.homo, 3)} eV" if levels.homo is not None else ""
    words = f"{levels.n_levels} levels with {result.piece.electrons} electrons{homo}, {_gap_words(asked, result)}."
    caption = f"{words}{part} Degenerate levels stand side by side; each dot is an electron."

    def strokes(axes: Any) -> None:
        for position in chosen:
            group = [other for other in chosen if levels.group[other] == levels.group[position]]
            offset = 1.25 * (group.index(position) - (len(group) - 1) / 2)
            _level(axes, levels.energy[position], offset, levels.occupation[position])
        axes.set_xticks([])
        axes.spines["bottom"].set_visible(False)
        reach = 1.25 * max(3, *(levels.degeneracy[chosen])) / 2 + 0.6
        axes.set_xlim(-reach, reach)
        axes.margins(y=0.08)
        pen.energy_axis(axes, beta=asked.model.beta_unit, alpha=asked.model.alpha_unit)

    return pen.drawn(
        f"{asked.name}-diagram" if asked.name != "levels" else "diagram",
        strokes,
        words=(f"Level diagram: {words}", caption),
    )


def _near_fermi(result: "LevelsResult") -> Any:
    levels = result.levels
    if len(levels.energy) <= MOST_DRAWN:
        return np.arange(len(levels.energy))
    filled = int(np.ceil(levels.occupation.sum() / 2))
    low = min(max(0, filled - MOST_DRAWN // 2), len(levels.energy) - MOST_DRAWN)
    return np.arange(low, low + MOST_DRAWN)


def _level(axes: Any, energy: float, offset: float, occupation: float) -> None:
    axes.plot([offset - 0.5, offset + 0.5], [energy, energy], color=pen.INK, linewidth=1.6, solid_capstyle="butt")
    dots = {2.0: (-0.18, 0.18), 1.0: (0.0,)}.get(round(float(occupation), 6), ())
    for dot in dots:
        axes.plot([offset + dot], [energy], "o", color=pen.SERIES[0], markersize=5.5)
    if 0 < occupation < 2 and not dots:
        axes.annotate(f"{occupation:.2g}", (offset, energy), ha="center", va="bottom", fontsize=8, color=pen.INK)


def _on_bands(asked: Asked, result: "LevelsResult") -> Figure:
    levels, places = result.levels, result.places
    placed = [index for index, k in enumerate(places.k) if k is not None]
    gap = [index for index in range(len(levels.energy)) if places.is_gap_level[index]]
    ks = ", ".join(typeset(places.k[index], 3) for index in placed[:6]) + (", …" if len(placed) > 6 else "")
    words = f"{len(placed)} levels on the bands of the infinite system at k = {ks} π/a"
    words += f"; {len(gap)} gap levels at the left margin." if gap else "; no gap level."
    nodes = ""
    if result.nodes and placed and asked.model.n_sites == 1:
        labels = ", ".join(typeset(label, 3) for label in result.nodes[:6]) + (", …" if len(result.nodes) > 6 else "")
        nodes = f" The node labels (crosses; {labels} of π/spacing) count sign changes: no k, they miss the band."
    signs = "Filled: occupied, ring: empty, square: gap level."
    caption = f"Levels of the piece on the bands of its crystal: {words} {signs}{nodes}"

    def strokes(axes: Any) -> None:
        _bands(axes, asked, result)
        for index in placed:
            _dot(axes, places.k[index], levels.energy[index], is_full=levels.occupation[index] > 0, marker="o")
        for index in gap:
            _dot(axes, -0.035, levels.energy[index], is_full=levels.occupation[index] > 0, marker="s")
        if result.nodes and asked.model.n_sites == 1:
            axes.plot(result.nodes, levels.energy, "x", color=pen.SERIES[1], markersize=6, markeredgewidth=1.3)
        axes.set_xlim(-0.07, 1.02)
        axes.set_xticks([0, 0.25, 0.5, 0.75, 1.0], ["Γ  0", "1/4", "1/2", "3/4", "X  1"])
        axes.set_xlabel("k / (π/a)")
        pen.energy_axis(axes, beta=asked.model.beta_unit, alpha=asked.model.alpha_unit)

    name = "on-bands" if asked.name == "levels" else f"{asked.name}-on-bands"
    return pen.drawn(name, strokes, words=(words, caption), height=4.2)


def _bands(axes: Any, asked: Asked, result: "LevelsResult") -> None:
    k = np.linspace(0.0, 1.0, 201)
    energies = band_energies(asked.model, k[:, None])
    filled = round(asked.model.n_electrons / 2)
    low = max(0, min(filled - MOST_BANDS // 2, energies.shape[1] - MOST_BANDS))
    for band in range(low, min(energies.shape[1], low + MOST_BANDS)):
        axes.plot(k, energies[:, band], color=pen.QUIET, linewidth=1.0, zorder=1)
    if result.levels.is_selected:
        span = np.ptp(result.levels.energy) * 0.1 + 1e-6
        axes.set_ylim(result.levels.energy.min() - span, result.levels.energy.max() + span)


def _dot(axes: Any, k: float | None, energy: float, *, is_full: bool, marker: str) -> None:
    face = pen.SERIES[0] if is_full else pen.PAPER
    axes.plot([k], [energy], marker, color=pen.SERIES[0], markerfacecolor=face, markersize=6.5, zorder=3, clip_on=False)
