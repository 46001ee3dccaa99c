"""Units: what text is read, what is refused and with which cure, what is shown."""

import fractions
import math
import subprocess
import sys

import numpy as np
import pint
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from splitcalc import units
from splitcalc.units import Dimension, UnitError, number, parse, quantity, show, to_si

D = Dimension
SYSTEMS = ("si", "us")
EVERY = pytest.mark.parametrize("dimension", D, ids=lambda d: d.name)
BOTH = pytest.mark.parametrize("system", SYSTEMS)
TEMPERATURE_WORDS = {"K", "degC", "°C", "degF", "°F"}

# --- against exact definitions and against pint -------------------------------------------------


@pytest.mark.parametrize(
    ("text", "dimension", "si"),
    [
        # international yard and pound agreement of 1959, standard gravity 9.80665 m/s2,
        # US gallon 231 in3, horsepower 550 ft lbf/s: from memory
        ("1 in", D.LENGTH, 0.0254),
        ("1 ft", D.LENGTH, 0.3048),
        ("1 thou", D.LENGTH, 0.0254e-3),
        ("1 lb", D.MASS, 0.45359237),
        ("1 lbf", D.FORCE, 4.4482216152605),
        ("1 kip", D.FORCE, 4448.2216152605),
        ("1 kgf", D.FORCE, 9.80665),
        ("1 metric_ton_force", D.FORCE, 9806.65),
        ("1 US_ton_force", D.FORCE, 8896.443230521),
        ("1 ton_force", D.FORCE, 8896.443230521),
        ("1 psi", D.PRESSURE, 4.4482216152605 / 0.0254**2),
        ("1 bar", D.PRESSURE, 1e5),
        ("1 gal/min", D.FLOW, 231 * 0.0254**3 / 60),
        ("1 hp", D.POWER, 745.69987158227022),
        ("1 metric_horsepower", D.POWER, 735.49875),
        ("180 deg", D.ANGLE, math.pi),
        ("-40 degF", D.TEMPERATURE, 233.15),
        ("-40 °C", D.TEMPERATURE, 233.15),
        ("300 K", D.TEMPERATURE, 300.0),
    ],
)
def test_exact_definitions(text, dimension, si):
    assert parse(text, dimension) == pytest.approx(si, rel=4e-16 * 4)


@pytest.mark.parametrize("word", sorted(units.WORDS.keys() - TEMPERATURE_WORDS - {'"', "'"}))
def test_the_table_agrees_with_pint(word):
    name = {"gpm": "gallon/minute"}.get(word, word)
    root = pint.get_application_registry().Quantity(1, name).to_root_units()
    assert units._from_roots(root.magnitude, root.unit_items()) == (
        pytest.approx(units.WORDS[word].factor, rel=1e-14),
        units.WORDS[word].dims,
        0.0,
    )


@EVERY
@BOTH
@pytest.mark.parametrize("si", [0.0, 1.0, -273.15, 1234.5])
def test_display_agrees_with_pint(dimension, system, si):
    exact = pint.get_application_registry().Quantity(si, dimension.si_unit)
    out = quantity(si, dimension, system)
    assert out.magnitude == pytest.approx(exact.m_as(out.units), rel=1e-13, abs=1e-9)
    expected = si * units.factor(dimension, system) + units.offset(dimension, system)
    assert out.magnitude == pytest.approx(expected, rel=1e-14, abs=1e-9)
    assert to_si(out, dimension) == pytest.approx(si, rel=1e-13, abs=1e-9)


@EVERY
def test_si_units_are_coherent(dimension):
    assert units._unit(dimension.si_unit).factor == 1
    assert units._unit(dimension.si_unit).zero == 0


@EVERY
def test_everything_that_an_error_offers_can_be_read(dimension):
    assert math.isfinite(parse(dimension.example, dimension))
    for unit in dimension.accepts.replace("no unit or ", "").split(", "):
        assert parse(f"2 {unit}", dimension) > 0


# --- numbers ------------------------------------------------------------------------------------


NUMBERS = [
    ("4.5 in", 4.5), (".5 in", 0.5), ("5. in", 5), ("1e3 in", 1000), ("2.5E-1in", 0.25),
    ("3/8 in", 0.375), ("11/8 in", 1.375), ("4 1/2 in", 4.5), ("4-1/2 in", 4.5),
    ("  4   1/2\tin ", 4.5), ("-4 1/2 in", -4.5), ("\u2212 4 1/2 in", -4.5), ("+3/4 in", 0.75),
    ('4 1/2"', 4.5), ("4 1/2 inches", 4.5), ("5 ft", 60), ("5'", 60), ("1.5 feet", 18),
    ("5 ft 2 1/2 in", 62.5), ("5' 2-1/2\"", 62.5), ("5\u2032-2 1/2\u2033", 62.5), ("5ft2in", 62),
    ("-5 ft 2.5 in", -62.5), ("0 ft 11.9 in", 11.9), ("12\u202f500 in", 12500),
]  # fmt: skip


@pytest.mark.parametrize(("text", "inches"), NUMBERS)
def test_numbers(text, inches):
    assert parse(text, D.LENGTH) == pytest.approx(inches * 0.0254, rel=1e-15)


@given(
    whole=st.integers(0, 999),
    part=st.integers(2, 128).flatmap(
        lambda bottom: st.tuples(st.integers(0, bottom - 1), st.just(bottom))
    ),
    sign=st.sampled_from("- "),
)
def test_mixed_fractions(whole, part, sign):
    top, bottom = part
    exact = float(fractions.Fraction(top, bottom) + whole) * (-1 if sign == "-" else 1)
    for dash in " -":
        got = parse(f"{sign}{whole}{dash}{top}/{bottom} in", D.LENGTH)
        assert got == pytest.approx(exact * 0.0254, rel=1e-15)


UNITS = [
    *[(f"2 {text}", D.AREA, 2e-6) for text in ("mm^2", "mm**2", "mm2", "mm²", "mm ** 2")],
    ("2 in^4", D.INERTIA, 2 * 0.0254**4),
    ("2 cm⁶", D.WARPING, 2e-12),
    *[(f"3 {text}", D.MOMENT, 3) for text in ("N*m", "N m", "N·m", "N-m", "N⋅m")],
    *[(f"3 kip{times}in", D.MOMENT, 338.95448708285) for times in "* ·-"],
    ("3 kN·m²", D.BIMOMENT, 3e3),
    ("3 kN*m/m", D.LINE_MOMENT, 3e3),
    ("3 N/mm", D.LINE_FORCE, 3e3),
    *[(f"3 {text}", D.STRESS, 3e6) for text in ("N/mm^2", "N mm^-2", "N·mm⁻²", "N/mm/mm")],
    *[(text, D.CURVATURE, 3) for text in ("3 1/m", "3/m", "3 m^-1", "6/2 1/m")],
    ("3 gpm", D.FLOW, 3 * 3.785411784e-3 / 60),
    ("3 t", D.MASS, 3e3),
    *[(text, D.NUMBER, 0.25) for text in ("0.25", "1/4", "25 %", "6.35 mm/in")],
    ("3 m*s/s", D.LENGTH, 3),
]


@pytest.mark.parametrize(("text", "dimension", "si"), UNITS)
def test_units(text, dimension, si):
    assert parse(text, dimension) == pytest.approx(si, rel=1e-14)


# --- refusals -----------------------------------------------------------------------------------

CURES = [
    *[(f"20 {word}", D.FORCE, "US_ton_force") for word in ("ton", "tons", "t", "tonne", "tonnes")],
    *[(f"20 {word}", D.FORCE, "metric_ton_force") for word in ("ton", "tons", "t", "tonne")],
    ("20 tons", D.MASS, "short_ton"),
    ("20 ton", D.MASS, "tonne"),
    *[(f"9 {word}", D.FORCE, "write lbf") for word in ("lb", "lbs", "lbm", "pound", "pounds", "#")],
    ("9 lb/in^2", D.PRESSURE, "write lbf"),
    ("9 in-lb", D.MOMENT, "write lbf"),
    ("9 ft·lbs", D.MOMENT, "write lbf"),
    *[(f"9 {word}", D.FORCE, "write kgf") for word in ("kg", "kgs", "kilogram", "kp")],
    ("9 kg/cm^2", D.PRESSURE, "write kgf"),
    *[(f"9 {word}", D.MOMENT, "write N*m") for word in ("Nm", "nm", "NM")],
    *[(f"9 {word}", D.MOMENT, "write kN*m") for word in ("kNm", "knm", "KNm")],
    ("9 Nmm", D.MOMENT, "write N*mm"),
    ("9 kn", D.FORCE, "kn is knots"),
    ("9 KN", D.FORCE, "not 'kN', capitals count"),
    ("9 kn", D.SPEED, "capitals count"),
    *[(f"17.2 {word}", D.PRESSURE, "not 'MPa'") for word in ("mPa", "Mpa", "mpa", "MPA")],
    ("9 Mm", D.LENGTH, "not 'mm'"),
    ("9 IN", D.LENGTH, "not 'in'"),
    ("9 mil", D.LENGTH, "write thou"),
    ("9 lpm", D.FLOW, "write L/min"),
    ("9 PS", D.POWER, "metric_horsepower"),
    ("9 C", D.TEMPERATURE, "write degC"),
    ("9 deg C", D.TEMPERATURE, "write degC"),
    ("9 F", D.TEMPERATURE, "write degF"),
    ("9 deg F", D.TEMPERATURE, "write degF"),
    ("1,5 m", D.LENGTH, "decimal point"),
    ("12,500 lbf", D.FORCE, "thousands"),
    ("4 5/3 in", D.LENGTH, "below one"),
    ("4 3/3 in", D.LENGTH, "below one"),
    ("4 1/0 in", D.LENGTH, "divides by zero"),
    ("5 ft 12 in", D.LENGTH, "below 12"),
]


@pytest.mark.parametrize(("text", "dimension", "cure"), CURES)
def test_refusal_names_the_text_the_cure_and_an_example(text, dimension, cure):
    with pytest.raises(UnitError) as caught:
        parse(text, dimension)
    message = str(caught.value)
    assert message.startswith(f"'{text}': ")
    assert cure in message
    assert dimension.accepts in message
    assert message.endswith(f"for example '{dimension.example}'")


def test_every_cure_word_is_tested():
    words = set(units._FORCE_CURES).union(*units._CURES.values())
    tested = " ".join(text for text, *_ in CURES).replace("·", " ").split()
    assert words - {"mils"} <= set(tested)


@pytest.mark.parametrize(
    ("name", "dimension", "si"),
    [
        ("metric_ton_force", D.FORCE, 9807),
        ("US_ton_force", D.FORCE, 8896),
        ("tonne", D.MASS, 1000),
        ("short_ton", D.MASS, 907.2),
        ("metric_horsepower", D.POWER, 735.5),
    ],
)
def test_cures_say_what_they_are_worth(name, dimension, si):
    assert parse(f"1 {name}", dimension) == pytest.approx(si, abs=0.05 * 10 ** (si > 1000))


NASTY = [
    "", "   ", "in", "4 1/2", "nan in", "inf in", "-inf in", "5 nan", "1e999 in", "1e308 km",
    "9**9**9 in", "9^9 in", "5 in**9**9", "5 in^99", "5 Qpc^9", "5 Qpc^-9", "2*3 in", "(5) in",
    "5 (in)", "0x10 in", "1_000 in", "1 000 in", "1 2/3/4 in", "4 -1/2 in", "4--1/2 in", "--4 in",
    "3/8.5 in", "5.5 ft 2 in", "5 ft 2", "5''", "__import__('os')", "5 __import__('os')",
    "5 __class__", "5 in; import os", "5 in\x00", "5 furlong_per_parsec", "5 m*mol/A", "5 degC*m",
    "5 m*K/K*", "a" * 10_000, "5 " + "a" * 60, "5 " + "a" * 10_000, "9" * 10_000 + " in",
    "\u0664 in", "\uff14 in", "\u00bd in", "5 \u0131n",
]  # fmt: skip


@pytest.mark.parametrize("text", NASTY)
def test_nasty_text_is_refused(text):
    with pytest.raises(UnitError, match="for example '4 1/2 in'") as caught:
        parse(text, D.LENGTH)
    assert len(str(caught.value)) < 300


@pytest.mark.parametrize(
    ("text", "why"), [("9" * 5000 + "/7 in", "too long"), ("5 " + "a" * 60, "can't be read")]
)
def test_length_limits_come_first(text, why):
    with pytest.raises(UnitError, match=why):
        parse(text, D.LENGTH)


NEAR_MISSES = [
    ("5 rad", D.NUMBER), ("5 deg", D.NUMBER), ("5 %", D.ANGLE), ("5", D.ANGLE), ("0", D.LENGTH),
    ("5 rad/s", D.CURVATURE), ("20 delta_degC", D.TEMPERATURE), ("20 degC^2", D.TEMPERATURE),
    ("20 1/degC", D.TEMPERATURE), ("5 W/m*K", D.POWER), ("5 J/s*s/s", D.POWER),
]  # fmt: skip


@pytest.mark.parametrize(("text", "dimension"), NEAR_MISSES)
def test_near_misses_are_refused(text, dimension):
    with pytest.raises(UnitError):
        parse(text, dimension)


UNIT_PIECES = [
    "in", "ft", "mm", "kN", "lb", "kip", "furlong", "m", "s", "deg", "%", "°", "°C", "lambda", "K",
    "e", "_", "*", "**", "^", "/", "·", "-", " ", "'", '"', "2", "9", "²", "⁻", "1/", "(", ")",
]  # fmt: skip


@settings(deadline=None)  # the first word that is not in the table costs pint's import
@given(
    text=st.one_of(
        st.text(max_size=90),
        st.lists(st.sampled_from(UNIT_PIECES), max_size=14).map(
            lambda pieces: "4 1/2 " + "".join(pieces)
        ),
        st.text("0123456789 .-+/'\"eEftin", max_size=20),
    ),
    dimension=st.sampled_from(D),
)
def test_any_text_is_a_finite_number_or_a_unit_error(text, dimension):
    try:
        value = parse(text, dimension)
    except UnitError:
        return
    assert math.isfinite(value)


# --- quantities in ------------------------------------------------------------------------------


def test_quantities_are_taken_from_any_registry():
    assert to_si(pint.Quantity(4.5, "in"), D.LENGTH) == pytest.approx(0.1143)
    assert to_si(pint.UnitRegistry().Quantity(2, "kip"), D.FORCE) == pytest.approx(8896.443230521)
    assert to_si(pint.Quantity(20, "degC"), D.TEMPERATURE) == pytest.approx(293.15)
    assert to_si(pint.Quantity(90, "deg"), D.ANGLE) == pytest.approx(math.pi / 2)
    assert to_si("4 1/2 in", D.LENGTH) == parse("4 1/2 in", D.LENGTH)
    assert to_si(0.35, D.NUMBER) == 0.35
    assert to_si(np.int64(3), D.NUMBER) == 3.0


@pytest.mark.parametrize(
    ("value", "dimension", "why"),
    [
        (pint.Quantity(20, "kg"), D.FORCE, "write kgf"),
        (pint.Quantity(5, ""), D.ANGLE, "not an angle"),
        (pint.Quantity(5, "rad"), D.NUMBER, "not a number"),
        (pint.Quantity(math.nan, "mm"), D.LENGTH, "not finite"),
        (pint.Quantity([1.0, 2.0], "mm"), D.LENGTH, "mm"),
        (pint.Quantity(5, "mol*m"), D.LENGTH, "not a length"),
        (4.5, D.LENGTH, "has no unit"),
        (math.inf, D.NUMBER, "not finite"),
        (True, D.NUMBER, "neither text nor a quantity"),
        (None, D.LENGTH, "neither text nor a quantity"),
        ([1], D.NUMBER, "neither text nor a quantity"),
        (10**400, D.NUMBER, "too large"),
    ],
)
def test_what_is_not_a_quantity_is_refused(value, dimension, why):
    with pytest.raises(UnitError, match=why):
        to_si(value, dimension)


def test_there_is_one_registry():
    assert units.registry() is pint.get_application_registry()
    assert isinstance(quantity(1.0, D.LENGTH), pint.Quantity)


# --- showing ------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("si", "dimension", "system", "digits", "text"),
    [
        (0.1143, D.LENGTH, "si", 4, "114.3_mm"),
        (0.1143, D.LENGTH, "us", 4, "4.5_in"),
        (0.1, D.LENGTH, "si", 4, "100_mm"),
        (62832.4, D.FORCE, "us", 4, "14,130_lbf"),
        (1234567.0, D.NUMBER, "si", 4, "1_235_000"),
        (1234567.0, D.NUMBER, "us", 3, "1,230,000"),
        (1e5, D.NUMBER, "us", 4, "100,000"),
        (1e7, D.NUMBER, "us", 4, "10,000,000"),
        (99995.0, D.NUMBER, "us", 4, "100,000"),
        (0.99996, D.NUMBER, "us", 4, "1"),
        (1e-3, D.NUMBER, "si", 4, "0.001"),
        (0.00123456, D.NUMBER, "si", 3, "0.00123"),
        (9.4e-4, D.NUMBER, "si", 3, "9.4×10⁻⁴"),
        (-1.2345e10, D.NUMBER, "si", 4, "−1.234×10¹⁰"),
        (-0.0254, D.LENGTH, "us", 4, "−1_in"),
        (0.0, D.STRESS, "us", 4, "0_ksi"),
        (-0.0, D.STRESS, "us", 4, "0_ksi"),
        (345e6, D.STRESS, "si", 3, "345_MPa"),
        (17.2e6, D.PRESSURE, "us", 4, "2,495_psi"),
        (math.radians(2.5), D.ANGLE, "us", 4, "2.5_deg"),
        (253.15, D.TEMPERATURE, "si", 4, "−20_°C"),
        (273.15, D.TEMPERATURE, "si", 4, "0_°C"),
        (parse("0 degF", D.TEMPERATURE), D.TEMPERATURE, "us", 4, "0_°F"),
        (None, D.FORCE, "si", 4, "–"),
    ],
)
def test_show(si, dimension, system, digits, text):
    assert show(si, dimension, system, digits) == text.replace("_", "\u202f")


def test_what_is_not_finite_is_never_shown():
    for si in (math.nan, math.inf, -math.inf):
        with pytest.raises(ValueError, match="missing value is None"):
            show(si, D.FORCE, "si")


@given(
    dimension=st.sampled_from(D),
    system=st.sampled_from(SYSTEMS),
    digits=st.sampled_from([3, 4]),
    mantissa=st.floats(-10, 10),
    power=st.integers(-9, 12),
)
def test_what_is_shown_reads_back_within_its_digits(dimension, system, digits, mantissa, power):
    factor, offset = units.factor(dimension, system), units.offset(dimension, system)
    si = (mantissa * 10.0**power - offset) / factor
    value = si * factor + offset
    again = parse(show(si, dimension, system, digits).replace(",", ""), dimension)
    half_last_digit = 10.0 ** (math.floor(math.log10(abs(value))) - digits + 1) / 2 if value else 0
    noise = 1e-9 if offset else 0  # `show` rounds a temperature's 1e-13 of noise at zero away
    assert abs(again * factor + offset - value) <= half_last_digit * (1 + 1e-9) + noise


@given(power=st.floats(-3, 7), sign=st.sampled_from([-1, 1]), system=st.sampled_from(SYSTEMS))
def test_the_ordinary_range_has_no_powers_of_ten(power, sign, system):
    text = number(sign * 10**power, D.NUMBER, system)
    assert set(text) <= set("0123456789.,\u202f\u2212")
    if "." in text:
        assert text[-1] in "123456789"


# --- weight -------------------------------------------------------------------------------------


def test_table_words_never_import_pint():
    code = (
        "import sys\n"
        "from splitcalc.units import *\n"
        "assert [show(parse(d.example, d), d, s) for d in Dimension for s in ('si', 'us')]\n"
        "assert 'pint' not in sys.modules\n"
        "parse('1 inch', Dimension.LENGTH)\n"
        "assert 'pint' in sys.modules\n"
    )
    subprocess.run([sys.executable, "-c", code], check=True)
