"""One thin-walled model for every family: shear flow, sectorial coordinate, shear centre, cells.

A section is a graph of straight walls between nodes. Leading axes of the coordinates and the
thicknesses are samples: one batched solve serves them all.

Sources: shear flow by equilibrium at the nodes and no twist of each cell; warping by V. Z. Vlasov
(open) and R. Bredt (cells); both as in any text on thin-walled sections, from memory. The
principal axes lie along y and z, which `solve` checks.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

Array = Any


@dataclass(frozen=True, eq=False)
class Walls:
    """Nodes and walls of a section. [m]

    y, z : nodes, shape `samples + (nodes,)`
    t : thicknesses, shape `samples + (walls,)`
    ends : (first node, last node) of each wall
    cells : loops, each a tuple of (wall, +1 or -1 for its direction), counter-clockwise from y
        to z
    """

    y: np.ndarray
    z: np.ndarray
    t: np.ndarray
    ends: tuple[tuple[int, int], ...]
    cells: tuple[tuple[tuple[int, int], ...], ...] = ()


@dataclass(frozen=True, eq=False)
class Flow:
    """A flow in the walls per unit of its cause: at the start, and its quadratic growth."""

    start: np.ndarray
    linear: np.ndarray
    square: np.ndarray

    def at(self, wall: int, share: float) -> np.ndarray:
        """The flow at a share (0 to 1) of a wall's length."""
        return (
            self.start[..., wall]
            + self.linear[..., wall] * share
            + self.square[..., wall] * share**2
        )


@dataclass(frozen=True, eq=False)
class ThinWalled:
    """What the model gives; `samples` in front. [m, m⁴, m⁶]

    I_y, I_z : of the mid-lines; C_w : warping constant; J_c : torsion constant of the cells
    y_s, z_s : shear centre; y_c, z_c : centroid of the mid-lines
    omega : warping coordinate at the nodes, about the shear centre
    f_y, f_z, f_w, f_t : flow per unit V_y, V_z, warping torque [1/m] and cell torque [1/m²]
    """

    I_y: np.ndarray
    I_z: np.ndarray
    C_w: np.ndarray
    J_c: np.ndarray
    y_c: np.ndarray
    z_c: np.ndarray
    y_s: np.ndarray
    z_s: np.ndarray
    omega: np.ndarray
    f_y: Flow
    f_z: Flow
    f_w: Flow
    f_t: Flow


def solve(walls: Walls) -> ThinWalled:
    """Solve the model.

    Raises
    ------
    ValueError : when the principal axes don't lie along y and z
    """
    i, j = np.array(walls.ends).T
    y, z = walls.y[..., i], walls.z[..., i]
    dy, dz = walls.y[..., j] - y, walls.z[..., j] - z
    length = np.hypot(dy, dz)
    area = length * walls.t
    total = area.sum(-1)
    y_c = (area * (y + dy / 2)).sum(-1) / total
    z_c = (area * (z + dz / 2)).sum(-1) / total
    ny, nz = walls.y - y_c[..., None], walls.z - z_c[..., None]

    def inner(p: np.ndarray, q: np.ndarray) -> np.ndarray:
        """Integral over the area of the product of two fields linear along each wall."""
        return (
            area
            * (
                2 * p[..., i] * q[..., i]
                + 2 * p[..., j] * q[..., j]
                + p[..., i] * q[..., j]
                + p[..., j] * q[..., i]
            )
            / 6
        ).sum(-1)

    I_y, I_z = inner(nz, nz), inner(ny, ny)
    if np.any(abs(inner(ny, nz)) > 1e-9 * np.sqrt(I_y * I_z)):
        raise ValueError("the section's principal axes must lie along y and z")

    # Bredt: flow of a unit rate of twist; radius times length is twice the swept area
    swept = ny[..., i] * dz - nz[..., i] * dy
    flow_t = _flow(walls, length, np.zeros_like(area), np.zeros_like(area), twist=swept)
    J_c = (flow_t.start * swept).sum(-1)
    cell = flow_t.start

    def integrate(center_y: np.ndarray, center_z: np.ndarray) -> np.ndarray:
        sweep = (ny[..., i] - center_y) * dz - (nz[..., i] - center_z) * dy
        rise = cell * length / walls.t - sweep
        omega = np.zeros(np.broadcast_shapes(ny.shape, rise.shape[:-1] + ny.shape[-1:]))
        done = {0}
        while len(done) < ny.shape[-1]:
            for wall, (a, b) in enumerate(walls.ends):
                if a in done and b not in done:
                    omega[..., b] = omega[..., a] + rise[..., wall]
                    done.add(b)
                elif b in done and a not in done:
                    omega[..., a] = omega[..., b] - rise[..., wall]
                    done.add(a)
        return omega - (inner(omega, np.ones_like(omega)) / total)[..., None]

    zero = np.zeros_like(total)[..., None]
    raw = integrate(zero, zero)
    z_s, y_s = inner(raw, ny) / I_z, -inner(raw, nz) / I_y
    omega = integrate(y_s[..., None], z_s[..., None])
    C_w = inner(omega, omega)

    def per(field: np.ndarray, scale: np.ndarray) -> Flow:
        return _flow(walls, length, *(field[..., k] * walls.t / scale for k in (i, j)))

    warps = np.where(C_w > 0, C_w, 1.0)[..., None]
    return ThinWalled(
        I_y, I_z, C_w, J_c, y_c, z_c, y_c + y_s, z_c + z_s, omega,
        f_y=per(ny, I_z[..., None]),
        f_z=per(nz, I_y[..., None]),
        f_w=per(-omega, warps),
        f_t=Flow(*(part / np.where(J_c > 0, J_c, 1.0)[..., None]
                   for part in (flow_t.start, flow_t.linear, flow_t.square))),
    )  # fmt: skip


def _flow(
    walls: Walls,
    length: np.ndarray,
    first: np.ndarray,
    last: np.ndarray,
    twist: np.ndarray | None = None,
) -> Flow:
    """Flow that takes up a source of `first` to `last` per length along each wall.

    Unknown is the flow at each wall's start; the equations are balance at all nodes but one and,
    for each cell, the twist (zero, or that of a unit rate when `twist` gives the swept areas).
    """
    grow = -length * first  # per share of the length
    curve = -length * (last - first) / 2
    count = len(walls.ends)
    nodes = walls.y.shape[-1]
    lead = np.broadcast_shapes(grow.shape[:-1], walls.t.shape[:-1], length.shape[:-1])
    matrix = np.zeros((*lead, count, count))
    right = np.zeros((*lead, count))
    for wall, (a, b) in enumerate(walls.ends):
        if a < nodes - 1:
            matrix[..., a, wall] -= 1
        if b < nodes - 1:
            matrix[..., b, wall] += 1
            right[..., b] -= grow[..., wall] + curve[..., wall]
    for row, loop in enumerate(walls.cells, start=nodes - 1):
        for wall, way in loop:
            soft = way * length[..., wall] / walls.t[..., wall]
            matrix[..., row, wall] = soft
            right[..., row] -= soft * (grow[..., wall] / 2 + curve[..., wall] / 3)
            if twist is not None:
                right[..., row] += way * twist[..., wall]
    return Flow(np.linalg.solve(matrix, right[..., None])[..., 0], grow, curve)
