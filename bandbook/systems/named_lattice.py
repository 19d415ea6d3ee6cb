"""A named lattice with its fields."""

from collections.abc import Mapping
from typing import Any

from bandbook.lattices import LATTICES, Lattice
from bandbook.model import Model
from bandbook.parameters import Field, Problem, one_of
from bandbook.systems.form import (
    COMMON,
    Builders,
    Checked,
    Form,
    electron_problems,
    is_complete,
    problems_of,
    with_common,
)

_LATTICE = Field("lattice", "text", "name of the lattice")


def lattice_named(name: object) -> Lattice | None:
    """Return the lattice of a name, or nothing."""
    return next((lattice for lattice in LATTICES if lattice.name == name), None)


def fields(given: Mapping[str, Any]) -> tuple[Field, ...]:
    """Return the lattice's fields and the common ones; only the common ones where the lattice is unknown."""
    lattice = lattice_named(given.get("lattice"))
    return (_LATTICE, *(lattice.fields if lattice else ()), *COMMON)


def inspect(checked: Checked) -> list[Problem]:
    """Return an unknown lattice, or what its builder refuses; a ring is not built, its fields say everything."""
    name = checked["lattice"]
    lattice = lattice_named(name)
    if lattice is None:
        known = [lattice.name for lattice in LATTICES]
        return [] if name is None else [one_of(name, known, "lattice").below("lattice")]
    if not is_complete((*lattice.fields, *COMMON), checked):
        return []
    if lattice.dimension == 0:
        return electron_problems(checked, n_sites=checked["sites"], own=checked["sites"])
    return problems_of(checked, build)


def build(checked: Checked, builders: Builders) -> Model:  # noqa: ARG001 - one signature for every form
    """Return the Model of a checked named lattice.

    Raises:
        AuthorError: The electrons do not fit on the sites.
        PhysicsError: The builder refuses the fields.
    """
    lattice = lattice_named(checked["lattice"])
    assert lattice is not None  # noqa: S101 - the check refused every other name
    arguments = {field.name: checked[field.name] for field in lattice.fields}
    return with_common(lattice.build(**arguments), checked)


NAMED_LATTICE = Form("named-lattice", "lattice", "a named lattice with its fields", fields, inspect, build)
