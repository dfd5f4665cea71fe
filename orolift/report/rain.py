"""Rain along the line: how much, where it falls, rain or snow by side and height, and what it threatens."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.crossing.member_values import band_name
from orolift.rain.winter import bands_of_sides
from orolift.report.quantities import Amount, Units, from_displayed
from orolift.report.spans import Spans, ranged, span_of
from orolift.report.story import SOME_SNOW, fallen_share, rains, removal_words, snow_words
from orolift.report.words import fraction_in_words, sentence

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing
    from orolift.rain.winter import BandOfSide
    from orolift.report.words import Words

SOME_THERE = 0.02
"""Share of the rain [1] that falls in a band behind the crest from which on it is said (design choice)."""
SOME = 0.02
"""Share of the falling water [1] that evaporates from which on it is said (design choice)."""
NEAR = 500.0
"""A peak this near to the crest [m] is at it."""


@dataclass(frozen=True)
class BandRow:
    """What falls between two heights of the ground on both sides; None where a side has no such ground."""

    lower: Amount
    upper: Amount
    windward_rate: Amount | None
    windward_snow: Amount | None
    lee_rate: Amount | None
    lee_snow: Amount | None
    spans: dict[str, Words]


@dataclass(frozen=True)
class RainOnLine:
    """Rain along the line.

    Attributes
    ----------
    heading : Words
    flags : tuple of str
        Danger thresholds reached.
    sentences : tuple of Words
    rows : tuple of BandRow
        Empty without rain.
    """

    heading: Words
    flags: tuple[str, ...]
    sentences: tuple[Words, ...]
    rows: tuple[BandRow, ...]


def rain_on_line(
    crossing: Crossing, flags: tuple[str, ...] = (), units: Units = "metric", spans: Spans | None = None
) -> RainOnLine:
    """Rain along the line of a crossing.

    Parameters
    ----------
    crossing : Crossing
    flags : tuple of str
        From `orolift.rain.winter.winter_flags`.
    units : 'metric' or 'us'
        In which the bands of height are round.
    spans : Spans, optional
        Ranges.

    Returns
    -------
    RainOnLine
    """
    spans = spans or Spans(crossing, None)
    falls = rains(crossing) or crossing.rain.background > 0.0
    return RainOnLine(
        heading=_heading(spans),
        flags=flags,
        sentences=_sentences(spans),
        rows=_rows(spans, band_step(units)) if falls else (),
    )


def _heading(spans: Spans) -> Words:
    crossing = spans.crossing
    rain = crossing.rain
    if not rains(crossing) or rain.windward_share is None or rain.peak_distance is None:
        if rain.background > 0.0:
            return ("The range adds hardly any rain to the background of ", Amount(rain.background, "rain_rate", 1))
        return ("Hardly any rain reaches the ground",)
    part = f"{fraction_in_words(rain.windward_share)} of the {snow_words(crossing)}"
    most = ranged(Amount(rain.peak_rate, "rain_rate", 1), spans.of("peak_rate"))
    where = _side(rain.peak_distance - crossing.features.crest_distance)
    return (*sentence((part,)), " falls before the crest; the most, ", *most, f", {where} it")


def _side(apart: float) -> str:
    """Where a peak lies, seen from the crest."""
    return "on" if abs(apart) < NEAR else "behind" if apart > 0.0 else "before"


def _sentences(spans: Spans) -> tuple[Words, ...]:
    crossing, water, rain = spans.crossing, spans.crossing.water, spans.crossing.rain
    if water.condensed <= 0.0:
        return (("Nothing condenses on the way over: the air stays short of saturation.",),)
    if not rains(crossing):
        return (("What condenses on the way over evaporates again; next to nothing of it falls.",),)
    out: list[Words] = [
        (
            "Of the vapour that crosses ",
            *ranged(Amount(fallen_share(crossing), "share"), spans.drying()),
            " reaches the ground, of what condenses ",
            *ranged(Amount(water.removed / water.condensed, "share"), spans.of("rain_out_share")),
            ": ",
            *removal_words(crossing),
            ".",
        ),
        *_places(spans),
    ]
    fell = water.removed + water.evaporated + water.beyond
    if water.evaporated > SOME * fell:
        out.append(
            (
                "On its way down ",
                *ranged(Amount(water.evaporated / fell, "share"), spans.of("evaporated_share")),
                " of the falling water evaporates, below the cloud and in the lee, and cools the air there.",
            )
        )
    if rain.background > 0.0:
        out.append(
            (
                "A background of ",
                Amount(rain.background, "rain_rate", 1),
                " falls everywhere beside it; it is in rates and peak, not in the shares.",
            )
        )
    return tuple(out)


def _places(spans: Spans) -> tuple[Words, ...]:
    """The share before the crest, the most and where, the shares of the bands behind it; with their ranges."""
    crossing, rain = spans.crossing, spans.crossing.rain
    if rain.windward_share is None or rain.peak_distance is None:
        return ()
    share = ranged(Amount(rain.windward_share, "share"), spans.of("windward_share"))
    most = ranged(Amount(rain.peak_rate, "rain_rate", 1), spans.of("peak_rate"))
    before: Words = (*share, f" of the {snow_words(crossing)} falls before the crest; the most anywhere is ", *most)
    return ((*before, ", ", *_peak(spans, rain.peak_distance), "."), *_bands_behind(spans), *_snow(spans))


def _peak(spans: Spans, at: float) -> Words:
    """Where the most falls, seen from the crest; its range counts in that direction."""
    crest, ends = spans.crossing.features.crest_distance, spans.of("peak_distance")
    apart = None if ends is None else (ends[0] - crest, ends[1] - crest)
    if at < crest and apart is not None:
        apart = -apart[1], -apart[0]
    side = "before" if at < crest else "behind"
    return (*ranged(Amount(abs(at - crest), "distance", 1), apart), f" {side} the crest")


def _bands_behind(spans: Spans) -> tuple[Words, ...]:
    """The shares that fall in the bands behind the crest."""
    out: list[str | Amount] = []
    for number, (low, high, share) in enumerate(spans.crossing.rain.lee_bands):
        if share < SOME_THERE:
            continue
        edges = (Amount(low, "distance", bare=True), " to ", Amount(high, "distance"))
        out += [", " if out else "Behind the crest ", *ranged(Amount(share, "share"), spans.of(f"lee_band_{number}"))]
        out += [" falls within ", edges[2]] if low == 0.0 else [" at ", *edges]
    return ((*out, "."),) if out else ()


def _snow(spans: Spans) -> tuple[Words, ...]:
    """The share of snow, where it is neither all nor none."""
    share = spans.crossing.rain.snow_share
    if share is None or not SOME_SNOW <= share <= 1.0 - SOME_SNOW:
        return ()
    return ((*ranged(Amount(share, "share"), spans.of("snow_share")), " of all that falls on the line is snow."),)


def band_step(units: Units) -> float:
    """Height of a band of elevation [m] that is round in the units of the page."""
    return from_displayed(200.0 if units == "metric" else 500.0, "height", units)


def _rows(spans: Spans, step: float) -> tuple[BandRow, ...]:
    """Both sides of each band, from the lowest up."""
    bands = {(band.lower, band.side): band for band in bands_of_sides(spans.crossing, step=step)}
    rows = []
    for lower in sorted({low for low, _ in bands}):
        windward, lee = bands.get((lower, "windward")), bands.get((lower, "lee"))
        upper = next(band.upper for band in (windward, lee) if band is not None)
        rows.append(
            BandRow(
                lower=Amount(lower, "height", bare=True),
                upper=Amount(upper, "height"),
                windward_rate=None if windward is None else Amount(windward.rate, "rain_rate", 1),
                windward_snow=None if windward is None else Amount(windward.snow_share, "share"),
                lee_rate=None if lee is None else Amount(lee.rate, "rain_rate", 1),
                lee_snow=None if lee is None else Amount(lee.snow_share, "share"),
                spans=_band_spans(spans, step, windward, lee),
            )
        )
    return tuple(rows)


def _band_spans(spans: Spans, step: float, *bands: BandOfSide | None) -> dict[str, Words]:
    """Ranges of rain and snow, and of the share of snow where no background is in it, in a band on each side."""
    out: dict[str, Words] = {}
    for band in bands:
        if band is None:
            continue
        number = round(band.lower / step)
        rain, snow = (band_name(name, step, band.side, number) for name in ("rain", "snow"))
        out[f"{band.side}_rate"] = span_of(Amount(band.rate, "rain_rate", 1), spans.of(rain))
        if spans.crossing.rain.background <= 0.0:
            out[f"{band.side}_snow"] = span_of(Amount(band.snow_share, "share"), spans.ratio(snow, rain))
    return out
