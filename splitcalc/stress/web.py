"""Web cross-bending of an open section: the loaded flange rolls and bends the web across.

Torque about the loaded flange's mid-line (side force times its height over it, the sled's roll
couple, the thrust's lean times its offset) reaches the section by bending the web out of its
plane. The flange is a torsion bar that rests on the web as on a rotational spring.

The strength is static: the web's plastic plate moment, reduced for the membrane stress across,
the stress along and the shear at the same place. With sigma_x, the mean stress across sigma_m and
tau constant through the wall, the stress across may jump between the two values allowed by
von Mises' condition; that gives a lower bound, and solved for the load it gives the equivalent
stress below in closed form:  sigma_q^2 = s + m^2/2 + |m| sqrt((sigma_m - sigma_x/2)^2 + m^2/4),
s von Mises' membrane stress squared, m = 4 m_w / t_w^2. It is convex in the actions.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy import maximum, sqrt

from splitcalc.equations import at, equation
from splitcalc.machine.numbers import Numbers
from splitcalc.stress.normal_and_shear import NAVIER
from splitcalc.stress.span import Span, influence, place, spans_between
from splitcalc.thrust.statics import Actions, tool_moment_up

Array = Any

ROLL = "derived: torsion bar (flange) on a rotational spring (web); checked by finite elements"
PLATE = "derived: lower bound of limit analysis, von Mises' condition in plane stress"


@equation(gives="k_w", source="plate of unit length, far edge held: 3·D/h")
def web_spring(*, E: Array, nu: Array, t_w: Array, h_o: Array) -> Array:
    D = E * t_w**3 / (12 * (1 - nu**2))
    return 3 * D / h_o


@equation(gives="kappa", source=ROLL)
def roll_decay(*, k_w: Array, G: Array, b_f: Array, t_f: Array) -> Array:
    J_f = b_f * t_f**3 / 3
    return sqrt(k_w / (G * J_f))


@equation(gives="m_w", source=ROLL)
def web_moment(
    *, kappa: Array, T_1: Array, T_2: Array, T_t: Array, c_1: Array, c_2: Array, c_t: Array,
) -> Array:  # fmt: skip
    return -(kappa**2) * (T_1 * c_1 + T_2 * c_2 + T_t * c_t)


@equation(gives="n_m", source="linear along the weld, spread 1:1 through flange and fillet")
def line_force_tool(
    *, F: Array, tan_alpha: Array, M_yt: Array, x: Array, x_c: Array, l_w: Array, i_t: Array
) -> Array:
    return i_t * (F * tan_alpha / l_w - 12 * M_yt * (x - x_c) / l_w**3)


@equation(gives="n_m", source="even along the pad, spread 1:1 through flange and fillet")
def line_force(*, n_m: Array, Z_1: Array, Z_2: Array, l_q: Array, i_1: Array, i_2: Array) -> Array:
    return n_m + Z_1 * i_1 / l_q + Z_2 * i_2 / l_q


@equation(gives="sigma_x", source=NAVIER + ", on the web")
def web_along(*, N: Array, A: Array, M_y: Array, z_w: Array, I_y: Array) -> Array:
    return N / A + M_y * z_w / I_y


@equation(gives="tau", source="shear flow V·Q/(I·t) at the top of the web")
def web_shear(*, V_z: Array, Q_yw: Array, I_y: Array, t_w: Array) -> Array:
    return V_z * Q_yw / (I_y * t_w)


@equation(gives="sigma_q", source=PLATE)
def web_equivalent(*, m_w: Array, n_m: Array, sigma_x: Array, tau: Array, t_w: Array) -> Array:
    sigma_m = n_m / t_w
    m = abs(4 * m_w / t_w**2)
    s = sigma_x**2 - sigma_x * sigma_m + sigma_m**2 + 3 * tau**2
    return sqrt(s + m**2 / 2 + m * sqrt((sigma_m - sigma_x / 2) ** 2 + m**2 / 4))


def _loaded(x: Array, ends: tuple[Array, Array], c: Array) -> Array:
    return ((x >= ends[0] - c) & (x <= ends[1] + c)) * 1.0


def membrane_line_force(numbers: Numbers, actions: Actions) -> Array:
    """Force per length that pulls the top of the web up (+) or presses it. [N/m]"""
    section, frame, to = numbers.section, actions.frame, actions.reactions
    c = section.t_f + section.r
    x_c = (frame.x_3 + frame.x_4) / 2
    patches = frame.patches
    with at("fixed tool, at the sliding face"):
        M_yt = tool_moment_up(
            F=frame.F,
            e=frame.e,
            b_z=frame.log.b_z,
            z_o=section.z_t,
            tan_alpha=to.tan_alpha,
            x_B=frame.x_B,
            x_c=x_c,
        )
    with at("fixed tool"):
        tool = line_force_tool(
            F=frame.F,
            tan_alpha=to.tan_alpha,
            M_yt=M_yt,
            x=actions.x,
            x_c=x_c,
            l_w=frame.x_4 - frame.x_3 + 2 * c,
            i_t=_loaded(actions.x, patches["fixed tool"], c),
        )
    return line_force(
        n_m=tool,
        Z_1=to.Z_1,
        Z_2=to.Z_2,
        l_q=frame.l_p + 2 * c,
        i_1=_loaded(actions.x, patches["rear pad"], c),
        i_2=_loaded(actions.x, patches["front pad"], c),
    )


def cross_moments(numbers: Numbers, actions: Actions) -> list[Array]:
    """Plate moment at the top of the web, once for each split of the roll couple. [N·m/m]

    All ends of the beam are free to roll. A full-depth stiffener holds the flange against the
    section, a stretch closed by side plates likewise: no moment there.
    """
    section, frame, x = numbers.section, actions.frame, actions.x
    k_w = web_spring(E=numbers.E, nu=numbers.nu, t_w=section.t_w, h_o=section.h_o)
    kappa = roll_decay(k_w=k_w, G=numbers.G, b_f=section.b_f, t_f=section.t_f)
    held = [(s, s) for s in numbers.stiffeners] + list(numbers.closed_zones)
    breaks = tuple(Span(a, b, 1, 1) for a, b in sorted(held))
    spans = spans_between(numbers.x_start, numbers.x_end, breaks, j_end=-1)
    if np.ndim(x) == 0:
        spans = tuple(s for s in spans if s.start <= x <= s.end) or spans[:1]
    coefficients: dict[str, Array] = {}
    for name, patch in (("c_1", "rear pad"), ("c_2", "front pad"), ("c_t", "fixed tool")):
        with at(patch):
            coefficients[name] = sum(
                influence(place(x, frame.patches[patch], span, kappa)) for span in spans
            )
    out = []
    for share, name in ((frame.r_2, "roll as given"), (0.5, "roll half and half")):
        with at(name):
            torques = actions.torques(section.z_f, share)
            out.append(
                web_moment(
                    kappa=kappa,
                    T_1=torques["rear pad"],
                    T_2=torques["front pad"],
                    T_t=torques["fixed tool"],
                    **coefficients,
                )
            )
    return out


def web_stress(numbers: Numbers, actions: Actions) -> Array:
    """Equivalent stress at the top of the web, the worse split of the roll. [Pa]"""
    section = numbers.section
    sigma_x = web_along(N=actions.N, A=section.A, M_y=actions.M_y, z_w=section.z_w, I_y=section.I_y)
    tau = web_shear(V_z=actions.V_z, Q_yw=section.Q_yw, I_y=section.I_y, t_w=section.t_w)
    n_m = membrane_line_force(numbers, actions)
    worst: Array = 0.0
    for m_w in cross_moments(numbers, actions):
        worst = maximum(
            worst, web_equivalent(m_w=m_w, n_m=n_m, sigma_x=sigma_x, tau=tau, t_w=section.t_w)
        )
    return worst
