"""Exact area and inertia of a section from signed parts: rectangles and corner fillets.

A fillet is the area between a quarter circle and its two tangents. Area and centroid are exact;
so is its inertia about an axis parallel to a tangent (Steiner's theorem).
"""

from __future__ import annotations

from dataclasses import dataclass
from math import pi
from typing import Any

import numpy as np

Array = Any

FILLET_AREA = 1 - pi / 4  # of r²
FILLET_PLACE = (10 - 3 * pi) / (12 - 3 * pi)  # of r, centroid from each tangent
FILLET_INERTIA = 1 / 3 - pi / 16 - 1 / (9 * (4 - pi))  # of r⁴, about its own centroid


@dataclass(frozen=True, eq=False)
class Part:
    """A piece of area with its centroid and its own inertias; a hole has sign -1. [m]"""

    area: Array
    y: Array
    z: Array
    own_y: Array
    own_z: Array
    half: Array  # half of its height in z: how far its area reaches, for the plastic modulus
    width: Array  # and in y


def rectangle(y0: Array, y1: Array, z0: Array, z1: Array, sign: int = 1) -> Part:
    b, h = y1 - y0, z1 - z0
    return Part(
        sign * b * h,
        (y0 + y1) / 2,
        (z0 + z1) / 2,
        sign * b * h**3 / 12,
        sign * h * b**3 / 12,
        h / 2,
        b / 2,
    )


def fillets(y: Array, z: Array, r: Array, inward: tuple[int, int], sign: int = 1) -> list[Part]:
    """The fillets left and right whose tangents meet at (±y, z); `inward` the way to the arc."""
    area, own = sign * FILLET_AREA * r**2, sign * FILLET_INERTIA * r**4
    place = FILLET_PLACE * r
    return [
        Part(area, side * (y + inward[0] * place), z + inward[1] * place, own, own, 0.0, 0.0)
        for side in (1, -1)
    ]


@dataclass(frozen=True, eq=False)
class Bulk:
    """Area, height of the centroid and inertias about it. [m², m, m⁴]"""

    A: Array
    z_c: Array
    I_y: Array
    I_z: Array


def bulk(parts: list[Part]) -> Bulk:
    A = sum(p.area for p in parts)
    z_c = sum(p.area * p.z for p in parts) / A
    return Bulk(
        A,
        z_c,
        sum(p.own_y + p.area * (p.z - z_c) ** 2 for p in parts),
        sum(p.own_z + p.area * p.y**2 for p in parts),
    )


def plastic_moduli(parts: list[Part]) -> tuple[float, float]:
    """Plastic moduli about the horizontal and the vertical axis, for scalars. [m³]

    Fillets count as points at their centroid: exact while the axis of equal areas cuts none.
    """
    return (
        _plastic([(p.area, p.z, p.half) for p in parts]),
        _plastic([(p.area, p.y, p.width) for p in parts]),
    )


def _plastic(strips: list[tuple[float, float, float]]) -> float:
    def above(axis: float) -> float:
        return sum(a * _share(c, h, axis) for a, c, h in strips)

    low = min(c - h for _, c, h in strips)
    high = max(c + h for _, c, h in strips)
    target = sum(a for a, _, _ in strips) / 2
    for _ in range(80):
        middle = (low + high) / 2
        low, high = (middle, high) if above(middle) > target else (low, middle)
    axis = (low + high) / 2
    return float(sum(a * _mean_distance(c, h, axis) for a, c, h in strips))


def _share(center: float, half: float, axis: float) -> float:
    if half == 0.0:
        return float(center > axis)
    return float(np.clip((center + half - axis) / (2 * half), 0.0, 1.0))


def _mean_distance(center: float, half: float, axis: float) -> float:
    if abs(center - axis) >= half:
        return abs(center - axis)
    up, down = center + half - axis, axis - center + half
    return (up**2 + down**2) / (4 * half)
