r"""Formulas: MathML where they can be set, what they are otherwise; code and money are left alone."""

from xml.etree import ElementTree as ET

import pytest

from bandbook.pages.mathml import mistakes, with_mathml


def test_a_formula_becomes_mathml_inside_its_sentence() -> None:
    text = with_mathml(r"The gap $2\left|\beta_1-\beta_2\right|$ at $k=\pi/a$.")
    assert text.startswith('The gap <span class="bb-math"><math')
    assert text.count("<math") == 2
    assert "\\" not in text
    inside = text[text.index("<math") : text.index("</math>") + 7]
    assert ET.fromstring(inside).tag.endswith("math")  # noqa: S314 - our own output


def test_a_displayed_formula_is_a_block() -> None:
    assert 'display="block"' in with_mathml("$$\nE = \\alpha + 2\\beta\\cos ka\n$$")


@pytest.mark.parametrize(
    "text",
    ["costs 5 $ or 6 $", "`$x$` is code", "```\n$x$\n```", "``a `$x$` b``", "a$b$c", "$ x $", "~~~text\n$x$\n~~~\n"],
)
def test_what_is_no_formula_is_left_alone(text: str) -> None:
    assert with_mathml(text) == text
    assert mistakes(text) == []


def test_a_dollar_sign_can_be_written() -> None:
    assert with_mathml(r"\$5 and \$6") == "$5 and $6"


@pytest.mark.parametrize(
    ("formula", "words"),
    [
        ("x_{1", "has braces that do not close"),
        ("x}", "has braces that do not close"),
        (r"\nosuchword x", "which is not known here"),
        (r"x_a_b", "is no LaTeX that is known here"),
    ],
)
def test_what_cannot_be_set_is_told_with_its_line_and_shown_as_it_is(formula: str, words: str) -> None:
    text = f"first\n\nthen ${formula}$."
    ((line, found),) = mistakes(text)
    assert line == 3
    assert words in found
    assert 'class="bb-formula"' in with_mathml(text)


def test_markdown_finds_nothing_to_emphasise_in_a_formula() -> None:
    assert "*" not in with_mathml("$a*b*c_d$").replace("&#42;", "")
