"""The controls of the machine: what would be changed in its file."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from ipywidgets import VBox

from splitcalc.inputs import Entry, Fact
from splitcalc.machine.file import Machine
from splitcalc.materials import STEELS
from splitcalc.shapes.tables import all_sections
from splitcalc.sheet.controls import Number, around, list_of
from splitcalc.units import Dimension, factor, unit_text

PRESSURE, HEIGHT = "cylinder.relief_pressure", "cylinder.axis_height"
SECTION, STEEL = "beam.section", "beam.steel"
# What a slider moves without a new background of the picture.
MOVES = {PRESSURE, HEIGHT, "sled.rear_pad", "sled.guide_length"}
LABELS = {PRESSURE: "relief pressure", HEIGHT: "axis height"}
SPACING = Fact("the sled's two pads, middle to middle", Dimension.LENGTH, 0.01, 3.0)


class MachineControls:
    """`controls` by the file's keys (and `pad spacing`), `box` for the page.

    Parameters
    ----------
    file : the machine as it stands in its file
    now : the machine with the changes that the controls begin with
    more : dotted keys that want a slider as well
    """

    def __init__(self, file: Machine, now: Machine, units: Any, more: Sequence[str] = ()) -> None:
        self._file, self._units = file, units
        sections = {name: name for name in all_sections()}
        for machine in (file, now):
            if machine.section_name not in sections:
                sections = {f"{machine.section_name} (file)": "", **sections}
        chosen = now.section_name if now.section_name in all_sections() else ""
        steel = now.document.beam.steel
        self.controls: dict[str, Any] = {
            SECTION: list_of("section", sections, chosen, "the main beam"),
            STEEL: list_of("steel", {name: name for name in STEELS}, steel, "of the main beam"),
        }
        inputs = {key: (fact, value) for key, fact, value, _ in now.inputs()}
        self.numbers: dict[str, Number] = {}
        for key in (PRESSURE, HEIGHT, *more):
            fact, value = slidable(inputs, key)
            label = LABELS.get(key, key.rpartition(".")[2].replace("_", " "))
            self.numbers[key] = Number(label, fact, value, around(fact, value.si), units)
            if key == HEIGHT:
                spacing = _spacing(now)
                self.numbers["pad spacing"] = Number(
                    "pad spacing", SPACING, spacing, around(SPACING, spacing.si), units
                )
        self._file_spacing = _spacing(file)
        self.controls |= self.numbers
        self.box = VBox(
            [self.controls[SECTION], self.controls[STEEL], *(n.box for n in self.numbers.values())]
        )

    def changes(self) -> dict[str, str]:
        """The texts that would have to change in the file, by dotted key."""
        section, steel = self.controls[SECTION].value, self.controls[STEEL].value
        out = {}
        if section and section != self._file.section_name:
            out[SECTION] = section
        if steel != self._file.document.beam.steel:
            out[STEEL] = steel
        inputs = {key: value for key, _, value, _ in self._file.inputs()}
        for key, control in self.numbers.items():
            entry = control.value
            if key == "pad spacing":
                if abs(entry.si - self._file_spacing.si) > 1e-9:
                    out |= self._spaced(entry.si)
            elif entry.si != inputs[key].si:
                out[key] = entry.text
        return out

    def tell(self, problems: Sequence[Any]) -> None:
        """Shows each problem under the control that it is about."""
        for key, control in self.numbers.items():
            at = "sled.rear_pad" if key == "pad spacing" else key
            control.tell("; ".join(p.message for p in problems if p.key == at))

    def _spaced(self, spacing: float) -> dict[str, str]:
        """What the file says for pads so far apart; the front pad stays where it is."""
        sled = self._file.document.sled
        if sled.guide == "continuous":
            key, value = "sled.guide_length", spacing * 3 / 2
        else:
            assert sled.front_pad is not None
            key, value = "sled.rear_pad", sled.front_pad.si + spacing
        shown = round(value * factor(Dimension.LENGTH, self._units), 9)
        return {key: f"{shown:.9g} {unit_text(Dimension.LENGTH, self._units)}"}


def slidable(inputs: dict[str, tuple[Fact, Any]], key: str) -> tuple[Fact, Entry]:
    """The facts and the value of an input that a slider can move.

    Raises
    ------
    KeyError : for a key that is not a number of the machine, or has no value yet
    """
    numbers = {name: pair for name, pair in inputs.items() if pair[0].dimension is not None}
    if key not in numbers:
        raise KeyError(f"{key} is not a number of the machine; known: {', '.join(numbers)}")
    fact, value = numbers[key]
    if value is None:
        raise KeyError(f"{key} has no value in the machine file ({fact.reason}); give it one there")
    return fact, value


def _spacing(machine: Machine) -> Entry:
    numbers = machine.numbers()
    return Entry(float(numbers.rear_pad - numbers.front_pad), "")
