"""Numbers that say how a range matters to the air: heights, lengths and ratios without unit.

Never called "Froude" here: the non-dimensional height N h / U is meant, and
papers use that name for it and for its inverse.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.constants import EARTH_ROTATION_RATE
from orolift.flow.profiles import checked_height, layer_mean

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

LEAST_WIND = 2.5
"""Wind [m s-1] below which linear waves are not worked out: near a critical level. Between the 2 and 3 m/s of common
practice, no published source."""

_RADIANS = "Latitude is in radians; multiply degrees by pi / 180."


def nondimensional_height(
    height: ArrayLike, n_squared: ArrayLike, wind: ArrayLike, base: ArrayLike, crest: ArrayLike
) -> NDArray[np.float64]:
    """Height of the range in units of U / N: above about 1.5 the low air is stopped.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        Strictly increasing, above sea level.
    n_squared : array_like, shape (..., nz) [s-2]
        Dry, moist or effective; negative values count as they are.
    wind : array_like, shape (..., nz) [m s-1]
        Component across the range, positive toward it.
    base, crest : array_like, shape (...) [m]
        Above sea level.

    Returns
    -------
    ndarray, shape (...) [1]
        0 when the mean stratification is neutral or unstable or the range has no height;
        infinite when it is stable and the mean wind is not toward the range.

    Notes
    -----
    ``N h / U`` with N squared and U averaged from base to crest, as Pierrehumbert
    and Wyman (1985) [1]_ use it (they call it Fr). Averaging below the crest is the
    bulk method of Reinecke and Durran (2008, J. Atmos. Sci. 65, 1035-1048; from
    memory).

    References
    ----------
    .. [1] R. T. Pierrehumbert and B. Wyman (1985), "Upstream effects of
       mesoscale mountains", J. Atmos. Sci. 42, 977-1003.

    Examples
    --------
    >>> nondimensional_height([0.0, 3000.0], [1e-4, 1e-4], [10.0, 10.0], 0.0, 2000.0)
    array(2.)
    """
    stiffness = np.maximum(layer_mean(height, n_squared, base, crest), 0.0)
    speed = layer_mean(height, wind, base, crest)
    depth = np.maximum(np.asarray(crest, np.float64) - np.asarray(base, np.float64), 0.0)
    rise = np.sqrt(stiffness) * depth
    moving = speed > 0.0
    ratio = np.where(moving, rise / np.where(moving, speed, 1.0), np.inf)
    return np.asarray(np.where(rise > 0.0, ratio, 0.0))


def scorer_parameter(height: ArrayLike, n_squared: ArrayLike, wind: ArrayLike) -> NDArray[np.float64]:
    """Square of the wavenumber below which waves of a layer spread upward.

    Falling strongly with height it traps waves in the lee. The wave solver
    does not use it: its displacement form needs no second derivative.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        Strictly increasing, at least three levels.
    n_squared : array_like, shape (..., nz) [s-2]
    wind : array_like, shape (..., nz) [m s-1]
        Across the range. Below 2.5 m/s counts as 2.5 m/s.

    Returns
    -------
    ndarray, shape (..., nz) [m-2]

    Notes
    -----
    ``N^2 / U^2 - U'' / U``, Scorer (1949) [1]_, Boussinesq.

    References
    ----------
    .. [1] R. S. Scorer (1949), "Theory of waves in the lee of mountains",
       Q. J. R. Meteorol. Soc. 75, 41-56.

    Examples
    --------
    >>> scorer_parameter([0.0, 1e3, 2e3], [1e-4, 1e-4, 1e-4], [10.0, 10.0, 10.0])
    array([1.e-06, 1.e-06, 1.e-06])
    """
    levels = checked_height(height)
    speed = np.maximum(np.asarray(wind, np.float64), LEAST_WIND)
    bend = np.gradient(np.gradient(speed, levels, axis=-1), levels, axis=-1)
    return np.asarray(np.asarray(n_squared, np.float64) / speed**2 - bend / speed)


def coriolis_parameter(latitude: ArrayLike) -> NDArray[np.float64]:
    """Twice the vertical part of the earth's rotation.

    Parameters
    ----------
    latitude : array_like, any shape [rad]
        -pi/2 to pi/2, north positive.

    Returns
    -------
    ndarray, shape of `latitude` [s-1]

    Raises
    ------
    OutOfRangeError
        If a latitude is outside the range.

    Examples
    --------
    >>> coriolis_parameter(np.pi / 4).round(7)
    np.float64(0.0001031)
    """
    angle = within("latitude", latitude, -np.pi / 2, np.pi / 2, "rad", _RADIANS)
    return np.asarray(2.0 * EARTH_ROTATION_RATE * np.sin(angle))[()]


def rossby_number(wind: ArrayLike, half_width: ArrayLike, latitude: ArrayLike) -> NDArray[np.float64]:
    """Wind over rotation and width: below about 1 rotation shapes the crossing.

    Parameters
    ----------
    wind : array_like, any shape [m s-1]
        Across the range.
    half_width : array_like [m]
        Of the range, more than 0.
    latitude : array_like [rad]

    Returns
    -------
    ndarray [1]
        ``|U / (f L)|``; infinite on the equator.

    Raises
    ------
    OutOfRangeError
        If the half width is not positive or a latitude is outside the range.

    Examples
    --------
    >>> rossby_number(10.0, 20e3, np.pi / 4).round(2)
    np.float64(4.85)
    """
    width = within("half_width", half_width, 1.0, 1e7, "m", "Give metres.")
    turn = np.abs(coriolis_parameter(latitude)) * width
    speed = np.abs(np.asarray(wind, np.float64))
    return np.asarray(np.where(turn > 0.0, speed / np.where(turn > 0.0, turn, 1.0), np.inf))[()]


def deformation_radius(n: ArrayLike, relief: ArrayLike, latitude: ArrayLike) -> NDArray[np.float64]:
    """Distance over which a range slows the air upwind of it.

    Parameters
    ----------
    n : array_like, any shape [s-1]
        Mean buoyancy frequency below the crest, at least 0.
    relief : array_like [m]
        Crest above base, at least 0.
    latitude : array_like [rad]

    Returns
    -------
    ndarray [m]
        ``N h / |f|``, Pierrehumbert and Wyman (1985), J. Atmos. Sci. 42, 977-1003; infinite on
        the equator.

    Raises
    ------
    OutOfRangeError
        If a value is outside its range.

    Examples
    --------
    >>> (deformation_radius(0.01, 2000.0, 0.755) / 1e3).round()
    np.float64(200.0)
    """
    rise = within("n", n, 0.0, 1.0, "s-1") * within("relief", relief, 0.0, 1e4, "m", "Give metres.")
    turn = np.abs(coriolis_parameter(latitude))
    return np.asarray(np.where(turn > 0.0, rise / np.where(turn > 0.0, turn, 1.0), np.inf))[()]
