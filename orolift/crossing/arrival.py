"""What arrives at a site, mixed, and why it is warmer or colder than the air before the range; members first."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.air.parcel import Parcel, enthalpy, entropy, equilibrium_from_enthalpy, equilibrium_from_entropy
from orolift.air.temperature import virtual_temperature
from orolift.constants import (
    GRAVITY,
    HEAT_CAPACITY_DRY_AIR,
    HEAT_CAPACITY_LIQUID,
    HEAT_CAPACITY_VAPOUR,
    R_DRY,
    R_VAPOUR,
)
from orolift.flow.members import some_points

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.air.column import AirAtHeights, IncomingAir
    from orolift.crossing.streams import Streams

    Array = NDArray[np.float64]

SAMPLES = 8
"""Heights at which the mixed layer of a site is sampled."""


@dataclass(frozen=True, eq=False)
class Warming:
    """Temperature of a site minus that of the incoming air at its height, split; arrays (m,) [K].

    Attributes
    ----------
    descent : ndarray
        Source air brought dry to the site, minus the incoming air there.
    latent : ndarray
        What condensation less evaporation left in the crossing air.
    going_round : ndarray
        What low air that went round changes.
    mixing : ndarray
        What mixing changes, before the range and at the site.
    surface_heating : ndarray
    pressure : ndarray
        Lee pressure against that of the incoming air at the same height.
    """

    descent: Array
    latent: Array
    going_round: Array
    mixing: Array
    surface_heating: Array
    pressure: Array

    @property
    def total(self) -> Array:
        """Sum of the parts [K]."""
        return self.descent + self.latent + self.going_round + self.mixing + self.surface_heating + self.pressure


@dataclass(frozen=True, eq=False)
class Arrival:
    """Air at a site. Arrays (m,).

    Attributes
    ----------
    air : Parcel
    warming : Warming
    source_level : ndarray (m, 3) [m above sea level]
        10 %, median and 90 %, by mass.
    went_round : ndarray [1]
        Share of the air that went round.
    """

    air: Parcel
    warming: Warming
    source_level: Array
    went_round: Array


@dataclass(frozen=True, eq=False)
class Here:
    """Streamlines over one place of the transect. Arrays (m, nz).

    Attributes
    ----------
    share : float [1]
        Of the way from the march's place before it to the next.
    number : int
        Of the march's place at or before it.
    height, start_height : ndarray [m above sea level]
    pressure : ndarray [Pa]
    entropy : ndarray [J K-1 per kg of dry air]
    vapour, cloud : ndarray [kg per kg of dry air]
    temperature : ndarray [K]
    wind : ndarray [m s-1]
    """

    share: float
    number: int
    height: Array
    start_height: Array
    pressure: Array
    entropy: Array
    temperature: Array
    vapour: Array
    cloud: Array
    wind: Array


def over(streams: Streams, distance: Array, where: float) -> Here:
    """Streamlines over a place, between the places of the march by straight lines.

    Parameters
    ----------
    streams : Streams
    distance : ndarray (nx,) [m]
        Of the transect's points, in the same measure as `where`.
    where : float [m]

    Returns
    -------
    Here
    """
    at = distance[streams.place]
    number = int(np.clip(np.searchsorted(at, where, side="right") - 1, 0, at.size - 2))
    share = float(np.clip((where - at[number]) / (at[number + 1] - at[number]), 0.0, 1.0))

    def between(values: Array) -> Array:
        return np.asarray((1.0 - share) * values[number] + share * values[number + 1])

    flow = some_points(streams.flow, streams.place[number : number + 2])
    height = (1.0 - share) * flow.heights[..., 0] + share * flow.heights[..., 1]
    factor = (1.0 - share) * flow.speed_factor[..., 0] + share * flow.speed_factor[..., 1]
    air = streams.air
    return Here(
        share=share,
        number=number,
        height=height,
        start_height=flow.start_heights,
        pressure=np.exp((1.0 - share) * np.log(air.pressure[number]) + share * np.log(air.pressure[number + 1])),
        entropy=between(air.entropy),
        temperature=between(air.temperature),
        vapour=between(air.vapour),
        cloud=between(air.cloud),
        wind=streams.wind * factor,
    )


def sampled(levels: Array, values: Array, heights: Array) -> Array:
    """Values (m, nz) given at levels (m, nz), at heights (m, q), by straight lines; ends beyond."""
    return np.stack([np.interp(*row) for row in zip(heights, levels, values, strict=True)])


def frozen_temperature(pressure: Array, temperature: Array, vapour: Array, cloud: Array, target: Array) -> Array:
    """Temperature after an adiabatic move without any change of phase [K].

    ``T (p2 / p1)^((Rd + v Rv) / (cpd + v cpv + c cl))``: the first law with the cloud as a passenger.
    """
    kappa = (R_DRY + vapour * R_VAPOUR) / (
        HEAT_CAPACITY_DRY_AIR + vapour * HEAT_CAPACITY_VAPOUR + cloud * HEAT_CAPACITY_LIQUID
    )
    return np.asarray(temperature * (target / pressure) ** kappa)


def pressure_at(here: Here, height: Array) -> Array:
    """Pressure over a place at heights (m, q), hydrostatic below the lowest streamline [Pa]."""
    log_p = sampled(here.height, np.log(here.pressure), height)
    below = np.maximum(here.height[:, :1] - height, 0.0)
    virtual = virtual_temperature(here.temperature[:, :1], here.vapour[:, :1], here.cloud[:, :1])
    return np.asarray(np.exp(log_p + GRAVITY * below / (R_DRY * virtual)))


def arrival(
    incoming: IncomingAir,
    streams: Streams,
    here: Here,
    elevation: float,
    *,
    depth: Array,
    blocked_top: Array,
    going_round: Array,
    heating: Array,
    moistening: Array | None = None,
    freezing: bool,
) -> Arrival:
    """Air that reaches a site, and the budget of its warming.

    Parameters
    ----------
    incoming : IncomingAir, fields (m, nz_column) or (nz_column,)
    streams : Streams
    here : Here
        Streamlines over the site.
    elevation : float [m above sea level]
    depth : ndarray (m,) [m]
        Over which the air is mixed.
    blocked_top : ndarray (m,) [m above sea level]
    going_round : ndarray (m,) [1]
        Share of the air below the blocked top that went round; 0 on the windward side.
    heating : ndarray (m,) [K]
        By the ground.
    moistening : ndarray (m,), optional [kg per kg of dry air]
        By the ground and what it mixes; negative where drier air is mixed down.
    freezing : bool

    Returns
    -------
    Arrival

    Notes
    -----
    The budget is worked out at the height of the site at the pressure of the
    incoming air there, state by state: incoming air, source air brought dry,
    the same after mixing before the range, after all phase changes on the way (each is counted by what it
    changes at the site), parts mixed by mass in enthalpy and water, heated;
    last the move to the lee pressure. Each part is the difference that its own
    step makes.
    """
    members = blocked_top.size
    bottom = np.maximum(here.height[:, :1], elevation)
    offset = depth[:, np.newaxis] * (np.arange(SAMPLES) + 0.5) / SAMPLES
    height = bottom + offset  # where the crossing air is found
    own = elevation + offset  # its height at the site, and that of what went round
    upwind = interpolated(incoming, np.broadcast_to(elevation, (members, 1)))
    p_up, t_up = (np.broadcast_to(x, (members, 1)) for x in (upwind.pressure, upwind.temperature))
    parts = _crossing_parts(streams, here, height, p_up)
    weight = np.broadcast_to(pressure_at(here, height), height.shape)
    weight = weight / weight.sum(axis=-1, keepdims=True)
    round_share = np.where(own < blocked_top[:, np.newaxis], going_round[:, np.newaxis], 0.0)
    low = interpolated(incoming, own)
    low_t = frozen_temperature(low.pressure, low.temperature, low.vapour, low.cloud, p_up)

    def mean(values: Array) -> Array:
        return np.asarray(np.sum(weight * values, axis=-1))

    crossing = Parcel(p_up, parts.arrived, parts.vapour, parts.cloud)
    round_air = Parcel(p_up, low_t, low.vapour, low.cloud)
    heat = mean(
        (1.0 - round_share) * enthalpy(crossing, freezing=freezing)
        + round_share * enthalpy(round_air, freezing=freezing)
    )
    water = mean((1.0 - round_share) * (crossing.vapour + crossing.cloud) + round_share * (low.vapour + low.cloud))
    weighted = mean((1.0 - round_share) * parts.arrived + round_share * low_t)
    p = p_up[:, 0]
    mixed = equilibrium_from_enthalpy(p, heat, water, freezing=freezing)
    heated = with_ground(mixed, heating, moistening, freezing=freezing)
    water = heated.vapour + heated.cloud
    lee_pressure = pressure_at(here, np.broadcast_to(elevation, (members, 1)))[:, 0]
    air = equilibrium_from_entropy(lee_pressure, entropy(heated, freezing=freezing), water, freezing=freezing)
    warming = Warming(
        descent=mean(parts.source) - t_up[:, 0],
        latent=mean(parts.latent),
        going_round=mean(round_share * (low_t - parts.arrived)),
        mixing=mean(parts.mixed - parts.source) + mixed.temperature - weighted,
        surface_heating=heated.temperature - mixed.temperature,
        pressure=air.temperature - heated.temperature,
    )
    return Arrival(air, warming, _source_level(streams, parts.start, own, weight, round_share), mean(round_share))


def lee_profile(
    incoming: IncomingAir,
    here: Here,
    height: Array,
    *,
    blocked_top: Array,
    going_round: Array,
    heating: Array | None = None,
    moistening: Array | None = None,
    freezing: bool,
) -> Parcel:
    """Air over a place at its own heights, what went round mixed in.

    Parameters
    ----------
    incoming : IncomingAir, fields (m, nz_column) or (nz_column,)
    here : Here
    height : ndarray (m, q) [m above sea level]
    blocked_top, going_round : ndarray (m,)
        As for `arrival`.
    heating : ndarray (m, q), optional [K]
        By the ground; None leaves the ground out.
    moistening : ndarray (m, q), optional [kg per kg of dry air]
    freezing : bool

    Returns
    -------
    Parcel, fields (m, q)
    """
    pressure = pressure_at(here, height)
    share = np.where(height < blocked_top[:, np.newaxis], going_round[:, np.newaxis], 0.0)
    s, water = (sampled(here.height, x, height) for x in (here.entropy, here.vapour + here.cloud))
    air = equilibrium_from_entropy(pressure, s, water, freezing=freezing)
    if share.any():
        air = _mixed_in(air, interpolated(incoming, height), share, freezing=freezing)
    return air if heating is None else with_ground(air, heating, moistening, freezing=freezing)


def _mixed_in(air: Parcel, low: AirAtHeights, share: Array, *, freezing: bool) -> Parcel:
    """Air with a share of what went round mixed in, in enthalpy and water; worked out only where there is a share."""
    some = share > 0.0
    part = share[some]
    p, t, v, cloud = (x[some] for x in (air.pressure, air.temperature, air.vapour, air.cloud))
    low_p, low_t, low_v, low_cloud = (
        np.broadcast_to(x, share.shape)[some] for x in (low.pressure, low.temperature, low.vapour, low.cloud)
    )
    beside = Parcel(p, frozen_temperature(low_p, low_t, low_v, low_cloud, p), low_v, low_cloud)
    heat = (1.0 - part) * enthalpy(Parcel(p, t, v, cloud), freezing=freezing) + part * enthalpy(
        beside, freezing=freezing
    )
    water = (1.0 - part) * (v + cloud) + part * (low_v + low_cloud)
    mixed = equilibrium_from_enthalpy(p, heat, water, freezing=freezing)
    out = [np.array(x) for x in (air.temperature, air.vapour, air.cloud)]
    for whole, new in zip(out, (mixed.temperature, mixed.vapour, mixed.cloud), strict=True):
        whole[some] = new
    return Parcel(air.pressure, *out)


def with_ground(air: Parcel, warming: Array, moistening: Array | None, *, freezing: bool) -> Parcel:
    """Air with heat and vapour of the ground added at constant pressure; what it does to cloud follows.

    Parameters
    ----------
    air : Parcel, any shape
    warming : ndarray, broadcast with it [K]
    moistening : ndarray or None, broadcast with it [kg per kg of dry air]
    freezing : bool

    Returns
    -------
    Parcel, broadcast shape
    """
    vapour = air.vapour if moistening is None else np.maximum(air.vapour + moistening, 0.0)
    raw = Parcel(air.pressure, air.temperature + warming, vapour, air.cloud)
    return equilibrium_from_enthalpy(
        air.pressure, enthalpy(raw, freezing=freezing), raw.vapour + raw.cloud, freezing=freezing
    )


@dataclass(frozen=True, eq=False)
class _Parts:
    """Crossing air at heights over a site, brought to one pressure; arrays (m, q)."""

    start: Array
    source: Array
    mixed: Array
    latent: Array
    arrived: Array
    vapour: Array
    cloud: Array


def _crossing_parts(streams: Streams, here: Here, height: Array, target: Array) -> _Parts:
    """Temperatures of the crossing air on its way, each brought frozen to a target pressure (m, 1)."""
    count = int(
        min(np.max(np.sum(here.height <= height.max(axis=-1, keepdims=True), axis=-1)) + 1, here.height.shape[-1])
    )
    low = slice(0, count)
    levels = here.height[:, low]
    source, start = streams.source, streams.start

    def brought(parcel: Parcel) -> Array:
        return frozen_temperature(parcel.pressure, parcel.temperature, parcel.vapour, parcel.cloud, target)

    source_t, mixed_t = brought(source), brought(start)[:, low]
    share = np.where(streams.mixed, streams.mass, 0.0)
    layer = np.sum(share * source_t, axis=-1, keepdims=True) / np.sum(share, axis=-1, keepdims=True)
    source_t = np.where(streams.mixed, layer, source_t)[:, low]
    arrived = frozen_temperature(
        here.pressure[:, low], here.temperature[:, low], here.vapour[:, low], here.cloud[:, low], target
    )
    return _Parts(
        start=sampled(levels, here.start_height[:, low], height),
        source=sampled(levels, source_t, height),
        mixed=sampled(levels, mixed_t, height),
        latent=sampled(levels, arrived - mixed_t, height),
        arrived=sampled(levels, arrived, height),
        vapour=sampled(levels, here.vapour[:, low], height),
        cloud=sampled(levels, here.cloud[:, low], height),
    )


def _source_level(streams: Streams, start: Array, own: Array, weight: Array, round_share: Array) -> Array:
    """Heights in the upwind column the air comes from: 10 %, median, 90 % by mass, (m, 3).

    Air of the mixed layer comes from anywhere in it.
    """
    bottom = streams.flow.start_heights[:, :1]
    inside = start <= bottom + streams.inflow_depth
    parts = 9
    spread = bottom[..., np.newaxis] + streams.inflow_depth * (np.arange(parts) + 0.5) / parts
    crossing = np.where(inside[..., np.newaxis], spread, start[..., np.newaxis])
    levels = np.concatenate([crossing.reshape(start.shape[0], -1), own], axis=-1)
    mass = np.concatenate(
        [np.repeat(weight * (1.0 - round_share) / parts, parts, axis=-1), weight * round_share], axis=-1
    )
    order = np.argsort(levels, axis=-1)
    levels, mass = np.take_along_axis(levels, order, axis=-1), np.take_along_axis(mass, order, axis=-1)
    middle = np.cumsum(mass, axis=-1) - 0.5 * mass
    return np.stack([np.interp([0.1, 0.5, 0.9], m, z) for m, z in zip(middle, levels, strict=True)])
