"""Estimates against observations: errors, skill, coverage of ranges, hits and false alarms."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Array = NDArray[np.float64]


@dataclass(frozen=True)
class Score:
    """Errors of one quantity, estimate minus observed.

    Attributes
    ----------
    count : int
        Pairs in which both are known.
    bias, mean_absolute_error, root_mean_square_error : float [unit of the quantity]
    """

    count: int
    bias: float
    mean_absolute_error: float
    root_mean_square_error: float


@dataclass(frozen=True)
class Contingency:
    """How often an event was estimated and how often it happened.

    Attributes
    ----------
    hits, false_alarms, misses, correct_rejections : int
    """

    hits: int
    false_alarms: int
    misses: int
    correct_rejections: int

    @property
    def count(self) -> int:
        """All pairs."""
        return self.hits + self.false_alarms + self.misses + self.correct_rejections

    @property
    def detected(self) -> float | None:
        """Probability of detection: hits over all that happened; None when nothing did."""
        return _ratio(self.hits, self.hits + self.misses)

    @property
    def false_alarm_ratio(self) -> float | None:
        """False alarms over all that was estimated; None when nothing was."""
        return _ratio(self.false_alarms, self.hits + self.false_alarms)

    @property
    def threat_score(self) -> float | None:
        """Hits over hits, misses and false alarms (critical success index); None without any."""
        return _ratio(self.hits, self.hits + self.misses + self.false_alarms)

    @property
    def heidke(self) -> float | None:
        """Share of what chance got wrong that was got right (Heidke skill score); None where chance gets all right."""
        a, b, c, d = self.hits, self.false_alarms, self.misses, self.correct_rejections
        return _ratio(2 * (a * d - b * c), (a + c) * (c + d) + (a + b) * (b + d))


def score(estimated: ArrayLike, observed: ArrayLike) -> Score | None:
    """Errors over all pairs in which both are known.

    Parameters
    ----------
    estimated, observed : array_like (n,)
        NaN where unknown.

    Returns
    -------
    Score or None
        None without a pair.

    Notes
    -----
    Bias mean(e), mean absolute error mean(|e|), root mean square error
    sqrt(mean(e^2)), e = estimate minus observed (Wilks 2011, chapter 8).

    Examples
    --------
    >>> score([3.0, 5.0, float("nan")], [2.0, 7.0, 1.0])
    Score(count=2, bias=-0.5, mean_absolute_error=1.5, root_mean_square_error=1.5811388300841898)
    """
    error = np.asarray(estimated, dtype=np.float64) - np.asarray(observed, dtype=np.float64)
    error = error[np.isfinite(error)]
    if error.size == 0:
        return None
    return Score(
        count=int(error.size),
        bias=float(np.mean(error)),
        mean_absolute_error=float(np.mean(np.abs(error))),
        root_mean_square_error=float(np.sqrt(np.mean(error**2))),
    )


def skill(estimated: ArrayLike, reference: ArrayLike, observed: ArrayLike) -> float | None:
    """Skill against a reference: share of its mean absolute error that the estimate avoids.

    Parameters
    ----------
    estimated, reference, observed : array_like (n,)
        NaN where unknown; only pairs in which all three are known count.

    Returns
    -------
    float or None
        1 is perfect, 0 no better than the reference, negative worse; None
        without a pair, or where the reference has no error.

    Notes
    -----
    (A - A_ref) / (0 - A_ref) with the mean absolute error as the measure of accuracy A (Wilks 2011, eq. 8.4).

    Examples
    --------
    >>> skill([1.0, 3.0], [4.0, 6.0], [2.0, 2.0])
    0.6666666666666667
    """
    fields = [np.asarray(x, dtype=np.float64) for x in (estimated, reference, observed)]
    known = np.all(np.isfinite(fields), axis=0)
    ours, other = (score(x[known], fields[2][known]) for x in fields[:2])
    if ours is None or other is None or other.mean_absolute_error == 0.0:
        return None
    return 1.0 - ours.mean_absolute_error / other.mean_absolute_error


def coverage(low: ArrayLike, high: ArrayLike, observed: ArrayLike) -> tuple[float, int] | None:
    """Share of observations inside their range, ends included, and the number of them.

    Examples
    --------
    >>> coverage([0.0, 0.0], [1.0, 1.0], [0.5, 2.0])
    (0.5, 2)
    """
    fields = [np.asarray(x, dtype=np.float64) for x in (low, high, observed)]
    known = np.all(np.isfinite(fields), axis=0)
    if not known.any():
        return None
    lower, upper, seen = (x[known] for x in fields)
    return float(np.mean((seen >= lower) & (seen <= upper))), int(known.sum())


def contingency(estimated: ArrayLike, observed: ArrayLike) -> Contingency | None:
    """Hits, false alarms, misses and correct rejections of an event.

    Parameters
    ----------
    estimated, observed : array_like (n,)
        1 where it is estimated or happened, 0 where not, NaN where unknown.

    Returns
    -------
    Contingency or None
        None without a pair.

    Examples
    --------
    >>> contingency([1.0, 1.0, 0.0, float("nan")], [1.0, 0.0, 0.0, 1.0])
    Contingency(hits=1, false_alarms=1, misses=0, correct_rejections=1)
    """
    ours, seen = (np.asarray(x, dtype=np.float64) for x in (estimated, observed))
    known = np.isfinite(ours) & np.isfinite(seen)
    if not known.any():
        return None
    yes, was = ours[known] > 0.5, seen[known] > 0.5
    return Contingency(
        int((yes & was).sum()), int((yes & ~was).sum()), int((~yes & was).sum()), int((~yes & ~was).sum())
    )


def _ratio(part: int, whole: int) -> float | None:
    return part / whole if whole else None
