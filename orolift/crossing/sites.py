"""The air at a site: what arrives, the pool it may lie in, the blocked air before the range."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.air.humidity import dew_point_from_mixing_ratio, relative_humidity_from_mixing_ratio
from orolift.crossing.arrival import SAMPLES, Arrival, Here, arrival, lee_profile, over, pressure_at
from orolift.crossing.heat import GroundChange, SurfaceHeat, ground_change, surface_heat
from orolift.crossing.picture import popular_picture, side_of, upwind_ground_air
from orolift.crossing.pool import pool_air
from orolift.crossing.result import LeeAir, LeeProfile, SimpleAir, WarmingParts
from orolift.crossing.settings import each
from orolift.crossing.way import cover_on_the_way
from orolift.crossing.wind import site_wind
from orolift.flow.profiles import value_at
from orolift.terrain.transect import transect_elevation

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.lee_wind import LeeWinds
    from orolift.crossing.result import Side, Site, When
    from orolift.crossing.settings import Settings
    from orolift.crossing.solve import Ground, Solution
    from orolift.crossing.wind import SiteWind

    Array = NDArray[np.float64]

PROFILE = np.concatenate([np.arange(0.0, 500.0, 50.0), np.arange(500.0, 3001.0, 100.0)])
"""Heights above ground [m] of the lee profile."""


def site_air(
    site: Site,
    ground: Ground,
    incoming: IncomingAir,
    solution: Solution,
    settings: Settings,
    when: When,
    winds: LeeWinds,
) -> LeeAir:
    """The air at a site.

    Parameters
    ----------
    site : Site
    ground : Ground
    incoming : IncomingAir
    solution : Solution
        Three members: the answer, no blocking, full blocking.
    settings : Settings
    when : When
    winds : LeeWinds

    Returns
    -------
    LeeAir
    """
    found = arrived(site, ground, incoming, solution, settings, when)
    wind = site_wind(found.here, winds, settings.roughness)
    profile = _profile(incoming, found, solution, freezing=settings.freezing)
    return _put_together(found, incoming, solution, profile, wind, crest=ground.shape.crest, freezing=settings.freezing)


@dataclass(frozen=True, eq=False)
class Arrived:
    """What reaches a site in every member, before a pool or blocked air there takes its place.

    Attributes
    ----------
    name : str
    side : 'windward', 'crest' or 'lee'
    distance, elevation : float [m]
    here : Here
        Streamlines over it.
    pressure : ndarray (m,) [Pa]
        At the site.
    round_share : ndarray (m,) [1]
        Of the low air that went round; 0 but in the lee.
    ground : GroundChange or None, fields (m, n)
        What the ground changes at the heights of `PROFILE`.
    came : Arrival
    """

    name: str
    side: Side
    distance: float
    elevation: float
    here: Here
    pressure: Array
    round_share: Array
    ground: GroundChange | None
    came: Arrival


def arrived(
    site: Site,
    ground: Ground,
    incoming: IncomingAir,
    solution: Solution,
    settings: Settings,
    when: When,
    *,
    heat_factor: Array | None = None,
) -> Arrived:
    """What reaches a site.

    Parameters
    ----------
    site : Site
    ground : Ground
    incoming : IncomingAir, fields (m, nz) or (nz,)
    solution : Solution
    settings : Settings
    when : When
    heat_factor : ndarray (m,), optional [1]
        Of the heat from the ground, each member by its own travel time; without
        it all members take the heat of the first.

    Returns
    -------
    Arrived
    """
    shape, line = ground.shape, ground.transect
    elevation = float(transect_elevation(line, site.distance)) if site.elevation is None else site.elevation
    side = side_of(site.distance, shape)
    here = over(solution.streams, line.distance, site.distance)
    members = solution.blocked_top.size
    round_share = solution.going_round if side == "lee" else np.zeros(members)
    depth = each(settings.mixing_depth, members)
    change = None
    if side == "lee":
        change = _ground_change(
            site, ground, incoming, solution, settings, when, (here, elevation, round_share), heat_factor
        )
    warming, moistening = (_over_depth(values, depth) for values in _both(change, members))
    came = arrival(
        incoming,
        solution.streams,
        here,
        elevation,
        depth=depth,
        blocked_top=solution.blocked_top,
        going_round=round_share,
        heating=warming,
        moistening=moistening,
        freezing=settings.freezing,
    )
    return Arrived(
        name=site.name,
        side=side,
        distance=site.distance,
        elevation=elevation,
        here=here,
        pressure=pressure_at(here, np.full((here.height.shape[0], 1), elevation))[:, 0],
        round_share=round_share,
        ground=change,
        came=came,
    )


def _ground_change(
    site: Site,
    ground: Ground,
    incoming: IncomingAir,
    solution: Solution,
    settings: Settings,
    when: When,
    place: tuple[Here, float, Array],
    factor: Array | None,
) -> GroundChange | None:
    """What the ground changes over a site, (m, n); None where time or place is unknown or it is switched off."""
    if not settings.surface_heat or when.time is None or when.longitude is None or when.latitude is None:
        return None
    here, elevation, round_share = place
    members = solution.blocked_top.size
    air = lee_profile(
        incoming,
        here,
        np.broadcast_to(elevation + PROFILE, (members, PROFILE.size)),
        blocked_top=solution.blocked_top,
        going_round=round_share,
        freezing=settings.freezing,
    )
    times, line = solution.travel_times, ground.transect
    travel = times[:, max(int(np.searchsorted(line.distance, site.distance, side="right")) - 1, 0)]
    cloudy = solution.overcast
    cover = cover_on_the_way(times[:, solution.streams.place], cloudy, travel) if cloudy.any() else None
    low = air.temperature[:, 0], air.pressure[:, 0]
    heat = surface_heat(when.time, when.longitude, when.latitude, travel, *low, cover=cover)
    if factor is None:
        heat = SurfaceHeat(*(np.full(members, getattr(heat, field.name)[0]) for field in fields(SurfaceHeat)))
    else:
        heat = heat.times(factor)
    return ground_change(heat, PROFILE, air.pressure, air.temperature, air.vapour)


def _both(change: GroundChange | None, members: int) -> tuple[Array, Array]:
    """Changes of temperature and vapour, (m, n); none without the ground."""
    if change is None:
        return np.zeros((members, PROFILE.size)), np.zeros((members, PROFILE.size))
    return change.temperature, change.vapour


def _over_depth(values: Array, depth: Array) -> Array:
    """Mean of values (m, n) given at `PROFILE` over the mixing depth, (m,)."""
    inside = depth[:, np.newaxis] * (np.arange(SAMPLES) + 0.5) / SAMPLES
    return np.asarray(np.mean(value_at(PROFILE, values, inside), axis=-1))


def _profile(
    incoming: IncomingAir,
    found: Arrived,
    solution: Solution,
    *,
    freezing: bool,
) -> LeeProfile:
    """Air over the site up to 3 km, the pool's below its top."""
    members = solution.blocked_top.size
    here = found.here
    height = np.broadcast_to(found.elevation + PROFILE, (members, PROFILE.size))
    warming, moistening = _both(found.ground, members)
    air = lee_profile(
        incoming,
        here,
        height,
        blocked_top=solution.blocked_top,
        going_round=found.round_share,
        heating=warming,
        moistening=moistening,
        freezing=freezing,
    )
    t, v = air.temperature[0].copy(), air.vapour[0].copy()
    pool = solution.pools[0]
    if pool is not None:
        inside = (height[0] < pool.top) & (height[0] < here.height[0, 0])
        t[inside], v[inside] = (x[inside] for x in pool_air(pool, height[0]))
    wind = np.maximum(np.interp(height[0], here.height[0], here.wind[0]), 0.0)
    return LeeProfile(PROFILE, t, v, wind, warming[0])


def _put_together(
    place: Arrived,
    incoming: IncomingAir,
    solution: Solution,
    profile: LeeProfile,
    wind: SiteWind,
    *,
    crest: float,
    freezing: bool,
) -> LeeAir:
    """The answer at a site out of its members, or the pool's or the blocked air where it lies in that."""
    here, came = place.here, place.came
    upwind = interpolated(incoming, np.array([place.elevation, crest]))
    pool = solution.pools[0]
    in_pool = pool is not None and place.side == "lee" and place.elevation < min(pool.top, float(here.height[0, 0]))
    blocked = place.side == "windward" and place.elevation < float(solution.blocked_top[0])
    pressure = float(place.pressure[0])
    t, v = float(came.air.temperature[0]), float(came.air.vapour[0])
    if in_pool and pool is not None:
        t, v = (float(x) for x in pool_air(pool, place.elevation))
    elif blocked:
        pressure, t, v = (float(x[0]) for x in (upwind.pressure, upwind.temperature, upwind.vapour))
    p_up, t_up, v_up = (float(x[0]) for x in (upwind.pressure, upwind.temperature, upwind.vapour))
    parts = None if in_pool else _parts(came, nothing=blocked)
    level = np.full(3, place.elevation) if blocked else came.source_level[0]
    picture = popular_picture(upwind_ground_air(incoming), float(upwind.pressure[1]), p_up, freezing=freezing)
    return LeeAir(
        name=place.name,
        side=place.side,
        distance=place.distance,
        elevation=place.elevation,
        pressure=pressure,
        temperature=t,
        dew_point=_dew_point(pressure, v),
        relative_humidity=float(relative_humidity_from_mixing_ratio(pressure, t, v)),
        mixing_ratio=v,
        upwind_temperature=t_up,
        upwind_dew_point=_dew_point(p_up, v_up),
        in_pool=in_pool,
        in_blocked_air=blocked,
        source_level=None if in_pool else float(level[1]),
        source_level_low=None if in_pool else float(level[0]),
        source_level_high=None if in_pool else float(level[2]),
        went_round=0.0 if in_pool else float(came.went_round[0]),
        parts=parts,
        popular_picture=float(picture.temperature),
        descent_only=None if in_pool else t_up + (0.0 if blocked else float(came.warming.descent[0])),
        no_blocking=_simple(came, 1),
        full_blocking=_simple(came, 2),
        wind=None if in_pool or blocked else wind,
        profile=_calm_below(profile, place.elevation, float(here.height[0, 0])) if in_pool or blocked else profile,
    )


def _calm_below(profile: LeeProfile, elevation: float, lowest: float) -> LeeProfile:
    """A profile without wind below the lowest crossing air."""
    calm = elevation + profile.height_above_ground < lowest
    return replace(profile, wind=np.where(calm, 0.0, profile.wind))


def _dew_point(pressure: float, vapour: float) -> float:
    return float(dew_point_from_mixing_ratio(pressure, max(vapour, LEAST_VAPOUR)))


LEAST_VAPOUR = 1e-8
"""Vapour [kg per kg] below which a dew point is that of this much."""


def _parts(came: Arrival, *, nothing: bool) -> WarmingParts:
    names = [field.name for field in fields(WarmingParts)]
    return WarmingParts(**{name: 0.0 if nothing else float(getattr(came.warming, name)[0]) for name in names})


def _simple(came: Arrival, member: int) -> SimpleAir:
    air = came.air
    member = min(member, air.temperature.size - 1)  # one member stands for all where nothing is blocked
    dew_point = _dew_point(float(air.pressure[member]), float(air.vapour[member]))
    return SimpleAir(float(air.temperature[member]), dew_point)
