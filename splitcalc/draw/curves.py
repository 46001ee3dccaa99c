"""Named curves on one axes whose limits stay put, and step along when a curve goes past."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.ticker import FuncFormatter

from splitcalc.draw import palette
from splitcalc.draw.labels import CHARACTER, FONT, LINE, Label, Room, apart, label, spot
from splitcalc.units import MINUS, NARROW_SPACE

Style = tuple[str, Any]
ROUND = (1, 1.5, 2, 3, 4, 5, 6, 8, 10)
COARSE = (1, 2, 5, 10)
OFF = 4  # css px between the curves and the nearest name


def ceiling(value: float, steps: tuple[float, ...] = ROUND) -> float:
    """The next round number at or above a value: a quiet axis limit."""
    power = 10.0 ** math.floor(math.log10(value))
    return next(power * s for s in steps if power * s >= value * 0.999)


class Curves:
    """Curves over x, symmetric about zero; values in the person's units.

    Parameters
    ----------
    styles : name of each curve: its colour and line style
    units : "si" or "us"
    guides : heights of lines that names keep off
    """

    def __init__(
        self, axes: Axes, styles: Mapping[str, Style], units: Any, guides: Sequence[float] = ()
    ) -> None:
        self.axes = axes
        self.guides = guides
        self.lines = {
            name: axes.plot([], [], color=color, linestyle=style, linewidth=1.8, zorder=3)[0]
            for name, (color, style) in styles.items()
        }
        self._pinned = {
            name: axes.plot([], [], color=color, linestyle=style, linewidth=1.2, alpha=0.4)[0]
            for name, (color, style) in styles.items()
        }
        self._base = self.shown = 1.0
        axes.axhline(0, color=palette.QUIET, linewidth=0.8, zorder=1)
        for side in ("top", "right"):
            axes.spines[side].set_visible(False)
        for side in ("left", "bottom"):
            axes.spines[side].set_color(palette.QUIET)
        axes.tick_params(colors=palette.QUIET, labelcolor=palette.INK, labelsize=FONT)
        axes.tick_params(axis="y", length=3, pad=2)
        axes.yaxis.set_major_formatter(FuncFormatter(lambda v, _: _plain(v, units)))

    @property
    def moving(self) -> list[Artist]:
        return list(self.lines.values())

    def cover(self, most: float) -> None:
        """The limits to keep from now on, for values up to `most`."""
        self._base = ceiling(most) if most > 0 else 1.0

    def set(self, x: np.ndarray, values: Mapping[str, np.ndarray]) -> bool:
        """Moves the curves; whether the limits had to step, up or back."""
        self._x, self._values = x, values
        for name, line in self.lines.items():
            line.set_data(x, values[name])
        most = max(float(np.abs(values[name]).max()) for name in self.lines)
        top = self._base if most <= self._base else ceiling(most, COARSE)
        stepped = top != self.shown
        if stepped:
            self.shown = top
            self.axes.set_ylim(-top, top)
        return stepped

    def pin(self, x: np.ndarray, values: Mapping[str, np.ndarray] | None) -> None:
        """Leaves pale curves behind, or takes them away."""
        for name, line in self._pinned.items():
            # a closed section, pinned, has no web to show beside an open one's
            known = {} if values is None else values
            line.set_data(x, known.get(name, np.full(x.shape, np.nan)))

    def labels(self, x: float, room: Room) -> list[Label]:
        """The curves' names about x: one half over all curves there, one half under them.

        In the order of the curves, in their colours; none lies on a curve or on a guide.
        """
        wide = CHARACTER * max(len(name) for name in self.lines)
        middle = spot(self.axes, x, 0.0)[0]
        middle = max(min(middle, room.right - wide / 2), room.left + wide / 2)
        left, right = (self._at(middle + way * wide / 2, room) for way in (-1, 1))
        over = np.linspace(left, right, 15)
        found = [
            (spot(self.axes, x, values[7])[1], values, name, str(line.get_color()))
            for name, line in self.lines.items()
            for values in (np.interp(over, self._x, self._values[name]),)
        ]
        found.sort(key=lambda item: round(item[0]))  # by the pixel: equal curves keep their order
        every = np.array([values for _, values, _, _ in found])
        top, low = (spot(self.axes, x, value)[1] for value in (every.max(), every.min()))
        half = (len(found) + 1) // 2
        guides = [spot(self.axes, x, value)[1] for value in self.guides]
        places = _stack(top - OFF, -1, half, guides)[::-1]
        places += _stack(low + OFF, 1, len(found) - half, guides)
        return apart(
            (
                label(name, (middle, y), color, "middle", room)
                for (_, _, name, color), y in zip(found, places, strict=True)
            ),
            room,
        )

    def _at(self, across: float, room: Room) -> float:
        """The x at a place across the picture. [css px]"""
        low, high = self.axes.get_xlim()
        return low + (high - low) * (across - room.left) / (room.right - room.left)


def _stack(start: float, way: int, count: int, guides: Sequence[float]) -> list[float]:
    """Middle heights of `count` lines of text, one after the other from `start`, off the guides."""
    out: list[float] = []
    for _ in range(count):
        y = start + way * LINE / 2
        for guide in sorted(guides, reverse=way < 0):
            if abs(guide - y) < LINE / 2 + 1:
                y = guide + way * (LINE / 2 + 1)
        out.append(y)
        start = y + way * (LINE / 2 + 0.5)
    return out


def _plain(value: float, units: Any) -> str:
    text = f"{value:,.6g}".replace("-", MINUS)
    return text.replace(",", NARROW_SPACE) if units == "si" else text
