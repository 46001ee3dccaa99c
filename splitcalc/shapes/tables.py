"""Tables of published dimensions. Each file's header says what confirms its rows."""

from __future__ import annotations

import csv
import difflib
import functools
from collections.abc import Callable
from pathlib import Path

from splitcalc.inputs import Entry
from splitcalc.shapes.families import Family, Hollow, RolledI

FOLDER = Path(__file__).parent / "tables"
UNITS = {"us": ("in", 0.0254), "eu": ("mm", 0.001)}


def _rolled(sizes: dict[str, Entry], region: str) -> Family:
    return RolledI(**sizes)


def _hollow(sizes: dict[str, Entry], region: str) -> Family:
    made_to = "A500" if region == "us" else "EN 10219"
    return Hollow(sizes["H"], sizes["B"], sizes["t"], made_to)


MAKERS: dict[str, Callable[[dict[str, Entry], str], Family]] = {
    "rolled": _rolled,
    "hollow": _hollow,
}


@functools.cache
def all_sections() -> dict[str, Family]:
    """Every tabulated section by its name, in the order of the tables."""
    out = {}
    for kind, maker in MAKERS.items():
        for region, (unit, size) in UNITS.items():
            text = (FOLDER / f"{kind}_{region}.csv").read_text(encoding="utf-8")
            rows = [line for line in text.splitlines() if line and not line.startswith("#")]
            for row in csv.DictReader(rows):
                name = row.pop("name")
                entries = {
                    key: Entry(float(value) * size, f"{value} {unit}") for key, value in row.items()
                }
                out[name] = maker(entries, region)
    return out


def _plain(name: str) -> str:
    return name.casefold().replace(" ", "").replace("×", "x")


def look_up(name: str) -> tuple[str, Family]:
    """A tabulated section by name; spaces, case and the kind of x don't matter.

    Raises
    ------
    KeyError : with the nearest names
    """
    known = {_plain(key): key for key in all_sections()}
    found = known.get(_plain(name))
    if found is None:
        near = difflib.get_close_matches(_plain(name), known, n=3, cutoff=0.5)
        raise KeyError(", ".join(known[n] for n in near))
    return found, all_sections()[found]
