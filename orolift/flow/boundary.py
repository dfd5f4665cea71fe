"""The lower boundary of the crossing air: what it follows, what of it makes waves, what is only carried.

A boundary that ends lower or higher than it starts has no converged linear
wave solution: its answer would depend on how far away it comes back. So the
unequal part is carried along as a body, and only the equal-ended rest makes waves.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

LARGEST_WAVE = 0.8
"""Largest N h / U of the part that makes waves: just below where a wave over a bell ridge overturns (0.85, Long's
equation; Huppert and Miles 1969, J. Fluid Mech. 35, 481-496)."""
LEAST_FADE = 4000.0
"""Depth [m] over which a body part fades upward, at least: a judgement."""
DEEPEST_BODY = 5000.0
"""Depth [m] up to which a body part is carried in full, at most (U/N may be infinite): a judgement."""


@dataclass(frozen=True)
class Boundary:
    """Lower boundary of the crossing air, taken apart. Leading axes hold members.

    Attributes
    ----------
    height : ndarray, shape (..., nx) [m]
        Above sea level; the lowest streamline.
    start : ndarray, shape (...) [m]
        Height of the lowest streamline at the upwind end.
    wave : ndarray, shape (..., nx) [m]
        Part that makes waves, 0 at both ends.
    body : ndarray, shape (..., nx) [m]
        Part that is carried; ``height = start + wave + body``.
    wave_share : ndarray, shape (...) [1]
        How much of the equal-ended part makes waves; below 1 the range is too high
        for linear waves, which would break.
    full_depth, fade_depth : ndarray, shape (...) [m]
        The body is carried in full up to the first above the lowest streamline, and fades to nothing
        over the second.
    """

    height: NDArray[np.float64]
    start: NDArray[np.float64]
    wave: NDArray[np.float64]
    body: NDArray[np.float64]
    wave_share: NDArray[np.float64]
    full_depth: NDArray[np.float64]
    fade_depth: NDArray[np.float64]


def crossing_boundary(
    ground: ArrayLike,
    *,
    crest: int | None = None,
    blocked_top: ArrayLike | None = None,
    pool_top: ArrayLike | None = None,
) -> NDArray[np.float64]:
    """Height of the lowest streamline of the crossing air along the transect.

    Parameters
    ----------
    ground : array_like, shape (nx,) or (..., nx) [m]
        Above sea level, wind from the left; -500 m to 9000 m.
    crest : int, optional
        Index of the crest; the highest ground when left out.
    blocked_top : array_like, shape (...), optional [m]
        Top of air that does not cross, above sea level. When given, the crossing air upwind of
        the crest glides over it: full blocking. Without it the air feels the terrain.
    pool_top : array_like, shape (...), optional [m]
        Top of cold air in the lee that stays, above sea level; a top above the crest counts
        as the crest. Without it the air follows the terrain to the lee foot.

    Returns
    -------
    ndarray, shape (..., nx) [m]

    Raises
    ------
    OutOfRangeError
        If ground is outside the range or not finite.

    Examples
    --------
    >>> crossing_boundary([0.0, 1000.0, 2000.0, 500.0, 0.0], blocked_top=1200.0, pool_top=300.0)
    array([1200., 1200., 2000.,  500.,  300.])
    """
    height = within("ground", ground, -500.0, 9000.0, "m", "Give metres above sea level.")
    top = _crest(height, crest)
    index = np.arange(height.shape[-1])
    if blocked_top is not None:
        stopped = np.asarray(blocked_top, np.float64)[..., None]
        height = np.where(index <= top, np.maximum(height, stopped), height)
    if pool_top is not None:
        over = np.take_along_axis(height, np.broadcast_to(top, (*height.shape[:-1], 1)), axis=-1)
        pool = np.minimum(np.asarray(pool_top, np.float64)[..., None], over)
        height = np.where(index > top, np.maximum(height, pool), height)
    return height


def start_level(ground: ArrayLike, blocked_top: ArrayLike | None = None) -> NDArray[np.float64]:
    """Height at which the lowest crossing streamline starts: where to begin start heights.

    Parameters
    ----------
    ground : array_like, shape (nx,) or (..., nx) [m]
        Above sea level.
    blocked_top : array_like, shape (...), optional [m]
        As for `crossing_boundary`.

    Returns
    -------
    ndarray, shape (...) [m]

    Examples
    --------
    >>> start_level([40.0, 1800.0, 200.0], blocked_top=900.0)
    array(900.)
    """
    return np.asarray(crossing_boundary(ground, blocked_top=blocked_top)[..., 0])


def split_boundary(
    height: ArrayLike, n: ArrayLike, wind: ArrayLike, *, crest: int | None = None, ground: ArrayLike | None = None
) -> Boundary:
    """A lower boundary taken apart into what makes waves and what is carried.

    Parameters
    ----------
    height : array_like, shape (..., nx) [m]
        From `crossing_boundary`.
    n : array_like, shape (...) [s-1]
        Buoyancy frequency below the crest, at least 0.
    wind : array_like, shape (...) [m s-1]
        Across the range below the crest, more than 0.
    crest : int, optional
        Index of the crest; the highest point of `ground`, or of `height`, when left out.
    ground : array_like, shape (..., nx), optional [m]
        Terrain, to find the crest by.

    Returns
    -------
    Boundary

    Raises
    ------
    OutOfRangeError
        If a value is outside its range.

    Notes
    -----
    With heights counted from the start: where the boundary ends lower than it started, all
    that lies below the start in the lee is body. Where it ends higher, the body climbs with
    the ground up to the height of the end, and stays there. The rest ends as it starts. Of it,
    so much makes waves that ``N max / U`` is at most 0.8; the excess is body too. Bodies are
    carried in full up to U/N above the lowest streamline and fade linearly over 4 km, or
    twice their largest height if that is more: so they do not change the wind in the lowest U/N, and
    do not depend on any padding.

    Examples
    --------
    >>> apart = split_boundary([500.0, 900.0, 500.0, 0.0], 0.01, 10.0)
    >>> apart.wave, apart.body
    (array([  0., 400.,   0.,   0.]), array([   0.,    0.,    0., -500.]))
    """
    line = np.asarray(height, np.float64)
    stiffness = within("n", n, 0.0, 1.0, "s-1")
    speed = within("wind", wind, 0.1, 200.0, "m s-1", "It is the component across the range, in metres a second.")
    top = _crest(line if ground is None else np.asarray(ground, np.float64), crest)
    rise = line - line[..., :1]
    end = np.maximum(rise[..., -1:], 0.0)
    upwind = np.arange(line.shape[-1]) <= top
    body = np.where(upwind, np.clip(rise, 0.0, end), np.minimum(rise, end))
    rest = rise - body
    largest = np.max(np.abs(rest), axis=-1)
    steepness = stiffness * largest / speed
    share = np.where(steepness > LARGEST_WAVE, LARGEST_WAVE / np.maximum(steepness, LARGEST_WAVE), 1.0)
    wave = share[..., None] * rest
    body = rise - wave
    neutral = stiffness * DEEPEST_BODY <= speed
    return Boundary(
        height=line,
        start=np.asarray(line[..., 0]),
        wave=wave,
        body=body,
        wave_share=share,
        full_depth=np.where(neutral, DEEPEST_BODY, speed / np.where(neutral, 1.0, stiffness)),
        fade_depth=np.maximum(LEAST_FADE, 2.0 * np.max(np.abs(body), axis=-1)),
    )


def carried_share(boundary: Boundary, height: ArrayLike) -> NDArray[np.float64]:
    """Share of a body part that streamlines starting at given heights take part in.

    Parameters
    ----------
    boundary : Boundary
    height : array_like, shape (..., nz) [m]
        Start heights above sea level.

    Returns
    -------
    ndarray, shape (..., nz) [1]
        1 near the ground, 0 aloft.

    Examples
    --------
    >>> apart = split_boundary([0.0, 900.0, 0.0, -500.0], 0.01, 10.0)
    >>> carried_share(apart, [0.0, 1000.0, 3000.0, 5000.0])
    array([1. , 1. , 0.5, 0. ])
    """
    above = np.asarray(height, np.float64) - boundary.start[..., None] - boundary.full_depth[..., None]
    return np.asarray(np.clip(1.0 - above / boundary.fade_depth[..., None], 0.0, 1.0))


def _crest(ground: NDArray[np.float64], crest: int | None) -> NDArray[np.intp]:
    """Index of the crest with an axis to compare along the transect."""
    if crest is not None:
        return np.asarray([crest])
    return np.asarray(np.argmax(ground, axis=-1))[..., None]
