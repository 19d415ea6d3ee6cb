"""The files of the book that a case's workings read: checked by the host and embedded, a kernel opens none."""

from pathlib import Path, PurePosixPath

from bandbook.cases.book import Book
from bandbook.cases.read import read_text
from bandbook.errors import Problem
from bandbook.parameters import shortened

_ALLOWED = "text files below the content folder, such as data/gaps.csv"


def embedded(paths: tuple[str, ...], book: Book) -> tuple[dict[str, str], list[Problem]]:
    """Return path → text of the files that front matter ``uses`` names, and what is wrong with a path."""
    files: dict[str, str] = {}
    problems: list[Problem] = []
    for row, path in enumerate(paths):
        text, wrong = text_of_book(path, book.content)
        problems += [problem.below("uses", row) for problem in wrong]
        if text is not None:
            files[path] = text
    return files, problems


def text_of_book(path: str, content: Path) -> tuple[str | None, list[Problem]]:
    """Return the text of a file below the content folder, and what is wrong with its path or its bytes."""
    if not _is_inside(path, content):
        return None, [Problem(f'the path "{shortened(path)}" leads out of the book', _ALLOWED, "correct the path")]
    if str(PurePosixPath(path)) != path or ".." in PurePosixPath(path).parts:
        return None, [
            Problem(f'the path "{shortened(path)}" is roundabout', _ALLOWED, f'write "{_straight(path, content)}"')
        ]
    text, wrong = read_text(content / path)
    return text, [_of_file(path, problem) for problem in wrong]


def _of_file(path: str, problem: Problem) -> Problem:
    """Return what is wrong with a file as a problem of the case that names it."""
    if problem.found == "it is no file":
        return Problem(f'there is no file "{shortened(path)}"', _ALLOWED, "correct the path, or add the file")
    return Problem(f'"{shortened(path)}", line {problem.line}: {problem.found}', problem.allowed, problem.remedy)


def _is_inside(path: str, content: Path) -> bool:
    """Return whether a path, symbolic links followed, ends inside the content folder."""
    try:
        return not Path(path).is_absolute() and (content / path).resolve().is_relative_to(content.resolve())
    except (OSError, RuntimeError, ValueError):
        return False


def _straight(path: str, content: Path) -> str:
    return (content / path).resolve().relative_to(content.resolve()).as_posix()
