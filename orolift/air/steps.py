"""Equilibrium from a near guess, with one evaluation of saturation a step: the fast, unchecked core of the marches.

Scaled as in `phase`, with the equations of `equilibrium`. What is known of saturation at the guess is carried to the
solution by its own derivatives, d(ln e)/dq = b and db/dq = dL/dT - b with the entropy of vaporisation b. So a state
has its saturation with it, and the next change, of heat or of water, starts from there.

Air without cloud is solved in closed form. In cloud one step of Halley's method, which counts the bend of the curve
as well, leaves a thousandth of what Newton's would. Places for which the guess was not near enough, or lay across an
end of the freezing range, are solved by themselves.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from orolift import constants
from orolift.air import equilibrium, phase

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]

NEAR, NEAR_CLEAR = 4e-5, 4e-4
"""Changes of q, 0.01 K in cloud and 0.1 K outside, up to which saturation is brought along: to 1e-10 and 1e-7."""
MANY = 500
"""Places from which on those without cloud are told apart first: with fewer, numpy's calls cost more than sums."""
_ROUNDS = 3  # so often places that are still far are stepped by themselves, before Newton's method with its bracket
_FINE = 1e-8  # last step in q of places that are solved by themselves: what is left is its square
_ALL_ICE = phase.number(np.log(constants.ALL_ICE_TEMPERATURE / constants.TRIPLE_POINT_TEMPERATURE))
_HALF, _TWO, _THREE = phase.number(0.5), phase.number(2.0), phase.number(3.0)
_THIRD = phase.number(1.0 / 3.0)
_PER_EPSILON = phase.number(1.0 / constants.EPSILON)


class Air(NamedTuple):
    """Air in equilibrium, and saturation at its temperature; arrays of one shape, scaled as in `phase`."""

    q: Array
    t: Array
    pressure: Array
    log_pressure: Array
    water: Array  # vapour and cloud
    vapour: Array
    saturation: Array  # vapour of saturated air
    log_saturation: Array  # logarithm of its pressure
    bound: Array  # entropy of vaporisation
    latent_slope: Array
    latent_bend: Array  # its change with q


class _Goal(NamedTuple):
    """What air is to reach: entropy, or enthalpy."""

    value: Array
    log_all: Array  # logarithm of the vapour pressure with all water as vapour
    clear_q: Array  # q at which air without cloud has reached it
    is_entropy: bool = True


def air_at(pressure: Array, q: Array, water: Array, *, freezing: bool) -> Air:
    """Air at a temperature at which it is in equilibrium; its vapour is at most saturated."""
    air = _saturated(q, pressure, np.log(pressure), water, freezing=freezing)
    return air._replace(vapour=np.minimum(air.saturation, water))


def moved(air: Air, pressure: Array, log_pressure: Array, entropy: Array, *, freezing: bool) -> Air:
    """The same air, of known entropy, at a pressure that is not far from its own."""
    log_all, clear_q = equilibrium.without_cloud(log_pressure, entropy, air.water)
    goal = _Goal(entropy, log_all, clear_q)
    if air.q.size < MANY:
        return _moved_in_cloud(air, pressure, log_pressure, goal, freezing=freezing)
    clear = _saturated(clear_q, pressure, log_pressure, air.water, freezing=freezing)
    cloudy = np.flatnonzero(clear.log_saturation < log_all)
    clear = clear._replace(vapour=air.water.copy())
    if not cloudy.size:
        return clear
    there = Air(*(x.reshape(-1)[cloudy] if x.ndim else x for x in air))
    s, log_v, q, p, log_p = (x.reshape(-1)[cloudy] for x in (entropy, log_all, clear_q, pressure, log_pressure))
    some = _moved_in_cloud(there, p, log_p, _Goal(s, log_v, q), freezing=freezing)
    return _replaced(clear, cloudy, some)


def _moved_in_cloud(air: Air, pressure: Array, log_pressure: Array, goal: _Goal, *, freezing: bool) -> Air:
    """The same air at its goal, where it may be cloud."""
    # first guess: in cloud from the saturation of where it was; cloud only warms
    e = air.pressure * air.saturation / (air.saturation + phase.EPSILON)
    here = air._replace(pressure=pressure, log_pressure=log_pressure, vapour=phase.EPSILON * e / (pressure - e))
    q = np.maximum(goal.clear_q, air.q + _halley(here, _lack(here, goal)))
    return _settled(_saturated(q, pressure, log_pressure, air.water, freezing=freezing), goal, freezing=freezing)


def heated(air: Air, enthalpy: Array, water: Array, *, freezing: bool) -> Air:
    """Air of given enthalpy and water at the pressure of air that is not far from it."""
    cp = phase.CP_DRY + phase.CP_VAPOUR * water
    log_all = air.log_pressure + np.log(np.maximum(water, equilibrium.TINY) / (water + phase.EPSILON))
    clear_q = np.log((enthalpy - phase.VAPORISATION * water) / cp + phase.ONE)
    goal = _Goal(enthalpy, log_all, clear_q, is_entropy=False)
    return _settled(air._replace(water=water, vapour=air.saturation), goal, freezing=freezing)


def entropy_of(air: Air, log_e: Array | None = None) -> Array:
    """Entropy; the logarithm of the vapour pressure is worked out unless it is known."""
    weight = np.log(air.vapour + phase.EPSILON)
    if log_e is None:
        log_e = air.log_pressure + (np.log(np.maximum(air.vapour, equilibrium.TINY)) - weight)
    dry = (phase.CP_DRY + phase.CP_VAPOUR * air.water) * air.q - phase.EPSILON * (
        air.log_pressure + (equilibrium.LOG_EPSILON - weight)
    )
    wet = air.water * (phase.VAPORISATION - log_e) - (air.water - air.vapour) * air.bound
    return np.asarray(dry + wet + equilibrium.ENTROPY_ZERO)


def enthalpy_of(air: Air) -> Array:
    """Enthalpy."""
    cp = phase.CP_DRY + phase.CP_VAPOUR * air.water
    heat = cp * (air.t - phase.ONE) + phase.VAPORISATION * air.water
    return np.asarray(heat - (air.water - air.vapour) * air.bound * air.t)


def condensate_entropy(air: Air) -> Array:
    """Entropy of a kilogram of condensate."""
    return np.asarray(phase.VAPORISATION + phase.CP_VAPOUR * air.q - air.log_saturation - air.bound)


def _saturated(q: Array, pressure: Array, log_pressure: Array, water: Array, *, freezing: bool) -> Air:
    """Saturated air, whatever water that takes."""
    t = np.exp(q)
    log_saturation, *heat = phase.condensate_and_bend(q, t, freezing)
    v = _saturation(log_saturation, pressure)
    return Air(q, t, pressure, log_pressure, water, v, v, log_saturation, *heat)


def _saturation(log_saturation: Array, pressure: Array) -> Array:
    """Vapour of saturated air."""
    e = np.exp(log_saturation)
    return np.asarray(phase.EPSILON * e / (pressure - e))


def _log_saturation(air: Air, dq: Array) -> Array:
    """Logarithm of the saturation pressure a little warmer."""
    return np.asarray(air.log_saturation + dq * (air.bound + _HALF * (air.latent_slope - air.bound) * dq))


def _lack(air: Air, goal: _Goal) -> Array:
    """What saturated air lacks of its entropy, or of its enthalpy over t."""
    if goal.is_entropy:
        return goal.value - entropy_of(air, air.log_saturation)
    return np.asarray((goal.value - enthalpy_of(air)) / air.t)


def _halley(air: Air, lack: Array) -> Array:
    """Change of q, or of t over t, by which saturated air gains what it lacks."""
    cloud = air.water - air.vapour
    per_dry = phase.ONE + air.vapour * _PER_EPSILON  # pressure over dry pressure
    gain = air.vapour * per_dry * air.bound
    heat = phase.CP_DRY + phase.CP_VAPOUR * air.water - cloud * air.latent_slope + air.bound * gain
    # its derivative: d(bound gain)/dq + gain latent_slope - cloud latent_bend
    bend = gain * (air.bound * (air.bound * (per_dry + per_dry - phase.ONE) - _TWO) + _THREE * air.latent_slope)
    bend -= cloud * air.latent_bend
    newton = lack / heat
    return np.asarray(newton / np.maximum(phase.ONE + _HALF * newton * bend / heat, _HALF))


def _settled(air: Air, goal: _Goal, *, freezing: bool, rounds: int = _ROUNDS) -> Air:
    """Air at its goal, from saturated air near it: one step, and further ones for the places that are still far."""
    to_clear = goal.clear_q - air.q
    clear = _log_saturation(air, to_clear) >= goal.log_all
    change = _halley(air, _lack(air, goal))
    if not goal.is_entropy:
        change *= phase.ONE - change * (_HALF - change * _THIRD)  # ln(1 + change)
    dq = np.where(clear, to_clear, change)
    after = _carried(air, dq, clear)
    far = np.flatnonzero(_far(air, dq, clear, freezing=freezing))
    if not far.size:
        return after
    p, q, w, log_p = (x.reshape(-1)[far] for x in (air.pressure, after.q, air.water, air.log_pressure))
    log_all, value, clear_q = (x.reshape(-1)[far] for x in (goal.log_all, goal.value, goal.clear_q))
    if rounds:
        there = _saturated(q, p, log_p, w, freezing=freezing)
        some = _Goal(value, log_all, clear_q, goal.is_entropy)
        return _replaced(after, far, _settled(there, some, freezing=freezing, rounds=rounds - 1))
    if goal.is_entropy:
        q, _ = equilibrium.from_entropy_guess(p, value, w, q, freezing=freezing, tolerance=_FINE)
    else:
        t, _ = equilibrium.from_enthalpy_guess(p, value, w, np.exp(q), freezing=freezing, tolerance=_FINE)
        q = np.log(t)
    return _replaced(after, far, air_at(p, q, w, freezing=freezing))


def _carried(air: Air, dq: Array, clear: NDArray[np.bool_]) -> Air:
    """Air at a temperature near by, saturation brought along."""
    q = air.q + dq
    log_saturation = _log_saturation(air, dq)
    curve = air.latent_slope - air.bound
    saturation = _saturation(log_saturation, air.pressure)
    return Air(
        q=q,
        t=np.exp(q),
        pressure=air.pressure,
        log_pressure=air.log_pressure,
        water=air.water,
        vapour=np.where(clear, air.water, np.minimum(saturation, air.water)),
        saturation=saturation,
        log_saturation=log_saturation,
        bound=air.bound + dq * (curve + _HALF * dq * (air.latent_bend - curve)),
        latent_slope=air.latent_slope + dq * air.latent_bend,
        latent_bend=air.latent_bend,
    )


def _far(air: Air, dq: Array, clear: NDArray[np.bool_], *, freezing: bool) -> NDArray[np.bool_]:
    """Places whose change was too long, or in cloud crossed an end of the freezing range, a kink of latent heat."""
    far = np.abs(dq) > np.where(clear, NEAR_CLEAR, NEAR)
    if freezing and air.latent_bend.ndim:  # else all of it is warm
        after = air.q + dq
        crossed = (air.q > phase.ZERO) != (after > phase.ZERO)
        crossed |= (air.q > _ALL_ICE) != (after > _ALL_ICE)
        far |= crossed & ~clear
    return np.asarray(far)


def _replaced(air: Air, far: NDArray[np.intp], some: Air) -> Air:
    """Air with some places put in."""
    slope, bend = (x.copy() if x.ndim else np.full(air.q.shape, x) for x in (air.latent_slope, air.latent_bend))
    for whole, part in (
        (air.q, some.q),
        (air.t, some.t),
        (air.vapour, some.vapour),
        (air.saturation, some.saturation),
        (air.log_saturation, some.log_saturation),
        (air.bound, some.bound),
        (slope, some.latent_slope),
        (bend, some.latent_bend),
    ):
        whole.reshape(-1)[far] = part
    return air._replace(latent_slope=slope, latent_bend=bend)
