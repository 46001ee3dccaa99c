"""Stress along the beam: four corners and the web across, with the limits of what holds."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

import numpy as np
from matplotlib.artist import Artist
from matplotlib.figure import Figure
from matplotlib.patches import Rectangle
from matplotlib.ticker import MaxNLocator
from matplotlib.transforms import blended_transform_factory

from splitcalc.draw import palette
from splitcalc.draw.bands import HEADING_X, Bands, put
from splitcalc.draw.curves import Curves, Style
from splitcalc.draw.labels import FONT, Label
from splitcalc.findings import Finding
from splitcalc.logs.present import Present
from splitcalc.machine.numbers import Numbers
from splitcalc.units import Dimension, factor, number, unit_text

WEB = "web across"
CHECKED = "checked, with distortion"


Lines = Mapping[str, Callable[[Present], Any]]  # stress [Pa] at the stations, by name


class StressPanel:
    """One axes; x and stress in the person's units. `own` lines are a person's, dotted."""

    NOTE = "shaded: near load entry, nominal"

    def __init__(self, figure: Figure, numbers: Numbers, units: Any, own: Lines) -> None:
        self._own = own
        self._mm, self._mpa = factor(Dimension.LENGTH, units), factor(Dimension.STRESS, units)
        axes = figure.add_axes((0, 0, 1, 1))
        axes.set_ylabel(f"stress, {unit_text(Dimension.STRESS, units)} (tension +)", fontsize=FONT)
        axes.yaxis.label.set_verticalalignment("center")
        axes.yaxis.set_label_coords(
            HEADING_X, 0.5, transform=blended_transform_factory(figure.transFigure, axes.transAxes)
        )
        axes.yaxis.set_major_locator(MaxNLocator(8, steps=(1, 2, 5, 10)))
        styles: dict[str, Style] = dict(palette.CORNERS)
        if numbers.section.open:
            styles[WEB] = palette.WEB
        else:
            styles[CHECKED] = palette.WEB
        styles |= dict.fromkeys(own, palette.OWN)
        self._limits = [numbers.f_y / required for required in numbers.required["yield"].values()]
        guides = [sign * limit * self._mpa for limit in self._limits for sign in (1, -1)]
        self.curves = Curves(axes, styles, units, guides)
        self.axes = [axes]
        for guide in guides:
            axes.axhline(guide, color=palette.LIMIT, linewidth=1, zorder=2)
        ways = ("bottom", "top")  # the higher one over its line, the lower under: never on another
        texts = zip(numbers.required["yield"], self._limits, strict=True)
        for way, (name, limit) in zip(ways, sorted(texts, key=lambda t: -t[1]), strict=True):
            value = number(limit, Dimension.STRESS, units, 3)
            axes.annotate(
                f"limit, {name} logs: {value}", (0.006, limit * self._mpa), color=palette.LIMIT,
                xycoords=axes.get_yaxis_transform(), xytext=(0, 2 if way == "bottom" else -3),
                textcoords="offset points", va=way, fontsize=FONT - 0.5, zorder=2,
            )  # fmt: skip
        self.near = [
            Rectangle((0, -1e6), 0, 2e6, facecolor=palette.NEAR_LOAD, alpha=0.07, linewidth=0)
            for _ in range(2)
        ]
        for near in self.near:
            axes.add_patch(near)

    @property
    def moving(self) -> list[Artist]:
        return [*self.near, *self.curves.moving]

    def place(self, bands: Bands) -> None:
        self._room = bands.panel_room
        put(self.curves.axes, self._room)

    def cover(self, worst: Sequence[Finding]) -> None:
        """Limits for what the allowed logs demand, and for the limits of what holds."""
        demands = [f.demand for f in worst if f.demand is not None]
        self.curves.cover(1.05 * float(max([*demands, *self._limits])) * self._mpa)

    def _values(self, now: Present) -> dict[str, np.ndarray]:
        values = {name: stress * self._mpa for name, stress in now.corners.items()}
        if now.web is not None:
            values[WEB] = now.web * self._mpa
        if now.checked is not None:
            values[CHECKED] = now.checked * self._mpa
        for name, line in self._own.items():
            stress = np.asarray(line(now), dtype=float) * self._mpa
            if stress.shape not in ((), now.x.shape):
                raise ValueError(
                    f"{name}: a line needs one value or one a station, {now.x.shape}; "
                    f"it has the shape {stress.shape}"
                )
            values[name] = np.broadcast_to(stress, now.x.shape)
        return values

    def update(self, now: Present) -> bool:
        """Moves the curves; whether what stands still changed with them."""
        numbers, patches = now.numbers, now.acting.frame.patches
        depth = numbers.section.h
        spots = ((patches["rear pad"][0], patches["front pad"][1]), patches["fixed tool"])
        done = numbers.x_start
        for near, (start, end) in zip(self.near, spots, strict=True):
            left = max(start - depth, done)  # the two never overlap: that would be a darker third
            done = min(end + depth, numbers.x_end)
            near.set_x(left * self._mm)
            near.set_width((done - left) * self._mm)
        return self.curves.set(now.x * self._mm, self._values(now))

    def pin(self, now: Present | None) -> None:
        if now is None:
            self.curves.pin(np.array([]), None)
        else:
            self.curves.pin(now.x * self._mm, self._values(now))

    def labels(self, now: Present) -> list[Label]:
        """The curves' names over the log."""
        frame = now.acting.frame
        log = (float(frame.x_A) * self._mm, float(frame.x_B) * self._mm)
        return self.curves.labels(log, self._room)
