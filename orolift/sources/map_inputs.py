"""What rain over a map takes beside the crossing: raster, catchments, divide and gauges, all on one grid of metres."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import CaseError, OroliftError, TerrainError
from orolift.rain.line import MapLine
from orolift.rain.over_map import Catchment
from orolift.sources.case_model import TransectTable
from orolift.sources.units import to_si

if TYPE_CHECKING:
    from pathlib import Path

    from numpy.typing import NDArray

    from orolift.rain.gauges import Gauges
    from orolift.rain.over_map import MapRain
    from orolift.sources.case_model import Case
    from orolift.sources.elevation_map import ElevationMap
    from orolift.sources.inputs import Inputs
    from orolift.sources.site_places import SitePlace
    from orolift.spread.rain_members import RainMembers
    from orolift.terrain.transect import Transect

    Array = NDArray[np.float64]

MOST_CELLS = 512
"""Cells of the map along its longer side: rain drifts for kilometres, and finer cells cost more than they change."""
BESIDE = 30.0e3
"""The map reaches so far beyond the ends of the line [m], for the ridges there."""
LEAST_REACH = 80.0e3
"""It reaches at least so far from the middle of the line [m], for catchments beside it."""
_LONGITUDE_LATITUDE = "OGC:CRS84"


@dataclass(frozen=True, eq=False)
class MapInputs:
    """Everything rain over a map takes beside the crossing.

    Attributes
    ----------
    placed : ElevationMap
    line : MapLine
        The transect on it.
    sites : tuple of (float, float) [m]
        Places of the sites of the case on it; empty without any.
    catchments : tuple of Catchment
    divide : tuple of ndarray, or None
        Lines between windward and lee.
    gauges : Gauges or None
    fit : bool
        Whether times and background are to be fitted to the gauges.
    duration : float [s]
    notes : tuple of str
        How the files were read.
    """

    placed: ElevationMap
    line: MapLine
    sites: tuple[tuple[float, float], ...]
    catchments: tuple[Catchment, ...]
    divide: tuple[Array, ...] | None
    gauges: Gauges | None
    fit: bool
    duration: float
    notes: tuple[str, ...]


@dataclass(frozen=True, eq=False)
class Mapped:
    """Rain over the map, with what it was made from.

    Attributes
    ----------
    inputs : MapInputs
    rain : MapRain
    members : RainMembers or None
        The same in members; None without.
    """

    inputs: MapInputs
    rain: MapRain
    members: RainMembers | None = None


def read_map_inputs(inputs: Inputs, most_cells: int = MOST_CELLS) -> MapInputs:
    """Raster, catchments, divide and gauges of a case.

    Parameters
    ----------
    inputs : Inputs
        Of a case with a raster.
    most_cells : int
        Of the map along its longer side.

    Returns
    -------
    MapInputs

    Raises
    ------
    OroliftError
        One message that names the case file and the key, file or feature at fault.
    """
    try:
        return _read(inputs.case, inputs.transect, inputs.places, inputs.path.parent, most_cells)
    except OroliftError as error:
        if isinstance(error, TerrainError):
            raise TerrainError(f"{inputs.path}: {error}") from error
        raise CaseError(f"{inputs.path}: {error}") from error


def _read(case: Case, transect: Transect, places: tuple[SitePlace, ...], folder: Path, most_cells: int) -> MapInputs:
    from orolift.sources.elevation_map import read_elevation_map

    if transect.longitude is None or transect.latitude is None:
        raise CaseError("rain over a map needs elevation_file; a hand-entered ridge has no map")
    middle = transect.distance.size // 2
    placed = read_elevation_map(
        str(case.terrain.elevation_file),
        around=(float(transect.longitude[middle]), float(transect.latitude[middle])),
        reach=max(0.5 * float(transect.distance[-1]) + BESIDE, LEAST_REACH),
        unit=case.terrain.elevation_unit,
        folder=folder,
        where="[terrain] elevation_file",
        most_cells=most_cells,
    )
    catchments, notes = _catchments(case, placed, folder)
    width = (case.transect or TransectTable()).swath_km * 1000.0
    return MapInputs(
        placed=placed,
        line=_line(transect.longitude, transect.latitude, placed, width),
        sites=_sites(places, placed),
        catchments=catchments,
        divide=_divide(case, placed, folder),
        gauges=_gauges(case, placed, folder),
        fit=case.gauges is not None and case.gauges.fit,
        duration=to_si(case.rain.duration_h, "h"),
        notes=(*placed.notes, *notes),
    )


def _line(longitude: Array, latitude: Array, placed: ElevationMap, width: float) -> MapLine:
    from rasterio.warp import transform

    x, y = transform(_LONGITUDE_LATITUDE, placed.crs, longitude, latitude)
    return MapLine(np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64), width)


def _sites(places: tuple[SitePlace, ...], placed: ElevationMap) -> tuple[tuple[float, float], ...]:
    if not places:
        return ()
    from rasterio.warp import transform

    x, y = transform(
        _LONGITUDE_LATITUDE,
        placed.crs,
        [place.longitude for place in places],
        [place.latitude for place in places],
    )
    return tuple((float(a), float(b)) for a, b in zip(x, y, strict=True))


def _catchments(case: Case, placed: ElevationMap, folder: Path) -> tuple[tuple[Catchment, ...], tuple[str, ...]]:
    if case.catchments is None:
        return (), ()
    from orolift.sources.polygons import read_polygons

    found, notes = read_polygons(
        case.catchments.file,
        placed.crs,
        name_field=case.catchments.name_field,
        where="[catchments] file",
        folder=folder,
    )
    return tuple(Catchment(one.name, one.polygon, one.notes) for one in found), notes


def _divide(case: Case, placed: ElevationMap, folder: Path) -> tuple[Array, ...] | None:
    if case.rain.divide_file is None:
        return None
    from orolift.sources.polygons import read_lines

    return read_lines(case.rain.divide_file, placed.crs, where="[rain] divide_file", folder=folder)


def _gauges(case: Case, placed: ElevationMap, folder: Path) -> Gauges | None:
    if case.gauges is None:
        return None
    from orolift.sources.gauges_csv import read_gauges

    return read_gauges(case.gauges.file, placed.crs, source_crs=placed.source_crs, where="[gauges] file", folder=folder)
