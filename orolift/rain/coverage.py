"""How much of each cell of a grid a polygon covers, exactly."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.errors import OutOfRangeError
from orolift.rain.ground import grid_spacing

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.terrain.grid import ElevationGrid

    Array = NDArray[np.float64]
    Index = NDArray[np.intp]

_NOISE = 1e-12  # of a cell: less is rounding


@dataclass(frozen=True, eq=False)
class Coverage:
    """Part of a grid that a polygon covers.

    Attributes
    ----------
    rows, columns : slice
        Window of the grid.
    share : ndarray, shape of the window [1]
        Share of each cell that lies inside.
    """

    rows: slice
    columns: slice
    share: Array


def coverage(polygon: Any, grid: ElevationGrid) -> Coverage:
    """Share of every cell of a grid that lies inside a polygon.

    Parameters
    ----------
    polygon : shapely Polygon or MultiPolygon
        Valid, in the coordinates of the grid. Holes are left out.
    grid : ElevationGrid
        On metres, even.

    Returns
    -------
    Coverage
        Of an empty window when the polygon lies outside.

    Raises
    ------
    OutOfRangeError
        If it is no valid polygon.

    Notes
    -----
    Every edge is cut at the lines of the grid; each piece adds, with its sign, the area between it and
    the right edge of its row of cells, and a running sum along the rows gives the share (Green's theorem).
    Exact to rounding, whatever the size of the polygon. Time goes with the number of pieces and the window.

    Examples
    --------
    >>> from shapely import box
    >>> from orolift.terrain.grid import ElevationGrid
    >>> grid = ElevationGrid(np.zeros((8, 8)), np.arange(8.0), np.arange(8.0)[::-1])
    >>> coverage(box(0.75, 6.0, 2.5, 7.5), grid).share
    array([[0.75 , 1.   ],
           [0.375, 0.5  ]])
    """
    outline = _outline(polygon)
    dx, dy = grid_spacing(grid)
    ny, nx = grid.elevation.shape
    ring, xy = outline
    x = (xy[:, 0] - grid.x[0]) / dx + 0.5
    y = (grid.y[0] - xy[:, 1]) / dy + 0.5
    left, right = _window(x, nx)
    top, bottom = _window(y, ny)
    window = slice(top, bottom), slice(left, right)
    if right == left or bottom == top:
        return Coverage(*window, np.zeros((bottom - top, right - left)))
    same = ring[1:] == ring[:-1]
    edges = tuple(part[same] for part in (x[:-1] - left, y[:-1] - top, x[1:] - left, y[1:] - top))
    return Coverage(*window, _covered(edges, bottom - top, right - left))


def _outline(polygon: Any) -> tuple[Index, Array]:
    """Ring number and coordinates of all vertices; outer rings one way round, holes the other."""
    import shapely
    from shapely.geometry.polygon import orient

    if polygon.geom_type not in {"Polygon", "MultiPolygon"} or polygon.is_empty:
        raise OutOfRangeError(
            f"polygon: a {polygon.geom_type}{' without area' if polygon.is_empty else ''} has no area to rain on."
        )
    if not polygon.is_valid:
        raise OutOfRangeError(
            f"polygon: it is not valid ({shapely.is_valid_reason(polygon)}). Repair it first, for example with "
            "shapely.make_valid."
        )
    parts = [orient(part) for part in shapely.get_parts(polygon)]
    rings = [ring for part in parts for ring in (part.exterior, *part.interiors)]
    xy, ring = shapely.get_coordinates(rings, return_index=True)
    return ring, xy


def _window(values: Array, size: int) -> tuple[int, int]:
    """First and one past last cell that a range of positions touches, cut to the grid."""
    first = min(max(int(np.floor(values.min())), 0), size)
    return first, max(min(int(np.ceil(values.max())), size), first)


def _covered(edges: tuple[Array, ...], ny: int, nx: int) -> Array:
    """Share of each cell of a window inside the rings made of these edges."""
    x0, y0, x1, y1 = edges
    segment = np.arange(x0.size)
    by_column, at_column = _cuts(x0, x1, nx)
    by_row, at_row = _cuts(y0, y1, ny)
    owner = np.concatenate([segment, segment, by_column, by_row])
    place = np.concatenate([np.zeros(x0.size), np.ones(x0.size), at_column, at_row])
    order = np.lexsort((place, owner))
    owner, place = owner[order], place[order]
    x = np.clip(x0[owner] + place * (x1 - x0)[owner], 0.0, nx)
    y = np.clip(y0[owner] + place * (y1 - y0)[owner], 0.0, ny)
    piece = owner[1:] == owner[:-1]
    rise = (y[1:] - y[:-1])[piece]
    middle_x, middle_y = (0.5 * (a[1:] + a[:-1])[piece] for a in (x, y))
    counts = (rise != 0.0) & (middle_x < nx)
    rise, middle_x, middle_y = rise[counts], middle_x[counts], middle_y[counts]
    column = middle_x.astype(np.intp)
    row = np.minimum(middle_y.astype(np.intp), ny - 1)  # a piece that ends on the last line may round onto it
    start = row * (nx + 1) + column
    part = rise * (middle_x - column)
    area = np.bincount(start, rise - part, ny * (nx + 1)) + np.bincount(start + 1, part, ny * (nx + 1))
    # y runs southward and outer rings counterclockwise: what lies right of a piece going up is inside
    share = np.cumsum(area.reshape(ny, nx + 1), axis=1)[:, :-1]
    share = np.clip(share, 0.0, 1.0)
    share[share < _NOISE] = 0.0
    return np.asarray(share)


def _cuts(a: Array, b: Array, size: int) -> tuple[Index, Array]:
    """Edges cut by whole numbers from 0 to `size` strictly between their ends, and where from 0 to 1."""
    first = np.maximum(np.floor(np.minimum(a, b)) + 1.0, 0.0)
    last = np.minimum(np.ceil(np.maximum(a, b)) - 1.0, size)
    number = np.maximum(last - first + 1.0, 0.0).astype(np.intp)
    edge = np.repeat(np.arange(a.size), number)
    line = first[edge] + (np.arange(edge.size) - np.repeat(np.cumsum(number) - number, number))
    return edge, (line - a[edge]) / (b - a)[edge]
