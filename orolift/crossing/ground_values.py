"""The air near the ground all along a line, at several heights for the valleys and summits beside it."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.air.parcel import Parcel, enthalpy, entropy, equilibrium_from_enthalpy, equilibrium_from_entropy
from orolift.constants import REFERENCE_PRESSURE
from orolift.crossing.arrival import SAMPLES, Here, frozen_temperature, lee_profile, pressure_at, sampled, with_ground
from orolift.crossing.cloud import HIGHEST_CLOUD
from orolift.crossing.crossing import crest_component, ground_under
from orolift.crossing.facts import pressure_differences
from orolift.crossing.heat import ground_change, surface_heat
from orolift.crossing.lee_wind import lee_winds
from orolift.crossing.members import solved_members
from orolift.crossing.picture import CREST_BAND
from orolift.crossing.pool import Lee, pool_air
from orolift.crossing.result import When
from orolift.crossing.settings import Settings, checked, each
from orolift.crossing.sites import PROFILE
from orolift.crossing.solve import OF_MEMBERS, solve
from orolift.crossing.way import cloud_water, cover_on_the_way
from orolift.crossing.wind import NEAR_GROUND
from orolift.flow.surface_wind import wind_near_ground
from orolift.terrain.features import features

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.members import Variation
    from orolift.crossing.situation import Situation
    from orolift.crossing.solve import Ground, Solution

    Array = NDArray[np.float64]

LEVELS = (-1500.0, -700.0, -300.0, 0.0, 60.0, 120.0, 200.0, 300.0, 400.0, 550.0, 700.0, 900.0, 1200.0, 1500.0)
"""Heights over the line's own ground [m] at which its air is worked out; close where it is stable."""
LEAST_WIND = 0.1
"""Lee wind [m s-1] below which a range in proportion would mean nothing; as at sites."""


@dataclass(frozen=True, eq=False)
class GroundValues:
    """Air near the ground along a line. Places (n,) along it, levels (q,).

    Attributes
    ----------
    distance : ndarray (n,) [m]
        From the upwind end of the transect.
    ground : ndarray (n,) [m above sea level]
        Of the line, a mean across its swath.
    level : ndarray (q,) [m]
        Heights over that ground.
    temperature, vapour, pressure : ndarray (n, q) [K], [kg per kg of dry air], [Pa]
        Of the air that a site at that height has where the crossing air reaches it.
    wind, wind_10m : ndarray (n,) [m s-1]
        Across the range: mean over the lowest 300 m of crossing air, and at 10 m.
    cloud_base : ndarray (n,) [m above sea level]
        Of the lowest cloud; infinite without any.
    cloud_water : ndarray (n,) [kg m-2]
        All cloud water over the place.
    lowest : ndarray (n,) [m above sea level]
        Lowest streamline.
    crest, crest_distance, base, blocked_top : float [m]
    band : float [m]
        From the crest to where its lee begins, and its windward side ends.
    wind_low, wind_high : float [1]
        Range of the methods of the lee wind, as shares of `wind`: at most 1, and at least 1; 1 where nobody asked.
    pool_top : float or None [m above sea level]
        Of cold air that stays in the lee.
    pool_temperature, pool_vapour : ndarray (n, q), or None
        Of that air at the heights of the levels.
    """

    distance: Array
    ground: Array
    level: Array
    temperature: Array
    vapour: Array
    pressure: Array
    wind: Array
    wind_10m: Array
    cloud_base: Array
    cloud_water: Array
    lowest: Array
    crest: float
    crest_distance: float
    base: float
    blocked_top: float
    band: float
    wind_low: float
    wind_high: float
    pool_top: float | None
    pool_temperature: Array | None
    pool_vapour: Array | None


def ground_values(
    situation: Situation, *, levels: tuple[float, ...] = LEVELS, streamlines: int = 60, methods: bool = False
) -> GroundValues:
    """Air near the ground all along the line of a situation.

    Parameters
    ----------
    situation : Situation
        Its first site says which crest counts.
    levels : tuple of float [m]
        Heights over the ground of the line.
    streamlines : int
    methods : bool
        Whether the range of the methods of the lee wind is worked out, a tenth of the work.

    Returns
    -------
    GroundValues

    Raises
    ------
    NoCrossingError, TerrainError, OutOfRangeError
        As `orolift.crossing.crossing.cross`.

    Notes
    -----
    The air of `orolift.crossing.sites.site_air` at every place of the march and every level at once: the same
    mixing over the lowest layer, the same air that went round, heat from the ground and move to the lee pressure. Only
    the answer is worked out, not its ends and not its budget.
    """
    settings, when, lee = (
        checked(situation.settings or Settings()),
        situation.when or When(),
        situation.lee or Lee(),
    )
    line, incoming = situation.transect, situation.incoming
    shape = features(line, situation.sites[0].distance if situation.sites else None)
    ground = ground_under(
        line,
        shape,
        incoming,
        situation.normal,
        when,
        lowest_pass=situation.lowest_pass,
        crest_line=situation.crest_line,
        stagnant_top=situation.stagnant_top,
    )
    crest_wind = crest_component(incoming, ground.normal, shape.crest)
    solution = solve(ground, incoming, settings, lee, members=1, streamlines=streamlines)
    shares = 1.0, 1.0
    if methods:
        (winds,) = lee_winds(ground, solution, [crest_wind], pressure_differences(ground, solution), members=1)
        strongest = max(winds.strongest, LEAST_WIND)
        shares = min(winds.low / strongest, 1.0), max(winds.high / strongest, 1.0)
    one = _Member(incoming, ground, solution, settings, when, 0, None)
    return _values(one, np.array(levels), solution.streams.place, shares)


def ground_values_of_members(
    situation: Situation,
    variation: Variation,
    *,
    levels: tuple[float, ...] = LEVELS,
    every: int = 1,
    streamlines: int = 60,
) -> tuple[GroundValues | None, ...]:
    """Air near the ground all along the line of a situation, in each of its members.

    Parameters
    ----------
    situation : Situation
    variation : Variation
    levels : tuple of float [m]
    every : int
        Of the places of the march one in so many is worked out.
    streamlines : int

    Returns
    -------
    tuple of (GroundValues or None), (m,)
        None for a member whose wind component across the range is 2 m/s or less. The range of the methods of the lee
        wind is left at 1.

    Raises
    ------
    NoCrossingError, TerrainError, OutOfRangeError
        As `orolift.crossing.members.members_of`.
    """
    solved = solved_members(situation, variation, streamlines=streamlines)
    out: list[GroundValues | None] = [None] * solved.crosses.size
    if solved.solution is None or solved.part is None:
        return tuple(out)
    part, place = solved.part, solved.solution.streams.place[::every]
    for i, number in enumerate(np.flatnonzero(solved.crosses)):
        factor = None if part.heat_factor is None else float(part.heat_factor[i])
        air = replace(part.incoming, **{name: getattr(part.incoming, name)[i] for name in OF_MEMBERS})
        one = _Member(air, solved.ground, solved.solution, part.settings, solved.when, i, factor)
        out[number] = _values(one, np.array(levels), place, (1.0, 1.0), every)
    return tuple(out)


@dataclass(frozen=True, eq=False)
class _Member:
    """One member of a solution, with its own air; `number` counts in the solution."""

    incoming: IncomingAir
    ground: Ground
    solution: Solution
    settings: Settings
    when: When
    number: int
    heat_factor: float | None

    @property
    def blocked_top(self) -> float:
        return float(self.solution.blocked_top[self.number])

    @property
    def going_round(self) -> float:
        return float(self.solution.going_round[self.number])

    @property
    def mixing_depth(self) -> float:
        return float(each(self.settings.mixing_depth, self.solution.blocked_top.size)[self.number])


def _values(
    one: _Member, level: Array, place: NDArray[np.intp], shares: tuple[float, float], every: int = 1
) -> GroundValues:
    """Air near the ground of one member at places of its march, every so many of them."""
    ground, solution, shape = one.ground, one.solution, one.ground.shape
    here = _here(solution, one.number, every)
    distance, own = ground.transect.distance[place], ground.transect.elevation[place]
    height = own[:, np.newaxis] + level
    band = CREST_BAND * shape.half_width
    is_lee = distance - shape.crest_distance > band
    change = _ground_changes(one, distance, own, level, here, is_lee)
    air = _arriving(one, here, height, is_lee, change)
    pool = solution.pools[one.number]
    still = (None, None) if pool is None else pool_air(pool, height)
    wind = np.mean(sampled(here.height, here.wind, here.height[:, :1] + np.linspace(0.0, NEAR_GROUND, 7)), axis=1)
    base, water = _clouds(here)
    return GroundValues(
        distance=distance,
        ground=own,
        level=level,
        temperature=air.temperature,
        vapour=air.vapour,
        pressure=air.pressure,
        wind=wind,
        wind_10m=np.asarray(wind_near_ground(wind, 0.5 * NEAR_GROUND, roughness=one.settings.roughness)),
        cloud_base=base,
        cloud_water=water,
        lowest=here.height[:, 0],
        crest=shape.crest,
        crest_distance=shape.crest_distance,
        base=shape.base,
        blocked_top=one.blocked_top,
        band=band,
        wind_low=shares[0],
        wind_high=shares[1],
        pool_top=None if pool is None else pool.top,
        pool_temperature=still[0],
        pool_vapour=still[1],
    )


def _here(solution: Solution, number: int, every: int) -> Here:
    """Streamlines of a member over places of the march, the places in the place of members."""
    streams, air = solution.streams, solution.streams.air
    flow, place = streams.flow, streams.place[::every]
    names = ("pressure", "entropy", "temperature", "vapour", "cloud")
    of_one = {key: np.broadcast_to(getattr(air, key), air.pressure.shape)[::every, number, :] for key in names}
    return Here(
        share=0.0,
        number=0,
        height=flow.heights[number][:, place].T,
        start_height=np.broadcast_to(flow.start_heights[number], of_one["pressure"].shape),
        wind=(streams.wind[number][:, np.newaxis] * flow.speed_factor[number][:, place]).T,
        **of_one,
    )


def _ground_changes(
    one: _Member, distance: Array, own: Array, level: Array, here: Here, is_lee: NDArray[np.bool_]
) -> tuple[Array, Array]:
    """Warming and moistening by the ground over the mixing depth, (n, q), as sites at these levels have it; else 0."""
    solution, settings, when = one.solution, one.settings, one.when
    out = np.zeros((2, own.size, level.size))
    known = when.time is not None and when.longitude is not None and when.latitude is not None
    if not (settings.surface_heat and known and is_lee.any()):
        return out[0], out[1]
    places = int(is_lee.sum())
    rows = Here(here.share, here.number, *(getattr(here, f.name)[is_lee] for f in fields(Here)[2:]))
    # the profiles over the levels of a place have most of their heights in common: each is worked out once
    above, where = np.unique((level[:, np.newaxis] + PROFILE).ravel(), return_inverse=True)
    air = lee_profile(
        one.incoming,
        rows,
        own[is_lee][:, np.newaxis] + above,
        blocked_top=np.full(places, one.blocked_top),
        going_round=np.full(places, one.going_round),
        freezing=settings.freezing,
    )
    pressure, temperature, vapour = (
        values[:, where].reshape(places, level.size, -1) for values in (air.pressure, air.temperature, air.vapour)
    )
    this = slice(one.number, one.number + 1)
    times, cloudy = solution.travel_times[this], solution.overcast[this]
    way = np.interp(distance[is_lee], one.ground.transect.distance, times[0])
    cover = cover_on_the_way(times[:, solution.streams.place], cloudy, way[np.newaxis])[0] if cloudy.any() else None
    heat = surface_heat(
        float(when.time or 0.0),
        float(when.longitude or 0.0),
        float(when.latitude or 0.0),
        way[:, np.newaxis],
        temperature[..., 0],
        pressure[..., 0],
        cover=None if cover is None else cover[:, np.newaxis],
    )
    heat = heat if one.heat_factor is None else heat.times(one.heat_factor)
    change = ground_change(heat, PROFILE, pressure, temperature, vapour)
    inside = one.mixing_depth * (np.arange(SAMPLES) + 0.5) / SAMPLES
    weight = np.array([np.interp(inside, PROFILE, row).mean() for row in np.eye(PROFILE.size)])
    out[:, is_lee] = change.temperature @ weight, change.vapour @ weight
    return out[0], out[1]


def _arriving(
    one: _Member, here: Here, elevation: Array, is_lee: NDArray[np.bool_], change: tuple[Array, Array]
) -> Parcel:
    """Air of sites at elevations (n, q), as `orolift.crossing.arrival.arrival` mixes it."""
    places, levels = elevation.shape
    incoming, depth = one.incoming, one.mixing_depth
    offset = depth * (np.arange(SAMPLES) + 0.5) / SAMPLES
    bottom = np.maximum(here.height[:, :1], elevation)
    height = (bottom[:, :, np.newaxis] + offset).reshape(places, -1)
    own = elevation[:, :, np.newaxis] + offset

    def spread_out(values: Array) -> Array:
        return values.reshape(places, levels, SAMPLES)

    upwind = interpolated(incoming, elevation.ravel())
    target = upwind.pressure.reshape(places, levels, 1)
    reference = np.full_like(here.pressure, REFERENCE_PRESSURE)
    potential = frozen_temperature(here.pressure, here.temperature, here.vapour, here.cloud, reference)
    vapour, cloud, potential = (
        spread_out(sampled(here.height, values, height)) for values in (here.vapour, here.cloud, potential)
    )
    arrived = frozen_temperature(np.full_like(potential, REFERENCE_PRESSURE), potential, vapour, cloud, target)
    weight = spread_out(np.asarray(pressure_at(here, height)))
    weight = weight / weight.sum(axis=-1, keepdims=True)
    going = np.where(is_lee, one.going_round, 0.0)[:, np.newaxis, np.newaxis]
    share = np.where(own < one.blocked_top, going, 0.0)
    low = interpolated(incoming, own.ravel())
    low_p, low_t, low_v, low_c = (
        np.broadcast_to(values, own.size).reshape(own.shape)
        for values in (low.pressure, low.temperature, low.vapour, low.cloud)
    )
    low_t = frozen_temperature(low_p, low_t, low_v, low_c, target)
    p = np.broadcast_to(target, own.shape)
    freezing = one.settings.freezing
    crossing_heat = enthalpy(Parcel(p, arrived, vapour, cloud), freezing=freezing)
    low_heat = enthalpy(Parcel(p, low_t, low_v, low_c), freezing=freezing)
    heat = np.sum(weight * ((1.0 - share) * crossing_heat + share * low_heat), axis=-1)
    water = np.sum(weight * ((1.0 - share) * (vapour + cloud) + share * (low_v + low_c)), axis=-1)
    mixed = equilibrium_from_enthalpy(target[:, :, 0], heat, water, freezing=freezing)
    heated = with_ground(mixed, *change, freezing=freezing)
    water = heated.vapour + heated.cloud
    lee_pressure = np.asarray(pressure_at(here, elevation))
    return equilibrium_from_entropy(lee_pressure, entropy(heated, freezing=freezing), water, freezing=freezing)


def _clouds(here: Here) -> tuple[Array, Array]:
    """Height of the lowest cloud over each place, infinite without any, and the water of all cloud [kg m-2]."""
    cloudy = (here.cloud > LEAST_CLOUD) & (here.pressure >= HIGHEST_CLOUD)
    first = np.argmax(cloudy, axis=1)
    base = np.where(cloudy.any(axis=1), here.height[np.arange(first.size), first], np.inf)
    return base, cloud_water(here.pressure, here.cloud)


LEAST_CLOUD = 1e-6
"""Cloud water [kg per kg] from which on there is cloud: far below what can be seen; a judgement."""
