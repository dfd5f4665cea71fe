"""Saturation of water vapour and the latent heats that belong to it.

Heat capacities are constant, so latent heats are linear in temperature and
the saturation pressures follow from them exactly (Rankine-Kirchhoff form). How
liquid and ice are joined below 0 degrees Celsius is told in `phase`.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air import phase
from orolift.air.ranges import checked_temperature
from orolift.checks import within
from orolift.errors import OutOfRangeError

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray


def _linear(latent: NDArray[np.float64], slope: NDArray[np.float64], temperature: ArrayLike) -> NDArray[np.float64]:
    """Latent heat from its scaled value at the triple point and slope."""
    t = checked_temperature(temperature) / phase.TRIPLE
    return np.asarray(phase.R_VAPOUR * phase.TRIPLE * (latent + slope * (t - 1.0)))


def latent_heat_of_vaporisation(temperature: ArrayLike) -> NDArray[np.float64]:
    """Heat needed to turn liquid water into vapour.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        120 K to 340 K.

    Returns
    -------
    ndarray, shape of `temperature` [J kg-1]
        2.50 MJ kg-1 at 0 degrees Celsius, 1 % less at 10 degrees.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside 120-340 K.

    Notes
    -----
    Kirchhoff's law with constant heat capacities: the latent heat at the
    triple point (IAPWS R6-95) plus (cp_vapour - c_liquid)(T - 273.16 K). Within
    0.25 % of the IAPWS steam tables from 0 to 40 degrees Celsius.

    Examples
    --------
    >>> latent_heat_of_vaporisation([273.16, 293.15]).round(-2)
    array([2500900., 2456100.])
    """
    return _linear(phase.VAPORISATION, phase.VAPORISATION_SLOPE, temperature)


def latent_heat_of_fusion(temperature: ArrayLike) -> NDArray[np.float64]:
    """Heat needed to melt ice at a given temperature.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        120 K to 340 K; liquid below 0 degrees Celsius is supercooled.

    Returns
    -------
    ndarray, shape of `temperature` [J kg-1]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside 120-340 K.

    Notes
    -----
    Difference of the latent heats of sublimation and vaporisation, so that
    going round the three phases adds up to nothing.

    Examples
    --------
    >>> latent_heat_of_fusion(273.16).round(-2)
    np.float64(333500.0)
    """
    return _linear(phase.FUSION, phase.FUSION_SLOPE, temperature)


def latent_heat_of_sublimation(temperature: ArrayLike) -> NDArray[np.float64]:
    """Heat needed to turn ice into vapour.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        120 K to 340 K.

    Returns
    -------
    ndarray, shape of `temperature` [J kg-1]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside 120-340 K.

    Notes
    -----
    As `latent_heat_of_vaporisation`, with the heat capacity of ice and the
    latent heat of sublimation at the triple point (IAPWS R10-06).

    Examples
    --------
    >>> latent_heat_of_sublimation(273.16).round(-2)
    np.float64(2834400.0)
    """
    return _linear(phase.SUBLIMATION, phase.SUBLIMATION_SLOPE, temperature)


def saturation_vapour_pressure_over_liquid(temperature: ArrayLike) -> NDArray[np.float64]:
    """Vapour pressure in equilibrium with liquid water, supercooled below 0 degrees Celsius.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        120 K to 340 K.

    Returns
    -------
    ndarray, shape of `temperature` [Pa]
        Doubles about every 10 K.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside 120-340 K.

    Notes
    -----
    Clausius and Clapeyron's equation integrated with the linear latent heat,
    the form used by Romps (2017) [1]_, with the constants of `constants`.
    Within 0.15 % of IAPWS from 0 to 40 degrees Celsius. The vapour is an ideal
    gas: the 0.3-0.5 % by which air at ground pressure enhances saturation is left out.

    References
    ----------
    .. [1] D. M. Romps (2017), "Exact expression for the lifting condensation
       level", J. Atmos. Sci. 74, 3891-3900, doi:10.1175/JAS-D-17-0102.1.

    Examples
    --------
    >>> saturation_vapour_pressure_over_liquid([273.16, 293.15]).round(1)
    array([ 611.7, 2338. ])
    """
    t = checked_temperature(temperature) / phase.TRIPLE
    log_e = phase.log_saturation(np.log(t), t, freezing=False)
    return np.asarray(phase.TRIPLE_PRESSURE * np.exp(log_e))


def saturation_vapour_pressure_over_ice(temperature: ArrayLike) -> NDArray[np.float64]:
    """Vapour pressure in equilibrium with ice.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        120 K to 340 K; above the triple point it is a continuation without ice to belong to.

    Returns
    -------
    ndarray, shape of `temperature` [Pa]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside 120-340 K.

    Notes
    -----
    As `saturation_vapour_pressure_over_liquid`, with the latent heat of
    sublimation. Within 0.3 % of IAPWS R14-08 from 0 to -40 degrees Celsius.

    Examples
    --------
    >>> saturation_vapour_pressure_over_ice([273.16, 253.15]).round(1)
    array([611.7, 103.3])
    """
    t = checked_temperature(temperature) / phase.TRIPLE
    slope = phase.SUBLIMATION_SLOPE
    log_e = slope * np.log(t) + (phase.SUBLIMATION - slope) * (1.0 - 1.0 / t)
    return np.asarray(phase.TRIPLE_PRESSURE * np.exp(log_e))


def ice_share(temperature: ArrayLike) -> NDArray[np.float64]:
    """Mass share of ice in what has condensed.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        120 K to 340 K.

    Returns
    -------
    ndarray, shape of `temperature` [1]
        0 at and above 273.16 K, 1 at and below 253.15 K.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside 120-340 K.

    Notes
    -----
    x (2 - x), where x falls from 1 to 0 with ln T over that range. Why it
    is not a straight line: see `phase`.

    Examples
    --------
    >>> ice_share([280.0, 263.155, 250.0]).round(3)
    array([0.  , 0.74, 1.  ])
    """
    return np.asarray(phase.ice_part(np.log(checked_temperature(temperature) / phase.TRIPLE)))


def saturation_vapour_pressure(temperature: ArrayLike, *, freezing: bool = True) -> NDArray[np.float64]:
    """Vapour pressure in equilibrium with the condensate of a cloud, liquid and ice.

    Use `saturation_vapour_pressure_over_liquid` for relative humidity, which
    is defined over liquid at all temperatures.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        120 K to 340 K.
    freezing : bool
        False keeps all condensate liquid.

    Returns
    -------
    ndarray, shape of `temperature` [Pa]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside 120-340 K.

    Notes
    -----
    The logarithm is the mean of the logarithms over liquid and ice, weighted by
    `ice_share`: that of one substance whose Gibbs energy is the weighted mean.

    Examples
    --------
    >>> saturation_vapour_pressure([283.15, 263.15, 243.15]).round(1)
    array([1227.8,  266.6,   38. ])
    """
    t = checked_temperature(temperature) / phase.TRIPLE
    log_e = phase.log_saturation(np.log(t), t, freezing=freezing)
    return np.asarray(phase.TRIPLE_PRESSURE * np.exp(log_e))


def latent_heat(temperature: ArrayLike, *, freezing: bool = True) -> NDArray[np.float64]:
    """Heat needed to turn the condensate of a cloud into vapour.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        120 K to 340 K.
    freezing : bool
        False keeps all condensate liquid.

    Returns
    -------
    ndarray, shape of `temperature` [J kg-1]
        That of vaporisation from 273.16 K up, that of sublimation from 253.15 K
        down. Between them up to 4 % more than that of sublimation: see `phase`.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside 120-340 K.

    Notes
    -----
    Rv T^2 d ln e / dT of `saturation_vapour_pressure`, with the derivative of
    the ice share, so that Clausius and Clapeyron's equation holds exactly.

    Examples
    --------
    >>> latent_heat([273.16, 253.15]).round(-3)
    array([2501000., 2839000.])
    """
    t = checked_temperature(temperature) / phase.TRIPLE
    _, bound, _ = phase.condensate(np.log(t), t, freezing=freezing)
    return np.asarray(phase.R_VAPOUR * phase.TRIPLE * t * bound)


def saturation_mixing_ratio(
    pressure: ArrayLike, temperature: ArrayLike, *, freezing: bool = True
) -> NDArray[np.float64]:
    """Mass of vapour per mass of dry air in saturated air.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Total pressure, above the saturation pressure.
    temperature : array_like, broadcasts with `pressure` [K]
        120 K to 340 K.
    freezing : bool
        False for saturation over liquid at all temperatures.

    Returns
    -------
    ndarray, broadcast shape [kg kg-1]

    Raises
    ------
    OutOfRangeError
        If a temperature is out of range, or saturation pressure is not below the pressure.

    Examples
    --------
    >>> saturation_mixing_ratio(90000.0, [288.15, 263.15]).round(5)
    array([0.01201, 0.00185])
    """
    e = saturation_vapour_pressure(temperature, freezing=freezing)
    p = np.asarray(pressure, dtype=np.float64)
    boiling = ~(p > e)  # written so that NaN counts as outside
    if np.any(boiling):
        raise OutOfRangeError(
            f"pressure: {int(np.sum(boiling))} of {boiling.size} values are not above the saturation pressure of their "
            "temperature, where water boils. orolift works in pascal; multiply hectopascal by 100."
        )
    return np.asarray(phase.EPSILON * e / (p - e))


def _saturation_temperature(
    vapour_pressure: ArrayLike, latent: NDArray[np.float64], slope: NDArray[np.float64]
) -> NDArray[np.float64]:
    """Temperature at which a substance with this scaled latent heat and slope saturates the vapour."""
    hint = "orolift works in pascal; air without any vapour has no dew point."
    e = within("vapour_pressure", vapour_pressure, 1e-8, 1.2e5, "Pa", hint)
    return np.asarray(phase.TRIPLE * phase.saturation_point(np.log(e / phase.TRIPLE_PRESSURE), latent, slope))


def dew_point(vapour_pressure: ArrayLike) -> NDArray[np.float64]:
    """Temperature at which vapour saturates over liquid water.

    Parameters
    ----------
    vapour_pressure : array_like, any shape [Pa]
        1e-8 Pa to 120 kPa.

    Returns
    -------
    ndarray, shape of `vapour_pressure` [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range; air without vapour has no dew point.

    Notes
    -----
    Exact inverse of `saturation_vapour_pressure_over_liquid`, in closed form
    with the lower branch of the Lambert function.

    Examples
    --------
    >>> dew_point([611.657, 1227.8]).round(2)
    array([273.16, 283.15])
    """
    return _saturation_temperature(vapour_pressure, phase.VAPORISATION, phase.VAPORISATION_SLOPE)


def frost_point(vapour_pressure: ArrayLike) -> NDArray[np.float64]:
    """Temperature at which vapour saturates over ice.

    Parameters
    ----------
    vapour_pressure : array_like, any shape [Pa]
        1e-8 Pa to 120 kPa; above 611.657 Pa there is no ice and `dew_point` is meant.

    Returns
    -------
    ndarray, shape of `vapour_pressure` [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    Exact inverse of `saturation_vapour_pressure_over_ice`, in closed form.

    Examples
    --------
    >>> frost_point([611.657, 103.3]).round(2)
    array([273.16, 253.15])
    """
    return _saturation_temperature(vapour_pressure, phase.SUBLIMATION, phase.SUBLIMATION_SLOPE)
