"""Group 3: fused and other hydrocarbons, β = −1 eV; a few heteroatoms of group 4 whose frontier levels are unusual."""

import math
from itertools import combinations

import networkx as nx
import numpy as np
import pytest
import sympy as sp

from tests.reference.molecules import (
    ALTERNANT,
    KEKULE,
    MOLECULES,
    electrons_of,
    energy_of,
    homo_of,
    levels,
    localisation,
    model,
    piece,
    x_of,
)
from tests.reference.rows import CLOSED, DIGITS, EXACT, MEMORY, PRINT, Row, each

DICTIONARY = "Coulson & Streitwieser, Dictionary of π-Electron Calculations, 1965"
STREITWIESER = "Streitwieser 1961"
OREGON = "Oregon State University, CH 637 notes"
HADDON = "Haddon, Brus & Raghavachari 1986; closed forms: Lin & Nori 1993"
COMPUTED = "computed for the list"
SQRT = math.sqrt
#: x of C60 with degeneracies; the digits of the four triplets are roots of x⁴ − 3x³ − 2x² + 7x + 1.
C60 = [
    (3, 1), (2.7566, 3), ((1 + SQRT(13)) / 2, 5), (1.8202, 3), ((-1 + SQRT(17)) / 2, 4), (1, 9), ((-1 + SQRT(5)) / 2, 5),
    (-0.1386, 3), (-(3 - SQRT(5)) / 2, 3), ((1 - SQRT(13)) / 2, 5), (-1.4383, 3), (-(1 + SQRT(5)) / 2, 5), (-2, 4),
    ((-1 - SQRT(17)) / 2, 4), (-(3 + SQRT(5)) / 2, 3),
]  # fmt: skip


def energies(name: str, n_double: int) -> list[float]:
    """Return Eπ and the delocalisation energy."""
    return [energy_of(name), energy_of(name) - 2 * n_double]


ROWS = (
    Row("3.01 naphthalene x", lambda: x_of("naphthalene")[:5], [2.30278, 1.61803, 1.30278, 1, 0.61803], DIGITS[5], DICTIONARY, MEMORY),
    Row("3.01 naphthalene x exact", lambda: x_of("naphthalene")[:5], [(SQRT(13) + 1) / 2, (SQRT(5) + 1) / 2, (SQRT(13) - 1) / 2, 1, (SQRT(5) - 1) / 2], EXACT, DICTIONARY, CLOSED),
    Row("3.02 naphthalene Eπ, DE", lambda: energies("naphthalene", 5), [13.68, 3.68], DIGITS[2], OREGON, PRINT),
    Row("3.02 naphthalene Eπ", lambda: energy_of("naphthalene"), 13.68324, DIGITS[5], COMPUTED, CLOSED),
    Row("3.05 naphthalene L1, L2", lambda: [localisation("naphthalene", atom) for atom in (2, 1)], [2.299, 2.480], DIGITS[3], STREITWIESER, MEMORY),
    Row("3.06 benzene L", lambda: localisation("benzene", 0), 2.536, DIGITS[3], STREITWIESER, MEMORY),
    Row("3.07 anthracene x", lambda: x_of("anthracene")[:7], [2.41421, 2, 1.41421, 1.41421, 1, 1, 0.41421], DIGITS[5], DICTIONARY, MEMORY),
    Row("3.07 anthracene x exact", lambda: x_of("anthracene")[:7], [SQRT(2) + 1, 2, SQRT(2), SQRT(2), 1, 1, SQRT(2) - 1], EXACT, DICTIONARY, CLOSED),
    Row("3.08 anthracene Eπ, DE", lambda: energies("anthracene", 7), [19.31, 5.31], DIGITS[2], OREGON, PRINT),
    Row("3.08 anthracene Eπ", lambda: energy_of("anthracene"), 19.31371, DIGITS[5], COMPUTED, CLOSED),
    Row("3.10 anthracene L1, L2, L9", lambda: [localisation("anthracene", atom) for atom in (2, 1, 4)], [2.231, 2.423, 2.013], DIGITS[3], STREITWIESER, MEMORY),
    Row("3.11 phenanthrene Eπ, DE", lambda: energies("phenanthrene", 7), [19.45, 5.45], DIGITS[2], OREGON, PRINT),
    Row("3.11 phenanthrene Eπ", lambda: energy_of("phenanthrene"), 19.44825, DIGITS[5], COMPUTED, CLOSED),
    Row("3.11 phenanthrene is the more stable", lambda: energy_of("phenanthrene") - energy_of("anthracene"), 0.1345, DIGITS[4], "Rioux, numerical Hückel calculation, for the order", PRINT),
    Row("3.12 phenanthrene x", lambda: x_of("phenanthrene")[:7], [2.43476, 1.95063, 1.51627, 1.30580, 1.14238, 0.76905, 0.60523], DIGITS[5], DICTIONARY, MEMORY),
    Row("3.13 phenanthrene L9", lambda: localisation("phenanthrene", 4), 2.298, DIGITS[3], DICTIONARY, MEMORY),
    Row("3.14 tetracene HOMO", lambda: homo_of("tetracene"), 0.29496, DIGITS[5], "Coulson 1948", MEMORY),
    Row("3.14 tetracene Eπ", lambda: energy_of("tetracene"), 24.9308, DIGITS[4], "Coulson 1948", MEMORY),
    Row("3.15 pyrene Eπ", lambda: energy_of("pyrene"), 22.51, DIGITS[2], OREGON, PRINT),
    Row("3.15 pyrene Eπ, DE", lambda: energies("pyrene", 8), [22.50546, 6.50546], DIGITS[5], COMPUTED, CLOSED),
    Row("3.16 pyrene x", lambda: x_of("pyrene")[:8], [2.53209, 2, 1.80194, 1.34730, 1.24698, 1, 0.87939, 0.44504], DIGITS[5], DICTIONARY, MEMORY),
    Row("3.17 styrene x", lambda: x_of("styrene")[:4], [2.13578, 1.41421, 1, 0.66215], DIGITS[5], COMPUTED, CLOSED),
    Row("3.17 styrene Eπ, DE", lambda: energies("styrene", 4), [10.42, 2.42], DIGITS[2], OREGON, PRINT),
    Row("3.19 biphenyl x", lambda: x_of("biphenyl")[:6], [2.27841, 1.89122, 1.31743, 1, 1, 0.70462], DIGITS[5], DICTIONARY, MEMORY),
    Row("3.19 biphenyl Eπ", lambda: energy_of("biphenyl"), 16.383, DIGITS[3], DICTIONARY, MEMORY),
    Row("3.21 stilbene HOMO", lambda: homo_of("stilbene"), 0.50428, DIGITS[5], DICTIONARY, MEMORY),
    Row("3.21 stilbene Eπ", lambda: energy_of("stilbene"), 18.8778, DIGITS[4], DICTIONARY, MEMORY),
    Row("3.22 azulene x", lambda: x_of("azulene"), [2.31028, 1.65157, 1.35567, 0.88698, 0.47726, -0.40039, -0.73764, -1.57922, -1.86921, -2.09529], DIGITS[5], DICTIONARY, MEMORY),
    Row("3.23 azulene Eπ", lambda: energy_of("azulene"), 13.3635, DIGITS[4], DICTIONARY, MEMORY),
    Row("3.23 azulene, naphthalene gaps", lambda: [levels(name).gap for name in ("azulene", "naphthalene")], [0.8777, 1.2361], DIGITS[4], DICTIONARY, MEMORY),
    Row("3.24 azulene q1, q2, q4, q5, q6, q3a", lambda: electrons_of("azulene")[[0, 1, 4, 5, 6, 3]], [1.173, 1.047, 0.855, 0.986, 0.870, 1.027], DIGITS[3], DICTIONARY, MEMORY),
    Row("3.26 fulvene x", lambda: x_of("fulvene"), [2.11491, 1, 0.61803, -0.25410, -1.61803, -1.86081], DIGITS[5], DICTIONARY, MEMORY),
    Row("3.26 fulvene Eπ", lambda: energy_of("fulvene"), 7.4659, DIGITS[4], DICTIONARY, MEMORY),
    Row("3.27 fulvene q5, q1, q2", lambda: electrons_of("fulvene")[[0, 1, 2]], [1.047, 1.092, 1.073], DIGITS[3], DICTIONARY, MEMORY),
    Row("3.27 fulvene q exocyclic", lambda: electrons_of("fulvene")[5], 0.6223, DIGITS[4], "computed for the list; 0.623 is remembered", CLOSED),
    Row("3.29 trimethylenemethane x", lambda: x_of("trimethylenemethane"), [SQRT(3), 0, 0, -SQRT(3)], EXACT, COMPUTED, CLOSED),
    Row("3.29 trimethylenemethane Eπ", lambda: energy_of("trimethylenemethane"), 2 * SQRT(3), EXACT, COMPUTED, CLOSED),
    Row("3.30 benzyl x", lambda: x_of("benzyl"), [2.10100, 1.25928, 1, 0, -1, -1.25928, -2.10100], DIGITS[5], STREITWIESER, MEMORY),
    Row("3.30 benzyl Eπ", lambda: energy_of("benzyl"), 8.7206, DIGITS[4], STREITWIESER, MEMORY),
    Row("3.31 methylenecyclopropene x", lambda: x_of("methylenecyclopropene"), [2.17009, 0.31111, -1, -1.48119], DIGITS[5], STREITWIESER, MEMORY),
    Row("3.31 methylenecyclopropene Eπ", lambda: energy_of("methylenecyclopropene"), 4.9624, DIGITS[4], STREITWIESER, MEMORY),
    Row("3.32 o-xylylene Eπ, HOMO", lambda: [energy_of("o-xylylene"), homo_of("o-xylylene")], [9.9540, 0.29496], DIGITS[4], STREITWIESER, MEMORY),
    Row("3.32 p-xylylene Eπ, HOMO", lambda: [energy_of("p-xylylene"), homo_of("p-xylylene")], [9.9248, 0.31111], DIGITS[4], STREITWIESER, MEMORY),
    Row("3.33 C60 x", lambda: x_of("C60"), np.repeat([x for x, _ in C60], [g for _, g in C60]), DIGITS[4], HADDON, MEMORY),
    Row("3.34 C60 gap", lambda: levels("C60").gap, 0.7566, DIGITS[4], HADDON, MEMORY),
    Row("3.34 C60 Eπ", lambda: energy_of("C60"), 93.1616, DIGITS[4], HADDON, MEMORY),
    Row("3.34 C60 Eπ per C", lambda: energy_of("C60") / 60, 1.55269, DIGITS[5], HADDON, MEMORY),
)  # fmt: skip

ACROLEIN = model(MOLECULES["butadiene"], h={0: 1.0})
PYRIDINE = model(MOLECULES["benzene"], h={0: 0.5})
PYRROLE = model(MOLECULES["cyclopentadienyl"], h={0: 1.5}, k={(0, 1): 0.8, (4, 0): 0.8}, electrons=6)
QUINONE = model([*MOLECULES["p-xylylene"]], h={6: 1.0, 7: 1.0})
GLYOXAL = model(MOLECULES["butadiene"], h={0: 1.0, 3: 1.0})
HETEROATOMS = (
    Row("4.03 acrolein x", lambda: x_of(ACROLEIN), [1.87939, 1, -0.34730, -1.53209], DIGITS[5], "h = k = 1, computed", CLOSED),
    Row("4.03 acrolein Eπ", lambda: energy_of(ACROLEIN), 5.7588, DIGITS[4], "h = k = 1, computed", CLOSED),
    Row("4.05 pyridine x", lambda: x_of(PYRIDINE), [2.10745, 1.16719, 1, -0.84096, -1, -1.93368], DIGITS[5], "Streitwieser's parameters, computed", CLOSED),
    Row("4.05 pyridine Eπ", lambda: energy_of(PYRIDINE), 8.5493, DIGITS[4], "Streitwieser's parameters, computed", CLOSED),
    Row("4.10 pyrrole x", lambda: x_of(PYRROLE), [2.31958, 1.18867, 0.61803, -1.00826, -1.61803], DIGITS[5], "Streitwieser's parameters, computed", CLOSED),
    Row("4.10 pyrrole Eπ", lambda: energy_of(PYRROLE), 8.2526, DIGITS[4], "Streitwieser's parameters, computed", CLOSED),
    Row("4.10 pyrrole q", lambda: electrons_of(PYRROLE)[:3], [1.720, 1.035, 1.106], DIGITS[3], "Streitwieser's parameters, computed", CLOSED),
    Row("4.18 p-benzoquinone LUMO is bonding", lambda: -(levels(QUINONE).lumo or 0.0), 0.25410, DIGITS[5], "Streitwieser's parameters, computed", CLOSED),
    Row("4.19 glyoxal x", lambda: x_of(GLYOXAL), [2, SQRT(2), 0, -SQRT(2)], EXACT, "Streitwieser's parameters, computed", CLOSED),
    Row("4.19 glyoxal LUMO is non-bonding", lambda: levels(GLYOXAL).lumo, 0, EXACT, "Streitwieser's parameters, computed", CLOSED),
)  # fmt: skip


@each(ROWS)
def test_hydrocarbons(row: Row) -> None:
    row.check()


@each(HETEROATOMS)
def test_heteroatoms(row: Row) -> None:
    row.check()


def test_triplets_of_c60_are_the_roots_of_a_quartic() -> None:
    """Lin & Nori 1993: x⁴ − 3x³ − 2x² + 7x + 1 = 0; closed forms for all other levels."""
    x = x_of("C60")
    roots = np.roots([1, -3, -2, 7, 1]).real
    expected = [level for level, size in C60 if size != 3 or abs(level - round(level, 4)) > 1e-9 for _ in range(size)]
    expected += [root for root in roots for _ in range(3)]
    assert x == pytest.approx(np.sort(expected)[::-1], abs=EXACT)
    assert levels("C60").degeneracy[[0, 1, 4, 9, 12, 16, 25, 30]].tolist() == [1, 3, 5, 3, 4, 9, 5, 3]


@pytest.mark.parametrize("name", MOLECULES)
def test_levels_are_the_spectrum_of_the_graph(name: str) -> None:
    """Judge: networkx."""
    spectrum = np.sort(nx.adjacency_spectrum(nx.Graph(MOLECULES[name])).real)[::-1]
    assert x_of(name) == pytest.approx(spectrum, abs=EXACT)


@pytest.mark.parametrize("name", [name for name in MOLECULES if name != "C60"])
def test_levels_are_the_roots_of_the_characteristic_polynomial(name: str) -> None:
    """Judge: sympy, exact coefficients and 30 digits of each root."""
    graph = nx.Graph(MOLECULES[name])
    x = sp.Symbol("x")
    polynomial = sp.Matrix(nx.to_numpy_array(graph, nodelist=sorted(graph), dtype=int).tolist()).charpoly(x)
    roots = []
    for factor, power in sp.factor_list(polynomial.as_expr())[1]:
        roots += [float(root) for root in sp.Poly(factor, x).nroots(n=30, maxsteps=200)] * power
    assert x_of(name) == pytest.approx(np.sort(roots)[::-1], abs=EXACT)


@pytest.mark.parametrize("name", MOLECULES)
def test_moments(name: str) -> None:
    """Σx = 0, Σx² = 2 × bonds, Σx³ = 6 × triangles. Judge: networkx counts them."""
    x, graph = x_of(name), nx.Graph(MOLECULES[name])
    triangles = sum(nx.triangles(graph).values()) / 3
    assert [x.sum(), (x**2).sum(), (x**3).sum()] == pytest.approx([0, 2 * len(graph.edges), 6 * triangles], abs=1e-9)


@pytest.mark.parametrize("name", MOLECULES)
def test_alternants_pair_their_levels_and_carry_one_electron_an_atom(name: str) -> None:
    """Coulson & Rushbrooke 1940, memory; judge of what is alternant: networkx. Rings of odd size pair nothing."""
    is_alternant = nx.is_bipartite(nx.Graph(MOLECULES[name]))
    assert is_alternant or name not in ALTERNANT
    x = x_of(name)
    assert (np.abs(x + x[::-1]).max() < EXACT) == is_alternant
    if is_alternant:
        assert electrons_of(name) == pytest.approx(np.ones(len(x)), abs=EXACT)


@pytest.mark.parametrize("name", KEKULE)
def test_the_determinant_counts_kekule_structures(name: str) -> None:
    """Dewar & Longuet-Higgins 1952, memory: |det A| = K². Judge: perfect matchings, counted one by one."""
    graph = nx.Graph(MOLECULES[name])
    assert count_matchings(graph) == KEKULE[name]
    assert abs(np.prod(x_of(name))) == pytest.approx(KEKULE[name] ** 2, abs=1e-8)


def count_matchings(graph: nx.Graph) -> int:
    """Return the number of perfect matchings."""
    if not graph:
        return 1
    atom = min(graph)
    return sum(count_matchings(graph.subgraph(set(graph) - {atom, other})) for other in graph[atom])


def test_the_determinant_of_biphenylene_counts_less() -> None:
    """Algebraic structure count, print: 3² although there are five structures; a ring of four is no benzenoid."""
    assert count_matchings(nx.Graph(MOLECULES["biphenylene"])) == 5
    assert abs(np.prod(x_of("biphenylene"))) == pytest.approx(9, abs=1e-8)


@pytest.mark.parametrize(
    ("name", "ratio"), [("benzene", 0.943), ("naphthalene", 0.923), ("anthracene", 0.912), ("pyrene", 0.913)]
)
def test_mcclellands_bound(name: str, ratio: float) -> None:
    """McClelland 1971, print: √(16/27) √(2mn) ≤ Eπ ≤ √(2mn), n atoms and m bonds."""
    bound = math.sqrt(2 * len(MOLECULES[name]) * len(x_of(name)))
    assert math.sqrt(16 / 27) * bound <= energy_of(name) <= bound
    assert energy_of(name) / bound == pytest.approx(ratio, abs=DIGITS[3])


@pytest.mark.parametrize("h", [0.3, 1.5, 2.0])
@pytest.mark.parametrize("k", [0.4, 0.8, 1.0])
def test_five_rings_keep_a_pair_and_substituted_benzenes_keep_another(h: float, k: float) -> None:
    """Exact whatever h and k: X(CH)₄ keeps x = 0.61803 and −1.61803, a substituted benzene x = ±1."""
    ring = x_of(model(MOLECULES["cyclopentadienyl"], h={0: h}, k={(0, 1): k, (4, 0): k}))
    phenyl = x_of(model(MOLECULES["benzyl"], h={6: h}, k={(0, 6): k}))
    for x, kept in [(ring, ((SQRT(5) - 1) / 2, -(SQRT(5) + 1) / 2)), (phenyl, (1.0, -1.0))]:
        assert all(np.abs(x - level).min() < EXACT for level in kept)


def test_different_molecules_are_different_graphs() -> None:
    """Judge: networkx. A wrong edge list would else hide behind another molecule's numbers."""
    for one, two in combinations(MOLECULES, 2):
        assert not nx.is_isomorphic(nx.Graph(MOLECULES[one]), nx.Graph(MOLECULES[two]))
    assert piece("C60").coordination.tolist() == [3] * 60
    assert nx.check_planarity(nx.Graph(MOLECULES["C60"]))[0]
