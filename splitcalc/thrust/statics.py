"""Statics of the thrust: slopes, reactions of sled and fixed tool, internal actions.

Internal actions are what the part with larger x exerts on the part with smaller x. Loads act
evenly over their lengths: a pad over itself, the fixed tool over its root weld.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from splitcalc.equations import at, equation
from splitcalc.thrust.frame import Array, Frame, lever, remaining

STATICS = "statics"


# --- the line of thrust --------------------------------------------------------------------


@equation(gives="tan_alpha", source=STATICS)
def slope_up(*, a_z: Array, b_z: Array, l_AB: Array) -> Array:
    return (b_z - a_z) / l_AB


@equation(gives="tan_beta", source=STATICS)
def slope_side(*, a_y: Array, b_y: Array, l_AB: Array) -> Array:
    return (b_y - a_y) / l_AB


# --- pads: force of the sled on the beam -----------------------------------------------------


@equation(gives="Z_1", source=STATICS)
def rear_pad_up(
    *, F: Array, a_z: Array, tan_alpha: Array, x_A: Array, x_1: Array, x_2: Array
) -> Array:
    return -F * (a_z - (x_A - x_2) * tan_alpha) / (x_2 - x_1)


@equation(gives="Y_1", source=STATICS)
def rear_pad_side(
    *, F: Array, a_y: Array, tan_beta: Array, x_A: Array, x_1: Array, x_2: Array
) -> Array:
    return -F * (a_y - (x_A - x_2) * tan_beta) / (x_2 - x_1)


@equation(gives="Z_2", source=STATICS)
def front_pad_up(*, F: Array, tan_alpha: Array, Z_1: Array) -> Array:
    return -F * tan_alpha - Z_1


@equation(gives="Y_2", source=STATICS)
def front_pad_side(*, F: Array, tan_beta: Array, Y_1: Array) -> Array:
    return -F * tan_beta - Y_1


@equation(gives="K", source=STATICS)
def roll_couple(
    *, F: Array, e: Array, a_y: Array, a_z: Array, z_p: Array, tan_alpha: Array, tan_beta: Array,
) -> Array:  # fmt: skip
    return F * ((e + a_z - z_p) * tan_beta - a_y * tan_alpha)


@equation(gives="T_p", source=STATICS)
def pad_torque(*, z_p: Array, z_o: Array, Y: Array, K: Array, r: Array) -> Array:
    return r * K - (z_p - z_o) * Y


# --- fixed tool ------------------------------------------------------------------------------


@equation(gives="T_t", source=STATICS)
def tool_torque(
    *, F: Array, e: Array, b_y: Array, b_z: Array, z_o: Array, tan_alpha: Array, tan_beta: Array
) -> Array:
    return F * (b_y * tan_alpha - (e + b_z - z_o) * tan_beta)


@equation(gives="M_yt", source=STATICS)
def tool_moment_up(
    *, F: Array, e: Array, b_z: Array, z_o: Array, tan_alpha: Array, x_B: Array, x_c: Array
) -> Array:
    return F * (e + b_z - z_o) - F * tan_alpha * (x_B - x_c)


@equation(gives="M_zt", source=STATICS)
def tool_moment_side(*, F: Array, b_y: Array, tan_beta: Array, x_B: Array, x_c: Array) -> Array:
    return F * tan_beta * (x_B - x_c) - F * b_y


# --- actions at a section: the loads beyond x ------------------------------------------------


@equation(gives="N", source=STATICS)
def axial_force(*, F: Array, rho_m: Array, rho_t: Array) -> Array:
    return F * (rho_t - rho_m)


@equation(gives="V_y", source=STATICS)
def shear_side(
    *, F: Array, tan_beta: Array, Y_1: Array, Y_2: Array, rho_1: Array, rho_2: Array, rho_t: Array,
) -> Array:  # fmt: skip
    return F * tan_beta * rho_t + Y_1 * rho_1 + Y_2 * rho_2


@equation(gives="V_z", source=STATICS)
def shear_up(
    *, F: Array, tan_alpha: Array, Z_1: Array, Z_2: Array, rho_1: Array, rho_2: Array, rho_t: Array,
) -> Array:  # fmt: skip
    return F * tan_alpha * rho_t + Z_1 * rho_1 + Z_2 * rho_2


@equation(gives="M_y", source=STATICS)
def moment_up(
    *, F: Array, e: Array, tan_alpha: Array, M_yt: Array, Z_1: Array, Z_2: Array, rho_m: Array,
    rho_t: Array, g_1: Array, g_2: Array, g_t: Array,
) -> Array:  # fmt: skip
    return M_yt * rho_t - F * e * rho_m - F * tan_alpha * g_t - Z_1 * g_1 - Z_2 * g_2


@equation(gives="M_z", source=STATICS)
def moment_side(
    *, F: Array, tan_beta: Array, M_zt: Array, Y_1: Array, Y_2: Array, rho_t: Array, g_1: Array,
    g_2: Array, g_t: Array,
) -> Array:  # fmt: skip
    return M_zt * rho_t + F * tan_beta * g_t + Y_1 * g_1 + Y_2 * g_2


@equation(gives="T", source=STATICS)
def torque(
    *, T_1: Array, T_2: Array, T_t: Array, rho_1: Array, rho_2: Array, rho_t: Array
) -> Array:
    return T_1 * rho_1 + T_2 * rho_2 + T_t * rho_t


@dataclass(frozen=True, eq=False)
class Reactions:
    """Forces on the beam from sled and fixed tool. [N, N·m]

    Pads: side force `Y`, force up `Z`, roll couple `K` of both. Fixed tool: the cylinder force
    along the line of thrust, its moments about the weld's middle on the centroid's axis.
    """

    tan_alpha: Array
    tan_beta: Array
    Y_1: Array
    Z_1: Array
    Y_2: Array
    Z_2: Array
    K: Array
    M_yt: Array
    M_zt: Array


@dataclass(frozen=True, eq=False)
class Actions:
    """Internal actions at stations x, and the loads that make them. [N, N·m, m]"""

    frame: Frame
    reactions: Reactions
    x: Array
    N: Array
    V_y: Array
    V_z: Array
    M_y: Array
    M_z: Array

    def torques(self, z_o: Array, r_2: Array | None = None) -> dict[str, Array]:
        """Torque that each load puts on the beam about a line at height z_o. [N·m]

        `r_2` replaces the frame's share of the roll couple at the front pad.
        """
        frame, to = self.frame, self.reactions
        share = frame.r_2 if r_2 is None else r_2
        out = {}
        for place, force, r in (
            ("rear pad", to.Y_1, 1 - share),
            ("front pad", to.Y_2, share),
        ):
            with at(place):
                out[place] = pad_torque(z_p=frame.z_p, z_o=z_o, Y=force, K=to.K, r=r)
        with at("fixed tool"):
            out["fixed tool"] = tool_torque(
                F=frame.F,
                e=frame.e,
                b_y=frame.log.b_y,
                b_z=frame.log.b_z,
                z_o=z_o,
                tan_alpha=to.tan_alpha,
                tan_beta=to.tan_beta,
            )
        return out

    def torque(self, torques: dict[str, Array], x: Array | None = None) -> Array:
        """Internal torque at the stations (or at x) from those torques. [N·m]"""
        x = self.x if x is None else x
        beyond = {place: remaining(x, *ends) for place, ends in self.frame.patches.items()}
        return torque(
            T_1=torques["rear pad"],
            T_2=torques["front pad"],
            T_t=torques["fixed tool"],
            rho_1=beyond["rear pad"],
            rho_2=beyond["front pad"],
            rho_t=beyond["fixed tool"],
        )


def reactions(frame: Frame) -> Reactions:
    """Statics of the free sled and of the fixed tool."""
    log = frame.log
    tan_alpha = slope_up(a_z=log.a_z, b_z=log.b_z, l_AB=log.l_AB)
    tan_beta = slope_side(a_y=log.a_y, b_y=log.b_y, l_AB=log.l_AB)
    sled = {"F": frame.F, "x_A": frame.x_A, "x_1": frame.x_1, "x_2": frame.x_2}
    Z_1 = rear_pad_up(a_z=log.a_z, tan_alpha=tan_alpha, **sled)
    Y_1 = rear_pad_side(a_y=log.a_y, tan_beta=tan_beta, **sled)
    x_c = (frame.x_3 + frame.x_4) / 2
    return Reactions(
        tan_alpha,
        tan_beta,
        Y_1,
        Z_1,
        front_pad_side(F=frame.F, tan_beta=tan_beta, Y_1=Y_1),
        front_pad_up(F=frame.F, tan_alpha=tan_alpha, Z_1=Z_1),
        roll_couple(
            F=frame.F,
            e=frame.e,
            a_y=log.a_y,
            a_z=log.a_z,
            z_p=frame.z_p,
            tan_alpha=tan_alpha,
            tan_beta=tan_beta,
        ),
        tool_moment_up(
            F=frame.F,
            e=frame.e,
            b_z=log.b_z,
            z_o=0.0,
            tan_alpha=tan_alpha,
            x_B=frame.x_B,
            x_c=x_c,
        ),
        tool_moment_side(F=frame.F, b_y=log.b_y, tan_beta=tan_beta, x_B=frame.x_B, x_c=x_c),
    )


def actions(frame: Frame, x: Array) -> Actions:
    """Internal actions at the stations x, by the loads beyond each station.

    Parameters
    ----------
    frame : values of shape `samples + (1, 1)` or scalars
    x : stations, shape `samples + (n, 1)`, or a scalar [m]
    """
    to = reactions(frame)
    rho = {place: remaining(x, *ends) for place, ends in frame.patches.items()}
    g = {place: lever(x, *ends) for place, ends in frame.patches.items()}
    shares = {"rho_1": rho["rear pad"], "rho_2": rho["front pad"], "rho_t": rho["fixed tool"]}
    levers = {"g_1": g["rear pad"], "g_2": g["front pad"], "g_t": g["fixed tool"]}
    up = {"F": frame.F, "tan_alpha": to.tan_alpha, "Z_1": to.Z_1, "Z_2": to.Z_2}
    side = {"F": frame.F, "tan_beta": to.tan_beta, "Y_1": to.Y_1, "Y_2": to.Y_2}
    ends = {"rho_m": rho["mount"], "rho_t": rho["fixed tool"]}
    return Actions(
        frame,
        to,
        x,
        axial_force(F=frame.F, **ends),
        shear_side(**side, **shares),
        shear_up(**up, **shares),
        moment_up(e=frame.e, M_yt=to.M_yt, **ends, **up, **levers),
        moment_side(M_zt=to.M_zt, rho_t=rho["fixed tool"], **side, **levers),
    )


# --- contact corners -------------------------------------------------------------------------


@equation(gives="Z_L", source=STATICS)
def left_corner(*, Z: Array, K_i: Array, y_L: Array, y_R: Array) -> Array:
    return (K_i + Z * y_R) / (y_L + y_R)


@equation(gives="Z_R", source=STATICS)
def right_corner(*, Z: Array, K_i: Array, y_L: Array, y_R: Array) -> Array:
    return (Z * y_L - K_i) / (y_L + y_R)


def corners(Z: Array, K_i: Array, y_push: Array, y_gib: Array) -> tuple[Array, Array]:
    """Forces of one pad's left and right corner on the beam; up is the pull of a gib. [N]

    Contact is one-sided: a corner pushes down at `y_push` or pulls up at `y_gib`. With a small
    roll both corners do what the pad does; past that one pushes and one pulls.
    """
    both = np.abs(K_i) <= np.abs(Z) * np.where(Z > 0, y_gib, y_push)
    left_pulls = np.where(both, Z > 0, K_i > 0)
    right_pulls = np.where(both, Z > 0, K_i < 0)
    arms = {
        "y_L": np.where(left_pulls, y_gib, y_push),
        "y_R": np.where(right_pulls, y_gib, y_push),
    }
    return left_corner(Z=Z, K_i=K_i, **arms), right_corner(Z=Z, K_i=K_i, **arms)


def six_sums(frame: Frame) -> np.ndarray:
    """Sum of forces and moments on the whole beam, shape samples + (6,); zero when in balance.

    Moments about the origin of x on the centroid's axis. Built from the reactions' points of
    attack, not from the section actions: a check that shares no arithmetic with them.
    """
    to, log = reactions(frame), frame.log
    tool = (frame.F, frame.F * to.tan_beta, frame.F * to.tan_alpha)
    loads = [
        ((frame.x_m, 0.0, frame.e), (-frame.F, 0.0, 0.0), 0.0),
        ((frame.x_1, 0.0, frame.z_p), (0.0, to.Y_1, to.Z_1), (1 - frame.r_2) * to.K),
        ((frame.x_2, 0.0, frame.z_p), (0.0, to.Y_2, to.Z_2), frame.r_2 * to.K),
        ((frame.x_B, log.b_y, frame.e + log.b_z), tool, 0.0),
    ]
    total: list[Any] = [0.0] * 6
    for (x, y, z), (fx, fy, fz), roll in loads:
        parts = (fx, fy, fz, y * fz - z * fy + roll, z * fx - x * fz, x * fy - y * fx)
        total = [a + b for a, b in zip(total, parts, strict=True)]
    return np.stack(np.broadcast_arrays(*total), axis=-1)
