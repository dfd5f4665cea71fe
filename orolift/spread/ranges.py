"""What members say together: ranges, chances, and which input matters most."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.fire.chances import FEWEST, TENTHS

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.spread.spread import Spread

    Array = NDArray[np.float64]


def range_of(values: Array) -> tuple[float, float] | None:
    """10 and 90 % of what members give.

    Parameters
    ----------
    values : ndarray (m,)
        NaN in members without a value, which do not count.

    Returns
    -------
    (float, float) or None
        None where fewer than five members have a value.

    Examples
    --------
    >>> range_of(np.arange(11.0))
    (1.0, 9.0)
    """
    there = values[np.isfinite(values)]
    if there.size < FEWEST:
        return None
    low, high = np.quantile(there, TENTHS)
    return float(low), float(high)


def chance_of(happens: Array) -> float | None:
    """Share of members in which something happens.

    Parameters
    ----------
    happens : ndarray (m,)
        0 or 1, or a chance in each member; NaN in members that do not count.

    Returns
    -------
    float or None [1]
        None where no member counts.
    """
    there = happens[np.isfinite(happens)]
    return float(there.mean()) if there.size else None


def share_of_members(spread: Spread | None, name: str) -> float | None:
    """Share of the members that cross in which a number of the crossing has a value.

    Parameters
    ----------
    spread : Spread or None
    name : str
        In `Spread.values`.

    Returns
    -------
    float or None [1]
        None where no member crosses.
    """
    if spread is None or name not in spread.values or not spread.crosses.any():
        return None
    return float(np.isfinite(spread.values[name][spread.crosses]).mean())


def ranks(values: Array) -> Array:
    """Ranks from 1, the mean rank where values are equal.

    Examples
    --------
    >>> ranks(np.array([3.0, 1.0, 3.0]))
    array([2.5, 1. , 2.5])
    """
    _, at, count = np.unique(values, return_inverse=True, return_counts=True)
    last = np.cumsum(count)
    return np.asarray((last - 0.5 * (count - 1))[at])


def rank_correlation(one: Array, other: Array) -> float:
    """Correlation of the ranks of two series (Spearman 1904); 0 where one of them does not vary.

    Parameters
    ----------
    one, other : ndarray (m,)
        Pairs with NaN do not count.

    Returns
    -------
    float [1]

    Examples
    --------
    >>> round(rank_correlation(np.array([1.0, 2.0, 3.0]), np.array([1.0, 8.0, 27.0])), 9)
    1.0
    """
    both = np.isfinite(one) & np.isfinite(other)
    if both.sum() < FEWEST - 2:
        return 0.0
    a, b = ranks(one[both]), ranks(other[both])
    a, b = a - a.mean(), b - b.mean()
    size = float(np.sqrt(np.sum(a * a) * np.sum(b * b)))
    return float(np.sum(a * b) / size) if size > 0.0 else 0.0


@dataclass(frozen=True)
class Influence:
    """How one input goes with a result.

    Attributes
    ----------
    name : str
        Of the input, or of the error of the method.
    correlation : float [1]
        Of ranks; positive when more of the one goes with more of the other.
    """

    name: str
    correlation: float


def influences(spread: Spread, values: Array, names: tuple[str, ...] | None = None) -> tuple[Influence, ...]:
    """Inputs by how much they matter for a result, the most important first.

    Parameters
    ----------
    spread : Spread
    values : ndarray (m,)
        Of the result, with or without the error of the method.
    names : tuple of str, optional
        Of the inputs, and of the error of the method, that are looked at; the inputs that vary when left out.

    Returns
    -------
    tuple of Influence

    Notes
    -----
    With m members a correlation below about 2 / sqrt(m) is chance: see `noise`.
    """
    chosen = spread.varied if names is None else names
    found = [Influence(name, rank_correlation(spread.level[name], values)) for name in chosen]
    return tuple(sorted(found, key=lambda one: -abs(one.correlation)))


def noise(members: int) -> float:
    """Rank correlation that pure chance exceeds once in about twenty times, among this many members [1]."""
    return 2.0 / float(np.sqrt(max(members - 1, 1)))


def remarks(spread: Spread) -> tuple[str, ...]:
    """What is doubtful about the members, as cautions: those that do not cross, and those that were lost.

    Parameters
    ----------
    spread : Spread

    Returns
    -------
    tuple of str
    """
    found = []
    lost = len(spread.failed)
    still = spread.members - lost - int(spread.crosses.sum())
    if still:
        found.append(
            f"In {still} of {spread.members} members the wind across the crest is 2 m/s or less: the air may not cross "
            "at all. The ranges are those of the members that cross."
        )
    if lost:
        found.append(f"{lost} of {spread.members} members could not be worked out: {spread.failed[0].reason}")
    return tuple(found)
