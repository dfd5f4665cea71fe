"""A ridge entered by hand: a few points become a transect."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.errors import TerrainError
from orolift.terrain.transect import HIGHEST_GROUND, LOWEST_GROUND, MINIMUM_RELIEF, Transect

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

USUAL_INTERVALS = 511  # 512 points
LEAST_POINTS = 3  # low ground upwind, the crest, low ground downwind
LONGEST_RIDGE = 2.0e6  # [m] beyond it a straight line over a flat Earth is no transect: a judgement


def ridge_transect(
    distance: ArrayLike,
    elevation: ArrayLike,
    *,
    spacing: float | None = None,
    bearing: float | None = None,
) -> Transect:
    """Transect through the points of a hand-entered ridge.

    For terrain known as a raster use ``orolift.sources.raster`` instead.

    Parameters
    ----------
    distance : array_like, shape (n,), n at least 3 [m]
        Distance along the wind, strictly increasing downwind, from any zero;
        at most 2000 km in all.
    elevation : array_like, shape (n,) [m]
        Ground above sea level, -430 m to 9000 m, at least 30 m between the
        lowest and the highest.
    spacing : float, optional [m]
        Wanted distance between points, default 1/511 of the length.
    bearing : float, optional [rad]
        Direction toward which `distance` grows, clockwise from north.

    Returns
    -------
    Transect
        Uniform spacing within about a tenth of the wanted one, both ends and
        the crest on points, `origin` the first of the given distances.

    Raises
    ------
    TerrainError
        Fewer than three points, distances that do not increase, or too flat.
    OutOfRangeError
        A number that is missing or implausible.

    Notes
    -----
    Assumes straight lines between the points. Of the spacings within a tenth
    of the wanted one, that which brings a point nearest to the crest is taken,
    and this point gets the height of the crest, so the height is kept exactly;
    the place is kept within a quarter of the spacing, nearly always within a
    hundredth. Other corners are cut by what the ground changes in half a spacing.

    Examples
    --------
    >>> ridge = ridge_transect([0.0, 25e3, 60e3], [40.0, 1850.0, 210.0])
    >>> float(ridge.elevation.max()), float(ridge.elevation[-1])
    (1850.0, 210.0)
    """
    x, h = _checked_points(distance, elevation)
    length = float(x[-1] - x[0])
    wanted = USUAL_INTERVALS if spacing is None else round(length / _checked_spacing(spacing, length))
    crest = int(np.argmax(h))
    intervals = _intervals_with_crest((x[crest] - x[0]) / length, wanted)
    grid = np.linspace(0.0, length, intervals + 1)
    ground = np.interp(grid, x - x[0], h)
    nearest = int(np.argmin(np.abs(grid - (x[crest] - x[0]))))
    if 0 < crest < x.size - 1:
        nearest = min(max(nearest, 1), intervals - 1)
    ground[nearest] = h[crest]
    return Transect(
        distance=grid,
        elevation=ground,
        bearing=bearing,
        origin=float(x[0]),
        notes=(f"Ridge entered by hand: straight lines between {x.size} points.",),
    )


def _checked_points(distance: ArrayLike, elevation: ArrayLike) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Points of a ridge, refused with a reason when they make none."""
    x = within("distance", distance, -LONGEST_RIDGE, LONGEST_RIDGE, "m", "Distances along the ridge are too large.")
    feet = "If the heights are in feet, say so by the name of the column or key."
    h = within("elevation", elevation, LOWEST_GROUND, HIGHEST_GROUND, "m", feet)
    if x.ndim != 1 or x.shape != h.shape or x.size < LEAST_POINTS:
        raise TerrainError(
            f"the ridge has {x.size} distances and {h.size} elevations; it needs at least {LEAST_POINTS} points, "
            "each a distance and an elevation: low ground upwind, the crest, low ground downwind"
        )
    steps = np.diff(x)
    if np.any(steps <= 0.0):
        bad = int(np.argmax(steps <= 0.0))
        raise TerrainError(
            f"the distances of the ridge do not increase: point {bad + 2} at {x[bad + 1] / 1000:g} km follows "
            f"{x[bad] / 1000:g} km. Enter the points from the upwind end to the downwind end, each once"
        )
    if x[-1] - x[0] > LONGEST_RIDGE:
        raise TerrainError(
            f"the ridge is {(x[-1] - x[0]) / 1000:g} km long, at most {LONGEST_RIDGE / 1000:g} km make sense. "
            "Are the distances in metres rather than kilometres?"
        )
    relief = float(np.ptp(h))
    if relief < MINIMUM_RELIEF:
        raise TerrainError(
            f"the ridge is flat: {relief:g} m between its lowest and highest point, "
            f"at least {MINIMUM_RELIEF:g} m are needed to lift air. Check the unit of the elevations"
        )
    return x, h


def _checked_spacing(spacing: float, length: float) -> float:
    """Wanted spacing, between a 20 000th and a 20th of the length."""
    hint = "Leave the spacing out for one of 512 points."
    return float(within("spacing", spacing, length / 20_000, length / 20, "m", hint))


def _intervals_with_crest(share: float, wanted: int) -> int:
    """Number of intervals, near the wanted one, of which a point falls nearest to `share` of the length."""
    candidates = np.arange(max(2, round(0.9 * wanted)), round(1.1 * wanted) + 1)
    offset = np.abs(candidates * share - np.rint(candidates * share))
    near = offset <= offset.min() + 1e-9
    best = candidates[near]
    return int(best[np.argmin(np.abs(best - wanted))])
