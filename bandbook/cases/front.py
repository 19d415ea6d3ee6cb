"""Front matter: YAML between two lines of three hyphens at the very top."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any, Final

from bandbook.errors import Problem
from bandbook.parameters import Field, check

if TYPE_CHECKING:
    import yaml

STATES: Final = ("active", "finished", "withdrawn")
FIELDS: Final = (
    Field("title", "text", "title of the case", default=""),
    Field("tags", "texts", "words to find it by", default=()),
    Field("state", "choice", "state of the study", default="active", choices=STATES),
    Field("private", "flag", "left out of the bound book", default=False),
    Field("authors", "texts", "who wrote it", default=()),
    Field("aim", "text", "what it is for, one line", default=""),
    Field("conclusion", "text", "what was found, one line", default=""),
    Field("next", "text", "what to do next, one line", default=""),
    Field("see", "texts", "ids of related cases", default=()),
    Field("was", "texts", "former ids", default=()),
    Field("uses", "texts", "files of the book that workings read", default=()),
)
_LISTS: Final = tuple(field.name for field in FIELDS if field.kind == "texts")
_NAMES: Final = frozenset(field.name for field in FIELDS)
_WORDS: Final = tuple(field.name for field in FIELDS if field.kind == "text")
_ALLOWED = "a case begins with its title between two lines ---"

Given = dict[str, Any]
Lines = dict[tuple[str | int, ...], int]


@dataclass(frozen=True)
class FrontMatter:
    """What stands on top of a case file.

    Attributes:
        lines: Key → its line in the file.
        rows: Key and number of the entry → its line in the file, for lists.
    """

    title: str = ""
    tags: tuple[str, ...] = ()
    state: str = "active"
    private: bool = False
    authors: tuple[str, ...] = ()
    aim: str = ""
    conclusion: str = ""
    next: str = ""
    see: tuple[str, ...] = ()
    was: tuple[str, ...] = ()
    uses: tuple[str, ...] = ()
    lines: Mapping[str, int] = field(default_factory=dict)
    rows: Mapping[tuple[str, int], int] = field(default_factory=dict)

    def line_of(self, key: str, row: int = -1) -> int:
        """Return the line of an entry of a list, otherwise of its key, otherwise the first."""
        return self.rows.get((key, row), self.lines.get(key, 1))


def read_front(text: str) -> tuple[FrontMatter, str, int, list[Problem]]:
    """Read the front matter of a file.

    Returns:
        What it says, the text after it, the line at which that begins, and the problems, placed at their line.
    """
    lines = text.split("\n")
    if lines[0].rstrip() != "---":
        return FrontMatter(), text, 1, [_missing(text)]
    end = next((number for number, line in enumerate(lines[1:], start=1) if line.rstrip() == "---"), None)
    if end is None:
        problem = Problem("the front matter is not closed", _ALLOWED, "add a line --- after its last key")
        return FrontMatter(), text, 1, [problem.at("", 1)]
    front, problems = _read("\n".join(lines[1:end]) + "\n")
    return front, "\n".join(lines[end + 1 :]), end + 2, problems


def _missing(text: str) -> Problem:
    if text.lstrip().startswith("---"):
        found = "the front matter does not begin on the first line"
        return Problem(found, _ALLOWED, "remove what stands above it").at("", 1)
    return Problem("there is no front matter", _ALLOWED, "begin the file with ---, title: …, ---").at("", 1)


def _read(source: str) -> tuple[FrontMatter, list[Problem]]:
    import yaml

    loader = yaml.SafeLoader("")
    try:
        loader = yaml.SafeLoader(source)
        node = loader.get_single_node()
    except (yaml.YAMLError, RecursionError) as error:
        return FrontMatter(), [_no_yaml(error, source).at("", _line_of_error(error, source))]
    if not isinstance(node, yaml.MappingNode):
        remedy = "add title: …"
        return FrontMatter(), [Problem("the front matter holds no keys", "at least a title", remedy).at("", 1)]
    given, lines, problems = _keys(loader, node, source)
    checked, wrong = check(FIELDS, given)
    placed = [problem.at("", _line(problem, lines)) for problem in wrong]
    return _front(checked, lines), [*problems, *placed]


def _no_yaml(error: Exception, source: str) -> Problem:
    what = getattr(error, "problem", None) or getattr(error, "reason", None) or "nested too deeply"
    line = source.split("\n")[_line_of_error(error, source) - 2].strip()
    remedy = "put the text in quotes" if ": " in line.partition(": ")[2] else "correct the line"
    found = f'"{line[:60]}" is no YAML ({what})' if line else f"no YAML ({what})"
    return Problem(found, "lines key: value, text with a colon or a sign of YAML's in quotes", remedy)


def _line_of_error(error: Exception, source: str) -> int:
    """Return the line in the file; the source begins on its second."""
    mark = getattr(error, "problem_mark", None)
    index = mark.index if mark else getattr(error, "position", 0)
    began = getattr(error, "context_mark", None)
    if began and index >= len(source.rstrip()):
        index = began.index
    return _line_at(source, min(index, len(source.rstrip())))


def _line_at(source: str, index: int) -> int:
    """Return the line in the file; YAML's own count takes signs for line ends that no editor does."""
    return source.count("\n", 0, index) + 2


def _keys(loader: "yaml.SafeLoader", node: "yaml.MappingNode", source: str) -> tuple[Given, Lines, list[Problem]]:
    """Return key → value, key or entry → line, and what YAML cannot read or stands twice."""
    given: Given = {}
    lines: Lines = {}
    problems: list[Problem] = []
    for key, value in node.value:
        name = str(key.value) if isinstance(key.value, str) else "…"
        line = _line_at(source, key.start_mark.index)
        if name in given:
            problems.append(
                Problem(f'the key "{name}" stands twice', "each key once", "remove one", (name,)).at("", line)
            )
            continue
        lines[name,] = line
        for row, entry in enumerate(value.value if isinstance(value.value, list) else ()):
            lines[name, row] = _line_at(source, getattr(entry, "start_mark", key.start_mark).index)
        plain, wrong = _plain(loader, value)
        problems += [problem.below(name).at("", line) for problem in wrong]
        if not wrong and (plain not in (None, "") or name not in _NAMES):
            given[name] = _normal(name, plain)
    if "title" not in given and not any(problem.key[:1] == ("title",) for problem in problems):
        found = "the title is empty" if ("title",) in lines else 'the key "title" is missing'
        problem = Problem(found, "every case has a title", "add title: …")
        problems.append(problem.at("", lines.get(("title",), 1)))
    return given, lines, problems


def _plain(loader: "yaml.SafeLoader", value: "yaml.Node") -> tuple[Any, list[Problem]]:
    """Return what a node stands for."""
    import yaml

    try:
        plain = loader.construct_object(value, deep=True)
        str(plain).encode()
    except yaml.YAMLError as error:
        what = getattr(error, "problem", None) or "a value that YAML does not know"
        return None, [Problem(f"{what}", "text, true or false, lists of texts", "put it in quotes")]
    except (ValueError, RecursionError) as error:
        what = "a sign that no text holds" if isinstance(error, UnicodeError) else "a value that YAML cannot read"
        return None, [Problem(what, "text, true or false, lists of texts", "put it in quotes, or correct it")]
    return plain, []


def _normal(name: str, value: object) -> object:
    """Return one word as a list of it where a list is meant, and a text as one line."""
    if name in _LISTS and isinstance(value, str):
        return [value]
    return " ".join(value.split()) if name in _WORDS and isinstance(value, str) else value


def _line(problem: Problem, lines: Lines) -> int:
    return next((lines[problem.key[:n]] for n in (2, 1) if problem.key[:n] in lines), 1)


def _front(checked: Mapping[str, Any], lines: Lines) -> FrontMatter:
    lists = {name: tuple(dict.fromkeys(word for word in checked[name] or () if word)) for name in _LISTS}
    return FrontMatter(
        title=checked["title"] or "",
        state=checked["state"] or "active",
        private=bool(checked["private"]),
        aim=checked["aim"] or "",
        conclusion=checked["conclusion"] or "",
        next=checked["next"] or "",
        lines={str(key[0]): line for key, line in lines.items() if len(key) == 1},
        rows={(str(key[0]), int(key[1])): line for key, line in lines.items() if len(key) == 2},
        **lists,
    )
