"""The case file as typed tables: which keys there are, their units and ranges.

Every table is strict: no unknown key, no text where a number belongs, no
``nan``. A key may carry any unit suffix of its kind (``temperature_f`` for
``temperature_c``); it is converted here, so that the rest sees one name.
"""

from __future__ import annotations

from datetime import datetime  # noqa: TC003 (pydantic reads the annotation at run time)
from typing import Annotated, Literal

from pydantic import Field, field_validator, model_validator

from orolift.sources.case_table import (
    Bearing,
    Elevation,
    Latitude,
    Longitude,
    Name,
    Share,
    Table,
    exactly_one,
    together,
)
from orolift.sources.fire_model import Fire
from orolift.sources.incoming_model import Incoming, Station
from orolift.sources.rain_model import Catchments, GaugesTable, Rain, keys_of_a_map
from orolift.sources.spread_model import SpreadTable

__all__ = [
    "Case",
    "Fire",
    "FlowTable",
    "HeatTable",
    "Incoming",
    "LeeTable",
    "Place",
    "Rain",
    "SiteTable",
    "SpreadTable",
    "Station",
    "Terrain",
    "TransectTable",
]


class Place(Table):
    """A point: longitude and latitude, or easting and northing in the raster's CRS."""

    longitude: Longitude | None = Field(default=None, description="degrees east")
    latitude: Latitude | None = Field(default=None, description="degrees north")
    easting_m: float | None = Field(default=None, description="in the raster's coordinate system")
    northing_m: float | None = Field(default=None, description="in the raster's coordinate system")

    @model_validator(mode="after")
    def _one_place(self) -> Place:
        together(self, ("longitude", "latitude"))
        together(self, ("easting_m", "northing_m"))
        exactly_one(self, ("longitude", "easting_m"), "place")
        return self


class Terrain(Table):
    """Where the ground comes from."""

    elevation_file: Name | None = Field(default=None, description="any raster GDAL reads")
    elevation_unit: Literal["m", "ft"] | None = Field(
        default=None, description="unit of the raster's heights; default: the unit the raster declares, else metres"
    )
    ridge_km_m: list[list[float]] | None = Field(default=None, description="ridge by hand: [km, m] each")
    ridge_file: Name | None = Field(default=None, description="ridge by hand as CSV: distance_km,elevation_m")
    pass_m: Elevation | None = Field(default=None, description="lowest pass of the range, if known")
    drawn_from_deg: Bearing | None = Field(
        default=None, description="bearing a hand-entered ridge is drawn from, default wind_from_deg"
    )
    longitude: Longitude | None = Field(default=None, description="of a hand-entered crest, degrees east")
    latitude: Latitude | None = Field(default=None, description="of a hand-entered crest, degrees north")

    @field_validator("ridge_km_m")
    @classmethod
    def _pairs(cls, points: list[list[float]] | None) -> list[list[float]] | None:
        for number, point in enumerate(points or [], start=1):
            if len(point) != 2:
                raise ValueError(
                    f"point {number} has {len(point)} numbers; each needs two, [distance in km, height in m]"
                )
        return points

    @model_validator(mode="after")
    def _one_terrain(self) -> Terrain:
        exactly_one(self, ("elevation_file", "ridge_km_m", "ridge_file"), "terrain")
        together(self, ("longitude", "latitude"))
        if self.elevation_file is None and self.elevation_unit is not None:
            raise ValueError("elevation_unit belongs to elevation_file; a ridge carries its units in its keys")
        if self.elevation_file is not None:
            for key in ("drawn_from_deg", "longitude"):
                if getattr(self, key) is not None:
                    raise ValueError(f"{key} belongs to a hand-entered ridge; with elevation_file leave it out")
        return self


class TransectTable(Table):
    """How the line is cut from the raster; only with elevation_file."""

    through: Place | None = Field(default=None, description="default: through the first site, else the highest cell")
    upwind_km: Annotated[float, Field(ge=20.0, le=1000.0)] = 120.0
    downwind_km: Annotated[float, Field(ge=10.0, le=1000.0)] = 80.0
    swath_km: Annotated[float, Field(ge=0.0, le=100.0)] = 10.0


class FlowTable(Table):
    """How the air meets the range."""

    going_round_share: Share | None = Field(
        default=None,
        description="share of the low lee air that went round; default: from the gaps of the range, else 0.4",
    )
    range_normal_deg: Bearing | None = Field(
        default=None, description="bearing across the range, either way; default: from the raster, else the line's"
    )


class LeeTable(Table):
    """What is known of the air that lies in the lee."""

    temperature_c: Annotated[float, Field(ge=-80.0, le=56.0)] | None = Field(
        default=None, description="at the lee foot, before the crossing air arrives"
    )
    pool_top_m: Elevation | None = Field(default=None, description="top of the cold air, above sea level")
    sounding_file: Name | None = Field(default=None, description="sounding of the lee, CSV as for [incoming]")
    mixing_depth_m: Annotated[float, Field(ge=10.0, le=1000.0)] = Field(
        default=100.0, description="depth over which the air of a site is mixed"
    )
    roughness_m: Annotated[float, Field(ge=0.0001, le=2.0)] = Field(
        default=0.03, description="roughness length for the wind at 10 m: 0.03 open country, 1 forest or town"
    )

    @model_validator(mode="after")
    def _one_lee(self) -> LeeTable:
        given = [key for key in ("temperature_c", "pool_top_m", "sounding_file") if getattr(self, key) is not None]
        if len(given) > 1:
            raise ValueError(f"{' and '.join(given)} say the same thing; keep one of them")
        return self


class HeatTable(Table):
    """Heat from the ground of the lee."""

    surface_heat: bool = Field(
        default=True,
        description="by sun and night, shaded by the crossing's raining cloud only, where valid_time and a position "
        "are known; false leaves it out",
    )


class SiteTable(Place):
    """A named place for which values are wanted."""

    name: Name
    distance_km: float | None = Field(default=None, description="along a hand-entered ridge, in its own numbers")
    elevation_m: Elevation | None = Field(default=None, description="default: the terrain's")

    @model_validator(mode="after")
    def _one_place(self) -> SiteTable:
        together(self, ("longitude", "latitude"))
        together(self, ("easting_m", "northing_m"))
        exactly_one(self, ("longitude", "easting_m", "distance_km"), f"place of site '{self.name}'")
        return self


class Case(Table):
    """One situation to work out."""

    title: Name | None = None
    valid_time: datetime | None = Field(default=None, description="with its zone, for example 2026-11-03T12:00:00Z")
    terrain: Terrain
    transect: TransectTable | None = None
    incoming: Incoming
    flow: FlowTable = FlowTable()
    rain: Rain = Rain()
    lee: LeeTable = LeeTable()
    heat: HeatTable = HeatTable()
    spread: SpreadTable = SpreadTable()
    catchments: Catchments | None = None
    gauges: GaugesTable | None = None
    fire: Fire | None = None
    sites_file: Name | None = Field(default=None, description="more sites: CSV, or GeoJSON points with a raster")
    site: list[SiteTable] = Field(default_factory=list)

    @field_validator("valid_time")
    @classmethod
    def _zone(cls, time: datetime | None) -> datetime | None:
        if time is not None and time.tzinfo is None:
            raise ValueError(f"{time.isoformat()} has no time zone; write {time.isoformat()}Z for UTC")
        return time

    @model_validator(mode="after")
    def _fits_terrain(self) -> Case:
        by_hand = self.terrain.elevation_file is None
        if by_hand and self.transect is not None:
            raise ValueError(
                "[transect] cuts a line from a raster; a hand-entered ridge is the line, leave the table out"
            )
        names = [site.name for site in self.site]
        twice = next((name for name in names if names.count(name) > 1), None)
        if twice is not None:
            raise ValueError(f"two sites are called '{twice}'; give each its own name")
        for site in self.site:
            if by_hand and site.distance_km is None:
                raise ValueError(f"site '{site.name}' needs distance_km: a hand-entered ridge has no map")
            if not by_hand and site.distance_km is not None:
                raise ValueError(f"site '{site.name}' has distance_km; on a raster give longitude and latitude")
        return self

    @model_validator(mode="after")
    def _fits_map(self) -> Case:
        needing = keys_of_a_map(self.rain, self.catchments, self.gauges)
        if needing and self.terrain.elevation_file is None:
            raise ValueError(f"{needing[0]} needs rain over a map, and a hand-entered ridge has none: leave it out")
        if needing and not self.rain.map:
            raise ValueError(f"{needing[0]} needs rain over a map, and [rain] map = false leaves that out; drop one")
        return self
