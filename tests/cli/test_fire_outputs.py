"""`orolift cross` and `check` with fire thresholds, as their user runs them."""

import csv
import json
import re

import pytest

from orolift.cli.main import exit_code

RULES = """
region = "Tarn (invented)"
authority = "nobody"
taken = 2026-05-01
[[rule]]
name = "windy"
[[rule.condition]]
quantity = "wind"
at_least_ms = 1
height_m = 10
kind = "sustained"
averaging_min = 10
"""
SITE = '[[site]]\nname = "Lower Tarn"'
FIRE = '[fire]\nrules_file = "rules.toml"\nprevious_fine_fuel_code = 85\n'


@pytest.fixture
def fire_case(case_folder, edited):
    """A case with one rule that is met, and one site before the crest."""
    (case_folder / "rules.toml").write_text(RULES)
    mill = '[[site]]\nname = "Mill"\ndistance_km = 12\n'
    return edited((SITE, f"{FIRE}{mill}{SITE}"))


def test_results_table_and_page_say_the_same(fire_case, case_folder, capsys):
    """A threshold met stands in results, table, page and on the terminal, and is nowhere a warning."""
    assert exit_code(["cross", fire_case, "--results", "r.json", "--table", "t.csv", "--report", "r.html"]) == 0
    results = json.loads((case_folder / "r.json").read_text())
    mill, tarn = results["fire"]
    assert [mill["name"], tarn["name"]] == ["Mill", "Lower Tarn"]
    assert tarn["rules"][0]["status"] == "met"
    assert tarn["rules"][0]["conditions"][0]["value"] == pytest.approx(results["lee"][1]["wind_10m_ms"])
    assert tarn["rules"][0]["chance_percent"] > 50.0
    low, high = tarn["range"]["fosberg_index"]
    assert low - 5.0 < tarn["fosberg_index"] < high + 5.0  # few members, and the wind is an end of its methods
    assert 80.0 < tarn["fine_fuel_code"] < 90.0
    assert any(flag.startswith("Fire threshold met at Lower Tarn: windy") for flag in results["flags"])
    assert any("Mill lies on the windward side" in text for text in results["cautions"])
    with (case_folder / "t.csv").open() as stream:
        row = list(csv.DictReader(stream))[1]
    assert float(row["hot_dry_windy"]) == tarn["hot_dry_windy"]
    assert row["thresholds_met"] == "windy"
    for kind, more in (("range", ""), ("input_range", "_inputs")):
        for key in ("fosberg_index", "mixing_height_m", "night.valley_floor_windy_percent", "fine_fuel_code_after_3_h"):
            column = key.replace(".", "_") + more
            assert [float(row[f"{column}_{end}"]) for end in ("low", "high")] == tarn[kind][key]
    low, high = tarn["rules"][0]["conditions"][0]["range"]
    assert [low, high] == pytest.approx(results["lee"][1]["range"]["wind_10m_ms"])
    assert "Fire      “windy” is met at" in capsys.readouterr().out
    assert 'id="fire-thresholds"' in (case_folder / "r.html").read_text()


def test_check_names_the_rules(fire_case, capsys):
    """What was read, and whose it is."""
    assert exit_code(["check", fire_case]) == 0
    assert "Fire: 1 rule of Tarn (invented), by nobody." in capsys.readouterr().out


def test_without_the_table_dryness_is_there_and_nothing_is_judged(case_folder):
    """Indices for every site; no rules, no code."""
    assert exit_code(["cross", "case.toml", "--quiet", "--results", "r.json"]) == 0
    block = json.loads((case_folder / "r.json").read_text())["fire"][0]
    assert block["vapour_pressure_deficit_hpa"] > 0.0
    assert block["rules"] == []
    assert block["fine_fuel_code"] is None


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ('region = "Tarn (invented)"', "", "rules.toml: region is missing"),
        ("height_m = 10", "", "rules.toml: .*height_m is missing: a wind condition says which wind it means"),
        ("at_least_ms = 1", "at_least_ms = -1", "rules.toml: .*outside 0 to 130"),
    ],
)
def test_a_wrong_rule_file_writes_nothing(fire_case, case_folder, capsys, old, new, message):
    """Exit 2, one line that names the file."""
    (case_folder / "rules.toml").write_text(RULES.replace(old, new))
    assert exit_code(["cross", fire_case, "--report", "r.html"]) == 2
    said = capsys.readouterr().err
    assert len(said.splitlines()) == 1

    assert re.search(message, said)
    assert not (case_folder / "r.html").exists()
