"""Findings over all allowed logs: search, then the finding at the worst one."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from splitcalc.equations import Line, recording
from splitcalc.findings import Check, Finding, evaluated, worst_place
from splitcalc.logs.limits import bounds_met
from splitcalc.logs.search import Spot, Steps, finish, search
from splitcalc.machine.numbers import SETS, Numbers
from splitcalc.thrust.frame import Log, frame_of, stations
from splitcalc.thrust.statics import Actions, actions

NO_LOG = (
    "no log of this set can be held: every thrust that meets both tools in their ranges is steeper "
    "than the grip allows"
)
PER_STRETCH = 12  # stations of a finding: some 250 on a plain beam


def acting_on(numbers: Numbers, log: Log) -> Actions:
    """The actions of one log at the stations of a finding."""
    frame = frame_of(numbers, log)
    return actions(frame, stations(numbers, frame, PER_STRETCH))


def find(
    check: Check, numbers: Numbers, acting: Actions, units: Any = "si", **about: str
) -> Finding:
    """The finding of one check under the actions of one log: its worst place.

    Parameters
    ----------
    about : `set` (default "extreme"), `state`, `bound`: what is known of the log
    """
    set_name = about.get("set", "extreme")
    does, why = check.applies(numbers)
    if not does:
        return Finding(check, set_name, applies=False, why=why, units=units)
    try:
        demand, capacity = evaluated(check, numbers, acting)
        _, index = worst_place(demand / capacity)
    except Exception as error:  # a person's own check may raise anything; the others go on
        return Finding(check, set_name, given=False, why=_why(error), units=units)
    station, point = np.unravel_index(int(index), demand.shape)
    place, log = float(acting.x[station, 0]), acting.frame.log
    alone = numbers.at_point(int(point)) if demand.shape[-1] > 1 else numbers

    def replay() -> list[Line]:
        with recording() as lines:
            check.evaluate(alone, actions(frame_of(numbers, log), place))
        return [*numbers.lines, *lines]

    return Finding(
        check,
        set_name,
        demand=float(demand[station, point]),
        capacity=float(capacity[station, point]),
        required_factor=float(numbers.required[check.limit][set_name]),
        x=place,
        place=check.place(numbers, int(point)),
        log={
            "state": about.get("state", "first bite"),
            "distance_m": float(log.l_AB),
            "a_y_m": float(log.a_y),
            "a_z_m": float(log.a_z),
            "b_y_m": float(log.b_y),
            "b_z_m": float(log.b_z),
            "force_N": float(numbers.F),
            "bound": about.get("bound", ""),
        },
        replay=replay,
        units=units,
    )


def _why(error: Exception) -> str:
    return f"{error}" if isinstance(error, FloatingPointError) else f"{error!r}"


def in_set(finding: Finding, numbers: Numbers, set_name: str) -> Finding:
    """The same finding judged as of another set: the stress stays, the required factor changes."""
    if finding.demand is None:
        return replace(finding, set=set_name)
    required = float(numbers.required[finding.check.limit][set_name])
    return replace(finding, set=set_name, required_factor=required)


def findings(checks: Sequence[Check], numbers: Numbers, units: Any = "si") -> list[Finding]:
    """Every check's finding for each set, at its worst allowed log."""
    return finish(findings_in_steps(checks, numbers, units))


def findings_in_steps(
    checks: Sequence[Check], numbers: Numbers, units: Any = "si"
) -> Steps[list[Finding]]:
    """The same, pausing every few milliseconds."""
    out = []
    for check in checks:
        does, why = check.applies(numbers)
        best: dict[str, Spot] = {}
        if does:
            why = NO_LOG
            try:
                best = yield from search(check, numbers)
            except Exception as error:  # likewise
                why = _why(error)
        for set_name in SETS:
            spot = best.get(set_name)
            if spot is None:
                nothing = Finding(check, set_name, does, given=not does, why=why, units=units)
                out.append(nothing)
                continue
            yield
            bound = bounds_met(numbers, set_name, spot.state, spot.log)
            about = {"set": set_name, "state": spot.state, "bound": bound}
            out.append(find(check, numbers, acting_on(numbers, spot.log), units, **about))
    return out


def governing(results: Sequence[Finding]) -> Finding | None:
    """The finding with the largest utilisation; one that can't be given goes first."""
    open_ones = [f for f in results if f.applies and not f.given]
    if open_ones:
        return open_ones[0]
    given = [f for f in results if f.applies]
    return max(given, key=lambda f: f.utilisation or 0.0, default=None)
