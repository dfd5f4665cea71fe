"""What a crossing needs, gathered from a case and the files it names."""

from __future__ import annotations

import math
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.ground_layer import NO_GROUND_LAYER, GroundLayer, ground_layer
from orolift.crossing.pool import Lee
from orolift.crossing.result import Site, When
from orolift.crossing.settings import Settings
from orolift.crossing.situation import Situation
from orolift.errors import CaseError, OroliftError
from orolift.sources.case import case_from_text
from orolift.sources.case_model import TransectTable
from orolift.sources.files import read_text
from orolift.sources.fire_inputs import fire_settings
from orolift.sources.incoming import read_incoming
from orolift.sources.quality import Finding, cautions
from orolift.sources.ridge_csv import read_ridge
from orolift.sources.sounding_air import air_from_sounding, read_any_sounding
from orolift.sources.units import to_si
from orolift.sources.wind_line import Line, line_along_wind, turning_caution, where_observed
from orolift.terrain.features import features
from orolift.terrain.range_normal import RangeNormal
from orolift.terrain.ridge import ridge_transect
from orolift.terrain.transect import transect_elevation

if TYPE_CHECKING:
    from orolift.air.column import IncomingAir
    from orolift.crossing.solve import CrestLine
    from orolift.fire.sites import FireSettings
    from orolift.sources.case_model import Case, LeeTable, Place, Terrain
    from orolift.sources.raster import MapPoint
    from orolift.terrain.transect import Transect

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
    settings : Settings
    lee : Lee
    when : When
    normal : RangeNormal or None
        Of a raster, or as given.
    crest_line : CrestLine or None
        Of a raster.
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
    fire : FireSettings
        Thresholds and memory of fire weather.
    """

    case: Case
    path: Path
    text: str
    transect: Transect
    incoming: IncomingAir
    sites: tuple[Site, ...]
    settings: Settings
    lee: Lee
    when: When
    normal: RangeNormal | None
    crest_line: CrestLine | None
    offsets: tuple[float | None, ...]
    cautions: tuple[str, ...]
    findings: tuple[Finding, ...]
    wind_from: float
    ground_layer: GroundLayer
    fire: FireSettings


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


def situation_of(inputs: Inputs) -> Situation:
    """What the crossing of a case takes.

    Parameters
    ----------
    inputs : Inputs

    Returns
    -------
    Situation
    """
    depth = inputs.ground_layer.depth
    return Situation(
        inputs.transect,
        inputs.incoming,
        inputs.sites,
        inputs.settings,
        lee=inputs.lee,
        when=inputs.when,
        normal=inputs.normal,
        lowest_pass=inputs.case.terrain.pass_m,
        crest_line=inputs.crest_line,
        stagnant_top=float(inputs.incoming.height[0]) + depth if depth > 0.0 else None,
        background=to_si(inputs.case.rain.background_mm_per_h, "mm_per_h"),
    )


def _inputs(case: Case, path: Path, text: str) -> Inputs:
    folder = path.parent
    reading = read_incoming(case.incoming, folder, case.valid_time, datetime.now(UTC))

    def line(wind_from: float) -> Line:
        if case.terrain.elevation_file is not None:
            return _raster(case, folder, wind_from)
        transect = _ridge(case.terrain, folder, wind_from)
        return transect, *_sites_on_ridge(case, transect)

    wind_from, (transect, sites, offsets) = line_along_wind(reading, line, case.incoming.wind_from_deg)
    shape = features(transect, sites[0].distance if sites else None)
    incoming = reading.column(shape.crest)
    findings = (*reading.findings, *where_observed(case, folder, reading.observations, transect, shape))
    normal, crest_line = _range(case, folder, transect, shape.crest_distance)
    return Inputs(
        case=case,
        path=path,
        text=text,
        transect=transect,
        incoming=incoming,
        sites=sites,
        settings=_settings(case),
        lee=_lee(case.lee, folder, case.valid_time),
        when=_when(case, transect, shape.crest_distance),
        normal=normal,
        crest_line=crest_line,
        offsets=offsets,
        cautions=(
            *_remarks(case, transect, sites, offsets, wind_from),
            *turning_caution(incoming, shape),
            *cautions(findings),
        ),
        findings=findings,
        wind_from=wind_from,
        ground_layer=NO_GROUND_LAYER if "lapse rate" in incoming.origin else ground_layer(incoming, shape.crest),
        fire=fire_settings(case, folder),
    )


def _settings(case: Case) -> Settings:
    return Settings(
        removed_share=case.rain.removed_share,
        cloud_time=case.rain.cloud_time_s,
        fall_time=case.rain.fall_time_s,
        going_round_share=case.flow.going_round_share,
        mixing_depth=case.lee.mixing_depth_m,
        roughness=case.lee.roughness_m,
        freezing=case.rain.freezing,
        surface_heat=case.heat.surface_heat,
    )


def _lee(table: LeeTable, folder: Path, near: datetime | None) -> Lee:
    air = None
    if table.sounding_file is not None:
        where = "[lee] sounding_file"
        air = air_from_sounding(read_any_sounding(table.sounding_file, where, folder, near=near), where)
    temperature = None if table.temperature_c is None else to_si(table.temperature_c, "c")
    return Lee(temperature=temperature, pool_top=table.pool_top_m, air=air)


def _when(case: Case, transect: Transect, crest: float) -> When:
    """Time, and the position of the crest, as far as they are known."""
    time = None if case.valid_time is None else case.valid_time.timestamp()
    if transect.longitude is None or transect.latitude is None:
        return When(time, case.terrain.longitude, case.terrain.latitude)
    return When(time, *_crest_position(transect, crest))


def _crest_position(transect: Transect, crest: float) -> tuple[float, float]:
    if transect.longitude is None or transect.latitude is None:
        raise CaseError("the ridge has no position")
    i = int(np.argmin(np.abs(transect.distance - crest)))
    return float(transect.longitude[i]), float(transect.latitude[i])


def _range(case: Case, folder: Path, transect: Transect, crest: float) -> tuple[RangeNormal | None, CrestLine | None]:
    """Range normal and crest line: given, or read off the raster around the crest."""
    downwind = transect.bearing or 0.0
    given = None
    if case.flow.range_normal_deg is not None:
        bearing = math.radians(case.flow.range_normal_deg)
        # a normal may be given either way; the one nearer to downwind counts
        bearing += math.pi if math.cos(bearing - downwind) < 0.0 else 0.0
        given = RangeNormal(bearing % (2.0 * math.pi), 1.0)
    if case.terrain.elevation_file is None:
        return given, None
    from orolift.sources.raster_range import range_of_raster

    found, line = range_of_raster(
        case.terrain.elevation_file,
        *_crest_position(transect, crest),
        downwind,
        normal=None if given is None else given.bearing,
        unit=case.terrain.elevation_unit,
        folder=folder,
        where="[terrain] elevation_file",
    )
    return given or found, line


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
