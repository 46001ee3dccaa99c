"""What comes out: findings as a table, and everything that one log does to a machine."""

from __future__ import annotations

import functools
import html
import textwrap
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Any, overload

from splitcalc.cautions import CAUTIONS, NOT_COVERED
from splitcalc.checks import NOT_YET
from splitcalc.equations.symbols import SYMBOLS
from splitcalc.findings import WIDTH, Finding, margin_text
from splitcalc.logs import words
from splitcalc.logs.limits import OUTSIDE
from splitcalc.logs.present import Present
from splitcalc.logs.report import governing
from splitcalc.scripting.curves import Array, Curves, Quantity, table
from splitcalc.stress.bimoment import internal_actions
from splitcalc.thrust.frame import Log
from splitcalc.thrust.statics import Reactions
from splitcalc.units import Dimension, number, quantity, show


class Findings(Sequence[Finding]):
    """Findings in order; also by check and set, `findings["beam-first-yield", "usual"]`."""

    def __init__(self, found: Iterable[Finding], notes: Sequence[str] = ()) -> None:
        self._found = tuple(found)
        self._notes = tuple(notes)

    @overload
    def __getitem__(self, index: int | tuple[str, str]) -> Finding: ...
    @overload
    def __getitem__(self, index: slice) -> Findings: ...
    def __getitem__(self, index: int | slice | tuple[str, str]) -> Finding | Findings:
        if isinstance(index, slice):
            return Findings(self._found[index], self._notes)
        if not isinstance(index, tuple):
            return self._found[index]
        named = {(f.check.id, f.set): f for f in self._found}
        if index not in named:
            raise KeyError(f"{index}; here are {', '.join(map(str, named))}")
        return named[index]

    def __len__(self) -> int:
        return len(self._found)

    @property
    def governing(self) -> Finding | None:
        """The one with the largest utilisation; one that can't be given goes first."""
        return governing(self._found)

    @property
    def hold(self) -> bool:
        """Whether all of them hold or don't apply."""
        return all(f.holds for f in self._found)

    def as_dicts(self) -> list[dict[str, Any]]:
        """Plain data, SI numbers: the entries of `splitcalc check --json`."""
        return [f.as_dict() for f in self._found]

    def __repr__(self) -> str:
        foot = textwrap.wrap(self._foot(), WIDTH, break_on_hyphens=False)
        return "\n".join([*words.table(self._found), *foot])

    def _foot(self) -> str:
        notes = "".join(f"Note: {note}. " for note in self._notes)
        return f"{notes}{words.still_open(NOT_YET)}"

    def _repr_html_(self) -> str:
        return self.table() + self.small_print()

    def table(self) -> str:
        """The table alone, as HTML."""
        head = ("check", "logs", "demand", "limit / factor", "utilisation", "margin", "where, log")
        return table("findings", head, map(_row, self._found), words=(0, 1, 6))

    def small_print(self) -> str:
        """What every output says, as HTML."""
        text = f"{self._foot()} Not covered: {'; '.join(NOT_COVERED)}. {CAUTIONS}"
        return f"<div style='font-size:85%;opacity:0.8'>{html.escape(text)}</div>"


def _row(f: Finding) -> list[str]:
    if f.utilisation is None or f.log is None:
        state = "does not apply" if not f.applies else "NOT GIVEN"
        return [f.check.title, f.set, "", "", "", state, f.why]
    kind = f.check.dimension
    factor = number(f.required_factor, Dimension.NUMBER, f.units, 3)
    where = show(f.x, Dimension.LENGTH, f.units, 3)
    return [
        f.check.title,
        f.set,
        show(f.demand, kind, f.units),
        f"{show(f.capacity, kind, f.units)} / {factor}",
        f"{f.utilisation:.3f}",
        margin_text(f.utilisation),
        f"{where}, {f.place}; {words.log_words(f.log, f.units)}",
    ]


@dataclass(frozen=True, eq=False, repr=False)
class Result:
    """One log on one machine.

    Parameters
    ----------
    present : the arrays in SI that everything here is made from
    units : the person's units, "si" or "us"
    """

    present: Present
    units: Any

    @property
    def log(self) -> Log:
        """The contact points. [m]"""
        return self.present.log

    @property
    def set(self) -> str:
        """The narrowest set that allows the log, "usual" or "extreme", or "outside"."""
        return self.present.set

    @property
    def past(self) -> tuple[str, ...]:
        """Every limit of the allowed logs that this one is past, in words."""
        return self.present.past

    @functools.cached_property
    def actions(self) -> Curves:
        """Internal actions: what the part with larger x exerts on the part with smaller x.

        `N`, `V_y`, `V_z`, `M_y`, `M_z` about the centroid, torque `T` about the shear centre; of
        an open section also `T_w`, the share of it that warping carries, and the bimoment `B`.
        """
        now = self.present
        return self._curves(
            "internal actions",
            {
                name: (values[:, 0], SYMBOLS[name].dimension)
                for name, values in internal_actions(now.numbers, now.acting).items()
            },
        )

    @functools.cached_property
    def stresses(self) -> Curves:
        """Normal stress at the four outer corners, tension positive, without allowances.

        Of an open section also `web`: the equivalent stress where the web is bent across.
        """
        curves = dict(self.present.corners)
        if self.present.web is not None:
            curves["web"] = self.present.web
        return self._curves(
            "stresses", {name: (values, Dimension.STRESS) for name, values in curves.items()}
        )

    def _curves(self, what: str, curves: dict[str, tuple[Array, Dimension]]) -> Curves:
        return Curves(what, curves, self.present.x, self.units)

    @property
    def reactions(self) -> dict[str, Quantity]:
        """Forces on the beam from sled and fixed tool, by symbol; `F` is the cylinder's.

        Rear pad `Y_1` left and `Z_1` up, front pad `Y_2` and `Z_2`, roll couple `K` of both.
        Fixed tool: the cylinder's force along the line of thrust, of slopes `tan_alpha` up and
        `tan_beta` left, with moments `M_yt` and `M_zt` about its weld's middle on the centroid's
        axis.
        """
        return {name: quantity(si, kind, self.units) for name, si, kind in self._reactions()}

    def _reactions(self) -> list[tuple[str, float, Dimension]]:
        to: Reactions = self.present.acting.reactions
        values = {"F": self.present.numbers.F, **vars(to)}
        return [(name, float(si), SYMBOLS[name].dimension) for name, si in values.items()]

    @functools.cached_property
    def findings(self) -> Findings:
        """One a check and set that allows the log; by the extreme set's factors if none does."""
        return Findings(self.present.findings, self.present.numbers.notes)

    def __repr__(self) -> str:
        kind = f"One of the {self.set} logs."
        if self.set == OUTSIDE:
            kind = f"Not an allowed log, judged as an extreme one: {'; '.join(self.past)}."
        return f"{kind} {words.sentence(self.findings)}"

    def _repr_html_(self) -> str:
        forces = [
            [name, SYMBOLS[name].words, show(si, kind, self.units)]
            for name, si, kind in self._reactions()
        ]
        return "".join(
            [
                f"<div>{html.escape(repr(self))}</div>",
                self.findings.table(),
                self.actions._repr_html_(),
                self.stresses._repr_html_(),
                table(
                    "on the beam, from sled and fixed tool; z_o = 0, the centroid's axis",
                    ("", "what", "value"),
                    forces,
                    words=(0, 1),
                ),
                self.findings.small_print(),
            ]
        )
