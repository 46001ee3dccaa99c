"""Curves along the beam as quantities, and the tables that notebooks show."""

from __future__ import annotations

import html
from collections.abc import Collection, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from splitcalc.units import Dimension, number, quantity, show, unit_text

Array = Any  # a numpy array of shape (stations,)
Quantity = Any  # pint's, in the application's registry

NOISE = 1e-9  # of a curve's peak: what is smaller, or nearer to the peak, is rounding


@dataclass(frozen=True, eq=False, repr=False)
class Curves(Mapping[str, Quantity]):
    """Curves over the stations `x`, by name: pint arrays in the person's units.

    Parameters
    ----------
    what : what the curves are, in words
    si : the curves in SI, with the kind of each
    stations : places along the beam from the rear mount [m]
    units : the person's units
    """

    what: str
    si: Mapping[str, tuple[Array, Dimension]]
    stations: Array
    units: Any

    @property
    def x(self) -> Quantity:
        return quantity(self.stations, Dimension.LENGTH, self.units)

    def __getitem__(self, name: str) -> Quantity:
        if name not in self.si:
            raise KeyError(f"{name!r}; here are {', '.join(self.si)}")
        values, dimension = self.si[name]
        return quantity(values, dimension, self.units)

    def __iter__(self) -> Iterator[str]:
        return iter(self.si)

    def __len__(self) -> int:
        return len(self.si)

    def to_arrays(self, *, si: bool = True) -> dict[str, np.ndarray]:
        """Plain arrays, "x" and one a curve, in SI or in the person's units. New ones each time."""
        if si:
            return {"x": self.stations.copy(), **{k: v.copy() for k, (v, _) in self.si.items()}}
        return {"x": self.x.magnitude, **{name: curve.magnitude for name, curve in self.items()}}

    def peaks(self) -> dict[str, int]:
        """The station where each curve is largest to either side, the first one if level.

        A curve that is zero all along has none.
        """
        sizes = {name: np.abs(values) for name, (values, _) in self.si.items()}
        return {
            name: int(np.argmax(size >= (1 - NOISE) * size.max()))
            for name, size in sizes.items()
            if size.any()
        }

    def __repr__(self) -> str:
        first, last = (
            show(float(end), Dimension.LENGTH, self.units, 3) for end in self.stations[[0, -1]]
        )
        return (
            f"<{self.what}: {', '.join(self.si)} at {len(self.stations)} stations, "
            f"x = {first} to {last}>"
        )

    def _repr_html_(self) -> str:
        """A row for each station where a curve has its peak, that one in bold."""
        peaks = self.peaks()
        rows = sorted(set(peaks.values()))
        kinds = {"x": Dimension.LENGTH, **{name: kind for name, (_, kind) in self.si.items()}}
        curves = [self.stations, *(values for values, _ in self.si.values())]
        columns = [
            [number(float(v), kind, self.units) for v in _quiet(values)[rows]]
            for values, kind in zip(curves, kinds.values(), strict=True)
        ]
        names = list(kinds)
        return table(
            f"{self.what}, peaks in bold",
            [_headed(name, kind, self.units) for name, kind in kinds.items()],
            zip(*columns, strict=True),
            strong={(rows.index(row), names.index(name)) for name, row in peaks.items()},
        )


def _quiet(values: Array) -> Array:
    """The curve with its rounding noise taken for the zero that it stands for."""
    return np.where(np.abs(values) > NOISE * np.abs(values).max(), values, 0.0)


def _headed(name: str, dimension: Dimension, units: Any) -> str:
    unit = unit_text(dimension, units)
    return f"{name}, {unit}" if unit else name


def table(
    caption: str,
    head: Sequence[str],
    rows: Iterable[Sequence[str]],
    *,
    words: Collection[int] = (),
    strong: Collection[tuple[int, int]] = (),
) -> str:
    """An HTML table without colours of its own, so that it reads on light and on dark.

    `words` are the columns of text, the others stand to the right; `strong` are (row, column).
    """

    def cell(tag: str, text: str, column: int) -> str:
        side = "left" if column in words else "right"
        return f"<{tag} style='text-align:{side}'>{text}</{tag}>"

    heads = "".join(cell("th", html.escape(text), k) for k, text in enumerate(head))
    body = ""
    for r, row in enumerate(rows):
        texts = [html.escape(text) for text in row]
        texts = [f"<b>{t}</b>" if (r, k) in strong else t for k, t in enumerate(texts)]
        body += f"<tr>{''.join(cell('td', text, k) for k, text in enumerate(texts))}</tr>"
    return (
        f"<table><caption style='text-align:left'>{html.escape(caption)}</caption>"
        f"<thead><tr>{heads}</tr></thead><tbody>{body}</tbody></table>"
    )
