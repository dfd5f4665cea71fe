"""The incoming air: a column far enough upwind to be undisturbed, and what can be read off it.

Building one is in `column_build`. Heights are geopotential; they are used as
metres above sea level throughout, which at 5 km is 4 m off.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from orolift.air.hydrostatic import hydrostatic_pressure
from orolift.air.saturation import latent_heat_of_vaporisation, saturation_vapour_pressure_over_liquid
from orolift.air.temperature import virtual_temperature
from orolift.checks import within
from orolift.constants import (
    EPSILON,
    GRAVITY,
    HEAT_CAPACITY_DRY_AIR,
    HEAT_CAPACITY_VAPOUR,
    MELTING_POINT,
    STANDARD_LAPSE_RATE,
)

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

Origin = Literal[
    "measured",
    "model",
    "station",
    "between stations",
    "surface report blended in",
    "lapse rate",
    "standard lapse above the data",
    "standard lapse below the data",
]

_BELOW: Origin = "standard lapse below the data"
_DEEPEST_EXTENSION = 3000.0  # m; further below the data a constant lapse is no more than a guess
_EXTENSION_SPACING = 100.0  # m


@dataclass(frozen=True, eq=False)
class IncomingAir:
    """Undisturbed air upwind of a range, on levels from the ground up.

    Leading axes of the fields hold members or hours; all share the heights.

    Attributes
    ----------
    height : ndarray (nz,) [m above sea level]
        Strictly rising; the first is the ground.
    pressure : ndarray (..., nz) [Pa]
    temperature : ndarray (..., nz) [K]
    vapour, cloud : ndarray (..., nz) [kg kg-1 of dry air]
        Vapour, and water or ice that has condensed.
    eastward_wind, northward_wind : ndarray (..., nz) [m s-1]
    origin : tuple of str (nz,)
        Where each level comes from.
    notes : tuple of str
        Assumptions made and doubts, each a sentence for a forecaster.
    """

    height: NDArray[np.float64]
    pressure: NDArray[np.float64]
    temperature: NDArray[np.float64]
    vapour: NDArray[np.float64]
    cloud: NDArray[np.float64]
    eastward_wind: NDArray[np.float64]
    northward_wind: NDArray[np.float64]
    origin: tuple[Origin, ...]
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, eq=False)
class AirAtHeights:
    """Air of a column read off at heights, in the order they were asked for.

    Attributes
    ----------
    height : ndarray, as asked for [m above sea level]
    pressure, temperature, vapour, cloud, eastward_wind, northward_wind : ndarray
        As in `IncomingAir`, at `height`: members first, then heights.
    """

    height: NDArray[np.float64]
    pressure: NDArray[np.float64]
    temperature: NDArray[np.float64]
    vapour: NDArray[np.float64]
    cloud: NDArray[np.float64]
    eastward_wind: NDArray[np.float64]
    northward_wind: NDArray[np.float64]


def interpolated(air: IncomingAir, height: ArrayLike) -> AirAtHeights:
    """Air of the column at any heights.

    Parameters
    ----------
    air : IncomingAir
    height : array_like, scalar, shape (n,) or (..., n) [m above sea level]
        From 3000 m below the ground of the column to its top. One or no axis:
        the same heights for all members. More axes broadcast with the members.

    Returns
    -------
    AirAtHeights
        Fields of shape (...) for a scalar, else (..., n).

    Raises
    ------
    OutOfRangeError
        If a height is NaN, above the column or more than 3000 m below it.

    Notes
    -----
    Linear in height; pressure linear in its logarithm. Below the ground of the
    column the air of `extended_down`.

    Examples
    --------
    >>> level = np.array([0.0, 1000.0, 20000.0])
    >>> still = np.zeros(3)
    >>> air = IncomingAir(level, 1e5 * np.exp(-level / 8000), 288 - 0.0065 * level, still, still, still, still, ())
    >>> interpolated(air, 500.0).temperature.round(2)
    np.float64(284.75)
    """
    ground, top = float(air.height[0]), float(air.height[-1])
    z = within(
        "height", height, ground - _DEEPEST_EXTENSION, top, "m", "The incoming air is given between these heights."
    )
    if z.size and np.min(z) < ground:
        air = extended_down(air, float(np.min(z)))
    index = np.clip(np.searchsorted(air.height, z, side="right") - 1, 0, air.height.size - 2)
    share = (z - air.height[index]) / (air.height[index + 1] - air.height[index])

    def read(field: NDArray[np.float64]) -> NDArray[np.float64]:
        lower, upper = _taken(field, index), _taken(field, index + 1)
        return lower + share * (upper - lower)

    return AirAtHeights(
        height=z,
        pressure=np.exp(read(np.log(air.pressure))),
        temperature=read(air.temperature),
        vapour=read(air.vapour),
        cloud=read(air.cloud),
        eastward_wind=read(air.eastward_wind),
        northward_wind=read(air.northward_wind),
    )


def _taken(field: NDArray[np.float64], index: NDArray[np.int_]) -> NDArray[np.float64]:
    """Values of a (..., nz) field at level numbers that are common to the members or their own."""
    if index.ndim <= 1:
        return field[..., index]
    shape = np.broadcast_shapes(field.shape[:-1], index.shape[:-1])
    return np.take_along_axis(
        np.broadcast_to(field, (*shape, field.shape[-1])), np.broadcast_to(index, (*shape, index.shape[-1])), axis=-1
    )


def extended_down(air: IncomingAir, ground: float) -> IncomingAir:
    """The column with levels added below it, for terrain lower than its ground.

    Parameters
    ----------
    air : IncomingAir
    ground : float [m above sea level]
        New lowest level, at most 3000 m below the old one.

    Returns
    -------
    IncomingAir
        The same one if its ground is not higher than `ground`.

    Raises
    ------
    OutOfRangeError
        If `ground` is NaN or too deep.

    Notes
    -----
    Assumed below the data: 6.5 K per km warmer downward (standard atmosphere),
    vapour and wind as at the lowest level, no cloud, hydrostatic.

    Examples
    --------
    >>> level = np.array([400.0, 1000.0, 20000.0])
    >>> still = np.zeros(3)
    >>> air = IncomingAir(level, 1e5 * np.exp(-level / 8000), 288 - 0.0065 * level, still, still, still, still, ())
    >>> extended_down(air, 0.0).temperature[0].round(1)
    np.float64(288.0)
    """
    old = float(air.height[0])
    within("ground", ground, old - _DEEPEST_EXTENSION, np.inf, "m", "The incoming air starts far above this terrain.")
    if ground >= old:
        return air
    count = int(np.ceil((old - ground) / _EXTENSION_SPACING))
    added = np.linspace(ground, old, count + 1)[:-1]
    temperature = air.temperature[..., :1] + STANDARD_LAPSE_RATE * (old - added)
    vapour = np.broadcast_to(air.vapour[..., :1], temperature.shape)
    tv = virtual_temperature(temperature, vapour)
    tv_old = virtual_temperature(air.temperature[..., :1], air.vapour[..., :1], air.cloud[..., :1])
    downward_height = np.append(added, old)[::-1]
    downward_tv = np.concatenate([tv, np.broadcast_to(tv_old, (*tv.shape[:-1], 1))], axis=-1)[..., ::-1]
    pressure = hydrostatic_pressure(downward_height, downward_tv, air.pressure[..., 0])[..., :0:-1]

    def joined(lower: NDArray[np.float64], field: NDArray[np.float64]) -> NDArray[np.float64]:
        return np.concatenate([np.broadcast_to(lower, (*field.shape[:-1], count)), field], axis=-1)

    note = (
        f"Below the lowest level of the incoming air, from {old:.0f} m down to {ground:.0f} m, temperature rises "
        "downward by 6.5 °C per km; vapour and wind stay as at that level (assumed)."
    )
    return IncomingAir(
        height=np.concatenate([added, air.height]),
        pressure=joined(pressure, air.pressure),
        temperature=joined(temperature, air.temperature),
        vapour=joined(vapour, air.vapour),
        cloud=joined(np.zeros(count), air.cloud),
        eastward_wind=joined(air.eastward_wind[..., :1], air.eastward_wind),
        northward_wind=joined(air.northward_wind[..., :1], air.northward_wind),
        origin=(*(_BELOW,) * count, *air.origin),
        notes=(*air.notes, note),
    )


def wind_component(air: IncomingAir | AirAtHeights, toward_bearing: ArrayLike) -> NDArray[np.float64]:
    """Wind along a bearing, positive toward it.

    Parameters
    ----------
    air : IncomingAir or AirAtHeights
    toward_bearing : array_like, scalar or shape (..., 1) [rad]
        Direction the air goes to, clockwise from north: the direction the wind
        comes from plus pi.

    Returns
    -------
    ndarray, shape of the wind [m s-1]

    Raises
    ------
    OutOfRangeError
        If the bearing is NaN or outside -4 pi to 4 pi.

    Examples
    --------
    >>> level, west = np.array([0.0, 20000.0]), np.array([10.0, 30.0])
    >>> air = IncomingAir(level, level, level, level, level, west, np.zeros(2), ())
    >>> wind_component(air, np.pi / 2).round(6)
    array([10., 30.])
    """
    bearing = within(
        "toward_bearing", toward_bearing, -4 * np.pi, 4 * np.pi, "rad", "orolift works in radians, not degrees."
    )
    return np.asarray(air.eastward_wind * np.sin(bearing) + air.northward_wind * np.cos(bearing), dtype=np.float64)


def freezing_level(air: IncomingAir) -> NDArray[np.float64]:
    """Height above which all of the column is colder than 0 degrees Celsius.

    With an inversion there are several heights of 0 degrees; this is the
    highest, where falling snow starts to melt. (Aviation means the lowest.)

    Parameters
    ----------
    air : IncomingAir

    Returns
    -------
    ndarray, shape (...) [m above sea level]
        The ground where the whole column is below freezing, the top where the
        column is warmer to its top.

    Examples
    --------
    >>> level = np.array([0.0, 10000.0, 20000.0])
    >>> still = np.zeros(3)
    >>> air = IncomingAir(level, 1e5 * np.exp(-level / 8000), 283.15 - 0.0065 * level, still, still, still, still, ())
    >>> freezing_level(air).round(1)
    np.float64(1538.5)
    """
    return _highest_zero(air.height, air.temperature - MELTING_POINT)


def wet_bulb_zero_level(air: IncomingAir) -> NDArray[np.float64]:
    """Height above which the wet bulb of the whole column is below 0 degrees Celsius.

    Snow that falls through dry air stays snow down to about here, because it
    cools the air to its wet bulb.

    Parameters
    ----------
    air : IncomingAir

    Returns
    -------
    ndarray, shape (...) [m above sea level]
        Not above `freezing_level`, except in supersaturated air; the ground
        where all wet bulbs are below freezing.

    Notes
    -----
    The wet bulb over water is below 0 degrees where evaporation of water of
    that temperature up to saturation takes more heat than cooling to it gives:
    (cpd + r cpv) (T - T0) < (rs(T0) - r) L(T0). The difference of the two
    sides, linear between levels, needs no iteration.

    Examples
    --------
    >>> level = np.array([0.0, 10000.0, 20000.0])
    >>> still = np.zeros(3)
    >>> air = IncomingAir(level, 1e5 * np.exp(-level / 8000), 283.15 - 0.0065 * level, still, still, still, still, ())
    >>> bool(wet_bulb_zero_level(air) < freezing_level(air))
    True
    """
    e0 = saturation_vapour_pressure_over_liquid(MELTING_POINT)
    p = np.maximum(air.pressure, 2.0 * e0)  # far above any freezing level; keeps the ratio finite
    gained = (HEAT_CAPACITY_DRY_AIR + air.vapour * HEAT_CAPACITY_VAPOUR) * (air.temperature - MELTING_POINT)
    needed = (EPSILON * e0 / (p - e0) - air.vapour) * latent_heat_of_vaporisation(MELTING_POINT)
    return _highest_zero(air.height, gained - needed)


def _highest_zero(height: NDArray[np.float64], value: NDArray[np.float64]) -> NDArray[np.float64]:
    """Height above which `value` is negative, by linear interpolation along the last axis."""
    last = height.size - 1
    positive = value > 0.0
    below = last - np.argmax(positive[..., ::-1], axis=-1)
    above = np.minimum(below + 1, last)
    v0 = np.take_along_axis(value, below[..., np.newaxis], axis=-1)[..., 0]
    v1 = np.take_along_axis(value, above[..., np.newaxis], axis=-1)[..., 0]
    fall = np.where(v0 > v1, v0 - v1, 1.0)
    crossing = height[below] + np.where(v0 > v1, v0 / fall, 0.0) * (height[above] - height[below])
    return np.asarray(np.where(positive.any(axis=-1), crossing, height[0]), dtype=np.float64)


def column_vapour(air: IncomingAir) -> NDArray[np.float64]:
    """Vapour above a square metre of ground, also called precipitable water.

    Parameters
    ----------
    air : IncomingAir

    Returns
    -------
    ndarray, shape (...) [kg m-2]
        The same number in millimetres of water. Cloud is not counted.

    Notes
    -----
    Integral of the vapour's share of the mass over pressure, by the trapezoidal
    rule, divided by gravity.

    Examples
    --------
    >>> level = np.array([0.0, 1000.0])
    >>> still = np.zeros(2)
    >>> air = IncomingAir(level, np.array([1e5, 9e4]), still + 288, still + 0.01, still, still, still, ())
    >>> column_vapour(air).round(2)
    np.float64(10.1)
    """
    return _over_mass(air, _vapour_share(air))


def vapour_flux(air: IncomingAir, bearing: ArrayLike) -> NDArray[np.float64]:
    """Vapour carried toward a bearing through each metre across it.

    Parameters
    ----------
    air : IncomingAir
    bearing : array_like, scalar or shape (...) [rad]
        Direction the air goes to, clockwise from north.

    Returns
    -------
    ndarray, shape (...) [kg m-1 s-1]
        Negative where the vapour comes from there. Levels of opposite wind count
        as such.

    Raises
    ------
    OutOfRangeError
        If the bearing is NaN or outside -4 pi to 4 pi.

    Notes
    -----
    As `column_vapour`, weighted by `wind_component`.

    Examples
    --------
    >>> level = np.array([0.0, 1000.0])
    >>> still = np.zeros(2)
    >>> air = IncomingAir(level, np.array([1e5, 9e4]), still + 288, still + 0.01, still, still + 10.0, still, ())
    >>> vapour_flux(air, np.pi / 2).round(1)
    np.float64(101.0)
    """
    return _over_mass(air, _vapour_share(air) * wind_component(air, np.asarray(bearing)[..., np.newaxis]))


def _vapour_share(air: IncomingAir) -> NDArray[np.float64]:
    """Vapour per mass of all that is in the air."""
    return air.vapour / (1.0 + air.vapour + air.cloud)


def _over_mass(air: IncomingAir, value: NDArray[np.float64]) -> NDArray[np.float64]:
    """Integral of a value over the mass above a square metre."""
    layer = -np.diff(air.pressure, axis=-1) / GRAVITY
    return np.asarray(np.sum(0.5 * (value[..., :-1] + value[..., 1:]) * layer, axis=-1), dtype=np.float64)
