"""Simple estimates of orographic rain, to hold the map and the crossing against."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from orolift.rain.parameters import RainParameters


def raw_upslope(
    elevation: NDArray[np.float64], spacing: tuple[float, float], parameters: RainParameters
) -> NDArray[np.float64]:
    """Condensation if all the vapour rose with the ground below it and fell out where it condensed.

    Parameters
    ----------
    elevation : ndarray, shape (ny, nx) [m]
        Rows north to south.
    spacing : (float, float) [m]
        Between columns, between rows.
    parameters : RainParameters
        Wind and uplift sensitivity are used.

    Returns
    -------
    ndarray, shape (ny, nx) [kg m-2 s-1]
        Negative on ground that falls downwind; NaN beside missing ground.

    Notes
    -----
    Cw U . grad h by central differences: the limit of `spectral.transfer` for
    shallow vapour and no delays. An upper estimate: uplift weakens with height and vapour runs out.
    The form is that of Smith (1979) [1]_ (from memory).

    References
    ----------
    .. [1] R. B. Smith (1979), "The influence of mountains on the atmosphere", Adv. Geophys. 21, 87-230.

    Examples
    --------
    >>> from orolift.rain.parameters import RainParameters
    >>> flow = RainParameters(15.0, 0.0, 0.005, 2500.0, 0.006794)
    >>> slope = 0.02 * 1000.0 * np.arange(3.0) * np.ones((3, 1))
    >>> print((3600.0 * raw_upslope(slope, (1000.0, 1000.0), flow)[1, 1]).round(3))
    7.338
    """
    south, east = np.gradient(elevation, spacing[1], spacing[0])
    p = parameters
    return np.asarray(p.uplift_sensitivity * (p.eastward_wind * east - p.northward_wind * south))


def drying_ratio_upslope(
    relief: ArrayLike, vapour_height: ArrayLike, lapse_ratio: ArrayLike = 1.0
) -> NDArray[np.float64]:
    """Share of the incoming vapour that the raw upslope estimate takes out over a ridge.

    Parameters
    ----------
    relief : array_like, any shape [m]
        Crest above the ground upwind, 0 to 9500 m.
    vapour_height : array_like, broadcasts [m]
        100 m to 10 km.
    lapse_ratio : array_like, broadcasts [1]
        Saturated lapse rate over that of the surroundings, 0 to 5.

    Returns
    -------
    ndarray, broadcast shape [1]
        May exceed 1: then it is no estimate any more. `drying_ratio_bound` cannot.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    Cw h / (column vapour) = (lapse ratio) h / Hw.

    Examples
    --------
    >>> drying_ratio_upslope([1000.0, 3000.0], 2493.0).round(3)
    array([0.401, 1.203])
    """
    h = within("relief", relief, 0.0, 9500.0, "m")
    ratio = within("lapse_ratio", lapse_ratio, 0.0, 5.0, "1")
    return np.asarray(ratio * h / within("vapour_height", vapour_height, 100.0, 1e4, "m"))


def drying_ratio_bound(
    relief: ArrayLike, vapour_height: ArrayLike, lapse_ratio: ArrayLike = 1.0
) -> NDArray[np.float64]:
    """Largest share of the incoming vapour that lifting over a ridge can take out.

    Parameters
    ----------
    relief, vapour_height, lapse_ratio : array_like
        As in `drying_ratio_upslope`.

    Returns
    -------
    ndarray, broadcast shape [1]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    1 - exp(-(lapse ratio) h / Hw): all the air lifted by the height of the ridge, saturated, and all
    that condenses lost. Multiplied by `closed_forms.bell_ridge_efficiency` it allows for uplift that weakens aloft.

    Examples
    --------
    >>> drying_ratio_bound([500.0, 1000.0, 3000.0], 2493.0).round(3)
    array([0.182, 0.33 , 0.7  ])
    """
    return np.asarray(-np.expm1(-drying_ratio_upslope(relief, vapour_height, lapse_ratio)))


def precipitation_efficiency(
    conversion_time: ArrayLike, fallout_time: ArrayLike, advection_time: ArrayLike
) -> NDArray[np.float64]:
    """Share of the condensed water that falls before the air has passed the windward slope.

    Parameters
    ----------
    conversion_time, fallout_time : array_like, any shape [s]
        Cloud time and fall time, 0 to 1e5 s.
    advection_time : array_like, broadcasts [s]
        Half width of the range over the wind, 1 to 1e6 s.

    Returns
    -------
    ndarray, broadcast shape [1]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    Two boxes, cloud and falling water, each emptied by the wind and by its own
    process: 1 / [(1 + tc / ta)(1 + tf / ta)]. The times and their ratios are those
    of Jiang and Smith (2003) [1]_; the formula is derived here.

    References
    ----------
    .. [1] Q. Jiang and R. B. Smith (2003), "Cloud timescales and orographic
       precipitation", J. Atmos. Sci. 60, 1543-1559.

    Examples
    --------
    >>> print(precipitation_efficiency(500.0, 1500.0, 2000.0).round(5))
    0.45714
    """
    c = within("conversion_time", conversion_time, 0.0, 1e5, "s")
    f = within("fallout_time", fallout_time, 0.0, 1e5, "s")
    a = within("advection_time", advection_time, 1.0, 1e6, "s")
    return np.asarray(1.0 / ((1.0 + c / a) * (1.0 + f / a)))
