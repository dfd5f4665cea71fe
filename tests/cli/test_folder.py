"""Everything of several cases into one folder, and two outputs with one path."""

import json
import re
from urllib.parse import unquote

import pytest

from orolift.cli.main import exit_code


@pytest.fixture
def two_cases(case_folder):
    """A second case, wetter and with another name, beside the first."""
    text = (case_folder / "case.toml").read_text()
    (case_folder / "second one.toml").write_text(text.replace("dew_point_c = 11.0", "dew_point_c = 5.0"))
    return ["case.toml", "second one.toml"]


def test_folder_holds_all_of_every_case_and_an_index(two_cases, case_folder, capsys):
    """Reports, results and tables; every link of the index leads to a file that is there."""
    assert exit_code(["cross", *two_cases, "--folder", "out"]) == 0
    out = case_folder / "out"
    names = {path.name for path in out.iterdir()}
    assert names == {"index.html"} | {
        f"{stem}.{kind}" for stem in ("case", "second one") for kind in ("html", "json", "csv")
    }
    links = {unquote(link) for link in re.findall(r'href="([^"#]+)"', (out / "index.html").read_text())}
    assert links == names - {"index.html"}
    assert json.loads((out / "case.json").read_text())["case"]["title"] == "Test ridge"
    assert not (case_folder / "case.html").exists()
    assert capsys.readouterr().out.splitlines()[-1] == "Index: out/index.html"


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (["--report", "a.txt", "--results", "a.txt"], "--results: a.txt is already what --report writes"),
        (["--results", "a.json", "--table", "./a.json"], "--table: ./a.json is already what --results writes"),
        (["--results", "case.toml"], "--results: case.toml is already a case"),
        (["--table", "case.html"], "--table: case.html is already what the report of case.toml writes"),
        (["--folder", "out", "--results", "a.json"], "leave --results out"),
        (["--folder", "case.toml"], "--folder: case.toml cannot be made"),
        (["--folder", "nowhere/out"], "--folder: nowhere/out cannot be made"),
    ],
)
def test_two_outputs_never_share_a_path(case_folder, capsys, arguments, said):
    before = sorted(case_folder.iterdir())
    assert exit_code(["cross", "case.toml", "--quiet", *arguments]) == 2
    assert said in capsys.readouterr().err
    assert sorted(case_folder.iterdir()) == before


@pytest.mark.parametrize("command", ["cross", "bearings"])
def test_a_file_that_a_case_names_is_not_written_over(case_folder, edited, capsys, command):
    """A table under the name of the ridge would end the ridge."""
    edited(
        ("ridge_km_m = [[0, 40], [25, 1850], [60, 210]]", 'ridge_file = "ridge.csv"'), ("members = 10", "members = 0")
    )
    before = {file: file.read_bytes() for file in case_folder.iterdir()}
    assert exit_code([command, "case.toml", "--quiet", "--table", "ridge.csv"]) == 2
    assert "ridge.csv has been read in this run and is not written over" in capsys.readouterr().err
    assert {file: file.read_bytes() for file in case_folder.iterdir()} == before


def test_a_case_called_index_is_refused_in_a_folder(case_folder, capsys):
    (case_folder / "index.toml").write_text((case_folder / "case.toml").read_text())
    assert exit_code(["cross", "index.toml", "--quiet", "--folder", "out"]) == 2
    assert "index.html is already what the report of index.toml writes" in capsys.readouterr().err
    assert not (case_folder / "out").exists()


def test_one_wrong_case_writes_nothing(two_cases, case_folder, capsys):
    (case_folder / "second one.toml").write_text("title = 3")
    assert exit_code(["cross", *two_cases, "--folder", "out"]) == 2
    assert "second one.toml" in capsys.readouterr().err
    assert not (case_folder / "out").exists()
