"""What waits to be saved survives a restart, and a spoilt draft is as good as none."""

import json
import os
import stat

import pytest
from hypothesis import given
from hypothesis import strategies as st

from splitcalc.machine.draft import LARGEST_DRAFT, Draft, drop, keep, kept
from splitcalc.machine.save import SaveError

DIGEST = "0123456789abcdef" * 4
DRAFT = Draft(
    DIGEST,
    {"diameter": 0.4, "y_off": -0.02, "length": 1, "state": "crushing", "pivot": "größter Ast"},
    {"cylinder.bore": "4 1/2 in", "beam.section": "W8x48", "job.notes": 'two\nlines, "quoted"'},
)
POSIX = pytest.mark.skipif(os.name != "posix", reason="links and permissions of POSIX")
GOOD = {"machine": DIGEST, "values": {"diameter": 0.4}, "changes": {"job.date": "today"}}


@pytest.fixture
def machine(tmp_path):
    """The machine file that the drafts belong to. It need not even be there."""
    return tmp_path / "machine.toml"


@pytest.fixture
def place(tmp_path):
    return tmp_path / ".machine.toml.draft"


def test_a_draft_comes_back_as_it_was(machine, place):
    assert kept(machine) is None
    keep(machine, DRAFT)
    assert kept(machine) == DRAFT
    assert [path.name for path in machine.parent.iterdir()] == [place.name]


def test_a_newer_draft_takes_the_place_of_the_older(machine):
    keep(machine, DRAFT)
    newer = Draft(DIGEST, {}, {"job.date": "today"})
    keep(machine, newer)
    assert kept(machine) == newer


def test_each_machine_file_has_its_own(machine):
    keep(machine, DRAFT)
    assert kept(machine.with_name("machine-2.toml")) is None


@given(
    st.builds(
        Draft,
        st.just(DIGEST),
        st.dictionaries(st.text(), st.floats(allow_nan=False, allow_infinity=False) | st.text()),
        st.dictionaries(st.text(), st.text()),
    )
)
def test_any_draft_comes_back_to_the_last_bit(tmp_path_factory, draft):
    machine = tmp_path_factory.getbasetemp() / "any.toml"
    keep(machine, draft)
    assert kept(machine) == draft


def test_the_good_one_of_the_next_test_is_good(machine, place):
    place.write_text(json.dumps(GOOD))
    assert kept(machine) == Draft(**GOOD)


def with_value(text):
    return json.dumps(GOOD).replace("0.4", text)


SPOILT = {
    "empty": "",
    "cut off": json.dumps(GOOD)[:-1],
    "more after it": json.dumps(GOOD) + "{}",
    "not JSON": "values: {}",
    "not UTF-8": b"\xff\xfe\x00",
    "zeros, as a power cut leaves them": bytes(300),
    "a list": json.dumps([GOOD]),
    "a number": "1",
    "null": "null",
    "a part missing": json.dumps({k: v for k, v in GOOD.items() if k != "values"}),
    "a part too many": json.dumps({**GOOD, "code": "1"}),
    "nested without end": "[" * 100_000,
    "digest is a number": json.dumps({**GOOD, "machine": 1}),
    "digest too short": json.dumps({**GOOD, "machine": DIGEST[1:]}),
    "digest with a line end": json.dumps({**GOOD, "machine": DIGEST + "\n"}),
    "values are a list": json.dumps({**GOOD, "values": ["diameter"]}),
    "values are null": json.dumps({**GOOD, "values": None}),
    "changes are text": json.dumps({**GOOD, "changes": "job.date"}),
    "a change is a number": json.dumps({**GOOD, "changes": {"job.date": 1}}),
    "a change is a table": json.dumps({**GOOD, "changes": {"job": {"date": "today"}}}),
    "a value is true": with_value("true"),
    "a value is null": with_value("null"),
    "a value is a list": with_value("[0.4]"),
    "a value is NaN": with_value("NaN"),
    "a value is Infinity": with_value("-Infinity"),
    "a value is too large for a float": with_value("1e999"),
    "a value has endless digits": with_value("9" * 400),
    "huge": json.dumps(GOOD) + " " * LARGEST_DRAFT,
}


@pytest.mark.parametrize("case", SPOILT, ids=lambda case: case.replace(" ", "-"))
def test_a_spoilt_draft_is_none_and_makes_room_for_the_next(machine, place, case):
    data = SPOILT[case]
    place.write_bytes(data if isinstance(data, bytes) else data.encode())
    assert kept(machine) is None
    keep(machine, DRAFT)
    assert kept(machine) == DRAFT


def test_a_folder_in_its_place_is_none(machine, place):
    place.mkdir()
    assert kept(machine) is None
    with pytest.raises(SaveError, match="irectory"):
        keep(machine, DRAFT)
    with pytest.raises(SaveError, match="nothing was changed"):
        drop(machine)
    assert place.is_dir()
    assert [path.name for path in machine.parent.iterdir()] == [place.name]


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="no named pipes here")
def test_a_pipe_in_its_place_is_not_waited_for(machine, place):
    os.mkfifo(place)
    assert kept(machine) is None


@pytest.mark.parametrize(
    "parts",
    [
        {"machine": "abc"},
        {"values": {"diameter": float("nan")}},
        {"values": {"diameter": True}},
        {"values": {1: 0.4}},
        {"changes": {"cylinder.bore": 0.1}},
    ],
    ids=str,
)
def test_what_could_not_be_read_again_can_not_be_made(parts):
    with pytest.raises(ValueError, match=r"machine|values|changes"):
        Draft(**{**GOOD, **parts})


def test_a_draft_too_large_to_be_read_again_leaves_the_older_one(machine):
    keep(machine, DRAFT)
    with pytest.raises(SaveError, match="too large"):
        keep(machine, Draft(DIGEST, {}, {"job.notes": "x" * LARGEST_DRAFT}))
    assert kept(machine) == DRAFT


@POSIX
def test_a_read_only_folder_is_said_and_still_read(machine):
    keep(machine, DRAFT)
    folder = machine.parent
    mode = stat.S_IMODE(folder.stat().st_mode)
    folder.chmod(0o555)
    try:
        with pytest.raises(SaveError, match="read-only"):
            keep(machine, Draft(DIGEST, {}, {}))
        assert kept(machine) == DRAFT
    finally:
        folder.chmod(mode)


@POSIX
def test_a_link_in_its_place_is_written_through(machine, place):
    target = machine.with_name("elsewhere")
    place.symlink_to(target)
    keep(machine, DRAFT)
    assert place.is_symlink()
    assert not target.is_symlink()
    assert kept(machine) == DRAFT


@POSIX
def test_a_link_to_itself_is_none_and_said(machine, place):
    place.symlink_to(place)
    assert kept(machine) is None
    with pytest.raises(SaveError, match=r"can't be written: .*; nothing was changed"):
        keep(machine, DRAFT)


@POSIX
def test_a_new_draft_has_the_usual_permissions(machine, place):
    umask = os.umask(0o027)
    try:
        keep(machine, DRAFT)
    finally:
        os.umask(umask)
    assert stat.S_IMODE(place.stat().st_mode) == 0o640


def test_a_name_too_long_for_the_disk_is_none_and_said(tmp_path):
    machine = tmp_path / ("m" * 250)
    assert kept(machine) is None
    with pytest.raises(SaveError, match="can't be written"):
        keep(machine, DRAFT)


def test_a_folder_that_is_gone_is_said(tmp_path):
    machine = tmp_path / "gone" / "machine.toml"
    assert kept(machine) is None
    with pytest.raises(SaveError, match="no longer there"):
        keep(machine, DRAFT)
    drop(machine)


def test_a_draft_is_dropped_once_and_again(machine):
    keep(machine, DRAFT)
    drop(machine)
    assert kept(machine) is None
    drop(machine)
    assert list(machine.parent.iterdir()) == []
