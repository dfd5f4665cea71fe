"""Rain along the line: the crossing and the map beside each other, the background, and where the shares fall."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.rain.line import NO_RAIN, line_cosine
from orolift.report.figures import section
from orolift.report.figures.axes import Layout, Scale, Tick, distance_scale, level_ticks, place, round_step, ticks
from orolift.report.figures.drawing import Curve, Figure, Label, area, polyline, thinned
from orolift.report.figures.placing import Board, Box, put, text_width
from orolift.report.quantities import Units, displayed, first_unit, from_displayed, number, quantity
from orolift.report.story import rains, snow_words

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing
    from orolift.rain.line import LineRain
    from orolift.report.figures.drawing import Anchor

    Array = NDArray[np.float64]

WIDE = replace(section.WIDE, height=382.0, top=30.0, bottom=214.0)
NARROW = replace(section.NARROW, height=330.0, top=30.0, bottom=176.0)
STRIP = 15.0
"""Height of the strip of shares, drawing units."""
GROUND = 62.0
"""Height of the ground under it, drawing units."""
FOOT = 36.0
"""Room for the axis at the foot, drawing units."""
LEAST_SHARE = 0.005
"""Of all rain: shares that read as 0 % are not lettered."""


@dataclass(frozen=True)
class Share:
    """A stretch of the line with its share of all rain.

    Attributes
    ----------
    path : str
        Its bar in the strip.
    kind : str
        Before the crest or behind it.
    depth : float
        Opacity of the bar.
    """

    path: str
    kind: str
    depth: float


@dataclass(frozen=True)
class RainLineDrawing:
    """Everything the figure shows, from the back to the front."""

    layout: Layout
    ground_layout: Layout
    ticks: tuple[Tick, ...]
    distance_ticks: tuple[Tick, ...]
    rain: Curve
    snow: Curve | None
    background: Curve | None
    map_line: Curve | None
    divide: Curve
    shares: tuple[Share, ...]
    ground: Curve
    labels: tuple[Label, ...]


def rain_line(crossing: Crossing, on_map: LineRain | None, units: Units) -> Figure[RainLineDrawing] | None:
    """Rain along the line of a crossing.

    Parameters
    ----------
    crossing : Crossing
    on_map : LineRain or None
        The map along the line, where there is one.
    units : 'metric' or 'us'

    Returns
    -------
    Figure of RainLineDrawing or None
        None where nothing falls, not even on the map.
    """
    whole = crossing.rain.rate + crossing.rain.background
    most = max(float(whole.max()), 0.0 if on_map is None else on_map.peak_rate)
    if most < NO_RAIN or (not rains(crossing) and (on_map is None or on_map.windward_share is None)):
        return None
    return Figure(
        key="rain-line",
        drawing=_drawing(crossing, on_map, units, most, WIDE),
        narrow=_drawing(crossing, on_map, units, most, NARROW),
        title="Rain along the line",
        alt=_alt(crossing, on_map, units),
        caption=_caption(crossing, on_map, units),
    )


def _alt(crossing: Crossing, on_map: LineRain | None, units: Units) -> str:
    rain, origin = crossing.rain, crossing.transect.origin
    parts = []
    if rain.peak_distance is not None:
        parts.append(
            f"The crossing's {snow_words(crossing)} peaks with {quantity(rain.peak_rate, 'rain_rate', 1, units)} at "
            f"{quantity(rain.peak_distance + origin, 'distance', 0, units)} on the line; the crest is at "
            f"{quantity(crossing.features.crest_distance + origin, 'distance', 0, units)}."
        )
    if rain.windward_share is not None:
        parts.append(f"{quantity(rain.windward_share, 'share', 0, units)} falls before the crest.")
    for low, high, share in rain.lee_bands:
        if share >= LEAST_SHARE:
            parts.append(
                f"{quantity(share, 'share', 0, units)} falls {quantity(low, 'distance', 0, units)} to "
                f"{quantity(high, 'distance', 0, units)} behind it."
            )
    if on_map is not None and on_map.peak_distance is not None:
        parts.append(
            f"The map peaks with {quantity(on_map.peak_rate, 'rain_rate', 1, units)} at "
            f"{quantity(on_map.peak_distance + origin, 'distance', 0, units)}."
        )
    return " ".join(parts)


def _caption(crossing: Crossing, on_map: LineRain | None, units: Units) -> str:
    parts = ["What reaches the ground along the line; wind from the left."]
    snow = ", its light part snow" if crossing.rain.snow_rate.any() else ""
    parts.append(f"The blue body is the rain of the crossing{snow}.")
    if crossing.rain.background > 0.0:
        parts.append("Dashed: the background rain that falls anyway; it is no part of the shares.")
    if on_map is not None:
        parts.append("The bold line is the map of the next section along the same line, mean across the swath.")
    if crossing.rain.windward_share is not None:
        ends = [high for _, high, _ in crossing.rain.lee_bands]
        if units == "metric" and len(ends) > 1:
            edges = ", ".join(number(end, "distance", 0, units) for end in ends[:-1])
            last = quantity(ends[-1], "distance", 0, units)
            where = f"behind it to {edges} and {last}"
        else:
            where = "by distance behind it"
        parts.append(f"The strip below shares out the crossing's rain: before the crest, and {where}.")
    return " ".join(parts)


def _drawing(crossing: Crossing, on_map: LineRain | None, units: Units, most: float, layout: Layout) -> RainLineDrawing:
    rain = crossing.rain
    across = distance_scale(crossing.transect.distance, layout)
    peak = displayed(most, "rain_rate", units)
    step = round_step(peak, 4)
    top = from_displayed(step * np.ceil(1.12 * peak / step), "rain_rate", units)
    up = Scale(0.0, float(top), layout.bottom, layout.top)
    x = np.asarray(place(across, crossing.distance))
    rate, snow = (np.asarray(place(up, values)) for values in (rain.rate + rain.background, rain.snow_rate))
    crest = float(place(across, crossing.features.crest_distance))
    level = float(place(up, rain.background))
    strip_top = layout.bottom + 8.0
    below = replace(layout, top=layout.height - FOOT - GROUND, bottom=layout.height - FOOT)
    mapped = None if on_map is None else np.asarray(place(up, np.nan_to_num(on_map.rate) + rain.background))
    shares, words = _shares(crossing, across, strip_top, layout, units)
    return RainLineDrawing(
        layout=layout,
        ground_layout=below,
        ticks=tuple(replace(tick, unit="") for tick in level_ticks(up, units, 4, layout.letter, "rain_rate")),
        distance_ticks=ticks(across, "distance", units, layout.ticks, shift=crossing.transect.origin),
        rain=area(x, rate, layout.bottom, "landed rain-fill", thinned(x, rate)),
        snow=area(x, snow, layout.bottom, "landed snow-fill", thinned(x, snow)) if rain.snow_rate.any() else None,
        background=Curve(f"M{layout.left} {level:.1f}H{layout.right}", "background-rain") if rain.background else None,
        map_line=None if mapped is None else polyline(x, mapped, "map-rain"),
        divide=Curve(f"M{crest:.1f} {layout.top:.1f}V{below.bottom:.1f}", "divide"),
        shares=shares,
        ground=_ground(crossing, across, below),
        labels=(
            Label(first_unit("rain_rate", units), 2.0, round(layout.top - 0.9 * layout.letter, 1), "start", "note"),
            *_names(crossing, layout, x, rate, mapped, level, units),
            *words,
        ),
    )


def _ground(crossing: Crossing, across: Scale, layout: Layout) -> Curve:
    line = crossing.transect
    highest, lowest = float(line.elevation.max()), min(float(line.elevation.min()), 0.0)
    up = Scale(lowest, highest, layout.bottom, layout.top)
    return area(
        np.asarray(place(across, line.distance)), np.asarray(place(up, line.elevation)), layout.bottom, "ground"
    )


def _shares(
    crossing: Crossing, across: Scale, top: float, layout: Layout, units: Units
) -> tuple[tuple[Share, ...], tuple[Label, ...]]:
    """The strip: one bar for the rain before the crest, one for each band behind it; and its words under it."""
    rain, cosine = crossing.rain, line_cosine(crossing)
    if rain.windward_share is None:
        return (), ()
    crest = crossing.features.crest_distance
    end = float(crossing.transect.distance[-1])
    parts = [(0.0, crest, rain.windward_share, "before-crest")]
    parts += [
        (crest + low / cosine, min(crest + high / cosine, end), share, "behind-crest")
        for low, high, share in rain.lee_bands
        if crest + low / cosine < end
    ]
    largest = max(share for *_, share, _ in parts)
    bars, words = [], []
    reached = -np.inf
    for low, high, share, kind in parts:
        a, b = float(place(across, low)), float(place(across, high))
        depth = round(0.12 + 0.68 * share / largest, 2) if largest > 0.0 else 0.12
        bars.append(Share(f"M{a + 0.5:.1f} {top:.1f}H{b - 0.5:.1f}v{STRIP}H{a + 0.5:.1f}Z", kind, depth))
        text = quantity(share, "share", 0, units)
        if kind == "before-crest" and layout.name == "wide":
            text = f"{text} before the crest"
        half = 0.5 * text_width(text, layout.letter)
        middle = 0.5 * (a + b)
        if share >= LEAST_SHARE and middle - half > reached + 3.0:
            y = round(top + STRIP + 1.05 * layout.letter, 1)
            words.append(Label(text, round(middle, 1), y, "middle", "name dew"))
            reached = middle + half
    return tuple(bars), tuple(words)


def _names(
    crossing: Crossing, layout: Layout, x: Array, rate: Array, mapped: Array | None, level: float, units: Units
) -> tuple[Label, ...]:
    """What body and lines are, beside them."""
    rain, shape, letter = crossing.rain, crossing.features, layout.letter
    fine = np.linspace(x[0], x[-1], 400)
    lines = [rate] if mapped is None else [rate, mapped]
    down = np.arange(layout.top, layout.bottom, 3.0)
    crest = np.full(down.size, place(distance_scale(crossing.transect.distance, layout), shape.crest_distance))
    board = Board(
        Box(layout.left, layout.top - 10.0, layout.right + 2.0, layout.bottom),
        letter,
        points_x=np.concatenate([*[fine] * len(lines), crest]),
        points_y=np.concatenate([*(np.interp(fine, x, line) for line in lines), down]),
    )
    wide = layout.name == "wide"
    peak = quantity(rain.peak_rate, "rain_rate", 1, units)
    own = f"crossing, peak {peak}" if wide else "crossing"
    groups = [[*_under(x, rate, own, layout), *_beside(x, rate, own, "name dew", letter)]]
    if mapped is not None:
        groups.append(_beside(x, mapped, "map, same line" if wide else "map", "name ink", letter))
    if rain.background > 0.0:
        words = f"background {quantity(rain.background, 'rain_rate', 1, units)}"
        ends: tuple[tuple[float, Anchor], ...] = ((layout.left + 4.0, "start"), (layout.right - 4.0, "end"))
        groups.append([(Label(words, at, round(level - 4.0, 1), anchor, "name soft"),) for at, anchor in ends])
    out: tuple[Label, ...] = ()
    for group in groups:
        labels, board = put(board, group)
        out += labels
    return out


def _under(x: Array, y: Array, text: str, layout: Layout) -> list[tuple[Label, ...]]:
    """Places for a name in the body under its highest point, where the body is deep and wide enough."""
    at = int(np.argmin(y))
    half = 0.5 * text_width(text, layout.letter) + 4.0
    out: list[tuple[Label, ...]] = []
    for share in (0.55, 0.7, 0.85):
        foot = float(y[at]) + share * (layout.bottom - float(y[at]))
        for shift in (0.0, -0.5, 0.5, -1.0, 1.0):
            middle = float(x[at]) + shift * half
            deep = np.interp(np.linspace(middle - half, middle + half, 9), x, y)
            if deep.max() < foot - 1.1 * layout.letter:
                out.append((Label(text, round(middle, 1), round(foot, 1), "middle", "in-rain"),))
    return out


def _beside(x: Array, y: Array, text: str, kind: str, letter: float) -> list[tuple[Label, ...]]:
    """Places for a name beside the highest point of a line."""
    at = int(np.argmin(y))
    out: list[tuple[Label, ...]] = []
    sides: tuple[tuple[Anchor, float], ...] = (("end", -1.0), ("start", 1.0))
    for gap in (0.6, 1.5, 3.0, 5.0, 8.0, 12.0):
        for drop in (0.3, 1.4, 2.6, -0.6):
            for anchor, side in sides:
                spot = round(float(x[at]) + side * gap * letter, 1)
                out.append((Label(text, spot, round(float(y[at]) + drop * letter, 1), anchor, kind),))
    return out
