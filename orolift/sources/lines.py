"""Lines over one map: the elevation read once, and the situation of any place and bearing on it."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.crossing.result import Site, When
from orolift.errors import CaseError
from orolift.sources.case_model import TransectTable
from orolift.sources.inputs import situation_of
from orolift.sources.raster_range import ALONG, range_around
from orolift.terrain.features import features
from orolift.terrain.grid import grid_elevation
from orolift.terrain.grid_line import POINTS, grid_line
from orolift.terrain.range_normal import RangeNormal

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from orolift.crossing.situation import Situation
    from orolift.sources.elevation_map import ElevationMap
    from orolift.sources.inputs import Inputs
    from orolift.terrain.transect import Transect

    Array = NDArray[np.float64]

MOST_CELLS = 2048
"""Cells of the map along its longer side: a 10 km swath averages over many of them anyway."""
_LONGITUDE_LATITUDE = "OGC:CRS84"


@dataclass(frozen=True, eq=False)
class Lines:
    """What all lines over the map of a case share.

    Attributes
    ----------
    placed : ElevationMap
    model : Situation
        Of the case's own line.
    normal : RangeNormal or None
        Direction across the range as the case gives it; None reads it off the map around the crest of each line.
    upwind, downwind, swath : float [m]
        Of each line.
    north : float [rad]
        Bearing of true north on the map, by the case's own line: one of the same bearing is parallel to it.
    x, y : float [m]
        Middle of the case's own line on the map.
    """

    placed: ElevationMap
    model: Situation
    normal: RangeNormal | None
    upwind: float
    downwind: float
    swath: float
    north: float
    x: float
    y: float


@dataclass(frozen=True, eq=False)
class PlacedLine:
    """A line on the map.

    Attributes
    ----------
    transect : Transect
        With positions.
    x, y : float [m]
        Its upwind end on the map.
    """

    transect: Transect
    x: float
    y: float


def read_lines(inputs: Inputs, *, beside: float = 0.0) -> Lines:
    """The map of a case, read once for many lines.

    Parameters
    ----------
    inputs : Inputs
        Of a case with a raster.
    beside : float [m]
        Farthest place that lines will go through, from the middle of the case's own line.

    Returns
    -------
    Lines

    Raises
    ------
    CaseError
        Of a case without a raster.
    DataFileError, TerrainError
        As `orolift.sources.elevation_map.read_elevation_map`.

    Notes
    -----
    Read as far as lines, and the range 100 km to both sides of their crests, can reach; at most 2048 cells a side.
    """
    case, transect = inputs.case, inputs.transect
    if case.terrain.elevation_file is None or transect.longitude is None or transect.latitude is None:
        raise CaseError(f"{inputs.path}: other lines need elevation_file; a ridge by hand is the only line it has.")
    from orolift.sources.elevation_map import read_elevation_map

    table = case.transect or TransectTable()
    upwind, downwind = table.upwind_km * 1000.0, table.downwind_km * 1000.0
    middle = transect.distance.size // 2
    placed = read_elevation_map(
        str(case.terrain.elevation_file),
        around=(float(transect.longitude[middle]), float(transect.latitude[middle])),
        reach=min(beside + upwind + downwind + ALONG, 1.0e6),
        unit=case.terrain.elevation_unit,
        folder=inputs.path.parent,
        where="[terrain] elevation_file",
        most_cells=MOST_CELLS,
    )
    x, y = map_places(placed, transect.longitude, transect.latitude)
    on_map = math.atan2(float(x[-1] - x[0]), float(y[-1] - y[0]))
    given = inputs.normal if case.flow.range_normal_deg is not None else None
    return Lines(
        placed,
        situation_of(inputs),
        given,
        upwind,
        downwind,
        table.swath_km * 1000.0,
        on_map - float(transect.bearing or 0.0),
        float(x[middle]),
        float(y[middle]),
    )


def map_places(placed: ElevationMap, longitude: ArrayLike, latitude: ArrayLike) -> tuple[Array, Array]:
    """Places on the map of longitudes and latitudes.

    Parameters
    ----------
    placed : ElevationMap
    longitude, latitude : array_like (n,) [degrees east, degrees north]

    Returns
    -------
    x, y : ndarray (n,) [m]
    """
    return _moved(_LONGITUDE_LATITUDE, placed.crs, longitude, latitude)


def degrees_of(placed: ElevationMap, x: ArrayLike, y: ArrayLike) -> tuple[Array, Array]:
    """Longitudes and latitudes [degrees east, degrees north] of places on the map (n,) [m]."""
    return _moved(placed.crs, _LONGITUDE_LATITUDE, x, y)


def line_through(
    lines: Lines,
    x: float,
    y: float,
    bearing: float,
    *,
    upwind: float | None = None,
    downwind: float | None = None,
    points: int = POINTS,
) -> PlacedLine:
    """A line over the map.

    Parameters
    ----------
    lines : Lines
    x, y : float [m]
        Place on the map it goes through.
    bearing : float [rad]
        True bearing toward which the air goes.
    upwind, downwind : float, optional [m]
        Length either side of the place, default as the case has it; shortened where the map ends.
    points : int

    Returns
    -------
    PlacedLine

    Raises
    ------
    TerrainError
        As `orolift.terrain.grid_line.grid_line`.
    """
    transect, start = grid_line(
        lines.placed.grid,
        x,
        y,
        bearing,
        upwind=lines.upwind if upwind is None else upwind,
        downwind=lines.downwind if downwind is None else downwind,
        swath=lines.swath,
        points=points,
        north=lines.north,
    )
    turned = bearing + lines.north
    x, y = x + start * math.sin(turned), y + start * math.cos(turned)
    longitude, latitude = degrees_of(
        lines.placed, x + transect.distance * math.sin(turned), y + transect.distance * math.cos(turned)
    )
    return PlacedLine(replace(transect, longitude=longitude, latitude=latitude), x, y)


def situation_on(lines: Lines, line: PlacedLine, sites: tuple[Site, ...] = ()) -> Situation:
    """The situation of a line over the map: its own crest, range and latitude; air and options of the case.

    Parameters
    ----------
    lines : Lines
    line : PlacedLine
    sites : tuple of Site
        Distances from the upwind end of the line; the first one says which crest counts.

    Returns
    -------
    Situation
        Winds of the incoming air as measured, whatever the bearing of the line.

    Raises
    ------
    TerrainError
        If the line has no crest with lower ground on both sides.
    """
    transect = line.transect
    downwind = float(transect.bearing or 0.0)
    crest = features(transect, sites[0].distance if sites else None).crest_distance
    given = None if lines.normal is None else _nearer(lines.normal, downwind)
    turned = downwind + lines.north
    x, y = line.x + crest * math.sin(turned), line.y + crest * math.cos(turned)
    found, crest_line = range_around(
        lambda east, north: _ground(lines, x, y, east, north), downwind, None if given is None else given.bearing
    )
    longitude, latitude = degrees_of(lines.placed, [x], [y])
    time = None if lines.model.when is None else lines.model.when.time
    return replace(
        lines.model,
        transect=transect,
        sites=sites,
        when=When(time, float(longitude[0]), float(latitude[0])),
        normal=given or found,
        crest_line=crest_line,
    )


def situation_through(
    lines: Lines,
    x: float,
    y: float,
    bearing: float,
    sites: tuple[Site, ...] = (),
    *,
    points: int = POINTS,
) -> Situation:
    """The situation of a line through a place along a bearing.

    Parameters
    ----------
    lines : Lines
    x, y : float [m]
        Place on the map; `map_places` gives it from longitude and latitude.
    bearing : float [rad]
        True bearing toward which the air goes.
    sites : tuple of Site
        Distances from the place, positive downwind; the first one says which crest counts.
    points : int

    Returns
    -------
    Situation

    Raises
    ------
    TerrainError
        As `line_through` and `situation_on`.
    """
    line = line_through(lines, x, y, bearing, points=points)
    turned = bearing + lines.north
    start = (line.x - x) * math.sin(turned) + (line.y - y) * math.cos(turned)
    return situation_on(lines, line, tuple(replace(site, distance=site.distance - start) for site in sites))


def _nearer(normal: RangeNormal, downwind: float) -> RangeNormal:
    """A normal the other way round where that is nearer to downwind."""
    if math.cos(normal.bearing - downwind) >= 0.0:
        return normal
    return RangeNormal((normal.bearing + math.pi) % (2.0 * math.pi), normal.coherence)


def _ground(lines: Lines, x: float, y: float, east: Array, north: Array) -> Array:
    """Ground at true distances east and north of a place on the map."""
    c, s = math.cos(lines.north), math.sin(lines.north)
    return grid_elevation(lines.placed.grid, x + east * c + north * s, y + north * c - east * s)


def _moved(source: Any, target: Any, a: ArrayLike, b: ArrayLike) -> tuple[Array, Array]:
    from rasterio.warp import transform

    x, y = transform(source, target, np.asarray(a, dtype=np.float64), np.asarray(b, dtype=np.float64))
    return np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64)
