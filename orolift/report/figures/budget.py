"""Why it is warm: for every site the parts of the warming, one after the other, and what they add up to."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.causes import PARTS
from orolift.report.figures.axes import Layout, Scale, place
from orolift.report.figures.drawing import Curve, Figure, Label
from orolift.report.figures.pins import shortened
from orolift.report.figures.placing import text_width
from orolift.report.quantities import Units, quantity

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing, LeeAir, WarmingParts

MOST_SITES = 6
"""Sites that are drawn; the table has all."""
ROW = 21.0
"""Drawing units from bar to bar."""
BAR = 13.0
"""Height of a bar."""
HEAD = 44.0
FOOT = 14.0
PANEL = HEAD + ROW * (len(PARTS) + 1) + FOOT
SMALL = 0.05
"""Parts below this [K] read as zero."""


@dataclass(frozen=True)
class Disc:
    """The number of a site."""

    number: int
    x: float
    y: float
    radius: float
    text_y: float


@dataclass(frozen=True)
class BudgetDrawing:
    """Everything the budgets show, from the back to the front."""

    layout: Layout
    lines: tuple[Curve, ...]
    bars: tuple[Curve, ...]
    labels: tuple[Label, ...]
    discs: tuple[Disc, ...]


def budget(crossing: Crossing, units: Units) -> Figure[BudgetDrawing] | None:
    """The budgets of the sites.

    Parameters
    ----------
    crossing : Crossing
    units : 'metric' or 'us'

    Returns
    -------
    Figure of BudgetDrawing or None
        None when no site has a budget.
    """
    shown = [
        (site.number, site, site.parts) for site in crossing.lee if site.parts is not None and not site.in_blocked_air
    ]
    if not shown:
        return None
    left_out = len(shown) - MOST_SITES
    caption = (
        "Read from the top: each bar starts where the one above ends; bars to the right warm, hatched bars to the left "
        "cool. The last bar is their sum: the air of the site minus the incoming air at the same height."
    )
    if left_out > 0:
        caption += f" The first {MOST_SITES} sites; the table below has all."
    return Figure(
        key="budget",
        drawing=_drawing(shown[:MOST_SITES], units, 3, "wide", 960.0, 14.0),
        narrow=_drawing(shown[:MOST_SITES], units, 1, "narrow", 344.0, 12.5),
        title="Why it is warm or cold: the parts of the warming",
        alt=" ".join(_words(site, parts, units) for _, site, parts in shown[:MOST_SITES]),
        caption=caption,
    )


def _words(site: LeeAir, parts: WarmingParts, units: Units) -> str:
    named = [
        f"{name} {quantity(getattr(parts, key), 'temperature_change', 1, units)}"
        for key, name in PARTS.items()
        if abs(getattr(parts, key)) >= SMALL
    ]
    total = quantity(site.warming, "temperature_change", 1, units)
    return f"{site.name}: {', '.join(named) or 'no part'}; together {total}."


def _reach(shown: list[tuple[int, LeeAir, WarmingParts]]) -> tuple[float, float]:
    """Lowest and highest value any bar touches."""
    low, high = 0.0, 1.0
    for _, _, parts in shown:
        running = np.cumsum([getattr(parts, key) for key in PARTS])
        low, high = min(low, float(running.min())), max(high, float(running.max()))
    return low, high


def _drawing(
    shown: list[tuple[int, LeeAir, WarmingParts]], units: Units, beside: int, name: str, width: float, letter: float
) -> BudgetDrawing:
    """All panels on one scale, so that sites can be compared."""
    beside = min(beside, max(len(shown), 1))
    gap = 28.0
    panel = min((width - gap * (beside - 1) - 8.0) / beside, 460.0)
    rows = -(-len(shown) // beside)
    low, high = _reach(shown)
    names = max(text_width(words, letter) for words in PARTS.values())
    value = text_width("+10.0 °C", letter)
    lines: list[Curve] = []
    bars: list[Curve] = []
    labels: list[Label] = []
    discs: list[Disc] = []
    for count, (number, site, parts) in enumerate(shown):
        left = 4.0 + (count % beside) * (panel + gap)
        top = (count // beside) * (PANEL + 10.0)
        scale = Scale(low, high, left + names + 14.0, left + panel - value - 8.0)
        if low < 0.0:  # room for the words of bars to the left
            scale = Scale(low, high, left + names + 14.0 + min(value, 46.0), scale.end)
        made = _panel(number, site, parts, scale, (left, top, panel), units, letter)
        lines += made[0]
        bars += made[1]
        labels += made[2]
        discs.append(made[3])
    height = rows * (PANEL + 10.0)
    layout = Layout(name, width, height, 4.0, width - 4.0, 0.0, height, letter, 0)
    return BudgetDrawing(layout, tuple(lines), tuple(bars), tuple(labels), tuple(discs))


def _panel(
    number: int,
    site: LeeAir,
    parts: WarmingParts,
    scale: Scale,
    where: tuple[float, float, float],
    units: Units,
    letter: float,
) -> tuple[list[Curve], list[Curve], list[Label], Disc]:
    """The bars of one site."""
    left, top, width = where
    radius = round(0.68 * letter, 1)
    disc = Disc(number, round(left + radius, 1), round(top + 14.0, 1), radius, round(top + 14.0 + 0.34 * letter, 1))
    title = Label(
        shortened(site.name),
        round(left + 2.0 * radius + 7.0, 1),
        round(top + 14.0 + 0.36 * letter, 1),
        "start",
        "title",
    )
    zero = place(scale, 0.0)
    before = quantity(site.upwind_temperature, "temperature", 1, units)
    after = quantity(site.temperature, "temperature", 1, units)
    bottom = top + HEAD + ROW * (len(PARTS) + 1)
    labels = [
        title,
        Label(
            f"incoming {before}, here {after}",
            round(left + 2.0 * radius + 7.0, 1),
            round(top + 14.0 + 1.55 * letter, 1),
            "start",
            "note",
        ),
    ]
    lines = [Curve(f"M{zero:.1f} {top + HEAD - 2.0:.1f}V{bottom:.1f}", "zero")]
    bars: list[Curve] = []
    running = 0.0
    for row, (key, words) in enumerate(PARTS.items()):
        part = float(getattr(parts, key))
        y = top + HEAD + ROW * row
        labels += _row_words(words, part, scale, max(running, running + part), (left, y), units, letter)
        bars += _bar(place(scale, running), place(scale, running + part), y, "cools" if part < 0.0 else "warms")
        running += part
        at = place(scale, running)
        lines.append(Curve(f"M{at:.1f} {y + BAR:.1f}v{ROW - BAR:.1f}", "step"))
    y = top + HEAD + ROW * len(PARTS)
    labels += _row_words("together", site.warming, scale, max(running, 0.0), (left, y), units, letter, kind="sum")
    bars += _bar(zero, place(scale, running), y, "sum")
    lines.append(Curve(f"M{left:.1f} {y - 4.0:.1f}H{left + width:.1f}", "rule"))
    return lines, bars, labels, disc


def _row_words(
    words: str,
    part: float,
    scale: Scale,
    end: float,
    where: tuple[float, float],
    units: Units,
    letter: float,
    kind: str = "part",
) -> list[Label]:
    """Name and value of a bar; the value stands right of it."""
    left, y = where
    base = round(y + 0.5 * BAR + 0.35 * letter, 1)
    value = quantity(part, "temperature_change", 1, units)
    at = round(place(scale, end) + 6.0, 1)
    if kind == "part" and abs(part) < SMALL:
        kind = "nothing"
    return [Label(words, round(left, 1), base, "start", kind), Label(value, at, base, "start", f"{kind} value")]


def _bar(start: float, end: float, y: float, kind: str) -> list[Curve]:
    """A bar, hatched where it cools; a tick where it is nothing."""
    low, high = sorted((round(start, 1), round(end, 1)))
    if high - low < 1.0:
        return [Curve(f"M{low} {y:.1f}v{BAR}", f"{kind} none")]
    bars = [Curve(f"M{low} {y:.1f}H{high}v{BAR}H{low}Z", kind)]
    if kind == "cools":
        strokes = []
        for at in np.arange(low + 5.0, high + BAR, 5.0):
            a, b = min(float(at), high), max(float(at) - BAR, low)
            strokes.append(f"M{a:.1f} {y + float(at) - a:.1f}L{b:.1f} {y + float(at) - b:.1f}")
        bars.append(Curve("".join(strokes), "cools hatch"))
    return bars
