"""How sites and bonds look: kinds of bond by width and dash, kinds of site by shape, both named in the key."""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from bandbook.exhibits import drawing as pen
from bandbook.exhibits import typeset

Real = NDArray[np.float64]
#: Kinds of bond, and of site, that a key names one by one.
MOST_KINDS: Final = 4
#: Inches that one bond length takes up at most, and the tallest sketch.
BOND: Final = 0.55
TALLEST: Final = 3.4
#: Inches of a bond length from which there is room for names beside the sites.
ROOM: Final = 0.36


@dataclass(frozen=True)
class Kinds:
    """Values told apart in a drawing.

    Attributes:
        number: Rounded value → number of its kind, the largest magnitude first.
    """

    number: Mapping[float, int]

    def of(self, value: float) -> int:
        """Return the number of a value's kind."""
        return self.number.get(_rounded(value), 0)


def kinds(values: Iterable[float]) -> Kinds:
    """Return the kinds of some energies, eV; those that differ by less than 0.001 eV are one.

    >>> kinds([-2.15, -2.85, -2.15]).of(-2.15)
    1
    """
    found = sorted({_rounded(value) for value in values}, key=lambda value: (-abs(value), value))
    return Kinds({value: number for number, value in enumerate(found)})


def _rounded(value: float) -> float:
    return round(float(value), 3) + 0.0


def draw_bonds(axes: Any, ends: Sequence[tuple[Real, Real]], betas: Sequence[float], found: Kinds, **look: Any) -> None:
    """Draw bonds, those of one kind as one line with its own width and dash; many kinds in one look."""
    if len(found.number) > MOST_KINDS:
        low, high = min(found.number), max(found.number)
        look = {"label": f"β = {typeset(low, 2)} to {typeset(high, 2)} eV", **look}
        found, betas = Kinds({low: 0}), [low] * len(betas)
    for value, number in found.number.items():
        chosen = [pair for pair, beta in zip(ends, betas, strict=True) if found.of(beta) == number]
        if not chosen:
            continue
        gap = np.full((1, 2), np.nan)
        line = np.concatenate([np.concatenate([np.stack(pair), gap]) for pair in chosen])
        style = {
            "color": pen.INK,
            "linewidth": max(0.9, 2.4 - 0.6 * number),
            "linestyle": pen.DASHES[min(number, len(pen.DASHES) - 1)],
            "label": f"β = {typeset(value, 2)} eV",
            "zorder": 1,
        }
        axes.plot(line[:, 0], line[:, 1], **{**style, **look})


def draw_sites(axes: Any, places: Real, alphas: Sequence[float], found: Kinds, **look: Any) -> None:
    """Draw sites, those of one α with one shape, many in one look; where all are alike the key says nothing of them."""
    if len(found.number) > MOST_KINDS:
        low, high = min(found.number), max(found.number)
        look = {"label": f"α = {typeset(low, 2)} to {typeset(high, 2)} eV", **look}
        found, alphas = Kinds({low: 0}), [low] * len(alphas)
    for value, number in found.number.items():
        chosen = np.array([found.of(alpha) == number for alpha in alphas], dtype=bool)
        if not chosen.any():
            continue
        style = {
            "linestyle": "none",
            "marker": pen.MARKERS[number % len(pen.MARKERS)],
            "markersize": 6.5,
            "color": pen.INK,
            "markerfacecolor": pen.SERIES[number % len(pen.SERIES)],
            "zorder": 3,
            "label": f"α = {typeset(value, 2)} eV" if len(found.number) > 1 else None,
        }
        axes.plot(places[chosen, 0], places[chosen, 1], **{**style, **look})


def name_sites(axes: Any, places: Real, names: Sequence[str], away: Real) -> None:
    """Write names beside sites, on the side that ``away`` points to."""
    for place, name, side in zip(places, names, away, strict=True):
        axes.annotate(
            name, (place[0], place[1]), xytext=(9 * side[0], 9 * side[1]), textcoords="offset points",
            ha="center", va="center", fontsize=pen.SMALL, color=pen.INK, zorder=4,
        )  # fmt: skip


def away_from(places: Real, bonds: Sequence[tuple[int, int]], others: Sequence[tuple[int, Real]]) -> Real:
    """Return for each site the direction in which it has most room: away from its bonds, up where they cancel.

    Args:
        places: The sites, ``(site, 2)``.
        bonds: Pairs of them.
        others: A site, and a place that it is bonded to.
    """
    angles: list[list[float]] = [[] for _ in places]
    pairs = [(start, places[end]) for start, end in bonds] + [(end, places[start]) for start, end in bonds]
    for site, place in (*pairs, *others):
        step = np.round(place - places[site], 6)
        if np.any(step):
            angles[site].append(float(np.arctan2(step[1], step[0])))
    found = [_freest(taken) for taken in angles]
    return np.stack([np.cos(found), np.sin(found)], axis=1)


def _freest(taken: Sequence[float]) -> float:
    """Return the direction farthest from those that are taken; of several the one nearest to straight up."""
    full, up = 2 * np.pi, np.pi / 2
    ways = np.pi * np.arange(24) / 12
    room = [min([abs((way - one + np.pi) % full - np.pi) for one in taken], default=np.pi) for way in ways]
    best = max(round(one, 3) for one in room)
    near = [way for way, one in zip(ways, room, strict=True) if one > best - 0.02]
    return float(min(near, key=lambda way: (round(abs((way - up + np.pi) % full - np.pi), 6), way)))


def height_of(places: Real, *, room: float = 0.9) -> float:
    """Return the height of a figure in inches that shows some places to scale at the width of all figures."""
    return min(TALLEST, max(0.9, float(np.ptp(places[:, 1])) * scale_of(places) + room))


def scale_of(places: Real) -> float:
    """Return the inches that a bond length takes up where some places are shown."""
    width, height = (max(float(np.ptp(places[:, axis])), 1e-9) for axis in (0, 1))
    return min(BOND, (pen.WIDTH - 0.6) / width, (TALLEST - 0.9) / height)


def frame(axes: Any, places: Real) -> None:
    """Show some places to scale, without axes."""
    axes.set_axis_off()
    axes.set_aspect("equal")
    width, height = (float(np.ptp(places[:, axis])) for axis in (0, 1))
    shown = max(width + 1.4, (pen.WIDTH - 0.2) / BOND)
    middle = (places.max(axis=0) + places.min(axis=0)) / 2
    axes.set_xlim(middle[0] - shown / 2, middle[0] + shown / 2)
    axes.set_ylim(middle[1] - height / 2 - 0.75, middle[1] + height / 2 + 0.75)
