"""One figure of a case for a paper: what was asked, which figure it is, and the files that come of it.

Nothing is drawn here: a kernel draws, and what it drew is unpacked.
"""

import math
import re
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any, Final

from bandbook.errors import AuthorError, Problem, printable
from bandbook.exhibits.paper import FORMATS, Paper, unpacked
from bandbook.notebooks import Harvest
from bandbook.parameters import listed, near, shortened

#: Unit of a width → inches.
UNITS: Final = {"mm": 1 / 25.4, "cm": 1 / 2.54, "in": 1.0, "pt": 1 / 72.0}
#: Least and greatest width, mm; font size, pt.
WIDTHS: Final = (30.0, 400.0)
FONT_SIZES: Final = (4.0, 24.0)
#: Narrowest figure, in font sizes: below it, words would lie on each other.
NARROWEST: Final = 20.0
_WIDTH: Final = re.compile(r"(\d+(?:\.\d+)?)\s*(mm|cm|in|pt)")


def check_paper(width: str, font_size: float, ending: str) -> Paper:
    """Return what to draw for, as a command was asked.

    Args:
        width: A number with its unit.
        font_size: Points.
        ending: Of the file, with its point.

    Raises:
        AuthorError: Every mistake in them.

    >>> round(check_paper("8.5 cm", 8, ".PDF").width * 25.4, 6)
    85.0
    """
    problems = []
    inches, format_ = _inches(width), ending.lower().removeprefix(".")
    low, high = WIDTHS
    if inches is None or not low - 1e-9 <= 25.4 * inches <= high + 1e-9:
        allowed = f"{low:g} to {high:g} mm, as a number with mm, cm, in or pt"
        problems.append(Problem(f'the width is "{printable(width)}"', allowed, "write it such as 85mm"))
        inches = None
    if not (math.isfinite(font_size) and FONT_SIZES[0] <= font_size <= FONT_SIZES[1]):
        allowed = f"{FONT_SIZES[0]:g} to {FONT_SIZES[1]:g} pt"
        problems.append(Problem(f"the font size is {font_size:g}", allowed, "give it in points, such as 8"))
    elif inches is not None and 72 * inches < NARROWEST * font_size:
        found = f"{printable(width)} is too narrow for words of {font_size:g} pt"
        allowed = f"at least {NARROWEST * font_size * 25.4 / 72:.0f} mm at this size"
        problems.append(Problem(found, allowed, "make the figure wider or the words smaller"))
    if format_ not in FORMATS:
        found = f'the file ends with "{printable(ending)}"' if ending else "the file has no ending"
        problems.append(Problem(found, "it ends with .svg, .pdf or .png", "name the file so"))
    if problems or inches is None:
        raise AuthorError(problems)
    return Paper(inches, float(font_size), format_)


def _inches(width: str) -> float | None:
    found = _WIDTH.fullmatch(width.strip().lower())
    return float(found[1]) * UNITS[found[2]] if found else None


def study_of(figure: str) -> str:
    """Return the study that a figure's name begins with.

    >>> [study_of(name) for name in ("levels", "levels.on-bands", "figures/levels-on-bands.svg", "workings-2.svg")]
    ['levels', 'levels', 'levels', 'workings']
    """
    return re.split(r"[.-]", figure.removeprefix("figures/"), maxsplit=1)[0]


def up_to(parameters: Mapping[str, Any], figure: str) -> dict[str, Any]:
    """Return the parameters with the steps that a figure needs: up to its study, or all for one of the workings.

    Raises:
        AuthorError: The case has no such study.
    """
    steps, study = parameters["steps"], study_of(figure)
    studies = [name for kind, name in steps if kind == "study"]
    if study in studies:
        end = next(number for number, step in enumerate(steps, start=1) if tuple(step) == ("study", study))
        return {**parameters, "steps": steps[:end]}
    if study == "workings" and parameters["workings"]:
        return dict(parameters)
    known = [*studies, *(["workings"] if parameters["workings"] else [])]
    allowed = "its studies are " + listed(known)
    raise AuthorError(
        [Problem(f'the case has no study "{shortened(study)}"', allowed, near(study, known) or "name one")]
    )


def files_of(found: Harvest, figure: str, to: Path) -> dict[Path, bytes]:
    """Return the files to write: the drawing, and beside it the tables of its study.

    Args:
        found: What a kernel gave that drew for a paper.
        figure: ``<study>``, ``<study>.<figure>`` or the name of its file.
        to: Where the drawing goes.

    Raises:
        AuthorError: There is no such figure, or it cannot be drawn anew.
    """
    exhibit = _named(figure, [one for one in found.exhibits if one["kind"] == "figure"])
    drawing = unpacked(found.files[exhibit["file"]].decode())
    if drawing is None:
        name = f"{exhibit['file']} was not drawn with matplotlib"
        raise AuthorError([Problem(name, "draw asks matplotlib for another size", "take the file from its page")])
    tables = [one for one in found.exhibits if one["kind"] == "table" and one["study"] == exhibit["study"]]
    beside = {
        to.with_name(to.stem + ("" if len(tables) == 1 else f"-{one['name']}") + ".csv"): found.files[one["file"]]
        for one in tables
    }
    return {to: drawing, **beside}


def _named(figure: str, exhibits: list[dict[str, Any]]) -> dict[str, Any]:
    names = {f"{one['study']}.{one['name']}": one for one in exhibits}
    stems = {Path(one["file"]).stem: one for one in exhibits}
    asked = figure.removeprefix("figures/").removesuffix(".svg")
    own = [one for one in exhibits if one["study"] == asked]
    if asked in names or asked in stems:
        return names.get(asked) or stems[asked]
    if len(own) == 1:
        return own[0]
    if own:
        allowed = "its figures are " + ", ".join(name for name, one in names.items() if one in own)
        raise AuthorError([Problem(f'"{asked}" has {len(own)} figures', allowed, "name one of them")])
    raise AuthorError([_unknown(asked, names)])


def _unknown(asked: str, names: Mapping[str, Any]) -> Problem:
    allowed = "figures are " + ", ".join(names) if names else "a study with a figure"
    return Problem(f'no figure "{printable(asked)}"', allowed, near(asked, list(names)) or "name one that exists")


def write(files: Mapping[Path, bytes], writer: Callable[[Path, bytes], None]) -> list[Path]:
    """Write the files, all checked first, and return their paths.

    Args:
        files: Path → bytes.
        writer: Writes one file whole or not at all.

    Raises:
        AuthorError: A folder stands where a file is to go.
    """
    taken = [path for path in files if path.is_dir()]
    if taken:
        name = printable(str(taken[0]))
        raise AuthorError([Problem(f"{name} is a folder", "a table goes there", "rename it, or name another file")])
    for path, data in files.items():
        writer(path, data)
    return list(files)
