"""Columns through several stations."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.air.column import interpolated
from orolift.air.column_build import CrestWind, air_from_station
from orolift.air.humidity import mixing_ratio_from_relative_humidity, relative_humidity_from_mixing_ratio
from orolift.air.hydrostatic import hydrostatic_height
from orolift.air.ladder import LadderStation, air_from_ladder
from orolift.air.temperature import virtual_temperature
from orolift.errors import IncomingAirError, OutOfRangeError

VALLEY = LadderStation(420.0, 287.0, 0.75, 96500.0, 2.0, 3.0)
SLOPE = LadderStation(1130.0, 284.5, 0.6, None, 6.0, 2.0)
PASS = LadderStation(1910.0, 278.0, 0.9, None, 12.0, 0.0)


def test_every_station_is_met():
    """Temperature, humidity, wind and the one pressure at their heights; levels in between say so."""
    air = air_from_ladder([PASS, VALLEY, SLOPE])
    for one in (VALLEY, SLOPE, PASS):
        at = interpolated(air, one.elevation)
        assert float(at.temperature) == pytest.approx(one.temperature)
        humidity = relative_humidity_from_mixing_ratio(at.pressure, at.temperature, at.vapour)
        assert float(humidity) == pytest.approx(one.relative_humidity, rel=1e-6)
        assert float(at.eastward_wind) == pytest.approx(one.eastward_wind)
    assert air.pressure[0] == pytest.approx(96500.0)
    assert air.origin.count("station") == 3
    assert air.origin[1] == "between stations"
    assert air.height[-1] == 20000.0


def test_above_the_highest_the_default_lapse():
    """6.5 K per km from the pass on, or the rate that is given."""
    assert float(interpolated(air_from_ladder([VALLEY, PASS]), 3910.0).temperature) == pytest.approx(278.0 - 13.0)
    steep = air_from_ladder([VALLEY, PASS], lapse_rate=0.009)
    assert float(interpolated(steep, 2910.0).temperature) == pytest.approx(269.0)


@settings(max_examples=30)
@given(
    st.lists(st.tuples(st.floats(0.0, 4000.0), st.floats(255.0, 300.0), st.floats(0.05, 1.0)), min_size=1, max_size=6)
)
def test_ladders_are_hydrostatic_from_the_pressure_given(rungs):
    """The law, for any stations; the pressure of the one that has it is met wherever it stands."""
    stations = [LadderStation(z, t, rh, None, 5.0, 0.0) for z, t, rh in rungs]
    last = stations[-1]
    given_pressure = 101000.0 * float(np.exp(-last.elevation / 8200.0))
    stations[-1] = LadderStation(*(last.elevation, last.temperature, last.relative_humidity), given_pressure, 5.0, 0.0)
    air = air_from_ladder(stations)
    tv = virtual_temperature(air.temperature, air.vapour, air.cloud)
    np.testing.assert_allclose(hydrostatic_height(air.pressure, tv, air.height[0]), air.height, atol=1e-5)
    assert float(interpolated(air, max(last.elevation, air.height[0])).pressure) == pytest.approx(
        given_pressure, rel=3e-3
    )


def test_one_station_is_a_station_column():
    """Limit: the same as the column from that station."""
    one = air_from_ladder([VALLEY])
    r = mixing_ratio_from_relative_humidity(96500.0, 287.0, 0.75)
    same = air_from_station(420.0, 96500.0, 287.0, r, np.hypot(2.0, 3.0), np.arctan2(-2.0, -3.0))
    np.testing.assert_allclose(one.temperature, same.temperature, rtol=1e-12)
    np.testing.assert_allclose(one.pressure, same.pressure, rtol=1e-9)
    np.testing.assert_allclose(one.eastward_wind, same.eastward_wind, atol=1e-9)


def test_pressure_may_come_from_a_higher_station():
    """The hydrostatic column from the pass down gives the same as from the valley up."""
    up = air_from_ladder([VALLEY, PASS])
    at_pass = float(interpolated(up, PASS.elevation).pressure)
    down = air_from_ladder(
        [LadderStation(420.0, 287.0, 0.75, None, 2.0, 3.0), LadderStation(1910.0, 278.0, 0.9, at_pass, 12.0, 0.0)]
    )
    assert down.pressure[0] == pytest.approx(96500.0, rel=1e-8)


def test_stations_of_one_height_count_as_their_mean():
    """Two valley stations 10 m apart."""
    twin = LadderStation(430.0, 289.0, 0.65, None, None, None)
    air = air_from_ladder([VALLEY, twin, PASS])
    assert air.temperature[0] == pytest.approx(288.0)
    assert air.origin.count("station") == 2


def test_crest_wind_goes_before_higher_stations():
    """A wind given at 1500 m, between the stations."""
    air = air_from_ladder([VALLEY, PASS], crest_wind=CrestWind(20.0, 1.5 * np.pi, 1500.0))
    wind = interpolated(air, [1500.0, 2500.0])
    np.testing.assert_allclose(wind.eastward_wind, [20.0, 20.0])


@pytest.mark.parametrize(
    ("stations", "message"),
    [
        ([], "none is given"),
        ([SLOPE, PASS], "none has a pressure"),
        ([LadderStation(420.0, 287.0, 0.75, 96500.0)], "none has a wind"),
    ],
)
def test_what_is_missing_is_said(stations, message):
    """No station, no pressure, no wind."""
    with pytest.raises(IncomingAirError, match=message):
        air_from_ladder(stations)
    with pytest.raises(OutOfRangeError, match="share, not per cent"):
        air_from_ladder([LadderStation(420.0, 287.0, 75.0, 96500.0, 2.0, 3.0)])
