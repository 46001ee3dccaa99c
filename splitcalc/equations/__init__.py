"""What an equation is, and the recorder that replays it.

An equation is a module-level function marked `@equation(gives=..., source=...)`: keyword-only
arguments that stand in the symbol table, straight-line assignments, one return; arithmetic,
a short list of functions and other equations, nothing else. So the line a reviewer reads can be
rendered from the very source that computed the number (see `render`).

Nothing is recorded while sweeping: outside `recording()` a call costs one look at a context
variable. To print, the same code runs once more with scalars inside `recording()`.
"""

from __future__ import annotations

import contextlib
import functools
from collections.abc import Callable, Iterator
from contextvars import ContextVar
from dataclasses import dataclass
from typing import Any

_lines: ContextVar[list[Line] | None] = ContextVar("lines", default=None)
_place: ContextVar[str] = ContextVar("place", default="")

REGISTRY: dict[str, Equation] = {}


@dataclass(frozen=True, eq=False)
class Equation:
    """One formula: the plain function, the symbol it gives, and where it comes from."""

    function: Callable[..., Any]
    gives: str
    source: str

    @property
    def name(self) -> str:
        return f"{self.function.__module__}.{self.function.__qualname__}"


@dataclass(frozen=True, eq=False)
class Line:
    """One use of an equation: its arguments and result as they were in the run."""

    equation: Equation
    values: dict[str, Any]
    result: Any
    place: str = ""


def equation(*, gives: str, source: str) -> Callable[[Callable[..., Any]], Callable[..., Any]]:
    """Mark a function as an equation.

    Parameters
    ----------
    gives : the symbol of the result; it must stand in `symbols.SYMBOLS`
    source : where the formula comes from, in the words that a reviewer will read
    """

    def mark(function: Callable[..., Any]) -> Callable[..., Any]:
        info = Equation(function, gives, source)
        REGISTRY[info.name] = info

        @functools.wraps(function)
        def call(**values: Any) -> Any:
            result = function(**values)
            lines = _lines.get()
            if lines is not None:
                lines.append(Line(info, values, result, _place.get()))
            return result

        call.equation = info  # type: ignore[attr-defined]
        return call

    return mark


@contextlib.contextmanager
def recording() -> Iterator[list[Line]]:
    """Collect every equation used inside the block, in the order of use."""
    lines: list[Line] = []
    token = _lines.set(lines)
    try:
        yield lines
    finally:
        _lines.reset(token)


@contextlib.contextmanager
def at(place: str) -> Iterator[None]:
    """Name the part of the machine that the equations inside the block speak of."""
    token = _place.set(place)
    try:
        yield
    finally:
        _place.reset(token)
