"""The controls: what a slider and its field make of each other."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from splitcalc.inputs import Entry, Fact, entry
from splitcalc.sheet.controls import STEPS, Number, around, quiet_step
from splitcalc.units import INCH, Dimension

HEIGHT = Fact("height of the axis", Dimension.LENGTH, -0.5, 2.0)


def number(units: str = "us", text: str = "3 1/2 in") -> Number:
    value = entry(text, Dimension.LENGTH)
    return Number("axis height", HEIGHT, value, around(HEIGHT, value.si), units)


def problem(control: Number) -> str:
    return control._error.value


def test_a_slider_moves_on_round_numbers_and_the_field_reads_as_the_value():
    control = number()
    control._slider.value = 3.75
    assert control._field.value == control.value.text == "3.75 in"
    assert control.value.si == pytest.approx(3.75 * INCH, rel=1e-12)


def test_the_value_is_exactly_what_its_text_reads_as():
    control = number("si")
    for value in (88.7, 91.3, 120.0):
        control._slider.value = value
        assert control.value == entry(control.value.text, Dimension.LENGTH)


@pytest.mark.parametrize(
    ("typed", "si"), [("100 mm", 0.1), ("4 1/4 in", 4.25 * INCH), ("0.3 ft", 3.6 * INCH)]
)
@pytest.mark.parametrize("units", ["si", "us"])
def test_a_field_reads_any_unit(units, typed, si):
    control = number(units)
    control._field.value = typed
    assert control.value.si == pytest.approx(si, rel=1e-12)
    assert control.value.text == typed
    assert entry(control._field.value, Dimension.LENGTH).si == pytest.approx(si, rel=1e-4)
    assert control._slider.value == pytest.approx(control._handle())


@pytest.mark.parametrize("typed", ["", "tall", "4", "4 psi", "4 ton", "3 m", "-600 mm", "1,5 in"])
def test_what_cannot_be_used_is_answered_under_the_field_and_changes_nothing(typed):
    control = number()
    seen = []
    control.observe(seen.append, "value")
    control._field.value = typed
    assert not seen
    assert control.value.text == "3 1/2 in"
    assert control._field.value == typed  # to be mended
    assert typed in problem(control)
    control._field.value = "5 in"
    assert problem(control) == ""
    assert control.value.text == "5 in"


def test_a_range_is_told_in_the_units_typed():
    control = number()
    control._field.value = "90 in"
    assert "78.74" in problem(control)
    control._field.value = "2100 mm"
    assert "2\u202f000\u202fmm" in problem(control)


def test_typing_the_old_value_again_takes_the_error_away():
    control = number()
    control._field.value = "rubbish"
    control._field.value = "3 1/2 in"
    assert problem(control) == ""
    assert control._field.value == "3.50 in"


def test_past_the_end_the_handle_stays_and_the_field_tells():
    control = number()
    control._field.value = "20 in"
    assert control._slider.value == control._slider.max == 7
    assert control.value.text == "20 in"
    assert control._field.value == "20.00 in"
    control._slider.value = 7.0  # the browser's answer
    assert control.value.text == "20 in"
    control._slider.value = 6.95
    assert control.value.text == "6.95 in"


def test_a_browser_that_rounds_a_value_to_its_steps_moves_nothing():
    control = number(text="3.52 in")
    control._slider.value = 3.5
    assert control.value.text == "3.52 in"
    control._slider.value = 3.45  # one key press from where the browser has the handle
    assert control.value.text == "3.45 in"


@given(st.floats(1e-9, 1e9))
def test_steps_are_quiet_and_many_but_not_too_many(span):
    step = quiet_step(span)
    assert STEPS * (1 - 1e-9) <= span / step <= 2.5 * STEPS * (1 + 1e-9)
    mantissa = step / 10 ** math.floor(math.log10(step) + 1e-9)
    assert round(mantissa, 9) in (1, 2, 5)


@pytest.mark.parametrize("si", [-0.4, 0.0, 0.3, 1.9])
def test_a_slider_reaches_around_its_value_and_stays_in_range(si):
    low, high = around(HEIGHT, si)
    assert HEIGHT.low <= low <= si <= high <= HEIGHT.high
    assert low < high


def test_an_entry_set_from_outside_is_shown():
    control = number()
    control.value = Entry(4.1234567 * INCH, "")
    assert control._field.value == "4.1235 in"
    assert control._slider.value == pytest.approx(4.1)
