"""Rain that catchments receive: how much, rain or snow, from which side of the range."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.checks import within
from orolift.errors import OutOfRangeError
from orolift.rain.coverage import Coverage, coverage
from orolift.rain.ground import grid_spacing

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.terrain.grid import ElevationGrid

    Array = NDArray[np.float64]

WATER_DENSITY = 1000.0  # [kg m-3] a millimetre is a kilogram on a square metre
WHOLE = 0.999  # covered shares from here on count as whole
SNOW = 0.5  # share of snow from which ground counts as snowed on


@dataclass(frozen=True)
class CatchmentRain:
    """Rain and snow on a catchment. What cannot be known is None.

    Attributes
    ----------
    area : float [m2]
        Of the whole polygon.
    covered_share : float [1]
        Of the area that lies on the map, where the ground is known.
    rate : float or None [kg m-2 s-1]
        Mean over the covered part.
    total : float or None [kg m-2]
        The same over the duration; also in mm.
    volume : float or None [m3]
        Of water on the covered part over the duration.
    snow_share : float or None [1]
        Of the water that falls as snow.
    snow_area_share : float or None [1]
        Of the covered area on which at least half falls as snow.
    windward_share : float or None [1]
        Of the water that falls on the windward side of the range.
    lowest, mean_elevation, highest : float or None [m above sea level]
        Of the cells it touches; the mean by area.
    notes : tuple of str
    """

    area: float
    covered_share: float
    rate: float | None
    total: float | None
    volume: float | None
    snow_share: float | None
    snow_area_share: float | None
    windward_share: float | None
    lowest: float | None
    mean_elevation: float | None
    highest: float | None
    notes: tuple[str, ...]


@dataclass(frozen=True, eq=False)
class ElevationBands:
    """Rain and snow of a catchment by height.

    Attributes
    ----------
    edge : ndarray, shape (n + 1,) [m above sea level]
    area : ndarray, shape (n,) [m2]
    rate, snow_rate : ndarray, shape (n,) [kg m-2 s-1]
        Mean of all precipitation, and of the part that is snow; NaN where the band has no area.
    """

    edge: Array
    area: Array
    rate: Array
    snow_rate: Array


def catchment_rain(
    polygon: Any,
    grid: ElevationGrid,
    rate: Array,
    duration: float,
    *,
    snow_share: Array | None = None,
    windward: NDArray[np.bool_] | None = None,
) -> CatchmentRain:
    """Rain on one catchment.

    Parameters
    ----------
    polygon : shapely Polygon or MultiPolygon
        Valid, in the coordinates of the grid.
    grid : ElevationGrid
    rate : ndarray, shape (ny, nx) [kg m-2 s-1]
        NaN where unknown.
    duration : float [s]
        Above 0, at most 60 days.
    snow_share : ndarray, shape (ny, nx), optional [1]
    windward : ndarray of bool, shape (ny, nx), optional

    Returns
    -------
    CatchmentRain
        Catchments may overlap; each is worked out for itself.

    Raises
    ------
    OutOfRangeError
        If the polygon is not valid, an array has another shape than the grid or the duration is out of range.

    Notes
    -----
    Cells count by the area of them that lies inside (`coverage.coverage`), so that a catchment smaller than a
    cell has the rate of that cell. The steady rate of the map times the duration is the total: assumed that the
    situation lasts.

    Examples
    --------
    >>> from shapely import box
    >>> from orolift.terrain.grid import ElevationGrid
    >>> x = np.arange(0.0, 8e3, 1e3)
    >>> grid = ElevationGrid(np.zeros((8, 8)), x, x[::-1])
    >>> found = catchment_rain(box(0.0, 0.0, 2e3, 2e3), grid, np.full((8, 8), 1.0 / 3600.0), 6 * 3600.0)
    >>> print(round(found.total, 6), round(found.volume, 6))
    6.0 24000.0
    """
    seconds = float(within("duration", duration, 1.0, 60 * 86400.0, "s", "Give the hours it rains, times 3600."))
    for name, values in (("rate", rate), ("snow_share", snow_share), ("windward", windward)):
        if values is not None and values.shape != grid.elevation.shape:
            raise OutOfRangeError(f"{name}: shape {values.shape}, but the grid has {grid.elevation.shape}.")
    cover = coverage(polygon, grid)
    area = float(polygon.area)
    weight, inside = _weights(cover, rate, grid)
    covered = float(weight.sum())
    if covered <= 0.0:
        note = "It lies outside the map, or where the map has no ground."
        return CatchmentRain(area, 0.0, *(None,) * 9, (note,))
    window = cover.rows, cover.columns
    water = weight * rate[window][inside]
    falling = float(water.sum())
    mean = falling / covered
    ground = grid.elevation[window][inside]
    snow = None if snow_share is None else snow_share[window][inside]
    share = min(covered / area, 1.0) if area > 0.0 else 0.0
    return CatchmentRain(
        area=area,
        covered_share=1.0 if share > WHOLE else share,
        rate=mean,
        total=mean * seconds,
        volume=falling * seconds / WATER_DENSITY,
        snow_share=None if snow is None else _share(water, snow),
        snow_area_share=None if snow is None else _share(weight, snow >= SNOW),
        windward_share=None if windward is None else _share(water, windward[window][inside]),
        lowest=float(ground.min()),
        mean_elevation=float((weight * ground).sum()) / covered,
        highest=float(ground.max()),
        notes=_notes(share),
    )


def elevation_bands(
    polygon: Any, grid: ElevationGrid, rate: Array, snow_share: Array, *, step: float = 200.0
) -> ElevationBands | None:
    """Rain and snow of a catchment by height of the ground.

    Parameters
    ----------
    polygon, grid, rate, snow_share
        As in `catchment_rain`.
    step : float [m]
        Height of a band; its edges are multiples of it. 10 m to 2000 m.

    Returns
    -------
    ElevationBands or None
        None when the catchment lies outside the map.

    Raises
    ------
    OutOfRangeError
        If the polygon is not valid or `step` is out of range.
    """
    within("step", step, 10.0, 2000.0, "m")
    cover = coverage(polygon, grid)
    weight, inside = _weights(cover, rate, grid)
    if float(weight.sum()) <= 0.0:
        return None
    window = cover.rows, cover.columns
    band = np.floor(grid.elevation[window][inside] / step).astype(np.intp)
    first = int(band.min())
    band -= first
    count = int(band.max()) + 1
    water = weight * rate[window][inside]
    area = np.asarray(np.bincount(band, weight, count), dtype=np.float64)
    whole = np.bincount(band, water, count)
    frozen = np.bincount(band, water * snow_share[window][inside], count)
    nothing = np.full(count, np.nan)
    return ElevationBands(
        edge=step * (first + np.arange(count + 1.0)),
        area=area,
        rate=np.divide(whole, area, out=nothing.copy(), where=area > 0.0),
        snow_rate=np.divide(frozen, area, out=nothing, where=area > 0.0),
    )


def _weights(cover: Coverage, rate: Array, grid: ElevationGrid) -> tuple[Array, NDArray[np.bool_]]:
    """Covered area [m2] of the cells that have rain and ground, and which cells of the window they are."""
    window = cover.rows, cover.columns
    inside = (cover.share > 0.0) & np.isfinite(rate[window]) & np.isfinite(grid.elevation[window])
    dx, dy = grid_spacing(grid)
    return cover.share[inside] * (dx * dy), inside


def _share(weight: Array, part: NDArray[Any]) -> float | None:
    """Weighted mean of shares; None without any weight."""
    total = float(weight.sum())
    return float((weight * part).sum()) / total if total > 0.0 else None


def _notes(share: float) -> tuple[str, ...]:
    if share > WHOLE:
        return ()
    return (f"Only {100.0 * share:.1f} % of it lies on the map, where the ground is known; values are for that part.",)
