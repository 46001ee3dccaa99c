"""The bodies that carry the thrust, and where they stand.

    z  up
    |        A o---------------------o B      line of thrust
    |   =====[] sled                 |\\
    |  --o==========================================--   cylinder axis at height e
    |  mount   1   2 pads            weld of the fixed tool
    +-------------------------------------------------> x, along the beam from the rear mount

Right-handed axes, y to the left, origin on the section's centroid. All values are plain SI floats
or arrays: what a sample may vary has shape `samples + (1, 1)`, stations `samples + (n, 1)`.
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Any

import numpy as np

from splitcalc.machine.numbers import Numbers

Array = Any  # float or numpy array: every formula serves both

POINT = 1e-12  # m: a load on a shorter length acts at a point


@dataclass(frozen=True, eq=False)
class Log:
    """Where the log touches, as offsets from the cylinder axis. [m]

    Parameters
    ----------
    l_AB : distance of the contact points along x
    a_y, a_z : offset of A on the moving tool, left and up
    b_y, b_z : offset of B on the fixed tool, left and up
    """

    l_AB: Array
    a_y: Array
    a_z: Array
    b_y: Array
    b_z: Array

    def take(self, index: Any) -> Log:
        """The logs picked by an index into the leading axis."""
        return Log(**{f.name: np.asarray(getattr(self, f.name))[index] for f in fields(self)})


@dataclass(frozen=True, eq=False)
class Frame:
    """The bodies that carry the thrust, in one position of the sled. [N, m]

    `x_m` mount, `x_1` and `x_2` middles of the rear and front pad, each `l_p` long, `x_3` and
    `x_4` start and end of the fixed tool's root weld, `z_p` height of the pads' side contact,
    `r_2` share of the roll couple that the front pad takes; heights from the centroid.
    """

    F: Array
    e: Array
    x_A: Array
    x_B: Array
    log: Log
    x_m: Array
    x_1: Array
    x_2: Array
    l_p: Array
    x_3: Array
    x_4: Array
    z_p: Array
    r_2: Array = 1.0

    @classmethod
    def from_points(
        cls,
        *,
        F: float,
        lug: tuple[float, float],
        rod: tuple[float, float],
        pads: tuple[tuple[float, float], tuple[float, float]],
        A: tuple[float, float, float],
        B: tuple[float, float, float],
        tool: tuple[float, float],
        pad_length: float = 0.0,
    ) -> Frame:
        """A frame from bare points, for a machine that the file format doesn't describe.

        Parameters
        ----------
        F : cylinder force [N]
        lug, rod : (x, z) of the cylinder's two pins; z must agree, the line is parallel to x [m]
        pads : (x, z) of the rear and the front pad; z must agree [m]
        A, B : (x, y, z) of the contact points on the moving and the fixed tool [m]
        tool : x where the fixed tool's root weld starts and ends (equal: a point) [m]
        pad_length : along x, 0 for point pads [m]

        Raises
        ------
        ValueError : naming the argument, the value and what is allowed
        """
        (lug_x, lug_z), (_, rod_z) = lug, rod
        (x_1, z_1), (x_2, z_2) = pads
        for name, bad, why in (
            ("F", not (np.isfinite(F) and F > 0), "a force above 0"),
            ("rod", rod_z != lug_z, f"z = {lug_z} like the lug: the cylinder is parallel to x"),
            ("pads", not x_1 < x_2, "the rear pad first, x_1 < x_2"),
            ("pads", z_1 != z_2, "one height for both pads"),
            ("B", not B[0] > A[0], f"x above that of A, {A[0]}"),
            ("tool", not tool[1] >= tool[0], "the start first"),
            ("tool", not tool[0] >= x_2 + pad_length / 2, "a start ahead of the front pad"),
            ("pad_length", not pad_length >= 0, "0 or more"),
        ):
            if bad:
                raise ValueError(f"{name} needs {why}; got {locals()[name]}")
        log = Log(B[0] - A[0], A[1], A[2] - lug_z, B[1], B[2] - lug_z)
        return cls(F, lug_z, A[0], B[0], log, lug_x, x_1, x_2, pad_length, tool[0], tool[1], z_1)

    @property
    def patches(self) -> dict[str, tuple[Array, Array]]:
        """Start and end of each load on the beam."""
        half = self.l_p / 2
        return {
            "mount": (self.x_m, self.x_m),
            "rear pad": (self.x_1 - half, self.x_1 + half),
            "front pad": (self.x_2 - half, self.x_2 + half),
            "fixed tool": (self.x_3, self.x_4),
        }


def remaining(x: Array, start: Array, end: Array) -> Array:
    """Share of an evenly spread load that acts beyond x; at a point load, just after it."""
    return np.minimum(np.maximum((end - x) / np.maximum(end - start, POINT), 0.0), 1.0)


def lever(x: Array, start: Array, end: Array) -> Array:
    """That share times the distance of its middle from x. [m]"""
    return remaining(x, start, end) * ((np.maximum(x, start) + end) / 2 - x)


def frame_of(numbers: Numbers, log: Log) -> Frame:
    """The machine with its sled pushed against this log."""
    x_A = numbers.x_B - log.l_AB
    return Frame(
        F=numbers.F,
        e=numbers.e,
        x_A=x_A,
        x_B=numbers.x_B,
        log=log,
        x_m=numbers.x_m,
        x_1=x_A - numbers.rear_pad,
        x_2=x_A - numbers.front_pad,
        l_p=numbers.l_p,
        x_3=numbers.x_3,
        x_4=numbers.x_4,
        z_p=numbers.z_p,
        r_2=numbers.r_2,
    )


def stations(numbers: Numbers, frame: Frame, per_stretch: int) -> Array:
    """Places to look at, shape `samples + (n, 1)`: where anything changes, and between. [m]

    Each stretch between two marks is cut in `per_stretch` equal parts. Marks: ends and middles of
    pads and root weld, with and without their spread into the web, how far from them a closed
    section distorts, mount, the beam's ends, stiffeners, closed stretches.
    """
    c = numbers.section.t_f + numbers.section.r
    marks: list[Array] = [numbers.x_start, numbers.x_end, numbers.x_m]
    for name in ("rear pad", "front pad", "fixed tool"):
        start, end = frame.patches[name]
        marks += [start - c, start, (start + end) / 2, end, end + c]
        if not numbers.section.open:
            marks += [start - numbers.section.reach, end + numbers.section.reach]
    marks += [*numbers.stiffeners, *(x for zone in numbers.closed_zones for x in zone)]
    samples = np.broadcast_shapes(*(np.shape(mark)[:-2] for mark in marks))
    edges = np.empty((*samples, len(marks)))
    for k, mark in enumerate(marks):
        edges[..., k] = mark[..., 0, 0] if np.ndim(mark) else mark
    ends = (np.asarray(x)[..., 0] if np.ndim(x) else x for x in (numbers.x_start, numbers.x_end))
    edges = np.sort(np.minimum(np.maximum(edges, next(ends)), next(ends)), axis=-1)
    share = np.arange(per_stretch) / per_stretch
    steps = np.diff(edges, axis=-1)[..., None] * share
    inner = (edges[..., :-1, None] + steps).reshape(*edges.shape[:-1], -1)
    return np.concatenate([inner, edges[..., -1:]], axis=-1)[..., None]
