"""Sign-flip proof: every plus and minus of the core is there because a test says so.

`python tests/flips.py` flips them one at a time in a copy of the package, runs the focused tests
on it, and prints each flip that no test notices. It takes half an hour; `test_flips.py` tries a
few. Left alone: indices, axes, and flips in `SAME` that can't change a result.
"""

import ast
import os
import re
import shutil
import subprocess
import sys
import tempfile
from collections.abc import Iterator
from pathlib import Path
from typing import NamedTuple

ROOT = Path(__file__).resolve().parents[1]
ROOMS = ("thrust", "stress", "shapes")
# In the order in which they notice most flips soonest.
FOCUSED = (
    "tests/published/test_torsion.py",
    "tests/published/test_statics.py",
    "tests/published/test_web.py",
    "tests/published/test_sections.py",
    "tests/test_shapes.py",
    "tests/test_physics.py",
)
BESIDE = ("pyproject.toml", "tests/conftest.py", "tests/published", "worksheets", *FOCUSED)
PYTEST = ("-m", "pytest", "-x", "-q", "-m", "not slow", "-p", "no:cacheprovider", *FOCUSED)
LONGEST = 300  # s: a flip that hangs the tests is noticed too

# Flips that change no result, as (file, line of code), with the reason.
SAME = {
    (
        "splitcalc/thrust/statics.py",
        "total = [a + b for a, b in zip(total, parts, strict=True)]",
    ): "a sum that must be zero, with the other sign",
}


class Flip(NamedTuple):
    """One sign of the source: where it stands (byte of the file, line from 1) and its line."""

    path: str
    byte: int
    line: int
    code: str

    def __str__(self) -> str:
        return f"{self.path}:{self.line}: {self.code}"

    def applied(self, source: bytes) -> bytes:
        other = {b"+": b"-", b"-": b"+"}[source[self.byte : self.byte + 1]]
        return source[: self.byte] + other + source[self.byte + 1 :]


def signs(node: ast.AST) -> Iterator[ast.AST]:
    """Nodes with a plus or minus below a node; not in decorators, indices and axes."""
    if isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.USub):
        yield node
    if isinstance(node, ast.BinOp | ast.AugAssign) and isinstance(node.op, ast.Add | ast.Sub):
        yield node
    for name, field in ast.iter_fields(node):
        if name in ("decorator_list", "slice"):
            continue
        for child in field if isinstance(field, list) else [field]:
            if isinstance(child, ast.AST) and not is_axis(node, child):
                yield from signs(child)


def is_axis(parent: ast.AST, child: ast.AST) -> bool:
    """`axis=-1`, or the plain number that a method such as `sum` takes."""
    if isinstance(child, ast.keyword):
        return child.arg == "axis"
    of_method = isinstance(parent, ast.Call) and isinstance(parent.func, ast.Attribute)
    return of_method and isinstance(child, ast.UnaryOp) and isinstance(child.operand, ast.Constant)


def flips_in(source: bytes, path: str = "") -> list[Flip]:
    """Every sign of a file that can be flipped."""
    lines = source.splitlines(keepends=True)
    starts = [sum(map(len, lines[:n])) for n in range(len(lines))]
    out = []
    for node in signs(ast.parse(source)):
        byte = starts[node.lineno - 1] + node.col_offset
        if not isinstance(node, ast.UnaryOp):
            before = node.left if isinstance(node, ast.BinOp) else node.target
            byte = starts[before.end_lineno - 1] + before.end_col_offset
            gap = re.match(rb"(?:[\s)]|\\\n|#[^\n]*\n)*", source[byte:])
            byte += gap.end()
        line = source[:byte].count(b"\n")
        out.append(Flip(path, byte, line + 1, lines[line].decode().strip()))
    return out


def all_flips() -> list[Flip]:
    """Every flip of the core that could change a result."""
    return [
        flip
        for room in ROOMS
        for file in sorted((ROOT / "splitcalc" / room).glob("*.py"))
        for flip in flips_in(file.read_bytes(), str(file.relative_to(ROOT)))
        if (flip.path, flip.code) not in SAME
    ]


def noticed(flip: Flip | None) -> str:
    """First line of the failure that a flip causes; empty when the focused tests pass.

    Raises
    ------
    RuntimeError : when the tests could not be run at all
    """
    with tempfile.TemporaryDirectory(prefix="flip-") as folder:
        copy = Path(folder)
        shutil.copytree(ROOT / "splitcalc", copy / "splitcalc")
        for name in BESIDE:
            (copy / name).parent.mkdir(parents=True, exist_ok=True)
            if (ROOT / name).is_dir():
                shutil.copytree(ROOT / name, copy / name)
            else:
                shutil.copy2(ROOT / name, copy / name)
        for extra in (ROOT / "tests").glob("*.toml"):
            shutil.copy2(extra, copy / "tests")
        if flip:
            file = copy / flip.path
            file.write_bytes(flip.applied(file.read_bytes()))
            # a flip changes neither size nor, within a second, time: the old code would still fit
            for stale in (file.parent / "__pycache__").glob(f"{file.stem}.*"):
                stale.unlink()
        return first_failure(copy)


def first_failure(folder: Path) -> str:
    """First line that pytest says of a failure in a copy of the project; empty if none."""
    # without plugins, which take longer to load than most flips to be noticed
    env = {"PYTHONPATH": str(folder), "PYTHONDONTWRITEBYTECODE": "1"}
    env |= {"PYTEST_DISABLE_PLUGIN_AUTOLOAD": "1"}
    try:
        done = subprocess.run(
            [sys.executable, *PYTEST],
            cwd=folder, env=os.environ | env, timeout=LONGEST,
            capture_output=True, text=True, check=False,
        )  # fmt: skip
    except subprocess.TimeoutExpired:
        return "the tests hang"
    if done.returncode == 0:
        return ""
    told = re.findall(r"^(?:FAILED|ERROR) .*", done.stdout, re.MULTILINE)
    if done.returncode not in (1, 2) or not told:
        raise RuntimeError(done.stdout + done.stderr)
    return told[0]


def main() -> int:
    """Exit code 0 when every flip is noticed, else 1."""
    if failure := noticed(None):
        sys.exit(f"the tests fail without a flip: {failure}")
    flips, survivors = all_flips(), 0
    for number, flip in enumerate(flips, 1):
        if not noticed(flip):
            survivors += 1
            print(f"SURVIVES {flip}", flush=True)
        elif number % 25 == 0:
            print(f"{number} of {len(flips)}", flush=True)
    print(f"{survivors} of {len(flips)} flips survive")
    return 1 if survivors else 0


if __name__ == "__main__":
    sys.exit(main())
