"""One situation worked out for many members at once, each with its own air and options: plain arrays, members first."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.air.column import column_vapour, freezing_level, interpolated, wind_component
from orolift.air.humidity import dew_point_from_mixing_ratio, relative_humidity_from_mixing_ratio
from orolift.air.temperature import potential_temperature
from orolift.crossing.crossing import CREST_LAYER, LEAST_CROSSING_WIND, LEAST_VAPOUR, ground_under
from orolift.crossing.layer_above import differences
from orolift.crossing.lee_wind import lee_wind_arrays, lee_winds
from orolift.crossing.member_values import flow_values, rain_values, steps_across, winter_values
from orolift.crossing.picture import popular_picture, upwind_ground_air
from orolift.crossing.pool import Lee, pool_air
from orolift.crossing.result import Site, WarmingParts, When
from orolift.crossing.settings import Settings, checked, each
from orolift.crossing.sites import Arrived, arrived
from orolift.crossing.solve import NOTHING, OF_MEMBERS, solve
from orolift.crossing.way import way_to
from orolift.crossing.wind import winds_at
from orolift.terrain.features import features

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.situation import Situation
    from orolift.crossing.solve import Ground, Solution

    Array = NDArray[np.float64]

PARTS = tuple(field.name for field in fields(WarmingParts))
"""Parts of the warming, by name."""


@dataclass(frozen=True, eq=False)
class Variation:
    """In what the members of a situation differ.

    Attributes
    ----------
    incoming : IncomingAir, fields (m, nz)
    settings : Settings
        Arrays (m,) or single values.
    lee : tuple of Lee or None
        One for each member; None takes the situation's.
    share : callable or None
        From the shares that went round as each member gives them, (m,), to those that are used.
    heat_factor : ndarray (m,) [1]
        Of the heat from the ground of the lee.
    """

    incoming: IncomingAir
    settings: Settings
    lee: tuple[Lee, ...] | None = None
    share: Callable[[Array], Array] | None = None
    heat_factor: Array | None = None


@dataclass(frozen=True, eq=False)
class Members:
    """What a situation gives in each of its members, SI; NaN where a member has no such value.

    Attributes
    ----------
    crosses : ndarray of bool, (m,)
        Whether the wind component across the range is above 2 m/s; what does not cross has NaN everywhere.
    values : dict of str to ndarray (m,)
        Of the crossing.
    sites : dict of str to ndarray (m, ns)
        Of each site, in the order of the situation.
    """

    crosses: NDArray[np.bool_]
    values: dict[str, Array]
    sites: dict[str, Array]


def members_of(
    situation: Situation,
    variation: Variation,
    *,
    beside: tuple[Site, ...] = (),
    streamlines: int = 60,
    observed_at: float = 0.0,
) -> Members:
    """What a situation gives in each of its members.

    Parameters
    ----------
    situation : Situation
        The line stays where it is: a wind that turns turns against it.
    variation : Variation
    beside : tuple of Site
        More places on the line; unlike the situation's sites they have no say in what its crest is.
    streamlines : int
        How many, 20 or more.
    observed_at : float [m]
        Where on the line the incoming air was observed; times on the way count from there.

    Returns
    -------
    Members

    Raises
    ------
    NoCrossingError, TerrainError, OutOfRangeError
        As `orolift.crossing.crossing.cross`, except that a member with too little wind is no error.

    Notes
    -----
    A member is worked out as `cross` does it, all of them marched together; where
    a root is found by iteration, it is taken a step further when one of the
    others still needs it, so that members agree with crossings of their own to about 1e-4 K and not to rounding.
    """
    solved = solved_members(situation, variation, streamlines=streamlines)
    crosses, ground, when = solved.crosses, solved.ground, solved.when
    values = _of_incoming(variation.incoming) | {"cross_range_wind": solved.crest_wind}
    values = {name: np.where(crosses, value, np.nan) for name, value in values.items()}
    if solved.solution is None or solved.part is None:
        return Members(crosses, values, {})
    solution, part = solved.solution, solved.part
    sites = (*(situation.sites or (Site("Lee foot", ground.shape.lee_foot_distance),)), *beside)
    crest_wind, freezing = solved.crest_wind[crosses], part.settings.freezing
    flow = flow_values(ground, solution, crest_wind, when, known=solved.lee_known, freezing=freezing)
    values |= _filled(flow, crosses)
    winds = lee_winds(ground, solution, crest_wind, flow["pressure_difference"])
    values |= _filled(lee_wind_arrays(winds), crosses)
    values |= _filled(rain_values(ground, solution, part.incoming, situation.background), crosses)
    values |= _filled(winter_values(ground, solution, situation.background), crosses)
    at = [
        _filled(
            _of_site(site, ground, solution, part, when, situation.background)
            | _of_way(site, ground, solution, part, observed_at),
            crosses,
        )
        for site in sites
    ]
    return Members(crosses, values, {name: np.stack([one[name] for one in at], axis=-1) for name in at[0]})


@dataclass(frozen=True, eq=False)
class SolvedMembers:
    """The flow of members over one ground.

    Attributes
    ----------
    crosses : ndarray of bool, (m,)
        Whether the wind component across the range is above 2 m/s.
    crest_wind : ndarray (m,) [m s-1]
        That component.
    ground : Ground
    when : When
    lee_known : bool
        Whether the case says what lies in the lee.
    part : Variation or None
        Those that cross; None without any.
    solution : Solution or None
        Of those.
    """

    crosses: NDArray[np.bool_]
    crest_wind: Array
    ground: Ground
    when: When
    lee_known: bool
    part: Variation | None
    solution: Solution | None


def solved_members(situation: Situation, variation: Variation, *, streamlines: int = 60) -> SolvedMembers:
    """The flow of members of a situation, all marched together.

    Parameters
    ----------
    situation : Situation
    variation : Variation
    streamlines : int

    Returns
    -------
    SolvedMembers

    Raises
    ------
    NoCrossingError, TerrainError, OutOfRangeError
        As `members_of`.
    """
    settings, when = checked(variation.settings), situation.when or When()
    ground = _ground(situation)
    shape = ground.shape
    crest_wind = _crest_wind(ground, variation.incoming)
    crosses = crest_wind > LEAST_CROSSING_WIND
    if not crosses.any():
        return SolvedMembers(crosses, crest_wind, ground, when, lee_known=False, part=None, solution=None)
    part = _taken(variation, settings, crosses)
    lee = situation.lee or Lee() if part.lee is None else part.lee
    solution = solve(ground, part.incoming, part.settings, lee, members=int(crosses.sum()), streamlines=streamlines)
    if part.share is not None:
        blocked = solution.blocked_top > shape.base + NOTHING
        solution.going_round[:] = np.where(blocked, part.share(solution.going_round), 0.0)
    known = (lee if isinstance(lee, Lee) else lee[0]).known
    return SolvedMembers(crosses, crest_wind, ground, when, lee_known=known, part=part, solution=solution)


def crossing_members(situation: Situation, incoming: IncomingAir) -> NDArray[np.bool_]:
    """Which members cross, without working them out.

    Parameters
    ----------
    situation : Situation
    incoming : IncomingAir, fields (m, nz)

    Returns
    -------
    ndarray of bool, (m,)
        As `Members.crosses`.

    Raises
    ------
    TerrainError, OutOfRangeError
        As `members_of`.
    """
    return _crest_wind(_ground(situation), incoming) > LEAST_CROSSING_WIND


def _ground(situation: Situation) -> Ground:
    """What the air of all members crosses."""
    sites = situation.sites
    return ground_under(
        situation.transect,
        features(situation.transect, sites[0].distance if sites else None),
        situation.incoming,
        situation.normal,
        situation.when or When(),
        lowest_pass=situation.lowest_pass,
        crest_line=situation.crest_line,
        stagnant_top=situation.stagnant_top,
    )


def _crest_wind(ground: Ground, incoming: IncomingAir) -> Array:
    """Wind component across the range from the crest to 500 m above it, (m,)."""
    heights = np.linspace(ground.shape.crest, ground.shape.crest + CREST_LAYER, 21)
    return np.asarray(np.mean(wind_component(interpolated(incoming, heights), ground.normal), axis=-1))


def _taken(variation: Variation, settings: Settings, rows: NDArray[np.bool_]) -> Variation:
    """Some of the members."""

    def some(value: Any) -> Any:
        return value[rows] if isinstance(value, np.ndarray) and value.ndim and value.shape[0] == rows.size else value

    air = variation.incoming
    return Variation(
        incoming=replace(air, **{name: getattr(air, name)[rows] for name in OF_MEMBERS}),
        settings=replace(settings, **{one.name: some(getattr(settings, one.name)) for one in fields(Settings)}),
        lee=None
        if variation.lee is None
        else tuple(one for one, kept in zip(variation.lee, rows, strict=True) if kept),
        share=None if variation.share is None else (lambda found: _on_rows(variation.share, found, rows)),
        heat_factor=None if variation.heat_factor is None else variation.heat_factor[rows],
    )


def _on_rows(change: Callable[[Array], Array] | None, found: Array, rows: NDArray[np.bool_]) -> Array:
    """A change of all members done on some of them."""
    whole = np.zeros(rows.size)
    whole[rows] = found
    return found if change is None else change(whole)[rows]


def _filled(found: dict[str, Array], rows: NDArray[np.bool_]) -> dict[str, Array]:
    """Values of some members among NaN for the others."""
    out = {}
    for name, value in found.items():
        out[name] = np.full(rows.size, np.nan)
        out[name][rows] = value
    return out


def _of_incoming(air: IncomingAir) -> dict[str, Array]:
    """The air before the range."""
    p, t, v = air.pressure[:, 0], air.temperature[:, 0], air.vapour[:, 0]
    level = freezing_level(air)
    return {
        "pressure": p,
        "temperature": t,
        "dew_point": _dew_point(p, v),
        "relative_humidity": relative_humidity_from_mixing_ratio(p, t, v),
        "wind": np.hypot(air.eastward_wind[:, 0], air.northward_wind[:, 0]),
        "freezing_level": np.where(level > air.height[0], level, np.nan),
        "column_vapour": column_vapour(air),
    }


def _of_site(
    site: Site, ground: Ground, solution: Solution, variation: Variation, when: When, background: float
) -> dict[str, Array]:
    """The air of each member at a site, as `sites.site_air` gives it of one."""
    settings, incoming = variation.settings, variation.incoming
    place = arrived(site, ground, incoming, solution, settings, when, heat_factor=variation.heat_factor)
    upwind = interpolated(incoming, np.array([place.elevation, ground.shape.crest]))
    p_up, t_up = upwind.pressure[:, 0], upwind.temperature[:, 0]
    blocked = (place.elevation < solution.blocked_top) & (place.side == "windward")
    p = np.where(blocked, p_up, place.pressure)
    t = np.where(blocked, t_up, place.came.air.temperature)
    v = np.where(blocked, upwind.vapour[:, 0], place.came.air.vapour)
    pooled = _in_pools(place, solution, t, v)
    gone = pooled | blocked
    wind = winds_at(place.here, settings.roughness)
    above = differences(place, incoming, solution, t, place.came.warming.surface_heating)
    nothing = np.where(pooled, np.nan, np.where(blocked, 0.0, 1.0))
    level = np.where(blocked[:, np.newaxis], place.elevation, place.came.source_level)
    level[pooled] = np.nan
    picture = popular_picture(upwind_ground_air(incoming), upwind.pressure[:, 1], p_up, freezing=settings.freezing)
    x = ground.transect.distance[solution.streams.place]
    rate = solution.streams.falling.landed / steps_across(ground, x)[:, np.newaxis]
    after = int(np.clip(np.searchsorted(x, site.distance), 1, x.size - 1))
    way = float(np.clip((site.distance - x[after - 1]) / (x[after] - x[after - 1]), 0.0, 1.0))
    return {
        "pressure": p,
        "temperature": t,
        "mixing_ratio": v,
        "dew_point": _dew_point(p, v),
        "relative_humidity": relative_humidity_from_mixing_ratio(p, t, v),
        "wind": np.where(gone, np.nan, wind.mean),
        "wind_10m": np.where(gone, np.nan, wind.at_10m),
        "gust": np.where(gone, np.nan, 0.5 * (wind.gust_low + wind.gust_high)),
        "source_level_low": level[:, 0],
        "source_level": level[:, 1],
        "source_level_high": level[:, 2],
        "upwind_temperature": t_up,
        "upwind_dew_point": _dew_point(p_up, upwind.vapour[:, 0]),
        "warming": t - t_up,
        "potential_beside": potential_temperature(p_up, t_up),
        "potential_crest": potential_temperature(upwind.pressure[:, 1], upwind.temperature[:, 1]),
        "humidity_beside": relative_humidity_from_mixing_ratio(p_up, t_up, upwind.vapour[:, 0]),
        "kept_off": np.array([pool is not None for pool in solution.pools], dtype=np.float64),
        **{f"warming_{name}": nothing * getattr(place.came.warming, name) for name in PARTS},
        **{name: np.where(gone, np.nan, value) for name, value in above.items()},
        "popular_picture": picture.temperature,
        "descent_only": t_up + nothing * place.came.warming.descent,
        "went_round": np.where(pooled, 0.0, place.came.went_round),
        "in_pool": pooled.astype(np.float64),
        "cloudy": (~gone & (place.came.air.cloud > 0.0)).astype(np.float64),
        "rain": (1.0 - way) * rate[after - 1] + way * rate[after] + background,
    }


def _of_way(
    site: Site, ground: Ground, solution: Solution, variation: Variation, observed_at: float
) -> dict[str, Array]:
    """Time the air of each member takes to a site, as `site_state.travel_to` gives it of one."""
    streams = solution.streams
    mean, _ = way_to(
        ground.transect.distance[streams.place],
        streams.flow.heights[..., streams.place],
        streams.wind[..., np.newaxis] * streams.flow.speed_factor[..., streams.place],
        site.distance,
        start=observed_at,
        depth=each(variation.settings.mixing_depth, solution.blocked_top.size),
        cosine=ground.cosine,
    )
    return {"way": np.broadcast_to(mean, solution.blocked_top.shape)}


def _in_pools(place: Arrived, solution: Solution, t: Array, v: Array) -> NDArray[np.bool_]:
    """Members in which a site lies in cold air that stays; its values are put in."""
    pooled = np.zeros(t.size, dtype=bool)
    for i, pool in enumerate(solution.pools):
        if pool is None or place.side != "lee":
            continue
        if place.elevation < min(pool.top, float(place.here.height[i, 0])):
            pooled[i] = True
            t[i], v[i] = (float(x) for x in pool_air(pool, place.elevation))
    return pooled


def _dew_point(pressure: Array, vapour: Array) -> Array:
    return np.asarray(dew_point_from_mixing_ratio(pressure, np.maximum(vapour, LEAST_VAPOUR)))
