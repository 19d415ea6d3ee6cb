"""A whole book: its cases, parameter sets and sources as they were read."""

import os
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, field
from pathlib import Path

from bandbook.cases.read import Case, read_case
from bandbook.cases.sets import ParameterSet, read_parameter_set
from bandbook.cases.sources import Sources, read_sources
from bandbook.cases.toml_lines import Key
from bandbook.errors import Problem
from bandbook.parameters import near, shortened


@dataclass(frozen=True)
class Book:
    """A book as it was read; nothing of it is computed.

    Attributes:
        root: The folder of mkdocs.yml.
        content: The folder of the cases.
        cases: In the order of their ids.
        sets: Name → parameter set.
        sources: Its sources.
        unread: Folders that could not be listed.
    """

    root: Path
    content: Path
    cases: tuple[Case, ...] = ()
    sets: Mapping[str, ParameterSet] = field(default_factory=dict)
    sources: Sources = field(default_factory=Sources)
    unread: tuple[Problem, ...] = ()

    @property
    def problems(self) -> tuple[Problem, ...]:
        """What is wrong with the files that cases share."""
        found = [*self.unread, *self.sources.problems]
        for parameters in self.sets.values():
            own = [*parameters.problems, *_unknown_sources(parameters, self.sources)]
            found += sorted(own, key=lambda problem: problem.line)
        return tuple(found)


def _unknown_sources(parameters: ParameterSet, sources: Sources) -> list[Problem]:
    named: list[tuple[Key, str]] = [((), parameters.source)]
    rows: list[tuple[Key, str]] = [(("values", name), value.source) for name, value in parameters.values.items()]
    rows += [(("atoms", name), row["source"] or "") for name, row in parameters.atoms.items()]
    rows += [(("bond", number), row["source"] or "") for number, row in enumerate(parameters.bonds)]
    named += [(key, source) for key, source in rows if source != parameters.source]
    return [
        source_problem(source, sources).below(*key).at(parameters.file, parameters.line_of((*key, "source")))
        for key, source in named
        if source and source not in sources.entries
    ]


def source_problem(key: str, sources: Sources) -> Problem:
    """Return the problem of a source that sources.bib lacks."""
    remedy = near(key, sources.entries.keys()) or "add the entry to sources.bib"
    return Problem(f'unknown source "{shortened(key)}"', "a source is a key of sources.bib", remedy, ("source",))


def read_book(root: Path, content: Path) -> Book:
    """Read every case, parameter set and the sources of a book.

    Files and folders whose name begins with a point are an editor's or a system's own and are left out.
    """

    def named(path: Path) -> str:
        return path.relative_to(root).as_posix() if path.is_relative_to(root) else path.as_posix()

    folder = content / "cases"
    unread: list[OSError] = []
    cases = [
        read_case(path, identity=path.relative_to(folder).as_posix().removesuffix(".md"), file=named(path))
        for path in sorted(_markdown(folder, unread))
    ]
    sets = [
        read_parameter_set(path, named(path))
        for path in sorted((content / "parameters").glob("*.toml"))
        if not path.name.startswith(".")
    ]
    bib = content / "sources.bib"
    problems = tuple(_unlisted(error, named) for error in unread if not isinstance(error, FileNotFoundError))
    by_name = {parameters.name: parameters for parameters in sets}
    return Book(root, content, tuple(cases), by_name, read_sources(bib, named(bib)), problems)


def _markdown(folder: Path, unread: list[OSError]) -> Iterator[Path]:
    """Yield every path that ends in ``.md``; a folder of such a name too, which is then no case."""
    for place, folders, files in os.walk(folder, onerror=unread.append):
        folders[:] = [name for name in folders if not name.startswith(".")]
        yield from (
            Path(place) / name for name in (*files, *folders) if name.endswith(".md") and not name.startswith(".")
        )


def _unlisted(error: OSError, named: Callable[[Path], str]) -> Problem:
    place = named(Path(error.filename or "."))
    found = f"the folder cannot be read: {error.strerror or error}"
    return Problem(found, "folders that the command may read", "check its rights").at(place, 1)
