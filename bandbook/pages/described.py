"""Systems and quantities in words: what a reader of the field calls them."""

from collections.abc import Mapping
from typing import Any, Final

from bandbook.pages.numbers import as_written

#: Field → how it is written in a line; its unit follows.
_SYMBOLS: Final = {
    "beta": "β", "beta_inside": "β inside", "beta_between": "β between", "alpha": "α", "alpha_a": "α of A",
    "alpha_b": "α of B", "period": "period", "bond_length": "bond length",
}  # fmt: skip
_UNITS: Final = {"period": "Å", "bond_length": "Å"}
_COUNTS: Final = {"lines": "lines", "sites": "sites"}
#: Quantity without its study → what it is called in the first screen.
_NAMES: Final = {
    "gap": "gap", "band_gap": "gap of the infinite system", "homo": "HOMO", "lumo": "LUMO",
    "total_width": "total width", "pi_energy": "π energy", "direct_gap": "direct gap", "fermi_energy": "Fermi energy",
}  # fmt: skip


def described(name: str, system: Mapping[str, Any]) -> str:
    """Return a system in one line, its numbers with it.

    >>> described("short", {"form": "named-lattice", "lattice": "chain", "beta": -2.7, "alpha": 0.0, "period": 1.4})
    'short: chain, β −2.7 eV, period 1.4 Å'
    """
    what = _WRITERS.get(system["form"], _other)(system)
    return what if name == "system" else f"{name}: {what}"


def _lattice(system: Mapping[str, Any]) -> str:
    parts = [str(system["lattice"]).replace("-", " ")]
    parts += [f"{system[key]} {word}" for key, word in _COUNTS.items() if isinstance(system.get(key), int)]
    for key, symbol in _SYMBOLS.items():
        value = system.get(key)
        if value is not None and not (key == "alpha" and value == 0):
            parts.append(f"{symbol} {as_written(value)} {_UNITS.get(key, 'eV')}")
    return ", ".join(parts)


def _written_out(system: Mapping[str, Any]) -> str:
    n_sites, n_vectors = len(system["sites"]), len(system["vectors"])
    kind = ("molecule", "chain", "sheet", "crystal")[n_vectors]
    return f"{kind} of {n_sites} site{'s' if n_sites != 1 else ''}{' a cell' if n_vectors else ''}, written out"


def _built_by(system: Mapping[str, Any]) -> str:
    arguments = system.get("with") or {}
    told = ", ".join(f"{key} = {value}" for key, value in arguments.items() if isinstance(value, str | int | float))
    return f"built by {system['built_by']}({told})".replace("-", "−")


def _other(system: Mapping[str, Any]) -> str:
    return str(system.get("molecule") or system.get("repeat_unit") or system.get("structure") or system["form"])


_WRITERS: Final = {"named-lattice": _lattice, "written-out": _written_out, "built-by": _built_by}


def dimension_of(system: Mapping[str, Any]) -> str:
    """Return how many directions a system goes on in, as a catalogue has it; empty where only a run can tell.

    >>> dimension_of({"form": "written-out", "vectors": [[1, 0, 0]]})
    '1D'
    """
    if system["form"] == "written-out":
        n_vectors = len(system["vectors"])
        return f"{n_vectors}D" if n_vectors else "molecule"
    if system["form"] == "named-lattice":
        lattice = str(system["lattice"])
        if lattice == "ring":
            return "molecule"
        flat = {"honeycomb", "square", "triangular", "kagome", "lieb"}
        solid = {"simple-cubic", "bcc", "fcc", "diamond"}
        return "2D" if lattice in flat else "3D" if lattice in solid else "1D"
    return {"molecule": "molecule", "repeat-unit": "1D"}.get(system["form"], "")


def called(name: str) -> str:
    """Return what a quantity is called: the word of the field, then its study.

    >>> called("short.gap"), called("bands.mass_hole")
    ('gap (short)', 'mass_hole (bands)')
    """
    study, _, short = name.partition(".")
    return f"{_NAMES.get(short, short)} ({study})"
