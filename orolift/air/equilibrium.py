"""Temperature at which air of given entropy or enthalpy is in equilibrium: the fast, unchecked solvers.

Scaled as in `phase`. Per kg of dry air, with total water r, vapour v, cloud
r - v, dry pressure pd and phi = Rv ln(e / e_triple):

    entropy   s = (cpd + r cpv) q + r l - Rd ln(pd / p0) - r phi - (r - v) L / t
    enthalpy  h / 273.16 K = (cpd + r cpv)(t - 1) + r l - (r - v) L

where l is the scaled latent heat at the triple point and L the one of the
condensate at t. In air that is not saturated, v = r and phi belongs to the
vapour present; in cloud phi belongs to the condensate. Both cases are one
formula with phi = min(phi of the condensate, phi of all the water as vapour),
and one slope, ds/dq = dh/dT = cpd + r cpv - (r - v) dL/dT + L dv/dt: the
first law at constant pressure. In ln T, or T, the unsaturated branch is a
straight line, so that Newton's step on it is the closed form.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from orolift import constants
from orolift.air import phase
from orolift.air.lambert import lower_lambert
from orolift.errors import OutOfRangeError

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    Array = NDArray[np.float64]

REFERENCE = float(constants.REFERENCE_PRESSURE)
TINY = 1e-30  # mixing ratio that stands for none where a logarithm is taken
_PER_RV = 1.0 / phase.R_VAPOUR
_PER_TRIPLE_PRESSURE = 1.0 / phase.TRIPLE_PRESSURE
_LOWEST, _HIGHEST = 0.25, 1.7  # bracket for t when Newton's method wanders: 68 K to 464 K
_PLAIN_STEPS, _ALL_STEPS = 10, 100


class Mixture(NamedTuple):
    """What the solvers need to know of air at a temperature."""

    phi: Array  # Rv ln(e / e_triple) of the vapour present
    latent: Array
    latent_slope: Array | float
    dry: Array  # dry pressure over the triple-point pressure
    vapour: Array
    cloud: Array
    gain: Array  # d(vapour)/dt at constant pressure, 0 where not saturated
    heat: Array  # d(enthalpy)/dT at constant pressure


def all_vapour(pressure: Array, water: Array) -> Array:
    """Phi that the vapour has when all the water is vapour."""
    share = np.maximum(water, TINY) / (water + phase.EPSILON)
    return phase.R_VAPOUR * np.log(share * pressure * _PER_TRIPLE_PRESSURE)


def mixture(q: Array, t: Array, pressure: Array, water: Array, phi_all: Array | np.float64, freezing: bool) -> Mixture:
    """Air of given total water at t, its vapour no more than saturated; pressure over the triple-point pressure."""
    phi_condensate, latent, slope = phase.condensate(q, t, freezing)
    phi = np.minimum(phi_condensate, phi_all)
    e = np.exp(phi * _PER_RV)
    dry = pressure - e
    vapour = phase.EPSILON * e / dry
    cloud = water - vapour
    gain = vapour * (pressure / dry) * (latent / (t * t)) * ((phi_condensate < phi_all) * _PER_RV)
    heat = phase.CP_DRY + phase.CP_VAPOUR * water - cloud * slope + latent * gain
    return Mixture(phi, latent, slope, dry, vapour, cloud, gain, heat)


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
            x = np.where((x + dx > below) & (x + dx < above), x + dx, 0.5 * (below + above))
    raise OutOfRangeError(
        "no equilibrium temperature: a pressure, water content or energy of the air is not a number or far outside the "
        "atmosphere. orolift works in kelvin, pascal and kg per kg; check the units of what went in."
    )


def start(dry_q: Array, phi_all: Array) -> Array:
    """First guess of q: the unsaturated solution, or where all the water just saturates if that is warmer."""
    slope, free = phase.VAPORISATION_SLOPE, phase.VAPORISATION - phase.VAPORISATION_SLOPE
    ratio = free / slope
    q_saturated = np.log(ratio / lower_lambert(phi_all / -slope + ratio + np.log(-ratio)))
    return np.maximum(dry_q, q_saturated)


def from_entropy(
    pressure: Array, entropy: Array, water: Array, *, freezing: bool, first_guess: Array | None, tolerance: float
) -> tuple[Array, Array]:
    """Temperature [K] and vapour of air in equilibrium with this entropy."""
    phi_all = all_vapour(pressure, water)
    scaled = pressure * _PER_TRIPLE_PRESSURE
    target = entropy - phase.VAPORISATION * water + phase.R_DRY * _LOG_TRIPLE_OVER_REFERENCE
    cp = phase.CP_DRY + phase.CP_VAPOUR * water
    if first_guess is None:
        dry = scaled * phase.EPSILON / (phase.EPSILON + water)
        q = start((target + phase.R_DRY * np.log(dry) + water * phi_all) / cp, phi_all)
    else:
        q = np.log(first_guess * (1.0 / phase.TRIPLE))
    last: list[tuple[Array, Mixture]] = []

    def step(q: Array) -> Array:
        t = np.exp(q)
        m = mixture(q, t, scaled, water, phi_all, freezing)
        last[:] = [(t, m)]
        excess = cp * q - phase.R_DRY * np.log(m.dry) - water * m.phi - m.cloud * (m.latent / t) - target
        return -excess / m.heat

    q, dq = root(step, q, tolerance * (1.0 / 250.0), _BOUNDS_Q)
    t, m = last[0]
    return phase.TRIPLE * np.exp(q), _vapour(m, t * dq, water)


def from_enthalpy(
    pressure: Array, enthalpy: Array, water: Array, *, freezing: bool, first_guess: Array | None, tolerance: float
) -> tuple[Array, Array]:
    """Temperature [K] and vapour of air in equilibrium with this enthalpy."""
    phi_all = all_vapour(pressure, water)
    scaled = pressure * _PER_TRIPLE_PRESSURE
    cp = phase.CP_DRY + phase.CP_VAPOUR * water
    target = enthalpy * (1.0 / phase.TRIPLE) - phase.VAPORISATION * water + cp
    if first_guess is None:
        t = np.exp(start(np.log(np.maximum(target / cp, _LOWEST)), phi_all))
    else:
        t = first_guess * (1.0 / phase.TRIPLE)
    last: list[Mixture] = []

    def step(t: Array) -> Array:
        m = mixture(np.log(t), t, scaled, water, phi_all, freezing)
        last[:] = [m]
        return (target - cp * t + m.cloud * m.latent) / m.heat

    t, dt = root(step, t, tolerance * (1.0 / 250.0), (_LOWEST, _HIGHEST))
    return phase.TRIPLE * t, _vapour(last[0], dt, water)


def _vapour(m: Mixture, dt: Array, water: Array) -> Array:
    """Vapour after the last step, to second order in it; all the water where nothing has condensed."""
    return np.where(m.gain > 0.0, np.minimum(m.vapour + m.gain * dt, water), water)


_BOUNDS_Q = (float(np.log(_LOWEST)), float(np.log(_HIGHEST)))
_LOG_TRIPLE_OVER_REFERENCE = float(np.log(phase.TRIPLE_PRESSURE / REFERENCE))
