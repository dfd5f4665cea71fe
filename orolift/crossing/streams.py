"""Crossing air as streamlines: where they start, with what air, and where they go; members first."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.air.condensation import condensation_point
from orolift.air.parcel import Parcel
from orolift.air.temperature import virtual_temperature
from orolift.constants import GRAVITY, KAPPA, R_DRY
from orolift.crossing.falling import Falling, Path, fallen_at_once, march_with_rain
from orolift.crossing.march import March, march
from orolift.crossing.settings import each
from orolift.crossing.start import mass_of_streamlines, start_heights, starting_air
from orolift.crossing.upwind import LEAST_VAPOUR, Upwind
from orolift.flow.airflow import Airflow, airflow, highest_pressure, joined
from orolift.flow.boundary import start_level
from orolift.flow.streamlines import join_weight

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.settings import Settings

    Array = NDArray[np.float64]

CREST_CLOUD = 500.0
"""Streamlines that start up to this far above the crest [m] count for where cloud ends in the lee; a judgement."""
PASSES = 6
"""Most times the flow is worked out, each with the saturation of the one before."""
SLOWEST = 1.0
"""Wind [m s-1] below which time along a streamline is counted with this."""
EARLY_POINTS, EARLY_PLACES = 256, 64
"""Points of the transect and places of the march in all passes but the last: they only find where cloud is."""
EARLY_SHARE = 0.4
"""Share of the condensed water that early passes let fall where rain is worked out only in the last; a judgement."""
MOST_PLACES = 256
"""Places of the march in the last pass: the removal of a prescribed share is then good to 0.02 K, and steps of some
tens of seconds are short against a cloud time of 1000 s."""
SETTLED = 50.0
"""Change of a low streamline's height [m] in the last pass above which the passes have not settled; a judgement."""


@dataclass(frozen=True, eq=False)
class Streams:
    """Crossing air along streamlines. Arrays (m, nz, nx), marched ones (nk, m, nz).

    Attributes
    ----------
    start : Parcel, fields (m, nz)
        Air of each streamline before the range, the lowest layer mixed.
    source : Parcel, fields (m, nz)
        The same before mixing.
    mixed : ndarray of bool, (m, nz)
        Whether a streamline starts in the mixed layer.
    inflow_depth : float [m]
    mass : ndarray (m, nz) [Pa]
        Pressure depth that belongs to each streamline upwind.
    flow : Airflow
    wind : ndarray (m, nz) [m s-1]
        Across the range, where the streamlines start.
    place : ndarray of int, (nk,)
        Numbers of the points of the transect at which the air is marched.
    air : March
    carried : ndarray (m, nz) [kg m-1 s-1]
        Dry air that flows in the layer of each streamline.
    falling : Falling
    settled : ndarray of bool, (m,)
    """

    start: Parcel
    source: Parcel
    mixed: NDArray[np.bool_]
    inflow_depth: float
    mass: Array
    flow: Airflow
    wind: Array
    place: NDArray[np.intp]
    air: March
    carried: Array
    falling: Falling
    settled: NDArray[np.bool_]


def streams(
    incoming: IncomingAir,
    upwind: Upwind,
    distance: Array,
    ground: Array,
    crest: int,
    blocked_top: Array,
    settings: Settings,
    *,
    pool_top: Array | None = None,
    count: int = 60,
    passes: int = PASSES,
) -> Streams:
    """Crossing air over a transect.

    Parameters
    ----------
    incoming : IncomingAir, fields (m, nz_column) or (nz_column,)
    upwind : Upwind
    distance, ground : ndarray (nx,) [m]
        Along the range normal, evenly spaced; above sea level.
    crest : int
        Number of the crest's point.
    blocked_top : ndarray (m,) [m above sea level]
    settings : Settings
    pool_top : ndarray (m,) [m above sea level], optional
        Top of the cold air in the lee that stays.
    count : int
        Streamlines.
    passes : int

    Returns
    -------
    Streams

    Notes
    -----
    Each pass works out the flow twice over the same boundary, with saturated stability where the
    pass before found cloud on the way up and with dry stability, and joins
    the two by a weight that falls from 1 at the crest to 0 where cloud ends in the lee. The share
    of the lift on which a streamline is saturated is under-relaxed by half. Pressure in
    the first pass is that of the undisturbed column at each height, then that of the
    crossed column.
    """
    heights = start_heights(start_level(ground, blocked_top), float(upwind.height[-1]), count)
    freezing, inflow_depth = settings.freezing, settings.inflow_depth
    start, source, mixed = starting_air(incoming, heights, inflow_depth, freezing=freezing)
    wet = Parcel(start.pressure, start.temperature, np.maximum(start.vapour, LEAST_VAPOUR), start.cloud)
    saturates = condensation_point(wet, freezing=freezing).pressure
    setup = _Setup(
        incoming, upwind, distance, ground, crest, blocked_top, pool_top, heights, start, saturates, settings
    )
    coarse = _thinned(setup, max(1, distance.size // EARLY_POINTS))
    dry = _over(coarse, upwind.dry)
    carried = _carried(upwind, start, heights, dry.start_wind)
    rows = np.broadcast_to(upwind.lifted_share, (heights.shape[0], upwind.height.size))
    lifted = np.stack([np.interp(z, upwind.height, row) for z, row in zip(heights, rows, strict=True)])
    state = _Pass(dry, distance[:1], None, np.ones((1, 1, 1)), lifted, None, np.inf)
    done = np.zeros(blocked_top.size, dtype=bool)
    for _ in range(passes - 1):
        after = _next(coarse, dry, state, carried, max(1, coarse.distance.size // EARLY_PLACES), early=True)
        state = _held(state, after, done) if done.any() else after
        done = np.broadcast_to(state.moved <= SETTLED, done.shape)
        if done.all():
            break
    moved = state.moved
    dry = dry if coarse.distance.size == distance.size else _over(setup, upwind.dry)
    state = _next(setup, dry, state, carried, max(1, -(-distance.size // MOST_PLACES)))
    if state.air is None or state.falling is None:
        raise ValueError("the last pass marches the air")
    settled = np.broadcast_to(np.asarray(moved) <= SETTLED, (blocked_top.size,)) | (passes < 3)
    flow = state.flow
    mass, place = mass_of_streamlines(source.pressure), np.searchsorted(distance, state.place)
    return Streams(
        start,
        source,
        mixed,
        inflow_depth,
        mass,
        flow,
        flow.start_wind,
        place,
        state.air,
        carried,
        state.falling,
        settled,
    )


def _thinned(setup: _Setup, every: int) -> _Setup:
    """The same on fewer points of the transect, the crest among them."""
    if every == 1:
        return setup
    part = slice(setup.crest % every, None, every)
    ground = setup.ground[part].copy()
    ground[0] = setup.ground[0]  # streamlines start at the same height
    return replace(setup, distance=setup.distance[part], ground=ground, crest=setup.crest // every)


@dataclass(frozen=True, eq=False)
class _Setup:
    """What stays the same from pass to pass."""

    incoming: IncomingAir
    upwind: Upwind
    distance: Array
    ground: Array
    crest: int
    blocked_top: Array
    pool_top: Array | None
    heights: Array
    start: Parcel
    saturates: Array
    settings: Settings


@dataclass(frozen=True, eq=False)
class _Pass:
    """What a pass hands on: flow, places of the march, its air, pressure ratio, saturated share, cloud end, rain."""

    flow: Airflow
    place: Array
    air: March | None
    change: Array
    share: Array
    end: Array | None
    moved: Array | float
    falling: Falling | None = None


def _next(setup: _Setup, dry: Airflow, before: _Pass, carried: Array, stride: int, *, early: bool = False) -> _Pass:
    """One pass: the flow with the saturation of the pass before, and the air marched through it."""
    members, size = setup.blocked_top.size, setup.distance.size
    end = np.full(members, setup.distance[setup.crest]) if before.end is None else before.end
    flow = _flow(setup, dry, before.share, end)
    place = np.union1d(np.arange(0, size, stride), [setup.crest, size - 1])
    pressure, change = _pressure(setup, flow, place, before)
    air, falling = _marched(setup, flow, carried, place, np.moveaxis(pressure, -1, 0), early=early)
    found = _saturated_share(air, setup.start, setup.saturates, place <= setup.crest)
    same_points = before.air is not None and before.flow.heights.shape == flow.heights.shape
    return _Pass(
        flow=flow,
        place=setup.distance[place],
        air=air,
        change=change,
        share=found if before.air is None else 0.5 * (before.share + found),
        end=_cloud_end(setup, air, place),
        moved=_moved(setup, flow.heights, before.flow.heights) if same_points else np.inf,
        falling=falling,
    )


def _held(before: _Pass, after: _Pass, done: NDArray[np.bool_]) -> _Pass:
    """A pass in which members that have settled stay as they were: none depends on its neighbours."""
    if before.air is None or after.air is None or before.end is None or after.end is None:
        raise ValueError("a member settles in the second pass at the earliest")
    rows = done[:, np.newaxis, np.newaxis]
    air = {
        one.name: np.where(done[:, np.newaxis], getattr(before.air, one.name), getattr(after.air, one.name))
        for one in fields(March)
    }
    return replace(
        after,
        air=March(**air),
        flow=replace(after.flow, heights=np.where(rows, before.flow.heights, after.flow.heights)),
        change=np.where(rows, before.change, after.change),
        share=np.where(done[:, np.newaxis], before.share, after.share),
        end=np.where(done, before.end, after.end),
        moved=np.where(done, before.moved, after.moved),
    )


def _marched(
    setup: _Setup, flow: Airflow, carried: Array, place: NDArray[np.intp], pressure: Array, *, early: bool
) -> tuple[March, Falling]:
    """Air marched over places, by the prescribed share or with rain worked out; early passes take a usual share."""
    settings, members = setup.settings, setup.blocked_top.size
    if settings.removed_share is not None or early:
        share = each(EARLY_SHARE if settings.removed_share is None else settings.removed_share, members)
        air = march(setup.start, pressure, share[:, np.newaxis], freezing=settings.freezing)
        return air, fallen_at_once(air, carried, freezing=settings.freezing)
    slowness = 1.0 / np.maximum(flow.start_wind[..., np.newaxis] * flow.speed_factor[..., place], SLOWEST)
    time = np.zeros(slowness.shape)
    time[..., 1:] = 0.5 * (slowness[..., 1:] + slowness[..., :-1]) * np.diff(setup.distance[place])
    path = Path(pressure, np.moveaxis(flow.heights[..., place], -1, 0), np.moveaxis(time, -1, 0), carried)
    cloud_time, fall_time = each(settings.cloud_time, members), each(settings.fall_time, members)
    return march_with_rain(setup.start, path, cloud_time, fall_time, freezing=settings.freezing)


def _carried(upwind: Upwind, start: Parcel, heights: Array, wind: Array) -> Array:
    """Dry air that flows in the layer of each streamline, for each metre along the range [kg m-1 s-1], (m, nz)."""
    rows = np.broadcast_to(upwind.density, (heights.shape[0], upwind.height.size))
    density = np.stack([np.interp(z, upwind.height, row) for z, row in zip(heights, rows, strict=True)])
    edge = 0.5 * (heights[:, 1:] + heights[:, :-1])
    depth = np.diff(np.concatenate([heights[:, :1], edge, heights[:, -1:]], axis=1), axis=1)
    return np.asarray(density / (1.0 + start.vapour + start.cloud) * wind * depth)


def _moved(setup: _Setup, heights: Array, before: Array) -> Array:
    """Largest change of a streamline that starts no higher than 2 km above the crest, (m,)."""
    low = setup.heights <= setup.ground[setup.crest] + 2000.0
    return np.asarray(np.max(np.abs(heights - before) * low[..., np.newaxis], axis=(-2, -1)))


def _over(setup: _Setup, n_squared: Array) -> Airflow:
    """Flow with one profile of stability."""
    return airflow(
        setup.distance,
        setup.ground,
        setup.upwind.height,
        setup.upwind.density,
        n_squared,
        setup.upwind.wind,
        setup.heights,
        blocked_top=setup.blocked_top,
        pool_top=setup.pool_top,
        crest=setup.crest,
    )


def _flow(setup: _Setup, dry: Airflow, share: Array, end: Array) -> Airflow:
    """Flow with the stability of a pass: saturated up to the crest, dry from where the cloud ends."""
    upwind = setup.upwind
    if not share.any():
        return dry
    on_levels = np.stack([np.interp(upwind.height, z, s) for z, s in zip(setup.heights, share, strict=True)])
    moist = _over(setup, (1.0 - on_levels) * upwind.dry + on_levels * upwind.moist)
    return joined(moist, dry, join_weight(setup.distance, np.full(end.shape, setup.distance[setup.crest]), end))


def _pressure(setup: _Setup, flow: Airflow, place: NDArray[np.intp], before: _Pass) -> tuple[Array, Array]:
    """Pressure on the streamlines at places, (m, nz, nk), and its ratio to that of the undisturbed column there.

    Virtual potential temperature, which hardly changes along a streamline, is carried over from the places of the pass
    before, so that heights between them count in full.
    """
    air, start = before.air, setup.start
    heights = flow.heights[..., place]
    limited = np.minimum(heights, setup.incoming.height[-1])
    flat = limited.reshape(limited.shape[0], -1)
    undisturbed = interpolated(setup.incoming, flat).pressure.reshape(heights.shape)
    if air is None:
        return undisturbed, np.ones_like(undisturbed)
    x_before, x = before.place, setup.distance[place]
    theta_v = virtual_temperature(air.temperature, air.vapour, air.cloud) / air.pressure**KAPPA
    pressure = undisturbed * _between_places(before.change, x_before, x)
    virtual = _between_places(np.moveaxis(theta_v, 0, -1), x_before, x) * pressure**KAPPA
    density = start.pressure[:, -1] / (
        R_DRY * virtual_temperature(start.temperature[:, -1], start.vapour[:, -1], start.cloud[:, -1])
    )
    top = highest_pressure(flow, start.pressure[:, -1], density)[..., place]
    crossed = _thickness(heights, virtual)
    # what coarse levels miss of the column is taken from the undisturbed one, where the pressure is known
    level = setup.heights[..., np.newaxis]
    missed = np.log(start.pressure / start.pressure[:, -1:])[..., np.newaxis] - _thickness(
        level, virtual_temperature(start.temperature, start.vapour, start.cloud)[..., np.newaxis]
    )
    pressure = np.asarray(top[:, np.newaxis, :] * np.exp(crossed + missed))
    return pressure, pressure / undisturbed


def _thickness(heights: Array, virtual: Array) -> Array:
    """Logarithm of pressure over that at the highest level, levels on the second axis from the end."""
    mean = 0.5 * (virtual[:, 1:, :] + virtual[:, :-1, :])
    steps = (GRAVITY / R_DRY) * np.diff(heights, axis=1) / mean
    below = np.cumsum(steps[:, ::-1, :], axis=1)[:, ::-1, :]
    return np.concatenate([below, np.zeros_like(below[:, :1, :])], axis=1)


def _between_places(values: Array, before: Array, after: Array) -> Array:
    """Values (..., n) given at some places, at others, by straight lines."""
    index = np.clip(np.searchsorted(before, after, side="right") - 1, 0, before.size - 2)
    share = (after - before[index]) / (before[index + 1] - before[index])
    return np.asarray((1.0 - share) * values[..., index] + share * values[..., index + 1])


def _saturated_share(air: March, start: Parcel, saturates: Array, upwind_side: NDArray[np.bool_]) -> Array:
    """Share of the lift, in pressure, on which each streamline is saturated on its way to the crest."""
    highest = np.min(air.pressure[upwind_side], axis=0)
    lift = start.pressure - highest
    cloudy = np.minimum(saturates, start.pressure) - highest
    return np.clip(np.where(lift > 100.0, cloudy / np.maximum(lift, 100.0), 0.0), 0.0, 1.0)


def _cloud_end(setup: _Setup, air: March, place: NDArray[np.intp]) -> Array:
    """Distance at which the cloud of the low streamlines ends in the lee, (m,); the crest where there is none."""
    low = setup.heights <= setup.ground[setup.crest] + CREST_CLOUD
    cloudy = np.any((air.cloud > 0.0) & low, axis=-1) & (place >= setup.crest)[:, np.newaxis]
    # the cloud over the crest, up to its first gap downwind
    lee = np.flatnonzero(place >= setup.crest)
    whole = np.cumprod(cloudy[lee], axis=0).sum(axis=0)
    return np.asarray(setup.distance[place[lee[np.maximum(whole - 1, 0)]]])
