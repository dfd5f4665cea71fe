"""Strips of a site through the hours: where air crosses, where it is warm and dry, which thresholds are met."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import Layout, Scale, place
from orolift.report.figures.drawing import Curve, Label
from orolift.report.figures.many_hours import all_of, any_of, runs
from orolift.report.figures.placing import shortened, text_width
from orolift.report.words import rounded_time

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.spread.stretches import Stretch
    from orolift.spread.timeline import SiteTimeline

    Array = NDArray[np.float64]

STRIP = 10.0
"""Height of the strip of states at the top, drawing units."""


@dataclass(frozen=True, eq=False)
class Shown:
    """Where hours stand.

    Attributes
    ----------
    across : Scale
        Of the time.
    x : ndarray (n,)
        Middle of each hour, or of each `together`, in drawing units.
    half : float
        Half of its width.
    together : int
        Hours drawn as one.
    """

    across: Scale
    x: Array
    half: float
    together: int

    def at(self, time: float, error: float | None) -> float:
        """Place of a time as the words have it, in drawing units."""
        return float(place(self.across, rounded_time(time, error or 0.0)))

    def bars(self, one: Stretch, known: NDArray[np.bool_]) -> list[tuple[float, float]]:
        """Ends of a stretch in drawing units: from its onset to its end as they are said, without hours not known."""
        inside = np.zeros(known.size, dtype=np.bool_)
        inside[one.first : one.last + 1] = known[one.first : one.last + 1]
        found = [(self.x[a] - self.half, self.x[b - 1] + self.half) for a, b in runs(any_of(inside, self.together))]
        ends = [[float(a), float(b)] for a, b in found]
        if one.onset is not None:
            ends[0][0] = self.at(one.onset, one.onset_error)
        if one.end is not None:
            ends[-1][1] = self.at(one.end, one.end_error)
        return [(a, max(b, a + 1.0)) for a, b in ends]


def threshold_rows(
    site: SiteTimeline, shown: Shown, layout: Layout
) -> tuple[tuple[Curve, ...], tuple[Label, ...], float]:
    """A row for each threshold of the region, marked where it is met; and where the rows end.

    Parameters
    ----------
    site : SiteTimeline
    shown : Shown
    layout : Layout

    Returns
    -------
    curves : tuple of Curve
    labels : tuple of Label
    bottom : float
        Of the rows, drawing units.
    """
    curves, labels = [], []
    bottom = layout.top + STRIP
    for one in site.thresholds:
        bottom += 2.1 * layout.letter
        y = bottom - 0.35 * layout.letter
        curves.append(Curve(f"M{layout.left} {y:.1f}H{layout.right}", "grid"))
        curves += [
            Curve(f"M{a:.1f} {y:.1f}H{b:.1f}", "met")
            for stretch in one.stretches
            for a, b in shown.bars(stretch, one.judged)
        ]
        words = f"threshold met: {one.rule.name}" if one.met.any() else f"threshold not met: {one.rule.name}"
        words = shortened(words, layout.right - layout.left, layout.letter)
        kind = "note danger-words" if one.met.any() else "note"
        labels.append(Label(words, layout.left, round(y - 0.5 * layout.letter, 1), "start", kind))
    return tuple(curves), tuple(labels), bottom


def blanks(site: SiteTimeline, shown: Shown, top: float, bottom: float) -> tuple[Curve, ...]:
    """Stretches without air that crosses: nothing known, and no crossing.

    Parameters
    ----------
    site : SiteTimeline
    shown : Shown
    top, bottom : float
        Drawing units.

    Returns
    -------
    tuple of Curve
    """
    out, x, half, together = [], shown.x, shown.half, shown.together
    for status, kind in (("missing", "unknown"), ("no crossing", "no-crossing")):
        flags = all_of((state.status == status for state in site.states), together)
        for first, last in runs(flags):
            a, b = x[first] - half, max(x[last - 1] + half, x[first] - half + 1.0)
            box = f"M{a:.1f} {top:.1f}H{b:.1f}V{bottom:.1f}H{a:.1f}Z"
            out.append(Curve(box, kind))
            if status == "no crossing":
                out.append(Curve(_hatch(float(a), float(b), top, bottom), "no-crossing hatch"))
    return tuple(out)


def _hatch(left: float, right: float, top: float, bottom: float) -> str:
    """Slanting strokes over a box, 9 units apart and at 45 degrees, cut at its edges."""
    strokes = []
    depth = bottom - top
    start = left - depth
    while start < right:
        a, b = max(start, left), min(start + depth, right)
        if b > a:
            strokes.append(f"M{a:.1f} {bottom - (a - start):.1f}L{b:.1f} {bottom - (b - start):.1f}")
        start += 9.0
    return "".join(strokes)


def state_strip(site: SiteTimeline, shown: Shown, layout: Layout) -> tuple[tuple[Curve, ...], tuple[Label, ...]]:
    """The strip at the top: thin where air crosses, bold where descending warm dry air arrives.

    Parameters
    ----------
    site : SiteTimeline
    shown : Shown
    layout : Layout

    Returns
    -------
    curves : tuple of Curve
    labels : tuple of Label
    """
    middle = layout.top + 0.5 * STRIP
    out: list[Curve] = []
    x, half, together = shown.x, shown.half, shown.together
    crosses = any_of((state.status == "crossing" for state in site.states), together)
    for first, last in runs(crosses):
        out.append(Curve(f"M{x[first] - half:.1f} {middle}H{x[last - 1] + half:.1f}", "crosses"))
    wishes = []
    known = np.array([state.status != "missing" for state in site.states])
    for one in site.dry_winds:
        bars = shown.bars(one, known)
        out += [Curve(f"M{a:.1f} {middle}H{b:.1f}", "dry-wind") for a, b in bars]
        wishes.append((bars[0][0], "descending warm dry air", "name warm"))
    for status, words in (("no crossing", "no air crosses"), ("missing", "nothing known")):
        flags = all_of((state.status == status for state in site.states), together)
        wishes += [(float(x[first]) - half, words, "note") for first, _ in runs(flags)]
    return tuple(out), _apart(wishes, layout)


def _apart(wishes: list[tuple[float, str, str]], layout: Layout) -> tuple[Label, ...]:
    """Words above the strip, each kind once, as far as they fit beside each other."""
    labels: list[Label] = []
    taken: list[tuple[float, float]] = []
    for at, text, kind in wishes:
        width = text_width(text, layout.letter)
        left = min(max(at, layout.left), layout.right - width)
        clear = all(left + width + 6.0 < a or left > b + 6.0 for a, b in taken)
        if clear and text not in {label.text for label in labels}:
            labels.append(Label(text, round(left, 1), round(layout.top - 7.0, 1), "start", kind))
            taken.append((left, left + width))
    return tuple(labels)
