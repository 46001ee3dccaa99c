"""Which logs are allowed: states, sets, and the candidates for the worst.

States: *first bite*, the fixed tool's edge on the log's end, so the contact distance is the log's
length; *buried*, the wedge inside a log, at any distance down to the smallest gap, where the line
of thrust may pass beside the edge. Sets: *usual*, contacts within half of each range and slope
within half of the grip; *extreme*, the whole allowed set.

At a given distance every linear action is affine in each contact offset separately, so a convex
measure peaks at a corner of the box of offsets. Where the limit of the slope cuts the box, on the
circle `b - a = grip l (cos t, sin t)` the actions are affine in `a`, whose range for that t is a
rectangle: its four corners, over t. So the candidates at each distance are finite but for t, and
only t and the distance are refined. `candidates` lays them out in slots that mean the same at
every distance: 16 corners of the box, then 4 corners for each t; the first t are the critical
ones, where the rectangle changes its sides.
"""

from __future__ import annotations

from itertools import product
from typing import Any, NamedTuple

import numpy as np

from splitcalc.machine.numbers import Contact, Numbers
from splitcalc.thrust.frame import Log

STATES = ("first bite", "buried")
SHARE = {"usual": 0.5, "extreme": 1.0}  # of each contact range and of the grip

CRITICAL = 16  # turns at which the rectangle on the circle changes its sides
BOX = tuple(product((0, 1), repeat=4))  # low or high of a_y, a_z, b_y, b_z
CORNERS = tuple(product((0, 1), repeat=2))  # low or high of a_y, a_z


class Range(NamedTuple):
    """Bounds of the offsets at some distances. [m]; arrays of one shape, and the slope's limit."""

    a_y: tuple[np.ndarray, np.ndarray]
    a_z: tuple[np.ndarray, np.ndarray]
    b_y: tuple[np.ndarray, np.ndarray]
    b_z: tuple[np.ndarray, np.ndarray]
    slope: np.ndarray


def distances(numbers: Numbers, state: str) -> tuple[float, float]:
    """Least and largest distance of the contact points. [m]"""
    least = numbers.shortest if state == "first bite" else numbers.gap
    return float(least), float(numbers.longest)


def allowed(numbers: Numbers, set_name: str, state: str, distance: np.ndarray) -> Range:
    """Bounds of the contact offsets at each distance."""
    moving, fixed = numbers.moving, numbers.fixed
    if state == "buried":
        buried = numbers.longest - distance
        aside = numbers.f_90 * numbers.h_wedge * buried**2 / (4 * numbers.F)
        wedge = Contact(numbers.t_wedge / 2 + aside, numbers.wedge.low, numbers.wedge.high)
        moving, fixed = (wedge, fixed) if numbers.wedge_moves else (moving, wedge)
    share = SHARE[set_name]

    def around(low: Any, high: Any) -> tuple[np.ndarray, np.ndarray]:
        middle, half = (low + high) / 2, share * (high - low) / 2
        full = np.zeros_like(distance)
        return full + middle - half, full + middle + half

    return Range(
        around(-moving.half_width, moving.half_width),
        around(moving.low, moving.high),
        around(-fixed.half_width, fixed.half_width),
        around(fixed.low, fixed.high),
        share * numbers.grip + np.zeros_like(distance),
    )


def critical_turns(bounds: Range, distance: np.ndarray) -> np.ndarray:
    """The t at which a contact reaches a corner of its range, shape `distances + (16,)`."""
    radius = bounds.slope * distance

    def gaps(a: Any, b: Any) -> list[np.ndarray]:
        return [(b[i] - a[j]) / radius for i, j in product((0, 1), repeat=2)]

    across = [np.arccos(np.clip(g, -1, 1)) for g in gaps(bounds.a_y, bounds.b_y)]
    up = [np.arcsin(np.clip(g, -1, 1)) for g in gaps(bounds.a_z, bounds.b_z)]
    turns = [t for c in across for t in (c, -c)] + [t for s in up for t in (s, np.pi - s)]
    return np.stack(turns, axis=-1)


def candidates(
    bounds: Range, distance: np.ndarray, turns: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """Offsets (a_y, a_z, b_y, b_z) of every slot, and whether the log is allowed.

    Parameters
    ----------
    turns : t, shape `distances + (turns,)`

    Returns
    -------
    offsets : shape (4,) + distances + (16 + 4 * turns,); valid : the same without the 4
    """
    box = np.stack(
        [
            np.stack([side[corner[k]] for corner in BOX], axis=-1)
            for k, side in enumerate((bounds.a_y, bounds.a_z, bounds.b_y, bounds.b_z))
        ]
    )
    radius = (bounds.slope * distance)[..., None]
    box_valid = np.hypot(box[2] - box[0], box[3] - box[1]) <= radius * (1 + 1e-12)
    step_y, step_z = radius * np.cos(turns), radius * np.sin(turns)
    sides, open_sides = [], []
    for a, b, step in (
        (bounds.a_y, bounds.b_y, step_y),
        (bounds.a_z, bounds.b_z, step_z),
    ):
        low = np.maximum(a[0][..., None], b[0][..., None] - step)
        high = np.minimum(a[1][..., None], b[1][..., None] - step)
        open_sides.append(low <= high + 1e-12)
        sides.append((low, np.maximum(low, high)))
    circle = [
        np.stack((sides[0][i], sides[1][j], sides[0][i] + step_y, sides[1][j] + step_z))
        for i, j in CORNERS
    ]
    offsets = np.concatenate(
        [box, np.stack(circle, axis=-1).reshape(4, *distance.shape, -1)], axis=-1
    )
    on_circle = np.repeat(open_sides[0] & open_sides[1], len(CORNERS), axis=-1)
    return offsets, np.concatenate([box_valid, on_circle], axis=-1)


def log_at(offsets: np.ndarray, distance: np.ndarray) -> Log:
    """Logs of shape `(distances, candidates, 1, 1)` for the core."""
    a_y, a_z, b_y, b_z = (part[..., None, None] for part in offsets)
    return Log(distance[..., None, None, None], a_y, a_z, b_y, b_z)


def bounds_met(numbers: Numbers, set_name: str, state: str, log: Log) -> str:
    """Which limits of its set a log sits on, in words."""
    low, high = distances(numbers, state)
    bounds = allowed(numbers, set_name, state, np.array(float(log.l_AB)))
    near = 1e-6 * high
    slope = np.hypot(log.b_y - log.a_y, log.b_z - log.a_z) / log.l_AB
    words = []
    if slope > bounds.slope * (1 - 1e-6):
        words.append(f"slope at the limit {float(bounds.slope):.3g}")
    for name, value in (("shortest", low), ("longest", high)):
        if abs(log.l_AB - value) < near:
            words.append(f"{name} distance")
    sides = {"y": ("right", "left"), "z": ("lower", "upper")}
    for tool, contact in (("moving", "a"), ("fixed", "b")):
        for axis, names in sides.items():
            value = getattr(log, f"{contact}_{axis}")
            for name, limit in zip(names, getattr(bounds, f"{contact}_{axis}"), strict=True):
                if abs(value - limit) < near:
                    words.append(f"{name} end of the {tool} tool's range")
    return "; ".join(words) or "inside the set"
