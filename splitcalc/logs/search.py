"""The search for the worst log of each check: a coarse net of candidates, then nearer and nearer.

Exact for measures that are convex in the actions (see `allowed`); only the distance, and the t
that isn't critical, are refined.
"""

from __future__ import annotations

from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace
from itertools import product
from typing import NamedTuple

import numpy as np

from splitcalc.findings import Check, demand_over_capacity, worst_place
from splitcalc.logs.allowed import (
    BOX,
    CORNERS,
    CRITICAL,
    STATES,
    allowed,
    candidates,
    critical_turns,
    distances,
    log_at,
)
from splitcalc.machine.numbers import SETS, Numbers
from splitcalc.thrust.frame import Log, frame_of, stations
from splitcalc.thrust.statics import actions

DISTANCES = 6  # per set and state, before refining
TURNS = 12  # evenly spaced t, besides the critical ones
TURN = 2 * np.pi / TURNS
# refining: rounds, tries on each side in distance and in t, how much finer the next round is
ZOOMS, TRIES, SWINGS = 3, 10, 3
HOPELESS = 0.95  # a state this far below the worst after a round is left alone
SEARCHING = 1  # stations per stretch
KEPT = 3  # slots of each set and state that are refined
BLOCK = 6  # rows of distances that go through the checks together


@dataclass(frozen=True)
class Spot:
    """One candidate: a slot at a distance, with its t where the slot is not critical."""

    set: str
    state: str
    distance: float
    slot: int
    turn: float
    value: float
    reach: float  # half of the stretch of distances still in doubt [m]
    swing: float  # half of the range of t still in doubt


def utilisations(
    checks: Sequence[Check], numbers: Numbers, logs: Log, per_stretch: int = SEARCHING
) -> list[np.ndarray]:
    """Largest demand over capacity on the whole beam for each log, one array a check."""
    frame = frame_of(numbers, logs)
    acting = actions(frame, stations(numbers, frame, per_stretch))
    return [worst_place(demand_over_capacity(check, numbers, acting))[0] for check in checks]


def search(checks: Sequence[Check], numbers: Numbers) -> dict[tuple[str, str], Spot]:
    """The worst candidate for each (check id, set)."""
    spots = _coarse(checks, numbers)
    for _ in range(ZOOMS):
        spots = _zoom(checks, numbers, spots)
    return {(checks[k].id, spot.set): spot for k, spot in sorted(spots, key=_by_value)}


def _by_value(found: tuple[int, Spot]) -> float:
    return found[1].value


def _coarse(checks: Sequence[Check], numbers: Numbers) -> list[tuple[int, Spot]]:
    """For each check (by its number) the worst slot of every set and state, on a coarse net."""
    even = np.tile(np.linspace(0, 2 * np.pi, TURNS, endpoint=False), (DISTANCES, 1))
    nets = []
    for set_name, state in product(SETS, STATES):
        distance = np.linspace(*distances(numbers, state), DISTANCES)
        bounds = allowed(numbers, set_name, state, distance)
        turns = np.concatenate([critical_turns(bounds, distance), even], axis=-1)
        offsets, valid = candidates(bounds, distance, turns)
        # all sections here are symmetric about z: of a log and its mirror image one is enough
        valid &= offsets[2] >= offsets[0]
        nets.append((set_name, state, distance, turns, offsets, valid))
    distance, offsets, valid = (
        np.concatenate([net[k] for net in nets], axis=axis) for k, axis in ((2, 0), (4, 1), (5, 0))
    )
    order = np.argsort(~valid, axis=-1, kind="stable")[:, : valid.sum(axis=-1).max()]
    kept = np.take_along_axis(offsets, order[None], axis=-1)
    good = np.take_along_axis(valid, order, axis=-1)
    spots = []
    for k, values in enumerate(_in_blocks(checks, numbers, kept, distance)):
        values = np.where(good, values, -np.inf).reshape(len(nets), DISTANCES, -1)
        for net, part in enumerate(values):
            set_name, state, near, turns, *_ = nets[net]
            slots = order[net * DISTANCES : (net + 1) * DISTANCES]
            seen: set[int] = set()
            for flat in part.argsort(axis=None)[::-1]:
                row, column = np.unravel_index(flat, part.shape)
                slot = int(slots[row, column])
                if len(seen) == KEPT or not np.isfinite(part[row, column]):
                    break
                if slot in seen:
                    continue
                seen.add(slot)
                turn = turns[row, max(slot - len(BOX), 0) // len(CORNERS)]
                value, step = float(part[row, column]), float(near[1] - near[0])
                spot = Spot(set_name, state, float(near[row]), slot, float(turn), value, step, TURN)
                spots.append((k, spot))
    return spots


def _in_blocks(
    checks: Sequence[Check], numbers: Numbers, offsets: np.ndarray, distance: np.ndarray
) -> list[np.ndarray]:
    """`utilisations` of rows of logs, in blocks that fit the cache, on two threads."""

    def block(i: int) -> list[np.ndarray]:
        rows = slice(i, i + BLOCK)
        return utilisations(checks, numbers, log_at(offsets[:, rows], distance[rows]))

    with ThreadPoolExecutor(2) as pool:
        parts = list(pool.map(block, range(0, len(distance), BLOCK)))
    return [np.concatenate(rows) for rows in zip(*parts, strict=True)]


def _zoom(
    checks: Sequence[Check], numbers: Numbers, spots: list[tuple[int, Spot]]
) -> list[tuple[int, Spot]]:
    """Look again around each spot, nearer. All spots go through the checks in one call."""
    worst: dict[tuple[int, str], float] = {}
    for k, spot in spots:
        worst[k, spot.set] = max(spot.value, worst.get((k, spot.set), 0.0))
    spots = [(k, spot) for k, spot in spots if spot.value >= HOPELESS * worst[k, spot.set]]
    tries = [_around(numbers, spot) for _, spot in spots]
    distance = np.concatenate([near.distance for near in tries])
    offsets = np.concatenate([near.offsets for near in tries], axis=1)[..., None]
    values = [v[..., 0] for v in utilisations(checks, numbers, log_at(offsets, distance))]
    out = []
    end = 0
    for (k, spot), near in zip(spots, tries, strict=True):
        start, end = end, end + len(near.distance)
        seen = np.where(near.valid, values[k][start:end], -np.inf)
        i = int(seen.argmax())
        if seen[i] > spot.value:
            spot = replace(
                spot,
                distance=float(near.distance[i]),
                turn=float(near.turns[i]),
                value=float(seen[i]),
            )
        out.append((k, replace(spot, reach=spot.reach / TRIES, swing=spot.swing / SWINGS)))
    return out


class Near(NamedTuple):
    """Places to try: distances, offsets, whether the log is allowed, t."""

    distance: np.ndarray
    offsets: np.ndarray
    valid: np.ndarray
    turns: np.ndarray


def _around(numbers: Numbers, spot: Spot) -> Near:
    low, high = distances(numbers, spot.state)
    steps = np.linspace(-1, 1, 2 * TRIES + 1)
    on_circle = spot.slot >= len(BOX)
    number, corner = divmod(spot.slot - len(BOX), len(CORNERS)) if on_circle else (0, 0)
    free = on_circle and number >= CRITICAL
    swings = np.linspace(-1, 1, 2 * SWINGS + 1) if free else np.zeros(1)
    distance, turns = (
        part.ravel()
        for part in np.meshgrid(
            np.clip(spot.distance + spot.reach * steps, low, high),
            spot.turn + spot.swing * swings,
        )
    )
    bounds = allowed(numbers, spot.set, spot.state, distance)
    if on_circle and not free:
        turns = critical_turns(bounds, distance)[..., number]
    offsets, valid = candidates(bounds, distance, turns[..., None])
    at = len(BOX) + corner if on_circle else spot.slot
    return Near(distance, offsets[..., at], valid[..., at], turns)


def log_of(numbers: Numbers, spot: Spot) -> Log:
    """The spot's log, as scalars."""
    near = _around(numbers, replace(spot, reach=0.0, swing=0.0))
    return Log(spot.distance, *(float(part) for part in near.offsets[:, 0]))
