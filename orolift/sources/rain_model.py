"""The tables of the case file about rain: how it forms, over which catchments, against which gauges."""

from __future__ import annotations

from typing import Annotated

from pydantic import Field

from orolift.sources.case_table import Elevation, Name, Share, Table


class Rain(Table):
    """How the condensed water leaves, for how long, and what is known of the ground it falls on."""

    cloud_time_s: Annotated[float, Field(ge=50.0, le=20000.0)] = Field(
        default=1000.0, description="in which cloud turns to falling water"
    )
    fall_time_s: Annotated[float, Field(ge=50.0, le=20000.0)] = Field(
        default=1000.0, description="in which falling water lands"
    )
    removed_share: Share | None = Field(
        default=None,
        description="share of the condensed water that leaves at once, instead of the two times",
    )
    background_mm_per_h: Annotated[float, Field(ge=0.0, le=50.0)] = Field(
        default=0.0, description="rain that falls anyway, added everywhere"
    )
    freezing: bool = Field(default=True, description="condensate freezes between 0 and -20 degC; false keeps it liquid")
    map: bool = Field(default=True, description="rain over the map, with elevation_file; false leaves it out")
    duration_h: Annotated[float, Field(ge=0.1, le=1440.0)] = Field(
        default=1.0, description="how long the situation lasts, for totals"
    )
    divide_file: Name | None = Field(
        default=None, description="GeoJSON line between windward and lee; default: the crest of each strip of the map"
    )
    snow_cover_above_m: Elevation | None = Field(
        default=None, description="lowest ground with snow on it; default: nothing is known of snow on the ground"
    )


class Catchments(Table):
    """Areas whose rain is wanted; only with elevation_file."""

    file: Name = Field(description="GeoJSON of polygons")
    name_field: Name | None = Field(default=None, description="property that names them; default: they are numbered")


class GaugesTable(Table):
    """Places where rain was measured; only with elevation_file."""

    file: Name = Field(description="CSV: longitude,latitude,total_mm over duration_h")
    fit: bool = Field(default=False, description="cloud time, fall time and background rain fitted to the gauges")


def keys_of_a_map(rain: Rain, catchments: Catchments | None, gauges: GaugesTable | None) -> tuple[str, ...]:
    """Keys of a case that need rain over a map.

    Parameters
    ----------
    rain : Rain
    catchments : Catchments or None
    gauges : GaugesTable or None

    Returns
    -------
    tuple of str
        As a person would look for them.
    """
    given = (
        ("[rain] divide_file", rain.divide_file),
        ("[catchments]", catchments),
        ("[gauges]", gauges),
    )
    return tuple(key for key, value in given if value is not None)
