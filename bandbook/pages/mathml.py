"""Formulas between dollar signs become MathML when the pages are written: no script, no other host."""

import html
import re
from typing import Final

#: A fence, an inline code span, an escaped sign, a display formula, an inline formula; the last two are converted.
_PARTS: Final = re.compile(
    r"(?P<fence>^(?P<mark>`{3,}|~{3,})[^\n]*\n.*?(?:^(?P=mark)[^\n]*$|\Z))"
    r"|(?P<code>(?P<ticks>`+)(?!`).+?(?<!`)(?P=ticks)(?!`))"
    r"|(?P<escaped>\\\$)"
    r"|\$\$(?P<display>[^$]+?)\$\$"
    r"|(?<![\w$])\$(?=\S)(?P<inline>[^$\n]+?)(?<=\S)\$(?![\w$])",
    flags=re.MULTILINE | re.DOTALL,
)


def with_mathml(text: str) -> str:
    r"""Return Markdown with its formulas as MathML; what cannot be converted is shown as it is and marked.

    >>> "<math" in with_mathml("a $k = \\pi/a$ b"), with_mathml("5 $ or `$k$`")
    (True, '5 $ or `$k$`')
    """
    return _PARTS.sub(_converted, text)


def mistakes(text: str) -> list[tuple[int, str]]:
    r"""Return the formulas that cannot be converted: line in the text, from 1, and why.

    >>> mistakes("one\n$x_{1$")
    [(2, 'the formula "x_{1" has braces that do not close')]
    """
    found = []
    for part in _PARTS.finditer(text):
        formula = part["display"] or part["inline"]
        if formula is not None:
            reason = _mathml(formula, is_display=bool(part["display"]))[1]
            if reason:
                found.append((text.count("\n", 0, part.start()) + 1, f'the formula "{formula.strip()}" {reason}'))
    return found


def _converted(part: re.Match[str]) -> str:
    formula = part["display"] or part["inline"]
    if formula is None:
        return "$" if part["escaped"] else part[0]
    found, reason = _mathml(formula, is_display=bool(part["display"]))
    if reason:
        return f'<code class="bb-formula" title="{html.escape(reason)}">{html.escape(formula.strip())}</code>'
    return f'<span class="bb-math">{found}</span>'


def _mathml(formula: str, *, is_display: bool) -> tuple[str, str]:
    """Return MathML, and why there is none."""
    if not _is_balanced(formula):
        return "", "has braces that do not close"
    from latex2mathml.converter import convert

    try:
        found = convert(formula.strip(), display="block" if is_display else "inline")
    except Exception:  # noqa: BLE001 - it raises classes of its own and Python's for what it cannot read
        return "", "is no LaTeX that is known here"
    left = re.search(r"\\[A-Za-z]+|\\", re.sub(r"<[^>]*>", "", found))
    if left:
        return "", f"has the word {left[0]}, which is not known here"
    return found.replace("*", "&#42;").replace("_", "&#95;"), ""


def _is_balanced(formula: str) -> bool:
    depth = 0
    for sign in re.sub(r"\\[{}]", "", formula):
        depth += {"{": 1, "}": -1}.get(sign, 0)
        if depth < 0:
            return False
    return depth == 0
