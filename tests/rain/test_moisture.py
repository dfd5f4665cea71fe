"""Scale height and sensitivity of the vapour against a table, drying ratios, box and laminar estimates against hand calculations."""

import numpy as np
import pytest

from orolift.air.column_build import air_from_station
from orolift.air.lapse import saturated_lapse_rate
from orolift.constants import GRAVITY
from orolift.errors import OutOfRangeError
from orolift.rain.closed_forms import bell_ridge_efficiency
from orolift.rain.laminar import laminar_rain, laminar_rain_of_one_layer, laminar_rain_of_two_streamlines
from orolift.rain.moisture import (
    moist_stability_squared,
    saturated_vapour_density,
    uplift_sensitivity,
    vapour_scale_height,
)
from orolift.rain.upslope import drying_ratio_bound, drying_ratio_upslope, precipitation_efficiency, raw_upslope

ZERO = 273.15
HOURLY = 3600.0
CONSTANT_LATENT_HEAT = 2.5008e6  # J kg-1, as in the table

# Worked out separately from the equations of Smith and Barstad (2004) at 1000 hPa, with the saturation pressure of
# Bolton (1980), L = 2.5008e6, Rv = 461.5, Rd = 287.05, cp = 1004.7:
# T [deg C], saturated vapour density, saturated lapse rate [K/km], Cw and Hw at 5.8 K/km, Cw and Hw at 6.5 K/km, Hw at the saturated rate
TABLE = [
    (-10, 0.002361, 7.667, 0.00312, 2203, 0.00279, 1966, 1667),
    (-5, 0.003410, 7.091, 0.00417, 2288, 0.00372, 2041, 1871),
    (0, 0.004849, 6.475, 0.00541, 2374, 0.00483, 2118, 2127),
    (5, 0.006794, 5.851, 0.00685, 2462, 0.00612, 2197, 2440),
    (10, 0.009391, 5.253, 0.00850, 2551, 0.00759, 2276, 2817),
    (15, 0.012814, 4.704, 0.01039, 2642, 0.00927, 2357, 3258),
    (20, 0.017274, 4.220, 0.01257, 2734, 0.01121, 2440, 3758),
    (25, 0.023020, 3.808, 0.01511, 2828, 0.01349, 2524, 4308),
]


@pytest.mark.parametrize("row", TABLE, ids=lambda row: f"{row[0]} deg C")
def test_table_of_scales(row):
    """rtol 1 %: other constants and saturation formula; 1.5 % where the saturated lapse rate enters, which is 0.7 % off by them."""
    celsius, density, rate, cw58, hw58, cw65, hw65, hw_saturated = row
    t = celsius + ZERO
    ours = saturated_lapse_rate(1.0e5, t, freezing=False)
    assert saturated_vapour_density(t) == pytest.approx(density, rel=0.01)
    assert ours * 1000 == pytest.approx(rate, rel=0.015)
    for lapse, cw, hw in ((0.0058, cw58, hw58), (0.0065, cw65, hw65)):
        assert vapour_scale_height(t, lapse, latent_heat=CONSTANT_LATENT_HEAT) == pytest.approx(hw, rel=0.01)
        assert uplift_sensitivity(t, lapse, rate / 1000) == pytest.approx(cw, rel=0.01)
        assert uplift_sensitivity(t, lapse, ours) == pytest.approx(cw, rel=0.015)
    assert vapour_scale_height(t, rate / 1000, latent_heat=CONSTANT_LATENT_HEAT) == pytest.approx(
        hw_saturated, rel=0.01
    )


def test_scale_height_near_the_usual_one():
    """280 K, 5.8 K/km, L = 2.5e6: 2492.6 m; Smith and Barstad (2004) use 2500 m. Our Rv is 461.52, not 461: 0.12 %."""
    assert vapour_scale_height(280.0, 0.0058, latent_heat=2.5e6) == pytest.approx(2492.6, rel=1.5e-3)


def test_moist_stability_changes_sign_at_the_saturated_rate():
    """Positive below it, zero at it."""
    np.testing.assert_allclose(moist_stability_squared(280.0, 0.005, 0.005), 0.0)
    assert moist_stability_squared(280.0, 0.0045, 0.0055) == pytest.approx(GRAVITY / 280.0 * 1e-3, rel=1e-12)


@pytest.mark.parametrize(
    ("relief", "ratio"), [(500, 0.182), (1000, 0.330), (1500, 0.452), (2000, 0.552), (2500, 0.633), (3000, 0.700)]
)
def test_exponential_drying_bound(relief, ratio):
    """1 - exp(-h / 2493 m), by hand to three decimals."""
    assert drying_ratio_bound(relief, 2493.0) == pytest.approx(ratio, abs=6e-4)


def test_drying_ratio_falls_with_warmth():
    """By 2.2, 2.7, 2.9, 2.8 % per kelvin at -10, 0, 10, 20 degrees, lapse rate fixed (worked out from the table's
    equations); that it falls is what Kirshbaum and Smith (2008) and Eidhammer et al. (2018) report. abs 0.15 %/K.
    """
    for celsius, slope in ((-10, -2.2), (0, -2.7), (10, -2.9), (20, -2.8)):
        t = celsius + ZERO + np.array([-0.5, 0.5])
        ratio = saturated_lapse_rate(1.0e5, t, freezing=False) / 0.0065
        dried = drying_ratio_upslope(1000.0, vapour_scale_height(t, 0.0065, latent_heat=CONSTANT_LATENT_HEAT), ratio)
        assert 100 * np.diff(np.log(dried))[0] == pytest.approx(slope, abs=0.15)


def test_bound_with_waves_is_lower():
    """Uplift that weakens aloft takes less."""
    assert drying_ratio_bound(1500.0, 2500.0) * bell_ridge_efficiency(0.83) < drying_ratio_bound(1500.0, 2500.0)


@pytest.mark.parametrize(
    ("conversion", "fallout", "advection", "efficiency"),
    [(1000, 1000, 2000, 0.44444), (500, 1500, 2000, 0.45714), (1000, 1000, 667, 0.16010)],
)
def test_box_efficiency(conversion, fallout, advection, efficiency):
    """By hand; five decimals."""
    assert precipitation_efficiency(conversion, fallout, advection) == pytest.approx(efficiency, abs=6e-6)


def test_raw_upslope_by_hand():
    """0.006794 kg m-3, 15 m/s up a slope of 0.02: 7.338 mm/h; a north wind up a slope that rises southward the same."""
    from orolift.rain.parameters import RainParameters

    rise = 20.0 * np.arange(9.0) * np.ones((9, 1))
    east = RainParameters(15.0, 0.0, 0.005, 2500.0, 0.006794)
    np.testing.assert_allclose(raw_upslope(rise, (1e3, 1e3), east) * HOURLY, 7.338, atol=1e-3)
    south = RainParameters(0.0, -15.0, 0.005, 2500.0, 0.006794)
    np.testing.assert_allclose(raw_upslope(rise.T, (500.0, 1e3), south) * HOURLY, 7.338, atol=1e-3)


def test_laminar_estimates_by_hand():
    """Examples made for this test, the first also from the rule 0.0102 V dp (w1 - w2) / Y in km/h, hPa, g/kg, km."""
    found = laminar_rain_of_two_streamlines(20.0, 10e3, 0.010, 0.006, 40e3) * HOURLY
    assert found == pytest.approx(7.34196, rel=1e-5)
    assert found == pytest.approx(0.0102 * 72 * 100 * 4 / 40, rel=1e-3)
    assert laminar_rain_of_one_layer(20.0, 25.0, 17.0, 15e3, 12e3, 40e3) * HOURLY == pytest.approx(6.75, rel=1e-12)


def test_laminar_estimate_of_a_column_stays_between_its_bounds():
    """Over a ridge that lifts all air by the height of the crest more would fall; without lifting nothing does."""
    air = air_from_station(0.0, 1.0e5, 283.15, 0.0077, 15.0, 1.5 * np.pi, lapse_rate=0.0055)
    east = np.pi / 2
    rates = [laminar_rain(air, east, 0.0, crest, 40e3) for crest in (300.0, 800.0, 1500.0, 2500.0)]
    assert np.all(np.diff(rates) > 0.0)
    flux = 15.0 * 22.0  # vapour of about 22 kg m-2
    assert 0.3 * drying_ratio_bound(1500.0, 2500.0) < rates[2] * 40e3 / flux < drying_ratio_bound(1500.0, 2500.0)
    assert laminar_rain(air, -east, 0.0, 1500.0, 40e3) == 0.0
    assert laminar_rain(air, east, 0.0, 1500.0, 80e3) == pytest.approx(rates[2] / 2, rel=1e-12)
    drier = air_from_station(0.0, 1.0e5, 283.15, 0.004, 15.0, 1.5 * np.pi, lapse_rate=0.0055)
    assert laminar_rain(drier, east, 0.0, 500.0, 40e3) == 0.0


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: vapour_scale_height(20.0, 0.0065), "temperature: 1 of 1"),
        (lambda: vapour_scale_height(280.0, 6.5), "divide K per km by 1000"),
        (lambda: drying_ratio_bound(-5.0, 2500.0), "relief"),
        (lambda: laminar_rain_of_two_streamlines(20.0, 10e3, 10.0, 6.0, 40e3), "divide g per kg by 1000"),
        (lambda: precipitation_efficiency(1000.0, 1000.0, 0.0), "advection_time"),
    ],
)
def test_numbers_out_of_range(call, message):
    """Named, with the likely cause."""
    with pytest.raises(OutOfRangeError, match=message):
        call()
