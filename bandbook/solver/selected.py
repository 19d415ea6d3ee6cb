"""A few levels of a large piece: bisection along a chain, shift-invert with a count of levels elsewhere.

No dense matrix is made. The count of levels below an energy σ is the number of negative pivots of ``H − σS = L D Lᵀ``
(Sylvester's law of inertia); two counts prove that the levels found between two energies are all there are.
"""

from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

import numpy as np
from numpy.typing import NDArray

from bandbook.errors import PhysicsError
from bandbook.solver.canonical import tolerance
from bandbook.solver.hamiltonian import LEAST_OVERLAP
from bandbook.solver.piece import Piece

if TYPE_CHECKING:
    from scipy.sparse import csc_array, csr_array
    from scipy.sparse.linalg import SuperLU

#: Levels that are computed at most in one window.
MOST_LEVELS: Final = 400
#: Times a shift is moved when a factorisation fails at it.
TRIALS: Final = 8
#: Levels by which a window may begin or end too far out.
SLACK: Final = 8
#: Levels that are looked for at a time.
AT_A_TIME: Final = 16
#: Halvings by which the empty margins of a slice are cut off.
HALVINGS: Final = 14
#: Rounds in which the levels of a window are looked for: at least the largest degeneracy.
ROUNDS: Final = 12
#: Part of the spectrum's width by which a shift is moved then.
NUDGE: Final = 1.37e-9

#: An energy, eV, and the number of levels below it.
Count = tuple[float, int]


def has_tridiagonal(piece: Piece) -> bool:
    """Whether the piece is an unbranched open chain without overlap, so that H is tridiagonal along it."""
    return not piece.has_overlap and piece.n_sites > 1 and piece.path is not None


def chain_levels(
    piece: Piece, *, window: tuple[int, int] | None = None
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Return levels ``(state,)`` and orbitals ``(site, state)`` of an unbranched open chain: all, or first to last."""
    from scipy.linalg import eigh_tridiagonal

    alpha, beta, order = _along(piece)
    if window is None:
        energy, along = eigh_tridiagonal(alpha, beta)
    else:
        energy, along = eigh_tridiagonal(alpha, beta, select="i", select_range=(window[0], window[1] - 1))
    vectors = np.empty(along.shape)
    vectors[order] = along
    return np.asarray(energy, dtype=np.float64), vectors


def _along(piece: Piece) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.intp]]:
    chain, order = piece.chain, piece.path
    if chain is None or order is None:
        raise PhysicsError("the piece branches; an unbranched open chain is needed; use the general solver")
    return *chain, order


def window_energies(piece: Piece, *, first: int, last: int) -> NDArray[np.float64]:
    """Return the levels number ``first`` (from 0) to before ``last``, ascending, eV.

    Raises:
        PhysicsError: The levels could not be told with certainty.
    """
    if has_tridiagonal(piece):
        from scipy.linalg import eigh_tridiagonal

        alpha, beta, _ = _along(piece)
        chosen = (first, last - 1)
        energy = eigh_tridiagonal(alpha, beta, eigvals_only=True, select="i", select_range=chosen)
        return np.asarray(energy, dtype=np.float64)
    energy, _, start = window_levels(piece, first=first, last=last)
    return energy[first - start : last - start]


def window_levels(piece: Piece, *, first: int, last: int) -> tuple[NDArray[np.float64], NDArray[np.float64], int]:
    """Return at least the levels number ``first`` (from 0) to before ``last``.

    Returns:
        Energies, ascending, eV, ``(state,)``; orbitals, ``(site, state)``; how many levels lie below the first of them
        (fewer than ``first`` when a degenerate group is completed).

    Raises:
        PhysicsError: Too many levels lie that close together, the overlap matrix is not positive definite, or the
            levels found are not as many as the counts demand.
    """
    if has_tridiagonal(piece):
        return *chain_levels(piece, window=(first, last)), first
    H, S = piece.sparse
    _check_overlap(S)
    bounds = spectrum_bounds(piece)
    spectrum = Spectrum(H, S, piece.n_sites, *bounds)
    known: list[Count] = [(bounds[0], 0), (bounds[1], piece.n_sites)]
    low, high = spectrum.shift(first, known, side=-1), spectrum.shift(last, known, side=1)
    wanted = high[1] - low[1]
    if wanted > MOST_LEVELS:
        raise PhysicsError(
            f"{wanted} levels of the piece lie between {low[0]:.6g} and {high[0]:.6g} eV around the Fermi energy; at "
            f"most {MOST_LEVELS} are computed in a piece of this size; take fewer cells"
        )
    energy, vectors = _ritz(spectrum, _between(spectrum, known, low=low, high=high))
    return energy, vectors, low[1]


@dataclass(frozen=True)
class Spectrum:
    """A symmetric pair H, S and the bounds of its levels, eV."""

    H: "csr_array"
    S: "csr_array | None"
    size: int
    bottom: float
    top: float

    @property
    def near(self) -> float:
        """Distance within which levels are degenerate, eV."""
        return tolerance(self.top - self.bottom)

    def factor(self, shift: float) -> tuple["SuperLU", int, float]:
        """Return a factorisation of H − σS, the number of levels below σ, and σ (moved a little where none exists)."""
        from scipy.sparse.linalg import splu

        step = NUDGE * (self.top - self.bottom)
        for trial in range(TRIALS):
            moved = shift + step * trial
            matrix = (self.H - moved * (_unit(self.size) if self.S is None else self.S)).tocsc()
            try:
                factors = splu(
                    matrix,
                    permc_spec="MMD_AT_PLUS_A",
                    diag_pivot_thresh=0.0,
                    options={"SymmetricMode": True, "Equil": False},
                )
            except RuntimeError:
                continue
            if np.array_equal(factors.perm_r, factors.perm_c) and _is_accurate(matrix, factors):
                return factors, int(np.count_nonzero(factors.U.diagonal() < 0)), moved
        raise PhysicsError(
            f"levels below {shift:.6g} eV could not be counted; a count is the proof that the right levels were found; "
            "take fewer cells"
        )

    def shift(self, wanted: int, known: list[Count], *, side: int, slack: int = SLACK) -> Count:
        """Return an energy with about ``wanted`` levels below it, and that number.

        With ``side`` −1 it is at most ``wanted``, with +1 at least, no more than ``slack`` off unless levels coincide.
        Counts made on the way are added to ``known``, which starts with the bounds of the spectrum.
        """
        least, most = sorted((wanted, wanted + side * slack))
        halve = True
        while True:
            fitting = [pair for pair in known if least <= pair[1] <= most]
            if fitting:
                return min(fitting, key=lambda pair: abs(pair[1] - wanted))
            low, n_low = max(pair for pair in known if pair[1] < least)
            high, n_high = min(pair for pair in known if pair[1] > most)
            if high - low <= self.near:
                return (low, n_low) if side < 0 else (high, n_high)
            halve = not halve
            share = ((least + most) / 2 - n_low) / (n_high - n_low)
            _, count, middle = self.factor(low + (0.49 if halve else min(max(share, 0.02), 0.98)) * (high - low))
            known.append((middle, count))


def _unit(size: int) -> "csr_array":
    from scipy.sparse import eye_array

    return eye_array(size, format="csr")


def _is_accurate(matrix: "csc_array", factors: "SuperLU") -> bool:
    """Return whether a solution with the factors has a small residual, so that the pivots did not grow."""
    right = np.cos(np.arange(matrix.shape[0], dtype=np.float64))
    found = factors.solve(right)
    scale = float(np.abs(matrix.data).max(initial=0.0)) * float(np.abs(found).max()) + 1.0
    return bool(np.isfinite(scale)) and float(np.abs(matrix @ found - right).max()) <= 1e-8 * scale


def _between(spectrum: Spectrum, known: list[Count], *, low: Count, high: Count) -> NDArray[np.float64]:
    """Return the orbitals of all levels between two energies, few of them at a time."""
    wanted = high[1] - low[1]
    if wanted > AT_A_TIME:
        middle = spectrum.shift(low[1] + wanted // 2, known, side=1, slack=wanted // 4)
        if low[1] < middle[1] < high[1]:
            parts = (_between(spectrum, known, low=one, high=two) for one, two in ((low, middle), (middle, high)))
            return np.concatenate(list(parts), axis=1)
    return _slice(spectrum, low=low, high=high) if wanted else np.zeros((spectrum.size, 0))


def _slice(spectrum: Spectrum, *, low: Count, high: Count) -> NDArray[np.float64]:
    """Return the orbitals of the levels between two energies; the counts say how many there must be.

    A Krylov space holds one vector of each degenerate level, so what a round finds is taken out and the next looks for
    the rest, until the count is reached.
    """
    wanted = high[1] - low[1]
    factors, shift, low, high = _narrowed(spectrum, low, high)
    found = np.zeros((spectrum.size, 0))
    inside = np.zeros(0, dtype=np.bool_)
    for _ in range(ROUNDS):
        missing = wanted - int(inside.sum())
        energy, vectors = _nearest(spectrum, factors, found, shift=shift, n=missing + 4)
        found = np.column_stack([found, vectors])
        inside = np.concatenate([inside, (energy > low[0]) & (energy < high[0])])
        if inside.sum() >= wanted:
            break
    if inside.sum() != wanted:
        raise PhysicsError(
            f"{wanted} levels lie between {low[0]:.6g} and {high[0]:.6g} eV but {inside.sum()} were found; "
            "the count is the proof; take fewer cells"
        )
    return found[:, inside]


def _narrowed(spectrum: Spectrum, low: Count, high: Count) -> tuple["SuperLU", float, Count, Count]:
    """Return factors at a shift among the levels of a slice, the shift, and the slice without its empty margins.

    Levels that are packed at one end, seen from far away, are told apart slowly.
    """
    for _ in range(HALVINGS):
        # not quite the middle: in an alternant a level may lie there, and a shift on a level spoils the others
        factors, count, shift = spectrum.factor(low[0] + 0.493 * (high[0] - low[0]))
        if count == low[1]:
            low = shift, count
        elif count == high[1]:
            high = shift, count
        else:
            break
    return factors, shift, low, high


def _nearest(
    spectrum: Spectrum, factors: "SuperLU", found: NDArray[np.float64], *, shift: float, n: int
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Return levels near a shift, S-orthogonal to those found; one of each degenerate level at least."""
    from scipy.sparse.linalg import ArpackNoConvergence, LinearOperator, eigsh

    dual = found if spectrum.S is None else np.asarray(spectrum.S @ found)

    def apart(right: NDArray[np.float64]) -> NDArray[np.float64]:
        solved: NDArray[np.float64] = factors.solve(right)
        return solved - found @ (dual.T @ solved)

    size = min(n, spectrum.size - found.shape[1] - 1)
    begin = np.cos(np.arange(spectrum.size) ** 1.5 + found.shape[1]) + 0.1
    try:
        energy, vectors = eigsh(
            spectrum.H,
            k=size,
            M=spectrum.S,
            sigma=shift,
            OPinv=LinearOperator((spectrum.size,) * 2, matvec=apart, dtype=np.float64),
            v0=begin - found @ (dual.T @ begin),
            ncv=min(spectrum.size, 2 * size + 20),
        )
    except ArpackNoConvergence as stopped:
        energy, vectors = stopped.eigenvalues, stopped.eigenvectors
    return energy, vectors


def _ritz(spectrum: Spectrum, vectors: NDArray[np.float64]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Return levels and S-orthonormal orbitals of H and S within the space of the vectors, ascending."""
    from scipy.linalg import eigh

    dual = vectors if spectrum.S is None else spectrum.S @ vectors
    energy, turn = eigh(vectors.T @ (spectrum.H @ vectors), vectors.T @ dual)
    return energy, vectors @ turn


def spectrum_bounds(piece: Piece) -> tuple[float, float]:
    """Return two energies between which all levels of a piece lie, eV (Gershgorin's circles)."""
    reach = np.zeros(piece.n_sites)
    np.add.at(reach, piece.start, np.abs(piece.beta))
    np.add.at(reach, piece.end, np.abs(piece.beta))
    low, high = float((piece.alpha - reach).min()), float((piece.alpha + reach).max())
    margin = 1e-3 * (high - low) + 1e-6
    low, high = low - margin, high + margin
    if not piece.has_overlap:
        return low, high
    H, S = piece.sparse
    while Spectrum(H, S, piece.n_sites, low, high).factor(low)[1] > 0:
        low -= high - low
    while Spectrum(H, S, piece.n_sites, low, high).factor(high)[1] < piece.n_sites:
        high += high - low
    return low, high


def _check_overlap(S: "csr_array | None") -> None:
    """Raise when the overlap matrix is not positive definite."""
    if S is None:
        return
    from scipy.sparse.linalg import eigsh

    negative = Spectrum(S, None, S.shape[0], 0.0, 2.0).factor(LEAST_OVERLAP)[1]
    if negative:
        least = float(eigsh(S, k=1, which="SA", return_eigenvectors=False)[0])
        raise PhysicsError(
            f"the smallest eigenvalue of the overlap matrix of the piece is {least:.3g}; it must be positive, at least "
            f"{LEAST_OVERLAP:g}; make the overlaps smaller"
        )
