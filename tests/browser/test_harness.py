"""The harness itself, on a notebook of stock widgets."""

from collections.abc import Callable
from pathlib import Path

import nbformat.v4
import pytest

pytestmark = pytest.mark.browser

LIVING_PICTURE = """
import json, struct, zlib
import ipywidgets

def chunk(kind, data):
    return struct.pack(">I", len(data)) + kind + data + struct.pack(">I", zlib.crc32(kind + data))

def png(inputs):
    return (
        b"\\x89PNG\\r\\n\\x1a\\n"
        + chunk(b"IHDR", struct.pack(">IIBBBBB", 1, 1, 8, 0, 0, 0, 0))
        + chunk(b"tEXt", b"inputs\\0" + json.dumps(inputs).encode("latin-1"))
        + chunk(b"IDAT", zlib.compress(b"\\0\\0"))
        + chunk(b"IEND", b"")
    )

def redraw(change=None):
    picture.value = png({"offset": offset.value / 1000, "side": "left"})
    text.value = f"offset {offset.value:g} mm"

offset = ipywidgets.FloatSlider(description="Offset", min=-50, max=50, step=0.1)
angle = ipywidgets.FloatSlider(description="Angle")
text, picture = ipywidgets.HTML(), ipywidgets.Image(format="png")
offset.observe(redraw, "value")
redraw()
ipywidgets.VBox([offset, angle, text, picture])
"""


def write_notebook(path: Path, *sources: str) -> None:
    kernel = {"kernelspec": {"name": "python3", "display_name": "Python 3"}}
    cells = [nbformat.v4.new_code_cell(source) for source in sources]
    nbformat.write(nbformat.v4.new_notebook(metadata=kernel, cells=cells), path)


def test_a_key_on_a_slider_reaches_text_and_picture(
    open_notebook: Callable, worksheets: Path
) -> None:
    write_notebook(worksheets / "living.ipynb", LIVING_PICTURE)
    notebook = open_notebook("living.ipynb")
    assert notebook.picture_inputs() == {"offset": 0.0, "side": "left"}
    notebook.press_slider("Offset", "ArrowRight", times=3)
    assert notebook.picture_inputs(offset=0.0003)["side"] == "left"
    notebook.page.get_by_text("offset 0.3 mm").wait_for()


def test_a_cell_that_fails_is_told(open_notebook: Callable, worksheets: Path) -> None:
    write_notebook(worksheets / "failing.ipynb", "1 + 1", "force = 1 / 0")
    with pytest.raises(AssertionError, match="ZeroDivisionError: division by zero"):
        open_notebook("failing.ipynb")
