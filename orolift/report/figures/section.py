"""The section through the range: ground, air, cloud, falling water and sites, wind from the left."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.briefing import cloudy_to_the_end, crest_index, starts_saturated
from orolift.report.figures.axes import Layout, Scale, Tick, distance_scale, level_ticks, place, ticks
from orolift.report.figures.cloud import cloud_body, falling_water
from orolift.report.figures.drawing import (
    Anchor,
    Curve,
    Figure,
    Label,
    Pin,
    area,
    arrow_head,
    head_along,
    polyline,
    thinned,
)
from orolift.report.figures.pins import UPRIGHT, Spot, pins
from orolift.report.figures.placing import Board, Box, put, text_width, with_taken
from orolift.report.quantities import Units, from_displayed, quantity
from orolift.report.words import point_of_compass

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing

WIDE = Layout("wide", 960.0, 446.0, 56.0, 934.0, 50.0, 408.0, 14.0, 8)
NARROW = Layout("narrow", 344.0, 330.0, 42.0, 320.0, 50.0, 298.0, 12.5, 4)
Flag = tuple[Label, Curve | None]
"""Words, and the line that leads to what they name."""
MOST_LINES = 12
"""Streamlines drawn of those worked out."""


@dataclass(frozen=True)
class SectionDrawing:
    """Everything the section shows, from the back to the front."""

    layout: Layout
    height_ticks: tuple[Tick, ...]
    distance_ticks: tuple[Tick, ...]
    cloud: tuple[Curve, ...]
    falling: Curve | None
    freezing: Curve | None
    ridges: Curve | None
    ground: Curve
    streamlines: tuple[Curve, ...]
    leaders: tuple[Curve, ...]
    heads: tuple[Curve, ...]
    pins: tuple[Pin, ...]
    labels: tuple[Label, ...]


def section(crossing: Crossing, bearing: float, freezing_level: float, units: Units) -> Figure[SectionDrawing]:
    """The section through the range.

    Parameters
    ----------
    crossing : Crossing
    bearing : float [rad]
        Direction the wind comes from, clockwise from north.
    freezing_level : float [m]
        Of the incoming air, above sea level.
    units : 'metric' or 'us'

    Returns
    -------
    Figure of SectionDrawing
    """
    shape = crossing.features
    crest = quantity(shape.crest, "height", 0, units)
    alt = (
        f"Section along the wind, which blows from left to right. The ground rises from "
        f"{quantity(float(crossing.height[0, 0]), 'height', 0, units)} to the crest at {crest}, "
        f"{quantity(shape.crest_distance - float(crossing.distance[0]), 'distance', 0, units)} from the "
        f"upwind end, and falls to {quantity(shape.lee_foot, 'height', 0, units)} at the lee foot. "
        + _cloud_words(crossing, units)
        + "".join(
            f" {air.name}, at {quantity(air.elevation, 'height', 0, units)}: "
            f"{quantity(air.temperature, 'temperature', 1, units)}."
            for air in crossing.lee
        )
    )
    return Figure(
        key="section",
        drawing=_drawing(crossing, bearing, freezing_level, units, WIDE),
        narrow=_drawing(crossing, bearing, freezing_level, units, NARROW),
        title="Section through the range along the wind",
        alt=alt,
        caption=_caption(crossing),
    )


def _cloud_words(crossing: Crossing, units: Units) -> str:
    if crossing.cloud.base is None:
        return "No cloud forms."
    words = f"Cloud from {quantity(crossing.cloud.base, 'height', -1, units)} on the windward side"
    if cloudy_to_the_end(crossing):
        return f"{words} to the downwind end."
    if crossing.cloud.end is None:
        return f"{words}."
    return f"{words} to {quantity(crossing.cloud.end, 'height', -1, units)} in the lee."


def _caption(crossing: Crossing) -> str:
    parts = [
        "Wind blows from left to right; heights are above sea level and stretched as marked.",
        "The coloured line is the lowest air, with its temperature.",
    ]
    if crossing.cloud.base is not None and crossing.height.shape[1] == 1:
        parts.append("Grey is cloud: where it begins and ends on the slope is worked out, its top is not.")
    if crossing.water.removed > 0.0:
        parts.append("Blue strokes are water leaving the air, longer where more of it falls.")
    if crossing.transect.high_elevation is not None:
        parts.append("The paler ground behind is the higher ridges beside the line.")
    parts.append("Numbered discs are the sites of the table.")
    return " ".join(parts)


def _up(crossing: Crossing, freezing_level: float, layout: Layout, units: Units) -> Scale:
    """Vertical scale: from sea level, unless all of the ground is far above it, to well above the crest."""
    ground = crossing.height[:, 0]
    lowest, highest = float(ground.min()), float(ground.max())
    low = min(0.0, lowest)
    if lowest > 0.4 * highest:
        step = from_displayed(500.0 if units == "metric" else 2000.0, "height", units)
        low = step * np.floor(0.95 * lowest / step)
    span = highest - low
    top = highest + 0.42 * span
    if highest + 0.1 * span < freezing_level < highest + 0.75 * span:
        top = max(top, freezing_level + 0.12 * span)
    return Scale(float(low), float(top), layout.bottom, layout.top)


def _drawing(crossing: Crossing, bearing: float, freezing_level: float, units: Units, layout: Layout) -> SectionDrawing:
    across = distance_scale(crossing.distance, layout)
    up = _up(crossing, freezing_level, layout, units)
    x, ground = place(across, crossing.distance), place(up, crossing.height[:, 0])
    outline = thinned(x, ground)
    depth = 0.2 * (layout.bottom - layout.top)
    board = Board(Box(layout.left, layout.top - 6.0, layout.right + 2.0, layout.bottom), layout.letter, x, ground)
    freezing, labels, board = _freezing(freezing_level, units, up, board)
    spots = _spots(crossing, units, across, up)
    roots = [Box(spot.x - 2.0, spot.y - 3.4 * layout.letter, spot.x + 2.0, spot.y) for spot in spots]
    more, leaders, marked = _marks(crossing, units, across, up, with_taken(board, *roots))
    labels += more
    board = replace(marked, taken=tuple(box for box in marked.taken if box not in roots))
    sites, board = pins(spots, board, UPRIGHT, names=layout is WIDE)
    high = crossing.transect.high_elevation
    heads = [head_along(x, ground, share, 13.0, "head air") for share in (0.2, 0.8)]
    return SectionDrawing(
        layout=layout,
        height_ticks=level_ticks(up, units, 5, layout.letter),
        distance_ticks=ticks(across, "distance", units, layout.ticks, shift=crossing.transect.origin),
        cloud=cloud_body(crossing, across, up, outline, depth),
        falling=falling_water(crossing, across, up, 0.62 * depth, 8.0),
        freezing=freezing,
        ridges=None if high is None else area(x, np.minimum(place(up, high), ground), layout.bottom, "ridges"),
        ground=area(x, ground, layout.bottom, "ground", outline),
        streamlines=_streamlines(crossing, x, up, outline),
        leaders=leaders,
        heads=(*(head for head in heads if head is not None), *_wind_arrow(layout)),
        pins=sites,
        labels=(*labels, *_header(crossing, bearing, across, up, layout, units)),
    )


def _streamlines(crossing: Crossing, x: NDArray[np.float64], up: Scale, outline: NDArray[np.int_]) -> tuple[Curve, ...]:
    """The lowest streamline and an even choice of those above it that enter the frame."""
    inside = np.flatnonzero(crossing.start_height <= up.high)
    chosen = np.unique(np.linspace(0, inside[-1], min(MOST_LINES, inside.size)).round().astype(int))
    lowest = place(up, crossing.height[:, 0])
    return (
        *(polyline(x, place(up, crossing.height[:, k]), "air") for k in chosen[:0:-1].tolist()),
        polyline(x, lowest, "air casing", outline),
        polyline(x, lowest, "air lowest", outline),
    )


def _freezing(level: float, units: Units, up: Scale, board: Board) -> tuple[Curve | None, tuple[Label, ...], Board]:
    """The freezing level of the incoming air, as far as it stands free of the ground, with its name."""
    words = f"0 °C in the incoming air: {quantity(level, 'height', -1, units)}"
    if units == "us":
        words = f"32 °F in the incoming air: {quantity(level, 'height', -1, units)}"
    if text_width(words, board.letter) > 0.7 * (board.frame.right - board.frame.left):
        words = f"freezing level {quantity(level, 'height', -1, units)}"
    y = place(up, level)
    if not up.low < level < up.high:
        words += ", above this picture" if level >= up.high else ""
        spot = (Label(words, board.frame.right - 2.0, board.frame.top + board.letter + 4.0, "end", "freezing"),)
        labels, board = put(board, [spot], needed=level >= up.high)
        return None, labels, board
    line = Curve(f"M{board.frame.left:.1f} {y:.1f}H{board.frame.right:.1f}", "freezing")
    above, below = round(y - 5.0, 1), round(y + board.letter, 1)
    right, left = board.frame.right - 2.0, board.frame.left + 6.0
    labels, board = put(
        board,
        [
            (Label(words, right, above, "end", "freezing"),),
            (Label(words, left, above, "start", "freezing"),),
            (Label(words, right, below, "end", "freezing"),),
            (Label(words, left, below, "start", "freezing"),),
        ],
    )
    return line, labels, board


def _flags(x: float, y: float, words: str, kind: str, side: float, rises: tuple[float, ...]) -> list[Flag]:
    """Places for words above a point, on the wished side first; those far above get a leader down to it."""
    anchors: tuple[tuple[Anchor, float], ...] = (("end", -5.0), ("start", 5.0))
    out: list[Flag] = []
    for rise in rises:
        for anchor, shift in anchors[:: 1 if side < 0.0 else -1]:
            leader = Curve(f"M{x:.1f} {y:.1f}V{y - rise - 8.0:.1f}", "leader") if rise > 24.0 else None
            out.append((Label(words, round(x + shift, 1), round(y - rise, 1), anchor, kind), leader))
    return out


def _beside_the_slope(x: float, y: float, words: str, side: float, letter: float) -> list[Flag]:
    """Places for words at the height of a point on a slope, on a line that runs out to the free side."""
    end = x + side * (text_width(words, letter) + 10.0)
    leader = Curve(f"M{x:.1f} {y:.1f}H{end:.1f}", "leader")
    anchor: Anchor = "end" if side < 0.0 else "start"
    return [(Label(words, round(x + 8.0 * side, 1), round(y - 6.0, 1), anchor, "place"), leader)]


def _in_the_ground(x: float, y: float, words: str, side: float, letter: float) -> list[Flag]:
    """Places for words under a point, for drawings without room above it."""
    anchor: Anchor = "start" if side < 0.0 else "end"
    return [
        (
            Label(text, round(x - 5.0 * side, 1), round(y + drop, 1), anchor, "in-ground"),
            Curve(f"M{x:.1f} {y + 4.0:.1f}V{y + drop:.1f}", "in-ground"),
        )
        for text in (words, words.removeprefix("cloud "))
        for drop in (1.9 * letter, 2.6 * letter, 3.6 * letter, 5.0 * letter, 7.0 * letter, 9.0 * letter)
    ]


def _put_flag(board: Board, *wishes: tuple[list[Flag], bool]) -> tuple[tuple[Label, ...], tuple[Curve, ...], Board]:
    """The first flag that fits, with its leader; each list of wishes says whether it stands in the ground."""
    for flags, underground in wishes:
        labels, board = put(board, [(label,) for label, _ in flags], underground=underground)
        if labels:
            leaders = tuple(leader for label, leader in flags if leader is not None and (label,) == labels)
            return labels, leaders[:1], board
    return (), (), board


def _marks(
    crossing: Crossing, units: Units, across: Scale, up: Scale, board: Board
) -> tuple[tuple[Label, ...], tuple[Curve, ...], Board]:
    """Crest, cloud base and end of cloud with their heights, and the temperature of the air at its start."""
    labels, board = _crest(crossing, units, across, up, board)
    start = place(across, float(crossing.distance[0])), place(up, float(crossing.height[0, 0]))
    warm = quantity(float(crossing.air.temperature[0, 0]), "temperature", 1, units)
    rises = (9.0, 16.0, 24.0, 36.0, 48.0, 64.0, 80.0)
    more, leaders, board = _put_flag(board, (_flags(*start, warm, "value", 1.0, rises), False))
    labels += more
    base = None if starts_saturated(crossing) else crossing.cloud.base
    end = None if cloudy_to_the_end(crossing) else crossing.cloud.end
    for name, height, distance, side in (
        ("cloud base", base, crossing.cloud.base_distance, -1.0),
        ("cloud ends", end, crossing.cloud.end_distance, 1.0),
    ):
        if height is None or distance is None:
            continue
        spot = place(across, distance), place(up, height)
        words = f"{name} {quantity(height, 'height', -1, units)}"
        more, lines, board = _put_flag(
            board,
            (_beside_the_slope(*spot, words, side, board.letter), False),
            (_in_the_ground(*spot, words, side, board.letter), True),
            (_flags(*spot, words, "place", side, (40.0, 60.0, 80.0, 100.0, 120.0, 150.0, 180.0)), False),
        )
        labels, leaders = labels + more, leaders + lines
    return labels, leaders, board


def _crest(crossing: Crossing, units: Units, across: Scale, up: Scale, board: Board) -> tuple[tuple[Label, ...], Board]:
    """Height and temperature at the crest; to one side of it where a site's pin needs the room."""
    shape, letter = crossing.features, board.letter
    x, y = place(across, shape.crest_distance), place(up, shape.crest)
    words = f"crest {quantity(shape.crest, 'height', 0, units)}"
    warm = quantity(float(crossing.air.temperature[crest_index(crossing), 0]), "temperature", 1, units)
    gaps = [place(across, air.distance) - x for air in crossing.lee]
    near = min(gaps, key=abs)
    anchor: Anchor = "middle"
    shift = 0.0
    if abs(near) < 5.0 * letter:
        anchor, shift = ("end", -letter) if near >= 0.0 else ("start", letter)
    groups = []
    for rise in (10.0, 28.0, 46.0):
        first = Label(words, round(x + shift, 1), round(y - rise - 1.2 * letter, 1), anchor, "place")
        second = Label(warm, round(x + shift, 1), round(y - rise, 1), anchor, "value")
        groups.append((first,) if abs(near) < letter else (first, second))
    return put(board, groups, needed=True)


def _spots(crossing: Crossing, units: Units, across: Scale, up: Scale) -> list[Spot]:
    return [
        Spot(
            number,
            place(across, air.distance),
            place(up, air.elevation),
            air.name,
            quantity(air.temperature, "temperature", 1, units),
        )
        for number, air in enumerate(crossing.lee, start=1)
    ]


def _wind_arrow(layout: Layout) -> tuple[Curve, ...]:
    y = 16.0
    end = layout.left + 34.0
    return (
        Curve(f"M{layout.left:.1f} {y}H{end - 6.0:.1f}", "wind"),
        arrow_head(end, y, 1.0, 0.0, 9.0, "head wind-head"),
    )


def _header(
    crossing: Crossing, bearing: float, across: Scale, up: Scale, layout: Layout, units: Units
) -> tuple[Label, ...]:
    """Where the wind comes from, and how far heights are stretched."""
    stretch = up.units_per_value / across.units_per_value
    times = f"{stretch:.0f}" if stretch >= 9.5 else f"{stretch:.1f}"
    wind = f"from the {point_of_compass(bearing)}"
    if layout is WIDE:
        speed = quantity(crossing.flow.crest_wind, "wind", 0, units)
        wind = f"wind {wind}, {quantity(bearing, 'bearing', 0, units)}; {speed} across the crest"
    factor = f"heights stretched {times} times" if layout is WIDE else f"heights × {times}"
    y = 16.0 + 0.34 * layout.letter
    return (
        Label(wind, layout.left + 42.0, y, "start", "note"),
        Label(factor, layout.right, y, "end", "note"),
    )
