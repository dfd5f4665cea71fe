"""Many sites from one file, CSV or GeoJSON points, beside those of the case."""

from __future__ import annotations

import math
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from pydantic import ValidationError

from orolift.errors import CaseError, DataFileError
from orolift.sources.case_model import SiteTable
from orolift.sources.files import read_text
from orolift.sources.geojson import LONGITUDE_LATITUDE, features_of, geojson_document, source_crs
from orolift.sources.table import Column, number_table
from orolift.sources.units import to_si

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator

    from orolift.sources.case_model import Case

MOST_SITES = 10_000
"""Sites of a case at most: each is a row of the report."""
WHERE = "sites_file"
_GEOJSON = {".geojson", ".json"}
_COLUMNS = (
    Column("name", text=True),
    Column("longitude", -180.0, 360.0),
    Column("latitude", -89.9, 89.9),
    Column("easting_m", -1e8, 1e8),
    Column("northing_m", -1e8, 1e8),
    Column("distance_km", -1e4, 1e4),
    Column("elevation_m", -430.0, 9000.0),
)
_PLACES = (("longitude", "latitude"), ("easting", "northing"), ("distance",))
_KEYS = {"longitude": "longitude", "latitude": "latitude", "easting": "easting_m", "northing": "northing_m"}
_ELEVATION = {"elevation_m": "m", "elevation_ft": "ft"}


@dataclass(frozen=True)
class _Listed:
    """A site, and where it stands."""

    site: SiteTable
    place: str


def all_sites(case: Case, folder: Path | None) -> tuple[SiteTable, ...]:
    """Sites of a case: those in it, then those of its file.

    Parameters
    ----------
    case : Case
    folder : Path or None
        That a relative `sites_file` starts from.

    Returns
    -------
    tuple of SiteTable
        No two of one name; each with the kind of place the terrain needs.

    Raises
    ------
    MissingFileError
        If the file cannot be read.
    DataFileError
        If a row or feature is at fault; it names file and line or feature.
    CaseError
        If there are more than 10 000 sites or two of one name.
    """
    listed = [_Listed(site, f"[[site]] number {number}") for number, site in enumerate(case.site, start=1)]
    if case.sites_file is not None:
        by_hand = case.terrain.elevation_file is None
        of_file = Path(case.sites_file).suffix.lower() in _GEOJSON
        read = _from_geojson if of_file else _from_csv
        listed += read(case.sites_file, folder, by_hand=by_hand)
    _refuse_doubles(listed)
    return tuple(one.site for one in listed)


def _refuse_doubles(listed: list[_Listed]) -> None:
    if len(listed) > MOST_SITES:
        raise CaseError(f"{len(listed)} sites are given, at most {MOST_SITES} can be. Divide them over several cases.")
    seen: dict[str, str] = {}
    for one in listed:
        name = one.site.name
        if name in seen:
            raise CaseError(f"two sites are called '{name}': {seen[name]} and {one.place}. Give each its own name")
        seen[name] = one.place


def _from_csv(path: str, folder: Path | None, *, by_hand: bool) -> list[_Listed]:
    table = number_table(read_text(path, WHERE, folder), f"{WHERE}: {path}", _COLUMNS)
    pair = _place_columns(table.name, table.columns, by_hand=by_hand)
    names = table.texts.get("name")
    if names is None:
        raise DataFileError(f"{table.name}: has no column name. A site needs its name.")
    elevation = table.columns.get("elevation", np.full(table.line.size, np.nan))
    out = []
    for i, (name, line) in enumerate(zip(names, table.line, strict=True)):
        place = f"{table.name}: line {line}"
        values = {stem: float(table.columns[stem][i]) for stem in pair}
        missing = next((stem for stem, value in values.items() if math.isnan(value)), None)
        if missing is not None:
            raise DataFileError(f"{place}: {missing} is missing. Fill it in or take the row out.")
        if "distance" in values:
            keys = {"distance_km": values["distance"] / 1000.0}
        else:
            keys = {_KEYS[stem]: value for stem, value in values.items()}
        height = None if math.isnan(elevation[i]) else float(elevation[i])
        out.append(_Listed(_site(name, height, keys, place), place))
    return out


def _place_columns(name: str, columns: Iterable[str], *, by_hand: bool) -> tuple[str, ...]:
    """Names of the columns that hold the place."""
    found = [pair for pair in _PLACES if any(stem in columns for stem in pair)]
    if by_hand:
        if found != [("distance",)]:
            raise DataFileError(
                f"{name}: a hand-entered ridge has no map; its sites need the column distance_km and no other place."
            )
    elif len(found) != 1 or found[0] == ("distance",) or not all(stem in columns for stem in found[0]):
        raise DataFileError(
            f"{name}: on a raster a site needs its place: the columns longitude and latitude, or easting_m and "
            "northing_m."
        )
    return found[0]


def _from_geojson(path: str, folder: Path | None, *, by_hand: bool) -> list[_Listed]:
    if by_hand:
        raise CaseError(
            f"{WHERE} {path}: points of a map have no place on a hand-entered ridge. Give a CSV with name and "
            "distance_km."
        )
    document, name = geojson_document(path, WHERE, folder, "the sites")
    features = list(features_of(document, name))
    if not features:
        raise DataFileError(f"{name} holds no feature. Sites are features of type Point with a property name.")
    points = [_point(feature, f"{name}: feature {number}") for number, feature in enumerate(features, start=1)]
    x, y = _degrees(document, name, np.array(points, dtype=np.float64))
    out = []
    for number, (feature, longitude, latitude) in enumerate(zip(features, x, y, strict=True), start=1):
        place = f"{name}: feature {number}"
        properties = feature.get("properties")
        properties = properties if isinstance(properties, dict) else {}
        label = properties.get("name")
        if label is None or not str(label).strip():
            known = ", ".join(list(map(str, properties))[:8]) or "none"
            raise DataFileError(f"{place}: has no property name. Its properties: {known}.")
        keys = {"longitude": float(longitude), "latitude": float(latitude)}
        out.append(_Listed(_site(str(label), _elevation(properties, place), keys, place), place))
    return out


def _point(feature: dict[str, Any], place: str) -> tuple[float, float]:
    """Coordinates of a point feature."""
    geometry = feature.get("geometry")
    kind = geometry.get("type") if isinstance(geometry, dict) else None
    if not isinstance(geometry, dict) or kind != "Point":
        raise DataFileError(f"{place}: its geometry is {kind or 'missing'}, and a site is a Point.")
    at = geometry.get("coordinates")
    first = at[:2] if isinstance(at, list) else []
    numbers = [v for v in first if isinstance(v, int | float) and not isinstance(v, bool)]
    if len(numbers) != 2 or not all(math.isfinite(v) for v in numbers):
        raise DataFileError(f"{place}: its coordinates are no two numbers.")
    return float(numbers[0]), float(numbers[1])


def _degrees(document: dict[str, Any], name: str, points: np.ndarray[Any, Any]) -> Iterator[Any]:
    """Longitudes and latitudes of points in the coordinate system of a document."""
    crs = source_crs(document, name)
    x, y = points[:, 0], points[:, 1]
    if crs.is_geographic:
        wrong = (np.abs(x) > 360.0) | (np.abs(y) > 90.0)
        if wrong.any():
            number = int(np.argmax(wrong))
            raise DataFileError(
                f"{name}: feature {number + 1}: coordinates {x[number]:g}, {y[number]:g} are no degrees. If they are "
                "metres, the file must name their system in a crs member; else export it in longitude and latitude."
            )
    from rasterio.warp import transform

    moved = np.array(transform(crs, LONGITUDE_LATITUDE, x, y), dtype=np.float64)
    off = ~np.isfinite(moved).all(axis=0)
    if off.any():
        raise DataFileError(
            f"{name}: feature {int(np.argmax(off)) + 1}: has no place on Earth in the coordinate system of the file."
        )
    return iter(moved)


def _elevation(properties: dict[str, Any], place: str) -> float | None:
    """Elevation a point carries as a property."""
    given = {key: properties[key] for key in _ELEVATION if properties.get(key) is not None}
    if not given:
        return None
    if len(given) > 1:
        raise DataFileError(f"{place}: elevation_m and elevation_ft say the same thing; keep one of them.")
    key, value = next(iter(given.items()))
    if isinstance(value, bool) or not isinstance(value, int | float) or not math.isfinite(value):
        raise DataFileError(f"{place}: {key} is {value!r}, and a number is needed.")
    return float(to_si(float(value), _ELEVATION[key]))


def _site(name: str, elevation: float | None, keys: dict[str, float], place: str) -> SiteTable:
    """A site as the case would give it."""
    try:
        return SiteTable(name=name.strip(), elevation_m=elevation, **keys)
    except ValidationError as error:
        fault = error.errors(include_url=False)[0]
        key = str(fault["loc"][-1]) if fault["loc"] else "site"
        if fault["type"] == "string_too_short":
            raise DataFileError(f"{place}: {key} is missing. Fill it in or take the row out.") from error
        raise DataFileError(f"{place}: {key}: {fault['msg']}, and {fault['input']!r} is given.") from error
