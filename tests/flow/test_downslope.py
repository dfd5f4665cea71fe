"""Pressure-difference wind, wind near the ground, inversions, estimates side by side, windstorm conditions."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import OutOfRangeError
from orolift.flow.downslope import (
    WindEstimate,
    finite_amplitude_estimates,
    gap_wind,
    hydraulic_estimate,
    lee_wind_range,
    pressure_difference_wind,
    pressure_limit,
    transitional_estimate,
)
from orolift.flow.inversion import Inversion, strongest_inversion
from orolift.flow.surface_wind import gust_range, wind_near_ground
from orolift.flow.windstorm import Setting, windstorm_conditions

# pressure drop [Pa], density [kg m-3], wind before and after [m s-1]; Stull 2015 eq. 17.35 worked by hand
BERNOULLI = [(500.0, 1.1, 5.0, 30.56), (1000.0, 1.1, 0.0, 42.64), (1000.0, 1.1, 10.0, 43.80), (300.0, 1.2, 10.0, 24.49)]


@pytest.mark.parametrize(("drop", "density", "wind", "expected"), BERNOULLI)
def test_pressure_difference_wind(drop, density, wind, expected):
    """To the printed digits."""
    assert float(pressure_difference_wind(drop, density, wind)) == pytest.approx(expected, abs=0.01)


def test_a_rise_of_pressure_can_stop_the_air():
    """No imaginary wind."""
    assert float(pressure_difference_wind(-1000.0, 1.1, 10.0)) == 0.0


@pytest.mark.parametrize(("entraining", "expected"), [(1.0, 28.04), (2.8, 17.99)])
def test_gap_wind(entraining, expected):
    """10 hPa over 100 km, Cd 0.01, 1000 m deep (form of Overland and Walter 1981), worked by hand."""
    assert float(gap_wind(0.01, 1.1, 0.0, 100e3, entraining=entraining)) == pytest.approx(expected, abs=0.01)


def test_gap_wind_without_friction_is_the_pressure_difference_wind():
    """Limit: a short way and little drag."""
    found = gap_wind(0.1, 1.1, 5.0, 5e3, drag_coefficient=1e-4, depth=5000.0, entraining=1.0)
    assert float(found) == pytest.approx(float(pressure_difference_wind(500.0, 1.1, 5.0)), rel=1e-3)


def test_logarithmic_law():
    """By hand: ln(100) / ln(1000) = 2/3 from 100 m to 10 m over a roughness of 0.1 m; round trip."""
    assert float(wind_near_ground(30.0, 100.0, roughness=0.1)) == pytest.approx(20.0)
    low = wind_near_ground(30.0, 100.0, roughness=0.1)
    back = low * np.log(100.0 / 0.1) / np.log(10.0 / 0.1)
    assert float(back) == pytest.approx(30.0)
    with pytest.raises(OutOfRangeError, match="height: 1 of 1"):
        wind_near_ground(10.0, 5.0)


@settings(deadline=None)
@given(st.floats(0.0, 50.0), st.floats(0.0, 80.0), st.floats(1e-3, 1.0))
def test_gusts_are_stronger_than_the_mean(mean, aloft, roughness):
    """Law: low end at least the mean, high end at least the low end and the wind aloft."""
    low, high = gust_range(mean, aloft, roughness=roughness)
    assert mean <= low <= high
    assert high >= aloft


def test_strongest_inversion_by_hand():
    """Two inversions: the stronger is taken, with its middle, depth and the temperature below."""
    z = [0.0, 200.0, 1000.0, 1100.0, 1300.0, 3000.0]
    theta = [285.0, 288.0, 290.0, 293.0, 296.0, 302.0]
    found = strongest_inversion(z, theta, 0.0, 3000.0)
    assert found == Inversion(1150.0, 300.0, 6.0, 290.0)
    assert strongest_inversion(z, theta, 0.0, 500.0) == Inversion(100.0, 200.0, 3.0, 285.0)
    assert strongest_inversion([0.0, 5000.0], [285.0, 305.0], 0.0, 5000.0) is None


X = np.arange(-150e3, 150e3, 500.0)


def test_estimates_use_the_published_theories():
    """Long at N h / U = 0.5: 1.335 U (1 %); Smith at 0.5: 2.975 U; one layer at F = 0.5, M = 0.3: 2.5767 U."""
    bell = 500.0 / (1.0 + (X / 10e3) ** 2)
    (found,) = finite_amplitude_estimates(bell[np.newaxis], 500.0, [0.01], [10.0])
    assert found.wind == pytest.approx(13.35, rel=0.01)
    assert transitional_estimate(0.01, 10.0, 500.0, [3545.9]).wind == pytest.approx(29.75, rel=1e-3)
    jump = 0.2 * 290.0 / 9.80665
    layer = Inversion(1000.0, 100.0, jump, 290.0)
    assert hydraulic_estimate(layer, 0.5 * np.sqrt(200.0), 0.0, 300.0).wind == pytest.approx(
        2.5767 * 0.5 * np.sqrt(200.0), rel=1e-3
    )


def test_estimates_keep_silent_outside_their_theory():
    """Overturning waves, no mixed layer where it must be, too high a ridge, a blocked layer."""
    high = 900.0 / (1.0 + (X[np.newaxis] / 10e3) ** 2)
    assert finite_amplitude_estimates(high, 500.0, [0.01], [10.0]) == (None,)
    assert transitional_estimate(0.01, 10.0, 500.0, [500.0]) is None
    assert transitional_estimate(0.01, 10.0, 500.0, []) is None
    assert transitional_estimate(0.01, 10.0, 1500.0, [3500.0]) is None
    assert hydraulic_estimate(Inversion(1000.0, 100.0, 8.0, 290.0), 3.0, 0.0, 1500.0) is None
    assert hydraulic_estimate(Inversion(1000.0, 100.0, 8.0, 290.0), 5.0, 990.0, 1500.0) is None


def test_range_spans_estimates_and_stops_at_limits():
    """Estimates widen it both ways, upper ends upward, limits cut it, never below the streamline wind."""
    estimate, upper = WindEstimate("a", "a", 12.0, "estimate", "s"), WindEstimate("b", "b", 40.0, "upper end", "s")
    assert lee_wind_range(15.0, []) == (15.0, 15.0)
    assert lee_wind_range(15.0, [estimate, upper]) == (12.0, 40.0)
    assert lee_wind_range(15.0, [upper, pressure_limit(500.0, 1.1, 5.0)])[1] == pytest.approx(30.56, abs=0.01)
    assert lee_wind_range(15.0, [upper, pressure_limit(10.0, 1.1, 5.0)]) == (15.0, 15.0)


def test_a_textbook_windstorm_meets_every_condition():
    """All known and favourable."""
    setting = Setting(
        crest_wind=18.0,
        angle_off_normal=0.2,
        wind_well_above=10.0,
        relief=1500.0,
        lee_slope=0.1,
        nondimensional_height=1.0,
        inversion_above_crest=200.0,
        crest_n=0.02,
        upper_n=0.01,
        critical_level_above_crest=3000.0,
        tropopause_factor=1.8,
    )
    assert all(one.met for one in windstorm_conditions(setting))


def test_unknown_is_neither_true_nor_false():
    """Nothing known: every condition is open, and each has a source."""
    found = windstorm_conditions(Setting())
    assert all(one.met is None for one in found)
    assert all(one.source and one.statement.endswith(".") for one in found)


def test_unfavourable_air_meets_none():
    """Weak wind along a low, gentle range, no inversion, wind growing with height."""
    setting = Setting(5.0, 1.0, 30.0, 300.0, 0.01, 0.2, np.inf, 0.01, 0.012, np.inf, 0.6)
    assert not any(one.met for one in windstorm_conditions(setting))
