"""The inputs of a machine as lines of text."""

from __future__ import annotations

import textwrap
from itertools import zip_longest

from splitcalc.inputs import Entry
from splitcalc.machine.file import Machine
from splitcalc.machine.fit import unused

WIDTH = 100


def inputs_table(machine: Machine) -> list[str]:
    """Every input that says something about this machine; a default has a star. 100 columns."""
    idle = unused(machine.document)
    lines: list[str] = []
    section = machine.tables["beam"]["section"]
    named = isinstance(section, str)
    for key, fact, value, given in machine.inputs():
        if key in idle or (not given and value in ("", None)):
            continue
        if named and key.startswith("beam.section."):
            given = True  # by the section's name
            if section:
                lines.append(f"{'beam.section':<34} {section:<20} section of the tables, with:")
                section = ""
        text = value.text if isinstance(value, Entry) else str(value)
        told = f"{text}{'' if given else ' *'}"
        if fact.dimension is None and not fact.options:  # free text, words of its own
            rows = textwrap.wrap(told, WIDTH - 35)
        else:
            rows = [f"{told:<20} {row}" for row in textwrap.wrap(fact.words, WIDTH - 56)[:1]]
            rows += [f"{'':<20} {row}" for row in textwrap.wrap(fact.words, WIDTH - 56)[1:]]
        lines += [f"{name:<34} {row}" for name, row in zip_longest([key], rows, fillvalue="")]
    return [*lines, "", "* default, not typed"]
