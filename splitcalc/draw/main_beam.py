"""The picture of the main beam: stress along it, and how far each check is used."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.patches import Rectangle
from matplotlib.ticker import MaxNLocator

from splitcalc.draw import palette
from splitcalc.draw.canvas import Canvas
from splitcalc.findings import Finding, margin_text
from splitcalc.logs.present import Present
from splitcalc.machine.numbers import Numbers
from splitcalc.thrust.frame import frame_of
from splitcalc.units import Dimension, factor, number, unit_text

WIDTH, HEIGHT = 840, 480  # beside JupyterLab's folder list on a 1280 px screen
FONT = 9


def ceiling(value: float) -> float:
    """The next of 1, 2, 5, 10 … at or above a value, in few steps: a quiet axis limit."""
    power = 10.0 ** math.floor(math.log10(value))
    return next(power * s for s in (1, 1.5, 2, 3, 4, 5, 6, 8, 10) if power * s >= value * 0.999)


class MainBeamPicture:
    """Built once for a machine; `render` moves what a log moves.

    Parameters
    ----------
    numbers : the machine
    worst : findings at the worst allowed logs, drawn pale
    units : "si" or "us"
    """

    def __init__(self, numbers: Numbers, worst: Sequence[Finding], units: Any) -> None:
        self._numbers = numbers
        self._units = units
        self._mm = factor(Dimension.LENGTH, units)
        self._mpa = factor(Dimension.STRESS, units)
        self.canvas = Canvas(WIDTH, HEIGHT)
        self._stress, self._use = self.canvas.figure.subplots(2, 1, height_ratios=(2.9, 1))
        demands = [f.demand for f in worst if f.demand is not None]
        limits = [numbers.f_y / required for required in numbers.required["yield"].values()]
        self._tops = (
            ceiling(1.05 * max(*demands, *limits) * self._mpa),
            ceiling(max([1.2, *(f.utilisation or 0.0 for f in worst)])),
        )
        self._draw_stress(self._stress)
        self._draw_bars(self._use, worst)
        self._set_tops(*self._tops)
        self.canvas.moving(
            *self._near, *self._limits, *self._lines.values(), *self._bars.values(), self._one
        )

    def _set_tops(self, stress: float, use: float) -> None:
        """Axis limits; they belong to what stands still, so the background is drawn anew."""
        self._shown_tops = (stress, use)
        self._stress.set_ylim(-stress, stress)
        self._use.set_xlim(0, use * 1.13)
        self._use.xaxis.set_major_locator(MaxNLocator(6, steps=(1, 2, 2.5, 5, 10)))
        for text in self._margins:
            text.set_x(use * 1.12)
        self.canvas.thaw()

    def _draw_stress(self, axes: Axes) -> None:
        numbers, units = self._numbers, self._units
        ends = numbers.x_start * self._mm, numbers.x_end * self._mm
        axes.set_xlim(*ends)
        axes.set_xlabel(
            f"along the beam from the rear mount, {unit_text(Dimension.LENGTH, units)}"
            "   (grey: near load entry, stress nominal)"
        )
        axes.set_ylabel(f"stress, {unit_text(Dimension.STRESS, units)} (tension +)")
        _quiet(axes)
        self._near = [
            Rectangle((0, -1e6), 1, 2e6, color=palette.NEAR_LOAD, zorder=0.5) for _ in range(2)
        ]
        for near in self._near:
            axes.add_patch(near)
        self._limits: list[Artist] = [axes.axhline(0, color=palette.QUIET, linewidth=0.8, zorder=1)]
        for name, required in numbers.required["yield"].items():
            limit = numbers.f_y / required * self._mpa
            for sign in (1, -1):
                line = axes.axhline(sign * limit, color=palette.LIMIT, linewidth=1, zorder=1)
                self._limits.append(line)
            value = number(numbers.f_y / required, Dimension.STRESS, units, 3)
            text = axes.text(
                ends[0], limit, f" limit, {name} logs: {value}", color=palette.LIMIT, zorder=1,
                va="bottom", fontsize=FONT - 1,
            )  # fmt: skip
            self._limits.append(text)
        names = [(name, color) for name, (color, _) in palette.CORNERS.items()]
        if numbers.section.open:
            names.append(("web, bent across (no sign)", palette.WEB[0]))
        for k, (name, color) in enumerate(names):
            axes.text(
                0.002 + 0.15 * k, 1.03, name, color=color, transform=axes.transAxes,
                fontsize=FONT, fontweight="bold",
            )  # fmt: skip
        styles = {**palette.CORNERS, "web": palette.WEB}
        self._lines = {
            name: axes.plot([], [], color=color, linestyle=style, linewidth=1.8)[0]
            for name, (color, style) in styles.items()
        }

    def _draw_bars(self, axes: Axes, worst: Sequence[Finding]) -> None:
        rows = {(f.check.id, f.set): len(worst) - 1 - k for k, f in enumerate(worst)}
        axes.set_ylim(-0.6, len(worst) - 0.4)
        _quiet(axes)
        axes.set_xlabel("utilisation (limit at 1)")
        axes.set_yticks(
            list(rows.values()), [f"{f.check.title}, {f.set}" for f in worst], fontsize=FONT
        )
        axes.tick_params(axis="y", length=0)
        axes.spines["left"].set_visible(False)
        self._margins = []
        for f in worst:
            row, u = rows[f.check.id, f.set], f.utilisation
            if u is None:
                words = "does not apply" if not f.applies else "not given"
                axes.text(0.01, row, words, va="center", color=palette.QUIET, fontsize=FONT)
                continue
            color = palette.WORST if u <= 1 else palette.WORST_SHORT
            axes.barh(row, u, height=0.72, color=color)
            text = axes.text(
                0, row, margin_text(u), va="center", ha="right", fontsize=FONT,
                color=palette.INK if u <= 1 else palette.LIMIT,
            )  # fmt: skip
            self._margins.append(text)
        box = axes.transAxes
        axes.text(
            0.0, 1.05, "dark: this log     pale: worst allowed log", color=palette.QUIET,
            fontsize=FONT, transform=box,
        )  # fmt: skip
        axes.text(
            0.995, 1.05, "margin, worst log", color=palette.QUIET, ha="right", fontsize=FONT,
            transform=box,
        )  # fmt: skip
        self._bars = {
            key: Rectangle((0, row - 0.17), 0, 0.34, zorder=2) for key, row in rows.items()
        }
        for bar in self._bars.values():
            axes.add_patch(bar)
        self._one = axes.axvline(1, color=palette.INK, linewidth=1.2, zorder=3)

    def render(self, now: Present, inputs: Mapping[str, Any]) -> bytes:
        """The picture of one log, as a PNG that carries `inputs`.

        Axis limits stay put for every allowed log; one beyond them steps them up and back.
        """
        used = {(f.check.id, f.set): f.utilisation or 0.0 for f in now.findings}
        stresses = [*now.corners.values(), *([] if now.web is None else [now.web])]
        most = max(float(np.abs(stress).max()) for stress in stresses) * self._mpa
        tops = (_step(self._tops[0], most), _step(self._tops[1], max(used.values())))
        if tops != self._shown_tops:
            self._set_tops(*tops)
        depth = self._numbers.section.h
        patches = frame_of(self._numbers, now.log).patches
        spots = (
            (patches["rear pad"][0], patches["front pad"][1]),
            patches["fixed tool"],
        )
        for near, (start, end) in zip(self._near, spots, strict=True):
            near.set_x((start - depth) * self._mm)
            near.set_width((end - start + 2 * depth) * self._mm)
        for name, stress in now.corners.items():
            self._lines[name].set_data(now.x * self._mm, stress * self._mpa)
        if now.web is not None:
            self._lines["web"].set_data(now.x * self._mm, now.web * self._mpa)
        for key, bar in self._bars.items():
            bar.set_width(used.get(key, 0.0))
            bar.set_visible(key in used)
            bar.set_color(palette.PRESENT if used.get(key, 0.0) <= 1 else palette.LIMIT)
        return self.canvas.render(inputs)


def _step(top: float, value: float) -> float:
    return top if value <= top else ceiling(value)


def _quiet(axes: Axes) -> None:
    for side in ("top", "right"):
        axes.spines[side].set_visible(False)
    axes.tick_params(colors=palette.QUIET, labelcolor=palette.INK, labelsize=FONT)
    axes.xaxis.label.set_fontsize(FONT)
    axes.yaxis.label.set_fontsize(FONT)
    for side in ("left", "bottom"):
        axes.spines[side].set_color(palette.QUIET)
