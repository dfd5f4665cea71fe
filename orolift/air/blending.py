"""A fresh surface report blended into the lowest air of a stale sounding or model column."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import IncomingAir, Origin, extended_down, interpolated
from orolift.air.column_change import with_values
from orolift.air.temperature import (
    potential_temperature,
    temperature_from_potential_temperature,
    virtual_potential_temperature,
)
from orolift.checks import within
from orolift.errors import IncomingAirError

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]

NIGHT_RATE = 1.0e-2
"""Deficit of temperature [K m-1] that a cooled ground layer takes up: 10 K per km, as for cold pools."""
SHALLOWEST, DEEPEST_COOLED, DEEPEST_MIXED = 200.0, 1000.0, 3000.0
"""Least depth of a blend, greatest depth of a cooled and of a mixed layer [m]: judgements; boundary layers over land
are within them on all but desert afternoons."""
FURTHEST_BELOW, FURTHEST_ABOVE = 500.0, 1000.0
"""How far below and above the ground of the column the station may stand [m]: a judgement."""
_BLENDED: Origin = "surface report blended in"
_ROUNDS = 8


@dataclass(frozen=True)
class SurfaceValues:
    """A surface report.

    Attributes
    ----------
    elevation : float [m above sea level]
    temperature : float [K]
    mixing_ratio : float [kg kg-1 of dry air]
    pressure : float or None [Pa]
        At the station; None keeps that of the column.
    eastward_wind, northward_wind : float or None [m s-1]
        None keeps those of the column.
    """

    elevation: float
    temperature: float
    mixing_ratio: float
    pressure: float | None = None
    eastward_wind: float | None = None
    northward_wind: float | None = None


@dataclass(frozen=True, eq=False)
class Blend:
    """A column with a surface report blended in, and what that changed.

    Attributes
    ----------
    air : IncomingAir
    top : float [m above sea level]
        Above it the column is as it was, but for its pressure.
    temperature_change, mixing_ratio_change, pressure_change : float [K, kg kg-1, Pa]
        Report minus column at the station.
    """

    air: IncomingAir
    top: float
    temperature_change: float
    mixing_ratio_change: float
    pressure_change: float


def blended_with_surface(air: IncomingAir, report: SurfaceValues) -> Blend:
    """The column corrected by a fresh surface report, through the boundary layer only.

    Parameters
    ----------
    air : IncomingAir
        One column.
    report : SurfaceValues
        At most 500 m below and 1000 m above the ground of the column.

    Returns
    -------
    Blend

    Raises
    ------
    OutOfRangeError
        If a value of the report is outside 180 K to 335 K, 0 to 0.06, 30000 Pa to 110000 Pa.
    IncomingAirError
        If the station stands too far below or above the ground of the column.

    Notes
    -----
    Assumptions, each in the notes of the result. Where the report's virtual
    potential temperature is above the column's, the air is mixed from the
    ground to where the column is as warm (200 m to 3 km): potential temperature
    is the report's. Where it is below, the difference of temperature falls
    linearly to zero over its size / 10 K per km (200 m to 1 km). The
    differences of vapour and wind fall linearly to zero over the same depth;
    below the station they are those at the station. The column is hydrostatic
    again, with the report's pressure at the station.

    Examples
    --------
    >>> from orolift.air.column_build import air_from_station
    >>> air = air_from_station(40.0, 100400.0, 280.0, 0.005, 8.0, 4.1, lapse_rate=0.004)
    >>> blend = blended_with_surface(air, SurfaceValues(40.0, 285.0, 0.006, 100100.0))
    >>> round(blend.top), blend.air.temperature[0].round(1), blend.air.pressure[0].round(0)
    (949, np.float64(285.0), np.float64(100100.0))
    """
    _check(air, report)
    air = extended_down(air, report.elevation)
    here = interpolated(air, report.elevation)
    water = float(here.vapour + here.cloud)
    change = SurfaceValues(
        report.elevation,
        report.temperature - float(here.temperature),
        report.mixing_ratio - water,
        None if report.pressure is None else report.pressure - float(here.pressure),
        None if report.eastward_wind is None else report.eastward_wind - float(here.eastward_wind),
        None if report.northward_wind is None else report.northward_wind - float(here.northward_wind),
    )
    mixed_top = _mixed_top(air, report)
    depth = abs(change.temperature) / NIGHT_RATE if mixed_top is None else mixed_top - report.elevation
    deepest = DEEPEST_COOLED if mixed_top is None else DEEPEST_MIXED
    top = report.elevation + float(np.clip(depth, SHALLOWEST, deepest))
    finer = _with_levels(air, (report.elevation, top, *(() if mixed_top is None else (mixed_top,))))
    temperature = _temperature(finer, report, change.temperature, top, mixed_top)
    weight = _weight(finer.height, report.elevation, top)
    blended = _hydrostatic(finer, report, change, temperature, weight)
    origin = tuple(_BLENDED if height < top else kind for height, kind in zip(finer.height, finer.origin, strict=True))
    note = _note(change, top - report.elevation, report, mixed=mixed_top is not None)
    return Blend(
        replace(blended, origin=origin, notes=(*air.notes, note)),
        top,
        change.temperature,
        change.mixing_ratio,
        0.0 if change.pressure is None else change.pressure,
    )


def _check(air: IncomingAir, report: SurfaceValues) -> None:
    within("temperature", report.temperature, 180.0, 335.0, "K", "orolift works in kelvin.")
    within("mixing_ratio", report.mixing_ratio, 0.0, 0.06, "kg/kg", "Give kilograms per kilogram.")
    if report.pressure is not None:
        within("pressure", report.pressure, 3.0e4, 1.1e5, "Pa", "orolift works in pascals.")
    ground = float(air.height[0])
    if not ground - FURTHEST_BELOW <= report.elevation <= ground + FURTHEST_ABOVE:
        raise IncomingAirError(
            f"surface report: the station at {report.elevation:.0f} m is too far from the ground of the incoming air "
            f"at {ground:.0f} m (allowed: {FURTHEST_BELOW:.0f} m below to {FURTHEST_ABOVE:.0f} m above). Leave it out."
        )


def _mixed_top(air: IncomingAir, report: SurfaceValues) -> float | None:
    """Height to which air as warm as the report mixes; None where it is colder than the column."""
    here = interpolated(air, report.elevation)
    own = virtual_potential_temperature(here.pressure, report.temperature, report.mixing_ratio)
    theta = virtual_potential_temperature(air.pressure, air.temperature, air.vapour, air.cloud)
    there = virtual_potential_temperature(here.pressure, here.temperature, here.vapour, here.cloud)
    if own <= there:
        return None
    above = air.height > report.elevation
    z = np.concatenate([[report.elevation], air.height[above]])
    excess = np.concatenate([[there], theta[above]]) - own
    first = int(np.argmax(excess >= 0.0)) if (excess >= 0.0).any() else z.size - 1
    share = 1.0 if excess[first] <= 0.0 else -excess[first - 1] / (excess[first] - excess[first - 1])
    top = float(z[first - 1] + share * (z[first] - z[first - 1]))
    return min(max(top, report.elevation + 1.0), report.elevation + DEEPEST_MIXED)


def _with_levels(air: IncomingAir, heights: tuple[float, ...]) -> IncomingAir:
    """The same column with levels at more heights."""
    new = np.setdiff1d(np.asarray(heights, dtype=np.float64), air.height)
    if not new.size:
        return air
    height = np.sort(np.concatenate([air.height, new]))
    read = interpolated(air, height)
    below = np.searchsorted(air.height, height, side="right") - 1
    return replace(
        air,
        height=height,
        pressure=read.pressure,
        temperature=read.temperature,
        vapour=read.vapour,
        cloud=read.cloud,
        eastward_wind=read.eastward_wind,
        northward_wind=read.northward_wind,
        origin=tuple(air.origin[i] for i in below) if air.origin else (),
    )


def _weight(height: Array, elevation: float, top: float) -> Array:
    """Share of the report's difference at each height: one at the station and below, zero at the top and above."""
    depth = top - elevation
    return np.clip((elevation + depth - height) / depth, 0.0, 1.0)


def _temperature(air: IncomingAir, report: SurfaceValues, warmer: float, top: float, mixed_top: float | None) -> Array:
    if mixed_top is None:
        return np.asarray(air.temperature + warmer * _weight(air.height, report.elevation, top), dtype=np.float64)
    p_here = float(interpolated(air, report.elevation).pressure)
    adiabat = temperature_from_potential_temperature(air.pressure, potential_temperature(p_here, report.temperature))
    mixed = np.where(air.height < report.elevation, air.temperature + warmer, adiabat)
    return np.asarray(np.where(air.height < mixed_top, mixed, air.temperature), dtype=np.float64)


def _hydrostatic(
    air: IncomingAir, report: SurfaceValues, change: SurfaceValues, temperature: Array, weight: Array
) -> IncomingAir:
    """The column with the new values, at rest, with the report's pressure at the station."""
    water = np.maximum(air.vapour + air.cloud + weight * change.mixing_ratio, 0.0)
    eastward = air.eastward_wind + weight * (change.eastward_wind or 0.0)
    northward = air.northward_wind + weight * (change.northward_wind or 0.0)
    wanted = float(interpolated(air, report.elevation).pressure) if report.pressure is None else report.pressure
    ground = float(air.pressure[0])
    out = air
    for _ in range(_ROUNDS):
        out = with_values(
            air,
            ground_pressure=ground,
            temperature=temperature,
            water=water,
            eastward_wind=eastward,
            northward_wind=northward,
        )
        miss = wanted / float(interpolated(out, report.elevation).pressure)
        if abs(miss - 1.0) < 1e-12:
            break
        ground *= miss
    return out


def _note(change: SurfaceValues, depth: float, report: SurfaceValues, *, mixed: bool) -> str:
    how = "mixed with the air above up to where that is as warm" if mixed else "fading out evenly with height"
    wind = ", its wind" if report.eastward_wind is not None else ""
    return (
        f"A surface report at {report.elevation:.0f} m, {change.temperature:+.1f} °C and "
        f"{change.mixing_ratio * 1000.0:+.1f} g/kg against the column there, is blended into the lowest {depth:.0f} m, "
        f"{how}; its vapour{wind} and the differences below the station likewise (assumed)."
    )
