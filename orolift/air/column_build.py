"""Incoming air from station values or from the levels of a sounding or model.

What is not given is assumed, and every assumption is added to the notes.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from orolift.air.column import IncomingAir, Origin
from orolift.air.column_checks import (
    checked_levels,
    filled_wind,
    height_notes,
    superadiabatic_notes,
)
from orolift.air.column_profile import (
    DRY_FROM,
    DRY_HUMIDITY,
    balanced,
    levels_through,
    relaxed_humidity,
    split_at_saturation,
    vapour_at,
)
from orolift.air.humidity import relative_humidity_from_mixing_ratio
from orolift.air.hydrostatic import hydrostatic_height
from orolift.air.saturation import saturation_vapour_pressure, saturation_vapour_pressure_over_liquid
from orolift.air.temperature import virtual_temperature
from orolift.checks import within
from orolift.constants import STANDARD_LAPSE_RATE, STANDARD_TROPOPAUSE
from orolift.errors import IncomingAirError

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Array = NDArray[np.float64]

HIGHEST_LEVEL = 20000.0  # m
LOWEST_TOP = 16000.0  # m; waves need room above the crest (design choice)

_MEASURED: Origin = "measured"
_STATION: Origin = "station"
_BY_LAPSE: Origin = "lapse rate"
_ABOVE: Origin = "standard lapse above the data"

_STATION_SPACING = 100.0  # m
_ONE = "station"
_EXTRAPOLATED_SPACING = 500.0  # m
_COLDEST = 193.15  # K; no given lapse rate cools the column below -80 degrees Celsius
_HUMIDITY_KEPT_TO = 50000.0  # Pa

_KELVIN = "orolift works in kelvin; add 273.15 to degrees Celsius."
_PASCALS = "orolift works in pascals; multiply hectopascals by 100."
_PER_KILOGRAM = "Give kilograms per kilogram; divide grams per kilogram by 1000."
_PER_METRE = "orolift works in kelvin per metre; divide degrees per kilometre by 1000."
_RADIANS = "orolift works in radians, not degrees."
_METRES = "Give metres above sea level."


class CrestWind(NamedTuple):
    """Wind at crest height: speed [m s-1], direction it comes from [rad], height [m above sea level]."""

    speed: ArrayLike
    from_direction: ArrayLike
    height: float


def air_from_station(
    elevation: float,
    pressure: ArrayLike,
    temperature: ArrayLike,
    mixing_ratio: ArrayLike,
    wind_speed: ArrayLike,
    wind_from_direction: ArrayLike,
    *,
    lapse_rate: ArrayLike = STANDARD_LAPSE_RATE,
    crest_wind: CrestWind | tuple[ArrayLike, ArrayLike, float] | None = None,
    top: float = HIGHEST_LEVEL,
    freezing: bool = True,
    station: str = _ONE,
) -> IncomingAir:
    """Column above a station, from the values of the station alone.

    Use `air_from_levels` when a sounding or a model column is at hand: the real
    lapse rate, and the wind at crest height above all, decide whether air crosses.

    Parameters
    ----------
    elevation : float [m above sea level]
        -500 m to 6000 m.
    pressure : array_like, scalar or shape (...) [Pa]
        At the station, 30000 Pa to 110000 Pa.
    temperature : array_like, broadcasts with `pressure` [K]
        180 K to 330 K.
    mixing_ratio : array_like, broadcasts with `pressure` [kg kg-1 of dry air]
        0 to 0.06. What exceeds saturation becomes cloud (fog) at the station.
    wind_speed : array_like, broadcasts with `pressure` [m s-1]
        0 to 150.
    wind_from_direction : array_like, broadcasts with `pressure` [rad]
        Clockwise from north, -2 pi to 4 pi.
    lapse_rate : array_like, broadcasts with `pressure` [K m-1]
        Fall of temperature with height, 0 to 0.015.
    crest_wind : (speed, from_direction, height) or None
        Wind at a height above the station, if known.
    top : float [m above sea level]
        16000 m to 30000 m.
    freezing : bool
        False: saturation is over liquid at all temperatures.
    station : str
        What the notes call it.

    Returns
    -------
    IncomingAir
        Levels 100 m apart; leading axes are the broadcast shape of the arguments.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.
    IncomingAirError
        If the crest wind is not above the station.

    Notes
    -----
    Assumptions, each also in the notes of the result: temperature falls by
    `lapse_rate` to 11 km (standard tropopause), never below -80 degrees
    Celsius, and is constant above. Relative humidity over liquid is constant
    to 500 hPa, falls linearly in pressure to 10 % at 200 hPa and stays there
    (air already drier than 10 % keeps its humidity); where that would exceed
    saturation over ice the air is just saturated. Wind is constant with height,
    or linear by components from the station to the crest wind, constant above.
    Pressure is hydrostatic with virtual temperature.

    Examples
    --------
    >>> air = air_from_station(40.0, 100400.0, 287.65, 0.0082, 12.9, 4.1)
    >>> air.pressure[[0, 10]].round(-1)
    array([100400.,  89120.])
    """
    within("elevation", elevation, -500.0, 6000.0, "m", _METRES)
    within("top", top, LOWEST_TOP, 30000.0, "m", _METRES)
    p0, t0, r0, speed, direction, lapse = np.broadcast_arrays(
        within("pressure", pressure, 3.0e4, 1.1e5, "Pa", _PASCALS),
        within("temperature", temperature, 180.0, 330.0, "K", _KELVIN),
        within("mixing_ratio", mixing_ratio, 0.0, 0.06, "kg/kg", _PER_KILOGRAM),
        within("wind_speed", wind_speed, 0.0, 150.0, "m/s", "Give metres per second."),
        within("wind_from_direction", wind_from_direction, -2.0 * np.pi, 4.0 * np.pi, "rad", _RADIANS),
        within("lapse_rate", lapse_rate, 0.0, 0.015, "K/m", _PER_METRE),
    )
    crest = None if crest_wind is None else _checked_crest_wind(CrestWind(*crest_wind), elevation)
    kinks = (
        (elevation, STANDARD_TROPOPAUSE, top) if crest is None else (elevation, crest.height, STANDARD_TROPOPAUSE, top)
    )
    height = levels_through(kinks, _STATION_SPACING)
    rise = np.minimum(height, STANDARD_TROPOPAUSE) - elevation
    fallen = t0[..., np.newaxis] - lapse[..., np.newaxis] * rise
    t = np.maximum(fallen, np.minimum(t0, _COLDEST)[..., np.newaxis])
    vapour0, cloud0 = split_at_saturation(p0, t0, r0, freezing=freezing)
    humidity0 = relative_humidity_from_mixing_ratio(p0, t0, vapour0)
    e_liquid, e_most = saturation_vapour_pressure_over_liquid(t), saturation_vapour_pressure(t, freezing=freezing)
    p_kept = np.minimum(p0, _HUMIDITY_KEPT_TO)

    def moisture(p: Array) -> tuple[Array, Array]:
        vapour = vapour_at(p, e_liquid, e_most, relaxed_humidity(p, humidity0, p_kept))
        vapour[..., 0] = vapour0
        cloud = np.zeros_like(vapour)
        cloud[..., 0] = cloud0
        return vapour, cloud

    p, vapour, cloud = balanced(height, t, p0, moisture)
    wind, wind_note = _station_wind(height, elevation, speed, direction, crest, station)
    notes = [
        _lapse_note(lapse, bool(np.any(fallen < t)), station),
        _humidity_note(humidity0, station),
        wind_note,
        *_fog_note(cloud0),
    ]
    origin = (_STATION, *(_BY_LAPSE,) * (height.size - 1))
    return IncomingAir(height, p, t, vapour, cloud, *wind, origin=origin, notes=tuple(notes))


def air_from_levels(
    height: ArrayLike | None,
    pressure: ArrayLike,
    temperature: ArrayLike,
    mixing_ratio: ArrayLike,
    eastward_wind: ArrayLike,
    northward_wind: ArrayLike,
    *,
    elevation: float | None = None,
    top: float = HIGHEST_LEVEL,
    freezing: bool = True,
) -> IncomingAir:
    """Column from the levels of a sounding or of a model.

    Parameters
    ----------
    height : array_like, shape (nz,) [m above sea level] or None
        Geopotential, strictly rising from the ground. Only the first is used;
        the others are checked against pressure and temperature.
    pressure : array_like, shape (nz,) [Pa]
        Strictly falling from the ground, at least 4 levels reaching 3 km above it.
    temperature : array_like, shape (nz,) [K]
        160 K to 330 K.
    mixing_ratio : array_like, shape (nz,) [kg kg-1 of dry air]
        0 to 0.06. What exceeds saturation becomes cloud at that level.
    eastward_wind, northward_wind : array_like, shape (nz,) [m s-1]
        NaN where unknown; at least one level known.
    elevation : float [m above sea level] or None
        Height of the first level; needed when `height` is None.
    top : float [m above sea level]
        16000 m to 30000 m. Levels above it are kept.
    freezing : bool
        False: saturation is over liquid at all temperatures.

    Returns
    -------
    IncomingAir
        The given levels, then levels at most 500 m apart up to `top`.

    Raises
    ------
    OutOfRangeError
        If any value is outside its range, or NaN where that is not allowed.
    IncomingAirError
        If the levels are too few, too low, out of order, of different number,
        without any wind, or their heights contradict their pressures by more
        than 300 m up to 500 hPa.

    Notes
    -----
    Heights are worked out from pressure and virtual temperature, so that the
    column is hydrostatic; given heights more than 40 m off are noted. Unknown
    winds are interpolated in height by components, constant beyond the ends.
    Layers of 50 m or more in which temperature falls faster than 10.3 K per km
    are noted and used. Above the data: 6.5 K per km to 11 km, constant from there
    (from the last level if that is higher); relative humidity falls linearly in
    pressure from its last value to 10 % at 200 hPa and stays there; wind constant.

    Examples
    --------
    >>> p = [1.0e5, 8.5e4, 7.0e4, 5.0e4]
    >>> wind = [5.0, 8.0, 12.0, 20.0]
    >>> air = air_from_levels(None, p, [288, 280, 271, 253], [0.007, 0.005, 0.003, 0.001], wind, wind, elevation=100.0)
    >>> air.height[:4].round(-1), air.origin[-1]
    (array([ 100., 1460., 3030., 5610.]), 'standard lapse above the data')
    """
    within("top", top, LOWEST_TOP, 30000.0, "m", _METRES)
    levels = checked_levels(height, pressure, temperature, mixing_ratio, eastward_wind, northward_wind, elevation)
    p, t = levels.pressure, levels.temperature
    vapour, cloud = split_at_saturation(p, t, levels.mixing_ratio, freezing=freezing)
    z = hydrostatic_height(p, virtual_temperature(t, vapour, cloud), levels.ground)
    notes = [*height_notes(z, levels), *superadiabatic_notes(z, t), *_cloud_note(z, cloud)]
    eastward, northward, wind_notes = filled_wind(z, levels.eastward_wind, levels.northward_wind)
    measured = IncomingAir(z, p, t, vapour, cloud, eastward, northward, (_MEASURED,) * z.size, (*notes, *wind_notes))
    return _extended_up(measured, top, freezing=freezing)


def _extended_up(air: IncomingAir, top: float, *, freezing: bool) -> IncomingAir:
    """The column with levels of the standard lapse above the data."""
    last = float(air.height[-1])
    if last >= top:
        return air
    height = levels_through((last, STANDARD_TROPOPAUSE, top), _EXTRAPOLATED_SPACING)
    warmest_part = np.maximum(np.minimum(height, STANDARD_TROPOPAUSE) - last, 0.0)
    t = np.maximum(air.temperature[-1] - STANDARD_LAPSE_RATE * warmest_part, min(float(air.temperature[-1]), _COLDEST))
    p_last = air.pressure[-1]
    humidity = relative_humidity_from_mixing_ratio(p_last, air.temperature[-1], air.vapour[-1])
    e_liquid, e_most = saturation_vapour_pressure_over_liquid(t), saturation_vapour_pressure(t, freezing=freezing)

    def moisture(p: Array) -> tuple[Array, Array]:
        vapour = vapour_at(p, e_liquid, e_most, relaxed_humidity(p, humidity, p_last))
        vapour[0] = air.vapour[-1]
        cloud = np.zeros_like(vapour)
        cloud[0] = air.cloud[-1]
        return vapour, cloud

    p, vapour, cloud = balanced(height, t, p_last, moisture)
    added = height.size - 1
    return IncomingAir(
        height=np.concatenate([air.height, height[1:]]),
        pressure=np.concatenate([air.pressure, p[1:]]),
        temperature=np.concatenate([air.temperature, t[1:]]),
        vapour=np.concatenate([air.vapour, vapour[1:]]),
        cloud=np.concatenate([air.cloud, cloud[1:]]),
        eastward_wind=np.append(air.eastward_wind, np.full(added, air.eastward_wind[-1])),
        northward_wind=np.append(air.northward_wind, np.full(added, air.northward_wind[-1])),
        origin=(*air.origin, *(_ABOVE,) * added),
        notes=(*air.notes, _above_note(last, float(p_last))),
    )


def _checked_crest_wind(crest: CrestWind, elevation: float) -> CrestWind:
    """Crest wind with its ranges checked."""
    within("crest_wind speed", crest.speed, 0.0, 150.0, "m/s", "Give metres per second.")
    within("crest_wind from_direction", crest.from_direction, -2.0 * np.pi, 4.0 * np.pi, "rad", _RADIANS)
    within("crest_wind height", crest.height, -500.0, 9000.0, "m", _METRES)
    if crest.height <= elevation:
        raise IncomingAirError(
            f"crest_wind: its height, {crest.height:.0f} m, is not above the station at {elevation:.0f} m. "
            "Give the height of the crest above sea level, or leave the crest wind out."
        )
    return crest


def _station_wind(
    height: Array, elevation: float, speed: Array, direction: Array, crest: CrestWind | None, station: str
) -> tuple[tuple[Array, Array], str]:
    """Eastward and northward wind of a station column, and the sentence that says how."""
    u, v = -speed * np.sin(direction), -speed * np.cos(direction)
    if crest is None:
        above = "The wind is the station's at all heights"
        if station != _ONE:
            above = f"Above the {station} its wind stays as it is"
        wind = tuple(np.broadcast_to(x[..., np.newaxis], (*x.shape, height.size)).copy() for x in (u, v))
        return (wind[0], wind[1]), (
            f"{above} (assumed). The wind at crest height decides whether the air "
            "crosses or is blocked: give it if it is known."
        )
    crest_speed, crest_from = np.asarray(crest.speed, np.float64), np.asarray(crest.from_direction, np.float64)
    share = np.clip((height - elevation) / (crest.height - elevation), 0.0, 1.0)

    def profile(low: Array, high: Array) -> Array:
        low, high = np.broadcast_arrays(low, high)
        return low[..., np.newaxis] + share * (high - low)[..., np.newaxis]

    eastward = profile(u, -crest_speed * np.sin(crest_from))
    northward = profile(v, -crest_speed * np.cos(crest_from))
    return (eastward, northward), (
        f"The wind changes evenly from the {station} to the given wind at {crest.height:.0f} m and is constant above "
        "(assumed)."
    )


def _lapse_note(lapse: Array, floored: bool, station: str) -> str:
    """How temperature above the station was assumed."""
    rate = float(np.median(lapse)) * 1000.0
    stops = " It is not let fall below -80 °C." if floored else ""
    return f"Above the {station} temperature falls by {rate:.1f} °C per km up to 11 km and is constant above.{stops}"


def _humidity_note(humidity: Array, station: str) -> str:
    """How humidity above the station was assumed."""
    share = float(np.median(humidity))
    if share <= DRY_HUMIDITY:
        return f"Relative humidity stays as at the {station}, {share:.0%}, at all heights (assumed)."
    return (
        f"Relative humidity stays as at the {station}, {share:.0%}, up to 500 hPa, falls to 10% at 200 hPa and stays "
        "there (assumed); where that would be above saturation over ice, the air is just saturated."
    )


def _fog_note(cloud: Array) -> list[str]:
    """That the station is in cloud, if it is."""
    if not np.any(cloud > 0.0):
        return []
    most = f"{float(np.max(cloud)) * 1000.0:.2g} g/kg"
    return [f"The station's air is above saturation: up to {most} of its water starts as cloud, at that temperature."]


def _cloud_note(z: Array, cloud: Array) -> list[str]:
    """Which levels of a sounding start with cloud, if any."""
    wet = cloud > 1e-9
    if not np.any(wet):
        return []
    first = float(z[np.argmax(wet)])
    which = f"{int(wet.sum())} of {z.size} levels, the lowest at {first:.0f} m"
    return [f"At {which}, the air is above saturation: the excess starts as cloud, at the given temperature."]


def _above_note(last: float, pressure: float) -> str:
    """How the air above the data was assumed."""
    lapse = "falls by 6.5 °C per km up to 11 km and is constant above" if last < STANDARD_TROPOPAUSE else "is constant"
    humid = "falls to 10% at 200 hPa and stays low" if pressure > DRY_FROM else "is at most 10%"
    return (
        f"The data end at {last / 1000.0:.1f} km ({pressure / 100.0:.0f} hPa). Above, temperature {lapse}, relative "
        f"humidity {humid}, and the wind stays as at the last level (assumed)."
    )
