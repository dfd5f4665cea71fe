"""The transect: elevation along the wind."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

MINIMUM_RELIEF = 30.0  # [m] less than this lifts air by less than the errors of a sounding: a judgement
LOWEST_GROUND = -430.0  # [m] the shore of the Dead Sea, rounded, from memory
HIGHEST_GROUND = 9000.0  # [m] just above the highest summit on Earth


@dataclass(frozen=True)
class Transect:
    """Elevation along a line, wind from the left.

    Attributes
    ----------
    distance : ndarray, shape (ns,) [m]
        Distance from the upwind end, uniform spacing, growing downwind; the first value is 0.
    elevation : ndarray, shape (ns,) [m]
        Ground above sea level; for a swath its mean across the line.
    bearing : float or None [rad]
        Direction toward which `distance` grows, clockwise from north; for a
        geodesic, the bearing where it passes the centre point. None when unknown.
    high_elevation : ndarray, shape (ns,), or None [m]
        90th percentile of the ground across the swath: ridges rather than the mean.
    longitude, latitude : ndarray, shape (ns,), or None [degrees east, degrees north]
        Where the points are. The one place where degrees are used inside.
    origin : float [m]
        The user's own distance of the first point: the number to add to
        `distance` to get back to the numbers of a hand-entered ridge.
    notes : tuple of str
        What was assumed, in sentences.
    """

    distance: NDArray[np.float64]
    elevation: NDArray[np.float64]
    bearing: float | None = None
    high_elevation: NDArray[np.float64] | None = None
    longitude: NDArray[np.float64] | None = None
    latitude: NDArray[np.float64] | None = None
    origin: float = 0.0
    notes: tuple[str, ...] = ()


def transect_elevation(transect: Transect, distance: ArrayLike) -> NDArray[np.float64]:
    """Ground of a transect at any distances along it.

    Parameters
    ----------
    transect : Transect
    distance : array_like, any shape [m]
        Distances from the upwind end, inside the transect.

    Returns
    -------
    ndarray, shape of `distance` [m]
        Ground above sea level, on straight lines between the points.

    Raises
    ------
    OutOfRangeError
        If a distance is NaN or lies outside the transect.

    Examples
    --------
    >>> line = Transect(np.array([0.0, 1000.0, 2000.0]), np.array([10.0, 210.0, 110.0]))
    >>> transect_elevation(line, [500.0, 1500.0])
    array([110., 160.])
    """
    inside = within(
        "distance",
        distance,
        float(transect.distance[0]),
        float(transect.distance[-1]),
        "m",
        "The point lies beyond the ends of the transect: lengthen the transect.",
    )
    return np.asarray(np.interp(inside, transect.distance, transect.elevation))
