"""What is solved: sites, couplings and lattice vectors; checks its own invariants, computes nothing.

Energies in eV, lengths in Å. ``beta`` is the signed resonance integral H_ij (negative = bonding), ``alpha`` the Coulomb
integral. ``H(k) = Σ_R H(R) e^{ik·R}``: a coupling from ``start`` in the home cell to ``end`` in the cell ``cell`` adds
``beta e^{ik·cell}`` at ``(start, end)``; its Hermitian partner is understood and never listed.
"""

import math
import operator
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Any, Final

from bandbook.errors import PhysicsError

Vector = tuple[float, float, float]

#: Names of sites: they stand in names of quantities.
_NAME: Final = re.compile(r"[A-Za-z][A-Za-z0-9_]*\Z")
#: Vectors span no cell where the squared volume of their directions is below this; rounding alone gives 1e-16.
_FLAT: Final = 1e-12


@dataclass(frozen=True)
class Site:
    """One orbital of the cell.

    Attributes:
        name: Unique in its model, ``[A-Za-z][A-Za-z0-9_]*``.
        alpha: Coulomb integral, eV.
        at: Position, Å; ``None`` where the form has no geometry.
        electrons: Electrons that the site brings, 0 to 2.
    """

    name: str
    alpha: float = 0.0
    at: Vector | None = None
    electrons: float = 1.0

    def __post_init__(self) -> None:
        if self.at is not None:
            object.__setattr__(self, "at", _tuple(self.at, f"the position of site {self.name!r}"))


@dataclass(frozen=True)
class Coupling:
    """A resonance integral between two sites; its Hermitian partner is understood.

    Attributes:
        start: Index of the site in the home cell.
        end: Index of the site in the cell ``cell``.
        beta: Signed resonance integral, eV.
        cell: Lattice translation in units of the lattice vectors, one integer each; ``()`` for a molecule.
        overlap: Overlap integral of the two orbitals.
    """

    start: int
    end: int
    beta: float
    cell: tuple[int, ...] = ()
    overlap: float = 0.0

    def __post_init__(self) -> None:
        try:
            start, end, *cell = (operator.index(number) for number in (self.start, self.end, *self.cell))
        except TypeError as error:
            found = f"the coupling {self.start}→{self.end} {self.cell}"
            raise PhysicsError(f"{found} is not made of whole numbers; indices and cell are; correct it") from error
        object.__setattr__(self, "start", start)
        object.__setattr__(self, "end", end)
        object.__setattr__(self, "cell", tuple(cell))


@dataclass(frozen=True)
class Model:
    """A finite molecule (dimension 0) or a crystal (dimension 1 to 3).

    Attributes:
        sites: The sites of the cell, in the order of the rows of every matrix.
        couplings: Each bond once.
        dimension: Number of independent lattice translations, 0 to 3.
        vectors: The lattice vectors, Å; ``None`` where the repeat is unknown (k is then in π/a only, masses are null).
        electrons: Electrons of the cell, or of the molecule; the sum over the sites where none are given.
        beta_unit: The β that energies are also reported in, eV, or ``None``.
        alpha_unit: The α from which x = (E − α)/β counts, eV.
        points: Named points of the zone, π/a along each vector; ``()`` for the usual ones.

    >>> Model((Site("A"), Site("B")), (Coupling(0, 1, -2.5),)).n_electrons
    2.0
    """

    sites: tuple[Site, ...]
    couplings: tuple[Coupling, ...]
    dimension: int = 0
    vectors: tuple[Vector, ...] | None = None
    electrons: float | None = None
    beta_unit: float | None = None
    alpha_unit: float = 0.0
    points: tuple[tuple[str, tuple[float, ...]], ...] = ()

    def __post_init__(self) -> None:
        object.__setattr__(self, "sites", tuple(self.sites))
        object.__setattr__(self, "couplings", tuple(self.couplings))
        object.__setattr__(self, "points", tuple((name, tuple(k)) for name, k in self.points))
        if self.vectors is not None:
            object.__setattr__(self, "vectors", tuple(_tuple(vector, "a lattice vector") for vector in self.vectors))
        check_model(self)
        if self.electrons is None:
            object.__setattr__(self, "electrons", math.fsum(site.electrons for site in self.sites))

    @property
    def n_sites(self) -> int:
        """Number of sites of the cell."""
        return len(self.sites)

    @property
    def has_overlap(self) -> bool:
        """Whether any bond carries an overlap."""
        return any(coupling.overlap for coupling in self.couplings)

    @property
    def n_electrons(self) -> float:
        """Electrons of the cell, or of the molecule."""
        return math.fsum(site.electrons for site in self.sites) if self.electrons is None else float(self.electrons)


def check_model(model: Model) -> Model:
    """Return the model, or raise.

    Raises:
        PhysicsError: A name twice or not allowed, an index or cell out of range, a bond named twice, a number that is
            not finite, electrons out of range, or lattice vectors that span no cell.
    """
    if not model.sites:
        raise PhysicsError("the model has no sites; at least one is needed; add a site")
    if model.dimension not in (0, 1, 2, 3):
        raise PhysicsError(f"the model has dimension {model.dimension}; 0 to 3 is allowed; check the lattice vectors")
    _check_sites(model)
    _check_couplings(model)
    _check_vectors(model)
    _check_units(model)
    electrons = model.electrons
    if electrons is not None and not (is_finite(electrons) and 0 <= electrons <= 2 * model.n_sites):
        most = 2 * model.n_sites
        raise PhysicsError(
            f"{electrons} electrons; 0 to {most} fit on {model.n_sites} sites; correct electrons or charge"
        )
    return model


def _check_sites(model: Model) -> None:
    seen: set[str] = set()
    for site in model.sites:
        if not (isinstance(site.name, str) and _NAME.match(site.name)):
            raise PhysicsError(
                f"a site is named {site.name!r}; letters, digits and _ are allowed, a letter first; rename it"
            )
        if site.name in seen:
            raise PhysicsError(f"site {site.name!r} is named twice; every name stands once; rename one")
        seen.add(site.name)
        if not is_finite(site.alpha):
            raise PhysicsError(f"alpha of site {site.name!r} is {site.alpha}; a finite number is allowed; correct it")
        if not (is_finite(site.electrons) and 0 <= site.electrons <= 2):
            raise PhysicsError(f"site {site.name!r} brings {site.electrons} electrons; 0 to 2 are allowed; correct it")


def _check_couplings(model: Model) -> None:
    seen: set[tuple[int, int, tuple[int, ...]]] = set()
    names = [site.name for site in model.sites]
    for coupling in model.couplings:
        start, end, cell = coupling.start, coupling.end, coupling.cell
        if not (0 <= start < len(names) and 0 <= end < len(names)) or len(cell) != model.dimension:
            raise PhysicsError(
                f"coupling {start}→{end} {cell} lies outside the model; sites 0 to {len(names) - 1} and "
                f"{model.dimension} numbers of a cell are there; correct it"
            )
        if not (is_finite(coupling.beta) and is_finite(coupling.overlap)):
            raise PhysicsError(
                f"coupling {names[start]}–{names[end]} is not finite; a finite β and overlap are allowed; correct it"
            )
        back = (end, start, tuple(-step for step in cell))
        if start == end and not any(cell):
            raise PhysicsError(
                f"site {names[start]!r} is bonded to itself; use alpha for its own energy; remove the coupling"
            )
        if (start, end, cell) in seen or back in seen:
            raise PhysicsError(
                f"bond {names[start]}–{names[end]} {list(cell)} is named twice; once is allowed; remove one"
            )
        seen.add((start, end, cell))


def _check_vectors(model: Model) -> None:
    if model.vectors is None:
        return
    if len(model.vectors) != model.dimension:
        raise PhysicsError(
            f"{len(model.vectors)} lattice vectors in dimension {model.dimension}; one each; correct them"
        )
    if not spans_cell(model.vectors):
        raise PhysicsError("the lattice vectors span no cell; independent vectors are needed; correct them")


def _check_units(model: Model) -> None:
    if not is_finite(model.alpha_unit) or (model.beta_unit is not None and not is_finite(model.beta_unit)):
        raise PhysicsError("alpha_unit or beta_unit is not finite; finite numbers in eV are allowed; correct it")
    if model.beta_unit == 0:
        raise PhysicsError("beta_unit is 0; a resonance integral, or None, is allowed; correct it")
    for name, k in model.points:
        if len(k) != model.dimension or not all(is_finite(part) for part in k):
            raise PhysicsError(f"point {name!r} is {k}; {model.dimension} finite numbers are allowed; correct it")


def is_finite(value: Any) -> bool:
    """Return whether a value is a finite real number.

    >>> is_finite(1), is_finite(float("nan")), is_finite(1j), is_finite("1")
    (True, False, False, False)
    """
    try:
        return not isinstance(value, str) and math.isfinite(value)
    except (TypeError, OverflowError):
        return False


def spans_cell(vectors: Sequence[Vector]) -> bool:
    """Return whether lattice vectors are independent; no vectors are.

    >>> spans_cell([(2.0, 0.0, 0.0), (1.0, 1.0, 0.0)]), spans_cell([(2.0, 0.0, 0.0), (-1.0, 0.0, 0.0)])
    (True, False)
    """
    lengths = [math.hypot(*vector) for vector in vectors]
    if not all(math.isfinite(length) and length > 0 for length in lengths):
        return False
    units = [[part / length for part in vector] for vector, length in zip(vectors, lengths, strict=True)]
    return _gram(units) > _FLAT


def _gram(vectors: Sequence[Sequence[float]]) -> float:
    """Return the Gram determinant of up to three vectors: length, area or volume, squared."""
    gram = [[math.fsum(p * q for p, q in zip(one, two, strict=True)) for two in vectors] for one in vectors]
    if not gram:
        return 1.0
    if len(gram) == 1:
        return gram[0][0]
    if len(gram) == 2:
        return gram[0][0] * gram[1][1] - gram[0][1] * gram[1][0]
    (a, b, c), (d, e, f), (g, h, i) = gram
    return a * (e * i - f * h) - b * (d * i - f * g) + c * (d * h - e * g)


def _tuple(numbers: Iterable[float], what: str) -> Vector:
    """Return three numbers as a tuple."""
    found = tuple(numbers)
    if len(found) != 3 or not all(is_finite(number) for number in found):
        raise PhysicsError(f"{what} is {found}; three finite numbers in Å are allowed; correct it")
    return found
