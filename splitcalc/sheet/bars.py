"""How far each check is used, as bars in HTML: dark this log, pale the worst allowed one."""

from __future__ import annotations

import html
from collections.abc import Sequence

from splitcalc.draw.curves import ceiling
from splitcalc.findings import Check, Finding, margin_text
from splitcalc.machine.numbers import SETS

KEY = (
    "thin: this log, wide: the worst one, with its margin; upper bar: usual logs (contacts and "
    "slope within half of their range), lower: extreme logs; the line is the limit"
)
LEAST_TOP = 1.2  # the bars' axis reaches at least so far: the limit at 1 is always in sight


def by_check_and_set(results: Sequence[Finding]) -> dict[tuple[str, str], Finding]:
    return {(f.check.id, f.set): f for f in results}


def bars(
    checks: Sequence[Check],
    now: Sequence[Finding],
    worst: Sequence[Finding],
    pinned: Sequence[Finding],
) -> str:
    """A row for each check, in their order: a bar for each set, the worst log's margin behind it.

    The axis covers the worst allowed logs and steps up for one that is past them. The pinned log
    is a dotted mark.
    """
    top = _top(now, _top(pinned, _top(worst, LEAST_TOP)))
    kinds = [by_check_and_set(results) for results in (now, worst, pinned)]
    rows = "".join(
        "<div class='sc-row'>"
        + "".join(_bar(name, top, *(kind.get((check.id, name)) for kind in kinds))
                  for name in SETS)
        + "</div>"
        for check in checks
    )  # fmt: skip
    return f"<div class='splitcalc-drawn'>{rows}<div class='sc-key'>{KEY}</div></div>"


def _top(results: Sequence[Finding], least: float) -> float:
    used = [f.utilisation for f in results if f.utilisation is not None]
    return ceiling(max([least, *used]))


def _bar(
    name: str, top: float, now: Finding | None, worst: Finding | None, pinned: Finding | None
) -> str:
    head = f"<span class='sc-set'>{name}</span>"
    told = worst or now
    if told is not None and told.utilisation is None:
        words = "NOT GIVEN" if told.applies else "does not apply"
        return f"{head}<span class='sc-none' title='{html.escape(told.why)}'>{words}</span>"
    track = "".join(
        f"<{tag} class='{kind}{_short(f)}' style='{side}:{_share(f, top):.1f}%'></{tag}>"
        for tag, kind, side, f in (
            ("i", "sc-worst ", "width", worst),
            ("b", "", "width", now),
            ("u", "", "left", pinned),
        )
        if f is not None and f.utilisation is not None
    )
    limit = f"<s style='left:{100 / top:.1f}%'></s>"
    margin = "" if worst is None else margin_text(worst.utilisation)
    return (
        f"{head}<span class='sc-track'>{track}{limit}</span>"
        f"<span class='sc-margin sc-worst {_short(worst)}'>{margin}</span>"
    )


def _share(finding: Finding, top: float) -> float:
    return 100 * min(1.0, (finding.utilisation or 0.0) / top)


def _short(finding: Finding | None) -> str:
    return "" if finding is None or finding.holds else "short"
