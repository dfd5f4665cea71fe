"""Panels of a site through the hours: which lines they hold, their scale, how they are drawn."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.figures.axes import Layout, Scale, Tick, level_ticks, place, round_step
from orolift.report.figures.drawing import Curve, Label, area, path_data, polyline
from orolift.report.figures.many_hours import runs, spans
from orolift.report.figures.placing import Board, Box, put, text_width
from orolift.report.quantities import Kind, Units, displayed, first_unit, from_displayed
from orolift.spread.timeline import values_of

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.spread.timeline import SiteTimeline

    Array = NDArray[np.float64]

NO_RAIN = 0.05 / 3600.0
"""Sum over the hours [kg m-2 s-1] up to which rain has no panel of its own: it would read as none."""


@dataclass(frozen=True)
class Line:
    """One line of a panel: its values through the hours, and what it is called."""

    values: Array
    kind: str
    name: str


@dataclass(frozen=True)
class Band:
    """10 to 90 % of the members behind a line, (n, 2)."""

    ends: Array
    kind: str


@dataclass(frozen=True)
class PanelPlan:
    """One panel before it is drawn.

    Attributes
    ----------
    name : str
    quantity : Kind
    height : float
        Drawing units.
    lines : tuple of Line
    floor : float or None
        Value the scale starts at; None leaves room below.
    least : float
        Span [SI] of the scale at least.
    filled : str
        How the first line is filled down to the floor; empty where it is a line.
    bands : tuple of Band
        Behind the lines.
    """

    name: str
    quantity: Kind
    height: float
    lines: tuple[Line, ...]
    floor: float | None = None
    least: float = 1.0
    filled: str = ""
    bands: tuple[Band, ...] = ()


@dataclass(frozen=True)
class Panel:
    """One panel as it is drawn."""

    layout: Layout
    ticks: tuple[Tick, ...]
    curves: tuple[Curve, ...]
    labels: tuple[Label, ...]


def plans(site: SiteTimeline) -> tuple[PanelPlan, ...]:
    """The panels of a site.

    Parameters
    ----------
    site : SiteTimeline

    Returns
    -------
    tuple of PanelPlan
    """
    ranges = site.ranges

    def line(key: str, kind: str, name: str) -> Line:
        return Line(values_of(site.states, key), kind, name)

    def bands(**kinds: str) -> tuple[Band, ...]:
        """Ranges where there is an answer that they belong to."""
        if ranges is None:
            return ()
        return tuple(Band(_holding(values_of(site.states, key), ranges.full[key]), kind) for key, kind in kinds.items())

    found = [
        PanelPlan(
            "Temperature and dew point",
            "temperature",
            104.0,
            (line("temperature", "warm", "temperature"), line("dew_point", "dew", "dew point")),
            least=8.0,
            bands=bands(temperature="between warm-between", dew_point="between dew-between"),
        ),
        PanelPlan(
            "Relative humidity",
            "share",
            64.0,
            (line("relative_humidity", "dew", "humidity"),),
            floor=0.0,
            least=1.0,
            bands=bands(relative_humidity="between dew-between"),
        ),
        PanelPlan(
            "Wind at 10 m and gusts",
            "wind",
            64.0,
            (line("wind_10m", "speed", "wind"), line("gust", "speed aloft", "gusts")),
            floor=0.0,
            least=5.0,
            bands=bands(gust="between", wind_10m="between"),
        ),
        PanelPlan(
            "Warmer than the incoming air at the height of the site",
            "temperature_difference",
            64.0,
            (line("warming", "warm", "warming"),),
            least=4.0,
            bands=bands(warming="between warm-between"),
        ),
        PanelPlan(
            "Rain and snow",
            "rain_rate",
            48.0,
            (line("rain", "dew", "rain"),),
            floor=0.0,
            least=1.0 / 3600.0,
            filled="landed rain-fill",
            bands=bands(rain="between dew-between"),
        ),
    ]
    if ranges is not None:
        chance = Line(ranges.dry_wind.chance, "warm", "chance")
        name = "Chance of descending warm dry air"
        found.insert(0, PanelPlan(name, "share", 34.0, (chance,), floor=0.0, least=1.0, filled="chance-fill"))
    if np.isfinite(site.fine_fuel_code).any():
        code = Line(site.fine_fuel_code, "ink-line", "code")
        carried = () if ranges is None else (Band(_holding(site.fine_fuel_code, ranges.fine_fuel_code), "between"),)
        name = "Fine Fuel Moisture Code, carried on"
        found.append(PanelPlan(name, "plain", 56.0, (code,), least=20.0, bands=carried))
    return tuple(found)


def rains(plan: PanelPlan) -> bool:
    """Whether a panel is that of rain and has any, the upper ends of the members included.

    Parameters
    ----------
    plan : PanelPlan

    Returns
    -------
    bool
    """
    if plan.quantity != "rain_rate":
        return False
    values = [line.values for line in plan.lines] + [band.ends[:, 1] for band in plan.bands]
    return any(float(np.nansum(one)) > NO_RAIN for one in values)


def ends_of(panels: list[PanelPlan], units: Units) -> tuple[float, float]:
    """Ends of the scale of one panel over all sites, round in the shown unit.

    Parameters
    ----------
    panels : list of PanelPlan
        The panel at every site that has it.
    units : 'metric' or 'us'

    Returns
    -------
    (float, float) [SI]
    """
    first = panels[0]
    values = np.concatenate(
        [line.values for plan in panels for line in plan.lines]
        + [np.ravel(band.ends) for plan in panels for band in plan.bands]
    )
    known = values[np.isfinite(values)]
    low, high = (float(known.min()), float(known.max())) if known.size else (0.0, first.least)
    if first.floor is not None:
        low = first.floor
    short = max(first.least - (high - low), 0.0)
    low, high = (low, high + short) if first.floor is not None else (low - 0.5 * short, high + 0.5 * short)
    a, b = displayed(low, first.quantity, units), displayed(high, first.quantity, units)
    step = round_step(b - a, 3)
    down, up = np.floor(a / step + 1e-6) * step, np.ceil(b / step - 1e-6) * step
    return from_displayed(float(down), first.quantity, units), from_displayed(float(up), first.quantity, units)


def panel_of(
    plan: PanelPlan, ends: tuple[float, float], x: Array, layout: Layout, units: Units, together: int
) -> Panel:
    """A panel drawn.

    Parameters
    ----------
    plan : PanelPlan
    ends : (float, float) [SI]
        Of its scale.
    x : ndarray (n,)
        Middles of the hours, or of each so many together, in drawing units.
    layout : Layout
    units : 'metric' or 'us'
    together : int
        Hours drawn as one.

    Returns
    -------
    Panel
    """
    up = Scale(*ends, layout.bottom, layout.top)
    curves = [curve for band in plan.bands for curve in _between(x, band, up, together)]
    x = np.repeat(x, 2) if together > 1 else x
    plan = replace(plan, lines=tuple(replace(line, values=spans(line.values, together)) for line in plan.lines))
    board = Board(
        Box(layout.left, layout.top - 4.0, layout.right, layout.bottom),
        layout.letter,
        points_x=np.concatenate([_fine(x, line.values, up)[0] for line in plan.lines]),
        points_y=np.concatenate([_fine(x, line.values, up)[1] for line in plan.lines]),
    )
    name = f"{plan.name}, {first_unit(plan.quantity, units)}" if first_unit(plan.quantity, units) else plan.name
    if layout.name == "narrow" and text_width(name, layout.letter) > layout.right:
        name = f"Warming, {first_unit(plan.quantity, units)}"
    labels: list[Label] = [Label(name, 2.0, round(layout.top - 0.75 * layout.letter, 1), "start", "note")]
    for number, line in enumerate(plan.lines):
        y = np.asarray(place(up, line.values))
        for first, last in runs(np.isfinite(y)):
            here, there = x[first:last], y[first:last]
            if plan.filled and number == 0:
                curves.append(area(here, there, layout.bottom, plan.filled))
                continue
            curves.append(
                polyline(here, there, line.kind)
                if last - first > 1
                else Curve(f"M{here[0] - 1.5:.1f} {there[0]:.1f}h3", line.kind)
            )
        if len(plan.lines) > 1:
            new, board = put(board, _beside(x, y, line.name, line.kind, layout))
            labels += new
    return Panel(
        layout=layout,
        ticks=tuple(replace(tick, unit="") for tick in level_ticks(up, units, 3, layout.letter, plan.quantity)),
        curves=tuple(curves),
        labels=tuple(labels),
    )


def _holding(answer: Array, ends: Array) -> Array:
    """Ranges (n, 2) widened to the answers (n,) that lie outside, as in words and tables; NaN without an answer."""
    return np.column_stack([np.minimum(ends[:, 0], answer), np.maximum(ends[:, 1], answer)])


def _between(x: Array, band: Band, up: Scale, together: int) -> list[Curve]:
    """The area between the ends of a range, in one piece for each stretch of hours that have one."""
    low, high = (spans(end, together) for end in band.ends.T)
    if together > 1:
        low, high = low[::2], high[1::2]
    out = []
    for first, last in runs(np.isfinite(low) & np.isfinite(high)):
        along = x[first:last] if last - first > 1 else x[first] + np.array([-1.5, 1.5])
        ends = (np.asarray(place(up, end[first:last])) for end in (low, high))
        below, above = (end if last - first > 1 else np.repeat(end, 2) for end in ends)
        across = np.concatenate([along, along[::-1]])
        out.append(Curve(path_data(across, np.concatenate([above, below[::-1]]), closed=True), band.kind))
    return out


def _fine(x: Array, values: Array, up: Scale) -> tuple[Array, Array]:
    """Points along a line, close together, for the lettering to keep off."""
    known = np.isfinite(values)
    if not known.any():
        return np.empty(0), np.empty(0)
    fine = np.linspace(x[known][0], x[known][-1], 500)
    return fine, np.asarray(place(up, np.interp(fine, x[known], values[known])))


def _beside(x: Array, y: Array, name: str, kind: str, layout: Layout) -> list[tuple[Label, ...]]:
    """Places for the name of a line: near it, anywhere along it."""
    known = np.flatnonzero(np.isfinite(y))
    word = {"warm": "name warm", "dew": "name dew"}.get(kind, "name soft" if "aloft" in kind else "name ink")
    out: list[tuple[Label, ...]] = []
    for share in (0.05, 0.2, 0.35, 0.5, 0.65, 0.8, 0.95):
        if not known.size:
            break
        i = known[int(share * (known.size - 1))]
        for drop in (-0.5, 1.1, -1.0, 1.6):
            at = round(float(y[i]) + drop * layout.letter, 1)
            out.append((Label(name, round(float(x[i]), 1), at, "middle", word),))
    return out
