"""Lines side by side over a map, measured along and across the line of their case."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.sources.raster import LEAST_UPWIND
from orolift.terrain.features import features

if TYPE_CHECKING:
    from orolift.sources.inputs import Inputs
    from orolift.sources.lines import Lines
    from orolift.sources.site_places import SitePlace

POINTS = 384
"""Points of a line as long as the case's: on the demo terrain 512 give the same to 0.02 K."""


@dataclass(frozen=True, eq=False)
class Axis:
    """Places measured along and across the case's own line, on the map.

    Attributes
    ----------
    lines : Lines
    turned : float [rad]
        Bearing of the line on the map.
    start, end : float [m]
        Ends of the case's line, as asked for, along it from the middle of what the raster has of it.
    width : float [m]
        Between parallel lines: none is farther from its sites than half of it.
    spacing : float [m]
        Of points along lines.
    """

    lines: Lines
    turned: float
    start: float
    end: float
    width: float
    spacing: float

    def measured(self, x: float, y: float) -> tuple[float, float]:
        """Distance along and across of a place on the map."""
        east, north = x - self.lines.x, y - self.lines.y
        s, c = math.sin(self.turned), math.cos(self.turned)
        return east * s + north * c, east * c - north * s

    def placed(self, along: float, across: float) -> tuple[float, float]:
        """Place on the map."""
        s, c = math.sin(self.turned), math.cos(self.turned)
        return self.lines.x + along * s + across * c, self.lines.y + along * c - across * s


def axis_of(inputs: Inputs, lines: Lines, share: float) -> Axis:
    """The axis of a case, its lines a share of the swath apart, at least a step of the sampling.

    Parameters
    ----------
    inputs : Inputs
    lines : Lines
    share : float [1]

    Returns
    -------
    Axis
    """
    line = inputs.transect
    centre = _centre(inputs) - float(line.distance[line.distance.size // 2])
    spacing = (lines.upwind + lines.downwind) / (POINTS - 1)
    return Axis(
        lines,
        float(line.bearing or 0.0) + lines.north,
        centre - lines.upwind,
        centre + lines.downwind,
        max(share * lines.swath, spacing),
        spacing,
    )


def _centre(inputs: Inputs) -> float:
    """Distance along the case's line of the place it passes through; of its crest where that is the highest cell."""
    table = inputs.case.transect
    if table is not None and table.through is not None:
        from orolift.sources.raster import site_positions
        from orolift.sources.site_places import map_point

        found = site_positions(
            str(inputs.case.terrain.elevation_file),
            inputs.transect,
            [map_point(table.through)],
            unit=inputs.case.terrain.elevation_unit,
            folder=inputs.path.parent,
        )
        return float(found.distance[0])
    first: SitePlace | None = inputs.places[0] if inputs.places else None
    return features(inputs.transect).crest_distance if first is None else first.along


def too_near_the_edge(axis: Axis, start: float, wanted: float, crest: float) -> str | None:
    """Why a line that the raster cuts short upwind is none; None where enough is left.

    Parameters
    ----------
    axis : Axis
    start, wanted : float [m]
        Where the line begins, and where it was to begin, along the axis.
    crest : float [m]
        Distance of its crest from its start.

    Returns
    -------
    str or None
    """
    if start <= wanted + axis.spacing or crest >= LEAST_UPWIND:
        return None
    return (
        f"the elevation raster ends {crest / 1000.0:.1f} km upwind of the crest of its line, and at least "
        f"{LEAST_UPWIND / 1000.0:.0f} km are needed to see the foot of the range. Use a raster that reaches "
        "further upwind."
    )
