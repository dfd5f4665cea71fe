"""The sites of a crossing as GeoJSON points, with everything the results say of them."""

from __future__ import annotations

import json
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.sources.site_table import flat_failed, flat_sites

if TYPE_CHECKING:
    from orolift.sources.inputs import Inputs
    from orolift.sources.results import Results

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
        the warming and ends of ranges have names of their own. A site that could not be worked out has its reason.
    """
    found = {int(values["number"]): values for values in flat_sites(results)}
    found |= {site.number: flat_failed(site) for site in results.failed_sites}
    features = [
        {
            "type": "Feature",
            "geometry": {"type": "Point", "coordinates": _degrees(inputs, number, values)},
            "properties": {key: value for key, value in values.items() if key not in {"longitude", "latitude"}},
        }
        for number, values in sorted(found.items())
    ]
    return json.dumps({"type": "FeatureCollection", "features": features}, indent=1, ensure_ascii=False) + "\n"


def _degrees(inputs: Inputs, number: int, values: dict[str, Any]) -> list[float]:
    """Longitude and latitude of a site; of the lee foot, where the case names none."""
    line = inputs.transect
    if 0 < number <= len(inputs.places):
        place = inputs.places[number - 1]
        longitude, latitude = place.longitude, place.latitude
    else:
        distance = values["distance_km"] * 1000.0 - line.origin
        longitude, latitude = (
            float(np.interp(distance, line.distance, np.asarray(v))) for v in (line.longitude, line.latitude)
        )
    return [_wrapped(float(longitude or 0.0)), round(float(latitude or 0.0), DIGITS)]


def _wrapped(longitude: float) -> float:
    """Longitude from -180 to 180."""
    return round((longitude + 180.0) % 360.0 - 180.0, DIGITS)
