"""Saving a machine file: the changed values change, all else stays, and never half of it is there.

The system calls of a save are taken from its source: each is made to fail, and each is made the
last that the process ever does.
"""

import ast
import contextlib
import errno
import functools
import hashlib
import inspect
import itertools
import os
import shutil
import stat
from collections import Counter
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from splitcalc.inputs import Entry, InputError
from splitcalc.machine import save as saving
from splitcalc.machine.file import LARGEST_FILE, load, parse_machine
from splitcalc.machine.save import SaveError, save

WORKSHEETS = Path(__file__).resolve().parents[1] / "worksheets"
US, SI = ((WORKSHEETS / name).read_bytes().decode() for name in ("machine.toml", "machine-si.toml"))
POSIX = pytest.mark.skipif(os.name != "posix", reason="permissions and forks of POSIX")


@pytest.fixture
def path(tmp_path):
    """A machine file in a folder of its own."""
    path = tmp_path / "machine.toml"
    path.write_bytes(US.encode())
    return path


def swap(text, *changes):
    """The text with each `old -> new` done once; an `old` that isn't there once is an error."""
    for old, new in changes:
        assert text.count(old) == 1, old
        text = text.replace(old, new)
    return text


def contents(path):
    """What every file of the folder holds."""
    return {file.name: file.read_bytes() for file in path.parent.iterdir() if file.is_file()}


def check_saved(path, before, changes, after):
    """The save turns `before` into `after`, alone in its folder, and returns what is read there."""
    path.write_bytes(before)
    machine = load(path)
    result = save(path, machine, changes)
    assert contents(path) == {path.name: after}
    assert result == load(path)
    assert result.document == machine.changed(changes).document
    assert result.digest == hashlib.sha256(after).hexdigest()


# --- what is kept -------------------------------------------------------------------------------

CHANGES = {
    "cylinder.relief_pressure": "2900 psi",
    "beam.section": "W8x48",
    "beam.stiffeners[1].x": "59 in",
    "job.author": 'the "front" office\nÄ',
}
CHANGED = swap(
    US,
    ('"2850 psi"', '"2900 psi"'),
    ('"W8x67"', '"W8x48"'),
    ('"58 1/2 in"', '"59 in"'),
    ('"demo"', r'"the \"front\" office\nÄ"'),
)
OLD, NEW = US.encode(), CHANGED.encode()
LOOKS = {
    "as it is": lambda text: text,
    "CRLF": lambda text: text.replace("\n", "\r\n"),
    "byte order mark": lambda text: "\ufeff" + text,
    "both": lambda text: "\ufeff" + text.replace("\n", "\r\n"),
    "mixed line ends": lambda text: text.replace("\n", "\r\n", 20),
    "no last line end": lambda text: text.rstrip("\n"),
    "odd white space": lambda text: text.replace(" = ", "  =\t").replace("\n[", "\n\n\n  ["),
    "comments after values": lambda text: text.replace('"\n', '" # as built\n'),
    "comments at the end": lambda text: text + "\n# The end.\n\n\n",
}


@pytest.mark.parametrize("look", LOOKS)
def test_only_the_changed_values_change(path, look):
    check_saved(path, LOOKS[look](US).encode(), CHANGES, LOOKS[look](CHANGED).encode())


def us(old, new):
    return swap(US, (old, new))


# The section of the SI demo in all ways to write a table; its diaphragm fits no other section.
SIZES = SI[SI.index('shape = "plate box"') : SI.index("\n\n[[beam.stiff")].split("\n")
STIFFENER = SI[SI.index("[[beam.stiff") : SI.index("[moving_tool]")]
TABLE = "[beam.section]\n" + "\n".join(SIZES) + "\n"
PLAIN = swap(SI, (STIFFENER, ""))
BARE = swap(PLAIN, (TABLE + "\n", ""))
NAME = 'section = "W8x48"'
FRONT = 'front_end = "1950 mm"\n'
NAMED = swap(BARE, (FRONT, f"{FRONT}{NAME}\n"))
INLINE = f"section = {{ {', '.join(SIZES)} }}"
DOTTED = "".join(f"section.{line}\n" for line in SIZES)
BEAM = f'steel = "S355"\nrear_end = "-80 mm"\n{FRONT}'
NO_BEAM = swap(BARE, (f"[beam]\n{BEAM}\n", ""))
IN_ONE = ", ".join(BEAM.split("\n")[:-1])
ROWS = US[US.index("[[beam.stiff") : US.index("[moving_tool]")]
ROW = '  {{ x = "{}", kind = "full-depth pair" }},\n'
LIST = f'"76 in"\nstiffeners = [\n{ROW.format("58 in")}{ROW.format("69 in")}]\n'
TOOLS = us("\n[moving_tool]", "\n# --- the tools ---\n\n[moving_tool]")
WEDGE = us('"76 in"\n', '"76 in"\n\n# under the wedge\n')
SURGE = '\n[factors]\nsurge = "1.2"\nyield_extreme = "1.3"\n'
FACTORS = {"factors.surge": "1.2", "factors.yield_extreme": "1.3"}


def beam(lines):
    return "".join(f"beam.{line}\n" for line in lines.splitlines())


BORE, SECTION = {"cylinder.bore": "5 in"}, {"beam.section": "W8x48"}
PATCHES = {
    # name: (text of the file, changes, text of the file after that)
    "literal": (us('"4 1/2 in"', "'4 1/2 in'"), BORE, us('"4 1/2 in"', '"5 in"')),
    "long": (us('"4 1/2 in"', '"""4 1/2 in"""'), BORE, us('"4 1/2 in"', '"5 in"')),
    "key in quotes": (us("bore =", '"bore" ='), BORE, us('bore = "4 1/2 in"', '"bore" = "5 in"')),
    "comment, no space": (us('bore = "4 1/2 in"', 'bore="4 1/2 in"# ID'), BORE,
        us('bore = "4 1/2 in"', 'bore="5 in"# ID')),
    "same value": (us('"4 1/2 in"', "'4 1/2 in'"), {"cylinder.bore": "4 1/2 in"},
        us('"4 1/2 in"', "'4 1/2 in'")),
    "bare number": (US + "\n[factors]\nsurge = 1.1 # valve\n", {"factors.surge": "1.15"},
        US + '\n[factors]\nsurge = "1.15" # valve\n'),
    "row of a list in one": (swap(US, (ROWS, ""), ('"76 in"\n', LIST)),
        {"beam.stiffeners[2].x": "70 in"},
        swap(US, (ROWS, ""), ('"76 in"\n', LIST.replace("69 in", "70 in")))),
    "new key, comment after": (TOOLS, {"cylinder.mount_x": "1 in"},
        swap(TOOLS, ('"rear pin"\n', '"rear pin"\nmount_x = "1 in"\n'))),
    "new key, tables in its table": (WEDGE, {"beam.yield_strength": "52 ksi"},
        swap(WEDGE, ('"76 in"\n', '"76 in"\nyield_strength = "52 ksi"\n'))),
    "new key, no last line end": (US[:-1], {"logs.smallest_diameter": "2 in"},
        US + 'smallest_diameter = "2 in"\n'),
    "new key, dotted ones before": (
        swap(BARE, (FRONT, FRONT + DOTTED)), {"beam.shear_ratio": "0.4"},
        swap(BARE, (FRONT, f'{FRONT}{DOTTED}shear_ratio = "0.4"\n'))),
    "new table": (US, FACTORS, US + SURGE),
    "new table, no last line end": (US[:-1], FACTORS, US + SURGE),
    "new table, comment at the end": (US + "# End.\n", FACTORS, US + "# End.\n" + SURGE),
    "section": (PLAIN, SECTION, NAMED),
    "section, comments": (
        swap(PLAIN, (TABLE + "\n", f"# plates\n{TABLE}\n# then\n\n")), SECTION,
        swap(NAMED, (NAME + "\n\n", NAME + "\n\n# plates\n# then\n\n"))),
    "section at the top": (TABLE + "\n" + BARE, SECTION, NAMED),
    "section behind other tables": (swap(BARE, ("[sled]", TABLE + "\n[sled]")), SECTION, NAMED),
    "section at the end": (BARE + "\n" + TABLE[:-1], SECTION, NAMED + "\n"),
    "section, then the end": (f"{BARE}\n{TABLE}\n# End.\n", SECTION, NAMED + "\n# End.\n"),
    "section inline": (swap(BARE, (FRONT, f"{INLINE} # plates\n{FRONT}")), SECTION,
        swap(BARE, (FRONT, f"{NAME} # plates\n{FRONT}"))),
    "section dotted": (swap(BARE, (FRONT, f"# plates\n{DOTTED}{FRONT}")), SECTION,
        swap(NAMED, (FRONT, "# plates\n" + FRONT))),
    "section dotted twice": (beam(DOTTED + BEAM) + NO_BEAM, SECTION,
        swap(beam(BEAM) + NO_BEAM, ("beam.rear", f"beam.{NAME}\nbeam.rear"))),
    "section in an inline beam": (f"beam = {{ {IN_ONE}, {INLINE} }}\n{NO_BEAM}", SECTION,
        f"beam = {{ {IN_ONE}, {NAME} }}\n{NO_BEAM}"),
}  # fmt: skip


@pytest.mark.parametrize("look", ["as it is", "CRLF"])
@pytest.mark.parametrize("case", PATCHES, ids=lambda case: case.replace(" ", "-"))
def test_every_spelling_is_changed_in_its_place(path, case, look):
    before, changes, after = PATCHES[case]
    check_saved(path, LOOKS[look](before).encode(), changes, LOOKS[look](after).encode())


# --- any change of the demos --------------------------------------------------------------------


def other_lines(text, changes):
    """The lines of a demo that `changes` have no business with."""
    table, rows, lines = "", Counter(), []
    for line in text.split("\n"):
        name, equals, _ = line.strip().partition(" = ")
        key = ""
        if name.startswith("["):
            table = key = name.strip("[]")
            rows[name] += 1
            if name.startswith("[["):
                table = f"{table}[{rows[name]}]"
        elif equals and not name.startswith("#"):
            key = f"{table}.{name}"
        if key == "factors":  # no demo has this table: it came with the blank line before it
            assert lines.pop().strip() == ""
        elif key in changes or ("beam.section" in changes and table == "beam.section"):
            continue  # that of a section ends with a blank line, which goes along
        else:
            lines.append(line)
    return lines


def another(fact, value):
    """Texts for an input that may or may not be fit."""
    if fact.options:
        return st.sampled_from(fact.options)
    if fact.dimension is None:
        return st.text(st.characters(exclude_categories=["Cs"]), max_size=30)
    number, _, unit = value.text.rpartition(" ") if isinstance(value, Entry) else ("", "", "")
    if not number.replace(".", "").isdigit():
        return st.sampled_from(["2 in", "50 mm", "0.35", "1.7", "350 MPa"])
    return st.floats(0.98, 1.02).map(lambda by: f"{float(number) * by:.4g} {unit}")


@settings(max_examples=150, deadline=None)
@given(st.data())
def test_any_change_is_the_one_the_page_showed_and_the_rest_stays(tmp_path_factory, data):
    text = data.draw(st.sampled_from([US, PLAIN]))
    inputs = {
        key: another(fact, value) for key, fact, value, _ in parse_machine(text.encode()).inputs()
    }
    if text is US or data.draw(st.booleans()):
        inputs = {key: texts for key, texts in inputs.items() if not key.startswith("beam.section")}
        inputs["beam.section"] = st.sampled_from(["W8x48", "HSS8x8x1/2", "W10x60", "W1"])
    keys = data.draw(st.lists(st.sampled_from(sorted(inputs)), max_size=6, unique=True))
    changes = {key: data.draw(inputs[key]) for key in keys}
    path = tmp_path_factory.getbasetemp() / "any.toml"
    before = LOOKS[data.draw(st.sampled_from(["as it is", "both"]))](text)
    path.write_bytes(before.encode())
    machine = load(path)
    try:
        wanted = machine.changed(changes).document
    except InputError:
        with pytest.raises(InputError):
            save(path, machine, changes)
        assert path.read_bytes() == before.encode()
        return
    assert save(path, machine, changes).document == load(path).document == wanted
    assert other_lines(path.read_bytes().decode(), changes) == other_lines(before, changes)


# --- what is refused, with nothing written ------------------------------------------------------


def check_refused(path, machine, changes, phrase, kind=SaveError):
    """The save is refused in one sentence, and the folder is as it was."""
    before = contents(path)
    with pytest.raises(kind, match=phrase) as caught:
        save(path, machine, changes)
    assert contents(path) == before
    if kind is SaveError:
        said = str(caught.value)
        assert str(path) in said
        assert "; nothing was " in said
        assert said.endswith(".")
        assert "\n" not in said


def test_one_page_saves_twice_and_a_second_one_is_told(path):
    one, two = load(path), load(path)
    one = save(path, one, {"cylinder.bore": "5 in"})
    check_refused(path, two, {"cylinder.rod": "2 in"}, "changed on disk since it was read")
    save(path, one, {"cylinder.rod": "2 in"})
    both = swap(US, ('"4 1/2 in"', '"5 in"'), ('"2 1/4 in"', '"2 in"'))
    assert path.read_bytes() == both.encode()


def test_a_file_that_grew_without_end_has_changed(path):
    machine = load(path)
    os.truncate(path, 3 * LARGEST_FILE)
    calls = []
    with watched(lambda _, name, call: (calls.append(name), call())[1]):
        check_refused(path, machine, CHANGES, "changed on disk")
    assert calls.count("read") == 1  # and is not read to its end


@pytest.mark.parametrize(
    ("changes", "phrase", "kind"),
    [
        ({"cylinder.bore": "5 psi"}, "cylinder.bore", InputError),
        ({"cylinder.boar": "5 in"}, "cylinder.boar", InputError),
        ({"cylinder.bore": "5 in", "cylinder.rod": "6 in"}, "cylinder.rod", InputError),
        ({"paint.coat": "red"}, "paint", InputError),
        ({"beam.stiffeners[3].x": "1 in"}, "there are 2 tables", KeyError),
        ({"beam.section.d": "9 in"}, "section is no table", KeyError),
        ({"job.notes": "half a letter: \ud83e"}, "can't be changed in place", SaveError),
    ],
    ids=lambda case: case if isinstance(case, str) else None,
)
def test_what_can_not_be_a_machine_file_is_not_written(path, changes, phrase, kind):
    check_refused(path, load(path), changes, phrase, kind)


def test_a_patch_that_went_wrong_is_never_written(path, monkeypatch):
    another_good_one = us('"2 1/4 in"', '"2 in"').encode()
    monkeypatch.setattr(saving, "_patched", lambda data, changes: another_good_one)
    check_refused(path, load(path), BORE, "can't be changed in place")


@pytest.mark.parametrize("gone", ["file", "folder"])
def test_a_file_that_is_gone_is_not_made_anew(path, gone):
    machine = load(path)
    path.unlink() if gone == "file" else shutil.rmtree(path.parent)
    with pytest.raises(SaveError, match="no longer there; nothing was changed"):
        save(path, machine, CHANGES)
    assert not path.exists()


@POSIX
@pytest.mark.parametrize("what", ["file", "folder"])
def test_read_only_is_respected_even_by_an_administrator(path, what):
    machine, place = load(path), path if what == "file" else path.parent
    mode = stat.S_IMODE(place.stat().st_mode)
    place.chmod(mode & ~0o222)
    try:
        check_refused(path, machine, CHANGES, "read-only")
    finally:
        place.chmod(mode)


def test_a_file_that_somebody_else_may_write_is_refused(path, monkeypatch):
    monkeypatch.setattr(os, "access", lambda place, right: not os.path.isfile(place))
    check_refused(path, load(path), CHANGES, "read-only")


@POSIX
def test_a_link_stays_a_link_and_its_target_is_written(path):
    target = path.rename(path.with_name("real.toml"))
    path.symlink_to(target.name)
    save(path, load(path), CHANGES)
    assert path.is_symlink()
    assert contents(path) == {path.name: NEW, target.name: NEW}


@POSIX
@pytest.mark.parametrize("mode", [0o600, 0o640, 0o666, 0o777])
def test_permissions_are_kept(path, mode):
    path.chmod(mode)
    save(path, load(path), CHANGES)
    assert stat.S_IMODE(path.stat().st_mode) == mode


# --- each system call fails, or is the last one -------------------------------------------------

SOURCE = ast.walk(ast.parse(inspect.getsource(saving)))
CALLED = {ast.unparse(node.func) for node in SOURCE if isinstance(node, ast.Call)}
CALLS = {name[3:] for name in CALLED if name.startswith("os.") and name.count(".") == 1}
CALLS = CALLS - {"strerror"} | {"lstat", "readlink"}  # which os.path.realpath calls


@contextlib.contextmanager
def watched(act):
    """Every system call of a save goes through `act(number, name, call)`."""
    numbers = itertools.count()

    def through(name, function):
        def stand_in(*args, **options):
            return act(next(numbers), name, functools.partial(function, *args, **options))

        return stand_in

    with pytest.MonkeyPatch.context() as patch:
        for name in CALLS:
            patch.setattr(os, name, through(name, getattr(os, name)))
        yield


def calls_of_a_save(path):
    """The names of its system calls in order, and the number of the one that replaces the file."""
    machine, names = load(path), []
    save(path, machine, {})  # imports what a save needs
    with watched(lambda _, name, call: (names.append(name), call())[1]):
        save(path, machine, CHANGES)
    return names, names.index("replace")


@POSIX
def test_a_save_takes_the_safe_steps_in_order(path):
    names, _ = calls_of_a_save(path)
    assert names[names.index("write") :] == [
        *("write", "chmod", "fsync", "close"),  # all of the new file is on the disk
        *("open", "read", "read", "close"),  # and the old one is still the one that was read
        "replace",
        *("open", "fsync", "close"),  # the folder
    ]


FAULTS = {
    errno.ENOSPC: "no room left",
    errno.EDQUOT: "no room left",
    errno.EACCES: "read-only",
    errno.EROFS: "read-only",
    errno.EIO: os.strerror(errno.EIO),
}


@pytest.mark.parametrize("fault", FAULTS, ids=errno.errorcode.get)
def test_whichever_call_fails_the_file_is_whole_and_the_person_is_told(path, fault):
    names, replacement = calls_of_a_save(path)

    def fail(number, name, call):
        if number != failing:
            return call()
        if name == "close":
            call()  # a close that fails has closed all the same
        raise OSError(fault, os.strerror(fault))

    for failing in range(len(names)):
        path.write_bytes(OLD)
        machine = load(path)
        # Once the new file is in place, a folder that can't be synced is no error.
        told = failing <= replacement
        refusal = pytest.raises(SaveError, match=FAULTS[fault])
        with watched(fail), refusal if told else contextlib.nullcontext():
            save(path, machine, CHANGES)
        assert contents(path) == {path.name: OLD if told else NEW}, (failing, names[failing])


def half(call):
    file, data = call.args
    return call.func(file, data[: (len(data) + 1) // 2])


def stop():
    raise KeyboardInterrupt("by hand")


THEIRS = us("HF-25", "HF-26").encode()
EVENTS = {
    # name: (what happens at the first fsync, what the save says, what the folder holds then)
    "interrupted": (lambda path: stop(), KeyboardInterrupt, "by hand", {"machine.toml": OLD}),
    "changed by another": (lambda path: path.write_bytes(THEIRS), SaveError, "changed on disk",
        {"machine.toml": THEIRS}),
    "removed by another": (lambda path: path.unlink(), SaveError, "no longer there", {}),
}  # fmt: skip


@pytest.mark.parametrize("event", EVENTS)
def test_what_happens_meanwhile_is_not_undone(path, event):
    act, kind, phrase, left = EVENTS[event]
    machine = load(path)
    with (
        watched(lambda _, name, call: (act(path) if name == "fsync" else None, call())[1]),
        pytest.raises(kind, match=phrase),
    ):
        save(path, machine, CHANGES)
    assert contents(path) == left


def test_short_writes_are_carried_on(path):
    machine = load(path)
    with watched(lambda _, name, call: half(call) if name == "write" else call()):
        save(path, machine, CHANGES)
    assert contents(path) == {path.name: NEW}


LAST_ACTS = {
    "before": lambda name, call: None,
    "half way": lambda name, call: half(call),  # of a write
    "after": lambda name, call: call(),
}


@POSIX
@pytest.mark.parametrize("when", LAST_ACTS)
def test_wherever_the_process_dies_the_file_is_the_old_or_the_new_one(path, when):
    names, replacement = calls_of_a_save(path)

    def die(number, name, call):
        if number != last:
            return call()
        LAST_ACTS[when](name, call)
        os._exit(77)

    for last, name in enumerate(names):
        if when == "half way" and name != "write":
            continue
        path.write_bytes(OLD)
        machine = load(path)
        child = os.fork()
        if child == 0:
            try:
                with watched(die):
                    save(path, machine, CHANGES)
            finally:
                os._exit(1)  # it lived, or something else went wrong
        assert os.waitstatus_to_exitcode(os.waitpid(child, 0)[1]) == 77, (last, name)
        new = last > replacement or (last == replacement and when == "after")
        left = contents(path)
        assert left.pop(path.name) == (NEW if new else OLD), (last, name)
        save(path, load(path), {"job.date": "the day after"})  # it can be used and saved again
        assert len(left) <= 1
        for part in left:
            assert part.startswith(".splitcalc-")
            path.with_name(part).unlink()
