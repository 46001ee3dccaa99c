"""The worksheets as they are shipped: thin, and telling something where no widget runs."""

import base64
import re
import shutil
from pathlib import Path

import nbformat
import pytest
from nbclient import NotebookClient

from splitcalc.checks import ALL
from splitcalc.logs.report import findings
from splitcalc.logs.words import sentence, table
from splitcalc.machine.file import load
from splitcalc.opening import worksheets_dir
from splitcalc.sheet.main_beam import MainBeam

WORKSHEETS = sorted(worksheets_dir().glob("*.ipynb"))


def code_of(path: Path) -> dict[str, str]:
    cells = nbformat.read(path, as_version=4).cells
    return {cell.id: cell.source for cell in cells if cell.cell_type == "code"}


@pytest.mark.parametrize("path", WORKSHEETS, ids=lambda path: path.stem)
def test_a_worksheet_is_thin(path):
    *cells, own = code_of(path).values()
    assert len(cells) <= 8
    assert sum(len(cell.splitlines()) for cell in cells) <= 40
    for cell in cells:
        assert not re.search(r"^\s*(def|class|for|while) |import \*|[*/]{1,2} \d", cell, re.M), cell
    for part in re.split(r"\n\n(?=    (?:@|beam))", own)[1:]:
        assert len([line for line in part.splitlines() if line]) <= 5, part


@pytest.mark.parametrize("path", WORKSHEETS, ids=lambda path: path.stem)
def test_a_worksheet_stores_one_checked_output(path):
    cells = nbformat.read(path, as_version=4).cells
    kept = [c for c in cells if "keep_output" in c.metadata.get("tags", ())]
    assert len(kept) == 1
    assert kept[0].source.startswith("# NBVAL_CHECK_OUTPUT")
    assert kept[0].outputs


@pytest.mark.slow
def test_the_main_beam_worksheet_says_something_where_no_widget_runs(tmp_path):
    for name in ("main-beam.ipynb", "machine.toml"):
        shutil.copy(worksheets_dir() / name, tmp_path)
    book = nbformat.read(tmp_path / "main-beam.ipynb", as_version=4)
    place = {"metadata": {"path": tmp_path}}
    NotebookClient(book, kernel_name="python3", resources=place).execute()
    outputs = [output for cell in book.cells for output in cell.get("outputs", ())]
    texts = "".join(output.get("text", "") for output in outputs)
    machine = load(tmp_path / "machine.toml")
    worst = findings(ALL, machine.numbers(), machine.units)
    assert "\n".join(table(worst)) in texts
    words = " ".join(texts.split())  # long texts are wrapped
    assert " ".join(sentence(worst).split()) in words
    for _, _, value, given in machine.inputs():
        assert not given or getattr(value, "text", value) in words
    pictures = [o.data["image/png"] for o in outputs if "image/png" in o.get("data", {})]
    assert [base64.b64decode(picture)[:4] for picture in pictures] == [b"\x89PNG"]
    pages = [o.data["text/html"] for o in outputs if "text/html" in o.get("data", {})]
    governs = max(worst, key=lambda f: f.utilisation)
    assert any(governs._repr_html_() == page for page in pages)


def test_the_last_cell_adds_a_slider_a_line_and_a_check(tmp_path, monkeypatch):
    for name in ("main-beam.ipynb", "machine.toml"):
        shutil.copy(worksheets_dir() / name, tmp_path)
    monkeypatch.chdir(tmp_path)
    cells = code_of(tmp_path / "main-beam.ipynb")
    names: dict = {}
    for cell in ("inputs", "page", "own"):
        # an equation is printed from its source, which IPython keeps for a cell
        source = cells[cell].replace("SHOW_MINE = False", "SHOW_MINE = True")
        place = tmp_path / f"{cell}.py"
        place.write_text(source, encoding="utf-8")
        exec(compile(source, str(place), "exec"), names)
    beam: MainBeam = names["beam"]
    assert "fixed_tool.edge_x" in beam.controls
    assert "axial force alone" in beam.parts.labels.value
    assert [check.id for check in beam.checks] == [*(check.id for check in ALL), "squash"]
    beam.choose("squash")
    assert "σ_x = N/A" in beam.parts.equations.value
