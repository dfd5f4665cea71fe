"""Crossings held against rows of observations: which estimate belongs to which row, and how far off it is."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from orolift.air.humidity import dew_point_from_mixing_ratio, relative_humidity_from_mixing_ratio
from orolift.crossing.model_error import model_error
from orolift.crossing.onset import potential_excess
from orolift.crossing.simple import simple_answers
from orolift.crossing.sites import LEAST_VAPOUR
from orolift.spread.at_sites import TENTH, members_at
from orolift.spread.ranges import range_of
from orolift.spread.verification import Score, contingency, coverage, score, skill

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping, Sequence

    from numpy.typing import ArrayLike, NDArray

    from orolift.air.parcel import Parcel
    from orolift.crossing.result import Crossing, LeeAir, Side
    from orolift.spread.spread import Spread
    from orolift.spread.verification import Contingency

    Array = NDArray[np.float64]

Quantity = Literal[
    "temperature", "dew_point", "mixing_ratio", "relative_humidity", "wind", "gust", "pressure", "rain_rate"
]
Reference = Literal["unchanged", "popular_picture", "crest_air"]

QUANTITIES: tuple[Quantity, ...] = (
    "temperature",
    "dew_point",
    "mixing_ratio",
    "relative_humidity",
    "wind",
    "gust",
    "pressure",
    "rain_rate",
)
REFERENCES: tuple[Reference, ...] = ("unchanged", "popular_picture", "crest_air")
MEMBER_NAMES: dict[Quantity, str] = {
    "temperature": "temperature",
    "dew_point": "dew_point",
    "mixing_ratio": "mixing_ratio",
    "relative_humidity": "relative_humidity",
    "wind": "wind_10m",
    "gust": "gust",
    "pressure": "pressure",
}
"""Names of the quantities in the arrays of a spread."""
HUMID: tuple[Quantity, ...] = ("temperature", "mixing_ratio", "dew_point", "relative_humidity")
"""Quantities the simple answers speak of."""
UNKNOWN = (np.nan, np.nan)
Values = dict[Quantity, "Array"]


@dataclass(frozen=True)
class SiteEstimate:
    """What one crossing gives at one site, in a few numbers: small enough to keep for thousands of hours.

    Attributes
    ----------
    side : 'windward', 'crest' or 'lee'
    values : dict of Quantity to float
        In SI: K, kg per kg of dry air, 1, m s-1, Pa, kg m-2 s-1; NaN where nothing is estimated. `wind` is at 10 m,
        `gust` the middle of its range.
    ranges : dict of Quantity to (float, float)
        10 % and 90 % for temperature and humidity, that of the methods for wind and gust.
    references : dict of Reference to dict of Quantity to float
        The simple answers, for temperature and humidity.
    excess : float [K]
        Potential temperature minus that of the lowest air over the crest.
    wind_from : float [rad]
        Direction from which the air crosses the range.
    way : float [s]
        Time from where the air was observed; 0 where it was not asked for.
    """

    side: Side
    values: dict[Quantity, float]
    ranges: dict[Quantity, tuple[float, float]]
    references: dict[Reference, dict[Quantity, float]]
    excess: float
    wind_from: float
    way: float = 0.0


@dataclass(frozen=True, eq=False)
class Estimates:
    """What one case or hour gives at all places; arrays (places,), NaN where nothing is estimated.

    Attributes
    ----------
    time : float or None [s]
        Of the incoming air; None when the case names none.
    arrival : ndarray [s]
        Time each estimate is valid for.
    values, low, high : dict of Quantity to ndarray
        As in `SiteEstimate`.
    references : dict of Reference to dict of Quantity to ndarray
    side : tuple of (Side or None)
    excess, wind_from : ndarray [K], [rad]
    """

    time: float | None
    arrival: Array
    values: Values
    low: Values
    high: Values
    references: dict[Reference, Values]
    side: tuple[Side | None, ...]
    excess: Array
    wind_from: Array

    @property
    def in_lee(self) -> NDArray[np.bool_]:
        """Which places lie in the lee."""
        return np.array([side == "lee" for side in self.side], dtype=bool)


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


def site_estimate(
    crossing: Crossing, air: LeeAir, ranges: Mapping[Quantity, tuple[float, float]] | None = None, *, way: float = 0.0
) -> SiteEstimate:
    """What a crossing gives at a site, with ranges and the simple answers.

    Parameters
    ----------
    crossing : Crossing
    air : LeeAir
        One of its sites.
    ranges : mapping of Quantity to (float, float), optional
        The 10 % and 90 % of many crossings. What they do not hold gets the error of the method alone.
    way : float [s]
        Time from where the air was observed.

    Returns
    -------
    SiteEstimate
    """
    return SiteEstimate(
        side=air.side,
        values={name: _value(crossing, air, name) for name in QUANTITIES},
        ranges=_ranges(air, ranges or {}),
        references=_simple(crossing, air),
        excess=crest_excess(crossing, air),
        wind_from=(crossing.flow.normal + np.pi) % (2.0 * np.pi),
        way=way,
    )


def ranges_of(spread: Spread | None, crossing: Crossing, air: LeeAir) -> dict[Quantity, tuple[float, float]]:
    """Full ranges at a site, 10 and 90 % of the members with the error of the method.

    Parameters
    ----------
    spread : Spread or None
    crossing : Crossing
        That the spread is of.
    air : LeeAir

    Returns
    -------
    dict of Quantity to (float, float)
        Empty without members.
    """
    members = None if spread is None else members_at(spread, crossing, air)
    if members is None:
        return {}
    found = {name: range_of(members[key]) for name, key in MEMBER_NAMES.items() if key in members}
    return {name: ends for name, ends in found.items() if ends is not None}


def estimates_of(
    sites: Sequence[SiteEstimate | None], time: float | None, arrival: ArrayLike | None = None
) -> Estimates:
    """What one case or hour gives at places.

    Parameters
    ----------
    sites : sequence of (SiteEstimate or None), one for each place
        None for one that was not worked out.
    time : float or None [s]
    arrival : array_like (places,) [s], optional
        Where the air takes time; by default all are valid at `time`.

    Returns
    -------
    Estimates
    """

    def over(read: Callable[[SiteEstimate], float]) -> Array:
        return np.array([np.nan if site is None else read(site) for site in sites], dtype=np.float64)

    when = np.nan if time is None else time
    return Estimates(
        time=time,
        arrival=np.full(len(sites), when) if arrival is None else np.asarray(arrival, dtype=np.float64),
        values={name: over(lambda site, name=name: site.values[name]) for name in QUANTITIES},  # type: ignore[misc]  # a default binds the loop variable
        low={name: over(lambda site, name=name: site.ranges.get(name, UNKNOWN)[0]) for name in QUANTITIES},  # type: ignore[misc]  # same
        high={name: over(lambda site, name=name: site.ranges.get(name, UNKNOWN)[1]) for name in QUANTITIES},  # type: ignore[misc]  # same
        references={
            name: {
                quantity: over(lambda site, name=name, quantity=quantity: site.references[name][quantity])  # type: ignore[misc]  # same
                for quantity in HUMID
            }
            for name in REFERENCES
        },
        side=tuple(None if site is None else site.side for site in sites),
        excess=over(lambda site: site.excess),
        wind_from=over(lambda site: site.wind_from),
    )


def crest_excess(crossing: Crossing, air: LeeAir) -> float:
    """Potential temperature at a site minus that of the lowest air over the crest of the crossing's line [K].

    Parameters
    ----------
    crossing : Crossing
    air : LeeAir

    Returns
    -------
    float [K]
    """
    top = int(np.argmin(np.abs(crossing.distance - crossing.features.crest_distance)))
    march = crossing.air
    pressures = ([air.pressure], [march.pressure[top, 0]])
    return float(potential_excess([air.temperature], [march.temperature[top, 0]], pressures=pressures)[0])


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


def _value(crossing: Crossing, air: LeeAir, name: Quantity) -> float:
    if name == "wind":
        return np.nan if air.wind is None else air.wind.at_10m
    if name == "gust":
        return np.nan if air.wind is None else 0.5 * (air.wind.gust_low + air.wind.gust_high)
    if name == "rain_rate":
        rain = crossing.rain
        if not crossing.distance[0] <= air.distance <= crossing.distance[-1]:
            return np.nan
        return float(np.interp(air.distance, crossing.distance, rain.rate)) + rain.background
    return float(getattr(air, name))


def _ranges(air: LeeAir, given: Mapping[Quantity, tuple[float, float]]) -> dict[Quantity, tuple[float, float]]:
    """Ranges at one place: those given, else the error of the method; of the wind those of the methods."""
    found: dict[Quantity, tuple[float, float]] = {}
    wind = air.wind
    if wind is not None:
        share = wind.at_10m / wind.wind if wind.wind > 0.0 else 1.0
        found |= {"wind": (share * wind.low, share * wind.high), "gust": (wind.gust_low, wind.gust_high)}
    warm, moist = (TENTH * float(error) for error in model_error(max(air.distance, 0.0)))
    found["temperature"] = (air.temperature - warm, air.temperature + warm)
    found["mixing_ratio"] = (air.mixing_ratio - moist, air.mixing_ratio + moist)
    found["mixing_ratio"] = (max(found["mixing_ratio"][0], 0.0), found["mixing_ratio"][1])
    low, high = (
        float(dew_point_from_mixing_ratio(air.pressure, max(vapour, LEAST_VAPOUR))) for vapour in found["mixing_ratio"]
    )
    return {**found, "dew_point": (low, high), **given}


def _simple(crossing: Crossing, air: LeeAir) -> dict[Reference, dict[Quantity, float]]:
    """The simple answers at a site, over the crest of its own line."""
    crest = crossing.features.crest if air.own is None else air.own.crest
    found = simple_answers(crossing.incoming, crest, air.elevation, freezing=crossing.settings.freezing)
    return {name: _humid(getattr(found, name)) for name in REFERENCES}


def _humid(air: Parcel) -> dict[Quantity, float]:
    """Temperature and humidity of a simple answer; its cloud is not air."""
    p, t, vapour = (float(x[0]) for x in (air.pressure, air.temperature, np.maximum(air.vapour, LEAST_VAPOUR)))
    return {
        "temperature": t,
        "mixing_ratio": vapour,
        "dew_point": float(dew_point_from_mixing_ratio(p, vapour)),
        "relative_humidity": float(relative_humidity_from_mixing_ratio(p, t, vapour)),
    }
