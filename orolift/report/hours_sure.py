"""How sure a series of hours is: what the members say of each site, and what ranges and chances hold."""

from __future__ import annotations

from datetime import datetime
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.hours_words import longest_of, stamp
from orolift.report.quantities import Amount
from orolift.report.spans import ranged
from orolift.report.words import month, rounded_time

if TYPE_CHECKING:
    from datetime import tzinfo

    from orolift.report.words import Words
    from orolift.spread.timeline import Hours, SiteTimeline
    from orolift.spread.timeline_members import MaybeEnds, SiteRanges

HOW_SURE = (
    (
        "Ranges hold 10 to 90 % of the members, in small figures and as bands. Each hour is worked out in every "
        "member, with its own draw of the incoming air, the options and the error of the method. A member is one "
        "story: what is too warm, too moist or too weak in it is so in every hour. Errors that change from hour to "
        "hour would leave single hours as uncertain as they are, and even out in sums and in stretches."
    ),
    (
        "Chances are shares of the members. Crossing, descending warm dry air and thresholds count among all "
        "members; where more than a tenth of them cannot be judged no chance is given. In hours whose own answer "
        "does not cross, members count as not crossing for all but the chance of crossing."
    ),
    (
        "A stretch is there in a member that has one of its own in one of the same hours. Onset and end of the "
        "members are theirs: from when each one's own air arrives, halfway between its hours, from its first such "
        "stretch to the end of its last. They stand beside the stated error of onset and end and are not joined with "
        "it."
    ),
    (
        "Catchments: rain over the map is worked out once. Its range is that of the rain on the line, member by "
        "member, over the same hours; the error of the linear theory is not in it."
    ),
)
"""What ranges and chances hold, for the page."""
NOT_HELD: Words = (
    (
        "Ranges hold what is known to be uncertain: the incoming air, the options, the usual error of the method. "
        "They do not hold weather that changes while the air crosses, nor ground that the line does not show."
    ),
)
"""Caution of pages with ranges."""


def members_of(hours: Hours) -> int:
    """Members of a series; 0 without."""
    return max((site.ranges.members for site in hours.sites if site.ranges is not None), default=0)


def how_sure(site: SiteTimeline, zone: tzinfo) -> tuple[Words, ...]:
    """What the members say of a site, in sentences; none without members.

    Parameters
    ----------
    site : SiteTimeline
    zone : tzinfo
        In which times are said.

    Returns
    -------
    tuple of Words
    """
    ranges = site.ranges
    if ranges is None or not np.isfinite(ranges.dry_wind.ever):
        return ()
    out = [_at_all(site, ranges, zone)]
    if site.dry_winds:
        out.append(_longest(site, ranges, zone))
    for one, found in zip(site.thresholds, ranges.thresholds, strict=True):
        if not one.stretches and found.ever > 0.0:
            share = Amount(found.ever, "share")
            out.append(
                (f"Threshold not met: {one.rule.name}; in ", share, " of the members it is, in one hour or more.")
            )
    return tuple(out)


def _at_all(site: SiteTimeline, ranges: SiteRanges, zone: tzinfo) -> Words:
    """In how many members descending warm dry air comes at all, when most likely, and for how long."""
    found = ranges.dry_wind
    if found.ever == 0.0:
        return ("In none of ", Amount(ranges.members, "plain"), " members descending warm dry air comes.")
    likeliest = ""
    chances = np.nan_to_num(found.chance)
    peak = int(np.argmax(chances))
    if chances[peak] > 0.0:
        likeliest = f", most likely at {stamp(rounded_time(float(site.arrival[peak]), 0.0), zone)} ("
    return (
        "Descending warm dry air comes in ",
        Amount(found.ever, "share"),
        " of ",
        Amount(ranges.members, "plain"),
        " members",
        *((likeliest, Amount(float(chances[peak]), "share"), ")") if likeliest else ()),
        "; in all it lasts ",
        *ranged(Amount(site.dry_hours, "hours", 0), found.lasts),
        ".",
    )


def _longest(site: SiteTimeline, ranges: SiteRanges, zone: tzinfo) -> Words:
    """When the longest stretch begins and ends in the members that have it."""
    one = ranges.dry_wind.stretches[longest_of(site.dry_winds)]
    which = "It is" if len(site.dry_winds) == 1 else "The longest stretch is"
    start: Words = (f"{which} there in ", Amount(one.chance, "share"), " of the members")
    if one.onset is None or one.end is None:
        return (*start, ".")
    onset, end = between(one.onset, zone), between(one.end, zone)
    return (*start, f"; in eight tenths of these it begins {onset}, and ends {end}.")


def between(ends: MaybeEnds, zone: tzinfo) -> str:
    """When it is, between two times, in words and to ten minutes; one may lie before or after what can be judged.

    Parameters
    ----------
    ends : (float or None, float or None) [s]
    zone : tzinfo

    Returns
    -------
    str
    """
    low, high = (None if end is None else rounded_time(end, 0.0) for end in ends)
    if low is None and high is None:
        return "outside what can be judged"
    if low is None or high is None:
        return f"before {stamp(high, zone)}" if high is not None else f"after {stamp(low or 0.0, zone)}"
    first, last = (datetime.fromtimestamp(end, zone) for end in (low, high))
    if first.date() == last.date():
        return f"between {first:%H:%M} and {last:%H:%M} on {first.day} {month(first)} {first.year}"
    return f"between {stamp(low, zone)} and {stamp(high, zone)}"


def short_between(ends: MaybeEnds, zone: tzinfo) -> str:
    """The same in short, for a table.

    Parameters
    ----------
    ends : (float or None, float or None) [s]
    zone : tzinfo

    Returns
    -------
    str

    Examples
    --------
    >>> from datetime import UTC
    >>> short_between((1793741400.0, 1793745000.0), UTC), short_between((None, 1793745000.0), UTC)
    ('3 Nov 21:30 to 22:30', 'before 3 Nov 22:30')
    """
    first, last = (None if end is None else datetime.fromtimestamp(rounded_time(end, 0.0), zone) for end in ends)
    if first is None and last is None:
        return "outside what can be judged"
    if first is None or last is None:
        word, one = ("before", last) if first is None else ("after", first)
        return f"{word} {_short(one)}" if one is not None else ""
    same = first.date() == last.date()
    return f"{_short(first)} to {f'{last:%H:%M}' if same else _short(last)}"


def _short(time: datetime) -> str:
    return f"{time.day} {month(time)[:3]} {time:%H:%M}"
