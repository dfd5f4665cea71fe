"""The page of a series of hours as data: what each site gets and when, and how sure the times are."""

from __future__ import annotations

import math
from dataclasses import dataclass
from datetime import UTC, datetime
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.cautions import ALWAYS
from orolift.report.figures.timeline import timeline_figure
from orolift.report.quantities import NO_BREAK_SPACE, Amount
from orolift.report.words import counted, moment, month, zone_words

if TYPE_CHECKING:
    from datetime import tzinfo

    from orolift.report.figures.drawing import Figure
    from orolift.report.figures.timeline import TimelineDrawing
    from orolift.report.quantities import Kind, Units
    from orolift.report.words import Words
    from orolift.spread.site_state import SiteState
    from orolift.spread.timeline import Hours, SiteTimeline, Stretch

MOST_ROWS = 400
"""Hours of a site in the table of the page; more are in the CSV table."""
LEAST_RAIN = 0.1
"""Rain [kg m-2] below which none is said to fall."""
NAMED = 4
"""Sites named one by one at the head of the page."""


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


@dataclass(frozen=True)
class SiteHours:
    """One site on the page."""

    number: int
    name: str
    heading: Words
    dangers: tuple[Words, ...]
    sentences: tuple[Words, ...]
    figure: Figure[TimelineDrawing]
    dry_winds: tuple[StretchRow, ...]
    rows: tuple[HourRow, ...]
    left_out: int


@dataclass(frozen=True)
class CatchmentRow:
    """One catchment on the page."""

    name: str
    total: Amount
    peak: Amount | None
    peak_time: str
    known: Amount


@dataclass(frozen=True)
class HoursPage:
    """Everything the page of a series shows.

    Attributes
    ----------
    title : str
    span, zone, made : str
        In words.
    version : str
    units : 'metric' or 'us'
    heading : Words
    dangers : tuple of Words
        Thresholds met, at the sites named at the head.
    lead : tuple of Words
    sites : tuple of SiteHours
    catchments : tuple of CatchmentRow
    how : tuple of str
        How times and stretches are worked out.
    cautions : tuple of Words
    notes : tuple of str
    """

    title: str
    span: str
    zone: str
    made: str
    version: str
    units: Units
    heading: Words
    dangers: tuple[Words, ...]
    lead: tuple[Words, ...]
    sites: tuple[SiteHours, ...]
    catchments: tuple[CatchmentRow, ...]
    how: tuple[str, ...]
    cautions: tuple[Words, ...]
    notes: tuple[str, ...]


HOW = (
    (
        "Each hour is one crossing of its own, as if its air and wind lasted while it crosses: what changes on the "
        "way is left out."
    ),
    (
        "The time at a site is the time upwind and the time on the way: along the streamlines that arrive there, with "
        "their own wind, from where the air was observed or from the upwind end of the line. Air that faster air "
        "behind it would overtake arrives with that."
    ),
    (
        "Descending warm dry air: the site lies behind the crest and not in a cold pool that stays, its potential "
        "temperature is nearer to that of the incoming air at the crest than to that of the incoming air at its own "
        "height, it is at least 1 °C warmer than the latter, and its relative humidity is lower. The numbers are a "
        "judgement."
    ),
    (
        "Onset and end lie halfway between the last hour without and the first with it. Their error, one standard "
        "deviation, joins half the time between these hours, the share of the time on the way that the wind is "
        "uncertain by, and the spread of that time between the streamlines that arrive. What else is uncertain, "
        "the incoming air first of all, is not in it."
    ),
    (
        "Nothing is interpolated: hours that are missing or cannot be used stay empty, and hours in which no air "
        "crosses are shown as such."
    ),
    (
        "A threshold of the region counts as met in stretches as long as its rule asks for; hours without air that "
        "crosses do not meet it, and missing hours cannot be judged."
    ),
    (
        "The Fine Fuel Moisture Code is carried from hour to hour (Van Wagner 1977) from the code of the case, or 85; "
        "over hours without air it is not known and goes on from where it was."
    ),
)
"""How times and stretches are worked out, for the page."""
ONE_ANSWER: Words = (
    (
        "Each crossing is worked out once: how much low air is blocked and how much of it goes round decides the lee "
        "temperature, and what that and uncertain input may change is not worked out here. The report of one crossing "
        "says how sure it is."
    ),
)
"""Caution of pages that hold many crossings."""


def hours_page(
    hours: Hours,
    *,
    title: str,
    zone: tzinfo,
    made_at: datetime,
    version: str,
    notes: tuple[str, ...],
    units: Units = "metric",
) -> HoursPage:
    """The page of a series.

    Parameters
    ----------
    hours : Hours
        With one hour at least.
    title : str
    zone : tzinfo
        In which times are said.
    made_at : datetime
    version : str
        Of orolift.
    notes : tuple of str
        What was assumed.
    units : 'metric' or 'us'

    Returns
    -------
    HoursPage
    """
    first = datetime.fromtimestamp(hours.time[0], zone)
    return HoursPage(
        title=title,
        span=f"{stamp(hours.time[0], zone)} to {stamp(hours.time[-1], zone)}",
        zone=zone_words(first),
        made=moment(made_at.astimezone(UTC)),
        version=version,
        units=units,
        heading=_heading(hours),
        dangers=tuple(words for site in hours.sites[:NAMED] for words in _dangers(site, zone)),
        lead=_lead(hours, zone),
        sites=tuple(_site(hours, number, zone, units) for number in range(len(hours.sites))),
        catchments=_catchments(hours, zone),
        how=HOW,
        cautions=(ALWAYS[0], ONE_ANSWER, *ALWAYS[1:]),
        notes=notes,
    )


def about(seconds: float, error: float, zone: tzinfo) -> str:
    """A time for people, to the half hour or ten minutes that its error allows.

    Parameters
    ----------
    seconds, error : float [s]
    zone : tzinfo

    Returns
    -------
    str

    Examples
    --------
    >>> about(1793741400.0, 5000.0, UTC), about(1793741700.0, 900.0, UTC)
    ('3 November 2026, 21:30', '3 November 2026, 21:40')
    """
    step = 1800.0 if error >= 3600.0 else 600.0
    return stamp(math.floor(seconds / step + 0.5) * step, zone)


def stamp(seconds: float, zone: tzinfo) -> str:
    """A time for people, short, in a zone that is named beside it.

    Parameters
    ----------
    seconds : float [s]
        Since 1970-01-01T00:00:00 UTC.
    zone : tzinfo

    Returns
    -------
    str

    Examples
    --------
    >>> stamp(1793741400.0, UTC)
    '3 November 2026, 21:30'
    """
    time = datetime.fromtimestamp(round(seconds / 60.0) * 60.0, zone)
    return f"{time.day} {month(time)} {time.year}, {time.hour:02d}:{time.minute:02d}"


def _heading(hours: Hours) -> Words:
    """The whole series in a line."""
    sites = len(hours.sites)
    dry = sum(bool(site.dry_winds) for site in hours.sites)
    rain = max(site.rain for site in hours.sites)
    where = f"{counted(dry, 'site has', 'sites have')} descending warm dry air"
    if not dry:
        where = "no descending warm dry air"
    elif sites == 1:
        where = "descending warm dry air comes through"
    elif dry == sites:
        where = "descending warm dry air at every site"
    wet: Words = (", and ", Amount(rain, "water_depth", 0), " of rain at most") if rain >= 0.5 else (", and no rain",)
    return (f"{where[:1].upper()}{where[1:]}", *wet)


def _lead(hours: Hours, zone: tzinfo) -> tuple[Words, ...]:
    out: list[Words] = []
    if hours.interrupted:
        out.append(
            (
                "The work was interrupted: ",
                Amount(hours.time.size, "plain"),
                " of ",
                Amount(hours.planned, "plain"),
                " hours are here.",
            )
        )
    out += [(*_outcome(site, zone), ".") for site in hours.sites[:NAMED]]
    if len(hours.sites) > NAMED:
        more = len(hours.sites) - NAMED
        out.append((f"{counted(more, 'more site follows', 'more sites follow')} below.".capitalize(),))
    wettest = max(hours.sites, key=lambda site: site.rain)
    if wettest.rain >= LEAST_RAIN:
        out.append((f"Most rain falls at {wettest.name}: ", Amount(wettest.rain, "water_depth", 0), " in all."))
    return tuple(out)


def _outcome(site: SiteTimeline, zone: tzinfo) -> Words:
    """What happens at a site, as a sentence without its full stop."""
    found = site.dry_winds
    if not site.crossing_hours:
        return (f"No air crosses to {site.name} in these hours",)
    if not found:
        return (f"No descending warm dry air reaches {site.name}",)
    longest = max(found, key=lambda one: one.last - one.first)
    if len(found) == 1:
        return (f"Descending warm dry air is at {site.name} ", *_from_to(longest, zone))
    times = counted(len(found), "time", "times")
    return (f"Descending warm dry air comes to {site.name} {times}, longest ", *_from_to(longest, zone))


def _from_to(one: Stretch, zone: tzinfo) -> Words:
    parts: list[str | Amount] = []
    if one.onset is None or one.onset_error is None:
        parts.append("from the first hour that can be judged")
    else:
        parts += [
            f"from {about(one.onset, one.onset_error, zone)} (±{NO_BREAK_SPACE}",
            Amount(one.onset_error, "hours", 1),
            ")",
        ]
    if one.end is None or one.end_error is None:
        parts.append(" to the last that can be judged")
    else:
        parts += [
            f" to {about(one.end, one.end_error, zone)} (±{NO_BREAK_SPACE}",
            Amount(one.end_error, "hours", 1),
            ")",
        ]
    return tuple(parts)


def _site(hours: Hours, number: int, zone: tzinfo, units: Units) -> SiteHours:
    site = hours.sites[number]
    rows = tuple(_row(hours, site, i, zone) for i in range(min(len(site.states), MOST_ROWS)))
    return SiteHours(
        number=number + 1,
        name=site.name,
        heading=_outcome(site, zone),
        dangers=_dangers(site, zone),
        sentences=_counts(site),
        figure=timeline_figure(hours, number, zone, units),
        dry_winds=tuple(_dry_wind(site, one, zone) for one in site.dry_winds[:MOST_ROWS]),
        rows=rows,
        left_out=len(site.states) - len(rows),
    )


def _dangers(site: SiteTimeline, zone: tzinfo) -> tuple[Words, ...]:
    """Thresholds of the region that are met, and when."""
    out: list[Words] = []
    for one in site.thresholds:
        found = one.stretches
        if not found:
            continue
        longest = max(found, key=lambda stretch: stretch.last - stretch.first)
        often = "" if len(found) == 1 else f" {counted(len(found), 'time', 'times')}, longest"
        start = f"Threshold met at {site.name}: {one.rule.name},{often} "
        out.append((start, *_from_to(longest, zone), "."))
    return tuple(out)


def _counts(site: SiteTimeline) -> tuple[Words, ...]:
    """How many hours cross, and what the others are."""
    states = [state.status for state in site.states]
    still, missing = states.count("no crossing"), states.count("missing")
    out: list[Words] = [
        (
            "Air crosses in ",
            Amount(site.crossing_hours, "plain"),
            " of ",
            Amount(len(states), "plain"),
            " hours",
            *((", in ", Amount(still, "plain"), " it does not") if still else ()),
            *((", and ", Amount(missing, "plain"), " are missing") if missing else ()),
            *(
                ("; ", Amount(site.rain, "water_depth", 1), " of rain and snow fall in the hours that cross.")
                if site.rain >= LEAST_RAIN
                else ("; no rain to speak of falls.",)
            ),
        )
    ]
    reasons = [state.reason for state in site.states if state.status == "missing" and state.reason]
    if reasons:
        out.append((f"The first that is missing: {reasons[0]}",))
    if site.overtaken:
        out.append((Amount(site.overtaken, "plain"), " hours of air are caught up by faster air behind them."))
    return tuple(out)


def _dry_wind(site: SiteTimeline, one: Stretch, zone: tzinfo) -> StretchRow:
    states = [state for state in site.states[one.first : one.last + 1] if state.status == "crossing"]

    def end(key: str, kind: Kind, digits: int, most: bool) -> Amount | None:
        values = [value for state in states if (value := getattr(state, key)) is not None]
        return Amount((max if most else min)(values), kind, digits) if values else None

    return StretchRow(
        onset="before what can be judged" if one.onset is None else about(one.onset, one.onset_error or 0.0, zone),
        onset_error=None if one.onset_error is None else Amount(one.onset_error, "hours", 1),
        end="after what can be judged" if one.end is None else about(one.end, one.end_error or 0.0, zone),
        end_error=None if one.end_error is None else Amount(one.end_error, "hours", 1),
        length=None if one.onset is None or one.end is None else Amount(one.end - one.onset, "hours", 0),
        warmest=end("temperature", "temperature", 0, most=True),
        driest=end("relative_humidity", "share", 0, most=False),
        windiest=end("gust", "wind", 0, most=True),
        unknown=Amount(one.unknown, "plain"),
    )


def _row(hours: Hours, site: SiteTimeline, i: int, zone: tzinfo) -> HourRow:
    state = site.states[i]
    code = float(site.fine_fuel_code[i])

    def amount(value: float | None, kind: Kind, digits: int) -> Amount | None:
        return None if value is None else Amount(value, kind, digits)

    return HourRow(
        arrival=stamp(site.arrival[i], zone) if np.isfinite(site.arrival_error[i]) else "–",
        upwind=stamp(hours.time[i], zone),
        state=_state_words(state),
        temperature=amount(state.temperature, "temperature", 0),
        dew_point=amount(state.dew_point, "temperature", 0),
        relative_humidity=amount(state.relative_humidity, "share", 0),
        wind_10m=amount(state.wind_10m, "wind", 0),
        gust=amount(state.gust, "wind", 0),
        warming=amount(state.warming, "temperature_change", 1),
        source_level=amount(state.source_level, "height", -1),
        rain=amount(state.rain, "rain_rate", 1),
        code=None if np.isnan(code) else Amount(code, "plain", 0),
    )


def _state_words(state: SiteState) -> str:
    if state.status != "crossing":
        return state.status
    if state.in_pool:
        return "cold pool stays"
    return "descending, warm, dry" if state.descending else f"crosses, {state.side}"


def _catchments(hours: Hours, zone: tzinfo) -> tuple[CatchmentRow, ...]:
    out = []
    for one in hours.catchments:
        known = np.isfinite(one.rate)
        peak = int(np.nanargmax(one.rate)) if known.any() else None
        out.append(
            CatchmentRow(
                name=one.name,
                total=Amount(one.total, "water_depth", 0),
                peak=None if peak is None else Amount(float(one.rate[peak]), "rain_rate", 1),
                peak_time="–" if peak is None else stamp(hours.time[peak], zone),
                known=Amount(one.known_hours, "plain"),
            )
        )
    return tuple(out)
