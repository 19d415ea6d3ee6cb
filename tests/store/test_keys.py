"""Keys cover what can change a result and nothing else; a few are pinned."""

import ast
import math
import re
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

import bandbook
from bandbook.store import canonical_json, code_digest, digest, environment, inputs_of, key_of, keys

ROOT = Path(__file__).resolve().parents[2]
PARAMETERS: dict[str, Any] = {
    "format": 1,
    "systems": {"system": {"form": "named-lattice", "lattice": "chain", "beta": -2.5, "period": None}},
    "studies": {"levels": {"question": "levels", "system": "system", "cells": 4}},
    "workings": ["report('x', 1)\n"],
    "steps": [["study", "levels"], ["workings", 0]],
    "files": {"data/x.csv": "n,gap\n1,2.5\n"},
}
COST = (
    "The spelling of a key changed. That makes every stored result of every book stale: each case runs again, once. "
    "If that is meant, say so in the change log, then pin the new value here."
)


def test_canonical_json_is_pinned() -> None:
    found = canonical_json({"b": [1.0, -0.0, 2.5, 1e300, True, None], "a": "é", "c": {"y": 0.1, "x": ()}})
    exponent = str(int(1e300))
    assert found == b'{"a":"\\u00e9","b":[1,0,2.5,%s,true,null],"c":{"x":[],"y":0.1}}' % exponent.encode(), COST


def test_a_key_is_pinned(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(keys, "code_digest", lambda: "sha256:code")
    versions = {"python": "3.11", "numpy": "2.0", "scipy": "1.13", "matplotlib": "3.9", "bandbook": "0.1.0"}
    monkeypatch.setattr(keys, "environment", lambda: versions)
    assert key_of(PARAMETERS) == "sha256:696a2a6bbeb03adb4b0251466d27dc1cb18afa313fbcd943f8d838b5bced5d7a", COST


def test_inputs_are_pinned() -> None:
    assert {name: value[:15] for name, value in inputs_of(PARAMETERS).items()} == {
        "system": "sha256:dcb6a4e1",
        "study levels": "sha256:d12ba4bb",
        "workings 1": "sha256:1b4b26a9",
        "data/x.csv": "sha256:454ee38a",
    }, "records name their inputs by these digests; two editions compare them"
    two = {**PARAMETERS, "systems": {"a": {}, "b": {}}}
    assert list(inputs_of(two))[:2] == ["system a", "system b"]


def test_equal_numbers_give_one_key() -> None:
    assert key_of({**PARAMETERS, "x": 1}) == key_of({**PARAMETERS, "x": 1.0})
    assert key_of({**PARAMETERS, "x": 0.0}) == key_of({**PARAMETERS, "x": -0.0})
    assert key_of({**PARAMETERS, "x": 10**20}) == key_of({**PARAMETERS, "x": 1e20})
    assert key_of({**PARAMETERS, "x": 1}) != key_of({**PARAMETERS, "x": 2})
    assert key_of({**PARAMETERS, "x": 1}) != key_of({**PARAMETERS, "x": True})
    assert key_of({**PARAMETERS, "x": 1}) != key_of({**PARAMETERS, "x": "1"})


@given(st.dictionaries(st.text(), st.floats(allow_nan=False, allow_infinity=False) | st.text() | st.none()))
def test_the_order_of_keys_is_no_difference(table: dict[str, Any]) -> None:
    assert canonical_json(table) == canonical_json(dict(reversed(table.items())))


@given(st.floats(allow_nan=False, allow_infinity=False), st.floats(allow_nan=False, allow_infinity=False))
def test_different_numbers_are_spelled_differently(one: float, other: float) -> None:
    assert (canonical_json(one) == canonical_json(other)) == (one == other)


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_what_is_not_finite_has_no_key(value: float) -> None:
    with pytest.raises(ValueError, match="not JSON compliant"):
        canonical_json({"x": [value]})


def test_what_is_not_plain_has_no_key() -> None:
    with pytest.raises(TypeError):
        canonical_json({"x": {1, 2}})


@pytest.mark.parametrize("place", ["systems", "studies", "workings", "steps", "files"])
def test_every_part_of_the_parameters_counts(place: str) -> None:
    assert key_of({**PARAMETERS, place: "other"}) != key_of(PARAMETERS)


@pytest.mark.parametrize("name", ["code_digest", "environment", "COMPOSE_FORMAT"])
def test_code_versions_and_format_count(name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    before = key_of(PARAMETERS)
    other = {"code_digest": lambda: "sha256:other", "environment": lambda: {"python": "4"}, "COMPOSE_FORMAT": 99}
    monkeypatch.setattr(keys, name, other[name])
    assert key_of(PARAMETERS) != before


def reached(part: str) -> set[str]:
    """Return every part that a part reaches by the imports that stand in its files, itself included."""
    found, ahead = set(), {part}
    while ahead:
        here = ahead.pop()
        found.add(here)
        single = ROOT / "bandbook" / f"{here}.py"
        paths = [single] if single.is_file() else sorted((ROOT / "bandbook" / here).rglob("*.py"))
        ahead |= {name for path in paths for name in imports(path)} - found
    return found


def imports(path: Path) -> set[str]:
    """Return the parts of the package that a file imports, late imports included."""
    found: set[str] = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom) and node.module == "bandbook":
            found |= {f"bandbook.{alias.name}" for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            found.add(node.module or "")
    names = {name.split(".")[1] for name in found if name.startswith("bandbook.")}
    return names - {"__version__"}


def allowed() -> dict[str, set[str]]:
    """Return part → parts that it may import, from the table in DEVELOPERS.md."""
    text = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    rows = re.findall(r"^\| (\w+) \| ([\w ]*?) ?\| [\w ]* ?\|$", text, flags=re.MULTILINE)
    return {part: set(inside.split()) for part, inside in rows}


def test_the_code_digest_covers_what_cells_import() -> None:
    assert set(keys.KERNEL_PARTS) == reached("cells")


def test_the_code_digest_covers_what_cells_may_import() -> None:
    table, found, ahead = allowed(), set(), {"cells"}
    while ahead:
        here = ahead.pop()
        found.add(here)
        ahead |= table[here] - found
    assert set(keys.KERNEL_PARTS) == found


def test_the_code_digest_reads_every_source_of_its_parts() -> None:
    names = {path.relative_to(ROOT / "bandbook").parts[0].removesuffix(".py") for path in keys.kernel_sources()}
    assert names == set(keys.KERNEL_PARTS)


def test_an_edit_changes_the_code_digest_line_ends_do_not(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(bandbook, "__file__", str(tmp_path / "__init__.py"))
    (tmp_path / "solver").mkdir()
    source = tmp_path / "solver" / "levels.py"
    (tmp_path / "cells.py").write_bytes(b"x = 1\n")
    seen = []
    for data in (b"a = 1\nb = 2\n", b"a = 1\r\nb = 2\r\n", b"a = 1\nb = 3\nc\n"):
        source.write_bytes(data)
        seen.append(code_digest())
    assert seen[0] == seen[1] != seen[2]
    source.rename(tmp_path / "solver" / "bands.py")
    assert code_digest() != seen[2]
    (tmp_path / "pages.py").write_bytes(b"host side")
    source.with_name("note.txt").write_bytes(b"no source")
    assert len(keys.kernel_sources()) == 2


def test_the_environment_lists_what_the_key_covers() -> None:
    found = environment()
    assert list(found) == ["python", "numpy", "scipy", "matplotlib", "bandbook"]
    assert found["bandbook"] == bandbook.__version__
    assert found["python"] == f"{sys.version_info.major}.{sys.version_info.minor}"


def test_a_key_needs_nothing_heavy() -> None:
    code = (
        "import sys\nfrom bandbook.store import key_of\n"
        "key_of({'format': 1})\n"
        "print(sorted({'numpy', 'scipy', 'matplotlib', 'IPython', 'nbformat'} & set(sys.modules)))"
    )
    done = subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


def test_a_digest_says_how_it_was_made() -> None:
    # FIPS 180-2, appendix B.1: SHA-256 of "abc"
    assert digest(b"abc") == "sha256:ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
