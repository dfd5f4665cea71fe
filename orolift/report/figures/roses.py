"""A site under every wind direction: four roses beside each other, north up, bars to where the wind comes from."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import Layout, round_step
from orolift.report.figures.drawing import Curve, Figure, Label
from orolift.report.quantities import Amount, Kind, Units, displayed, from_displayed, quantity
from orolift.report.spans import ranged
from orolift.report.words import plain
from orolift.spread.bearings import NO_RAIN, square_enough
from orolift.spread.state_ranges import range_at
from orolift.spread.timeline import values_of

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.spread.bearings import Bearings, SiteBearings
    from orolift.spread.site_state import SiteState

    Array = NDArray[np.float64]

WIDE = Layout("wide", 960.0, 308.0, 0.0, 960.0, 40.0, 250.0, 14.0, 4)
NARROW = Layout("narrow", 344.0, 488.0, 0.0, 344.0, 36.0, 440.0, 12.5, 2)
FILL = 0.86
"""Share of its sector that a bar fills."""
RANGES_SAID = (
    " The thin line along a bar is the range of the middle eight tenths of the members; of one that reaches across "
    "zero, the part on the side of the bar. Pale bars have none."
)
"""What the caption says of ranges, where there are any."""
LEAST_SPAN = {"temperature_change": 1.0, "share": 1.0, "rain_rate": 1.0 / 3600.0, "height": 100.0}
"""Value [SI] of the outer ring at least."""


@dataclass(frozen=True)
class RosePlan:
    """One rose before it is drawn: what it shows, and which end of it is named."""

    name: str
    key: str
    quantity: Kind
    digits: int
    kind: str
    most: str
    lowest: bool = False


PLANS = (
    RosePlan("Warming", "warming", "temperature_change", 1, "warms", "most"),
    RosePlan("Relative humidity", "relative_humidity", "share", 0, "moist", "driest", lowest=True),
    RosePlan("Rain and snow", "rain", "rain_rate", 1, "wets", "most"),
    RosePlan("Highest ground before", "shelter_height", "height", 0, "ground", "highest"),
)


@dataclass(frozen=True)
class Rose:
    """One rose as it is drawn, from the back to the front."""

    rings: tuple[Curve, ...]
    bars: tuple[Curve, ...]
    ranges: tuple[Curve, ...]
    marks: tuple[Curve, ...]
    labels: tuple[Label, ...]


@dataclass(frozen=True)
class RosesDrawing:
    """Everything the figure shows."""

    layout: Layout
    roses: tuple[Rose, ...]


def roses_figure(bearings: Bearings, number: int, units: Units) -> Figure[RosesDrawing]:
    """A site under every wind direction.

    Parameters
    ----------
    bearings : Bearings
    number : int
        Of the site.
    units : 'metric' or 'us'

    Returns
    -------
    Figure of RosesDrawing
        Scales are those of all sites together, so that sites can be compared.
    """
    site = bearings.sites[number]
    return Figure(
        key=f"roses-{number + 1}",
        drawing=_drawing(bearings, number, units, WIDE),
        narrow=_drawing(bearings, number, units, NARROW),
        title=f"{site.name} under every wind direction",
        alt=_alt(site, bearings, units),
        caption=(
            "Each bar points to where the wind comes from; north is up. Strokes on the rim: no air crosses from there; "
            "dots: the map does not reach. Pale: the air runs more along the range than across it, more than 45° off, "
            "and what it does then is not to be trusted; no such direction is named. The arrow is the wind of the "
            f"case. All sites have the same scales.{RANGES_SAID if site.agreement is not None else ''}"
        ),
    )


def _alt(site: SiteBearings, bearings: Bearings, units: Units) -> str:
    out = []
    for plan in PLANS:
        values = np.where(square_enough(site.states), values_of(site.states, plan.key), np.nan)
        if not np.isfinite(values).any():
            continue
        i = int(np.nanargmin(values) if plan.lowest else np.nanargmax(values))
        ends = range_at(site.states[i], plan.key)
        if plan.quantity == "rain_rate" and max(values[i], *(ends or (0.0,))) < NO_RAIN:
            out.append(f"{plan.name}: none.")
            continue
        said = plain(ranged(Amount(float(values[i]), plan.quantity, plan.digits), ends), units)
        out.append(f"{plan.name}: {plan.most} {said} with wind from {_degrees(bearings.wind_from[i])}.")
    return " ".join(out) or "No air crosses to this site from any direction."


def _degrees(bearing: float) -> str:
    return f"{math.degrees(bearing):.0f}°"


def _drawing(bearings: Bearings, number: int, units: Units, layout: Layout) -> RosesDrawing:
    columns = layout.ticks
    width = (layout.right - layout.left) / columns
    rows = math.ceil(len(PLANS) / columns)
    height = (layout.height - layout.top) / rows
    radius = min(0.5 * width - 30.0, 0.5 * (height - 5.0 * layout.letter) - 12.0)
    roses = []
    for i, plan in enumerate(PLANS):
        x = layout.left + (i % columns + 0.5) * width
        y = layout.top + (i // columns) * height + radius + 14.0
        full = _full(bearings, plan, units)
        roses.append(
            _rose(bearings, bearings.sites[number], plan, full, (round(x, 1), round(y, 1)), radius, units, layout)
        )
    return RosesDrawing(layout, tuple(roses))


def _full(bearings: Bearings, plan: RosePlan, units: Units) -> float:
    """Value of the outer ring: round in the shown unit, over all sites."""
    if plan.quantity == "share":
        return 1.0
    values = np.concatenate(
        [np.append(np.abs(values_of(site.states, plan.key)), _outer_ends(site, plan)) for site in bearings.sites]
    )
    most = max(float(np.nanmax(values)) if np.isfinite(values).any() else 0.0, LEAST_SPAN[plan.quantity])
    shown = displayed(most, plan.quantity, units)
    step = round_step(shown, 4)
    return float(from_displayed(step * math.ceil(shown / step - 1e-6), plan.quantity, units))


def _outer_ends(site: SiteBearings, plan: RosePlan) -> list[float]:
    """Outer ends of all ranges of a site that are drawn."""
    square = square_enough(site.states)
    ends = [_ends(state, plan) for state, counts in zip(site.states, square, strict=True) if counts]
    return [one[1] for one in ends if one is not None]


def _ends(state: SiteState, plan: RosePlan) -> tuple[float, float] | None:
    """Range of a bar as distances from the middle, widened to the bar; None without."""
    value, found = getattr(state, plan.key), range_at(state, plan.key)
    if value is None or found is None:
        return None
    low, high = found if value >= 0.0 else (-found[1], -found[0])
    return max(min(low, abs(value)), 0.0), max(high, abs(value))


def _point(middle: tuple[float, float], radius: float, bearing: float) -> tuple[float, float]:
    return middle[0] + radius * math.sin(bearing), middle[1] - radius * math.cos(bearing)


def _rose(
    bearings: Bearings,
    site: SiteBearings,
    plan: RosePlan,
    full: float,
    middle: tuple[float, float],
    radius: float,
    units: Units,
    layout: Layout,
) -> Rose:
    values = values_of(site.states, plan.key)
    x, y = middle
    rings = tuple(_ring(middle, share * radius) for share in (0.5, 1.0))
    bars, ranges, marks = [], [], []
    half = 0.5 * FILL * bearings.step
    square = square_enough(site.states)
    for bearing, value, state, counts in zip(
        bearings.wind_from.tolist(), values.tolist(), site.states, square, strict=True
    ):
        if math.isfinite(value):
            kind = "cools" if value < 0.0 and plan.kind == "warms" else plan.kind
            kind = kind if counts else f"{kind} oblique"
            ends = _ends(state, plan) if counts else None
            kind = kind if ends is None else f"{kind} ranged"
            bars.append(Curve(_wedge(middle, radius * min(abs(value) / full, 1.0), bearing, half), kind))
            if ends is not None:
                low, high = (_point(middle, radius * min(end / full, 1.0), bearing) for end in ends)
                ranges.append(Curve(f"M{low[0]:.1f} {low[1]:.1f}L{high[0]:.1f} {high[1]:.1f}", "range-line"))
        elif state.status == "no crossing":
            marks.append(Curve(_arc(middle, radius, bearing, half), "rim"))
        else:
            a, b = _point(middle, radius, bearing)
            marks.append(Curve(f"M{a:.1f} {b:.1f}h0.1", "rim-dot"))
    marks.append(_arrow(middle, radius, bearings.given))
    letter = layout.letter
    labels = [
        Label(plan.name, x, round(y - radius - 1.6 * letter, 1), "middle", "title"),
        Label("N", x, round(y - radius - 4.0, 1), "middle", "note"),
        Label("S", x, round(y + radius + letter, 1), "middle", "note"),
        Label("E", round(x + radius + 5.0, 1), round(y + 0.35 * letter, 1), "start", "note"),
        Label("W", round(x - radius - 5.0, 1), round(y + 0.35 * letter, 1), "end", "note"),
    ]
    whole: Kind = "temperature_difference" if plan.quantity == "temperature_change" else plan.quantity
    rim = f"rim {quantity(full, whole, _digits(full, whole, units), units)}"
    counted = np.where(square, values, np.nan)
    peak = _peak(counted, bearings, plan, units, short=layout.name == "narrow")
    labels += [
        Label(peak, x, round(y + radius + 2.4 * letter, 1), "middle", "name ink"),
        Label(rim, x, round(y + radius + 3.6 * letter, 1), "middle", "note"),
    ]
    return Rose(rings, tuple(bars), tuple(ranges), tuple(marks), tuple(labels))


def _digits(value: float, kind: Kind, units: Units) -> int:
    """Decimals of the metric form that show a round value whole."""
    shown = displayed(value, kind, units)
    return 0 if abs(shown - round(shown)) < 1e-6 else 1


def _peak(values: Array, bearings: Bearings, plan: RosePlan, units: Units, *, short: bool) -> str:
    if not np.isfinite(values).any():
        return "no air crosses"
    i = int(np.nanargmin(values) if plan.lowest else np.nanargmax(values))
    if plan.quantity == "rain_rate" and values[i] < NO_RAIN:
        return "no rain"
    said = quantity(float(values[i]), plan.quantity, plan.digits, units)
    if short:
        return f"{said}, from {_degrees(bearings.wind_from[i])}"
    return f"{plan.most} {said}, from {_degrees(bearings.wind_from[i])}"


def _ring(middle: tuple[float, float], radius: float) -> Curve:
    x, y = middle
    half = f"a{radius:.1f} {radius:.1f} 0 1 0"
    return Curve(f"M{x - radius:.1f} {y}{half} {2.0 * radius:.1f} 0{half} {-2.0 * radius:.1f} 0", "grid")


def _wedge(middle: tuple[float, float], radius: float, bearing: float, half: float) -> str:
    (ax, ay), (bx, by) = (_point(middle, radius, bearing + side * half) for side in (-1.0, 1.0))
    return f"M{middle[0]} {middle[1]}L{ax:.1f} {ay:.1f}A{radius:.1f} {radius:.1f} 0 0 1 {bx:.1f} {by:.1f}Z"


def _arc(middle: tuple[float, float], radius: float, bearing: float, half: float) -> str:
    (ax, ay), (bx, by) = (_point(middle, radius, bearing + side * half) for side in (-1.0, 1.0))
    return f"M{ax:.1f} {ay:.1f}A{radius:.1f} {radius:.1f} 0 0 1 {bx:.1f} {by:.1f}"


def _arrow(middle: tuple[float, float], radius: float, bearing: float) -> Curve:
    """A small triangle outside the rim that points inward, along the wind."""
    tip = _point(middle, radius + 2.0, bearing)
    a, b = (_point(middle, radius + 12.0, bearing + side * 5.0 / radius) for side in (-1.0, 1.0))
    return Curve(f"M{tip[0]:.1f} {tip[1]:.1f}L{a[0]:.1f} {a[1]:.1f}L{b[0]:.1f} {b[1]:.1f}Z", "line-head")
