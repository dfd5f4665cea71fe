"""A situation in members: its air and options changed by what was drawn for each."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column_change import with_values
from orolift.air.humidity import dew_point_from_mixing_ratio
from orolift.air.saturation import saturation_mixing_ratio, saturation_vapour_pressure_over_liquid
from orolift.crossing.members import Variation
from orolift.crossing.pool import POOL_STABILITY, Lee
from orolift.crossing.settings import Settings
from orolift.crossing.upwind import LEAST_CRITICAL, MOST_CRITICAL
from orolift.spread.uncertainty import INPUTS, cut_normal, log_normal, normal

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.situation import Situation
    from orolift.spread.uncertainty import Uncertainty

    Array = NDArray[np.float64]

LAPSE_DEPTH = 5000.0
"""Depth [m] of the lowest air whose lapse rate is uncertain; above it the column keeps its own; a judgement."""
MOST_ROUND = 0.8
"""Largest share of low air that goes round where it is not known better: on 66 real pairs of soundings some crosses."""
LEAST_VAPOUR = 1e-8
"""Vapour [kg per kg] below which a dew point is that of this much."""
COLDEST_DEW_POINT = 150.0
"""Dew point [K] below which vapour is changed as at this one."""


def draws_of(situation: Situation, uncertainty: Uncertainty, level: Array) -> dict[str, Array]:
    """What is drawn for each member, as changes in SI and as factors; for the options, their values.

    Parameters
    ----------
    situation : Situation
    uncertainty : Uncertainty
    level : ndarray (m, columns) [1]
        From `uncertainty.latin_hypercube`.

    Returns
    -------
    dict of str to ndarray (m,)
        By the name of the input. The share that goes round is drawn around that of each member, and stands as its
        level between 0 and 1.
    """
    at = dict(zip(INPUTS, level.T, strict=False))
    settings = situation.settings or Settings()
    shifts = ("temperature", "dew_point", "pressure", "wind_from", "lapse_rate", "lee_temperature")
    factors = ("wind", "cloud_time", "fall_time", "mixing_depth", "surface_heat")
    out = {name: getattr(uncertainty, name) * normal(at[name]) for name in shifts}
    out |= {name: log_normal(at[name], getattr(uncertainty, name)) for name in factors}
    out["critical_value"] = _critical(at["critical_value"], settings, uncertainty.critical_value)
    out["going_round_share"] = at["going_round_share"]
    out["liquid_cloud"] = (at["liquid_cloud"] < uncertainty.liquid_cloud).astype(np.float64)
    if settings.removed_share is not None:
        center = np.broadcast_to(np.asarray(settings.removed_share, np.float64), at["removed_share"].shape)
        out["removed_share"] = cut_normal(at["removed_share"], center, uncertainty.removed_share, 0.0, 1.0)
    return out


def what_varies(situation: Situation, uncertainty: Uncertainty) -> tuple[str, ...]:
    """Inputs that differ between members and can make a difference in this situation.

    Parameters
    ----------
    situation : Situation
    uncertainty : Uncertainty

    Returns
    -------
    tuple of str
    """
    settings, when = situation.settings or Settings(), situation.when
    sunlit = settings.surface_heat and when is not None and None not in (when.time, when.longitude, when.latitude)
    given = settings.removed_share is not None
    idle = {
        "removed_share": not given,
        "cloud_time": given,
        "fall_time": given,
        "surface_heat": not sunlit,
        "lee_temperature": situation.lee is None or not situation.lee.known,
    }
    return tuple(name for name in INPUTS if getattr(uncertainty, name) > 0.0 and not idle.get(name, False))


def _critical(level: Array, settings: Settings, deviation: float) -> Array:
    """Critical values around the one that is set, between those that are thinkable."""
    center = float(np.asarray(settings.critical_value))
    low, high = np.log(min(LEAST_CRITICAL, center)), np.log(max(MOST_CRITICAL, center))
    return np.exp(cut_normal(level, np.full(level.shape, np.log(center)), deviation / center, low, high))


def variation_of(
    situation: Situation, uncertainty: Uncertainty, drawn: dict[str, Array], *, freezing: bool
) -> Variation:
    """Members of a situation with what was drawn.

    Parameters
    ----------
    situation : Situation
    uncertainty : Uncertainty
    drawn : dict of str to ndarray (m,)
        From `draws_of`, or some of its members.
    freezing : bool
        Whether condensate freezes in these members.

    Returns
    -------
    Variation

    Raises
    ------
    OutOfRangeError
        If a column comes out beyond what is physical.
    """
    settings = situation.settings or Settings()
    changed = replace(
        settings,
        critical_value=drawn["critical_value"],
        cloud_time=np.clip(np.asarray(settings.cloud_time) * drawn["cloud_time"], 50.0, 20000.0),
        fall_time=np.clip(np.asarray(settings.fall_time) * drawn["fall_time"], 50.0, 20000.0),
        mixing_depth=np.clip(np.asarray(settings.mixing_depth) * drawn["mixing_depth"], 10.0, 1000.0),
        removed_share=drawn.get("removed_share"),
        freezing=freezing,
    )
    level, deviation = drawn["going_round_share"], uncertainty.going_round_share

    def share(found: Array) -> Array:
        # what falls beyond an end is at the end: a range without a gap may well have none
        return np.clip(found + deviation * normal(level), 0.0, np.maximum(MOST_ROUND, found))

    return Variation(
        incoming=columns(situation.incoming, drawn, freezing=freezing),
        settings=changed,
        lee=_lees(situation.lee, drawn["lee_temperature"]),
        share=share,
        heat_factor=drawn["surface_heat"],
    )


def variations_of(
    situation: Situation, uncertainty: Uncertainty, level: Array
) -> list[tuple[NDArray[np.intp], Variation]]:
    """Members of a situation in groups that can be marched together: condensate freezes in all of one, or in none.

    Parameters
    ----------
    situation : Situation
    uncertainty : Uncertainty
    level : ndarray (m, columns) [1]
        From `uncertainty.latin_hypercube`.

    Returns
    -------
    list of (ndarray, Variation)
        Numbers of the members of a group, and what they differ in.

    Raises
    ------
    OutOfRangeError
        As `variation_of`.
    """
    drawn = draws_of(situation, uncertainty, level)
    as_set = situation.settings is None or situation.settings.freezing
    liquid = (drawn["liquid_cloud"] > 0.0) | (not as_set)
    out = []
    for frozen in (True, False):
        some = np.flatnonzero(liquid != frozen)
        if some.size:
            own = {name: value[some] for name, value in drawn.items()}
            out.append((some, variation_of(situation, uncertainty, own, freezing=frozen)))
    return out


def columns(air: IncomingAir, drawn: dict[str, Array], *, freezing: bool) -> IncomingAir:
    """The incoming column in members.

    Parameters
    ----------
    air : IncomingAir, fields (nz,)
    drawn : dict of str to ndarray (m,)
    freezing : bool

    Returns
    -------
    IncomingAir, fields (m, nz)

    Raises
    ------
    OutOfRangeError
        If a column comes out beyond what is physical.

    Notes
    -----
    Temperature changes by the same at all heights; a larger lapse rate cools above the ground, up to 5 km, by
    the height times the change. Vapour changes as its dew point, not beyond saturation
    at the new temperature; cloud stays. The wind turns and grows by the same at all heights.
    """

    def each(name: str) -> Array:
        return drawn[name][:, np.newaxis]

    depth = np.minimum(air.height - air.height[0], LAPSE_DEPTH)
    temperature = air.temperature + each("temperature") - each("lapse_rate") * depth
    ground = air.pressure[0] + drawn["pressure"]
    pressure = air.pressure * (ground / air.pressure[0])[:, np.newaxis]
    dew_point = np.maximum(
        dew_point_from_mixing_ratio(air.pressure, np.maximum(air.vapour, LEAST_VAPOUR)), COLDEST_DEW_POINT
    )
    over = saturation_vapour_pressure_over_liquid
    moister = over(np.maximum(dew_point + each("dew_point"), COLDEST_DEW_POINT)) / over(dew_point)
    most = np.maximum(saturation_mixing_ratio(pressure, temperature, freezing=freezing), 0.0)
    vapour = np.minimum(air.vapour * moister, most)
    turn, grow = each("wind_from"), each("wind")
    east, north = air.eastward_wind, air.northward_wind
    return with_values(
        air,
        ground_pressure=ground,
        temperature=temperature,
        water=vapour + air.cloud,
        eastward_wind=grow * (east * np.cos(turn) + north * np.sin(turn)),
        northward_wind=grow * (north * np.cos(turn) - east * np.sin(turn)),
        freezing=freezing,
    )


def _lees(lee: Lee | None, shift: Array) -> tuple[Lee, ...] | None:
    """What is known of the lee, warmer by what was drawn: a warmer lee has a lower pool."""
    if lee is None or not lee.known:
        return None
    warmer = []
    for change in shift:
        by = float(change)
        warmer.append(
            Lee(
                temperature=None if lee.temperature is None else lee.temperature + by,
                pool_top=None if lee.pool_top is None else lee.pool_top - by / POOL_STABILITY,
                air=None if lee.air is None else replace(lee.air, temperature=lee.air.temperature + by),
            )
        )
    return tuple(warmer)
