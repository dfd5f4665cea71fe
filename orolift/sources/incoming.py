"""The incoming air of a case, read from whatever it names: a column, findings, and where and when it was observed."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.blending import SurfaceValues, blended_with_surface
from orolift.air.column_build import CrestWind, air_from_station
from orolift.air.humidity import relative_humidity_from_dew_point
from orolift.air.ladder import LadderStation, air_from_ladder
from orolift.constants import STANDARD_LAPSE_RATE
from orolift.errors import CaseError
from orolift.sources.quality import Finding, age_findings, shortened
from orolift.sources.sounding import sounding_from_levels
from orolift.sources.sounding_air import air_from_sounding, read_any_sounding
from orolift.sources.station_ladder import ladder_findings
from orolift.sources.station_values import StationValues, station_pressure, values_from_metar, values_from_station
from orolift.sources.units import to_si

if TYPE_CHECKING:
    from collections.abc import Callable
    from datetime import datetime
    from pathlib import Path

    from orolift.air.column import IncomingAir
    from orolift.sources.incoming_model import Incoming, LadderRung
    from orolift.sources.sounding import Sounding

AIR_MASS_OFF = 6.0
"""Difference of a surface report from the column it corrects [K] from which two air masses are suspected."""

CLOUDY = 1.0e-6
"""Excess over saturation [kg kg-1] that is said: 0.001 g/kg, far below what a sensor resolves."""


@dataclass(frozen=True)
class Observation:
    """Where and when incoming air was observed; None where nothing says it.

    Attributes
    ----------
    what : str
        "sounding", "station Upper Tarn", ...
    elevation : float [m above sea level]
    longitude, latitude : float or None [degrees east, degrees north]
    ridge_distance : float or None [m]
        Along a hand-entered ridge, in its own numbers.
    observed : datetime or None
    lowest : bool
        False for the upper stations of a ladder.
    """

    what: str
    elevation: float
    longitude: float | None = None
    latitude: float | None = None
    ridge_distance: float | None = None
    observed: datetime | None = None
    lowest: bool = True


@dataclass(frozen=True)
class IncomingReading:
    """Incoming air as read, before the range is known.

    Attributes
    ----------
    column : callable
        The column, from the height of the crest, to which a given crest wind belongs.
    findings : tuple of Finding
    observations : tuple of Observation
    """

    column: Callable[[float], IncomingAir]
    findings: tuple[Finding, ...]
    observations: tuple[Observation, ...]


def read_incoming(
    table: Incoming, folder: Path, valid: datetime | None, now: datetime | None = None
) -> IncomingReading:
    """Incoming air of a case.

    Parameters
    ----------
    table : Incoming
    folder : Path
        That paths start from.
    valid : datetime or None
        For which the crossing is wanted.
    now : datetime or None
        The clock, to find observations from the future.

    Returns
    -------
    IncomingReading

    Raises
    ------
    OroliftError
        If something it names cannot be read or used.
    """
    if table.stations is not None:
        reading = _ladder(table, table.stations)
    elif table.sounding_file is not None or table.model_file is not None:
        reading = _column(table, folder, valid)
    else:
        reading = _station(table, valid)
    fresh = table.surface_station is not None or table.surface_metar is not None
    done = "its lowest air is corrected by the surface report" if fresh else "used as it is"
    ages = [
        finding
        for one in reading.observations
        for finding in age_findings(
            one.observed, valid, one.what, now, done=done if one is reading.observations[0] else "used as it is"
        )
    ]
    return replace(reading, findings=(*reading.findings, *ages))


def _radians(degrees: float | None) -> float | None:
    return None if degrees is None else math.radians(degrees)


def _crest_wind(table: Incoming, crest: float) -> CrestWind | None:
    if table.crest_wind_kt is None:
        return None
    degrees = table.wind_from_deg if table.crest_wind_from_deg is None else table.crest_wind_from_deg
    return CrestWind(to_si(table.crest_wind_kt, "kt"), math.radians(degrees or 0.0), crest)


def _lapse_rate(table: Incoming) -> float:
    return (
        float(STANDARD_LAPSE_RATE)
        if table.lapse_rate_c_per_km is None
        else to_si(table.lapse_rate_c_per_km, "c_per_km")
    )


def _surface(table: Incoming, valid: datetime | None, *, fresh: bool) -> StationValues | None:
    """Values of the station or METAR, of the source itself or of the fresh report beside a column."""
    station = table.surface_station if fresh else table.station
    metar = table.surface_metar if fresh else table.metar
    prefix = "[incoming] surface_" if fresh else "[incoming] "
    if station is not None:
        return values_from_station(station, f"{prefix}station", _radians(table.wind_from_deg))
    if metar is not None:
        return values_from_metar(metar, f"{prefix}metar", _radians(table.wind_from_deg), valid)
    return None


def _observation(values: StationValues) -> Observation:
    return Observation(
        values.what,
        values.elevation,
        values.longitude,
        values.latitude,
        values.ridge_distance,
        values.observed,
    )


def _station(table: Incoming, valid: datetime | None) -> IncomingReading:
    values = _surface(table, valid, fresh=False)
    if values is None:  # the model has refused it already
        raise CaseError("[incoming] names no source")

    def column(crest: float) -> IncomingAir:
        air = air_from_station(
            values.elevation,
            values.pressure,
            values.temperature,
            values.mixing_ratio,
            values.wind_speed,
            values.wind_from,
            lapse_rate=_lapse_rate(table),
            crest_wind=_crest_wind(table, crest),
        )
        return replace(air, notes=(*values.notes, *air.notes))

    return IncomingReading(column, values.findings, (_observation(values),))


def _ladder(table: Incoming, rungs: list[LadderRung]) -> IncomingReading:
    stations = [_rung(rung, table, f"[incoming] stations, item {i}") for i, rung in enumerate(rungs, start=1)]
    names = [rung.name or f"station {i} at {rung.elevation_m:.0f} m" for i, rung in enumerate(rungs, start=1)]

    def column(crest: float) -> IncomingAir:
        return air_from_ladder(stations, lapse_rate=_lapse_rate(table), crest_wind=_crest_wind(table, crest))

    observations = tuple(
        Observation(
            name,
            rung.elevation_m,
            rung.longitude,
            rung.latitude,
            None if rung.distance_km is None else rung.distance_km * 1000.0,
            rung.observed_time,
            lowest=rung.elevation_m == min(other.elevation_m for other in rungs),
        )
        for name, rung in zip(names, rungs, strict=True)
    )
    findings = ladder_findings(stations, names)
    times = [rung.observed_time for rung in rungs if rung.observed_time is not None]
    if times and (max(times) - min(times)).total_seconds() > 3600.0:
        value = f"{(max(times) - min(times)).total_seconds() / 3600.0:.1f} h"
        findings.append(Finding("stations", "observed at different times", value, "used as they are", "doubtful"))
    return IncomingReading(column, tuple(findings), observations)


def _rung(rung: LadderRung, table: Incoming, where: str) -> LadderStation:
    temperature = to_si(rung.temperature_c, "c")
    if rung.dew_point_c is not None:
        dew_point = to_si(rung.dew_point_c, "c")
        if dew_point > temperature + 0.5:
            raise CaseError(
                f"{where}: dew_point_c {rung.dew_point_c:g} is above temperature_c {rung.temperature_c:g}; are they "
                "exchanged?"
            )
        humidity = float(relative_humidity_from_dew_point(temperature, min(dew_point, temperature)))
    else:
        humidity = to_si(float(rung.relative_humidity_percent or 0.0), "percent")
    eastward = northward = None
    degrees = rung.wind_from_deg if rung.wind_from_deg is not None else table.wind_from_deg
    if rung.wind_kt is not None and degrees is not None:
        speed, direction = to_si(rung.wind_kt, "kt"), math.radians(degrees)
        eastward, northward = -speed * math.sin(direction), -speed * math.cos(direction)
    has_pressure = rung.pressure_hpa is not None or rung.qnh_hpa is not None
    pressure = station_pressure(rung.pressure_hpa, rung.qnh_hpa, rung.elevation_m, where) if has_pressure else None
    return LadderStation(rung.elevation_m, temperature, humidity, pressure, eastward, northward)


def _column(table: Incoming, folder: Path, valid: datetime | None) -> IncomingReading:
    """A sounding or model column, with a fresh surface report blended in where one is given."""
    what, sounding = _sounding(table, folder, valid)
    key = "sounding_file" if table.model_file is None else "model_file"
    air = air_from_sounding(sounding, f"[incoming] {key}")
    if table.model_file is not None:
        air = replace(air, origin=tuple("model" if kind == "measured" else kind for kind in air.origin))
    at = table.sounding_at
    seen = Observation(
        what,
        float(air.height[0]),
        sounding.longitude if at is None or at.longitude is None else at.longitude,
        sounding.latitude if at is None or at.latitude is None else at.latitude,
        None if at is None or at.distance_km is None else at.distance_km * 1000.0,
        sounding.observed if at is None or at.observed_time is None else at.observed_time,
    )
    findings = [*sounding.findings, *shortened(_saturated_layers(air, what))]
    observations = [seen]
    fresh = _surface(table, valid, fresh=True)
    if fresh is not None:
        air, more = _corrected(air, fresh)
        findings += [*fresh.findings, *more]
        observations.append(_observation(fresh))
    return IncomingReading(lambda _crest: air, tuple(findings), tuple(observations))


def _sounding(table: Incoming, folder: Path, valid: datetime | None) -> tuple[str, Sounding]:
    """What they are called in findings, and levels made whole."""
    if table.model_file is not None:
        from orolift.sources.model_column import read_model_column

        place = table.model_at
        levels = read_model_column(
            table.model_file,
            "[incoming] model_file",
            folder,
            longitude=None if place is None else place.longitude,
            latitude=None if place is None else place.latitude,
            time=valid if place is None or place.time is None else place.time,
            method="nearest" if place is None else place.method,
        )
        return "model column", sounding_from_levels(levels)
    at = table.sounding_at
    return "sounding", read_any_sounding(
        str(table.sounding_file),
        "[incoming] sounding_file",
        folder,
        elevation=table.sounding_elevation_m,
        station=None if at is None else at.station,
        near=valid if at is None or at.observed_time is None else at.observed_time,
    )


def _saturated_layers(air: IncomingAir, what: str) -> list[Finding]:
    """Layers whose vapour is above saturation, so that they begin with cloud."""
    wet = np.concatenate([[False], air.cloud > CLOUDY, [False]]).astype(np.int8)
    edges = np.flatnonzero(np.diff(wet))
    layers = zip(edges[::2], edges[1::2] - 1, strict=True)
    return [
        Finding(
            f"{what}, {air.height[low]:.0f} to {air.height[high]:.0f} m",
            "supersaturated layer",
            f"up to {air.cloud[low : high + 1].max() * 1000.0:.2g} g/kg too much",
            "the excess starts as cloud",
            "remark",
        )
        for low, high in layers
    ]


def _corrected(air: IncomingAir, fresh: StationValues) -> tuple[IncomingAir, list[Finding]]:
    """Column with the fresh report blended in, and what to say where the two are far apart."""
    blend = blended_with_surface(
        air,
        SurfaceValues(
            fresh.elevation,
            fresh.temperature,
            fresh.mixing_ratio,
            fresh.pressure,
            -fresh.wind_speed * math.sin(fresh.wind_from),
            -fresh.wind_speed * math.cos(fresh.wind_from),
        ),
    )
    value = f"{blend.temperature_change:+.1f} °C, {blend.pressure_change / 100:+.1f} hPa against the column"
    far = abs(blend.temperature_change) > AIR_MASS_OFF
    what = "far from the column: one air mass?" if far else "fresh surface report"
    done = f"blended in up to {blend.top:.0f} m"
    return blend.air, [Finding(fresh.what, what, value, done, "doubtful" if far else "remark")]
