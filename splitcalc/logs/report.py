"""Findings over all allowed logs: search, then the finding at the worst one."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import product
from typing import Any

import numpy as np

from splitcalc.equations import Line, recording
from splitcalc.findings import Check, Finding, demand_over_capacity, worst_place
from splitcalc.logs.allowed import bounds_met
from splitcalc.logs.search import log_of, search
from splitcalc.machine.numbers import SETS, Numbers
from splitcalc.thrust.frame import Log, frame_of, stations
from splitcalc.thrust.statics import actions

PER_STRETCH = 12  # stations of a finding: some 250 on a plain beam


def find(check: Check, numbers: Numbers, log: Log, units: Any = "si", **about: str) -> Finding:
    """The finding of one check for one log: its worst place, ready to be replayed with scalars.

    Parameters
    ----------
    about : `set` (default "extreme"), `state`, `bound`: what is known of the log
    """
    set_name = about.get("set", "extreme")
    does, why = check.applies(numbers)
    if not does:
        return Finding(check, set_name, applies=False, why=why, units=units)
    frame = frame_of(numbers, log)
    x = stations(numbers, frame, PER_STRETCH)
    values = demand_over_capacity(check, numbers, actions(frame, x))
    station, point = np.unravel_index(int(worst_place(values)[1]), values.shape[-2:])
    place = float(x[station, 0])
    alone = numbers.at_point(int(point)) if values.shape[-1] > 1 else numbers

    def once() -> tuple[Any, Any]:
        return check.evaluate(alone, actions(frame_of(numbers, log), place))

    def replay() -> list[Line]:
        with recording() as lines:
            once()
        return lines

    demand, capacity = once()
    return Finding(
        check,
        set_name,
        demand=float(demand),
        capacity=float(capacity),
        required_factor=float(numbers.yield_factors[set_name]),
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


def findings(checks: Sequence[Check], numbers: Numbers, units: Any = "si") -> list[Finding]:
    """Every check's finding for each set, at its worst allowed log."""
    active = [check for check in checks if check.applies(numbers)[0]]
    best = search(active, numbers)
    out = []
    for check, set_name in product(checks, SETS):
        spot = best.get((check.id, set_name))
        if spot is None:
            why = check.applies(numbers)[1]
            out.append(Finding(check, set_name, applies=False, why=why, units=units))
            continue
        log = log_of(numbers, spot)
        bound = bounds_met(numbers, set_name, spot.state, log)
        about = {"set": set_name, "state": spot.state, "bound": bound}
        out.append(find(check, numbers, log, units, **about))
    return out


def governing(results: Sequence[Finding]) -> Finding | None:
    """The finding with the largest utilisation; one that can't be given goes first."""
    open_ones = [f for f in results if f.applies and not f.given]
    if open_ones:
        return open_ones[0]
    given = [f for f in results if f.applies]
    return max(given, key=lambda f: f.utilisation or 0.0, default=None)
