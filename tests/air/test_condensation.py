"""Condensation level against published values and other formulas."""

import numpy as np
import pytest

from orolift.air.condensation import (
    _level,
    _Substances,
    condensation_point,
    condensation_temperature_bolton_1980,
    lifting_condensation_level,
    lifting_deposition_level,
)
from orolift.air.parcel import Parcel, moved_to
from orolift.air.saturation import saturation_mixing_ratio, saturation_vapour_pressure_over_liquid
from orolift.constants import EPSILON
from orolift.errors import OutOfRangeError

# Constants of Romps (2017), J. Atmos. Sci. 74, 3891-3900, as in the author's published code.
R_DRY, R_VAPOUR, TRIPLE = 287.04, 461.0, 273.16
VAPORISATION, FUSION = 2.3740e6, 0.3337e6
ROMPS = {"gravity": 9.81, "r_dry": R_DRY, "r_vapour": R_VAPOUR, "cp_dry": 719 + R_DRY, "cp_vapour": 1418 + R_VAPOUR}
ROMPS |= {"triple_temperature": TRIPLE, "triple_pressure": 611.65}
ROMPS_LIQUID = _Substances(c_condensate=4119.0, latent_heat_triple=VAPORISATION + R_VAPOUR * TRIPLE, **ROMPS)
ROMPS_ICE = _Substances(c_condensate=1861.0, latent_heat_triple=VAPORISATION + FUSION + R_VAPOUR * TRIPLE, **ROMPS)


def romps_pressure(temperature, ice):
    """Saturation pressure of Romps (2017), eq. 4 and 5, written out here once more."""
    c, energy = (1861.0, VAPORISATION + FUSION) if ice else (4119.0, VAPORISATION)
    free = (energy - (1418.0 - c) * TRIPLE) / R_VAPOUR
    power = (temperature / TRIPLE) ** ((1418.0 + R_VAPOUR - c) / R_VAPOUR)
    return 611.65 * power * np.exp(free * (1 / TRIPLE - 1 / temperature))


# temperature [K], humidity over ice?, condensation and deposition level [m]: check values of the author's 2017 release
ROMPS_VALUES = [
    pytest.param(300.0, False, 1433.844139279, 1639.249726127, id="300 K, 50 % over liquid, Romps 2017"),
    pytest.param(300.0, True, 923.2222457185, 1217.336637217, id="300 K, 50 % over ice, Romps 2017"),
    pytest.param(200.0, False, 542.8017712435, -8.609834216556, id="200 K, 50 % over liquid, Romps 2017"),
]


@pytest.mark.parametrize(("temperature", "over_ice", "condensation", "deposition"), ROMPS_VALUES)
def test_levels_are_those_of_the_paper(temperature, over_ice, condensation, deposition):
    """With the paper's constants the printed digits come out: 1e-9, and 1e-8 for the small difference -8.6 m."""
    e = 0.5 * romps_pressure(temperature, over_ice)
    state = (np.array(1e5), np.array(temperature), np.array(R_DRY / R_VAPOUR * e / (1e5 - e)))
    np.testing.assert_allclose(_level(*state, ROMPS_LIQUID).height_above, condensation, rtol=1e-9)
    np.testing.assert_allclose(_level(*state, ROMPS_ICE).height_above, deposition, rtol=1e-9, atol=1e-8)


@pytest.mark.parametrize(("temperature", "condensation"), [(300.0, 1433.844), (200.0, 542.80)])
def test_own_constants_change_little(temperature, condensation):
    """Half a per cent or 10 m: what exchanging one published set of constants for another is worth."""
    e = 0.5 * romps_pressure(temperature, ice=False)
    level = lifting_condensation_level(1e5, temperature, EPSILON * e / (1e5 - e))
    np.testing.assert_allclose(level.height_above, condensation, atol=10.0)


# temperature, dew point [C], pressure [hPa]; condensation level: temperature [C] and pressure [hPa] with Romps' constants
LEVELS = [
    (20.0, 10.0, 1000.0, 7.791, 861.23),
    (25.0, 10.0, 1000.0, 6.730, 800.86),
    (30.0, 20.0, 1000.0, 17.663, 864.00),
    (25.0, 20.0, 1000.0, 18.815, 928.91),
    (18.0, -1.0, 1000.0, -4.851, 750.71),
    (10.0, 5.0, 900.0, 3.911, 833.88),
    (20.0, -10.0, 1000.0, -15.611, 634.99),
]


def bolton(temperature, dew_point, e):
    """Bolton (1980), Mon. Weather Rev. 108, 1046-1053, eq. 15, 21 and 22; kelvin and hPa."""
    humidity = 100.0 * e / (saturation_vapour_pressure_over_liquid(temperature) / 100.0)
    by_dew_point = 1.0 / (1.0 / (dew_point - 56.0) + np.log(temperature / dew_point) / 800.0) + 56.0
    by_pressure = 2840.0 / (3.5 * np.log(temperature) - np.log(e) - 4.805) + 55.0
    by_humidity = 1.0 / (1.0 / (temperature - 55.0) - np.log(humidity / 100.0) / 2840.0) + 55.0
    return by_dew_point, by_pressure, by_humidity


@pytest.mark.parametrize(("celsius", "dew_point", "hectopascal", "level_c", "level_hpa"), LEVELS)
def test_level_agrees_with_bolton_and_romps(celsius, dew_point, hectopascal, level_c, level_hpa):
    """Bolton's eq. 15 and 21 within 0.05 K, eq. 22 within 0.1 K as stated there; Romps within 0.05 K and 0.6 hPa."""
    t, td, p = celsius + 273.15, dew_point + 273.15, hectopascal * 100.0
    level = lifting_condensation_level(p, t, saturation_mixing_ratio(p, td, freezing=False))
    e = float(saturation_vapour_pressure_over_liquid(td)) / 100.0
    for fit, error in zip(bolton(t, td, e), (0.05, 0.05, 0.1), strict=True):
        np.testing.assert_allclose(level.temperature, fit, atol=error)
    np.testing.assert_allclose(condensation_temperature_bolton_1980(t, e * 100.0), bolton(t, td, e)[1], rtol=1e-12)
    np.testing.assert_allclose(level.temperature - 273.15, level_c, atol=0.05)
    np.testing.assert_allclose(level.pressure / 100.0, level_hpa, atol=0.6)


def test_bolton_fit_prints_its_own_number():
    """T 20 C, Td 10 C: 7.783 C, from the printed equation with e = 12.272 hPa of Bolton's eq. 10."""
    np.testing.assert_allclose(condensation_temperature_bolton_1980(293.15, 1227.2) - 273.15, 7.783, atol=1e-3)


@pytest.mark.parametrize(("spread", "metres"), [(5.0, 625.0), (10.0, 1250.0), (15.0, 1875.0)])
def test_level_is_125_metres_per_kelvin(spread, metres):
    """The rule of 9.8 - 1.8 K per km (Glossary of Meteorology, "Dewpoint formula") to 4 %."""
    level = lifting_condensation_level(1e5, 298.15, saturation_mixing_ratio(1e5, 298.15 - spread))
    np.testing.assert_allclose(level.height_above, metres, rtol=0.04)


@pytest.mark.parametrize("humidity", [0.6, 0.7, 0.8, 0.9])
def test_level_follows_lawrence(humidity):
    """Lawrence (2005), Bull. Am. Meteorol. Soc. 86, 225-233: (20 + t/5)(100 - RH) m above 50 %, to 10 %."""
    r = EPSILON * (e := humidity * saturation_vapour_pressure_over_liquid(293.15)) / (1e5 - e)
    level = lifting_condensation_level(1e5, 293.15, r)
    np.testing.assert_allclose(level.height_above, 24.0 * 100.0 * (1.0 - humidity), rtol=0.1)


def unsaturated(freezing):
    """Many parcels short of saturation, from 245 to 310 K."""
    random = np.random.default_rng(11)
    p, t = random.uniform(6e4, 1.05e5, 400), random.uniform(245.0, 310.0, 400)
    v = random.uniform(0.05, 0.999, 400) * saturation_mixing_ratio(p, t, freezing=freezing)
    return Parcel(p, t, v, np.zeros(400))


def test_closed_form_is_where_the_march_first_saturates():
    """Two ways to one point: Lambert's function, and Newton's method on the parcel; to rounding."""
    parcel = unsaturated(freezing=False)
    level = lifting_condensation_level(parcel.pressure, parcel.temperature, parcel.vapour)
    point = condensation_point(parcel, freezing=False)
    np.testing.assert_allclose(point.temperature, level.temperature, rtol=2e-13)
    np.testing.assert_allclose(point.pressure, level.pressure, rtol=1e-12)


@pytest.mark.parametrize("freezing", [True, False])
def test_parcel_has_cloud_just_above_the_point_and_none_just_below(freezing):
    """The march itself: a millionth of the pressure to either side."""
    parcel = unsaturated(freezing)
    p = condensation_point(parcel, freezing=freezing).pressure
    above, below = (moved_to(parcel, p * f, freezing=freezing) for f in (1.0 - 1e-6, 1.0 + 1e-6))
    assert np.all(above.cloud > 0.0)
    np.testing.assert_array_equal(below.cloud, 0.0)


def test_mixed_cloud_forms_lower_than_liquid_and_higher_than_ice():
    """Between the two closed forms where the level is below 0 C, on the liquid one above."""
    parcel = unsaturated(freezing=True)
    state = (parcel.pressure, parcel.temperature, parcel.vapour)
    liquid, ice = lifting_condensation_level(*state), lifting_deposition_level(*state)
    mixed = condensation_point(parcel)
    cold = liquid.temperature < 273.0
    assert np.all(mixed.pressure[cold] >= liquid.pressure[cold])
    assert np.all(mixed.pressure[cold] <= ice.pressure[cold] * (1 + 1e-12))
    warm = liquid.temperature > 273.16
    np.testing.assert_allclose(mixed.pressure[warm], liquid.pressure[warm], rtol=1e-12)


def test_saturated_parcels_stay_where_they_are():
    """Cloud, and vapour beyond saturation, are at their condensation point."""
    parcel = Parcel(np.array([9e4, 9e4]), np.array([280.0, 280.0]), np.array([0.0069, 0.02]), np.array([1e-3, 0.0]))
    np.testing.assert_array_equal(condensation_point(parcel).pressure, [9e4, 9e4])
    assert lifting_condensation_level(9e4, 280.0, 0.02).height_above < 0.0


def test_dry_air_is_refused():
    """Air without vapour condenses nowhere."""
    with pytest.raises(OutOfRangeError, match=r"mixing_ratio: 1 of 1 values lie outside 1e-09 to 0\.2"):
        lifting_condensation_level(9e4, 280.0, 0.0)
    with pytest.raises(OutOfRangeError, match=r"parcel\.vapour: 1 of 1 values"):
        condensation_point(Parcel(np.array(9e4), np.array(280.0), np.array(0.0), np.array(0.0)))
    with pytest.raises(OutOfRangeError, match="temperature: 1 of 1 values lie outside 233 to 323 K"):
        condensation_temperature_bolton_1980(20.0, 1000.0)
