"""Groups 1, 2 and 3: levels and energies of molecules against published tables.

Status beside each row: ``print`` seen in print, ``closed form``, ``memory`` (a table cited from memory, the number
reproduced by an independent computation).
"""

import importlib.util
import math
import sys
from pathlib import Path
from types import ModuleType

import networkx as nx
import numpy as np
import pytest
import sympy as sp


def _load() -> ModuleType:
    spec = importlib.util.spec_from_file_location("molecules", Path(__file__).with_name("molecules.py"))
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules["molecules"] = module
    spec.loader.exec_module(module)
    return module


mol = _load()
CHAIN, RING, NAMED = mol.chain, mol.ring, mol.MOLECULES

#: row, edges, charge, Eπ in β, tolerance, source, status
TOTALS = [
    ("1.01", CHAIN(2), 0, 2.0, 1e-10, "Streitwieser 1961", "closed form"),
    ("1.02 cation", CHAIN(3), 1, 2 * math.sqrt(2), 1e-10, "Streitwieser 1961", "closed form"),
    ("1.02 radical", CHAIN(3), 0, 2 * math.sqrt(2), 1e-10, "Streitwieser 1961", "closed form"),
    ("1.02 anion", CHAIN(3), -1, 2 * math.sqrt(2), 1e-10, "Streitwieser 1961", "closed form"),
    ("1.09", CHAIN(4), 0, 2 * math.sqrt(5), 1e-10, "Streitwieser 1961", "closed form"),
    ("1.11", CHAIN(5), 0, 5.4641, 5e-5, "Streitwieser 1961", "memory"),
    ("1.15", CHAIN(6), 0, 6.988, 5e-4, "Streitwieser 1961", "memory"),
    ("1.17", CHAIN(7), 0, 8.0547, 5e-5, "Streitwieser 1961", "memory"),
    ("1.19", CHAIN(8), 0, 9.518, 5e-4, "Streitwieser 1961", "memory"),
    ("1.21", CHAIN(10), 0, 12.0533, 5e-5, "computed", "closed form"),
    ("2.01", RING(3), 1, 4.0, 1e-10, "Streitwieser 1961", "memory"),
    ("2.02 radical", RING(3), 0, 3.0, 1e-10, "computed", "closed form"),
    ("2.02 anion", RING(3), -1, 2.0, 1e-10, "computed", "closed form"),
    ("2.03", RING(4), 0, 4.0, 1e-10, "Streitwieser 1961", "memory"),
    ("2.05", RING(5), -1, 6.4721, 5e-5, "Streitwieser 1961", "memory"),
    ("2.06", RING(5), 0, 5.8541, 5e-5, "Streitwieser 1961", "memory"),
    ("2.07", RING(6), 0, 8.0, 1e-10, "Oregon State University, CH 637 notes", "print"),
    ("2.10", RING(7), 1, 8.9879, 5e-5, "Streitwieser 1961", "memory"),
    ("2.11", RING(8), 0, 9.6569, 5e-5, "Streitwieser 1961", "memory"),
    ("2.12", RING(10), 0, 12.9443, 5e-5, "computed", "closed form"),
    ("3.02", NAMED["naphthalene"], 0, 13.68324, 5e-6, "Oregon State University, CH 637 notes", "print"),
    ("3.08", NAMED["anthracene"], 0, 19.31371, 5e-6, "Oregon State University, CH 637 notes", "print"),
    ("3.11", NAMED["phenanthrene"], 0, 19.44825, 5e-6, "Oregon State University, CH 637 notes", "print"),
    ("3.17", NAMED["styrene"], 0, 10.42429, 5e-6, "Oregon State University, CH 637 notes", "print"),
    ("3.19", NAMED["biphenyl"], 0, 16.383, 5e-4, "Coulson & Streitwieser 1965", "memory"),
    ("3.23", NAMED["azulene"], 0, 13.3635, 5e-5, "Coulson & Streitwieser 1965", "memory"),
    ("3.26", NAMED["fulvene"], 0, 7.4659, 5e-5, "Coulson & Streitwieser 1965", "memory"),
    ("3.29", NAMED["trimethylenemethane"], 0, 3.4641, 5e-5, "computed", "closed form"),
    ("3.30", NAMED["benzyl"], 0, 8.7206, 5e-5, "Streitwieser 1961", "memory"),
    ("3.31", NAMED["methylenecyclopropene"], 0, 4.9624, 5e-5, "Streitwieser 1961", "memory"),
    ("3.32 o", NAMED["o-xylylene"], 0, 9.9540, 5e-5, "Streitwieser 1961", "memory"),
    ("3.32 p", NAMED["p-xylylene"], 0, 9.9248, 5e-5, "Streitwieser 1961", "memory"),
]

#: row, edges, x descending as published (a beginning of them), tolerance, source, status
LEVELS = [
    ("1.06", CHAIN(4), [1.618, 0.618, -0.618, -1.618], 5e-4, "lecture notes on Hückel theory", "print"),
    ("1.11", CHAIN(5), [math.sqrt(3), 1, 0, -1, -math.sqrt(3)], 1e-10, "Streitwieser 1961", "memory"),
    ("1.14", CHAIN(6), [1.80194, 1.24698, 0.44504, -0.44504], 5e-6, "Streitwieser 1961", "memory"),
    ("1.17", CHAIN(7), [1.84776, 1.41421, 0.76537, 0], 5e-6, "Streitwieser 1961", "memory"),
    ("1.18", CHAIN(8), [1.87939, 1.53209, 1, 0.34730], 5e-6, "Streitwieser 1961", "memory"),
    ("2.04", RING(5), [2, 0.61803, 0.61803, -1.61803, -1.61803], 5e-6, "Streitwieser 1961", "memory"),
    ("2.07", RING(6), [2, 1, 1, -1, -1, -2], 1e-10, "Oregon State University, CH 637 notes", "print"),
    ("2.10", RING(7), [2, 1.24698, 1.24698, -0.44504, -0.44504, -1.80194], 5e-6, "Streitwieser 1961", "memory"),
    ("2.11", RING(8), [2, math.sqrt(2), math.sqrt(2), 0, 0, -math.sqrt(2)], 1e-10, "Streitwieser 1961", "memory"),
    ("3.01", NAMED["naphthalene"], [2.30278, 1.61803, 1.30278, 1, 0.61803], 5e-6, "Coulson & Streitwieser", "memory"),
    ("3.07", NAMED["anthracene"], [2.41421, 2, 1.41421, 1.41421, 1, 1, 0.41421], 5e-6, "Coulson & Streitwieser", "memory"),
    (
        "3.12", NAMED["phenanthrene"], [2.43476, 1.95063, 1.51627, 1.30580, 1.14238, 0.76905, 0.60523], 5e-6,
        "Coulson & Streitwieser", "memory",
    ),
    ("3.17", NAMED["styrene"], [2.13578, 1.41421, 1, 0.66215], 5e-6, "Oregon State University, CH 637", "print"),
    ("3.19", NAMED["biphenyl"], [2.27841, 1.89122, 1.31743, 1, 1, 0.70462], 5e-6, "Coulson & Streitwieser", "memory"),
    (
        "3.22", NAMED["azulene"],
        [2.31028, 1.65157, 1.35567, 0.88698, 0.47726, -0.40039, -0.73764, -1.57922, -1.86921, -2.09529], 5e-6,
        "Coulson & Streitwieser", "memory",
    ),
    (
        "3.26", NAMED["fulvene"], [2.11491, 1, 0.61803, -0.25410, -1.61803, -1.86081], 5e-6,
        "Coulson & Streitwieser", "memory",
    ),
    ("3.30", NAMED["benzyl"], [2.10100, 1.25928, 1, 0, -1, -1.25928, -2.10100], 5e-6, "Streitwieser 1961", "memory"),
    ("3.31", NAMED["methylenecyclopropene"], [2.17009, 0.31111, -1, -1.48119], 5e-6, "Streitwieser 1961", "memory"),
]  # fmt: skip


@pytest.mark.parametrize("row", TOTALS, ids=[row[0] for row in TOTALS])
def test_pi_energy(row: tuple[str, list[tuple[int, int]], int, float, float, str, str]) -> None:
    _, edges, charge, total, tolerance, _, _ = row
    found = mol.levels(edges, charge=charge).pi_energy
    assert found is not None
    assert -found == pytest.approx(total, abs=tolerance)


@pytest.mark.parametrize("row", LEVELS, ids=[row[0] for row in LEVELS])
def test_levels(row: tuple[str, list[tuple[int, int]], list[float], float, str, str]) -> None:
    _, edges, expected, tolerance, _, _ = row
    assert mol.x_of(edges)[: len(expected)] == pytest.approx(expected, abs=tolerance)


@pytest.mark.parametrize("name", NAMED)
def test_levels_are_the_spectrum_of_the_graph(name: str) -> None:
    """Judge: networkx."""
    graph = nx.Graph(NAMED[name])
    assert mol.x_of(NAMED[name])[::-1] == pytest.approx(np.sort(nx.adjacency_spectrum(graph).real), abs=1e-10)


@pytest.mark.parametrize("name", ["fulvene", "styrene", "methylenecyclopropene", "naphthalene"])
def test_levels_are_roots_of_the_characteristic_polynomial(name: str) -> None:
    """Judge: sympy, exact coefficients."""
    edges = NAMED[name]
    size = max(max(edge) for edge in edges) + 1
    matrix = sp.zeros(size)
    for a, b in edges:
        matrix[a, b] = matrix[b, a] = 1
    polynomial = matrix.charpoly()
    for x in mol.x_of(edges):
        assert abs(float(polynomial.eval(sp.Float(float(x), 30)))) < 1e-9


@pytest.mark.parametrize("n", [1, 2, 3, 7, 20, 61])
def test_open_chain(n: int) -> None:
    """Closed form, Coulson 1938: x_j = 2 cos(jπ/(N + 1))."""
    found = mol.x_of(CHAIN(n)) if n > 1 else np.zeros(1)
    assert found == pytest.approx(2 * np.cos(np.arange(1, n + 1) * np.pi / (n + 1)), abs=1e-10)


@pytest.mark.parametrize("n", [4, 6, 10, 18, 30])
def test_chain_energy(n: int) -> None:
    """Closed form, Coulson & Longuet-Higgins 1947: 2[1/sin(π/(2(N + 1))) − 1], N even."""
    assert -mol.levels(CHAIN(n)).pi_energy == pytest.approx(2 * (1 / math.sin(math.pi / (2 * (n + 1))) - 1), abs=1e-10)


@pytest.mark.parametrize("n", [4, 6, 8, 10, 12, 22])
def test_ring_energy(n: int) -> None:
    """Closed forms: 4/sin(π/N) for N = 4n + 2, 4 cot(π/N) for N = 4n."""
    expected = 4 / math.sin(math.pi / n) if n % 4 else 4 / math.tan(math.pi / n)
    assert -mol.levels(RING(n)).pi_energy == pytest.approx(expected, abs=1e-10)


def test_azulene_pairs_no_levels() -> None:
    """Alternants pair ±x (Coulson & Rushbrooke 1940, memory); an odd ring does not."""
    x = mol.x_of(NAMED["azulene"])
    assert np.abs(x + x[::-1]).max() > 0.1
    y = mol.x_of(NAMED["anthracene"])
    assert np.abs(y + y[::-1]).max() < 1e-10
