"""The upwind column: temperature, dew point, wind across the range and stability against height."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated, wind_component
from orolift.air.humidity import dew_point_from_mixing_ratio
from orolift.air.temperature import virtual_potential_temperature
from orolift.flow.stability import dry_n_squared
from orolift.report.figures.axes import Layout, Scale, Tick, level_ticks, place, round_step, ticks
from orolift.report.figures.cloud import runs
from orolift.report.figures.drawing import Anchor, Curve, Figure, Label, path_data, polyline
from orolift.report.figures.low_air import hatch
from orolift.report.figures.placing import Board, Box, beside, put, text_width
from orolift.report.quantities import Kind, Units, displayed, first_number, first_unit, from_displayed, quantity

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.result import Crossing

    Array = NDArray[np.float64]
    Line = tuple[Array, Array]

WIDE = Layout("wide", 960.0, 470.0, 56.0, 934.0, 34.0, 428.0, 14.0, 6)
NARROW = Layout("narrow", 344.0, 430.0, 42.0, 328.0, 34.0, 394.0, 12.5, 3)
PARTS = {
    "wide": ((56.0, 556.0), (592.0, 762.0), (798.0, 934.0)),
    "narrow": ((42.0, 188.0), (204.0, 264.0), (278.0, 328.0)),
}
"""Left and right edges of the panels: temperature, wind, stability."""
ABOVE_CREST = 3000.0
"""Height above the crest that is shown [m] (design choice)."""
LEAST_TOP = 5000.0
"""The column is shown at least up to here [m above sea level]."""
LEAST_VAPOUR = 1e-8
"""Vapour [kg per kg] below which a dew point is that of this much."""
DRIEST = 35.0
"""Dew points further below the coldest air shown than this [K] run out of the panel (design choice)."""
EVEN = 1.15
"""A column whose strongest stability is below this many times its median is evenly stable (a judgement)."""
STEP = 100.0
"""Depth of the layers whose stability is shown [m] (design choice)."""
KINDS = {
    "measured": "known",
    "model": "modelled",
    "between stations": "between",
    "surface report blended in": "blended",
    "station": "known",
    "lapse rate": "assumed",
    "standard lapse above the data": "standard",
    "standard lapse below the data": "standard",
}
"""Line style of each origin of a level: the class the style sheet knows."""
SHORT = {"surface report blended in": "blended", "standard lapse above the data": "standard lapse"}
"""Names for narrow screens."""


@dataclass(frozen=True)
class Dot:
    """A station: a point on a line."""

    x: float
    y: float


@dataclass(frozen=True)
class ColumnDrawing:
    """Everything the figure shows, from the back to the front."""

    layout: Layout
    height_ticks: tuple[Tick, ...]
    foot_ticks: tuple[Tick, ...]
    ground: Curve
    stagnant: tuple[Curve, ...]
    levels: tuple[Curve, ...]
    frames: tuple[Curve, ...]
    stability: Curve
    origins: tuple[Curve, ...]
    curves: tuple[Curve, ...]
    dots: tuple[Dot, ...]
    labels: tuple[Label, ...]


@dataclass(frozen=True, eq=False)
class Profile:
    """The part of the column that is shown.

    Attributes
    ----------
    height, temperature, dew_point, wind : ndarray (n,)
        At the levels of the column and at the ends of what is shown; wind across the range.
    origin : tuple of str (n - 1,)
        Where each stretch between them comes from.
    stations : tuple of int
        Levels that are stations.
    layers, stability : ndarray (m + 1,), (m,)
        Edges of layers [m above sea level], and N in them [s-1]; 0 where unstable.
    """

    height: Array
    temperature: Array
    dew_point: Array
    wind: Array
    origin: tuple[str, ...]
    stations: tuple[int, ...]
    layers: Array
    stability: Array


def column(crossing: Crossing, stagnant_top: float | None, units: Units) -> Figure[ColumnDrawing]:
    """The incoming air against height.

    Parameters
    ----------
    crossing : Crossing
    stagnant_top : float or None [m above sea level]
        Top of a stagnant layer at the ground that is kept out of the inflow.
    units : 'metric' or 'us'

    Returns
    -------
    Figure of ColumnDrawing
    """
    shown = profile(crossing)
    message = _message(crossing, shown, stagnant_top, units)
    return Figure(
        key="column",
        drawing=_drawing(crossing, shown, stagnant_top, units, WIDE),
        narrow=_drawing(crossing, shown, stagnant_top, units, NARROW),
        title="The incoming air against height",
        alt=f"{_state(crossing, shown, units)} {message}",
        caption=f"{message} Ochre: temperature; blue: dew point; middle: wind across the range; right: buoyancy "
        "frequency N, large where the air is stable. The style of the lines, repeated and named at the left edge, says "
        "where each part comes from.",
    )


def profile(crossing: Crossing) -> Profile:
    """The part of the incoming air that is shown."""
    air = crossing.incoming
    ground = float(air.height[0])
    top = min(max(crossing.features.crest + ABOVE_CREST, LEAST_TOP), float(air.height[-1]))
    inside = air.height < top
    height = np.append(air.height[inside], top)
    at = interpolated(air, height)
    halves = np.linspace(ground, top, 2 * max(int((top - ground) / STEP), 2) + 1)
    layered = interpolated(air, halves)
    theta = virtual_potential_temperature(layered.pressure, layered.temperature, layered.vapour)
    squared = dry_n_squared(halves, theta)[1::2]  # in the middle of each layer, from its two edges
    return Profile(
        height=height,
        temperature=at.temperature,
        dew_point=dew_point_from_mixing_ratio(at.pressure, np.maximum(at.vapour, LEAST_VAPOUR)),
        wind=wind_component(at, crossing.flow.normal),
        origin=_stretches(air, height.size),
        stations=tuple(i for i in range(height.size - 1) if air.origin and air.origin[i] == "station"),
        layers=halves[::2],
        stability=np.sqrt(np.maximum(squared, 0.0)),
    )


def _stretches(air: IncomingAir, count: int) -> tuple[str, ...]:
    """Origin of each stretch between levels: that of its upper end, or of its lower one under a station."""
    origin = air.origin or ("measured",) * air.height.size
    out = []
    for lower, upper in pairwise(origin[:count]):
        both = lower == upper == "station"
        out.append("between stations" if both else lower if upper == "station" else upper)
    return tuple(out)


def grouped(origin: tuple[str, ...]) -> list[tuple[str, int, int]]:
    """Stretches of one origin: its name, first and last level.

    Examples
    --------
    >>> grouped(("measured", "measured", "lapse rate"))
    [('measured', 0, 2), ('lapse rate', 2, 3)]
    """
    out: list[tuple[str, int, int]] = []
    for i, name in enumerate(origin):
        if out and out[-1][0] == name:
            out[-1] = (name, out[-1][1], i + 1)
        else:
            out.append((name, i, i + 1))
    return out


def _state(crossing: Crossing, shown: Profile, units: Units) -> str:
    """Ground and crest in numbers."""
    out = []
    for name, level in (("the ground of the column", shown.height[0]), ("crest height", crossing.features.crest)):
        warm, dew, wind = (
            float(np.interp(level, shown.height, v)) for v in (shown.temperature, shown.dew_point, shown.wind)
        )
        out.append(
            f"At {name}, {quantity(float(level), 'height', 0, units)}: {quantity(warm, 'temperature', 1, units)}, "
            f"dew point {quantity(dew, 'temperature', 1, units)}, "
            f"wind across the range {quantity(wind, 'wind', 0, units)}."
        )
    return " ".join(out)


def _message(crossing: Crossing, shown: Profile, stagnant_top: float | None, units: Units) -> str:
    """Where the column is stable, what of it is kept out, and where it comes from."""
    most = int(np.argmax(shown.stability))
    low, high = (float(shown.layers[i]) for i in (most, most + 1))
    warmer = float(np.diff(np.interp([low, high], shown.height, shown.temperature))[0]) > 0.0
    middle = quantity(0.5 * (low + high), "height", -1, units)
    where = "below" if high <= crossing.features.crest else "above"
    if high > crossing.features.crest > low:
        where = "at"
    n = quantity(float(shown.stability[most]), "stability", 3, units)
    even = float(shown.stability.max()) < EVEN * float(np.median(shown.stability))
    parts = [
        f"About equally stable throughout (N {n})."
        if even
        else f"Most stable about {middle}, {where} the crest (N {n}{', an inversion' if warmer else ''})."
    ]
    if stagnant_top is not None:
        parts.append(
            f"The hatched air below {quantity(stagnant_top, 'height', -1, units)} is stagnant: no inflow of the range."
        )
    groups = grouped(shown.origin)
    said = []
    for name, first, last in groups[:4]:
        ends = [quantity(float(shown.height[i]), "height", -1, units) for i in (first, last)]
        said.append(f"{name} from {ends[0]} to {ends[1]}")
    more = f", and {len(groups) - 4} more stretches" if len(groups) > 4 else ""
    parts.append(f"Where it comes from: {'; '.join(said)}{more}.")
    return " ".join(parts)


def _drawing(
    crossing: Crossing, shown: Profile, stagnant_top: float | None, units: Units, layout: Layout
) -> ColumnDrawing:
    edges = PARTS[layout.name]
    bottom = min(crossing.features.base, float(shown.height[0]))
    span = float(shown.height[-1]) - bottom
    up = Scale(bottom - 0.025 * span, float(shown.height[-1]), layout.bottom, layout.top)
    across, wind, frequency = _scales(shown, edges, units)
    y = np.asarray(place(up, shown.height))
    lines = {
        "warm": (np.asarray(place(across, shown.temperature)), y),
        "dew": (np.asarray(place(across, np.maximum(shown.dew_point, across.low))), y),
    }
    blowing = np.asarray(place(wind, shown.wind)), y
    origins, origin_places = _origins(shown, y, edges[0][0] + 5.0, layout)
    levels = {"crest": crossing.features.crest, "base": crossing.features.base}
    level_lines = [
        Curve(f"M{left} {place(up, level):.1f}H{right}", "level") for level in levels.values() for left, right in edges
    ]
    ground_y = float(y[0])
    return ColumnDrawing(
        layout=layout,
        height_ticks=level_ticks(up, units, 6, layout.letter),
        foot_ticks=(
            *ticks(across, "temperature", units, layout.ticks),
            *_ticks(wind, "wind", units, 3 if layout is WIDE else 1, 0),
            *_ticks(frequency, "stability", units, 2 if layout is WIDE else 1, 2)[1:],
        ),
        ground=Curve(f"M{layout.left} {ground_y:.1f}H{edges[2][1]}V{layout.bottom}H{layout.left}Z", "ground"),
        stagnant=_stagnant(stagnant_top, up, ground_y, edges),
        levels=tuple(level_lines),
        frames=(
            *(Curve(f"M{left} {layout.top}V{layout.bottom}", "frame") for left, _ in edges[1:]),
            Curve(f"M{place(wind, 0.0):.1f} {layout.top}V{layout.bottom}", "zero"),
        ),
        stability=_bars(shown, frequency, up),
        origins=origins,
        curves=(*_styled(shown, lines, across), *_styled(shown, {"speed": blowing}, wind)),
        dots=tuple(
            Dot(round(float(x[i]), 1), round(float(y[i]), 1)) for x, _ in lines.values() for i in shown.stations
        ),
        labels=_labels(lines, levels, stagnant_top, up, units, layout, edges, origin_places),
    )


def _scales(shown: Profile, edges: tuple[tuple[float, float], ...], units: Units) -> tuple[Scale, Scale, Scale]:
    """Of temperature, wind and stability."""
    cold, warm = float(shown.temperature.min()), float(max(shown.temperature.max(), shown.dew_point.max()))
    low = max(float(shown.dew_point.min()), cold - DRIEST)
    low = min(low, cold)
    room = max(warm - low, 5.0)
    step = from_displayed(5.0, "wind", units)
    least, most = min(0.0, float(shown.wind.min())), max(float(shown.wind.max()), step)
    peak = max(float(shown.stability.max()) * 1.05, 0.02)
    return (
        Scale(low - 0.22 * room, warm + 0.06 * room, *edges[0]),
        Scale(step * float(np.floor(least / step)), step * float(np.ceil(1.02 * most / step)), *edges[1]),
        Scale(0.0, peak, *edges[2]),
    )


def _ticks(scale: Scale, kind: Kind, units: Units, about: int, digits: int) -> tuple[Tick, ...]:
    """Round values under a slim panel, without the unit, which stands in its title."""
    low, high = (displayed(value, kind, units) for value in (scale.low, scale.high))
    step = round_step(high - low, about)
    counts = range(int(np.ceil(low / step - 1e-6)), int(np.floor(high / step + 1e-6)) + 1)
    values = [from_displayed(count * step, kind, units) for count in counts]
    return tuple(Tick(round(place(scale, value), 1), first_number(value, kind, digits, units)) for value in values)


def _styled(shown: Profile, lines: dict[str, Line], scale: Scale) -> tuple[Curve, ...]:
    """Lines in the style of their origin."""
    out = []
    for name, (x, y) in lines.items():
        inside = x > scale.start + 0.05 if name == "dew" else np.ones(x.size, dtype=bool)
        for origin, first, last in grouped(shown.origin):
            for start, end in runs(inside[first : last + 1]):
                part = slice(first + start, first + end + 1)
                if end > start:
                    out.append(polyline(x[part], y[part], f"{name} {KINDS[origin]}"))
    return tuple(out)


def _bars(shown: Profile, scale: Scale, up: Scale) -> Curve:
    """Stability of each layer, as one stepped area."""
    x = np.repeat(np.asarray(place(scale, shown.stability)), 2)
    y = np.repeat(np.asarray(place(up, shown.layers)), 2)[1:-1]
    ends = np.array([scale.start])
    return Curve(path_data(np.concatenate([ends, x, ends]), np.concatenate([y[:1], y, y[-1:]]), closed=True), "stable")


def _stagnant(top: float | None, up: Scale, ground: float, edges: tuple[tuple[float, float], ...]) -> tuple[Curve, ...]:
    """Area and hatch of the air at the ground that is kept out."""
    if top is None:
        return ()
    over = float(place(up, top))
    out = []
    for left, right in edges:
        x = np.array([left, right])
        out.append(Curve(f"M{left} {over:.1f}H{right}V{ground:.1f}H{left}Z", "blocked body"))
        out.append(Curve(hatch(x, np.full(2, over), np.full(2, ground), 0.8, 9.0), "blocked hatch"))
    return tuple(out)


def _origins(
    shown: Profile, y: Array, x: float, layout: Layout
) -> tuple[tuple[Curve, ...], list[list[tuple[Label, ...]]]]:
    """A line at the left edge in the style of each stretch, and places for its name."""
    curves: list[Curve] = []
    places: list[list[tuple[Label, ...]]] = []
    named: set[str] = set()
    for name, first, last in grouped(shown.origin):
        low, high = float(y[first]), float(y[last])
        curves.append(Curve(f"M{x} {low - 1.0:.1f}V{high + 1.0:.1f}", f"from {KINDS[name]}"))
        if name in named:
            continue
        named.add(name)
        words = [name] if layout is WIDE else [SHORT.get(name, name)]
        places.append(
            [
                (
                    Label(
                        text,
                        round(x + 8.0, 1),
                        round(low + share * (high - low) + 0.3 * layout.letter, 1),
                        "start",
                        "name soft",
                    ),
                )
                for text in words
                for share in (0.5, 0.6, 0.4, 0.7, 0.3, 0.8, 0.2, 0.9, 0.1, 1.0, 0.0)
            ]
        )
    return tuple(curves), places


def _labels(
    lines: dict[str, Line],
    levels: dict[str, float],
    stagnant_top: float | None,
    up: Scale,
    units: Units,
    layout: Layout,
    edges: tuple[tuple[float, float], ...],
    origin_places: list[list[tuple[Label, ...]]],
) -> tuple[Label, ...]:
    """Names of panels, lines, levels and stretches."""
    letter, right = layout.letter, edges[0][1]
    dense = [_dense(line) for line in lines.values()]
    board = Board(
        Box(layout.left, layout.top, right, layout.bottom),
        letter,
        points_x=np.concatenate([x for x, _ in dense]),
        points_y=np.concatenate([y for _, y in dense]),
    )
    out: list[Label] = list(_titles(layout, edges, units))
    groups: list[list[tuple[Label, ...]]] = []
    spots: tuple[tuple[float, Anchor], ...] = ((right - 4.0, "end"), (layout.left + 12.0, "start"))
    for name, level in levels.items():
        y = float(place(up, level))
        words = f"{name} {quantity(level, 'height', 0, units)}"
        groups.append(
            [
                (Label(text, x, round(y + d, 1), a, "place"),)
                for text in (words, name)
                for d in (-5.0, letter, -6.0 - letter, 2.2 * letter)
                for x, a in spots
            ]
        )
    if stagnant_top is not None:
        y = float(place(up, stagnant_top))
        text = "stagnant, kept out" if layout is WIDE else "stagnant"
        drops = (-5.0, -5.0 - 1.3 * letter, 1.1 * letter)
        groups.append([(Label(text, x, round(y + d, 1), a, "name soft"),) for d in drops for x, a in spots])
    groups += origin_places
    for group in groups:
        new, board = put(board, group)
        out += new
    for kind, text in (("warm", "temperature"), ("dew", "dew point")):
        new, board = put(board, beside(*lines[kind], text, f"name {kind}", board))
        out += new
    return tuple(out)


def _titles(layout: Layout, edges: tuple[tuple[float, float], ...], units: Units) -> tuple[Label, ...]:
    """What the slim panels show, over them."""
    wind = first_unit("wind", units)
    wide = layout is WIDE
    words = (f"wind across, {wind}", "N, per second") if wide else (f"wind, {wind}", "N, s⁻¹")
    y = round(layout.top - 0.8 * layout.letter, 1)
    return tuple(
        Label(text, left if wide else round(max(left, 0.0), 1), y, "start", "note")
        for text, (left, _) in zip(words, edges[1:], strict=True)
        if text_width(text, layout.letter) < layout.width - left
    )


def _dense(line: Line) -> Line:
    """Points along a line every few drawing units, for labels to keep clear of."""
    x, y = line
    length = np.concatenate([[0.0], np.cumsum(np.hypot(np.diff(x), np.diff(y)))])
    at = np.linspace(0.0, length[-1], max(int(length[-1] / 3.0), 2))
    return np.interp(at, length, x), np.interp(at, length, y)
