"""The air at every site, where it comes from, beside the incoming air at its height."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.quantities import Amount
from orolift.report.story import SAME, difference, source_words, where_words
from orolift.report.words import Words, counted, sentence

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing, LeeAir


@dataclass(frozen=True)
class SiteRow:
    """One site.

    Attributes
    ----------
    number : int
        Of its pin in the figures.
    name, side, remark : str
        `remark` says when it lies in a cold pool or in blocked air.
    distance, elevation : Amount
    temperature, dew_point, relative_humidity, mixing_ratio : Amount
        Its air.
    source : Words
        Heights it comes from: median, 10 % and 90 %; empty in a pool.
    went_round : Amount
    upwind_temperature, upwind_dew_point : Amount
        The incoming air at the same height.
    warming : Amount
        Site minus incoming air.
    """

    number: int
    name: str
    side: str
    remark: str
    distance: Amount
    elevation: Amount
    temperature: Amount
    dew_point: Amount
    relative_humidity: Amount
    mixing_ratio: Amount
    source: Words
    went_round: Amount
    upwind_temperature: Amount
    upwind_dew_point: Amount
    warming: Amount


@dataclass(frozen=True)
class Sites:
    """The sites: a conclusion, the rows, what to know when reading them."""

    heading: Words
    rows: tuple[SiteRow, ...]
    remarks: tuple[Words, ...]


def sites(crossing: Crossing) -> Sites:
    """The sites of a crossing, in the order of the case.

    Parameters
    ----------
    crossing : Crossing

    Returns
    -------
    Sites
    """
    rows = tuple(_row(air, air.number, crossing) for air in crossing.lee)
    return Sites(heading=_heading(crossing.lee), rows=rows, remarks=_remarks(crossing))


def _row(air: LeeAir, number: int, crossing: Crossing) -> SiteRow:
    return SiteRow(
        number=number,
        name=air.name,
        side=air.side,
        remark=where_words(air),
        distance=Amount(air.distance + crossing.transect.origin, "distance", 1),
        elevation=Amount(air.elevation, "height"),
        temperature=Amount(air.temperature, "temperature", 1),
        dew_point=Amount(air.dew_point, "temperature", 1),
        relative_humidity=Amount(air.relative_humidity, "share"),
        mixing_ratio=Amount(air.mixing_ratio, "mixing_ratio", 1),
        source=source_words(air),
        went_round=Amount(air.went_round, "share"),
        upwind_temperature=Amount(air.upwind_temperature, "temperature", 1),
        upwind_dew_point=Amount(air.upwind_dew_point, "temperature", 1),
        warming=Amount(air.warming, "temperature_change", 1),
    )


def _heading(lee: tuple[LeeAir, ...]) -> Words:
    """How much warmer or cooler the sites are, one by name, several by their span."""
    chosen = [air for air in lee if air.side == "lee"] or list(lee)
    if len(chosen) == 1:
        air = chosen[0]
        words = difference(air.warming, "warmer than", "cooler than", "as warm as")
        return (f"{air.name} is ", *words, " the incoming air at its height")
    least, most = min(air.warming for air in chosen), max(air.warming for air in chosen)
    noun = "lee site" if chosen[0].side == "lee" else "site"
    start = f"{counted(len(chosen), noun, f'{noun}s')} are "
    end = "the incoming air at their height"
    if least > SAME or most < -SAME:
        low, high = sorted((abs(least), abs(most)))
        which = "warmer" if least > SAME else "cooler"
        span: Words = (Amount(low, "temperature_difference", 1), " to ", Amount(high, "temperature_difference", 1))
        if high - low < SAME:
            span = (Amount(high, "temperature_difference", 1),)
        return sentence((start, *span, f" {which} than {end}"))
    return sentence(
        (
            start,
            "between ",
            *difference(least, "warmer", "cooler", "as warm"),
            " and ",
            *difference(most, "warmer than", "cooler than", "as warm as"),
            f" {end}",
        )
    )


def _remarks(crossing: Crossing) -> tuple[Words, ...]:
    heights = (
        " above it, mixed. It comes from the heights named: half of it, by mass, started below the first, a tenth "
        "below and a tenth above those in brackets."
    )
    depth = Amount(float(np.asarray(crossing.settings.mixing_depth)), "height")
    out: list[Words] = [("A site has the air of the lowest ", depth, heights)]
    ground = float(crossing.incoming.height[0])
    low = [air.name for air in crossing.lee if air.elevation < ground]
    if low:
        out.append(
            (
                f"Below the upwind ground at {', '.join(low)}: the incoming air is continued down from ",
                Amount(ground, "height"),
                ", so the comparison there is with air that does not exist.",
            )
        )
    return tuple(out)
