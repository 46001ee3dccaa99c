"""Drives JupyterLab in Chromium.

    def test_offset_reaches_the_picture(open_notebook):
        notebook = open_notebook("main-beam.ipynb")
        notebook.press_slider("Offset", "ArrowRight", times=3)
        notebook.picture_inputs(offset=0.013)

Each test works on its own copy of the worksheets; the fixture `worksheets` is that folder.
Every wait is for a state; the time limits only end a wait that would never end.
"""

import json
import os
import re
import shutil
import subprocess
import sys
import tempfile
import urllib.request
from collections.abc import Callable, Iterator
from contextlib import ExitStack, contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any, NoReturn

import pytest

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Locator, Page

WORKSHEETS = Path(__file__).resolve().parents[2] / "worksheets"
CHROMIUM = Path("/usr/bin/chromium")
CHROMIUM_FLAGS = [
    "--no-sandbox",  # Chromium refuses to run as root with one
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
]
LIMIT = 60  # seconds, for any one wait: a loaded machine with two cores is slow

RUN_ALL = """() => {
    window.allRun = false;
    jupyterapp.commands.execute('notebook:run-all-cells').finally(() => { window.allRun = true; });
}"""

ERRORS = """() => jupyterapp.shell.currentWidget.content.widgets
    .flatMap((cell) => cell.model.toJSON().outputs ?? [])
    .filter((output) => output.output_type === 'error')
    .map((output) => output.traceback.join('\\n') || `${output.ename}: ${output.evalue}`)"""

# Answers [whether a picture holds what is expected, the inputs of the last picture looked at].
# A tEXt chunk is: length (4 bytes), "tEXt", keyword, a zero byte, Latin-1 text, checksum (4 bytes).
PICTURE_INPUTS = """async ([expected, limit]) => {
    const inputs = (bytes) => {
        const view = new DataView(bytes);
        const latin1 = new TextDecoder('latin1');
        for (let at = 8; at < bytes.byteLength; at += view.getUint32(at) + 12) {
            const chunk = latin1.decode(new Uint8Array(bytes, at + 4, view.getUint32(at) + 4));
            if (chunk.startsWith('tEXtinputs\\0')) return JSON.parse(chunk.slice(11));
        }
    };
    const same = (a, b) => typeof b === 'number'
        ? Math.abs(a - b) <= 1e-12 + 1e-9 * Math.abs(b)
        : JSON.stringify(a) === JSON.stringify(b);
    let shown = null;
    for (const end = Date.now() + 1000 * limit; Date.now() < end;) {
        for (const image of document.querySelectorAll('.jp-Notebook img[src^="blob:"]')) {
            // The fetch fails when a newer picture has just taken this one's place.
            const bytes = await fetch(image.src).then((answer) => answer.arrayBuffer(), () => null);
            shown = (bytes && inputs(bytes)) ?? shown;
            if (shown && Object.entries(expected).every(([key, value]) => same(shown[key], value)))
                return [true, shown];
        }
        await new Promise(requestAnimationFrame);
    }
    return [false, shown];
}"""


def cannot_run(reason: str) -> NoReturn:
    """Skips on a person's machine; fails in CI, where nobody would see a skip."""
    if os.environ.get("CI") == "true":
        pytest.fail(reason)
    pytest.skip(reason)


@dataclass(frozen=True)
class Lab:
    """A running JupyterLab server: its root folder, address and token."""

    folder: Path
    url: str
    token: str


class Notebook:
    """A notebook that is open in the page, with all its cells run; `path` is its file."""

    def __init__(self, page: "Page", path: Path) -> None:
        self.page, self.path = page, path

    def slider(self, label: str | re.Pattern[str]) -> "Locator":
        """The one slider whose label holds the text or matches the pattern."""
        labels = self.page.locator(".widget-label").filter(has_text=label)
        return self.page.locator(".widget-slider").filter(has=labels)

    def press_slider(self, label: str | re.Pattern[str], key: str, times: int = 1) -> None:
        """Presses a key on a slider."""
        self.slider(label).locator(".noUi-handle").focus()
        for _ in range(times):
            self.page.keyboard.press(key)

    def drag_slider(self, label: str | re.Pattern[str], by: float) -> None:
        """Drags a slider's handle so many css pixels to the right, in steps of a few."""
        handle = self.slider(label).locator(".noUi-handle")
        handle.scroll_into_view_if_needed()
        box = handle.bounding_box()
        assert box is not None, f"{label} is not on screen"
        x, y = box["x"] + box["width"] / 2, box["y"] + box["height"] / 2
        self.page.mouse.move(x, y)
        self.page.mouse.down()
        self.page.mouse.move(x + by, y, steps=8)
        self.page.mouse.up()

    def slider_value(self, label: str | re.Pattern[str]) -> float:
        """Where the handle stands, by what the browser knows."""
        return self.slider(label).locator(".noUi-target").evaluate("e => +e.noUiSlider.get()")

    def run_all(self) -> None:
        """Runs all cells; AssertionError with the error's text when one ends in an error."""
        self.page.evaluate(RUN_ALL)
        self.page.wait_for_function("window.allRun")
        self.page.locator(".jp-Notebook-ExecutionIndicator[data-status=idle]").wait_for()
        errors = self.page.evaluate(ERRORS)
        if errors:
            raise AssertionError(re.sub(r"\x1b\[[0-9;]*m", "", "\n\n".join(errors)))

    def restart_kernel(self) -> None:
        """Starts the kernel anew; nothing is run yet."""
        self.page.evaluate("jupyterapp.shell.currentWidget.sessionContext.session.kernel.restart()")

    def picture_inputs(self, **expected: object) -> dict[str, Any]:
        """The inputs of the picture on screen, read as soon as they hold what is expected.

        They stand in the PNG itself: JSON in its tEXt chunk `inputs`. Numbers may differ by
        rounding, 1e-9.
        """
        held, shown = self.page.evaluate(PICTURE_INPUTS, [expected, LIMIT])
        assert held, f"expected {expected}, the picture shows {shown}"
        return shown


@pytest.fixture(scope="session")
def lab(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Lab]:
    """A JupyterLab server of this process's own, on an empty folder."""
    folder = tmp_path_factory.mktemp("lab")
    settings = Path(os.environ["JUPYTER_CONFIG_DIR"], "labconfig")
    settings.mkdir(exist_ok=True)
    # It asks whether to show news, in a box over the notebook.
    news = {"@jupyterlab/apputils-extension:announcements": True}
    (settings / "page_config.json").write_text(json.dumps({"disabledExtensions": news}))

    command = [
        *[sys.executable, "-m", "jupyterlab", "--no-browser", "--allow-root"],
        *["--ip=127.0.0.1", "--port=0", "--ServerApp.port_retries=0"],
        *[f"--ServerApp.root_dir={folder}", "--LabApp.expose_app_in_browser=True"],
    ]
    log = tmp_path_factory.mktemp("lab-log") / "log.txt"
    with log.open("wb") as stream:
        server = subprocess.Popen(command, stdout=stream, stderr=stream)
    try:
        yield wait_for_lab(server, folder, log)
    finally:
        server.terminate()
        try:
            server.wait(timeout=LIMIT)
        except subprocess.TimeoutExpired:
            server.kill()
            server.wait()


def wait_for_lab(server: "subprocess.Popen[bytes]", folder: Path, log: Path) -> Lab:
    """The server's address and token, from the file it writes about itself, once it answers."""
    about = Path(os.environ["JUPYTER_RUNTIME_DIR"], f"jpserver-{server.pid}.json")
    for _ in range(LIMIT * 10):
        try:
            facts = json.loads(about.read_text())
            urllib.request.urlopen(facts["url"] + "api", timeout=LIMIT).close()
            return Lab(folder, facts["url"], facts["token"])
        except (OSError, ValueError):  # not written, half written, not listening yet
            pass
        try:
            server.wait(timeout=0.1)
            break
        except subprocess.TimeoutExpired:
            pass
    pytest.fail(f"JupyterLab does not answer:\n{log.read_text()}")


def copy_worksheets(lab: Lab) -> Path:
    """A fresh copy of the worksheets, inside the server's folder."""
    folder = Path(tempfile.mkdtemp(dir=lab.folder))
    ignore = shutil.ignore_patterns(".*")
    return shutil.copytree(WORKSHEETS, folder, ignore=ignore, dirs_exist_ok=True)


@pytest.fixture
def worksheets(lab: Lab) -> Path:
    """A fresh copy of the worksheets, inside the server's folder."""
    return copy_worksheets(lab)


# For a module, not the session: while playwright runs, this thread counts as inside a running
# asyncio loop, and tests of other files that run in the same process would see that loop.
@pytest.fixture(scope="module")
def browser() -> Iterator["Browser"]:
    """Headless Chromium."""
    try:
        from playwright.sync_api import sync_playwright
    except ImportError:
        cannot_run("playwright is not installed")
    if not CHROMIUM.exists():
        cannot_run(f"there is no {CHROMIUM}")
    with sync_playwright() as playwright:
        chromium = playwright.chromium.launch(executable_path=CHROMIUM, args=CHROMIUM_FLAGS)
        yield chromium
        chromium.close()


@contextmanager
def fresh_page(browser: "Browser") -> Iterator["Page"]:
    """An empty page of a fresh profile, 1280 x 800 pixels."""
    with browser.new_context(viewport={"width": 1280, "height": 800}) as profile:
        profile.set_default_timeout(LIMIT * 1000)
        page = profile.new_page()
        yield page
        page.evaluate("window.jupyterapp?.serviceManager.sessions.shutdownAll()")


def open_and_run(page: "Page", lab: Lab, path: Path) -> Notebook:
    """Opens a notebook and runs all its cells."""
    name = path.relative_to(lab.folder).as_posix()
    page.goto(f"{lab.url}lab/tree/{name}?token={lab.token}&reset")
    page.wait_for_function(
        "(path) => window.jupyterapp?.shell?.currentWidget?.context?.path === path", arg=name
    )
    page.evaluate("jupyterapp.shell.currentWidget.sessionContext.ready")
    notebook = Notebook(page, path)
    notebook.run_all()
    return notebook


@pytest.fixture
def page(browser: "Browser") -> Iterator["Page"]:
    """An empty page of a fresh profile, 1280 x 800 pixels."""
    with fresh_page(browser) as page:
        yield page


@pytest.fixture
def open_notebook(page: "Page", lab: Lab, worksheets: Path) -> Callable[[str], Notebook]:
    """Opens a notebook of the folder `worksheets` and runs all its cells.

    Raises AssertionError with the error's text when a cell ends in an error.
    """
    return lambda name: open_and_run(page, lab, worksheets / name)


@pytest.fixture(scope="module")
def open_for_module(browser: "Browser", lab: Lab) -> Iterator[Callable[[str], Notebook]]:
    """The same for several tests: each notebook in a page and in worksheets of its own."""
    with ExitStack() as stack:

        def open_notebook(name: str) -> Notebook:
            page = stack.enter_context(fresh_page(browser))
            return open_and_run(page, lab, copy_worksheets(lab) / name)

        yield open_notebook
