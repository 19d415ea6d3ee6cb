"""Where templates lie and how they are filled: everything is escaped unless a section says it is HTML."""

from collections.abc import Mapping
from functools import lru_cache
from pathlib import Path
from typing import Any

import bandbook
from bandbook.errors import AuthorError, Problem
from bandbook.exhibits import KINDS, typeset
from bandbook.pages.numbers import as_written, unit


def package_templates() -> Path:
    """Return the package's own templates: in a checkout beside the package, in a wheel inside it."""
    package = Path(bandbook.__file__).resolve().parent
    inside = package / "_site"
    return inside if inside.is_dir() else package.parent / "site_templates"


@lru_cache(maxsize=4)
def _environment(override: Path | None) -> Any:
    from jinja2 import Environment, FileSystemLoader, StrictUndefined

    folders = [*([override] if override else []), package_templates()]
    environment = Environment(
        loader=FileSystemLoader([str(folder) for folder in folders]),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    environment.filters |= {"typeset": _typeset, "unit": unit, "written": as_written}
    return environment


def _typeset(row: Mapping[str, Any], key: str = "value") -> str:
    """Return a quantity's number as pages show it."""
    return typeset(row[key], KINDS[row["kind"]].shown, row.get("uncertainty"))


def render(name: str, facts: Mapping[str, Any], *, override: Path | None = None) -> str:
    """Return a template filled with facts.

    Raises:
        AuthorError: The book's own template of this name is wrong.
    """
    from jinja2 import TemplateError

    try:
        return str(_environment(override).get_template(name).render(**facts)).strip()
    except TemplateError as error:
        line = getattr(error, "lineno", None) or 1
        found = f"the template cannot be filled: {error.message or type(error).__name__}"
        allowed = "a template of the book takes the same facts as the package's own"
        problem = Problem(found, allowed, "compare it with that, or remove it")
        raise AuthorError([problem.at(f"site_templates/{name}", line)]) from error
