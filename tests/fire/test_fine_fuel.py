"""Fine Fuel Moisture Code by day and hour, and the Initial Spread Index."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import OutOfRangeError
from orolift.fire.fine_fuel import (
    code_from_fuel_moisture,
    fine_fuel_code_daily,
    fine_fuel_code_hourly,
    fuel_moisture_from_code,
    initial_spread_index,
)

# Van Wagner and Pickett (1985), sample data, from memory: temperature [degC], humidity [%], wind [km/h], rain [mm], code
FIVE_DAYS = [
    (17.0, 42, 25, 0.0, 87.7),
    (20.0, 21, 25, 2.4, 86.2),
    (8.5, 40, 17, 0.0, 87.0),
    (6.5, 25, 6, 0.0, 88.8),
    (13.0, 34, 24, 0.0, 89.1),
]
# Daily table of observed indices of a state's forestry division (Minnesota, 18 April 2014), public record:
# code, wind [mph], spread index as published
STATIONS = [
    pytest.param(87.5, 7, 5.3, id="Badoura, Minnesota DNR 18 April 2014"),
    pytest.param(85.0, 9, 4.4, id="Brainerd, Minnesota DNR 18 April 2014"),
    pytest.param(88.1, 15, 11.0, id="Roseau, Minnesota DNR 18 April 2014"),
    pytest.param(66.6, 5, 0.8, id="St. Croix, Minnesota DNR 18 April 2014"),
]


def test_five_days_of_the_published_sequence():
    """Each day starts from the code of the day before, the first from 85; tolerance: one printed decimal."""
    code = 85.0
    for celsius, percent, kmh, rain, published in FIVE_DAYS:
        code = fine_fuel_code_daily(code, celsius + 273.15, percent / 100, kmh / 3.6, rain)
        np.testing.assert_allclose(code, published, atol=0.051)


@pytest.mark.parametrize(("code", "mph", "published"), STATIONS)
def test_spread_index_of_four_stations(code, mph, published):
    """tolerance: codes and indices are printed to a tenth."""
    np.testing.assert_allclose(initial_spread_index(code, mph * 0.44704), published, atol=0.06)


# By hand from the printed rates (Van Wagner 1977, from memory): degC, %, km/h, start, hours, code
HOURS = [
    (17, 42, 25, 85, 1, 85.54105),
    (17, 42, 25, 85, 24, 88.72600),
    (30, 15, 40, 88, 1, 90.28767),
    (25, 20, 40, 80, 1, 83.228),
    (25, 20, 40, 80, 2, 85.775),
    (25, 20, 40, 80, 3, 87.765),
    (25, 20, 40, 80, 6, 91.416),
    (25, 20, 40, 80, 12, 93.785),
]


@pytest.mark.parametrize(("celsius", "percent", "kmh", "start", "hours", "code"), HOURS)
def test_hours_by_hand(celsius, percent, kmh, start, hours, code):
    """tolerance: the printed digits."""
    found = fine_fuel_code_hourly(start, celsius + 273.15, percent / 100, kmh / 3.6, hours=hours)
    np.testing.assert_allclose(found, code, atol=6e-4)


@given(st.floats(0.0, 101.0))
def test_code_and_moisture_undo_each_other(code):
    """A round trip, to the 0.05 % of moisture by which the printed pair differs."""
    np.testing.assert_allclose(code_from_fuel_moisture(fuel_moisture_from_code(code)), code, atol=0.06)


@settings(max_examples=20)
@given(st.floats(0, 101), st.floats(263, 313), st.floats(0, 1), st.floats(0, 30))
def test_wetter_fuel_stays_wetter(start, temperature, humidity, wind):
    """The same air never turns the order of two fuels round."""
    wet, between, dry = (fine_fuel_code_hourly(f, temperature, humidity, wind, hours=20) for f in (0.0, start, 101.0))
    assert wet <= between + 1e-9
    assert between <= dry + 1e-9


def test_comes_to_rest_between_the_equilibria():
    """Days of the same warm wind: wet and dry starts end in one narrow band and stay there."""
    wet, dry = (fine_fuel_code_hourly(f, 298.15, 0.3, 8.0, hours=150) for f in (0.0, 101.0))
    assert 0.0 <= dry - wet < 3.0
    assert abs(fine_fuel_code_hourly(wet, 298.15, 0.3, 8.0, hours=10) - wet) < 0.05


@settings(max_examples=30)
@given(st.floats(40, 95), st.floats(273, 313), st.floats(0, 0.9), st.floats(0, 25))
def test_drier_air_never_lowers_the_code(start, temperature, humidity, wind):
    """By the day and by the hour, without rain."""
    for code in (fine_fuel_code_daily, fine_fuel_code_hourly):
        dry, damp = code(start, temperature, np.array([humidity, humidity + 0.1]), wind)
        assert dry >= damp - 1e-9


@settings(max_examples=30)
@given(st.floats(0, 101), st.floats(0, 100))
def test_rain_never_raises_the_code(start, rain):
    """More rain, wetter fuel; up to half a millimetre a day stays in the canopy."""
    dry, little, wet, wetter = fine_fuel_code_daily(start, 288.0, 0.6, 4.0, np.array([0.0, 0.5, rain, rain + 1.0]))
    assert dry == little
    assert wetter <= wet <= dry
    assert fine_fuel_code_hourly(start, 288.0, 0.6, 4.0, 0.4) <= fine_fuel_code_hourly(start, 288.0, 0.6, 4.0)


def test_soaked_fuel_takes_no_more():
    """The litter holds 250 %."""
    assert fine_fuel_code_hourly(0.0, 283.0, 1.0, 0.0, 50.0) < 1.0


@settings(max_examples=30)
@given(st.floats(0, 101), st.floats(0, 30))
def test_spread_grows_with_wind_and_code(code, wind):
    """Windier never slower."""
    assert initial_spread_index(code, wind + 1.0) >= initial_spread_index(code, wind)


def test_members_and_hours_broadcast():
    """Start (3, 1), air (4,)."""
    start = np.array([[70.0], [80.0], [90.0]])
    air = np.linspace(0.1, 0.9, 4)
    both = fine_fuel_code_daily(start, 293.15, air, 5.0)
    assert both.shape == (3, 4)
    assert both[1, 2] == fine_fuel_code_daily(80.0, 293.15, air[2], 5.0)


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: fine_fuel_code_daily(102.0, 290.0, 0.4, 5.0), "code: .* outside 0 to 101 .*Yesterday's code"),
        (lambda: fine_fuel_code_daily(-1.0, 290.0, 0.4, 5.0), "code: .* outside 0 to 101"),
        (lambda: fine_fuel_code_daily(85.0, 290.0, 0.4, -5.0), "wind: .* never negative"),
        (lambda: fine_fuel_code_hourly(85.0, 290.0, 0.4, 5.0, -1.0), "rain: .* never negative"),
        (lambda: fine_fuel_code_hourly(85.0, 290.0, 0.4, 5.0, hours=0), "hours: .* outside 1 to 1000"),
        (lambda: code_from_fuel_moisture(16.0), "moisture: .* outside 0 to 2.5"),
        (lambda: initial_spread_index(np.nan, 5.0), "code: 1 of 1"),
    ],
)
def test_refuses_what_is_out_of_range(call, message):
    """Each names the argument and the range."""
    with pytest.raises(OutOfRangeError, match=message):
        call()
