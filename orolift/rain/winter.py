"""Snow line on both sides of the range, and the two dangers of cold ground: rain on snow cover, freezing rain."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.snow_share import snow_share_from_wet_bulb
from orolift.air.wet_bulb import wet_bulb_from_mixing_ratio
from orolift.constants import MELTING_POINT
from orolift.crossing.pool import pool_air
from orolift.crossing.rainfall import LEAST_RAIN, by_height

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing
    from orolift.terrain.grid import ElevationGrid

    Array = NDArray[np.float64]

STEP = 200.0  # [m] of an elevation band
_RUNS_OFF = "It can melt snow and run off at once."


@dataclass(frozen=True)
class BandOfSide:
    """What falls on one side of the range between two heights of the ground.

    Attributes
    ----------
    side : 'windward' or 'lee'
    lower, upper : float [m above sea level]
    rate : float [kg m-2 s-1]
        Mean of rain and snow, background included.
    snow_share : float [1]
        Of it; where nothing falls, what it would be.
    """

    side: str
    lower: float
    upper: float
    rate: float
    snow_share: float


def snow_share_on_line(crossing: Crossing) -> Array:
    """Share of snow at the ground along a crossing, by the wet bulb of its lowest air.

    Parameters
    ----------
    crossing : Crossing

    Returns
    -------
    ndarray, shape (nk,) [1]
        Where a pool stays, at the top of the pool.
    """
    air = crossing.air
    return snow_share_from_wet_bulb(
        wet_bulb_from_mixing_ratio(air.pressure[:, 0], air.temperature[:, 0], np.maximum(air.vapour[:, 0], 1e-8))
    )


def bands_of_sides(crossing: Crossing, *, step: float = STEP) -> tuple[BandOfSide, ...]:
    """Rain and snow along a crossing by side of the crest and height of the ground.

    Parameters
    ----------
    crossing : Crossing
    step : float [m]
        Height of a band; its edges are multiples of it.

    Returns
    -------
    tuple of BandOfSide
        Windward first, each side from the lowest band up; bands without ground are left out.

    Notes
    -----
    Snow is that of the march, which lets falling snow melt between 0 and 2 degrees Celsius; of the background
    rain the share is by the wet bulb at the ground (`orolift.rain.snow`).
    """
    ground = np.interp(crossing.distance, crossing.transect.distance, crossing.transect.elevation)
    share = snow_share_on_line(crossing)
    whole = crossing.rain.rate + crossing.rain.background
    snow = crossing.rain.snow_rate + crossing.rain.background * share
    columns = np.stack([whole, snow, share], axis=-1)
    means = by_height(crossing.distance, ground, crossing.features.crest_distance, columns, step)
    out = []
    for (side, number), (fell, frozen, would_be) in means.items():
        part = float(frozen / fell) if fell > 0.0 else float(would_be)
        out.append(BandOfSide(side, step * number, step * (number + 1), float(fell), part))
    return tuple(out)


def winter_flags(
    crossing: Crossing,
    *,
    snow_cover_above: float | None = None,
    grid: ElevationGrid | None = None,
    rain_on_map: Array | None = None,
    chances: Mapping[str, float] | None = None,
) -> tuple[str, ...]:
    """Rain on snow cover and freezing rain, where they threaten.

    Parameters
    ----------
    crossing : Crossing
    snow_cover_above : float, optional [m above sea level]
        Lowest ground with snow on it; without it nothing is said of rain on snow.
    grid : ElevationGrid, optional
        Of a map.
    rain_on_map : ndarray, shape (ny, nx), optional [kg m-2 s-1]
        Rain, snow left out, on that map.
    chances : mapping of str to float, optional [1]
        ``rain_on_snow`` and ``freezing_rain``: share of the members in which each threatens.

    Returns
    -------
    tuple of str
        Empty where neither threatens.

    Notes
    -----
    Rain counts from 0.1 mm an hour on. Rain freezes on the ground of a pool that stays below 0 degrees Celsius there
    when it comes from warmer air above it; a deep pool can turn it into ice pellets before it lands, which is not
    told apart. How much melts of the snow cover is not worked out.
    """
    rain = crossing.rain.rate - crossing.rain.snow_rate
    rain = rain + crossing.rain.background * (1.0 - snow_share_on_line(crossing))
    ground = np.interp(crossing.distance, crossing.transect.distance, crossing.transect.elevation)
    flags = []
    if snow_cover_above is not None:
        found = _on_snow(ground, rain, snow_cover_above, grid, rain_on_map)
        flags += [flag + _likely("Rain falls on snow", chances, "rain_on_snow") for flag in found]
    flags += [flag + _likely("Rain freezes", chances, "freezing_rain") for flag in _freezing(crossing, ground, rain)]
    return tuple(flags)


def _likely(what: str, chances: Mapping[str, float] | None, name: str) -> str:
    """In how many members it does so, as one more sentence; nothing where that is not known."""
    chance = (chances or {}).get(name)
    return "" if chance is None else f" {what} in {100.0 * chance:.0f} % of the members."


def _on_snow(
    ground: Array, rain: Array, cover: float, grid: ElevationGrid | None, rain_on_map: Array | None
) -> list[str]:
    """Rain on snow: on the line, else on the map beside it."""
    wet = (ground >= cover) & (rain >= LEAST_RAIN)
    if wet.any():
        where = f"between {ground[wet].min():.0f} and {ground[wet].max():.0f} m on the line"
        return [f"Rain on snow: up to {_per_hour(rain[wet])} on ground with snow cover, {where}. {_RUNS_OFF}"]
    if grid is None or rain_on_map is None:
        return []
    known = np.isfinite(grid.elevation) & np.isfinite(rain_on_map)
    wet = known & (np.nan_to_num(grid.elevation) >= cover) & (np.nan_to_num(rain_on_map) >= LEAST_RAIN)
    if not wet.any():
        return []
    area = float(wet.sum()) * abs(grid.x[1] - grid.x[0]) * abs(grid.y[1] - grid.y[0]) / 1e6
    heights = grid.elevation[wet]
    where = f"beside the line, between {heights.min():.0f} and {heights.max():.0f} m"
    rate = _per_hour(rain_on_map[wet])
    return [f"Rain on snow: up to {rate} on {area:.0f} km² of ground with snow cover {where}. {_RUNS_OFF}"]


def _per_hour(rain: Array) -> str:
    """The most of it in words."""
    return f"{3600.0 * float(rain.max()):.1f} mm of rain an hour"


def _freezing(crossing: Crossing, ground: Array, rain: Array) -> list[str]:
    """Rain over a pool whose air is below freezing at the ground."""
    pool = crossing.pool
    if pool is None or pool.depth <= 0.0:
        return []
    under = (crossing.distance > crossing.features.crest_distance) & (ground < pool.top)
    cold = under & (pool_air(pool, ground)[0] < MELTING_POINT) & (rain >= LEAST_RAIN)
    if not cold.any():
        return []
    coldest = float(pool_air(pool, ground[cold])[0].min()) - MELTING_POINT
    where = f"{coldest:.1f} °C at the ground, between {ground[cold].min():.0f} and {ground[cold].max():.0f} m"
    air = "falls into the cold air that stays in the lee"
    return [f"Freezing rain: up to {_per_hour(rain[cold])} {air}, {where}. It freezes on roads, lines and trees."]
