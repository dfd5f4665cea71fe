"""Temperatures that make air of different pressure or humidity comparable.

Pressure enters through the potential temperatures, vapour and the weight of
condensate through the virtual ones.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.constants import EPSILON, KAPPA, REFERENCE_PRESSURE

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

_KELVIN = "orolift works in kelvin; add 273.15 to degrees Celsius."
_PASCALS = "orolift works in pascals; multiply hectopascals by 100."
_PER_KILOGRAM = "Give kilograms per kilogram; divide grams per kilogram by 1000."


def virtual_temperature(
    temperature: ArrayLike, mixing_ratio: ArrayLike, condensate: ArrayLike = 0.0
) -> NDArray[np.float64]:
    """Temperature at which dry air would be as dense as this air.

    With condensate it is also called density temperature: the drops weigh but
    do not press.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        Air temperature, 100 K to 400 K.
    mixing_ratio : array_like, broadcasts with `temperature` [kg kg-1 of dry air]
        Vapour, 0 to 0.622.
    condensate : array_like, broadcasts with `temperature` [kg kg-1 of dry air]
        Cloud water and ice, 0 to 0.1.

    Returns
    -------
    ndarray, broadcast shape [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    Tv = T (1 + r / epsilon) / (1 + r + c); Emanuel (1994) [1]_, eq. 4.3.6
    (equation number from memory). Exact for ideal gases.

    References
    ----------
    .. [1] K. A. Emanuel (1994), "Atmospheric Convection", Oxford University
       Press.

    Examples
    --------
    >>> virtual_temperature(300.0, 0.02).round(2)
    np.float64(303.58)
    """
    t = within("temperature", temperature, 100.0, 400.0, "K", _KELVIN)
    return np.asarray(t * _density_factor(mixing_ratio, condensate), dtype=np.float64)


def temperature_from_virtual_temperature(
    virtual: ArrayLike, mixing_ratio: ArrayLike, condensate: ArrayLike = 0.0
) -> NDArray[np.float64]:
    """Air temperature that belongs to a virtual temperature.

    The inverse of `virtual_temperature`.

    Parameters
    ----------
    virtual : array_like, any shape [K]
        Virtual temperature, 100 K to 450 K.
    mixing_ratio, condensate : array_like, broadcast with `virtual` [kg kg-1 of dry air]
        As in `virtual_temperature`.

    Returns
    -------
    ndarray, broadcast shape [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Examples
    --------
    >>> temperature_from_virtual_temperature(303.58, 0.02).round(1)
    np.float64(300.0)
    """
    tv = within("virtual", virtual, 100.0, 450.0, "K", _KELVIN)
    return np.asarray(tv / _density_factor(mixing_ratio, condensate), dtype=np.float64)


def potential_temperature(pressure: ArrayLike, temperature: ArrayLike) -> NDArray[np.float64]:
    """Temperature the air would have if brought to 1000 hPa without exchange of heat.

    Kept by unsaturated air as it rises and sinks. The exponent is that of dry
    air whatever the humidity, which moist air misses by at most 0.1 K over
    300 hPa.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Air pressure, 100 Pa to 120000 Pa.
    temperature : array_like, broadcasts with `pressure` [K]
        Air temperature, 100 K to 400 K.

    Returns
    -------
    ndarray, broadcast shape [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    theta = T (p0 / p)^(Rd / cpd), p0 = 1000 hPa; WMO (1966) [1]_.

    References
    ----------
    .. [1] WMO (1966), "International Meteorological Tables", WMO-No. 188.

    Examples
    --------
    >>> potential_temperature(70000.0, 273.15).round(2)
    np.float64(302.42)
    """
    p = within("pressure", pressure, 100.0, 1.2e5, "Pa", _PASCALS)
    t = within("temperature", temperature, 100.0, 400.0, "K", _KELVIN)
    return np.asarray(t * (REFERENCE_PRESSURE / p) ** KAPPA, dtype=np.float64)


def temperature_from_potential_temperature(pressure: ArrayLike, potential: ArrayLike) -> NDArray[np.float64]:
    """Temperature at a pressure of air that has a given potential temperature.

    The inverse of `potential_temperature`.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Air pressure, 100 Pa to 120000 Pa.
    potential : array_like, broadcasts with `pressure` [K]
        Potential temperature, 100 K to 3000 K.

    Returns
    -------
    ndarray, broadcast shape [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Examples
    --------
    >>> temperature_from_potential_temperature(70000.0, 302.42).round(1)
    np.float64(273.1)
    """
    p = within("pressure", pressure, 100.0, 1.2e5, "Pa", _PASCALS)
    theta = within("potential", potential, 100.0, 3000.0, "K", _KELVIN)
    return np.asarray(theta * (p / REFERENCE_PRESSURE) ** KAPPA, dtype=np.float64)


def virtual_potential_temperature(
    pressure: ArrayLike, temperature: ArrayLike, mixing_ratio: ArrayLike, condensate: ArrayLike = 0.0
) -> NDArray[np.float64]:
    """Potential temperature that ranks air by its density at one pressure.

    Air with the larger value rises past the other.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Air pressure, 100 Pa to 120000 Pa.
    temperature : array_like, broadcasts with `pressure` [K]
        Air temperature, 100 K to 400 K.
    mixing_ratio, condensate : array_like, broadcast with `pressure` [kg kg-1 of dry air]
        As in `virtual_temperature`.

    Returns
    -------
    ndarray, broadcast shape [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    Virtual temperature times (p0 / p)^(Rd / cpd).

    Examples
    --------
    >>> virtual_potential_temperature(1.0e5, 300.0, 0.02).round(2)
    np.float64(303.58)
    """
    return np.asarray(
        potential_temperature(pressure, temperature) * _density_factor(mixing_ratio, condensate), dtype=np.float64
    )


def temperature_from_virtual_potential_temperature(
    pressure: ArrayLike, virtual_potential: ArrayLike, mixing_ratio: ArrayLike, condensate: ArrayLike = 0.0
) -> NDArray[np.float64]:
    """Temperature at a pressure of air that has a given virtual potential temperature.

    The inverse of `virtual_potential_temperature`.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Air pressure, 100 Pa to 120000 Pa.
    virtual_potential : array_like, broadcasts with `pressure` [K]
        Virtual potential temperature, 100 K to 3000 K.
    mixing_ratio, condensate : array_like, broadcast with `pressure` [kg kg-1 of dry air]
        As in `virtual_temperature`.

    Returns
    -------
    ndarray, broadcast shape [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Examples
    --------
    >>> temperature_from_virtual_potential_temperature(1.0e5, 303.58, 0.02).round(1)
    np.float64(300.0)
    """
    virtual = temperature_from_potential_temperature(pressure, virtual_potential)
    return np.asarray(virtual / _density_factor(mixing_ratio, condensate), dtype=np.float64)


def _density_factor(mixing_ratio: ArrayLike, condensate: ArrayLike) -> NDArray[np.float64]:
    """Virtual temperature over temperature."""
    r = within("mixing_ratio", mixing_ratio, 0.0, 0.622, "kg/kg", _PER_KILOGRAM)
    c = within("condensate", condensate, 0.0, 0.1, "kg/kg", _PER_KILOGRAM)
    return np.asarray((1.0 + r / EPSILON) / (1.0 + r + c), dtype=np.float64)
