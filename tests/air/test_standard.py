"""The standard atmosphere against its printed tables, and altimeter settings."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.air.standard import (
    geometric_height_from_geopotential,
    geopotential_height_from_geometric,
    qnh_from_station_pressure,
    standard_height,
    standard_pressure,
    standard_temperature,
    station_pressure_from_qnh,
)
from orolift.errors import OutOfRangeError

# geopotential height [m], pressure [Pa]; ICAO Doc 7488, geopotential table, printed to 0.01 hPa (digits from memory,
# confirmed within half a printed digit by two independent atmosphere libraries)
ICAO = [
    pytest.param(1000.0, 89875.0, id="ICAO Doc 7488, H 1000 m"),
    pytest.param(2000.0, 79495.0, id="ICAO Doc 7488, H 2000 m"),
    pytest.param(3000.0, 70109.0, id="ICAO Doc 7488, H 3000 m"),
    pytest.param(4000.0, 61640.0, id="ICAO Doc 7488, H 4000 m"),
    pytest.param(5000.0, 54020.0, id="ICAO Doc 7488, H 5000 m"),
    pytest.param(11000.0, 22632.0, id="ICAO Doc 7488, tropopause"),
    pytest.param(20000.0, 5474.9, id="ICAO Doc 7488, H 20 km"),
]

# geometric height [m], pressure [Pa]; US Standard Atmosphere 1976, geometric table (digits from memory, confirmed so)
USSA = [
    pytest.param(1000.0, 89876.0, id="USSA-1976, Z 1000 m"),
    pytest.param(2000.0, 79501.0, id="USSA-1976, Z 2000 m"),
    pytest.param(3000.0, 70121.0, id="USSA-1976, Z 3000 m"),
    pytest.param(4000.0, 61660.0, id="USSA-1976, Z 4000 m"),
    pytest.param(5000.0, 54048.0, id="USSA-1976, Z 5000 m"),
]

# station pressure [hPa], elevation [m], QNH [hPa]: worked by hand from the ICAO equation, not with this library
QNH = [(900.0, 1000.0, 1014.632), (950.0, 500.0, 1008.414), (850.0, 1500.0, 1018.390), (700.0, 3000.0, 1011.788)]
STATION = [(1013.25, 1000.0, 898.746), (1030.0, 1000.0, 913.948), (990.0, 1500.0, 825.485), (1013.25, 3000.0, 701.085)]


@pytest.mark.parametrize(("height", "expected"), ICAO)
def test_pressure_matches_geopotential_table(height, expected):
    """Agrees with the printed table; atol: half of its last digit, 0.5 Pa."""
    np.testing.assert_allclose(standard_pressure(height), expected, rtol=0, atol=0.5)


@pytest.mark.parametrize(("height", "expected"), USSA)
def test_pressure_matches_geometric_table(height, expected):
    """Agrees with the printed geometric table, which is 28 Pa away at 5 km if the heights are mixed up."""
    pressure = standard_pressure(geopotential_height_from_geometric(height))
    np.testing.assert_allclose(pressure, expected, rtol=0, atol=0.5)


def test_temperature_matches_definition():
    """ICAO Doc 7488: 15 degrees Celsius at sea level, -56.5 from 11 to 20 km."""
    np.testing.assert_allclose(standard_temperature([0, 11000, 20000]), [288.15, 216.65, 216.65], rtol=1e-12)


@pytest.mark.parametrize(("pressure", "elevation", "expected"), QNH)
def test_qnh_matches_worked_pairs(pressure, elevation, expected):
    """Agrees within 0.01 hPa, far below the whole hectopascals that reports give."""
    np.testing.assert_allclose(qnh_from_station_pressure(pressure * 100, elevation), expected * 100, rtol=0, atol=1.0)


@pytest.mark.parametrize(("qnh", "elevation", "expected"), STATION)
def test_station_pressure_matches_worked_pairs(qnh, elevation, expected):
    """Agrees within 0.01 hPa in the other direction too."""
    np.testing.assert_allclose(station_pressure_from_qnh(qnh * 100, elevation), expected * 100, rtol=0, atol=1.0)


def test_qnh_matches_united_states_service_formula():
    """24.896 inHg at 5000 ft is 29.924 inHg: worked example of the US service's (p^0.1903 + 1.313e-5 h)^5.255.

    atol 0.35 hPa: its rounded exponents, the largest difference between national conventions.
    """
    inch = 3386.389
    np.testing.assert_allclose(qnh_from_station_pressure(24.896 * inch, 1524.0), 29.924 * inch, rtol=0, atol=35.0)


def test_qnh_is_the_standard_pressure_at_pressure_altitude_minus_elevation():
    """The definition: an altimeter set to QNH shows the elevation of the station."""
    pressure, elevation = 87654.0, 1234.0
    qnh = qnh_from_station_pressure(pressure, elevation)
    np.testing.assert_allclose(standard_height(pressure) - standard_height(qnh), elevation, rtol=1e-10)


@given(st.floats(-5000, 20000))
@settings(deadline=None)
def test_height_and_pressure_round_trip(height):
    """Height to pressure and back returns the height, also across the tropopause."""
    np.testing.assert_allclose(standard_height(standard_pressure(height)), height, rtol=0, atol=1e-7)


@given(st.floats(-5000, 90000))
@settings(deadline=None)
def test_geometric_and_geopotential_round_trip(height):
    """Geometric to geopotential and back returns the height."""
    back = geometric_height_from_geopotential(geopotential_height_from_geometric(height))
    np.testing.assert_allclose(back, height, rtol=1e-12, atol=1e-9)


@given(st.floats(86000, 109000), st.floats(-500, 6000))
@settings(deadline=None)
def test_qnh_round_trip(qnh, elevation):
    """QNH to station pressure and back returns the QNH."""
    station = station_pressure_from_qnh(qnh, elevation)
    if station <= 1.1e5:
        np.testing.assert_allclose(qnh_from_station_pressure(station, elevation), qnh, rtol=1e-12)


def test_pressure_is_hydrostatic():
    """The law: dp/dz = -rho g, by central difference, on both sides of the tropopause."""
    height = np.array([500.0, 5000.0, 15000.0])
    slope = (standard_pressure(height + 1.0) - standard_pressure(height - 1.0)) / 2.0
    density = standard_pressure(height) * 28.9644e-3 / (8.31432 * standard_temperature(height))
    np.testing.assert_allclose(slope, -density * 9.80665, rtol=1e-7)


def test_hectopascals_are_refused():
    """A pressure in hectopascals is caught and the message says what to do."""
    with pytest.raises(OutOfRangeError, match=r"pressure: 1 of 1 values lie outside .* multiply hectopascals by 100"):
        qnh_from_station_pressure(900.0, 1000.0)
    with pytest.raises(OutOfRangeError, match=r"height: 1 of 2 values .* at index \(1,\)"):
        standard_pressure([0.0, 33000.0])
