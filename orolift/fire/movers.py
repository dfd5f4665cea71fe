"""What would move a site across a threshold: which input, changed by itself, and by how much."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from orolift.fire.dryness import HIGHEST_TEMPERATURE, LOWEST_TEMPERATURE
from orolift.fire.rules import margins
from orolift.fire.weather import with_more_wind, with_other_dew_point, with_other_source, with_warmer_air

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

    from numpy.typing import ArrayLike, NDArray

    from orolift.air.column import IncomingAir
    from orolift.fire.rules import Condition
    from orolift.fire.weather import SiteWeather
    from orolift.fire.winds import WindMeant

    Array = NDArray[np.float64]

What = Literal["wind across the crest", "source level", "temperature", "dew point"]

REACH: dict[What, tuple[float, float]] = {
    "wind across the crest": (20.0, 0.5),
    "source level": (1500.0, 25.0),
    "temperature": (10.0, 0.25),
    "dew point": (15.0, 0.25),
}
"""How far each input is tried either way, in what steps [m s-1, m, K, K]; a judgement: beyond, it is another day."""


@dataclass(frozen=True)
class Mover:
    """Change of one input that brings a value to its threshold.

    Attributes
    ----------
    what : str
    amount : float [m s-1, m or K]
        The least change, with its sign.
    """

    what: What
    amount: float


@dataclass(frozen=True, eq=False)
class Shifted:
    """A site with one input changed by several amounts.

    Attributes
    ----------
    what : str
    amounts : ndarray (n,)
    weather : SiteWeather, leading axes (n,)
    """

    what: What
    amounts: Array
    weather: SiteWeather


def shifted(
    weather: SiteWeather, incoming: IncomingAir, *, crest_wind: float, source_level: float | None
) -> tuple[Shifted, ...]:
    """A site with each input changed by itself, as far as is worth trying.

    Parameters
    ----------
    weather : SiteWeather, leading axes ()
    incoming : IncomingAir
    crest_wind : float [m s-1]
        Across the crest.
    source_level : float or None [m above sea level]
        None leaves it out, as in a pool.

    Returns
    -------
    tuple of Shifted
        Wind only where it is known at the site.
    """
    out = []
    steps = {what: np.arange(-reach, reach + 0.5 * step, step) for what, (reach, step) in REACH.items()}
    if np.isfinite(weather.wind) and crest_wind > 0.0:
        more = steps["wind across the crest"]
        more = more[more >= -crest_wind]
        out.append(Shifted("wind across the crest", more, with_more_wind(weather, crest_wind, more)))
    if source_level is not None:
        more, other = with_other_source(weather, incoming, source_level, steps["source level"])
        out.append(Shifted("source level", more, other))
    warmth = steps["temperature"]
    reached = float(weather.temperature) + warmth
    warmth = warmth[(reached > LOWEST_TEMPERATURE) & (reached < HIGHEST_TEMPERATURE)]
    out.append(Shifted("temperature", warmth, with_warmer_air(weather, warmth)))
    out.append(Shifted("dew point", steps["dew point"], with_other_dew_point(weather, steps["dew point"])))
    return tuple(out)


def movers(
    condition: Condition, sites: Iterable[tuple[Shifted, Mapping[str | WindMeant, ArrayLike]]]
) -> tuple[Mover, ...]:
    """Changes that bring a condition to its threshold, each by itself.

    Parameters
    ----------
    condition : Condition
    sites : iterable of (Shifted, mapping of quantity to array_like (n,))
        Each with the values of its weather.

    Returns
    -------
    tuple of Mover
        In the order of `sites`; inputs that cannot do it within `REACH` are left out.

    Notes
    -----
    The least change at which the condition turns from missed to met or back, between two steps by a straight line.
    """
    out = []
    for site, values in sites:
        margin = np.broadcast_to(margins(condition, values.get(condition.quantity, np.nan)), site.amounts.shape)
        amount = least_change(site.amounts, margin)
        if amount is not None:
            out.append(Mover(site.what, amount))
    return tuple(out)


def least_change(amounts: Array, margin: Array) -> float | None:
    """Change nearest to none at which a margin changes its sign.

    Parameters
    ----------
    amounts : ndarray (n,)
        Increasing.
    margin : ndarray (n,)
        0 or more where a condition is met.

    Returns
    -------
    float or None
        None where it keeps its sign or is not known.

    Examples
    --------
    >>> least_change(np.array([-2.0, -1.0, 0.0, 1.0, 2.0]), np.array([9.0, 3.0, -1.0, -3.0, 1.0]))
    -0.25
    """
    met = margin >= 0.0
    known = np.isfinite(margin[:-1]) & np.isfinite(margin[1:])
    turns = np.flatnonzero((met[:-1] != met[1:]) & known)
    if not turns.size:
        return None
    low, high = margin[turns], margin[turns + 1]
    where = amounts[turns] + (amounts[turns + 1] - amounts[turns]) * low / (low - high)
    return float(where[np.argmin(np.abs(where))])
