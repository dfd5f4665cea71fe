"""How sure a crossing is: the same situation in many members, with and without the error of the method."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.members import Members, crossing_members, members_of
from orolift.crossing.rainfall import LEAST_RAIN
from orolift.errors import OroliftError, OutOfRangeError
from orolift.spread.at_sites import (
    alike,
    centred,
    on_the_line,
    shadows,
    spread_out,
    values_with_method_error,
    with_method_error,
)
from orolift.spread.draws import columns, draws_of, variations_of, what_varies
from orolift.spread.engine import in_order, outcomes
from orolift.spread.uncertainty import COLUMNS, METHOD, Uncertainty, checked, latin_hypercube, normal

if TYPE_CHECKING:
    from collections.abc import Callable
    from concurrent.futures import Executor

    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing, Site
    from orolift.crossing.situation import Situation

    Array = NDArray[np.float64]

USUAL_MEMBERS = 32
"""Members where nobody says how many: another seed moves a range of 10 to 90 % by about a fifth of itself."""
LEAST_MEMBERS, MOST_MEMBERS = 10, 100_000
"""Fewer have no 10 % and 90 %; more do not fit into memory."""
CHUNK = 50
"""Members marched together. It is fixed, so that nothing depends on the number of processes."""
CHANCE_OF_RAIN = LEAST_RAIN
"""Rate [kg m-2 s-1] from which it rains at a place."""


@dataclass(frozen=True)
class Drawn:
    """What members are drawn from, for crossings that are many already.

    Attributes
    ----------
    uncertainty : Uncertainty
    members : int
        10 to 100 000.
    seed : int
        The same seed draws the same deviations for every crossing: a member that is too warm is so throughout.
    """

    uncertainty: Uncertainty
    members: int = USUAL_MEMBERS
    seed: int = 0


@dataclass(frozen=True)
class Failed:
    """A member that could not be worked out.

    Attributes
    ----------
    number : int
        From 0.
    reason : str
    """

    number: int
    reason: str


@dataclass(frozen=True, eq=False)
class Spread:
    """A situation in members. Arrays (m,) and (m, ns), NaN where a member has no such value.

    Attributes
    ----------
    members, seed : int
    uncertainty : Uncertainty
    varied : tuple of str
        Inputs that differ between members and can make a difference.
    level : dict of str to ndarray (m,) [1]
        Where each member lies, between 0 and 1, in what each input may be and in what the method gets wrong.
    crosses : ndarray of bool, (m,)
    values, sites : dict of str to ndarray
        As in `orolift.crossing.members.Members`: of the inputs alone.
    full_values, full_sites : dict of str to ndarray (m,) and (m, ns)
        `values` and `sites` with the error of the method, where it is stated.
    failed : tuple of Failed
        Members that could not be worked out; they count nowhere.
    """

    members: int
    seed: int
    uncertainty: Uncertainty
    varied: tuple[str, ...]
    level: dict[str, Array]
    crosses: NDArray[np.bool_]
    values: dict[str, Array]
    sites: dict[str, Array]
    full_values: dict[str, Array]
    full_sites: dict[str, Array]
    failed: tuple[Failed, ...]


@dataclass(frozen=True, eq=False)
class _Chunk:
    """Members that are worked out together."""

    situation: Situation
    uncertainty: Uncertainty
    first: int
    level: Array
    beside: tuple[Site, ...]
    streamlines: int
    observed_at: float


def spread_of(
    situation: Situation,
    crossing: Crossing,
    uncertainty: Uncertainty,
    *,
    members: int = USUAL_MEMBERS,
    seed: int = 0,
    executor: Executor | None = None,
    told: Callable[[int], object] | None = None,
    streamlines: int = 60,
    observed_at: float = 0.0,
) -> Spread:
    """A situation in members.

    Parameters
    ----------
    situation : Situation
    crossing : Crossing
        Its crossing, with the sites that have lines of their own.
    uncertainty : Uncertainty
    members : int
        10 to 100 000.
    seed : int
        0 or more.
    executor : Executor, optional
        None works here.
    told : callable, optional
        Is given the number of members that are done since the last call.
    streamlines : int
        As for `crossing.cross`.
    observed_at : float [m]
        Where on the line the incoming air was observed; times on the way count from there.

    Returns
    -------
    Spread

    Raises
    ------
    OutOfRangeError
        If the number of members, the seed or a standard deviation is out of range.
    WorkersError
        If a process of the executor is lost.

    Notes
    -----
    Everything is drawn before, and members are marched in groups of 50 whatever
    the executor: the same seed gives the same numbers anywhere. A member that
    fails is counted and the rest goes on. A site with a line of its own takes the deviations of a
    place of its height on this line, as far from the crest as it is from its own, around its own answer; of more
    than 24 such sites those within about 1 km and 100 m of height share one place.
    """
    _check_count(members, seed)
    level = latin_hypercube(members, len(COLUMNS), seed)
    beside, back = alike(shadows(crossing))
    middle = np.full((1, len(COLUMNS)), 0.5)  # what the deviations of those beside the line are from
    firsts = range(0, members, CHUNK)
    ends = [min(first + CHUNK, members) for first in firsts]
    chunks = (
        _Chunk(
            situation,
            checked(uncertainty),
            first,
            np.concatenate([level[first:end], middle]) if beside and end == members else level[first:end],
            beside,
            streamlines,
            observed_at,
        )
        for first, end in zip(firsts, ends, strict=True)
    )
    found = []
    for outcome in outcomes(_worked, chunks, executor):
        found.append(outcome)
        if told is not None:
            told(ends[outcome.number] - firsts[outcome.number])
    parts: list[Members] = []
    failed: list[Failed] = []
    for outcome in in_order(found):
        if outcome.value is None:
            raise outcome.error or OroliftError("a group of members was lost")
        parts.append(outcome.value[0])
        failed += [one for one in outcome.value[1] if one.number < members]
    whole = _joined(parts, [part.crosses.size for part in parts])
    if beside:
        whole = centred(spread_out(whole, len(on_the_line(crossing)), back), crossing)
    named = dict(zip(COLUMNS, level.T, strict=True))
    error = {name: normal(named[name]) for name in METHOD}
    return Spread(
        members=members,
        seed=seed,
        uncertainty=uncertainty,
        varied=what_varies(situation, uncertainty),
        level=named,
        crosses=whole.crosses,
        values=whole.values,
        sites=whole.sites,
        full_values=values_with_method_error(whole.values, crossing, error),
        full_sites=with_method_error(whole.sites, crossing, uncertainty, error),
        failed=tuple(failed),
    )


def crosses_of(situation: Situation, drawn: Drawn) -> NDArray[np.bool_]:
    """Which members of a situation cross, though it may not do so itself.

    Parameters
    ----------
    situation : Situation
    drawn : Drawn

    Returns
    -------
    ndarray of bool, (m,)
        As in `spread_of` with the same members and seed.

    Raises
    ------
    OutOfRangeError
        If the number of members, the seed or a standard deviation is out of range, or a member is beyond what is
        physical.
    TerrainError
        If the line has no range.
    """
    _check_count(drawn.members, drawn.seed)
    level = latin_hypercube(drawn.members, len(COLUMNS), drawn.seed)
    changes = draws_of(situation, checked(drawn.uncertainty), level)
    return crossing_members(situation, columns(situation.incoming, changes, freezing=True))


def _check_count(members: int, seed: int) -> None:
    if not LEAST_MEMBERS <= members <= MOST_MEMBERS:
        raise OutOfRangeError(
            f"members: {members} is outside {LEAST_MEMBERS} to {MOST_MEMBERS}. Fewer than {LEAST_MEMBERS} have no "
            "range of 10 to 90 %; a few hundred are plenty. Leave the spread out where no range is wanted."
        )
    if seed < 0:
        raise OutOfRangeError(f"seed: {seed} is below 0. Give a whole number, 0 or more.")


def _worked(chunk: _Chunk) -> tuple[Members, list[Failed]]:
    """Members of a chunk, those that fail apart."""
    try:
        return _together(chunk), []
    except OroliftError as error:
        if chunk.level.shape[0] == 1:
            return Members(np.zeros(1, dtype=bool), {}, {}), [Failed(chunk.first, str(error))]
    parts, failed = [], []
    for i in range(chunk.level.shape[0]):
        alone = replace(chunk, first=chunk.first + i, level=chunk.level[i : i + 1])
        part, lost = _worked(alone)
        parts.append(part)
        failed += lost
    return _joined(parts, [1] * len(parts)), failed


def _together(chunk: _Chunk) -> Members:
    """Members of a chunk, marched together; those without ice apart from the others."""
    parts, rows = [], []
    for some, variation in variations_of(chunk.situation, chunk.uncertainty, chunk.level):
        parts.append(
            members_of(
                chunk.situation,
                variation,
                beside=chunk.beside,
                streamlines=chunk.streamlines,
                observed_at=chunk.observed_at,
            )
        )
        rows.append(some)
    whole = _joined(parts, [one.size for one in rows])
    back = np.argsort(np.concatenate(rows))
    return Members(
        whole.crosses[back],
        {name: value[back] for name, value in whole.values.items()},
        {name: value[back] for name, value in whole.sites.items()},
    )


def _joined(parts: list[Members], sizes: list[int]) -> Members:
    """Members one after the other; NaN where a part has nothing."""

    def one(part: dict[str, Array], name: str, size: int, shape: tuple[int, ...]) -> Array:
        return part[name] if name in part else np.full((size, *shape), np.nan)

    values: dict[str, Array] = {}
    sites: dict[str, Array] = {}
    for out, dicts in ((values, [part.values for part in parts]), (sites, [part.sites for part in parts])):
        shapes = {name: value.shape[1:] for found in dicts for name, value in found.items()}
        for name, shape in shapes.items():
            rows = [one(found, name, size, shape) for found, size in zip(dicts, sizes, strict=True)]
            out[name] = np.concatenate(rows)
    return Members(np.concatenate([part.crosses for part in parts]), values, sites)
