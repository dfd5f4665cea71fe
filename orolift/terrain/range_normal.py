"""The direction across a range, from the ground around its crest."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray


SMOOTHING = 4000.0  # [m] standard deviation; takes out side valleys up to about 15 km apart: a judgement
LEAST_KNOWN = 0.9  # share of the weight round a point that must be ground for its slope to count: a judgement


@dataclass(frozen=True)
class RangeNormal:
    """Direction across a range.

    Attributes
    ----------
    bearing : float [rad]
        Clockwise from north, the one of the two directions nearer to downwind.
    coherence : float [1]
        How much the ground has one direction: 1 a straight ridge, 0 a round hill.
    """

    bearing: float
    coherence: float


def range_normal(elevation: NDArray[np.float64], spacing: float, downwind: float) -> RangeNormal:
    """Direction across a range: principal axis of the gradient of the ground.

    Parameters
    ----------
    elevation : ndarray, shape (ny, nx) [m]
        Ground on a square grid of metres, rows north to south, columns west
        to east; NaN where there is none.
    spacing : float [m]
        Distance between rows and between columns.
    downwind : float [rad]
        Bearing the air moves toward; the normal is given in the half circle about it.

    Returns
    -------
    RangeNormal
        Of ground without slope, the downwind bearing with coherence 0.

    Notes
    -----
    Eigenvector to the larger eigenvalue of the mean of the outer product of
    the gradient with itself, the structure tensor of Bigun and Granlund (1987) [1]_;
    coherence is the difference of the eigenvalues over their sum. The ground is
    smoothed first by a Gaussian of 4 km standard deviation: side valleys are steeper
    than the range they are cut into and would otherwise turn the axis along it.

    References
    ----------
    .. [1] J. Bigun and G. H. Granlund (1987), "Optimal orientation detection of
       linear symmetry", Proc. First Int. Conf. on Computer Vision, 433-438
       (from memory).

    Examples
    --------
    >>> x = np.arange(-25.0, 26.0)
    >>> ridge = np.exp(-((x / 8.0) ** 2)) * np.ones((51, 1))
    >>> round(float(np.degrees(range_normal(1500.0 * ridge, 1000.0, 1.2).bearing)))
    90
    """
    smooth, weight = _smoothed(elevation, spacing)
    south, east = np.gradient(smooth, spacing, axis=0), np.gradient(smooth, spacing, axis=1)
    known = weight >= LEAST_KNOWN
    e, n = east[known], -south[known]
    total = float(np.sum(e * e + n * n))
    if total == 0.0:
        return RangeNormal(downwind, 0.0)
    # axis of the larger eigenvalue of [[ee, en], [en, nn]], as an angle from north toward east
    across, along = float(np.sum(2.0 * e * n)), float(np.sum(n * n - e * e))
    axis = 0.5 * np.arctan2(across, along)
    if np.cos(axis - downwind) < 0.0:
        axis += np.pi
    return RangeNormal(float(axis % (2.0 * np.pi)), float(np.hypot(across, along) / total))


def _smoothed(elevation: NDArray[np.float64], spacing: float) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Ground under a Gaussian weight, and the share of the weight that had ground; 0 where none had."""
    known = np.isfinite(elevation)
    rows, columns = (_weights(size, spacing) for size in elevation.shape)
    weight = rows @ known.astype(np.float64) @ columns.T
    total = rows @ np.where(known, elevation, 0.0) @ columns.T
    return np.divide(total, weight, out=np.zeros_like(total), where=weight > 0.0), weight


def _weights(size: int, spacing: float) -> NDArray[np.float64]:
    """Matrix that smooths along one axis; rows add up to one but near the ends, where weight falls outside."""
    place = np.arange(size) * spacing
    matrix = np.exp(-0.5 * ((place[:, np.newaxis] - place) / SMOOTHING) ** 2)
    return np.asarray(matrix * (spacing / (np.sqrt(2.0 * np.pi) * SMOOTHING)))
