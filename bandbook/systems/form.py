"""What a form of system is, and the keys that every form shares."""

from collections.abc import Callable, Mapping
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
    Field("beta_unit", "number", "resonance integral that energies are also reported in", "eV", None, nonzero=True),
)


@dataclass(frozen=True)
class Form:
    """One way to write a system down.

    Attributes:
        name: Its name in the checked parameters.
        key: The key that tells the form.
        meaning: One line without a full stop.
        fields: The fields of a given table, the common ones included.
        inspect: What the fields cannot see: returns further problems.
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
    given = checked.get("electrons")
    electrons = (model.n_electrons if given is None else float(given)) - (checked.get("charge") or 0)
    if not 0 <= electrons <= 2 * model.n_sites:
        found = f"{electrons:g} electrons on {model.n_sites} sites"
        raise AuthorError([Problem(found, f"0 to {2 * model.n_sites} fit", "correct electrons or charge")])
    sites = (
        model.sites if given is None else tuple(replace(site, electrons=_share(model, given)) for site in model.sites)
    )
    unit = checked.get("beta_unit")
    return replace(model, sites=sites, electrons=electrons, beta_unit=model.beta_unit if unit is None else float(unit))


def _share(model: Model, electrons: float) -> float:
    return float(electrons) / model.n_sites


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
