"""What all tests share: private Jupyter folders, and the list of the project's own files."""

import os
import shutil
import subprocess
import tempfile
from pathlib import Path

import pytest

PRIVATE_FOLDERS = (
    "IPYTHONDIR",
    "JUPYTER_CONFIG_DIR",
    "JUPYTER_DATA_DIR",
    "JUPYTER_RUNTIME_DIR",
    "JUPYTERLAB_SETTINGS_DIR",
    "JUPYTERLAB_WORKSPACES_DIR",
    "MPLCONFIGDIR",
)
# These would add the user's folders to the private ones.
SEARCH_PATHS = ("JUPYTER_CONFIG_PATH", "JUPYTER_PATH")

private_root = pytest.StashKey[str]()


def pytest_configure(config: pytest.Config) -> None:
    # Not in a fixture: nbval starts its kernels without asking for one.
    # Each xdist worker gets folders of its own: two servers can't share a workspace.
    root = config.stash[private_root] = tempfile.mkdtemp(prefix="splitcalc-tests-")
    for name in PRIVATE_FOLDERS:
        os.environ[name] = os.path.join(root, name)
        os.mkdir(os.environ[name], mode=0o700)
    for name in SEARCH_PATHS:
        os.environ.pop(name, None)


def pytest_unconfigure(config: pytest.Config) -> None:
    # A kernel that is still on its way out may write here.
    shutil.rmtree(config.stash[private_root], ignore_errors=True)


@pytest.fixture(scope="session")
def root() -> Path:
    """The project's top folder."""
    return Path(__file__).resolve().parents[1]


@pytest.fixture(scope="session")
def project_files(root: Path) -> set[str]:
    """Every file of the project that git doesn't ignore, as a path below `root`."""
    command = ["git", "ls-files", "-z", "--cached", "--others", "--exclude-standard"]
    done = subprocess.run(command, cwd=root, check=True, stdout=subprocess.PIPE, text=True)
    return {path for path in done.stdout.split("\0") if (root / path).is_file()}
