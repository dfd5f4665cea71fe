"""Fire weather of the members of a spread: how likely a threshold is, and the range of each index."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, TypeVar

import numpy as np

from orolift.crossing.layer_above import HEIGHTS, NAMES
from orolift.crossing.result import When
from orolift.crossing.wind import NEAR_GROUND
from orolift.fire.dryness import HIGHEST_TEMPERATURE, HIGHEST_WIND, LOWEST_TEMPERATURE
from orolift.fire.indices import HOURS, site_fire
from orolift.fire.nights import night_values
from orolift.fire.rules import with_chance
from orolift.fire.values import INDICES, site_values
from orolift.fire.weather import LEAST_VAPOUR
from orolift.flow.profiles import value_at

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import ArrayLike, NDArray

    from orolift.fire.indices import Indices
    from orolift.fire.sites import FireSettings, SiteFire
    from orolift.fire.weather import SiteWeather
    from orolift.fire.winds import WindMeant

    Array = NDArray[np.float64]

Name = TypeVar("Name", str, "str | WindMeant")

NEEDED = ("pressure", "temperature", "mixing_ratio", "wind_10m", "gust")
"""Arrays of members that fire weather takes."""
TENTHS = (0.1, 0.9)
"""Ends of a range, as shares of the members."""
CODES_AFTER = tuple(f"fine_fuel_code_after_{hours}_h" for hours in HOURS)
"""Names of the ranges of the fuel code after hours of this air."""
FEWEST = 5
"""Members with a value from which on they have a range; a judgement."""


def with_members(
    site: SiteFire,
    members: Mapping[str, ArrayLike],
    settings: FireSettings,
    roughness: float,
    when: When | None = None,
    *,
    inputs: Mapping[str, ArrayLike] | None = None,
) -> SiteFire:
    """Fire weather of a site with chances and ranges from the members of a spread.

    Parameters
    ----------
    site : SiteFire
        The answer.
    members : mapping of str to array_like (m,)
        `NEEDED` at the site, in SI: pressure, temperature, mixing ratio, mean wind and gust at 10 m; NaN where a
        member has none. `rain`, `source_level`, `warming` and `warming_surface_heating` are used where they are there.
    settings : FireSettings
        Those the site was worked out with.
    roughness : float [m]
    when : When, optional
        Time and place, as the site was worked out with.
    inputs : mapping of str to array_like (m,), optional
        The same as `members` without the error of the method, for the ranges by the inputs alone.

    Returns
    -------
    SiteFire
        Members without air at the site do not count. Without any that has, `site` as it is.

    Raises
    ------
    OutOfRangeError
        If a value is out of the range of an index.

    Notes
    -----
    The layer over the site, which Hot-Dry-Windy and the night take, is moved with each member: in temperature by that
    at the site and by the difference between the two (`crossing.layer_above`), where the members tell it; in the ratio
    of vapour; in wind by the difference near the ground, from 0 to the 130 m/s that indices take;
    its heat from the ground in the ratio of that of the site.
    """
    both = dict(members) if inputs is None else {name: np.append(members[name], inputs[name]) for name in members}
    arrays, there = _with_air(both)
    count = int(there[: np.size(members["temperature"])].sum())
    if not count:
        return site
    weather = _weather(site.weather, arrays)
    indices, night = _indices(weather, settings, settings.previous_code, HOURS), _night(site, weather, when or When())
    found = {name: getattr(indices, name) for name in INDICES} | night
    found |= {name: indices.fine_fuel_code_hours[..., number] for number, name in enumerate(CODES_AFTER)}
    thresholds, judged_by = site.thresholds, {}
    if settings.rules is not None:
        values = _values(weather, indices, arrays, settings, roughness, mixing_height=night["mixing_height"])
        full = {key: np.broadcast_to(value, there.sum())[:count] for key, value in values.items()}
        thresholds = tuple(replace(one, judged=with_chance(one.judged, full)) for one in thresholds)
        asked = {condition.quantity for rule in settings.rules.rules for condition in rule.conditions}
        judged_by = _ranges({key: full[key] for key in asked if key in full})
    return replace(
        site,
        thresholds=thresholds,
        rule_ranges=judged_by,
        ranges=_ranges({name: value[:count] for name, value in found.items()}),
        input_ranges=_ranges({name: value[count:] for name, value in found.items()}),
    )


def _ranges(found: Mapping[Name, Array]) -> dict[Name, tuple[float, float]]:
    """10 and 90 % of what members give, by name, where enough have a value."""
    return {name: ends for name, values in found.items() if (ends := _range(values)) is not None}


def _night(site: SiteFire, weather: SiteWeather, when: When) -> dict[str, Array]:
    """The coming night of members, over the ground and below the crest of the site."""
    crest = site.night.ridge_height
    return night_values(weather, 2.0 * site.night.mid_slope_height - crest, crest, when)


def member_values(
    weather: SiteWeather,
    members: Mapping[str, ArrayLike],
    settings: FireSettings,
    roughness: float,
    place: tuple[float, float] | None = None,
    when: When | None = None,
) -> dict[str | WindMeant, Array]:
    """What the thresholds of a region speak of, for each member at a site.

    Parameters
    ----------
    weather : SiteWeather
        Of the answer there.
    members : mapping of str to array_like (m,)
        As for `with_members`.
    settings : FireSettings
        With rules.
    roughness : float [m]
    place : (float, float), optional [m above sea level]
        Height of the site, and of the crest before it; without them the depth of mixing is not known.
    when : When, optional
        Time and place, for the depth of mixing.

    Returns
    -------
    dict of quantity to ndarray (m,) [SI]
        NaN in members without air at the site, and where a value is not known; so are codes that are carried from hour
        to hour.

    Raises
    ------
    OutOfRangeError
        If a value is out of the range of an index.
    """
    rules = () if settings.rules is None else settings.rules.rules
    wanted = {condition.quantity for rule in rules for condition in rule.conditions}
    arrays, there = _with_air(members)
    out = {key: np.full(there.size, np.nan) for key in wanted}
    if there.any():
        moved, depth = _weather(weather, arrays), np.full(int(there.sum()), np.nan)
        if place is not None and "mixing_height" in wanted:
            depth = night_values(moved, *place, when or When())["mixing_height"]
        indices = _indices(moved, settings, None, ())
        values = _values(moved, indices, arrays, settings, roughness, mixing_height=depth)
        for key in wanted:
            out[key][there] = np.asarray(values.get(key, np.nan))
    return out


def _with_air(members: Mapping[str, ArrayLike]) -> tuple[dict[str, Array], NDArray[np.bool_]]:
    """Arrays of the members that have air at the site, and which those are."""
    arrays = {name: np.atleast_1d(np.asarray(value, np.float64)) for name, value in members.items()}
    t = arrays["temperature"]
    there = np.isfinite(t) & (t > LOWEST_TEMPERATURE) & (t < HIGHEST_TEMPERATURE) & np.isfinite(arrays["mixing_ratio"])
    return {name: value[there] for name, value in arrays.items()}, there


def _indices(weather: SiteWeather, settings: FireSettings, code: float | None, hours: tuple[int, ...]) -> Indices:
    """Indices of members that have air."""
    return site_fire(
        weather,
        previous_code=code,
        drought_index=settings.drought_index,
        rain_duration=settings.rain_duration,
        hours=hours,
    )


def _values(
    weather: SiteWeather,
    indices: Indices,
    arrays: Mapping[str, Array],
    settings: FireSettings,
    roughness: float,
    *,
    mixing_height: ArrayLike,
) -> dict[str | WindMeant, ArrayLike]:
    """Values for rules of members that have air."""
    others: dict[str, ArrayLike] = {
        "drought_index": np.nan if settings.drought_index is None else settings.drought_index,
        "mixing_height": mixing_height,
        "source_level": arrays.get("source_level", np.nan),
        "warming": arrays.get("warming", np.nan),
    }
    rules = () if settings.rules is None else settings.rules.rules
    return site_values(weather, indices, rules, roughness, others=others)


def _weather(answer: SiteWeather, arrays: Mapping[str, Array]) -> SiteWeather:
    """The members' air at the site, the layer above moved with it."""
    wind, gust, vapour = arrays["wind_10m"], arrays["gust"], np.maximum(arrays["mixing_ratio"], LEAST_VAPOUR)
    ratio = (vapour / answer.mixing_ratio)[:, np.newaxis]
    # where a member has no part of the warming it lies in a pool or in blocked air, which the ground does not heat
    heating = np.nan_to_num(arrays.get("warming_surface_heating", np.full_like(vapour, answer.heating)))
    heated = abs(float(answer.heating)) > 0.0
    share = heating / float(answer.heating) if heated else np.ones_like(heating)
    base = arrays["temperature"] - heating
    own = answer.layer_temperature - answer.layer_heating - (answer.temperature - answer.heating)
    layer_heating = answer.layer_heating * share[:, np.newaxis]
    return replace(
        answer,
        pressure=arrays["pressure"],
        temperature=arrays["temperature"],
        mixing_ratio=vapour,
        rain=arrays.get("rain", answer.rain),
        wind=wind,
        wind_low=wind,
        wind_high=wind,
        gust_low=gust,
        gust_high=gust,
        layer_temperature=base[:, np.newaxis] + own + _less_stable(answer, own, arrays) + layer_heating,
        layer_vapour=np.maximum(answer.layer_vapour * ratio, LEAST_VAPOUR),
        layer_wind=_layer_wind(answer, wind),
        heating=heating,
        layer_heating=layer_heating,
    )


def _layer_wind(answer: SiteWeather, wind: Array) -> Array:
    """Wind of each member in the layer over the site, (m, nz) [m s-1]: as much stronger as it is near the ground.

    By the logarithmic law the means of the lowest 300 m differ as the winds at 10 m do, times the ratio of the
    answer's. A ratio instead of a difference would blow up what is aloft where the answer is nearly calm.
    """
    at_10m = float(np.nan_to_num(answer.wind))
    if at_10m <= 0.0:
        return answer.layer_wind + np.zeros((wind.size, 1))
    near = answer.height_above_ground <= NEAR_GROUND
    ratio = float(np.mean(answer.layer_wind[near])) / at_10m
    stronger = ratio * np.where(np.isfinite(wind), wind - at_10m, 0.0)
    return np.clip(answer.layer_wind + stronger[:, np.newaxis], 0.0, HIGHEST_WIND)


def _less_stable(answer: SiteWeather, own: Array, arrays: Mapping[str, Array]) -> Array:
    """By how much more than in the answer the layer over each member is warmer than its ground, (m, nz) [K].

    Nothing where members do not tell, as in a pool.
    """
    z, count = answer.height_above_ground, arrays["temperature"].size
    nothing = np.zeros((count, 1))
    if not set(NAMES) <= arrays.keys():
        return nothing
    found = np.stack([arrays[name] for name in NAMES], axis=-1) - np.interp(HEIGHTS, z, own)
    return value_at(np.array([0.0, *HEIGHTS]), np.concatenate([nothing, np.nan_to_num(found)], axis=1), z)


def _range(values: Array) -> tuple[float, float] | None:
    """10 % and 90 % of the known values; none where hardly any is known."""
    known = np.ravel(values)[np.isfinite(np.ravel(values))]
    if known.size < FEWEST:
        return None
    low, high = np.quantile(known, TENTHS)
    return float(low), float(high)
