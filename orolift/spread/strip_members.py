"""Members on some of the strips of a map: all members of a strip marched together, the same draws on each strip."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.ground_values import LEVELS, ground_values_of_members
from orolift.errors import OroliftError
from orolift.spread.draws import variations_of
from orolift.spread.engine import in_order, outcomes
from orolift.spread.uncertainty import COLUMNS, checked, latin_hypercube

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence
    from concurrent.futures import Executor

    from numpy.typing import NDArray

    from orolift.crossing.ground_values import GroundValues
    from orolift.crossing.situation import Situation
    from orolift.spread.spread import Drawn
    from orolift.spread.strips import Strip
    from orolift.spread.uncertainty import Uncertainty

    Array = NDArray[np.float64]

MEMBER_STRIPS = 14
"""About so many strips have members. On a map of usual size they lie about a swath apart, the scale at which the flow
is taken to feel the ground; what members differ by changes less across the wind than the answer. A judgement."""
MOST_MEMBERS = 32
"""Members of a map at most: those of a crossing where nobody says how many, so that its map and its sites agree."""
MEMBER_LEVELS = (-1500.0, -700.0, -300.0, 0.0, 120.0, 300.0, 700.0, 1500.0)
"""Heights over the ground of the line at which members are worked out; some of `ground_values.LEVELS`."""
EVERY = 2
"""Of the places of a march one in so many has members; a judgement."""


@dataclass(frozen=True, eq=False)
class StripMembers:
    """A strip in members.

    Attributes
    ----------
    number : int
        Of the strip in its map.
    values : tuple of (GroundValues or None), (m,)
        None for a member that does not cross or could not be worked out.
    """

    number: int
    values: tuple[GroundValues | None, ...]


@dataclass(frozen=True, eq=False)
class _Task:
    number: int
    strip: Strip
    uncertainty: Uncertainty
    level: Array


def strips_with_members(known: Sequence[bool], across: Array) -> tuple[int, ...]:
    """Numbers of the strips that get members: evenly spaced, the case's own line among them.

    Parameters
    ----------
    known : sequence of bool
        Whether each strip can be drawn.
    across : ndarray (ns,) [m]
        Distance of each from the case's line.

    Returns
    -------
    tuple of int

    Examples
    --------
    >>> strips_with_members([True] * 40, np.arange(-20.0, 20.0))
    (2, 5, 8, 11, 14, 17, 20, 23, 26, 29, 32, 35, 38)
    """
    step = max(1, -(-sum(known) // MEMBER_STRIPS))
    own = int(np.argmin(np.abs(across)))
    even = tuple(i for i in range(own % step, len(known), step) if known[i])
    return even or tuple(sorted((i for i, one in enumerate(known) if one), key=lambda i: abs(i - own))[:1])


def draw(drawn: Drawn) -> Array:
    """Where each member of a map lies in what each input may be, (m, columns) [1].

    As many as a crossing has, at most 32, and those of the crossing where it has no more.
    """
    return latin_hypercube(min(drawn.members, MOST_MEMBERS), len(COLUMNS), drawn.seed)


def members_of_strips(
    strips: Sequence[Strip],
    numbers: Sequence[int],
    uncertainty: Uncertainty,
    level: Array,
    executor: Executor | None = None,
    told: Callable[[], None] | None = None,
) -> tuple[StripMembers, ...]:
    """Some strips of a map in members.

    Parameters
    ----------
    strips : sequence of Strip
    numbers : sequence of int
        Which of them; each can be drawn.
    uncertainty : Uncertainty
    level : ndarray (m, columns) [1]
        From `draw`: the same for every strip, so that a member is one map.
    executor : Executor, optional
        None works here.
    told : callable, optional
        Called when a strip is finished.

    Returns
    -------
    tuple of StripMembers
        In the order of `numbers`.

    Raises
    ------
    Exception
        If a strip fails of anything but its terrain or its air: that is a fault of ours.
    """
    tasks = [_Task(i, strips[i], checked(uncertainty), level) for i in numbers]
    done = []
    for outcome in outcomes(_worked, tasks, executor):
        if outcome.error is not None:
            raise outcome.error
        done.append(outcome)
        if told is not None:
            told()
    return tuple(one.value for one in in_order(done) if one.value is not None)


def _worked(task: _Task) -> StripMembers:
    if task.strip.situation is None:
        return StripMembers(task.number, (None,) * task.level.shape[0])
    return StripMembers(task.number, _together(task.strip.situation, task.uncertainty, task.level))


def _together(situation: Situation, uncertainty: Uncertainty, level: Array) -> tuple[GroundValues | None, ...]:
    """Members of a strip; where one of them fails, each by itself."""
    out: list[GroundValues | None] = [None] * level.shape[0]
    try:
        for rows, variation in variations_of(situation, uncertainty, level):
            found = ground_values_of_members(situation, variation, levels=MEMBER_LEVELS, every=EVERY)
            for row, values in zip(rows, found, strict=True):
                out[row] = values
    except OroliftError:
        if level.shape[0] == 1:
            return (None,)
        each = [_together(situation, uncertainty, level[i : i + 1]) for i in range(level.shape[0])]
        return tuple(values for (values,) in each)
    return tuple(out)


def level_numbers() -> list[int]:
    """Where the levels of members are among those of the answer."""
    return [LEVELS.index(level) for level in MEMBER_LEVELS]
