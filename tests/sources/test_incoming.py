"""From a case to its incoming air: every kind of source, fresh reports, the direction found, and who stands where."""

import math
from datetime import UTC, datetime
from pathlib import Path

import numpy as np
import pytest

from orolift.air.column import interpolated
from orolift.air.ladder import LadderStation
from orolift.air.wind_layer import barrier_wind
from orolift.cli.check import findings
from orolift.cli.main import exit_code
from orolift.errors import CaseError, OroliftError
from orolift.sources.inputs import read_inputs
from orolift.sources.representative import representative_findings
from orolift.sources.station_ladder import ladder_findings
from orolift.terrain.features import features
from orolift.terrain.ridge import ridge_transect

BUFR = Path(__file__).parents[1] / "data" / "bufr" / "temp_hires.bufr"  # origin and licence in its README
TERRAIN = "[terrain]\nridge_km_m = [[0, 40], [12, 260], [25, 1850], [46, 330], [60, 210]]\n[incoming]\n"
STATION = "elevation_m = 40, temperature_c = 14.5, dew_point_c = 11.0, pressure_hpa = 1004.0, wind_kt = 25"
METAR = 'report = "METAR XVAR 031150Z 24025G38KT 9999 BKN030 15/11 Q1009 NOSIG", elevation_m = 40'
SOUNDING = (
    "pressure_hpa,height_m,temperature_c,dew_point_c,wind_from_deg,wind_ms\n"
    "1004,40,14.5,11,200,8\n925,730,8.5,6,225,12\n850,1430,4,1,240,16\n700,2990,-4,-12,255,22\n"
    "500,5540,-19,-33,260,30\n300,9130,-46,-60,265,40\n200,11800,-58,-75,265,40\n"
)


def case_in(folder, incoming, valid="valid_time = 2026-11-03T12:00:00Z\n", terrain=TERRAIN):
    """Inputs of a case written to a folder that has a sounding, too."""
    (folder / "s.csv").write_text(SOUNDING)
    path = folder / "case.toml"
    path.write_text(valid + terrain + incoming)
    return read_inputs(path)


def said_of(inputs):
    return [finding.what for finding in inputs.findings]


def test_metar_as_source(tmp_path):
    """Wind and temperature of the report, pressure from the altimeter setting at the station's height."""
    inputs = case_in(tmp_path, f"wind_from_deg = 235\nmetar = {{ {METAR} }}")
    air = inputs.incoming
    assert air.temperature[0] == pytest.approx(288.15)
    # QNH 1009 hPa at 40 m: 0.01 inch a foot, 12 Pa a metre near the sea, by the standard atmosphere
    assert air.pressure[0] == pytest.approx(100900 - 40 * 12.0, abs=10.0)
    assert math.degrees(math.atan2(-air.eastward_wind[0], -air.northward_wind[0])) % 360 == pytest.approx(240.0)
    assert "older than the valid time" not in said_of(inputs)


def test_station_ladder_as_source(tmp_path):
    """Both stations are met; the direction of the line is that of the mean wind."""
    rungs = f'{{ {STATION}, wind_from_deg = 200 }}, {{ name = "pass", elevation_m = 1500, temperature_c = 2.0, relative_humidity_percent = 90, wind_ms = 20, wind_from_deg = 240 }}'
    inputs = case_in(tmp_path, f"stations = [{rungs}]")
    assert float(interpolated(inputs.incoming, 1500.0).temperature) == pytest.approx(275.15)
    assert 200.0 < math.degrees(inputs.wind_from) < 240.0
    assert inputs.transect.bearing == pytest.approx((inputs.wind_from + math.pi) % (2 * math.pi))
    assert "2 stations" in " ".join(findings(inputs))


def test_sounding_in_bufr_as_source(tmp_path):
    """By its content, whatever its name."""
    inputs = case_in(tmp_path, f'sounding_file = "{BUFR}"')
    assert inputs.incoming.height[0] == pytest.approx(760.0)
    assert "older than the valid time" in said_of(inputs)


def test_temp_text_as_source(tmp_path):
    """A report of our own, built from the code tables; time from the day and hour, near valid_time."""
    (tmp_path / "t.txt").write_text(
        "TTAA 53061 99999 99004 14556 20016 00073 14256 20518 92735 09656 22524 85436 04458 24031 70998 04180 25543 "
        "50556 19180 26058 40718 31380 26560 30914 46380 26578 25036 54380 26578 20180 58580 26578 15362 58180 26560 "
        "10620 57180 27030 88999 77999="
    )
    inputs = case_in(tmp_path, 'sounding_file = "t.txt"')
    assert inputs.incoming.origin.count("measured") == 12
    assert "older than the valid time" in said_of(inputs)  # 06 UTC against 12 UTC
    assert inputs.incoming.height[0] == pytest.approx(40.0, abs=15.0)


def test_model_column_as_source(tmp_path):
    """A file of one column needs no place."""
    nc = pytest.importorskip("netCDF4")
    with nc.Dataset(tmp_path / "m.nc", "w") as data:
        p = np.array([1000.0, 925, 850, 700, 500, 300, 200])
        data.createDimension("p", p.size)
        for name, unit, values in (("air_pressure", "hPa", p), ("air_temperature", "K", 288 + 60 * np.log(p / 1000) / 2),
                                   ("relative_humidity", "%", np.full(7, 70.0)), ("eastward_wind", "m s-1", np.full(7, 12.0)),
                                   ("northward_wind", "m s-1", np.zeros(7)), ("geopotential_height", "m", 90 - 8100 * np.log(p / 1000))):  # fmt: skip
            data.createVariable("p" if name == "air_pressure" else name, "f8", ("p",))[:] = values
            data["p" if name == "air_pressure" else name].setncatts({"standard_name": name, "units": unit})
    inputs = case_in(tmp_path, 'model_file = "m.nc"')
    assert inputs.incoming.origin[:7] == ("model",) * 7
    assert math.degrees(inputs.wind_from) == pytest.approx(270.0)


def test_direction_left_out_is_the_barrier_wind(tmp_path):
    """Mean from base to 500 m above the crest; given, it is what is given."""
    inputs = case_in(tmp_path, 'sounding_file = "s.csv"')
    shape = features(inputs.transect)
    expected = barrier_wind(inputs.incoming, shape.base, shape.crest).from_direction
    assert inputs.wind_from == pytest.approx(float(expected), abs=math.radians(1.0))
    assert math.degrees(case_in(tmp_path, 'wind_from_deg = 300\nsounding_file = "s.csv"').wind_from) == pytest.approx(
        300.0
    )


def test_fresh_report_corrects_a_stale_sounding(tmp_path):
    """The lowest air is the report's, the free air the sounding's; said in the notes, with what was done about the age."""
    at = "sounding_at = { observed_time = 2026-11-03T05:00:00Z }\n"
    stale = case_in(tmp_path, f'sounding_file = "s.csv"\n{at}')
    fresh = case_in(tmp_path, f'sounding_file = "s.csv"\n{at}surface_metar = {{ {METAR.replace("15/11", "19/12")} }}')
    assert fresh.incoming.temperature[0] == pytest.approx(292.15, abs=0.1)
    high = [4000.0, 9000.0]
    np.testing.assert_allclose(
        interpolated(fresh.incoming, high).temperature, interpolated(stale.incoming, high).temperature, atol=1e-9
    )
    assert any("is blended into the lowest" in note for note in fresh.incoming.notes)
    ages = [finding for finding in fresh.findings if finding.what == "older than the valid time"]
    assert ages[0].done == "its lowest air is corrected by the surface report"


def test_turning_wind_is_said(tmp_path):
    """From south below to north-west above."""
    text = SOUNDING.replace(",200,8", ",150,8").replace(",225,12", ",160,12").replace(",240,16", ",280,16")
    (tmp_path / "turn.csv").write_text(text)
    inputs = case_in(tmp_path, 'wind_from_deg = 235\nsounding_file = "turn.csv"')
    assert any("The wind veers by" in caution for caution in inputs.cautions)


@pytest.mark.parametrize(
    ("incoming", "message"),
    [
        ("wind_from_deg = 235", "exactly one of station, stations, sounding_file, metar, model_file is needed, and none"),
        (f"station = {{ {STATION} }}", "wind_from_deg is needed: the station has none of its own"),
        (f'metar = {{ {METAR.replace("24025G38KT", "VRB03KT")} }}', "the wind has no direction. Give wind_from_deg"),
        (f'metar = {{ {METAR.replace("15/11", "////")} }}', "metar: the temperature is missing"),
        (f"wind_from_deg = 1\nstations = [{{ {STATION} }}]", "stations"),
        (f"wind_from_deg = 1\nstations = [{{ {STATION} }}, {{ {STATION}, wind_from_deg = 400 }}]", "outside 0 to 360"),
        ("wind_from_deg = 1\nstations = [{ elevation_m = 1, temperature_c = 5, dew_point_c = 9, wind_kt = 3, pressure_hpa = 1000 }, { elevation_m = 900, temperature_c = 5, dew_point_c = 3 }]", "item 1: dew_point_c 9 is above temperature_c 5"),
        ("wind_from_deg = 1\nstations = [{ elevation_m = 1, temperature_c = 5, dew_point_c = 3, wind_kt = 3 }, { elevation_m = 900, temperature_c = 5, dew_point_c = 3 }]", "none has a pressure"),
        ('sounding_file = "s.csv"\nsounding_at = { observed_time = 2026-11-03T05:00:00 }', "has no time zone"),
        ('sounding_file = "s.csv"\ncrest_wind_kt = 30', "a column brings its own"),
        ('sounding_file = "s.csv"\nmodel_at = { longitude = 1, latitude = 2 }', "model_at belongs to model_file"),
        (f"wind_from_deg = 3\nstation = {{ {STATION} }}\nsurface_metar = {{ {METAR} }}", "surface_metar corrects a sounding_file"),
        (f'sounding_file = "s.csv"\nsurface_metar = {{ {METAR} }}\nsurface_station = {{ {STATION} }}', "surface_station and surface_metar"),
        (f'sounding_file = "s.csv"\nsurface_metar = {{ {METAR.replace("m = 40", "m = 1600")} }}', "too far from the ground of the incoming air"),
        ('model_file = "s.csv"', "cannot be read as NetCDF"),
        ('sounding_file = "https://example.org/s.csv"', "is an address"),
        (f"wind_from_deg = 1\nstation = {{ {STATION.replace('elevation_m = 40', 'elevation_m = 3281').replace('1004', '899')} }}", "elevation_ft"),
    ],
)  # fmt: skip
def test_what_is_wrong_is_said(tmp_path, incoming, message):
    """One message that names the file; nothing else."""
    with pytest.raises(OroliftError, match=message):
        case_in(tmp_path, incoming)


def test_observation_from_the_future(tmp_path):
    """A date beyond the clock is wrong, and the crossing goes on."""
    inputs = case_in(tmp_path, 'sounding_file = "s.csv"\nsounding_at = { observed_time = 2200-01-01T00:00:00Z }')
    assert "observed in the future" in said_of(inputs)
    assert any("in the future" in caution for caution in inputs.cautions)


def test_check_prints_the_table(tmp_path, capsys):
    """Severity, place, finding, value, what was done; a caution stands in the table only."""
    case_in(tmp_path, f"wind_from_deg = 235\nmetar = {{ {METAR}, distance_km = 50 }}")
    assert exit_code(["check", str(tmp_path / "case.toml")]) == 0
    out = capsys.readouterr().out
    assert "Quality control of the incoming air:" in out
    row = next(line for line in out.splitlines() if "lies in the lee" in line)
    assert row.split()[0] == "wrong"
    assert "25 km downwind of the crest" in row
    assert sum("lies in the lee" in line for line in out.splitlines()) == 1


RIDGE = ridge_transect(np.array([0.0, 30e3, 60e3, 90e3]), np.array([600.0, 700.0, 2400.0, 150.0]))


@pytest.mark.parametrize(
    ("elevation", "where", "what"),
    [
        (640.0, {"distance": 10e3}, None),
        (640.0, {"distance": -80e3}, None),
        (640.0, {}, None),
        (170.0, {"distance": 85e3}, "lies in the lee"),
        (170.0, {}, "as low as the lee"),
        (640.0, {"distance": -280e3}, "far upwind"),
        (640.0, {"distance": 10e3, "offset": 150e3}, "far beside the line"),
        (1900.0, {"distance": 50e3}, "high on the slope"),
        (1970.0, {"distance": 10e3}, "does not fit the terrain"),
    ],
)
def test_places_that_do_not_stand_for_the_air_before_the_range(elevation, where, what):
    """A range of 2400 m over 600 m plains, with low ground at 150 m in the lee."""
    found = representative_findings("station", RIDGE, features(RIDGE), elevation, **where)
    assert any(what in finding.what for finding in found) if what else found == []


def test_upper_stations_of_a_ladder_may_stand_on_the_slope():
    """Only the lowest must stand before the range."""
    assert representative_findings("pass", RIDGE, features(RIDGE), 2000.0, lowest=False) == []


VALLEY = LadderStation(400.0, 288.0, 0.7, 96600.0, 3.0, 0.0)


@pytest.mark.parametrize(
    ("other", "what"),
    [
        (LadderStation(1400.0, 282.0, 0.7), None),
        (LadderStation(1400.0, 276.0, 0.7), "falls faster than air can keep up"),
        (LadderStation(600.0, 296.0, 0.4), "very strong inversion"),
        (LadderStation(410.0, 291.0, 0.6), "contradict each other"),
        (LadderStation(1400.0, 286.0, 1.0), "moister aloft"),
        (LadderStation(1400.0, 282.0, 0.7, 88900.0), "pressure contradicts"),
        (LadderStation(1400.0, 282.0, 0.7, 86300.0), "pressure contradicts"),
        (LadderStation(1400.0, 282.0, 0.7, 85850.0), None),
    ],
)
def test_ladders_that_contradict_themselves(other, what):
    """Against a valley station of 15 degrees at 400 m; 1000 m higher 859 hPa would fit."""
    found = ladder_findings([VALLEY, other], ["valley", "other"])
    assert any(what in finding.what for finding in found) if what else found == []


def test_raster_case_finds_its_direction(tmp_path):
    """On a raster the line is cut again until the direction stays, and the sounding's place is compared with the line."""
    import rasterio
    from rasterio.transform import from_origin

    _, x = np.mgrid[0:150, 0:150]
    ground = 100.0 + 1500.0 / (1.0 + ((x - 75) / 8.0) ** 2)
    with rasterio.open(
        tmp_path / "r.tif", "w", driver="GTiff", width=150, height=150, count=1, dtype="float32", crs="EPSG:32633",
        transform=from_origin(400e3, 5200e3, 1000.0, 1000.0),
    ) as data:  # fmt: skip
        data.write(ground.astype(np.float32), 1)
    terrain = '[terrain]\nelevation_file = "r.tif"\n[transect]\nupwind_km = 60\ndownwind_km = 50\nthrough = { easting_m = 475000, northing_m = 5125000 }\n[incoming]\n'
    inputs = case_in(
        tmp_path, 'sounding_file = "s.csv"\nsounding_at = { longitude = 15.3, latitude = 46.27 }', terrain=terrain
    )
    assert 225.0 < math.degrees(inputs.wind_from) < 245.0
    # 475 km east is 14.7 E: the sounding at 15.3 E lies downwind of the crest
    assert "lies in the lee: a lee station given as upwind" in said_of(inputs)


def test_times_of_the_reading_are_utc(tmp_path):
    """An offset in valid_time is understood."""
    inputs = case_in(
        tmp_path, f"wind_from_deg = 235\nmetar = {{ {METAR} }}", valid="valid_time = 2026-11-03T13:00:00+01:00\n"
    )
    assert inputs.case.valid_time.astimezone(UTC) == datetime(2026, 11, 3, 12, tzinfo=UTC)
    assert "older than the valid time" not in said_of(inputs)
    with pytest.raises(CaseError, match="has no time zone"):
        case_in(tmp_path, f"wind_from_deg = 235\nmetar = {{ {METAR} }}", valid="valid_time = 2026-11-03T13:00:00\n")
