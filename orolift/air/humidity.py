"""Humidity: one measure of it turned into another.

Everything passes through the partial pressure of the vapour. Relative humidity
and dew point are over liquid water at all temperatures, as WMO reports them;
0 to 1, not per cent. Mixing ratios are per kilogram of dry air.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air.saturation import dew_point, saturation_vapour_pressure_over_liquid
from orolift.air.vapour import (
    mixing_ratio_from_specific_humidity,
    mixing_ratio_from_vapour_pressure,
    specific_humidity_from_mixing_ratio,
    vapour_pressure_from_mixing_ratio,
)
from orolift.checks import within
from orolift.errors import IncomingAirError

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

__all__ = [
    "DEW_POINT_ROUNDING",
    "dew_point_from_mixing_ratio",
    "dew_point_from_relative_humidity",
    "mixing_ratio_from_dew_point",
    "mixing_ratio_from_dew_point_checked",
    "mixing_ratio_from_relative_humidity",
    "mixing_ratio_from_specific_humidity",
    "mixing_ratio_from_vapour_pressure",
    "relative_humidity_from_dew_point",
    "relative_humidity_from_mixing_ratio",
    "relative_humidity_from_vapour_pressure",
    "specific_humidity_from_mixing_ratio",
    "vapour_pressure_from_mixing_ratio",
    "vapour_pressure_from_relative_humidity",
]

DEW_POINT_ROUNDING = 0.5  # K; fog is often reported with the dew point a little above the temperature

_PASCALS = "orolift works in pascals; multiply hectopascals by 100."
_SHARE = "Give a share; divide per cent by 100."


def vapour_pressure_from_relative_humidity(temperature: ArrayLike, relative_humidity: ArrayLike) -> NDArray[np.float64]:
    """Partial pressure of the vapour in air of a given relative humidity.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        Air temperature, in the range of the saturation formula.
    relative_humidity : array_like, broadcasts with `temperature` [1]
        Over liquid water, 0 to 1.5.

    Returns
    -------
    ndarray, broadcast shape [Pa]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    e = U e_liquid(T), over liquid water also below freezing: WMO-No. 8 [1]_,
    section 4.1.

    References
    ----------
    .. [1] WMO (2018), "Guide to Instruments and Methods of Observation",
       WMO-No. 8, volume I, chapter 4.

    Examples
    --------
    >>> vapour_pressure_from_relative_humidity(273.16, 0.5).round(2)
    np.float64(305.83)
    """
    share = within("relative_humidity", relative_humidity, 0.0, 1.5, "", _SHARE)
    return share * saturation_vapour_pressure_over_liquid(temperature)


def relative_humidity_from_vapour_pressure(temperature: ArrayLike, vapour_pressure: ArrayLike) -> NDArray[np.float64]:
    """Relative humidity of air whose vapour has a given partial pressure.

    The inverse of `vapour_pressure_from_relative_humidity`.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        Air temperature, in the range of the saturation formula.
    vapour_pressure : array_like, broadcasts with `temperature` [Pa]
        0 to 60000 Pa.

    Returns
    -------
    ndarray, broadcast shape [1]
        Over liquid water; above 1 where the air is supersaturated.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    U = e / e_liquid(T): WMO-No. 8 [1]_, section 4.1.

    References
    ----------
    .. [1] WMO (2018), "Guide to Instruments and Methods of Observation",
       WMO-No. 8, volume I, chapter 4.

    Examples
    --------
    >>> relative_humidity_from_vapour_pressure(273.16, 305.83).round(3)
    np.float64(0.5)
    """
    e = within("vapour_pressure", vapour_pressure, 0.0, 6.0e4, "Pa", _PASCALS)
    return e / saturation_vapour_pressure_over_liquid(temperature)


def mixing_ratio_from_relative_humidity(
    pressure: ArrayLike, temperature: ArrayLike, relative_humidity: ArrayLike
) -> NDArray[np.float64]:
    """Mixing ratio of air of a given pressure, temperature and relative humidity.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Air pressure, 100 Pa to 120000 Pa.
    temperature : array_like, broadcasts with `pressure` [K]
        In the range of the saturation formula.
    relative_humidity : array_like, broadcasts with `pressure` [1]
        Over liquid water, 0 to 1.5.

    Returns
    -------
    ndarray, broadcast shape [kg kg-1 of dry air]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    Through the vapour pressure. Some definitions take the ratio of mixing
    ratios instead; they differ by up to 0.01 in warm air.

    Examples
    --------
    >>> mixing_ratio_from_relative_humidity(1.0e5, 293.15, 0.5).round(4)
    np.float64(0.0074)
    """
    return mixing_ratio_from_vapour_pressure(
        pressure, vapour_pressure_from_relative_humidity(temperature, relative_humidity)
    )


def relative_humidity_from_mixing_ratio(
    pressure: ArrayLike, temperature: ArrayLike, mixing_ratio: ArrayLike
) -> NDArray[np.float64]:
    """Relative humidity of air of a given pressure, temperature and mixing ratio.

    The inverse of `mixing_ratio_from_relative_humidity`.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Air pressure, 100 Pa to 120000 Pa.
    temperature : array_like, broadcasts with `pressure` [K]
        In the range of the saturation formula.
    mixing_ratio : array_like, broadcasts with `pressure` [kg kg-1 of dry air]
        0 to 0.622.

    Returns
    -------
    ndarray, broadcast shape [1]
        Over liquid water.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Examples
    --------
    >>> relative_humidity_from_mixing_ratio(1.0e5, 293.15, 0.0074).round(2)
    np.float64(0.5)
    """
    return relative_humidity_from_vapour_pressure(
        temperature, vapour_pressure_from_mixing_ratio(pressure, mixing_ratio)
    )


def mixing_ratio_from_dew_point(pressure: ArrayLike, dew_point_temperature: ArrayLike) -> NDArray[np.float64]:
    """Mixing ratio of air of a given pressure and dew point.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Air pressure, 100 Pa to 120000 Pa.
    dew_point_temperature : array_like, broadcasts with `pressure` [K]
        Over liquid water, in the range of the saturation formula.

    Returns
    -------
    ndarray, broadcast shape [kg kg-1 of dry air]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    The vapour pressure is the saturation pressure at the dew point, by
    definition. Where a dew point comes from a report beside a temperature, use
    `mixing_ratio_from_dew_point_checked`.

    Examples
    --------
    >>> mixing_ratio_from_dew_point(1.0e5, 283.15).round(5)
    np.float64(0.00773)
    """
    return mixing_ratio_from_vapour_pressure(pressure, saturation_vapour_pressure_over_liquid(dew_point_temperature))


def dew_point_from_mixing_ratio(pressure: ArrayLike, mixing_ratio: ArrayLike) -> NDArray[np.float64]:
    """Dew point of air of a given pressure and mixing ratio.

    The inverse of `mixing_ratio_from_dew_point`.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Air pressure, 100 Pa to 120000 Pa.
    mixing_ratio : array_like, broadcasts with `pressure` [kg kg-1 of dry air]
        Above 0 to 0.622: air without vapour has no dew point.

    Returns
    -------
    ndarray, broadcast shape [K]
        Over liquid water.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Examples
    --------
    >>> dew_point_from_mixing_ratio(1.0e5, 0.00773).round(2)
    np.float64(283.15)
    """
    return dew_point(vapour_pressure_from_mixing_ratio(pressure, mixing_ratio))


def relative_humidity_from_dew_point(temperature: ArrayLike, dew_point_temperature: ArrayLike) -> NDArray[np.float64]:
    """Relative humidity of air of a given temperature and dew point.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        In the range of the saturation formula.
    dew_point_temperature : array_like, broadcasts with `temperature` [K]
        Over liquid water, in the range of the saturation formula.

    Returns
    -------
    ndarray, broadcast shape [1]
        Over liquid water.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Examples
    --------
    >>> relative_humidity_from_dew_point(298.15, 287.01).round(2)
    np.float64(0.5)
    """
    return saturation_vapour_pressure_over_liquid(dew_point_temperature) / saturation_vapour_pressure_over_liquid(
        temperature
    )


def dew_point_from_relative_humidity(temperature: ArrayLike, relative_humidity: ArrayLike) -> NDArray[np.float64]:
    """Dew point of air of a given temperature and relative humidity.

    The inverse of `relative_humidity_from_dew_point`.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        In the range of the saturation formula.
    relative_humidity : array_like, broadcasts with `temperature` [1]
        Over liquid water, above 0 to 1.5.

    Returns
    -------
    ndarray, broadcast shape [K]
        Over liquid water.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Examples
    --------
    >>> dew_point_from_relative_humidity(298.15, 0.5).round(2)
    np.float64(287.01)
    """
    return dew_point(vapour_pressure_from_relative_humidity(temperature, relative_humidity))


def mixing_ratio_from_dew_point_checked(
    pressure: ArrayLike, temperature: ArrayLike, dew_point_temperature: ArrayLike
) -> tuple[NDArray[np.float64], tuple[str, ...]]:
    """Mixing ratio from a reported dew point, which must not exceed the temperature.

    For reports and soundings. Reports of fog may give a dew point a little
    above the temperature: up to 0.5 K it is taken as equal, with a note;
    beyond that the report contradicts itself.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Air pressure, 100 Pa to 120000 Pa.
    temperature : array_like, broadcasts with `pressure` [K]
        Air temperature, in the range of the saturation formula.
    dew_point_temperature : array_like, broadcasts with `pressure` [K]
        Over liquid water, in the range of the saturation formula.

    Returns
    -------
    mixing_ratio : ndarray, broadcast shape [kg kg-1 of dry air]
    notes : tuple of str
        One sentence if a dew point was clipped, else empty.

    Raises
    ------
    IncomingAirError
        If a dew point exceeds its temperature by more than 0.5 K.
    OutOfRangeError
        If any value is NaN or outside its range.

    Examples
    --------
    >>> mixing_ratio_from_dew_point_checked(1.0e5, 283.15, 283.35)[1]
    ('The dew point was up to 0.2 °C above the temperature (fog rounding); equal was assumed.',)
    """
    t, td = np.broadcast_arrays(np.asarray(temperature, np.float64), np.asarray(dew_point_temperature, np.float64))
    excess = td - t
    beyond = excess > DEW_POINT_ROUNDING + 1e-6  # a report to 0.1 K may miss 0.5 by rounding of the kelvin
    if np.any(beyond):
        index = tuple(int(i) for i in np.argwhere(beyond)[0])
        place = f" at index {index}" if td.ndim else ""
        raise IncomingAirError(
            f"dew_point: {int(beyond.sum())} of {td.size} values lie more than {DEW_POINT_ROUNDING:g} K above the "
            f"temperature (first: {float(td[index]):g} above {float(t[index]):g} K{place}). Perhaps the two are "
            "exchanged, or one is in another unit. Correct the value or leave the level out."
        )
    notes: tuple[str, ...] = ()
    if np.any(excess > 0.0):
        where = f" at {int(np.sum(excess > 0.0))} of {td.size} levels" if td.size > 1 else ""
        most = f"{float(excess.max()):.1f} °C"
        notes = (f"The dew point was up to {most} above the temperature{where} (fog rounding); equal was assumed.",)
    return mixing_ratio_from_dew_point(pressure, np.minimum(t, td)), notes
