"""Thresholds of a region on a map of the lee: which rules are met in each cell, and which a map cannot judge."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.humidity import dew_point_from_relative_humidity
from orolift.fire.dryness import (
    HIGHEST_TEMPERATURE,
    LOWEST_TEMPERATURE,
    angstroem_index,
    vapour_pressure_deficit,
)
from orolift.fire.fosberg import equilibrium_fuel_moisture, fosberg_index, fosberg_index_with_drought
from orolift.fire.rules import rule_met
from orolift.fire.weather import SiteWeather
from orolift.fire.winds import WindMeant, wind_as_meant

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Mapping

    from numpy.typing import NDArray

    from orolift.fire.rules import Rule, RuleSet
    from orolift.spread.lee_map import LeeMap

    Array = NDArray[np.float64]
    Quantity = str | WindMeant

_OF_AIR: dict[str, Callable[[Array, Array], Array]] = {
    "dew_point": dew_point_from_relative_humidity,
    "vapour_pressure_deficit": vapour_pressure_deficit,
    "equilibrium_fuel_moisture": equilibrium_fuel_moisture,
    "angstroem_index": angstroem_index,
}
"""Quantities that follow from temperature and humidity."""


@dataclass(frozen=True, eq=False)
class RuleOnMap:
    """A rule on a map.

    Attributes
    ----------
    rule : Rule
    met : ndarray (ny, nx) [1]
        1 where all its conditions are met, 0 where not, NaN where it cannot be judged. Its duration is not judged.
    """

    rule: Rule
    met: Array


@dataclass(frozen=True, eq=False)
class LeeThresholds:
    """The rules of a region on a map.

    Attributes
    ----------
    region, authority : str
        For where they hold, and who set them.
    judged : tuple of RuleOnMap
    unknown : tuple of (Rule, tuple of quantities)
        Rules that cannot be judged on the map, and what it does not have.
    count : ndarray (ny, nx) [1]
        How many rules are met, of those judged in the cell; NaN where none can be.
    """

    region: str
    authority: str
    judged: tuple[RuleOnMap, ...]
    unknown: tuple[tuple[Rule, tuple[Quantity, ...]], ...]
    count: Array


def thresholds_on_map(
    found: LeeMap, rules: RuleSet, roughness: float, drought_index: float | None = None
) -> LeeThresholds:
    """Rules judged in every cell of a map.

    Parameters
    ----------
    found : LeeMap
    rules : RuleSet
    roughness : float [m]
        0.0001 to 1.5, one for the whole map.
    drought_index : float, optional [hundredths of an inch]
        Keetch-Byram, 0 to 800.

    Returns
    -------
    LeeThresholds

    Raises
    ------
    OutOfRangeError
        If the roughness, a wind that a rule means or the drought index is out of range.

    Notes
    -----
    As at a site: the limit itself meets a condition, all conditions of a rule count, and a known value that misses
    its limit decides where another is not known. A map has the mean wind at 10 m, moved to the height a rule means
    by the logarithmic law, but no gust, rain, fuel code, mixing height, source level, nor the air above the ground:
    a rule that asks for one of these is not judged at all. Cells without air, or with air outside the range of the
    indices, stay unknown.
    """
    asked = {one.quantity for rule in rules.rules for one in rule.conditions}
    air = MapAir(found.temperature, found.relative_humidity, found.wind_10m, found.warming)
    values = values_on_map(air, asked, roughness, drought_index)
    judged, unknown = [], []
    for rule in rules.rules:
        missing = tuple(dict.fromkeys(one.quantity for one in rule.conditions if one.quantity not in values))
        if missing:
            unknown.append((rule, missing))
            continue
        met, known = rule_met(rule, values)
        judged.append(RuleOnMap(rule, np.where(known, met.astype(np.float64), np.nan)))
    count = np.full(found.temperature.shape, np.nan)
    for one in judged:
        here = np.isfinite(one.met)
        count[here] = np.nan_to_num(count[here]) + one.met[here]
    return LeeThresholds(rules.region, rules.authority, tuple(judged), tuple(unknown), count)


@dataclass(frozen=True, eq=False)
class MapAir:
    """What a map has of the air in cells, any shape: [K], [1], [m s-1] at 10 m, [K]; NaN where it is not known."""

    temperature: Array
    relative_humidity: Array
    wind_10m: Array
    warming: Array


def values_on_map(
    air: MapAir, asked: Iterable[Quantity], roughness: float, drought_index: float | None
) -> Mapping[Quantity, Array]:
    """What a map has of the quantities that rules ask for.

    Parameters
    ----------
    air : MapAir
    asked : iterable of str or WindMeant
    roughness : float [m]
    drought_index : float or None

    Returns
    -------
    mapping of quantity to ndarray
        Those it does not have are not in it; NaN where the air is unknown or out of the range of the indices.
    """
    t = air.temperature
    u = np.minimum(air.relative_humidity, 1.0)
    fit = (t >= LOWEST_TEMPERATURE) & (t <= HIGHEST_TEMPERATURE) & (u > 0.0)
    t, u = np.where(fit, t, np.nan), np.where(fit, u, np.nan)
    wind = np.where(fit, np.maximum(air.wind_10m, 0.0), np.nan)
    values: dict[Quantity, Array] = {
        "temperature": t,
        "relative_humidity": u,
        "warming": np.where(fit, air.warming, np.nan),
    }
    if drought_index is not None:
        values["drought_index"] = np.where(fit, drought_index, np.nan)
    for name in asked:
        if isinstance(name, WindMeant):
            if name.kind == "sustained":
                values[name] = wind_as_meant(_only_wind(wind), name, roughness)
        elif name in _OF_AIR:
            values[name] = _where_known(_OF_AIR[name], t, u)
        elif name in {"fosberg_index", "fosberg_index_raw"}:
            capped = name == "fosberg_index"
            values[name] = _where_known(
                lambda a, b, c, capped=capped: fosberg_index(a, b, c, capped=capped), t, u, wind
            )
        elif name == "fosberg_index_with_drought" and drought_index is not None:
            raw = _where_known(lambda a, b, c: fosberg_index(a, b, c, capped=False), t, u, wind)
            values[name] = _where_known(lambda index: fosberg_index_with_drought(index, drought_index), raw)
    return values


def _where_known(function: Callable[..., Array], *given: Array) -> Array:
    """A function of cells, worked out only where all it takes is known."""
    known = np.all([np.isfinite(one) for one in given], axis=0)
    out = np.full(known.shape, np.nan)
    if known.any():
        out[known] = function(*(one[known] for one in given))
    return out


def _only_wind(wind: Array) -> SiteWeather:
    """Air of which nothing but the mean wind is known."""
    nothing = np.full(wind.shape, np.nan)
    names = [name for name in SiteWeather.__dataclass_fields__ if name != "wind"]
    return SiteWeather(wind=wind, **dict.fromkeys(names, nothing))
