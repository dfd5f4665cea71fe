"""Strips along the wind joined across it: one grid of what they say, and cells of a map among them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from numpy.typing import NDArray

    from orolift.crossing.ground_values import GroundValues
    from orolift.spread.strips import StripAir

    Array = NDArray[np.float64]
    Index = NDArray[np.intp]

STEP = 300.0
"""Spacing [m] along the wind at which strips are joined; finer than places of a march lie."""
LEAST_KNOWN = 0.5
"""Share of the weight across strips that must be known for a cell to have a value; a judgement."""


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
class Joined:
    """Strips on one grid (ns, na), smooth across; levels (ns, na, q).

    Attributes
    ----------
    along : ndarray (na,) [m]
        Places along the axis.
    level : ndarray (q,) [m]
        Heights over the ground of a strip.
    start, crest, band, blocked_top, pool_top : ndarray (ns,)
        Of each strip; where it has no pool, `pool_top` is its lowest ground.
    cloudy : ndarray (ns, na) [1]
        Share of the strips beside that have cloud there.
    pool_temperature, pool_vapour : ndarray (ns, na, q), or None
        None where no strip has a pool.
    others
        As in `orolift.crossing.ground_values.GroundValues`.
    """

    along: Array
    level: Array
    start: Array
    ground: Array
    temperature: Array
    vapour: Array
    pressure: Array
    wind_10m: Array
    cloudy: Array
    cloud_base: Array
    cloud_water: Array
    lowest: Array
    crest: Array
    band: Array
    blocked_top: Array
    pool_top: Array
    pool_temperature: Array | None
    pool_vapour: Array | None


def joined_strips(parts: Sequence[StripAir], frame: Frame) -> Joined:
    """Strips joined across the wind.

    Parameters
    ----------
    parts : sequence of StripAir
        One for each strip of the frame; one of them has values.
    frame : Frame

    Returns
    -------
    Joined
    """
    known = [part.values for part in parts if part.values is not None]
    starts = [(part.start, part.values) for part in parts if part.values is not None]
    low = min(start + float(values.distance[0]) for start, values in starts)
    high = max(start + float(values.distance[-1]) for start, values in starts)
    along = np.arange(np.ceil(low / STEP), np.floor(high / STEP) + 1.0) * STEP
    weight, count = weights(frame.across, frame.smoothing), known[0].level.size

    def lines(name: str) -> Array:
        return joined_across(weight, np.stack([values_along(part, name, along, count) for part in parts]))

    def single(value: Callable[[StripAir, GroundValues], float]) -> Array:
        values = [np.nan if part.values is None else value(part, part.values) for part in parts]
        return joined_across(weight, np.array(values), least=0.0)

    pool_temperature = pool_vapour = None
    if any(values.pool_top is not None for values in known):
        pool_temperature, pool_vapour = lines("pool_temperature"), lines("pool_vapour")
    base = np.stack([values_along(part, "cloud_base", along, count) for part in parts])
    cloudy = joined_across(weight, np.where(np.isnan(base), np.nan, np.isfinite(base).astype(np.float64)))
    cloud_base = joined_across(weight, np.where(np.isfinite(base), base, np.nan), least=0.0)
    return Joined(
        along=along,
        level=known[0].level,
        start=single(lambda part, values: part.start + float(values.distance[0])),
        ground=lines("ground"),
        temperature=lines("temperature"),
        vapour=lines("vapour"),
        pressure=lines("pressure"),
        wind_10m=lines("wind_10m"),
        cloudy=cloudy,
        cloud_base=np.where(cloudy >= 0.5, cloud_base, np.nan),
        cloud_water=lines("cloud_water"),
        lowest=lines("lowest"),
        crest=single(lambda part, values: part.start + values.crest_distance),
        band=single(lambda _, values: values.band),
        blocked_top=single(lambda _, values: values.blocked_top),
        pool_top=single(lambda _, values: pool_top_of(values)),
        pool_temperature=pool_temperature,
        pool_vapour=pool_vapour,
    )


def pool_top_of(values: GroundValues) -> float:
    """Top of the pool of a strip, the ground of its lee where it has none."""
    return float(values.ground.min()) if values.pool_top is None else values.pool_top


ON_LEVELS = {"temperature", "vapour", "pressure", "pool_temperature", "pool_vapour"}


def values_along(part: StripAir, name: str, along: Array, count: int) -> Array:
    """Values of a strip at places along the axis, (na,) or (na, q); NaN off its ends and where it has none."""
    if part.values is None or getattr(part.values, name) is None:
        return np.full((along.size, count) if name in ON_LEVELS else along.shape, np.nan)
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


def weights(across: Array, deviation: float) -> Array:
    """Weight of every strip for every strip, (ns, ns), by a Gaussian of a standard deviation [m]; rows add up to 1."""
    away = across[:, np.newaxis] - across
    weight = np.exp(-0.5 * (away / max(deviation, 1e-6)) ** 2)
    return np.asarray(weight / weight.sum(axis=1, keepdims=True))


def joined_across(weight: Array, values: Array, least: float = LEAST_KNOWN) -> Array:
    """Values (ns, ...) joined across strips, those missing left out; NaN where too few are known."""
    known = np.isfinite(values)
    flat = np.where(known, values, 0.0).reshape(values.shape[0], -1)
    share = (weight @ known.reshape(values.shape[0], -1).astype(np.float64)).reshape(values.shape)
    total = (weight @ flat).reshape(values.shape)
    enough = share > max(least, 1e-9)
    return np.asarray(np.divide(total, share, out=np.full(values.shape, np.nan), where=enough))


class At:
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
