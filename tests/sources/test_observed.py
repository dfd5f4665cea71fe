"""Observed values from CSV: units, times, missing values, places."""

import numpy as np
import pytest

from orolift.errors import DataFileError
from orolift.sources.inputs import read_inputs
from orolift.sources.observed import observed_from_text
from orolift.sources.observed_places import placed

CASE = """
valid_time = 2027-02-14T03:00:00Z
[terrain]
ridge_km_m = [[10, 40], [35, 1850], [70, 210], [90, 200]]
[incoming]
wind_from_deg = 235
station = { elevation_m = 40, temperature_c = 14.5, dew_point_c = 11.0, pressure_hpa = 1004.0, wind_kt = 25 }
crest_wind_kt = 38
[[site]]
name = "Lower Tarn"
distance_km = 62
elevation_m = 310
[[site]]
name = "Kell Bridge"
distance_km = 15
"""


@pytest.fixture(scope="module")
def inputs(tmp_path_factory):
    """A case with a ridge by hand that starts at 10 km, a lee site and a windward one."""
    path = tmp_path_factory.mktemp("case") / "case.toml"
    path.write_text(CASE)
    return read_inputs(path)


def read(*rows, head="time,site,temperature_c,relative_humidity_percent"):
    """Table of a few rows."""
    return observed_from_text("\n".join([head, *rows]), "obs.csv")


REFUSED = [
    ("site,temperature\nLower Tarn,5", "column 'temperature' is not known. Did you mean temperature_c"),
    ("time,site,temperature_c\n2027-02-14T03:00,Lower Tarn,5", "line 2: time '2027-02-14T03:00' names no zone"),
    ("time,site,temperature_c\nyesterday,Lower Tarn,5", "line 2: time 'yesterday' is not a date and time"),
    ("site,temperature_c\nLower Tarn,-9999\nLower Tarn,", "every cell of temperature is empty or a code"),
    ("site,elevation_m\nLower Tarn,200", "holds nothing to compare with"),
    ("site,rain_total_mm\nLower Tarn,3", "needs a column rain_duration_h"),
    ("site,temperature_c\n", "has a header and no rows"),
    ("site,temperature_c\nLower Tarn,150", "line 2: temperature_c 150 is outside the plausible range"),
]


@pytest.mark.parametrize(("text", "message"), REFUSED, ids=[message[:30] for _, message in REFUSED])
def test_what_cannot_be_used_is_refused(text, message):
    """The message names file, line or column, and what to do."""
    with pytest.raises(DataFileError, match=r"obs\.csv") as caught:
        observed_from_text(text, "obs.csv")
    assert message in str(caught.value)


def test_times_in_any_zone_are_one_time():
    """03:00 UTC is 04:00 an hour east and 19:00 of the day before eight hours west."""
    table = read(
        *(f"{time},a,5,50" for time in ("2027-02-14T03:00Z", "2027-02-14T04:00+01:00", "2027-02-13T19:00-08:00"))
    )
    assert np.unique(table.time).size == 1
    assert table.time[0] == 1802574000.0  # 2027-02-14T03:00:00 UTC


def test_units_of_the_columns_count():
    """50 degF is 10 degC, 20 kt are 10.289 m/s, an inch in two hours is 12.7 mm/h."""
    table = observed_from_text("site,temperature_f,wind_kt,rain_total_in,rain_duration_h\na,50,20,1,2", "obs.csv")
    assert table.columns["temperature"][0] == pytest.approx(283.15)
    assert table.columns["wind"][0] == pytest.approx(20 * 1852 / 3600)
    assert 3600 * table.columns["rain_rate"][0] == pytest.approx(12.7)


def test_codes_for_missing_values_are_missing_and_said():
    """-9999, -99.9 and an empty cell; the first line is named."""
    table = read(
        "2027-02-14T03:00Z,a,5,50",
        "2027-02-14T03:00Z,a,-9999,50",
        "2027-02-14T03:00Z,a,-99.9,",
        "2027-02-14T03:00Z,a,,40",
    )
    assert np.isnan(table.columns["temperature"]).tolist() == [False, True, True, True]
    assert any("temperature: 3 cells hold no value" in note and "line 3" in note for note in table.notes)


def test_humidity_follows_both_ways():
    """A dew point gives the relative humidity that gives it back; saturated air has its temperature as dew point."""
    dew = observed_from_text("site,temperature_c,dew_point_c\na,12,5\na,3,3", "obs.csv")
    humidity = 100 * dew.columns["relative_humidity"]
    assert humidity[1] == pytest.approx(100.0)
    back = read(f",a,12,{float(humidity[0])!r}")
    assert back.columns["dew_point"][0] == pytest.approx(278.15, abs=1e-6)


def test_a_dew_point_above_the_temperature_is_left_out_and_said():
    """Half a kelvin is rounding, more is not."""
    table = observed_from_text("site,temperature_c,dew_point_c\na,5,5.4\na,5,9", "obs.csv")
    assert table.columns["dew_point"][0] == pytest.approx(278.15)
    assert np.isnan(table.columns["dew_point"][1])
    assert "line 3" in table.cautions[0]


def test_rows_find_their_places(inputs):
    """By name in any case of letters, by distance in the numbers of the ridge; a new place has a name of its own."""
    head = "site,distance_km,temperature_c"
    put = placed(observed_from_text(f"{head}\nlower tarn,,5\nNook,70,6\n,80,7", "obs.csv"), [inputs])
    assert put.names == ("Lower Tarn", "Nook", "km 80.0")
    places = [put.cases[0].places[number - 1] for number in put.numbers[0]]
    assert [place.along for place in places] == [52e3, 60e3, 70e3]
    assert put.elevations == (310.0, pytest.approx(210.0, abs=0.5), pytest.approx(205.0, abs=0.5))
    assert put.seen.place.tolist() == [0, 1, 2]


def test_an_unknown_station_is_named_with_the_nearest(inputs):
    """It is left out, the others are used."""
    put = placed(observed_from_text("site,temperature_c\nLower Tran,5\nLower Tarn,6", "obs.csv"), [inputs])
    assert put.seen.values["temperature"].tolist() == [pytest.approx(279.15)]
    assert "'Lower Tran' (line 2) is no site of the case" in put.cautions[0]
    assert "Did you mean Lower Tarn?" in put.cautions[0]


def test_nothing_placed_is_refused(inputs):
    """With what was wrong about each."""
    with pytest.raises(DataFileError, match=r"no row can be placed.*Did you mean Lower Tarn"):
        placed(observed_from_text("site,temperature_c\nLower Tran,5", "obs.csv"), [inputs])


def test_a_place_off_the_ridge_is_left_out(inputs):
    """And said."""
    put = placed(observed_from_text("site,distance_km,temperature_c\nFar,400,5\nLower Tarn,,6", "obs.csv"), [inputs])
    assert put.names == ("Lower Tarn",)
    assert "Far" in put.cautions[0]
    assert "beyond the ends" in put.cautions[0]


def test_positions_must_fit_the_terrain(inputs):
    """A ridge by hand has no longitudes."""
    with pytest.raises(DataFileError, match="give places as distance_km"):
        placed(observed_from_text("longitude,latitude,temperature_c\n-121,-47,5", "obs.csv"), [inputs])
    with pytest.raises(DataFileError, match="longitude needs the other coordinate"):
        placed(observed_from_text("longitude,temperature_c\n-121,5", "obs.csv"), [inputs])


def test_a_station_far_above_its_estimate_is_said(inputs):
    """The lee site is worked out for 310 m."""
    put = placed(observed_from_text("site,elevation_m,temperature_c\nLower Tarn,900,5", "obs.csv"), [inputs])
    assert any("above or below the height" in note for note in put.notes)
