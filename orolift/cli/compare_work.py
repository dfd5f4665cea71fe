"""Estimates for `orolift compare`: of one case or several, or of the hours of a series, and where each comes from."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.errors import CaseError

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

    from orolift.crossing.result import Crossing, LeeAir
    from orolift.crossing.situation import Situation
    from orolift.sources.inputs import Inputs
    from orolift.sources.observed_places import Placed
    from orolift.spread.estimates import Estimates
    from orolift.spread.explained import Source

FEW = 4
"""So many crossings are worked out here: starting other processes would take longer."""


METHOD_ONLY = (
    "No members were worked out: the range of temperature and humidity is the error of the method alone, that of wind "
    "and gust spans the methods."
)


@dataclass(frozen=True, eq=False)
class Estimated:
    """Everything that was estimated.

    Attributes
    ----------
    estimates : tuple of Estimates
        In order of time.
    source : callable
        Of the number of the estimates and of the place: where an estimate comes from.
    airs : tuple of LeeAir
        At the places of a single case; else empty.
    failed : dict of str to str
        Places that could not be worked out, and why.
    notes, cautions : tuple of str
    """

    estimates: tuple[Estimates, ...]
    source: Callable[[int, int], Source | None]
    airs: tuple[LeeAir, ...]
    failed: dict[str, str]
    notes: tuple[str, ...]
    cautions: tuple[str, ...]


def in_time(inputs: tuple[Inputs, ...]) -> tuple[Inputs, ...]:
    """Cases in order of time; several need one each, and different ones.

    Parameters
    ----------
    inputs : tuple of Inputs

    Returns
    -------
    tuple of Inputs

    Raises
    ------
    CaseError
        If a time is missing or stands twice.
    """
    if len(inputs) == 1:
        return inputs
    for one in inputs:
        if one.case.valid_time is None:
            raise CaseError(f"{one.path}: has no valid_time, and several cases are told apart by it. Add valid_time.")
    ordered = tuple(sorted(inputs, key=lambda one: one.case.valid_time.timestamp() if one.case.valid_time else 0.0))
    for one, other in zip(ordered[1:], ordered, strict=False):
        if one.case.valid_time == other.case.valid_time:
            raise CaseError(f"{one.path}: has the valid_time of {other.path}. Give each case its own.")
    return ordered


def cases_estimated(put: Placed, jobs: int | None) -> Estimated:
    """Crossings of all cases; the first that fails ends the run with its name.

    Parameters
    ----------
    put : Placed
    jobs : int or None

    Returns
    -------
    Estimated

    Raises
    ------
    OroliftError
        If a case cannot be worked out.
    """
    from orolift.cli.executors import executor_of
    from orolift.cli.site_lines import with_own_lines
    from orolift.cli.spreading import Workers, spread_for
    from orolift.crossing.situation import crossing_of
    from orolift.sources.inputs import situation_of
    from orolift.spread.engine import in_order, outcomes
    from orolift.spread.estimates import estimates_of, ranges_of, site_estimate
    from orolift.spread.explained import Source

    situations = [situation_of(one) for one in put.cases]
    with executor_of(1 if len(situations) < FEW else jobs) as executor:
        found = in_order(outcomes(crossing_of, situations, executor))
    estimates: list[Estimates] = []
    crossings: list[Crossing] = []
    cautions: dict[str, None] = {}
    for outcome, one, situation, numbers in zip(found, put.cases, situations, put.numbers, strict=True):
        if outcome.error is not None or outcome.value is None:
            error = outcome.error or CaseError("no crossing")
            error.args = (f"{one.path}: {error}",)
            raise error
        crossing, _ = with_own_lines(one, outcome.value, jobs=jobs, quiet=True)
        cautions |= dict.fromkeys((*one.cautions, *crossing.cautions))
        airs = {air.number: air for air in crossing.lee}
        here = [None if number is None else airs.get(number) for number in numbers]
        spread = spread_for(one, situation, crossing, Workers(jobs, None, quiet=True))
        sites = [
            None if air is None else site_estimate(crossing, air, ranges_of(spread, crossing, air)) for air in here
        ]
        time = None if one.case.valid_time is None else one.case.valid_time.timestamp()
        estimates.append(estimates_of(sites, time))
        crossings.append(crossing)

    def source(which: int, place: int) -> Source | None:
        number = put.numbers[which][place]
        air = next((air for air in crossings[which].lee if air.number == number), None)
        if air is None:
            return None
        situation, site = _line_of(put.cases[which], air)
        return Source(estimates[which].time, crossings[which], air, situation, site)

    return Estimated(
        estimates=tuple(estimates),
        source=source,
        airs=crossings[0].lee if len(crossings) == 1 else (),
        failed={one.name: one.reason for crossing in crossings for one in crossing.failed},
        notes=() if any(one.case.spread.members for one in put.cases) else (METHOD_ONLY,),
        cautions=tuple(cautions),
    )


def _line_of(inputs: Inputs, air: LeeAir) -> tuple[Situation, int]:
    """The situation an estimate comes from, and the number of its site there."""
    from orolift.sources.inputs import situation_of

    if air.own is None:
        on_line = [number for number, place in enumerate(inputs.places, start=1) if place.on_line]
        return situation_of(inputs), on_line.index(air.number)
    from orolift.sources.site_lines import site_groups

    for group in site_groups(inputs):
        numbers = [site.number for site in group.sites]
        if air.number in numbers and group.situation is not None:
            return group.situation, numbers.index(air.number)
    raise CaseError(f"{inputs.path}: the line of {air.name} is gone")


def series_estimated(put: Placed, series: str | Path, jobs: int | None, *, quiet: bool) -> Estimated:
    """Crossings of all hours of a series over the terrain of a case.

    Parameters
    ----------
    put : Placed
        Of one case.
    series : str or Path
    jobs : int or None
    quiet : bool
        Show no progress.

    Returns
    -------
    Estimated

    Raises
    ------
    OroliftError
        If the series does not fit the case, or no hour crosses.
    """
    from orolift.cli.executors import executor_of, progress
    from orolift.sources.hours_case import hour_task, hour_tasks, hours_over
    from orolift.sources.series import read_series
    from orolift.spread.compared_hours import estimated_hour, hourly_estimates, source_of
    from orolift.spread.engine import outcomes

    setup = hours_over(put.cases[0], read_series(series))
    sites = [0 if number is None else number - 1 for number in put.numbers[0]]
    count = setup.series.time.size
    hours = []
    with executor_of(1 if count < FEW else jobs) as executor, progress(count, "Hours", quiet=quiet) as bar:
        for outcome in outcomes(estimated_hour, hour_tasks(setup), executor):
            if outcome.value is None:
                raise outcome.error or CaseError(f"{series}: an hour could not be worked out")
            hours.append(outcome.value)
            bar.update(1)
    hours.sort(key=lambda hour: hour.time)
    still = [hour for hour in hours if not any(hour.sites)]
    if len(still) == count:
        raise CaseError(f"{series}: no hour crosses the range. The first says: {still[0].reason or 'nothing is known'}")
    estimates = hourly_estimates(hours, sites)

    def source(which: int, place: int) -> Source | None:
        time = hours[which].time
        row = next(row for row in range(count) if float(setup.series.time[row]) == time)
        return source_of(hour_task(setup, row), sites[place], float(estimates[which].arrival[place]))

    reasons = Counter(hour.reason for hour in still if hour.reason)
    why = f" Most often: {reasons.most_common(1)[0][0]}" if reasons else ""
    notes = [
        *setup.notes,
        METHOD_ONLY,
        "Each hour is held against the observations at the time its air is at the place.",
    ]
    if still:
        notes.append(f"{len(still)} of {count} hours give no estimate.{why}")
    return Estimated(estimates, source, (), {}, tuple(notes), put.cases[0].cautions)
