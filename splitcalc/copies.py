"""A copied worksheet knows which version it came from and what its cells said.

The mark stands in the notebook's metadata. By it a later version may replace a copy that nobody
has edited, and leaves alone every other one.
"""

from __future__ import annotations

import hashlib
import json
import os
from pathlib import Path
from typing import Any

from splitcalc import __version__
from splitcalc.machine.save import SaveError, write_whole

MARK = "splitcalc"


def sources_digest(notebook: Any) -> str:
    """SHA-256 of types and sources of all cells: running a worksheet doesn't change it.

    notebook : the parsed file; a source may be one string or a list of lines

    Raises
    ------
    KeyError, TypeError : when it is no notebook
    """
    cells = [[cell["cell_type"], "".join(cell["source"])] for cell in notebook["cells"]]
    return hashlib.sha256(json.dumps(cells).encode()).hexdigest()


def bring(shipped: Path, copy: Path) -> str:
    """Copy a worksheet, or replace its copy by a newer one if nobody has edited it.

    Returns a sentence on what became of a copy that was there; empty when there is nothing to say.

    Raises
    ------
    OSError, SaveError : when a missing copy can't be made
    """
    notebook = json.loads(shipped.read_bytes())
    newest = sources_digest(notebook)
    notebook["metadata"][MARK] = {"version": __version__, "sources": newest}
    data = (json.dumps(notebook, indent=1, ensure_ascii=False) + "\n").encode()
    if not os.path.lexists(copy):
        write_whole(copy, data)
        return ""

    now, then, version = _read(copy)
    if newest in (now, then):
        return ""
    if now is None or now != then:
        why = "can't be read" if now is None else "was edited" if then else "has no mark of a copy"
        return (
            f"{copy.name} is left alone: it {why}. "
            f"Rename it and open the folder again to get the one of version {__version__}."
        )
    try:
        write_whole(copy, data)
    except SaveError as error:  # an old one can still be opened
        return f"{copy.name} is still the one of version {version}: {error}"
    return f"{copy.name} is replaced, as nobody had edited it: version {version} -> {__version__}."


def _read(path: Path) -> tuple[str | None, str | None, str]:
    """The digest of a copy's sources now and when it was copied, and the version it came from.

    None for now: it can't be read. None for then: it has no mark.
    """
    try:
        notebook = json.loads(path.read_bytes())
        now = sources_digest(notebook)
    except (OSError, ValueError, KeyError, TypeError, RecursionError):
        return None, None, ""
    try:
        mark = notebook["metadata"][MARK]
        return now, str(mark["sources"]), str(mark["version"])
    except (KeyError, TypeError):
        return now, None, ""
