"""How many members agree on a direction: each has its own worst one, and the same deviations in all of them."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from orolift.spread.site_state import SiteState

    Array = NDArray[np.float64]

BESIDE = math.radians(30.0)
"""Largest step [rad] at which the two neighbours of a direction count as the same answer: the wind itself is uncertain
by 10 to 20 degrees; a judgement."""
TIE = 1e-3
"""Share by which a value may fall short of the largest and still be it: members agree with crossings of their own to
about that, and a symmetric range has its largest values twice."""


@dataclass(frozen=True)
class Agreement:
    """Shares of the members whose own direction is that of the answer, or beside it.

    Attributes
    ----------
    warmest, driest, fire, rain : float or None [1]
        As the directions of `orolift.spread.bearings.SiteBearings`; None where there is no such direction or no member
        that counts.
    """

    warmest: float | None
    driest: float | None
    fire: float | None
    rain: float | None


def reach_of(step: float) -> float:
    """Angle [rad] from a direction within which members agree with it.

    Parameters
    ----------
    step : float [rad]
        Between two directions.

    Returns
    -------
    float [rad]
        One step; none where that is more than 30 degrees.

    Examples
    --------
    >>> round(math.degrees(reach_of(math.radians(10.0)))), reach_of(math.radians(45.0))
    (10, 0.0)
    """
    return step if step <= BESIDE + 1e-9 else 0.0


def agreeing(
    states: Sequence[SiteState],
    counts: Sequence[bool],
    wind_from: Array,
    *,
    name: str,
    chosen: int | None,
    reach: float,
    sign: float = 1.0,
    least: float = -math.inf,
) -> float | None:
    """Share of the members whose own extreme direction is one of all, or beside it.

    Parameters
    ----------
    states : sequence of SiteState
        Of one site, with the members of every direction in the same order.
    counts : sequence of bool
        Directions that may be the extreme one.
    wind_from : ndarray (n,) [rad]
    name : str
        Of the array of members that is compared, the error of the method included.
    chosen : int or None
        Number of the direction.
    reach : float [rad]
        From `reach_of`.
    sign : float
        -1 for the lowest value.
    least : float
        Members whose largest value is below it have no such direction and do not count.

    Returns
    -------
    float or None [1]
        None without a direction, or without members that count.

    Notes
    -----
    The error of the method has the same sign in all directions. Members that do not cross in a direction
    have no value there; they count by their other directions.
    """
    if chosen is None:
        return None
    have, values = _values(states, counts, name, sign)
    most, there = _most(values, least)
    if not there.any():
        return None
    away = np.abs((wind_from[have] - wind_from[chosen] + math.pi) % (2.0 * math.pi) - math.pi)
    near = values[away <= reach + 1e-6].max(axis=0, initial=-np.inf)
    return float(np.mean((near >= most - TIE * np.abs(most))[there]))


def shares_by_direction(states: Sequence[SiteState], counts: Sequence[bool], name: str) -> Array:
    """In what share of the members each direction is the one with the largest value.

    Parameters
    ----------
    states, counts, name
        As for `agreeing`.

    Returns
    -------
    ndarray (n,) [1]
        They add up to 1; NaN in directions that may not be the extreme one or have no members, and in all where no
        member has a value. Of two directions alike a member has the first.
    """
    out = np.full(len(states), np.nan)
    have, values = _values(states, counts, name, 1.0)
    _, there = _most(values, -math.inf)
    if there.any():
        out[have] = np.bincount(values[:, there].argmax(axis=0), minlength=len(have)) / there.sum()
    return out


def _values(
    states: Sequence[SiteState], counts: Sequence[bool], name: str, sign: float
) -> tuple[NDArray[np.intp], Array]:
    """Numbers of the directions that count and have members, and their values (directions, m); -inf without one."""
    found = {
        i: sign * state.members.full[name]
        for i, (state, there) in enumerate(zip(states, counts, strict=True))
        if there and state.members is not None and name in state.members.full
    }
    values = np.array(list(found.values())) if found else np.empty((0, 0))
    return np.array(list(found), dtype=np.intp), np.where(np.isfinite(values), values, -np.inf)


def _most(values: Array, least: float) -> tuple[Array, NDArray[np.bool_]]:
    """Largest value of each member, and which members have one that is not below the least."""
    most = values.max(axis=0, initial=-np.inf)
    return most, np.isfinite(most) & (most >= least)
