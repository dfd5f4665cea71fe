"""The cloud as a soft body, and the water that falls from it as thin strokes."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air.saturation import saturation_mixing_ratio
from orolift.report.figures.axes import place
from orolift.report.figures.contours import contour_body
from orolift.report.figures.drawing import Curve
from orolift.report.figures.streams import rows_below
from orolift.report.story import rains

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.report.figures.view import View

    Array = NDArray[np.float64]

DENSE = 3e-4
"""Cloud water [kg per kg] from which cloud is drawn denser (design choice)."""
SPACING = 9.0
"""Drawing units between strokes."""
LONGEST = 46.0
"""Drawing units of the longest stroke."""
LEAST_STROKE = 0.12
"""Strokes shorter than this share of the longest are left out."""


def runs(flags: NDArray[np.bool_]) -> list[tuple[int, int]]:
    """First and last index of every stretch of True.

    Examples
    --------
    >>> runs(np.array([False, True, True, False, True]))
    [(1, 2), (4, 4)]
    """
    edges = np.flatnonzero(np.diff(np.concatenate([[False], flags, [False]]).astype(np.int8)))
    return [(int(first), int(last) - 1) for first, last in zip(edges[::2], edges[1::2], strict=True)]


def cloud_body(view: View) -> tuple[Curve, ...]:
    """Areas that together make the cloud: all of it, and where it is dense.

    Parameters
    ----------
    view : View

    Returns
    -------
    tuple of Curve
        The edge lies where the air just becomes saturated, between two places.
    """
    rows = slice(0, rows_below(view))
    air, columns = view.crossing.air, view.columns
    p, t, vapour = (values[columns, rows] for values in (air.pressure, air.temperature, air.vapour))
    water = air.cloud[columns, rows]
    made = water + air.condensed[columns, rows]  # all of it may have fallen out at once
    wet = made > 0.0
    if not wet.any():
        return ()
    saturated = saturation_mixing_ratio(p, t, freezing=view.crossing.settings.freezing)
    excess = np.where(wet, np.maximum(made / saturated, 1e-4), np.minimum(vapour / saturated - 1.0, -1e-4))
    y = np.asarray(place(view.up, view.heights[:, rows]))
    top = view.layout.top
    found = [
        contour_body(view.x, y, excess, 0.0, top, "cloud"),
        contour_body(view.x, y, np.where(wet, water, 0.0), DENSE, top, "cloud"),
    ]
    return tuple(body for body in found if body is not None)


def falling_water(view: View) -> Curve | None:
    """Strokes down to the ground where rain or snow lands, longer where more does; None without any."""
    crossing = view.crossing
    if not rains(crossing):
        return None
    x = place(view.across, crossing.distance)
    at = np.arange(x[0] + 0.5 * SPACING, x[-1], SPACING)
    rate = np.interp(at, x, crossing.rain.rate)
    share = np.sqrt(np.maximum(rate, 0.0) / max(float(rate.max()), 1e-12))  # the root keeps light rain visible
    ground = np.interp(at, view.ground_x, view.ground_y)
    strokes = [
        f"M{a - 0.28 * LONGEST * s:.1f} {g - LONGEST * s:.1f}L{a:.1f} {g:.1f}"
        for a, g, s in zip(at.tolist(), ground.tolist(), share.tolist(), strict=True)
        if s > LEAST_STROKE
    ]
    return Curve("".join(strokes), "rain") if strokes else None
