"""What to say in the briefing: the flow, the air at the first site, its wind, and the key numbers with their ranges."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.report.causes import cause_noun, main_cause
from orolift.report.lee_wind import range_words
from orolift.report.quantities import Amount
from orolift.report.story import (
    ROUNDING,
    SAME,
    blocked_words,
    cloudy_to_the_end,
    dew_point_ends,
    difference,
    drying_ends,
    fallen_share,
    falling,
    is_blocked,
    main_site,
    rains,
    reaches_the_ground_or_not,
    source_words,
    starts_saturated,
    temperature_ends,
    with_ends,
)
from orolift.report.words import Words, fraction_in_words, point_of_compass, sentence

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing, LeeAir


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


def briefing(crossing: Crossing, bearing: float, freezing_level: float) -> Briefing:
    """The briefing of a crossing.

    Parameters
    ----------
    crossing : Crossing
    bearing : float [rad]
        Direction the wind comes from.
    freezing_level : float [m]
        Of the incoming air.

    Returns
    -------
    Briefing
    """
    site = main_site(crossing)
    both = (_both_answers(crossing, site),) if reaches_the_ground_or_not(crossing, site) else ()
    return Briefing(
        heading=_heading(crossing, site),
        sentences=(
            *both,
            (*_flow(crossing, bearing), " ", *_cloud(crossing)),
            _lee(crossing, site),
            _wind(crossing, site),
        ),
        key_numbers=_key_numbers(crossing, site, freezing_level),
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


def _both_answers(crossing: Crossing, site: LeeAir) -> Words:
    """Both answers where nothing is known of the air in the lee."""
    return (
        "Nothing is known of the air lying in the lee; the chance that the crossing air reaches the ground is put at ",
        Amount(crossing.flow.break_through_chance, "share"),
        " (by hour and wind). If it breaks through, ",
        f"{site.name} gets ",
        *with_ends(Amount(site.temperature, "temperature", 1), temperature_ends(site)),
        "; if a cold pool stays, it keeps roughly the temperature of the incoming air at its height, ",
        Amount(site.upwind_temperature, "temperature", 1),
        ".",
    )


def _flow(crossing: Crossing, bearing: float) -> Words:
    """Wind, regime and what is blocked."""
    flow = crossing.flow
    start: Words = (
        f"Air from the {point_of_compass(bearing)} (",
        Amount(bearing, "bearing"),
        ") meets the crest at ",
        Amount(crossing.features.crest, "height"),
        " with ",
        Amount(flow.crest_wind, "wind"),
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
            Amount(share, "share"),
            " comes through gaps or round the ends ",
        )
    return (
        *start,
        ". Air below ",
        *blocked_words(crossing),
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


def _unblocked(crossing: Crossing) -> Words:
    """That nothing is blocked, and how far the range of that reaches."""
    high = crossing.flow.blocked_top_high
    if high > crossing.features.base + ROUNDING:
        return (". No layer is stopped, at most the air below ", Amount(high, "height", -1), ".")
    return (". No layer is stopped: air from the ground up comes over.",)


def _cloud(crossing: Crossing) -> Words:
    """Cloud and rain of the crossing air."""
    base = crossing.cloud.base
    if base is None:
        return ("The crossing air stays short of saturation: no cloud and no rain from lifting.",)
    start: Words = ("Cloud forms at ", Amount(base, "height", -1))
    if starts_saturated(crossing):
        start = ("The air arrives already saturated",)
    share = fallen_share(crossing)
    if not rains(crossing):
        return (*start, ", and hardly any water falls out.")
    rain, part = crossing.rain, fraction_in_words(share)
    words: Words = (f", and {part} of the vapour (", Amount(share, "share"), f") {falling(crossing)}")
    if rain.windward_share is not None:
        words = (*words, ", ", Amount(rain.windward_share, "share"), " of it before the crest")
    return (*start, *words, "; the most is ", Amount(rain.peak_rate, "rain_rate", 1), ".")


def _lee(crossing: Crossing, site: LeeAir) -> Words:
    """What arrives at the site, from where, and why it is so."""
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
        return (*start, "cold air stays: ", *_values(site), ". ", *_above_the_pool(crossing))
    if site.in_blocked_air:
        return (*start, "the air is stopped and stays as it came: ", *_values(site), ".")
    return (
        *start,
        "air from ",
        *source_words(site),
        " arrives with ",
        *_values(site),
        ": ",
        *difference(site.warming, "warmer than", "cooler than", "as warm as"),
        " the incoming air at the same height",
        *_mainly(crossing, site),
        ".",
    )


def _values(site: LeeAir) -> Words:
    return (
        *with_ends(Amount(site.temperature, "temperature", 1), temperature_ends(site)),
        ", dew point ",
        *with_ends(Amount(site.dew_point, "temperature", 1), dew_point_ends(site)),
        ", humidity ",
        Amount(site.relative_humidity, "share"),
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


def _wind(crossing: Crossing, site: LeeAir) -> Words:
    """The wind down the lee and at the site."""
    winds = crossing.winds
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
        Amount(site.wind.at_10m, "wind"),
        " at 10 m, gusts ",
        *(range_words(site.wind.gust_low, site.wind.gust_high) or (Amount(site.wind.gust_high, "wind"),)),
        ".",
    )


def _key_numbers(crossing: Crossing, site: LeeAir, freezing_level: float) -> tuple[KeyNumber, ...]:
    return (
        _temperature_number(crossing, site),
        KeyNumber(
            f"{site.name}, humidity",
            Amount(site.relative_humidity, "share"),
            "",
            (),
            ("dew point ", *with_ends(Amount(site.dew_point, "temperature", 1), dew_point_ends(site))),
        ),
        _wind_number(site),
        _blocked_number(crossing),
        _source_number(site),
        _cloud_number(crossing),
        _fallen_number(crossing),
        KeyNumber("Wind across the crest", Amount(crossing.flow.crest_wind, "wind"), "", (), _layer_words()),
        _freezing_number(crossing, freezing_level),
    )


def _temperature_number(crossing: Crossing, site: LeeAir) -> KeyNumber:
    here = Amount(site.temperature, "temperature", 1)
    _, *span = with_ends(here, temperature_ends(site))
    before = Amount(site.upwind_temperature, "temperature", 1)
    remark: Words = sentence(("incoming air at that height: ", before))
    if reaches_the_ground_or_not(crossing, site):
        remark = ("if the air breaks through; about ", before, " if a cold pool stays")
    return KeyNumber(f"{site.name}, temperature", here, "", tuple(span), remark)


def _wind_number(site: LeeAir) -> KeyNumber:
    name = f"{site.name}, wind"
    if site.wind is None:
        return KeyNumber(name, None, "hardly any", (), ("cold air that stays" if site.in_pool else "blocked air",))
    gusts = range_words(site.wind.gust_low, site.wind.gust_high) or (Amount(site.wind.gust_high, "wind"),)
    return KeyNumber(name, Amount(site.wind.at_10m, "wind"), "", (), ("at 10 m; gusts ", *gusts))


def _blocked_number(crossing: Crossing) -> KeyNumber:
    flow = crossing.flow
    number = Amount(flow.nondimensional_height, "plain", 1 if flow.nondimensional_height >= 1.0 else 2)
    if not is_blocked(crossing):
        return KeyNumber("Air stopped below", None, "no layer", (), ("N h/U ", number, f": {flow.regime}"))
    top, *span = blocked_words(crossing)
    share: Words = ("; ", Amount(flow.going_round_share, "share"), " of it goes round")
    if not isinstance(top, Amount):
        raise TypeError("a height comes first")
    return KeyNumber("Air stopped below", top, "", tuple(span), ("N h/U ", number, f": {flow.regime}", *share))


def _source_number(site: LeeAir) -> KeyNumber:
    words = source_words(site)
    if not words or not isinstance(words[0], Amount):
        return KeyNumber("Its air comes from", None, "the lee itself", (), ("a cold pool that stays",))
    remark = "before the range; eight tenths of it from the heights in brackets" if words[1:] else "its own height"
    return KeyNumber("Its air comes from", words[0], "", words[1:], (remark,))


def _layer_words() -> Words:
    from orolift.crossing.crossing import CREST_LAYER

    return ("mean of the lowest ", Amount(CREST_LAYER, "height"), " above it")


def _cloud_number(crossing: Crossing) -> KeyNumber:
    cloud = crossing.cloud
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
    return KeyNumber("Cloud base", Amount(cloud.base, "height", -1), "", (), remark)


def _fallen_number(crossing: Crossing) -> KeyNumber:
    if not rains(crossing):
        why = "nothing condenses" if crossing.cloud.base is None else "hardly anything condenses"
        return KeyNumber("Falls out", None, "nothing", (), (why,))
    fallen = Amount(fallen_share(crossing), "share")
    _, *span = with_ends(fallen, drying_ends(crossing))
    return KeyNumber(
        "Falls out",
        fallen,
        "",
        tuple(span),
        ("of the crossing vapour", *_windward_words(crossing)),
    )


def _windward_words(crossing: Crossing) -> Words:
    share = crossing.rain.windward_share
    return () if share is None else ("; ", Amount(share, "share"), " of it before the crest")


def _freezing_number(crossing: Crossing, level: float) -> KeyNumber:
    column = crossing.incoming.height
    if level <= column[0]:
        return KeyNumber(
            "Freezing level", None, "at the ground", (), ("the incoming air is below freezing throughout",)
        )
    above = level - crossing.features.crest
    where = "above" if above >= 0.0 else "below"
    remark: Words = ("in the incoming air, ", Amount(abs(above), "height", -1), f" {where} the crest")
    return KeyNumber("Freezing level", Amount(level, "height", -1), "", (), remark)
