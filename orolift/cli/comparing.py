"""What `orolift compare` does before it writes: cases worked out, observations read, each put beside the other."""

from __future__ import annotations

import logging
from dataclasses import dataclass
from datetime import UTC, datetime
from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import CaseError

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.cli.compare_work import Estimated
    from orolift.sources.inputs import Inputs
    from orolift.sources.observed_places import Placed
    from orolift.spread.compared import Compared, ProfileComparison
    from orolift.spread.comparison import Paired
    from orolift.spread.estimates import Estimates, Quantity
    from orolift.spread.explained import Explained

log = logging.getLogger(__name__)


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
    series: str | None
    jobs: int | None
    quiet: bool = False


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
    from orolift.cli.compare_work import cases_estimated, in_time, series_estimated
    from orolift.sources.inputs import read_inputs
    from orolift.sources.observed import read_observed
    from orolift.sources.observed_places import placed
    from orolift.spread.compared import Compared, all_pairs, event_tables
    from orolift.spread.compared_rules import rule_tables
    from orolift.spread.comparison import nearest_estimates
    from orolift.spread.onset_series import onset_at_places

    events = tuple(event_of(text) for text in asked.events)
    table = read_observed(observed)
    if asked.series is not None and len(cases) > 1:
        raise CaseError("--series gives the hours over one case, and several are given. Give one.")
    inputs = in_time(tuple(read_inputs(case) for case in cases))
    log.debug("%d rows and %d cases read", table.line.size, len(inputs))
    put = placed(table, inputs)
    if asked.series is None:
        work = cases_estimated(put, asked.jobs)
    else:
        work = series_estimated(put, asked.series, asked.jobs, quiet=asked.quiet)
    estimates = work.estimates
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
    thresholds, threshold_notes = rule_tables(
        inputs[0].fire.rules, put.seen, estimates, which, inputs[0].settings.roughness
    )
    rule, rule_notes = rule_of(asked, estimates, put)
    cautions = (*table.cautions, *put.cautions, *_side_cautions(put, work), *work.cautions)
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
        onset=onset_at_places(rule, put.seen, estimates, which, put.elevations),
        explained=_explained(put, work, pairs, which, asked.explain),
        profile=_profile(asked, work, put),
        notes=(*notes, *work.notes, *event_notes, *threshold_notes, *rule_notes),
        cautions=cautions,
    )
    return found, inputs


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


def _side_cautions(put: Placed, work: Estimated) -> list[str]:
    """Places that are not in the lee, and those that could not be worked out."""
    found = []
    for i, name in enumerate(put.names):
        sides = {one.side[i] for one in work.estimates} - {None}
        if not sides:
            found.append(f"{name} could not be worked out: {work.failed.get(name, 'no line leads there.')}")
        elif "lee" not in sides:
            where = "on the crest" if sides == {"crest"} else "on the windward side of the range"
            found.append(f"{name} lies {where}: it is shown, and does not count in the scores of the lee.")
    return found


def _explained(
    put: Placed,
    work: Estimated,
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
    source = work.source(*one)
    if source is None:
        return None
    log.debug("explaining %s", source.air.name)
    return explained(one, put.seen, which, source)


def _profile(asked: Asked, work: Estimated, put: Placed) -> ProfileComparison | None:
    """The lee sounding against the estimate over a place of the comparison."""
    if asked.lee_sounding is None:
        return None
    if not work.airs:
        raise CaseError("--lee-sounding is held against one case, and several or a series are given. Run it for one.")
    from orolift.sources.sounding_air import air_from_sounding, read_any_sounding
    from orolift.spread.compared import profile_comparison

    lee = work.airs
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
