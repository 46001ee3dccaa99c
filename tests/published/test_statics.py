"""Statics against worked cases, SymPy's beam class and loads taken apart into points.

The worked values stand in `statics.toml`, each with its source. SymPy gets only the thrust and the
mount; it finds the pads' forces from the balance of the beam, the package from that of the sled.
"""

import tomllib
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from splitcalc.machine.file import load
from splitcalc.thrust.frame import Frame, Log, frame_of, stations
from splitcalc.thrust.statics import Actions, actions, reactions, six_sums, tool_moment_up

HERE = Path(__file__).resolve().parent
CASES = tomllib.loads((HERE / "statics.toml").read_text("utf-8"))["case"]
every_case = pytest.mark.parametrize("case", CASES, ids=[case["name"] for case in CASES])


def at(frame: Frame, *x: float) -> Actions:
    return actions(frame, np.array(x)[:, None])


@every_case
def test_line_of_thrust_and_pads_as_worked_out(case: dict[str, Any]) -> None:
    to = reactions(Frame.from_points(**case["frame"]))
    slopes = np.array([1.0, to.tan_beta, to.tan_alpha])
    share, force, moment = case["half_digit"]
    if "u" in case:
        assert slopes / np.linalg.norm(slopes) == pytest.approx(case["u"], abs=share)
        assert case["frame"]["F"] * np.linalg.norm(slopes) == pytest.approx(case["P"], abs=force)
    pads = {name: getattr(to, name) for name in case["pads"]}
    assert pads == pytest.approx(case["pads"], abs=force)
    assert pytest.approx(case["K"], abs=moment) == to.K


@every_case
def test_actions_as_worked_out(case: dict[str, Any]) -> None:
    frame = Frame.from_points(**case["frame"])
    _, force, moment = case["half_digit"]
    for station in case["station"]:
        a = at(frame, station["x"])
        for name, tolerance in {"N": force, "V_y": force, "V_z": force, "M_y": moment}.items():
            assert getattr(a, name).item() == pytest.approx(station[name], abs=tolerance)
        assert a.M_z.item() == pytest.approx(station["M_z"], abs=moment)
        assert a.torque(a.torques(0.0)).item() == pytest.approx(case["T"], abs=moment)
        if "size" in station:
            # the torque about the centroid is the third component
            parts = (a.M_y.item(), a.M_z.item(), case["T"])
            assert np.linalg.norm(parts) == pytest.approx(station["size"], abs=0.5)


@every_case
def test_forces_and_moments_on_the_beam_balance(case: dict[str, Any]) -> None:
    for r_2 in (1.0, 0.5, 0.0):
        frame = replace(Frame.from_points(**case["frame"]), r_2=r_2)
        assert six_sums(frame) == pytest.approx(np.zeros(6), abs=1e-9 * case["frame"]["F"])


def test_moment_of_the_thrust_about_a_point_above_the_axis() -> None:
    """r x F with r from (0.93, 0.05) to (1.0, 0.13), F = (100, -6) kN, by hand: 8.42 kN·m."""
    moment = tool_moment_up(
        F=100e3, e=0.15, b_z=-0.02, z_o=0.05, tan_alpha=-0.06, x_B=1.0, x_c=0.93
    )
    assert moment == pytest.approx(8.42e3, rel=1e-12)


def test_a_tool_that_starts_on_the_front_pad_is_refused() -> None:
    points = CASES[1]["frame"] | {"pad_length": 0.1}
    Frame.from_points(**points | {"tool": [0.45, 1.0]})
    with pytest.raises(ValueError, match="tool needs a start ahead of the front pad"):
        Frame.from_points(**points | {"tool": [0.44, 1.0]})


@pytest.mark.parametrize(
    ("name", "zones"),
    [("machine.toml", ((1.2, 1.45),)), ("machine-si.toml", ())],
    ids=["open section", "closed section"],
)
def test_stations_hold_every_place_where_something_changes(
    name: str, zones: tuple[tuple[float, float], ...]
) -> None:
    numbers = load(HERE.parents[1] / "worksheets" / name).numbers()
    numbers = replace(numbers, closed_zones=zones)
    section = numbers.section
    frame = frame_of(numbers, Log(0.5, 0.02, 0.03, -0.01, 0.0))
    # into the web, and as far as a closed section distorts
    reaches = [0.0, section.t_f + section.r, *([] if section.open else [1.5 * section.h])]
    wanted = [numbers.x_start, numbers.x_end, numbers.x_m, *numbers.stiffeners]
    wanted += [x for zone in zones for x in zone]
    for middle, half in (
        (frame.x_A - numbers.rear_pad, numbers.l_p / 2),
        (frame.x_A - numbers.front_pad, numbers.l_p / 2),
        ((numbers.x_3 + numbers.x_4) / 2, (numbers.x_4 - numbers.x_3) / 2),
    ):
        wanted += [middle, *(middle + way * (half + c) for way in (-1, 1) for c in reaches)]
    marks = stations(numbers, frame, 1)[:, 0]
    assert marks == pytest.approx(np.sort(np.clip(wanted, numbers.x_start, numbers.x_end)))
    quarters = stations(numbers, frame, 4)[:, 0]
    assert quarters == pytest.approx(
        np.interp(np.arange(4 * len(marks) - 3) / 4, range(len(marks)), marks)
    )


# --- SymPy ---------------------------------------------------------------------------------------


def sympy_beam(
    pads: tuple[float, float], force: tuple[float, float], couples: list[tuple[float, float]]
) -> tuple[Any, list[float]]:
    """A free beam from x = 0 to 2 m that two pads keep in balance, and the pads' forces.

    Loads are (size, place), positive along the axis; a positive couple raises the moment before
    it, as the package counts M_y.
    """
    from sympy import Symbol  # here: it takes a second, and the sign flips read this file often
    from sympy.physics.continuum_mechanics.beam import Beam

    beam = Beam(2, 1, 1)
    supports = (Symbol("rear"), Symbol("front"))
    for support, x in zip(supports, pads, strict=True):
        beam.apply_load(support, x, -1)
    beam.apply_load(*force, -1)
    for couple in couples:
        beam.apply_load(*couple, -2)
    beam.solve_for_reaction_loads(*supports)
    return beam, [float(beam.reaction_loads[support]) for support in supports]


# Places off the loads: behind the mount, mount to sled, between the pads, sled to tool, past it.
STATIONS = (0.02, 0.1, 0.27, 0.35, 0.42, 0.6, 0.9, 1.05, 1.9)


@pytest.mark.slow
@pytest.mark.parametrize(
    ("case", "edge"),
    [(CASES[0], 1.0), (CASES[1], 0.93)],
    ids=["edge at the weld", "edge before the weld"],
)
def test_actions_are_those_of_sympys_beam(case: dict[str, Any], edge: float) -> None:
    given = case["frame"]
    F, (A, B) = given["F"], (given["A"], [edge, *given["B"][1:]])
    frame = replace(Frame.from_points(**given | {"B": B}), x_m=0.05)
    weld, (x_1, x_2) = given["tool"][0], (given["pads"][0][0], given["pads"][1][0])
    rise, drift = ((B[i] - A[i]) / (B[0] - A[0]) for i in (2, 1))
    # the tool's force moved from the contact to the weld: couple = (contact - weld) x force
    reach = B[0] - weld
    up, lifts = sympy_beam(
        (x_1, x_2),
        (F * rise, weld),
        [(B[2] * F - reach * F * rise, weld), (-given["lug"][1] * F, 0.05)],
    )
    # M_z falls where V_y is positive: it is the negative of SymPy's moment
    aside, pushes = sympy_beam(
        (x_1, x_2), (F * drift, weld), [(B[1] * F - reach * F * drift, weld)]
    )
    to = reactions(frame)
    assert pytest.approx(lifts, rel=1e-9) == [to.Z_1, to.Z_2]
    assert pytest.approx(pushes, rel=1e-9) == [to.Y_1, to.Y_2]
    ours = at(frame, *STATIONS)
    for beam, shear, moment, sign in ((up, "V_z", "M_y", 1), (aside, "V_y", "M_z", -1)):
        for diagram, name, factor in (
            (beam.shear_force(), shear, 1),
            (beam.bending_moment(), moment, sign),
        ):
            theirs = [factor * float(diagram.subs(beam.variable, x)) for x in STATIONS]
            assert getattr(ours, name)[:, 0] == pytest.approx(theirs, rel=1e-9, abs=1e-9 * F), name


# --- loads taken apart ---------------------------------------------------------------------------


def test_spread_loads_are_many_point_loads() -> None:
    """Inside pads and weld too: each load as 20 000 equal points, summed beyond the station."""
    given = dict(CASES[1]["frame"], tool=[0.96, 1.10], pad_length=0.06)
    frame = Frame.from_points(**given)
    to, n = reactions(frame), 20_000
    share = (np.arange(n) + 0.5) / n
    F, middle = frame.F, 1.03
    loads = {
        "rear pad": (0.22 + 0.06 * share, 0.0, to.Y_1, to.Z_1, 0.0, 0.0),
        "front pad": (0.37 + 0.06 * share, 0.0, to.Y_2, to.Z_2, 0.0, 0.0),
        "fixed tool": (
            0.96 + 0.14 * share,
            F,
            0.1 * F,
            -0.06 * F,
            0.130 * F - (1.0 - middle) * -0.06 * F,
            (1.0 - middle) * 0.1 * F - 0.020 * F,
        ),
        "mount": (np.zeros(n), -F, 0.0, 0.0, -0.150 * F, 0.0),
    }
    stations = (-0.01, 0.19, 0.235, 0.26, 0.3, 0.385, 0.41, 0.7, 0.97, 1.0, 1.08, 1.2)
    ours = at(frame, *stations)
    for row, x in enumerate(stations):
        N, V_y, V_z, M_y, M_z = np.zeros(5)
        for places, *each in loads.values():
            F_x, F_y, F_z, C_y, C_z = (part / n for part in each)
            arms = (places - x)[places > x]
            N, V_y, V_z = N + arms.size * F_x, V_y + arms.size * F_y, V_z + arms.size * F_z
            M_y += arms.size * C_y - arms.sum() * F_z
            M_z += arms.size * C_z + arms.sum() * F_y
        summed = {"N": N, "V_y": V_y, "V_z": V_z, "M_y": M_y, "M_z": M_z}
        mine = {name: getattr(ours, name)[row, 0] for name in summed}
        # a point next to the station may count or not: one in 20 000 of F and of its moments
        assert mine == pytest.approx(summed, abs=1e-4 * F), x
