"""Potential and virtual temperatures against published values and the laws that define them."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.air.temperature import (
    potential_temperature,
    temperature_from_potential_temperature,
    temperature_from_virtual_potential_temperature,
    temperature_from_virtual_temperature,
    virtual_potential_temperature,
    virtual_temperature,
)
from orolift.constants import GRAVITY, HEAT_CAPACITY_DRY_AIR, R_DRY, R_VAPOUR
from orolift.errors import OutOfRangeError

# pressure [Pa], temperature [K], potential temperature [K]
POTENTIAL = [
    pytest.param(8.0e4, 273.0, 290.9720, id="MetPy 1.7.1, 800 hPa, 273 K (kappa 0.2857)"),
    pytest.param(9.5e4, 287.15, 291.38, id="worked by hand, 950 hPa, 14 deg C: 18.23 deg C"),
    pytest.param(7.0e4, 273.15, 302.45, id="worked by hand with exponent 2/7, 700 hPa, 0 deg C"),
]

# temperature [K], mixing ratio [kg/kg], pressure [Pa], moist volume [m3 per kg of dry air]
VOLUMES = [
    pytest.param(298.15, 0.009926, 101325.0, 0.85779, id="CoolProp HAPropsSI, 25 deg C, 50 %"),
    pytest.param(303.15, 0.010652, 101325.0, 0.87321, id="CoolProp HAPropsSI, 30 deg C, 40 %"),
    pytest.param(293.15, 0.012767, 70000.0, 1.22640, id="CoolProp HAPropsSI, 20 deg C, 60 %, 700 hPa"),
]


@pytest.mark.parametrize(("pressure", "temperature", "expected"), POTENTIAL)
def test_potential_temperature_matches_published(pressure, temperature, expected):
    """atol 0.05 K: published exponents run from 0.2854 to 0.2859, which is 0.04 K at 700 hPa."""
    np.testing.assert_allclose(potential_temperature(pressure, temperature), expected, rtol=0, atol=0.05)


@pytest.mark.parametrize(("temperature", "ratio", "pressure", "volume"), VOLUMES)
def test_virtual_temperature_gives_the_density_of_real_moist_air(temperature, ratio, pressure, volume):
    """rtol 0.1 %: air and vapour are taken as ideal gases, real air is denser by up to 0.05 %."""
    density = pressure / (R_DRY * virtual_temperature(temperature, ratio))
    np.testing.assert_allclose(density, (1.0 + ratio) / volume, rtol=1e-3)


@given(st.floats(200, 320), st.floats(0, 0.04), st.floats(0, 0.01), st.floats(3e4, 1.05e5))
@settings(deadline=None)
def test_virtual_temperature_is_the_density_of_the_parts(temperature, vapour, condensate, pressure):
    """The law: dry air and vapour share the pressure, condensate adds mass only."""
    dry = pressure / (temperature * (R_DRY + vapour * R_VAPOUR))  # kg of dry air per m3
    density = dry * (1.0 + vapour + condensate)
    tv = virtual_temperature(temperature, vapour, condensate)
    np.testing.assert_allclose(pressure / (R_DRY * tv), density, rtol=1e-12)
    np.testing.assert_allclose(temperature_from_virtual_temperature(tv, vapour, condensate), temperature, rtol=1e-13)


@given(st.floats(200, 320), st.floats(0, 0.04), st.floats(0, 0.01), st.floats(1e4, 1.05e5))
@settings(deadline=None)
def test_potential_temperatures_round_trip(temperature, vapour, condensate, pressure):
    """Potential and virtual potential temperature and back return the temperature."""
    theta = potential_temperature(pressure, temperature)
    np.testing.assert_allclose(temperature_from_potential_temperature(pressure, theta), temperature, rtol=1e-13)
    virtual = virtual_potential_temperature(pressure, temperature, vapour, condensate)
    back = temperature_from_virtual_potential_temperature(pressure, virtual, vapour, condensate)
    np.testing.assert_allclose(back, temperature, rtol=1e-13)


def test_neutral_column_cools_at_the_dry_adiabatic_rate():
    """The law: constant potential temperature in hydrostatic air means -g / cpd."""
    pressure = np.array([8.001e4, 7.999e4])
    temperature = temperature_from_potential_temperature(pressure, 300.0)
    rise = R_DRY * temperature.mean() / GRAVITY * np.log(pressure[0] / pressure[1])
    np.testing.assert_allclose(np.diff(temperature)[0] / rise, -GRAVITY / HEAT_CAPACITY_DRY_AIR, rtol=1e-7)


def test_limits():
    """At 1000 hPa, dry and clear, all of them are the temperature; condensate makes air heavier, vapour lighter."""
    assert potential_temperature(1.0e5, 280.0) == 280.0
    assert virtual_potential_temperature(1.0e5, 280.0, 0.0) == 280.0
    assert virtual_temperature(280.0, 0.01) > 280.0 > virtual_temperature(280.0, 0.0, 0.001)


def test_celsius_is_refused():
    """Degrees Celsius are caught, and the message says what to add."""
    with pytest.raises(OutOfRangeError, match=r"temperature: 1 of 2 values lie outside 100 to 400 K .*add 273\.15"):
        potential_temperature(1e5, [280.0, 15.0])
    with pytest.raises(OutOfRangeError, match=r"mixing_ratio: 1 of 1 .*divide grams per kilogram by 1000"):
        virtual_temperature(280.0, 8.0)
