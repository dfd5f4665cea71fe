"""Passes of a crossing: each works out the flow with the saturation of the one before, and takes the air through it."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from typing import TYPE_CHECKING, Any, TypeVar

import numpy as np

from orolift.air.parcel import Parcel
from orolift.air.temperature import virtual_temperature
from orolift.constants import GRAVITY, KAPPA, R_DRY
from orolift.crossing.falling import Falling, Path, fallen_at_once, march_with_rain
from orolift.crossing.march import March, march
from orolift.crossing.settings import each
from orolift.crossing.start import undisturbed_pressure
from orolift.flow.airflow import Airflow, airflow, highest_pressure, joined
from orolift.flow.members import some_points, together
from orolift.flow.scales import LEAST_WIND
from orolift.flow.streamlines import join_weight

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.settings import Settings
    from orolift.crossing.upwind import Upwind

    Array = NDArray[np.float64]

CREST_CLOUD = 500.0
"""Streamlines that start up to this far above the crest [m] count for where cloud ends in the lee; a judgement."""
SLOWEST = 1.0
"""Wind [m s-1] below which time along a streamline is counted with this."""
EARLY_PLACES = 64
"""Places of the march, and of the flow, in all passes but the last: they only find where cloud is."""
EARLY_SHARE = 0.4
"""Share of the condensed water that early passes let fall where rain is worked out only in the last; a judgement."""
MOST_PLACES = 256
"""Places of the march in the last pass: the removal of a prescribed share is then good to 0.02 K, and steps of some
tens of seconds are short against a cloud time of 1000 s."""
TOGETHER = 18
"""Most members whose flow is worked out together: those whose waves are about equally short."""
LOW = 5000.0
"""Depth above the lowest streamline [m] in which they are told apart: that of `flow.waves`."""


@dataclass(frozen=True, eq=False)
class Setup:
    """What stays the same from pass to pass; arrays (m, ...), but for the transect's."""

    levels: Array
    log_pressure: Array  # of the incoming column there, (m, n)
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

    def places(self, *, early: bool) -> NDArray[np.intp]:
        """Points of the transect at which air is marched, the crest and both ends among them."""
        size = self.distance.size
        stride = size // EARLY_PLACES if early else -(-size // MOST_PLACES)
        return np.union1d(np.arange(0, size, max(1, stride)), [self.crest, size - 1])


@dataclass(frozen=True, eq=False)
class Pass:
    """What a pass hands on; arrays (m, ...), places last."""

    heights: Array
    place: Array
    change: Array  # pressure over that of the undisturbed column at the same height
    theta_v: Array | None  # virtual potential temperature but for a constant
    share: Array  # of the lift on which a streamline is saturated
    end: Array | None  # of the cloud in the lee
    moved: Array


@dataclass(frozen=True, eq=False)
class Done:
    """A pass: what it hands on, and what it found."""

    known: Pass
    flow: Airflow
    air: March
    falling: Falling | None


Parts = TypeVar("Parts", Setup, Pass)


def some_of(whole: Parts, which: NDArray[np.intp]) -> Parts:
    """Some of the members."""
    if isinstance(whole, Pass):
        arrays = {f.name: getattr(whole, f.name) for f in fields(Pass) if f.name != "place"}
        return replace(whole, **{key: x if x is None or x.shape[0] == 1 else x[which] for key, x in arrays.items()})
    members = whole.blocked_top.size
    if which.size == members:
        return whole

    def part(x: Array) -> Array:
        return x[which] if x.shape[0] == members else x

    upwind, start, share = whole.upwind, whole.start, whole.settings.removed_share
    profiles: dict[str, Any] = {name: part(getattr(upwind, name)) for name in ("wind", "density", "dry", "moist")}
    return replace(
        whole,
        log_pressure=whole.log_pressure[which],
        upwind=replace(upwind, **profiles),
        blocked_top=whole.blocked_top[which],
        pool_top=None if whole.pool_top is None else whole.pool_top[which],
        heights=whole.heights[which],
        start=Parcel(*(x[which] for x in (start.pressure, start.temperature, start.vapour, start.cloud))),
        saturates=whole.saturates[which],
        settings=replace(whole.settings, removed_share=None if share is None else each(share, members)[which]),
    )


def renewed(whole: Pass, some: Pass, which: NDArray[np.intp]) -> Pass:
    """All members, some of them anew."""
    for f in fields(Pass):
        if f.name != "place":
            getattr(whole, f.name)[which] = getattr(some, f.name)
    return whole


def next_pass(setup: Setup, dry: Airflow, before: Pass, carried: Array, *, early: bool = False) -> Done:
    """One pass: the flow with the saturation of the pass before, and the air marched through it.

    An early pass takes the dry flow at its places, and works out no other.
    """
    members = setup.blocked_top.size
    end = np.full(members, setup.distance[setup.crest]) if before.end is None else before.end
    place = setup.places(early=early)
    flow = _flow(setup, dry, before.share, end, place if early else None)
    here = flow if early else some_points(flow, place)
    pressure, change = _pressure(setup, here, place, before)
    air, falling = _marched(setup, here, carried, place, np.moveaxis(pressure, -1, 0), early=early)
    first = before.theta_v is None
    found = _saturated_share(air, setup.start, setup.saturates, place <= setup.crest)
    theta_v = virtual_temperature(air.temperature, air.vapour, air.cloud) / air.pressure**KAPPA
    known = Pass(
        heights=flow.heights,
        place=setup.distance[place],
        change=change,
        theta_v=np.moveaxis(theta_v, 0, -1),
        share=found if first else 0.5 * (before.share + found),
        end=_cloud_end(setup, air, place),
        moved=np.full(members, np.inf) if first or not early else _moved(setup, flow.heights, before.heights),
    )
    return Done(known, flow, air, falling)


def _marched(
    setup: Setup, flow: Airflow, carried: Array, place: NDArray[np.intp], pressure: Array, *, early: bool
) -> tuple[March, Falling | None]:
    """Air marched over places, by the prescribed share or with rain worked out; early passes take a usual share."""
    settings, members = setup.settings, setup.blocked_top.size
    if settings.removed_share is not None or early:
        share = each(EARLY_SHARE if settings.removed_share is None else settings.removed_share, members)
        air = march(setup.start, pressure, share[:, np.newaxis], freezing=settings.freezing)
        return air, None if early else fallen_at_once(air, carried, freezing=settings.freezing)
    slowness = 1.0 / np.maximum(flow.start_wind[..., np.newaxis] * flow.speed_factor, SLOWEST)
    time = np.zeros(slowness.shape)
    time[..., 1:] = 0.5 * (slowness[..., 1:] + slowness[..., :-1]) * np.diff(setup.distance[place])
    path = Path(pressure, np.moveaxis(flow.heights, -1, 0), np.moveaxis(time, -1, 0), carried)
    cloud_time, fall_time = each(settings.cloud_time, members), each(settings.fall_time, members)
    return march_with_rain(setup.start, path, cloud_time, fall_time, freezing=settings.freezing)


def _moved(setup: Setup, heights: Array, before: Array) -> Array:
    """Largest change of a streamline that starts no higher than 2 km above the crest, (m,)."""
    low = setup.heights <= setup.ground[setup.crest] + 2000.0
    some = int(np.max(np.sum(low, axis=-1)))
    change = np.abs(heights[:, :some] - before[:, :some])
    return np.asarray(np.max(np.max(change, axis=-1) * low[:, :some], axis=-1))


def flow_over(setup: Setup, n_squared: Array, at: NDArray[np.intp] | None = None) -> Airflow:
    """Flow with one profile of stability, for some members at a time: their arrays stay in the processor's cache."""
    upwind, members = setup.upwind, setup.blocked_top.size

    def part(x: Array, which: NDArray[np.intp]) -> Array:
        return x[which] if x.shape[0] == members else x

    height, lowest = upwind.height, setup.heights[:, :1]
    low = (height >= lowest) & (height <= lowest + LOW)
    scorer = np.max(np.where(low, n_squared, 0.0) / np.maximum(upwind.wind, LEAST_WIND) ** 2, axis=-1)
    rows = np.array_split(np.argsort(scorer), -(-members // TOGETHER))
    return together(
        [
            airflow(
                setup.distance,
                setup.ground,
                upwind.height,
                part(upwind.density, which),
                part(n_squared, which),
                part(upwind.wind, which),
                setup.heights[which],
                blocked_top=setup.blocked_top[which],
                pool_top=None if setup.pool_top is None else setup.pool_top[which],
                crest=setup.crest,
                at=at,
            )
            for which in rows
        ],
        rows,
    )


def _flow(setup: Setup, dry: Airflow, share: Array, end: Array, at: NDArray[np.intp] | None) -> Airflow:
    """Flow with the stability of a pass: saturated up to the crest, dry from where the cloud ends."""
    upwind = setup.upwind
    if not share.any():
        return dry
    on_levels = np.stack([np.interp(upwind.height, z, s) for z, s in zip(setup.heights, share, strict=True)])
    moist = flow_over(setup, (1.0 - on_levels) * upwind.dry + on_levels * upwind.moist, at)
    distance = setup.distance if at is None else setup.distance[at]
    return joined(moist, dry, join_weight(distance, np.full(end.shape, setup.distance[setup.crest]), end))


def _pressure(setup: Setup, flow: Airflow, place: NDArray[np.intp], before: Pass) -> tuple[Array, Array]:
    """Pressure on the streamlines at places, (m, nz, nk), and its ratio to that of the undisturbed column there.

    Virtual potential temperature, which hardly changes along a streamline, is carried over from the places of the pass
    before, so that heights between them count in full.
    """
    start, heights = setup.start, flow.heights
    undisturbed = undisturbed_pressure(setup.levels, setup.log_pressure, heights)
    if before.theta_v is None:
        return undisturbed, np.ones_like(undisturbed)
    x_before, x = before.place, setup.distance[place]
    pressure = undisturbed * _between_places(before.change, x_before, x)
    virtual = _between_places(before.theta_v, x_before, x) * pressure**KAPPA
    density = start.pressure[:, -1] / (
        R_DRY * virtual_temperature(start.temperature[:, -1], start.vapour[:, -1], start.cloud[:, -1])
    )
    top = highest_pressure(flow, start.pressure[:, -1], density)
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
    if np.array_equal(before, after):
        return values
    index = np.clip(np.searchsorted(before, after, side="right") - 1, 0, before.size - 2)
    share = (after - before[index]) / (before[index + 1] - before[index])
    return np.asarray((1.0 - share) * values[..., index] + share * values[..., index + 1])


def _saturated_share(air: March, start: Parcel, saturates: Array, upwind_side: NDArray[np.bool_]) -> Array:
    """Share of the lift, in pressure, on which each streamline is saturated on its way to the crest."""
    highest = np.min(air.pressure[upwind_side], axis=0)
    lift = start.pressure - highest
    cloudy = np.minimum(saturates, start.pressure) - highest
    return np.clip(np.where(lift > 100.0, cloudy / np.maximum(lift, 100.0), 0.0), 0.0, 1.0)


def _cloud_end(setup: Setup, air: March, place: NDArray[np.intp]) -> Array:
    """Distance at which the cloud of the low streamlines ends in the lee, (m,); the crest where there is none."""
    low = setup.heights <= setup.ground[setup.crest] + CREST_CLOUD
    cloudy = np.any((air.cloud > 0.0) & low, axis=-1) & (place >= setup.crest)[:, np.newaxis]
    # the cloud over the crest, up to its first gap downwind
    lee = np.flatnonzero(place >= setup.crest)
    whole = np.cumprod(cloudy[lee], axis=0).sum(axis=0)
    return np.asarray(setup.distance[place[lee[np.maximum(whole - 1, 0)]]])
