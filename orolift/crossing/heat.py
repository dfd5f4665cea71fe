"""Heat from the ground on the way down: by day the sun's, by night a loss."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.constants import HEAT_CAPACITY_DRY_AIR
from orolift.crossing.sun import sun_height

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

SUN_SHARE = 0.21
"""Share of the sun's 1000 W m-2 that warms the air: on 66 real pairs of soundings it takes the day bias away."""
CLEAR_SUN = 1000.0
"""Irradiance [W m-2] of a high sun at the ground; common practice, no published source."""
NIGHT_FLUX = -30.0
"""Flux into the air [W m-2] at night; from the same pairs."""
DAY_DEPTH = 1500.0
"""Depth [m] over which the day's heat is mixed; a judgement."""
NIGHT_DEPTH = 800.0
"""Depth [m] from which the night takes heat; a judgement."""
LONGEST = 8.0 * 3600.0
"""Longest time [s] over which heat is gathered: by day the ground of the lee warms the air for no longer."""
_STEPS = 49


@dataclass(frozen=True, eq=False)
class SurfaceHeat:
    """Change of temperature of the lee air by the ground, in two layers. Arrays of the shape of the travel time.

    Attributes
    ----------
    day : ndarray [K]
        Warming of the lowest 1500 m; 0 or more.
    night : ndarray [K]
        Cooling of the lowest 800 m; 0 or less.
    duration : ndarray [s]
        Time over which it was gathered.
    """

    day: NDArray[np.float64]
    night: NDArray[np.float64]
    duration: NDArray[np.float64]


def surface_heat(time: float, longitude: float, latitude: float, travel_time: ArrayLike, density: float) -> SurfaceHeat:
    """Heat the lee air takes from the ground between the crest and a site.

    Parameters
    ----------
    time : float [s]
        Arrival, seconds since 1970-01-01T00:00:00 UTC.
    longitude, latitude : float [degrees east, degrees north]
    travel_time : array_like, any shape [s]
        From the crest to the site; at most 8 hours of it count.
    density : float [kg m-3]
        Of the air at the site.

    Returns
    -------
    SurfaceHeat

    Raises
    ------
    OutOfRangeError
        If time or place is out of range.

    Notes
    -----
    Flux 0.21 x 1000 W m-2 x sin(sun height) over 1500 m while the sun is up, -30 W m-2
    over 800 m while it is down, gathered over the last part of the way by the trapezoidal
    rule. Cloud, snow, wet ground and slope are not known to it.
    """
    duration = np.clip(np.asarray(travel_time, np.float64), 0.0, LONGEST)
    times = time - duration[..., np.newaxis] * np.linspace(1.0, 0.0, _STEPS)
    up = np.sin(sun_height(times, longitude, latitude))
    capacity = density * HEAT_CAPACITY_DRY_AIR
    day = np.trapezoid(np.maximum(up, 0.0), times, axis=-1) * SUN_SHARE * CLEAR_SUN / (capacity * DAY_DEPTH)
    night = np.trapezoid((up <= 0.0).astype(np.float64), times, axis=-1) * NIGHT_FLUX / (capacity * NIGHT_DEPTH)
    return SurfaceHeat(np.asarray(day), np.asarray(night), duration)


def heating_at(heat: SurfaceHeat, height_above_ground: NDArray[np.float64]) -> NDArray[np.float64]:
    """Change of temperature at heights above the ground.

    Parameters
    ----------
    heat : SurfaceHeat
    height_above_ground : ndarray (q,) [m]

    Returns
    -------
    ndarray, shape of the heat and (q,) [K]
    """
    day, night = (np.asarray(change)[..., np.newaxis] for change in (heat.day, heat.night))
    return np.where(height_above_ground <= DAY_DEPTH, day, 0.0) + np.where(
        height_above_ground <= NIGHT_DEPTH, night, 0.0
    )
