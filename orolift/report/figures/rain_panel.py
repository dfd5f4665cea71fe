"""Rain and snow along the ground, under the section and on its axis; the shares are told where rain has its section."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import Layout, Scale, Tick, level_ticks, place, round_step
from orolift.report.figures.drawing import Anchor, Curve, Label, area, thinned
from orolift.report.figures.placing import Board, Box, put
from orolift.report.quantities import displayed, from_displayed, quantity
from orolift.report.story import rains, snow_words

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.report.figures.view import View

    Array = NDArray[np.float64]


@dataclass(frozen=True)
class RainPanel:
    """Everything the panel shows, from the back to the front."""

    layout: Layout
    ticks: tuple[Tick, ...]
    rain: Curve
    snow: Curve | None
    labels: tuple[Label, ...]

    @property
    def curves(self) -> tuple[Curve, ...]:
        """Its areas and lines, from the back."""
        return (self.rain, *(() if self.snow is None else (self.snow,)))


def rain_panel(view: View, layout: Layout) -> RainPanel | None:
    """Rain and snow along the ground.

    Parameters
    ----------
    view : View
    layout : Layout
        Of the panel.

    Returns
    -------
    RainPanel or None
        None without rain.
    """
    crossing, rain = view.crossing, view.crossing.rain
    if not rains(crossing) or rain.peak_rate <= 0.0:
        return None
    most = displayed(rain.peak_rate, "rain_rate", view.units)
    step = round_step(most, 3)
    up = Scale(
        0.0, from_displayed(step * np.ceil(1.15 * most / step), "rain_rate", view.units), layout.bottom, layout.top
    )
    x = np.asarray(place(view.across, crossing.distance))
    rate = np.asarray(place(up, rain.rate + rain.background))
    snow = np.asarray(place(up, rain.snow_rate))
    return RainPanel(
        layout=layout,
        ticks=level_ticks(up, view.units, 2, layout.letter, "rain_rate"),
        rain=area(x, rate, layout.bottom, "landed rain-fill", thinned(x, rate)),
        snow=area(x, snow, layout.bottom, "landed snow-fill", thinned(x, snow)) if rain.snow_rate.any() else None,
        labels=_names(view, layout, x, rate),
    )


def _names(view: View, layout: Layout, x: Array, rate: Array) -> tuple[Label, ...]:
    """What falls, and the peak."""
    rain, units, letter = view.crossing.rain, view.units, layout.letter
    fine = np.linspace(x[0], x[-1], 400)
    board = Board(
        Box(layout.left, layout.top - 8.0, layout.right + 2.0, layout.bottom),
        letter,
        points_x=fine,
        points_y=np.interp(fine, x, rate),
    )
    top = layout.top + 0.7 * letter
    drops = (0.0, 1.3, 2.6, 3.9)

    def down(text: str, x: float, anchor: Anchor, kind: str) -> list[tuple[Label, ...]]:
        return [(Label(text, round(x, 1), round(top + drop * letter, 1), anchor, kind),) for drop in drops]

    groups = [down(f"{snow_words(view.crossing)} at the ground", layout.left + 4.0, "start", "name soft")]
    if rain.peak_distance is not None:
        words = f"peak {quantity(rain.peak_rate, 'rain_rate', 1, units)}"
        at = place(view.across, rain.peak_distance)
        ends: tuple[tuple[float, Anchor], ...] = tuple(
            spot for away in (10.0, 40.0, 80.0, 130.0) for spot in ((-away, "end"), (away, "start"))
        )
        groups.append([spot for shift, anchor in ends for spot in down(words, at + shift, anchor, "name dew")])
    out: tuple[Label, ...] = ()
    for group in groups:
        labels, board = put(board, group)
        out += labels
    return out
