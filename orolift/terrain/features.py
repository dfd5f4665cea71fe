"""What a transect is made of: base, crest, lee foot and half width."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.errors import TerrainError
from orolift.terrain.transect import MINIMUM_RELIEF, Transect, transect_elevation

if TYPE_CHECKING:
    from numpy.typing import NDArray

FOOTHILL = 0.1
"""A site is in the lee of what stands before it when that overtops it by this share of the climb to come; a judgement.
A hillock before a range does not make a windward valley a lee."""
EQUALLY_LOW = 1.0  # [m] ground this near to the lowest counts as equally low: a judgement, the rounding of most rasters


@dataclass(frozen=True)
class Features:
    """Base, crest, lee foot and half width of a transect.

    Attributes
    ----------
    base, crest, lee_foot : float [m]
        Ground above sea level.
    base_distance, crest_distance, lee_foot_distance : float [m]
        Where, from the upwind end of the transect.
    half_width : float [m]
        Half the width of the range at half its height.
    """

    base: float
    base_distance: float
    crest: float
    crest_distance: float
    lee_foot: float
    lee_foot_distance: float
    half_width: float


def features(transect: Transect, site_distance: float | None = None) -> Features:
    """Base, crest, lee foot and half width of a transect.

    Parameters
    ----------
    transect : Transect
    site_distance : float, optional [m]
        Distance of a site from the upwind end of the transect (not the user's
        own ridge numbers: subtract ``transect.origin`` first).

    Returns
    -------
    Features

    Raises
    ------
    TerrainError
        If the crest is an end of the line, or the ground never falls downwind of it.
    OutOfRangeError
        If the site lies outside the transect.

    Notes
    -----
    Crest: the highest point between the upwind end and the site, the first
    of several; without a site, of the whole line. A site less than 30 m, or a tenth of the climb to the highest
    ground to come, below the highest point before it is still on the
    way up: then too the crest of the whole line is taken.

    Base and lee foot: the lowest ground upwind and downwind of the crest,
    between it and the ends of the line. Of stretches that are equally low
    (within 1 m) the one nearest to the crest, and in it the lowest point.

    Half width: the ground, followed outward from the crest, first falls to
    halfway between crest and base on one side, crest and lee foot on the
    other (straight lines between points); half the distance between the two.
    For a symmetric bell ``h / (1 + x^2 / a^2)`` of great length that is `a`,
    for a triangle half of its half base.

    Examples
    --------
    >>> from orolift.terrain.ridge import ridge_transect
    >>> found = features(ridge_transect([0.0, 25e3, 60e3], [40.0, 1850.0, 210.0]))
    >>> found.base, found.crest, found.lee_foot, round(found.half_width)
    (40.0, 1850.0, 210.0, 15000)
    """
    x, h = transect.distance, transect.elevation
    crest = _crest_index(transect, site_distance)
    _refuse_end(transect, crest)
    base = crest - 1 - _low_index(h[:crest][::-1])
    lee_foot = crest + 1 + _low_index(h[crest + 1 :])
    if h[lee_foot] >= h[crest]:
        raise TerrainError(
            f"the ground does not fall downwind of the crest ({h[crest]:.0f} m at {_place(transect, crest)}): "
            "there is no lee. Lengthen the transect downwind, or check the wind direction"
        )
    upwind = _outward_distance_to_halfway(x[: crest + 1][::-1], h[: crest + 1][::-1], float(h[base]))
    downwind = _outward_distance_to_halfway(x[crest:], h[crest:], float(h[lee_foot]))
    return Features(
        base=float(h[base]),
        base_distance=float(x[base]),
        crest=float(h[crest]),
        crest_distance=float(x[crest]),
        lee_foot=float(h[lee_foot]),
        lee_foot_distance=float(x[lee_foot]),
        half_width=0.5 * (upwind + downwind),
    )


def _crest_index(transect: Transect, site_distance: float | None) -> int:
    """Index of the crest that matters for the site, or of the whole line."""
    x, h = transect.distance, transect.elevation
    highest = int(np.argmax(h))
    if site_distance is None:
        return highest
    hint = "The site lies beyond the ends of the transect: lengthen the transect or leave the site out."
    site = float(within("site_distance", site_distance, float(x[0]), float(x[-1]), "m", hint))
    before = int(np.argmax(h[: int(np.searchsorted(x, site, side="right"))]))
    own = float(transect_elevation(transect, site))
    still_rising = own > h[before] - max(MINIMUM_RELIEF, FOOTHILL * (float(h[highest]) - own))
    return highest if still_rising else before


def _refuse_end(transect: Transect, crest: int) -> None:
    """Refuse a crest with no ground on one side of it."""
    if crest == 0:
        side, key = "upwind", "upwind_km"
    elif crest == transect.distance.size - 1:
        side, key = "downwind", "downwind_km"
    else:
        return
    raise TerrainError(
        f"the highest ground ({transect.elevation[crest]:.0f} m) is the {side} end of the line, at "
        f"{_place(transect, crest)}, so there is no low ground {side} of a crest. Lengthen the line {side} "
        f"({key}, or more points of the ridge), or check the wind direction"
    )


def _place(transect: Transect, index: int) -> str:
    """Distance in the user's own numbers, for messages."""
    return f"{(transect.distance[index] + transect.origin) / 1000:.1f} km"


def _low_index(outward: NDArray[np.float64]) -> int:
    """Index of the lowest ground: nearest of the equally low stretches, its lowest point."""
    low = outward <= outward.min() + EQUALLY_LOW
    first = int(np.argmax(low))
    rest = low[first:]
    length = int(np.argmin(rest)) if not rest.all() else rest.size
    return first + int(np.argmin(outward[first : first + length]))


def _outward_distance_to_halfway(x: NDArray[np.float64], h: NDArray[np.float64], foot: float) -> float:
    """Distance from the first point outward to where the ground first falls to halfway to the foot."""
    level = 0.5 * (float(h[0]) + foot)
    i = int(np.argmax(h <= level))
    share = (h[i - 1] - level) / (h[i - 1] - h[i])
    return float(abs(x[i - 1] + share * (x[i] - x[i - 1]) - x[0]))
