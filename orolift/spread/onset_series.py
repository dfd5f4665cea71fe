"""Onset and end of warm air from over the crest, in observations and in estimates."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.onset import holds, potential_excess, spells
from orolift.spread.verification import contingency

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from orolift.crossing.onset import OnsetRule, Spell
    from orolift.spread.comparison import Observations
    from orolift.spread.estimates import Estimates
    from orolift.spread.verification import Contingency

    Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class OnsetAtPlace:
    """The rule at one place.

    Attributes
    ----------
    place : int
    estimated : ndarray (estimates,)
        1 where the rule holds, 0 where not, NaN where it cannot be said.
    excess : ndarray (estimates,) [K]
        Estimated potential temperature in the lee minus that over the crest.
    estimated_spells : tuple of Spell
        Of the estimates; empty for a single one.
    times : int
        Observed times at which the rule can be judged.
    observed_spells : tuple of Spell
    table : Contingency or None
        Estimates against the observations next to them in time; None without both.
    """

    place: int
    estimated: Array
    excess: Array
    estimated_spells: tuple[Spell, ...]
    times: int
    observed_spells: tuple[Spell, ...]
    table: Contingency | None


def onset_at_places(
    rule: OnsetRule,
    seen: Observations,
    estimates: Sequence[Estimates],
    which: NDArray[np.int_],
    elevations: Sequence[float],
) -> tuple[OnsetAtPlace, ...]:
    """The rule at every place in the lee.

    Parameters
    ----------
    rule : OnsetRule
    seen : Observations
    estimates : sequence of Estimates
    which : ndarray of int (n,)
        Number of the estimates each row belongs to, -1 for none.
    elevations : sequence of float [m above sea level]
        Of the places, where the file gives none.

    Returns
    -------
    tuple of OnsetAtPlace
    """
    state = _observed(rule, seen, elevations)
    found = []
    for place in range(len(elevations)):
        if not any(one.in_lee[place] for one in estimates):
            continue
        excess, bearing, wind = (
            np.array([values[place] for values in fields])
            for fields in zip(*((one.excess, one.wind_from, one.values["wind"]) for one in estimates), strict=True)
        )
        own = holds(rule, excess, bearing, np.where(np.isnan(wind) & np.isfinite(excess), 0.0, wind))
        mine = seen.place == place
        known = mine & np.isfinite(state)
        near = known & (which >= 0)
        times = np.array([one.arrival[place] for one in estimates])
        found.append(
            OnsetAtPlace(
                place=place,
                estimated=own,
                excess=excess,
                estimated_spells=spells(rule, times, own) if len(estimates) > 1 else (),
                times=int(known.sum()),
                observed_spells=spells(rule, seen.time[mine], state[mine]),
                table=contingency(own[which[near]], state[near]) if near.any() else None,
            )
        )
    return tuple(found)


def _observed(rule: OnsetRule, seen: Observations, elevations: Sequence[float]) -> Array:
    """Whether the rule holds in each row; unknown without a crest, calm or not."""
    height = np.where(np.isnan(seen.elevation), np.asarray(elevations)[seen.place], seen.elevation)
    excess = potential_excess(
        seen.values["temperature"],
        seen.crest_temperature,
        pressures=(seen.values["pressure"], seen.crest_pressure),
        elevations=(height, seen.crest_elevation),
    )
    speed = seen.values["wind"] if np.isfinite(seen.values["wind"]).any() else None
    return np.where(np.isnan(excess), np.nan, holds(rule, excess, seen.wind_from, speed))
