"""What every section must be, whatever its family."""

from dataclasses import replace

import numpy as np
import pytest

from splitcalc.machine.file import load
from splitcalc.opening import worksheets_dir
from splitcalc.shapes.families import dimensions
from splitcalc.shapes.geometry import plastic_moduli, rectangle
from splitcalc.shapes.tables import all_sections
from splitcalc.thrust.frame import Log, frame_of, stations

ALL = {
    **all_sections(),
    "box of plates": load(worksheets_dir() / "machine-si.toml").document.beam.section,
}


def built(shape):
    values = {k: getattr(v, "si", v) for k, v in vars(shape).items()}
    return shape.build(values)


@pytest.mark.parametrize("name", ALL)
def test_the_loaded_flange_is_the_top_one(name):
    section = built(ALL[name])
    assert section.z_f == pytest.approx(section.z_t - section.t_f / 2, rel=1e-12)
    assert section.z_t - section.z_b == pytest.approx(section.h, rel=1e-12)
    assert section.z_b < section.z_s < section.z_t


@pytest.mark.parametrize("name", ALL)
def test_at_least_twelve_named_points_lie_in_mirrored_pairs(name):
    section = built(ALL[name])
    points = section.points
    assert len(points.names) == len(set(points.names)) >= 12
    # a mirrored load turns V_y and the torque round; a wall's own direction is free
    p = points
    turned = p.Q_z * (p.Q_w if section.open else p.psi)  # a square tube's own Q_w is noise
    rows = np.stack([p.y, p.z, p.t, abs(p.Q_y), abs(p.Q_z), p.Q_y * p.Q_z, turned], axis=-1)
    rows = rows / np.maximum(abs(rows).max(axis=0), 1e-300)
    for row in rows * [-1, 1, 1, 1, 1, -1, 1]:
        assert np.isclose(rows, row, rtol=0, atol=1e-9).all(axis=1).any(), row


def test_a_rectangle_has_the_plastic_moduli_of_a_rectangle():
    # b h² / 4 and h b² / 4, any text on plasticity
    assert plastic_moduli([rectangle(-0.03, 0.03, 0.01, 0.11)]) == pytest.approx(
        (0.06 * 0.1**2 / 4, 0.1 * 0.06**2 / 4), rel=1e-9
    )


def test_the_typed_dimensions_are_those_that_are_built():
    beam = load(worksheets_dir() / "machine-si.toml").document.beam
    assert dimensions(beam.section)["h_w"] == 0.18


def test_stations_hold_the_ends_of_a_closed_sections_distortion():
    numbers = load(worksheets_dir() / "machine-si.toml").numbers()
    numbers = replace(numbers, x_start=-2.0, x_end=4.0)  # long enough for all ends to lie on it
    frame = frame_of(numbers, Log(0.5, 0.0, 0.0, 0.0, 0.0))
    x = stations(numbers, frame, 1)[:, 0]
    for place in ("rear pad", "front pad", "fixed tool"):
        start, end = frame.patches[place]
        for mark in (start - 1.5 * numbers.section.h, end + 1.5 * numbers.section.h):
            assert np.isclose(x, mark, atol=1e-12).any(), (place, mark)
