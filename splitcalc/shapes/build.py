"""How the numbers of each family are made: exact parts, thin-walled walls, named spots.

All families are symmetric about z. Dimensions are arrays over samples or scalars; heights are
measured from the bottom face here and from the centroid in the finished `Section`.
"""

from __future__ import annotations

from math import pi
from typing import Any

import numpy as np

from splitcalc.shapes.geometry import Part, bulk, fillets, rectangle
from splitcalc.shapes.section import Section, Spot, assemble
from splitcalc.shapes.thinwall import Walls, solve

Array = Any


def wall_and_corners(T: Array, made_to: str) -> tuple[Array, Array, Array]:
    """Design wall, outer and inner corner radius of a hollow section. [m]

    Sources: EN 10219-2 and EN 10210-2 Annex B (from memory); AISC 360-22 B4.2 for the 0.93 of
    ASTM A500, second-hand.
    """
    if made_to == "EN 10219":
        outer = np.select([T <= 0.006, T <= 0.010], [2.0, 2.5], 3.0)
        return T, outer * T, (outer - 1) * T
    if made_to == "EN 10210":
        return T, 1.5 * T, 1.0 * T
    t = 0.93 * T if made_to == "A500" else T
    return t, 2 * t, t


def rolled_torsion(d: Array, b_f: Array, t_f: Array, t_w: Array, r: Array) -> Array:
    """St Venant constant: El Darwish and Johnston (1965), as section tables quote (from memory)."""
    tf, tw, hi = t_f, t_w, d - 2 * t_f
    D = ((tf + r) ** 2 + tw * (r + tw / 4)) / (2 * r + tf)
    x, y = tw / tf, r / tf
    alpha = -0.042 + 0.2204 * x + 0.1355 * y - 0.0865 * x * y - 0.0725 * x**2
    plates = 2 * b_f * tf**3 / 3 + hi * tw**3 / 3
    return plates + 2 * alpha * D**4 - 0.420 * tf**4


def _stack(*values: Array) -> np.ndarray:
    return np.stack(np.broadcast_arrays(*values), axis=-1)


def i_section(
    d: Array, top: tuple[Array, Array], bottom: tuple[Array, Array], t_w: Array, r: Array, J: Array
) -> Section:
    (b1, t1), (b2, t2) = top, bottom
    parts: list[Part] = [
        rectangle(-b1 / 2, b1 / 2, d - t1, d),
        rectangle(-b2 / 2, b2 / 2, 0.0 * d, t2),
        rectangle(-t_w / 2, t_w / 2, t2, d - t1),
        *fillets(t_w / 2, d - t1, r, (1, -1)),
        *fillets(t_w / 2, t2, r, (1, 1)),
    ]
    exact = bulk(parts)
    #   0 --- 1 --- 2
    #         |
    #   3 --- 4 --- 5
    o, zt, zb = 0.0 * d, d - t1 / 2, t2 / 2
    ends = ((0, 1), (1, 2), (1, 4), (3, 4), (4, 5))
    walls_t = _stack(t1, t1, t_w, t2, t2)
    model = solve(
        Walls(
            y=_stack(b1 / 2, o, -b1 / 2, b2 / 2, o, -b2 / 2),
            z=_stack(zt, zt, zt, zb, zb, zb),
            t=walls_t,
            ends=ends,
        )
    )
    h_o, n, half = zt - zb, exact.z_c, t_w / 2
    z_hi, z_lo = d - t1 - r, t2 + r
    hi, lo, mid = (zt - z_hi) / h_o, (zt - z_lo) / h_o, (zt - n) / h_o
    spots = [
        Spot("top flange, left tip", b1 / 2, d, 0, 0.0),
        Spot("top flange, left of the web", half, d, 0, 1.0),
        Spot("top flange, right of the web", -half, d, 1, 0.0),
        Spot("top flange, right tip", -b1 / 2, d, 1, 1.0),
        Spot("web, top, left face", half, z_hi, 2, hi),
        Spot("web, top, right face", -half, z_hi, 2, hi),
        Spot("web, middle", o, n, 2, mid),
        Spot("web, bottom, left face", half, z_lo, 2, lo),
        Spot("web, bottom, right face", -half, z_lo, 2, lo),
        Spot("bottom flange, left tip", b2 / 2, o, 3, 0.0),
        Spot("bottom flange, left of the web", half, o, 3, 1.0),
        Spot("bottom flange, right of the web", -half, o, 4, 0.0),
        Spot("bottom flange, right tip", -b2 / 2, o, 4, 1.0),
    ]
    return assemble(
        exact=exact,
        parts=parts,
        model=model,
        walls_t=walls_t,
        ends=ends,
        spots=spots,
        datum=n,
        web_spot="web, top, left face",
        open=True,
        h=d,
        J=J,
        z_t=d - n,
        z_b=-n,
        y_t=b1 / 2,
        y_b=b2 / 2,
        z_f=zt - n,
        b_f=b1,
        t_f=t1,
        t_w=t_w,
        r=r,
        h_o=h_o,
        t_max=np.maximum(np.maximum(t1, t2), t_w),
    )


def hollow_section(H: Array, B: Array, t: Array, outer: Array, inner: Array) -> Section:
    parts = [
        rectangle(-B / 2, B / 2, 0.0 * H, H),
        rectangle(t - B / 2, B / 2 - t, t, H - t, sign=-1),
    ]
    for y, z, way, radius, sign in (
        (B / 2, H, -1, outer, -1),
        (B / 2, 0.0 * H, 1, outer, -1),
        (B / 2 - t, H - t, -1, inner, 1),
        (B / 2 - t, t, 1, inner, 1),
    ):
        parts += fillets(y, z, radius, (-1, way), sign)
    exact = bulk(parts)
    #   0 --- 1
    #   |     |
    #   2 --- 3
    y, zt, zb = (B - t) / 2, H - t / 2, t / 2
    ends = ((0, 1), (0, 2), (1, 3), (2, 3))
    walls_t = _stack(t, t, t, t)
    model = solve(
        Walls(
            y=_stack(y, -y, y, -y),
            z=_stack(zt, zt, zb, zb),
            t=walls_t,
            ends=ends,
            cells=(((1, -1), (0, 1), (2, 1), (3, -1)),),
        )
    )
    o, n, flat_y, flat_z = 0.0 * H, H / 2, B / 2 - outer, H - outer
    sy, sz = (y - flat_y) / (2 * y), (zt - flat_z) / (zt - zb)
    spots = [
        Spot("top, left corner", B / 2, H, 0, 0.0),
        Spot("top wall, left end of the flat", flat_y, H, 0, sy),
        Spot("top wall, middle", o, H, 0, 0.5),
        Spot("top wall, right end of the flat", -flat_y, H, 0, 1 - sy),
        Spot("top, right corner", -B / 2, H, 0, 1.0),
        Spot("left wall, top of the flat", B / 2, flat_z, 1, sz),
        Spot("left wall, middle", B / 2, n, 1, 0.5),
        Spot("left wall, bottom of the flat", B / 2, H - flat_z, 1, 1 - sz),
        Spot("right wall, top of the flat", -B / 2, flat_z, 2, sz),
        Spot("right wall, middle", -B / 2, n, 2, 0.5),
        Spot("right wall, bottom of the flat", -B / 2, H - flat_z, 2, 1 - sz),
        Spot("bottom, left corner", B / 2, o, 3, 0.0),
        Spot("bottom wall, left end of the flat", flat_y, o, 3, sy),
        Spot("bottom wall, middle", o, o, 3, 0.5),
        Spot("bottom wall, right end of the flat", -flat_y, o, 3, 1 - sy),
        Spot("bottom, right corner", -B / 2, o, 3, 1.0),
    ]
    R = (outer + inner) / 2
    line = 2 * (B - t + H - t) - 2 * R * (4 - pi)
    core = (B - t) * (H - t) - R**2 * (4 - pi)
    return assemble(
        exact=exact,
        parts=parts,
        model=model,
        walls_t=walls_t,
        ends=ends,
        spots=spots,
        datum=n,
        web_spot="left wall, top of the flat",
        open=False,
        h=H,
        # EN 10219-2 and EN 10210-2 Annex B (from memory); Bredt's cell with rounded corners
        J=t**3 * line / 3 + 4 * core**2 * t / line,
        z_t=H / 2,
        z_b=-H / 2,
        y_t=B / 2,
        y_b=B / 2,
        z_f=zt - n,
        b_f=B,
        t_f=t,
        t_w=t,
        r=outer - t,
        h_o=zt - zb,
        t_max=t,
    )


def box_section(
    *, b_t: Array, t_t: Array, b_b: Array, t_b: Array, h_w: Array, t_w: Array, c: Array
) -> Section:
    b1, t1, b2, t2 = b_t, t_t, b_b, t_b
    o, d = 0.0 * h_w, t2 + h_w + t1
    parts = [
        rectangle(-b1 / 2, b1 / 2, d - t1, d),
        rectangle(-b2 / 2, b2 / 2, o, t2),
        rectangle(c / 2 - t_w, c / 2, t2, d - t1),
        rectangle(-c / 2, t_w - c / 2, t2, d - t1),
    ]
    exact = bulk(parts)
    #   0 - 1 ------- 2 - 3
    #       |         |
    #   4 - 5 ------- 6 - 7
    y, zt, zb = (c - t_w) / 2, d - t1 / 2, t2 / 2
    ends = ((0, 1), (1, 2), (2, 3), (1, 5), (2, 6), (4, 5), (5, 6), (6, 7))
    walls_t = _stack(t1, t1, t1, t_w, t_w, t2, t2, t2)
    model = solve(
        Walls(
            y=_stack(b1 / 2, y, -y, -b1 / 2, b2 / 2, y, -y, -b2 / 2),
            z=_stack(zt, zt, zt, zt, zb, zb, zb, zb),
            t=walls_t,
            ends=ends,
            cells=(((3, -1), (1, 1), (4, 1), (6, -1)),),
        )
    )
    n, h_o = exact.z_c, zt - zb
    hi, lo, mid = t1 / 2 / h_o, (zt - t2) / h_o, (zt - n) / h_o
    spots = [
        Spot("top plate, left tip", b1 / 2, d, 0, 0.0),
        Spot("top plate, over the left web", y, d, 1, 0.0),
        Spot("top plate, middle", o, d, 1, 0.5),
        Spot("top plate, over the right web", -y, d, 1, 1.0),
        Spot("top plate, right tip", -b1 / 2, d, 2, 1.0),
        Spot("left web, top", c / 2, d - t1, 3, hi),
        Spot("left web, middle", c / 2, n, 3, mid),
        Spot("left web, bottom", c / 2, t2, 3, lo),
        Spot("right web, top", -c / 2, d - t1, 4, hi),
        Spot("right web, middle", -c / 2, n, 4, mid),
        Spot("right web, bottom", -c / 2, t2, 4, lo),
        Spot("bottom plate, left tip", b2 / 2, o, 5, 0.0),
        Spot("bottom plate, under the left web", y, o, 6, 0.0),
        Spot("bottom plate, middle", o, o, 6, 0.5),
        Spot("bottom plate, under the right web", -y, o, 6, 1.0),
        Spot("bottom plate, right tip", -b2 / 2, o, 7, 1.0),
    ]
    lengths = ((b1, t1), (b2, t2), (2 * h_w, t_w))
    return assemble(
        exact=exact,
        parts=parts,
        model=model,
        walls_t=walls_t,
        ends=ends,
        spots=spots,
        datum=n,
        web_spot="left web, top",
        open=False,
        h=d,
        J=model.J_c + sum(length * t**3 for length, t in lengths) / 3,
        z_t=d - n,
        z_b=-n,
        y_t=b1 / 2,
        y_b=b2 / 2,
        z_f=zt - n,
        b_f=b1,
        t_f=t1,
        t_w=t_w,
        r=o,
        h_o=h_o,
        t_max=np.maximum(np.maximum(t1, t2), t_w),
    )
