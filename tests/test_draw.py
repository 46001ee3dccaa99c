"""The picture of the main beam: what moves stands where the mechanics say, texts stay readable."""

import io
import itertools
import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any
from xml.etree import ElementTree

import numpy as np
import pytest
from PIL import Image

from splitcalc.checks import ALL
from splitcalc.draw import palette
from splitcalc.draw.action_panel import ActionPanel
from splitcalc.draw.labels import HEIGHT, LINE, WIDTH, Label, Room, apart, label
from splitcalc.draw.main_beam import MainBeamPicture, still
from splitcalc.draw.png import read_inputs
from splitcalc.draw.section import section_svg
from splitcalc.draw.stress_panel import StressPanel
from splitcalc.findings import Finding
from splitcalc.logs.allowed import BURIED, FIRST_BITE
from splitcalc.logs.present import FIXED, MOVING, Present, corner_points, log_through, present
from splitcalc.logs.report import findings
from splitcalc.machine.file import Machine, load, parse_machine
from splitcalc.opening import worksheets_dir
from splitcalc.stress.bimoment import bounds, internal_actions
from splitcalc.units import Dimension, factor

DEMOS = ("machine.toml", "machine-si.toml")
PANELS = ("stress", "actions")


@dataclass(frozen=True)
class Demo:
    machine: Machine
    worst: list[Finding]

    def now(self, machine: Machine | None = None, **log: Any) -> Present:
        """One log; straight, the longest, on the axis, where nothing else is said."""
        machine = machine or self.machine
        numbers = machine.numbers()
        state = log.pop("state", FIRST_BITE)
        given = {
            "pivot": MOVING, "distance": float(numbers.longest), "left": 0.0, "up": 0.0,
            "tan_left": 0.0, "tan_up": 0.0,
        } | log  # fmt: skip
        return present(ALL, numbers, log_through(**given), machine.units, state)

    def picture(self, now: Present, panel: str = "stress") -> MainBeamPicture:
        return MainBeamPicture(self.machine, now, self.worst, self.machine.units, panel)


@pytest.fixture(scope="module", params=DEMOS)
def demo(request: pytest.FixtureRequest) -> Demo:
    machine = load(worksheets_dir() / request.param)
    return Demo(machine, findings(ALL, machine.numbers(), machine.units))


@pytest.fixture(scope="module")
def us() -> Demo:
    machine = load(worksheets_dir() / "machine.toml")
    return Demo(machine, findings(ALL, machine.numbers(), machine.units))


def random_logs(demo: Demo, count: int, past: float) -> list[Present]:
    """Logs of both states whose slopes and places go `past` times as far as the tools do."""
    rng = np.random.default_rng(3)
    numbers = demo.machine.numbers()
    out = []
    for k in range(count):
        state = (FIRST_BITE, BURIED)[k % 2]
        least = float(numbers.shortest if state == FIRST_BITE else numbers.gap)
        across, up, left, high, share = rng.uniform(-past, past, 5)
        out.append(
            demo.now(
                pivot=(MOVING, FIXED)[k % 3 == 0],
                state=state,
                distance=least + abs(share) / past * (float(numbers.longest) - least),
                left=left * float(numbers.moving.half_width),
                up=high * float(numbers.moving.high),
                tan_left=across * float(numbers.grip),
                tan_up=up * float(numbers.grip),
            )
        )
    return out


# --- texts that move ---------------------------------------------------------------------------


@pytest.mark.parametrize("panel", PANELS)
@pytest.mark.parametrize("past", [0.7, 2.5])
def test_labels_never_overlap_and_lie_inside(demo: Demo, panel: str, past: float) -> None:
    logs = random_logs(demo, 24, past)
    picture = demo.picture(logs[0], panel)
    for now in logs:
        picture.render(demo.machine, now, {}, float(now.x[40]))
        labels = picture.labels()
        assert overlaps(labels) == []
        for one in labels:
            left, top, right, bottom = one.box
            assert left >= -0.01, one
            assert right <= WIDTH + 0.01, one
            assert top >= -0.01, one
            assert bottom <= HEIGHT + 0.01, one


def test_every_curve_of_the_stress_panel_has_its_name_in_its_colour_inside_the_axes(
    demo: Demo,
) -> None:
    now = demo.now(pivot=FIXED, tan_left=0.15, tan_up=0.1)
    picture = demo.picture(now)
    picture.render(demo.machine, now, {}, None)
    assert isinstance(picture.panel, StressPanel)
    curves = picture.panel.curves
    shown = {one.text: one for one in picture.labels()}
    box = curves.axes.get_position()
    for name, line in curves.lines.items():
        assert shown[name].color == line.get_color()
        _, top, _, bottom = shown[name].box
        assert (1 - box.y1) * HEIGHT - 0.01 <= top
        assert bottom <= (1 - box.y0) * HEIGHT + 0.01
    assert "governs here" not in shown


@pytest.mark.parametrize("tan_left", [0.0, 0.05, 0.2, -0.3])
def test_names_stand_at_their_curves_in_their_order(demo: Demo, tan_left: float) -> None:
    now = demo.now(pivot=FIXED, tan_left=tan_left, tan_up=0.1)
    picture = demo.picture(now)
    picture.render(demo.machine, now, {}, None)
    assert isinstance(picture.panel, StressPanel)
    curves = picture.panel.curves
    names = [one for one in picture.labels() if one.text in curves.lines]
    assert len(names) == len(curves.lines)
    box, (low, high), top = curves.axes.get_position(), curves.axes.get_xlim(), curves.shown

    def height(one: Label) -> float:
        x = low + (high - low) * (one.x - box.x0) / box.width
        line = curves.lines[one.text]
        share = (np.interp(x, line.get_xdata(), line.get_ydata()) + top) / (2 * top)
        return float(1 - box.y0 - share * box.height) * HEIGHT

    ordered = sorted(names, key=lambda one: one.y)
    heights = [height(one) for one in ordered]
    assert all(a <= b + 0.5 for a, b in itertools.pairwise(heights))
    for one, y in zip(ordered, heights, strict=True):
        # as many lines away as there are names in its way, at most
        near = sum(abs(y - other) < len(names) * LINE for other in heights)
        assert abs(one.y * HEIGHT - y) <= near * LINE / 2 + 1


def overlaps(labels: Sequence[Label]) -> list[tuple[str, str]]:
    """Pairs of labels whose boxes overlap."""
    return [
        (a.text, b.text)
        for a, b in itertools.combinations(labels, 2)
        if a.box[0] < b.box[2] and b.box[0] < a.box[2]
        and a.box[1] < b.box[3] and b.box[1] < a.box[3]
    ]  # fmt: skip


def test_labels_move_by_the_least_that_clears_and_go_when_there_is_no_room() -> None:
    room = Room(0, 0, 100, 40)
    one = label("one", (50, 20), "k", "middle", room)
    other = label("two", (50, 22), "k", "middle", room)
    first, second = apart([one, other], room)
    assert first == one
    assert second.y * HEIGHT == pytest.approx(33.5)
    assert len(apart([one, other, other, other], room)) == 3
    assert label("wide word", (99, 99), "k", "left", room).box == pytest.approx(
        (100 - 9 * 6.2, 27, 100, 40)
    )


# --- limits ------------------------------------------------------------------------------------


def test_limits_stay_for_allowed_logs_and_step_past_them_and_back(demo: Demo) -> None:
    allowed = random_logs(demo, 30, 0.5)
    allowed = [now for now in allowed if now.set != "outside"]
    assert len(allowed) > 5
    picture = demo.picture(allowed[0])
    assert isinstance(picture.panel, StressPanel)
    axes = picture.panel.curves.axes
    picture.render(demo.machine, allowed[0], {}, None)
    quiet = axes.get_ylim()
    for now in allowed:
        picture.render(demo.machine, now, {}, None)
        assert axes.get_ylim() == quiet
    far = demo.now(pivot=FIXED, distance=0.3, up=0.4, left=0.2, tan_left=30.0, tan_up=20.0)
    picture.render(demo.machine, far, {}, None)
    top = axes.get_ylim()[1]
    curves = picture.panel.curves.lines.values()
    assert top > quiet[1]
    assert top >= max(np.abs(line.get_ydata()).max() for line in curves)
    assert float(f"{top:e}".partition("e")[0]) in (1, 2, 5)
    picture.render(demo.machine, allowed[0], {}, None)
    assert axes.get_ylim() == quiet


def test_every_worst_allowed_log_fits_the_limits(demo: Demo) -> None:
    now = demo.now()
    picture = demo.picture(now)
    picture.render(demo.machine, now, {}, None)
    assert isinstance(picture.panel, StressPanel)
    top = picture.panel.curves.shown
    per = factor(Dimension.STRESS, demo.machine.units)
    demands = [f.demand * per for f in demo.worst if f.demand is not None]
    assert max(demands) < top
    picture.set_worst(())
    picture.render(demo.machine, now, {}, None)
    limits = demo.machine.numbers().required["yield"].values()
    least = max(float(demo.machine.numbers().f_y) / required for required in limits) * per
    assert least < picture.panel.curves.shown <= top


def test_a_picture_after_a_step_equals_one_that_began_there(us: Demo) -> None:
    far = us.now(pivot=FIXED, tan_left=0.9)
    picture = us.picture(us.now())
    picture.render(us.machine, us.now(), {}, 0.5)
    stepped = picture.render(us.machine, far, {}, 0.5)
    assert us.picture(far).render(us.machine, far, {}, 0.5) == stepped


# --- what moves stands where the mechanics say -------------------------------------------------


def test_contacts_pads_and_axis_stand_where_the_frame_says(demo: Demo) -> None:
    machine = demo.machine.changed(
        {"cylinder.axis_height": "140 mm", "sled.rear_pad": "300 mm", "sled.front_pad": "60 mm"}
    )
    logs = random_logs(demo, 4, 0.8)
    picture = demo.picture(logs[0])
    for log in (now.log for now in logs):
        now = present(ALL, machine.numbers(), log, machine.units)
        picture.render(machine, now, {}, None)
        frame, lines, parts = now.acting.frame, picture.views.lines, picture.views.parts
        for where, a, b in (
            ("", frame.e + log.a_z, frame.e + log.b_z),
            (" from above", log.a_y, log.b_y),
        ):
            np.testing.assert_allclose(
                lines[f"thrust{where}"].get_xydata(), [(frame.x_A, a), (frame.x_B, b)]
            )
            (x_1, v_1), (x_2, v_2) = lines[f"line of thrust{where}"].get_xydata()
            np.testing.assert_allclose((v_2 - v_1) / (x_2 - x_1), (b - a) / log.l_AB, atol=1e-9)
            np.testing.assert_allclose(
                np.interp([frame.x_A, frame.x_B], [x_1, x_2], [v_1, v_2]), [a, b], atol=1e-12
            )
        for name in ("rear pad", "front pad"):
            x = parts[name].get_xy()[:, 0]
            np.testing.assert_allclose((x.min(), x.max()), frame.patches[name])
            assert parts[name].get_xy()[:, 1].min() == pytest.approx(now.numbers.section.z_t)
        assert set(lines["cylinder axis"].get_ydata()) == {frame.e}
        assert lines["e"].get_ydata()[1] - now.numbers.section.z_t == pytest.approx(0.140)
        assert parts["tool"].get_xy()[:, 0].max() == pytest.approx(frame.x_A)
        assert parts["rod"].get_xy()[:, 1].mean() == pytest.approx(frame.e, abs=0.02)
        for body in ("log", "log from above"):
            for point in lines[body.replace("log", "thrust")].get_xydata():
                assert np.abs(parts[body].get_xy() - point).max(axis=1).min() < 1e-12


def test_the_log_lies_on_the_beam_and_between_the_tools(demo: Demo) -> None:
    now = demo.now()
    picture = demo.picture(now)
    picture.render(demo.machine, now, {}, None)
    x, z = picture.views.parts["log"].get_xy().T
    assert (x.min(), x.max()) == pytest.approx((now.acting.frame.x_A, now.acting.frame.x_B))
    assert z.min() == pytest.approx(now.numbers.section.z_t)
    logs = demo.machine.document.logs
    assert logs.smallest_diameter.si <= z.max() - z.min() <= logs.largest_diameter.si


def test_views_are_to_scale_and_share_the_panel_s_axis(demo: Demo) -> None:
    picture = demo.picture(demo.now())
    per = factor(Dimension.LENGTH, demo.machine.units)
    assert isinstance(picture.panel, StressPanel)
    scales = []
    for axes in (picture.views.side, picture.views.above):
        (x_1, x_2), (v_1, v_2), box = axes.get_xlim(), axes.get_ylim(), axes.get_position()
        scales += [(x_2 - x_1) / (box.width * WIDTH), (v_2 - v_1) / (box.height * HEIGHT)]
        np.testing.assert_allclose(picture.panel.curves.axes.get_xlim(), (x_1 * per, x_2 * per))
        assert box.x0 == picture.panel.curves.axes.get_position().x0
    np.testing.assert_allclose(scales, scales[0])


def test_shading_reaches_one_depth_past_pads_and_tool(us: Demo) -> None:
    now = us.now()
    picture = us.picture(now)
    picture.render(us.machine, now, {}, None)
    assert isinstance(picture.panel, StressPanel)
    depth, patches = 9.00, now.acting.frame.patches  # in: the depth of a W8x67
    pads, tool = ((n.get_x(), n.get_x() + n.get_width()) for n in picture.panel.near)
    inch = 0.0254
    assert pads == pytest.approx(
        (patches["rear pad"][0] / inch - depth, patches["front pad"][1] / inch + depth)
    )
    assert tool == pytest.approx((58 - depth, 76))  # the beam ends at 76


def test_a_cylinder_that_leaves_the_picture_gets_more_room(us: Demo) -> None:
    high = us.machine.changed({"cylinder.axis_height": "16 in"})
    now = us.now(high)
    picture = us.picture(us.now())
    picture.render(us.machine, us.now(), {}, None)
    before = picture.views.side.get_ylim()[1]
    picture.render(high, now, {}, None)
    tube = picture.views.parts["tube"].get_xy()[:, 1].max()
    assert before < tube < picture.views.side.get_ylim()[1]


def test_a_wedge_on_the_ram_moves_and_the_plate_stands() -> None:
    text = (worksheets_dir() / "machine.toml").read_text(encoding="utf-8")
    plate, wedge = 'kind = "push plate"', 'kind = "wedge"'
    text = text.replace(plate, "?").replace(wedge, plate).replace("?", wedge)
    text = text.replace('included_angle = "30 deg"\n', "").replace('width = "1 in"', "width = 'W'")
    text = text.replace('width = "6 in"', 'width = "1 in"').replace("width = 'W'", 'width = "8 in"')
    machine = parse_machine(text.encode())
    demo = Demo(machine, [])
    picture = demo.picture(demo.now())
    for state, distance in ((FIRST_BITE, 0.5), (BURIED, 0.1)):
        now = demo.now(distance=distance, tan_left=0.1, state=state)
        assert now.numbers.wedge_moves
        picture.render(machine, now, {}, None)
        parts = picture.views.parts
        plan, fixed = (parts[f"{n} from above"].get_xy() for n in ("tool", "fixed tool"))
        tip = plan[plan[:, 0].argmax()]
        np.testing.assert_allclose(tip, (now.acting.frame.x_A, 0.0), atol=1e-12)
        assert np.ptp(plan[:, 1]) == pytest.approx(0.0254)
        assert fixed[:, 0].min() == pytest.approx(57 * 0.0254)
        assert np.ptp(fixed[:, 1]) == pytest.approx(8 * 0.0254)
        x = parts["log"].get_xy()[:, 0]
        assert x.max() == pytest.approx(now.acting.frame.x_B)
        length = float(now.numbers.longest) if state == BURIED else distance
        assert np.ptp(x) == pytest.approx(length)  # a buried log goes past the wedge's edge


# --- curves ------------------------------------------------------------------------------------


def test_stress_curves_are_the_stresses_in_the_person_s_units(demo: Demo) -> None:
    now = demo.now(pivot=FIXED, tan_left=0.1)
    picture = demo.picture(now)
    picture.render(demo.machine, now, {}, None)
    assert isinstance(picture.panel, StressPanel)
    mm, mpa = (
        {"us": 1 / 0.0254, "si": 1e3}[demo.machine.units],
        {"us": 1 / 6.894757293168e6, "si": 1e-6}[demo.machine.units],
    )
    lines = picture.panel.curves.lines
    assert ("web across" in lines) == now.numbers.section.open
    for name, stress in now.corners.items():
        np.testing.assert_allclose(lines[name].get_xdata(), now.x * mm)
        np.testing.assert_allclose(lines[name].get_ydata(), stress * mpa)
    if now.web is not None:
        np.testing.assert_allclose(lines["web across"].get_ydata(), now.web * mpa)


def test_the_action_panel_shows_the_actions(demo: Demo) -> None:
    now = demo.now(pivot=FIXED, tan_left=0.1, tan_up=0.08)
    picture = demo.picture(now, "actions")
    picture.render(demo.machine, now, {}, None)
    assert isinstance(picture.panel, ActionPanel)
    acting, section = now.acting, now.numbers.section
    found = {n: v[:, 0] for n, v in internal_actions(now.numbers, acting).items()}
    for name in ("N", "V_y", "V_z", "M_y", "M_z"):
        np.testing.assert_array_equal(found[name], getattr(acting, name)[:, 0])
    torque = acting.torque(acting.torques(section.z_s))
    np.testing.assert_array_equal(found["T"], torque[:, 0])
    shown = {n: c for curves in picture.panel.curves for n, c in curves.lines.items()}
    us = demo.machine.units == "us"
    force = 1 / 4448.2216152605 if us else 1e-3  # kip, kN
    moment = force / 0.0254 if us else 1e-3  # kip·in, kN·m
    scales = dict.fromkeys(("N", "V_y", "V_z"), force) | dict.fromkeys(("M_y", "M_z", "T"), moment)
    if section.open:
        (warping,) = bounds(now.numbers, acting)
        np.testing.assert_array_equal(found["B"], warping.B[:, 0])
        np.testing.assert_array_equal(found["T_w"], warping.T_w[:, 0])
        flange = found["B"] / float(section.h_o) * moment
        np.testing.assert_allclose(shown["B/h_o"].get_ydata(), flange)
        scales["T_w"] = moment
    assert set(shown) == set(scales) | ({"B/h_o"} if section.open else set())
    for name, scale in scales.items():
        np.testing.assert_allclose(shown[name].get_ydata(), found[name] * scale)


def test_the_larger_bound_of_warping_is_shown(us: Demo) -> None:
    zones = '\n[[beam.closed_zones]]\nstart = "40 in"\nend = "52 in"\nkind = "side plates"\n'
    text = (worksheets_dir() / "machine.toml").read_text(encoding="utf-8")
    machine = parse_machine((text + zones).encode())
    now = us.now(machine, pivot=FIXED, tan_left=0.15)
    free, held = (w.B[:, 0] for w in bounds(now.numbers, now.acting))
    assert np.abs(free - held).max() > 0.1 * np.abs(free).max()
    shown = internal_actions(now.numbers, now.acting)["B"][:, 0]
    np.testing.assert_array_equal(np.abs(shown), np.maximum(np.abs(free), np.abs(held)))


@pytest.mark.parametrize("panel", PANELS)
def test_pinned_curves_stay_behind_until_they_are_taken_away(demo: Demo, panel: str) -> None:
    first, second = demo.now(pivot=FIXED, tan_left=0.1), demo.now(tan_up=0.05)
    picture = demo.picture(first, panel)
    bare = picture.render(demo.machine, second, {}, None)
    picture.pin(first)
    pinned = picture.render(demo.machine, second, {}, None)
    assert pinned != bare
    group = (
        picture.panel.curves if isinstance(picture.panel, ActionPanel) else [picture.panel.curves]
    )
    picture.render(demo.machine, first, {}, None)
    for curves in group:
        for name, line in curves.lines.items():
            np.testing.assert_array_equal(
                line.get_xydata(), curves._pinned[name].get_xydata(), strict=True
            )
    picture.pin(None)
    assert picture.render(demo.machine, second, {}, None) == bare


def test_the_mark_stands_at_the_governing_station_in_every_band(demo: Demo) -> None:
    now = demo.now()
    picture = demo.picture(now)
    png = picture.render(demo.machine, now, {"log": 1.5}, 0.9)
    assert read_inputs(png) == {"log": 1.5}
    assert set(picture.mark.get_xdata()) == {0.9}
    heights = np.reshape(picture.mark.get_ydata(), (-1, 3))
    boxes = [axes.get_position() for axes in picture.canvas.figure.axes]
    np.testing.assert_allclose(heights[:, :2], [(box.y0, box.y1) for box in boxes])
    governs = next(one for one in picture.labels() if one.text == "governs here")
    side = picture.views.side
    across = side.transData.transform((0.9, 0.0))[0] / side.figure.bbox.width
    assert governs.x == pytest.approx(across)


def test_a_still_picture_has_its_labels_on_it(demo: Demo) -> None:
    now = demo.now(tan_left=0.1)
    canvas = still(demo.machine, now, demo.worst, demo.machine.units)
    assert canvas._repr_png_()[1] == {"width": WIDTH, "height": HEIGHT}
    texts = {text.get_text() for text in canvas.figure.texts}
    assert {"A", "B", "line of thrust", "governs here", "top left"} <= texts


def test_the_axis_s_name_keeps_off_its_numbers_even_far_past_the_limits(demo: Demo) -> None:
    far = demo.now(pivot=FIXED, distance=0.5, up=0.4, tan_left=6.0, tan_up=3.0)
    picture = demo.picture(far)
    for now in (demo.now(), far):
        picture.render(demo.machine, now, {}, None)
        assert isinstance(picture.panel, StressPanel)
        axis = picture.panel.curves.axes.yaxis
        name = axis.label.get_window_extent()
        numbers = [text.get_window_extent() for text in axis.get_ticklabels() if text.get_text()]
        assert len(numbers) > 3
        assert name.x1 < min(number.x0 for number in numbers)


@pytest.mark.parametrize("panel", PANELS)
def test_nothing_runs_off_the_picture_s_left_edge(demo: Demo, panel: str) -> None:
    now = demo.now(pivot=FIXED, tan_left=0.3)
    picture = demo.picture(now, panel)
    with Image.open(io.BytesIO(picture.render(demo.machine, now, {}, None))) as image:
        pixels = np.asarray(image)
    assert pixels.shape == (HEIGHT, WIDTH, 3)
    assert pixels[:, :2].min() == 255
    assert pixels[-2:].min() == 255


# --- the section -------------------------------------------------------------------------------

SVG = "{http://www.w3.org/2000/svg}"


def drawn(svg: str) -> tuple[ElementTree.Element, list[str]]:
    tree = ElementTree.fromstring(svg)
    return tree, [text.text or "" for text in tree.iter(f"{SVG}text")]


def test_the_section_names_its_stresses_and_its_unit(demo: Demo) -> None:
    now = demo.now(pivot=FIXED, tan_left=0.12, tan_up=0.1)
    k = int(np.abs(now.sigma).max(axis=1).argmax())
    tree, texts = drawn(section_svg(now, k, demo.machine.units))
    assert (tree.get("width"), tree.get("height")) == ("240", "190")
    unit = {"us": "ksi", "si": "MPa"}[demo.machine.units]
    per = {"us": 1 / 6.894757293168e6, "si": 1e-6}[demo.machine.units]
    assert any(f"normal stress, {unit}" in text for text in texts)
    values = [float(t.replace("−", "-")) for t in texts if re.fullmatch(r"[+−]?[\d.]+", t)]
    expected = [now.sigma[k, p] * per for p in corner_points(now.numbers.section)]
    np.testing.assert_allclose(
        values, expected, rtol=5.1e-3, atol=0.051
    )  # three digits, one decimal
    across = [t.removeprefix("web across ") for t in texts if t.startswith("web across")]
    assert len(across) == now.numbers.section.open
    if now.web is not None:
        assert float(across[0]) == pytest.approx(now.web[k] * per, rel=6e-3)


def test_the_section_is_seen_from_the_rear_mount_left_on_the_left(demo: Demo) -> None:
    now = demo.now(pivot=FIXED, tan_left=0.12)
    k = int(np.abs(now.sigma).max(axis=1).argmax())
    tree, _ = drawn(section_svg(now, k, demo.machine.units))
    dots = {c.get("fill"): (float(c.get("cx", 0)), float(c.get("cy", 0)))
            for c in tree.iter(f"{SVG}circle")}  # fmt: skip
    texts = {t.text: (float(t.get("x", 0)), float(t.get("y", 0))) for t in tree.iter(f"{SVG}text")}
    per = factor(Dimension.STRESS, demo.machine.units)
    for name, (color, _) in palette.CORNERS.items():
        stress = now.corners[name][k] * per
        near = [at for text, at in texts.items() if _is_near(text, stress)]
        for x, y in (dots[color], *near):
            assert (x < 120) == name.endswith("left")
            assert (y < 95) == name.startswith("top")
        assert len(near) == 1


def _is_near(text: str | None, value: float) -> bool:
    plain = (text or "").replace("−", "-")
    is_number = re.fullmatch(r"[+-]?[\d.]+", plain)
    return bool(is_number) and abs(float(plain) - value) <= 5.1e-3 * abs(value) + 0.051


def hollow(text: str) -> str:
    shape = 'shape = "hollow"\nH = "250 mm"\nB = "180 mm"\nT = "10 mm"\nmade_to = "EN 10210"\n\n'
    text = text.replace('gib_strip = "95 mm"', 'gib_strip = "80 mm"')
    return re.sub(r'shape = "plate box".*?\n\n', shape, text, flags=re.DOTALL)


@pytest.mark.parametrize(
    ("name", "change", "walls"),
    [
        ("machine.toml", str, 3),
        ("machine-si.toml", str, 4),
        ("machine-si.toml", hollow, 1),
    ],
)
def test_walls_take_their_colour_from_their_stress(
    name: str, change: Callable[[str], str], walls: int
) -> None:
    machine = parse_machine(change((worksheets_dir() / name).read_text(encoding="utf-8")).encode())
    now = Demo(machine, []).now(pivot=FIXED, tan_left=0.12, tan_up=0.1)
    k = int(np.abs(now.sigma).max(axis=1).argmax())
    tree, _ = drawn(section_svg(now, k, machine.units))
    gradients = list(tree.iter(f"{SVG}linearGradient"))
    fills = [path.get("fill") for path in tree.iter(f"{SVG}path")]
    assert fills == [f"url(#{gradient.get('id')})" for gradient in gradients]
    assert len(fills) == walls
    full = float(now.numbers.f_y / now.numbers.required["yield"]["extreme"])
    reds = [
        int(stop.get("stop-color", "")[1:3], 16)
        for gradient in gradients
        for stop in gradient.iter(f"{SVG}stop")
    ]
    blue = 255 * (1 - now.sigma[k].max() / full)  # the palette's blue has no red in it
    assert min(reds) == pytest.approx(blue, abs=1)


def test_a_section_without_stress_is_white(demo: Demo) -> None:
    now = demo.now()
    assert np.abs(now.sigma[0]).max() < 1.0  # behind the rear mount
    tree, texts = drawn(section_svg(now, 0, demo.machine.units))
    assert {stop.get("stop-color") for stop in tree.iter(f"{SVG}stop")} == {"#ffffff"}
    assert texts.count("0") == 4
