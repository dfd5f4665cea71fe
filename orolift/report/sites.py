"""The air at every site, where it comes from, beside the incoming air at its height."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.causes import PARTS
from orolift.report.key_numbers import gusts
from orolift.report.quantities import Amount, Kind
from orolift.report.sites_heading import sites_heading
from orolift.report.spans import Spans, changed, ranged, span_of
from orolift.report.story import first_sites, source_words, where_words

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing, LeeAir
    from orolift.fire.sites import SiteFire
    from orolift.report.words import Words

MOST_FULL = 24
"""Sites from which on the table has one short row for each (design choice)."""
MOST_FAILED = 12
"""Failed sites that are named for one reason."""
BAR_WIDTH = 200.0
BY = "by "
"""Before the name of a part of the warming."""
SMALL_PART = 0.05
"""Parts of the warming below this [K] read as nothing."""
MOST_LOW = 6
"""Sites below the upwind ground that are named."""


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
        Median of the heights it comes from; empty in a pool.
    went_round : Amount
    upwind_temperature, upwind_dew_point : Amount
        The incoming air at the same height.
    warming : Amount
        Site minus incoming air.
    spans : dict of str to Words
        Ranges of some of the columns, by their names; of the heights, 10 % and 90 % by mass.
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
    spans: dict[str, Words]


@dataclass(frozen=True)
class ShortRow:
    """One of very many sites; `spans` as in `SiteRow`."""

    number: int
    name: str
    side: str
    remark: str
    beyond_crest: Amount
    elevation: Amount
    temperature: Amount
    relative_humidity: Amount
    warming: Amount
    wind_10m: Amount | None
    source: Amount | None
    spans: dict[str, Words]


@dataclass(frozen=True)
class SideRow:
    """All sites of one side: how many, and from where to where their values reach."""

    side: str
    count: str
    temperature: Words
    relative_humidity: Words
    warming: Words
    wind_10m: Words


@dataclass(frozen=True)
class Panel:
    """A site by itself."""

    number: int
    name: str
    side: str
    remark: str
    facts: tuple[tuple[str, Words], ...]
    bar: tuple[Part, ...]
    met: tuple[str, ...]


@dataclass(frozen=True)
class Part:
    """A part of the warming in the bar of a panel, which is 200 wide: parts that cool left of the rest."""

    x: float
    width: float
    kind: str


@dataclass(frozen=True)
class Sites:
    """The sites.

    Attributes
    ----------
    heading : Words
        A conclusion.
    rows : tuple of SiteRow
        All sites, in the order of the case; empty where they are very many.
    short_rows : tuple of ShortRow
        Very many sites, the most warmed first.
    sides : tuple of SideRow
        What very many have in common.
    panels : tuple of Panel
        A dozen sites one by one.
    failed : tuple of (str, str)
        Sites of which nothing could be worked out, by the reason.
    remarks : tuple of Words
    """

    heading: Words
    rows: tuple[SiteRow, ...]
    short_rows: tuple[ShortRow, ...]
    sides: tuple[SideRow, ...]
    panels: tuple[Panel, ...]
    failed: tuple[tuple[str, str], ...]
    remarks: tuple[Words, ...]


def sites(crossing: Crossing, spans: Spans | None = None, fire: tuple[SiteFire, ...] = ()) -> Sites:
    """The sites of a crossing, in the order of the case.

    Parameters
    ----------
    crossing : Crossing
    spans : Spans, optional
        Ranges.
    fire : tuple of SiteFire
        For fuel and thresholds met.

    Returns
    -------
    Sites
    """
    spans = spans or Spans(crossing, None)
    by_number = {one.number: one for one in fire}
    many = len(crossing.lee) > MOST_FULL
    by_warmth = sorted(crossing.lee, key=lambda air: -air.warming) if many else []
    return Sites(
        heading=sites_heading(spans),
        rows=() if many else tuple(_row(air, air.number, spans) for air in crossing.lee),
        short_rows=tuple(_short(air, spans) for air in by_warmth),
        sides=_sides(crossing.lee) if many else (),
        panels=tuple(_panel(air, spans, by_number.get(air.number)) for air in first_sites(crossing).lee),
        failed=_failed(crossing),
        remarks=_remarks(crossing),
    )


def _beyond(air: LeeAir, crossing: Crossing) -> float:
    """Distance downwind of the crest of its line [m]."""
    return air.distance - crossing.features.crest_distance if air.own is None else air.own.beyond_crest


def _short(air: LeeAir, spans: Spans) -> ShortRow:
    row = ShortRow(
        number=air.number,
        name=air.name,
        side=air.side,
        remark=where_words(air),
        beyond_crest=Amount(_beyond(air, spans.crossing), "distance", 1),
        elevation=Amount(air.elevation, "height"),
        temperature=Amount(air.temperature, "temperature", 1),
        relative_humidity=Amount(air.relative_humidity, "share"),
        warming=Amount(air.warming, "temperature_change", 1),
        wind_10m=None if air.wind is None else Amount(air.wind.at_10m, "wind"),
        source=None if air.source_level is None else Amount(air.source_level, "height", -1),
        spans={"source": tuple(source_words(air)[2:5])},
    )
    found = {name: span_of(getattr(row, name), spans.at(air, name)) for name in _SHORT_RANGED}
    return replace(row, spans=row.spans | found)


def _sides(lee: tuple[LeeAir, ...]) -> tuple[SideRow, ...]:
    out = []
    for side in ("windward", "crest", "lee"):
        here = [air for air in lee if air.side == side]
        if not here:
            continue
        winds = [air.wind.at_10m for air in here if air.wind is not None]
        out.append(
            SideRow(
                side=side,
                count=str(len(here)),
                temperature=_from_to([air.temperature for air in here], "temperature", 1),
                relative_humidity=_from_to([air.relative_humidity for air in here], "share"),
                warming=_from_to([air.warming for air in here], "temperature_change", 1),
                wind_10m=_from_to(winds, "wind") if winds else ("–",),
            )
        )
    return tuple(out)


def _from_to(values: list[float], kind: Kind, digits: int = 0) -> Words:
    return (Amount(min(values), kind, digits, bare=True), " to ", Amount(max(values), kind, digits, bare=True))


def _panel(air: LeeAir, spans: Spans, fire: SiteFire | None) -> Panel:
    """What matters at one site, in words, with ranges."""
    crossing = spans.crossing
    facts: list[tuple[str, Words]] = [
        (
            "Air",
            (
                *ranged(Amount(air.temperature, "temperature", 1), spans.temperature(air)),
                ", dew point ",
                *ranged(Amount(air.dew_point, "temperature", 1), spans.dew_point(air)),
                ", ",
                *ranged(Amount(air.relative_humidity, "share"), spans.at(air, "relative_humidity")),
            ),
        ),
        (
            "Warming",
            changed(
                air.warming,
                spans.warming(air),
                "warmer than the incoming air",
                "cooler than the incoming air",
                "as the incoming air",
            ),
        ),
    ]
    for key, value in _parts(air):
        part = ranged(Amount(value, "temperature_change", 1), spans.part(air, key))
        facts.append((f"{BY}{PARTS[key]}", part))
    if air.wind is not None:
        at_10m = ranged(Amount(air.wind.at_10m, "wind"), spans.at(air, "wind_10m"))
        facts.append(("Wind", (*at_10m, " at 10 m, gusts ", *gusts(spans, air.wind, air))))
    if air.source_level is not None:
        facts.append(("Comes from", source_words(air)))
    crest = crossing.features.crest if air.own is None else air.own.crest
    beyond = _beyond(air, crossing)
    where = " behind" if beyond >= 0.0 else " before"
    facts.append(("Crest", (Amount(crest, "height"), ", ", Amount(abs(beyond), "distance", 1), where)))
    if air.own is not None:
        wind, top = (
            ranged(Amount(air.own.crest_wind, "wind"), spans.own_line(air, "cross_range_wind")),
            air.own.blocked_top,
        )
        stopped: Words = ("; blocked below ", *ranged(Amount(top, "height", -1), spans.own_line(air, "blocked_top")))
        if top <= air.own.base + 1.0:
            stopped = ("; nothing is blocked",)
        facts.append(("Own line", (*wind, " across its crest", *stopped)))
    met: tuple[str, ...] = ()
    if fire is not None:
        facts.append(("Fuel", _fuel(fire)))
        met = tuple(one.judged.rule.name for one in fire.thresholds if one.judged.status == "met")
    return Panel(air.number, air.name, air.side, where_words(air), tuple(facts), _bar(air), met)


def _parts(air: LeeAir) -> list[tuple[str, float]]:
    """Parts of the warming that are not as good as nothing, by their keys."""
    if air.parts is None or air.in_blocked_air:
        return []
    found = [(key, float(getattr(air.parts, key))) for key in PARTS]
    return [(key, value) for key, value in found if abs(value) >= SMALL_PART]


def _bar(air: LeeAir) -> tuple[Part, ...]:
    """The parts side by side: those that cool end where those that warm begin."""
    parts = [value for _, value in _parts(air)]
    whole = sum(abs(value) for value in parts)
    out, x = [], 0.0
    for value in [*(v for v in parts if v < 0.0), *(v for v in parts if v > 0.0)]:
        width = BAR_WIDTH * abs(value) / whole
        out.append(Part(round(x, 1), round(max(width - 1.0, 0.5), 1), "warms" if value > 0.0 else "cools"))
        x += width
    return tuple(out)


def _fuel(fire: SiteFire) -> Words:
    """Moisture of fine dead fuel and the Fosberg index, with drought where that is known."""
    air, ends = fire.indices, fire.ranges
    moisture = Amount(float(air.equilibrium_fuel_moisture), "share", 1)
    out: list[str | Amount] = [*ranged(moisture, ends.get("equilibrium_fuel_moisture")), " moisture"]
    for words, name in ((", Fosberg index ", "fosberg_index"), (", with drought ", "fosberg_index_with_drought")):
        index = float(getattr(air, name))
        if math.isfinite(index):
            out += [words, *ranged(Amount(index, "plain"), ends.get(name))]
    return tuple(out)


def _failed(crossing: Crossing) -> tuple[tuple[str, str], ...]:
    """Names of failed sites, put together by their reason."""
    by_reason: dict[str, list[str]] = {}
    for site in crossing.failed:
        by_reason.setdefault(site.reason, []).append(site.name)
    out = []
    for reason, names in by_reason.items():
        more = f" and {len(names) - MOST_FAILED} more" if len(names) > MOST_FAILED else ""
        out.append((", ".join(names[:MOST_FAILED]) + more, reason))
    return tuple(out)


def _row(air: LeeAir, number: int, spans: Spans) -> SiteRow:
    row = SiteRow(
        number=number,
        name=air.name,
        side=air.side,
        remark=where_words(air),
        distance=Amount(air.distance + spans.crossing.transect.origin, "distance", 1),
        elevation=Amount(air.elevation, "height"),
        temperature=Amount(air.temperature, "temperature", 1),
        dew_point=Amount(air.dew_point, "temperature", 1),
        relative_humidity=Amount(air.relative_humidity, "share"),
        mixing_ratio=Amount(air.mixing_ratio, "mixing_ratio", 1),
        source=source_words(air)[:1],
        went_round=Amount(air.went_round, "share"),
        upwind_temperature=Amount(air.upwind_temperature, "temperature", 1),
        upwind_dew_point=Amount(air.upwind_dew_point, "temperature", 1),
        warming=Amount(air.warming, "temperature_change", 1),
        spans={"source": tuple(source_words(air)[2:5])},
    )
    found = {name: span_of(getattr(row, name), spans.at(air, name)) for name in _RANGED}
    return replace(row, spans=row.spans | found)


_RANGED = (
    "temperature",
    "dew_point",
    "relative_humidity",
    "mixing_ratio",
    "went_round",
    "upwind_temperature",
    "upwind_dew_point",
    "warming",
)
"""Columns that carry a range of the members."""
_SHORT_RANGED = ("temperature", "relative_humidity", "warming", "wind_10m")
"""The same where there are very many sites."""


def _remarks(crossing: Crossing) -> tuple[Words, ...]:
    heights = (
        " above it, mixed. It comes from the heights named: half of it, by mass, started below the first, a tenth "
        "below and a tenth above those beneath it."
    )
    depth = Amount(float(np.asarray(crossing.settings.mixing_depth)), "height")
    out: list[Words] = [("A site has the air of the lowest ", depth, heights)]
    ground = float(crossing.incoming.height[0])
    low = [air.name for air in crossing.lee if air.elevation < ground]
    if low:
        more = f" and {len(low) - MOST_LOW} more" if len(low) > MOST_LOW else ""
        named = f"{', '.join(low[:MOST_LOW])}{more}"
        out.append(
            (
                f"Below the upwind ground at {named}: the incoming air is continued down from ",
                Amount(ground, "height"),
                ", so the comparison there is with air that does not exist.",
            )
        )
    return tuple(out)
