"""A crossing worked out for several members at once: column, blocking, streamlines, pool."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.crossing.arrival import frozen_temperature, over, pressure_at
from orolift.crossing.pool import Lee, Pool, pool_under
from orolift.crossing.settings import DEFAULT_GOING_ROUND, Settings, each
from orolift.crossing.streams import PASSES, Streams, streams
from orolift.crossing.upwind import ROOM_BELOW_CREST, Blocking, Upwind, blocking, upwind_column
from orolift.crossing.way import overcast, travel_times
from orolift.flow.gaps import gap_share, gap_share_from_pass, reach_along_crest
from orolift.flow.scales import deformation_radius

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.terrain.features import Features
    from orolift.terrain.transect import Transect

    Array = NDArray[np.float64]

OF_MEMBERS = ("pressure", "temperature", "vapour", "cloud", "eastward_wind", "northward_wind")
"""Fields of the incoming air that members may have each for itself."""
OF_UPWIND = ("wind", "density", "dry", "moist", "lifted_share", "lifted")
NO_BLOCKING = 9.9
"""Critical value from which on nothing is blocked."""
LEAST_CREST_POINTS = 5
"""Points of the crest line within reach from which on its gaps are measured; a judgement."""
NOTHING = 1.0
"""A blocked layer shallower than this [m] is none."""
SHALLOW_POOL = 20.0
"""A pool shallower than this [m] is taken as displaced; a judgement."""


@dataclass(frozen=True)
class CrestLine:
    """Highest ground along the range, for the gaps in it.

    Attributes
    ----------
    distance : ndarray (n,) [m]
        Along the range, 0 where the transect crosses it.
    elevation : ndarray (n,) [m above sea level]
    """

    distance: Array
    elevation: Array


@dataclass(frozen=True, eq=False)
class Solution:
    """Members of a crossing. Arrays (m, ...).

    Attributes
    ----------
    across : ndarray (nx,) [m]
        Points of the transect measured along the range normal.
    crest : int
        Number of the crest's point.
    upwind : Upwind
    blocking : Blocking
    blocked_top : ndarray (m,) [m above sea level]
        Used for the flow.
    going_round : ndarray (m,) [1]
    streams : Streams
    pools : tuple of (Pool or None), one for each member
    """

    across: Array
    crest: int
    upwind: Upwind
    blocking: Blocking
    blocked_top: Array
    going_round: Array
    streams: Streams
    pools: tuple[Pool | None, ...]

    @cached_property
    def travel_times(self) -> Array:
        """Time the lowest crossing air takes to every point, as `way.travel_times`; the same for all sites."""
        return travel_times(self.across, self.streams)

    @cached_property
    def overcast(self) -> Array:
        """Cloud cover over the places of the march, as `way.overcast`; the same for all sites."""
        return overcast(self.across, self.streams)


@dataclass(frozen=True, eq=False)
class Ground:
    """Terrain of a crossing with what is known of it.

    Attributes
    ----------
    transect : Transect
    shape : Features
    normal : float [rad]
        Bearing across the range, downwind.
    cosine : float [1]
        Of the angle between transect and normal: distance along the normal over distance.
    lowest_pass : float or None [m above sea level]
    crest_line : CrestLine or None
    latitude : float or None [degrees north]
    stagnant_top : float or None [m above sea level]
        Top of a stagnant layer at the ground of the incoming column, which is no inflow of the range.
    """

    transect: Transect
    shape: Features
    normal: float
    cosine: float
    lowest_pass: float | None = None
    crest_line: CrestLine | None = None
    latitude: float | None = None
    stagnant_top: float | None = None


def solve(
    ground: Ground,
    incoming: IncomingAir,
    settings: Settings,
    lee: Lee | tuple[Lee, ...],
    *,
    members: int = 1,
    streamlines: int = 60,
    passes: int = PASSES,
) -> Solution:
    """Members of a crossing.

    Parameters
    ----------
    ground : Ground
    incoming : IncomingAir, fields (m, nz) or (nz,)
    settings : Settings
        Arrays of shape (m,) or single values.
    lee : Lee, or a tuple with one for each member
    members : int
    streamlines, passes : int

    Returns
    -------
    Solution

    Notes
    -----
    The pool is found with the air brought down to the lee foot as if there
    were none; of members where it is deeper than 20 m the flow is worked out again over its top.
    """
    shape, transect = ground.shape, ground.transect
    upwind = upwind_column(incoming, ground.normal, shape.base, shape.crest, freezing=settings.freezing)
    critical = each(settings.critical_value, members)
    blocked = blocking(upwind, shape.crest, critical)
    if (
        members > 1
        and upwind.wind.shape[0] == 1
        and np.all(np.maximum(blocked.highest_top, blocked.top) <= shape.base + NOTHING)
    ):
        # nothing is blocked by any criterion: the members of one column do not differ
        return solve(ground, incoming, _first(settings), lee, streamlines=streamlines, passes=passes)
    # a critical value beyond the bracket stands for no blocking at all (see `NO_BLOCKING`)
    top = np.where(critical > NO_BLOCKING, shape.base, np.broadcast_to(blocked.top, (members,)))
    crest = int(np.argmin(np.abs(transect.distance - shape.crest_distance)))
    across = transect.distance * ground.cosine
    bottom = top
    if ground.stagnant_top is not None:
        bottom = np.maximum(top, min(ground.stagnant_top, shape.crest - ROOM_BELOW_CREST))

    def worked(which: NDArray[np.intp], pool_top: Array | None = None) -> Streams:
        own = _Inputs(incoming, upwind, settings).of(which, members)
        return streams(
            own.incoming,
            own.upwind,
            across,
            transect.elevation,
            crest,
            bottom[which],
            own.settings,
            pool_top=pool_top,
            count=streamlines,
            passes=passes,
        )

    found = worked(np.arange(members))
    pools: tuple[Pool | None, ...] = (None,) * members
    known = lee if isinstance(lee, tuple) else (lee,) * members
    if known[0].known:
        pools = _pools(ground, upwind, found, known)
        depth = np.array([0.0 if pool is None else pool.depth for pool in pools])
        deep = np.flatnonzero(depth > SHALLOW_POOL)
        if deep.size:
            found = found.renewed(worked(deep, shape.lee_foot + depth[deep]), deep)
        pools = tuple(pool if pool is not None and pool.depth > SHALLOW_POOL else None for pool in pools)
    return Solution(across, crest, upwind, blocked, top, going_round(ground, blocked, top, settings), found, pools)


@dataclass(frozen=True, eq=False)
class _Inputs:
    """What members differ by."""

    incoming: IncomingAir
    upwind: Upwind
    settings: Settings

    def of(self, which: NDArray[np.intp], members: int) -> _Inputs:
        """Of some members."""
        if which.size == members:
            return self

        def some(value: Any) -> Any:
            return value[which] if np.ndim(value) and np.shape(value)[0] == members else value

        def taken(whole: Any, names: tuple[str, ...]) -> Any:
            profiles = {name: getattr(whole, name) for name in names}
            return replace(whole, **{name: x if x.ndim < 2 else some(x) for name, x in profiles.items()})

        own = {one.name: some(getattr(self.settings, one.name)) for one in fields(Settings)}
        return _Inputs(taken(self.incoming, OF_MEMBERS), taken(self.upwind, OF_UPWIND), replace(self.settings, **own))


def going_round(ground: Ground, blocked: Blocking, top: Array, settings: Settings) -> Array:
    """Share of the low lee air that went round: given, or from the gaps of the range, (m,); 0 with nothing blocked."""
    blocked_at_all = top > ground.shape.base + NOTHING
    return np.where(blocked_at_all, _going_round(ground, blocked, top, settings), 0.0)


def _going_round(ground: Ground, blocked: Blocking, top: Array, settings: Settings) -> Array:
    """Share of the low lee air that went round, as if there were some."""
    if settings.going_round_share is not None:
        return np.array(each(settings.going_round_share, top.size))
    shape = ground.shape
    if ground.lowest_pass is not None:
        return np.asarray(gap_share_from_pass(ground.lowest_pass, shape.base, shape.crest, top))
    line = ground.crest_line
    if line is not None:
        latitude = np.radians(45.0 if ground.latitude is None else ground.latitude)
        radius = deformation_radius(blocked.stability, shape.crest - shape.base, latitude)
        near = np.abs(line.distance) <= reach_along_crest(float(np.max(radius)))
        if near.sum() >= LEAST_CREST_POINTS:
            return np.asarray(gap_share(line.distance[near], line.elevation[near], shape.base, top))
    return np.full(top.size, DEFAULT_GOING_ROUND)


def _pools(ground: Ground, upwind: Upwind, found: Streams, lee: tuple[Lee, ...]) -> tuple[Pool, ...]:
    """Pools under the air of the members, brought down to the lee foot."""
    foot = ground.shape.lee_foot
    here = over(found, ground.transect.distance, ground.shape.lee_foot_distance)
    p = pressure_at(here, np.full((here.height.shape[0], 1), foot))[:, 0]
    v = here.vapour[:, 0]
    t = frozen_temperature(here.pressure[:, 0], here.temperature[:, 0], v, here.cloud[:, 0], p)
    vapour = np.atleast_2d(upwind.air.vapour)
    most = [float(np.interp(foot, upwind.height, vapour[min(i, len(vapour) - 1)])) for i in range(len(lee))]
    return tuple(pool_under(one, foot, float(p[i]), float(t[i]), float(v[i]), most[i]) for i, one in enumerate(lee))


def _first(settings: Settings) -> Settings:
    """Settings of the first member."""
    share = settings.going_round_share
    return replace(
        settings,
        removed_share=None if settings.removed_share is None else np.ravel(settings.removed_share)[:1],
        cloud_time=np.ravel(settings.cloud_time)[:1],
        fall_time=np.ravel(settings.fall_time)[:1],
        critical_value=np.ravel(settings.critical_value)[:1],
        going_round_share=None if share is None else np.ravel(share)[:1],
        mixing_depth=np.ravel(settings.mixing_depth)[:1],
    )


def ends(settings: Settings) -> Settings:
    """Three members: the settings, no blocking, and full blocking with nothing going round."""
    share = settings.going_round_share
    return replace(
        settings,
        critical_value=np.array([float(np.asarray(settings.critical_value)), NO_BLOCKING + 0.1, 1.0]),
        going_round_share=None if share is None else np.array([float(np.asarray(share)), 0.0, 0.0]),
    )
