"""The machine file: TOML, read strictly, never executed.

`load` gives a `Machine` or raises one `InputError` with every problem, each with its key, the text
found, what is allowed, and the nearest known key for an unknown one.
"""

from __future__ import annotations

import copy
import functools
import hashlib
import re
import tomllib
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

from splitcalc.inputs import (
    REQUIRED,
    Entry,
    Fact,
    InputError,
    Problem,
    converter,
    found,
    read,
    walk,
)
from splitcalc.machine.document import Document
from splitcalc.machine.fit import misfits, unused
from splitcalc.machine.numbers import Numbers, Overrides, numbers_of
from splitcalc.shapes.families import FAMILIES, Family
from splitcalc.shapes.tables import all_sections, look_up

LARGEST_FILE = 1_000_000  # bytes: a machine file is a page or two


@dataclass(frozen=True)
class Machine:
    """A machine as it was typed.

    document : all inputs, defaults filled in
    given : dotted keys that the person typed
    digest : SHA-256 of the file's bytes, for the foot of a page
    tables : what the file says, parsed and not yet read
    path : of the file, where it was read from one
    """

    document: Document
    given: frozenset[str]
    digest: str
    tables: Mapping[str, Any] = field(repr=False, compare=False)
    path: Path | None = field(default=None, compare=False)

    def changed(self, changes: Mapping[str, str]) -> Machine:
        """The machine with other texts at some dotted keys, such as `"cylinder.bore": "5 in"`.

        The file is left alone, and so is `digest`: it tells which file the changes are meant for.

        Raises
        ------
        InputError : when the result can't be used, with all problems
        """
        tables = copy.deepcopy(dict(self.tables))
        for key, text in changes.items():
            table, name = holder(tables, key, dict)
            table[name] = text
        return replace(_machine(tables, self.digest), path=self.path)

    @property
    def title(self) -> str:
        return self.document.job.title

    @property
    def units(self) -> Any:
        """The person's units: "si" or "us"."""
        return self.document.basis.units

    @property
    def section_name(self) -> str:
        """The table's name of the section, or its family."""
        section = self.document.beam.section
        named = (name for name, row in all_sections().items() if row == section)
        return next(named, section.SHAPE)

    def numbers(self, overrides: Overrides | None = None) -> Numbers:
        """What the core gets; `overrides` maps dotted keys to SI values or sample arrays."""
        return numbers_of(self.document, overrides)

    def inputs(self) -> Iterator[tuple[str, Fact, Any, bool]]:
        """(key, fact, value, typed by the person) of every input."""
        for key, fact, value in walk(self.document):
            yield key, fact, value, self._is_given(key)

    def _is_given(self, key: str) -> bool:
        parts = key.split(".")
        return any(".".join(parts[:n]) in self.given for n in range(1, len(parts) + 1))

    def assumptions(self) -> list[str]:
        """Every default that was taken and means something here, with its reason."""
        idle = unused(self.document)
        return [
            f"{fact.words}: {_taken(fact, value)} [{key}]"
            for key, fact, value, given in self.inputs()
            if not given and fact.reason and fact.default is not REQUIRED and key not in idle
        ]


def _taken(fact: Fact, value: Any) -> str:
    if value is None:
        return fact.reason
    return f"{value.text if isinstance(value, Entry) else value} ({fact.reason})"


def _section(value: Any, _: Any) -> Family:
    """A section by its name in the tables, or a table with its shape and dimensions."""
    if isinstance(value, str):
        try:
            return look_up(value)[1]
        except KeyError as error:
            near = f"; near: {error.args[0]}" if error.args[0] else ""
            raise ValueError(
                f'found "{value}", which is not in the tables{near}. Or give a table: '
                f"shape = one of {', '.join(FAMILIES)}, and its dimensions"
            ) from None
    if not isinstance(value, Mapping):
        raise ValueError(f"found {found(value)}; wanted a section's name or a table with a shape")
    shape = value.get("shape", "")
    if shape not in FAMILIES:
        raise ValueError(f"shape = {found(shape)}; allowed: {', '.join(FAMILIES)}")
    rest = {key: part for key, part in value.items() if key != "shape"}
    return converter().structure(rest, FAMILIES[shape])


def _typed(data: Mapping[str, Any], prefix: str = "") -> Iterator[str]:
    for key, value in data.items():
        if isinstance(value, Mapping) and f"{prefix}{key}" != "beam.section":
            yield from _typed(value, f"{prefix}{key}.")
        elif isinstance(value, list):
            for number, part in enumerate(value, 1):
                if isinstance(part, Mapping):
                    yield from _typed(part, f"{prefix}{key}[{number}].")
        else:
            yield f"{prefix}{key}"


def parse_machine(data: bytes) -> Machine:
    """A machine from the bytes of its file.

    Raises
    ------
    InputError : with all problems
    """
    if len(data) > LARGEST_FILE:
        raise InputError([Problem("file", f"{len(data)} bytes; at most {LARGEST_FILE} are read")])
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        raise InputError(
            [Problem("file", f"line {line} is not UTF-8 text; save the file as UTF-8")]
        ) from None
    try:
        tables = tomllib.loads(text.replace("\r\n", "\n"))
    except (ValueError, RecursionError) as error:  # ValueError: also a number without end
        raise InputError([Problem("file", f"not TOML: {error}")]) from None
    return _machine(tables, hashlib.sha256(data).hexdigest())


def _machine(tables: Mapping[str, Any], digest: str) -> Machine:
    _teach_sections()
    document = read(Document, tables)
    problems = misfits(document)
    if problems:
        raise InputError(problems)
    return Machine(document, frozenset(_typed(tables)), digest, tables)


@functools.cache
def _teach_sections() -> None:
    """Once: every registration makes the converter forget the readers that it has made."""
    converter().register_structure_hook(Family, _section)


def holder(tables: Any, key: str, make: Callable[[], Any]) -> tuple[Any, str]:
    """The table that holds a dotted key, and the last name; a missing table is made.

    Raises
    ------
    KeyError : when the key leads through something that is not there or no table
    """
    *path, name = key.split(".")
    for step in path:
        part = re.fullmatch(r"(\w+)\[(\d+)\]", step)
        if part is None:
            if step not in tables:
                tables[step] = make()
            tables = tables[step]
        else:
            rows, number = tables.get(part[1], ()), int(part[2])
            if not isinstance(rows, list):
                rows = ()
            if not 1 <= number <= len(rows):
                raise KeyError(f"{key}: there are {len(rows)} tables [[{part[1]}]]")
            tables = rows[number - 1]
        if not isinstance(tables, Mapping):
            raise KeyError(f"{key}: {step} is no table")
    return tables, name


def load(path: str | Path) -> Machine:
    """Read a machine file.

    Raises
    ------
    InputError : when it can't be read or used, with all problems
    """
    try:
        with Path(path).open("rb") as file:
            data = file.read(LARGEST_FILE + 1)
    except OSError as error:
        raise InputError([Problem("file", f"{path}: {error.strerror}")]) from None
    return replace(parse_machine(data), path=Path(path))
