"""The case file: every wrong key gets one message that says where, what and what next."""

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import CaseError, OroliftError
from orolift.sources.case import case_from_text

GOOD = """
title = "South-westerly"
valid_time = 2026-11-03T12:00:00Z
[terrain]
ridge_km_m = [[0, 40], [25, 1850], [60, 210]]
[incoming]
wind_from_deg = 235
station = { elevation_m = 40, temperature_c = 14.5, dew_point_c = 11.0, pressure_hpa = 1004.0, wind_kt = 25 }
"""


def test_a_good_case_reads():
    """Whole numbers and decimals are both numbers; defaults are filled in."""
    case = case_from_text(GOOD, "storm.toml")
    assert case.terrain.ridge_km_m[1] == [25.0, 1850.0]
    assert case.incoming.station.wind_kt == 25.0
    assert case.rain.cloud_time_s == 1000.0
    assert case.rain.removed_share is None


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        (
            "temperature_c",
            "temperture_c",
            r"storm.toml: \[incoming\] station.temperture_c: unknown key. Did you mean temp",
        ),
        ("[terrain]", "[terrian]", r"\[terrain\] is missing|terrian.*Did you mean terrain"),
        ("temperature_c", "temperature_kt", r"a wind unit does not fit here. Use one of: temperature_c, temperature_f"),
        ("= 14.5", "= '14.5'", r"station.temperature_c: a number is needed, and '14.5' is given"),
        ("= 14.5", "= true", r"a number is needed, and True is given"),
        ("= 14.5", "= nan", r"nan is not a number that can be used; give one within -80 to 56"),
        ("= 14.5", "= inf", r"inf is not a number that can be used"),
        ("= 14.5", "= 145", r"145 is outside -80 to 56"),
        ("temperature_c = 14.5", "temperature_c = 14.5, temperature_f = 58", r"say the same thing; keep one"),
        ("temperature_c = 14.5", "temperature_f = 580", r"given as temperature_f = 580.*304.444 is outside -80 to 56"),
        ("wind_kt = 25", "wind_kt = -25", r"wind_kt: -25 is outside 0 to 250"),
        ("pressure_hpa = 1004.0", "pressure_hpa = 100.4", r"pressure_hpa: 100.4 is outside 300 to 1090"),
        ("dew_point_c = 11.0", "relative_humidity_percent = 130", r"130 is outside the range above 0 and up to 100"),
        ("dew_point_c = 11.0, ", "", r"exactly one of dew_point_c, relative_humidity_percent is needed, and none"),
        ("12:00:00Z", "12:00:00", r"has no time zone; write 2026-11-03T12:00:00Z"),
        (
            "[terrain]",
            "[terrain]\nridge_file = 'r.csv'",
            r"exactly one of elevation_file.*ridge_km_m and ridge_file are",
        ),
        ("[[0, 40]", "[[0]", r"point 1 has 1 numbers; each needs two"),
        ("[[0, 40]", "[['a', 40]", r"ridge_km_m, item 1, item 1: a number is needed"),
        ("[incoming]", "[rain]\nremoved_share = 1.4\n[incoming]", r"removed_share: 1.4 is outside 0 to 1"),
        ("[incoming]", "[transect]\nswath_km = 5\n[incoming]", r"\[transect\] cuts a line from a raster"),
        ("[terrain]", "[terrain", r"not valid TOML.*line 4, column 9"),
        (
            "station =",
            "sounding_file = 's.csv'\nstation =",
            r"exactly one of station, stations, sounding_file, metar, model_file is needed",
        ),
        (
            "[incoming]",
            "[incoming]\nmodel_at = { method = 'nearest' }",
            r"model_at belongs to model_file, and none is given",
        ),
        (
            "[incoming]",
            "[incoming]\nsurface_metar = { report = 'X', elevation_m = 1 }",
            r"surface_metar corrects a sounding",
        ),
        ("wind_from_deg = 235", "wind_from_deg = 400", r"wind_from_deg: 400 is outside 0 to 360"),
        (
            "wind_from_deg = 235",
            "lapse_rate_c_per_km = 6",
            r"\[incoming\]: wind_from_deg is needed: the station has none of its own",
        ),
        ('title = "South-westerly"', "title = 3", r"title: text in quotes is needed, and 3 is given"),
        ("2026-11-03T12:00:00Z", "'noon'", r"a date and time is needed"),
        ("[terrain]", "[terrain]\nelevation_unit = 'yd'", r"'yd' is not one of 'm' or 'ft'"),
        ("[terrain]", "[terrain]\nlongitude = 5", r"longitude needs latitude beside it"),
    ],
)
def test_a_wrong_case_says_what_is_wrong(old, new, message):
    """One message names the file, the table and the key, and the next step."""
    text = GOOD.replace(old, new, 1)
    assert text != GOOD
    with pytest.raises(CaseError, match=message):
        case_from_text(text, "storm.toml")


@pytest.mark.parametrize(
    ("site", "message"),
    [
        ("name = 'a'\ndistance_km = 5\n[[site]]\nname = 'a'\ndistance_km = 6", "two sites are called 'a'"),
        ("name = 'a'\nlongitude = 5\nlatitude = 6", "needs distance_km: a hand-entered ridge has no map"),
        ("name = 'a'", "exactly one of longitude, easting_m, distance_km"),
        ("name = ''\ndistance_km = 5", "the text is empty"),
        ("name = 'a'\ndistance_km = 5\nelevation_m = 90000", "90000 is outside -430 to 9000"),
    ],
)
def test_a_wrong_site_says_what_is_wrong(site, message):
    """Sites are checked against the kind of terrain."""
    with pytest.raises(CaseError, match=message):
        case_from_text(f"{GOOD}\n[[site]]\n{site}", "storm.toml")


def test_other_units_are_converted():
    """The same air in degrees Fahrenheit, feet, miles an hour and inches of mercury.

    Conversion factors: NIST SP 811 (2008), Appendix B.
    """
    other = GOOD.replace(
        "elevation_m = 40, temperature_c = 14.5, dew_point_c = 11.0, pressure_hpa = 1004.0, wind_kt = 25",
        "elevation_ft = 131.2336, temperature_f = 58.1, dew_point_f = 51.8, pressure_inhg = 29.64810, wind_mph = 28.76949",
    )
    station = case_from_text(other, "us.toml").incoming.station
    expected = case_from_text(GOOD, "si.toml").incoming.station
    for key in ("elevation_m", "temperature_c", "dew_point_c", "pressure_hpa", "wind_kt"):
        assert getattr(station, key) == pytest.approx(getattr(expected, key), rel=1e-6)


def test_an_empty_file_says_so():
    """A case without keys points to the starter."""
    with pytest.raises(CaseError, match=r"holds no keys.*orolift starter"):
        case_from_text("# nothing\n", "empty.toml")


@settings(deadline=None, max_examples=200)
@given(st.text(max_size=300))
def test_no_text_gives_a_traceback(text):
    """Any text is a case or a message."""
    try:
        case_from_text(text, "fuzz.toml")
    except OroliftError as error:
        assert str(error).startswith("fuzz.toml: ")


def test_a_ridge_in_feet_is_converted():
    """Of each pair the height is converted, the distance stays in kilometres."""
    text = GOOD.replace("ridge_km_m = [[0, 40], [25, 1850]", "ridge_km_ft = [[0, 100], [25, 6000]")
    assert case_from_text(text, "us.toml").terrain.ridge_km_m[1] == pytest.approx([25.0, 1828.8])
