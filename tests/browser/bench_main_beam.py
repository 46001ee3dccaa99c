"""Times the main-beam page in a browser against the stock way, in turn.

The stock way is written as well as it can be: `interact` on stock sliders, the same `present`, a
new figure drawn by the same functions at each step, saved by matplotlib with quick compression and
no cropping, nothing else on the page. A normal run does not collect this file:

    pytest -s tests/browser/bench_main_beam.py

At the end the floor: one slider and a blank picture, nothing computed and nothing drawn. What
JupyterLab and the browser take of themselves on this machine is that.

It asserts that both show the same numbers; times are only printed. Some pixels differ: what moves
is drawn last on our page, in its own order with the rest by matplotlib alone. A frame counts when
the browser is about to paint it. Keys are told to the slider by a timer of the page itself.
"""

import base64
import io
from collections.abc import Sequence
from typing import Any

import nbformat.v4
import numpy as np
import pytest
from PIL import Image

from splitcalc.draw.png import read_inputs
from splitcalc.logs.report import governing
from tests.browser.beam_page import LOG, PNG, BeamPage

pytestmark = [pytest.mark.browser, pytest.mark.benchmark]

RUNS, SINGLE, HELD, EVERY = 3, 30, 90, 1000 / 30  # keys one by one, keys held, ms between these

STOCK = """
import io, json, math
import ipywidgets
from IPython.display import Image, display
from splitcalc.checks import ALL
from splitcalc.draw.main_beam import MainBeamPicture
from splitcalc.logs.present import FIXED, log_through, present
from splitcalc.logs.report import findings, governing
from splitcalc.machine.file import load
from splitcalc.units import INCH

machine = load("machine.toml")
numbers, units = machine.numbers(), machine.units
worst = findings(ALL, numbers, units)

def show(**sliders):
    up, left = (math.radians(sliders[name]) for name in ("skew_up", "skew_left"))
    log = log_through(
        pivot=FIXED, distance=sliders["distance"] * INCH, left=sliders["contact_left"] * INCH,
        up=sliders["contact_up"] * INCH, tan_left=math.tan(left), tan_up=math.tan(up),
    )
    now = present(ALL, numbers, log, units)
    governs = governing(now.findings)
    picture = MainBeamPicture(machine, now, worst, units, "stress")
    picture.canvas.render = lambda _: b""  # it is drawn once, by savefig
    picture.render(machine, now, {}, governs.x)
    for artist in picture.canvas.figure.findobj():
        artist.set_animated(False)
    station = int(abs(now.x - governs.x).argmin())
    corners = [float(values[station]) for values in now.corners.values()]
    file, told = io.BytesIO(), json.dumps({"skew_left": left, "corners": corners})
    picture.canvas.figure.savefig(
        file, format="png", metadata={"inputs": told}, pil_kwargs={"compress_level": 1}
    )
    display(Image(data=file.getvalue(), format="png"))

sliders = {
    name: ipywidgets.FloatSlider(
        value=value, min=low, max=high, step=step, description=name.replace("_", " ")
    )
    for name, (value, low, high, step) in SLIDERS.items()
}
ipywidgets.interact(show, **sliders);
"""
BARE = """
import ipywidgets, numpy as np
from splitcalc.draw import png
from splitcalc.sheet.live import Live
blank = np.full((560, 600, 4), 255, dtype=np.uint8)
slider = ipywidgets.FloatSlider(min=-24, max=24, step=0.2, description="skew left")
image, text = ipywidgets.Image(format="png", width=600, height=560), ipywidgets.HTML()
def update(values):
    image.value, text.value = png.encode(blank, values), str(values)
live = Live({"skew_left": slider}, update, print)
live.draw()
box = ipywidgets.VBox([slider, image, text])
box.add_class("bare")
box
"""
OPTIONS = """() => [...document.querySelectorAll('.splitcalc-number .noUi-target')].slice(0, 5)
    .map((e) => e.noUiSlider).map((s) => [+s.get(), s.options.range.min, s.options.range.max,
        s.options.step])"""
# Tells `count` keys to a handle, one each `every` ms or each after the picture that follows the
# last; answers the times of keys and of new pictures, once no picture came for `quiet` ms.
KEYS = """async ([handle, picture, key, count, every, quiet]) => {
    const keys = [], pictures = [];
    let last = null, watching = true;
    const look = (now) => {
        const image = document.querySelector(picture);
        if (image && image.complete && image.src !== last) {
            last = image.src;
            pictures.push(now);
        }
        if (watching) requestAnimationFrame(look);
    };
    await new Promise((go) => requestAnimationFrame((now) => { look(now); go(); }));
    pictures.pop();
    const pause = (ms) => new Promise((go) => setTimeout(go, ms));
    const tell = () => {
        keys.push(performance.now());
        handle.dispatchEvent(new KeyboardEvent('keydown', {key, bubbles: true, cancelable: true}));
    };
    const start = performance.now();
    for (let k = 0; k < count; k++) {
        tell();
        if (every) await pause(Math.max(0, start + (k + 1) * every - performance.now()));
        else {
            while (pictures.length <= k) await new Promise(requestAnimationFrame);
            await pause(quiet / 3);
        }
    }
    while (performance.now() - Math.max(keys.at(-1), pictures.at(-1) ?? 0) < quiet)
        await pause(20);
    watching = false;
    return [keys, pictures];
}"""


class Way:
    """One way to follow the hand, in a page of its own."""

    def __init__(self, notebook: Any, picture: str) -> None:
        self.notebook, self.page, self.picture = notebook, notebook.page, picture

    def told(self, label: str, key: str, count: int, every: float) -> tuple[np.ndarray, np.ndarray]:
        """Times of keys and of new pictures. [ms]"""
        self.page.bring_to_front()
        handle = self.notebook.slider(label).locator(".noUi-handle").element_handle()
        told = [handle, self.picture, key, count, every, 600]
        keys, pictures = self.page.evaluate(KEYS, told)
        return np.array(keys), np.array(pictures)

    def single(self) -> np.ndarray:
        """Key to first frame with a new picture, one key at a time. [ms]"""
        out = []
        for key in ("ArrowRight", "ArrowLeft"):
            keys, pictures = self.told("skew left", key, SINGLE // 2, 0)
            out += [pictures[pictures > k][0] - k for k in keys]
        return np.array(out)

    def held(self, label: str, key: str) -> tuple[float, float, np.ndarray]:
        """Pictures a second while a key repeats, catch-up after it, gaps between pictures. [ms]

        Catch-up is from the last key, when the hand lets go, to the last new picture.
        """
        keys, pictures = self.told(label, key, HELD, EVERY)
        during = pictures[pictures <= keys[-1]]
        rate = 1000 * len(during) / (keys[-1] - keys[0])
        return rate, pictures[-1] - keys[-1], np.diff(np.append(keys[0], during))


def png(way: Way) -> bytes:
    return base64.b64decode(way.page.evaluate(PNG, way.picture))


def pixels(way: Way) -> np.ndarray:
    return np.asarray(Image.open(io.BytesIO(png(way))).convert("RGB")).astype(int)


def assert_the_same(beam: BeamPage, ours: Way, stock: Way) -> None:
    """Both show the same numbers for one log; prints how far the pixels differ."""
    for way in (ours, stock):
        way.notebook.press_slider("skew left", "ArrowRight", 20)
    beam.follow("skew left")
    told: dict[str, Any] = {}
    while told.get("skew_left") != pytest.approx(beam.values["skew_left"]):
        told = read_inputs(png(stock))
    now, _ = beam.shows()
    station = int(np.abs(now.x - governing(now.findings).x).argmin())
    assert told["corners"] == pytest.approx([float(c[station]) for c in now.corners.values()])
    a, b = pixels(ours), pixels(stock)
    assert a.shape == b.shape
    off = np.abs(a - b).max(axis=-1)
    print(
        f"\nsame corner stresses; of {off.size} pixels {np.count_nonzero(off)} differ, "
        f"{np.count_nonzero(off > 32)} of them by more than 32 of 255"
    )
    for way in (ours, stock):
        way.notebook.press_slider("skew left", "ArrowLeft", 20)


def spread(values: Sequence[float]) -> str:
    return f"{np.median(values):8.0f} {np.percentile(values, 95):8.0f}"


def test_the_page_against_the_stock_way(open_for_module, open_notebook, worksheets) -> None:
    beam = BeamPage(open_for_module("main-beam.ipynb"))
    beam.as_in_file()
    beam.shows()
    limits = dict(zip(LOG.values(), beam.page.evaluate(OPTIONS), strict=True))
    sources = [f"SLIDERS = {limits!r}", STOCK]
    cells = [nbformat.v4.new_code_cell(source) for source in sources]
    kernel = {"kernelspec": {"name": "python3", "display_name": "Python 3"}}
    notebook = nbformat.v4.new_notebook(metadata=kernel, cells=cells)
    nbformat.write(notebook, worksheets / "stock.ipynb")
    ours = Way(beam.notebook, ".splitcalc-stage img")
    stock = Way(open_notebook("stock.ipynb"), 'img[src^="data:image/png"]')
    assert_the_same(beam, ours, stock)
    cell = nbformat.v4.new_code_cell(BARE)
    floor = nbformat.v4.new_notebook(metadata=kernel, cells=[cell])
    nbformat.write(floor, worksheets / "bare.ipynb")

    print("run  way       key to picture, ms   pictures/s   gap, ms            catch-up")
    print("                 median      p95      held key     median      p95       ms")
    for run in range(RUNS):
        singles = {}
        for name, way in (("page", ours), ("stock", stock)):
            singles[name] = single = way.single()
            rates, catch_ups, gaps = zip(
                *(way.held("skew left", key) for key in ("ArrowRight", "ArrowLeft")), strict=True
            )
            print(
                f"{run + 1:3}  {name:8} {spread(single)} {np.mean(rates):13.1f} "
                f"{spread(np.concatenate(gaps))} {np.mean(catch_ups):8.0f}"
            )
        ratio = np.median(singles["stock"]) / np.median(singles["page"])
        print(f"     stock / page, key to picture: {ratio:.1f}")
        rate, catch_up, gaps = ours.held("relief pressure", ("ArrowRight", "ArrowLeft")[run % 2])
        print(
            f"     relief pressure, all logs searched anew: {rate:.1f} pictures/s, gap "
            f"{spread(gaps)}, longest {gaps.max():.0f}, catch-up {catch_up:.0f} ms"
        )
    bare = Way(open_notebook("bare.ipynb"), ".bare img")
    single = bare.single()
    rate, catch_up, gaps = bare.held("skew left", "ArrowRight")
    print(f"     bare      {spread(single)} {rate:13.1f} {spread(gaps)} {catch_up:8.0f}")
