"""The texts of the view from the side that move."""

from __future__ import annotations

from typing import Any

from matplotlib.axes import Axes

from splitcalc.draw import palette
from splitcalc.draw.bands import Bands
from splitcalc.draw.labels import CHARACTER, LINE, Label, Room, apart, label, spot
from splitcalc.draw.shapes_of_machine import e_place
from splitcalc.logs.present import Present
from splitcalc.machine.document import Document
from splitcalc.units import Dimension, show

THRUST = "line of thrust"
INSIDE = 60  # css px: on a log at least so long A and B stand inside it, else outside


def view_labels(side: Axes, bands: Bands, doc: Document, now: Present, units: Any) -> list[Label]:
    """A and B, the line of thrust where it leaves ahead of B, the axis's height."""
    frame, log, room = now.acting.frame, now.log, bands.side_room
    a = spot(side, float(frame.x_A), float(frame.e + log.a_z))
    b = spot(side, float(frame.x_B), float(frame.e + log.b_z))
    way, sides = (1, ("left", "right")) if b[0] - a[0] > INSIDE else (-1, ("right", "left"))
    end = _beside_end(b, (b[1] - a[1]) / (b[0] - a[0]), room)
    accent = palette.THRUST
    return apart(
        [
            label("A", (a[0] + way * 8, a[1] - 10), accent, sides[0], room),
            label("B", (b[0] - way * 8, b[1] - 10), accent, sides[1], room),
            _e_label(side, bands, doc, now, units),
            label(THRUST, end, accent, "right", room),
        ],
        room,
    )


def _e_label(side: Axes, bands: Bands, doc: Document, now: Present, units: Any) -> Label:
    """The axis's height over the centroid: inside the beam, above the tube if it is shallow."""
    section, e = now.numbers.section, float(now.acting.frame.e)
    x = e_place(doc, bands.pixel)
    across, low = spot(side, x, 0.0)
    high = spot(side, x, float(section.z_t - section.t_f))[1]
    y = (low + high) / 2
    if low - high < LINE:
        y = spot(side, x, e + doc.cylinder.bore.si / 2)[1] - LINE / 2 - 1
    text = f"e = {show(e, Dimension.LENGTH, units, 3)}"
    return label(text, (across + 5, y), palette.INK, "left", bands.side_room)


def _beside_end(b: tuple[float, float], slope: float, room: Room) -> tuple[float, float]:
    """Where the line of thrust's name ends: where it leaves, over it, or under it for want of room.

    `b` and the result in css pixels, `slope` of the line on the picture, down positive.
    """
    end, wide = room.right - 2, CHARACTER * len(THRUST)
    if slope:  # the view's upper or lower edge, if the line meets that first
        edge = room.top if slope < 0 else room.bottom
        end = min(end, max(b[0] + (edge - b[1]) / slope, b[0]))
    heights = [b[1] + slope * (x - b[0]) for x in (end - wide, end)]
    over, under = min(heights) - LINE / 2 - 2, max(heights) + LINE / 2 + 2
    return end, over if over - LINE / 2 > room.top else under
