"""Workings are parsed and compiled, never executed: their syntax, and the names they bind at top level."""

import ast
import re
import warnings
from collections.abc import Iterator
from typing import Final

from bandbook.cases.fences import Block
from bandbook.errors import Problem

#: What ``from x import *`` binds: any name.
ANY: Final = "*"
_MAGIC = re.compile(r"^(\s*)(?:[%!?]|[\w, ]+=\s*[%!]|\S+\?{1,2}\s*$).*$")
_PYTHON_CELLS: Final = frozenset({"%%time", "%%timeit", "%%capture", "%%prun"})
_SCOPES = (ast.FunctionDef, ast.AsyncFunctionDef, ast.ClassDef, ast.Lambda)


def bound_names(block: Block) -> tuple[set[str], list[Problem]]:
    """Return the names that a workings block binds at top level, and a syntax error with its line of the file."""
    source = block.source
    first = source.strip().split("\n", maxsplit=1)[0].split(maxsplit=1)[:1]
    if first and first[0].startswith("%%") and first[0] not in _PYTHON_CELLS:
        return set(), []  # the kernel hands such a cell to another language
    try:
        names = _names(source)
    except SyntaxError as error:
        number = min(max(1, error.lineno or 1), source.count("\n"))
        text = source.split("\n")[number - 1].strip()[:60]
        found = f'"{text}" is no Python ({error.msg})' if text else f"no Python ({error.msg})"
        return set(), [Problem(found, "workings are Python", "correct the line").at("", block.line + number)]
    except (ValueError, RecursionError, MemoryError) as error:
        what = "nested too deeply" if not isinstance(error, ValueError) else str(error)
        found = f"the block cannot be read as Python ({what})"
        return set(), [Problem(found, "workings are Python", "simplify the block").at("", block.line)]
    return names, []


def _names(source: str) -> set[str]:
    """Return the names bound at top level; lines of IPython's own are blanked where Python does not take them.

    Raises:
        SyntaxError: It is no Python; of a block nested too deeply also ``RecursionError`` or ``MemoryError``.
    """
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        try:
            tree = ast.parse(source)
        except SyntaxError:
            tree = ast.parse("\n".join(_MAGIC.sub(r"\1pass", line) for line in source.split("\n")))
        compile(tree, "workings", "exec", flags=ast.PyCF_ALLOW_TOP_LEVEL_AWAIT, dont_inherit=True)
    return set(_bound(tree))


def _bound(tree: ast.Module) -> Iterator[str]:
    """Yield the names bound outside functions and classes, in branches and loops too."""
    ahead: list[ast.AST] = [tree]
    while ahead:
        node = ahead.pop()
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef | ast.ClassDef):
            yield node.name
        elif isinstance(node, ast.Import | ast.ImportFrom):
            yield from (alias.asname or alias.name.partition(".")[0] for alias in node.names)
        elif isinstance(node, ast.Name) and isinstance(node.ctx, ast.Store):
            yield node.id
        if not isinstance(node, _SCOPES):
            ahead += ast.iter_child_nodes(node)
