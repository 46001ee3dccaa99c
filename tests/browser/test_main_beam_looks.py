"""How the main-beam page looks: it fits, stands still while a slider moves, and can be read."""

from collections.abc import Callable, Sequence

import numpy as np
import pytest

from tests.browser.beam_page import SLIDERS, BeamPage

pytestmark = pytest.mark.browser

WIDTHS = {"left bar": (1280, True), "no left bar": (1280, False), "wide": (1920, False)}
THEME = "(name) => jupyterapp.commands.execute('apputils:change-theme', {theme: name})"

BOXES = """() => {
    const page = document.querySelector('.splitcalc-page');
    const shown = (name) => [...page.querySelectorAll(name)].filter((e) => e.clientWidth);
    const box = (e) => e.getBoundingClientRect().toJSON();
    const outer = box(page);
    const scrolling = [];
    for (let e = page; e; e = e.parentElement)
        if (e.scrollWidth > e.clientWidth + 1) scrolling.push(e.className);
    return {
        rail: box(page.querySelector('.splitcalc-rail')),
        stage: box(page.querySelector('.splitcalc-stage')), scrolling,
        sticking_out: shown('*').filter((e) =>
            box(e).right > outer.right + 0.5 || box(e).left < outer.left - 0.5
        ).map((e) => e.outerHTML.slice(0, 100)),
        cut: [
            ...shown('.widget-label, button, input').filter((e) => e.scrollWidth > e.clientWidth),
            ...shown('.splitcalc-sentence, .splitcalc-view, .splitcalc-past').filter(
                (e) => e.scrollHeight > e.clientHeight + 1),
        ].map((e) => e.textContent || e.value),
    };
}"""
# Where the picture begins, under the page's top, in every frame until `stop` is called.
WATCH = """() => {
    const [page, stage] = ['.splitcalc-page', '.splitcalc-stage'].map(
        (name) => document.querySelector(name));
    const places = new Set();
    let watching = true;
    const look = () => {
        const [top, from] = [stage, page].map((e) => e.getBoundingClientRect().top);
        places.add(Math.round(top - from));
        if (watching) requestAnimationFrame(look);
    };
    look();
    window.stop = () => { watching = false; return [...places]; };
}"""
# [text, its colour, its background], 0 to 255, with opacities and filters worked in: see
# Filter Effects Module Level 1, W3C, from memory: invert(0.9), then hue-rotate(180deg).
COLOURS = """(labels) => {
    const rgba = (text) => {
        const [r, g, b, a] = text.match(/[\\d.]+/g).map(Number);
        return [r, g, b, a ?? 1];
    };
    const over = (top, under) => under.map((c, k) => top[k] * top[3] + c * (1 - top[3]));
    const turned = (color) => {
        const [r, g, b] = color.map((c) => 229.5 - 0.8 * c);
        return [-0.574 * r + 1.43 * g + 0.144 * b, 0.426 * r + 0.43 * g + 0.144 * b,
                0.426 * r + 1.43 * g - 0.856 * b].map((c) => Math.min(255, Math.max(0, c)));
    };
    const own = (e) => e.tagName === 'INPUT' ? e.value
        : [...e.childNodes].filter((n) => n.nodeType === 3).map((n) => n.data).join('').trim();
    const page = document.querySelector('.splitcalc-page');
    return [...page.querySelectorAll('*')].filter((e) =>
        own(e) && e.getClientRects().length && !['STYLE', 'OPTION'].includes(e.tagName)
        && Boolean(e.closest('.splitcalc-labels')) === labels
    ).map((e) => {
        const stage = e.closest('.splitcalc-stage'), style = getComputedStyle(e);
        const ink = rgba(e.namespaceURI.endsWith('svg') ? style.fill : style.color);
        const layers = [];
        for (let at = e; at; at = at.parentElement) {
            layers.unshift(rgba(getComputedStyle(at).backgroundColor));
            ink[3] *= getComputedStyle(at).opacity;
        }
        const white = [255, 255, 255];  // the picture's own ground
        const ground = stage ? white : layers.reduce((under, layer) => over(layer, under), white);
        const colors = [over(ink, ground), ground];
        const filtered = stage && getComputedStyle(stage).filter !== 'none';
        return [own(e), ...(filtered ? colors.map(turned) : colors)];
    });
}"""


def contrast(ink: Sequence[float], ground: Sequence[float]) -> float:
    """Contrast ratio of two colours; Web Content Accessibility Guidelines 2.2, from memory."""
    rgb = np.array([ink, ground]) / 255
    linear = np.where(rgb <= 0.04045, rgb / 12.92, ((rgb + 0.055) / 1.055) ** 2.4)
    low, high = sorted(linear @ (0.2126, 0.7152, 0.0722))
    return float((high + 0.05) / (low + 0.05))


@pytest.fixture(scope="module")
def beam(open_for_module: Callable) -> BeamPage:
    beam = BeamPage(open_for_module("main-beam.ipynb"))
    beam.as_in_file()
    beam.shows()
    return beam


@pytest.fixture(params=WIDTHS)
def sized(beam: BeamPage, request: pytest.FixtureRequest) -> BeamPage:
    """The page in windows of several widths."""
    width, bar = WIDTHS[request.param]
    beam.page.set_viewport_size({"width": width, "height": 1080 if width > 1280 else 800})
    if beam.page.locator("#jp-left-stack").is_visible() != bar:
        beam.page.evaluate("jupyterapp.commands.execute('application:toggle-left-area')")
        beam.page.locator("#jp-left-stack").wait_for(state="visible" if bar else "hidden")
    beam.begin()
    return beam


def test_everything_fits_and_the_rail_stands_beside_the_picture(sized):
    boxes = sized.page.evaluate(BOXES)
    assert (boxes["scrolling"], boxes["sticking_out"], boxes["cut"]) == ([], [], [])
    rail, stage = boxes["rail"], boxes["stage"]
    assert rail["right"] <= stage["left"]
    assert rail["top"] < stage["bottom"]
    assert rail["bottom"] > stage["top"]


def test_the_picture_stands_still_while_any_slider_moves(sized):
    jumps = {}
    for label in SLIDERS:
        sized.page.evaluate(WATCH)
        for key, times in (("ArrowRight", 3), ("ArrowLeft", 6)):
            sized.notebook.press_slider(label, key, times)
            sized.follow(label)
        jumps[label] = sized.page.evaluate("window.stop()")
    assert {label: tops for label, tops in jumps.items() if len(tops) > 1} == {}


def test_the_picture_stands_still_for_logs_that_are_not_allowed(sized):
    sized.page.evaluate(WATCH)
    for label in ("skew up", "skew left", "contact up", "contact left"):
        for key in ("Home", "End"):
            sized.notebook.press_slider(label, key)
            sized.follow(label)
    assert len(sized.page.evaluate("window.stop()")) == 1
    assert sized.page.evaluate(BOXES)["cut"] == []


@pytest.mark.parametrize("theme", ["JupyterLab Light", "JupyterLab Dark"])
@pytest.mark.parametrize("labels", [False, True], ids=["texts", "labels on the picture"])
def test_texts_can_be_read(beam, theme, labels):
    beam.begin()
    beam.page.evaluate(THEME, theme)
    light = str(theme.endswith("Light")).lower()
    beam.page.locator(f"body[data-jp-theme-light={light}]").wait_for(state="attached")
    beam.choose("web, bent across")
    beam.page.get_by_text("check's source:").first.wait_for()
    beam.click("stress", "worst extreme log")
    beam.says("Worst extreme log")
    found = beam.page.evaluate(COLOURS, labels)
    assert len(found) > (5 if labels else 40)
    assert [(*one, c) for one in found if (c := contrast(*one[1:])) < 4.5] == []
