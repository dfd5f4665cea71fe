"""The lee as a map: the air of strips along the wind, brought to every cell at the cell's own height."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.air.humidity import relative_humidity_from_mixing_ratio
from orolift.errors import TerrainError
from orolift.spread.joined import STEP, At, joined_strips

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.spread.joined import Frame, Joined
    from orolift.spread.strips import StripAir
    from orolift.terrain.grid import ElevationGrid

    Array = NDArray[np.float64]

ROWS_AT_ONCE = 64
"""Rows of the map that are filled together, so that memory stays flat."""


@dataclass(frozen=True, eq=False)
class LeeMap:
    """Air at the ground of a map. Cells (ny, nx), NaN where nothing is known.

    Attributes
    ----------
    grid : ElevationGrid
    temperature : ndarray [K]
    warming : ndarray [K]
        Above the incoming air at the height of the cell.
    relative_humidity : ndarray [1]
    wind_10m : ndarray [m s-1]
        Across the range; NaN in blocked air and in a cold pool that stays.
    cloud_base : ndarray [m above sea level]
        Of the lowest cloud over the cell; NaN without any.
    cloud_water : ndarray [kg m-2]
        Of all cloud over it.
    behind_crest : ndarray [m]
        Distance downwind of the crest, joined like everything else.
    strips : int
        How many were worked out.
    failed : tuple of (str, int)
        Why strips could not be, and how many, the most frequent first.
    """

    grid: ElevationGrid
    temperature: Array
    warming: Array
    relative_humidity: Array
    wind_10m: Array
    cloud_base: Array
    cloud_water: Array
    behind_crest: Array
    strips: int
    failed: tuple[tuple[str, int], ...]


def lee_map(parts: Sequence[StripAir], frame: Frame, grid: ElevationGrid, incoming: IncomingAir) -> LeeMap:
    """The air of strips as a map.

    Parameters
    ----------
    parts : sequence of StripAir
        One for each strip of the frame.
    frame : Frame
    grid : ElevationGrid
        Cells that are wanted, in metres.
    incoming : IncomingAir
        That all strips share.

    Returns
    -------
    LeeMap

    Raises
    ------
    TerrainError
        If not a single strip could be worked out.

    Notes
    -----
    Values at fixed heights over the ground of each strip, that ground and the heights of its crest, blocked air
    and cold pool are joined across the wind by a Gaussian, and taken between the strips by straight lines. A
    cell gets the air at its own height: that of the crossing, the incoming air's where it lies in blocked air on the
    windward side, the pool's where it lies in cold air that stays.
    """
    failed = Counter(part.reason for part in parts if part.values is None)
    if len(parts) == failed.total():
        raise TerrainError(f"no strip of the map could be worked out: {failed.most_common(1)[0][0]}")
    joined = joined_strips(parts, frame)
    fields: dict[str, list[Array]] = {name: [] for name in _OUT}
    for first in range(0, grid.y.size, ROWS_AT_ONCE):
        cells = cells_of(joined, frame, grid, slice(first, first + ROWS_AT_ONCE))
        for name, values in _filled(cells, incoming).items():
            fields[name].append(values)
    return LeeMap(
        grid=grid,
        strips=len(parts) - failed.total(),
        failed=tuple(failed.most_common()),
        **{name: np.concatenate(values) for name, values in fields.items()},
    )


_OUT = (
    "temperature",
    "warming",
    "relative_humidity",
    "wind_10m",
    "cloud_base",
    "cloud_water",
    "behind_crest",
)


@dataclass(frozen=True, eq=False)
class Cells:
    """What strips say at some rows of a map, before it is decided which air lies there. Arrays (rows, nx).

    Attributes
    ----------
    z : ndarray [m above sea level]
        NaN off the strips and without ground.
    over : ndarray [m]
        Height over the ground of the strips.
    along, across, behind : ndarray [m]
        Place along and across the wind, and behind the crest.
    temperature, vapour, pressure, wind : ndarray
        Of the crossing air.
    pool_temperature, pool_vapour : ndarray
        Of air that stays; NaN without any.
    others : ndarray
        As in `orolift.spread.joined.Joined`.
    """

    z: Array
    over: Array
    along: Array
    across: Array
    behind: Array
    start: Array
    band: Array
    temperature: Array
    vapour: Array
    pressure: Array
    wind: Array
    blocked_top: Array
    pool_top: Array
    lowest: Array
    pool_temperature: Array
    pool_vapour: Array
    cloudy: Array
    cloud_base: Array
    cloud_water: Array


def cells_of(joined: Joined, frame: Frame, grid: ElevationGrid, rows: slice) -> Cells:
    """What joined strips say at some rows of a map.

    Parameters
    ----------
    joined : Joined
    frame : Frame
    grid : ElevationGrid
    rows : slice

    Returns
    -------
    Cells
    """
    ground = grid.elevation[rows]
    east, north = grid.x - frame.x, (grid.y[rows] - frame.y)[:, np.newaxis]
    s, c = np.sin(frame.turned), np.cos(frame.turned)
    step = float(frame.across[1] - frame.across[0]) if frame.across.size > 1 else 1.0
    along, across = east * s + north * c, east * c - north * s
    at = At(
        (across - frame.across[0]) / step,
        (along - joined.along[0]) / STEP,
        (frame.across.size, joined.along.size),
    )
    z = np.where(at.inside & np.isfinite(ground), ground, np.nan)
    over = z - at.read(joined.ground)

    def on_level(values: Array | None) -> Array:
        return np.full(z.shape, np.nan) if values is None else at.read_level(values, joined.level, over)

    return Cells(
        z=z,
        over=over,
        along=along,
        across=across,
        behind=along - at.read_strip(joined.crest),
        start=at.read_strip(joined.start),
        band=at.read_strip(joined.band),
        temperature=on_level(joined.temperature),
        vapour=on_level(joined.vapour),
        pressure=on_level(joined.pressure),
        wind=at.read(joined.wind_10m),
        blocked_top=at.read_strip(joined.blocked_top),
        pool_top=at.read_strip(joined.pool_top),
        lowest=at.read(joined.lowest),
        pool_temperature=on_level(joined.pool_temperature),
        pool_vapour=on_level(joined.pool_vapour),
        cloudy=at.read(joined.cloudy),
        cloud_base=at.read(joined.cloud_base),
        cloud_water=at.read(joined.cloud_water),
    )


@dataclass(frozen=True, eq=False)
class Lying:
    """The air that lies at cells: temperature [K], vapour [kg per kg], pressure [Pa], wind at 10 m [m s-1]."""

    temperature: Array
    vapour: Array
    pressure: Array
    wind: Array


def lying_at(cells: Cells, temperature: Array, vapour: Array, pressure: Array) -> Lying:
    """The air at cells: that of the crossing, the incoming air's where it is blocked, the pool's where that stays.

    Parameters
    ----------
    cells : Cells
        Arrays of any shape that fit each other.
    temperature, vapour, pressure : ndarray
        Of the incoming air at the height of the cells.

    Returns
    -------
    Lying
    """
    blocked = (cells.behind < -cells.band) & (cells.z < cells.blocked_top)
    in_pool = (cells.behind > cells.band) & (cells.z < np.minimum(cells.pool_top, cells.lowest))
    in_pool &= np.isfinite(cells.pool_temperature)
    t, v = np.where(blocked, temperature, cells.temperature), np.where(blocked, vapour, cells.vapour)
    return Lying(
        np.where(in_pool, cells.pool_temperature, t),
        np.where(in_pool, cells.pool_vapour, v),
        np.where(blocked, pressure, cells.pressure),
        np.where(blocked | in_pool, np.nan, cells.wind),
    )


def _filled(cells: Cells, incoming: IncomingAir) -> dict[str, Array]:
    """Values of some rows of the map."""
    shape = cells.z.shape
    safe = np.where(np.isfinite(cells.z), cells.z, float(incoming.height[0]))
    upwind = interpolated(incoming, safe.ravel())
    t_up, v_up, p_up = (x.reshape(shape) for x in (upwind.temperature, upwind.vapour, upwind.pressure))
    air = lying_at(cells, t_up, v_up, p_up)
    t, v, p = air.temperature, air.vapour, air.pressure
    known = np.isfinite(cells.over) & np.isfinite(t) & np.isfinite(v) & np.isfinite(p)
    humidity = np.full(shape, np.nan)
    humidity[known] = relative_humidity_from_mixing_ratio(p[known], t[known], v[known])
    values = {
        "temperature": t,
        "warming": t - t_up,
        "wind_10m": air.wind,
        "cloud_base": cells.cloud_base,
        "cloud_water": cells.cloud_water,
        "behind_crest": cells.behind,
    }
    return {name: np.where(known, one, np.nan) for name, one in values.items()} | {"relative_humidity": humidity}
