"""Rain over the map as its user gets it: the files of `orolift cross`, and what is refused."""

import csv
import json
import re
import shutil
import tomllib
from pathlib import Path

import numpy as np
import pytest
import rasterio

from orolift.cli.main import exit_code
from orolift.sources.case import case_from_text

DEMO = Path(__file__).parents[2] / "demo_terrain"
BASINS, GAUGES = '[catchments]\nfile = "basins.geojson"\nname_field = "name"\n', '[gauges]\nfile = "gauges.csv"\n'
RIDGE = """[terrain]
ridge_km_m = [[0, 40], [25, 1850], [60, 210]]
[incoming]
wind_from_deg = 235
station = { elevation_m = 40, temperature_c = 14.5, dew_point_c = 11.0, pressure_hpa = 1004.0, wind_kt = 25 }
"""


@pytest.fixture
def varn(tmp_path, monkeypatch):
    """The moist demo case in a folder of its own; write it with changes."""
    for name in ("varn.tif", "sounding.csv", "basins.geojson", "gauges.csv"):
        shutil.copy(DEMO / name, tmp_path)
    monkeypatch.chdir(tmp_path)

    def write(*changes, **files):
        text = (DEMO / "varn_moist.toml").read_text()
        for old, new in changes:
            assert old in text, old
            text = text.replace(old, new, 1)
        Path("case.toml").write_text(text)
        for name, content in files.items():
            Path(name.replace("__", ".")).write_text(content)
        return "case.toml"

    return write


def rows_of(file):
    with Path(file).open() as stream:
        return list(csv.DictReader(stream))


def test_every_file_and_that_they_agree(varn, capsys):
    """Maps, catchments, gauges, sites and results of one run say the same numbers."""
    arguments = ["cross", varn(), "--results", "r.json", "--maps", "maps", "--catchments", "c.csv", "--gauges", "g.csv"]
    assert exit_code([*arguments, "--geojson", "s.geojson"]) == 0, capsys.readouterr().err
    results = json.loads(Path("r.json").read_text())
    over = results["rain"]["map"]
    assert over["duration_h"] == 6.0
    assert 0.0 < over["windward_share"] < 1.0
    assert over["drying_ratio"] > 0.0
    assert over["on_line"]["difference"]
    with rasterio.open("maps/case_rain_total.tif") as total, rasterio.open("maps/case_rain_rate.tif") as rate:
        assert total.crs.to_epsg() == 32710
        assert (rate.nodata, rate.units, total.units) == (-9999.0, ("mm h-1",), ("mm",))
        assert total.tags()["duration_h"] == "6"
        assert total.tags()["title"] == "Moist south-westerly over the Varn range"
        fell = total.read(1, masked=True)
        np.testing.assert_allclose(fell, 6.0 * rate.read(1, masked=True), rtol=1e-6)
        assert fell.max() == pytest.approx(6.0 * over["peak_mm_per_h"], rel=1e-6)
        cell = abs(total.transform.a * total.transform.e)
        assert float(fell.sum()) * cell / 1000.0 == pytest.approx(over["volume_m3"], rel=1e-5)
    with rasterio.open("maps/case_rain_and_snow.tif") as parts:
        assert parts.count == 3
    rows = rows_of("c.csv")
    assert [row["name"] for row in rows] == ["Kell", "Upper Tarn", "Sarn"]
    for row, block in zip(rows, results["catchments"], strict=True):
        assert float(row["total_mm"]) == block["total_mm"]
        assert block["total_mm"] == pytest.approx(6.0 * block["mean_mm_per_h"])
        assert [float(row[f"total_mm_{end}"]) for end in ("low", "high")] == block["range"]["total_mm"]
        assert block["range"] == block["input_range"]
        assert block["volume_m3"] == pytest.approx(block["total_mm"] * block["area_km2"] * 1000.0, rel=1e-6)
    assert {"peak_mm_per_h", "windward_share", "drying_ratio", "volume_m3"} <= over["range"].keys() <= over.keys()
    kell, tarn, _ = results["catchments"]
    assert kell["windward_share"] > 0.5 > tarn["windward_share"]
    assert [float(row["map_mm"]) for row in rows_of("g.csv")] == [
        place["map_mm"] for place in results["gauges"]["places"]
    ]
    assert results["gauges"]["fit"] is None
    sites = json.loads(Path("s.geojson").read_text())["features"]
    assert [site["properties"]["name"] for site in sites] == ["Lower Tarn", "Ostrel Flats", "Kell Bridge"]
    assert sites[0]["geometry"]["coordinates"] == [-120.9709, -46.8816]
    assert sites[0]["properties"]["temperature_c"] == results["lee"][0]["temperature_c"]
    parts = [value for key, value in sites[0]["properties"].items() if re.fullmatch("warming_by_[a-z_]+_c", key)]
    assert sum(parts) == pytest.approx(sites[0]["properties"]["warming_c"], abs=1e-6)


def test_the_fit_is_written_only_where_it_is_asked_for(varn, capsys):
    """fit = true: the TOML can be pasted into a case, and the map keeps the case's own times."""
    asked = varn((GAUGES, f"{GAUGES}fit = true\n"))
    assert exit_code(["cross", asked, "--quiet", "--fit", "fit.toml", "--results", "r.json"]) == 0
    fitted = tomllib.loads(Path("fit.toml").read_text())["rain"]
    results = json.loads(Path("r.json").read_text())
    block = results["gauges"]["fit"]
    assert fitted["cloud_time_s"] == pytest.approx(block["cloud_time_s"]["value"], abs=0.5)
    assert block["rms_fitted_mm"] < block["rms_before_mm"]
    assert results["rain"]["map"]["parameters"]["cloud_time_s"] == 1000.0
    pasted = RIDGE + Path("fit.toml").read_text()
    assert case_from_text(pasted, "pasted.toml").rain.fall_time_s == fitted["fall_time_s"]
    capsys.readouterr()
    assert exit_code(["cross", varn(), "--fit", "fit2.toml"]) == 2
    assert "fit = true" in capsys.readouterr().err


def test_a_given_divide_replaces_the_crest(varn, capsys):
    """A line far out at sea makes all rain lee rain."""
    line = {"type": "LineString", "coordinates": [[-121.9, -47.4], [-121.9, -46.4], [-121.2, -46.2]]}
    case = varn(("duration_h = 6", 'duration_h = 6\ndivide_file = "divide.geojson"'), divide__geojson=json.dumps(line))
    assert exit_code(["cross", case, "--quiet", "--results", "r.json"]) == 0, capsys.readouterr().err
    over = json.loads(Path("r.json").read_text())["rain"]["map"]
    assert over["divide"] == "given line"
    assert over["windward_share"] < 0.05


def test_snow_cover_makes_a_flag(varn, capsys):
    """Told of snow on the ground, warm rain on it is flagged; untold, nothing is said."""
    assert exit_code(["cross", varn(), "--quiet", "--results", "a.json"]) == 0
    case = varn(("duration_h = 6", "duration_h = 6\nsnow_cover_above_m = 900"))
    assert exit_code(["cross", case, "--quiet", "--results", "b.json"]) == 0, capsys.readouterr().err
    assert json.loads(Path("a.json").read_text())["flags"] == []
    (flag,) = json.loads(Path("b.json").read_text())["flags"]
    assert flag.startswith("Rain on snow")


def test_check_names_what_the_report_leaves_out(varn, capsys):
    """A gauge and a catchment far off the map; the ordinary case has none."""
    basins = json.loads(Path("basins.geojson").read_text())
    case = varn(gauges__csv=Path("gauges.csv").read_text().rstrip() + "\nFar Hut,20.0,20.0,5.0\n")
    ring = [[20.0, 20.0], [20.1, 20.0], [20.1, 20.1], [20.0, 20.0]]
    away = {"type": "Polygon", "coordinates": [ring]}
    basins["features"].append({"type": "Feature", "properties": {"name": "Far Basin"}, "geometry": away})
    Path("basins.geojson").write_text(json.dumps(basins))
    assert exit_code(["check", case]) == 0
    said = capsys.readouterr().out
    assert "Doubtful: Gauges not on the map and left out: Far Hut." in said
    assert "Doubtful: Catchment Far Basin: It lies outside the map" in said
    assert said.count("Doubtful: ") == 2


def test_check_reads_catchments_and_gauges(varn, capsys):
    """`check` names what was read for the map, and computes nothing."""
    assert exit_code(["check", varn()]) == 0
    said = capsys.readouterr().out
    assert "Catchments: Kell, Upper Tarn, Sarn." in said
    assert "Gauges: Sarn Mouth" in said
    assert not Path("case.html").exists()


def square(west, south, size, **members):
    """A square catchment."""
    ring = [[west, south], [west + size, south], [west + size, south + size], [west, south + size], [west, south]]
    feature = {"type": "Feature", "properties": {"name": "A"}, "geometry": {"type": "Polygon", "coordinates": [ring]}}
    return json.dumps({"type": "FeatureCollection", "features": [feature], **members})


@pytest.mark.parametrize(
    ("basins", "covered", "note"),
    [(square(20.0, 10.0, 0.5), 0.0, "outside the map"), (square(-120.6, -47.6, 0.5), 50.0, "lies on the map")],
    ids=["outside", "partly"],
)
def test_catchments_off_the_map_are_said(varn, capsys, basins, covered, note):
    """A catchment elsewhere has no values, one partly outside those of its covered part; both say so."""
    assert exit_code(["cross", varn(basins__geojson=basins), "--quiet", "--results", "r.json"]) == 0
    (block,) = json.loads(Path("r.json").read_text())["catchments"]
    assert block["covered_percent"] <= covered
    assert (block["total_mm"] is None) == (covered == 0.0)
    assert any(note in text for text in block["notes"])


def test_gauges_off_the_map_and_at_one_place_are_said(varn, capsys):
    """A gauge elsewhere is left out, two at one place are averaged, and both are named."""
    table = "name,longitude,latitude,total_mm\nFar,20,10,5\nOne,-121.1,-46.95,10\nTwo,-121.1,-46.95,14\n"
    assert exit_code(["cross", varn(gauges__csv=table), "--quiet", "--results", "r.json", "--gauges", "g.csv"]) == 0
    block = json.loads(Path("r.json").read_text())["gauges"]
    assert block["used"] == 1
    assert [place["observed_mm"] for place in block["places"]] == [5.0, 12.0]
    assert block["places"][0]["map_mm"] is None
    assert any("Far" in note for note in block["notes"])
    assert any("averaged: One" in note for note in block["notes"])
    assert rows_of("g.csv")[0]["map_mm"] == ""


METRES = {"type": "name", "properties": {"name": "EPSG:99999999"}}
DIVIDE = ("duration_h = 6", 'duration_h = 6\ndivide_file = "divide.geojson"')
WRONG = [
    ([], {"gauges__csv": "longitude,latitude,total_mm\n-121.1,-46.9,-3\n"}, r"gauges\.csv: line 2.*-3"),
    ([], {"gauges__csv": "longitude,latitude\n-121.1,-46.9\n"}, "has no column total_mm"),
    ([], {"basins__geojson": square(600000.0, 4800000.0, 5000.0)}, "are no degrees"),
    ([], {"basins__geojson": square(-121.0, -47.0, 0.1, crs=METRES)}, "coordinate system .* is not known"),
    ([], {"basins__geojson": square(-121.0, -47.0, 0.1).replace('"name": "A"', '"id": 1')}, "has no name in 'name'"),
    ([], {"basins__geojson": "[1, 2"}, r"basins\.geojson"),
    ([(BASINS, '[catchments]\nfile = "nowhere.geojson"\n')], {}, r"\[catchments\] file: .*nowhere"),
    ([DIVIDE], {"divide__geojson": square(-121.0, -47.0, 0.1)}, "holds no line"),
    (
        [DIVIDE],
        {"divide__geojson": json.dumps({"type": "LineString", "coordinates": [[10.0, 10.0], [11.0, 10.0]]})},
        "does not cross the wind",
    ),
    ([("duration_h = 6", "duration_h = 0")], {}, r"duration_h: 0 is outside 0\.1 to 1440"),
    ([("duration_h = 6", "map = false")], {}, r"\[catchments\] needs rain over a map, and \[rain\] map = false"),
    (
        [(GAUGES, f"{GAUGES}fit = true\n")],
        {"gauges__csv": "longitude,latitude,total_mm\n-121.1,-46.9,3\n"},
        "at least 6",
    ),
]


@pytest.mark.parametrize(("changes", "files", "message"), WRONG, ids=[message[:24] for *_, message in WRONG])
def test_bad_input_is_one_message_and_no_file(varn, capsys, changes, files, message):
    """Exit 2, one line that names the case and the file or key, nothing written."""
    case = varn(*changes, **files)
    before = sorted(Path().iterdir())
    assert exit_code(["cross", case, "--results", "r.json"]) == 2
    said = capsys.readouterr().err
    assert said.startswith("orolift: case.toml")
    assert len(said.splitlines()) == 1
    assert re.search(message, said), said
    assert sorted(Path().iterdir()) == before


@pytest.mark.parametrize(
    ("option", "message"),
    [
        ("--maps", "needs elevation_file"),
        ("--catchments", r"no \[catchments\]"),
        ("--gauges", r"no \[gauges\]"),
        ("--geojson", "no elevation_file"),
        ("--fit", "fit = true"),
    ],
)
def test_files_that_a_ridge_cannot_give(tmp_path, monkeypatch, capsys, option, message):
    """One message for each; nothing is written."""
    monkeypatch.chdir(tmp_path)
    Path("ridge.toml").write_text(RIDGE)
    assert exit_code(["cross", "ridge.toml", option, "new"]) == 2
    said = capsys.readouterr().err
    assert re.search(message, said), said
    assert len(said.splitlines()) == 1
    assert [file.name for file in tmp_path.iterdir()] == ["ridge.toml"]


@pytest.mark.parametrize("table", [BASINS, GAUGES, '[rain]\ndivide_file = "x.geojson"\n'])
def test_tables_of_a_map_need_a_raster(tmp_path, monkeypatch, capsys, table):
    """Catchments, gauges and a divide mean nothing on a hand-entered ridge."""
    monkeypatch.chdir(tmp_path)
    Path("ridge.toml").write_text(RIDGE + table)
    assert exit_code(["cross", "ridge.toml"]) == 2
    assert "a hand-entered ridge has none" in capsys.readouterr().err


def test_without_the_map(varn, capsys):
    """map = false: no map, no catchments, and maps are refused."""
    case = varn((BASINS, ""), (GAUGES, ""), ("duration_h = 6", "map = false"))
    assert exit_code(["cross", case, "--quiet", "--results", "r.json"]) == 0
    results = json.loads(Path("r.json").read_text())
    assert (results["rain"]["map"], results["catchments"], results["gauges"]) == (None, [], None)
    assert exit_code(["cross", case, "--maps", "."]) == 2
    assert "not map = false" in capsys.readouterr().err


def test_a_map_that_cannot_be_is_a_caution(varn, capsys):
    """Times beyond the theory: the crossing is written, with a caution; asked for maps, it is refused."""
    case = varn((BASINS, ""), (GAUGES, ""), ("duration_h = 6", "cloud_time_s = 15000"))
    assert exit_code(["cross", case, "--quiet", "--results", "r.json"]) == 0
    results = json.loads(Path("r.json").read_text())
    assert results["rain"]["map"] is None
    assert any(text.startswith("No map of rain could be made: cloud_time") for text in results["cautions"])
    assert exit_code(["cross", case, "--maps", "."]) == 2
    assert "cloud_time" in capsys.readouterr().err


def test_one_case_for_each_named_file(varn, capsys):
    """A file for two cases is refused by name."""
    assert exit_code(["cross", varn(), "other.toml", "--geojson", "s.geojson"]) == 2
    assert "--geojson takes one case" in capsys.readouterr().err
