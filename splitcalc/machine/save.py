"""Saving a machine file: only what was changed, and either whole or not at all."""

from __future__ import annotations

import codecs
import contextlib
import errno
import hashlib
import os
import re
import secrets
import stat
from collections.abc import Iterator, Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any

from splitcalc.machine.file import LARGEST_FILE, Machine, holder, parse_machine

BINARY = getattr(os, "O_BINARY", 0)  # Windows would write other line ends without it


class SaveError(Exception):
    """One sentence for a person: why nothing was changed on disk."""


@contextlib.contextmanager
def told(path: Path) -> Iterator[None]:
    """An OSError in here becomes a `SaveError` about `path`."""
    try:
        yield
    except OSError as error:
        raise SaveError(f"{_reason(path, error)}; nothing was changed.") from error


def _reason(path: Path, error: OSError) -> str:
    if error.errno in (errno.ENOSPC, errno.EDQUOT):
        return f"There is no room left on the disk for {path}"
    if error.errno in (errno.EACCES, errno.EPERM, errno.EROFS):
        return f"{path} can't be written: the file or its folder is read-only or in use"
    if error.errno in (errno.ENOENT, errno.ENOTDIR):
        return f"{path} or its folder is no longer there"
    return f"{path} can't be written: {error.strerror or error}"


def save(path: Path, machine: Machine, changes: Mapping[str, str]) -> Machine:
    """Put other texts at some dotted keys of a machine's file; the rest stays byte for byte.

    Comments, order, white space, byte order mark and line ends are kept. A section given as a
    table becomes one line when `changes` names it; the comments inside go with its dimensions.

    path : the file that `machine` was read from
    changes : such as `{"cylinder.bore": "5 in"}`

    Returns the machine as the file has it now.

    Raises
    ------
    InputError : when the changed machine can't be used, with all problems; nothing is written
    KeyError : when a key leads through something that is not there
    SaveError : when the file has changed since it was read, can't be patched, or can't be written
    """
    wanted = machine.changed(changes)
    with told(path):
        data = _unchanged(path, machine.digest)
    try:
        patched = _patched(data, changes)
        saved = parse_machine(patched)
    except ValueError:  # no way to patch this spelling, or the result is no machine file
        saved = None
    # The tables say more than the document made from them: also what was typed and what wasn't.
    if saved is None or saved.tables != wanted.tables:
        keys = ", ".join(changes)
        raise SaveError(
            f"{path} can't be changed in place as it is written; nothing was changed: "
            f"change {keys} with a text editor."
        )
    write_whole(path, patched, over=machine.digest)
    return replace(saved, path=path)


def write_whole(path: Path, data: bytes, over: str | None = None) -> None:
    """Write a file so that at every moment either the old or the new one is there, whole.

    A symbolic link stays one: its target is written. An existing file keeps its permissions.

    over : SHA-256 that the file must still have just before it is replaced

    Raises
    ------
    SaveError : nothing was changed
    """
    with told(path):
        target = _target(path)
        mode = _permissions(target)
        temporary = os.path.join(os.path.dirname(target), f".splitcalc-{secrets.token_hex(8)}.tmp")
        flags = os.O_WRONLY | os.O_CREAT | os.O_EXCL | BINARY
        file = os.open(temporary, flags, 0o666 if mode is None else mode)
        try:
            try:
                _write(file, data)
                if mode is not None:
                    os.chmod(temporary, mode)  # what the umask took away
                os.fsync(file)
            finally:
                os.close(file)
            if over is not None:
                _unchanged(path, over)
            os.replace(temporary, target)
        except BaseException:
            with contextlib.suppress(OSError):
                os.unlink(temporary)
            raise
    _sync_folder(os.path.dirname(target))


def _target(path: Path) -> str:
    """Where the file itself is, past all links."""
    try:
        return os.path.realpath(path, strict=True)
    except FileNotFoundError:
        return os.path.realpath(path)  # a new file


def _permissions(target: str) -> int | None:
    """The old file's permissions; None when there is no old file.

    Raises
    ------
    PermissionError : when the file or its folder is read-only. Replacing a file needs no right
        to write it, and an administrator may do anything: so nobody else would say no.
    """
    folder = os.path.dirname(target)
    # On Windows a folder's read-only mark means something else.
    places = [target, folder] if os.name == "posix" else [target]
    modes = {}
    for place in places:
        try:
            modes[place] = stat.S_IMODE(os.stat(place).st_mode)
        except FileNotFoundError:
            continue
        if not modes[place] & 0o222 or not os.access(place, os.W_OK):
            raise PermissionError(errno.EACCES, os.strerror(errno.EACCES), place)
    return modes.get(target)


def _write(file: int, data: bytes) -> None:
    rest = memoryview(data)
    while rest:
        rest = rest[os.write(file, rest) :]


def _sync_folder(folder: str) -> None:
    """Ask the disk to keep the new name as well.

    A refusal is no error: the new file is in place by now, and some file systems can't sync a
    folder. All that could still be lost, by a power cut, is the change, not the file.
    """
    if os.name != "posix":
        return
    with contextlib.suppress(OSError):
        file = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(file)
        finally:
            os.close(file)


def _unchanged(path: Path, digest: str) -> bytes:
    """The file's bytes; SaveError unless they have this SHA-256."""
    file = os.open(path, os.O_RDONLY | BINARY)
    try:
        data = b""
        while len(data) <= LARGEST_FILE and (part := os.read(file, LARGEST_FILE + 1)):
            data += part
    finally:
        os.close(file)
    if hashlib.sha256(data).hexdigest() != digest:
        raise SaveError(
            f"{path} has changed on disk since it was read; nothing was written: "
            "read it again and then repeat the change."
        )
    return data


def _patched(data: bytes, changes: Mapping[str, str]) -> bytes:
    """The file's bytes with the changes in them; ValueError when that can't be done."""
    from tomlkit.exceptions import TOMLKitError

    text = data.decode("utf-8-sig")
    try:
        for key, value in changes.items():
            text = _with(text, key, value)
    except TOMLKitError as error:
        raise ValueError(str(error)) from error
    if b"\r\n" in data and data.count(b"\n") == data.count(b"\r\n"):
        text = re.sub(r"(?<!\r)\n", "\r\n", text)  # tomlkit ends every new line with \n
    mark = codecs.BOM_UTF8 if data.startswith(codecs.BOM_UTF8) else b""
    return mark + text.encode()


def _with(text: str, key: str, value: str) -> str:
    """The file's text with one value changed or added."""
    import tomlkit
    from tomlkit.items import Table

    first = key.partition(".")[0]
    document = tomlkit.parse(text)
    if first not in document:  # tomlkit would leave no empty line before it
        end = "" if text.endswith("\n") else "\n"
        document = tomlkit.parse(f"{text}{end}\n[{first}]\n")
    table, name = holder(document, key, tomlkit.table)
    old = table.get(name)
    if old == value:
        return text
    if isinstance(old, Table) and _take_out(document.body, old):
        return _with(document.as_string(), key, value)
    if old is None and isinstance(table, Table):
        _add(table, name, value)
    else:
        table[name] = value
    return document.as_string()


def _take_out(body: list[Any], table: Any) -> bool:
    """Take a table's lines out of the text, wherever it stands below `body`.

    The comments after its last value stay: they usually belong to what comes next.
    """
    import tomlkit
    from tomlkit.items import Table

    for place, (_, part) in enumerate(body):
        if part is table:
            inside = table.value.body
            tail = inside[1 + max((n for n, (key, _) in enumerate(inside) if key), default=-1) :]
            kept = "".join(part.as_string() for _, part in tail)
            body[place] = (None, tomlkit.ws(kept.lstrip("\r\n")))
            return True
        if isinstance(part, Table) and _take_out(part.value.body, table):
            return True
    return False


def _add(table: Any, name: str, value: str) -> None:
    """Add a value right after the table's last one.

    tomlkit would put it after the comments that follow, which belong to the next table.
    """
    from tomlkit.items import AoT, Table

    body = table.value.body
    values = [
        place
        for place, (key, part) in enumerate(body)
        if key and (key.is_dotted() or not isinstance(part, AoT | Table))
    ]
    after = 1 + max(values, default=-1)
    rest = body[after:]
    del body[after:]
    table.append(name, value)
    body.extend(rest)
