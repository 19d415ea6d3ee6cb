"""The files of the book that a case's workings read: checked by the host and embedded, a kernel opens none."""

from pathlib import Path

from bandbook.cases.book import Book
from bandbook.cases.read import read_text
from bandbook.errors import Problem


def embedded(paths: tuple[str, ...], book: Book) -> tuple[dict[str, str], list[Problem]]:
    """Return path → text of the files that front matter ``uses`` names, and what is wrong with a path."""
    files: dict[str, str] = {}
    problems: list[Problem] = []
    for path in paths:
        target = book.content / path
        try:
            inside = target.resolve().is_relative_to(book.content.resolve()) and not Path(path).is_absolute()
        except (OSError, RuntimeError, ValueError):
            inside = False
        if not inside:
            problems.append(
                Problem(f'the path "{path}" leads out of the book', "paths below content/", "correct it", ("uses",))
            )
            continue
        if not target.is_file():
            problems.append(
                Problem(f'there is no file "{path}"', "a text file below content/", "correct the path", ("uses",))
            )
            continue
        text, wrong = read_text(target)
        problems += [
            Problem(f'"{path}": {problem.found}', problem.allowed, problem.remedy, ("uses",)) for problem in wrong
        ]
        if text is not None:
            files[path] = text
    return files, problems
