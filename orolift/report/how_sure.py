"""How sure: what the ranges of the page hold, what they would be without the error of the method, and the chances."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.quantities import Amount
from orolift.report.spans import digits_for
from orolift.report.story import where_words
from orolift.spread.ranges import Influence, chance_of, influences, noise
from orolift.spread.spread import CHANCE_OF_RAIN

if TYPE_CHECKING:
    from collections.abc import Mapping

    from orolift.crossing.result import LeeAir
    from orolift.report.quantities import Kind
    from orolift.report.spans import Spans
    from orolift.report.words import Words
    from orolift.spread.spread import Spread

INPUTS: dict[str, tuple[str, Kind, int, str]] = {
    "temperature": ("temperature of the incoming air", "temperature_difference", 1, ""),
    "dew_point": ("dew point of the incoming air", "temperature_difference", 1, ""),
    "pressure": ("pressure of the incoming air", "pressure_difference", 1, ""),
    "wind": ("wind speed", "share", 0, ""),
    "wind_from": ("wind direction", "bearing", 0, ""),
    "lapse_rate": ("lapse rate of the lower air", "lapse_rate", 1, ""),
    "going_round_share": ("share of low air that goes round", "share", 0, " of the air"),
    "critical_value": ("N h/U from which air is blocked", "plain", 2, ""),
    "cloud_time": ("cloud time", "share", 0, ""),
    "fall_time": ("fall time", "share", 0, ""),
    "removed_share": ("share of the condensed water that leaves", "share", 0, " of it"),
    "mixing_depth": ("mixing depth at a site", "share", 0, ""),
    "surface_heat": ("heat from the ground", "share", 0, ""),
    "liquid_cloud": ("cloud that does not freeze", "share", 0, " of the members"),
    "lee_temperature": ("air lying in the lee", "temperature_difference", 1, ""),
}
"""Inputs in words, and how their standard deviation is written."""
WITH_METHOD: dict[str, tuple[Kind, int]] = {
    "temperature": ("temperature", 1),
    "warming": ("temperature_change", 1),
    "dew_point": ("temperature", 1),
    "relative_humidity": ("share", 0),
    "mixing_ratio": ("mixing_ratio", 1),
    "wind_10m": ("wind_alone", 0),
    "gust": ("wind_alone", 0),
}
"""Numbers of a site for which the error of the method is stated, and how finely they are shown at most."""
METHOD_NAME = "the method itself"
MOST_BARS = 6
"""Inputs that a panel of the figure shows at most."""


@dataclass(frozen=True)
class RangeRow:
    """Ranges at one site: in full, and in `spans` those by the inputs alone."""

    number: int
    name: str
    side: str
    remark: str
    temperature: Words
    warming: Words
    dew_point: Words
    relative_humidity: Words
    mixing_ratio: Words
    wind_10m: Words
    gust: Words
    spans: dict[str, Words]


@dataclass(frozen=True)
class ChanceRow:
    """Something that may happen, and in what share of the members it does."""

    event: Words
    chance: Amount


@dataclass(frozen=True)
class InputRow:
    """One input and its standard deviation."""

    name: str
    deviation: Words


@dataclass(frozen=True)
class Panel:
    """What matters for one result, the most important first."""

    title: str
    influences: tuple[Influence, ...]


@dataclass(frozen=True)
class HowSure:
    """How sure the page is.

    Attributes
    ----------
    heading : Words
    remarks : tuple of Words
    rows : tuple of RangeRow
        Empty without members, as all that follows.
    chances : tuple of ChanceRow
    inputs : tuple of InputRow
    panels : tuple of Panel
    noise : float [1]
        Rank correlation that chance alone exceeds once in about twenty times.
    """

    heading: Words
    remarks: tuple[Words, ...]
    rows: tuple[RangeRow, ...] = ()
    chances: tuple[ChanceRow, ...] = ()
    inputs: tuple[InputRow, ...] = ()
    panels: tuple[Panel, ...] = ()
    noise: float = 0.0


def how_sure(spans: Spans, winter: Mapping[str, float] | None = None) -> HowSure:
    """How sure the numbers of a crossing are.

    Parameters
    ----------
    spans : Spans
    winter : mapping of str to float, optional
        Chances of the dangers of cold ground, from `orolift.spread.winter_chances.winter_chances`.

    Returns
    -------
    HowSure
    """
    spread = spans.spread
    if spread is None:
        return HowSure(
            ("How sure is not worked out: the case switches the members off",),
            (("With members = 0 nothing but the ends of blocking is known of the range.",),),
        )
    if not spread.crosses.any():
        return HowSure(
            ("No member crosses: there is no range",),
            (_counted(spread),),
            chances=(_crossing_row(spread),),
            inputs=_inputs(spread),
        )
    return HowSure(
        heading=_heading(spans),
        remarks=(*_contents(spread), *_compared(spans), _counted(spread)),
        rows=tuple(_row(spans, air) for air in spans.crossing.lee if spans.column(air) is not None),
        chances=(*_chances(spans, spread), *_winter_rows(winter or {})),
        inputs=_inputs(spread),
        panels=_panels(spans, spread),
        noise=noise(int(spread.crosses.sum())),
    )


def _heading(spans: Spans) -> Words:
    site = spans.main
    full, alone = spans.at(site, "temperature"), spans.at(site, "temperature", inputs_only=True)
    if full is None or alone is None:
        return ("Too few members cross for a range",)
    wide = full[1] - full[0] > 1.5 * (alone[1] - alone[0])
    more = "the method itself is the larger doubt" if wide else "the incoming air is the larger doubt"
    return (f"{site.name} has ", *span_words("temperature", 1, full), f" eight times in ten; {more}")


def _contents(spread: Spread) -> tuple[Words, ...]:
    """What a range holds, and what has none."""
    text = (
        f"A range in brackets holds the middle eight tenths of {spread.members} crossings, each with its own draw of "
        "every input from what that may be, and is widened to the answer where that lies outside. To temperature, "
        "humidity and wind at the sites the error of the method is added. For rain, cloud and heights no such error is "
        "known yet: their ranges are those of the inputs alone, and too narrow."
    )
    bare = (
        "The heights air comes from are no such range, but those of the middle eight tenths of the air. Of the answer "
        "alone, and without a range, are most figures, the way of the air, the section in numbers, the levels of the "
        "incoming air, the wavelength of trapped waves, the map by height of the ground and the simple estimates of "
        "rain. The ground, distances along it and what the case gives or prescribes have none. Chances and the two "
        "ends of blocking need none: those ends are a range themselves."
    )
    return (text,), (bare,)


def _compared(spans: Spans) -> tuple[Words, ...]:
    site = spans.main
    full, alone = spans.at(site, "temperature"), spans.at(site, "temperature", inputs_only=True)
    if full is None or alone is None:
        return ()
    return (
        (
            f"At {site.name} the inputs alone leave ",
            *span_words("temperature", 1, alone),
            "; with the error of the method it is ",
            *span_words("temperature", 1, full),
            ".",
        ),
    )


def _counted(spread: Spread) -> Words:
    """How many members there were, crossed, and were lost."""
    lost, still = len(spread.failed), spread.members - len(spread.failed) - int(spread.crosses.sum())
    if not lost and not still:
        return (f"All {spread.members} members cross the range (seed {spread.seed}).",)
    parts = []
    if still:
        parts.append(
            f"in {still} of {spread.members} members the wind across the crest is 2 m/s or less: no crossing, and they "
            "count in no range"
        )
    if lost:
        parts.append(f"{lost} could not be worked out ({spread.failed[0].reason.rstrip('.')})")
    text = "; ".join(parts)
    return (f"{text[0].upper()}{text[1:]} (seed {spread.seed}).",)


def span_words(kind: Kind, digits: int, ends: tuple[float, float] | None) -> Words:
    """A range in words: 10.8 to 13.1 °C; nothing without one."""
    if ends is None:
        return ()
    fine = digits_for(Amount(ends[0], kind, digits), ends)
    return (Amount(ends[0], kind, fine, bare=True), " to ", Amount(ends[1], kind, fine))


def _row(spans: Spans, site: LeeAir) -> RangeRow:
    def ends(name: str, *, alone: bool) -> Words:
        kind, digits = WITH_METHOD[name]
        return _without_unit(span_words(kind, digits, spans.at(site, name, inputs_only=alone)))

    return RangeRow(
        number=site.number,
        name=site.name,
        side=site.side,
        remark=where_words(site),
        **{name: ends(name, alone=False) for name in WITH_METHOD},
        spans={name: ends(name, alone=True) for name in WITH_METHOD},
    )


def _without_unit(words: Words) -> Words:
    """The same, for a column whose head names the unit."""
    return tuple(
        Amount(part.value, part.kind, part.digits, bare=True) if isinstance(part, Amount) else part for part in words
    )


def _crossing_row(spread: Spread) -> ChanceRow:
    worked = spread.members - len(spread.failed)
    return ChanceRow(
        ("the air crosses the range at all",), Amount(float(spread.crosses.sum()) / max(worked, 1), "share")
    )


def _chances(spans: Spans, spread: Spread) -> tuple[ChanceRow, ...]:
    """Chances of what matters most, among the members that cross."""
    values, site = spread.values, spans.main
    number = spans.column(site) or 0
    known = spans.crossing.flow.breaks_through is not None
    rain = spread.sites["rain"][:, number]
    rain = np.where(np.isfinite(rain), rain >= CHANCE_OF_RAIN, np.nan)
    cloud = np.where(spread.crosses, np.isfinite(values["cloud_base"]), np.nan)
    found: list[tuple[Words, float | None]] = [
        (
            ("the crossing air reaches the lee ground" + ("" if known else ", by hour and wind"),),
            chance_of(values["breaks_through"]),
        ),
        (("low air is blocked",), chance_of(values["blocked"])),
        (("cloud forms before the crest",), chance_of(cloud)),
        (
            (f"rain or snow at {site.name}, ", Amount(CHANCE_OF_RAIN, "rain_limit", 1), " or more"),
            chance_of(rain),
        ),
        (("waves break less than 3 km above the crest",), chance_of(values["wave_breaking"])),
    ]
    rows = tuple(ChanceRow(event, Amount(value, "share")) for event, value in found if value is not None)
    return (_crossing_row(spread), *rows)


def _winter_rows(winter: Mapping[str, float]) -> tuple[ChanceRow, ...]:
    """Dangers of cold ground that threaten in any member."""
    events = {"rain_on_snow": "rain falls on snow cover", "freezing_rain": "rain freezes on the ground of the lee"}
    return tuple(
        ChanceRow((event,), Amount(winter[name], "share"))
        for name, event in events.items()
        if winter.get(name, 0.0) > 0.0
    )


def _inputs(spread: Spread) -> tuple[InputRow, ...]:
    """What was drawn, and how far it may be off."""
    rows = []
    for name in spread.varied:
        words, kind, digits, unit = INPUTS[name]
        value = getattr(spread.uncertainty, name)
        rows.append(InputRow(words, (Amount(value, kind, digits), unit) if unit else (Amount(value, kind, digits),)))
    return tuple(rows)


def _panels(spans: Spans, spread: Spread) -> tuple[Panel, ...]:
    """What matters for temperature and dew point at the main site, and for the rain."""
    site = spans.main
    number = spans.column(site) or 0

    def panel(title: str, values: np.ndarray[tuple[int, ...], np.dtype[np.float64]], method: str = "") -> Panel:
        names = (*spread.varied, method) if method else spread.varied
        return Panel(title, influences(spread, values, names)[:MOST_BARS])

    found = [
        panel(f"Temperature at {site.name}", spread.full_sites["temperature"][:, number], "model_temperature"),
        panel(f"Dew point at {site.name}", spread.full_sites["dew_point"][:, number], "model_vapour"),
    ]
    total = spread.values["total"]
    if np.nanmedian(total) > 0.0:
        found.append(panel("All rain and snow on the line", total))
    return tuple(found)


def input_words(name: str) -> str:
    """An input, or the error of the method, in words."""
    return METHOD_NAME if name.startswith("model_") else INPUTS[name][0]
