"""The page of a series of hours as data: what each site gets and when, and how sure the times are."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, datetime
from typing import TYPE_CHECKING

from orolift.report.cautions import ALWAYS
from orolift.report.figures.timeline import timeline_figure
from orolift.report.hours_sure import HOW_SURE, NOT_HELD, how_sure, members_of
from orolift.report.hours_tables import CatchmentRow, HourRow, StretchRow, catchment_rows, hour_row, stretch_row
from orolift.report.hours_times import stamp
from orolift.report.hours_words import NAMED, counts, dangers, heading, lead, outcome
from orolift.report.words import moment, zone_words

if TYPE_CHECKING:
    from datetime import tzinfo

    from orolift.report.figures.drawing import Figure
    from orolift.report.figures.timeline import TimelineDrawing
    from orolift.report.quantities import Units
    from orolift.report.words import Words
    from orolift.spread.timeline import Hours

MOST_ROWS = 400
"""Hours of a site in the table of the page; more are in the CSV table."""


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
    ranged: bool


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
    first, members = datetime.fromtimestamp(hours.time[0], zone), members_of(hours)
    return HoursPage(
        title=title,
        span=f"{stamp(hours.time[0], zone)} to {stamp(hours.time[-1], zone)}",
        zone=zone_words(first),
        made=moment(made_at.astimezone(UTC)),
        version=version,
        units=units,
        heading=heading(hours),
        dangers=tuple(words for site in hours.sites[:NAMED] for words in dangers(site, zone)),
        lead=lead(hours, zone),
        sites=tuple(_site(hours, number, zone, units) for number in range(len(hours.sites))),
        catchments=catchment_rows(hours, zone),
        how=(*HOW, *HOW_SURE) if members else HOW,
        cautions=(ALWAYS[0], NOT_HELD if members else ONE_ANSWER, *ALWAYS[1:]),
        notes=notes,
    )


def _site(hours: Hours, number: int, zone: tzinfo, units: Units) -> SiteHours:
    site = hours.sites[number]
    rows = tuple(hour_row(hours, site, i, zone) for i in range(min(len(site.states), MOST_ROWS)))
    return SiteHours(
        number=number + 1,
        name=site.name,
        heading=outcome(site, zone),
        dangers=dangers(site, zone),
        sentences=(*counts(site), *how_sure(site, zone)),
        figure=timeline_figure(hours, number, zone, units),
        dry_winds=tuple(stretch_row(site, i, zone) for i in range(min(len(site.dry_winds), MOST_ROWS))),
        rows=rows,
        left_out=len(site.states) - len(rows),
        ranged=site.ranges is not None,
    )
