"""Findings in words: the log, the one sentence, the table."""

from __future__ import annotations

import textwrap
from collections.abc import Mapping, Sequence
from typing import Any

from splitcalc.findings import Finding, margin_text
from splitcalc.logs.allowed import BURIED
from splitcalc.logs.present import Present
from splitcalc.logs.report import governing
from splitcalc.units import Dimension, number, show

WIDTH = 100
LEVEL = 0.005  # slopes below this read as straight


def lean(log: Mapping[str, Any]) -> str:
    """Which way the thrust leans, seen from the rear mount, and how steeply."""
    up = (log["b_z_m"] - log["a_z_m"]) / log["distance_m"]
    left = (log["b_y_m"] - log["a_y_m"]) / log["distance_m"]
    ways = [
        name
        for value, names in ((left, ("left", "right")), (up, ("up", "down")))
        for name in names[value < 0 :][:1]
        if abs(value) > LEVEL
    ]
    if not ways:
        return "straight"
    return f"leaning {' and '.join(ways)} at {(up**2 + left**2) ** 0.5:.2f}"


def log_words(log: Mapping[str, Any], units: Any) -> str:
    length = show(log["distance_m"], Dimension.LENGTH, units, 3)
    return f"{log['state']}, {'gap ' if log['state'] == BURIED else ''}{length}, {lean(log)}"


def article(word: str) -> str:
    return "an" if word[0] in "aeio" else "a"


def shortfall(utilisation: float) -> str:
    """How far a check holds or falls short, in words."""
    if utilisation == 0:
        return "has no demand"
    percent = abs(utilisation - 1) * 100
    if percent < 0.05:
        return f"is just {'over' if utilisation > 1 else 'under'} its limit"
    amount = f"{percent:.1f}" if percent < 10 else f"{percent:.0f}"
    return f"is {amount} % {'over' if utilisation > 1 else 'under'} its limit"


def this_log(now: Present, units: Any) -> str:
    """What governs under one log."""
    worst = governing(now.findings)
    if worst is None:
        return "nothing was checked."
    if worst.utilisation is None or worst.log is None or worst.x is None:
        return f"{worst.check.title} can't be given: {worst.why}."
    where = show(worst.x, Dimension.LENGTH, units, 3)
    return (
        f"({article(worst.set)} {worst.set} one: {log_words(worst.log, units)}): "
        f"{worst.check.title} governs and {shortfall(worst.utilisation)}, at x = {where}."
    )


def sentence(results: Sequence[Finding]) -> str:
    """What governs, where, in which set, under which log, by how much."""
    worst = governing(results)
    if worst is None:
        return "Nothing was checked."
    units = worst.units
    if not worst.given or worst.utilisation is None or worst.x is None or worst.log is None:
        return f"{worst.check.title} can't be given: {worst.why}."
    short = sum(not f.holds for f in results)
    count = sum(f.applies for f in results)
    verdict = f"{short} of {count} findings fall short" if short else "All that was checked holds"
    return (
        f"{verdict}: {worst.check.title} governs ({worst.set} logs) and "
        f"{shortfall(worst.utilisation)}, at x = {show(worst.x, Dimension.LENGTH, units, 3)}, "
        f"{worst.place}, for the log {log_words(worst.log, units)}."
    )


def wrapped(text: str) -> str:
    """Text broken between words, as wide as a notebook shows it."""
    return textwrap.fill(text, WIDTH, break_on_hyphens=False)


def still_open(not_yet: Sequence[str]) -> str:
    return f"Not yet checked: {'; '.join(not_yet)}."


def table(results: Sequence[Finding]) -> list[str]:
    """The findings as lines of text, at most 100 columns."""
    layout = "{:<22} {:<8} {:>10} {:>10} {:>6} {:>6} {:>9}  {}"
    lines = [
        layout.format("check", "logs", "demand", "limit", "factor", "util.", "margin", "where, log")
    ]
    for f in results:
        u = f.utilisation
        if u is None or f.log is None or f.x is None:
            word = "does not apply" if not f.applies else "NOT GIVEN"
            text = f"{f.check.title:<22} {f.set:<8} {word}: {f.why}"
            lines += textwrap.wrap(text, WIDTH, subsequent_indent=" " * 32)
            continue
        kind = f.check.dimension
        where = show(f.x, Dimension.LENGTH, f.units, 3)
        lines.append(
            layout.format(
                f.check.title,
                f.set,
                show(f.demand, kind, f.units, 3),
                show(f.capacity, kind, f.units, 3),
                number(f.required_factor, Dimension.NUMBER, f.units, 3),
                f"{u:.2f}",
                margin_text(u),
                f"{where}, {f.log['state']}",
            )
        )
    return lines
