"""Air that does not cross: blocked before the range, or lying cold behind it."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import place
from orolift.report.figures.cloud import runs
from orolift.report.figures.drawing import Curve, path_data, thinned

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.report.figures.view import View

    Array = NDArray[np.float64]

THIN = 2.5
"""Drawing units; a layer thinner than this is not drawn."""


def blocked_air(view: View) -> tuple[Curve, ...]:
    """Area and hatch of the air that is stopped before the crest."""
    shape = view.crossing.features
    upwind = view.crossing.distance[view.columns] <= shape.crest_distance
    return _layer(view, view.lowest, upwind, "blocked", 0.8)


def cold_pool(view: View) -> tuple[Curve, ...]:
    """Area and hatch of the cold air that stays in the lee."""
    crossing = view.crossing
    if crossing.pool is None:
        return ()
    lee = crossing.distance[view.columns] > crossing.features.crest_distance
    top = np.full(view.x.size, float(place(view.up, crossing.pool.top)))
    return _layer(view, top, lee, "pool", 0.0)


def _layer(view: View, top: Array, where: NDArray[np.bool_], kind: str, slope: float) -> tuple[Curve, ...]:
    """The area between a line and the ground, and a hatch on it."""
    ground = view.ground_here
    out: list[Curve] = []
    for first, last in runs(where & (ground - top > THIN)):
        if last - first < 2:
            continue
        part = slice(first, last + 1)
        x, over, under = view.x[part], top[part], ground[part]
        up, down = thinned(x, over), thinned(x, under)[::-1]
        outline = path_data(np.concatenate([x[up], x[down]]), np.concatenate([over[up], under[down]]), closed=True)
        out += [Curve(outline, f"{kind} body"), Curve(hatch(x, over, under, slope, 9.0), f"{kind} hatch")]
    return tuple(out)


def hatch(x: Array, over: Array, under: Array, slope: float, apart: float) -> str:
    """Parallel strokes on the area between two lines.

    Parameters
    ----------
    x, over, under : ndarray, shape (n,)
        Drawing coordinates of the upper and the lower line.
    slope : float
        Rise of the strokes to the right; 0 for level ones.
    apart : float
        Their distance, measured downward.

    Returns
    -------
    str
        Path data.

    Examples
    --------
    >>> level = np.array([0.0, 10.0, 20.0])
    >>> hatch(level, np.zeros(3), np.full(3, 10.0), 0.0, 4.0)
    'M0 4H20M0 8H20'
    """
    fine = np.linspace(x[0], x[-1], max(int((x[-1] - x[0]) / 1.5), x.size))
    top, bottom = np.interp(fine, x, over), np.interp(fine, x, under)
    rise = slope * (fine - fine[0])
    low, high = float((top + rise).min()), float((bottom + rise).max())
    strokes = []
    for at in np.arange(np.ceil(low / apart + 1e-9) * apart, high, apart):
        y = at - rise
        for first, last in runs((y > top) & (y < bottom)):
            a, b = (np.round(fine[i], 1) for i in (first, last))
            if b - a < 2.0:
                continue
            end = f"H{b:g}" if slope == 0.0 else f"L{b:g} {y[last]:.1f}"
            strokes.append(f"M{a:g} {np.round(y[first], 1):g}{end}")
    return "".join(strokes)
