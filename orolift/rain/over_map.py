"""Rain over the map of a crossing: the linear theory with the crossing's air, and everything read off the map."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.rain.catchments import CatchmentRain, ElevationBands, catchment_rain, elevation_bands
from orolift.rain.estimates import SimpleEstimates, simple_estimates
from orolift.rain.gauge_fit import RainFit, fit_to_gauges
from orolift.rain.gauges import GaugeComparison, Gauges, gauge_comparison
from orolift.rain.limits import limits_of_theory
from orolift.rain.line import NO_RAIN, LineRain, MapLine, line_rain
from orolift.rain.parameters import ColumnRain, column_rain
from orolift.rain.rain_map import RainMap, map_drying_ratio, rain_map
from orolift.rain.snow import SnowByHeight, snow_by_height, snow_on_ground
from orolift.rain.windward import Divide, crest_divide, line_divide, windward_cells, windward_share

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.result import Crossing
    from orolift.terrain.grid import ElevationGrid

    Array = NDArray[np.float64]

BELOW_COLUMN = 2900.0  # [m] how far below its ground the column is continued for the snow of lower ground
STEP = 200.0  # [m] of the elevation bands
HOUR = 3600.0


@dataclass(frozen=True)
class Catchment:
    """A catchment: its name, and its outline in the coordinates of the map.

    Attributes
    ----------
    name : str
    polygon : shapely Polygon or MultiPolygon
        Valid.
    notes : tuple of str
        What was done to it.
    """

    name: str
    polygon: Any
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, eq=False)
class RainOnCatchment:
    """A catchment with its rain.

    Attributes
    ----------
    catchment : Catchment
    rain : CatchmentRain
        Its notes hold those of the catchment.
    bands : ElevationBands or None
        None outside the map.
    """

    catchment: Catchment
    rain: CatchmentRain
    bands: ElevationBands | None


@dataclass(frozen=True, eq=False)
class MapRain:
    """Rain over the map of a crossing. What cannot be known is None.

    Attributes
    ----------
    found : RainMap
    column : ColumnRain
        Where its parameters came from.
    reference : float [m above sea level]
        Lowest air that crosses.
    duration : float [s]
    total : float [kg s-1]
        All rain and snow on the map, background included.
    mean_rate, peak_rate : float [kg m-2 s-1]
    peak : (float, float) [m]
        x and y of the cell of the peak.
    drying_ratio : float [1]
        Rain above the background over the vapour that flows in across the map.
    divide : Divide
        Where the windward side ends.
    drawn_divide : bool
        Whether it was given as a line.
    windward : ndarray of bool, shape (ny, nx)
    windward_share : float or None [1]
        Of all rain on the map.
    snow : SnowByHeight
        In the incoming air.
    snow_share : ndarray, shape (ny, nx) [1]
    snowing_share : float or None [1]
        Of all that falls, what is snow.
    bands : ElevationBands or None
        Rain and snow of the whole map by height of the ground.
    line : MapLine
    on_line : LineRain
        The map along the line of the crossing, against the crossing.
    estimates : SimpleEstimates
    catchments : tuple of RainOnCatchment
    gauges : Gauges or None
    comparison : GaugeComparison or None
        Map against gauges, over the duration.
    fit : RainFit or None
        Only where it was asked for; nothing of the map uses it.
    limits : tuple of str
        Where the case breaks the theory.
    notes : tuple of str
        What was assumed.
    """

    found: RainMap
    column: ColumnRain
    reference: float
    duration: float
    total: float
    mean_rate: float
    peak_rate: float
    peak: tuple[float, float]
    drying_ratio: float
    divide: Divide
    drawn_divide: bool
    windward: NDArray[np.bool_]
    windward_share: float | None
    snow: SnowByHeight
    snow_share: Array
    snowing_share: float | None
    bands: ElevationBands | None
    line: MapLine
    on_line: LineRain
    estimates: SimpleEstimates
    catchments: tuple[RainOnCatchment, ...]
    gauges: Gauges | None
    comparison: GaugeComparison | None
    fit: RainFit | None
    limits: tuple[str, ...]
    notes: tuple[str, ...]

    @property
    def is_dry(self) -> bool:
        """Whether no rain to speak of falls anywhere on the map."""
        return self.peak_rate < NO_RAIN

    @property
    def rain(self) -> Array:
        """Rain on the map, snow left out, shape (ny, nx) [kg m-2 s-1]."""
        return np.asarray(self.found.rate * (1.0 - self.snow_share))


def map_rain(
    crossing: Crossing,
    grid: ElevationGrid,
    line: MapLine,
    *,
    north: float = 0.0,
    duration: float = HOUR,
    catchments: Sequence[Catchment] = (),
    divide: Sequence[Array] | None = None,
    gauges: Gauges | None = None,
    fit: bool = False,
) -> MapRain:
    """Rain over the map of a crossing.

    Parameters
    ----------
    crossing : Crossing
        Its incoming air, blocked top, times and background make the parameters.
    grid : ElevationGrid
        On metres.
    line : MapLine
        The line of the crossing on it.
    north : float [rad]
        Bearing of true north on the grid, clockwise from grid north.
    duration : float [s]
        How long the situation lasts, 1 s to 60 days.
    catchments : sequence of Catchment
    divide : sequence of ndarray, shape (n, 2), optional [m]
        Lines between windward and lee; by default the crest of each strip along the wind.
    gauges : Gauges, optional
    fit : bool
        Whether times and background are fitted to the gauges too.

    Returns
    -------
    MapRain

    Raises
    ------
    TerrainError
        If the grid is too small, flat or empty, or a divide does not cross the wind.
    IncomingAirError, OutOfRangeError
        If the air allows no map, the duration is out of range, or a fit has too few gauges.

    Notes
    -----
    `orolift.rain.rain_map` with `orolift.rain.parameters.column_rain` above the lowest air that crosses: the
    base, or the top of the blocked layer. All ground lower than that and than the lift the air needs before it
    condenses is taken off the terrain.
    """
    found, column, reference = rates_over_map(crossing, grid, north)
    floor = reference + column.dry_lift
    bearing = column.parameters.bearing
    border = crest_divide(grid, bearing) if divide is None else line_divide(divide, grid, bearing)
    windward = windward_cells(grid, border)
    snow = snow_over(crossing.incoming, grid)
    snow_share = snow_on_ground(grid.elevation, snow)
    on_line = line_rain(crossing, found, column, line)
    cell = found.spacing[0] * found.spacing[1]
    row, at = np.unravel_index(int(np.nanargmax(found.rate)), found.rate.shape)
    falling = float(np.nansum(found.rate))
    return MapRain(
        found=found,
        column=column,
        reference=reference,
        duration=duration,
        total=falling * cell,
        mean_rate=float(np.nanmean(found.rate)),
        peak_rate=float(found.rate[row, at]),
        peak=(float(grid.x[at]), float(grid.y[row])),
        drying_ratio=map_drying_ratio(found, column),
        divide=border,
        drawn_divide=divide is not None,
        windward=windward,
        windward_share=windward_share(found.rate, windward),
        snow=snow,
        snow_share=snow_share,
        snowing_share=float(np.nansum(found.rate * snow_share)) / falling if falling > 0.0 else None,
        bands=elevation_bands(_frame(grid, found.spacing), grid, found.rate, snow_share, step=STEP),
        line=line,
        on_line=on_line,
        estimates=simple_estimates(crossing, column, on_line, reference=reference, north=north),
        catchments=tuple(_on_catchment(one, grid, found.rate, duration, snow_share, windward) for one in catchments),
        gauges=gauges,
        comparison=None if gauges is None else gauge_comparison(gauges, grid, found.rate, duration),
        fit=None
        if gauges is None or not fit
        else fit_to_gauges(gauges, grid, column.parameters, duration, floor=floor),
        limits=_limits(crossing, found, column, north),
        notes=(*column.notes, *found.notes, *border.notes),
    )


def rates_over_map(crossing: Crossing, grid: ElevationGrid, north: float = 0.0) -> tuple[RainMap, ColumnRain, float]:
    """Rain over the map of a crossing, the rates alone.

    Parameters
    ----------
    crossing, grid, north
        As in `map_rain`.

    Returns
    -------
    found : RainMap
    column : ColumnRain
    reference : float [m above sea level]
        Lowest air that crosses.
    """
    reference = max(crossing.flow.blocked_top, crossing.features.base, float(crossing.incoming.height[0]))
    column = column_rain(
        crossing.incoming,
        reference,
        cloud_time=float(np.asarray(crossing.settings.cloud_time)),
        fall_time=float(np.asarray(crossing.settings.fall_time)),
        background=crossing.rain.background,
        grid_turn=north,
        freezing=crossing.settings.freezing,
    )
    return rain_map(grid, column.parameters, floor=reference + column.dry_lift), column, reference


def bands_of_map(rain: MapRain, step: float) -> ElevationBands | None:
    """Rain and snow of the whole map by height of the ground, in bands of another height.

    Parameters
    ----------
    rain : MapRain
    step : float [m]
        10 m to 2000 m.

    Returns
    -------
    ElevationBands or None
        None where the map has no ground.
    """
    found = rain.found
    return elevation_bands(_frame(found.grid, found.spacing), found.grid, found.rate, rain.snow_share, step=step)


def _limits(crossing: Crossing, found: RainMap, column: ColumnRain, north: float) -> tuple[str, ...]:
    flow, shape = crossing.flow, crossing.features
    off = column.parameters.bearing - north - flow.normal
    return limits_of_theory(
        found,
        column,
        blocked_top=flow.blocked_top if flow.blocked_top > shape.base + 1.0 else None,
        off_normal=float(np.arctan2(np.sin(off), np.cos(off))),
    )


def snow_over(air: IncomingAir, grid: ElevationGrid) -> SnowByHeight:
    """Share of snow over the heights of a map's ground.

    Parameters
    ----------
    air : IncomingAir, fields (nz,)
    grid : ElevationGrid

    Returns
    -------
    SnowByHeight
    """
    lowest = max(float(np.nanmin(grid.elevation)), float(air.height[0]) - BELOW_COLUMN)
    return snow_by_height(air, lowest, max(float(np.nanmax(grid.elevation)), lowest))


def _frame(grid: ElevationGrid, spacing: tuple[float, float]) -> Any:
    """The whole map as a polygon."""
    from shapely import box

    half_x, half_y = 0.5 * spacing[0], 0.5 * spacing[1]
    return box(grid.x[0] - half_x, grid.y[-1] - half_y, grid.x[-1] + half_x, grid.y[0] + half_y)


def _on_catchment(
    one: Catchment,
    grid: ElevationGrid,
    rate: Array,
    duration: float,
    snow_share: Array,
    windward: NDArray[np.bool_],
) -> RainOnCatchment:
    rain = catchment_rain(one.polygon, grid, rate, duration, snow_share=snow_share, windward=windward)
    bands = elevation_bands(one.polygon, grid, rate, snow_share)
    return RainOnCatchment(one, replace(rain, notes=(*one.notes, *rain.notes)), bands)
