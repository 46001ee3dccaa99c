"""One figure, kept: what stands still is drawn once, what moves is drawn over it each time."""

from collections.abc import Mapping
from typing import Any

import numpy as np
from matplotlib.artist import Artist
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

from splitcalc.draw import png

CSS_DPI = 96  # a css pixel is 1/96 inch, so a font of 9 points has the size it has in the page


class Canvas:
    """A picture of `width` by `height` css pixels, drawn with `scale` pixels along each of them.

    A scale of 2 is sharper on a dense screen only and takes two to three times as long, most of it
    for the PNG; so a picture that follows the hand has 1.

    Draw on `figure` whatever stands still, hand what moves to `moving`, then alternate between
    setting the data of what moves and `render`. Axis limits belong to what stands still. Axes
    stay where they are put: a layout engine would shift panels under a moving curve.

    What moves lands on top of everything that stands still, whatever its zorder says. A limit
    line or a text that must lie above a moving bar is therefore handed to `moving` as well.
    """

    def __init__(self, width: int, height: int, scale: int = 1) -> None:
        self.width = width
        self.height = height
        # Not pyplot's figure: pyplot keeps a reference to each of its figures for ever.
        self.figure = Figure(
            figsize=(width / CSS_DPI, height / CSS_DPI),
            dpi=CSS_DPI * scale,
            facecolor="white",  # opaque: the PNG has no alpha
        )
        self._agg = FigureCanvasAgg(self.figure)
        self._moving: list[Artist] = []
        self._background: Any = None
        self._shown: bytes | None = None

    def moving(self, *artists: Artist) -> None:
        """Takes artists out of the background; `render` draws them, lowest zorder first.

        Artists of the same zorder are drawn in the order in which they were handed over.
        """
        for artist in artists:
            artist.set_animated(True)
        self._moving = sorted([*self._moving, *artists], key=Artist.get_zorder)
        self.thaw()

    def freeze(self) -> None:
        """Draws the background that later pictures begin with."""
        self._agg.draw()
        self._background = self._agg.copy_from_bbox(self.figure.bbox)

    def thaw(self) -> None:
        """Call it after a change to what stands still, such as a limit that grew.

        The next picture draws the background anew.
        """
        self._background = None

    def render(self, inputs: Mapping[str, Any]) -> bytes:
        """The picture as it is now, as a PNG that carries `inputs` (see `png.encode`)."""
        if self._background is None:
            self.freeze()
        self._agg.restore_region(self._background)
        for artist in self._moving:
            self.figure.draw_artist(artist)
        self._shown = png.encode(np.asarray(self._agg.buffer_rgba()), inputs)
        return self._shown

    def _repr_png_(self) -> tuple[bytes, dict[str, int]] | None:
        """The last picture, for a notebook's output, at its size in css pixels."""
        if self._shown is None:
            return None
        return self._shown, {"width": self.width, "height": self.height}
