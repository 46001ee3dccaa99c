"""Colours and line styles, the same in every picture; told apart without seeing hue.

Red means one thing: does not hold. Blue and purple are top and bottom, light is the right side.
"""

INK = "#2b2b2b"
QUIET = "#8a8f98"
NEAR_LOAD = "#eceef1"
LIMIT = "#b3261e"
PRESENT = "#2f4858"
WORST = "#b9c6cf"
WORST_SHORT = "#e8b9b5"

CORNERS = {
    "top left": ("#0072b2", "-"),
    "top right": ("#56b4e9", "-"),
    "bottom left": ("#7a4a78", "-"),
    "bottom right": ("#cc79a7", "-"),
}
WEB = ("#d98f00", (0, (4, 2)))
