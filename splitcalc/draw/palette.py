"""Colours and line styles, the same in every picture; told apart without seeing hue.

Red means one thing: does not hold. The line of thrust alone has the accent. Blue and purple are top
and bottom, light is the right side.
"""

INK = "#2b2b2b"
QUIET = "#767c86"
LIMIT = "#b3261e"
THRUST = "#c25500"

BEAM = "#d3d8de"
FLANGE = "#aab2bd"
TOOL = "#949dab"
BRACE = "#bcc3cd"
CYLINDER = "#eef0f3"
OUTLINE = "#6f7783"
WOOD = "#ecd3a8"
BARK = "#9c7638"
NEAR_LOAD = "#24405f"  # laid on thinly, so that pinned curves and limits show through

CORNERS = {
    "top left": ("#003f73", "-"),
    "top right": ("#1b78b8", "-"),
    "bottom left": ("#4f2450", "-"),
    "bottom right": ("#ad4f85", "-"),
}
WEB = ("#93690a", (0, (4, 2)))
OWN = (INK, (0, (1, 1.5)))
UPRIGHT, SIDEWAYS = ("#003f73", "-"), ("#ad4f85", "-")
WHOLE, SHARE = (INK, "-"), (QUIET, (0, (4, 2)))

TENSION, COMPRESSION = "#0072b2", "#8a3f86"
