"""The rain of the map on the line of a crossing: the two estimates side by side, and why they differ."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.crossing import toward
from orolift.rain.gauges import rain_at

if TYPE_CHECKING:
    from collections.abc import Iterator

    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing
    from orolift.rain.parameters import ColumnRain
    from orolift.rain.rain_map import RainMap

    Array = NDArray[np.float64]

PARALLELS = 11  # lines across the swath
SAME_TOTAL = 0.15  # of the crossing's rain: two estimates nearer to each other agree (a judgement)
SAME_SHARE = 0.1  # of all rain: windward shares nearer to each other agree (a judgement)
MUCH_LOST = 0.1  # of the falling water: less evaporation needs no sentence (a judgement)
HARDLY_STABLE = 0.5  # of the wind over stability times vapour height: uplift then reaches through the moist layer
NO_RAIN = 0.05 / 3600.0  # [kg m-2 s-1] peaks below it read as 0.0 mm/h and count as none


@dataclass(frozen=True, eq=False)
class MapLine:
    """Where the line of a crossing runs on a map.

    Attributes
    ----------
    x, y : ndarray, shape (ns,) [m]
        Of the transect's points, in the coordinates of the grid.
    width : float [m]
        Of the swath that the transect stands for.
    """

    x: Array
    y: Array
    width: float = 0.0


@dataclass(frozen=True, eq=False)
class LineRain:
    """Rain of the map along the line of a crossing; the background apart, as in the crossing.

    Attributes
    ----------
    rate : ndarray, shape (nk,) [kg m-2 s-1]
        Mean across the swath at the places of the crossing; NaN off the map.
    total : float [kg m-1 s-1]
        All of it, for each metre of the range.
    windward_share : float or None [1]
        Of it, what falls upwind of the crest; None without rain.
    peak_rate : float [kg m-2 s-1]
        With the background.
    peak_distance : float or None [m]
    ratio : float or None [1]
        Its total over that of the crossing; None where one of them is dry.
    difference : tuple of str
        How far the two are apart, and why, in sentences.
    """

    rate: Array
    total: float
    windward_share: float | None
    peak_rate: float
    peak_distance: float | None
    ratio: float | None
    difference: tuple[str, ...]


def line_cosine(crossing: Crossing) -> float:
    """Cosine of the angle between the line of a crossing and the direction across the range.

    Parameters
    ----------
    crossing : Crossing

    Returns
    -------
    float [1]
    """
    return float(np.cos(crossing.flow.normal - toward(crossing.transect, crossing.incoming)))


def steps_across(crossing: Crossing) -> Array:
    """Distance across the range that each place of a crossing stands for.

    Parameters
    ----------
    crossing : Crossing

    Returns
    -------
    ndarray, shape (nk,) [m]
    """
    x = crossing.distance
    return np.asarray(np.diff(x, prepend=x[0] - (x[1] - x[0])) * line_cosine(crossing))


def map_along_line(crossing: Crossing, found: RainMap, line: MapLine) -> Array:
    """Rain of the map at the places of a crossing, mean across the swath.

    Parameters
    ----------
    crossing : Crossing
    found : RainMap
    line : MapLine

    Returns
    -------
    ndarray, shape (nk,) [kg m-2 s-1]
        With the background; NaN off the map.
    """
    x, y = (np.interp(crossing.distance, crossing.transect.distance, values) for values in (line.x, line.y))
    dx, dy = np.gradient(x), np.gradient(y)
    length = np.maximum(np.hypot(dx, dy), 1e-9)
    offset = np.linspace(-0.5, 0.5, PARALLELS if line.width > 0.0 else 1) * line.width
    if line.width <= 0.0:
        offset = np.zeros(1)
    across = rain_at(
        found.grid,
        found.rate,
        x + offset[:, np.newaxis] * dy / length,
        y - offset[:, np.newaxis] * dx / length,
    )
    known = np.isfinite(across)
    count = known.sum(axis=0)
    total = np.where(known, across, 0.0).sum(axis=0)
    return np.asarray(np.divide(total, count, out=np.full(x.size, np.nan), where=count > 0))


def line_rain(crossing: Crossing, found: RainMap, column: ColumnRain, line: MapLine) -> LineRain:
    """Rain of the map along the line of a crossing, held against the crossing's own.

    Parameters
    ----------
    crossing : Crossing
    found : RainMap
    column : ColumnRain
        Where the map's parameters came from.
    line : MapLine

    Returns
    -------
    LineRain

    Notes
    -----
    The reasons given are those assumptions in which the two estimates differ and that matter in this case; how
    much each of them contributes is not worked out.
    """
    background = found.parameters.background
    whole = map_along_line(crossing, found, line)
    rate = np.maximum(whole - background, 0.0)
    falling = np.nan_to_num(rate) * steps_across(crossing)
    total = float(falling.sum())
    wet = float(np.nanmax(rate, initial=0.0)) >= NO_RAIN
    windward = crossing.distance <= crossing.features.crest_distance
    share = float(falling[windward].sum() / total) if wet else None
    peak = int(np.argmax(np.nan_to_num(whole)))
    own = crossing.rain.total if _rains(crossing) else None
    return LineRain(
        rate=rate,
        total=total,
        windward_share=share,
        peak_rate=float(np.nan_to_num(whole)[peak]),
        peak_distance=float(crossing.distance[peak]) if wet else None,
        ratio=total / own if wet and own is not None else None,
        difference=_difference(crossing, found, column, total, share),
    )


def _difference(
    crossing: Crossing, found: RainMap, column: ColumnRain, total: float, share: float | None
) -> tuple[str, ...]:
    """How far the two are apart, and why."""
    own, own_share = crossing.rain.total, crossing.rain.windward_share
    if share is None or own_share is None or not _rains(crossing):
        if share is None and not _rains(crossing):
            return ("Neither the crossing nor the map has rain on the line.",)
        other = "crossing" if share is None else "map"
        return (
            f"Only the {other} has rain on the line: what there is hangs on how far air must rise before it condenses.",
        )
    ratio = total / own
    apart = abs(ratio - 1.0) > SAME_TOTAL, abs(share - own_share) > SAME_SHARE
    here, there = (f"{100.0 * value:.0f} %" for value in (share, own_share))
    said = (
        f"On the line the map gives {ratio:.1f} times the rain of the crossing, {here} of it on the windward side "
        f"where the crossing has {there}."
    )
    if not any(apart):
        return (said, "The two estimates agree within what either can be trusted for.")
    reasons = (
        *(_why_more_or_less(crossing, found, column, ratio) if apart[0] else ()),
        *(_why_elsewhere(crossing, found, share - own_share) if apart[1] else ()),
    )
    return (said, *reasons)


def _rains(crossing: Crossing) -> bool:
    """Whether a crossing has rain to speak of."""
    return float(crossing.rain.rate.max(initial=0.0)) >= NO_RAIN


def _why_more_or_less(crossing: Crossing, found: RainMap, column: ColumnRain, ratio: float) -> Iterator[str]:
    water, p = crossing.water, found.parameters
    if crossing.settings.removed_share is not None:
        yield "The case prescribes what share of the condensed water leaves; the map knows only the two times."
    fell = water.removed + water.evaporated + water.beyond
    if ratio > 1.0 and water.evaporated > MUCH_LOST * fell:
        lost = f"{100.0 * water.evaporated / fell:.0f} %"
        yield f"In the crossing {lost} of the falling water evaporates on its way down; of the map's rain all lands."
    if ratio > 1.0 and p.stability * p.vapour_height < HARDLY_STABLE * p.wind_speed:
        yield (
            "The map lifts all the air by the slope below it, through the whole depth of the vapour, and does not use "
            "the vapour up; the crossing dries out on its way."
        )
    yield (
        "The map sees every ridge and valley under the line and beside it; the crossing goes over the mean ground of "
        "the swath, where the uplift of one slope is partly the descent of the next."
    )
    if ratio < 1.0 and column.dry_lift > 0.0:
        yield (
            f"The map takes {column.dry_lift:.0f} m off all ground for the lift the air needs before it condenses; in "
            "the crossing moist layers condense earlier."
        )


def _why_elsewhere(crossing: Crossing, found: RainMap, shift: float) -> Iterator[str]:
    p = found.parameters
    drift = p.wind_speed * (p.cloud_time + p.fall_time) / 1000.0
    if shift < 0.0:
        yield (
            f"Rain of the map drifts {drift:.0f} km on average before it lands, with one wind and one fall time; in "
            "the crossing rain falls at its own speed through the slower wind near the slope."
        )
    else:
        snow = crossing.rain.snow_share or 0.0
        slow = ", and falls slowly as snow" if snow > 0.5 else ""
        yield (
            "In the crossing water condenses high above the slope and is carried over the crest as it falls"
            f"{slow}; the map lets all of it drift {drift:.0f} km from where the slope below lifts the air."
        )
