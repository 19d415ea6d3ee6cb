"""The tree of errors: exit statuses, messages on one line, and copies that keep what they carry."""

import copy
import pickle

import pytest

from bandbook import errors
from bandbook.errors import AuthorError, BandbookError, Problem, RunError, WorkingsError, exit_status, key_text

PROBLEM = Problem("found 5", "allowed is 1 to 3", "correct it", ("sites", 2, "alpha"))


def test_every_kind_has_its_exit_status() -> None:
    kinds = [kind for kind in vars(errors).values() if isinstance(kind, type) and issubclass(kind, BandbookError)]
    own = {kind.__name__: kind.exit_status for kind in kinds if kind is not BandbookError}
    assert own == {"WorkingsError": 1, "AuthorError": 2, "PhysicsError": 3, "RunError": 4, "IntegrityError": 5}
    for name, status in own.items():
        assert f"{name}" in (errors.__doc__ or "")
        assert f"  {status}  " in (errors.__doc__ or "")


@pytest.mark.parametrize(
    ("statuses", "status"),
    [([], 0), ([0, 0], 0), ([1, 3], 3), ([3, 4], 4), ([4, 2], 2), ([2, 5, 1], 5), ([1, 0], 1)],
)
def test_several_outcomes(statuses: list[int], status: int) -> None:
    """The contract: the first of 5, 2, 4, 3, 1."""
    assert exit_status(statuses) == status


def test_a_problem_is_placed_and_printed_on_one_line() -> None:
    assert str(PROBLEM) == "sites[2].alpha: found 5; allowed is 1 to 3; correct it"
    placed = PROBLEM.below("system").at("content/cases/a.md", 7)
    assert str(placed) == "content/cases/a.md:7: system.sites[2].alpha: found 5; allowed is 1 to 3; correct it"
    assert "\n" not in str(Problem("a\nb", "c", "d\x1b", ("e\n",)))


def test_keys() -> None:
    assert key_text(()) == ""
    assert key_text(("a", 0, 1, "b", "c")) == "a[0][1].b.c"


@pytest.mark.parametrize(
    "error",
    [
        AuthorError([PROBLEM, PROBLEM.at("a.md", 3)]),
        WorkingsError("failed", cell=2, source="x", traceback="t", line=5),
        RunError("too long", reason="timed out"),
    ],
)
def test_copies_keep_everything(error: BandbookError) -> None:
    for other in (copy.copy(error), pickle.loads(pickle.dumps(error))):  # noqa: S301 - what was pickled here
        assert type(other) is type(error)
        assert str(other) == str(error)
        assert vars(other) == vars(error)


def test_an_author_error_tells_every_problem() -> None:
    error = AuthorError([PROBLEM, PROBLEM.at("a.md", 3)])
    assert str(error).splitlines() == [str(problem) for problem in error.problems]
    assert str(AuthorError([])) == ""
