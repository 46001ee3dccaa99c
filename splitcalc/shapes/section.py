"""What the rest of the package gets to know of a section: numbers, and its named stress points."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from typing import Any, NamedTuple

import numpy as np

from splitcalc.shapes.geometry import Bulk, Part, plastic_moduli
from splitcalc.shapes.thinwall import ThinWalled

Array = Any


DISTORTION_REACH = 1.5  # depths


class Spot(NamedTuple):
    """Where a stress point is: its fibre (y, z), and its wall and share of the wall's length."""

    name: str
    y: Array
    z: Array
    wall: int
    share: Array


@dataclass(frozen=True, eq=False)
class Points:
    """Stress points, arrays with the points last. [m, m³, m⁴, 1/m²]

    y, z : the fibre, from the centroid; t : wall; omega : warping coordinate of the wall's
    mid-line; Q_y, Q_z, Q_w : first moments, the flow of closed cells included; psi : flow of a
    unit torque in the cell
    """

    names: tuple[str, ...]
    y: Array
    z: Array
    t: Array
    omega: Array
    Q_y: Array
    Q_z: Array
    Q_w: Array
    psi: Array


@dataclass(frozen=True, eq=False)
class Section:
    """A section's numbers, from the centroid, z up. [m, m², m⁴, m⁶]

    h depth; z_t, z_b outermost fibres; y_t, y_b half widths there; z_s shear centre; z_f mid-line
    of the loaded flange, b_f and t_f its size; t_w web, r fillet, h_o between the flanges'
    mid-lines; z_w top of the web and Q_yw the first moment there; t_max the thickest wall.
    `open` tells which torsion rules hold.
    """

    open: bool
    h: Array
    A: Array
    I_y: Array
    I_z: Array
    J: Array
    C_w: Array
    z_s: Array
    z_t: Array
    z_b: Array
    y_t: Array
    y_b: Array
    z_f: Array
    b_f: Array
    t_f: Array
    t_w: Array
    r: Array
    h_o: Array
    z_w: Array
    Q_yw: Array
    t_max: Array
    points: Points
    parts: tuple[Part, ...]

    @property
    def reach(self) -> Array:
        """How far from a load a closed section distorts, 0 for an open one. [m]"""
        return 0.0 if self.open else DISTORTION_REACH * self.h

    @property
    def S_t(self) -> Array:
        """Elastic modulus at the top. [m³]"""
        return self.I_y / self.z_t

    @property
    def S_b(self) -> Array:
        """Elastic modulus at the bottom. [m³]"""
        return -self.I_y / self.z_b

    @property
    def S_z(self) -> Array:
        """Elastic modulus about the vertical axis. [m³]"""
        return self.I_z / np.maximum(self.y_t, self.y_b)

    def plastic(self) -> tuple[float, float]:
        """Plastic moduli Z_y, Z_z of a section of scalars. [m³]"""
        return plastic_moduli(list(self.parts))

    def at_point(self, index: Any) -> Section:
        """The same section with one stress point, as scalars, or with those of an index array."""
        some = {
            f.name: np.asarray(getattr(self.points, f.name))[..., index]
            for f in fields(Points)
            if f.name != "names"
        }
        names = tuple(np.atleast_1d(np.array(self.points.names)[index]))
        return replace(self, points=Points(names, **some))


def assemble(
    *,
    exact: Bulk,
    parts: list[Part],
    model: ThinWalled,
    walls_t: np.ndarray,
    ends: tuple[tuple[int, int], ...],
    spots: list[Spot],
    datum: Array,
    web_spot: str,
    **values: Array,
) -> Section:
    """Put a section together; `datum` is the height of z = 0 above the parts' origin. [m]

    First moments are scaled by exact over mid-line inertia, so that the shear flow carries the
    whole of the shear force.
    """
    rows: dict[str, list[Array]] = {
        name: [] for name in ("y", "z", "t", "omega", "Q_y", "Q_z", "Q_w", "psi")
    }
    for spot in spots:
        first, last = ends[spot.wall]
        rows["y"].append(spot.y)
        rows["z"].append(spot.z - datum)
        rows["t"].append(walls_t[..., spot.wall])
        rows["omega"].append(
            model.omega[..., first]
            + spot.share * (model.omega[..., last] - model.omega[..., first])
        )
        rows["Q_y"].append(-model.f_z.at(spot.wall, spot.share) * exact.I_y)
        rows["Q_z"].append(-model.f_y.at(spot.wall, spot.share) * exact.I_z)
        rows["Q_w"].append(model.f_w.at(spot.wall, spot.share) * model.C_w)
        rows["psi"].append(model.f_t.at(spot.wall, spot.share))
    names = tuple(spot.name for spot in spots)
    points = Points(
        names,
        **{key: np.stack(np.broadcast_arrays(*row), axis=-1) for key, row in rows.items()},
    )
    web = names.index(web_spot)
    return Section(
        A=exact.A,
        I_y=exact.I_y,
        I_z=exact.I_z,
        C_w=model.C_w,
        z_s=model.z_s - datum,
        z_w=points.z[..., web],
        Q_yw=points.Q_y[..., web],
        points=points,
        parts=tuple(parts),
        **values,
    )
