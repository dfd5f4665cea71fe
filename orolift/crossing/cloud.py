"""Cloud of the crossing air: its base before the crest and its end in the lee."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air.saturation import saturation_mixing_ratio
from orolift.crossing.result import Cloud

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.solve import Solution
    from orolift.terrain.features import Features

    Array = NDArray[np.float64]

HIGHEST_CLOUD = 2e4
"""Pressure [Pa] at which air must at least start to count for cloud: above it humidity is assumed, and waves make cloud
of nothing; a judgement."""


def clouds(solution: Solution, distance: Array, shape: Features, *, freezing: bool = True) -> Cloud:
    """Cloud of the crossing air: its base on the windward side and its end in the lee.

    Parameters
    ----------
    solution : Solution
        The first member counts.
    distance : ndarray (nx,) [m]
        Of the transect's points.
    shape : Features
    freezing : bool

    Returns
    -------
    Cloud

    Notes
    -----
    On each streamline the step on which cloud appears is divided at the share
    of it that the relative humidity needed to reach saturation. Air from above 200 hPa does not count.
    """
    streams = solution.streams
    x = distance[streams.place]
    height = streams.flow.heights[0][:, streams.place].T
    cloud = streams.air.cloud[:, 0, :] + streams.air.condensed[:, 0, :]  # all of it may have fallen out at once
    cloud = np.where(streams.start.pressure[0] >= HIGHEST_CLOUD, cloud, 0.0)
    crest = int(np.argmin(np.abs(x - shape.crest_distance)))
    excess = _excess(solution, freezing=freezing)
    up = [_edge(x, height, cloud, excess, i, range(crest + 1)) for i in range(cloud.shape[1])]
    found = [edge for edge in up if edge is not None]
    if not found:
        return Cloud(None, None, None, None)
    base, base_distance = min(found)
    over_crest = np.flatnonzero(cloud[crest] > 0.0)
    if not over_crest.size:
        return Cloud(base, base_distance, None, None)
    lowest = int(over_crest[0])
    gone = np.flatnonzero(cloud[crest:, lowest] == 0.0)
    if not gone.size:
        return Cloud(base, base_distance, None, None)
    first = crest + int(gone[0])
    edge = _edge(x, height, cloud, excess, lowest, range(first, first - 2, -1))
    end, end_distance = edge if edge is not None else (float(height[first, lowest]), float(x[first]))
    return Cloud(base, base_distance, end, end_distance)


def cloud_bases(solution: Solution, shape: Features, distance: Array, *, freezing: bool = True) -> Array:
    """Cloud base of every member, as `clouds` gives it of the first.

    Parameters
    ----------
    solution : Solution
    shape : Features
    distance : ndarray (nx,) [m]
        Of the transect's points.
    freezing : bool

    Returns
    -------
    ndarray (m,) [m above sea level]
        NaN without cloud.
    """
    streams = solution.streams
    x, air = distance[streams.place], streams.air
    up = slice(0, int(np.argmin(np.abs(x - shape.crest_distance))) + 1)
    height = np.moveaxis(streams.flow.heights[..., streams.place[up]], -1, 0)
    wet = ((air.cloud[up] + air.condensed[up]) > 0.0) & (streams.start.pressure >= HIGHEST_CLOUD)
    now = np.argmax(wet, axis=0)[np.newaxis]
    before = np.maximum(now - 1, 0)

    def excess(at: NDArray[np.intp]) -> Array:
        p, t, v = (np.take_along_axis(y[up], at, axis=0)[0] for y in (air.pressure, air.temperature, air.vapour))
        return np.asarray(v / saturation_mixing_ratio(p, t, freezing=freezing) - 1.0)

    short, reached = excess(before), excess(now)
    share = np.clip(-short / np.maximum(reached - short, 1e-12), 0.0, 1.0)
    z0, z1 = (np.take_along_axis(height, at, axis=0)[0] for at in (before, now))
    base = np.min(np.where(wet.any(axis=0), z0 + share * (z1 - z0), np.inf), axis=-1)
    return np.where(np.isfinite(base), base, np.nan)


def cloud_ends(solution: Solution, shape: Features, distance: Array, *, freezing: bool = True) -> Array:
    """End of the cloud in the lee of every member, as `clouds` gives it of the first.

    Parameters
    ----------
    solution : Solution
    shape : Features
    distance : ndarray (nx,) [m]
        Of the transect's points.
    freezing : bool

    Returns
    -------
    ndarray (m,) [m above sea level]
        NaN without cloud before the crest or over it, and where it goes on to the downwind end.
    """
    streams = solution.streams
    x, air = distance[streams.place], streams.air
    crest = int(np.argmin(np.abs(x - shape.crest_distance)))
    height = np.moveaxis(streams.flow.heights[..., streams.place], -1, 0)
    wet = ((air.cloud + air.condensed) > 0.0) & (streams.start.pressure >= HIGHEST_CLOUD)
    lowest = np.argmax(wet[crest], axis=-1)[np.newaxis, :, np.newaxis]
    dry = ~np.take_along_axis(wet[crest:], lowest, axis=2)[..., 0]
    known = wet[: crest + 1].any(axis=(0, 2)) & wet[crest].any(axis=-1) & dry.any(axis=0)
    after = crest + np.argmax(dry, axis=0)
    member = np.arange(after.size)

    def at(values: Array, place: NDArray[np.intp]) -> Array:
        return np.asarray(values[place, member, lowest[0, :, 0]])

    def excess(place: NDArray[np.intp]) -> Array:
        p, t, v = (at(values, place) for values in (air.pressure, air.temperature, air.vapour))
        return np.asarray(v / saturation_mixing_ratio(p, t, freezing=freezing) - 1.0)

    before = np.maximum(after - 1, 0)
    short, reached = excess(after), excess(before)
    share = np.clip(-short / np.maximum(reached - short, 1e-12), 0.0, 1.0)
    end = at(height, after) + share * (at(height, before) - at(height, after))
    return np.where(known, end, np.nan)


def _excess(solution: Solution, *, freezing: bool) -> Array:
    """Vapour over saturation minus one, (nk, nz)."""
    air = solution.streams.air
    p, t, v = air.pressure[:, 0, :], air.temperature[:, 0, :], air.vapour[:, 0, :]
    return np.asarray(v / saturation_mixing_ratio(p, t, freezing=freezing) - 1.0)


def _edge(x: Array, height: Array, cloud: Array, excess: Array, stream: int, way: range) -> tuple[float, float] | None:
    """Height and place at which a streamline, followed along a way, becomes cloudy; None when it does not."""
    steps = np.array(way)
    wet = cloud[steps, stream] > 0.0
    if not wet.any():
        return None
    j = int(np.argmax(wet))
    now = steps[j]
    if j == 0:
        return float(height[now, stream]), float(x[now])
    before = steps[j - 1]
    short, reached = excess[before, stream], excess[now, stream]
    share = float(np.clip(-short / max(reached - short, 1e-12), 0.0, 1.0))
    return (
        float(height[before, stream] + share * (height[now, stream] - height[before, stream])),
        float(x[before] + share * (x[now] - x[before])),
    )
