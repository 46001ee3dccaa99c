"""Section properties against published tables, closed formulas, polygons and strips.

Rows of the section tables are held against `oracles.py`. What that confirms differs: US figures
are published ones. Of the European rolled shapes A, I_y and I_z are arithmetic of the data package
on its own dimensions, which are ours too: they confirm the formulas and are no published table;
of four of them `sections.toml` has more, J and C_w from memory of a mill's catalogue.
European hollow figures are published ones, three digits. `sections.toml` names all sources.
"""

import tomllib
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from splitcalc.shapes.families import Hollow, PlateBox, PlateI, RolledI
from splitcalc.shapes.section import Section
from splitcalc.shapes.tables import all_sections
from splitcalc.shapes.thinwall import Walls, solve
from tests.published.test_torsion import SKEW_I, table_section

DATA = tomllib.loads(Path(__file__).with_name("sections.toml").read_text("utf-8"))
PI = np.pi


def point(section: Section, name: str) -> dict[str, float]:
    index = section.points.names.index(name)
    return {key: getattr(section.points, key)[index] for key in ("omega", "Q_y", "Q_z", "Q_w")}


def properties(section: Section) -> dict[str, float]:
    """What tables print; the strong axis is y."""
    Z_y, Z_z = section.plastic()
    plain = {key: getattr(section, key) for key in ("A", "I_y", "I_z", "J", "C_w", "h_o", "S_z")}
    return plain | {"S_y": min(section.S_t, section.S_b), "Z_y": Z_y, "Z_z": Z_z}


def cell_properties(section: Section) -> dict[str, float]:
    """Torque over the shear stress that it makes in the wall."""
    return {"C": section.t_w / abs(section.points.psi[0])}


def flange_properties(section: Section) -> dict[str, float]:
    """Warping and first moments of a rolled I, as AISC prints them."""
    junction = point(section, "top flange, left of the web")  # flows counted to the web's middle
    return {
        "W_no": point(section, "top flange, left tip")["omega"],
        "S_w1": abs(junction["Q_w"]),
        "Q_f": abs(junction["Q_y"]) * (1 - section.t_w / section.b_f),  # AISC: to the web's face
        "Q_w": abs(point(section, "web, middle")["Q_y"]),
    }


# Power of length of each property.
POWERS = {"A": 2, "I_y": 4, "I_z": 4, "S_y": 3, "S_z": 3, "Z_y": 3, "Z_z": 3, "J": 4, "C_w": 6}
POWERS |= {"C": 3, "h_o": 1, "W_no": 2, "S_w1": 4, "Q_f": 3, "Q_w": 3}


def differences(
    told: dict[str, float], mine: dict[str, float], unit: float, within: dict[str, float]
) -> list[str]:
    """Properties that lie outside their tolerance, with what was wanted and found."""
    out = []
    for key, value in told.items():
        wanted = value * unit ** POWERS[key]
        if mine[key] != pytest.approx(wanted, rel=within[key]):
            out.append(f"{key}: {mine[key] / wanted - 1:+.2%}")
    return out


# --- tables --------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", all_sections())
def test_every_table_row_has_its_published_properties(name: str) -> None:
    from tests.published.oracles import published_properties  # here: it reads large tables

    published = published_properties(name) or {}
    told = {key: value for key, value in published.items() if value is not None}
    assert {"A", "I_y", "I_z"} <= told.keys()
    within = dict.fromkeys(POWERS, 0.01)  # tables print three digits, and round k
    assert differences(told, properties(table_section(name)), 1.0, within) == []


@pytest.mark.parametrize(
    ("name", "told", "unit"),
    [(n, row, DATA[r]["unit"]) for r in ("us", "eu") for n, row in DATA[r]["rows"].items()],
)
def test_properties_of_single_sections(name: str, told: dict[str, float], unit: float) -> None:
    section = table_section(name)
    special = flange_properties(section) if section.open else cell_properties(section)
    mine = properties(section) | special
    assert differences(told, mine, unit, DATA["tolerance"]) == []


@pytest.mark.parametrize(
    "row", DATA["hollow"]["rows"], ids=lambda row: f"{row['made_to']} {row['size']}"
)
def test_properties_of_hollow_sections_to_both_standards(row: dict[str, Any]) -> None:
    unit = DATA["hollow"]["unit"]
    told = {key: value for key, value in row.items() if key not in ("made_to", "size")}
    H, B, T = (size * unit for size in row["size"])
    section = Hollow.build({"H": H, "B": B, "T": T, "made_to": row["made_to"]})
    # three digits, the last up to 0.4 % of them
    assert differences(told, properties(section), unit, dict.fromkeys(POWERS, 0.005)) == []


# --- closed formulas -----------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["W4x13", "W8x31", "W14x48", "IPE 300", "HEA 300", "HEB 160"])
def test_rolled_shapes_by_closed_formulas(name: str) -> None:
    """With root fillets; J by El Darwish and Johnston (1965), from memory."""
    s = table_section(name)
    d, b, t, w, r = s.h, s.b_f, s.t_f, s.t_w, s.r
    h = d - 2 * t
    a, c = (1 - PI / 4) * r**2, 0.2233662 * r
    own = 0.0075451 * r**4
    D = ((t + r) ** 2 + w * (r + w / 4)) / (2 * r + t)
    alpha = -0.042 + 0.2204 * w / t + 0.1355 * r / t - 0.0865 * w * r / t**2 - 0.0725 * (w / t) ** 2
    told = {
        "A": 2 * b * t + h * w + (4 - PI) * r**2,
        "I_y": b * d**3 / 12 - (b - w) * h**3 / 12 + 4 * (own + a * (h / 2 - c) ** 2),
        "I_z": t * b**3 / 6 + h * w**3 / 12 + 4 * (own + a * (w / 2 + c) ** 2),
        "Z_y": b * t * (d - t) + w * h**2 / 4 + 4 * a * (h / 2 - c),
        "Z_z": t * b**2 / 2 + h * w**2 / 4 + 4 * a * (w / 2 + c),
        "J": (2 * b * t**3 + h * w**3) / 3 + 2 * alpha * D**4 - 0.420 * t**4,
        "C_w": t * b**3 * (d - t) ** 2 / 24,
        "h_o": d - t,
        "W_no": b * (d - t) / 4,
        "S_w1": t * b**2 * (d - t) / 16,
    }
    mine = properties(s) | flange_properties(s)
    assert differences(told, mine, 1.0, dict.fromkeys(POWERS, 1e-6)) == []


# Outer and inner corner radius in walls: EN 10219-2 and EN 10210-2 Annex B (from memory),
# AISC 360-22 B4.2 for the thinner design wall of ASTM A500 (second-hand).
HOLLOWS = [
    ("EN 10219", 0.12, 0.06, 0.0060, 1.0, 2.0, 1.0),
    ("EN 10219", 0.15, 0.10, 0.0063, 1.0, 2.5, 1.5),
    ("EN 10219", 0.20, 0.10, 0.0100, 1.0, 2.5, 1.5),
    ("EN 10219", 0.30, 0.20, 0.0125, 1.0, 3.0, 2.0),
    ("EN 10210", 0.25, 0.15, 0.0125, 1.0, 1.5, 1.0),
    ("A500", 0.1524, 0.1016, 0.0079375, 0.93, 2.0, 1.0),
    ("A1085", 0.2032, 0.1524, 0.0127, 1.0, 2.0, 1.0),
] + [
    (row.made_to, row.H.si, row.B.si, row.T.si, *corners)
    for row in all_sections().values()
    if isinstance(row, Hollow)
    for corners in [(1.0, 2.5, 1.5) if row.made_to == "EN 10219" else (0.93, 2.0, 1.0)]
]
every_hollow = pytest.mark.parametrize(
    ("made_to", "H", "B", "T", "share", "outer", "inner"), HOLLOWS
)


@every_hollow
def test_hollow_sections_by_closed_formulas(
    made_to: str, H: float, B: float, T: float, share: float, outer: float, inner: float
) -> None:
    """EN 10219-2 and EN 10210-2 Annex B, from memory."""
    section = Hollow.build({"H": H, "B": B, "T": T, "made_to": made_to})
    t = share * T
    ro, ri = outer * t, inner * t

    def corner(r: float) -> tuple[float, float, float]:
        own = (1 / 3 - PI / 16 - 1 / (3 * (12 - 3 * PI))) * r**4
        return (1 - PI / 4) * r**2, (10 - 3 * PI) / (12 - 3 * PI) * r, own

    (Ag, hg, Ig), (Ax, hx, Ix) = corner(ro), corner(ri)
    R = (ro + ri) / 2
    line = 2 * (B - t + H - t) - 2 * R * (4 - PI)
    core = (B - t) * (H - t) - R**2 * (4 - PI)
    K = 2 * core * t / line
    told = {
        "A": 2 * t * (B + H - 2 * t) - (4 - PI) * (ro**2 - ri**2),
        "I_y": B * H**3 / 12
        - (B - 2 * t) * (H - 2 * t) ** 3 / 12
        - 4 * (Ig + Ag * (H / 2 - hg) ** 2)
        + 4 * (Ix + Ax * (H / 2 - t - hx) ** 2),
        "Z_y": B * H**2 / 4
        - (B - 2 * t) * (H - 2 * t) ** 2 / 4
        - 4 * Ag * (H / 2 - hg)
        + 4 * Ax * (H / 2 - t - hx),
        "J": t**3 * line / 3 + 2 * K * core,
        "C": 2 * (B - t) * (H - t) * t,  # Bredt, the cell's mid-lines with sharp corners
        "h_o": H - t,
    }
    mine = properties(section) | cell_properties(section)
    assert differences(told, mine, 1.0, dict.fromkeys(POWERS, 1e-9)) == []


@every_hollow
def test_hollow_sections_by_polygons(
    made_to: str, H: float, B: float, T: float, share: float, outer: float, inner: float
) -> None:
    """A, I_y and I_z by Green's theorem over rounded rectangles of 4 000 straight edges."""
    section = Hollow.build({"H": H, "B": B, "T": T, "made_to": made_to})
    t = share * T

    def integrals(b: float, h: float, r: float) -> np.ndarray:
        turn = np.linspace(0, PI / 2, 1000)
        y, z = [], []
        for quarter, (side, up) in enumerate(((1, 1), (-1, 1), (-1, -1), (1, -1))):
            y.append(side * (b / 2 - r) + r * np.cos(turn + quarter * PI / 2))
            z.append(up * (h / 2 - r) + r * np.sin(turn + quarter * PI / 2))
        y, z = np.concatenate(y), np.concatenate(z)
        y2, z2 = np.roll(y, -1), np.roll(z, -1)
        cross = y * z2 - y2 * z
        return np.array(
            [
                cross.sum() / 2,
                (cross * (z**2 + z * z2 + z2**2)).sum() / 12,
                (cross * (y**2 + y * y2 + y2**2)).sum() / 12,
            ]
        )

    wall = integrals(B, H, outer * t) - integrals(B - 2 * t, H - 2 * t, inner * t)
    assert (section.A, section.I_y, section.I_z) == pytest.approx(wall, rel=1e-5)
    assert (section.t_w, section.r) == pytest.approx((t, (outer - 1) * t), rel=1e-12)


# --- built-up box --------------------------------------------------------------------------------

BOX = PlateBox.build(DATA["box"]["sizes"])


def plate_i(b_t: float, t_t: float, b_b: float, t_b: float) -> Section:
    return PlateI.build({"d": 0.2, "b_t": b_t, "t_t": t_t, "b_b": b_b, "t_b": t_b, "t_w": 0.008})


def test_plate_box_as_worked_out() -> None:
    told = DATA["box"]
    mm = 1e-3
    mine = {key: getattr(BOX, key) for key in ("A", "I_y", "I_z")}
    assert differences({k: told[k] for k in mine}, mine, mm, dict.fromkeys(POWERS, 2e-5)) == []
    assert -BOX.z_b == pytest.approx(told["centroid"] * mm, rel=1e-5)
    assert (BOX.S_t, BOX.S_b) == pytest.approx((told["S_t"] * mm**3, told["S_b"] * mm**3), rel=1e-5)
    # the flow of both webs; mid-lines count the web from the plate's middle
    for name, Q in (("top", told["Q_plate"]), ("middle", told["Q_middle"])):
        both = 2 * abs(point(BOX, f"left web, {name}")["Q_y"])
        assert both == pytest.approx(Q * mm**3, rel=0.03), name
    psi = BOX.points.psi[BOX.points.names.index("left web, middle")]
    assert abs(psi) == pytest.approx(1 / (2 * told["A_m"] * mm**2), rel=1e-9)
    assert 5e3 * abs(psi) == pytest.approx(told["flow_of_5_kNm"] * 1e3, rel=5e-4)
    assert pytest.approx(told["J_elements"] * mm**4, rel=told["J_tolerance"]) == BOX.J
    plates = 2 * 150 * 10**3 + 200 * (20**3 + 12**3)
    assert pytest.approx((told["J_bredt"] + plates / 3) * mm**4, rel=1e-4) == BOX.J
    shear_centre = BOX.z_s - BOX.z_b
    tolerance = told["shear_centre_tolerance"] * mm
    assert shear_centre == pytest.approx(told["shear_centre"] * mm, abs=tolerance)


@pytest.mark.parametrize(
    "section",
    [BOX, SKEW_I, plate_i(0.3, 0.04, 0.1, 0.01), plate_i(0.1, 0.01, 0.3, 0.04)],
    ids=["box", "I", "axis in the top flange", "axis in the bottom flange"],
)
def test_plastic_moduli_by_thin_strips(section: Section) -> None:
    """Area above minus area below the axis of equal areas, over 40 000 strips."""

    def plastic(strips: np.ndarray, area: np.ndarray) -> float:
        passed = np.cumsum(area)
        axis = np.interp(passed[-1] / 2, passed, strips)
        return float((area * abs(strips - axis)).sum())

    for mine, axis, other in (
        (section.plastic()[0], "z", "half"),
        (section.plastic()[1], "y", "width"),
    ):
        reach = max(section.h, section.b_f, 2 * section.y_b) * 1.01
        edges = np.linspace(-reach, reach, 40_001) + (section.h / 2 if axis == "z" else 0)
        area = np.zeros(40_000)
        for part in section.parts:
            if part.area == 0:
                continue
            centre, half = getattr(part, axis), getattr(part, other)
            covered = np.clip((edges - centre + half) / (2 * half), 0, 1)
            area += part.area * np.diff(covered)
        assert mine == pytest.approx(plastic((edges[1:] + edges[:-1]) / 2, area), rel=1e-4)


def test_torsion_constant_of_plates_is_the_sum_over_walls() -> None:
    plain = RolledI.build({"d": 0.16, "b_f": 0.16, "t_f": 0.013, "t_w": 0.008, "r": 0.0})
    plates = PlateI.build(
        {"d": 0.16, "b_t": 0.16, "t_t": 0.013, "b_b": 0.16, "t_b": 0.013, "t_w": 0.008}
    )
    for key in ("A", "I_y", "I_z", "C_w", "z_s", "z_f"):
        assert getattr(plain, key) == pytest.approx(getattr(plates, key), rel=1e-12, abs=1e-15)
    assert pytest.approx((2 * 160 * 13**3 + 134 * 8**3) / 3 * 1e-12, rel=1e-12) == plates.J


def test_shear_centre_and_warping_constant_of_a_channel() -> None:
    """Thin walls on their mid-lines, e = b² h² t_f / (4 I_y) from the web; from memory."""
    b, h, t_f, t_w = 0.07, 0.19, 0.012, 0.008
    y, z = np.array([b, 0, 0, b]) + 0.03, np.array([h, h, 0, 0])
    model = solve(Walls(y, z, np.array([t_f, t_w, t_f]), ((0, 1), (1, 2), (2, 3))))
    I_y = t_w * h**3 / 12 + b * t_f * h**2 / 2
    C_w = t_f * b**3 * h**2 / 12 * (3 * b * t_f + 2 * h * t_w) / (6 * b * t_f + h * t_w)
    assert (model.I_y, model.C_w) == pytest.approx((I_y, C_w), rel=1e-9)
    assert (model.y_c, model.z_c) == pytest.approx(
        (0.03 + b**2 * t_f / (2 * b * t_f + h * t_w), h / 2), rel=1e-9
    )
    shear_centre = (0.03 - b**2 * h**2 * t_f / (4 * I_y), h / 2)
    assert (model.y_s, model.z_s) == pytest.approx(shear_centre, rel=1e-9)


# --- stress points and what does not fit ---------------------------------------------------------

EXAMPLES = {family.SHAPE: family for family in (RolledI, PlateI, Hollow, PlateBox)}


@pytest.mark.parametrize("told", DATA["points"], ids=lambda told: told["shape"])
def test_stress_points_stand_where_a_drawing_has_them(told: dict[str, Any]) -> None:
    mm = 1e-3
    sizes = {k: v if isinstance(v, str) else v * mm for k, v in told["sizes"].items()}
    section = EXAMPLES[told["shape"]].build(sizes)
    y, z = np.array(told["at"]).T * mm
    assert section.points.y == pytest.approx(y, abs=1e-6)
    assert section.points.z - section.z_b == pytest.approx(z, abs=1e-6)
    middle_of_flange, bottom = section.z_t - section.t_f / 2, sizes.get("t_b", section.t_f)
    assert section.z_f == pytest.approx(middle_of_flange, rel=1e-12)
    assert section.h_o == pytest.approx(section.z_f - section.z_b - bottom / 2, rel=1e-12)


I_SIZES = {"d": 0.1, "b_t": 0.08, "b_b": 0.07, "t_t": 0.04, "t_b": 0.0399, "t_w": 0.02}
ROLLED = {"d": 0.1, "b_f": 0.0601, "t_f": 0.025, "t_w": 0.0151, "r": 0.0149}


@pytest.mark.parametrize(
    ("family", "sizes", "change", "key"),
    [
        (PlateI, I_SIZES, {"t_b": 0.0401}, "d"),
        (PlateI, I_SIZES, {"t_t": 0.0403}, "d"),
        (PlateI, I_SIZES, {"b_t": 0.0399}, "t_w"),
        (PlateI, I_SIZES, {"b_b": 0.0399}, "t_w"),
        (RolledI, ROLLED | {"b_f": 0.1}, {"r": 0.0151}, "d"),
        (RolledI, ROLLED, {"b_f": 0.0599}, "t_w"),
        (RolledI, ROLLED | {"b_f": 0.1}, {"t_w": 0.0251}, "t_w"),
        (Hollow, {"H": 0.1, "B": 0.0481, "T": 0.008, "made_to": "EN 10219"}, {"B": 0.0479}, "T"),
        (Hollow, {"H": 0.0481, "B": 0.1, "T": 0.008, "made_to": "EN 10219"}, {"H": 0.0479}, "T"),
        (PlateBox, DATA["box"]["sizes"], {"c": 0.0299}, "c"),
        (PlateBox, DATA["box"]["sizes"] | {"c": 0.2}, {"b_t": 0.1999}, "b_t"),
        (PlateBox, DATA["box"]["sizes"] | {"c": 0.2}, {"b_b": 0.1999}, "b_b"),
    ],
)
def test_sizes_that_make_no_section_are_told(
    family: Any, sizes: dict[str, Any], change: dict[str, float], key: str
) -> None:
    assert family.misfits(sizes) == []
    assert [text.partition(":")[0] for text in family.misfits(sizes | change)] == [key]
