"""What `orolift compare` does before it writes: cases worked out, observations read, each put beside the other."""

from __future__ import annotations

import logging
from dataclasses import dataclass, replace
from datetime import UTC, datetime
from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import CaseError

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import LeeAir
    from orolift.crossing.situation import Situation
    from orolift.sources.inputs import Inputs
    from orolift.sources.observed_places import Placed
    from orolift.spread.compared import Compared, ProfileComparison
    from orolift.spread.comparison import Estimates, Paired, Quantity
    from orolift.spread.explained import Explained

log = logging.getLogger(__name__)

FEW = 4
"""So many crossings are worked out here: starting other processes would take longer."""
Numbers = list[list[int | None]]
"""For each case the number of the site of every place; None where its line does not reach the place."""


@dataclass(frozen=True)
class Asked:
    """What the command line asks for beside files."""

    within: float
    explain: str | None
    events: tuple[str, ...]
    offset: float
    sector: str | None
    least_wind: float
    lee_sounding: str | None
    sounding_at: str | None
    jobs: int | None


def compared_of(cases: tuple[str, ...], observed: str, asked: Asked) -> tuple[Compared, tuple[Inputs, ...]]:
    """Cases read and worked out, observations read and put beside them.

    Parameters
    ----------
    cases : tuple of str
    observed : str
    asked : Asked

    Returns
    -------
    Compared, tuple of Inputs

    Raises
    ------
    OroliftError
        If a case or the observations are at fault.
    """
    from orolift.cli.compare_options import event_of, rule_of
    from orolift.sources.inputs import read_inputs
    from orolift.sources.observed import read_observed
    from orolift.sources.observed_places import placed
    from orolift.spread.compared import Compared, all_pairs, event_tables
    from orolift.spread.compared_rules import rule_tables
    from orolift.spread.comparison import nearest_estimates
    from orolift.spread.onset_series import onset_at_places

    events = tuple(event_of(text) for text in asked.events)
    table = read_observed(observed)
    inputs = _in_time(tuple(read_inputs(case) for case in cases))
    log.debug("%d rows and %d cases read", table.line.size, len(inputs))
    put = placed(table, inputs)
    estimates, places = _estimates(put, asked.jobs)
    log.debug("crossings worked out")
    within = 60.0 * asked.within
    which = nearest_estimates(put.seen, estimates, within)
    notes = [*table.notes, *put.notes, *_time_notes(put, estimates, which, asked.within)]
    pairs, verdicts = all_pairs(put.seen, estimates, which)
    if not pairs and asked.lee_sounding is None:
        raise CaseError(
            f"{observed}: no observation lies within {asked.within:g} minutes of "
            f"{_times_in_words(estimates)}. Check times and zones, or widen --within."
        )
    tables, event_notes = event_tables(events, pairs)
    thresholds, threshold_notes = rule_tables(inputs[0].fire.rules, put.seen, estimates, which)
    rule, rule_notes = rule_of(asked, estimates[0], put)
    cautions = (*table.cautions, *put.cautions, *_side_cautions(put, estimates, places))
    found = Compared(
        names=put.names,
        estimates=estimates,
        seen=put.seen,
        which=which,
        within=within,
        pairs=pairs,
        verdicts=verdicts,
        events=(*tables, *thresholds),
        rule=rule,
        onset=onset_at_places(rule, put.seen, estimates, which, places, put.elevations),
        explained=_explained(put, places, estimates, pairs, which, asked.explain),
        profile=_profile(asked, estimates, put),
        notes=(*notes, *event_notes, *threshold_notes, *rule_notes),
        cautions=cautions,
    )
    return found, inputs


def _in_time(inputs: tuple[Inputs, ...]) -> tuple[Inputs, ...]:
    """Cases in order of time; several need one each, and different ones."""
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


def _estimates(put: Placed, jobs: int | None) -> tuple[tuple[Estimates, ...], Numbers]:
    """Crossings of all cases, and where each has its places; the first that fails ends the run with its name."""
    from orolift.cli.executors import executor_of
    from orolift.cli.site_lines import with_own_lines
    from orolift.crossing.situation import crossing_of
    from orolift.sources.inputs import situation_of
    from orolift.spread.comparison import estimates_of
    from orolift.spread.engine import in_order, outcomes

    situations = [situation_of(one) for one in put.cases]
    with executor_of(1 if len(situations) < FEW else jobs) as executor:
        found = in_order(outcomes(crossing_of, situations, executor))
    estimates, places = [], []
    for outcome, one, numbers in zip(found, put.cases, put.numbers, strict=True):
        if outcome.error is not None or outcome.value is None:
            error = outcome.error or CaseError("no crossing")
            error.args = (f"{one.path}: {error}",)
            raise error
        crossing, _ = with_own_lines(one, outcome.value, jobs=jobs, quiet=True)
        crossing = replace(crossing, cautions=(*one.cautions, *crossing.cautions))
        where = {air.number: i for i, air in enumerate(crossing.lee)}
        sites = [None if number is None else where.get(number) for number in numbers]
        time = one.case.valid_time
        estimates.append(estimates_of(crossing, None if time is None else time.timestamp(), sites))
        places.append(sites)
    return tuple(estimates), places


def _time_notes(put: Placed, estimates: tuple[Estimates, ...], which: NDArray[np.int_], minutes: float) -> list[str]:
    """What to say of rows without time, and of those too far from every case."""
    time, near = put.seen.time, which
    notes = []
    if estimates[0].time is None:
        notes.append("The case names no valid time: every row is held against it.")
    elif np.isnan(time).any():
        taken = "held against the one case" if len(estimates) == 1 else "left out"
        notes.append(f"Rows without a time are {taken}.")
    far = int((near < 0).sum())
    if far:
        notes.append(
            f"{far} of {near.size} rows lie more than {minutes:g} minutes from every case and are not compared; "
            "they serve the onset test and the timeline."
        )
    return notes


def _times_in_words(estimates: tuple[Estimates, ...]) -> str:
    times = [datetime.fromtimestamp(one.time, UTC) for one in estimates if one.time is not None]
    if len(times) == 1:
        return f"the case at {times[0]:%Y-%m-%d %H:%M} UTC"
    return f"the {len(estimates)} cases" if times else "the case"


def _side_cautions(put: Placed, estimates: tuple[Estimates, ...], places: Numbers) -> list[str]:
    """Places that are not in the lee, and those that could not be worked out."""
    failed = {one.name: one.reason for estimate in estimates for one in estimate.crossing.failed}
    found = []
    for i, name in enumerate(put.names):
        pairs = [(one.crossing.lee, numbers[i]) for one, numbers in zip(estimates, places, strict=True)]
        sides = {lee[number].side for lee, number in pairs if number is not None}
        if not sides:
            found.append(f"{name} could not be worked out: {failed.get(name, 'no line leads there.')}")
        elif "lee" not in sides:
            where = "on the crest" if sides == {"crest"} else "on the windward side of the range"
            found.append(f"{name} lies {where}: it is shown, and does not count in the scores of the lee.")
    return found


def _explained(
    put: Placed,
    places: Numbers,
    estimates: tuple[Estimates, ...],
    pairs: dict[Quantity, Paired],
    which: NDArray[np.int_],
    name: str | None,
) -> Explained | None:
    """The comparison asked for, or the one farthest off, explained."""
    from orolift.sources.units import nearest
    from orolift.spread.explained import chosen, explained

    place = None
    if name is not None:
        names = [one.casefold() for one in put.names]
        if name.casefold() not in names:
            close = nearest(name, put.names)
            hint = f"Did you mean {close}?" if close else f"Places: {', '.join(put.names)}."
            raise CaseError(f"--explain: '{name}' is no place of the comparison. {hint}")
        place = names.index(name.casefold())
    one = None
    if "temperature" in pairs and "mixing_ratio" in pairs:
        one = chosen(pairs["temperature"], pairs["mixing_ratio"], place)
    if one is None:
        if name is not None:
            raise CaseError(
                f"--explain: {name} has no temperature and humidity observed together in the lee near a case."
            )
        return None
    site = places[one[0]][one[1]]
    if site is None:
        return None
    air = estimates[one[0]].crossing.lee[site]
    log.debug("explaining %s", air.name)
    situation, number = _line_of(put.cases[one[0]], air)
    return explained(one, put.seen, which, estimates, air, situation, number)


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


def _profile(asked: Asked, estimates: tuple[Estimates, ...], put: Placed) -> ProfileComparison | None:
    """The lee sounding against the estimate over a place of the comparison."""
    if asked.lee_sounding is None:
        return None
    if len(estimates) > 1:
        raise CaseError("--lee-sounding is held against one case, and several are given. Run it once for each.")
    from orolift.sources.sounding_air import air_from_sounding, read_any_sounding
    from orolift.spread.compared import profile_comparison

    lee = estimates[0].crossing.lee
    air = next((air for air in lee if air.side == "lee"), lee[0])
    if asked.sounding_at is not None:
        named = [one for one in lee if one.name.casefold() == asked.sounding_at.casefold()]
        if not named:
            have = ", ".join(one.name for one in lee)
            raise CaseError(f"--at: '{asked.sounding_at}' is no place of the comparison. Its places: {have}.")
        air = named[0]
    where = "--lee-sounding"
    near = put.cases[0].case.valid_time
    sounding = air_from_sounding(read_any_sounding(asked.lee_sounding, where, None, near=near), where)
    return profile_comparison(air, sounding)
