"""The numbers to carry into the briefing, each with its range and what it refers to."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.report.lee_wind import range_words
from orolift.report.quantities import Amount
from orolift.report.story import (
    blocked_words,
    cloudy_to_the_end,
    dew_point_ends,
    drying_ends,
    fallen_share,
    is_blocked,
    rains,
    reaches_the_ground_or_not,
    source_words,
    starts_saturated,
    temperature_ends,
    with_ends,
)
from orolift.report.words import Words, sentence

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


def key_numbers(crossing: Crossing, site: LeeAir, freezing_level: float) -> tuple[KeyNumber, ...]:
    """The key numbers of a crossing.

    Parameters
    ----------
    crossing : Crossing
    site : LeeAir
        The main site.
    freezing_level : float [m]
        Of the incoming air.

    Returns
    -------
    tuple of KeyNumber
    """
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
