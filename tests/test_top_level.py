import subprocess
from pathlib import Path

ROOT = Path(__file__).resolve().parents[1]
ALLOWED = {"DEVELOPERS.md", "README.md", "pyproject.toml", "splitcalc", "tests", "worksheets"}


def test_top_level_holds_only_what_belongs_there() -> None:
    listing = subprocess.run(
        ["git", "ls-files", "-z", "--cached", "--others", "--exclude-standard"],
        cwd=ROOT,
        check=True,
        capture_output=True,
        text=True,
    ).stdout
    names = {path.partition("/")[0] for path in listing.split("\0") if path}
    assert {name for name in names if not name.startswith(".")} == ALLOWED
