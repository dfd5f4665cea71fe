"""Fire weather at the sites of a crossing, put together: indices, thresholds with what moves them, the night."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.fire.indices import HOUR, HOURS, Indices, site_fire
from orolift.fire.movers import Mover, movers, shifted
from orolift.fire.nights import NightAtSite, night_at
from orolift.fire.rules import JudgedRule, RuleSet, judged
from orolift.fire.values import site_values
from orolift.fire.weather import SiteWeather, site_weather

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from orolift.crossing.result import Crossing, LeeAir, Side, When


@dataclass(frozen=True)
class FireSettings:
    """What fire weather needs beside the crossing.

    Attributes
    ----------
    previous_code : float or None [1]
        Yesterday's Fine Fuel Moisture Code, 0 to 101.
    drought_index : float or None [hundredths of an inch]
        Keetch-Byram, 0 to 800.
    rules : RuleSet or None
    rain_duration : float [s]
        How long the rain of the crossing lasts.
    """

    previous_code: float | None = None
    drought_index: float | None = None
    rules: RuleSet | None = None
    rain_duration: float = HOUR


@dataclass(frozen=True)
class Threshold:
    """A rule at a site, with what would move each of its conditions across its limit.

    Attributes
    ----------
    judged : JudgedRule
    movers : tuple of tuple of Mover
        For each condition of the rule.
    """

    judged: JudgedRule
    movers: tuple[tuple[Mover, ...], ...]


@dataclass(frozen=True, eq=False)
class SiteFire:
    """Fire weather at one site.

    Attributes
    ----------
    name : str
    side : 'windward', 'crest' or 'lee'
    in_pool, in_blocked_air : bool
        Whether its air is that of a cold pool or of the blocked layer: the wind there is not known.
    weather : SiteWeather
    indices : Indices
    night : NightAtSite
    thresholds : tuple of Threshold
    """

    name: str
    side: Side
    in_pool: bool
    in_blocked_air: bool
    weather: SiteWeather
    indices: Indices
    night: NightAtSite
    thresholds: tuple[Threshold, ...]


def fire_at_sites(crossing: Crossing, when: When, settings: FireSettings | None = None) -> tuple[SiteFire, ...]:
    """Fire weather at every site of a crossing.

    Parameters
    ----------
    crossing : Crossing
    when : When
        Time and place, for the night and the heat of the day.
    settings : FireSettings, optional

    Returns
    -------
    tuple of SiteFire
        In the order of the sites.

    Raises
    ------
    OutOfRangeError
        If a setting or the air at a site is out of the range of an index.
    """
    return tuple(fire_at(crossing, air, when, settings) for air in crossing.lee)


def fire_at(crossing: Crossing, air: LeeAir, when: When, settings: FireSettings | None = None) -> SiteFire:
    """Fire weather at one site of a crossing.

    Parameters
    ----------
    crossing : Crossing
    air : LeeAir
        The site.
    when : When
    settings : FireSettings, optional

    Returns
    -------
    SiteFire

    Raises
    ------
    OutOfRangeError
        If a setting or the air at the site is out of the range of an index.
    """
    chosen = settings or FireSettings()
    weather = site_weather(crossing, air)
    indices = _indices(weather, chosen)
    night = night_at(weather, air, crossing.features.crest, when)
    thresholds: tuple[Threshold, ...] = ()
    if chosen.rules is not None:
        thresholds = _thresholds(crossing, air, weather, indices, night, chosen)
    return SiteFire(air.name, air.side, air.in_pool, air.in_blocked_air, weather, indices, night, thresholds)


def _indices(weather: SiteWeather, chosen: FireSettings, hours: tuple[int, ...] = HOURS) -> Indices:
    return site_fire(
        weather,
        hours=hours,
        previous_code=chosen.previous_code,
        drought_index=chosen.drought_index,
        rain_duration=chosen.rain_duration,
    )


def _thresholds(
    crossing: Crossing,
    air: LeeAir,
    weather: SiteWeather,
    indices: Indices,
    night: NightAtSite,
    chosen: FireSettings,
) -> tuple[Threshold, ...]:
    """Each rule judged, with the changes that would turn its conditions."""
    rules = () if chosen.rules is None else chosen.rules.rules
    roughness = float(np.asarray(crossing.settings.roughness))
    others: dict[str, ArrayLike] = {
        "drought_index": np.nan if chosen.drought_index is None else chosen.drought_index,
        "mixing_height": night.mixing_height,
        "source_level": np.nan if air.source_level is None else air.source_level,
        "warming": air.warming,
    }
    values, windiest = (
        site_values(weather, indices, rules, roughness, others=others, end=end) for end in ("middle", "upper")
    )
    changed = [
        (site, site_values(site.weather, _indices(site.weather, chosen, ()), rules, roughness, others=others))
        for site in shifted(
            weather, crossing.incoming, crest_wind=crossing.flow.crest_wind, source_level=air.source_level
        )
    ]
    return tuple(
        Threshold(
            judged(rule, values, windiest=windiest),
            tuple(movers(condition, changed) for condition in rule.conditions),
        )
        for rule in rules
    )
