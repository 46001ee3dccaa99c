"""The controls of one log: its state, where it touches, how it leans, how long it is."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

from ipywidgets import Button, VBox

from splitcalc.findings import Finding
from splitcalc.inputs import Entry, Fact
from splitcalc.logs.allowed import FIRST_BITE, OFFSETS, STATES
from splitcalc.logs.limits import sideways_reach
from splitcalc.logs.present import FIXED, MOVING, log_through
from splitcalc.machine.numbers import Numbers
from splitcalc.sheet.controls import Number, buttons_of
from splitcalc.thrust.frame import Log
from splitcalc.units import Dimension, show

PAST = 1.25  # the sliders go this far past the limits, so that the limits can be seen
STEEPEST = math.radians(60)  # what may be typed
FAR = 1.0  # m, likewise
NEAREST, FARTHEST = 1e-4, 10.0  # m, likewise
PIVOTS = {"fixed tool": FIXED, "ram": MOVING}

Values = Mapping[str, Any]  # by the names in `straight`: SI values and words


def straight(numbers: Numbers) -> dict[str, Any]:
    """The longest log, square and on the axis: where a page begins."""
    return {
        "state": FIRST_BITE, "pivot": FIXED, "skew_up": 0.0, "skew_left": 0.0, "contact_up": 0.0,
        "contact_left": 0.0, "distance": float(numbers.longest),
    }  # fmt: skip


def log_of(values: Values) -> Log:
    """The log that values describe."""
    return log_through(
        pivot=values["pivot"],
        distance=values["distance"],
        left=values["contact_left"],
        up=values["contact_up"],
        tan_left=math.tan(values["skew_left"]),
        tan_up=math.tan(values["skew_up"]),
    )


def values_of(log: Log, state: str, pivot: str) -> dict[str, Any]:
    """The values that describe a log."""
    left, up = (log.b_y, log.b_z) if pivot == FIXED else (log.a_y, log.a_z)
    return {
        "state": state,
        "pivot": pivot,
        "skew_up": math.atan((log.b_z - log.a_z) / log.l_AB),
        "skew_left": math.atan((log.b_y - log.a_y) / log.l_AB),
        "contact_up": float(up),
        "contact_left": float(left),
        "distance": float(log.l_AB),
    }


def values_of_finding(finding: Finding, pivot: str) -> dict[str, Any]:
    """The values that describe the log of a finding."""
    log = finding.log or {}
    offsets = (log[f"{name}_m"] for name in OFFSETS)
    return values_of(Log(log["distance_m"], *offsets), log["state"], pivot)


class LogControls:
    """`controls` by name, `box` for the page.

    Turning the pivot over keeps the log: the contact offsets become those of the other tool.
    """

    def __init__(self, numbers: Numbers, units: Any, values: Values) -> None:
        self._units = units
        steep = math.atan(PAST * numbers.grip)
        side = PAST * sideways_reach(numbers)
        low = PAST * min(numbers.moving.low, numbers.fixed.low, 0.0)
        high = PAST * max(numbers.moving.high, numbers.fixed.high, 0.0)
        angle, length = Dimension.ANGLE, Dimension.LENGTH
        rows = {
            "skew_up": (
                "skew up", Fact("slope of the thrust, up towards the fixed tool", angle,
                                -STEEPEST, STEEPEST), (-steep, steep),
            ),
            "skew_left": (
                "skew left", Fact("slope of the thrust, to the left towards the fixed tool", angle,
                                  -STEEPEST, STEEPEST), (-steep, steep),
            ),
            "contact_up": (
                "contact up", Fact("contact above the cylinder's axis", length, -FAR, FAR),
                (low, high),
            ),
            "contact_left": (
                "contact left", Fact("contact left of the cylinder's axis", length, -FAR, FAR),
                (-side, side),
            ),
            "distance": (
                "log length, gap", Fact("distance of the two contacts along the beam", length,
                                        NEAREST, FARTHEST),
                (numbers.gap, 1.05 * numbers.longest),
            ),
        }  # fmt: skip
        self.numbers = {
            name: Number(label, fact, self._entry(fact, values[name]), ends, units)
            for name, (label, fact, ends) in rows.items()
        }
        state = buttons_of(
            "log is", STATES, values["state"],
            "first bite: the edge stands on the log's end; buried: the wedge is inside it",
        )  # fmt: skip
        pivot = buttons_of(
            "turn about", tuple(PIVOTS.items()), values["pivot"],
            "which contact stays when the skew changes",
        )  # fmt: skip
        self.controls: dict[str, Any] = {"state": state, "pivot": pivot, **self.numbers}
        pivot.observe(self._turned_over, "value")
        mirror = Button(description="mirror left and right", tooltip="the same log, mirrored")
        mirror.on_click(lambda _: self._mirror())
        self.box = VBox([state, pivot, *(n.box for n in self.numbers.values()), mirror])

    def _entry(self, fact: Fact, si: float) -> Entry:
        assert fact.dimension is not None
        return Entry(float(si), show(si, fact.dimension, self._units))

    def values(self) -> dict[str, Any]:
        return plain({name: control.value for name, control in self.controls.items()})

    def take(self, values: Values) -> None:
        """Sets every control."""
        for name in ("pivot", "state"):
            self.controls[name].value = values[name]
        for name, control in self.numbers.items():
            control.value = self._entry(control.fact, values[name])

    def _turned_over(self, change: Any) -> None:
        values = self.values()
        turned = values_of(log_of({**values, "pivot": change["old"]}), "", change["new"])
        for name in ("contact_up", "contact_left"):
            self.numbers[name].value = self._entry(self.numbers[name].fact, turned[name])

    def _mirror(self) -> None:
        for name in ("skew_left", "contact_left"):
            control = self.numbers[name]
            control.value = self._entry(control.fact, -control.value.si + 0.0)


def plain(values: Values) -> dict[str, Any]:
    """The values of controls as SI numbers and words."""
    return {name: v.si if isinstance(v, Entry) else v for name, v in values.items()}
