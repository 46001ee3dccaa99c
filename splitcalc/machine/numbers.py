"""The numbers that the core gets from a machine: plain SI floats, or arrays where samples vary.

One place lays out shapes: a value that samples vary has shape `samples + (1, 1)`, a section's
points `samples + (1, p)`; without samples plain floats and `(p,)`.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, fields, replace
from typing import Any

import numpy as np
from numpy import maximum, pi

from splitcalc.equations import Line, equation, recording
from splitcalc.inputs import Entry, walk
from splitcalc.machine.document import GRIPS, Document, FixedTool, Tool
from splitcalc.machine.fit import nominal_wall, pads_of
from splitcalc.materials import STEELS
from splitcalc.shapes.families import built, dimensions
from splitcalc.shapes.section import Points, Section

Array = Any
Overrides = Mapping[str, Array]

SETS = ("usual", "extreme")
CRUSHED_EDGE = 0.025  # m: no thrust within this distance of the push plate's edges
TOO_SMALL = (
    "the push plate's contact range is so small that the wood crushes up to its middle: the "
    "contact is taken there"
)
YIELD = {"AISC": 1.67, "EN": 1.5 * 1.0}  # AISC 360-22 (ASD); EN 1993-1-1 gamma_F * gamma_M0


@equation(gives="F", source="relief pressure × surge factor × full bore area, efficiency 1")
def cylinder_force(*, p: Array, c_p: Array, d_c: Array) -> Array:
    return c_p * p * pi * d_c**2 / 4


@equation(gives="e", source="height of the cylinder's axis above the centroid")
def axis_eccentricity(*, z_t: Array, h_a: Array) -> Array:
    return z_t + h_a


@equation(gives="s_c", source="a strip of end grain at the edge of the plate bears the force")
def crushed_strip(*, F: Array, b_p: Array, f_e: Array, s_min: Array) -> Array:
    return maximum(s_min, F / (2 * b_p * f_e))


@dataclass(frozen=True, eq=False)
class Contact:
    """Where a log may touch a tool, as offsets from the cylinder axis. [m]"""

    half_width: Array
    low: Array
    high: Array


@dataclass(frozen=True, eq=False)
class Numbers:
    """Everything the core wants to know, SI. Heights z from the centroid, x from the mount.

    F design force; e axis; E, G, nu, f_y steel; x_m mount, x_start and x_end the beam's ends,
    x_B fixed tool, x_3 and x_4 its root weld; rear_pad, front_pad behind the moving face, l_p
    their length, z_p their side contact, r_2 the front pad's share of roll. Then which logs:
    contacts on both tools, grip (largest slope), the log's lengths, the smallest gap, and for the
    buried state the whole wedge and the wood's strength f_90.
    """

    F: Array
    e: Array
    E: Array
    G: Array
    nu: Array
    f_y: Array
    section: Section
    x_m: Array
    x_start: Array
    x_end: Array
    x_B: Array
    x_3: Array
    x_4: Array
    rear_pad: Array
    front_pad: Array
    l_p: Array
    z_p: Array
    r_2: Array
    moving: Contact
    fixed: Contact
    wedge: Contact
    wedge_moves: bool
    grip: Array
    longest: Array
    shortest: Array
    gap: Array
    f_90: Array
    stiffeners: tuple[float, ...]
    diaphragms: tuple[float, ...]
    closed_zones: tuple[tuple[float, float], ...]
    required: Mapping[str, Mapping[str, Array]]  # factors: by a check's limit, then by set
    lines: tuple[Line, ...] = ()  # the equations that made these numbers
    notes: tuple[str, ...] = ()  # what a reviewer must know of these numbers

    def at_point(self, index: Any) -> Numbers:
        """The same machine with one stress point, for replaying, or with those of an array."""
        return replace(self, section=self.section.at_point(index))


def numbers_of(document: Document, overrides: Overrides | None = None) -> Numbers:
    """The numbers of a machine; `overrides` maps dotted keys to SI values or sample arrays.

    Raises
    ------
    KeyError : for a key that is not a number of the document
    """
    with recording() as lines:
        numbers = _numbers(document, overrides)
    return replace(numbers, lines=tuple(lines))


def _numbers(document: Document, overrides: Overrides | None) -> Numbers:
    overrides = dict(overrides or {})
    known = {
        key: value
        for key, fact, value in walk(document)
        if fact.dimension is not None and "[" not in key  # places in a list are no samples
    }
    for key in overrides:
        if key not in known:
            raise KeyError(f"{key} is not a number of the machine; known: {', '.join(known)}")

    def get(key: str) -> Array:
        """One input as `samples + (1, 1)` or a float; None where the person left it open."""
        if key in overrides:
            return _lift(overrides[key])
        value = known[key]
        return value.si if isinstance(value, Entry) else value

    section = _section(document, overrides)
    f_y = get("beam.yield_strength")
    if f_y is None:
        f_y = STEELS[document.beam.steel].yield_strength(nominal_wall(document.beam))
    F = cylinder_force(
        p=get("cylinder.relief_pressure"), c_p=get("factors.surge"), d_c=get("cylinder.bore")
    )
    height = get("cylinder.axis_height")
    E, ratio = get("beam.elastic_modulus"), get("beam.shear_ratio")
    moving = _contact(get, "moving_tool", document.moving_tool, height)
    fixed = _contact(get, "fixed_tool", document.fixed_tool, height)
    wedge_moves = document.moving_tool.kind == "wedge"
    wedge_key = "moving_tool" if wedge_moves else "fixed_tool"
    plate_key = "fixed_tool" if wedge_moves else "moving_tool"
    plate = getattr(document, plate_key)
    edge = crushed_strip(
        F=F,
        b_p=get(f"{plate_key}.width"),
        f_e=get("logs.end_grain_strength"),
        s_min=CRUSHED_EDGE,
    )
    face = fixed if wedge_moves else moving
    room = np.minimum(face.half_width, (face.high - face.low) / 2)
    notes = (TOO_SMALL,) if np.any(edge > room) else ()
    face = _inset(face, edge)
    moving, fixed = (moving, face) if wedge_moves else (face, fixed)
    grip = get(f"{plate_key}.grip_limit")
    side = get("sled.side_contact_height")
    usual = get("factors.yield_usual")
    bottom = get(f"{wedge_key}.bottom") - height
    tall = get(f"{wedge_key}.height")
    rear, front, length = pads_of(document.sled.guide, lambda key: get(f"sled.{key}"))
    return Numbers(
        F=F,
        e=axis_eccentricity(z_t=section.z_t, h_a=height),
        E=E,
        G=ratio * E,
        nu=1 / (2 * ratio) - 1,
        f_y=f_y,
        section=section,
        x_m=get("cylinder.mount_x"),
        x_start=get("beam.rear_end"),
        x_end=get("beam.front_end"),
        x_B=get("fixed_tool.edge_x"),
        x_3=get("fixed_tool.weld_start"),
        x_4=get("fixed_tool.weld_end"),
        rear_pad=rear,
        front_pad=front,
        l_p=length,
        z_p=section.z_f if side is None else section.z_t + side,
        r_2=get("sled.roll_at_front"),
        moving=moving,
        fixed=fixed,
        wedge=Contact(get(f"{wedge_key}.width") / 2, bottom, bottom + tall),
        wedge_moves=wedge_moves,
        grip=GRIPS[plate.grip] if grip is None else grip,
        longest=get("logs.longest"),
        shortest=get("logs.shortest"),
        gap=get("logs.smallest_gap"),
        f_90=get("logs.cross_grain_strength"),
        stiffeners=tuple(s.x.si for s in document.beam.stiffeners if s.kind == "full-depth pair"),
        diaphragms=tuple(s.x.si for s in document.beam.stiffeners if s.kind == "diaphragm"),
        closed_zones=tuple((z.start.si, z.end.si) for z in document.beam.closed_zones),
        required={
            "yield": {
                "usual": YIELD[document.basis.design] if usual is None else usual,
                "extreme": get("factors.yield_extreme"),
            }
        },
        notes=notes,
    )


def _lift(value: Array) -> Array:
    array = np.asarray(value, dtype=float)
    return float(array) if array.ndim == 0 else array[..., None, None]


def _section(document: Document, overrides: Overrides) -> Section:
    """The section's numbers, lifted to the shapes of this module."""
    prefix = "beam.section."
    varied = {k.removeprefix(prefix): v for k, v in overrides.items() if k.startswith(prefix)}
    shape = document.beam.section
    if not varied:
        return built(shape)
    values: dict[str, Any] = dimensions(shape)
    values.update({k: np.asarray(v, dtype=float) for k, v in varied.items()})
    section = shape.build(values)
    if not any(np.ndim(v) for v in varied.values()):
        return section
    points = {
        f.name: _point_axis(getattr(section.points, f.name))
        for f in fields(Points)
        if f.name != "names"
    }
    return replace(
        section,
        points=Points(section.points.names, **points),
        **{
            f.name: _lift(getattr(section, f.name))
            for f in fields(Section)
            if f.name not in ("open", "points", "parts")
        },
    )


def _point_axis(value: np.ndarray) -> np.ndarray:
    return value if value.ndim == 1 else value[..., None, :]


def _contact(get: Any, key: str, tool: Tool | FixedTool, axis: Array) -> Contact:
    def given(name: str, otherwise: Array) -> Array:
        value = get(f"{key}.{name}")
        return otherwise if value is None else value

    bottom = get(f"{key}.bottom")
    return Contact(
        given("contact_half_width", get(f"{key}.width") / 2),
        given("contact_low", bottom) - axis,
        given("contact_high", bottom + get(f"{key}.height")) - axis,
    )


def _inset(contact: Contact, edge: Array) -> Contact:
    """The contact range less the strip that crushes at each edge; the middle where none is left."""
    middle = (contact.low + contact.high) / 2
    return Contact(
        maximum(contact.half_width - edge, 0.0),
        np.minimum(contact.low + edge, middle),
        maximum(contact.high - edge, middle),
    )
