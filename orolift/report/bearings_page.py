"""The page of every wind direction as data: what each does to each site."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.bearings_sure import (
    HOW_MEMBERS,
    agreement_words,
    crossing_words,
    lost_words,
    though_words,
    with_range,
)
from orolift.report.cautions import ALWAYS, RANGE_OF_MEMBERS
from orolift.report.figures.roses import roses_figure
from orolift.report.hours_page import ONE_ANSWER
from orolift.report.quantities import Amount
from orolift.report.spans import span_of
from orolift.report.words import moment
from orolift.spread.state_ranges import chance_at, range_at

if TYPE_CHECKING:
    from datetime import datetime

    from orolift.report.figures.drawing import Figure
    from orolift.report.figures.roses import RosesDrawing
    from orolift.report.quantities import Kind, Units
    from orolift.report.words import Words
    from orolift.spread.bearings import Bearings, SiteBearings
    from orolift.spread.site_state import SiteState
    from orolift.spread.spread import Drawn

HPA = 100.0
"""Pascals in a hectopascal: drying is shown as hPa m/s, a unit that no kind of quantity has."""
NAMED = 4
"""Sites named one by one at the head of the page."""


NEAR = 1000.0
"""Distance [m] within which the highest ground before a site is its own and shelters nothing; a judgement."""


@dataclass(frozen=True)
class DirectionRow:
    """One wind direction at a site; None where there is no number.

    `crosses`, `wet` and `worst` are the shares of the members in which air crosses at all, it rains, and the direction
    is the worst for fire, None without members; `spans` has the ranges by field.
    """

    wind_from: Amount
    state: str
    shelter_height: Amount | None
    shelter_distance: Amount | None
    warming: Amount | None
    temperature: Amount | None
    relative_humidity: Amount | None
    wind_10m: Amount | None
    drying: Amount | None
    rain: Amount | None
    crosses: Amount | None
    wet: Amount | None
    worst: Amount | None
    spans: dict[str, Words]


@dataclass(frozen=True)
class SiteRoses:
    """One site on the page."""

    number: int
    name: str
    heading: Words
    sentences: tuple[Words, ...]
    figure: Figure[RosesDrawing]
    rows: tuple[DirectionRow, ...]


@dataclass(frozen=True)
class BearingsPage:
    """Everything the page of every wind direction shows.

    Attributes
    ----------
    title : str
    made : str
        In words.
    version : str
    units : 'metric' or 'us'
    given, step : Amount
        Direction of the case, and between two directions.
    members : int
        0 without.
    lead : tuple of Words
    sites : tuple of SiteRoses
    how : tuple of str
    cautions : tuple of Words
    notes : tuple of str
    """

    title: str
    made: str
    version: str
    units: Units
    given: Amount
    step: Amount
    members: int
    heading: Words
    lead: tuple[Words, ...]
    sites: tuple[SiteRoses, ...]
    how: tuple[str, ...]
    cautions: tuple[Words, ...]
    notes: tuple[str, ...]


HOW = (
    "Each direction is one crossing with the same column, all its winds turned together.",
    (
        "Worst for fire is the direction with the largest product of the vapour pressure deficit of the air at the "
        "site and the wind at 10 m there: what hot-dry-windy measures multiply (Srock et al. 2018), here at the "
        "ground. Directions in which a cold pool or blocked air lies at the site have no wind and do not count."
    ),
    "Best for rain is the direction with the most rain and snow at the site along its line.",
    "What shelters a site is the highest ground of its line before it, the mean across the swath where there is one.",
)
"""How directions are compared, for the page."""


def bearings_page(
    bearings: Bearings,
    *,
    title: str,
    made_at: datetime,
    version: str,
    notes: tuple[str, ...],
    drawn: Drawn | None = None,
    units: Units = "metric",
) -> BearingsPage:
    """The page of every wind direction.

    Parameters
    ----------
    bearings : Bearings
        With one direction at least.
    title : str
    made_at : datetime
    version : str
        Of orolift.
    notes : tuple of str
        What was assumed.
    drawn : Drawn, optional
        What the members were drawn from.
    units : 'metric' or 'us'

    Returns
    -------
    BearingsPage
    """
    first = bearings.sites[0]
    return BearingsPage(
        title=title,
        made=moment(made_at.astimezone(UTC)),
        version=version,
        units=units,
        given=Amount(bearings.given, "bearing"),
        step=Amount(bearings.step, "bearing"),
        members=0 if drawn is None else drawn.members,
        heading=_worst(first, bearings),
        lead=_lead(bearings),
        sites=tuple(_site(bearings, number, units) for number in range(len(bearings.sites))),
        how=HOW if drawn is None else (*HOW, *HOW_MEMBERS),
        cautions=(ALWAYS[0], *_doubts(bearings, drawn), *ALWAYS[1:]),
        notes=notes,
    )


def _doubts(bearings: Bearings, drawn: Drawn | None) -> tuple[Words, ...]:
    """What the ranges hold, and whether members are missing in them."""
    if drawn is None:
        return (ONE_ANSWER,)
    lost = lost_words(bearings)
    return ((RANGE_OF_MEMBERS,), lost) if lost else ((RANGE_OF_MEMBERS,),)


def _lead(bearings: Bearings) -> tuple[Words, ...]:
    out: list[Words] = []
    if bearings.interrupted:
        out.append(
            (
                "The work was interrupted: ",
                Amount(bearings.wind_from.size, "plain"),
                " of ",
                Amount(bearings.planned, "plain"),
                " directions are here.",
            )
        )
    if sure := agreement_words(bearings.sites[0], bearings):
        out.append(sure)
    out += [(*_worst(site, bearings), ".") for site in bearings.sites[1:NAMED]]
    if all(site.rain is None for site in bearings.sites):
        return (*out, ("No direction brings rain out of this air.",))
    out += [(*_rain(site, bearings), ".") for site in bearings.sites[:NAMED]]
    return tuple(out)


def _worst(site: SiteBearings, bearings: Bearings) -> Words:
    """The direction that is worst for fire, as a sentence without its full stop."""
    state = None if site.fire is None else site.states[site.fire]
    if site.fire is None or state is None or state.relative_humidity is None or state.wind_10m is None:
        return (f"No direction brings crossing air down to {site.name}",)
    return (
        f"Worst for fire at {site.name} is wind from ",
        Amount(float(bearings.wind_from[site.fire]), "bearing"),
        *though_words(site, bearings),
        ": humidity ",
        *with_range(Amount(state.relative_humidity, "share"), state, "relative_humidity"),
        ", wind ",
        *with_range(Amount(state.wind_10m, "wind", 0), state, "wind_10m"),
        " at 10 m",
    )


def _rain(site: SiteBearings, bearings: Bearings) -> Words:
    state = None if site.rain is None else site.states[site.rain]
    if site.rain is None or state is None or state.rain is None:
        return (f"No direction brings rain to {site.name} out of this air",)
    return (
        f"Most rain falls at {site.name} with wind from ",
        Amount(float(bearings.wind_from[site.rain]), "bearing"),
        ": ",
        *with_range(Amount(state.rain, "rain_rate", 1), state, "rain"),
    )


def _site(bearings: Bearings, number: int, units: Units) -> SiteRoses:
    site = bearings.sites[number]
    return SiteRoses(
        number=number + 1,
        name=site.name,
        heading=_warmest(site, bearings),
        sentences=_sentences(site, bearings),
        figure=roses_figure(bearings, number, units),
        rows=tuple(_row(bearings, site, i) for i in range(len(site.states))),
    )


def _warmest(site: SiteBearings, bearings: Bearings) -> Words:
    """From where the site is warmed most, and behind what ground, as a sentence without its full stop."""
    state = None if site.warmest is None else site.states[site.warmest]
    if site.warmest is None or state is None or state.warming is None:
        return (f"No air crosses to {site.name}",)
    if state.warming <= 0.0 or state.shelter_height is None or state.shelter_distance is None:
        return (f"No direction warms {site.name}",)
    behind: Words = (
        ", ",
        Amount(state.shelter_distance, "distance"),
        " behind ground of ",
        Amount(state.shelter_height, "height"),
    )
    if state.shelter_distance < NEAR:
        behind = (", with no higher ground before it",)
    return (
        f"{site.name} warms most with wind from ",
        Amount(float(bearings.wind_from[site.warmest]), "bearing"),
        ": by ",
        *with_range(Amount(state.warming, "temperature_difference", 1), state, "warming"),
        *behind,
    )


def _sentences(site: SiteBearings, bearings: Bearings) -> tuple[Words, ...]:
    out: list[Words] = [(*_worst(site, bearings), "."), (*_rain(site, bearings), ".")]
    out += [words for words in (agreement_words(site, bearings), crossing_words(site)) if words]
    return tuple(out)


def _row(bearings: Bearings, site: SiteBearings, number: int) -> DirectionRow:
    state = site.states[number]
    worst = np.nan if site.worst is None else float(site.worst[number])

    def amount(value: float | None, kind: Kind, digits: int) -> Amount | None:
        return None if value is None else Amount(value, kind, digits)

    drying = None if state.drying_power is None else state.drying_power / HPA
    shown = {
        "warming": amount(state.warming, "temperature_change", 1),
        "temperature": amount(state.temperature, "temperature", 0),
        "relative_humidity": amount(state.relative_humidity, "share", 0),
        "wind_10m": amount(state.wind_10m, "wind", 0),
        "rain": amount(state.rain, "rain_rate", 1),
    }
    spans = {name: span_of(like, range_at(state, name)) for name, like in shown.items() if like is not None}
    if drying is not None and (ends := range_at(state, "drying_power")) is not None:
        spans["drying"] = span_of(Amount(drying, "plain"), (ends[0] / HPA, ends[1] / HPA))
    return DirectionRow(
        wind_from=Amount(float(bearings.wind_from[number]), "bearing"),
        state=_words(state),
        shelter_height=amount(state.shelter_height, "height", 0),
        shelter_distance=amount(state.shelter_distance, "distance", 0),
        drying=amount(drying, "plain", 0),
        crosses=amount(chance_at(state, "crosses"), "share", 0),
        wet=amount(chance_at(state, "rain"), "share", 0),
        worst=amount(None if np.isnan(worst) else worst, "share", 0),
        spans=spans,
        **shown,
    )


def _words(state: SiteState) -> str:
    if state.status == "missing":
        return "no line: the map ends or is flat"
    if state.status == "no crossing":
        return "no air crosses"
    return "descending, warm, dry" if state.descending else str(state.side)
