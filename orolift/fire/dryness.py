"""How dry the air is for what burns in it: vapour pressure deficit, and an index of temperature and humidity alone."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air.saturation import saturation_vapour_pressure_over_liquid
from orolift.checks import within
from orolift.constants import MELTING_POINT

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

LOWEST_TEMPERATURE, HIGHEST_TEMPERATURE = 173.15, 338.15
"""Air temperatures [K] that indices of fire weather are given for; in hard frost they are formulas carried on."""

HIGHEST_WIND = 130.0
"""Wind speed [m s-1] that no index is given beyond: stronger than any measured near the ground outside a tornado."""

_KELVIN = "orolift works in kelvin; add 273.15 to degrees Celsius."
_SHARE = "Give a share; divide per cent by 100."


def fire_temperature(temperature: ArrayLike) -> NDArray[np.float64]:
    """Temperature as an array, checked.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside 173.15-338.15 K.
    """
    return within("temperature", temperature, LOWEST_TEMPERATURE, HIGHEST_TEMPERATURE, "K", _KELVIN)


def fire_humidity(relative_humidity: ArrayLike) -> NDArray[np.float64]:
    """Relative humidity as an array, checked.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside 0-1.
    """
    return within("relative_humidity", relative_humidity, 0.0, 1.0, "", _SHARE)


def fire_wind(wind: ArrayLike) -> NDArray[np.float64]:
    """Wind speed as an array, checked.

    Raises
    ------
    OutOfRangeError
        If any value is NaN, negative or above 130 m/s.
    """
    return within("wind", wind, 0.0, HIGHEST_WIND, "m s-1", "Give a speed in metres per second, never negative.")


def vapour_pressure_deficit(temperature: ArrayLike, relative_humidity: ArrayLike) -> NDArray[np.float64]:
    """What the air lacks to saturation: the pull that dries dead fuel and living leaves.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        173.15 to 338.15 K.
    relative_humidity : array_like, broadcasts with `temperature` [1]
        Over liquid water, 0 to 1.

    Returns
    -------
    ndarray, broadcast shape [Pa]
        0 in saturated air; some 1000 Pa is moderate, 4000 Pa desert-like.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    ``e_s(T) (1 - U)``, Allen et al. (1998) [1]_, chapter 3, with the saturation pressure over liquid water of
    `orolift.air.saturation`. It is that of the air: sunlit leaves and fuel are warmer than the air, and lack more.

    References
    ----------
    .. [1] R. G. Allen, L. S. Pereira, D. Raes and M. Smith (1998), "Crop evapotranspiration",
       FAO Irrigation and Drainage Paper 56.

    Examples
    --------
    >>> vapour_pressure_deficit(303.15, 0.2).round(-1)
    np.float64(3400.0)
    """
    t, u = fire_temperature(temperature), fire_humidity(relative_humidity)
    return np.asarray(saturation_vapour_pressure_over_liquid(t) * (1.0 - u))[()]


def angstroem_index(temperature: ArrayLike, relative_humidity: ArrayLike) -> NDArray[np.float64]:
    """Ångström's index of how easily a fire starts, from temperature and humidity at 13 h local time.

    A first look only: it does not know the wind. Use the Fosberg index where wind matters, as it does in a lee.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        173.15 to 338.15 K.
    relative_humidity : array_like, broadcasts with `temperature` [1]
        0 to 1.

    Returns
    -------
    ndarray, broadcast shape [1]
        The lower the drier: see `angstroem_words`.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    ``U / 20 + (27 - T) / 10`` with U in per cent and T in degrees Celsius, as in Chandler et al. (1983) [1]_.
    It knows neither wind, rain and fuel nor slope.

    References
    ----------
    .. [1] C. Chandler, P. Cheney, P. Thomas, L. Trabaud and D. Williams (1983), "Fire in Forestry", volume 1, Wiley.

    Examples
    --------
    >>> angstroem_index(303.15, 0.2).round(2)
    np.float64(0.7)
    """
    celsius = fire_temperature(temperature) - MELTING_POINT
    per_cent = 100.0 * fire_humidity(relative_humidity)
    return np.asarray(per_cent / 20.0 + (27.0 - celsius) / 10.0)[()]


def angstroem_words(index: float) -> str:
    """What Ångström's index says of fires starting.

    Parameters
    ----------
    index : float [1]

    Returns
    -------
    str
        ``unlikely`` above 4, ``unfavourable`` above 2.5, ``favourable`` from 2 to 2.5, ``very likely`` below 2.

    Examples
    --------
    >>> angstroem_words(2.0), angstroem_words(1.99)
    ('favourable', 'very likely')
    """
    if index > 4.0:
        return "unlikely"
    if index > 2.5:
        return "unfavourable"
    return "favourable" if index >= 2.0 else "very likely"
