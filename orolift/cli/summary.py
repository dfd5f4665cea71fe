"""The ten lines a crossing says on the terminal."""

from __future__ import annotations

from typing import TYPE_CHECKING

from orolift.report.quantities import quantity
from orolift.report.words import moment

if TYPE_CHECKING:
    from collections.abc import Callable

    from orolift.crossing.crossing import Crossing, LeeAir
    from orolift.report.quantities import Kind, Units
    from orolift.sources.case_model import Case

    Said = Callable[[float, Kind, int], str]

MOST_SITES = 4
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
            f"{said(crossing.crest_wind, 'wind')} across the crest"
        ),
        f"Cloud     {_cloud(crossing, said)}",
        f"Rain      {_rain(crossing, said)}",
    ]
    lines += [_site(site, said) for site in crossing.lee[:MOST_SITES]]
    if len(crossing.lee) > MOST_SITES:
        lines[-1] = f"          and {len(crossing.lee) - MOST_SITES + 1} more sites: see the report or --table"
    return lines


def _cloud(crossing: Crossing, said: Said) -> str:
    if crossing.cloud_base is None:
        return "none forms: the air stays unsaturated all the way"
    end = (
        "reaches the end of the line"
        if crossing.cloud_end is None
        else f"ends at {said(crossing.cloud_end, 'height', -1)} in the lee"
    )
    return f"base at {said(crossing.cloud_base, 'height', -1)} on the windward side, {end}"


def _rain(crossing: Crossing, said: Said) -> str:
    if crossing.condensed == 0.0:
        return "none: nothing condenses"
    return (
        f"{said(crossing.removed / crossing.vapour_in, 'share', 0)} of the vapour rains out "
        f"({said(crossing.removed_share, 'share', 0)} of what condenses, as prescribed)"
    )


def _site(site: LeeAir, said: Said) -> str:
    change = said(site.warming, "temperature_change", 1)
    return (
        f"{site.name[:24]} ({site.side})  {said(site.temperature, 'temperature', 1)}, "
        f"dew point {said(site.dew_point, 'temperature', 1)}, {said(site.relative_humidity, 'share', 0)}; "
        f"{change} against the air before the range"
    )
