"""How sure the map of the lee is: ranges, chances, and ranges of what is said of the whole, from its members."""

from __future__ import annotations

from contextlib import suppress
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.air.humidity import relative_humidity_from_mixing_ratio
from orolift.air.saturation import saturation_mixing_ratio
from orolift.crossing.model_error import model_error
from orolift.errors import OroliftError
from orolift.fire.chances import FEWEST, TENTHS
from orolift.fire.rules import MOST_UNJUDGED, rule_met
from orolift.spread.at_sites import LEAST_VAPOUR, TENTH
from orolift.spread.deviations import deviations, read, reading
from orolift.spread.draws import columns, draws_of
from orolift.spread.joined import joined_strips
from orolift.spread.lee_map import Cells, Lying, cells_of, lying_at
from orolift.spread.lee_thresholds import MapAir, values_on_map
from orolift.spread.uncertainty import COLUMNS, METHOD, Uncertainty, normal

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from numpy.typing import NDArray

    from orolift.crossing.situation import Situation
    from orolift.fire.rules import Rule
    from orolift.spread.deviations import Deviations
    from orolift.spread.joined import Frame
    from orolift.spread.strip_members import StripMembers
    from orolift.spread.strips import StripAir
    from orolift.terrain.grid import ElevationGrid

    Array = NDArray[np.float64]

ROWS_AT_ONCE = 16
"""Rows of the map worked out together: with all members, so that memory stays flat."""
RANGED = ("temperature", "warming", "relative_humidity", "wind_10m")
"""What has a range in every cell."""
TABLE_STEP = 25.0
"""Heights [m] at which the incoming air of members is looked up, by straight lines between."""
MOST_SAMPLED = 100_000
"""Cells of which the statistics of each member are taken: every so many, so that no more than this are kept."""


@dataclass(frozen=True, eq=False)
class LeeSpread:
    """Ranges and chances of a map of the lee. Cells (ny, nx), NaN where fewer than five members know.

    Attributes
    ----------
    members : int
    strips : int
        How many had them.
    low, high : dict of str to ndarray
        10 and 90 % of what members give: `RANGED`, as in `orolift.spread.lee_map.LeeMap`.
    cloud : ndarray [1]
        Chance of cloud over the cell.
    met : tuple of ndarray [1]
        Chance that each rule is met, in the order of the rules given; as at sites NaN where more than a tenth of the
        members with air there cannot be judged.
    any_met : ndarray or None [1]
        Chance that at least one of them is, in the same way; None without rules.
    humidity, warming : ndarray (m, cells)
        Of each member behind the crest, at some of the cells.
    share_met : tuple of ndarray (m,) [1]
        Share of the ground behind the crest on which each rule is met in each member, of where it can be judged.
    """

    members: int
    strips: int
    low: dict[str, Array]
    high: dict[str, Array]
    cloud: Array
    met: tuple[Array, ...]
    any_met: Array | None
    humidity: Array
    warming: Array
    share_met: tuple[Array, ...]


@dataclass(frozen=True, eq=False)
class MembersDrawn:
    """Members of a map, and what they were drawn from.

    Attributes
    ----------
    strips : tuple of StripMembers
    situation : Situation
        Of one of them: all have the same incoming air and options.
    uncertainty : Uncertainty
    level : ndarray (m, columns) [1]
    """

    strips: tuple[StripMembers, ...]
    situation: Situation
    uncertainty: Uncertainty
    level: Array


@dataclass(frozen=True, eq=False)
class RulesAsked:
    """Rules that a map can judge, and what they need: roughness [m], drought index."""

    rules: tuple[Rule, ...] = ()
    roughness: float = 0.03
    drought_index: float | None = None


def lee_spread(
    parts: Sequence[StripAir], frame: Frame, grid: ElevationGrid, drawn: MembersDrawn, asked: RulesAsked | None = None
) -> LeeSpread:
    """Ranges and chances of a map of the lee.

    Parameters
    ----------
    parts : sequence of StripAir
        The answers of all strips.
    frame : Frame
    grid : ElevationGrid
    drawn : MembersDrawn
        One strip at least.
    asked : RulesAsked, optional

    Returns
    -------
    LeeSpread

    Notes
    -----
    A member of the map is the answer plus what the member differs by, see `orolift.spread.deviations`; in blocked air
    and in a pool that stays it has that air's values. The error of the method comes on top as at sites, one number
    for the whole map and member: temperature and vapour by the distance along the strip, the wind by the range of the
    methods.
    """
    asked = asked or RulesAsked()
    joined, found = joined_strips(parts, frame), deviations(parts, drawn.strips, frame.across)
    table = _Table(drawn, grid)
    thin = max(1, -(-grid.elevation.size // MOST_SAMPLED))
    rows = [
        _rows(cells_of(joined, frame, grid, slice(first, first + ROWS_AT_ONCE)), found, drawn, table, asked, thin)
        for first in range(0, grid.y.size, ROWS_AT_ONCE)
    ]

    def whole(name: str) -> Array:
        return np.concatenate([one.maps[name] for one in rows])

    numbers = range(len(asked.rules))
    return LeeSpread(
        members=drawn.level.shape[0],
        strips=len(drawn.strips),
        low={name: whole(f"{name}_low") for name in RANGED},
        high={name: whole(f"{name}_high") for name in RANGED},
        cloud=whole("cloud"),
        met=tuple(whole(f"met_{i}") for i in numbers),
        any_met=whole("any_met") if asked.rules else None,
        humidity=np.concatenate([one.humidity for one in rows], axis=1),
        warming=np.concatenate([one.warming for one in rows], axis=1),
        share_met=tuple(_share([one.counts[i] for one in rows]) for i in numbers),
    )


def _share(counts: list[tuple[Array, Array]]) -> Array:
    """Cells met over cells judged, by member."""
    met, judged = (np.sum([one[i] for one in counts], axis=0) for i in (0, 1))
    return np.asarray(np.divide(met, judged, out=np.full(met.shape, np.nan), where=judged > 0.0))


class _Table:
    """The incoming air of members at even heights, (nh, m)."""

    def __init__(self, drawn: MembersDrawn, grid: ElevationGrid) -> None:
        low, high = float(np.nanmin(grid.elevation)), float(np.nanmax(grid.elevation))
        self.height = np.arange(low, high + 2.0 * TABLE_STEP, TABLE_STEP)
        draws = draws_of(drawn.situation, drawn.uncertainty, drawn.level)
        try:
            found = self._looked_up(drawn.situation, draws)
        except OroliftError:  # a member beyond what is physical: it has no strip either
            found = self._one_by_one(drawn.situation, draws)
        self.values = [np.ascontiguousarray(one.T) for one in found]

    def _looked_up(self, situation: Situation, draws: dict[str, Array]) -> Array:
        """Temperature, vapour and pressure of members, (3, m, nh)."""
        freezing = situation.settings is None or situation.settings.freezing
        at = interpolated(columns(situation.incoming, draws, freezing=freezing), self.height)
        return np.stack([at.temperature, at.vapour, at.pressure])

    def _one_by_one(self, situation: Situation, draws: dict[str, Array]) -> Array:
        """The same, NaN for members that cannot be."""
        members = next(iter(draws.values())).size
        out = np.full((3, members, self.height.size), np.nan)
        for i in range(members):
            with suppress(OroliftError):
                own = {name: value[i : i + 1] for name, value in draws.items()}
                out[:, i] = self._looked_up(situation, own)[:, 0]
        return out

    def at(self, z: Array) -> tuple[Array, ...]:
        """Temperature, vapour and pressure at heights, each (n, m)."""
        number = np.minimum(((z - self.height[0]) / TABLE_STEP).astype(np.intp), self.height.size - 2)
        share = ((z - self.height[number]) / TABLE_STEP)[:, np.newaxis]
        return tuple((1.0 - share) * values[number] + share * values[number + 1] for values in self.values)


@dataclass(frozen=True, eq=False)
class _Rows:
    """Some rows of the map: values in cells, (rows, nx); of each member (m, n), and counts of cells by rule (m,)."""

    maps: dict[str, Array]
    humidity: Array
    warming: Array
    counts: list[tuple[Array, Array]]


def _rows(cells: Cells, found: Deviations, drawn: MembersDrawn, table: _Table, asked: RulesAsked, thin: int) -> _Rows:
    """Members in some rows of the map, and what they say together."""
    known = np.isfinite(cells.over) & np.isfinite(cells.temperature)
    own = Cells(**{name: getattr(cells, name)[known] for name in Cells.__dataclass_fields__})
    up = table.at(own.z)
    at_cells, cloudy, low_high = _of_members(own, found)
    air = _with_method_error(lying_at(at_cells, *up), own, drawn, low_high)
    t, v, p = air.temperature, air.vapour, air.pressure
    there = np.isfinite(t) & np.isfinite(v) & np.isfinite(p)
    humidity = _where(there, relative_humidity_from_mixing_ratio, p, t, v)
    values = {
        "temperature": np.where(there, t, np.nan),
        "warming": np.where(there, t - up[0], np.nan),
        "relative_humidity": humidity,
        "wind_10m": np.where(there, air.wind, np.nan),
    }
    maps: dict[str, Array] = {}
    for name, one in values.items():
        maps[f"{name}_low"], maps[f"{name}_high"] = _tenths(one)
    maps["cloud"] = _chance(cloudy >= 0.5, np.isfinite(cloudy))
    behind = own.behind > 0.0
    counts: list[tuple[Array, Array]] = []
    if asked.rules:
        more, counts = _judged(values, asked, behind)
        maps |= more
    out = {name: np.full(known.shape, np.nan) for name in maps}
    for name, one in maps.items():
        out[name][known] = one
    some = np.flatnonzero(behind)[::thin]
    return _Rows(out, values["relative_humidity"][some].T, values["warming"][some].T, counts)


def _of_members(own: Cells, found: Deviations) -> tuple[Cells, Array, tuple[Array, Array]]:
    """Cells with a column for each member, (n, m); share of strips with cloud; range of the methods of the wind."""
    at = reading(found, own.across, own.behind, own.over)
    m = found.temperature.shape[-1]

    def on_level(values: Array) -> Array:
        return read(at.level, at.level_weight, values)

    def column(name: str) -> Array:
        return np.asarray(getattr(own, name))[:, np.newaxis]

    three = on_level(np.concatenate([found.temperature, found.vapour, found.pressure], axis=-1))
    places = read(at.place, at.place_weight, np.concatenate([found.wind, found.lowest, found.cloudy], axis=-1))
    singles = read(at.strip, at.strip_weight, np.concatenate([found.blocked_top, found.pool_top], axis=-1))
    methods = read(at.strip, at.strip_weight, np.stack([found.wind_low, found.wind_high], axis=-1))
    still = []
    for name, values in zip(("pool_temperature", "pool_vapour"), found.pool or (None, None), strict=True):
        if values is None:
            still.append(np.full((own.z.size, m), np.nan))
            continue
        both = on_level(values)
        moved = column(name) + both[:, m:]
        still.append(np.where(np.isfinite(moved), moved, both[:, :m]))
    cells = Cells(
        **{name: column(name) for name in ("z", "over", "along", "across", "behind", "start", "band")},
        **{name: column(name) for name in ("cloudy", "cloud_base", "cloud_water")},
        temperature=column("temperature") + three[:, :m],
        vapour=column("vapour") * three[:, m : 2 * m],
        pressure=column("pressure") + three[:, 2 * m :],
        wind=column("wind") * places[:, :m],
        lowest=column("lowest") + places[:, m : 2 * m],
        blocked_top=column("blocked_top") + singles[:, :m],
        pool_top=column("pool_top") + singles[:, m:],
        pool_temperature=still[0],
        pool_vapour=still[1],
    )
    return cells, column("cloudy") + places[:, 2 * m :], (methods[:, :1], methods[:, 1:])


def _with_method_error(air: Lying, own: Cells, drawn: MembersDrawn, methods: tuple[Array, Array]) -> Lying:
    """Air of members with the error of the method, as `at_sites.with_method_error` adds it at sites."""
    level = dict(zip(COLUMNS, drawn.level.T, strict=True))
    z_t, z_v, z_w = (normal(level[name]) for name in METHOD)
    sigma_t, sigma_v = (one[:, np.newaxis] for one in model_error(np.maximum(own.along - own.start, 0.0)))
    if drawn.uncertainty.model_temperature is not None:
        sigma_t = np.full_like(sigma_t, drawn.uncertainty.model_temperature)
    if drawn.uncertainty.model_vapour is not None:
        sigma_v = np.full_like(sigma_v, drawn.uncertainty.model_vapour)
    t = air.temperature + sigma_t * z_t
    there = np.isfinite(t) & np.isfinite(air.pressure)
    most = _where(there, saturation_mixing_ratio, air.pressure, np.clip(t, 160.0, 340.0))
    v = np.minimum(np.maximum(air.vapour + sigma_v * z_v, LEAST_VAPOUR), most)
    low, high = -np.log(methods[0]), np.log(methods[1])
    wind = air.wind * np.exp(np.where(z_w < 0.0, low, high) * z_w / TENTH)
    return Lying(t, v, air.pressure, wind)


def _where(known: NDArray[np.bool_], function: Callable[..., Array], *given: Array) -> Array:
    """A function worked out only where all it takes is known."""
    out = np.full(known.shape, np.nan)
    if known.any():
        out[known] = function(*(one[known] for one in given))
    return out


def _judged(
    values: dict[str, Array], asked: RulesAsked, behind: NDArray[np.bool_]
) -> tuple[dict[str, Array], list[tuple[Array, Array]]]:
    """Chances of rules in cells, and in each member how many cells behind the crest meet each, of how many judged."""
    air = MapAir(**values)
    names = {one.quantity for rule in asked.rules for one in rule.conditions}
    quantities = values_on_map(air, names, asked.roughness, asked.drought_index)
    maps: dict[str, Array] = {}
    counts: list[tuple[Array, Array]] = []
    there = np.isfinite(air.temperature)
    any_met, all_known = np.zeros(there.shape, dtype=bool), np.ones(there.shape, dtype=bool)
    for i, rule in enumerate(asked.rules):
        met, known = rule_met(rule, quantities)
        maps[f"met_{i}"] = _rule_chance(met, known, there)
        counts.append(((met & known)[behind].sum(axis=0) * 1.0, known[behind].sum(axis=0) * 1.0))
        any_met |= met & known
        all_known &= known
    maps["any_met"] = _rule_chance(any_met, any_met | all_known, there)
    return maps, counts


def _chance(happens: NDArray[np.bool_], known: NDArray[np.bool_]) -> Array:
    """Share of the members that know, (n,); NaN where fewer than five do."""
    count = known.sum(axis=1)
    return np.where(count >= FEWEST, (happens & known).sum(axis=1) / np.maximum(count, 1), np.nan)


def _rule_chance(met: NDArray[np.bool_], known: NDArray[np.bool_], there: NDArray[np.bool_]) -> Array:
    """The same of a rule: those that can be judged without an unknown value are the ones that miss another limit."""
    unjudged = (there & ~known).sum(axis=1)
    return np.where(unjudged <= MOST_UNJUDGED * there.sum(axis=1), _chance(met & there, known & there), np.nan)


def _tenths(values: Array) -> tuple[Array, Array]:
    """10 and 90 % of members (n, m), those without a value left out; NaN where fewer than five have one.

    As `numpy.nanquantile`, which takes a hundred times as long.
    """
    order = np.sort(values, axis=1)
    count = np.isfinite(values).sum(axis=1)
    out = []
    for share in TENTHS:
        at = share * np.maximum(count - 1, 0)
        first = np.floor(at).astype(np.intp)
        second = np.minimum(first + 1, np.maximum(count - 1, 0))
        a, b = (np.take_along_axis(order, one[:, np.newaxis], axis=1)[:, 0] for one in (first, second))
        out.append(np.where(count >= FEWEST, a + (at - first) * (b - a), np.nan))
    return out[0], out[1]
