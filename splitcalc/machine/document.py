"""The machine as a person describes it: every input with its facts. Scalar, frozen, comparable.

Heights count from the face that the sled slides on; places along the beam from the rear mount.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from splitcalc.inputs import Entry, choice, quantity, table, words
from splitcalc.materials import STEELS
from splitcalc.shapes.families import Family
from splitcalc.units import Dimension

LENGTH, NUMBER = Dimension.LENGTH, Dimension.NUMBER
STRESS, ANGLE = Dimension.STRESS, Dimension.ANGLE

GRIPS = {"plain": 0.35, "worn": 0.35, "spurs": 0.7, "serrations": 0.7}


def _place(text: str, **more: Any) -> Any:
    return quantity(text, LENGTH, -2.0, 10.0, **more)


def _height(text: str, **more: Any) -> Any:
    return quantity(text, LENGTH, -0.5, 2.0, **more)


@dataclass(frozen=True, kw_only=True)
class Job:
    title: str = words("what machine this is")
    number: str = words("job number", default="")
    revision: str = words("revision", default="")
    author: str = words("who made the calculation", default="")
    date: str = words("date to print", default="")
    notes: str = words("notes for the reviewer", default="")


@dataclass(frozen=True, kw_only=True)
class Basis:
    units: str = choice("units to show", "si", "us", default="si", reason="SI")
    design: str = choice("design basis: where the required factors come from", "AISC", "EN")


@dataclass(frozen=True, kw_only=True)
class Cylinder:
    bore: Entry = quantity("bore", LENGTH, 0.02, 0.5, tolerance="0.1 mm")
    rod: Entry = quantity("rod diameter", LENGTH, 0.01, 0.4, tolerance="0.1 mm")
    stroke: Entry = quantity("stroke", LENGTH, 0.05, 5.0)
    relief_pressure: Entry = quantity(
        "relief valve setting", Dimension.PRESSURE, 1e5, 1e8, tolerance="5 %"
    )
    axis_height: Entry = _height("height of the cylinder's axis", tolerance="2 mm")
    mount: str = choice(
        "kind of mount",
        "rear pin",
        "rear flange",
        "trunnion",
        "front flange",
        default="rear pin",
        reason="the usual mount: a pin at the rear",
    )
    mount_x: Entry = _place(
        "where the force enters the beam",
        default="0 mm",
        reason="at the rear mount, which is the origin of all places",
    )


@dataclass(frozen=True, kw_only=True)
class Stiffener:
    x: Entry = _place("place of the stiffener")
    kind: str = choice("kind of stiffener", "full-depth pair", "part-depth pair", "diaphragm")


@dataclass(frozen=True, kw_only=True)
class ClosedZone:
    start: Entry = _place("start of the closed stretch")
    end: Entry = _place("end of the closed stretch")
    kind: str = choice("kind of closed stretch", "side plates")


@dataclass(frozen=True, kw_only=True)
class Beam:
    section: Family = table()
    steel: str = choice("steel", *STEELS)
    rear_end: Entry = _place("the beam's true rear end")
    front_end: Entry = _place("the beam's true front end")
    yield_strength: Entry | None = quantity(
        "yield strength by certificate", STRESS, 1e8, 1.2e9, default=None,
        reason="the steel's minimum for the thickest wall", tolerance="7 %",
    )  # fmt: skip
    elastic_modulus: Entry = quantity(
        "modulus of elasticity", STRESS, 1.5e11, 2.5e11, default="205 GPa",
        reason="structural steel",
    )  # fmt: skip
    shear_ratio: Entry = quantity(
        "shear modulus over modulus of elasticity", NUMBER, 0.34, 0.5, default="0.386",
        reason="structural steel",
    )  # fmt: skip
    stiffeners: tuple[Stiffener, ...] = table(tuple)
    closed_zones: tuple[ClosedZone, ...] = table(tuple)


@dataclass(frozen=True, kw_only=True)
class Tool:
    """What both tools have. A wedge's width is its plate's thickness."""

    kind: str = choice("which tool this is", "push plate", "wedge")
    width: Entry = quantity(
        "width of the push plate's face, or thickness of the wedge plate", LENGTH, 0.006, 1.0
    )
    height: Entry = quantity("height of the face or of the wedge", LENGTH, 0.05, 1.5)
    bottom: Entry = _height(
        "height of its lower edge", default="0 mm", reason="it reaches down to the sliding face"
    )
    contact_low: Entry | None = _height(
        "lowest place where a log touches", default=None, reason="the tool's lower edge"
    )
    contact_high: Entry | None = _height(
        "highest place where a log touches", default=None, reason="the tool's upper edge"
    )
    contact_half_width: Entry | None = quantity(
        "how far off centre a log touches", LENGTH, 0.0, 0.5, default=None,
        reason="half of the tool's width",
    )  # fmt: skip
    grip: str = choice(
        "grip of the face: what limits the slope of the thrust", *GRIPS, default="plain",
        reason="a plain steel face: 0.35",
    )  # fmt: skip
    grip_limit: Entry | None = quantity(
        "largest slope that the face holds", NUMBER, 0.02, 1.0, default=None,
        reason="0.35 plain or worn, 0.7 with spurs or serrations",
    )  # fmt: skip
    rake: Entry = quantity(
        "lean of the wedge's edge from upright", ANGLE, -0.8, 0.8, default="0 deg",
        reason="an upright edge",
    )  # fmt: skip
    included_angle: Entry = quantity(
        "included angle of the wedge", ANGLE, 0.05, 2.0, default="30 deg",
        reason="common practice, no source",
    )  # fmt: skip


@dataclass(frozen=True, kw_only=True)
class FixedTool(Tool):
    edge_x: Entry = _place("place of the wedge's edge, or of the plate's face")
    weld_start: Entry = _place("start of its root weld")
    weld_end: Entry = _place("end of its root weld")


@dataclass(frozen=True, kw_only=True)
class Sled:
    guide: str = choice(
        "what guides the sled",
        "two pads",
        "continuous",
        "rod alone",
        default="two pads",
        reason="the usual sled",
    )
    front_pad: Entry | None = quantity(
        "from the moving face back to the middle of the front pad", LENGTH, -0.5, 2.0,
        default=None, reason="a continuous guide counts as two pads at its ends",
    )  # fmt: skip
    rear_pad: Entry | None = quantity(
        "from the moving face back to the middle of the rear pad", LENGTH, -0.5, 3.0,
        default=None, reason="a continuous guide counts as two pads at its ends",
    )  # fmt: skip
    pad_length: Entry | None = quantity(
        "length of each pad along the beam", LENGTH, 0.005, 1.0,
        default=None, reason="a third of a continuous guide's length",
    )  # fmt: skip
    guide_front: Entry | None = quantity(
        "from the moving face back to the front end of a continuous guide", LENGTH, -0.5, 2.0,
        default=None, reason="two pads",
    )  # fmt: skip
    guide_length: Entry | None = quantity(
        "length of a continuous guide", LENGTH, 0.02, 3.0, default=None, reason="two pads"
    )
    push_strip: Entry = quantity(
        "middle of each upper contact strip, off centre", LENGTH, 0.005, 0.5
    )
    gibs: str = choice(
        "what holds the sled down", "gibs", "none", default="gibs", reason="gibs under the flange"
    )
    gib_strip: Entry | None = quantity(
        "middle of each gib's contact strip, off centre", LENGTH, 0.005, 0.5, default=None,
        reason="like the upper strips",
    )  # fmt: skip
    side_contact_height: Entry | None = _height(
        "height where the sled's side force acts", default=None,
        reason="middle of the loaded flange",
    )  # fmt: skip
    clearance: Entry = quantity(
        "clearance of the sled on the beam", LENGTH, 0.0, 0.02, default="1 mm",
        reason="common practice, no source",
    )  # fmt: skip
    roll_at_front: Entry = quantity(
        "share of the roll couple that the front pad takes", NUMBER, 0.0, 1.0, default="1",
        reason="the pad nearest to the log; web checks also try half and half",
    )  # fmt: skip


@dataclass(frozen=True, kw_only=True)
class Logs:
    longest: Entry = quantity("longest log", LENGTH, 0.1, 5.0)
    shortest: Entry = quantity("shortest log", LENGTH, 0.05, 5.0)
    smallest_gap: Entry = quantity(
        "smallest distance between the tools, at full stroke", LENGTH, 0.005, 2.0
    )
    largest_diameter: Entry = quantity("largest diameter", LENGTH, 0.05, 2.0)
    smallest_diameter: Entry = quantity("smallest diameter", LENGTH, 0.01, 2.0, default="50 mm",
                                        reason="common practice, no source")  # fmt: skip
    cross_grain_strength: Entry = quantity(
        "what the wood beside a buried edge bears across the grain", STRESS, 1e5, 5e7,
        default="8 MPa", reason="stated assumption",
    )  # fmt: skip
    end_grain_strength: Entry = quantity(
        "what the end grain bears before it crushes", STRESS, 1e6, 1e8, default="30 MPa",
        reason="stated assumption: green wood",
    )  # fmt: skip


@dataclass(frozen=True, kw_only=True)
class Factors:
    surge: Entry = quantity(
        "design force over relief force", NUMBER, 1.0, 2.0, default="1.10",
        reason="override of the relief valve and surge",
    )  # fmt: skip
    yield_usual: Entry | None = quantity(
        "required factor on yield, usual logs", NUMBER, 1.0, 10.0, default=None,
        reason="the design basis: AISC 1.67; EN 1.5 × 1.0",
    )  # fmt: skip
    yield_extreme: Entry = quantity(
        "required factor on first yield, extreme logs", NUMBER, 1.0, 10.0, default="1.15",
        reason="the whole allowed set, rare logs included",
    )  # fmt: skip


@dataclass(frozen=True, kw_only=True)
class Document:
    """All inputs of one machine."""

    job: Job = table()
    basis: Basis = table()
    cylinder: Cylinder = table()
    beam: Beam = table()
    moving_tool: Tool = table()
    fixed_tool: FixedTool = table()
    sled: Sled = table()
    logs: Logs = table()
    factors: Factors = table(Factors)
