"""The worst allowed logs of the page's machine: found between the person's changes."""

from __future__ import annotations

from collections.abc import Generator, Sequence
from typing import Any

from splitcalc.findings import Check, Finding
from splitcalc.logs.report import findings_in_steps
from splitcalc.machine.numbers import Numbers


class WorstLogs:
    """`found` are the findings of the last search that came to its end."""

    def __init__(self) -> None:
        self.found: list[Finding] = []
        self._search: Generator[None, None, list[Finding]] | None = None

    @property
    def running(self) -> bool:
        return self._search is not None

    def begin(self, checks: Sequence[Check], numbers: Numbers, units: Any) -> None:
        """A new search, in place of one that is under way."""
        self._search = findings_in_steps(checks, numbers, units)

    def step(self) -> bool:
        """A few milliseconds of the search; whether they were its last."""
        assert self._search is not None
        try:
            next(self._search)
        except StopIteration as end:
            self.found, self._search = end.value, None
        return self._search is None

    def finish(self) -> list[Finding]:
        """The findings, once the search is through."""
        while self.running:
            self.step()
        return self.found
