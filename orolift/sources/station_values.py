"""Values of one station in SI, from the keys of a case or from a METAR."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.air.humidity import mixing_ratio_from_dew_point_checked, mixing_ratio_from_relative_humidity
from orolift.air.standard import standard_pressure, station_pressure_from_qnh
from orolift.errors import CaseError
from orolift.sources.quality import Finding, station_findings
from orolift.sources.units import to_si

if TYPE_CHECKING:
    from datetime import datetime

    from orolift.sources.incoming_model import MetarTable, Station

PRESSURE_CONTRADICTION = 6000.0
"""Station pressure further than this from the standard atmosphere [Pa] contradicts the elevation: a judgement, wider
than sea-level extremes of 870 and 1085 hPa would need for any station that is not in such a record storm."""


@dataclass(frozen=True)
class StationValues:
    """Values of a station.

    Attributes
    ----------
    what : str
        For messages and findings.
    elevation : float [m above sea level]
    pressure : float [Pa]
        At the station.
    temperature : float [K]
    mixing_ratio : float [kg kg-1 of dry air]
    wind_speed : float [m s-1]
    wind_from : float [rad]
    notes : tuple of str
    findings : tuple of Finding
    longitude, latitude : float or None [degrees east, degrees north]
    ridge_distance : float or None [m]
        Along a hand-entered ridge, in its own numbers.
    observed : datetime or None
    """

    what: str
    elevation: float
    pressure: float
    temperature: float
    mixing_ratio: float
    wind_speed: float
    wind_from: float
    notes: tuple[str, ...] = ()
    findings: tuple[Finding, ...] = ()
    longitude: float | None = None
    latitude: float | None = None
    ridge_distance: float | None = None
    observed: datetime | None = None


def station_pressure(pressure_hpa: float | None, qnh_hpa: float | None, elevation: float, where: str) -> float:
    """Pressure at a station, from itself or from the altimeter setting.

    Parameters
    ----------
    pressure_hpa, qnh_hpa : float or None
        Exactly one.
    elevation : float [m above sea level]
    where : str

    Returns
    -------
    float [Pa]

    Raises
    ------
    CaseError
        If the pressure contradicts the elevation.
    """
    if pressure_hpa is None:
        return float(station_pressure_from_qnh(to_si(float(qnh_hpa or 0.0), "hpa"), elevation))
    pressure = to_si(pressure_hpa, "hpa")
    usual = float(standard_pressure(elevation))
    if abs(pressure - usual) > PRESSURE_CONTRADICTION:
        low, high = ((usual + sign * PRESSURE_CONTRADICTION) / 100.0 for sign in (-1.0, 1.0))
        feet = abs(pressure - float(standard_pressure(elevation * 0.3048))) < 0.5 * PRESSURE_CONTRADICTION
        cause = (
            "Is the elevation in feet? Then call it elevation_ft."
            if feet
            else "Is it reduced to sea level? Then call it qnh_hpa."
        )
        raise CaseError(
            f"{where}: pressure_hpa {pressure_hpa:g} and elevation_m {elevation:g} contradict each other: "
            f"{low:.0f} to {high:.0f} hPa is allowed at that height. {cause}"
        )
    return pressure


def values_from_station(station: Station, where: str, wind_from: float | None) -> StationValues:
    """Values of a station of the case.

    Parameters
    ----------
    station : Station
    where : str
        Key, for messages.
    wind_from : float or None [rad]
        For a station without a direction of its own.

    Returns
    -------
    StationValues

    Raises
    ------
    CaseError
        If pressure and elevation contradict each other, or no direction is known.
    """
    what = f"station {station.name}" if station.name else where
    temperature = to_si(station.temperature_c, "c")
    pressure = station_pressure(station.pressure_hpa, station.qnh_hpa, station.elevation_m, where)
    notes: tuple[str, ...] = ()
    if station.dew_point_c is not None:
        dew_point = to_si(station.dew_point_c, "c")
        vapour, notes = mixing_ratio_from_dew_point_checked(pressure, temperature, dew_point)
    else:
        humidity = to_si(float(station.relative_humidity_percent or 0.0), "percent")
        dew_point = temperature
        vapour = mixing_ratio_from_relative_humidity(pressure, temperature, humidity)
    speed = to_si(station.wind_kt, "kt")
    direction = wind_from if station.wind_from_deg is None else math.radians(station.wind_from_deg)
    return StationValues(
        what,
        station.elevation_m,
        pressure,
        temperature,
        float(vapour),
        speed,
        _known_direction(direction, speed, where),
        notes,
        tuple(station_findings(station.elevation_m, pressure, temperature, dew_point, speed, what)),
        station.longitude,
        station.latitude,
        None if station.distance_km is None else station.distance_km * 1000.0,
        station.observed_time,
    )


def _known_direction(direction: float | None, speed: float, where: str) -> float:
    if direction is not None:
        return direction
    if speed == 0.0:
        return 0.0
    raise CaseError(f"{where}: the wind has no direction. Give wind_from_deg in [incoming].")


def values_from_metar(table: MetarTable, where: str, wind_from: float | None, valid: datetime | None) -> StationValues:
    """Values of a METAR of the case.

    Parameters
    ----------
    table : MetarTable
    where : str
        Key, for messages.
    wind_from : float or None [rad]
        For a variable wind.
    valid : datetime or None
        By which the month of the report is found, unless the table gives a time.

    Returns
    -------
    StationValues

    Raises
    ------
    DataFileError, CaseError
        If the report cannot be used.
    """
    from orolift.sources.metar_report import metar_report

    report = metar_report(table.report, where, near=table.observed_time or valid)
    what = f"METAR {report.station}"
    pressure = float(station_pressure_from_qnh(report.qnh, table.elevation_m))
    vapour, notes = mixing_ratio_from_dew_point_checked(pressure, report.temperature, report.dew_point)
    direction = wind_from if report.wind_from is None else report.wind_from
    findings = [
        *report.findings,
        *station_findings(table.elevation_m, pressure, report.temperature, report.dew_point, report.wind_speed, what),
    ]
    return StationValues(
        what,
        table.elevation_m,
        pressure,
        report.temperature,
        float(vapour),
        report.wind_speed,
        _known_direction(direction, report.wind_speed, where),
        notes,
        tuple(findings),
        table.longitude,
        table.latitude,
        None if table.distance_km is None else table.distance_km * 1000.0,
        report.observed or table.observed_time,
    )
