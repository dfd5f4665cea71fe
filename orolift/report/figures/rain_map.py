"""The map of rain: shaded relief, rain in steps, the line and its wind, catchments, gauges and sites."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.rain.windward import divide_points
from orolift.report.figures.axes import Layout, round_step
from orolift.report.figures.drawing import Curve, Figure, Label, Pin, arrow_head, path_data, thinned
from orolift.report.figures.map_contours import contours_of, rain_layer
from orolift.report.figures.map_ground import Ground, frame_box, ground_of, on_drawing, outline, parts_of
from orolift.report.figures.map_marks import MOST_NAMES, catchment_names, corner_marks, gauge_marks, rain_contours
from orolift.report.figures.pins import ASIDE, Spot, pins
from orolift.report.figures.placing import Board, Box
from orolift.report.figures.relief import block_means, relief
from orolift.report.quantities import Units, displayed, from_displayed, quantity
from orolift.report.story import first_sites
from orolift.report.words import point_of_compass

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing
    from orolift.rain.over_map import MapRain
    from orolift.sources.map_inputs import Mapped

    Array = NDArray[np.float64]

WIDE_PAGE, NARROW_PAGE = (960.0, 878.0, 620.0, 14.0), (344.0, 328.0, 430.0, 12.5)
"""Width of the drawing, most width and most height of the map, height of the lettering."""
PICTURE_POINTS = {"wide": 400, "narrow": 200}
CONTOUR_CELLS = 120
"""Cells along the longer side that rain is contoured on."""
STEPS = 5
"""About how many steps of rain there are."""
TURNED = np.radians(3.0)
"""Grid north further than this from true north is said."""


@dataclass(frozen=True)
class RainMapDrawing:
    """Everything the map shows, from the back to the front.

    Attributes
    ----------
    layout : Layout
    relief : str
        Address of the picture, which fills the frame.
    frame : Box
    width, height : float
        Of the frame.
    layers, contours, swath, borders, lines, gauges : tuple of Curve
    labels : tuple of Label
    pins : tuple of Pin
    """

    layout: Layout
    relief: str
    frame: Box
    width: float
    height: float
    layers: tuple[Curve, ...]
    contours: tuple[Curve, ...]
    swath: tuple[Curve, ...]
    borders: tuple[Curve, ...]
    lines: tuple[Curve, ...]
    gauges: tuple[Curve, ...]
    labels: tuple[Label, ...]
    pins: tuple[Pin, ...]


def rain_map_figure(crossing: Crossing, mapped: Mapped, units: Units) -> Figure[RainMapDrawing]:
    """The map of rain.

    Parameters
    ----------
    crossing : Crossing
    mapped : Mapped
    units : 'metric' or 'us'

    Returns
    -------
    Figure of RainMapDrawing
    """
    return Figure(
        key="rain-map",
        drawing=_drawing(crossing, mapped, units, "wide", WIDE_PAGE),
        narrow=_drawing(crossing, mapped, units, "narrow", NARROW_PAGE),
        title="Rain over the map",
        alt=_alt(mapped.rain, mapped.inputs.placed.north, units),
        caption=_caption(mapped),
    )


def _alt(rain: MapRain, north: float, units: Units) -> str:
    p = rain.column.parameters
    grid = rain.found.grid
    size = " by ".join(quantity(abs(float(v[-1] - v[0])), "distance", 0, units) for v in (grid.x, grid.y))
    wind = point_of_compass(p.bearing - north + np.pi)
    parts = [
        f"Map of {size}; wind from the {wind}.",
        f"Most falls {_where(rain)}, {quantity(rain.peak_rate, 'rain_rate', 1, units)}.",
        f"The mean is {quantity(rain.mean_rate, 'rain_rate', 1, units)}.",
    ]
    parts += [
        f"{one.catchment.name}: {quantity(one.rain.rate, 'rain_rate', 1, units)}."
        for one in rain.catchments[:MOST_NAMES]
        if one.rain.rate is not None
    ]
    return " ".join(parts)


def _where(rain: MapRain) -> str:
    """Place of the peak on the map, in words."""
    grid = rain.found.grid
    east = (rain.peak[0] - grid.x[0]) / (grid.x[-1] - grid.x[0])
    south = (grid.y[0] - rain.peak[1]) / (grid.y[0] - grid.y[-1])
    vertical = ("in the north", "in the middle", "in the south")[min(int(3 * south), 2)]
    horizontal = (" of the west", "", " of the east")[min(int(3 * east), 2)]
    return f"{vertical}{horizontal}"


def _caption(mapped: Mapped) -> str:
    rain = mapped.rain
    border = "the line given" if rain.drawn_divide else "the crest of each strip along the wind"
    turned = abs(mapped.inputs.placed.north) > TURNED
    parts = [
        "Blue, in steps: rain and snow by the linear theory.",
        "Grid north is up." if turned else "North is up.",
        "The bold line is that of the crossing, with its swath and an arrow where the air goes.",
        f"Dotted: where the windward side ends, {border}.",
    ]
    if rain.catchments:
        parts.append("Outlined: catchments.")
    if rain.gauges is not None:
        parts.append("Diamonds are gauges: what they caught, and in brackets what the map has there.")
    parts.append("Numbered discs are the sites.")
    return " ".join(parts)


def _drawing(
    crossing: Crossing, mapped: Mapped, units: Units, name: str, page: tuple[float, float, float, float]
) -> RainMapDrawing:
    """One form of the map."""
    width, most_wide, most_high, letter = page
    ground, height = ground_of(mapped.rain.found.grid, width, most_wide, most_high)
    frame = ground.frame
    layout = Layout(name, width, height, frame.left, frame.right, frame.top, frame.bottom, letter, 0)
    levels = _levels(mapped.rain, units)
    made = contours_of(*_field(mapped.rain, ground))
    line, swath = line_on_map(mapped, ground)
    borders, outlines = _borders(mapped.rain, ground)
    points = [line, *outlines]
    board = Board(
        Box(frame.left + 3.0, frame.top + 3.0, frame.right - 3.0, frame.bottom - 3.0),
        letter,
        points_x=np.concatenate([part[0] for part in points]),
        points_y=np.concatenate([part[1] for part in points]),
    )
    marks, labels, board = corner_marks(wind_of(mapped), ground, board, units, wide=name == "wide")
    placed, board = pins(spots_on_map(crossing, mapped, ground), board, ASIDE, names=name == "wide")
    gauges, words, board = gauge_marks(mapped.rain, ground, board, units)
    leaders, known, board = catchment_names(mapped.rain, ground, board)
    contours, values, _ = rain_contours(made, levels, board, units)
    return RainMapDrawing(
        layout=layout,
        relief=relief(mapped.rain.found.grid, PICTURE_POINTS[name]),
        frame=frame,
        width=round(frame.right - frame.left, 1),
        height=round(frame.bottom - frame.top, 1),
        layers=tuple(layer for level in levels if (layer := rain_layer(made, level, "rain-layer")) is not None),
        contours=contours,
        swath=swath,
        borders=borders,
        lines=(*divide_on_map(mapped, ground), *drawn_line(line), *marks, *leaders),
        gauges=gauges,
        labels=(*labels, *words, *known, *values),
        pins=placed,
    )


def _levels(rain: MapRain, units: Units) -> list[float]:
    """Round rates that are drawn, the lowest half a step."""
    peak = displayed(rain.peak_rate, "rain_rate", units)
    if peak <= 0.0:
        return []
    step = round_step(peak, STEPS)
    shown = [0.5 * step, *np.arange(step, peak, step)]
    return [from_displayed(float(value), "rain_rate", units) for value in shown]


def _field(rain: MapRain, ground: Ground) -> tuple[Array, Array, Array]:
    """Columns, rows and rates on cells coarse enough to draw."""
    grid = rain.found.grid
    step = max(1, -(-max(grid.elevation.shape) // CONTOUR_CELLS))
    rate = block_means(np.nan_to_num(rain.found.rate), step)
    x = block_means(np.tile(grid.x, (step, 1)), step)[0]
    y = block_means(np.tile(grid.y[:, np.newaxis], (1, step)), step)[:, 0]
    return ground.across(x), ground.down(y), rate


def wind_of(mapped: Mapped) -> tuple[float, float]:
    """Speed of the wind of the map [m s-1], and the bearing on it toward which it blows [rad]."""
    parameters = mapped.rain.column.parameters
    return parameters.wind_speed, parameters.bearing


def line_on_map(mapped: Mapped, ground: Ground) -> tuple[tuple[Array, Array], tuple[Curve, ...]]:
    """The transect in the frame, and its swath."""
    from shapely import LineString

    line = mapped.inputs.line
    x, y = ground.across(line.x), ground.down(line.y)
    frame = frame_box(ground)
    inside = parts_of(LineString(np.column_stack([x, y])).intersection(frame))
    longest = max(inside, key=lambda part: part.length, default=None)
    points = np.empty((0, 2)) if longest is None else np.asarray(longest.coords)
    if line.width <= 0.0 or longest is None:
        return (points[:, 0], points[:, 1]), ()
    wide = longest.buffer(0.5 * line.width * ground.scale, cap_style="flat").intersection(frame)
    return (points[:, 0], points[:, 1]), tuple(outline(part, "swath") for part in parts_of(wide))


def drawn_line(line: tuple[Array, Array]) -> tuple[Curve, ...]:
    """The transect with an arrow where the air leaves it."""
    x, y = line
    if x.size < 2:
        return ()
    keep = thinned(x, y)
    path = path_data(x[keep], y[keep])
    back = max(x.size - 4, 0)
    head = arrow_head(float(x[-1]), float(y[-1]), float(x[-1] - x[back]), float(y[-1] - y[back]), 11.0, "line-head")
    return Curve(path, "map-line casing"), Curve(path, "map-line"), head


def divide_on_map(mapped: Mapped, ground: Ground) -> tuple[Curve, ...]:
    """Where the windward side ends."""
    from shapely import LineString

    rain = mapped.rain
    given = mapped.inputs.divide
    lines = [divide_points(rain.divide)] if given is None else list(given)
    out = []
    for points in lines:
        if points.shape[0] < 2:
            continue
        x, y = ground.across(points[:, 0]), ground.down(points[:, 1])
        inside = LineString(np.column_stack([x, y])).intersection(frame_box(ground))
        for part in parts_of(inside):
            at = np.asarray(part.coords)
            keep = thinned(at[:, 0], at[:, 1], 1.0)
            out.append(Curve(path_data(at[keep, 0], at[keep, 1]), "map-divide"))
    return tuple(out)


def _borders(rain: MapRain, ground: Ground) -> tuple[tuple[Curve, ...], list[tuple[Array, Array]]]:
    """Outlines of catchments in the frame, and their points."""
    frame = frame_box(ground)
    curves, points = [], []
    for one in rain.catchments:
        drawn = on_drawing(one.catchment.polygon, ground).intersection(frame)
        for part in parts_of(drawn):
            curves.append(outline(part, "catchment"))
            ring = np.asarray(part.segmentize(4.0).exterior.coords)
            points.append((ring[:, 0], ring[:, 1]))
    return tuple(curves), points


def spots_on_map(crossing: Crossing, mapped: Mapped, ground: Ground) -> list[Spot]:
    """The sites that lie in the frame."""
    line, frame = mapped.inputs.line, ground.frame
    out = []
    for air in first_sites(crossing).lee:
        if 0 < air.number <= len(mapped.inputs.sites):
            x, y = mapped.inputs.sites[air.number - 1]
        else:
            x, y = (float(np.interp(air.distance, crossing.transect.distance, v)) for v in (line.x, line.y))
        at_x, at_y = float(ground.across(np.array(x))), float(ground.down(np.array(y)))
        if frame.left < at_x < frame.right and frame.top < at_y < frame.bottom:
            out.append(Spot(air.number, at_x, at_y, air.name))
    return out
