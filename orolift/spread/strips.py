"""Strips along the wind, side by side: a crossing for each, and what it says of the air near its ground."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.crossing.ground_values import ground_values
from orolift.errors import OroliftError
from orolift.spread.engine import in_order, outcomes

if TYPE_CHECKING:
    from collections.abc import Callable, Collection, Iterable
    from concurrent.futures import Executor

    from orolift.crossing.ground_values import GroundValues
    from orolift.crossing.situation import Situation


@dataclass(frozen=True, eq=False)
class Strip:
    """A line among parallel ones.

    Attributes
    ----------
    start : float [m]
        Where its transect begins, along the axis they share.
    situation : Situation or None
        None where it cannot be drawn.
    reason : str
        Why not.
    """

    start: float
    situation: Situation | None
    reason: str = ""


@dataclass(frozen=True, eq=False)
class StripAir:
    """What came of a strip; values are None, with the reason, where nothing could be worked out."""

    start: float
    values: GroundValues | None
    reason: str = ""


def strip_air(strip: Strip, *, methods: bool = False) -> StripAir:
    """The air near the ground of one strip.

    Parameters
    ----------
    strip : Strip
    methods : bool
        Whether the range of the methods of the lee wind is wanted.

    Returns
    -------
    StripAir
    """
    if strip.situation is None:
        return StripAir(strip.start, None, strip.reason)
    try:
        return StripAir(strip.start, ground_values(strip.situation, methods=methods))
    except OroliftError as error:
        return StripAir(strip.start, None, str(error))


def air_of_strips(
    strips: Iterable[Strip],
    executor: Executor | None = None,
    told: Callable[[], None] | None = None,
    methods: Collection[int] = (),
) -> tuple[StripAir, ...]:
    """The air near the ground of strips, in their order.

    Parameters
    ----------
    strips : iterable of Strip
    executor : Executor, optional
        None works here.
    told : callable, optional
        Called when one is finished.
    methods : collection of int
        Numbers of the strips for which the range of the methods of the lee wind is wanted.

    Returns
    -------
    tuple of StripAir

    Raises
    ------
    Exception
        If a strip fails of anything but its terrain or its air: that is a fault of ours.
    """
    done = []
    tasks = ((strip, number in methods) for number, strip in enumerate(strips))
    for outcome in outcomes(_air, tasks, executor):
        if outcome.error is not None:
            raise outcome.error
        done.append(outcome)
        if told is not None:
            told()
    return tuple(one.value for one in in_order(done) if one.value is not None)


def _air(task: tuple[Strip, bool]) -> StripAir:
    return strip_air(task[0], methods=task[1])
