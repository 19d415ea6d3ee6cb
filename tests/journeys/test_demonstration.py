"""The demonstration book: it runs, every reference value agrees, and the numbers in its prose are those it computes."""

import json
import re
import shutil
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

pytestmark = pytest.mark.journey

ROOT = Path(__file__).parents[2]
CASES = sorted(path.stem for path in (ROOT / "content/cases").rglob("*.md"))
Records = dict[str, dict[str, Any]]

#: What the prose of a case says, and the quantity (and factor) that it says it of.
SAID = (
    ("butadiene-and-hexatriene", "−4.369", "four.energy_1", 1),
    ("butadiene-and-hexatriene", "−1.669", "four.homo", 1),
    ("butadiene-and-hexatriene", "gap is 3.337 eV", "four.gap", 1),
    ("butadiene-and-hexatriene", "gap is 2.403 eV", "six.gap", 1),
    ("butadiene-and-hexatriene", "−3.438 eV", "bands.energy_per_cell", 1),
    ("butadiene-and-hexatriene", "butadiene has −3.019 eV", "four.pi_energy", 1 / 4),
    ("butadiene-and-hexatriene", "hexatriene −3.145 eV", "six.pi_energy", 1 / 6),
    ("butadiene-and-hexatriene", "At 40 atoms 0.414 eV", "length_series.gap_40", 1),
    ("butadiene-and-hexatriene", "ends at 0.391 eV", "length_series.limit_inverse", 1),
    ("butadiene-and-hexatriene", "ends at 0.038 eV", "length_series.limit_quadratic", 1),
    ("alternating-chain", "gap of this piece is 1.812 eV", "short.gap", 1),
    ("alternating-chain", "at ±0.074 eV", "long.lumo", 1),
    ("alternating-chain", "gap of 1.444 eV", "series_short.gap_40", 1),
    ("alternating-chain", "has 0.00003 eV", "series_long.gap_40", 1),
    ("alternating-chain", "1.462 eV", "series_long.extended_gap_40", 1),
    ("alternating-chain", "ends at 1.344 eV", "series_short.limit_inverse", 1),
    ("alternating-chain", "at 1.657 eV", "series_short.limit_inverse-square", 1),
    ("alternating-chain", "shifted one at 1.434 eV", "series_short.limit_shifted-inverse-square", 1),
    ("fits-of-short-pieces", "| 1/N | 0.405 |", "short.limit_inverse", 1),
    ("fits-of-short-pieces", "| 1/N² | 0.689 |", "short.limit_inverse-square", 1),
    ("fits-of-short-pieces", "| 1/(N + δ)² | 0.466 |", "short.limit_shifted-inverse-square", 1),
    ("fits-of-short-pieces", "| quadratic in 1/N | 0.318 |", "short.limit_quadratic", 1),
    ("fits-of-short-pieces", "| Kuhn | 0.422 |", "short.limit_kuhn", 1),
    ("fits-of-short-pieces", "| exponential | 0.617 |", "short.limit_exponential", 1),
    ("fits-of-short-pieces", "ends at 0.675", "from_one.limit_exponential", 1),
    ("fits-of-short-pieces", "ends at 0.377", "long.limit_inverse", 1),
    ("fits-of-short-pieces", "ends at 0.40004", "long.limit_shifted-inverse-square", 1),
    ("armchair-ribbons", "1.334 eV", "bands_six.gap", 1),
    ("armchair-ribbons", "1.267 eV", "bands_seven.gap", 1),
    ("armchair-ribbons", "0.123", "bands_six.mass_electron", 1),
    ("armchair-ribbons", "0.191 electron masses", "bands_seven.mass_electron", 1),
    ("armchair-ribbons", "at ±0.016 eV", "piece.lumo", 1),
    ("armchair-ribbons", 'gap" of 0.031 eV', "piece.gap", 1),
    ("armchair-ribbons", "at ±0.840 eV", "piece.energy_58", 1),
    ("zigzag-ribbons", "0.938 eV for four", "workings.onset_four", 1),
    ("zigzag-ribbons", "0.498 eV for eight", "workings.onset_eight", 1),
    ("zigzag-ribbons", "90 % of the weight", "workings.edge_weight", 100),
    ("graphene", "1.575 β", "bands.energy_per_cell", 1 / 2 / -2.7),
    ("graphene", "8.161", "bands_gapped.energy_Gamma_2", 1),
    ("graphene", "0.230 electron masses", "bands_gapped.mass_electron", 1),
    ("graphene", "8.74·10⁵ m/s", "workings.speed", 1),
    ("domain-wall", "0.772 eV", "levels_sharp.energy_42", 1),
    ("domain-wall", "0.725 eV", "levels_wide.energy_42", 1),
    ("domain-wall", "6.8 sites", "workings.spread_sharp", 1),
    ("domain-wall", "10.7\n", "workings.spread_wide", 1),
    ("domain-wall", "27 %", "workings.middle_sharp", 100),
    ("domain-wall", "14 %", "workings.middle_wide", 100),
    ("polyacene", "anthracene 2.237", "length_series.gap_3", 1),
    ("polyacene", "tetracene 1.593", "length_series.gap_4", 1),
    ("polyacene", "pentacene 1.186", "length_series.gap_5", 1),
    ("polyacene", "hexacene 0.915 eV", "length_series.gap_6", 1),
    ("rice-mele", "1.720 eV", "bands.gap", 1),
    ("rice-mele", "2.199 eV", "short.gap", 1),
    ("rice-mele", "+0.517 eV", "long.lumo", 1),
    ("rings", "9.657 β", "eight.pi_energy", 1 / -2.7),
    ("rings", "1.207 β", "eight.pi_energy", 1 / 8 / -2.7),
    ("paraphenylene", "biphenyl 3.805", "length_series.gap_2", 1),
    ("paraphenylene", "three rings 3.200", "length_series.gap_3", 1),
    ("paraphenylene", "four 2.895", "length_series.gap_4", 1),
    ("paraphenylene", "six 2.603 eV", "length_series.gap_6", 1),
    ("paraphenylene", "ends at 2.084 eV", "length_series.limit_inverse", 1),
    ("paraphenylene", "limit of 2.237 eV", "length_series.band_gap", 1),
    ("carbonyl-ends", "−2.700 eV", "acrolein.homo", 1),
    ("carbonyl-ends", "to 0.938 eV", "acrolein.lumo", 1),
    ("carbonyl-ends", "3.638 eV", "length_series.gap_4", 1),
    ("carbonyl-ends", "0.826 eV", "length_series.gap_20", 1),
    ("wall-by-changes", "32 % of it", "workings.middle", 100),
    ("gapped-sheet", "gap is 3.900 eV", "bands.gap", 1),
    ("gapped-sheet", "0.594 electron", "bands.mass_electron", 1),
    ("alternating-rings", "3.365 eV", "length_series.gap_5", 1),
    ("alternating-rings", "1.621 eV", "length_series.gap_19", 1),
    ("alternating-rings", "ends at 1.558 eV", "length_series.limit_inverse-square_4m+2", 1),
    ("alternating-rings", "1/N at 1.039 eV", "length_series.limit_inverse_4m+2", 1),
    ("measured-onsets", "1/N ends at 2.242 eV", "length_series.measured_limit_inverse", 1),
    ("measured-onsets", "the exponential at 2.575 eV", "length_series.measured_limit_exponential", 1),
    ("paraphenylene", "at 2.252 eV", "length_series.limit_shifted-inverse-square", 1),
)


def bandbook(*arguments: str, folder: Path) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-c", "from bandbook.cli import main; main()", *arguments]
    return subprocess.run(command, cwd=folder, capture_output=True, text=True, check=False, timeout=900)


@pytest.fixture(scope="module")
def book(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return a bound copy of the demonstration book."""
    root = tmp_path_factory.mktemp("demonstration")
    shutil.copytree(ROOT / "content", root / "content")
    shutil.copy(ROOT / "mkdocs.yml", root)
    done = bandbook("bind", folder=root)
    assert done.returncode == 0, done.stderr
    assert done.stdout.splitlines()[-1] == f"executed {len(CASES)}, fresh 0, failed 0"
    assert "contains a link" not in done.stderr
    return root


@pytest.fixture(scope="module")
def records(book: Path) -> Records:
    return {case: json.loads((book / f"site/cases/{case}/record.json").read_text(encoding="utf-8")) for case in CASES}


def test_the_book_has_what_a_reader_may_expect(records: Records) -> None:
    assert len(CASES) >= 14
    text = "\n".join(path.read_text(encoding="utf-8") for path in (ROOT / "content/cases").rglob("*.md"))
    lattices = ("chain", "alternating-chain", "diatomic-chain", "polyacene", "armchair-ribbon", "zigzag-ribbon")
    assert [name for name in (*lattices, "honeycomb", "ring") if f'lattice = "{name}"' not in text] == []
    assert "vectors = " in text
    assert "built_by = " in text
    assert sum(len(record["references"]) for record in records.values()) >= 60


def test_every_case_is_marked_as_invented() -> None:
    assert "invented" in (ROOT / "content/index.md").read_text(encoding="utf-8")
    for path in (ROOT / "content/cases").rglob("*.md"):
        front = path.read_text(encoding="utf-8").split("---\n")[1]
        assert re.search(r"^tags: \[invented\b", front, flags=re.MULTILINE), path
        for key in ("title", "aim", "conclusion", "next"):
            assert re.search(rf"^{key}: \S", front, flags=re.MULTILINE), f"{path}: {key}"


@pytest.mark.parametrize("case", CASES)
def test_every_reference_value_agrees_and_names_its_ground(case: str, records: Records) -> None:
    references = records[case]["references"]
    assert references
    assert [row for row in references if not row["agrees"]] == []
    assert [row for row in references if not (row["source"] or row["note"])] == []


def test_four_and_six_atoms(records: Records) -> None:
    """The levels of N atoms lie at k = j/(N + 1), to 1e-10."""
    values = {row["name"]: row["value"] for row in records["butadiene-and-hexatriene"]["quantities"]}
    assert [values[f"four.k_{j}"] for j in range(1, 5)] == pytest.approx([j / 5 for j in range(1, 5)], abs=1e-10)
    assert [values[f"six.k_{j}"] for j in range(1, 7)] == pytest.approx([j / 7 for j in range(1, 7)], abs=1e-10)


@pytest.mark.parametrize(("case", "words", "quantity", "factor"), SAID)
def test_the_prose_says_what_was_computed(
    case: str, words: str, quantity: str, factor: float, records: Records
) -> None:
    assert words in (ROOT / f"content/cases/{case}.md").read_text(encoding="utf-8")
    (found,) = (row["value"] for row in records[case]["quantities"] if row["name"] == quantity and not row["recorded"])
    said = max(re.findall(r"[−+]?\d+(?:\.\d+)?", words), key=lambda number: ("." in number, len(number)))
    decimals = len(said.partition(".")[2])
    assert float(said.replace("−", "-")) == pytest.approx(found * factor, abs=0.5 * 10.0**-decimals + 1e-9)


def test_every_source_is_used_and_shown(book: Path, records: Records) -> None:
    keys = set(
        re.findall(r"^@\w+\{(\w+),", (ROOT / "content/sources.bib").read_text(encoding="utf-8"), flags=re.MULTILINE)
    )
    sets = "".join(path.read_text(encoding="utf-8") for path in (ROOT / "content/parameters").glob("*.toml"))
    used = {row["source"] for record in records.values() for row in record["references"]}
    used |= set(re.findall(r'source = "(\w+)"', sets))
    code = "".join(path.read_text(encoding="utf-8") for path in (ROOT / "bandbook").rglob("*.py"))
    used |= {
        key for line in re.findall(r"^ *Source: (.+)\.$", code, flags=re.MULTILINE) for key in re.findall(r"\w+", line)
    }
    assert keys - used == set()
    page = (book / "site/sources/index.html").read_text(encoding="utf-8")
    assert [key for key in keys if f'id="{key}"' not in page] == []
