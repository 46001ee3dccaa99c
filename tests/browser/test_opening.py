"""`splitcalc open`, as a person meets it: the worksheet in front, as wide as the screen allows."""

import re
import subprocess
import sys
import threading
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Page

pytestmark = pytest.mark.browser

LIMIT = 120  # seconds, for a server that says nothing: only ends a wait that would never end
IN_FRONT = "(path) => window.jupyterapp?.shell?.currentWidget?.context?.path === path"
WIDTH = "document.querySelector('.jp-NotebookPanel').clientWidth"


# With the browser asked for first, nothing is started where there is none.
@pytest.fixture
def address(browser: "Browser", tmp_path: Path) -> Iterator[str]:
    """The address that `splitcalc open FOLDER` prints, while it runs."""
    words = [tmp_path / "mine", "--", "--no-browser", "--LabApp.expose_app_in_browser=True"]
    command = [sys.executable, "-m", "splitcalc.cli", "open", *words]
    log = tmp_path / "log.txt"
    with (
        log.open("w") as rest,
        subprocess.Popen(command, stdout=rest, stderr=subprocess.PIPE, text=True) as server,
    ):
        watch = threading.Timer(LIMIT, server.kill)
        watch.start()
        said = []
        for line in server.stderr:
            said.append(line)
            if found := re.search(r"http://127\.0\.0\.1:\d+/lab/\S+\?token=\w+", line):
                break
        else:
            pytest.fail("no address:\n" + "".join(said))
        watch.cancel()
        # Read on, or the server stands still once the pipe is full.
        threading.Thread(target=server.stderr.read, daemon=True).start()
        yield found[0]
        server.terminate()
        try:
            server.wait(LIMIT)
        except subprocess.TimeoutExpired:
            server.kill()


def wait_until_open(page: "Page") -> None:
    page.wait_for_function(IN_FRONT, arg="main-beam.ipynb")
    page.evaluate("jupyterapp.restored")
    # The list of files may unfold as the last thing that it does when a page starts.
    settled = page.locator(".jp-FileBrowser:not(.jp-mod-restoring)")
    settled.wait_for(state="attached")
    # A server that is told to stop while a kernel starts may never stop.
    page.evaluate("jupyterapp.shell.currentWidget.sessionContext.ready")


def test_the_worksheet_opens_wide_and_the_files_are_one_click_away(
    address: str, page: "Page"
) -> None:
    page.goto(address)
    wait_until_open(page)
    files = page.locator(".jp-DirListing-itemName")
    # Of 1280 pixels; 950 while the list of files is open.
    assert page.evaluate(WIDTH) > 1190
    assert files.filter(visible=True).count() == 0

    page.reload()
    wait_until_open(page)
    assert page.evaluate(WIDTH) > 1190

    page.locator(".lm-TabBar-tab[data-id=filebrowser]").click()
    files.filter(has_text="main-beam.ipynb").wait_for()
    files.filter(has_text=re.compile(r"^machine\.toml$")).dblclick()
    page.wait_for_function(IN_FRONT, arg="machine.toml")
    page.locator(".lm-DockPanel .lm-TabBar-tab", has_text="main-beam.ipynb").click()
    page.wait_for_function(IN_FRONT, arg="main-beam.ipynb")
