"""The few commands. Exit 0 all hold, 1 something doesn't, 2 the input can't be used."""

from __future__ import annotations

import argparse
import json
import os
import sys
from pathlib import Path
from typing import Any

from splitcalc import __version__
from splitcalc.cautions import CAUTIONS, NOT_COVERED
from splitcalc.inputs import InputError


def _check(args: argparse.Namespace) -> int:
    from splitcalc.checks import ALL, NOT_YET
    from splitcalc.logs.allowed import ASSUMPTIONS
    from splitcalc.logs.report import findings, governing
    from splitcalc.logs.words import sentence, still_open, table, wrapped
    from splitcalc.machine.file import load

    machine = load(args.file)
    numbers = machine.numbers()
    results = findings(ALL, numbers, machine.units)
    passed = all(f.holds for f in results)
    if args.json:
        worst = governing(results)
        report = {
            "machine": _about(machine),
            "passed": passed,
            "governing": worst and {"id": worst.check.id, "set": worst.set},
            "assumptions": [*machine.assumptions(), *numbers.notes, *ASSUMPTIONS],
            "not_covered": list(NOT_COVERED),
            "not_yet_checked": list(NOT_YET),
            "cautions": CAUTIONS,
            "findings": [f.as_dict() for f in results],
        }
        print(json.dumps(report, indent=1, ensure_ascii=False, allow_nan=False))
    else:
        print(wrapped(f"{machine.title}. {sentence(results)} {still_open(NOT_YET)}"))
        print()
        print("\n".join(table(results)))
        if numbers.notes:
            print()
            print(wrapped(f"Note: {'; '.join(numbers.notes)}."))
        print()
        print(wrapped(f"Not covered: {'; '.join(NOT_COVERED)}."))
        print()
        print(wrapped(CAUTIONS))
    return 0 if passed else 1


def _about(machine: Any) -> dict[str, str]:
    job = machine.document.job
    return {
        "title": job.title,
        "number": job.number,
        "revision": job.revision,
        "section": machine.section_name,
        "steel": machine.document.beam.steel,
        "design_basis": machine.document.basis.design,
        "sha256": machine.digest,
        "made_with": f"splitcalc {__version__}",
    }


def _open(args: argparse.Namespace) -> int:
    from splitcalc.logs.words import wrapped
    from splitcalc.opening import prepare, run_lab

    folder, done = prepare(args.folder)
    print(f"worksheets in {folder}" + ("" if args.folder else " (a copy of the invented demo)"))
    print("\n".join([*done, wrapped(CAUTIONS)]))
    return run_lab(folder, args.server)


def _new(args: argparse.Namespace) -> int:
    from shlex import quote

    from splitcalc.opening import MACHINE, new_machine

    print("\n".join(new_machine(args.folder, args.units, args.source)))
    print(f"Next: change {MACHINE} in it, then")
    print(f"  splitcalc check {quote(str(args.folder / MACHINE))}")
    print(f"  splitcalc open {quote(str(args.folder))}")
    return 0


def parser() -> argparse.ArgumentParser:
    out = argparse.ArgumentParser(
        prog="splitcalc",
        description="Strength calculation of hydraulic log splitters.",
        epilog=CAUTIONS,
    )
    out.add_argument("--version", action="version", version=f"splitcalc {__version__}")
    commands = out.add_subparsers(dest="command", required=True, metavar="COMMAND")

    check = commands.add_parser(
        "check",
        help="all findings over all allowed logs",
        description="All findings over all allowed logs. Exit 0: all hold. 1: something doesn't "
        "hold or can't be given. 2: the file can't be used.",
    )
    check.add_argument("file", type=Path, help="machine file (TOML)")
    check.add_argument("--json", action="store_true", help="one JSON object, SI numbers")
    check.set_defaults(run=_check)

    open_ = commands.add_parser(
        "open",
        help="JupyterLab with the worksheets",
        description="JupyterLab with the worksheets. Without a folder: on a copy of the invented "
        "demo machine. Worksheets that are missing are copied; those of an older version are "
        "replaced unless they were edited. The folder icon at the left lists all files. What "
        "follows -- goes to the Jupyter server, such as --no-browser.",
    )
    open_.add_argument("folder", type=Path, nargs="?", help="folder with your machine.toml")
    open_.set_defaults(run=_open)

    new = commands.add_parser(
        "new",
        help="a folder with a new machine and the worksheets",
        description="A folder with a new machine: machine.toml and the worksheets. It starts as an "
        "invented demo, or as a copy of your own file, comments and all. A folder that has a "
        "machine.toml is refused.",
    )
    new.add_argument("folder", type=Path, help="folder to make or to fill")
    new.add_argument("--units", choices=("us", "si"), help="its units; us unless FILE says")
    new.add_argument("--from", dest="source", type=Path, metavar="FILE", help="file to start from")
    new.set_defaults(run=_new)
    return out


def main(argv: list[str] | None = None) -> int:
    words = sys.argv[1:] if argv is None else argv
    words, server = _split(words) if words[:1] == ["open"] else (words, [])
    args = parser().parse_args(words)
    args.server = server
    try:
        return int(args.run(args))
    except InputError as error:
        print(f"splitcalc: {error}", file=sys.stderr)
    except BrokenPipeError:  # the reader, such as `head`, has seen enough
        sys.stdout = open(os.devnull, "w")  # noqa: SIM115 - for the flush at exit
    except OSError as error:
        print(f"splitcalc: {error.filename or args.command}: {error.strerror}", file=sys.stderr)
    except _save_error() as error:
        print(f"splitcalc: {error}", file=sys.stderr)
    return 2


def _save_error() -> type[Exception]:
    """Imported only once something has gone wrong: `check` saves nothing."""
    from splitcalc.machine.save import SaveError

    return SaveError


def _split(words: list[str]) -> tuple[list[str], list[str]]:
    """What stands before `--`, and what follows it."""
    if "--" not in words:
        return words, []
    at = words.index("--")
    return words[:at], words[at + 1 :]


if __name__ == "__main__":
    raise SystemExit(main())
