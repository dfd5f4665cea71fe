"""GeoJSON files: their features, geometries and coordinate system."""

from __future__ import annotations

import json
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.errors import DataFileError
from orolift.sources.files import read_text

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

MOST_VERTICES = 2_000_000  # of a file: more need gigabytes and minutes
AREAS = {"Polygon", "MultiPolygon"}
LONGITUDE_LATITUDE = "OGC:CRS84"


def geojson_document(
    path: str | Path, where: str, folder: Path | None, what: str = "the areas or lines"
) -> tuple[dict[str, Any], str]:
    """The GeoJSON object of a file, and the start of every message about it; `what` it should hold, in words."""
    name = f"{where}: {path}"
    text = read_text(path, where, folder)

    def refuse(literal: str) -> None:
        line = text[: text.find(literal)].count("\n") + 1
        raise DataFileError(
            f"{name}: line {line}: {literal} is no number of JSON (RFC 8259). Export {what} without empty coordinates."
        )

    try:
        document = json.loads(text, parse_constant=refuse)
    except json.JSONDecodeError as error:
        raise DataFileError(
            f"{name}: line {error.lineno}: not JSON ({error.msg}). Export {what} as GeoJSON."
        ) from error
    except RecursionError as error:
        raise DataFileError(f"{name} is nested too deeply to be GeoJSON.") from error
    if not isinstance(document, dict) or not isinstance(document.get("type"), str):
        raise DataFileError(f"{name} is JSON, but no GeoJSON: it has no type. Export {what} as GeoJSON.")
    return document, name


def features_of(document: dict[str, Any], name: str) -> Iterator[dict[str, Any]]:
    """Features of a document; a bare geometry counts as one."""
    kind = document["type"]
    if kind == "FeatureCollection":
        features = document.get("features")
        if not isinstance(features, list) or not all(isinstance(feature, dict) for feature in features):
            raise DataFileError(f"{name}: its features are no list of objects; it is damaged.")
        yield from features
    elif kind == "Feature":
        yield document
    else:
        yield {"type": "Feature", "properties": {}, "geometry": document}


def shape_of(feature: dict[str, Any], place: str) -> Any:
    """Geometry of a feature; None where it has none."""
    import shapely

    geometry = feature.get("geometry")
    if geometry is None:
        return None
    try:
        shape = shapely.force_2d(shapely.from_geojson(json.dumps(geometry)))
    except (shapely.errors.GEOSException, ValueError, TypeError, RecursionError) as error:
        raise DataFileError(f"{place}: its geometry is damaged ({str(error)[:100]}).") from error
    coordinates = shapely.get_coordinates(shape)
    if coordinates.shape[0] > MOST_VERTICES:
        raise DataFileError(
            f"{place}: has {coordinates.shape[0]} vertices, at most {MOST_VERTICES}. Simplify it first."
        )
    if not np.isfinite(coordinates).all():
        raise DataFileError(f"{place}: a coordinate is not a finite number.")
    if shape.geom_type == "GeometryCollection":
        areas = [part for part in shapely.get_parts(shape) if part.geom_type in AREAS]
        return shapely.union_all(areas) if areas else None
    return None if shape.is_empty else shape


def source_crs(document: dict[str, Any], name: str) -> Any:
    """Coordinate system of a document: the one its ``crs`` member names, else longitude and latitude."""
    from rasterio.crs import CRS
    from rasterio.env import Env
    from rasterio.errors import CRSError

    member = document.get("crs")
    if member is None:
        return CRS.from_string(LONGITUDE_LATITUDE)
    try:
        with Env():  # else the library writes a line of its own to stderr
            return CRS.from_user_input(str(member["properties"]["name"]))
    except (CRSError, KeyError, TypeError) as error:
        raise DataFileError(
            f"{name}: its coordinate system {json.dumps(member)[:80]} is not known. Export it in longitude and "
            "latitude."
        ) from error
