"""Transects cut from a grid in memory: many lines over one map."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import TerrainError
from orolift.terrain.grid import grid_elevation
from orolift.terrain.transect import MINIMUM_RELIEF, Transect

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.terrain.grid import ElevationGrid

POINTS = 512
MOST_LINES = 21
"""Lines across a swath; more change its mean by less than the raster's own errors: a judgement."""
LEAST_LENGTH = 30.0e3
"""A line that the grid cuts shorter than this [m] is none; a judgement."""


def grid_line(
    grid: ElevationGrid,
    x: float,
    y: float,
    bearing: float,
    *,
    upwind: float,
    downwind: float,
    swath: float,
    points: int = POINTS,
    north: float = 0.0,
) -> tuple[Transect, float]:
    """A straight line over a grid, averaged across a swath.

    Parameters
    ----------
    grid : ElevationGrid
        In metres.
    x, y : float [m]
        Point it passes through, inside the grid.
    bearing : float [rad]
        True bearing toward which it runs.
    upwind, downwind : float [m]
        Length either side of the point; shortened where the grid ends.
    swath : float [m]
        Width over which the ground is averaged; 0 for the line alone.
    points : int
    north : float [rad]
        Bearing of true north on the grid.

    Returns
    -------
    Transect
        Without longitude and latitude.
    start : float [m]
        Distance of the transect's first point from the point, negative upwind: the
        point lies at ``-start`` along it.

    Raises
    ------
    TerrainError
        If less than 30 km of the line lie on the grid without a gap, or it is flat.
    """
    turned = bearing + north
    along = np.linspace(-upwind, downwind, points)
    cell = float(abs(grid.x[1] - grid.x[0]))
    lines = min(2 * int(np.ceil(swath / 2.0 / cell)) + 1, MOST_LINES) if swath > 0.0 else 1
    offsets = np.linspace(-swath / 2.0, swath / 2.0, lines)[:, np.newaxis] if lines > 1 else np.zeros((1, 1))
    ground = grid_elevation(
        grid,
        x + along * np.sin(turned) + offsets * np.cos(turned),
        y + along * np.cos(turned) - offsets * np.sin(turned),
    )
    mean, high = _across(ground)
    first, last = _covered(mean, int(np.argmin(np.abs(along))))
    along, mean, high = along[first:last], mean[first:last], high[first:last]
    if along.size < 2 or along[-1] - along[0] < LEAST_LENGTH:
        raise TerrainError(
            f"less than {LEAST_LENGTH / 1000.0:.0f} km of the line through the point lie on the elevation raster "
            "without a gap. Use a raster that reaches further, or another wind direction."
        )
    if np.ptp(mean) < MINIMUM_RELIEF:
        raise TerrainError(
            f"the ground along the line through the point is flat: {np.ptp(mean):.0f} m between its lowest and highest "
            f"point, and at least {MINIMUM_RELIEF:g} m are needed to lift air."
        )
    line = Transect(along - along[0], mean, bearing % (2.0 * np.pi), high_elevation=high if lines > 1 else None)
    return line, float(along[0])


def _across(ground: NDArray[np.float64]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Mean and 90th percentile across the swath, NaN where fewer than half of its lines have ground."""
    known = np.isfinite(ground)
    count = known.sum(axis=0)
    mean = np.where(known, ground, 0.0).sum(axis=0) / np.maximum(count, 1)
    place = 0.9 * np.maximum(count - 1, 0)
    below, ordered = np.floor(place).astype(np.intp), np.sort(ground, axis=0)  # NaN last
    columns = np.arange(ground.shape[1])
    low, high = ordered[below, columns], ordered[np.minimum(below + 1, np.maximum(count - 1, 0)), columns]
    enough = 2 * count >= ground.shape[0]
    return np.where(enough, mean, np.nan), np.where(enough, low + (place - below) * (high - low), np.nan)


def _covered(mean: NDArray[np.float64], middle: int) -> tuple[int, int]:
    """First and one past last of the points round the middle without a gap."""
    missing = np.flatnonzero(~np.isfinite(mean))
    before, after = missing[missing <= middle], missing[missing >= middle]
    return int(before[-1]) + 1 if before.size else 0, int(after[0]) if after.size else mean.size
