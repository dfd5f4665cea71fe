"""Rain on a drawing: areas above a rate, and lines of equal rate."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.report.figures.drawing import Curve, path_data

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]
    Line = tuple[Array, Array]

TOLERANCE = 0.45
"""Drawing units by which a contour may be off."""
SHORTEST = 14.0
"""Contours shorter than this many drawing units are left out."""


def contours_of(x: Array, y: Array, rate: Array) -> Any:
    """What contours of a map are made with, once for all levels.

    Parameters
    ----------
    x, y : ndarray, shapes (n,), (m,)
        Columns and rows in drawing coordinates.
    rate : ndarray, shape (m, n)

    Returns
    -------
    contourpy ContourGenerator
    """
    from contourpy import FillType, LineType, contour_generator

    return contour_generator(x, y, rate, name="serial", line_type=LineType.Separate, fill_type=FillType.OuterOffset)


def rain_lines(made: Any, level: float) -> list[Line]:
    """Lines of equal rate, the longest first.

    Parameters
    ----------
    made : contourpy ContourGenerator
    level : float

    Returns
    -------
    list of (ndarray, ndarray)
        Drawing coordinates.
    """
    from shapely import length, linestrings

    lines = [linestrings(points) for points in made.lines(level) if len(points) > 1]
    kept = sorted((line for line in lines if length(line) >= SHORTEST), key=lambda line: -line.length)
    return [_simplified(line) for line in kept]


def rain_layer(made: Any, level: float, kind: str) -> Curve | None:
    """The area above a rate.

    Parameters
    ----------
    made : contourpy ContourGenerator
    level : float
    kind : str

    Returns
    -------
    Curve or None
        None where nowhere is above it. Holes run the other way round.
    """
    from shapely import linestrings

    paths = []
    for points, offsets in zip(*made.filled(level, np.inf), strict=True):
        for first, last in pairwise(offsets):
            across, down = _simplified(linestrings(points[first:last]))
            if np.ptp(across) >= 2.0 and np.ptp(down) >= 2.0:
                paths.append(path_data(across, down, closed=True))
    return Curve("".join(paths), kind) if paths else None


def _simplified(line: Any) -> Line:
    """Points that draw a line within the tolerance."""
    from shapely import get_coordinates, simplify

    points = get_coordinates(simplify(line, TOLERANCE, preserve_topology=False))
    return points[:, 0], points[:, 1]
