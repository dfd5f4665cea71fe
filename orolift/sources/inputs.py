"""What a crossing needs, gathered from a case and the files it names."""

from __future__ import annotations

import math
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.ground_layer import NO_GROUND_LAYER, GroundLayer, ground_layer
from orolift.air.wind_layer import barrier_wind, turning_note
from orolift.crossing.crossing import Site
from orolift.errors import CaseError, OroliftError
from orolift.sources.case import case_from_text
from orolift.sources.case_model import TransectTable
from orolift.sources.files import read_text
from orolift.sources.incoming import read_incoming
from orolift.sources.quality import Finding, cautions
from orolift.sources.representative import representative_findings
from orolift.sources.ridge_csv import read_ridge
from orolift.sources.units import to_si
from orolift.terrain.features import Features, features
from orolift.terrain.ridge import ridge_transect
from orolift.terrain.transect import Transect, transect_elevation

if TYPE_CHECKING:
    from collections.abc import Callable

    from orolift.air.column import IncomingAir
    from orolift.sources.case_model import Case, Place, Terrain
    from orolift.sources.incoming import IncomingReading, Observation
    from orolift.sources.raster import MapPoint

ELEVATION_CONTRADICTION = 150.0
"""A site's elevation this far from the terrain [m] gets a remark (a judgement)."""
OFF_LINE = 5000.0
"""A site this far beside the transect [m], half the default swath, gets a remark (a judgement)."""
FIRST_CREST = 2500.0
"""Depth above the ground of the column [m] whose mean wind begins the search for the line along the wind (a guess)."""
SETTLED = math.radians(1.0)
"""Turn of that wind [rad] below which the line is not cut again."""
MOST_CUTS = 4
OBLIQUE_DEG = 45.0
"""Angle between wind and line beyond which it is remarked (a judgement)."""

Line = tuple[Transect, tuple[Site, ...], tuple[float | None, ...]]
"""A transect, its sites and their distances across it."""


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
        What is doubtful about the places and about the incoming air.
    findings : tuple of Finding
        Quality control of the incoming air; those that are more than remarks are among the cautions, too.
    wind_from : float [rad]
        Direction the transect is drawn from: given, or that of the mean wind before the range.
    ground_layer : GroundLayer
        Stagnant layer on the ground of the incoming air, to be kept out of the inflow.
    """

    case: Case
    path: Path
    text: str
    transect: Transect
    incoming: IncomingAir
    sites: tuple[Site, ...]
    offsets: tuple[float | None, ...]
    cautions: tuple[str, ...]
    findings: tuple[Finding, ...]
    wind_from: float
    ground_layer: GroundLayer


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
    reading = read_incoming(case.incoming, folder, case.valid_time, datetime.now(UTC))

    def line(wind_from: float) -> Line:
        if case.terrain.elevation_file is not None:
            return _raster(case, folder, wind_from)
        transect = _ridge(case.terrain, folder, wind_from)
        return transect, *_sites_on_ridge(case, transect)

    if case.incoming.wind_from_deg is None:
        wind_from, (transect, sites, offsets) = _line_along_wind(reading, line)
    else:
        wind_from = math.radians(case.incoming.wind_from_deg)
        transect, sites, offsets = line(wind_from)
    shape = features(transect)
    incoming = reading.column(shape.crest)
    findings = [*reading.findings, *_where_observed(case, folder, reading.observations, transect, shape)]
    layer = ground_layer(incoming, shape.crest) if incoming.origin[1:2] != ("lapse rate",) else NO_GROUND_LAYER
    turning = turning_note(barrier_wind(incoming, shape.base, shape.crest))
    remarks = _remarks(case, transect, sites, offsets, wind_from)
    if turning is not None:
        remarks.append(turning)
    return Inputs(
        case,
        path,
        text,
        transect,
        incoming,
        sites,
        offsets,
        (*remarks, *cautions(findings)),
        tuple(findings),
        wind_from,
        layer,
    )


def _line_along_wind(reading: IncomingReading, line: Callable[[float], Line]) -> tuple[float, Line]:
    """Direction of the mean wind from base to 500 m above the crest, and the line along it.

    Base and crest depend on the line: it is cut again until the direction stays.
    """
    first = reading.column(FIRST_CREST)
    ground = float(first.height[0])
    wind_from = float(barrier_wind(first, ground, ground + FIRST_CREST).from_direction)
    for _ in range(MOST_CUTS):
        found = line(wind_from)
        shape = features(found[0])
        wind = barrier_wind(reading.column(shape.crest), shape.base, shape.crest)
        turned = (float(wind.from_direction) - wind_from + math.pi) % (2.0 * math.pi) - math.pi
        if abs(turned) < SETTLED:
            break
        wind_from = float(wind.from_direction)
    return wind_from, found


def _where_observed(
    case: Case, folder: Path, observations: tuple[Observation, ...], transect: Transect, shape: Features
) -> list[Finding]:
    """What place and elevation of the observations say about their use."""
    found: list[Finding] = []
    for one in observations:
        distance = offset = None
        if case.terrain.elevation_file is None:
            distance = None if one.ridge_distance is None else one.ridge_distance - transect.origin
        elif one.longitude is not None and one.latitude is not None:
            distance, offset = _position(case, folder, transect, one.longitude, one.latitude)
        found += representative_findings(
            one.what, transect, shape, one.elevation, distance=distance, offset=offset, lowest=one.lowest
        )
    return found


def _position(case: Case, folder: Path, transect: Transect, longitude: float, latitude: float) -> tuple[float, float]:
    """Distance along and across the transect of a place."""
    from orolift.sources.raster import MapPoint, site_positions

    file, unit = str(case.terrain.elevation_file), case.terrain.elevation_unit
    at = site_positions(file, transect, [MapPoint(longitude, latitude)], unit=unit, folder=folder)
    return float(at.distance[0]), float(at.offset[0])


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


def _remarks(
    case: Case,
    transect: Transect,
    sites: tuple[Site, ...],
    offsets: tuple[float | None, ...],
    wind_from: float,
) -> list[str]:
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
        off = abs((math.degrees(wind_from) - drawn_from + 180.0) % 360.0 - 180.0)
        if off > OBLIQUE_DEG:
            found.append(
                f"The wind is {off:.0f} degrees off the line of the ridge: only its component along the line is used, "
                "and flow along the range is not worked out."
            )
    return found
