"""Rain or snow at the ground, and the height of the line between."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import IncomingAir, interpolated, wet_bulb_zero_level
from orolift.air.humidity import relative_humidity_from_mixing_ratio
from orolift.air.snow_share import snow_share_from_wet_bulb
from orolift.air.wet_bulb import wet_bulb_from_mixing_ratio
from orolift.checks import within
from orolift.constants import MELTING_POINT

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

_KELVIN = "orolift works in kelvin; add 273.15 to degrees Celsius."
_SPACING = 20.0  # [m] of the heights at which the column is read; the share is linear between
_HALF = 0.5


@dataclass(frozen=True, eq=False)
class SnowByHeight:
    """Share of precipitation that reaches the ground as snow, by the height of the ground.

    Attributes
    ----------
    height : ndarray, shape (n,) [m above sea level]
    share : ndarray, shape (n,) [1]
        0 all rain, 1 all snow.
    snow_level : float [m above sea level]
        Above it more than half is snow, all the way up; the lowest height if that is so everywhere.
    melting_level : float [m above sea level]
        Where falling snow starts to melt: highest wet-bulb zero of the column.
    """

    height: NDArray[np.float64]
    share: NDArray[np.float64]
    snow_level: float
    melting_level: float


def snow_share_jennings_2018(temperature: ArrayLike, relative_humidity: ArrayLike) -> NDArray[np.float64]:
    """Share of precipitation that falls as snow, from temperature and humidity at the ground.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        200 K to 330 K.
    relative_humidity : array_like, broadcasts [1]
        Over water, 0 to 1.5.

    Returns
    -------
    ndarray, broadcast shape [1]
        The probability of snow, used as its share.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    1 / (1 + exp(-10.04 + 1.41 T + 0.09 RH)), T in degrees Celsius and RH in per cent:
    the bivariate logistic model of Jennings et al. (2018) [1]_ (coefficients from memory). Drier
    air keeps snow at higher temperatures, because falling snow cools to the wet bulb.

    References
    ----------
    .. [1] K. S. Jennings, T. S. Winchell, B. Livneh and N. P. Molotch (2018),
       "Spatial variation of the rain-snow temperature threshold across the
       Northern Hemisphere", Nature Communications 9, 1148.

    Examples
    --------
    >>> snow_share_jennings_2018([273.15, 275.15], 0.8).round(2)
    array([0.94, 0.5 ])
    """
    t = within("temperature", temperature, 200.0, 330.0, "K", _KELVIN)
    rh = within("relative_humidity", relative_humidity, 0.0, 1.5, "1", "It is a share, not per cent.")
    # divided by 1 + exp(x), written so that no power overflows
    return np.asarray(0.5 * (1.0 - np.tanh(0.5 * (-10.04 + 1.41 * (t - MELTING_POINT) + 9.0 * rh))))


def snow_by_height(
    air: IncomingAir,
    lowest: float,
    highest: float,
    *,
    threshold: float | None = None,
    jennings: bool = False,
) -> SnowByHeight:
    """Share of snow by the height of the ground, in the air of the column.

    Parameters
    ----------
    air : IncomingAir
        One column, fields of shape (nz,).
    lowest, highest : float [m above sea level]
        Range of the ground; from 3000 m below the column's ground to its top.
    threshold : float, optional [K]
        Of the wet bulb, as in `snow_share_from_wet_bulb`.
    jennings : bool
        True: `snow_share_jennings_2018` instead of the wet bulb.

    Returns
    -------
    SnowByHeight

    Raises
    ------
    OutOfRangeError
        If a value is out of range.

    Notes
    -----
    Air at the ground is taken to be that of the column at its height. Assumed for map and
    catchments; along a transect the crossing's own air, cooled by what melts and evaporates in it, is better.

    Examples
    --------
    >>> from orolift.air.column_build import air_from_station
    >>> found = snow_by_height(air_from_station(0.0, 1.0e5, 283.15, 0.0077, 15.0, 4.7), 0.0, 3000.0)
    >>> print(round(found.snow_level, -2), round(found.melting_level, -2))
    1400.0 1500.0
    """
    count = max(int(np.ceil((highest - lowest) / _SPACING)), 1) + 1
    height = np.linspace(lowest, max(highest, lowest + 1.0), count)
    here = interpolated(air, height)
    if jennings:
        humidity = relative_humidity_from_mixing_ratio(here.pressure, here.temperature, here.vapour)
        share = snow_share_jennings_2018(here.temperature, np.clip(humidity, 0.0, 1.5))
    else:
        wet_bulb = wet_bulb_from_mixing_ratio(here.pressure, here.temperature, here.vapour)
        share = snow_share_from_wet_bulb(wet_bulb, threshold=threshold)
    return SnowByHeight(height, share, _level(height, share), float(wet_bulb_zero_level(air)))


def _level(height: NDArray[np.float64], share: NDArray[np.float64]) -> float:
    """Height above which more than half is snow; the highest one if that is nowhere so."""
    rain = np.flatnonzero(share < _HALF)
    if rain.size == 0:
        return float(height[0])
    i = int(rain[-1])
    if i == height.size - 1:
        return float(height[-1])
    return float(height[i] + (_HALF - share[i]) / (share[i + 1] - share[i]) * (height[i + 1] - height[i]))


def snow_on_ground(elevation: NDArray[np.float64], by_height: SnowByHeight) -> NDArray[np.float64]:
    """Share of snow on every cell of a map.

    Parameters
    ----------
    elevation : ndarray, any shape [m above sea level]
        NaN where missing.
    by_height : SnowByHeight
        Over the range of the ground; beyond its ends the end values hold.

    Returns
    -------
    ndarray, shape of `elevation` [1]
        NaN where missing.
    """
    return np.asarray(np.interp(elevation, by_height.height, by_height.share))
