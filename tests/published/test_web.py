"""Web cross-bending against closed forms, a numerical solution and limit analysis.

The roll of the flange: a torsion bar on a rotational spring, closed form for a long beam and
finite differences for one with stiffeners. The strength: the largest plate moment that a linear
programme finds over 200 layers under von Mises' condition, two-block stress not presupposed.
"""

import tomllib
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import trapezoid
from scipy.linalg import solve_banded
from scipy.optimize import linprog

from splitcalc.shapes.section import Section
from splitcalc.stress.normal_and_shear import bending_stress, open_shear
from splitcalc.stress.web import (
    cross_moments,
    membrane_line_force,
    web_along,
    web_equivalent,
    web_shear,
    web_stress,
)
from splitcalc.thrust.frame import Frame
from splitcalc.thrust.statics import Actions, actions, reactions
from tests.published.test_torsion import SKEW_I, SPREAD, machine, table_section

DATA = tomllib.loads(Path(__file__).with_name("web.toml").read_text("utf-8"))
STEEL = {"E": 205e9, "G": 79e9, "nu": 0.3}
W8X31 = table_section("W8x31")
PSI, INCH = 6894.757293168, 0.0254


def web_machine(section: Section, start: float, end: float, **more: Any) -> Any:
    return machine(section, start, end, **{"stiffeners": (), **STEEL, **more})


def spring_and_bar(section: Section, steel: dict[str, float]) -> tuple[float, float]:
    """k_w: a strip of web held at the far flange, M = 3 D/h per unit turn; G J of the flange."""
    plate = steel["E"] * section.t_w**3 / 12 / (1 - steel["nu"] ** 2)
    return 3 * plate / section.h_o, steel["G"] * section.b_f * section.t_f**3 / 3


# --- the flange's roll ---------------------------------------------------------------------------


@pytest.mark.parametrize(("end", "factor"), [(30.0, 1.0), (20.0, 2.0)], ids=["long", "free end"])
def test_one_roll_spreads_by_the_closed_form(end: float, factor: float) -> None:
    """m = t/(2 lambda) exp(-|x|/lambda) far from an end, twice that at a free one."""
    section, z_f = W8X31, W8X31.z_f
    frame = Frame.from_points(
        F=150e3,
        lug=(0.0, 0.2),
        rod=(1.0, 0.2),
        pads=((0.8, z_f), (1.0, z_f)),
        A=(1.1, -0.5, 0.2),
        B=(20.0, 0.5, 0.25),
        tool=(20.0, 20.0),
    )
    to = reactions(frame)
    roll = frame.F * (0.5 * to.tan_alpha - (0.25 - z_f) * to.tan_beta)
    k_w, bar = spring_and_bar(section, STEEL)
    reach = np.sqrt(bar / k_w)
    x = np.array([20.0, 20 - reach, 20 - 2.5 * reach])
    expected = factor * roll / (2 * reach) * np.exp(-(20 - x) / reach)
    for m_w in cross_moments(web_machine(section, -1.0, end), actions(frame, x[:, None])):
        assert m_w[:, 0] == pytest.approx(expected, rel=1e-9)


STEP = 0.25e-3


def numerical_roll(numbers: Any, frame: Frame, r_2: float) -> tuple[np.ndarray, np.ndarray]:
    """x and the web's moment k_w theta, from G J theta'' = k_w theta - t, by finite differences.

    theta is zero at stiffeners and in closed stretches, its slope zero at the beam's ends.
    """
    section, to, log = numbers.section, reactions(frame), frame.log
    k_w, bar = spring_and_bar(section, vars(numbers))
    x = np.linspace(numbers.x_start, numbers.x_end, 1 + round((numbers.x_end + 0.1) / STEP))
    half, arm = frame.l_p / 2, section.z_f - frame.z_p
    height = frame.e + log.b_z - section.z_f
    t = np.zeros_like(x)
    for roll, first, last in (
        (arm * to.Y_1 + (1 - r_2) * to.K, frame.x_1 - half, frame.x_1 + half),
        (arm * to.Y_2 + r_2 * to.K, frame.x_2 - half, frame.x_2 + half),
        (frame.F * (log.b_y * to.tan_alpha - height * to.tan_beta), frame.x_3, frame.x_4),
    ):
        # at the ends of a load half of it counts
        inside = np.mean([(x >= first - s) & (x <= last - s) for s in (-1e-6, 1e-6)], axis=0)
        t += roll / (last - first) * inside
    bands = np.ones((3, x.size))
    bands[1] = -2 - k_w / bar * STEP**2
    right = -t / bar * STEP**2
    bands[0, 1], bands[2, -2] = 2, 2
    held = [(s, s) for s in numbers.stiffeners] + list(numbers.closed_zones)
    fixed = np.any([(x > a - 1e-6) & (x < b + 1e-6) for a, b in held], axis=0)
    bands[1, fixed], right[fixed] = 1, 0
    bands[0, 1:][fixed[:-1]] = 0
    bands[2, :-1][fixed[1:]] = 0
    return x, k_w * solve_banded((1, 1), bands, right)


@pytest.mark.parametrize(
    "held",
    [
        {"stiffeners": (0.9, 1.05)},
        {"stiffeners": (0.55, 1.03), "closed_zones": ((0.05, 0.38),)},
    ],
    ids=["two stiffeners", "and a closed stretch"],
)
def test_roll_with_stiffeners_is_that_of_a_numerical_solution(held: dict[str, Any]) -> None:
    frame = replace(SPREAD, r_2=0.9, z_p=SPREAD.z_p + 0.004)
    numbers = web_machine(SKEW_I, -0.1, 1.3, **held)
    for number, r_2 in enumerate((0.9, 0.5)):
        x, theirs = numerical_roll(numbers, frame, r_2)
        some = slice(3, -3, 37)
        ours = cross_moments(numbers, actions(frame, x[some, None]))[number]
        # the differences err by 4e-8, a quarter of that at half the step
        assert ours[:, 0] == pytest.approx(theirs[some], abs=1e-7 * abs(theirs).max())
        for at in (0.2, 0.52, 1.06):
            (alone,) = np.ravel(cross_moments(numbers, actions(frame, at))[number])
            assert alone == pytest.approx(np.interp(at, x, theirs), abs=1e-7 * abs(theirs).max())


def test_roll_at_the_sled_against_solid_elements() -> None:
    told = DATA["solid"]
    inch = {name: value * INCH for name, value in told["inch"].items()}
    section = table_section(told["shape"])
    face, e, pad = 1.0, section.z_t + inch["axis"], inch["guide"] / 3
    edge = face + inch["opening"]
    frame = Frame.from_points(
        F=told["F"],
        lug=(0.0, e),
        rod=(face, e),
        pads=((face - inch["guide"] + pad / 2, section.z_f), (face - pad / 2, section.z_f)),
        A=(face, -told["slope"] * inch["opening"], e),
        B=(edge, 0.0, e),
        tool=(edge, edge + inch["weld"]),
        pad_length=pad,
    )
    assert reactions(frame).tan_beta == pytest.approx(told["slope"])
    x = np.linspace(face - inch["guide"], face, 201)[:, None]
    steel = {"E": told["E"] * 1e3 * PSI, "G": told["G"] * 1e3 * PSI, "nu": told["nu"]}
    as_given, _ = cross_moments(web_machine(section, -0.25, frame.x_4, **steel), actions(frame, x))
    bent = abs(6 * as_given / section.t_w**2).max() / 1e6
    ratio = 1 + told["formula_over_solid"]
    assert bent / max(told["sled"]) == pytest.approx(ratio, abs=told["share"])


# --- stresses beside it --------------------------------------------------------------------------


@pytest.mark.parametrize("section", [SKEW_I, W8X31], ids=["plates", "with fillets"])
def test_force_across_the_web_carries_pads_and_tool(section: Section) -> None:
    numbers = web_machine(section, -0.1, 1.3)
    to, c = reactions(SPREAD), section.t_f + section.r
    for first, last, force in ((0.22, 0.28, to.Z_1), (0.37, 0.43, to.Z_2)):
        x = np.linspace(first - c, last + c, 11)
        n_m = membrane_line_force(numbers, actions(SPREAD, x[:, None]))[:, 0]
        assert trapezoid(n_m, x) == pytest.approx(force, rel=1e-12)
    x = np.linspace(0.96 - c, 1.10 + c, 2001)
    n_m = membrane_line_force(numbers, actions(SPREAD, x[:, None]))[:, 0]
    lift = SPREAD.F * to.tan_alpha
    assert trapezoid(n_m, x) == pytest.approx(lift, rel=1e-9)
    # moment of the thrust about the weld's middle, on the flange's top face: z F - x lift
    moment = (SPREAD.e + SPREAD.log.b_z - section.z_t) * SPREAD.F - (1.0 - 1.03) * lift
    assert -trapezoid(n_m * (x - 1.03), x) == pytest.approx(moment, rel=1e-5)
    off = np.array([[0.21 - c], [0.29 + c], [0.44 + c], [0.95 - c], [1.11 + c]])
    assert not membrane_line_force(numbers, actions(SPREAD, off)).any()


def test_stress_along_and_shear_at_the_top_of_the_web() -> None:
    acting = actions(SPREAD, np.array([[0.3], [0.7]]))
    section = W8X31
    top = section.points.names.index("web, top, left face")
    along = web_along(N=acting.N, A=section.A, M_y=acting.M_y, z_w=section.z_w, I_y=section.I_y)
    straight = bending_stress(
        N=acting.N,
        A=section.A,
        M_y=acting.M_y,
        I_y=section.I_y,
        M_z=0.0,
        I_z=section.I_z,
        y=section.points.y[top],
        z=section.points.z[top],
    )
    assert along == pytest.approx(straight, rel=1e-12)
    # what lies above: flange, fillets' height of web, and the fillets themselves
    d, t_f, t_w, r = section.h, section.t_f, section.t_w, section.r
    above = section.b_f * t_f * (d - t_f) / 2 + t_w * r * (d / 2 - t_f - r / 2)
    corner = (1 - np.pi / 4) * r**2 * (d / 2 - t_f - 0.2234 * r)
    tau = web_shear(V_z=acting.V_z, Q_yw=section.Q_yw, I_y=section.I_y, t_w=t_w)
    flow = acting.V_z * (above + 2 * corner) / section.I_y
    # mid-lines leave out the fillets and count the web from the flange's middle
    assert tau * t_w == pytest.approx(flow, rel=0.02)


def test_a_few_hundred_psi_of_transverse_shear() -> None:
    told = DATA["cross_force"]
    section = table_section(told["shape"])
    points = section.points
    no_torque = {"T_w": 0.0, "T_v": 0.0, "C_w": section.C_w, "J": section.J}
    for lbf in told["lbf"]:
        force = lbf * PSI * INCH**2
        for V_y, V_z in ((force, 0.0), (0.0, force)):
            tau = open_shear(
                V_y=V_y,
                V_z=V_z,
                Q_z=points.Q_z,
                Q_y=points.Q_y,
                Q_w=points.Q_w,
                I_z=section.I_z,
                I_y=section.I_y,
                t=points.t,
                **no_torque,
            )
            assert told["psi"][0] < tau.max() / PSI < told["psi"][1]


# --- strength ------------------------------------------------------------------------------------

t_w, LAYERS = 0.0072, 200
stress = st.floats(-400e6, 400e6)
wall = st.tuples(stress, stress, stress, st.floats(-100e6, 100e6))


def equivalent(bent: float, across: float, along: float, tau: float) -> float:
    """Our equivalent stress; `bent` is 4 m/t², the moment in terms of the plastic stress."""
    return web_equivalent(m_w=bent * t_w**2 / 4, n_m=across * t_w, sigma_x=along, tau=tau, t_w=t_w)


def largest_moment(yield_stress: float, across: float, along: float, tau: float) -> float:
    """Largest plate moment that layers of constant stress carry, each within von Mises."""
    place = (np.arange(LAYERS) + 0.5) / LAYERS - 0.5
    reach = np.sqrt(yield_stress**2 - 3 * tau**2 - 0.75 * along**2)
    found = linprog(
        -place / LAYERS,
        A_eq=np.full((1, LAYERS), 1 / LAYERS),
        b_eq=[across],
        bounds=(along / 2 - reach, along / 2 + reach),
    )
    assert found.success
    return -found.fun * t_w**2


def test_plain_plate_moment_is_the_plastic_one() -> None:
    assert equivalent(345e6, 0.0, 0.0, 0.0) == pytest.approx(345e6, rel=1e-12)
    m_w = 345e6 * t_w**2 / 4
    assert largest_moment(345e6, 0.0, 0.0, 0.0) == pytest.approx(m_w, rel=1e-4)


def test_membrane_stress_alone_is_von_mises() -> None:
    """By hand, MPa²: 180² + 180 × 95 + 95² + 3 × 40² = 63 325, along 180 and across -95."""
    assert equivalent(0.0, -95e6, 180e6, 40e6) == pytest.approx(1e6 * 63325**0.5, rel=1e-12)


@pytest.mark.parametrize("seed", range(12))
def test_equivalent_stress_is_the_limit_that_layers_find(seed: int) -> None:
    bent, across, along = np.random.default_rng(seed).uniform(-300e6, 300e6, 3)
    tau = np.random.default_rng(seed + 100).uniform(-90e6, 90e6)
    limit = equivalent(bent, across, along, tau)
    m_w = largest_moment(limit, across, along, tau)
    # the one layer in which the stress should jump costs at most 1/LAYERS² of the plastic moment
    short = limit * t_w**2 / 4 / LAYERS**2
    assert m_w == pytest.approx(abs(bent) * t_w**2 / 4, abs=short)


@given(wall, wall, st.floats(0.0, 1.0))
@settings(derandomize=True, deadline=None)
def test_equivalent_stress_is_convex(one: Any, other: Any, share: float) -> None:
    between = [a + share * (b - a) for a, b in zip(one, other, strict=True)]
    chord = (1 - share) * equivalent(*one) + share * equivalent(*other)
    assert equivalent(*between) <= chord * (1 + 1e-12) + 1e-3


def test_the_worse_split_of_the_roll_counts() -> None:
    numbers = web_machine(SKEW_I, -0.1, 1.3)
    frame = replace(SPREAD, r_2=0.8)
    acting: Actions = actions(frame, np.linspace(0.2, 1.2, 41)[:, None])
    n_m = membrane_line_force(numbers, acting)
    both = [
        web_equivalent(
            m_w=m_w,
            n_m=n_m,
            sigma_x=acting.N / SKEW_I.A + acting.M_y * SKEW_I.z_w / SKEW_I.I_y,
            tau=acting.V_z * SKEW_I.Q_yw / SKEW_I.I_y / SKEW_I.t_w,
            t_w=SKEW_I.t_w,
        )
        for m_w in cross_moments(numbers, acting)
    ]
    as_given, halves = both
    assert (as_given > halves).any()
    assert (halves > as_given).any()
    assert web_stress(numbers, acting) == pytest.approx(np.maximum(*both), rel=1e-12)
