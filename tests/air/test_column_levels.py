"""Columns from the levels of soundings, real and invented."""

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.air.column import column_vapour, interpolated
from orolift.air.column_build import air_from_levels
from orolift.air.humidity import mixing_ratio_from_dew_point_checked, relative_humidity_from_mixing_ratio
from orolift.air.hydrostatic import hydrostatic_height
from orolift.air.saturation import saturation_mixing_ratio
from orolift.air.temperature import virtual_temperature
from orolift.errors import IncomingAirError, OutOfRangeError

REAL = Path(__file__).parents[1] / "data" / "real_crossings"  # origin and licence in its README
PAIRS = ["pair_01", "pair_08", "pair_62"]


def real_levels(pair):
    """Arguments of `air_from_levels` from a real sounding."""
    rows = np.genfromtxt(REAL / pair / "upwind.csv", delimiter=",", skip_header=1, filling_values=np.nan)
    pressure, height, t, td, wind_from, speed = rows.T
    r, _ = mixing_ratio_from_dew_point_checked(pressure * 100, t + 273.15, td + 273.15)
    toward = np.radians(wind_from) + np.pi
    return height, pressure * 100, t + 273.15, r, speed * np.sin(toward), speed * np.cos(toward)


def invented_levels(**changes):
    """Seven levels of a plain sounding over a station at 120 m."""
    values = {
        "height": None,
        "pressure": np.array([1000e2, 950e2, 850e2, 700e2, 500e2, 400e2, 300e2]),
        "temperature": np.array([288.0, 285.0, 279.0, 270.0, 253.0, 242.0, 228.0]),
        "mixing_ratio": np.array([8.0, 7.0, 5.0, 2.5, 0.7, 0.2, 0.08]) * 1e-3,
        "eastward_wind": np.array([5.0, 8.0, 12.0, 15.0, 25.0, 30.0, 35.0]),
        "northward_wind": np.array([5.0, 4.0, 2.0, 0.0, 0.0, -5.0, -5.0]),
        "elevation": 120.0,
    }
    return values | changes


def invented(**changes):
    return air_from_levels(**invented_levels(**changes))


@pytest.mark.parametrize("pair", PAIRS)
def test_heights_agree_with_reported_heights(pair):
    """Real soundings: within 20 m to 500 hPa, which is a mean temperature 1 K off; and no note about heights."""
    height, pressure, *rest = real_levels(pair)
    air = air_from_levels(height, pressure, *rest)
    low = pressure >= 500e2
    np.testing.assert_allclose(air.height[: height.size][low], height[low], rtol=0, atol=20.0)
    assert not any("given heights" in note for note in air.notes)


@pytest.mark.parametrize("pair", PAIRS)
def test_heights_need_virtual_temperature(pair):
    """Without vapour the heights agree less well: the check above sees the difference between moist and dry air."""
    height, pressure, temperature, mixing_ratio, *_ = real_levels(pair)
    low = pressure >= 500e2
    moist = hydrostatic_height(pressure, virtual_temperature(temperature, mixing_ratio), height[0])
    dry = hydrostatic_height(pressure, temperature, height[0])
    assert np.abs(moist - height)[low].max() < np.abs(dry - height)[low].max()


@pytest.mark.parametrize("pair", PAIRS)
def test_real_soundings_are_kept_and_extended(pair):
    """Levels with their values as given, then standard air to 20 km; winds known everywhere; nothing supersaturated."""
    height, pressure, temperature, mixing_ratio, eastward, northward = real_levels(pair)
    air = air_from_levels(height, pressure, temperature, mixing_ratio, eastward, northward)
    n = height.size
    np.testing.assert_array_equal(air.pressure[:n], pressure)
    np.testing.assert_array_equal(air.temperature[:n], temperature)
    np.testing.assert_allclose(air.vapour[:n] + air.cloud[:n], mixing_ratio, rtol=1e-12)
    assert np.all(air.vapour <= saturation_mixing_ratio(air.pressure, air.temperature) * (1 + 1e-12))
    known = np.isfinite(eastward)
    np.testing.assert_array_equal(air.eastward_wind[:n][known], eastward[known])
    assert np.all(np.isfinite(air.eastward_wind))
    assert np.all(np.isfinite(air.northward_wind))
    assert air.origin[:n] == ("measured",) * n
    assert set(air.origin[n:]) == {"standard lapse above the data"}
    assert air.height[-1] == 20000.0
    assert np.diff(air.height[n - 1 :]).max() <= 500.0
    np.testing.assert_allclose(air.temperature[n:], temperature[-1], rtol=1e-12)  # the data end above 11 km
    assert np.all(np.diff(air.pressure) < 0)


def test_real_column_vapour_is_of_the_season_and_place():
    """Between 3 and 40 mm: the range of middle and high latitudes outside the tropics in radiosonde climatologies."""
    for pair in PAIRS:
        assert 3.0 < column_vapour(air_from_levels(*real_levels(pair))) < 40.0


def test_measured_winds_between_levels_are_met():
    """The measured winds of pair_01 below 3 km, also those between temperature levels, lie near the interpolated ones.

    atol 4 m/s on single winds, 1 m/s on their mean: turns between the temperature levels are lost.
    """
    height, wind_from, speed = np.genfromtxt(REAL / "pair_01" / "upwind_winds.csv", delimiter=",", skip_header=1).T
    low = height < 3000.0
    read = interpolated(air_from_levels(*real_levels("pair_01")), height[low])
    toward = np.radians(wind_from[low]) + np.pi
    off = np.hypot(read.eastward_wind - speed[low] * np.sin(toward), read.northward_wind - speed[low] * np.cos(toward))
    assert off.max() < 4.0
    assert off.mean() < 1.0


def test_air_above_the_data_follows_the_standard_lapse():
    """6.5 K per km to 11 km, then constant; humidity from its last value to 10 % at 200 hPa; wind constant."""
    air = invented()
    last = air.height[6]
    aloft = air.height > last
    expected = 228.0 - 0.0065 * (np.minimum(air.height[aloft], 11000.0) - last)
    np.testing.assert_allclose(air.temperature[aloft], expected, rtol=1e-12)
    humidity = relative_humidity_from_mixing_ratio(air.pressure, air.temperature, air.vapour)
    np.testing.assert_allclose(humidity[air.pressure < 200e2], 0.1, rtol=1e-9)
    between = (air.pressure < 300e2) & (air.pressure > 200e2)
    line = humidity[6] + (300e2 - air.pressure[between]) / 100e2 * (0.1 - humidity[6])
    np.testing.assert_allclose(humidity[between], line, rtol=1e-9)
    np.testing.assert_array_equal(air.eastward_wind[aloft], 35.0)
    assert "9." in air.notes[-1]
    assert "300 hPa" in air.notes[-1]
    assert "6.5 °C per km" in air.notes[-1]


def test_levels_above_the_top_are_kept():
    """Data that reach the top are not cut, and nothing is added."""
    pressure = np.geomspace(1000e2, 20e2, 40)
    air = air_from_levels(
        None, pressure, np.linspace(290, 210, 40), np.full(40, 1e-6), np.ones(40), np.ones(40), elevation=0.0
    )
    assert air.height.size == 40
    assert air.height[-1] > 20000.0


def test_unknown_winds_are_interpolated_in_height_by_components():
    """South 10 below and west 10 above meet half way; beyond the ends the wind is constant, and a note says so."""
    nan = np.nan
    air = invented(
        eastward_wind=np.array([nan, 0.0, nan, 10.0, nan, nan, nan]),
        northward_wind=np.array([nan, 10.0, nan, 0.0, 5.0, nan, nan]),
    )
    share = (air.height[2] - air.height[1]) / (air.height[3] - air.height[1])
    np.testing.assert_allclose(
        [air.eastward_wind[2], air.northward_wind[2]], [10 * share, 10 * (1 - share)], rtol=1e-12
    )
    np.testing.assert_array_equal(air.northward_wind[[0, 4, 6, -1]], [10.0, 0.0, 0.0, 0.0])  # half a wind is none
    assert any("known at 2 of 7 levels" in note for note in air.notes)


def test_given_heights_slightly_off_are_noted():
    """60 m at 500 hPa: noted, with the heights worked out used; 30 m: not worth a word."""
    right = invented()
    off = right.height[:7].copy()
    off[4] += 60.0
    air = invented(height=off)
    np.testing.assert_allclose(air.height, right.height, rtol=1e-12)
    assert any("60 m (at 500 hPa)" in note for note in air.notes)
    off[4] -= 30.0
    assert not any("given heights" in note for note in invented(height=off).notes)


def test_supersaturated_levels_start_with_cloud():
    """Excess over saturation is cloud at the given temperature; the note counts the levels."""
    levels = invented_levels()
    saturated = saturation_mixing_ratio(levels["pressure"], levels["temperature"])
    water = levels["mixing_ratio"].copy()
    water[2] = saturated[2] + 0.001
    air = invented(mixing_ratio=water)
    np.testing.assert_allclose(air.cloud[2], 0.001, rtol=1e-9)
    np.testing.assert_array_equal(air.temperature[:7], levels["temperature"])
    assert any("At 1 of 7 levels, the lowest at" in note for note in air.notes)


def test_superadiabatic_layer_is_noted_and_used():
    """13 K per km over the lowest 300 m is noted; the same over 30 m is not."""
    pressure = np.array([1000e2, 965e2, 850e2, 700e2, 500e2])
    temperature = np.array([300.0, 296.0, 288.0, 277.0, 257.0])
    rest = {"mixing_ratio": np.full(5, 0.002), "eastward_wind": np.ones(5), "northward_wind": np.ones(5)}
    air = invented(pressure=pressure, temperature=temperature, **rest)
    notes = [note for note in air.notes if "10.3 °C per km" in note]
    assert len(notes) == 1
    assert "120 to " in notes[0]
    assert "13 °C per km" in notes[0]
    np.testing.assert_array_equal(air.temperature[:5], temperature)
    thin = invented(
        pressure=np.array([1000e2, 996.5e2, 850e2, 700e2, 500e2]),
        temperature=np.array([297.0, 296.6, 288.0, 277.0, 257.0]),
        **rest,
    )
    assert not any("10.3 °C per km" in note for note in thin.notes)


@given(st.lists(st.floats(0.02, 0.2), min_size=12, max_size=30), st.floats(265, 305), st.floats(3e-3, 9e-3))
@settings(deadline=None, max_examples=50)
def test_columns_are_hydrostatic_to_the_top(steps, temperature, lapse):
    """The law, for any levels: heights follow from pressure and virtual temperature over data and extension alike."""
    pressure = 1e5 * np.exp(-np.concatenate([[0.0], np.cumsum(steps)]))
    pressure = pressure[pressure > 60e2]
    if pressure[-1] > 600e2:
        return
    t = np.maximum(temperature + lapse * 7500 * np.log(pressure / 1e5), 200.0)
    r = 0.5 * saturation_mixing_ratio(pressure, t)
    air = air_from_levels(None, pressure, t, r, np.ones(t.size), np.ones(t.size), elevation=50.0)
    tv = virtual_temperature(air.temperature, air.vapour, air.cloud)
    np.testing.assert_allclose(hydrostatic_height(air.pressure, tv, 50.0), air.height, rtol=1e-10)
    assert np.all(np.diff(air.height) > 0)


HEIGHTS = invented().height[:7]

REFUSED = [
    (
        {"pressure": np.array([1000e2, 850e2, 950e2, 700e2, 500e2, 400e2, 300e2])},
        r"pressure: .* level 3 of 7 has 950 hPa after 850 hPa \(1 such",
    ),
    ({"height": HEIGHTS[[0, 1, 3, 2, 4, 5, 6]]}, r"height: it must rise .* level 4 of 7"),
    ({"height": HEIGHTS / 0.3048}, r"pressure and height contradict each other: level 5 of 7, 500 hPa, .* in feet"),
    (
        {"height": HEIGHTS[0] + (HEIGHTS - HEIGHTS[0]) * 0.3048},
        r"contradict each other.* metres that were taken as feet",
    ),
    (
        {"height": HEIGHTS + np.array([0, 0, 0, 400, 0, 0, 0])},
        r"contradict each other: level 4 of 7, 700 hPa.*Check the units",
    ),
    ({"eastward_wind": np.full(7, np.nan)}, r"no level of 7 has a wind"),
    ({"eastward_wind": np.ones(6)}, r"eastward_wind: shape \(6,\), but pressure has 7 levels"),
    ({"temperature": np.full(8, 270.0)}, r"temperature: shape \(8,\)"),
    ({"elevation": None}, r"elevation: without heights"),
]


@pytest.mark.parametrize(("changes", "message"), REFUSED)
def test_contradictions_are_refused(changes, message):
    """The message names the level and the likely cause."""
    with pytest.raises(IncomingAirError, match=message):
        invented(**changes)


def test_too_few_or_too_low_levels_are_refused():
    """Three levels, or data that end 1.5 km above the ground, say nothing about a crest."""
    levels = invented_levels()
    cut = {key: value[:3] for key, value in levels.items() if isinstance(value, np.ndarray)}
    with pytest.raises(IncomingAirError, match=r"the incoming air has 3 levels; one list of at least 4"):
        invented(**cut)
    low = {key: value[:4] for key, value in levels.items() if isinstance(value, np.ndarray)}
    low["pressure"] = np.array([1000e2, 950e2, 900e2, 840e2])
    with pytest.raises(IncomingAirError, match=r"reach only 14\d\d m above the ground; at least 3000 m"):
        invented(**low)


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        (
            {"pressure": np.array([1000, 950, 850, 700, 500, 400, 300.0])},
            r"pressure of the lowest level: .*first: 1000 .*multiply hectopascals by 100",
        ),
        ({"temperature": np.array([15, 12, 6, -3, -20, -31, -45.0])}, r"temperature: 7 of 7 .*add 273\.15"),
        ({"mixing_ratio": np.array([8.0, 7.0, 5.0, 2.5, 0.7, 0.2, 0.08])}, r"mixing_ratio: 7 of 7 "),
        (
            {"mixing_ratio": np.array([0.008, np.nan, 0.005, 0.002, 0.001, 0.0002, 0.0001])},
            r"mixing_ratio: 1 of 7 .*index \(1,\)",
        ),
        ({"eastward_wind": np.array([5, 8, 12, 15, 25, 30, 350.0])}, r"eastward_wind: 1 of 7 "),
        ({"top": 5000.0}, r"top: 1 of 1 "),
    ],
)
def test_other_units_are_refused(changes, message):
    """Hectopascals, degrees Celsius and grams per kilogram are caught before anything is computed."""
    with pytest.raises(OutOfRangeError, match=message):
        invented(**changes)
