"""Findings: utilisation and margin, what counts as a pass, what is printed and handed on."""

import dataclasses
import json
import math
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from splitcalc.equations import Line, equation
from splitcalc.findings import Check, Finding, margin_text, worst_place
from splitcalc.logs.report import find, findings, governing
from splitcalc.machine.file import load
from splitcalc.thrust.frame import Log
from splitcalc.units import Dimension

WORKSHEETS = Path(__file__).resolve().parents[1] / "worksheets"
LOG = {"state": "buried", "distance_m": 0.4, "bound": "longest distance"}


def made(**changes):
    values = {
        "id": "made-up",
        "title": "made-up check",
        "part": "beam",
        "source": "no source: it is made up",
        "limit": "yield",
        "dimension": Dimension.STRESS,
        "convex": True,
        "applies": lambda numbers: (True, ""),
        "evaluate": lambda numbers, actions: (1e6 + 0 * actions.x, 2e6),
        "place": lambda numbers, point: "somewhere",
        "assumptions": ("it is made up",),
    }
    return Check(**(values | changes))


CHECK = made()


def found(demand=100e6, capacity=345e6, factor=1.67, **more):
    return Finding(
        CHECK,
        "usual",
        demand=demand,
        capacity=capacity,
        required_factor=factor,
        x=1.25,
        place="top flange, left tip",
        log=LOG,
        **more,
    )


NOT_APPLICABLE = Finding(CHECK, "usual", applies=False, why="there is no such part")
NOT_GIVEN = Finding(CHECK, "usual", given=False, why="its formula ends before")


@pytest.fixture(scope="module")
def numbers():
    return load(WORKSHEETS / "machine.toml").numbers()


# --- utilisation, margin ------------------------------------------------------------------------


def test_utilisation_and_margin():
    finding = found(demand=100e6, capacity=300e6, factor=1.5)
    assert finding.utilisation == pytest.approx(0.5, rel=1e-15)
    assert finding.margin == pytest.approx(1.0, rel=1e-15)
    assert finding.holds


@pytest.mark.parametrize(("demand", "holds"), [(200e6, True), (200.0001e6, False), (0.0, True)])
def test_what_holds(demand, holds):
    assert found(demand=demand, capacity=300e6, factor=1.5).holds is holds


def test_no_demand_has_no_margin():
    finding = found(demand=0.0)
    assert finding.utilisation == 0
    assert finding.margin is None
    assert "no demand" in finding.verdict()


def test_what_does_not_apply_is_no_failure():
    assert NOT_APPLICABLE.holds
    assert NOT_APPLICABLE.utilisation is None
    assert NOT_APPLICABLE.margin is None
    assert "does not apply, there is no such part" in NOT_APPLICABLE.verdict()


def test_what_is_not_given_is_no_pass():
    assert not NOT_GIVEN.holds
    assert NOT_GIVEN.utilisation is None
    assert "NOT GIVEN, its formula ends before" in NOT_GIVEN.verdict()
    # numbers beside the flag don't make it one
    assert not found(demand=1.0, given=False, why="out of range").holds


@pytest.mark.parametrize("demand", [math.nan, math.inf])
def test_a_finding_that_is_no_number_never_holds(demand):
    assert not found(demand=demand).holds


@pytest.mark.parametrize(
    ("utilisation", "text"),
    [
        (None, "not given"),
        (0.0, "no demand"),
        (0.001, "over 99"),
        (0.5, "+1.00"),
        (0.8, "+0.25"),
        (1 / 1.239, "+0.23"),
        (1.0, "+0.00"),
        (1.0001, "−0.01"),
        (1.0 + 1e-12, "−0.01"),
        (1.25, "−0.20"),
        (4.0, "−0.75"),
    ],
)
def test_margin_in_words(utilisation, text):
    assert margin_text(utilisation) == text


@given(st.floats(1e-3, 1e3))
def test_the_sign_of_a_margin_tells_who_holds(utilisation):
    text = margin_text(utilisation)
    holds = found(demand=utilisation, capacity=1.0, factor=1.0).holds
    assert text.startswith("−") is not holds
    assert text != "−0.00"
    if text != "over 99":
        shown = float(text.replace("−", "-"))
        # two decimals, never better than it is; the slack is the rounding of 100 × margin
        assert shown - 1e-9 <= 1 / utilisation - 1 <= shown + 0.01 + 1e-9


def test_the_worst_place_of_each_sample():
    values = np.array([[[0.1, 0.7], [0.3, 0.2]], [[0.4, 0.1], [0.2, 0.9]]])
    top, index = worst_place(values)
    assert top.tolist() == [0.7, 0.9]
    assert index.tolist() == [1, 3]


@pytest.mark.parametrize("wrong", [np.nan, np.inf])
@pytest.mark.parametrize("place", [(0, 0, 0), (1, 1, 1)])
def test_a_number_that_is_none_is_never_a_pass(wrong, place):
    values = np.full((2, 2, 2), 0.5)
    values[place] = wrong
    with pytest.raises(FloatingPointError):
        worst_place(values)


@pytest.mark.parametrize("wrong", [np.nan, np.inf])
def test_a_check_that_gives_no_number_is_not_given(numbers, wrong):
    def evaluate(_, actions):
        return np.where(actions.x > 1.0, wrong, 1e6 + 0 * actions.x), 2e6

    check = made(evaluate=evaluate)
    results = findings([check, CHECK], numbers)
    assert [f.given for f in results if f.check is check] == [False, False]
    assert not any(f.holds for f in results if f.check is check)
    assert all("finite" in f.why for f in results if f.check is check)
    # it spoils only its own finding
    assert all(f.utilisation == pytest.approx(f.required_factor / 2) for f in results[2:])
    json.dumps([f.as_dict() for f in results], allow_nan=False)
    assert governing(results).check is check


def test_a_check_of_another_machine_does_not_apply(numbers):
    check = made(applies=lambda _: (False, "it has no such part"))
    for finding in findings([check], numbers):
        assert not finding.applies
        assert finding.holds
        assert finding.why == "it has no such part"
    assert governing(findings([check], numbers)) is None


def test_a_finding_is_about_its_log(numbers):
    from splitcalc.logs.report import acting_on

    log = Log(0.4, 0.01, 0.02, 0.03, 0.04)
    finding = find(CHECK, numbers, acting_on(numbers, log), set="usual", state="buried")
    told = {key: finding.log[key] for key in ("distance_m", "a_y_m", "a_z_m", "b_y_m", "b_z_m")}
    assert list(told.values()) == [0.4, 0.01, 0.02, 0.03, 0.04]
    assert finding.log["state"] == "buried"
    assert finding.log["force_N"] == numbers.F
    assert finding.required_factor == numbers.required["yield"]["usual"]


def test_the_worst_finding_governs():
    low, high = found(demand=1e6), found(demand=2e6)
    assert governing([low, high]) is high
    assert governing([high, low, NOT_APPLICABLE]) is high
    assert governing([high, NOT_GIVEN]) is NOT_GIVEN
    assert governing([]) is None


# --- what is printed and handed on --------------------------------------------------------------


def test_show_prints_symbols_numbers_source_and_assumptions(capsys):
    @equation(gives="T_v", source="a source that is made up")
    def st_venant_torque_made_up(*, T, T_w):
        return T - T_w

    info = st_venant_torque_made_up.equation
    from splitcalc.equations import REGISTRY

    del REGISTRY[info.name]  # the register is the package's own
    line = Line(info, {"T": 3000.0, "T_w": 1000.0}, 2000.0, "rear pad")
    finding = found(replay=lambda: [line])
    assert finding.show() is finding
    printed = capsys.readouterr().out.replace("\n", " ")  # a long verdict wraps
    for text in (
        "made-up check (usual logs)",
        "x = 1\u202f250\u202fmm",
        "top flange, left tip",
        "100\u202fMPa against 345\u202fMPa / 1.67, margin +1.06",
        "[rear pad]",
        "T_v = T − T_w",
        "(3\u202fkN·m) − (1\u202fkN·m)",
        "= 2\u202fkN·m",
        "source: a source that is made up",
        "check's source: no source: it is made up",
        "assumption: it is made up",
    ):
        assert text in printed
    page = finding._repr_html_()
    assert "T_v = T − T_w" in page
    assert "check&#x27;s source" in page  # text of a source can't become markup


def test_numbers_are_shown_in_the_machine_s_units():
    assert "in, " in found(units="us").verdict()
    assert "14.5\u202fksi against 50.04\u202fksi" in found(units="us").verdict()


@pytest.mark.parametrize("name", ["machine.toml", "machine-si.toml"])
def test_findings_of_the_demos_are_clean_json(name):
    machine = load(WORKSHEETS / name)
    results = findings_of(machine)
    again = json.loads(json.dumps([f.as_dict() for f in results], allow_nan=False))
    assert again == [f.as_dict() for f in results]
    for data, finding in zip(again, results, strict=True):
        assert data["id"] == finding.check.id
        if finding.applies:
            assert data["utilisation"] == pytest.approx(
                data["required_factor"] * data["demand"] / data["capacity"], rel=1e-15
            )
            assert data["margin"] == pytest.approx(1 / data["utilisation"] - 1, rel=1e-15)
            assert data["log"]["bound"]
            assert data["unit"] == "Pa"


def findings_of(machine):
    from splitcalc.checks import ALL

    return findings(ALL, machine.numbers(), machine.units)


@pytest.mark.parametrize("finding", [NOT_APPLICABLE, NOT_GIVEN, found(demand=0.0)])
def test_what_has_no_margin_is_null(finding):
    data = json.loads(json.dumps(finding.as_dict(), allow_nan=False))
    assert data["margin"] is None
    assert set(data) == set(found().as_dict())


def test_a_finding_is_frozen():
    with pytest.raises(dataclasses.FrozenInstanceError):
        found().demand = 0.0
