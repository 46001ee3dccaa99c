import io
import json

import numpy as np
import pytest
from PIL import Image

from splitcalc.draw import png

INPUTS = {"offset": 0.1, "thrust": 1.96e5, "section": "I-beam β ≥ 2", "hinged": True, "log": [1, 2]}


def noise(height: int, width: int) -> np.ndarray:
    return np.random.default_rng(1).integers(0, 256, (height, width, 4), dtype=np.uint8)


def written_by_pillow() -> bytes:
    file = io.BytesIO()
    Image.new("RGB", (2, 3)).save(file, "png")
    return file.getvalue()


@pytest.mark.parametrize(("height", "width"), [(1, 1), (3, 7), (7, 3), (520, 900)])
def test_pillow_reads_the_same_pixels(height: int, width: int) -> None:
    rgba = noise(height, width)
    with Image.open(io.BytesIO(png.encode(rgba, INPUTS))) as picture:
        assert picture.mode == "RGB"
        np.testing.assert_array_equal(np.asarray(picture), rgba[..., :3])


def test_part_of_a_larger_picture_keeps_its_pixels() -> None:
    rgba = noise(20, 30)[2:15:2, 5:25:3]
    with Image.open(io.BytesIO(png.encode(rgba, {}))) as picture:
        np.testing.assert_array_equal(np.asarray(picture), rgba[..., :3])


def test_checksums_are_right() -> None:
    with Image.open(io.BytesIO(png.encode(noise(3, 7), INPUTS))) as picture:
        picture.verify()


def test_inputs_read_back() -> None:
    assert png.read_inputs(png.encode(noise(3, 7), INPUTS)) == INPUTS


def test_pillow_finds_the_inputs() -> None:
    with Image.open(io.BytesIO(png.encode(noise(3, 7), INPUTS))) as picture:
        assert json.loads(picture.text["inputs"]) == INPUTS


@pytest.mark.parametrize("value", [np.nan, np.inf])
def test_input_that_is_not_finite_is_refused(value: float) -> None:
    with pytest.raises(ValueError, match="JSON"):
        png.encode(noise(1, 1), {"offset": value})


@pytest.mark.parametrize(
    "pixels", [noise(2, 2)[..., :3], noise(2, 2)[0], noise(2, 2).astype(float)]
)
def test_other_arrays_are_refused(pixels: np.ndarray) -> None:
    with pytest.raises(ValueError, match="uint8"):
        png.encode(pixels, {})


def test_bytes_that_are_no_png_are_refused() -> None:
    with pytest.raises(ValueError, match="not a PNG"):
        png.read_inputs(b"GIF89a")


def test_png_without_inputs_is_refused() -> None:
    with pytest.raises(ValueError, match="no inputs"):
        png.read_inputs(written_by_pillow())
