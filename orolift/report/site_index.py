"""The index of a page that holds many crossings: the files linked, and the key numbers of each site."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING
from urllib.parse import quote

from orolift.report.bearings_sure import with_range
from orolift.report.hours_times import times_of
from orolift.report.hours_words import longest_of
from orolift.report.index import Link
from orolift.report.quantities import Amount
from orolift.report.words import counted

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping
    from datetime import tzinfo

    from orolift.report.bearings_page import BearingsPage
    from orolift.report.hours_page import HoursPage
    from orolift.report.quantities import Units
    from orolift.report.words import Words
    from orolift.spread.bearings import Bearings, SiteBearings
    from orolift.spread.site_state import SiteState
    from orolift.spread.timeline import Hours, SiteTimeline


@dataclass(frozen=True)
class Linked:
    """The page in the index, with the fields that `orolift.report.index.Entry` has for it.

    Attributes
    ----------
    title : str
    report : str
        Address of the page, relative.
    files : tuple of Link
    valid : str
        The time it covers, in words; may be empty.
    heading : Words
        Empty: it is that of the index.
    doubts : str
        Empty.
    """

    title: str
    report: str
    files: tuple[Link, ...]
    valid: str = ""
    heading: Words = ()
    doubts: str = ""


@dataclass(frozen=True)
class SiteRow:
    """Key numbers of a site.

    Attributes
    ----------
    name : str
    address : str
        Of its part of the page, relative.
    cells : tuple of Words
        In the order of the columns.
    """

    name: str
    address: str
    cells: tuple[Words, ...]


@dataclass(frozen=True)
class SiteIndex:
    """Everything the index of one page shows."""

    title: str
    made: str
    version: str
    units: Units
    heading: Words
    dangers: tuple[Words, ...]
    lead: tuple[Words, ...]
    entries: tuple[Linked, ...]
    caption: str
    columns: tuple[str, ...]
    rows: tuple[SiteRow, ...]


def hours_index(hours: Hours, page: HoursPage, zone: tzinfo, *, report: str, files: Mapping[str, str]) -> SiteIndex:
    """The index of the page of a series.

    Parameters
    ----------
    hours : Hours
    page : HoursPage
        Made from them.
    zone : tzinfo
        In which times are said.
    report : str
        Name of the page, beside the index.
    files : mapping of str to str
        Names of files beside the index, by what they are.

    Returns
    -------
    SiteIndex
    """
    return SiteIndex(
        title=f"{page.title}: hour by hour",
        made=page.made,
        version=page.version,
        units=page.units,
        heading=page.heading,
        dangers=page.dangers,
        lead=page.lead[:1] if hours.interrupted else (),
        entries=(Linked("Every hour", quote(report), _links(files), f"{page.span}, {page.zone}"),),
        caption=(
            f"Each site; onset and end are those of the longest descending warm dry air, with 10 to 90 % of members "
            f"or else one standard deviation; times in {page.zone}; a threshold met is not a warning"
        ),
        columns=("Hours that cross", "Descending warm dry air", "Onset", "End", "Thresholds met"),
        rows=_rows(report, [(site.name, _hours_cells(site, zone)) for site in hours.sites]),
    )


def bearings_index(bearings: Bearings, page: BearingsPage, *, report: str, files: Mapping[str, str]) -> SiteIndex:
    """The index of the page of every wind direction.

    Parameters
    ----------
    bearings : Bearings
    page : BearingsPage
        Made from them.
    report : str
        Name of the page, beside the index.
    files : mapping of str to str
        Names of files beside the index, by what they are.

    Returns
    -------
    SiteIndex
    """
    return SiteIndex(
        title=page.title,
        made=page.made,
        version=page.version,
        units=page.units,
        heading=page.heading,
        dangers=(),
        lead=page.lead[:1] if bearings.interrupted else (),
        entries=(Linked("Every wind direction", quote(report), _links(files)),),
        caption="Each site; the direction the wind comes from, and what it brings; wind is that at 10 m",
        columns=("Directions that cross", "Warmest", "Worst for fire", "Best for rain"),
        rows=_rows(report, [(site.name, _bearings_cells(site, bearings)) for site in bearings.sites]),
    )


def _links(files: Mapping[str, str]) -> tuple[Link, ...]:
    return tuple(Link(name, quote(file)) for name, file in files.items())


def _rows(report: str, sites: list[tuple[str, tuple[Words, ...]]]) -> tuple[SiteRow, ...]:
    return tuple(
        SiteRow(name, f"{quote(report)}#site-{number}", cells) for number, (name, cells) in enumerate(sites, start=1)
    )


def _share(part: int, whole: int) -> Words:
    return (Amount(part, "plain"), " of ", Amount(whole, "plain"))


def _hours_cells(site: SiteTimeline, zone: tzinfo) -> tuple[Words, ...]:
    """How many hours cross, when descending warm dry air is there, and which thresholds are met."""
    ranges = site.ranges
    met = [one.rule.name for one in site.thresholds if one.stretches]
    ever = None if ranges is None else ranges.dry_wind.ever
    likely: Words = () if ever is None else ("; any in ", Amount(ever, "share"), " of the members")
    named: Words = ("; ".join(met) if met else "none" if site.thresholds else "none given",)
    crossing = _share(site.crossing_hours, len(site.states))
    if not site.dry_winds:
        return crossing, ("none", *likely), (), (), named
    longest = longest_of(site.dry_winds)
    members = None if ranges is None else ranges.dry_wind.stretches[longest]
    onset, end = times_of(site.dry_winds[longest], members, zone)
    return (
        crossing,
        (counted(len(site.dry_winds), "time", "times"), *likely),
        onset or ("before what can be judged",),
        end or ("after what can be judged",),
        named,
    )


def _bearings_cells(site: SiteBearings, bearings: Bearings) -> tuple[Words, ...]:
    """From how many directions air crosses, and which is warmest, worst for fire and best for rain."""
    sure = site.agreement
    crossing = sum(state.status == "crossing" for state in site.states)
    return (
        _share(crossing, len(site.states)),
        _direction(site.warmest, site, bearings, _warming, None if sure is None else sure.warmest),
        _direction(site.fire, site, bearings, _drying, None if sure is None else sure.fire),
        _direction(site.rain, site, bearings, _rain, None if sure is None else sure.rain),
    )


def _direction(
    number: int | None,
    site: SiteBearings,
    bearings: Bearings,
    brought: Callable[[SiteState], Words],
    agree: float | None,
) -> Words:
    """A direction, how many members agree on it, and what it brings; none where it brings nothing."""
    words = () if number is None else brought(site.states[number])
    if number is None or not words:
        return ("none",)
    sure: Words = () if agree is None else (" (", Amount(agree, "share"), " of members)")
    return (Amount(float(bearings.wind_from[number]), "bearing"), *sure, ": ", *words)


def _warming(state: SiteState) -> Words:
    if state.warming is None or state.warming <= 0.0:
        return ()
    return ("warmer by ", *with_range(Amount(state.warming, "temperature_difference", 1), state, "warming"))


def _drying(state: SiteState) -> Words:
    if state.relative_humidity is None or state.wind_10m is None:
        return ()
    humidity, wind = Amount(state.relative_humidity, "share"), Amount(state.wind_10m, "wind", 0)
    return (
        "humidity ",
        *with_range(humidity, state, "relative_humidity"),
        ", wind ",
        *with_range(wind, state, "wind_10m"),
    )


def _rain(state: SiteState) -> Words:
    return () if state.rain is None else with_range(Amount(state.rain, "rain_rate", 1), state, "rain")
