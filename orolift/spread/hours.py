"""One hour of a series: the crossing along each of its lines, and rain on the catchments."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.crossing.crossing import crest_component, toward
from orolift.errors import OroliftError
from orolift.rain.catchments import catchment_rain
from orolift.rain.over_map import rates_over_map
from orolift.spread.hour_members import HourMembers, hour_members
from orolift.spread.site_state import SiteState, states_of
from orolift.terrain.features import features

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing
    from orolift.crossing.situation import Situation
    from orolift.fire.sites import FireSettings
    from orolift.rain.over_map import Catchment
    from orolift.spread.spread import Drawn
    from orolift.terrain.grid import ElevationGrid

HOUR = 3600.0
LONGEST_WAY = 12 * HOUR
"""Time on the way beyond which the first guess of it is not trusted, for the height of the sun."""


@dataclass(frozen=True, eq=False)
class OneLine:
    """A line over the range with the sites whose air comes along it.

    Attributes
    ----------
    situation : Situation
        With those sites.
    numbers : tuple of int
        Which sites of the case they are.
    observed_at : float [m]
        Where on the line the incoming air was observed.
    """

    situation: Situation
    numbers: tuple[int, ...]
    observed_at: float = 0.0


@dataclass(frozen=True, eq=False)
class MapGround:
    """Ground and catchments for rain over a map.

    Attributes
    ----------
    grid : ElevationGrid
    north : float [rad]
        Bearing of true north on it.
    catchments : tuple of Catchment
    """

    grid: ElevationGrid
    north: float
    catchments: tuple[Catchment, ...]


@dataclass(frozen=True, eq=False)
class HourTask:
    """An hour to be worked out.

    Attributes
    ----------
    number : int
        Of the row of the series.
    time : float [s]
        When the incoming air was observed, since 1970-01-01T00:00:00 UTC.
    states : tuple of SiteState
        One for each site of the case, with the reason where none of the lines is its own.
    lines : tuple of OneLine
    ground : MapGround or None
        None without catchments.
    fire : FireSettings or None
        With the thresholds of a region, where there are any.
    drawn : Drawn or None
        None without members.
    """

    number: int
    time: float
    states: tuple[SiteState, ...]
    lines: tuple[OneLine, ...] = ()
    ground: MapGround | None = None
    fire: FireSettings | None = None
    drawn: Drawn | None = None


@dataclass(frozen=True, slots=True, eq=False)
class LineRain:
    """Mean rain and snow on the first line of an hour that crosses [kg m-2 s-1], background included.

    Attributes
    ----------
    answer : float
    members : ndarray of float32, (m,)
        The background alone in members that do not cross; the answer in those that could not be worked out.
    """

    answer: float
    members: NDArray[np.float32]


@dataclass(frozen=True, eq=False)
class Hour:
    """An hour worked out.

    Attributes
    ----------
    number : int
    time : float [s]
    sites : tuple of SiteState
        In the order of the case.
    catchments : tuple of float or None [kg m-2 s-1]
        Mean rate on each; None where it is not known.
    members : tuple of HourMembers or None
        Of each site; None in those that were asked for none, or have none. Their states have none: they are put in
        short here.
    line_rain : LineRain or None
        None without members.
    """

    number: int
    time: float
    sites: tuple[SiteState, ...]
    catchments: tuple[float | None, ...] = ()
    members: tuple[HourMembers | None, ...] = ()
    line_rain: LineRain | None = None


def worked_hour(task: HourTask) -> Hour:
    """An hour worked out: the crossing along each of its lines, and rain on the catchments.

    Parameters
    ----------
    task : HourTask

    Returns
    -------
    Hour
        Hours that cannot be worked out or do not cross say so at their sites.
    """
    states = list(task.states)
    members: list[HourMembers | None] = [None] * len(states)
    first: Crossing | None = None
    rain: LineRain | None = None
    for line in task.lines:
        situation = replace(line.situation, when=when_there(line, task.time))
        found, crossing = states_of(situation, line.observed_at, task.fire, task.drawn)
        if first is None and crossing is not None:
            first, rain = crossing, _line_rain(found[0], crossing)
        sites = (None,) * len(found) if crossing is None else crossing.lee
        for number, state, site in zip(line.numbers, found, sites, strict=True):
            states[number] = replace(state, members=None)
            members[number] = hour_members(state, site, crossing, task.fire, situation.when)
    rates = _catchment_rates(task.ground, first)
    return Hour(task.number, task.time, tuple(states), rates, tuple(members), rain)


def _line_rain(state: SiteState, crossing: Crossing) -> LineRain | None:
    """Mean rain on the line of a crossing, and in its members."""
    if state.members is None or state.members.line_rain is None:
        return None
    rain, x = crossing.rain, crossing.distance
    length = float(x[-1] - x[0])
    if crossing.transect.bearing is not None:
        length *= float(np.cos(crossing.flow.normal - crossing.transect.bearing))
    answer = rain.total / length + rain.background
    each = np.nan_to_num(state.members.line_rain) / length + rain.background
    each[np.isnan(state.members.crosses)] = answer
    return LineRain(answer, each.astype(np.float32))


def when_there(line: OneLine, time: float) -> Any:
    """When the air of a line is about at its first site, for the height of the sun there.

    Parameters
    ----------
    line : OneLine
    time : float [s]
        At which it was observed.

    Returns
    -------
    When or None
    """
    situation = line.situation
    when = situation.when
    if when is None or not situation.sites:
        return when
    air, site = situation.incoming, situation.sites[0]
    try:
        crest = features(situation.transect, site.distance).crest
        wind = crest_component(air, toward(situation.transect, air), crest)
    except OroliftError:  # it does not cross, as will be said
        return when
    return replace(when, time=time + min(max(site.distance - line.observed_at, 0.0) / wind, LONGEST_WAY))


def _catchment_rates(ground: MapGround | None, crossing: Crossing | None) -> tuple[float | None, ...]:
    if ground is None:
        return ()
    if crossing is None:
        return (None,) * len(ground.catchments)
    try:
        rate = rates_over_map(crossing, ground.grid, ground.north)[0].rate
    except OroliftError:
        return (None,) * len(ground.catchments)
    return tuple(catchment_rain(one.polygon, ground.grid, rate, HOUR).rate for one in ground.catchments)
