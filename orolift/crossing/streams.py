"""Crossing air as streamlines: where they start, with what air, and where they go; members first."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.air.condensation import condensation_point
from orolift.air.parcel import Parcel, entropy, equilibrium_from_entropy
from orolift.air.temperature import virtual_temperature
from orolift.constants import GRAVITY, KAPPA, R_DRY
from orolift.crossing.falling import Falling, Path, fallen_at_once, march_with_rain
from orolift.crossing.march import March, march
from orolift.crossing.settings import each
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
LOWEST_SPACING = 25.0
"""Spacing [m] of the lowest streamlines upwind."""
PASSES = 4
"""Most times the flow is worked out, each with the saturation of the one before."""
SLOWEST = 1.0
"""Wind [m s-1] below which time along a streamline is counted with this."""
EARLY_STRIDE = 8
"""In all passes but the last the air is marched over every eighth place: they need only to know where cloud is."""
MOST_PLACES = 512
"""Places at which the air is marched in the last pass: the removal of water is then good to 0.01 K."""
MOST_RAIN_PLACES = 256
"""The same where rain is worked out: steps of some tens of seconds are short against a cloud time of 1000 s."""
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
        incoming,
        upwind,
        distance,
        ground,
        crest,
        blocked_top,
        pool_top,
        heights,
        start,
        saturates,
        settings,
    )
    dry = _over(setup, upwind.dry)
    carried = _carried(upwind, start, heights, dry.start_wind)
    rows = np.broadcast_to(upwind.lifted_share, (heights.shape[0], upwind.height.size))
    lifted = np.stack([np.interp(z, upwind.height, row) for z, row in zip(heights, rows, strict=True)])
    state = _Pass(dry, np.arange(distance.size), None, np.ones((1, 1, distance.size)), lifted, None, np.inf)
    for _ in range(passes - 1):
        state = _next(setup, dry, state, carried, EARLY_STRIDE)
        if np.all(state.moved <= SETTLED):
            break
    most = MOST_PLACES if settings.removed_share is not None else MOST_RAIN_PLACES
    state = _next(setup, dry, state, carried, max(1, -(-distance.size // most)))
    if state.air is None or state.falling is None:
        raise ValueError("the last pass marches the air")
    settled = np.broadcast_to(np.asarray(state.moved) <= SETTLED, (blocked_top.size,)) | (passes == 1)
    flow = state.flow
    mass, place, air, falling = _mass(source.pressure), state.place, state.air, state.falling
    return Streams(
        start, source, mixed, inflow_depth, mass, flow, flow.start_wind, place, air, carried, falling, settled
    )


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
    """What a pass hands on: flow, places of the march, its air and rain, pressure ratio, saturated share, cloud end."""

    flow: Airflow
    place: NDArray[np.intp]
    air: March | None
    change: Array
    share: Array
    end: Array | None
    moved: Array | float
    falling: Falling | None = None


def _next(setup: _Setup, dry: Airflow, before: _Pass, carried: Array, stride: int) -> _Pass:
    """One pass: the flow with the saturation of the pass before, and the air marched through it."""
    members, size = setup.blocked_top.size, setup.distance.size
    end = np.full(members, setup.distance[setup.crest]) if before.end is None else before.end
    flow = _flow(setup, dry, before.share, end)
    place = np.union1d(np.arange(0, size, stride), [setup.crest, size - 1])
    pressure, change = _pressure(setup, flow, setup.start, place, before.air, before.place, before.change)
    air, falling = _marched(setup, flow, carried, place, np.moveaxis(pressure, -1, 0))
    found = _saturated_share(air, setup.start, setup.saturates, place <= setup.crest)
    return _Pass(
        flow=flow,
        place=place,
        air=air,
        change=change,
        share=found if before.air is None else 0.5 * (before.share + found),
        end=_cloud_end(setup, air, place),
        moved=np.inf if before.air is None else _moved(setup, flow.heights, before.flow.heights),
        falling=falling,
    )


def _marched(
    setup: _Setup, flow: Airflow, carried: Array, place: NDArray[np.intp], pressure: Array
) -> tuple[March, Falling]:
    """Air marched over places, by the prescribed share or with rain worked out."""
    settings, members = setup.settings, setup.blocked_top.size
    if settings.removed_share is not None:
        share = each(settings.removed_share, members)
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


def _pressure(
    setup: _Setup,
    flow: Airflow,
    start: Parcel,
    place: NDArray[np.intp],
    air: March | None,
    before: NDArray[np.intp],
    change: Array,
) -> tuple[Array, Array]:
    """Pressure on the streamlines at places, (m, nz, nk), and its ratio to that of the undisturbed column there.

    Virtual potential temperature, which hardly changes along a streamline, is carried over from the places of the pass
    before (there with ratio `change`), so that heights between them count in full.
    """
    heights = flow.heights[..., place]
    limited = np.minimum(heights, setup.incoming.height[-1])
    flat = limited.reshape(limited.shape[0], -1)
    undisturbed = interpolated(setup.incoming, flat).pressure.reshape(heights.shape)
    if air is None:
        return undisturbed, np.ones_like(undisturbed)
    x_before, x = setup.distance[before], setup.distance[place]
    theta_v = virtual_temperature(air.temperature, air.vapour, air.cloud) / air.pressure**KAPPA
    pressure = undisturbed * _between_places(change, x_before, x)
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


def start_heights(bottom: Array, top: float, count: int) -> Array:
    """Heights at which streamlines start, close together below, (m, nz).

    Parameters
    ----------
    bottom : ndarray (m,) [m]
    top : float [m]
    count : int

    Returns
    -------
    ndarray (m, nz) [m]
        25 m apart below, their spacing growing by one factor upward.
    """
    steps = count - 1
    out = np.empty((bottom.size, count))
    for i, low in enumerate(bottom):
        depth = top - float(low)
        growth = _growth(depth / LOWEST_SPACING, steps)
        spacing = growth ** np.arange(steps)
        out[i] = low + np.concatenate([[0.0], np.cumsum(spacing)]) * (depth / spacing.sum())
    return out


def _growth(ratio: float, steps: int) -> float:
    """Factor by which steps grow so that they add up to `ratio` first steps; at least 1."""
    low, high = 1.0, 2.0
    if steps >= ratio:
        return 1.0
    for _ in range(50):
        middle = 0.5 * (low + high)
        if (middle**steps - 1.0) / (middle - 1.0) > ratio:
            high = middle
        else:
            low = middle
    return high


def starting_air(
    incoming: IncomingAir, heights: Array, depth: float, *, freezing: bool
) -> tuple[Parcel, Parcel, NDArray[np.bool_]]:
    """Air of the streamlines before the range: mixed in the lowest layer, and as it is in the column.

    Parameters
    ----------
    incoming : IncomingAir, fields (m, nz_column) or (nz_column,)
    heights : ndarray (m, nz) [m above sea level]
    depth : float [m]
        Of the mixed layer.
    freezing : bool

    Returns
    -------
    start, source : Parcel, fields (m, nz)
    mixed : ndarray of bool, (m, nz)

    Notes
    -----
    Mixed air has the mean moist entropy and total water of the layer, by mass:
    the potential temperature and the vapour of unsaturated air.
    """
    there = interpolated(incoming, heights)
    source = Parcel(
        *(np.broadcast_to(x, heights.shape) for x in (there.pressure, there.temperature, there.vapour, there.cloud))
    )
    mixed = heights <= heights[:, :1] + depth
    mass = np.where(mixed, _mass(source.pressure), 0.0)
    mass = mass / mass.sum(axis=-1, keepdims=True)
    s, water = entropy(source, freezing=freezing), source.vapour + source.cloud
    s_mean, water_mean = (np.sum(mass * x, axis=-1, keepdims=True) for x in (s, water))
    start = equilibrium_from_entropy(
        source.pressure,
        np.where(mixed, s_mean, s),
        np.where(mixed, water_mean, water),
        freezing=freezing,
        first_guess=source.temperature,
    )
    return start, source, mixed


def _mass(pressure: Array) -> Array:
    """Mass that belongs to each streamline, by pressure halfway to its neighbours."""
    edge = 0.5 * (pressure[..., 1:] + pressure[..., :-1])
    ends = np.concatenate([pressure[..., :1], edge, pressure[..., -1:]], axis=-1)
    return np.asarray(ends[..., :-1] - ends[..., 1:])
