"""Through the night: how far humidity recovers as the air near the ground cools, and for how long a threshold holds."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.saturation import saturation_vapour_pressure_over_liquid
from orolift.checks import within
from orolift.constants import HEAT_CAPACITY_DRY_AIR
from orolift.fire.dryness import fire_humidity, fire_temperature

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Array = NDArray[np.float64]

STILL_DEPTH = 100.0
"""Depth [m] from which a still night takes its heat over a valley floor, 50 to 200 m; a judgement."""


def night_cooling(hours: ArrayLike, flux: float, depth: float, density: ArrayLike) -> Array:
    """Cooling of the air over the ground in a night.

    Parameters
    ----------
    hours : array_like, any shape [s]
        How long the night takes heat, 0 to 86400 s.
    flux : float [W m-2]
        Out of the air, 0 to 300.
    depth : float [m]
        Of the air it is taken from, 10 to 3000.
    density : array_like, broadcasts [kg m-3]
        0.3 to 1.6.

    Returns
    -------
    ndarray, broadcast shape [K]
        0 or more.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    ``flux time / (density cp depth)``: the same heat cools a shallow layer more.

    Examples
    --------
    >>> night_cooling(8 * 3600.0, 30.0, 100.0, 1.2).round(1)
    np.float64(7.2)
    """
    time = within("hours", hours, 0.0, 86400.0, "s", "Give seconds.")
    out = float(within("flux", flux, 0.0, 300.0, "W m-2", "Out of the air: 0 or more."))
    deep = float(within("depth", depth, 10.0, 3000.0, "m", ""))
    air = within("density", density, 0.3, 1.6, "kg m-3", "")
    return np.asarray(out * time / (air * HEAT_CAPACITY_DRY_AIR * deep))[()]


def humidity_after_cooling(temperature: ArrayLike, relative_humidity: ArrayLike, cooling: ArrayLike) -> Array:
    """Relative humidity of air that cools at its pressure and keeps its vapour.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        Before it cools, 173.15 to 338.15 K.
    relative_humidity : array_like, broadcasts [1]
        Before, 0 to 1.
    cooling : array_like, broadcasts [K]
        0 to 60 K.

    Returns
    -------
    ndarray, broadcast shape [1]
        At most 1: then dew or fog forms.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    ``U e_s(T) / e_s(T - cooling)``. Vapour from wet ground, or drier air that mixes down, would change it.

    Examples
    --------
    >>> humidity_after_cooling(293.15, 0.25, [0.0, 10.0]).round(2)
    array([0.25, 0.48])
    """
    t, u = fire_temperature(temperature), fire_humidity(relative_humidity)
    less = within("cooling", cooling, 0.0, 60.0, "K", "How much colder: 0 or more.")
    ratio = saturation_vapour_pressure_over_liquid(t) / saturation_vapour_pressure_over_liquid(t - less)
    return np.asarray(np.minimum(u * ratio, 1.0))[()]


@dataclass(frozen=True)
class Spell:
    """A stretch of hours in which a threshold is met without a break.

    Attributes
    ----------
    start, end : int
        Number of its first hour and of the first hour after it.
    open_start, open_end : bool
        Whether it reaches the first or the last hour given: it may have begun earlier or go on.
    """

    start: int
    end: int
    open_start: bool
    open_end: bool


def spells(met: ArrayLike, least: int = 1) -> tuple[Spell, ...]:
    """Stretches of hours in which a threshold is met, long enough to count.

    Parameters
    ----------
    met : array_like of bool, shape (hours,)
        Whether it is met at each hour, one after the other.
    least : int
        Hours in a row that count, 1 to 1000.

    Returns
    -------
    tuple of Spell
        In order; those that are cut off by the first or last hour count when what is seen of them is long enough.

    Raises
    ------
    OutOfRangeError
        If `least` is out of range.

    Examples
    --------
    >>> [(one.start, one.end) for one in spells([False, True, True, True, False, True], 3)]
    [(1, 4)]
    """
    long = int(within("least", least, 1, 1000, "h", "Give whole hours."))
    flags = np.asarray(met, dtype=bool)
    edges = np.flatnonzero(np.diff(np.concatenate([[False], flags, [False]]).astype(np.int8)))
    pairs = zip(edges[::2].tolist(), edges[1::2].tolist(), strict=True)
    return tuple(Spell(a, b, a == 0, b == flags.size) for a, b in pairs if b - a >= long)


def lasting(met: ArrayLike, least: int = 1) -> NDArray[np.bool_]:
    """Whether each hour belongs to a stretch that is long enough.

    Parameters
    ----------
    met : array_like of bool, shape (..., hours)
        Members first.
    least : int
        Hours in a row that count.

    Returns
    -------
    ndarray of bool, shape of `met`

    Raises
    ------
    OutOfRangeError
        If `least` is out of range.

    Examples
    --------
    >>> lasting([[True, True, False], [True, False, True]], 2)
    array([[ True,  True, False],
           [False, False, False]])
    """
    flags = np.asarray(met, dtype=bool)
    out = np.zeros_like(flags)
    for index in np.ndindex(flags.shape[:-1]):
        for one in spells(flags[index], least):
            out[index][one.start : one.end] = True
    return out
