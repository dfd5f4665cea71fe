"""Rain over a map: the linear theory on real terrain."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.rain.ground import filled_ground, grid_spacing, inflow_level, padded_ground, padding_for
from orolift.rain.spectral import rain_from_spectrum, spectrum_of
from orolift.terrain.transect import HIGHEST_GROUND, LOWEST_GROUND

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.rain.parameters import ColumnRain, RainParameters
    from orolift.terrain.grid import ElevationGrid


@dataclass(frozen=True, eq=False)
class RainMap:
    """Rain and snow that reach the ground over a map.

    Attributes
    ----------
    grid : ElevationGrid
        As given.
    spacing : (float, float) [m]
        Between columns, between rows.
    parameters : RainParameters
    floor : float or None [m above sea level]
        Ground lower than this counted as this high.
    rate : ndarray, shape (ny, nx) [kg m-2 s-1]
        Background and what the terrain adds or takes, not below zero; NaN where the ground is missing.
    added : float [kg s-1]
        What the terrain adds over the map before negative values are cut off.
    inflow_ground : float [m above sea level]
        Mean ground along the edges the wind comes in by, the floor put in.
    relief : float [m]
        Highest ground above `inflow_ground`.
    padded_shape : (int, int)
        Rows and columns with the padding.
    drifts : float
        Drift distances wind (cloud time + fall time) of padding along the wind.
    notes : tuple of str
    """

    grid: ElevationGrid
    spacing: tuple[float, float]
    parameters: RainParameters
    floor: float | None
    rate: NDArray[np.float64]
    added: float
    inflow_ground: float
    relief: float
    padded_shape: tuple[int, int]
    drifts: float
    notes: tuple[str, ...]


def rain_map(grid: ElevationGrid, parameters: RainParameters, *, floor: float | None = None) -> RainMap:
    """Rain over a map by the linear theory of Smith and Barstad (2004).

    Parameters
    ----------
    grid : ElevationGrid
        On metres, at least 8 x 8 cells; NaN where the ground is missing.
    parameters : RainParameters
        Wind along the axes of the grid.
    floor : float, optional [m above sea level]
        Ground lower than this counts as this high: the top of the blocked
        layer, and the height to which air must be lifted to condense.

    Returns
    -------
    RainMap

    Raises
    ------
    TerrainError
        If the grid is not even or too small, all of it is missing, or the padded map would not fit in memory.
    OutOfRangeError
        If `floor` or the ground is out of range.

    Notes
    -----
    P = max(P' + background, 0) with P' from `spectral.transfer` [1]_. Steady,
    uniform, saturated flow that crosses the terrain; air does not dry out on its way but for descent. The
    ground is padded (`ground.padding_for`) so that nothing comes round the edges.
    Taking the floor off the terrain is no part of the theory: of a ridge it leaves the uplift above
    the floor, which for a saturated column is what condenses.

    References
    ----------
    .. [1] R. B. Smith and I. Barstad (2004), "A linear theory of orographic
       precipitation", J. Atmos. Sci. 61, 1377-1391.

    Examples
    --------
    >>> from orolift.rain.parameters import RainParameters
    >>> from orolift.terrain.grid import ElevationGrid
    >>> x = np.arange(-60.0, 61.0, 2.0) * 1000.0
    >>> hill = 500.0 * np.exp(-(x**2 + x[::-1, np.newaxis] ** 2) / 15e3**2)
    >>> found = rain_map(ElevationGrid(hill, x, x[::-1]), RainParameters(15.0, 0.0, 0.005, 2500.0, 0.004))
    >>> print((3600.0 * found.rate.max()).round(1))
    1.1
    """
    spacing = grid_spacing(grid)
    ground, notes = filled_ground(grid.elevation)
    within("elevation", [ground.min(), ground.max()], LOWEST_GROUND, HIGHEST_GROUND, "m", "Are the heights in metres?")
    if floor is not None:
        ground = np.maximum(ground, within("floor", floor, LOWEST_GROUND, HIGHEST_GROUND, "m"))
    padding = padding_for(ground.shape, spacing, parameters)
    level = inflow_level(ground, parameters)
    highest = float(ground.max())
    padded = padded_ground(ground, padding, parameters)
    del ground
    spectrum = spectrum_of(padded)
    del padded
    ny, nx = grid.elevation.shape
    rate = rain_from_spectrum(spectrum, padding.shape, spacing, parameters)[:ny, :nx].copy()
    del spectrum
    missing = np.isnan(grid.elevation)
    rate[missing] = np.nan
    added = float(np.nansum(rate)) * spacing[0] * spacing[1]
    rate += parameters.background
    np.maximum(rate, 0.0, out=rate)
    return RainMap(
        grid=grid,
        spacing=spacing,
        parameters=parameters,
        floor=floor,
        rate=rate,
        added=added,
        inflow_ground=level,
        relief=highest - level,
        padded_shape=padding.shape,
        drifts=padding.drifts,
        notes=notes,
    )


def map_drying_ratio(found: RainMap, column: ColumnRain) -> float:
    """Rain above the background on the whole map, over the vapour that flows in across it.

    Parameters
    ----------
    found : RainMap
    column : ColumnRain
        Where its parameters came from.

    Returns
    -------
    float [1]
        May exceed 1: the theory does not use the vapour up.

    Notes
    -----
    The vapour flows in across the width of the map as the wind sees it, above the reference height.
    """
    p = found.parameters
    dx, dy = found.spacing
    rain = float(np.nansum(np.maximum(found.rate - p.background, 0.0))) * dx * dy
    ny, nx = found.rate.shape
    swept = nx * dx * abs(p.northward_wind) + ny * dy * abs(p.eastward_wind)  # width times wind speed
    return float(rain / (swept * column.column_vapour))
