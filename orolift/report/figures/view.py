"""What the parts of the section share: the crossing in drawing coordinates."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import Layout, Scale, distance_scale, place
from orolift.report.figures.drawing import thinned
from orolift.report.quantities import Units, from_displayed

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing
    from orolift.report.trace import Trace

    Array = NDArray[np.float64]

SPACING = 3.0
"""Drawing units between the places that are drawn."""
ABOVE = 1.0
"""Height of the picture above the highest ground, as a share of the height of that ground over its foot."""
LEAST_ABOVE = 1500.0
"""The picture reaches at least so far above the highest ground [m]."""


@dataclass(frozen=True, eq=False)
class View:
    """A crossing on a drawing, y downward.

    Attributes
    ----------
    crossing : Crossing
    trace : Trace
    units : 'metric' or 'us'
    layout : Layout
    across, up : Scale
    columns : ndarray of int, shape (n,)
        Places that are drawn.
    x : ndarray, shape (n,)
        Of them.
    heights : ndarray, shape (n, nz) [m above sea level]
        Of the streamlines there.
    ground_x, ground_y : ndarray
        The silhouette.
    blocked : (float, float) [m above sea level]
        Range of the top of the blocked air.
    """

    crossing: Crossing
    trace: Trace
    units: Units
    layout: Layout
    across: Scale
    up: Scale
    columns: NDArray[np.intp]
    x: Array
    heights: Array
    ground_x: Array
    ground_y: Array
    blocked: tuple[float, float]

    @property
    def lowest(self) -> Array:
        """The lowest streamline, shape (n,), drawing coordinates."""
        return np.asarray(place(self.up, self.heights[:, 0]))

    @property
    def ground_here(self) -> Array:
        """The silhouette under the places, shape (n,), drawing coordinates."""
        return np.asarray(np.interp(self.x, self.ground_x, self.ground_y))


def view(
    crossing: Crossing, trace: Trace, units: Units, layout: Layout, blocked: tuple[float, float] | None = None
) -> View:
    """A crossing on a drawing.

    Parameters
    ----------
    crossing : Crossing
    trace : Trace
    units : 'metric' or 'us'
    layout : Layout
    blocked : (float, float), optional [m above sea level]
        Range of the top of the blocked air; that of the thresholds when left out.

    Returns
    -------
    View
    """
    across = distance_scale(crossing.transect.distance, layout)
    up = Scale(*frame_heights(crossing, units), layout.bottom, layout.top)
    stride = max(1, int(SPACING * crossing.distance.size / (layout.right - layout.left)))
    crest = int(np.argmin(np.abs(crossing.distance - crossing.features.crest_distance)))
    columns = np.union1d(np.arange(0, crossing.distance.size, stride), [crest, crossing.distance.size - 1])
    ground_x = place(across, crossing.transect.distance)
    ground_y = place(up, crossing.transect.elevation)
    outline = thinned(ground_x, ground_y)
    return View(
        crossing=crossing,
        trace=trace,
        units=units,
        layout=layout,
        across=across,
        up=up,
        columns=columns,
        x=np.asarray(place(across, crossing.distance[columns])),
        heights=crossing.height[columns],
        ground_x=ground_x[outline],
        ground_y=ground_y[outline],
        blocked=blocked or (crossing.flow.blocked_top_low, crossing.flow.blocked_top_high),
    )


def frame_heights(crossing: Crossing, units: Units) -> tuple[float, float]:
    """Lowest and highest height [m] drawn: from sea level, unless all of the ground is far above it, to well above it.

    Parameters
    ----------
    crossing : Crossing
    units : 'metric' or 'us'
        In which the lowest is round.

    Returns
    -------
    (float, float)
    """
    ground = crossing.transect.elevation
    lowest, highest = float(ground.min()), float(ground.max())
    low = min(0.0, lowest)
    if lowest > 0.4 * highest:
        step = from_displayed(500.0 if units == "metric" else 2000.0, "height", units)
        low = step * np.floor(0.95 * lowest / step)
    return float(low), float(highest + max(ABOVE * (highest - low), LEAST_ABOVE))
