"""Equivalent and wet-bulb potential temperature against Bolton's and Davies-Jones' equations."""

import numpy as np
import pytest

from orolift.air.lapse import pseudoadiabat_temperature
from orolift.air.parcel import Parcel, ascent, moved_to
from orolift.air.potential import (
    equivalent_potential_temperature,
    equivalent_potential_temperature_bolton_1980,
    equivalent_potential_temperature_bolton_1980_eq_39,
    reversible_equivalent_potential_temperature,
    wet_bulb_potential_temperature,
    wet_bulb_potential_temperature_davies_jones_2008,
)
from orolift.air.saturation import saturation_mixing_ratio
from orolift.constants import KAPPA
from orolift.errors import OutOfRangeError

# Saturated at 1000 hPa: Celsius; equivalent potential temperature [K] from Bolton (1980) eq. 43 and eq. 39, evaluated
# with the paper's own saturation pressure; wet-bulb potential temperature [C] from eq. 43 by Davies-Jones (2008) eq. 3.8
SATURATED = [
    (0.0, 283.64, 283.59, 0.025),
    (4.0, 291.18, 291.13, 4.021),
    (8.0, 299.78, 299.75, 8.015),
    (12.0, 309.77, 309.75, 12.008),
    (16.0, 321.53, 321.52, 16.001),
    (20.0, 335.59, 335.60, 19.996),
    (24.0, 352.68, 352.71, 23.996),
    (28.0, 373.80, 373.80, 28.000),
    (30.0, 386.29, 386.26, 30.004),
]
# hPa, Celsius, g per kg; equivalent potential temperature [K] by eq. 43 and 39; wet-bulb potential temperature [C]
STATES = [
    (1000.0, 20.0, 7.728, 315.570, 315.545, 14.063),
    (850.0, 20.0, 15.469, 353.892, 353.921, 24.250),
    (900.0, 10.0, 6.086, 309.510, 309.475, 11.912),
    (700.0, 0.0, 3.772, 314.166, 314.124, 13.582),
    (1000.0, 30.0, 14.884, 347.523, 347.546, 22.871),
    (1000.0, 25.0, 15.228, 342.555, 342.573, 21.724),
    (900.0, 15.0, 8.064, 320.675, 320.654, 15.734),
    (850.0, 10.0, 6.036, 314.534, 314.500, 13.709),
]


@pytest.mark.parametrize(("hectopascal", "celsius", "gram", "eq_43", "eq_39", "wet_bulb"), STATES)
def test_bolton_and_davies_jones_give_their_numbers(hectopascal, celsius, gram, eq_43, eq_39, wet_bulb):
    """The equations as printed; 0.01 K for the rounded mixing ratio and eq. 21 in place of eq. 15."""
    state = (hectopascal * 100.0, celsius + 273.15, gram / 1000.0)
    np.testing.assert_allclose(equivalent_potential_temperature_bolton_1980(*state), eq_43, atol=0.012)
    np.testing.assert_allclose(equivalent_potential_temperature_bolton_1980_eq_39(*state), eq_39, atol=0.012)
    np.testing.assert_allclose(wet_bulb_potential_temperature_davies_jones_2008(eq_43) - 273.15, wet_bulb, atol=1e-3)


@pytest.mark.parametrize(("hectopascal", "celsius", "gram", "eq_43", "eq_39", "wet_bulb"), STATES)
def test_our_integration_agrees_with_both(hectopascal, celsius, gram, eq_43, eq_39, wet_bulb):
    """0.1 K: the two published fits differ by 0.05 K, our constants by as much again; wet bulb 0.05 K."""
    state = (hectopascal * 100.0, celsius + 273.15, gram / 1000.0)
    ours = equivalent_potential_temperature(*state)
    np.testing.assert_allclose(ours, eq_43, atol=0.1)
    np.testing.assert_allclose(ours, eq_39, atol=0.1)
    np.testing.assert_allclose(wet_bulb_potential_temperature(*state) - 273.15, wet_bulb, atol=0.05)


@pytest.mark.parametrize(("celsius", "eq_43", "eq_39", "wet_bulb"), SATURATED)
def test_saturated_air_agrees_with_both(celsius, eq_43, eq_39, wet_bulb):
    """0.12 K: the saturation pressure at 24-30 C adds 0.04 K to what the fits differ by."""
    t = celsius + 273.15
    r = saturation_mixing_ratio(1e5, t, freezing=False)
    ours = equivalent_potential_temperature(1e5, t, r)
    np.testing.assert_allclose(ours, eq_43, atol=0.12)
    np.testing.assert_allclose(ours, eq_39, atol=0.12)
    np.testing.assert_allclose(wet_bulb_potential_temperature_davies_jones_2008(ours) - 273.15, celsius, atol=0.05)
    np.testing.assert_allclose(wet_bulb_potential_temperature_davies_jones_2008(eq_43) - 273.15, wet_bulb, atol=5e-3)


@pytest.mark.parametrize("freezing", [True, False])
def test_wet_bulb_round_trip(freezing):
    """Saturated air on a pseudoadiabat has the temperature at its foot; 0.02 K is the error of the longer steps."""
    foot = np.array([268.0, 278.0, 288.0, 298.0])
    for p in (85e3, 60e3, 35e3):
        t = pseudoadiabat_temperature(1e5, foot, p, freezing=freezing)
        r = saturation_mixing_ratio(p, t, freezing=freezing)
        found = wet_bulb_potential_temperature(p, t, r, freezing=freezing)
        np.testing.assert_allclose(found, foot, atol=0.02 if freezing else 0.003)


@pytest.mark.parametrize("freezing", [True, False])
def test_ascent_without_condensate_keeps_both(freezing):
    """Pseudoadiabatic ascent, through condensation, changes neither by more than the steps do."""
    parcel = Parcel(np.full(3, 95e3), np.array([275.0, 287.15, 300.0]), np.array([0.003, 0.008, 0.015]), np.zeros(3))
    up, _ = ascent(parcel, 40e3, removed_share=1.0, freezing=freezing, steps=100)
    for function in (equivalent_potential_temperature, wet_bulb_potential_temperature):
        before = function(parcel.pressure, parcel.temperature, parcel.vapour, freezing=freezing)
        after = function(up.pressure, up.temperature, up.vapour, freezing=freezing)
        np.testing.assert_allclose(after, before, atol=0.05 if freezing else 0.003)


def test_reversible_move_keeps_the_reversible_one():
    """And with all the water as vapour or cloud it is the same function of the same air."""
    parcel = Parcel(np.full(3, 95e3), np.array([275.0, 287.15, 300.0]), np.array([0.003, 0.008, 0.015]), np.zeros(3))
    before = reversible_equivalent_potential_temperature(parcel.pressure, parcel.temperature, parcel.vapour)
    for p in (80e3, 40e3):
        up = moved_to(parcel, p, freezing=False)
        after = reversible_equivalent_potential_temperature(up.pressure, up.temperature, up.vapour, up.cloud)
        np.testing.assert_allclose(after, before, rtol=1e-13)


def test_dry_air_has_its_potential_temperature():
    """All three are the potential temperature of dry air by Poisson's equation; 1e-7 for the trace of vapour."""
    p, t = np.array([9e4, 5e4]), np.array([280.0, 250.0])
    theta = t * (1e5 / p) ** KAPPA
    np.testing.assert_allclose(equivalent_potential_temperature(p, t, 0.0), theta, rtol=1e-7)
    np.testing.assert_allclose(reversible_equivalent_potential_temperature(p, t, 0.0), theta, rtol=1e-13)


def test_heat_of_fusion_raises_it():
    """Freezing gives heat to air that condenses below 0 C; nothing to compare with but the sign and the size.

    Freezing all the vapour of saturated air at 0 C (3.8 g per kg) can warm by no more than its heat of fusion, 1.3 K times 1.0-1.6.
    """
    r = saturation_mixing_ratio(1e5, 273.16)
    with_ice = equivalent_potential_temperature(1e5, 273.16, r, freezing=True)
    gain = with_ice - equivalent_potential_temperature(1e5, 273.16, r)
    assert 0.0 < gain < 1.3 * 1.6


def test_out_of_range_is_refused():
    """Wrong units are named; a fit is not stretched beyond its range."""
    with pytest.raises(OutOfRangeError, match="temperature: 1 of 1 values lie outside 120 to 340 K"):
        equivalent_potential_temperature(9e4, 15.0, 0.005)
    with pytest.raises(OutOfRangeError, match=r"mixing_ratio: 1 of 1 values lie outside 1e-06 to 0\.05"):
        equivalent_potential_temperature_bolton_1980(9e4, 288.0, 5.0)
    with pytest.raises(OutOfRangeError, match="equivalent_potential_temperature: 1 of 1 values lie outside 257 to 420"):
        wet_bulb_potential_temperature_davies_jones_2008(25.0)
