"""Keeps every kernel and server that a test starts away from the user's own Jupyter files."""

import os
import shutil
import tempfile

import pytest

_PRIVATE_FOLDERS = (
    "IPYTHONDIR",
    "JUPYTER_CONFIG_DIR",
    "JUPYTER_DATA_DIR",
    "JUPYTER_RUNTIME_DIR",
    "JUPYTERLAB_SETTINGS_DIR",
    "JUPYTERLAB_WORKSPACES_DIR",
    "MPLCONFIGDIR",
)
# These add folders to the private ones.
_SEARCH_PATHS = ("JUPYTER_CONFIG_PATH", "JUPYTER_PATH")

_folder = pytest.StashKey[str]()


def pytest_configure(config: pytest.Config) -> None:
    # Here and not in a fixture: nbval starts its kernels without asking for any.
    # Each xdist worker gets a folder of its own, for two servers can't share a workspace.
    folder = config.stash[_folder] = tempfile.mkdtemp(prefix="splitcalc-tests-")
    for name in _PRIVATE_FOLDERS:
        os.environ[name] = os.path.join(folder, name)
        os.mkdir(os.environ[name], mode=0o700)
    for name in _SEARCH_PATHS:
        os.environ.pop(name, None)


def pytest_unconfigure(config: pytest.Config) -> None:
    # A kernel that is still on its way out may write here.
    shutil.rmtree(config.stash[_folder], ignore_errors=True)
