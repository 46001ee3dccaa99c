"""The main-beam page: sliders for one log, the living picture, the sentence."""

from __future__ import annotations

import html
import math
from typing import Any

from ipywidgets import HTML, GridBox, Image, Layout, VBox

from splitcalc.cautions import CAUTIONS, NOT_COVERED
from splitcalc.checks import ALL, NOT_YET
from splitcalc.draw.main_beam import HEIGHT, WIDTH, MainBeamPicture
from splitcalc.findings import Finding, margin_text
from splitcalc.logs.present import OUTSIDE, Present, log_by_ram, present
from splitcalc.logs.report import findings, governing
from splitcalc.logs.words import log_words, sentence, shortfall, still_open
from splitcalc.machine.file import Machine
from splitcalc.machine.numbers import Numbers
from splitcalc.sheet.controls import slider
from splitcalc.sheet.live import Live
from splitcalc.units import Dimension, factor, number, show, unit_text

STALE = "splitcalc-stale"
STYLE = f"<style>.{STALE} img, img.{STALE} {{ opacity: 0.25; filter: grayscale(1); }}</style>"
PAST_GRIP = 1.1  # the slope sliders go this far past the grip, so that its limit can be seen


class MainBeam:
    """The page's parts, for whoever wants to arrange them anew; `page` is all of them."""

    def __init__(self, machine: Machine) -> None:
        self.numbers: Numbers = machine.numbers()
        self.units = machine.units
        self.worst = findings(ALL, self.numbers, self.units)
        self.controls = self._controls()
        self.picture = MainBeamPicture(self.numbers, self.worst, self.units)
        self.image = Image(
            format="png", width=WIDTH, height=HEIGHT,
            layout=Layout(width=f"{WIDTH}px", height=f"{HEIGHT}px", flex="0 0 auto"),
        )  # fmt: skip
        self.sentence = HTML(layout=Layout(width=f"{WIDTH}px", min_height="7.2em"))
        self.values = HTML(layout=Layout(width=f"{WIDTH}px"))
        self.live = Live(self.controls, self._update, self._show_error)
        self.live.draw()
        self.page = VBox(
            [
                HTML(STYLE),
                GridBox(
                    list(self.controls.values()),
                    layout=Layout(grid_template_columns=f"repeat(2, {WIDTH // 2}px)"),
                ),
                self.sentence,
                self.image,
                self.values,
                HTML(_small(_foot(self.numbers.notes)), layout=Layout(width=f"{WIDTH}px")),
            ]
        )

    def _controls(self) -> dict[str, Any]:
        numbers, length = self.numbers, unit_text(Dimension.LENGTH, self.units)
        per = factor(Dimension.LENGTH, self.units)
        us = self.units == "us"
        steep = math.floor(math.degrees(math.atan(PAST_GRIP * numbers.grip)))
        step, digits = (0.05, 2) if us else (1.0, 0)
        contact = numbers.moving
        least = math.ceil(numbers.shortest * per / step) * step
        longest = math.floor(numbers.longest * per / step + 1e-9) * step

        def offset(low: float, high: float, label: str, tooltip: str) -> Any:
            ends = [round(end * per / step) * step for end in (low, high)]
            return slider(
                label=label, unit=length, value=0.0, low=min(ends[0], 0.0),
                high=max(ends[1], 0.0), step=step, digits=digits, tooltip=tooltip,
            )  # fmt: skip

        def angle(label: str, tooltip: str) -> Any:
            return slider(
                label=label, unit="deg", value=0.0, low=-steep, high=steep, step=0.25, digits=2,
                tooltip=tooltip,
            )  # fmt: skip

        return {
            "skew_up": angle("skew up", "slope of the thrust, up towards the fixed tool"),
            "skew_left": angle(
                "skew left", "slope of the thrust, left; the log stays centred on the fixed tool"
            ),
            "offset_up": offset(
                contact.low, contact.high, "ram offset up",
                "where the log meets the moving tool, above the cylinder's axis",
            ),
            "log_length": slider(
                label="log length", unit=length, value=longest, low=least, high=longest,
                step=step, digits=digits, tooltip="distance of the contact points at first bite",
            ),
        }  # fmt: skip

    def _present(self, values: dict[str, float]) -> Present:
        per = factor(Dimension.LENGTH, self.units)
        log = log_by_ram(
            length=values["log_length"] / per,
            up=values["offset_up"] / per,
            tan_up=math.tan(math.radians(values["skew_up"])),
            tan_left=math.tan(math.radians(values["skew_left"])),
        )
        return present(ALL, self.numbers, log, self.units)

    def _update(self, values: dict[str, float]) -> None:
        now = self._present(values)
        self.image.value = self.picture.render(now, values)
        self.image.remove_class(STALE)
        self.sentence.value = _paragraph(self._words(now))
        self.values.value = _table([f for f in now.findings if f.applies])

    def _words(self, now: Present) -> str:
        worst = governing(now.findings)
        if worst is None or worst.utilisation is None or worst.log is None:
            return "Nothing can be given for this log."
        where = show(worst.x, Dimension.LENGTH, self.units, 3)
        kind = f"{log_words(worst.log, self.units)}"
        if now.set == OUTSIDE:
            kind += "; <b>not an allowed log</b>, judged as an extreme one"
        return (
            f"<b>This log</b> ({kind}): {html.escape(worst.check.title)} governs and "
            f"{shortfall(worst.utilisation)}, at x = {where}. "
            f"<b>All allowed logs</b>: {html.escape(sentence(self.worst))}"
            f"{_small(still_open(NOT_YET))}"
        )

    def _show_error(self, error: Exception) -> None:
        self.image.add_class(STALE)
        text = html.escape(f"{error}" or type(error).__name__)
        self.sentence.value = _paragraph(f"<b>No result for these values:</b> {text}")


def _paragraph(text: str) -> str:
    return f"<div style='line-height:1.4'>{text}</div>"


def _small(text: str) -> str:
    return f"<div style='line-height:1.35;font-size:85%;opacity:0.8'>{html.escape(text)}</div>"


def _foot(notes: tuple[str, ...]) -> str:
    noted = "".join(f"Note: {note}. " for note in notes)
    return f"{noted}{CAUTIONS} Not covered: {'; '.join(NOT_COVERED)}."


def _table(results: list[Finding]) -> str:
    rows = [
        "<tr>"
        + "".join(
            f"<td style='text-align:{side};padding:0 1em 0 0'>{html.escape(text)}</td>"
            for side, text in (
                ("left", f"{f.check.title}, {f.set}"),
                ("right", show(f.demand, f.check.dimension, f.units, 3)),
                ("right", f"{show(f.capacity, f.check.dimension, f.units, 3)} / "
                 f"{number(f.required_factor, Dimension.NUMBER, f.units, 3)}"),
                ("right", f"{f.utilisation:.3f}"),
                ("right", margin_text(f.utilisation)),
                ("left", f"{show(f.x, Dimension.LENGTH, f.units, 3)}, {f.place}"),
            )
        )
        + "</tr>"
        for f in results
    ]  # fmt: skip
    names = ("this log", "demand", "limit / factor", "utilisation", "margin", "where")
    head = "".join(f"<th style='text-align:left;padding:0 1em 0 0'>{n}</th>" for n in names)
    return f"<table><tr>{head}</tr>{''.join(rows)}</table>"
