"""Strips of a case along its wind, side by side over its raster, for a map of the lee."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.result import Site
from orolift.errors import TerrainError
from orolift.sources.elevation_map import read_elevation_map
from orolift.sources.line_axis import Axis, axis_of, too_near_the_edge
from orolift.sources.lines import PlacedLine, line_through, map_places, read_lines, situation_on
from orolift.spread.joined import Frame
from orolift.spread.strips import Strip
from orolift.terrain.features import features
from orolift.terrain.range_normal import RangeNormal

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from orolift.sources.elevation_map import ElevationMap
    from orolift.sources.inputs import Inputs
    from orolift.sources.site_places import SitePlace
    from orolift.spread.lee_map import LeeMap
    from orolift.spread.lee_spread import LeeSpread
    from orolift.spread.lee_thresholds import LeeThresholds

    Array = NDArray[np.float64]

STRIP_SHARE = 0.05
"""Strips lie this share of the swath apart: the mean grounds of neighbours have nineteen twentieths in common."""
MOST_STRIPS = 400
SMOOTHING_SHARE = 0.25
"""Standard deviation of the Gaussian that joins strips, as a share of the swath. The swath is the scale at which the
flow is taken to feel the ground; what choices of one strip (which summit is its crest, where its base lies) change from
one to the next is spread over about half of it to both sides. A judgement."""
NORMAL_SHARE = 0.5
"""The same for the direction across the range, found in windows of 50 km; a judgement."""
MOST_CELLS = 1024
"""Cells of the map along its longer side."""
BESIDE = 30.0e3
"""The map reaches so far beyond the ends of the case's line, as the map of rain does [m]."""
LEAST_REACH = 80.0e3


@dataclass(frozen=True, eq=False)
class StripPlan:
    """Strips, and the map they are for.

    Attributes
    ----------
    strips : tuple of Strip
    frame : Frame
    placed : ElevationMap
    """

    strips: tuple[Strip, ...]
    frame: Frame
    placed: ElevationMap


def strip_plan(inputs: Inputs) -> StripPlan:
    """Strips of a case.

    Parameters
    ----------
    inputs : Inputs
        Of a case with a raster.

    Returns
    -------
    StripPlan

    Raises
    ------
    CaseError
        Of a hand-entered ridge.
    DataFileError, TerrainError
        If the map cannot be read.

    Notes
    -----
    Strips run parallel to the case's line on the map, from and to abreast of its ends. The crest of each is the one
    that counts abreast of the first site on the case's line, as there.
    """
    line = inputs.transect
    reach = max(0.5 * float(line.distance[-1]) + BESIDE, LEAST_REACH)
    lines = read_lines(inputs, beside=reach)
    axis = axis_of(inputs, lines, STRIP_SHARE)
    longitude, latitude = np.asarray(line.longitude), np.asarray(line.latitude)
    middle = line.distance.size // 2
    placed = read_elevation_map(
        str(inputs.case.terrain.elevation_file),
        around=(float(longitude[middle]), float(latitude[middle])),
        reach=reach,
        unit=inputs.case.terrain.elevation_unit,
        folder=inputs.path.parent,
        where="[terrain] elevation_file",
        most_cells=MOST_CELLS,
    )
    across = _across(axis, placed)
    sites = inputs.sites[:1]
    abreast = None if not sites else sites[0].distance - float(line.distance[middle])
    drawn = [_drawn(axis, float(offset), placed, abreast) for offset in across]
    swath = lines.swath if lines.swath > 0.0 else axis.spacing
    frame = Frame(lines.x, lines.y, axis.turned, across, SMOOTHING_SHARE * swath)
    return StripPlan(_with_smooth_normals(drawn, across, NORMAL_SHARE * swath), frame, placed)


def _across(axis: Axis, placed: ElevationMap) -> Array:
    """Distances of the strips from the axis: the case's own line is one of them."""
    grid = placed.grid
    corners = [axis.measured(float(x), float(y))[1] for x in grid.x[[0, -1]] for y in grid.y[[0, -1]]]
    step = max(axis.width, (max(corners) - min(corners)) / MOST_STRIPS)
    return step * np.arange(math.floor(min(corners) / step), math.ceil(max(corners) / step) + 1, dtype=np.float64)


def _drawn(axis: Axis, offset: float, placed: ElevationMap, abreast: float | None) -> Strip:
    """One strip, its normal its own."""
    inside = _inside(axis, offset, placed)
    if inside is None:
        return Strip(axis.start, None, "the strip lies beside the elevation raster.")
    try:
        line, start = _line(axis, offset, inside)
        length = float(line.transect.distance[-1])
        place = None if abreast is None else abreast - start
        place = place if place is not None and 0.0 <= place <= length else None
        crest = features(line.transect, place).crest_distance
        near = too_near_the_edge(axis, start, axis.start, crest)
        if near is not None:
            return Strip(start, None, near)
        return Strip(start, situation_on(axis.lines, line, () if place is None else (Site("abreast", place),)))
    except TerrainError as error:
        return Strip(axis.start, None, str(error))


def _inside(axis: Axis, offset: float, placed: ElevationMap) -> float | None:
    """A place along the axis at which a strip has ground: the middle of what it has; None without any."""
    grid = placed.grid
    along = np.arange(axis.start, axis.end, axis.spacing)
    at = np.array([axis.placed(float(a), offset) for a in along])
    column = np.round((at[:, 0] - grid.x[0]) / (grid.x[1] - grid.x[0])).astype(np.intp)
    row = np.round((at[:, 1] - grid.y[0]) / (grid.y[1] - grid.y[0])).astype(np.intp)
    on = (column >= 0) & (column < grid.x.size) & (row >= 0) & (row < grid.y.size)
    known = np.flatnonzero(on)
    known = known[np.isfinite(grid.elevation[row[known], column[known]])]
    return None if known.size == 0 else float(along[known[known.size // 2]])


def _line(axis: Axis, offset: float, along: float) -> tuple[PlacedLine, float]:
    """The line of a strip through a place on it, and where it starts along the axis."""
    count = round((axis.end - axis.start) / axis.spacing)
    before = int(np.clip(round((along - axis.start) / axis.spacing), 1, count - 1))
    x, y = axis.placed(axis.start + before * axis.spacing, offset)
    line = line_through(
        axis.lines,
        x,
        y,
        axis.turned - axis.lines.north,
        upwind=before * axis.spacing,
        downwind=(count - before) * axis.spacing,
        points=count + 1,
    )
    return line, axis.measured(line.x, line.y)[0]


def _with_smooth_normals(strips: list[Strip], across: Array, scale: float) -> tuple[Strip, ...]:
    """Strips whose directions across the range change smoothly from one to the next."""
    found = np.array([_vector(strip) for strip in strips])
    weight = np.exp(-0.5 * ((across[:, np.newaxis] - across) / scale) ** 2)
    weight = weight * np.isfinite(found[:, 0])
    smooth = weight @ np.nan_to_num(found)
    total = np.maximum(weight.sum(axis=1), 1e-12)
    out = []
    for strip, (east, north), share in zip(strips, smooth, total, strict=True):
        if strip.situation is None or strip.situation.normal is None:
            out.append(strip)
            continue
        normal = RangeNormal(math.atan2(east, north) % (2.0 * math.pi), math.hypot(east, north) / share)
        out.append(replace(strip, situation=replace(strip.situation, normal=normal)))
    return tuple(out)


def _vector(strip: Strip) -> tuple[float, float]:
    """Direction across the range as a vector, as long as it is coherent."""
    if strip.situation is None or strip.situation.normal is None:
        return math.nan, math.nan
    normal = strip.situation.normal
    return normal.coherence * math.sin(normal.bearing), normal.coherence * math.cos(normal.bearing)


@dataclass(frozen=True, eq=False)
class MappedLee:
    """The lee as a map, with what it was made from.

    Attributes
    ----------
    plan : StripPlan
    map : LeeMap
    sites : tuple of (float, float) [m]
        Places of the sites of the case on it.
    thresholds : LeeThresholds or None
        The rules of the case on it; None without a rules_file.
    spread : LeeSpread or None
        How sure it is; None where the case has no members.
    """

    plan: StripPlan
    map: LeeMap
    sites: tuple[tuple[float, float], ...]
    thresholds: LeeThresholds | None = None
    spread: LeeSpread | None = None


def sites_on(placed: ElevationMap, places: Sequence[SitePlace]) -> tuple[tuple[float, float], ...]:
    """Places of sites on a map [m]."""
    if not places:
        return ()
    x, y = map_places(placed, [place.longitude or 0.0 for place in places], [place.latitude or 0.0 for place in places])
    return tuple((float(a), float(b)) for a, b in zip(x, y, strict=True))
