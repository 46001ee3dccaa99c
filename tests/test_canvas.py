import gc
import io
import subprocess
import sys
import weakref

import numpy as np
import pytest
from matplotlib.artist import Artist
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.patches import Rectangle
from PIL import Image

from splitcalc.draw import png
from splitcalc.draw.canvas import Canvas

X = np.linspace(0.0, 1.2, 50)


def draw_panels(figure: Figure) -> list[Artist]:
    """Two panels; answers what moves in them, which lies above all that stands still."""
    curves, bars = figure.subplots(1, 2, gridspec_kw={"wspace": 0.5})  # no text on a curve
    curves.set(xlim=(0.0, 1.2), ylim=(-2.0, 2.0), xlabel="Place (m)", title="Stress")
    curves.axhline(0.5, color="0.5")
    bars.set(xlim=(0.0, 3.0))
    bars.axvline(1.0, color="red")
    lines = [curves.plot(X, 0 * X, zorder=10)[0] for _ in range(3)]
    return [*lines, *bars.barh(["flange", "web"], [1.0, 2.0], zorder=10, alpha=0.5)]


def move(moving: list[Artist], phase: float) -> None:
    for k, line in enumerate(moving[:3]):
        line.set_ydata(np.sin(5 * X + k + phase))
    for k, bar in enumerate(moving[3:]):
        bar.set_width(1.5 + np.sin(k + phase))


def full_drawing(scale: int, phase: float, top: float = 2.0) -> np.ndarray:
    """The same panels as matplotlib draws them, all at once, on a new figure."""
    figure = Figure(figsize=(400 / 96, 300 / 96), dpi=96 * scale)
    agg = FigureCanvasAgg(figure)
    move(draw_panels(figure), phase)
    figure.axes[0].set_ylim(-2.0, top)
    agg.draw()
    return np.asarray(agg.buffer_rgba())[..., :3]


def pixels(picture: bytes) -> np.ndarray:
    with Image.open(io.BytesIO(picture)) as image:
        return np.asarray(image)


@pytest.mark.parametrize("scale", [1, 2])
def test_every_picture_equals_a_full_drawing(scale: int) -> None:
    canvas = Canvas(400, 300, scale)
    moving = draw_panels(canvas.figure)
    canvas.moving(*moving)
    for phase in (0.0, 1.0, 4.0):  # more than one: nothing of the one before may stay
        move(moving, phase)
        np.testing.assert_array_equal(pixels(canvas.render({})), full_drawing(scale, phase))


def test_limits_that_grew_show_after_a_thaw() -> None:
    canvas = Canvas(400, 300)
    moving = draw_panels(canvas.figure)
    canvas.moving(*moving)
    canvas.render({})
    canvas.figure.axes[0].set_ylim(-2.0, 2000.0)
    move(moving, 1.0)
    canvas.thaw()
    np.testing.assert_array_equal(pixels(canvas.render({})), full_drawing(1, 1.0, top=2000.0))


@pytest.mark.parametrize("width", [1, 333, 900, 1279])
@pytest.mark.parametrize("scale", [1, 2])
def test_picture_has_the_size_asked_for(width: int, scale: int) -> None:
    picture = pixels(Canvas(width, 521, scale).render({}))
    assert picture.shape == (521 * scale, width * scale, 3)


@pytest.mark.parametrize("upper_first", [True, False])
def test_higher_zorder_is_drawn_above(upper_first: bool) -> None:
    canvas = Canvas(40, 40)
    upper = Rectangle((0, 0), 1, 1, color="blue", zorder=2)
    lower = Rectangle((0, 0), 1, 1, color="red", zorder=1)
    for patch in (upper, lower):
        canvas.figure.add_artist(patch)
    canvas.moving(*([upper, lower] if upper_first else [lower, upper]))
    assert pixels(canvas.render({}))[20, 20].tolist() == [0, 0, 255]


def test_picture_carries_its_inputs() -> None:
    canvas = Canvas(40, 40)
    canvas.render({"offset": 0.1})
    assert png.read_inputs(canvas.render({"offset": 0.2})) == {"offset": 0.2}


def test_notebook_shows_the_last_picture_in_css_pixels() -> None:
    canvas = Canvas(40, 30, scale=2)
    assert canvas._repr_png_() is None
    canvas.render({"offset": 0.1})
    last = canvas.render({"offset": 0.2})
    assert canvas._repr_png_() == (last, {"width": 40, "height": 30})


def test_pictures_add_nothing_to_the_figure() -> None:
    canvas = Canvas(400, 300)
    moving = draw_panels(canvas.figure)
    canvas.moving(*moving)
    canvas.render({})
    before = len(canvas.figure.findobj())
    for phase in range(3):
        move(moving, phase)
        canvas.render({})
    assert len(canvas.figure.findobj()) == before


def test_figure_goes_with_its_canvas() -> None:
    canvas = Canvas(400, 300)
    canvas.moving(*draw_panels(canvas.figure))
    canvas.render({})
    figure = weakref.ref(canvas.figure)
    del canvas
    gc.collect()
    assert figure() is None


def test_pyplot_is_not_imported() -> None:
    code = "import sys, splitcalc.draw.canvas; sys.exit('matplotlib.pyplot' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
