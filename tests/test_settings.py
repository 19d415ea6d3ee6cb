"""Settings are read once, for command and plugin; what is wrong with mkdocs.yml is told at its line."""

from pathlib import Path

import pytest

from bandbook.errors import AuthorError
from bandbook.settings import OPTIONS, find_config, read_settings, settings_from

GOOD = "site_name: Test book\ndocs_dir: content\nplugins:\n  - search\n  - bandbook\n"


@pytest.fixture
def book(tmp_path: Path) -> Path:
    root = tmp_path / "a book Ö"
    (root / "content/cases").mkdir(parents=True)
    (root / "mkdocs.yml").write_text(GOOD, encoding="utf-8")
    return root


def write(book: Path, text: str | bytes) -> None:
    (book / "mkdocs.yml").write_bytes(text.encode() if isinstance(text, str) else text)


def told(book: Path) -> tuple[str, ...]:
    with pytest.raises(AuthorError) as caught:
        read_settings(None, book)
    assert caught.value.exit_status == 2
    return tuple(str(problem) for problem in caught.value.problems)


def test_defaults(book: Path) -> None:
    settings = read_settings(None, book)
    assert (settings.root, settings.content, settings.site) == (book, book / "content", book / "site")
    assert (settings.store, settings.templates) == (book / ".bandbook", book / "site_templates")
    assert (settings.title, settings.timeout) == ("Test book", 600.0)


def test_a_book_is_found_from_below_and_by_name(book: Path) -> None:
    settings = read_settings(None, book)
    assert read_settings(None, book / "content/cases") == settings
    assert read_settings(Path("mkdocs.yml"), book) == settings
    assert read_settings(Path(), book) == settings
    assert read_settings(book / "mkdocs.yml", Path("/")) == settings
    assert find_config(book / "content") == book / "mkdocs.yml"


def test_no_book(tmp_path: Path) -> None:
    message = r"there is no mkdocs.yml in .*; a book has one; call bandbook start FOLDER, or name it with --book FILE"
    with pytest.raises(AuthorError, match=message):
        read_settings(None, tmp_path)
    with pytest.raises(AuthorError, match=r"there is no file .*other.yml; a book has one"):
        read_settings(Path("other.yml"), tmp_path)
    with pytest.raises(AuthorError, match="bandbook start"):
        read_settings(tmp_path, Path("/"))


@pytest.mark.parametrize(
    "plugins",
    [
        "plugins:\n  - bandbook:\n      timeout: 5\n",
        "plugins:\n  bandbook:\n    timeout: 5\n",
        "plugins: [search, {bandbook: {timeout: 5}}]\n",
    ],
)
def test_options_are_read_in_each_way_that_mkdocs_reads_them(book: Path, plugins: str) -> None:
    write(book, "site_name: x\n" + plugins)
    assert read_settings(None, book).timeout == 5.0


def test_command_and_plugin_read_the_same(book: Path) -> None:
    write(book, "site_name: x\nsite_dir: public\nplugins:\n  - bandbook:\n      timeout: 7.5\n")
    by_plugin = settings_from(
        book / "mkdocs.yml", {"timeout": 7.5}, docs_dir=str(book / "content"), site_dir=str(book / "public"), title="x"
    )
    assert read_settings(None, book) == by_plugin


def test_tags_that_only_mkdocs_knows_do_not_matter(book: Path) -> None:
    tags = "x:\n  y: !!python/name:os.system\n  z: !ENV [NAME, none]\n  l: !relative {a: b}\n"
    write(book, GOOD + tags)
    assert read_settings(None, book).title == "Test book"


def test_settings_are_inherited_as_mkdocs_inherits(book: Path) -> None:
    (book / "base.yml").write_text("site_name: base\nplugins:\n  bandbook:\n    timeout: 3\n", encoding="utf-8")
    write(book, "INHERIT: base.yml\nsite_name: above\nplugins:\n  search: {}\n")
    settings = read_settings(None, book)
    assert (settings.title, settings.timeout) == ("above", 3.0)


def test_a_file_that_inherits_from_itself_ends(book: Path) -> None:
    write(book, "INHERIT: mkdocs.yml\n" + GOOD)
    assert read_settings(None, book).title == "Test book"


def test_exact_texts(book: Path) -> None:
    write(book, "site_name: x\nplugins:\n  - search\n  - bandbook:\n      timeuot: 5\n")
    assert told(book) == (
        'mkdocs.yml:5: timeuot: unknown key "timeuot"; keys here are timeout; did you mean "timeout"?',
    )
    write(book, "site_name: x\nplugins:\n  - search\n")
    assert told(book) == (
        "mkdocs.yml:2: plugins: the plugin bandbook is not among the plugins; a book has it; add - bandbook under plugins:",
    )


@pytest.mark.parametrize(
    ("text", "line", "words"),
    [
        ("site_name: x\nplugins:\n  - bandbook:\n      timeout: 0\n", 4, "above 0"),
        ("site_name: x\nplugins:\n  - bandbook:\n      timeout: true\n", 4, "found the boolean true"),
        ("site_name: x\nplugins:\n  - bandbook:\n      timeout: soon\n", 4, "a finite number"),
        ("site_name: x\nplugins:\n  - bandbook: 5\n", 3, "the options are no table"),
        ("site_name: x\nplugins: bandbook\n", 2, "is not among the plugins"),
        ("site_name: x\n", 1, "is not among the plugins"),
        ("site_name: x\nplugins: [bandbook]\ndocs_dir: docs\n", 3, 'the content folder "docs" does not exist'),
        ("site_name: x\nplugins: [bandbook]\ndocs_dir: [a]\n", 3, "docs_dir is no text"),
        ("site_name: x\nplugins: [bandbook]\nsite_dir: content/site\n", 3, "one inside the other"),
        ("site_name: x\nplugins: [bandbook]\nsite_dir: .\n", 3, "one inside the other"),
        ("site_name: x\nplugins: [bandbook\n", 3, "it is no YAML"),
        ("site_name: 2026-13-45\n", 1, "it cannot be read"),
        ("- a\n", 1, "it holds no settings"),
        ("", 1, "it holds no settings"),
        (b"site_name: \xff\n", 1, "it cannot be read"),
        ("a: \x00\n", 1, "it is no YAML"),
        ("a: " + "[" * 3000, 1, "it cannot be read"),
    ],
)
def test_what_is_wrong_is_told_at_its_line(book: Path, text: str | bytes, line: int, words: str) -> None:
    write(book, text)
    (message,) = told(book)
    assert message.startswith(f"mkdocs.yml:{line}: ")
    assert words in message
    assert message.count("; ") >= 2


def test_a_content_folder_that_links_to_itself(book: Path) -> None:
    (book / "round").symlink_to("round")
    write(book, GOOD.replace("content", "round"))
    assert [message.partition(";")[0] for message in told(book)] == [
        'mkdocs.yml:2: docs_dir: the content folder "round" does not exist'
    ]


def test_every_option_has_a_default() -> None:
    assert [option.name for option in OPTIONS if option.is_required] == []
