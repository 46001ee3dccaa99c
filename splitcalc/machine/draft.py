"""What a page has not saved yet: a small JSON file beside the machine file.

It survives a restart of the kernel. It is data: read strictly, never executed.
"""

from __future__ import annotations

import json
import math
import os
import re
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from splitcalc.machine.save import SaveError, told, write_whole

LARGEST_DRAFT = 1_000_000  # bytes: like a machine file, a page or two


@dataclass(frozen=True)
class Draft:
    """Changes that wait for their machine file.

    machine : SHA-256 of the machine file that they were made on
    values : the log's values [SI], and words such as a state's name
    changes : dotted keys of the machine file, with the texts to stand there

    Raises
    ------
    ValueError : when a part has another type, or a number is not finite
    """

    machine: str
    values: Mapping[str, float | str]
    changes: Mapping[str, str]

    def __post_init__(self) -> None:
        if not (isinstance(self.machine, str) and re.fullmatch("[0-9a-f]{64}", self.machine)):
            raise ValueError("machine is no SHA-256")
        if not _maps(self.values, _is_value):
            raise ValueError("values are names with a word or a finite number")
        if not _maps(self.changes, _is_text):
            raise ValueError("changes are keys with a text")


def _maps(table: Any, is_right: Any) -> bool:
    return isinstance(table, Mapping) and all(
        _is_text(name) and is_right(part) for name, part in table.items()
    )


def _is_text(part: Any) -> bool:
    return isinstance(part, str)


def _is_value(part: Any) -> bool:
    number = isinstance(part, int | float) and not isinstance(part, bool)
    return _is_text(part) or (number and math.isfinite(part))


def keep(path: Path, draft: Draft) -> None:
    """Write the draft of the machine file at `path`, in place of an older one.

    Raises
    ------
    SaveError : when it can't be written; an older draft is still there
    """
    parts = {
        "machine": draft.machine,
        "values": dict(draft.values),
        "changes": dict(draft.changes),
    }
    data = json.dumps(parts, indent=1, allow_nan=False).encode()
    place = _place(path)
    if len(data) > LARGEST_DRAFT:
        raise SaveError(f"{place} would be too large to be read again; nothing was changed.")
    write_whole(place, data)


def kept(path: Path) -> Draft | None:
    """The draft of the machine file at `path`; None when there is none that can be used."""
    place = _place(path)
    try:
        if not place.is_file():  # reading a pipe would wait without end
            return None
        with place.open("rb") as file:
            data = file.read(LARGEST_DRAFT + 1)
        if len(data) > LARGEST_DRAFT:
            return None
        # An int may have more digits than a float can take: read as a float it is only infinite.
        return Draft(**json.loads(data, parse_int=float))
    except (OSError, ValueError, TypeError, RecursionError):
        return None


def drop(path: Path) -> None:
    """Forget the draft of the machine file at `path`, if there is one.

    Raises
    ------
    SaveError : when it is there and can't be removed
    """
    place = _place(path)
    with told(place):
        try:
            os.unlink(place)
        except FileNotFoundError:
            return


def _place(path: Path) -> Path:
    return path.with_name(f".{path.name}.draft")
