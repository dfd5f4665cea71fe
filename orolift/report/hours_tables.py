"""Tables of the page of a series: stretches of descending warm dry air, the hours of a site, catchments."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.hours_times import about, short_between, short_stamp, stamp
from orolift.report.quantities import Amount, displayed
from orolift.spread.timeline import values_of

if TYPE_CHECKING:
    from collections.abc import Sequence
    from datetime import tzinfo

    from numpy.typing import NDArray

    from orolift.report.quantities import Kind
    from orolift.report.words import Words
    from orolift.spread.site_state import SiteState
    from orolift.spread.timeline import Hours, SiteTimeline


@dataclass(frozen=True)
class StretchRow:
    """A stretch of descending warm dry air, as the table has it; times in words."""

    onset: str
    onset_error: Amount | None
    end: str
    end_error: Amount | None
    length: Amount | None
    warmest: Amount | None
    driest: Amount | None
    windiest: Amount | None
    unknown: Amount
    chance: Amount | None
    onset_range: str
    end_range: str
    spans: dict[str, Words]


@dataclass(frozen=True)
class HourRow:
    """One hour at a site; times in words, numbers None where there are none."""

    arrival: str
    upwind: str
    state: str
    temperature: Amount | None
    dew_point: Amount | None
    relative_humidity: Amount | None
    wind_10m: Amount | None
    gust: Amount | None
    warming: Amount | None
    source_level: Amount | None
    rain: Amount | None
    code: Amount | None
    chance: Amount | None
    spans: dict[str, Words]


@dataclass(frozen=True)
class CatchmentRow:
    """One catchment on the page."""

    name: str
    total: Amount
    peak: Amount | None
    peak_time: str
    known: Amount
    spans: dict[str, Words]


def stretch_row(site: SiteTimeline, number: int, zone: tzinfo) -> StretchRow:
    """One stretch of descending warm dry air at a site.

    Parameters
    ----------
    site : SiteTimeline
    number : int
        Of the stretch.
    zone : tzinfo

    Returns
    -------
    StretchRow
        Extremes with the range of their hour.
    """
    one, spans = site.dry_winds[number], {}

    def extreme(field: str, key: str, kind: Kind, *, most: bool) -> Amount | None:
        values = values_of(site.states[one.first : one.last + 1], key)
        if not np.isfinite(values).any():
            return None
        at = int((np.nanargmax if most else np.nanargmin)(values))
        amount = Amount(float(values[at]), kind, 0)
        if site.ranges is not None:
            spans.update(_span(field, amount, site.ranges.full[key][one.first + at]))
        return amount

    members = None if site.ranges is None else site.ranges.dry_wind.stretches[number]
    return StretchRow(
        onset="before what can be judged" if one.onset is None else about(one.onset, one.onset_error or 0.0, zone),
        onset_error=None if one.onset_error is None else Amount(one.onset_error, "hours", 1),
        end="after what can be judged" if one.end is None else about(one.end, one.end_error or 0.0, zone),
        end_error=None if one.end_error is None else Amount(one.end_error, "hours", 1),
        length=None if one.onset is None or one.end is None else Amount(one.end - one.onset, "hours", 0),
        warmest=extreme("warmest", "temperature", "temperature", most=True),
        driest=extreme("driest", "relative_humidity", "share", most=False),
        windiest=extreme("windiest", "gust", "wind", most=True),
        unknown=Amount(one.unknown, "plain"),
        chance=None if members is None or members.chance is None else Amount(members.chance, "share"),
        onset_range="" if members is None or members.onset is None else short_between(members.onset, zone),
        end_range="" if members is None or members.end is None else short_between(members.end, zone),
        spans=spans,
    )


NUMBERS: tuple[tuple[str, Kind, int], ...] = (
    ("temperature", "temperature", 0),
    ("dew_point", "temperature", 0),
    ("relative_humidity", "share", 0),
    ("wind_10m", "wind", 0),
    ("gust", "wind", 0),
    ("warming", "temperature_change", 1),
    ("source_level", "height", -1),
    ("rain", "rain_rate", 1),
)
"""Numbers of an hour in the table, how each is shown."""


def hour_row(hours: Hours, site: SiteTimeline, i: int, zone: tzinfo) -> HourRow:
    """One hour at a site.

    Parameters
    ----------
    hours : Hours
    site : SiteTimeline
    i : int
        Number of the hour.
    zone : tzinfo

    Returns
    -------
    HourRow
    """
    state, ranges = site.states[i], site.ranges
    amounts = {
        name: None if (value := getattr(state, name)) is None else Amount(value, kind, digits)
        for name, kind, digits in NUMBERS
    }
    code = None if np.isnan(site.fine_fuel_code[i]) else Amount(float(site.fine_fuel_code[i]), "plain", 0)
    spans: dict[str, Words] = {}
    chance = None
    if ranges is not None:
        for name, amount in amounts.items():
            spans |= _span(name, amount, ranges.full[name][i])
        spans |= _span("code", code, ranges.fine_fuel_code[i])
        share = float(ranges.dry_wind.chance[i])
        chance = None if np.isnan(share) else Amount(share, "share")
    return HourRow(
        arrival=short_stamp(site.arrival[i], zone) if np.isfinite(site.arrival_error[i]) else "–",
        upwind=short_stamp(hours.time[i], zone),
        state=_state_words(state),
        code=code,
        chance=chance,
        spans=spans,
        **amounts,
    )


def _span(field: str, amount: Amount | None, ends: Sequence[float] | NDArray[np.float64]) -> dict[str, Words]:
    """A range under its field, as fine as the amount; nothing where there is none or it has no width."""
    low, high = (float(end) for end in ends)
    if amount is None or np.isnan(low):
        return {}
    low, high = min(low, amount.value), max(high, amount.value)
    if displayed(high, amount.kind, "metric") - displayed(low, amount.kind, "metric") < 0.5 * 10.0**-amount.digits:
        return {}
    ends_shown = (Amount(end, amount.kind, amount.digits, bare=True) for end in (low, high))
    return {field: (next(ends_shown), " to ", next(ends_shown))}


def _state_words(state: SiteState) -> str:
    if state.status != "crossing":
        return state.status
    if state.in_pool:
        return "cold pool stays"
    return "descending, warm, dry" if state.descending else f"crosses, {state.side}"


def catchment_rows(hours: Hours, zone: tzinfo) -> tuple[CatchmentRow, ...]:
    """The catchments of a series.

    Parameters
    ----------
    hours : Hours
    zone : tzinfo

    Returns
    -------
    tuple of CatchmentRow
    """
    out = []
    for one in hours.catchments:
        known = np.isfinite(one.rate)
        peak = int(np.nanargmax(one.rate)) if known.any() else None
        out.append(
            CatchmentRow(
                name=one.name,
                total=(total := Amount(one.total, "water_depth", 0)),
                peak=None if peak is None else Amount(float(one.rate[peak]), "rain_rate", 1),
                peak_time="–" if peak is None else stamp(hours.time[peak], zone),
                known=Amount(one.known_hours, "plain"),
                spans={} if one.total_range is None else _span("total", total, one.total_range),
            )
        )
    return tuple(out)
