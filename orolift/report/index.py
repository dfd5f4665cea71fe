"""The index of several reports: each linked, with its conclusion and key numbers beside those of the others."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING
from urllib.parse import quote

from orolift.report.briefing import briefing_heading
from orolift.report.key_numbers import blocked_with_range, gusts
from orolift.report.quantities import Amount, Units
from orolift.report.spans import Spans, ranged, span_of
from orolift.report.story import (
    fallen_share,
    is_blocked,
    line_view,
    rains,
    source_words,
)
from orolift.report.words import Words, counted, moment, sentence

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping
    from datetime import datetime

    from orolift.crossing.result import Crossing
    from orolift.spread.spread import Spread


@dataclass(frozen=True)
class Link:
    """A file beside the index.

    Attributes
    ----------
    name : str
        What it is.
    address : str
        Relative, ready for a link.
    """

    name: str
    address: str


@dataclass(frozen=True)
class Entry:
    """One report in the index.

    Attributes
    ----------
    title : str
    report : str
        Address of the page, relative.
    files : tuple of Link
        Of the same case, beside the page.
    valid : str
        In words; empty when the case names no time.
    heading : Words
        The conclusion of the report.
    doubts : str
        How many cautions of its own it has, in words; empty without one.
    site : str
        Its main site; the numbers that follow are those there.
    temperature : Words
        With its range.
    humidity : Amount
    wind : Amount or None
        At 10 m; None in air that stays.
    gusts, source : Words
        Empty where there are none.
    blocked, cloud : Words
        Top of the blocked air, and cloud base.
    fallen : Amount or None
        Share of the crossing vapour that falls; None without rain.
    spans : dict of str to Words
        Ranges of humidity, wind and share that falls.
    """

    title: str
    report: str
    files: tuple[Link, ...]
    valid: str
    heading: Words
    doubts: str
    site: str
    temperature: Words
    humidity: Amount
    wind: Amount | None
    gusts: Words
    source: Words
    blocked: Words
    cloud: Words
    fallen: Amount | None
    spans: dict[str, Words]


@dataclass(frozen=True)
class IndexPage:
    """Everything the index shows."""

    title: str
    made: str
    version: str
    units: Units
    heading: Words
    entries: tuple[Entry, ...]


def index_of(entries: Iterable[Entry], *, title: str, made_at: datetime, version: str, units: Units) -> IndexPage:
    """The index of some reports.

    Parameters
    ----------
    entries : iterable of Entry
        In the order they are shown in.
    title : str
    made_at : datetime
    version : str
        Of orolift.
    units : 'metric' or 'us'

    Returns
    -------
    IndexPage
    """
    found = tuple(entries)
    return IndexPage(
        title=title, made=moment(made_at), version=version, units=units, heading=_heading(found), entries=found
    )


def entry_of(
    crossing: Crossing,
    *,
    title: str,
    valid_time: datetime | None,
    report: str,
    files: Mapping[str, str],
    spread: Spread | None = None,
) -> Entry:
    """One report for the index.

    Parameters
    ----------
    crossing : Crossing
    title : str
    valid_time : datetime or None
    report : str
        Name of the page, beside the index.
    files : mapping of str to str
        Names of files beside the index, by what they are.
    spread : Spread, optional
        Members, for the ranges: those of the report.

    Returns
    -------
    Entry
    """
    line = line_view(crossing)
    spans = Spans(line, spread)
    site, base = spans.main, line.cloud.base
    humidity = Amount(site.relative_humidity, "share")
    wind = None if site.wind is None else Amount(site.wind.at_10m, "wind")
    fallen = Amount(fallen_share(line), "share") if rains(line) else None
    return Entry(
        title=title,
        report=quote(report),
        files=tuple(Link(name, quote(file)) for name, file in files.items()),
        valid="" if valid_time is None else moment(valid_time),
        heading=briefing_heading(spans),
        doubts=counted(len(crossing.cautions), "caution", "cautions").capitalize() if crossing.cautions else "",
        site=site.name,
        temperature=ranged(Amount(site.temperature, "temperature", 1), spans.temperature(site)),
        humidity=humidity,
        wind=wind,
        gusts=() if site.wind is None else gusts(spans, site.wind, site),
        source=source_words(site),
        blocked=blocked_with_range(spans) if is_blocked(line) else (),
        cloud=() if base is None else ranged(Amount(base, "height", -1), spans.of("cloud_base")),
        fallen=fallen,
        spans={
            "humidity": span_of(humidity, spans.at(site, "relative_humidity")),
            "wind": span_of(wind, spans.at(site, "wind_10m")),
            "fallen": span_of(fallen, spans.drying()),
        },
    )


def _heading(entries: tuple[Entry, ...]) -> Words:
    """What the reports say together: the coolest and the warmest main site."""
    count = counted(len(entries), "crossing", "crossings")
    if len(entries) < 2:
        return entries[0].heading if entries else ("No crossing",)
    coolest, warmest = min(entries, key=_temperature), max(entries, key=_temperature)
    names = {entry.site for entry in entries}
    where = names.pop() if len(names) == 1 else "the main sites"
    return (
        f"{sentence((count,))[0]}: {where} from ",
        *coolest.temperature,
        f" in “{coolest.title}” to ",
        *warmest.temperature,
        f" in “{warmest.title}”",
    )


def _temperature(entry: Entry) -> float:
    first = entry.temperature[0]
    return first.value if isinstance(first, Amount) else 0.0
