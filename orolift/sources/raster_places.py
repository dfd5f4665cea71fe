"""Places on the map of an elevation raster: points, and sites on a transect."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from orolift.checks import within
from orolift.errors import TerrainError
from orolift.sources.raster_file import (
    LONGITUDE_LATITUDE,
    RasterFile,
    cell_positions,
    map_coordinates,
    map_positions,
    opened_raster,
    sampled,
)

if TYPE_CHECKING:
    from collections.abc import Sequence
    from pathlib import Path

    from numpy.typing import NDArray

    from orolift.terrain.transect import Transect


SQUARE = 256
"""Sites in one square of so many cells a side are read together; about a block of a tiled raster."""


@dataclass(frozen=True)
class MapPoint:
    """A point on the map.

    Attributes
    ----------
    x, y : float
        Longitude and latitude [degrees east, degrees north], or easting and
        northing in the raster's coordinate system [its unit].
    projected : bool
        True for easting and northing.
    """

    x: float
    y: float
    projected: bool = False


@dataclass(frozen=True)
class SitePositions:
    """Where sites lie on a transect.

    Attributes
    ----------
    distance : ndarray, shape (n,) [m]
        Along the transect from its upwind end; below 0 or beyond its length when a site lies off its ends.
    offset : ndarray, shape (n,) [m]
        Across it, positive to the right of the wind.
    elevation : ndarray, shape (n,) [m]
        Ground of the raster, NaN outside it.
    longitude, latitude : ndarray, shape (n,) [degrees east, degrees north]
    """

    distance: NDArray[np.float64]
    offset: NDArray[np.float64]
    elevation: NDArray[np.float64]
    longitude: NDArray[np.float64]
    latitude: NDArray[np.float64]


def site_positions(
    path: str | Path,
    transect: Transect,
    sites: Sequence[MapPoint],
    *,
    unit: Literal["m", "ft"] | None = None,
    folder: Path | None = None,
    where: str = "elevation_file",
) -> SitePositions:
    """Places of sites on a transect, and the ground of the raster there.

    Parameters
    ----------
    path : str or Path
        The raster the transect was cut from.
    transect : Transect
        From `raster_transect`.
    sites : sequence of MapPoint, length n
    unit, folder, where
        As in `raster_transect`.

    Returns
    -------
    SitePositions

    Raises
    ------
    MissingFileError, DataFileError
        As in `raster_transect`.
    TerrainError
        If the transect carries no positions.

    Notes
    -----
    Distance and offset are measured in the azimuthal equidistant projection
    about the middle of the transect: exact along it, and within 5 m for a site 100 km from
    that middle and 50 km off the line.
    """
    if transect.longitude is None or transect.latitude is None:
        raise TerrainError("the transect was entered by hand and has no positions; give sites as distance_km")
    with opened_raster(path, unit, where, folder) as raster:
        x, y = degrees(raster, sites)
        middle = transect.distance.size // 2
        local = local_system(float(transect.longitude[middle]), float(transect.latitude[middle]))
        ends = slice(middle - 1, middle + 2, 2)
        east, north = map_positions(
            raster, transect.longitude[ends], transect.latitude[ends], LONGITUDE_LATITUDE, local
        )
        bearing = np.arctan2(east[1] - east[0], north[1] - north[0])
        east, north = map_positions(raster, x, y, LONGITUDE_LATITUDE, local)
        row, column = cell_positions(raster, *map_positions(raster, x, y, LONGITUDE_LATITUDE, raster.dataset.crs))
        ground = _ground_at(raster, row, column)
    return SitePositions(
        distance=transect.distance[middle] + east * np.sin(bearing) + north * np.cos(bearing),
        offset=east * np.cos(bearing) - north * np.sin(bearing),
        elevation=ground,
        longitude=x,
        latitude=y,
    )


def _ground_at(raster: RasterFile, row: NDArray[np.float64], column: NDArray[np.float64]) -> NDArray[np.float64]:
    """Ground at points that may lie far apart: a window for all that lie in one square of cells."""
    ground = np.full(row.shape, np.nan)
    square = np.stack([np.floor(np.nan_to_num(v, nan=-1.0) / SQUARE) for v in (row, column)])
    _, group = np.unique(square, axis=1, return_inverse=True)
    for number in range(int(group.max()) + 1):
        here = group == number
        ground[here] = sampled(raster, row[here], column[here], 1)
    return ground


def local_system(longitude: float, latitude: float) -> str:
    """Azimuthal equidistant projection about a point: geodesics through it are straight and true to scale."""
    return f"+proj=aeqd +lat_0={latitude!r} +lon_0={longitude!r} +datum=WGS84 +units=m"


def degrees(raster: RasterFile, places: Sequence[MapPoint]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Longitude and latitude of points."""
    x = np.array([place.x for place in places], dtype=np.float64)
    y = np.array([place.y for place in places], dtype=np.float64)
    projected = np.array([place.projected for place in places], dtype=bool)
    if projected.any():
        if raster.dataset.crs.is_geographic:
            raise TerrainError(
                f"{raster.name} is in longitude and latitude, so easting and northing mean nothing in it. "
                "Give longitude and latitude."
            )
        crs = raster.dataset.crs
        x[projected], y[projected] = map_positions(raster, x[projected], y[projected], crs, LONGITUDE_LATITUDE)
    within("longitude", x, -180.0, 360.0, "degrees east")
    within("latitude", y, -90.0, 90.0, "degrees north", "Are longitude and latitude exchanged?")
    return x, y


def extent(raster: RasterFile) -> str:
    """Longitudes and latitudes a raster covers, for messages."""
    rows, columns = np.meshgrid([-0.5, raster.dataset.height - 0.5], [-0.5, raster.dataset.width - 0.5])
    x, y = map_positions(raster, *map_coordinates(raster, rows, columns), raster.dataset.crs, LONGITUDE_LATITUDE)
    return f"{x.min():.3f} to {x.max():.3f} E, {y.min():.3f} to {y.max():.3f} N"
