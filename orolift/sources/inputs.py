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
from orolift.crossing.result import When
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
from orolift.sources.site_places import contradictions, map_point, places_on_raster, places_on_ridge, sites_on_line
from orolift.sources.sites_file import all_sites
from orolift.sources.sounding_air import air_from_sounding, read_any_sounding
from orolift.sources.units import to_si
from orolift.sources.wind_line import line_along_wind, turning_caution, where_observed
from orolift.terrain.features import features
from orolift.terrain.range_normal import RangeNormal
from orolift.terrain.ridge import ridge_transect

if TYPE_CHECKING:
    from orolift.air.column import IncomingAir
    from orolift.crossing.result import Site
    from orolift.crossing.solve import CrestLine
    from orolift.fire.sites import FireSettings
    from orolift.sources.case_model import Case, LeeTable, SiteTable, Terrain
    from orolift.sources.site_places import SitePlace
    from orolift.terrain.transect import Transect

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
    places : tuple of SitePlace
        All sites of the case and its file, those beside the transect too; `sites` has those on it.
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
    places: tuple[SitePlace, ...]
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

    listed = all_sites(case, folder)

    def line(wind_from: float) -> Transect:
        if case.terrain.elevation_file is not None:
            return _raster(case, listed, folder, wind_from)
        return _ridge(case.terrain, folder, wind_from)

    wind_from, transect = line_along_wind(reading, line, case.incoming.wind_from_deg)
    if case.terrain.elevation_file is None:
        places = places_on_ridge(listed, transect)
    else:
        places = places_on_raster(case, listed, transect, folder)
    sites = sites_on_line(places)
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
        places=places,
        cautions=(
            *contradictions(places),
            *_oblique(case, wind_from),
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


def _raster(case: Case, sites: tuple[SiteTable, ...], folder: Path, wind_from: float) -> Transect:
    from orolift.sources.raster import raster_transect

    table = case.transect or TransectTable()
    place = table.through or (sites[0] if sites else None)
    return raster_transect(
        str(case.terrain.elevation_file),
        wind_from=wind_from,
        through=None if place is None else map_point(place),
        upwind=table.upwind_km * 1000.0,
        downwind=table.downwind_km * 1000.0,
        swath=table.swath_km * 1000.0,
        unit=case.terrain.elevation_unit,
        folder=folder,
        where="[terrain] elevation_file",
    )


def _oblique(case: Case, wind_from: float) -> list[str]:
    """A caution where the wind is far off the line a ridge is drawn along."""
    drawn_from = case.terrain.drawn_from_deg
    if drawn_from is None:
        return []
    off = abs((math.degrees(wind_from) - drawn_from + 180.0) % 360.0 - 180.0)
    if off <= OBLIQUE_DEG:
        return []
    return [
        (
            f"The wind is {off:.0f} degrees off the line of the ridge: only its component along the line is used, "
            "and flow along the range is not worked out."
        )
    ]
