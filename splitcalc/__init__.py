"""Strength calculation of hydraulic log splitters and machines loaded like them.

    machine = splitcalc.load("machine.toml")
    log = splitcalc.log(machine, length="20 in", skew_up="4 deg")
    splitcalc.under(machine, log)    # actions, stresses, findings under one log
    splitcalc.worst(machine)         # findings over all allowed logs

What can't be used is refused with a `ValueError` that names all problems.
"""

from typing import TYPE_CHECKING, Any

__version__ = "0.1.0"
__all__ = ["load", "log", "log_between", "under", "worst"]

if TYPE_CHECKING:
    from splitcalc.machine.file import load
    from splitcalc.scripting import log, log_between, under, worst
else:
    # On first use: `import splitcalc` stays light, numpy included.
    def __getattr__(name: str) -> Any:
        if name not in __all__:
            raise AttributeError(f"module 'splitcalc' has no attribute {name!r}")
        from importlib import import_module

        home = import_module("splitcalc.machine.file" if name == "load" else "splitcalc.scripting")
        return getattr(home, name)

    def __dir__() -> list[str]:
        return sorted({*globals(), *__all__})
