"""The main-beam worksheet in a browser: what a slider does to picture and sentence."""

import math
import tomllib
from collections.abc import Callable
from pathlib import Path

import pytest

from splitcalc.checks import ALL
from splitcalc.findings import margin_text
from splitcalc.logs.present import log_by_ram, present
from splitcalc.machine.file import load
from splitcalc.units import INCH

pytestmark = pytest.mark.browser


def test_keys_on_sliders_reach_picture_bars_and_sentence(
    open_notebook: Callable, worksheets: Path
) -> None:
    notebook = open_notebook("main-beam.ipynb")
    first = notebook.picture_inputs()
    assert first["skew_left"] == 0
    notebook.press_slider("skew left", "ArrowRight", times=8)
    notebook.press_slider("skew up", "ArrowLeft", times=4)
    notebook.press_slider("log length", "ArrowLeft", times=20)
    shown = notebook.picture_inputs(
        skew_left=2.0, skew_up=-1.0, log_length=first["log_length"] - 1.0
    )

    # the same log outside of the page, from the same file
    path = worksheets / "machine.toml"
    assert tomllib.loads(path.read_text())["basis"]["units"] == "us"
    machine = load(path)
    log = log_by_ram(
        length=shown["log_length"] * INCH,
        up=shown["offset_up"] * INCH,
        tan_up=math.tan(math.radians(-1.0)),
        tan_left=math.tan(math.radians(2.0)),
    )
    now = present(ALL, machine.numbers(), log, machine.units)
    worst = max(now.findings, key=lambda f: f.utilisation)
    page = notebook.page
    used = abs(worst.utilisation - 1) * 100
    page.get_by_text(f"{worst.check.title} governs and is {used:.0f} % under its limit").wait_for()
    page.get_by_text("leaning left and down at 0.04").wait_for()
    for finding in now.findings:
        row = page.locator("tr").filter(has_text=f"{finding.check.title}, {finding.set}")
        cells = row.first.locator("td").all_inner_texts()
        assert cells[3] == f"{finding.utilisation:.3f}"
        assert cells[4] == margin_text(finding.utilisation)
    page.get_by_text("Not yet checked: root weld of the fixed tool").first.wait_for()
