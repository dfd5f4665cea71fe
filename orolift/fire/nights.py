"""The night at a site and over it: recovery of humidity by height, and how deep the air mixes by day."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.humidity import relative_humidity_from_mixing_ratio
from orolift.air.temperature import virtual_potential_temperature, virtual_temperature
from orolift.constants import R_DRY
from orolift.crossing.heat import DAY_DEPTH, LONGEST, NIGHT_DEPTH, NIGHT_FLUX, surface_heat
from orolift.crossing.sun import sun_height
from orolift.fire.mixing_height import mixing_height
from orolift.fire.night import STILL_DEPTH, humidity_after_cooling, night_cooling
from orolift.fire.weather import layer_pressure

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import LeeAir, When
    from orolift.fire.weather import SiteWeather

    Array = NDArray[np.float64]

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


def night_at(weather: SiteWeather, air: LeeAir, crest: float, when: When) -> NightAtSite:
    """The coming night at a site.

    Parameters
    ----------
    weather : SiteWeather, leading axes ()
    air : LeeAir
    crest : float [m above sea level]
    when : When

    Returns
    -------
    NightAtSite

    Notes
    -----
    The air stays that of the crossing all night, its heat from the ground taken off. The floor then loses 30 W/m2: with
    wind from 800 m for at most 8 hours, as `orolift.crossing.heat` has it; at rest, from `night.STILL_DEPTH` and all
    night. Slope and ridge stay in the free air over the site, without cooling and with their vapour: on a ridge
    humidity can stay low all night. For the depth of mixing, heat of the last 8 hours, none once the sun is down.
    """
    heating = 0.0 if air.parts is None else air.parts.surface_heating
    z = weather.height_above_ground
    depth = DAY_DEPTH if heating > 0.0 else NIGHT_DEPTH
    layer = weather.layer_temperature - np.where(z <= depth, heating, 0.0)
    base = float(weather.temperature) - heating
    virtual = float(virtual_temperature(base, float(weather.mixing_ratio)))
    density = float(np.clip(float(weather.pressure) / (R_DRY * virtual), 0.3, 1.6))
    length = _night_length(when)
    before = min(
        float(relative_humidity_from_mixing_ratio(weather.pressure, base, weather.mixing_ratio)),
        1.0,
    )
    hours = USUAL_NIGHT if length is None else length
    windy = night_cooling(min(hours, LONGEST), -NIGHT_FLUX, NIGHT_DEPTH, density)
    still = night_cooling(hours, -NIGHT_FLUX, STILL_DEPTH, density)
    pressure = layer_pressure(weather)
    over = np.minimum(relative_humidity_from_mixing_ratio(pressure, layer, weather.layer_vapour), 1.0)

    def at(height: float) -> float:
        above = height - air.elevation
        return float(np.interp(above, z, over)) if 0.0 < above <= z[-1] else float("nan")

    half = 0.5 * (air.elevation + crest)
    theta = virtual_potential_temperature(pressure, layer, weather.layer_vapour)
    now, by_day = _heats(when, density)
    deep = mixing_height(z, theta, heat=np.array([now, by_day]))
    return NightAtSite(
        length=hours,
        length_known=length is not None,
        floor_windy=float(humidity_after_cooling(base, before, windy)),
        floor_still=float(humidity_after_cooling(base, before, still)),
        mid_slope=at(half),
        ridge=at(crest),
        mid_slope_height=half,
        ridge_height=crest,
        mixing_height=float(deep[0]),
        mixing_height_by_day=float(deep[1]),
    )


def _night_length(when: When) -> float | None:
    """How long the sun is down in the 24 hours from the valid time [s]; None where time or place is unknown."""
    if when.time is None or when.longitude is None or when.latitude is None:
        return None
    times = when.time + np.linspace(0.0, DAY, _QUARTERS)
    down = sun_height(times, when.longitude, when.latitude) <= 0.0
    return float(np.mean(down) * DAY)


def _heats(when: When, density: float) -> tuple[float, float]:
    """Heat from the sun over density and heat capacity [K m]: now, and the most of the 24 hours from now."""
    if when.time is None or when.longitude is None or when.latitude is None:
        return 0.0, 0.0
    times = when.time + np.arange(0.0, DAY + 1.0, 7200.0)
    place = (when.longitude, when.latitude)
    days = [surface_heat(float(time), *place, LONGEST, density).day * DAY_DEPTH for time in times]
    shines = float(sun_height(when.time, *place)) > 0.0
    return days[0] if shines else 0.0, max(days)
