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

NEAR, NEAR_CLEAR = 1e-5, 4e-4
"""Changes of q, 0.003 K in cloud and 0.1 K outside, up to which saturation is brought along: to 1e-9 and 1e-7."""
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


def air_at(pressure: Array, q: Array, water: Array, vapour: Array | None = None, *, freezing: bool) -> Air:
    """Air at a temperature at which it is in equilibrium; its vapour is at most saturated."""
    t = np.exp(q)
    log_saturation, *heat = phase.condensate_and_bend(q, t, freezing)
    saturation = _saturation(log_saturation, pressure)
    v = np.minimum(saturation, water) if vapour is None else vapour
    return Air(q, t, pressure, np.log(pressure), water, v, saturation, log_saturation, *heat)


def moved(air: Air, pressure: Array, log_pressure: Array, entropy: Array, *, freezing: bool) -> Air:
    """The same air, of known entropy, at a pressure that is not far from its own."""
    water = air.water
    log_all, clear_q = equilibrium.without_cloud(log_pressure, entropy, water)
    # in cloud: first from the saturation of where it was, then once more with that of the temperature found
    e = air.pressure * air.saturation / (air.saturation + phase.EPSILON)
    here = air._replace(pressure=pressure, log_pressure=log_pressure, vapour=phase.EPSILON * e / (pressure - e))
    guess = air.q + _halley(here, entropy - entropy_of(here, air.log_saturation))
    q = np.maximum(clear_q, guess)  # cloud only warms
    t = np.exp(q)
    log_saturation, *heat = phase.condensate_and_bend(q, t, freezing)
    saturation = _saturation(log_saturation, pressure)
    near = Air(q, t, pressure, log_pressure, water, saturation, saturation, log_saturation, *heat)
    to_clear = clear_q - q
    clear = _log_saturation(near, to_clear) >= log_all
    dq = np.where(clear, to_clear, _halley(near, entropy - entropy_of(near, log_saturation)))
    after = _carried(near, dq, clear)
    far = _far(near, dq, clear, freezing=freezing)
    if far is None:
        return after
    p, w, start = pressure[far], water[far], (q + dq)[far]
    found, _ = equilibrium.from_entropy_guess(p, entropy[far], w, start, freezing=freezing, tolerance=_FINE)
    return _replaced(after, far, air_at(p, found, w, freezing=freezing))


def heated(air: Air, enthalpy: Array, water: Array, *, freezing: bool) -> Air:
    """Air of given enthalpy and water at the pressure of air that is not far from it."""
    cp = phase.CP_DRY + phase.CP_VAPOUR * water
    log_all = air.log_pressure + np.log(np.maximum(water, equilibrium.TINY) / (water + phase.EPSILON))
    x = (enthalpy - phase.VAPORISATION * water + cp) / (cp * air.t) - phase.ONE
    to_clear = x * (phase.ONE - x * (_HALF - x * _THIRD))  # ln(1 + x)
    clear = _log_saturation(air, to_clear) >= log_all
    saturated = air._replace(water=water, vapour=air.saturation)
    x = _halley(saturated, (enthalpy - enthalpy_of(saturated)) / air.t)
    dq = np.where(clear, to_clear, x * (phase.ONE - x * (_HALF - x * _THIRD)))
    after = _carried(saturated, dq, clear)
    far = _far(air, dq, clear, freezing=freezing)
    if far is None:
        return after
    p, w = air.pressure[far], water[far]
    start = np.exp(air.q + dq)[far]
    found = equilibrium.from_enthalpy_guess(p, enthalpy[far], w, start, freezing=freezing, tolerance=_FINE)[0]
    return _replaced(after, far, air_at(p, np.log(found), w, freezing=freezing))


def entropy_of(air: Air, log_e: Array | None = None) -> Array:
    """Entropy, with the logarithm of the vapour pressure where that is known."""
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


def _saturation(log_saturation: Array, pressure: Array) -> Array:
    """Vapour of saturated air."""
    e = np.exp(log_saturation)
    return np.asarray(phase.EPSILON * e / (pressure - e))


def _log_saturation(air: Air, dq: Array) -> Array:
    """Logarithm of the saturation pressure a little warmer."""
    return np.asarray(air.log_saturation + dq * (air.bound + _HALF * (air.latent_slope - air.bound) * dq))


def _halley(air: Air, lack: Array) -> Array:
    """Change of q, or of t over t, by which saturated air gains what it lacks of entropy, or of enthalpy over t."""
    cloud = air.water - air.vapour
    per_dry = phase.ONE + air.vapour * _PER_EPSILON  # pressure over dry pressure
    gain = air.vapour * per_dry * air.bound
    heat = phase.CP_DRY + phase.CP_VAPOUR * air.water - cloud * air.latent_slope + air.bound * gain
    # its derivative: d(bound gain)/dq + gain latent_slope - cloud latent_bend
    bend = gain * (air.bound * (air.bound * (per_dry + per_dry - phase.ONE) - _TWO) + _THREE * air.latent_slope)
    bend -= cloud * air.latent_bend
    newton = lack / heat
    return np.asarray(newton / np.maximum(phase.ONE + _HALF * newton * bend / heat, _HALF))


def _carried(air: Air, dq: Array, clear: NDArray[np.bool_]) -> Air:
    """Air at a temperature near by, saturation brought along."""
    q = air.q + dq
    log_saturation = _log_saturation(air, dq)
    curve = air.latent_slope - air.bound
    bound = air.bound + dq * (curve + _HALF * dq * (air.latent_bend - curve))
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
        bound=bound,
        latent_slope=air.latent_slope + dq * air.latent_bend,
        latent_bend=air.latent_bend,
    )


def _far(air: Air, dq: Array, clear: NDArray[np.bool_], *, freezing: bool) -> NDArray[np.bool_] | None:
    """Places whose change was too long, or crossed in cloud an end of the freezing range, where latent heat has a kink."""
    far = np.abs(dq) > np.where(clear, NEAR_CLEAR, NEAR)
    if freezing and air.latent_bend.ndim:  # else all of it is warm
        after = air.q + dq
        crossed = (air.q > phase.ZERO) != (after > phase.ZERO)
        crossed |= (air.q > _ALL_ICE) != (after > _ALL_ICE)
        far |= crossed & ~clear
    return far if far.any() else None


def _replaced(air: Air, far: NDArray[np.bool_], some: Air) -> Air:
    """Air with some places put in."""
    slope, bend = (np.array(np.broadcast_to(x, air.q.shape)) for x in (air.latent_slope, air.latent_bend))
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
        whole[far] = part
    return air._replace(latent_slope=slope, latent_bend=bend)
