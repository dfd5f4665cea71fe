"""Contours of a field on the streamlines, in drawing coordinates; those of the map have a module of their own."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.drawing import Curve, path_data, thinned

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]
    Line = tuple[Array, Array]

TOLERANCE = 0.5
"""Drawing units by which a contour may be off."""
SHORTEST = 14.0
"""Contours shorter than this many drawing units are left out."""
ABOVE_ALL = 1e12


def contour_lines(x: Array, y: Array, field: Array, level: float) -> list[Line]:
    """Lines along which a field has a value.

    Parameters
    ----------
    x : ndarray, shape (n,)
    y, field : ndarray, shape (n, nz)
    level : float

    Returns
    -------
    list of (ndarray, ndarray)
        Drawing coordinates, every line from left to right.

    Examples
    --------
    >>> x = np.linspace(0.0, 100.0, 5)
    >>> y = np.tile([50.0, 0.0], (5, 1))
    >>> ((across, down),) = contour_lines(x, y, np.tile([0.0, 1.0], (5, 1)), 0.5)
    >>> float(across[0]), float(across[-1]), float(down[-1])
    (0.0, 100.0, 25.0)
    """
    from contourpy import LineType, contour_generator

    made = contour_generator(*_grid(x, y, field), name="serial", line_type=LineType.Separate)
    out = []
    for found in made.lines(level):
        points = np.asarray(found, dtype=np.float64)
        across, down = points[:, 0], points[:, 1]
        if np.hypot(np.diff(across), np.diff(down)).sum() < SHORTEST:
            continue
        turned = slice(None, None, -1) if across[-1] < across[0] else slice(None)
        keep = thinned(across[turned], down[turned], TOLERANCE)
        out.append((across[turned][keep], down[turned][keep]))
    return out


def contour_body(x: Array, y: Array, field: Array, level: float, top: float, kind: str) -> Curve | None:
    """The area in which a field is above a value, cut off at the top of the frame.

    Parameters
    ----------
    x : ndarray, shape (n,)
    y, field : ndarray, shape (n, nz)
    level, top : float
    kind : str

    Returns
    -------
    Curve or None
        None when there is none. Holes run the other way round.
    """
    from contourpy import FillType, contour_generator

    made = contour_generator(*_grid(x, y, field), name="serial", fill_type=FillType.OuterOffset)
    paths = []
    for points, offsets in zip(*made.filled(level, ABOVE_ALL), strict=True):
        for first, last in pairwise(offsets):
            across, down = points[first:last, 0], np.maximum(points[first:last, 1], top)
            if np.ptp(across) < 3.0 or np.ptp(down) < 1.5:
                continue
            keep = thinned(across, down, TOLERANCE)
            paths.append(path_data(across[keep], down[keep], closed=True))
    return Curve("".join(paths), kind) if paths else None


def _grid(x: Array, y: Array, field: Array) -> tuple[Array, Array, Array]:
    return np.broadcast_to(x[:, np.newaxis], y.shape), np.ascontiguousarray(y), np.ascontiguousarray(field)


def inside(line: Line, top: float) -> list[Line]:
    """The parts of a line below the top of the frame, y downward.

    Examples
    --------
    >>> [(a.tolist(), b.tolist()) for a, b in inside((np.array([0.0, 10.0]), np.array([-5.0, 5.0])), 0.0)]
    [([5.0, 10.0], [0.0, 5.0])]
    """
    x, y = line
    under = y >= top
    if under.all():
        return [line]
    cross = np.flatnonzero(under[1:] != under[:-1])
    share = (top - y[cross]) / (y[cross + 1] - y[cross])
    at = np.concatenate([x, x[cross] + share * (x[cross + 1] - x[cross])])
    down = np.concatenate([y, np.full(cross.size, top)])
    order = np.argsort(np.concatenate([np.arange(x.size, dtype=np.float64), cross + 0.5]))
    at, down = at[order], down[order]
    edges = np.flatnonzero(np.diff(np.concatenate([[False], down >= top, [False]]).astype(np.int8)))
    return [
        (at[first:last], down[first:last])
        for first, last in zip(edges[::2], edges[1::2], strict=True)
        if last - first > 1
    ]
