"""Colours and line styles, the same in every picture; told apart without seeing hue.

Red means one thing: does not hold. The line of thrust alone has the accent. Blue and purple are top
and bottom, light is the right side.
"""

INK = "#2b2b2b"
QUIET = "#767c86"
LIMIT = "#b3261e"
THRUST = "#d55e00"

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
    "top left": ("#005b96", "-"),
    "top right": ("#3f9fdc", "-"),
    "bottom left": ("#6a3d68", "-"),
    "bottom right": ("#c26a9b", "-"),
}
WEB = ("#93690a", (0, (4, 2)))
OWN = (INK, (0, (1, 1.5)))
UPRIGHT, SIDEWAYS = ("#005b96", "-"), ("#c26a9b", "-")
WHOLE, SHARE = (INK, "-"), (QUIET, (0, (4, 2)))

TENSION, COMPRESSION = "#0072b2", "#8a3f86"
