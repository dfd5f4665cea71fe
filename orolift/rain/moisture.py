"""Moisture scales of the linear theory of orographic rain: depth, water for each metre of uplift, stability."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air.saturation import latent_heat_of_vaporisation, saturation_vapour_pressure_over_liquid
from orolift.checks import within
from orolift.constants import GRAVITY, R_VAPOUR

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

_KELVIN = "orolift works in kelvin; add 273.15 to degrees Celsius."
_PER_METRE = "Give the cooling with height in K per m, positive; divide K per km by 1000."


def _temperature(values: ArrayLike) -> NDArray[np.float64]:
    return within("temperature", values, 200.0, 330.0, "K", _KELVIN)


def _lapse(name: str, values: ArrayLike) -> NDArray[np.float64]:
    return within(name, values, 1e-4, 0.02, "K/m", _PER_METRE)


def saturated_vapour_density(temperature: ArrayLike) -> NDArray[np.float64]:
    """Mass of vapour in a cubic metre of saturated air.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        200 K to 330 K.

    Returns
    -------
    ndarray, shape of `temperature` [kg m-3]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    Ideal gas: e* / (Rv T), saturated over liquid water.

    Examples
    --------
    >>> print(saturated_vapour_density(283.15).round(5))
    0.0094
    """
    t = _temperature(temperature)
    return np.asarray(saturation_vapour_pressure_over_liquid(t) / (R_VAPOUR * t))


def vapour_scale_height(
    temperature: ArrayLike, lapse_rate: ArrayLike, *, latent_heat: ArrayLike | None = None
) -> NDArray[np.float64]:
    """Height in which the vapour of saturated air falls to 1/e.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        At the reference level, 200 K to 330 K.
    lapse_rate : array_like, broadcasts [K m-1]
        Cooling of the surroundings with height, 0.0001 to 0.02.
    latent_heat : array_like, optional [J kg-1]
        Of vaporisation; by default that of `temperature`.

    Returns
    -------
    ndarray, broadcast shape [m]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    Hw = Rv T^2 / (L G), G the lapse rate: Smith and Barstad (2004) [1]_ (equation from memory,
    derived again from Clausius and Clapeyron with T constant but in the exponent).

    References
    ----------
    .. [1] R. B. Smith and I. Barstad (2004), "A linear theory of orographic
       precipitation", J. Atmos. Sci. 61, 1377-1391.

    Examples
    --------
    >>> print(vapour_scale_height(280.0, 0.0058).round(0))
    2510.0
    """
    t = _temperature(temperature)
    latent = latent_heat_of_vaporisation(t) if latent_heat is None else np.asarray(latent_heat, dtype=np.float64)
    return np.asarray(R_VAPOUR * t**2 / (latent * _lapse("lapse_rate", lapse_rate)))


def uplift_sensitivity(
    temperature: ArrayLike, lapse_rate: ArrayLike, saturated_lapse_rate: ArrayLike
) -> NDArray[np.float64]:
    """Water that condenses above each square metre for each metre the whole column is lifted.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        At the reference level, 200 K to 330 K.
    lapse_rate, saturated_lapse_rate : array_like, broadcast [K m-1]
        Cooling with height of the surroundings, and of rising saturated air.

    Returns
    -------
    ndarray, broadcast shape [kg m-3]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    Cw = (saturated vapour density) (saturated lapse rate) / (lapse rate):
    Smith and Barstad (2004) [1]_ (equation from memory, derived again).

    References
    ----------
    .. [1] R. B. Smith and I. Barstad (2004), "A linear theory of orographic
       precipitation", J. Atmos. Sci. 61, 1377-1391.

    Examples
    --------
    >>> print(uplift_sensitivity(283.15, 0.0065, 0.00525).round(5))
    0.00759
    """
    ratio = _lapse("saturated_lapse_rate", saturated_lapse_rate) / _lapse("lapse_rate", lapse_rate)
    return np.asarray(saturated_vapour_density(temperature) * ratio)


def moist_stability_squared(
    temperature: ArrayLike, lapse_rate: ArrayLike, saturated_lapse_rate: ArrayLike
) -> NDArray[np.float64]:
    """Buoyancy frequency squared of saturated air, in the simple form that belongs to the theory.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        200 K to 330 K.
    lapse_rate : array_like, broadcasts [K m-1]
        Cooling of the surroundings with height, -0.05 to 0.05.
    saturated_lapse_rate : array_like, broadcasts [K m-1]
        Cooling of rising saturated air.

    Returns
    -------
    ndarray, broadcast shape [s-2]
        Negative where saturated air that is lifted goes on rising.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    (g / T)(saturated lapse rate - lapse rate): Smith and Barstad (2004) [1]_ (equation from
    memory). The weight of the vapour and cloud is left out.

    References
    ----------
    .. [1] R. B. Smith and I. Barstad (2004), "A linear theory of orographic
       precipitation", J. Atmos. Sci. 61, 1377-1391.

    Examples
    --------
    >>> print(moist_stability_squared(280.0, 0.005, 0.0057).round(8))
    2.452e-05
    """
    gamma = within("lapse_rate", lapse_rate, -0.05, 0.05, "K/m", _PER_METRE)
    return np.asarray(
        GRAVITY / _temperature(temperature) * (_lapse("saturated_lapse_rate", saturated_lapse_rate) - gamma)
    )
