"""What goes with a release agrees: versions, classifiers, jobs, the lines of the changelog, the files for citing."""

import datetime as dt
import re
import subprocess
import sys
import tomllib
from pathlib import Path
from typing import Any

import pytest
import yaml

from bandbook import __version__
from tests.lowest import constraints, requirements

ROOT = Path(__file__).resolve().parents[2]
CHECKS = ROOT / ".github/workflows/checks.yml"
GITHUB = ROOT / "site_templates/start/github/book.yml"
GITLAB = ROOT / "site_templates/start/gitlab/gitlab-ci.yml"
CITATION = ROOT / "CITATION.cff"
PROJECT = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]


def read(path: Path) -> dict[Any, Any]:
    """Return a YAML file; ``on`` is the boolean true there, as YAML 1.1 has it."""
    found = yaml.safe_load(path.read_text(encoding="utf-8"))
    assert isinstance(found, dict)
    return found


def steps(path: Path) -> list[dict[str, Any]]:
    return [step for job in read(path)["jobs"].values() for step in job["steps"]]


def test_every_python_of_the_classifiers_is_checked() -> None:
    named = [word for one in PROJECT["classifiers"] for word in re.findall(r":: (3\.\d+)$", one)]
    jobs = read(CHECKS)["jobs"]
    assert jobs["all"]["strategy"]["matrix"]["python"] == named
    assert PROJECT["requires-python"] == f">={named[0]}"
    lowest = [
        step["with"]["python-version"] for step in jobs["lowest"]["steps"] if "python-version" in step.get("with", {})
    ]
    assert lowest == [named[0]]


def test_ci_runs_what_the_project_runs() -> None:
    commands = [step["run"] for step in steps(CHECKS) if "run" in step]
    assert ".ci/run" in commands
    assert "python3 -m tests.lowest > lowest.txt" in commands
    assert (ROOT / ".ci/run").stat().st_mode & 0o111


@pytest.mark.parametrize("path", [CHECKS, GITHUB])
def test_actions_are_pinned_by_commit_with_their_version_beside(path: Path) -> None:
    used = re.findall(r"uses: (.*)", path.read_text(encoding="utf-8"))
    assert used
    assert all(re.fullmatch(r"[\w./-]+@[0-9a-f]{40} # v\d+\.\d+\.\d+", one) for one in used)


@pytest.mark.parametrize("path", [CHECKS, GITHUB])
def test_a_workflow_has_no_right_to_write(path: Path) -> None:
    workflow = read(path)
    granted = [workflow["permissions"], *(job.get("permissions", {}) for job in workflow["jobs"].values())]
    assert all(right == "read" for rights in granted for right in rights.values())
    assert "secrets." not in path.read_text(encoding="utf-8")
    checkouts = [step for step in steps(path) if "checkout" in step.get("uses", "")]
    assert checkouts
    assert all(step["with"]["persist-credentials"] is False for step in checkouts)


def test_the_workflows_of_a_new_book_keep_the_store_and_the_report() -> None:
    hub, lab = steps(GITHUB), read(GITLAB)["book"]
    assert sum(step.get("with", {}).get("path") == ".bandbook" for step in hub) == 2
    (upload,) = [step for step in hub if "upload-artifact" in step.get("uses", "")]
    assert (upload["if"], upload["with"]["path"].split()) == ("always()", ["site", "report.xml"])
    assert lab["cache"]["paths"] == [".bandbook/"]
    assert lab["artifacts"] == {"when": "always", "paths": ["site/"], "reports": {"junit": "report.xml"}}
    bind = "bandbook bind --junit report.xml"
    assert bind in lab["script"]
    assert bind in [step.get("run") for step in hub]


def test_the_citation_is_complete_and_of_this_version() -> None:
    citation = read(CITATION)
    assert citation["version"] == __version__
    assert citation["license"] == PROJECT["license"]
    assert citation["keywords"] == PROJECT["keywords"]
    assert citation["authors"] == PROJECT["authors"]
    assert (citation["cff-version"], citation["type"], citation["title"]) == ("1.2.0", "software", PROJECT["name"])
    assert dt.date.fromisoformat(citation["date-released"]).year >= 2026
    assert len(citation["abstract"]) > 100


def test_the_constraints_are_the_lower_bounds() -> None:
    given = ["a>=1.2", "b[x]>=2.0,<3", "c<4,>=3.1.0,!=3.5", "d", 'e>=5; python_version < "3.12"', "a>=1.2"]
    assert constraints(given) == ["a==1.2", "b==2.0", "c==3.1.0", "e==5"]
    assert {one.partition("==")[0] for one in constraints(requirements())} >= {"numpy", "scipy", "matplotlib", "pytest"}


def test_every_requirement_of_the_package_has_a_lower_bound() -> None:
    assert len(constraints(PROJECT["dependencies"])) == len(PROJECT["dependencies"])


@pytest.mark.parametrize(
    ("path", "schema"),
    [(CHECKS, ["vendor.github-workflows"]), (GITHUB, ["vendor.github-workflows"]), (CITATION, ["vendor.citation-file-format"]),
     (GITLAB, ["vendor.gitlab-ci", "--data-transform", "gitlab-ci"])],
    ids=lambda value: value.name if isinstance(value, Path) else "",
)  # fmt: skip
def test_a_schema_holds(path: Path, schema: list[str]) -> None:
    command = [sys.executable, "-m", "check_jsonschema", "--builtin-schema", *schema, str(path)]
    done = subprocess.run(command, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout + done.stderr
