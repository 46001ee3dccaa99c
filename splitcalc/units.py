"""The border: text and quantities come in, plain SI floats go through, quantities go out.

Text is read by a small grammar of our own: a number (decimal, fraction, mixed fraction, feet and
inches) and a unit (words, powers, products, quotients). The common unit words and the display
units stand in one table here, so that reading a machine file and printing a result cost nothing.
A word that is not in the table is looked up in pint, one plain word at a time: no expression
ever reaches it. This is the only file that knows pint, and it is imported on first need: that
takes longer than a whole check.
"""

from __future__ import annotations

import functools
import math
import re
from collections.abc import Iterable
from enum import Enum
from numbers import Real
from typing import TYPE_CHECKING, Any, Literal, NamedTuple

if TYPE_CHECKING:
    import pint

System = Literal["si", "us"]

NARROW_SPACE = "\u202f"
MINUS = "−"
NO_VALUE = "–"

# Exact by definition (from memory: the 1959 yard and pound agreement, standard gravity of the
# 3rd CGPM 1901, US gallon 231 in3, horsepower 550 ft lbf/s); a test holds them against pint.
INCH = 0.0254  # m
POUND = 0.45359237  # kg
GRAVITY = 9.80665  # m/s2
LBF = 4.4482216152605  # N, POUND x GRAVITY
GALLON = 231 * INCH**3  # m3


class UnitError(ValueError):
    """Text or a quantity that can't be used; the message says what is allowed and the cure."""


class Dimension(Enum):
    """The kinds of quantity: words, SI unit, display units (si, us), usual units, example."""

    LENGTH = ("a length", "m", "mm", "in", "mm, cm, m, in, ft", "4 1/2 in")
    AREA = ("an area", "m²", "cm²", "in²", "mm^2, cm^2, in^2", "12.5 in^2")
    SECTORIAL = ("a sectorial area", "m²", "cm²", "in²", "mm^2, cm^2, in^2", "14.2 in^2")
    MODULUS = ("a section modulus", "m³", "cm³", "in³", "mm^3, cm^3, in^3", "27.5 in^3")
    INERTIA = ("a second moment of area", "m⁴", "cm⁴", "in⁴", "mm^4, cm^4, in^4", "110 in^4")
    WARPING = ("a warping constant", "m⁶", "cm⁶", "in⁶", "mm^6, cm^6, in^6", "530 in^6")
    FORCE = (
        "a force", "N", "kN", "lbf", "N, kN, lbf, kip, metric_ton_force, US_ton_force", "150 kN",
    )  # fmt: skip
    MOMENT = ("a moment", "N·m", "kN·m", "kip·in", "N*m, kN*m, lbf*in, kip*in", "12 kN*m")
    BIMOMENT = ("a bimoment", "N·m²", "kN·m²", "kip·in²", "N*m^2, kN*m^2, kip*in^2", "3 kN*m^2")
    LINE_FORCE = ("a force per length", "N/m", "N/mm", "kip/in", "N/mm, kN/m, kip/in", "650 N/mm")
    LINE_MOMENT = (
        "a moment per length", "N·m/m", "kN·m/m", "kip·in/in", "N*m/m, kN*m/m, kip*in/in",
        "9 kN*m/m",
    )  # fmt: skip
    STIFFNESS = ("a stiffness", "N/m", "kN/mm", "kip/in", "N/mm, kN/mm, kip/in", "40 kN/mm")
    STRESS = ("a stress", "Pa", "MPa", "ksi", "MPa, N/mm^2, psi, ksi", "345 MPa")
    PRESSURE = ("a pressure", "Pa", "MPa", "psi", "bar, MPa, psi", "2500 psi")
    CURVATURE = ("a curvature", "1/m", "1/m", "1/in", "1/mm, 1/m, 1/in", "0.8 1/m")
    PER_AREA = ("one over an area", "1/m²", "1/m²", "1/in²", "1/mm^2, 1/m^2, 1/in^2", "0.5 1/m^2")
    STRESS_SQUARED = ("a stress squared", "Pa²", "MPa²", "ksi²", "MPa^2, ksi^2", "100 MPa^2")
    ANGLE = ("an angle", "rad", "deg", "deg", "deg, rad", "2.5 deg")
    TIME = ("a time", "s", "s", "s", "s, min, h", "12 s")
    SPEED = ("a speed", "m/s", "mm/s", "in/s", "mm/s, m/s, in/s, ft/min", "95 mm/s")
    FLOW = ("a flow", "m³/s", "L/min", "gal/min", "L/min, gal/min, gpm", "11 gal/min")
    POWER = ("a power", "W", "kW", "hp", "W, kW, hp", "6.5 hp")
    MASS = ("a mass", "kg", "kg", "lb", "kg, lb, tonne", "120 kg")
    TEMPERATURE = ("a temperature", "K", "°C", "°F", "degC, degF, K", "-20 degC")
    NUMBER = ("a number", "", "", "", "no unit or %", "0.35")

    def __init__(
        self, words: str, si_unit: str, si: str, us: str, accepts: str, example: str
    ) -> None:
        self.words = words
        self.si_unit = si_unit
        self.display = {"si": si, "us": us}
        self.accepts = accepts
        self.example = example


# --- the unit table ---------------------------------------------------------------------------

Dims = tuple[float, ...]  # powers of metre, kilogram, second, kelvin, radian, anything else
ROOTS = ("meter", "gram", "second", "kelvin", "radian")  # as pint names them


class Unit(NamedTuple):
    """si = value * factor + zero."""

    factor: float
    dims: Dims
    zero: float = 0.0


_NONE: Dims = (0, 0, 0, 0, 0, 0)
_TEMPERATURE: Dims = (0, 0, 0, 1, 0, 0)
_FACTORS: dict[Dims, dict[str, float]] = {
    _NONE: {"%": 0.01},
    (1, 0, 0, 0, 0, 0): {
        "mm": 1e-3, "cm": 1e-2, "m": 1.0, "in": INCH, '"': INCH, "ft": 12 * INCH, "'": 12 * INCH,
    },
    (0, 1, 0, 0, 0, 0): {"kg": 1.0, "lb": POUND},
    (0, 0, 1, 0, 0, 0): {"s": 1.0, "min": 60.0, "h": 3600.0},
    _TEMPERATURE: {"K": 1.0},
    (0, 0, 0, 0, 1, 0): {"rad": 1.0, "deg": math.pi / 180, "°": math.pi / 180},
    (3, 0, 0, 0, 0, 0): {"L": 1e-3, "l": 1e-3, "gal": GALLON},
    (3, 0, -1, 0, 0, 0): {"gpm": GALLON / 60},
    (1, 1, -2, 0, 0, 0): {
        "N": 1.0, "kN": 1e3, "lbf": LBF, "kip": 1e3 * LBF, "kgf": GRAVITY,
        "metric_ton_force": 1e3 * GRAVITY, "US_ton_force": 2e3 * LBF,
    },
    (-1, 1, -2, 0, 0, 0): {
        "Pa": 1.0, "kPa": 1e3, "MPa": 1e6, "GPa": 1e9, "bar": 1e5,
        "psi": LBF / INCH**2, "ksi": 1e3 * LBF / INCH**2,
    },
    (2, 1, -3, 0, 0, 0): {"W": 1.0, "kW": 1e3, "hp": 550 * 12 * INCH * LBF},
}  # fmt: skip
WORDS = {word: Unit(f, dims) for dims, row in _FACTORS.items() for word, f in row.items()}
WORDS |= {word: Unit(1.0, _TEMPERATURE, 273.15) for word in ("degC", "°C")}
WORDS |= {word: Unit(5 / 9, _TEMPERATURE, 459.67 * 5 / 9) for word in ("degF", "°F")}

# pint would take mPa for a thousandth of a pascal, Mm for a thousand kilometres, kn for knots
_OTHER_CASE = {word.casefold(): word for word in WORDS}

# --- words that mean two things, or not what they seem ------------------------------------------

_NEVER = {"ton", "tons"}  # pint takes them for the US mass
_TON_FORCE = "for tons of force write metric_ton_force (9.807 kN) or US_ton_force (8.896 kN)"
_TON_MASS = "for tons of mass write tonne (1000 kg) or short_ton (907.2 kg)"
_FORCE_CURES = {
    **dict.fromkeys(("ton", "tons", "t", "tonne", "tonnes"), _TON_FORCE),
    **dict.fromkeys(("lb", "lbs", "lbm", "pound", "pounds", "#"), "for pounds of force write lbf"),
    **dict.fromkeys(("kg", "kgs", "kilogram", "kp"), "for kilograms of force write kgf"),
    **dict.fromkeys(("Nm", "nm", "NM"), "for newton metres write N*m"),
    **dict.fromkeys(("kNm", "knm", "KNm"), "for kilonewton metres write kN*m"),
    "Nmm": "for newton millimetres write N*mm",
    "kn": "for kilonewtons write kN (kn is knots)",
}
_CURES = {
    Dimension.LENGTH: {word: "for thousandths of an inch write thou" for word in ("mil", "mils")},
    Dimension.MASS: {"ton": _TON_MASS, "tons": _TON_MASS},
    Dimension.FLOW: {"lpm": "for litres per minute write L/min"},
    Dimension.POWER: {"PS": "for metric horsepower write metric_horsepower (0.7355 kW)"},
    Dimension.TEMPERATURE: {
        "C": "for degrees Celsius write degC",
        "F": "for degrees Fahrenheit write degF",
    },
}


def _refusal(found: object, dimension: Dimension, why: str) -> UnitError:
    text = str(found)
    text = text if len(text) <= 60 else text[:57] + "..."
    cures = dict(_CURES.get(dimension, {}))
    if _unit(dimension.si_unit).dims[2] == -2:  # a force is in it
        cures |= _FORCE_CURES
    cure = next((cures[word] for word in re.findall(r"[A-Za-z_]+|#", text) if word in cures), None)
    hint = f"{cure}; " if cure else ""
    return UnitError(
        f"'{text}': {why}. Cure: {hint}{dimension.words} takes {dimension.accepts}, "
        f"for example '{dimension.example}'"
    )


# --- units --------------------------------------------------------------------------------------

_SUPERSCRIPTS = "⁻⁰¹²³⁴⁵⁶⁷⁸⁹"
_RAISE = str.maketrans("-0123456789", _SUPERSCRIPTS)
_LOWER = str.maketrans(_SUPERSCRIPTS, "-0123456789")
_FACTOR = r"""(["'%]|°[CF]?|[A-Za-z_µμ]+)(?: ?(?:\*\*|\^) ?(-?[1-9])|([1-9]))?"""
# After a slash only another slash: nobody agrees on what a/b*c means.
_UNIT = re.compile(r"(?:F(?:(?: ?[*·⋅-] ?| )F)*|1?)(?: ?/ ?F)*".replace("F", f"(?:{_FACTOR})"))


@functools.cache
def registry() -> pint.UnitRegistry[Any]:
    """Pint's application registry, the one that everybody shares; imports pint when first asked."""
    import pint

    return pint.get_application_registry()


def _from_roots(magnitude: float, powers: Iterable[tuple[str, float]]) -> Unit:
    """From pint's root units (gram, not kilogram) to SI."""
    found = dict(powers)
    dims = tuple(found.pop(root, 0) for root in ROOTS)
    return Unit(magnitude * 1e-3 ** dims[1], (*dims, len(found)))


def _word(word: str) -> Unit:
    if word in WORDS:
        return WORDS[word]
    if word in _NEVER:
        raise UnitError(f"'{word}' means several things")
    if word.casefold() in _OTHER_CASE:
        raise UnitError(f"'{word}' is not '{_OTHER_CASE[word.casefold()]}', capitals count")
    unknown = UnitError(f"'{word}' is not a unit known here")
    shared: Any = registry()
    from pint import UndefinedUnitError

    try:
        scale, roots = shared.get_root_units(word, check_nonmult=False)
    except (UndefinedUnitError, ValueError):  # the second is a number in disguise, such as nan
        raise unknown from None
    unit = _from_roots(scale, shared.Quantity(1, roots).unit_items())
    if unit.dims[3] or unit.dims[5]:  # pint's other temperatures are differences or odd scales
        raise unknown
    return unit


@functools.lru_cache(maxsize=512)
def _unit(text: str) -> Unit:
    """The unit that `text` stands for, for example `kip·in²` or `N/mm^2`."""
    text = re.sub(rf"[{_SUPERSCRIPTS}]+", lambda m: "^" + m[0].translate(_LOWER), text)
    if len(text) > 40 or not _UNIT.fullmatch(text):
        raise UnitError("the unit can't be read (words, powers such as in^4, *, and / at the end)")
    scale = 1.0
    dims = _NONE
    for sign, part in zip((1, *[-1] * text.count("/")), text.split("/"), strict=True):
        for word, power, attached in re.findall(_FACTOR, part):
            unit = _word(word)
            if unit.zero:
                if text != word:
                    raise UnitError(f"'{word}' can't be part of another unit")
                return unit
            exponent = sign * int(power or attached or 1)
            scale *= unit.factor**exponent
            dims = tuple(a + exponent * b for a, b in zip(dims, unit.dims, strict=True))
    return Unit(scale, dims)


# --- reading --------------------------------------------------------------------------------------

_DECIMAL = r"(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]{1,3})?"
_NUMBER = rf"(?:[0-9]+[ -])?[0-9]+/[0-9]+|{_DECIMAL}"
_TEXT = re.compile(rf"([+-]?) ?({_NUMBER}) ?(.*)")
_INCHES = rf"({_NUMBER}) ?(?:in|inch|inches|\")"
_FEET = re.compile(rf"([+-]?) ?([0-9]+) ?(?:ft|feet|foot|') ?-? ?{_INCHES}")
_PLAIN = str.maketrans(f"{MINUS}′’″”", "-''\"\"")


def _plain(text: str) -> str:
    """`text` with the typography that `show` uses turned into what a keyboard has."""
    text = re.sub(rf"(?<=[0-9]){NARROW_SPACE}(?=[0-9]{{3}}(?![0-9]))", "", text)
    text = re.sub(rf"×10([{_SUPERSCRIPTS}]+)", lambda m: "e" + m[1].translate(_LOWER), text)
    return " ".join(text.translate(_PLAIN).split())


def _value(text: str) -> float:
    """A number that matched `_NUMBER`."""
    if "/" not in text:
        return float(text)
    *whole, fraction = re.split("[ -]", text)
    top, bottom = map(int, fraction.split("/"))
    if bottom == 0:
        raise UnitError("the fraction divides by zero")
    if whole and top >= bottom:
        raise UnitError("the fraction beside a whole number must be below one")
    return sum(map(int, whole)) + top / bottom


def _read(text: str, dimension: Dimension) -> float:
    if len(text) > 80:
        raise UnitError("the text is too long")
    if "," in text:
        raise UnitError("a comma is not read, write a decimal point and no thousands separators")
    plain = _plain(text)
    feet = _FEET.fullmatch(plain) if dimension is Dimension.LENGTH else None
    if feet:
        sign, whole, rest = feet.groups()
        inches = _value(rest)
        if inches >= 12:
            raise UnitError("the inches beside feet must be below 12")
        return float(f"{sign}1") * (12 * int(whole) + inches) * INCH
    match = _TEXT.fullmatch(plain)
    if not match:
        raise UnitError("no number found (numbers look like 4.5, 1e3, 3/8, 4 1/2)")
    sign, amount, unit_part = match.groups()
    value = float(f"{sign}1") * _value(amount)
    if not unit_part and dimension is not Dimension.NUMBER:
        raise UnitError("it has no unit")
    unit = _unit(unit_part)
    return _checked(value * unit.factor + unit.zero, unit.dims, dimension)


def _checked(si: float, dims: Dims, dimension: Dimension) -> float:
    if dims != _unit(dimension.si_unit).dims:
        raise UnitError(f"it is not {dimension.words}")
    if not math.isfinite(si):
        raise UnitError("it is not finite")
    return si


def parse(text: str, dimension: Dimension) -> float:
    """The SI value of a text such as `4 1/2 in`, `5' 2-1/2"`, `17.2 MPa`.

    Raises: UnitError if the text is not a finite number with a unit of this dimension.
    """
    try:
        return _read(text, dimension)
    except OverflowError:  # a power of an enormous unit
        raise _refusal(text, dimension, "it is not finite") from None
    except UnitError as error:
        raise _refusal(text, dimension, str(error)) from None


def to_si(value: Any, dimension: Dimension) -> float:
    """The SI value of a text or of a pint quantity of any registry; a bare number is a NUMBER.

    Raises: UnitError if it is neither, of another dimension, not finite or not one number.
    """
    if isinstance(value, str):
        return parse(value, dimension)
    try:
        if hasattr(value, "to_root_units"):
            root = value.to_root_units()
            unit = _from_roots(float(root.magnitude), root.unit_items())
            return _checked(unit.factor, unit.dims, dimension)
        if isinstance(value, bool) or not isinstance(value, Real):
            raise UnitError("it is neither text nor a quantity")
        if dimension is not Dimension.NUMBER:
            raise UnitError("it has no unit")
        return _checked(float(value), _NONE, dimension)
    except (UnitError, TypeError, OverflowError) as error:
        raise _refusal(value, dimension, str(error)) from None


# --- showing ------------------------------------------------------------------------------------


def unit_text(dimension: Dimension, system: System) -> str:
    """The display unit, for example `kN·m`; empty for a NUMBER."""
    return dimension.display[system]


def factor(dimension: Dimension, system: System) -> float:
    """Display value = si * factor (+ `offset`, for a temperature)."""
    return 1 / _unit(unit_text(dimension, system)).factor


def offset(dimension: Dimension, system: System) -> float:
    """What a temperature's display value has on top of si * factor; 0 for everything else."""
    return -_unit(unit_text(dimension, system)).zero * factor(dimension, system)


def _displayed(si: float, dimension: Dimension, system: System) -> float:
    shift = offset(dimension, system)
    value = si * factor(dimension, system) + shift
    return round(value, 9) if shift else value  # the difference leaves rounding noise at 0 degrees


def number(si: float | None, dimension: Dimension, system: System, digits: int = 4) -> str:
    """The display value without its unit, rounded to `digits` significant digits.

    Zeros at the end of decimals are dropped: they would claim digits that the input never had.
    None, a value that does not exist, is a dash. Powers of ten only outside 0.001 to 10 million.
    Raises: ValueError if the value is not finite.
    """
    if si is None:
        return NO_VALUE
    if not math.isfinite(si):
        raise ValueError(f"{si} is not a number to show; a missing value is None")
    mantissa, exponent = f"{_displayed(si, dimension, system):.{digits - 1}e}".split("e")
    rounded = float(f"{mantissa}e{exponent}")
    if rounded == 0:
        return "0"
    power = ""
    if 1e-3 <= abs(rounded) <= 1e7:
        mantissa = f"{rounded:,.{max(0, digits - 1 - int(exponent))}f}"
    else:
        power = "×10" + str(int(exponent)).translate(_RAISE)
    if "." in mantissa:
        mantissa = mantissa.rstrip("0").rstrip(".")
    if system == "si":
        mantissa = mantissa.replace(",", NARROW_SPACE)
    return mantissa.replace("-", MINUS) + power


def show(si: float | None, dimension: Dimension, system: System, digits: int = 4) -> str:
    """`number` with its display unit behind a narrow no-break space."""
    text = number(si, dimension, system, digits)
    unit = unit_text(dimension, system)
    return text if si is None or not unit else text + NARROW_SPACE + unit


def quantity(si: float, dimension: Dimension, system: System = "si") -> pint.Quantity[Any]:
    """The value as a pint quantity in its display unit."""
    value = _displayed(si, dimension, system)
    return registry().Quantity(value, unit_text(dimension, system))
