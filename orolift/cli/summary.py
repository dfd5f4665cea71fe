"""The ten lines a crossing says on the terminal."""

from __future__ import annotations

from typing import TYPE_CHECKING

from orolift.report.quantities import quantity
from orolift.report.words import moment

if TYPE_CHECKING:
    from collections.abc import Callable

    from orolift.crossing.result import Crossing, LeeAir
    from orolift.report.quantities import Kind, Units
    from orolift.sources.case_model import Case

    Said = Callable[[float, Kind, int], str]

MOST_SITES = 3
"""Sites shown on the terminal; the table and the report have all."""


def summary_lines(crossing: Crossing, case: Case, name: str, units: Units) -> list[str]:
    """What happened, in at most ten lines.

    Parameters
    ----------
    crossing : Crossing
    case : Case
    name : str
        Stands for a missing title.
    units : 'metric' or 'us'

    Returns
    -------
    list of str
    """

    def said(value: float, kind: Kind, digits: int = 0) -> str:
        return quantity(value, kind, digits, units).replace("\u00a0", " ")

    shape, air = crossing.features, crossing.incoming
    when = "" if case.valid_time is None else f", {moment(case.valid_time)}"
    lines = [
        f"{case.title or name}{when}",
        (
            f"Terrain   base {said(shape.base, 'height')}, crest {said(shape.crest, 'height')}, "
            f"lee foot {said(shape.lee_foot, 'height')}"
        ),
        (
            f"Incoming  {said(float(air.temperature[0]), 'temperature', 1)} at {said(float(air.height[0]), 'height')}; "
            f"{said(crossing.flow.crest_wind, 'wind', 0)} across the crest"
        ),
        f"Flow      {_flow(crossing, said)}",
        f"Cloud     {_cloud(crossing, said)}",
        f"Rain      {_rain(crossing, said)}",
    ]
    lines += [_site(site, said) for site in crossing.lee[:MOST_SITES]]
    if len(crossing.lee) > MOST_SITES:
        lines[-1] = f"          and {len(crossing.lee) - MOST_SITES + 1} more sites: see the report or --table"
    return lines


def _cloud(crossing: Crossing, said: Said) -> str:
    cloud = crossing.cloud
    if cloud.base is None:
        return "none forms: the air stays unsaturated all the way"
    end = "" if cloud.end is None else f", ends at {said(cloud.end, 'height', -1)} in the lee"
    return f"base at {said(cloud.base, 'height', -1)} on the windward side{end}"


def _flow(crossing: Crossing, said: Said) -> str:
    flow = crossing.flow
    if flow.blocked_top <= crossing.features.base + 1.0:
        return f"{flow.regime} (N h/U {flow.nondimensional_height:.1f}); no layer is stopped"
    return (
        f"{flow.regime} (N h/U {flow.nondimensional_height:.1f}); blocked up to {said(flow.blocked_top, 'height', -1)} "
        f"({said(flow.blocked_top_low, 'height', -1)} to {said(flow.blocked_top_high, 'height', -1)})"
    )


def _rain(crossing: Crossing, said: Said) -> str:
    water = crossing.water
    if water.condensed == 0.0:
        return "none: nothing condenses"
    windward = crossing.rain.windward_share
    side = "" if windward is None else f", {said(windward, 'share', 0)} of it on the windward side"
    return (
        f"{said(water.removed / water.vapour_in, 'share', 0)} of the crossing vapour rains out "
        f"({said(water.removed / water.condensed, 'share', 0)} of what condenses){side}"
    )


def _site(site: LeeAir, said: Said) -> str:
    change = said(site.warming, "temperature_change", 1)
    source = "in the cold pool" if site.source_level is None else f"from {said(site.source_level, 'height', -1)}"
    return (
        f"{site.name[:24]} ({site.side})  {said(site.temperature, 'temperature', 1)}, "
        f"dew point {said(site.dew_point, 'temperature', 1)}, {said(site.relative_humidity, 'share', 0)}; "
        f"{change}; air {source}"
    )
