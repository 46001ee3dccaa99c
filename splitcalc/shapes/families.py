"""The families of sections: what a person types for each, and what can't be one.

All families are symmetric about z. `build` takes dimensions that are scalars or sample arrays.
"""

from __future__ import annotations

import functools
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, ClassVar

from splitcalc.inputs import Entry, choice, quantity
from splitcalc.shapes.build import (
    box_section,
    hollow_section,
    i_section,
    rolled_torsion,
    wall_and_corners,
)
from splitcalc.shapes.section import Section
from splitcalc.units import Dimension

Array = Any
Values = Mapping[str, Array]
LENGTH = Dimension.LENGTH


def _size(words: str, low: float, high: float, **more: str) -> Any:
    return quantity(words, LENGTH, low, high, **more)


def _wall(words: str) -> Any:
    return _size(words, 0.001, 0.1, tolerance="5 %")


@dataclass(frozen=True)
class RolledI:
    """A rolled I or H: parallel flanges, root fillets."""

    SHAPE: ClassVar[str] = "rolled I"
    OPEN: ClassVar[bool] = True
    d: Entry = _size("depth of the section", 0.05, 1.2)
    b_f: Entry = _size("width of the flanges", 0.03, 0.6)
    t_f: Entry = _wall("thickness of the flanges")
    t_w: Entry = _wall("thickness of the web")
    r: Entry = _size("root fillet radius", 0.0, 0.06)

    @staticmethod
    def build(v: Values) -> Section:
        flange = (v["b_f"], v["t_f"])
        return i_section(v["d"], flange, flange, v["t_w"], v["r"], rolled_torsion(**v))

    @staticmethod
    def misfits(v: Values) -> list[str]:
        out = _i_misfits(v["d"], (v["b_f"], v["t_f"]), (v["b_f"], v["t_f"]), v["t_w"], v["r"])
        if v["t_w"] > v["t_f"]:
            out.append("t_w: more than t_f, where the torsion formula of rolled shapes ends")
        return out


@dataclass(frozen=True)
class PlateI:
    """An I welded up from three plates."""

    SHAPE: ClassVar[str] = "plate I"
    OPEN: ClassVar[bool] = True
    d: Entry = _size("depth over both flanges", 0.05, 1.2)
    b_t: Entry = _size("width of the top flange", 0.03, 0.6)
    t_t: Entry = _wall("thickness of the top flange")
    b_b: Entry = _size("width of the bottom flange", 0.03, 0.6)
    t_b: Entry = _wall("thickness of the bottom flange")
    t_w: Entry = _wall("thickness of the web")

    @staticmethod
    def build(v: Values) -> Section:
        h_w = v["d"] - v["t_t"] - v["t_b"]
        J = (v["b_t"] * v["t_t"] ** 3 + v["b_b"] * v["t_b"] ** 3 + h_w * v["t_w"] ** 3) / 3
        top, bottom = (v["b_t"], v["t_t"]), (v["b_b"], v["t_b"])
        return i_section(v["d"], top, bottom, v["t_w"], 0.0 * v["d"], J)

    @staticmethod
    def misfits(v: Values) -> list[str]:
        top, bottom = (v["b_t"], v["t_t"]), (v["b_b"], v["t_b"])
        return _i_misfits(v["d"], top, bottom, v["t_w"], 0.0)


@dataclass(frozen=True)
class Hollow:
    """A rectangular or square hollow section with rounded corners."""

    SHAPE: ClassVar[str] = "hollow"
    OPEN: ClassVar[bool] = False
    H: Entry = _size("height", 0.05, 0.6)
    B: Entry = _size("width", 0.03, 0.6)
    T: Entry = _wall("nominal wall thickness")
    made_to: str = choice("product standard", "EN 10219", "EN 10210", "A500", "A1085")

    @staticmethod
    def build(v: Values) -> Section:
        return hollow_section(v["H"], v["B"], *wall_and_corners(v["T"], v["made_to"]))

    @staticmethod
    def misfits(v: Values) -> list[str]:
        t, outer, _ = wall_and_corners(v["T"], v["made_to"])
        if min(v["H"], v["B"]) < 2 * outer + t:
            return ["T: the corner radii leave no flat wall; height and width must exceed 2·r + T"]
        return []


@dataclass(frozen=True)
class PlateBox:
    """A box welded up from four plates; top and bottom may stand out over the webs."""

    SHAPE: ClassVar[str] = "plate box"
    OPEN: ClassVar[bool] = False
    b_t: Entry = _size("width of the top plate", 0.03, 0.6)
    t_t: Entry = _wall("thickness of the top plate")
    b_b: Entry = _size("width of the bottom plate", 0.03, 0.6)
    t_b: Entry = _wall("thickness of the bottom plate")
    h_w: Entry = _size("height of the webs", 0.03, 1.2)
    t_w: Entry = _wall("thickness of each web")
    c: Entry = _size("webs, outer face to outer face", 0.03, 0.6)

    @staticmethod
    def build(v: Values) -> Section:
        return box_section(**v)

    @staticmethod
    def misfits(v: Values) -> list[str]:
        out = []
        if v["c"] < 3 * v["t_w"]:
            out.append("c: the webs must stand apart, at least 3·t_w over their outer faces")
        for key, words in (("b_t", "top"), ("b_b", "bottom")):
            if v[key] < v["c"] * (1 - 1e-9):
                out.append(f"{key}: the {words} plate must be at least as wide as c, over the webs")
        return out


def dimensions(family: Family) -> dict[str, float | str]:
    """The typed dimensions. [m]"""
    return {k: v.si if isinstance(v, Entry) else v for k, v in vars(family).items()}


@functools.lru_cache(maxsize=256)
def built(family: Family) -> Section:
    """The section of the typed dimensions; made once, then kept."""
    return family.build(dimensions(family))


FAMILIES = {family.SHAPE: family for family in (RolledI, PlateI, Hollow, PlateBox)}
Family = RolledI | PlateI | Hollow | PlateBox


def _i_misfits(d: float, top: Any, bottom: Any, t_w: float, r: float) -> list[str]:
    out = []
    if d - top[1] - bottom[1] - 2 * r < 0.2 * d:
        out.append("d: flanges and fillets leave less than a fifth of the depth for the web")
    if min(top[0], bottom[0]) < 2 * t_w + 2 * r:
        out.append("t_w: the web with its fillets must be narrower than the flange, less t_w")
    return out
