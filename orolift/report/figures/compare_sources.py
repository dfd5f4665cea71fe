"""Which air each source level would give: temperature across, mixing ratio up, beside what was observed."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import Layout, Scale, Tick, level_ticks, place, ticks
from orolift.report.figures.drawing import Curve, Figure, Label, polyline
from orolift.report.figures.placing import Board, Box, put, with_taken
from orolift.report.quantities import displayed, from_displayed, quantity

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.explain import Explanation, Track
    from orolift.report.figures.drawing import Anchor
    from orolift.report.quantities import Units
    from orolift.spread.compared import Compared
    from orolift.spread.explained import Explained

    Array = NDArray[np.float64]

WIDE = Layout("wide", 960.0, 400.0, 210.0, 750.0, 36.0, 340.0, 14.0, 6)
NARROW = Layout("narrow", 344.0, 340.0, 46.0, 322.0, 36.0, 280.0, 12.5, 4)
SAME = 0.05
"""Tracks nearer to each other than this everywhere [K] are drawn as one."""


@dataclass(frozen=True)
class SourcesDrawing:
    """Everything the figure shows."""

    layout: Layout
    up_ticks: tuple[Tick, ...]
    across_ticks: tuple[Tick, ...]
    tracks: tuple[Curve, ...]
    marks: tuple[Curve, ...]
    labels: tuple[Label, ...]


def compare_sources(found: Compared, units: Units) -> Figure[SourcesDrawing] | None:
    """Which air each source level would give.

    Parameters
    ----------
    found : Compared
    units : 'metric' or 'us'

    Returns
    -------
    Figure of SourcesDrawing or None
        None where nothing is explained.
    """
    one = found.explained
    if one is None:
        return None
    tracks = _different(one.explanation)
    low, high = one.explanation.bounds
    several = (
        "Lines are air of each source level, from none of the condensed water removed to all of it"
        if len(tracks) > 1
        else "The line is air of each source level"
    )
    return Figure(
        key="compare-sources",
        drawing=_drawing(one, tracks, units, WIDE),
        narrow=_drawing(one, tracks, units, NARROW),
        title="Which air each source level would give",
        alt=f"Temperature and mixing ratio at the place of air from {quantity(low, 'height', -1, units)} to "
        f"{quantity(high, 'height', -1, units)}, with what was observed and what was estimated.",
        caption=f"{several}, mixed over {quantity(one.mixing_depth, 'height', 0, units)}; heights are marked along it. "
        "The frame is what was observed, as wide as the tolerance; the dot is the estimate. Deeper mixing moves the "
        "air along the line.",
    )


def _different(found: Explanation) -> tuple[Track, ...]:
    """Tracks that differ; where nothing condenses all are one."""
    kept: list[Track] = []
    for track in found.tracks:
        if all(np.max(np.abs(track.temperature - other.temperature)) > SAME for other in kept):
            kept.append(track)
    return tuple(kept)


def _drawing(one: Explained, tracks: tuple[Track, ...], units: Units, layout: Layout) -> SourcesDrawing:
    seen, air = one.explanation.observed, one.estimate
    t = np.concatenate([track.temperature for track in tracks])
    w = np.concatenate([track.mixing_ratio for track in tracks])
    ends_t = [air.temperature, seen.temperature - 1.0, seen.temperature + 1.0]
    ends_w = [air.mixing_ratio, seen.mixing_ratio - 5e-4, seen.mixing_ratio + 5e-4]
    across = Scale(*_span(np.concatenate([t, ends_t]), 0.4), layout.left, layout.right)
    low, high = _span(np.concatenate([w, ends_w]), 2e-4)
    up = Scale(max(low, 0.0), high, layout.bottom, layout.top)
    fine = np.linspace(0.0, t.size / len(tracks) - 1.0, 400)
    lines = [
        [np.interp(fine, np.arange(x.size), x) for x in (track.temperature, track.mixing_ratio)] for track in tracks
    ]
    board = Board(
        Box(layout.left, layout.top - 4.0, layout.width - 4.0, layout.bottom - 2.0),
        layout.letter,
        points_x=np.asarray(place(across, np.concatenate([line[0] for line in lines]))),
        points_y=np.asarray(place(up, np.concatenate([line[1] for line in lines]))),
    )
    x1, x2 = (float(place(across, seen.temperature + s * seen.temperature_tolerance)) for s in (-1, 1))
    y1, y2 = (float(place(up, seen.mixing_ratio + s * seen.mixing_ratio_tolerance)) for s in (1, -1))
    dot = float(place(across, air.temperature)), float(place(up, air.mixing_ratio))
    board = with_taken(board, Box(x1, y1, x2, y2), Box(dot[0] - 7, dot[1] - 7, dot[0] + 7, dot[1] + 7))
    labels: list[Label] = [
        Label("mixing ratio", layout.left, round(layout.top - 14.0, 1), "start", "note"),
        Label("temperature", layout.right, round(layout.bottom + 8.0 + 2.4 * layout.letter, 1), "end", "note"),
    ]
    new, board = put(
        board, _around(0.5 * (x1 + x2), 0.5 * (y1 + y2), "observed", "title", layout.letter, x2 - x1), needed=True
    )
    labels += new
    new, board = put(board, _around(*dot, "estimate", "name warm", layout.letter, 12.0), needed=True)
    labels += new
    marks = [
        Curve(f"M{x1:.1f} {y1:.1f}H{x2:.1f}V{y2:.1f}H{x1:.1f}Z", "gauge"),
        Curve(f"M{dot[0] - 5:.1f} {dot[1]:.1f}a5 5 0 1 0 10 0a5 5 0 1 0 -10 0Z", "answer own"),
    ]
    curves = []
    for track in tracks:
        x, y = np.asarray(place(across, track.temperature)), np.asarray(place(up, track.mixing_ratio))
        curves.append(polyline(x, y, "before" if len(tracks) == 1 or 0.0 < track.removed_share < 1.0 else "upwind"))
    main = next((track for track in tracks if 0.0 < track.removed_share < 1.0), tracks[0])
    for level, words in _heights(main, units):
        x0 = float(place(across, float(np.interp(level, main.source_level, main.temperature))))
        y0 = float(place(up, float(np.interp(level, main.source_level, main.mixing_ratio))))
        marks.append(Curve(f"M{x0 - 2.5:.1f} {y0:.1f}a2.5 2.5 0 1 0 5 0a2.5 2.5 0 1 0 -5 0Z", "sum"))
        new, board = put(board, _around(x0, y0, words, "name soft", layout.letter, 6.0))
        labels += new
    if len(tracks) > 1:
        for track, words in ((tracks[0], "none removed"), (tracks[-1], "all removed")):
            x0 = float(place(across, float(track.temperature[0])))
            y0 = float(place(up, float(track.mixing_ratio[0])))
            new, board = put(board, _around(x0, y0, words, "name soft", layout.letter, 4.0))
            labels += new
    return SourcesDrawing(
        layout=layout,
        up_ticks=level_ticks(up, units, 5, layout.letter, "mixing_ratio"),
        across_ticks=ticks(across, "temperature", units, layout.ticks),
        tracks=tuple(curves),
        marks=tuple(marks),
        labels=tuple(labels),
    )


def _span(values: Array, least: float) -> tuple[float, float]:
    low, high = float(np.min(values)), float(np.max(values))
    margin = max(0.06 * (high - low), least)
    return low - margin, high + margin


def _heights(track: Track, units: Units) -> list[tuple[float, str]]:
    """Round heights along a track."""
    step = 500.0 if units == "metric" else 2000.0
    low, high = (displayed(float(x), "height", units) for x in (track.source_level[0], track.source_level[-1]))
    counts = range(int(np.ceil(low / step)), int(np.floor(high / step)) + 1)
    levels = [from_displayed(count * step, "height", units) for count in counts]
    return [(level, quantity(level, "height", 0, units)) for level in levels]


def _around(x: float, y: float, text: str, kind: str, letter: float, wide: float) -> list[tuple[Label, ...]]:
    """Places for words beside a point."""
    sides: tuple[tuple[float, Anchor], ...] = ((1.0, "start"), (-1.0, "end"))
    return [
        (Label(text, round(x + side * (0.5 * wide + 6.0), 1), round(y + drop * letter, 1), anchor, kind),)
        for drop in (0.35, -0.5, 1.2, -1.3, 2.0)
        for side, anchor in sides
    ]
