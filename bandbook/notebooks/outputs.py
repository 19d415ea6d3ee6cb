"""Outputs without what differs from run to run or from machine to machine, and within bounds."""

import copy
import json
import re
import sys
import sysconfig
from collections.abc import Callable
from itertools import groupby
from pathlib import Path
from typing import Any, Final

import bandbook

#: Longest text that is kept of one stream of a cell, or of one displayed value, in characters.
MOST_TEXT: Final = 20_000
#: What stands where a text was cut; without a count, because a kernel that prints very fast loses some of its messages.
CUT: Final = "\n… the rest was left out: a cell keeps the first 20 000 characters\n"

#: A folder with a shorter path, such as ``/usr``, is no secret and too likely to be something else.
_SHORTEST_PLACE: Final = 4
_START, _END = r"(?<![\w/\\.~-])", r"(?![\w.-])"
_ANSI = re.compile(r"\x1b\[[0-9;]*[A-Za-z]")
_ADDRESS = re.compile(r"\bat 0x[0-9a-fA-F]{6,16}\b")
_WORD = re.compile(r"[^\s\"'<>]+")
_CELL = re.compile(r"ipykernel_\d+[/\\]\d+\.py")
_PACKAGES = re.compile(r"[/\\](?:site|dist)-packages[/\\]")
_ROOT = re.compile(r"~|[A-Za-z]:[/\\]|[/\\]")


def bounded(output: Callable[..., Any], shortened: set[tuple[int, str]]) -> Callable[..., Any]:
    """Return nbclient's ``output`` so that it keeps the beginning of each stream only, however much is printed.

    Args:
        output: What keeps an output.
        shortened: Filled with what was cut: number of the cell, stream.
    """
    kept: dict[tuple[int, str], int] = {}

    def keep(outs: Any, message: Any, display_id: Any, cell_index: int) -> Any:
        if message["msg_type"] == "stream":
            place, text = (cell_index, message["content"]["name"]), message["content"]["text"]
            room = MOST_TEXT - kept.get(place, 0)
            if len(text) > room:
                shortened.add(place)
            if room <= 0:
                return None
            message["content"]["text"] = text[:room]
            kept[place] = MOST_TEXT - room + len(text[:room])
        return output(outs, message, display_id, cell_index)

    return keep


def note_shortened(notebook: Any, shortened: set[tuple[int, str]]) -> None:
    """Say at the end of each stream that was cut that it was."""
    for index, name in sorted(shortened):
        streams = [out for out in notebook.cells[index].outputs if out.output_type == "stream" and out.name == name]
        if streams:
            streams[-1]["text"] += CUT


def tidied(notebook: Any, scratch: Path | None = None) -> Any:
    """Return a copy of an executed notebook that is the same for every run of the same thing.

    Timings, the exact version of the language, addresses of objects and places on this machine are gone; streams are
    in one piece between two displays, what was printed before what was warned.

    Args:
        notebook: An executed notebook, whole or in part.
        scratch: The folder in which its kernel ran.
    """
    clean = copy.deepcopy(notebook)
    clean["metadata"]["language_info"] = {"name": "python"}
    places = _places(scratch)
    for cell in clean["cells"]:
        cell.get("metadata", {}).pop("execution", None)
        if cell["cell_type"] == "code":
            cell["outputs"] = _merged(cell["outputs"])
            for output in cell["outputs"]:
                _tidy(output, places)
    return clean


def _merged(outputs: list[Any]) -> list[Any]:
    """Join neighbouring streams, which arrive in pieces of no fixed size and in no fixed order."""
    merged: list[Any] = []
    for is_stream, group in groupby(outputs, key=lambda output: output["output_type"] == "stream"):
        members = list(group)
        if not is_stream:
            merged += members
            continue
        for name in sorted({member["name"] for member in members}, reverse=True):
            own = [member for member in members if member["name"] == name]
            own[0]["text"] = "".join(text_of(member["text"]) for member in own)
            merged.append(own[0])
    return merged


def _tidy(output: Any, places: list[tuple[re.Pattern[str], str]]) -> None:
    kind = output["output_type"]
    if kind == "stream":
        output["text"] = _plain("\n".join(map(_last_written, text_of(output["text"]).split("\n"))), places)
    elif kind == "error":
        output["traceback"] = [_plain(line, places) for line in output["traceback"]]
        output["evalue"] = _plain(output["evalue"], places)
    elif "text/plain" in output["data"]:
        output["data"]["text/plain"] = _plain(text_of(output["data"]["text/plain"]), places)


def _last_written(line: str) -> str:
    """Return what of a line is seen in the end, where a carriage return lets it be written over."""
    body = line.rstrip("\r")
    return body.rpartition("\r")[2] + ("\r" if len(body) < len(line) else "")


def _plain(text: str, places: list[tuple[re.Pattern[str], str]]) -> str:
    """Return a text of bounded length without colours, addresses and places on this machine."""
    text = _ANSI.sub("", text)
    text = text if len(text) <= MOST_TEXT + len(CUT) else text[:MOST_TEXT] + CUT
    for place, instead in places:
        text = place.sub(instead, text)
    return _ADDRESS.sub("at 0x…", _WORD.sub(_without_folders, text))


def _without_folders(found: re.Match[str]) -> str:
    """Return a word without the folders before an installed package; the file of a cell is ``<cell>``."""
    word, instead = found[0], ""
    match = _PACKAGES.search(word)
    if match is None:
        match, instead = _CELL.search(word), "<cell>"
    if match is None:
        return word
    root = _ROOT.search(word, 0, match.end())
    return word[: min(root.start() if root else match.start(), match.start())] + instead + word[match.end() :]


def _places(scratch: Path | None) -> list[tuple[re.Pattern[str], str]]:
    """Return folders of this machine as they may stand in a text, longest first, each with what stands there instead.

    A path keeps what lies below such a folder; the folder by itself becomes ``.``, the home folder ``~``.
    """
    home = str(Path.home())
    known = [sysconfig.get_paths()[name] for name in ("purelib", "platlib", "stdlib")]
    known += [str(Path(bandbook.__file__).resolve().parent.parent), sys.prefix, sys.base_prefix]
    known += [str(scratch / name) for name in ("work", "t", "")] if scratch else []
    spelled = {text for path in known for text in (path, str(Path(path).resolve()))}
    spelled |= {"~" + path.removeprefix(home) for path in spelled if path.startswith(home)}
    places: list[tuple[re.Pattern[str], str]] = []
    for path in sorted(spelled, key=lambda path: (-len(path), path)):
        if len(path) > _SHORTEST_PLACE:
            places += [(re.compile(_START + re.escape(path) + r"[/\\]"), "")]
            places += [(re.compile(_START + re.escape(path) + _END), ".")]
    return [*places, (re.compile(_START + re.escape(home) + _END), "~")]


def text_of(value: Any) -> str:
    """Return a text that a notebook may hold in lines."""
    return value if isinstance(value, str) else "".join(value)


def notebook_bytes(notebook: Any) -> bytes:
    """Return a notebook as it is stored: sorted, readable, the same bytes for the same notebook."""
    return (json.dumps(notebook, indent=1, sort_keys=True, ensure_ascii=False) + "\n").encode()
