"""Whether the incoming air was observed where it can stand for the air before the range."""

from __future__ import annotations

from typing import TYPE_CHECKING

from orolift.sources.quality import Finding
from orolift.terrain.transect import transect_elevation

if TYPE_CHECKING:
    from orolift.terrain.features import Features
    from orolift.terrain.transect import Transect

FAR = 300_000.0
"""Distance upwind of the crest [m] from which the air may have changed on the way: a judgement, a quarter of the
wavelength of a short weather system."""
BESIDE = 100_000.0
"""Distance beside the line [m] from which another part of the range is meant (a judgement)."""
TERRAIN_OFF = 150.0
"""Departure of a station's elevation from the ground there [m] that is said, as for sites."""
ON_THE_SLOPE = 0.5
"""Share of the climb from base to crest above which a station stands on the slope, not before the range."""


def representative_findings(
    place: str,
    transect: Transect,
    shape: Features,
    elevation: float,
    *,
    distance: float | None = None,
    offset: float | None = None,
    lowest: bool = True,
) -> list[Finding]:
    """What place and elevation of an observation say about its use as incoming air.

    Parameters
    ----------
    place : str
        What was observed, for the finding.
    transect : Transect
    shape : Features
        Of the whole transect.
    elevation : float [m above sea level]
        Of the ground at the observation.
    distance : float or None [m]
        Along the transect from its upwind end; negative before it. None: unknown.
    offset : float or None [m]
        Across the transect.
    lowest : bool
        False for the upper stations of a ladder, which may stand on the slope.

    Returns
    -------
    list of Finding
        A station beyond the crest is wrong: it is in the lee. Without a place
        the terrain may still tell: lower than all ground upwind, at the height
        of the ground in the lee.

    Examples
    --------
    >>> from orolift.terrain.ridge import ridge_transect
    >>> from orolift.terrain.features import features
    >>> ridge = ridge_transect([0, 30e3, 60e3], [500.0, 2000.0, 100.0])
    >>> [found.what for found in representative_findings("station", ridge, features(ridge), 110.0)]
    ['lower than all ground upwind, as low as the lee: a lee station given as upwind?']
    """
    if distance is not None:
        found = _by_place(place, transect, shape, elevation, distance, offset)
        return (
            [*found, *_on_the_slope(place, shape, elevation)] if lowest and distance < shape.crest_distance else found
        )
    upwind = transect.elevation[transect.distance <= shape.crest_distance]
    lee = transect.elevation[transect.distance >= shape.crest_distance]
    lowest_upwind, lowest_lee = float(upwind.min()), float(lee.min())
    near_lee = abs(elevation - lowest_lee) < max(TERRAIN_OFF, 0.25 * (lowest_upwind - elevation))
    if elevation < lowest_upwind - TERRAIN_OFF and near_lee:
        value = f"{elevation:.0f} m; lowest ground upwind {lowest_upwind:.0f} m, in the lee {lowest_lee:.0f} m"
        what = "lower than all ground upwind, as low as the lee: a lee station given as upwind?"
        return [Finding(place, what, value, "used as it is", "doubtful")]
    return _on_the_slope(place, shape, elevation) if lowest else []


def _by_place(
    place: str, transect: Transect, shape: Features, elevation: float, distance: float, offset: float | None
) -> list[Finding]:
    found = []
    beyond = distance - shape.crest_distance
    if beyond > 0.0:
        value = f"{beyond / 1000:.0f} km downwind of the crest"
        done = "used as it is; give air from upwind of the range"
        found.append(Finding(place, "lies in the lee: a lee station given as upwind", value, done, "wrong"))
    elif -beyond > FAR:
        value = f"{-beyond / 1000:.0f} km upwind of the crest"
        found.append(
            Finding(place, "far upwind: the air may have changed on the way", value, "used as it is", "doubtful")
        )
    if offset is not None and abs(offset) > BESIDE:
        value = f"{abs(offset) / 1000:.0f} km beside the line"
        found.append(Finding(place, "far beside the line", value, "used as it is", "doubtful"))
    on_line = 0.0 <= distance <= float(transect.distance[-1]) and (offset is None or abs(offset) < 5000.0)
    if on_line:
        ground = float(transect_elevation(transect, distance))
        if abs(elevation - ground) > TERRAIN_OFF:
            value = f"{elevation:.0f} m, ground there {ground:.0f} m"
            found.append(
                Finding(
                    place, "elevation does not fit the terrain: is the unit right?", value, "used as it is", "doubtful"
                )
            )
    return found


def _on_the_slope(place: str, shape: Features, elevation: float) -> list[Finding]:
    climb = shape.crest - shape.base
    if climb <= 0.0 or elevation <= shape.base + ON_THE_SLOPE * climb:
        return []
    value = f"{elevation:.0f} m; base {shape.base:.0f} m, crest {shape.crest:.0f} m"
    done = "air below it is drawn by the standard lapse"
    return [Finding(place, "stands high on the slope, not before the range", value, done, "doubtful")]
