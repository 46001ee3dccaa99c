"""Stress at the named points of a section: sigma_x, tau and the von Mises stress.

Open sections: bending, axial force, bimoment; shear flow, warping shear and St Venant shear, the
last in the worse sense (it has opposite signs on the two faces of a wall). Closed sections:
bending, axial force and an allowance for their distortion; shear flow and Bredt's cell flow.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy import maximum, sqrt

from splitcalc.equations import at, equation
from splitcalc.machine.numbers import Numbers
from splitcalc.stress.bimoment import bounds
from splitcalc.thrust.statics import Actions

Array = Any

NAVIER = "beam theory: axial force and bending about both principal axes"
FLOW = "shear flow of thin-walled sections, V·Q/(I·t)"
ALLOWANCE = (
    "derived: 25 % for the distortion of a closed section, set from solid finite elements of an "
    "unstiffened 200 × 100 × 8 hollow section"
)
DISTORTION_SHARE = 0.25


@equation(gives="sigma_x", source=NAVIER)
def bending_stress(
    *, N: Array, A: Array, M_y: Array, I_y: Array, M_z: Array, I_z: Array, y: Array, z: Array
) -> Array:
    return N / A + M_y / I_y * z - M_z / I_z * y


@equation(gives="sigma_x", source=NAVIER + "; bimoment: V. Z. Vlasov (from memory)")
def warping_stress(
    *, N: Array, A: Array, M_y: Array, I_y: Array, M_z: Array, I_z: Array, B: Array, C_w: Array,
    y: Array, z: Array, omega: Array,
) -> Array:  # fmt: skip
    return N / A + M_y / I_y * z - M_z / I_z * y + B / C_w * omega


@equation(gives="T_v", source="St Venant's share is what warping leaves of the torque")
def st_venant_torque(*, T: Array, T_w: Array) -> Array:
    return T - T_w


@equation(gives="tau", source=FLOW + "; St Venant T·t/J on the face where it adds")
def open_shear(
    *, V_y: Array, V_z: Array, T_w: Array, T_v: Array, Q_z: Array, Q_y: Array, Q_w: Array,
    I_z: Array, I_y: Array, C_w: Array, J: Array, t: Array,
) -> Array:  # fmt: skip
    return abs(V_y / I_z * Q_z + V_z / I_y * Q_y - T_w / C_w * Q_w) / t + abs(T_v) / J * t


@equation(gives="tau", source=FLOW + "; Bredt's cell flow")
def closed_shear(
    *, V_y: Array, V_z: Array, T: Array, Q_z: Array, Q_y: Array, psi: Array, I_z: Array, I_y: Array,
    t: Array,
) -> Array:  # fmt: skip
    return abs(V_y / I_z * Q_z + V_z / I_y * Q_y - T * psi) / t


@equation(gives="sigma_max", source=NAVIER + ", at the worst corner")
def largest_corner_stress(
    *, N: Array, A: Array, M_y: Array, I_y: Array, M_z: Array, I_z: Array, z_t: Array, y_t: Array,
    z_b: Array, y_b: Array,
) -> Array:  # fmt: skip
    sigma_t = abs(N / A + M_y * z_t / I_y) + abs(M_z) * y_t / I_z
    sigma_b = abs(N / A + M_y * z_b / I_y) + abs(M_z) * y_b / I_z
    return maximum(sigma_t, sigma_b)


@equation(gives="sigma_d", source=ALLOWANCE)
def with_distortion(*, sigma_x: Array, sigma_max: Array, c_d: Array) -> Array:
    return abs(sigma_x) + c_d * sigma_max


@equation(gives="sigma_v", source="von Mises")
def von_mises(*, sigma_x: Array, tau: Array) -> Array:
    return sqrt(sigma_x**2 + 3 * tau**2)


def distortion_share(numbers: Numbers, actions: Actions) -> Array:
    """The allowance's share at the stations: 0.25 within reach of a load that no diaphragm meets.

    A diaphragm counts at the fixed tool when it stands between the ends of its root weld. None
    can stand under the travelling sled.
    """
    reach = numbers.section.reach
    near: Array = False
    for place, (start, end) in actions.frame.patches.items():
        if place == "mount":
            continue
        within = (actions.x >= start - reach) & (actions.x <= end + reach)
        if place == "fixed tool":
            for x in numbers.diaphragms:
                within = within & ~((x >= start) & (x <= end))
        near = near | within
    return DISTORTION_SHARE * near


def _bending(numbers: Numbers, actions: Actions) -> dict[str, Array]:
    section = numbers.section
    return {
        "N": actions.N,
        "A": section.A,
        "M_y": actions.M_y,
        "I_y": section.I_y,
        "M_z": actions.M_z,
        "I_z": section.I_z,
    }


def point_stresses(numbers: Numbers, actions: Actions) -> list[tuple[Array, Array]]:
    """(sigma_x, tau) at stations and points, once for each bound on warping. [Pa]

    Shapes `samples + (n, p)`. For a closed section sigma_x is the size of the stress with its
    allowance, so it has no sign; use `bending_stress` to see the sign.
    """
    section, points = numbers.section, numbers.section.points
    bending = _bending(numbers, actions)
    flow = {
        "V_y": actions.V_y,
        "V_z": actions.V_z,
        "Q_z": points.Q_z,
        "Q_y": points.Q_y,
        "I_z": section.I_z,
        "I_y": section.I_y,
        "t": points.t,
    }
    T = actions.torque(actions.torques(section.z_s))
    if not section.open:
        corner = largest_corner_stress(
            z_t=section.z_t, y_t=section.y_t, z_b=section.z_b, y_b=section.y_b, **bending
        )
        sigma = bending_stress(y=points.y, z=points.z, **bending)
        share = distortion_share(numbers, actions)
        return [
            (
                with_distortion(sigma_x=sigma, sigma_max=corner, c_d=share),
                closed_shear(T=T, psi=points.psi, **flow),
            )
        ]
    out = []
    for B, T_w in bounds(numbers, actions):
        sigma = warping_stress(
            B=B, C_w=section.C_w, y=points.y, z=points.z, omega=points.omega, **bending
        )
        T_v = st_venant_torque(T=T, T_w=T_w)
        tau = open_shear(T_w=T_w, T_v=T_v, Q_w=points.Q_w, C_w=section.C_w, J=section.J, **flow)
        out.append((sigma, tau))
    return out


def signed_stresses(numbers: Numbers, actions: Actions) -> Array:
    """Normal stress with its sign, without allowances, the larger bound. [Pa], for pictures."""
    section, points = numbers.section, numbers.section.points
    if not section.open:
        return bending_stress(y=points.y, z=points.z, **_bending(numbers, actions))
    first, *others = (sigma for sigma, _ in point_stresses(numbers, actions))
    for sigma in others:
        first = np.where(abs(sigma) > abs(first), sigma, first)
    return first


def equivalent_stress(numbers: Numbers, actions: Actions) -> Array:
    """Von Mises stress at stations and points, the worse bound. [Pa], `samples + (n, p)`."""
    worst: Array = None
    for sigma, tau in point_stresses(numbers, actions):
        with at("the worse bound counts" if worst is not None else ""):
            value = von_mises(sigma_x=sigma, tau=tau)
        worst = value if worst is None else maximum(worst, value)
    return worst
