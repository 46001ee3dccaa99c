import subprocess
import sys
import zipfile
from pathlib import Path

import pytest


@pytest.mark.slow
def test_wheel_carries_package_worksheets_and_tables_and_nothing_ignored(
    root: Path, project_files: set[str], tmp_path: Path
) -> None:
    options = ["--wheel", "--no-isolation", "--outdir", tmp_path]
    subprocess.run([sys.executable, "-m", "build", *options], cwd=root, check=True)
    (wheel,) = tmp_path.glob("*.whl")
    carried = {name for name in zipfile.ZipFile(wheel).namelist() if ".dist-info/" not in name}

    package = {path for path in project_files if path.startswith("splitcalc/")}
    worksheets = {
        f"splitcalc/{path}"
        for path in project_files
        if path.startswith("worksheets/") and path.endswith((".ipynb", ".toml"))
    }
    assert carried == package | worksheets
    assert any(Path(path).match("splitcalc/shapes/tables/*.csv") for path in carried)
    assert {"main-beam.ipynb", "machine.toml"} <= {Path(path).name for path in worksheets}
