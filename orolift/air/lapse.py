"""How fast rising air cools, per metre and along its way."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air import phase, pseudoadiabat
from orolift.air.ranges import checked_mixing_ratio, checked_pressure, checked_temperature
from orolift.air.saturation import saturation_mixing_ratio
from orolift.constants import GRAVITY, HEAT_CAPACITY_DRY_AIR, HEAT_CAPACITY_VAPOUR, R_DRY, R_VAPOUR

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray


def dry_lapse_rate(mixing_ratio: ArrayLike = 0.0) -> NDArray[np.float64]:
    """Cooling with height of rising air that is not saturated.

    Parameters
    ----------
    mixing_ratio : array_like, any shape [kg per kg of dry air]
        Vapour, 0 to 0.2.

    Returns
    -------
    ndarray, shape of `mixing_ratio` [K m-1]
        Positive for cooling.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    g over the heat capacity of the moist air, for a parcel as dense as its surroundings.

    Examples
    --------
    >>> print((dry_lapse_rate() * 1000).round(2))
    9.75
    """
    r = checked_mixing_ratio(mixing_ratio)
    return np.asarray(GRAVITY * (1.0 + r) / (HEAT_CAPACITY_DRY_AIR + r * HEAT_CAPACITY_VAPOUR))


def saturated_lapse_rate(
    pressure: ArrayLike, temperature: ArrayLike, *, condensate: ArrayLike = 0.0, freezing: bool = True
) -> NDArray[np.float64]:
    """Cooling with height of rising saturated air.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        100 Pa to 120 kPa, above the saturation pressure.
    temperature : array_like, broadcasts [K]
        120 K to 340 K.
    condensate : array_like, broadcasts [kg per kg of dry air]
        Condensate the air carries, 0 to 0.2; none gives the pseudoadiabatic
        rate, all that has condensed the reversible one.
    freezing : bool
        False keeps all condensate liquid.

    Returns
    -------
    ndarray, broadcast shape [K m-1]
        Positive for cooling.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range, or water boils.

    Notes
    -----
    From dh = (volume) dp and hydrostatic balance with the density of the
    parcel itself, without approximation: with vapour v, condensate c of heat
    capacity cc, latent heat L,
    g (1 + v + c)(1 + L v / (Rd T)) / (cpd + v cpv + c cc + L^2 v (Rd + v Rv) / (Rd Rv T^2)).
    Without condensate it is the pseudoadiabatic rate of the Glossary of Meteorology [1]_.

    References
    ----------
    .. [1] American Meteorological Society, "Pseudoadiabatic lapse rate",
       Glossary of Meteorology.

    Examples
    --------
    >>> print((saturated_lapse_rate(1.0e5, [293.15, 273.16]) * 1000).round(2))
    [4.26 6.45]
    """
    p, t = checked_pressure(pressure), checked_temperature(temperature)
    c = checked_mixing_ratio(condensate, "condensate")
    v = saturation_mixing_ratio(p, t, freezing=freezing)
    scaled = t / phase.TRIPLE
    _, bound, slope = phase.condensate(np.log(scaled), scaled, freezing)
    latent = R_VAPOUR * t * bound
    c_condensate = HEAT_CAPACITY_VAPOUR - R_VAPOUR * slope
    heat = HEAT_CAPACITY_DRY_AIR + v * HEAT_CAPACITY_VAPOUR + c * c_condensate
    heat = heat + latent**2 * v * (R_DRY + v * R_VAPOUR) / (R_DRY * R_VAPOUR * t**2)
    return np.asarray(GRAVITY * (1.0 + v + c) * (1.0 + latent * v / (R_DRY * t)) / heat)


def pseudoadiabat_temperature(
    pressure: ArrayLike,
    temperature: ArrayLike,
    pressure_end: ArrayLike,
    *,
    freezing: bool = True,
    steps: int | None = None,
) -> NDArray[np.float64]:
    """Temperature further along the pseudoadiabat through a state of saturated air.

    Upward it is the ascent of saturated air that loses all condensate; downward
    the air is kept saturated, as the curves of a thermodynamic diagram are.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        100 Pa to 120 kPa.
    temperature : array_like, broadcasts [K]
        Of saturated air, 120 K to 340 K.
    pressure_end : array_like, broadcasts [Pa]
        Where the temperature is wanted, above or below; 100 Pa to 120 kPa.
    freezing : bool
        False keeps all condensate liquid, as printed diagrams do.
    steps : int, optional
        As in `parcel.ascent`.

    Returns
    -------
    ndarray, broadcast shape [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range, or water boils.

    Notes
    -----
    See `pseudoadiabat`; within 0.02 K (0.004 K without freezing) of the limit of many steps.

    Examples
    --------
    >>> print(pseudoadiabat_temperature(1.0e5, 293.15, [85000.0, 50000.0], freezing=False).round(2))
    [287.04 264.47]
    """
    p, t, end = np.broadcast_arrays(
        checked_pressure(pressure), checked_temperature(temperature), checked_pressure(pressure_end, "pressure_end")
    )
    saturation_mixing_ratio(p, t, freezing=freezing)  # refuses what would boil
    found, _ = pseudoadiabat.along(p, t, end, np.float64(0.0), np.float64(1.0), freezing=freezing, steps=steps)
    return np.asarray(found)
