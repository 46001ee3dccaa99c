"""What the page says, as HTML."""

from __future__ import annotations

import html
import re
from collections.abc import Mapping, Sequence
from typing import Any

from splitcalc.cautions import CAUTIONS, NOT_COVERED
from splitcalc.checks import NOT_YET
from splitcalc.draw.labels import Label
from splitcalc.findings import Finding
from splitcalc.logs.present import Present
from splitcalc.logs.words import sentence, this_log

SHORT = re.compile(r"(\S+ % over its limit|just over its limit|\d+ of \d+ findings fall short)")
SHIFTS = {"left": "0", "middle": "-50%", "right": "-100%"}


def verdicts(now: Present, worst: Sequence[Finding] | None, units: Any) -> str:
    """The sentence over the picture; None for `worst` while it is being searched."""
    all_logs = "being searched …" if worst is None else sentence(worst)
    return (
        f"<div><b>This log</b> {_red(this_log(now, units))} "
        f"<b>All allowed logs</b>: {_red(all_logs)} <b>Not yet checked</b>: "
        f"{len(NOT_YET)} kinds of failure, listed under the bars.</div>"
    )


def past_limits(now: Present) -> str:
    """Which limits the log is past; empty for an allowed one."""
    past = f"Not an allowed log, judged as an extreme one: {'; '.join(now.past)}."
    return f"<div>{html.escape(past)}</div>" if now.past else ""


def no_result(problems: Sequence[str]) -> str:
    text = "<br>".join(map(html.escape, problems))
    return f"<div><b class='splitcalc-error'>No result for these values.</b> {text}</div>"


def label(text: Label) -> str:
    """A text of the picture, laid over it."""
    return (
        f"<span style='left:{100 * text.x:.2f}%;top:{100 * text.y:.2f}%;color:{text.color};"
        f"transform:translate({SHIFTS[text.side]},-50%)'>{html.escape(text.text)}</span>"
    )


def told(changes: Mapping[str, str]) -> str:
    return "; ".join(f"{key} = {text}" for key, text in changes.items())


def foot(notes: Sequence[str]) -> str:
    noted = "".join(f"Note: {note}. " for note in notes)
    return f"{noted}{CAUTIONS} Not covered: {'; '.join(NOT_COVERED)}."


def _red(text: str) -> str:
    """What does not hold in red."""
    return SHORT.sub(r"<b class='splitcalc-error'>\1</b>", html.escape(text))
