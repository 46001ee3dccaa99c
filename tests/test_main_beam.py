"""The main-beam page without a browser: what its controls and buttons do."""

import asyncio
import html
import math
import re
import shutil
from dataclasses import fields
from pathlib import Path

import numpy as np
import pytest
from ipywidgets import HTML

from splitcalc.checks import ALL, NOT_YET
from splitcalc.draw.labels import HEIGHT, WIDTH
from splitcalc.draw.png import read_inputs
from splitcalc.equations import equation
from splitcalc.findings import Check
from splitcalc.logs.limits import sled_reach
from splitcalc.logs.present import present
from splitcalc.logs.report import findings, governing
from splitcalc.machine import draft
from splitcalc.machine.file import load, parse_machine
from splitcalc.opening import worksheets_dir
from splitcalc.shapes.tables import all_sections
from splitcalc.sheet.bars import bars, by_check_and_set
from splitcalc.sheet.log_controls import log_of, straight, values_of
from splitcalc.sheet.main_beam import SETTLE, MainBeam
from splitcalc.sheet.style import STALE, WAITING
from splitcalc.units import Dimension, show

DEMOS = ["machine.toml", "machine-si.toml"]
LOG = ("skew_up", "skew_left", "contact_up", "contact_left", "distance")
MACHINE = ("cylinder.relief_pressure", "cylinder.axis_height", "pad spacing")


@pytest.fixture(params=DEMOS)
def file(request: pytest.FixtureRequest, tmp_path: Path) -> Path:
    return Path(shutil.copy(worksheets_dir() / request.param, tmp_path / "machine.toml"))


@pytest.fixture
def beam(file: Path) -> MainBeam:
    return MainBeam(load(file))


def stale(beam: MainBeam) -> bool:
    return STALE in beam.page._dom_classes


def said(beam: MainBeam) -> str:
    return beam.parts.message.value


def log_values(beam: MainBeam) -> dict:
    return beam._log.values()


def move(beam: MainBeam, name: str, steps: int = 3) -> None:
    slider = beam.controls[name]._slider
    slider.value += steps * slider.step


def texts(widget) -> list[str]:
    own = [widget.value] if isinstance(widget, HTML) else []
    return own + [text for child in getattr(widget, "children", ()) for text in texts(child)]


def press(beam: MainBeam, name: str) -> None:
    def buttons(widget):
        if getattr(widget, "description", None) == name and hasattr(widget, "click"):
            yield widget
        for child in getattr(widget, "children", ()):
            yield from buttons(child)

    (button,) = buttons(beam.page)
    button.click()


def agrees(beam: MainBeam) -> None:
    """What the page shows is what the package computes for the same machine and log."""
    changes = beam._machine.changes()
    machine = beam.file.changed(changes)
    values = log_values(beam)
    now = present(ALL, machine.numbers(), log_of(values), beam.units, values["state"])
    used = {(f.check.id, f.set): f.utilisation for f in now.findings}
    assert {(f.check.id, f.set): f.utilisation for f in beam.now.findings} == used
    worst = findings(ALL, machine.numbers(), beam.units)
    assert [f.utilisation for f in beam.worst] == [f.utilisation for f in worst]
    pinned = () if beam.pinned is None else beam.pinned.findings
    assert beam.parts.bars.value == bars(ALL, now.findings, worst, pinned)
    shown = read_inputs(bytes(beam.parts.image.value))
    assert {k: shown[k] for k in values} == values
    assert {k: v for k, v in shown.items() if k in changes} == changes
    assert governing(now.findings).check.title in beam.parts.sentence.value
    assert not stale(beam)


@pytest.mark.parametrize("name", [*LOG, *MACHINE])
def test_every_slider_moves_picture_bars_and_words(beam, name):
    before = bytes(beam.parts.image.value)
    move(beam, name, -3)
    agrees(beam)
    assert bytes(beam.parts.image.value) != before


def test_a_bar_is_as_long_as_its_share_of_the_axis_and_red_when_short(beam):
    press(beam, "worst extreme log")
    text = beam.parts.bars.value
    top = 100 / float(re.search(r"<s style='left:([\d.]+)%'", text)[1])
    used = by_check_and_set(beam.now.findings)
    row = r"<span class='sc-set'>(\w+)</span>(.*?)(?=<span class='sc-set'>|$)"
    rows = iter(re.findall(row, text))
    for check in ALL:
        for set_name in ("usual", "extreme"):
            name, row = next(rows)
            assert name == set_name
            found = used.get((check.id, set_name))
            bar = re.search(r"<b class='(\w*)' style='width:([\d.]+)%'", row)
            if found is None or found.utilisation is None:
                assert bar is None
                continue
            assert float(bar[2]) == pytest.approx(100 * found.utilisation / top, abs=0.2)
            assert (bar[1] == "short") is (found.utilisation > 1)


def test_the_page_says_verdicts_what_is_not_checked_and_cautions(beam):
    text = beam.parts.sentence.value
    assert "This log" in text
    assert "All allowed logs" in text
    assert f"Not yet checked</b>: {len(NOT_YET)} kinds of failure" in text
    assert any("root weld of the fixed tool" in text for text in texts(beam.page))
    assert "not a certified calculation" in beam.page.children[-1].value


def test_the_worst_log_of_the_chosen_check_is_gone_to_exactly(beam):
    for finding in (f for f in beam.worst if f.applies):
        beam.choose(finding.check.id)
        press(beam, f"worst {finding.set} log")
        shown = by_check_and_set(beam.now.findings)[finding.check.id, finding.set]
        assert shown.utilisation == pytest.approx(finding.utilisation, rel=1e-9)
        assert html.escape(finding.log["bound"]) in said(beam)
        assert beam.parts.view.value == "stress"
        agrees(beam)


def test_a_check_that_does_not_apply_has_no_worst_log(beam):
    for finding in (f for f in beam.worst if not f.applies):
        before = log_values(beam)
        beam.choose(finding.check.id)
        press(beam, f"worst {finding.set} log")
        assert finding.why in said(beam)
        assert log_values(beam) == before


def test_turning_the_pivot_over_keeps_the_log(beam):
    press(beam, "worst extreme log")
    before = log_of(log_values(beam))
    beam.controls["pivot"].value = "moving tool"
    after = log_of(log_values(beam))
    for f in fields(before):
        assert getattr(after, f.name) == pytest.approx(getattr(before, f.name), abs=1e-12)
    move(beam, "skew_up", 4)
    turned = log_of(log_values(beam))
    assert (turned.a_y, turned.a_z) == (after.a_y, after.a_z)
    assert turned.b_z > after.b_z
    agrees(beam)


def test_a_mirrored_log_is_as_bad(beam):
    press(beam, "worst extreme log")
    before, values = by_check_and_set(beam.now.findings), log_values(beam)
    press(beam, "mirror left and right")
    assert log_values(beam)["skew_left"] == -values["skew_left"]
    assert log_values(beam)["contact_left"] == -values["contact_left"]
    for key, finding in by_check_and_set(beam.now.findings).items():
        if finding.applies:
            assert finding.utilisation == pytest.approx(before[key].utilisation, rel=1e-9)


def test_a_log_past_its_limits_is_said_and_still_computed(beam):
    beam.controls["skew_left"]._field.value = "30 deg"
    text = beam.parts.past.value
    assert "Not an allowed log" in text
    assert "past the grip&#x27;s" in text
    assert f"{math.tan(math.radians(30)):.3f}" in text
    agrees(beam)
    beam.controls["skew_left"]._field.value = "0 deg"
    assert beam.parts.past.value == ""


def test_a_sled_off_the_beam_is_an_error_over_a_greyed_picture(beam):
    reach = sled_reach(beam.numbers)[1]
    beam.controls["distance"]._field.value = f"{reach:.6f} m"
    agrees(beam)
    beam.controls["distance"]._field.value = "4 m"
    assert stale(beam)
    assert "the rear pad hangs over" in beam.parts.sentence.value
    assert show(reach, Dimension.LENGTH, beam.units) in beam.parts.sentence.value
    beam.controls["distance"]._field.value = "400 mm"
    agrees(beam)


def test_an_error_in_the_machine_names_the_key_and_moving_back_mends_it(beam):
    start = beam.controls["pad spacing"].value
    beam.controls["pad spacing"]._field.value = "1.4 m"
    assert stale(beam)
    key = "sled.guide_length" if beam.file.document.sled.guide == "continuous" else "sled.rear_pad"
    assert key in beam.parts.sentence.value
    assert "the rear pad hangs" in beam.controls["pad spacing"]._error.value
    move(beam, "skew_up")  # the error stands while the machine can't be used
    assert stale(beam)
    beam.controls["pad spacing"].value = start
    agrees(beam)
    assert beam.controls["pad spacing"]._error.value == ""


def test_an_error_of_any_kind_reaches_the_page(beam, monkeypatch):
    def fails(*_: object) -> None:
        raise RuntimeError("the wood is < too soft")

    with monkeypatch.context() as patch:
        patch.setattr("splitcalc.sheet.main_beam.present", fails)
        move(beam, "skew_up")
    assert "the wood is &lt; too soft" in beam.parts.sentence.value
    assert stale(beam)
    move(beam, "skew_up")
    agrees(beam)


def test_an_error_of_a_button_reaches_the_page(beam):
    beam.file.path.unlink()
    press(beam, "back to file")
    assert "machine.toml" in beam.parts.sentence.value
    assert stale(beam)


def other_section(beam: MainBeam) -> str:
    """A tabulated section that the same stiffeners suit."""
    now = beam.file.document.beam.section
    alike = (k for k, s in all_sections().items() if s.OPEN == now.OPEN and s != now)
    return list(alike)[-1]


def test_a_section_that_the_stiffeners_do_not_suit_is_answered(beam):
    now = beam.file.document.beam.section
    beam.controls["beam.section"].value = next(
        name for name, section in all_sections().items() if section.OPEN != now.OPEN
    )
    assert stale(beam)
    assert "beam.stiffeners[1].kind" in beam.parts.sentence.value
    press(beam, "back to file")
    agrees(beam)


@pytest.mark.parametrize("key", ["beam.section", "beam.steel"])
def test_choosers_change_the_machine(beam, key):
    before = governing(beam.worst).utilisation
    beam.controls[key].value = "S275" if key == "beam.steel" else other_section(beam)
    assert key in beam._machine.changes()
    agrees(beam)
    assert governing(beam.worst).utilisation != before


def test_units_turn_over_and_back_without_a_change(beam):
    press(beam, "worst extreme log")
    values, image = log_values(beam), bytes(beam.parts.image.value)
    other = {"si": "us", "us": "si"}
    first = beam.units
    beam.show_in(other[first])
    assert log_values(beam) == values
    assert beam._machine.changes() == {}
    agrees(beam)
    assert bytes(beam.parts.image.value) != image
    beam.show_in(first)
    assert log_values(beam) == values
    assert bytes(beam.parts.image.value) == image


def test_a_change_survives_the_unit_switch(beam):
    move(beam, "cylinder.axis_height", 4)
    changes, worst = beam._machine.changes(), [f.utilisation or 0.0 for f in beam.worst]
    beam.show_in({"si": "us", "us": "si"}[beam.units])
    assert beam._machine.changes() == changes
    assert [f.utilisation or 0.0 for f in beam.worst] == pytest.approx(worst, rel=1e-12)


def test_pinned_curves_stay_and_go(beam):
    plain = bytes(beam.parts.image.value)
    press(beam, "pin curves")
    pinned = beam.pinned
    move(beam, "skew_left", 8)
    with_pin, bars = bytes(beam.parts.image.value), beam.parts.bars.value
    assert beam.pinned is pinned
    assert "<u " in bars
    press(beam, "unpin curves")
    assert bytes(beam.parts.image.value) != with_pin
    assert "<u " not in beam.parts.bars.value
    move(beam, "skew_left", -8)
    assert bytes(beam.parts.image.value) == plain


def test_a_pin_survives_another_section(beam):
    press(beam, "pin curves")
    beam.controls["beam.section"].value = other_section(beam)
    assert beam.pinned.numbers is not beam.numbers
    agrees(beam)


def test_views_show_actions_and_equations(beam):
    stress = bytes(beam.parts.image.value)
    beam.parts.view.value = "actions"
    assert bytes(beam.parts.image.value) != stress
    name = next(n for n in beam.parts.names.children if n.description == beam.checks[0].title)
    name.click()
    assert beam.parts.stage.layout.display == "none"
    text = beam.parts.equations.value
    assert beam.checks[0].title in text
    assert beam.checks[0].source.split(":")[0] in text
    f = next(f for f in beam.now.findings if f.check.id == beam.chosen)
    assert f._repr_html_() == text or f.utilisation < max(
        g.utilisation for g in beam.now.findings if g.check.id == beam.chosen
    )
    move(beam, "skew_up", 5)
    assert beam.parts.equations.value != text


def test_saving_writes_what_was_changed_and_keeps_the_rest(beam, file):
    text = file.read_text()
    move(beam, "cylinder.axis_height", 2)
    move(beam, "cylinder.relief_pressure", 2)
    values = log_values(beam)
    assert "Not saved: cylinder.relief_pressure = " in beam.parts.unsaved_line.value
    press(beam, "save")
    assert beam.parts.unsaved_line.value == ""
    now = load(file).document
    height = beam.controls["cylinder.axis_height"].value
    assert now.cylinder.axis_height == height
    changed = [a for a, b in zip(text.splitlines(), file.read_text().splitlines(), strict=True)
               if a != b]  # fmt: skip
    assert len(changed) == 2
    assert "Saved: cylinder.relief_pressure = " in said(beam)
    assert height.text in said(beam)
    assert beam._machine.changes() == {}
    assert log_values(beam) == values
    agrees(beam)
    press(beam, "save")
    assert "Nothing to save" in said(beam)
    move(beam, "pad spacing", -1)
    press(beam, "save")
    assert "Saved" in said(beam)
    agrees(MainBeam(load(file)))


def test_the_second_of_two_pages_is_told(beam, file):
    other = MainBeam(load(file))
    move(other, "cylinder.axis_height", 2)
    press(other, "save")
    text = file.read_text()
    move(beam, "cylinder.relief_pressure", 2)
    press(beam, "save")
    assert "changed on disk" in said(beam)
    assert "splitcalc-error" in said(beam)
    assert file.read_text() == text
    assert not stale(beam)
    assert beam._machine.changes()  # nothing is lost
    press(beam, "back to file")
    assert beam.controls["cylinder.axis_height"].value == other.controls[
        "cylinder.axis_height"].value  # fmt: skip
    agrees(beam)


def test_a_machine_without_a_file_has_none_to_save_to():
    beam = MainBeam(parse_machine((worksheets_dir() / DEMOS[0]).read_bytes()))
    move(beam, "cylinder.axis_height")
    press(beam, "save")
    assert "not read from a file" in said(beam)


def test_what_was_not_saved_is_offered_after_a_restart(beam, file):
    move(beam, "skew_left", 5)
    move(beam, "cylinder.axis_height", 2)
    values, changes = log_values(beam), beam._machine.changes()
    again = MainBeam(load(file))
    assert log_values(again) == straight(again.numbers)
    again.show_in({"si": "us", "us": "si"}[again.units])
    again.show_in(beam.units)
    move(again, "skew_up", 2)  # not answered yet: what was kept is not lost
    press(again, "take them back")
    assert log_values(again) == values
    assert again._machine.changes() == changes
    agrees(again)
    press(again, "back to file")
    assert draft.kept(file) is None


def test_a_draft_can_be_dropped_and_says_when_the_file_has_changed(beam, file):
    move(beam, "skew_left", 5)
    file.write_text(file.read_text() + "\n# later\n")
    again = MainBeam(load(file))
    assert "has changed since" in again._offer.children[0].value
    press(again, "drop them")
    assert again._offer.children == ()
    assert draft.kept(file) is None


def test_a_draft_that_does_not_fit_is_answered(beam, file):
    draft.keep(file, draft.Draft(beam.file.digest, {"state": "rotten"}, {"beam.colour": "red"}))
    again = MainBeam(load(file))
    press(again, "take them back")
    assert "beam.colour" in again.parts.sentence.value
    assert stale(again)
    press(again, "back to file")
    agrees(again)


def test_a_slider_for_any_number_of_the_file(beam):
    key = "fixed_tool.edge_x"
    beam.add_slider(key)
    move(beam, key, -1)
    assert list(beam._machine.changes()) == [key]
    agrees(beam)
    with pytest.raises(KeyError, match="not a number of the machine"):
        beam.add_slider("job.title")
    with pytest.raises(KeyError, match="has no value in the machine file"):
        beam.add_slider("beam.yield_strength")
    move(beam, key, -1)
    agrees(beam)


def test_a_line_and_a_check_of_ones_own(beam):
    plain = bytes(beam.parts.image.value)
    beam.add_line("axial force alone", lambda now: now.acting.N[:, 0] / now.numbers.section.A)
    assert bytes(beam.parts.image.value) != plain
    assert "axial force alone" in beam.parts.labels.value

    @equation(gives="sigma_x", source="a rule of one's own")
    def squash(*, N, A):
        return N / A

    mine = Check(
        "squash", "squash of the beam", "a rule of one's own", Dimension.STRESS,
        lambda numbers, acting: (squash(N=acting.N, A=numbers.section.A), numbers.f_y),
    )  # fmt: skip
    beam.add_check(mine)
    found = by_check_and_set(beam.worst)["squash", "extreme"]
    assert found.demand == pytest.approx(beam.numbers.F / beam.numbers.section.A)
    beam.choose("squash")
    assert "σ_x = N/A" in beam.parts.equations.value
    assert "a rule of one&#x27;s own" in beam.parts.equations.value


def test_a_page_does_not_wait_for_the_search(beam):
    seen = []
    beam.live.run_slices = lambda work: seen.append(work)
    move(beam, "cylinder.relief_pressure", 3)
    assert WAITING in beam.page._dom_classes
    before = bytes(beam.parts.image.value)
    move(beam, "cylinder.relief_pressure", 1)
    assert bytes(beam.parts.image.value) != before  # the picture is there before the words
    rest, step = next(seen[-1]), next(seen[-1])
    assert (rest, step) == (SETTLE, None)
    assert "being searched" in beam.parts.sentence.value
    press(beam, "worst extreme log")
    assert "being searched" in said(beam)
    list(seen[-1])
    assert WAITING not in beam.page._dom_classes
    agrees(beam)


def test_a_still_picture_shows_a_findings_log(beam):
    png, size = beam.still(governing(beam.worst))._repr_png_()
    assert png.startswith(b"\x89PNG")
    assert (size["width"], size["height"]) == (WIDTH, HEIGHT)


def test_values_describe_the_log_that_they_came_from(beam):
    for finding in (f for f in beam.worst if f.log):
        names = ("distance", "a_y", "a_z", "b_y", "b_z")
        given = [finding.log[f"{name}_m"] for name in names]
        for pivot in ("fixed tool", "moving tool"):
            log = log_of(values_of(type(beam.now.log)(*given), "buried", pivot))
            assert [float(getattr(log, f.name)) for f in fields(log)] == pytest.approx(
                given, abs=1e-12
            )


def test_a_contact_range_that_crushes_is_said_on_the_page():
    text = (worksheets_dir() / "machine.toml").read_text(encoding="utf-8")
    narrow = text.replace('grip = "plain"', 'grip = "plain"\ncontact_half_width = "1/2 in"')
    assert narrow != text
    page = MainBeam(parse_machine(narrow.encode())).page
    assert "Note: the push plate" in page.children[-1].value
    beam = MainBeam(parse_machine(text.encode()))
    beam.add_slider("moving_tool.width")
    beam.controls["moving_tool.width"]._field.value = "1 in"
    assert "Note: the push plate" in beam.page.children[-1].value
    assert "Note:" not in MainBeam(parse_machine(text.encode())).page.children[-1].value


# --- what was found by trying to break it ---------------------------------------------------------


def squash(demand, **more) -> Check:
    return Check(
        "mine", "a check of one's own", "a rule of one's own", Dimension.STRESS,
        lambda numbers, acting: (demand(numbers, acting), numbers.f_y), **more,
    )  # fmt: skip


def test_a_draft_keeps_what_added_sliders_changed(beam, file):
    beam.add_slider("fixed_tool.edge_x")
    move(beam, "fixed_tool.edge_x", -1)
    changes = beam._machine.changes()
    again = MainBeam(load(file))
    press(again, "take them back")
    assert again._machine.changes() == changes
    agrees(again)
    assert draft.kept(file).changes == changes


def test_a_change_that_waits_survives_the_unit_switch(beam):
    async def main() -> None:
        beam.controls["cylinder.relief_pressure"]._field.value = "15 MPa"
        beam.show_in({"si": "us", "us": "si"}[beam.units])

    asyncio.run(main())
    beam.live.draw()
    assert beam._machine.changes() == {"cylinder.relief_pressure": "15 MPa"}
    agrees(beam)


def test_a_refused_text_keeps_its_error_and_is_not_saved_over(beam, file):
    text = file.read_text()
    beam.controls["cylinder.relief_pressure"]._field.value = "200 MPa"
    move(beam, "skew_up", 2)
    assert "200 MPa" in beam.controls["cylinder.relief_pressure"]._error.value
    press(beam, "save")
    assert "relief pressure can&#x27;t be read" in said(beam)
    assert file.read_text() == text
    beam.controls["cylinder.relief_pressure"]._field.value = "15 MPa"
    assert beam.controls["cylinder.relief_pressure"]._error.value == ""
    agrees(beam)


def test_a_slider_for_a_pad_takes_the_place_of_the_spacing(beam):
    key = "sled.guide_front" if beam.file.document.sled.guide == "continuous" else "sled.front_pad"
    beam.add_slider(key)
    assert "pad spacing" not in beam.controls
    move(beam, key, 1)
    agrees(beam)


def test_a_dimension_of_a_section_slides_only_where_the_file_gives_it(beam, file):
    if isinstance(beam.file.tables["beam"]["section"], str):
        with pytest.raises(KeyError, match="comes with the section's name"):
            beam.add_slider("beam.section.t_w")
        return
    beam.add_slider("beam.section.t_w")
    move(beam, "beam.section.t_w", 1)
    agrees(beam)
    beam.controls["beam.section"].value = other_section(beam)
    agrees(beam)
    beam.show_in("us")
    press(beam, "save")
    assert "Saved" in said(beam)
    assert "beam.section.t_w" not in beam.controls  # it has no place in the file any more
    agrees(beam)


def test_a_page_leaves_the_draft_of_another_one_alone(beam, file):
    other = MainBeam(load(file))
    move(beam, "cylinder.axis_height", 2)
    kept = draft.kept(file)
    other.parts.view.value = "actions"
    assert draft.kept(file) == kept


@pytest.mark.parametrize("factor", [0.0, -1.0])
def test_a_check_without_demand_is_searched_and_shown(beam, factor):
    beam.add_check(squash(lambda numbers, acting: factor * acting.N / numbers.section.A))
    found = by_check_and_set(beam.worst)
    assert found["mine", "usual"].given
    assert found["mine", "extreme"].demand <= 0
    move(beam, "skew_up", 2)
    assert not stale(beam)


@pytest.mark.parametrize(
    ("demand", "why"),
    [
        (lambda numbers, acting: 1 / 0, "division by zero"),
        (lambda numbers, acting: 1.0, "stations, points"),
        (lambda numbers, acting: acting.N * np.nan, "not a finite number"),
        (lambda numbers, acting: acting.N if acting.N.ndim == 2 else 1 / 0, "division by zero"),
    ],
)
def test_a_check_that_fails_is_not_given_and_the_page_goes_on(beam, demand, why):
    beam.add_check(squash(demand))
    found = by_check_and_set(beam.worst)["mine", "usual"]
    assert not found.given
    assert not found.holds
    assert why in found.why
    move(beam, "skew_up", 2)
    move(beam, "cylinder.axis_height", 2)
    assert not stale(beam)
    assert "NOT GIVEN" in beam.parts.bars.value


def test_a_check_of_an_unknown_limit_is_refused(beam):
    with pytest.raises(ValueError, match="known: yield"):
        beam.add_check(squash(lambda numbers, acting: acting.N, limit="weld"))
    move(beam, "skew_up", 2)
    agrees(beam)


def test_a_line_may_have_gaps_but_not_the_name_of_another_one(beam):
    beam.add_line("half", lambda now: np.where(now.x > 1, np.nan, 5e7))
    assert not stale(beam)
    with pytest.raises(ValueError, match="name of a computed line"):
        beam.add_line("top left", lambda now: now.x)
    beam.add_line("wrong", lambda now: [1.0, 2.0])
    assert stale(beam)
    assert "wrong: a line needs one value" in beam.parts.sentence.value


def test_one_height_of_contact_still_makes_a_page():
    text = (worksheets_dir() / DEMOS[0]).read_text(encoding="utf-8")
    lines = 'contact_low = "3 1/2 in"\ncontact_high = "3 1/2 in"\n'
    for table in ("[moving_tool]\n", "[fixed_tool]\n"):
        text = text.replace(table, table + lines)
    agrees(MainBeam(parse_machine(text.encode())))


def test_a_sled_that_just_stands_is_no_error():
    text = (worksheets_dir() / DEMOS[0]).read_text(encoding="utf-8")
    for old, new in (
        ('rear_pad = "11 in"', 'rear_pad = "31 in"'),
        ('pad_length = "3 in"', 'pad_length = "2.5 in"'),
        ('rear_end = "-3 in"', 'rear_end = "-0.25 in"'),
        ('longest = "24 in"', 'longest = "25 in"'),
        ('stroke = "24 in"', 'stroke = "24 in"'),
    ):
        assert old in text
        text = text.replace(old, new)
    agrees(MainBeam(parse_machine(text.encode())))


def test_a_message_goes_when_what_it_is_about_has_changed(beam):
    press(beam, "worst extreme log")
    assert said(beam)
    beam.parts.view.value = "actions"
    assert said(beam)
    move(beam, "skew_left", -2)
    assert said(beam) == ""


def test_moving_back_by_hand_is_no_change(beam):
    for name in ("cylinder.relief_pressure", "cylinder.axis_height"):
        move(beam, name, 3)
        move(beam, name, -3)
        assert beam._machine.changes() == {}


def test_the_equations_end_in_the_answer_and_say_when_a_check_does_not_apply(beam):
    for check in beam.checks:
        beam.choose(check.id)
        f = next(f for f in beam.now.findings if f.check.id == check.id)
        expected = f.answer() if f.applies else f.verdict()
        assert html.escape(expected) in beam.parts.equations.value


def test_a_closed_section_shows_the_stress_that_is_checked(beam):
    if beam.numbers.section.open:
        assert beam.now.checked is None
        return
    for name in ("usual", "extreme"):
        press(beam, f"worst {name} log")
        assert beam.now.checked.max() == pytest.approx(
            next(f for f in beam.now.findings if f.check.id == "beam-first-yield").demand
        )
    assert "checked, with distortion" in beam.parts.labels.value
