"""The night at a site and over it: recovery of humidity by height, and how deep the air mixes by day."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.humidity import relative_humidity_from_mixing_ratio
from orolift.air.temperature import virtual_potential_temperature, virtual_temperature
from orolift.constants import HEAT_CAPACITY_DRY_AIR, R_DRY
from orolift.crossing.heat import LONGEST, NIGHT_DEPTH, surface_heat
from orolift.crossing.sun import sun_height
from orolift.fire.mixing_height import mixing_height
from orolift.fire.night import STILL_DEPTH, humidity_after_cooling, night_cooling
from orolift.fire.weather import layer_pressure
from orolift.flow.profiles import value_at

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import ArrayLike, NDArray

    from orolift.crossing.result import LeeAir, When
    from orolift.fire.weather import SiteWeather

    Array = NDArray[np.float64]

NIGHT_LOSS = 30.0
"""Heat [W m-2] that the ground takes from the air of a valley on a clear night; less than on the windy way to it
(`orolift.crossing.heat`); a judgement."""
USUAL_GROUND = (288.15, 1.0e5)
"""Temperature [K] and pressure [Pa] of the air at the ground for the sun's heat of the day: they matter little."""
USUAL_NIGHT = 12.0 * 3600.0
"""Length of the night [s] where time or place is not known; a judgement."""
DAY = 86400.0
_QUARTERS = 97  # moments of a day, a quarter of an hour apart


@dataclass(frozen=True)
class NightAtSite:
    """Highest relative humidity of the night by place, and depth of mixing; NaN where there is no such place.

    Attributes
    ----------
    length : float [s]
        Of the night.
    length_known : bool
        Whether from the sun; else assumed.
    floor_windy, floor_still : float [1]
        At the site, taken as the floor of its valley: where wind keeps the air mixed, and where it comes to rest.
    mid_slope, ridge : float [1]
        Half-way up to the crest, and at its height: without cooling.
    mid_slope_height, ridge_height : float [m above sea level]
    mixing_height, mixing_height_by_day : float [m above ground]
        At the valid time, and the greatest in the 24 hours from then, by the ground's heat alone.
    """

    length: float
    length_known: bool
    floor_windy: float
    floor_still: float
    mid_slope: float
    ridge: float
    mid_slope_height: float
    ridge_height: float
    mixing_height: float
    mixing_height_by_day: float


NIGHT_VALUES = ("floor_windy", "floor_still", "mid_slope", "ridge", "mixing_height", "mixing_height_by_day")
"""Numbers of a night that depend on its air."""


def night_values(
    weather: SiteWeather, elevation: ArrayLike, crest: ArrayLike, when: When
) -> dict[str, NDArray[np.float64]]:
    """The coming night of sites or members.

    Parameters
    ----------
    weather : SiteWeather, leading axes (n,)
    elevation, crest : array_like (n,) or single values [m above sea level]
        Of the site, and of the crest of its line.
    when : When

    Returns
    -------
    dict of str to ndarray (n,)
        By the names in `NIGHT_VALUES`, as in `NightAtSite`.

    Notes
    -----
    The air stays that of the crossing all night, its heat from the ground taken off. The floor then loses 30 W/m2: with
    wind from 800 m for at most 8 hours; at rest, from `night.STILL_DEPTH` and all
    night. Slope and ridge stay in the free air over the site, without cooling and with their vapour: on a ridge
    humidity can stay low all night. For the depth of mixing, heat of the last 8 hours, none once the sun is down, under
    a clear sky.
    """
    z, vapour = weather.height_above_ground, weather.mixing_ratio
    base, layer = weather.temperature - weather.heating, weather.layer_temperature - weather.layer_heating
    density = np.clip(weather.pressure / (R_DRY * virtual_temperature(base, vapour)), 0.3, 1.6)
    length = _night_length(when)
    hours = USUAL_NIGHT if length is None else length
    before = np.minimum(relative_humidity_from_mixing_ratio(weather.pressure, base, vapour), 1.0)
    windy = night_cooling(min(hours, LONGEST), NIGHT_LOSS, NIGHT_DEPTH, density)
    still = night_cooling(hours, NIGHT_LOSS, STILL_DEPTH, density)
    pressure = layer_pressure(weather)
    over = np.minimum(relative_humidity_from_mixing_ratio(pressure, layer, weather.layer_vapour), 1.0)
    theta = virtual_potential_temperature(pressure, layer, weather.layer_vapour)
    now, by_day = mixing_height(z, theta, heat=np.stack([heat / density for heat in _heats(when)]))
    up = np.broadcast_to(np.asarray(crest, np.float64) - np.asarray(elevation, np.float64), np.shape(base))
    return {
        "floor_windy": np.asarray(humidity_after_cooling(base, before, windy)),
        "floor_still": np.asarray(humidity_after_cooling(base, before, still)),
        "mid_slope": _over(0.5 * up, z, over),
        "ridge": _over(up, z, over),
        "mixing_height": now,
        "mixing_height_by_day": by_day,
    }


def nights_at(weather: SiteWeather, lee: Sequence[LeeAir], crests: ArrayLike, when: When) -> tuple[NightAtSite, ...]:
    """The coming night at sites.

    Parameters
    ----------
    weather : SiteWeather, leading axes (n,)
        Of the sites.
    lee : sequence of LeeAir, n
        The same sites.
    crests : array_like (n,) [m above sea level]
    when : When

    Returns
    -------
    tuple of NightAtSite, n
        As `night_values` works them out.
    """
    ground, crest = np.array([air.elevation for air in lee]), np.asarray(crests, np.float64)
    found = night_values(weather, ground, crest, when)
    length = _night_length(when)
    return tuple(
        NightAtSite(
            length=USUAL_NIGHT if length is None else length,
            length_known=length is not None,
            mid_slope_height=0.5 * float(ground[number] + crest[number]),
            ridge_height=float(crest[number]),
            **{name: float(value[number]) for name, value in found.items()},
        )
        for number in range(len(lee))
    )


def _over(above: Array, z: Array, values: Array) -> Array:
    """Values of profiles (n, nz) at a height above ground each, NaN at the ground, below it and above the profile."""
    found = value_at(z, values, above[:, np.newaxis])[:, 0]
    return np.where((above > 0.0) & (above <= z[-1]), found, np.nan)


def _night_length(when: When) -> float | None:
    """How long the sun is down in the 24 hours from the valid time [s]; None where time or place is unknown."""
    if when.time is None or when.longitude is None or when.latitude is None:
        return None
    times = when.time + np.linspace(0.0, DAY, _QUARTERS)
    down = sun_height(times, when.longitude, when.latitude) <= 0.0
    return float(np.mean(down) * DAY)


@lru_cache(maxsize=64)
def _heats(when: When) -> tuple[float, float]:
    """Heat from the sun over heat capacity [kg m-2 K]: now, and the most of the 24 hours from now."""
    if when.time is None or when.longitude is None or when.latitude is None:
        return 0.0, 0.0
    times = when.time + np.arange(0.0, DAY + 1.0, 7200.0)
    place = (when.longitude, when.latitude)
    heats = [surface_heat(float(time), *place, LONGEST, *USUAL_GROUND) for time in times]
    days = [float(heat.sensible) / HEAT_CAPACITY_DRY_AIR for heat in heats]
    shines = float(sun_height(when.time, *place)) > 0.0
    return days[0] if shines else 0.0, max(days)
