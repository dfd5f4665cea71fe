"""Sites from a file and maps of the lee as their user asks for them."""

import csv
import json
from pathlib import Path

import pytest

from orolift.cli.main import exit_code

DEMO = Path(__file__).parents[2] / "demo_terrain"
POSTS = """name,longitude,latitude,elevation_m
Weir,-121.05,-46.70,
Mill,-120.90,-47.05,2500
Corner,-120.4480,-47.3000,
"""


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    """The moist demo case with more sites from a file, without map of rain and members; worked out once."""
    place = tmp_path_factory.mktemp("sites")
    (place / "posts.csv").write_text(POSTS)
    text = (DEMO / "varn_moist.toml").read_text()
    start, end = text.index("[catchments]"), text.index("[[site]]")
    text = text[:start] + "[spread]\nmembers = 0\n\n" + text[end:]
    text = text.replace("duration_h = 6", "map = false")
    for name in ("varn.tif", "sounding.csv"):
        text = text.replace(f'"{name}"', f'"{DEMO / name}"')
    (place / "case.toml").write_text(f'sites_file = "posts.csv"\n{text}')
    return place


@pytest.fixture(scope="module")
def written(folder):
    """Results, table and points of the case."""
    paths = {name: folder / f"out.{name}" for name in ("json", "csv", "geojson", "html")}
    code = exit_code(
        [
            *("cross", str(folder / "case.toml"), "--quiet", "--report", str(paths["html"])),
            *("--results", str(paths["json"]), "--table", str(paths["csv"]), "--geojson", str(paths["geojson"])),
        ]
    )
    assert code == 0
    return paths


def test_every_site_is_in_every_file(written):
    """In the order of the case, worked out or with the reason why not."""
    names = ["Lower Tarn", "Ostrel Flats", "Kell Bridge", "Weir", "Mill", "Corner"]
    results = json.loads(written["json"].read_text())
    both = [*results["lee"], *results["failed_sites"]]
    assert [site["name"] for site in sorted(both, key=lambda site: site["number"])] == names
    rows = list(csv.DictReader(written["csv"].read_text(encoding="utf-8-sig").splitlines()))
    assert [row["name"] for row in rows] == names
    points = json.loads(written["geojson"].read_text())["features"]
    assert [point["properties"]["name"] for point in points] == names
    assert points[3]["geometry"]["coordinates"] == pytest.approx([-121.05, -46.70])
    for row in rows:
        assert bool(row["reason"]) != bool(row["temperature_c"])


def test_values_are_the_same_in_every_file(written):
    """The table and the points carry what the results say."""
    results = {site["name"]: site for site in json.loads(written["json"].read_text())["lee"]}
    points = json.loads(written["geojson"].read_text())["features"]
    for row in csv.DictReader(written["csv"].read_text(encoding="utf-8-sig").splitlines()):
        if row["name"] not in results:
            continue
        site = results[row["name"]]
        point = next(p["properties"] for p in points if p["properties"]["name"] == row["name"])
        assert float(row["temperature_c"]) == site["temperature_c"] == point["temperature_c"]
        assert float(row["warming_by_descent_c"]) == site["warming_parts_c"]["descent"]
        assert point["warming_by_descent_c"] == site["warming_parts_c"]["descent"]


def test_fire_weather_carries_the_number_of_its_site(written):
    """Lines of their own count their sites anew; results and panels name those of the case."""
    results = json.loads(written["json"].read_text())
    numbers = {site["name"]: site["number"] for site in results["lee"]}
    moisture = {}
    for site in results["fire"]:
        assert site["number"] == numbers[site["name"]]
        moisture[site["name"]] = site["equilibrium_fuel_moisture_percent"]
    panels = written["html"].read_text().split('<div class="panel">')[1:]
    assert len(panels) == len(moisture)
    for panel in panels:
        name = next(name for name in moisture if f"{name} <span" in panel)
        assert str(moisture[name] / 100.0)[:12] in panel


def test_the_page_says_what_is_doubtful(written):
    """The contradiction of heights, and that sites have lines of their own."""
    page = written["html"].read_text()
    assert "Mill is given at" in page
    assert "beside the line of the case" in page


@pytest.mark.parametrize(
    ("case", "arguments", "message"),
    [
        ("varn_ridge.toml", ["--lee-map", "."], "--lee-map cannot be written: the case has no elevation_file"),
        ("varn_moist.toml", ["--lee-map", "no/where"], "--lee-map: no/where cannot be made: no is not a folder."),
        ("varn_moist.toml", ["--maps", "no/where"], "--maps: no/where cannot be made: no is not a folder."),
        ("varn_ridge.toml", ["--lee-map", "new"], "--lee-map cannot be written: the case has no elevation_file"),
    ],
)
def test_a_map_that_cannot_be_is_refused_at_once(case, arguments, message, tmp_path, monkeypatch, capsys):
    """Before anything is worked out."""
    monkeypatch.chdir(tmp_path)
    assert exit_code(["cross", str(DEMO / case), *arguments]) == 2
    assert message in capsys.readouterr().err
    assert list(tmp_path.iterdir()) == []
