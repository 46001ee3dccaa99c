"""Internal actions along the beam: five small diagrams."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any, NamedTuple

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from splitcalc.draw import palette
from splitcalc.draw.bands import Bands, put
from splitcalc.draw.curves import Curves, Style
from splitcalc.draw.labels import FONT, Label
from splitcalc.findings import Finding
from splitcalc.logs.present import Present
from splitcalc.logs.report import acting_on
from splitcalc.machine.numbers import Numbers
from splitcalc.stress.bimoment import internal_actions
from splitcalc.thrust.frame import Log
from splitcalc.thrust.statics import Actions
from splitcalc.units import Dimension, factor, unit_text

HEADING = 17  # css px above each diagram
B_FLANGE = "B/h_o"
CLOSED = "closed section: no bimoment"


OPEN_ONLY = {"T_w", B_FLANGE}
KIP = 1000  # lbf


class Diagram(NamedTuple):
    """What one small axes shows: its name, the kind of its values, its curves."""

    words: str
    dimension: Dimension
    styles: Mapping[str, Style]

    def per_si(self, units: Any) -> float:
        """Shown value over SI value; US forces are shown in kip, beside moments in kip·in."""
        return factor(self.dimension, units) / (KIP if self._in_kip(units) else 1)

    def unit(self, units: Any) -> str:
        return "kip" if self._in_kip(units) else unit_text(self.dimension, units)

    def _in_kip(self, units: Any) -> bool:
        return units == "us" and self.dimension is Dimension.FORCE


DIAGRAMS = (
    Diagram("axial force", Dimension.FORCE, {"N": palette.WHOLE}),
    Diagram("shear", Dimension.FORCE, {"V_z": palette.UPRIGHT, "V_y": palette.SIDEWAYS}),
    Diagram("bending", Dimension.MOMENT, {"M_y": palette.UPRIGHT, "M_z": palette.SIDEWAYS}),
    Diagram("torque", Dimension.MOMENT, {"T": palette.WHOLE, "T_w": palette.SHARE}),
    Diagram("bimoment as top-flange moment", Dimension.MOMENT, {B_FLANGE: palette.WHOLE}),
)


class ActionPanel:
    """Five axes above one another; x and actions in the person's units."""

    NOTE = ""

    def __init__(self, figure: Figure, numbers: Numbers, units: Any) -> None:
        self._numbers = numbers
        self._mm = factor(Dimension.LENGTH, units)
        self.curves: list[Curves] = []
        self._units = units
        for diagram in DIAGRAMS:
            axes = figure.add_axes((0, 0, 1, 1))
            styles = {
                name: style
                for name, style in diagram.styles.items()
                if numbers.section.open or name not in OPEN_ONLY
            }
            _heading(axes, diagram, styles, units)
            if not styles:
                axes.set_yticks([])
                axes.spines["left"].set_visible(False)
            self.curves.append(Curves(axes, styles, units))
            axes.tick_params(axis="y", labelsize=FONT - 0.5)
        self.axes = [curves.axes for curves in self.curves]
        for curves in self.curves[:-1]:
            curves.axes.spines["bottom"].set_visible(False)
            curves.axes.tick_params(axis="x", length=0, labelbottom=False)

    @property
    def moving(self) -> list[Artist]:
        return [artist for curves in self.curves for artist in curves.moving]

    def place(self, bands: Bands) -> None:
        room = bands.panel_room
        each = (room.bottom - room.top) / len(self.curves)
        self._rooms = [
            room._replace(top=room.top + k * each + HEADING, bottom=room.top + (k + 1) * each)
            for k in range(len(self.curves))
        ]
        for curves, own in zip(self.curves, self._rooms, strict=True):
            put(curves.axes, own)

    def _values(self, numbers: Numbers, acting: Actions) -> list[dict[str, np.ndarray]]:
        found = {n: v[:, 0] for n, v in internal_actions(numbers, acting).items()}
        if "B" in found:
            found[B_FLANGE] = found["B"] / numbers.section.h_o
        return [
            {n: found[n] * diagram.per_si(self._units) for n in curves.lines if n in found}
            for diagram, curves in zip(DIAGRAMS, self.curves, strict=True)
        ]

    def cover(self, worst: Sequence[Finding]) -> None:
        """Limits for the actions of the worst logs, with some to spare for the other ones."""
        logs = [f.log for f in worst if f.log is not None]
        most = [0.0] * len(self.curves)
        for log in logs:
            offsets = {key: log[f"{key}_m"] for key in ("a_y", "a_z", "b_y", "b_z")}
            acting = acting_on(self._numbers, Log(log["distance_m"], **offsets))
            for k, values in enumerate(self._values(self._numbers, acting)):
                most[k] = max([most[k], *(float(np.abs(v).max()) for v in values.values())])
        for curves, top in zip(self.curves, most, strict=True):
            curves.cover(1.2 * top)

    def update(self, now: Present) -> bool:
        """Moves the curves; whether what stands still changed with them."""
        self._numbers = now.numbers  # a later search is about the machine that is shown
        x, stepped = now.x * self._mm, False
        every = zip(self.curves, self._values(now.numbers, now.acting), strict=True)
        for curves, values in every:
            if curves.lines and curves.set(x, values):
                curves.axes.set_yticks([-curves.shown, 0, curves.shown])
                curves.axes.set_ylim(-1.12 * curves.shown, 1.12 * curves.shown)
                stepped = True
        return stepped

    def pin(self, now: Present | None) -> None:
        every = None if now is None else self._values(now.numbers, now.acting)
        for k, curves in enumerate(self.curves):
            if every is None or now is None:
                curves.pin(np.array([]), None)
            else:
                curves.pin(now.x * self._mm, every[k])

    def labels(self, now: Present) -> list[Label]:
        """None: each diagram is too low for names beside its curves, its heading has them."""
        return []


def _heading(axes: Axes, diagram: Diagram, styles: Mapping[str, Style], units: Any) -> None:
    """What a diagram shows, then the names of its curves in their colours."""
    words = f"{diagram.words}, {diagram.unit(units)}" if styles else CLOSED
    look: dict[str, Any] = {"textcoords": "offset points", "fontsize": FONT}
    last = axes.annotate(
        words, (0, 1), (0, 2), xycoords="axes fraction", va="bottom", color=palette.QUIET, **look
    )
    for name, (color, _) in styles.items():
        last = axes.annotate(
            f"${name}$", (1, 0), (7, 0), xycoords=last, va="bottom", color=color, **look
        )
