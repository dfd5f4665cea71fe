"""Several stations at different elevations: what they say of each other, and the column through them."""

from __future__ import annotations

import math
from itertools import pairwise
from typing import TYPE_CHECKING

from orolift.air.column_checks import NOTED_LAPSE_RATE
from orolift.air.humidity import mixing_ratio_from_relative_humidity
from orolift.air.ladder import SAME_ELEVATION, LadderStation, air_from_ladder
from orolift.air.standard import standard_pressure
from orolift.sources.quality import Finding

if TYPE_CHECKING:
    from collections.abc import Sequence

LEAST_STEP = 100.0
"""Height between stations [m] over which a lapse rate says something: a judgement."""
SAME_HEIGHT_TEMPERATURE = 2.0
"""Difference of temperature [K] between stations of one height from which they contradict each other. (Judgement.)"""
STEEP_INVERSION = 0.03
"""Rise of temperature [K m-1] between stations that is doubted: 3 K per 100 m, a judgement."""
MOISTER_ALOFT = 1.0e-3
"""Excess of mixing ratio at the upper station [kg kg-1] that is doubted (a judgement)."""
PRESSURE_OFF = 200.0
"""Departure of a station's pressure from the column through the others [Pa] that is doubted: 2 hPa (a judgement)."""


def ladder_findings(stations: Sequence[LadderStation], names: Sequence[str]) -> list[Finding]:
    """Where stations of a ladder contradict each other.

    Parameters
    ----------
    stations : sequence of LadderStation
    names : sequence of str
        One for each.

    Returns
    -------
    list of Finding

    Examples
    --------
    >>> valley = LadderStation(400.0, 290.0, 0.5, 96600.0, 3.0, 0.0)
    >>> summit = LadderStation(1400.0, 275.0, 0.5, None, 9.0, 0.0)
    >>> [finding.value for finding in ladder_findings([valley, summit], ["valley", "summit"])]
    ['falls by 15.0 °C per km']
    """
    order = sorted(range(len(stations)), key=lambda i: stations[i].elevation)
    found = []
    for i, j in pairwise(order):
        place = f"{names[i]} and {names[j]}"
        found += _pair(stations[i], stations[j], place)
    return [*found, *_pressures(stations, names)]


def _pair(low: LadderStation, high: LadderStation, place: str) -> list[Finding]:
    """What two neighbouring stations say of each other."""
    step, rise = high.elevation - low.elevation, high.temperature - low.temperature
    found = []
    used = "used as they are"
    if step < SAME_ELEVATION:
        if abs(rise) > SAME_HEIGHT_TEMPERATURE:
            value = f"{abs(rise):.1f} °C apart at one height"
            found.append(Finding(place, "stations contradict each other", value, "their mean is used", "doubtful"))
        return found
    if step >= LEAST_STEP and -rise / step > NOTED_LAPSE_RATE:
        value = f"falls by {-rise / step * 1000.0:.1f} °C per km"
        found.append(Finding(place, "temperature falls faster than air can keep up", value, used, "doubtful"))
    if step >= LEAST_STEP and rise / step > STEEP_INVERSION:
        value = f"{rise:.1f} °C warmer {step:.0f} m higher"
        found.append(Finding(place, "very strong inversion", value, used, "doubtful"))
    excess = _mixing_ratio(high) - _mixing_ratio(low)
    if excess > MOISTER_ALOFT:
        value = f"{excess * 1000.0:.1f} g/kg moister {step:.0f} m higher"
        found.append(Finding(place, "moister aloft: one air mass?", value, used, "doubtful"))
    return found


def _mixing_ratio(station: LadderStation) -> float:
    pressure = float(standard_pressure(station.elevation)) if station.pressure is None else station.pressure
    humidity = min(max(station.relative_humidity, 0.01), 1.0)
    return float(mixing_ratio_from_relative_humidity(pressure, station.temperature, humidity))


def _pressures(stations: Sequence[LadderStation], names: Sequence[str]) -> list[Finding]:
    """Pressures that do not fit the column from the lowest station that has one."""
    known = [i for i, one in enumerate(stations) if one.pressure is not None]
    if len(known) < 2:
        return []
    calm = [one if one.eastward_wind is not None else _calm(one) for one in stations]
    air = air_from_ladder(calm)
    found = []
    for i in known:
        own = float(stations[i].pressure or math.nan)
        at = int(abs(air.height - stations[i].elevation).argmin())
        off = own - float(air.pressure[at])
        if abs(off) > PRESSURE_OFF and abs(air.height[at] - stations[i].elevation) < SAME_ELEVATION:
            value = f"{own / 100:.1f} hPa, the other stations require {air.pressure[at] / 100:.1f} hPa"
            found.append(Finding(names[i], "pressure contradicts the other stations", value, "not used", "doubtful"))
    return found


def _calm(station: LadderStation) -> LadderStation:
    return LadderStation(station.elevation, station.temperature, station.relative_humidity, station.pressure, 0.0, 0.0)
