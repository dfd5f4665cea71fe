"""`orolift compare` as its user runs it: what it writes, what it says, and what it refuses."""

import csv
import json
import re
from html.parser import HTMLParser

import jsonschema
import pytest

from orolift.cli.main import exit_code
from orolift.crossing import upwind_error
from orolift.sources.schemas import compare_schema

HEAD = "time,site,temperature_c,dew_point_c,wind_ms,wind_from_deg,crest_temperature_c,crest_elevation_m"
HOURS = [
    f"2026-11-03T{hour:02d}:00+00:00,Lower Tarn,{t},{d},{u},235,4.0,1850"
    for hour, t, d, u in [
        (9, 8, 6, 0.5),
        (10, 18, 6, 6),
        (11, 18.5, 5, 7),
        (12, 19, 4, 7),
        (13, 18.5, 4, 7),
        (14, 9, 6, 0.4),
    ]
]
EARLIER = ("valid_time = 2026-11-03T12:00:00Z", "valid_time = 2026-11-03T10:00:00Z")
NO_MEMBERS = ("members = 10", "members = 0")
VOID = {"meta", "br", "link", "img", "input", "hr"}


@pytest.fixture
def observed(case_folder, edited):
    """Write a file of observations, beside a case without members."""
    edited(NO_MEMBERS)

    def write(*rows, head=HEAD, name="obs.csv"):
        (case_folder / name).write_text("\n".join([head, *rows]) + "\n")
        return name

    return write


class Page(HTMLParser):
    """Ids, headings and tags of a page; every tag must close."""

    def __init__(self, html):
        super().__init__()
        self.ids, self.words, self.stack = [], "", []
        self.feed(html)
        assert self.stack == []

    def handle_starttag(self, tag, attrs):
        self.ids += [value for name, value in attrs if name == "id"]
        if tag not in VOID:
            self.stack.append(tag)

    def handle_endtag(self, tag):
        assert self.stack.pop() == tag

    def handle_data(self, data):
        self.words += data


@pytest.fixture
def few_crossings(monkeypatch):
    """Spend little on the search for an error before the range; its own tests have the whole of it."""
    monkeypatch.setattr(upwind_error, "WIND_FACTORS", (0.7, 1.0))
    monkeypatch.setattr(upwind_error, "HUMIDITY_FACTORS", (0.7, 1.0))
    monkeypatch.setattr(upwind_error, "REFINEMENTS", 1)


@pytest.mark.usefixtures("few_crossings")
def test_the_whole_of_it(observed, edited, case_folder, capsys):
    """One run: page, results and table agree, the onset is found, the difference is explained or said not to be."""
    name = observed(*HOURS)
    edited()
    options = ["--results", "r.json", "--table", "t.csv", "--event", "temperature_c >= 15"]
    assert exit_code(["compare", "case.toml", name, *options]) == 0
    said = capsys.readouterr()
    assert said.err == ""
    results = json.loads((case_folder / "r.json").read_text())
    jsonschema.Draft202012Validator(compare_schema()).validate(results)
    with (case_folder / "t.csv").open() as stream:
        rows = list(csv.DictReader(stream))
    warm = next(row for row in rows if row["quantity"] == "temperature_c")
    value = next(row for row in results["values"] if row["quantity"] == "temperature_c")
    assert float(warm["estimate"]) == value["estimate"]
    assert value["observed"] == pytest.approx(19.0)
    assert value["difference"] == pytest.approx(value["estimate"] - 19.0)
    assert value["line"] == 5
    assert value["inside"] is (value["low"] <= 19.0 <= value["high"])
    damp = next(row for row in results["values"] if row["quantity"] == "relative_humidity_percent")
    assert damp["low"] < damp["high"]  # only members give it a range
    (onset,) = results["onset"]
    assert [(s["start"][11:16], s["end"][11:16]) for s in onset["observed_spells"]] == [("10:00", "13:00")]
    assert results["explanation"]["nearest"]["misfit"] >= 0.0
    assert [one["what"] for one in results["explanation"]["upwind"]] == ["wind", "humidity"]
    assert results["events"][0]["event"] == "temperature_c >= 15"
    html = (case_folder / "case-compared.html").read_text()
    page = Page(html)
    assert len(page.ids) == len(set(page.ids))
    assert not re.search(r'(?:src|href)="(?!#)|url\(', html)
    assert {"figure-compare-scatter", "figure-compare-timeline", "explanation", "onset", "values"} <= set(page.ids)
    assert f"{value['estimate']:.1f}".replace("-", "−") in page.words
    assert "not a warning" in page.words


def test_several_cases_are_compared_in_time(observed, edited, case_folder):
    """Each observation goes to its nearest case; scores are over both."""
    edited(EARLIER, NO_MEMBERS)
    (case_folder / "case.toml").rename(case_folder / "early.toml")
    edited(NO_MEMBERS)
    name = observed(*HOURS, head=HEAD.replace("dew_point_c", "gust_ms"))
    assert exit_code(["compare", "case.toml", "early.toml", name, "--quiet", "--results", "r.json"]) == 0
    results = json.loads((case_folder / "r.json").read_text())
    assert results["cases"] == ["2026-11-03T10:00:00Z", "2026-11-03T12:00:00Z"]
    (warm,) = [one for one in results["scores"] if one["quantity"] == "temperature_c"]
    assert warm["score"]["count"] == 2
    assert results["explanation"] is None  # no humidity was observed


@pytest.mark.usefixtures("few_crossings")
def test_hours_of_a_series_are_compared_when_their_air_is_there(observed, case_folder, capsys):
    """Each hour arrives later than it was observed upwind, and is held against the row at that time."""
    head = "time,temperature_c,dew_point_c,pressure_hpa,wind_from_deg,wind_kt,crest_wind_kt,crest_wind_from_deg"
    rows = [f"2026-11-03T{hour:02d}:00Z,14.5,11,1004,235,25,38,235" for hour in (9, 10)]
    (case_folder / "series.csv").write_text("\n".join([head, *rows]) + "\n")
    every = [f"2026-11-03T{9 + i // 6:02d}:{i % 6}0Z,Lower Tarn,{15 + 0.01 * i:.2f},6" for i in range(24)]
    name = observed(*every, head="time,site,temperature_c,dew_point_c")
    options = ["--series", "series.csv", "--within", "5", "--quiet", "--results", "r.json"]
    assert exit_code(["compare", "case.toml", name, *options]) == 0, capsys.readouterr().err
    results = json.loads((case_folder / "r.json").read_text())
    assert results["cases"] == [f"2026-11-03T{hour}:00:00Z" for hour in ("09", "10")]
    warm = [row for row in results["values"] if row["quantity"] == "temperature_c"]
    assert len(warm) == 2  # ten-minute rows, five minutes either way, two hours
    assert warm[0]["time"] > "2026-11-03T09:10"
    assert results["explanation"]["place"] == "Lower Tarn"


def test_a_series_is_for_one_case(observed, case_folder, capsys):
    """Several cases have their own air."""
    (case_folder / "again.toml").write_text((case_folder / "case.toml").read_text())
    assert exit_code(["compare", "case.toml", "again.toml", observed(*HOURS), "--series", "series.csv"]) == 2
    assert "--series gives the hours over one case" in capsys.readouterr().err


def test_a_lee_sounding_is_compared(observed, case_folder):
    """The column before the range as the lee's: layers in both heights."""
    name = observed("2026-11-03T12:00Z,Lower Tarn,15", head="time,site,temperature_c")
    assert (
        exit_code(["compare", "case.toml", name, "--lee-sounding", "sounding.csv", "--quiet", "--results", "r.json"])
        == 0
    )
    profile = json.loads((case_folder / "r.json").read_text())["profile"]
    assert [(layer["low_m"], layer["high_m"]) for layer in profile["layers"]] == [(50.0, 500.0), (0.0, 1500.0)]
    assert "Against a sounding" in (case_folder / "case-compared.html").read_text()


def test_us_units_leave_results_alone(observed, case_folder, capsys):
    """Fahrenheit on page and terminal only."""
    name = observed("2026-11-03T12:00Z,Lower Tarn,15", head="time,site,temperature_c")
    exit_code(["compare", "case.toml", name, "--units", "us", "--results", "us.json"])
    assert "°F" in capsys.readouterr().out
    exit_code(["compare", "case.toml", name, "--quiet", "--results", "metric.json"])
    assert (case_folder / "us.json").read_text() == (case_folder / "metric.json").read_text()


def test_a_windward_station_does_not_count(observed, case_folder):
    """It is shown with a caution, and no score is made of it."""
    name = observed("2026-11-03T12:00Z,Kell,5,12", head="time,site,distance_km,temperature_c")
    assert exit_code(["compare", "case.toml", name, "--quiet", "--results", "r.json"]) == 0
    results = json.loads((case_folder / "r.json").read_text())
    assert results["scores"] == []
    assert len(results["values"]) == 1
    assert any("windward side" in text for text in results["cautions"])


REFUSED = [
    (
        ["2026-11-04T12:00Z,Lower Tarn,15"],
        [],
        "no observation lies within 30 minutes of the case at 2026-11-03 12:00 UTC",
    ),
    (["2026-11-03T12:00Z,Lower Tran,15"], [], "Did you mean Lower Tarn?"),
    (["2026-11-03T12:00Z,Lower Tarn,15"], ["--explain", "Lower Tran"], "Did you mean Lower Tarn?"),
    (["2026-11-03T12:00Z,Lower Tarn,15"], ["--explain", "Lower Tarn"], "no temperature and humidity observed together"),
    (
        ["2026-11-03T12:00Z,Lower Tarn,15"],
        ["--event", "warmth > 3"],
        "--event 'warmth > 3': write a quantity with its unit",
    ),
    (["2026-11-03T12:00Z,Lower Tarn,15"], ["--event", "gust_c > 3"], "--event 'gust_c > 3'"),
    (["2026-11-03T12:00Z,Lower Tarn,15"], ["--onset-sector", "north"], "write two directions of 0 to 360 degrees"),
    (
        ["2026-11-03T12:00Z,Lower Tarn,15"],
        ["--table", "obs.csv"],
        "--table: obs.csv is an input of this run (OBSERVED)",
    ),
    (
        ["2026-11-03T12:00Z,Lower Tarn,15"],
        ["--table", "a.x", "--results", "a.x"],
        "--table: a.x is already what --results writes",
    ),
    (["2026-11-03T12:00Z,Lower Tarn,15"], ["--lee-sounding", "none.csv"], "none.csv cannot be found"),
    (
        ["2026-11-03T12:00Z,Lower Tarn,15"],
        ["--lee-sounding", "sounding.csv", "--at", "Nowhere"],
        "is no place of the comparison",
    ),
]


@pytest.mark.parametrize(("rows", "options", "message"), REFUSED, ids=[message[:40] for *_, message in REFUSED])
def test_faults_of_the_input_end_with_one_line(observed, case_folder, capsys, rows, options, message):
    """Exit code 2, one line that says what to do, nothing written."""
    name = observed(*rows, head="time,site,temperature_c")
    assert exit_code(["compare", "case.toml", name, *options]) == 2
    said = capsys.readouterr()
    assert message in said.err
    assert len(said.err.splitlines()) == 1
    assert not list(case_folder.glob("*.html"))


def test_what_is_read_is_not_written_over(observed, case_folder, capsys):
    """Nor two results into one file, which would lose one of them."""
    name = observed("2026-11-03T12:00Z,Lower Tarn,15", head="time,site,temperature_c")
    before = (case_folder / name).read_text()
    assert exit_code(["compare", "case.toml", name, "--table", name]) == 2
    assert "is an input of this run" in capsys.readouterr().err
    assert (case_folder / name).read_text() == before
    assert exit_code(["compare", "case.toml", name, "--table", "a.x", "--results", "a.x"]) == 2
    assert "a.x is already what --results writes" in capsys.readouterr().err


def test_several_cases_need_different_times(observed, case_folder, capsys):
    """They are told apart by them."""
    name = observed("2026-11-03T12:00Z,Lower Tarn,15", head="time,site,temperature_c")
    (case_folder / "again.toml").write_text((case_folder / "case.toml").read_text())
    assert exit_code(["compare", "case.toml", "again.toml", name]) == 2
    assert "Give each case its own" in capsys.readouterr().err
