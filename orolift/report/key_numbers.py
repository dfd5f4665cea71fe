"""The numbers to carry into the briefing, each with its range and what it refers to."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.report.lee_wind import range_words
from orolift.report.quantities import Amount
from orolift.report.spans import Spans, ranged
from orolift.report.story import (
    ROUNDING,
    cloudy_to_the_end,
    fallen_share,
    is_blocked,
    rains,
    reaches_the_ground_or_not,
    regime_words,
    source_words,
    starts_saturated,
)
from orolift.report.words import Words, sentence

if TYPE_CHECKING:
    from orolift.crossing.pool import Pool
    from orolift.crossing.result import LeeAir
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


def key_numbers(spans: Spans, site: LeeAir, freezing_level: float) -> tuple[KeyNumber, ...]:
    """The key numbers of a crossing.

    Parameters
    ----------
    spans : Spans
        The crossing with its ranges.
    site : LeeAir
        The main site.
    freezing_level : float [m]
        Of the incoming air.

    Returns
    -------
    tuple of KeyNumber
    """
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
    remark: Words = sentence(("incoming air at that height: ", *before(spans, site)))
    if reaches_the_ground_or_not(crossing, site):
        remark = ("if the air breaks through; about ", *before(spans, site), " if a cold pool stays")
    here = Amount(site.temperature, "temperature", 1)
    return _number(f"{site.name}, temperature", here, spans.temperature(site), remark)


def _wind_number(spans: Spans, site: LeeAir) -> KeyNumber:
    name = f"{site.name}, wind"
    if site.wind is None:
        return KeyNumber(name, None, "hardly any", (), ("cold air that stays" if site.in_pool else "blocked air",))
    span = gusts(spans, site.wind, site)
    at_10m = Amount(site.wind.at_10m, "wind")
    return _number(name, at_10m, spans.at(site, "wind_10m"), ("at 10 m; gusts ", *span))


def _blocked_number(spans: Spans) -> KeyNumber:
    crossing, flow = spans.crossing, spans.crossing.flow
    number = nondimensional_words(spans)
    if not is_blocked(crossing):
        return KeyNumber("Air stopped below", None, "no layer", (), ("N h/U ", *number, f": {regime_words(crossing)}"))
    top, *span = blocked_with_range(spans)
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
        remark = (
            f"{where}; cloud ends at ",
            *ranged(Amount(cloud.end, "height", -1), spans.of("cloud_end")),
            " in the lee",
        )
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
    ends = spans.of("freezing_level")
    apart = None
    if ends is not None:
        low, high = (end - crossing.features.crest for end in ends)
        apart = (low, high) if above >= 0.0 else (-high, -low)
    remark: Words = ("in the incoming air, ", *ranged(Amount(abs(above), "height", -1), apart), f" {where} the crest")
    return _number("Freezing level", Amount(level, "height", -1), ends, remark)


def blocked_with_range(spans: Spans) -> Words:
    """The blocked top with its range."""
    top, ends = Amount(spans.crossing.flow.blocked_top, "height", -1), spans.blocked_top()
    return ranged(top, None if ends is None or ends[1] - ends[0] < ROUNDING else ends)


def before(spans: Spans, site: LeeAir) -> Words:
    """Temperature of the incoming air at the height of a site, with its range."""
    return ranged(Amount(site.upwind_temperature, "temperature", 1), spans.at(site, "upwind_temperature"))


def nondimensional_words(spans: Spans) -> Words:
    """N h/U with its range."""
    value = spans.crossing.flow.nondimensional_height
    return ranged(Amount(value, "plain", 1 if value >= 1.0 else 2), spans.of("nondimensional_height"))


def pool_top(spans: Spans, pool: Pool) -> Words:
    """Top of the cold air that stays in the lee, with its range over the members in which any stays."""
    return ranged(Amount(pool.top, "height", -1), spans.of("pool_top"))


def gusts(spans: Spans, wind: SiteWind, site: LeeAir) -> Words:
    """The range of the gusts: of the members, else of the law alone."""
    low, high = spans.at(site, "gust") or (wind.gust_low, wind.gust_high)
    return range_words(low, high) or (Amount(high, "wind"),)
