"""What can fail: a file per family. `ALL` is the list that everything else walks."""

from __future__ import annotations

from splitcalc.checks import beam_yield, web_cross_bending
from splitcalc.findings import Check

ALL: tuple[Check, ...] = (beam_yield.CHECK, web_cross_bending.CHECK)

# What is still to be checked by hand; printed on every output until a check takes its place.
NOT_YET = (
    "root weld of the fixed tool, static and fatigue",
    "flange at pads and gibs; web yielding and crippling under loads",
    "walls of a hollow or box beam under tool and mount",
    "rear mount, pins and lugs",
    "sled held down by its gibs",
    "cylinder rod, column and tube",
    "push plate and wedge plate",
    "local and lateral-torsional buckling",
    "deflection",
    "fatigue of every detail",
)
