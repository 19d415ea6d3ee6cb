"""What differs from run to run or from machine to machine is gone from outputs, and they are bounded."""

import sys
import sysconfig
from pathlib import Path
from typing import Any

import nbformat.v4
import pytest

from bandbook.notebooks.outputs import CUT, MOST_TEXT, bounded, note_shortened, tidied

SCRATCH = Path("/tmp/bb-x1")  # noqa: S108 - nothing is written there
PURE = sysconfig.get_paths()["purelib"]


def notebook(*outputs: Any) -> Any:
    cell = nbformat.v4.new_code_cell("x", id="step-1", outputs=[nbformat.from_dict(output) for output in outputs])
    cell.metadata["execution"] = {"iopub.status.busy": "2026-01-01"}
    return nbformat.v4.new_notebook(cells=[cell], metadata={"language_info": {"name": "python", "version": "3.11.7"}})


def stream(text: str, name: str = "stdout") -> dict[str, Any]:
    return {"output_type": "stream", "name": name, "text": text}


def shown(text: str) -> dict[str, Any]:
    return {"output_type": "display_data", "data": {"text/plain": text}, "metadata": {}}


def texts(clean: Any) -> list[str]:
    return [output.get("text") or output["data"]["text/plain"] for output in clean.cells[0].outputs]


def test_timings_and_versions_go() -> None:
    clean = tidied(notebook())
    assert clean.cells[0].metadata == {}
    assert clean.metadata.language_info == {"name": "python"}


def test_streams_are_joined_printed_before_warned() -> None:
    clean = tidied(
        notebook(stream("a"), stream("w", "stderr"), stream("b"), shown("x"), stream("c", "stderr"), stream("d"))
    )
    assert texts(clean) == ["ab", "w", "x", "d", "c"]


def test_a_bar_that_is_drawn_over_keeps_its_end() -> None:
    assert texts(tidied(notebook(stream("10%\r50%\r100%\nend\r\n")))) == ["100%\nend\r\n"]


@pytest.mark.parametrize(
    ("text", "left"),
    [
        ("<object at 0x7f4b80d77c50>", "<object at 0x…>"),
        ("at 0x12", "at 0x12"),
        ("\x1b[0;31mred\x1b[0m", "red"),
        (f"{SCRATCH}/t/ipykernel_77/123.py:3: RuntimeWarning: x", "<cell>:3: RuntimeWarning: x"),
        ("C:\\Users\\x\\Temp\\ipykernel_7\\1.py:3: W", "<cell>:3: W"),
        (f"open('{SCRATCH}/work/x.txt')", "open('x.txt')"),
        (f"cwd {SCRATCH}/work", "cwd ."),
        (f"{SCRATCH}/t/a.txt", "a.txt"),
        (f"{SCRATCH}23/a", f"{SCRATCH}23/a"),
        (f"/data{SCRATCH}/a", f"/data{SCRATCH}/a"),
        (f"File {PURE}/numpy/x.py:12, in f", "File numpy/x.py:12, in f"),
        ("File ~/a/lib/python3.9/site-packages/numpy/x.py:12", "File numpy/x.py:12"),
        (f"{sysconfig.get_paths()['stdlib']}/json/decoder.py", "json/decoder.py"),
        (f"{sys.prefix}", "."),
        (f"{Path.home()}", "~"),
        ("1/2 of /usr is ~ 3 \\ 4", "1/2 of /usr is ~ 3 \\ 4"),
        ("https://example.org/a/b.py", "https://example.org/a/b.py"),
    ],
)
def test_places_on_this_machine_go(text: str, left: str) -> None:
    error = {"output_type": "error", "ename": "E", "evalue": text, "traceback": [text, "x"]}
    clean = tidied(notebook(stream(text), shown(text), error), SCRATCH)
    assert clean.cells[0].outputs[0].text == left
    assert clean.cells[0].outputs[1].data["text/plain"] == left
    assert (clean.cells[0].outputs[2].evalue, clean.cells[0].outputs[2].traceback) == (left, [left, "x"])


def test_tidying_twice_changes_nothing() -> None:
    once = tidied(notebook(stream("a" * 50_000), shown(f"{PURE}/x at 0x7f4b80d77c50 \r y" * 9999)), SCRATCH)
    assert tidied(once, SCRATCH) == once


def test_pictures_and_answers_are_left_alone() -> None:
    data = {"image/svg+xml": f"<svg>{PURE}/x</svg>", "application/x+json": {"a": f"{PURE}/x"}}
    output = {"output_type": "display_data", "data": data, "metadata": {}}
    assert tidied(notebook(output)).cells[0].outputs[0].data == data


def test_long_texts_are_cut_and_say_so() -> None:
    for text in texts(tidied(notebook(stream("a" * 10**6), shown("b" * 10**6)))):
        assert len(text) == MOST_TEXT + len(CUT)
        assert text.endswith(CUT)


def test_an_endless_stream_is_cut_while_it_runs() -> None:
    kept, shortened = notebook(), set[tuple[int, str]]()
    outs = kept.cells[0].outputs

    def output(outs: Any, message: Any, *_: Any) -> None:
        outs.append(nbformat.from_dict(stream(message["content"]["text"], message["content"]["name"])))

    keep = bounded(output, shortened)
    for _ in range(100):
        keep(outs, {"msg_type": "stream", "content": {"name": "stdout", "text": "x" * 999}}, None, 0)
    keep(outs, {"msg_type": "stream", "content": {"name": "stderr", "text": "warned"}}, None, 0)
    assert len(outs) == 22
    assert shortened == {(0, "stdout")}
    note_shortened(kept, shortened)
    printed, warned = texts(tidied(kept))
    assert printed == "x" * MOST_TEXT + CUT
    assert warned == "warned"
