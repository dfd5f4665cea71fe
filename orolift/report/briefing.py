"""What to say in the briefing: the flow, the air at the main site, its wind."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.report.causes import cause_noun, main_cause, plain_end
from orolift.report.key_numbers import (
    KeyNumber,
    before,
    blocked_with_range,
    gusts,
    key_numbers,
    nondimensional_words,
    pool_top,
)
from orolift.report.lee_wind import range_words
from orolift.report.quantities import NO_BREAK_SPACE, Amount
from orolift.report.spans import Spans, changed, inside, ranged
from orolift.report.story import (
    ROUNDING,
    SAME,
    fallen_share,
    falling,
    is_blocked,
    main_site,
    rains,
    reaches_the_ground_or_not,
    regime_words,
    source_words,
    starts_saturated,
)
from orolift.report.words import Words, fraction_in_words, point_of_compass

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing, LeeAir


LEAST_SHARE = 0.005
"""A share below this reads as none."""


@dataclass(frozen=True)
class Briefing:
    """The first thing on the page.

    Attributes
    ----------
    heading : Words
    sentences : tuple of Words
    key_numbers : tuple of KeyNumber
    doubts : tuple of str
        What makes this case doubtful, as the crossing says it.
    """

    heading: Words
    sentences: tuple[Words, ...]
    key_numbers: tuple[KeyNumber, ...]
    doubts: tuple[str, ...]


def briefing(crossing: Crossing, bearing: float, freezing_level: float, spans: Spans | None = None) -> Briefing:
    """The briefing of a crossing.

    Parameters
    ----------
    crossing : Crossing
    bearing : float [rad]
        Direction the wind comes from.
    freezing_level : float [m]
        Of the incoming air.
    spans : Spans, optional
        Ranges; without them the ends of blocking.

    Returns
    -------
    Briefing
    """
    site = main_site(crossing)
    spans = spans or Spans(crossing, None)
    both = (_both_answers(spans, site),) if reaches_the_ground_or_not(crossing, site) else ()
    return Briefing(
        heading=briefing_heading(spans),
        sentences=(
            *both,
            (*_flow(spans, bearing), " ", *_cloud(spans)),
            _lee(spans, site),
            _wind(spans, site),
        ),
        key_numbers=key_numbers(spans, site, freezing_level),
        doubts=crossing.cautions,
    )


def briefing_heading(spans: Spans) -> Words:
    """The conclusion of a crossing in one line.

    Parameters
    ----------
    spans : Spans

    Returns
    -------
    Words
    """
    crossing, site = spans.crossing, spans.main
    here = ranged(Amount(site.temperature, "temperature", 1), spans.temperature(site))
    if site.in_pool and crossing.pool is not None:
        return (
            "A cold pool up to ",
            *pool_top(spans, crossing.pool),
            f" keeps {site.name} at ",
            *here,
            "; the crossing air passes over it",
        )
    if reaches_the_ground_or_not(crossing, site):
        cold = before(spans, site)
        return (f"{site.name}: ", *here, " if the air breaks through, about ", *cold, " if a cold pool stays")
    if site.in_blocked_air:
        return ("Low air is blocked up to ", *blocked_with_range(spans), f"; {site.name} lies in it, at ", *here)
    change = changed(
        site.warming,
        spans.warming(site),
        "warmer than the incoming air",
        "cooler than the incoming air",
        "as the incoming air",
    )
    return (*_flow_clause(spans), f"; {site.name} has ", *here, ", ", *change)


def _flow_clause(spans: Spans) -> Words:
    """The flow in a few words."""
    crossing = spans.crossing
    if is_blocked(crossing):
        return ("Low air is blocked up to ", *blocked_with_range(spans))
    if rains(crossing):
        return (
            f"The air flows over and {fraction_in_words(fallen_share(crossing))} of its vapour {falling(crossing)}",
        )
    return ("The air flows over without rain",)


def _both_answers(spans: Spans, site: LeeAir) -> Words:
    """Both answers where nothing is known of the air in the lee."""
    crossing = spans.crossing
    return (
        "Nothing is known of the air lying in the lee; the chance that the crossing air reaches the ground is put at ",
        Amount(crossing.flow.break_through_chance, "share"),
        " (by hour and wind). If it breaks through, ",
        f"{site.name} gets ",
        *ranged(Amount(site.temperature, "temperature", 1), spans.temperature(site)),
        "; if a cold pool stays, it keeps roughly the temperature of the incoming air at its height, ",
        *before(spans, site),
        ".",
    )


def _flow(spans: Spans, bearing: float) -> Words:
    """Wind, regime and what is blocked."""
    crossing = spans.crossing
    flow = crossing.flow
    start: Words = (
        f"Air from the {point_of_compass(bearing)} (",
        Amount(bearing, "bearing"),
        ") meets the crest at ",
        Amount(crossing.features.crest, "height"),
        " with ",
        *ranged(Amount(flow.crest_wind, "wind"), spans.of("cross_range_wind")),
        f" across it: N{NO_BREAK_SPACE}h/U is ",
        *nondimensional_words(spans),
        f", so the flow {_CERTAIN.get(regime_words(crossing), flow.regime)}",
    )
    others = [_POSSIBLE.get(one, one) for one in flow.possible_regimes if one != flow.regime]
    if others:
        start = (*start, f"; within the uncertainty it may also {' or '.join(others)}")
    if not is_blocked(crossing):
        return (*start, *_unblocked(spans))
    share, ends = flow.going_round_share, spans.of("going_round_share")
    round_words: Words = (", and none of it comes through gaps or round the ends ",)
    if share > 0.0 or (ends is not None and ends[1] > LEAST_SHARE):
        round_words = (
            "; of the low air behind the range ",
            *ranged(Amount(share, "share"), ends),
            " comes through gaps or round the ends ",
        )
    return (
        *start,
        ". Air below ",
        *blocked_with_range(spans),
        " is stopped",
        *round_words,
        f"({flow.going_round_source}).",
    )


_CERTAIN = {
    "flows over": "goes over",
    "flows over with steep waves": "goes over with steep waves",
    "partly blocked": "is partly blocked",
    "blocked": "is blocked",
    "close to blocked": "is close to being blocked",
}
_POSSIBLE = {
    "flows over": "go over quietly",
    "flows over with steep waves": "go over with steep waves",
    "partly blocked": "be partly blocked",
    "blocked": "be blocked",
}


def _unblocked(spans: Spans) -> Words:
    """That nothing is blocked, and how far the range of that reaches."""
    _, high = spans.blocked_top() or (0.0, 0.0)
    if high > spans.crossing.features.base + ROUNDING:
        return (". No layer is stopped, at most the air below ", Amount(high, "height", -1), ".")
    return (". No layer is stopped: air from the ground up comes over.",)


def _cloud(spans: Spans) -> Words:
    """Cloud and rain of the crossing air."""
    crossing = spans.crossing
    base = crossing.cloud.base
    if base is None:
        return ("The crossing air stays short of saturation: no cloud and no rain from lifting.",)
    start: Words = ("Cloud forms at ", *ranged(Amount(base, "height", -1), spans.of("cloud_base")))
    if starts_saturated(crossing):
        start = ("The air arrives already saturated",)
    share = fallen_share(crossing)
    if not rains(crossing):
        return (*start, ", and hardly any water falls out.")
    rain, part = crossing.rain, fraction_in_words(share)
    words: Words = (
        f", and {part} of the vapour (",
        *inside(Amount(share, "share"), spans.drying()),
        f") {falling(crossing)}",
    )
    if rain.windward_share is not None:
        windward = ranged(Amount(rain.windward_share, "share"), spans.of("windward_share"))
        words = (*words, ", ", *windward, " of it before the crest")
    return (
        *start,
        *words,
        "; the most is ",
        *ranged(Amount(rain.peak_rate, "rain_rate", 1), spans.of("peak_rate")),
        ".",
    )


def _lee(spans: Spans, site: LeeAir) -> Words:
    """What arrives at the site, from where, and why it is so."""
    crossing = spans.crossing
    beyond = site.distance - crossing.features.crest_distance
    side = "beyond" if beyond >= 0.0 else "before"
    start: Words = (
        f"At {site.name} (",
        Amount(site.elevation, "height"),
        ", ",
        Amount(abs(beyond), "distance"),
        f" {side} the crest) ",
    )
    if site.in_pool:
        return (*start, "cold air stays: ", *_values(spans, site), ". ", *_above_the_pool(spans))
    if site.in_blocked_air:
        return (*start, "the air is stopped and stays as it came: ", *_values(spans, site), ".")
    return (
        *start,
        "air from ",
        *_source(site),
        " arrives with ",
        *_values(spans, site),
        ": ",
        *changed(site.warming, spans.warming(site), "warmer than", "cooler than", "as warm as"),
        " the incoming air at the same height",
        *_mainly(spans, site),
        ".",
    )


def _source(site: LeeAir) -> Words:
    """The height the air comes from; its range is that of the air, not of the members."""
    first, *rest = source_words(site)
    return (first, " (eight tenths of it from ", *rest[1:]) if rest else (first,)


def _values(spans: Spans, site: LeeAir) -> Words:
    return (
        *ranged(Amount(site.temperature, "temperature", 1), spans.temperature(site)),
        ", dew point ",
        *ranged(Amount(site.dew_point, "temperature", 1), spans.dew_point(site)),
        ", humidity ",
        *ranged(Amount(site.relative_humidity, "share"), spans.at(site, "relative_humidity")),
    )


def _above_the_pool(spans: Spans) -> Words:
    crossing = spans.crossing
    if crossing.pool is None:
        return ()
    at = len(crossing.distance) - 1
    return (
        "Above ",
        *pool_top(spans, crossing.pool),
        " the crossing air blows over it with ",
        *ranged(Amount(float(crossing.wind[at, 0]), "wind"), spans.of("wind_over_pool")),
        ".",
    )


def _mainly(spans: Spans, site: LeeAir) -> Words:
    found = main_cause(site)
    if found is None or abs(site.warming) < SAME:
        return ()
    key, part = found
    noun = plain_end(cause_noun(spans.crossing, site, key, source=False))
    return (", mainly by ", *noun, " (", *inside(Amount(part, "temperature_change", 1), spans.part(site, key)), ")")


def _wind(spans: Spans, site: LeeAir) -> Words:
    """The wind down the lee and at the site."""
    winds = spans.crossing.winds
    span = range_words(winds.low, winds.high)
    ends = spans.of("lee_wind")
    start: Words = ("The wind down the lee slope reaches ", *ranged(Amount(winds.strongest, "wind"), ends))
    if span and ends is None:
        start = (*start, ", ", *span, " by all methods")
    if site.wind is None:
        why = "lies in the cold pool" if site.in_pool else "lies in air that hardly moves"
        return (*start, f"; {site.name} {why}.")
    return (
        *start,
        f"; at {site.name} ",
        *ranged(Amount(site.wind.at_10m, "wind"), spans.at(site, "wind_10m")),
        " at 10 m, gusts ",
        *gusts(spans, site.wind, site),
        ".",
    )
