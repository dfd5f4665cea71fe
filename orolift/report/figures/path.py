"""The way of the air that reaches a site: temperature and dew point against height, up one side and down the other."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.air.humidity import dew_point_from_mixing_ratio
from orolift.report.figures.axes import Layout, Scale, Tick, level_ticks, place, ticks
from orolift.report.figures.cloud import runs
from orolift.report.figures.drawing import Anchor, Curve, Figure, Label, Pin, head_along, polyline
from orolift.report.figures.pins import ASIDE, Spot, pins
from orolift.report.figures.placing import Board, Box, beside, put
from orolift.report.quantities import Units, quantity

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing
    from orolift.report.trace import Trace

WIDE = Layout("wide", 960.0, 520.0, 56.0, 934.0, 24.0, 478.0, 14.0, 8)
NARROW = Layout("narrow", 344.0, 420.0, 42.0, 320.0, 24.0, 384.0, 12.5, 4)

Line = tuple["NDArray[np.float64]", "NDArray[np.float64]"]
"""Drawing coordinates of a curve."""
LEAST_VAPOUR = 1e-8
"""Vapour [kg per kg] below which a dew point is that of this much."""
SHALLOW = 30.0
"""A way down or up shorter than this [m] is not drawn apart (design choice)."""


@dataclass(frozen=True)
class PathDrawing:
    """Everything the path shows, from the back to the front."""

    layout: Layout
    height_ticks: tuple[Tick, ...]
    temperature_ticks: tuple[Tick, ...]
    levels: tuple[Curve, ...]
    in_cloud: tuple[Curve, ...]
    curves: tuple[Curve, ...]
    heads: tuple[Curve, ...]
    pins: tuple[Pin, ...]
    labels: tuple[Label, ...]


def path(crossing: Crossing, trace: Trace, units: Units) -> Figure[PathDrawing]:
    """The way of the air that reaches a site.

    Parameters
    ----------
    crossing : Crossing
    trace : Trace
    units : 'metric' or 'us'

    Returns
    -------
    Figure of PathDrawing
    """
    goal = _goal(trace)
    alt = (
        f"Temperature and dew point of the air that {goal}, against height. "
        f"{_state(trace, 0, 'Start', units)} {_state(trace, trace.top, 'Highest point', units)} "
        f"{_state(trace, -1, 'End', units)}"
    )
    caption = (
        f"The air that {goal}, on its way up and down. Ochre: temperature; blue: dew point; they meet in cloud (grey). "
        "Bold lines are the way down. Dashed and dotted: temperature and dew point of the incoming air before the "
        "range; what lies to the right of them is warmer or moister than the air that came."
    )
    if trace.site is not None and trace.site.went_round > 0.0:
        share = quantity(trace.site.went_round, "share", 0, units)
        caption += f" The pin lies off the line because {share} of the air there went round the range and is mixed in."
    return Figure(
        key="path",
        drawing=_drawing(crossing, trace, units, WIDE),
        narrow=_drawing(crossing, trace, units, NARROW),
        title="Temperature and dew point of the air on its way over the range",
        alt=alt,
        caption=caption,
    )


def _goal(trace: Trace) -> str:
    if trace.site is None:
        return "reaches the lee foot"
    return f"passes over {trace.site.name}" if trace.site.in_pool else f"reaches {trace.site.name}"


def _state(trace: Trace, index: int, name: str, units: Units) -> str:
    height = quantity(float(trace.height[index]), "height", -1, units)
    temperature = quantity(float(trace.temperature[index]), "temperature", 1, units)
    dew_point = quantity(float(trace.dew_point[index]), "temperature", 1, units)
    return f"{name}, {height}: {temperature}, dew point {dew_point}."


def _incoming(crossing: Crossing, trace: Trace) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]:
    """Heights of the figure, and temperature and dew point of the incoming air there."""
    low, high = float(trace.height.min()), float(trace.height.max())
    if trace.site is not None:
        low = min(low, trace.site.elevation)
    span = max(high - low, 300.0)
    levels = np.linspace(low - 0.04 * span, high + 0.15 * span, 40)
    levels = levels[levels >= crossing.incoming.height[0]]
    air = interpolated(crossing.incoming, levels)
    return levels, air.temperature, dew_point_from_mixing_ratio(air.pressure, np.maximum(air.vapour, LEAST_VAPOUR))


def _scales(
    values: NDArray[np.float64], levels: NDArray[np.float64], trace: Trace, layout: Layout
) -> tuple[Scale, Scale]:
    """Temperature from the driest dew point to the warmest air; heights from the lowest point to above the highest."""
    low = float(min(levels[0], trace.height.min(), trace.site.elevation if trace.site else np.inf))
    span = float(levels[-1]) - low
    up = Scale(low - 0.03 * span, float(levels[-1]), layout.bottom, layout.top)
    room = max(float(values.max() - values.min()), 4.0)
    left, right = (0.12, 0.2) if layout is WIDE else (0.08, 0.14)
    return Scale(float(values.min()) - left * room, float(values.max()) + right * room, layout.left, layout.right), up


def _drawing(crossing: Crossing, trace: Trace, units: Units, layout: Layout) -> PathDrawing:
    levels, upwind, upwind_dew = _incoming(crossing, trace)
    own = [] if trace.site is None else [trace.site.temperature, trace.site.dew_point]
    values = np.concatenate([trace.temperature, trace.dew_point, upwind, upwind_dew, own])
    across, up = _scales(values, levels, trace, layout)
    warm, dew, y = place(across, trace.temperature), place(across, trace.dew_point), place(up, trace.height)
    lines: dict[str, Line] = {
        "upwind": (np.asarray(place(across, upwind)), np.asarray(place(up, levels))),
        "upwind-dew": (np.asarray(place(across, upwind_dew)), np.asarray(place(up, levels))),
    }
    for name, part in _ways(trace).items():
        lines[f"dew {name}"] = dew[part], y[part]
        lines[f"warm {name}"] = warm[part], y[part]
    board = Board(
        Box(layout.left, layout.top, layout.right + 2.0, layout.bottom),
        layout.letter,
        points_x=np.concatenate([_dense(line)[0] for line in lines.values()]),
        points_y=np.concatenate([_dense(line)[1] for line in lines.values()]),
    )
    marks, labels, board = _levels(crossing, trace, up, units, board)
    site_pins, board = _pins(trace, across, up, units, board)
    more = _names(trace, _clear_parts(trace, lines), board, layout)
    heads = [
        head_along(*lines[name], share, 12.0, f"head {name.split()[0]}")
        for name in lines
        if " " in name and not (_twice(trace) and "rising" in name)
        for share in (0.3 if "rising" in name else 0.78,)
    ]
    return PathDrawing(
        layout=layout,
        height_ticks=level_ticks(up, units, 6, layout.letter),
        temperature_ticks=ticks(across, "temperature", units, layout.ticks),
        levels=marks,
        in_cloud=_in_cloud(trace, np.asarray(warm), np.asarray(y)),
        curves=(*(polyline(*line, name) for name, line in lines.items()), *_link(trace, across, up)),
        heads=tuple(head for head in heads if head is not None),
        pins=site_pins,
        labels=(*labels, *more),
    )


def _ways(trace: Trace) -> dict[str, slice]:
    """The way up from the lowest point to the highest, and the way down from it, those that there are."""
    top, height = trace.top, trace.height
    low = int(np.argmin(height[: top + 1]))
    ways = {"rising": slice(low, top + 1), "falling": slice(top, None)}
    kept = {name: part for name, part in ways.items() if np.ptp(height[part]) >= SHALLOW}
    return kept or {"rising": slice(0, None)}


def _twice(trace: Trace) -> bool:
    """Whether the way down runs back along the way up."""
    return not trace.wet.any() and len(_ways(trace)) > 1


def _dense(line: Line) -> Line:
    """Points along a curve every few drawing units, for labels to keep clear of."""
    x, y = line
    length = np.concatenate([[0.0], np.cumsum(np.hypot(np.diff(x), np.diff(y)))])
    at = np.linspace(0.0, length[-1], max(int(length[-1] / 3.0), 2))
    return np.interp(at, length, x), np.interp(at, length, y)


def _in_cloud(trace: Trace, warm: NDArray[np.float64], y: NDArray[np.float64]) -> tuple[Curve, ...]:
    """The stretches of the path that lie in cloud."""
    return tuple(
        polyline(warm[first : last + 1], y[first : last + 1], "in-cloud")
        for first, last in runs(trace.wet)
        if last - first >= 2
    )


def named_levels(crossing: Crossing, trace: Trace) -> list[tuple[str, float]]:
    """Heights on the way that have a name: source, highest point, cloud."""
    shape = crossing.features
    out = [("starts at", trace.source), ("crest", shape.crest)]
    wet = runs(trace.wet)
    if wet and wet[0][0] > 0:
        out.append(("cloud base", float(trace.height[wet[0][0]])))
    if wet and wet[-1][1] < trace.height.size - 1 and wet[-1][1] > trace.top:
        out.append(("cloud ends", float(trace.height[wet[-1][1]])))
    return out


def _levels(
    crossing: Crossing, trace: Trace, up: Scale, units: Units, board: Board
) -> tuple[tuple[Curve, ...], tuple[Label, ...], Board]:
    """Source, crest, cloud base and end as level lines, named at the right end or, where that is taken, the left."""
    curves: list[Curve] = []
    labels: list[Label] = []
    lines: list[Line] = []
    frame = board.frame
    ends: tuple[tuple[float, Anchor], ...] = ((frame.right - 4.0, "end"), (frame.left + 6.0, "start"))
    for name, level in named_levels(crossing, trace):
        y = place(up, level)
        if not frame.top < y < frame.bottom:
            continue
        words = f"{name} {quantity(level, 'height', 0 if name == 'crest' else -1, units)}"
        curves.append(Curve(f"M{frame.left:.1f} {y:.1f}H{frame.right - 2.0:.1f}", "level"))
        new, board = put(
            board,
            [
                (Label(text, x, round(y + shift, 1), anchor, "place"),)
                for text in (words, words.removeprefix("cloud "))
                for x, anchor in ends
                for shift in (-5.0, board.letter)
            ],
        )
        labels += new
        across = np.arange(frame.left, frame.right, 4.0)
        lines.append((across, np.full(across.size, y)))
    # known only now, because the words of one line may stand on another where lines crowd
    board = replace(
        board,
        points_x=np.concatenate([board.points_x, *(x for x, _ in lines)]),
        points_y=np.concatenate([board.points_y, *(y for _, y in lines)]),
    )
    return tuple(curves), tuple(labels), board


def _pins(trace: Trace, across: Scale, up: Scale, units: Units, board: Board) -> tuple[tuple[Pin, ...], Board]:
    """The site at the temperature of its air, its disc set off to the side that is free."""
    site = trace.site
    if site is None:
        return (), board
    value = quantity(site.temperature, "temperature", 1, units)
    spot = Spot(trace.number, place(across, site.temperature), place(up, site.elevation), site.name, value)
    return pins([spot], board, ASIDE, names=True)


def _link(trace: Trace, across: Scale, up: Scale) -> tuple[Curve, ...]:
    """From the end of the way to the pin: what mixing, the ground and the air that went round add there."""
    if trace.site is None or trace.site.in_pool:
        return ()
    x, y = place(across, float(trace.temperature[-1])), place(up, float(trace.height[-1]))
    end_x, end_y = place(across, trace.site.temperature), place(up, trace.site.elevation)
    return (Curve(f"M{x:.1f} {y:.1f}L{end_x:.1f} {end_y:.1f}", "link"),)


def _clear_parts(trace: Trace, lines: dict[str, Line]) -> dict[str, Line]:
    """The stretches outside cloud, where temperature and dew point run apart; all of a line that has none."""
    clear = {name: ~trace.wet[part] for name, part in _ways(trace).items()}
    out = dict(lines)
    for name, (x, y) in lines.items():
        flags = clear.get(name.rpartition(" ")[2])
        if flags is not None and flags.sum() > 2:
            out[name] = x[flags], y[flags]
    return out


def _names(trace: Trace, lines: dict[str, Line], board: Board, layout: Layout) -> tuple[Label, ...]:
    """The name of every line beside it, at length where there is room."""
    words: dict[str, tuple[str, ...]] = {
        "warm falling": ("temperature, coming down", "temperature, down"),
        "dew falling": ("dew point, coming down", "dew point, down"),
        "warm rising": ("temperature, going up", "temperature, up"),
        "dew rising": ("dew point, going up", "dew point, up"),
        "upwind": ("temperature before the range", "before the range"),
        "upwind-dew": ("dew point before the range",),
    }
    ways = _ways(trace)
    if _twice(trace):
        words |= {"warm falling": ("temperature, up and down",), "dew falling": ("dew point, up and down",)}
        del words["warm rising"], words["dew rising"]
    for side, part in ways.items():
        if trace.wet[part][1:-1].all():
            words[f"warm {side}"] = (f"{'up' if side == 'rising' else 'down'}, in cloud all the way",)
            words.pop(f"dew {side}", None)
    labels: list[Label] = []
    for name, choices in words.items():
        if name not in lines or (layout is NARROW and name == "upwind-dew"):
            continue
        kind = f"name {name.split()[0]}"
        wished = choices if layout is WIDE else choices[-1:]
        new, board = put(board, [spot for text in wished for spot in beside(*lines[name], text, kind, board)])
        labels += new
    return tuple(labels)
