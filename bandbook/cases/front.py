"""Front matter: YAML between two lines of three hyphens at the very top."""

import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any, Final

from bandbook.errors import Problem
from bandbook.parameters import Field, check

STATES: Final = ("active", "finished", "withdrawn")
FIELDS: Final = (
    Field("title", "text", "title of the case"),
    Field("tags", "table", "words to find it by", default=()),
    Field("state", "choice", "state of the study", default="active", choices=STATES),
    Field("private", "flag", "left out of the bound book", default=False),
    Field("authors", "table", "who wrote it", default=()),
    Field("aim", "text", "what it is for, one line", default=""),
    Field("conclusion", "text", "what was found, one line", default=""),
    Field("next", "text", "what to do next, one line", default=""),
    Field("see", "table", "ids of related cases", default=()),
    Field("was", "table", "former ids", default=()),
    Field("uses", "table", "files of the book that workings read", default=()),
)
_LISTS = ("tags", "authors", "see", "was", "uses")


@dataclass(frozen=True)
class FrontMatter:
    """What stands on top of a case file."""

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


def read_front(text: str) -> tuple[FrontMatter, str, int, list[Problem]]:
    """Read the front matter of a file.

    Returns:
        What it says, the text after it, the line at which that begins, and the problems, placed at their line.
    """
    match = re.match(r"---[ \t]*\n(.*?)(?:^|\n)---[ \t]*(?:\n|\Z)", text, flags=re.DOTALL)
    if match is None:
        found = "the front matter is not closed" if text.startswith("---") else "there is no front matter"
        remedy = "begin the file with ---, title: …, ---"
        return (
            FrontMatter(),
            text,
            1,
            [Problem(found, "a case begins with its title between two lines ---", remedy).at("", 1)],
        )
    rest = text[match.end() :]
    front, problems = _read(match[1])
    return front, rest, text[: match.end()].count("\n") + 1, problems


def _read(source: str) -> tuple[FrontMatter, list[Problem]]:
    import yaml

    try:
        node = yaml.compose(source, Loader=yaml.SafeLoader)
        given = yaml.safe_load(source)
    except (yaml.YAMLError, ValueError, RecursionError) as error:
        mark = getattr(error, "problem_mark", None)
        what = getattr(error, "problem", None) or str(error)
        line = min(mark.line, source.count("\n")) + 2 if mark else 2
        return FrontMatter(), [
            Problem(f"the front matter is no YAML: {what}", "key: value lines", "correct it").at("", line)
        ]
    if not isinstance(given, dict) or not isinstance(node, yaml.MappingNode):
        return FrontMatter(), [Problem("the front matter holds no keys", "at least a title", "add title: …").at("", 1)]
    lines = {str(key.value): key.start_mark.line + 2 for key, _ in node.value}
    names = [str(key.value) for key, _ in node.value]
    twice = [name for number, name in enumerate(names) if name in names[:number]]
    problems = [Problem(f'the key "{name}" stands twice', "once", "remove one", (name,)) for name in twice]
    lists, found = _lists({str(key): value for key, value in given.items()})
    checked, wrong = check(FIELDS, lists)
    problems += [*found, *wrong]
    placed = [problem.at("", lines.get(str(problem.key[0]), 1) if problem.key else 1) for problem in problems]
    return _front(checked, lists, lines), placed


def _lists(given: dict[str, Any]) -> tuple[dict[str, Any], list[Problem]]:
    """Replace each list of words by a table, so that one check reads all keys; say which is no list of words."""
    problems = []
    plain = dict(given)
    for name in _LISTS:
        if name not in given:
            continue
        value = [given[name]] if isinstance(given[name], str) else given[name]
        if not isinstance(value, list) or not all(isinstance(entry, str) and entry.strip() for entry in value):
            problems.append(Problem("found something else", "a list of words: [one, two]", "correct it", (name,)))
            value = []
        plain[name] = dict.fromkeys(value)
    return plain, problems


def _front(checked: Mapping[str, Any], lists: Mapping[str, Any], lines: Mapping[str, int]) -> FrontMatter:
    words = {name: tuple(lists.get(name) or ()) for name in _LISTS}
    return FrontMatter(
        title=checked["title"] or "",
        state=checked["state"] or "active",
        private=bool(checked["private"]),
        aim=checked["aim"] or "",
        conclusion=checked["conclusion"] or "",
        next=checked["next"] or "",
        lines=lines,
        **words,
    )
