"""What is solved: sites, couplings and lattice vectors; checks its own invariants, computes nothing.

Energies in eV, lengths in Å. ``beta`` is the signed resonance integral H_ij (negative = bonding), ``alpha`` the Coulomb
integral. ``H(k) = Σ_R H(R) e^{ik·R}``: a coupling from ``start`` in the home cell to ``end`` in the cell ``cell`` adds
``beta e^{ik·cell}`` at ``(start, end)``; its Hermitian partner is understood and never listed.
"""

import math
from dataclasses import dataclass

from bandbook.errors import PhysicsError

Vector = tuple[float, float, float]


@dataclass(frozen=True)
class Site:
    """One orbital of the cell.

    Attributes:
        name: Unique in its model, ``[A-Za-z][A-Za-z0-9_]*``.
        alpha: Coulomb integral, eV.
        at: Position, Å; ``None`` where the form has no geometry.
        electrons: Electrons that the site brings, 0, 1 or 2; fractional only where an author gives electrons per cell.
    """

    name: str
    alpha: float = 0.0
    at: Vector | None = None
    electrons: float = 1.0


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


@dataclass(frozen=True)
class Model:
    """A finite molecule (dimension 0) or a crystal (dimension 1 to 3).

    Attributes:
        sites: The sites of the cell, in the order of the rows of every matrix.
        couplings: Each bond once.
        dimension: Number of independent lattice translations, 0 to 3.
        vectors: The lattice vectors, Å; ``None`` where the repeat is unknown (k is then in π/a only, masses are null).
        electrons: Electrons of the cell, or of the molecule.
        beta_unit: The β that energies are also reported in, eV, or ``None``.
        alpha_unit: The α from which x = (E − α)/β counts, eV.
        points: Named points of the zone, π/a along each vector; ``()`` for the usual ones.
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
        if self.electrons is None:
            object.__setattr__(self, "electrons", math.fsum(site.electrons for site in self.sites))
        check_model(self)

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
        return self.electrons if self.electrons is not None else float(self.n_sites)


def check_model(model: Model) -> Model:
    """Return the model, or raise.

    Raises:
        PhysicsError: A name twice, an index or cell out of range, a bond named twice, a number that is not finite,
            electrons out of range, or lattice vectors that span no cell.
    """
    if not model.sites:
        raise PhysicsError("the model has no sites; at least one is needed; add a site")
    if not 0 <= model.dimension <= 3:
        raise PhysicsError(f"the model has dimension {model.dimension}; 0 to 3 is allowed; check the lattice vectors")
    _check_sites(model)
    _check_couplings(model)
    _check_vectors(model)
    if not 0 <= model.n_electrons <= 2 * model.n_sites:
        most = 2 * model.n_sites
        raise PhysicsError(
            f"{model.n_electrons:g} electrons; 0 to {most} fit on {model.n_sites} sites; correct electrons or charge"
        )
    return model


def _check_sites(model: Model) -> None:
    names = [site.name for site in model.sites]
    if len(set(names)) != len(names):
        twice = next(name for name in names if names.count(name) > 1)
        raise PhysicsError(f"site {twice!r} is named twice; every name stands once; rename one")
    for site in model.sites:
        if not math.isfinite(site.alpha):
            raise PhysicsError(f"alpha of site {site.name!r} is {site.alpha}; a finite number is allowed; correct it")


def _check_couplings(model: Model) -> None:
    seen: set[tuple[int, int, tuple[int, ...]]] = set()
    names = [site.name for site in model.sites]
    for coupling in model.couplings:
        start, end, cell = coupling.start, coupling.end, coupling.cell
        if not (0 <= start < len(names) and 0 <= end < len(names)) or len(cell) != model.dimension:
            raise PhysicsError(
                f"coupling {start}→{end} {cell} lies outside the model; sites 0 to {len(names) - 1}; correct it"
            )
        if not (math.isfinite(coupling.beta) and math.isfinite(coupling.overlap)):
            raise PhysicsError(
                f"coupling {names[start]}–{names[end]} is not finite; a finite β and overlap are allowed; correct it"
            )
        back = (end, start, tuple(-step for step in cell))
        if (start, end, cell) in seen or back in seen:
            raise PhysicsError(
                f"bond {names[start]}–{names[end]} {list(cell)} is named twice; once is allowed; remove one"
            )
        if start == end and not any(cell):
            raise PhysicsError(
                f"site {names[start]!r} is bonded to itself; use alpha for its own energy; remove the coupling"
            )
        seen.add((start, end, cell))


def _check_vectors(model: Model) -> None:
    if model.vectors is None:
        return
    if len(model.vectors) != model.dimension:
        raise PhysicsError(
            f"{len(model.vectors)} lattice vectors in dimension {model.dimension}; one each; correct them"
        )
    if model.vectors and _volume(model.vectors) < 1e-9:
        raise PhysicsError("the lattice vectors span no cell; independent vectors are needed; correct them")


def _volume(vectors: tuple[Vector, ...]) -> float:
    """Return the square of length, area or volume: the Gram determinant, Å to the power of twice the dimension."""
    gram = [[math.fsum(p * q for p, q in zip(one, two, strict=True)) for two in vectors] for one in vectors]
    if len(gram) == 1:
        return gram[0][0]
    if len(gram) == 2:
        return gram[0][0] * gram[1][1] - gram[0][1] * gram[1][0]
    (a, b, c), (d, e, f), (g, h, i) = gram
    return a * (e * i - f * h) - b * (d * i - f * g) + c * (d * h - e * g)
