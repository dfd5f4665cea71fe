"""Every wind direction in turn: what each does to each site, and which is worst for fire and best for rain."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.facts import OBLIQUE
from orolift.spread.agreement import Agreement, agreeing, reach_of, shares_by_direction
from orolift.spread.site_state import SiteState, states_of

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.situation import Situation
    from orolift.spread.hours import OneLine
    from orolift.spread.spread import Drawn

    Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class BearingTask:
    """A wind direction to be worked out.

    Attributes
    ----------
    wind_from : float [rad]
    states : tuple of SiteState
        One for each site of the case, with the reason where none of the lines is its own.
    lines : tuple of OneLine
        With the air turned to that direction.
    drawn : Drawn or None
        None without members.
    """

    wind_from: float
    states: tuple[SiteState, ...]
    lines: tuple[OneLine, ...] = ()
    drawn: Drawn | None = None


@dataclass(frozen=True)
class Direction:
    """A wind direction worked out.

    Attributes
    ----------
    wind_from : float [rad]
    sites : tuple of SiteState
        In the order of the case.
    """

    wind_from: float
    sites: tuple[SiteState, ...]


@dataclass(frozen=True, eq=False)
class SiteBearings:
    """One site under every wind direction.

    Attributes
    ----------
    name : str
    states : tuple of SiteState
        In the order of the directions.
    warmest, driest, fire, rain : int or None
        Numbers of the directions with the strongest warming, the lowest humidity, the largest product of vapour
        pressure deficit and wind at 10 m, and the most rain; None where there is none. Only directions that are not
        oblique to the range count, unless all are: see `square_enough`.
    agreement : Agreement or None
        How many members agree on each; None without members.
    worst : ndarray (n,) or None [1]
        In what share of the members each direction is the worst for fire; see `shares_by_direction`.
    """

    name: str
    states: tuple[SiteState, ...]
    warmest: int | None
    driest: int | None
    fire: int | None
    rain: int | None
    agreement: Agreement | None = None
    worst: Array | None = None


@dataclass(frozen=True, eq=False)
class Bearings:
    """Every wind direction worked out.

    Attributes
    ----------
    wind_from : ndarray (n,) [rad]
        Increasing from north.
    step : float [rad]
    given : float [rad]
        Direction of the case itself.
    sites : tuple of SiteBearings
    planned : int
        Directions asked for; more than n when the work was interrupted.
    """

    wind_from: Array
    step: float
    given: float
    sites: tuple[SiteBearings, ...]
    planned: int

    @property
    def interrupted(self) -> bool:
        """Whether directions were not worked out."""
        return self.wind_from.size < self.planned


NO_RAIN = 0.05 / 3600.0
"""Rain [kg m-2 s-1] below which no direction is the best for it: it reads as none."""


def worked_direction(task: BearingTask) -> Direction:
    """A wind direction worked out along each of its lines.

    Parameters
    ----------
    task : BearingTask

    Returns
    -------
    Direction
        Directions that do not cross say so at their sites.
    """
    states = list(task.states)
    for line in task.lines:
        found, crossing = states_of(line.situation, line.observed_at, drawn=task.drawn)
        oblique = None if crossing is None else off_normal(task.wind_from, crossing.flow.normal)
        for number, state in zip(line.numbers, found, strict=True):
            states[number] = replace(state, oblique=oblique)
    return Direction(task.wind_from, tuple(states))


def bearings_of(
    found: Iterable[Direction], names: Sequence[str], *, step: float, given: float, planned: int
) -> Bearings:
    """Directions put together, worked out in any order.

    Parameters
    ----------
    found : iterable of Direction
    names : sequence of str
        Of the sites.
    step : float [rad]
    given : float [rad]
        Direction of the case itself.
    planned : int
        Directions asked for.

    Returns
    -------
    Bearings
    """
    directions = sorted(found, key=lambda one: one.wind_from)
    wind_from = np.array([one.wind_from for one in directions])
    by_site = [tuple(one.sites[number] for one in directions) for number in range(len(names))]
    return Bearings(
        wind_from=wind_from,
        step=step,
        given=given,
        sites=tuple(
            _with_agreement(_site(name, states), wind_from, step) for name, states in zip(names, by_site, strict=True)
        ),
        planned=planned,
    )


def _site(name: str, states: tuple[SiteState, ...]) -> SiteBearings:
    rain = _most(states, "rain", 1.0)
    wet = rain is not None and (states[rain].rain or 0.0) >= NO_RAIN
    return SiteBearings(
        name=name,
        states=states,
        warmest=_most(states, "warming", 1.0),
        driest=_most(states, "relative_humidity", -1.0),
        fire=_most(states, "drying_power", 1.0),
        rain=rain if wet else None,
    )


def _with_agreement(site: SiteBearings, wind_from: Array, step: float) -> SiteBearings:
    """A site with how many of its members agree on each direction that is named, and which each has for the worst."""
    if all(state.members is None for state in site.states):
        return site
    counts = square_enough(site.states)

    def share(name: str, chosen: int | None, sign: float = 1.0, least: float = -math.inf) -> float | None:
        return agreeing(
            site.states, counts, wind_from, name=name, chosen=chosen, reach=reach_of(step), sign=sign, least=least
        )

    return replace(
        site,
        worst=shares_by_direction(site.states, counts, "drying_power"),
        agreement=Agreement(
            warmest=share("warming", site.warmest),
            driest=share("relative_humidity", site.driest, -1.0),
            fire=share("drying_power", site.fire),
            rain=share("rain", site.rain, least=NO_RAIN),
        ),
    )


def off_normal(wind_from: float, normal: float) -> float:
    """Angle between a wind and the direction across a range [rad].

    Parameters
    ----------
    wind_from : float [rad]
    normal : float [rad]
        Toward which the air crosses.

    Returns
    -------
    float [rad]
        0 to a right angle.

    Examples
    --------
    >>> round(math.degrees(off_normal(math.radians(235.0), math.radians(75.0))))
    20
    """
    return math.acos(min(max(-math.cos(wind_from - normal), 0.0), 1.0))


def square_enough(states: Sequence[SiteState]) -> list[bool]:
    """Whether the air comes within 45 degrees of the direction across the range; all do where none does.

    Parameters
    ----------
    states : sequence of SiteState
        Of one site, in the order of the directions.

    Returns
    -------
    list of bool
        Air that runs more along the range than across it does not cross it as it is worked out here.
    """
    near = [state.oblique is not None and state.oblique <= OBLIQUE for state in states]
    return near if any(near) else [True] * len(near)


def _most(states: Sequence[SiteState], key: str, sign: float) -> int | None:
    """Number of the state with the largest value, times a sign; the first of several, None without any."""
    known = [
        (sign * getattr(state, key), -i)
        for i, (state, counts) in enumerate(zip(states, square_enough(states), strict=True))
        if counts and getattr(state, key) is not None
    ]
    return -max(known)[1] if known else None


def turned_air(air: IncomingAir, angle: float) -> IncomingAir:
    """A column with all its winds turned together.

    Parameters
    ----------
    air : IncomingAir
    angle : float [rad]
        Clockwise.

    Returns
    -------
    IncomingAir
        Speeds and shear as before.
    """
    c, s = math.cos(angle), math.sin(angle)
    east, north = air.eastward_wind, air.northward_wind
    return replace(air, eastward_wind=east * c + north * s, northward_wind=north * c - east * s)


def reversed_situation(situation: Situation) -> Situation:
    """The same line with the wind from its other end.

    Parameters
    ----------
    situation : Situation

    Returns
    -------
    Situation
        Line, sites and range normal the other way round; its distances start at the other end.
    """
    line = situation.transect
    length = float(line.distance[-1])

    def flipped(values: Array | None) -> Array | None:
        return None if values is None else values[::-1].copy()

    normal = situation.normal
    return replace(
        situation,
        transect=replace(
            line,
            elevation=line.elevation[::-1].copy(),
            bearing=None if line.bearing is None else (line.bearing + math.pi) % (2.0 * math.pi),
            high_elevation=flipped(line.high_elevation),
            longitude=flipped(line.longitude),
            latitude=flipped(line.latitude),
            origin=0.0,
        ),
        sites=tuple(replace(site, distance=length - site.distance) for site in situation.sites),
        normal=None if normal is None else replace(normal, bearing=(normal.bearing + math.pi) % (2.0 * math.pi)),
    )
