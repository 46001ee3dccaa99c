"""The picture of the main beam: the machine from the side and from above, and what acts in it."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from types import MappingProxyType
from typing import Any

from matplotlib.lines import Line2D
from matplotlib.ticker import MaxNLocator
from matplotlib.transforms import blended_transform_factory

from splitcalc.draw import palette
from splitcalc.draw.action_panel import ActionPanel
from splitcalc.draw.bands import TOP, bands_of
from splitcalc.draw.canvas import Canvas
from splitcalc.draw.labels import FONT, HEIGHT, WIDTH, Label, Room, label, spot
from splitcalc.draw.machine_views import MachineViews
from splitcalc.draw.stress_panel import Lines, StressPanel
from splitcalc.draw.view_labels import view_labels
from splitcalc.findings import Finding
from splitcalc.logs.present import Present
from splitcalc.logs.report import governing
from splitcalc.machine.file import Machine
from splitcalc.units import Dimension, factor, unit_text

GOVERNS = "governs here"


class MainBeamPicture:
    """Built once for a machine's section, steel and tools; `render` moves all that moves.

    Parameters
    ----------
    machine : its beam and fixed tool are drawn once
    now : the first log; it sets the axis limits while `worst` is empty
    worst : findings at the worst allowed logs; they set the axis limits
    units : "si" or "us"
    panel : "stress" or "actions", what is drawn under the views
    own : more lines along the beam, stress [Pa] at the stations, by name
    scale : pixels along a css pixel; 2 for print
    """

    def __init__(
        self,
        machine: Machine,
        now: Present,
        worst: Sequence[Finding],
        units: Any,
        panel: str,
        own: Lines = MappingProxyType({}),
        scale: int = 1,
    ) -> None:
        self._units = units
        self._mm = factor(Dimension.LENGTH, units)
        self.canvas = Canvas(WIDTH, HEIGHT, scale)
        figure = self.canvas.figure
        self.views = MachineViews(figure)
        self.panel: StressPanel | ActionPanel = (
            ActionPanel(figure, now.numbers, units)
            if panel == "actions"
            else StressPanel(figure, now.numbers, units, own)
        )
        axes = self.panel.axes[-1]
        note = f"   ({self.panel.NOTE})" if self.panel.NOTE else ""
        unit = unit_text(Dimension.LENGTH, units)
        axes.set_xlabel(f"along the beam from the rear mount, {unit}{note}")
        axes.xaxis.label.set_fontsize(FONT)
        axes.xaxis.set_major_locator(MaxNLocator(9, steps=(1, 2, 5, 10)))
        self.mark = Line2D(
            [], [], color=palette.INK, linewidth=1.1,
            transform=blended_transform_factory(self.views.side.transData, figure.transFigure),
            zorder=5,
        )  # fmt: skip
        figure.add_artist(self.mark)
        self._place(machine, now)
        self.set_worst(worst or now.findings)
        self.canvas.moving(*self.views.moving, *self.panel.moving, self.mark)
        self._shown = (machine, now)
        self._numbers = now.numbers
        self._mark_x: float | None = None

    def _place(self, machine: Machine, now: Present) -> None:
        section = now.numbers.section
        self._bands = bands_of(machine.document, now.numbers)
        self.views.place(self._bands, machine.document, section)
        self.panel.place(self._bands)
        for axes in self.panel.axes:
            axes.set_xlim(*(x * self._mm for x in self._bands.x))
        # The mark keeps off the headings between the axes.
        boxes = [axes.get_position() for axes in self.canvas.figure.axes]
        self._mark_heights = [v for box in boxes for v in (box.y0, box.y1, math.nan)]
        self.canvas.thaw()

    def set_worst(self, worst: Sequence[Finding]) -> None:
        """Other findings at the worst allowed logs, such as those of a changed machine."""
        self.panel.cover(worst)

    def pin(self, now: Present | None) -> None:
        """Leaves the curves of a log behind as thin pale lines; None takes them away."""
        self.panel.pin(now)
        self.canvas.thaw()

    def render(
        self, machine: Machine, now: Present, inputs: Mapping[str, Any], mark: float | None
    ) -> bytes:
        """The picture of one log, as a PNG that carries `inputs`.

        Axis limits stay put for every allowed log; one beyond them steps them up and back.
        `mark` is the governing station [m], None for none.
        """
        self._shown = (machine, now)
        if now.numbers is not self._numbers:
            wanted = bands_of(machine.document, now.numbers)
            if not self._bands.suit(wanted, machine.document, now.numbers):
                self._place(machine, now)
        self._numbers = now.numbers
        self.views.update(machine, now)
        if self.panel.update(now):
            self.canvas.thaw()
        self._mark_x = mark
        place = math.nan if mark is None else mark
        self.mark.set_data([place] * len(self._mark_heights), self._mark_heights)
        return self.canvas.render(inputs)

    def labels(self) -> list[Label]:
        """The texts that move, for what was rendered last; the page lays them over the picture."""
        machine, now = self._shown
        views = view_labels(self.views.side, self._bands, machine.document, now, self._units)
        texts = [*views, *self.panel.labels(now)]
        if self._mark_x is not None:
            across = spot(self.views.side, self._mark_x, 0.0)[0]
            top = Room(0, 0, WIDTH, TOP)
            texts.append(label(GOVERNS, (across, TOP / 2), palette.INK, "middle", top))
        return texts


def still(
    machine: Machine, now: Present, worst: Sequence[Finding], units: Any, panel: str = "stress"
) -> Canvas:
    """One picture with its labels on it, sharp in print; a notebook shows it by itself."""
    picture = MainBeamPicture(machine, now, worst, units, panel, scale=2)
    top = governing(now.findings)
    picture.render(machine, now, {}, None if top is None else top.x)
    figure = picture.canvas.figure
    places = {"left": "left", "right": "right", "middle": "center"}
    texts = [
        figure.text(
            one.x, 1 - one.y, one.text, color=one.color, ha=places[one.side], va="center",
            fontsize=FONT, zorder=6,
        )
        for one in picture.labels()
    ]  # fmt: skip
    picture.canvas.moving(*texts)
    picture.canvas.render({})
    return picture.canvas
