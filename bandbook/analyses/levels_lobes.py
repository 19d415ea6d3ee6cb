"""The figure of orbitals: a lobe at each site, its area the population, its sign by fill and hatching, and its wave."""

import math
from typing import TYPE_CHECKING, Any, Final

import numpy as np
from numpy.typing import NDArray

from bandbook.analyses.analysis import Asked, counted
from bandbook.analyses.sketches.layout import layout_of, on_circle, ring_order
from bandbook.exhibits import Figure, typeset
from bandbook.exhibits import drawing as pen

if TYPE_CHECKING:
    from bandbook.analyses.levels import LevelsResult

Real = NDArray[np.float64]
#: Sites of the largest piece whose orbitals are drawn, and orbitals that are drawn at most.
MOST_SITES: Final = 24
MOST_ORBITALS: Final = 8
#: Coefficients below this have no lobe: a node.
LEAST: Final = 0.02
#: Sizes of lobes that are told apart.
SIZES: Final = 12
#: Points of the largest lobe.
LARGEST: Final = 22.0


def orbitals(asked: Asked, result: "LevelsResult") -> Figure | None:
    """Return the orbitals of a small piece; nothing of a large one or of one whose levels are not all here."""
    levels, piece = result.levels, result.piece
    if levels.is_selected or not 2 <= piece.n_sites <= MOST_SITES:
        return None
    chosen = chosen_levels(result)
    is_line = piece.path is not None
    words = _words(result, chosen, has_wave=is_line and any(_wave(asked, result, one) is not None for one in chosen))
    rows = len(chosen) if is_line else math.ceil(len(chosen) / 2)
    height = 0.5 + rows * (0.5 if is_line else 1.25)

    def strokes(axes: Any) -> None:
        axes.set_axis_off()
        if is_line:
            _lines(axes, asked, result, chosen)
        else:
            _plane(axes, asked, result, chosen)
        pen.key(axes)

    return pen.drawn("orbitals", strokes, words=(f"Orbitals: {words}", words), study=asked.name, height=height)


def chosen_levels(result: "LevelsResult") -> list[int]:
    """Return the levels whose orbitals are drawn, from below: all of a few, otherwise those around the gap."""
    n_levels = len(result.levels.energy)
    if n_levels <= MOST_ORBITALS:
        return list(range(n_levels))
    filled = math.ceil(result.levels.occupation.sum() / 2)
    low = min(max(0, filled - MOST_ORBITALS // 2), n_levels - MOST_ORBITALS)
    return list(range(low, low + MOST_ORBITALS))


def _lines(axes: Any, asked: Asked, result: "LevelsResult", chosen: list[int]) -> None:
    """Draw the orbitals of a chain one above another, each with the wave that shapes it."""
    piece = result.piece
    order = piece.path
    assert order is not None  # noqa: S101 - the caller saw that it is a line
    n_sites = piece.n_sites
    largest = min(LARGEST, 0.72 * 72 * (pen.WIDTH - 1.75) / (n_sites + 1))
    lobes = _Lobes(largest, _largest(result, chosen))
    for row, level in enumerate(chosen):
        base = float(row)
        vector = result.levels.vectors[order, level]
        axes.plot([0.5, n_sites + 0.5], [base, base], color=pen.LINE, linewidth=0.8, zorder=0)
        wave = _wave(asked, result, level)
        if wave is not None:
            x, y = wave
            axes.plot(x, base + 0.42 * y, color=pen.ACCENT, linewidth=1.0, zorder=1, label="wave" if not row else None)
        for place, coefficient in enumerate(vector, start=1):
            lobes.add(float(place), base, coefficient)
        _label(axes, asked, result, level, (n_sites + 1.3, base))
    lobes.draw(axes)
    axes.set_xlim(0.2, (n_sites + 0.7) * pen.WIDTH / (pen.WIDTH - 1.75))
    axes.set_ylim(-0.6, len(chosen) - 0.4)


def _plane(axes: Any, asked: Asked, result: "LevelsResult", chosen: list[int]) -> None:
    """Draw the orbitals of a ring or a branched piece, two side by side, the lowest below."""
    piece = result.piece
    places = _places(asked, result)
    low, high = places.min(axis=0), places.max(axis=0)
    size = np.maximum(high - low, 0.6)
    half = (pen.WIDTH - 0.3) / 2
    unit = min(half / (size[0] + 1.0), 1.15 / (size[1] + 1.25))
    step = np.array([half / unit, size[1] + 1.25])
    lobes = _Lobes(min(LARGEST, 0.8 * 72 * unit), _largest(result, chosen))
    lines: list[Real] = []
    for number, level in enumerate(chosen):
        shift = np.array([number % 2, number // 2]) * step + np.array([(step[0] - size[0]) / 2, 0.0])
        here = places - low + shift
        for start, end, beta in zip(piece.start, piece.end, piece.beta, strict=True):
            if beta:
                lines += [here[start], here[end], np.array([np.nan, np.nan])]
        for place, coefficient in zip(here, result.levels.vectors[:, level], strict=True):
            lobes.add(float(place[0]), float(place[1]), coefficient)
        _label(axes, asked, result, level, (shift[0] + size[0] / 2, shift[1] - 0.62), centred=True)
    line = np.array(lines).reshape(-1, 2)  # a piece may have no bond
    axes.plot(line[:, 0], line[:, 1], color=pen.LINE, linewidth=1.2, zorder=0)
    lobes.draw(axes)
    axes.set_aspect("equal")
    rows = math.ceil(len(chosen) / 2)
    axes.set_xlim(0.0, 2 * step[0])
    axes.set_ylim(-1.0, (rows - 1) * step[1] + size[1] + 0.6)


def _places(asked: Asked, result: "LevelsResult") -> Real:
    piece = result.piece
    pairs = list(zip(piece.start.tolist(), piece.end.tolist(), strict=True))
    order = ring_order(piece.n_sites, pairs)
    return on_circle(order) if order is not None else layout_of(asked.model).at(piece.site, piece.cell)


class _Lobes:
    """Lobes gathered by sign and size, so that equal ones are written once."""

    def __init__(self, diameter: float, coefficient: float) -> None:
        """Take the diameter of the largest lobe, points, and its coefficient."""
        self.diameter, self.full = diameter, coefficient
        self._found: dict[tuple[bool, int], list[tuple[float, float]]] = {}

    def add(self, x: float, y: float, coefficient: float) -> None:
        """Add a lobe: diameter ∝ |c|, so that its area shows c²."""
        if abs(coefficient) >= LEAST:
            size = min(SIZES, max(1, round(SIZES * abs(float(coefficient)) / self.full)))
            self._found.setdefault((bool(coefficient > 0), size), []).append((x, y))

    def draw(self, axes: Any) -> None:
        """Draw what was added: positive filled, negative open and hatched; one of each is named in the key."""
        named: set[bool] = set()
        for (is_positive, size), places in sorted(self._found.items(), key=lambda item: (not item[0][0], -item[0][1])):
            x, y = np.array(places).T
            diameter = self.diameter * size / SIZES
            label = None if is_positive in named else ("+ lobe" if is_positive else "− lobe")
            named.add(is_positive)
            face = pen.SERIES[0] if is_positive else pen.PAPER
            edge = pen.SERIES[0] if is_positive else pen.SERIES[1]
            axes.plot(
                x, y, "o", markersize=diameter, color=edge, markerfacecolor=face, markeredgewidth=1.0, zorder=3,
                linestyle="none", clip_on=False,
            )  # fmt: skip
            if not is_positive:
                axes.plot(
                    x, y, marker=pen.hatching(), markersize=diameter * 0.94, color=edge, markeredgewidth=0.8, zorder=4,
                    linestyle="none", clip_on=False,
                )  # fmt: skip
            if label:
                axes.plot([], [], "o", markersize=8, color=edge, markerfacecolor=face, linestyle="none", label=label)


def _largest(result: "LevelsResult", chosen: list[int]) -> float:
    """Return the largest coefficient that is drawn; its lobe is as large as there is room."""
    return max(LEAST, float(np.max(np.abs(result.levels.vectors[:, chosen]))))


def _wave(asked: Asked, result: "LevelsResult", level: int) -> tuple[Real, Real] | None:
    """Return the standing wave sin(kπx/a) of a uniform open chain, in the sign of the orbital; x counts sites from 1.

    Source: coulson1938.
    """
    piece = result.piece
    k = result.places.k[level]
    is_uniform = asked.model.n_sites == 1 and asked.model.dimension == 1 and not piece.is_ring and not piece.is_edited
    if k is None or not is_uniform or result.places.W[level] is None or (result.places.W[level] or 0) < 1 - 1e-6:
        return None
    x = np.linspace(0.0, piece.n_sites + 1.0, 12 * (piece.n_sites + 1) + 1)
    y = np.sin(np.pi * k * x)
    sign = np.sign(result.levels.vectors[0, level]) or 1.0
    return x, np.round(sign * y, 4)


def _label(
    axes: Any, asked: Asked, result: "LevelsResult", level: int, place: tuple[float, float], *, centred: bool = False
) -> None:
    """Write energy, k and nodes of an orbital beside it."""
    levels, beta = result.levels, asked.model.beta_unit
    number, k = levels.first + level + 1, result.places.k[level]
    energy = float(levels.energy[level])
    parts = [
        f"{number}:",
        f"x = {typeset((energy - asked.model.alpha_unit) / beta, 3)}" if beta else f"{typeset(energy, 3)} eV",
    ]
    parts += [f"k = {typeset(k, 3)}"] if k is not None else []
    axes.annotate(
        "  ".join(parts), place, ha="center" if centred else "left", va="center", fontsize=pen.SMALL, color=pen.INK,
        annotation_clip=False,
    )  # fmt: skip


def _words(result: "LevelsResult", chosen: list[int], *, has_wave: bool) -> str:
    levels = result.levels
    first, last = levels.first + chosen[0] + 1, levels.first + chosen[-1] + 1
    part = "" if len(chosen) == levels.n_levels else f" of {levels.n_levels}, those around the gap"
    text = f"{counted(len(chosen), 'orbital')}{part}, levels {first} to {last} from below upwards."
    text += " The area of a lobe shows the population of its site; filled is positive, open and hatched negative."
    text += " The line is the standing wave sin(kx) that shapes it." if has_wave else ""
    is_degenerate = any(levels.degeneracy[level] > 1 for level in chosen)
    return text + (" Degenerate orbitals are one choice of many; only their sum is fixed." if is_degenerate else "")
