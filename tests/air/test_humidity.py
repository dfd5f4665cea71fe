"""Humidity conversions against psychrometric libraries, published formulas and their own inverses."""

import numpy as np
import psychrolib
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.air.humidity import (
    dew_point_from_mixing_ratio,
    dew_point_from_relative_humidity,
    mixing_ratio_from_dew_point,
    mixing_ratio_from_dew_point_checked,
    mixing_ratio_from_relative_humidity,
    mixing_ratio_from_specific_humidity,
    mixing_ratio_from_vapour_pressure,
    relative_humidity_from_dew_point,
    relative_humidity_from_mixing_ratio,
    relative_humidity_from_vapour_pressure,
    specific_humidity_from_mixing_ratio,
    vapour_pressure_from_mixing_ratio,
    vapour_pressure_from_relative_humidity,
)
from orolift.air.saturation import saturation_vapour_pressure_over_ice, saturation_vapour_pressure_over_liquid
from orolift.air.wet_bulb import mixing_ratio_from_wet_bulb, wet_bulb_from_mixing_ratio
from orolift.errors import IncomingAirError, OutOfRangeError

ZERO = 273.15

# temperature [deg C], relative humidity (over ice at and below 0), pressure [Pa]
STATES = [
    (25, 0.5, 101325),
    (30, 0.4, 101325),
    (10, 0.8, 101325),
    (0, 0.9, 101325),
    (-10, 0.8, 101325),
    (20, 0.6, 70000),
]
# the same states: mixing ratio [kg/kg], wet bulb, dew or frost point [deg C] of the real gas, CoolProp 8.0 HAPropsSI
REAL_GAS = [
    (0.009926, 17.883, 13.867),
    (0.010652, 20.058, 14.941),
    (0.006115, 8.288, 6.713),
    (0.003409, -0.573, -1.273),
    (0.001284, -10.651, -12.490),
    (0.012767, 14.491, 12.010),
]


@pytest.fixture(scope="module", autouse=True)
def _psychrolib_in_si():
    psychrolib.SetUnitSystem(psychrolib.SI)


def vapour_of(celsius, humidity):
    """Vapour pressure with relative humidity over ice at and below 0 degrees, as the two libraries take it."""
    over = saturation_vapour_pressure_over_ice if celsius <= 0 else saturation_vapour_pressure_over_liquid
    return humidity * over(celsius + ZERO)


@pytest.mark.parametrize(("celsius", "humidity", "pressure"), STATES)
def test_mixing_ratio_agrees_with_psychrolib(celsius, humidity, pressure):
    """rtol 1e-3: saturation pressures of the two differ by up to 5e-4 (ASHRAE fit against constant heat capacities)."""
    ours = mixing_ratio_from_vapour_pressure(pressure, vapour_of(celsius, humidity))
    np.testing.assert_allclose(ours, psychrolib.GetHumRatioFromRelHum(celsius, humidity, pressure), rtol=1e-3)


@pytest.mark.parametrize(("state", "expected"), list(zip(STATES, REAL_GAS, strict=True)))
def test_agrees_with_the_real_gas(state, expected):
    """CoolProp HAPropsSI: 0.6 % of mixing ratio, for the enhancement factor that is left out; 0.02 K."""
    celsius, humidity, pressure = state
    ratio, wet, dew = expected
    r = mixing_ratio_from_vapour_pressure(pressure, vapour_of(celsius, humidity))
    np.testing.assert_allclose(r, ratio, rtol=6e-3)
    np.testing.assert_allclose(
        wet_bulb_from_mixing_ratio(pressure, celsius + ZERO, r, over_ice=True) - ZERO, wet, atol=0.02
    )
    if celsius > 0:
        np.testing.assert_allclose(dew_point_from_mixing_ratio(pressure, r) - ZERO, dew, atol=0.02)


@pytest.mark.parametrize(("celsius", "humidity", "pressure"), STATES)
def test_wet_bulb_agrees_with_psychrolib(celsius, humidity, pressure):
    """atol 0.02 K: its coefficients (2501 - 2.326 t) are rounded, and it stops iterating at 1e-3 K."""
    r = mixing_ratio_from_vapour_pressure(pressure, vapour_of(celsius, humidity))
    wet = wet_bulb_from_mixing_ratio(pressure, celsius + ZERO, r, over_ice=True) - ZERO
    np.testing.assert_allclose(wet, psychrolib.GetTWetBulbFromRelHum(celsius, humidity, pressure), rtol=0, atol=0.02)


@pytest.mark.parametrize(("celsius", "humidity"), [(25, 0.5), (30, 0.4), (10, 0.8), (35, 0.15), (2, 0.95)])
def test_dew_point_agrees_with_psychrolib(celsius, humidity):
    """atol 0.02 K: a tenth of what a station reports."""
    dew = dew_point_from_relative_humidity(celsius + ZERO, humidity) - ZERO
    np.testing.assert_allclose(dew, psychrolib.GetTDewPointFromRelHum(celsius, humidity), rtol=0, atol=0.02)


def test_ashrae_example_1():
    """ASHRAE Fundamentals chapter 1 example 1: 40 and wet bulb 20 deg C give 6.5 g/kg, dew point 7, humidity 14 %.

    Read off a chart and recalled from memory: 0.15 g/kg, 0.6 K and 0.7 %.
    """
    r = mixing_ratio_from_wet_bulb(101325.0, 313.15, 293.15)
    np.testing.assert_allclose(r, 0.0065, atol=1.5e-4)
    np.testing.assert_allclose(dew_point_from_mixing_ratio(101325.0, r), 280.15, atol=0.6)
    np.testing.assert_allclose(relative_humidity_from_mixing_ratio(101325.0, 313.15, r), 0.14, atol=7e-3)


@pytest.mark.parametrize(
    ("celsius", "wet", "pressure", "percent"),
    [(20, 15, 1000e2, 58.76), (10, 7, 900e2, 67.15), (30, 20, 1013.25e2, 39.17)],
)
def test_wet_bulb_agrees_with_wmo_psychrometer_formula(celsius, wet, pressure, percent):
    """WMO-No. 8 aspirated psychrometer, worked by hand: within 0.6 % of relative humidity.

    The instrument's coefficient is measured, the thermodynamic wet bulb is theory; they are known to differ by that.
    """
    r = mixing_ratio_from_wet_bulb(pressure, celsius + ZERO, wet + ZERO)
    np.testing.assert_allclose(
        100 * relative_humidity_from_mixing_ratio(pressure, celsius + ZERO, r), percent, atol=0.6
    )


def test_relative_humidity_is_over_liquid_below_freezing():
    """Air saturated over ice at -20 deg C has 82.3 % over liquid: Murphy and Koop (2005), 103.252 and 125.504 Pa.

    rtol 0.5 %: what saturation formulas over supercooled water differ by.
    """
    share = relative_humidity_from_vapour_pressure(253.15, saturation_vapour_pressure_over_ice(253.15))
    np.testing.assert_allclose(share, 103.252 / 125.504, rtol=5e-3)


@pytest.mark.parametrize(("celsius", "ratio"), [(0, 0.003774), (10, 0.007630), (20, 0.014695), (30, 0.027203)])
def test_saturated_mixing_ratio_agrees_with_ideal_gas_table(celsius, ratio):
    """ASHRAE ideal-gas equations at 1013.25 hPa, as psychrolib gives them; rtol 1e-3."""
    np.testing.assert_allclose(mixing_ratio_from_dew_point(101325.0, celsius + ZERO), ratio, rtol=1e-3)


temperatures = st.floats(200.0, 320.0)
pressures = st.floats(2.0e4, 1.05e5)
shares = st.floats(0.01, 1.0)


@given(pressures, temperatures, shares)
@settings(deadline=None)
def test_relative_humidity_round_trip(pressure, temperature, share):
    """Relative humidity to mixing ratio, dew point or vapour pressure and back returns it."""
    pressure = max(pressure, 4.0 * float(saturation_vapour_pressure_over_liquid(temperature)))
    r = mixing_ratio_from_relative_humidity(pressure, temperature, share)
    np.testing.assert_allclose(relative_humidity_from_mixing_ratio(pressure, temperature, r), share, rtol=1e-11)
    td = dew_point_from_relative_humidity(temperature, share)
    np.testing.assert_allclose(relative_humidity_from_dew_point(temperature, td), share, rtol=1e-10)
    np.testing.assert_allclose(
        mixing_ratio_from_dew_point(pressure, dew_point_from_mixing_ratio(pressure, r)), r, rtol=1e-10
    )
    e = vapour_pressure_from_relative_humidity(temperature, share)
    np.testing.assert_allclose(relative_humidity_from_vapour_pressure(temperature, e), share, rtol=1e-12)


@given(pressures, st.floats(0.0, 0.3))
@settings(deadline=None)
def test_amounts_round_trip(pressure, ratio):
    """Mixing ratio to vapour pressure or specific humidity and back returns it."""
    e = vapour_pressure_from_mixing_ratio(pressure, ratio)
    np.testing.assert_allclose(mixing_ratio_from_vapour_pressure(pressure, e), ratio, rtol=1e-12, atol=1e-300)
    q = specific_humidity_from_mixing_ratio(ratio)
    np.testing.assert_allclose(mixing_ratio_from_specific_humidity(q), ratio, rtol=1e-12, atol=1e-300)


@given(pressures, temperatures, shares, st.booleans())
@settings(deadline=None)
def test_wet_bulb_round_trip(pressure, temperature, share, over_ice):
    """Mixing ratio to wet bulb and back returns it, and the wet bulb lies between dew point and temperature."""
    pressure = max(pressure, 4.0 * float(saturation_vapour_pressure_over_liquid(temperature)))
    r = mixing_ratio_from_relative_humidity(pressure, temperature, share)
    wet = wet_bulb_from_mixing_ratio(pressure, temperature, r, over_ice=over_ice)
    if not (over_ice and abs(wet - ZERO) < 1e-9):  # freezing bulb: one temperature for a range of humidities
        back = mixing_ratio_from_wet_bulb(pressure, temperature, wet, over_ice=over_ice)
        np.testing.assert_allclose(back, r, rtol=1e-8, atol=1e-12)
    if not over_ice:
        assert dew_point_from_mixing_ratio(pressure, r) - 1e-9 <= wet <= temperature + 1e-9


def test_wet_bulb_of_saturated_air_is_its_temperature():
    """The limit: nothing evaporates into saturated air; supersaturated air warms as it condenses."""
    r = mixing_ratio_from_relative_humidity(9e4, [280.0, 260.0], 1.0)
    np.testing.assert_allclose(wet_bulb_from_mixing_ratio(9e4, [280.0, 260.0], r), [280.0, 260.0], rtol=1e-12)
    assert wet_bulb_from_mixing_ratio(9e4, 280.0, 1.2 * r[0]) > 280.0


def test_dry_hot_air_high_up_still_has_a_wet_bulb():
    """Where water would boil at the air's own temperature the wet bulb is found all the same."""
    wet = wet_bulb_from_mixing_ratio(5000.0, 330.0, 0.0)
    np.testing.assert_allclose(mixing_ratio_from_wet_bulb(5000.0, 330.0, wet), 0.0, atol=1e-9)


def test_fog_rounding_is_clipped_with_a_note():
    """A dew point up to half a kelvin above the temperature is taken as equal, and the note says where."""
    t = np.array([283.15, 280.0, 270.0])
    r, notes = mixing_ratio_from_dew_point_checked(9e4, t, t + np.array([0.5, -3.0, 0.2]))
    np.testing.assert_allclose(relative_humidity_from_mixing_ratio(9e4, t, r)[[0, 2]], 1.0, rtol=1e-12)
    assert len(notes) == 1
    assert "0.5 °C above the temperature at 2 of 3 levels" in notes[0]
    assert mixing_ratio_from_dew_point_checked(9e4, t, t - 1.0)[1] == ()


def test_dew_point_far_above_temperature_is_refused():
    """Exchanged columns are caught, with count, place and cause."""
    with pytest.raises(
        IncomingAirError, match=r"dew_point: 2 of 3 values .*first: 281 above 280 K at index \(1,\).*exchanged"
    ):
        mixing_ratio_from_dew_point_checked(9e4, [290.0, 280.0, 270.0], [285.0, 281.0, 275.0])


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: relative_humidity_from_mixing_ratio(9e4, 280.0, 8.0), "mixing_ratio: 1 of 1 .* divide grams"),
        (
            lambda: mixing_ratio_from_relative_humidity(9e4, 280.0, 65.0),
            "relative_humidity: 1 of 1 .* divide per cent by 100",
        ),
        (lambda: mixing_ratio_from_dew_point(900.0, 295.0), "vapour_pressure: 1 of 1 values exceed half the pressure"),
        (lambda: dew_point_from_mixing_ratio(900.0, np.nan), "mixing_ratio: 1 of 1"),
        (
            lambda: mixing_ratio_from_wet_bulb(9e4, 310.0, 270.0),
            "wet_bulb: 1 of 1 values are lower than the wet bulb of air",
        ),
        (lambda: wet_bulb_from_mixing_ratio(9e4, 310.0, 0.6), "mixing_ratio: 1 of 1 values are far above saturation"),
        (lambda: wet_bulb_from_mixing_ratio(9e4, 20.0, 0.01), "temperature: 1 of 1 .* add 273.15"),
    ],
)
def test_values_in_other_units_are_refused(call, message):
    """Per cent, grams per kilogram, hectopascals and degrees Celsius are caught."""
    with pytest.raises(OutOfRangeError, match=message):
        call()
