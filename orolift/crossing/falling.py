"""The march with rain worked out: cloud turns to falling water in time, which drifts, evaporates, melts and lands.

Falling water keeps to the streamlines it falls through: in each of them it has
the streamline's temperature, and gives or takes the heat of reaching it.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air import equilibrium, phase, steps
from orolift.air.parcel import Parcel, entropy, equilibrium_from_entropy
from orolift.constants import (
    EPSILON,
    HEAT_CAPACITY_ICE,
    HEAT_CAPACITY_LIQUID,
    R_DRY,
    R_VAPOUR,
    TRIPLE_POINT_PRESSURE,
    TRIPLE_POINT_TEMPERATURE,
)
from orolift.crossing.march import March

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]

RAIN_SPEED, SNOW_SPEED = 4.0, 1.2
"""Fall speeds [m s-1] at the usual fall time of 1000 s; other fall times scale both. Common practice: rain 4 to 6, snow
1 to 1.5 m/s (Houze 1993, Cloud Dynamics, from memory)."""
USUAL_FALL_TIME = 1000.0
"""Fall time [s] the speeds belong to, usual in Smith and Barstad (2004), J. Atmos. Sci. 61, 1377-1391."""
MELTING_FROM, MELTING_TO = 273.15, 275.15
"""Falling snow melts between these temperatures [K]; half at 1 degree Celsius, the mean rain-snow threshold of Jennings
et al. (2018), Nature Comm. 9, 1148."""
RAINS_FROM = 0.5e-3
"""Cloud [kg per kg of dry air] that does not turn to falling water: droplets stay small below it (Kessler 1969,
Meteorol. Monogr. 32: 0.5 g m-3, from memory)."""
NOTHING_LEFT = 1e-9
"""Falling water [kg m-1 s-1] below which, beyond the last cloud, the rest is counted as carried out of the transect."""
_HECTOPASCAL = 0.01 * TRIPLE_POINT_PRESSURE
_DENSITY = TRIPLE_POINT_PRESSURE * EPSILON / (R_DRY * TRIPLE_POINT_TEMPERATURE)
"""Scaled pressure in hPa, and density [kg m-3] of dry air of scaled pressure and temperature 1, times epsilon."""


@dataclass(frozen=True, eq=False)
class Falling:
    """Rain and snow of a march. Places (nk,), members (m,), streamlines (nz,).

    Attributes
    ----------
    landed : ndarray (nk, m) [kg m-1 s-1]
        Water that reached the ground on the step that ends at each place, for each metre of the range.
    landed_snow : ndarray (nk, m) [kg m-1 s-1]
        Of it, as snow.
    aloft : ndarray (nk, m, nz) [kg per kg of dry air]
        Falling water still in the streamlines.
    beyond : ndarray (m,) [kg m-1 s-1]
        Carried out of the transect before it landed.
    evaporated : ndarray (nk, m) [kg m-1 s-1]
        Falling water that evaporated on each step.
    """

    landed: Array
    landed_snow: Array
    aloft: Array
    beyond: Array
    evaporated: Array


@dataclass(frozen=True, eq=False)
class Path:
    """Where and how fast the streamlines go; arrays (nk, m, nz) unless said.

    Attributes
    ----------
    pressure : ndarray [Pa]
    height : ndarray [m above sea level]
    step_time : ndarray [s]
        Time spent on the step that ends at each place; 0 at the first.
    carried : ndarray (m, nz) [kg m-1 s-1]
        Dry air that flows in the layer of each streamline.
    """

    pressure: Array
    height: Array
    step_time: Array
    carried: Array


def march_with_rain(
    start: Parcel, path: Path, cloud_time: Array, fall_time: Array, *, freezing: bool = True
) -> tuple[March, Falling]:
    """Air taken along its streamlines while rain and snow form, fall, evaporate and melt.

    Parameters
    ----------
    start : Parcel, fields (m, nz)
    path : Path
    cloud_time, fall_time : ndarray (m,) [s]
        In which cloud turns to falling water, and which sets its fall speeds.
    freezing : bool
        False keeps cloud and falling water liquid.

    Returns
    -------
    March
        `removed` is the cloud that turned to falling water on each step.
    Falling

    Notes
    -----
    Each step: (1) reversible adiabatic move; (2) cloud turns to falling water,
    of what is above 0.5 g/kg the share
    ``1 - exp(-dt / cloud_time)``; (3) falling water sinks through the layers, implicit and upwind, so
    that no step is too long: of what is in a layer or falls into it the
    share ``k / (1 + k)`` leaves below, k the fall distance over the layer's depth; what leaves the lowest layer
    lands; (4) in unsaturated layers it evaporates by the law of Kessler (1969) as written by
    Klemp and Wilhelmson (1978), J. Atmos. Sci. 35, 1070-1096 (from memory), not beyond saturation;
    (5) heat: the enthalpy that air and falling water of a layer hold together is
    kept, the falling water at the temperature of the layer, snow below 0, rain above 2 degrees
    Celsius. Water and enthalpy close to rounding (see ``tests/crossing/test_falling.py``).

    Assumed: no collection of cloud by falling water beyond the cloud time, one fall speed
    for all rain and one for all snow, no falling water upwind.
    """
    shape = (path.pressure.shape[0], *np.shape(start.temperature))
    s0, water = np.asarray(entropy(start, freezing=freezing)), start.vapour + start.cloud
    temperature, cloudy = equilibrium.cloudless(path.pressure, s0, water, freezing=freezing)
    out = {
        "temperature": temperature,
        "vapour": np.broadcast_to(water, shape).copy(),
        "cloud": np.zeros(shape),
        "condensed": np.zeros(shape),
        "removed": np.zeros(shape),
        "entropy": np.broadcast_to(s0, shape).copy(),
    }
    landed, snow, evaporated = (np.zeros(shape[:2]) for _ in range(3))
    aloft = np.zeros(shape)
    if not cloudy.any():
        return March(pressure=path.pressure, **out), Falling(landed, snow, aloft, np.zeros(shape[1]), evaporated)
    # rain touches only streamlines up to the highest cloudy one, from the first cloudy place on
    low = slice(0, int(np.flatnonzero(cloudy.any(axis=(0, 1)))[-1]) + 1)
    places = np.flatnonzero(cloudy.any(axis=(1, 2)))
    first, last = int(places[0]), int(places[-1])
    before = start
    if first > 0:
        before = Parcel(path.pressure[first - 1], temperature[first - 1], water, np.zeros_like(water))
    state = _start(before, s0, low, freezing=freezing)
    way = _way(path, low, cloud_time, fall_time)
    stop = shape[0]
    for i in range(first, shape[0]):
        if i > last and float(np.sum(way.carried * state.falling)) < NOTHING_LEFT:
            stop = i
            break
        cloud = state.air.water - state.air.vapour
        air = steps.moved(state.air, way.pressure[i], way.log_pressure[i], state.entropy, freezing=freezing)
        now = air.water - air.vapour
        turned = way.turning[i] * np.maximum(now - RAINS_FROM, 0.0)
        state, (landed[i], snow[i], evaporated[i]) = _rained(air, state, turned, way, i, freezing=freezing)
        for key, value in (
            ("temperature", phase.TRIPLE * state.air.t),
            ("vapour", state.air.vapour),
            ("cloud", state.air.water - state.air.vapour),
            ("condensed", np.maximum(now - cloud, 0.0)),
            ("removed", turned),
            ("entropy", phase.R_VAPOUR * state.entropy),
        ):
            out[key][i, :, low] = value
        aloft[i, :, low] = state.falling
    if stop < shape[0]:
        _clear(out, path.pressure[..., low], state, slice(stop, shape[0]), low, freezing=freezing)
    beyond = np.sum(way.carried * state.falling, axis=-1)
    return March(pressure=path.pressure, **out), Falling(landed, snow, aloft, beyond, evaporated)


def _clear(out: dict[str, Array], pressure: Array, state: _State, rest: slice, low: slice, *, freezing: bool) -> None:
    """Places beyond the last cloud and rain, solved at once."""
    s = phase.R_VAPOUR * state.entropy
    clear = equilibrium_from_entropy(pressure[rest], s, state.air.water, freezing=freezing)
    for key, value in (("temperature", clear.temperature), ("vapour", clear.vapour), ("cloud", clear.cloud)):
        out[key][rest, :, low] = value
    out["condensed"][rest, :, low] = 0.0
    out["entropy"][rest, :, low] = s


@dataclass(frozen=True, eq=False)
class _Way:
    """What the steps need of the path, once for all places: pressure scaled as in `phase`."""

    pressure: Array
    log_pressure: Array
    time: Array
    turning: Array  # share of the cloud that turns to falling water
    sinking: Array  # fall distance of rain over the depth of the layer
    carried: Array


@dataclass(frozen=True, eq=False)
class _State:
    """Air and falling water after a step; entropy and enthalpy scaled as in `phase`."""

    air: steps.Air
    entropy: Array
    falling: Array
    falling_enthalpy: Array  # of a kilogram of it


def _way(path: Path, low: slice, cloud_time: Array, fall_time: Array) -> _Way:
    """The path of the streamlines that rain can touch."""
    pressure = np.ascontiguousarray(path.pressure[..., low]) * equilibrium.PER_TRIPLE_PRESSURE
    time = np.ascontiguousarray(path.step_time[..., low])
    speed = RAIN_SPEED * USUAL_FALL_TIME / fall_time
    return _Way(
        pressure=pressure,
        log_pressure=np.log(pressure),
        time=time,
        turning=-np.expm1(time / -cloud_time[:, np.newaxis]),
        sinking=speed[:, np.newaxis] * time / _layer_depth(path.height)[..., low],
        carried=np.ascontiguousarray(path.carried[:, low]),
    )


def _start(parcel: Parcel, entropy: Array, low: slice, *, freezing: bool) -> _State:
    """Air just before the first cloudy place."""
    fields = (parcel.pressure, parcel.temperature, parcel.vapour, parcel.cloud)
    p, t, v, cloud = (np.broadcast_to(x, entropy.shape)[:, low] for x in fields)
    q = np.log(t * equilibrium.PER_TRIPLE)
    air = steps.air_at(p * equilibrium.PER_TRIPLE_PRESSURE, q, v + cloud, freezing=freezing)
    none = np.zeros_like(t)
    return _State(air, entropy[:, low] * equilibrium.PER_RV, none, none)


def _rained(
    air: steps.Air, before: _State, turned: Array, way: _Way, i: int, *, freezing: bool
) -> tuple[_State, tuple[Array, Array, Array]]:
    """Steps 2 to 5 of a place: what turned to falling water, sank, evaporated, landed, and the air after that."""
    falling = before.falling + turned
    if not falling.any():
        none = np.zeros(falling.shape[0])
        return _State(air, before.entropy, falling, before.falling_enthalpy), (none, none, none)
    ice = _ice_share(air.t, freezing=freezing)
    leaving = way.sinking[i] * (1.0 - ice * (1.0 - SNOW_SPEED / RAIN_SPEED))
    leaving /= 1.0 + leaving
    down = _sunk(way.carried * falling, leaving)  # flux through the bottom of each layer
    from_above = np.zeros_like(down)
    np.divide(down[:, 1:], way.carried[:, :-1], out=from_above[:, :-1])
    whole = falling + from_above
    kept = whole - down / way.carried
    lost = _evaporation(air, kept, way.time[i])
    # Enthalpy: what came from above was at the temperature of the layer above; what was here, and its own cloud, at t.
    own = _falling_enthalpy(air.t, ice)
    above = np.concatenate([own[:, 1:], own[:, -1:]], axis=-1)
    heat = steps.enthalpy_of(air) + before.falling * before.falling_enthalpy + from_above * above - (whole - lost) * own
    after = steps.heated(air, heat, air.water - turned + lost, freezing=freezing)
    state = _State(after, steps.entropy_of(after), kept - lost, own)
    return state, (down[:, 0], down[:, 0] * ice[:, 0], np.sum(way.carried * lost, axis=-1))


def fallen_at_once(air: March, carried: Array, *, freezing: bool = True) -> Falling:
    """Rain and snow of a march with a prescribed share: what leaves the air lands where it left.

    Parameters
    ----------
    air : March, fields (nk, m, nz)
    carried : ndarray (m, nz) [kg m-1 s-1]
    freezing : bool

    Returns
    -------
    Falling
    """
    landed = np.sum(carried * air.removed, axis=-1)
    ice = _ice_share(air.temperature[:, :, 0] * equilibrium.PER_TRIPLE, freezing=freezing)
    none = np.zeros_like(landed)
    return Falling(landed, landed * ice, np.zeros_like(air.removed), np.zeros(landed.shape[1]), none)


def _sunk(flux: Array, leaving: Array) -> Array:
    """Flux through the bottom of each layer: the share `leaving` of what is in it or falls into it goes on.

    ``out[i] = leaving[i] (flux[i] + out[i + 1])``, by doubling: after each round
    what comes from twice as many layers is in it.
    """
    out, share = leaving * flux, leaving.copy()
    reach, count = 1, flux.shape[-1]
    while reach < count:
        out[..., :-reach] += share[..., :-reach] * out[..., reach:]
        share[..., :-reach] *= share[..., reach:]
        reach *= 2
    return out


def _ice_share(temperature: Array, *, freezing: bool) -> Array:
    """Share of falling water that is snow; temperature over 273.16 K."""
    if not freezing:
        return np.zeros_like(temperature)
    span = MELTING_TO - MELTING_FROM
    warm = MELTING_TO / span - (TRIPLE_POINT_TEMPERATURE / span) * temperature
    return np.minimum(np.maximum(warm, 0.0), 1.0)


def _falling_enthalpy(temperature: Array, ice: Array) -> Array:
    """Enthalpy of falling water from liquid at the triple point, scaled; snow is without its heat of fusion."""
    liquid, solid = HEAT_CAPACITY_LIQUID / R_VAPOUR, HEAT_CAPACITY_ICE / R_VAPOUR
    above = temperature - phase.ONE
    return np.asarray(liquid * above - ice * ((liquid - solid) * above + phase.FUSION))


def _evaporation(air: steps.Air, falling: Array, time: Array) -> Array:
    """Falling water that evaporates in a step, never so much that the air saturates.

    Klemp and Wilhelmson (1978), in cgs units as printed: ``C = 1.6 + 124.9 (rho q)^0.2046``, rate
    ``(1 - v / vs) C (rho q)^0.525 / (rho (5.4e5 + 2.55e6 / (p vs)))``, rho in g cm-3, p in hPa.
    """
    lack = np.maximum(1.0 - air.vapour / air.saturation, 0.0)  # nothing in cloud
    rho = (1e-3 * _DENSITY) * air.pressure / ((air.vapour + phase.EPSILON) * air.t)
    log_water = np.log(np.maximum(rho * falling, equilibrium.TINY))
    ventilation = (1.6 + 124.9 * np.exp(0.2046 * log_water)) * np.exp(0.525 * log_water)
    rate = lack * ventilation / (rho * (5.4e5 + (2.55e6 / _HECTOPASCAL) / (air.pressure * air.saturation)))
    # evaporating cools: about a third of the lack can be filled before the air is saturated, at 0 degrees half
    room = 0.3 * lack * air.saturation
    return np.asarray(np.minimum(np.minimum(rate * time, 0.9 * np.maximum(falling, 0.0)), room))


def _layer_depth(height: Array) -> Array:
    """Depth of the layer of each streamline [m]: to halfway to its neighbours; the lowest from the ground."""
    edge = 0.5 * (height[..., 1:] + height[..., :-1])
    ends = np.concatenate([height[..., :1], edge, height[..., -1:]], axis=-1)
    return np.maximum(np.diff(ends, axis=-1), 1.0)
