"""Restrained torsion against worked cases, solid finite elements and a numerical solution.

The figures stand in `torsion.toml`, each with its source. The numerical solution solves for the
rate of twist by finite differences; the package solves for the bimoment in closed form.
"""

import tomllib
from dataclasses import replace
from itertools import pairwise
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest
from scipy.integrate import simpson
from scipy.linalg import solve_banded

from splitcalc.logs.present import corner_points
from splitcalc.shapes.families import PlateBox, PlateI, dimensions
from splitcalc.shapes.section import Section
from splitcalc.shapes.tables import look_up
from splitcalc.stress.bimoment import bounds, decay
from splitcalc.stress.normal_and_shear import bending_stress, point_stresses, signed_stresses
from splitcalc.stress.span import Span, influence, place
from splitcalc.thrust.frame import Frame
from splitcalc.thrust.statics import actions, reactions

HERE = Path(__file__).parent
DATA = tomllib.loads((HERE / "torsion.toml").read_text("utf-8"))
FRAME = tomllib.loads((HERE / "statics.toml").read_text("utf-8"))["case"][1]["frame"]
BOX_TOLD = tomllib.loads((HERE / "sections.toml").read_text("utf-8"))["box"]
HEB, SOLID, GUIDE = DATA["heb_160"], DATA["solid"], DATA["design_guide_9"]
MEGA = 1e6


def table_section(name: str, **changed: float) -> Section:
    row = look_up(name)[1]
    return row.build(dimensions(row) | changed)


def machine(section: Section, start: float, end: float, **more: Any) -> Any:
    """What the stresses want to know of a machine."""
    plain = {"closed_zones": (), **DATA["steel"], **more}
    return SimpleNamespace(section=section, x_start=start, x_end=end, **plain)


HEB_160 = replace(table_section("HEB 160"), **HEB["properties"])
NO_FILLETS = replace(table_section("HEB 160", r=0.0), **SOLID["properties"])


# --- worked cases --------------------------------------------------------------------------------


def test_decay_length_of_the_worked_section() -> None:
    k = decay(J=HEB_160.J, C_w=HEB_160.C_w, **DATA["steel"])
    assert 1 / k == pytest.approx(HEB["decay_length"], abs=0.5e-4)


@pytest.mark.parametrize("station", HEB["station"], ids=lambda s: f"{s['x']} of {s['end']} m")
def test_bimoment_and_corner_stresses_as_worked_out(station: dict[str, Any]) -> None:
    numbers = machine(HEB_160, HEB["start"], station["end"])
    acting = actions(Frame.from_points(**FRAME), np.array([[station["x"]]]))
    corners = corner_points(HEB_160)
    (warping,) = bounds(numbers, acting)
    assert warping.B.item() == pytest.approx(station["B"], abs=HEB["half_digit_B"])
    stress = signed_stresses(numbers, acting)[0, corners] / MEGA
    assert stress == pytest.approx(station["stress"], abs=HEB["half_digit_stress"])
    section, at = HEB_160, HEB_160.points
    plain = bending_stress(
        N=acting.N,
        A=section.A,
        M_y=acting.M_y,
        I_y=section.I_y,
        M_z=acting.M_z,
        I_z=section.I_z,
        y=at.y[corners],
        z=at.z[corners],
    )
    assert plain[0] / MEGA == pytest.approx(station["navier"], abs=0.005)


@pytest.mark.parametrize("variant", HEB["variant"], ids=lambda v: v["name"])
def test_what_moves_the_bimoment(variant: dict[str, Any]) -> None:
    given = dict(FRAME, pad_length=variant.get("pad_length", 0.0))
    frame = replace(
        Frame.from_points(**given),
        z_p=variant.get("z_p", FRAME["pads"][0][1]),
        r_2=variant.get("r_2", 1.0),
    )
    acting = actions(frame, np.array([[0.400]]))
    (warping,) = bounds(machine(HEB_160, HEB["start"], variant.get("end", 1.0)), acting)
    assert warping.B.item() == pytest.approx(variant["B"], abs=0.5)


@pytest.mark.parametrize("station", SOLID["station"], ids=lambda s: f"{s['x']} m")
def test_corner_stresses_against_solid_elements(station: dict[str, Any]) -> None:
    given = FRAME | {"tool": SOLID["tool"], "pad_length": SOLID["pad_length"]}
    numbers = machine(NO_FILLETS, SOLID["start"], SOLID["end"])
    acting = actions(Frame.from_points(**given), np.array([[station["x"]]]))
    stress = signed_stresses(numbers, acting)[0, corner_points(NO_FILLETS)] / MEGA
    assert stress == pytest.approx(station["stress"], abs=SOLID["half_digit_stress"])
    band = SOLID["share_of_largest"] * max(station["solid"])
    assert stress == pytest.approx(station["solid"], abs=band)


@pytest.mark.parametrize("region", ["us", "eu"])
def test_decay_lengths_of_common_shapes(region: str) -> None:
    told = DATA["decay_lengths"][region]
    for name, length in told["lengths"].items():
        section = table_section(name)
        k = decay(G=1.0, J=section.J, E=told["modulus_ratio"], C_w=section.C_w)
        printed = length * told["unit"]
        assert 1 / k == pytest.approx(printed, rel=DATA["decay_lengths"]["tolerance"]), name


# --- AISC Design Guide 9 -------------------------------------------------------------------------


def test_design_guide_beam_with_a_torque_at_midspan() -> None:
    G, T, J, length = GUIDE["G"], GUIDE["T"], GUIDE["J"], GUIDE["l"]
    k = decay(G=G, J=J, E=GUIDE["E"], C_w=GUIDE["C_w"])
    middle = length / 2
    x = np.linspace(0.0, middle * (1 - 1e-9), 201)  # at the load itself the slope jumps
    on = place(x, (middle, middle), Span(0.0, length, 1, 1), k)
    B, T_w = T * influence(on), -T * influence(on, slope=True)
    T_v = T / 2 - T_w
    assert -B[-1] * k / T == pytest.approx(GUIDE["bimoment_factor"], abs=0.5e-4)
    assert abs(B[-1]) * GUIDE["W_no"] / GUIDE["C_w"] == pytest.approx(GUIDE["sigma_w"], abs=0.005)
    for wall in ("flange", "web"):
        tau_t = T_v[0] * GUIDE[f"t_{wall[0]}"] / J
        assert tau_t == pytest.approx(GUIDE[f"tau_t_{wall}"], abs=0.005)
    tau_w = T_w * GUIDE["S_w1"] / (GUIDE["C_w"] * GUIDE["t_f"])
    assert tau_w[0] == pytest.approx(GUIDE["tau_w_support"], abs=0.005)
    assert tau_w[-1] == pytest.approx(GUIDE["tau_w_middle"], abs=0.005)
    twist = simpson(T_v, x) / (G * J)
    assert twist == pytest.approx(GUIDE["twist"], abs=0.5e-4)
    assert twist * G * J / (T * length) == pytest.approx(GUIDE["twist_factor"], abs=0.5e-5)
    # the charts are read by eye, to 0.01
    assert -B[-1] * k / T == pytest.approx(GUIDE["chart_factors"]["bimoment"], abs=0.01)
    assert twist * G * J / (T * length) == pytest.approx(GUIDE["chart_factors"]["twist"], abs=0.01)


# --- limit: no St Venant torsion -----------------------------------------------------------------


def test_without_st_venant_torsion_the_top_flange_alone_bends_sideways() -> None:
    """Thrust, pads and cylinder in the plane of the loaded flange: no torque about it."""
    z_f = HEB_160.z_f
    warps_only = replace(HEB_160, J=1e-14, C_w=HEB_160.I_z * HEB_160.h_o**2 / 4)
    frame = Frame.from_points(
        F=100e3,
        lug=(0.0, z_f),
        rod=(0.4, z_f),
        pads=((0.25, z_f), (0.4, z_f)),
        A=(0.5, -0.03, z_f),
        B=(1.0, 0.02, z_f),
        tool=(0.96, 1.1),
        pad_length=0.05,
    )
    acting = actions(frame, np.array([[0.1], [0.3], [0.39], [0.6], [0.9], [1.0], [1.2]]))
    sigma = signed_stresses(machine(warps_only, -0.1, 1.3), acting)
    even = acting.N / HEB_160.A
    for corner in corner_points(HEB_160):
        y, z = HEB_160.points.y[corner], HEB_160.points.z[corner]
        sideways = -2 * acting.M_z * y / HEB_160.I_z if z > 0 else 0.0
        expected = even + acting.M_y * z / HEB_160.I_y + sideways
        # the little J that is left makes 1e-7 of the decay
        assert sigma[:, corner] == pytest.approx(expected[:, 0], abs=1e-5 * abs(sigma).max())


# --- numerical solution --------------------------------------------------------------------------

SKEW_I = PlateI.build(
    {"d": 0.2, "b_t": 0.18, "t_t": 0.016, "b_b": 0.13, "t_b": 0.012, "t_w": 0.008}
)
SPREAD = Frame.from_points(
    F=150e3,
    lug=(0.0, 0.2),
    rod=(0.4, 0.2),
    pads=((0.25, 0.085), (0.4, 0.085)),
    A=(0.52, -0.04, 0.24),
    B=(1.0, 0.03, 0.17),
    tool=(0.96, 1.10),
    pad_length=0.06,
)
STEP = 0.25e-3


def numerical(
    section: Section, start: float, end: float, fixed: tuple[bool, bool], frame: Frame
) -> tuple[np.ndarray, ...]:
    """x, B, T_w and q on a stretch, by finite differences for q = G J times the rate of twist.

    With the torque T and the evenly spread bimoment beta per length, `q'' = k² (q - T - beta)`;
    B is q'/k². An end warps freely (q' = 0) or not at all (q = 0).
    """
    to, log = reactions(frame), frame.log
    x = np.linspace(start, end, round((end - start) / STEP) + 1)
    z_B, drift, rise = frame.e + log.b_z - section.z_s, to.tan_beta, to.tan_alpha
    half, arm = frame.l_p / 2, frame.z_p - section.z_s
    T = np.zeros_like(x)
    for torque, first, last in (
        (-arm * to.Y_1 + (1 - frame.r_2) * to.K, frame.x_1 - half, frame.x_1 + half),
        (-arm * to.Y_2 + frame.r_2 * to.K, frame.x_2 - half, frame.x_2 + half),
        (frame.F * (log.b_y * rise - z_B * drift), frame.x_3, frame.x_4),
    ):
        T += torque * np.clip((last - x) / (last - first), 0, 1)
    aside = (frame.x_B - (frame.x_3 + frame.x_4) / 2) * frame.F * drift - log.b_y * frame.F
    inside = np.mean([(x >= frame.x_3 - s) & (x <= frame.x_4 - s) for s in (-1e-6, 1e-6)], axis=0)
    beta = -(section.z_f - section.z_s) * aside / (frame.x_4 - frame.x_3) * inside
    steel = DATA["steel"]
    k2 = steel["G"] * section.J / (steel["E"] * section.C_w)
    bands = np.ones((3, x.size))
    bands[1] = -2 - k2 * STEP**2
    right = -k2 * STEP**2 * (T + beta)
    bands[0, 1], bands[2, -2] = 2, 2  # a mirrored neighbour past a free end
    for face, held, neighbour in ((0, fixed[0], (0, 1)), (-1, fixed[1], (2, -2))):
        if held:
            bands[1, face], bands[neighbour], right[face] = 1, 0, 0
    q = solve_banded((1, 1), bands, right)
    return x, np.gradient(q, STEP, edge_order=2) / k2, T - q, q


@pytest.mark.parametrize("r_2", [1.0, 0.3])
@pytest.mark.parametrize(
    "zones",
    [
        (),
        ((0.6, 0.9),),  # between sled and tool
        ((1.03, 1.3),),  # over a part of the weld, up to the beam's end
        ((0.26, 0.5), (0.7, 0.92)),  # under a part of the rear pad, and a second one
    ],
    ids=["plain", "between", "at the weld", "two"],
)
def test_bimoment_is_that_of_a_numerical_solution(
    zones: tuple[tuple[float, float], ...], r_2: float
) -> None:
    frame, start, end = replace(SPREAD, r_2=r_2), -0.1, 1.3
    faces = [start, *(x for zone in zones for x in zone), end]
    spans = [[(start, end, (False, False))]]
    if zones:
        pairs = list(zip(faces[::2], faces[1::2], strict=True))
        spans.append([(a, b, (a != start, b != end)) for a, b in pairs if b > a])
    numbers = machine(SKEW_I, start, end, closed_zones=zones)
    for bound, stretches in enumerate(spans):
        for a, b, fixed in stretches:
            x, B, T_w, T_v = numerical(SKEW_I, a, b, fixed, frame)
            some = slice(7, -7, max(x.size // 90, 1))
            acting = actions(frame, x[some, None])
            ours = bounds(numbers, acting)
            assert len(ours) == len(spans)
            _, tau = point_stresses(numbers, acting)[bound]
            twisting = tau[:, [0]] * SKEW_I.J / SKEW_I.t_f  # on a flange's tip nothing else shears
            whole = abs(T_w + T_v).max()
            for mine, theirs, size in (
                (ours[bound].B, B, abs(B).max()),
                (ours[bound].T_w, T_w, whole),
                (twisting, abs(T_v), whole),
            ):
                # the differences err by 4e-7, a quarter of that at half the step
                assert mine[:, 0] == pytest.approx(theirs[some], abs=1e-6 * size), (bound, a, b)


def test_a_replayed_station_is_that_of_the_sweep() -> None:
    numbers = machine(SKEW_I, -0.1, 1.3, closed_zones=((0.6, 0.9),))
    x = np.array([0.26, 0.5, 0.95, 1.2])
    for warping, B_T in zip(
        bounds(numbers, actions(SPREAD, x[:, None])),
        zip(*(bounds(numbers, actions(SPREAD, float(at))) for at in x), strict=True),
        strict=True,
    ):
        alone = np.array([[one.B, one.T_w] for one in B_T])
        assert alone == pytest.approx(np.concatenate(warping, axis=1), rel=1e-12)


# --- torsion by finite elements ------------------------------------------------------------------


Mesh = tuple[np.ndarray, np.ndarray]  # nodes, shape (2, n), and corners of cells, shape (4, n)


def mesh_of(z: np.ndarray, y: np.ndarray, kept: np.ndarray) -> Mesh:
    """Quadrilaterals between levels z and lines y[level, line], where `kept` says so."""
    number = np.arange(y.size).reshape(y.shape)
    cells = [number[:-1, :-1], number[:-1, 1:], number[1:, 1:], number[1:, :-1]]
    nodes = np.stack([y.ravel(), np.repeat(z, y.shape[1])])
    used, corners = np.unique(np.stack([cell[kept] for cell in cells]), return_inverse=True)
    return nodes[:, used], corners.reshape(4, -1)


def levels(*stops: float, steps: int = 6) -> np.ndarray:
    parts = [np.linspace(a, b, steps + 1)[:-1] for a, b in pairwise(stops) if b > a]
    return np.append(np.concatenate(parts), stops[-1])


def i_mesh(s: Section, b_b: float, t_b: float) -> Mesh:
    """The half y > 0 of an I; its top flange is `s.b_f` by `s.t_f`."""
    steps, r = 6, s.r
    swing = np.linspace(0, np.pi / 2, 2 * steps + 1)[1:-1] if r else []
    low = t_b + r * (1 - np.sin(swing))[::-1] if r else []
    high = s.h - s.t_f - r * (1 - np.sin(swing)) if r else []
    z = np.concatenate(
        [
            levels(0, t_b),
            low,
            levels(t_b + r, s.h - s.t_f - r, steps=20)[0 if r else 1 : None if r else -1],
            high,
            levels(s.h - s.t_f, s.h),
        ]
    )
    flange = np.where(z < s.h / 2, t_b - z, z - s.h + s.t_f) > -1e-12
    near = np.clip(np.minimum(z - t_b, s.h - s.t_f - z), 0, r)
    inner = s.t_w / 2 + r - np.sqrt(r**2 - (r - near) ** 2)
    half = np.where(z < s.h / 2, b_b, s.b_f) / 2
    share = np.linspace(0, 1, steps + 1)
    out = np.linspace(0, 1, 4 * steps + 1)[1:]
    y = np.hstack([np.outer(inner, share), inner[:, None] + np.outer(half - inner, out)])
    kept = np.ones((z.size - 1, y.shape[1] - 1), dtype=bool)
    kept[:, steps:] = (flange[:-1] & flange[1:])[:, None]
    return mesh_of(z, y, kept)


def box_mesh(v: dict[str, float]) -> Mesh:
    """The half y > 0 of a plate box with both plates of one width."""
    d = v["t_b"] + v["h_w"] + v["t_t"]
    z = levels(0, v["t_b"], d - v["t_t"], d, steps=8)
    y = levels(0, v["c"] / 2 - v["t_w"], v["c"] / 2, v["b_t"] / 2, steps=8)
    plate = np.repeat([True, False, True], 8)
    web = np.repeat([False, True, False], 8)
    return mesh_of(z, np.tile(y, (z.size, 1)), plate[:, None] | web)


def warping_solution(mesh: Mesh) -> tuple[float, float, float]:
    """J, height of the shear centre and C_w of a section that is symmetric about z.

    Warping psi per unit twist: its Laplacian is zero, its slope at the edges makes the shear
    follow them. The mesh is the half y > 0, where psi is zero on y = 0.
    """
    import skfem as fem  # here: the sign flips read this file often
    from skfem.helpers import dot, grad

    basis = fem.Basis(fem.MeshQuad(*mesh), fem.ElementQuad2())
    stiffness = fem.BilinearForm(lambda u, v, w: dot(grad(u), grad(v))).assemble(basis)

    def integral(f: Any, **fields: Any) -> float:
        return 2 * fem.Functional(f).assemble(basis, **fields)

    height = integral(lambda w: w.x[1]) / integral(lambda w: 1.0 + 0 * w.x[0])
    load = fem.LinearForm(lambda v, w: (w.x[1] - height) * grad(v)[0] - w.x[0] * grad(v)[1])
    held = basis.get_dofs(lambda x: x[0] < 1e-9)
    psi = basis.interpolate(fem.solve(*fem.condense(stiffness, load.assemble(basis), D=held)))
    J = integral(
        lambda w: (
            w.x[0] ** 2
            + (w.x[1] - height) ** 2
            + w.x[0] * grad(w.psi)[1]
            - (w.x[1] - height) * grad(w.psi)[0]
        ),
        psi=psi,
    )
    arm = integral(lambda w: w.psi * w.x[0], psi=psi) / integral(lambda w: w.x[0] ** 2)
    C_w = integral(lambda w: (w.psi - arm * w.x[0]) ** 2, psi=psi)
    return J, height + arm, C_w


@pytest.mark.parametrize("name", ["W8x31", "HEB 160", "IPE 200"])
def test_torsion_of_rolled_shapes_by_finite_elements(name: str) -> None:
    section, told = table_section(name), DATA["elements"][name]
    J, shear_centre, C_w = warping_solution(i_mesh(section, section.b_f, section.t_f))
    assert pytest.approx(told["J"] * told["unit"] ** 4, rel=0.003) == J
    assert C_w == pytest.approx(told["C_w"] * told["unit"] ** 6, rel=0.003)
    assert shear_centre == pytest.approx(section.h / 2, rel=1e-9)
    assert pytest.approx(J, rel=0.02) == section.J
    # mid-lines overstate it by 1 to 3 %: walls aren't thin, fillets warp less
    assert 1.0 < section.C_w / C_w < 1.03


def test_torsion_of_an_unsymmetric_plate_i_by_finite_elements() -> None:
    b_b, t_b = 0.130, 0.012
    J, shear_centre, C_w = warping_solution(i_mesh(SKEW_I, b_b, t_b))
    # each plate counts as an endless strip: 3.3 % above
    assert pytest.approx(J, rel=0.035) == SKEW_I.J
    assert SKEW_I.C_w == pytest.approx(C_w, rel=0.03)
    assert SKEW_I.z_s - SKEW_I.z_b == pytest.approx(shear_centre, abs=1e-3)


def test_torsion_of_a_plate_box_by_finite_elements() -> None:
    told = BOX_TOLD
    section = PlateBox.build(told["sizes"])
    J, shear_centre, _ = warping_solution(box_mesh(told["sizes"]))
    assert pytest.approx(told["J_elements"] * 1e-12, rel=0.003) == J
    assert shear_centre == pytest.approx(told["shear_centre"] * 1e-3, abs=0.3e-3)
    assert pytest.approx(J, rel=told["J_tolerance"]) == section.J
    assert section.z_s - section.z_b == pytest.approx(shear_centre, abs=1e-3)
