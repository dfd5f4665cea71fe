"""The lee as a map: the air of strips along the wind, brought to every cell at the cell's own height."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.air.humidity import relative_humidity_from_mixing_ratio
from orolift.errors import TerrainError

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.ground_values import GroundValues
    from orolift.spread.strips import StripAir
    from orolift.terrain.grid import ElevationGrid

    Array = NDArray[np.float64]
    Index = NDArray[np.intp]

STEP = 300.0
"""Spacing [m] along the wind at which strips are joined; finer than places of a march lie."""
LEAST_KNOWN = 0.5
"""Share of the weight across strips that must be known for a cell to have a value; a judgement."""
ROWS_AT_ONCE = 64
"""Rows of the map that are filled together, so that memory stays flat."""


@dataclass(frozen=True, eq=False)
class Frame:
    """Where strips lie on a map.

    Attributes
    ----------
    x, y : float [m]
        Origin of the axis on the map.
    turned : float [rad]
        Bearing of the strips on the map.
    across : ndarray (ns,) [m]
        Distance of each strip from the axis, positive to the right of the wind, even and growing.
    smoothing : float [m]
        Standard deviation of the Gaussian by which strips are joined across the wind.
    """

    x: float
    y: float
    turned: float
    across: Array
    smoothing: float


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
    known = [part.values for part in parts if part.values is not None]
    if not known:
        raise TerrainError(f"no strip of the map could be worked out: {failed.most_common(1)[0][0]}")
    joined = _joined(parts, frame, known)
    fields: dict[str, list[Array]] = {name: [] for name in _OUT}
    for first in range(0, grid.y.size, ROWS_AT_ONCE):
        rows = slice(first, first + ROWS_AT_ONCE)
        for name, values in _filled(joined, frame, grid, rows, incoming).items():
            fields[name].append(values)
    return LeeMap(
        grid=grid,
        strips=len(known),
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
class _Joined:
    """Strips on one grid (ns, na), smooth across; levels (ns, na, q)."""

    along: Array
    level: Array
    ground: Array
    temperature: Array
    vapour: Array
    pressure: Array
    wind_10m: Array
    cloud_base: Array
    cloud_water: Array
    lowest: Array
    crest: Array
    band: Array
    blocked_top: Array
    pool_top: Array | None
    pool_temperature: Array | None
    pool_vapour: Array | None


def _joined(parts: Sequence[StripAir], frame: Frame, known: list[GroundValues]) -> _Joined:
    starts = [(part.start, part.values) for part in parts if part.values is not None]
    low = min(start + float(values.distance[0]) for start, values in starts)
    high = max(start + float(values.distance[-1]) for start, values in starts)
    along = np.arange(np.ceil(low / STEP), np.floor(high / STEP) + 1.0) * STEP
    weight, count = _weights(frame), known[0].level.size

    def lines(name: str) -> Array:
        return _smooth(weight, np.stack([_along(part, name, along, count) for part in parts]))

    def single(name: str, *, shift: bool = False) -> Array:
        values = [
            np.nan if part.values is None else float(getattr(part.values, name)) + (part.start if shift else 0.0)
            for part in parts
        ]
        return _smooth(weight, np.array(values), least=0.0)

    pools = [values for values in known if values.pool_top is not None]
    pool_top = pool_temperature = pool_vapour = None
    if pools:
        tops = [np.nan if part.values is None else _pool_top(part.values) for part in parts]
        pool_top = _smooth(weight, np.array(tops), least=0.0)
        pool_temperature, pool_vapour = lines("pool_temperature"), lines("pool_vapour")
    base = np.stack([_along(part, "cloud_base", along, count) for part in parts])
    cloudy = _smooth(weight, np.where(np.isnan(base), np.nan, np.isfinite(base).astype(np.float64)))
    cloud_base = _smooth(weight, np.where(np.isfinite(base), base, np.nan), least=0.0)
    return _Joined(
        along=along,
        level=known[0].level,
        ground=lines("ground"),
        temperature=lines("temperature"),
        vapour=lines("vapour"),
        pressure=lines("pressure"),
        wind_10m=lines("wind_10m"),
        cloud_base=np.where(cloudy >= 0.5, cloud_base, np.nan),
        cloud_water=lines("cloud_water"),
        lowest=lines("lowest"),
        crest=single("crest_distance", shift=True),
        band=single("band"),
        blocked_top=single("blocked_top"),
        pool_top=pool_top,
        pool_temperature=pool_temperature,
        pool_vapour=pool_vapour,
    )


def _pool_top(values: GroundValues) -> float:
    """Top of the pool of a strip, the ground of its lee where it has none."""
    return float(values.ground.min()) if values.pool_top is None else values.pool_top


_ON_LEVELS = {"temperature", "vapour", "pressure", "pool_temperature", "pool_vapour"}


def _along(part: StripAir, name: str, along: Array, count: int) -> Array:
    """Values of a strip at places along the axis, (na,) or (na, q); NaN off its ends and where it has none."""
    if part.values is None or getattr(part.values, name) is None:
        return np.full((along.size, count) if name in _ON_LEVELS else along.shape, np.nan)
    values, at = np.asarray(getattr(part.values, name)), part.start + part.values.distance
    number = np.clip(np.searchsorted(at, along, side="right") - 1, 0, at.size - 2)
    share = (along - at[number]) / (at[number + 1] - at[number])
    outside = (share < 0.0) | (share > 1.0)
    if values.ndim > 1:
        share = share[:, np.newaxis]
    lower, upper = values[number], values[number + 1]
    infinite = np.isinf(lower) | np.isinf(upper)
    with np.errstate(invalid="ignore"):
        out = np.where(infinite, np.where(share < 0.5, lower, upper), lower + share * (upper - lower))
    out[outside] = np.nan
    return np.asarray(out)


def _weights(frame: Frame) -> Array:
    """Weight of every strip for every strip, (ns, ns); rows add up to one."""
    away = frame.across[:, np.newaxis] - frame.across
    weight = np.exp(-0.5 * (away / max(frame.smoothing, 1e-6)) ** 2)
    return np.asarray(weight / weight.sum(axis=1, keepdims=True))


def _smooth(weight: Array, values: Array, least: float = LEAST_KNOWN) -> Array:
    """Values (ns, ...) joined across strips, those missing left out; NaN where too few are known."""
    known = np.isfinite(values)
    flat = np.where(known, values, 0.0).reshape(values.shape[0], -1)
    share = (weight @ known.reshape(values.shape[0], -1).astype(np.float64)).reshape(values.shape)
    total = (weight @ flat).reshape(values.shape)
    enough = share > max(least, 1e-9)
    return np.asarray(np.divide(total, share, out=np.full(values.shape, np.nan), where=enough))


def _filled(joined: _Joined, frame: Frame, grid: ElevationGrid, rows: slice, incoming: IncomingAir) -> dict[str, Array]:
    """Values of some rows of the map."""
    ground = grid.elevation[rows]
    east, north = grid.x - frame.x, (grid.y[rows] - frame.y)[:, np.newaxis]
    s, c = np.sin(frame.turned), np.cos(frame.turned)
    step = float(frame.across[1] - frame.across[0]) if frame.across.size > 1 else 1.0
    at = _At(
        (east * c - north * s - frame.across[0]) / step,
        (east * s + north * c - joined.along[0]) / STEP,
        (frame.across.size, joined.along.size),
    )
    z = np.where(at.inside & np.isfinite(ground), ground, np.nan)
    over = z - at.read(joined.ground)
    t, v, p = (
        at.read_level(values, joined.level, over) for values in (joined.temperature, joined.vapour, joined.pressure)
    )
    wind = at.read(joined.wind_10m)
    behind = east * s + north * c - at.read_strip(joined.crest)
    band = at.read_strip(joined.band)
    safe = np.where(np.isfinite(z), z, float(incoming.height[0]))
    upwind = interpolated(incoming, safe.ravel())
    t_up, v_up, p_up = (x.reshape(z.shape) for x in (upwind.temperature, upwind.vapour, upwind.pressure))
    blocked = (behind < -band) & (z < at.read_strip(joined.blocked_top))
    t, v, p = np.where(blocked, t_up, t), np.where(blocked, v_up, v), np.where(blocked, p_up, p)
    still = blocked
    if joined.pool_top is not None and joined.pool_temperature is not None and joined.pool_vapour is not None:
        in_pool = (behind > band) & (z < np.minimum(at.read_strip(joined.pool_top), at.read(joined.lowest)))
        t = np.where(in_pool, at.read_level(joined.pool_temperature, joined.level, over), t)
        v = np.where(in_pool, at.read_level(joined.pool_vapour, joined.level, over), v)
        still = blocked | in_pool
    known = np.isfinite(over) & np.isfinite(t) & np.isfinite(v) & np.isfinite(p)
    humidity = np.full(t.shape, np.nan)
    humidity[known] = relative_humidity_from_mixing_ratio(p[known], t[known], v[known])
    return {
        "temperature": np.where(known, t, np.nan),
        "warming": np.where(known, t - t_up, np.nan),
        "relative_humidity": humidity,
        "wind_10m": np.where(known & ~still, wind, np.nan),
        "cloud_base": np.where(known, at.read(joined.cloud_base), np.nan),
        "cloud_water": np.where(known, at.read(joined.cloud_water), np.nan),
        "behind_crest": np.where(known, behind, np.nan),
    }


class _At:
    """Cells of a map among strips: numbers of the strips and places beside each, and its shares between them."""

    def __init__(self, strip: Array, place: Array, size: tuple[int, int]) -> None:
        """From fractional numbers of strips and places."""
        self.inside = (strip >= -0.5) & (strip <= size[0] - 0.5) & (place >= 0.0) & (place <= size[1] - 1.0)
        strip = np.clip(strip, 0.0, size[0] - 1.0)
        place = np.clip(place, 0.0, size[1] - 1.0)
        self.first = np.minimum(strip.astype(np.intp), max(size[0] - 2, 0))
        self.second = np.minimum(self.first + 1, size[0] - 1)
        self.before = np.minimum(place.astype(np.intp), size[1] - 2)
        self.across, self.along = strip - self.first, place - self.before

    def _between(self, value: Callable[[Index, Index], Array]) -> Array:
        """Bilinear mean of the four values beside each cell; `value` takes numbers of strips and places."""
        out = np.zeros(self.across.shape)
        for strip, of_strip in ((self.first, 1.0 - self.across), (self.second, self.across)):
            for place, of_place in ((self.before, 1.0 - self.along), (self.before + 1, self.along)):
                share = of_strip * of_place
                out += np.where(share > 0.0, share * value(strip, place), 0.0)
        return out

    def read(self, values: Array) -> Array:
        """Values (ns, na) at the cells."""
        return self._between(lambda strip, place: values[strip, place])

    def read_strip(self, values: Array) -> Array:
        """Values (ns,) at the cells."""
        return np.asarray((1.0 - self.across) * values[self.first] + self.across * values[self.second])

    def read_level(self, values: Array, level: Array, over: Array) -> Array:
        """Values (ns, na, q) at heights over the ground, by straight lines, also beyond the last level."""
        over = np.nan_to_num(over)
        below = np.clip(np.searchsorted(level, over, side="right") - 1, 0, level.size - 2)
        share = (over - level[below]) / (level[below + 1] - level[below])
        return self._between(
            lambda strip, place: (1.0 - share) * values[strip, place, below] + share * values[strip, place, below + 1]
        )
