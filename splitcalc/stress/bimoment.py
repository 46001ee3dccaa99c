"""Restrained warping of an open section: bimoment and the two parts of the torque.

The fixed tool hands all of its sideways moment to the loaded flange, so the bimoment jumps there;
its torque and those of the pads make the slope jump. Both true ends of the beam warp freely.
Stiffeners across the section leave warping free. A stretch closed by side plates lies between
free warping and none at its faces: both are worked out.

Signs: warping coordinate `omega = y (z - z_s)`, stress `B omega / C_w`, `T = G J phi' - B'`.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy import sqrt

from splitcalc.equations import at, equation
from splitcalc.machine.numbers import Numbers
from splitcalc.stress.span import NEXT_TO, Span, influence, place, spans_between
from splitcalc.thrust.statics import Actions

Array = Any

VLASOV = "V. Z. Vlasov, restrained torsion of thin-walled open beams (from memory)"
JUMP = "derived: the tool's sideways moment enters by the loaded flange alone"
PLACES = {"1": "rear pad", "2": "front pad", "t": "fixed tool"}


@equation(gives="k", source=VLASOV)
def decay(*, G: Array, J: Array, E: Array, C_w: Array) -> Array:
    return sqrt(G * J / (E * C_w))


@equation(gives="b_t", source=JUMP)
def jump(*, z_f: Array, z_s: Array, M_zt: Array) -> Array:
    return -(z_f - z_s) * M_zt


@equation(gives="B", source=VLASOV)
def bimoment(
    *, T_1: Array, T_2: Array, T_t: Array, b_t: Array, c_1: Array, c_2: Array, c_t: Array,
    c_b: Array,
) -> Array:  # fmt: skip
    return T_1 * c_1 + T_2 * c_2 + T_t * c_t + b_t * c_b


@equation(gives="T_w", source=VLASOV)
def warping_torque(
    *, T_1: Array, T_2: Array, T_t: Array, b_t: Array, d_1: Array, d_2: Array, d_t: Array,
    d_b: Array,
) -> Array:  # fmt: skip
    return -(T_1 * d_1 + T_2 * d_2 + T_t * d_t + b_t * d_b)


@equation(gives="B", source="derived: a face that can't warp passes the torque on")
def held_bimoment(*, B: Array, T_l: Array, c_l: Array, T_r: Array, c_r: Array) -> Array:
    return B - T_l * c_l + T_r * c_r


@equation(gives="T_w", source="derived: a face that can't warp passes the torque on")
def held_warping_torque(*, T_w: Array, T_l: Array, d_l: Array, T_r: Array, d_r: Array) -> Array:
    return T_w + T_l * d_l - T_r * d_r


class Warping(NamedTuple):
    """Bimoment [N·m²] and the share of the torque that warping carries [N·m], at stations."""

    B: Array
    T_w: Array


def bounds(numbers: Numbers, actions: Actions) -> list[Warping]:
    """Warping at the stations, once for each bound that must be looked at.

    One for a plain beam; with stretches closed by side plates a second one, in which warping is
    held at their faces.
    """
    section = numbers.section
    loads = actions.torques(section.z_s)
    k = decay(G=numbers.G, J=section.J, E=numbers.E, C_w=section.C_w)
    b_t = jump(z_f=section.z_f, z_s=section.z_s, M_zt=actions.reactions.M_zt)
    ends = (numbers.x_start, numbers.x_end)
    with at("warping free"):
        out = [_along(actions, spans_between(*ends, (), j_end=1), k, loads, b_t)]
    if numbers.closed_zones:
        faces = tuple(Span(a, b, -1, -1) for a, b in numbers.closed_zones)
        with at("warping held at the side plates' faces"):
            out.append(_along(actions, spans_between(*ends, faces, j_end=1), k, loads, b_t))
    return out


def internal_actions(numbers: Numbers, actions: Actions) -> dict[str, Array]:
    """N, V_y, V_z, M_y, M_z and the torque T about the shear centre, at the stations. [N, N·m]

    For an open section also T_w, the share of T that warping carries, and the bimoment B
    [N·m²]; of two bounds the larger at each station.
    """
    out = {name: getattr(actions, name) for name in ("N", "V_y", "V_z", "M_y", "M_z")}
    out["T"] = actions.torque(actions.torques(numbers.section.z_s))
    if numbers.section.open:
        first, *others = bounds(numbers, actions)
        for name in Warping._fields:
            out[name] = getattr(first, name)
            for bound in others:
                other = getattr(bound, name)
                out[name] = np.where(abs(other) > abs(out[name]), other, out[name])
    return {name: np.broadcast_to(value, actions.x.shape) for name, value in out.items()}


def _along(
    actions: Actions, spans: tuple[Span, ...], k: Array, loads: dict[str, Array], b_t: Array
) -> Warping:
    x, patches = actions.x, actions.frame.patches
    total_B: Array = 0.0
    total_T: Array = 0.0
    torques = {f"T_{tag}": loads[name] for tag, name in PLACES.items()}
    for span in spans:
        if np.ndim(x) == 0 and not span.start <= x <= span.end:
            continue  # a replayed station lies on one span: print no zeros of the others
        c, d = {}, {}
        for tag, name in PLACES.items():
            on = place(x, patches[name], span, k)
            with at(name):
                c[f"c_{tag}"], d[f"d_{tag}"] = influence(on), influence(on, slope=True)
        with at("fixed tool, sideways moment"):  # the last placed load is the fixed tool
            c["c_b"], d["d_b"] = influence(on, jump=True), influence(on, jump=True, slope=True)
        B = bimoment(**torques, b_t=b_t, **c)
        T_w = warping_torque(**torques, b_t=b_t, **d)
        if span.j_l == -1 or span.j_r == -1:
            T_l, c_l, d_l = _end(actions, span, k, loads, span.start, span.j_l, NEXT_TO)
            T_r, c_r, d_r = _end(actions, span, k, loads, span.end, span.j_r, -NEXT_TO)
            B = held_bimoment(B=B, T_l=T_l, c_l=c_l, T_r=T_r, c_r=c_r)
            T_w = held_warping_torque(T_w=T_w, T_l=T_l, d_l=d_l, T_r=T_r, d_r=d_r)
        total_B, total_T = total_B + B, total_T + T_w
    return Warping(total_B, total_T)


def _end(
    actions: Actions,
    span: Span,
    k: Array,
    loads: dict[str, Array],
    face: Array,
    j: int,
    step: float,
) -> tuple[Array, Array, Array]:
    """Torque that a held face passes on, and its coefficients; zeros at a free end."""
    if j == 1:
        return 0.0, 0.0, 0.0
    load = (face + step, face + step)
    on = place(actions.x, load, span, k)
    with at("side plates' face"):
        return actions.torque(loads, face), influence(on), influence(on, slope=True)
