"""The ground made ready for a spectral method: gaps filled, a floor put in, smooth padding all round."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import TerrainError

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.rain.parameters import RainParameters
    from orolift.terrain.grid import ElevationGrid

    Array = NDArray[np.float64]

COAST = 30.0  # [m] missing cells whose surroundings lie lower on average are sea: a judgement
WAVE_SHARE = 0.5  # padding for the waves, as a share of the width of the map: their images then change the rain by
# 0.3 % of its peak (measured on a range of 36 km across a map of 160 km)
LEAST_WAVE_PADDING = 50.0e3  # [m] six half widths of a range of 8 km, a half width or more of wide ones
DRIFTS = 5.0  # drift distances U (tc + tf) of padding: exp(-10) (1 + 10) = 0.05 % of the rain comes round
LEAST_DRIFTS = 2.5  # the same where memory is short: 4 %
RELAXATIONS = 20  # at every size of square; more changes a gap of 12 km in a hill of 15 km by less than 1 %
MOST_CELLS = 2**26  # of the padded map: with it the work fits in 3 GB


@dataclass(frozen=True)
class Padding:
    """How far the ground is carried on beyond the map.

    Attributes
    ----------
    shape : (int, int)
        Rows and columns with the padding, lengths at which the transform is fast.
    fade : (int, int)
        Cells, along rows' and columns' order as in `shape`, over which each edge fades to nothing.
    drifts : float
        Drift distances of rain that fit into it.
    """

    shape: tuple[int, int]
    fade: tuple[int, int]
    drifts: float


def grid_spacing(grid: ElevationGrid) -> tuple[float, float]:
    """Distance between columns and between rows of a grid in metres.

    Parameters
    ----------
    grid : ElevationGrid
        At least 8 x 8 cells; x increasing, y decreasing, both uniform.

    Returns
    -------
    (float, float) [m]

    Raises
    ------
    TerrainError
        If it is too small or not uniform.
    """
    out = []
    for name, values, sign in (("x", grid.x, 1.0), ("y", grid.y, -1.0)):
        if values.size < 8:
            raise TerrainError(f"the map has {values.size} cells along {name}; rain needs at least 8 each way")
        steps = sign * np.diff(values)
        mean = float(steps.mean())
        if not (mean > 0.0 and np.allclose(steps, mean, rtol=1e-3)):
            order = "increase" if sign > 0 else "decrease (rows run north to south)"
            raise TerrainError(f"{name} of the grid must {order} in even steps of metres")
        out.append(mean)
    return out[0], out[1]


def filled_ground(elevation: Array) -> tuple[Array, tuple[str, ...]]:
    """Ground without gaps, for computing only: sea as 0 m, other gaps smoothly from around.

    Parameters
    ----------
    elevation : ndarray, shape (ny, nx) [m]
        NaN where missing.

    Returns
    -------
    ground : ndarray, shape (ny, nx) [m]
        `elevation` itself if nothing is missing.
    notes : tuple of str

    Raises
    ------
    TerrainError
        If every cell is missing.

    Notes
    -----
    Connected missing cells count as sea when the cells around them are lower
    than 30 m on average (a judgement). The others are filled from means over ever larger
    squares: continuous, between the values around.

    Examples
    --------
    >>> ground, notes = filled_ground(np.array([[1.0, np.nan, 3.0], [2.0, 1.0, 2.0]]))
    >>> print(ground[0])
    [1. 0. 3.]
    """
    missing = np.isnan(elevation)
    if not missing.any():
        return elevation, ()
    if missing.all():
        raise TerrainError("every cell of the map is missing; there is no ground to make rain")
    from scipy import ndimage

    labels, count = ndimage.label(missing)
    around = np.zeros(count + 1)
    weight = np.zeros(count + 1)
    for axis in (0, 1):
        for forward in (True, False):
            a, b = (slice(None, -1), slice(1, None)) if forward else (slice(1, None), slice(None, -1))
            hole, rim = ((a, ...), (b, ...)) if axis == 0 else ((..., a), (..., b))
            edge = missing[hole] & ~missing[rim]
            around += np.bincount(labels[hole][edge], elevation[rim][edge], count + 1)
            weight += np.bincount(labels[hole][edge], minlength=count + 1)
    sea = np.divide(around, weight, out=np.full(count + 1, np.inf), where=weight > 0.0) < COAST
    sea[0] = False
    wet = sea[labels]
    ground = np.where(wet, 0.0, elevation)
    notes = []
    if wet.any():
        notes.append(f"{100.0 * wet.mean():.1f} % of the map has no data beside low ground and counts as sea, 0 m.")
    gaps = missing & ~wet
    if gaps.any():
        ground = np.where(gaps, _smooth_fill(ground), ground)
        notes.append(
            f"{100.0 * gaps.mean():.1f} % of the map has no data and was filled smoothly from around to compute the "
            "rain; no rain is given there."
        )
    return ground, tuple(notes)


def _smooth_fill(ground: Array) -> Array:
    """Gaps filled from means over squares of 2, 4, 8, ... cells, the finest that has data."""
    known = ~np.isnan(ground)
    if known.all():
        return ground
    ny, nx = ground.shape
    even = (ny + ny % 2, nx + nx % 2)
    weight, total = np.zeros(even), np.zeros(even)
    weight[:ny, :nx] = known
    total[:ny, :nx] = np.where(known, ground, 0.0)
    weight, total = (a.reshape(even[0] // 2, 2, even[1] // 2, 2).sum(axis=(1, 3)) for a in (weight, total))
    coarse = _smooth_fill(np.divide(total, weight, out=np.full(weight.shape, np.nan), where=weight > 0.0))
    row, column = (
        np.clip((np.arange(n) + 0.5) / 2.0 - 0.5, 0.0, m - 1.0) for n, m in zip((ny, nx), coarse.shape, strict=True)
    )
    fine = _along(_along(coarse, row, 0), column, 1)
    return _relaxed(np.where(known, ground, fine), ~known)


def _relaxed(ground: Array, gaps: NDArray[np.bool_]) -> Array:
    """Each gap drawn toward the mean of its four neighbours, `RELAXATIONS` times: no step at its rim."""
    ny, nx = ground.shape
    row, column = np.nonzero(gaps)
    around = [
        np.clip(row + i, 0, ny - 1) * nx + np.clip(column + j, 0, nx - 1) for i, j in ((-1, 0), (1, 0), (0, -1), (0, 1))
    ]
    flat, here = ground.reshape(-1).copy(), row * nx + column
    for _ in range(RELAXATIONS):
        flat[here] = 0.25 * sum(flat[other] for other in around)
    return flat.reshape(ny, nx)


def _along(values: Array, place: Array, axis: int) -> Array:
    """Values at fractional places along an axis, linear."""
    low = np.minimum(place.astype(np.intp), max(values.shape[axis] - 2, 0))
    high = np.minimum(low + 1, values.shape[axis] - 1)
    share = (place - low)[:, np.newaxis] if axis == 0 else place - low
    return np.asarray(np.take(values, low, axis) * (1.0 - share) + np.take(values, high, axis) * share)


def padding_for(shape: tuple[int, int], spacing: tuple[float, float], parameters: RainParameters) -> Padding:
    """How far to carry the ground on, so that nothing comes round the edges.

    Parameters
    ----------
    shape : (int, int)
    spacing : (float, float) [m]
        Between columns, between rows.
    parameters : RainParameters

    Returns
    -------
    Padding

    Raises
    ------
    TerrainError
        If a padded map of that resolution would not fit in memory.

    Notes
    -----
    Each way half of the width of the map, at least 50 km, for waves (their
    rain falls off with the square of the distance), plus five drift distances
    wind (cloud time + fall time) along the wind: 0.05 % of the rain over the last cell of the
    map would then come round. A map that would have more than 2^26 cells with it gets less,
    down to half of the drift (4 %).

    Examples
    --------
    >>> from orolift.rain.parameters import RainParameters
    >>> padding_for((2048, 2048), (100.0, 100.0), RainParameters(15.0, 0.0, 0.005, 2500.0, 0.004)).shape
    (3072, 4608)
    """
    drift = parameters.cloud_time + parameters.fall_time
    winds = (parameters.northward_wind, parameters.eastward_wind)

    waves = [max(WAVE_SHARE * n * step, LEAST_WAVE_PADDING) for n, step in zip(shape, spacing[::-1], strict=True)]
    fade = int(0.5 * waves[0] / spacing[1]), int(0.5 * waves[1] / spacing[0])

    def padded(drifts: float) -> tuple[int, int]:
        out = []
        for n, step, wave, wind in zip(shape, spacing[::-1], waves, winds, strict=True):
            out.append(fast_length(n + int(np.ceil((wave + drifts * abs(wind) * drift) / step))))
        return out[0], out[1]

    for drifts in np.linspace(DRIFTS, LEAST_DRIFTS, 11):
        found = padded(float(drifts))
        if found[0] * found[1] <= MOST_CELLS:
            return Padding(found, fade, float(drifts))
    factor = np.sqrt(found[0] * found[1] / MOST_CELLS)
    raise TerrainError(
        f"the map has {shape[0]} x {shape[1]} cells of {spacing[0]:.0f} m, and rain that drifts "
        f"{parameters.wind_speed * drift / 1000.0:.0f} km needs so much room around it that it would have "
        f"{found[0]} x {found[1]}. Use cells of {spacing[0] * factor:.0f} m or more."
    )


def fast_length(least: int) -> int:
    """Smallest length with no prime factor above 5: at these the transform is fast.

    Parameters
    ----------
    least : int
        1 or more.

    Returns
    -------
    int
        `least` or a little more.

    Examples
    --------
    >>> fast_length(1001), fast_length(1024)
    (1024, 1024)
    """
    best = 1 << max(least - 1, 0).bit_length()
    five = 1
    while five < best:
        odd = five
        while odd < best:
            rest = -(-least // odd)
            best = min(best, odd << max(rest - 1, 0).bit_length())
            odd *= 3
        five *= 5
    return best


def padded_ground(ground: Array, padding: Padding, parameters: RainParameters) -> Array:
    """Ground with its edges carried on and faded out into the padding.

    Parameters
    ----------
    ground : ndarray, shape (ny, nx) [m]
        Without gaps.
    padding : Padding
        From `padding_for`.
    parameters : RainParameters

    Returns
    -------
    ndarray, shape of the padding [m]
        Relative to the mean of the edges the wind comes in by: there the
        padding adds no step that would make rain.

    Notes
    -----
    The values of each edge go on outward and fade as cos^2 to nothing over half of the
    padding for waves, however long the rain drifts.

    Examples
    --------
    >>> from orolift.rain.parameters import RainParameters
    >>> flow = RainParameters(15.0, 0.0, 0.005, 2500.0, 0.004)
    >>> print(padded_ground(np.array([[5.0, 9.0]] * 2), Padding((2, 8), (0, 3), 5.0), flow)[0].round(1))
    [0. 4. 3. 1. 0. 0. 0. 0.]
    """
    ny, nx = ground.shape
    out = np.zeros(padding.shape)
    np.subtract(ground, inflow_level(ground, parameters), out=out[:ny, :nx])
    after, before = _fading(padding.shape[1] - nx, padding.fade[1])
    out[:ny, nx:] = out[:ny, nx - 1 : nx] * after + out[:ny, :1] * before
    after, before = _fading(padding.shape[0] - ny, padding.fade[0])
    out[ny:] = out[ny - 1] * after[:, np.newaxis] + out[0] * before[:, np.newaxis]
    return out


def _fading(count: int, reach: int) -> tuple[Array, Array]:
    """Weights of the edge before and of the edge after `count` cells of padding."""
    weight = np.cos(0.5 * np.pi * np.minimum(np.arange(1, count + 1) / max(reach, 1), 1.0)) ** 2
    return weight, weight[::-1]


def inflow_level(ground: Array, parameters: RainParameters) -> float:
    """Mean ground along the edges that the wind comes in by [m].

    Parameters
    ----------
    ground : ndarray, shape (ny, nx) [m]
    parameters : RainParameters

    Returns
    -------
    float [m]
    """
    u, v = parameters.eastward_wind, parameters.northward_wind
    west_or_east = float(ground[:, 0 if u >= 0.0 else -1].mean())
    south_or_north = float(ground[-1 if v >= 0.0 else 0].mean())
    a, b = abs(u) * ground.shape[0], abs(v) * ground.shape[1]
    return float((a * west_or_east + b * south_or_north) / (a + b))
