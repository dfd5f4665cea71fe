"""Hours of a site put together in each member: ranges, chances, and when something begins and ends."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.fire.chances import FEWEST, TENTHS
from orolift.fire.fine_fuel import fine_fuel_code_hourly, initial_spread_index
from orolift.fire.night import lasting
from orolift.fire.rules import MOST_UNJUDGED, rule_parts
from orolift.spread.hour_members import CARRIED, CODES, RANGED, HourMembers
from orolift.spread.ranges import range_of
from orolift.spread.stretches import arrivals, stretches

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from numpy.typing import ArrayLike, NDArray

    from orolift.fire.rules import Rule
    from orolift.fire.winds import WindMeant
    from orolift.spread.hours import LineRain
    from orolift.spread.site_state import Status
    from orolift.spread.stretches import Stretch

    Array = NDArray[np.float64]
    Flags = NDArray[np.bool_]

HOUR = 3600.0
LEAST_LINE_RAIN = 0.1 / HOUR
"""Sum over the hours of the mean rate on the line [kg m-2 s-1] below which it tells nothing of a catchment: 0.1 mm in
an hour, what gauges resolve; a judgement."""
Ends = tuple[float, float]
MaybeEnds = tuple[float | None, float | None]


@dataclass(frozen=True)
class StretchRange:
    """A stretch of the answer in the members; theirs count where they share an hour with it.

    Attributes
    ----------
    chance : float or None [1]
        Share of the members that have one, of those that can be judged; None where none can.
    onset, end : (float or None, float or None) or None [s]
        10 and 90 % of those members; None at an end that lies before or after what can be judged, and as a whole where
        fewer than five have one.
    """

    chance: float | None
    onset: MaybeEnds | None
    end: MaybeEnds | None


@dataclass(frozen=True, eq=False)
class HappensRange:
    """Something that holds or not at a site, in the members.

    Attributes
    ----------
    chance : ndarray (n,) [1]
        Of each hour: share of all members that can be judged; NaN where more than a tenth of them cannot.
    ever : float or None [1]
        Share of the members in which it happens in any of the hours, of those that can be judged in one of them; None
        where none can, as with a threshold of which a value is never known.
    lasts : (float, float) or None [s]
        10 and 90 % of the time in which it holds, all stretches together; None where fewer than five can be judged.
    stretches : tuple of StretchRange
        Of those of the answer, in their order.
    """

    chance: Array
    ever: float | None
    lasts: Ends | None
    stretches: tuple[StretchRange, ...]


@dataclass(frozen=True, eq=False)
class SiteRanges:
    """One site through all hours in the members.

    Attributes
    ----------
    members : int
    lost : int
        Hours in which some members, or all, could not be worked out; they count as missing there.
    full, inputs : dict of str to ndarray (n, 2) [SI]
        10 and 90 % of `orolift.spread.hour_members.RANGED`, with the error of the method and without; NaN where there
        is none.
    crosses, rain, in_pool : ndarray (n,) [1]
        Chances: of all members, and of those that cross; NaN where there is none.
    fine_fuel_code : ndarray (n, 2) [1]
        Carried from hour to hour in each member.
    total_rain : (float, float) or None [kg m-2]
    dry_wind : HappensRange
        Descending warm dry air.
    thresholds : tuple of HappensRange
        Of the region.
    """

    members: int
    lost: int
    full: dict[str, Array]
    inputs: dict[str, Array]
    crosses: Array
    rain: Array
    in_pool: Array
    fine_fuel_code: Array
    total_rain: Ends | None
    dry_wind: HappensRange
    thresholds: tuple[HappensRange, ...]


def site_ranges(
    hours: Sequence[HourMembers | None],
    status: Sequence[Status],
    time: Array,
    step: float,
    *,
    start_code: float,
    rain: Array,
    dry_winds: tuple[Stretch, ...],
    rules: Sequence[tuple[Rule, tuple[Stretch, ...]]] = (),
) -> SiteRanges | None:
    """One site through all hours in the members.

    Parameters
    ----------
    hours : sequence of (HourMembers or None), length n
    status : sequence of str, length n
        Of the answer in each hour.
    time : ndarray (n,) [s]
        Upwind, increasing.
    step : float [s]
    start_code : float [1]
        Fine Fuel Moisture Code before the first hour.
    rain : ndarray (n,) [kg m-2 s-1]
        Of the answer; NaN in hours that do not cross.
    dry_winds : tuple of Stretch
        Of the answer.
    rules : sequence of (Rule, tuple of Stretch)
        Thresholds, with the stretches of the answer.

    Returns
    -------
    SiteRanges or None
        None where no hour has members.

    Notes
    -----
    Member number k is the same story in every hour: what is too warm, too moist or too weak in it is so throughout, the
    error of the method too. In each member arrival, stretches, codes and sums are those of its own hours. A member that
    does not cross in an hour has neither descending air nor a threshold met in it; one that could not be worked out
    counts as a missing hour, and in the sum of rain has that of the answer, so that no rain is lost. Hours whose own
    answer does not cross count as not crossing in every member.
    """
    count = max((one.crosses.size for one in hours if one is not None), default=0)
    if not count:
        return None
    state, values, dry = _each(hours, status, count)
    known = state >= 0
    arrival = np.column_stack([arrivals(time, values["way"][:, k]) for k in range(count)])
    codes = member_codes(values, step, start_code)
    thresholds = []
    for number, (rule, answer) in enumerate(rules):
        met, judged = _rule(number, rule, hours, codes, values["wind_10m"], state)
        enough = lasting((met & judged).T, max(1, int(np.ceil(rule.hours * HOUR / step - 1e-6)))).T
        thresholds.append(_happens(enough, judged, arrival, step, answer))
    blank = np.full((2, len(RANGED), 2), np.nan)
    ends = np.array([blank if one is None or one.ends is None else one.ends for one in hours])
    return SiteRanges(
        members=count,
        lost=sum(said == "crossing" and bool((row < 0).any()) for said, row in zip(status, state, strict=True)),
        full={name: ends[:, 0, i] for i, name in enumerate(RANGED)},
        inputs={name: ends[:, 1, i] for i, name in enumerate(RANGED)},
        crosses=np.array([np.nan if one is None else _share(one.crosses[one.crosses >= 0]) for one in hours]),
        rain=np.array([np.nan if one is None else one.rain for one in hours]),
        in_pool=np.array([np.nan if one is None else one.in_pool for one in hours]),
        fine_fuel_code=np.array([range_of(row) or (np.nan, np.nan) for row in codes]),
        total_rain=range_of(np.nansum(np.where(known, values["rain"], rain[:, np.newaxis]), axis=0) * step),
        dry_wind=_happens(dry, known, arrival, step, dry_winds),
        thresholds=tuple(thresholds),
    )


def _each(
    hours: Sequence[HourMembers | None], status: Sequence[Status], count: int
) -> tuple[NDArray[np.int8], dict[str, Array], Flags]:
    """Of each hour and member, (n, m): whether it crosses (-1 not known), what is carried, whether it is dry wind."""
    state = np.full((len(hours), count), -1, dtype=np.int8)
    carried = np.full((len(CARRIED), len(hours), count), np.nan)
    dry = np.zeros(state.shape, dtype=np.bool_)
    for i, (one, said) in enumerate(zip(hours, status, strict=True)):
        if said == "no crossing":
            state[i] = 0
        elif one is not None and one.carried is not None and one.descending is not None:
            state[i], carried[:, i], dry[i] = one.crosses, one.carried, one.descending
    return state, dict(zip(CARRIED, carried, strict=True)), dry


def member_codes(values: Mapping[str, Array], step: float, start_code: float) -> Array:
    """Fine Fuel Moisture Code hour by hour in each member.

    Parameters
    ----------
    values : mapping of str to ndarray (n, m) [SI]
        Temperature, relative humidity, wind at 10 m and rain; NaN where a member has none.
    step : float [s]
        Between two hours.
    start_code : float [1]
        Before the first.

    Returns
    -------
    ndarray (n, m) [1]
        NaN where a member has no air, and all of it where the step is not of whole hours. Over hours without air it
        stays unknown, and goes on after them from where it was: the code forgets within a day.
    """
    t, u = values["temperature"], values["relative_humidity"]
    wind, rain = np.nan_to_num(values["wind_10m"]), np.nan_to_num(values["rain"])
    codes = np.full(t.shape, np.nan)
    whole = round(step / HOUR)
    if whole < 1 or abs(step - whole * HOUR) > 1.0:
        return codes
    code = np.full(t.shape[1], start_code)
    for i in range(t.shape[0]):
        here = np.isfinite(t[i]) & np.isfinite(u[i])
        if here.any():
            code[here] = fine_fuel_code_hourly(
                code[here], t[i, here], np.minimum(u[i, here], 1.0), wind[i, here], rain[i, here] * HOUR, hours=whole
            )
            codes[i, here] = code[here]
    return codes


def _rule(
    number: int,
    rule: Rule,
    hours: Sequence[HourMembers | None],
    codes: Array,
    wind: Array,
    state: NDArray[np.int8],
) -> tuple[Flags, Flags]:
    """Whether a rule is met and can be judged in each hour and member, (n, m); its duration apart."""
    parts = np.zeros(state.shape, dtype=np.int8)
    for i, one in enumerate(hours):
        if one is not None and one.rules is not None:
            parts[i] = one.rules[number]
    both = np.isfinite(codes) & np.isfinite(wind)
    spread = np.full(codes.shape, np.nan)
    spread[both] = initial_spread_index(codes[both], wind[both])
    others = {one.quantity for one in rule.conditions}.difference(CODES)
    values: dict[str | WindMeant, ArrayLike] = {"fine_fuel_code": codes, "initial_spread_index": spread}
    met, missed = rule_parts(rule, values, without=others)
    met, missed = (parts > 0) & met, (parts < 0) | missed
    return met & (state > 0), ((met | missed) & (state > 0)) | (state == 0)


def _share(happens: NDArray[np.generic]) -> float:
    return float(happens.mean()) if happens.size else np.nan


def _happens(met: Flags, known: Flags, arrival: Array, step: float, answer: tuple[Stretch, ...]) -> HappensRange:
    """Something that holds or not in each hour and member, (n, m)."""
    met = met & known
    counted = known.any(axis=0)
    enough = known.mean(axis=1) >= 1.0 - MOST_UNJUDGED
    chance = [_share(now[sure]) if few else np.nan for now, sure, few in zip(met, known, enough, strict=True)]
    nothing = np.zeros(met.shape[0])
    each = [
        stretches(met[:, k].tolist(), known[:, k], arrival[:, k], nothing) if met[:, k].any() else ()
        for k in np.flatnonzero(counted)
    ]
    return HappensRange(
        chance=np.array(chance),
        ever=float(np.mean([bool(found) for found in each])) if each else None,
        lasts=range_of(met[:, counted].sum(axis=0) * step),
        stretches=tuple(_in_members(one, each) for one in answer),
    )


def _in_members(answer: Stretch, each: list[tuple[Stretch, ...]]) -> StretchRange:
    """A stretch of the answer in the members: from their first that shares an hour with it to their last."""
    same = [[one for one in found if one.first <= answer.last and one.last >= answer.first] for found in each]
    same = [found for found in same if found]
    return StretchRange(
        chance=len(same) / len(each) if each else None,
        onset=_times([found[0].onset for found in same], -np.inf),
        end=_times([found[-1].end for found in same], np.inf),
    )


def _times(times: Sequence[float | None], unknown: float) -> MaybeEnds | None:
    """10 and 90 % of times of which some lie before or after what can be judged."""
    if len(times) < FEWEST:
        return None
    with np.errstate(invalid="ignore"):
        ends = np.quantile([unknown if one is None else one for one in times], TENTHS)
    low, high = (float(one) if np.isfinite(one) else None for one in ends)
    return low, high


def total_range(answer: float, rain: Sequence[LineRain | None]) -> Ends | None:
    """Range of the sum of rain over a catchment, as far as the rain on the line tells it.

    Parameters
    ----------
    answer : float [kg m-2]
        The sum.
    rain : sequence of (LineRain or None)
        Of the hours that are known.

    Returns
    -------
    (float, float) or None [kg m-2]
        10 and 90 %; None without members in one of the hours, and where hardly any rain falls on the line.

    Notes
    -----
    The sum times the ratio, member by member, of the rain on the line in these hours to that of the answer: rain over
    the map is not worked out in members.
    """
    if not rain or any(one is None for one in rain):
        return None
    lines = [one for one in rain if one is not None]
    whole = sum(one.answer for one in lines)
    if whole < LEAST_LINE_RAIN:
        return None
    each = np.asarray(np.sum([one.members for one in lines], axis=0, dtype=np.float64))
    return range_of(answer * each / whole)
