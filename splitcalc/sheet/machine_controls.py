"""The controls of the machine: what would be changed in its file."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from types import MappingProxyType
from typing import Any

from ipywidgets import VBox

from splitcalc.inputs import Entry, Fact
from splitcalc.machine.file import Machine
from splitcalc.machine.fit import GUIDE as GUIDE_KEYS
from splitcalc.machine.fit import PADS as PAD_KEYS
from splitcalc.materials import STEELS
from splitcalc.shapes.tables import all_sections
from splitcalc.sheet.controls import Number, around, list_of
from splitcalc.units import Dimension, factor, unit_text

PRESSURE, HEIGHT = "cylinder.relief_pressure", "cylinder.axis_height"
SECTION, STEEL = "beam.section", "beam.steel"
# What a slider moves without a new background of the picture.
MOVES = {PRESSURE, HEIGHT, "sled.rear_pad", "sled.guide_length"}
SPACING = "pad spacing"
LABELS = {PRESSURE: "relief pressure", HEIGHT: "axis height", SPACING: "pad spacing"}
SPACED = Fact("the sled's two pads, middle to middle", Dimension.LENGTH, 0.01, 3.0)
# Changes that have a control without anybody's doing.
OFFERED = {PRESSURE, HEIGHT, SECTION, STEEL, "sled.rear_pad", "sled.guide_length"}
PADS = {f"sled.{key}" for key in (*PAD_KEYS, *GUIDE_KEYS)}


class MachineControls:
    """`controls` by the file's keys (and `pad spacing`), `box` for the page.

    Parameters
    ----------
    file : the machine as it stands in its file
    now : the machine with the changes that the controls begin with
    more : dotted keys that want a slider as well; one for a pad takes the place of `pad spacing`
    entries : values that controls before these had, by name: they are kept, also refused ones
    """

    def __init__(
        self,
        file: Machine,
        now: Machine,
        units: Any,
        more: Sequence[str] = (),
        entries: Mapping[str, Any] = MappingProxyType({}),
    ) -> None:
        self._file = file
        self._in_file = {key: value for key, _, value, _ in file.inputs()}
        self._in_file[SPACING] = _spacing(file)
        sections = {name: name for name in all_sections()}
        for machine in (file, now):
            if machine.section_name not in sections:
                sections = {f"{machine.section_name} (file)": "", **sections}
        chosen = now.section_name if now.section_name in all_sections() else ""
        steels = {name: name for name in STEELS}
        self.controls: dict[str, Any] = {
            SECTION: list_of("section", sections, entries.get(SECTION, chosen), "the main beam"),
            STEEL: list_of(
                "steel", steels, entries.get(STEEL, now.document.beam.steel), "of the main beam"
            ),
        }
        self.numbers: dict[str, Number] = {}
        keys = [PRESSURE, HEIGHT, *([] if PADS & set(more) else [SPACING]), *more]
        for key in keys:
            fact, value = (SPACED, _spacing(now)) if key == SPACING else slidable(now, key)
            label = LABELS.get(key, key.rpartition(".")[2].replace("_", " "))
            control = Number(label, fact, value, around(fact, value.si), units)
            control.value = entries.get(key, value)
            self.numbers[key] = control
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
        for key, control in self.numbers.items():
            entry = control.value
            if key == SPACING:
                if abs(entry.si - self._in_file[key].si) > 1e-9:
                    out |= self._spaced(entry)
            elif SECTION in out and key.startswith(SECTION):
                continue  # a dimension of the section that was there before
            elif entry.si != self._in_file[key].si:
                out[key] = entry.text
        return out

    def tell(self, problems: Sequence[Any]) -> list[Any]:
        """Shows each problem under the control that it is about; those without one come back."""
        left = list(problems)
        for key, control in self.numbers.items():
            mine = [p for p in problems if p.key in (PADS if key == SPACING else (key,))]
            control.tell("; ".join(p.message for p in mine))
            left = [p for p in left if p not in mine]
        return left

    def entries(self) -> dict[str, Any]:
        """The controls' values, for controls that take their place."""
        return {key: control.value for key, control in self.controls.items()}

    def refused(self) -> list[str]:
        """Labels of the fields whose text can't be used."""
        return [control.label for control in self.numbers.values() if control.refused]

    def _spaced(self, spacing: Entry) -> dict[str, str]:
        """What the file says for pads so far apart, in the unit that the spacing was given in.

        The front pad, or the guide's front end, stays where it is.
        """
        sled = self._file.document.sled
        if sled.guide == "continuous":
            key, value = "sled.guide_length", spacing.si * 3 / 2
        else:
            assert sled.front_pad is not None
            key, value = "sled.rear_pad", sled.front_pad.si + spacing.si
        inch = unit_text(Dimension.LENGTH, "us")
        system: Any = "us" if spacing.text.endswith(inch) else "si"
        shown = value * factor(Dimension.LENGTH, system)
        return {key: f"{shown:.9g} {unit_text(Dimension.LENGTH, system)}"}


def slidable(machine: Machine, key: str) -> tuple[Fact, Entry]:
    """The facts and the value of an input that a slider can move.

    Raises
    ------
    KeyError : for a key that is not a number of the machine, or has no value in its file
    """
    numbers = {name: (f, v) for name, f, v, _ in machine.inputs() if f.dimension is not None}
    if key not in numbers:
        raise KeyError(f"{key} is not a number of the machine; known: {', '.join(numbers)}")
    fact, value = numbers[key]
    if value is None:
        raise KeyError(f"{key} has no value in the machine file ({fact.reason}); give it one there")
    if key.startswith(SECTION) and isinstance(machine.tables["beam"]["section"], str):
        raise KeyError(f"{key} comes with the section's name; give its dimensions in the file")
    return fact, value


def _spacing(machine: Machine) -> Entry:
    """The pads' distance, with the text that it comes from in the file: it tells the unit."""
    numbers, sled = machine.numbers(), machine.document.sled
    source = sled.guide_length if sled.guide == "continuous" else sled.rear_pad
    assert source is not None
    return Entry(float(numbers.rear_pad - numbers.front_pad), source.text)
