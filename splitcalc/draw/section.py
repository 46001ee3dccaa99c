"""The section at one station, its walls coloured by normal stress: plain SVG text."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from html import escape
from math import sqrt
from typing import Any
from zlib import crc32

import numpy as np

from splitcalc.draw import palette
from splitcalc.logs.present import CORNERS, Present, corner_points
from splitcalc.shapes.geometry import FILLET_AREA
from splitcalc.shapes.section import Section
from splitcalc.units import MINUS, Dimension, factor, number, show, unit_text

INK = "var(--jp-ui-font-color1, #2b2b2b)"
QUIET = "var(--jp-ui-font-color2, #767c86)"
HEAD, FOOT, SIDE = 42, 34, 14  # css px kept free above, below and beside the section
NEAR = 1e-9  # m
FLAT, SHORT = 1e-6, 1e-3  # of the limit: a wall with one stress; then the gradient's length, m

Loop = list[tuple[float, float]]
Px = Callable[[float, float], tuple[float, float]]


def section_svg(now: Present, x_index: int, units: Any, width: int = 240, height: int = 190) -> str:
    """The section seen from the rear mount, left on the left, as SVG text.

    Along each wall the colour goes with the normal stress: tension blue, compression purple, white
    at zero, full at the limit for extreme logs. Numbers: normal stress at the four corners, for an
    open section the equivalent stress at the top of the web.

    Parameters
    ----------
    x_index : the station, an index into `now.x`
    units : "si" or "us"
    width, height : of the picture [css px]
    """
    section = now.numbers.section
    wide = 2 * float(max(section.y_t, section.y_b))
    scale = min((width - 2 * SIDE) / wide, (height - HEAD - FOOT) / float(section.h))
    middle = width / 2
    top = HEAD + (height - HEAD - FOOT - scale * float(section.h)) / 2
    full = float(now.numbers.f_y / now.numbers.required["yield"]["extreme"])

    def px(y: float, z: float) -> tuple[float, float]:
        return middle - scale * y, top + scale * (float(section.z_t) - z)

    body, gradients = [], []
    for outline, over in _walls(section):
        name, gradient = _gradient(now, x_index, over, full, px)
        gradients.append(gradient)
        path = " ".join(_path(loop, px) for loop in outline)
        body.append(
            f'<path d="{path}" fill="url(#{name})" fill-rule="evenodd" style="stroke:{QUIET}" '
            'stroke-width="0.7"/>'
        )
    where = show(float(now.x[x_index]), Dimension.LENGTH, units, 3)
    body.append(_text(f"section at {where}", middle, 13, INK, "middle"))
    unit = f"normal stress, {unit_text(Dimension.STRESS, units)} (tension +)"
    body.append(_text(unit, middle, height - 5, QUIET, "middle"))
    points = section.points
    for name, k in zip(CORNERS, corner_points(section), strict=True):
        left, up = name.endswith("left"), name.startswith("top")
        x, y = px(float(points.y[k]), float(points.z[k]))
        body.append(_dot(x, y, palette.CORNERS[name][0]))
        x = min(x, middle - 26) if left else max(x, middle + 26)
        value = _signed(float(now.sigma[x_index, k]), units)
        body.append(_text(value, x, y - 7 if up else y + 16, INK, "middle", bold=True))
    if now.web is not None:
        x, y = px(-float(section.t_w) / 2, float(section.z_w))
        body.append(_dot(x, y, palette.WEB[0]))
        value = number(float(now.web[x_index]), Dimension.STRESS, units, 3)
        words = f"web across {value}"
        body.append(_text(words, x + 8, y + 12, INK, "start"))
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" version="1.1" width="{width}" height="{height}" '
        f'viewBox="0 0 {width} {height}" role="img" font-family="inherit">'
        f"<defs>{''.join(gradients)}</defs>{''.join(body)}</svg>"
    )


def _walls(section: Section) -> Iterator[tuple[list[Loop], np.ndarray]]:
    """Outlines of each wall (y, z from the centroid), and which stress points lie on it.

    A hollow section is one wall with a hole: stress is a plane over it, as over any closed one.
    """
    points = section.points
    blocks = [
        (sign, p.y, p.z + float(section.z_b), p.width, p.half)
        for p in section.parts
        if p.half
        for sign in (1 if p.area > 0 else -1,)
    ]
    rounds = [sqrt(abs(p.area) / FILLET_AREA) for p in section.parts if not p.half]
    if any(sign < 0 for sign, *_ in blocks):
        outer, inner = (max(rounds), min(rounds))
        loops = [_rounded(y, z, b, h, outer if sign > 0 else inner) for sign, y, z, b, h in blocks]
        yield loops, np.ones(points.y.shape, bool)
        return
    for _, y, z, b, h in blocks:
        loops = [_rounded(y, z, b, h, 0.0)]
        if rounds and h > b:
            loops = [_web_with_fillets(y, z, b, h, rounds[0])]
        on = (abs(points.y - y) < b + NEAR) & (abs(points.z - z) < h + NEAR)
        yield loops, on


def _arc(y: float, z: float, r: float, start: float) -> Loop:
    angles = np.radians(start + np.linspace(0, 90, 7))
    return [(y + r * float(np.cos(a)), z + r * float(np.sin(a))) for a in angles]


def _rounded(y: float, z: float, b: float, h: float, r: float) -> Loop:
    """A rectangle with half width b and half height h, its corners rounded."""
    if r == 0:
        return [(y + b, z + h), (y - b, z + h), (y - b, z - h), (y + b, z - h)]
    out: Loop = []
    for k, (s, t) in enumerate(((1, 1), (-1, 1), (-1, -1), (1, -1))):
        out += _arc(y + s * (b - r), z + t * (h - r), r, 90.0 * k)
    return out


def _web_with_fillets(y: float, z: float, b: float, h: float, r: float) -> Loop:
    """A web, widened by root fillets where it meets the flanges."""
    left = [*_arc(y + b + r, z - h + r, r, 180)[::-1], *_arc(y + b + r, z + h - r, r, 90)[::-1]]
    return [*left, *((2 * y - v, w) for v, w in left[::-1])]


def _path(loop: Loop, px: Px) -> str:
    return "M" + "L".join(f"{x:.1f},{y:.1f}" for x, y in (px(*p) for p in loop)) + "Z"


def _gradient(now: Present, x_index: int, on: np.ndarray, full: float, px: Px) -> tuple[str, str]:
    """The stress over a wall, a plane through its stress points, as an SVG gradient; its id first.

    The id is made of what it says, so that several sections can stand in one page.
    """
    points = now.numbers.section.points
    y, z = points.y[on], points.z[on]
    y_0, z_0 = float(y.mean()), float(z.mean())
    sigma = now.sigma[x_index, on]
    least, most = float(sigma.min()), float(sigma.max())
    offsets = np.column_stack([np.ones(y.size), y - y_0, z - z_0])
    mean, *slope = (float(v) for v in np.linalg.lstsq(offsets, sigma, rcond=None)[0])
    if most - least < FLAT * full:  # a direction would be noise
        least, most, mean, slope = mean, mean + FLAT * full, mean, [0.0, FLAT * full / SHORT]
    steep = slope[0] ** 2 + slope[1] ** 2
    tips = [(value - mean) / steep for value in (least, most)]
    (x1, y1), (x2, y2) = (px(y_0 + t * slope[0], z_0 + t * slope[1]) for t in tips)
    # The colour is linear in the stress between these: white at zero, no darker than at the limit.
    shares = [(value - least) / (most - least) for value in (-full, 0.0, full)]
    stops = sorted({0.0, 1.0, *(share for share in shares if 0 < share < 1)})
    places = f'x1="{x1:.1f}" y1="{y1:.1f}" x2="{x2:.1f}" y2="{y2:.1f}"'
    body = f'gradientUnits="userSpaceOnUse" {places}>' + "".join(
        f'<stop offset="{at:.4f}" stop-color="{_color(least + at * (most - least), full)}"/>'
        for at in stops
    )
    name = f"wall{crc32(body.encode()):08x}"
    return name, f'<linearGradient id="{name}" {body}</linearGradient>'


def _color(sigma: float, full: float) -> str:
    share = min(abs(sigma) / full, 1.0)
    tip = palette.TENSION if sigma > 0 else palette.COMPRESSION
    rgb = (int(tip[k : k + 2], 16) for k in (1, 3, 5))
    return "#" + "".join(f"{round(255 + share * (c - 255)):02x}" for c in rgb)


def _signed(sigma: float, units: Any) -> str:
    """Three digits, but none below a tenth of the unit: beside the limits they would be noise."""
    size = abs(sigma) * factor(Dimension.STRESS, units)
    if size < 0.05:
        return "0"
    text = number(sigma, Dimension.STRESS, units, 3 if size >= 10 else 2 if size >= 1 else 1)
    return text if text.startswith(MINUS) else f"+{text}"


def _dot(x: float, y: float, color: str) -> str:
    return f'<circle cx="{x:.1f}" cy="{y:.1f}" r="3" fill="{color}"/>'


def _text(text: str, x: float, y: float, color: str, anchor: str, bold: bool = False) -> str:
    weight = ' font-weight="600"' if bold else ""
    return (
        f'<text x="{x:.1f}" y="{y:.1f}" font-size="12" text-anchor="{anchor}"{weight} '
        f'style="fill:{color}">{escape(text)}</text>'
    )
