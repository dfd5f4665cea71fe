"""Static stability: published table, own thermodynamics, limits."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.air.parcel import Parcel, moved_to
from orolift.air.saturation import saturation_mixing_ratio
from orolift.constants import EPSILON, GRAVITY, R_DRY
from orolift.errors import OutOfRangeError
from orolift.flow.stability import (
    _approximate,
    dry_n_squared,
    effective_n_squared,
    moist_n_squared,
    moist_n_squared_approximate_durran_klemp_1982,
    unstable_share,
)

# pressure [Pa], temperature [K], lapse rate [K m-1], N dry [s-1], N moist squared with total water constant, and
# with total water = saturation [s-2]. Durran and Klemp (1982), J. Atmos. Sci. 39, 2152-2158, worked out by hand
# with es = 611.2 exp(17.67 (T - 273.15) / (T - 29.65)), L = 2.5e6, R = 287.04, cp = 1004.6, g = 9.81.
WORKED = [
    pytest.param(85e3, 280.0, 3.0e-3, 0.01535, 9.92e-5, 1.053e-4, id="850 hPa 280 K 3 K/km"),
    pytest.param(85e3, 280.0, 5.0e-3, 0.01286, 1.29e-5, 2.90e-5, id="850 hPa 280 K 5 K/km"),
    pytest.param(90e3, 285.0, 4.0e-3, 0.01402, 3.79e-5, 5.19e-5, id="900 hPa 285 K 4 K/km"),
]
OFFSETS = np.array([-20.0, 0.0, 20.0])


def printed_saturation(p, t):
    e = 611.2 * np.exp(17.67 * (t - 273.15) / (t - 29.65))
    return 0.62197 * e / (p - e)


def thin_column(p, t, lapse, g=9.81, r=287.04):
    temperature = t - lapse * OFFSETS
    return p * (temperature / t) ** (g / (r * lapse)), temperature


@pytest.mark.parametrize(("p", "t", "lapse", "n_dry", "n2_constant", "n2_saturated"), WORKED)
def test_approximate_form_gives_the_worked_values(p, t, lapse, n_dry, n2_constant, n2_saturated):
    """The Durran-Klemp values come out with the constants they were worked out with.

    rtol 3 %: the values are small differences and depend on the saturation formula.
    """
    pressure, temperature = thin_column(p, t, lapse)
    qs = printed_saturation(pressure, temperature)
    log_theta = np.log(temperature) - 287.04 / 1004.6 * np.log(pressure)
    slopes = [np.gradient(part, OFFSETS) for part in (log_theta, qs)]
    args = (temperature, qs, 2.5e6)
    constant = _approximate(*args, [*slopes, 0.0 * slopes[0]], 9.81, 287.04, 1004.6, 0.62197)[1]
    saturated = _approximate(*args, [*slopes, slopes[1]], 9.81, 287.04, 1004.6, 0.62197)[1]
    np.testing.assert_allclose(constant, n2_constant, rtol=0.03)
    np.testing.assert_allclose(saturated, n2_saturated, rtol=0.03)


@pytest.mark.parametrize(("p", "t", "lapse", "n_dry", "n2_constant", "n2_saturated"), WORKED)
def test_dry_stability_of_the_worked_columns(p, t, lapse, n_dry, n2_constant, n2_saturated):
    """The dry N of the same table: potential temperature of dry air, pressure falling with virtual temperature.

    rtol 5e-4: the printed digits, and 3e-4 in gravity.
    """
    virtual = 1.0 + 0.61 * printed_saturation(p, t)
    pressure, temperature = thin_column(p, t, lapse, r=287.04 * virtual)
    theta = temperature * (1e5 / pressure) ** (287.04 / 1004.6)
    np.testing.assert_allclose(np.sqrt(dry_n_squared(OFFSETS, theta)[1]), n_dry, rtol=5e-4)


@pytest.mark.parametrize(("p", "t", "lapse", "n_dry", "n2_constant", "n2_saturated"), WORKED)
def test_full_and_approximate_form_agree(p, t, lapse, n_dry, n2_constant, n2_saturated):
    """The full form differs from the approximate one by less than 5 % of the dry stability, as published."""
    pressure, temperature = thin_column(p, t, lapse)
    water = np.full(3, float(saturation_mixing_ratio(pressure, temperature).max()))
    full = moist_n_squared(OFFSETS, pressure, temperature, water)[1]
    approximate = moist_n_squared_approximate_durran_klemp_1982(OFFSETS, pressure, temperature, water)[1]
    assert abs(full - approximate) < 0.05 * n_dry**2
    assert abs(full - n2_constant) < 0.05 * n_dry**2


def density(pressure, temperature, vapour, cloud):
    return pressure / (R_DRY * temperature * (1.0 + vapour / EPSILON) / (1.0 + vapour + cloud))


# pressure [Pa], temperature [K], lapse rate [K m-1], cloud [kg kg-1], whether cloud freezes
DISPLACED = [
    pytest.param(85e3, 280.0, 5e-3, 1e-3, True, id="near neutral"),
    pytest.param(90e3, 285.0, 4e-3, 1e-4, True, id="thin cloud"),
    pytest.param(60e3, 262.0, 6e-3, 5e-4, True, id="freezing"),
    pytest.param(60e3, 262.0, 6e-3, 5e-4, False, id="supercooled"),
    pytest.param(95e3, 297.0, 4e-3, 2e-3, True, id="unstable"),
]


@pytest.mark.parametrize(("p", "t", "lapse", "cloud", "freezing"), DISPLACED)
def test_full_form_is_the_buoyancy_of_displaced_parcels(p, t, lapse, cloud, freezing):
    """Law: -g / rho times the density gradient of the column minus that of a parcel moved up and down reversibly.

    Total water constant. atol 1e-3 of a dry stability of 1e-4: the column has steps of 1 m.
    """
    z = np.array([-1.0, 0.0, 1.0])
    temperature = t - lapse * z
    water = float(saturation_mixing_ratio(p, t, freezing=freezing)) + cloud
    here = density(p, t, water - cloud, cloud)
    pressure = p - GRAVITY * here * z
    vapour = saturation_mixing_ratio(pressure, temperature, freezing=freezing)
    column = density(pressure, temperature, vapour, water - vapour)
    parcel = Parcel(np.full(2, p), np.full(2, t), np.full(2, water - cloud), np.full(2, cloud))
    moved = moved_to(parcel, pressure[[0, 2]], freezing=freezing)
    carried = density(moved.pressure, moved.temperature, moved.vapour, moved.cloud)
    expected = -GRAVITY / here * ((column[2] - column[0]) - (carried[1] - carried[0])) / 2.0
    found = moist_n_squared(z, pressure, temperature, np.full(3, water), freezing=freezing)[1]
    assert found == pytest.approx(expected, abs=1e-7)


def test_moist_stability_falls_to_the_dry_one_in_cold_air():
    """With next to no vapour the moist value is the dry one: at 200 K latent heat changes it by under 1 %."""
    height = np.array([0.0, 100.0, 200.0])
    temperature = 200.0 - 0.004 * height
    pressure = 30e3 * np.exp(-GRAVITY * height / (R_DRY * 199.8))
    theta = temperature * (1e5 / pressure) ** (287.0 / 1005.7)
    moist = moist_n_squared(height, pressure, temperature, 0.0 * height)
    np.testing.assert_allclose(moist[1], dry_n_squared(height, theta)[1], rtol=0.01)


def test_dry_stability_of_an_exponential_profile():
    """A potential temperature that grows exponentially has one N everywhere."""
    height = np.linspace(0.0, 5000.0, 51)
    np.testing.assert_allclose(dry_n_squared(height, 290.0 * np.exp(1e-4 / GRAVITY * height)), 1e-4, rtol=1e-9)


def test_unstable_air_keeps_its_sign():
    """Negative values are returned as such and counted by unstable_share."""
    height = np.array([0.0, 500.0, 1000.0, 2000.0])
    n2 = dry_n_squared(height, [300.0, 299.0, 299.5, 304.0])
    assert n2[0] < 0.0 < n2[-1]
    assert 0.2 < float(unstable_share(height, n2, 0.0, 2000.0)) < 0.6


def test_leading_axes_give_what_single_columns_give():
    """Members worked out together are the members worked out alone."""
    height = np.linspace(0.0, 3000.0, 7)
    theta = 290.0 + np.array([[0.002], [0.004]]) * height
    np.testing.assert_array_equal(dry_n_squared(height, theta)[1], dry_n_squared(height, theta[1]))


@settings(deadline=None)
@given(st.floats(0.0, 1.0), st.floats(-1e-5, 4e-4), st.floats(-1e-5, 4e-4))
def test_effective_stability_lies_between(share, dry, moist):
    """A mean of two values is between them."""
    mixed = float(effective_n_squared(dry, moist, share))
    assert min(dry, moist) - 1e-18 <= mixed <= max(dry, moist) + 1e-18


def test_bad_columns_are_refused():
    """Falling heights, degrees Celsius and hectopascals name themselves."""
    with pytest.raises(OutOfRangeError, match=r"level 2 .* is not above level 1"):
        dry_n_squared([0.0, 100.0, 50.0], [290.0, 290.0, 290.0])
    with pytest.raises(OutOfRangeError, match=r"virtual_potential_temperature: 2 of 2 values.*kelvin"):
        dry_n_squared([0.0, 100.0], [10.0, 11.0])
    with pytest.raises(OutOfRangeError, match="total_water: 2 of 2"):
        moist_n_squared([0.0, 100.0], [85e3, 84e3], [280.0, 279.0], [7.0, 7.0])


def test_epsilon_is_the_ratio_used_in_the_worked_values():
    """The worked values took 0.62197; ours differs by less than their tolerance."""
    assert abs(float(EPSILON) - 0.62197) < 1e-4
