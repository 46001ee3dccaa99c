"""A person's folder: a machine file and the worksheets; made, brought up to date, opened."""

from __future__ import annotations

import contextlib
import errno
import json
import os
import tempfile
from collections.abc import Iterator, Mapping
from pathlib import Path

from splitcalc.copies import bring
from splitcalc.machine.file import LARGEST_FILE, parse_machine
from splitcalc.machine.save import SaveError, save, write_whole

MACHINE = "machine.toml"
DEMOS = {"us": MACHINE, "si": "machine-si.toml"}  # by the units that they are written in
# JupyterLab's workspace, with the list of files folded away behind its icon: it takes a fifth of a
# small screen from the picture.
LAYOUT = {
    "data": {"layout-restorer:data": {"left": {"collapsed": True}}},
    "metadata": {"id": "default"},
}


def worksheets_dir() -> Path:
    """The shipped worksheets: inside an installed package, beside it in a source tree."""
    package = Path(__file__).parent
    inside = package / "worksheets"
    return inside if inside.is_dir() else package.parent / "worksheets"


def prepare(folder: Path | None) -> tuple[Path, list[str]]:
    """A folder with worksheets and a machine file, and sentences on what was done.

    Machine files and edited worksheets that are there stay as they are. Without a folder: a fresh
    copy of the demo, so that tracked files are never touched.

    Raises
    ------
    OSError, SaveError : when the folder can't be made or written
    """
    if folder is None:
        folder = Path(tempfile.mkdtemp(prefix="splitcalc-demo-"))
    demos = {name: (worksheets_dir() / name).read_bytes() for name in DEMOS.values()}
    return folder, _fill(folder, {} if os.path.lexists(folder / MACHINE) else demos)


def new_machine(folder: Path, units: str | None, source: Path | None) -> list[str]:
    """A new machine in a folder, and sentences on what was done. It is made whole or not at all.

    units : "us", "si", or None: those of the source, "us" without one
    source : the machine file to start from; None: an invented demo

    Raises
    ------
    InputError : when the source can't be used, with all problems
    OSError, SaveError : when there is a machine already, or the folder can't be made or written
    """
    if os.path.lexists(folder / MACHINE):
        raise FileExistsError(
            errno.EEXIST, f"there is a {MACHINE} in it; nothing was changed", str(folder)
        )
    if source is None:
        data = (worksheets_dir() / DEMOS[units or "us"]).read_bytes()
    else:
        data = _start(source, units)
    return _fill(folder, {MACHINE: data})


def _start(source: Path, units: str | None) -> bytes:
    """The bytes of a usable machine file, in other units when they are given."""
    with source.open("rb") as file:
        data = file.read(LARGEST_FILE + 1)
    machine = parse_machine(data)
    if units is None:
        return data
    with tempfile.TemporaryDirectory(prefix="splitcalc-new-") as place:
        copy = Path(place) / MACHINE
        copy.write_bytes(data)
        try:
            save(copy, machine, {"basis.units": units})
        except SaveError as error:  # the copy is gone when a person reads of it
            raise SaveError(str(error).replace(str(copy), str(source))) from error
        return copy.read_bytes()


def _fill(folder: Path, machines: Mapping[str, bytes]) -> list[str]:
    """Put the worksheets and the machine files that are missing into a folder, machines last."""
    worksheets = sorted(worksheets_dir().glob("*.ipynb"))
    names = [*(path.name for path in worksheets), *machines]
    missing = [name for name in names if not os.path.lexists(folder / name)]
    with _undone_on_failure(folder, missing):
        folder.mkdir(parents=True, exist_ok=True)
        said = [bring(path, folder / path.name) for path in worksheets]
        for name in machines:
            if name in missing:
                write_whole(folder / name, machines[name])
    made = [f"{folder}: made {', '.join(missing)}"] if missing else []
    return [*made, *filter(None, said)]


@contextlib.contextmanager
def _undone_on_failure(folder: Path, names: list[str]) -> Iterator[None]:
    """Takes away again the files and folders that are not there yet, when something goes wrong."""
    places = [*(folder / name for name in names), folder, *folder.parents]
    missing = [path for path in places if not os.path.lexists(path)]
    try:
        yield
    except BaseException:
        for path in missing:
            with contextlib.suppress(OSError):
                path.rmdir() if path.is_dir() else path.unlink()
        raise


def run_lab(folder: Path, extra: list[str]) -> int:
    """JupyterLab on the folder, token and loopback kept; `extra` goes to the server.

    It runs in this process, so that what ends this process ends the server as well.
    """
    from jupyterlab.labapp import LabApp  # type: ignore[import-untyped]
    from jupyterlab_server.workspaces_handler import WorkspacesManager

    # A place of its own: a person's layout of other work is neither used nor changed.
    with (
        contextlib.suppress(KeyboardInterrupt),  # before the server listens to it
        tempfile.TemporaryDirectory(prefix="splitcalc-layout-") as workspaces,
    ):
        WorkspacesManager(workspaces).save("default", json.dumps(LAYOUT))
        command = [
            f"--ServerApp.root_dir={folder}",
            "--ip=127.0.0.1",
            "--port=0",
            "--LabApp.default_url=/lab/tree/main-beam.ipynb",
            f"--LabApp.workspaces_dir={workspaces}",
        ]
        if hasattr(os, "geteuid") and os.geteuid() == 0:
            command.append("--allow-root")
        LabApp.launch_instance([*command, *extra])
    return 0
