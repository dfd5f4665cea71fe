"""Where rising air first condenses: over liquid or ice in closed form, over both by Newton's method."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift import constants
from orolift.air import pseudoadiabat
from orolift.air.lambert import lower_lambert
from orolift.air.parcel import Parcel
from orolift.air.ranges import checked_mixing_ratio, checked_pressure, checked_temperature
from orolift.checks import within

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray


@dataclass(frozen=True)
class CondensationLevel:
    """Where lifted air first saturates.

    Attributes
    ----------
    pressure : ndarray [Pa]
    temperature : ndarray [K]
    height_above : ndarray [m]
        Above the level the parcel came from; negative for air that is supersaturated there.
    """

    pressure: NDArray[np.float64]
    temperature: NDArray[np.float64]
    height_above: NDArray[np.float64]


@dataclass(frozen=True)
class _Substances:
    """What the closed form needs to know of air, vapour and the condensate."""

    gravity: float
    r_dry: float
    r_vapour: float
    cp_dry: float
    cp_vapour: float
    c_condensate: float
    triple_temperature: float
    triple_pressure: float
    latent_heat_triple: float


def _ours(heat_capacity: float, latent_heat: float) -> _Substances:
    """Our constants, with liquid or ice as the condensate."""
    return _Substances(
        gravity=constants.GRAVITY,
        r_dry=constants.R_DRY,
        r_vapour=constants.R_VAPOUR,
        cp_dry=constants.HEAT_CAPACITY_DRY_AIR,
        cp_vapour=constants.HEAT_CAPACITY_VAPOUR,
        c_condensate=heat_capacity,
        triple_temperature=constants.TRIPLE_POINT_TEMPERATURE,
        triple_pressure=constants.TRIPLE_POINT_PRESSURE,
        latent_heat_triple=latent_heat,
    )


_LIQUID = _ours(constants.HEAT_CAPACITY_LIQUID, constants.LATENT_HEAT_VAPORISATION_TRIPLE)
_ICE = _ours(constants.HEAT_CAPACITY_ICE, constants.LATENT_HEAT_SUBLIMATION_TRIPLE)


def lifting_condensation_level(
    pressure: ArrayLike, temperature: ArrayLike, mixing_ratio: ArrayLike
) -> CondensationLevel:
    """Level at which air lifted without exchange of heat saturates over liquid water.

    For saturation over the mixture of liquid and ice of `phase`, which comes
    lower in cold air, use `condensation_point`.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        100 Pa to 120 kPa.
    temperature : array_like, broadcasts [K]
        120 K to 340 K.
    mixing_ratio : array_like, broadcasts [kg per kg of dry air]
        1e-9 to 0.2; dry air condenses nowhere.

    Returns
    -------
    CondensationLevel

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    Romps (2017) [1]_, eq. 22, with our constants; the lower branch of Lambert's
    function is solved for in logarithmic form. Height and temperature are tied by
    cp (T - T_level) = g z, which holds for a parcel as dense as its surroundings.

    References
    ----------
    .. [1] D. M. Romps (2017), "Exact expression for the lifting condensation
       level", J. Atmos. Sci. 74, 3891-3900, doi:10.1175/JAS-D-17-0102.1.

    Examples
    --------
    >>> level = lifting_condensation_level(95000.0, 287.15, 0.008)
    >>> print(level.pressure.round(-1), level.temperature.round(2), level.height_above.round(0))
    89080.0 281.93 539.0
    """
    return _level(*_checked(pressure, temperature, mixing_ratio), _LIQUID)


def lifting_deposition_level(pressure: ArrayLike, temperature: ArrayLike, mixing_ratio: ArrayLike) -> CondensationLevel:
    """Level at which air lifted without exchange of heat saturates over ice.

    Parameters
    ----------
    pressure, temperature, mixing_ratio : array_like
        As in `lifting_condensation_level`.

    Returns
    -------
    CondensationLevel
        Meaningful where its temperature is below 273.16 K.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    Romps (2017), eq. 23, as in `lifting_condensation_level`.

    Examples
    --------
    >>> print(lifting_deposition_level(70000.0, 263.15, 0.001).temperature.round(1))
    252.5
    """
    return _level(*_checked(pressure, temperature, mixing_ratio), _ICE)


def condensation_point(parcel: Parcel, *, freezing: bool = True) -> Parcel:
    """Parcel at the place on its way up where it first saturates.

    `lifting_condensation_level` gives the same over liquid in closed form.

    Parameters
    ----------
    parcel : Parcel, any shape
        With at least 1e-9 kg of vapour per kg; one that is saturated already stays where it is.
    freezing : bool
        False for saturation over liquid at all temperatures.

    Returns
    -------
    Parcel

    Raises
    ------
    OutOfRangeError
        If a parcel is dry: it saturates nowhere.

    Examples
    --------
    >>> start = Parcel(np.array(95e3), np.array(287.15), np.array(0.008), np.array(0.0))
    >>> print(condensation_point(start).pressure.round(-1))
    89080.0
    """
    v = checked_mixing_ratio(parcel.vapour, "parcel.vapour", 1e-9)
    p, t = pseudoadiabat.first_saturation(parcel.pressure, parcel.temperature, v, parcel.cloud, freezing=freezing)
    return Parcel(p, t, v, parcel.cloud)


def condensation_temperature_bolton_1980(temperature: ArrayLike, vapour_pressure: ArrayLike) -> NDArray[np.float64]:
    """Temperature at the condensation level, from a fit.

    Part of Bolton's equivalent potential temperature; otherwise use
    `lifting_condensation_level`, which is exact.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        233 K to 323 K; the fit was made for 238 K to 308 K.
    vapour_pressure : array_like, broadcasts [Pa]
        0.1 Pa to 10 kPa.

    Returns
    -------
    ndarray, broadcast shape [K]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    Bolton (1980) [1]_, eq. 21: 2840 / (3.5 ln T - ln e - 4.805) + 55, e in hPa.

    References
    ----------
    .. [1] D. Bolton (1980), "The computation of equivalent potential temperature",
       Mon. Weather Rev. 108, 1046-1053,
       doi:10.1175/1520-0493(1980)108<1046:TCOEPT>2.0.CO;2.

    Examples
    --------
    >>> condensation_temperature_bolton_1980(293.15, 1227.2).round(2)
    np.float64(280.93)
    """
    hint = "orolift works in kelvin; add 273.15 to degrees Celsius."
    t = within("temperature", temperature, 233.0, 323.0, "K", hint)
    e = within("vapour_pressure", vapour_pressure, 0.1, 1e4, "Pa", "orolift works in pascal.")
    return np.asarray(2840.0 / (3.5 * np.log(t) - np.log(e / 100.0) - 4.805) + 55.0)


def _checked(
    pressure: ArrayLike, temperature: ArrayLike, mixing_ratio: ArrayLike
) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]:
    """All three in range."""
    return (
        checked_pressure(pressure),
        checked_temperature(temperature),
        checked_mixing_ratio(mixing_ratio, lowest=1e-9),
    )


def _level(
    pressure: NDArray[np.float64],
    temperature: NDArray[np.float64],
    mixing_ratio: NDArray[np.float64],
    of: _Substances,
) -> CondensationLevel:
    """Romps (2017), eq. 22."""
    cp = (of.cp_dry + mixing_ratio * of.cp_vapour) / (1.0 + mixing_ratio)
    gas = (of.r_dry + mixing_ratio * of.r_vapour) / (1.0 + mixing_ratio)
    slope = (of.cp_vapour - of.c_condensate) / of.r_vapour
    free = of.latent_heat_triple / of.r_vapour - slope * of.triple_temperature  # [K]
    e = pressure * mixing_ratio / (of.r_dry / of.r_vapour + mixing_ratio)
    log_saturation = slope * np.log(temperature / of.triple_temperature) + free * (
        1.0 / of.triple_temperature - 1.0 / temperature
    )
    log_humidity = np.log(e / of.triple_pressure) - log_saturation
    a = cp / gas - slope
    c = -free / (temperature * a)
    ratio = c / lower_lambert(log_humidity / a + np.log(-c) + c)
    return CondensationLevel(
        pressure=np.asarray(pressure * ratio ** (cp / gas)),
        temperature=np.asarray(temperature * ratio),
        height_above=np.asarray(cp * temperature * (1.0 - ratio) / of.gravity),
    )
