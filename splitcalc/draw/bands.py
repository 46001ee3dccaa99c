"""How the picture is divided: two views of the machine and a panel, above one another, one x axis.

    |  governs here                       TOP
    |  from the side    to scale
    |  from above       to scale
    |  panel            stress or actions
    |  along the beam                     BOTTOM

Heights of the views come from the machine; the panel has the rest.
"""

from __future__ import annotations

from typing import NamedTuple

from matplotlib.axes import Axes

from splitcalc.draw.labels import HEIGHT, WIDTH, Room
from splitcalc.logs.limits import sideways_reach
from splitcalc.machine.document import Document
from splitcalc.machine.numbers import Numbers
from splitcalc.shapes.section import Section

LEFT, RIGHT, TOP, BOTTOM, GAP = 69, 10, 18, 42, 8  # css px
HEADING_X = 9 / WIDTH  # where upright headings have their middle
EDGE = 12  # css px beside the beam, where the dashed line of thrust leaves
SIDE, ABOVE = (90, 185), (64, 116)  # least and most height of the views, css px
ROOM_ABOVE_AXIS = 1.3  # the cylinder's axis may be dragged up so far before the views change


class Bands(NamedTuple):
    """Limits of the views and what they hold. [m], but for `side` and `above` [css px]

    `pixel` is what one css pixel shows; x, y, z the limits along, across and up; `diameter` of the
    drawn log
    """

    pixel: float
    x: tuple[float, float]
    y: tuple[float, float]
    z: tuple[float, float]
    side: float
    above: float
    diameter: float

    @property
    def side_room(self) -> Room:
        return Room(LEFT, TOP, WIDTH - RIGHT, TOP + self.side)

    @property
    def above_room(self) -> Room:
        top = TOP + self.side + GAP
        return Room(LEFT, top, WIDTH - RIGHT, top + self.above)

    @property
    def panel_room(self) -> Room:
        return Room(LEFT, self.above_room.bottom + GAP + 4, WIDTH - RIGHT, HEIGHT - BOTTOM)

    def suit(self, wanted: Bands, doc: Document, numbers: Numbers) -> bool:
        """Whether cylinder and allowed contacts are still in the picture, and not much too small.

        While they are it stays as it is: nothing jumps under a slider.
        """
        inside = cylinder_top(doc, numbers.section) <= self.z[1]
        inside = inside and sideways_reach(numbers) <= self.y[1]
        return inside and self.pixel <= 1.25 * wanted.pixel


def cylinder_top(doc: Document, section: Section) -> float:
    return float(section.z_t) + doc.cylinder.axis_height.si + 0.6 * doc.cylinder.bore.si


def bands_of(doc: Document, numbers: Numbers) -> Bands:
    """The division for a machine, its scale set by the beam's length, or by its height.

    All contacts of allowed logs are in sight. The drawn log is no input of any check: its diameter
    is the middle of smallest and largest, but no more than suits the views.
    """
    section = numbers.section
    rear, front = doc.beam.rear_end.si, doc.beam.front_end.si
    tools = (doc.moving_tool, doc.fixed_tool)
    top = max(
        cylinder_top(doc, section) + (ROOM_ABOVE_AXIS - 1) * max(doc.cylinder.axis_height.si, 0.0),
        *(section.z_t + tool.bottom.si + tool.height.si for tool in tools),
    )
    across = WIDTH - LEFT - RIGHT
    widths = (2 * section.y_t, 2 * section.y_b, doc.cylinder.bore.si, *(t.width.si for t in tools))
    wide = max(*widths, 2 * sideways_reach(numbers))
    pixel = max(
        (front - rear) / (across - 2 * EDGE),
        (top - section.z_b) / (SIDE[1] - 2 * EDGE),
        wide / (ABOVE[1] - EDGE),
    )
    diameter = min(
        (doc.logs.smallest_diameter.si + doc.logs.largest_diameter.si) / 2,
        (SIDE[1] - 2 * EDGE) * pixel - (section.z_t - section.z_b),
        (ABOVE[1] - 2 * EDGE) * pixel,
    )
    top = max(top, section.z_t + diameter) + EDGE * pixel
    bottom = section.z_b - 4 * pixel
    side = max(SIDE[0], (top - bottom) / pixel)
    above = max(ABOVE[0], max(wide + EDGE * pixel, diameter + 2 * EDGE * pixel) / pixel)
    middle, half = (rear + front) / 2, across * pixel / 2
    return Bands(
        pixel,
        (middle - half, middle + half),
        (-above * pixel / 2, above * pixel / 2),
        (bottom, bottom + side * pixel),
        side,
        above,
        diameter,
    )


def put(axes: Axes, room: Room) -> None:
    """Places axes in a room of the picture."""
    axes.set_position(
        (
            room.left / WIDTH,
            1 - room.bottom / HEIGHT,
            (room.right - room.left) / WIDTH,
            (room.bottom - room.top) / HEIGHT,
        )
    )
