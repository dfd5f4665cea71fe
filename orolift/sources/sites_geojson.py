"""The sites of a crossing as GeoJSON points, with everything the results say of them."""

from __future__ import annotations

import json
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.sources.raster_places import MapPoint, site_positions

if TYPE_CHECKING:
    from orolift.sources.inputs import Inputs
    from orolift.sources.results import LeeBlock, Results

NOT_A_VALUE = {"profile", "range", "warming_parts_c", "source_level_range_m"}
"""Parts of a block that are no single number; those with names are flattened."""
DIGITS = 7
"""Decimals of degrees: a centimetre."""


def sites_geojson(inputs: Inputs, results: Results) -> str:
    """Every site as a point.

    Parameters
    ----------
    inputs : Inputs
        Of a case with a raster.
    results : Results

    Returns
    -------
    str
        GeoJSON in longitude and latitude (RFC 7946). Properties are the keys of `lee` in the results file; parts of
        the warming and ends of ranges have names of their own.
    """
    places = zip(*_degrees(inputs, results), results.lee, strict=True)
    features = [
        {
            "type": "Feature",
            "geometry": {"type": "Point", "coordinates": [_wrapped(longitude), round(float(latitude), DIGITS)]},
            "properties": _properties(site),
        }
        for longitude, latitude, site in places
    ]
    return json.dumps({"type": "FeatureCollection", "features": features}, indent=1, ensure_ascii=False) + "\n"


def _degrees(inputs: Inputs, results: Results) -> tuple[Any, Any]:
    """Longitude and latitude of the sites; of the lee foot, where the case names none."""
    case, line = inputs.case, inputs.transect
    if case.site:
        points = [
            MapPoint(float(site.longitude), float(site.latitude or 0.0))
            if site.longitude is not None
            else MapPoint(float(site.easting_m or 0.0), float(site.northing_m or 0.0), projected=True)
            for site in case.site
        ]
        found = site_positions(
            str(case.terrain.elevation_file),
            line,
            points,
            unit=case.terrain.elevation_unit,
            folder=inputs.path.parent,
            where="[terrain] elevation_file",
        )
        return found.longitude, found.latitude
    distance = np.array([site.distance_km for site in results.lee]) * 1000.0 - line.origin
    return tuple(np.interp(distance, line.distance, np.asarray(v)) for v in (line.longitude, line.latitude))


def _wrapped(longitude: float) -> float:
    """Longitude from -180 to 180."""
    return round((float(longitude) + 180.0) % 360.0 - 180.0, DIGITS)


def _properties(site: LeeBlock) -> dict[str, Any]:
    values = site.model_dump()
    flat = {key: value for key, value in values.items() if key not in NOT_A_VALUE}
    for part, value in (values["warming_parts_c"] or {}).items():
        flat[f"warming_by_{part}_c"] = value
    spans = dict(values["range"])
    if values["source_level_range_m"] is not None:
        spans["source_level_m"] = values["source_level_range_m"]
    for key, (low, high) in spans.items():
        flat[f"{key}_low"], flat[f"{key}_high"] = low, high
    return flat
