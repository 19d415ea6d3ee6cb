"""Groups 1 and 2: open chains of carbon atoms and rings of them, β = −1 eV."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from bandbook import lattices
from bandbook.solver import cut_piece, solve_levels
from tests.reference.molecules import chain, electrons_of, energy_of, levels, model, piece, ring, x_of
from tests.reference.rows import CLOSED, DIGITS, EXACT, MEMORY, PRINT, Row, each

STREITWIESER = "Streitwieser 1961"
COMPUTED = "computed for the list"
SQRT2, SQRT3, SQRT5 = math.sqrt(2), math.sqrt(3), math.sqrt(5)


def polymethine_gaps() -> list[float]:
    """Return HOMO–LUMO of odd chains with an electron more than atoms."""
    return [levels(chain(n), charge=-1).gap or 0.0 for n in (3, 5, 7, 9)]


CHAINS = (
    Row("1.01 ethylene x", lambda: x_of("ethylene"), [1, -1], EXACT, STREITWIESER, CLOSED),
    Row("1.01 ethylene Eπ", lambda: energy_of("ethylene"), 2, EXACT, STREITWIESER, CLOSED),
    Row("1.02 allyl x", lambda: x_of("allyl"), [SQRT2, 0, -SQRT2], EXACT, STREITWIESER, CLOSED),
    Row("1.02 allyl Eπ", lambda: [energy_of("allyl", q) for q in (1, 0, -1)], [2.8284] * 3, DIGITS[4], STREITWIESER, MEMORY),
    Row("1.03 allyl DE", lambda: energy_of("allyl") - 2, 2 * SQRT2 - 2, EXACT, STREITWIESER, CLOSED),
    Row("1.04 allyl cation q", lambda: electrons_of("allyl", 1), [0.5, 1, 0.5], EXACT, STREITWIESER, MEMORY),
    Row("1.04 allyl anion q", lambda: electrons_of("allyl", -1), [1.5, 1, 1.5], EXACT, STREITWIESER, MEMORY),
    Row("1.06 butadiene x", lambda: x_of("butadiene"), [1.618, 0.618, -0.618, -1.618], DIGITS[3], "lecture notes on Hückel theory", PRINT),
    Row("1.06 butadiene x exact", lambda: x_of("butadiene")[:2], [(SQRT5 + 1) / 2, (SQRT5 - 1) / 2], EXACT, "the same", CLOSED),
    Row("1.07 butadiene coefficients", lambda: np.sort(np.abs(levels("butadiene").vectors), axis=0)[[0, 2]], [[0.372] * 4, [0.602] * 4], DIGITS[3], "lecture notes on Hückel theory", PRINT),
    Row("1.09 butadiene Eπ", lambda: energy_of("butadiene"), 2 * SQRT5, EXACT, STREITWIESER, CLOSED),
    Row("1.09 butadiene Eπ, DE", lambda: [energy_of("butadiene"), energy_of("butadiene") - 4], [4.472, 0.472], DIGITS[3], STREITWIESER, MEMORY),
    Row("1.09 butadiene rounded", lambda: energy_of("butadiene"), 4.48, 0.01, "University of Bristol lecture notes; x rounded before the sum", PRINT),
    Row("1.11 pentadienyl x", lambda: x_of("pentadienyl"), [SQRT3, 1, 0, -1, -SQRT3], EXACT, STREITWIESER, CLOSED),
    Row("1.11 pentadienyl Eπ", lambda: energy_of("pentadienyl"), 5.4641, DIGITS[4], STREITWIESER, MEMORY),
    Row("1.13 pentadienyl cation q", lambda: electrons_of("pentadienyl", 1), [2 / 3, 1, 2 / 3, 1, 2 / 3], EXACT, STREITWIESER, CLOSED),
    Row("1.14 hexatriene x", lambda: x_of("hexatriene")[:3], [1.80194, 1.24698, 0.44504], DIGITS[5], STREITWIESER, MEMORY),
    Row("1.15 hexatriene Eπ, DE", lambda: [energy_of("hexatriene"), energy_of("hexatriene") - 6], [6.988, 0.988], DIGITS[3], STREITWIESER, MEMORY),
    Row("1.17 heptatrienyl x", lambda: x_of("heptatrienyl")[:4], [1.84776, 1.41421, 0.76537, 0], DIGITS[5], STREITWIESER, MEMORY),
    Row("1.17 heptatrienyl Eπ", lambda: energy_of("heptatrienyl"), 8.0547, DIGITS[4], STREITWIESER, MEMORY),
    Row("1.18 octatetraene x", lambda: x_of("octatetraene")[:4], [1.87939, 1.53209, 1, 0.34730], DIGITS[5], STREITWIESER, MEMORY),
    Row("1.19 octatetraene Eπ, DE", lambda: [energy_of("octatetraene"), energy_of("octatetraene") - 8], [9.518, 1.518], DIGITS[3], STREITWIESER, MEMORY),
    Row("1.21 decapentaene Eπ", lambda: energy_of("decapentaene"), 12.0533, DIGITS[4], COMPUTED, CLOSED),
    Row("1.21 decapentaene HOMO", lambda: x_of("decapentaene")[4], 0.28463, DIGITS[5], COMPUTED, CLOSED),
    Row("1.22 polymethines", polymethine_gaps, [1.41421, 1, 0.76537, 0.61803], DIGITS[5], COMPUTED, CLOSED),
    Row("1.22 polymethines exact", polymethine_gaps, [2 * math.sin(math.pi / (n + 1)) for n in (3, 5, 7, 9)], EXACT, COMPUTED, CLOSED),
)  # fmt: skip

RECTANGLE = model(ring(4), k={(1, 2): 0.8, (3, 0): 0.8})
MOEBIUS = model(ring(4), k={(3, 0): -1.0})
ANNULENES = (
    Row("2.01 cyclopropenyl x", lambda: x_of("cyclopropenyl"), [2, -1, -1], EXACT, "Hückel 1931", CLOSED),
    Row("2.01 cyclopropenyl cation Eπ", lambda: energy_of("cyclopropenyl", 1), 4, EXACT, STREITWIESER, MEMORY),
    Row("2.02 cyclopropenyl radical, anion Eπ", lambda: [energy_of("cyclopropenyl", q) for q in (0, -1)], [3, 2], EXACT, COMPUTED, CLOSED),
    Row("2.03 cyclobutadiene x", lambda: x_of("cyclobutadiene"), [2, 0, 0, -2], EXACT, STREITWIESER, CLOSED),
    Row("2.03 cyclobutadiene Eπ", lambda: energy_of("cyclobutadiene"), 4, EXACT, STREITWIESER, MEMORY),
    Row("2.04 cyclopentadienyl x", lambda: x_of("cyclopentadienyl"), [2, 0.61803, 0.61803, -1.61803, -1.61803], DIGITS[5], STREITWIESER, MEMORY),
    Row("2.05 cyclopentadienyl anion Eπ", lambda: energy_of("cyclopentadienyl", -1), 6.4721, DIGITS[4], STREITWIESER, MEMORY),
    Row("2.05 cyclopentadienyl anion q", lambda: electrons_of("cyclopentadienyl", -1), [1.2] * 5, EXACT, STREITWIESER, CLOSED),
    Row("2.06 cyclopentadienyl radical Eπ", lambda: energy_of("cyclopentadienyl"), 5.8541, DIGITS[4], STREITWIESER, MEMORY),
    Row("2.07 benzene x", lambda: x_of("benzene"), [2, 1, 1, -1, -1, -2], EXACT, "Oregon State University, CH 637 notes", PRINT),
    Row("2.07 benzene Eπ, DE", lambda: [energy_of("benzene"), energy_of("benzene") - 6], [8, 2], EXACT, "Oregon State University, CH 637 notes", PRINT),
    Row("2.10 tropylium x", lambda: x_of("tropylium"), [2, 1.24698, 1.24698, -0.44504, -0.44504, -1.80194, -1.80194], DIGITS[5], STREITWIESER, MEMORY),
    Row("2.10 tropylium Eπ", lambda: energy_of("tropylium", 1), 8.9879, DIGITS[4], STREITWIESER, MEMORY),
    Row("2.10 tropylium q", lambda: electrons_of("tropylium", 1), [6 / 7] * 7, EXACT, STREITWIESER, CLOSED),
    Row("2.11 cyclooctatetraene x", lambda: x_of("cyclooctatetraene"), [2, SQRT2, SQRT2, 0, 0, -SQRT2, -SQRT2, -2], EXACT, STREITWIESER, CLOSED),
    Row("2.11 cyclooctatetraene Eπ", lambda: energy_of("cyclooctatetraene"), 9.6569, DIGITS[4], STREITWIESER, MEMORY),
    Row("2.12 [10]annulene Eπ", lambda: energy_of("[10]annulene"), 12.9443, DIGITS[4], COMPUTED, CLOSED),
    Row("2.13 rectangular cyclobutadiene x", lambda: x_of(RECTANGLE), [1.8, 0.2, -0.2, -1.8], EXACT, COMPUTED, CLOSED),
    Row("2.14 Möbius [4]annulene x", lambda: x_of(MOEBIUS), [SQRT2, SQRT2, -SQRT2, -SQRT2], EXACT, "Heilbronner 1964", CLOSED),
    Row("2.14 Möbius [4]annulene Eπ", lambda: energy_of(MOEBIUS), 5.6569, DIGITS[4], "Heilbronner 1964", MEMORY),
)  # fmt: skip


@each(CHAINS)
def test_open_chains(row: Row) -> None:
    row.check()


@each(ANNULENES)
def test_annulenes(row: Row) -> None:
    row.check()


@pytest.mark.parametrize("n", [1, 2, 3, 7, 20, 61])
def test_levels_and_orbitals_of_an_open_chain(n: int) -> None:
    """Coulson 1938: x_j = 2 cos(jπ/(N + 1)), c_jr = √(2/(N + 1)) sin(rjπ/(N + 1)), j − 1 nodes."""
    solved = solve_levels(cut_piece(lattices.chain(beta=-1.0), cells=n))
    j, r = np.arange(1, n + 1)[None, :], np.arange(1, n + 1)[:, None]
    assert -solved.energy == pytest.approx(2 * np.cos(j[0] * math.pi / (n + 1)), abs=EXACT)
    orbitals = math.sqrt(2 / (n + 1)) * np.sin(r * j * math.pi / (n + 1))
    assert np.abs(np.abs(solved.vectors) - np.abs(orbitals)).max() < EXACT
    for state, vector in enumerate(solved.vectors.T):
        inside = vector[np.abs(vector) > 1e-9]
        assert np.count_nonzero(np.diff(np.sign(inside))) == state


@given(st.integers(2, 60))
def test_energy_of_an_open_chain(n: int) -> None:
    """Coulson & Longuet-Higgins 1947: 2[1/sin(π/(2(N + 1))) − 1] for even N, 2[cot(π/(2(N + 1))) − 1] for odd."""
    angle = math.pi / (2 * (n + 1))
    expected = 2 * ((1 / math.tan(angle) if n % 2 else 1 / math.sin(angle)) - 1)
    assert energy_of(chain(n)) == pytest.approx(expected, abs=EXACT)


def test_signs_of_the_orbitals_of_butadiene() -> None:
    """1.07, seen in print in lecture notes on Hückel theory; an orbital has no sign of its own."""
    signs = np.sign(levels("butadiene").vectors)
    assert (signs * signs[0]).T.tolist() == [[1, 1, 1, 1], [1, 1, -1, -1], [1, -1, -1, 1], [1, -1, 1, -1]]


@pytest.mark.parametrize("n_double", [1, 2, 5, 30])
def test_gap_of_a_polyene(n_double: int) -> None:
    """Closed form: 4 sin(π/(2(2n + 1)))."""
    assert levels(chain(2 * n_double)).gap == pytest.approx(4 * math.sin(math.pi / (2 * (2 * n_double + 1))), abs=EXACT)


def test_energy_of_a_long_chain() -> None:
    """Closed form: 4/π an atom and the end correction −(2 − 4/π) = −0.726760."""
    n = 1800
    assert energy_of(chain(n)) - 4 / math.pi * n == pytest.approx(-0.726760, abs=1e-3)


@pytest.mark.parametrize("n", [3, 4, 5, 6, 9, 12, 22, 41])
def test_levels_of_a_ring(n: int) -> None:
    """Closed form: x_j = 2 cos(2πj/N), the state N/2 once."""
    expected = -np.sort(-2 * np.cos(2 * math.pi * np.arange(n) / n))
    assert x_of(ring(n)) == pytest.approx(expected, abs=EXACT)
    assert x_of(lattices.ring(beta=-1.0, sites=n)) == pytest.approx(expected, abs=EXACT)


@pytest.mark.parametrize("n", [4, 6, 8, 10, 12, 22])
def test_energy_of_a_ring(n: int) -> None:
    """Closed forms: 4/sin(π/N) for N = 4n + 2, 4 cot(π/N) and an open shell for N = 4n."""
    expected = 4 / math.sin(math.pi / n) if n % 4 else 4 / math.tan(math.pi / n)
    assert energy_of(ring(n)) == pytest.approx(expected, abs=EXACT)
    assert levels(ring(n)).is_open_shell == (n % 4 == 0)
    assert piece(ring(n)).electrons == n
