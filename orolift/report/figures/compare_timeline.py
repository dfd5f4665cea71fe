"""Observed temperature and dew point in the course of time, estimates with their ranges, and onset and end."""

from __future__ import annotations

import math
from dataclasses import dataclass
from datetime import UTC, datetime
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import Layout, Scale, Tick, level_ticks, place
from orolift.report.figures.drawing import Curve, Figure, Label, polyline
from orolift.report.figures.pins import shortened
from orolift.report.figures.placing import text_width

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.report.quantities import Units
    from orolift.spread.compared import Compared
    from orolift.spread.estimates import Quantity
    from orolift.spread.onset_series import OnsetAtPlace

    Array = NDArray[np.float64]

HOUR = 3600.0
STEPS = (1.0, 2.0, 3.0, 6.0, 12.0, 24.0, 48.0, 120.0, 240.0, 720.0, 1440.0)
"""Hours between ticks."""
MOST_PLACES = 4
MOST_POINTS = 700
"""Points of a line; more are averaged into so many equal times."""
MOST_SPANS = 150
LEAST_SPAN = 2.0 * HOUR
"""Shortest time drawn [s]."""
KINDS: dict[Quantity, str] = {"temperature": "warm", "dew_point": "dew"}
SIZES = {"wide": (960.0, 190.0, 104.0, 848.0, 14.0), "narrow": (344.0, 190.0, 46.0, 326.0, 12.5)}
"""Width, height of a panel, left and right edge, lettering."""


@dataclass(frozen=True)
class TimePanel:
    """One place."""

    layout: Layout
    ticks: tuple[Tick, ...]
    spells: tuple[Curve, ...]
    lines: tuple[Curve, ...]
    spans: tuple[Curve, ...]
    marks: tuple[Curve, ...]
    labels: tuple[Label, ...]


@dataclass(frozen=True)
class TimelineDrawing:
    """Everything the figure shows."""

    layout: Layout
    foot: Layout
    time_ticks: tuple[Tick, ...]
    panels: tuple[TimePanel, ...]


def compare_timeline(found: Compared, units: Units) -> Figure[TimelineDrawing] | None:
    """Observations and estimates in the course of time.

    Parameters
    ----------
    found : Compared
    units : 'metric' or 'us'

    Returns
    -------
    Figure of TimelineDrawing or None
        None without times, or where neither temperature nor dew point was observed.
    """
    seen = found.seen
    known = np.isfinite(seen.time) & (np.isfinite(seen.values["temperature"]) | np.isfinite(seen.values["dew_point"]))
    if not known.any() or np.unique(seen.time[known]).size < 2:
        return None
    counts = np.bincount(seen.place[known], minlength=len(found.names))
    places = sorted(np.argsort(-counts, kind="stable")[:MOST_PLACES].tolist())
    places = [number for number in places if counts[number] > 0]
    times = np.concatenate([seen.time[known], *(one.arrival for one in found.estimates)])
    first, last = float(np.nanmin(times)), float(np.nanmax(times))
    pad = max(0.5 * (LEAST_SPAN - (last - first)), 0.02 * (last - first))
    span = (first - pad, last + pad)
    left_out = (
        f" {len(found.names) - len(places)} more places are in the table." if len(found.names) > len(places) else ""
    )
    met = any(one.observed_spells for one in found.onset)
    return Figure(
        key="compare-timeline",
        drawing=_drawing(found, places, span, units, "wide"),
        narrow=_drawing(found, places, span, units, "narrow"),
        title="Observations and estimates in the course of time",
        alt=f"Observed temperature and dew point of {', '.join(found.names[i] for i in places)}, with the estimates.",
        caption="Lines are observations, dots with bars the estimate with its range. Times are UTC."
        + (" Shaded: the rule of the onset test is met by the observations." if met else "")
        + left_out,
    )


def _drawing(found: Compared, places: list[int], span: tuple[float, float], units: Units, name: str) -> TimelineDrawing:
    width, tall, left, right, letter = SIZES[name]
    panels = []
    across = Scale(span[0], span[1], left, right)
    for i, number in enumerate(places):
        top = 40.0 + (tall + 34.0) * i
        layout = Layout(name, width, 0.0, left, right, top, top + tall - 34.0, letter, 5)
        panels.append(_panel(found, number, across, units, layout))
    bottom = panels[-1].layout.bottom
    height = bottom + 3.6 * letter + 14.0
    foot = Layout(name, width, height, left, right, 40.0, bottom, letter, 9 if name == "wide" else 4)
    return TimelineDrawing(
        layout=Layout(name, width, round(height, 1), left, right, 0.0, bottom, letter, 5),
        foot=foot,
        time_ticks=time_ticks(across, foot.ticks),
        panels=tuple(panels),
    )


def time_ticks(scale: Scale, about: int) -> tuple[Tick, ...]:
    """Round hours in UTC; midnights carry the date.

    Parameters
    ----------
    scale : Scale
        Of seconds since 1970.
    about : int

    Returns
    -------
    tuple of Tick

    Examples
    --------
    >>> [tick.text for tick in time_ticks(Scale(0.0, 86400.0, 0.0, 100.0), 4)]
    ['1 Jan', '06', '12', '18', '2 Jan']
    """
    hours = (scale.high - scale.low) / HOUR
    step = HOUR * min(STEPS, key=lambda one: abs(math.log(max(hours, 1e-3) / about / one)))
    first = math.ceil(scale.low / step)
    last = math.floor(scale.high / step)
    out = []
    for count in range(first, last + 1):
        time = datetime.fromtimestamp(count * step, UTC)
        text = f"{time.day} {time:%b}" if time.hour == 0 else f"{time:%H}"
        out.append(Tick(round(float(place(scale, count * step)), 1), text))
    return tuple(out)


def _panel(found: Compared, number: int, across: Scale, units: Units, layout: Layout) -> TimePanel:
    seen = found.seen
    mine = seen.place == number
    series = {name: _binned(seen.time[mine], seen.values[name][mine], across) for name in KINDS}
    series = {name: pair for name, pair in series.items() if pair[0].size}
    estimates = [(one, float(one.arrival[number])) for one in found.estimates]
    estimates = [(one, time) for one, time in estimates if np.isfinite(time)]
    bars = {
        name: np.array(
            [[t, one.values[name][number], one.low[name][number], one.high[name][number]] for one, t in estimates]
        )
        for name in series
    }
    every = [pair[1] for pair in series.values()] + [bar[:, 1:].ravel() for bar in bars.values() if bar.size]
    values = np.concatenate(every)
    low, high = float(np.nanmin(values)), float(np.nanmax(values))
    margin = max(0.08 * (high - low), 0.5)
    up = Scale(low - margin, high + margin, layout.bottom, layout.top)
    spans, marks = [], []
    for name, bar in bars.items():
        for time, value, least, most in bar if len(bar) <= MOST_SPANS else bar[:: -(-len(bar) // MOST_SPANS)]:
            if not np.isfinite(value):
                continue
            x, y = float(place(across, time)), float(place(up, value))
            spans.append(
                Curve(
                    f"M{x:.1f} {float(place(up, least)):.1f}V{float(place(up, most)):.1f}",
                    "span" if name == "temperature" else "span dew",
                )
            )
            marks.append(
                Curve(
                    f"M{x - 4.5:.1f} {y:.1f}a4.5 4.5 0 1 0 9 0a4.5 4.5 0 1 0 -9 0Z",
                    "answer own" if name == "temperature" else "answer own dew",
                )
            )
    onset = next((one for one in found.onset if one.place == number), None)
    return TimePanel(
        layout=layout,
        ticks=level_ticks(up, units, 4, layout.letter, "temperature"),
        spells=_spells(onset, across, layout),
        lines=tuple(
            polyline(np.asarray(place(across, x)), np.asarray(place(up, y)), KINDS[name])
            for name, (x, y) in series.items()
        ),
        spans=tuple(spans),
        marks=tuple(marks),
        labels=_labels(found.names[number], series, up, layout),
    )


def _binned(time: Array, value: Array, across: Scale) -> tuple[Array, Array]:
    """A series in order of time; a long one as means over equal times."""
    known = np.isfinite(time) & np.isfinite(value)
    t, v = time[known], value[known]
    order = np.argsort(t, kind="stable")
    t, v = t[order], v[order]
    if t.size <= MOST_POINTS:
        return t, v
    cell = np.minimum((MOST_POINTS * (t - across.low) / (across.high - across.low)).astype(int), MOST_POINTS - 1)
    count = np.bincount(cell, minlength=MOST_POINTS)
    there = count > 0
    return tuple(np.bincount(cell, weights=x, minlength=MOST_POINTS)[there] / count[there] for x in (t, v))  # type: ignore[return-value]  # two of them


def _spells(onset: OnsetAtPlace | None, across: Scale, layout: Layout) -> tuple[Curve, ...]:
    """Observed spells as shaded times, three units wide at least."""
    out = []
    for spell in () if onset is None else onset.observed_spells:
        a, b = (float(place(across, t)) for t in (spell.start, spell.end))
        middle = 0.5 * (a + b)
        a, b = min(a, middle - 1.5), max(b, middle + 1.5)
        out.append(Curve(f"M{a:.1f} {layout.top}H{b:.1f}V{layout.bottom}H{a:.1f}Z", "spell"))
    return tuple(out)


def _labels(name: str, series: dict[Quantity, tuple[Array, Array]], up: Scale, layout: Layout) -> tuple[Label, ...]:
    """Name of the place over the panel; names of the lines at the height of their ends, or beside the first."""
    out = [Label(shortened(name), layout.left, round(layout.top - 12.0, 1), "start", "title")]
    words: dict[Quantity, tuple[str, str]] = {
        "temperature": ("temperature", "name warm"),
        "dew_point": ("dew point", "name dew"),
    }
    if layout.name == "narrow":
        edge = layout.right
        for quantity in reversed(series):
            text, kind = words[quantity]
            out.append(Label(text, round(edge, 1), round(layout.top - 12.0, 1), "end", kind))
            edge -= text_width(text, layout.letter) + 12.0
        return tuple(out)
    ends = sorted((float(place(up, float(y[-1]))), quantity) for quantity, (_, y) in series.items())
    last = -np.inf
    for at, quantity in ends:
        last = max(at, last + 1.15 * layout.letter)
        text, kind = words[quantity]
        out.append(Label(text, round(layout.right + 8.0, 1), round(last + 0.3 * layout.letter, 1), "start", kind))
    return tuple(out)
