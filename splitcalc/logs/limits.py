"""Where one log stands between the limits of what is allowed: inside, on a limit, past it."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np

from splitcalc.logs.allowed import BURIED, FIRST_BITE, OFFSETS, SHARE, allowed, distances
from splitcalc.machine.numbers import SETS, Numbers
from splitcalc.thrust.frame import Log
from splitcalc.units import Dimension, number, show

OUTSIDE = "outside"
NEAR = 2e-5  # of a metre, of a slope: rounding of a typed text is not a step past a limit
ROUNDING = 1e-9  # m
TOOLS = {"a": "moving tool", "b": "fixed tool"}
WAYS = {"y": ("right", "left"), "z": ("down", "up")}


def _places(numbers: Numbers, set_name: str, state: str, log: Log) -> Iterator[tuple[Any, ...]]:
    """(name, value, low, high) of slope, distance and the four offsets."""
    low, high = distances(numbers, state)
    at = np.array(min(max(float(log.l_AB), low), high))
    bounds = allowed(numbers, SHARE[set_name], state == BURIED, at)
    slope = float(np.hypot(log.b_y - log.a_y, log.b_z - log.a_z) / log.l_AB)
    yield "slope", slope, 0.0, float(bounds.slope)
    yield "distance", float(log.l_AB), low, high
    for name, ends in zip(OFFSETS, bounds.ends, strict=True):
        yield name, float(getattr(log, name)), float(ends[0]), float(ends[1])


def _outside(value: float, low: float, high: float) -> bool:
    return not low - NEAR <= value <= high + NEAR


def narrowest_set(numbers: Numbers, log: Log, state: str) -> str:
    """The set that a log in this state belongs to; `OUTSIDE` when none allows it."""
    for set_name in SETS:
        if not any(_outside(*rest) for _, *rest in _places(numbers, set_name, state, log)):
            return set_name
    return OUTSIDE


def past_limits(numbers: Numbers, log: Log, state: str, units: Any = "si") -> list[str]:
    """Every limit of the whole allowed set that a log is past, in words."""
    words = []
    off: dict[str, list[str]] = {}  # by tool
    for name, value, low, high in _places(numbers, SETS[-1], state, log):
        if not _outside(value, low, high):
            continue
        if name == "slope":
            told, limit = (number(v, Dimension.NUMBER, units, 3) for v in (value, high))
            words.append(f"slope {told} past the grip's {limit}")
            continue
        end = low if value < low else high
        told, by = (show(abs(v), Dimension.LENGTH, units, 3) for v in (end, value - end))
        if name == "distance":
            what = "log" if state == FIRST_BITE else "gap between the tools"
            kind = "shorter" if value < low else "longer"
            words.append(f"{what} {by} {kind} than the allowed {told}")
        else:
            way = WAYS[name[2]][value > end]
            off.setdefault(TOOLS[name[0]], []).append(f"{by} {way}")
    return words + [
        f"contact off the {tool}'s range by {', '.join(ways)}" for tool, ways in off.items()
    ]


def sled_reach(numbers: Numbers) -> tuple[float, float]:
    """Least and largest distance of the contacts at which the sled still stands on the beam. [m]

    Nearer, its front pad runs into the fixed tool's root weld; farther, the rear pad hangs over
    the beam's rear end.
    """
    half = numbers.l_p / 2
    nearest = numbers.x_B - numbers.front_pad + half - numbers.x_3
    farthest = numbers.x_B - numbers.rear_pad - half - numbers.x_start
    return max(float(nearest), 1e-6), float(farthest)


def sled_off(numbers: Numbers, distance: float, units: Any = "si") -> str:
    """Why the sled can't stand at a distance of the contacts, in words; empty when it can."""
    least, most = sled_reach(numbers)
    told = show(distance, Dimension.LENGTH, units)
    if distance < least - ROUNDING:
        limit = show(least, Dimension.LENGTH, units)
        return (
            f"with contact points {told} apart the front pad runs into the fixed tool's root "
            f"weld; allowed: at least {limit}"
        )
    if distance > most + ROUNDING:
        limit = show(most, Dimension.LENGTH, units)
        return (
            f"with contact points {told} apart the rear pad hangs over the beam's rear end; "
            f"allowed: up to {limit}"
        )
    return ""


def sideways_reach(numbers: Numbers) -> float:
    """How far off centre any allowed log touches a tool. [m]

    Beside a buried edge only the grip limits it: a contact can't be farther from the other one
    than the slope allows.
    """
    distance = np.linspace(numbers.gap, numbers.longest, 513)
    a, b = allowed(numbers, SHARE[SETS[-1]], True, distance).ends[[0, 2], 1]
    near, far = np.minimum(a, b), np.maximum(a, b)
    return float(np.minimum(far, near + numbers.grip * distance).max())


def bounds_met(numbers: Numbers, set_name: str, state: str, log: Log) -> str:
    """Which limits of its set a log sits on, in words."""
    near = 1e-6 * distances(numbers, state)[1]
    ends = {"y": ("right", "left"), "z": ("lower", "upper")}
    words = []
    for name, value, low, high in _places(numbers, set_name, state, log):
        if name == "slope":
            if value > high * (1 - 1e-6):
                words.append(f"slope at the limit {high:.3g}")
        elif name == "distance":
            for kind, limit in (("shortest", low), ("longest", high)):
                if abs(value - limit) < near:
                    words.append(f"{kind} distance")
        else:
            for end, limit in zip(ends[name[2]], (low, high), strict=True):
                if abs(value - limit) < near:
                    words.append(f"{end} end of the {TOOLS[name[0]]}'s range")
    return "; ".join(words) or "inside the set"
