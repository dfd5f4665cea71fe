"""Hours put together: the timeline of each site, from when to when it blows warm and dry, how much rains."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.fire.fine_fuel import fine_fuel_code_hourly, initial_spread_index
from orolift.fire.night import lasting, spells
from orolift.fire.rules import rule_met

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from numpy.typing import NDArray

    from orolift.fire.rules import Rule
    from orolift.fire.sites import FireSettings
    from orolift.fire.winds import WindMeant
    from orolift.spread.hours import Hour
    from orolift.spread.site_state import SiteState

    Array = NDArray[np.float64]

WIND_ERROR = 0.15
"""Standard deviation of the wind along the way, as a share of it, when nothing says otherwise; a judgement."""
START_CODE = 85.0
"""Fine Fuel Moisture Code before the first hour when nothing says otherwise: the usual start of a season."""
HOUR = 3600.0


@dataclass(frozen=True)
class Stretch:
    """A stretch of time in which something holds at a site.

    Attributes
    ----------
    first, last : int
        Numbers of its first and last hour among those of the timeline.
    onset, end : float or None [s]
        Halfway between the arrival of the last hour without and the first with it, and the other way round; None where
        no hour before or after it is known.
    onset_error, end_error : float or None [s]
        One standard deviation.
    unknown : int
        Hours in it of which nothing is known.
    """

    first: int
    last: int
    onset: float | None
    onset_error: float | None
    end: float | None
    end_error: float | None
    unknown: int


@dataclass(frozen=True, eq=False)
class RuleStretches:
    """A threshold of a region at a site through the hours.

    Attributes
    ----------
    rule : Rule
    met : ndarray of bool, (n,)
        Long enough, as the rule asks for it.
    judged : ndarray of bool, (n,)
        Whether it can be judged.
    stretches : tuple of Stretch
        In which it is met.
    """

    rule: Rule
    met: NDArray[np.bool_]
    judged: NDArray[np.bool_]
    stretches: tuple[Stretch, ...]


@dataclass(frozen=True, eq=False)
class SiteTimeline:
    """One site through all hours, in the order of the upwind time.

    Attributes
    ----------
    name : str
    states : tuple of SiteState, length n
    arrival : ndarray (n,) [s]
        When the air is at the site, or would be; see `arrivals`.
    arrival_error : ndarray (n,) [s]
        One standard deviation; NaN where the air does not arrive.
    fine_fuel_code : ndarray (n,) [1]
        Carried from hour to hour; NaN where it is not known.
    dry_winds : tuple of Stretch
        With descending warm dry air.
    thresholds : tuple of RuleStretches
        Of the region, as far as the case has any.
    rain : float [kg m-2]
        Sum over the hours that cross.
    crossing_hours : int
    overtaken : int
        Hours whose air is caught up by faster air behind it.
    """

    name: str
    states: tuple[SiteState, ...]
    arrival: Array
    arrival_error: Array
    fine_fuel_code: Array
    dry_winds: tuple[Stretch, ...]
    thresholds: tuple[RuleStretches, ...]
    rain: float
    crossing_hours: int
    overtaken: int


@dataclass(frozen=True, eq=False)
class CatchmentTimeline:
    """One catchment through all hours.

    Attributes
    ----------
    name : str
    rate : ndarray (n,) [kg m-2 s-1]
        NaN where it is not known.
    total : float [kg m-2]
        Over the hours that are known.
    known_hours : int
    """

    name: str
    rate: Array
    total: float
    known_hours: int


@dataclass(frozen=True, eq=False)
class Hours:
    """A series worked out.

    Attributes
    ----------
    time : ndarray (n,) [s]
        Upwind, since 1970-01-01T00:00:00 UTC, increasing.
    step : float [s]
        Usual time between two hours.
    sites : tuple of SiteTimeline
    catchments : tuple of CatchmentTimeline
    planned : int
        Hours of the series; more than n when the work was interrupted.
    """

    time: Array
    step: float
    sites: tuple[SiteTimeline, ...]
    catchments: tuple[CatchmentTimeline, ...]
    planned: int

    @property
    def interrupted(self) -> bool:
        """Whether hours of the series were not worked out."""
        return self.time.size < self.planned


def hours_of(
    found: Iterable[Hour],
    names: Sequence[str],
    step: float,
    *,
    planned: int,
    catchments: Sequence[str] = (),
    fire: FireSettings | None = None,
    wind_error: float = WIND_ERROR,
) -> Hours:
    """Timelines of hours worked out in any order.

    Parameters
    ----------
    found : iterable of Hour
    names : sequence of str
        Of the sites.
    step : float [s]
        Usual time between two hours.
    planned : int
        Hours of the series.
    catchments : sequence of str
    fire : FireSettings, optional
        Thresholds of the region, and the Fine Fuel Moisture Code before the first hour.
    wind_error : float [1]
        Standard deviation of the wind along the way, as a share of it.

    Returns
    -------
    Hours
    """
    hours = sorted(found, key=lambda hour: hour.time)
    time = np.array([hour.time for hour in hours])
    return Hours(
        time=time,
        step=step,
        sites=tuple(
            _timeline(name, time, step, tuple(hour.sites[i] for hour in hours), fire, wind_error)
            for i, name in enumerate(names)
        ),
        catchments=tuple(
            _catchment(name, [hour.catchments[i] if hour.catchments else None for hour in hours], step)
            for i, name in enumerate(catchments)
        ),
        planned=planned,
    )


def _timeline(
    name: str,
    time: Array,
    step: float,
    states: tuple[SiteState, ...],
    fire: FireSettings | None,
    wind_error: float,
) -> SiteTimeline:
    way = values_of(states, "travel.time")
    crosses = np.isfinite(way)
    arrival = arrivals(time, way)
    error = np.hypot(wind_error * way, values_of(states, "travel.spread"))
    given = None if fire is None else fire.previous_code
    codes = _codes(states, step, START_CODE if given is None else given)
    known = np.array([one.status != "missing" for one in states], dtype=np.bool_)
    rules = () if fire is None or fire.rules is None else fire.rules.rules
    return SiteTimeline(
        name=name,
        states=states,
        arrival=arrival,
        arrival_error=error,
        fine_fuel_code=codes,
        dry_winds=stretches([one.descending is True for one in states], known, arrival, error),
        thresholds=tuple(_threshold(rule, states, codes, step, arrival, error) for rule in rules),
        rain=float(np.nansum(values_of(states, "rain"))) * step,
        crossing_hours=int(crosses.sum()),
        overtaken=int((arrival[crosses] < (time + way)[crosses]).sum()),
    )


def _threshold(
    rule: Rule, states: tuple[SiteState, ...], codes: Array, step: float, arrival: Array, error: Array
) -> RuleStretches:
    """A rule through the hours; it is not met in hours without air that crosses, and not judged in missing ones."""
    nothing: dict[str | WindMeant, float] = {}
    values: dict[str | WindMeant, Array] = {
        condition.quantity: np.array([(one.rule_values or nothing).get(condition.quantity, np.nan) for one in states])
        for condition in rule.conditions
    }
    values["fine_fuel_code"] = codes
    wind = values_of(states, "wind_10m")
    both = np.isfinite(codes) & np.isfinite(wind)
    spread = np.full(codes.size, np.nan)
    spread[both] = initial_spread_index(codes[both], wind[both])
    values["initial_spread_index"] = spread
    met, judged = rule_met(rule, values)
    still = np.array([one.status == "no crossing" for one in states], dtype=np.bool_)
    judged = (judged | still) & np.array([one.status != "missing" for one in states], dtype=np.bool_)
    enough = lasting(met & judged, max(1, int(np.ceil(rule.hours * HOUR / step - 1e-6))))
    return RuleStretches(rule, enough, judged, stretches(enough.tolist(), judged, arrival, error))


def arrivals(time: Array, way: Array) -> Array:
    """When the air of each hour is at a site, in the order of the hours.

    Parameters
    ----------
    time : ndarray (n,) [s]
        Upwind, increasing.
    way : ndarray (n,) [s]
        Time on the way; NaN for air that does not arrive.

    Returns
    -------
    ndarray (n,) [s]
        Never decreasing.

    Notes
    -----
    Air that faster air behind it would overtake is pushed by that and arrives with it. Hours whose air does
    not arrive stand where it would, with the time on the way of the hours around them.

    Examples
    --------
    >>> arrivals(np.array([0.0, 3600.0, 7200.0]), np.array([9000.0, 3600.0, np.nan]))
    array([ 7200.,  7200., 10800.])
    """
    known = np.isfinite(way)
    if not known.any():
        return np.array(time)
    there = time + np.interp(time, time[known], way[known])
    return np.minimum.accumulate(there[::-1])[::-1]


def values_of(states: Iterable[SiteState], key: str) -> Array:
    """One number of every state, NaN where there is none.

    Parameters
    ----------
    states : iterable of SiteState
    key : str
        Its name; a point leads into a part, as in ``travel.time``.

    Returns
    -------
    ndarray (n,)
    """

    def value(state: SiteState) -> float:
        found: Any = state
        for part in key.split("."):
            found = None if found is None else getattr(found, part)
        return np.nan if found is None else float(found)

    return np.array([value(state) for state in states])


def stretches(met: Sequence[bool], known: NDArray[np.bool_], arrival: Array, error: Array) -> tuple[Stretch, ...]:
    """Stretches of time in which something holds at a site, with onset and end.

    Parameters
    ----------
    met : sequence of bool, length n
        Whether it holds in each hour.
    known : ndarray of bool, (n,)
        Whether that is known.
    arrival, error : ndarray (n,) [s]
        As in `SiteTimeline`.

    Returns
    -------
    tuple of Stretch
        In order.

    Notes
    -----
    Hours of which nothing is known neither begin nor end a stretch. The error of onset and end joins half the time
    between the two hours with that of the travel time: its share that the wind is uncertain by, and its spread between
    the streamlines that arrive.
    """
    order = np.flatnonzero(known)
    flags = np.asarray(met, dtype=bool)[order]

    def change(before: int, after: int) -> tuple[float, float]:
        a, b = order[before], order[after]
        ways = [value for value in (error[a], error[b]) if np.isfinite(value)]
        way = float(max(ways, default=0.0))
        return 0.5 * float(arrival[a] + arrival[b]), float(np.hypot(0.5 * (arrival[b] - arrival[a]), way))

    out = []
    for one in spells(flags):
        onset = None if one.open_start else change(one.start - 1, one.start)
        end = None if one.open_end else change(one.end - 1, one.end)
        first, last = int(order[one.start]), int(order[one.end - 1])
        out.append(
            Stretch(
                first=first,
                last=last,
                onset=None if onset is None else onset[0],
                onset_error=None if onset is None else onset[1],
                end=None if end is None else end[0],
                end_error=None if end is None else end[1],
                unknown=int((~known[first : last + 1]).sum()),
            )
        )
    return tuple(out)


def _codes(states: Sequence[SiteState], step: float, start_code: float) -> Array:
    """Fine Fuel Moisture Code hour by hour; only for steps of whole hours.

    Over hours of which the air is not known it stays unknown, and goes on after
    them from where it was: the code forgets within a day.
    """
    whole = round(step / HOUR)
    codes = np.full(len(states), np.nan)
    if whole < 1 or abs(step - whole * HOUR) > 1.0:
        return codes
    code = start_code
    for i, state in enumerate(states):
        if state.temperature is None or state.relative_humidity is None:
            continue
        code = float(
            fine_fuel_code_hourly(
                code,
                state.temperature,
                min(state.relative_humidity, 1.0),
                state.wind_10m or 0.0,
                (state.rain or 0.0) * HOUR,
                hours=whole,
            )
        )
        codes[i] = code
    return codes


def _catchment(name: str, rates: Sequence[float | None], step: float) -> CatchmentTimeline:
    rate = np.array([np.nan if one is None else one for one in rates], dtype=np.float64)
    return CatchmentTimeline(name, rate, float(np.nansum(rate)) * step, int(np.isfinite(rate).sum()))
