"""One spring-borne bar, two uses: the bimoment along the beam, the roll of the loaded flange.

Both obey `f'' - kappa^2 f = source` on a span. A torque t makes f' jump by t, a concentrated
bimoment b makes f jump by -b; both may be spread evenly over a length. At an end either f is zero
(`j = +1`: free warping; flange held by a stiffener) or its slope is (`j = -1`: warping held;
flange free to roll). The answer at x is t * c_t + b * c_b with the influence coefficients below,
exact for any place of the load, and written with decaying exponentials so that nothing overflows.

Source: derived from the differential equation of restrained torsion (V. Z. Vlasov, Thin-Walled
Elastic Beams; from memory) and of a torsion bar on an elastic rotational spring.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, NamedTuple

import numpy as np
from numpy import exp, sinh

from splitcalc.equations import equation
from splitcalc.thrust.frame import remaining

Array = Any

SOURCE = "derived: exact solution of f″ − κ²·f = load on a span with two ends"
NEXT_TO = 1e-9  # m: a torque on the very end of a span acts this far inside it


@equation(gives="R", source=SOURCE)
def end_ratio(
    *, kappa: Array, s_l: Array, s_r: Array, l_s: Array, j_l: Array, j_r: Array, j_s: Array
) -> Array:
    u = 1 - j_l * exp(-2 * kappa * s_l)
    v = 1 - j_r * exp(-2 * kappa * s_r)
    return u * v * exp(kappa * (s_l + s_r - l_s)) / (2 - 2 * j_s * exp(-2 * kappa * l_s))


@equation(gives="c_t", source=SOURCE)
def torque_influence(
    *, kappa: Array, w_l: Array, h_l: Array, R_l: Array, w_r: Array, h_r: Array, R_r: Array
) -> Array:
    return -(w_l * h_l * R_l + w_r * h_r * R_r) / kappa


@equation(gives="d_t", source=SOURCE)
def torque_influence_slope(
    *, w_l: Array, h_l: Array, R_l: Array, w_r: Array, h_r: Array, R_r: Array
) -> Array:
    return w_l * h_l * R_l - w_r * h_r * R_r


@equation(gives="c_b", source=SOURCE)
def jump_influence(
    *, w_l: Array, h_l: Array, R_l: Array, w_r: Array, h_r: Array, R_r: Array
) -> Array:
    return w_r * h_r * R_r - w_l * h_l * R_l


@equation(gives="d_b", source=SOURCE)
def jump_influence_slope(
    *, kappa: Array, w_l: Array, h_l: Array, R_l: Array, w_r: Array, h_r: Array, R_r: Array
) -> Array:
    return kappa * (w_l * h_l * R_l + w_r * h_r * R_r)


@dataclass(frozen=True, eq=False)
class Span:
    """A stretch of beam between two ends. [m]; `j_l`, `j_r` as above."""

    start: Array
    end: Array
    j_l: int
    j_r: int


class Placed(NamedTuple):
    """A load as one span and one set of stations see it: shares, spread factors, distances."""

    kappa: Array
    span: Span
    w_l: Array
    w_r: Array
    h_l: Array
    h_r: Array
    from_left: Array  # of the part behind x, from the span's left end
    to_right: Array  # of the part beyond x, to the span's right end
    x_left: Array
    x_right: Array


def clamp(x: Array, low: Array, high: Array) -> Array:
    return np.minimum(np.maximum(x, low), high)


def spread(kappa: Array, length: Array) -> Array:
    """Mean of cosh over a length about its middle, over its value there: sinh(u)/u."""
    u = np.maximum(kappa * length / 2, 1e-9)  # from there on down it is 1 to the last digit
    return sinh(u) / u


def place(x: Array, load: tuple[Array, Array], span: Span, kappa: Array) -> Placed | None:
    """A load on a span; None where no part of it is on the span.

    Only the part of the load on the span counts, and only stations on it.
    """
    at_start, at_end = remaining(span.start, *load), remaining(span.end, *load)
    if not np.any(at_start != at_end):
        return None
    first = clamp(load[0], span.start, span.end)
    last = clamp(load[1], span.start, span.end)
    inside = (x >= span.start) & (x <= span.end)
    here = clamp(x, span.start, span.end)
    behind = (np.minimum(first, here), np.minimum(last, here))
    ahead = (np.maximum(first, here), np.maximum(last, here))
    share = remaining(here, *load)
    return Placed(
        kappa,
        span,
        w_l=(at_start - share) * inside,
        w_r=(share - at_end) * inside,
        h_l=spread(kappa, behind[1] - behind[0]),
        h_r=spread(kappa, ahead[1] - ahead[0]),
        from_left=(behind[0] + behind[1]) / 2 - span.start,
        to_right=span.end - (ahead[0] + ahead[1]) / 2,
        x_left=here - span.start,
        x_right=span.end - here,
    )


def influence(on: Placed | None, *, jump: bool = False, slope: bool = False) -> Array:
    """Coefficient at the stations of a placed torque (or jump), or the slope of it.

    Inside a spread jump the slope leaves out the jump's own part: that is carried by the load,
    not by shear.
    """
    if on is None:
        return 0.0
    span = on.span
    bar = {"kappa": on.kappa, "l_s": span.end - span.start, "j_s": span.j_l * span.j_r}
    at_load, at_x = (-1 if jump else 1), (-1 if slope else 1)  # cosh for sinh, or back
    parts = {"w_l": on.w_l, "w_r": on.w_r, "h_l": on.h_l, "h_r": on.h_r}
    parts["R_l"] = end_ratio(
        s_l=on.from_left, s_r=on.x_right, j_l=at_load * span.j_l, j_r=at_x * span.j_r, **bar
    )
    parts["R_r"] = end_ratio(
        s_l=on.x_left, s_r=on.to_right, j_l=at_x * span.j_l, j_r=at_load * span.j_r, **bar
    )
    if jump:
        return jump_influence_slope(kappa=on.kappa, **parts) if slope else jump_influence(**parts)
    return torque_influence_slope(**parts) if slope else torque_influence(kappa=on.kappa, **parts)


def spans_between(
    start: Array, end: Array, breaks: tuple[Span, ...], *, j_end: int
) -> tuple[Span, ...]:
    """The spans left over when the stretches in `breaks` are taken out of the beam.

    `breaks` in order along the beam; a break's `j_l` and `j_r` are the conditions that it sets
    on its left and right neighbour; `j_end` is that of the beam's true ends.
    """
    out, here, j = [], start, j_end
    for stop in breaks:
        out.append(Span(here, stop.start, j, stop.j_l))
        here, j = stop.end, stop.j_r
    out.append(Span(here, end, j, j_end))
    return tuple(s for s in out if np.all(s.end > s.start))
