"""Steels: yield strength by thickness.

Values are the minimum for the stated thickness. They were found second-hand or are from memory,
as each row says: look yours up in the standard or on the mill certificate.
"""

from __future__ import annotations

from dataclasses import dataclass

from splitcalc.units import INCH, LBF

KSI = 1e3 * LBF / INCH**2


@dataclass(frozen=True)
class Steel:
    """name; (thickest wall [m], minimum yield strength [Pa]) in order; source."""

    name: str
    steps: tuple[tuple[float, float], ...]
    source: str

    def yield_strength(self, thickness: float) -> float:
        """Minimum yield strength of a wall. [Pa]

        Raises
        ------
        ValueError : when the wall is thicker than the table goes [m]
        """
        for thickest, strength in self.steps:
            if thickness <= thickest * (1 + 1e-9):
                return strength
        raise ValueError(
            f"{self.name} is tabulated up to {self.steps[-1][0] * 1e3:.4g} mm; "
            f"the thickest wall is {thickness * 1e3:.4g} mm"
        )


def _ksi(name: str, source: str, *steps: tuple[float, float]) -> Steel:
    return Steel(name, tuple((inch * INCH, ksi * KSI) for inch, ksi in steps), source)


def _mpa(name: str, source: str, *steps: tuple[float, float]) -> Steel:
    return Steel(name, tuple((mm / 1e3, mpa * 1e6) for mm, mpa in steps), source)


STEELS = {
    steel.name: steel
    for steel in (
        _ksi("A36", "ASTM A36, second-hand; over 8 in from memory", (8, 36), (15, 32)),
        _ksi("A572-50", "ASTM A572 grade 50, second-hand", (4, 50)),
        _ksi("A992", "ASTM A992, second-hand", (5, 50)),
        _ksi("A500B", "ASTM A500 grade B, shaped, second-hand", (0.875, 46)),
        _ksi("A500C", "ASTM A500 grade C, shaped, second-hand", (0.875, 50)),
        _ksi("A1085", "ASTM A1085, from memory", (0.875, 50)),
        _mpa(
            "S235", "EN 10025-2 Table 7, second-hand", (16, 235), (40, 225), (100, 215), (150, 195)
        ),
        _mpa(
            "S275",
            "EN 10025-2 Table 7, second-hand",
            (16, 275),
            (40, 265),
            (63, 255),
            (80, 245),
            (100, 235),
        ),
        _mpa(
            "S355",
            "EN 10025-2 Table 7, second-hand",
            (16, 355),
            (40, 345),
            (63, 335),
            (80, 325),
            (100, 315),
        ),
        _mpa("Q345", "GB/T 1591-2008, from memory", (16, 345), (40, 335), (63, 325)),
        _mpa("Q355", "GB/T 1591-2018, from memory", (16, 355), (40, 345), (63, 335)),
    )
}
