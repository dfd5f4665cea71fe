"""Soundings as CSV: units in the header, either order, gaps, and what is refused."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import DataFileError, OroliftError
from orolift.sources.sounding_csv import sounding_from_text

HEADER = "pressure_hpa,height_m,temperature_c,dew_point_c,wind_from_deg,wind_ms\n"
ROWS = [
    "1000,100,15,10,240,8",
    "900,990,9,6,245,12",
    "800,1950,3,0,250,15",
    "700,3010,-4,-9,255,20",
    "500,5570,-19,-30,260,28",
]
GOOD = HEADER + "\n".join(ROWS) + "\n"


def test_columns_come_out_in_si():
    """Kelvin, pascal, metres, and wind components toward which the air moves."""
    sounding = sounding_from_text(GOOD, "s.csv")
    assert sounding.pressure[0] == 100000.0
    assert sounding.temperature[0] == pytest.approx(288.15)
    # WMO-No. 306: wind direction is where it comes from; 240 degrees blows toward the north-east.
    assert sounding.eastward_wind[0] == pytest.approx(8.0 * math.sin(math.radians(60.0)))
    assert sounding.northward_wind[0] == pytest.approx(8.0 * math.cos(math.radians(60.0)))


def test_either_order_and_other_units_read_the_same():
    """Top-down rows in knots, feet and Fahrenheit are the same sounding."""
    rows = ["pressure_hpa,height_ft,temperature_f,dew_point_f,wind_from_deg,wind_kt"]
    for row in reversed(ROWS):
        p, z, t, d, w, v = (float(cell) for cell in row.split(","))
        rows.append(f"{p},{z / 0.3048},{t * 1.8 + 32},{d * 1.8 + 32},{w},{v * 3600 / 1852}")
    other, first = sounding_from_text("\n".join(rows), "o.csv"), sounding_from_text(GOOD, "s.csv")
    for key in ("pressure", "height", "temperature", "dew_point", "eastward_wind", "northward_wind"):
        np.testing.assert_allclose(getattr(other, key), getattr(first, key), rtol=1e-9, atol=1e-9)


def test_gaps_are_filled_or_left_out():
    """A missing wind is interpolated by components; a level without humidity is left out; missing heights are noted."""
    text = HEADER + "\n".join([ROWS[0], "900,,9,6,,", "850,1450,6,,250,13", *ROWS[2:]])
    sounding = sounding_from_text(text, "s.csv")
    assert list(sounding.pressure) == [100000.0, 90000.0, 85000.0, 80000.0, 70000.0, 50000.0]
    assert sounding.height is None
    assert any("heights of the sounding are missing" in note for note in sounding.notes)
    assert sounding.eastward_wind[0] < sounding.eastward_wind[1] < sounding.eastward_wind[2]


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("temperature_c,dew_point_c", "dew_point_c,temperature_c", r"dew point above temperature at 5 of 5.*swapped\?"),
        ("900,990", "850,990", None),
        ("900,990", "750,990", r"s.csv: line 4: 800 hPa is out of order"),
        ("900,990", "1000,990", r"line 2 and line 3 repeat 1000 hPa with different values"),
        (
            "pressure_hpa,height_m",
            "height_m,pressure_hpa",
            r"line 4: pressure_hpa 1950 is outside the plausible range",
        ),
        ("wind_ms", "wind_speed", r"line 1: column 'wind_speed' is not known. Did you mean wind_ms"),
        ("wind_ms", "wind_hpa", r"column 'wind_hpa': use one of wind_ms, wind_kt"),
        ("temperature_c", "temperature", r"column 'temperature' is not known. Did you mean temperature_c"),
        ("900,990,9", "900,990,nine", r"line 3: temperature 'nine' is not a number"),
        ("900,990,9", "900,990,282.15", r"line 3: temperature_c 282.15 is outside the plausible range"),
        ("900,990,9,6", "900,990,9", r"line 3: 5 cells, but the header has 6"),
        ("240,8", "240,-8", r"wind_ms -8 is outside the plausible range"),
        ("height_m", "pressure_inhg", r"pressure.*stands in two columns|two columns"),
    ],
)
def test_what_is_wrong_is_named(old, new, message):
    """Each fault names file and line."""
    text = GOOD.replace(old, new, 1)
    assert text != GOOD
    if message is None:
        sounding_from_text(text, "s.csv")
        return
    with pytest.raises(DataFileError, match=message):
        sounding_from_text(text, "s.csv")


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "holds no header"),
        (HEADER, "has a header and no rows"),
        (HEADER + "\n".join(ROWS[:3]), "3 levels have pressure, temperature and humidity; at least 4"),
        ("pressure_hpa,temperature_c,dew_point_c\n1000,1,1\n", "column wind_from_deg is missing"),
        (HEADER + "\n".join(row[: row.rindex(",", 0, row.rindex(","))] + ",," for row in ROWS), "no level has wind"),
    ],
)
def test_what_is_too_little_is_refused(text, message):
    """Empty, short and windless soundings are refused with a reason."""
    with pytest.raises(DataFileError, match=message):
        sounding_from_text(text, "s.csv")


@settings(deadline=None, max_examples=300)
@given(st.text(alphabet="pressue_hatmwindkfo,;\n0123456789.-\t\"'", max_size=400))
def test_no_table_gives_a_traceback(text):
    """Any text is a sounding or a message."""
    try:
        sounding_from_text(HEADER + text, "fuzz.csv")
    except OroliftError as error:
        assert "fuzz.csv" in str(error)


def test_the_ground_stands_for_missing_heights():
    """Heights may be missing above; the lowest one sets the ground."""
    text = HEADER + "\n".join([ROWS[0], ROWS[1].replace("900,990", "900,"), *ROWS[2:]])
    sounding = sounding_from_text(text, "s.csv")
    assert sounding.height is None
    assert sounding.ground == 100.0
