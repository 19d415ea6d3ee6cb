"""The import table of DEVELOPERS.md is the architecture: this parses that table and holds the code to it."""

import ast
import re
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
PACKAGE = ROOT / "bandbook"


def table() -> dict[str, tuple[set[str], set[str]]]:
    """Return part → (in-house parts, outside packages) as DEVELOPERS.md has them."""
    text = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    rows = re.findall(r"^\| (\w+) \| ([\w ]*) ?\| ([\w ]*) ?\|$", text, flags=re.MULTILINE)
    return {part: (set(inside.split()), set(outside.split())) for part, inside, outside in rows if part != "part"}


def part_of(path: Path) -> str:
    """Return the part that a module belongs to."""
    first = path.relative_to(PACKAGE).parts[0]
    return first.removesuffix(".py")


def modules() -> list[Path]:
    return [path for path in sorted(PACKAGE.rglob("*.py")) if path != PACKAGE / "__init__.py"]


def imported(path: Path) -> Iterator[str]:
    """Yield every module named by an import statement, late ones included."""
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: relative import; write it out"
            yield from (
                f"{node.module}.{alias.name}" if node.module == "bandbook" else node.module or ""
                for alias in node.names
            )


def problems_of(path: Path, rules: dict[str, tuple[set[str], set[str]]]) -> list[str]:
    """Return every import of a module that its row of the table forbids."""
    part = part_of(path)
    if part not in rules:
        return [f"{path.relative_to(ROOT)}: part {part!r} has no row in the table"]
    inside, outside = rules[part]
    found = []
    for name in imported(path):
        top, *rest = name.split(".")
        if top == "bandbook":
            target = rest[0] if rest else ""
            if target and target != "__version__" and target not in inside | {part}:
                found.append(f"{path.relative_to(ROOT)}: {part} may not import {target}")
        elif top not in sys.stdlib_module_names and top not in outside:
            found.append(f"{path.relative_to(ROOT)}: {part} may not import {top}")
    return found


@pytest.mark.parametrize("path", modules(), ids=lambda path: path.relative_to(PACKAGE).as_posix())
def test_a_module_imports_only_what_its_row_allows(path: Path) -> None:
    assert problems_of(path, table()) == []


def test_every_row_is_a_part_and_every_part_a_row() -> None:
    assert set(table()) == {part_of(path) for path in modules()}


def test_the_table_has_no_cycle() -> None:
    rules = table()
    done: set[str] = set()
    while len(done) < len(rules):
        ready = {part for part, (inside, _) in rules.items() if part not in done and inside <= done}
        assert ready, f"a cycle among {sorted(set(rules) - done)}"
        done |= ready


def test_a_forbidden_import_is_seen(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys.modules[__name__], "PACKAGE", tmp_path)
    monkeypatch.setattr(sys.modules[__name__], "ROOT", tmp_path)
    module = tmp_path / "solver" / "secret.py"
    module.parent.mkdir()
    module.write_text("def late():\n    import mkdocs\n    from bandbook import pages\n", encoding="utf-8")
    rules = {"solver": ({"model"}, {"numpy"})}
    assert problems_of(module, rules) == [
        "solver/secret.py: solver may not import mkdocs",
        "solver/secret.py: solver may not import pages",
    ]


def closure(rules: dict[str, tuple[set[str], set[str]]], part: str) -> set[str]:
    """Return every part that a part reaches, itself included."""
    reached, ahead = set(), {part}
    while ahead:
        here = ahead.pop()
        reached.add(here)
        ahead |= rules[here][0] - reached
    return reached


def test_publishing_cannot_reach_physics() -> None:
    rules = table()
    physics = {"model", "systems", "lattices", "solver", "analyses", "registry", "cells"}
    for part in ("cases", "notebooks", "store", "records", "pages"):
        assert not closure(rules, part) & physics, part


def test_the_code_digest_covers_the_closure_of_cells() -> None:
    from bandbook.store import keys

    assert set(keys.KERNEL_PARTS) == closure(table(), "cells")
