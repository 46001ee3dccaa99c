"""First yield of the beam: von Mises stress at every named point of every section."""

from __future__ import annotations

from splitcalc.findings import Check
from splitcalc.machine.numbers import Numbers
from splitcalc.stress.normal_and_shear import equivalent_stress
from splitcalc.thrust.frame import Array
from splitcalc.thrust.statics import Actions
from splitcalc.units import Dimension


def evaluate(numbers: Numbers, actions: Actions) -> tuple[Array, Array]:
    return equivalent_stress(numbers, actions), numbers.f_y


def place(numbers: Numbers, point: int) -> str:
    return numbers.section.points.names[point]


CHECK = Check(
    id="beam-first-yield",
    title="beam, first yield",
    part="beam",
    source="elastic stresses with bimoment, von Mises against yield: AISC 360-22 H3.3 "
    "(second-hand) or EN 1993-1-1 6.2.1(5) (from memory)",
    limit="yield",
    dimension=Dimension.STRESS,
    convex=True,
    applies=lambda numbers: (True, ""),
    evaluate=evaluate,
    place=place,
    assumptions=(
        "within one depth of pads and tools the stress is nominal: local effects have checks of "
        "their own",
        "both true ends of the beam are free to warp; stiffeners don't hold warping",
        "open section: all of the fixed tool's sideways moment enters by the loaded flange",
        "closed section: 25 % of the largest normal stress is added within 1.5 depths of pads "
        "and of a fixed tool that no diaphragm meets",
        "closed section: torsional shear by Bredt on sharp mid-lines; beside EN's torsion modulus "
        "of a cold-formed 200 × 100 × 8 it is about 12 % low: mind it where torsion governs",
    ),
)
