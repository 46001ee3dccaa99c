"""The commands, as a person or a script meets them."""

import json
import subprocess
import sys
import tempfile
from pathlib import Path

import pytest

from splitcalc import __version__, cli, opening
from splitcalc.cautions import CAUTIONS, NOT_COVERED
from splitcalc.checks import ALL, NOT_YET

ROOT = Path(__file__).resolve().parents[1]
US, SI = (ROOT / "worksheets" / name for name in ("machine.toml", "machine-si.toml"))
ENTRY = {
    *("id", "title", "set", "demand", "capacity", "unit", "required_factor", "utilisation"),
    *("margin", "applies", "why", "given", "x_m", "log", "source"),
}
LOG = {
    *("state", "distance_m", "a_y_m", "a_z_m", "b_y_m", "b_z_m", "force_N", "bound"),
}


def run(capsys: pytest.CaptureFixture, *words: str | Path) -> tuple[int, str, str]:
    code = cli.main([str(word) for word in words])
    out, err = capsys.readouterr()
    return code, out, err


@pytest.mark.parametrize(("path", "code"), [(US, 1), (SI, 0)])
def test_check_says_in_a_sentence_and_a_table_what_holds(capsys, path, code):
    got, out, err = run(capsys, "check", path)
    assert (got, err) == (code, "")
    assert max(map(len, out.splitlines())) <= 100
    assert out.startswith(
        "Harrow Fold yard splitter" if code else "Tannmoor firewood line"
    )
    flat = " ".join(out.split())
    for words in (*NOT_YET, *NOT_COVERED, CAUTIONS):
        assert words in flat


def test_the_us_demo_falls_short_in_one_place_and_the_si_demo_holds(capsys):
    _, out, _ = run(capsys, "check", US, "--json")
    short = [f for f in json.loads(out)["findings"] if (f["utilisation"] or 0) > 1]
    assert [(f["id"], f["set"]) for f in short] == [("web-cross-bending", "extreme")]
    _, out, _ = run(capsys, "check", SI, "--json")
    assert json.loads(out)["passed"] is True


def test_a_careful_designer_can_mend_the_us_demo(capsys, tmp_path):
    text = US.read_text(encoding="utf-8")
    smaller = text.replace('width = "6 in"\nheight = "6 in"', 'width = "5 in"\nheight = "5 in"')
    assert smaller != text
    path = tmp_path / "mended.toml"
    path.write_text(smaller, encoding="utf-8")
    assert run(capsys, "check", path)[0] == 0


@pytest.mark.parametrize("path", [US, SI])
def test_json_has_the_promised_shape(capsys, path):
    code, out, _ = run(capsys, "check", path, "--json")
    report = json.loads(out)
    assert {"machine", "passed", "governing", "assumptions", "not_covered", "findings"} <= set(
        report
    )
    assert report["passed"] is (code == 0)
    assert report["not_covered"] == list(NOT_COVERED)
    assert {f["id"] for f in report["findings"]} == {check.id for check in ALL}
    for finding in report["findings"]:
        assert set(finding) >= ENTRY
        assert finding["set"] in ("usual", "extreme", "population")
        if not finding["applies"]:
            assert finding["why"]
            continue
        assert set(finding["log"]) == LOG
        used = finding["required_factor"] * finding["demand"] / finding["capacity"]
        assert finding["utilisation"] == pytest.approx(used, rel=1e-12)
        assert finding["margin"] == pytest.approx(1 / used - 1, rel=1e-9)
    worst = max(report["findings"], key=lambda f: f["utilisation"] or 0)
    assert report["governing"] == {"id": worst["id"], "set": worst["set"]}


@pytest.mark.parametrize(
    ("text", "telling"),
    [
        (None, "No such file"),
        ("[job\n", "not TOML"),
        (US.read_text(encoding="utf-8").replace('"4 1/2 in"', '"20 ton"'), "cylinder.bore"),
    ],
)
def test_a_file_that_cannot_be_used_is_exit_2_with_its_message_on_stderr(
    capsys, tmp_path, text, telling
):
    path = tmp_path / "machine.toml"
    if text is not None:
        path.write_text(text, encoding="utf-8")
    code, out, err = run(capsys, "check", path)
    assert (code, out) == (2, "")
    assert telling in err
    assert "Traceback" not in err


def test_a_folder_for_a_file_is_told(capsys, tmp_path):
    code, _, err = run(capsys, "check", tmp_path)
    assert code == 2
    assert "directory" in err


def test_version_needs_no_machine():
    done = subprocess.run(
        [sys.executable, "-m", "splitcalc.cli", "--version"], capture_output=True, text=True
    )
    assert done.stdout == f"splitcalc {__version__}\n"


@pytest.mark.parametrize("words", [(), ("check",), ("open",), ("new",)])
def test_help_fits_a_screen(capsys, words):
    with pytest.raises(SystemExit) as end:
        cli.main([*words, "--help"])
    assert end.value.code == 0
    assert len(capsys.readouterr().out.splitlines()) < 24


def test_import_stays_light():
    code = (
        "import sys, splitcalc.checks, splitcalc.machine.file, splitcalc.logs.report;"
        "heavy = {'matplotlib', 'ipywidgets', 'scipy', 'pint'} & set(sys.modules);"
        "sys.exit(' '.join(heavy) or 0)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True)
    assert done.returncode == 0, done.stderr


def test_open_works_on_copies_and_overwrites_nothing(tmp_path):
    folder, _ = opening.prepare(tmp_path / "new")
    names = {path.name for path in folder.iterdir()}
    assert names == {path.name for path in opening.worksheets_dir().glob("*.*")}
    mine = folder / "machine.toml"
    mine.write_text("# mine")
    (folder / "main-beam.ipynb").unlink()
    opening.prepare(folder)
    assert mine.read_text() == "# mine"
    assert (folder / "main-beam.ipynb").exists()


def test_a_folder_with_a_machine_gets_no_demo_machines(tmp_path):
    (tmp_path / "machine.toml").write_text("# mine")
    opening.prepare(tmp_path)
    assert not (tmp_path / "machine-si.toml").exists()


def test_open_without_a_folder_is_a_fresh_copy(monkeypatch, tmp_path):
    monkeypatch.setattr(tempfile, "tempdir", str(tmp_path))
    folder, _ = opening.prepare(None)
    assert folder.parent == tmp_path
    assert folder != opening.worksheets_dir()
    assert (folder / "machine.toml").read_bytes() == US.read_bytes()


def test_what_follows_two_dashes_goes_to_the_server(monkeypatch, tmp_path, capsys):
    seen = {}
    monkeypatch.setattr(opening, "run_lab", lambda folder, extra: seen.update(e=extra) or 0)
    assert cli.main(["open", str(tmp_path / "x"), "--", "--no-browser", "--port=1"]) == 0
    assert seen["e"] == ["--no-browser", "--port=1"]


def test_open_on_something_that_is_no_folder_is_told(capsys, tmp_path):
    (tmp_path / "file").write_text("")
    code, _, err = run(capsys, "open", tmp_path / "file")
    assert code == 2
    assert "file" in err


def test_readme_says_what_the_code_says():
    readme = " ".join((ROOT / "README.md").read_text(encoding="utf-8").split()).lower()
    for words in (*NOT_YET, *NOT_COVERED):
        assert words.lower() in readme
    for sentence in CAUTIONS.split(": ")[1:]:
        assert sentence.lower()[:60] in readme
    for check in ALL:
        assert check.title in readme
