"""The cloud as a soft body, and the water that falls from it as thin strokes."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import Scale, place
from orolift.report.figures.drawing import Curve, area, path_data, thinned

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing

LAYERS = 7
"""Layers of the soft edge of a cloud whose top is not worked out."""


def cloudy(crossing: Crossing) -> NDArray[np.bool_]:
    """Where each streamline has cloud, shape (ns, nz): water in the air, or leaving as it condenses."""
    return np.asarray((crossing.air.cloud > 0.0) | (crossing.air.removed > 0.0), dtype=np.bool_)


def runs(flags: NDArray[np.bool_]) -> list[tuple[int, int]]:
    """First and last index of every stretch of True.

    Examples
    --------
    >>> runs(np.array([False, True, True, False, True]))
    [(1, 2), (4, 4)]
    """
    edges = np.flatnonzero(np.diff(np.concatenate([[False], flags, [False]]).astype(np.int8)))
    return [(int(first), int(last) - 1) for first, last in zip(edges[::2], edges[1::2], strict=True)]


def cloud_body(
    crossing: Crossing, across: Scale, up: Scale, ground: NDArray[np.int_], depth: float
) -> tuple[Curve, ...]:
    """Areas that together make the cloud.

    Parameters
    ----------
    crossing : Crossing
    across, up : Scale
        Horizontal and vertical.
    ground : ndarray of int, shape (m,)
        Indices of the points that draw the ground.
    depth : float
        Drawn depth, in drawing units, of a cloud known on its lowest streamline only.

    Returns
    -------
    tuple of Curve
        With several streamlines, from the lowest cloudy one to the highest;
        with one, layers that fade upward, because the top is not known. These
        reach down behind the ground, which is drawn over them.
    """
    wet = cloudy(crossing)
    x = place(across, crossing.distance)
    heights = place(up, crossing.height)
    out: list[Curve] = []
    for first, last in runs(np.asarray(wet.any(axis=1))):
        if last - first < 2:
            continue
        part = slice(first, last + 1)
        if wet.shape[1] > 1:
            out.append(_between_streamlines(x[part], heights[part], wet[part]))
            continue
        index = np.unique(np.concatenate([ground, np.linspace(first, last, 32).round().astype(int)]))
        index = index[(index >= first) & (index <= last)]
        swell = np.sin(np.pi * (x[index] - x[first]) / (x[last] - x[first])).clip(0.0) ** 0.6
        full = min(depth, 0.45 * float(x[last] - x[first]))  # narrow stretches of cloud are shallow ones
        all_of_it = np.arange(index.size)
        out += [
            area(x[index], heights[index, 0] - full * swell * layer / LAYERS, up.start, "cloud layer", all_of_it)
            for layer in range(1, LAYERS + 1)
        ]
    return tuple(out)


def _between_streamlines(x: NDArray[np.float64], heights: NDArray[np.float64], wet: NDArray[np.bool_]) -> Curve:
    """The body from the lowest cloudy streamline at each place to the highest."""
    bottom = np.where(wet, heights, -np.inf).max(axis=1)
    top = np.where(wet, heights, np.inf).min(axis=1)
    over, under = thinned(x, top), thinned(x, bottom)[::-1]
    outline = path_data(np.concatenate([x[over], x[under]]), np.concatenate([top[over], bottom[under]]), closed=True)
    return Curve(outline, "cloud")


def falling_water(crossing: Crossing, across: Scale, up: Scale, depth: float, spacing: float) -> Curve | None:
    """Strokes down to the ground where water leaves the air, longer where more does; None without any."""
    loss = crossing.air.removed.sum(axis=1)
    if not loss.any():
        return None
    x = place(across, crossing.distance)
    at = np.arange(x[0] + 0.5 * spacing, x[-1], spacing)
    tallied = np.interp(np.append(at - 0.5 * spacing, at[-1] + 0.5 * spacing), x, np.cumsum(loss))
    rate = np.convolve(np.diff(tallied), (0.25, 0.5, 0.25), mode="same")  # strokes stand for stretches, not for points
    share = np.sqrt(rate / rate.max())  # the root keeps light rain visible
    ground = np.interp(at, x, place(up, crossing.height[:, 0]))
    strokes = [
        f"M{a - 0.28 * depth * s:.1f} {g - depth * s:.1f}L{a:.1f} {g:.1f}"
        for a, g, s in zip(at.tolist(), ground.tolist(), share.tolist(), strict=True)
        if s > 0.12
    ]
    return Curve("".join(strokes), "rain") if strokes else None
