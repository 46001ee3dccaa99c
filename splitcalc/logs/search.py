"""The search for the worst log of each check: a coarse net of distances, then nearer and nearer.

At each distance the candidates of `allowed` hold the worst log exactly for a measure that is
convex in the actions, but for the turn on the circle of the steepest slope. So what is refined is
the distance, and that turn. While refining, only the stations and stress points that came near the
worst are evaluated; the finding looks at all of them again.
"""

from __future__ import annotations

from collections.abc import Generator, Sequence
from dataclasses import dataclass, replace
from itertools import product
from typing import Any, NamedTuple, TypeVar

import numpy as np

from splitcalc.findings import Check, demand_over_capacity, worst_place
from splitcalc.logs.allowed import (
    BURIED,
    FIRST_BITE,
    SHARE,
    STATES,
    allowed,
    candidates,
    critical_distances,
    critical_turns,
    distances,
    holds_a_log,
    log_at,
    turn_of,
)
from splitcalc.machine.numbers import SETS, Numbers
from splitcalc.thrust.frame import Log, frame_of, stations
from splitcalc.thrust.statics import actions

GLANCE = 5  # distances at which all stations and stress points are looked at
DISTANCES = 13  # of the coarse net, per set and state, besides the critical ones
FINE = 65  # distances at which is looked for any log at all
TURNS = 12  # evenly spaced turns of the coarse net, besides the critical ones
# refining: rounds, distances and turns to try in each, how much nearer the next one looks
ROUNDS, TRIES, SWINGS, FINER = 4, 9, 5, 4.0
KEPT = 3  # peaks of each set that are refined
NEAR = 0.9  # a peak this near to the worst is refined
SEEN = 0.7  # a station or a point that came this near to the worst at a glance is looked at again


T = TypeVar("T")
Steps = Generator[None, None, T]  # work that pauses now and then, and what it comes to


def finish(steps: Steps[T]) -> T:
    """Runs steps to their end without a pause."""
    while True:
        try:
            next(steps)
        except StopIteration as end:
            return end.value


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


def search(check: Check, numbers: Numbers) -> Steps[dict[str, Spot]]:
    """The worst log of each set for one check; a set that allows no log at all is left out.

    In steps of a few milliseconds, so that a page can stay awake meanwhile.
    """
    glance = _coarse(numbers, GLANCE, critical=False)
    if not glance:
        return {}
    _, kept = _look(check, numbers, glance, slice(None))
    yield
    numbers = numbers.at_point(kept.points)
    spots, _ = _look(check, numbers, _coarse(numbers, DISTANCES, critical=True), kept.stations)
    for _ in range(ROUNDS):
        yield
        nets = [_nearer(numbers, spot) for spot in spots]
        seen, _ = _look(check, numbers, nets, kept.stations)
        finer = [replace(s, reach=s.reach / FINER, swing=s.swing / FINER) for s in [*seen, *spots]]
        spots = _best(finer)
    return {spot.set: spot for spot in sorted(spots, key=_value)}


def _best(spots: list[Spot]) -> list[Spot]:
    """The most promising few of each set."""
    out: list[Spot] = []
    for spot in sorted(spots, key=_value, reverse=True):
        same = [s for s in out if s.set == spot.set]
        apart = all(abs(s.log.l_AB - spot.log.l_AB) > s.reach for s in same)
        if len(same) < KEPT and apart and (not same or spot.value >= NEAR * same[0].value):
            out.append(spot)
    return out


def _value(spot: Spot) -> float:
    return spot.value


def _coarse(numbers: Numbers, count: int, *, critical: bool) -> list[Net]:
    """Nets of `count` even distances, with the critical ones or not, for all sets and states."""
    turns = np.linspace(0, 2 * np.pi, TURNS, endpoint=False)
    nets = []
    for set_name, state in product(SETS, STATES):
        fine = np.linspace(*distances(numbers, state), FINE)
        bounds = allowed(numbers, SHARE[set_name], state == BURIED, fine)
        held = np.flatnonzero(holds_a_log(bounds))
        if not held.size or (state == FIRST_BITE and _within_buried(numbers, set_name, fine)):
            continue
        low, high = fine[max(held[0] - 1, 0)], fine[min(held[-1] + 1, FINE - 1)]
        distance = np.linspace(low, high, count)
        if critical:
            distance = np.unique([*distance, *critical_distances(bounds)])
        reach = float(high - low) / (count - 1)
        nets.append(Net(set_name, state, distance, turns, reach, 2 * np.pi / TURNS))
    return nets


def _within_buried(numbers: Numbers, set_name: str, distance: np.ndarray) -> bool:
    """Whether every first bite is also an allowed buried log: then one state is enough."""
    first = allowed(numbers, SHARE[set_name], False, distance)
    buried = allowed(numbers, SHARE[set_name], True, distance)
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
    """The worst log of each net that has one, and the stations and points that came near it."""
    counts = [len(net.distance) for net in nets]
    bounds = allowed(
        numbers,
        np.repeat([SHARE[net.set] for net in nets], counts),
        np.repeat([net.state == BURIED for net in nets], counts),
        np.concatenate([net.distance for net in nets]),
    )
    free = np.concatenate([np.broadcast_to(n.turns, (len(n.distance), len(n.turns))) for n in nets])
    turns = np.concatenate([critical_turns(bounds), free], axis=-1)
    offsets, valid = candidates(bounds, turns)
    # all sections here are symmetric about z: of a log and its mirror image one is enough
    valid &= offsets[2] >= offsets[0]
    # the allowed ones to the front: rows of one length, filled up with their first
    order = np.argsort(~valid, axis=-1, kind="stable")[:, : max(1, valid.sum(axis=-1).max())]
    order = np.where(np.take_along_axis(valid, order, axis=-1), order, order[:, :1])
    offsets = np.take_along_axis(offsets, order[None], axis=-1)
    values = values_at(check, numbers, log_at(offsets, bounds.distance), kept=kept)
    tops = np.where(valid.any(axis=-1, keepdims=True), worst_place(values)[0], -np.inf)
    spots: list[Spot] = []
    near_x, near_p = np.zeros(values.shape[-2], bool), np.zeros(values.shape[-1], bool)
    end = 0
    for net in nets:
        start, end = end, end + len(net.distance)
        top = tops[start:end]
        seen = min(SEEN * top.max(), top.max())  # a demand may be zero, or relieve
        near = np.greater_equal(values[start:end][top >= seen], seen)
        near_x |= np.any(near, axis=(0, 2))
        near_p |= np.any(near, axis=(0, 1))
        for row in _peaks(top.max(axis=1)):
            column = int(top[row].argmax())
            spots.append(
                Spot(
                    net.set,
                    net.state,
                    float(top[row, column]),
                    Log(float(net.distance[row]), *offsets[:, start + row, column].tolist()),
                    float(turns[start + row, turn_of(order[start + row, column])]),
                    net.reach,
                    net.swing,
                )
            )
    return spots, Kept(np.flatnonzero(near_x), np.flatnonzero(near_p))


def _peaks(values: np.ndarray) -> list[int]:
    """Places no lower than their neighbours and near the highest; none where no log is allowed."""
    walled = np.pad(values, 1, constant_values=-np.inf)
    near = min(NEAR * values.max(), values.max())
    high = (values >= walled[:-2]) & (values >= walled[2:]) & (values >= near)
    return [int(k) for k in np.flatnonzero(high & np.isfinite(values))]
