"""A site through the hours: small figures under each other on one axis of time; gaps stay gaps."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from datetime import datetime
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import Layout, Scale, Tick, level_ticks, place, round_step
from orolift.report.figures.drawing import Curve, Figure, Label, area, polyline
from orolift.report.figures.many_hours import all_of, any_of, means, runs, spans, together_of
from orolift.report.figures.placing import Board, Box, put, text_width
from orolift.report.figures.time_axis import TimeTick, time_ticks
from orolift.report.quantities import Kind, Units, displayed, first_unit, from_displayed, quantity
from orolift.report.words import rounded_time, zone_words
from orolift.spread.timeline import values_of

if TYPE_CHECKING:
    from datetime import tzinfo

    from numpy.typing import NDArray

    from orolift.spread.timeline import Hours, SiteTimeline, Stretch

    Array = NDArray[np.float64]

WIDE = Layout("wide", 960.0, 0.0, 58.0, 944.0, 30.0, 0.0, 14.0, 8)
NARROW = Layout("narrow", 344.0, 0.0, 40.0, 340.0, 28.0, 0.0, 12.5, 4)
GAP = 34.0
"""Room between two panels, drawing units."""
STRIP = 10.0
"""Height of the strip of states at the top, drawing units."""


NO_RAIN = 0.05 / 3600.0
"""Sum over the hours [kg m-2 s-1] up to which rain has no panel of its own: it would read as none."""


@dataclass(frozen=True)
class Line:
    """One line of a panel: its values through the hours, and what it is called."""

    values: Array
    kind: str
    name: str


@dataclass(frozen=True)
class PanelPlan:
    """One panel before it is drawn.

    Attributes
    ----------
    name : str
    quantity : Kind
    height : float
        Drawing units.
    lines : tuple of Line
    floor : float or None
        Value the scale starts at; None leaves room below.
    least : float
        Span [SI] of the scale at least.
    filled : bool
        Whether the first line is filled down to the floor.
    """

    name: str
    quantity: Kind
    height: float
    lines: tuple[Line, ...]
    floor: float | None = None
    least: float = 1.0
    filled: bool = False


@dataclass(frozen=True)
class Panel:
    """One panel as it is drawn."""

    layout: Layout
    ticks: tuple[Tick, ...]
    curves: tuple[Curve, ...]
    labels: tuple[Label, ...]


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
            f"hatched: no air crosses. All sites have the same scales.{more}"
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
    return " ".join(parts)


def plans(site: SiteTimeline) -> tuple[PanelPlan, ...]:
    """The panels of a site.

    Parameters
    ----------
    site : SiteTimeline

    Returns
    -------
    tuple of PanelPlan
    """

    def line(key: str, kind: str, name: str) -> Line:
        return Line(values_of(site.states, key), kind, name)

    found = [
        PanelPlan(
            "Temperature and dew point",
            "temperature",
            104.0,
            (line("temperature", "warm", "temperature"), line("dew_point", "dew", "dew point")),
            least=8.0,
        ),
        PanelPlan(
            "Relative humidity",
            "share",
            64.0,
            (line("relative_humidity", "dew", "humidity"),),
            floor=0.0,
            least=1.0,
        ),
        PanelPlan(
            "Wind at 10 m and gusts",
            "wind",
            64.0,
            (line("wind_10m", "speed", "wind"), line("gust", "speed aloft", "gusts")),
            floor=0.0,
            least=5.0,
        ),
        PanelPlan(
            "Warmer than the incoming air at the height of the site",
            "temperature_difference",
            64.0,
            (line("warming", "warm", "warming"),),
            least=4.0,
        ),
        PanelPlan("Rain and snow", "rain_rate", 48.0, (line("rain", "dew", "rain"),), 0.0, 1.0 / 3600.0, filled=True),
    ]
    if np.isfinite(site.fine_fuel_code).any():
        code = Line(site.fine_fuel_code, "ink-line", "code")
        found.append(PanelPlan("Fine Fuel Moisture Code, carried on", "plain", 56.0, (code,), least=20.0))
    return tuple(found)


def _range(panels: list[PanelPlan], units: Units) -> tuple[float, float]:
    """Ends of the scale of one panel over all sites, round in the shown unit."""
    first = panels[0]
    values = np.concatenate([line.values for plan in panels for line in plan.lines])
    known = values[np.isfinite(values)]
    low, high = (float(known.min()), float(known.max())) if known.size else (0.0, first.least)
    if first.floor is not None:
        low = first.floor
    short = max(first.least - (high - low), 0.0)
    low, high = (low, high + short) if first.floor is not None else (low - 0.5 * short, high + 0.5 * short)
    a, b = displayed(low, first.quantity, units), displayed(high, first.quantity, units)
    step = round_step(b - a, 3)
    down, up = np.floor(a / step + 1e-6) * step, np.ceil(b / step - 1e-6) * step
    return from_displayed(float(down), first.quantity, units), from_displayed(float(up), first.quantity, units)


def _drawing(hours: Hours, number: int, zone: tzinfo, units: Units, layout: Layout) -> TimelineDrawing:
    every = [plans(site) for site in hours.sites]
    if not any(np.nansum(line.values) > NO_RAIN for own in every for plan in own if plan.filled for line in plan.lines):
        every = [tuple(plan for plan in own if not plan.filled) for own in every]
    site, own = hours.sites[number], every[number]
    ends = [float(end(one.arrival)) for one in hours.sites for end in (np.min, np.max)]
    half = 0.5 * hours.step
    across = Scale(min(ends) - half, max(ends) + half, layout.left, layout.right)
    together = together_of(hours.time.size)
    x = means(np.asarray(place(across, site.arrival)), together)
    width = half * together * across.units_per_value
    shown = Shown(across, x, width, together)
    dangers, words, below = _dangers(site, shown, layout)
    top = below + GAP
    panels = []
    for i, plan in enumerate(own):
        frame = replace(layout, top=top, bottom=top + plan.height)
        same = [one[i] for one in every if len(one) > i]
        panels.append(_panel(plan, _range(same, units), x, frame, units, together))
        top = frame.bottom + GAP
    bottom = top - GAP
    whole = replace(layout, bottom=bottom, height=bottom + 7.0 + 2.7 * layout.letter)
    marks = time_ticks(across, zone, layout.letter)
    states, labels = _states(site, shown, layout)
    return TimelineDrawing(
        layout=whole,
        blanks=_blanks(site, x, width, layout.top, bottom),
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


@dataclass(frozen=True, eq=False)
class Shown:
    """Where hours stand.

    Attributes
    ----------
    across : Scale
        Of the time.
    x : ndarray (n,)
        Middle of each hour, or of each `together`, in drawing units.
    half : float
        Half of its width.
    together : int
        Hours drawn as one.
    """

    across: Scale
    x: Array
    half: float
    together: int

    def at(self, time: float, error: float | None) -> float:
        """Place of a time as the words have it, in drawing units."""
        return float(place(self.across, rounded_time(time, error or 0.0)))

    def bars(self, one: Stretch, known: NDArray[np.bool_]) -> list[tuple[float, float]]:
        """Ends of a stretch in drawing units: from its onset to its end as they are said, without hours not known."""
        inside = np.zeros(known.size, dtype=np.bool_)
        inside[one.first : one.last + 1] = known[one.first : one.last + 1]
        found = [(self.x[a] - self.half, self.x[b - 1] + self.half) for a, b in runs(any_of(inside, self.together))]
        ends = [[float(a), float(b)] for a, b in found]
        if one.onset is not None:
            ends[0][0] = self.at(one.onset, one.onset_error)
        if one.end is not None:
            ends[-1][1] = self.at(one.end, one.end_error)
        return [(a, max(b, a + 1.0)) for a, b in ends]


def _dangers(site: SiteTimeline, shown: Shown, layout: Layout) -> tuple[tuple[Curve, ...], tuple[Label, ...], float]:
    """A row for each threshold of the region, marked where it is met; and where the rows end."""
    curves, labels = [], []
    bottom = layout.top + STRIP
    for one in site.thresholds:
        bottom += 2.1 * layout.letter
        y = bottom - 0.35 * layout.letter
        curves.append(Curve(f"M{layout.left} {y:.1f}H{layout.right}", "grid"))
        curves += [
            Curve(f"M{a:.1f} {y:.1f}H{b:.1f}", "met")
            for stretch in one.stretches
            for a, b in shown.bars(stretch, one.judged)
        ]
        words = f"threshold met: {one.rule.name}" if one.met.any() else f"threshold not met: {one.rule.name}"
        kind = "note danger-words" if one.met.any() else "note"
        labels.append(Label(words, layout.left, round(y - 0.5 * layout.letter, 1), "start", kind))
    return tuple(curves), tuple(labels), bottom


def _blanks(site: SiteTimeline, x: Array, half: float, top: float, bottom: float) -> tuple[Curve, ...]:
    """Stretches without air that crosses: nothing known, and no crossing."""
    out = []
    together = math.ceil(len(site.states) / x.size)
    for status, kind in (("missing", "unknown"), ("no crossing", "no-crossing")):
        flags = all_of((state.status == status for state in site.states), together)
        for first, last in runs(flags):
            a, b = x[first] - half, max(x[last - 1] + half, x[first] - half + 1.0)
            box = f"M{a:.1f} {top:.1f}H{b:.1f}V{bottom:.1f}H{a:.1f}Z"
            out.append(Curve(box, kind))
            if status == "no crossing":
                out.append(Curve(_hatch(float(a), float(b), top, bottom), "no-crossing hatch"))
    return tuple(out)


def _hatch(left: float, right: float, top: float, bottom: float) -> str:
    """Slanting strokes over a box, 9 units apart and at 45 degrees, cut at its edges."""
    strokes = []
    depth = bottom - top
    start = left - depth
    while start < right:
        a, b = max(start, left), min(start + depth, right)
        if b > a:
            strokes.append(f"M{a:.1f} {bottom - (a - start):.1f}L{b:.1f} {bottom - (b - start):.1f}")
        start += 9.0
    return "".join(strokes)


def _states(site: SiteTimeline, shown: Shown, layout: Layout) -> tuple[tuple[Curve, ...], tuple[Label, ...]]:
    """The strip at the top: thin where air crosses, bold where descending warm dry air arrives."""
    middle = layout.top + 0.5 * STRIP
    out: list[Curve] = []
    x, half, together = shown.x, shown.half, shown.together
    crosses = any_of((state.status == "crossing" for state in site.states), together)
    for first, last in runs(crosses):
        out.append(Curve(f"M{x[first] - half:.1f} {middle}H{x[last - 1] + half:.1f}", "crosses"))
    wishes = []
    known = np.array([state.status != "missing" for state in site.states])
    for one in site.dry_winds:
        bars = shown.bars(one, known)
        out += [Curve(f"M{a:.1f} {middle}H{b:.1f}", "dry-wind") for a, b in bars]
        wishes.append((bars[0][0], "descending warm dry air", "name warm"))
    for status, words in (("no crossing", "no air crosses"), ("missing", "nothing known")):
        flags = all_of((state.status == status for state in site.states), together)
        wishes += [(float(x[first]) - half, words, "note") for first, _ in runs(flags)]
    return tuple(out), _apart(wishes, layout)


def _apart(wishes: list[tuple[float, str, str]], layout: Layout) -> tuple[Label, ...]:
    """Words above the strip, each kind once, as far as they fit beside each other."""
    labels: list[Label] = []
    taken: list[tuple[float, float]] = []
    for at, text, kind in wishes:
        width = text_width(text, layout.letter)
        left = min(max(at, layout.left), layout.right - width)
        clear = all(left + width + 6.0 < a or left > b + 6.0 for a, b in taken)
        if clear and text not in {label.text for label in labels}:
            labels.append(Label(text, round(left, 1), round(layout.top - 7.0, 1), "start", kind))
            taken.append((left, left + width))
    return tuple(labels)


def _panel(plan: PanelPlan, ends: tuple[float, float], x: Array, layout: Layout, units: Units, together: int) -> Panel:
    up = Scale(*ends, layout.bottom, layout.top)
    x = np.repeat(x, 2) if together > 1 else x
    plan = replace(plan, lines=tuple(replace(line, values=spans(line.values, together)) for line in plan.lines))
    curves: list[Curve] = []
    board = Board(
        Box(layout.left, layout.top - 4.0, layout.right, layout.bottom),
        layout.letter,
        points_x=np.concatenate([_fine(x, line.values, up)[0] for line in plan.lines]),
        points_y=np.concatenate([_fine(x, line.values, up)[1] for line in plan.lines]),
    )
    name = f"{plan.name}, {first_unit(plan.quantity, units)}" if first_unit(plan.quantity, units) else plan.name
    if layout.name == "narrow" and text_width(name, layout.letter) > layout.right:
        name = f"Warming, {first_unit(plan.quantity, units)}"
    labels: list[Label] = [Label(name, 2.0, round(layout.top - 0.75 * layout.letter, 1), "start", "note")]
    for number, line in enumerate(plan.lines):
        y = np.asarray(place(up, line.values))
        for first, last in runs(np.isfinite(y)):
            here, there = x[first:last], y[first:last]
            if plan.filled and number == 0:
                curves.append(area(here, there, layout.bottom, "landed rain-fill"))
                continue
            curves.append(
                polyline(here, there, line.kind)
                if last - first > 1
                else Curve(f"M{here[0] - 1.5:.1f} {there[0]:.1f}h3", line.kind)
            )
        if len(plan.lines) > 1:
            new, board = put(board, _beside(x, y, line.name, line.kind, layout))
            labels += new
    return Panel(
        layout=layout,
        ticks=tuple(replace(tick, unit="") for tick in level_ticks(up, units, 3, layout.letter, plan.quantity)),
        curves=tuple(curves),
        labels=tuple(labels),
    )


def _fine(x: Array, values: Array, up: Scale) -> tuple[Array, Array]:
    """Points along a line, close together, for the lettering to keep off."""
    known = np.isfinite(values)
    if not known.any():
        return np.empty(0), np.empty(0)
    fine = np.linspace(x[known][0], x[known][-1], 500)
    return fine, np.asarray(place(up, np.interp(fine, x[known], values[known])))


def _beside(x: Array, y: Array, name: str, kind: str, layout: Layout) -> list[tuple[Label, ...]]:
    """Places for the name of a line: near it, anywhere along it."""
    known = np.flatnonzero(np.isfinite(y))
    word = {"warm": "name warm", "dew": "name dew"}.get(kind, "name soft" if "aloft" in kind else "name ink")
    out: list[tuple[Label, ...]] = []
    for share in (0.05, 0.2, 0.35, 0.5, 0.65, 0.8, 0.95):
        if not known.size:
            break
        i = known[int(share * (known.size - 1))]
        for drop in (-0.5, 1.1, -1.0, 1.6):
            at = round(float(y[i]) + drop * layout.letter, 1)
            out.append((Label(name, round(float(x[i]), 1), at, "middle", word),))
    return out
