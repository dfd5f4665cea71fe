"""Where the sites of a case lie: along and beside its line, on the map, and over what ground."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.result import Site
from orolift.errors import CaseError
from orolift.sources.case_model import TransectTable
from orolift.terrain.features import features
from orolift.terrain.transect import transect_elevation

if TYPE_CHECKING:
    from collections.abc import Sequence
    from pathlib import Path

    from orolift.sources.case_model import Case, Place, SiteTable
    from orolift.sources.raster_places import MapPoint, SitePositions
    from orolift.terrain.transect import Transect

ELEVATION_CONTRADICTION = 150.0
"""A site's elevation this far from the terrain [m] gets a remark (a judgement)."""
NAMED = 5
"""Sites of a remark that are named; of more the number is said."""
NEAR_SHARE = 0.05
"""A site nearer to a line than this share of its swath is taken as on it: the mean ground of the swath is the
same to a twentieth (a judgement)."""


@dataclass(frozen=True)
class SitePlace:
    """A site of a case.

    Attributes
    ----------
    name : str
    elevation : float or None [m above sea level]
        As given.
    ground : float [m above sea level]
        Of the terrain there.
    along : float [m]
        Distance along the case's line from its upwind end; below 0 or beyond its length for a site off its ends.
    offset : float or None [m]
        Across it, positive to the right of the wind; None on a hand-entered ridge.
    longitude, latitude : float or None [degrees east, degrees north]
    on_line : bool
        Whether its air is that of the case's own line: near it, and in the lee of the same crest.
    """

    name: str
    elevation: float | None
    ground: float
    along: float
    offset: float | None = None
    longitude: float | None = None
    latitude: float | None = None
    on_line: bool = True

    @property
    def height(self) -> float:
        """Height it is worked out for [m above sea level]: the given one, else the terrain's."""
        return self.ground if self.elevation is None else self.elevation


def near_line(transect: Transect, swath: float) -> float:
    """Distance from a line [m] within which a site is taken as on it.

    Parameters
    ----------
    transect : Transect
    swath : float [m]

    Returns
    -------
    float [m]
        A twentieth of the swath, and at least half of the step along the line.
    """
    return max(NEAR_SHARE * swath, 0.5 * float(transect.distance[1] - transect.distance[0]))


def places_on_ridge(sites: Sequence[SiteTable], transect: Transect) -> tuple[SitePlace, ...]:
    """Sites of a hand-entered ridge.

    Parameters
    ----------
    sites : sequence of SiteTable
    transect : Transect

    Returns
    -------
    tuple of SitePlace

    Raises
    ------
    CaseError
        If one lies beyond the ends.
    """
    out = []
    length = float(transect.distance[-1])
    for site in sites:
        if site.distance_km is None:  # the model has refused it already
            raise CaseError(f"site '{site.name}' needs distance_km")
        distance = site.distance_km * 1000.0 - transect.origin
        if not 0.0 <= distance <= length:
            first, last = transect.origin / 1000.0, (transect.origin + length) / 1000.0
            raise CaseError(
                f"site '{site.name}': distance_km {site.distance_km:g} lies beyond the ends of the ridge, "
                f"{first:g} to {last:g} km. Add points to the ridge or move the site."
            )
        ground = float(transect_elevation(transect, distance))
        out.append(SitePlace(site.name, site.elevation_m, ground, distance))
    return tuple(out)


def places_on_raster(
    case: Case, sites: Sequence[SiteTable], transect: Transect, folder: Path | None
) -> tuple[SitePlace, ...]:
    """Sites of a case with a raster.

    Parameters
    ----------
    case : Case
    sites : sequence of SiteTable
    transect : Transect
        The case's own line.
    folder : Path or None
        That a relative raster path starts from.

    Returns
    -------
    tuple of SitePlace

    Raises
    ------
    CaseError
        If one lies outside the raster or where it has no elevation.
    """
    if not sites:
        return ()
    from orolift.sources.raster import site_positions

    found = site_positions(
        str(case.terrain.elevation_file),
        transect,
        [map_point(site) for site in sites],
        unit=case.terrain.elevation_unit,
        folder=folder,
    )
    missing = np.flatnonzero(np.isnan(found.elevation))
    if missing.size:
        more = "" if missing.size == 1 else f" So do {missing.size - 1} more."
        raise CaseError(
            f"site '{sites[int(missing[0])].name}' lies outside the elevation raster, or where it has no elevation."
            f"{more} Move the site, or give a raster that reaches there."
        )
    swath = (case.transect or TransectTable()).swath_km * 1000.0
    on_line = _on_line(transect, found, near_line(transect, swath))
    return tuple(
        SitePlace(
            site.name,
            site.elevation_m,
            float(found.elevation[i]),
            float(found.distance[i]),
            float(found.offset[i]),
            float(found.longitude[i]),
            float(found.latitude[i]),
            on_line=bool(on_line[i]),
        )
        for i, site in enumerate(sites)
    )


def _on_line(transect: Transect, found: SitePositions, near: float) -> list[bool]:
    """Which sites lie on the line, in the lee of the crest of the first that does."""
    length = float(transect.distance[-1])
    close = (np.abs(found.offset) <= near) & (found.distance >= 0.0) & (found.distance <= length)
    crest = None
    out = []
    for is_close, distance in zip(close, found.distance, strict=True):
        if is_close:
            own = features(transect, float(distance)).crest_distance
            crest = own if crest is None else crest
            is_close = own == crest  # noqa: PLW2901 (near the line, and in the lee of its crest)
        out.append(bool(is_close))
    return out


def map_point(place: Place) -> MapPoint:
    """A place of the case as a point of the map."""
    from orolift.sources.raster import MapPoint

    if place.longitude is not None and place.latitude is not None:
        return MapPoint(place.longitude, place.latitude)
    return MapPoint(float(place.easting_m or 0.0), float(place.northing_m or 0.0), projected=True)


def sites_on_line(places: Sequence[SitePlace]) -> tuple[Site, ...]:
    """Sites on the case's own line, as the crossing takes them.

    With a map they have the height of the terrain there, which the mean ground of a swath is not.
    """
    return every_site([place for place in places if place.on_line])


def every_site(places: Sequence[SitePlace]) -> tuple[Site, ...]:
    """All sites, those beside the case's own line too, by their distance along it."""
    return tuple(
        Site(place.name, place.along, place.elevation if place.offset is None else place.height) for place in places
    )


def contradictions(places: Sequence[SitePlace]) -> list[str]:
    """Sites given far above or below their terrain, as cautions.

    Parameters
    ----------
    places : sequence of SitePlace

    Returns
    -------
    list of str
    """
    off = [
        place
        for place in places
        if place.elevation is not None and abs(place.elevation - place.ground) > ELEVATION_CONTRADICTION
    ]
    said = [
        f"{place.name} is given at {place.elevation:.0f} m, and the terrain is at {place.ground:.0f} m there: its air "
        "is moved to its own height."
        for place in off[:NAMED]
    ]
    if len(off) > NAMED:
        worst = max(abs((place.elevation or 0.0) - place.ground) for place in off)
        said.append(
            f"{len(off) - NAMED} more sites are given more than {ELEVATION_CONTRADICTION:.0f} m off their terrain, up "
            f"to {worst:.0f} m. Check their heights and their unit."
        )
    return said
