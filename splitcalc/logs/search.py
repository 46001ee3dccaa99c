"""The search for the worst log of each check: a coarse net of distances, then nearer and nearer.

At each distance the candidates of `allowed` hold the worst log exactly for a measure that is
convex in the actions, but for the turn on the circle of the steepest slope. So what is refined is
the distance, and that turn. While refining, only the stations and stress points that came near the
worst are evaluated; the finding looks at all of them again.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import product
from typing import Any, NamedTuple

import numpy as np

from splitcalc.findings import Check, demand_over_capacity, worst_place
from splitcalc.logs.allowed import (
    STATES,
    allowed,
    candidates,
    critical_turns,
    distances,
    joined,
    log_at,
    turn_of,
)
from splitcalc.machine.numbers import SETS, Numbers
from splitcalc.thrust.frame import Log, frame_of, stations
from splitcalc.thrust.statics import actions

DISTANCES = 7  # of the coarse net, per set and state
TURNS = 12  # evenly spaced turns of the coarse net, besides the critical ones
# refining: rounds, distances and turns to try in each, how much nearer the next one looks
ROUNDS, TRIES, SWINGS, FINER = 4, 9, 5, 4.0
NEAR = 0.9  # a station, a point or a state this near to the worst is looked at again


@dataclass(frozen=True)
class Spot:
    """A log and its value; `reach` and `swing` are what is still in doubt of distance and turn."""

    set: str
    state: str
    value: float
    log: Log
    turn: float
    reach: float
    swing: float


class Net(NamedTuple):
    """Distances to look at, with the turns to try at each of them besides the critical ones."""

    set: str
    state: str
    distance: np.ndarray
    turns: np.ndarray
    reach: float
    swing: float


class Kept(NamedTuple):
    """Indices of the stations and stress points to look at."""

    stations: np.ndarray
    points: np.ndarray


def values_at(
    check: Check, numbers: Numbers, logs: Log, per_stretch: int = 1, kept: Any = slice(None)
) -> np.ndarray:
    """Demand over capacity, shape `logs + (stations, points)`; `kept` picks stations."""
    frame = frame_of(numbers, logs)
    x = stations(numbers, frame, per_stretch)[..., kept, :]
    return demand_over_capacity(check, numbers, actions(frame, x))


def search(checks: Sequence[Check], numbers: Numbers) -> dict[tuple[str, str], Spot]:
    """The worst log for each (check id, set)."""
    return {(c.id, name): spot for c in checks for name, spot in _worst(c, numbers).items()}


def _worst(check: Check, numbers: Numbers) -> dict[str, Spot]:
    """The worst log of each set for one check."""
    spots, kept = _look(check, numbers, _coarse(numbers), slice(None))
    numbers = numbers.at_point(kept.points)
    for _ in range(ROUNDS):
        spots = [
            spot
            for spot in spots
            if spot.value >= NEAR * max(s.value for s in spots if s.set == spot.set)
        ]
        seen, _ = _look(check, numbers, [_nearer(numbers, s) for s in spots], kept.stations)
        spots = [
            replace(max(pair, key=_value), reach=old.reach / FINER, swing=old.swing / FINER)
            for old, pair in ((old, (new, old)) for old, new in zip(spots, seen, strict=True))
        ]
    return {spot.set: spot for spot in sorted(spots, key=_value)}


def _value(spot: Spot) -> float:
    return spot.value


def _coarse(numbers: Numbers) -> list[Net]:
    turns = np.linspace(0, 2 * np.pi, TURNS, endpoint=False)
    nets = []
    for set_name, state in product(SETS, STATES):
        low, high = distances(numbers, state)
        distance = np.linspace(low, high, DISTANCES)
        if state == "first bite" and _within_buried(numbers, set_name, distance):
            continue
        reach = (high - low) / (DISTANCES - 1)
        nets.append(Net(set_name, state, distance, turns, reach, 2 * np.pi / TURNS))
    return nets


def _within_buried(numbers: Numbers, set_name: str, distance: np.ndarray) -> bool:
    """Whether every first bite is also an allowed buried log: then one state is enough."""
    first = allowed(numbers, set_name, "first bite", distance)
    buried = allowed(numbers, set_name, "buried", distance)
    return bool(
        distance[0] >= numbers.gap
        and np.all(first.ends[:, 0] >= buried.ends[:, 0] - 1e-12)
        and np.all(first.ends[:, 1] <= buried.ends[:, 1] + 1e-12)
    )


def _nearer(numbers: Numbers, spot: Spot) -> Net:
    low, high = distances(numbers, spot.state)
    return Net(
        spot.set,
        spot.state,
        np.clip(spot.log.l_AB + spot.reach * np.linspace(-1, 1, TRIES), low, high),
        spot.turn + spot.swing * np.linspace(-1, 1, SWINGS),
        spot.reach,
        spot.swing,
    )


def _look(
    check: Check, numbers: Numbers, nets: Sequence[Net], kept: Any
) -> tuple[list[Spot], Kept]:
    """The worst log of each net, and the stations and points that came near it."""
    bounds = joined([allowed(numbers, net.set, net.state, net.distance) for net in nets])
    free = np.concatenate([np.broadcast_to(n.turns, (len(n.distance), len(n.turns))) for n in nets])
    turns = np.concatenate([critical_turns(bounds), free], axis=-1)
    offsets, valid = candidates(bounds, turns)
    # all sections here are symmetric about z: of a log and its mirror image one is enough
    valid &= offsets[2] >= offsets[0]
    # the allowed ones to the front: rows of one length, filled up with their first
    order = np.argsort(~valid, axis=-1, kind="stable")[:, : valid.sum(axis=-1).max()]
    order = np.where(np.take_along_axis(valid, order, axis=-1), order, order[:, :1])
    offsets = np.take_along_axis(offsets, order[None], axis=-1)
    values = values_at(check, numbers, log_at(offsets, bounds.distance), kept=kept)
    tops, _ = worst_place(values)
    spots: list[Spot] = []
    near_x, near_p = np.zeros(values.shape[-2], bool), np.zeros(values.shape[-1], bool)
    end = 0
    for net in nets:
        start, end = end, end + len(net.distance)
        top = tops[start:end]
        row, column = np.unravel_index(top.argmax(), top.shape)
        slot = order[start + row, column]
        near = values[start:end][top >= NEAR * top.max()] >= NEAR * top.max()
        near_x |= near.any(axis=(0, 2))
        near_p |= near.any(axis=(0, 1))
        spots.append(
            Spot(
                net.set,
                net.state,
                float(top.max()),
                Log(float(net.distance[row]), *offsets[:, start + row, column].tolist()),
                float(turns[start + row, turn_of(slot)]),
                net.reach,
                net.swing,
            )
        )
    return spots, Kept(np.flatnonzero(near_x), np.flatnonzero(near_p))
