"""What a solution says of flow, cloud and water in each of its members: plain arrays (m,), NaN where there is none."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import vapour_flux
from orolift.air.snow_share import snow_share_from_wet_bulb
from orolift.air.wet_bulb import wet_bulb_from_mixing_ratio
from orolift.constants import MELTING_POINT
from orolift.crossing.cloud import cloud_bases, cloud_ends
from orolift.crossing.facts import LARGEST_NONDIMENSIONAL, low_breaking, pressure_differences
from orolift.crossing.pool import chance_of_breaking_through, pool_air
from orolift.crossing.rainfall import BAND_STEPS, LEAST_RAIN, by_height, in_bands
from orolift.crossing.solve import NOTHING
from orolift.crossing.sun import sun_height
from orolift.flow.scales import deformation_radius, rossby_number

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.result import When
    from orolift.crossing.solve import Ground, Solution

    Array = NDArray[np.float64]


def flow_values(
    ground: Ground, solution: Solution, crest_wind: Array, when: When, *, known: bool, freezing: bool
) -> dict[str, Array]:
    """How the air of each member meets the range.

    Parameters
    ----------
    ground : Ground
    solution : Solution
    crest_wind : ndarray (m,) [m s-1]
        Component across the range, crest to 500 m above it.
    when : When
    known : bool
        Whether the air in the lee is known.
    freezing : bool

    Returns
    -------
    dict of str to ndarray (m,)
        Under the names of `orolift.crossing.result.Flow` and `Cloud`, SI, with ``pool_top`` and ``wind_over_pool``;
        ``blocked``, ``wave_breaking`` and ``breaks_through`` 0 to 1.
    """
    blocked = solution.blocking
    each = np.broadcast_shapes(solution.blocked_top.shape, crest_wind.shape)
    through = np.array([pool is None for pool in solution.pools], dtype=np.float64)
    sun = None
    if when.time is not None and when.longitude is not None and when.latitude is not None:
        sun = float(sun_height(when.time, when.longitude, when.latitude))
    critical = solution.streams.flow.critical_level
    chance = through if known else np.array([chance_of_breaking_through(sun, float(wind)) for wind in crest_wind])
    return {
        "stability": np.broadcast_to(blocked.stability, each),
        "nondimensional_height": np.broadcast_to(
            np.minimum(blocked.nondimensional_height, LARGEST_NONDIMENSIONAL), each
        ),
        "dividing_height": np.broadcast_to(blocked.dividing_height, each),
        "blocked_top": solution.blocked_top,
        "blocked": (solution.blocked_top > ground.shape.base + NOTHING).astype(np.float64),
        "going_round_share": solution.going_round,
        "cloud_base": cloud_bases(solution, ground.shape, ground.transect.distance, freezing=freezing),
        "cloud_end": cloud_ends(solution, ground.shape, ground.transect.distance, freezing=freezing),
        "breaks_through": chance,
        "wave_breaking": low_breaking(solution, ground.shape.crest).astype(np.float64),
        "pressure_difference": pressure_differences(ground, solution),
        "critical_level": np.where(np.isfinite(critical), critical, np.nan),
        **_of_pools(solution),
        **_of_rotation(ground, np.broadcast_to(blocked.stability, each), crest_wind, when),
    }


def _of_pools(solution: Solution) -> dict[str, Array]:
    """Cold air that stays in the lee, and the air that passes over it at the downwind end; NaN where none stays."""
    streams = solution.streams
    top = np.array([np.nan if pool is None else pool.top for pool in solution.pools])
    wind = streams.wind[:, 0] * streams.flow.speed_factor[:, 0, streams.place[-1]]
    return {"pool_top": top, "wind_over_pool": np.where(np.isfinite(top), wind, np.nan)}


def _of_rotation(ground: Ground, stability: Array, crest_wind: Array, when: When) -> dict[str, Array]:
    """Scales on which the earth's rotation matters; nothing where the latitude is unknown."""
    if when.latitude is None:
        return {}
    shape, latitude = ground.shape, np.radians(when.latitude)
    return {
        "rossby_number": rossby_number(crest_wind, shape.half_width, latitude),
        "deformation_radius": deformation_radius(stability, shape.crest - shape.base, latitude),
    }


def rain_values(ground: Ground, solution: Solution, incoming: IncomingAir, background: float) -> dict[str, Array]:
    """Water of each member, as `facts.water` and `rainfall.rainfall` give it of one.

    Parameters
    ----------
    ground : Ground
    solution : Solution
    incoming : IncomingAir, fields (m, nz)
    background : float [kg m-2 s-1]

    Returns
    -------
    dict of str to ndarray (m,)
        Under the names of `orolift.crossing.result.Rain` and `Water`, SI; shares, ``lee_band_0`` and so on, and the
        bands of height under `band_name`.
    """
    streams = solution.streams
    x = ground.transect.distance[streams.place]
    step = steps_across(ground, x)[:, np.newaxis]
    rate = streams.falling.landed / step
    landed = streams.falling.landed
    total = landed.sum(axis=0)
    wet = total > 0.0
    share_of = np.where(wet, total, np.nan)
    fell = total + streams.falling.evaporated.sum(axis=0) + streams.falling.beyond
    vapour = np.sum(streams.carried * streams.start.vapour, axis=-1)
    condensed = np.sum(streams.carried * streams.air.condensed.sum(axis=0), axis=-1)
    column = vapour_flux(incoming, ground.normal)
    return {
        "rain_out_share": total / np.where(condensed > 0.0, condensed, np.nan),
        "drying_ratio": total / vapour,
        "drying_ratio_full_column": total / np.where(column > 0.0, column, np.nan),
        "windward_share": landed[x <= ground.shape.crest_distance].sum(axis=0) / share_of,
        "snow_share": streams.falling.landed_snow.sum(axis=0) / share_of,
        "peak_rate": rate.max(axis=0) + background,
        "peak_distance": np.where(wet, x[np.argmax(rate, axis=0)], np.nan),
        "total": total,
        "vapour_in": vapour,
        "condensed": condensed,
        "column_vapour_flux": column,
        "evaporated_share": streams.falling.evaporated.sum(axis=0) / np.where(fell > 0.0, fell, np.nan),
        **{
            f"lee_band_{number}": landed / share_of
            for number, (_, _, landed) in enumerate(in_bands(ground, x, streams.falling.landed))
        },
        **_by_height(
            ground, x, rate + background, streams.falling.landed_snow / steps_across(ground, x)[:, np.newaxis]
        ),
    }


def winter_values(ground: Ground, solution: Solution, background: float) -> dict[str, Array]:
    """Where the rain of each member can do harm on cold ground, as `orolift.rain.winter` judges it of one.

    Parameters
    ----------
    ground : Ground
    solution : Solution
    background : float [kg m-2 s-1]

    Returns
    -------
    dict of str to ndarray (m,)
        ``rain_up_to``, the highest ground on the line on which 0.1 mm/h or more falls as rain [m above sea level], NaN
        without any; ``freezing_rain``, 1 where it falls on the ground of a pool below freezing, else 0.
    """
    streams, shape = solution.streams, ground.shape
    x = ground.transect.distance[streams.place]
    below = np.interp(x, ground.transect.distance, ground.transect.elevation)
    falling = streams.falling
    rain = (falling.landed - falling.landed_snow) / steps_across(ground, x)[:, np.newaxis]
    if background > 0.0:
        lowest = (getattr(streams.air, name)[..., 0] for name in ("pressure", "temperature", "vapour"))
        p, t, v = np.broadcast_arrays(*lowest)
        wet_bulb = wet_bulb_from_mixing_ratio(p, t, np.maximum(v, 1e-8))
        rain = rain + background * (1.0 - snow_share_from_wet_bulb(wet_bulb))
    wet = rain >= LEAST_RAIN
    highest = np.max(np.where(wet, below[:, np.newaxis], -np.inf), axis=0)
    freezes = np.zeros(wet.shape[1])
    for i, pool in enumerate(solution.pools):
        if pool is not None and pool.depth > 0.0:
            under = (x > shape.crest_distance) & (below < pool.top)
            freezes[i] = np.any(under & wet[:, i] & (pool_air(pool, below)[0] < MELTING_POINT))
    return {"rain_up_to": np.where(np.isfinite(highest), highest, np.nan), "freezing_rain": freezes}


def _by_height(ground: Ground, x: Array, rate: Array, snow: Array) -> dict[str, Array]:
    """Rain and snow of each member by side and height of the ground, and the snow of the march in it."""
    shape, line = ground.shape, ground.transect
    below = np.interp(x, line.distance, line.elevation)
    out: dict[str, Array] = {}
    for step in BAND_STEPS:
        for name, values in (("rain", rate), ("snow", snow)):
            means = by_height(x, below, shape.crest_distance, values, step)
            out |= {band_name(name, step, side, number): value for (side, number), value in means.items()}
    return out


def band_name(name: str, step: float, side: str, number: int) -> str:
    """Name of the array of ``rain`` or ``snow`` in a band of height.

    Parameters
    ----------
    name : str
        ``rain`` (with the background) or ``snow`` (of the march, without it).
    step : float [m]
        In `orolift.crossing.rainfall.BAND_STEPS`.
    side : str
        ``windward`` or ``lee``.
    number : int
        As in `orolift.crossing.rainfall.by_height`.

    Examples
    --------
    >>> band_name("rain", 200.0, "lee", 3)
    'rain_lee_200.0_3'
    """
    return f"{name}_{side}_{step:.1f}_{number}"


def steps_across(ground: Ground, x: Array) -> Array:
    """Length along the range normal of the step that ends at each place of the march.

    Parameters
    ----------
    ground : Ground
    x : ndarray (nk,) [m]
        Places along the transect.

    Returns
    -------
    ndarray (nk,) [m]
    """
    return np.diff(x, prepend=x[0] - (x[1] - x[0])) * ground.cosine
