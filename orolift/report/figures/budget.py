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
from orolift.report.quantities import Amount, Units, quantity
from orolift.report.spans import Ends, Spans, ranged
from orolift.report.words import plain

if TYPE_CHECKING:
    from orolift.crossing.result import LeeAir, WarmingParts

MOST_SITES = 6
"""Sites that are drawn; the table has all."""
ROW = 21.0
"""Drawing units from bar to bar."""
BAR = 13.0
"""Height of a bar."""
HEAD = 44.0
FOOT = 14.0
PANEL = HEAD + ROW * (len(PARTS) + 1) + FOOT
CAP = 3.0
"""Half the height of the ends of a range."""
SUM = "total"
"""Key of the sum of the parts."""
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
class _Shown:
    """A site that is drawn: its parts, the sum last, each with its range."""

    number: int
    site: LeeAir
    parts: WarmingParts
    ends: dict[str, Ends | None]

    def reach(self, key: str, start: float, end: float) -> Ends:
        """Lowest and highest value that the bar of a part and its range touch."""
        ends = self.ends[key]
        low, high = min(start, end), max(start, end)
        return (low, high) if ends is None else (min(low, start + ends[0]), max(high, start + ends[1]))


@dataclass(frozen=True)
class BudgetDrawing:
    """Everything the budgets show, from the back to the front."""

    layout: Layout
    lines: tuple[Curve, ...]
    bars: tuple[Curve, ...]
    whiskers: tuple[Curve, ...]
    labels: tuple[Label, ...]
    discs: tuple[Disc, ...]


def budget(spans: Spans, units: Units) -> Figure[BudgetDrawing] | None:
    """The budgets of the sites.

    Parameters
    ----------
    spans : Spans
    units : 'metric' or 'us'

    Returns
    -------
    Figure of BudgetDrawing or None
        None when no site has a budget.
    """
    shown = [
        _Shown(site.number, site, site.parts, _ends(site, spans))
        for site in spans.crossing.lee
        if site.parts is not None and not site.in_blocked_air
    ]
    if not shown:
        return None
    left_out = len(shown) - MOST_SITES
    caption = (
        "Read from the top: each bar starts where the one above ends; bars to the right warm, hatched bars to the left "
        "cool. The last bar is their sum: the air of the site minus the incoming air at the same height."
    )
    if any(found is not None for one in shown for found in one.ends.values()):
        caption += (
            " Thin lines: the range of each, eight times in ten; those of the parts by the inputs alone, that of the "
            "sum with the error of the method."
        )
    if left_out > 0:
        caption += f" The first {MOST_SITES} sites; the table below has all."
    return Figure(
        key="budget",
        drawing=_drawing(shown[:MOST_SITES], units, 3, "wide", 960.0, 14.0),
        narrow=_drawing(shown[:MOST_SITES], units, 1, "narrow", 344.0, 12.5),
        title="Why it is warm or cold: the parts of the warming",
        alt=" ".join(_words(one, units) for one in shown[:MOST_SITES]),
        caption=caption,
    )


def _ends(site: LeeAir, spans: Spans) -> dict[str, Ends | None]:
    """Ranges of the parts, and of their sum."""
    at_site = {key: spans.part(site, key) for key in PARTS}
    return at_site | {SUM: None if spans.spread is None else spans.warming(site)}


def _words(one: _Shown, units: Units) -> str:
    def said(value: float, key: str) -> str:
        return plain(ranged(Amount(value, "temperature_change", 1), one.ends[key]), units)

    named = [
        f"{name} {said(getattr(one.parts, key), key)}"
        for key, name in PARTS.items()
        if abs(getattr(one.parts, key)) >= SMALL
    ]
    return f"{one.site.name}: {', '.join(named) or 'no part'}; together {said(one.site.warming, SUM)}."


def _reach(shown: list[_Shown]) -> tuple[float, float]:
    """Lowest and highest value any bar or range touches."""
    touched = [(0.0, 1.0)]
    for one in shown:
        running = 0.0
        for key in PARTS:
            part = float(getattr(one.parts, key))
            touched.append(one.reach(key, running, running + part))
            running += part
        touched.append(one.reach(SUM, 0.0, running))
    return min(low for low, _ in touched), max(high for _, high in touched)


def _drawing(shown: list[_Shown], units: Units, beside: int, name: str, width: float, letter: float) -> BudgetDrawing:
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
    whiskers: list[Curve] = []
    labels: list[Label] = []
    discs: list[Disc] = []
    for count, one in enumerate(shown):
        left = 4.0 + (count % beside) * (panel + gap)
        top = (count // beside) * (PANEL + 10.0)
        scale = Scale(low, high, left + names + 14.0, left + panel - value - 8.0)
        if low < 0.0:  # room for the words of bars to the left
            scale = Scale(low, high, left + names + 14.0 + min(value, 46.0), scale.end)
        lines_here, bars_here, whiskers_here, labels_here = _panel(one, scale, (left, top, panel), units, letter)
        lines += lines_here
        bars += bars_here
        whiskers += whiskers_here
        labels += labels_here
        discs.append(_disc(one.number, left, top, letter))
    height = rows * (PANEL + 10.0)
    layout = Layout(name, width, height, 4.0, width - 4.0, 0.0, height, letter, 0)
    return BudgetDrawing(layout, tuple(lines), tuple(bars), tuple(whiskers), tuple(labels), tuple(discs))


def _disc(number: int, left: float, top: float, letter: float) -> Disc:
    radius = round(0.68 * letter, 1)
    return Disc(number, round(left + radius, 1), round(top + 14.0, 1), radius, round(top + 14.0 + 0.34 * letter, 1))


def _title(one: _Shown, left: float, top: float, units: Units, letter: float) -> list[Label]:
    """Name of the site, and from which to which temperature its bars lead."""
    before, after = (
        quantity(value, "temperature", 1, units) for value in (one.site.upwind_temperature, one.site.temperature)
    )
    x = round(left + 2.0 * round(0.68 * letter, 1) + 7.0, 1)
    return [
        Label(shortened(one.site.name), x, round(top + 14.0 + 0.36 * letter, 1), "start", "title"),
        Label(f"incoming {before}, here {after}", x, round(top + 14.0 + 1.55 * letter, 1), "start", "note"),
    ]


def _panel(
    one: _Shown, scale: Scale, where: tuple[float, float, float], units: Units, letter: float
) -> tuple[list[Curve], list[Curve], list[Curve], list[Label]]:
    """Lines, bars, ranges and labels of one site."""
    left, top, width = where
    zero = place(scale, 0.0)
    bottom = top + HEAD + ROW * (len(PARTS) + 1)
    labels = _title(one, left, top, units, letter)
    lines = [Curve(f"M{zero:.1f} {top + HEAD - 2.0:.1f}V{bottom:.1f}", "zero")]
    bars: list[Curve] = []
    whiskers: list[Curve] = []
    running = 0.0
    for row, (key, words) in enumerate(PARTS.items()):
        part = float(getattr(one.parts, key))
        y = top + HEAD + ROW * row
        _, right = one.reach(key, running, running + part)
        labels += _row_words(words, part, scale, right, (left, y), units, letter)
        bars += _bar(place(scale, running), place(scale, running + part), y, "cools" if part < 0.0 else "warms")
        whiskers += _whisker(one.ends[key], running, scale, y)
        running += part
        at = place(scale, running)
        lines.append(Curve(f"M{at:.1f} {y + BAR:.1f}v{ROW - BAR:.1f}", "step"))
    y = top + HEAD + ROW * len(PARTS)
    _, right = one.reach(SUM, 0.0, running)
    labels += _row_words("together", one.site.warming, scale, right, (left, y), units, letter, kind="sum")
    bars += _bar(zero, place(scale, running), y, "sum")
    whiskers += _whisker(one.ends[SUM], 0.0, scale, y)
    lines.append(Curve(f"M{left:.1f} {y - 4.0:.1f}H{left + width:.1f}", "rule"))
    return lines, bars, whiskers, labels


def _whisker(ends: Ends | None, start: float, scale: Scale, y: float) -> list[Curve]:
    """The range of a bar, from where its lowest to where its highest value would end, on a paler line to be seen."""
    if ends is None:
        return []
    low, high = (float(place(scale, start + end)) for end in ends)
    if high - low < 2.0:
        return []
    middle = y + 0.5 * BAR
    path = f"M{low:.1f} {middle - CAP:.1f}v{2.0 * CAP}M{low:.1f} {middle:.1f}H{high:.1f}m0 {-CAP}v{2.0 * CAP}"
    return [Curve(path, "whisker under"), Curve(path, "whisker")]


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
