"""How a profile is drawn where nothing was measured: levels, humidity, pressure at rest."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.hydrostatic import hydrostatic_pressure
from orolift.air.saturation import saturation_mixing_ratio
from orolift.air.temperature import virtual_temperature
from orolift.constants import EPSILON

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    Array = NDArray[np.float64]
    Moisture = Callable[[Array], tuple[Array, Array]]

DRY_FROM = 20000.0  # Pa
DRY_HUMIDITY = 0.1  # relative humidity over liquid above that (design choice)

_ROUNDS = 30


def balanced(
    height: Array, temperature: Array, ground_pressure: Array, moisture: Moisture
) -> tuple[Array, Array, Array]:
    """Pressure, vapour and cloud of a column whose moisture depends on its pressure.

    Parameters
    ----------
    height : ndarray (nz,) [m]
    temperature : ndarray (..., nz) [K]
    ground_pressure : ndarray (...) [Pa]
    moisture : callable
        From pressure (..., nz) to vapour and cloud, each (..., nz).

    Returns
    -------
    pressure, vapour, cloud : ndarray (..., nz)

    Notes
    -----
    Repeated substitution from the dry column: each round is about fifty times
    nearer, because vapour changes virtual temperature by a few per cent only.
    """
    p = hydrostatic_pressure(height, temperature, ground_pressure)
    for _ in range(_ROUNDS):
        vapour, cloud = moisture(p)
        new = hydrostatic_pressure(height, virtual_temperature(temperature, vapour, cloud), ground_pressure)
        settled = bool(np.all(np.abs(new - p) <= 1e-13 * p))
        p = new
        if settled:
            break
    return p, *moisture(p)


def split_at_saturation(
    pressure: Array, temperature: Array, water: Array, *, freezing: bool = True
) -> tuple[Array, Array]:
    """Vapour and cloud of air of given temperature: what exceeds saturation is cloud.

    The given temperature is that of the air with its cloud, so no heat of
    condensation is added.

    Parameters
    ----------
    pressure, temperature, water : ndarray, broadcast together [Pa, K, kg kg-1 of dry air]
    freezing : bool

    Returns
    -------
    vapour, cloud : ndarray, broadcast shape [kg kg-1 of dry air]
    """
    vapour = np.minimum(water, saturation_mixing_ratio(pressure, temperature, freezing=freezing))
    return vapour, water - vapour


def levels_through(kinks: tuple[float, ...], spacing: float) -> Array:
    """Levels that pass through the heights where a profile bends.

    Parameters
    ----------
    kinks : tuple of float [m]
        First level, heights that become levels if they lie between, last level.
    spacing : float [m]
        Largest distance of neighbours.

    Returns
    -------
    ndarray (nz,) [m]

    Examples
    --------
    >>> levels_through((0.0, 150.0, 350.0), 100.0)
    array([  0.,  75., 150., 250., 350.])
    """
    kept = sorted({float(kink) for kink in kinks if kinks[0] <= kink <= kinks[-1]})
    parts = [np.array(kept[:1])]
    for low, high in pairwise(kept):
        parts.append(np.linspace(low, high, int(np.ceil((high - low) / spacing)) + 1)[1:])
    return np.concatenate(parts)


def relaxed_humidity(p: Array, humidity: Array, p_kept: Array) -> Array:
    """Relative humidity aloft where none was measured.

    Parameters
    ----------
    p : ndarray (..., nz) [Pa]
    humidity : ndarray (...) [1]
        Kept up to the pressure `p_kept`; falls from there linearly in pressure
        to 10 % at 200 hPa, constant above. Already drier air stays as it is.
    p_kept : ndarray (...) [Pa]

    Returns
    -------
    ndarray (..., nz) [1]

    Examples
    --------
    >>> relaxed_humidity(np.array([9e4, 3.5e4, 1e4]), np.array(0.8), np.array(5e4)).round(2)
    array([0.8 , 0.45, 0.1 ])
    """
    start, first = np.asarray(p_kept)[..., np.newaxis], np.asarray(humidity)[..., np.newaxis]
    share = np.clip((start - p) / np.maximum(start - DRY_FROM, 1.0), 0.0, 1.0)
    return first + share * (np.minimum(first, DRY_HUMIDITY) - first)


def vapour_at(p: Array, e_liquid: Array, e_most: Array, humidity: Array) -> Array:
    """Mixing ratio of a relative humidity over liquid, at most that of saturation.

    Parameters
    ----------
    p : ndarray (..., nz) [Pa]
    e_liquid, e_most : ndarray (..., nz) [Pa]
        Saturation pressure over liquid, and over the condensate the air forms;
        worked out once by the caller, because temperature does not change.
    humidity : ndarray (..., nz) [1]

    Returns
    -------
    ndarray (..., nz) [kg kg-1 of dry air]

    Examples
    --------
    >>> vapour_at(np.array(5e4), np.array(287.0), np.array(270.0), np.array(0.5)).round(5)
    np.float64(0.00179)
    """
    e = np.minimum(humidity * e_liquid, e_most)
    return np.asarray(EPSILON * e / (p - e), dtype=np.float64)
