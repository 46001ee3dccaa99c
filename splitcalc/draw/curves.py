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
BESIDE = 8  # css px from the place where names are wanted: a mark may stand there


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
        most = max(float(np.nanmax(np.abs(values[name]), initial=0.0)) for name in self.lines)
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

    def labels(self, x: tuple[float, float], room: Room) -> list[Label]:
        """The curves' names, in their colours, beside them where they lie furthest apart.

        That is looked for from one x to the other. Names keep their curves' order, one line
        apart, each as near to its curve as the others and the guides let it.
        """
        wide = CHARACTER * max(len(name) for name in self.lines)
        ends = [spot(self.axes, one, 0.0)[0] for one in x]
        low, high = room.left, room.right - wide
        start, end = (max(min(one + BESIDE, high), low) for one in ends)
        across = np.linspace(start, end, 9)
        places = np.array([self._at(place, room) for place in across])
        known = {
            name: np.interp(places, self._x, self._values[name])
            for name in self.lines
            if np.isfinite(self._values[name]).all()
        }
        apart_by = np.ptp(np.array([known[n] for n in known]), axis=0)
        k = int(apart_by.argmax())
        spots = sorted(
            (spot(self.axes, places[k], values[k])[1], order, name)
            for order, (name, values) in enumerate(known.items())
        )
        heights = _spread([y for y, _, _ in spots], room)
        guides = [spot(self.axes, places[k], value)[1] for value in self.guides]
        return apart(
            (
                label(name, (across[k], _off(y, guides)), str(self.lines[name].get_color()),
                      "left", room)
                for y, (_, _, name) in zip(heights, spots, strict=True)
            ),
            room,
        )  # fmt: skip

    def _at(self, across: float, room: Room) -> float:
        """The x at a place across the picture. [css px]"""
        low, high = self.axes.get_xlim()
        return low + (high - low) * (across - room.left) / (room.right - room.left)


def _spread(heights: Sequence[float], room: Room) -> list[float]:
    """Heights in order and one line apart, near the given ones, inside the room. [css px]

    Names that would overlap stand together about the middle of their curves.
    """
    groups: list[list[float]] = []
    for height in heights:
        groups.append([height])
        while len(groups) > 1 and _top(groups[-1]) < _top(groups[-2]) + LINE * len(groups[-2]):
            last = groups.pop()
            groups[-1] += last
    out = [_top(group) + LINE * k for group in groups for k in range(len(group))]
    over = max(0.0, out[-1] - (room.bottom - LINE / 2))
    return [y - over for y in out]


def _top(group: Sequence[float]) -> float:
    """Height of the first of a group's names."""
    return sum(group) / len(group) - LINE * (len(group) - 1) / 2


def _off(y: float, guides: Sequence[float]) -> float:
    """The height, moved off a guide that would strike the name through."""
    for guide in guides:
        if abs(guide - y) < LINE / 2:
            return guide + (LINE / 2 if y > guide else -LINE / 2)
    return y


def _plain(value: float, units: Any) -> str:
    text = f"{value:,.6g}".replace("-", MINUS)
    return text.replace(",", NARROW_SPACE) if units == "si" else text
