"""What is said of a series of hours: what each site gets and when."""

from __future__ import annotations

from typing import TYPE_CHECKING

from orolift.report.hours_times import times_of
from orolift.report.quantities import Amount
from orolift.report.spans import ranged
from orolift.report.words import counted

if TYPE_CHECKING:
    from collections.abc import Sequence
    from datetime import tzinfo

    from orolift.report.words import Words
    from orolift.spread.stretches import Stretch
    from orolift.spread.timeline import Hours, SiteTimeline
    from orolift.spread.timeline_members import StretchRange

LEAST_RAIN = 0.1
"""Rain [kg m-2] below which none is said to fall."""
MENTIONED_RAIN = 0.5
"""Rain [kg m-2] from which on the heading has it; it reads as 1 mm."""
LIKELY = 0.5
"""Chance from which on a threshold is named at the head though the answer does not meet it; a judgement."""
NAMED = 4
"""Sites named one by one at the head of the page."""


def heading(hours: Hours) -> Words:
    """The whole series in a line.

    Parameters
    ----------
    hours : Hours

    Returns
    -------
    Words
    """
    sites = len(hours.sites)
    dry = sum(bool(site.dry_winds) for site in hours.sites)
    wettest = max(hours.sites, key=lambda site: site.rain)
    where = f"{counted(dry, 'site has', 'sites have')} descending warm dry air"
    if not dry:
        where = "no descending warm dry air"
    elif sites == 1:
        where = "descending warm dry air comes through"
    elif dry == sites:
        where = "descending warm dry air at every site"
    ends = total_rain(wettest)
    wet: Words = (", and no rain",)
    if wettest.rain >= MENTIONED_RAIN:
        where_most = " of rain" if sites == 1 else f" of rain at {wettest.name}, the most"
        wet = (", and ", *ranged(Amount(wettest.rain, "water_depth", 0), ends), where_most)
    elif ends is not None and ends[1] >= MENTIONED_RAIN:
        wet = (", and hardly any rain",)
    return (f"{where[:1].upper()}{where[1:]}", *wet)


def lead(hours: Hours, zone: tzinfo) -> tuple[Words, ...]:
    """What to know first: at the first sites, and where most rain falls.

    Parameters
    ----------
    hours : Hours
    zone : tzinfo
        In which times are said.

    Returns
    -------
    tuple of Words
    """
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
    out += [(*outcome(site, zone), *_as_likely(_longest(site)), ".") for site in hours.sites[:NAMED]]
    if len(hours.sites) > NAMED:
        more = len(hours.sites) - NAMED
        out.append((f"{counted(more, 'more site follows', 'more sites follow')} below.".capitalize(),))
    out += [words for site in hours.sites[:NAMED] for words in likely_all_the_same(site)]
    wettest = max(hours.sites, key=lambda site: site.rain)
    if wettest.rain >= LEAST_RAIN:
        rain = ranged(Amount(wettest.rain, "water_depth", 0), total_rain(wettest))
        out.append((f"Most rain falls at {wettest.name}: ", *rain, " in all."))
    return tuple(out)


def outcome(site: SiteTimeline, zone: tzinfo) -> Words:
    """What happens at a site, as a sentence without its full stop.

    Parameters
    ----------
    site : SiteTimeline
    zone : tzinfo
        In which times are said.

    Returns
    -------
    Words
    """
    found = site.dry_winds
    if not site.crossing_hours:
        return (f"No air crosses to {site.name} in these hours",)
    if not found:
        return (f"No descending warm dry air reaches {site.name}",)
    when = _from_to(found[longest_of(found)], _longest(site), zone)
    if len(found) == 1:
        return (f"Descending warm dry air is at {site.name} ", *when)
    times = counted(len(found), "time", "times")
    return (f"Descending warm dry air comes to {site.name} {times}, longest ", *when)


def likely_all_the_same(site: SiteTimeline) -> tuple[Words, ...]:
    """Thresholds that the answer does not meet at a site, and half of its members or more do in an hour or more.

    Parameters
    ----------
    site : SiteTimeline

    Returns
    -------
    tuple of Words
        A sentence for each; none without members.
    """
    found = () if site.ranges is None else site.ranges.thresholds
    return tuple(
        (
            f"Threshold not met at {site.name}: {one.rule.name}, but in ",
            Amount(members.ever, "share"),
            " of the members.",
        )
        for one, members in zip(site.thresholds, found, strict=False)
        if not one.stretches and members.ever is not None and members.ever >= LIKELY
    )


def longest_of(found: Sequence[Stretch]) -> int:
    """Number of the longest of some stretches, the first of several."""
    return max(range(len(found)), key=lambda i: found[i].last - found[i].first)


def _longest(site: SiteTimeline) -> StretchRange | None:
    """The longest stretch of descending warm dry air in the members; None without one or without members."""
    if site.ranges is None or not site.dry_winds:
        return None
    return site.ranges.dry_wind.stretches[longest_of(site.dry_winds)]


def _as_likely(members: StretchRange | None) -> Words:
    """In how many members something holds in a stretch too; nothing without members."""
    if members is None or members.chance is None:
        return ()
    return ("; in ", Amount(members.chance, "share"), " of the members")


def total_rain(site: SiteTimeline) -> tuple[float, float] | None:
    """Range of the rain of all hours at a site; None without members."""
    return None if site.ranges is None else site.ranges.total_rain


def _rain(site: SiteTimeline) -> Words:
    """How much rain falls at a site, to the end of the sentence."""
    ends = total_rain(site)
    if site.rain >= LEAST_RAIN:
        amount = ranged(Amount(site.rain, "water_depth", 1), ends)
        return ("; ", *amount, " of rain and snow fall in the hours that cross.")
    if ends is not None and ends[1] >= LEAST_RAIN:
        return (
            "; hardly any rain falls, and in nine tenths of the members at most ",
            Amount(ends[1], "water_depth", 1),
            ".",
        )
    return ("; no rain to speak of falls.",)


def _from_to(one: Stretch, members: StretchRange | None, zone: tzinfo) -> Words:
    """From when to when."""
    onset, end = times_of(one, members, zone)
    return (
        *(("from the first hour that can be judged",) if onset is None else ("from ", *onset)),
        *((" to the last that can be judged",) if end is None else (" to ", *end)),
    )


def dangers(site: SiteTimeline, zone: tzinfo) -> tuple[Words, ...]:
    """Thresholds of the region that are met, and when.

    Parameters
    ----------
    site : SiteTimeline
    zone : tzinfo
        In which times are said.

    Returns
    -------
    tuple of Words
        A sentence for each that is met.
    """
    out: list[Words] = []
    for number, one in enumerate(site.thresholds):
        found = one.stretches
        if not found:
            continue
        longest = longest_of(found)
        members = None if site.ranges is None else site.ranges.thresholds[number].stretches[longest]
        often = "" if len(found) == 1 else f" {counted(len(found), 'time', 'times')}, longest"
        start = f"Threshold met at {site.name}: {one.rule.name},{often} "
        out.append((start, *_from_to(found[longest], members, zone), *_as_likely(members), "."))
    return tuple(out)


def counts(site: SiteTimeline) -> tuple[Words, ...]:
    """How many hours cross, what the others are, and how much rain falls.

    Parameters
    ----------
    site : SiteTimeline

    Returns
    -------
    tuple of Words
    """
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
            *((", and ", Amount(missing, "plain"), f" {'is' if missing == 1 else 'are'} missing") if missing else ()),
            *_rain(site),
        )
    ]
    reasons = [state.reason for state in site.states if state.status == "missing" and state.reason]
    if reasons:
        out.append((f"The first that is missing: {reasons[0]}",))
    if site.overtaken:
        out.append((Amount(site.overtaken, "plain"), " hours of air are caught up by faster air behind them."))
    return tuple(out)
