"""What every named lattice must hold: its fields are its arguments, its matrix Hermitian, its picture sensible."""

import inspect
import itertools
import re
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from bandbook import lattices, registry
from bandbook.lattices import LATTICES, Lattice
from bandbook.model import Model
from bandbook.parameters import KINDS, Field
from bandbook.solver.hamiltonian import bloch

SOURCES = Path(__file__).resolve().parents[2] / "content" / "sources.bib"
EXAMPLES: dict[str, Any] = {
    "beta": -2.5, "beta_inside": -2.85, "beta_between": -2.15, "alpha": 0.3, "alpha_a": 0.5, "alpha_b": -0.5, "period": 2.4,
    "bond_length": 1.42, "lines": 5, "sites": 7,
}  # fmt: skip
every_lattice = pytest.mark.parametrize("lattice", LATTICES, ids=lambda lattice: lattice.name)
every_field = pytest.mark.parametrize(
    ("lattice", "field"),
    [pytest.param(lattice, field, id=f"{lattice.name} {field.name}") for lattice in LATTICES for field in lattice.fields],
)  # fmt: skip


def names_of(lattice: Lattice) -> set[str]:
    return {field.name for field in lattice.fields}


def built(lattice: Lattice, **more: Any) -> Model:
    return lattice.build(**{**{name: EXAMPLES[name] for name in names_of(lattice)}, **more})


def bare(lattice: Lattice, **more: Any) -> Model:
    """Return the lattice with what must be given and nothing else."""
    return lattice.build(**{field.name: EXAMPLES[field.name] for field in lattice.fields if field.is_required}, **more)


def spectrum(model: Model, k: NDArray[np.float64]) -> NDArray[np.float64]:
    return np.asarray(np.linalg.eigvalsh(bloch(model, k)[0]))


def some_k(model: Model) -> NDArray[np.float64]:
    return np.random.default_rng(7).uniform(-1, 1, (5, model.dimension))


def test_names_are_words_and_stand_once() -> None:
    names = [lattice.name for lattice in LATTICES]
    assert len(set(names)) == len(names)
    assert all(re.fullmatch(r"[a-z][a-z-]*", name) for name in names)
    assert tuple(names) == registry.LATTICE_NAMES


@every_lattice
def test_the_builder_is_public_under_its_name(lattice: Lattice) -> None:
    name = lattice.name.replace("-", "_")
    assert getattr(lattices, name) is lattice.build
    assert name in lattices.__all__
    assert Path(inspect.getsourcefile(lattice.build) or "").stem == name, "one file a builder"


@every_lattice
def test_fields_are_arguments(lattice: Lattice) -> None:
    arguments = inspect.signature(lattice.build).parameters
    assert set(arguments) == names_of(lattice)
    assert len(lattice.fields) == len(arguments)
    assert all(argument.kind is inspect.Parameter.KEYWORD_ONLY for argument in arguments.values())
    for field in lattice.fields:
        default = arguments[field.name].default
        assert field.is_required == (default is inspect.Parameter.empty)
        assert field.is_required or field.default == default


@every_field
def test_a_field_has_unit_and_meaning(lattice: Lattice, field: Field) -> None:
    assert field.kind in KINDS
    assert field.meaning == field.meaning.strip().rstrip(".")
    assert field.meaning
    assert "\n" not in field.meaning
    assert (field.unit in {"eV", "Å"}) == (field.kind == "number")
    assert (field.unit == "eV") == field.name.startswith(("alpha", "beta"))
    text = inspect.getdoc(lattice.build) or ""
    assert re.search(rf"^    {field.name}: \S", text, flags=re.MULTILINE), "the docstring tells the argument"


@every_lattice
def test_words_for_the_manual(lattice: Lattice) -> None:
    text = inspect.getdoc(lattice.build) or ""
    assert lattice.meaning
    assert not lattice.meaning.endswith(".")
    assert not lattice.note or lattice.note.endswith((".", "]"))
    assert ">>>" in text
    source = re.search(r"^Source: (.+)\.$", text, flags=re.MULTILINE)
    assert source is not None
    known = re.findall(r"^@\w+\{([^,]+),", SOURCES.read_text(encoding="utf-8"), flags=re.MULTILINE)
    assert source[1] in known or " " in source[1], "a key of sources.bib, or words"


@every_lattice
def test_sites_are_named_as_documented(lattice: Lattice) -> None:
    """Every letter of a name, and for few sites every name, stands in what the manual says of them."""
    names = [site.name for site in built(lattice).sites]
    assert all(re.fullmatch(r"[A-Z][0-9]*", name) for name in names)
    documented = re.findall(r"\b[A-Z][0-9]*\b", lattice.sites)
    assert {name[0] for name in names} == {name[0] for name in documented}
    assert set(names) == set(documented) or set(names) > set(documented)


@every_lattice
def test_the_bloch_matrix_is_hermitian_and_the_sum_over_bonds(lattice: Lattice) -> None:
    """Judge: Σ_R H(R) e^{ik·R} written out, the partner of each bond added."""
    model = built(lattice)
    assert model.dimension == lattice.dimension
    k = some_k(model)
    found, overlap = bloch(model, k)
    assert overlap is None
    assert np.abs(found - found.conj().swapaxes(1, 2)).max() < 1e-14
    for row, point in enumerate(k):
        h = np.diag([complex(site.alpha) for site in model.sites])
        for bond in model.couplings:
            phase = np.exp(1j * np.pi * float(np.dot(point, bond.cell)))
            h[bond.start, bond.end] += bond.beta * phase
            h[bond.end, bond.start] += bond.beta * phase.conjugate()
        assert np.abs(found[row] - h).max() < 1e-12


@every_lattice
def test_alpha_shifts_every_level(lattice: Lattice) -> None:
    low, high = bare(lattice, alpha=0.0), bare(lattice, alpha=1.25)
    assert spectrum(high, some_k(high)) == pytest.approx(spectrum(low, some_k(low)) + 1.25, abs=1e-12)
    assert (low.alpha_unit, high.alpha_unit) == (0.0, 1.25)


@every_lattice
def test_energies_scale_with_beta(lattice: Lattice) -> None:
    energies = [field.name for field in lattice.fields if field.unit == "eV"]
    model, double = built(lattice), built(lattice, **{name: 2 * EXAMPLES[name] for name in energies})
    assert spectrum(double, some_k(double)) == pytest.approx(2 * spectrum(model, some_k(model)), abs=1e-12)


@every_lattice
def test_one_electron_a_site_and_the_unit_of_energy(lattice: Lattice) -> None:
    model = built(lattice)
    assert model.n_electrons == model.n_sites
    assert model.beta_unit == (-2.5 if "beta" in names_of(lattice) else None)
    assert model.alpha_unit == 0.3


@every_lattice
def test_bonds_of_the_picture_are_equally_long(lattice: Lattice) -> None:
    """All bonds of a lattice have one length, no two sites are nearer, and the sketch lies in a plane."""
    model = built(lattice)
    at = np.array([site.at for site in model.sites])
    vectors = np.array(model.vectors or np.zeros((0, 3))).reshape(-1, 3)
    steps = [at[bond.end] + np.array(bond.cell) @ vectors - at[bond.start] for bond in model.couplings]
    lengths = np.linalg.norm(steps, axis=1)
    assert lengths == pytest.approx(np.full(len(lengths), lengths[0]), abs=1e-9)
    assert not at[:, 2].any()
    around = [np.array(cell) @ vectors for cell in itertools.product((-1, 0, 1), repeat=lattice.dimension)]
    apart = np.array([np.linalg.norm(at[:, None] + shift - at[None], axis=2) for shift in around])
    assert apart[apart > 1e-9].min() > lengths[0] - 1e-9
    assert np.count_nonzero(apart < 1e-9) == model.n_sites, "no two sites in one place"
    if "period" in names_of(lattice):
        assert np.linalg.norm(vectors, axis=1) == pytest.approx(np.full(len(vectors), EXAMPLES["period"]))


@every_lattice
def test_without_a_period_there_is_no_geometry(lattice: Lattice) -> None:
    model = bare(lattice)
    has_geometry = "period" not in names_of(lattice)
    assert all((site.at is not None) == has_geometry for site in model.sites)
    if lattice.dimension:
        assert (model.vectors is not None) == has_geometry


@every_lattice
def test_an_author_gets_what_the_builder_builds(lattice: Lattice) -> None:
    for table in ({}, {"alpha": 0.5}):
        given = {field.name: EXAMPLES[field.name] for field in lattice.fields if field.is_required} | table
        checked, problems = registry.check_system({"lattice": lattice.name, **given})
        assert problems == []
        assert checked is not None
        assert registry.build_system(checked, {}) == lattice.build(**given)
    given = {name: EXAMPLES[name] for name in names_of(lattice)}
    checked, problems = registry.check_system({"lattice": lattice.name, **given})
    assert problems == []
    assert checked is not None
    assert registry.build_system(checked, {}) == built(lattice)


@every_field
def test_a_wrong_field_is_told_alone(lattice: Lattice, field: Field) -> None:
    given: dict[str, Any] = {name: EXAMPLES[name] for name in names_of(lattice)}
    for wrong in (True, "a", float("nan"), 1e300, [1]):
        checked, problems = registry.check_system({"lattice": lattice.name, **given, field.name: wrong})
        assert checked is None
        assert [problem.key for problem in problems] == [(field.name,)]
