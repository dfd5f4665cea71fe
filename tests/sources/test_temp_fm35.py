"""TEMP reports: messages of our own, built from the tables of the Manual on Codes (WMO-No. 306, volume I.1, FM 35).

No message is copied from anywhere. Values beside them were worked out by hand from the tables named in the tests.
"""

import math
from datetime import UTC, datetime

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import DataFileError, OroliftError
from orolift.sources.sounding import sounding_from_levels
from orolift.sources.temp_fm35 import levels_from_temp
from orolift.sources.temp_groups import (
    GroupError,
    level_pressure,
    position,
    standard_level_height,
    temperature_and_dew_point,
    wind,
)

NOON = datetime(2026, 11, 3, 12, tzinfo=UTC)
PART_A = (
    "TTAA 53121 99999 99012 15256 24008 00110 14656 24510 92785 10020 25018 85470 05461 25520 70030 03366 26025 "
    "50560 19180 27040 40722 31380 27050 30918 46780 27560 25039 55380 27570 20182 60980 27080 15365 58180 27060 "
    "10622 57180 28030 88211 61580 27582 77255 27590 40510 31313 40102 81105="
)
PART_B = (
    "TTBB 53128 99999 00012 15256 11980 13840 22930 11020 33890 08811 44760 01756 55540 16976 66400 31380 "
    "21212 00012 24008 11950 25015 22800 26022="
)
PART_C = "TTCC 53123 99999 70849 58780 28025 50060 59380 28520 30390 60980 29015 88999 77999="
PART_D = "TTDD 5312/ 99999 11866 57980 22450 60180 21212 11700 28025="


@pytest.mark.parametrize(
    ("group", "temperature", "dew_point"),
    [
        # code table 3931: even tenths above, odd tenths below freezing; 0777: 00-50 tenths, 56-99 whole degrees + 50
        ("15256", 15.2, 9.2),
        ("00000", 0.0, 0.0),
        ("00100", -0.1, -0.1),
        ("05150", -5.1, -10.1),
        ("05156", -5.1, -11.1),
        ("31399", -31.3, -80.3),
        ("10050", 10.0, 5.0),
        ("222//", 22.2, math.nan),
        ("/////", math.nan, math.nan),
    ],
)
def test_temperature_group(group, temperature, dew_point):
    """TTTaDD by code tables 3931 and 0777."""
    found = [value - 273.15 for value in temperature_and_dew_point(group)]
    np.testing.assert_allclose(found, [temperature, dew_point], atol=1e-9)


@pytest.mark.parametrize("depression", ["51", "52", "53", "54", "55"])
def test_unused_depressions_are_refused(depression):
    """Code table 0777: 51 to 55 are not used."""
    with pytest.raises(GroupError, match="not used"):
        temperature_and_dew_point(f"100{depression}")


@pytest.mark.parametrize(
    ("group", "degrees", "speed"),
    [
        # ddfff: tens of degrees; the five of the units stands as 500 in the speed
        ("24008", 240, 8),
        ("24508", 245, 8),
        ("27120", 270, 120),
        ("27620", 275, 120),
        ("36000", 360, 0),
        ("00000", 0, 0),
        ("//015", None, None),
    ],
)
def test_wind_group(group, degrees, speed):
    """Wind by section 2 of the form; in knots one is 1852/3600 m/s."""
    for knots, factor in ((False, 1.0), (True, 1852.0 / 3600.0)):
        found = wind(group, knots=knots)
        if degrees is None:
            assert math.isnan(found.speed)
            continue
        assert found.speed == pytest.approx(speed * factor)
        assert math.degrees(found.from_direction) == pytest.approx(degrees)


@pytest.mark.parametrize("group", ["37010", "36510", "99010"])
def test_directions_beyond_the_circle_are_refused(group):
    """dd runs to 36."""
    with pytest.raises(GroupError, match="beyond 360"):
        wind(group, knots=True)


@pytest.mark.parametrize(
    ("pressure", "hhh", "height"),
    [
        # metres without thousands up to 700 hPa, decametres from 500 hPa on; heights as in any winter or summer sounding
        (1000, "110", 110),
        (1000, "512", -12),
        (1000, "560", -60),
        (925, "785", 785),
        (925, "610", 610),
        (850, "470", 1470),
        (850, "230", 1230),
        (700, "012", 3012),
        (700, "820", 2820),
        (700, "180", 3180),
        (500, "560", 5600),
        (500, "492", 4920),
        (400, "722", 7220),
        (300, "918", 9180),
        (300, "860", 8600),
        (250, "039", 10390),
        (200, "182", 11820),
        (150, "365", 13650),
        (100, "622", 16220),
        (100, "580", 15800),
        (70, "849", 18490),
        (50, "060", 20600),
        (30, "390", 23900),
        (20, "642", 26420),
        (10, "105", 31050),
    ],
)
def test_standard_level_heights(pressure, hhh, height):
    """hhh of the standard levels, the figures left out put back."""
    assert standard_level_height(pressure * 100.0, hhh) == height


def test_pressures_and_positions():
    """PPP without thousands, in tenths in parts C and D; 99LaLaLa QcLoLoLoLo by quadrant (code table 3333)."""
    assert level_pressure("999", high=False) == 99900.0
    assert level_pressure("000", high=False) == 100000.0
    assert level_pressure("005", high=True) == 50.0
    assert math.isnan(level_pressure("///", high=False))
    places = [position("99415", f"{quadrant}1305") for quadrant in "1357"]
    assert places == [(130.5, 41.5), (130.5, -41.5), (-130.5, -41.5), (-130.5, 41.5)]
    with pytest.raises(GroupError, match="not a position"):
        position("99415", "21305")


def test_all_parts_make_one_column():
    """A to D in any order: surface and standard levels with heights, significant levels, winds of their own, stratosphere."""
    levels = levels_from_temp(f"ABCD01 EFGH 031200\n{PART_D}\n{PART_B}\n{PART_C}\n{PART_A}", "t.txt", near=NOON)
    sounding = sounding_from_levels(levels)
    hpa = sounding.pressure / 100.0
    expected = [
        1012,
        1000,
        980,
        950,
        930,
        925,
        890,
        850,
        800,
        760,
        700,
        540,
        500,
        400,
        300,
        255,
        250,
        211,
        200,
        150,
        100,
    ]
    np.testing.assert_allclose(hpa, [*expected, 86.6, 70, 50, 45, 30])
    assert levels.observed == datetime(2026, 11, 3, 11, 5, tzinfo=UTC)  # 8GGgg: launched at 11:05
    assert levels.station == "99999"
    # D group of the day is 53: day 3, wind in knots
    speed = np.hypot(sounding.eastward_wind, sounding.northward_wind)
    assert speed[0] == pytest.approx(8 * 1852 / 3600)
    assert speed[hpa == 255][0] == pytest.approx(90 * 1852 / 3600)  # 77255 27590: 275 degrees, 90 knots
    assert speed[hpa == 950][0] == pytest.approx(15 * 1852 / 3600)
    assert sounding.temperature[hpa == 211][0] == pytest.approx(273.15 - 61.5)  # the tropopause, 88211 61580
    assert sounding.dew_point[hpa == 760][0] == pytest.approx(273.15 - 1.7 - 6.0)
    assert not any(finding.severity == "wrong" for finding in sounding.findings)
    assert 0.0 < sounding.ground < 20.0  # 1000 hPa at 110 m, 12 hPa below it about 100 m


def test_metres_per_second_without_fifty():
    """YY below 50: the wind is in metres per second."""
    levels = levels_from_temp(PART_A.replace("53121", "03121"), "t.txt", near=NOON)
    assert levels.wind_speed[0] == 8.0


def test_levels_below_the_ground_are_left_out():
    """A mountain station at 880 hPa: 1000 and 925 hPa are given with heights and solidi only."""
    text = (
        "TTAA 53121 99998 99880 10850 24008 00098 ///// ///// 92768 ///// ///// 85479 08250 25015 70035 01350 26025 "
        "50562 18580 27040 40723 31380 27050 30919 46580 27560 25040 55380 27570 20183 60980 27080 15366 58180 27060 "
        "10623 57180 28030 88999 77999="
    )
    sounding = sounding_from_levels(levels_from_temp(text, "t.txt"))
    assert sounding.pressure[0] == 88000.0
    assert sounding.pressure.size == 10
    assert 1150.0 < sounding.ground < 1210.0  # 30 hPa below 850 hPa at 1479 m


def test_missing_groups_stay_missing():
    """Solidi for wind and humidity; the level without both temperature and wind is no level."""
    text = PART_A.replace("85470 05461 25520", "85470 054// /////").replace("70030 03366 26025", "70030 ///// /////")
    levels = levels_from_temp(text, "t.txt")
    at = list(levels.pressure / 100)
    assert math.isnan(levels.dew_point[at.index(850)])
    assert math.isnan(levels.wind_speed[at.index(850)])
    assert math.isnan(levels.temperature[at.index(700)])
    assert levels.height[at.index(700)] == 3030.0
    sounding = sounding_from_levels(levels)
    assert 70000.0 not in sounding.pressure
    assert sounding.temperature[list(sounding.pressure).index(85000.0)] == pytest.approx(273.15 + 5.4)


@pytest.mark.parametrize(
    ("indicator", "last"),
    [("7", 700), ("5", 500), ("4", 400), ("3", 300), ("2", 250), ("2", 200), ("1", 150), ("1", 100), ("/", None)],
)
def test_wind_groups_end_where_the_indicator_says(indicator, last):
    """Code table 1734: above the level of Id no wind groups stand; 2 and 1 leave open whether 250 or 200, 150 or 100."""
    surface = "15256 24008"
    levels = {1000: "00110 14656 24510", 925: "92785 10020 25018", 850: "85470 05461 25520", 700: "70030 03366 26025",
              500: "50560 19180 27040", 400: "40722 31380 27050", 300: "30918 46780 27560", 250: "25039 55380 27570",
              200: "20182 60980 27080", 150: "15365 58180 27060", 100: "10622 57180 28030"}  # fmt: skip
    body = " ".join(text if last and hpa >= last else " ".join(text.split()[:2]) for hpa, text in levels.items())
    read = levels_from_temp(f"TTAA 5312{indicator} 99999 99012 {surface} {body} 88999 77999=", "t.txt")
    assert list(read.pressure / 100) == [1012, *levels]
    assert read.findings == ()
    with_wind = np.isfinite(read.wind_speed[1:])
    assert list(with_wind) == [bool(last and hpa >= last) for hpa in levels]
    np.testing.assert_allclose(read.temperature[-1], 273.15 - 57.1)


def test_a_dropped_wind_group_costs_one_wind_only():
    """The group of 850 hPa was lost on the way: said, and the levels above stay right."""
    levels = levels_from_temp(PART_A.replace(" 25520", ""), "t.txt")
    whole = levels_from_temp(PART_A, "t.txt")
    np.testing.assert_array_equal(levels.pressure, whole.pressure)
    np.testing.assert_array_equal(levels.temperature, whole.temperature)
    assert [finding.value for finding in levels.findings] == ["wind group missing"]


def test_a_garbled_group_is_said():
    """Letters in a group: that level is left out, with a finding that it is wrong."""
    levels = levels_from_temp(PART_A.replace("03366", "O3366"), "t.txt")
    assert 70000.0 not in levels.pressure
    assert [finding.severity for finding in levels.findings] == ["wrong"]
    assert "700 hPa" in levels.findings[0].place


def test_repeated_levels_merge_and_contradictions_are_said():
    """Parts A and B both give the surface; where they differ by more than a kelvin the first stays, with a finding."""
    both = sounding_from_levels(levels_from_temp(PART_A + PART_B, "t.txt"))
    assert not any("two values" in finding.what for finding in both.findings)
    other = sounding_from_levels(levels_from_temp(PART_A + PART_B.replace("00012 15256", "00012 25256", 1), "t.txt"))
    said = [finding for finding in other.findings if "two values of temperature" in finding.what]
    assert said[0].value == "15.2 and 25.2 °C"
    assert other.temperature[0] == pytest.approx(288.35)


def test_ships_and_mobile_stations():
    """UUAA: call sign and position, at sea level. IIAA: position and elevation, code table 1845 (1 metres, 5 feet)."""
    levels = PART_A.split("99999 ", 1)[1]
    ship = levels_from_temp(f"UUAA SHIPX 53121 99415 71305 12345 {levels}", "t.txt")
    assert (ship.station, ship.longitude, ship.latitude, ship.elevation) == ("SHIPX", -130.5, 41.5, 0.0)
    mobile = levels_from_temp(f"IIAA UNIT7 53121 99415 11305 12345 03505 {levels}", "t.txt")
    assert mobile.elevation == pytest.approx(350 * 0.3048)
    np.testing.assert_array_equal(mobile.pressure, ship.pressure)


def test_stations_and_hours_are_told_apart():
    """Several soundings in one bulletin: name one, or give a time."""
    other = PART_A.replace("99999", "88888").replace("15256", "20256")
    with pytest.raises(DataFileError, match=r"soundings of 2 stations \(99999, 88888\). Name one"):
        levels_from_temp(PART_A + other, "t.txt")
    assert levels_from_temp(PART_A + other, "t.txt", station="88888").temperature[0] == pytest.approx(293.35)
    with pytest.raises(DataFileError, match="station 77777 is not in it; it holds 99999, 88888"):
        levels_from_temp(PART_A + other, "t.txt", station="77777")
    midnight = PART_A.replace("53121", "54001").replace("15256", "10256")
    with pytest.raises(DataFileError, match="soundings of 2 times"):
        levels_from_temp(PART_A + midnight, "t.txt")
    late = levels_from_temp(PART_A + midnight, "t.txt", near=datetime(2026, 11, 3, 23, tzinfo=UTC))
    assert late.temperature[0] == pytest.approx(283.35)
    assert late.observed.day in (3, 4)


@pytest.mark.parametrize(
    ("near", "expected"),
    [
        (datetime(2026, 12, 1, 2, tzinfo=UTC), datetime(2026, 11, 30, 12, tzinfo=UTC)),
        (datetime(2027, 1, 1, 2, tzinfo=UTC), datetime(2026, 12, 30, 12, tzinfo=UTC)),
        (datetime(2028, 3, 1, 2, tzinfo=UTC), datetime(2028, 3, 30, 12, tzinfo=UTC)),
    ],
)
def test_the_month_is_the_nearest(near, expected):
    """Day 30: the month before where the new one has just begun; February has none."""
    text = PART_A.replace("53121", "80121").replace("81105", "/////")
    assert levels_from_temp(text, "t.txt", near=near).observed == expected
    assert levels_from_temp(text, "t.txt").observed is None


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("TTAA 53121 99999 NIL=", r"holds no level that can be read \(NIL\?\)"),
        ("XXAA 53121 99415 71305 12345 99012 15256 24008=", "dropsonde"),
        ("PPBB 53120 99999 90012 24008=", "no part TTAA"),
        ("TTAA 99121 99999 99012 15256 24008=", "none with a day"),
        ("TTAA 53121 99999 ///// ///// /////=", "holds no level that can be read"),
        ("TTAA 5312 " * 500, "more than 400 parts"),
    ],
)
def test_what_is_no_sounding_is_refused(text, message):
    """NIL, dropsondes, other forms, impossible days, nothing but solidi, endless files."""
    with pytest.raises(DataFileError, match=message):
        levels_from_temp(text, "t.txt")


def coded(celsius, depression):
    """TTTaDD by code tables 3931 and 0777: tenths even above, odd below freezing."""
    tenths = round(abs(celsius) * 10)
    last = tenths % 10
    if celsius < 0 and last % 2 == 0:
        tenths += 1
    elif celsius >= 0 and last % 2 == 1:
        tenths -= 1
    dd = round(depression * 10) if depression <= 5.0 else 50 + round(depression)
    return f"{tenths:03d}{min(dd if not 50 < dd < 56 else 56, 99):02d}"


@settings(max_examples=100)
@given(
    st.lists(
        st.tuples(st.floats(-80, 40), st.floats(0, 49), st.integers(0, 71), st.integers(0, 199)), min_size=4, max_size=9
    ),
    st.booleans(),
)
def test_coded_levels_come_back(values, knots):
    """Round trip through an encoder of the tests: temperature within 0.1 K, depression within its step, wind exactly."""
    pressures = [1005 - 100 * i for i in range(len(values))]
    groups = []
    for i, (p, (t, d, _, _)) in enumerate(zip(pressures, values, strict=True)):
        number = 0 if i == 0 else (i - 1) % 9 + 1
        groups.append(f"{number}{number}{p % 1000:03d} {coded(t, d)}")
    winds = []
    for i, (p, (_, _, fives, speed)) in enumerate(zip(pressures, values, strict=True)):
        number = 0 if i == 0 else (i - 1) % 9 + 1
        winds.append(f"{number}{number}{p % 1000:03d} {fives // 2:02d}{speed + 500 * (fives % 2):03d}")
    text = f"TTBB {53 if knots else 3:02d}12/ 99999 {' '.join(groups)} 21212 {' '.join(winds)}="
    read = levels_from_temp(text, "t.txt")
    n = len(values)
    assert list(read.pressure[:n] / 100) == pressures
    t = np.array([value[0] for value in values])
    np.testing.assert_allclose(read.temperature[:n] - 273.15, t, atol=0.1501)
    depression = read.temperature[:n] - read.dew_point[:n]
    np.testing.assert_allclose(depression, [value[1] for value in values], atol=1.01)
    factor = 1852 / 3600 if knots else 1.0
    np.testing.assert_allclose(read.wind_speed[n:], [value[3] * factor for value in values])
    np.testing.assert_allclose(np.degrees(read.wind_from[n:]), [value[2] * 5 for value in values], atol=1e-9)


@settings(max_examples=300)
@given(
    st.lists(
        st.sampled_from(
            [*PART_A.split(), *PART_B.split(), "NIL", "=", "/////", "31313", "8//05", "99", "TTCC", "UUAA"]
        ),
        max_size=60,
    )
)
def test_shuffled_groups_never_crash(groups):
    """Groups in any order: a sounding or a message, nothing else."""
    try:
        sounding_from_levels(levels_from_temp("TTAA 53121 99999 " + " ".join(groups), "fuzz.txt", near=NOON))
    except OroliftError as error:
        assert "fuzz.txt" in str(error)


@settings(max_examples=200)
@given(st.text(alphabet="0123456789/ =\nTABCDUX99", max_size=300))
def test_any_text_after_a_part_never_crashes(text):
    """Any characters: a sounding or a message."""
    try:
        sounding_from_levels(levels_from_temp("TTAA 53121 99999 " + text, "fuzz.txt"))
    except OroliftError as error:
        assert "fuzz.txt" in str(error)
