"""The air at the places that matter along its way, number by number, for those who check."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.humidity import relative_humidity_from_mixing_ratio
from orolift.report.figures.cloud import runs
from orolift.report.key_numbers import blocked_with_range, pool_top
from orolift.report.quantities import Amount
from orolift.report.spans import Spans, ranged
from orolift.report.story import (
    ROUNDING,
    SAME,
    cloudy_to_the_end,
    falling,
    is_blocked,
    rains,
    starts_saturated,
)

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing
    from orolift.report.trace import Trace
    from orolift.report.words import Words

DEEP = 100.0
"""The heading speaks of descent when the air ends so far [m] below its start without cloud (design choice)."""


@dataclass(frozen=True)
class Place:
    """The followed air at one place of its way.

    Attributes
    ----------
    name : str
    distance, height, pressure, temperature, dew_point, relative_humidity : Amount
    vapour, cloud, fallen : Amount
        Water in the air as vapour and cloud, and water that has left it by here.
    entropy : Amount
        Moist entropy; falls only by what the falling water takes along.
    """

    name: str
    distance: Amount
    height: Amount
    pressure: Amount
    temperature: Amount
    dew_point: Amount
    relative_humidity: Amount
    vapour: Amount
    cloud: Amount
    fallen: Amount
    entropy: Amount


@dataclass(frozen=True)
class Journey:
    """The way of the air in words and numbers."""

    heading: Words
    balance: Words
    places: tuple[Place, ...]


def journey(spans: Spans, trace: Trace) -> Journey:
    """The way of the air that reaches the main site.

    Parameters
    ----------
    spans : Spans
    trace : Trace

    Returns
    -------
    Journey
    """
    return Journey(heading=_heading(spans, trace), balance=_balance(spans), places=_places(spans.crossing, trace))


def section_heading(spans: Spans, trace: Trace) -> Words:
    """What the section shows, as a conclusion."""
    crossing = spans.crossing
    name = trace.site.name if trace.site is not None else "the lee foot"
    if crossing.pool is not None:
        return (
            "The crossing air rides over cold air that fills the lee up to ",
            *pool_top(spans, crossing.pool),
        )
    if is_blocked(crossing):
        return (
            "Low air is stopped below ",
            *blocked_with_range(spans),
            f"; air from above comes down to {name}",
        )
    if crossing.cloud.base is None:
        return ("The air climbs to the crest at ", Amount(crossing.features.crest, "height"), " and stays clear")
    return _cloud_heading(spans)


def _cloud_heading(spans: Spans) -> Words:
    """How far the cloud reaches on both sides."""
    crossing = spans.crossing
    cloud, crest = crossing.cloud, crossing.features.crest
    if starts_saturated(crossing):
        start: Words = ("Cloud covers the whole windward slope",)
    elif cloud.base is None or cloud.base > crest:
        return ("The air comes over whole; cloud forms only above the crest",)
    else:
        start = ("Cloud covers the upper ", *_below_crest(spans, cloud.base, "cloud_base"), " of the windward slope")
    if cloudy_to_the_end(crossing):
        return (*start, " and all of the lee")
    if cloud.end is None or crest - cloud.end < ROUNDING:
        return (*start, " and ends at the crest")
    return (*start, " and reaches ", *_below_crest(spans, cloud.end, "cloud_end"), " down the lee side")


def _below_crest(spans: Spans, height: float, name: str) -> Words:
    """How far below the crest a height lies; members in which it lies above count as none."""
    crest, ends = spans.crossing.features.crest, spans.of(name)
    below = None if ends is None else (max(crest - ends[1], 0.0), max(crest - ends[0], 0.0))
    return ranged(Amount(crest - height, "height", -1), below)


def _heading(spans: Spans, trace: Trace) -> Words:
    """What the way does to the temperature, in one line; numbers along one way have no range and stay in the table."""
    where = "the lee foot" if trace.site is None else trace.site.name
    end_height, end = float(trace.height[-1]), float(trace.temperature[-1])
    if trace.source - end_height > DEEP and not trace.wet.any():
        words: Words = (f"Air from aloft warms all the way down to {where}, without cloud",)
        if trace.site is None or trace.site.went_round <= 0.0:
            return words
        mixed = ranged(Amount(trace.site.temperature, "temperature", 1), spans.temperature(trace.site))
        return (*words, "; with what went round it has ", *mixed)
    before = _rising_temperature(trace, end_height)
    if before is None:
        start, top = float(trace.temperature[0]), float(trace.temperature[trace.top])
        return (f"The air {_verb(top - start)} on its way up and {_verb(end - top)} down to {where}",)
    if abs(end - before) < SAME:
        return ("Back down, the air is as warm as it was at the same height on its way up",)
    which = "warmer" if end > before else "cooler"
    return (f"Back down, the air is {which} than it was at the same height on its way up",)


def _rising_temperature(trace: Trace, level: float) -> float | None:
    """Temperature of the air when it last passed a height on its way up; None when it never did or never came down."""
    top = trace.top
    height = trace.height[: top + 1]
    below = np.flatnonzero(height <= level)
    if not below.size or below[-1] == top or top == trace.height.size - 1:
        return None
    pair = slice(int(below[-1]), int(below[-1]) + 2)
    return float(np.interp(level, height[pair], trace.temperature[pair]))


def _verb(change: float) -> str:
    return "warms" if change > 0.0 else "cools"


def _balance(spans: Spans) -> Words:
    """Water of all the crossing air."""
    crossing, water = spans.crossing, spans.crossing.water
    came = ranged(Amount(water.vapour_in, "vapour_flux"), spans.of("vapour_in"))
    if not rains(crossing):
        return ("Each metre along the range ", *came, " of vapour comes over, and practically none of it falls out.")
    return (
        "Of the ",
        *came,
        " of vapour that come over each metre of the range, ",
        *ranged(Amount(water.condensed, "vapour_flux"), spans.of("condensed")),
        " condense on the way and ",
        *ranged(Amount(water.removed, "vapour_flux"), spans.of("total")),
        f" {falling(crossing).replace('falls', 'fall').replace('rains', 'rain')}.",
    )


def _places(crossing: Crossing, trace: Trace) -> tuple[Place, ...]:
    marks: list[tuple[int, str]] = [(0, "Start"), (trace.top, "Highest point")]
    wet = runs(trace.wet)
    if wet and wet[0][0] > 0:
        marks.append((wet[0][0], "Cloud base"))
    if wet and trace.top < wet[-1][1] < trace.height.size - 1:
        marks.append((wet[-1][1] + 1, "End of cloud"))
    last = "Lee foot" if trace.site is None else f"Over {trace.site.name}"
    if trace.top != trace.height.size - 1:
        marks.append((trace.height.size - 1, last))
    return tuple(_place(crossing, trace, at, name) for at, name in sorted(marks))


def _place(crossing: Crossing, trace: Trace, at: int, name: str) -> Place:
    """The followed air at one of its points."""
    pressure, temperature, vapour = (float(values[at]) for values in (trace.pressure, trace.temperature, trace.vapour))
    humidity = float(relative_humidity_from_mixing_ratio(pressure, temperature, vapour))
    return Place(
        name=name,
        distance=Amount(float(trace.distance[at]) + crossing.transect.origin, "distance", 1),
        height=Amount(float(trace.height[at]), "height"),
        pressure=Amount(pressure, "pressure", 1),
        temperature=Amount(temperature, "temperature", 2),
        dew_point=Amount(float(trace.dew_point[at]), "temperature", 2),
        relative_humidity=Amount(humidity, "share"),
        vapour=Amount(vapour, "mixing_ratio", 2),
        cloud=Amount(float(trace.cloud[at]), "mixing_ratio", 2),
        fallen=Amount(float(trace.fallen[at]), "mixing_ratio", 2),
        entropy=Amount(float(trace.entropy[at]), "entropy", 2),
    )
