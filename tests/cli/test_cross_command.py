"""`orolift cross` as its user runs it: what it writes, what it says, and what it refuses."""

import csv
import json

import pytest

from orolift.cli.main import exit_code

STATION = (
    "station = { elevation_m = 40, temperature_c = 14.5, dew_point_c = 11.0, pressure_hpa = 1004.0, wind_kt = 25 }"
)
RIDGE = "ridge_km_m = [[0, 40], [25, 1850], [60, 210]]"


def test_the_main_job(case_folder, capsys):
    """A report, results and a table appear; the summary is at most ten lines."""
    assert exit_code(["cross", "case.toml", "--results", "r.json", "--table", "t.csv"]) == 0
    said = capsys.readouterr()
    assert len(said.out.splitlines()) <= 10
    assert said.err == ""
    assert "Lower Tarn" in (case_folder / "case.html").read_text()
    results = json.loads((case_folder / "r.json").read_text())
    with (case_folder / "t.csv").open() as stream:
        row = next(csv.DictReader(stream))
    assert float(row["temperature_c"]) == results["lee"][0]["temperature_c"]
    assert results["lee"][0]["side"] == "lee"
    assert results["rain"]["rain_out_share"] == pytest.approx(0.7)


def test_sounding_and_ridge_files(edited, case_folder):
    """Terrain and air from files beside the case."""
    case = edited((RIDGE, 'ridge_file = "ridge.csv"'), (STATION, 'sounding_file = "sounding.csv"'))
    assert exit_code(["cross", case, "--quiet", "--report", "out.html"]) == 0
    assert (case_folder / "out.html").exists()


def test_us_units_touch_page_and_terminal_only(case_folder, capsys):
    """Fahrenheit on page and terminal; the JSON stays as documented."""
    exit_code(["cross", "case.toml", "--units", "us", "--results", "us.json"])
    assert "°F" in capsys.readouterr().out
    assert "°F" in (case_folder / "case.html").read_text()
    exit_code(["cross", "case.toml", "--results", "metric.json"])
    assert (case_folder / "us.json").read_text() == (case_folder / "metric.json").read_text()


def test_two_runs_are_equal_to_the_byte(case_folder, monkeypatch):
    """With the time stamp held, nothing else changes between runs."""
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "1790000000")
    for name in ("a.html", "b.html"):
        assert exit_code(["cross", "case.toml", "--quiet", "--report", name]) == 0
    assert (case_folder / "a.html").read_bytes() == (case_folder / "b.html").read_bytes()


WRONG = [
    ([(RIDGE, 'ridge_file = "nowhere.csv"')], r"ridge_file: .*nowhere.csv cannot be found"),
    (
        [(RIDGE, 'elevation_file = "case.toml"'), ("distance_km = 50", "longitude = 5\nlatitude = 5")],
        "is not a raster that GDAL can read",
    ),
    (
        [(RIDGE, 'elevation_file = "http://a.example/x.tif"'), ("distance_km = 50", "longitude = 5\nlatitude = 5")],
        "local files only",
    ),
    (
        [(RIDGE, 'elevation_file = "/vsicurl/x.tif"'), ("distance_km = 50", "longitude = 5\nlatitude = 5")],
        "local files only",
    ),
    ([("[25, 1850], [60, 210]", "[60, 1850], [25, 210]")], "do not increase"),
    ([("[[0, 40], [25, 1850], [60, 210]]", "[[0, 40], [25, 1850]]")], "at least 3 points"),
    ([("[25, 1850], [60, 210]", "[25, 65], [60, 41]")], "the ridge is flat"),
    ([("1850", "nan")], "nan is not a number"),
    ([("1850", "60700")], "elevation"),
    ([("dew_point_c = 11.0", "dew_point_c = 16.0")], "dew"),
    ([("dew_point_c = 11.0", "relative_humidity_percent = 120")], "120 is outside"),
    ([("pressure_hpa = 1004.0", "pressure_hpa = 900.0")], "contradict each other.*qnh_hpa"),
    ([("wind_kt = 25", "wind_kt = 0")], "does not cross"),
    ([("wind_kt = 25", "wind_kt = 25, wind_from_deg = 55")], "does not cross"),
    ([("[terrain]", "[terrain]\ndrawn_from_deg = 325")], "does not cross"),
    ([("wind_kt = 25", "wind_kt = -5")], "-5 is outside 0 to 250"),
    (
        [("distance_km = 50", "distance_km = 90")],
        r"'Lower Tarn': distance_km 90 lies beyond the ends of the ridge, 0 to 60",
    ),
    ([("removed_share = 0.7", "removed_share = 70")], "70 is outside 0 to 1"),
    ([("12:00:00Z", "12:00:00")], "no time zone"),
    ([("title", "titel")], "Did you mean title"),
    ([("[25, 1850]", "[25, 18 50]")], "line 4, column"),
]


@pytest.mark.parametrize(("changes", "message"), WRONG, ids=[message[:30] for _, message in WRONG])
def test_bad_input_is_one_message_and_no_file(changes, message, edited, case_folder, capsys):
    """Exit 2, one line on stderr that names the case, no traceback, nothing written."""
    import re

    before = sorted(case_folder.iterdir())
    assert exit_code(["cross", edited(*changes), "--results", "r.json", "--table", "t.csv"]) == 2
    said = capsys.readouterr()
    assert said.out == ""
    assert len(said.err.splitlines()) == 1
    assert said.err.startswith("orolift: case.toml")
    assert re.search(message, said.err), said.err
    assert sorted(case_folder.iterdir()) == before


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (["cross", "missing.toml"], "missing.toml cannot be found"),
        (["cross", "."], "is a folder"),
        (["cross"], "Missing argument 'CASE...'. 'orolift cross --help' lists what there is."),
        (["cross", "case.toml", "--nothing"], "'orolift cross --help'"),
        (["hours", "case.toml"], "'orolift hours --help'"),
        (["compare", "case.toml"], "Missing argument 'OBSERVED.csv'. 'orolift compare --help'"),
        (["compare", "o.csv"], "Missing argument 'CASE...'. 'orolift compare --help'"),
        (["nonsense"], "'orolift --help'"),
        (["cross", "case.toml", "--report", "nofolder/x.html"], "nofolder is not a folder"),
        (["cross", "case.toml", "--report", "ridge.csv/x.html"], "is not a folder"),
        (["cross", "case.toml", "--units", "imperial"], "'imperial' is not one of 'metric', 'us'"),
        (["cross", "case.toml", "case.toml"], "case.toml is given twice"),
        (["cross", "case.toml", "other.toml", "--report", "x.html"], "--report takes one case"),
        (["crss", "case.toml"], "No such command 'crss'"),
        (["starter", "."], "case.toml is there already"),
    ],
)
def test_bad_commands_are_one_message(arguments, message, case_folder, capsys):
    """Wrong arguments exit with 2 and say the next step."""
    before = sorted(case_folder.iterdir())
    assert exit_code(arguments) == 2
    said = capsys.readouterr()
    assert message in said.err
    assert len(said.err.splitlines()) == 1
    assert sorted(case_folder.iterdir()) == before


def test_fog_rounding_is_clipped_with_a_note(edited, case_folder):
    """Dew point 0.3 degrees above temperature: used, and said so on the page and in the results."""
    case = edited(("dew_point_c = 11.0", "dew_point_c = 14.8"))
    assert exit_code(["cross", case, "--quiet", "--results", "r.json"]) == 0
    assert any("fog rounding" in note for note in json.loads((case_folder / "r.json").read_text())["notes"])
    assert "fog rounding" in (case_folder / "case.html").read_text()


def test_check_computes_nothing_and_says_what_is_assumed(case_folder, capsys):
    """`check` reads everything, lists the assumptions and writes nothing."""
    before = sorted(case_folder.iterdir())
    assert exit_code(["check", "case.toml"]) == 0
    said = capsys.readouterr().out
    assert "reads without an error" in said
    assert "Assumed:" in said
    assert sorted(case_folder.iterdir()) == before


def test_starter_runs_as_it_is(tmp_path, monkeypatch, capsys):
    """The starter case crosses without an edit."""
    monkeypatch.chdir(tmp_path)
    assert exit_code(["starter", "mine"]) == 0
    assert exit_code(["cross", "mine/case.toml"]) == 0
    assert "Lower Tarn" in capsys.readouterr().out


def test_a_fault_of_ours_is_no_fault_of_theirs(case_folder, capsys, monkeypatch):
    """An unexpected error exits with 1 and says whose fault it is."""
    monkeypatch.setattr("orolift.sources.inputs.read_inputs", lambda _case: 1 / 0)
    assert exit_code(["cross", "case.toml"]) == 1
    assert "a fault of orolift itself" in capsys.readouterr().err


def test_interrupt_leaves_130(case_folder, capsys, monkeypatch):
    """Ctrl-C ends with 130 and a word."""

    def interrupted(_case):
        raise KeyboardInterrupt

    monkeypatch.setattr("orolift.sources.inputs.read_inputs", interrupted)
    assert exit_code(["cross", "case.toml"]) == 130
    assert "interrupted" in capsys.readouterr().err


@pytest.mark.parametrize("library", ["rasterio", "shapely", "metar", "matplotlib"])
def test_a_ridge_case_imports_no_heavy_library(library, case_folder):
    """Start-up stays short: what a ridge does not need is not imported."""
    import subprocess
    import sys

    program = (
        "import sys; from orolift.cli.main import exit_code;"
        f"code = exit_code(['cross', 'case.toml', '--quiet']); sys.exit(code or int({library!r} in sys.modules))"
    )
    assert subprocess.run([sys.executable, "-c", program], check=False, cwd=case_folder).returncode == 0
