"""Links of an author lead from the page to where they led from the file."""

import pytest

from bandbook.pages.links import adjusted


@pytest.mark.parametrize(
    ("written", "moved"),
    [
        ("[a](b.md)", "[a](../b/index.md)"),
        ("![b](../x.png 'words')", "![b](../../x.png 'words')"),
        (
            "[c](https://e.org/a_(b)) [m](mailto:a@b.c) [r](/root)",
            "[c](https://e.org/a_(b)) [m](mailto:a@b.c) [r](/root)",
        ),
        ("[e](#x) [f](sub/c.md#s)", "[e](#x) [f](../sub/c/index.md#s)"),
        ("`[d](b.md)` ``[`d](b.md)``", "`[d](b.md)` ``[`d](b.md)``"),
        ("~~~\n[d](b.md)\n~~~\n[d](b.md)", "~~~\n[d](b.md)\n~~~\n[d](../b/index.md)"),
        ("````\n```\n[d](b.md)\n````\n[d](b.md)", "````\n```\n[d](b.md)\n````\n[d](../b/index.md)"),
        ("a stray ` and\n\n[d](b.md) `", "a stray ` and\n\n[d](../b/index.md) `"),
        ("<!-- [d](b.md) -->", "<!-- [d](b.md) -->"),
        ("[g]: b.md\n[^1]: b.md is said", "[g]: ../b/index.md\n[^1]: b.md is said"),
        ("[h](<b c.png>) [i](b%20c.png)", "[h](<../b c.png>) [i](../b%20c.png)"),
        ("<a href=\"b.md#t\">x</a> <img src='p.png'>", "<a href=\"../b/index.html#t\">x</a> <img src='../p.png'>"),
        ("[s](../../parameters/set.toml)", "[s](../../../parameters/set/index.md)"),
        ("[k](../../sources.bib#known1961)", "[k](../../../sources/index.md#known1961)"),
        ("[folder](../)", "[folder](../../)"),
    ],
)
def test_links_of_a_case(written: str, moved: str) -> None:
    assert adjusted(written, source="cases/p/a.md", page="cases/p/a/index.md", ids=["p/a", "p/b", "p/sub/c"]) == moved


def test_links_of_the_front_page() -> None:
    text = "[a](cases/a.md) [b](catalogue/index.md) [c](cases/unknown.md)"
    moved = "[a](cases/a/index.md) [b](catalogue/index.md) [c](cases/unknown.md)"
    assert adjusted(text, source="index.md", page="index.md", ids=["a"]) == moved
