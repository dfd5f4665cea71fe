"""Rain of laminar flow over a barrier by the water balance of its layers, the hand calculation of hydrologists.

An estimate for one situation. It is not a probable maximum precipitation and
must not be called one.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import IncomingAir, interpolated, wind_component
from orolift.air.parcel import Parcel, ascent
from orolift.checks import within
from orolift.constants import GRAVITY

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

NODAL_PRESSURE = 35.0e3  # [Pa] where flow over a range is taken as level again; the manual has 400 to 100 hPa (memory)
LAYERS = 40


def laminar_rain_of_one_layer(
    wind: ArrayLike,
    water_in: ArrayLike,
    water_out: ArrayLike,
    depth_in: ArrayLike,
    depth_out: ArrayLike,
    length: ArrayLike,
) -> NDArray[np.float64]:
    """Rain on a slope from what flows in and out above it.

    Parameters
    ----------
    wind : array_like, any shape [m s-1]
        Mean speed of the air that flows in, 0 to 200.
    water_in, water_out : array_like, broadcast [kg m-2]
        Vapour above a square metre at the foot and at the crest.
    depth_in, depth_out : array_like, broadcast [Pa]
        Pressure depth of the air there.
    length : array_like, broadcasts [m]
        Of the slope along the wind.

    Returns
    -------
    ndarray, broadcast shape [kg m-2 s-1]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    V (W1 - W2 dp1 / dp2) / Y of WMO-No. 1045 (2009) [1]_, chapter 3 (equation from memory, derived again: the
    same air passes, so speed and pressure depth are inverse).

    References
    ----------
    .. [1] WMO (2009), "Manual on Estimation of Probable Maximum
       Precipitation", WMO-No. 1045.

    Examples
    --------
    >>> print((3600 * laminar_rain_of_one_layer(20.0, 25.0, 17.0, 15e3, 12e3, 40e3)).round(3))
    6.75
    """
    v = within("wind", wind, 0.0, 200.0, "m/s")
    w1, w2 = (within(n, w, 0.0, 200.0, "kg/m2") for n, w in (("water_in", water_in), ("water_out", water_out)))
    p1, p2 = (within(n, p, 1.0, 1.1e5, "Pa") for n, p in (("depth_in", depth_in), ("depth_out", depth_out)))
    return np.asarray(v * (w1 - w2 * p1 / p2) / _length(length))


def laminar_rain_of_two_streamlines(
    wind: ArrayLike, depth: ArrayLike, vapour_in: ArrayLike, vapour_out: ArrayLike, length: ArrayLike
) -> NDArray[np.float64]:
    """Rain on a slope from the air between two streamlines.

    Parameters
    ----------
    wind : array_like, any shape [m s-1]
        Speed of the air that flows in, 0 to 200.
    depth : array_like, broadcasts [Pa]
        Pressure between the two streamlines where it flows in.
    vapour_in, vapour_out : array_like, broadcast [kg kg-1]
        Vapour per mass of air at the foot and at the crest.
    length : array_like, broadcasts [m]
        Of the slope along the wind.

    Returns
    -------
    ndarray, broadcast shape [kg m-2 s-1]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    V dp (w1 - w2) / (g Y) of WMO-No. 1045 (2009) [1]_, chapter 3 (equation from memory, derived again).

    References
    ----------
    .. [1] WMO (2009), "Manual on Estimation of Probable Maximum
       Precipitation", WMO-No. 1045.

    Examples
    --------
    >>> print((3600 * laminar_rain_of_two_streamlines(20.0, 10e3, 0.010, 0.006, 40e3)).round(5))
    7.34196
    """
    v = within("wind", wind, 0.0, 200.0, "m/s")
    dp = within("depth", depth, 0.0, 1.1e5, "Pa")
    hint = "Give kg per kg; divide g per kg by 1000."
    w1, w2 = (within(n, w, 0.0, 0.2, "kg/kg", hint) for n, w in (("vapour_in", vapour_in), ("vapour_out", vapour_out)))
    return np.asarray(v * dp * (w1 - w2) / (GRAVITY * _length(length)))


def laminar_rain(
    air: IncomingAir,
    bearing: float,
    base: float,
    crest: float,
    length: float,
    *,
    nodal_pressure: float = NODAL_PRESSURE,
) -> float:
    """Mean rain on the windward slope if the incoming air crosses in layers and loses all that condenses.

    Parameters
    ----------
    air : IncomingAir
        One column, fields of shape (nz,).
    bearing : float [rad]
        Direction the air goes to.
    base, crest : float [m above sea level]
        Lowest air that crosses, and the ground it has to pass.
    length : float [m]
        Of the slope along the wind.
    nodal_pressure : float [Pa]
        Above it the flow is level.

    Returns
    -------
    float [kg m-2 s-1]

    Raises
    ------
    OutOfRangeError
        If a value is out of range or the crest is not above the base.

    Notes
    -----
    `laminar_rain_of_two_streamlines`, summed over 40 layers. Streamlines keep
    their share of the pressure between the ground and the nodal surface; each
    layer is lifted pseudoadiabatically. WMO-No. 1045 (2009) [1]_, chapter 3, lets the spacing follow a
    hand-drawn chart; the even spacing is ours. No drift: what condenses over the slope falls on it.

    References
    ----------
    .. [1] WMO (2009), "Manual on Estimation of Probable Maximum
       Precipitation", WMO-No. 1045.

    Examples
    --------
    >>> from orolift.air.column_build import air_from_station
    >>> air = air_from_station(0.0, 1.0e5, 283.15, 0.0077, 15.0, 4.7)
    >>> print(round(3600 * laminar_rain(air, 4.7 - np.pi, 0.0, 1500.0, 40e3), 1))
    9.5
    """
    within("crest", crest, base + 1.0, 9500.0, "m", "The crest must lie above the base.")
    foot, top = interpolated(air, np.array([base, crest])).pressure
    within("nodal_pressure", nodal_pressure, 5e3, float(top) - 1e3, "Pa", "It must lie above the crest.")
    edge = np.linspace(foot, nodal_pressure, LAYERS + 1)
    middle = 0.5 * (edge[1:] + edge[:-1])
    height = np.interp(-np.log(middle), -np.log(air.pressure), air.height)
    here = interpolated(air, height)
    above = nodal_pressure + (top - nodal_pressure) * (middle - nodal_pressure) / (foot - nodal_pressure)
    start = Parcel(here.pressure, here.temperature, here.vapour, here.cloud)
    _, removed = ascent(start, np.minimum(above, here.pressure), removed_share=1.0)
    lost = removed / (1.0 + here.vapour + here.cloud)
    speed = np.maximum(wind_component(here, bearing), 0.0)
    rain = laminar_rain_of_two_streamlines(speed, edge[:-1] - edge[1:], lost, 0.0, length)
    return float(rain.sum())


def _length(length: ArrayLike) -> NDArray[np.float64]:
    return within("length", length, 1.0, 1e6, "m", "It is the length of the slope along the wind.")
