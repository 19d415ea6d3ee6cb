"""A whole book: its cases, parameter sets and sources as they were read."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path

from bandbook.cases.read import Case, read_case
from bandbook.cases.sets import ParameterSet, read_parameter_set
from bandbook.cases.sources import Sources, read_sources
from bandbook.errors import Problem
from bandbook.parameters import near


@dataclass(frozen=True)
class Book:
    """A book as it was read; nothing of it is computed.

    Attributes:
        root: The folder of mkdocs.yml.
        content: The folder of the cases.
        cases: In the order of their ids.
        sets: Name → parameter set.
        sources: Its sources.
    """

    root: Path
    content: Path
    cases: tuple[Case, ...] = ()
    sets: Mapping[str, ParameterSet] = field(default_factory=dict)
    sources: Sources = field(default_factory=Sources)

    @property
    def problems(self) -> tuple[Problem, ...]:
        """What is wrong with the files that cases share."""
        found = [problem for parameters in self.sets.values() for problem in parameters.problems]
        return (*self.sources.problems, *found, *_unknown_sources(self))


def _unknown_sources(book: Book) -> list[Problem]:
    problems = []
    for parameters in book.sets.values():
        named = [(parameters.source, 1), *((value.source, value.line) for value in parameters.values.values())]
        for key, line in named:
            if key and key not in book.sources.entries:
                problems.append(source_problem(key, book.sources).at(parameters.file, line or 1))
    return problems


def source_problem(key: str, sources: Sources) -> Problem:
    """Return the problem of a source that sources.bib lacks."""
    remedy = near(key, sources.entries.keys()) or "add the entry to sources.bib"
    return Problem(f'unknown source "{key}"', "a source is a key of sources.bib", remedy, ("source",))


def read_book(root: Path, content: Path) -> Book:
    """Read every case, parameter set and the sources of a book."""

    def named(path: Path) -> str:
        return path.relative_to(root).as_posix() if path.is_relative_to(root) else path.as_posix()

    folder = content / "cases"
    cases = [
        read_case(path, identity=path.relative_to(folder).with_suffix("").as_posix(), file=named(path))
        for path in sorted(folder.rglob("*.md"))
    ]
    sets = [read_parameter_set(path, named(path)) for path in sorted((content / "parameters").glob("*.toml"))]
    bib = content / "sources.bib"
    sources = read_sources(bib, named(bib))
    return Book(root, content, tuple(cases), {parameters.name: parameters for parameters in sets}, sources)
