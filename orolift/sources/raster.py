"""A transect cut from an elevation raster along the wind."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Literal

import numpy as np

from orolift.checks import within
from orolift.errors import TerrainError
from orolift.sources.raster_file import (
    LONGITUDE_LATITUDE,
    RasterFile,
    cell_positions,
    highest_cell,
    map_coordinates,
    map_positions,
    opened_raster,
    sampled,
)
from orolift.sources.raster_places import MapPoint, SitePositions, degrees, extent, local_system, site_positions
from orolift.terrain.transect import MINIMUM_RELIEF, Transect

if TYPE_CHECKING:
    from pathlib import Path

    from numpy.typing import NDArray

__all__ = ["MapPoint", "SitePositions", "raster_transect", "site_positions"]

POINTS = 512
MOST_LINES = 21  # across the swath; more change its mean by less than the raster's own errors: a judgement
LEAST_UPWIND = 20.0e3  # [m] upwind of the crest that a shortened transect must keep: about one half width of a range
FILLED_CELLS = 3.0  # a hole up to this many cells long is filled


def raster_transect(
    path: str | Path,
    *,
    wind_from: float,
    through: MapPoint | None = None,
    upwind: float = 120.0e3,
    downwind: float = 80.0e3,
    swath: float = 10.0e3,
    unit: Literal["m", "ft"] | None = None,
    points: int = POINTS,
    folder: Path | None = None,
    where: str = "elevation_file",
) -> Transect:
    """Transect cut from an elevation raster along the wind.

    Parameters
    ----------
    path : str or Path
        Any raster GDAL reads, in any coordinate system; local files only.
    wind_from : float [rad]
        Direction the wind comes from, clockwise from north, where the line passes the centre point.
    through : MapPoint, optional
        Centre point, default the highest cell (see Notes).
    upwind, downwind : float [m]
        Length either side of the centre point, 1 km to 2000 km.
    swath : float [m]
        Width across the line over which the ground is averaged, 0 to 500 km; 0 for the line alone.
    unit : {"m", "ft"}, optional
        Unit of the heights, default what the raster declares, else metres.
    points : int
        Points along the line, at least 16.
    folder : Path, optional
        Folder that a relative `path` starts from.
    where : str
        Key or option the path came from, for messages.

    Returns
    -------
    Transect
        With positions, notes and, if `swath` is not 0, `high_elevation`.

    Raises
    ------
    MissingFileError, DataFileError
        If the file is not there, not local or not a georeferenced elevation raster in the unit said.
    TerrainError
        If the line leaves the raster too close to the crest, has a hole, or is too flat.
    OutOfRangeError
        If a number is out of its range.

    Notes
    -----
    The line is the geodesic through the centre point; points and the lines of
    the swath are laid out in an azimuthal equidistant projection about it, in
    which the geodesic is straight and true to scale. The raster is averaged to
    cells half as wide as the sampling (only windows round the line are read),
    sampled bilinearly, and averaged across the swath; `high_elevation` is the
    90th percentile across it. Depths of the sea count as 0 m.

    Where the raster ends along the line the transect is shortened, if 20 km
    remain upwind of its crest. Holes up to three cells, or three steps of the
    sampling where these are longer, are filled by straight lines. A swath line
    outside the raster is left out of the mean as long as half of the lines are inside.

    The highest cell is looked for in means of several cells if the raster has
    overviews and more than 2048 cells a side; without overviews all of it is
    read once, a few seconds for 200 million cells.
    """
    within("wind_from", wind_from, -10.0, 10.0, "rad", "Give radians, clockwise from north.")
    for key, value, low, high in (
        ("upwind", upwind, 1e3, 2e6),
        ("downwind", downwind, 1e3, 2e6),
        ("swath", swath, 0.0, 5e5),
        ("points", points, 16, 100_000),
    ):
        within(key, value, low, high, "points" if key == "points" else "m")
    with opened_raster(path, unit, where, folder) as raster:
        longitude, latitude = _centre(raster, through)
        local = local_system(longitude, latitude)
        along = np.linspace(-upwind, downwind, points)
        cell = _cell_size(raster, local)
        line = _swath_line(raster, local, cell, wind_from + np.pi, along, swath)
        first, last = _covered(raster, line)
        if last - first < points - 1:
            along = np.linspace(along[first], along[last], points)
            line = _swath_line(raster, local, cell, wind_from + np.pi, along, swath)
        line = _filled(raster, line, FILLED_CELLS * max(cell, float(along[1] - along[0])))
    return replace(line, notes=(*line.notes, *raster.notes), distance=line.distance - line.distance[0])


def _centre(raster: RasterFile, through: MapPoint | None) -> tuple[float, float]:
    """Longitude and latitude of the centre point."""
    dataset = raster.dataset
    if through is None:
        row, column = highest_cell(raster)
        longitude, latitude = map_positions(
            raster, *map_coordinates(raster, row, column), dataset.crs, LONGITUDE_LATITUDE
        )
        raster.notes["The transect passes through the highest cell of the raster."] = None
        return float(longitude), float(latitude)
    longitude, latitude = degrees(raster, [through])
    row, column = cell_positions(raster, *map_positions(raster, longitude, latitude, LONGITUDE_LATITUDE, dataset.crs))
    inside = (-0.5 <= row[0] <= dataset.height - 0.5) and (-0.5 <= column[0] <= dataset.width - 0.5)
    if not inside:
        raise TerrainError(
            f"the centre point of the transect ({longitude[0]:.4f} E, {latitude[0]:.4f} N) lies outside the raster. "
            f"{raster.name} covers {extent(raster)}."
        )
    return float(longitude[0]), float(latitude[0])


def _cell_size(raster: RasterFile, local: str) -> float:
    """Longer side of a cell at the centre of a local system [m]."""
    x, y = map_positions(raster, 0.0, 0.0, local, raster.dataset.crs)
    row, column = cell_positions(raster, x, y)
    corners = map_coordinates(raster, row + np.array([0.0, 1.0, 0.0]), column + np.array([0.0, 0.0, 1.0]))
    east, north = map_positions(raster, *corners, raster.dataset.crs, local)
    return float(np.hypot(east[1:] - east[0], north[1:] - north[0]).max())


def _swath_line(
    raster: RasterFile, local: str, cell: float, bearing: float, along: NDArray[np.float64], swath: float
) -> Transect:
    """Mean and high ground across a swath, NaN where fewer than half of its lines have data."""
    spacing = float(along[1] - along[0])
    lines = min(2 * int(np.ceil(swath / 2.0 / cell)) + 1, MOST_LINES)
    offsets = np.linspace(-swath / 2.0, swath / 2.0, lines)[:, None] if lines > 1 else np.zeros((1, 1))
    finest = min(spacing, swath / (lines - 1)) if lines > 1 else spacing
    step = max(1, int(finest / 2.0 / cell))
    east = along * np.sin(bearing) + offsets * np.cos(bearing)
    north = along * np.cos(bearing) - offsets * np.sin(bearing)
    row, column = cell_positions(raster, *map_positions(raster, east, north, local, raster.dataset.crs))
    ground = sampled(raster, row, column, step)

    known = np.isfinite(ground)
    enough = 2 * known.sum(axis=0) >= lines
    mean, high = np.full(along.shape, np.nan), np.full(along.shape, np.nan)
    mean[enough] = np.nanmean(ground[:, enough], axis=0)
    high[enough] = _high(ground[:, enough])
    middle = lines // 2
    longitude, latitude = map_positions(raster, east[middle], north[middle], local, LONGITUDE_LATITUDE)
    missing = 1.0 - float(known[:, enough].mean()) if enough.any() else 0.0
    return Transect(
        distance=along,
        elevation=mean,
        bearing=float(bearing % (2.0 * np.pi)),
        high_elevation=high if lines > 1 else None,
        longitude=longitude,
        latitude=latitude,
        notes=_sampling_notes(cell, spacing, lines, swath, missing),
    )


def _high(ground: NDArray[np.float64]) -> NDArray[np.float64]:
    """90th percentile of each column without its NaNs; numpy's own takes a column at a time."""
    ordered = np.sort(ground, axis=0)  # NaN last
    place = 0.9 * (np.isfinite(ground).sum(axis=0) - 1)
    below, above = np.floor(place).astype(np.intp), np.ceil(place).astype(np.intp)
    columns = np.arange(ground.shape[1])
    low, high = ordered[below, columns], ordered[above, columns]
    return np.asarray(low + (place - below) * (high - low))


def _sampling_notes(cell: float, spacing: float, lines: int, swath: float, missing: float) -> tuple[str, ...]:
    """How the ground was sampled, in sentences."""
    across = f"mean of {lines} lines across {_length(swath)}" if lines > 1 else "one line without width"
    notes = [f"Elevation from a raster with cells of {_length(cell)}: {across}, a point every {_length(spacing)}."]
    if cell > 5.0e3:
        notes.append("The cells are so coarse that crests are averages, hundreds of metres below the summits.")
    if missing > 0.0:
        notes.append(f"{100.0 * missing:.1f} % of the swath has no data and was left out of its mean.")
    return tuple(notes)


def _length(metres: float) -> str:
    """A length in the unit people say it in."""
    return f"{metres / 1000.0:.3g} km" if metres >= 1000.0 else f"{metres:.3g} m"


SEA_ADVICE = (
    "If the missing cells are sea, fill them with 0: gdalwarp -dstnodata 0 in.tif out.tif, then "
    "gdal_edit.py -unsetnodata out.tif"
)


def _covered(raster: RasterFile, line: Transect) -> tuple[int, int]:
    """First and last point that the raster covers; notes when that is not the whole line."""
    known = np.flatnonzero(np.isfinite(line.elevation))
    x = line.distance
    if known.size < 3 or not x[known[0]] <= 0.0 <= x[known[-1]]:
        raise TerrainError(f"{raster.name} has no elevation round the centre point of the transect. {SEA_ADVICE}")
    first, last = int(known[0]), int(known[-1])
    if first > 0:
        remaining = float(x[np.nanargmax(line.elevation)] - x[first])
        if remaining < LEAST_UPWIND:
            raise TerrainError(
                f"{raster.name} ends {_length(remaining)} upwind of the crest, and at least "
                f"{_length(LEAST_UPWIND)} are needed to see the foot of the range. Use a raster that reaches further "
                f"upwind, another centre point (through) or another wind direction. {SEA_ADVICE}"
            )
        raster.notes[
            f"The raster ends {_length(-x[first])} upwind of the centre point: the transect starts there instead of "
            f"{_length(-x[0])} upwind."
        ] = None
    if last < x.size - 1:
        raster.notes[
            f"The raster ends {_length(x[last])} downwind of the centre point: the transect ends there instead of "
            f"{_length(x[-1])} downwind."
        ] = None
    return first, last


def _filled(raster: RasterFile, line: Transect, longest: float) -> Transect:
    """The line with holes up to `longest` [m] filled; refuses longer ones and flat ground."""
    first, last = np.flatnonzero(np.isfinite(line.elevation))[[0, -1]]
    kept = slice(int(first), int(last) + 1)
    x, ground = line.distance[kept], line.elevation[kept]
    known = np.isfinite(ground)
    high = None if line.high_elevation is None else line.high_elevation[kept]
    notes = line.notes
    if not known.all():
        notes = (*notes, _holes_note(raster, x, known, longest))
        ground = np.interp(x, x[known], ground[known])
        high = None if high is None else np.interp(x, x[known], high[known])
    relief = float(np.ptp(ground))
    if relief < MINIMUM_RELIEF:
        raise TerrainError(
            f"{raster.name} is flat along the transect: {relief:.0f} m between its lowest and highest point, at least "
            f"{MINIMUM_RELIEF:g} m are needed to lift air. Check the wind direction, the centre point and the unit."
        )
    return replace(
        line,
        distance=x,
        elevation=ground,
        high_elevation=high,
        longitude=None if line.longitude is None else line.longitude[kept],
        latitude=None if line.latitude is None else line.latitude[kept],
        notes=notes,
    )


def _holes_note(raster: RasterFile, x: NDArray[np.float64], known: NDArray[np.bool_], limit: float) -> str:
    """Sentence about holes that may be filled; refuses one that is too long."""
    spacing = float(x[1] - x[0])
    edges = np.flatnonzero(np.diff(known.astype(np.int8)))
    starts, ends = edges[::2], edges[1::2]  # last point before a hole, last point in it
    lengths = (ends - starts) * spacing
    longest = int(np.argmax(lengths))
    if lengths[longest] > limit * (1.0 + 1e-9):
        from_start = float(x[starts[longest] + 1] - x[0])
        raise TerrainError(
            f"{raster.name} has a hole of {_length(lengths[longest])} in the transect, {_length(from_start)} from its "
            f"upwind end; only {_length(limit)} are filled. Fill it first, for example: gdal_fillnodata.py in.tif "
            f"out.tif. {SEA_ADVICE}"
        )
    return (
        f"{lengths.size} short holes in the raster (longest {_length(lengths[longest])}) were filled by straight lines."
    )
