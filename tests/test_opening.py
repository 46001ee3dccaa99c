"""A person's folder: what is made, what is replaced, what is never touched."""

import errno
import json
import os
import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from splitcalc import __version__, cli, copies, opening
from splitcalc.copies import bring, sources_digest
from splitcalc.inputs import InputError
from splitcalc.machine.file import load
from splitcalc.machine.save import SaveError

SHIPPED = opening.worksheets_dir()
SHEETS = {path.name for path in SHIPPED.glob("*.ipynb")}
FILES = {"us": SHIPPED / "machine.toml", "si": SHIPPED / "machine-si.toml"}
UNITS_LINE = {"us": b'units = "us"', "si": b'units = "si"'}


def notebook(*sources: str) -> dict[str, Any]:
    cells = [
        {"cell_type": "code", "id": f"c{n}", "metadata": {}, "source": source.splitlines(True)}
        | {"execution_count": None, "outputs": []}
        for n, source in enumerate(sources)
    ]
    return {"cells": cells, "metadata": {}, "nbformat": 4, "nbformat_minor": 5}


def write(path: Path, content: dict[str, Any]) -> Path:
    path.write_text(json.dumps(content), encoding="utf-8")
    return path


def read(path: Path) -> dict[str, Any]:
    return json.loads(path.read_bytes())


def contents(folder: Path) -> dict[str, bytes]:
    """Every file below a folder, hidden ones too."""
    return {
        str(path.relative_to(folder)): path.read_bytes()
        for path in folder.rglob("*")
        if path.is_file()
    }


def run(content: dict[str, Any]) -> None:
    """What a run and a save in another program change."""
    for count, cell in enumerate(content["cells"], 1):
        cell["source"] = "".join(cell["source"])
        cell |= {"id": f"new{count}", "execution_count": count}
        cell["outputs"] = [{"output_type": "stream", "name": "stdout", "text": "1\n"}]


def test_a_run_does_not_change_the_digest() -> None:
    content = notebook("a = 1\nb = 2", "a")
    before = sources_digest(content)
    run(content)
    assert sources_digest(content) == before


@pytest.mark.parametrize(
    "other",
    [
        notebook("a = 1\nb = 3", "a"),
        notebook("a = 1\nb = 2"),
        notebook("a", "a = 1\nb = 2"),
        notebook("a = 1\nb = 2a"),
        notebook("a = 1\n", "b = 2", "a"),
    ],
)
def test_an_edit_changes_the_digest(other: dict[str, Any]) -> None:
    assert sources_digest(other) != sources_digest(notebook("a = 1\nb = 2", "a"))


def test_another_type_of_a_cell_changes_the_digest() -> None:
    content = notebook("a")
    before = sources_digest(content)
    content["cells"][0]["cell_type"] = "markdown"
    assert sources_digest(content) != before


def test_a_copy_is_the_shipped_worksheet_with_its_mark(tmp_path: Path) -> None:
    for name in SHEETS:
        shipped = read(SHIPPED / name)
        assert copies.MARK not in shipped["metadata"]
        assert bring(SHIPPED / name, tmp_path / name) == ""
        copy = read(tmp_path / name)
        mark = copy["metadata"].pop(copies.MARK)
        assert mark == {"version": __version__, "sources": sources_digest(shipped)}
        assert copy == shipped


@pytest.fixture
def shipped(tmp_path: Path) -> Path:
    (tmp_path / "shipped").mkdir()
    return write(tmp_path / "shipped" / "sheet.ipynb", notebook("a = 1", "a"))


@pytest.fixture
def copy(tmp_path: Path, shipped: Path) -> Path:
    """A copy that was made by this version."""
    (tmp_path / "mine").mkdir()
    copy = tmp_path / "mine" / "sheet.ipynb"
    bring(shipped, copy)
    return copy


@pytest.fixture
def release(monkeypatch: pytest.MonkeyPatch, shipped: Path) -> Callable[[], None]:
    """Makes this a later version of the program with another worksheet."""

    def newer() -> None:
        write(shipped, notebook("a = 2", "a"))
        monkeypatch.setattr(copies, "__version__", "9.1")

    return newer


def test_a_copy_that_was_only_run_is_replaced_by_a_newer_one(
    shipped: Path, copy: Path, release: Callable[[], None]
) -> None:
    content = read(copy)
    run(content)
    write(copy, content)
    assert bring(shipped, copy) == ""
    assert read(copy) == content
    release()
    said = bring(shipped, copy)
    assert "replaced" in said
    assert f"{__version__} -> 9.1" in said
    now = read(copy)
    assert now["cells"] == read(shipped)["cells"]
    assert now["metadata"][copies.MARK]["version"] == "9.1"
    assert bring(shipped, copy) == ""


def edit(content: dict[str, Any]) -> bytes:
    content["cells"][1]["source"] = ["a  # mine"]
    return json.dumps(content).encode()


def unmarked(content: dict[str, Any]) -> bytes:
    del content["metadata"][copies.MARK]
    return json.dumps(content).encode()


def odd_mark(content: dict[str, Any]) -> bytes:
    content["metadata"][copies.MARK] = ["0.1.0"]
    return json.dumps(content).encode()


@pytest.mark.parametrize(
    ("mine", "telling"),
    [
        (edit, "was edited"),
        (unmarked, "has no mark"),
        (odd_mark, "has no mark"),
        (lambda _: b'{"cells": [', "can't be read"),
        (lambda _: b"\xff\xfe\xfd", "can't be read"),
        (lambda _: b"[1, 2]", "can't be read"),
        (lambda _: b'{"cells": [{"source": "a"}]}', "can't be read"),
        (lambda _: b"[" * 100_000, "can't be read"),
    ],
)
def test_any_other_copy_is_left_alone_and_that_is_said(
    shipped: Path,
    copy: Path,
    release: Callable[[], None],
    mine: Callable[[dict[str, Any]], bytes],
    telling: str,
) -> None:
    copy.write_bytes(mine(read(copy)))
    before = copy.read_bytes()
    release()
    said = bring(shipped, copy)
    assert "left alone" in said
    assert telling in said
    assert "9.1" in said
    assert copy.read_bytes() == before


def test_an_edited_copy_is_no_news_while_there_is_no_newer_one(shipped: Path, copy: Path) -> None:
    copy.write_bytes(edit(read(copy)))
    before = copy.read_bytes()
    assert bring(shipped, copy) == ""
    assert copy.read_bytes() == before


def fail_at(monkeypatch: pytest.MonkeyPatch, number: int) -> list[int]:
    """Makes one of the calls that put a file in place fail, as on a full disk; counts them."""
    calls: list[int] = []
    replace = os.replace

    def failing(*paths: Any) -> None:
        calls.append(len(calls))
        if calls[-1] == number:
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
        replace(*paths)

    monkeypatch.setattr(os, "replace", failing)
    return calls


def test_a_copy_that_cannot_be_replaced_still_opens(
    monkeypatch: pytest.MonkeyPatch, shipped: Path, copy: Path, release: Callable[[], None]
) -> None:
    before = contents(copy.parent)
    release()
    fail_at(monkeypatch, 0)
    said = bring(shipped, copy)
    assert f"version {__version__}" in said
    assert "no room" in said
    assert contents(copy.parent) == before


def command(capsys: pytest.CaptureFixture, *words: str | Path) -> tuple[int, str, str]:
    code = cli.main([str(word) for word in words])
    return code, *capsys.readouterr()


@pytest.mark.parametrize(
    ("options", "units"), [((), "us"), (("--units", "us"), "us"), (("--units", "si"), "si")]
)
def test_new_starts_as_a_demo(
    capsys: pytest.CaptureFixture, tmp_path: Path, options: tuple[str, ...], units: str
) -> None:
    folder = tmp_path / "yard" / "my splitter"
    code, out, err = command(capsys, "new", folder, *options)
    assert (code, err) == (0, "")
    assert set(contents(folder)) == {"machine.toml", *SHEETS}
    assert (folder / "machine.toml").read_bytes() == FILES[units].read_bytes()
    for words in (*SHEETS, f"splitcalc open '{folder}'", f"check '{folder / 'machine.toml'}'"):
        assert words in out
    assert command(capsys, "check", folder / "machine.toml")[0] in (0, 1)


def mine(tmp_path: Path, units: str = "us") -> Path:
    """A machine file as an editor on Windows leaves it, with a comment at its end."""
    data = FILES[units].read_bytes().replace(b"\n", b"\r\n")
    path = tmp_path / "mine.toml"
    path.write_bytes(b"\xef\xbb\xbf" + data + b"# the last word")
    return path


def test_new_from_a_file_is_that_file_byte_for_byte(tmp_path: Path) -> None:
    source = mine(tmp_path)
    opening.new_machine(tmp_path / "new", None, source)
    assert (tmp_path / "new" / "machine.toml").read_bytes() == source.read_bytes()


@pytest.mark.parametrize(("old", "new"), [("us", "si"), ("si", "us"), ("us", "us")])
def test_new_from_a_file_in_other_units_changes_that_one_value(
    tmp_path: Path, old: str, new: str
) -> None:
    source = mine(tmp_path, old)
    before = source.read_bytes()
    opening.new_machine(tmp_path / "new", new, source)
    made = tmp_path / "new" / "machine.toml"
    assert made.read_bytes() == before.replace(UNITS_LINE[old], UNITS_LINE[new])
    assert load(made).units == new
    assert source.read_bytes() == before


def test_units_that_cannot_be_changed_are_told_of_the_file_itself(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    source = mine(tmp_path)
    fail_at(monkeypatch, 0)
    with pytest.raises(SaveError) as caught:
        opening.new_machine(tmp_path / "new", "si", source)
    assert str(source) in str(caught.value)
    assert tempfile.gettempdir() not in str(caught.value).replace(str(source), "")
    assert not (tmp_path / "new").exists()


def test_a_folder_with_a_machine_is_refused(capsys: pytest.CaptureFixture, tmp_path: Path) -> None:
    (tmp_path / "machine.toml").write_text("# mine")
    before = contents(tmp_path)
    code, out, err = command(capsys, "new", tmp_path)
    assert (code, out) == (2, "")
    assert err == f"splitcalc: {tmp_path}: there is a machine.toml in it; nothing was changed\n"
    assert contents(tmp_path) == before


def test_an_unusable_file_is_refused_with_all_its_problems(
    capsys: pytest.CaptureFixture, tmp_path: Path
) -> None:
    source = tmp_path / "mine.toml"
    text = FILES["us"].read_text(encoding="utf-8")
    text = text.replace('"4 1/2 in"', '"20 ton"').replace('"2850 psi"', '"2850"')
    source.write_text(text, encoding="utf-8")
    with pytest.raises(InputError) as caught:
        load(source)
    assert len(caught.value.problems) == 2
    code, out, err = command(capsys, "new", tmp_path / "new", "--from", source)
    assert (code, out, err) == (2, "", f"splitcalc: {caught.value}\n")
    assert not (tmp_path / "new").exists()


def test_a_file_that_is_not_there_is_told(capsys: pytest.CaptureFixture, tmp_path: Path) -> None:
    source = tmp_path / "none.toml"
    code, _, err = command(capsys, "new", tmp_path / "new", "--from", source)
    assert (code, err) == (2, f"splitcalc: {source}: No such file or directory\n")
    assert not (tmp_path / "new").exists()


@pytest.mark.parametrize("number", range(len(SHEETS) + 1))
def test_a_failure_half_way_leaves_things_as_they_were(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture, tmp_path: Path, number: int
) -> None:
    kept = tmp_path / "kept"
    kept.mkdir()
    (kept / "drawing.txt").write_text("mine")
    for folder in (tmp_path / "a" / "b", kept):
        before = contents(tmp_path)
        with monkeypatch.context() as patch:
            fail_at(patch, number)
            code, out, err = command(capsys, "new", folder)
        assert (code, out) == (2, "")
        assert "no room" in err
        assert contents(tmp_path) == before
    assert list(tmp_path.iterdir()) == [kept]


def test_the_machine_is_the_last_file_to_be_made(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    calls = fail_at(monkeypatch, len(SHEETS))  # so that a crash leaves no machine without sheets
    with pytest.raises(SaveError, match=r"machine\.toml"):
        opening.new_machine(tmp_path / "new", None, None)
    assert len(calls) == len(SHEETS) + 1


def test_open_says_what_it_replaced_and_touches_no_machine(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture, tmp_path: Path
) -> None:
    folder = tmp_path / "mine"
    command(capsys, "new", folder)
    (folder / "machine.toml").write_text("# mine")
    old = read(folder / "main-beam.ipynb")
    old["cells"][0]["source"] = "# An older page"
    old["metadata"][copies.MARK] = {"version": "0.0.9", "sources": sources_digest(old)}
    write(folder / "main-beam.ipynb", old)
    monkeypatch.setattr(opening, "run_lab", lambda *_: 0)
    code, out, _ = command(capsys, "open", folder)
    assert code == 0
    assert "main-beam.ipynb is replaced" in out
    assert f"0.0.9 -> {__version__}" in out
    assert (folder / "machine.toml").read_text() == "# mine"
    assert set(contents(folder)) == {"machine.toml", *SHEETS}
    assert "main-beam" not in command(capsys, "open", folder)[1]


def test_the_server_starts_with_the_layout_and_what_was_added(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    from jupyterlab.labapp import LabApp
    from jupyterlab_server.workspaces_handler import WorkspacesManager

    seen: list[str] = []

    def launch(words: list[str]) -> None:
        seen.extend(words)
        (place,) = (word.partition("=")[2] for word in words if "workspaces_dir" in word)
        assert WorkspacesManager(place).load("default")["data"] == opening.LAYOUT["data"]

    monkeypatch.setattr(LabApp, "launch_instance", launch)
    monkeypatch.setattr(tempfile, "tempdir", str(tmp_path))
    assert opening.run_lab(tmp_path, ["--no-browser"]) == 0
    assert seen[0] == f"--ServerApp.root_dir={tmp_path}"
    assert seen[-1] == "--no-browser"
    assert list(tmp_path.iterdir()) == []  # the layout is gone again
