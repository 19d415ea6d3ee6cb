"""Sketches: sites where they belong, and what cutting, finishing and changing did, counted in the picture."""

import math
import re
from collections.abc import Callable
from typing import Any
from xml.etree import ElementTree as ET

import numpy as np
import pytest

from bandbook import lattices
from bandbook.analyses.sketches import layout_of, sketch_system
from bandbook.analyses.sketches.layout import path_order, ring_order
from bandbook.analyses.sketches.strokes import away_from
from bandbook.exhibits import Answer, Figure
from bandbook.model import Coupling, Model, Site

Ask = Callable[..., Answer]
SVG = "{http://www.w3.org/2000/svg}"
BENZENE = lattices.ring(beta=-2.5, sites=6)
ALTERNATING = lattices.alternating_chain(beta_inside=-2.85, beta_between=-2.15, period=2.46)
EVERY = [
    lattices.chain(beta=-2.5), BENZENE, ALTERNATING, lattices.polyacene(beta=-2.5), lattices.honeycomb(beta=-2.7),
    lattices.armchair_ribbon(beta=-2.7, lines=7), lattices.zigzag_ribbon(beta=-2.7, lines=4), lattices.square(beta=-1.0),
    Model((Site("A"),), ()), Model((Site("A"), Site("B")), ()),
    Model((Site("A"), Site("B"), Site("C"), Site("D")), tuple(Coupling(0, end, -1.0) for end in (1, 2, 3))),
    Model((Site("A"),), tuple(Coupling(0, 0, -1.0, cell) for cell in ((1, 0, 0), (0, 1, 0), (0, 0, 1))), dimension=3),
]  # fmt: skip


def figure(answer: Answer, name: str) -> Figure:
    return next(one for one in answer.figures if one.name == name)


def texts(picture: Figure) -> list[str]:
    return [text.text or "" for text in ET.fromstring(picture.svg).iter(f"{SVG}text")]  # noqa: S314 - our own figure


def marks(picture: Figure, colour: str) -> int:
    """Return how many marks of one face colour are drawn, that of the key among them where it has a name."""
    return sum(f"fill: var(--bb-{colour}," in look for look in looks(picture))


def looks(picture: Figure) -> list[str]:
    """Return the style of each mark, that of its group where it has none of its own."""
    root = ET.fromstring(picture.svg)  # noqa: S314 - our own figure
    found = [
        use.get("style", group.get("style", "")) for group in root.iter(f"{SVG}g") for use in group.findall(f"{SVG}use")
    ]
    assert len(found) == len(list(root.iter(f"{SVG}use")))
    return found


@pytest.mark.parametrize("model", EVERY)
def test_sites_do_not_coincide_and_bonds_have_a_length(model: Model) -> None:
    layout = layout_of(model)
    assert layout.home.shape == (model.n_sites, 2)
    assert layout.vectors.shape == (model.dimension, 2)
    assert np.isfinite(layout.home).all()
    distances = np.hypot(*(layout.home[:, None] - layout.home[None]).transpose(2, 0, 1))
    assert np.all(distances[~np.eye(model.n_sites, dtype=bool)] > 0.3)
    assert all(np.hypot(*vector) > 0.5 for vector in layout.vectors)


def test_a_measured_geometry_is_kept() -> None:
    """Honeycomb: three bonds of one length at 120°, vectors √3 bonds long at 60°."""
    layout = layout_of(lattices.honeycomb(beta=-2.7, bond_length=1.42))
    assert np.hypot(*layout.vectors.T) == pytest.approx([math.sqrt(3)] * 2, abs=1e-3)
    assert layout.vectors[0] @ layout.vectors[1] == pytest.approx(1.5, abs=1e-3)
    assert np.hypot(*(layout.home[1] - layout.home[0])) == pytest.approx(1.0, abs=1e-3)


def test_a_ring_is_a_circle_and_a_path_a_line() -> None:
    places = layout_of(BENZENE).home
    radius = np.hypot(*(places - places.mean(axis=0)).T)
    assert radius == pytest.approx([1.0] * 6, abs=1e-3)
    assert ring_order(4, [(0, 1), (1, 2), (2, 3)]) is None
    assert ring_order(6, [(0, 1), (1, 2), (2, 0), (3, 4), (4, 5), (5, 3)]) is None, "two rings"
    assert path_order(4, [(0, 1), (1, 2), (2, 0)]) is None


def test_a_name_stands_where_there_is_room() -> None:
    places = np.array([[0.0, 0.0], [1.0, 0.0], [0.0, 1.0], [-1.0, 0.0]])
    away = away_from(places, [(0, 1), (0, 2), (0, 3)], [])
    assert away[0] == pytest.approx([0.0, -1.0], abs=1e-9)


@pytest.mark.parametrize("model", EVERY)
def test_every_system_is_sketched_the_same_way_twice(model: Model) -> None:
    one, two = sketch_system("system", model), sketch_system("system", model)
    assert one is not None
    assert one == two
    assert re.search(r"\d", one.alt)
    names = [site.name for site in model.sites]
    assert [text for text in texts(one) if text in names] == names
    assert len(one.svg) < 20_000


def test_what_is_too_large_to_be_seen_has_no_sketch() -> None:
    assert sketch_system("system", lattices.ring(beta=-1.0, sites=500)) is None


def test_a_sketch_names_its_bonds_and_kinds_of_site() -> None:
    picture = sketch_system(
        "two", lattices.diatomic_chain(beta_inside=-2.85, beta_between=-2.15, alpha_a=0.5, alpha_b=-0.5)
    )
    assert picture is not None
    assert picture.caption.startswith(
        "Crystal in one dimension of 2 sites a cell (A, B), 2 bonds a cell with β = −2.85, −2.15 eV."
    )
    found = texts(picture)
    assert [text for text in found if "eV" in text] == ["β = −2.85 eV", "β = −2.15 eV", "α = −0.50 eV", "α = 0.50 eV"]


def test_many_kinds_of_bond_are_one_line_of_the_key() -> None:
    sites = tuple(Site(f"C{number}") for number in range(1, 13))
    bonds = tuple(Coupling(number, number + 1, -2.0 - number / 10) for number in range(11))
    picture = sketch_system("system", Model(sites, bonds))
    assert picture is not None
    assert [text for text in texts(picture) if "eV" in text] == ["β = −3.00 to −2.00 eV"]


def changes(*rows: dict[str, Any]) -> list[dict[str, Any]]:
    return list(rows)


def test_what_was_done_to_a_piece_is_marked(ask: Ask) -> None:
    answer = ask(
        ALTERNATING, "levels", cells=8, add=["A"], drop=["A"],
        changes=changes({"cell": 3, "site": "A", "alpha": 0.5}, {"cell": 5, "from": "B", "to": "A", "beta": -1.0},
                        {"cell": 6, "site": "B", "remove": True}),
    )  # fmt: skip
    picture = figure(answer, "sketch")
    assert picture.caption == (
        "8 cells with open ends, 15 sites: 1 site added to close the far end, 2 sites left out, 1 site changed, 1 bond changed."
    )
    assert set(texts(picture)) == {
        "β = −2.85 eV",
        "β = −2.15 eV",
        "changed bond",
        "changed site",
        "added site",
        "left out",
    }
    assert marks(picture, "series-3") == 1 + 1
    assert marks(picture, "series-1") == 15 - 2, "all but the added and the changed site"


def test_a_long_piece_shows_its_ends_and_what_was_changed(ask: Ask) -> None:
    answer = ask(ALTERNATING, "levels", cells=300, changes=changes({"cell": 150, "site": "B", "alpha": 1.0}))
    picture = figure(answer, "sketch")
    assert "what lies between is left out" in picture.caption
    assert texts(picture).count("⋯") == 2
    assert marks(picture, "series-2") == 1 + 1
    assert 20 <= marks(picture, "series-1") <= 40


def test_one_coordinated_sites_of_a_ribbon_are_marked(ask: Ask) -> None:
    answer = ask(lattices.zigzag_ribbon(beta=-2.7, lines=4), "levels", cells=6)
    assert "2 sites with one bond only" in figure(answer, "sketch").caption
    assert marks(figure(answer, "sketch"), "series-4") == 2 + 1


def test_lobes_have_the_signs_of_the_closed_form(ask: Ask) -> None:
    """c_j ∝ sin(jπn/(N + 1)): filled where positive, hatched where negative, none at a node. Source: coulson1938."""
    n = 5
    picture = figure(ask(lattices.chain(beta=-2.5), "levels", cells=n), "orbitals")
    signs = np.sign(
        np.round([[math.sin(j * math.pi * level / (n + 1)) for j in range(1, n + 1)] for level in range(1, n + 1)], 9)
    )
    signs *= np.array([row[np.argmax(np.abs(row) > 0)] for row in signs])[:, None]
    n_negative = int(np.sum(signs < 0))
    assert marks(picture, "series-1") == int(np.sum(signs > 0)) + 1, "one more in the key"
    hatched = sum("stroke: var(--bb-series-2," in look for look in looks(picture))
    assert hatched == 2 * n_negative + 1, "a ring and its hatching, one more in the key"
    assert "standing wave sin(kx)" in picture.caption
    assert [text.split(":")[0] for text in texts(picture) if "k =" in text] == ["1", "2", "3", "4", "5"]


def test_degenerate_orbitals_are_said_to_be_a_choice(ask: Ask) -> None:
    picture = figure(ask(BENZENE, "levels"), "orbitals")
    assert "Degenerate orbitals are one choice of many" in picture.caption
    assert "wave" not in picture.caption


def test_large_pieces_have_no_orbitals(ask: Ask) -> None:
    assert [one.name for one in ask(lattices.chain(beta=-2.5), "levels", cells=25).figures] == [
        "sketch",
        "diagram",
        "on-bands",
    ]
