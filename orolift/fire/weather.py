"""The air at a site as fire weather needs it: ground values, winds at 10 m, the layer above. Members or hours first."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.air.humidity import (
    dew_point_from_mixing_ratio,
    mixing_ratio_from_dew_point,
    relative_humidity_from_mixing_ratio,
)
from orolift.air.hydrostatic import hydrostatic_pressure
from orolift.air.temperature import potential_temperature, temperature_from_potential_temperature, virtual_temperature

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.result import LeeAir
    from orolift.crossing.wind import SiteWind

    Array = NDArray[np.float64]

LEAST_VAPOUR = 1e-8
"""Vapour [kg per kg] below which air counts as holding this much."""
LEAST_WIND = 0.1
"""Wind [m s-1] below which its range is taken in proportion to this."""


@dataclass(frozen=True, eq=False)
class SiteWeather:
    """Air at a site. Arrays (...), of the layer (..., nz); leading axes are members or hours.

    Winds are NaN where they are not known: in a cold pool that stays and in blocked air.

    Attributes
    ----------
    pressure : ndarray (...) [Pa]
    temperature : ndarray (...) [K]
    mixing_ratio : ndarray (...) [kg per kg of dry air]
    wind, wind_low, wind_high : ndarray (...) [m s-1]
        Mean at 10 m, and the range of the methods.
    gust_low, gust_high : ndarray (...) [m s-1]
        Gusts of 3 s at 10 m: least and most to be expected.
    rain : ndarray (...) [kg m-2 s-1]
    height_above_ground : ndarray (nz,) [m]
    layer_temperature, layer_vapour, layer_wind : ndarray (..., nz)
        Air over the site; a calm below the lowest air that crosses.
    heating, layer_heating : ndarray (...) and (..., nz) [K]
        What of the temperatures is heat from the ground of the lee, for the night.
    """

    pressure: Array
    temperature: Array
    mixing_ratio: Array
    wind: Array
    wind_low: Array
    wind_high: Array
    gust_low: Array
    gust_high: Array
    rain: Array
    height_above_ground: Array
    layer_temperature: Array
    layer_vapour: Array
    layer_wind: Array
    heating: Array = field(default_factory=lambda: np.zeros(()))
    layer_heating: Array = field(default_factory=lambda: np.zeros(()))


def site_weather(air: LeeAir) -> SiteWeather:
    """Fire weather's view of a site of a crossing.

    Parameters
    ----------
    air : LeeAir

    Returns
    -------
    SiteWeather, leading axes ()
        The wind of the layer is that across the range, from the streamlines over the site.
    """
    profile = air.profile
    mean, low, high, gust_low, gust_high = (np.asarray(value) for value in _winds(air.wind))
    return SiteWeather(
        pressure=np.asarray(air.pressure),
        temperature=np.asarray(air.temperature),
        mixing_ratio=np.asarray(max(air.mixing_ratio, LEAST_VAPOUR)),
        wind=mean,
        wind_low=low,
        wind_high=high,
        gust_low=gust_low,
        gust_high=gust_high,
        rain=np.asarray(air.rain),
        height_above_ground=profile.height_above_ground,
        layer_temperature=profile.temperature,
        layer_vapour=np.maximum(profile.vapour, LEAST_VAPOUR),
        layer_wind=profile.wind,
        heating=np.asarray(0.0 if air.parts is None else air.parts.surface_heating),
        layer_heating=np.zeros_like(profile.height_above_ground)
        if profile.warming is None or air.parts is None
        else profile.warming,
    )


def _winds(wind: SiteWind | None) -> tuple[float, float, float, float, float]:
    """Mean at 10 m with its range, in proportion to that of the lowest 300 m, and gusts."""
    if wind is None:
        return (np.nan,) * 5
    low, high = (end / max(wind.wind, LEAST_WIND) for end in (wind.low, wind.high))
    return wind.at_10m, wind.at_10m * low, wind.at_10m * high, wind.gust_low, wind.gust_high


def stacked(weathers: list[SiteWeather]) -> SiteWeather:
    """Several views of one site, as members or hours: each field with a new first axis.

    Parameters
    ----------
    weathers : list of SiteWeather
        With the same heights above ground.

    Returns
    -------
    SiteWeather
    """
    names = [name for name in SiteWeather.__dataclass_fields__ if name != "height_above_ground"]
    fields = {name: np.stack([np.asarray(getattr(one, name)) for one in weathers]) for name in names}
    return SiteWeather(height_above_ground=weathers[0].height_above_ground, **fields)


def joined(weathers: list[SiteWeather]) -> SiteWeather:
    """Views with leading axes (n,) one after the other, to be worked out in one go.

    Parameters
    ----------
    weathers : list of SiteWeather
        With the same heights above ground.

    Returns
    -------
    SiteWeather, leading axes (sum of n,)
    """
    sizes = [max(np.size(x) for x in (one.temperature, one.mixing_ratio, one.wind)) for one in weathers]
    fields = {}
    for name in SiteWeather.__dataclass_fields__:
        if name != "height_above_ground":
            rows = [np.asarray(getattr(one, name)) for one in weathers]
            tail = (weathers[0].height_above_ground.size,) if name.startswith("layer_") else ()
            fields[name] = np.concatenate(
                [np.broadcast_to(row, (size, *tail)) for row, size in zip(rows, sizes, strict=True)]
            )
    return SiteWeather(height_above_ground=weathers[0].height_above_ground, **fields)


def humidity(weather: SiteWeather) -> Array:
    """Relative humidity at the site, at most 1: air above saturation counts as saturated [1], (...)."""
    found = relative_humidity_from_mixing_ratio(weather.pressure, weather.temperature, weather.mixing_ratio)
    return np.asarray(np.minimum(found, 1.0))


def layer_pressure(weather: SiteWeather) -> Array:
    """Pressure of the layer over the site, hydrostatic from its ground [Pa], (..., nz)."""
    virtual = virtual_temperature(weather.layer_temperature, weather.layer_vapour)
    return hydrostatic_pressure(weather.height_above_ground, virtual, weather.pressure)


def layer_humidity(weather: SiteWeather) -> Array:
    """Relative humidity of the layer over the site, at most 1 [1], (..., nz)."""
    found = relative_humidity_from_mixing_ratio(
        layer_pressure(weather), weather.layer_temperature, weather.layer_vapour
    )
    return np.asarray(np.minimum(found, 1.0))


def with_more_wind(weather: SiteWeather, crest_wind: float, more: ArrayLike) -> SiteWeather:
    """The site with more wind across the crest.

    Parameters
    ----------
    weather : SiteWeather, leading axes ()
    crest_wind : float [m s-1]
        Of the crossing, above 0.
    more : array_like, shape (n,) [m s-1]
        Change at the crest; below a calm counts as calm.

    Returns
    -------
    SiteWeather, leading axes (n,)

    Notes
    -----
    All winds at the site change in proportion, as in waves of small height; that more wind also lets lower air over
    the range is not worked out.
    """
    factor = np.maximum(1.0 + np.asarray(more, np.float64) / crest_wind, 0.0)
    winds = {name: getattr(weather, name) * factor for name in ("wind", "wind_low", "wind_high", "gust_low")}
    winds |= {"gust_high": weather.gust_high * factor, "layer_wind": weather.layer_wind * factor[:, np.newaxis]}
    return replace(weather, **winds)


def with_warmer_air(weather: SiteWeather, more: ArrayLike) -> SiteWeather:
    """The site warmer, its vapour kept.

    Parameters
    ----------
    weather : SiteWeather, leading axes ()
    more : array_like, shape (n,) [K]

    Returns
    -------
    SiteWeather, leading axes (n,)
    """
    change = np.asarray(more, np.float64)
    return replace(
        weather,
        temperature=weather.temperature + change,
        layer_temperature=weather.layer_temperature + change[:, np.newaxis],
    )


def with_other_dew_point(weather: SiteWeather, more: ArrayLike) -> SiteWeather:
    """The site with another dew point, its temperature kept; the layer above in the same proportion.

    Parameters
    ----------
    weather : SiteWeather, leading axes ()
    more : array_like, shape (n,) [K]

    Returns
    -------
    SiteWeather, leading axes (n,)
        The dew point is at most the temperature.
    """
    now = float(dew_point_from_mixing_ratio(weather.pressure, weather.mixing_ratio))
    wanted = np.minimum(now + np.asarray(more, np.float64), float(weather.temperature))
    vapour = mixing_ratio_from_dew_point(float(weather.pressure), wanted)
    ratio = vapour / float(weather.mixing_ratio)
    return replace(weather, mixing_ratio=vapour, layer_vapour=weather.layer_vapour * ratio[:, np.newaxis])


def with_other_source(
    weather: SiteWeather, incoming: IncomingAir, source_level: float, more: ArrayLike
) -> tuple[Array, SiteWeather]:
    """The site with air that comes from higher or lower in the incoming column.

    Parameters
    ----------
    weather : SiteWeather, leading axes ()
    incoming : IncomingAir
    source_level : float [m above sea level]
        Of the air that arrives now.
    more : array_like, shape (n,) [m]
        Change of it; those that leave the column are left out.

    Returns
    -------
    more : ndarray (n',) [m]
        Changes that stay in the column.
    weather : SiteWeather, leading axes (n',)

    Notes
    -----
    Temperature changes by the difference, and vapour by the ratio, of the air at the two levels brought to the site's
    pressure dry: condensation on the way is taken as unchanged.
    """
    change = np.asarray(more, np.float64)
    levels = source_level + change
    inside = (levels >= incoming.height[0]) & (levels <= incoming.height[-1])
    change, levels = change[inside], levels[inside]
    read = interpolated(incoming, np.concatenate([[max(source_level, float(incoming.height[0]))], levels]))
    dry = temperature_from_potential_temperature(
        float(weather.pressure), potential_temperature(read.pressure, read.temperature)
    )
    shift, ratio = (
        dry[1:] - dry[0],
        np.maximum(read.vapour[1:], LEAST_VAPOUR) / max(float(read.vapour[0]), LEAST_VAPOUR),
    )
    warmer = with_warmer_air(weather, shift)
    return change, replace(
        warmer,
        mixing_ratio=np.maximum(weather.mixing_ratio * ratio, LEAST_VAPOUR),
        layer_vapour=np.maximum(weather.layer_vapour * ratio[:, np.newaxis], LEAST_VAPOUR),
    )
