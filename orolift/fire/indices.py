"""Every index of fire weather of a site at once, for any number of members or hours."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.humidity import dew_point_from_mixing_ratio
from orolift.fire.dryness import angstroem_index, vapour_pressure_deficit
from orolift.fire.fine_fuel import fine_fuel_code_daily, fine_fuel_code_hourly, initial_spread_index
from orolift.fire.fosberg import HIGHEST_INDEX, equilibrium_fuel_moisture, fosberg_index, fosberg_index_with_drought
from orolift.fire.hot_dry_windy import LAYER, hot_dry_windy
from orolift.fire.weather import humidity, layer_humidity

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.fire.weather import SiteWeather

    Array = NDArray[np.float64]

HOURS = (1, 3, 6, 12)
"""Hours of the same air after which the hourly fuel code is given."""
HOUR, DAY = 3600.0, 86400.0


@dataclass(frozen=True, eq=False)
class Indices:
    """Indices of a site, arrays (...); NaN where something they need is not known.

    Attributes
    ----------
    temperature, dew_point : ndarray [K]
    relative_humidity : ndarray [1]
    vapour_pressure_deficit : ndarray [Pa]
    equilibrium_fuel_moisture : ndarray [kg per kg of dry fuel]
    fosberg_index_raw, fosberg_index, fosberg_index_with_drought : ndarray [1]
        Without and with the cap at 100; with drought, without a cap.
    hot_dry_windy : ndarray [hPa m s-1]
    fine_fuel_code : ndarray [1]
        Daily, as if this were the air of noon.
    fine_fuel_code_hours : ndarray (..., 4) [1]
        After 1, 3, 6 and 12 hours of this air, or those asked for.
    initial_spread_index : ndarray [1]
        Of the daily code and the wind.
    angstroem_index : ndarray [1]
    """

    temperature: Array
    dew_point: Array
    relative_humidity: Array
    vapour_pressure_deficit: Array
    equilibrium_fuel_moisture: Array
    fosberg_index_raw: Array
    fosberg_index: Array
    fosberg_index_with_drought: Array
    hot_dry_windy: Array
    fine_fuel_code: Array
    fine_fuel_code_hours: Array
    initial_spread_index: Array
    angstroem_index: Array


def one_of(indices: Indices, number: int) -> Indices:
    """Indices of one member, hour or site of the first axis.

    Parameters
    ----------
    indices : Indices, leading axes (n, ...)
    number : int

    Returns
    -------
    Indices, leading axes (...)
    """
    return Indices(**{name: getattr(indices, name)[number] for name in Indices.__dataclass_fields__})


def site_fire(
    weather: SiteWeather,
    *,
    previous_code: float | None = None,
    drought_index: float | None = None,
    rain_duration: float = HOUR,
    hours: tuple[int, ...] = HOURS,
) -> Indices:
    """Indices of fire weather at a site.

    Parameters
    ----------
    weather : SiteWeather, leading axes (...)
    previous_code : float, optional [1]
        Yesterday's Fine Fuel Moisture Code, 0 to 101; without it no code and no spread index.
    drought_index : float, optional [hundredths of an inch]
        Keetch-Byram, 0 to 800.
    rain_duration : float [s]
        How long it rains in the 24 hours to noon, at most a day.
    hours : tuple of int
        Increasing: after how many the hourly code is wanted.

    Returns
    -------
    Indices

    Raises
    ------
    OutOfRangeError
        If a value is outside the range of an index.

    Notes
    -----
    Every index gets the mean wind at 10 m, save Hot-Dry-Windy, which takes the air over the site.
    """
    t, u = weather.temperature, humidity(weather)
    wind = weather.wind
    shape = np.broadcast_shapes(np.shape(t), np.shape(u), np.shape(wind))
    known = np.isfinite(wind)
    calm = np.where(known, wind, 0.0)
    nothing = np.full(shape, np.nan)

    def with_wind(values: Array) -> Array:
        return np.where(known, values, np.nan)

    raw = with_wind(fosberg_index(t, u, calm, capped=False))
    drought = nothing
    if drought_index is not None:
        drought = with_wind(fosberg_index_with_drought(np.where(np.isfinite(raw), raw, 0.0), drought_index))
    code, spread, later = nothing, nothing, np.full((*shape, len(hours)), np.nan)
    if previous_code is not None:
        daily = fine_fuel_code_daily(previous_code, t, u, calm, weather.rain * min(rain_duration, DAY))
        code, spread = with_wind(daily), with_wind(initial_spread_index(daily, calm))
        now: Array = np.full(shape, float(previous_code))
        for number, steps in enumerate(np.diff((0, *hours))):
            now = fine_fuel_code_hourly(now, t, u, calm, weather.rain * HOUR, hours=int(steps))
            later[..., number] = with_wind(now)
    return Indices(
        temperature=np.broadcast_to(t, shape),
        dew_point=np.broadcast_to(dew_point_from_mixing_ratio(weather.pressure, weather.mixing_ratio), shape),
        relative_humidity=np.broadcast_to(u, shape),
        vapour_pressure_deficit=np.broadcast_to(vapour_pressure_deficit(t, u), shape),
        equilibrium_fuel_moisture=np.broadcast_to(equilibrium_fuel_moisture(t, u), shape),
        fosberg_index_raw=raw,
        fosberg_index=np.where(np.isfinite(raw), np.minimum(raw, HIGHEST_INDEX), np.nan),
        fosberg_index_with_drought=drought,
        hot_dry_windy=np.broadcast_to(_hot_dry_windy(weather), shape),
        fine_fuel_code=code,
        fine_fuel_code_hours=later,
        initial_spread_index=spread,
        angstroem_index=np.broadcast_to(angstroem_index(t, u), shape),
    )


def _hot_dry_windy(weather: SiteWeather) -> Array:
    """Of the levels up to the one above its layer: what lies higher may be too cold for an index.

    NaN where neither the wind at the site nor any crossing air in the layer is known: a deep cold pool is not calm.
    """
    count = int(np.searchsorted(weather.height_above_ground, LAYER, side="right")) + 1
    low = (..., slice(0, count))
    layer = replace(
        weather,
        height_above_ground=weather.height_above_ground[:count],
        layer_temperature=weather.layer_temperature[low],
        layer_vapour=weather.layer_vapour[low],
        layer_wind=weather.layer_wind[low],
    )
    found = hot_dry_windy(layer.height_above_ground, layer.layer_temperature, layer_humidity(layer), layer.layer_wind)
    blows = np.any(layer.layer_wind[..., :-1] > 0.0, axis=-1)
    return np.asarray(np.where(np.isfinite(weather.wind) | blows, found, np.nan))
