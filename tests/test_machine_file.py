"""The machine file: what is read, what is kept, and what is said of a file that can't be used."""

import dataclasses
import hashlib
import json
import math
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from splitcalc.inputs import InputError
from splitcalc.machine.file import LARGEST_FILE, Machine, load, parse_machine
from splitcalc.units import Dimension, UnitError, parse

WORKSHEETS = Path(__file__).resolve().parents[1] / "worksheets"
US, SI = (
    (WORKSHEETS / name).read_text(encoding="utf-8") for name in ("machine.toml", "machine-si.toml")
)


def changed(base, *changes):
    """The file's text with each `old -> new` done once; an `old` that isn't there is an error."""
    for old, new in changes:
        assert old in base
        base = base.replace(old, new, 1)
    return base


def read(text):
    return parse_machine(text if isinstance(text, bytes) else text.encode())


def outcome(text):
    """The machine, or what is wrong with the file."""
    try:
        return read(text)
    except InputError as error:
        return error.problems


def refused(text):
    with pytest.raises(InputError) as caught:
        read(text)
    return caught.value


# --- files that can be used ---------------------------------------------------------------------


@pytest.mark.parametrize("name", ["machine.toml", "machine-si.toml"])
def test_the_demos_are_read(name):
    data = (WORKSHEETS / name).read_bytes()
    machine = load(WORKSHEETS / name)
    assert "(invented)" in machine.title
    assert machine.digest == hashlib.sha256(data).hexdigest()
    assert machine == parse_machine(data)
    assert hash(machine) == hash(parse_machine(data))
    assert all_finite(machine.numbers())


def test_text_is_kept_as_typed_beside_its_value():
    cylinder = read(US).document.cylinder
    assert cylinder.bore.text == "4 1/2 in"
    assert cylinder.bore.si == pytest.approx(4.5 * 0.0254, rel=1e-15)
    odd = read(changed(US, ("4 1/2 in", "4.50  inch"))).document.cylinder
    assert odd.bore.text == "4.50  inch"
    assert odd.bore.si == cylinder.bore.si


def test_defaults_are_taken_and_told_apart_from_what_was_typed():
    machine = read(US)
    assert machine.document.cylinder.mount_x.text == "0 mm"
    assert machine.document.factors.surge.si == pytest.approx(1.10)
    assert machine.document.beam.yield_strength is None
    given_keys = {key for key, _, _, typed in machine.inputs() if typed}
    assert {"cylinder.bore", "beam.section.d", "beam.stiffeners[2].x"} <= given_keys
    assert not {"cylinder.mount_x", "factors.surge", "beam.yield_strength"} & given_keys
    keys = [key for key, _, _, _ in machine.inputs()]
    assert len(keys) == len(set(keys))


def test_every_default_with_a_reason_is_an_assumption_until_it_is_typed():
    taken = read(US).assumptions()
    assert any("[factors.surge]" in line and "1.10" in line for line in taken)
    assert any("[beam.yield_strength]" in line for line in taken)
    assert not any("[cylinder.bore]" in line for line in taken)
    typed = read(US + '\n[factors]\nsurge = "1.10"\n').assumptions()
    assert len(typed) == len(taken) - 1
    assert not any("[factors.surge]" in line for line in typed)


def test_a_machine_is_frozen_and_compares_by_what_is_in_it():
    machine = read(US)
    with pytest.raises(dataclasses.FrozenInstanceError):
        machine.digest = ""
    with pytest.raises(dataclasses.FrozenInstanceError):
        machine.document.cylinder.bore = machine.document.cylinder.rod
    other = read(changed(US, ('rod = "2 1/4 in"', 'rod = "2 1/2 in"')))
    assert other != machine
    assert other.document != machine.document
    assert other.document.beam == machine.document.beam


@pytest.mark.parametrize(
    "data",
    [
        b"\xef\xbb\xbf" + US.encode(),
        US.replace("\n", "\r\n").encode(),
        US.rstrip("\n").encode(),
        US.replace("4 1/2 in", "4 1/2\N{DOUBLE PRIME}").encode(),
        US.replace('"W8x67"', '"w 8 × 67"').encode(),
    ],
    ids=["byte order mark", "CRLF", "no last newline", "typographic inches", "name as spoken"],
)
def test_what_editors_do_to_a_file_changes_no_number(data):
    machine, plain = read(data), read(US)
    assert machine.digest == hashlib.sha256(data).hexdigest() != plain.digest
    pairs = zip(flat(machine.numbers()), flat(plain.numbers()), strict=True)
    assert all(np.array_equal(a, b) for a, b in pairs)


def test_a_section_from_the_tables_is_the_same_as_its_dimensions_typed_out():
    # W8x67: d 9.00, b_f 8.28, t_f 0.935, t_w 0.570 in (AISC shapes, from memory); the root fillet
    # is whatever the table of the project says
    table = read(US).document.beam.section
    rows = "".join(f'{f.name} = "{getattr(table, f.name).text}"\n' for f in fields(table))
    typed = read(with_section(f'shape = "rolled I"\n{rows}'))
    assert typed.document.beam.section == table
    assert typed.section_name == "W8x67"
    for key, inches in (("d", 9.00), ("b_f", 8.28), ("t_f", 0.935), ("t_w", 0.570)):
        assert getattr(table, key).si == pytest.approx(inches * 0.0254, rel=1e-12)


# --- files that can't be used -------------------------------------------------------------------

THICK = """shape = "plate I"
d = "12 in"\nb_t = "10 in"\nt_t = "2 in"\nb_b = "10 in"\nt_b = "2 in"\nt_w = "1 in" """
ROLLED = {"d": "200 mm", "b_f": "200 mm", "t_f": "15 mm", "t_w": "9 mm", "r": "18 mm"}
ZONE = '\n[[beam.closed_zones]]\nstart = "{}"\nend = "{}"\nkind = "side plates"\n'
STIFFENERS = US[US.index("[[beam.stiffeners]]") : US.index("[moving_tool]")]


def with_section(body, base=US):
    return changed(base, ('section = "W8x67"\n', "")) + f"\n[beam.section]\n{body}\n"


def rolled(**changes):
    sizes = {"shape": "rolled I", **ROLLED, **changes}
    return with_section("\n".join(f'{k} = "{v}"' for k, v in sizes.items() if v))


def us(old, new):
    return changed(US, (old, new))


WRONG = {
    # name: (text of the file, key that must be named, phrases that its message must have)
    "unknown key, near": (us("bore =", "boar ="), "cylinder.boar", ['did you mean "bore"?']),
    "unknown key": (us("bore =", 'colour = "red"\nbore ='),
        "cylinder.colour", ["unknown key", "relief_press"]),
    "unknown table": (US + '[paint]\ncoat = "red"\n', "paint", ["unknown key", "sled, logs"]),
    "unknown table, near": (us("[sled]", "[sledge]"), "sledge", ['did you mean "sled"?']),
    "missing table": (us("[sled]", "[sledge]"), "sled", ["missing", "[sled]"]),
    "missing number": (us('stroke = "24 in"\n', ""), "cylinder.stroke", ["missing", " in"]),
    "missing choice": (us('steel = "A992"\n', ""), "beam.steel", ["missing", "A36, A572-50"]),
    "missing section": (us('section = "W8x67"\n', ""), "beam.section", ["missing"]),
    "empty file": ("", "cylinder", ["missing", "[cylinder]"]),
    "true for a number": (us('"4 1/2 in"', "true"), "cylinder.bore", ["rue", " in"]),
    "list for a number": (us('"4 1/2 in"', '["4 in"]'), "cylinder.bore", ["bore", " in"]),
    "number for text": (us('"HF-25"', "25"), "job.number", ["25", "in quotes"]),
    "text for a table": ('logs = "any"\n' + US[: US.index("[logs]")],
        "logs", ["any", "a table is wanted"]),
    "list for a table": (us("[logs]", "[[logs]]"), "logs", ["a table is wanted"]),
    "table for a list": (
        changed(US, (STIFFENERS, '[beam.stiffeners]\nx = "58 in"\nkind = "diaphragm"\n')),
        "beam.stiffeners", ["[[", "stiffeners]]"]),
    "text for a list": (changed(US, (STIFFENERS, ""), ('"76 in"', '"76 in"\nstiffeners = "none"')),
        "beam.stiffeners", ["[[", "stiffeners]]"]),
    "unknown key in a list": (us('x = "69 1/2 in"', 'at = "69 1/2 in"'),
        "beam.stiffeners[2].at", ["x, kind"]),
    "bare number": (us('"4 1/2 in"', "4.5"), "cylinder.bore", ["no unit", "mm, cm, m, in, ft"]),
    "no unit": (us('"4 1/2 in"', '"4.5"'), "cylinder.bore", ["no unit", "mm, cm, m, in, ft"]),
    "nan": (us('"4 1/2 in"', "nan"), "cylinder.bore", ["nan", "no number"]),
    "ton": (us('"2850 psi"', '"25 ton"'),
        "cylinder.relief_pressure", ["several things", "bar, MPa"]),
    "comma": (us('"4 1/2 in"', '"4,5 in"'), "cylinder.bore", ["comma", "decimal point"]),
    "other kind of unit": (us('"4 1/2 in"', '"4 psi"'), "cylinder.bore", ["not a length"]),
    "too large": (us('"4 1/2 in"', '"45 in"'), "cylinder.bore", ['"45 in"', " to 19.69"]),
    "too large, mm": (changed(SI, ('"110 mm"', '"1100 mm"')),
        "cylinder.bore", ['"1100 mm"', "20", " to 500"]),
    "too small": (US + "[factors]\nsurge = 0.9\n", "factors.surge", ['"0.9"', "1 to 2"]),
    "choice, near": (us('"plain"', '"plane"'), "moving_tool.grip", ['"worn"', 'mean "plain"?']),
    "choice": (us('"rear pin"', '"glue"'), "cylinder.mount", ['"glue"', '"trunnion"']),
    "steel": (us('"A992"', '"A998"'), "beam.steel", ['"S355"', 'mean "A992"?']),
    "section not in the tables": (us("W8x67", "W8x68"),
        "beam.section", ["not in the tables", "near: W8x67", "plate box"]),
    "section as a number": (us('"W8x67"', "8"), "beam.section", ["8", "a section's name"]),
    "wrong shape": (rolled(shape="rolled H"), "beam.section", ["rolled H", "rolled I, plate I"]),
    "no shape": (rolled(shape=""), "beam.section", ["shape", "rolled I, plate I"]),
    "missing dimension": (rolled(r=""), "beam.section.r", ["missing", "root fillet radius"]),
    "unknown dimension": (rolled(tf="15 mm"), "beam.section.tf", ['did you mean "t_f"?']),
    "wall out of range": (rolled(t_w="0.2 mm"), "beam.section.t_w", ['"0.2 mm"', "1", " to 100"]),
    "no web left": (rolled(t_f="80 mm"), "beam.section.d", ["less than a fifth of the depth"]),
    "web wider than flange": (rolled(t_w="95 mm"), "beam.section.t_w", ["narrower"]),
    # the torsion formula of rolled shapes ends before: its J is below zero here
    "web far thicker than the flanges": (rolled(t_w="70 mm", r="0 mm"),
        "beam.section.t_w", ["t_f"]),
    "no flat wall": (
        with_section('shape = "hollow"\nH = "2 in"\nB = "2 in"\nT = "1/2 in"\nmade_to = "A500"'),
        "beam.section.T", ["no flat wall", "2·r + T"]),
    "box plate narrower than its webs": (changed(SI, ('b_t = "220 mm"', 'b_t = "150 mm"')),
        "beam.section.b_t", ["as wide as c"]),
    "box webs touch": (changed(SI, ('c = "170 mm"', 'c = "33 mm"')),
        "beam.section.c", ["at least 3·t_w"]),
    "steel too thick": (changed(with_section(THICK), ('"A992"', '"A500B"')),
        "beam.steel", ["A500B", "give beam.yield_strength"]),
    "both tools wedge": (us('"push plate"', '"wedge"'),
        "fixed_tool.kind", ['both tools are "wedge"', "one must"]),
    "both tools plate": (us('"wedge"', '"push plate"'),
        "fixed_tool.kind", ['both tools are "push plate"']),
    "contact above the tool": (us('grip = "plain"', 'contact_high = "7 in"'),
        "moving_tool.contact_high", ['"7 in"', "on the tool"]),
    "contact below the tool": (us('grip = "plain"', 'contact_low = "1/4 in"'),
        "moving_tool.contact_low", ['"1/4 in"', "on the tool"]),
    "contact beside the plate": (us('grip = "plain"', 'contact_half_width = "3 1/2 in"'),
        "moving_tool.contact_half_width", ["more than half of the width", '"6 in"']),
    "log longer than the opening": (us('longest = "24 in"', 'longest = "26 in"'),
        "logs.longest", ["smallest_gap + stroke"]),
    "shortest over longest": (us('shortest = "10 in"', 'shortest = "25 in"'),
        "logs.shortest", ["more than longest"]),
    "gap over shortest": (us('smallest_gap = "1 in"', 'smallest_gap = "11 in"'),
        "logs.smallest_gap", ["never reaches the shortest log", '"10 in"']),
    "thinnest over thickest": (us("[logs]", '[logs]\nsmallest_diameter = "21 in"'),
        "logs.smallest_diameter", ["more than largest_diameter"]),
    "cylinder does not fit": (us('edge_x = "57 in"', 'edge_x = "45 in"'),
        "cylinder.stroke", ["does not fit", "edge_x"]),
    "face behind the beam": (
        changed(US, ('edge_x = "57 in"', 'edge_x = "20 in"'), ('"rear pin"', '"trunnion"')),
        "fixed_tool.edge_x", ["behind the beam's rear end"]),
    "rod as thick as the bore": (us('rod = "2 1/4 in"', 'rod = "4 1/2 in"'),
        "cylinder.rod", ["less than the bore"]),
    "beam ends before it starts": (us('front_end = "76 in"', 'front_end = "-4 in"'),
        "beam.front_end", ["ahead of", '"-3 in"']),
    "weld ends before it starts": (us('weld_end = "70 in"', 'weld_end = "57 1/2 in"'),
        "fixed_tool.weld_end", ["ahead of weld_start", '"58 in"']),
    "weld off the beam": (us('weld_end = "70 in"', 'weld_end = "77 in"'),
        "fixed_tool.weld_end", ["on the beam", '"-3 in" to "76 in"']),
    "stiffener off the beam": (us('x = "69 1/2 in"', 'x = "80 in"'),
        "beam.stiffeners[2].x", ["on the beam", '"76 in"']),
    "stiffener for a box": (us('"full-depth pair"', '"diaphragm"'),
        "beam.stiffeners[1].kind", ["rolled I", "full-depth pair, part-depth pair"]),
    "stiffener for an I": (changed(SI, ('"diaphragm"', '"full-depth pair"')),
        "beam.stiffeners[1].kind", ["plate box", "allowed: diaphragm"]),
    "closed stretch too short": (US + ZONE.format("50 in", "54 in"),
        "beam.closed_zones[1]", ["shorter than the section"]),
    "closed stretches overlap": (US + ZONE.format("30 in", "40 in") + ZONE.format("39 in", "50 in"),
        "beam.closed_zones[2]", ["in order and apart"]),
    "closed stretch of a closed section": (SI + ZONE.format("500 mm", "900 mm"),
        "beam.closed_zones[1]", ["closed already"]),
    "rod alone": (us("[sled]", '[sled]\nguide = "rod alone"'),
        "sled.guide", ["method does not apply"]),
    "continuous guide with pads": (
        us("[sled]", '[sled]\nguide = "continuous"\nguide_front = "1 in"\nguide_length = "12 in"'),
        "sled.pad_length", ['not used with guide = "continuous"']),
    "continuous guide without length": (us("[sled]", '[sled]\nguide = "continuous"'),
        "sled.guide_length", ["missing"]),
    "pads without a place": (us('front_pad = "2 in"\n', ""), "sled.front_pad", ["two pads"]),
    "pads overlap": (us('rear_pad = "11 in"', 'rear_pad = "4 in"'),
        "sled.rear_pad", ["overlap", "at least"]),
    "front pad past the weld": (us('front_pad = "2 in"', 'front_pad = "-1 in"'),
        "sled.front_pad", ["at full stroke", "root weld", '"58 in"']),
    "rear pad behind the beam": (us('rear_pad = "11 in"', 'rear_pad = "40 in"'),
        "sled.rear_pad", ["beam's rear end"]),
    "strip off the flange": (us('push_strip = "3 in"', 'push_strip = "5 in"'),
        "sled.push_strip", ["off the flange", "half width"]),
    "not TOML": (us('"2 1/4 in"', "2 1/4 in"), "file", ["not TOML", "line 18"]),
    "duplicate key": (us("rod =", 'rod = "2 in"\nrod ='), "file", ["not TOML", "line 19"]),
    "duplicate table": (US + "[logs]\n", "file", ["not TOML", f"line {US.count(chr(10)) + 1}"]),
    "endless number": (us('"4 1/2 in"', "9" * 5000), "file", ["not TOML"]),
    "nested without end": ("a = " + "[" * 5000, "file", ["not TOML"]),
    "Latin-1": (us("(invented)", "é").encode("latin-1"), "file", ["line 6", "UTF-8"]),
    "huge": (US.encode() + b"#" * LARGEST_FILE, "file", [str(LARGEST_FILE)]),
    "endless text": (us("Harrow Fold yard", "x" * 10_001), "job.title", ["at most 10000"]),
}  # fmt: skip


@pytest.mark.parametrize("case", WRONG, ids=lambda case: case.replace(" ", "-"))
def test_a_wrong_file_is_told_by_key_and_cure_without_python(case):
    text, key, phrases = WRONG[case]
    error = refused(text)
    told = [problem.message for problem in error.problems if problem.key == key]
    assert told, str(error)
    assert all(phrase in told[0] for phrase in phrases), told[0]
    assert str(error).startswith("the machine file can't be used: ")
    for word in ("None", "{'", "datetime", "<class", '"required"', "Entry(", "dict"):
        assert word not in str(error)


def test_problems_of_one_file_are_told_together():
    text = changed(US, ("bore =", "boar ="), ('"2850 psi"', '"2850"'), ("W8x67", "W8x68"))
    keys = {problem.key for problem in refused(text).problems}
    assert keys == {"cylinder.bore", "cylinder.boar", "cylinder.relief_pressure", "beam.section"}


def test_contradictions_of_one_file_are_told_together():
    error = refused(changed(US, ('"2 1/4 in"', '"5 in"'), ('"70 in"', '"77 in"')))
    assert {p.key for p in error.problems} == {"cylinder.rod", "fixed_tool.weld_end"}
    assert "2 problems" in str(error)
    assert all(str(problem) in str(error) for problem in error.problems)


@pytest.mark.parametrize(("make", "phrase"), [("folder", "irectory"), ("nothing", "No such file")])
def test_a_path_that_is_no_file(tmp_path, make, phrase):
    path = tmp_path if make == "folder" else tmp_path / "gone.toml"
    with pytest.raises(InputError, match=phrase) as caught:
        load(path)
    assert str(path) in str(caught.value)


def test_a_huge_file_is_not_read_to_its_end(tmp_path):
    path = tmp_path / "machine.toml"
    with path.open("wb") as file:
        file.truncate(200 * LARGEST_FILE)  # sparse: costs no disk
    with pytest.raises(InputError, match=str(LARGEST_FILE)):
        load(path)


# --- fuzz: an InputError or a machine, whatever stands in the file ------------------------------


def fields(document):
    return dataclasses.fields(document)


def flat(value):
    """Every number in a tree of dataclasses, tuples and mappings, as arrays."""
    if dataclasses.is_dataclass(value):
        for item in fields(value):
            if item.name != "lines":
                yield from flat(getattr(value, item.name))
    elif isinstance(value, dict):
        yield from flat(tuple(value.values()))
    elif isinstance(value, tuple):
        for part in value:
            yield from flat(part)
    elif not isinstance(value, str):
        yield np.asarray(value, dtype=float)


def all_finite(numbers):
    return all(np.isfinite(array).all() for array in flat(numbers))


SIZES = st.floats(-0.2, 3.0).map(lambda x: f"{1000 * x:.4g} mm")
UNITS = st.sampled_from(["mm", "in", "psi", "MPa", "deg", "", "%", "ton", "furlong", "degC", "1/m"])
AMOUNTS = st.floats(allow_nan=True, allow_infinity=True).map(repr)
LITERALS = st.one_of(
    SIZES.map(json.dumps),
    st.tuples(AMOUNTS, UNITS).map(" ".join).map(json.dumps),
    st.text(st.characters(exclude_categories=["Cs"]), max_size=20).map(json.dumps),
    st.sampled_from(["true", "[]", "{}", "1979-05-27", "0", "-1", "1e400", "nan", "[[1]]"]),
    st.sampled_from(["wedge", "trunnion", "continuous", "spurs", "EN", "HSS8x8x1/2"]).map(
        json.dumps
    ),
)


def nudged(typed):
    """A length near the one that was typed; other values stay as they are."""
    try:
        millimetres = 1000 * parse(typed.strip('"'), Dimension.LENGTH)
    except UnitError:
        return st.just(typed)
    return st.floats(0.8, 1.25).map(lambda by: f'"{millimetres * by:.6g} mm"')


@settings(max_examples=200, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(st.data())
def test_whatever_is_typed_gives_a_machine_or_an_input_error(data):
    lines = data.draw(st.sampled_from([US, SI])).splitlines()
    values = [n for n, line in enumerate(lines) if " = " in line]
    for n in data.draw(st.lists(st.sampled_from(values), min_size=1, max_size=5, unique=True)):
        key, _, typed = lines[n].partition(" = ")
        lines[n] = f"{key} = {data.draw(st.one_of(nudged(typed), nudged(typed), LITERALS))}"
    machine = outcome("\n".join(lines))
    if not isinstance(machine, Machine):
        assert machine
        assert all(problem.key and problem.message for problem in machine)
        return
    numbers = machine.numbers()
    assert all_finite(numbers)
    assert numbers.F > 0
    assert math.isfinite(numbers.gap)
    assert numbers.section.I_y > 0
    assert numbers.section.I_z > 0
    assert numbers.section.J > 0
