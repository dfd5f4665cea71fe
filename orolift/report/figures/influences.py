"""Which input matters most: a bar for each, by its rank correlation with a result over the members."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.report.figures.axes import Layout, Scale, place
from orolift.report.figures.drawing import Curve, Figure, Label
from orolift.report.figures.placing import text_width
from orolift.report.how_sure import input_words
from orolift.report.quantities import MINUS

if TYPE_CHECKING:
    from orolift.report.how_sure import HowSure, Panel

ROW, BAR, HEAD, FOOT = 21.0, 13.0, 30.0, 16.0
"""Drawing units from bar to bar, height of a bar, room over and under the bars of a panel."""


@dataclass(frozen=True)
class InfluencesDrawing:
    """Everything the influences show, from the back to the front."""

    layout: Layout
    lines: tuple[Curve, ...]
    bars: tuple[Curve, ...]
    labels: tuple[Label, ...]


def influences_figure(sure: HowSure) -> Figure[InfluencesDrawing] | None:
    """The inputs that matter most, a panel for each result.

    Parameters
    ----------
    sure : HowSure

    Returns
    -------
    Figure of InfluencesDrawing or None
        None without members.
    """
    panels = [panel for panel in sure.panels if panel.influences]
    if not panels:
        return None
    return Figure(
        key="influences",
        drawing=_drawing(panels, sure.noise, Layout("wide", 960.0, 0.0, 0.0, 960.0, 0.0, 0.0, 14.0, 0), len(panels)),
        narrow=_drawing(panels, sure.noise, Layout("narrow", 344.0, 0.0, 0.0, 344.0, 0.0, 0.0, 12.5, 0), 1),
        title="Which input matters most",
        alt=" ".join(_words(panel, sure.noise) for panel in panels),
        caption=(
            "Rank correlation of each input with the result, over the members: 1 when more of the one always goes "
            f"with more of the other, {MINUS}1 when with less. Pale bars are within what "
            "chance alone gives among so many members. A wind direction counts clockwise."
        ),
    )


def _words(panel: Panel, noise: float) -> str:
    clear = [one for one in panel.influences if abs(one.correlation) > noise]
    named = ", ".join(f"{input_words(one.name)} {_number(one.correlation)}" for one in clear)
    return f"{panel.title}: {named or 'nothing stands out'}."


def _number(value: float) -> str:
    text = f"{abs(value):.2f}"
    return text if float(text) == 0.0 else f"{MINUS if value < 0.0 else '+'}{text}"


def _drawing(panels: list[Panel], noise: float, form: Layout, beside: int) -> InfluencesDrawing:
    gap = 26.0
    width = min((form.width - 8.0 - gap * (beside - 1)) / beside, 460.0)
    most = max(len(panel.influences) for panel in panels)
    depth = HEAD + 2.0 * ROW * most + FOOT if _narrow(panels, form, width) else HEAD + ROW * most + FOOT
    lines: list[Curve] = []
    bars: list[Curve] = []
    labels: list[Label] = []
    for count, panel in enumerate(panels):
        corner = (4.0 + (count % beside) * (width + gap), (count // beside) * depth)
        made = _panel(panel, noise, corner, width, form.letter, stacked=_narrow(panels, form, width))
        lines += made[0]
        bars += made[1]
        labels += made[2]
    height = depth * (-(-len(panels) // beside))
    layout = Layout(form.name, form.width, height, 4.0, form.width - 4.0, 0.0, height, form.letter, 0)
    return InfluencesDrawing(layout, tuple(lines), tuple(bars), tuple(labels))


def _narrow(panels: list[Panel], form: Layout, width: float) -> bool:
    """Whether names stand over their bars, for want of room beside them."""
    names = [text_width(input_words(one.name), form.letter) for panel in panels for one in panel.influences]
    return max(names) > 0.45 * width


def _panel(
    panel: Panel, noise: float, corner: tuple[float, float], width: float, letter: float, *, stacked: bool
) -> tuple[list[Curve], list[Curve], list[Label]]:
    """The bars of one result."""
    left, top = corner
    value = text_width("+0.00", letter) + 8.0
    names = 0.0 if stacked else max(text_width(input_words(one.name), letter) for one in panel.influences) + 12.0
    low = min(0.0, *(one.correlation for one in panel.influences))
    scale = Scale(low, 1.0, left + names + (value if low < 0.0 else 2.0), left + width - value)
    step = 2.0 * ROW if stacked else ROW
    bottom = top + HEAD + step * len(panel.influences)
    zero = round(place(scale, 0.0), 1)
    lines = [] if stacked else [Curve(f"M{zero} {top + HEAD - 4.0:.1f}V{bottom:.1f}", "zero")]
    bars: list[Curve] = []
    labels = [Label(panel.title, round(left, 1), round(top + letter, 1), "start", "title")]
    for row, one in enumerate(panel.influences):
        y = top + HEAD + step * row + (ROW if stacked else 0.0)
        base = round(y + 0.5 * BAR + 0.35 * letter, 1)
        kind = "influence" if abs(one.correlation) > noise else "influence faint"
        labels.append(
            Label(
                input_words(one.name),
                round(left, 1),
                round(base - ROW, 1) if stacked else base,
                "start",
                "part" if kind == "influence" else "nothing",
            )
        )
        if stacked:
            lines.append(Curve(f"M{zero} {y - 2.0:.1f}v{BAR + 4.0}", "zero"))
        end = round(place(scale, one.correlation), 1)
        start, stop = sorted((zero, end))
        bars.append(Curve(f"M{start} {y:.1f}H{stop}v{BAR}H{start}Z", kind))
        if one.correlation < 0.0:
            labels.append(Label(_number(one.correlation), round(end - 6.0, 1), base, "end", "value"))
        else:
            labels.append(Label(_number(one.correlation), round(end + 6.0, 1), base, "start", "value"))
    return lines, bars, labels
