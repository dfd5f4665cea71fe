"""What one crossing is for its sites, in a few numbers each: small enough to keep for thousands of crossings."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Literal

import numpy as np

from orolift.air.column import interpolated
from orolift.air.humidity import relative_humidity_from_dew_point
from orolift.air.temperature import potential_temperature
from orolift.crossing import layer_above
from orolift.crossing.descending import warm_and_dry
from orolift.crossing.members import PARTS
from orolift.crossing.result import When
from orolift.crossing.situation import crossing_of
from orolift.crossing.way import way_to
from orolift.errors import NoCrossingError, OroliftError
from orolift.fire.dryness import HIGHEST_TEMPERATURE, LOWEST_TEMPERATURE, vapour_pressure_deficit
from orolift.fire.indices import site_fire
from orolift.fire.nights import nights_at
from orolift.fire.values import site_values
from orolift.fire.weather import site_weather, stacked
from orolift.spread.at_sites import column_of
from orolift.spread.spread import Drawn, crosses_of, spread_of

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing, LeeAir, Side, WarmingParts
    from orolift.crossing.situation import Situation
    from orolift.fire.sites import FireSettings
    from orolift.fire.winds import WindMeant

    Array = NDArray[np.float64]

Status = Literal["crossing", "no crossing", "missing"]


KEPT = (
    *("pressure", "temperature", "dew_point", "relative_humidity", "mixing_ratio", "wind_10m", "gust"),
    *("source_level", "warming", *(f"warming_{name}" for name in PARTS), "rain", "in_pool"),
    *("way", "kept_off", "potential_beside", "potential_crest", "humidity_beside"),
    *layer_above.NAMES,
)
"""Arrays of members that are kept of a site."""


@dataclass(frozen=True, slots=True, eq=False)
class SiteMembers:
    """What members give at a site; NaN where one has no such value, as where it does not cross.

    Attributes
    ----------
    inputs, full : mapping of str to ndarray (m,)
        Those of `KEPT` and `drying_power`, in SI: by the inputs alone, and with the error of the method. Empty where
        the situation itself does not cross.
    crosses : ndarray (m,) [1]
        1 in members that cross, 0 in those that do not; NaN in those that could not be worked out.
    line_rain : ndarray (m,) or None [kg m-1 s-1]
        Rain and snow along the whole line, background left out; None where the situation does not cross.
    """

    inputs: Mapping[str, Array]
    full: Mapping[str, Array]
    crosses: Array
    line_rain: Array | None = None


@dataclass(frozen=True, slots=True)
class Travel:
    """Time the air takes to a site, from where it was observed [s].

    Attributes
    ----------
    time : float
        Mean over the streamlines that arrive in the mixing depth, by the air they carry past the site.
    spread : float
        Standard deviation between them.
    """

    time: float
    spread: float


@dataclass(frozen=True, slots=True)
class SiteState:
    """One site in one crossing; None where there is nothing to say.

    Attributes
    ----------
    status : 'crossing', 'no crossing' or 'missing'
    reason : str
        Why there is no crossing.
    side : 'windward', 'crest', 'lee' or None
    in_pool : bool or None
    temperature, dew_point : float or None [K]
    relative_humidity : float or None [1]
    drying_power : float or None [Pa m s-1]
        Vapour pressure deficit times the wind at 10 m.
    wind_10m, gust : float or None [m s-1]
        None in a pool and in blocked air.
    warming : float or None [K]
        Against the incoming air at the height of the site.
    parts : WarmingParts or None
    source_level : float or None [m above sea level]
    rain : float or None [kg m-2 s-1]
        Rain and snow at the site on the line, background included.
    snow : float or None [kg m-2 s-1]
        Of it, the snow.
    travel : Travel or None
    shelter_height : float or None [m above sea level]
        Highest ground of the line before the site.
    shelter_distance : float or None [m]
        From there to the site, along the line.
    shelter_longitude, shelter_latitude : float or None [degrees east, degrees north]
        Where that is; None for a hand-entered ridge.
    crest_wind : float or None [m s-1]
        Component across the range.
    oblique : float or None [rad]
        Angle between the wind and the direction across the range, 0 to a right angle; None where nobody asked.
    breaks_through : bool or None
    descending : bool or None
        Whether the air there is descending warm dry air; see `descending_warm_dry`.
    rule_values : mapping of quantity to float, or None [SI]
        What the thresholds of a region speak of, NaN where it is not known; None without thresholds.
    members : SiteMembers or None
        None where nobody asked for them, and where they could not be worked out.
    """

    status: Status
    reason: str = ""
    side: Side | None = None
    in_pool: bool | None = None
    temperature: float | None = None
    dew_point: float | None = None
    relative_humidity: float | None = None
    drying_power: float | None = None
    wind_10m: float | None = None
    gust: float | None = None
    warming: float | None = None
    parts: WarmingParts | None = None
    source_level: float | None = None
    rain: float | None = None
    snow: float | None = None
    travel: Travel | None = None
    shelter_height: float | None = None
    shelter_distance: float | None = None
    shelter_longitude: float | None = None
    shelter_latitude: float | None = None
    crest_wind: float | None = None
    oblique: float | None = None
    breaks_through: bool | None = None
    descending: bool | None = None
    rule_values: Mapping[str | WindMeant, float] | None = None
    members: SiteMembers | None = None


def states_of(
    situation: Situation, observed_at: float = 0.0, fire: FireSettings | None = None, drawn: Drawn | None = None
) -> tuple[tuple[SiteState, ...], Crossing | None]:
    """The sites of a situation, whether it crosses or not.

    Parameters
    ----------
    situation : Situation
        With one site at least.
    observed_at : float [m]
        Where on the transect the incoming air was observed; times on the way are counted from there.
    fire : FireSettings, optional
        With the thresholds of a region.
    drawn : Drawn, optional
        What members are drawn from; none are worked out without.

    Returns
    -------
    states : tuple of SiteState
        In the order of the sites.
    crossing : Crossing or None
        None without a crossing.
    """
    try:
        crossing = crossing_of(situation)
    except NoCrossingError as error:
        still = None if drawn is None else members_without_answer(situation, drawn)
        return (SiteState("no crossing", str(error), members=still),) * len(situation.sites), None
    except OroliftError as error:
        return (SiteState("missing", str(error)),) * len(situation.sites), None
    states = tuple(_state(site, crossing, observed_at) for site in crossing.lee)
    if drawn is not None:
        members = members_of_sites(situation, crossing, drawn, observed_at)
        states = tuple(replace(state, members=found) for state, found in zip(states, members, strict=True))
    if fire is None or fire.rules is None:
        return states, crossing
    when = situation.when or When()
    values = [rule_values(crossing, site, when, fire) for site in crossing.lee]
    return tuple(replace(state, rule_values=found) for state, found in zip(states, values, strict=True)), crossing


def members_of_sites(
    situation: Situation, crossing: Crossing, drawn: Drawn, observed_at: float = 0.0
) -> tuple[SiteMembers | None, ...]:
    """What members give at the sites of a situation.

    Parameters
    ----------
    situation : Situation
    crossing : Crossing
        Of the situation.
    drawn : Drawn
    observed_at : float [m]
        As for `states_of`.

    Returns
    -------
    tuple of SiteMembers or None
        In the order of the sites; None where no member crosses, or none could be worked out.
    """
    try:
        found = spread_of(
            situation,
            crossing,
            drawn.uncertainty,
            members=drawn.members,
            seed=drawn.seed,
            observed_at=observed_at,
        )
    except OroliftError:
        return (None,) * len(crossing.lee)
    if not found.full_sites:
        return (None,) * len(crossing.lee)
    crosses = found.crosses.astype(np.float64)
    crosses[[one.number for one in found.failed]] = np.nan
    out = []
    for site in crossing.lee:
        column = column_of(crossing, site)
        inputs, full = ({name: arrays[name][:, column] for name in KEPT} for arrays in (found.sites, found.full_sites))
        for one in (inputs, full):
            one["drying_power"] = _drying_power(one)
        out.append(SiteMembers(inputs, full, crosses, found.values["total"]))
    return tuple(out)


def _drying_power(values: Mapping[str, Array]) -> Array:
    """Vapour pressure deficit times the wind at 10 m of each member [Pa m s-1], NaN without a wind."""
    t, u, wind = (values[name] for name in ("temperature", "relative_humidity", "wind_10m"))
    out = np.full(wind.shape, np.nan)
    there = np.isfinite(wind) & np.isfinite(u) & (t >= LOWEST_TEMPERATURE) & (t <= HIGHEST_TEMPERATURE)
    out[there] = vapour_pressure_deficit(t[there], np.clip(u[there], 0.0, 1.0)) * wind[there]
    return out


def members_without_answer(situation: Situation, drawn: Drawn) -> SiteMembers | None:
    """Which members of a situation cross that does not do so itself; None where that could not be worked out.

    Parameters
    ----------
    situation : Situation
    drawn : Drawn

    Returns
    -------
    SiteMembers or None
        Without values: a range needs an answer that it belongs to.
    """
    try:
        return SiteMembers({}, {}, crosses_of(situation, drawn).astype(np.float64))
    except OroliftError:
        return None


def rule_values(crossing: Crossing, site: LeeAir, when: When, fire: FireSettings) -> dict[str | WindMeant, float]:
    """What the thresholds of a region speak of, at one site.

    Parameters
    ----------
    crossing : Crossing
    site : LeeAir
    when : When
    fire : FireSettings
        With rules.

    Returns
    -------
    dict of quantity to float [SI]
        NaN where it is not known, as the codes that are carried from hour to hour.
    """
    rules = () if fire.rules is None else fire.rules.rules
    wanted = {condition.quantity for rule in rules for condition in rule.conditions}
    weather = site_weather(site)
    indices = site_fire(weather, drought_index=fire.drought_index, hours=())
    others = {
        "drought_index": np.nan if fire.drought_index is None else fire.drought_index,
        "mixing_height": np.nan,
        "source_level": np.nan if site.source_level is None else site.source_level,
        "warming": site.warming,
    }
    if "mixing_height" in wanted:
        (night,) = nights_at(stacked([weather]), [site], [crossing.features.crest], when)
        others["mixing_height"] = night.mixing_height
    roughness = float(np.asarray(crossing.settings.roughness))
    values = site_values(weather, indices, rules, roughness, others=others)
    return {key: float(np.asarray(values.get(key, np.nan))) for key in wanted}


def _state(site: LeeAir, crossing: Crossing, observed_at: float) -> SiteState:
    rain, line = crossing.rain, crossing.transect
    before = line.distance <= site.distance
    shelter = int(np.argmax(np.where(before, line.elevation, -np.inf)))
    deficit = float(vapour_pressure_deficit(site.temperature, min(site.relative_humidity, 1.0)))
    wind = site.wind
    return SiteState(
        status="crossing",
        side=site.side,
        in_pool=site.in_pool,
        temperature=site.temperature,
        dew_point=site.dew_point,
        relative_humidity=site.relative_humidity,
        drying_power=None if wind is None else deficit * wind.at_10m,
        wind_10m=None if wind is None else wind.at_10m,
        gust=None if wind is None else 0.5 * (wind.gust_low + wind.gust_high),
        warming=site.warming,
        parts=site.parts,
        source_level=site.source_level,
        rain=site.rain,
        snow=float(np.interp(site.distance, crossing.distance, rain.snow_rate)),
        travel=travel_to(crossing, site, observed_at),
        shelter_height=float(line.elevation[shelter]),
        shelter_distance=site.distance - float(line.distance[shelter]),
        shelter_longitude=None if line.longitude is None else float(line.longitude[shelter]),
        shelter_latitude=None if line.latitude is None else float(line.latitude[shelter]),
        crest_wind=crossing.flow.crest_wind,
        breaks_through=crossing.flow.breaks_through,
        descending=descending_warm_dry(crossing, site),
    )


def travel_to(crossing: Crossing, site: LeeAir, observed_at: float) -> Travel:
    """Time the air that reaches a site takes from where it was observed.

    Parameters
    ----------
    crossing : Crossing
    site : LeeAir
    observed_at : float [m]
        From the upwind end of the transect; a site before it takes no time.

    Returns
    -------
    Travel

    Notes
    -----
    As `orolift.crossing.way.way_to` has it.
    """
    bearing = crossing.transect.bearing
    mean, spread = way_to(
        crossing.distance,
        crossing.height.T,
        crossing.wind.T,
        site.distance,
        start=observed_at,
        depth=crossing.settings.mixing_depth,
        cosine=1.0 if bearing is None else float(np.cos(crossing.flow.normal - bearing)),
    )
    return Travel(float(mean), float(spread))


def descending_warm_dry(crossing: Crossing, site: LeeAir) -> bool:
    """Whether the air at a site is descending warm dry air.

    Parameters
    ----------
    crossing : Crossing
    site : LeeAir

    Returns
    -------
    bool

    Notes
    -----
    True where all of this holds: the site lies behind the crest, and neither in cold air that stays nor
    under air that does not break through; and its own values are those of such air, see
    `orolift.crossing.descending.warm_and_dry`.
    """
    if site.side != "lee" or site.in_pool or crossing.flow.breaks_through is False:
        return False
    upwind = interpolated(crossing.incoming, np.array([site.elevation, crossing.features.crest]))
    beside, crest = potential_temperature(upwind.pressure, upwind.temperature)
    return bool(
        warm_and_dry(
            potential_temperature(site.pressure, site.temperature),
            beside,
            crest,
            warming=site.warming,
            humidity=site.relative_humidity,
            humidity_beside=relative_humidity_from_dew_point(site.upwind_temperature, site.upwind_dew_point),
        )
    )
