"""The machine from the side and from above, with the log and the line of thrust."""

from __future__ import annotations

from typing import Any

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.patches import Polygon

from splitcalc.draw import palette
from splitcalc.draw.bands import HEADING_X, Bands, put
from splitcalc.draw.labels import FONT, HEIGHT
from splitcalc.draw.shapes_of_machine import (
    Shape,
    box,
    cylinder_parts,
    e_place,
    log_body,
    sled_parts,
    tool_parts,
)
from splitcalc.logs.present import Present
from splitcalc.machine.document import Document
from splitcalc.machine.file import Machine
from splitcalc.shapes.section import Section

AXIS = (0, (9, 2, 1.5, 2))  # dash-dot, as drawings mark an axis
DASHED = (0, (5, 3))
ABOVE = ("mount", "sled", "log", "rod", "tube", "tool", "fixed tool")


class MachineViews:
    """Two axes in metres; `update` moves what a log or a slider of the machine moves."""

    def __init__(self, figure: Figure) -> None:
        self.side: Axes = figure.add_axes((0, 0, 1, 1))
        self.above: Axes = figure.add_axes((0, 0, 1, 1))
        for axes in (self.side, self.above):
            axes.set_axis_off()
        self._headings = [
            figure.text(
                HEADING_X, 0, text, rotation=90, ha="center", va="center",
                color=palette.QUIET, fontsize=FONT,
            )
            for text in ("from the side", "from above")
        ]  # fmt: skip
        self.parts = self._make_parts()
        self.lines = self._make_lines()

    def _make_parts(self) -> dict[str, Polygon]:
        looks = {
            "mount": (palette.BRACE, palette.OUTLINE),
            "brace": (palette.BRACE, palette.OUTLINE),
            "rear pad": (palette.OUTLINE, palette.OUTLINE),
            "front pad": (palette.OUTLINE, palette.OUTLINE),
            "sled": (palette.TOOL, palette.OUTLINE),
            "log": (palette.WOOD, palette.BARK),
            "rod": (palette.CYLINDER, palette.OUTLINE),
            "tube": (palette.CYLINDER, palette.OUTLINE),
            "tool": (palette.TOOL, palette.OUTLINE),
            "fixed tool": ("none", palette.OUTLINE),  # its outline, over a log that it has entered
        }
        here = {
            self.side: looks,
            self.above: {k: looks[k] for k in ABOVE},
        }
        parts = {}
        for axes, some in here.items():
            for name, (face, edge) in some.items():
                key = name if axes is self.side else f"{name} from above"
                parts[key] = Polygon(
                    np.zeros((3, 2)), facecolor=face, edgecolor=edge, linewidth=0.8, zorder=2
                )
                axes.add_patch(parts[key])
        return parts

    def _make_lines(self) -> dict[str, Line2D]:
        thin: dict[str, Any] = {"color": palette.OUTLINE, "linewidth": 0.8, "zorder": 3}
        accent: dict[str, Any] = {"color": palette.THRUST, "zorder": 4}
        lines = {
            "cylinder axis": self.side.plot([], [], linestyle=AXIS, **thin)[0],
            "e": self.side.plot([], [], marker="_", markersize=6, **thin)[0],
        }
        for axes, where in ((self.side, ""), (self.above, " from above")):
            lines |= {
                f"line of thrust{where}": axes.plot(
                    [], [], linestyle=DASHED, linewidth=1.1, **accent
                )[0],
                f"thrust{where}": axes.plot(
                    [], [], linewidth=2.2, marker="o", markersize=5.5, **accent
                )[0],
            }
        return lines

    @property
    def moving(self) -> list[Artist]:
        return [*self.parts.values(), *self.lines.values()]

    def place(self, bands: Bands, doc: Document, section: Section) -> None:
        """Sets the views' places and limits, and draws what stands still in them."""
        self._bands = bands
        for axes, room, limits, heading in (
            (self.side, bands.side_room, bands.z, self._headings[0]),
            (self.above, bands.above_room, bands.y, self._headings[1]),
        ):
            put(axes, room)
            axes.set(xlim=bands.x, ylim=limits)
            heading.set_y(1 - (room.top + room.bottom) / 2 / HEIGHT)
            for artist in [a for a in axes.get_children() if a.get_gid() == "still"]:
                artist.remove()
        self._draw_still(doc, section)

    def _draw_still(self, doc: Document, section: Section) -> None:
        ends = (doc.beam.rear_end.si, doc.beam.front_end.si)
        z_t, z_b = float(section.z_t), float(section.z_b)
        tool = tool_parts(doc.fixed_tool, doc.fixed_tool.edge_x.si, z_t, self._bands.pixel)
        t_b = _bottom_wall(section)
        weld = (doc.fixed_tool.weld_start.si, doc.fixed_tool.weld_end.si)

        def fill(axes: Axes, shape: Shape, face: str, edge: str = "none") -> None:
            still = Polygon(shape, facecolor=face, edgecolor=edge, linewidth=0.8, gid="still")
            axes.add_patch(still)

        def line(axes: Axes, x: Any, v: Any, **look: Any) -> None:
            axes.plot(x, v, gid="still", color=palette.OUTLINE, **look)

        fill(self.side, box(ends, (z_b, z_t)), palette.BEAM)
        for zone in doc.beam.closed_zones:
            fill(self.side, box((zone.start.si, zone.end.si), (z_b, z_t)), palette.BRACE)
        fill(self.side, box(ends, (z_t - float(section.t_f), z_t)), palette.FLANGE)
        fill(self.side, box(ends, (z_b, z_b + t_b)), palette.FLANGE)
        for stiffener in doc.beam.stiffeners:
            x = stiffener.x.si
            top, low = z_t - float(section.t_f), z_b + t_b
            if stiffener.kind == "part-depth pair":
                low = (top + low) / 2
            line(self.side, [x, x], [low, top], linewidth=1.6, solid_capstyle="butt")
        line(self.side, ends, [0, 0], linestyle=AXIS, linewidth=0.8)
        wide = max(float(section.y_t), float(section.y_b))
        fill(self.above, box(ends, (-wide, wide)), palette.BEAM)
        fill(self.above, box(ends, (-float(section.y_t), float(section.y_t))), palette.BEAM,
             palette.FLANGE)  # fmt: skip
        self.parts["fixed tool"].set_xy(tool["side"])
        self.parts["fixed tool from above"].set_xy(tool["above"])
        fill(self.side, tool["brace"], palette.BRACE, palette.OUTLINE)
        fill(self.side, tool["side"], palette.TOOL, palette.OUTLINE)
        fill(self.above, tool["above"], palette.TOOL, palette.OUTLINE)
        line(self.side, weld, [z_t, z_t], linewidth=3, solid_capstyle="butt")
        line(self.above, ends, [0, 0], linestyle=AXIS, linewidth=0.8)

    def update(self, machine: Machine, now: Present) -> None:
        """Moves all parts to where this machine and this log put them."""
        doc, frame, log = machine.document, now.acting.frame, now.log
        z_t, bands = float(now.numbers.section.z_t), self._bands
        cylinder = cylinder_parts(doc, frame, bands)
        sled = sled_parts(doc, frame, bands, z_t)
        tool = tool_parts(doc.moving_tool, float(frame.x_A), z_t, bands.pixel)
        side, above = log_body(now, doc, bands, z_t)
        shapes = sled | {"log": side, "log from above": above, "brace": tool["brace"]}
        shapes |= {"tool": tool["side"], "tool from above": tool["above"]}
        for name, (one, other) in cylinder.items():
            shapes |= {name: one, f"{name} from above": other}
        for name, shape in shapes.items():
            self.parts[name].set_xy(shape)

        e = float(frame.e)
        self.lines["cylinder axis"].set_data([bands.x[0], doc.fixed_tool.edge_x.si], [e, e])
        at = e_place(doc, bands.pixel)
        self.lines["e"].set_data([at, at], [0.0, e])
        x = np.array([frame.x_A, frame.x_B], dtype=float)
        far = np.array(bands.x)
        for where, v in (
            ("", np.array([e + log.a_z, e + log.b_z], dtype=float)),
            (" from above", np.array([log.a_y, log.b_y], dtype=float)),
        ):
            self.lines[f"thrust{where}"].set_data(x, v)
            slope = (v[1] - v[0]) / (x[1] - x[0])
            self.lines[f"line of thrust{where}"].set_data(far, v[0] + slope * (far - x[0]))


def _bottom_wall(section: Section) -> float:
    """Thickness of the bottom flange or plate; a hollow section's is that of its top."""
    low = min(p.z - p.half for p in section.parts if p.half)
    flat = [2 * p.half for p in section.parts if p.half and abs(p.z - p.half - low) < 1e-9]
    thin = [float(t) for t in flat if t < 0.5 * section.h]
    return thin[0] if thin else float(section.t_f)
