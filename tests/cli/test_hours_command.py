"""`orolift hours` and `orolift bearings` as their user runs them: files, pages, interruptions, what cannot be written."""

import csv
import json
import math
import re
import sys
from html.parser import HTMLParser
from urllib.parse import unquote

import jsonschema
import pytest

from orolift.cli import bearings as bearings_command
from orolift.cli import hours as hours_command
from orolift.cli.main import exit_code
from orolift.sources.schemas import bearings_schema, hours_schema

SERIES = """time,temperature_c,dew_point_c,pressure_hpa,wind_from_deg,wind_kt
2026-11-03T00:00:00+01:00,14.5,9.0,1004.0,235,25
2026-11-03T01:00:00+01:00,14.5,9.0,1004.0,325,25
2026-11-03T02:00:00+01:00,14.5,19.0,1004.0,235,25
2026-11-03T04:00:00+01:00,14.0,13.5,1004.0,235,25
"""
ALL = ["--report", "page.html", "--table", "t.csv", "--results", "r.json", "--netcdf", "n.nc"]


@pytest.fixture
def series_folder(case_folder):
    """The case with its series; the current folder."""
    (case_folder / "series.csv").write_text(SERIES)
    return case_folder


class Page(HTMLParser):
    """Ids, alternative texts and what would be loaded."""

    def __init__(self, text):
        super().__init__()
        self.ids, self.loads, self.raw = [], [], []
        self.feed(text)

    def handle_starttag(self, tag, attrs):
        found = dict(attrs)
        self.ids += [found["id"]] if "id" in found else []
        self.loads += [found[key] for key in ("src", "href") if found.get(key, "#")[0] != "#"]
        self.raw += [float(found["value"])] if tag == "data" else []


def checked_page(file, figures):
    """A page is whole by itself: ids once, nothing loaded, every figure with words for those who do not see it."""
    text = file.read_text()
    page = Page(text)
    assert len(page.ids) == len(set(page.ids))
    assert page.loads == []
    assert "<script" not in text
    assert "not a warning" in text
    assert text.count("<figure") == figures
    assert text.count("<desc") == text.count("<svg") == 2 * figures
    assert all(map(math.isfinite, page.raw))
    return text


def test_hours_write_all_their_files(series_folder, capsys):
    """Four rows and the hour between the last two make five; one crosses not, one contradicts itself."""
    assert exit_code(["hours", "case.toml", "series.csv", "--members", "10", "--jobs", "1", *ALL]) == 0
    said = capsys.readouterr().out
    assert "2 of 5 hours cross" in said
    assert re.search(r"\(times in UTC\S*\)", said.splitlines()[0])
    assert not re.search(r"20\d\d, \d\d:\d[1-9]", said)  # no finer than ten minutes: the air's way is not known so well
    assert re.search(r"mm( \(\d+ to \d+\))? of rain and snow", said)
    results = json.loads((series_folder / "r.json").read_text())
    assert [*jsonschema.Draft202012Validator(hours_schema()).iter_errors(results)] == []
    hours = results["sites"][0]["hours"]
    assert hours["status"] == ["crossing", "no crossing", "missing", "missing", "crossing"]
    assert hours["time"][0] == "2026-11-02T23:00:00Z"
    assert hours["temperature_c"][1:4] == [None, None, None]
    assert hours["arrival_time"][0] > hours["time"][0]
    assert "line 4" in hours["reason"][2]
    with (series_folder / "t.csv").open() as stream:
        rows = list(csv.DictReader(stream))
    assert [row["status"] for row in rows] == hours["status"]
    assert float(rows[0]["temperature_c"]) == hours["temperature_c"][0]
    text = checked_page(series_folder / "page.html", 1)
    assert "UTC+01:00" in text
    assert "Lower Tarn" in text
    assert "has no row for this hour" in hours["reason"][3]
    ranges = results["sites"][0]["ranges"]
    low, high = ranges["range"]["temperature_c"][0]
    assert low < hours["temperature_c"][0] < high
    inside = ranges["input_range"]["temperature_c"][0]
    assert low <= inside[0] < inside[1] <= high
    assert ranges["range"]["temperature_c"][1:4] == [None, None, None]
    assert ranges["chance"]["crosses"][0] == 1.0
    assert ranges["chance"]["crosses"][2:4] == [None, None]
    assert (float(rows[0]["temperature_c_low"]), float(rows[0]["temperature_c_inputs_high"])) == (low, inside[1])
    assert rows[2]["temperature_c_low"] == rows[2]["chance_rain"] == ""
    assert results["members"] == {"members": 10, "seed": 1}
    assert "of 10 members" in re.sub("<[^>]+>", "", text)
    assert "members)" in said


def test_a_threshold_that_cannot_be_judged_is_null(series_folder):
    """It asks for a drought index that the case does not give, in a series of which every hour crosses."""
    (series_folder / "rules.toml").write_text(
        'region = "Tarn"\nauthority = "none"\ntaken = 2026-05-01\n[[rule]]\nname = "Drought"\n'
        '[[rule.condition]]\nquantity = "drought_index"\nat_least = 400\n'
    )
    case = series_folder / "case.toml"
    case.write_text(case.read_text().replace("[rain]", '[fire]\nrules_file = "rules.toml"\n[rain]'))
    (series_folder / "series.csv").write_text("".join(SERIES.splitlines(keepends=True)[:2]))
    assert exit_code(["hours", "case.toml", "series.csv", "--jobs", "1", "--quiet", *ALL]) == 0
    threshold = json.loads((series_folder / "r.json").read_text())["sites"][0]["thresholds"][0]
    assert (threshold["met"], threshold["chance"], threshold["chance_of_any"]) == ([None], [None], None)


def test_netcdf_of_hours_follows_the_conventions(series_folder):
    """Units, standard names and fill values as CF has them; times in seconds since 1970."""
    netcdf4 = pytest.importorskip("netCDF4")
    assert (
        exit_code(["hours", "case.toml", "series.csv", "--members", "10", "--jobs", "1", "--quiet", "--netcdf", "n.nc"])
        == 0
    )
    with netcdf4.Dataset(series_folder / "n.nc") as data:
        assert data.Conventions == "CF-1.11"
        temperature = data["temperature_c"]
        assert (temperature.standard_name, temperature.units) == ("air_temperature", "degC")
        assert temperature.dimensions == ("time", "site")
        assert temperature[:].mask[:, 0].tolist() == [False, True, True, True, False]
        assert netcdf4.num2date(data["time"][0], data["time"].units).isoformat() == "2026-11-02T23:00:00"
        assert data["status"].flag_meanings.split()[int(data["status"][1, 0])] == "no_crossing"
        assert data["site_name"][0] == "Lower Tarn"
        low, high = (data[name][0, 0] for name in temperature.ancillary_variables.split())
        assert low < temperature[0, 0] < high
        assert data["temperature_c_low"][:].mask[:, 0].tolist() == [False, True, True, True, False]
        assert 0.0 <= data["chance_descending_warm_dry"][0, 0] <= 1.0


def test_without_members_no_file_speaks_of_them(series_folder, capsys):
    """No columns, null in JSON, a note on the page that says how to have them, and the old caution."""
    files = ["--table", "t.csv", "--results", "r.json", "--report", "page.html"]
    assert exit_code(["hours", "case.toml", "series.csv", "--members", "0", "--jobs", "1", *files]) == 0
    results = json.loads((series_folder / "r.json").read_text())
    assert results["members"] is results["sites"][0]["ranges"] is None
    assert "_low" not in (series_folder / "t.csv").read_text().splitlines()[0]
    text = (series_folder / "page.html").read_text()
    assert "--members 32 works them out" in text
    assert "Each crossing is worked out once" in text
    assert "members" not in capsys.readouterr().out


@pytest.fixture
def stopped(monkeypatch):
    """The person presses Ctrl-C after so many results."""

    def after(module, count):
        from orolift.spread import engine

        whole = engine.outcomes

        def some(*arguments, **more):
            for number, outcome in enumerate(whole(*arguments, **more)):
                if number == count:
                    raise KeyboardInterrupt
                yield outcome

        monkeypatch.setattr(engine, "outcomes", some)

    return after


def test_finished_hours_are_written_on_ctrl_c(series_folder, stopped, capsys):
    """The files say that they hold a part, and the exit code that the work was interrupted."""
    stopped(hours_command, 3)
    assert (
        exit_code(["hours", "case.toml", "series.csv", "--members", "10", "--jobs", "1", "--results", "r.json"]) == 130
    )
    assert "interrupted after 3 of 5 hours; what was finished is written" in capsys.readouterr().err
    results = json.loads((series_folder / "r.json").read_text())
    assert results["interrupted"] is True
    assert len(results["sites"][0]["hours"]["time"]) == results["series"]["worked"] == 3
    assert "Interrupted: 3 of 5 hours" in results["notes"][0]
    assert "The work was interrupted" in (series_folder / "case_hours.html").read_text()


@pytest.mark.parametrize(("command", "given"), [("hours", ["case.toml", "series.csv"]), ("bearings", ["case.toml"])])
def test_what_was_finished_is_written_when_a_process_is_lost(command, given, series_folder, monkeypatch, capsys):
    """As when the system ends one for lack of memory: its sentence and exit code 2, but not for nothing."""
    from orolift.errors import WorkersError
    from orolift.spread import engine

    whole = engine.outcomes

    def some(*arguments, **more):
        for number, outcome in enumerate(whole(*arguments, **more)):
            if number == 3:
                raise WorkersError("a process that worked ended")
            yield outcome

    monkeypatch.setattr(engine, "outcomes", some)
    assert exit_code([command, *given, "--jobs", "1", "--members", "0", "--results", "r.json", "--quiet"]) == 2
    assert re.search(r"after 3 of \d+ \w+, which are written: a process that worked ended", capsys.readouterr().err)
    assert json.loads((series_folder / "r.json").read_text())["interrupted"] is True


def test_hours_between_finished_ones_are_missing_after_ctrl_c(series_folder):
    """Workers finish in any order: a line must not bridge what was not worked out."""
    from orolift.sources.hours_case import read_hours
    from orolift.spread.hours import Hour

    setup = read_hours("case.toml", "series.csv")
    found = hours_command.filled([Hour(n, float(setup.series.time[n]), ()) for n in (3, 0)], setup)
    assert [hour.number for hour in sorted(found, key=lambda hour: hour.time)] == [0, 1, 2, 3]
    assert [hour.sites[0].status for hour in found[2:]] == ["missing", "missing"]
    assert hours_command.filled([], setup) == []


def test_nothing_is_written_when_nothing_was_finished(series_folder, stopped, capsys):
    stopped(bearings_command, 0)
    assert exit_code(["bearings", "case.toml", "--jobs", "1"]) == 130
    assert not (series_folder / "case_bearings.html").exists()
    assert "nothing more is written" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (["hours", "case.toml", "series.csv", "--table", "none/t.csv"], "none is not a folder. Make it first"),
        (
            ["hours", "case.toml", "series.csv", "--table", "a.x", "--results", "a.x"],
            "--results: a.x is already what --table writes",
        ),
        (
            ["hours", "case.toml", "series.csv", "--table", "./series.csv"],
            "series.csv is an input of this run (series)",
        ),
        (["bearings", "case.toml", "--results", "case.toml"], "case.toml is an input of this run (case)"),
        (["hours", "case.toml", "series.csv", "--members", "5"], "--members 5: fewer than 10 have no range"),
        (["hours", "case.toml", "series.csv", "--members", "1e9"], "'1e9' is not a valid whole number"),
        (["hours", "case.toml", "none.csv"], "series: none.csv cannot be found"),
        (["hours", "case.toml", "case.toml"], "case.toml: line 1"),
        (["bearings", "case.toml", "--step", "7"], "--step 7: it must divide 360"),
        (["bearings", "case.toml", "--members", "5"], "--members 5: fewer than 10 have no range"),
        (["bearings", "case.toml", "--results", "none/r.json"], "none is not a folder"),
        (["bearings", "case.toml", "--folder", "o", "--table", "t.csv"], "leave --table out, or leave --folder out"),
        (["hours", "case.toml", "series.csv", "--folder", "o", "--netcdf", "n"], "leave --netcdf out"),
        (["hours", "case.toml", "series.csv", "--folder", "case.toml"], "case.toml is a file. Name a folder"),
        (["bearings", "case.toml", "--folder", "none/o"], "none/o cannot be made"),
    ],
)
def test_faults_are_said_before_anything_is_worked_out(arguments, message, series_folder, monkeypatch, capsys):
    """One line on stderr, exit code 2, no file."""

    def never(*_arguments, **_more):
        raise AssertionError("it was worked out")

    monkeypatch.setattr(hours_command, "worked", never)
    monkeypatch.setattr(bearings_command, "worked", never)
    before = sorted(series_folder.iterdir())
    assert exit_code(arguments) == 2
    said = capsys.readouterr().err
    assert re.search(re.escape(message), said)
    assert said.count("\n") == 1
    assert sorted(series_folder.iterdir()) == before


@pytest.mark.parametrize(
    ("arguments", "lost"),
    [
        (["hours", "case.toml", "series.csv", "--table", "series.csv"], "series.csv"),
        (["hours", "case.toml", "series.csv", "--results", "case.toml"], "case.toml"),
        (["hours", "case.toml", "series.csv", "--netcdf", "./series.csv"], "series.csv"),
        (["bearings", "case.toml", "--table", "case.toml"], "case.toml"),
        (["compare", "case.toml", "series.csv", "--table", "series.csv"], "series.csv"),
        (
            ["compare", "case.toml", "series.csv", "--lee-sounding", "sounding.csv", "--table", "sounding.csv"],
            "sounding",
        ),
    ],
)
def test_no_output_takes_the_place_of_an_input(series_folder, capsys, arguments, lost):
    before = {path.name: path.read_bytes() for path in series_folder.iterdir()}
    assert exit_code([*arguments, "--quiet"]) == 2
    said = capsys.readouterr().err
    assert lost in said
    assert "is an input of this run" in said
    assert {path.name: path.read_bytes() for path in series_folder.iterdir()} == before


def test_bearings_write_all_their_files(case_folder, capsys):
    """Four directions of a ridge that runs from northwest to southeast: two along it do not cross."""
    (case_folder / "case.toml").write_text((case_folder / "case.toml").read_text().replace("= 235", "= 270"))
    files = ["--report", "page.html", "--table", "t.csv", "--results", "r.json", "--jobs", "1"]
    assert exit_code(["bearings", "case.toml", "--step", "90", *files]) == 0
    assert "air crosses from 2 of 4 directions" in capsys.readouterr().out
    results = json.loads((case_folder / "r.json").read_text())
    assert [*jsonschema.Draft202012Validator(bearings_schema()).iter_errors(results)] == []
    directions = results["sites"][0]["directions"]
    assert directions["status"] == ["no crossing", "crossing", "no crossing", "crossing"]
    assert directions["side"] == [None, "windward", None, "lee"]
    assert results["sites"][0]["worst_for_fire_deg"] in {90.0, 270.0}
    with (case_folder / "t.csv").open() as stream:
        assert [row["wind_from_deg"] for row in csv.DictReader(stream)] == ["0.0", "90.0", "180.0", "270.0"]
    text = checked_page(case_folder / "page.html", 1)
    assert "Every wind direction" in text


def test_members_of_directions_have_ranges_in_every_file(case_folder, capsys):
    """Ranges on the page, in both files and on the terminal; none of them without members."""
    (case_folder / "case.toml").write_text((case_folder / "case.toml").read_text().replace("= 235", "= 270"))
    files = ["--report", "page.html", "--table", "t.csv", "--results", "r.json", "--jobs", "1"]
    assert exit_code(["bearings", "case.toml", "--step", "90", "--members", "12", *files]) == 0
    said = capsys.readouterr().out
    assert re.search(r"12 members: warmer by [\d.]+\s°C \([\d.−]+ to [\d.]+\); worst for fire as named in \d+\s%", said)
    results = json.loads((case_folder / "r.json").read_text())
    assert [*jsonschema.Draft202012Validator(bearings_schema()).iter_errors(results)] == []
    site = results["sites"][0]
    low, high = site["ranges"]["range"]["temperature_c"][3]
    assert low < site["directions"]["temperature_c"][3] < high
    with (case_folder / "t.csv").open() as stream:
        west = list(csv.DictReader(stream))[3]
    assert (float(west["temperature_c_low"]), float(west["temperature_c_high"])) == (low, high)
    text = checked_page(case_folder / "page.html", 1)
    assert 'class="range-line"' in text
    assert "How sure: the worst direction for fire is that named in" in re.sub(r"<[^>]+>", "", text)
    assert exit_code(["bearings", "case.toml", "--step", "90", "--members", "0", *files]) == 0
    assert "members" not in capsys.readouterr().out
    bare = checked_page(case_folder / "page.html", 1)
    assert 'class="range-line"' not in bare
    assert "How sure:" not in bare
    assert json.loads((case_folder / "r.json").read_text())["sites"][0]["ranges"] is None


def test_ranges_of_directions_do_not_depend_on_processes(case_folder):
    files = ["--report", "page.html", "--quiet"]
    for jobs in ("1", "2"):
        table = ["--table", f"{jobs}.csv", "--jobs", jobs]
        assert exit_code(["bearings", "case.toml", "--step", "90", "--members", "10", *files, *table]) == 0
    assert (case_folder / "1.csv").read_bytes() == (case_folder / "2.csv").read_bytes()


THREE_HOURS = "".join(SERIES.splitlines(keepends=True)[:4])


@pytest.mark.parametrize(
    ("arguments", "kinds", "heads"),
    [
        (
            ["hours", "case.toml", "series.csv", "--members", "0"],
            {"html", "json", "csv", "nc"},
            ["Site", "Hours that cross", "Descending warm dry air", "Onset", "End", "Thresholds met"],
        ),
        (
            ["bearings", "case.toml", "--step", "90"],
            {"html", "json", "csv"},
            ["Site", "Directions that cross", "Warmest", "Worst for fire", "Best for rain"],
        ),
    ],
)
def test_folder_holds_all_files_and_an_index(case_folder, capsys, arguments, kinds, heads):
    """Every link of the index leads to a file that is there; its numbers are those of the results."""
    pytest.importorskip("netCDF4")
    (case_folder / "series.csv").write_text(THREE_HOURS)
    out, stem = case_folder / "out dir", f"case_{arguments[0]}"
    assert exit_code([*arguments, "--jobs", "1", "--folder", "out dir"]) == 0
    assert capsys.readouterr().out.splitlines()[-2:] == [
        f"Report: out dir/{stem}.html",
        "Index: out dir/index.html",
    ]
    names = {path.name for path in out.iterdir()}
    assert names == {"index.html"} | {f"{stem}.{kind}" for kind in kinds}
    text = (out / "index.html").read_text()
    links = re.findall(r'href="([^"]+)"', text)
    assert {unquote(link).partition("#")[0] for link in links} == names - {"index.html"}
    assert 'id="site-1"' in (out / f"{stem}.html").read_text()
    assert f"{stem}.html#site-1" in links
    assert re.findall(r'<th scope="col">([^<]+)</th>', text) == heads
    row = re.search(r"<tbody>(.*?)</tbody>", text, re.DOTALL).group(1)
    row = [re.sub(r"<[^>]+>", "", cell) for cell in re.findall(r"<td>(.*?)</td>", row)]
    site = json.loads((out / f"{stem}.json").read_text())["sites"][0]
    states = site["hours" if arguments[0] == "hours" else "directions"]["status"]
    assert row[0] == f"{states.count('crossing')} of {len(states)}"
    if arguments[0] == "bearings":
        fire = site["worst_for_fire_deg"]
        assert row[2].startswith(f"{fire:.0f}")
    else:
        assert row[1:] == (["none", "–", "–", "none given"] if not site["dry_winds"] else [*row[1:4], "none given"])
    assert "not a warning" in text
    (out / "index.html").write_text("earlier")
    assert exit_code([*arguments, "--jobs", "1", "--quiet", "--folder", "out dir"]) == 0
    assert (out / "index.html").read_text() != "earlier"


def test_folder_without_the_extra_leaves_netcdf_out(series_folder, monkeypatch):
    """What cannot be written is not linked either."""
    monkeypatch.setitem(sys.modules, "netCDF4", None)
    (series_folder / "series.csv").write_text(THREE_HOURS)
    assert (
        exit_code(["hours", "case.toml", "series.csv", "--members", "0", "--jobs", "1", "--quiet", "--folder", "out"])
        == 0
    )
    assert {path.suffix for path in (series_folder / "out").iterdir()} == {".html", ".json", ".csv"}
    assert "NetCDF" not in (series_folder / "out" / "index.html").read_text()


@pytest.mark.parametrize("command", [["hours", "case.toml", "series.csv"], ["bearings", "case.toml"]])
def test_folder_is_not_left_when_nothing_was_finished(series_folder, stopped, command):
    stopped(hours_command, 0)
    assert exit_code([*command, "--jobs", "1", "--folder", "out"]) == 130
    assert not (series_folder / "out").exists()
