"""The controls of the worksheets: a slider with a field beside it that reads any unit."""

from __future__ import annotations

import html
import math
from collections.abc import Mapping, Sequence
from typing import Any

from ipywidgets import HTML, Box, Dropdown, FloatSlider, Text, ToggleButtons
from traitlets import HasTraits, Instance

from splitcalc.inputs import Entry, Fact, read_value
from splitcalc.units import MINUS, factor, unit_text

STEPS = 100  # a slider has at least so many
LEAST = 1e-3  # of an SI unit: half of the shortest slider


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
        self.label, self.fact = label, fact
        self._per = factor(fact.dimension, units)
        self._unit = unit_text(fact.dimension, units)
        low, high = (min(max(end, fact.low), fact.high) * self._per for end in ends)
        if not high > low:  # a single place: the slider still has to be one
            low, high = low - LEAST * self._per, high + LEAST * self._per
        self._step = quiet_step(high - low)
        self._digits = max(0, -math.floor(math.log10(self._step) + 1e-9))
        self._busy = False
        self._home = value
        self._refusal = self._misfit = ""
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

    @property
    def refused(self) -> bool:
        """Whether the field holds a text that can't be used."""
        return bool(self._refusal)

    def tell(self, problem: str) -> None:
        """Shows why the machine can't be used with this number; nothing takes that away.

        What is wrong with a text in the field stays until the text is mended.
        """
        self._misfit = problem
        self._show_error()

    def _show_error(self) -> None:
        text = html.escape(self._refusal or self._misfit)
        self._error.value = f"<div class='splitcalc-error'>{text}</div>" if text else ""

    def _show(self) -> None:
        """Field and slider as the value is; past the slider's end its handle stays at the end."""
        self._busy = True
        if self._moved(self._slider.value):  # no echo of a drag
            self._slider.value = self._handle()
        self._field.value = self._text(self.value.si * self._per)
        self._busy = False
        self._refusal = self._misfit = ""
        self._show_error()

    def _handle(self, entry: Entry | None = None) -> float:
        """Where a browser puts the handle for the value: inside the ends, on a step.

        It answers any other place with this one, and that answer is no move of the person.
        """
        low, high = self._slider.min, self._slider.max
        value = min(max((entry or self.value).si * self._per, low), high)
        return float(min(low + math.floor((value - low) / self._step + 0.5) * self._step, high))

    def _moved(self, place: float) -> bool:
        return abs(place - self._handle()) > 1e-6 * self._step

    def _text(self, value: float) -> str:
        rounded = round(value, self._digits)
        if abs(rounded - value) <= 1e-9 * max(1.0, abs(value)):
            text = f"{rounded + 0.0:.{self._digits}f}".replace("-", MINUS)
            return f"{text} {self._unit}".rstrip()
        digits = max(0, 4 - math.floor(math.log10(abs(value))))  # without separators: it is read
        return f"{value:.{digits}f} {self._unit}".replace("-", MINUS).rstrip()

    def _slid(self, change: Any) -> None:
        if self._busy or not self._moved(change["new"]):
            return
        if abs(change["new"] - self._handle(self._home)) <= 1e-6 * self._step:
            self.value = self._home  # also where it lies between two steps
        else:
            on_grid = round(change["new"] / self._step) * self._step
            self._take(self._text(on_grid))

    def _typed(self, change: Any) -> None:
        if not self._busy:
            self._take(change["new"])

    def _take(self, text: str) -> None:
        try:
            value = read_value(text.strip(), self.fact)
        except ValueError as error:
            self._refusal = str(error)
            self._show_error()
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
