"""The section through the range: ground, air, cloud, falling water and sites, wind from the left."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures import lettering, streams
from orolift.report.figures.axes import Layout, Tick, level_ticks, place, ticks
from orolift.report.figures.cloud import cloud_body, falling_water
from orolift.report.figures.drawing import Curve, Figure, Label, Pin, area, arrow_head, path_data, thinned
from orolift.report.figures.low_air import blocked_air, cold_pool
from orolift.report.figures.pins import UPRIGHT, pins
from orolift.report.figures.placing import Board, Box, with_taken
from orolift.report.figures.rain_panel import RainPanel, rain_panel
from orolift.report.figures.view import View, view
from orolift.report.figures.wind_panel import WindPanel, wind_panel
from orolift.report.quantities import Units, displayed, quantity
from orolift.report.story import cloudy_to_the_end, is_blocked, rains
from orolift.report.trace import way
from orolift.report.words import point_of_compass

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing
    from orolift.report.figures.lettering import Lettered
    from orolift.report.quantities import Kind
    from orolift.report.trace import Trace

    Writer = Callable[[View, Board], Lettered]

WIDE = Layout("wide", 960.0, 0.0, 56.0, 934.0, 50.0, 456.0, 14.0, 8)
NARROW = Layout("narrow", 344.0, 0.0, 47.0, 322.0, 50.0, 306.0, 12.5, 4)
GAP = 46.0
"""Drawing units between the panels; room for the unit of the axis."""
RAIN_DEPTH, WIND_DEPTH = 66.0, 96.0
"""Drawing units of the panels under the section."""
MOST_PLUMB_LINES = 10


@dataclass(frozen=True)
class SiteWay:
    """The way of the air that reaches a site, drawn when it is asked for.

    Attributes
    ----------
    number : int
        Of the site.
    curves : tuple of Curve
        The bar over the heights it comes from, the casing of the line, the line.
    """

    number: int
    curves: tuple[Curve, ...]


@dataclass(frozen=True)
class Ruler:
    """Where the edges of the frame stand in shown units, for the line that reads the section off."""

    start: float
    end: float
    low: float
    high: float
    foot: float


@dataclass(frozen=True)
class SectionDrawing:
    """Everything the section shows, from the back to the front."""

    layout: Layout
    height_ticks: tuple[Tick, ...]
    distance_ticks: tuple[Tick, ...]
    ridges: Curve | None
    cloud: tuple[Curve, ...]
    isentropes: tuple[Curve, ...]
    freezing: tuple[Curve, ...]
    low_air: tuple[Curve, ...]
    falling: Curve | None
    ground: Curve
    streamlines: tuple[Curve, ...]
    breaking: Curve | None
    followed: tuple[Curve, ...]
    plumb_lines: tuple[Curve, ...]
    leaders: tuple[Curve, ...]
    heads: tuple[Curve, ...]
    pins: tuple[Pin, ...]
    labels: tuple[Label, ...]
    rain: RainPanel | None
    wind: WindPanel
    ways: tuple[SiteWay, ...]
    ruler: Ruler

    @property
    def behind(self) -> tuple[Curve, ...]:
        """Everything behind the ground, from the back."""
        ridges = () if self.ridges is None else (self.ridges,)
        falling = () if self.falling is None else (self.falling,)
        sky = (*ridges, *self.cloud, *self.isentropes, *self.low_air, *falling)
        return (*sky, *self.streamlines, *self.freezing)

    @property
    def before(self) -> tuple[Curve, ...]:
        """Everything before the ground, from the back."""
        breaking = () if self.breaking is None else (self.breaking,)
        return (*self.followed, *breaking, *self.heads, *self.plumb_lines, *self.leaders)


def section(
    crossing: Crossing,
    trace: Trace,
    bearing: float,
    freezing_level: float,
    units: Units,
    blocked: tuple[float, float] | None = None,
) -> Figure[SectionDrawing]:
    """The section through the range, with the wind along the ground under it.

    Parameters
    ----------
    crossing : Crossing
    trace : Trace
        The air that reaches the main site.
    bearing : float [rad]
        Direction the wind comes from, clockwise from north.
    freezing_level : float [m]
        Of the incoming air, above sea level.
    units : 'metric' or 'us'
    blocked : (float, float), optional [m above sea level]
        Range of the top of the blocked air by the members; else that of the thresholds is drawn.

    Returns
    -------
    Figure of SectionDrawing
    """
    forms = (_forms(crossing, layout) for layout in (WIDE, NARROW))
    (wide, *wide_panels), (narrow, *narrow_panels) = (
        (view(crossing, trace, units, f[0], blocked), *f[1:]) for f in forms
    )
    return Figure(
        key="section",
        drawing=_drawing(wide, bearing, freezing_level, *wide_panels),
        narrow=_drawing(narrow, bearing, freezing_level, *narrow_panels),
        title="Section through the range along the wind",
        alt=_alt(crossing, units),
        caption=_caption(crossing, trace, units, members=blocked is not None),
    )


def _alt(crossing: Crossing, units: Units) -> str:
    """The message of the picture for those who do not see it."""

    def said(value: float, kind: Kind, digits: int = 0) -> str:
        return quantity(value, kind, digits, units)

    shape, flow, line = crossing.features, crossing.flow, crossing.transect
    rise = (
        f"The ground rises from {said(float(line.elevation[0]), 'height')} to the crest at "
        f"{said(shape.crest, 'height')}, {said(shape.crest_distance - float(line.distance[0]), 'distance')} from the "
        f"upwind end, and falls to {said(shape.lee_foot, 'height')} at the lee foot."
    )
    parts = ["Section along the wind, which blows from left to right.", rise]
    if is_blocked(crossing):
        parts.append(f"Air below {said(flow.blocked_top, 'height', -1)} is blocked before the range.")
    else:
        parts.append("All the air crosses.")
    if crossing.pool is not None:
        parts.append(f"In the lee cold air stays up to {said(crossing.pool.top, 'height', -1)}.")
    parts.append(_cloud_words(crossing, units))
    if flow.wave_breaking:
        parts.append("Waves break over the range.")
    for air in crossing.lee:
        source = "" if air.source_level is None else f", air from {said(air.source_level, 'height', -1)}"
        parts.append(
            f"{air.name}, at {said(air.elevation, 'height')}: {said(air.temperature, 'temperature', 1)}{source}."
        )
    winds = crossing.winds
    parts.append(f"The wind down the lee reaches {said(winds.strongest, 'wind')}.")
    return " ".join(parts)


def _cloud_words(crossing: Crossing, units: Units) -> str:
    cloud = crossing.cloud
    if cloud.base is None:
        return "No cloud forms."
    words = f"Cloud from {quantity(cloud.base, 'height', -1, units)} on the windward side"
    if cloudy_to_the_end(crossing):
        return f"{words} to the downwind end."
    if cloud.end is None:
        return f"{words}."
    return f"{words} to {quantity(cloud.end, 'height', -1, units)} in the lee."


def _caption(crossing: Crossing, trace: Trace, units: Units, *, members: bool) -> str:
    """What the lines and areas stand for."""
    low, high = (quantity(value, "temperature_difference", 0, units) for value in (1.0, 3.0))
    looks = (
        "Thin lines are other paths of the air: grey where it is about as warm as the incoming air at the same height, "
        f"ochre where more than {low} warmer, thick where more than {high}, blue where cooler."
    )
    parts = [
        "Wind blows from left to right; heights are above sea level and stretched as marked.",
        _followed_words(trace),
        looks,
        "Dotted: equal potential temperature.",
    ]
    if is_blocked(crossing):
        span = "10 to 90 % of the members" if members else "for thresholds of N h/U from 3 to 0.75"
        parts.append(f"Hatched: air that does not get over; the bar on it is the range of its top, {span}.")
    if crossing.pool is not None:
        parts.append("Level strokes: cold air that stays in the lee.")
    if crossing.cloud.base is not None:
        parts.append("Grey is cloud, darker where dense.")
    if rains(crossing):
        parts.append("Blue strokes are water that reaches the ground, longer where more does.")
    if crossing.transect.high_elevation is not None:
        parts.append("The paler ground behind is the higher ridges beside the line.")
    parts.append(
        "Numbered discs are the sites of the table. Below, on the same axis: "
        f"{'rain at the ground and ' if rains(crossing) else ''}the wind along it, dashed over "
        "air that stays."
    )
    return " ".join(parts)


def _followed_words(trace: Trace) -> str:
    if trace.site is None:
        return "The bold line is the air that reaches the lee foot."
    if trace.site.in_pool:
        return f"The bold line is the air that passes over {trace.site.name}."
    return (
        f"The bold line is the air that reaches {trace.site.name}; the bar at its start spans the heights eight tenths "
        "of that air come from."
    )


def _forms(crossing: Crossing, layout: Layout) -> tuple[Layout, Layout, Layout]:
    """The section and the panels of rain and wind under it, all of one picture."""
    share = 1.0 if layout.name == "wide" else 0.78
    rain_top = layout.bottom + GAP
    rain_bottom = rain_top + RAIN_DEPTH * share
    wind_top = (rain_bottom if rains(crossing) else layout.bottom) + GAP
    wind_bottom = wind_top + WIND_DEPTH * share
    whole = replace(layout, height=wind_bottom + 34.0)
    return (
        whole,
        replace(whole, top=rain_top, bottom=round(rain_bottom, 1)),
        replace(whole, top=round(wind_top, 1), bottom=round(wind_bottom, 1)),
    )


def _drawing(seen: View, bearing: float, freezing_level: float, below: Layout, under: Layout) -> SectionDrawing:
    """One form of the figure."""
    crossing, layout, up = seen.crossing, seen.layout, seen.up
    high = crossing.transect.high_elevation
    followed, line = streams.followed(seen)
    isentropes, levels = streams.isentropes(seen)
    ice = streams.freezing(seen)
    breaking, curls = streams.breaking(seen)
    spots = lettering.spots(seen)
    roots = [Box(spot.x - 2.0, spot.y - 3.4 * layout.letter, spot.x + 2.0, spot.y) for spot in spots]
    board = with_taken(lettering.board_of(seen, line), *roots)
    first = (lettering.crest, lettering.source, lettering.low_air, lettering.cloud_marks)
    labels, leaders, board = _written(seen, board, first)
    sites, board = pins(spots, _without(board, roots), UPRIGHT, names=layout.name == "wide")
    then: tuple[Writer, ...] = (
        lettering.on_the_way,
        lambda v, b: lettering.breaking_mark(v, curls, b),
        lambda v, b: lettering.freezing_marks(v, ice, freezing_level, b),
        lettering.carried_marks,
        lambda v, b: lettering.isentrope_marks(v, levels, b),
    )
    more, lines, board = _written(seen, board, then)
    return SectionDrawing(
        layout=layout,
        height_ticks=level_ticks(up, seen.units, 6, layout.letter),
        distance_ticks=ticks(seen.across, "distance", seen.units, layout.ticks, shift=crossing.transect.origin),
        ridges=None if high is None else _ridges(seen, high),
        cloud=cloud_body(seen),
        isentropes=isentropes,
        freezing=tuple(Curve(path_data(*part), "freezing") for part in ice),
        low_air=(*blocked_air(seen), *cold_pool(seen)),
        falling=falling_water(seen),
        ground=_ground(seen),
        streamlines=streams.streamlines(seen),
        breaking=breaking,
        followed=followed,
        plumb_lines=_plumb_lines(seen, under),
        leaders=(*leaders, *lines),
        heads=_wind_arrow(layout),
        pins=sites,
        labels=(*labels, *more, *_header(seen, bearing)),
        rain=rain_panel(seen, below),
        wind=wind_panel(seen, under),
        ways=_ways(seen),
        ruler=_ruler(seen, under),
    )


def _ways(seen: View) -> tuple[SiteWay, ...]:
    """Back from each site to where its air comes from; none for air that stays."""
    out = []
    for site in seen.crossing.lee:
        if site.in_pool or site.in_blocked_air:
            continue
        gone = way(seen.crossing, site)
        x, y = np.asarray(place(seen.across, gone.distance)), np.asarray(place(seen.up, gone.height))
        keep = thinned(x, y)
        line = path_data(x[keep], y[keep])
        curves: tuple[Curve, ...] = (Curve(line, "way-casing"), Curve(line, "way-line"))
        if site.source_level_low is not None and site.source_level_high is not None:
            low, high = (place(seen.up, level) for level in (site.source_level_low, site.source_level_high))
            curves = (Curve(f"M{x[0]:.1f} {low:.1f}V{high:.1f}", "source"), *curves)
        out.append(SiteWay(site.number, curves))
    return tuple(out)


def _ruler(seen: View, under: Layout) -> Ruler:
    shift, units = seen.crossing.transect.origin, seen.units
    start, end = (round(displayed(edge + shift, "distance", units), 3) for edge in (seen.across.low, seen.across.high))
    low, high = (round(displayed(edge, "height", units), 1) for edge in (seen.up.low, seen.up.high))
    return Ruler(start, end, low, high, under.bottom)


def _written(seen: View, board: Board, writers: Sequence[Writer]) -> Lettered:
    """Everything that writers put on a board, one after the other."""
    labels: tuple[Label, ...] = ()
    leaders: tuple[Curve, ...] = ()
    for write in writers:
        more, lines, board = write(seen, board)
        labels, leaders = labels + more, leaders + lines
    return labels, leaders, board


def _without(board: Board, boxes: list[Box]) -> Board:
    return replace(board, taken=tuple(box for box in board.taken if box not in boxes))


def _ground(seen: View) -> Curve:
    """The silhouette down to the foot of the frame."""
    return area(seen.ground_x, seen.ground_y, seen.layout.bottom, "ground", np.arange(seen.ground_x.size))


def _ridges(seen: View, high: NDArray[np.float64]) -> Curve:
    """Higher ground beside the line."""
    line = seen.crossing.transect
    x = place(seen.across, line.distance)
    return area(x, np.minimum(place(seen.up, high), place(seen.up, line.elevation)), seen.layout.bottom, "ridges")


def _plumb_lines(seen: View, under: Layout) -> tuple[Curve, ...]:
    """From every site down into the wind panel, so that both are read together; none where sites crowd."""
    if len(seen.crossing.lee) > MOST_PLUMB_LINES:
        return ()
    return tuple(
        Curve(f"M{x:.1f} {seen.layout.bottom:.1f}V{under.bottom:.1f}", "plumb")
        for x in (place(seen.across, air.distance) for air in seen.crossing.lee)
    )


def _wind_arrow(layout: Layout) -> tuple[Curve, ...]:
    y = 16.0
    end = layout.left + 34.0
    return (
        Curve(f"M{layout.left:.1f} {y}H{end - 6.0:.1f}", "wind"),
        arrow_head(end, y, 1.0, 0.0, 9.0, "head wind-head"),
    )


def _header(seen: View, bearing: float) -> tuple[Label, ...]:
    """Where the wind comes from, and how far heights are stretched."""
    layout, units = seen.layout, seen.units
    stretch = seen.up.units_per_value / seen.across.units_per_value
    times = f"{stretch:.0f}" if stretch >= 9.5 else f"{stretch:.1f}"
    wind = f"from the {point_of_compass(bearing)}"
    if layout.name == "wide":
        speed = quantity(seen.crossing.flow.crest_wind, "wind", 0, units)
        wind = f"wind {wind}, {quantity(bearing, 'bearing', 0, units)}; {speed} across the crest"
    factor = f"heights stretched {times} times" if layout.name == "wide" else f"heights × {times}"
    y = 16.0 + 0.34 * layout.letter
    return (
        Label(wind, layout.left + 42.0, y, "start", "note"),
        Label(factor, layout.right, y, "end", "note"),
    )
