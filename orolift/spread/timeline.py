"""Hours put together: the timeline of each site, from when to when it blows warm and dry, how much rains."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.fire.fine_fuel import fine_fuel_code_hourly, initial_spread_index
from orolift.fire.night import lasting
from orolift.fire.rules import rule_met
from orolift.spread.stretches import Stretch, arrivals, stretches
from orolift.spread.timeline_members import SiteRanges, site_ranges, total_range

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
    dry_hours : float [s]
        With descending warm dry air, all stretches together.
    ranges : SiteRanges or None
        None without members.
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
    dry_hours: float
    ranges: SiteRanges | None = None


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
    total_range : (float, float) or None [kg m-2]
        10 and 90 % of the total, by the rain on the line; None without members, and where hardly any falls there.
    """

    name: str
    rate: Array
    total: float
    known_hours: int
    total_range: tuple[float, float] | None = None


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
        sites=tuple(_timeline(name, i, hours, step, fire, wind_error) for i, name in enumerate(names)),
        catchments=tuple(_catchment(name, i, hours, step) for i, name in enumerate(catchments)),
        planned=planned,
    )


def _timeline(
    name: str, number: int, hours: Sequence[Hour], step: float, fire: FireSettings | None, wind_error: float
) -> SiteTimeline:
    time, states = np.array([hour.time for hour in hours]), tuple(hour.sites[number] for hour in hours)
    way = values_of(states, "travel.time")
    crosses = np.isfinite(way)
    arrival = arrivals(time, way)
    error = np.hypot(wind_error * way, values_of(states, "travel.spread"))
    start = START_CODE if fire is None or fire.previous_code is None else fire.previous_code
    codes = _codes(states, step, start)
    known = np.array([one.status != "missing" for one in states], dtype=np.bool_)
    rules = () if fire is None or fire.rules is None else fire.rules.rules
    dry_winds = stretches([one.descending is True for one in states], known, arrival, error)
    thresholds = tuple(_threshold(rule, states, codes, step, arrival, error) for rule in rules)
    return SiteTimeline(
        name=name,
        states=states,
        arrival=arrival,
        arrival_error=error,
        fine_fuel_code=codes,
        dry_winds=dry_winds,
        thresholds=thresholds,
        rain=float(np.nansum(values_of(states, "rain"))) * step,
        crossing_hours=int(crosses.sum()),
        overtaken=int((arrival[crosses] < (time + way)[crosses]).sum()),
        dry_hours=sum(one.descending is True for one in states) * step,
        ranges=site_ranges(
            [hour.members[number] if hour.members else None for hour in hours],
            [one.status for one in states],
            time,
            step,
            start_code=start,
            rain=values_of(states, "rain"),
            dry_winds=dry_winds,
            rules=[(one.rule, one.stretches) for one in thresholds],
        ),
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


def _catchment(name: str, number: int, hours: Sequence[Hour], step: float) -> CatchmentTimeline:
    found = [hour.catchments[number] if hour.catchments else None for hour in hours]
    rate = np.array([np.nan if one is None else one for one in found], dtype=np.float64)
    known = np.isfinite(rate)
    total = float(np.nansum(rate)) * step
    lines = [hour.line_rain for hour, sure in zip(hours, known, strict=True) if sure]
    return CatchmentTimeline(name, rate, total, int(known.sum()), total_range(total, lines))
