"""The main-beam worksheet in a browser: what a person does, against numbers made outside of it.

A step ends in `BeamPage.shows`: what the picture was drawn from, sentence, section and bars are
compared with `present` and `findings` on the same machine file. Every test begins with the page
as its file has it.
"""

import json
import math
from collections.abc import Callable
from dataclasses import astuple

import numpy as np
import pytest

from splitcalc.checks import ALL
from splitcalc.equations.render import lines_of_text
from splitcalc.logs.report import findings, governing
from splitcalc.machine.numbers import SETS
from splitcalc.units import Dimension, parse
from tests.browser.beam_page import KINDS, LOG, MACHINE, PNG, READ, SLIDERS, BeamPage

pytestmark = pytest.mark.browser

OPACITY = """(e) => {
    let opacity = 1;
    for (; e; e = e.parentElement) opacity *= getComputedStyle(e).opacity;
    return opacity;
}"""


@pytest.fixture(scope="module")
def opened(open_for_module: Callable) -> BeamPage:
    return BeamPage(open_for_module("main-beam.ipynb"))


@pytest.fixture
def beam(opened: BeamPage) -> BeamPage:
    opened.begin()
    return opened


@pytest.mark.parametrize("label", SLIDERS)
def test_a_slider_is_moved_by_keys_and_dragged(beam, label):
    places = [beam.notebook.slider_value(label)]
    for key, times in (("ArrowRight", 3), ("ArrowLeft", 5)):
        beam.notebook.press_slider(label, key, times)
        places.append(beam.follow(label))
    for by in (-30, 12):
        beam.notebook.drag_slider(label, by)
        places.append(beam.follow(label))
    assert np.sign(np.diff(places)).tolist() == [1, -1, -1, 1]


def test_the_first_key_counts_from_a_value_between_two_steps(beam):
    beam.type("relief pressure", "2850 psi")
    beam.notebook.press_slider("relief pressure", "ArrowLeft")
    beam.follow("relief pressure")


def test_a_field_reads_any_unit_and_refuses_rubbish(beam):
    typed = {
        "skew up": "0.05 rad", "skew left": "-0.02 rad", "contact up": "25 mm",
        "contact left": "3 cm", "log length": "400 mm",
    }  # fmt: skip
    for label, text in typed.items():
        beam.type(label, text)
        beam.shows(**{LOG[label]: parse(text, KINDS.get(label, Dimension.LENGTH))})
    machine = {"relief pressure": "180 bar", "axis height": "95 mm"}
    for label, text in machine.items():
        beam.type(label, text)
        beam.changes[MACHINE[label]] = text
        beam.shows()
    beam.type("pad spacing", "250 mm")
    beam.space(0.25, "si")
    beam.shows()

    before = beam.page.evaluate(READ)
    for label, text in {**typed, **machine, "pad spacing": "250 mm"}.items():
        for rubbish in ("three", "9000", "40 m" if label not in KINDS else "1e9 psi"):
            beam.type(label, rubbish)
            errors = beam.until(lambda read, r=rubbish: not any(r in e for e in read["errors"]))
            assert len(errors["errors"]) == 1
            box = beam.page.locator(".splitcalc-number").filter(has=beam.page.get_by_text(label))
            assert rubbish in box.locator(".splitcalc-error").inner_text()
            assert {**errors, "errors": []} == before
            beam.type(label, text)
            beam.shows()


def test_a_value_past_the_sliders_end_stays(beam):
    for text in ("9 in", "11 in", "14 in", "-9 in", "-11 in"):
        beam.type("contact left", text)
        beam.shows(contact_left=parse(text, Dimension.LENGTH))
        # What the browser may have answered comes before the next key.
        beam.notebook.press_slider("skew up", "ArrowRight")
        beam.follow("skew up")


def test_both_toggles(beam):
    beam.click("buried")
    beam.shows(state="buried")
    for label, text in {
        "skew up": "4 deg",
        "skew left": "-3 deg",
        "contact left": "1/2 in",
    }.items():
        beam.type(label, text)
        beam.shows(**{LOG[label]: parse(text, KINDS.get(label, Dimension.LENGTH))})
    log = beam.log()
    beam.click("ram")
    beam.shows(pivot="moving tool", contact_left=log.a_y, contact_up=log.a_z)
    assert astuple(beam.log()) == pytest.approx(astuple(log))
    beam.notebook.press_slider("skew left", "ArrowRight", times=4)
    beam.follow("skew left")
    turned = beam.log()
    assert (turned.a_y, turned.a_z) == pytest.approx((log.a_y, log.a_z))
    beam.click("fixed tool")
    beam.shows(pivot="fixed tool", contact_left=turned.b_y, contact_up=turned.b_z)
    beam.click("first bite")
    beam.shows(state="first bite")


def test_section_steel_and_units(beam):
    before = beam.page.evaluate(PNG)
    for key, chooser, name in (("section", "section", "W10x49"), ("steel", "steel", "A36")):
        lists = beam.page.locator(".widget-dropdown").filter(has_text=chooser)
        was = lists.locator("select").evaluate("list => list.selectedOptions[0].textContent")
        lists.locator("select").select_option(label=name)
        beam.changes[f"beam.{key}"] = name
        beam.shows()
        assert beam.page.evaluate(PNG) != before
        lists.locator("select").select_option(label=was)
        del beam.changes[f"beam.{key}"]
        beam.shows()
    assert beam.page.evaluate(PNG) == before
    beam.notebook.press_slider("relief pressure", "ArrowRight", 4)
    beam.follow("relief pressure")
    beam.notebook.press_slider("pad spacing", "ArrowRight", 4)
    beam.follow("pad spacing")
    beam.click("SI")
    beam.units = "si"
    beam.shows()
    for label in SLIDERS:
        beam.notebook.press_slider(label, "ArrowLeft", 2)
        beam.follow(label)
    beam.click("US")
    beam.units = "us"
    beam.shows()


def test_views_and_the_equations_of_a_check(beam):
    stress = beam.page.evaluate(PNG)
    beam.click("actions")
    beam.view = "actions"
    beam.shows()
    assert beam.page.evaluate(PNG) != stress
    for check in ALL[::-1]:
        beam.choose(check.title)
        for label in ("skew left", "log length"):
            beam.notebook.press_slider(label, "ArrowLeft", 6)
            beam.follow(label)
            now, _ = beam.shows()
            top = governing([f for f in now.findings if f.check is check])
            results = [lines_of_text(line, "us")[-1] for line in top.lines]
            read = beam.until(
                lambda read, top=top: (
                    not read["equations"].startswith(top.verdict())
                    and (read["equations"], top.verdict())
                )
            )
            assert [text for text in results if text.strip() not in read["equations"]] == []
            assert not beam.page.locator(".splitcalc-stage").is_visible()
    beam.click("stress")
    beam.view = "stress"
    beam.shows()
    assert beam.page.locator(".splitcalc-stage").is_visible()
    assert not beam.page.locator(".splitcalc-equations").is_visible()


def test_mirror_and_the_worst_logs(beam):
    for pivot, tool in (("fixed tool", "b"), ("ram", "a")):
        beam.click(pivot)
        beam.values["pivot"] = "moving tool" if pivot == "ram" else pivot
        for check in ALL:
            for name in SETS:
                beam.choose(check.title)
                beam.click(f"worst {name} log")
                beam.view = "stress"
                found = findings(ALL, beam.machine.numbers())
                log = next(f.log for f in found if (f.check, f.set) == (check, name))
                rise, aside = (log[f"b_{v}_m"] - log[f"a_{v}_m"] for v in "zy")
                beam.values |= {
                    "state": log["state"], "distance": log["distance_m"],
                    "skew_up": math.atan(rise / log["distance_m"]),
                    "skew_left": math.atan(aside / log["distance_m"]),
                    "contact_up": log[f"{tool}_z_m"], "contact_left": log[f"{tool}_y_m"],
                }  # fmt: skip
                beam.shows()
                beam.says(f"Worst {name} log of “{check.title}”: {log['bound']}.")
                bar = beam.page.evaluate(READ)["bars"][ALL.index(check)][SETS.index(name)]
                assert bar["now"] == bar["worst"]
        beam.click("mirror left and right")
        beam.shows(**{v: -beam.values[v] + 0.0 for v in ("skew_left", "contact_left")})


def test_pin_keeps_the_curves_to_compare(beam):
    beam.type("skew left", "6 deg")
    pinned, _ = beam.shows(skew_left=parse("6 deg", Dimension.ANGLE))
    alone = beam.page.evaluate(PNG)
    beam.click("pin curves")
    beam.page.get_by_role("button", name="unpin curves").wait_for()
    beam.pinned = pinned.findings
    beam.notebook.press_slider("skew left", "ArrowLeft", 10)
    beam.follow("skew left")
    beam.type("skew left", "6 deg")
    beam.shows(skew_left=parse("6 deg", Dimension.ANGLE))
    assert beam.page.evaluate(PNG) != alone
    beam.click("unpin curves")
    beam.pinned = ()
    beam.shows()
    assert beam.page.evaluate(PNG) == alone


def test_save_changes_the_file_and_nothing_else_in_it(beam):
    beam.click("save")
    beam.says("Nothing to save")
    beam.notebook.press_slider("relief pressure", "ArrowRight", 3)
    beam.follow("relief pressure")
    beam.notebook.press_slider("pad spacing", "ArrowRight", 10)
    beam.follow("pad spacing")
    beam.notebook.press_slider("skew up", "ArrowRight", 3)
    beam.follow("skew up")
    beam.click("save")
    beam.says(f"Saved: cylinder.relief_pressure = {beam.changes['cylinder.relief_pressure']}")
    text = beam.path.read_text(encoding="utf-8")
    pairs = zip(beam.text.splitlines(), text.splitlines(), strict=True)
    changed = [new for old, new in pairs if old != new]
    pressure, pad = beam.changes["cylinder.relief_pressure"], beam.changes["sled.rear_pad"]
    assert changed == [f'relief_pressure = "{pressure}"', f'rear_pad = "{pad}"']
    assert "INVENTED MACHINE" in text
    beam.read_file()
    beam.shows()
    beam.click("save")
    beam.says("Nothing to save")


def test_save_leaves_a_file_alone_that_changed_meanwhile(beam):
    beam.notebook.press_slider("axis height", "ArrowRight", 3)
    beam.follow("axis height")
    other = beam.text.replace('"2850 psi"', '"2600 psi"')
    beam.path.write_text(other, encoding="utf-8")
    beam.click("save")
    beam.says("has changed on disk since it was read; nothing was written")
    assert beam.path.read_text(encoding="utf-8") == other
    beam.shows()
    beam.click("back to file")
    beam.says("Back to the values of the file.")
    beam.as_in_file()
    assert beam.machine.document.cylinder.relief_pressure.text == "2600 psi"
    beam.shows()


def test_a_draft_outlives_the_kernel(beam):
    def leave_behind() -> None:
        """Waits until the draft is on disk, then runs all in a new kernel."""
        beam.until(lambda _: not kept() and beam.draft)
        beam.notebook.restart_kernel()
        beam.notebook.run_all()
        beam.page.get_by_text("An earlier session left values that were not saved").wait_for()

    def kept() -> bool:
        if not beam.draft.exists():
            return False
        draft = json.loads(beam.draft.read_text(encoding="utf-8"))
        return draft["changes"] == changes and draft["values"] == pytest.approx(values)

    for label in ("skew left", "log length", "relief pressure", "pad spacing"):
        beam.notebook.press_slider(label, "ArrowLeft", 4)
        beam.follow(label)
    values, changes, spacing = dict(beam.values), dict(beam.changes), beam.spacing
    leave_behind()
    beam.as_in_file()
    beam.shows()
    beam.click("take them back")
    beam.says("Back to the values of the earlier session.")
    beam.values, beam.changes, beam.spacing = dict(values), dict(changes), spacing
    beam.shows()
    leave_behind()
    beam.click("drop them")
    beam.page.get_by_text("An earlier session left").wait_for(state="hidden")
    beam.as_in_file()
    beam.shows()
    beam.until(lambda _: beam.draft.exists() and beam.draft)


def test_an_error_greys_the_picture_and_is_mended_by_moving_back(beam):
    before = beam.page.evaluate(READ)
    beam.type("pad spacing", "40 in")
    read = beam.until(lambda read: not read["errors"] and read)
    assert read["picture"] == before["picture"]
    assert "splitcalc-stale" in read["classes"]
    for name in (".splitcalc-stage img", ".splitcalc-labels", ".splitcalc-side svg"):
        assert beam.page.locator(name).evaluate(OPACITY) < 0.5, name
    # The front pad stays at 2 in.
    for told in ("sled.rear_pad", "42 in", "at most 33.5"):
        assert told in read["sentence"]
    box = beam.page.locator(".splitcalc-number").filter(has=beam.page.get_by_text("pad spacing"))
    assert "the rear pad hangs" in box.locator(".splitcalc-error").inner_text()
    beam.notebook.press_slider("pad spacing", "Home")
    beam.follow("pad spacing")
