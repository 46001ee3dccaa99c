"""A log as a person describes it; every problem of a call is told at once."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

from splitcalc.inputs import InputError, Problem, found
from splitcalc.logs.limits import sled_off
from splitcalc.logs.present import FIXED, TOOLS, log_through
from splitcalc.machine.file import Machine
from splitcalc.thrust.frame import Log
from splitcalc.units import Dimension, UnitError, show, to_si

Value = Any  # text with a unit, or a pint quantity of any registry
Pair = Any  # two of them: (left, up)

# Far past every grip (slope 1, 45 deg) and every tool (2 m), so that a log past its limits can be
# looked at; beyond that it is a slip, and the numbers overflow in the end.
STEEPEST = math.radians(80)
FARTHEST = 2.0  # m


class Arguments:
    """Reads the arguments of one call about a machine; keeps every problem until `done`."""

    def __init__(self, machine: Machine) -> None:
        if not isinstance(machine, Machine):
            raise TypeError(f"machine: found {found(machine)}; wanted: what splitcalc.load gives")
        self.numbers = machine.numbers()
        self._units = machine.units
        self.problems: list[Problem] = []

    def refuse(self, name: str, message: str) -> None:
        self.problems.append(Problem(name, message))

    def done(self) -> None:
        if self.problems:
            raise InputError(self.problems, "the log")

    def number(
        self, name: str, value: Value, dimension: Dimension, most: float = math.inf
    ) -> float:
        """The SI value, at most `most` to either side; 0 after a problem."""
        try:
            si = to_si(value, dimension)
        except UnitError as error:
            self.refuse(name, str(error))
            return 0.0
        if abs(si) > most:
            low, high = (show(end, dimension, self._units) for end in (-most, most))
            self.refuse(name, f"found {found(value)}; allowed: {low} to {high}")
            return 0.0
        return si

    def pair(self, name: str, value: Pair) -> tuple[float, float]:
        """Two offsets, (left, up). [m]"""
        none: Pair = ()
        try:
            left, up = none if isinstance(value, str) else value
        except (TypeError, ValueError):
            self.refuse(
                name,
                f"found {found(value)}; wanted: two offsets from the cylinder's axis, (left, up), "
                'such as ("0 in", "1 in")',
            )
            return 0.0, 0.0
        return (
            self.number(f"{name}, left", left, Dimension.LENGTH, FARTHEST),
            self.number(f"{name}, up", up, Dimension.LENGTH, FARTHEST),
        )

    def word(self, name: str, value: str, options: Sequence[str]) -> None:
        if value not in options:
            allowed = ", ".join(f'"{option}"' for option in options)
            self.refuse(name, f"found {found(value)}; allowed: {allowed}")

    def distance(self, name: str, distance: float) -> None:
        """The distance of the contact points, such that the sled stands on the beam. [m]

        A pad past the rear end would leave a part of its force there that no section carries; a
        pad past the start of the fixed tool's root weld would run into the tool.
        """
        if distance <= 0:
            told = show(distance, Dimension.LENGTH, self._units)
            self.refuse(name, f"the contact points are {told} apart; allowed: above 0")
        elif problem := sled_off(self.numbers, distance, self._units):
            self.refuse(name, problem)

    def length(self, value: Value) -> float:
        """The argument of that name, as a distance of the contact points. [m]"""
        count = len(self.problems)
        distance = self.number("length", value, Dimension.LENGTH)
        if len(self.problems) == count:
            self.distance("length", distance)
        return distance


def log(
    machine: Machine,
    *,
    length: Value,
    skew_up: Value = "0 deg",
    skew_left: Value = "0 deg",
    left: Value = "0 mm",
    up: Value = "0 mm",
    pivot: str = FIXED,
) -> Log:
    """A log by the angles of its thrust and its contact on one of the two tools.

    Every value is text with a unit, such as "4 1/2 in", or a pint quantity.

    Parameters
    ----------
    length : of the log; of a buried one the gap between the tools
    skew_up, skew_left : angles of the thrust, up and left towards the fixed tool
    left, up : offsets of the contact on the `pivot` from the cylinder's axis
    pivot : "fixed tool" or "moving tool"

    Raises
    ------
    InputError : with every argument that can't be used
    """
    arguments = Arguments(machine)
    arguments.word("pivot", pivot, TOOLS)
    distance = arguments.length(length)
    tan_up, tan_left = (
        math.tan(arguments.number(name, value, Dimension.ANGLE, STEEPEST))
        for name, value in (("skew_up", skew_up), ("skew_left", skew_left))
    )
    left, up = (
        arguments.number(name, value, Dimension.LENGTH, FARTHEST)
        for name, value in (("left", left), ("up", up))
    )
    arguments.done()
    return log_through(
        pivot=pivot, distance=distance, left=left, up=up, tan_left=tan_left, tan_up=tan_up
    )


def log_between(machine: Machine, *, length: Value, moving: Pair, fixed: Pair) -> Log:
    """A log by its two contact points.

    Every value is text with a unit, such as "4 1/2 in", or a pint quantity.

    Parameters
    ----------
    length : of the log; of a buried one the gap between the tools
    moving, fixed : (left, up) of the contact on each tool, offsets from the cylinder's axis

    Raises
    ------
    InputError : with every argument that can't be used
    """
    arguments = Arguments(machine)
    distance = arguments.length(length)
    a, b = arguments.pair("moving", moving), arguments.pair("fixed", fixed)
    if not arguments.problems:
        steepest = max(
            math.atan2(abs(end - start), distance) for start, end in zip(a, b, strict=True)
        )
        if steepest > STEEPEST:
            told, limit = (show(v, Dimension.ANGLE, "si", 3) for v in (steepest, STEEPEST))
            arguments.refuse("moving, fixed", f"the thrust leans by {told}; allowed: up to {limit}")
    arguments.done()
    return Log(distance, *a, *b)
