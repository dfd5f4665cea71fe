"""Rain over a map in members: the linear theory with the air of each, on coarser cells, around the answer."""

from __future__ import annotations

from contextlib import suppress
from dataclasses import dataclass, replace
from functools import partial
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.rainfall import LEAST_RAIN
from orolift.crossing.solve import OF_MEMBERS
from orolift.errors import OroliftError
from orolift.rain.catchments import catchment_rain
from orolift.rain.gauges import gauge_comparison
from orolift.rain.over_map import snow_over
from orolift.rain.parameters import column_rain
from orolift.rain.rain_map import map_drying_ratio, rain_map
from orolift.rain.snow import snow_on_ground
from orolift.rain.windward import windward_cells, windward_share
from orolift.spread.draws import variations_of
from orolift.spread.uncertainty import COLUMNS
from orolift.terrain.grid import ElevationGrid

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.result import Crossing
    from orolift.crossing.settings import Settings
    from orolift.crossing.situation import Situation
    from orolift.rain.over_map import MapRain
    from orolift.rain.parameters import ColumnRain
    from orolift.spread.spread import Spread

    Array = NDArray[np.float64]

MOST_CELLS = 100
"""Cells of a member's map along its longer side: in the moist demo case means of catchments differ by less than a tenth
from those of the answer's cells, and members are taken around the answer anyway (a judgement)."""
FEWEST_CELLS = 32
"""A map narrower than this on coarser cells keeps its own."""
FACTORS = ("peak_rate", "mean_rate", "drying_ratio", "rate", "caught")
"""Numbers whose deviations are factors; those of the others are differences."""
SHARES = ("windward_share", "snow_share")


@dataclass(frozen=True, eq=False)
class RainMembers:
    """Rain over a map in members, SI; NaN where a member has no such value.

    Attributes
    ----------
    values : dict of str to ndarray (m,)
        ``peak_rate``, ``mean_rate``, ``windward_share``, ``snow_share``, ``drying_ratio`` of the map; ``wind_speed``,
        ``vapour_height``, ``drift``, ``floor`` of the theory; ``snow_level`` and ``melting_level``; ``rain_up_to``, the
        highest cell on which 0.1 mm/h or more falls as rain, as `orolift.spread.winter_chances` takes it.
    catchments : dict of str to ndarray (m, nc)
        ``rate``, ``snow_share``, ``windward_share`` of each catchment.
    gauges : ndarray (m, ng) [kg m-2]
        What falls at each gauge over the duration; no column without gauges.
    """

    values: dict[str, Array]
    catchments: dict[str, Array]
    gauges: Array


@dataclass(frozen=True, eq=False)
class _Made:
    """What one map gives: of the whole, of each catchment, at each gauge."""

    values: dict[str, float]
    catchments: dict[str, Array]
    gauges: Array


def rain_members(
    spread: Spread, situation: Situation, crossing: Crossing, rain: MapRain, *, north: float = 0.0
) -> RainMembers:
    """Rain over the map of a crossing in its members.

    Parameters
    ----------
    spread : Spread
    situation : Situation
        What it was drawn from.
    crossing : Crossing
    rain : MapRain
        The answer.
    north : float [rad]
        As for `orolift.rain.over_map.map_rain`.

    Returns
    -------
    RainMembers

    Notes
    -----
    Each member has the column, times and blocked top drawn for it; the divide between windward and lee stays that of
    the answer. Maps are worked out on cells of 1, 2, 3 ... cells of the answer's, at most 100 on the longer side; from
    them come factors of rain and differences of shares and heights against the answer on the same cells, which go
    around the answer on its own. No error of the theory is in it. A member that does not cross, or whose air allows no
    map, has no value.
    """
    grid = _coarser(rain.found.grid)
    windward = windward_cells(grid, rain.divide)
    level = np.stack([spread.level[name] for name in COLUMNS], axis=-1)
    lowest = max(crossing.features.base, float(crossing.incoming.height[0]))

    def made(air: IncomingAir, top: float, settings: Settings) -> _Made:
        reference = max(top, lowest)
        column = column_rain(
            air,
            reference,
            cloud_time=float(np.ravel(settings.cloud_time)[0]),
            fall_time=float(np.ravel(settings.fall_time)[0]),
            background=crossing.rain.background,
            grid_turn=north,
            freezing=settings.freezing,
        )
        return _made(rain, grid, air, windward, (column, reference + column.dry_lift))

    middle = made(crossing.incoming, crossing.flow.blocked_top, crossing.settings)
    found: list[_Made | None] = [None] * spread.members
    for i in np.flatnonzero(spread.crosses):
        with suppress(OroliftError):
            ((_, one),) = variations_of(situation, spread.uncertainty, level[i : i + 1])
            found[i] = made(_first_column(one.incoming), float(spread.values["blocked_top"][i]), one.settings)
    return _around(rain, middle, found)


def _made(
    rain: MapRain, grid: ElevationGrid, air: IncomingAir, windward: NDArray[np.bool_], theory: tuple[ColumnRain, float]
) -> _Made:
    """The map of one column of air."""
    column, floor = theory
    found = rain_map(grid, column.parameters, floor=floor)
    rate, snow = found.rate, snow_over(air, grid)
    share = snow_on_ground(grid.elevation, snow)
    falling = float(np.nansum(rate))
    p = column.parameters
    catchments = [
        catchment_rain(one.catchment.polygon, grid, rate, rain.duration, snow_share=share, windward=windward)
        for one in rain.catchments
    ]
    caught = np.empty(0)
    if rain.gauges is not None:
        caught = gauge_comparison(rain.gauges, grid, rate, rain.duration).modelled
    return _Made(
        values={
            "peak_rate": float(np.nanmax(rate)),
            "mean_rate": float(np.nanmean(rate)),
            "windward_share": _or_nan(windward_share(rate, windward)),
            "snow_share": float(np.nansum(rate * share)) / falling if falling > 0.0 else np.nan,
            "drying_ratio": map_drying_ratio(found, column),
            "wind_speed": p.wind_speed,
            "vapour_height": p.vapour_height,
            "drift": p.wind_speed * (p.cloud_time + p.fall_time),
            "floor": floor,
            "snow_level": snow.snow_level,
            "melting_level": snow.melting_level,
            "rain_up_to": _rain_up_to(grid, rate * (1.0 - share)),
        },
        catchments={
            name: np.array([_or_nan(getattr(one, name)) for one in catchments])
            for name in ("rate", "snow_share", "windward_share")
        },
        gauges=caught,
    )


def _rain_up_to(grid: ElevationGrid, rain: Array) -> float:
    """Highest cell with rain that counts; NaN without any."""
    wet = np.isfinite(grid.elevation) & (np.nan_to_num(rain) >= LEAST_RAIN)
    return float(grid.elevation[wet].max()) if wet.any() else np.nan


def _or_nan(value: float | None) -> float:
    return np.nan if value is None else float(value)


def _around(rain: MapRain, middle: _Made, found: list[_Made | None]) -> RainMembers:
    """Members around the answer on its own cells."""
    p = rain.column.parameters
    own = {
        "peak_rate": rain.peak_rate,
        "mean_rate": rain.mean_rate,
        "windward_share": _or_nan(rain.windward_share),
        "snow_share": _or_nan(rain.snowing_share),
        "drying_ratio": rain.drying_ratio,
        "wind_speed": p.wind_speed,
        "vapour_height": p.vapour_height,
        "drift": p.wind_speed * (p.cloud_time + p.fall_time),
        "floor": rain.reference + rain.column.dry_lift,
        "snow_level": rain.snow.snow_level,
        "melting_level": rain.snow.melting_level,
        "rain_up_to": _rain_up_to(rain.found.grid, rain.rain),
    }
    answers = {
        name: np.array([_or_nan(getattr(one.rain, name)) for one in rain.catchments]) for name in middle.catchments
    }
    caught = np.empty(0) if rain.comparison is None else np.asarray(rain.comparison.modelled)

    def each(pick: Callable[[_Made], Array]) -> Array:
        nothing = np.full(pick(middle).shape, np.nan)
        return np.stack([nothing if one is None else pick(one) for one in found])

    values = {
        name: _moved(name, np.float64(answer), middle.values[name], _column_of(found, name))
        for name, answer in own.items()
    }
    catchments = {
        name: _moved(name, answer, middle.catchments[name], each(partial(_at_catchments, name)))
        for name, answer in answers.items()
    }
    return RainMembers(values, catchments, _moved("caught", caught, middle.gauges, each(_at_gauges)))


def _column_of(found: list[_Made | None], name: str) -> Array:
    return np.array([np.nan if one is None else one.values[name] for one in found])


def _at_catchments(name: str, one: _Made) -> Array:
    return one.catchments[name]


def _at_gauges(one: _Made) -> Array:
    return one.gauges


def _moved(name: str, answer: Array | np.float64, middle: Array | float, each: Array) -> Array:
    """Values of members, moved from around the answer on coarser cells to around that on its own."""
    at = np.asarray(middle, dtype=np.float64)
    if name in FACTORS:
        return np.asarray(np.where(at > 0.0, answer * each / np.where(at > 0.0, at, 1.0), each))
    known = np.isfinite(answer) & np.isfinite(at)
    moved = np.asarray(each + np.where(known, answer - at, 0.0))
    return np.clip(moved, 0.0, 1.0) if name in SHARES else moved


def _first_column(air: IncomingAir) -> IncomingAir:
    """The column of the first member."""
    return replace(air, **{name: getattr(air, name)[0] for name in OF_MEMBERS})


def _coarser(grid: ElevationGrid) -> ElevationGrid:
    """A grid on cells several times as wide, means of those that are known; what does not fill a cell is left out."""
    ny, nx = grid.elevation.shape
    step = -(-max(ny, nx) // MOST_CELLS)
    if step == 1 or min(ny, nx) // step < FEWEST_CELLS:
        return grid
    rows, columns = ny // step, nx // step
    cells = grid.elevation[: rows * step, : columns * step].reshape(rows, step, columns, step)
    known = np.isfinite(cells)
    count = known.sum(axis=(1, 3))
    whole = np.where(known, cells, 0.0).sum(axis=(1, 3))
    mean = np.where(count > 0, whole / np.maximum(count, 1), np.nan)
    x = grid.x[: columns * step].reshape(columns, step).mean(axis=1)
    y = grid.y[: rows * step].reshape(rows, step).mean(axis=1)
    return ElevationGrid(mean, x, y)
