"""The map of the sites: shaded relief, the line and its wind, the crest, a pin or a dot for every site."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import Layout
from orolift.report.figures.drawing import Curve, Figure, Label, Pin
from orolift.report.figures.map_ground import Ground, ground_of
from orolift.report.figures.map_marks import corner_marks
from orolift.report.figures.pins import ASIDE, pins
from orolift.report.figures.placing import Board, Box
from orolift.report.figures.rain_map import (
    NARROW_PAGE,
    PICTURE_POINTS,
    TURNED,
    WIDE_PAGE,
    divide_on_map,
    drawn_line,
    line_on_map,
    spots_on_map,
    wind_of,
)
from orolift.report.figures.relief import relief
from orolift.report.quantities import Units, quantity
from orolift.report.story import MOST_IN_DETAIL, first_sites
from orolift.report.words import counted, point_of_compass

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing
    from orolift.report.figures.placing import Box as Frame
    from orolift.sources.map_inputs import Mapped

DOT = {"wide": 2.6, "narrow": 1.7}
"""Radius of a dot, drawing units."""


@dataclass(frozen=True)
class Dot:
    """A site without a pin."""

    x: float
    y: float
    radius: float
    kind: str


@dataclass(frozen=True)
class SitesMapDrawing:
    """Everything the map shows, from the back to the front."""

    layout: Layout
    relief: str
    frame: Frame
    width: float
    height: float
    swath: tuple[Curve, ...]
    lines: tuple[Curve, ...]
    dots: tuple[Dot, ...]
    labels: tuple[Label, ...]
    pins: tuple[Pin, ...]


def sites_map_figure(crossing: Crossing, mapped: Mapped, units: Units) -> Figure[SitesMapDrawing] | None:
    """The map of the sites.

    Parameters
    ----------
    crossing : Crossing
    mapped : Mapped
    units : 'metric' or 'us'

    Returns
    -------
    Figure of SitesMapDrawing or None
        None where the map of rain already has every site on it.
    """
    many = len(crossing.lee) > MOST_IN_DETAIL
    if not (many or mapped.rain.is_dry) or not mapped.inputs.sites:
        return None
    turned = abs(mapped.inputs.placed.north) > TURNED
    caption = [
        "Grid north is up." if turned else "North is up.",
        "The bold line is that of the crossing, with its swath and an arrow where the air goes.",
        "Dotted: the crest of each strip along the wind.",
        "Numbered discs are the sites, with their numbers in the tables.",
    ]
    if many:
        caption[-1] = (
            "Numbered discs are the sites that the page takes one by one; dots are the others: filled in the lee, grey "
            "on the crest, open on the windward side."
        )
    return Figure(
        key="sites-map",
        drawing=_drawing(crossing, mapped, units, "wide", WIDE_PAGE),
        narrow=_drawing(crossing, mapped, units, "narrow", NARROW_PAGE),
        title="The sites on the map",
        alt=_alt(crossing, mapped, units),
        caption=" ".join(caption),
    )


def _alt(crossing: Crossing, mapped: Mapped, units: Units) -> str:
    grid = mapped.inputs.placed.grid
    size = " by ".join(quantity(abs(float(v[-1] - v[0])), "distance", 0, units) for v in (grid.x, grid.y))
    _, bearing = wind_of(mapped)
    wind = point_of_compass(bearing - mapped.inputs.placed.north + np.pi)
    of_sides = [
        f"{counted(count, 'site', 'sites')} {where}"
        for side, where in (("windward", "before the crest"), ("crest", "on the crest"), ("lee", "behind the crest"))
        if (count := sum(air.side == side for air in crossing.lee))
    ]
    where = ", ".join(of_sides)
    return f"Map of {size}; wind from the {wind}. {where[:1].upper()}{where[1:]}."


def _drawing(
    crossing: Crossing, mapped: Mapped, units: Units, name: str, page: tuple[float, float, float, float]
) -> SitesMapDrawing:
    width, most_wide, most_high, letter = page
    grid = mapped.inputs.placed.grid
    ground, height = ground_of(grid, width, most_wide, most_high)
    frame = ground.frame
    line, swath = line_on_map(mapped, ground)
    board = Board(
        Box(frame.left + 3.0, frame.top + 3.0, frame.right - 3.0, frame.bottom - 3.0),
        letter,
        points_x=line[0],
        points_y=line[1],
    )
    marks, labels, board = corner_marks(wind_of(mapped), ground, board, units, wide=name == "wide")
    placed, board = pins(spots_on_map(crossing, mapped, ground), board, ASIDE, names=name == "wide")
    return SitesMapDrawing(
        layout=Layout(name, width, height, frame.left, frame.right, frame.top, frame.bottom, letter, 0),
        relief=relief(grid, PICTURE_POINTS[name]),
        frame=frame,
        width=round(frame.right - frame.left, 1),
        height=round(frame.bottom - frame.top, 1),
        swath=swath,
        lines=(*divide_on_map(mapped, ground), *drawn_line(line), *marks),
        dots=_dots(crossing, mapped, ground, DOT[name]),
        labels=labels,
        pins=placed,
    )


def _dots(crossing: Crossing, mapped: Mapped, ground: Ground, radius: float) -> tuple[Dot, ...]:
    """The sites that have no pin."""
    pinned = {air.number for air in first_sites(crossing).lee}
    rest = [air for air in crossing.lee if air.number not in pinned and air.number <= len(mapped.inputs.sites)]
    at = np.array([mapped.inputs.sites[air.number - 1] for air in rest], dtype=np.float64).reshape(-1, 2)
    x, y = ground.across(at[:, 0]), ground.down(at[:, 1])
    frame = ground.frame
    inside = (x > frame.left) & (x < frame.right) & (y > frame.top) & (y < frame.bottom)
    return tuple(
        Dot(round(float(a), 1), round(float(b), 1), radius, air.side)
        for air, a, b, on in zip(rest, x, y, inside, strict=True)
        if on
    )
