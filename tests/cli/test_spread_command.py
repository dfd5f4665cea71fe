"""Ranges as the user of `orolift cross` meets them: page, terminal, results; many members on workers."""

import csv
import json
import re
from pathlib import Path

import pytest

from orolift.cli.main import exit_code

GROUND = {"distance_km", "crest_m", "beyond_crest_km", "elevation_m"}
"""Numbers without a range: where a site lies."""


@pytest.fixture
def results(edited):
    """Results of the case with a table [spread]."""

    def run(table, *options):
        case = edited(("members = 10", table))
        assert exit_code(["cross", case, "--results", "r.json", *options]) == 0
        return json.loads(Path("r.json").read_text())

    return run


def test_every_range_holds_eight_tenths(results, capsys):
    """Full and by the inputs alone, in every block; the terminal shows the same numbers."""
    found = results("members = 16\nseed = 3")
    assert found["case"]["seed"] == 3
    assert (found["spread"]["members"], found["spread"]["crossing_members"]) == (16, 16)
    site = found["lee"][0]
    low, high = site["range"]["temperature_c"]
    inner_low, inner_high = site["input_range"]["temperature_c"]
    assert low < inner_low < inner_high < high
    assert low < site["temperature_c"] < high
    for block in (found["incoming"], found["flow"], found["rain"], found["lee_wind"], site, found["fire"][0]):
        assert block["range"].keys() == block["input_range"].keys()
        assert all(low <= high for low, high in block["range"].values())
        assert {key.split(".")[0] for key in block["range"]} <= block.keys()
        numbers = {key for key, value in block.items() if isinstance(value, float)}
        assert numbers - GROUND <= block["range"].keys()
    assert "drying_ratio" in found["rain"]["range"]
    low_wind, high_wind = found["lee_wind"]["range"]["strongest_ms"]
    assert low_wind < high_wind
    conditions = found["lee_wind"]["conditions"]
    assert all(0.0 <= one["chance"] <= 1.0 for one in conditions)
    assert found["lee_wind"]["conditions_held"] == sum(one["holds"] is True for one in conditions)
    shown = capsys.readouterr().out
    assert len(shown.splitlines()) <= 10
    assert f"({low:.1f} to {high:.1f})" in shown
    assert "10 to 90 % of 16 members" in shown
    low_air, high_air = (f"{round(end, -1):.0f}" for end in site["source_level_range_m"])
    assert f"(eight tenths of it from {low_air} to {high_air})" in shown or low_air == high_air
    page = Path("case.html").read_text()
    assert 'id="how-sure"' in page
    assert "the case has no members" not in page
    assert "and the range that uncertain input" not in page
    assert f">{low:.1f}</data> to <data" in page


def test_the_table_has_single_values_only(results):
    """Ranges and chances stand in columns of their own, with the numbers of the results."""
    site = results("members = 10", "--table", "t.csv")["lee"][0]
    with Path("t.csv").open() as stream:
        row = next(csv.DictReader(stream))
    assert not [key for key, value in row.items() if "{" in value or "[" in value or "." in key]
    for key, column in (("temperature_c", "temperature_c"), ("warming_parts_c.descent", "warming_by_descent_c")):
        for block, more in (("range", ""), ("input_range", "_inputs")):
            ends = [float(row[f"{column}{more}_{end}"]) for end in ("low", "high")]
            assert ends == site[block][key]
    assert float(row["chance_rain"]) == site["chance"]["rain"]
    assert [float(row[f"source_level_m_{end}"]) for end in ("low", "high")] == site["source_level_range_m"]


def test_no_members_no_ranges(results, capsys):
    """The ends of blocking stay, and nothing speaks of members."""
    found = results("members = 0")
    assert found["spread"] is None
    assert found["case"]["seed"] is None
    assert found["lee"][0]["input_range"] == {}
    assert set(found["lee"][0]["range"]) == {"wind_ms", "gust_ms"}
    assert "members" not in capsys.readouterr().out
    assert "not worked out: the case has no members" in Path("case.html").read_text()


def test_the_index_has_the_ranges_of_the_report(edited):
    """Temperature, and what else carries a range in both."""
    assert exit_code(["cross", edited(), "--quiet", "--folder", "out"]) == 0
    low, high = json.loads(Path("out/case.json").read_text())["lee"][0]["range"]["temperature_c"]
    for name in ("case.html", "index.html"):
        words = re.sub(r"<[^>]+>", "", Path("out", name).read_text())
        assert f"({low:.1f} to {high:.1f})" in words


def test_workers_change_nothing(results, monkeypatch):
    """One process or two: the same file to the byte."""
    monkeypatch.setattr("orolift.spread.spread.CHUNK", 8)
    one = results("members = 16", "--jobs", "1")
    two = results("members = 16", "--jobs", "2")
    assert one == two


def test_a_scheduler_that_is_not_there_is_one_line(edited, capsys, monkeypatch):
    """Exit 2, nothing written."""
    pytest.importorskip("distributed")
    monkeypatch.setattr("orolift.cli.executors.PATIENCE", 0.3)
    assert exit_code(["cross", edited(), "--scheduler", "tcp://127.0.0.1:9"]) == 2
    said = capsys.readouterr()
    assert said.out == ""
    assert re.fullmatch(r"orolift: --scheduler tcp://127.0.0.1:9: no dask scheduler answers there .*\n", said.err)


def test_weak_wind_is_counted_and_said(edited, capsys):
    """Members that do not cross stand on the terminal and among the cautions."""
    case = edited(("wind_kt = 25 }", "wind_kt = 9 }"), ("members = 10", "members = 16\nwind_percent = 80"))
    assert exit_code(["cross", case, "--results", "r.json"]) == 0
    assert re.search(r"16 members, \d+ without a crossing", capsys.readouterr().out)
    found = json.loads(Path("r.json").read_text())
    assert 0 < found["spread"]["crossing_members"] < 16
    assert found["spread"]["chance"]["crosses"] == found["spread"]["crossing_members"] / 16
    assert any("of 16 members the wind across the crest is 2 m/s or less" in text for text in found["cautions"])
