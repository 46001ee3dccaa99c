"""The controls of the worksheets: a slider with a field beside it that reads any unit."""

from __future__ import annotations

import html
import math
from collections.abc import Mapping, Sequence
from typing import Any

from ipywidgets import HTML, Box, Dropdown, FloatSlider, Text, ToggleButtons
from traitlets import HasTraits, Instance

from splitcalc.inputs import Entry, Fact, read_value
from splitcalc.units import MINUS, NARROW_SPACE, factor, show, unit_text

STEPS = 100  # a slider has at least so many


class Number(HasTraits):
    """A number with a unit: drag it, or type it in any unit. `box` is what stands in the page.

    `value` is an `Entry`: the SI value, and a text that reads as the same. What can't be read or
    is out of range is answered under the field, stays there to be mended, and changes nothing.

    Parameters
    ----------
    label : a few words
    fact : what the number is; its range is what may be typed
    value : at the start
    ends : of the slider [SI]; one step past the range of a formula may lie inside
    """

    value = Instance(Entry)

    def __init__(
        self, label: str, fact: Fact, value: Entry, ends: tuple[float, float], units: Any
    ) -> None:
        super().__init__(value=value)
        assert fact.dimension is not None
        self.fact, self._units = fact, units
        self._per = factor(fact.dimension, units)
        self._unit = unit_text(fact.dimension, units)
        low, high = (min(max(end, fact.low), fact.high) * self._per for end in ends)
        self._step = quiet_step(high - low)
        self._digits = max(0, -math.floor(math.log10(self._step) + 1e-9))
        self._busy = False
        self._slider = FloatSlider(
            min=round(math.floor(low / self._step + 1e-9) * self._step, self._digits),
            max=round(math.ceil(high / self._step - 1e-9) * self._step, self._digits),
            step=self._step,
            description=label,
            readout=False,
            tooltip=fact.words,
        )
        self._field = Text(continuous_update=False, tooltip=f"{fact.words}, in any unit")
        self._field.add_class("splitcalc-field")
        self._error = HTML()
        self.box = Box([self._slider, self._field, self._error])
        self.box.add_class("splitcalc-number")
        self._show()
        self._slider.observe(self._slid, "value")
        self._field.observe(self._typed, "value")
        self.observe(lambda _: self._show(), "value")

    def tell(self, problem: str) -> None:
        """Shows what is wrong with the number, or takes that away when there is nothing."""
        text = f"<div class='splitcalc-error'>{html.escape(problem)}</div>" if problem else ""
        if self._error.value != text:
            self._error.value = text

    def _show(self) -> None:
        """Slider and field as the value is; a value past the slider's end takes the end along."""
        value = self.value.si * self._per
        self._busy = True
        self._slider.min, self._slider.max = (
            min(self._slider.min, value),
            max(self._slider.max, value),
        )
        if abs(self._slider.value - value) > 1e-9 * max(1.0, abs(value)):  # no echo of a drag
            self._slider.value = value
        self._field.value = self._text(value)
        self._busy = False
        self.tell("")

    def _text(self, value: float) -> str:
        rounded = round(value, self._digits)
        if abs(rounded - value) <= 1e-9 * max(1.0, abs(value)):
            text = f"{rounded + 0.0:.{self._digits}f}".replace("-", MINUS)
            return f"{text} {self._unit}".rstrip()
        assert self.fact.dimension is not None
        return show(self.value.si, self.fact.dimension, self._units, 5).replace(NARROW_SPACE, " ")

    def _slid(self, change: Any) -> None:
        # A browser answers a value between two steps with the nearest step: that is no move.
        moved = abs(change["new"] - self.value.si * self._per) > 0.51 * self._step
        if moved and not self._busy:
            on_grid = round(change["new"] / self._step) * self._step
            self._take(self._text(on_grid))

    def _typed(self, change: Any) -> None:
        if not self._busy:
            self._take(change["new"])

    def _take(self, text: str) -> None:
        try:
            value = read_value(text.strip(), self.fact)
        except ValueError as error:
            self.tell(str(error))
            return
        if value == self.value:
            self._show()  # no change to observe
        else:
            self.value = value


def quiet_step(span: float) -> float:
    """The largest of 1, 2, 5, 10 … that makes at least `STEPS` steps of a span."""
    wanted = span / STEPS
    power = 10.0 ** math.floor(math.log10(wanted))
    return next(power * s for s in (5, 2, 1) if power * s <= wanted * (1 + 1e-9))


def around(fact: Fact, si: float) -> tuple[float, float]:
    """The ends of a slider for an input: from half to double of what it is."""
    if si == 0:
        reach = 0.1 * min(abs(fact.high), 1.0)
        return max(fact.low, -reach), min(fact.high, reach)
    low, high = sorted((si / 2, si * 2))
    return max(fact.low, low), min(fact.high, high)


def buttons_of(label: str, options: Sequence[Any], value: Any, tooltip: str) -> ToggleButtons:
    """One of a few words."""
    out = ToggleButtons(options=options, value=value, description=label, tooltip=tooltip)
    out.add_class("splitcalc-choice")
    return out


def list_of(label: str, options: Mapping[str, str], value: str, tooltip: str) -> Dropdown:
    """One of many words; `options` maps what is shown to what is meant."""
    out = Dropdown(options=options, value=value, description=label, tooltip=tooltip)
    out.add_class("splitcalc-choice")
    return out
