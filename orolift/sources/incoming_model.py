"""The table [incoming] of the case file: stations, reports, soundings and model columns before the range."""

from __future__ import annotations

from datetime import datetime  # noqa: TC003 (pydantic reads the annotation at run time)
from typing import Annotated, Literal

from pydantic import Field, field_validator, model_validator

from orolift.sources.case_table import Bearing, Elevation, Latitude, Longitude, Name, Table, exactly_one, together

Temperature = Annotated[float, Field(ge=-80.0, le=56.0)]
DewPoint = Annotated[float, Field(ge=-100.0, le=45.0)]
Humidity = Annotated[float, Field(gt=0.0, le=100.0)]
Pressure = Annotated[float, Field(ge=300.0, le=1090.0)]
Qnh = Annotated[float, Field(ge=860.0, le=1090.0)]
Speed = Annotated[float, Field(ge=0.0, le=250.0)]
ReportText = Annotated[str, Field(min_length=1, max_length=1000)]

SOURCES = ("station", "stations", "sounding_file", "metar", "model_file")
"""Keys that say where the incoming air comes from; exactly one is given."""


class Observed(Table):
    """Where and when air was observed; every key may be left out."""

    longitude: Longitude | None = Field(default=None, description="of the observation, degrees east")
    latitude: Latitude | None = Field(default=None, description="of the observation, degrees north")
    distance_km: float | None = Field(default=None, description="along a hand-entered ridge, in its own numbers")
    observed_time: datetime | None = Field(default=None, description="with its zone; compared with valid_time")

    @field_validator("observed_time")
    @classmethod
    def _zone(cls, time: datetime | None) -> datetime | None:
        if time is not None and time.tzinfo is None:
            raise ValueError(f"{time.isoformat()} has no time zone; write {time.isoformat()}Z for UTC")
        return time

    @model_validator(mode="after")
    def _pair(self) -> Observed:
        together(self, ("longitude", "latitude"))
        return self


class Station(Observed):
    """A station report upwind of the range."""

    name: Name | None = Field(default=None, description="for messages")
    elevation_m: Elevation
    temperature_c: Temperature
    dew_point_c: DewPoint | None = None
    relative_humidity_percent: Humidity | None = Field(
        default=None, description="over liquid water; may stand for dew_point_c"
    )
    pressure_hpa: Pressure | None = Field(default=None, description="at the station's height, not reduced to sea level")
    qnh_hpa: Qnh | None = Field(default=None, description="altimeter setting; may stand for pressure_hpa")
    wind_kt: Speed = Field(description="speed, never negative")
    wind_from_deg: Bearing | None = Field(default=None, description="default: wind_from_deg of [incoming]")

    @model_validator(mode="after")
    def _one_each(self) -> Station:
        exactly_one(self, ("dew_point_c", "relative_humidity_percent"), "humidity")
        exactly_one(self, ("pressure_hpa", "qnh_hpa"), "pressure")
        return self


class LadderRung(Observed):
    """One of several stations at different elevations."""

    name: Name | None = Field(default=None, description="for messages")
    elevation_m: Elevation
    temperature_c: Temperature
    dew_point_c: DewPoint | None = None
    relative_humidity_percent: Humidity | None = Field(
        default=None, description="over liquid water; may stand for dew_point_c"
    )
    pressure_hpa: Pressure | None = Field(default=None, description="at the station's height; one station needs it")
    qnh_hpa: Qnh | None = Field(default=None, description="altimeter setting; may stand for pressure_hpa")
    wind_kt: Speed | None = Field(default=None, description="speed; one station needs it")
    wind_from_deg: Bearing | None = Field(default=None, description="default: wind_from_deg of [incoming]")

    @model_validator(mode="after")
    def _one_each(self) -> LadderRung:
        exactly_one(self, ("dew_point_c", "relative_humidity_percent"), "humidity")
        if self.pressure_hpa is not None and self.qnh_hpa is not None:
            raise ValueError("pressure_hpa and qnh_hpa say the same thing; keep one of them")
        if self.wind_kt is None and self.wind_from_deg is not None:
            raise ValueError("wind_from_deg needs wind_kt beside it")
        return self


class MetarTable(Observed):
    """A METAR or SPECI; its time is compared with valid_time by itself."""

    report: ReportText = Field(description="the report as it was sent")
    elevation_m: Elevation = Field(description="of the station; the report does not say it")


class SoundingAt(Observed):
    """What a sounding file does not say."""

    station: Name | None = Field(default=None, description="number or call sign, where the file holds several")


class ModelAt(Table):
    """Which column of the model."""

    longitude: Longitude | None = Field(default=None, description="degrees east")
    latitude: Latitude | None = Field(default=None, description="degrees north")
    time: datetime | None = Field(default=None, description="with its zone; default: valid_time")
    method: Literal["nearest", "bilinear"] = Field(default="nearest", description="grid point or mean of four")

    @field_validator("time")
    @classmethod
    def _zone(cls, time: datetime | None) -> datetime | None:
        if time is not None and time.tzinfo is None:
            raise ValueError(f"{time.isoformat()} has no time zone; write {time.isoformat()}Z for UTC")
        return time

    @model_validator(mode="after")
    def _pair(self) -> ModelAt:
        together(self, ("longitude", "latitude"))
        return self


class Incoming(Table):
    """The air before the range."""

    wind_from_deg: Bearing | None = Field(
        default=None,
        description="bearing the wind comes from; the transect runs along it. Default: that of the mean wind from the "
        "base of the range to 500 m above its crest",
    )
    station: Station | None = None
    stations: Annotated[list[LadderRung], Field(min_length=2, max_length=50)] | None = Field(
        default=None, description="several stations at different elevations"
    )
    sounding_file: Name | None = Field(
        default=None, description="CSV with units in the column names, TEMP text or BUFR"
    )
    sounding_elevation_m: Elevation | None = Field(
        default=None, description="ground of a sounding that gives no heights; goes before what the file says"
    )
    sounding_at: SoundingAt | None = None
    metar: MetarTable | None = None
    model_file: Name | None = Field(default=None, description="NetCDF with CF names")
    model_at: ModelAt | None = None
    surface_station: Station | None = Field(
        default=None, description="fresh report that corrects the lowest air of a sounding or model column"
    )
    surface_metar: MetarTable | None = Field(default=None, description="the same as a METAR")
    crest_wind_kt: Speed | None = Field(default=None, description="wind at crest height")
    crest_wind_from_deg: Bearing | None = Field(default=None, description="default: wind_from_deg")
    lapse_rate_c_per_km: Annotated[float, Field(ge=0.0, le=11.0)] | None = Field(
        default=None, description="above the station; default 6.5"
    )

    @model_validator(mode="after")
    def _one_source(self) -> Incoming:
        exactly_one(self, SOURCES, "incoming air")
        column = self.sounding_file or self.model_file
        if column is not None:
            for key in ("crest_wind_kt", "crest_wind_from_deg", "lapse_rate_c_per_km"):
                if getattr(self, key) is not None:
                    raise ValueError(f"{key} belongs to a station; a column brings its own, leave the key out")
        else:
            for key in ("surface_station", "surface_metar"):
                if getattr(self, key) is not None:
                    raise ValueError(f"{key} corrects a sounding_file or model_file, and none is given")
        self._belongs("sounding_at", "sounding_file")
        self._belongs("sounding_elevation_m", "sounding_file")
        self._belongs("model_at", "model_file")
        if self.surface_station is not None and self.surface_metar is not None:
            raise ValueError("surface_station and surface_metar say the same thing; keep one of them")
        return self

    @model_validator(mode="after")
    def _directions(self) -> Incoming:
        if self.crest_wind_from_deg is not None and self.crest_wind_kt is None:
            raise ValueError("crest_wind_from_deg needs crest_wind_kt beside it")
        if self.wind_from_deg is not None:
            return self
        if self.station is not None and self.station.wind_from_deg is None:
            raise ValueError("wind_from_deg is needed: the station has none of its own")
        if self.crest_wind_kt is not None and self.crest_wind_from_deg is None:
            raise ValueError("the wind at the crest needs crest_wind_from_deg, or wind_from_deg, beside it")
        rungs = self.stations or []
        if rungs and any(rung.wind_kt is not None and rung.wind_from_deg is None for rung in rungs):
            raise ValueError("wind_from_deg is needed: a station with wind has no direction of its own")
        return self

    def _belongs(self, key: str, owner: str) -> None:
        if getattr(self, key) is not None and getattr(self, owner) is None:
            raise ValueError(f"{key} belongs to {owner}, and none is given")
