"""The sketch of a system: a molecule, or a few cells of a crystal with the home cell marked."""

import itertools
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from bandbook.analyses.analysis import counted
from bandbook.analyses.sketches import strokes
from bandbook.analyses.sketches.layout import Layout, layout_of
from bandbook.exhibits import Figure, typeset
from bandbook.exhibits import drawing as pen
from bandbook.model import Coupling, Model

Real = NDArray[np.float64]
#: Sites that a sketch draws at most; a larger molecule or cell has none.
MOST_SITES: Final = 220
#: Sites of the home cell that are named in it.
MOST_NAMED: Final = 26
_DIMENSIONS: Final = (
    "molecule",
    "crystal in one dimension",
    "crystal in two dimensions",
    "crystal in three dimensions",
)


def sketch_system(name: str, model: Model) -> Figure | None:
    """Return the sketch of a system, or nothing where it has too many sites to be seen.

    Args:
        name: The system's name.
        model: The system.
    """
    if model.n_sites > MOST_SITES:
        return None
    layout = layout_of(model)
    cells = _cells(model)
    sites = np.tile(np.arange(model.n_sites), len(cells))
    where = np.repeat(np.array(cells, dtype=np.intp).reshape(len(cells), -1), model.n_sites, axis=0)
    places = layout.at(sites, where)
    number = {(tuple(cell), int(site)): row for row, (cell, site) in enumerate(zip(where.tolist(), sites, strict=True))}
    bonds = _bonds(model, cells, number)
    is_home = ~np.any(where, axis=1)
    words = _words(model, layout)

    def draw(axes: Any) -> None:
        found = strokes.kinds(bond.beta for bond in model.couplings)
        strokes.draw_bonds(axes, *_ends(bonds, places), found)
        _outgoing(axes, model, layout, places, number)
        alphas = [model.sites[site].alpha for site in sites]
        shapes = strokes.kinds(site.alpha for site in model.sites)
        _draw_sites(axes, places, alphas, shapes=shapes, is_home=is_home)
        _outline(axes, model, layout)
        if model.n_sites <= MOST_NAMED and strokes.scale_of(places) >= strokes.ROOM:
            home = places[is_home]
            inner = [(bond.start, bond.end) for bond in model.couplings if not any(bond.cell)]
            away = strokes.away_from(home, inner, _reached(model, layout))
            strokes.name_sites(axes, home, [site.name for site in model.sites], away)
        strokes.frame(axes, places)
        pen.key(axes)

    label = "system" if name == "system" else f"system {name}"
    return pen.drawn(
        name, draw, words=(f"Sketch of the {label}: {words}", f"{words[:1].upper()}{words[1:]}"),
        study="system", height=strokes.height_of(places),
    )  # fmt: skip


def _cells(model: Model) -> list[tuple[int, ...]]:
    """Return the cells that are drawn: the home cell and as many around it as make the pattern seen."""
    n = model.n_sites
    if model.dimension == 0:
        return [()]
    if model.dimension == 1:
        count = 1 if n > 40 else 3 if n > 3 else 5 if n > 1 else 7
        return [(step - count // 2,) for step in range(count)]
    count = 3 if n <= 6 else 2
    sides = [range(-1, 2) if count == 3 else range(2)] * model.dimension
    if model.dimension == 3:
        sides = [range(2)] * 3
    cells = list(itertools.product(*sides))
    return cells if len(cells) * n <= MOST_SITES else [(0,) * model.dimension]


Numbers = dict[tuple[tuple[int, ...], int], int]


def _bonds(model: Model, cells: list[tuple[int, ...]], number: Numbers) -> list[tuple[int, int, Coupling]]:
    found = []
    for cell, bond in itertools.product(cells, model.couplings):
        if not bond.beta:
            continue
        reached = tuple(one + step for one, step in zip(cell, bond.cell, strict=True))
        end = number.get((reached, bond.end))
        if end is not None:
            found.append((number[cell, bond.start], end, bond))
    return found


def _ends(bonds: list[tuple[int, int, Coupling]], places: Real) -> tuple[list[tuple[Real, Real]], list[float]]:
    return [(places[start], places[end]) for start, end, _ in bonds], [bond.beta for *_, bond in bonds]


def _reached(model: Model, layout: Layout) -> list[tuple[int, Real]]:
    """Return for each bond out of the home cell its site there and the place of the other end, both ways."""
    found = []
    for bond in model.couplings:
        if any(bond.cell):
            step = np.array(bond.cell, dtype=np.float64) @ layout.vectors
            found += [(bond.start, layout.home[bond.end] + step), (bond.end, layout.home[bond.start] - step)]
    return found


def _outgoing(axes: Any, model: Model, layout: Layout, places: Real, number: Numbers) -> None:
    """Draw the beginnings of bonds that lead out of the drawn cells: the crystal goes on."""
    stubs = []
    for (cell, site), row in number.items():
        for start, place in _reached(model, layout):
            if start != site:
                continue
            step = place - layout.home[site]
            target = places[row] + step
            if np.min(np.hypot(*(places - target).T)) > 1e-3:
                length = float(np.hypot(*step))
                stubs.append((places[row], places[row] + step * min(0.45, 0.45 / max(length, 1e-9))))
        del cell
    if stubs:
        strokes.draw_bonds(
            axes, stubs, [0.0] * len(stubs), strokes.kinds([0.0]), color=pen.LINE, linestyle=":", label=None
        )


def _draw_sites(
    axes: Any, places: Real, alphas: list[float], *, shapes: strokes.Kinds, is_home: NDArray[np.bool_]
) -> None:
    others = np.flatnonzero(~is_home)
    strokes.draw_sites(
        axes,
        places[others],
        [alphas[row] for row in others],
        shapes,
        markerfacecolor=pen.PAPER,
        color=pen.QUIET,
        label=None,
    )
    home = np.flatnonzero(is_home)
    strokes.draw_sites(axes, places[home], [alphas[row] for row in home], shapes)


def _outline(axes: Any, model: Model, layout: Layout) -> None:
    """Draw the home cell: two rules in one dimension, a parallelogram in two, its edges in three."""
    style = {"color": pen.ACCENT, "linewidth": 0.9, "linestyle": (0, (4, 3)), "zorder": 0}
    low, high = layout.home.min(axis=0), layout.home.max(axis=0)
    if model.dimension == 1:
        step = layout.vectors[0]
        start = (low + high - step) / 2
        up = np.array([0.0, 0.5 * (high[1] - low[1]) + 0.62])
        middle = np.array([0.0, (low[1] + high[1]) / 2])
        for left in (start, start + step):
            edge = np.array([left[0], 0.0]) + middle
            axes.plot(*np.stack([edge - up, edge + up]).T, **style)
        return
    if model.dimension == 0:
        return
    corner = low if model.dimension == 3 else (low + high) / 2 - layout.vectors.sum(axis=0) / 2
    for axis, step in enumerate(layout.vectors):
        others = [vector for number, vector in enumerate(layout.vectors) if number != axis]
        for shift in itertools.product((0.0, 1.0), repeat=len(others)):
            edge = corner + sum((part * vector for part, vector in zip(shift, others, strict=True)), np.zeros(2))
            axes.plot(*np.stack([edge, edge + step]).T, **style)


def _words(model: Model, layout: Layout) -> str:
    """Return the system in words."""
    what = _DIMENSIONS[model.dimension]
    sites = f"{counted(model.n_sites, 'site')}{' a cell' if model.dimension else ''}"
    names = ", ".join(site.name for site in model.sites[:6]) + (", …" if model.n_sites > 6 else "")
    betas = sorted({round(bond.beta, 3) for bond in model.couplings if bond.beta}, key=lambda beta: (-abs(beta), beta))
    values = ", ".join(typeset(beta, 2) for beta in betas[: strokes.MOST_KINDS])
    more = ", …" if len(betas) > strokes.MOST_KINDS else ""
    bonds = f"{counted(len(model.couplings), 'bond')}{' a cell' if model.dimension else ''}"
    text = f"{what} of {sites} ({names}), {bonds}" + (f" with β = {values}{more} eV" if betas else "")
    cell = " The dashed lines bound one cell; bonds that lead on are dotted." if model.dimension else ""
    place = "" if layout.is_measured else " Places are drawn by the bonds, not to scale."
    return f"{text}.{cell}{place}"
