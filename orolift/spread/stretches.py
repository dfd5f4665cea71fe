"""When the air of each hour is at a site, and the stretches of time in which something holds there."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.fire.night import spells

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    Array = NDArray[np.float64]


@dataclass(frozen=True)
class Stretch:
    """A stretch of time in which something holds at a site.

    Attributes
    ----------
    first, last : int
        Numbers of its first and last hour among those of the timeline.
    onset, end : float or None [s]
        Halfway between the arrival of the last hour without and the first with it, and the other way round; None where
        no hour before or after it is known.
    onset_error, end_error : float or None [s]
        One standard deviation.
    unknown : int
        Hours in it of which nothing is known.
    """

    first: int
    last: int
    onset: float | None
    onset_error: float | None
    end: float | None
    end_error: float | None
    unknown: int


def arrivals(time: Array, way: Array) -> Array:
    """When the air of each hour is at a site, in the order of the hours.

    Parameters
    ----------
    time : ndarray (n,) [s]
        Upwind, increasing.
    way : ndarray (n,) [s]
        Time on the way; NaN for air that does not arrive.

    Returns
    -------
    ndarray (n,) [s]
        Never decreasing.

    Notes
    -----
    Air that faster air behind it would overtake is pushed by that and arrives with it. Hours whose air does
    not arrive stand where it would, with the time on the way of the hours around them.

    Examples
    --------
    >>> arrivals(np.array([0.0, 3600.0, 7200.0]), np.array([9000.0, 3600.0, np.nan]))
    array([ 7200.,  7200., 10800.])
    """
    known = np.isfinite(way)
    if not known.any():
        return np.array(time)
    there = time + np.interp(time, time[known], way[known])
    return np.minimum.accumulate(there[::-1])[::-1]


def stretches(met: Sequence[bool], known: NDArray[np.bool_], arrival: Array, error: Array) -> tuple[Stretch, ...]:
    """Stretches of time in which something holds at a site, with onset and end.

    Parameters
    ----------
    met : sequence of bool, length n
        Whether it holds in each hour.
    known : ndarray of bool, (n,)
        Whether that is known.
    arrival, error : ndarray (n,) [s]
        As in `SiteTimeline`.

    Returns
    -------
    tuple of Stretch
        In order.

    Notes
    -----
    Hours of which nothing is known neither begin nor end a stretch. The error of onset and end joins half the time
    between the two hours with that of the travel time: its share that the wind is uncertain by, and its spread between
    the streamlines that arrive.
    """
    order = np.flatnonzero(known)
    flags = np.asarray(met, dtype=bool)[order]

    def change(before: int, after: int) -> tuple[float, float]:
        a, b = order[before], order[after]
        ways = [value for value in (error[a], error[b]) if np.isfinite(value)]
        way = float(max(ways, default=0.0))
        return 0.5 * float(arrival[a] + arrival[b]), float(np.hypot(0.5 * (arrival[b] - arrival[a]), way))

    out = []
    for one in spells(flags):
        onset = None if one.open_start else change(one.start - 1, one.start)
        end = None if one.open_end else change(one.end - 1, one.end)
        first, last = int(order[one.start]), int(order[one.end - 1])
        out.append(
            Stretch(
                first=first,
                last=last,
                onset=None if onset is None else onset[0],
                onset_error=None if onset is None else onset[1],
                end=None if end is None else end[0],
                end_error=None if end is None else end[1],
                unknown=int((~known[first : last + 1]).sum()),
            )
        )
    return tuple(out)
