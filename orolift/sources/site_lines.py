"""Lines of the sites that do not lie on the line of their case, as few as do justice to all."""

from __future__ import annotations

import math
from collections import defaultdict
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.result import Site
from orolift.errors import TerrainError
from orolift.sources.line_axis import Axis, axis_of, too_near_the_edge
from orolift.sources.lines import PlacedLine, line_through, map_places, read_lines, situation_on
from orolift.spread.sites import PlacedSite, SiteGroup
from orolift.terrain.features import features

if TYPE_CHECKING:
    from collections.abc import Iterator

    from orolift.sources.inputs import Inputs

LINE_SHARE = 0.2
"""Parallel lines of sites lie this share of the swath apart, so that none is farther from its sites than a tenth of
it; on the demo terrain that moves their temperature by 0.08 K (standard deviation) and at most 0.3 K."""
LEAST_BESIDE = 0.25
"""A site's line reaches so far upwind and downwind of it, as a share of what the case's reaches from its own place;
a judgement."""


@dataclass(frozen=True)
class _Key:
    """A line among the parallel ones: its number across the wind, and how many lengths it is drawn out."""

    strip: int
    upwind: int
    downwind: int


def site_groups(inputs: Inputs) -> Iterator[SiteGroup]:
    """The lines of the sites beside a case's own line.

    Parameters
    ----------
    inputs : Inputs

    Yields
    ------
    SiteGroup
        One for each line and crest.

    Raises
    ------
    DataFileError, TerrainError
        If the map cannot be read.

    Notes
    -----
    All lines run parallel to the case's own, on the map. They lie a fifth of the swath apart (at least a step of the
    sampling), so that none is farther from a site than a tenth. They start and end abreast of the case's line, and are
    drawn out by its whole length upwind or downwind of its place where a site lies nearer to the end than a quarter of
    that. A site's line does not depend on the other sites. Sites of one line with one crest share a crossing.
    """
    beside = [(number, place) for number, place in enumerate(inputs.places, start=1) if not place.on_line]
    if not beside:
        return
    far = max(math.hypot(place.offset or 0.0, place.along) for _, place in beside)
    lines = read_lines(inputs, beside=far + float(inputs.transect.distance[-1]))
    axis = axis_of(inputs, lines, LINE_SHARE)
    x, y = map_places(
        lines.placed, [place.longitude or 0.0 for _, place in beside], [place.latitude or 0.0 for _, place in beside]
    )
    keyed: dict[_Key, list[tuple[PlacedSite, Site]]] = defaultdict(list)
    for (number, place), east, north in zip(beside, x, y, strict=True):
        along, across = axis.measured(float(east), float(north))
        placed = PlacedSite(number, place.name, place.along, place.offset or 0.0)
        keyed[_key(axis, along, across)].append((placed, Site(place.name, along, place.height)))
    for key, sites in keyed.items():
        for group in _groups(axis, key, sites):
            yield replace(group, fire=inputs.fire)


def _key(axis: Axis, along: float, across: float) -> _Key:
    upwind, downwind = axis.lines.upwind, axis.lines.downwind
    return _Key(
        round(across / axis.width),
        max(0, math.ceil((axis.start - along) / upwind + LEAST_BESIDE)),
        max(0, math.ceil((along - axis.end) / downwind + LEAST_BESIDE)),
    )


def _groups(axis: Axis, key: _Key, sites: list[tuple[PlacedSite, Site]]) -> Iterator[SiteGroup]:
    """Groups of the sites of one line, by crest."""
    try:
        line, start = _line(axis, key, sites[0][1].distance)
    except TerrainError as error:
        yield SiteGroup(tuple(placed for placed, _ in sites), None, str(error))
        return
    length = float(line.transect.distance[-1])
    by_crest: dict[float | str, list[tuple[PlacedSite, Site]]] = defaultdict(list)
    for placed, site in sites:
        distance = site.distance - start
        by_crest[_crest(axis, key, line, start, distance, length)].append(
            (placed, Site(site.name, distance, site.elevation))
        )
    for crest, members in by_crest.items():
        named = tuple(placed for placed, _ in members)
        if isinstance(crest, str):
            yield SiteGroup(named, None, crest)
        else:
            yield SiteGroup(named, situation_on(axis.lines, line, tuple(site for _, site in members)))


def _line(axis: Axis, key: _Key, along: float) -> tuple[PlacedLine, float]:
    """The line of a key, and where it starts along the axis; sampled at the same points whichever site asks."""
    start = axis.start - key.upwind * axis.lines.upwind
    end = axis.end + key.downwind * axis.lines.downwind
    count = round((end - start) / axis.spacing)
    before = int(np.clip(round((along - start) / axis.spacing), 1, count - 1))
    x, y = axis.placed(start + before * axis.spacing, key.strip * axis.width)
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


def _crest(axis: Axis, key: _Key, line: PlacedLine, start: float, distance: float, length: float) -> float | str:
    """Distance of the crest that counts for a site, or why there is none."""
    if not 0.0 <= distance <= length:
        return "the elevation raster ends, or has a gap, between its line and the site. Use a raster that has both."
    try:
        crest = features(line.transect, distance).crest_distance
    except TerrainError as error:
        return str(error)
    return too_near_the_edge(axis, start, axis.start - key.upwind * axis.lines.upwind, crest) or crest
