"""Open the worksheets in JupyterLab, always on a person's own copy."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
import tempfile
from pathlib import Path

MACHINE = "machine.toml"


def worksheets_dir() -> Path:
    """The shipped worksheets: inside an installed package, beside it in a source tree."""
    package = Path(__file__).parent
    inside = package / "worksheets"
    return inside if inside.is_dir() else package.parent / "worksheets"


def prepare(folder: Path | None) -> Path:
    """A folder with worksheets and a machine file; nothing that is there is overwritten.

    Without a folder: a fresh copy of the demo, so that tracked files are never touched.

    Raises
    ------
    OSError : when the folder can't be made or written
    """
    source = worksheets_dir()
    if folder is None:
        folder = Path(tempfile.mkdtemp(prefix="splitcalc-demo-"))
    folder.mkdir(parents=True, exist_ok=True)
    fresh = not (folder / MACHINE).exists()
    names = [p.name for p in sorted(source.glob("*.ipynb"))]
    if fresh:
        names += [p.name for p in sorted(source.glob("*.toml"))]
    for name in names:
        if not (folder / name).exists():
            shutil.copyfile(source / name, folder / name)
    return folder


def run_lab(folder: Path, extra: list[str]) -> int:
    """JupyterLab on the folder, token and loopback kept; `extra` goes to the server."""
    command = [
        sys.executable,
        "-m",
        "jupyterlab",
        f"--ServerApp.root_dir={folder}",
        "--ip=127.0.0.1",
        "--port=0",
        "--LabApp.default_url=/lab/tree/main-beam.ipynb",
    ]
    if hasattr(os, "geteuid") and os.geteuid() == 0:
        command.append("--allow-root")
    try:
        return subprocess.call([*command, *extra])
    except KeyboardInterrupt:
        return 0
