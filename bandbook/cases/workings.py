"""Workings are parsed, never executed: their syntax, and the names they bind at top level."""

import ast
import warnings

from bandbook.cases.fences import Block
from bandbook.errors import Problem


def bound_names(block: Block) -> tuple[set[str], list[Problem]]:
    """Return the names that a workings block binds at top level, and a syntax error with its line of the file."""
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            tree = ast.parse(_without_magics(block.source))
    except SyntaxError as error:
        line = block.line + (error.lineno or 1)
        found = f"no Python: {error.msg}"
        return set(), [Problem(found, "workings are Python", "correct the line").at("", line)]
    except (ValueError, RecursionError, MemoryError) as error:
        return set(), [Problem(f"no Python: {error}", "workings are Python", "simplify the block").at("", block.line)]
    names: set[str] = set()
    for node in tree.body:
        if isinstance(node, ast.FunctionDef | ast.ClassDef):
            names.add(node.name)
        elif isinstance(node, ast.Import | ast.ImportFrom):
            names |= {(alias.asname or alias.name).split(".")[0] for alias in node.names}
        elif isinstance(node, ast.Assign):
            names |= {target.id for target in node.targets if isinstance(target, ast.Name)}
    return names, []


def _without_magics(source: str) -> str:
    """Return the source with IPython's own lines blanked, which the kernel understands and Python does not."""
    return "\n".join("pass" if line.startswith(("%", "!")) else line for line in source.split("\n"))
