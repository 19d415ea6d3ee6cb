"""What a form of system is, and the keys that every form shares."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

from bandbook.errors import AuthorError, PhysicsError, Problem
from bandbook.model import Model
from bandbook.parameters import Field

Checked = Mapping[str, Any]
Builders = Mapping[str, Callable[..., Any]]

#: Keys of every form besides its own.
COMMON = (
    Field("name", "name", "name of the system, needed when a case has several", default=None),
    Field("electrons", "integer", "electrons per cell (default: what the sites bring)", default=None, least=0),
    Field("charge", "integer", "charge of the cell or molecule", default=0),
    Field(
        "beta_unit",
        "number",
        "resonance integral that energies are also reported in (default: the lattice's beta)",
        unit="eV",
        default=None,
        least=-1e6,
        most=1e6,
        nonzero=True,
    ),
)


@dataclass(frozen=True)
class Form:
    """One way to write a system down.

    Attributes:
        name: Its name in the checked parameters.
        key: The key that tells the form.
        meaning: One line without a full stop.
        fields: The fields of a given table, the common ones included.
        inspect: What the fields cannot see: returns further problems. It is asked even where the fields found
            problems; values that they found wrong are ``None``.
        build: Checked parameters and the author's functions → Model.
    """

    name: str
    key: str
    meaning: str
    fields: Callable[[Mapping[str, Any]], tuple[Field, ...]]
    inspect: Callable[[Checked], list[Problem]]
    build: Callable[[Checked, Builders], Model]


def with_common(model: Model, checked: Checked) -> Model:
    """Return the model with the electrons, charge and β unit that the author gave.

    Raises:
        AuthorError: The electrons do not fit on the sites.
    """
    problems = electron_problems(checked, n_sites=model.n_sites, own=model.n_electrons)
    if problems:
        raise AuthorError(problems)
    given, unit = checked["electrons"], checked["beta_unit"]
    electrons = (model.n_electrons if given is None else given) - checked["charge"]
    return replace(model, electrons=float(electrons), beta_unit=model.beta_unit if unit is None else unit)


def electron_problems(checked: Checked, *, n_sites: int, own: float) -> list[Problem]:
    """Return a problem where the electrons do not fit on the sites.

    Args:
        checked: A system with its ``electrons`` and ``charge``.
        n_sites: Sites of the cell.
        own: Electrons that the sites bring.
    """
    given, charge = checked["electrons"], checked["charge"]
    electrons = (own if given is None else given) - (charge or 0)
    if 0 <= electrons <= 2 * n_sites:
        return []
    sites = "1 site" if n_sites == 1 else f"{n_sites} sites"
    found = f"{electrons:g} electrons on {sites}" + (f", with the charge {charge}" if charge else "")
    key = "electrons" if given is not None else "charge"
    return [Problem(found, f"0 to {2 * n_sites} fit", "correct electrons or charge", (key,))]


def is_complete(fields: Sequence[Field], checked: Checked) -> bool:
    """Return whether no field that needs a value lacks one: nothing that must be there was missing or wrong."""
    return all(checked[field.name] is not None for field in fields if field.default is not None)


def problems_of(checked: Checked, build: Callable[[Checked, Builders], Model]) -> list[Problem]:
    """Return what building the model finds wrong, as problems."""
    try:
        build(checked, {})
    except AuthorError as error:
        return list(error.problems)
    except PhysicsError as error:
        found, allowed, remedy = (*str(error).split("; ", 2), "see the manual", "correct it")[:3]
        return [Problem(found, allowed, remedy)]
    return []
