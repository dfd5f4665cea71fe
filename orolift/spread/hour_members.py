"""What the members of an hour say of a site, in short: small enough to keep for all hours of a year."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.temperature import potential_temperature
from orolift.crossing.descending import warm_and_dry
from orolift.crossing.members import PARTS
from orolift.fire.chances import member_values
from orolift.fire.rules import rule_parts
from orolift.fire.weather import site_weather
from orolift.spread.ranges import chance_of, range_of
from orolift.spread.spread import CHANCE_OF_RAIN

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing, LeeAir, When
    from orolift.fire.sites import FireSettings
    from orolift.spread.site_state import SiteMembers, SiteState

    Array = NDArray[np.float64]

RANGED = (
    *("temperature", "dew_point", "relative_humidity", "wind_10m", "gust", "warming"),
    *(f"warming_{name}" for name in PARTS),
    *("source_level", "rain"),
)
"""Numbers of a site and hour that have ranges."""
CARRIED = ("temperature", "relative_humidity", "wind_10m", "rain", "way")
"""Numbers that are kept of every member, for what is carried and counted through the hours."""
CODES = ("fine_fuel_code", "initial_spread_index")
"""Quantities of rules that are known only once the hours are put together."""


@dataclass(frozen=True, slots=True, eq=False)
class HourMembers:
    """What the members of an hour say of a site.

    Attributes
    ----------
    crosses : ndarray of int8, (m,)
        1 in members that cross, 0 in those that do not, -1 in those that could not be worked out.
    ends : ndarray (2, RANGED, 2) or None [SI]
        10 and 90 %: with the error of the method, then by the inputs alone; NaN where there is none. None, as what
        follows, in an hour whose own answer does not cross: a range needs an answer that it belongs to.
    rain, in_pool : float [1]
        Share of the members that cross with rain of 0.1 mm/h or more, and in a cold pool; NaN where there is none.
    descending : ndarray of bool, (m,) or None
        Whether the air there is descending warm dry air, the error of the method included.
    carried : ndarray of float32, (CARRIED, m) or None [SI]
        With the error of the method.
    rules : ndarray of int8, (rules, m) or None
        Of each threshold without its codes: 1 met, -1 missed, 0 not known.
    """

    crosses: NDArray[np.int8]
    ends: Array | None = None
    rain: float = np.nan
    in_pool: float = np.nan
    descending: NDArray[np.bool_] | None = None
    carried: NDArray[np.float32] | None = None
    rules: NDArray[np.int8] | None = None


def hour_members(
    state: SiteState,
    site: LeeAir | None,
    crossing: Crossing | None,
    fire: FireSettings | None = None,
    when: When | None = None,
) -> HourMembers | None:
    """What the members of an hour say of a site.

    Parameters
    ----------
    state : SiteState
        With members.
    site : LeeAir or None
        Its answer; None where the hour does not cross.
    crossing : Crossing or None
    fire : FireSettings, optional
        With the thresholds of a region.
    when : When, optional
        Time and place, for the depth of mixing.

    Returns
    -------
    HourMembers or None
        None without members.
    """
    members = state.members
    if members is None:
        return None
    crosses = np.where(np.isnan(members.crosses), -1, members.crosses).astype(np.int8)
    if site is None or crossing is None or not members.full:
        return HourMembers(crosses)
    full, inputs = members.full, members.inputs
    rain = np.where(np.isfinite(inputs["rain"]), inputs["rain"] >= CHANCE_OF_RAIN, np.nan)
    return HourMembers(
        crosses=crosses,
        ends=np.array([[range_of(some[name]) or (np.nan, np.nan) for name in RANGED] for some in (full, inputs)]),
        rain=_share(rain),
        in_pool=_share(inputs["in_pool"]),
        descending=descending_members(site, full),
        carried=np.array([full[name] for name in CARRIED], dtype=np.float32),
        rules=_rules(site, crossing, members, fire, when),
    )


def descending_members(site: LeeAir, members: Mapping[str, Array]) -> NDArray[np.bool_]:
    """In which members the air at a site is descending warm dry air, by the definition of `descending_warm_dry`.

    Parameters
    ----------
    site : LeeAir
        For the side it lies on.
    members : mapping of str to ndarray (m,)
        `orolift.spread.site_state.KEPT` there.

    Returns
    -------
    ndarray of bool, (m,)
        False in members that do not cross, lie in a pool or do not break through.
    """
    there = np.isfinite(members["temperature"]) & (members["in_pool"] == 0.0) & (members["kept_off"] == 0.0)
    out = np.zeros(there.size, dtype=np.bool_)
    if site.side != "lee" or not there.any():
        return out
    some = {name: value[there] for name, value in members.items()}
    out[there] = warm_and_dry(
        potential_temperature(some["pressure"], some["temperature"]),
        some["potential_beside"],
        some["potential_crest"],
        warming=some["warming"],
        humidity=some["relative_humidity"],
        humidity_beside=some["humidity_beside"],
    )
    return out


def _share(happens: Array) -> float:
    found = chance_of(happens)
    return np.nan if found is None else found


def _rules(
    site: LeeAir, crossing: Crossing, members: SiteMembers, fire: FireSettings | None, when: When | None
) -> NDArray[np.int8] | None:
    """Each threshold in each member, its codes apart."""
    if fire is None or fire.rules is None:
        return None
    values = member_values(
        site_weather(site),
        members.full,
        fire,
        float(np.asarray(crossing.settings.roughness)),
        (site.elevation, crossing.features.crest),
        when,
    )
    out = np.zeros((len(fire.rules.rules), members.crosses.size), dtype=np.int8)
    for number, rule in enumerate(fire.rules.rules):
        met, missed = rule_parts(rule, values, without=CODES)
        out[number] = np.where(missed, -1, np.where(met, 1, 0))
    return out
