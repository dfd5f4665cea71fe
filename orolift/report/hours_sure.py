"""How sure a series of hours is: what the members say of each site, and what ranges and chances hold."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.report.hours_times import stamp
from orolift.report.hours_words import longest_of
from orolift.report.quantities import Amount
from orolift.report.spans import ranged
from orolift.report.words import rounded_time

if TYPE_CHECKING:
    from datetime import tzinfo

    from orolift.report.words import Words
    from orolift.spread.timeline import Hours, SiteTimeline
    from orolift.spread.timeline_members import SiteRanges

HOW_SURE = (
    (
        "Ranges hold 10 to 90 % of the members, in small figures and as bands. Each hour is worked out in every "
        "member, with its own draw of the incoming air, the options and the error of the method. A member is one "
        "story: what is too warm, too moist or too weak in it is so in every hour. Errors that change from hour to "
        "hour would leave single hours as uncertain as they are, and even out in sums and in stretches. "
        "A range is widened to the answer where that lies outside; files have it as it is."
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
    if ranges is None or ranges.dry_wind.ever is None:
        return ()
    out = [_at_all(site, ranges, ranges.dry_wind.ever, zone)]
    if site.dry_winds:
        out += _longest(site, ranges)
    if ranges.lost:
        out.append(
            ("In ", Amount(ranges.lost, "plain"), " hours some members could not be worked out; they count nowhere.")
        )
    for one, found in zip(site.thresholds, ranges.thresholds, strict=True):
        if not one.stretches and found.ever:
            share = Amount(found.ever, "share")
            out.append(
                (f"Threshold not met: {one.rule.name}; in ", share, " of the members it is, in one hour or more.")
            )
    return tuple(out)


def _at_all(site: SiteTimeline, ranges: SiteRanges, ever: float, zone: tzinfo) -> Words:
    """In how many members descending warm dry air comes at all, when most likely, and for how long."""
    found = ranges.dry_wind
    if ever == 0.0:
        return ("In none of ", Amount(ranges.members, "plain"), " members descending warm dry air comes.")
    likeliest = ""
    chances = np.nan_to_num(found.chance)
    peak = int(np.argmax(chances))
    if chances[peak] > 0.0:
        likeliest = f", most likely at {stamp(rounded_time(float(site.arrival[peak]), 0.0), zone)} ("
    return (
        "Descending warm dry air comes in ",
        Amount(ever, "share"),
        " of ",
        Amount(ranges.members, "plain"),
        " members",
        *((likeliest, Amount(float(chances[peak]), "share"), ")") if likeliest else ()),
        "; in all it lasts ",
        *ranged(Amount(site.dry_hours, "hours", 0), found.lasts),
        ".",
    )


def _longest(site: SiteTimeline, ranges: SiteRanges) -> tuple[Words, ...]:
    """In how many members the longest stretch is there, and what the times in brackets are."""
    one = ranges.dry_wind.stretches[longest_of(site.dry_winds)]
    if one.chance is None:
        return ()
    which = "This stretch is" if len(site.dry_winds) == 1 else "The longest stretch is"
    start: Words = (f"{which} there in ", Amount(one.chance, "share"), " of the members")
    if one.onset is None or one.end is None:
        return ((*start, "."),)
    return ((*start, "; the times in brackets hold onset and end in eight tenths of these."),)
