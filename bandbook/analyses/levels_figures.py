"""Figures of the question ``levels``: the level diagram, and the levels on the bands of the crystal."""

from collections.abc import Iterable, Mapping
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from bandbook.analyses.analysis import Asked, counted, drawable
from bandbook.analyses.levels_lobes import orbitals
from bandbook.analyses.sketches import sketch_piece
from bandbook.exhibits import Figure, typeset
from bandbook.exhibits import drawing as pen
from bandbook.solver.hamiltonian import band_energies

if TYPE_CHECKING:
    from bandbook.analyses.levels import LevelsResult

#: Levels above which a diagram shows those around the Fermi energy only.
MOST_DRAWN = 40
#: Bands above which the picture of levels on the band keeps those around the Fermi energy.
MOST_BANDS = 24
#: Levels above which the picture of levels on the band leaves some out evenly.
MOST_DOTS = 120
#: Numbers of a list that a caption gives.
MOST_NAMED = 6
#: Distance of neighbours of a degenerate group, in widths of a level.
STEP = 1.25
#: Part of the vertical scale below which two marks would touch.
TOUCHING = 0.035


def draw(asked: Asked, result: "LevelsResult") -> tuple[Figure, ...]:
    """Return the sketch of a piece, its level diagram and orbitals, and for a 1D crystal the levels on its bands."""
    study, figures = asked.study, [_diagram(asked, result), orbitals(asked, result)]
    if asked.model.dimension or study["changes"]:
        sketch = sketch_piece(asked.name, asked.model, result.piece, asked=study, lonely=result.lonely)
        figures.insert(0, sketch)
    if asked.model.dimension == 1:
        figures.append(_on_bands(asked, result))
    return tuple(figure for figure in figures if figure is not None)


def _gap_words(asked: Asked, result: "LevelsResult") -> str:
    levels, beta = result.levels, asked.model.beta_unit
    if levels.is_open_shell:
        return f"open shell at {typeset(levels.homo, 3)} eV"
    if levels.gap is None:
        return "no gap, for nothing is filled or nothing is empty"
    if levels.gap < 0.0005:
        return "gap below 0.001 eV"
    in_beta = f" ({typeset(levels.gap / abs(beta), 3)} |β|)" if beta else ""
    return f"gap {typeset(levels.gap, 3)} eV{in_beta}"


def _diagram(asked: Asked, result: "LevelsResult") -> Figure:
    levels = result.levels
    chosen = near_fermi(result)
    energies = drawable(levels.energy)
    homo = f", HOMO {typeset(levels.homo, 3)} eV" if levels.homo is not None and not levels.is_open_shell else ""
    words = (
        f"{counted(levels.n_levels, 'level')} with {counted(result.piece.electrons, 'electron')}{homo}, "
        f"{_gap_words(asked, result)}."
    )
    part = "" if len(chosen) == levels.n_levels else f" The {len(chosen)} around the Fermi energy are drawn."
    caption = f"{words}{part} Degenerate levels stand side by side; each dot is an electron."

    def strokes(axes: Any) -> None:
        places = side_by_side(levels.group[chosen])
        for position, place in zip(chosen, places, strict=True):
            _level(axes, energies[position], place, levels.occupation[position])
        axes.set_xticks([])
        axes.spines["bottom"].set_visible(False)
        reach = max(2.2, (float(np.abs(places).max()) + 0.5) / 0.78)
        axes.set_xlim(-reach, reach)
        axes.margins(y=0.08)
        ends = {
            name: max(
                (place for position, place in zip(chosen, places, strict=True) if levels.energy[position] == one),
                default=0.0,
            )
            + 0.5
            for name, one in (("HOMO", levels.homo), ("LUMO", levels.lumo))
        }
        _name_frontier(axes, result, ends)
        pen.energy_axis(axes, beta=asked.model.beta_unit, alpha=asked.model.alpha_unit)

    height = min(3.6, max(1.8, 0.12 * len(chosen) + 1.2))
    return pen.drawn("diagram", strokes, words=(f"Level diagram: {words}", caption), study=asked.name, height=height)


def near_fermi(result: "LevelsResult") -> NDArray[np.intp]:
    """Return which levels a diagram shows: all of them, or those around the Fermi energy."""
    levels = result.levels
    if len(levels.energy) <= MOST_DRAWN:
        return np.arange(len(levels.energy))
    filled = int(np.ceil(levels.occupation.sum() / 2))
    low = min(max(0, filled - MOST_DRAWN // 2), len(levels.energy) - MOST_DRAWN)
    return np.arange(low, low + MOST_DRAWN)


def side_by_side(groups: NDArray[np.intp]) -> NDArray[np.float64]:
    """Return where each level stands so that those of a group stand side by side, in widths of a level.

    >>> side_by_side(np.array([0, 1, 1, 2])).tolist()
    [0.0, -0.625, 0.625, 0.0]
    """
    counts = np.unique(groups, return_counts=True)[1]
    return np.concatenate([STEP * (np.arange(count) - (count - 1) / 2) for count in counts])


def _level(axes: Any, energy: float, place: float, occupation: float) -> None:
    axes.plot([place - 0.5, place + 0.5], [energy, energy], color=pen.INK, linewidth=1.6, solid_capstyle="butt")
    dots = {2.0: (-0.18, 0.18), 1.0: (0.0,)}.get(round(float(occupation), 6), ())
    for dot in dots:
        axes.plot([place + dot], [energy], "o", color=pen.SERIES[0], markersize=5.0)
    if 0 < occupation < 2 and not dots:
        axes.annotate(
            f"{occupation:.2g}", (place, energy), xytext=(0, 2), textcoords="offset points",
            ha="center", va="bottom", fontsize=8, color=pen.INK,
        )  # fmt: skip


def _name_frontier(axes: Any, result: "LevelsResult", reach: Mapping[str, float]) -> None:
    """Write HOMO and LUMO beside their levels, apart from each other; nothing where they are one open group."""
    levels = result.levels
    if levels.is_open_shell:
        return
    low, high = axes.get_ylim()
    is_close = levels.gap is not None and levels.gap < 0.05 * (high - low)
    for name, energy, side in (("HOMO", levels.homo, "top"), ("LUMO", levels.lumo, "bottom")):
        if energy is not None:
            axes.annotate(
                name, (reach[name], energy), xytext=(6, 0), textcoords="offset points",
                ha="left", va=side if is_close else "center", fontsize=pen.SMALL, color=pen.QUIET,
            )  # fmt: skip


def _listed(values: Iterable[float]) -> str:
    """Return the first few numbers as a caption gives them."""
    numbers = list(values)
    return ", ".join(typeset(value, 3) for value in numbers[:MOST_NAMED]) + (", …" if len(numbers) > MOST_NAMED else "")


def _on_bands(asked: Asked, result: "LevelsResult") -> Figure:
    levels, places = result.levels, result.places
    found = np.array([index for index, k in enumerate(places.k) if k is not None], dtype=np.intp)
    placed = found if len(found) <= MOST_DOTS else found[:: -(-len(found) // MOST_DOTS)]
    ks = np.array([places.k[index] for index in placed], dtype=np.float64)
    outside = np.flatnonzero(places.is_gap_level)
    nodes = _crosses(asked, result)

    def strokes(axes: Any) -> None:
        energies = drawable(levels.energy)
        span = _span(np.concatenate([ks, nodes]), is_part=levels.is_selected)
        _bands(axes, asked, result)
        _dots(axes, ks, energies[placed], is_full=levels.occupation[placed] > 0, sign=("o", ""))
        columns = margin_columns(energies[outside], np.ptp(axes.get_ylim()))
        margin = span[0] - (0.045 + 0.03 * columns) * (span[1] - span[0])
        _dots(axes, margin, energies[outside], is_full=levels.occupation[outside] > 0, sign=("s", "gap level, "))
        if nodes.size:
            axes.plot(
                nodes, energies, "x", color=pen.SERIES[1], markersize=6, markeredgewidth=1.3, clip_on=False,
                label="node label (no k)",
            )  # fmt: skip
        _k_axis(axes, span, left=float(min([*margin, span[0]])), is_part=levels.is_selected)
        pen.energy_axis(axes, beta=asked.model.beta_unit, alpha=asked.model.alpha_unit)
        pen.key(axes)

    words = _on_bands_words(np.array([places.k[index] for index in found], dtype=np.float64), len(outside))
    words += "" if len(placed) == len(found) else f" {len(placed)} of them are drawn."
    caption = f"Levels of the piece on the bands of its crystal: {words}{_node_words(nodes)}"
    alt = f"Levels on the bands: {words}"
    return pen.drawn("on-bands", strokes, words=(alt, caption), study=asked.name, height=3.4)


def _on_bands_words(ks: NDArray[np.float64], n_outside: int) -> str:
    words = (
        f"{counted(len(ks), 'level')} at k = {_listed(ks)} π/a" if len(ks) else "no level has a k on the bands"
    ) + f"; {counted(n_outside, 'gap level')}"
    return f"{words} at the left margin, not on a band." if n_outside else f"{words}."


def _node_words(nodes: NDArray[np.float64]) -> str:
    if not nodes.size:
        return ""
    return (
        f" The crosses stand at the node labels {_listed(nodes)} of π/spacing, sign changes over N − 1: a label "
        "is no k, and its cross misses the band."
    )


def _crosses(asked: Asked, result: "LevelsResult") -> NDArray[np.float64]:
    """Return node labels that a figure can show: of a crystal with one site a cell, whose spacing is the cell."""
    levels = result.levels
    is_shown = asked.model.n_sites == 1 and not levels.is_selected and levels.n_levels <= MOST_DRAWN
    return np.array((result.nodes if is_shown else None) or (), dtype=np.float64)


def _span(ks: NDArray[np.float64], *, is_part: bool) -> tuple[float, float]:
    """Return the part of the k axis that is drawn: all of it, or what the levels around the Fermi energy take up."""
    if not is_part or ks.size == 0:
        return 0.0, 1.0
    reach = 0.15 * float(np.ptp(ks)) + 1e-4
    return max(0.0, float(ks.min()) - reach), min(1.0, float(ks.max()) + reach)


def _k_axis(axes: Any, span: tuple[float, float], *, left: float, is_part: bool) -> None:
    width = span[1] - span[0]
    axes.set_xlim(left - 0.035 * width if left < span[0] else span[0] - 0.02 * width, span[1] + 0.02 * width)
    if not is_part:
        axes.set_xticks([0, 0.25, 0.5, 0.75, 1.0], ["Γ  0", "1/4", "1/2", "3/4", "X  1"])
    axes.set_xlabel("k / (π/a)")


def margin_columns(energies: NDArray[np.float64], height: float) -> NDArray[np.intp]:
    """Return the column of each gap level at the margin, so that marks at nearly one energy stand side by side.

    >>> margin_columns(np.array([-0.01, 0.01, 2.0]), 10.0).tolist()
    [0, 1, 0]
    """
    columns: list[int] = []
    for index, energy in enumerate(energies):
        close = {columns[other] for other in range(index) if energy - energies[other] < TOUCHING * height}
        columns.append(next(column for column in range(len(columns) + 1) if column not in close))
    return np.minimum(np.array(columns, dtype=np.intp), MOST_NAMED)


def _bands(axes: Any, asked: Asked, result: "LevelsResult") -> None:
    k = np.linspace(0.0, 1.0, 121)
    energies = drawable(band_energies(asked.model, k[:, None]))
    filled = round(asked.model.n_electrons / 2)
    low = max(0, min(filled - MOST_BANDS // 2, energies.shape[1] - MOST_BANDS))
    for band in range(low, min(energies.shape[1], low + MOST_BANDS)):
        axes.plot(k, energies[:, band], color=pen.QUIET, linewidth=1.0, zorder=1)
    if result.levels.is_selected:
        span = np.ptp(result.levels.energy) * 0.1 + 1e-6
        axes.set_ylim(result.levels.energy.min() - span, result.levels.energy.max() + span)


def _dots(axes: Any, x: Any, energies: Any, *, is_full: Any, sign: tuple[str, str]) -> None:
    """Draw levels as marks: filled where occupied, open where empty."""
    marker, noun = sign
    for chosen, face, name in ((is_full, pen.SERIES[0], "occupied"), (~is_full, pen.PAPER, "empty")):
        if chosen.any():
            axes.plot(
                x[chosen], energies[chosen], linestyle="none", marker=marker, color=pen.SERIES[0],
                markerfacecolor=face, markersize=6.0, zorder=3, clip_on=False, label=f"{noun}{name}",
            )  # fmt: skip
