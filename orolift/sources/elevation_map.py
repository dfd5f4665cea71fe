"""An elevation raster as a square grid of true metres, for rain over a map."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

import numpy as np

from orolift.checks import within
from orolift.errors import DataFileError, TerrainError
from orolift.sources.raster_file import (
    LONGITUDE_LATITUDE,
    RasterFile,
    cell_positions,
    map_coordinates,
    map_positions,
    opened_raster,
    window_ground,
)
from orolift.terrain.grid import ElevationGrid

if TYPE_CHECKING:
    from pathlib import Path

    from numpy.typing import NDArray

    Array = NDArray[np.float64]

MOST_CELLS = 2048  # along the longer side; more do not change rain that drifts for kilometres
LEAST_CELL = 100.0  # [m] finer cells change the rain by less than 1 %: a judgement
LONGEST_SIDE = 2.0e6  # [m] beyond it one wind and one projection are wrong
TRUE_SCALE = 0.005  # a projection further off than this is replaced by a local one
SQUARE = 1e-3
_TURNS = np.radians(2.0)  # grid north that turns more across the map is noted
_SAME = 1e-9


@dataclass(frozen=True, eq=False)
class ElevationMap:
    """Elevation on a square grid of metres, and where on Earth that is.

    Attributes
    ----------
    grid : ElevationGrid
        Rows north to south, metres.
    crs : rasterio CRS
        Of the grid.
    transform : Affine
        From columns and rows to coordinates, for writing maps.
    source_crs : rasterio CRS
        Of the raster, in which easting and northing of a case are given.
    north : float [rad]
        Bearing of true north at the middle of the map, clockwise from grid north:
        add it to a true bearing to get one on the grid.
    longitude, latitude : float [degrees east, degrees north]
        Of the middle.
    notes : tuple of str
    """

    grid: ElevationGrid
    crs: Any
    transform: Any
    source_crs: Any
    north: float
    longitude: float
    latitude: float
    notes: tuple[str, ...]


@dataclass(frozen=True)
class _Part:
    """Rows and columns of a raster that are wanted: first and one past last."""

    rows: tuple[int, int]
    columns: tuple[int, int]

    @property
    def height(self) -> int:
        return self.rows[1] - self.rows[0]

    @property
    def width(self) -> int:
        return self.columns[1] - self.columns[0]

    @property
    def middle(self) -> tuple[float, float]:
        """Fractional row and column, whole numbers being centres of cells."""
        return 0.5 * (self.rows[0] + self.rows[1] - 1), 0.5 * (self.columns[0] + self.columns[1] - 1)


def read_elevation_map(
    path: str | Path,
    *,
    around: tuple[float, float] | None = None,
    reach: float = 200.0e3,
    unit: Literal["m", "ft"] | None = None,
    folder: Path | None = None,
    where: str = "elevation_file",
    most_cells: int = MOST_CELLS,
    least_cell: float = LEAST_CELL,
) -> ElevationMap:
    """Elevation of a raster, or of a part of it, on a square grid of true metres.

    Parameters
    ----------
    path : str or Path
        Any raster GDAL reads, in any coordinate system; local files only.
    around : (float, float), optional
        Longitude and latitude of a point [degrees east, degrees north]: only the raster round it is read.
    reach : float [m]
        How far from that point, in the directions of the raster's rows and columns, 1 km to 1000 km.
    unit : {"m", "ft"}, optional
        Unit of the heights, default what the raster declares, else metres.
    folder : Path, optional
        Folder that a relative `path` starts from.
    where : str
        Key or option the path came from, for messages.
    most_cells : int
        Along the longer side, 16 to 8192; a larger raster is read in means of several cells.
    least_cell : float [m]
        Finer rasters are read in means of several cells, 1 m to 100 km.

    Returns
    -------
    ElevationMap

    Raises
    ------
    MissingFileError, DataFileError
        If the file is not there, not local or not a georeferenced elevation raster in the unit said.
    TerrainError
        If it is smaller than 8 x 8 cells or longer than 2000 km, or does not reach to the point.
    OutOfRangeError
        If a number is out of its range.

    Notes
    -----
    A raster keeps its own projection when that has metres, square cells along its axes and a scale within 0.5 %
    of true. All others (longitude and latitude, feet, turned, stretched as in web maps) are warped,
    bilinearly, to a Lambert azimuthal equal-area projection about their middle: areas are true,
    and distances within 0.1 % up to 500 km from it. South-up rasters are turned over.
    """
    within("most_cells", most_cells, 16, 8192, "cells")
    within("least_cell", least_cell, 1.0, 1e5, "m")
    within("reach", reach, 1e3, 1e6, "m")
    with opened_raster(path, unit, where, folder) as raster:
        dataset = raster.dataset
        part = _Part((0, dataset.height), (0, dataset.width)) if around is None else _part(raster, around, reach)
        if min(part.height, part.width) < 8:
            raise TerrainError(
                f"{raster.name} has {part.height} x {part.width} cells there; a map of rain needs at least 8 each way."
            )
        longitude, latitude = _middle(raster, part)
        local = _equal_area(longitude, latitude)
        if _is_fit(raster, part, local):
            grid, crs, transform = _own_grid(raster, part, most_cells, least_cell)
        else:
            grid, crs, transform = _warped(raster, part, local, most_cells, least_cell)
        north = _north(raster, grid, crs)
        notes = tuple(raster.notes)
        source_crs = dataset.crs
    return ElevationMap(grid, crs, transform, source_crs, north, longitude, latitude, notes)


def _part(raster: RasterFile, around: tuple[float, float], reach: float) -> _Part:
    """Cells within `reach` of a point, cut to the raster."""
    longitude, latitude = (float(value) for value in around)
    within("around", longitude, -180.0, 360.0, "degrees east")
    within("around", latitude, -90.0, 90.0, "degrees north", "Are longitude and latitude exchanged?")
    share = np.linspace(-reach, reach, 21)
    end = np.full(21, reach)
    east, north = np.concatenate([share, share, end, -end]), np.concatenate([end, -end, share, share])
    x, y = map_positions(raster, east, north, _equal_area(longitude, latitude), raster.dataset.crs)
    row, column = cell_positions(raster, x, y)
    limits = []
    for values, size in ((row, raster.dataset.height), (column, raster.dataset.width)):
        known = values[np.isfinite(values)]
        first = int(np.clip(np.floor(known.min(initial=size)), 0, size))
        limits.append((first, int(np.clip(np.ceil(known.max(initial=0.0)) + 1, first, size))))
    part = _Part(*limits)
    if part.height == 0 or part.width == 0:
        raise TerrainError(
            f"{raster.name} does not reach to {longitude:.3f} E, {latitude:.3f} N, round which a map of rain is wanted."
        )
    return part


def _middle(raster: RasterFile, part: _Part) -> tuple[float, float]:
    """Longitude and latitude of the middle."""
    x, y = map_coordinates(raster, *part.middle)
    longitude, latitude = map_positions(raster, x, y, raster.dataset.crs, LONGITUDE_LATITUDE)
    if not (np.isfinite(longitude) and np.isfinite(latitude)):
        raise TerrainError(f"{raster.name}: its middle lies nowhere on Earth in its coordinate system.")
    return float(longitude), float(latitude)


def _equal_area(longitude: float, latitude: float) -> str:
    return f"+proj=laea +lat_0={latitude!r} +lon_0={longitude!r} +datum=WGS84 +units=m"


def _outline_in(raster: RasterFile, part: _Part, local: str) -> tuple[Array, Array]:
    """Coordinates, in a local projection, of points all along the edge."""
    share = np.linspace(0.0, 1.0, 21)
    zero, one = np.zeros(21), np.ones(21)
    row = part.rows[0] + np.concatenate([zero, one, share, share]) * part.height - 0.5
    column = part.columns[0] + np.concatenate([share, share, zero, one]) * part.width - 0.5
    try:
        east, north = map_positions(raster, *map_coordinates(raster, row, column), raster.dataset.crs, local)
        known = bool(np.isfinite(east).all() and np.isfinite(north).all())
    except DataFileError:
        known = False
    if not known:
        raise TerrainError(f"{raster.name} covers too much of the Earth for a map of rain. Cut out the range first.")
    return np.asarray(east), np.asarray(north)


def _is_fit(raster: RasterFile, part: _Part, local: str) -> bool:
    """Whether a raster's own grid is one of true metres with square cells along its axes."""
    t, crs = raster.dataset.transform, raster.dataset.crs
    if crs.is_geographic or not crs.is_projected or abs(crs.linear_units_factor[1] - 1.0) > _SAME:
        return False
    cell = abs(t.a)
    if max(abs(t.b), abs(t.d)) > _SAME * cell or abs(abs(t.e) - cell) > SQUARE * cell:
        return False
    # lengths of one cell each way at the corners and in the middle, in the local projection
    row, column = np.meshgrid(
        [part.rows[0], part.middle[0], part.rows[1] - 1.0], [part.columns[0], part.middle[1], part.columns[1] - 1.0]
    )
    x, y = map_coordinates(raster, row, column)
    here = np.array(map_positions(raster, x, y, crs, local))
    for step_x, step_y in ((cell, 0.0), (0.0, cell)):
        there = np.array(map_positions(raster, x + step_x, y + step_y, crs, local))
        scale = np.hypot(*(there - here)) / cell
        if not np.all(np.abs(scale - 1.0) <= TRUE_SCALE):
            return False
    return True


def _step(cell: float, longest: int, most_cells: int, least_cell: float) -> int:
    """How many cells each way to take the mean of."""
    return max(1, -(-longest // most_cells), int(np.ceil(least_cell / cell - SQUARE)))


def _note_step(raster: RasterFile, step: int, cell: float) -> None:
    if step > 1:
        raster.notes[f"For rain over the map the raster was read in means of {step} x {step} cells ({cell:.0f} m)."] = (
            None
        )


def _own_grid(raster: RasterFile, part: _Part, most_cells: int, least_cell: float) -> tuple[ElevationGrid, Any, Any]:
    """The raster's own cells, or means of whole numbers of them."""
    from affine import Affine

    t = raster.dataset.transform
    side = max(part.height, part.width)
    _refuse_long(raster, side * abs(t.a))
    step = _step(abs(t.a), side, most_cells, least_cell)
    ny, nx = part.height // step, part.width // step
    if min(ny, nx) < 8:
        raise TerrainError(
            f"{raster.name} is {min(part.height, part.width) * abs(t.a) / 1000.0:.1f} km wide; at cells of "
            f"{step * abs(t.a):.0f} m that is {min(ny, nx)} of them, and a map of rain needs at least 8. Use a raster "
            "that covers the range."
        )
    _note_step(raster, step, step * abs(t.a))
    row, column = part.rows[0], part.columns[0]
    ground = window_ground(raster, (row, row + ny * step), (column, column + nx * step), step)
    x = t.c + t.a * (column + step * (np.arange(nx) + 0.5))
    y = t.f + t.e * (row + step * (np.arange(ny) + 0.5))
    if t.a < 0.0:
        ground, x = ground[:, ::-1], x[::-1]
    if t.e > 0.0:
        ground, y = ground[::-1], y[::-1]
    cell = step * abs(t.a)
    high = step * abs(t.e)
    grid = ElevationGrid(np.ascontiguousarray(ground), x, y)
    return grid, raster.dataset.crs, Affine(cell, 0.0, x[0] - 0.5 * cell, 0.0, -high, y[0] + 0.5 * high)


def _warped(
    raster: RasterFile, part: _Part, local: str, most_cells: int, least_cell: float
) -> tuple[ElevationGrid, Any, Any]:
    """The raster on a square grid in a local projection."""
    from affine import Affine
    from rasterio.crs import CRS
    from rasterio.enums import Resampling
    from rasterio.warp import reproject

    east, north = _outline_in(raster, part, local)
    sides = float(np.ptp(east)), float(np.ptp(north))
    _refuse_long(raster, max(sides))
    own = _cell_sides(raster, part, local)
    cell = max(least_cell, float(np.sqrt(own[0] * own[1])), max(sides) / most_cells)
    nx, ny = (int(side / cell) for side in sides)
    if min(nx, ny) < 8:
        raise TerrainError(
            f"{raster.name} is {min(sides) / 1000.0:.1f} km wide; at cells of {cell:.0f} m that is {min(nx, ny)} of "
            "them, and a map of rain needs at least 8. Use a raster that covers the range."
        )
    step = max(1, int(cell / max(own) + SQUARE))
    source = window_ground(raster, part.rows, part.columns, step)
    wide, high = part.width / source.shape[1], part.height / source.shape[0]
    t = raster.dataset.transform
    corner = map_coordinates(raster, part.rows[0] - 0.5, part.columns[0] - 0.5)
    transform = Affine(cell, 0.0, east.min(), 0.0, -cell, north.max())
    ground = np.full((ny, nx), np.nan)
    reproject(
        source,
        ground,
        src_transform=Affine(t.a * wide, t.b * high, corner[0], t.d * wide, t.e * high, corner[1]),
        src_crs=raster.dataset.crs,
        src_nodata=np.nan,
        dst_transform=transform,
        dst_crs=local,
        dst_nodata=np.nan,
        resampling=Resampling.bilinear,
        num_threads=2,
    )
    raster.notes[
        f"For rain over the map the raster was warped to square cells of {cell:.0f} m in an equal-area projection "
        "about its middle."
    ] = None
    x = float(east.min()) + cell * (np.arange(nx, dtype=np.float64) + 0.5)
    y = float(north.max()) - cell * (np.arange(ny, dtype=np.float64) + 0.5)
    return ElevationGrid(ground, x, y), CRS.from_string(local), transform


def _cell_sides(raster: RasterFile, part: _Part, local: str) -> tuple[float, float]:
    """Lengths of the two sides of a cell in the middle [m]."""
    row, column = part.middle
    x, y = map_coordinates(raster, row + np.array([0.0, 1.0, 0.0]), column + np.array([0.0, 0.0, 1.0]))
    east, north = map_positions(raster, x, y, raster.dataset.crs, local)
    sides = np.hypot(east[1:] - east[0], north[1:] - north[0])
    return float(sides[0]), float(sides[1])


def _refuse_long(raster: RasterFile, side: float) -> None:
    if side > LONGEST_SIDE:
        raise TerrainError(
            f"{raster.name} is {side / 1000.0:.0f} km long. The rain map has one wind for all of it; cut out at most "
            f"{LONGEST_SIDE / 1000.0:.0f} km, for example: gdal_translate -projwin WEST NORTH EAST SOUTH in.tif out.tif"
        )


def _north(raster: RasterFile, grid: ElevationGrid, crs: Any) -> float:
    """Bearing of true north on the grid in its middle [rad]; a note where it differs much across the map."""
    middle_x, middle_y = float(grid.x[grid.x.size // 2]), float(grid.y[grid.y.size // 2])
    x = np.array([middle_x, grid.x[0], grid.x[-1], grid.x[0], grid.x[-1]])
    y = np.array([middle_y, grid.y[0], grid.y[0], grid.y[-1], grid.y[-1]])
    longitude, latitude = map_positions(raster, x, y, crs, LONGITUDE_LATITUDE)
    small = 1e-4  # degrees, about 10 m
    ahead = map_positions(raster, longitude, latitude + small, LONGITUDE_LATITUDE, crs)
    behind = map_positions(raster, longitude, latitude - small, LONGITUDE_LATITUDE, crs)
    bearing = np.arctan2(ahead[0] - behind[0], ahead[1] - behind[1])
    off = np.angle(np.exp(1j * (bearing - bearing[0])))
    if np.abs(off).max() > _TURNS:
        raster.notes[
            f"Grid north differs by up to {np.degrees(np.abs(off).max()):.1f} degrees across the map of rain; the wind "
            "was turned by that in the middle."
        ] = None
    return float(bearing[0])
