"""Map against gauges: one diamond a gauge, on the diagonal where both agree."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import Layout, Scale, Tick, level_ticks, place, round_step, ticks
from orolift.report.figures.drawing import Curve, Figure, Label
from orolift.report.figures.pins import shortened
from orolift.report.figures.placing import Board, Box, put, with_taken
from orolift.report.quantities import Units, displayed, from_displayed, quantity

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.rain.over_map import MapRain
    from orolift.report.figures.drawing import Anchor

    Array = NDArray[np.float64]

WIDE = Layout("wide", 960.0, 384.0, 310.0, 640.0, 34.0, 340.0, 14.0, 5)
NARROW = Layout("narrow", 344.0, 344.0, 42.0, 316.0, 34.0, 300.0, 12.5, 4)
MARK = 5.0
"""Half the size of a diamond, drawing units."""
LEAST = 3
"""Gauges on the map from which on they are drawn."""
MOST_NAMES = 20
"""Gauges beyond which none is named."""


@dataclass(frozen=True)
class ScatterDrawing:
    """Everything the figure shows, from the back to the front."""

    layout: Layout
    map_ticks: tuple[Tick, ...]
    gauge_ticks: tuple[Tick, ...]
    diagonal: Curve
    marks: tuple[Curve, ...]
    labels: tuple[Label, ...]


def gauge_scatter(rain: MapRain, units: Units) -> Figure[ScatterDrawing] | None:
    """Map against gauges.

    Parameters
    ----------
    rain : MapRain
    units : 'metric' or 'us'

    Returns
    -------
    Figure of ScatterDrawing or None
        None for fewer than three gauges on the map.
    """
    found = rain.comparison
    if rain.gauges is None or found is None or found.used < LEAST:
        return None
    known = np.isfinite(found.modelled)
    caught, there = rain.gauges.total[known], found.modelled[known]
    names = [name for name, on in zip(rain.gauges.name, known, strict=True) if on]
    words = [
        f"{name}: caught {_said(a, units)}, map {_said(b, units)}."
        for name, a, b in zip(names, caught, there, strict=True)
    ]
    return Figure(
        key="gauge-scatter",
        drawing=_drawing(caught, there, names, units, WIDE),
        narrow=_drawing(caught, there, names, units, NARROW),
        title="Map against gauges",
        alt=" ".join(words[:MOST_NAMES]),
        caption="Each diamond is a gauge: across, what it caught; up, what the map has there. On the line both agree.",
    )


def _said(depth: float, units: Units) -> str:
    return quantity(float(depth), "water_depth", 0, units)


def _drawing(caught: Array, there: Array, names: list[str], units: Units, layout: Layout) -> ScatterDrawing:
    """One form of the figure; both axes have the same scale."""
    most = displayed(max(float(caught.max()), float(there.max()), 1e-3), "water_depth", units)
    step = round_step(most, 5)
    top = from_displayed(step * float(np.ceil(1.05 * most / step)), "water_depth", units)
    across, up = Scale(0.0, top, layout.left, layout.right), Scale(0.0, top, layout.bottom, layout.top)
    x, y = np.asarray(place(across, caught)), np.asarray(place(up, there))
    share = np.linspace(0.0, 1.0, 120)
    board = Board(
        Box(layout.left - 4.0, layout.top - 6.0, layout.width - 4.0, layout.bottom - 2.0),
        layout.letter,
        points_x=layout.left + share * (layout.right - layout.left),
        points_y=layout.bottom + share * (layout.top - layout.bottom),
    )
    board = with_taken(board, *(Box(a - MARK, b - MARK, a + MARK, b + MARK) for a, b in zip(x, y, strict=True)))
    labels: tuple[Label, ...] = (Label("map", layout.left, round(layout.top - 12.0, 1), "start", "note"),)
    foot = round(layout.bottom + 7.0 + 2.4 * layout.letter, 1)
    labels = (*labels, Label("caught by the gauge", layout.right, foot, "end", "note"))
    for a, b, name in zip(x, y, names, strict=True) if len(names) <= MOST_NAMES else ():
        new, board = put(board, _around(float(a), float(b), shortened(name), layout.letter))
        labels += new
    diamonds = tuple(
        Curve(f"M{a:.1f} {b - MARK:.1f}l{MARK} {MARK}l-{MARK} {MARK}l-{MARK} -{MARK}Z", "gauge-mark")
        for a, b in zip(x, y, strict=True)
    )
    return ScatterDrawing(
        layout=layout,
        map_ticks=level_ticks(up, units, 5, layout.letter, "water_depth"),
        gauge_ticks=ticks(across, "water_depth", units, layout.ticks),
        diagonal=Curve(f"M{layout.left} {layout.bottom}L{layout.right} {layout.top}", "level"),
        marks=diamonds,
        labels=labels,
    )


def _around(x: float, y: float, text: str, letter: float) -> list[tuple[Label, ...]]:
    """Places for a name beside a diamond."""
    sides: tuple[tuple[float, Anchor], ...] = ((1.0, "start"), (-1.0, "end"))
    return [
        (Label(text, round(x + side * gap * letter, 1), round(y + drop * letter, 1), anchor, "name ink"),)
        for gap in (0.7, 1.3)
        for drop in (0.35, 1.1, -0.4, 1.9, -1.2)
        for side, anchor in sides
    ]
