"""What crossings give at places, in a few numbers each: estimates, their ranges, the simple answers."""

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

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping, Sequence

    from numpy.typing import ArrayLike, NDArray

    from orolift.air.parcel import Parcel
    from orolift.crossing.result import Crossing, LeeAir, Side
    from orolift.spread.spread import Spread

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
        values={name: _value(air, name) for name in QUANTITIES},
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


def _value(air: LeeAir, name: Quantity) -> float:
    if name == "wind":
        return np.nan if air.wind is None else air.wind.at_10m
    if name == "gust":
        return np.nan if air.wind is None else 0.5 * (air.wind.gust_low + air.wind.gust_high)
    if name == "rain_rate":
        return air.rain
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
