"""What other people's notebooks and scripts use, against the rooms that compute it."""

import html
import math
import re
import shutil
import subprocess
import sys
from pathlib import Path
from typing import Any

import numpy as np
import pint
import pytest

import splitcalc
from splitcalc.checks import ALL, NOT_YET
from splitcalc.inputs import InputError
from splitcalc.logs.present import log_through, present
from splitcalc.logs.report import findings, governing
from splitcalc.machine.file import Machine
from splitcalc.scripting import Curves, Findings
from splitcalc.stress.bimoment import bounds
from splitcalc.thrust.frame import Log, frame_of
from splitcalc.thrust.statics import actions, reactions
from splitcalc.units import Dimension

ROOT = Path(__file__).resolve().parents[1]
US, SI = (ROOT / "worksheets" / name for name in ("machine.toml", "machine-si.toml"))
INCH = 0.0254  # m, exact
KIP_INCH = 4448.2216152605 * INCH  # N·m, exact


@pytest.fixture(scope="module")
def us() -> Machine:
    return splitcalc.load(US)


@pytest.fixture(scope="module")
def si() -> Machine:
    return splitcalc.load(SI)


def plain(log: Log) -> list[float]:
    return [log.l_AB, log.a_y, log.a_z, log.b_y, log.b_z]


def problems(call: Any, *args: Any, **named: Any) -> dict[str, str]:
    with pytest.raises(InputError) as caught:
        call(*args, **named)
    return {problem.key: problem.message for problem in caught.value.problems}


# --- the ten lines of the README -----------------------------------------------------------------


def test_the_lines_of_the_readme_run_word_for_word(tmp_path, monkeypatch):
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    section = text.partition("## From Python\n")[2].partition("\n## ")[0]
    (block,) = re.findall(r"```python\n(.*?)```", section, re.DOTALL)
    shutil.copy(US, tmp_path / "machine.toml")
    monkeypatch.chdir(tmp_path)
    seen: dict[str, Any] = {}
    exec(block, seen)

    numbers = seen["machine"].numbers()
    slope = math.tan(math.radians(4))
    log = Log(20 * INCH, 20 * INCH * slope, INCH - 20 * INCH * slope, 0.0, INCH)
    assert plain(seen["log"]) == pytest.approx(plain(log), abs=1e-15)
    # the offsets of the second way stand there with one decimal of an inch
    assert plain(seen["same"]) == pytest.approx(plain(log), abs=0.05 * INCH)
    below = present(ALL, numbers, log, "us")
    assert seen["result"].set in ("usual", "extreme")
    assert seen["result"].past == ()
    moment = seen["moment"]
    assert str(moment.units) in ("inch * kip", "kip * inch")
    assert moment.magnitude * KIP_INCH == pytest.approx(below.acting.M_y[:, 0], rel=1e-12, abs=1e-6)
    assert seen["highest"].magnitude == pytest.approx(below.corners["top left"].max() / 1e6)
    assert seen["demand"].to("Pa").magnitude == pytest.approx(below.findings[0].demand)
    worst = governing(findings(ALL, numbers, "us"))
    assert worst is not None
    assert seen["governing"].check is worst.check
    assert seen["governing"].utilisation == worst.utilisation
    ratio = seen["bigger"].numbers().F / numbers.F
    assert ratio == pytest.approx((5 / 4.5) ** 2)


# --- logs ----------------------------------------------------------------------------------------


@pytest.mark.parametrize("pivot", ["fixed tool", "moving tool"])
def test_a_log_by_angles_leans_by_them_about_its_pivot(us, pivot):
    log = splitcalc.log(
        us, length="18 in", skew_up="3 deg", skew_left="-5 deg", left="1 in", up="2 in", pivot=pivot
    )
    tan_up, tan_left = (math.tan(math.radians(v)) for v in (3, -5))
    below = log_through(
        pivot=pivot, distance=18 * INCH, left=INCH, up=2 * INCH, tan_left=tan_left, tan_up=tan_up
    )
    assert plain(log) == pytest.approx(plain(below), rel=1e-14)
    at_pivot = (log.b_y, log.b_z) if pivot == "fixed tool" else (log.a_y, log.a_z)
    assert at_pivot == pytest.approx((INCH, 2 * INCH))
    to = reactions(frame_of(us.numbers(), log))
    assert (to.tan_alpha, to.tan_beta) == pytest.approx((tan_up, tan_left))


def test_both_ways_describe_the_same_log_and_take_quantities_of_any_registry(us):
    mine = pint.UnitRegistry()
    first = splitcalc.log(
        us, length=mine.Quantity(450, "mm"), skew_left=mine.Quantity(0.1, "rad"), up="-10 mm"
    )
    second = splitcalc.log_between(
        us,
        length=mine.Quantity(0.45, "m"),
        moving=mine.Quantity([-0.45 * math.tan(0.1), -0.01], "m"),
        fixed=("0 in", mine.Quantity(-1, "cm")),
    )
    assert plain(first) == pytest.approx(plain(second), abs=1e-15)
    assert plain(first)[:2] == pytest.approx([0.45, -0.45 * math.tan(0.1)])


def test_every_argument_that_cannot_be_used_is_named_with_what_is_allowed(us):
    told = problems(
        splitcalc.log, us, length=20, skew_up="85 deg", skew_left=4, left="3 m", up="1 kg",
        pivot="ram",
    )  # fmt: skip
    assert list(told) == ["pivot", "length", "skew_up", "skew_left", "left", "up"]
    for name, found, allowed in (
        ("pivot", '"ram"', '"moving tool", "fixed tool"'),
        ("length", "'20'", "a length takes"),
        ("skew_up", '"85 deg"', "−80\u202fdeg to 80\u202fdeg"),
        ("skew_left", "'4'", "an angle takes"),
        ("left", '"3 m"', "−78.74\u202fin to 78.74\u202fin"),
        ("up", "'1 kg'", "a length takes"),
    ):
        assert found in told[name]
        assert allowed in told[name]


def test_contact_points_that_cannot_be_used_are_named(us):
    told = problems(
        splitcalc.log_between, us, length="9 in", moving="1 in", fixed=("0 in", "4 deg")
    )
    assert list(told) == ["moving", "fixed, up"]
    assert "(left, up)" in told["moving"]
    level, high = ("0 in", "0 in"), ("0 in", "60 in")
    told = problems(splitcalc.log_between, us, length="9 in", moving=level, fixed=high)
    assert told == {
        "moving, fixed": "the thrust leans by 81.5\u202fdeg; allowed: up to 80\u202fdeg"
    }


@pytest.mark.parametrize("length", ["0 in", "-3 in"])
def test_contact_points_must_stand_apart(us, length):
    assert "allowed: above 0" in problems(splitcalc.log, us, length=length)["length"]


def test_a_longer_log_than_the_sled_has_beam_for_is_refused(us):
    # x_B - x_start - rear_pad - pad_length / 2 = 57 + 3 - 11 - 1.5 in
    told = problems(splitcalc.log, us, length="47.6 in")["length"]
    assert told.endswith("rear pad hangs over the beam's rear end; allowed: up to 47.5\u202fin")
    numbers = us.numbers()
    longest = splitcalc.log(us, length="47.5 in", skew_up="2 deg")
    too_long = Log(47.6 * INCH, *plain(longest)[1:])
    # why: nothing pulls at a free end, but for a pad that hangs over it
    at_end = [
        float(actions(frame_of(numbers, log), np.array([[numbers.x_start]])).V_z[0, 0])
        for log in (longest, too_long)
    ]
    assert at_end[0] == pytest.approx(0, abs=1e-6)
    assert abs(at_end[1]) > 100
    assert "rear pad" in problems(splitcalc.under, us, too_long)["log"]
    past = splitcalc.under(us, longest).past
    assert len(past) >= 1
    assert "longer than the allowed 24\u202fin" in past[0]


def test_a_front_pad_that_runs_into_the_root_weld_is_refused(us, si):
    # x_B - weld_start - front_pad + pad_length / 2: us 57 - 58 - 2 + 1.5 in, so any gap will do
    assert splitcalc.log(us, length="0.01 in").l_AB == pytest.approx(0.01 * INCH)
    closer = si.changed({"sled.front_pad": "-5 mm", "logs.smallest_gap": "60 mm"})
    # 1450 - 1470 + 5 + 40 mm
    told = problems(splitcalc.log, closer, length="24 mm")["length"]
    assert told.endswith("root weld; allowed: at least 25\u202fmm")
    assert splitcalc.log(closer, length="25 mm").l_AB == 0.025


def test_an_unknown_state_is_told(us):
    log = splitcalc.log(us, length="20 in")
    told = problems(splitcalc.under, us, log, "halfway")
    assert told == {"state": 'found "halfway"; allowed: "first bite", "buried"'}


# --- results -------------------------------------------------------------------------------------


@pytest.mark.parametrize("path", [US, SI])
def test_results_are_those_of_the_rooms_below(path):
    machine = splitcalc.load(path)
    log = splitcalc.log(machine, length="400 mm", skew_left="6 deg", skew_up="-3 deg", left="5 mm")
    result = splitcalc.under(machine, log, "buried")
    numbers = machine.numbers()
    below = present(ALL, numbers, log, machine.units, "buried")
    acting, section = below.acting, numbers.section
    arrays = result.actions.to_arrays()
    assert arrays.pop("x") == pytest.approx(below.x)
    want = {name: getattr(acting, name) for name in ("N", "V_y", "V_z", "M_y", "M_z")}
    want["T"] = acting.torque(acting.torques(section.z_s))
    if section.open:
        want |= bounds(numbers, acting)[0]._asdict()
    assert arrays.keys() == want.keys()
    for name, values in want.items():
        assert arrays[name] == pytest.approx(values[:, 0], rel=1e-14), name
    stresses = result.stresses.to_arrays()
    assert ("web" in stresses) is section.open
    for name, values in below.corners.items():
        assert stresses[name] == pytest.approx(values, rel=1e-14), name
    to = reactions(acting.frame)
    assert result.reactions["F"].to("N").magnitude == pytest.approx(numbers.F)
    for name, value in vars(to).items():
        assert result.reactions[name].to_base_units().magnitude == pytest.approx(value), name
    assert result.findings.as_dicts() == [f.as_dict() for f in below.findings]
    assert (result.log, result.set, result.past) == (log, below.set, below.past)


def test_side_plates_give_the_larger_bound_of_the_bimoment():
    machine = splitcalc.load(ROOT / "tests" / "one_machine_us.toml")
    log = splitcalc.log(machine, length="15 in", skew_left="5 deg")
    result = splitcalc.under(machine, log)
    numbers = machine.numbers()
    free, held = bounds(numbers, present(ALL, numbers, log).acting)
    arrays = result.actions.to_arrays()
    larger = np.maximum(np.abs(free.B), np.abs(held.B))[:, 0]
    assert np.abs(arrays["B"]) == pytest.approx(larger, rel=1e-14)
    assert np.abs(free.B - held.B).max() > 0.01 * np.abs(free.B).max()


def test_curves_come_in_the_persons_units_and_as_plain_arrays(us):
    result = splitcalc.under(us, splitcalc.log(us, length="20 in", skew_left="4 deg"))
    stresses = result.stresses
    assert str(stresses.x.units) == "inch"
    assert stresses.x.magnitude[[0, -1]] == pytest.approx([-3, 76])
    plain, shown = stresses.to_arrays(), stresses.to_arrays(si=False)
    assert list(plain) == list(shown) == ["x", *stresses]
    assert all(type(array) is np.ndarray for array in [*plain.values(), *shown.values()])
    ksi = 4448.2216152605 / INCH**2
    assert shown["web"] * ksi == pytest.approx(plain["web"])
    plain["web"][:] = 0  # a copy: the result stays
    assert stresses["web"].magnitude.max() > 0
    with pytest.raises(KeyError, match="'middle'; here are top left, top right"):
        stresses["middle"]


def test_a_log_past_its_limits_is_worked_out_and_says_so(us):
    log = splitcalc.log(us, length="20 in", left="2 in")
    result = splitcalc.under(us, log)
    assert result.set == "outside"
    assert [f.set for f in result.findings] == ["extreme"] * len(ALL)
    assert len(result.past) == 1  # the push plate is wide enough, the wedge is not
    assert "contact off the fixed tool" in result.past[0]
    for text in (repr(result), result._repr_html_()):
        assert "Not an allowed log, judged as an extreme one: contact off the fixed" in text


# --- findings ------------------------------------------------------------------------------------


def test_the_worst_logs_are_those_of_the_search(us):
    worst = splitcalc.worst(us)
    below = findings(ALL, us.numbers(), "us")
    assert worst.as_dicts() == [f.as_dict() for f in below]
    assert worst.hold is all(f.holds for f in below)
    assert worst.governing == max(worst, key=lambda f: f.utilisation)
    assert worst["web-cross-bending", "extreme"] is worst[3]
    assert list(worst[1:3]) == [worst[1], worst[2]]
    assert isinstance(worst[1:3], Findings)
    with pytest.raises(KeyError, match="here are \\('beam-first-yield', 'usual'\\)"):
        worst["beam-first-yield", "any"]


def test_a_finding_gives_its_numbers_as_quantities(us, si):
    finding = splitcalc.worst(us)[0]
    found = finding.quantities
    assert list(found) == ["demand", "capacity", "x"]
    assert [str(q.units) for q in found.values()] == ["kip_per_square_inch"] * 2 + ["inch"]
    assert found["capacity"].magnitude == pytest.approx(50)  # A992
    assert found["demand"].to("Pa").magnitude == pytest.approx(finding.demand)
    assert found["x"].to("m").magnitude == pytest.approx(finding.x)
    none = next(f for f in splitcalc.worst(si) if not f.applies)
    assert none.quantities == {}


# --- what a notebook shows -----------------------------------------------------------------------


def cells(page: str, tag: str) -> list[str]:
    return re.findall(rf"<{tag} [^>]*>(.*?)</{tag}>", page)


def test_curves_show_their_peaks_with_units_in_the_head():
    curves = Curves(
        "forces",
        {
            "N": (np.array([0.0, 1e3, 1e3, 1e-9]), Dimension.FORCE),
            "M": (np.array([0.0, 0.0, 0.0, -2e3]), Dimension.MOMENT),
            "V": (np.zeros(4), Dimension.FORCE),
        },
        np.array([0.0, 1.0, 2.0, 3.0]),
        "si",
    )
    page = curves._repr_html_()
    assert cells(page, "th") == ["x, mm", "N, kN", "M, kN·m", "V, kN"]
    assert cells(page, "td") == [
        *("1\u202f000", "<b>1</b>", "0", "0"),
        *("3\u202f000", "0", "<b>−2</b>", "0"),  # noise of N is shown as the zero that it is
    ]
    assert repr(curves) == "<forces: N, M, V at 4 stations, x = 0\u202fmm to 3\u202f000\u202fmm>"


@pytest.mark.parametrize("path", [US, SI])
def test_a_result_shows_all_its_parts_on_light_and_on_dark(path):
    machine = splitcalc.load(path)
    log = splitcalc.log(machine, length="16 in", skew_up="2 deg")
    result = splitcalc.under(machine, log)
    page = result._repr_html_()
    for part in (result.findings.table(), result.actions._repr_html_()):
        assert part in page
    for words in (*NOT_YET, "Not covered: ", "not a certified calculation", "roll couple of the"):
        assert words in page
    assert "color" not in page
    assert "background" not in page
    assert repr(result).startswith(f"One of the {result.set} logs. All that was checked holds")


def test_findings_show_as_a_table_in_terminal_and_notebook(us, si):
    worst = splitcalc.worst(us)
    lines = repr(worst).splitlines()
    assert max(map(len, lines)) <= 100
    assert lines[0].split()[:2] == ["check", "logs"]
    assert "Not yet checked:" in repr(worst)
    page = worst._repr_html_()
    assert cells(page, "td")[:2] == ["beam, first yield", "usual"]
    assert f"{worst[3].utilisation:.3f}" in cells(page, "td")
    assert "does not apply" in cells(splitcalc.worst(si)._repr_html_(), "td")


def test_a_note_on_the_machine_is_said(us):
    narrow = us.changed({"moving_tool.width": "2 in"})
    note = f"Note: {narrow.numbers().notes[0]}."
    worst = splitcalc.worst(narrow)
    assert note in " ".join(repr(worst).split())
    assert note in html.unescape(worst[:1]._repr_html_())


# --- the package's top ---------------------------------------------------------------------------


def test_the_top_is_light_until_it_is_used():
    code = (
        "import sys, splitcalc;"
        "heavy = {'numpy', 'matplotlib', 'ipywidgets', 'scipy', 'pint', 'cattrs'};"
        "assert not heavy & set(sys.modules), heavy & set(sys.modules);"
        "assert set(splitcalc.__all__) <= set(dir(splitcalc));"
        f"splitcalc.under(m := splitcalc.load({str(US)!r}), splitcalc.log(m, length='20 in'));"
        "heavy -= {'numpy', 'cattrs'};"
        "assert not heavy & set(sys.modules), heavy & set(sys.modules)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True)
    assert done.returncode == 0, done.stderr


def test_the_top_offers_what_it_lists_and_nothing_else():
    for name in splitcalc.__all__:
        assert callable(getattr(splitcalc, name))
    with pytest.raises(AttributeError, match="no attribute 'wurst'"):
        splitcalc.wurst  # noqa: B018 - asked for on purpose
