ALLOWED = {"DEVELOPERS.md", "README.md", "pyproject.toml", "splitcalc", "tests", "worksheets"}


def test_top_level_holds_only_what_belongs_there(project_files: set[str]) -> None:
    names = {path.partition("/")[0] for path in project_files}
    assert {name for name in names if not name.startswith(".")} == ALLOWED
