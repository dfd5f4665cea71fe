"""The table [spread]: defaults by the kind of source, other units as differences, nonsense refused."""

from math import radians

import pytest

from orolift.errors import CaseError
from orolift.sources.case import case_from_text
from orolift.sources.spread_model import CREST_WIND, MODEL, SOUNDING, STATION, SpreadTable, uncertainty_of
from orolift.spread.uncertainty import INPUTS

CASE = """
[terrain]
ridge_km_m = [[0, 40], [25, 1850], [60, 210]]
[incoming]
wind_from_deg = 235
{source}
{spread}
"""
ONE = "station = { elevation_m = 40, temperature_c = 14.5, dew_point_c = 11.0, pressure_hpa = 1004.0, wind_kt = 25 }"


def uncertainty(source=ONE, spread=""):
    return uncertainty_of(case_from_text(CASE.format(source=source, spread=spread), "storm.toml"))


def test_without_the_table_the_source_decides():
    """A station knows less of the wind at the crest than a sounding does, and a crest wind helps."""
    assert uncertainty() == STATION
    assert uncertainty(f"{ONE}\ncrest_wind_kt = 38") == CREST_WIND
    assert uncertainty("sounding_file = 'air.csv'") == SOUNDING
    assert uncertainty("model_file = 'air.nc'") == MODEL
    assert STATION.wind > CREST_WIND.wind > SOUNDING.wind
    assert STATION.lapse_rate > MODEL.lapse_rate > SOUNDING.lapse_rate


def test_what_is_given_is_better_known():
    """Lapse rate, times, the share that goes round."""
    found = uncertainty(
        f"{ONE}\nlapse_rate_c_per_km = 6", "[rain]\ncloud_time_s = 800\n[flow]\ngoing_round_share = 0.3"
    )
    assert found.lapse_rate == 0.5e-3
    assert (found.cloud_time, found.fall_time) == (0.3, 0.5)
    assert found.going_round_share == 0.1


def test_every_key_says_one_standard_deviation():
    """In the unit of its name, and in other units without an offset."""
    text = """[spread]
temperature_f = 1.8
dew_point_c = 0.5
pressure_hpa = 2
wind_percent = 20
wind_from_deg = 15
lapse_rate_c_per_km = 0.5
going_round_share = 0.3
critical_value = 0.4
cloud_time_percent = 40
fall_time_percent = 30
removed_share = 0.05
mixing_depth_percent = 60
surface_heat_percent = 10
liquid_cloud_percent = 25
lee_temperature_f = 3.6
model_temperature_c = 1.5
model_vapour_g_per_kg = 0.6
"""
    found = uncertainty(spread=text)
    expected = {
        "temperature": 1.0,
        "dew_point": 0.5,
        "pressure": 200.0,
        "wind": 0.2,
        "wind_from": radians(15.0),
        "lapse_rate": 0.5e-3,
        "going_round_share": 0.3,
        "critical_value": 0.4,
        "cloud_time": 0.4,
        "fall_time": 0.3,
        "removed_share": 0.05,
        "mixing_depth": 0.6,
        "surface_heat": 0.1,
        "liquid_cloud": 0.25,
        "lee_temperature": 2.0,
        "model_temperature": 1.5,
        "model_vapour": 0.6e-3,
    }
    assert {name: getattr(found, name) for name in expected} == pytest.approx(expected)
    assert {*expected} == {*INPUTS, "model_temperature", "model_vapour"}
    assert len(SpreadTable.model_fields) == len(expected) + 2


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("members = 1", r"\[spread\] members: 1 is too few for a range of 10 to 90 %; give 10 or more, or 0"),
        ("members = -1", r"\[spread\] members: -1 is outside 0 to 100000"),
        ("members = 1000000", r"members: 1e\+06 is outside 0 to 100000"),
        ("members = 12.5", r"members: a whole number is needed|members: .*12.5"),
        ("seed = -3", r"seed: -3 is outside 0 to"),
        ("temperature_c = -1", r"temperature_c: -1 is outside 0 to 15"),
        ("wind_percent = 300", r"wind_percent: 300 is outside 0 to 200"),
        ("temperature_c = 1\ntemperature_f = 2", r"say the same thing; keep one"),
        ("temprature_c = 1", r"unknown key. Did you mean temperature_c"),
        ("temperature_kt = 1", r"a wind unit does not fit here. Use one of: temperature_c, temperature_f"),
        ("temperature_c = nan", r"nan is not a number that can be used"),
        ("going_round_share = 40", r"going_round_share: 40 is outside 0 to 1"),
    ],
)
def test_nonsense_is_refused_in_one_line(text, message):
    """The key, the range, what to do."""
    with pytest.raises(CaseError, match=message):
        uncertainty(spread=f"[spread]\n{text}")
