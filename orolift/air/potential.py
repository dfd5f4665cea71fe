"""Equivalent and wet-bulb potential temperature: what saturated ascent does not change."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air import pseudoadiabat
from orolift.air.condensation import condensation_point, condensation_temperature_bolton_1980
from orolift.air.parcel import Parcel, entropy
from orolift.air.ranges import checked_mixing_ratio, checked_pressure, checked_temperature
from orolift.checks import within
from orolift.constants import (
    EPSILON,
    HEAT_CAPACITY_DRY_AIR,
    HEAT_CAPACITY_LIQUID,
    KAPPA,
    REFERENCE_PRESSURE,
    TRIPLE_POINT_TEMPERATURE,
)

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

_TRACE = 1e-9  # vapour given to dry air so that it condenses somewhere; worth 3e-6 K
_HIGH_UP = 5000.0  # Pa; vapour left there is worth less than 1e-3 K
_STEPS = 40


def equivalent_potential_temperature(
    pressure: ArrayLike, temperature: ArrayLike, mixing_ratio: ArrayLike, *, freezing: bool = False
) -> NDArray[np.float64]:
    """Potential temperature the air has after all its vapour has condensed and left.

    Pseudoadiabatic: unchanged by `ascent` with `removed_share` 1. What a
    reversible move leaves unchanged is `reversible_equivalent_potential_temperature`.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        100 Pa to 120 kPa.
    temperature : array_like, broadcasts [K]
        120 K to 340 K.
    mixing_ratio : array_like, broadcasts [kg per kg of dry air]
        Vapour, 0 to 0.2; condensate does not count.
    freezing : bool
        True adds the heat of fusion as in `parcel`; printed tables and diagrams leave it out.

    Returns
    -------
    ndarray, broadcast shape [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    Integrated along our own pseudoadiabat to 50 hPa, exact for the constants of
    orolift to 0.003 K (0.05 K with freezing). Bolton's eq. 43 differs by up to 0.2 K.

    Examples
    --------
    >>> print(equivalent_potential_temperature(95000.0, 287.15, 0.008).round(1))
    314.3
    """
    p0, t0, v0 = _checked(pressure, temperature, mixing_ratio)
    p, t = _condensed(p0, t0, v0, freezing=freezing)
    end = np.minimum(p, _HIGH_UP)
    t, _ = pseudoadiabat.along(p, t, end, np.float64(0.0), np.float64(1.0), freezing=freezing, steps=_STEPS)
    return np.asarray(t * (REFERENCE_PRESSURE / end) ** KAPPA)


def reversible_equivalent_potential_temperature(
    pressure: ArrayLike, temperature: ArrayLike, mixing_ratio: ArrayLike, cloud: ArrayLike = 0.0
) -> NDArray[np.float64]:
    """Temperature dry air at 1000 hPa has together with all the water as liquid, at the same entropy.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        100 Pa to 120 kPa.
    temperature : array_like, broadcasts [K]
        120 K to 340 K.
    mixing_ratio, cloud : array_like, broadcast [kg per kg of dry air]
        Vapour and condensate, each 0 to 0.2.

    Returns
    -------
    ndarray, broadcast shape [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    T0 exp(s / (cpd + r c_liquid)) with s of `parcel.entropy` (without freezing), T0 = 273.16 K and r all the
    water; the form of Emanuel (1994) [1]_, eq. 4.5.11 (number from memory). Unchanged by `moved_to`.

    References
    ----------
    .. [1] K. A. Emanuel (1994), "Atmospheric Convection", Oxford University Press.

    Examples
    --------
    >>> print(reversible_equivalent_potential_temperature(95000.0, 287.15, 0.008).round(1))
    312.6
    """
    p, t, v = _checked(pressure, temperature, mixing_ratio)
    c = checked_mixing_ratio(cloud, "cloud")
    s = entropy(Parcel(p, t, v, c), freezing=False)
    return np.asarray(TRIPLE_POINT_TEMPERATURE * np.exp(s / (HEAT_CAPACITY_DRY_AIR + (v + c) * HEAT_CAPACITY_LIQUID)))


def wet_bulb_potential_temperature(
    pressure: ArrayLike, temperature: ArrayLike, mixing_ratio: ArrayLike, *, freezing: bool = False
) -> NDArray[np.float64]:
    """Temperature at 1000 hPa on the pseudoadiabat the air reaches when it condenses.

    Parameters
    ----------
    pressure, temperature, mixing_ratio : array_like
        As in `equivalent_potential_temperature`.
    freezing : bool
        True adds the heat of fusion as in `parcel`; printed diagrams leave it out.

    Returns
    -------
    ndarray, broadcast shape [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range, or the result is above 340 K.

    Notes
    -----
    Along our own pseudoadiabat, to 0.003 K (0.05 K with freezing).

    Examples
    --------
    >>> print(wet_bulb_potential_temperature(95000.0, 287.15, 0.008).round(1))
    286.8
    """
    p, t = _condensed(*_checked(pressure, temperature, mixing_ratio), freezing=freezing)
    end = np.full_like(p, REFERENCE_PRESSURE)
    t, _ = pseudoadiabat.along(p, t, end, np.float64(0.0), np.float64(1.0), freezing=freezing, steps=_STEPS)
    return checked_temperature(t, "wet-bulb potential temperature")


def equivalent_potential_temperature_bolton_1980(
    pressure: ArrayLike, temperature: ArrayLike, mixing_ratio: ArrayLike
) -> NDArray[np.float64]:
    """Equivalent potential temperature from Bolton's most exact fit, eq. 43.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        100 Pa to 120 kPa.
    temperature : array_like, broadcasts [K]
        233 K to 323 K.
    mixing_ratio : array_like, broadcasts [kg per kg of dry air]
        1e-6 to 0.05.

    Returns
    -------
    ndarray, broadcast shape [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    Bolton (1980) [1]_, eq. 43 with eq. 21. Its own error is given there as 0.3 K at most.

    References
    ----------
    .. [1] D. Bolton (1980), "The computation of equivalent potential temperature",
       Mon. Weather Rev. 108, 1046-1053,
       doi:10.1175/1520-0493(1980)108<1046:TCOEPT>2.0.CO;2.

    Examples
    --------
    >>> print(equivalent_potential_temperature_bolton_1980(85000.0, 293.15, 0.015469).round(2))
    353.89
    """
    p, t, r, _, t_level = _bolton(pressure, temperature, mixing_ratio)
    theta = t * (1.0e5 / p) ** (0.2854 * (1.0 - 0.28e-3 * r))
    return np.asarray(theta * np.exp((3.376 / t_level - 0.00254) * r * (1.0 + 0.81e-3 * r)))


def equivalent_potential_temperature_bolton_1980_eq_39(
    pressure: ArrayLike, temperature: ArrayLike, mixing_ratio: ArrayLike
) -> NDArray[np.float64]:
    """Equivalent potential temperature from Bolton's fit on the pressure of dry air, eq. 39.

    Parameters
    ----------
    pressure, temperature, mixing_ratio : array_like
        As in `equivalent_potential_temperature_bolton_1980`.

    Returns
    -------
    ndarray, broadcast shape [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    Bolton (1980), eq. 39 with eq. 21 and eq. 24 (this number from memory) for the potential temperature at the
    condensation level.

    Examples
    --------
    >>> print(equivalent_potential_temperature_bolton_1980_eq_39(85000.0, 293.15, 0.015469).round(2))
    353.92
    """
    p, t, r, e, t_level = _bolton(pressure, temperature, mixing_ratio)
    theta = t * (1.0e5 / (p - e)) ** 0.2854 * (t / t_level) ** (0.28e-3 * r)
    return np.asarray(theta * np.exp((3.036 / t_level - 0.00178) * r * (1.0 + 0.448e-3 * r)))


def wet_bulb_potential_temperature_davies_jones_2008(
    equivalent_potential_temperature: ArrayLike,
) -> NDArray[np.float64]:
    """Wet-bulb potential temperature from a fit to Bolton's equivalent one.

    Parameters
    ----------
    equivalent_potential_temperature : array_like, any shape [K]
        As `equivalent_potential_temperature_bolton_1980` gives it, 257 K to 420 K.

    Returns
    -------
    ndarray, same shape [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    Davies-Jones (2008) [1]_, eq. 3.8.

    References
    ----------
    .. [1] R. Davies-Jones (2008), "An efficient and accurate method for computing
       the wet-bulb temperature along pseudoadiabats", Mon. Weather Rev. 136,
       2764-2785, doi:10.1175/2007MWR2224.1.

    Examples
    --------
    >>> print(wet_bulb_potential_temperature_davies_jones_2008(321.53).round(2))
    289.15
    """
    hint = "orolift works in kelvin; the fit holds no further."
    theta = within("equivalent_potential_temperature", equivalent_potential_temperature, 257.0, 420.0, "K", hint)
    x = theta / 273.15
    above = 7.101574 + x * (-20.68208 + x * (16.11182 + x * (2.574631 - 5.205688 * x)))
    below = 1.0 + x * (-3.552497 + x * (3.781782 + x * (-0.6899655 - 0.5929340 * x)))
    return np.asarray(theta - np.exp(above / below))


def _checked(
    pressure: ArrayLike, temperature: ArrayLike, mixing_ratio: ArrayLike
) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]:
    """All three in range and of one shape."""
    p, t, v = np.broadcast_arrays(
        checked_pressure(pressure), checked_temperature(temperature), checked_mixing_ratio(mixing_ratio)
    )
    return p, t, v


def _condensed(
    pressure: NDArray[np.float64], temperature: NDArray[np.float64], vapour: NDArray[np.float64], *, freezing: bool
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Pressure and temperature of the condensation point."""
    parcel = Parcel(pressure, temperature, np.maximum(vapour, _TRACE), np.zeros_like(vapour))
    point = condensation_point(parcel, freezing=freezing)
    return point.pressure, point.temperature


def _bolton(pressure: ArrayLike, temperature: ArrayLike, mixing_ratio: ArrayLike) -> tuple[NDArray[np.float64], ...]:
    """Pressure, temperature, mixing ratio in g/kg, vapour pressure and temperature of the condensation level."""
    p = checked_pressure(pressure)
    hint = "Give kg of water per kg of dry air; divide g per kg by 1000."
    r = within("mixing_ratio", mixing_ratio, 1e-6, 0.05, "kg/kg", hint)
    e = p * r / (EPSILON + r)
    t = np.asarray(temperature, dtype=np.float64)
    return p, t, r * 1000.0, e, condensation_temperature_bolton_1980(t, e)
