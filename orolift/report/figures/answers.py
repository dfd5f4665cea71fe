"""Three answers side by side: every site a row, temperature across."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import Layout, Scale, Tick, place, ticks
from orolift.report.figures.budget import Disc
from orolift.report.figures.drawing import Anchor, Curve, Figure, Label
from orolift.report.figures.pins import shortened
from orolift.report.figures.placing import Board, Box, put
from orolift.report.quantities import Units, quantity
from orolift.report.story import ends_of, temperature_ends

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing, LeeAir

MOST_SITES = 8
"""Sites that are drawn; the table has all."""
ROW = 58.0
TOP = 14.0
SIDES: tuple[tuple[Anchor, float], ...] = (("middle", 0.0), ("start", -4.0), ("end", 4.0))
SIZE = 6.0
"""Half the width of a mark."""


@dataclass(frozen=True)
class AnswersDrawing:
    """Everything the answers show, from the back to the front."""

    layout: Layout
    ticks: tuple[Tick, ...]
    lines: tuple[Curve, ...]
    marks: tuple[Curve, ...]
    discs: tuple[Disc, ...]
    labels: tuple[Label, ...]


def answers_figure(crossing: Crossing, units: Units) -> Figure[AnswersDrawing] | None:
    """The answers of the sites behind the range.

    Parameters
    ----------
    crossing : Crossing
    units : 'metric' or 'us'

    Returns
    -------
    Figure of AnswersDrawing or None
        None when there is no site on the crest or behind it.
    """
    shown = [(site.number, site) for site in crossing.lee if site.side != "windward"]
    if not shown:
        return None
    shown = shown[:MOST_SITES]
    caption = (
        "Diamond: the popular picture (surface air lifted over the crest, every drop falls out, down dry). Square: "
        "descent only (source air brought down dry, no condensation). Disc: this page. Bar: from no blocking to full "
        "blocking. Stroke: the incoming air at the height of the site."
    )
    return Figure(
        key="answers",
        drawing=_drawing(shown, units, Layout("wide", 960.0, 0.0, 190.0, 934.0, TOP, 0.0, 14.0, 8)),
        narrow=_drawing(shown, units, Layout("narrow", 344.0, 0.0, 12.0, 326.0, TOP, 0.0, 12.5, 4)),
        title="Three answers for the temperature of each site",
        alt=" ".join(_words(site, units) for _, site in shown),
        caption=caption,
    )


def _words(site: LeeAir, units: Units) -> str:
    def said(value: float) -> str:
        return quantity(value, "temperature", 1, units)

    only = "" if site.descent_only is None else f", descent only {said(site.descent_only)}"
    ends = temperature_ends(site)
    span = "" if ends is None else f", from no to full blocking {said(ends[0])} to {said(ends[1])}"
    return f"{site.name}: popular picture {said(site.popular_picture)}{only}, this page {said(site.temperature)}{span}."


def _values(site: LeeAir) -> list[float]:
    ends = ends_of(site) or ()
    own = [site.temperature, site.popular_picture, site.upwind_temperature, *(air.temperature for air in ends)]
    return own if site.descent_only is None else [*own, site.descent_only]


def _drawing(shown: list[tuple[int, LeeAir]], units: Units, form: Layout) -> AnswersDrawing:
    wide = form.name == "wide"
    row = ROW if wide else ROW + 28.0
    bottom = form.top + row * len(shown)
    layout = Layout(
        form.name, form.width, bottom + 34.0, form.left, form.right, form.top, bottom, form.letter, form.ticks
    )
    values = np.array([value for _, site in shown for value in _values(site)])
    room = max(float(np.ptp(values)), 3.0)
    across = Scale(float(values.min()) - 0.12 * room, float(values.max()) + 0.14 * room, layout.left, layout.right)
    lines: list[Curve] = []
    marks: list[Curve] = []
    labels: list[Label] = []
    discs: list[Disc] = []
    for count, (number, site) in enumerate(shown):
        top = layout.top + row * count
        y = round(top + row - 24.0, 1)
        radius = round(0.68 * layout.letter, 1)
        name_y = y if wide else round(top + 12.0, 1)
        left = 4.0 + radius
        discs.append(Disc(number, round(left, 1), name_y, radius, round(name_y + 0.34 * layout.letter, 1)))
        labels.append(
            Label(
                shortened(site.name),
                round(left + radius + 7.0, 1),
                round(name_y + 0.36 * layout.letter, 1),
                "start",
                "title",
            )
        )
        lines.append(Curve(f"M{layout.left:.1f} {y}H{layout.right:.1f}", "grid"))
        drawn = _row(site, across, y, layout, units, first=count == 0)
        lines += drawn[0]
        marks += drawn[1]
        labels += drawn[2]
    return AnswersDrawing(
        layout,
        ticks(across, "temperature", units, layout.ticks),
        tuple(lines),
        tuple(marks),
        tuple(discs),
        tuple(labels),
    )


def _row(
    site: LeeAir, across: Scale, y: float, layout: Layout, units: Units, *, first: bool
) -> tuple[list[Curve], list[Curve], list[Label]]:
    """Marks and words of one site."""
    lines, marks = [], []
    ends = temperature_ends(site)
    if ends is not None:
        low, high = (round(place(across, value), 1) for value in ends)
        lines.append(Curve(f"M{low} {y}H{high}", "span"))
    at = {name: round(place(across, value), 1) for name, value in _named(site).items()}
    lines.append(Curve(f"M{at['incoming air']} {y - 9}v18", "before"))
    a = at["popular picture"]
    marks.append(
        Curve(
            f"M{a - SIZE - 1:.1f} {y}L{a} {y - SIZE - 1}L{a + SIZE + 1:.1f} {y}L{a} {y + SIZE + 1}Z", "answer popular"
        )
    )
    if "descent only" in at:
        b = at["descent only"]
        marks.append(
            Curve(f"M{b - SIZE + 1:.1f} {y - SIZE + 1}h{2 * SIZE - 2}v{2 * SIZE - 2}h{2 - 2 * SIZE}Z", "answer descent")
        )
    c = at["this page"]
    marks.append(
        Curve(f"M{c - SIZE:.1f} {y}a{SIZE} {SIZE} 0 1 0 {2 * SIZE} 0a{SIZE} {SIZE} 0 1 0 {-2 * SIZE} 0Z", "answer own")
    )
    return lines, marks, _row_labels(site, at, y, layout, units, first=first)


def _named(site: LeeAir) -> dict[str, float]:
    out = {"this page": site.temperature, "popular picture": site.popular_picture}
    if site.descent_only is not None:
        out["descent only"] = site.descent_only
    out["incoming air"] = site.upwind_temperature
    return out


def _row_labels(
    site: LeeAir, at: dict[str, float], y: float, layout: Layout, units: Units, *, first: bool
) -> list[Label]:
    """Values beside the marks; their names too in the first row."""
    letter = layout.letter
    board = Board(Box(layout.left - 4.0, y - 46.0, layout.width - 2.0, y + 24.0), letter)
    out: list[Label] = []
    for name, value in _named(site).items():
        text = quantity(value, "temperature", 1, units)
        words = f"{name} {text}" if first and layout.name == "wide" else text
        kind = "value" if name == "this page" else "note"
        choices = []
        for wording in dict.fromkeys((words, text)):
            for rise in (-12.0, 12.0 + 0.75 * letter, -12.0 - 1.2 * letter):
                for anchor, shift in SIDES:
                    choices.append((Label(wording, round(at[name] + shift, 1), round(y + rise, 1), anchor, kind),))
        new, board = put(board, choices)
        out += new
    return out
