"""Figure groups of upper-air reports in WMO code form FM 35 TEMP, each to SI.

The tables are those of the Manual on Codes; what a figure means stands beside
the function that reads it. A solidus means a missing figure.
"""

from __future__ import annotations

import math
import re
from typing import NamedTuple

import numpy as np

from orolift.air.standard import standard_height

GROUP = re.compile(r"[0-9/]{5}", re.ASCII)
KNOTS = 1852.0 / 3600.0
"""m s-1 in a knot: the international nautical mile, exact."""
HECTOPASCALS_TO_1000 = 1000
MOST_TENS_OF_DEGREES = 36
HEIGHTS_ALOFT = {7000.0: 18400.0, 5000.0: 20600.0, 3000.0: 23900.0, 2000.0: 26500.0, 1000.0: 31100.0}
"""Standard-atmosphere heights [m] of the levels of part C, to 100 m, from memory: they only decide ten thousands."""


class GroupError(ValueError):
    """A group that does not mean what it must mean at its place."""


class Wind(NamedTuple):
    """Speed [m s-1] and direction it comes from [rad]; NaN where missing."""

    speed: float
    from_direction: float


NO_WIND = Wind(math.nan, math.nan)


def checked_group(group: str) -> str:
    """The group, if it is one of five figures and solidi.

    Raises
    ------
    GroupError
        If it is not.
    """
    if not GROUP.fullmatch(group):
        raise GroupError(f"'{group[:12]}' is not a group of five figures")
    return group


def figures(group: str, what: str) -> int | None:
    """Number of a few figures, None where one of them is a solidus.

    Raises
    ------
    GroupError
        If anything else stands there.
    """
    if "/" in group:
        return None
    if not (group.isascii() and group.isdigit()):
        raise GroupError(f"{what} '{group}' is not made of figures")
    return int(group)


def level_pressure(figures_of_level: str, *, high: bool) -> float:
    """Pressure of PPP.

    Parameters
    ----------
    figures_of_level : str
        Three figures.
    high : bool
        True in parts C and D, where PPP is in tenths of a hectopascal; else
        whole hectopascals without the figure of the thousands.

    Returns
    -------
    float [Pa]
        NaN where missing.

    Examples
    --------
    >>> level_pressure("013", high=False), level_pressure("850", high=False), level_pressure("866", high=True)
    (101300.0, 85000.0, 8660.0)
    """
    number = figures(figures_of_level, "pressure")
    if number is None:
        return math.nan
    if high:
        return number * 10.0
    return (number + HECTOPASCALS_TO_1000 if number < 100 else number) * 100.0


def standard_level_height(pressure: float, hhh: str) -> float:
    """Geopotential height of a standard level from its three figures.

    Parameters
    ----------
    pressure : float [Pa]
    hhh : str
        Metres without thousands up to (not including) 500 hPa, with 500 added
        to the size of a negative height at 1000 hPa; decametres without the
        ten thousands of metres from 500 hPa on.

    Returns
    -------
    float [m]
        The height with these figures that is nearest to the standard
        atmosphere's; NaN where missing.

    Examples
    --------
    >>> standard_level_height(85000.0, "457"), standard_level_height(30000.0, "936"), standard_level_height(1e5, "512")
    (1457.0, 9360.0, -12.0)
    """
    number = figures(hhh, "height")
    if number is None:
        return math.nan
    low = pressure > 50000.0
    value, step = (float(number), 1000.0) if low else (10.0 * number, 10000.0)
    if pressure == 100000.0:
        return 500.0 - value if value >= 500.0 else value
    usual = HEIGHTS_ALOFT.get(pressure) or float(standard_height(pressure))
    return value + step * float(np.rint((usual - value) / step))


def temperature_and_dew_point(group: str) -> tuple[float, float]:
    """Temperature and dew point of TTTaDD.

    Parameters
    ----------
    group : str
        TT whole degrees; Ta tenths, even above and odd below freezing (code
        table 3931); DD depression of the dew point, 00 to 50 in tenths, 56 to
        99 in whole degrees plus 50 (code table 0777).

    Returns
    -------
    temperature, dew_point : float [K]
        NaN where missing.

    Raises
    ------
    GroupError
        If the figures are none of the tables.

    Examples
    --------
    >>> [round(value - 273.15, 1) for value in temperature_and_dew_point("05761")]
    [-5.7, -16.7]
    """
    degrees, tenths = figures(group[:2], "temperature"), figures(group[2], "tenths of temperature")
    if degrees is None or tenths is None:
        return math.nan, math.nan
    size = degrees + tenths / 10.0
    temperature = 273.15 + (-size if tenths % 2 else size)
    depression = figures(group[3:], "dew-point depression")
    if depression is None:
        return temperature, math.nan
    if 50 < depression < 56:
        raise GroupError(f"dew-point depression {depression} is not used in the code table")
    return temperature, temperature - (depression / 10.0 if depression <= 50 else depression - 50.0)


def wind(group: str, *, knots: bool) -> Wind:
    """Wind of ddfff.

    Parameters
    ----------
    group : str
        Tens of degrees, then speed; 500 added to the speed adds five degrees.
    knots : bool
        Whether the speed is in knots, else in metres per second.

    Returns
    -------
    Wind

    Raises
    ------
    GroupError
        If the direction is beyond 360 degrees.

    Examples
    --------
    >>> [round(value, 3) for value in wind("27520", knots=True)]
    [10.289, 4.8]
    """
    tens, speed = figures(group[:2], "wind direction"), figures(group[2:], "wind speed")
    if tens is None or speed is None:
        return NO_WIND
    degrees = tens * 10 + (5 if speed >= 500 else 0)
    if tens > MOST_TENS_OF_DEGREES or degrees > 360:
        raise GroupError(f"wind direction {degrees} lies beyond 360 degrees")
    speed -= 500 if speed >= 500 else 0
    return Wind(speed * (KNOTS if knots else 1.0), math.radians(degrees))


def position(latitude: str, longitude: str) -> tuple[float, float]:
    """Longitude and latitude of the groups 99LaLaLa QcLoLoLoLo.

    Parameters
    ----------
    latitude, longitude : str
        Tenths of a degree; Qc is the quadrant: 1 north-east, 3 south-east, 5 south-west, 7 north-west (code
        table 3333).

    Returns
    -------
    longitude, latitude : float [degrees east, degrees north]

    Raises
    ------
    GroupError
        If the figures are no place on Earth.

    Examples
    --------
    >>> position("99412", "70095")
    (-9.5, 41.2)
    """
    north, quadrant, east = figures(latitude[2:], "latitude"), longitude[:1], figures(longitude[1:], "longitude")
    if latitude[:2] != "99" or north is None or east is None or quadrant not in "1357" or north > 900 or east > 1800:
        raise GroupError(f"'{latitude} {longitude}' is not a position")
    return (east if quadrant in "13" else -east) / 10.0, (north if quadrant in "17" else -north) / 10.0


def ground_elevation(group: str) -> float:
    """Elevation of a mobile station of h0h0h0h0im.

    Parameters
    ----------
    group : str
        Four figures and the unit: 1 to 4 metres, 5 to 8 feet, by confidence (code table 1845).

    Returns
    -------
    float [m above sea level]
        NaN where missing.

    Examples
    --------
    >>> ground_elevation("01201"), round(ground_elevation("10005"), 1)
    (120.0, 304.8)
    """
    size, unit = figures(group[:4], "elevation"), figures(group[4:], "unit of the elevation")
    if size is None or unit is None:
        return math.nan
    if not 1 <= unit <= 8:
        raise GroupError(f"unit {unit} of the elevation is not in the code table")
    return float(size) if unit <= 4 else size * 0.3048
