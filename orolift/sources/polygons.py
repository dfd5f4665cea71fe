"""Catchments and divides from GeoJSON, in the coordinates of a map."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.errors import DataFileError
from orolift.sources.geojson import AREAS, features_of, geojson_document, shape_of, source_crs

if TYPE_CHECKING:
    from pathlib import Path

    from numpy.typing import NDArray

    Array = NDArray[np.float64]

LONGEST_EDGE = 0.02  # degrees, 2 km: an edge straight in degrees bends by less than 1 m in metres
_LINES = {"LineString", "MultiLineString"}
_KNOWN_NAMES = 8  # properties listed in a message


@dataclass(frozen=True)
class NamedPolygon:
    """A catchment as read.

    Attributes
    ----------
    name : str
        Unique in its file.
    polygon : shapely Polygon or MultiPolygon
        Valid, in the coordinates of the map.
    feature : int
        Number in the file, first 1.
    notes : tuple of str
    """

    name: str
    polygon: Any
    feature: int
    notes: tuple[str, ...]


def read_polygons(
    path: str | Path,
    crs: Any,
    *,
    name_field: str | None = None,
    where: str = "catchments file",
    folder: Path | None = None,
) -> tuple[tuple[NamedPolygon, ...], tuple[str, ...]]:
    """Polygons of a GeoJSON file.

    Parameters
    ----------
    path : str or Path
        GeoJSON; in longitude and latitude (RFC 7946), or in the system its ``crs`` member names.
    crs : rasterio CRS
        Of the map.
    name_field : str, optional
        Property that holds the names; by default they are numbered.
    where, folder
        As in `orolift.sources.files.existing_file`.

    Returns
    -------
    polygons : tuple of NamedPolygon
        At least one. Holes are kept, heights dropped.
    notes : tuple of str

    Raises
    ------
    DataFileError
        If it is no GeoJSON, holds no polygon, a name is missing, or coordinates do not fit; it names file and feature.
    MissingFileError
        If it cannot be read.

    Notes
    -----
    An invalid polygon (crossing itself) is repaired by shapely's make_valid, with a note. Features
    that are no areas are left out, with a note.
    """
    document, name = geojson_document(path, where, folder)
    source = source_crs(document, name)
    found: list[NamedPolygon] = []
    skipped: list[int] = []
    used: dict[str, int] = {}
    for number, feature in enumerate(features_of(document, name), start=1):
        place = f"{name}: feature {number}"
        shape = shape_of(feature, place)
        if shape is None or shape.geom_type not in AREAS:
            skipped.append(number)
            continue
        label = _label(feature, name_field, number, place)
        used[label] = used.get(label, 0) + 1
        if used[label] > 1:
            label = f"{label} ({used[label]})"
        sound, notes = _repaired(shape, label, place)
        polygon, after = _repaired(_projected(sound, source, crs, place), label, place)
        found.append(NamedPolygon(label, polygon, number, notes or after))
    if not found:
        raise DataFileError(f"{name} holds no polygon. Catchments are areas: features of type Polygon or MultiPolygon.")
    notes = (f"{name}: features without area left out: {', '.join(map(str, skipped))}.",) if skipped else ()
    return tuple(found), notes


def read_lines(
    path: str | Path, crs: Any, *, where: str = "divide_file", folder: Path | None = None
) -> tuple[Array, ...]:
    """Lines of a GeoJSON file.

    Parameters
    ----------
    path, crs, where, folder
        As in `read_polygons`.

    Returns
    -------
    tuple of ndarray, shape (n, 2) [m]
        Vertices of every line and part of one, in the coordinates of the map.

    Raises
    ------
    DataFileError
        If it is no GeoJSON or holds no line; it names file and feature.
    MissingFileError
        If it cannot be read.
    """
    import shapely

    document, name = geojson_document(path, where, folder)
    source = source_crs(document, name)
    lines = []
    for number, feature in enumerate(features_of(document, name), start=1):
        place = f"{name}: feature {number}"
        shape = shape_of(feature, place)
        if shape is not None and shape.geom_type in _LINES:
            parts = shapely.get_parts(_projected(shape, source, crs, place))
            lines += [shapely.get_coordinates(part) for part in parts]
    if not lines:
        raise DataFileError(f"{name} holds no line. A divide is a feature of type LineString or MultiLineString.")
    return tuple(lines)


def _projected(shape: Any, source: Any, crs: Any, place: str) -> Any:
    """A geometry in the coordinates of the map."""
    import shapely
    from rasterio.warp import transform

    xy = shapely.get_coordinates(shape)
    if source.is_geographic:
        if np.abs(xy[:, 0]).max() > 360.0 or np.abs(xy[:, 1]).max() > 90.0:
            raise DataFileError(
                f"{place}: coordinates up to {np.abs(xy).max():.0f} are no degrees. If they are metres, the file must "
                "name their system in a crs member; else export it in longitude and latitude."
            )
        shape = shapely.segmentize(shape, LONGEST_EDGE)
    try:
        moved = shapely.transform(shape, lambda c: np.column_stack(transform(source, crs, c[:, 0], c[:, 1])))
    except Exception as error:
        raise DataFileError(
            f"{place}: cannot be brought into the coordinates of the map ({str(error)[:100]})."
        ) from error
    if not np.isfinite(shapely.get_coordinates(moved)).all():
        raise DataFileError(f"{place}: lies so far off that it has no place in the coordinates of the map.")
    return moved


def _label(feature: dict[str, Any], name_field: str | None, number: int, place: str) -> str:
    """Name of a feature."""
    if name_field is None:
        return f"Catchment {number}"
    properties = feature.get("properties")
    properties = properties if isinstance(properties, dict) else {}
    value = properties.get(name_field)
    if value is None or not str(value).strip():
        known = ", ".join(list(map(str, properties))[:_KNOWN_NAMES]) or "none"
        raise DataFileError(f"{place}: has no name in '{name_field}'. Its properties: {known}.")
    return str(value).strip()[:200]


def _repaired(polygon: Any, label: str, place: str) -> tuple[Any, tuple[str, ...]]:
    """A valid polygon, with a note if it was not."""
    import shapely

    if polygon.is_valid and polygon.area > 0.0:
        return polygon, ()
    reason = shapely.is_valid_reason(polygon)
    try:
        parts = shapely.get_parts(shapely.make_valid(polygon))
    except shapely.errors.GEOSException:  # all its points are one
        parts = []
    areas = [part for part in parts if part.geom_type in AREAS]
    mended = shapely.union_all(areas) if areas else shapely.Polygon()
    if mended.is_empty or mended.area <= 0.0:
        raise DataFileError(f"{place}: '{label}' has no area.")
    return mended, (f"'{label}' was not a valid polygon ({reason}) and was repaired.",)
