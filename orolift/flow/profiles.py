"""Values, integrals and means of profiles that are straight lines between their levels.

Heights are shared, values may have leading axes (members, hours). Beyond the
ends of the column a profile keeps its end value.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import OutOfRangeError

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray


def checked_height(height: ArrayLike) -> NDArray[np.float64]:
    """Heights of a column, refused unless finite and strictly increasing.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        At least two levels.

    Returns
    -------
    ndarray, shape (nz,) [m]

    Raises
    ------
    OutOfRangeError
        If there are fewer than two levels, or they do not increase.

    Examples
    --------
    >>> checked_height([0, 100.0])
    array([  0., 100.])
    """
    levels = np.asarray(height, dtype=np.float64)
    if levels.ndim != 1 or levels.size < 2:
        raise OutOfRangeError(
            f"height: shape {levels.shape}, but a column needs one axis with at least 2 levels. Give heights in metres."
        )
    rising = np.diff(levels) > 0.0
    if not (np.all(np.isfinite(levels)) and np.all(rising)):
        bad = int(np.argmin(rising)) + 1
        raise OutOfRangeError(
            f"height: level {bad} ({levels[bad]:g} m) is not above level {bad - 1} ({levels[bad - 1]:g} m). "
            "Heights must be finite and strictly increase; sort the levels and drop doubles."
        )
    return levels


def value_at(height: ArrayLike, values: ArrayLike, level: ArrayLike) -> NDArray[np.float64]:
    """A profile at other heights, by straight lines.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        Strictly increasing.
    values : array_like, shape (..., nz)
    level : array_like, shape (..., m) [m]
        Leading axes broadcast with those of `values`.

    Returns
    -------
    ndarray, shape (..., m), unit of `values`

    Examples
    --------
    >>> value_at([0.0, 1000.0], [0.0, 10.0], [250.0, 2000.0])
    array([ 2.5, 10. ])
    """
    levels = checked_height(height)
    index, step, low, high = _cell(levels, values, level)
    share = np.clip(step / (levels[index + 1] - levels[index]), 0.0, 1.0)
    return low + share * (high - low)


def integral_to(height: ArrayLike, values: ArrayLike, level: ArrayLike) -> NDArray[np.float64]:
    """Integral of a profile from its lowest level to other heights.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        Strictly increasing.
    values : array_like, shape (..., nz)
    level : array_like, shape (..., m) [m]
        Leading axes broadcast with those of `values`.

    Returns
    -------
    ndarray, shape (..., m), unit of `values` times m
        Exact for straight lines between levels; negative below the lowest one.

    Examples
    --------
    >>> integral_to([0.0, 1000.0], [0.0, 10.0], [500.0, 1000.0])
    array([1250., 5000.])
    """
    levels = checked_height(height)
    array = np.asarray(values, dtype=np.float64)
    steps = np.diff(levels) * 0.5 * (array[..., 1:] + array[..., :-1])
    total = np.concatenate([np.zeros((*array.shape[:-1], 1)), np.cumsum(steps, axis=-1)], axis=-1)
    index, step, low, high = _cell(levels, array, level)
    depth = levels[index + 1] - levels[index]
    inside = np.clip(step, 0.0, depth)
    start = _along(total, index)
    within_cell = inside * low + 0.5 * inside**2 * (high - low) / depth
    outside = np.where(step < 0.0, step * low, np.where(step > depth, (step - depth) * high, 0.0))
    return start + within_cell + outside


def layer_mean(height: ArrayLike, values: ArrayLike, bottom: ArrayLike, top: ArrayLike) -> NDArray[np.float64]:
    """Mean of a profile between two heights.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        Strictly increasing.
    values : array_like, shape (..., nz)
    bottom, top : array_like, shape (...) [m]
        One pair a profile. A layer without depth gives the value there.

    Returns
    -------
    ndarray, shape (...), unit of `values`

    Examples
    --------
    >>> layer_mean([0.0, 1000.0], [0.0, 10.0], 0.0, 500.0)
    array(2.5)
    """
    low = np.asarray(bottom, dtype=np.float64)[..., None]
    high = np.asarray(top, dtype=np.float64)[..., None]
    depth = high - low
    thin = depth <= 0.0
    both = integral_to(height, values, high) - integral_to(height, values, low)
    mean = np.where(thin, value_at(height, values, low), both / np.where(thin, 1.0, depth))
    return np.asarray(mean[..., 0])


def _cell(
    levels: NDArray[np.float64], values: ArrayLike, level: ArrayLike
) -> tuple[NDArray[np.intp], NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]:
    """Index of the cell each level lies in, height above its foot, values at its foot and top."""
    array = np.asarray(values, dtype=np.float64)
    wanted = np.asarray(level, dtype=np.float64)
    index = np.clip(np.searchsorted(levels, wanted, side="right") - 1, 0, levels.size - 2)
    return index, wanted - levels[index], _along(array, index), _along(array, index + 1)


def _along(values: NDArray[np.float64], index: NDArray[np.intp]) -> NDArray[np.float64]:
    """Elements of the last axis, leading axes broadcast."""
    if values.ndim == 1:
        return np.asarray(values[index])
    if index.ndim == 1:
        return np.asarray(values[..., index])
    if values.ndim == index.ndim == 2 and values.shape[0] == index.shape[0]:  # the usual case, without detours
        return np.asarray(values[np.arange(index.shape[0])[:, None], index])
    lead = np.broadcast_shapes(values.shape[:-1], index.shape[:-1])
    wide = np.broadcast_to(values, (*lead, values.shape[-1]))
    return np.take_along_axis(wide, np.broadcast_to(index, (*lead, index.shape[-1])), axis=-1)
