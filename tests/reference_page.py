"""Writes the reference of the manual from the objects that check what an author writes: ``python -m tests.reference_page``."""

from collections.abc import Iterable
from pathlib import Path

from bandbook.analyses import ANALYSES, Analysis
from bandbook.cli import COMMANDS
from bandbook.errors import AuthorError, BandbookError, IntegrityError, PhysicsError, RunError, WorkingsError
from bandbook.exhibits import KINDS
from bandbook.lattices import LATTICES, Lattice
from bandbook.parameters import Field, describe
from bandbook.systems import COMMON, FORMS, Form

PAGE = Path(__file__).parent.parent / "content/manual/reference.md"
HEAD = """# Reference

Everything that a block may hold, as the program checks it. This page is written from the code; the pages before it explain.
"""


def page() -> str:
    """Return the page."""
    return "\n".join([HEAD, *_forms(), *_lattices(), *_questions(), *_kinds(), *_commands(), *_statuses()])


def _cell(text: str) -> str:
    return text.replace("|", "\\|")


def _table(heads: Iterable[str], rows: Iterable[Iterable[str]]) -> list[str]:
    names = list(heads)
    lines = ["| " + " | ".join(names) + " |", "|" + "---|" * len(names)]
    return [*lines, *("| " + " | ".join(_cell(one) for one in row) + " |" for row in rows), ""]


def _fields(fields: Iterable[Field], prefix: str = "") -> list[list[str]]:
    rows = []
    for field in fields:
        rows.append([f"`{prefix}{field.name}`", field.meaning, describe(field), _default(field)])
        rows += _fields(field.fields, f"{prefix}{field.name}.")
    return rows


def _default(field: Field) -> str:
    if field.is_required:
        return "required"
    if field.default in (None, (), ""):
        return "—"
    if isinstance(field.default, tuple):
        return ", ".join(f"`{one}`" for one in field.default)
    return f"`{str(field.default).lower() if isinstance(field.default, bool) else field.default}`"


_KEYS = ("key", "meaning", "allowed", "default")


def _forms() -> list[str]:
    lines = ["## Forms of a system", "", "Keys of every form:", "", *_table(_KEYS, _fields(COMMON))]
    for form in FORMS:
        lines += [f"### `{form.key}`: {form.meaning}", "", *_own(form)]
    return lines


def _own(form: Form) -> list[str]:
    own = [field for field in form.fields({}) if field not in COMMON]
    return _table(_KEYS, _fields(own))


def _lattices() -> list[str]:
    lines = ["## Lattices", ""]
    for lattice in LATTICES:
        lines += [f"### `{lattice.name}`", "", f"{_sentence(lattice)}", "", *_table(_KEYS, _fields(lattice.fields))]
    return lines


def _sentence(lattice: Lattice) -> str:
    note = f" {lattice.note}" if lattice.note else ""
    return f"{lattice.meaning[:1].upper()}{lattice.meaning[1:]}. Sites: {lattice.sites}.{note}"


def _questions() -> list[str]:
    lines = [
        "## Questions",
        "",
        "Every study has `question`, and may have `name` (default: the question) and `system` (needed with several).",
        "",
    ]
    for analysis in ANALYSES:
        lines += [
            f"### `{analysis.question}`",
            "",
            f"{analysis.meaning[:1].upper()}{analysis.meaning[1:]}.",
            "",
            *_question(analysis),
        ]
    return lines


def _question(analysis: Analysis) -> list[str]:
    fields = _table(_KEYS, _fields(analysis.fields)) if analysis.fields else ["It has no keys of its own.", ""]
    rows = [[f"`{one.pattern}`", one.kind, one.meaning] for one in analysis.quantities]
    return [*fields, *_table(("quantity", "kind", "meaning"), rows)]


def _kinds() -> list[str]:
    words = {"level": "(E − α)/β", "difference": "E/\\|β\\|", "total": "(E − n α)/β", "": "—"}
    rows = [
        [f"`{kind.name}`", kind.unit or "—", str(kind.decimals), words[kind.beta].replace("\\|", "|")]
        for kind in KINDS.values()
    ]
    text = 'The kind of a quantity fixes its unit, the decimals that are stored, and what `unit = "beta"` compares.'
    return ["## Kinds of quantity", "", text, "", *_table(("kind", "unit", "decimals", "in β"), rows)]


def _commands() -> list[str]:
    lines = ["## Commands", ""]
    for command in COMMANDS:
        text = (command.help or "").split("\\b")[0].split("\b")[0].strip().replace("\n", " ")
        usage = " ".join(
            f"[{parameter.opts[0]}{' ' + parameter.metavar if parameter.metavar else ''}]"
            if parameter.param_type_name == "option"
            else (parameter.metavar or parameter.human_readable_name)
            for parameter in command.params
        )
        lines += [f"- `bandbook {command.name} {usage}`: {text}".replace(" `:", "`:")]
    return [*lines, ""]


def _statuses() -> list[str]:
    meanings = {
        0: "done",
        WorkingsError.exit_status: "workings failed, or a reference value disagrees",
        AuthorError.exit_status: "a mistake of the author's",
        PhysicsError.exit_status: "the question makes no sense for the model, or the numbers failed",
        RunError.exit_status: "a run timed out, was killed, or its kernel died",
        IntegrityError.exit_status: "bytes are not what their name says",
    }
    assert issubclass(IntegrityError, BandbookError)
    return [
        "## Exit status",
        "",
        *_table(("status", "meaning"), ([str(number), words] for number, words in meanings.items())),
    ]


if __name__ == "__main__":
    PAGE.write_text(page(), encoding="utf-8")
