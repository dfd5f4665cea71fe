"""Air over a transect: from an upwind column and a ground line to streamlines, wind and pressure."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from orolift.constants import GRAVITY, KAPPA
from orolift.errors import OutOfRangeError
from orolift.flow.boundary import Boundary, carried_share, crossing_boundary, split_boundary
from orolift.flow.layers import Layers, compression, layers_of_column, least_richardson_number
from orolift.flow.profiles import layer_mean, value_at
from orolift.flow.scales import LEAST_WIND
from orolift.flow.streamlines import Streamlines, joined_streamlines, speed_factor, streamlines
from orolift.flow.trapped import TrappedWaves, trapped_waves
from orolift.flow.waves import waves

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

LEAST_MEAN_DEPTH = 500.0
"""Depth [m] above the lowest streamline over which stability and wind are averaged, at least: a judgement."""
FADE_ABOVE_CRITICAL = 2000.0
"""Depth [m] over which displacement fades above a critical level: a judgement."""


@dataclass(frozen=True)
class Airflow:
    """Air over a transect, or over some of its points. Leading axes hold members.

    Attributes
    ----------
    start_heights : ndarray, shape (..., nz) [m]
        Heights of the streamlines in the upwind column, above sea level.
    heights : ndarray, shape (..., nz, nx) [m]
        Heights of the streamlines along the transect; the first is the lower boundary.
    breaking : ndarray of bool, shape (..., nz, nx)
        Where the wave breaks.
    top_pressure : ndarray, shape (..., nx) [Pa]
        Pressure perturbation at the highest streamline; `highest_pressure` turns it into a pressure.
    boundary : Boundary
        Lower boundary taken apart, at all points of the transect; `wave_share` below 1 says the range is too
        high for linear waves.
    start_wind : ndarray, shape (..., nz) [m s-1]
        Wind across the range where the streamlines start, at least 2.5: times `speed_factor` it is the wind.
    compression : ndarray, shape (..., nz) [m-1]
        By which rising air expands, from `layers.compression`.
    critical_level : ndarray, shape (...) [m]
        Height above which waves do not go; infinite when there is none.
    least_richardson : ndarray, shape (...) [1]
        Below 1/4 linear waves do not describe the flow.
    weak_wind : ndarray of bool, shape (...)
        Whether wind at the lowest streamlines was raised to 2.5 m/s.
    trapped : TrappedWaves or None
        Trapped lee waves, when asked for.
    stretching : ndarray, shape (..., nz, nx) [1]
        Spacing over spacing upwind; this and the next are worked out when they are asked for.
    speed_factor : ndarray, shape (..., nz, nx) [1]
        Wind over the wind where the streamline started.
    """

    start_heights: NDArray[np.float64]
    heights: NDArray[np.float64]
    breaking: NDArray[np.bool_]
    top_pressure: NDArray[np.float64]
    boundary: Boundary
    start_wind: NDArray[np.float64]
    compression: NDArray[np.float64]
    critical_level: NDArray[np.float64]
    least_richardson: NDArray[np.float64]
    weak_wind: NDArray[np.bool_]
    trapped: TrappedWaves | None

    @cached_property
    def lines(self) -> Streamlines:
        """The streamlines."""
        return Streamlines(self.start_heights, self.heights, self.breaking)

    @property
    def stretching(self) -> NDArray[np.float64]:
        """Spacing over spacing upwind."""
        return self.lines.stretching

    @cached_property
    def speed_factor(self) -> NDArray[np.float64]:
        """Wind over the wind where the streamline started."""
        return speed_factor(self.lines, self.start_heights, self.compression)


def airflow(
    distance: ArrayLike,
    ground: ArrayLike,
    height: ArrayLike,
    density: ArrayLike,
    n_squared: ArrayLike,
    wind: ArrayLike,
    start_heights: ArrayLike,
    *,
    blocked_top: ArrayLike | None = None,
    pool_top: ArrayLike | None = None,
    crest: int | None = None,
    hydrostatic: bool = False,
    find_trapped: bool = False,
    at: NDArray[np.intp] | None = None,
) -> Airflow:
    """Air over a transect, from an upwind column and a ground line.

    Call it twice, with saturated and with dry stability, and join the two
    with `joined`.

    Parameters
    ----------
    distance : array_like, shape (nx,) [m]
        Evenly spaced, wind from the left.
    ground : array_like, shape (nx,) or (..., nx) [m]
        Above sea level.
    height : array_like, shape (nz_column,) [m]
        Levels of the upwind column above sea level, strictly increasing.
    density, n_squared, wind : array_like, shape (..., nz_column) [kg m-3, s-2, m s-1]
        Wind across the range, positive toward it.
    start_heights : array_like, shape (nz,) or (..., nz) [m]
        Streamlines wanted, from the lowest crossing one (`boundary.start_level`) to the top.
    blocked_top, pool_top : array_like, shape (...), optional [m]
        See `boundary.crossing_boundary`.
    crest : int, optional
        Index of the crest; the highest ground when left out.
    hydrostatic : bool
        Leave vertical acceleration out of the waves.
    find_trapped : bool
        Also look for trapped waves (one column only).
    at : ndarray of int, shape (n,), optional
        Numbers of the points at which streamlines are wanted; all nx of them when left out.

    Returns
    -------
    Airflow

    Raises
    ------
    OutOfRangeError
        If distances are not even, the first start height is not that of the boundary, or a value is
        outside its range.

    Notes
    -----
    The boundary is split (`split_boundary`) with N and U averaged from the lowest streamline
    to the crest; its wave part goes through the layered linear solver (`waves`), its body is
    carried (`carried_share`); `streamlines` adds the two and keeps streamlines apart; `speed_factor`
    gives the wind. Assumed: steady two-dimensional flow without rotation, unstable
    layers neutral, wind never below 2.5 m/s. Above a critical level displacements fade over 2 km.
    The pressure at the top is that which, with the weight of the displaced column, gives the waves'
    pressure at the ground; where no wave breaks and all are hydrostatic that is the solver's own.

    Examples
    --------
    >>> x = np.arange(0.0, 200e3, 500.0)
    >>> ridge = 1000.0 * np.exp(-(((x - 100e3) / 15e3) ** 2))
    >>> column = (np.linspace(0.0, 16e3, 33), np.linspace(1.2, 0.15, 33), np.full(33, 1e-4), np.full(33, 20.0))
    >>> flow = airflow(x, ridge, *column, np.linspace(0.0, 16e3, 81))
    >>> bool(np.allclose(flow.heights[0], ridge)), bool(flow.speed_factor[0].max() > 1.2)
    (True, True)
    """
    spacing = _spacing(distance)
    line = crossing_boundary(ground, crest=crest, blocked_top=blocked_top, pool_top=pool_top)
    start = _checked_start(start_heights, line)
    top = np.maximum(np.max(line, axis=-1), line[..., 0] + LEAST_MEAN_DEPTH)
    n = np.sqrt(np.maximum(layer_mean(height, n_squared, line[..., 0], top), 0.0))
    mean_wind = np.maximum(layer_mean(height, wind, line[..., 0], top), LEAST_WIND)
    boundary = split_boundary(line, n, mean_wind, crest=crest, ground=ground)
    column = layers_of_column(height, density, wind, n_squared, start)
    field = waves(boundary.wave, spacing, column, hydrostatic=hydrostatic, at=at)
    body = boundary.body if at is None else boundary.body[..., at]
    critical_level = np.take_along_axis(column.edge, column.carrying[..., None], axis=-1)[..., 0]
    wave_shift = _faded(field.displacement, column, critical_level)
    carried = carried_share(boundary, start)
    shift = carried[..., None] * body[..., None, :]
    shift += wave_shift
    lines = streamlines(start, shift, wave_displacement=wave_shift)
    expansion = compression(height, density, n_squared, start)
    return Airflow(
        start_heights=start,
        heights=lines.heights,
        breaking=lines.breaking,
        top_pressure=_top_pressure(field.surface_pressure, lines.heights, carried, body, column),
        boundary=boundary,
        start_wind=np.maximum(value_at(height, wind, start), LEAST_WIND),
        compression=expansion,
        critical_level=np.where(column.critical, critical_level, np.inf),
        least_richardson=least_richardson_number(column),
        weak_wind=column.weak_below,
        trapped=trapped_waves(column) if find_trapped else None,
    )


def joined(moist: Airflow, dry: Airflow, weight: ArrayLike) -> Airflow:
    """Saturated and dry solution over the same boundary, joined along the transect.

    Parameters
    ----------
    moist, dry : Airflow
        With the same start heights and boundary.
    weight : array_like, shape (..., nx) [1]
        Of the saturated one, from `streamlines.join_weight`.

    Returns
    -------
    Airflow
        Wind by continuity from the joined streamlines; critical level, trapped waves and
        what follows from them those of the dry one.

    Raises
    ------
    OutOfRangeError
        If the start heights differ or a weight is outside 0 to 1.

    Examples
    --------
    >>> x = np.arange(0.0, 200e3, 500.0)
    >>> ridge = 500.0 * np.exp(-(((x - 100e3) / 15e3) ** 2))
    >>> z, start = np.linspace(0.0, 16e3, 33), np.linspace(0.0, 16e3, 81)
    >>> dry = airflow(x, ridge, z, np.ones(33), np.full(33, 1e-4), np.full(33, 20.0), start)
    >>> moist = airflow(x, ridge, z, np.ones(33), np.full(33, 2e-5), np.full(33, 20.0), start)
    >>> bool(np.allclose(joined(moist, dry, np.ones(400)).heights, moist.heights))
    True
    """
    if moist.start_heights.shape != dry.start_heights.shape or not np.allclose(moist.start_heights, dry.start_heights):
        raise OutOfRangeError("moist and dry start at different heights. Work out both with the same start_heights.")
    lines = joined_streamlines(moist.lines, dry.lines, weight)
    share = np.asarray(weight, np.float64)
    return replace(
        dry,
        heights=lines.heights,
        breaking=lines.breaking,
        top_pressure=share * moist.top_pressure + (1.0 - share) * dry.top_pressure,
    )


def highest_pressure(flow: Airflow, pressure: ArrayLike, density: ArrayLike) -> NDArray[np.float64]:
    """Pressure along the highest streamline: where to start summing up weight downward.

    Parameters
    ----------
    flow : Airflow
    pressure : array_like, shape (...) [Pa]
        Upwind, at the highest start height.
    density : array_like, shape (...) [kg m-3]
        Upwind, at the highest start height.

    Returns
    -------
    ndarray, shape (..., nx) [Pa]

    Notes
    -----
    Along a streamline heat content, potential and kinetic energy keep their sum (Bernoulli), and the kinetic part
    changes by minus p'/rho: so ``cp T`` changes by ``p'/rho - g eta``, and pressure with it, without gain of heat.
    Taking p' at the new height and adding the pressure of the upwind column there would be wrong
    by ``rho N^2 eta^2 / 2``, as much as the wave's own pressure over a range of 500 m.

    Examples
    --------
    >>> x = np.arange(0.0, 200e3, 500.0)
    >>> column = ([0.0, 16e3], [1.2, 0.2], [1e-4, 1e-4], [20.0, 20.0])
    >>> flow = airflow(x, np.zeros(400), *column, np.linspace(0.0, 16e3, 81))
    >>> highest_pressure(flow, 10e3, 0.16)[:2]
    array([10000., 10000.])
    """
    upwind = np.asarray(pressure, np.float64)[..., None]
    weight = GRAVITY * np.asarray(density, np.float64)[..., None]
    rise = flow.heights[..., -1, :] - flow.start_heights[..., -1:]
    return np.asarray(upwind * (1.0 + KAPPA * (flow.top_pressure - weight * rise) / upwind) ** (1.0 / KAPPA))


def _spacing(distance: ArrayLike) -> float:
    """Spacing of an evenly spaced line."""
    x = np.asarray(distance, np.float64)
    steps = np.diff(x)
    if x.ndim != 1 or x.size < 4 or not np.allclose(steps, steps[:1], rtol=1e-4) or not steps[0] > 0.0:
        raise OutOfRangeError(
            "distance: the transect must have at least 4 points, evenly spaced downwind. Resample it to even spacing."
        )
    return float(x[-1] - x[0]) / (x.size - 1)


def _checked_start(start_heights: ArrayLike, line: NDArray[np.float64]) -> NDArray[np.float64]:
    """Start heights, the first exactly that of the boundary."""
    start = np.asarray(start_heights, np.float64)
    off = np.abs(start[..., 0] - line[..., 0])
    if not np.all(off <= 1.0):
        raise OutOfRangeError(
            f"start_heights: the first is {float(np.max(off)):g} m away from where the lowest streamline starts. "
            "Begin at boundary.start_level(ground, blocked_top)."
        )
    lead = np.broadcast_shapes(start.shape[:-1], line.shape[:-1])
    start = np.array(np.broadcast_to(start, (*lead, start.shape[-1])))
    start[..., 0] = line[..., 0]
    return start


def _faded(
    displacement: NDArray[np.float64], column: Layers, critical_level: NDArray[np.float64]
) -> NDArray[np.float64]:
    """Displacement by waves, fading above a critical level."""
    if not np.any(column.critical):
        return displacement
    above = column.edge - critical_level[..., None]
    return np.asarray(displacement * np.clip(1.0 - above / FADE_ABOVE_CRITICAL, 0.0, 1.0)[..., None])


def _top_pressure(
    surface_pressure: NDArray[np.float64],
    heights: NDArray[np.float64],
    carried: NDArray[np.float64],
    body: NDArray[np.float64],
    column: Layers,
) -> NDArray[np.float64]:
    """Pressure perturbation at the top from that at the ground and the weight of the displaced column between.

    Displaced by waves alone: heights less start heights and the carried part of the body.
    """
    depth = np.diff(column.edge, axis=-1)
    swelling = column.compression * depth
    expansion = np.exp(np.cumsum(swelling, axis=-1))
    weight = column.density * column.n_squared * depth * np.exp(-0.5 * swelling) * expansion
    half = 0.5 * weight  # of a layer: for the streamline below it and the one above
    level = np.concatenate([half, np.zeros_like(half[..., :1])], axis=-1)
    level[..., 1:] += half
    start = np.sum(level * column.edge, axis=-1, keepdims=True)
    share = np.sum(level * carried, axis=-1, keepdims=True)
    displaced = np.matmul(level[..., None, :], heights)[..., 0, :] - start - share * body
    return np.asarray((surface_pressure - displaced) / expansion[..., -1:])
