"""Danger thresholds of a region: whether estimates and observations meet them, and how often both do."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air.saturation import saturation_vapour_pressure_over_liquid
from orolift.fire.rules import rule_met
from orolift.fire.weather import SiteWeather
from orolift.fire.winds import WindMeant, wind_as_meant
from orolift.spread.verification import contingency

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from orolift.fire.rules import Rule, RuleSet
    from orolift.spread.comparison import Observations
    from orolift.spread.estimates import Estimates, Values
    from orolift.spread.verification import Contingency

    Array = NDArray[np.float64]

PLAIN = ("temperature", "dew_point", "relative_humidity", "vapour_pressure_deficit", "rain_rate")
"""Quantities of rules, the wind apart, that a station observes; indices with a memory it does not."""


def rule_tables(
    rules: RuleSet | None,
    seen: Observations,
    estimates: Sequence[Estimates],
    which: NDArray[np.int_],
    roughness: float,
) -> tuple[tuple[tuple[str, Contingency], ...], tuple[str, ...]]:
    """Hits and false alarms of thresholds over all rows in the lee near an estimate.

    Parameters
    ----------
    rules : RuleSet or None
    seen : Observations
    estimates : sequence of Estimates
    which : ndarray of int (n,)
        Number of the estimates each row belongs to, -1 for none.
    roughness : float [m]
        For winds that a rule means at another height.

    Returns
    -------
    tables : tuple of (str, Contingency)
        By the name of the rule.
    notes : tuple of str
        Rules that cannot be judged by what was observed.

    Notes
    -----
    Conditions are judged moment by moment; how long a rule must hold is left
    out. The estimate's gust is the middle of its range.
    """
    tables: list[tuple[str, Contingency]] = []
    notes = []
    for rule in () if rules is None else rules.rules:
        near = np.flatnonzero(which >= 0)
        k, p = which[near], seen.place[near]
        lee = np.stack([one.in_lee for one in estimates])[k, p]
        near, k, p = near[lee], k[lee], p[lee]
        names = estimates[0].values
        ours: Values = {name: np.stack([one.values[name] for one in estimates])[k, p] for name in names}
        theirs: Values = {name: values[near] for name, values in seen.values.items()}
        table = contingency(_met(rule, ours, roughness), _met(rule, theirs, roughness))
        if table is None:
            notes.append(f"The threshold '{rule.name}' cannot be judged by what was observed in the lee.")
        else:
            tables.append((rule.name, table))
    return tuple(tables), tuple(notes)


def _met(rule: Rule, values: Values, roughness: float) -> Array:
    """1 where a rule is met, 0 where not, NaN where it cannot be judged."""
    given: dict[str | WindMeant, Array] = {}
    for condition in rule.conditions:
        name = condition.quantity
        if isinstance(name, WindMeant):
            given[name] = np.asarray(wind_as_meant(_weather(values), name, roughness))
        elif name == "vapour_pressure_deficit":
            given[name] = _deficit(values)
        elif name in PLAIN:
            given[name] = values[name]  # type: ignore[index]  # those of PLAIN are quantities
        else:
            given[name] = np.full(values["temperature"].size, np.nan)
    met, known = rule_met(rule, given)
    return np.where(known, met.astype(np.float64), np.nan)


def _deficit(values: Values) -> Array:
    found = np.full(values["temperature"].size, np.nan)
    known = np.isfinite(values["temperature"]) & np.isfinite(values["relative_humidity"])
    full = saturation_vapour_pressure_over_liquid(values["temperature"][known])
    found[known] = full * (1.0 - values["relative_humidity"][known])
    return found


def _weather(values: Values) -> SiteWeather:
    """Winds as fire weather takes them; nothing else is asked of it."""
    wind, gust = values["wind"], values["gust"]
    nothing = np.full(wind.size, np.nan)
    empty = np.empty((wind.size, 0))
    return SiteWeather(
        pressure=nothing,
        temperature=nothing,
        mixing_ratio=nothing,
        wind=wind,
        wind_low=wind,
        wind_high=wind,
        gust_low=gust,
        gust_high=gust,
        rain=nothing,
        height_above_ground=np.empty(0),
        layer_temperature=empty,
        layer_vapour=empty,
        layer_wind=empty,
    )
