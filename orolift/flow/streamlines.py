"""Streamlines over a boundary: displaced, kept from crossing, with the wind that continuity asks for."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

LEAST_STRETCHING = 0.4
"""Least spacing of streamlines over their spacing upwind: below it the wave breaks, and the wind would be more than 2.5
times the upwind one. A judgement: transitional flow (Smith 1985, J. Atmos. Sci. 42, 2597-2603) over a range of
N h / U = 0.3 reaches 2.4 times, waves of finite amplitude 1.7 times before they overturn."""
LARGEST_WAVE_STRETCHING = 2.0
"""Spacing by waves at which linear theory brings the air to rest (wind perturbation -U): there the wave breaks."""


@dataclass(frozen=True)
class Streamlines:
    """Streamlines over a transect. Leading axes hold members.

    Attributes
    ----------
    start_heights : ndarray, shape (..., nz) [m]
        Upwind.
    heights : ndarray, shape (..., nz, nx) [m]
        Of each streamline; none crosses another.
    breaking : ndarray of bool, shape (..., nz, nx)
        Where the wave breaks.
    stretching : ndarray, shape (..., nz, nx) [1]
        Spacing over spacing upwind, at the streamlines; worked out when it is asked for.
    """

    start_heights: NDArray[np.float64]
    heights: NDArray[np.float64]
    breaking: NDArray[np.bool_]

    @cached_property
    def stretching(self) -> NDArray[np.float64]:
        """Spacing over spacing upwind."""
        return stretching(self.start_heights, self.heights)


def streamlines(
    start_heights: ArrayLike,
    displacement: ArrayLike,
    *,
    wave_displacement: ArrayLike | None = None,
    least_stretching: float = LEAST_STRETCHING,
) -> Streamlines:
    """Streamlines from their displacements, rebuilt upward so that none crosses another.

    Parameters
    ----------
    start_heights : array_like, shape (..., nz) [m]
        Upwind, strictly increasing.
    displacement : array_like, shape (..., nz, nx) [m]
        The first row is that of the boundary.
    wave_displacement : array_like, shape (..., nz, nx), optional [m]
        Part of it that waves make, for telling where they break; all of it when left out.
    least_stretching : float [1]
        Spacing over spacing upwind is kept from falling below this; 0.01 to 1.

    Returns
    -------
    Streamlines

    Raises
    ------
    OutOfRangeError
        If `least_stretching` is outside its range.

    Notes
    -----
    A streamline that started at z0 is at ``z0 + eta(x, z0)``, so spacing changes by
    ``1 + d(eta)/dz0``, taken between neighbours and kept from below. Heights are built
    from the lowest line upward: each line lies at ``z0 + eta``, or as far above the one
    below as the least spacing asks for, if that is higher. So lines pushed up where the wave breaks come back
    to their place above it. The wave breaks where the spacing had to be kept, or where the wave alone
    doubles it, which is where linear theory brings the wind to rest.

    Examples
    --------
    >>> lines = streamlines([0.0, 100.0, 200.0], [[50.0], [-60.0], [0.0]])
    >>> lines.heights[:, 0], lines.breaking[:, 0]
    (array([ 50.,  90., 200.]), array([ True,  True, False]))
    """
    least = float(within("least_stretching", least_stretching, 0.01, 1.0, "", "It is a share of the upwind spacing."))
    start = np.asarray(start_heights, np.float64)
    shift = np.asarray(displacement, np.float64)
    gap = np.diff(start, axis=-1)[..., None]
    heights = shift + ((1.0 - least) * start)[..., None]
    for i in range(1, heights.shape[-2]):  # with the least spacing taken off, lines must only not fall
        np.maximum(heights[..., i, :], heights[..., i - 1, :], out=heights[..., i, :])
    heights += (least * start)[..., None]
    waves = shift if wave_displacement is None else np.asarray(wave_displacement, np.float64)
    spacing = heights[..., 1:, :] - heights[..., :-1, :]
    breaks = spacing < least * (1.0 + 1e-9) * gap
    np.subtract(waves[..., 1:, :], waves[..., :-1, :], out=spacing)
    breaks |= spacing > (LARGEST_WAVE_STRETCHING - 1.0) * gap
    return Streamlines(np.broadcast_to(start, heights.shape[:-1]), heights, _either_side(breaks))


def speed_factor(lines: Streamlines, start_heights: ArrayLike, compression: ArrayLike) -> NDArray[np.float64]:
    """Wind along streamlines over the wind where they started.

    Parameters
    ----------
    lines : Streamlines
    start_heights : array_like, shape (..., nz) [m]
    compression : array_like, shape (..., nz) [m-1]
        Gravity over the square of the speed of sound where they started, 8.5e-5 near the ground.

    Returns
    -------
    ndarray, shape (..., nz, nx) [1]

    Notes
    -----
    Continuity between streamlines: ``U / U0 = rho0(z0) / (rho(z) (1 + d(eta)/dz0))``, with the density
    that the air itself takes on by expanding, ``rho = rho0 exp(-eta g / c^2)``.

    Examples
    --------
    >>> lines = streamlines([0.0, 100.0], [[0.0], [-50.0]])
    >>> speed_factor(lines, [0.0, 100.0], [0.0, 0.0])
    array([[2.],
           [2.]])
    """
    factor = lines.heights - np.asarray(start_heights, np.float64)[..., None]
    factor *= np.asarray(compression, np.float64)[..., None]
    np.exp(factor, out=factor)
    factor /= lines.stretching
    return factor


def joined_streamlines(one: Streamlines, other: Streamlines, weight: ArrayLike) -> Streamlines:
    """Two solutions over the same boundary, joined along the transect.

    Parameters
    ----------
    one, other : Streamlines
        With the same start heights, for example saturated and dry.
    weight : array_like, shape (..., nx) [1]
        Of the first, 0 to 1; from `join_weight`.

    Returns
    -------
    Streamlines
        Neither crossing nor below ground when the two are not.

    Raises
    ------
    OutOfRangeError
        If a weight is outside 0 to 1.

    Examples
    --------
    >>> a = streamlines([0.0, 100.0], [[0.0, 0.0], [0.0, 0.0]])
    >>> b = streamlines([0.0, 100.0], [[0.0, 0.0], [50.0, 50.0]])
    >>> joined_streamlines(a, b, [1.0, 0.5]).heights[1]
    array([100., 125.])
    """
    first = within("weight", weight, 0.0, 1.0, "", "It is a share.")[..., None, :]
    heights = one.heights - other.heights
    heights *= first
    heights += other.heights
    breaking = (one.breaking & (first > 0.0)) | (other.breaking & (first < 1.0))
    return Streamlines(other.start_heights, heights, breaking)


def join_weight(
    distance: ArrayLike, crest_distance: ArrayLike, cloud_end: ArrayLike, *, least_width: float = 2000.0
) -> NDArray[np.float64]:
    """Weight of the saturated solution along the transect.

    Parameters
    ----------
    distance : array_like, shape (nx,) [m]
    crest_distance : array_like, shape (...) [m]
    cloud_end : array_like, shape (...) [m]
        Distance at which cloud ends in the lee.
    least_width : float [m]
        Over which the weight falls, at least, so that streamlines stay smooth: a judgement.

    Returns
    -------
    ndarray, shape (..., nx) [1]
        1 up to the crest, falling with half a cosine to 0 where cloud ends.

    Examples
    --------
    >>> join_weight([0.0, 10e3, 15e3, 20e3, 30e3], 10e3, 20e3)
    array([1. , 1. , 0.5, 0. , 0. ])
    """
    crest = np.asarray(crest_distance, np.float64)[..., None]
    width = np.maximum(np.asarray(cloud_end, np.float64)[..., None] - crest, least_width)
    share = np.clip((np.asarray(distance, np.float64) - crest) / width, 0.0, 1.0)
    return np.asarray(0.5 + 0.5 * np.cos(np.pi * share)).round(15)


def stretching(start_heights: ArrayLike, heights: NDArray[np.float64]) -> NDArray[np.float64]:
    """Spacing of streamlines over their spacing upwind.

    Parameters
    ----------
    start_heights : array_like, shape (..., nz) [m]
    heights : ndarray, shape (..., nz, nx) [m]

    Returns
    -------
    ndarray, shape (..., nz, nx) [1]
        At the streamlines: between both neighbours, one-sided at the ends.

    Examples
    --------
    >>> stretching([0.0, 100.0, 200.0], np.array([[0.0], [50.0], [100.0]]))[:, 0]
    array([0.5, 0.5, 0.5])
    """
    start = np.asarray(start_heights, np.float64)[..., None]
    ratio = np.empty_like(heights)
    np.subtract(heights[..., 2:, :], heights[..., :-2, :], out=ratio[..., 1:-1, :])
    ratio[..., 1:-1, :] /= start[..., 2:, :] - start[..., :-2, :]
    for end, upper, lower in ((0, 1, 0), (-1, -1, -2)):
        gap = start[..., upper, :] - start[..., lower, :]
        ratio[..., end, :] = (heights[..., upper, :] - heights[..., lower, :]) / gap
    return ratio


def _either_side(breaks: NDArray[np.bool_]) -> NDArray[np.bool_]:
    """Whether the layer below or above a streamline breaks."""
    inner = breaks[..., 1:, :] | breaks[..., :-1, :]
    return np.concatenate([breaks[..., :1, :], inner, breaks[..., -1:, :]], axis=-2)
