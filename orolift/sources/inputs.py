"""What a crossing needs, gathered from a case and the files it names."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column_build import CrestWind, air_from_levels, air_from_station
from orolift.air.humidity import mixing_ratio_from_dew_point_checked, mixing_ratio_from_relative_humidity
from orolift.air.standard import standard_pressure, station_pressure_from_qnh
from orolift.constants import STANDARD_LAPSE_RATE
from orolift.crossing.crossing import Site
from orolift.errors import CaseError, OroliftError
from orolift.sources.case import case_from_text
from orolift.sources.case_model import TransectTable
from orolift.sources.files import read_text
from orolift.sources.ridge_csv import read_ridge
from orolift.sources.sounding import LEAST_HUMIDITY
from orolift.sources.sounding_csv import read_sounding
from orolift.sources.units import to_si
from orolift.terrain.features import features
from orolift.terrain.ridge import ridge_transect
from orolift.terrain.transect import transect_elevation

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.sources.case_model import Case, Incoming, Place, Station, Terrain
    from orolift.sources.raster import MapPoint
    from orolift.sources.sounding import Sounding
    from orolift.terrain.transect import Transect

PRESSURE_CONTRADICTION = 6000.0
"""Station pressure further than this from the standard atmosphere [Pa] contradicts the elevation: a judgement, wider
than sea-level extremes of 870 and 1085 hPa would need for any station that is not in such a record storm."""
ELEVATION_CONTRADICTION = 150.0
"""A site's elevation this far from the terrain [m] gets a remark (a judgement)."""
OFF_LINE = 5000.0
"""A site this far beside the transect [m], half the default swath, gets a remark (a judgement)."""
OBLIQUE_DEG = 45.0
"""Angle between wind and line beyond which it is remarked (a judgement)."""


@dataclass(frozen=True)
class Inputs:
    """Everything a crossing takes.

    Attributes
    ----------
    case : Case
    path : Path
        The case file.
    text : str
        What stands in it.
    transect : Transect
    incoming : IncomingAir
    sites : tuple of Site
    offsets : tuple of float or None [m]
        Distance of each site across the transect; None for a hand-entered ridge.
    cautions : tuple of str
        What is doubtful about the places.
    """

    case: Case
    path: Path
    text: str
    transect: Transect
    incoming: IncomingAir
    sites: tuple[Site, ...]
    offsets: tuple[float | None, ...]
    cautions: tuple[str, ...]


def read_inputs(path: str | Path) -> Inputs:
    """Case file and everything it names, read and checked.

    Parameters
    ----------
    path : str or Path

    Returns
    -------
    Inputs

    Raises
    ------
    OroliftError
        One message that names the case file and the key, file or line at fault.
    """
    path = Path(path)
    text = read_text(path, "case")
    case = case_from_text(text, str(path))
    try:
        return _inputs(case, path, text)
    except OroliftError as error:
        if str(error).startswith(str(path)):
            raise
        raise CaseError(f"{path}: {error}") from error


def _inputs(case: Case, path: Path, text: str) -> Inputs:
    folder = path.parent
    wind_from = math.radians(case.incoming.wind_from_deg)
    if case.terrain.elevation_file is None:
        transect = _ridge(case.terrain, folder, wind_from)
        sites, offsets = _sites_on_ridge(case, transect)
    else:
        transect, sites, offsets = _raster(case, folder, wind_from)
    incoming = _incoming(case.incoming, folder, features(transect).crest)
    return Inputs(case, path, text, transect, incoming, sites, offsets, tuple(_remarks(case, transect, sites, offsets)))


def _ridge(terrain: Terrain, folder: Path, wind_from: float) -> Transect:
    drawn_from = wind_from if terrain.drawn_from_deg is None else math.radians(terrain.drawn_from_deg)
    if terrain.ridge_file is not None:
        distance, elevation = read_ridge(terrain.ridge_file, "[terrain] ridge_file", folder)
    else:
        points = np.array(terrain.ridge_km_m, dtype=np.float64).reshape(-1, 2)
        distance, elevation = to_si(points[:, 0], "km"), points[:, 1]
    return ridge_transect(distance, elevation, bearing=(drawn_from + math.pi) % (2.0 * math.pi))


def _sites_on_ridge(case: Case, transect: Transect) -> tuple[tuple[Site, ...], tuple[float | None, ...]]:
    sites = []
    length = float(transect.distance[-1])
    for site in case.site:
        if site.distance_km is None:  # the model has refused it already
            raise CaseError(f"site '{site.name}' needs distance_km")
        distance = site.distance_km * 1000.0 - transect.origin
        if not 0.0 <= distance <= length:
            first, last = transect.origin / 1000.0, (transect.origin + length) / 1000.0
            raise CaseError(
                f"[[site]] '{site.name}': distance_km {site.distance_km:g} lies beyond the ends of the ridge, "
                f"{first:g} to {last:g} km. Add points to the ridge or move the site."
            )
        sites.append(Site(site.name, distance, site.elevation_m))
    return tuple(sites), (None,) * len(sites)


def _raster(case: Case, folder: Path, wind_from: float) -> tuple[Transect, tuple[Site, ...], tuple[float | None, ...]]:
    from orolift.sources.raster import raster_transect, site_positions

    table = case.transect or TransectTable()
    place = table.through or (case.site[0] if case.site else None)
    file, unit = str(case.terrain.elevation_file), case.terrain.elevation_unit
    transect = raster_transect(
        file,
        wind_from=wind_from,
        through=None if place is None else _map_point(place),
        upwind=table.upwind_km * 1000.0,
        downwind=table.downwind_km * 1000.0,
        swath=table.swath_km * 1000.0,
        unit=unit,
        folder=folder,
        where="[terrain] elevation_file",
    )
    if not case.site:
        return transect, (), ()
    found = site_positions(file, transect, [_map_point(site) for site in case.site], unit=unit, folder=folder)
    sites = []
    for i, site in enumerate(case.site):
        distance, ground = float(found.distance[i]), float(found.elevation[i])
        if not 0.0 <= distance <= transect.distance[-1] or math.isnan(ground):
            raise CaseError(
                f"[[site]] '{site.name}' lies {_where(distance, float(transect.distance[-1]), ground)}. "
                "Move the site, or lengthen the line with upwind_km or downwind_km."
            )
        sites.append(Site(site.name, distance, ground if site.elevation_m is None else site.elevation_m))
    return transect, tuple(sites), tuple(float(offset) for offset in found.offset)


def _where(distance: float, length: float, ground: float) -> str:
    """Words for a site that the transect does not reach."""
    if distance < 0.0:
        return f"{-distance / 1000:.1f} km beyond the upwind end of the line"
    if distance > length:
        return f"{(distance - length) / 1000:.1f} km beyond the downwind end of the line"
    return "outside the elevation raster" if math.isnan(ground) else "on the line"


def _map_point(place: Place) -> MapPoint:
    from orolift.sources.raster import MapPoint

    if place.longitude is not None and place.latitude is not None:
        return MapPoint(place.longitude, place.latitude)
    return MapPoint(float(place.easting_m or 0.0), float(place.northing_m or 0.0), projected=True)


def _incoming(table: Incoming, folder: Path, crest: float) -> IncomingAir:
    wind_from = math.radians(table.wind_from_deg)
    if table.sounding_file is not None:
        sounding = read_sounding(table.sounding_file, "[incoming] sounding_file", folder)
        vapour, notes = _vapour(sounding)
        air = air_from_levels(
            sounding.height,
            sounding.pressure,
            sounding.temperature,
            vapour,
            sounding.eastward_wind,
            sounding.northward_wind,
        )
        return replace(air, notes=(*sounding.notes, *notes, *air.notes))
    if table.station is None:  # the model has refused it already
        raise CaseError("[incoming] needs a station or a sounding_file")
    return _from_station(table, table.station, wind_from, crest)


def _vapour(sounding: Sounding) -> tuple[NDArray[np.float64], tuple[str, ...]]:
    if sounding.dew_point is not None:
        return mixing_ratio_from_dew_point_checked(sounding.pressure, sounding.temperature, sounding.dew_point)
    humidity = np.maximum(np.asarray(sounding.relative_humidity), LEAST_HUMIDITY)
    notes: tuple[str, ...] = ()
    if (np.asarray(sounding.relative_humidity) < LEAST_HUMIDITY).any():
        notes = (f"Relative humidity below {LEAST_HUMIDITY:.0%} is taken as that, the least a sensor resolves.",)
    return mixing_ratio_from_relative_humidity(sounding.pressure, sounding.temperature, humidity), notes


def _from_station(table: Incoming, station: Station, wind_from: float, crest: float) -> IncomingAir:
    temperature = to_si(station.temperature_c, "c")
    pressure = _station_pressure(station)
    if station.dew_point_c is not None:
        vapour, notes = mixing_ratio_from_dew_point_checked(pressure, temperature, to_si(station.dew_point_c, "c"))
    else:
        humidity = to_si(float(station.relative_humidity_percent or 0.0), "percent")
        vapour, notes = mixing_ratio_from_relative_humidity(pressure, temperature, humidity), ()
    own_from = wind_from if station.wind_from_deg is None else math.radians(station.wind_from_deg)
    crest_wind = None
    if table.crest_wind_kt is not None:
        aloft = wind_from if table.crest_wind_from_deg is None else math.radians(table.crest_wind_from_deg)
        crest_wind = CrestWind(to_si(table.crest_wind_kt, "kt"), aloft, crest)
    lapse = STANDARD_LAPSE_RATE if table.lapse_rate_c_per_km is None else to_si(table.lapse_rate_c_per_km, "c_per_km")
    air = air_from_station(
        station.elevation_m,
        pressure,
        temperature,
        float(vapour),
        to_si(station.wind_kt, "kt"),
        own_from,
        lapse_rate=lapse,
        crest_wind=crest_wind,
    )
    return replace(air, notes=(*notes, *air.notes))


def _station_pressure(station: Station) -> float:
    """Pressure at the station, from itself or from the altimeter setting; refused when it contradicts the height."""
    if station.pressure_hpa is None:
        return float(station_pressure_from_qnh(to_si(float(station.qnh_hpa or 0.0), "hpa"), station.elevation_m))
    pressure = to_si(station.pressure_hpa, "hpa")
    usual = float(standard_pressure(station.elevation_m))
    if abs(pressure - usual) > PRESSURE_CONTRADICTION:
        low, high = ((usual + sign * PRESSURE_CONTRADICTION) / 100.0 for sign in (-1.0, 1.0))
        raise CaseError(
            f"[incoming] station: pressure_hpa {station.pressure_hpa:g} and elevation_m {station.elevation_m:g} "
            f"contradict each other: {low:.0f} to {high:.0f} hPa is allowed at that height. "
            "Is it reduced to sea level? Then call it qnh_hpa."
        )
    return pressure


def _remarks(case: Case, transect: Transect, sites: tuple[Site, ...], offsets: tuple[float | None, ...]) -> list[str]:
    """What is doubtful about the places, as cautions."""
    found = []
    for site, offset in zip(sites, offsets, strict=True):
        ground = float(transect_elevation(transect, site.distance))
        if site.elevation is not None and abs(site.elevation - ground) > ELEVATION_CONTRADICTION:
            found.append(
                f"{site.name} is given at {site.elevation:.0f} m, and the line over the range is at {ground:.0f} m "
                "there: its air is moved to its own height."
            )
        if offset is not None and abs(offset) > OFF_LINE:
            found.append(
                f"{site.name} lies {abs(offset) / 1000:.0f} km beside the line over the range; its values are those of "
                "the line at the same distance along the wind."
            )
    drawn_from = case.terrain.drawn_from_deg
    if drawn_from is not None:
        off = abs((case.incoming.wind_from_deg - drawn_from + 180.0) % 360.0 - 180.0)
        if off > OBLIQUE_DEG:
            found.append(
                f"The wind is {off:.0f} degrees off the line of the ridge: only its component along the line is used, "
                "and flow along the range is not worked out."
            )
    return found
