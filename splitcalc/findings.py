"""What a check is and what it finds; the one reducer from arrays to findings.

A check is declared once and evaluates arrays; it never searches, formats or builds a finding.
Inside, the number is the utilisation `required factor × demand / capacity`.
"""

from __future__ import annotations

import html
import math
import textwrap
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from splitcalc.equations import Line
from splitcalc.equations.render import lines_of_text
from splitcalc.units import MINUS, Dimension, number, quantity, show

Array = Any

WIDTH = 100  # columns of text that a notebook shows unbroken on a 1280 px screen


@dataclass(frozen=True)
class Check:
    """One way in which the machine can fail, declared once.

    id : stable name, as in the JSON output
    title : trade words, the same everywhere
    source : where the rule comes from
    dimension : of demand and capacity
    evaluate : (numbers, actions) -> (demand, capacity), samples first, places last:
        `samples + (stations, points)`, points 1 where there are none
    limit : which required factor it takes
    part : which part of the machine it is about
    convex : whether its measure is convex in the actions (then the search over logs is exact)
    applies : (machine's numbers) -> (bool, why not)
    place : (numbers, point index) -> words for the place in the section
    assumptions : what a reviewer must know, as sentences
    """

    id: str
    title: str
    source: str
    dimension: Dimension
    evaluate: Callable[[Any, Any], tuple[Array, Array]]
    limit: str = "yield"
    part: str = "beam"
    convex: bool = False
    applies: Callable[[Any], tuple[bool, str]] = lambda numbers: (True, "")
    place: Callable[[Any, int], str] = lambda numbers, point: "section"
    assumptions: tuple[str, ...] = ()


@dataclass(frozen=True, repr=False)
class Finding:
    """What a check found, for one set of logs. SI.

    `given` is False when the check should apply but can't be given, `why` says so; then, and where
    it doesn't apply, the numbers are None.
    """

    check: Check
    set: str
    applies: bool = True
    given: bool = True
    why: str = ""
    demand: float | None = None
    capacity: float | None = None
    required_factor: float | None = None
    x: float | None = None
    place: str = ""
    log: Mapping[str, Any] | None = None
    replay: Callable[[], list[Line]] = list
    units: Any = "si"

    @property
    def lines(self) -> list[Line]:
        """The equations with the numbers of this finding, run once more with scalars."""
        return self.replay()

    @property
    def utilisation(self) -> float | None:
        if self.demand is None or self.capacity is None or self.required_factor is None:
            return None
        return self.required_factor * self.demand / self.capacity

    @property
    def margin(self) -> float | None:
        """1 / utilisation − 1; None without demand or without numbers."""
        u = self.utilisation
        return 1 / u - 1 if u else None

    @property
    def holds(self) -> bool:
        """Whether it holds or doesn't apply; a check that can't be given does not hold."""
        if not self.applies:
            return True
        u = self.utilisation
        return self.given and u is not None and u <= 1

    @property
    def quantities(self) -> dict[str, Any]:
        """Demand, capacity and place x as pint quantities in the person's units."""
        kinds = {"demand": self.check.dimension, "capacity": self.check.dimension}
        return {
            name: quantity(si, kind, self.units)
            for name, kind in (kinds | {"x": Dimension.LENGTH}).items()
            if (si := getattr(self, name)) is not None
        }

    def as_dict(self) -> dict[str, Any]:
        """The finding as plain data, SI numbers: the shape of `check --json`."""
        return {
            "id": self.check.id,
            "title": self.check.title,
            "part": self.check.part,
            "set": self.set,
            "demand": self.demand,
            "capacity": self.capacity,
            "unit": self.check.dimension.si_unit,
            "required_factor": self.required_factor,
            "utilisation": self.utilisation,
            "margin": self.margin,
            "applies": self.applies,
            "given": self.given,
            "why": self.why,
            "x_m": self.x,
            "place": self.place,
            "log": dict(self.log) if self.log else None,
            "source": self.check.source,
            "assumptions": list(self.check.assumptions),
        }

    def verdict(self) -> str:
        """One line: title, place, demand against limit, margin."""
        head = f"{self.check.title} ({self.set} logs)"
        if not self.applies:
            return f"{head}: does not apply, {self.why}"
        if not self.given or self.demand is None or self.capacity is None:
            return f"{head}: NOT GIVEN, {self.why}"
        kind = self.check.dimension
        factor = number(self.required_factor, Dimension.NUMBER, self.units)
        return (
            f"{head} at x = {show(self.x, Dimension.LENGTH, self.units)}, {self.place}: "
            f"{show(self.demand, kind, self.units)} against "
            f"{show(self.capacity, kind, self.units)} / {factor}, "
            f"margin {margin_text(self.utilisation)}"
        )

    def answer(self) -> str:
        """Demand against what is required of it, in one line."""
        if self.utilisation is None:
            return ""
        kind = self.check.dimension
        demand, capacity = (show(v, kind, self.units) for v in (self.demand, self.capacity))
        factor = number(self.required_factor, Dimension.NUMBER, self.units)
        return (
            f"largest: {demand}; used: {factor}·({demand})/({capacity}) = {self.utilisation:.4g}, "
            f"margin 1/{self.utilisation:.4g} − 1 = {margin_text(self.utilisation)}"
        )

    def text(self) -> str:
        """Verdict, equations (symbols, numbers with units, result), source, assumptions."""
        out = textwrap.wrap(self.verdict(), WIDTH)
        place = None
        for line in self.lines:
            source = line.equation.source
            body = lines_of_text(line, self.units)
            if line.place and line.place == place:
                body = body[1:]
            place = line.place
            out += ["", *body, f"    source: {source}"]
        out += ["", self.answer(), "", f"check's source: {self.check.source}"]
        out += [f"assumption: {text}" for text in self.check.assumptions]
        return "\n".join(out)

    def show(self) -> Finding:
        """Print the finding with its equations; in a notebook the finding shows itself too."""
        print(self.text())
        return self

    def __repr__(self) -> str:
        return self.verdict()

    def _repr_html_(self) -> str:
        """The same as `text`, laid out: what a page shows."""
        out, place = [f"<p><b>{html.escape(self.verdict())}</b></p>"], None
        for line in self.lines:
            *steps, last = lines_of_text(line, self.units)
            if line.place:
                steps = steps[1:]
                if line.place != place:
                    out.append(f"<p style='margin:10px 0 2px'><i>{html.escape(line.place)}</i></p>")
            place = line.place
            body = "<br>".join(map(html.escape, steps))
            out.append(
                "<div style='margin:0 0 6px;padding-left:1.5em;text-indent:-1.5em;"
                f"font-family:var(--jp-code-font-family,monospace);font-size:12px'>{body}<br>"
                f"<b>{html.escape(last)}</b> <small style='opacity:0.7;font-family:sans-serif'>"
                f"{html.escape(line.equation.source)}</small></div>"
            )
        out.append(f"<p><b>{html.escape(self.answer())}</b></p>")
        notes = [f"check's source: {self.check.source}", *self.check.assumptions]
        out += [f"<p style='margin:6px 0;font-size:85%'>{html.escape(note)}</p>" for note in notes]
        return "".join(out)


def margin_text(utilisation: float | None) -> str:
    """The margin with its sign, two decimals; in words where there is none."""
    if utilisation is None:
        return "not given"
    if utilisation == 0:
        return "no demand"
    margin = 1 / utilisation - 1
    if margin > 99:
        return "over 99"
    return f"{'+' if margin >= 0 else MINUS}{abs(math.floor(margin * 100) / 100):.2f}"


def demand_over_capacity(check: Check, numbers: Any, actions: Any) -> Array:
    """Utilisation at required factor 1, at every sample and place."""
    demand, capacity = evaluated(check, numbers, actions)
    return demand / capacity


def evaluated(check: Check, numbers: Any, actions: Any) -> tuple[Array, Array]:
    """Demand and capacity of one shape, `samples + (stations, points)`.

    Raises
    ------
    ValueError : when the check gives something else
    """
    demand, capacity = np.broadcast_arrays(*check.evaluate(numbers, actions))
    if demand.ndim < 2:
        raise ValueError(f"its arrays must be (stations, points), not of shape {demand.shape}")
    return demand, capacity


def worst_place(values: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Largest utilisation of each sample and its flat place; NaN is never a pass.

    Raises
    ------
    FloatingPointError : when a value is not a number
    """
    flat = values.reshape(*values.shape[:-2], -1)
    index = flat.argmax(axis=-1)
    top = np.take_along_axis(flat, index[..., None], axis=-1)[..., 0]
    if not np.all(np.isfinite(top)):
        raise FloatingPointError("a check gave a value that is not a finite number")
    return top, index
