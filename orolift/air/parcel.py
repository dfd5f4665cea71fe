"""Air parcels: what a kilogram of dry air and its water hold, and what moving them does.

Dry air and vapour are ideal gases of constant heat capacity, liquid and ice
substances of constant heat capacity and no volume; the condensate is one
substance (see `phase`), and the parcel is in equilibrium: it has cloud only
where it is saturated. Entropy is counted from dry air at 1000 hPa and 273.16 K
and liquid water at 273.16 K, enthalpy from both at 273.16 K.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air import equilibrium, phase, pseudoadiabat
from orolift.air.ranges import checked_pressure
from orolift.checks import within

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

TOLERANCE = 1e-5


@dataclass(frozen=True, slots=True)
class Parcel:
    """Air in thermodynamic equilibrium; arrays of one shape, or of shapes that broadcast.

    Attributes
    ----------
    pressure : ndarray [Pa]
        Total pressure.
    temperature : ndarray [K]
    vapour : ndarray [kg per kg of dry air]
    cloud : ndarray [kg per kg of dry air]
        Condensate that moves with the air, liquid and ice together.

    Examples
    --------
    >>> Parcel(np.array(9e4), np.array(283.15), np.array(0.006), np.array(0.0)).cloud
    array(0.)
    """

    pressure: NDArray[np.float64]
    temperature: NDArray[np.float64]
    vapour: NDArray[np.float64]
    cloud: NDArray[np.float64]


def entropy(parcel: Parcel, *, freezing: bool = True) -> NDArray[np.float64]:
    """Moist entropy of a parcel, per kg of dry air.

    Parameters
    ----------
    parcel : Parcel, any shape
    freezing : bool
        False keeps all condensate liquid.

    Returns
    -------
    ndarray, broadcast shape [J K-1 per kg of dry air]

    Notes
    -----
    s = cpd ln(T/T0) - Rd ln((p - e)/p0) + v s_v + c s_c, with the entropy of
    vapour s_v = L0/T0 + cpv ln(T/T0) - Rv ln(e/e0) and that of condensate s_c = s_v - L/T at
    saturation; T0, e0, L0 at the triple point, p0 = 1000 hPa. Over liquid
    s_c = c_liquid ln(T/T0), and s is the logarithm of the entropy potential
    temperature of Hauf and Hoeller (1987) [1]_ but for its constants. Neither
    range nor equilibrium is checked.

    References
    ----------
    .. [1] T. Hauf and H. Hoeller (1987), "Entropy and potential temperature",
       J. Atmos. Sci. 44, 2887-2901 (cited from memory).

    Examples
    --------
    >>> dry = Parcel(np.array(1e5), np.array(273.16), np.array(0.0), np.array(0.0))
    >>> abs(float(entropy(dry))) < 1e-9
    True
    """
    v = np.asarray(parcel.vapour, dtype=np.float64)
    t = parcel.temperature * equilibrium.PER_TRIPLE
    p = parcel.pressure * equilibrium.PER_TRIPLE_PRESSURE
    q = np.log(t)
    e = p * v / (v + phase.EPSILON)
    log_e = np.log(e + equilibrium.TINY)  # keeps v ln e finite, and zero, in dry air
    dry = phase.CP_DRY * q - phase.EPSILON * np.log(p - e) + equilibrium.ENTROPY_ZERO
    wet = v * (phase.VAPORISATION + phase.CP_VAPOUR * q - log_e)
    return np.asarray(phase.R_VAPOUR * (dry + wet + parcel.cloud * phase.condensate_entropy(q, t, freezing)))


def condensate_entropy(temperature: NDArray[np.float64], *, freezing: bool = True) -> NDArray[np.float64]:
    """Entropy of a kilogram of condensate: what removed water takes along.

    Parameters
    ----------
    temperature : ndarray, any shape [K]
    freezing : bool
        False keeps all condensate liquid.

    Returns
    -------
    ndarray, shape of `temperature` [J K-1 kg-1]
        Zero for liquid at 273.16 K. The range is not checked.

    Examples
    --------
    >>> abs(float(condensate_entropy(np.array(273.16)))) < 1e-9
    True
    """
    t = temperature * equilibrium.PER_TRIPLE
    return np.asarray(phase.R_VAPOUR * phase.condensate_entropy(np.log(t), t, freezing))


def enthalpy(parcel: Parcel, *, freezing: bool = True) -> NDArray[np.float64]:
    """Moist enthalpy of a parcel, per kg of dry air.

    Parameters
    ----------
    parcel : Parcel, any shape
    freezing : bool
        False keeps all condensate liquid.

    Returns
    -------
    ndarray, broadcast shape [J per kg of dry air]

    Notes
    -----
    h = cpd (T - T0) + v (L0 + cpv (T - T0)) + c h_c with h_c = h_v - L. Its
    changes at constant pressure are heat added; along an adiabatic move they
    are the integral of volume times dp. Neither range nor equilibrium is checked.

    Examples
    --------
    >>> dry = Parcel(np.array(1e5), np.array(283.16), np.array(0.0), np.array(0.0))
    >>> round(float(enthalpy(dry)), 1)
    10057.0
    """
    t = parcel.temperature * equilibrium.PER_TRIPLE
    water = parcel.vapour + parcel.cloud
    _, bound, _ = phase.condensate(np.log(t), t, freezing)
    heat = (phase.CP_DRY + phase.CP_VAPOUR * water) * (t - phase.ONE)
    scaled = heat + phase.VAPORISATION * water - parcel.cloud * bound * t
    return np.asarray(phase.R_VAPOUR * phase.TRIPLE * scaled)


def equilibrium_from_entropy(
    pressure: NDArray[np.float64],
    entropy: NDArray[np.float64],
    total_water: NDArray[np.float64],
    *,
    freezing: bool = True,
    first_guess: NDArray[np.float64] | None = None,
    tolerance: float = TOLERANCE,
) -> Parcel:
    """Parcel of given entropy and water: what a reversible adiabatic move leads to.

    Written for loops: nothing is checked or copied that need not be.

    Parameters
    ----------
    pressure : ndarray, any shape [Pa]
    entropy : ndarray, broadcasts [J K-1 per kg of dry air]
        As `entropy` gives it, with the same `freezing`.
    total_water : ndarray, broadcasts [kg per kg of dry air]
        Vapour and cloud together.
    freezing : bool
        False keeps all condensate liquid.
    first_guess : ndarray, broadcasts [K], optional
        Temperature to start from; the nearer, the fewer rounds. Within
        10 K it costs nothing in reliability, and a bad one only time.
    tolerance : float [K]
        Newton's method stops after a step no longer than this. What is left
        is about 0.03 K-1 times its square, 3e-12 K by default; where the last step
        crosses the edge of the cloud or of the freezing range, at most the step
        itself. A march with a guess extrapolated from its last two steps can do with 0.02.

    Returns
    -------
    Parcel
        Vapour and cloud add up to `total_water`; cloud is 0 where not saturated.

    Raises
    ------
    OutOfRangeError
        If no temperature is found because something is not a number.

    Notes
    -----
    Newton's method in ln T with the exact derivative, see `equilibrium`. Where
    the air is not saturated its step is the closed form.

    Examples
    --------
    >>> start = Parcel(np.array(95e3), np.array(287.15), np.array(0.008), np.array(0.0))
    >>> lifted = equilibrium_from_entropy(np.array(70e3), entropy(start), np.array(0.008))
    >>> print(lifted.temperature.round(2), lifted.cloud.round(5))
    271.29 0.00324
    """
    p = np.asarray(pressure, dtype=np.float64)
    water = np.asarray(total_water, dtype=np.float64)
    t, vapour = equilibrium.from_entropy(
        p, entropy, water, freezing=freezing, first_guess=first_guess, tolerance=tolerance
    )
    return Parcel(p, t, vapour, water - vapour)


def equilibrium_from_enthalpy(
    pressure: NDArray[np.float64],
    enthalpy: NDArray[np.float64],
    total_water: NDArray[np.float64],
    *,
    freezing: bool = True,
    first_guess: NDArray[np.float64] | None = None,
    tolerance: float = TOLERANCE,
) -> Parcel:
    """Parcel of given enthalpy and water: what mixing or heating at constant pressure leads to.

    Parameters
    ----------
    pressure, total_water, freezing, first_guess, tolerance
        As for `equilibrium_from_entropy`.
    enthalpy : ndarray, broadcasts [J per kg of dry air]
        As `enthalpy` gives it, with the same `freezing`.

    Returns
    -------
    Parcel

    Raises
    ------
    OutOfRangeError
        If no temperature is found because something is not a number.

    Examples
    --------
    Fog from mixing two kinds of air that are both short of saturation:

    >>> cold = Parcel(np.array(1e5), np.array(273.15), np.array(0.0037), np.array(0.0))
    >>> warm = Parcel(np.array(1e5), np.array(293.15), np.array(0.0145), np.array(0.0))
    >>> fog = equilibrium_from_enthalpy(np.array(1e5), 0.5 * (enthalpy(cold) + enthalpy(warm)), np.array(0.0091))
    >>> print(fog.temperature.round(2), fog.cloud > 0.0)
    284.62 True
    """
    p = np.asarray(pressure, dtype=np.float64)
    water = np.asarray(total_water, dtype=np.float64)
    t, vapour = equilibrium.from_enthalpy(
        p, enthalpy, water, freezing=freezing, first_guess=first_guess, tolerance=tolerance
    )
    return Parcel(p, t, vapour, water - vapour)


def moved_to(parcel: Parcel, pressure: ArrayLike, *, freezing: bool = True) -> Parcel:
    """Parcel after a reversible adiabatic move; all its water stays with it.

    Parameters
    ----------
    parcel : Parcel, any shape
    pressure : array_like, broadcasts [Pa]
        Where it goes, 100 Pa to 120 kPa, up or down.
    freezing : bool
        False keeps all condensate liquid.

    Returns
    -------
    Parcel
        On a way down cloud evaporates before the air warms at the dry rate.

    Raises
    ------
    OutOfRangeError
        If a pressure is out of range.

    Notes
    -----
    Entropy and water are conserved, so that the way back ends where it began
    (1e-10 K), whatever the way between.

    Examples
    --------
    >>> start = Parcel(np.array(95e3), np.array(287.15), np.array(0.008), np.array(0.0))
    >>> moved_to(moved_to(start, 40e3), 95e3).temperature.round(9)
    np.float64(287.15)
    """
    p = checked_pressure(pressure)
    return equilibrium_from_entropy(
        p, entropy(parcel, freezing=freezing), parcel.vapour + parcel.cloud, freezing=freezing
    )


def without_condensate(parcel: Parcel, share: ArrayLike) -> tuple[Parcel, NDArray[np.float64]]:
    """Parcel after part of its cloud has fallen out, and what fell.

    Parameters
    ----------
    parcel : Parcel, any shape
    share : array_like, broadcasts [1]
        Share of the cloud that leaves, 0 to 1.

    Returns
    -------
    parcel : Parcel
        At the same pressure and temperature; what left took its own entropy and enthalpy along.
    removed : ndarray [kg per kg of dry air]

    Examples
    --------
    >>> cloudy = Parcel(np.array(70e3), np.array(271.0), np.array(0.0047), np.array(0.0033))
    >>> left, removed = without_condensate(cloudy, 0.7)
    >>> print(left.cloud.round(5), removed.round(5))
    0.00099 0.00231
    """
    removed = np.asarray(parcel.cloud * np.asarray(share, dtype=np.float64))
    return Parcel(parcel.pressure, parcel.temperature, parcel.vapour, parcel.cloud - removed), removed


def ascent(
    parcel: Parcel,
    pressure_end: ArrayLike,
    *,
    removed_share: ArrayLike = 0.0,
    freezing: bool = True,
    steps: int | None = None,
) -> tuple[Parcel, NDArray[np.float64]]:
    """Parcel lifted adiabatically while a share of what condenses leaves as it forms.

    Parameters
    ----------
    parcel : Parcel, any shape
        Cloud it already has stays with it.
    pressure_end : array_like, broadcasts [Pa]
        Where it goes, 100 Pa to 120 kPa. A parcel that moves down loses nothing.
    removed_share : array_like, broadcasts [1]
        Share of the newly condensed water that leaves: 0 reversible, 1 pseudoadiabatic.
    freezing : bool
        False keeps all condensate liquid.
    steps : int, optional
        Steps between condensation and end. By default none is longer than 0.07
        in ln p (0.15 without freezing), and the end temperature is then within
        0.02 K (0.004 K) down to 100 hPa; the error falls with the square of their number.

    Returns
    -------
    parcel : Parcel
    removed : ndarray [kg per kg of dry air]
        Vapour, cloud and this add up to the water at the start.

    Raises
    ------
    OutOfRangeError
        If a pressure or share is out of range.

    Notes
    -----
    Up to saturation the move is exact. Beyond, water that leaves takes its
    entropy along: ds = s_c dr, where the total water r = k + g v follows the
    saturated vapour v, g is the share removed and k = cloud + (1 - g) v at first saturation. With
    Y = s_dry + k s_c + v L / T, a function of temperature and pressure, that
    is dY = -g v ds_c; `pseudoadiabat` tells how it is stepped. Of the kept condensate
    the parcel carries the heat capacity and, with `freezing`, the heat of
    fusion; it evaporates first when the parcel sinks. With nothing removed the
    result is that of `moved_to`, without any step.

    Examples
    --------
    >>> start = Parcel(np.array(95e3), np.array(287.15), np.array(0.008), np.array(0.0))
    >>> up, removed = ascent(start, 70e3, removed_share=0.7, freezing=False)
    >>> print(up.temperature.round(2), up.cloud.round(5), removed.round(5))
    271.06 0.00099 0.00231
    """
    p_end = checked_pressure(pressure_end, "pressure_end")
    share = within("removed_share", removed_share, 0.0, 1.0, "", "Give a share, not per cent.")
    s = entropy(parcel, freezing=freezing)
    water = parcel.vapour + parcel.cloud
    reversible = equilibrium_from_entropy(p_end, s, water, freezing=freezing)
    condensing = (share > 0.0) & (reversible.cloud > 0.0) & (p_end < parcel.pressure)
    if not np.any(condensing):
        return reversible, np.zeros(np.broadcast_shapes(reversible.temperature.shape, share.shape))
    start = equilibrium_from_entropy(parcel.pressure, s, water, freezing=freezing, first_guess=parcel.temperature)
    p, t, v, cloud, share, end, dry_end, dry_vapour = np.broadcast_arrays(
        start.pressure, start.temperature, start.vapour, start.cloud, share, p_end, *_state(reversible)
    )
    t_end, vapour, removed = dry_end.copy(), dry_vapour.copy(), np.zeros(p.shape)
    i = np.broadcast_to(condensing, p.shape)
    t_end[i], vapour[i] = pseudoadiabat.lifted(
        p[i], t[i], v[i], cloud[i], end[i], share[i], freezing=freezing, steps=steps
    )
    removed[i] = share[i] * (v[i] - vapour[i])
    return Parcel(end, t_end, vapour, v + cloud - vapour - removed), removed


def _state(parcel: Parcel) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Temperature and vapour."""
    return parcel.temperature, parcel.vapour
