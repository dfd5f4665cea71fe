"""A sounding or model column made whole: gaps filled, heights worked out, findings of quality control."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column_profile import relaxed_humidity
from orolift.air.humidity import (
    dew_point_from_relative_humidity,
    mixing_ratio_from_dew_point,
    mixing_ratio_from_relative_humidity,
    relative_humidity_from_dew_point,
)
from orolift.air.hydrostatic import hydrostatic_height
from orolift.air.temperature import virtual_temperature
from orolift.errors import DataFileError
from orolift.sources.level_quality import gap_findings, height_findings, layer_findings, without_impossible_values
from orolift.sources.quality import Finding, shortened
from orolift.sources.reported_levels import ReportedLevels, ordered

if TYPE_CHECKING:
    from datetime import datetime

    from numpy.typing import NDArray

    Array = NDArray[np.float64]

MINIMUM_LEVELS = 4
LEAST_HUMIDITY = 0.01
"""Lowest relative humidity [1] taken: the least a sensor resolves; common practice, no source."""
GROUND_OFF = 40.0
"""Difference [m] between two statements of the ground's height that is said, as for the heights of levels."""
GROUND_WRONG = 100.0
"""Difference [m] from which the height of the lowest level is not believed against several others above it."""


@dataclass(frozen=True, eq=False)
class Sounding:
    """Levels of a sounding from the ground up, without gaps.

    Attributes
    ----------
    pressure : ndarray (nz,) [Pa]
        Strictly falling.
    height : ndarray (nz,) [m above sea level] or None
        As reported where all levels have one that fits; else None, and only `ground` counts.
    temperature, dew_point : ndarray (nz,) [K]
        Dew point over liquid water. Either `dew_point` or `relative_humidity` is given.
    relative_humidity : ndarray (nz,) [1] or None
    eastward_wind, northward_wind : ndarray (nz,) [m s-1]
        Interpolated by components in the logarithm of pressure where missing between measured winds.
    notes : tuple of str
        What was assumed.
    ground : float or None [m above sea level]
        Height of the lowest level; None when nothing says it.
    findings : tuple of Finding
        What quality control has seen.
    observed : datetime or None
    longitude, latitude : float or None [degrees east, degrees north]
    station : str or None
    """

    pressure: Array
    height: Array | None
    temperature: Array
    dew_point: Array | None
    relative_humidity: Array | None
    eastward_wind: Array
    northward_wind: Array
    notes: tuple[str, ...]
    ground: float | None = None
    findings: tuple[Finding, ...] = ()
    observed: datetime | None = None
    longitude: float | None = None
    latitude: float | None = None
    station: str | None = None


def sounding_from_levels(levels: ReportedLevels, *, elevation: float | None = None) -> Sounding:
    """Sounding made whole from the levels of a file.

    Parameters
    ----------
    levels : ReportedLevels
    elevation : float or None [m above sea level]
        Of the ground, where the user gives it; it goes before what the file says.

    Returns
    -------
    Sounding

    Raises
    ------
    DataFileError
        If levels are too few, out of order or repeated with other values, no
        wind is given, units look mixed up, or heights contradict pressures.

    Notes
    -----
    Levels with wind alone become levels of the column: their temperature and
    the dew-point depression (or relative humidity) are linear in the logarithm
    of pressure. Above the highest humidity, relative humidity over liquid falls
    linearly in pressure to 10 % at 200 hPa, as in a station's column; below the
    lowest it is that of the lowest. The height of the ground is the one given,
    else the reported one of the lowest level, else what the lowest reported
    height requires.
    """
    levels = without_impossible_values(ordered(levels))
    notes: list[str] = []
    _refuse_too_little(levels)
    gapped = levels
    filled, fill_findings = _filled(levels)
    virtual = virtual_temperature(filled.temperature, _mixing_ratio(filled))
    relative = hydrostatic_height(filled.pressure, virtual, 0.0)
    ground, ground_findings = _ground(filled, relative, elevation)
    height = None
    level_findings = [*layer_findings(filled.name, relative + (ground or 0.0), filled.temperature)]
    level_findings += gap_findings(gapped, relative + (ground or 0.0))
    if ground is not None:
        faults = height_findings(filled, relative + ground)
        level_findings += faults
        whole = bool(np.isfinite(filled.height).all())
        fits = not any(fault.severity == "wrong" for fault in faults) and abs(float(filled.height[0]) - ground) < 0.5
        if whole and fits and (np.diff(filled.height) > 0.0).all():
            height = filled.height
        elif np.isfinite(filled.height).any():
            notes.append(
                "Some heights of the sounding are missing or not used: all of them are worked out from pressure."
            )
    eastward, northward = _winds(gapped)
    humidity = np.isfinite(filled.dew_point).all()
    return Sounding(
        pressure=filled.pressure,
        height=height,
        temperature=filled.temperature,
        dew_point=filled.dew_point if humidity else None,
        relative_humidity=None if humidity else filled.relative_humidity,
        eastward_wind=eastward,
        northward_wind=northward,
        notes=tuple(notes),
        ground=ground,
        findings=(*levels.findings, *fill_findings, *ground_findings, *shortened(level_findings)),
        observed=levels.observed,
        longitude=levels.longitude,
        latitude=levels.latitude,
        station=levels.station,
    )


def _refuse_too_little(levels: ReportedLevels) -> None:
    whole = np.isfinite(levels.temperature) & (np.isfinite(levels.dew_point) | np.isfinite(levels.relative_humidity))
    if whole.sum() < MINIMUM_LEVELS:
        raise DataFileError(
            f"{levels.name}: {int(whole.sum())} levels have pressure, temperature and humidity; "
            f"at least {MINIMUM_LEVELS} are needed, the lowest at the ground."
        )
    calm = levels.wind_speed == 0.0
    if not (np.isfinite(levels.wind_speed) & (np.isfinite(levels.wind_from) | calm)).any():
        raise DataFileError(f"{levels.name}: no level has wind speed and direction; at least one is needed.")


def _filled(levels: ReportedLevels) -> tuple[ReportedLevels, list[Finding]]:
    """Temperature and humidity on all levels."""
    x = -np.log(levels.pressure)
    known = np.isfinite(levels.temperature)
    temperature = np.interp(x, x[known], levels.temperature[known])
    found = []
    if not known.all():
        which = f"{int((~known).sum())} of {known.size} levels"
        done = "temperature interpolated between the levels that have one"
        found.append(Finding(levels.name, "levels without a temperature of their own", which, done, "remark"))
    as_dew_point = np.isfinite(levels.dew_point).any()
    given = levels.temperature - levels.dew_point if as_dew_point else levels.relative_humidity
    humid = np.isfinite(given)
    missing = known & ~humid
    filled = np.interp(x, x[humid], given[humid])
    last = int(np.flatnonzero(humid)[-1])
    if as_dew_point:
        filled = temperature - filled
    filled, aloft = _dried_aloft(levels.pressure, temperature, filled, last, as_dew_point=bool(as_dew_point))
    found += _humidity_findings(levels, missing, int(np.argmax(humid)), last, aloft=aloft)
    if as_dew_point:
        return replace(levels, temperature=temperature, dew_point=filled), found
    return replace(levels, temperature=temperature, relative_humidity=filled), found


def _dried_aloft(
    pressure: Array, temperature: Array, humidity: Array, last: int, *, as_dew_point: bool
) -> tuple[Array, bool]:
    """Humidity above the last measured one, as in a station's column."""
    if last == pressure.size - 1:
        return humidity, False
    above = slice(last + 1, None)
    start = humidity[last]
    if as_dew_point:
        start = relative_humidity_from_dew_point(temperature[last], min(start, temperature[last]))
    share = relaxed_humidity(pressure[above], np.asarray(start), pressure[last])
    share = np.maximum(share, LEAST_HUMIDITY)
    out = humidity.copy()
    out[above] = dew_point_from_relative_humidity(temperature[above], share) if as_dew_point else share
    return out, True


def _humidity_findings(
    levels: ReportedLevels, missing: NDArray[np.bool_], first: int, last: int, *, aloft: bool
) -> list[Finding]:
    found = []
    below, between = int(missing[:first].sum()), int(missing[first:last].sum())
    if below:
        which = f"{below} levels, up to {levels.pressure[first] / 100:g} hPa"
        done = "taken from the lowest level that has one"
        found.append(Finding(levels.name, "no humidity at the lowest levels", which, done, "doubtful"))
    if between:
        which, done = f"{between} levels", "interpolated between the levels that have one"
        found.append(Finding(levels.name, "no humidity", which, done, "remark"))
    if aloft:
        which = f"above {levels.pressure[last] / 100:g} hPa"
        done = "relative humidity falls to 10% at 200 hPa (assumed)"
        found.append(Finding(levels.name, "no humidity aloft", which, done, "remark"))
    return found


def _mixing_ratio(levels: ReportedLevels) -> Array:
    """Mixing ratio for the virtual temperature that heights need."""
    if np.isfinite(levels.dew_point).all():
        return mixing_ratio_from_dew_point(levels.pressure, np.minimum(levels.dew_point, levels.temperature))
    humidity = np.clip(levels.relative_humidity, LEAST_HUMIDITY, 1.0)
    return mixing_ratio_from_relative_humidity(levels.pressure, levels.temperature, humidity)


def _ground(levels: ReportedLevels, relative: Array, elevation: float | None) -> tuple[float | None, list[Finding]]:
    """Height of the lowest level, and what the statements about it say of each other."""
    low = np.isfinite(levels.height) & (levels.pressure >= 50000.0)
    implied = levels.height[low] - relative[low]
    middle = float(np.median(implied)) if implied.size else None
    reported = float(levels.height[0]) if np.isfinite(levels.height[0]) else None
    given = elevation if elevation is not None else levels.elevation
    if given is not None:
        return given, _ground_findings(levels.name, given, reported if reported is not None else middle)
    if reported is not None and middle is not None and implied.size >= 4 and abs(reported - middle) > GROUND_WRONG:
        agreeing = np.abs(implied - middle) < GROUND_OFF
        if agreeing.mean() >= 0.75:
            value = f"{reported:.0f} m, the levels above require {middle:.0f} m"
            done = f"{middle:.0f} m is used"
            return middle, [Finding(levels.name, "height of the lowest level", value, done, "wrong")]
    if reported is not None:
        return reported, []
    if middle is None:
        return None, []
    lowest = float(implied[0])
    value, done = f"{lowest:.0f} m", "worked out from the lowest reported height"
    return lowest, [Finding(levels.name, "no height of the ground", value, done, "remark")]


def _ground_findings(name: str, given: float, other: float | None) -> list[Finding]:
    if other is None or abs(given - other) <= GROUND_OFF:
        return []
    value = f"{given:.0f} m given, the levels say {other:.0f} m"
    return [Finding(name, "height of the ground", value, f"{given:.0f} m is used", "doubtful")]


def _winds(levels: ReportedLevels) -> tuple[Array, Array]:
    """Wind components on all levels, interpolated where unknown."""
    speed = levels.wind_speed
    # A calm has no direction: its components are zero whatever the file says.
    direction = np.where(speed == 0.0, 0.0, levels.wind_from)
    eastward, northward = -speed * np.sin(direction), -speed * np.cos(direction)
    known = np.isfinite(eastward)
    x = -np.log(levels.pressure)
    return np.interp(x, x[known], eastward[known]), np.interp(x, x[known], northward[known])
