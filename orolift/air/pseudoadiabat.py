"""Saturated air whose condensate leaves as it forms, wholly or in part: the fast, unchecked integrator.

Of the vapour that condenses a share g leaves, with its entropy s_c. From first
saturation on, the total water is then r = k + g v, where v is the saturation
mixing ratio and k = cloud + (1 - g) v at the start a constant, and the law
ds = s_c dr becomes, with Y = s_dry + k s_c + v L / T,

    dY = -g v ds_c .

Y is a function of temperature and pressure alone. The right-hand side is
small (the heat capacity of as much condensate as there is vapour), and zero for
a reversible move. A step takes the logarithmic mean of v, which is exact for an
exponential, in the form (2 sqrt(v0 v1) + (v0 + v1) / 2) / 3, times the change of
s_c, and Newton's method for the temperature. It is of second order with a small
constant, exact for g = 0, and the changes of slope at the ends of the freezing
range do little harm because s_c itself is differenced. Scaled as in `phase`.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from orolift.air import equilibrium, phase

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]

LONGEST_STEP, LONGEST_STEP_FREEZING = 0.15, 0.07  # in ln p: errors at 300 hPa below 0.003 K and 0.02 K
_TOLERANCE = 1e-3 / 250.0  # what a Newton step of a millikelvin leaves is 3e-8 K
_ANY_AMOUNT = phase.number(1e9)  # ln e of the total water: none, the air is saturated by definition


def lifted(
    pressure: Array,
    temperature: Array,
    vapour: Array,
    cloud: Array,
    pressure_end: Array,
    share: Array,
    *,
    freezing: bool,
    steps: int | None,
) -> tuple[Array, Array]:
    """Temperature [K] and vapour at the end, for parcels that saturate on the way."""
    p_start, t_start = first_saturation(pressure, temperature, vapour, cloud, freezing=freezing)
    p_start = np.maximum(p_start, pressure_end)
    kept = cloud + (1.0 - share) * vapour
    return along(p_start, t_start, pressure_end, kept, share, freezing=freezing, steps=steps)


def first_saturation(
    pressure: Array, temperature: Array, vapour: Array, cloud: Array, *, freezing: bool
) -> tuple[Array, Array]:
    """Pressure [Pa] and temperature [K] at which a parcel first saturates on its way up."""
    ratio = (phase.CP_DRY + phase.CP_VAPOUR * vapour) / (phase.EPSILON + vapour)  # d ln p / dq on the dry adiabat
    q0 = np.log(temperature * equilibrium.PER_TRIPLE)
    log_e0 = equilibrium.all_vapour(pressure * equilibrium.PER_TRIPLE_PRESSURE, vapour)

    def step(q: Array) -> Array:
        log_e, bound, _ = phase.condensate(q, np.exp(q), freezing)
        return np.asarray((log_e0 + ratio * (q - q0) - log_e) / (bound - ratio))

    q, _ = equilibrium.root(step, q0, 1e-8, (-3.0, 1.0))
    q = np.where(cloud > 0.0, q0, np.minimum(q, q0))
    return pressure * np.exp(ratio * (q - q0)), phase.TRIPLE * np.exp(q)


def along(
    pressure: Array,
    temperature: Array,
    pressure_end: Array,
    kept: Array | float,
    share: Array | float,
    *,
    freezing: bool,
    steps: int | None,
) -> tuple[Array, Array]:
    """Temperature [K] and vapour of saturated air at the end of its way, up or down."""
    way = np.log(pressure_end / pressure)
    if steps is None:
        longest = LONGEST_STEP_FREEZING if freezing else LONGEST_STEP
        steps = max(1, int(np.ceil(np.max(np.abs(way), initial=0.0) / longest)))
    h = way / steps
    air = _saturated(np.log(temperature * equilibrium.PER_TRIPLE), pressure, kept, share, freezing=freezing)
    change = h * air.slope
    for i in range(1, steps + 1):
        new = _step(air, change, pressure * np.exp(h * i), kept, share, freezing=freezing)
        change = h * (1.5 * new.slope - 0.5 * air.slope)
        air = new
    return phase.TRIPLE * np.exp(air.q), air.vapour


class _Saturated(NamedTuple):
    """Saturated air at a temperature and pressure."""

    q: Array
    vapour: Array
    s_condensate: Array
    y: Array
    slope: Array  # dq / d ln p on the way
    d_condensate: Array  # d(s_condensate) / dq
    d_vapour: Array  # d(vapour) / dq at constant pressure
    d_y: Array  # dY / dq at constant pressure


def _saturated(q: Array, pressure: Array, kept: Array | float, share: Array | float, *, freezing: bool) -> _Saturated:
    """Everything the rule above needs of saturated air."""
    p = pressure * equilibrium.PER_TRIPLE_PRESSURE
    cp = np.asarray(phase.CP_DRY + phase.CP_VAPOUR * kept)
    m = equilibrium.mixture(q, np.exp(q), p, np.asarray(kept), _ANY_AMOUNT, cp, freezing)
    s_condensate = phase.VAPORISATION + phase.CP_VAPOUR * q - m.log_e - m.bound
    y = phase.CP_DRY * q - phase.EPSILON * np.log(m.dry) + kept * s_condensate + m.vapour * m.bound
    d_condensate = phase.CP_VAPOUR - m.latent_slope
    heat = m.heat + share * m.vapour * d_condensate  # kept + share * vapour is all the water there is
    slope = (phase.EPSILON + m.bound * m.vapour) * (p / m.dry) / heat
    return _Saturated(q, m.vapour, s_condensate, y, slope, d_condensate, m.gain, m.heat)


def _step(
    old: _Saturated, change: Array, pressure: Array, kept: Array | float, share: Array | float, *, freezing: bool
) -> _Saturated:
    """Air one step on, starting from an estimate of the change of q."""
    last = [old]

    def newton(q: Array) -> Array:
        new = _saturated(q, pressure, kept, share, freezing=freezing)
        last[0] = new
        rise = new.s_condensate - old.s_condensate
        fall = np.sqrt(new.vapour / old.vapour)
        mean = share * old.vapour * (fall * (4.0 + fall) + 1.0) / 6.0
        d_mean = share * (2.0 / fall + 1.0) / 6.0 * new.d_vapour
        excess = new.y - old.y + mean * rise
        return -excess / (new.d_y + mean * new.d_condensate + d_mean * rise)

    q, dq = equilibrium.root(newton, old.q + change, _TOLERANCE, (-3.0, 1.0))
    new = last[0]
    return new._replace(
        q=q,
        vapour=new.vapour + new.d_vapour * dq,
        s_condensate=new.s_condensate + new.d_condensate * dq,
        y=new.y + new.d_y * dq,
    )
