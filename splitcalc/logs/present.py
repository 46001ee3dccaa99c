"""One log that a person describes: its stresses along the beam and its findings."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from splitcalc.findings import Check, Finding
from splitcalc.logs.allowed import BURIED, OFFSETS, SHARE, STATES, allowed, distances
from splitcalc.logs.report import acting_on, find, in_set
from splitcalc.machine.numbers import SETS, Numbers
from splitcalc.shapes.section import Section
from splitcalc.stress.normal_and_shear import signed_stresses
from splitcalc.stress.web import web_stress
from splitcalc.thrust.frame import Log

CORNERS = ("top left", "top right", "bottom left", "bottom right")
OUTSIDE = "outside"


@dataclass(frozen=True)
class Present:
    """Arrays over the stations. [m, Pa]

    corners : normal stress with its sign at the four outermost fibres; web : equivalent stress at
    the top of the web, None for a closed section; set : narrowest set that holds the log
    """

    log: Log
    x: np.ndarray
    corners: dict[str, np.ndarray]
    web: np.ndarray | None
    set: str
    state: str
    findings: tuple[Finding, ...]


def log_by_ram(*, length: float, up: float, tan_up: float, tan_left: float) -> Log:
    """A log by its contact on the moving tool, `up` from the axis, and the slopes of the thrust.

    Sideways it stays on the middle of the fixed tool: an edge holds where it bites. [m]
    """
    return Log(length, -length * tan_left, up, 0.0, up + length * tan_up)


def narrowest_set(numbers: Numbers, log: Log) -> tuple[str, str]:
    """(set, state) that the log belongs to; (`OUTSIDE`, "first bite") when none allows it."""
    at = np.array(float(log.l_AB))
    for set_name in SETS:
        for state in STATES:
            low, high = distances(numbers, state)
            bounds = allowed(numbers, SHARE[set_name], state == BURIED, at)
            slope = np.hypot(log.b_y - log.a_y, log.b_z - log.a_z) / log.l_AB
            inside = low <= log.l_AB <= high and slope <= bounds.slope * (1 + 1e-9)
            for name, (least, most) in zip(OFFSETS, bounds.ends, strict=True):
                inside = inside and least - 1e-9 <= getattr(log, name) <= most + 1e-9
            if inside:
                return set_name, state
    return OUTSIDE, STATES[0]


def corner_points(section: Section) -> list[int]:
    """The stress points at the four outermost fibres, in the order of `CORNERS`."""
    y, z = section.points.y, section.points.z
    edges = (z > section.z_t - 1e-9, z < section.z_b + 1e-9)
    return [int(np.where(edge, side * y, -np.inf).argmax()) for edge in edges for side in (1, -1)]


def present(checks: Sequence[Check], numbers: Numbers, log: Log, units: Any = "si") -> Present:
    """Everything the picture of one log needs; one finding a check and set that holds the log.

    A log that no set allows is judged by the extreme set's factors: `set` tells.
    """
    acting = acting_on(numbers, log)
    sigma = signed_stresses(numbers, acting)
    set_name, state = narrowest_set(numbers, log)
    sets = SETS if set_name == "usual" else SETS[1:]
    found = [find(check, numbers, acting, units, set=sets[0], state=state) for check in checks]
    return Present(
        log,
        acting.x[:, 0],
        {
            name: sigma[:, point]
            for name, point in zip(CORNERS, corner_points(numbers.section), strict=True)
        },
        web_stress(numbers, acting)[:, 0] if numbers.section.open else None,
        set_name,
        state,
        tuple(in_set(finding, numbers, name) for finding in found for name in sets),
    )
