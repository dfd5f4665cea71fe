"""Elevation on a grid: cells, and the ground between them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray


@dataclass(frozen=True)
class ElevationGrid:
    """Elevation of the cells of a map.

    Attributes
    ----------
    elevation : ndarray, shape (ny, nx) [m]
        Ground above sea level, rows north to south, NaN where missing.
    x : ndarray, shape (nx,) [m or degrees]
        Easting or longitude of the cell centres, uniform, increasing.
    y : ndarray, shape (ny,) [m or degrees]
        Northing or latitude of the cell centres, uniform, decreasing.
    """

    elevation: NDArray[np.float64]
    x: NDArray[np.float64]
    y: NDArray[np.float64]


def grid_elevation(grid: ElevationGrid, x: ArrayLike, y: ArrayLike) -> NDArray[np.float64]:
    """Ground at points of a grid.

    Parameters
    ----------
    grid : ElevationGrid
    x, y : array_like, broadcast together [unit of the grid]
        Points wanted.

    Returns
    -------
    ndarray, the broadcast shape [m]
        Bilinear between the cell centres; NaN outside the cells and where
        most of the weight falls on missing cells.

    Notes
    -----
    Up to half a cell outside the outermost centres the outermost values
    hold. Missing cells with less than half of the weight are left out and the
    remaining weights scaled up.

    Examples
    --------
    >>> plane = ElevationGrid(np.array([[10.0, 20.0], [0.0, 10.0]]), np.array([0.0, 1.0]), np.array([1.0, 0.0]))
    >>> grid_elevation(plane, 0.5, 0.25)
    array(7.5)
    """
    column = (np.asarray(x, dtype=np.float64) - grid.x[0]) / (grid.x[1] - grid.x[0])
    row = (np.asarray(y, dtype=np.float64) - grid.y[0]) / (grid.y[1] - grid.y[0])
    return bilinear(grid.elevation, row, column)


def bilinear(values: NDArray[np.float64], row: ArrayLike, column: ArrayLike) -> NDArray[np.float64]:
    """Values between the cells of an array, by fractional row and column.

    Parameters
    ----------
    values : ndarray, shape (ny, nx)
        Cell values, NaN where missing.
    row, column : array_like, broadcast together [1]
        Positions; whole numbers are cell centres.

    Returns
    -------
    ndarray, the broadcast shape
        See `grid_elevation`.

    Examples
    --------
    >>> bilinear(np.array([[0.0, 1.0], [2.0, 3.0]]), [0.5, 5.0], [0.5, 0.0])
    array([1.5, nan])
    """
    row, column = np.broadcast_arrays(np.asarray(row, dtype=np.float64), np.asarray(column, dtype=np.float64))
    ny, nx = values.shape
    inside = (row >= -0.5) & (row <= ny - 0.5) & (column >= -0.5) & (column <= nx - 0.5)
    r = np.clip(np.where(inside, row, 0.0), 0.0, ny - 1.0)
    c = np.clip(np.where(inside, column, 0.0), 0.0, nx - 1.0)
    top, left = np.floor(r).astype(np.intp), np.floor(c).astype(np.intp)
    down, right = r - top, c - left
    total, weight = np.zeros(r.shape), np.zeros(r.shape)
    for i, row_share in ((top, 1.0 - down), (np.minimum(top + 1, ny - 1), down)):
        for j, column_share in ((left, 1.0 - right), (np.minimum(left + 1, nx - 1), right)):
            cell = values[i, j]
            share = np.where(np.isnan(cell), 0.0, row_share * column_share)
            total += share * np.nan_to_num(cell)
            weight += share
    known = inside & (weight >= 0.5)
    return np.asarray(np.divide(total, weight, out=np.full(r.shape, np.nan), where=known))
