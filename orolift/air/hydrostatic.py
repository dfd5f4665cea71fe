"""Pressure and height of air at rest, layer by layer.

In each layer virtual temperature is taken as linear in height, so that the
relation is exact for a constant lapse rate; the mean that then belongs in the
hypsometric equation is the logarithmic one.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.constants import GRAVITY, R_DRY

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

_SERIES_BELOW = 1e-3


def layer_mean_virtual_temperature(lower: ArrayLike, upper: ArrayLike) -> NDArray[np.float64]:
    """Logarithmic mean of the virtual temperatures at the two ends of a layer.

    Parameters
    ----------
    lower, upper : array_like, broadcast together [K]
        Positive.

    Returns
    -------
    ndarray, broadcast shape [K]
        Below the arithmetic mean, by 0.003 K for ends 3 K apart.

    Notes
    -----
    (b - a) / ln(b / a) = m x / artanh(x), with m the arithmetic mean and
    x = (b - a) / (b + a); by series where x is small.

    Examples
    --------
    >>> layer_mean_virtual_temperature(300.0, 280.0).round(3)
    np.float64(289.885)
    """
    a, b = np.asarray(lower, dtype=np.float64), np.asarray(upper, dtype=np.float64)
    x = (b - a) / (b + a)
    far = np.abs(x) >= _SERIES_BELOW
    safe = np.where(far, x, 0.5)
    share = np.where(far, safe / np.arctanh(safe), 1.0 - x**2 / 3.0 - 4.0 * x**4 / 45.0)
    return np.asarray(0.5 * (a + b) * share, dtype=np.float64)


def hydrostatic_height(pressure: ArrayLike, virtual_temperature: ArrayLike, ground: ArrayLike) -> NDArray[np.float64]:
    """Heights of pressure levels, starting from the known height of the first.

    Parameters
    ----------
    pressure : array_like, shape (..., nz) [Pa]
        Monotone along the last axis.
    virtual_temperature : array_like, shape (..., nz) [K]
    ground : array_like, shape (...) [m]
        Height of the first level.

    Returns
    -------
    ndarray, shape (..., nz) [m]
        Geopotential height, as long as `ground` is.

    Notes
    -----
    Hypsometric equation; WMO-No. 8 (2018) [1]_, volume I, chapter 12.

    References
    ----------
    .. [1] WMO (2018), "Guide to Instruments and Methods of Observation",
       WMO-No. 8, volume I.

    Examples
    --------
    >>> hydrostatic_height([1.0e5, 5.0e4], [273.15, 273.15], 100.0).round(0)
    array([ 100., 5642.])
    """
    p, tv = np.broadcast_arrays(np.asarray(pressure, np.float64), np.asarray(virtual_temperature, np.float64))
    mean = layer_mean_virtual_temperature(tv[..., :-1], tv[..., 1:])
    thickness = R_DRY / GRAVITY * mean * np.log(p[..., :-1] / p[..., 1:])
    return _summed(np.asarray(ground, np.float64), thickness)


def hydrostatic_pressure(height: ArrayLike, virtual_temperature: ArrayLike, start: ArrayLike) -> NDArray[np.float64]:
    """Pressures at heights, starting from the known pressure of the first.

    Works upward or downward: give the level whose pressure is known first.

    Parameters
    ----------
    height : array_like, shape (nz,) or (..., nz) [m]
        Monotone along the last axis.
    virtual_temperature : array_like, shape (..., nz) [K]
    start : array_like, shape (...) [Pa]
        Pressure at the first level.

    Returns
    -------
    ndarray, shape (..., nz) [Pa]

    Notes
    -----
    Hypsometric equation, as `hydrostatic_height`, of which it is the inverse.

    Examples
    --------
    >>> hydrostatic_pressure([100.0, 5642.0], [273.15, 273.15], 1.0e5).round(-1)
    array([100000.,  50000.])
    """
    z, tv = np.broadcast_arrays(np.asarray(height, np.float64), np.asarray(virtual_temperature, np.float64))
    mean = layer_mean_virtual_temperature(tv[..., :-1], tv[..., 1:])
    fall = -GRAVITY / R_DRY * np.diff(z, axis=-1) / mean
    return np.exp(_summed(np.log(np.asarray(start, np.float64)), fall))


def _summed(first: NDArray[np.float64], steps: NDArray[np.float64]) -> NDArray[np.float64]:
    """Running sum along the last axis that begins with `first`."""
    shape = np.broadcast_shapes(first.shape, steps.shape[:-1])
    total = np.empty((*shape, steps.shape[-1] + 1))
    total[..., 0] = first
    total[..., 1:] = first[..., np.newaxis] + np.cumsum(steps, axis=-1)
    return total
