"""A case and a series to the hours that are to be worked out, one by one."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.ground_layer import ground_layer
from orolift.air.wind_layer import barrier_wind
from orolift.crossing.pool import Lee
from orolift.crossing.result import When
from orolift.errors import OroliftError
from orolift.sources.inputs import read_inputs, situation_of
from orolift.sources.own_lines import own_lines, sites_of
from orolift.sources.series import read_series
from orolift.sources.series_air import reading_of_row, refuse_unfit, table_of_row
from orolift.sources.spread_model import drawn_of, uncertainty_of
from orolift.spread.hours import HourTask, MapGround, OneLine
from orolift.spread.site_state import SiteState
from orolift.spread.spread import USUAL_MEMBERS
from orolift.terrain.features import features

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator
    from pathlib import Path

    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.result import Site
    from orolift.crossing.situation import Situation
    from orolift.sources.incoming import IncomingReading
    from orolift.sources.inputs import Inputs
    from orolift.sources.series import Series
    from orolift.spread.spread import Drawn
    from orolift.terrain.features import Features

    Array = NDArray[np.float64]

MAP_CELLS = 192
"""Cells of the map of rain along its longer side; one map an hour, and means over catchments need no finer one."""
USUAL_HOURS = 48
"""Hours up to which a series has members where nobody says it: two days take a minute of processor; a judgement."""
TURN = math.radians(5.0)
"""Lines over a raster are cut at multiples of this; the wind off the line counts by its component, so that at most
0.1 % of it is lost."""


@dataclass(frozen=True, eq=False)
class HourSetup:
    """What all hours of a series share.

    Attributes
    ----------
    inputs : Inputs
        Of the case.
    series : Series
    situation : Situation
        Of the case, without the ends; the line of a hand-entered ridge is that of every hour.
    shape : Features
        Of the case's line.
    sites : tuple of Site
        Of the case, else the lee foot.
    own_line : callable or None
        With a raster: the line of a site, by its number, along a bearing [rad]; its first site is that site.
    places : ndarray (ns, 2) [m]
        Of the sites, true east and true north of the origin of the map; empty for a ridge.
    observed : (float, float) or None [m]
        Where the incoming air is observed, likewise.
    ground : MapGround or None
        Where the case has catchments.
    wind_error : float [1]
        Standard deviation of the wind, as a share of it: as [spread] says, else by the kind of the series.
    notes : tuple of str
    drawn : Drawn or None
        Members of every hour, with the uncertainty of the case; that of an hour follows from its own row. None for
        none; see `with_members`.
    """

    inputs: Inputs
    series: Series
    situation: Situation
    shape: Features
    sites: tuple[Site, ...]
    own_line: Callable[[int, float], Situation] | None
    places: Array
    observed: tuple[float, float] | None
    ground: MapGround | None
    wind_error: float
    notes: tuple[str, ...]
    drawn: Drawn | None = None


def read_hours(case: str | Path, series: str | Path) -> HourSetup:
    """Case and series, read and checked.

    Parameters
    ----------
    case, series : str or Path

    Returns
    -------
    HourSetup

    Raises
    ------
    OroliftError
        If either cannot be read, the two do not fit, or no hour of the series can be used.
    """
    return hours_over(read_inputs(case), read_series(series))


def hours_over(inputs: Inputs, rows: Series) -> HourSetup:
    """The hours of a series over the terrain of a case, both read already.

    Parameters
    ----------
    inputs : Inputs
    rows : Series

    Returns
    -------
    HourSetup

    Raises
    ------
    OroliftError
        As `read_hours`.
    """
    notes = refuse_unfit(inputs, rows)
    situation = replace(situation_of(inputs), in_full=False)
    shape = features(inputs.transect, inputs.sites[0].distance if inputs.sites else None)
    sites = sites_of(inputs)
    own_line, places, observed = None, np.empty((0, 2)), None
    if inputs.case.terrain.elevation_file is not None:
        own_line, places, observed = own_lines(inputs, sites)
        notes += ("Every site has a line of its own, along the wind of each hour, cut at multiples of 5 degrees.",)
    if inputs.fire.previous_code is None:
        notes += ("The Fine Fuel Moisture Code starts from 85: [fire] gives no previous_fine_fuel_code.",)
    setup = HourSetup(
        inputs=inputs,
        series=rows,
        situation=replace(situation, sites=sites),
        shape=shape,
        sites=sites,
        own_line=own_line,
        places=places,
        observed=observed,
        ground=_ground(inputs),
        wind_error=_wind_error(inputs, rows),
        notes=(*rows.notes, *notes),
    )
    _refuse_nothing(setup)
    return setup


def with_members(setup: HourSetup, members: int | None = None) -> HourSetup:
    """The hours of a series with members.

    Parameters
    ----------
    setup : HourSetup
    members : int, optional
        How many; 0 is none. When left out, what [spread] says for series of at most `USUAL_HOURS`, else none.

    Returns
    -------
    HourSetup
        With a note where there are none.

    Raises
    ------
    CaseError
        If the number is out of range.
    """
    count = setup.series.time.size
    if members is None and count > USUAL_HOURS:
        note = (
            f"Ranges and chances are left out: the series has more than {USUAL_HOURS} hours, and with members every "
            f"hour takes twenty to thirty times as long. --members {USUAL_MEMBERS} works them out."
        )
        return replace(setup, drawn=None, notes=(*setup.notes, note))
    drawn = drawn_of(setup.inputs.case, members)
    if drawn is None:
        said = "[spread] members = 0" if members is None else "--members 0"
        note = f"Ranges and chances are left out, as {said} says. --members {USUAL_MEMBERS} works them out."
        return replace(setup, drawn=None, notes=(*setup.notes, note))
    return replace(setup, drawn=drawn)


def _drawn(setup: HourSetup, row: int) -> Drawn | None:
    """Members of a row, with the uncertainty of its own kind of air."""
    if setup.drawn is None:
        return None
    table, _ = table_of_row(setup.inputs, setup.series, row)
    own = setup.inputs.case.model_copy(update={"incoming": table})
    return replace(setup.drawn, uncertainty=uncertainty_of(own))


def _wind_error(inputs: Inputs, series: Series) -> float:
    """Uncertainty of the wind of a series, by its first row that can be used."""
    first = next((row for row in range(series.time.size) if row not in series.faults), None)
    if first is None:
        return uncertainty_of(inputs.case).wind
    table, _ = table_of_row(inputs, series, first)
    return uncertainty_of(inputs.case.model_copy(update={"incoming": table})).wind


def _refuse_nothing(setup: HourSetup) -> None:
    """Refuse a series none of whose first usable rows makes a column: it is no fault of single rows then."""
    usable = [row for row in range(setup.series.time.size) if row not in setup.series.faults][:24]
    first: OroliftError | None = None
    for row in usable:
        try:
            reading_of_row(setup.inputs, setup.series, row).column(setup.shape.crest)
        except OroliftError as error:
            first = first or error
        else:
            return
    if first is not None:
        raise first


def _ground(inputs: Inputs) -> MapGround | None:
    if inputs.case.catchments is None:
        return None
    from orolift.sources.map_inputs import read_map_inputs

    found = read_map_inputs(inputs, MAP_CELLS)
    return MapGround(found.placed.grid, found.placed.north, found.catchments)


def hour_tasks(setup: HourSetup) -> Iterator[HourTask]:
    """The hours of a series, made as they are asked for.

    Parameters
    ----------
    setup : HourSetup

    Yields
    ------
    HourTask
        In the order of time; hours that cannot be worked out say why.
    """
    for row in range(setup.series.time.size):
        yield hour_task(setup, row)


def hour_task(setup: HourSetup, row: int) -> HourTask:
    """One hour of a series.

    Parameters
    ----------
    setup : HourSetup
    row : int

    Returns
    -------
    HourTask
    """
    time = float(setup.series.time[row])
    try:
        reading = reading_of_row(setup.inputs, setup.series, row)
        incoming = reading.column(setup.shape.crest)
    except OroliftError as error:
        return HourTask(row, time, (SiteState("missing", str(error)),) * len(setup.sites))
    if setup.own_line is None:
        states = (SiteState("missing"),) * len(setup.sites)
        line = OneLine(
            _with_air(setup, setup.situation, incoming, row),
            tuple(range(len(setup.sites))),
            _distance_on_ridge(setup, reading),
        )
        return HourTask(row, time, states, (line,), setup.ground, setup.inputs.fire, _drawn(setup, row))
    return _over_map(setup, incoming, row)


def _distance_on_ridge(setup: HourSetup, reading: IncomingReading) -> float:
    """Where on a hand-entered ridge the air is observed; its upwind end where nothing says it."""
    at = reading.observations[0].ridge_distance
    return 0.0 if at is None else max(at - setup.inputs.transect.origin, 0.0)


def _over_map(setup: HourSetup, incoming: IncomingAir, row: int) -> HourTask:
    """An hour with a line for each site, along the mean wind between base and crest of the case's line."""
    time = float(setup.series.time[row])
    wind_from = float(barrier_wind(incoming, setup.shape.base, setup.shape.crest).from_direction)
    bearing = TURN * round((wind_from + math.pi) / TURN) % (2.0 * math.pi)
    states, lines = [], []
    for number in range(len(setup.sites)):
        state, line = _line_of_site(setup, incoming, row, number, bearing)
        states.append(state)
        lines += [] if line is None else [line]
    return HourTask(row, time, tuple(states), tuple(lines), setup.ground, setup.inputs.fire, _drawn(setup, row))


def _line_of_site(
    setup: HourSetup, incoming: IncomingAir, row: int, number: int, bearing: float
) -> tuple[SiteState, OneLine | None]:
    """Line of a site in an hour, or why it has none."""
    if setup.own_line is None:
        raise ValueError("only a map has lines of its own for sites")
    try:
        situation = setup.own_line(number, round(bearing, 9))
    except OroliftError as error:
        return SiteState("missing", str(error)), None
    observed_at = 0.0
    if setup.observed is not None:
        east, north = np.subtract(setup.observed, setup.places[number])
        along = east * math.sin(bearing) + north * math.cos(bearing)
        observed_at = float(along) + situation.sites[0].distance
        crest = features(situation.transect, situation.sites[0].distance).crest_distance
        if observed_at > crest:
            return SiteState("no crossing", "the wind comes over the range to where the air is observed"), None
    situation = _with_air(setup, situation, incoming, row)
    return SiteState("missing"), OneLine(situation, (number,), max(observed_at, 0.0))


def _with_air(setup: HourSetup, situation: Situation, incoming: IncomingAir, row: int) -> Situation:
    """A situation with the air, the time and the lee of a row."""
    depth = 0.0
    if "lapse rate" not in incoming.origin:
        depth = ground_layer(incoming, setup.shape.crest).depth
    when = situation.when or When()
    lee = situation.lee
    if "lee_temperature" in setup.series.columns:
        value = float(setup.series.columns["lee_temperature"][row])
        lee = Lee() if math.isnan(value) else Lee(temperature=value)
    return replace(
        situation,
        incoming=incoming,
        lee=lee,
        when=When(float(setup.series.time[row]), when.longitude, when.latitude),
        stagnant_top=float(incoming.height[0]) + depth if depth > 0.0 else None,
    )
