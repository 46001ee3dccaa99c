"""Outlines of the machine's parts, seen from the side (x, z) and from above (x, y). [m]

Pure geometry. Places and sizes that the machine's file gives are drawn to scale; what it doesn't
give (the lug, the sled's body, how thick a push plate is) is a drawing's guess.
"""

from __future__ import annotations

from math import tan

import numpy as np

from splitcalc.draw.bands import Bands
from splitcalc.logs.allowed import BURIED
from splitcalc.logs.present import Present
from splitcalc.machine.document import Document, FixedTool, Tool
from splitcalc.thrust.frame import Frame

Shape = np.ndarray  # corners, shape (n, 2)
PAD, BODY, PLATE = 4, 8, 9  # css px: thickness of pads, of the sled's body, of a push plate


def box(x: tuple[float, float], v: tuple[float, float]) -> Shape:
    return np.array([(x[0], v[0]), (x[0], v[1]), (x[1], v[1]), (x[1], v[0])])


def tube_ends(doc: Document, pixel: float) -> tuple[float, float]:
    """Where the cylinder's tube starts and ends: the rod drawn in, the sled just clears it."""
    cylinder = doc.cylinder
    drawn_in = doc.fixed_tool.edge_x.si - doc.logs.smallest_gap.si - cylinder.stroke.si
    end = drawn_in - (PLATE + 6) * pixel
    if cylinder.mount in ("rear pin", "rear flange"):
        return cylinder.mount_x.si, max(end, cylinder.mount_x.si + cylinder.stroke.si)
    return end - cylinder.stroke.si - cylinder.bore.si, end


def e_place(doc: Document, pixel: float) -> float:
    """Where the height of the cylinder's axis is dimensioned."""
    start, end = tube_ends(doc, pixel)
    return start + 0.3 * (end - start)


def cylinder_parts(doc: Document, frame: Frame, bands: Bands) -> dict[str, tuple[Shape, Shape]]:
    """Mount, tube and rod, each from the side and from above."""
    pixel, e = bands.pixel, float(frame.e)
    z_t = e - doc.cylinder.axis_height.si
    bore, rod = doc.cylinder.bore.si, doc.cylinder.rod.si
    start, end = tube_ends(doc, pixel)
    half = max(6 * pixel, 0.22 * bore)
    mount = (frame.x_m - half, frame.x_m + half)
    rod_ends = (end, max(float(frame.x_A) - PLATE * pixel, end))
    return {
        "mount": (box(mount, (z_t, e + 0.42 * bore)), box(mount, (-0.62 * bore, 0.62 * bore))),
        "tube": (
            box((start, end), (e - bore / 2, e + bore / 2)),
            box((start, end), (-bore / 2, bore / 2)),
        ),
        "rod": (box(rod_ends, (e - rod / 2, e + rod / 2)), box(rod_ends, (-rod / 2, rod / 2))),
    }


def sled_parts(doc: Document, frame: Frame, bands: Bands, z_t: float) -> dict[str, Shape]:
    """Pads and body from the side, and the body from above."""
    pixel = bands.pixel
    patches = frame.patches
    rear, front = patches["rear pad"], patches["front pad"]
    body = (rear[0], max(front[1], float(frame.x_A) - PLATE * pixel))
    low = z_t + PAD * pixel
    reach = doc.sled.push_strip.si
    return {
        "rear pad": box(rear, (z_t, low)),
        "front pad": box(front, (z_t, low)),
        "sled": box(body, (low, low + BODY * pixel)),
        "sled from above": box(body, (-reach, reach)),
    }


def tool_parts(tool: Tool, edge: float, z_t: float, pixel: float) -> dict[str, Shape]:
    """A tool with its edge or face at `edge`: "side", "above", and what holds it, "brace".

    The fixed tool stands ahead of its edge, on its root weld; the moving one behind it.
    """
    low, high = z_t + tool.bottom.si, z_t + tool.bottom.si + tool.height.si
    half = tool.width.si / 2
    fixed = isinstance(tool, FixedTool)
    way = 1 if fixed else -1
    back = tool.weld_end.si - edge if isinstance(tool, FixedTool) else 0.8 * tool.height.si
    root = tool.weld_start.si if isinstance(tool, FixedTool) else edge - PLATE * pixel
    if tool.kind == "wedge":
        lean = tan(tool.rake.si) * tool.height.si
        bevel = min(half / tan(tool.included_angle.si / 2), back)
        crown = max(min(lean + 0.3 * tool.height.si, back), lean)
        outline = [(0.0, low), (lean, high), (crown, high), (back, low)]
        plan = [(0.0, 0.0), (bevel, half), (back, half), (back, -half), (bevel, -half)]
        shoulder = low
    else:
        thick = PLATE * pixel
        outline = [(0.0, low), (0.0, high), (thick, high), (thick, low)]
        plan = [(0.0, half), (thick, half), (thick, -half), (0.0, -half)]
        shoulder = low + 0.8 * tool.height.si
    foot = edge + way * back
    brace = [(edge + way * PLATE * pixel, shoulder), (foot, min(low, shoulder)), (foot, z_t)]
    return {
        "side": np.array([(edge + way * x, z) for x, z in outline]),
        "above": np.array([(edge + way * x, y) for x, y in plan]),
        "brace": np.array([*brace, (root, z_t)]),
    }


def log_body(now: Present, doc: Document, bands: Bands, z_t: float) -> tuple[Shape, Shape]:
    """The log from the side and from above: a drawing, not an input of any check.

    A body between the two contacts, its ends leaning with the slope so that it touches at A and B
    alone. It lies on the beam and on its middle line where that leaves the contacts on its ends.
    A buried log goes past the wedge's edge as the longest one does, at most to the beam's end.
    """
    frame, to, log = now.acting.frame, now.acting.reactions, now.log
    half = bands.diameter / 2
    out_A = out_B = 0.0  # how far the body goes past the contacts
    if now.state == BURIED:
        out = max(doc.logs.longest.si - float(log.l_AB), 0.0)
        if now.numbers.wedge_moves:
            out_A = min(out, max(float(frame.x_A) - doc.beam.rear_end.si, 0.0))
        else:
            out_B = min(out, max(doc.beam.front_end.si - float(frame.x_B), 0.0))
    most = 0.4 * float(log.l_AB) / bands.diameter  # so that the ends of a short one don't cross
    spans = []
    for rest, v_A, v_B, slope in (
        (z_t + half, frame.e + log.a_z, frame.e + log.b_z, to.tan_alpha),
        (0.0, log.a_y, log.b_y, to.tan_beta),
    ):
        c_A, c_B = (np.clip(rest, v - half, v + half) for v in (v_A, v_B))
        lean = min(abs(float(slope)), most)
        x_A, k_A = frame.x_A - out_A, 0.0 if out_A else lean
        x_B, k_B = frame.x_B + out_B, 0.0 if out_B else -lean
        spans.append(
            np.array(
                [
                    (x_A + k_A * (v_A - c_A + half), c_A - half),
                    (x_A, v_A),
                    (x_A + k_A * (c_A + half - v_A), c_A + half),
                    (x_B + k_B * (c_B + half - v_B), c_B + half),
                    (x_B, v_B),
                    (x_B + k_B * (v_B - c_B + half), c_B - half),
                ],
                dtype=float,
            )
        )
    return spans[0], spans[1]
