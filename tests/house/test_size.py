"""Size limits of the house: modules under 400 lines, bodies under 40, nesting under 4, six arguments at most."""

import ast
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
MODULES = sorted((ROOT / "bandbook").rglob("*.py"))
NESTING = (ast.For, ast.While, ast.If, ast.With, ast.Try, ast.Match)


def functions(path: Path) -> list[ast.FunctionDef | ast.AsyncFunctionDef]:
    tree = ast.parse(path.read_text(encoding="utf-8"))
    return [node for node in ast.walk(tree) if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef)]


def body_lines(function: ast.FunctionDef | ast.AsyncFunctionDef) -> int:
    """Return the lines of a body without its docstring."""
    body = function.body[1:] if ast.get_docstring(function) is not None else function.body
    return (body[-1].end_lineno or 0) - body[0].lineno + 1 if body else 0


def nesting(node: ast.AST, *, depth: int = 0) -> int:
    """Return the deepest nesting of blocks; an ``elif`` counts as its ``if``."""
    deepest = depth
    for child in ast.iter_child_nodes(node):
        if isinstance(child, ast.FunctionDef | ast.AsyncFunctionDef | ast.ClassDef):
            continue
        is_elif = isinstance(node, ast.If) and isinstance(child, ast.If) and node.orelse == [child]
        inner = depth + (isinstance(child, NESTING) and not is_elif)
        deepest = max(deepest, nesting(child, depth=inner))
    return deepest


@pytest.mark.parametrize("path", MODULES, ids=lambda path: path.relative_to(ROOT).as_posix())
def test_a_module_is_small(path: Path) -> None:
    assert len(path.read_text(encoding="utf-8").splitlines()) < 400
    for function in functions(path):
        place = f"{path.relative_to(ROOT)}:{function.lineno} {function.name}"
        arguments = function.args
        assert body_lines(function) < 40, f"{place}: a body of {body_lines(function)} lines"
        assert nesting(function) < 4, f"{place}: nested {nesting(function)} deep"
        assert len(arguments.args) + len(arguments.kwonlyargs) + len(arguments.posonlyargs) <= 7, f"{place}: arguments"


def test_a_deep_nest_is_seen() -> None:
    code = "def f(a):\n for b in a:\n  if b:\n   while b:\n    with b:\n     pass\n"
    assert nesting(ast.parse(code).body[0]) == 4


def test_an_elif_is_no_nesting() -> None:
    code = "def f(a):\n if a:\n  pass\n elif a > 1:\n  pass\n elif a > 2:\n  pass\n"
    assert nesting(ast.parse(code).body[0]) == 1
