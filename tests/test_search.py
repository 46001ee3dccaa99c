"""The search for the worst log, against brute force over random logs that love the edges."""

import math
from dataclasses import astuple
from pathlib import Path

import numpy as np
import pytest

from splitcalc.checks import ALL
from splitcalc.findings import worst_place
from splitcalc.logs.allowed import (
    BURIED,
    FIRST_BITE,
    OFFSETS,
    SHARE,
    STATES,
    allowed,
    distances,
)
from splitcalc.logs.limits import OUTSIDE, narrowest_set, past_limits
from splitcalc.logs.report import PER_STRETCH, findings
from splitcalc.logs.search import finish, search, values_at
from splitcalc.machine.file import parse_machine
from splitcalc.machine.numbers import SETS
from splitcalc.thrust.frame import Log

WORKSHEETS = Path(__file__).resolve().parents[1] / "worksheets"
LOGS = 300_000  # in all, over five machines, two sets and two states
ROUNDS = 12  # of the climb that starts at the worst random log
MISSED = 1.001  # what brute force may find above the search: the search refines to about that

# Nothing here stands where it stands in the demos: the wedge moves, its sled has one long guide,
# the fixed plate has spurs, the flanges differ, and the beam ends right behind weld and guide.
ODD = """
[job]
title = "invented: the wedge moves"
[basis]
design = "EN"
[cylinder]
bore = "100 mm"
rod = "56 mm"
stroke = "500 mm"
relief_pressure = "22 MPa"
axis_height = "150 mm"
mount = "trunnion"
mount_x = "600 mm"
[beam]
steel = "S355"
rear_end = "420 mm"
front_end = "1290 mm"
[beam.section]
shape = "plate I"
d = "230 mm"
b_t = "180 mm"
t_t = "22 mm"
b_b = "240 mm"
t_b = "14 mm"
t_w = "12 mm"
[moving_tool]
kind = "wedge"
width = "30 mm"
height = "260 mm"
bottom = "5 mm"
[fixed_tool]
kind = "push plate"
width = "260 mm"
height = "240 mm"
bottom = "20 mm"
grip = "spurs"
edge_x = "1100 mm"
weld_start = "1105 mm"
weld_end = "1285 mm"
[sled]
guide = "continuous"
guide_front = "-40 mm"
guide_length = "170 mm"
push_strip = "60 mm"
[logs]
longest = "520 mm"
shortest = "200 mm"
largest_diameter = "400 mm"
smallest_gap = "45 mm"
"""

US, SI = (
    (WORKSHEETS / name).read_text(encoding="utf-8") for name in ("machine.toml", "machine-si.toml")
)
MACHINES = {
    "US demo": US,
    "SI demo": SI,
    "odd": ODD,
    # the plate so high that at short distances no slope reaches the wedge
    "high": US.replace('bottom = "1/2 in"', 'bottom = "7 in"'),
    # where the front pad's edge meets the faces of the side plates, the value jumps up: the worst
    # distance is a cusp, narrower than a coarse net
    "side plates": US.replace('bottom = "1/2 in"', 'bottom = "1 in"').replace(
        'front_pad = "2 in"', 'front_pad = "1 1/2 in"'
    )
    + '[[beam.closed_zones]]\nstart = "30 in"\nend = "42 in"\nkind = "side plates"\n',
}


def worst_of(checks, numbers):
    """The worst log for each (check id, set)."""
    return {
        (check.id, name): spot
        for check in checks
        for name, spot in finish(search(check, numbers)).items()
    }


@pytest.fixture(scope="module", params=MACHINES)
def machine(request):
    """(numbers, checks that apply, what the search found)"""
    numbers = parse_machine(MACHINES[request.param].encode()).numbers()
    checks = [check for check in ALL if check.applies(numbers)[0]]
    return numbers, checks, worst_of(checks, numbers)


# --- the allowed set, written down once more ----------------------------------------------------


def contact_ranges(numbers, set_name, state, l_AB):
    """Low and high of a_y, a_z, b_y, b_z and the steepest slope, each from its own rule."""
    share = {"usual": 0.5, "extreme": 1.0}[set_name]
    ranges = []
    for tool, is_wedge in (
        (numbers.moving, numbers.wedge_moves),
        (numbers.fixed, not numbers.wedge_moves),
    ):
        half, low, high = tool.half_width, tool.low, tool.high
        if is_wedge and state == "buried":
            # the wood beside the edge bears f_90 on the buried part
            c = numbers.longest - l_AB
            whole = numbers.wedge
            tall = whole.high - whole.low
            half = whole.half_width + numbers.f_90 * tall * c**2 / (4 * numbers.F)
            low, high = numbers.wedge.low, numbers.wedge.high
        middle, reach = (low + high) / 2, (high - low) / 2
        ranges += [(-share * half, share * half), (middle - share * reach, middle + share * reach)]
    return ranges, share * numbers.grip


def contacts(log):
    return log.a_y, log.a_z, log.b_y, log.b_z


def slope(log):
    return np.hypot(log.b_y - log.a_y, log.b_z - log.a_z) / log.l_AB


def inside(numbers, set_name, state, log, slack=1e-9):
    ranges, steepest = contact_ranges(numbers, set_name, state, log.l_AB)
    shortest = numbers.shortest if state == "first bite" else numbers.gap
    good = (shortest - slack <= log.l_AB) & (log.l_AB <= numbers.longest + slack)
    for value, (low, high) in zip(contacts(log), ranges, strict=True):
        good = good & (low - slack <= value) & (value <= high + slack)
    return good & (slope(log) <= steepest * (1 + slack))


def random_logs(rng, numbers, set_name, state, count):
    """Allowed logs: a third on the circle of the steepest slope, many at ends and corners."""

    def between(low, high):
        """Ends count as much as all that is between them."""
        share = rng.choice([0.0, 1.0, -1.0], size=count, p=[0.25, 0.25, 0.5])
        return low + np.where(share < 0, rng.uniform(size=count), share) * (high - low)

    shortest = numbers.shortest if state == "first bite" else numbers.gap
    l_AB = shortest + rng.uniform(size=count) * (numbers.longest - shortest)
    l_AB = np.where(rng.uniform(size=count) < 0.1, numbers.longest, l_AB)
    ranges, steepest = contact_ranges(numbers, set_name, state, l_AB)
    a_y, a_z, b_y, b_z = (between(*ends) for ends in ranges)
    turn = rng.uniform(0, 2 * np.pi, size=count)
    around = rng.uniform(size=count) < 0.33
    b_y = np.where(around, a_y + steepest * l_AB * np.cos(turn), b_y)
    b_z = np.where(around, a_z + steepest * l_AB * np.sin(turn), b_z)
    # too steep: draw B nearer to A
    shrink = np.minimum(1.0, steepest * l_AB / np.maximum(np.hypot(b_y - a_y, b_z - a_z), 1e-12))
    b_y, b_z = a_y + (b_y - a_y) * shrink, a_z + (b_z - a_z) * shrink
    logs = Log(l_AB, a_y, a_z, b_y, b_z)
    return logs.take(inside(numbers, set_name, state, logs))


def values_of(checks, numbers, logs, per_stretch=1, chunk=2000):
    """Largest demand over capacity of each log on the whole beam, one row a check."""
    parts = [logs.take(slice(k, k + chunk)) for k in range(0, len(logs.l_AB), chunk)]
    lifted = [Log(*(value[:, None, None] for value in astuple(part))) for part in parts]
    return np.array(
        [
            np.concatenate(
                [worst_place(values_at(check, numbers, part, per_stretch))[0] for part in lifted]
            )
            for check in checks
        ]
    )


def climb(rng, check, numbers, set_name, state, log, value, per_stretch=1, tries=400):
    """Tries logs nearer and nearer to the worst one so far."""
    step = 0.2
    for _ in range(ROUNDS):
        sizes = [0.2 * log.l_AB, 0.05, 0.05, 0.05, 0.05]
        near = [
            v + step * size * rng.standard_normal(tries) * (rng.uniform(size=tries) < 0.6)
            for v, size in zip(astuple(log), sizes, strict=True)
        ]
        # back to the limits that a try oversteps, so that edges stay edges
        low = numbers.shortest if state == "first bite" else numbers.gap
        near[0] = np.clip(near[0], low, numbers.longest)
        ranges, steepest = contact_ranges(numbers, set_name, state, near[0])
        a_y, a_z, b_y, b_z = (np.clip(v, *ends) for v, ends in zip(near[1:], ranges, strict=True))
        rise = np.maximum(np.hypot(b_y - a_y, b_z - a_z), 1e-12)
        shrink = np.minimum(1.0, steepest * near[0] / rise)
        logs = Log(near[0], a_y, a_z, a_y + (b_y - a_y) * shrink, a_z + (b_z - a_z) * shrink)
        logs = logs.take(inside(numbers, set_name, state, logs))
        if len(logs.l_AB):
            seen = values_of([check], numbers, logs, per_stretch, 500)[0]
            best = int(seen.argmax())
            if seen[best] > value:
                log, value = logs.take(best), float(seen[best])
        step *= 0.7
    return value


# --- the tests ----------------------------------------------------------------------------------


@pytest.mark.parametrize("set_name", SETS)
def test_brute_force_finds_nothing_worse(machine, set_name):
    numbers, checks, found = machine
    rng = np.random.default_rng(20240229)
    share = LOGS // len(MACHINES) // len(SETS) // len(STATES)
    top = dict.fromkeys((check.id for check in checks), 0.0)
    for state in STATES:
        logs, count = [], 0
        while count < share:
            logs.append(random_logs(rng, numbers, set_name, state, 2 * share))
            count += len(logs[-1].l_AB)
        logs = Log(
            *(np.concatenate(part)[:share] for part in zip(*map(astuple, logs), strict=True))
        )
        for check, row in zip(checks, values_of(checks, numbers, logs), strict=True):
            worst = int(row.argmax())
            seen = climb(rng, check, numbers, set_name, state, logs.take(worst), float(row[worst]))
            top[check.id] = max(top[check.id], seen)
    for name, value in top.items():
        assert value <= MISSED * found[name, set_name].value, name
        assert value >= 0.99 * found[name, set_name].value, name  # or it has not looked hard enough


def test_the_worst_log_is_allowed_and_has_the_value_that_is_told(machine):
    numbers, checks, found = machine
    assert len(found) == len(checks) * len(SETS)
    for (name, set_name), spot in found.items():
        assert inside(numbers, set_name, spot.state, spot.log)
        check = next(c for c in checks if c.id == name)
        alone = Log(*(np.atleast_1d(np.asarray(v)) for v in astuple(spot.log)))
        seen = values_of([check], numbers, alone)[0, 0]
        assert seen == pytest.approx(spot.value, rel=1e-9)


def test_the_bound_is_told_and_true(machine):
    numbers, checks, _ = machine
    ends = {
        "right end of the moving tool's range": (0, 0),
        "left end of the moving tool's range": (0, 1),
        "lower end of the moving tool's range": (1, 0),
        "upper end of the moving tool's range": (1, 1),
        "right end of the fixed tool's range": (2, 0),
        "left end of the fixed tool's range": (2, 1),
        "lower end of the fixed tool's range": (3, 0),
        "upper end of the fixed tool's range": (3, 1),
    }
    for finding in findings(checks, numbers):
        data = finding.log
        log = Log(*(data[k] for k in ("distance_m", "a_y_m", "a_z_m", "b_y_m", "b_z_m")))
        ranges, steepest = contact_ranges(numbers, finding.set, data["state"], log.l_AB)
        told = set(data["bound"].split("; "))
        near = 1e-6 * numbers.longest
        true = {
            words
            for words, (k, side) in ends.items()
            if abs(contacts(log)[k] - ranges[k][side]) < near
        }
        if abs(slope(log) - steepest) < 1e-6 * steepest:
            true.add(f"slope at the limit {steepest:.3g}")
        shortest = numbers.shortest if data["state"] == "first bite" else numbers.gap
        for words, length in (("shortest", shortest), ("longest", numbers.longest)):
            if abs(log.l_AB - length) < near:
                true.add(f"{words} distance")
        assert told == true
        assert true  # the worst of a convex measure lies on a limit


def test_usual_logs_are_extreme_logs_too(machine):
    _, checks, found = machine
    for check in checks:
        assert found[check.id, "usual"].value <= found[check.id, "extreme"].value


def test_the_ranges_are_those_of_the_rules(machine):
    numbers, _, _ = machine
    for set_name in SETS:
        for state in STATES:
            low, high = distances(numbers, state)
            assert (low, high) == (
                numbers.shortest if state == "first bite" else numbers.gap,
                numbers.longest,
            )
            for l_AB in np.linspace(low, high, 5):
                bounds = allowed(numbers, SHARE[set_name], state == BURIED, np.array(l_AB))
                ranges, steepest = contact_ranges(numbers, set_name, state, l_AB)
                assert float(bounds.slope) == pytest.approx(steepest, rel=1e-14)
                np.testing.assert_allclose(bounds.ends, ranges, rtol=1e-12, atol=1e-15)


def test_ranges_of_the_us_demo_by_hand():
    # 4 1/2 in bore, 2850 psi relief, 6 in × 6 in plate 1/2 in over the face, axis at 3 1/2 in,
    # wedge 1 in × 7 in on the face; crushed strip max(25 mm, F / (2 · 6 in · 30 MPa))
    numbers = parse_machine(US.encode()).numbers()
    F = 1.10 * 2850 * 6894.757293 * math.pi * (4.5 * 0.0254) ** 2 / 4
    assert pytest.approx(F, rel=1e-9) == numbers.F
    strip = F / (2 * 6 * 0.0254 * 30e6)
    assert strip < 0.025
    assert numbers.moving.half_width == pytest.approx(3 * 0.0254 - 0.025, rel=1e-12)
    assert numbers.moving.low == pytest.approx((0.5 - 3.5) * 0.0254 + 0.025, rel=1e-12)
    assert numbers.moving.high == pytest.approx((6.5 - 3.5) * 0.0254 - 0.025, rel=1e-12)
    assert numbers.fixed.half_width == pytest.approx(0.5 * 0.0254, rel=1e-12)
    assert (numbers.fixed.low, numbers.fixed.high) == pytest.approx((-0.0889, 0.0889), rel=1e-12)
    assert numbers.grip == 0.35
    # 12 in buried: 1/2 in + 8 MPa · 7 in · (12 in)^2 / (4 F)
    bounds = allowed(numbers, 1.0, True, np.array(12 * 0.0254))
    aside = 0.0127 + 8e6 * 7 * 0.0254 * (12 * 0.0254) ** 2 / (4 * F)
    assert bounds.ends[2, 1] == pytest.approx(aside, rel=1e-9)


def test_a_mirrored_log_is_as_bad(machine):
    numbers, checks, _ = machine
    rng = np.random.default_rng(5)
    logs = random_logs(rng, numbers, "extreme", "buried", 500)
    mirrored = Log(logs.l_AB, -logs.a_y, logs.a_z, -logs.b_y, logs.b_z)
    np.testing.assert_allclose(
        values_of(checks, numbers, mirrored), values_of(checks, numbers, logs), rtol=1e-12
    )


def test_nothing_is_worse_than_the_finding_on_a_fine_grid(machine):
    # the search looks at the marks alone, the finding at 12 stations a stretch: is the log that the
    # search chose still the worst when every log is looked at so closely?
    numbers, checks, _ = machine
    rng = np.random.default_rng(6)
    for finding in findings(checks, numbers):
        check, set_name = finding.check, finding.set
        for state in STATES:
            logs = random_logs(rng, numbers, set_name, state, 3000)
            logs = logs.take(values_of([check], numbers, logs)[0].argsort()[-60:])
            row = values_of([check], numbers, logs, PER_STRETCH)[0]
            top = climb(
                rng, check, numbers, set_name, state, logs.take(int(row.argmax())),
                float(row.max()), PER_STRETCH, tries=80,
            )  # fmt: skip
            assert top <= MISSED * finding.demand / finding.capacity, (check.id, set_name, state)


def test_a_finer_grid_of_stations_changes_little(machine):
    numbers, checks, found = machine
    for check in checks:
        for set_name in SETS:
            log = found[check.id, set_name].log
            alone = Log(*(np.atleast_1d(np.asarray(v)) for v in astuple(log)))
            coarse, fine, finest = (
                values_of([check], numbers, alone, n)[0, 0] for n in (1, PER_STRETCH, 96)
            )
            assert fine >= coarse * (1 - 1e-12)  # every coarse station is a fine one
            # measured: 0.007 % on the demos, 1.04 % on the odd machine, whose bimoment peaks
            # between two marks of its long guide; the finding looks at the fine ones
            assert fine <= 1.02 * coarse
            assert finest <= 1.0005 * fine


def test_the_set_of_a_log_is_the_narrowest_that_allows_it(machine):
    numbers, _, _ = machine
    rng = np.random.default_rng(8)
    seen = set()
    for set_name in SETS:
        for state in STATES:
            logs = random_logs(rng, numbers, set_name, state, 40)
            for k in range(len(logs.l_AB)):
                log = logs.take(k)
                told = narrowest_set(numbers, log, state)
                assert told == next(s for s in SETS if inside(numbers, s, state, log, slack=2e-9))
                assert past_limits(numbers, log, state) == []
                seen.add(told)
    assert seen == set(SETS)


def test_a_step_past_any_limit_is_told_in_words(machine):
    numbers, _, _ = machine
    log = random_logs(np.random.default_rng(9), numbers, "extreme", FIRST_BITE, 40).take(0)
    plain = {name: float(value) for name, value in vars(log).items()}
    ends = allowed(numbers, 1.0, False, np.array(plain["l_AB"])).ends
    words = {"a_y": ("right", "left"), "a_z": ("down", "up")}
    words |= {"b_y": words["a_y"], "b_z": words["a_z"]}
    for name, (low, high) in zip(OFFSETS, ends, strict=True):
        for value, way in zip((low - 1e-4, high + 1e-4), words[name], strict=True):
            moved = Log(**{**plain, name: value})
            assert narrowest_set(numbers, moved, FIRST_BITE) == OUTSIDE
            tool = "moving" if name[0] == "a" else "fixed"
            told = past_limits(numbers, moved, FIRST_BITE)
            assert any(f"off the {tool} tool's range" in t and way in t for t in told), told
    steep = Log(plain["l_AB"], 0.0, 0.0, 0.0, plain["l_AB"] * (numbers.grip + 1e-4))
    assert any("past the grip's" in told for told in past_limits(numbers, steep, FIRST_BITE))
    for length, kind in ((numbers.longest + 1e-4, "longer"), (numbers.shortest - 1e-4, "shorter")):
        told = past_limits(numbers, Log(length, 0.0, 0.0, 0.0, 0.0), FIRST_BITE)
        assert any(t.startswith("log ") and kind in t for t in told), told


def test_a_set_that_allows_no_log_gets_no_numbers():
    # the plate so high that no usual slope reaches the wedge, while the steepest ones still do
    text = US.replace('bottom = "1/2 in"', 'bottom = "9 in"')
    numbers = parse_machine(text.encode()).numbers()
    for finding in findings(ALL, numbers):
        assert finding.given is (finding.set == "extreme")
        assert finding.set == "extreme" or (finding.demand is None and "no log" in finding.why)
