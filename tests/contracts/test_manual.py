"""The manual names what the code takes: lattices, fields, questions, quantities, commands, and no other."""

import re
from pathlib import Path

import pytest

from bandbook.analyses import ANALYSES, Analysis
from bandbook.cases.front import FIELDS
from bandbook.cli import COMMANDS
from bandbook.lattices import LATTICES, Lattice
from bandbook.solver.parent import BAND_EDGE, FLAT_BAND, GAP_LEVEL, NO_PARENT, NOT_1D
from bandbook.systems.form import COMMON
from tests import reference_page

CONTENT = Path(__file__).parents[2] / "content"
#: Keys of the front matter that the manual leaves out.
SILENT = {"private"}


def page(name: str) -> str:
    return (CONTENT / "manual" / name).read_text(encoding="utf-8")


def section(text: str, head: str) -> str:
    """Return what stands under a heading, up to the next one of its rank."""
    rank = head.split(" ", maxsplit=1)[0]
    _, found, after = text.partition(f"\n{head}\n")
    assert found, f"no heading {head!r}"
    return re.split(rf"^{rank} ", after, flags=re.MULTILINE)[0]


def rows(text: str) -> dict[str, str]:
    """Return the first word of each table row in backticks → the row."""
    return {match[1]: match[0] for match in re.finditer(r"^\| `([^`]+)`.*$", text, flags=re.MULTILINE)}


def test_the_lattices_are_those_of_the_code() -> None:
    assert set(rows(section(page("writing-a-case.md"), "### A named lattice"))) - {"lattice"} == {
        lattice.name for lattice in LATTICES
    }


@pytest.mark.parametrize("lattice", LATTICES, ids=lambda lattice: lattice.name)
def test_every_field_of_a_lattice_is_named(lattice: Lattice) -> None:
    _, _, fields, sites, _ = rows(section(page("writing-a-case.md"), "### A named lattice"))[lattice.name].split("|")
    assert set(re.findall(r"`(\w+)`", fields)) == {field.name for field in lattice.fields} - {"alpha"}
    assert sites.strip().startswith(lattice.sites.split(" ")[0].rstrip(","))


def test_the_keys_of_every_form_are_named() -> None:
    text = section(page("writing-a-case.md"), "## System")
    assert [field.name for field in COMMON if f"`{field.name}`" not in text] == []


def test_the_questions_are_those_of_the_code() -> None:
    found = re.findall(r"^### `(\w+)`$", section(page("writing-a-case.md"), "## Study"), flags=re.MULTILINE)
    assert sorted(found) == sorted(analysis.question for analysis in ANALYSES)


@pytest.mark.parametrize("analysis", ANALYSES, ids=lambda analysis: analysis.question)
def test_every_key_and_quantity_of_a_question_is_named(analysis: Analysis) -> None:
    text = section(page("writing-a-case.md"), f"### `{analysis.question}`")
    choices = [choice for field in analysis.fields if field.kind == "choices" for choice in field.choices]
    words = [field.name for field in analysis.fields] + [one.pattern for one in analysis.quantities] + choices
    assert [word for word in words if f"`{word}`" not in text] == []


def test_the_keys_of_the_front_matter_are_those_of_the_code() -> None:
    text = section(page("writing-a-case.md"), "## Front matter")
    keys = {key for line in rows(text).values() for key in re.findall(r"`(\w+)`", line.split("|")[1])}
    assert keys == {field.name for field in FIELDS} - SILENT


def test_the_commands_and_their_options_are_those_of_the_code() -> None:
    written = {row.split()[1]: row for row in rows(section(page("running.md"), "## Commands"))}
    assert set(written) == {command.name for command in COMMANDS}
    for command in COMMANDS:
        options = {name for option in command.params for name in option.opts if name.startswith("--")}
        assert set(re.findall(r"--[a-z-]+", written[str(command.name)])) == options, command.name


def test_the_exit_statuses_are_six() -> None:
    found = re.findall(r"^\| (\d) \|", section(page("running.md"), "## Exit status"), flags=re.MULTILINE)
    assert found == ["0", "1", "2", "3", "4", "5"]


def test_the_remarks_about_k_are_those_of_the_code() -> None:
    text = page("reading-k-labels.md")
    for remark in (BAND_EDGE, FLAT_BAND, GAP_LEVEL, NO_PARENT, NOT_1D):
        assert f"| {remark} |" in text


def test_sources_named_in_docstrings_are_in_the_bibliography() -> None:
    entries = set(
        re.findall(r"^@\w+\{(\w+),", (CONTENT / "sources.bib").read_text(encoding="utf-8"), flags=re.MULTILINE)
    )
    named = {
        key
        for path in (CONTENT.parent / "bandbook").rglob("*.py")
        for line in re.findall(r"^ *Source: (.+)\.$", path.read_text(encoding="utf-8"), flags=re.MULTILINE)
        for key in re.findall(r"\b[a-z]+\d{4}\b", line)
    }
    assert named
    assert named <= entries


def test_the_reference_is_what_the_code_says() -> None:
    assert reference_page.PAGE.read_text(encoding="utf-8") == reference_page.page(), (
        "the code has changed: write the page anew with python -m tests.reference_page"
    )
