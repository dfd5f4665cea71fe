"""A case to the wind directions that are to be worked out, one by one."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from orolift.errors import CaseError, OroliftError
from orolift.sources.inputs import read_inputs, situation_of
from orolift.sources.own_lines import own_lines, sites_of
from orolift.sources.spread_model import drawn_of
from orolift.spread.bearings import BearingTask, reversed_situation, turned_air
from orolift.spread.hours import OneLine
from orolift.spread.site_state import SiteState

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator
    from pathlib import Path

    from orolift.crossing.result import Site
    from orolift.crossing.situation import Situation
    from orolift.sources.inputs import Inputs
    from orolift.spread.spread import Drawn


@dataclass(frozen=True, eq=False)
class BearingSetup:
    """What all wind directions of a case share.

    Attributes
    ----------
    inputs : Inputs
    situation : Situation
        Of the case, without the ends and without what is known of one lee.
    sites : tuple of Site
        Of the case, else the lee foot of its own direction.
    own_line : callable or None
        As in `orolift.sources.own_lines.own_lines`; None for a hand-entered ridge.
    step_deg : int
    notes : tuple of str
    drawn : Drawn or None
        What the members of every direction are drawn from; None without members.
    """

    inputs: Inputs
    situation: Situation
    sites: tuple[Site, ...]
    own_line: Callable[[int, float], Situation] | None
    step_deg: int
    notes: tuple[str, ...]
    drawn: Drawn | None = None

    @property
    def directions(self) -> int:
        """How many there are."""
        return 360 // self.step_deg


def read_bearings(case: str | Path, step_deg: int, members: int | None = None) -> BearingSetup:
    """A case read for every wind direction.

    Parameters
    ----------
    case : str or Path
    step_deg : int
        Between two directions, a divisor of 360.
    members : int, optional
        Of each direction, 10 or more, or 0 for none; as [spread] of the case says when left out.

    Returns
    -------
    BearingSetup

    Raises
    ------
    OroliftError
        If the case cannot be read, the step is none, or the members are too few or too many.
    """
    if not 1 <= step_deg <= 90 or 360 % step_deg:
        raise CaseError(f"--step {step_deg}: it must divide 360 and be 1 to 90 degrees, for example 10.")
    inputs = read_inputs(case)
    situation = replace(situation_of(inputs), in_full=False, lee=None)
    sites = sites_of(inputs)
    notes = [
        (
            "All winds of the incoming air are turned together; in the case itself it comes from "
            f"{math.degrees(inputs.wind_from):.0f} degrees. Temperature and humidity stay as they are: real air from "
            "another direction has its own."
        )
    ]
    if inputs.lee.known:
        notes.append("What [lee] says of the air in the lee is left out: it holds for one side of the range.")
    own_line = None
    if inputs.case.terrain.elevation_file is not None:
        own_line = own_lines(inputs, sites)[0]
        notes.append("Every site has a line of its own in every direction.")
    else:
        notes.append(
            "The ridge is one line: of a wind at an angle to it only the component along it counts, and wind from its "
            "other end crosses it the other way."
        )
    drawn = drawn_of(inputs.case, members)
    if drawn is not None:
        notes.append(
            f"Each direction is worked out in {drawn.members} members (seed {drawn.seed}), with the same deviations in "
            "all of them; the wind of a member turns against the line, which stays. The error of the method is taken "
            "to be the same from every side: a member whose answer is too warm is so in all directions."
        )
    return BearingSetup(inputs, replace(situation, sites=sites), sites, own_line, step_deg, tuple(notes), drawn)


def bearing_tasks(setup: BearingSetup) -> Iterator[BearingTask]:
    """The wind directions of a case, made as they are asked for.

    Parameters
    ----------
    setup : BearingSetup

    Yields
    ------
    BearingTask
        From north round by east.
    """
    for number in range(setup.directions):
        yield bearing_task(setup, math.radians(number * setup.step_deg))


def bearing_task(setup: BearingSetup, wind_from: float) -> BearingTask:
    """One wind direction.

    Parameters
    ----------
    setup : BearingSetup
    wind_from : float [rad]

    Returns
    -------
    BearingTask
    """
    air = turned_air(setup.inputs.incoming, wind_from - setup.inputs.wind_from)
    bearing = (wind_from + math.pi) % (2.0 * math.pi)
    every = tuple(range(len(setup.sites)))
    states = [SiteState("missing") for _ in every]
    if setup.own_line is None:
        situation = setup.situation
        along = situation.transect.bearing or 0.0
        if math.cos(bearing - along) < 0.0:
            situation = reversed_situation(situation)
        line = OneLine(replace(situation, incoming=air), every)
        return BearingTask(wind_from, tuple(states), (line,), setup.drawn)
    lines = []
    for number in every:
        try:
            situation = setup.own_line(number, round(bearing, 9))
        except OroliftError as error:
            states[number] = SiteState("missing", str(error))
            continue
        lines.append(OneLine(replace(situation, incoming=air, lee=None), (number,)))
    return BearingTask(wind_from, tuple(states), tuple(lines), setup.drawn)
