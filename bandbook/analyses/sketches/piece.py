"""The sketch of a piece: how it was cut, and what ``add``, ``drop`` and ``changes`` did; long pieces in part."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from bandbook.analyses.analysis import counted
from bandbook.analyses.sketches import strokes
from bandbook.analyses.sketches.layout import Layout, layout_of, on_circle, ring_order
from bandbook.exhibits import Figure
from bandbook.exhibits import drawing as pen
from bandbook.model import Model
from bandbook.solver import Piece

Real = NDArray[np.float64]
#: Sites up to which a piece is drawn whole.
MOST_WHOLE: Final = 64
#: Sites of either end of a longer one, and of a sheet that is drawn at all.
AT_END: Final = 12
MOST_OF_SHEET: Final = 160
#: Bond lengths of the longest bond that is drawn.
LONGEST: Final = 2.6
#: Sites of the largest ring that is drawn as a circle.
MOST_ON_CIRCLE: Final = 40


@dataclass(frozen=True)
class _Marks:
    """Rows of a piece, or places, that were touched."""

    added: NDArray[np.intp]
    altered: NDArray[np.intp]
    lonely: NDArray[np.intp]
    gone: list[tuple[int, int]]
    bonds: set[tuple[int, int]]


def sketch_piece(
    study: str, model: Model, piece: Piece, *, asked: Mapping[str, Any], lonely: Sequence[int]
) -> Figure | None:
    """Return the sketch of a piece of a crystal or of a changed molecule; nothing where it has too much to show.

    Args:
        study: The study's name.
        model: The crystal or molecule.
        piece: The piece.
        asked: The study's ``cells``, ``add``, ``drop``, ``changes``.
        lonely: Sites that the cut leaves with one bond.
    """
    if model.n_sites > MOST_OF_SHEET or (model.dimension > 1 and piece.n_sites > MOST_OF_SHEET):
        return None
    layout = layout_of(model)
    marks = _marks(model, piece, asked, lonely)
    shown, slots = _shown(model, piece, marks)
    places = _places(layout, piece, slots)
    where = {row: number for number, row in enumerate(shown)}
    bonds = [
        row
        for row, (start, end) in enumerate(zip(piece.start, piece.end, strict=True))
        if start in where and end in where and piece.beta[row] and _is_near(places, start, end)
    ]
    words = _words(model, piece, marks, is_part=len(shown) < piece.n_sites)
    gone = _gone_places(layout, model, marks, slots)
    everything = np.concatenate([places[shown], gone])

    def draw(axes: Any) -> None:
        _draw_bonds(axes, piece, places, bonds, marks)
        _draw_sites(axes, piece, model, places=places, shown=shown, marks=marks)
        if len(gone):
            axes.plot(
                *gone.T, "x", color=pen.SERIES[1], markersize=8, markeredgewidth=1.6, linestyle="none", label="left out"
            )
        _dots_between(axes, slots, layout, everything)
        strokes.frame(axes, everything)
        pen.key(axes)

    return pen.drawn(
        "sketch",
        draw,
        words=(f"Sketch of the piece: {words}", words),
        study=study,
        height=strokes.height_of(everything),
    )


def _marks(model: Model, piece: Piece, asked: Mapping[str, Any], lonely: Sequence[int]) -> _Marks:
    row = {
        (tuple(cell), int(site)): number
        for number, (cell, site) in enumerate(zip(piece.cell.tolist(), piece.site, strict=True))
    }
    names = {site.name: number for number, site in enumerate(model.sites)}
    shape = piece.n_cells
    added = [number for (cell, _), number in row.items() if shape and len(shape) == 1 and cell[0] >= shape[0]]
    altered, gone, bonds = [], [], set()
    flat = dict(row)
    for change in asked.get("changes", ()):
        cell = _cell(change.get("cell"), model.dimension)
        if change.get("site") is not None:
            number = flat.get((cell, names[change["site"]]))
            altered += [number] if number is not None else []
            gone += [] if number is not None else [(cell[0] if cell else 0, names[change["site"]])]
        else:
            bonds |= _pairs(change, names, flat, cell=cell, dimension=model.dimension)
    if model.dimension == 1:
        gone += [(0, names[name]) for name in asked.get("drop", ())]
    return _Marks(np.array(added, np.intp), np.array(altered, np.intp), np.array(lonely, np.intp), gone, bonds)


def _cell(cell: Any, dimension: int) -> tuple[int, ...]:
    if dimension == 0:
        return ()
    return tuple(cell) if isinstance(cell, list | tuple) else (int(cell or 0),)


def _pairs(
    change: Mapping[str, Any],
    names: Mapping[str, int],
    rows: Mapping[Any, int],
    *,
    cell: tuple[int, ...],
    dimension: int,
) -> set[tuple[int, int]]:
    """Return the pairs of rows that a change of a bond may mean: inside its cell, otherwise to the next ones."""
    start, end = rows.get((cell, names[change["from"]])), names[change["to"]]
    ways = [_cell(change["to_cell"], dimension)] if change.get("to_cell") is not None else [cell]
    if change.get("to_cell") is None and dimension == 1:
        ways += [(cell[0] + 1,), (cell[0] - 1,)]
    for way in ways:
        other = rows.get((way, end))
        if start is not None and other is not None and other != start:
            return {(min(start, other), max(start, other))}
    return set()


def _shown(model: Model, piece: Piece, marks: _Marks) -> tuple[list[int], dict[int, int]]:
    """Return the rows that are drawn, and the slot along the piece in which each of their cells stands."""
    if piece.n_sites <= MOST_WHOLE or len(piece.n_cells) != 1:
        last = int(piece.cell[:, 0].max()) if piece.cell.size else 0
        return list(range(piece.n_sites)), {cell: cell for cell in range(last + 1)}
    each = max(1, AT_END // model.n_sites)
    last = int(piece.cell[:, 0].max())
    touched = {int(piece.cell[row, 0]) for row in (*marks.altered, *(row for pair in marks.bonds for row in pair))}
    touched |= {cell for cell, _ in marks.gone}
    near = {cell + step for cell in touched for step in (-1, 0, 1)} if len(touched) <= 4 else set()
    cells = sorted(cell for cell in {*range(each), *range(last - each + 1, last + 1), *near} if 0 <= cell <= last)
    slots: dict[int, int] = {}
    for number, cell in enumerate(cells):
        before = cells[number - 1] if number else cell
        slots[cell] = (slots[before] + (1 if cell == before + 1 else 1 + _gap(model))) if number else 0
    return [row for row in range(piece.n_sites) if int(piece.cell[row, 0]) in slots], slots


def _gap(model: Model) -> int:
    """Return the slots that stand for what is left out between two drawn parts."""
    return 2 if model.n_sites == 1 else 1


def _places(layout: Layout, piece: Piece, slots: Mapping[int, int]) -> Real:
    pairs = list(zip(piece.start.tolist(), piece.end.tolist(), strict=True))
    order = ring_order(piece.n_sites, pairs) if piece.is_ring and piece.n_sites <= MOST_ON_CIRCLE else None
    if order is not None:
        return on_circle(order)
    cell = piece.cell
    if cell.shape[1] == 1:
        cell = np.array([[slots.get(int(one), 0)] for one in cell[:, 0]], dtype=np.intp)
    return layout.at(piece.site, cell)


def _gone_places(layout: Layout, model: Model, marks: _Marks, slots: Mapping[int, int]) -> Real:
    if model.dimension > 1 or not marks.gone:
        return np.zeros((0, 2))
    sites = np.array([site for _, site in marks.gone], dtype=np.intp)
    cells = np.array([[slots.get(cell, 0)] if model.dimension else [] for cell, _ in marks.gone], dtype=np.intp)
    return layout.at(sites, cells.reshape(len(sites), model.dimension))


def _is_near(places: Real, start: int, end: int) -> bool:
    """Return whether a bond is drawn as a line; those across what is left out, or back to the first cell, are not."""
    return float(np.hypot(*(places[start] - places[end]))) < LONGEST


def _draw_bonds(axes: Any, piece: Piece, places: Real, bonds: list[int], marks: _Marks) -> None:
    found = strokes.kinds(piece.beta[bonds].tolist())
    is_touched = {
        row: (min(piece.start[row], piece.end[row]), max(piece.start[row], piece.end[row])) in marks.bonds
        for row in bonds
    }
    plain = [row for row in bonds if not is_touched[row]]
    touched = [row for row in bonds if is_touched[row]]
    for rows, look in ((plain, {}), (touched, {"color": pen.SERIES[1], "linewidth": 2.6, "label": "changed bond"})):
        ends = [(places[piece.start[row]], places[piece.end[row]]) for row in rows]
        one = found if rows is plain else strokes.kinds([0.0])
        betas = piece.beta[rows].tolist() if rows is plain else [0.0] * len(rows)
        strokes.draw_bonds(axes, ends, betas, one, **look)


def _draw_sites(axes: Any, piece: Piece, model: Model, *, places: Real, shown: list[int], marks: _Marks) -> None:
    special = {
        "changed site": ("s", pen.SERIES[1], marks.altered),
        "added site": ("D", pen.SERIES[2], marks.added),
        "one bond only": ("v", pen.SERIES[3], marks.lonely),
    }
    taken = {int(row) for _, _, rows in special.values() for row in rows}
    plain = [row for row in shown if row not in taken]
    alphas = [model.sites[site].alpha for site in piece.site[plain]]
    strokes.draw_sites(axes, places[plain], alphas, strokes.kinds(site.alpha for site in model.sites))
    for name, (marker, colour, rows) in special.items():
        chosen = [int(row) for row in rows if int(row) in set(shown)]
        if chosen:
            axes.plot(
                *places[chosen].T,
                marker,
                color=pen.INK,
                markerfacecolor=colour,
                markersize=8,
                linestyle="none",
                zorder=4,
                label=name,
            )


def _dots_between(axes: Any, slots: Mapping[int, int], layout: Layout, places: Real) -> None:
    """Write an ellipsis where cells are left out."""
    cells = sorted(slots)
    for before, after in pairwise(cells):
        if after > before + 1:
            middle = (slots[before] + slots[after]) / 2
            x = float(np.mean(layout.home[:, 0]) + middle * layout.vectors[0][0])
            y = float(np.mean(places[:, 1]))
            axes.annotate("⋯", (x, y), ha="center", va="center", fontsize=16, color=pen.QUIET)


def _words(model: Model, piece: Piece, marks: _Marks, *, is_part: bool) -> str:
    if model.dimension == 0:
        text = f"The molecule of {counted(piece.n_sites, 'site')}"
    else:
        sizes = " × ".join(str(size) for size in piece.n_cells)
        ends = "joined to a ring, first and last bonded" if piece.is_ring else "with open ends"
        text = f"{sizes} cell{'' if sizes == '1' else 's'} {ends}, {counted(piece.n_sites, 'site')}"
    parts = [
        (len(marks.added), "site added to close the far end", "sites added to close the far end"),
        (len(marks.gone), "site left out", "sites left out"),
        (len(marks.altered), "site changed", "sites changed"),
        (len(marks.bonds), "bond changed", "bonds changed"),
        (len(marks.lonely), "site with one bond only", "sites with one bond only"),
    ]
    told = [f"{number} {one if number == 1 else many}" for number, one, many in parts if number]
    text += ": " + ", ".join(told) if told else ""
    return f"{text}." + (" The ends are drawn, what lies between is left out." if is_part else "")
