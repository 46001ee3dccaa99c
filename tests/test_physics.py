"""What must hold for every machine and every log, whatever the numbers.

Machines are made through the machine file with overrides, in four section families, and loaded by
any log on the tools; frames from bare points have loads of no length.
"""

import dataclasses
from dataclasses import replace
from pathlib import Path
from typing import Any
from unittest.mock import patch

import numpy as np
import pytest
from hypothesis import Phase, given, settings
from hypothesis import strategies as st

from splitcalc.machine.file import load
from splitcalc.machine.numbers import Numbers
from splitcalc.shapes import build
from splitcalc.shapes.families import Hollow, PlateBox, PlateI, RolledI
from splitcalc.shapes.section import Section
from splitcalc.shapes.thinwall import Flow, ThinWalled, Walls, solve
from splitcalc.stress import normal_and_shear as stress
from splitcalc.stress.bimoment import bounds
from splitcalc.stress.web import web_stress
from splitcalc.thrust.frame import Frame, Log, frame_of, stations
from splitcalc.thrust.statics import Actions, actions, corners, six_sums

HERE = Path(__file__).resolve().parent
MACHINE = load(HERE.parent / "worksheets" / "machine.toml")
BOX_MACHINE = load(HERE.parent / "worksheets" / "machine-si.toml")
# Without shrinking: it takes a minute here, and a simpler machine is no easier to read.
FEW = settings(
    derandomize=True, deadline=None, max_examples=25, phases=(Phase.explicit, Phase.generate)
)
ZONES = ((), ((0.9, 1.2),), ((1.4, 1.85),))


def between(low: float, high: float) -> st.SearchStrategy[float]:
    return st.floats(low, high, allow_subnormal=False)


def numbers_in(**ranges: Any) -> st.SearchStrategy[dict[str, Any]]:
    """One value for each key, from its (low, high) or one of its words."""
    return st.fixed_dictionaries(
        {
            key: st.sampled_from(limits) if isinstance(limits[0], str) else between(*limits)
            for key, limits in ranges.items()
        }
    )


WIDTH, WALL, PLATE = (0.1, 0.3), (0.006, 0.02), (0.21, 0.28)
MADE_TO = ("EN 10219", "EN 10210", "A500", "A1085")
SIZES = {
    RolledI: numbers_in(d=(0.15, 0.4), b_f=WIDTH, t_f=WALL, t_w=WALL, r=(0.0, 0.02)),
    PlateI: numbers_in(d=(0.15, 0.4), b_t=WIDTH, t_t=WALL, b_b=WIDTH, t_b=WALL, t_w=WALL),
    Hollow: numbers_in(H=(0.15, 0.4), B=(0.12, 0.3), T=(0.004, 0.016), made_to=MADE_TO),
    PlateBox: numbers_in(
        b_t=PLATE, t_t=WALL, b_b=PLATE, t_b=WALL, h_w=(0.1, 0.3), t_w=WALL, c=(0.1, 0.2)
    ),
}
drawn = st.one_of(*(st.tuples(st.just(family), sizes) for family, sizes in SIZES.items()))
sections = drawn.map(lambda family_and_sizes: family_and_sizes[0].build(family_and_sizes[1]))

changes = numbers_in(
    **{
        "cylinder.bore": (0.08, 0.16),
        "cylinder.axis_height": (0.05, 0.3),
        "sled.front_pad": (-0.02, 0.08),
        "sled.rear_pad": (0.2, 0.4),
        "sled.pad_length": (0.01, 0.1),
        "sled.side_contact_height": (-0.03, 0.03),
        "sled.roll_at_front": (0.0, 1.0),
        "fixed_tool.weld_start": (1.46, 1.55),
        "fixed_tool.weld_end": (1.6, 1.9),
    }
)
aside = between(-0.12, 0.12)
logs = st.builds(Log, between(0.25, 0.6), aside, aside, aside, aside)


@st.composite
def machines(draw: Any) -> Numbers:
    numbers, section = MACHINE.numbers(draw(changes)), draw(sections)
    zones = draw(st.sampled_from(ZONES)) if section.open else ()
    return replace(numbers, section=section, closed_zones=zones)


point_frames = st.builds(
    lambda F, e, x, z, A, B: Frame.from_points(
        F=F, lug=(0.0, e), rod=(x, e), pads=((x - 0.2, z), (x, z)), A=A, B=B, tool=(1.2, 1.2)
    ),
    between(1e4, 5e5), between(0.05, 0.3), between(0.3, 0.5), between(0.05, 0.2),
    st.tuples(between(0.5, 0.7), aside, aside), st.tuples(between(0.9, 1.3), aside, aside),
)  # fmt: skip


def along(numbers: Numbers, log: Log) -> Actions:
    frame = frame_of(numbers, log)
    return actions(frame, stations(numbers, frame, 3))


# --- balance -------------------------------------------------------------------------------------


def assert_in_balance(frame: Frame, ends: tuple[float, float]) -> None:
    forces, moments = frame.F, frame.F * (ends[1] - ends[0])
    sums = six_sums(frame).ravel()
    assert sums[:3] == pytest.approx(np.zeros(3), abs=1e-9 * forces)
    assert sums[3:] == pytest.approx(np.zeros(3), abs=1e-9 * moments)
    off = actions(frame, np.array([[ends[0]], [ends[1]]]))
    for value in (off.N, off.V_y, off.V_z):
        assert value.ravel() == pytest.approx(np.zeros(2), abs=1e-9 * forces)
    for value in (off.M_y, off.M_z, off.torque(off.torques(0.03))):
        assert value.ravel() == pytest.approx(np.zeros(2), abs=1e-9 * moments)


@given(machines(), logs)
@FEW
def test_the_beam_is_in_balance(numbers: Numbers, log: Log) -> None:
    assert_in_balance(frame_of(numbers, log), (-0.01, float(numbers.x_end)))


@given(point_frames)
@FEW
def test_a_beam_under_point_loads_is_in_balance(frame: Frame) -> None:
    assert_in_balance(frame, (-0.01, 1.25))


@given(machines(), logs)
@FEW
def test_between_loads_moments_grow_by_the_shear_force(numbers: Numbers, log: Log) -> None:
    frame = frame_of(numbers, log)
    edges = [edge for patch in frame.patches.values() for edge in patch]
    for start, end in zip([-1.0, *edges[1::2]], [*edges[::2], 3.0], strict=True):
        x = np.linspace(start + 1e-6, end - 1e-6, 5)[:, None]
        a = actions(frame, x)
        size = 1e-9 * frame.F
        assert np.diff(a.M_y, axis=0) == pytest.approx(a.V_z[:-1] * np.diff(x, axis=0), abs=size)
        assert np.diff(a.M_z, axis=0) == pytest.approx(-a.V_y[:-1] * np.diff(x, axis=0), abs=size)
        for steady in (a.N, a.V_y, a.V_z, a.torque(a.torques(0.0))):
            assert np.ptp(steady) <= size


@given(machines(), logs)
@FEW
def test_between_sled_and_tool_the_line_of_thrust_tells_all(numbers: Numbers, log: Log) -> None:
    frame, F = frame_of(numbers, log), numbers.F
    start, end = frame.patches["front pad"][1], frame.patches["fixed tool"][0]
    x = np.linspace(start + 1e-6, end - 1e-6, 7)[:, None]
    a = actions(frame, x)
    y_s, z_s = 0.0, numbers.section.z_s
    rise, drift = (log.b_z - log.a_z) / log.l_AB, (log.b_y - log.a_y) / log.l_AB
    z_t = numbers.e + log.a_z + (x - frame.x_A) * rise
    y_t = log.a_y + (x - frame.x_A) * drift
    told = {"N": F, "V_y": F * drift, "V_z": F * rise, "M_y": F * z_t, "M_z": -F * y_t}
    for name, value in told.items():
        assert getattr(a, name) == pytest.approx(value + 0 * x, abs=1e-9 * F)
    T = F * ((y_t - y_s) * rise - (z_t - z_s) * drift)
    assert a.torque(a.torques(z_s)) + 0 * x == pytest.approx(T, abs=1e-9 * F)
    behind = actions(frame, np.array([[frame.patches["rear pad"][0] - 1e-6]]))
    assert (behind.N.item(), behind.M_y.item()) == pytest.approx((F, F * numbers.e), rel=1e-12)


# --- mirror, scale, zero, units ------------------------------------------------------------------


@given(machines(), logs)
@FEW
def test_a_mirrored_log_mirrors_the_stresses(numbers: Numbers, log: Log) -> None:
    points = numbers.section.points
    gap = np.hypot(points.y[:, None] + points.y, points.z[:, None] - points.z)
    partner = gap.argmin(axis=1)
    assert gap.min(axis=1).max() < 1e-12
    mirrored = Log(log.l_AB, -log.a_y, log.a_z, -log.b_y, log.b_z)
    one, other = along(numbers, log), along(numbers, mirrored)
    for look in (stress.signed_stresses, stress.equivalent_stress):
        here, there = look(numbers, one), look(numbers, other)
        np.testing.assert_allclose(here, there[:, partner], rtol=0, atol=1e-9 * here.max())
    if numbers.section.open:
        np.testing.assert_allclose(web_stress(numbers, one), web_stress(numbers, other), rtol=1e-9)


@given(machines(), logs, between(0.2, 3.0))
@FEW
def test_stresses_are_proportional_to_the_force(numbers: Numbers, log: Log, factor: float) -> None:
    looks = [stress.signed_stresses, stress.equivalent_stress]
    if numbers.section.open:
        looks.append(web_stress)
    more = replace(numbers, F=factor * numbers.F)
    for look in looks:
        one, scaled = look(numbers, along(numbers, log)), look(more, along(more, log))
        np.testing.assert_allclose(scaled, factor * one, rtol=0, atol=1e-9 * scaled.max())


@given(machines(), logs)
@FEW
def test_zero_causes_zero(numbers: Numbers, log: Log) -> None:
    off = replace(numbers, F=0.0)
    assert not stress.equivalent_stress(off, along(off, log)).any()
    centred = along(numbers, replace(log, a_y=0.0, b_y=0.0))
    for value in (centred.V_y, centred.M_z, *centred.torques(0.1).values()):
        assert not np.any(value)
    if numbers.section.open:
        for warping in bounds(numbers, centred):
            assert not np.any(warping.B)
            assert not np.any(warping.T_w)


def test_the_same_machine_in_other_units_is_the_same_machine() -> None:
    si, us = (load(HERE / f"one_machine_{units}.toml").numbers() for units in ("si", "us"))

    def compare(one: Any, other: Any, name: str) -> int:
        """Number of values compared."""
        if dataclasses.is_dataclass(one):
            names = [f.name for f in dataclasses.fields(one) if f.name not in ("lines", "parts")]
            return sum(compare(getattr(one, n), getattr(other, n), f"{name}.{n}") for n in names)
        if isinstance(one, dict):
            return sum(compare(one[k], other[k], f"{name}.{k}") for k in one)
        if name.endswith(".names"):
            assert one == other
            return 0
        # what is nothing but a rounding error beside its neighbours has no digits to agree in
        size = np.max(np.abs(np.asarray(one, dtype=float)), initial=0.0)
        np.testing.assert_allclose(one, other, rtol=1e-12, atol=1e-12 * size, err_msg=name)
        return np.size(one)

    assert compare(us, si, "numbers") > 150


# --- pads ----------------------------------------------------------------------------------------


@given(between(-1e5, 1e5), between(-2e4, 2e4), between(0.03, 0.2), between(0.03, 0.2))
@FEW
def test_corners_of_a_pad_balance_and_touch_from_one_side(
    Z: float, K: float, push: float, gib: float
) -> None:
    left, right = corners(Z, K, push, gib)
    assert left + right == pytest.approx(Z, abs=1e-9 * (abs(Z) + abs(K)))
    # what pulls up hangs on the gib's strip, what presses down stands on the upper one
    arms = [gib if force > 0 else push for force in (left, right)]
    couple = left * arms[0] - right * arms[1]
    assert couple == pytest.approx(K, abs=1e-6 * (abs(Z) + abs(K)))


# --- closed sections -----------------------------------------------------------------------------


@pytest.mark.parametrize("diaphragm", [True, False], ids=["diaphragm", "none"])
def test_distortion_adds_a_quarter_of_the_worst_corner_near_loads(diaphragm: bool) -> None:
    numbers = BOX_MACHINE.numbers()
    numbers = replace(numbers, diaphragms=numbers.diaphragms if diaphragm else ())
    section, log = numbers.section, Log(0.55, 0.06, 0.05, -0.05, -0.03)
    frame = frame_of(numbers, log)
    reach = 1.5 * section.h
    near = [frame.patches["rear pad"], frame.patches["front pad"]]
    near += [] if diaphragm else [(numbers.x_3, numbers.x_4)]
    inside = [x for a, b in near for x in (a - reach + 1e-3, (a + b) / 2, b + reach - 1e-3)]
    outside = [near[0][0] - reach - 1e-3, near[-1][1] + reach + 1e-3]
    for places, share in ((inside, 0.25), (outside, 0.0)):
        acting = actions(frame, np.array(places)[:, None])
        ((allowed, _),) = stress.point_stresses(numbers, acting)
        sigma = abs(stress.signed_stresses(numbers, acting))
        assert allowed - sigma == pytest.approx(
            share * sigma.max(axis=1, keepdims=True) + 0 * sigma, abs=1.0
        )


@given(sections, between(0.0, 5e5), between(-9e4, 9e4), between(-4e4, 4e4))
@FEW
def test_the_worst_corner_is_one_of_the_four(
    section: Section, N: float, M_y: float, M_z: float
) -> None:
    bending = {"N": N, "A": section.A, "M_y": M_y, "I_y": section.I_y, "M_z": M_z}
    bending["I_z"] = section.I_z
    edges = {"z_t": section.z_t, "y_t": section.y_t, "z_b": section.z_b, "y_b": section.y_b}
    worst = stress.largest_corner_stress(**edges, **bending)
    at = section.points
    felt = abs(stress.bending_stress(y=at.y, z=at.z, **bending))
    assert worst == pytest.approx(felt.max(), rel=1e-12)


# --- shear flow ----------------------------------------------------------------------------------


def model_of(family: Any, sizes: Any) -> tuple[Section, Walls, ThinWalled]:
    with patch.object(build, "solve", wraps=solve) as spy:
        section = family.build(sizes)
    walls = spy.call_args.args[0]
    return section, walls, solve(walls)


def resultant(flow: Flow, walls: Walls, model: ThinWalled) -> np.ndarray:
    """Force along y and z and torque about the shear centre of a flow, by integration."""
    i, j = np.array(walls.ends).T
    dy, dz = walls.y[j] - walls.y[i], walls.z[j] - walls.z[i]
    mean = flow.start + flow.linear / 2 + flow.square / 3
    arm = (walls.y[i] - model.y_s) * dz - (walls.z[i] - model.z_s) * dy
    return np.array([(mean * dy).sum(), (mean * dz).sum(), (mean * arm).sum()])


def turned(walls: Walls) -> Walls:
    """The same walls, each from its last node to its first."""
    ends = tuple((b, a) for a, b in walls.ends)
    cells = tuple(tuple((wall, -way) for wall, way in cell) for cell in walls.cells)
    return replace(walls, ends=ends, cells=cells)


def channel(sizes: dict[str, float]) -> Walls:
    """A channel off the axis: no family has one, but its shear centre is beside the centroid."""
    d, b, t_f, t_w = sizes["d"], sizes["b_f"], sizes["t_f"], sizes["t_w"]
    y, z = np.array([b, 0, 0, b]) - 0.05, np.array([d, d, 0, 0])
    return Walls(y, z, np.array([t_f, t_w, t_f]), ((0, 1), (1, 2), (2, 3)))


some_walls = drawn.map(lambda shape: model_of(*shape)[1]) | SIZES[RolledI].map(channel)


@given(some_walls | some_walls.map(turned))
@FEW
def test_flows_carry_what_they_are_named_for_and_leave_cells_untwisted(walls: Walls) -> None:
    model, size = solve(walls), np.ptp(walls.z)
    i, j = np.array(walls.ends).T
    length = np.hypot(walls.y[j] - walls.y[i], walls.z[j] - walls.z[i])
    flows = {"f_y": (1, 0, 0), "f_z": (0, 1, 0), "f_w": (0, 0, 1), "f_t": (0, 0, 1)}
    if not walls.cells:
        del flows["f_t"]
    elif model.C_w < 1e-6 * model.I_z * size**2:
        del flows["f_w"]  # a square tube doesn't warp
    for name, whole in flows.items():
        flow = getattr(model, name)
        scale = np.array([1 / size, 1 / size, 1] if whole[2] else [1, 1, size])
        assert resultant(flow, walls, model) / scale == pytest.approx(whole, abs=1e-9), name
        mean = flow.start + flow.linear / 2 + flow.square / 3
        balance = np.zeros(walls.y.size)
        np.add.at(balance, j, flow.start + flow.linear + flow.square)
        np.add.at(balance, i, -flow.start)
        assert balance == pytest.approx(0 * balance, abs=1e-9 * abs(flow.linear + flow.start).max())
        for cell in walls.cells if name != "f_t" else ():
            parts = [way * mean[k] * length[k] / walls.t[k] for k, way in cell]
            assert sum(parts) == pytest.approx(0.0, abs=1e-9 * max(map(abs, parts)))
    for cell in walls.cells:
        k, way = np.array(cell).T
        area = (way * (walls.y[i] * walls.z[j] - walls.y[j] * walls.z[i])[k]).sum() / 2
        assert model.f_t.start[k] * way == pytest.approx(1 / (2 * area), rel=1e-9)  # Bredt
        assert model.J_c == pytest.approx(4 * area**2 / (length / walls.t)[k].sum(), rel=1e-9)


@given(drawn, between(1e3, 5e4), between(-5e4, 5e4), between(-1e4, 1e4))
@FEW
def test_shear_at_every_point_is_the_flow_of_its_wall(
    shape: Any, V_y: float, V_z: float, T: float
) -> None:
    """Each point is found again as the nearest place on a wall, then all flows add with signs."""
    section, walls, model = model_of(*shape)
    at = section.points
    loads = {"V_y": V_y, "V_z": V_z, "Q_z": at.Q_z, "Q_y": at.Q_y, "t": at.t}
    loads |= {"I_z": section.I_z, "I_y": section.I_y}
    if section.open:
        more = {"Q_w": at.Q_w, "C_w": section.C_w, "J": section.J, "T_w": T}
        tau = stress.open_shear(**loads, **more, T_v=0.0)
        twisted = stress.open_shear(**loads, **more, T_v=-700.0)
        assert twisted - tau == pytest.approx(700.0 * at.t / section.J, rel=1e-6)
    else:
        tau = stress.closed_shear(**loads, psi=at.psi, T=T)
    parts = ((V_y, model.f_y), (V_z, model.f_z), (T, model.f_w if section.open else model.f_t))
    thick = walls.t.max()
    for number, name in enumerate(at.names):
        y, z = at.y[number], at.z[number] - section.z_b
        fits = []
        for wall, (i, j) in enumerate(walls.ends):
            if y * (walls.y[i] + walls.y[j]) < 0:
                continue  # on the other side
            dy, dz = walls.y[j] - walls.y[i], walls.z[j] - walls.z[i]
            length, t = np.hypot(dy, dz), walls.t[wall]
            out_y, out_z = y - walls.y[i], z - walls.z[i]
            along_wall = (out_y * dy + out_z * dz) / length
            off_wall = abs(out_y * dz - out_z * dy) / length
            if off_wall < t / 2 + 1e-9 and -thick < along_wall < length + thick:
                # beside a junction the flow may be counted to the junction itself
                for place in (along_wall, 0.0, length):
                    if abs(place - along_wall) < thick / 2 + 1e-9:
                        share = min(max(place / length, 0.0), 1.0)
                        flow = sum(load * part.at(wall, share) for load, part in parts)
                        omega = model.omega[i] + share * (model.omega[j] - model.omega[i])
                        fits.append((abs(flow) / t, t, omega))
        mine = (tau[number], at.t[number], at.omega[number])
        near = (1e-6 * tau.max(), 1e-12, 1e-9)
        assert any(np.all(np.abs(np.subtract(mine, fit)) <= near) for fit in fits), name
