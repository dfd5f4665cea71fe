"""Quality control of the levels of a sounding: spikes, gaps, units, humidity, heights against pressures."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column_checks import FEET_PER_METRE, superadiabatic_layers
from orolift.air.hydrostatic import hydrostatic_height
from orolift.constants import GRAVITY, R_DRY
from orolift.errors import DataFileError
from orolift.sources.quality import Finding, at_levels, shortened
from orolift.sources.reported_levels import ReportedLevels, place_of

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]

AUTOCONVECTIVE = float(GRAVITY / R_DRY)
"""Fall of temperature [K m-1] at which density no longer falls with height: g/R, 34 K per km. Air cannot keep it."""
SPIKE = 3.0
"""Least departure of a temperature from its neighbours [K] to be a spike: a judgement, many times a sensor's error."""
UNBELIEVABLE = 15.0e-3
"""Fall of temperature [K m-1] that no layer between reported levels keeps, once one is this far off: a judgement."""
LARGE_SPIKE = 6.0
"""Departure [K] that goes with it: a judgement."""
HOT_GROUND = 50.0
"""Depth [m] above the ground in which any fall of temperature is believed (a judgement)."""
WIND_SPIKE = 25.0
"""Least departure of a wind from its neighbours [m s-1] to be a spike: a judgement."""
WIND_NEIGHBOURS = 10.0
"""Neighbours of a wind spike differ by less than this [m s-1]: a judgement."""
MOST_SPIKES = 0.25
"""Share of levels that may be spikes; more, and the column is not believed: a judgement."""
DEEP = 3000.0
"""Depth [m] over which a mean lapse rate must be possible."""
STEEPEST_MEAN = 10.3e-3
"""Steepest mean fall of temperature [K m-1] over that depth: the dry-adiabatic 9.75 K per km and half a kelvin."""
FASTEST = 100.0
"""Wind speed [m s-1] from which the unit is doubted: jet streams seldom exceed it (a judgement)."""
GAP = 2000.0
"""Thickness [m] without a value that is said, below 500 hPa: a judgement; standard levels are up to 2.6 km apart."""
GAP_CHECKED_TO = 50000.0
WIND_END = 300.0
"""Height of the lowest wind above the ground [m] from which that is said: a judgement, half a boundary layer."""
STEEP = 12.0
"""Fall of temperature [K per km] from which a superadiabatic layer is doubted: a judgement. Thin layers coded to 0.1 K
reach 11, heated ground more."""
HEATED = 500.0
"""Depth [m] above the ground in which the sun may do that (a judgement)."""
HEIGHT_OFF = 40.0
"""Departure of a height from the hydrostatic one [m] that is said, as in the column of the air layer."""
FAHRENHEIT_FITS = 120.0
"""Departure [m] within which heights fit temperatures in another unit: a judgement; moisture alone makes up to 60 m."""
HEIGHT_WRONG = 300.0
"""Departure [m] beyond which a height is wrong."""
DEW_POINT_ABOVE = 0.5
"""Excess of dew point over temperature [K] that fog rounding explains."""


def without_impossible_values(levels: ReportedLevels) -> ReportedLevels:
    """Levels whose spikes and impossible humidities are taken out, each with a finding.

    Parameters
    ----------
    levels : ReportedLevels
        Ordered from the ground up.

    Returns
    -------
    ReportedLevels
        NaN where a value was taken out.

    Raises
    ------
    DataFileError
        If dew point and temperature are exchanged, temperatures are in another
        unit, or so many levels are spikes that nothing can be trusted.
    """
    _refuse_swapped(levels)
    levels = _dew_points_below_temperature(levels)
    levels = _without_temperature_spikes(levels)
    _refuse_impossible_lapse(levels)
    return _without_wind_spikes(levels)


def _refuse_swapped(levels: ReportedLevels) -> None:
    """Dew point above temperature at most levels means that the columns are exchanged."""
    both = np.isfinite(levels.dew_point) & np.isfinite(levels.temperature)
    above = levels.dew_point[both] > levels.temperature[both] + DEW_POINT_ABOVE
    if above.size and above.mean() > 0.5:
        first = levels.label(int(levels.row[both][0]))
        raise DataFileError(
            f"{levels.name}: dew point above temperature at {int(above.sum())} of {above.size} levels, "
            f"from {first} on. Are the two columns swapped?"
        )


def _dew_points_below_temperature(levels: ReportedLevels) -> ReportedLevels:
    excess = levels.dew_point - levels.temperature
    wrong = excess > DEW_POINT_ABOVE + 1e-6
    if not wrong.any():
        return levels
    found = at_levels(
        wrong,
        lambda i: place_of(levels, i),
        "dew point above temperature",
        lambda i: f"{levels.dew_point[i] - 273.15:.1f} above {levels.temperature[i] - 273.15:.1f} °C",
        "dew point left out, interpolated",
        "wrong",
    )
    dew_point = np.where(wrong, np.nan, levels.dew_point)
    return replace(levels, dew_point=dew_point, findings=(*levels.findings, *shortened(found)))


def _without_temperature_spikes(levels: ReportedLevels) -> ReportedLevels:
    """Temperatures left out that their neighbours make impossible: denser air on top by more than a sensor's error."""
    temperature = levels.temperature.copy()
    log_p = np.log(levels.pressure)
    found: list[Finding] = []
    count = int(np.isfinite(temperature).sum())
    while len(found) <= MOST_SPIKES * count:
        spikes, expected = _worst_spikes(log_p, temperature)
        if not spikes.size:
            break
        for i, neighbours in zip(spikes, expected, strict=True):
            value = f"{temperature[i] - 273.15:.1f} °C, neighbours give {neighbours - 273.15:.1f} °C"
            done = "temperature left out, interpolated"
            found.append(Finding(place_of(levels, int(i)), "temperature spike", value, done, "wrong"))
        temperature[spikes] = np.nan
    if len(found) > MOST_SPIKES * count:
        raise DataFileError(
            f"{levels.name}: more than {MOST_SPIKES:.0%} of {count} temperatures contradict their neighbours "
            f"(first: {found[0].place}, {found[0].value}). Are two units mixed in the column?"
        )
    if not found:
        return levels
    dew_point = np.where(np.isnan(temperature), np.nan, levels.dew_point)
    out = replace(levels, temperature=temperature, dew_point=dew_point)
    return replace(out, findings=(*levels.findings, *shortened(found)))


def _worst_spikes(log_p: Array, temperature: Array) -> tuple[NDArray[np.int64], Array]:
    """Levels further from their neighbours than these are from theirs, if the air beside them could not stay so."""
    known = np.flatnonzero(np.isfinite(temperature))
    if known.size < 4:
        return np.empty(0, dtype=np.int64), np.empty(0)
    t, x = temperature[known], -log_p[known]
    share = (x[1:-1] - x[:-2]) / (x[2:] - x[:-2])
    expected = t[:-2] + share * (t[2:] - t[:-2])
    thickness = np.diff(x) * 0.5 * (t[1:] + t[:-1]) / AUTOCONVECTIVE  # hypsometric: dz = (R/g) T d(-ln p)
    lapse = -np.diff(t) / thickness
    off = np.abs(t[1:-1] - expected)
    lapse[0] = lapse[0] if thickness[0] >= HOT_GROUND else 0.0  # the lowest metres may be as steep as they like
    steepest = np.maximum(lapse[:-1], lapse[1:])
    spike = ((steepest > AUTOCONVECTIVE) & (off > SPIKE)) | ((steepest > UNBELIEVABLE) & (off > LARGE_SPIKE))
    off = np.concatenate([[0.0], np.where(spike, off, 0.0), [0.0]])
    worst = np.flatnonzero((off[1:-1] > off[:-2]) & (off[1:-1] >= off[2:]))
    return known[worst + 1], expected[worst]


def _refuse_impossible_lapse(levels: ReportedLevels) -> None:
    """Temperature that falls faster than adiabatically through a deep layer is in another unit."""
    known = np.isfinite(levels.temperature) & (levels.pressure >= 30000.0)
    t, p = levels.temperature[known], levels.pressure[known]
    if t.size < 2:
        return
    depth = float(hydrostatic_height(p, t, 0.0)[-1])
    fall = float(t[0] - t[-1])
    if depth < DEEP or fall / depth < STEEPEST_MEAN:
        return
    raise DataFileError(
        f"{levels.name}: temperature falls by {fall:.0f} °C over {depth / 1000:.1f} km, {fall / depth * 1000:.1f} °C "
        "per km, more than air can keep up. Are the temperatures in Fahrenheit? Then call the column temperature_f."
    )


def _without_wind_spikes(levels: ReportedLevels) -> ReportedLevels:
    known = np.flatnonzero(np.isfinite(levels.wind_speed) & np.isfinite(levels.wind_from))
    speed, direction = levels.wind_speed[known], levels.wind_from[known]
    found = []
    if speed.size and speed.max() > FASTEST:
        i = int(known[np.argmax(speed)])
        value = f"{speed.max():.0f} m/s"
        found.append(Finding(place_of(levels, i), "wind too fast for its unit?", value, "used as it is", "doubtful"))
    wind = -speed * np.exp(1j * direction)  # components as one complex number: north, east
    wrong = np.zeros(levels.pressure.size, dtype=np.bool_)
    if wind.size > 2:
        beside = 0.5 * (wind[:-2] + wind[2:])
        spike = (np.abs(wind[1:-1] - beside) > WIND_SPIKE) & (np.abs(wind[2:] - wind[:-2]) < WIND_NEIGHBOURS)
        wrong[known[1:-1][spike]] = True
    found += at_levels(
        wrong,
        lambda i: place_of(levels, i),
        "wind spike",
        lambda i: f"{levels.wind_speed[i]:.0f} m/s from {np.degrees(levels.wind_from[i]):.0f}°",
        "wind left out, interpolated",
        "wrong",
    )
    out = replace(levels, findings=(*levels.findings, *shortened(found)))
    if not wrong.any():
        return out
    return replace(
        out,
        wind_speed=np.where(wrong, np.nan, levels.wind_speed),
        wind_from=np.where(wrong, np.nan, levels.wind_from),
    )


def gap_findings(levels: ReportedLevels, height: Array) -> list[Finding]:
    """Thick layers below 500 hPa without a value of their own.

    Parameters
    ----------
    levels : ReportedLevels
        Before gaps are filled.
    height : ndarray (nz,) [m above sea level]

    Returns
    -------
    list of Finding
    """
    humid = np.isfinite(levels.dew_point) | np.isfinite(levels.relative_humidity)
    kinds = (
        ("temperature", np.isfinite(levels.temperature)),
        ("humidity", humid),
        ("wind", np.isfinite(levels.wind_speed) & np.isfinite(levels.wind_from)),
    )
    found = []
    for name, known in kinds:
        z, p = height[known], levels.pressure[known]
        wide = (np.diff(z) > GAP) & (p[:-1] > GAP_CHECKED_TO)
        found += [
            Finding(
                f"{levels.name}, {z[i]:.0f} to {z[i + 1]:.0f} m",
                f"gap without {name}",
                f"{z[i + 1] - z[i]:.0f} m",
                "interpolated",
                "doubtful" if name == "wind" else "remark",
            )
            for i in np.flatnonzero(wide)
        ]
    return [*found, *_wind_end_findings(levels, height, kinds[2][1])]


def _wind_end_findings(levels: ReportedLevels, height: Array, known: NDArray[np.bool_]) -> list[Finding]:
    """Where the winds begin far above the ground or end far below the top of the data."""
    z = height[known]
    if not z.size:
        return []
    found = []
    if z[0] - height[0] > WIND_END:
        value, done = f"{z[0] - height[0]:.0f} m above the ground", "used down to the ground"
        found.append(Finding(levels.name, "lowest wind", value, done, "doubtful"))
    if height[-1] - z[-1] > GAP:
        value, done = f"{z[-1]:.0f} m", "used above it, too"
        found.append(Finding(levels.name, "highest wind", value, done, "remark"))
    return found


def height_findings(levels: ReportedLevels, height: Array) -> list[Finding]:
    """Reported heights that contradict pressure and temperature.

    Parameters
    ----------
    levels : ReportedLevels
        With their reported heights, NaN where missing.
    height : ndarray (nz,) [m above sea level]
        Worked out from pressure and virtual temperature.

    Returns
    -------
    list of Finding

    Raises
    ------
    DataFileError
        If more than a quarter of the heights up to 500 hPa are more than 300 m off.
    """
    checked = np.isfinite(levels.height) & (levels.pressure >= min(GAP_CHECKED_TO, float(levels.pressure[1])))
    off = np.where(checked, levels.height - height, 0.0)
    far = np.abs(off) > HEIGHT_WRONG
    if far.sum() > max(MOST_SPIKES * checked.sum(), 1):
        i = int(np.argmax(np.abs(off)))
        raise DataFileError(
            f"{levels.name}: pressure and height contradict each other at {int(far.sum())} of {int(checked.sum())} "
            f"levels: {place_of(levels, i)} is given at {levels.height[i]:.0f} m, but pressure and temperature put it "
            f"at {height[i]:.0f} m (allowed difference {HEIGHT_WRONG:.0f} m). {_height_cause(levels, height, checked)}"
        )
    noted = np.abs(off) > HEIGHT_OFF
    found = []
    for i in map(int, np.flatnonzero(noted)):
        value = f"{levels.height[i]:.0f} m, pressure and temperature give {height[i]:.0f} m"
        wrong = bool(far[i])
        feet = wrong and abs((levels.height[i] / max(height[i], 1.0)) / FEET_PER_METRE - 1.0) < 0.07
        what = "height contradicts pressure" + (": in feet?" if feet else "")
        done = "worked out from pressure"
        found.append(Finding(place_of(levels, i), what, value, done, "wrong" if wrong else "remark"))
    return found


def _fits_as_fahrenheit(levels: ReportedLevels, checked: NDArray[np.bool_]) -> bool:
    """Whether the heights fit once the temperatures are taken for degrees Fahrenheit."""
    known = np.isfinite(levels.temperature)
    kelvin = 273.15 + (levels.temperature[known] - 273.15 - 32.0) * 5.0 / 9.0
    if kelvin.min() < 150.0:
        return False
    rise = hydrostatic_height(levels.pressure[known], kelvin, 0.0)
    z, low = levels.height[known], checked[known]
    if not low.any():
        return False
    off = (z - z[low][0] - (rise - rise[low][0]))[low]
    return bool(np.abs(off).max() < FAHRENHEIT_FITS)


def _height_cause(levels: ReportedLevels, height: Array, checked: NDArray[np.bool_]) -> str:
    """Likely cause of heights that contradict pressures throughout."""
    i = np.flatnonzero(checked)
    rise = np.maximum(height[i] - height[i[0]], 1.0)
    ratio = float(np.median(((levels.height[i] - levels.height[i[0]]) / rise)[1:])) if i.size > 1 else 1.0
    if abs(ratio / FEET_PER_METRE - 1.0) < 0.07:
        return "The heights seem to be in feet: call the column height_ft."
    if abs(ratio * FEET_PER_METRE - 1.0) < 0.07:
        return "The heights seem to be metres in a column of feet: call it height_m."
    if _fits_as_fahrenheit(levels, checked):
        return "The temperatures seem to be in Fahrenheit: call the column temperature_f."
    return "Check the units of height and pressure and the first level, or leave the heights out."


def layer_findings(name: str, height: Array, temperature: Array) -> list[Finding]:
    """Layers in which temperature falls faster than dry-adiabatically.

    Parameters
    ----------
    name : str
        File, for the place.
    height, temperature : ndarray (nz,) [m above sea level, K]

    Returns
    -------
    list of Finding
    """
    found = []
    for low, high in superadiabatic_layers(height, temperature):
        rate = (temperature[low] - temperature[high]) / (height[high] - height[low]) * 1000.0
        place = f"{name}, {height[low]:.0f} to {height[high]:.0f} m"
        usual = rate < STEEP or height[high] - height[0] < HEATED
        value, done = f"{rate:.1f} °C per km", "used as it is"
        found.append(Finding(place, "superadiabatic layer", value, done, "remark" if usual else "doubtful"))
    return found
