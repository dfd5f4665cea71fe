"""Crossings held against rows of observations: which estimate belongs to which row, and how far off it is."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.spread.estimates import REFERENCES
from orolift.spread.verification import Score, contingency, coverage, score, skill

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from orolift.spread.estimates import Estimates, Quantity, Reference, Values
    from orolift.spread.verification import Contingency

    Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Observations:
    """Rows of observations; arrays (n,), NaN where nothing was observed.

    Attributes
    ----------
    time : ndarray [s]
        Since 1970-01-01T00:00:00 UTC; NaN where the row has none.
    place : ndarray of int
        Number of the place.
    values : dict of Quantity to ndarray
        Every quantity, those that follow from others too.
    wind_from : ndarray [rad]
    elevation : ndarray [m above sea level]
        Of the instrument, where the file says it.
    crest_temperature, crest_pressure, crest_elevation : ndarray [K], [Pa], [m above sea level]
        Of a station on the crest, at the same time.
    line : ndarray of int
        Of the file.
    """

    time: Array
    place: NDArray[np.int_]
    values: Values
    wind_from: Array
    elevation: Array
    crest_temperature: Array
    crest_pressure: Array
    crest_elevation: Array
    line: NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class Paired:
    """One quantity: every row in which it was observed near an estimate; arrays (n,).

    Attributes
    ----------
    row : ndarray of int
        Of the observations.
    which : ndarray of int
        Number of the estimates.
    place : ndarray of int
    estimated, observed, low, high : ndarray
    references : dict of Reference to ndarray
    in_lee : ndarray of bool
    """

    row: NDArray[np.int_]
    which: NDArray[np.int_]
    place: NDArray[np.int_]
    estimated: Array
    observed: Array
    low: Array
    high: Array
    references: dict[Reference, Array]
    in_lee: NDArray[np.bool_]

    @property
    def inside(self) -> Array:
        """1 inside the range, 0 outside, NaN without a range."""
        known = np.isfinite(self.low) & np.isfinite(self.high)
        return np.where(known, (self.observed >= self.low) & (self.observed <= self.high), np.nan)


@dataclass(frozen=True)
class Verdict:
    """Scores of one quantity over all pairs in the lee.

    Attributes
    ----------
    quantity : Quantity
    score : Score
    coverage : float or None [1]
        Share inside the range.
    references : dict of Reference to Score
        Of the simple answers, over the same pairs.
    skill : dict of Reference to float
        Of the estimate against each.
    """

    quantity: Quantity
    score: Score
    coverage: float | None
    references: dict[Reference, Score]
    skill: dict[Reference, float]


def nearest_estimates(seen: Observations, estimates: Sequence[Estimates], within: float) -> NDArray[np.int_]:
    """Number of the estimates that belong to each row; -1 for none.

    Parameters
    ----------
    seen : Observations
    estimates : sequence of Estimates
    within : float [s]
        Rows farther than this from every estimate of their place in time belong to none. A
        single case without a time takes every row, a row without a time belongs to a single case.

    Returns
    -------
    ndarray of int (n,)
    """
    if len(estimates) == 1 and estimates[0].time is None:
        return np.zeros(seen.time.size, dtype=np.int_)
    arrival = np.stack([one.arrival for one in estimates])
    found = np.full(seen.time.size, -1)
    for place in range(arrival.shape[1]):
        rows = np.flatnonzero((seen.place == place) & np.isfinite(seen.time))
        order = np.argsort(arrival[:, place], kind="stable")
        order = order[np.isfinite(arrival[order, place])]
        if not order.size:
            continue
        times = arrival[order, place]
        nearest = np.searchsorted(0.5 * (times[1:] + times[:-1]), seen.time[rows])
        near = np.abs(seen.time[rows] - times[nearest]) <= within
        found[rows[near]] = order[nearest[near]]
    if len(estimates) == 1:
        found[np.isnan(seen.time)] = 0
    return found


def paired(seen: Observations, estimates: Sequence[Estimates], which: NDArray[np.int_], quantity: Quantity) -> Paired:
    """Every row in which a quantity was observed and estimated.

    Parameters
    ----------
    seen : Observations
    estimates : sequence of Estimates
    which : ndarray of int (n,)
        As of `nearest_estimates`.
    quantity : Quantity

    Returns
    -------
    Paired
    """

    def table(fields: list[Array]) -> Array:
        return np.stack(fields)

    estimated = table([one.values[quantity] for one in estimates])
    known = (which >= 0) & np.isfinite(seen.values[quantity])
    row = np.flatnonzero(known)
    k, p = which[row], seen.place[row]
    there = np.isfinite(estimated[k, p])
    row, k, p = row[there], k[there], p[there]
    references: dict[Reference, Array] = {
        name: table([one.references[name].get(quantity, np.full(one.in_lee.size, np.nan)) for one in estimates])[k, p]
        for name in REFERENCES
    }
    return Paired(
        row=row,
        which=k,
        place=p,
        estimated=estimated[k, p],
        observed=seen.values[quantity][row],
        low=table([one.low[quantity] for one in estimates])[k, p],
        high=table([one.high[quantity] for one in estimates])[k, p],
        references=references,
        in_lee=np.stack([one.in_lee for one in estimates])[k, p],
    )


def averaged(pairs: Paired) -> tuple[Paired, NDArray[np.int_]]:
    """One pair for each place and estimate, its observation the mean of all near it, and how many those are.

    Parameters
    ----------
    pairs : Paired

    Returns
    -------
    Paired, ndarray of int
        `row` is that of the first of them.
    """
    cells, first, member, count = np.unique(
        np.stack([pairs.which, pairs.place], axis=-1),
        axis=0,
        return_index=True,
        return_inverse=True,
        return_counts=True,
    )
    mean = np.bincount(member.ravel(), weights=pairs.observed, minlength=len(cells)) / count
    return (
        Paired(
            row=pairs.row[first],
            which=pairs.which[first],
            place=pairs.place[first],
            estimated=pairs.estimated[first],
            observed=mean,
            low=pairs.low[first],
            high=pairs.high[first],
            references={name: values[first] for name, values in pairs.references.items()},
            in_lee=pairs.in_lee[first],
        ),
        count,
    )


def verdict(pairs: Paired, quantity: Quantity) -> Verdict | None:
    """Scores over the pairs in the lee; None without any."""
    lee = pairs.in_lee
    own = score(pairs.estimated[lee], pairs.observed[lee])
    if own is None:
        return None
    covered = coverage(pairs.low[lee], pairs.high[lee], pairs.observed[lee])
    scores, skills = {}, {}
    for name, values in pairs.references.items():
        other = score(values[lee], pairs.observed[lee])
        better = skill(pairs.estimated[lee], values[lee], pairs.observed[lee])
        if other is not None:
            scores[name] = other
        if better is not None:
            skills[name] = better
    return Verdict(quantity, own, None if covered is None else covered[0], scores, skills)


def event_table(pairs: Paired, threshold: float, *, above: bool) -> Contingency | None:
    """Hits and false alarms of a quantity reaching a threshold in the lee.

    Parameters
    ----------
    pairs : Paired
    threshold : float [SI]
    above : bool
        Whether the event is at or above it, else at or below.

    Returns
    -------
    Contingency or None
        None without pairs.
    """
    lee = pairs.in_lee

    def reached(values: Array) -> Array:
        return np.asarray(values >= threshold if above else values <= threshold, dtype=np.float64)

    return contingency(reached(pairs.estimated[lee]), reached(pairs.observed[lee]))
