"""The wind at a site: that of the crossing air, at 10 m, its gusts, and the range of the methods."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.arrival import sampled
from orolift.flow.surface_wind import gust_range, wind_near_ground

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.arrival import Here
    from orolift.crossing.lee_wind import LeeWinds

    Array = NDArray[np.float64]

NEAR_GROUND = 300.0
"""Depth [m] over which the wind near the ground is averaged, by the spacing of streamlines; a judgement."""
GUST_DEPTH = 1000.0
"""Height above ground [m] from which turbulence may bring wind down; a judgement."""


@dataclass(frozen=True)
class SiteWind:
    """Wind at a site, across the range [m s-1].

    Attributes
    ----------
    wind : float
        Mean over the lowest 300 m of crossing air.
    low, high : float
        Range of the methods, in proportion.
    at_10m : float
        By the logarithmic law.
    gust_low, gust_high : float
    """

    wind: float
    low: float
    high: float
    at_10m: float
    gust_low: float
    gust_high: float


@dataclass(frozen=True, eq=False)
class WindsAt:
    """Wind of every member over a place, across the range; arrays (m,) [m s-1].

    Attributes
    ----------
    mean : ndarray
        Over the lowest 300 m of crossing air.
    at_10m, gust_low, gust_high : ndarray
        As in `SiteWind`.
    """

    mean: Array
    at_10m: Array
    gust_low: Array
    gust_high: Array


def winds_at(here: Here, roughness: float) -> WindsAt:
    """Wind of every member over a place.

    Parameters
    ----------
    here : Here
    roughness : float [m]
        Roughness length.

    Returns
    -------
    WindsAt

    Notes
    -----
    The logarithmic law starts at 150 m, the middle of the layer the wind is averaged over.
    """
    bottom = here.height[:, :1]
    mean = np.mean(sampled(here.height, here.wind, bottom + np.linspace(0.0, NEAR_GROUND, 7)), axis=-1)
    aloft = np.max(sampled(here.height, here.wind, bottom + np.linspace(0.0, GUST_DEPTH, 11)), axis=-1)
    at_10m = wind_near_ground(mean, 0.5 * NEAR_GROUND, roughness=roughness)
    return WindsAt(mean, at_10m, *gust_range(at_10m, aloft, roughness=roughness))


def site_wind(here: Here, winds: LeeWinds, roughness: float) -> SiteWind:
    """Wind at a site of the first member.

    Parameters
    ----------
    here : Here
    winds : LeeWinds
    roughness : float [m]
        Roughness length.

    Returns
    -------
    SiteWind

    Notes
    -----
    The range of the methods holds where the wind is strongest and is taken
    in proportion elsewhere.
    """
    all_of_them = winds_at(here, roughness)
    wind = float(all_of_them.mean[0])
    part = wind / max(winds.strongest, 0.1)
    return SiteWind(
        wind=wind,
        low=min(winds.low * part, wind),
        high=max(winds.high * part, wind),
        at_10m=float(all_of_them.at_10m[0]),
        gust_low=float(all_of_them.gust_low[0]),
        gust_high=float(all_of_them.gust_high[0]),
    )
