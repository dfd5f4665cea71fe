"""The page as data: raw numbers and words, no HTML."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.air.column import freezing_level
from orolift.crossing.crossing import toward
from orolift.report.answers import Answers, answers
from orolift.report.briefing import Briefing, briefing
from orolift.report.causes import Causes, causes
from orolift.report.cautions import Cautions, cautions
from orolift.report.figures.answers import answers_figure
from orolift.report.figures.budget import budget
from orolift.report.figures.column import column
from orolift.report.figures.gauge_scatter import gauge_scatter
from orolift.report.figures.influences import influences_figure
from orolift.report.figures.path import path
from orolift.report.figures.rain_line import rain_line
from orolift.report.figures.section import section
from orolift.report.fire import FireWeather, fire_weather
from orolift.report.how_sure import HowSure, how_sure
from orolift.report.inputs import Inputs, inputs
from orolift.report.lee_map import LeeOnMap, lee_on_map
from orolift.report.lee_wind import LeeWind, lee_wind
from orolift.report.method import Method, method
from orolift.report.places import Journey, journey, section_heading
from orolift.report.quantities import Units, quantity
from orolift.report.rain import RainOnLine, rain_on_line
from orolift.report.rain_over_map import RainOverMap, rain_over_map
from orolift.report.reading import Reading, reading
from orolift.report.sites import Sites, sites
from orolift.report.spans import Spans
from orolift.report.story import first_sites, line_view
from orolift.report.trace import trace
from orolift.report.words import Words, moment, point_of_compass

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping
    from datetime import datetime

    from orolift.crossing.result import Crossing
    from orolift.fire.rules import RuleSet
    from orolift.fire.sites import SiteFire
    from orolift.report.figures.answers import AnswersDrawing
    from orolift.report.figures.budget import BudgetDrawing
    from orolift.report.figures.column import ColumnDrawing
    from orolift.report.figures.drawing import Figure
    from orolift.report.figures.gauge_scatter import ScatterDrawing
    from orolift.report.figures.influences import InfluencesDrawing
    from orolift.report.figures.lee_map import LeeMapDrawing
    from orolift.report.figures.path import PathDrawing
    from orolift.report.figures.rain_line import RainLineDrawing
    from orolift.report.figures.rain_map import RainMapDrawing
    from orolift.report.figures.section import SectionDrawing
    from orolift.report.figures.sites_map import SitesMapDrawing
    from orolift.sources.map_inputs import Mapped
    from orolift.sources.quality import Finding
    from orolift.sources.strips import MappedLee
    from orolift.spread.spread import Spread


SEVERITIES = ("wrong", "doubtful", "remark")
"""Severities of findings as the page lists them."""


@dataclass(frozen=True)
class Page:
    """Everything the report shows.

    Attributes
    ----------
    title : str
    valid, made : str
        In words; `valid` is empty when the case names no time.
    version : str
    units : 'metric' or 'us'
    briefing : Briefing
    section_heading : Words
    section : Figure
    reading : Reading
    journey : Journey
    path : Figure
    causes : Causes
    budget : Figure or None
    rain : RainOnLine
    rain_line : Figure or None
    rain_over_map : RainOverMap or None
    rain_map : Figure or None
    gauge_scatter : Figure or None
    sites : Sites
    sites_map : Figure or None
    lee_map : LeeOnMap or None
    fire : FireWeather or None
    how_sure : HowSure
    influences : Figure or None
    answers : Answers
    answers_figure : Figure or None
    lee_wind : LeeWind
    inputs : Inputs
    column : Figure
    findings : tuple of Finding
        Of quality control, the gravest first.
    method : Method
    cautions : Cautions
    """

    title: str
    valid: str
    made: str
    version: str
    units: Units
    briefing: Briefing
    section_heading: Words
    section: Figure[SectionDrawing]
    reading: Reading
    journey: Journey
    path: Figure[PathDrawing]
    causes: Causes
    budget: Figure[BudgetDrawing] | None
    rain: RainOnLine
    rain_line: Figure[RainLineDrawing] | None
    rain_over_map: RainOverMap | None
    rain_map: Figure[RainMapDrawing] | None
    gauge_scatter: Figure[ScatterDrawing] | None
    sites: Sites
    sites_map: Figure[SitesMapDrawing] | None
    lee_map: LeeOnMap | None
    fire: FireWeather | None
    how_sure: HowSure
    influences: Figure[InfluencesDrawing] | None
    answers: Answers
    answers_figure: Figure[AnswersDrawing] | None
    lee_wind: LeeWind
    inputs: Inputs
    column: Figure[ColumnDrawing]
    findings: tuple[Finding, ...]
    method: Method
    cautions: Cautions


def page_of(
    crossing: Crossing,
    *,
    title: str | None,
    valid_time: datetime | None,
    made_at: datetime,
    version: str,
    case_text: str | None = None,
    units: Units = "metric",
    mapped: Mapped | None = None,
    lee: MappedLee | None = None,
    flags: tuple[str, ...] = (),
    findings: Iterable[Finding] = (),
    stagnant_top: float | None = None,
    fire: tuple[SiteFire, ...] = (),
    rules: RuleSet | None = None,
    spread: Spread | None = None,
    winter: Mapping[str, float] | None = None,
) -> Page:
    """The page of a crossing.

    Parameters
    ----------
    crossing : Crossing
    title : str or None
        None takes one from wind and crest.
    valid_time : datetime or None
        When the case is valid, with its zone.
    made_at : datetime
        When the report is made; passed in so that equal input gives equal pages.
    version : str
        Of orolift.
    case_text : str, optional
        The case file, printed word for word.
    units : 'metric' or 'us'
    mapped : Mapped, optional
        Rain over the map.
    lee : MappedLee, optional
        The lee as a map.
    flags : tuple of str
        Danger thresholds reached.
    findings : iterable of Finding
        What quality control has seen in the incoming air.
    stagnant_top : float, optional [m above sea level]
        Top of a stagnant layer at the ground of the incoming air, kept out of the inflow.
    fire : tuple of SiteFire
        Fire weather at the sites, in their order; without, its section is left out.
    rules : RuleSet, optional
        Thresholds it was judged by.
    spread : Spread, optional
        Members, for the ranges.
    winter : mapping of str to float, optional
        Chances of the dangers of cold ground, from `orolift.spread.winter_chances.winter_chances`.

    Returns
    -------
    Page
    """
    bearing = (toward(crossing.transect, crossing.incoming) + math.pi) % (2.0 * math.pi)
    freezing = float(freezing_level(crossing.incoming))
    line, few = line_view(crossing), first_sites(crossing)
    followed = trace(line)
    on_line, first = Spans(line, spread, crossing), Spans(few, spread, crossing)
    sure = how_sure(first, winter)
    crest = quantity(crossing.features.crest, "height", 0, units)
    return Page(
        title=title or f"Air from the {point_of_compass(bearing)} over a crest at {crest}",
        valid="" if valid_time is None else moment(valid_time),
        made=moment(made_at),
        version=version,
        units=units,
        briefing=briefing(line, bearing, freezing, on_line),
        section_heading=section_heading(on_line, followed),
        section=section(line, followed, bearing, freezing, units, on_line.of("blocked_top")),
        reading=reading(line, units),
        journey=journey(on_line, followed),
        path=path(line, followed, units),
        causes=causes(first),
        budget=budget(first, units),
        rain=rain_on_line(line, flags, units, on_line),
        rain_line=rain_line(line, None if mapped is None else mapped.rain.on_line, units),
        rain_over_map=None if mapped is None else rain_over_map(mapped, units),
        rain_map=None if mapped is None or mapped.rain.is_dry else _rain_map(crossing, mapped, units),
        gauge_scatter=None if mapped is None else gauge_scatter(mapped.rain, units),
        sites=sites(crossing, Spans(crossing, spread), fire),
        sites_map=None if mapped is None else _sites_map(crossing, mapped, units),
        how_sure=sure,
        influences=influences_figure(sure),
        lee_map=None if lee is None else lee_on_map(lee, _lee_maps(crossing, lee, units)),
        fire=fire_weather(crossing, fire, rules) if fire else None,
        answers=answers(first),
        answers_figure=answers_figure(few, units),
        lee_wind=lee_wind(Spans(crossing, spread), few.lee),
        inputs=inputs(on_line, bearing, freezing, case_text, units),
        column=column(line, stagnant_top, units),
        findings=tuple(sorted(findings, key=lambda finding: SEVERITIES.index(finding.severity))),
        method=method(),
        cautions=cautions(first, valid_time),
    )


def _rain_map(crossing: Crossing, mapped: Mapped, units: Units) -> Figure[RainMapDrawing]:
    """The map of rain; its module needs what only cases with a raster need."""
    from orolift.report.figures.rain_map import rain_map_figure

    return rain_map_figure(crossing, mapped, units)


def _sites_map(crossing: Crossing, mapped: Mapped, units: Units) -> Figure[SitesMapDrawing] | None:
    """The map of the sites; its module needs what only cases with a raster need."""
    from orolift.report.figures.sites_map import sites_map_figure

    return sites_map_figure(crossing, mapped, units)


def _lee_maps(crossing: Crossing, lee: MappedLee, units: Units) -> tuple[Figure[LeeMapDrawing], ...]:
    """The maps of the lee; their module needs what only cases with a raster need."""
    from orolift.report.figures.lee_map import lee_map_figures

    return lee_map_figures(crossing, lee, units)
