"""Rain or snow: two published fits against each other, limits, and the snow level of columns."""

import numpy as np
import pytest

from orolift.air.column_build import air_from_station
from orolift.air.snow_share import snow_share_from_wet_bulb
from orolift.errors import OutOfRangeError
from orolift.rain.snow import (
    snow_by_height,
    snow_on_ground,
    snow_share_jennings_2018,
)

ZERO = 273.15


def half_way(share):
    """Temperature [deg C] at which half is snow."""
    t = np.linspace(-5.0, 8.0, 13001)
    return t[np.argmin(np.abs(share(t + ZERO) - 0.5))]


def test_two_fits_agree_in_saturated_air():
    """There the wet bulb is the temperature: 0.81 (Wang et al. 2019) and 0.74 degrees (Jennings et al. 2018).

    The two were made from other data in other variables; 0.15 K is their difference and some more, so a wrong
    digit in either fails.
    """
    wang = half_way(snow_share_from_wet_bulb)
    jennings = half_way(lambda t: snow_share_jennings_2018(t, 1.0))
    assert wang == pytest.approx(0.81, abs=0.02)
    assert jennings == pytest.approx(0.74, abs=0.02)
    assert abs(wang - jennings) < 0.15


def test_two_fits_agree_in_dry_air_through_the_wet_bulb():
    """At half the humidity snow is as likely as rain at 3.9 degrees (Jennings et al.); the wet bulb is then near 0.5.

    Tolerance 0.6 K: the fits' own scatter.
    """
    from orolift.air.humidity import mixing_ratio_from_relative_humidity
    from orolift.air.wet_bulb import wet_bulb_from_mixing_ratio

    warm = half_way(lambda t: snow_share_jennings_2018(t, 0.5)) + ZERO
    assert warm - ZERO == pytest.approx(3.93, abs=0.02)
    wet_bulb = wet_bulb_from_mixing_ratio(9.0e4, warm, mixing_ratio_from_relative_humidity(9.0e4, warm, 0.5))
    assert wet_bulb - ZERO == pytest.approx(0.81, abs=1.4)


def test_range_of_thresholds():
    """Jennings et al. (2018), abstract (from memory): thresholds of -0.4 to 2.4 degrees at 95 % of stations.

    Precipitation falls at 75 to 100 % humidity, to which the fit gives 0.74 to 2.3 degrees.
    """
    for humidity in (0.75, 0.85, 1.0):
        assert -0.4 < half_way(lambda t, h=humidity: snow_share_jennings_2018(t, h)) < 2.4


def test_cold_is_snow_and_warm_is_rain():
    """Both fall with temperature; far off they are 1 and 0 without overflow."""
    t = np.linspace(233.15, 313.15, 200)
    for share in (snow_share_from_wet_bulb(t), snow_share_jennings_2018(t, 0.9)):
        assert share[0] == pytest.approx(1.0, abs=1e-6)
        assert share[-1] == pytest.approx(0.0, abs=1e-6)
        assert np.all(np.diff(share) <= 0.0)
    np.testing.assert_array_equal(snow_share_from_wet_bulb([273.0, 275.0], threshold=274.15), [1.0, 0.0])


def test_snow_level_of_a_saturated_column():
    """10 degrees at sea level, 5 K per km: 0.81 degrees at (10 - 0.81) / 5 = 1.838 km, melting from 2 km.

    Tolerance 40 m: the air is 99 % saturated, so that its wet bulb is a little lower.
    """
    from orolift.air.humidity import mixing_ratio_from_relative_humidity

    vapour = mixing_ratio_from_relative_humidity(1.0e5, 283.15, 1.0)
    air = air_from_station(0.0, 1.0e5, 283.15, vapour, 10.0, 0.0, lapse_rate=0.005)
    found = snow_by_height(air, 0.0, 4000.0)
    assert found.snow_level == pytest.approx(1838.0, abs=40.0)
    assert found.melting_level == pytest.approx(2000.0, abs=20.0)
    other = snow_by_height(air, 0.0, 4000.0, jennings=True)
    assert other.snow_level == pytest.approx((10.0 - 0.74) / 5.0 * 1000.0, abs=40.0)
    ground = np.array([[0.0, 1838.0], [3500.0, np.nan]])
    share = snow_on_ground(ground, found)
    assert share[0, 0] < 1e-6
    assert share[0, 1] == pytest.approx(0.5, abs=0.1)
    assert share[1, 0] == pytest.approx(1.0, abs=1e-4)
    assert np.isnan(share[1, 1])
    sharp = snow_by_height(air, 0.0, 4000.0, threshold=274.15)
    assert set(np.unique(sharp.share)) == {0.0, 1.0}
    assert sharp.snow_level == pytest.approx(1800.0, abs=40.0)


def test_columns_that_are_all_snow_or_all_rain():
    """The snow level is the lowest or the highest height asked for."""
    cold = air_from_station(0.0, 1.0e5, 263.15, 0.001, 10.0, 0.0)
    assert snow_by_height(cold, 0.0, 1000.0).snow_level == 0.0
    warm = air_from_station(0.0, 1.0e5, 298.15, 0.015, 10.0, 0.0)
    assert snow_by_height(warm, 0.0, 1000.0).snow_level == 1000.0
    assert snow_by_height(warm, 500.0, 500.0).share.size >= 2


def test_dry_air_lets_snow_down_further():
    """The same temperature, half the vapour: a lower snow level."""
    moist = air_from_station(0.0, 1.0e5, 281.15, 0.0065, 10.0, 0.0)
    dry = air_from_station(0.0, 1.0e5, 281.15, 0.0030, 10.0, 0.0)
    assert snow_by_height(dry, 0.0, 3000.0).snow_level < snow_by_height(moist, 0.0, 3000.0).snow_level - 200.0


def test_celsius_and_per_cent_are_refused():
    """With what to do."""
    with pytest.raises(OutOfRangeError, match=r"add 273\.15"):
        snow_share_from_wet_bulb(1.0)
    with pytest.raises(OutOfRangeError, match="not per cent"):
        snow_share_jennings_2018(274.0, 80.0)
