"""For other people's notebooks and scripts: values with units go in, quantities come out.

The package offers these at its top, `splitcalc.under` and so on.
"""

from __future__ import annotations

from splitcalc.checks import ALL
from splitcalc.logs.allowed import FIRST_BITE, STATES
from splitcalc.logs.present import present
from splitcalc.logs.report import findings
from splitcalc.machine.file import Machine
from splitcalc.scripting.arguments import Arguments, log, log_between
from splitcalc.scripting.curves import Curves
from splitcalc.scripting.results import Findings, Result
from splitcalc.thrust.frame import Log

__all__ = ["Curves", "Findings", "Result", "log", "log_between", "under", "worst"]


def under(machine: Machine, log: Log, state: str = FIRST_BITE) -> Result:
    """Actions, stresses, reactions and findings of a machine under one log.

    Parameters
    ----------
    state : "first bite", the wedge's edge on the log's end, or "buried", the wedge inside the log:
        then the log's distance is the gap between the tools

    A log that is not allowed is worked out all the same: `Result.past` says what it is past.

    Raises
    ------
    InputError : for an unknown state, and for a log whose sled does not stand on this beam
    """
    arguments = Arguments(machine)
    arguments.word("state", state, STATES)
    arguments.distance("log", log.l_AB)
    arguments.done()
    return Result(present(ALL, arguments.numbers, log, machine.units, state), machine.units)


def worst(machine: Machine) -> Findings:
    """Every check's finding for each set, at its worst allowed log."""
    numbers = Arguments(machine).numbers
    return Findings(findings(ALL, numbers, machine.units), numbers.notes)
