"""Do the parts fit together? Problems that only show between two inputs, each with its key."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any

from splitcalc.inputs import Problem
from splitcalc.machine.document import Beam, Document
from splitcalc.materials import STEELS
from splitcalc.shapes.families import built, dimensions
from splitcalc.units import Dimension, show

PADS = ("front_pad", "rear_pad", "pad_length")
GUIDE = ("guide_front", "guide_length")


def pads_of(guide: str, get: Callable[[str], Any]) -> tuple[Any, Any, Any]:
    """(rear, front, length) of the two pads, from the moving face back. [m]

    A continuous guide counts as two pads, each a third of its length, at its ends. `get` gives
    the value of a key of the sled.
    """
    if guide == "continuous":
        front, length = (get(key) for key in GUIDE)
        return front + length * 5 / 6, front + length / 6, length / 3
    front, rear, length = (get(key) for key in PADS)
    return rear, front, length


def unused(document: Document) -> set[str]:
    """Keys that say nothing about this machine: a push plate's rake, a wedge's grip and so on."""
    tools = (("moving_tool", document.moving_tool), ("fixed_tool", document.fixed_tool))
    idle = {"push plate": ("rake", "included_angle"), "wedge": ("grip", "grip_limit")}
    guide = PADS if document.sled.guide == "continuous" else GUIDE
    return {f"{name}.{key}" for name, tool in tools for key in idle[tool.kind]} | {
        f"sled.{key}" for key in guide
    }


def misfits(document: Document) -> list[Problem]:
    """Everything that contradicts something else; an empty list when the machine can be used."""
    return [
        Problem(key, message)
        for part in (_tools, _beam, _cylinder_and_logs, _sled)
        for key, message in part(document)
    ]


Found = Iterator[tuple[str, str]]


def _told(doc: Document, length: float) -> str:
    return show(length, Dimension.LENGTH, doc.basis.units)  # type: ignore[arg-type]


def _tools(doc: Document) -> Found:
    if doc.moving_tool.kind == doc.fixed_tool.kind:
        yield "fixed_tool.kind", f'both tools are "{doc.fixed_tool.kind}"; one must be the wedge'
    for name, tool in (("moving_tool", doc.moving_tool), ("fixed_tool", doc.fixed_tool)):
        low, high = tool.bottom.si, tool.bottom.si + tool.height.si
        tall = f'"{tool.bottom.text}" to "{tool.bottom.text}" + "{tool.height.text}"'
        for key in ("contact_low", "contact_high"):
            entry = getattr(tool, key)
            if entry and not low - 1e-9 <= entry.si <= high + 1e-9:
                yield f"{name}.{key}", f'"{entry.text}" must lie on the tool, {tall}'
        first, last = tool.contact_low or tool.bottom, tool.contact_high
        if last and first.si > last.si:
            yield (
                f"{name}.contact_high",
                f'"{last.text}" must not lie below contact_low "{first.text}"',
            )
        half = tool.contact_half_width
        if half and half.si > tool.width.si / 2 + 1e-9 and tool.kind == "push plate":
            yield (
                f"{name}.contact_half_width",
                f'"{half.text}" is more than half of the width "{tool.width.text}"',
            )


def _beam(doc: Document) -> Found:
    beam, tool = doc.beam, doc.fixed_tool
    rear, front = beam.rear_end, beam.front_end
    if not rear.si < front.si:
        yield "beam.front_end", f'"{front.text}" must lie ahead of the rear end "{rear.text}"'
        return
    wrong = beam.section.misfits(dimensions(beam.section))
    for text in wrong:
        yield f"beam.section.{text.partition(':')[0]}", text.partition(": ")[2]
    if not tool.weld_start.si < tool.weld_end.si:
        yield (
            "fixed_tool.weld_end",
            f'"{tool.weld_end.text}" must lie ahead of weld_start "{tool.weld_start.text}"',
        )
    for key, entry in (
        ("cylinder.mount_x", doc.cylinder.mount_x),
        ("fixed_tool.edge_x", tool.edge_x),
        ("fixed_tool.weld_start", tool.weld_start),
        ("fixed_tool.weld_end", tool.weld_end),
        *((f"beam.stiffeners[{i}].x", s.x) for i, s in enumerate(beam.stiffeners, 1)),
        *((f"beam.closed_zones[{i}].start", z.start) for i, z in enumerate(beam.closed_zones, 1)),
        *((f"beam.closed_zones[{i}].end", z.end) for i, z in enumerate(beam.closed_zones, 1)),
    ):
        if not rear.si - 1e-9 <= entry.si <= front.si + 1e-9:
            yield key, f'"{entry.text}" must lie on the beam, "{rear.text}" to "{front.text}"'
    if wrong:
        return
    shape = beam.section
    section = built(shape)
    for i, stiffener in enumerate(beam.stiffeners, 1):
        if (stiffener.kind == "diaphragm") == shape.OPEN:
            fits = "full-depth pair, part-depth pair" if shape.OPEN else "diaphragm"
            yield (
                f"beam.stiffeners[{i}].kind",
                f'"{stiffener.kind}" does not suit a {shape.SHAPE} section; allowed: {fits}',
            )
    last = None
    for i, zone in enumerate(beam.closed_zones, 1):
        key = f"beam.closed_zones[{i}]"
        if not shape.OPEN:
            yield key, f"side plates close an open section; a {shape.SHAPE} is closed already"
        if zone.end.si - zone.start.si < section.h:
            yield (
                key,
                f'"{zone.start.text}" to "{zone.end.text}" is shorter than the section is deep '
                f"({_told(doc, section.h)}); shorter side plates close nothing",
            )
        if last is not None and zone.start.si <= last:
            yield key, "closed stretches must stand in order and apart"
        last = zone.end.si
    if beam.yield_strength is None:
        try:
            STEELS[beam.steel].yield_strength(nominal_wall(beam))
        except ValueError as error:
            yield "beam.steel", f"{error}; give beam.yield_strength"


def nominal_wall(beam: Beam) -> float:
    """The thickest wall, as the steel's tables count it. [m]"""
    return max(
        value
        for key, value in dimensions(beam.section).items()
        if key.startswith(("t", "T")) and isinstance(value, float)
    )


def _cylinder_and_logs(doc: Document) -> Found:
    cylinder, logs, beam = doc.cylinder, doc.logs, doc.beam
    if cylinder.rod.si >= cylinder.bore.si:
        yield "cylinder.rod", f'"{cylinder.rod.text}" must be less than the bore'
    if logs.shortest.si > logs.longest.si:
        yield "logs.shortest", f'"{logs.shortest.text}" is more than longest "{logs.longest.text}"'
    if logs.smallest_diameter.si > logs.largest_diameter.si:
        yield "logs.smallest_diameter", "it is more than largest_diameter"
    if logs.smallest_gap.si > logs.shortest.si:
        yield (
            "logs.smallest_gap",
            f'"{logs.smallest_gap.text}": the ram never reaches the shortest log '
            f'"{logs.shortest.text}"',
        )
    opening = logs.smallest_gap.si + cylinder.stroke.si
    if logs.longest.si > opening + 1e-9:
        yield (
            "logs.longest",
            f'"{logs.longest.text}" is longer than the opening, which is smallest_gap + stroke = '
            f'"{logs.smallest_gap.text}" + "{cylinder.stroke.text}"',
        )
    face = doc.fixed_tool.edge_x.si - opening
    if cylinder.mount in ("rear pin", "rear flange") and face - cylinder.mount_x.si < (
        cylinder.stroke.si
    ):
        yield (
            "cylinder.stroke",
            f'"{cylinder.stroke.text}" does not fit: drawn in, the moving face stands '
            f"{_told(doc, face - cylinder.mount_x.si)} ahead of the mount, and the closed "
            "cylinder is longer than its stroke. Move fixed_tool.edge_x forward or shorten it",
        )
    elif face < beam.rear_end.si:
        yield "fixed_tool.edge_x", "drawn in, the moving face is behind the beam's rear end"


def _sled(doc: Document) -> Found:
    sled = doc.sled
    if sled.guide == "rod alone":
        yield "sled.guide", "no sled guide, the method does not apply: the rod alone bends"
        return
    wanted, other = (GUIDE, PADS) if sled.guide == "continuous" else (PADS, GUIDE)
    missing = [key for key in wanted if getattr(sled, key) is None]
    for key in missing:
        yield f"sled.{key}", f'missing; a sled with guide = "{sled.guide}" needs it'
    for key in other:
        if getattr(sled, key) is not None:
            yield f"sled.{key}", f'not used with guide = "{sled.guide}"; take it out'
    if missing:
        return
    rear, front, length = pads_of(sled.guide, lambda key: getattr(sled, key).si)
    if rear - front < length:
        yield (
            f"sled.{wanted[1]}",
            "the pads overlap: the rear pad's middle must be at least one pad length behind the "
            "front pad's",
        )
    edge, opening = doc.fixed_tool.edge_x.si, doc.logs.smallest_gap.si + doc.cylinder.stroke.si
    over = doc.beam.rear_end.si - (edge - opening - rear - length / 2)
    if over > 1e-9:
        yield (
            f"sled.{wanted[1]}",
            f'"{getattr(sled, wanted[1]).text}" is too much: drawn in, the rear pad hangs '
            f"{_told(doc, over)} over the beam's rear end; at most "
            f"{_told(doc, getattr(sled, wanted[1]).si - over)}",
        )
    ahead = edge - doc.logs.smallest_gap.si - front + length / 2
    if ahead > doc.fixed_tool.weld_start.si + 1e-9:
        yield (
            f"sled.{wanted[0]}",
            f"at full stroke the front pad ends at {_told(doc, ahead)}, past the start of the "
            f'fixed tool\'s root weld "{doc.fixed_tool.weld_start.text}"',
        )
    shape = doc.beam.section
    if not shape.misfits(dimensions(shape)):
        flange = built(shape).b_f
        for key in ("push_strip", "gib_strip"):
            entry = getattr(sled, key)
            if entry is not None and entry.si > flange / 2:
                yield (
                    f"sled.{key}",
                    f'"{entry.text}" is off the flange, whose half width is '
                    f"{_told(doc, flange / 2)}",
                )
