"""Fixtures that several tests share."""

from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import HealthCheck, settings

# How long an example takes says something of the machine, nothing of the code.
settings.register_profile("untimed", deadline=None, suppress_health_check=[HealthCheck.too_slow])
settings.load_profile("untimed")

SETTINGS = """site_name: Test book
docs_dir: content
use_directory_urls: false
theme:
  name: material
  font: false
plugins:
  - search
  - bandbook
"""
SET = """title = "a set"
note = "made up"
[values]
beta = { value = -2.5, u = 0.1, unit = "eV", meaning = "resonance integral" }
unused = 1.0
"""
CASE = """---
title: A chain
---

Words before.

```toml system
lattice = "chain"
beta = "@set.beta"
```

```toml study
question = "levels"
cells = 4
```

```toml reference
"levels.homo" = { value = 0.618034, within = 1e-6, unit = "beta", note = "closed form" }
```
"""


@pytest.fixture
def make_book(tmp_path: Path) -> Callable[..., Path]:
    """Return what writes a small book: ``make_book({"a": text})`` → its folder."""

    def make(cases: dict[str, str] | None = None, folder: str = "book") -> Path:
        root = tmp_path / folder
        files = {
            "mkdocs.yml": SETTINGS,
            "content/index.md": "# Test book\n",
            "content/parameters/set.toml": SET,
            "content/sources.bib": "@book{known1961, author={A. Author}, title={A book}, year={1961}}\n",
        }
        files |= {f"content/cases/{name}.md": text for name, text in (cases or {"a": CASE}).items()}
        for name, text in files.items():
            (root / name).parent.mkdir(parents=True, exist_ok=True)
            (root / name).write_text(text, encoding="utf-8")
        return root

    return make


@pytest.fixture
def case_text() -> str:
    """Return the text of a good case."""
    return CASE
