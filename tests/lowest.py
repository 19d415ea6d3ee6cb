"""Print the lower bounds of pyproject.toml as constraints: ``python3 -m tests.lowest > lowest.txt``.

Needs only the standard library. With these constraints pip installs the oldest packages that the project allows.
"""

import re
import tomllib
from collections.abc import Iterable
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
_BOUND = re.compile(r"([A-Za-z0-9._-]+)(?:\[[^\]]*\])?[^;]*?>=\s*([0-9][0-9A-Za-z.]*)")


def constraints(requirements: Iterable[str]) -> list[str]:
    """Return ``name==lower bound`` for each requirement that has one, each name once."""
    found = (_BOUND.match(one) for one in requirements)
    return sorted({f"{match[1]}=={match[2]}" for match in found if match}, key=str.lower)


def requirements() -> list[str]:
    """Return every requirement of pyproject.toml: those of the package and of its extras."""
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    extras = project["optional-dependencies"].values()
    return [*project["dependencies"], *(one for extra in extras for one in extra)]


if __name__ == "__main__":
    print("\n".join(constraints(requirements())))
