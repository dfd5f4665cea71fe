"""The hours of a series as estimates at places, each valid when its air is there."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.situation import crossing_of
from orolift.errors import OroliftError
from orolift.spread.estimates import SiteEstimate, estimates_of, site_estimate
from orolift.spread.explained import Source
from orolift.spread.hours import when_there
from orolift.spread.site_state import travel_to
from orolift.spread.stretches import arrivals

if TYPE_CHECKING:
    from collections.abc import Sequence

    from orolift.spread.estimates import Estimates
    from orolift.spread.hours import HourTask


@dataclass(frozen=True, eq=False)
class HourEstimates:
    """One hour.

    Attributes
    ----------
    time : float [s]
        When the incoming air was observed.
    sites : tuple of (SiteEstimate or None)
        None where it does not cross or cannot be worked out.
    reason : str
        Why, of the first such site.
    """

    time: float
    sites: tuple[SiteEstimate | None, ...]
    reason: str = ""


def estimated_hour(task: HourTask) -> HourEstimates:
    """An hour worked out along each of its lines.

    Parameters
    ----------
    task : HourTask

    Returns
    -------
    HourEstimates
    """
    sites: list[SiteEstimate | None] = [None] * len(task.states)
    reason = next((state.reason for state in task.states if state.reason), "")
    for line in task.lines:
        try:
            crossing = crossing_of(replace(line.situation, when=when_there(line, task.time)))
        except OroliftError as error:
            reason = reason or str(error)
            continue
        for number, air in zip(line.numbers, crossing.lee, strict=True):
            sites[number] = site_estimate(crossing, air, way=travel_to(crossing, air, line.observed_at).time)
    return HourEstimates(task.time, tuple(sites), reason)


def hourly_estimates(hours: Sequence[HourEstimates], places: Sequence[int]) -> tuple[Estimates, ...]:
    """Hours as estimates at places, each valid when its air is there.

    Parameters
    ----------
    hours : sequence of HourEstimates
        In order of time.
    places : sequence of int
        For each place the number of its site, from 0.

    Returns
    -------
    tuple of Estimates
        Hours that do not cross have no values; air that would be overtaken arrives with what overtakes it.
    """
    time = np.array([hour.time for hour in hours])
    columns = []
    for site in places:
        found = [hour.sites[site] for hour in hours]
        way = np.array([np.nan if one is None else one.way for one in found])
        columns.append(arrivals(time, way))
    arrival = np.stack(columns, axis=-1)
    return tuple(
        estimates_of([hour.sites[site] for site in places], hour.time, arrival[i]) for i, hour in enumerate(hours)
    )


def source_of(task: HourTask, site: int, arrival: float) -> Source | None:
    """One hour at one site worked out again, to be explained.

    Parameters
    ----------
    task : HourTask
    site : int
        From 0.
    arrival : float [s]

    Returns
    -------
    Source or None
        None where no line leads there.
    """
    for line in task.lines:
        if site in line.numbers:
            situation = replace(line.situation, when=when_there(line, task.time))
            number = line.numbers.index(site)
            crossing = crossing_of(situation)
            return Source(arrival, crossing, crossing.lee[number], situation, number)
    return None
