"""The air of the section: streamlines by what they carry, potential temperature, freezing level, breaking waves."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.air.temperature import potential_temperature
from orolift.constants import MELTING_POINT
from orolift.report.figures.axes import place, round_step
from orolift.report.figures.contours import contour_lines, inside
from orolift.report.figures.drawing import Curve, Label, head_along, path_data, polyline, thinned

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing
    from orolift.report.figures.view import View

    Array = NDArray[np.float64]
    Line = tuple[Array, Array]

LINES, FEW_LINES = 11, 8
"""Streamlines drawn, evenly spaced upwind, on a page and on a narrow screen."""
CHANGES = (-1.0, 1.0, 3.0)
"""Air minus incoming air at the same height [K] at which a line changes its look (design choice)."""
LOOKS = ("air cooler", "air", "air warmer", "air warmest")
SHORTEST_RUN = 4
"""Places; shorter stretches keep the look of the one before."""
CURLS = 34.0
"""Drawing units between the curls of breaking waves."""
ISENTROPES = 5
"""About how many lines of equal potential temperature are drawn."""


def rows_below(view: View) -> int:
    """Number of streamlines that enter the frame, and one more."""
    enter = np.flatnonzero(view.heights.min(axis=0) <= view.up.high)
    return int(min(enter[-1] + 2, view.heights.shape[1]))


def starts(crossing: Crossing, top: float, count: int) -> Array:
    """Heights [m] at which some streamlines start: evenly from the lowest to the top of the frame."""
    bottom = float(crossing.start_height[0])
    top = min(top, float(crossing.start_height[-1]))
    return np.asarray(bottom + (np.arange(count) + 1.0) * (top - bottom) / (count + 0.5), dtype=np.float64)


def streamlines(view: View) -> tuple[Curve, ...]:
    """Streamlines, each in stretches that look like the air in them."""
    crossing, columns = view.crossing, view.columns
    chosen = starts(crossing, view.up.high, LINES if view.layout.name == "wide" else FEW_LINES)
    number = np.interp(chosen, crossing.start_height, np.arange(crossing.start_height.size))
    height, temperature = (
        at_numbers(values[columns], number) for values in (crossing.height, crossing.air.temperature)
    )
    limited: Array = np.clip(height, crossing.incoming.height[0], crossing.incoming.height[-1])
    before = interpolated(crossing.incoming, limited.ravel()).temperature.reshape(height.shape)
    change = temperature - before
    out: list[Curve] = []
    for row in range(height.shape[1]):
        y = np.asarray(place(view.up, height[:, row]))
        out += [
            Curve(path_data(x[keep], down[keep]), kind)
            for part, kind in _stretches(change[:, row])
            for x, down in inside((view.x[part], y[part]), view.layout.top)
            for keep in (thinned(x, down),)
        ]
    if crossing.flow.blocked_top > crossing.features.base + 1.0 or crossing.pool is not None:
        out.append(polyline(view.x, view.lowest, "air"))
    return tuple(out)


def at_numbers(values: Array, number: Array) -> Array:
    """Values (n, nz) at streamline numbers, (n, m)."""
    below = np.clip(number.astype(np.intp), 0, values.shape[1] - 2)
    share = number - below
    return np.asarray((1.0 - share) * values[:, below] + share * values[:, below + 1])


def _stretches(change: Array) -> list[tuple[slice, str]]:
    """Stretches of one look, each reaching to the first point of the next."""
    look = np.searchsorted(CHANGES, change)
    edges = [0, *(np.flatnonzero(np.diff(look)) + 1).tolist(), look.size]
    runs: list[tuple[int, int, int]] = []
    for first, last in pairwise(edges):
        if runs and (last - first < SHORTEST_RUN or look[first] == runs[-1][2]):
            runs[-1] = (runs[-1][0], last, runs[-1][2])
        else:
            runs.append((first, last, int(look[first])))
    return [(slice(first, min(last + 1, look.size)), LOOKS[number]) for first, last, number in runs]


def followed(view: View) -> tuple[tuple[Curve, ...], Line]:
    """The air that reaches the site: a bold line with its casing and arrow heads, and its points."""
    line = place(view.across, view.trace.distance), place(view.up, view.trace.height)
    x, y = np.asarray(line[0]), np.asarray(line[1])
    heads = [head_along(x, y, share, 12.0, "head air") for share in (0.3, 0.62, 0.97)]
    curves = (polyline(x, y, "air casing"), polyline(x, y, "air followed"))
    return (*curves, *(head for head in heads if head is not None)), (x, y)


def isentropes(view: View) -> tuple[tuple[Curve, ...], tuple[tuple[Line, float], ...]]:
    """Lines of equal potential temperature, and each with its value; none where there is little room."""
    if view.layout.name == "narrow":
        return (), ()
    rows = slice(0, rows_below(view))
    air = view.crossing.air
    theta = potential_temperature(air.pressure[view.columns, rows], air.temperature[view.columns, rows])
    y = np.asarray(place(view.up, view.heights[:, rows]))
    seen = theta[y >= view.layout.top]
    if seen.size == 0:
        return (), ()
    low, high = float(seen.min()), float(seen.max())
    step = max(round_step(max(high - low, 1.0), ISENTROPES), 1.0)
    levels = np.arange(np.ceil(low / step) * step, high, step)
    found = [
        (part, float(level))
        for level in levels
        for line in contour_lines(view.x, y, theta, float(level))
        for part in inside(line, view.layout.top)
    ]
    return tuple(Curve(path_data(*line), "isentrope") for line, _ in found), tuple(found)


def freezing(view: View) -> tuple[Line, ...]:
    """Where the crossing air is at the melting point."""
    rows = slice(0, rows_below(view))
    t = view.crossing.air.temperature[view.columns, rows]
    y = np.asarray(place(view.up, view.heights[:, rows]))
    found = contour_lines(view.x, y, t, MELTING_POINT)
    return tuple(part for line in found for part in inside(line, view.layout.top))


def breaking(view: View) -> tuple[Curve | None, tuple[tuple[float, float], ...]]:
    """Curls where waves break, and their places; nothing where none do in the frame."""
    if not view.crossing.flow.wave_breaking:
        return None, ()
    broken = view.crossing.breaking[view.columns]
    y = np.asarray(place(view.up, view.heights))
    wide, deep = np.nonzero(broken & (y >= view.layout.top + 8.0))
    seen: dict[tuple[int, int], tuple[float, float]] = {}
    for i, k in zip(wide.tolist(), deep.tolist(), strict=True):
        at = float(view.x[i]), float(y[i, k])
        seen.setdefault((int(at[0] // CURLS), int(at[1] // (0.75 * CURLS))), at)
    curls = [f"M{a - 6:.1f} {b:.1f}q3 -7 6 0t6 0" for a, b in seen.values()]
    return (Curve("".join(curls), "breaking") if curls else None), tuple(seen.values())


def label_beside(line: Line, text: str, kind: str, share: float, rise: float) -> Label:
    """A label over a line at a share of its width."""
    x, y = line
    at = float(x[0] + share * (x[-1] - x[0]))
    return Label(text, round(at, 1), round(float(np.interp(at, x, y)) - rise, 1), "middle", kind)
