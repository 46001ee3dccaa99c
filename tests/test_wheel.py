"""The wheel carries the worksheets, the demo machines and the section tables, and no stray file."""

import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]


def tracked(*patterns: str) -> set[str]:
    """Paths below ROOT that git tracks or would track."""
    command = ["git", "ls-files", "-z", "--cached", "--others", "--exclude-standard", "--"]
    listing = subprocess.run(
        [*command, *patterns], cwd=ROOT, check=True, capture_output=True, text=True
    ).stdout
    return {path for path in listing.split("\0") if (ROOT / path).is_file()}


@pytest.mark.slow
def test_wheel_carries_the_package_and_the_worksheets(tmp_path: Path) -> None:
    subprocess.run(
        [sys.executable, "-m", "build", "--wheel", "--no-isolation", "--outdir", tmp_path],
        cwd=ROOT,
        check=True,
    )
    (wheel,) = tmp_path.glob("*.whl")
    names = set(zipfile.ZipFile(wheel).namelist())
    carried = {name for name in names if ".dist-info/" not in name}

    package = tracked("splitcalc/*")
    worksheets = tracked("worksheets/*.ipynb", "worksheets/*.toml")
    assert any(path.startswith("splitcalc/shapes/tables/") for path in package)
    assert worksheets
    assert carried == package | {f"splitcalc/{path}" for path in worksheets}
