"""Where a map lies on a drawing, and shapes of the map cut to its frame."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.report.figures.drawing import Curve, path_data, thinned
from orolift.report.figures.placing import Box

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.terrain.grid import ElevationGrid

    Array = NDArray[np.float64]


@dataclass(frozen=True)
class Ground:
    """Where the map lies on a drawing.

    Attributes
    ----------
    frame : Box
    west, north : float [m]
        Coordinates of its upper left corner.
    scale : float
        Drawing units a metre takes.
    """

    frame: Box
    west: float
    north: float
    scale: float

    def across(self, x: Array) -> Array:
        """Drawing coordinates of eastings."""
        return np.asarray(self.frame.left + (x - self.west) * self.scale)

    def down(self, y: Array) -> Array:
        """Drawing coordinates of northings."""
        return np.asarray(self.frame.top + (self.north - y) * self.scale)


def ground_of(grid: ElevationGrid, width: float, most_wide: float, most_high: float) -> tuple[Ground, float]:
    """Where a map lies on a drawing: as large as fits.

    Parameters
    ----------
    grid : ElevationGrid
    width : float
        Of the drawing.
    most_wide, most_high : float
        Of the map.

    Returns
    -------
    Ground
    height : float
        Of the drawing.
    """
    dx, dy = float(grid.x[1] - grid.x[0]), float(grid.y[0] - grid.y[1])
    wide, high = grid.x.size * dx, grid.y.size * dy
    scale = min(most_wide / wide, most_high / high)
    left = 0.5 * (width - scale * wide)
    frame = Box(round(left, 1), 4.0, round(left + scale * wide, 1), round(4.0 + scale * high, 1))
    west, north = float(grid.x[0]) - 0.5 * dx, float(grid.y[0]) + 0.5 * dy
    return Ground(frame, west, north, scale), round(frame.bottom + 4.0, 1)


def frame_box(ground: Ground) -> Any:
    """The frame as a polygon."""
    from shapely import box

    frame = ground.frame
    return box(frame.left, frame.top, frame.right, frame.bottom)


def on_drawing(shape: Any, ground: Ground) -> Any:
    """A geometry of the map in drawing coordinates."""
    from shapely import transform

    return transform(shape, lambda c: np.column_stack([ground.across(c[:, 0]), ground.down(c[:, 1])]))


def parts_of(shape: Any) -> list[Any]:
    """Lines or areas of a geometry, the empty ones left out."""
    from shapely import get_parts

    kinds = {"LineString", "Polygon"}
    return [part for part in get_parts(shape) if part.geom_type in kinds and not part.is_empty]


def outline(polygon: Any, kind: str) -> Curve:
    """Path of a polygon with its holes."""
    rings = []
    for ring in (polygon.exterior, *polygon.interiors):
        at = np.asarray(ring.coords)
        keep = thinned(at[:, 0], at[:, 1])
        rings.append(path_data(at[keep, 0], at[keep, 1], closed=True))
    return Curve("".join(rings), kind)
