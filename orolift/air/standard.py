"""The standard atmosphere to 20 km, and the pressures that altimeters are set to.

Heights are geopotential, as in the defining equations. Two functions turn
geometric heights into geopotential ones and back; the difference is 4 m at
5 km.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.constants import (
    EARTH_RADIUS_STANDARD,
    GRAVITY,
    MOLAR_MASS_DRY_AIR,
    STANDARD_GAS_CONSTANT,
    STANDARD_LAPSE_RATE,
    STANDARD_PRESSURE,
    STANDARD_TEMPERATURE,
    STANDARD_TROPOPAUSE,
)

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

_LOWEST = -5000.0
_HIGHEST = 20000.0  # isothermal from 11 km to here; the temperature rises above it

_R = STANDARD_GAS_CONSTANT / MOLAR_MASS_DRY_AIR  # J kg-1 K-1, the standard's own, not today's
_EXPONENT = GRAVITY / (_R * STANDARD_LAPSE_RATE)  # 5.25588
_TROPOPAUSE_TEMPERATURE = STANDARD_TEMPERATURE - STANDARD_LAPSE_RATE * STANDARD_TROPOPAUSE  # 216.65 K
_TROPOPAUSE_PRESSURE = STANDARD_PRESSURE * (_TROPOPAUSE_TEMPERATURE / STANDARD_TEMPERATURE) ** _EXPONENT
_TROPOPAUSE_SCALE = _R * _TROPOPAUSE_TEMPERATURE / GRAVITY  # m

_METRES = "Give metres above sea level."
_PASCALS = "orolift works in pascals; multiply hectopascals by 100."


def geopotential_height_from_geometric(height: ArrayLike) -> NDArray[np.float64]:
    """Height whose constant-gravity potential equals that of a geometric height.

    Use it before the functions below when a height was surveyed rather than
    worked out from pressure and the metres matter.

    Parameters
    ----------
    height : array_like, any shape [m]
        Geometric height above sea level, -5000 m to 100000 m.

    Returns
    -------
    ndarray, shape of `height` [m]
        Geopotential height, lower by 4 m at 5 km and by 63 m at 20 km.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside -5000 to 100000 m.

    Notes
    -----
    H = r Z / (r + Z), inverse-square gravity, r of the standard [1]_.

    References
    ----------
    .. [1] NOAA, NASA, USAF (1976), "U.S. Standard Atmosphere, 1976",
       NOAA-S/T 76-1562, eq. 18.

    Examples
    --------
    >>> geopotential_height_from_geometric([0.0, 5000.0]).round(2)
    array([   0.  , 4996.07])
    """
    z = within("height", height, _LOWEST, 1.0e5, "m", _METRES)
    return EARTH_RADIUS_STANDARD * z / (EARTH_RADIUS_STANDARD + z)


def geometric_height_from_geopotential(height: ArrayLike) -> NDArray[np.float64]:
    """Geometric height that has a given geopotential height.

    The inverse of `geopotential_height_from_geometric`.

    Parameters
    ----------
    height : array_like, any shape [m]
        Geopotential height above sea level, -5010 m to 98500 m.

    Returns
    -------
    ndarray, shape of `height` [m]
        Geometric height.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside -5010 to 98500 m.

    Notes
    -----
    Z = r H / (r - H) [1]_.

    References
    ----------
    .. [1] NOAA, NASA, USAF (1976), "U.S. Standard Atmosphere, 1976",
       NOAA-S/T 76-1562, eq. 19.

    Examples
    --------
    >>> geometric_height_from_geopotential(11000.0).round(1)
    np.float64(11019.1)
    """
    h = within("height", height, _LOWEST - 10.0, 98500.0, "m", _METRES)
    return EARTH_RADIUS_STANDARD * h / (EARTH_RADIUS_STANDARD - h)


def standard_temperature(height: ArrayLike) -> NDArray[np.float64]:
    """Temperature of the standard atmosphere at a height.

    Falls by 6.5 K per km to 11 km and stays at 216.65 K from there to 20 km.

    Parameters
    ----------
    height : array_like, any shape [m]
        Geopotential height above sea level, -5000 m to 20000 m.

    Returns
    -------
    ndarray, shape of `height` [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside -5000 to 20000 m.

    Notes
    -----
    ICAO (1993) [1]_, the same below 32 km as the US standard of 1976.

    References
    ----------
    .. [1] ICAO (1993), "Manual of the ICAO Standard Atmosphere", Doc 7488,
       third edition.

    Examples
    --------
    >>> standard_temperature([0.0, 5000.0, 15000.0]).round(2)
    array([288.15, 255.65, 216.65])
    """
    h = within("height", height, _LOWEST, _HIGHEST, "m", _METRES)
    return STANDARD_TEMPERATURE - STANDARD_LAPSE_RATE * np.minimum(h, STANDARD_TROPOPAUSE)


def standard_pressure(height: ArrayLike) -> NDArray[np.float64]:
    """Pressure of the standard atmosphere at a height.

    Only a reference: the pressure of real air at that height differs by
    several per cent with the weather.

    Parameters
    ----------
    height : array_like, any shape [m]
        Geopotential height above sea level, -5000 m to 20000 m.

    Returns
    -------
    ndarray, shape of `height` [Pa]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside -5000 to 20000 m.

    Notes
    -----
    ICAO (1993) [1]_: p = p0 (T/T0)^(g M / (R L)) to 11 km, exponential above.
    The gas constant is the standard's own, 8.31432 J mol-1 K-1.

    References
    ----------
    .. [1] ICAO (1993), "Manual of the ICAO Standard Atmosphere", Doc 7488,
       third edition.

    Examples
    --------
    >>> standard_pressure([0.0, 1000.0, 11000.0]).round(0)
    array([101325.,  89875.,  22632.])
    """
    h = within("height", height, _LOWEST, _HIGHEST, "m", _METRES)
    troposphere = STANDARD_PRESSURE * (standard_temperature(h) / STANDARD_TEMPERATURE) ** _EXPONENT
    above = np.maximum(h - STANDARD_TROPOPAUSE, 0.0)  # 0 in the troposphere, where the factor is then 1
    return troposphere * np.exp(-above / _TROPOPAUSE_SCALE)


def standard_height(pressure: ArrayLike) -> NDArray[np.float64]:
    """Height at which the standard atmosphere has a given pressure.

    Also called pressure altitude. The inverse of `standard_pressure`.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Pressure, 5475 Pa to 177000 Pa.

    Returns
    -------
    ndarray, shape of `pressure` [m]
        Geopotential height above sea level.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside 5475 to 177000 Pa.

    Notes
    -----
    ICAO (1993) [1]_, solved for height.

    References
    ----------
    .. [1] ICAO (1993), "Manual of the ICAO Standard Atmosphere", Doc 7488,
       third edition.

    Examples
    --------
    >>> standard_height([101325.0, 50000.0]).round(0)
    array([   0., 5574.])
    """
    low, high = math.floor(float(standard_pressure(_HIGHEST))), math.ceil(float(standard_pressure(_LOWEST)))
    p = within("pressure", pressure, low, high, "Pa", _PASCALS)
    troposphere = STANDARD_TEMPERATURE / STANDARD_LAPSE_RATE * (1.0 - (p / STANDARD_PRESSURE) ** (1.0 / _EXPONENT))
    stratosphere = STANDARD_TROPOPAUSE + _TROPOPAUSE_SCALE * np.log(_TROPOPAUSE_PRESSURE / p)
    return np.where(p >= _TROPOPAUSE_PRESSURE, troposphere, stratosphere)


def qnh_from_station_pressure(pressure: ArrayLike, elevation: ArrayLike) -> NDArray[np.float64]:
    """Altimeter setting (QNH) that belongs to a pressure measured at a station.

    QNH is not the mean sea-level pressure of a weather map: it is reduced
    through the standard atmosphere, not through the air that is there.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Pressure at the station, 35000 Pa to 110000 Pa.
    elevation : array_like, broadcasts with `pressure` [m]
        Height of the station above sea level, -500 m to 6000 m.

    Returns
    -------
    ndarray, broadcast shape [Pa]
        Altimeter setting.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    The pressure altitude of the station minus its elevation is the height at
    which the standard atmosphere has the QNH; in closed form
    (p^n + p0^n L z / T0)^(1/n) with n = R L / (g M) = 0.190263, from ICAO
    (1993) [1]_. The form used in the United States first takes 0.3 hPa off the
    station pressure and gives 0.3 hPa less.

    References
    ----------
    .. [1] ICAO (1993), "Manual of the ICAO Standard Atmosphere", Doc 7488,
       third edition.

    Examples
    --------
    >>> qnh_from_station_pressure(90000.0, 1000.0).round(1)
    np.float64(101463.2)
    """
    p = within("pressure", pressure, 3.5e4, 1.1e5, "Pa", _PASCALS)
    z = within("elevation", elevation, -500.0, 6000.0, "m", _METRES)
    return _through_standard_layer(p, z)


def station_pressure_from_qnh(qnh: ArrayLike, elevation: ArrayLike) -> NDArray[np.float64]:
    """Pressure at a station that reports an altimeter setting (QNH).

    The inverse of `qnh_from_station_pressure`. Reports give QNH in whole
    hectopascals, rounded down, so the result is uncertain by as much.

    Parameters
    ----------
    qnh : array_like, any shape [Pa]
        Altimeter setting, 85000 Pa to 110000 Pa.
    elevation : array_like, broadcasts with `qnh` [m]
        Height of the station above sea level, -500 m to 6000 m.

    Returns
    -------
    ndarray, broadcast shape [Pa]
        Pressure at the station.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    ICAO (1993) [1]_, as `qnh_from_station_pressure`.

    References
    ----------
    .. [1] ICAO (1993), "Manual of the ICAO Standard Atmosphere", Doc 7488,
       third edition.

    Examples
    --------
    >>> station_pressure_from_qnh(101325.0, 1000.0).round(1)
    np.float64(89874.6)
    """
    p = within("qnh", qnh, 8.5e4, 1.1e5, "Pa", _PASCALS)
    z = within("elevation", elevation, -500.0, 6000.0, "m", _METRES)
    return _through_standard_layer(p, -z)


def _through_standard_layer(pressure: NDArray[np.float64], depth: NDArray[np.float64]) -> NDArray[np.float64]:
    """Pressure after going down through `depth` metres of standard atmosphere (up where negative)."""
    n = 1.0 / _EXPONENT
    step = STANDARD_PRESSURE**n * STANDARD_LAPSE_RATE / STANDARD_TEMPERATURE * depth
    return np.asarray((pressure**n + step) ** _EXPONENT, dtype=np.float64)
