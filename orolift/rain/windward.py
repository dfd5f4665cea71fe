"""Windward and lee on a map: by the crest of each strip along the wind, or by a divide drawn as a line."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.errors import TerrainError
from orolift.rain.ground import grid_spacing
from orolift.terrain.transect import MINIMUM_RELIEF

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from orolift.terrain.grid import ElevationGrid

    Array = NDArray[np.float64]

STRIP = 2000.0  # [m] width of a strip: finer than the drift of rain, wider than a gully; a judgement
LOW_CREST = 0.25  # of the highest crest's relief: in strips with less the crest is taken from their neighbours


@dataclass(frozen=True, eq=False)
class Divide:
    """Where the windward side ends, strip by strip along the wind.

    Attributes
    ----------
    bearing : float [rad]
        Direction the air goes to, clockwise from grid north.
    width : float [m]
        Of each strip.
    first : float [m]
        Left edge of the first strip, measured across the wind to its right.
    strip : ndarray of int, shape (n,)
        Number of the strip each crossing of the divide is in; rising.
    along : ndarray, shape (n,) [m]
        Where, along the wind; rising within a strip. Counted from x = y = 0.
    notes : tuple of str
    """

    bearing: float
    width: float
    first: float
    strip: NDArray[np.intp]
    along: Array
    notes: tuple[str, ...] = ()


def crest_divide(grid: ElevationGrid, bearing: float, *, width: float = STRIP) -> Divide:
    """Divide through the highest ground of every strip along the wind.

    Parameters
    ----------
    grid : ElevationGrid
        On metres; NaN where missing.
    bearing : float [rad]
        Direction the air goes to, clockwise from grid north.
    width : float [m]
        Of a strip, at least two cells are taken.

    Returns
    -------
    Divide

    Raises
    ------
    TerrainError
        If the ground is flat or missing.

    Notes
    -----
    In strips whose crest rises less than a quarter as far above the lowest ground as the
    highest crest (sea beside an island, a gap), or whose highest ground lies at the edge of the map (corners that the
    range does not reach), the crest is interpolated between the strips on both sides.

    Examples
    --------
    >>> from orolift.terrain.grid import ElevationGrid
    >>> x = np.arange(-20e3, 21e3, 1e3)
    >>> ridge = ElevationGrid(np.exp(-((x / 5e3) ** 2)) * np.full((41, 1), 900.0), x, -x)
    >>> print(np.abs(crest_divide(ridge, np.pi / 2).along).max().round(6))
    0.0
    """
    width = max(width, 2.0 * max(grid_spacing(grid)))
    across, along = _turned(*np.meshgrid(grid.x, grid.y), bearing)
    known = np.isfinite(grid.elevation)
    ground = grid.elevation[known]
    if ground.size == 0 or float(np.ptp(ground)) < MINIMUM_RELIEF:
        raise TerrainError(
            "the map is flat, so it has no windward and no lee side. Check its unit, or leave out the shares."
        )
    first = float(across.min()) - 0.5 * width
    strip = ((across[known] - first) / width).astype(np.intp)
    count = int(strip.max()) + 1
    crest = np.full(count, -np.inf)
    np.maximum.at(crest, strip, ground)
    top = ground == crest[strip]
    place = np.bincount(strip[top], along[known][top], count) / np.maximum(np.bincount(strip[top], minlength=count), 1)
    low = float(ground.min())
    high = crest - low >= LOW_CREST * (crest.max() - low)
    start, end = np.full(count, np.inf), np.full(count, -np.inf)
    np.minimum.at(start, strip, along[known])
    np.maximum.at(end, strip, along[known])
    inside = high & (place > start + width) & (place < end - width)
    clear = np.flatnonzero(inside if inside.any() else high)
    number = np.arange(count)
    return Divide(bearing, width, first, number, np.interp(number, clear, place[clear]))


def line_divide(lines: Sequence[Array], grid: ElevationGrid, bearing: float) -> Divide:
    """Divide along a line somebody drew.

    Parameters
    ----------
    lines : sequence of ndarray, shape (n, 2) [m]
        Vertices x, y of the line or its parts, in the coordinates of the grid.
    grid : ElevationGrid
    bearing : float [rad]
        Direction the air goes to, clockwise from grid north.

    Returns
    -------
    Divide

    Raises
    ------
    TerrainError
        If the line runs along the wind, or no strip of the map crosses it.

    Notes
    -----
    A cell is windward when the air that leaves it downwind crosses the line an odd number of times, so
    that bends of the line are followed. Where the line ends inside the map it
    goes on at the place of its end, along and across the wind.

    Examples
    --------
    >>> x = np.arange(0.0, 9e3, 1e3)
    >>> from orolift.terrain.grid import ElevationGrid
    >>> grid = ElevationGrid(np.zeros((9, 9)), x, x[::-1])
    >>> line = np.array([[4500.0, -1e4], [4500.0, 2e4]])
    >>> print(windward_cells(grid, line_divide([line], grid, np.pi / 2))[0].astype(int))
    [1 1 1 1 1 0 0 0 0]
    """
    width = min(grid_spacing(grid))
    corners = _turned(*np.meshgrid(grid.x[[0, -1]], grid.y[[0, -1]]), bearing)[0]
    first = float(corners.min()) - 0.5 * width
    count = int((corners.max() - first) / width) + 1
    strips, places = [], []
    for line in lines:
        across, along = _turned(line[:, 0], line[:, 1], bearing)
        strip, place = _crossings((across - first) / width - 0.5, along, count)
        strips.append(strip)
        places.append(place)
    strip, place = np.concatenate(strips), np.concatenate(places)
    met = np.unique(strip)
    if met.size == 0:
        raise TerrainError(
            "the divide does not cross the wind anywhere on the map. It must run across the wind, over the map; check "
            "its coordinate system and the wind direction."
        )
    strip, place = _odd(strip, place)
    nearest = met[np.clip(np.searchsorted(met, np.arange(count)), 0, met.size - 1)]
    before = met[np.clip(np.searchsorted(met, np.arange(count)) - 1, 0, met.size - 1)]
    closer = np.where(np.abs(np.arange(count) - before) < np.abs(nearest - np.arange(count)), before, nearest)
    missing = np.setdiff1d(np.arange(count), met)
    last = np.searchsorted(strip, closer[missing], side="right") - 1
    strip, place = np.concatenate([strip, missing]), np.concatenate([place, place[last]])
    order = np.lexsort((place, strip))
    note = (
        f"The divide does not reach across the whole map: on {100.0 * missing.size / count:.0f} % of its width it was "
        "carried on from its ends."
    )
    return Divide(bearing, width, first, strip[order], place[order], (note,) if missing.size else ())


def windward_cells(grid: ElevationGrid, divide: Divide) -> NDArray[np.bool_]:
    """Which cells of a map lie on the windward side of a divide.

    Parameters
    ----------
    grid : ElevationGrid
    divide : Divide
        Of a map of the same extent.

    Returns
    -------
    ndarray of bool, shape (ny, nx)
        A cell on the divide itself is windward.
    """
    across, along = _turned(*np.meshgrid(grid.x, grid.y), divide.bearing)
    count = int(divide.strip[-1]) + 1
    strip = np.clip(((across - divide.first) / divide.width).astype(np.intp), 0, count - 1)
    ends = np.searchsorted(divide.strip, np.arange(count), side="right")
    if ends[-1] == count:  # one crossing in every strip
        return np.asarray(along <= divide.along[strip])
    span = 1.0 + float(np.abs(along).max() + np.abs(divide.along).max())
    order = divide.strip * (2.0 * span) + divide.along
    behind = np.searchsorted(order, strip * (2.0 * span) + along)
    return np.asarray((ends[strip] - behind) % 2 == 1)


def divide_points(divide: Divide) -> Array:
    """Points of a divide on the map, for drawing: one for every crossing of a strip.

    Parameters
    ----------
    divide : Divide

    Returns
    -------
    ndarray, shape (n, 2) [m]
        x and y, from left to right of the wind.
    """
    across = divide.first + (divide.strip + 0.5) * divide.width
    s, c = np.sin(divide.bearing), np.cos(divide.bearing)
    return np.column_stack([across * c + divide.along * s, divide.along * c - across * s])


def windward_share(rate: Array, windward: NDArray[np.bool_]) -> float | None:
    """Share of the rain on a map that falls on its windward side.

    Parameters
    ----------
    rate : ndarray, shape (ny, nx) [kg m-2 s-1]
        NaN where unknown.
    windward : ndarray of bool, shape (ny, nx)

    Returns
    -------
    float or None [1]
        None where no rain falls.
    """
    total = float(np.nansum(rate))
    return float(np.nansum(rate[windward])) / total if total > 0.0 else None


def _turned(x: Array, y: Array, bearing: float) -> tuple[Array, Array]:
    """Distance across the wind, to its right, and along it."""
    within("bearing", bearing, -10.0, 10.0, "rad", "orolift works in radians, not degrees.")
    s, c = np.sin(bearing), np.cos(bearing)
    return np.asarray(x * c - y * s), np.asarray(x * s + y * c)


def _crossings(across: Array, along: Array, count: int) -> tuple[NDArray[np.intp], Array]:
    """Strips whose middle a line crosses, and where; `across` in strips, whole numbers are middles."""
    a, b = across[:-1], across[1:]
    # half open, so that a vertex on a middle counts once
    first = np.clip(np.ceil(np.minimum(a, b)), 0, count).astype(np.intp)
    last = np.clip(np.ceil(np.maximum(a, b)), 0, count).astype(np.intp)
    number = last - first
    segment = np.repeat(np.arange(a.size), number)
    strip = first[segment] + np.arange(segment.size) - np.repeat(np.cumsum(number) - number, number)
    share = (strip - a[segment]) / (b - a)[segment] if segment.size else np.zeros(0)
    return strip, along[:-1][segment] + share * np.diff(along)[segment]


def _odd(strip: NDArray[np.intp], along: Array) -> tuple[NDArray[np.intp], Array]:
    """Crossings in order; of an even number in a strip the one farthest upwind is left out."""
    order = np.lexsort((along, strip))
    strip, along = strip[order], along[order]
    _, start, number = np.unique(strip, return_index=True, return_counts=True)
    keep = np.ones(strip.size, dtype=bool)
    keep[start[number % 2 == 0]] = False
    return strip[keep], along[keep]
