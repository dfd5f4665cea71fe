"""Lines of their own for the sites of a case with a raster, along any bearing."""

from __future__ import annotations

import math
from dataclasses import replace
from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.result import Site
from orolift.sources.site_places import every_site
from orolift.terrain.features import features

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from orolift.crossing.situation import Situation
    from orolift.sources.inputs import Inputs
    from orolift.sources.lines import Lines

    Array = NDArray[np.float64]

MOST_LINES = 720
"""Lines kept in memory: ten sites in every direction."""


def own_lines(
    inputs: Inputs, sites: tuple[Site, ...]
) -> tuple[Callable[[int, float], Situation], Array, tuple[float, float] | None]:
    """Lines over a raster, one for each site along any bearing.

    Parameters
    ----------
    inputs : Inputs
        Of a case with a raster.
    sites : tuple of Site
        Those of the case, or one that stands for them on its line.

    Returns
    -------
    own_line : callable
        The situation of a site, by its number, along a bearing [rad]: that site alone, without the ends. Lines are
        kept for the next time.
    places : ndarray (ns, 2) [m]
        Of the sites, true east and true north of the origin of the map.
    observed : (float, float) or None [m]
        Where the case says that its air is observed, likewise.

    Raises
    ------
    OroliftError
        If the raster cannot be read; `own_line` where the map has no line with a range in it.
    """
    from orolift.sources.lines import read_lines, situation_through

    lines = read_lines(inputs, beside=_beside(inputs, sites))
    places = _site_places(lines, inputs, sites)

    @lru_cache(maxsize=MOST_LINES)
    def own_line(number: int, bearing: float) -> Situation:
        x, y = places[number]
        site = Site(sites[number].name, 0.0, sites[number].elevation)
        return replace(situation_through(lines, float(x), float(y), bearing, (site,)), in_full=False)

    observed = _observed(lines, inputs)
    found = None if observed is None else by_true_north(np.array([observed]), lines.north)[0]
    return own_line, by_true_north(places, lines.north), None if found is None else (float(found[0]), float(found[1]))


def by_true_north(places: Array, north: float) -> Array:
    """Places on a map (n, 2) turned so that the second axis is true north.

    Parameters
    ----------
    places : ndarray (n, 2) [m]
    north : float [rad]
        Bearing of true north on the map, clockwise from its second axis.

    Returns
    -------
    ndarray (n, 2) [m]

    Examples
    --------
    A place 1 km true north, where that is to the right on the map:

    >>> by_true_north(np.array([[1000.0, 0.0]]), math.pi / 2).round(6)
    array([[   0., 1000.]])
    """
    c, s = math.cos(north), math.sin(north)
    x, y = places[:, 0], places[:, 1]
    return np.column_stack([x * c - y * s, x * s + y * c])


def sites_of(inputs: Inputs) -> tuple[Site, ...]:
    """All sites of a case, on its line or beside it; the lee foot of its line where it has none.

    Parameters
    ----------
    inputs : Inputs

    Returns
    -------
    tuple of Site
        Distances along the case's own line.
    """
    return every_site(inputs.places) or (Site("Lee foot", features(inputs.transect).lee_foot_distance),)


def _beside(inputs: Inputs, sites: tuple[Site, ...]) -> float:
    """Farthest site from the middle of the case's line [m]."""
    middle = 0.5 * float(inputs.transect.distance[-1])
    offsets = [place.offset or 0.0 for place in inputs.places] or [0.0]
    return max(math.hypot(site.distance - middle, offset) for site, offset in zip(sites, offsets, strict=True))


def _site_places(lines: Lines, inputs: Inputs, sites: tuple[Site, ...]) -> Array:
    """Places of the sites on the map, (ns, 2)."""
    from orolift.sources.lines import map_places

    line = inputs.transect
    if inputs.places:
        x, y = map_places(
            lines.placed,
            [place.longitude or 0.0 for place in inputs.places],
            [place.latitude or 0.0 for place in inputs.places],
        )
    else:
        at = [int(np.argmin(np.abs(line.distance - site.distance))) for site in sites]
        if line.longitude is None or line.latitude is None:
            raise ValueError("lines over a map have positions")
        x, y = map_places(lines.placed, line.longitude[at], line.latitude[at])
    return np.column_stack([x, y])


def _observed(lines: Lines, inputs: Inputs) -> tuple[float, float] | None:
    """Where the case says that its air is observed, on the map."""
    from orolift.sources.lines import map_places

    table = inputs.case.incoming
    at = table.station or table.metar or table.sounding_at or table.model_at
    if at is None or at.longitude is None or at.latitude is None:
        return None
    x, y = map_places(lines.placed, [at.longitude], [at.latitude])
    return float(x[0]), float(y[0])
