"""Fine Fuel Moisture Code: litter that remembers yesterday, by the day and by the hour; and how fast fire spreads."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.constants import MELTING_POINT
from orolift.fire.dryness import fire_humidity, fire_temperature, fire_wind

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Array = NDArray[np.float64]

HIGHEST_CODE = 101.0
"""Code of litter without any water."""
_WETTEST = 250.0  # per cent of dry weight: what the litter can hold
_UNSHED = 0.5  # mm a day that the canopy keeps
_KMH = 3.6  # km/h in a metre per second
_DAY, _HOUR = 0.581 * np.log(10.0), 0.0579 * 2.303  # e-folding rates: of a day from noon to noon, of an hour
_CODE = "Yesterday's code lies between 0 (soaked) and 101 (bone dry); 85 starts a season."


def fuel_moisture_from_code(code: ArrayLike) -> Array:
    """Moisture of fine fuel that has a code.

    Parameters
    ----------
    code : array_like, any shape [1]
        0 to 101.

    Returns
    -------
    ndarray, same shape [kg of water per kg of dry fuel]
        2.5 to 0.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside 0-101.

    Notes
    -----
    Van Wagner (1987) [1]_, eq. 1: ``m = 147.2 (101 - F) / (59.5 + F)`` in per cent. Later reports print 147.27723 for
    147.2; it moves a code by less than 0.05.

    References
    ----------
    .. [1] C. E. Van Wagner (1987), "Development and structure of the Canadian Forest Fire Weather Index System",
       Canadian Forestry Service, Forestry Technical Report 35.

    Examples
    --------
    >>> fuel_moisture_from_code(85.0).round(3)
    np.float64(0.163)
    """
    f = within("code", code, 0.0, HIGHEST_CODE, "", _CODE)
    return np.asarray(147.2 * (101.0 - f) / (59.5 + f) / 100.0)[()]


def code_from_fuel_moisture(moisture: ArrayLike) -> Array:
    """Code of fine fuel of a moisture; undoes `fuel_moisture_from_code` to 0.06.

    Parameters
    ----------
    moisture : array_like, any shape [kg of water per kg of dry fuel]
        0 to 2.5.

    Returns
    -------
    ndarray, same shape [1]
        0 to 101.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside 0-2.5.

    Notes
    -----
    Van Wagner (1987): ``F = 59.5 (250 - m) / (147.2 + m)`` with m in per cent, at most 101. The two
    printed formulas do not quite undo each other: there and back dries the fuel by 0.05 per cent.

    Examples
    --------
    >>> code_from_fuel_moisture([0.0, 0.163]).round(1)
    array([101.,  85.])
    """
    m = 100.0 * within("moisture", moisture, 0.0, 2.5, "", "Give kilograms of water per kilogram of dry fuel.")
    return np.asarray(np.clip(59.5 * (_WETTEST - m) / (147.2 + m), 0.0, HIGHEST_CODE))[()]


def fine_fuel_code_daily(
    previous: ArrayLike, temperature: ArrayLike, relative_humidity: ArrayLike, wind: ArrayLike, rain: ArrayLike = 0.0
) -> Array:
    """Today's Fine Fuel Moisture Code from yesterday's and the weather at noon.

    Parameters
    ----------
    previous : array_like, any shape [1]
        Yesterday's code, 0 to 101.
    temperature : array_like, broadcasts [K]
        At noon local standard time, 173.15 to 338.15 K.
    relative_humidity : array_like, broadcasts [1]
        At noon, 0 to 1.
    wind : array_like, broadcasts [m s-1]
        At noon, at 10 m in the open, mean of 10 minutes, 0 to 130 m/s.
    rain : array_like, broadcasts [kg m-2]
        Of the 24 hours to noon, 0 to 2000 mm.

    Returns
    -------
    ndarray, broadcast shape [1]
        0 to 101, for the peak of the afternoon.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    Van Wagner and Pickett (1985) [1]_, equations from memory. Rain above 0.5 mm wets the litter; then it dries toward
    the drying equilibrium, or wets toward the wetting one, at a rate that grows with temperature and wind and
    falls with humidity. Litter of a closed pine stand on level ground: grass, slash, slope and sun are not in it.

    References
    ----------
    .. [1] C. E. Van Wagner and T. L. Pickett (1985), "Equations and FORTRAN program for the Canadian Forest Fire
       Weather Index System", Canadian Forestry Service, Forestry Technical Report 33.

    Examples
    --------
    >>> fine_fuel_code_daily(85.0, 290.15, 0.42, 25 / 3.6).round(1)
    np.float64(87.7)
    """
    m, fallen = _start(previous, rain)
    wet = np.where(fallen > _UNSHED, fallen - _UNSHED, 0.0)
    m = _rained_on(m, wet)
    return code_from_fuel_moisture(_after(m, temperature, relative_humidity, wind, _DAY) / 100.0)


def fine_fuel_code_hourly(
    previous: ArrayLike,
    temperature: ArrayLike,
    relative_humidity: ArrayLike,
    wind: ArrayLike,
    rain: ArrayLike = 0.0,
    *,
    hours: int = 1,
) -> Array:
    """Fine Fuel Moisture Code after some hours of air that stays as it is.

    Parameters
    ----------
    previous : array_like, any shape [1]
        Code at the start, 0 to 101.
    temperature, relative_humidity, wind : array_like, broadcast [K], [1], [m s-1]
        As for `fine_fuel_code_daily`, of the hour.
    rain : array_like, broadcasts [kg m-2]
        In each hour, 0 to 2000 mm.
    hours : int
        How many, 1 to 1000.

    Returns
    -------
    ndarray, broadcast shape [1]
        0 to 101.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    Van Wagner (1977) [1]_: the daily form with the rate of an hour, ``k = 0.0579 k0 exp(0.0365 T)`` and
    ``m = E + (m0 - E) exp(-2.303 k)``, and rain from the first drop; rates from memory. Each hour starts from
    the code of the hour before, as published: see `code_from_fuel_moisture`. Hours of dry, windy air may be followed
    one by one; the daily form stands for the afternoon only.

    References
    ----------
    .. [1] C. E. Van Wagner (1977), "A method of computing fine fuel moisture content throughout the diurnal cycle",
       Canadian Forestry Service, Petawawa, Information Report PS-X-69.

    Examples
    --------
    >>> [float(fine_fuel_code_hourly(80.0, 298.15, 0.2, 40 / 3.6, hours=n).round(1)) for n in (1, 3, 12)]
    [83.2, 87.8, 93.8]
    """
    m, fallen = _start(previous, rain)
    code: Array = np.asarray(previous, np.float64)
    for _ in range(int(within("hours", hours, 1, 1000, "h", "Give whole hours."))):
        m = _after(_rained_on(m, fallen), temperature, relative_humidity, wind, _HOUR)
        code = code_from_fuel_moisture(m / 100.0)
        m = 100.0 * fuel_moisture_from_code(code)
    return code


def initial_spread_index(code: ArrayLike, wind: ArrayLike) -> Array:
    """Initial Spread Index: how fast a fire spreads once it burns, by fuel moisture and wind.

    Parameters
    ----------
    code : array_like, any shape [1]
        Fine Fuel Moisture Code, 0 to 101.
    wind : array_like, broadcasts with `code` [m s-1]
        At 10 m, mean of 10 minutes, 0 to 130 m/s.

    Returns
    -------
    ndarray, broadcast shape [1]
        Below 5 slow, above 15 very fast in most regions.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    Van Wagner (1987): ``0.208 exp(0.05039 W) 91.9 exp(-0.1386 m) (1 + m^5.31 / 4.93e7)`` with W in km/h and m in per
    cent. The exponential was fitted to winds up to about 40 km/h (11 m/s); above them, as in a strong lee wind, it
    goes on growing where fires do not. It knows no slope, and nothing of how much fuel there is.

    Examples
    --------
    >>> initial_spread_index(87.7, 25 / 3.6).round(1)
    np.float64(10.9)
    """
    m = 100.0 * fuel_moisture_from_code(code)
    speed = _KMH * fire_wind(wind)
    moisture = 91.9 * np.exp(-0.1386 * m) * (1.0 + m**5.31 / 4.93e7)
    return np.asarray(0.208 * np.exp(0.05039 * speed) * moisture)[()]


def _start(previous: ArrayLike, rain: ArrayLike) -> tuple[Array, Array]:
    """Moisture in per cent of the code at the start, and the rain, checked."""
    fallen = within("rain", rain, 0.0, 2000.0, "mm", "Give millimetres, never negative.")
    m, fallen = np.broadcast_arrays(100.0 * fuel_moisture_from_code(previous), fallen)
    return np.asarray(m), np.asarray(fallen)


def _rained_on(m: Array, rain: Array) -> Array:
    """Moisture in per cent after rain in mm reached the litter."""
    falls = rain > 0.0
    r = np.where(falls, rain, 1.0)
    more = 42.5 * r * np.exp(-100.0 / (251.0 - m)) * (1.0 - np.exp(-6.93 / r))
    more = more + np.where(m > 150.0, 0.0015 * (m - 150.0) ** 2 * np.sqrt(r), 0.0)
    return np.asarray(np.where(falls, np.minimum(m + more, _WETTEST), m))


def _after(m: Array, temperature: ArrayLike, relative_humidity: ArrayLike, wind: ArrayLike, rate: float) -> Array:
    """Moisture in per cent after drying or wetting toward equilibrium, over the time the rate stands for."""
    t = fire_temperature(temperature) - MELTING_POINT
    h, w = 100.0 * fire_humidity(relative_humidity), _KMH * fire_wind(wind)
    common = 0.18 * (21.1 - t) * (1.0 - np.exp(-0.115 * h))
    dry_end = 0.942 * h**0.679 + 11.0 * np.exp((h - 100.0) / 10.0) + common
    wet_end = 0.618 * h**0.753 + 10.0 * np.exp((h - 100.0) / 10.0) + common
    # In great heat and dryness the fit of the equilibrium falls below nothing.
    dry_end, wet_end = np.maximum(dry_end, 0.0), np.maximum(wet_end, 0.0)

    def speed(share: Array) -> Array:
        k = 0.424 * (1.0 - share**1.7) + 0.0694 * np.sqrt(w) * (1.0 - share**8)
        return np.asarray(np.exp(-rate * k * np.exp(0.0365 * t)))

    dried = dry_end + (m - dry_end) * speed(h / 100.0)
    wetted = wet_end - (wet_end - m) * speed((100.0 - h) / 100.0)
    return np.asarray(np.where(m > dry_end, dried, np.where(m < wet_end, wetted, m)))
