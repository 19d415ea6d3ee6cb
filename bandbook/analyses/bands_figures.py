"""The figure of the question ``bands``: E(k) on the path, its edges and the Fermi energy marked."""

from typing import Any

import numpy as np
from numpy.typing import NDArray

from bandbook.analyses.analysis import Asked, drawable
from bandbook.exhibits import Figure, typeset
from bandbook.exhibits import drawing as pen
from bandbook.solver.bands import Bands, Extreme
from bandbook.solver.zone import named_points

GREEK = {"Gamma": "Γ"}
#: Parts of π/a by which a point may miss a named one, or a stretch of the path.
SAME_POINT = 1e-6
#: Steps of the path within which an edge counts as lying on it.
STEPS_OFF = 1.0
#: Bands above which every second point of the path is drawn.
MANY = 6
#: Part of the vertical scale that a label beside a rule may reach.
NEAR = 0.2


def draw(asked: Asked, result: Bands) -> tuple[Figure, ...]:
    """Return E(k) on the path."""
    words = f"{words_of(asked, result)}; total width {typeset(result.total_width, 3)} eV"
    route = "–".join(GREEK.get(name, name) for name in result.path.names)
    marked = _edges_on_path(result)
    signs = " Filled: highest filled state, ring: lowest empty state." if marked else ""

    def strokes(axes: Any) -> None:
        energies = drawable(result.energies)
        shown = _shown(result)
        axes.plot(result.path.distance[shown], energies[shown], color=pen.SERIES[0], linewidth=1.2)
        _k_axis(axes, asked, result)
        if result.gap and result.valence and result.conduction:
            axes.axhspan(result.valence.energy, result.conduction.energy, color=pen.LINE, alpha=0.35, linewidth=0)
        for distance, extreme, is_full in marked:
            face = pen.SERIES[0] if is_full else pen.PAPER
            axes.plot(
                [distance], drawable(np.array([extreme.energy])), "o", color=pen.SERIES[0], markerfacecolor=face,
                markersize=6.0, zorder=3, clip_on=False,
            )  # fmt: skip
        if result.fermi_energy is not None:
            axes.set_ylim(*axes.get_ylim())
            level = round(result.fermi_energy, 9)
            pen.rule(axes, level, _rule_words(result), clear_of=_near(result.path.distance, energies, level))
        pen.energy_axis(axes, beta=asked.model.beta_unit, alpha=asked.model.alpha_unit)

    text = (f"Bands along {route}: {words}.", f"E(k) along {route}: {words}.{signs}")
    return (pen.drawn("bands", strokes, words=text, study=asked.name, height=3.5),)


def _shown(result: Bands) -> NDArray[np.intp]:
    """Return the points of the path that are drawn: of many bands every second, ends and named points always."""
    n_points, n_bands = result.energies.shape
    every = 2 if n_bands > MANY else 1
    named = [int(np.argmin(np.abs(result.path.distance - place))) for place in result.path.distance[[0, -1]]]
    kinks = np.flatnonzero(np.abs(np.diff(result.path.k, n=2, axis=0)).sum(axis=1) > 1e-9) + 1
    return np.unique(np.concatenate([np.arange(0, n_points, every), kinks, named])).astype(np.intp)


def _near(distance: NDArray[np.float64], energies: NDArray[np.float64], level: float) -> list[tuple[float, float]]:
    """Return the points of the bands that a label at an energy could cover."""
    rows, columns = np.nonzero(np.abs(energies - level) < NEAR * np.ptp(energies))
    return [(float(distance[row]), float(energies[row, column])) for row, column in zip(rows, columns, strict=True)]


def _rule_words(result: Bands) -> str:
    fermi = f"Fermi energy {typeset(result.fermi_energy, 3)} eV"
    return f"gap {typeset(result.gap, 3)} eV, {fermi}" if result.gap else fermi


def _k_axis(axes: Any, asked: Asked, result: Bands) -> None:
    """Name the points of the path; in one dimension parts of π/a too."""
    names = [GREEK.get(name, name) for name in result.path.names]
    ticks = [float(result.path.distance[at]) for at in result.path.at]
    axes.set_xlim(ticks[0], ticks[-1])
    if asked.model.dimension == 1:
        parts = [ticks[0] + part * (ticks[-1] - ticks[0]) for part in (0, 0.25, 0.5, 0.75, 1)]
        axes.set_xticks(parts, [f"{names[0]}  0", "1/4", "1/2", "3/4", f"{names[-1]}  1"])
        axes.set_xlabel("k / (π/a)")
        return
    for tick in ticks[1:-1]:
        axes.axvline(tick, color=pen.LINE, linewidth=0.8, zorder=0)
    axes.set_xticks(ticks, names)
    axes.set_xlabel("k along the path")


def words_of(asked: Asked, result: Bands) -> str:
    """Return what the bands are, in words with the numbers."""
    if result.kind != "insulator":
        fermi = f"; Fermi energy {typeset(result.fermi_energy, 3)} eV" if result.fermi_energy is not None else ""
        return f"{result.kind}{fermi}"
    if result.gap is None or result.valence is None or result.conduction is None:
        return "no gap, for no band is filled or no band is empty"
    is_direct = abs(result.gap - (result.direct_gap or 0.0)) < 1e-7
    top, bottom = point_words(asked, result.valence), point_words(asked, result.conduction)
    where = f"at {bottom}" if is_direct else f"from {top} to {bottom}"
    return f"insulator with {'a direct' if is_direct else 'an indirect'} gap of {typeset(result.gap, 3)} eV {where}"


def point_words(asked: Asked, extreme: Extreme) -> str:
    """Return where an extreme lies: a named point where it is one, and its k."""
    parts = [typeset(part, 3) for part in extreme.k]
    k = f"{parts[0]} π/a" if len(parts) == 1 else f"({', '.join(parts)}) π/a"
    for name, point in named_points(asked.model).items():
        if _distance(np.array([point]), np.array(extreme.k))[0] < SAME_POINT:
            return f"{GREEK.get(name, name)}, k = {k}"
    return f"k = {k}"


def _distance(points: NDArray[np.float64], k: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return how far each point is from k or −k, reciprocal lattice vectors apart, π/a: E(−k) = E(k)."""
    misses = [np.abs((points - sign * k + 1.0) % 2.0 - 1.0).max(axis=1) for sign in (1.0, -1.0)]
    return np.asarray(np.minimum(*misses), dtype=np.float64)


def _edges_on_path(result: Bands) -> list[tuple[float, Extreme, bool]]:
    """Return distance along the path, extreme, and whether it is filled, of the edges that lie on the path."""
    path, marked = result.path, []
    step = float(np.abs(np.diff(path.k, axis=0)).max())
    edges = ((result.valence, True), (result.conduction, False)) if result.gap else ()
    for extreme, is_full in edges:
        if extreme is None:
            continue
        misses = np.round(_distance(path.k, np.array(extreme.k)), 9)
        nearest = int(np.argmin(misses))
        if misses[nearest] < STEPS_OFF * step:
            marked.append((float(path.distance[nearest]), extreme, is_full))
    return marked
