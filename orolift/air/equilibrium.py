"""Temperature at which air of given entropy or enthalpy is in equilibrium: the fast, unchecked solvers.

Scaled as in `phase`. Per kg of dry air, with total water r, vapour v, cloud
c = r - v, dry pressure pd and entropy of vaporisation b = L / (Rv T),

    entropy / Rv               (cpd + r cpv) q + r l - (Rd/Rv) ln(pd / p0) - r ln e - c b
    enthalpy / (Rv 273.16 K)   (cpd + r cpv)(t - 1) + r l - c b t

where l = L / (Rv 273.16 K) at the triple point. In air that is not saturated
v = r and e is that of the vapour present; in cloud e is that of
saturation. Both cases are one formula with the smaller of the two, and have one
slope, d(entropy)/dq = d(enthalpy)/dt = cpd + r cpv - c dL/dT + b dv/dq: the
first law at constant pressure. In ln T, or T, the unsaturated branch is a
straight line, so that Newton's step on it is the closed form.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from orolift import constants
from orolift.air import phase
from orolift.errors import OutOfRangeError

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    Array = NDArray[np.float64]

TINY = phase.number(1e-30)  # mixing ratio that stands for none where a logarithm is taken
PER_TRIPLE = phase.number(1.0 / constants.TRIPLE_POINT_TEMPERATURE)
PER_TRIPLE_PRESSURE = phase.number(1.0 / constants.TRIPLE_POINT_PRESSURE)
PER_RV = phase.number(1.0 / constants.R_VAPOUR)
REFERENCE = float(constants.REFERENCE_PRESSURE / constants.TRIPLE_POINT_PRESSURE)
ENTROPY_ZERO = phase.number(constants.EPSILON * np.log(REFERENCE))
LOG_EPSILON = phase.number(np.log(constants.EPSILON))
NO_TEMPERATURE = (
    "no equilibrium temperature: a pressure, water content or energy of the air is not a number or far outside the "
    "atmosphere. orolift works in kelvin, pascal and kg per kg; check the units of what went in."
)
PER_ENTHALPY = phase.number(1.0 / (constants.R_VAPOUR * constants.TRIPLE_POINT_TEMPERATURE))
_LOWEST, _HIGHEST = 0.25, 1.7  # bracket for t when Newton's method wanders: 68 K to 464 K
_BRACKET_Q = (float(np.log(_LOWEST)), float(np.log(_HIGHEST)))
_PLAIN_STEPS, _ALL_STEPS = 10, 100
_KELVIN = 1.0 / 250.0  # a step of 1 K in q or t, near enough
_BLOCK = 16384  # places solved together


class Mixture(NamedTuple):
    """What the solvers need to know of air at a temperature."""

    log_e: Array  # of the vapour present
    bound: Array  # entropy of vaporisation
    latent_slope: Array
    dry: Array  # dry pressure
    vapour: Array
    cloud: Array
    gain: Array  # d(vapour)/dq at constant pressure, 0 where not saturated
    heat: Array  # d(enthalpy)/dT at constant pressure


def all_vapour(pressure: Array, water: Array) -> Array:
    """Logarithm of the vapour pressure when all the water is vapour."""
    w = np.maximum(water, TINY)
    return np.log(pressure * w / (w + phase.EPSILON))


def mixture(q: Array, t: Array, pressure: Array, water: Array, log_all: Array, cp: Array, freezing: bool) -> Mixture:
    """Air of given total water, its vapour no more than saturated; `cp` is that with all water as vapour."""
    log_saturation, bound, latent_slope = phase.condensate(q, t, freezing)
    log_e = np.minimum(log_saturation, log_all)
    e = np.exp(log_e)
    dry = pressure - e
    vapour = phase.EPSILON * e / dry
    cloud = water - vapour
    gain = vapour * (pressure / dry) * bound * (log_saturation < log_all)
    heat = cp - cloud * latent_slope + bound * gain
    return Mixture(log_e, bound, latent_slope, dry, vapour, cloud, gain, heat)


def root(
    step: Callable[[Array], Array], x: Array, tolerance: float, bounds: tuple[float, float]
) -> tuple[Array, Array]:
    """Zero of an increasing function, and the last step to it.

    `step` is Newton's step at x. If ten of them do not settle, which happens
    only from a far-off start across the edge of the cloud, a bracket is kept as well.
    """
    below, above = np.asarray(bounds[0]), np.asarray(bounds[1])
    for count in range(_ALL_STEPS):
        dx = step(x)
        size = np.maximum.reduce(np.abs(dx), axis=None)
        if size <= tolerance:
            return x + dx, dx
        if size != size:  # noqa: PLR0124 (the cheapest test for NaN)
            break
        if count < _PLAIN_STEPS:
            x = x + dx if size < 0.1 else x + np.minimum(np.maximum(dx, -0.1), 0.1)
        else:
            below, above = np.where(dx > 0.0, x, below), np.where(dx > 0.0, above, x)
            inside = (np.abs(dx) <= tolerance) | ((x + dx > below) & (x + dx < above))
            x = np.where(inside, x + dx, 0.5 * (below + above))
    raise OutOfRangeError(NO_TEMPERATURE)


def without_cloud(log_pressure: Array, entropy: Array, water: Array) -> tuple[Array, Array]:
    """Logarithm of the vapour pressure and q of air of given entropy with all the water as vapour."""
    weight = water + phase.EPSILON
    log_weight = np.log(weight)
    log_all = log_pressure + (np.log(np.maximum(water, TINY)) - log_weight)
    log_dry = log_pressure + (LOG_EPSILON - log_weight)
    rest = entropy - phase.VAPORISATION * water - ENTROPY_ZERO
    return log_all, (rest + phase.EPSILON * log_dry + water * log_all) / (phase.CP_DRY + phase.CP_VAPOUR * water)


def start(dry_q: Array, log_all: Array) -> Array:
    """First guess of q: the unsaturated solution, or where all the water just saturates if that is warmer.

    From there on cloudy air is reached from its warm end, on which Newton's
    method runs down a convex curve and does not overshoot.
    """
    return np.maximum(dry_q, np.log(phase.saturation_point(log_all)) - 1e-6)


def from_entropy(
    pressure: Array, entropy: Array, water: Array, *, freezing: bool, first_guess: Array | None, tolerance: float
) -> tuple[Array, Array]:
    """Temperature [K] and vapour of air in equilibrium with this entropy."""
    p = pressure * PER_TRIPLE_PRESSURE
    if first_guess is None:
        q, vapour = _afresh(p, entropy * PER_RV, water, freezing, tolerance * _KELVIN)
    else:
        guess = np.log(first_guess * PER_TRIPLE)
        q, vapour = from_entropy_guess(
            p, entropy * PER_RV, water, guess, freezing=freezing, tolerance=tolerance * _KELVIN
        )
    return phase.TRIPLE * np.exp(q), vapour


def cloudless(pressure: Array, entropy: Array, water: Array, *, freezing: bool) -> tuple[Array, NDArray[np.bool_]]:
    """Temperature [K] of air of this entropy if all its water is vapour, and where that would be supersaturated."""
    shape = np.broadcast_shapes(pressure.shape, entropy.shape, water.shape)
    p, s, w = (np.broadcast_to(x, shape) for x in (pressure, entropy, water))
    t, cloudy = np.empty(shape), np.empty(shape, bool)
    for block in _blocks(shape):
        log_p = np.log(p[block] * PER_TRIPLE_PRESSURE)
        log_all, q = without_cloud(log_p, s[block] * PER_RV, w[block])
        scaled = np.exp(q)
        cloudy[block] = phase.log_saturation(q, scaled, freezing) < log_all
        t[block] = phase.TRIPLE * scaled
    if not np.isfinite(t).all():
        raise OutOfRangeError(NO_TEMPERATURE)
    return t, cloudy


def _blocks(shape: tuple[int, ...]) -> list[slice]:
    """Parts of an array along its first axis whose arrays stay in the processor's cache."""
    size = max(1, _BLOCK * shape[0] // max(int(np.prod(shape)), 1))
    return [slice(first, first + size) for first in range(0, shape[0], size)]


def _afresh(p: Array, entropy: Array, water: Array, freezing: bool, tolerance: float) -> tuple[Array, Array]:
    """Q and vapour without a guess: cloudless air in closed form, and only where that is saturated, Newton's method."""
    shape = np.broadcast_shapes(p.shape, entropy.shape, water.shape)
    whole = [np.broadcast_to(x, shape or (1,)) for x in (p, entropy, water)]
    q, vapour = np.empty(shape or (1,)), np.array(whole[2])
    for block in _blocks(q.shape):
        pressure, s, w = (x[block] for x in whole)
        log_all, dry_q = without_cloud(np.log(pressure), s, w)
        if not np.isfinite(dry_q).all():
            raise OutOfRangeError(NO_TEMPERATURE)
        cloudy = phase.log_saturation(dry_q, np.exp(dry_q), freezing) < log_all
        q[block] = dry_q
        if cloudy.any():
            warm = start(dry_q[cloudy], log_all[cloudy])
            q[block][cloudy], vapour[block][cloudy] = from_entropy_guess(
                pressure[cloudy], s[cloudy], w[cloudy], warm, freezing=freezing, tolerance=tolerance
            )
    return q.reshape(shape), vapour.reshape(shape)


def from_entropy_guess(
    p: Array, entropy: Array, water: Array, q: Array, *, freezing: bool, tolerance: float
) -> tuple[Array, Array]:
    """Q and vapour by Newton's method from a guess of q, scaled."""
    log_all = all_vapour(p, water)
    cp = phase.CP_DRY + phase.CP_VAPOUR * water
    target = entropy - phase.VAPORISATION * water - ENTROPY_ZERO
    last: list[Mixture] = []

    def step(q: Array) -> Array:
        m = mixture(q, np.exp(q), p, water, log_all, cp, freezing)
        last[:] = [m]
        lack = target - cp * q + phase.EPSILON * np.log(m.dry) + water * m.log_e + m.cloud * m.bound
        return np.asarray(lack / m.heat)

    q, dq = root(step, q, tolerance, _BRACKET_Q)
    return q, _vapour(last[0], dq, water)


def from_enthalpy(
    pressure: Array, enthalpy: Array, water: Array, *, freezing: bool, first_guess: Array | None, tolerance: float
) -> tuple[Array, Array]:
    """Temperature [K] and vapour of air in equilibrium with this enthalpy."""
    p = pressure * PER_TRIPLE_PRESSURE
    scaled = enthalpy * PER_ENTHALPY
    if first_guess is None:
        cp = phase.CP_DRY + phase.CP_VAPOUR * water
        clear = (scaled - phase.VAPORISATION * water + cp) / cp
        t = np.exp(start(np.log(np.maximum(clear, _LOWEST)), all_vapour(p, water)))
    else:
        t = first_guess * PER_TRIPLE
    t, vapour = from_enthalpy_guess(p, scaled, water, t, freezing=freezing, tolerance=tolerance * _KELVIN)
    return phase.TRIPLE * t, vapour


def from_enthalpy_guess(
    p: Array, enthalpy: Array, water: Array, t: Array, *, freezing: bool, tolerance: float
) -> tuple[Array, Array]:
    """T and vapour by Newton's method from a guess of t, scaled."""
    log_all = all_vapour(p, water)
    cp = phase.CP_DRY + phase.CP_VAPOUR * water
    target = enthalpy - phase.VAPORISATION * water + cp
    last: list[Mixture] = []

    def step(t: Array) -> Array:
        m = mixture(np.log(t), t, p, water, log_all, cp, freezing)
        last[:] = [m]
        return np.asarray((target - cp * t + m.cloud * m.bound * t) / m.heat)

    t, dt = root(step, t, tolerance, (_LOWEST, _HIGHEST))
    return t, _vapour(last[0], dt / t, water)


def _vapour(m: Mixture, dq: Array, water: Array) -> Array:
    """Vapour after the last step, to second order in it; all the water where nothing has condensed."""
    return np.where(m.gain > phase.ZERO, np.minimum(m.vapour + m.gain * dq, water), water)
