"""How much warmer or cooler the sites are, in one line."""

from __future__ import annotations

from typing import TYPE_CHECKING

from orolift.report.quantities import Amount
from orolift.report.spans import Ends, Spans, changed, digits_for, ranged
from orolift.report.story import SAME, difference
from orolift.report.words import counted, sentence

if TYPE_CHECKING:
    from orolift.report.words import Words


def sites_heading(spans: Spans) -> Words:
    """How much warmer or cooler the sites are: one by name, several by the lowest and highest of them.

    Parameters
    ----------
    spans : Spans

    Returns
    -------
    Words
        In brackets the range of the one, or the lowest and highest of the ranges of all.
    """
    lee = spans.crossing.lee
    chosen = [air for air in lee if air.side == "lee"] or list(lee)
    if len(chosen) == 1:
        air = chosen[0]
        words = changed(air.warming, spans.warming(air), "warmer than", "cooler than", "as warm as")
        return (f"{air.name} is ", *words, " the incoming air at its height")
    least, most = min(air.warming for air in chosen), max(air.warming for air in chosen)
    noun = "lee site" if chosen[0].side == "lee" else "site"
    start = f"{counted(len(chosen), noun, f'{noun}s')} are "
    end = "the incoming air at their height"
    ends = [found for found in (spans.warming(air) for air in chosen) if found is not None]
    whole = (min(low for low, _ in ends), max(high for _, high in ends)) if ends else None
    if whole is not None and max(least - whole[0], whole[1] - most) < SAME:
        whole = None  # the ranges reach no further than the sites themselves
    if least > SAME or most < -SAME:
        low, high = sorted((abs(least), abs(most)))
        which = "warmer" if least > SAME else "cooler"
        turned = whole if whole is None or least > SAME else (-whole[1], -whole[0])
        return sentence((start, *_several(low, high, turned), f" {which} than {end}"))
    return sentence(
        (
            start,
            "between ",
            *difference(least, "warmer", "cooler", "as warm"),
            " and ",
            *difference(most, "warmer than", "cooler than", "as warm as"),
            f" {end}",
            *_with_ranges(whole),
        )
    )


def _several(low: float, high: float, ends: Ends | None) -> Words:
    """From the smallest to the largest difference of several sites."""
    first, *rest = ranged(Amount(high, "temperature_difference", 1), ends)
    if high - low < SAME:
        return (first, *rest)
    digits = first.digits if isinstance(first, Amount) else 1
    return (Amount(low, "temperature_difference", digits, bare=True), " to ", first, *rest)


def _with_ranges(ends: Ends | None) -> Words:
    """Lowest and highest of the ranges of several sites, after a sentence."""
    if ends is None:
        return ()
    digits = digits_for(Amount(ends[1], "temperature_change", 1), ends)
    low, high = (Amount(end, "temperature_change", digits, bare=end == ends[0]) for end in ends)
    return (" (ranges ", low, " to ", high, ")")
