"""Texts that move: the page lays them over the picture, where they cost nothing to draw."""

from __future__ import annotations

from collections.abc import Iterable
from typing import NamedTuple

from matplotlib.axes import Axes

WIDTH, HEIGHT = 600, 560  # of the picture, css pixels
FONT = 9  # points
CHARACTER, LINE = 6.2, 13.0  # css pixels of an average character of that size, and of a line
STARTS = {"left": 0.0, "middle": 0.5, "right": 1.0}  # of its width, what lies left of the point


class Label(NamedTuple):
    """A text at a point, fractions of the picture from its top left.

    `side` tells which end of the text stands at x: its "left" end, its "right" end or its
    "middle"; y is its middle height.
    """

    text: str
    x: float
    y: float
    color: str
    side: str

    @property
    def box(self) -> tuple[float, float, float, float]:
        """Left, top, right, bottom, as wide as an average text of so many characters. [css px]"""
        wide = CHARACTER * len(self.text)
        left, middle = self.x * WIDTH - STARTS[self.side] * wide, self.y * HEIGHT
        return left, middle - LINE / 2, left + wide, middle + LINE / 2


class Room(NamedTuple):
    """Where labels may lie. [css px]"""

    left: float
    top: float
    right: float
    bottom: float


def spot(axes: Axes, x: float, y: float) -> tuple[float, float]:
    """A point of the axes, in css pixels from the picture's top left."""
    # by hand: matplotlib's transforms take thirty times as long, and a tick asks for some thirty
    (left, right), (low, high), box = axes.get_xlim(), axes.get_ylim(), axes.get_position()
    across = box.x0 + (x - left) / (right - left) * box.width
    up = box.y0 + (y - low) / (high - low) * box.height
    return float(across) * WIDTH, (1 - float(up)) * HEIGHT


def label(text: str, at: tuple[float, float], color: str, side: str, room: Room) -> Label:
    """A label at a point in css pixels, moved as little as it takes to lie in the room."""
    before = STARTS[side] * CHARACTER * len(text)
    after = CHARACTER * len(text) - before
    x = max(min(at[0], room.right - after), room.left + before)
    y = max(min(at[1], room.bottom - LINE / 2), room.top + LINE / 2)
    return Label(text, x / WIDTH, y / HEIGHT, color, side)


def apart(labels: Iterable[Label], room: Room) -> list[Label]:
    """The labels, each moved up or down by the least that clears those before it.

    One that finds no free place in the room is left out: half a word helps nobody.
    """
    placed: list[Label] = []
    for one in labels:
        beside = [other for other in placed if _meet(one, other, 0, 2)]
        heights = [one.y, *(o.y + way * (LINE + 0.5) / HEIGHT for o in beside for way in (1, -1))]
        free = [
            y
            for y in heights
            if room.top - 0.01 <= y * HEIGHT - LINE / 2
            and y * HEIGHT + LINE / 2 <= room.bottom + 0.01
            and not any(_meet(one._replace(y=y), other, 1, 3) for other in beside)
        ]
        if free:
            placed.append(one._replace(y=min(free, key=lambda y: abs(y - one.y))))
    return placed


def _meet(one: Label, other: Label, low: int, high: int) -> bool:
    a, b = one.box, other.box
    return a[low] < b[high] and b[low] < a[high]
