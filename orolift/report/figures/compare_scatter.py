"""Estimate against observation: temperature and humidity, each with the line on which both agree."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.compare_words import QUANTITY_KINDS, QUANTITY_NAMES
from orolift.report.figures.axes import Layout, Scale, Tick, level_ticks, place, ticks
from orolift.report.figures.drawing import Curve, Figure, Label
from orolift.report.quantities import quantity as written
from orolift.spread.comparison import averaged

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.report.quantities import Kind, Units
    from orolift.spread.compared import Compared
    from orolift.spread.comparison import Paired
    from orolift.spread.estimates import Quantity, Reference

    Array = NDArray[np.float64]

WIDE, NARROW = (960.0, 400.0), (344.0, 640.0)
MARKS: dict[Reference, str] = {"unchanged": "u", "popular_picture": "p", "crest_air": "c"}
"""Letters of the simple answers."""
MOST_LETTERS = 12
"""Pairs beyond which the simple answers are not drawn."""
MOST_SPANS = 120
"""Pairs beyond which ranges are not drawn."""
MOST_MARKS = 1500
"""Pairs beyond which every so many is drawn."""
DRAWN: tuple[Quantity, ...] = ("temperature", "mixing_ratio")


@dataclass(frozen=True)
class Panel:
    """One square of the figure."""

    layout: Layout
    up_ticks: tuple[Tick, ...]
    across_ticks: tuple[Tick, ...]
    diagonal: Curve
    spans: tuple[Curve, ...]
    marks: tuple[Curve, ...]
    labels: tuple[Label, ...]


@dataclass(frozen=True)
class ScatterDrawing:
    """Everything the figure shows."""

    layout: Layout
    panels: tuple[Panel, ...]


def compare_scatter(found: Compared, units: Units) -> Figure[ScatterDrawing] | None:
    """Estimate against observation.

    Parameters
    ----------
    found : Compared
    units : 'metric' or 'us'

    Returns
    -------
    Figure of ScatterDrawing or None
        None where neither temperature nor humidity was observed.
    """
    shown = {name: averaged(found.pairs[name])[0] for name in DRAWN if name in found.pairs}
    if not shown:
        return None
    letters = max(pairs.row.size for pairs in shown.values()) <= MOST_LETTERS
    words = [
        f"{QUANTITY_NAMES[name]}, {pairs.row.size} values: observed {_range(pairs.observed, name, units)}, "
        f"estimated {_range(pairs.estimated, name, units)}."
        for name, pairs in shown.items()
    ]
    simple = (
        " Letters are the simple answers: u unchanged air, p the popular picture, c crest air brought down dry."
        if letters
        else ""
    )
    return Figure(
        key="compare-scatter",
        drawing=_drawing(shown, units, WIDE, "wide", letters=letters),
        narrow=_drawing(shown, units, NARROW, "narrow", letters=letters),
        title="Estimate against observation",
        alt=" ".join(words),
        caption="Each dot is a place at one time: across, what was observed; up, the estimate with its range. On the "
        f"dotted line both agree.{simple}",
    )


def _range(values: Array, name: Quantity, units: Units) -> str:
    kind, digits = QUANTITY_KINDS[name].value
    return " to ".join(written(float(x), kind, digits, units) for x in (values.min(), values.max()))


def _drawing(
    shown: dict[Quantity, Paired], units: Units, size: tuple[float, float], name: str, *, letters: bool
) -> ScatterDrawing:
    width, height = size
    letter = 14.0 if name == "wide" else 12.5
    if name == "narrow" and len(shown) == 1:
        height = 340.0
    panels = []
    for i, (quantity, pairs) in enumerate(shown.items()):
        if name == "wide":
            left = 150.0 + 440.0 * i if len(shown) > 1 else 330.0
            layout = Layout(name, width, height, left, left + 310.0, 36.0, 346.0, letter, 5)
        else:
            top = 36.0 + 320.0 * i
            layout = Layout(name, width, height, 52.0, 302.0, top, top + 236.0, letter, 4)
        panels.append(_panel(quantity, pairs, units, layout, letters=letters))
    return ScatterDrawing(Layout(name, width, height, 0.0, width, 0.0, height, letter, 5), tuple(panels))


def _panel(quantity: Quantity, pairs: Paired, units: Units, layout: Layout, *, letters: bool) -> Panel:
    kind: Kind = QUANTITY_KINDS[quantity].value[0]
    step = max(1, -(-pairs.row.size // MOST_MARKS))
    seen, own = pairs.observed[::step], pairs.estimated[::step]
    spans_shown = seen.size <= MOST_SPANS
    every = [seen, own]
    if spans_shown:
        every += [pairs.low[np.isfinite(pairs.low)], pairs.high[np.isfinite(pairs.high)]]
    if letters:
        every += list(pairs.references.values())
    values = np.concatenate(every)
    low, high = float(np.nanmin(values)), float(np.nanmax(values))
    margin = max(0.06 * (high - low), 0.5 if quantity == "temperature" else 2e-4)
    low, high = low - margin, high + margin
    if quantity == "mixing_ratio":
        low = max(low, 0.0)
    across, up = Scale(low, high, layout.left, layout.right), Scale(low, high, layout.bottom, layout.top)
    x, y = np.asarray(place(across, seen)), np.asarray(place(up, own))
    spans: tuple[Curve, ...] = ()
    if spans_shown:
        bottom, top = (np.asarray(place(up, end[::step])) for end in (pairs.low, pairs.high))
        spans = tuple(
            Curve(f"M{a:.1f} {b:.1f}V{t:.1f}", "span")
            for a, b, t in zip(x, bottom, top, strict=True)
            if np.isfinite(b) and np.isfinite(t)
        )
    return Panel(
        layout=layout,
        up_ticks=level_ticks(up, units, 5, layout.letter, kind),
        across_ticks=ticks(across, kind, units, layout.ticks),
        diagonal=Curve(f"M{layout.left} {layout.bottom}L{layout.right} {layout.top}", "level"),
        spans=spans,
        marks=tuple(_dot(float(a), float(b)) for a, b in zip(x, y, strict=True)),
        labels=(*_axis_names(quantity, layout), *(_letters(pairs, across, up, layout) if letters else ())),
    )


def _dot(x: float, y: float) -> Curve:
    return Curve(f"M{x - 5:.1f} {y:.1f}a5 5 0 1 0 10 0a5 5 0 1 0 -10 0Z", "answer own")


def _axis_names(quantity: Quantity, layout: Layout) -> tuple[Label, ...]:
    foot = round(layout.bottom + 8.0 + 2.4 * layout.letter, 1)
    return (
        Label(f"{QUANTITY_NAMES[quantity]}, estimated", layout.left, round(layout.top - 14.0, 1), "start", "note"),
        Label("observed", layout.right, foot, "end", "note"),
    )


def _letters(pairs: Paired, across: Scale, up: Scale, layout: Layout) -> tuple[Label, ...]:
    """Simple answers, right of the dot; those that would cover each other are moved apart."""
    out = []
    for i, seen in enumerate(pairs.observed.tolist()):
        x = float(place(across, seen)) + 9.0
        spots = sorted((float(place(up, float(values[i]))), MARKS[name]) for name, values in pairs.references.items())
        last = -np.inf
        for y, text in spots:
            if not np.isfinite(y):
                continue
            at = max(y, last + 0.85 * layout.letter)
            last = at
            out.append(Label(text, round(x, 1), round(at + 0.3 * layout.letter, 1), "start", "name soft"))
    return tuple(out)
