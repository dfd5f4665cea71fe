"""Maps of the air at the ground behind the range: one quantity in steps over shaded relief."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import Layout, round_step
from orolift.report.figures.drawing import Curve, Figure, Label, Pin, path_data
from orolift.report.figures.map_contours import contours_of, rain_layer, rain_lines
from orolift.report.figures.map_ground import Ground, ground_of
from orolift.report.figures.map_marks import corner_marks
from orolift.report.figures.pins import ASIDE, Spot, pins
from orolift.report.figures.placing import Board, Box, put
from orolift.report.figures.rain_map import NARROW_PAGE, TURNED, WIDE_PAGE
from orolift.report.figures.relief import block_means, relief
from orolift.report.quantities import Kind, Units, displayed, from_displayed, quantity
from orolift.report.story import first_sites

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing
    from orolift.sources.strips import MappedLee

    Array = NDArray[np.float64]

PICTURE_POINTS = {"wide": 260, "narrow": 150}
CELLS = 150
"""Cells along the longer side on which steps are drawn."""
STEPS = 5
"""About how many steps there are."""
CHANCES = (0.1, 0.3, 0.5, 0.7, 0.9)
"""Chances between which the steps of that map lie."""


@dataclass(frozen=True)
class LeeMapDrawing:
    """Everything a map shows, from the back to the front."""

    layout: Layout
    relief: str
    frame: Box
    width: float
    height: float
    layers: tuple[Curve, ...]
    contours: tuple[Curve, ...]
    lines: tuple[Curve, ...]
    labels: tuple[Label, ...]
    pins: tuple[Pin, ...]


@dataclass(frozen=True)
class _Shown:
    """A quantity as a map shows it.

    Attributes
    ----------
    key, title, caption : str
    values : ndarray (ny, nx)
    kind : Kind
    levels : tuple of (float, str, float)
        Limits in SI, the class of the area beyond each, and 1 where that is above, -1 where it is below.
    alt : str
        What it shows, where that is no range of values; its levels then bear no values.
    """

    key: str
    title: str
    caption: str
    values: Array
    kind: Kind
    levels: tuple[tuple[float, str, float], ...]
    alt: str = ""


def lee_map_figures(crossing: Crossing, mapped: MappedLee, units: Units) -> tuple[Figure[LeeMapDrawing], ...]:
    """The maps of the lee: warming, humidity, wind, and where a threshold is met.

    Parameters
    ----------
    crossing : Crossing
    mapped : MappedLee
    units : 'metric' or 'us'

    Returns
    -------
    tuple of Figure
    """
    warming, humidity, wind = _shown(mapped, units)
    shown = (warming, humidity, *_dry_end(mapped), wind, *_thresholds(mapped), *_chance(mapped))
    return tuple(_figure(one, crossing, mapped, units) for one in shown)


def _thresholds(mapped: MappedLee) -> tuple[_Shown, ...]:
    """Where a threshold is met; nothing where none is."""
    found = mapped.thresholds
    if found is None or not np.any(found.count > 0.0):
        return ()
    names = ", ".join(f"“{one.rule.name}”" for one in found.judged if np.any(one.met > 0.0))
    return (
        _Shown(
            "lee-thresholds",
            "Where a threshold is met",
            f"Marked: threshold met in the estimate ({names}); not a warning. Elsewhere: none met, or none judged.",
            np.where(np.isfinite(found.count), np.minimum(found.count, 1.0), np.nan),
            "plain",
            ((0.5, "lee-layer danger", 1.0),),
            f"Where a threshold is met: {names}.",
        ),
    )


def _chance(mapped: MappedLee) -> tuple[_Shown, ...]:
    """How likely it is that a threshold is met; nothing where that is nowhere more than slight."""
    spread = mapped.spread
    if mapped.thresholds is None or spread is None or spread.any_met is None:
        return ()
    if not np.any(spread.any_met > CHANCES[0]):
        return ()
    pairs = zip(mapped.thresholds.judged, spread.met, strict=True)
    names = ", ".join(f"“{one.rule.name}”" for one, chance in pairs if np.any(chance > CHANCES[0]))
    return (
        _Shown(
            "lee-chance",
            "Chance that a threshold is met",
            f"Share of {spread.members} members in which a threshold is met ({names}), in steps from 10 to 90 %; not a "
            "warning. Blank: under 10 %, or not judged.",
            spread.any_met,
            "share",
            tuple((level, "lee-layer chance", 1.0) for level in CHANCES),
        ),
    )


def _dry_end(mapped: MappedLee) -> tuple[_Shown, ...]:
    """How dry it may be; nothing without members."""
    spread = mapped.spread
    if spread is None:
        return ()
    low = spread.low["relative_humidity"]
    if not np.isfinite(low).any():
        return ()
    return (
        _Shown(
            "lee-humidity-low",
            "Dry end of the relative humidity",
            f"Relative humidity below which a tenth of {spread.members} members lie: it may well be as dry as this. "
            "The darker, the drier.",
            low,
            "share",
            tuple((level, "lee-layer warm", -1.0) for level in _dry_steps(low)),
        ),
    )


def _width(mapped: MappedLee, name: str, kind: Kind, units: Units) -> str:
    """How wide the range of members is behind the crest, in a sentence; nothing without members."""
    spread = mapped.spread
    if spread is None:
        return ""
    width = (spread.high[name] - spread.low[name])[mapped.map.behind_crest > 0.0]
    width = width[np.isfinite(width)]
    if not width.size:
        return ""
    middle, most = (float(np.percentile(width, share)) for share in (50.0, 95.0))
    if kind == "share":
        said = [f"{100.0 * value:.0f} percentage points" for value in (middle, most)]
    else:
        said = [quantity(value, kind, 1, units).split("\u00a0(")[0] for value in (middle, most)]
    return f" Range (10 to 90 %) behind the crest: up to {said[0]} wide on half of the ground, {said[1]} on nearly all."


def _shown(mapped: MappedLee, units: Units) -> tuple[_Shown, _Shown, _Shown]:
    """Warming, humidity and wind."""
    found = mapped.map
    warming, humidity, wind = found.warming, found.relative_humidity, found.wind_10m
    warm = _steps(np.nanpercentile(warming, 99.5), "temperature_difference", units)
    cool = _steps(-np.nanpercentile(warming, 0.5), "temperature_difference", units)
    strong = _steps(float(np.nanpercentile(wind, 99.8)), "wind", units) if np.isfinite(wind).any() else []
    return (
        _Shown(
            "lee-warming",
            "Warmer or colder than the incoming air at the same height",
            "Brown in steps: warmer than the incoming air at the height of the ground; blue: colder."
            + _width(mapped, "warming", "temperature_difference", units),
            warming,
            "temperature_change",
            (
                *((level, "lee-layer warm", 1.0) for level in warm),
                *((-level, "lee-layer cool", -1.0) for level in cool),
            ),
        ),
        _Shown(
            "lee-humidity",
            "Relative humidity at the ground",
            "The darker, the drier the air at the ground." + _width(mapped, "relative_humidity", "share", units),
            humidity,
            "share",
            tuple((level, "lee-layer warm", -1.0) for level in _dry_steps(humidity)),
        ),
        _Shown(
            "lee-wind",
            "Wind at 10 m across the range",
            "In steps: mean wind at 10 m across the range, of the crossing air; none in blocked air and cold pools."
            + _width(mapped, "wind_10m", "wind", units),
            wind,
            "wind",
            tuple((level, "lee-layer blow", 1.0) for level in strong),
        ),
    )


def _dry_steps(humidity: Array) -> list[float]:
    """Tenths from the lowest that is reached."""
    driest = float(np.nanpercentile(humidity, 0.5))
    return [float(level) for level in np.arange(0.1, 1.0, 0.1) if level > driest][:STEPS]


def _steps(most: float, kind: Kind, units: Units) -> list[float]:
    """Round levels up to a value."""
    shown = displayed(float(most), kind, units)
    if not shown > 0.0:
        return []
    step = round_step(shown, STEPS)
    return [from_displayed(float(level), kind, units) for level in np.arange(step, shown, step)]


def _figure(shown: _Shown, crossing: Crossing, mapped: MappedLee, units: Units) -> Figure[LeeMapDrawing]:
    low, high = (float(np.nanpercentile(shown.values, share)) for share in (1.0, 99.0))
    digits = 1 if shown.kind == "temperature_change" else 0
    north = "Grid north is up." if abs(mapped.plan.placed.north) > TURNED else "North is up."
    return Figure(
        key=shown.key,
        drawing=_drawing(shown, crossing, mapped, units, "wide"),
        narrow=_drawing(shown, crossing, mapped, units, "narrow"),
        title=shown.title,
        alt=shown.alt
        or (
            f"{shown.title}: on most of the map from {quantity(low, shown.kind, digits, units)} to "
            f"{quantity(high, shown.kind, digits, units)}."
        ),
        caption=f"{shown.caption} {north} Dotted: the crest of each strip. Numbered discs are sites.",
    )


def _drawing(shown: _Shown, crossing: Crossing, mapped: MappedLee, units: Units, name: str) -> LeeMapDrawing:
    width, most_wide, most_high, letter = WIDE_PAGE if name == "wide" else NARROW_PAGE
    grid = mapped.plan.placed.grid
    ground, height = ground_of(grid, width, most_wide, most_high)
    frame = ground.frame
    inner = Box(frame.left + 3.0, frame.top + 3.0, frame.right - 3.0, frame.bottom - 3.0)
    board = Board(inner, letter, points_x=np.empty(0), points_y=np.empty(0))
    wind = crossing.flow.crest_wind, mapped.plan.frame.turned
    marks, labels, board = corner_marks(wind, ground, board, units, wide=name == "wide")
    placed, board = pins(_spots(crossing, mapped, ground), board, ASIDE, names=name == "wide")
    layers, contours, values = _layers(shown, mapped, ground, board, units)
    return LeeMapDrawing(
        layout=Layout(name, width, height, frame.left, frame.right, frame.top, frame.bottom, letter, 0),
        relief=relief(grid, PICTURE_POINTS[name]),
        frame=frame,
        width=round(frame.right - frame.left, 1),
        height=round(frame.bottom - frame.top, 1),
        layers=layers,
        contours=contours,
        lines=(*_crest(mapped, ground), *marks),
        labels=(*labels, *values),
        pins=placed,
    )


def _coarse(values: Array, mapped: MappedLee, ground: Ground) -> tuple[Array, Array, NDArray[np.float64]]:
    """Columns, rows and values on cells coarse enough to draw, those unknown masked."""
    grid = mapped.plan.placed.grid
    step = max(1, -(-max(values.shape) // CELLS))
    x = block_means(np.tile(grid.x, (step, 1)), step)[0]
    y = block_means(np.tile(grid.y[:, np.newaxis], (1, step)), step)[:, 0]
    known = np.isfinite(values)
    share = block_means(known.astype(np.float64), step)
    total = block_means(np.where(known, values, 0.0), step)
    means = np.divide(total, share, out=np.full(share.shape, np.nan), where=share >= 0.5)
    return ground.across(x), ground.down(y), np.ma.masked_invalid(means)


def _layers(
    shown: _Shown, mapped: MappedLee, ground: Ground, board: Board, units: Units
) -> tuple[tuple[Curve, ...], tuple[Curve, ...], tuple[Label, ...]]:
    """Areas beyond each level, the lines round them, and their values where there is room."""
    x, y, values = _coarse(shown.values, mapped, ground)
    above, below = contours_of(x, y, values), contours_of(x, y, -values)
    layers: list[Curve] = []
    contours: list[Curve] = []
    labels: tuple[Label, ...] = ()
    for level, kind, sign in shown.levels:
        made, at = (above, level) if sign > 0.0 else (below, -level)
        area = rain_layer(made, at, kind)
        if area is None:
            continue
        layers.append(area)
        lines = rain_lines(made, at)
        contours += [Curve(path_data(*line), kind.replace("layer", "contour")) for line in lines]
        if shown.alt:
            continue
        text = quantity(level, shown.kind, 0 if abs(displayed(level, shown.kind, units)) % 1.0 < 1e-6 else 1, units)
        text = text.split("\u00a0(")[0]
        spots = [
            (Label(text, round(float(a[i]), 1), round(float(b[i]) + 0.3 * board.letter, 1), "middle", "lee-value"),)
            for a, b in lines[:3]
            for i in (a.size // 2, a.size // 4, 3 * a.size // 4)
        ]
        new, board = put(board, spots)
        labels += new
    return tuple(layers), tuple(contours), labels


def _crest(mapped: MappedLee, ground: Ground) -> tuple[Curve, ...]:
    """The crest: no distance behind it."""
    made = contours_of(*_coarse(mapped.map.behind_crest, mapped, ground))
    return tuple(Curve(path_data(*line), "map-divide") for line in rain_lines(made, 0.0))


def _spots(crossing: Crossing, mapped: MappedLee, ground: Ground) -> list[Spot]:
    """The sites that lie in the frame."""
    frame, out = ground.frame, []
    for air in first_sites(crossing).lee:
        if not 0 < air.number <= len(mapped.sites):
            continue
        x, y = mapped.sites[air.number - 1]
        at_x, at_y = float(ground.across(np.array(x))), float(ground.down(np.array(y)))
        if frame.left < at_x < frame.right and frame.top < at_y < frame.bottom:
            out.append(Spot(air.number, at_x, at_y, air.name))
    return out
