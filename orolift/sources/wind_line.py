"""The line over the range along the wind, and whether the air was observed where it stands for what meets the line."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from orolift.air.wind_layer import barrier_wind, turning_note
from orolift.errors import IncomingAirError
from orolift.sources.representative import representative_findings
from orolift.terrain.features import features

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

    from orolift.air.column import IncomingAir
    from orolift.sources.case_model import Case
    from orolift.sources.incoming import IncomingReading, Observation
    from orolift.sources.quality import Finding
    from orolift.terrain.features import Features
    from orolift.terrain.transect import Transect

FIRST_CREST = 2500.0
"""Depth above the ground of the column [m] whose mean wind begins the search for the line (a guess)."""
SETTLED = math.radians(1.0)
"""Turn of that wind [rad] below which the line is not cut again."""
MOST_CUTS = 4


def line_along_wind(
    reading: IncomingReading, line: Callable[[float], Transect], wind_from_deg: float | None
) -> tuple[float, Transect]:
    """Direction the line is drawn from, and the line.

    Parameters
    ----------
    reading : IncomingReading
    line : callable
        The line, from the direction the wind comes from [rad].
    wind_from_deg : float or None
        As given; None: that of the mean wind from the base of the range to
        500 m above its crest. Both depend on the line, so it is cut again
        until the direction stays, at most four times.

    Returns
    -------
    wind_from : float [rad]
    line : Transect
    """
    if wind_from_deg is not None:
        return math.radians(wind_from_deg), line(math.radians(wind_from_deg))
    first = reading.column(FIRST_CREST)
    ground = float(first.height[0])
    wind_from = float(barrier_wind(first, ground, ground + FIRST_CREST).from_direction)
    found = line(wind_from)
    for _ in range(MOST_CUTS):
        shape = features(found)
        new = float(barrier_wind(reading.column(shape.crest), shape.base, shape.crest).from_direction)
        turned = (new - wind_from + math.pi) % (2.0 * math.pi) - math.pi
        if abs(turned) < SETTLED:
            break
        wind_from = new
        found = line(wind_from)
    return wind_from, found


def turning_caution(incoming: IncomingAir, shape: Features) -> tuple[str, ...]:
    """A sentence where the wind turns much between base and crest, else nothing."""
    try:
        note = turning_note(barrier_wind(incoming, shape.base, shape.crest))
    except IncomingAirError:  # the column begins above the crest; the crossing says what that means
        return ()
    return () if note is None else (note,)


def where_observed(
    case: Case, folder: Path, observations: tuple[Observation, ...], transect: Transect, shape: Features
) -> list[Finding]:
    """What place and elevation of the observations say about their use.

    Parameters
    ----------
    case : Case
    folder : Path
    observations : tuple of Observation
    transect : Transect
    shape : Features

    Returns
    -------
    list of Finding
    """
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
