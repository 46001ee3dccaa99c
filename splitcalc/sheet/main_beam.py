"""The main-beam page: a machine and a log under sliders, the living picture, the bars, saving."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from time import perf_counter
from types import MappingProxyType
from typing import Any

from ipywidgets import HTML, VBox

from splitcalc.checks import ALL, NOT_YET
from splitcalc.draw.main_beam import MainBeamPicture, still
from splitcalc.draw.section import section_svg
from splitcalc.draw.stress_panel import CHECKED, WEB
from splitcalc.findings import Check, Finding
from splitcalc.inputs import InputError
from splitcalc.logs.limits import sled_off
from splitcalc.logs.present import CORNERS, Present, present
from splitcalc.logs.report import governing
from splitcalc.logs.words import still_open
from splitcalc.machine.draft import Draft
from splitcalc.machine.file import Machine, load
from splitcalc.machine.numbers import SETS
from splitcalc.machine.save import SaveError, save
from splitcalc.sheet import phrases
from splitcalc.sheet.bars import bars, by_check_and_set
from splitcalc.sheet.controls import buttons_of
from splitcalc.sheet.drafts import Drafts
from splitcalc.sheet.live import Live, Work
from splitcalc.sheet.log_controls import LogControls, log_of, plain, straight, values_of_finding
from splitcalc.sheet.machine_controls import MOVES, OFFERED, MachineControls, slidable
from splitcalc.sheet.page import Page, button, heading, named, row, small
from splitcalc.sheet.worst import WorstLogs

# Seconds. While a hand moves, words and bars change no quicker than an eye can read, so that the
# picture keeps up with it; when it stops they follow; when it rests the draft is kept.
READ, SETTLE, REST = 0.12, 0.05, 0.4
NONE: Mapping[str, Any] = MappingProxyType({})


class MainBeam:
    """The page and what it knows; `page` is what a notebook shows.

    file : the machine as it stands in its file; machine : with the changes of the controls
    now : the log of the controls, None while there is none; controls : by name
    """

    live: Live

    def __init__(self, machine: Machine) -> None:
        self.file = self.machine = machine
        self.units = machine.units
        self.checks: tuple[Check, ...] = ALL
        self.numbers = machine.numbers()
        self._worst = WorstLogs()
        self._worst.begin(self.checks, self.numbers, self.units)
        worst = governing(self._worst.finish())
        self.chosen = worst.check.id if worst else self.checks[0].id
        self.now: Present | None = None
        self.pinned: Present | None = None
        self._sliders: list[str] = []  # that a person added: keys of the file
        self._lines: dict[str, Callable[[Present], Any]] = {}  # likewise
        self._changes: dict[str, str] = {}
        self._pictures: dict[str, MainBeamPicture] = {}  # by what they show under the machine
        self._panel = "stress"
        self._told: Present | None = None  # whose words and bars are shown, and since when
        self._told_at = -math.inf
        self._pin = self._button("pin curves", "keep the present curves, to compare", self.pin)
        go = [
            self._button(f"worst {name} log", f"{name} logs, of the chosen check", self.go, name)
            for name in SETS
        ]
        self.parts = Page(pin=self._pin, worst=go, open_points=still_open(NOT_YET))
        self.page = self.parts.box
        self._drafts = Drafts(machine.path)
        self._said_about: Any = None  # what the message under the buttons was said about
        self._make_names()
        self._make_controls(straight(self.numbers))
        self.live.draw()

    @property
    def worst(self) -> list[Finding]:
        """Findings at the worst allowed logs of `machine`; waits for the search."""
        if self._worst.running:
            self._worst.finish()
            self._found()
        return self._worst.found

    def _button(self, text: str, tooltip: str, action: Callable[..., None], *args: object) -> Any:
        return button(text, tooltip, lambda: self.live.guard(action, *args))

    def _make_controls(self, values: dict[str, Any], entries: Mapping[str, Any] = NONE) -> None:
        """New controls: for a file read anew, for other units, for one more slider.

        `entries` are those of the machine's controls before, which are kept.
        """
        self._sliders = [key for key in self._sliders if self._slides(key)]
        log = LogControls(self.numbers, self.units, values)
        machine = MachineControls(self.file, self.machine, self.units, self._sliders, entries)
        units = buttons_of(
            "units", (("US", "us"), ("SI", "si")), self.units,
            "to show; typed numbers carry their own, the file stays as it is",
        )  # fmt: skip
        units.observe(lambda change: self.live.guard(self.show_in, change["new"]), "value")
        if hasattr(self, "live"):
            self.live.close()
        self._log, self._machine = log, machine
        self.controls = {**log.controls, **machine.controls, "view": self.parts.view}
        self.live = Live(self.controls, self._update, self._show_error)
        self._offer = VBox()
        self.parts.rail.children = [
            self._offer, heading("log"), log.box, heading("machine"), machine.box, units,
            row(self._button("back to file", "the file's values, read anew", self.back),
                self._button("save", "write the changes to the machine file", self.save)),
            self.parts.unsaved_line, self.parts.message,
        ]  # fmt: skip
        self._offer_draft()

    def _slides(self, key: str) -> bool:
        try:
            slidable(self.machine, key)
        except KeyError:
            return False  # its place in the file is gone, with the section that was there
        return True

    def _make_names(self) -> None:
        """A button beside each bar."""
        why = "its equations, for this log"
        self.parts.name_checks(
            {c.id: self._button(c.title, why, self.choose, c.id) for c in self.checks}, self.chosen
        )

    def choose(self, check_id: str) -> None:
        """Chooses a check: shows its equations, and the buttons go to its worst logs."""
        self.chosen = check_id
        self._make_names()
        self.parts.view.value = "equations"
        self.live.draw()

    def go(self, set_name: str) -> None:
        """Sets the controls to the worst log of the chosen check in a set."""
        finding = by_check_and_set(self._worst.found).get((self.chosen, set_name))
        if self._worst.running or finding is None or finding.log is None:
            why = "it is being searched" if self._worst.running else finding and finding.why
            self._say(f"There is no worst {set_name} log of this check to go to: {why}.")
            return
        with self.live.together():
            self._log.take(values_of_finding(finding, self._log.controls["pivot"].value))
            if self.parts.view.value == "equations":
                self.parts.view.value = "stress"
        self._say(f"Worst {set_name} log of “{finding.check.title}”: {finding.log['bound']}.")

    def pin(self) -> None:
        """Keeps the present curves in the picture, or takes them away again."""
        self.pinned = self.now if self.pinned is None else None
        self._pin.description = "pin curves" if self.pinned is None else "unpin curves"
        for picture in self._pictures.values():
            picture.pin(self.pinned)
        self.live.draw()

    def back(self) -> None:
        """The values of the file, read anew."""
        if self.file.path is not None:
            self.file = load(self.file.path)
        self._begin(self.file, {})
        self._make_controls(straight(self.numbers))
        self._say("Back to the values of the file.")
        self.live.draw()

    def save(self) -> None:
        """Writes the machine's changes to its file; the log is not part of it."""
        changes = self._machine.changes()
        if self.file.path is None:
            raise SaveError("This machine was not read from a file: there is none to save to.")
        if self._machine.refused():
            raise SaveError(f"Nothing saved: {', '.join(self._machine.refused())} can't be read.")
        if not changes:
            self._say("Nothing to save: the machine is as in its file.")
            return
        self.file = save(self.file.path, self.file, changes)
        values = self._log.values()
        self._begin(self.file, {})
        self._make_controls(values)
        self._say(f"Saved: {phrases.told(changes)}.")
        self.live.draw()

    def show_in(self, units: Any) -> None:
        """Shows the other unit system; the state stays what it is."""
        values, entries = self._log.values(), self._machine.entries()
        self.units = units
        self._begin(self.machine, self._changes)
        self._make_controls(values, entries)
        self.live.draw()

    def add_slider(self, key: str) -> None:
        """A slider for any number of the machine file, by its dotted key.

        Raises
        ------
        KeyError : for a key that is no number of the machine, or has no value
        """
        slidable(self.file, key)
        if key not in self._sliders:
            self._sliders.append(key)
        self._make_controls(self._log.values(), self._machine.entries())
        self.live.draw()

    def add_line(self, name: str, stress: Callable[[Present], Any]) -> None:
        """One more line along the beam; `stress` gives it [Pa] at the stations `now.x`.

        Raises
        ------
        ValueError : for the name of a line that is there already
        """
        if name in (*CORNERS, WEB, CHECKED):
            raise ValueError(f"{name!r} is the name of a computed line; give yours another one")
        self._lines[name] = stress
        self._pictures.clear()
        self.live.draw()

    def add_check(self, check: Check) -> None:
        """One more check, with its bar, its worst logs and its equations.

        Raises
        ------
        ValueError : for a limit that no required factor belongs to
        """
        if check.limit not in self.numbers.required:
            known = ", ".join(self.numbers.required)
            raise ValueError(f"the check's limit is {check.limit!r}; known: {known}")
        self.checks = (*(c for c in self.checks if c.id != check.id), check)
        self._begin(self.machine, self._changes)
        self._make_names()
        self.live.draw()

    def still(self, finding: Finding | None = None) -> Any:
        """A picture for the printed page: of the controls' log, or of a finding's."""
        now = self.now
        if finding is not None and finding.log is not None:
            now = self._present(values_of_finding(finding, "fixed tool"))
        assert now is not None
        return still(self.machine, now, self.worst, self.units)

    def _update(self, controls: dict[str, Any]) -> None:
        changes = self._machine.changes()
        about = (changes, {k: v for k, v in controls.items() if k != "view"})
        if self._said_about not in (None, about):
            self.parts.say("")
        self._said_about = about
        if changes != self._changes:
            machine = self.file.changed(changes)
            other = {key for key, _ in changes.items() ^ self._changes.items()}
            self._begin(machine, changes, redraw=not other <= MOVES)
        self._machine.tell([])
        values = plain(controls)
        self.now = self._present(values)
        self._draw(values)
        if perf_counter() - self._told_at > READ:
            self._tell()
        self.parts.stale(False)
        self.live.run_slices(self._afterwards(values))

    def _begin(self, machine: Machine, changes: dict[str, str], redraw: bool = True) -> None:
        """Another machine, other units, other checks: the worst logs are searched anew."""
        self.machine, self._changes, self.numbers = machine, changes, machine.numbers()
        if redraw:
            self._pictures.clear()
        self._worst.begin(self.checks, self.numbers, self.units)
        self.parts.waiting(True)

    def _present(self, values: dict[str, Any]) -> Present:
        problem = sled_off(self.numbers, values["distance"], self.units)
        if problem:
            raise ValueError(f"log length, gap: {problem}")
        return present(self.checks, self.numbers, log_of(values), self.units, values["state"])

    def _draw(self, values: dict[str, Any]) -> None:
        """The picture and the texts on it."""
        now = self.now
        assert now is not None
        view = values["view"]
        if view != "equations":
            self._panel = view
        self.parts.show_view(view)
        picture = self._picture(now)
        told = {**values, **self._changes, "units": self.units}
        self.parts.image.value = picture.render(self.machine, now, told, now.worst_x)
        self.parts.labels.value = "".join(map(phrases.label, picture.labels()))

    def _tell(self) -> None:
        """Section, bars and sentences."""
        self._told, self._told_at = self.now, perf_counter()
        now, parts = self.now, self.parts
        assert now is not None
        x = now.worst_x
        svg = "" if x is None else section_svg(now, int(abs(now.x - x).argmin()), self.units)
        parts.section.value = f"<div class='splitcalc-drawn'>{svg}</div>"
        pinned = () if self.pinned is None else self.pinned.findings
        parts.bars.value = bars(self.checks, now.findings, self._worst.found, pinned)
        worst = None if self._worst.running else self._worst.found
        parts.sentence.value = phrases.verdicts(now, worst, self.units)
        parts.past.value = phrases.past_limits(now)
        parts.unsaved(phrases.told(self._changes))
        parts.foot.value = small(phrases.foot(self.numbers.notes))

    def _picture(self, now: Present) -> MainBeamPicture:
        """The picture of the chosen panel, made when it is first wanted."""
        if self._panel not in self._pictures:
            picture = MainBeamPicture(
                self.machine, now, self._worst.found, self.units, self._panel, self._lines
            )
            picture.pin(self.pinned)
            self._pictures[self._panel] = picture
        return self._pictures[self._panel]

    def _afterwards(self, values: dict[str, Any]) -> Work:
        """What can wait: the search, then, when the hand rests, equations and draft."""
        if self._told is not self.now:
            yield SETTLE
            self._tell()
        yield None
        while self._worst.running:
            # a drag drops this work, and the search goes on where it stands
            if self._worst.step():
                self._found()
                self._draw(values)
                self._tell()
            yield None
        yield SETTLE
        if values["view"] == "equations":
            self._show_equations()
        yield REST
        self._keep_draft(values)

    def _found(self) -> None:
        """After the search."""
        # A picture that is not shown may be about an earlier machine: it is made anew.
        self._pictures = {k: v for k, v in self._pictures.items() if k == self._panel}
        for picture in self._pictures.values():
            picture.set_worst(self._worst.found)
        self.parts.waiting(False)

    def _show_equations(self) -> None:
        assert self.now is not None
        found = [f for f in self.now.findings if f.check.id == self.chosen]
        self.parts.equations.value = (governing(found) or found[0])._repr_html_()

    def _say(self, text: str) -> None:
        """A message that stays until the log or the machine changes."""
        self._said_about = None
        self.parts.say(text)

    def _show_error(self, error: Exception) -> None:
        if isinstance(error, SaveError):
            self.parts.say(str(error), bad=True)
            return
        told = [str(error) or type(error).__name__]
        if isinstance(error, InputError):
            told = [str(problem) for problem in error.problems]
            if self._machine.tell(error.problems):
                told.append("Choose otherwise, or change it in the machine file.")
        self.parts.sentence.value = phrases.no_result(told)
        self.parts.stale(True)

    def _keep_draft(self, values: dict[str, Any]) -> None:
        log = {k: values[k] for k in straight(self.numbers)}
        begun = self._changes or log != straight(self.numbers)
        self._drafts.keep(Draft(self.file.digest, log, self._changes) if begun else None)

    def _offer_draft(self) -> None:
        left = self._drafts.left
        if left is None:
            return
        other = left.machine != self.file.digest
        told = "An earlier session left values that were not saved"
        text = f"{told}{'; the machine file has changed since' if other else ''}."
        self._offer.children = [
            named(HTML(small(text)), "message"),
            row(self._button("take them back", "as they were left", self.take_back),
                self._button("drop them", "for good", self.drop_draft)),
        ]  # fmt: skip

    def take_back(self) -> None:
        """The values that an earlier session left."""
        left = self._drafts.left
        if left is None:
            return
        self._begin(self.file.changed(left.changes), dict(left.changes))
        self._sliders += [k for k in left.changes if k not in OFFERED and k not in self._sliders]
        start = straight(self.numbers)
        self._drafts.taken()
        self._make_controls({k: left.values.get(k, value) for k, value in start.items()})
        self._say("Back to the values of the earlier session.")
        self.live.draw()

    def drop_draft(self) -> None:
        """Forgets them."""
        self._drafts.dropped()
        self._offer.children = []
