"""A site through the hours: small figures under each other on one axis of time; gaps stay gaps."""

from __future__ import annotations

from dataclasses import dataclass, replace
from datetime import datetime
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import Layout, Scale, place
from orolift.report.figures.drawing import Curve, Figure, Label
from orolift.report.figures.many_hours import means, together_of
from orolift.report.figures.time_axis import TimeTick, time_ticks
from orolift.report.figures.timeline_panels import Panel, ends_of, panel_of, plans, rains
from orolift.report.figures.timeline_strips import Shown, blanks, state_strip, threshold_rows
from orolift.report.quantities import Kind, Units, quantity
from orolift.report.words import zone_words
from orolift.spread.timeline import values_of

if TYPE_CHECKING:
    from datetime import tzinfo

    from numpy.typing import NDArray

    from orolift.spread.timeline import Hours, SiteTimeline

    Array = NDArray[np.float64]

WIDE = Layout("wide", 960.0, 0.0, 58.0, 944.0, 30.0, 0.0, 14.0, 8)
NARROW = Layout("narrow", 344.0, 0.0, 40.0, 340.0, 28.0, 0.0, 12.5, 4)
GAP = 34.0
"""Room between two panels, drawing units."""


@dataclass(frozen=True)
class TimelineDrawing:
    """Everything the figure shows, from the back to the front."""

    layout: Layout
    blanks: tuple[Curve, ...]
    states: tuple[Curve, ...]
    days: tuple[Curve, ...]
    panels: tuple[Panel, ...]
    time_ticks: tuple[TimeTick, ...]
    day_words: float
    labels: tuple[Label, ...]


def timeline_figure(hours: Hours, number: int, zone: tzinfo, units: Units) -> Figure[TimelineDrawing]:
    """A site through the hours.

    Parameters
    ----------
    hours : Hours
    number : int
        Of the site.
    zone : tzinfo
        Of the axis.
    units : 'metric' or 'us'

    Returns
    -------
    Figure of TimelineDrawing
        Scales are those of all sites together, so that sites can be compared.
    """
    site, words = hours.sites[number], zone_words(datetime.fromtimestamp(hours.time[0], zone))
    together = together_of(hours.time.size)
    more = (
        "" if together == 1 else f" Lines span the lowest and highest of {together} hours; shorter gaps are not drawn."
    )
    bands = "" if site.ranges is None else "Bands hold 10 to 90 % of the members, the error of the method included. "
    return Figure(
        key=f"timeline-{number + 1}",
        drawing=_drawing(hours, number, zone, units, WIDE),
        narrow=_drawing(hours, number, zone, units, NARROW),
        title=f"{site.name} hour by hour",
        alt=_alt(site, units),
        caption=(
            f"Times are those at which the air is at the site, {words}. "
            "Upper strip: bold where descending warm dry air is there, from onset to end as said, thin where air "
            "crosses. Grey: nothing is known; "
            f"hatched: no air crosses. {bands}All sites have the same scales.{more}"
        ),
    )


def _alt(site: SiteTimeline, units: Units) -> str:
    parts = [f"{site.crossing_hours} of {len(site.states)} hours have air that crosses."]
    shown: tuple[tuple[str, Kind, str], ...] = (
        ("temperature", "temperature", "Temperature"),
        ("relative_humidity", "share", "Humidity"),
        ("wind_10m", "wind", "Wind at 10 m"),
        ("warming", "temperature_change", "Warming"),
    )
    for key, kind, name in shown:
        values = values_of(site.states, key)
        if np.isfinite(values).any():
            low, high = (quantity(float(end(values)), kind, 0, units) for end in (np.nanmin, np.nanmax))
            parts.append(f"{name} {low} to {high}.")
    if site.ranges is not None and np.isfinite(site.ranges.dry_wind.chance).any():
        most = quantity(float(np.nanmax(site.ranges.dry_wind.chance)), "share", 0, units)
        parts.append(f"Chance of descending warm dry air in an hour at most {most}.")
    return " ".join(parts)


def _drawing(hours: Hours, number: int, zone: tzinfo, units: Units, layout: Layout) -> TimelineDrawing:
    every = [plans(site) for site in hours.sites]
    if not any(rains(plan) for own in every for plan in own):
        every = [tuple(plan for plan in own if plan.quantity != "rain_rate") for own in every]
    site, own = hours.sites[number], every[number]
    ends = [float(end(one.arrival)) for one in hours.sites for end in (np.min, np.max)]
    half = 0.5 * hours.step
    across = Scale(min(ends) - half, max(ends) + half, layout.left, layout.right)
    together = together_of(hours.time.size)
    x = means(np.asarray(place(across, site.arrival)), together)
    width = half * together * across.units_per_value
    shown = Shown(across, x, width, together)
    dangers, words, below = threshold_rows(site, shown, layout)
    top = below + GAP
    panels = []
    for plan in own:
        frame = replace(layout, top=top, bottom=top + plan.height)
        same = [one for other in every for one in other if one.name == plan.name]
        panels.append(panel_of(plan, ends_of(same, units), x, frame, units, together))
        top = frame.bottom + GAP
    bottom = top - GAP
    whole = replace(layout, bottom=bottom, height=bottom + 7.0 + 2.7 * layout.letter)
    marks = time_ticks(across, zone, layout.letter)
    states, labels = state_strip(site, shown, layout)
    return TimelineDrawing(
        layout=whole,
        blanks=blanks(site, shown, layout.top, bottom),
        states=(*states, *dangers),
        days=tuple(
            Curve(f"M{tick.at} {below + GAP}V{bottom}", "grid")
            for tick in marks
            if tick.text == "00" or not any(one.day for one in marks)
        ),
        panels=tuple(panels),
        time_ticks=marks,
        day_words=round(whole.foot_words + 1.15 * layout.letter, 1),
        labels=(*labels, *words),
    )
