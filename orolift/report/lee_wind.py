"""The wind in the lee: how strong by several methods, at the sites, and what favours a downslope windstorm."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.how_sure import span_words
from orolift.report.quantities import Amount
from orolift.report.spans import ranged, second_line
from orolift.report.story import where_words
from orolift.report.words import counted
from orolift.spread.ranges import chance_of, share_of_members

if TYPE_CHECKING:
    from orolift.crossing.result import LeeAir
    from orolift.flow.windstorm import Condition
    from orolift.report.spans import Spans
    from orolift.report.words import Words
    from orolift.spread.spread import Spread

ANSWERS = {True: "yes", False: "no", None: "not known"}
KINDS = {
    "estimate": "an estimate",
    "upper end": "may be reached",
    "limit": "cannot be passed",
}

MANY = 0.1
"""Share of the members from which on a doubt about their winds is told; a judgement."""


@dataclass(frozen=True)
class MethodRow:
    """One method's wind in the lee.

    Attributes
    ----------
    method : str
    wind : Amount
    what : str
        An estimate, what may be reached or what cannot be passed.
    source : str
    applies : Amount or None
        Share of the members in which the method applies.
    spans : dict of str to Words
        Range of the wind over those members, by the inputs alone.
    """

    method: str
    wind: Amount
    what: str
    source: str
    applies: Amount | None
    spans: dict[str, Words]


@dataclass(frozen=True)
class WindRow:
    """The wind at one site; None where no crossing air blows.

    Attributes
    ----------
    number : int
    name, side : str
    remark : str
        Why there is none, else empty.
    wind : Amount or None
        In the lowest 300 m.
    methods : Words
        From the least to the most by all methods, for the air as given.
    at_10m : Amount or None
    gusts : Words
        From the least to the most by their law, for the air as given.
    spans : dict of str to Words
        Ranges of the members, with that of the methods and of the law.
    """

    number: int
    name: str
    side: str
    remark: str
    wind: Amount | None
    methods: Words
    at_10m: Amount | None
    gusts: Words
    spans: dict[str, Words]


@dataclass(frozen=True)
class ConditionRow:
    """One condition that favours a downslope windstorm, whether it holds, and in what share of the members it does."""

    statement: str
    holds: str
    source: str
    chance: Amount | None


@dataclass(frozen=True)
class LeeWind:
    """A conclusion, how to read it, what is doubtful about the members; then methods, sites and conditions."""

    heading: Words
    remarks: tuple[Words, ...]
    doubt: Words
    methods: tuple[MethodRow, ...]
    sites: tuple[WindRow, ...]
    conditions: tuple[ConditionRow, ...]
    has_members: bool


def lee_wind(spans: Spans, sites: tuple[LeeAir, ...] | None = None) -> LeeWind:
    """The wind in the lee.

    Parameters
    ----------
    spans : Spans
        Of the crossing.
    sites : tuple of LeeAir, optional
        Those that the table holds; all when left out.

    Returns
    -------
    LeeWind
    """
    winds = spans.crossing.winds
    what = "this page", "linear waves of the layered column"
    first = _method("spacing of the streamlines", winds.strongest, *what, spans, "lee_wind")
    others = tuple(
        _method(one.method, one.wind, KINDS[one.kind], one.source, spans, f"lee_wind_{one.key}")
        for one in winds.estimates
    )
    return LeeWind(
        heading=_heading(spans),
        remarks=_remarks(spans),
        doubt=_beyond_pressure(spans),
        methods=(first, *others),
        sites=tuple(_row(site, spans) for site in sites or spans.crossing.lee),
        conditions=tuple(_condition(one, spans.spread) for one in winds.conditions),
        has_members=_has_members(spans),
    )


def _has_members(spans: Spans) -> bool:
    return spans.spread is not None and bool(spans.spread.crosses.any())


def _method(method: str, wind: float, what: str, source: str, spans: Spans, key: str) -> MethodRow:
    applies = share_of_members(spans.spread, key)
    return MethodRow(
        method=method,
        wind=Amount(wind, "wind_alone"),
        what=what,
        source=source,
        applies=None if applies is None else Amount(applies, "share"),
        spans={"wind": second_line(Amount(wind, "wind_alone"), spans.of(key, inputs_only=True))},
    )


def _condition(one: Condition, spread: Spread | None) -> ConditionRow:
    chance = None
    if spread is not None and f"windstorm_{one.key}" in spread.values:
        chance = chance_of(spread.values[f"windstorm_{one.key}"])
    return ConditionRow(
        one.statement, ANSWERS[one.met], one.source, None if chance is None else Amount(chance, "share")
    )


def range_words(low: float, high: float) -> Words:
    """A range of wind, or nothing when its ends read alike."""
    if round(low) == round(high):
        return ()
    return (Amount(low, "wind", bare=True), " to ", Amount(high, "wind"))


def _heading(spans: Spans) -> Words:
    winds = spans.crossing.winds
    met = sum(one.met is True for one in winds.conditions)
    verb = "holds" if met == 1 else "hold"
    return (
        "The wind down the lee reaches ",
        *ranged(Amount(winds.strongest, "wind"), spans.of("lee_wind")),
        f"; {_number(met)} of {_number(len(winds.conditions))} conditions for a windstorm {verb}",
    )


def _number(count: int) -> str:
    """A number in words."""
    return counted(count, "", "").strip()


def _remarks(spans: Spans) -> tuple[Words, ...]:
    crossing = spans.crossing
    gusts = (
        "; gusts are the mean with 2.5 to 3.5 standard deviations of turbulence, or the strongest wind of the lowest "
        "1 km brought down whole where that is more."
    )
    start = "Wind at 10 m by the logarithmic law over ground of roughness length "
    roughness: Words = (start, Amount(crossing.settings.roughness, "height", 2), gusts)
    drop = crossing.flow.pressure_difference
    lower = ranged(
        Amount(abs(drop), "pressure_difference", 1), _either_way(spans.of("pressure_difference"), lower=drop > 0.0)
    )
    pressure = (
        "The pressure at the height of the lee foot is ",
        *lower,
        " lower in the lee than in the incoming air." if drop > 0.0 else " higher in the lee than in the incoming air.",
    )
    return (_where(spans), *_members(spans), roughness, pressure)


def _where(spans: Spans) -> Words:
    """What the strongest wind is, where it blows, and what the methods make of it."""
    winds, origin = spans.crossing.winds, spans.crossing.transect.origin
    ends = spans.of("lee_wind_distance")
    place = None if ends is None else (ends[0] + origin, ends[1] + origin)
    where: Words = (
        "That is a mean over the lowest 300 m and over 5 km along the slope, at ",
        *ranged(Amount(winds.strongest_distance + origin, "distance", 1), place),
        " on the line. ",
    )
    span = range_words(winds.low, winds.high)
    if not span:
        return (*where, "The methods agree.")
    return (
        *where,
        "For the air as given the methods together span ",
        *span,
        "; at the sites this range is taken in proportion.",
    )


def _members(spans: Spans) -> tuple[Words, ...]:
    """How the range of the members stands to that of the methods, and how many conditions hold in them."""
    if not _has_members(spans):
        return ()
    both = (
        "A range in brackets, or in the second line of a cell on wind at the sites, is that of the middle eight tenths "
        "of the members, with the doubt between the methods. In the table of methods the second line is by the doubt "
        "about the air alone."
    )
    strongest, alone = spans.crossing.winds.strongest, spans.of("lee_wind", inputs_only=True)
    words: Words = (both,)
    if alone is not None:
        ends = min(alone[0], strongest), max(alone[1], strongest)
        words = (*words, " That doubt leaves a strongest wind of ", *span_words("wind_alone", 0, ends), ".")
    held = spans.of("windstorm_conditions")
    if held is not None:
        least, most = (_number(round(end)) for end in held)
        joint = "or" if round(held[1]) - round(held[0]) == 1 else "to"
        many = least if least == most else f"{least} {joint} {most}"
        words = (*words, f" In eight tenths of the members {many} of the conditions for a windstorm hold.")
    return (words,)


def _beyond_pressure(spans: Spans) -> Words:
    """A doubt where the streamlines of many members give more wind than their fall of pressure drives."""
    values = {} if spans.spread is None else spans.spread.values
    if not {"lee_wind", "lee_wind_fall_of_pressure"} <= values.keys():
        return ()
    wind, limit = values["lee_wind"], values["lee_wind_fall_of_pressure"]
    share = chance_of(np.where(np.isfinite(wind - limit), wind > limit, np.nan))
    if share is None or share < MANY:
        return ()
    told = (
        " of the members the spacing of the streamlines gives more wind than the fall of pressure across the range can "
        "drive: take the upper end of the range with doubt."
    )
    return ("In ", Amount(share, "share"), told)


def _either_way(ends: tuple[float, float] | None, *, lower: bool) -> tuple[float, float] | None:
    """Ends of a fall of pressure as it is told: as a fall or as a rise."""
    return ends if ends is None or lower else (-ends[1], -ends[0])


def _row(site: LeeAir, spans: Spans) -> WindRow:
    wind = site.wind
    nothing = WindRow(site.number, site.name, site.side, where_words(site), None, (), None, (), {})
    if wind is None:
        return nothing
    return replace(
        nothing,
        wind=Amount(wind.wind, "wind_alone"),
        methods=_bare(wind.low, wind.high),
        at_10m=Amount(wind.at_10m, "wind_alone"),
        gusts=_bare(wind.gust_low, wind.gust_high),
        spans={
            column: second_line(Amount(value, "wind_alone"), spans.at(site, name))
            for column, name, value in (
                ("wind", "wind", wind.wind),
                ("at_10m", "wind_10m", wind.at_10m),
                ("gusts", "gust", 0.5 * (wind.gust_low + wind.gust_high)),
            )
        },
    )


def _bare(low: float, high: float) -> Words:
    """From the least to the most, for a column whose head names the unit."""
    least, most = (Amount(end, "wind_alone", bare=True) for end in (low, high))
    return (least,) if round(low) == round(high) else (least, " to ", most)
