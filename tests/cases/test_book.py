"""A book on disk: what is a case, what is none, and files that cannot be read."""

import os
from collections.abc import Callable
from pathlib import Path

import pytest

from bandbook import cases, workflow
from bandbook.errors import Problem
from bandbook.settings import read_settings

MakeBook = Callable[..., Path]


def read(root: Path) -> cases.Book:
    return cases.read_book(root, root / "content")


def problems_of(root: Path) -> tuple[Problem, ...]:
    return workflow.check(read_settings(None, root)).problems


def told(root: Path) -> list[tuple[str, int, str]]:
    return [(problem.file, problem.line, problem.found) for problem in problems_of(root)]


def test_a_good_book_has_no_problem(make_book: MakeBook) -> None:
    assert problems_of(make_book()) == ()


def test_ids_are_paths_below_cases(make_book: MakeBook, case_text: str) -> None:
    book = read(make_book({"b": case_text, "a/c-1.2": case_text, "a/b/z": case_text}))
    assert [(case.id, case.file) for case in book.cases] == [
        ("a/b/z", "content/cases/a/b/z.md"),
        ("a/c-1.2", "content/cases/a/c-1.2.md"),
        ("b", "content/cases/b.md"),
    ]


def test_hidden_files_are_left_out(make_book: MakeBook, case_text: str) -> None:
    root = make_book({"a": case_text, ".hidden": "x", ".git/b": "x"})
    (root / "content/cases/.#a.md").symlink_to("user@host:123")
    (root / "content/parameters/.set.toml").write_text("x")
    assert [case.id for case in read(root).cases] == ["a"]
    assert problems_of(root) == ()


@pytest.mark.parametrize("identity", ["Capital", "two words", "under_score", "größe", "-first", "a/.b/c", "a/B"])
def test_a_name_that_makes_no_id(make_book: MakeBook, case_text: str, identity: str) -> None:
    found = told(make_book({identity: case_text}))
    hidden = identity == "a/.b/c"
    wanted = [] if hidden else [(f"content/cases/{identity}.md", 1, f'the file name gives the id "{identity}"')]
    assert found == wanted


@pytest.mark.parametrize("identity", ["index", "figures", "tables", "a/tables", "figures/a", "a/record.json"])
def test_a_reserved_id(make_book: MakeBook, case_text: str, identity: str) -> None:
    ((file, line, found),) = told(make_book({identity: case_text}))
    assert (file, line) == (f"content/cases/{identity}.md", 1)
    assert found.startswith(f'the id "{identity}" uses the name ')


def test_line_ends_and_a_byte_order_mark_do_not_matter(make_book: MakeBook, case_text: str) -> None:
    plain = make_book({"a": case_text})
    wanted = workflow.check(read_settings(None, plain)).cases[0]
    for data in (case_text.replace("\n", "\r\n"), case_text.replace("\n", "\r"), "\ufeff" + case_text):
        (plain / "content/cases/a.md").write_bytes(data.encode())
        found = workflow.check(read_settings(None, plain)).cases[0]
        assert (found.parameters, found.references) == (wanted.parameters, wanted.references)


@pytest.mark.parametrize("ends", ["\n", "\r\n", "\r"])
@pytest.mark.parametrize("mark", [b"", b"\xef\xbb\xbf"])
def test_the_line_of_a_bad_byte(make_book: MakeBook, ends: str, mark: bytes) -> None:
    root = make_book()
    data = mark + f"---{ends}title: x{ends}é".encode() + b"\xe9\x80" + ends.encode()
    (root / "content/cases/a.md").write_bytes(data)
    assert told(root) == [("content/cases/a.md", 3, "the byte 0xe9 is no UTF-8 text")]


def test_folders_loops_and_pipes_are_no_files(make_book: MakeBook, case_text: str) -> None:
    root = make_book({"good": case_text, "folder.md/inside": case_text})
    folder = root / "content/cases"
    (folder / "loop.md").symlink_to("loop.md")
    (folder / "lost.md").symlink_to("nothing.md")
    (folder / "round").symlink_to(".")
    os.mkfifo(folder / "pipe.md")
    (root / "content/parameters/folder.toml").mkdir()
    (root / "content/parameters/loop.toml").symlink_to("loop.toml")
    (root / "content/sources.bib").unlink()
    (root / "content/sources.bib").symlink_to("sources.bib")
    files = [*(f"cases/{name}.md" for name in ("folder", "loop", "lost", "pipe")), "parameters/folder.toml", "parameters/loop.toml",
             "sources.bib"]  # fmt: skip
    assert sorted(told(root)) == [(f"content/{name}", 1, "it is no file") for name in files]


def test_a_file_that_is_too_large(make_book: MakeBook) -> None:
    root = make_book()
    (root / "content/cases/a.md").write_bytes(b"x" * 5_000_001)
    assert told(root) == [("content/cases/a.md", 1, "it is larger than 5 MB")]


def test_what_may_not_be_read(make_book: MakeBook, case_text: str, monkeypatch: pytest.MonkeyPatch) -> None:
    """Root may read everything, so the refusal is the system's in name only."""
    root = make_book({"a": case_text, "b/c": case_text})
    read_bytes, scan = Path.read_bytes, os.scandir

    def refuse_file(path: Path) -> bytes:
        if path.name == "a.md":
            raise PermissionError(13, "Permission denied", str(path))
        return read_bytes(path)

    def refuse_folder(path: str) -> object:
        if str(path).endswith("cases/b"):
            raise PermissionError(13, "Permission denied", str(path))
        return scan(path)

    monkeypatch.setattr(Path, "read_bytes", refuse_file)
    monkeypatch.setattr(os, "scandir", refuse_folder)
    assert told(root) == [
        ("content/cases/b", 1, "the folder cannot be read: Permission denied"),
        ("content/cases/a.md", 1, "it cannot be read: Permission denied"),
    ]


def test_a_book_may_be_empty(tmp_path: Path) -> None:
    assert read(tmp_path) == cases.Book(tmp_path, tmp_path / "content")
    assert read(tmp_path).problems == ()


def test_links_out_of_the_book_are_refused_and_inside_followed(make_book: MakeBook, case_text: str) -> None:
    root = make_book(
        {"a": case_text.replace("title: A chain", "title: A chain\nuses: [data/out.csv, data/in.csv, data/lost.csv]")}
    )
    (root / "secret.txt").write_text("secret")
    (root / "content/data").mkdir()
    (root / "content/data/out.csv").symlink_to("../../secret.txt")
    (root / "content/data/real.csv").write_text("1\r\n2\n")
    (root / "content/data/in.csv").symlink_to("real.csv")
    (root / "content/data/lost.csv").symlink_to("lost.csv")
    assert next(found for _, _, found in told(root)) == 'the path "data/out.csv" leads out of the book'
    assert len(told(root)) == 2
    (root / "content/cases/a.md").write_text(case_text.replace("title: A chain", "title: A chain\nuses: data/in.csv"))
    (checked,) = workflow.check(read_settings(None, root)).cases
    assert checked.parameters is not None
    assert checked.parameters["files"] == {"data/in.csv": "1\n2\n"}
