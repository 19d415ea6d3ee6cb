"""Crystals and polymers that have no named lattice yet, written out as an author would; t = 1, β = −1 eV."""

from collections.abc import Mapping, Sequence
from itertools import product
from typing import Any

from bandbook import registry
from bandbook.model import Model

Bond = tuple[str, str, float, list[int]]


def written_out(
    vectors: Sequence[Sequence[float]], bonds: Sequence[Bond], *, alpha: Mapping[str, float] | None = None, **more: Any
) -> Model:
    """Return a system that goes through the front door: checked, then built."""
    names = list(dict.fromkeys(name for one, two, _, _ in bonds for name in (one, two)))
    given = {
        "vectors": [list(vector) for vector in vectors],
        "sites": [{"name": name, "alpha": (alpha or {}).get(name, 0.0)} for name in names],
        "couplings": [{"from": one, "to": two, "beta": beta, "cell": cell} for one, two, beta, cell in bonds],
        **more,
    }
    checked, problems = registry.check_system(given)
    assert problems == []
    assert checked is not None
    return registry.build_system(checked, {})


def simple(vectors: Sequence[Sequence[float]], cells: Sequence[Sequence[int]]) -> Model:
    """Return one site a cell, bonded to its images in some cells and their opposites."""
    return written_out(vectors, [("A", "A", -1.0, list(cell)) for cell in cells])


HALF = 3**0.5 / 2
TRIANGULAR = simple([[1, 0, 0], [0.5, HALF, 0]], [[1, 0], [0, 1], [1, -1]])
SIMPLE_CUBIC = simple([[1, 0, 0], [0, 1, 0], [0, 0, 1]], [[1, 0, 0], [0, 1, 0], [0, 0, 1]])
BCC = simple([[-1, 1, 1], [1, -1, 1], [1, 1, -1]], [[1, 0, 0], [0, 1, 0], [0, 0, 1], [1, 1, 1]])
FCC = simple([[0, 1, 1], [1, 0, 1], [1, 1, 0]], [[1, 0, 0], [0, 1, 0], [0, 0, 1], [1, -1, 0], [1, 0, -1], [0, 1, -1]])
DIAMOND = written_out(
    [[0, 1, 1], [1, 0, 1], [1, 1, 0]],
    [("A", "B", -1.0, [-part for part in cell]) for cell in ([0, 0, 0], [1, 0, 0], [0, 1, 0], [0, 0, 1])],
)
KAGOME = written_out(
    [[1, 0, 0], [0.5, HALF, 0]],
    [
        ("A", "B", -1.0, [0, 0]), ("A", "C", -1.0, [0, 0]), ("B", "C", -1.0, [0, 0]),
        ("B", "A", -1.0, [1, 0]), ("C", "A", -1.0, [0, 1]), ("C", "B", -1.0, [-1, 1]),
    ],
)  # fmt: skip
LIEB = written_out(
    [[1, 0, 0], [0, 1, 0]],
    [("A", "B", -1.0, [0, 0]), ("A", "C", -1.0, [0, 0]), ("B", "A", -1.0, [1, 0]), ("C", "A", -1.0, [0, 1])],
)


def ring_unit(names: str, heads: tuple[str, str], *, k: Mapping[str, float] | None = None) -> list[Bond]:
    """Return the bonds of a ring in the home cell, and the link from its last head to the next unit's first.

    Args:
        names: One letter an atom, around the ring.
        heads: The atoms that the link joins: the one in the home cell, the one in the next.
        k: Pair of letters → k, where it is not 1.
    """
    around = zip(names, names[1:] + names[0], strict=True)
    bonds = [(one, two, -(k or {}).get(one + two, 1.0), [0]) for one, two in around]
    return [*bonds, (heads[0], heads[1], -1.0, [1])]


#: Poly(p-phenylene) of uniform β.
PHENYLENE = written_out([[4.3, 0, 0]], ring_unit("ABCDEF", ("D", "A")))
#: Polythiophene, Van-Catledge's sulfur (h = 1.11, k = 0.69, two electrons), uniform C–C.
THIOPHENE = written_out(
    [[3.9, 0, 0]], ring_unit("SABCD", ("D", "A"), k={"SA": 0.69, "DS": 0.69}), alpha={"S": -1.11}, electrons=6
)


def corners(model: Model) -> list[tuple[float, ...]]:
    """Return the places of the zone where k = −k, π/a."""
    return list(product((0.0, 1.0), repeat=model.dimension))
