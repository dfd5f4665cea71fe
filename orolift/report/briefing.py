"""What to say in the briefing: the flow, the air at the first site, its wind, and the key numbers with their ranges."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.report.causes import cause_noun, main_cause
from orolift.report.lee_wind import range_words
from orolift.report.quantities import Amount
from orolift.report.spans import Spans, ranged
from orolift.report.story import (
    ROUNDING,
    SAME,
    blocked_words,
    cloudy_to_the_end,
    difference,
    fallen_share,
    falling,
    is_blocked,
    main_site,
    rains,
    reaches_the_ground_or_not,
    source_words,
    starts_saturated,
)
from orolift.report.words import Words, fraction_in_words, point_of_compass, sentence

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing, LeeAir
    from orolift.crossing.wind import SiteWind


@dataclass(frozen=True)
class KeyNumber:
    """A number to carry into the briefing.

    Attributes
    ----------
    name : str
    amount : Amount or None
        None when there is none; then `instead` is shown.
    instead : str
    span : Words
        Its range, shown smaller in the same line; empty without one.
    remark : Words
        What the number refers to.
    """

    name: str
    amount: Amount | None
    instead: str
    span: Words
    remark: Words


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
        heading=_heading(crossing, site),
        sentences=(
            *both,
            (*_flow(spans, bearing), " ", *_cloud(spans)),
            _lee(spans, site),
            _wind(spans, site),
        ),
        key_numbers=_key_numbers(spans, site, freezing_level),
        doubts=crossing.cautions,
    )


def _heading(crossing: Crossing, site: LeeAir) -> Words:
    here = Amount(site.temperature, "temperature", 1)
    if site.in_pool and crossing.pool is not None:
        return (
            "A cold pool up to ",
            Amount(crossing.pool.top, "height", -1),
            f" keeps {site.name} at ",
            here,
            "; the crossing air passes over it",
        )
    if reaches_the_ground_or_not(crossing, site):
        cold = Amount(site.upwind_temperature, "temperature", 1)
        return (f"{site.name}: ", here, " if the air breaks through, about ", cold, " if a cold pool stays")
    if site.in_blocked_air:
        return ("Low air is blocked up to ", *blocked_words(crossing)[:1], f"; {site.name} lies in it, at ", here)
    change = difference(
        site.warming, "warmer than the incoming air", "cooler than the incoming air", "as the incoming air"
    )
    return (*_flow_clause(crossing), f"; {site.name} has ", here, ", ", *change)


def _flow_clause(crossing: Crossing) -> Words:
    """The flow in a few words."""
    if is_blocked(crossing):
        return ("Low air is blocked up to ", Amount(crossing.flow.blocked_top, "height", -1))
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
        Amount(site.upwind_temperature, "temperature", 1),
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
        " across it: N h/U is ",
        Amount(flow.nondimensional_height, "plain", 1 if flow.nondimensional_height >= 1.0 else 2),
        f", so the flow {_CERTAIN.get(flow.regime, flow.regime)}",
    )
    others = [_POSSIBLE.get(one, one) for one in flow.possible_regimes if one != flow.regime]
    if others:
        start = (*start, f"; within the uncertainty it may also {' or '.join(others)}")
    if not is_blocked(crossing):
        return (*start, *_unblocked(crossing))
    share = flow.going_round_share
    round_words: Words = (", and none of it comes through gaps or round the ends ",)
    if share > 0.0:
        round_words = (
            "; of the low air behind the range ",
            *ranged(Amount(share, "share"), spans.of("going_round_share")),
            " comes through gaps or round the ends ",
        )
    return (
        *start,
        ". Air below ",
        *_blocked_words(spans),
        " is stopped",
        *round_words,
        f"({flow.going_round_source}).",
    )


_CERTAIN = {
    "flows over": "goes over",
    "flows over with steep waves": "goes over with steep waves",
    "partly blocked": "is partly blocked",
    "blocked": "is blocked",
}
_POSSIBLE = {
    "flows over": "go over quietly",
    "flows over with steep waves": "go over with steep waves",
    "partly blocked": "be partly blocked",
    "blocked": "be blocked",
}


def _blocked_words(spans: Spans) -> Words:
    """The blocked top with its range."""
    if spans.spread is None:
        return blocked_words(spans.crossing)
    return ranged(Amount(spans.crossing.flow.blocked_top, "height", -1), spans.of("blocked_top"))


def _unblocked(crossing: Crossing) -> Words:
    """That nothing is blocked, and how far the range of that reaches."""
    high = crossing.flow.blocked_top_high
    if high > crossing.features.base + ROUNDING:
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
    words: Words = (f", and {part} of the vapour (", *_share_inside(share, spans), f") {falling(crossing)}")
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


def _share_inside(share: float, spans: Spans) -> Words:
    """A share that stands in brackets already: its range follows a comma."""
    first, *rest = ranged(Amount(share, "share"), spans.drying())
    if not rest:
        return (first,)
    low, high = rest[1], rest[3]
    return (first, ", ", low, " to ", high)


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
        return (*start, "cold air stays: ", *_values(spans, site), ". ", *_above_the_pool(crossing))
    if site.in_blocked_air:
        return (*start, "the air is stopped and stays as it came: ", *_values(spans, site), ".")
    return (
        *start,
        "air from ",
        *source_words(site),
        " arrives with ",
        *_values(spans, site),
        ": ",
        *difference(site.warming, "warmer than", "cooler than", "as warm as"),
        " the incoming air at the same height",
        *_mainly(crossing, site),
        ".",
    )


def _values(spans: Spans, site: LeeAir) -> Words:
    return (
        *ranged(Amount(site.temperature, "temperature", 1), spans.temperature(site)),
        ", dew point ",
        *ranged(Amount(site.dew_point, "temperature", 1), spans.dew_point(site)),
        ", humidity ",
        *ranged(Amount(site.relative_humidity, "share"), spans.at(site, "relative_humidity")),
    )


def _above_the_pool(crossing: Crossing) -> Words:
    if crossing.pool is None:
        return ()
    at = len(crossing.distance) - 1
    return (
        "Above ",
        Amount(crossing.pool.top, "height", -1),
        " the crossing air blows over it with ",
        Amount(float(crossing.wind[at, 0]), "wind"),
        ".",
    )


def _mainly(crossing: Crossing, site: LeeAir) -> Words:
    found = main_cause(site)
    if found is None or abs(site.warming) < SAME:
        return ()
    key, part = found
    noun = cause_noun(crossing, site, key)
    last = noun[-1]
    bare = (*noun[:-1], last.rstrip(",") if isinstance(last, str) else last)
    return (", mainly by ", *bare, " (", Amount(part, "temperature_change", 1), ")")


def _wind(spans: Spans, site: LeeAir) -> Words:
    """The wind down the lee and at the site."""
    winds = spans.crossing.winds
    span = range_words(winds.low, winds.high)
    start: Words = ("The wind down the lee slope reaches ", Amount(winds.strongest, "wind"))
    if span:
        start = (*start, ", ", *span, " by all methods")
    if site.wind is None:
        why = "lies in the cold pool" if site.in_pool else "lies in air that hardly moves"
        return (*start, f"; {site.name} {why}.")
    return (
        *start,
        f"; at {site.name} ",
        *ranged(Amount(site.wind.at_10m, "wind"), spans.at(site, "wind_10m")),
        " at 10 m, gusts ",
        *_gusts(spans, site.wind, site),
        ".",
    )


def _gusts(spans: Spans, wind: SiteWind, site: LeeAir) -> Words:
    """The range of the gusts: of the members, else of the law alone."""
    low, high = spans.at(site, "gust") or (wind.gust_low, wind.gust_high)
    return range_words(low, high) or (Amount(high, "wind"),)


def _key_numbers(spans: Spans, site: LeeAir, freezing_level: float) -> tuple[KeyNumber, ...]:
    crossing = spans.crossing
    crest_wind = _number(
        "Wind across the crest", Amount(crossing.flow.crest_wind, "wind"), spans.of("cross_range_wind"), _layer_words()
    )
    dew_point = ranged(Amount(site.dew_point, "temperature", 1), spans.dew_point(site))
    return (
        _temperature_number(spans, site),
        _number(
            f"{site.name}, humidity",
            Amount(site.relative_humidity, "share"),
            spans.at(site, "relative_humidity"),
            ("dew point ", *dew_point),
        ),
        _wind_number(spans, site),
        _blocked_number(spans),
        _source_number(site),
        _cloud_number(spans),
        _fallen_number(spans),
        crest_wind,
        _freezing_number(spans, freezing_level),
    )


def _number(name: str, amount: Amount, ends: tuple[float, float] | None, remark: Words) -> KeyNumber:
    """A key number with its range."""
    first, *span = ranged(amount, ends)
    if not isinstance(first, Amount):
        raise TypeError("an amount comes first")
    return KeyNumber(name, first, "", tuple(span), remark)


def _temperature_number(spans: Spans, site: LeeAir) -> KeyNumber:
    crossing = spans.crossing
    before = Amount(site.upwind_temperature, "temperature", 1)
    remark: Words = sentence(("incoming air at that height: ", before))
    if reaches_the_ground_or_not(crossing, site):
        remark = ("if the air breaks through; about ", before, " if a cold pool stays")
    here = Amount(site.temperature, "temperature", 1)
    return _number(f"{site.name}, temperature", here, spans.temperature(site), remark)


def _wind_number(spans: Spans, site: LeeAir) -> KeyNumber:
    name = f"{site.name}, wind"
    if site.wind is None:
        return KeyNumber(name, None, "hardly any", (), ("cold air that stays" if site.in_pool else "blocked air",))
    gusts = _gusts(spans, site.wind, site)
    at_10m = Amount(site.wind.at_10m, "wind")
    return _number(name, at_10m, spans.at(site, "wind_10m"), ("at 10 m; gusts ", *gusts))


def _blocked_number(spans: Spans) -> KeyNumber:
    crossing, flow = spans.crossing, spans.crossing.flow
    amount = Amount(flow.nondimensional_height, "plain", 1 if flow.nondimensional_height >= 1.0 else 2)
    number = ranged(amount, spans.of("nondimensional_height"))
    if not is_blocked(crossing):
        return KeyNumber("Air stopped below", None, "no layer", (), ("N h/U ", *number, f": {flow.regime}"))
    top, *span = _blocked_words(spans)
    share: Words = (
        "; ",
        *ranged(Amount(flow.going_round_share, "share"), spans.of("going_round_share")),
        " of it goes round",
    )
    if not isinstance(top, Amount):
        raise TypeError("a height comes first")
    return KeyNumber("Air stopped below", top, "", tuple(span), ("N h/U ", *number, f": {flow.regime}", *share))


def _source_number(site: LeeAir) -> KeyNumber:
    words = source_words(site)
    if not words or not isinstance(words[0], Amount):
        return KeyNumber("Its air comes from", None, "the lee itself", (), ("a cold pool that stays",))
    remark = "before the range; eight tenths of it from the heights in brackets" if words[1:] else "its own height"
    return KeyNumber("Its air comes from", words[0], "", words[1:], (remark,))


def _layer_words() -> Words:
    from orolift.crossing.crossing import CREST_LAYER

    return ("mean of the lowest ", Amount(CREST_LAYER, "height"), " above it")


def _cloud_number(spans: Spans) -> KeyNumber:
    crossing, cloud = spans.crossing, spans.crossing.cloud
    if cloud.base is None:
        return KeyNumber("Cloud base", None, "no cloud", (), ("the air stays short of saturation",))
    if starts_saturated(crossing):
        return KeyNumber("Cloud base", None, "at the ground", (), ("the air is saturated from the upwind end on",))
    where = "above the crest" if cloud.base > crossing.features.crest else "on the windward slope"
    remark: Words = (where,)
    if cloudy_to_the_end(crossing):
        remark = (f"{where}; cloud to the downwind end",)
    elif cloud.end is not None:
        remark = (f"{where}; cloud ends at ", Amount(cloud.end, "height", -1), " in the lee")
    return _number("Cloud base", Amount(cloud.base, "height", -1), spans.of("cloud_base"), remark)


def _fallen_number(spans: Spans) -> KeyNumber:
    crossing = spans.crossing
    if not rains(crossing):
        why = "nothing condenses" if crossing.cloud.base is None else "hardly anything condenses"
        return KeyNumber("Falls out", None, "nothing", (), (why,))
    fallen = Amount(fallen_share(crossing), "share")
    return _number("Falls out", fallen, spans.drying(), ("of the crossing vapour", *_windward_words(spans)))


def _windward_words(spans: Spans) -> Words:
    share = spans.crossing.rain.windward_share
    if share is None:
        return ()
    return ("; ", *ranged(Amount(share, "share"), spans.of("windward_share")), " of it before the crest")


def _freezing_number(spans: Spans, level: float) -> KeyNumber:
    crossing = spans.crossing
    column = crossing.incoming.height
    if level <= column[0]:
        return KeyNumber(
            "Freezing level", None, "at the ground", (), ("the incoming air is below freezing throughout",)
        )
    above = level - crossing.features.crest
    where = "above" if above >= 0.0 else "below"
    remark: Words = ("in the incoming air, ", Amount(abs(above), "height", -1), f" {where} the crest")
    return _number("Freezing level", Amount(level, "height", -1), spans.of("freezing_level"), remark)
