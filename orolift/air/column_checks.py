"""Checks on the levels of a sounding or model column, and winds for the levels without."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.constants import GRAVITY, HEAT_CAPACITY_DRY_AIR
from orolift.errors import IncomingAirError

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Array = NDArray[np.float64]

FEWEST_LEVELS = 4
SHALLOWEST = 3000.0  # m; lower data say nothing about the air at most crests (design choice)
NOTED_HEIGHT_DIFFERENCE = 40.0  # m
CONTRADICTING_HEIGHT_DIFFERENCE = 300.0  # m
CHECKED_UP_TO = 50000.0  # Pa; higher up small errors of temperature add up
NOTED_LAPSE_RATE = GRAVITY / HEAT_CAPACITY_DRY_AIR + 0.5e-3  # K m-1; the half kelvin per km is for rounding
NOTED_LAYER = 50.0  # m
FEET_PER_METRE = 1.0 / 0.3048  # international foot of 1959, exact


@dataclass(frozen=True, eq=False)
class Levels:
    """Levels of a sounding or model column as given, checked.

    Attributes
    ----------
    height : ndarray (nz,) [m above sea level] or None
    ground : float [m above sea level]
        Height of the first level.
    pressure, temperature, mixing_ratio : ndarray (nz,) [Pa, K, kg kg-1 of dry air]
    eastward_wind, northward_wind : ndarray (nz,) [m s-1]
        NaN where unknown.
    """

    height: Array | None
    ground: float
    pressure: Array
    temperature: Array
    mixing_ratio: Array
    eastward_wind: Array
    northward_wind: Array


def checked_levels(
    height: ArrayLike | None,
    pressure: ArrayLike,
    temperature: ArrayLike,
    mixing_ratio: ArrayLike,
    eastward_wind: ArrayLike,
    northward_wind: ArrayLike,
    elevation: float | None,
) -> Levels:
    """Levels with number, order and ranges checked.

    Parameters
    ----------
    height, pressure, temperature, mixing_ratio, eastward_wind, northward_wind, elevation
        As in `orolift.air.column_build.air_from_levels`.

    Returns
    -------
    Levels

    Raises
    ------
    OutOfRangeError
        If any value is outside its range.
    IncomingAirError
        If the levels do not form a column.
    """
    kelvin = "orolift works in kelvin; add 273.15 to degrees Celsius."
    pascals = "orolift works in pascals; multiply hectopascals by 100."
    p = within("pressure", pressure, 100.0, 1.1e5, "Pa", pascals)
    within("pressure of the lowest level", p.ravel()[:1], 3.0e4, 1.1e5, "Pa", pascals)
    t = within("temperature", temperature, 160.0, 330.0, "K", kelvin)
    r = within(
        "mixing_ratio",
        mixing_ratio,
        0.0,
        0.06,
        "kg/kg",
        "Give kilograms per kilogram, and leave out levels without it.",
    )
    u, v = _known_winds(eastward_wind, northward_wind)
    z = None
    if height is not None:
        z = within("height", height, -500.0, 60000.0, "m", "Give metres above sea level, or no heights at all.")
    _refuse_misfits(p, {"temperature": t, "mixing_ratio": r, "eastward_wind": u, "northward_wind": v, "height": z})
    _refuse_disorder(p, z)
    return Levels(z, _ground(z, elevation), p, t, r, u, v)


def _known_winds(eastward: ArrayLike, northward: ArrayLike) -> tuple[Array, Array]:
    """Winds with NaN in both components where either is unknown."""
    u, v = np.array(eastward, dtype=np.float64), np.array(northward, dtype=np.float64)
    for name, wind in (("eastward_wind", u), ("northward_wind", v)):
        within(name, wind[np.isfinite(wind)], -150.0, 150.0, "m/s", "Give metres per second, NaN where unknown.")
    if u.shape == v.shape:
        unknown = ~(np.isfinite(u) & np.isfinite(v))
        u[unknown] = v[unknown] = np.nan
    return u, v


def _refuse_misfits(pressure: Array, others: dict[str, Array | None]) -> None:
    """Refuse columns of different length, or too short ones."""
    if pressure.ndim != 1 or pressure.size < FEWEST_LEVELS:
        raise IncomingAirError(
            f"pressure: the incoming air has {pressure.size if pressure.ndim == 1 else pressure.shape} levels; "
            f"one list of at least {FEWEST_LEVELS} is needed. Add levels, or give station values instead."
        )
    for name, values in others.items():
        if values is not None and values.shape != pressure.shape:
            raise IncomingAirError(
                f"{name}: shape {values.shape}, but pressure has {pressure.size} levels. Give one value for each level."
            )


def _refuse_disorder(pressure: Array, height: Array | None) -> None:
    """Refuse levels whose pressure does not fall or whose height does not rise."""
    wrong = np.flatnonzero(np.diff(pressure) >= 0.0)
    if wrong.size:
        i = int(wrong[0])
        raise IncomingAirError(
            f"pressure: it must fall from each level to the next, but level {i + 2} of {pressure.size} has "
            f"{pressure[i + 1] / 100.0:g} hPa after {pressure[i] / 100.0:g} hPa ({wrong.size} such levels). "
            "Sort the levels from the ground up and leave repeated ones out."
        )
    if height is None:
        return
    wrong = np.flatnonzero(np.diff(height) <= 0.0)
    if wrong.size:
        i = int(wrong[0])
        raise IncomingAirError(
            f"height: it must rise from each level to the next, but level {i + 2} of {height.size} has "
            f"{height[i + 1]:g} m after {height[i]:g} m ({wrong.size} such levels). Correct it or leave the level out."
        )


def _ground(height: Array | None, elevation: float | None) -> float:
    """Height of the first level."""
    if height is not None:
        return float(height[0])
    if elevation is None:
        raise IncomingAirError(
            "elevation: without heights the elevation of the lowest level must be given, in metres above sea level."
        )
    return float(within("elevation", elevation, -500.0, 6000.0, "m", "Give metres above sea level."))


def height_notes(hydrostatic: Array, levels: Levels) -> list[str]:
    """What to say about given heights beside those that pressure and temperature require.

    Parameters
    ----------
    hydrostatic : ndarray (nz,) [m above sea level]
    levels : Levels

    Returns
    -------
    list of str
        Empty when they agree within 40 m up to 500 hPa.

    Raises
    ------
    IncomingAirError
        If the column is shallower than 3 km, or the heights are more than
        300 m off up to 500 hPa.
    """
    depth = float(hydrostatic[-1] - hydrostatic[0])
    if levels.height is not None:
        checked = levels.pressure >= min(CHECKED_UP_TO, float(levels.pressure[1]))
        difference = np.where(checked, levels.height - hydrostatic, 0.0)
        worst = int(np.argmax(np.abs(difference)))
        _refuse_contradiction(hydrostatic, levels.height, worst, float(levels.pressure[worst]))
    _refuse_shallow(depth)
    if levels.height is None or abs(difference[worst]) <= NOTED_HEIGHT_DIFFERENCE:
        return []
    off = f"{abs(float(difference[worst])):.0f} m (at {levels.pressure[worst] / 100.0:.0f} hPa)"
    return [
        f"The given heights differ by up to {off} from those that pressure and temperature require, which were used."
    ]


def _refuse_shallow(depth: float) -> None:
    """Refuse columns that end below any crest of interest."""
    if depth < SHALLOWEST:
        raise IncomingAirError(
            f"pressure: the levels reach only {depth:.0f} m above the ground; at least {SHALLOWEST:.0f} m are needed. "
            "Give a deeper sounding, or station values instead."
        )


def _refuse_contradiction(hydrostatic: Array, height: Array, worst: int, pressure: float) -> None:
    """Refuse heights that no air of these pressures and temperatures can have."""
    if abs(height[worst] - hydrostatic[worst]) <= CONTRADICTING_HEIGHT_DIFFERENCE:
        return
    ratio = float((height[worst] - height[0]) / (hydrostatic[worst] - hydrostatic[0]))
    if abs(ratio / FEET_PER_METRE - 1.0) < 0.07:
        cause = "The heights seem to be in feet: multiply them by 0.3048."
    elif abs(ratio * FEET_PER_METRE - 1.0) < 0.07:
        cause = "The heights seem to be metres that were taken as feet: use them as metres."
    else:
        cause = "Check the units of height and pressure and the first level, or leave the heights out."
    raise IncomingAirError(
        f"height: pressure and height contradict each other: level {worst + 1} of {height.size}, "
        f"{pressure / 100.0:.0f} hPa, is given at {height[worst]:.0f} m, but pressure and temperature below it put it "
        f"at {hydrostatic[worst]:.0f} m (allowed difference {CONTRADICTING_HEIGHT_DIFFERENCE:.0f} m). {cause}"
    )


def superadiabatic_layers(height: Array, temperature: Array) -> list[tuple[int, int]]:
    """Layers in which temperature falls faster than air can keep up.

    Parameters
    ----------
    height : ndarray (nz,) [m above sea level]
    temperature : ndarray (nz,) [K]

    Returns
    -------
    list of (int, int)
        Level numbers of bottom and top. Adjacent layers count as one; thinner
        than 50 m they are left to the noise of the instrument.

    Examples
    --------
    >>> superadiabatic_layers(np.array([0.0, 100.0, 200.0, 900.0]), np.array([290.0, 288.7, 287.4, 283.0]))
    [(0, 2)]
    """
    steep = np.concatenate([[False], -np.diff(temperature) / np.diff(height) > NOTED_LAPSE_RATE, [False]])
    edges = np.flatnonzero(np.diff(steep.astype(np.int8)))  # level numbers of bottom, top, bottom, top, ...
    pairs = zip(edges[::2], edges[1::2], strict=True)
    return [(int(low), int(high)) for low, high in pairs if height[high] - height[low] >= NOTED_LAYER]


def superadiabatic_notes(height: Array, temperature: Array) -> list[str]:
    """What to say about layers in which temperature falls faster than air can keep up.

    Parameters
    ----------
    height : ndarray (nz,) [m above sea level]
    temperature : ndarray (nz,) [K]

    Returns
    -------
    list of str
        One sentence, or none, on `superadiabatic_layers`.
    """
    layers = [
        (float(height[low]), float(height[high]), float(temperature[low] - temperature[high]))
        for low, high in superadiabatic_layers(height, temperature)
    ]
    if not layers:
        return []
    shown = "; ".join(
        f"{low:.0f} to {high:.0f} m ({fall / (high - low) * 1000.0:.0f} °C per km)" for low, high, fall in layers[:3]
    )
    more = f" and {len(layers) - 3} more" if len(layers) > 3 else ""
    return [
        f"Temperature falls faster than 10.3 °C per km, rare except over heated ground (used as it is): {shown}{more}."
    ]


def filled_wind(height: Array, eastward: Array, northward: Array) -> tuple[Array, Array, list[str]]:
    """Wind at all levels, interpolated in height by components where it is unknown.

    Parameters
    ----------
    height : ndarray (nz,) [m]
    eastward, northward : ndarray (nz,) [m s-1]
        NaN where unknown, in both.

    Returns
    -------
    eastward, northward : ndarray (nz,) [m s-1]
        Constant below the lowest and above the highest known wind.
    notes : list of str

    Raises
    ------
    IncomingAirError
        If no wind is known at all.
    """
    known = np.isfinite(eastward)
    if not known.any():
        raise IncomingAirError(
            f"eastward_wind, northward_wind: no level of {height.size} has a wind. Without wind no air crosses; give "
            "the wind on at least one level, best near the crest."
        )
    if known.all():
        return eastward, northward, []
    z = height[known]
    u, v = np.interp(height, z, eastward[known]), np.interp(height, z, northward[known])
    reach = f"{int(known.sum())} of {height.size} levels, from {z[0]:.0f} to {z[-1]:.0f} m"
    return u, v, [f"The wind is known at {reach}: interpolated in between, constant beyond (assumed)."]
