"""The rain of the map held against what gauges caught."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.errors import OutOfRangeError
from orolift.terrain.grid import ElevationGrid, grid_elevation

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Array = NDArray[np.float64]

SAME_PLACE = 1.0  # [m] gauges nearer to each other count as one
MOST_RAIN = 10_000.0  # [kg m-2] in one event; the most ever measured in days is about half of it (from memory)
_LEAST_FOR_CORRELATION = 3


@dataclass(frozen=True, eq=False)
class Gauges:
    """Places where rain was measured, each once.

    Attributes
    ----------
    x, y : ndarray, shape (n,) [m]
        In the coordinates of the grid.
    total : ndarray, shape (n,) [kg m-2]
        Caught over the duration; also in mm.
    name : tuple of str, length n
    notes : tuple of str
    """

    x: Array
    y: Array
    total: Array
    name: tuple[str, ...]
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, eq=False)
class GaugeComparison:
    """Map against gauges. Over those that lie on the map; what cannot be known is None.

    Attributes
    ----------
    modelled : ndarray, shape (n,) [kg m-2]
        Total of the map at every gauge, NaN off the map.
    used : int
        Gauges on the map.
    bias : float or None [kg m-2]
        Mean of map minus gauge.
    ratio : float or None [1]
        All the map's rain over all the gauges'.
    mean_error, rms_error : float or None [kg m-2]
        Mean of the absolute difference, and root of the mean square.
    correlation : float or None [1]
        None for fewer than three gauges or when all are alike.
    notes : tuple of str
    """

    modelled: Array
    used: int
    bias: float | None
    ratio: float | None
    mean_error: float | None
    rms_error: float | None
    correlation: float | None
    notes: tuple[str, ...]


def gauges_at(x: ArrayLike, y: ArrayLike, total: ArrayLike, name: tuple[str, ...] | None = None) -> Gauges:
    """Gauges from their places and totals; those at one place are averaged.

    Parameters
    ----------
    x, y : array_like, shape (n,) [m]
        In the coordinates of the grid.
    total : array_like, shape (n,) [kg m-2]
        0 to 10 000.
    name : tuple of str, optional

    Returns
    -------
    Gauges

    Raises
    ------
    OutOfRangeError
        If a total is negative, NaN or impossible, or the arrays differ in length.

    Examples
    --------
    >>> gauges_at([0.0, 0.0, 5e3], [0.0, 0.4, 0.0], [10.0, 14.0, 30.0]).total
    array([12., 30.])
    """
    caught = within("total", total, 0.0, MOST_RAIN, "kg/m2 (mm)", "Take out missing gauges instead of giving -999.")
    place = np.column_stack([np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64)])
    names = tuple(f"gauge {i + 1}" for i in range(caught.size)) if name is None else name
    if not place.shape[0] == caught.size == len(names):
        raise OutOfRangeError(
            f"gauges: {place.shape[0]} places, {caught.size} totals and {len(names)} names; there must be as many."
        )
    _, first, group = np.unique(np.round(place / SAME_PLACE), axis=0, return_index=True, return_inverse=True)
    group = group.reshape(-1)
    number = np.bincount(group)
    mean = np.bincount(group, caught) / number
    order = np.argsort(first)
    twice = [names[first[i]] for i in order if number[i] > 1]
    notes = (f"Gauges at the same place were averaged: {', '.join(twice)}.",) if twice else ()
    kept = first[order]
    return Gauges(place[kept, 0], place[kept, 1], mean[order], tuple(names[i] for i in kept), notes)


def rain_at(grid: ElevationGrid, rate: Array, x: ArrayLike, y: ArrayLike) -> Array:
    """Rain of the map at points, bilinear between cells.

    Parameters
    ----------
    grid : ElevationGrid
    rate : ndarray, shape (ny, nx) [kg m-2 s-1]
    x, y : array_like, broadcast together [m]

    Returns
    -------
    ndarray, broadcast shape [kg m-2 s-1]
        NaN off the map.
    """
    return grid_elevation(ElevationGrid(rate, grid.x, grid.y), x, y)


def gauge_comparison(gauges: Gauges, grid: ElevationGrid, rate: Array, duration: float) -> GaugeComparison:
    """Rain of the map against what gauges caught.

    Parameters
    ----------
    gauges : Gauges
    grid : ElevationGrid
    rate : ndarray, shape (ny, nx) [kg m-2 s-1]
    duration : float [s]
        Above 0, at most 60 days.

    Returns
    -------
    GaugeComparison

    Raises
    ------
    OutOfRangeError
        If the duration is out of range.

    Notes
    -----
    Gauges catch too little in wind, snow above all; nothing is corrected. A gauge stands for a
    funnel, the map for square kilometres.

    Examples
    --------
    >>> x = np.arange(0.0, 8e3, 1e3)
    >>> grid = ElevationGrid(np.zeros((8, 8)), x, x[::-1])
    >>> rate = np.full((8, 8), 2.0 / 3600.0)
    >>> found = gauge_comparison(gauges_at([1e3, 5e3], [2e3, 2e3], [10.0, 16.0]), grid, rate, 6 * 3600.0)
    >>> print(round(found.bias, 6), round(found.rms_error, 3))
    -1.0 3.162
    """
    seconds = float(within("duration", duration, 1.0, 60 * 86400.0, "s", "Give the hours it rains, times 3600."))
    modelled = seconds * rain_at(grid, rate, gauges.x, gauges.y)
    on_map = np.isfinite(modelled)
    notes = list(gauges.notes)
    off = [name for name, known in zip(gauges.name, on_map, strict=True) if not known]
    if off:
        notes.append(f"Not on the map and left out: {', '.join(off)}.")
    m, o = modelled[on_map], gauges.total[on_map]
    if m.size == 0:
        return GaugeComparison(modelled, 0, None, None, None, None, None, (*notes, "No gauge lies on the map."))
    error = m - o
    return GaugeComparison(
        modelled=modelled,
        used=int(m.size),
        bias=float(error.mean()),
        ratio=float(m.sum() / o.sum()) if o.sum() > 0.0 else None,
        mean_error=float(np.abs(error).mean()),
        rms_error=float(np.sqrt((error**2).mean())),
        correlation=_correlation(m, o),
        notes=tuple(notes),
    )


def _correlation(a: Array, b: Array) -> float | None:
    """Pearson's correlation; None where it means nothing."""
    if a.size < _LEAST_FOR_CORRELATION or np.ptp(a) <= 0.0 or np.ptp(b) <= 0.0:
        return None
    return float(np.corrcoef(a, b)[0, 1])
