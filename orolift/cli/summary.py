"""The ten lines a crossing says on the terminal."""

from __future__ import annotations

from typing import TYPE_CHECKING

from orolift.report.how_sure import span_words
from orolift.report.quantities import Amount
from orolift.report.spans import Spans, ranged
from orolift.report.words import moment, plain, short_name

if TYPE_CHECKING:
    from typing import Protocol

    from orolift.crossing.result import Crossing, LeeAir
    from orolift.report.quantities import Kind, Units
    from orolift.sources.case_model import Case
    from orolift.spread.spread import Spread

    class Said(Protocol):
        """A number in words, with its range."""

        def __call__(self, value: float, kind: Kind, digits: int = 0, ends: tuple[float, float] | None = None) -> str:
            """Text of the number."""


MOST_SITES = 3
"""Sites shown on the terminal; the table and the report have all."""


def summary_lines(crossing: Crossing, case: Case, name: str, units: Units, spread: Spread | None = None) -> list[str]:
    """What happened, in at most ten lines.

    Parameters
    ----------
    crossing : Crossing
    case : Case
    name : str
        Stands for a missing title.
    units : 'metric' or 'us'
    spread : Spread, optional
        Members, for the ranges.

    Returns
    -------
    list of str
    """
    spans = Spans(crossing, spread)

    def said(value: float, kind: Kind, digits: int = 0, ends: tuple[float, float] | None = None) -> str:
        return plain(ranged(Amount(value, kind, digits), ends), units).replace("\u00a0", " ")

    shape, air = crossing.features, crossing.incoming
    when = "" if case.valid_time is None else f", {moment(case.valid_time)}"
    lines = [
        f"{case.title or name}{when}",
        (
            f"Terrain   base {said(shape.base, 'height')}, crest {said(shape.crest, 'height')}, "
            f"lee foot {said(shape.lee_foot, 'height')}"
        ),
        (
            f"Incoming  {said(float(air.temperature[0]), 'temperature', 1, spans.of('temperature'))} at "
            f"{said(float(air.height[0]), 'height')}; "
            f"{said(crossing.flow.crest_wind, 'wind', 0, spans.of('cross_range_wind'))} across the crest"
        ),
        f"Flow      {_flow(spans, said)}",
        f"Cloud     {_cloud(spans, said)}",
        f"Rain      {_rain(spans, said)}",
    ]
    lines += [_site(spans, site, said) for site in crossing.lee[:MOST_SITES]]
    if len(crossing.lee) > MOST_SITES:
        lines[-1] = f"          and {len(crossing.lee) - MOST_SITES + 1} more sites: see the report or --table"
    return lines


def members_words(crossing: Crossing, units: Units, spread: Spread | None) -> str:
    """What the ranges are, and that of the main site by the inputs alone, for the last line; empty without members."""
    if spread is None:
        return ""
    spans = Spans(crossing, spread)
    alone = span_words("temperature", 1, spans.at(spans.main, "temperature", inputs_only=True))
    inputs = f"; by the inputs alone {spans.main.name} has {plain(alone, units)}" if alone else ""
    lost = f", {len(spread.failed)} failed" if spread.failed else ""
    still = spread.members - len(spread.failed) - int(spread.crosses.sum())
    calm = f", {still} without a crossing" if still else ""
    return f"; ranges: 10 to 90 % of {spread.members} members{calm}{lost}{inputs}".replace("\u00a0", " ")


def _cloud(spans: Spans, said: Said) -> str:
    cloud = spans.crossing.cloud
    if cloud.base is None:
        return "none forms: the air stays unsaturated all the way"
    end = "" if cloud.end is None else f", ends at {said(cloud.end, 'height', -1, spans.of('cloud_end'))} in the lee"
    return f"base at {said(cloud.base, 'height', -1, spans.of('cloud_base'))} on the windward side{end}"


def _flow(spans: Spans, said: Said) -> str:
    from orolift.report.story import regime_words

    flow = spans.crossing.flow
    number = f"N h/U {said(flow.nondimensional_height, 'plain', 1, spans.of('nondimensional_height'))}"
    if flow.blocked_top <= spans.crossing.features.base + 1.0:
        return f"{regime_words(spans.crossing)}, {number}; no layer is stopped"
    return f"{flow.regime}, {number}; blocked up to {said(flow.blocked_top, 'height', -1, spans.blocked_top())}"


def _rain(spans: Spans, said: Said) -> str:
    crossing, water = spans.crossing, spans.crossing.water
    if water.condensed == 0.0 or crossing.cloud.base is None:
        return "none: nothing condenses"
    windward = crossing.rain.windward_share
    side = (
        ""
        if windward is None
        else f"; {said(windward, 'share', 0, spans.of('windward_share'))} of it on the windward side"
    )
    return (
        f"{said(water.removed / water.vapour_in, 'share', 0, spans.drying())} of the crossing vapour rains out, "
        f"{said(water.removed / water.condensed, 'share', 0, spans.of('rain_out_share'))} of what condenses{side}"
    )


def _site(spans: Spans, site: LeeAir, said: Said) -> str:
    change = said(site.warming, "temperature_change", 1, spans.at(site, "warming"))
    source = "in the cold pool" if site.source_level is None else f"from {_source(site, said)}"
    return (
        f"{short_name(site.name)} ({site.side})  {said(site.temperature, 'temperature', 1, spans.temperature(site))}, "
        f"dew point {said(site.dew_point, 'temperature', 1, spans.dew_point(site))}, "
        f"{said(site.relative_humidity, 'share', 0, spans.at(site, 'relative_humidity'))}; "
        f"{change}; air {source}"
    )


def _source(site: LeeAir, said: Said) -> str:
    """The median height the air comes from, and where the middle eight tenths of it come from, by mass."""
    low, high = (
        said(level or 0.0, "height", -1).split(" ") for level in (site.source_level_low, site.source_level_high)
    )
    median = said(site.source_level or 0.0, "height", -1)
    return median if low == high else f"{median} (eight tenths of it from {low[0]} to {high[0]})"
