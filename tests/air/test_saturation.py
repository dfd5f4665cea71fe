"""Saturation and latent heats against IAPWS and other people's tables."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from orolift.air import phase
from orolift.air.lambert import lower_lambert
from orolift.air.saturation import (
    dew_point,
    frost_point,
    ice_share,
    latent_heat,
    latent_heat_of_fusion,
    latent_heat_of_sublimation,
    latent_heat_of_vaporisation,
    saturation_mixing_ratio,
    saturation_vapour_pressure,
    saturation_vapour_pressure_over_ice,
    saturation_vapour_pressure_over_liquid,
)
from orolift.constants import EPSILON, R_VAPOUR
from orolift.errors import OutOfRangeError

ZERO_C = 273.15

# temperature [K], pressure [Pa], relative tolerance
LIQUID = [
    pytest.param(273.16, 611.657, 1e-12, id="triple point, IAPWS R14-08(2011) section 4"),
    pytest.param(273.15, 611.213, 2e-5, id="0 C, Murphy and Koop 2005 table C1"),
    # constant heat capacities: 0.08 % low at 300 K, so 0.15 %
    pytest.param(300.0, 3536.58941, 1.5e-3, id="300 K, IAPWS-IF97 table 35"),
    pytest.param(293.15, 2339.2, 1.5e-3, id="20 C, ASHRAE Fundamentals chapter 1 table 3"),
    pytest.param(313.15, 7384.4, 1.5e-3, id="40 C, ASHRAE Fundamentals chapter 1 table 3"),
    # supercooled: sources differ among themselves by 0.5 % to -40 C
    pytest.param(243.15, 50.9356, 5e-3, id="-30 C, Murphy and Koop 2005 eq. 10"),
    pytest.param(240.0, 37.667, 5e-3, id="240 K, Murphy and Koop 2005 table C1"),
]
ICE = [
    pytest.param(273.16, 611.657, 1e-12, id="triple point, IAPWS R14-08(2011) section 4"),
    pytest.param(273.15, 611.154, 2e-5, id="0 C, Murphy and Koop 2005 table C1"),
    pytest.param(263.15, 259.87, 3e-3, id="-10 C, ASHRAE Fundamentals chapter 1 table 3"),
    pytest.param(253.15, 103.24, 3e-3, id="-20 C, ASHRAE Fundamentals chapter 1 table 3"),
    pytest.param(240.0, 27.272, 3e-3, id="240 K, Murphy and Koop 2005 table C1"),
    pytest.param(230.0, 8.94735, 3e-3, id="230 K, IAPWS R14-08(2011) check table"),
]
# Celsius, kJ per kg: IAPWS-95, evaluated with CoolProp 8.0.0
VAPORISATION = [(0.01, 2500.91), (10.0, 2477.19), (20.0, 2453.52), (30.0, 2429.81), (40.0, 2405.98)]


@pytest.mark.parametrize(("temperature", "expected", "rtol"), LIQUID)
def test_pressure_over_liquid_is_the_published_one(temperature, expected, rtol):
    """Agrees with tables that their authors made from measurements."""
    np.testing.assert_allclose(saturation_vapour_pressure_over_liquid(temperature), expected, rtol=rtol)


@pytest.mark.parametrize(("temperature", "expected", "rtol"), ICE)
def test_pressure_over_ice_is_the_published_one(temperature, expected, rtol):
    """Agrees with tables that their authors made from measurements."""
    np.testing.assert_allclose(saturation_vapour_pressure_over_ice(temperature), expected, rtol=rtol)


def test_pressures_follow_iapws():
    """Within 0.15 % over liquid (0 to 40 C) and 0.3 % over ice (0 to -40 C) of the library iapws."""
    from iapws._iapws import _Sublimation_Pressure
    from iapws.iapws97 import _PSat_T

    warm = np.arange(273.16, 313.2, 1.0)
    cold = np.arange(233.15, 273.15, 1.0)
    steam = [_PSat_T(t) * 1e6 for t in warm]
    frost = [_Sublimation_Pressure(t) * 1e6 for t in cold]
    np.testing.assert_allclose(saturation_vapour_pressure_over_liquid(warm), steam, rtol=1.5e-3)
    np.testing.assert_allclose(saturation_vapour_pressure_over_ice(cold), frost, rtol=3e-3)


@pytest.mark.parametrize(("celsius", "kilojoule"), VAPORISATION)
def test_heat_of_vaporisation_follows_iapws(celsius, kilojoule):
    """Within 0.25 % (the measured heat capacity of vapour rises with temperature, ours is constant)."""
    np.testing.assert_allclose(latent_heat_of_vaporisation(celsius + ZERO_C), kilojoule * 1e3, rtol=2.5e-3)


def test_heats_of_phase_change_add_up():
    """Melting and evaporating costs what sublimating costs; 333.5 kJ per kg at the triple point (IAPWS R10-06)."""
    t = np.linspace(200.0, 300.0, 11)
    np.testing.assert_allclose(
        latent_heat_of_vaporisation(t) + latent_heat_of_fusion(t), latent_heat_of_sublimation(t), rtol=1e-14
    )
    np.testing.assert_allclose(latent_heat_of_fusion(273.16), 333.5e3, rtol=1e-4)


@pytest.mark.parametrize("freezing", [True, False])
def test_clausius_and_clapeyron_hold(freezing):
    """The slope of ln e by finite difference is L / (Rv T^2), through the ramp too.

    1e-8: rounding of a central difference over 4 mK; the nodes avoid the two
    temperatures where the slope of L jumps.
    """
    t, h = np.arange(220.37, 310.0, 0.5), 2e-3
    rise = np.log(saturation_vapour_pressure(t + h, freezing=freezing))
    rise = rise - np.log(saturation_vapour_pressure(t - h, freezing=freezing))
    np.testing.assert_allclose(R_VAPOUR * t**2 * rise / (2 * h), latent_heat(t, freezing=freezing), rtol=1e-8)


def test_slope_of_latent_heat_is_its_derivative():
    """The third number of the fast kernel is dL/dT, by finite difference; 1e-5 of the heat of fusion per kelvin."""
    t, h = np.arange(220.37, 310.0, 0.5), 1e-3
    _, _, slope = phase.condensate(np.log(t / 273.16), t / 273.16, freezing=True)
    difference = (latent_heat(t + h) - latent_heat(t - h)) / (2 * h)
    np.testing.assert_allclose(R_VAPOUR * slope * np.ones_like(t), difference, atol=5.0)


def test_mixed_phase_joins_liquid_and_ice_without_a_step():
    """Liquid above the triple point, ice below -20 C, and neither e nor L jumps at the joints."""
    warm, cold = np.array([273.16, 290.0]), np.array([253.15, 230.0])
    np.testing.assert_allclose(saturation_vapour_pressure(warm), saturation_vapour_pressure_over_liquid(warm))
    np.testing.assert_allclose(saturation_vapour_pressure(cold), saturation_vapour_pressure_over_ice(cold))
    for joint in (253.15, 273.16):
        below, above = joint - 1e-9, joint + 1e-9
        np.testing.assert_allclose(latent_heat(below), latent_heat(above), rtol=1e-9)


def test_ice_share_runs_from_none_to_all():
    """0 from the triple point up, 1 from -20 C down, falling between."""
    np.testing.assert_array_equal(ice_share([300.0, 273.16, 253.15, 200.0]), [0.0, 0.0, 1.0, 1.0])
    between = ice_share(np.linspace(253.15, 273.16, 50))
    assert np.all(np.diff(between) < 0.0)


def test_heat_of_fusion_over_the_ramp_is_the_full_one():
    """What the condensate releases on cooling from 0 to -20 C is the heat of fusion and no more.

    The enthalpy of the condensate at the ends is that of liquid and of ice,
    so its change is c_liquid times 20.01 K plus the heat of fusion at -20 C.
    """
    top, bottom = 273.16, 253.15
    vapour = 1879.0 * (top - bottom)
    change = vapour - (latent_heat(top) - latent_heat(bottom))
    np.testing.assert_allclose(change, 4119.0 * (top - bottom) + latent_heat_of_fusion(bottom), rtol=1e-12)


def test_entropy_rises_with_temperature():
    """One temperature for one entropy: moist air at 500 hPa with up to 40 g of water per kg has no second branch."""
    from orolift.air.parcel import Parcel, entropy

    t = np.linspace(230.0, 276.0, 4601)
    v = saturation_mixing_ratio(5e4, t)
    assert np.all(np.diff(entropy(Parcel(np.array(5e4), t, v, 0.04 - v))) > 0.0)


def test_mixing_ratio_is_that_of_ideal_gases():
    """Definition of the mixing ratio (WMO-No. 8, annex 4.A) from the pressure tested above."""
    e = saturation_vapour_pressure_over_liquid(288.15)
    np.testing.assert_allclose(saturation_mixing_ratio(9e4, 288.15), EPSILON * e / (9e4 - e), rtol=1e-14)


@given(st.floats(150.0, 330.0))
def test_dew_and_frost_point_invert_saturation(temperature):
    """There and back to rounding: 1e-12."""
    np.testing.assert_allclose(dew_point(saturation_vapour_pressure_over_liquid(temperature)), temperature, rtol=1e-12)
    np.testing.assert_allclose(frost_point(saturation_vapour_pressure_over_ice(temperature)), temperature, rtol=1e-12)


def test_lower_lambert_is_scipys():
    """The lower branch of scipy.special.lambertw where its argument is not below the smallest float."""
    from scipy.special import lambertw

    y = -np.array([1.1, 1.3, 1.7, 2.5, 5.0, 20.0, 100.0, 700.0])
    np.testing.assert_allclose(lower_lambert(y), lambertw(-np.exp(y), -1).real, rtol=1e-14)


@pytest.mark.parametrize(
    "function",
    [
        latent_heat_of_vaporisation,
        latent_heat_of_fusion,
        latent_heat_of_sublimation,
        saturation_vapour_pressure_over_liquid,
        saturation_vapour_pressure_over_ice,
        saturation_vapour_pressure,
        latent_heat,
        ice_share,
    ],
)
@pytest.mark.parametrize("wrong", [20.0, float("nan"), 341.0])
def test_temperatures_out_of_range_are_refused(function, wrong):
    """Celsius, missing values and heat beyond the range are named with place and count."""
    with pytest.raises(OutOfRangeError, match=r"temperature: 1 of 2 values lie outside 120 to 340 K .*index \(1,\)"):
        function([280.0, wrong])


def test_boiling_and_dry_air_are_refused():
    """A pressure in hPa gives a hint; air without vapour has no dew point."""
    with pytest.raises(OutOfRangeError, match=r"water boils.*multiply hectopascal by 100"):
        saturation_mixing_ratio(900.0, 288.15)
    with pytest.raises(OutOfRangeError, match="without any vapour has no dew point"):
        dew_point(0.0)
    with pytest.raises(OutOfRangeError, match="without any vapour has no dew point"):
        frost_point([100.0, 0.0])
