"""The wind along the ground, under the section and on its axis."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.wind import NEAR_GROUND
from orolift.report.figures.axes import Layout, Scale, Tick, level_ticks, place
from orolift.report.figures.cloud import runs
from orolift.report.figures.drawing import Curve, Label, Pin, path_data, polyline, thinned
from orolift.report.figures.placing import Board, Box, put
from orolift.report.local_units import local
from orolift.report.quantities import from_displayed
from orolift.report.story import main_site

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import LeeAir
    from orolift.report.figures.view import View

    Array = NDArray[np.float64]

OFF_GROUND = 30.0
"""Height [m] of the lowest streamline over the ground from which on the wind is that over other air (design choice)."""


@dataclass(frozen=True)
class Gauge(Pin):
    """The wind at 10 m at a site: a pin on it, and a bar for the gusts.

    Attributes
    ----------
    path : str
        The gusts.
    """

    path: str = ""


@dataclass(frozen=True)
class WindPanel:
    """Everything the panel shows, from the back to the front."""

    layout: Layout
    ticks: tuple[Tick, ...]
    band: Curve | None
    lines: tuple[Curve, ...]
    gauges: tuple[Gauge, ...]
    labels: tuple[Label, ...]

    @property
    def curves(self) -> tuple[Curve, ...]:
        """Its area and lines, from the back."""
        return (*(() if self.band is None else (self.band,)), *self.lines)


def wind_panel(view: View, layout: Layout) -> WindPanel:
    """The wind along the ground.

    Parameters
    ----------
    view : View
    layout : Layout
        Of the panel.

    Returns
    -------
    WindPanel

    Notes
    -----
    The range of the methods holds where the lee wind is strongest; elsewhere it is drawn in proportion, as at the
    sites.
    """
    crossing = view.crossing
    wind = near_ground(crossing.height[view.columns], crossing.wind[view.columns])
    lee = crossing.distance[view.columns] >= crossing.features.crest_distance
    strongest = max(crossing.winds.strongest, 0.1)
    low = np.where(lee, np.minimum(wind * crossing.winds.low / strongest, wind), wind)
    high = np.where(lee, np.maximum(wind * crossing.winds.high / strongest, wind), wind)
    gusts = [site.wind.gust_high for site in crossing.lee if site.wind is not None]
    step = from_displayed(10.0 if view.units == "metric" else 20.0, "wind", view.units)
    top = step * np.ceil(max([float(high.max()), *gusts]) * 1.02 / step)
    up = Scale(0.0, float(top), layout.bottom, layout.top)
    band = _band(view.x[lee], *(np.asarray(place(up, side[lee])) for side in (low, high)))
    y = np.asarray(place(up, wind))
    gauges = tuple(_gauge(view, up, site, layout) for site in crossing.lee if site.wind)
    return WindPanel(
        layout=layout,
        ticks=level_ticks(up, view.units, 3, layout.letter, "wind"),
        band=band,
        lines=_lines(view, y),
        gauges=gauges,
        labels=_names(view, layout, y, np.asarray(place(up, high)), gauges),
    )


def near_ground(height: Array, wind: Array) -> Array:
    """Wind averaged over the lowest 300 m above the lowest streamline, shape (n,), by the depth of the layers."""
    depth = np.diff(np.minimum(height - height[:, :1], NEAR_GROUND), axis=1)
    mean = 0.5 * (wind[:, 1:] + wind[:, :-1])
    return np.asarray((depth * mean).sum(axis=1) / np.maximum(depth.sum(axis=1), 1.0))


def _band(x: Array, low: Array, high: Array) -> Curve | None:
    """The range of the methods; None where they agree to a drawing unit."""
    if x.size < 2 or np.max(low - high) < 1.0:
        return None
    over, under = thinned(x, high), thinned(x, low)[::-1]
    return Curve(
        path_data(np.concatenate([x[over], x[under]]), np.concatenate([high[over], low[under]]), closed=True), "band"
    )


def _lines(view: View, y: Array) -> tuple[Curve, ...]:
    """The wind, dashed where it blows over air that stays."""
    over = view.heights[:, 0] - np.interp(
        view.crossing.distance[view.columns], view.crossing.transect.distance, view.crossing.transect.elevation
    )
    away = over > OFF_GROUND
    out = []
    for flag, kind in ((~away, "speed"), (away, "speed aloft")):
        for first, last in runs(flag):
            part = slice(first, min(last + 2, y.size))
            if view.x[part].size > 1:
                out.append(polyline(view.x[part], y[part], kind))
    return tuple(out)


def _gauge(view: View, up: Scale, site: LeeAir, layout: Layout) -> Gauge:
    if site.wind is None:
        raise ValueError("a gauge needs a wind")
    x = round(place(view.across, site.distance), 1)
    low, high, mean = (round(place(up, w), 1) for w in (site.wind.gust_low, site.wind.gust_high, site.wind.at_10m))
    radius = round(0.6 * layout.letter, 1)
    disc = round(max(high - radius - 3.0, layout.top - radius), 1)
    return Gauge(
        number=site.number,
        stem="",
        x=x,
        y=disc,
        radius=radius,
        text_y=round(disc + 0.3 * layout.letter, 1),
        point_x=x,
        point_y=mean,
        labels=(),
        path=f"M{x:.1f} {low:.1f}V{high:.1f}M{x - 4:.1f} {low:.1f}H{x + 4:.1f}M{x - 4:.1f} {high:.1f}H{x + 4:.1f}",
    )


def _names(view: View, layout: Layout, y: Array, high: Array, gauges: tuple[Gauge, ...]) -> tuple[Label, ...]:
    """What line, band and gauges stand for, where there is room."""
    letter = layout.letter
    fine = np.linspace(view.x[0], view.x[-1], 400)
    board = Board(
        Box(layout.left, layout.top - 8.0, layout.right + 2.0, layout.bottom),
        letter,
        points_x=np.concatenate([fine, fine]),
        points_y=np.concatenate([np.interp(fine, view.x, y), np.interp(fine, view.x, high)]),
        taken=tuple(
            Box(g.x - g.radius - 3.0, g.y - g.radius - 2.0, g.x + g.radius + 3.0, g.point_y + 4.0) for g in gauges
        ),
    )
    site = main_site(view.crossing)
    wanted = [(local("wind in the lowest 300 m", view.units), "name soft", 0.02, "start")]
    if view.units == "us":
        wanted = [("wind in the lowest 1000 ft", "name soft", 0.02, "start")]
    if np.max(y - high) > 3.0:
        wanted.append(("range of methods", "name soft", 0.99, "end"))
    if gauges and site.wind is not None:
        wanted.append((local("10 m wind and gusts", view.units), "name ink", 0.99, "end"))
    out: list[Label] = []
    for text, kind, share, anchor in wanted:
        shares = (share, 0.02, 0.2, 0.35, 0.99, 0.8, 0.66, 0.5)
        new, board = put(
            board,
            [
                (
                    Label(
                        text,
                        round(layout.left + s * (layout.right - layout.left), 1),
                        round(layout.top + drop * letter, 1),
                        "end" if s > 0.6 else "start" if (s < 0.6 and anchor == "start") or s < 0.3 else "middle",
                        kind,
                    ),
                )
                for drop in (0.6, 1.8, 3.0, 4.2, 5.4, 6.6)
                for s in shares
            ],
        )
        out += new
    return tuple(out)
