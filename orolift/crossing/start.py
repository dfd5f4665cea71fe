"""Streamlines before the range: where they start, and with what air."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import extended_down, interpolated
from orolift.air.parcel import Parcel, entropy, equilibrium_from_entropy

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir

    Array = NDArray[np.float64]

LOWEST_SPACING = 25.0
"""Spacing [m] of the lowest streamlines upwind."""


def start_heights(bottom: Array, top: float, count: int) -> Array:
    """Heights at which streamlines start, close together below, (m, nz).

    Parameters
    ----------
    bottom : ndarray (m,) [m]
    top : float [m]
    count : int

    Returns
    -------
    ndarray (m, nz) [m]
        25 m apart below, their spacing growing by one factor upward.
    """
    steps = count - 1
    out = np.empty((bottom.size, count))
    for i, low in enumerate(bottom):
        depth = top - float(low)
        growth = _growth(depth / LOWEST_SPACING, steps)
        spacing = growth ** np.arange(steps)
        out[i] = low + np.concatenate([[0.0], np.cumsum(spacing)]) * (depth / spacing.sum())
    return out


def _growth(ratio: float, steps: int) -> float:
    """Factor by which steps grow so that they add up to `ratio` first steps; at least 1."""
    low, high = 1.0, 2.0
    if steps >= ratio:
        return 1.0
    for _ in range(50):
        middle = 0.5 * (low + high)
        if (middle**steps - 1.0) / (middle - 1.0) > ratio:
            high = middle
        else:
            low = middle
    return high


def starting_air(
    incoming: IncomingAir, heights: Array, depth: float, *, freezing: bool
) -> tuple[Parcel, Parcel, NDArray[np.bool_]]:
    """Air of the streamlines before the range: mixed in the lowest layer, and as it is in the column.

    Parameters
    ----------
    incoming : IncomingAir, fields (m, nz_column) or (nz_column,)
    heights : ndarray (m, nz) [m above sea level]
    depth : float [m]
        Of the mixed layer.
    freezing : bool

    Returns
    -------
    start, source : Parcel, fields (m, nz)
    mixed : ndarray of bool, (m, nz)

    Notes
    -----
    Mixed air has the mean moist entropy and total water of the layer, by mass:
    the potential temperature and the vapour of unsaturated air.
    """
    there = interpolated(incoming, heights)
    source = Parcel(
        *(np.broadcast_to(x, heights.shape) for x in (there.pressure, there.temperature, there.vapour, there.cloud))
    )
    mixed = heights <= heights[:, :1] + depth
    mass = np.where(mixed, mass_of_streamlines(source.pressure), 0.0)
    mass = mass / mass.sum(axis=-1, keepdims=True)
    s, water = entropy(source, freezing=freezing), source.vapour + source.cloud
    s_mean, water_mean = (np.sum(mass * x, axis=-1, keepdims=True) for x in (s, water))
    start = equilibrium_from_entropy(
        source.pressure,
        np.where(mixed, s_mean, s),
        np.where(mixed, water_mean, water),
        freezing=freezing,
        first_guess=source.temperature,
    )
    return start, source, mixed


def mass_of_streamlines(pressure: Array) -> Array:
    """Mass that belongs to each streamline, by pressure halfway to its neighbours."""
    edge = 0.5 * (pressure[..., 1:] + pressure[..., :-1])
    ends = np.concatenate([pressure[..., :1], edge, pressure[..., -1:]], axis=-1)
    return np.asarray(ends[..., :-1] - ends[..., 1:])


def column_pressure(incoming: IncomingAir, lowest: float, members: int) -> tuple[Array, Array]:
    """Levels of the incoming column from the lowest ground up, and the logarithm of its pressure there.

    Parameters
    ----------
    incoming : IncomingAir, fields (m, nz_column) or (nz_column,)
    lowest : float [m above sea level]
    members : int

    Returns
    -------
    height : ndarray (n,) [m above sea level]
    log_pressure : ndarray (m, n)
    """
    column = extended_down(incoming, lowest) if lowest < incoming.height[0] else incoming
    return column.height, np.broadcast_to(np.log(column.pressure), (members, column.height.size))


def undisturbed_pressure(levels: Array, log_pressure: Array, heights: Array) -> Array:
    """Pressure of the incoming column at heights; above its top that of the top.

    Parameters
    ----------
    levels, log_pressure : ndarray (n,) [m above sea level], (m, n)
        From `column_pressure`.
    heights : ndarray (m, ...) [m above sea level]

    Returns
    -------
    ndarray (m, ...) [Pa]
    """
    flat = heights.reshape(heights.shape[0], -1)
    out = np.empty(flat.shape)
    for z, row, found in zip(flat, log_pressure, out, strict=True):
        found[:] = np.interp(z, levels, row)
    return np.exp(out, out=out).reshape(heights.shape)
