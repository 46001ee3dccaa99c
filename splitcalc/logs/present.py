"""One log that a person describes: its stresses along the beam and its findings."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from splitcalc.findings import Check, Finding
from splitcalc.logs.allowed import FIRST_BITE
from splitcalc.logs.limits import OUTSIDE, narrowest_set, past_limits
from splitcalc.logs.report import acting_on, find, governing, in_set
from splitcalc.machine.numbers import SETS, Numbers
from splitcalc.shapes.section import Section
from splitcalc.stress.normal_and_shear import equivalent_stress, signed_stresses
from splitcalc.stress.web import web_stress
from splitcalc.thrust.frame import Log
from splitcalc.thrust.statics import Actions

CORNERS = ("top left", "top right", "bottom left", "bottom right")
MOVING, FIXED = TOOLS = ("moving tool", "fixed tool")


@dataclass(frozen=True, eq=False)
class Present:
    """One log on one machine. Arrays over the stations `x`. [m, Pa]

    sigma : normal stress with its sign at all stress points, shape (stations, points); web :
    equivalent stress at the top of the web, None for a closed section; checked : for a closed
    section the largest equivalent stress of all points, its distortion allowed for; set :
    narrowest set that holds the log, `past` says in words why none does; findings : one a check
    and set that holds it
    """

    numbers: Numbers
    log: Log
    state: str
    acting: Actions
    sigma: np.ndarray
    web: np.ndarray | None
    checked: np.ndarray | None
    set: str
    past: tuple[str, ...]
    findings: tuple[Finding, ...]

    @property
    def x(self) -> np.ndarray:
        return self.acting.x[:, 0]

    @property
    def corners(self) -> dict[str, np.ndarray]:
        """Normal stress at the four outermost fibres. [Pa]"""
        points = corner_points(self.numbers.section)
        return {name: self.sigma[:, k] for name, k in zip(CORNERS, points, strict=True)}

    @property
    def worst_x(self) -> float | None:
        """Where the governing check is worst [m]; None when that can't be given."""
        governs = governing(self.findings)
        return None if governs is None else governs.x


def log_through(
    *, pivot: str, distance: float, left: float, up: float, tan_left: float, tan_up: float
) -> Log:
    """A log by its contact on one of the two `TOOLS` and the slopes of its thrust.

    Parameters
    ----------
    pivot : the tool that `left` and `up` are about, offsets from the cylinder's axis [m]
    distance : of the contact points along x [m]
    tan_left, tan_up : slopes, positive when further left or higher at the fixed tool
    """
    across, rise = distance * tan_left, distance * tan_up
    if pivot == FIXED:
        return Log(distance, left - across, up - rise, left, up)
    return Log(distance, left, up, left + across, up + rise)


def corner_points(section: Section) -> list[int]:
    """The stress points at the four outermost fibres, in the order of `CORNERS`."""
    y, z = section.points.y, section.points.z
    edges = (z > section.z_t - 1e-9, z < section.z_b + 1e-9)
    return [int(np.where(edge, side * y, -np.inf).argmax()) for edge in edges for side in (1, -1)]


def present(
    checks: Sequence[Check],
    numbers: Numbers,
    log: Log,
    units: Any = "si",
    state: str = FIRST_BITE,
) -> Present:
    """Everything the picture of one log needs.

    A log that no set allows is judged by the extreme set's factors: `set` and `past` tell.
    """
    acting = acting_on(numbers, log)
    set_name = narrowest_set(numbers, log, state)
    sets = SETS if set_name == SETS[0] else SETS[1:]
    found = [find(check, numbers, acting, units, set=sets[0], state=state) for check in checks]
    return Present(
        numbers,
        log,
        state,
        acting,
        signed_stresses(numbers, acting),
        web_stress(numbers, acting)[:, 0] if numbers.section.open else None,
        None if numbers.section.open else equivalent_stress(numbers, acting).max(axis=-1),
        set_name,
        tuple(past_limits(numbers, log, state, units)) if set_name == OUTSIDE else (),
        tuple(in_set(finding, numbers, name) for finding in found for name in sets),
    )
