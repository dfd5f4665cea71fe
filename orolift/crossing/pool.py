"""The cold pool of the lee: whether the crossing air displaces it, and the air in it when it stays."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.air.humidity import mixing_ratio_from_relative_humidity
from orolift.air.temperature import virtual_potential_temperature, virtual_temperature
from orolift.constants import GRAVITY, KAPPA, R_DRY, REFERENCE_PRESSURE

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from orolift.air.column import IncomingAir

POOL_STABILITY = 0.010
"""Rise of virtual potential temperature with height in a pool [K m-1]; a judgement."""
POOL_HUMIDITY = 0.9
"""Relative humidity [1] of a pool whose dew point nobody gave, at most: it holds no more vapour than the incoming air
at the height of the lee foot; a judgement."""
DEEPEST = 3000.0
"""A pool of a lee sounding is not looked for above this height over the lee foot [m]; a judgement."""


@dataclass(frozen=True)
class Lee:
    """What is known of the air that lies in the lee; everything may be None.

    Attributes
    ----------
    temperature : float or None [K]
        At the height of the lee foot.
    pool_top : float or None [m above sea level]
    air : IncomingAir or None
        Sounding of the lee.
    """

    temperature: float | None = None
    pool_top: float | None = None
    air: IncomingAir | None = None

    @property
    def known(self) -> bool:
        """Whether anything is known."""
        return self.temperature is not None or self.pool_top is not None or self.air is not None


def humidity_note(lee: Lee, pool: Pool | None) -> tuple[str, ...]:
    """What is taken for the humidity of a pool of which it is not known.

    Parameters
    ----------
    lee : Lee
    pool : Pool or None
        That stays.

    Returns
    -------
    tuple of str
        Empty with a lee sounding, and without a pool.
    """
    if pool is None or lee.air is not None:
        return ()
    text = (
        "The humidity of the cold pool is not known: its vapour is taken as that of the incoming air at the height of "
        f"the lee foot, with a relative humidity of at most {100.0 * POOL_HUMIDITY:.0f} %. A sounding of the lee would "
        "tell it."
    )
    return (text,)


@dataclass(frozen=True)
class Pool:
    """Cold air lying in the lee.

    Attributes
    ----------
    bottom, top : float [m above sea level]
        Lee foot, and the height to which the pool reaches; equal when there is none.
    height : ndarray (n,) [m above sea level]
    temperature : ndarray (n,) [K]
    vapour : ndarray (n,) [kg per kg of dry air]
        Its air from bottom to top.
    """

    bottom: float
    top: float
    height: NDArray[np.float64]
    temperature: NDArray[np.float64]
    vapour: NDArray[np.float64]

    @property
    def depth(self) -> float:
        """Depth of the pool [m]."""
        return self.top - self.bottom


def pool_under(
    lee: Lee, foot: float, pressure: float, temperature: float, vapour: float, most: float | None = None
) -> Pool:
    """Pool that stays under crossing air, from what is known of the lee.

    Parameters
    ----------
    lee : Lee
        Without anything known there is no pool.
    foot : float [m above sea level]
        Lee foot.
    pressure : float [Pa]
        There.
    temperature, vapour : float [K], [kg per kg of dry air]
        Of the crossing air brought down to the lee foot.
    most : float, optional [kg per kg of dry air]
        Vapour of the incoming air at the height of the lee foot: a pool of which only temperature or top is known
        holds no more. It did not cross, so that rain on the way took none of it. By default that of the crossing air.

    Returns
    -------
    Pool
        Of no depth when the crossing air reaches the ground.

    Notes
    -----
    The crossing air displaces what is lighter than itself (Plavcan et al. 2014, J. Appl. Meteorol.
    Climatol. 53, 652-659: descent needs a virtual potential temperature no
    higher than that of the air it replaces, read with the sign of a stable pool). From a lee
    temperature the pool is as deep as its deficit in virtual potential
    temperature at 10 K per km; from a pool top the deficit follows. A lee sounding is followed up
    to where it is as warm, in virtual potential temperature, as the crossing air.
    """
    arriving = float(virtual_potential_temperature(pressure, temperature, vapour))
    if lee.air is not None:
        return _from_sounding(lee.air, foot, arriving)
    most = vapour if most is None else most
    if lee.pool_top is not None:
        return _sloped(foot, max(lee.pool_top - foot, 0.0), pressure, arriving, most)
    if lee.temperature is not None:
        humidity = min(most, float(mixing_ratio_from_relative_humidity(pressure, lee.temperature, POOL_HUMIDITY)))
        lying = float(virtual_potential_temperature(pressure, lee.temperature, humidity))
        return _sloped(foot, max(arriving - lying, 0.0) / POOL_STABILITY, pressure, arriving, most)
    return _sloped(foot, 0.0, pressure, arriving, most)


def _sloped(foot: float, depth: float, pressure: float, arriving: float, most: float) -> Pool:
    """Pool with vapour and humidity of at most so much; its virtual potential temperature rises evenly to its top's."""
    height = foot + np.linspace(0.0, depth, 21)
    theta_v = arriving - POOL_STABILITY * (foot + depth - height)
    exner = (pressure / REFERENCE_PRESSURE) ** KAPPA - np.concatenate(
        [[0.0], np.cumsum(np.diff(height) * 2.0 / (theta_v[1:] + theta_v[:-1]))]
    ) * (GRAVITY * KAPPA / R_DRY)  # hydrostatic: d(exner)/dz = -g / (cp theta_v)
    virtual = theta_v * exner
    p = REFERENCE_PRESSURE * exner ** (1.0 / KAPPA)
    temperature = virtual
    for _ in range(3):  # the little vapour of cold air settles the temperature to 1e-3 K
        vapour = np.minimum(mixing_ratio_from_relative_humidity(p, temperature, POOL_HUMIDITY), most)
        temperature = virtual * (temperature / virtual_temperature(temperature, vapour))
    return Pool(foot, foot + depth, height, temperature, vapour)


def _from_sounding(air: IncomingAir, foot: float, arriving: float) -> Pool:
    """Pool of a lee sounding: all of it below the lowest level as warm as the crossing air."""
    top = float(air.height[-1])
    height = np.linspace(foot, min(top, foot + DEEPEST), 301)
    there = interpolated(air, height)
    theta_v = virtual_potential_temperature(there.pressure, there.temperature, there.vapour)
    warm = np.asarray(theta_v) >= arriving
    end = int(np.argmax(warm)) if warm.any() else height.size - 1
    part = slice(0, end + 1)
    return Pool(foot, float(height[end]), height[part], there.temperature[part], there.vapour[part])


def pool_air(pool: Pool, height: ArrayLike) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Temperature and vapour of a pool at heights in it.

    Parameters
    ----------
    pool : Pool
    height : array_like, any shape [m above sea level]

    Returns
    -------
    temperature : ndarray [K]
    vapour : ndarray [kg per kg of dry air]
    """
    z = np.asarray(height, dtype=np.float64)
    return np.interp(z, pool.height, pool.temperature), np.interp(z, pool.height, pool.vapour)


def chance_of_breaking_through(sun: float | None, wind: float) -> float:
    """Chance that the crossing air reaches the ground of the lee, when nothing is known of the air there.

    Parameters
    ----------
    sun : float or None [rad]
        Height of the sun; None when hour or place is unknown.
    wind : float [m s-1]
        Component across the crest.

    Returns
    -------
    float [1]

    Notes
    -----
    A judgement, no published source: 0.95 by day (sun 10 degrees up and more). At night 0.3 with
    a weak wind (5 m/s) rising evenly to 0.9 with a strong one (20 m/s). In between,
    and when the hour is unknown, the mean of the two. Cloud is not known to it:
    an overcast night is kinder to the crossing air than this says.
    """
    night = 0.3 + 0.6 * float(np.clip((wind - 5.0) / 15.0, 0.0, 1.0))
    day = 0.95
    if sun is None:
        return 0.5 * (night + day)
    light = float(np.clip(np.degrees(sun) / 10.0, 0.0, 1.0))
    return night + light * (day - night)
