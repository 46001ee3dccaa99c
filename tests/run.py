"""Runs every check of the project, goes on after a failure, and sums up at the end."""

import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parents[1]
BIN = Path(sys.executable).parent  # unresolved: the environment's own, not the base Python's


def checks() -> dict[str, list[str]]:
    """The command line of each check, by its name, in running order."""
    notebooks = [str(path.relative_to(ROOT)) for path in sorted(ROOT.glob("worksheets/*.ipynb"))]
    if not notebooks:
        sys.exit("No notebooks in worksheets/")
    return {
        "style": ["ruff", "check", "."],
        "types": ["mypy"],
        "rooms": ["lint-imports"],
        # nbval needs the ids and counts; a cell tagged keep_output keeps its output.
        "stripped notebooks": ["nbstripout", "--verify", "--keep-id", "--keep-count", *notebooks],
        # By file: the cells of a notebook share one kernel, the tests of a browser file one server.
        "tests and worksheets": [
            *["pytest", "-n", "2", "--dist", "loadfile"],
            *["--nbval-lax", "tests", *notebooks],
        ],
    }


def main() -> int:
    """Exit code 0 when all checks pass, else 1."""
    passed = {}
    for name, (program, *arguments) in checks().items():
        print(f"\n=== {name}: {program} {' '.join(arguments)}", flush=True)
        done = subprocess.run([BIN / program, *arguments], cwd=ROOT, check=False)
        passed[name] = done.returncode == 0
    print()
    for name, good in passed.items():
        print(f"{'ok    ' if good else 'FAILED'}  {name}")
    return 0 if all(passed.values()) else 1


if __name__ == "__main__":
    sys.exit(main())
