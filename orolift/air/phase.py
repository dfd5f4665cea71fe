"""Water that has condensed, as one substance: its properties as fast, unchecked functions of temperature.

Everything here is scaled by the triple point: t = T / 273.16 K, q = ln t, and
energies divided by 273.16 K, so that they carry the unit of an entropy. The
functions for people, in kelvin and with range checks, are in `saturation`.

Let mu be the Gibbs energy per kg. Liquid and ice are each a substance of
constant heat capacity, and the vapour is an ideal gas, so that the saturation
pressures follow exactly from the latent heats (Rankine-Kirchhoff form), for
example Rv ln(e_liquid / e_triple) = a q + (l - a)(1 - 1/t) with l the scaled
latent heat at the triple point and a the difference of heat capacities.

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
would have two temperatures. We take f = x (2 - x), x = (T_triple - T) /
(T_triple - 253.15 K): it starts where liquid and ice are in equilibrium, so
nothing jumps; it ends with zero slope; the heat of fusion released is full at
about -7 degrees, at most 4/3 of it near -13, and exact from -20 down. Entropy
rises with temperature as long as the air carries less than about 40 g of
condensate per kg. The shape is a choice of ours without a published source.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift import constants as c

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]

# Plain floats: numpy is quicker with them than with a subclass of float.
TRIPLE = float(c.TRIPLE_POINT_TEMPERATURE)
TRIPLE_PRESSURE = float(c.TRIPLE_POINT_PRESSURE)
R_DRY, R_VAPOUR, EPSILON = float(c.R_DRY), float(c.R_VAPOUR), float(c.EPSILON)
CP_DRY, CP_VAPOUR = float(c.HEAT_CAPACITY_DRY_AIR), float(c.HEAT_CAPACITY_VAPOUR)
C_LIQUID, C_ICE = float(c.HEAT_CAPACITY_LIQUID), float(c.HEAT_CAPACITY_ICE)

VAPORISATION = c.LATENT_HEAT_VAPORISATION_TRIPLE / TRIPLE
FUSION = (c.LATENT_HEAT_SUBLIMATION_TRIPLE - c.LATENT_HEAT_VAPORISATION_TRIPLE) / TRIPLE
VAPORISATION_SLOPE = CP_VAPOUR - C_LIQUID
FUSION_SLOPE = C_LIQUID - C_ICE
_PER_RAMP = TRIPLE / (TRIPLE - c.ALL_ICE_TEMPERATURE)


def ice_part(t: Array) -> Array:
    """Mass share of ice in the condensate."""
    x = np.minimum(np.maximum((1.0 - t) * _PER_RAMP, 0.0), 1.0)
    return x * (2.0 - x)


def condensate(q: Array, t: Array, freezing: bool) -> tuple[Array, Array, Array | float]:
    """Saturation and latent heat over the condensate, with the slope of the latter.

    Returns Rv ln(e / e_triple) [J kg-1 K-1], latent heat over 273.16 K
    [J kg-1 K-1] and d(latent heat)/dT [J kg-1 K-1].
    """
    u = 1.0 - 1.0 / t
    t1 = t - 1.0
    phi = VAPORISATION_SLOPE * q + (VAPORISATION - VAPORISATION_SLOPE) * u
    latent = VAPORISATION_SLOPE * t1 + VAPORISATION
    if not freezing or t.min() >= 1.0:
        return phi, latent, VAPORISATION_SLOPE
    x = np.minimum(np.maximum(t1 * -_PER_RAMP, 0.0), 1.0)
    ramp = (x > 0.0) & (x < 1.0)
    f = x * (2.0 - x)
    df = (x - 1.0) * ramp * (2.0 * _PER_RAMP)  # df/dt, zero outside the ramp
    d = FUSION_SLOPE * q + (FUSION - FUSION_SLOPE) * u  # Rv ln(e_ice / e_liquid)
    fusion = FUSION_SLOPE * t1 + FUSION
    td = t * d
    phi = phi + f * d
    slope = VAPORISATION_SLOPE + FUSION_SLOPE * f + 2.0 * df * (fusion + td)
    slope = slope - (2.0 * _PER_RAMP**2) * ramp * (t * td)
    return phi, latent + f * fusion + df * (t * td), slope


def condensate_entropy(q: Array, t: Array, freezing: bool) -> Array:
    """Entropy of a kilogram of condensate [J K-1 kg-1], zero for liquid at the triple point."""
    phi, latent, _ = condensate(q, t, freezing)
    return VAPORISATION + CP_VAPOUR * q - phi - latent / t
