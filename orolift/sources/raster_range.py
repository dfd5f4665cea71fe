"""The range around the crest of a transect, read off its raster: direction across it, and its crest line."""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal

import numpy as np

from orolift.crossing.solve import CrestLine
from orolift.sources.raster_file import cell_positions, map_coordinates, map_positions, opened_raster, sampled
from orolift.sources.raster_places import local_system
from orolift.terrain.range_normal import RangeNormal, range_normal

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

    from numpy.typing import NDArray

    from orolift.sources.raster_file import RasterFile

    Array = NDArray[np.float64]

WINDOW = 50.0e3
"""Side [m] of the window at the crest in which the range normal is found (design choice)."""
SPACING = 1000.0
"""Spacing [m] of the points in it, and along the crest line."""
ALONG = 100.0e3
"""Farthest [m] along the range to which its crest line is followed (design choice)."""
ACROSS = 10.0e3
"""Distance [m] to both sides over which the crest line is the highest ground; a judgement."""
ACROSS_SPACING = 500.0
LEAST_POINTS = 5
"""Points of a crest line that must be covered; a judgement."""
LEAST_COVERED = 0.5
"""Share of the window that must be inside the raster for a range normal; a judgement."""


def range_of_raster(
    path: str | Path,
    longitude: float,
    latitude: float,
    downwind: float,
    *,
    normal: float | None = None,
    unit: Literal["m", "ft"] | None = None,
    folder: Path | None = None,
    where: str = "elevation_file",
) -> tuple[RangeNormal | None, CrestLine | None]:
    """Range normal and crest line around a crest.

    Parameters
    ----------
    path : str or Path
        The raster the transect was cut from.
    longitude, latitude : float [degrees east, degrees north]
        Of the crest.
    downwind : float [rad]
        Bearing the air moves toward.
    normal : float, optional [rad]
        Given range normal, for the crest line.
    unit, folder, where
        As for `orolift.sources.raster.raster_transect`.

    Returns
    -------
    RangeNormal or None
        None where less than half of the window is covered.
    CrestLine or None
        None where fewer than five of its points are covered.

    Raises
    ------
    MissingFileError, DataFileError
        As `raster_transect`.

    Notes
    -----
    Points are laid out in an azimuthal equidistant projection about the
    crest. The crest line is the highest ground within 10 km to both sides of the line through
    the crest along the range.
    """
    with opened_raster(path, unit, where, folder) as raster:
        local = local_system(longitude, latitude)
        return range_around(lambda east, north: _ground(raster, local, east, north), downwind, normal)


def range_around(
    ground: Callable[[Array, Array], Array], downwind: float, normal: float | None = None
) -> tuple[RangeNormal | None, CrestLine | None]:
    """Range normal and crest line around a crest, from anything that gives ground.

    Parameters
    ----------
    ground : callable
        Of arrays of distances east and north of the crest [m], which broadcast: the ground [m], NaN where unknown.
    downwind, normal
        As for `range_of_raster`.

    Returns
    -------
    RangeNormal or None, CrestLine or None
        As `range_of_raster`.
    """
    side = np.arange(-WINDOW / 2.0, WINDOW / 2.0 + 1.0, SPACING)
    window = ground(side, side[::-1, np.newaxis])
    found = None
    if np.isfinite(window).mean() >= LEAST_COVERED:
        found = range_normal(window, SPACING, downwind)
    bearing = normal if normal is not None else downwind if found is None else found.bearing
    along = np.arange(-ALONG, ALONG + 1.0, SPACING)
    across = np.arange(-ACROSS, ACROSS + 1.0, ACROSS_SPACING)[:, np.newaxis]
    east = along * np.cos(bearing) + across * np.sin(bearing)
    north = -along * np.sin(bearing) + across * np.cos(bearing)
    strip = ground(east, north)
    known = np.isfinite(strip).all(axis=0)
    if known.sum() < LEAST_POINTS:
        return found, None
    return found, CrestLine(along[known], np.max(strip[:, known], axis=0))


def _ground(raster: RasterFile, local: str, east: Array, north: Array) -> Array:
    """Ground at points of a local system, NaN outside the raster."""
    e, n = np.broadcast_arrays(east, north)
    x, y = map_positions(raster, e, n, local, raster.dataset.crs)
    row, column = cell_positions(raster, x, y)
    step = max(1, int(ACROSS_SPACING / 2.0 / _cell(raster, local)))
    return sampled(raster, row, column, step)


def _cell(raster: RasterFile, local: str) -> float:
    """Side of a cell at the centre of the local system [m], the longer one."""
    row, column = cell_positions(raster, *map_positions(raster, np.zeros(1), np.zeros(1), local, raster.dataset.crs))
    corners = map_coordinates(raster, row + np.array([0.0, 1.0, 0.0]), column + np.array([0.0, 0.0, 1.0]))
    east, north = map_positions(raster, *corners, raster.dataset.crs, local)
    return float(np.hypot(east[1:] - east[0], north[1:] - north[0]).max())
