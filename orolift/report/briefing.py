"""What to say in the briefing: three sentences and the key numbers."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.constants import MELTING_POINT
from orolift.report.quantities import Amount
from orolift.report.words import Words, fraction_in_words, point_of_compass, sentence

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing, LeeAir

SAME = 0.05
"""Temperatures nearer than this [K] read alike at one decimal."""

ROUNDING = 10.0
"""Heights of cloud are shown to this [m]."""


@dataclass(frozen=True)
class KeyNumber:
    """A number to carry into the briefing.

    Attributes
    ----------
    name : str
    amount : Amount or None
        None when there is none; then `instead` is shown.
    instead : str
    remark : Words
        What the number refers to.
    """

    name: str
    amount: Amount | None
    instead: str
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
    return Briefing(
        heading=_heading(crossing, site),
        sentences=(_windward(crossing, bearing), _lee(crossing, site), _other_answer(crossing, site)),
        key_numbers=_key_numbers(crossing, site, freezing_level),
        doubts=crossing.cautions,
    )


def main_site(crossing: Crossing) -> LeeAir:
    """The site the page leads with: the first in the lee, else the first."""
    return next((air for air in crossing.lee if air.side == "lee"), crossing.lee[0])


def crest_index(crossing: Crossing) -> int:
    """Index of the crest along the transect."""
    return int(np.argmin(np.abs(crossing.distance - crossing.features.crest_distance)))


def starts_saturated(crossing: Crossing) -> bool:
    """Whether the air is in cloud from the upwind end on, to the rounding of heights."""
    return crossing.cloud.base is not None and crossing.cloud.base - float(crossing.height[0, 0]) < ROUNDING


def cloudy_to_the_end(crossing: Crossing) -> bool:
    """Whether cloud still touches the ground at the downwind end."""
    return crossing.cloud.end_distance is not None and bool(crossing.cloud.end_distance >= crossing.distance[-1])


def fallen_share(crossing: Crossing) -> float:
    """Water that fell out, as a share of the vapour that came."""
    return crossing.water.removed / crossing.water.vapour_in if crossing.water.vapour_in > 0.0 else 0.0


def prescribed_share(crossing: Crossing) -> Amount:
    """Share of the condensed water that leaves, as prescribed."""
    return Amount(float(np.asarray(crossing.settings.removed_share)), "share")


def falling(crossing: Crossing) -> str:
    """What falling out is called: rain, or rain or snow where the air at the crest is below freezing."""
    cold = crossing.air.temperature[crest_index(crossing), 0] < MELTING_POINT
    return "falls as rain or snow" if cold else "rains out"


def difference(amount: float, more: str, less: str, same: str) -> Words:
    """A temperature difference in words: how much, and which way.

    Parameters
    ----------
    amount : float [K]
    more, less : str
        Words after the number when it is above or below zero.
    same : str
        Words when it reads as zero.

    Returns
    -------
    Words
    """
    if abs(amount) < SAME:
        return (same,)
    return (Amount(abs(amount), "temperature_difference", 1), f" {more if amount > 0.0 else less}")


def _cloud_and_rain(crossing: Crossing) -> Words:
    """Cloud base and what falls out, for headings."""
    if crossing.cloud.base is None:
        return ("No cloud forms",)
    start: Words = ("Cloud base at ", Amount(crossing.cloud.base, "height", -1))
    if starts_saturated(crossing):
        start = ("Cloud from the ground up",)
    return (*start, f"; {fraction_in_words(fallen_share(crossing))} of the vapour {falling(crossing)}")


def _heading(crossing: Crossing, site: LeeAir) -> Words:
    place = {"lee": "in the lee", "crest": "on the crest", "windward": "on the windward side"}[site.side]
    return (*_cloud_and_rain(crossing), "; ", Amount(site.temperature, "temperature", 1), f" {place}")


def _windward(crossing: Crossing, bearing: float) -> Words:
    start = (
        f"Air from the {point_of_compass(bearing)} (",
        Amount(bearing, "bearing"),
        ") climbs from ",
        Amount(float(crossing.height[0, 0]), "height"),
        " to the crest at ",
        Amount(crossing.features.crest, "height"),
    )
    if crossing.cloud.base is None:
        return (*start, "; it stays short of saturation, so there is no cloud and no rain from lifting.")
    cloud: Words = ("; cloud forms at ", Amount(crossing.cloud.base, "height", -1))
    if starts_saturated(crossing):
        cloud = ("; it arrives already saturated",)
    share = fallen_share(crossing)
    if share <= 0.0:
        return (*start, *cloud, ", and all the water that condenses stays in the air.")
    return (
        *start,
        *cloud,
        f", and {fraction_in_words(share)} of the vapour it brings (",
        Amount(share, "share"),
        f") {falling(crossing)}.",
    )


def _lee(crossing: Crossing, site: LeeAir) -> Words:
    beyond = site.distance - crossing.features.crest_distance
    side = "beyond" if beyond >= 0.0 else "before"
    return (
        f"At {site.name} (",
        Amount(site.elevation, "height"),
        ", ",
        Amount(abs(beyond), "distance"),
        f" {side} the crest) it arrives with ",
        Amount(site.temperature, "temperature", 1),
        ", dew point ",
        Amount(site.dew_point, "temperature", 1),
        ", humidity ",
        Amount(site.relative_humidity, "share"),
        ": ",
        *difference(site.warming, "warmer than", "cooler than", "as warm as"),
        " the incoming air at the same height, its dew point ",
        *difference(site.dew_point - site.upwind_dew_point, "higher", "lower", "the same"),
        ".",
    )


def _other_answer(crossing: Crossing, site: LeeAir) -> Words:
    gap = site.popular_picture - site.temperature
    if site.side == "windward":
        return ("This holds on the windward side.",)
    if abs(gap) < SAME:
        why = "all the water that condenses falls out" if crossing.water.condensed > 0.0 else "nothing condenses"
        return (f"The popular picture gives the same, because {why}.",)
    return (
        "The popular picture, which lets all condensed water fall out, gives ",
        Amount(site.popular_picture, "temperature", 1),
        ", ",
        *difference(gap, "more", "less", ""),
        ".",
    )


def _key_numbers(crossing: Crossing, site: LeeAir, freezing_level: float) -> tuple[KeyNumber, ...]:
    return (
        _cloud_number(crossing),
        KeyNumber(
            "Falls out",
            Amount(fallen_share(crossing), "share"),
            "",
            (
                "of the vapour that came; ",
                prescribed_share(crossing),
                " of what condenses, as prescribed",
            ),
        ),
        KeyNumber(
            f"{site.name}, temperature",
            Amount(site.temperature, "temperature", 1),
            "",
            sentence(("incoming air at that height: ", Amount(site.upwind_temperature, "temperature", 1))),
        ),
        KeyNumber(
            f"{site.name}, humidity",
            Amount(site.relative_humidity, "share"),
            "",
            ("dew point ", Amount(site.dew_point, "temperature", 1)),
        ),
        KeyNumber("Wind across the crest", Amount(crossing.flow.crest_wind, "wind"), "", _layer_words()),
        _freezing_number(crossing, freezing_level),
    )


def _layer_words() -> Words:
    from orolift.crossing.crossing import CREST_LAYER

    return ("mean of the lowest ", Amount(CREST_LAYER, "height"), " above it")


def _cloud_number(crossing: Crossing) -> KeyNumber:
    if crossing.cloud.base is None:
        return KeyNumber("Cloud base", None, "no cloud", ("the air stays short of saturation",))
    if starts_saturated(crossing):
        return KeyNumber("Cloud base", None, "at the ground", ("the air is saturated from the upwind end on",))
    remark: Words = ("on the windward slope",)
    if cloudy_to_the_end(crossing):
        remark = ("on the windward slope; cloud to the downwind end",)
    elif crossing.cloud.end is not None:
        remark = ("on the windward slope; cloud ends at ", Amount(crossing.cloud.end, "height", -1), " in the lee")
    return KeyNumber("Cloud base", Amount(crossing.cloud.base, "height", -1), "", remark)


def _freezing_number(crossing: Crossing, level: float) -> KeyNumber:
    column = crossing.incoming.height
    if level <= column[0]:
        return KeyNumber("Freezing level", None, "at the ground", ("the incoming air is below freezing throughout",))
    above = level - crossing.features.crest
    where = "above" if above >= 0.0 else "below"
    remark: Words = ("in the incoming air, ", Amount(abs(above), "height", -1), f" {where} the crest")
    return KeyNumber("Freezing level", Amount(level, "height", -1), "", remark)
