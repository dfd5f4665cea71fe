"""The march with rain worked out: cloud turns to falling water in time, which drifts, evaporates, melts and lands.

Falling water keeps to the streamlines it falls through: in each of them it has
the streamline's temperature, and gives or takes the heat of reaching it.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.parcel import Parcel, enthalpy, entropy, equilibrium_from_enthalpy, equilibrium_from_entropy
from orolift.air.saturation import saturation_mixing_ratio
from orolift.constants import (
    EPSILON,
    HEAT_CAPACITY_ICE,
    HEAT_CAPACITY_LIQUID,
    LATENT_HEAT_SUBLIMATION_TRIPLE,
    LATENT_HEAT_VAPORISATION_TRIPLE,
    R_DRY,
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
BLOCK, NO_SHARE = 16, 1e-18
"""Layers whose running products are taken together, and the share that stands for none, so that none overflows."""


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
    kept = equilibrium_from_entropy(path.pressure, s0, water, freezing=freezing)
    condensed = np.maximum(np.diff(kept.cloud, axis=0, prepend=start.cloud[np.newaxis]), 0.0)
    out = {
        "temperature": kept.temperature,
        "vapour": kept.vapour,
        "cloud": kept.cloud,
        "condensed": condensed,
        "removed": np.zeros(shape),
        "entropy": np.broadcast_to(s0, shape).copy(),
    }
    landed, snow, evaporated = (np.zeros(shape[:2]) for _ in range(3))
    aloft = np.zeros(shape)
    cloudy = kept.cloud > 0.0
    if not cloudy.any():
        return March(pressure=path.pressure, **out), Falling(landed, snow, aloft, np.zeros(shape[1]), evaporated)
    # rain touches only streamlines up to the highest cloudy one, from the first cloudy place on
    low = slice(0, int(np.flatnonzero(cloudy.any(axis=(0, 1)))[-1]) + 1)
    places = np.flatnonzero(cloudy.any(axis=(1, 2)))
    first, last = int(places[0]), int(places[-1])
    state = _start(start, kept, s0, first, low)
    rest = Path(path.pressure[..., low], path.height[..., low], path.step_time[..., low], path.carried[:, low])
    depth = _layer_depth(path.height)[..., low]
    scale = (USUAL_FALL_TIME / fall_time)[:, np.newaxis]
    turning = 1.0 - np.exp(-rest.step_time / cloud_time[:, np.newaxis])
    stop, earlier = shape[0], state.parcel.temperature
    for i in range(first, shape[0]):
        if i > last and float(np.sum(rest.carried * state.falling)) < NOTHING_LEFT:
            stop = i
            break
        water = state.parcel.vapour + state.parcel.cloud
        parcel = equilibrium_from_entropy(
            rest.pressure[i],
            state.entropy,
            water,
            freezing=freezing,
            first_guess=2.0 * state.parcel.temperature - earlier,  # straight on: most places need one step
            tolerance=1e-3,
        )
        earlier = state.parcel.temperature
        new = np.maximum(parcel.cloud - state.parcel.cloud, 0.0)
        turned = turning[i] * np.maximum(parcel.cloud - RAINS_FROM, 0.0)
        state, step = _rained(
            parcel, state, turned, rest.carried, rest.step_time[i], depth[i], scale, freezing=freezing
        )
        landed[i], snow[i], evaporated[i] = step
        aloft[i, :, low] = state.falling
        for key, value in (
            ("temperature", state.parcel.temperature),
            ("vapour", state.parcel.vapour),
            ("cloud", state.parcel.cloud),
            ("condensed", new),
            ("removed", turned),
            ("entropy", state.entropy),
        ):
            out[key][i, :, low] = value
    if stop < shape[0]:
        _clear(out, rest.pressure, state, slice(stop, shape[0]), low, freezing=freezing)
    beyond = np.sum(rest.carried * state.falling, axis=-1)
    return March(pressure=path.pressure, **out), Falling(landed, snow, aloft, beyond, evaporated)


def _start(start: Parcel, kept: Parcel, s0: Array, first: int, low: slice) -> _State:
    """Air just before the first cloudy place."""
    if first == 0:
        parcel = Parcel(*(np.broadcast_to(x, s0.shape)[:, low] for x in _fields(start)))
    else:
        parcel = Parcel(*(x[first - 1][:, low] for x in _fields(kept)))
    return _State(parcel, s0[:, low], np.zeros_like(parcel.temperature), parcel.temperature)


def _fields(parcel: Parcel) -> tuple[Array, Array, Array, Array]:
    return parcel.pressure, parcel.temperature, parcel.vapour, parcel.cloud


def _clear(out: dict[str, Array], pressure: Array, state: _State, rest: slice, low: slice, *, freezing: bool) -> None:
    """Places beyond the last cloud and rain, solved at once."""
    water = state.parcel.vapour + state.parcel.cloud
    clear = equilibrium_from_entropy(pressure[rest], state.entropy, water, freezing=freezing)
    for key, value in (("temperature", clear.temperature), ("vapour", clear.vapour), ("cloud", clear.cloud)):
        out[key][rest, :, low] = value
    out["condensed"][rest, :, low] = 0.0
    out["entropy"][rest, :, low] = state.entropy


@dataclass(frozen=True, eq=False)
class _State:
    """Air and falling water after a step."""

    parcel: Parcel
    entropy: Array
    falling: Array
    falling_temperature: Array


def _rained(
    parcel: Parcel,
    before: _State,
    turned: Array,
    carried: Array,
    time: Array,
    depth: Array,
    scale: Array,
    *,
    freezing: bool,
) -> tuple[_State, tuple[Array, Array, Array]]:
    """Steps 2 to 5 of a place: what turned to falling water, sank, evaporated, landed, and the air after that."""
    falling = before.falling + turned
    none = np.zeros(falling.shape[0])
    if not falling.any():
        s = before.entropy
        return _State(parcel, s, np.zeros_like(falling), parcel.temperature), (none, none, none)
    t = parcel.temperature
    ice = _ice_share(t, freezing=freezing)
    speed = scale * (ice * SNOW_SPEED + (1.0 - ice) * RAIN_SPEED)
    leaving = speed * time / depth
    leaving = leaving / (1.0 + leaving)
    down = _sunk(carried * falling, leaving)  # flux through the bottom of each layer
    from_above = np.concatenate([down[:, 1:], np.zeros_like(down[:, :1])], axis=-1)
    kept = falling + (from_above - down) / carried
    left = Parcel(parcel.pressure, t, parcel.vapour, parcel.cloud - turned)
    lost = _evaporation(left, kept, time, freezing=freezing)
    # Enthalpy: what came from above was at the temperature of the layer above; what was here, and its own cloud, at t.
    above = np.concatenate([t[:, 1:], t[:, -1:]], axis=-1)
    heat = enthalpy(parcel, freezing=freezing) + before.falling * _falling_enthalpy(
        before.falling_temperature, freezing=freezing
    )
    heat = heat + from_above / carried * _falling_enthalpy(above, freezing=freezing)
    heat = heat - (down / carried + kept - lost) * _falling_enthalpy(t, freezing=freezing)
    water = left.vapour + left.cloud + lost
    after = equilibrium_from_enthalpy(parcel.pressure, heat, water, freezing=freezing, first_guess=t, tolerance=1e-3)
    state = _State(after, np.asarray(entropy(after, freezing=freezing)), kept - lost, t)
    return state, (down[:, 0], down[:, 0] * ice[:, 0], np.sum(carried * lost, axis=-1))


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
    ice = _ice_share(air.temperature[:, :, 0], freezing=freezing)
    none = np.zeros_like(landed)
    return Falling(landed, landed * ice, np.zeros_like(air.removed), np.zeros(landed.shape[1]), none)


def _sunk(flux: Array, leaving: Array) -> Array:
    """Flux through the bottom of each layer: the share `leaving` of what is in it or falls into it goes on.

    ``out[i] = leaving[i] (flux[i] + out[i + 1])``, block by block with running products from the top down.
    """
    count = flux.shape[-1]
    out = np.empty_like(flux)
    log_share = np.log(np.maximum(leaving, NO_SHARE))
    above = np.zeros(flux.shape[:-1])
    for stop in range(count, 0, -BLOCK):
        block = slice(max(stop - BLOCK, 0), stop)
        share = log_share[..., block][..., ::-1]
        part = flux[..., block][..., ::-1].copy()
        part[..., 0] += above
        passed = np.cumsum(share, axis=-1)
        lowest = passed[..., -1:]
        # relative to the lowest layer of the block, so that nothing overflows
        sums = np.cumsum(part * np.exp(lowest - passed + share), axis=-1) * np.exp(passed - lowest)
        out[..., block] = sums[..., ::-1]
        above = out[..., block.start]
    return out


def _ice_share(temperature: Array, *, freezing: bool) -> Array:
    """Share of falling water that is snow."""
    if not freezing:
        return np.zeros_like(temperature)
    return np.clip((MELTING_TO - temperature) / (MELTING_TO - MELTING_FROM), 0.0, 1.0)


def _falling_enthalpy(temperature: Array, *, freezing: bool) -> Array:
    """Enthalpy of falling water [J kg-1], from liquid at the triple point; snow without its heat of fusion."""
    fusion = LATENT_HEAT_SUBLIMATION_TRIPLE - LATENT_HEAT_VAPORISATION_TRIPLE
    above = temperature - TRIPLE_POINT_TEMPERATURE
    ice = _ice_share(temperature, freezing=freezing)
    return np.asarray((1.0 - ice) * HEAT_CAPACITY_LIQUID * above + ice * (HEAT_CAPACITY_ICE * above - fusion))


def _evaporation(air: Parcel, falling: Array, time: Array, *, freezing: bool) -> Array:
    """Falling water that evaporates in a step, never so much that the air saturates.

    Klemp and Wilhelmson (1978), in cgs units as printed: ``C = 1.6 + 124.9 (rho q)^0.2046``, rate
    ``(1 - v / vs) C (rho q)^0.525 / (rho (5.4e5 + 2.55e6 / (p vs)))``, rho in g cm-3, p in hPa.
    """
    saturation = saturation_mixing_ratio(air.pressure, air.temperature, freezing=freezing)
    lack = np.where(air.cloud > 0.0, 0.0, np.maximum(1.0 - air.vapour / saturation, 0.0))
    rho = 1e-3 * air.pressure * EPSILON / ((air.vapour + EPSILON) * R_DRY * air.temperature)
    water = np.maximum(rho * falling, 0.0)
    ventilation = 1.6 + 124.9 * water**0.2046
    rate = lack * ventilation * water**0.525 / (rho * (5.4e5 + 2.55e6 / (0.01 * air.pressure * saturation)))
    # evaporating cools: about a third of the lack can be filled before the air is saturated, at 0 degrees half
    room = 0.3 * lack * saturation
    return np.asarray(np.minimum(np.minimum(rate * time, 0.9 * np.maximum(falling, 0.0)), room))


def _layer_depth(height: Array) -> Array:
    """Depth of the layer of each streamline [m]: to halfway to its neighbours; the lowest from the ground."""
    edge = 0.5 * (height[..., 1:] + height[..., :-1])
    ends = np.concatenate([height[..., :1], edge, height[..., -1:]], axis=-1)
    return np.maximum(np.diff(ends, axis=-1), 1.0)
