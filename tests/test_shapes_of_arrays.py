"""Samples as arrays give what a loop of scalars gives, whatever the length of the sample axes.

A sample axis as long as the stations or the stress points would hide a value that was laid out on
the wrong axis of one machine only, and an axis of length 1 one that was squeezed away.
"""

from dataclasses import fields, is_dataclass, replace
from pathlib import Path

import numpy as np
import pytest

from splitcalc.checks import ALL
from splitcalc.inputs import Entry, walk
from splitcalc.machine.file import load, parse_machine
from splitcalc.machine.numbers import numbers_of
from splitcalc.stress.normal_and_shear import (
    equivalent_stress,
    point_stresses,
    signed_stresses,
)
from splitcalc.stress.web import cross_moments, web_stress
from splitcalc.thrust.frame import Log, frame_of, stations
from splitcalc.thrust.statics import actions, six_sums

WORKSHEETS = Path(__file__).resolve().parents[1] / "worksheets"
EXACT = {"rtol": 1e-12, "atol": 1e-12}  # atol in N, N·m, Pa: nothing beside the values at stake

# The US demo on a section that is typed out, with every part whose number an array may meet.
TYPED = """
[beam.section]
shape = "rolled I"
d = "9.00 in"
b_f = "8.28 in"
t_f = "0.935 in"
t_w = "0.570 in"
r = "0.395 in"
"""
PLATES = """
[beam.section]
shape = "plate I"
d = "240 mm"
b_t = "200 mm"
t_t = "25 mm"
b_b = "180 mm"
t_b = "18 mm"
t_w = "14 mm"
"""
ZONE = '\n[[beam.closed_zones]]\nstart = "30 in"\nend = "42 in"\nkind = "side plates"\n'


def us(section):
    text = (WORKSHEETS / "machine.toml").read_text(encoding="utf-8")
    return text.replace('section = "W8x67"\n', "") + section


def spread(value, count, by=0.04):
    """`count` different values about one."""
    return value * (1 + by * np.sin(1 + np.arange(count)))


MACHINES = {
    "rolled I": (us(TYPED), {"beam.section.t_w": 0.0145, "beam.section.d": 0.2286}),
    "plate I, side plates": (
        us(PLATES + ZONE),
        {"beam.section.t_w": 0.014, "beam.section.b_t": 0.2, "beam.elastic_modulus": 2.05e11},
    ),
    "plate box": (
        (WORKSHEETS / "machine-si.toml").read_text(encoding="utf-8"),
        {"beam.section.t_w": 0.012, "beam.section.h_w": 0.18},
    ),
    "hollow": (
        us('[beam.section]\nshape = "hollow"\nH = "10 in"\nB = "8 in"\nT = "1/2 in"\n')
        .replace('"full-depth pair"', '"diaphragm"')
        .replace('T = "1/2 in"\n', 'T = "1/2 in"\nmade_to = "EN 10219"\n'),
        {"beam.section.T": 0.0127, "beam.section.H": 0.254},
    ),
}
# the US demo with one long guide in place of its pads
GUIDE = us(TYPED)
for old, new in (
    ('front_pad = "2 in"\n', 'guide = "continuous"\n'),
    ('rear_pad = "11 in"\n', 'guide_front = "1 in"\n'),
    ('pad_length = "3 in"\n', 'guide_length = "12 in"\n'),
):
    assert old in GUIDE
    GUIDE = GUIDE.replace(old, new)
MACHINES["continuous guide"] = (GUIDE, {"sled.guide_front": 0.03, "sled.guide_length": 0.3})
VARIED = {  # of every machine: force, eccentricity, pads, weld, and what bends the flange
    "cylinder.relief_pressure": 19.6e6,
    "cylinder.axis_height": 0.09,
    "sled.front_pad": 0.05,
    "sled.rear_pad": 0.28,
    "fixed_tool.edge_x": 1.445,
    "fixed_tool.weld_start": 1.475,
    "fixed_tool.weld_end": 1.77,
    "beam.rear_end": -0.08,
    "beam.front_end": 1.94,
    "cylinder.mount_x": 0.01,
    "sled.roll_at_front": 0.7,
}
LOG = Log(0.35, 0.03, -0.02, -0.01, 0.06)
CORE = {
    "N": lambda numbers, acting: acting.N,
    "V_y": lambda numbers, acting: acting.V_y,
    "V_z": lambda numbers, acting: acting.V_z,
    "M_y": lambda numbers, acting: acting.M_y,
    "M_z": lambda numbers, acting: acting.M_z,
    "point stresses": lambda numbers, acting: np.stack(
        [part for pair in point_stresses(numbers, acting) for part in np.broadcast_arrays(*pair)]
    ),
    "signed stresses": signed_stresses,
    "equivalent stress": equivalent_stress,
    "web stress": web_stress,
    "cross moments": lambda numbers, acting: np.stack(cross_moments(numbers, acting)),
    **{
        check.id: lambda numbers, acting, check=check: np.divide(*check.evaluate(numbers, acting))
        for check in ALL
    },
}


@pytest.fixture(scope="module", params=MACHINES)
def machine(request):
    text, own = MACHINES[request.param]
    file = parse_machine(text.encode())
    known = {key for key, _, value in walk(file.document) if value is not None}
    return file, {key: value for key, value in {**VARIED, **own}.items() if key in known}


def counts(machine):
    """(stations, stress points) of a machine."""
    numbers = machine.numbers()
    x = stations(numbers, frame_of(numbers, LOG), 1)
    return x.shape[-2], len(numbers.section.points.names)


def samples_of(varied, count):
    return {
        key: spread(value, count, 0.02 + k / 400) for k, (key, value) in enumerate(varied.items())
    }


def acting_on(numbers, log):
    frame = frame_of(numbers, log)
    return actions(frame, stations(numbers, frame, 1))


def applies(name, numbers):
    """Cross-bending is of open sections alone."""
    return numbers.section.open or name not in ("web stress", "cross moments", "web-cross-bending")


@pytest.mark.parametrize("length", ["one", "stations", "points"])
@pytest.mark.parametrize("name", CORE)
def test_samples_as_an_array_are_a_loop_of_scalars(machine, name, length):
    file, varied = machine
    if not applies(name, file.numbers()):
        return
    count = {"one": 1, **dict(zip(("stations", "points"), counts(file), strict=True))}[length]
    samples = samples_of(varied, count)
    numbers = file.numbers(samples)
    together = CORE[name](numbers, acting_on(numbers, LOG))
    for k in range(count):
        alone = file.numbers({key: float(values[k]) for key, values in samples.items()})
        one = CORE[name](alone, acting_on(alone, LOG))
        own = together[..., k, :, :]
        np.testing.assert_allclose(np.broadcast_to(own, np.shape(one)), one, **EXACT)


@pytest.mark.parametrize("key", ["cylinder.axis_height", "beam.section.t_w", "sled.front_pad"])
def test_one_varied_input_among_plain_ones(machine, key):
    file, varied = machine
    if key not in varied:
        return
    count = counts(file)[1]
    values = spread(varied[key], count)
    numbers = file.numbers({key: values})
    together = equivalent_stress(numbers, acting_on(numbers, LOG))
    assert together.shape[0] == count
    for k in range(count):
        alone = file.numbers({key: float(values[k])})
        np.testing.assert_allclose(
            together[k], equivalent_stress(alone, acting_on(alone, LOG)), **EXACT
        )


def test_two_sample_axes(machine):
    file, varied = machine
    samples = {key: values.reshape(2, 3) for key, values in samples_of(varied, 6).items()}
    numbers = file.numbers(samples)
    together = equivalent_stress(numbers, acting_on(numbers, LOG))
    assert together.shape == (2, 3, *counts(file))
    alone = file.numbers({key: float(values[1, 2]) for key, values in samples.items()})
    np.testing.assert_allclose(
        together[1, 2], equivalent_stress(alone, acting_on(alone, LOG)), **EXACT
    )


@pytest.mark.parametrize("length", ["one", "stations", "points"])
def test_logs_as_an_array_are_a_loop_of_logs(machine, length):
    file, _ = machine
    numbers = file.numbers()
    count = {"one": 1, **dict(zip(("stations", "points"), counts(file), strict=True))}[length]
    parts = [
        spread(getattr(LOG, name), count, 0.3) for name in ("l_AB", "a_y", "a_z", "b_y", "b_z")
    ]
    together = Log(*(part[:, None, None] for part in parts))
    acting = acting_on(numbers, together)
    for k in range(count):
        one = acting_on(numbers, Log(*(float(part[k]) for part in parts)))
        for name, function in CORE.items():
            if applies(name, numbers):
                whole = function(numbers, acting)
                np.testing.assert_allclose(whole[..., k, :, :], function(numbers, one), **EXACT)


def test_logs_and_samples_on_axes_of_their_own(machine):
    file, varied = machine
    samples = {key: values[:, None] for key, values in samples_of(varied, 3).items()}
    numbers = file.numbers(samples)
    together = Log(0.35, *(spread(0.02, 4)[:, None, None] for _ in range(4)))
    values = equivalent_stress(numbers, acting_on(numbers, together))
    assert values.shape == (3, 4, *counts(file))
    alone = file.numbers({key: float(part[2, 0]) for key, part in samples.items()})
    one = Log(0.35, *(float(spread(0.02, 4)[1]) for _ in range(4)))
    np.testing.assert_allclose(
        values[2, 1], equivalent_stress(alone, acting_on(alone, one)), **EXACT
    )


def test_one_point_alone_is_that_point_among_all(machine):
    file, _ = machine
    numbers = file.numbers()
    acting = acting_on(numbers, LOG)
    whole = equivalent_stress(numbers, acting)
    for index in range(counts(file)[1]):
        alone = equivalent_stress(numbers.at_point(index), acting)
        np.testing.assert_allclose(alone[:, 0], whole[:, index], **EXACT)


def test_the_beam_is_in_balance_for_every_sample(machine):
    file, varied = machine
    numbers = file.numbers(samples_of(varied, 7))
    frame = frame_of(numbers, LOG)
    sums = six_sums(frame)
    assert sums.shape == (7, 1, 1, 6)
    assert np.all(np.abs(sums) < 1e-9 * np.max(numbers.F))


def with_value(document, key, entry):
    """The document with another entry at a dotted key."""
    name, _, rest = key.partition(".")
    name, _, number = name.rstrip("]").partition("[")
    inner = getattr(document, name)
    if number:
        part = with_value(inner[int(number) - 1], rest, entry)
        changed = (*inner[: int(number) - 1], part, *inner[int(number) :])
    else:
        changed = with_value(inner, rest, entry) if rest else entry
    return replace(document, **{name: changed})


def flat(value):
    """Every number in a tree of dataclasses, tuples and mappings."""
    if is_dataclass(value):
        value = {f.name: getattr(value, f.name) for f in fields(value) if f.name != "lines"}
    if isinstance(value, dict):
        value = tuple(value.values())
    if isinstance(value, tuple):
        return [number for part in value for number in flat(part)]
    return [] if isinstance(value, str) else np.ravel(value).tolist()


def test_varying_an_input_is_typing_another_value_or_is_refused(machine):
    file, _ = machine
    for key, fact, entry in walk(file.document):
        if fact.dimension is None:
            continue
        value = entry.si * 1.004 if entry and entry.si else 0.00123
        typed = with_value(file.document, key, Entry(value, "as a sample"))
        try:
            got = flat(file.numbers({key: value}))
        except KeyError:
            # what stands in a list may be refused, never taken and left unused
            assert key.startswith(("beam.stiffeners[", "beam.closed_zones["))
            continue
        assert got == pytest.approx(flat(numbers_of(typed)), rel=1e-12), key


def test_what_is_no_number_of_the_machine_is_refused():
    machine = load(WORKSHEETS / "machine.toml")
    for key in ("beam.steel", "cylinder.boar", "job.title"):
        with pytest.raises(KeyError, match=key):
            machine.numbers({key: 1.0})
