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
from typing import NamedTuple

import numpy as np

from splitcalc.machine.numbers import Contact, Numbers
from splitcalc.thrust.frame import Array, Log

FIRST_BITE, BURIED = STATES = ("first bite", "buried")
# What the sets of logs take for granted; printed with every calculation.
ASSUMPTIONS = (
    "the log carries force along the line between its two contacts alone; sled friction, which "
    "only lowers the thrust, is left out",
    "usual logs: contacts within half of each range, slope of the thrust within half of the grip; "
    "extreme logs: the whole of both",
    "beside a buried wedge the line of thrust may pass by t/2 + f_90·h·c²/(4·F) to each side, c "
    "the buried length of the longest log, and over the wedge's full height",
    "on the push plate a contact keeps 25 mm and F/(2·width·end grain strength) from every edge",
    "on a raked edge the contact is taken at edge_x at every height",
    "an upright machine has the same statics; own weight is left out (under 2 % of the force)",
)
OFFSETS = ("a_y", "a_z", "b_y", "b_z")
SHARE = {"usual": 0.5, "extreme": 1.0}  # of each contact range and of the grip

BOX = tuple(product((0, 1), repeat=4))  # low or high of a_y, a_z, b_y, b_z
CORNERS = tuple(product((0, 1), repeat=2))  # low or high of a_y, a_z


class Range(NamedTuple):
    """Bounds at some distances: low and high of each offset in the order of `OFFSETS`, shape
    (4, 2) + distances [m]; the limit of the slope; the distances themselves [m]."""

    ends: np.ndarray
    slope: np.ndarray
    distance: np.ndarray


def distances(numbers: Numbers, state: str) -> tuple[float, float]:
    """Least and largest distance of the contact points. [m]"""
    least = numbers.gap if state == BURIED else numbers.shortest
    return float(least), float(numbers.longest)


def allowed(numbers: Numbers, share: Array, buried: Array, distance: np.ndarray) -> Range:
    """Bounds of the contact offsets at each distance.

    Parameters
    ----------
    share : of each contact range and of the grip, see `SHARE`; one for all or one a distance
    buried : whether the log is buried, else it is at first bite; likewise
    """
    depth = buried * (numbers.longest - distance)
    whole = numbers.wedge
    aside = numbers.f_90 * (whole.high - whole.low) * depth**2 / (4 * numbers.F)
    wedge = Contact(whole.half_width + aside, whole.low, whole.high)
    ends = np.empty((4, 2, *distance.shape))
    for k, contact, is_wedge in (
        (0, numbers.moving, numbers.wedge_moves),
        (2, numbers.fixed, not numbers.wedge_moves),
    ):
        inside = buried & np.bool_(is_wedge)
        half_width, low, high = (
            np.where(inside, getattr(wedge, name), getattr(contact, name))
            for name in ("half_width", "low", "high")
        )
        middle, half = (low + high) / 2, share * (high - low) / 2
        ends[k, 0], ends[k, 1] = -share * half_width, share * half_width
        ends[k + 1, 0], ends[k + 1, 1] = middle - half, middle + half
    return Range(ends, share * numbers.grip + 0 * distance, distance)


def holds_a_log(bounds: Range) -> np.ndarray:
    """Whether any log is allowed at each distance: the ranges are near enough for the slope."""
    a, b = bounds.ends[:2], bounds.ends[2:]
    apart = np.maximum(np.maximum(b[:, 0] - a[:, 1], a[:, 0] - b[:, 1]), 0.0)
    return np.asarray(np.hypot(*apart) <= bounds.slope * bounds.distance)


def box_corners(bounds: Range) -> np.ndarray:
    """Offsets of the box's corners, shape (4,) + distances + (16,). [m]"""
    return np.moveaxis(bounds.ends[np.arange(4)[:, None], np.transpose(BOX)], 1, -1)


def critical_distances(bounds: Range) -> np.ndarray:
    """Distances between those of `bounds` at which a corner of the box comes onto the circle. [m]

    The worst log likes to stand there: before it the corner is too steep, after it the slope
    falls. By straight lines between the distances given.
    """
    box = box_corners(bounds)
    radius = bounds.slope * bounds.distance
    steep = np.hypot(box[2] - box[0], box[3] - box[1]) - radius[:, None]
    row, corner = np.nonzero((steep[:-1] > 0) != (steep[1:] > 0))
    before, after = steep[row, corner], steep[row + 1, corner]
    step = bounds.distance[row + 1] - bounds.distance[row]
    return np.asarray(np.unique(bounds.distance[row] + step * before / (before - after)))


def critical_turns(bounds: Range) -> np.ndarray:
    """The t at which a contact reaches a corner of its range, shape `distances + (16,)`.

    NaN where the circle doesn't get there.
    """
    a, b = bounds.ends[:2], bounds.ends[2:]
    # y or z, low or high of b, low or high of a
    gaps = (b[:, :, None] - a[:, None]) / (bounds.slope * bounds.distance)
    with np.errstate(invalid="ignore"):
        across, up = np.arccos(gaps[0]), np.arcsin(gaps[1])
    turns = np.concatenate([across, -across, up, np.pi - up])
    return np.moveaxis(turns.reshape(16, *bounds.distance.shape), 0, -1)


def candidates(bounds: Range, turns: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Offsets of every slot in the order of `OFFSETS`, and whether the log is allowed.

    Parameters
    ----------
    turns : t, shape `distances + (turns,)`

    Returns
    -------
    offsets : shape (4,) + distances + (16 + 4 * turns,); valid : the same without the 4
    """
    box = box_corners(bounds)
    radius = (bounds.slope * bounds.distance)[..., None]
    box_valid = np.hypot(box[2] - box[0], box[3] - box[1]) <= radius * (1 + 1e-12)
    step = radius * np.stack([np.cos(turns), np.sin(turns)])
    ends = bounds.ends[..., None]
    low = np.maximum(ends[:2, 0], ends[2:, 0] - step)
    high = np.minimum(ends[:2, 1], ends[2:, 1] - step)
    sides = np.stack([low, np.maximum(low, high)])
    reachable = np.all(low <= high + 1e-12, axis=0)
    wide = high - low > 1e-12  # a side that has shrunk to a point is tried once
    circle = np.empty((4, *turns.shape, len(CORNERS)))
    valid = np.empty((*turns.shape, len(CORNERS)), dtype=bool)
    for k, (i, j) in enumerate(CORNERS):
        circle[0, ..., k], circle[1, ..., k] = sides[i, 0], sides[j, 1]
        valid[..., k] = reachable & (wide[0] | (i == 0)) & (wide[1] | (j == 0))
    circle[2:] = circle[:2] + step[..., None]
    flat = (*bounds.distance.shape, -1)
    return (
        np.concatenate([box, circle.reshape(4, *flat)], axis=-1),
        np.concatenate([box_valid, valid.reshape(flat)], axis=-1),
    )


def turn_of(slot: int) -> int:
    """The number of a slot's turn; 0 for a corner of the box, which has none."""
    return max(slot - len(BOX), 0) // len(CORNERS)


def log_at(offsets: np.ndarray, distance: np.ndarray) -> Log:
    """Logs of shape `(distances, candidates, 1, 1)` for the core."""
    a_y, a_z, b_y, b_z = (part[..., None, None] for part in offsets)
    return Log(distance[..., None, None, None], a_y, a_z, b_y, b_z)
