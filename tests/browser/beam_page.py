"""The main-beam page as a person drives it, and what it should show, worked out outside of it."""

import math
from collections.abc import Callable, Iterator, Mapping, Sequence
from typing import Any

import numpy as np
import pytest

from splitcalc.checks import ALL
from splitcalc.findings import Finding, margin_text
from splitcalc.logs.present import Present, log_through, present
from splitcalc.logs.report import findings, governing
from splitcalc.logs.words import sentence, this_log
from splitcalc.machine.file import load
from splitcalc.machine.numbers import SETS
from splitcalc.thrust.frame import Log
from splitcalc.units import MINUS, NARROW_SPACE, Dimension, factor, parse, show, unit_text

FRAMES = 1000  # of the browser: ends a wait that would never end
PRESSURE, HEIGHT, SPACING = "cylinder.relief_pressure", "cylinder.axis_height", "pad spacing"
LOG = {
    "skew up": "skew_up", "skew left": "skew_left", "contact up": "contact_up",
    "contact left": "contact_left", "log length": "distance",
}  # fmt: skip
MACHINE = {"relief pressure": PRESSURE, "axis height": HEIGHT, "pad spacing": SPACING}
SLIDERS = LOG | MACHINE
KINDS = {
    "skew up": Dimension.ANGLE, "skew left": Dimension.ANGLE, "relief pressure": Dimension.PRESSURE,
}  # fmt: skip

READ = """async () => {
    await new Promise(requestAnimationFrame);
    const page = document.querySelector('.splitcalc-page');
    const texts = (name) => [...page.querySelectorAll(name)].map((one) => one.textContent);
    const part = (track, tag, side) => {
        const found = track.querySelector(tag);
        return found && parseFloat(found.style[side]);
    };
    const bar = (set) => {
        const track = set.nextElementSibling;
        return {
            set: set.textContent, margin: track.nextElementSibling.textContent,
            limit: part(track, 's', 'left'), now: part(track, 'b', 'width'),
            worst: part(track, 'i', 'width'), pinned: part(track, 'u', 'left'),
        };
    };
    return {
        bars: [...page.querySelectorAll('.sc-row')].map(
            (row) => [...row.querySelectorAll('.sc-set')].map(bar)),
        section: texts('.splitcalc-side svg text'), labels: texts('.splitcalc-labels span'),
        sentence: texts('.splitcalc-sentence')[0], message: texts('.splitcalc-message').join(' '),
        past: texts('.splitcalc-past').join(' '), equations: texts('.splitcalc-equations')[0],
        errors: texts('.splitcalc-number .splitcalc-error'), picture: page.querySelector('img').src,
        classes: [...page.classList],
    };
}"""
PNG = """async (name) => {
    const picture = await fetch(document.querySelector(name ?? '.splitcalc-page img').src);
    return btoa(String.fromCharCode(...new Uint8Array(await picture.arrayBuffer())));
}"""


class BeamPage:
    """The page, and what a person has set in it."""

    def __init__(self, notebook: Any) -> None:
        self.notebook, self.page = notebook, notebook.page
        self.path = notebook.path.with_name("machine.toml")
        self.draft = self.path.with_name(".machine.toml.draft")
        self.text = self.path.read_text(encoding="utf-8")

    def begin(self) -> None:
        """The file as it was, the page as the file has it."""
        self.path.write_text(self.text, encoding="utf-8")
        self.choose("web, bent across")
        self.click("stress", "US", "back to file")
        if self.page.get_by_role("button", name="unpin curves").is_visible():
            self.click("unpin curves")
        self.page.locator(".splitcalc-page").evaluate("page => page.scrollIntoView()")
        self.as_in_file()
        self.shows()

    def as_in_file(self) -> None:
        """What is set: the longest log, square and on the axis, and nothing else."""
        self.read_file()
        self.units, self.view, self.pinned = "us", "stress", ()
        self.values: dict[str, Any] = dict.fromkeys(LOG.values(), 0.0) | {
            "state": "first bite", "pivot": "fixed tool",
            "distance": float(self.machine.numbers().longest),
        }  # fmt: skip

    def read_file(self) -> None:
        """The machine as its file has it; the log stays."""
        self.machine, self.changes = load(self.path), dict[str, str]()
        numbers = self.machine.numbers()
        self.spacing = float(numbers.rear_pad - numbers.front_pad)

    def click(self, *names: str) -> None:
        for name in names:
            self.page.get_by_role("button", name=name, exact=True).click()

    def choose(self, check: str) -> None:
        """Clicks a check's name and waits for its equations."""
        self.click(check)
        self.page.locator("button.mod-active", has_text="equations").wait_for()
        self.view = "equations"

    def field(self, label: str) -> Any:
        boxes = self.page.locator(".splitcalc-number")
        return boxes.filter(has=self.page.get_by_text(label)).locator("input")

    def type(self, label: str, text: str) -> None:
        self.field(label).fill(text)
        self.field(label).press("Enter")

    def until(self, wrong: Callable[[dict[str, Any]], object]) -> dict[str, Any]:
        """What is on the page, as soon as nothing is wrong with it."""
        for _ in range(FRAMES):
            read = self.page.evaluate(READ)
            if not (found := wrong(read)):
                return read
        pytest.fail(str(found))

    def says(self, text: str) -> None:
        """Waits for a message under the buttons."""
        self.until(lambda read: text not in read["message"] and (text, read["message"]))

    def space(self, spacing: float, units: str | None = None) -> None:
        """The pads stand so far apart [m], the front pad where it is, as the file would say it."""
        units = units or self.units
        per, unit = factor(Dimension.LENGTH, units), unit_text(Dimension.LENGTH, units)
        rear = (self.machine.document.sled.front_pad.si + spacing) * per
        self.spacing, self.changes["sled.rear_pad"] = spacing, f"{rear:.9g} {unit}"

    def per(self, label: str) -> float:
        return factor(KINDS.get(label, Dimension.LENGTH), self.units)

    def follow(self, label: str) -> float:
        """Waits until the field says where the handle stands; the page shows all that follows."""
        value = self.notebook.slider_value(label)
        kind = KINDS.get(label, Dimension.LENGTH)
        near = pytest.approx(value / self.per(label), rel=1e-9, abs=1e-12)
        field = self.field(label).input_value
        self.until(lambda _: parse(field(), kind) != near and (label, value, field()))
        text = field()
        if label in LOG:
            self.values[LOG[label]] = parse(text, kind)
        elif label == "pad spacing":
            self.space(parse(text, kind))
        else:
            self.changes[MACHINE[label]] = text
        self.shows()
        return value

    def log(self) -> Log:
        v = self.values
        return log_through(
            pivot=v["pivot"], distance=v["distance"], left=v["contact_left"], up=v["contact_up"],
            tan_left=math.tan(v["skew_left"]), tan_up=math.tan(v["skew_up"]),
        )  # fmt: skip

    def shows(self, **values: object) -> tuple[Present, list[Finding]]:
        """Waits until the page shows the values, and what they give outside of it."""
        self.values |= values
        machine = self.machine.changed(self.changes)
        numbers, document = machine.numbers(), machine.document
        now = present(ALL, numbers, self.log(), self.units, self.values["state"])
        worst = findings(ALL, numbers, self.units)
        told = {
            **self.values, "beam.section": machine.section_name, "beam.steel": document.beam.steel,
            PRESSURE: document.cylinder.relief_pressure.si,
            HEIGHT: document.cylinder.axis_height.si,
            SPACING: self.spacing, **self.changes,
            "view": self.view, "units": self.units,
        }  # fmt: skip
        assert self.notebook.picture_inputs(**told).keys() == told.keys()
        self.until(lambda read: list(differences(read, now, worst, self.pinned, self.units)))
        return now, worst


def differences(
    read: Mapping[str, Any], now: Present, worst: Sequence[Finding], pinned: Any, units: Any
) -> Iterator[object]:
    """What the page shows, and what it should."""
    yield from {"splitcalc-stale", "splitcalc-waiting"} & {*read["classes"]}
    yield from read["errors"]
    told = f"This log {this_log(now, units)} All allowed logs: {sentence(worst)}"
    if not read["sentence"].startswith(told):
        yield read["sentence"], told
    if ("; ".join(now.past) not in read["past"]) or bool(now.past) != bool(read["past"]):
        yield read["past"], now.past
    height = f"e = {show(float(now.acting.frame.e), Dimension.LENGTH, units, 3)}"
    if height not in read["labels"]:
        yield read["labels"], height

    top = governing(now.findings)
    station = int(np.abs(now.x - top.x).argmin())
    place = f"section at {show(float(now.x[station]), Dimension.LENGTH, units, 3)}"
    texts = [text.replace(NARROW_SPACE, "").replace(MINUS, "-") for text in read["section"]]
    stresses = [*now.corners.values(), *([] if now.web is None else [now.web])]
    wanted = [float(s[station]) * factor(Dimension.STRESS, units) for s in stresses]
    shown = [float(text.split()[-1]) for text in texts[2:]]
    # Numbers in the section have three digits, and at most one decimal.
    if read["section"][0] != place or shown != pytest.approx(wanted, rel=5.1e-3, abs=0.051):
        yield read["section"], place, wanted

    kinds = {"now": now.findings, "worst": worst, "pinned": pinned}
    used = {
        (kind, f.check.id, f.set): f.utilisation for kind, found in kinds.items() for f in found
    }
    for check, row in zip(ALL, read["bars"], strict=True):
        for name, bar in zip(SETS, row, strict=True):
            for kind in kinds:
                share, u = bar[kind], used.get((kind, check.id, name))
                if (share is None) != (u is None):
                    yield check.title, kind, bar, u
                if share is None or u is None:
                    continue
                # The page's lengths have one decimal of a percent.
                near = 0.06 * (1 + u) / bar["limit"]
                if share / bar["limit"] != pytest.approx(u, abs=near):
                    yield check.title, kind, bar, u
            margin = margin_text(used["worst", check.id, name])
            if (bar["set"], bar["margin"]) != (name, margin):
                yield bar, name, margin
