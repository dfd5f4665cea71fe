"""The wet bulb: how cold air gets when water evaporates into it until it is saturated."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air.saturation import (
    dew_point,
    latent_heat_of_sublimation,
    latent_heat_of_vaporisation,
    saturation_vapour_pressure_over_ice,
    saturation_vapour_pressure_over_liquid,
)
from orolift.air.vapour import mixing_ratio_from_vapour_pressure, vapour_pressure_from_mixing_ratio
from orolift.checks import within
from orolift.constants import (
    EPSILON,
    HEAT_CAPACITY_DRY_AIR,
    HEAT_CAPACITY_VAPOUR,
    MELTING_POINT,
    R_VAPOUR,
)
from orolift.errors import OutOfRangeError

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

_KELVIN = "orolift works in kelvin; add 273.15 to degrees Celsius."
_COLDEST, _WARMEST = 160.0, 335.0  # K
_MOST_STEPS = 80
_SETTLED = 1e-10  # K


def wet_bulb_from_mixing_ratio(
    pressure: ArrayLike, temperature: ArrayLike, mixing_ratio: ArrayLike, *, over_ice: bool = False
) -> NDArray[np.float64]:
    """Thermodynamic wet-bulb temperature at constant pressure.

    The temperature of adiabatic saturation, which a well ventilated wet-bulb
    thermometer shows within 0.1 K or so. Snow melts by it. For the wet-bulb
    temperature along a pseudoadiabat use the potential form.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Air pressure, 100 Pa to 120000 Pa.
    temperature : array_like, broadcasts with `pressure` [K]
        Air temperature, 160 K to 335 K.
    mixing_ratio : array_like, broadcasts with `pressure` [kg kg-1 of dry air]
        0 to 0.622. Supersaturated air gives a wet bulb above the temperature.
    over_ice : bool
        True: the bulb is coated with ice where the result is below 0 degrees
        Celsius. False: with water everywhere.

    Returns
    -------
    ndarray, broadcast shape [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    Enthalpy before equals enthalpy after, the water being supplied at the wet
    bulb's own temperature: (cpd + r cpv) (T - Tw) = (rs(Tw) - r) L(Tw). The
    residual is concave and falls with Tw, so Newton's method converges from
    the warm side; it stops at 1e-10 K. The equation of ASHRAE (2017) [1]_,
    eq. 33, with our constants.

    With `over_ice`, air whose water bulb is at or below freezing gets the ice
    bulb, at most 0 degrees Celsius.

    References
    ----------
    .. [1] ASHRAE (2017), "Handbook: Fundamentals", chapter 1, Psychrometrics.

    Examples
    --------
    >>> wet_bulb_from_mixing_ratio(101325.0, 298.15, 0.00988).round(1)
    np.float64(291.0)
    """
    t = within("temperature", temperature, _COLDEST, _WARMEST, "K", _KELVIN)
    r = np.asarray(mixing_ratio, dtype=np.float64)
    p = np.asarray(pressure, dtype=np.float64)
    vapour_pressure_from_mixing_ratio(p, r)  # range checks
    p, t, r = np.broadcast_arrays(p, t, r)
    wet = _adiabatic_saturation(p, t, r, ice=False)
    if over_ice and np.any(wet < MELTING_POINT):
        iced = np.minimum(_adiabatic_saturation(p, t, r, ice=True), MELTING_POINT)
        wet = np.where(wet < MELTING_POINT, iced, wet)
    return wet


def mixing_ratio_from_wet_bulb(
    pressure: ArrayLike, temperature: ArrayLike, wet_bulb: ArrayLike, *, over_ice: bool = False
) -> NDArray[np.float64]:
    """Mixing ratio of air of a given temperature and wet-bulb temperature.

    The inverse of `wet_bulb_from_mixing_ratio`, closed form.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Air pressure, 100 Pa to 120000 Pa.
    temperature : array_like, broadcasts with `pressure` [K]
        Air temperature, 160 K to 335 K.
    wet_bulb : array_like, broadcasts with `pressure` [K]
        Thermodynamic wet-bulb temperature, 160 K to 335 K.
    over_ice : bool
        True: the bulb carries ice below 0 degrees Celsius, water above.

    Returns
    -------
    ndarray, broadcast shape [kg kg-1 of dry air]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range, or the wet bulb is lower than
        that of air without vapour.

    Notes
    -----
    As `wet_bulb_from_mixing_ratio`, solved for r.

    Examples
    --------
    >>> mixing_ratio_from_wet_bulb(101325.0, 298.15, 291.04).round(4)
    np.float64(0.0099)
    """
    t = within("temperature", temperature, _COLDEST, _WARMEST, "K", _KELVIN)
    tw = within("wet_bulb", wet_bulb, _COLDEST, _WARMEST, "K", _KELVIN)
    iced = over_ice & (tw < MELTING_POINT)
    e = np.where(iced, saturation_vapour_pressure_over_ice(tw), saturation_vapour_pressure_over_liquid(tw))
    latent = np.where(iced, latent_heat_of_sublimation(tw), latent_heat_of_vaporisation(tw))
    saturated = mixing_ratio_from_vapour_pressure(pressure, e)
    r = (saturated * latent - HEAT_CAPACITY_DRY_AIR * (t - tw)) / (latent + HEAT_CAPACITY_VAPOUR * (t - tw))
    if np.any(r < -1e-12):
        dry = r < -1e-12
        raise OutOfRangeError(
            f"wet_bulb: {int(dry.sum())} of {dry.size} values are lower than the wet bulb of air without vapour at "
            "that temperature. Check that temperature and wet bulb belong to the same time and unit."
        )
    return np.asarray(np.maximum(r, 0.0), dtype=np.float64)


def _adiabatic_saturation(
    p: NDArray[np.float64], t: NDArray[np.float64], r: NDArray[np.float64], *, ice: bool
) -> NDArray[np.float64]:
    """Temperature after isobaric evaporation to saturation over one phase, by Newton's method from the warm side."""
    saturation = saturation_vapour_pressure_over_ice if ice else saturation_vapour_pressure_over_liquid
    latent_heat = latent_heat_of_sublimation if ice else latent_heat_of_vaporisation
    heat_capacity = HEAT_CAPACITY_DRY_AIR + r * HEAT_CAPACITY_VAPOUR
    # warmest sensible result: beyond it the vapour would fill the pressure, where the equation has a pole
    warmest = dew_point(np.minimum(0.9 * p, saturation_vapour_pressure_over_liquid(_WARMEST)))
    tw = np.minimum(t, warmest)
    for _ in range(_MOST_STEPS):
        e = saturation(tw)
        latent = latent_heat(tw)
        saturated = EPSILON * e / (p - e)
        residual = heat_capacity * (t - tw) - (saturated - r) * latent
        slope = -heat_capacity - saturated * p / (p - e) * latent**2 / (R_VAPOUR * tw**2)
        warmer = np.minimum(tw - residual / slope, warmest)
        settled = np.abs(warmer - tw) < _SETTLED
        tw = warmer
        if np.all(settled):
            break
    if np.any(tw >= warmest):
        raise OutOfRangeError(
            f"mixing_ratio: {int(np.sum(tw >= warmest))} of {tw.size} values are far above saturation, "
            f"so that the wet bulb would exceed {_WARMEST:g} K. Divide grams per kilogram by 1000."
        )
    return np.asarray(tw, dtype=np.float64)
