"""Wind near the ground from wind aloft: mean at 10 m, and gusts."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

OPEN_COUNTRY_ROUGHNESS = 0.03
"""Roughness length [m] of open level country with few obstacles: WMO-No. 8, terrain classification after Davenport."""
PEAK_FACTORS = (2.5, 3.5)
"""Gust above the mean in standard deviations: 3-second gusts in 10 minutes, from memory; 3.5 as in EN 1991-1-4."""


def wind_near_ground(
    wind: ArrayLike, height: ArrayLike, *, roughness: ArrayLike = OPEN_COUNTRY_ROUGHNESS, target: float = 10.0
) -> NDArray[np.float64]:
    """Mean wind close to the ground from wind higher up.

    Parameters
    ----------
    wind : array_like, any shape [m s-1]
        At `height`.
    height : array_like [m]
        Above ground, in the layer that friction mixes; `target` to 2000 m.
    roughness : array_like [m]
        Roughness length, 0.0001 (water) to 2 (town, forest).
    target : float [m]
        Height wanted, above ground.

    Returns
    -------
    ndarray [m s-1]

    Raises
    ------
    OutOfRangeError
        If a height or roughness is outside its range.

    Notes
    -----
    Logarithmic law of neutral air: the wind goes as ``ln(z / z0)`` (WMO-No. 8, wind). Strong
    winds down a slope are close to neutral; in light wind and strong stability it is too high.

    Examples
    --------
    >>> wind_near_ground(20.0, 100.0, roughness=0.1).round(1)
    np.float64(13.3)
    """
    z0 = within("roughness", roughness, 1e-4, 2.0, "m", "Give the roughness length in metres.")
    z = within("height", height, target, 2000.0, "m", "Give metres above ground.")
    return np.asarray(np.asarray(wind, np.float64) * np.log(target / z0) / np.log(z / z0))[()]


def gust_range(
    mean: ArrayLike, wind_aloft: ArrayLike, *, roughness: ArrayLike = OPEN_COUNTRY_ROUGHNESS, target: float = 10.0
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Gusts to be expected with a mean wind near the ground.

    Parameters
    ----------
    mean : array_like, any shape [m s-1]
        Mean wind at `target`.
    wind_aloft : array_like [m s-1]
        Strongest wind that turbulence can bring down whole.
    roughness : array_like [m]
        Roughness length, 0.0001 to 2.
    target : float [m]
        Height above ground.

    Returns
    -------
    low, high : ndarray [m s-1]

    Raises
    ------
    OutOfRangeError
        If a roughness is outside its range.

    Notes
    -----
    Mean times ``1 + g / ln(z / z0)`` with peak factors g of 2.5 and 3.5: turbulence intensity
    ``1 / ln(z / z0)`` as in EN 1991-1-4 (standard deviation 2.5 friction velocities). The upper end is at least
    the wind aloft, brought down whole (idea of Brasseur 2001, Mon. Weather Rev. 129, 5-25, from memory).

    Examples
    --------
    >>> [float(end.round(1)) for end in gust_range(10.0, 18.0)]
    [14.3, 18.0]
    """
    z0 = within("roughness", roughness, 1e-4, 2.0, "m", "Give the roughness length in metres.")
    speed = np.asarray(mean, np.float64)
    low, high = (speed * (1.0 + factor / np.log(target / z0)) for factor in PEAK_FACTORS)
    return np.asarray(low)[()], np.asarray(np.maximum(np.maximum(high, np.asarray(wind_aloft, np.float64)), low))[()]
