"""The way of the lowest crossing air to a place: how long it takes, and where the raining cloud shades it."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.constants import GRAVITY
from orolift.crossing.heat import LONGEST_WAY, STEPS

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from orolift.crossing.streams import Streams

    Array = NDArray[np.float64]

SLOWEST = 1.0
"""Wind [m s-1] below which the travel time is counted with this."""
OVERCAST = 0.05
"""Cloud water over a place [kg m-2] from which on its sky counts as overcast. Droplets of 10 micrometres then have the
optical depth 1.5 W / (density radius) = 7.5 (Stephens 1978, from memory), and 2 / (2 + 0.15 depth) = 0.64 of the sun
passes (Bohren 1987, from memory): halfway between a clear sky and the quarter of an overcast one."""
STEADY_RAIN = 0.5 / 3600.0
"""Rain [kg m-2 s-1] from which on the cloud it falls from is taken to cover the sky: 0.5 mm/h, above all but heavy
drizzle (WMO-No. 8, from memory). Cloud that gives less may be broken, and the crossing does not know how much; on 66
real pairs of soundings shading by all of it errs 0.2 to 0.5 K more (docs/accuracy.md). A judgement."""


def travel_times(across: Array, streams: Streams) -> Array:
    """Time the lowest crossing air takes from the upwind end of the line to every point of it.

    Parameters
    ----------
    across : ndarray (nx,) [m]
        Points of the transect, evenly spaced, measured along the range normal.
    streams : Streams

    Returns
    -------
    ndarray (m, nx) [s]
        Counted with at least 1 m/s.
    """
    wind = streams.wind[:, :1] * streams.flow.speed_factor[:, 0]
    step = float(across[1] - across[0])
    return np.asarray(np.cumsum(step / np.maximum(wind, SLOWEST), axis=-1))


def way_to(
    x: Array,
    height: Array,
    wind: Array,
    where: float,
    *,
    start: float = 0.0,
    depth: ArrayLike,
    cosine: float = 1.0,
) -> tuple[Array, Array]:
    """Time the air that reaches a place takes from where it was observed.

    Parameters
    ----------
    x : ndarray (nk,) [m]
        Places along the line.
    height, wind : ndarray (..., nz, nk) [m above sea level], [m s-1]
        Of the streamlines over them, from the lowest up; the wind across the range.
    where : float [m]
        The place.
    start : float [m]
        Where on the line the air was observed; a place before it takes no time.
    depth : array_like (...) [m]
        The mixing depth.
    cosine : float [1]
        Of the angle between the line and the range normal.

    Returns
    -------
    mean, spread : ndarray (...) [s]
        Over the streamlines that arrive; one standard deviation.

    Notes
    -----
    Along each streamline dx / u is summed over the places, x along the range normal as u is, with 1 m/s at least. Over
    the place those count that lie in the mixing depth above its lowest streamline, weighted by the depth of each there
    times its wind.
    """
    way = np.clip(x, min(start, where), where)
    slowness = 1.0 / np.maximum(wind, SLOWEST)
    middle = 0.5 * (slowness[..., 1:] + slowness[..., :-1])
    taken = cosine * np.sum(np.diff(way) * middle, axis=-1)
    at = int(np.argmin(np.abs(x - where)))
    over = height[..., at]
    arrives = over <= over[..., :1] + np.asarray(depth, np.float64)[..., np.newaxis]
    weight = np.where(arrives, np.gradient(over, axis=-1) * np.maximum(wind[..., at], SLOWEST), 0.0)
    weight = weight / weight.sum(axis=-1, keepdims=True)
    mean = np.sum(weight * taken, axis=-1)
    return mean, np.sqrt(np.sum(weight * (taken - mean[..., np.newaxis]) ** 2, axis=-1))


def cloud_water(pressure: ArrayLike, cloud: ArrayLike) -> Array:
    """Cloud water of a column.

    Parameters
    ----------
    pressure : array_like (..., nz) [Pa]
        Falling along the last axis.
    cloud : array_like (..., nz) [kg per kg]

    Returns
    -------
    ndarray (...) [kg m-2]
        By the trapezoidal rule in pressure.
    """
    p, c = np.asarray(pressure, np.float64), np.asarray(cloud, np.float64)
    return np.asarray(np.sum(-np.diff(p, axis=-1) * 0.5 * (c[..., 1:] + c[..., :-1]), axis=-1) / GRAVITY)


def overcast(across: Array, streams: Streams) -> Array:
    """Whether the crossing's own raining cloud covers the sky over places of the line.

    Parameters
    ----------
    across : ndarray (nx,) [m]
        Points of the transect, measured along the range normal.
    streams : Streams

    Returns
    -------
    ndarray (m, nk) [1]
        Cloud cover over the places of the march: 1 or 0.

    Notes
    -----
    A place is overcast where 0.5 mm/h of the crossing's rain or snow land and cloud water is above 0.05 kg m-2. Counted
    is the cloud of all streamlines over the place, with what the incoming air brought.
    """
    water = cloud_water(streams.air.pressure, streams.air.cloud).T
    x = across[streams.place]
    step = np.diff(x, prepend=x[0] - (x[1] - x[0]))
    rains = (streams.falling.landed / step[:, np.newaxis]).T >= STEADY_RAIN
    return np.where(rains & (water > OVERCAST), 1.0, 0.0)


def cover_on_the_way(times: Array, cover: Array, arrival: Array) -> Array:
    """Cloud cover over the air at even steps of its way, as `orolift.crossing.heat.surface_heat` takes it.

    Parameters
    ----------
    times : ndarray (m, nk) [s]
        When the air passes places, from the upwind end on; growing.
    cover : ndarray (m, nk) [1]
        Over them.
    arrival : ndarray (m, ...) [s]
        When it reaches the sites, on the same clock.

    Returns
    -------
    ndarray (m, ..., 145) [1]
        From the beginning of what is followed, at most 24 hours back, to arrival.
    """
    back = np.clip(arrival, 0.0, LONGEST_WAY)[..., np.newaxis] * np.linspace(1.0, 0.0, STEPS)
    at = arrival[..., np.newaxis] - back
    return np.stack([np.interp(*one) for one in zip(at, times, cover, strict=True)])
