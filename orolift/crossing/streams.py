"""Crossing air as streamlines: where they start, with what air, and where they go; members first."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.air.condensation import condensation_point
from orolift.air.parcel import Parcel
from orolift.crossing.falling import Falling
from orolift.crossing.march import March
from orolift.crossing.passes import Pass, Setup, flow_over, next_pass, renewed, some_of
from orolift.crossing.start import column_pressure, mass_of_streamlines, start_heights, starting_air
from orolift.crossing.upwind import LEAST_VAPOUR
from orolift.flow.boundary import start_level
from orolift.flow.members import some_members, some_points, together

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.settings import Settings
    from orolift.crossing.upwind import Upwind
    from orolift.flow.airflow import Airflow

    Array = NDArray[np.float64]

PASSES = 6
"""Most times the flow is worked out, each with the saturation of the one before."""
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

    def renewed(self, some: Streams, which: NDArray[np.intp]) -> Streams:
        """The same with some members worked out anew: their flow and what it does to the air that set out."""
        if which.size == self.settled.size:
            return some
        rest = np.setdiff1d(np.arange(self.settled.size), which)
        beyond = _put(self.falling.beyond, some.falling.beyond, which)
        return replace(
            self,
            flow=together([some_members(self.flow, rest), some.flow], [rest, which]),
            air=March(**_over_places(self.air, some.air, which)),
            falling=Falling(beyond=beyond, **_over_places(self.falling, some.falling, which)),
            settled=_put(self.settled, some.settled, which),
        )


def _over_places(old: March | Falling, new: March | Falling, which: NDArray[np.intp]) -> dict[str, Any]:
    """Fields (nk, m, ...) with some members anew."""
    names = [one.name for one in fields(old) if one.name != "beyond"]
    return {name: _put(getattr(old, name), getattr(new, name), (slice(None), which)) for name in names}


def _put(old: NDArray[Any], new: NDArray[Any], where: Any) -> NDArray[Any]:
    """An array with some of it anew."""
    out = np.array(old)
    out[where] = new
    return out


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
    crossed column. Members whose streamlines have settled take no part in further early passes, so that
    what is found for one does not depend on the others.
    """
    heights = start_heights(start_level(ground, blocked_top), float(upwind.height[-1]), count)
    freezing, inflow_depth = settings.freezing, settings.inflow_depth
    start, source, mixed = starting_air(incoming, heights, inflow_depth, freezing=freezing)
    wet = Parcel(start.pressure, start.temperature, np.maximum(start.vapour, LEAST_VAPOUR), start.cloud)
    saturates = condensation_point(wet, freezing=freezing).pressure
    levels, log_pressure = column_pressure(incoming, float(np.min(ground)), blocked_top.size)
    setup = Setup(
        levels,
        log_pressure,
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
    dry = flow_over(setup, upwind.dry)
    early = some_points(dry, setup.places(early=True))
    carried = _carried(upwind, start, heights, dry.start_wind)
    rows = np.broadcast_to(upwind.lifted_share, (heights.shape[0], upwind.height.size))
    lifted = np.stack([np.interp(z, upwind.height, row) for z, row in zip(heights, rows, strict=True)])
    state = Pass(early.heights, distance[:1], np.ones((1, 1, 1)), None, lifted, None, np.full(blocked_top.size, np.inf))
    left = np.arange(blocked_top.size)
    for _ in range(passes - 1):
        part, before = some_of(setup, left), some_of(state, left)
        some = next_pass(part, some_members(early, left), before, carried[left], early=True).known
        state = some if left.size == blocked_top.size else renewed(state, some, left)
        left = left[some.moved > SETTLED]
        if not left.size:
            break
    settled = (state.moved <= SETTLED) | (passes < 3)
    last = next_pass(setup, dry, state, carried)
    if last.falling is None:
        raise ValueError("the last pass lets rain fall")
    flow = last.flow
    mass, place = mass_of_streamlines(source.pressure), np.searchsorted(distance, last.known.place)
    return Streams(
        start,
        source,
        mixed,
        inflow_depth,
        mass,
        flow,
        flow.start_wind,
        place,
        last.air,
        carried,
        last.falling,
        settled,
    )


def _carried(upwind: Upwind, start: Parcel, heights: Array, wind: Array) -> Array:
    """Dry air that flows in the layer of each streamline, for each metre along the range [kg m-1 s-1], (m, nz)."""
    rows = np.broadcast_to(upwind.density, (heights.shape[0], upwind.height.size))
    density = np.stack([np.interp(z, upwind.height, row) for z, row in zip(heights, rows, strict=True)])
    edge = 0.5 * (heights[:, 1:] + heights[:, :-1])
    depth = np.diff(np.concatenate([heights[:, :1], edge, heights[:, -1:]], axis=1), axis=1)
    return np.asarray(density / (1.0 + start.vapour + start.cloud) * wind * depth)
