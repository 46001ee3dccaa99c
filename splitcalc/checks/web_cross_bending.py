"""Web cross-bending of an open section under sled and fixed tool, static strength."""

from __future__ import annotations

from splitcalc.findings import Check
from splitcalc.machine.numbers import Numbers
from splitcalc.stress.web import PLATE, web_stress
from splitcalc.thrust.frame import Array
from splitcalc.thrust.statics import Actions
from splitcalc.units import Dimension


def applies(numbers: Numbers) -> tuple[bool, str]:
    if numbers.section.open:
        return True, ""
    return False, "a closed section carries roll as a cell; its bare wall is another check"


def evaluate(numbers: Numbers, actions: Actions) -> tuple[Array, Array]:
    return web_stress(numbers, actions), numbers.f_y


CHECK = Check(
    id="web-cross-bending",
    title="web, bent across",
    part="beam",
    source=PLATE,
    limit="yield",
    dimension=Dimension.STRESS,
    convex=True,
    applies=applies,
    evaluate=evaluate,
    place=lambda numbers, point: "top of the web",
    assumptions=(
        "static strength, plastic across the web: no fatigue in it",
        "the loaded flange turns as a bar on the web as a spring: on a W8x31 17 % above solid "
        "finite elements at the sled, more at an unstiffened fixed tool (30 to 50 %, not settled)",
        "a full-depth stiffener holds the flange against the section; none can stand under the "
        "travelling sled",
        "the tool's moment enters the web as a force linear along its root weld, spread 1:1 "
        "through flange and fillet",
        "the roll couple is tried as given and half on each pad; the worse counts",
    ),
)
