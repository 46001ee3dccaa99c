"""The main-beam page without a browser."""

import math

import pytest

from splitcalc.checks import ALL
from splitcalc.draw.main_beam import ceiling
from splitcalc.draw.png import read_inputs
from splitcalc.logs.present import OUTSIDE, log_by_ram, narrowest_set, present
from splitcalc.logs.report import acting_on, find
from splitcalc.machine.file import load, parse_machine
from splitcalc.opening import worksheets_dir
from splitcalc.sheet.main_beam import STALE, MainBeam

DEMOS = ["machine.toml", "machine-si.toml"]


@pytest.fixture(scope="module", params=DEMOS)
def beam(request: pytest.FixtureRequest) -> MainBeam:
    return MainBeam(load(worksheets_dir() / request.param))


def test_every_slider_moves_picture_and_numbers(beam):
    for name, control in beam.controls.items():
        before = bytes(beam.image.value), beam.values.value
        control.value = control.min if control.value != control.min else control.max
        assert read_inputs(bytes(beam.image.value))[name] == control.value
        assert (bytes(beam.image.value), beam.values.value) != before


def test_the_page_says_the_verdicts_and_what_is_not_checked(beam):
    assert "This log" in beam.sentence.value
    assert "All allowed logs" in beam.sentence.value
    assert "Not yet checked: root weld of the fixed tool" in beam.sentence.value
    assert "not a certified calculation" in beam.page.children[-1].value


def test_axis_limits_stay_put_for_allowed_logs_and_step_past_them(beam):
    picture, quiet = beam.picture, beam.picture._shown_tops
    for control in beam.controls.values():
        control.value = min(max(0.0, control.min), control.max)
    assert picture._shown_tops == picture._tops
    beam.controls["skew_left"].value = beam.controls["skew_left"].max
    beam.controls["skew_up"].value = beam.controls["skew_up"].max
    if beam.numbers.section.open:
        assert picture._shown_tops > quiet
    beam.controls["skew_left"].value = 0.0
    beam.controls["skew_up"].value = 0.0
    assert picture._shown_tops == picture._tops


def test_an_error_is_a_sentence_over_a_greyed_picture(beam, monkeypatch):
    def fails(*_: object) -> None:
        raise ValueError("the wood is < too soft")

    shown = beam.image.value
    with monkeypatch.context() as patch:
        patch.setattr("splitcalc.sheet.main_beam.present", fails)
        beam.controls["skew_up"].value = 1.0
    assert "the wood is &lt; too soft" in beam.sentence.value
    assert STALE in beam.image._dom_classes
    assert beam.image.value == shown
    beam.controls["skew_up"].value = 0.5
    assert STALE not in beam.image._dom_classes


def test_a_log_no_set_allows_is_said_and_still_shown(beam):
    beam.controls["skew_left"].value = beam.controls["skew_left"].max
    assert "not an allowed log" in beam.sentence.value
    beam.controls["skew_left"].value = 0.0
    assert "not an allowed log" not in beam.sentence.value


@pytest.mark.parametrize("name", DEMOS)
def test_straight_logs_are_usual_and_steep_ones_are_not_allowed(name):
    numbers = load(worksheets_dir() / name).numbers()

    def log(slope: float):
        return log_by_ram(length=numbers.longest, up=0.0, tan_up=0.0, tan_left=slope)

    assert narrowest_set(numbers, log(0.0))[0] == "usual"
    assert narrowest_set(numbers, log(math.tan(math.radians(25))))[0] == OUTSIDE
    inside = present(ALL, numbers, log(0.0))
    assert {f.set for f in inside.findings} == {"usual", "extreme"}


@pytest.mark.parametrize(("value", "top"), [(0.9, 1), (1.2, 1.5), (43.5, 50), (60, 60), (61, 80)])
def test_axis_limits_are_quiet_numbers(value, top):
    assert ceiling(value) == pytest.approx(top)


def test_a_usual_log_is_judged_in_both_sets_as_if_found_in_each():
    machine = load(worksheets_dir() / "machine.toml")
    numbers = machine.numbers()
    log = log_by_ram(length=0.5, up=0.0, tan_up=0.02, tan_left=0.0)
    now = present(ALL, numbers, log)
    alone = {
        (check.id, name): find(check, numbers, acting_on(numbers, log), set=name).utilisation
        for check in ALL
        for name in ("usual", "extreme")
    }
    assert {(f.check.id, f.set): f.utilisation for f in now.findings} == alone


def test_a_contact_range_that_crushes_is_said_on_the_page():
    text = (worksheets_dir() / "machine.toml").read_text(encoding="utf-8")
    narrow = text.replace('grip = "plain"', 'grip = "plain"\ncontact_half_width = "1/2 in"')
    assert narrow != text
    page = MainBeam(parse_machine(narrow.encode())).page
    assert "Note: the push plate" in page.children[-1].value
    assert "Note:" not in MainBeam(parse_machine(text.encode())).page.children[-1].value
