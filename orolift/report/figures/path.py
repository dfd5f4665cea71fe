"""The path of the lowest air: temperature and dew point against height, up one side and down the other."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.report.briefing import crest_index
from orolift.report.figures.axes import Layout, Scale, Tick, level_ticks, place, ticks
from orolift.report.figures.cloud import cloudy, runs
from orolift.report.figures.drawing import Anchor, Curve, Figure, Label, Pin, head_along, polyline
from orolift.report.figures.pins import ASIDE, Spot, pins
from orolift.report.figures.placing import Board, Box, beside, put
from orolift.report.quantities import Units, quantity

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing

WIDE = Layout("wide", 960.0, 520.0, 56.0, 934.0, 24.0, 478.0, 14.0, 8)
NARROW = Layout("narrow", 344.0, 420.0, 42.0, 320.0, 24.0, 384.0, 12.5, 4)

Line = tuple["NDArray[np.float64]", "NDArray[np.float64]"]
"""Drawing coordinates of a curve."""


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


def path(crossing: Crossing, units: Units) -> Figure[PathDrawing]:
    """The path of the lowest air.

    Parameters
    ----------
    crossing : Crossing
    units : 'metric' or 'us'

    Returns
    -------
    Figure of PathDrawing
    """
    start, crest = 0, crest_index(crossing)
    alt = (
        "Temperature and dew point of the lowest air against height. "
        f"{_state(crossing, start, 'Upwind end', units)} {_state(crossing, crest, 'Crest', units)} "
        f"{_state(crossing, -1, 'Downwind end', units)}"
    )
    caption = (
        "The same air on its way up and down. Ochre: temperature; blue: dew point; they meet in cloud (grey). "
        "Bold lines are the way down. Dashed: the incoming air as it was at each height before the range; "
        "what lies to the right of it is warmer than the air that came."
    )
    return Figure(
        key="path",
        drawing=_drawing(crossing, units, WIDE),
        narrow=_drawing(crossing, units, NARROW),
        title="Temperature and dew point of the air on its way over the range",
        alt=alt,
        caption=caption,
    )


def _state(crossing: Crossing, index: int, name: str, units: Units) -> str:
    height = quantity(float(crossing.height[index, 0]), "height", 0, units)
    temperature = quantity(float(crossing.air.temperature[index, 0]), "temperature", 1, units)
    dew_point = quantity(float(crossing.dew_point[index, 0]), "temperature", 1, units)
    return f"{name}, {height}: {temperature}, dew point {dew_point}."


def _scales(crossing: Crossing, upwind: NDArray[np.float64], layout: Layout) -> tuple[Scale, Scale]:
    """Temperature from the driest dew point to the warmest air; heights from the lowest ground to above the crest."""
    height = crossing.height[:, 0]
    span = float(height.max() - height.min())
    up = Scale(float(height.min()) - 0.02 * span, float(height.max()) + 0.09 * span, layout.bottom, layout.top)
    values = np.concatenate([crossing.air.temperature[:, 0], crossing.dew_point[:, 0], upwind])
    room = max(float(values.max() - values.min()), 4.0)
    left, right = (0.2, 0.22) if layout is WIDE else (0.12, 0.14)
    return Scale(float(values.min()) - left * room, float(values.max()) + right * room, layout.left, layout.right), up


def _drawing(crossing: Crossing, units: Units, layout: Layout) -> PathDrawing:
    height = crossing.height[:, 0]
    crest = crest_index(crossing)
    levels = np.linspace(float(height.min()), float(height.max()), 40)
    upwind = interpolated(crossing.incoming, levels).temperature
    across, up = _scales(crossing, upwind, layout)
    warm, dew, y = (
        place(across, crossing.air.temperature[:, 0]),
        place(across, crossing.dew_point[:, 0]),
        place(up, height),
    )
    rising, falling = slice(0, crest + 1), slice(crest, None)
    lines: dict[str, Line] = {
        "upwind": (place(across, upwind), place(up, levels)),
        "dew rising": (dew[rising], y[rising]),
        "warm rising": (warm[rising], y[rising]),
        "dew falling": (dew[falling], y[falling]),
        "warm falling": (warm[falling], y[falling]),
    }
    board = Board(
        Box(layout.left, layout.top, layout.right + 2.0, layout.bottom),
        layout.letter,
        points_x=np.concatenate([_dense(line)[0] for line in lines.values()]),
        points_y=np.concatenate([_dense(line)[1] for line in lines.values()]),
    )
    marks, labels, board = _levels(crossing, up, units, board)
    site_pins, board = _pins(crossing, across, up, board, names=layout is WIDE)
    more = _names(crossing, _clear_parts(crossing, lines), board, layout)
    heads = [
        head_along(*lines[name], share, 12.0, f"head {name.split()[0]}")
        for name in ("warm rising", "warm falling", "dew rising", "dew falling")
        for share in (0.22 if "rising" in name else 0.78,)
    ]
    return PathDrawing(
        layout=layout,
        height_ticks=level_ticks(up, units, 6, layout.letter),
        temperature_ticks=ticks(across, "temperature", units, layout.ticks),
        levels=marks,
        in_cloud=_in_cloud(crossing, warm, y),
        curves=tuple(polyline(*line, name) for name, line in lines.items()),
        heads=tuple(head for head in heads if head is not None),
        pins=site_pins,
        labels=(*labels, *more),
    )


def _dense(line: Line) -> Line:
    """Points along a curve every few drawing units, for labels to keep clear of."""
    x, y = line
    length = np.concatenate([[0.0], np.cumsum(np.hypot(np.diff(x), np.diff(y)))])
    at = np.linspace(0.0, length[-1], max(int(length[-1] / 3.0), 2))
    return np.interp(at, length, x), np.interp(at, length, y)


def _in_cloud(crossing: Crossing, warm: NDArray[np.float64], y: NDArray[np.float64]) -> tuple[Curve, ...]:
    """The stretches of the path that lie in cloud."""
    return tuple(
        polyline(warm[first : last + 1], y[first : last + 1], "in-cloud")
        for first, last in runs(cloudy(crossing)[:, 0])
        if last - first >= 2
    )


def _levels(
    crossing: Crossing, up: Scale, units: Units, board: Board
) -> tuple[tuple[Curve, ...], tuple[Label, ...], Board]:
    """Crest, cloud base and end of cloud as level lines, named at the right end or, where that is taken, the left."""
    curves: list[Curve] = []
    labels: list[Label] = []
    lines: list[Line] = []
    frame = board.frame
    ends: tuple[tuple[float, Anchor], ...] = ((frame.right - 4.0, "end"), (frame.left + 6.0, "start"))
    for name, level, digits in (
        ("crest", crossing.features.crest, 0),
        ("cloud base", crossing.cloud.base, -1),
        ("cloud ends", crossing.cloud.end, -1),
    ):
        if level is None:
            continue
        y = place(up, level)
        words = f"{name} {quantity(level, 'height', digits, units)}"
        curves.append(Curve(f"M{frame.left:.1f} {y:.1f}H{frame.right - 2.0:.1f}", "level"))
        new, board = put(
            board,
            [
                (Label(text, x, round(y + shift, 1), anchor, "place"),)
                for text in (words, words.removeprefix("cloud "))
                for x, anchor in ends
                for shift in (-5.0, board.letter)
            ],
            needed=True,
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


def _pins(crossing: Crossing, across: Scale, up: Scale, board: Board, *, names: bool) -> tuple[tuple[Pin, ...], Board]:
    """Sites on the temperature curve, their discs set off to the side that is free."""
    spots = [
        Spot(number, place(across, air.temperature), place(up, air.elevation), air.name)
        for number, air in enumerate(crossing.lee, start=1)
    ]
    return pins(spots, board, ASIDE, names=names)


def _clear_parts(crossing: Crossing, lines: dict[str, Line]) -> dict[str, Line]:
    """The stretches outside cloud, where temperature and dew point run apart; all of a line that has none."""
    wet = cloudy(crossing)[:, 0]
    crest = crest_index(crossing)
    parts = {"rising": ~wet[: crest + 1], "falling": ~wet[crest:]}
    out = dict(lines)
    for name, (x, y) in lines.items():
        clear = parts.get(name.rpartition(" ")[2])
        if clear is not None and clear.sum() > 2:
            out[name] = x[clear], y[clear]
    return out


def _names(crossing: Crossing, lines: dict[str, Line], board: Board, layout: Layout) -> tuple[Label, ...]:
    """The name of every line beside it, at length where there is room."""
    words: dict[str, tuple[str, ...]] = {
        "warm falling": ("temperature, coming down", "temperature, down"),
        "dew falling": ("dew point, coming down", "dew point, down"),
        "warm rising": ("temperature, going up", "temperature, up"),
        "dew rising": ("dew point, going up", "dew point, up"),
        "upwind": ("incoming air, before the range", "incoming air"),
    }
    if crossing.water.condensed <= 0.0:
        words |= {"warm falling": ("temperature, up and down",), "dew falling": ("dew point, up and down",)}
        del words["warm rising"], words["dew rising"]
    for side, part in (
        ("rising", slice(0, crest_index(crossing) + 1)),
        ("falling", slice(crest_index(crossing), None)),
    ):
        if cloudy(crossing)[part, 0][1:-1].all():
            words[f"warm {side}"] = (f"{'up' if side == 'rising' else 'down'}, in cloud all the way",)
            del words[f"dew {side}"]
    labels: list[Label] = []
    for name, choices in words.items():
        kind = f"name {name.split()[0]}"
        wished = choices if layout is WIDE else choices[-1:]
        new, board = put(board, [spot for text in wished for spot in beside(*lines[name], text, kind, board)])
        labels += new
    return tuple(labels)
