"""Fire weather at the sites of a crossing, put together: indices, thresholds with what moves them, the night."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from orolift.fire.indices import HOUR, HOURS, Indices, one_of, site_fire
from orolift.fire.movers import Mover, Shifted, movers, shifted
from orolift.fire.nights import NightAtSite, nights_at
from orolift.fire.rules import JudgedRule, Rule, RuleSet, judged
from orolift.fire.values import site_values
from orolift.fire.weather import SiteWeather, joined, site_weather, stacked

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import ArrayLike

    from orolift.crossing.result import Crossing, LeeAir, Side, When
    from orolift.fire.winds import WindMeant


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
    number : int
        Of the site in the case.
    name : str
    side : 'windward', 'crest' or 'lee'
    in_pool, in_blocked_air : bool
        Whether its air is that of a cold pool or of the blocked layer: the wind there is not known.
    weather : SiteWeather
    indices : Indices
    night : NightAtSite
    thresholds : tuple of Threshold
    ranges : mapping of str to (float, float)
        10 % and 90 % of the members by the name of an index, of the code after hours (`chances.CODES_AFTER`) or of a
        number of the night (`nights.NIGHT_VALUES`), in SI; empty without members.
    input_ranges : mapping of str to (float, float)
        The same by the inputs alone.
    rule_ranges : mapping of quantity to (float, float)
        As `ranges`, of what the rules speak of.
    """

    number: int
    name: str
    side: Side
    in_pool: bool
    in_blocked_air: bool
    weather: SiteWeather
    indices: Indices
    night: NightAtSite
    thresholds: tuple[Threshold, ...]
    ranges: Mapping[str, tuple[float, float]] = field(default_factory=dict)
    input_ranges: Mapping[str, tuple[float, float]] = field(default_factory=dict)
    rule_ranges: Mapping[str | WindMeant, tuple[float, float]] = field(default_factory=dict)


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
    chosen = settings or FireSettings()
    weathers = [site_weather(air) for air in crossing.lee]
    together = stacked(weathers)
    indices = _indices(together, chosen)
    crests = [crossing.features.crest if air.own is None else air.own.crest for air in crossing.lee]
    nights = nights_at(together, crossing.lee, crests, when)
    out = []
    for number, (air, weather, night) in enumerate(zip(crossing.lee, weathers, nights, strict=True)):
        own = one_of(indices, number)
        out.append(
            SiteFire(
                number=air.number,
                name=air.name,
                side=air.side,
                in_pool=air.in_pool,
                in_blocked_air=air.in_blocked_air,
                weather=weather,
                indices=own,
                night=night,
                thresholds=_thresholds(crossing, air, weather, own, night, chosen),
            )
        )
    return tuple(out)


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
    """Each rule judged, with the changes that would turn its conditions; none without rules."""
    if chosen.rules is None:
        return ()
    rules = chosen.rules.rules
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
    crest_wind = crossing.flow.crest_wind if air.own is None else air.own.crest_wind
    sites = shifted(weather, crossing.incoming, crest_wind=crest_wind, source_level=air.source_level)
    changed = _values_of(sites, rules, roughness, others, chosen)
    return tuple(
        Threshold(
            judged(rule, values, windiest=windiest),
            tuple(movers(condition, changed) for condition in rule.conditions),
        )
        for rule in rules
    )


def _values_of(
    sites: tuple[Shifted, ...],
    rules: tuple[Rule, ...],
    roughness: float,
    others: dict[str, ArrayLike],
    chosen: FireSettings,
) -> list[tuple[Shifted, dict[str | WindMeant, ArrayLike]]]:
    """Values of a site with each input changed, all worked out in one go."""
    together = joined([site.weather for site in sites])
    values = site_values(together, _indices(together, chosen, ()), rules, roughness, others=others)
    ends = np.cumsum([0, *(site.amounts.size for site in sites)])
    size = int(ends[-1])
    asked = {condition.quantity for rule in rules for condition in rule.conditions}
    parts: list[tuple[Shifted, dict[str | WindMeant, ArrayLike]]] = []
    for site, low, high in zip(sites, ends[:-1], ends[1:], strict=True):
        own: dict[str | WindMeant, ArrayLike] = {
            name: np.broadcast_to(np.asarray(value), (size,))[low:high]
            for name, value in values.items()
            if name in asked
        }
        parts.append((site, own))
    return parts
