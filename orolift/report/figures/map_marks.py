"""What stands on a map of rain: scale bar, wind, gauges, names and values, where they cover nothing."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.report.figures.axes import round_step
from orolift.report.figures.drawing import Curve, Label, arrow_head, path_data
from orolift.report.figures.map_contours import rain_lines
from orolift.report.figures.map_ground import frame_box, on_drawing
from orolift.report.figures.pins import shortened
from orolift.report.figures.placing import Board, Box, box_of, meet, put, text_width, with_taken
from orolift.report.quantities import Units, displayed, from_displayed, number, quantity

if TYPE_CHECKING:
    from collections.abc import Iterator

    from numpy.typing import NDArray

    from orolift.rain.over_map import MapRain
    from orolift.report.figures.drawing import Anchor
    from orolift.report.figures.map_ground import Ground

    Array = NDArray[np.float64]
    Corner = tuple[tuple[Curve, ...], Label, Box]

MOST_NAMES = 12
"""Catchments beyond which none is named, and half the gauges beyond which none is lettered; the tables have all."""
MARGIN = 6.0
"""Room beside a scale bar, drawing units."""
ARROW = 17.0
"""Half the length of the wind arrow, drawing units."""
GAUGE = 5.0
"""Half the size of a gauge, drawing units."""


def corner_marks(
    wind: tuple[float, float], ground: Ground, board: Board, units: Units, *, wide: bool
) -> tuple[tuple[Curve, ...], tuple[Label, ...], Board]:
    """Scale bar and wind arrow, each in the first corner that is free.

    Parameters
    ----------
    wind : (float, float) [m s-1], [rad]
        Speed, and bearing on the map toward which it blows.
    ground : Ground
    board : Board
    units : 'metric' or 'us'
    wide : bool
        Whether there is room for a second unit.

    Returns
    -------
    (tuple of Curve, tuple of Label, Board)
    """
    curves: tuple[Curve, ...] = ()
    labels: tuple[Label, ...] = ()
    for places in (_scale_bar(ground, board, units), _wind(wind, ground, board, units, wide=wide)):
        for drawn, label, box in places:
            if not _covers(board, box):
                board = with_taken(board, box)
                curves, labels = curves + drawn, (*labels, label)
                break
    return curves, labels, board


def _covers(board: Board, box: Box) -> bool:
    """Whether a box covers a line or what was placed before."""
    x, y = board.points_x, board.points_y
    covered = (x > box.left) & (x < box.right) & (y > box.top) & (y < box.bottom)
    return bool(covered.any()) or any(meet(box, other) for other in board.taken)


def _scale_bar(ground: Ground, board: Board, units: Units) -> Iterator[Corner]:
    """A bar of a round length, low in the map first."""
    frame, letter = ground.frame, board.letter
    span = displayed((frame.right - frame.left) / ground.scale, "distance", units)
    length = from_displayed(round_step(span, 5), "distance", units)
    long = length * ground.scale
    text = quantity(length, "distance", 0, units)
    room = max(long, text_width(text, letter)) + 2.0 * MARGIN
    for x in (frame.left + 10.0, frame.right - 10.0 - long):
        for y in (frame.bottom - 14.0, frame.top + 26.0):
            middle = x + 0.5 * long
            bar = Curve(f"M{x:.1f} {y - 5:.1f}v5h{long:.1f}v-5", "scale-bar")
            label = Label(text, round(middle, 1), round(y - 8.0, 1), "middle", "name ink")
            yield (bar,), label, Box(middle - 0.5 * room, y - 10.0 - letter, middle + 0.5 * room, y + 6.0)


def _wind(wind: tuple[float, float], ground: Ground, board: Board, units: Units, *, wide: bool) -> Iterator[Corner]:
    """An arrow along the wind of the map, high in the map first."""
    frame, letter = ground.frame, board.letter
    blows, bearing = wind
    speed = quantity(blows, "wind", 0, units)
    text = f"wind {speed}" if wide else speed.split("\u00a0(")[0]
    dx, dy = ARROW * float(np.sin(bearing)), -ARROW * float(np.cos(bearing))
    room = text_width(text, letter)
    corners: tuple[tuple[float, float, Anchor], ...] = (
        (frame.left + ARROW + 12.0, 1.0, "start"),
        (frame.right - ARROW - 12.0, -1.0, "end"),
    )
    for x, inward, anchor in corners:
        at = x + inward * (ARROW + 7.0)
        low, high = sorted((x - inward * (ARROW + 2.0), at + inward * room))
        for y in (frame.top + ARROW + 10.0, frame.bottom - ARROW - 10.0):
            shaft = Curve(f"M{x - dx:.1f} {y - dy:.1f}L{x + 0.7 * dx:.1f} {y + 0.7 * dy:.1f}", "map-wind")
            head = arrow_head(x + dx, y + dy, dx, dy, 13.0, "map-wind-head")
            label = Label(text, round(at, 1), round(y + 0.35 * letter, 1), anchor, "name ink")
            yield (shaft, head), label, Box(low, y - ARROW - 4.0, high, y + ARROW + 4.0)


def gauge_marks(
    rain: MapRain, ground: Ground, board: Board, units: Units
) -> tuple[tuple[Curve, ...], tuple[Label, ...], Board]:
    """Diamonds with what was caught, and in brackets what the map has.

    Parameters
    ----------
    rain : MapRain
    ground : Ground
    board : Board
    units : 'metric' or 'us'

    Returns
    -------
    (tuple of Curve, tuple of Label, Board)
    """
    if rain.gauges is None or rain.comparison is None:
        return (), (), board
    frame = ground.frame
    curves: list[Curve] = []
    labels: tuple[Label, ...] = ()
    few = len(rain.gauges.name) <= 2 * MOST_NAMES
    for x, y, caught, there in zip(
        ground.across(rain.gauges.x),
        ground.down(rain.gauges.y),
        rain.gauges.total,
        rain.comparison.modelled,
        strict=True,
    ):
        if not (frame.left < x < frame.right and frame.top < y < frame.bottom):
            continue
        g = GAUGE
        curves.append(Curve(f"M{x:.1f} {y - g:.1f}l{g} {g}l-{g} {g}l-{g} -{g}Z", "gauge-mark"))
        board = with_taken(board, Box(x - g, y - g, x + g, y + g))
        if not few:
            continue
        text = quantity(float(caught), "water_depth", 0, units)
        if np.isfinite(there):
            text = f"{text} ({number(float(there), 'water_depth', 0, units)})"
        near, board = put(board, _around(float(x), float(y), text, board.letter))
        if not near:
            near, leaders, board = _led(float(x), float(y), text, "name ink", board)
            curves += leaders
        labels += near
    return tuple(curves), labels, board


def _around(x: float, y: float, text: str, letter: float) -> list[tuple[Label, ...]]:
    """Places for words right beside a point."""
    out: list[tuple[Label, ...]] = []
    sides: tuple[tuple[float, Anchor], ...] = ((1.0, "start"), (-1.0, "end"))
    for drop in (0.35, 1.3, -0.6):
        for side, anchor in sides:
            spot = round(x + side * 0.6 * letter, 1)
            out.append((Label(text, spot, round(y + drop * letter, 1), anchor, "name ink"),))
    out += [(Label(text, round(x, 1), round(y + drop * letter, 1), "middle", "name ink"),) for drop in (1.6, -0.8)]
    return out


def _led(x: float, y: float, text: str, kind: str, board: Board) -> tuple[tuple[Label, ...], tuple[Curve, ...], Board]:
    """Words farther off, with a line to them; none where there is no room."""
    letter = board.letter
    sides: tuple[tuple[float, Anchor], ...] = ((1.0, "start"), (-1.0, "end"))
    for gap in (2.0, 3.5, 5.0, 7.0, 9.0):
        for drop in (-2.0, 2.0, -4.0, 4.0, -6.0, 6.0, 0.0):
            for side, anchor in sides:
                at, down = round(x + side * gap * letter, 1), round(y + drop * letter, 1)
                end = at - side * 0.25 * letter, down - 0.3 * letter
                if _crosses(board, x, y, *end):
                    continue
                found, after = put(board, [(Label(text, at, down, anchor, kind),)])
                if found:
                    leader = Curve(f"M{x:.1f} {y:.1f}L{end[0]:.1f} {end[1]:.1f}", "leader")
                    return found, (leader,), after
    return (), (), board


def _crosses(board: Board, x: float, y: float, end_x: float, end_y: float) -> bool:
    """Whether a line from a point outward crosses what was placed before, its own mark apart."""
    if not board.taken:
        return False
    away = float(np.hypot(end_x - x, end_y - y))
    share = np.linspace(min(2.0 * GAUGE / max(away, 1.0), 1.0), 1.0, 24)[:, np.newaxis]
    at_x, at_y = x + share * (end_x - x), y + share * (end_y - y)
    left, top, right, bottom = np.array([(box.left, box.top, box.right, box.bottom) for box in board.taken]).T
    covered = (at_x > left - 1.0) & (at_x < right + 1.0) & (at_y > top - 1.0) & (at_y < bottom + 1.0)
    return bool(covered.any())


def catchment_names(rain: MapRain, ground: Ground, board: Board) -> tuple[tuple[Curve, ...], tuple[Label, ...], Board]:
    """Names of the catchments, in them where there is room, else beside them with a line.

    Parameters
    ----------
    rain : MapRain
    ground : Ground
    board : Board

    Returns
    -------
    (tuple of Curve, tuple of Label, Board)
    """
    curves: tuple[Curve, ...] = ()
    out: tuple[Label, ...] = ()
    frame = frame_box(ground)
    for one in rain.catchments if len(rain.catchments) <= MOST_NAMES else ():
        drawn = on_drawing(one.catchment.polygon, ground).intersection(frame)
        if drawn.is_empty:
            continue
        inner = drawn.representative_point()
        text = shortened(one.catchment.name)
        new, board = put(board, _inside(drawn, text, board.letter))
        if not new:
            new, leaders, board = _led(inner.x, inner.y, text, "catchment-name", board)
            curves += leaders
        out += new
    return curves, out, board


def _inside(drawn: Any, text: str, letter: float) -> list[tuple[Label, ...]]:
    """Places for a name wholly inside an area, the ones nearest to its middle first."""
    from shapely import box

    left, top, right, bottom = drawn.bounds
    middle = drawn.representative_point()
    places = [
        (float(x), float(y)) for x in np.linspace(left, right, 15)[1:-1] for y in np.linspace(top, bottom, 15)[1:-1]
    ]
    out: list[tuple[Label, ...]] = []
    for x, y in sorted(places, key=lambda at: float(np.hypot(at[0] - middle.x, at[1] - middle.y))):
        label = Label(text, round(x, 1), round(y, 1), "middle", "catchment-name")
        room = box_of(label, letter)
        if drawn.contains(box(room.left, room.top, room.right, room.bottom)):
            out.append((label,))
    return out


def rain_contours(
    made: Any, levels: list[float], board: Board, units: Units
) -> tuple[tuple[Curve, ...], tuple[Label, ...], Board]:
    """Lines of equal rain, the longest of each level lettered where there is room.

    Parameters
    ----------
    made : contourpy ContourGenerator
        Of the rate [kg m-2 s-1], in drawing coordinates.
    levels : list of float [kg m-2 s-1]
    board : Board
    units : 'metric' or 'us'

    Returns
    -------
    (tuple of Curve, tuple of Label, Board)
    """
    curves: list[Curve] = []
    labels: tuple[Label, ...] = ()
    for level in levels:
        lines = rain_lines(made, level)
        curves += [Curve(path_data(*line), "rain-contour") for line in lines]
        shown = displayed(level, "rain_rate", units)
        digits = 0 if units == "metric" and abs(shown - round(shown)) < 1e-9 else 1
        text = quantity(level, "rain_rate", digits, units)
        spots = []
        for x, y in lines[:4]:
            for share in (0.5, 0.3, 0.7, 0.15, 0.85):
                i = min(int(share * x.size), x.size - 1)
                at = (round(float(x[i]), 1), round(float(y[i]) + 0.3 * board.letter, 1))
                spots.append((Label(text, *at, "middle", "rain-value"),))
        new, board = put(board, spots)
        labels += new
    return tuple(curves), labels, board
