"""Water that has condensed, as one substance: its properties as fast, unchecked functions of temperature.

Everything here is scaled: t = T / 273.16 K, q = ln t, vapour pressures by that
of the triple point, entropies and heat capacities by the gas constant of vapour Rv. The
functions for people, in kelvin and with range checks, are in `saturation`.

Let mu be the Gibbs energy per kg. Liquid and ice are each a substance of
constant heat capacity, and the vapour is an ideal gas, so that the saturation
pressures follow exactly from the latent heats (Rankine-Kirchhoff form): over
liquid ln e = a q + (l - a)(1 - 1/t) with l = L / (Rv 273.16 K) at the triple point
and a the difference of the heat capacities of vapour and liquid over Rv.

Between 0 and -20 degrees Celsius clouds hold both. We treat their condensate
as ONE substance with mu = (1 - f) mu_liquid + f mu_ice, where f is the ice
share, a function of temperature only. Then ln e = (1 - f) ln e_liquid +
f ln e_ice, and entropy and enthalpy of the condensate are derivatives of mu,
so that Clausius-Clapeyron, conservation of entropy and the first law hold
exactly, and ascent and descent return to the same state.

The form of f is not free. In the latent heat a term with df/dT appears;
averaged over the ramp the heat of fusion released has to equal the full one,
whatever f is, because both ends of the pressure curve are fixed. A linear f
would release twice the heat of fusion by -20 degrees and take half of it back
in a jump there: entropy would then fall with rising temperature and a state
would have two temperatures. We take f = x (2 - x), where x rises from 0
to 1 with ln T between 273.16 K and 253.15 K: it starts where liquid and ice are in equilibrium, so
nothing jumps; it ends with zero slope; the heat of fusion released is full at
about -7 degrees, at most 4/3 of it near -13, and exact from -20 down. Entropy
rises with temperature as long as the air carries less than about 40 g of
condensate per kg. The shape is a choice of ours without a published source.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift import constants as c
from orolift.air.lambert import lower_lambert

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]


def number(value: float | Array) -> Array:
    """A constant as an array without axes: numpy combines it with short arrays faster than a float."""
    return np.array(float(value))


TRIPLE, TRIPLE_PRESSURE = number(c.TRIPLE_POINT_TEMPERATURE), number(c.TRIPLE_POINT_PRESSURE)
R_VAPOUR, EPSILON = number(c.R_VAPOUR), number(c.EPSILON)
ZERO, ONE = number(0.0), number(1.0)

# Heat capacities over Rv, latent heats over Rv times 273.16 K, and their slopes with temperature over Rv.
CP_DRY, CP_VAPOUR = number(c.HEAT_CAPACITY_DRY_AIR / c.R_VAPOUR), number(c.HEAT_CAPACITY_VAPOUR / c.R_VAPOUR)
VAPORISATION = number(c.LATENT_HEAT_VAPORISATION_TRIPLE / (c.R_VAPOUR * c.TRIPLE_POINT_TEMPERATURE))
SUBLIMATION = number(c.LATENT_HEAT_SUBLIMATION_TRIPLE / (c.R_VAPOUR * c.TRIPLE_POINT_TEMPERATURE))
FUSION = number(SUBLIMATION - VAPORISATION)
VAPORISATION_SLOPE = number((c.HEAT_CAPACITY_VAPOUR - c.HEAT_CAPACITY_LIQUID) / c.R_VAPOUR)
SUBLIMATION_SLOPE = number((c.HEAT_CAPACITY_VAPOUR - c.HEAT_CAPACITY_ICE) / c.R_VAPOUR)
FUSION_SLOPE = number(SUBLIMATION_SLOPE - VAPORISATION_SLOPE)

_VAPORISATION_FREE = number(VAPORISATION - VAPORISATION_SLOPE)
_FUSION_FREE = number(FUSION - FUSION_SLOPE)
_PER_RAMP = number(1.0 / np.log(c.ALL_ICE_TEMPERATURE / c.TRIPLE_POINT_TEMPERATURE))  # dx/dq, negative
_TWO_PER_RAMP, _MINUS_PER_RAMP = number(2.0 * _PER_RAMP), number(-_PER_RAMP)
_THREE, _THRICE_FUSION_SLOPE = number(3.0), number(3.0 * FUSION_SLOPE)


def ice_part(q: Array) -> Array:
    """Mass share of ice in the condensate."""
    x = np.minimum(np.maximum(q * _PER_RAMP, ZERO), ONE)
    return x * (2.0 - x)


def log_saturation(q: Array, t: Array, freezing: bool) -> Array:
    """ln(e / e_triple) over the condensate alone."""
    w = np.reciprocal(t)
    log_e = VAPORISATION_SLOPE * q + (_VAPORISATION_FREE - _VAPORISATION_FREE * w)
    if not freezing or q.min() >= 0.0:
        return log_e
    return log_e + ice_part(q) * (FUSION_SLOPE * q + (_FUSION_FREE - _FUSION_FREE * w))


def condensate(q: Array, t: Array, freezing: bool) -> tuple[Array, Array, Array]:
    """Saturation and latent heat over the condensate.

    Returns ln(e / e_triple), the entropy of vaporisation L / (Rv T) and
    the slope of the latent heat dL/dT / Rv.
    """
    return condensate_and_bend(q, t, freezing, bend=False)[:3]


def condensate_and_bend(q: Array, t: Array, freezing: bool, *, bend: bool = True) -> tuple[Array, Array, Array, Array]:
    """The same, and the change of that slope with q, which is zero outside the freezing range."""
    w = np.reciprocal(t)
    free = _VAPORISATION_FREE * w
    log_e = VAPORISATION_SLOPE * q + (_VAPORISATION_FREE - free)
    bound = VAPORISATION_SLOPE + free
    if not freezing or q.min() >= 0.0:
        return log_e, bound, VAPORISATION_SLOPE, ZERO
    x = np.minimum(np.maximum(q * _PER_RAMP, ZERO), ONE)
    y = ONE - x
    xy = x * y
    f = x + xy
    ramp = (xy > ZERO) * _TWO_PER_RAMP  # zero outside the ramp; there df/dq = ramp y, d2f/dq2 = -ramp dx/dq
    df = ramp * y
    ddf = ramp * _MINUS_PER_RAMP
    free = _FUSION_FREE * w
    d = FUSION_SLOPE * q + (_FUSION_FREE - free)  # ln(e_ice / e_liquid)
    melting = FUSION_SLOPE + free  # Lf / (Rv T), which is dd/dq
    slope = VAPORISATION_SLOPE + FUSION_SLOPE * f + df * (d + melting + melting) + ddf * d
    change = df * (_THRICE_FUSION_SLOPE - melting) + ddf * (d + _THREE * melting) if bend else ZERO
    return log_e + f * d, bound + f * melting + df * d, slope, change


def condensate_entropy(q: Array, t: Array, freezing: bool) -> Array:
    """Entropy of a kilogram of condensate over Rv, zero for liquid at the triple point."""
    log_e, bound, _ = condensate(q, t, freezing)
    return VAPORISATION + CP_VAPOUR * q - log_e - bound


def saturation_point(log_e: Array, latent: Array = VAPORISATION, slope: Array = VAPORISATION_SLOPE) -> Array:
    """Scaled temperature t at which vapour saturates over a substance of one phase.

    The inverse of ln e = slope ln t + (latent - slope)(1 - 1/t), which with
    the negative number ratio / t, ratio = (latent - slope) / slope, takes Lambert's form.
    """
    ratio = (latent - slope) / slope
    return ratio / lower_lambert(ratio + np.log(-ratio) - log_e / slope)
