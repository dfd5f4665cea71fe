"""Equilibrium moisture of fine dead fuel and the fire weather index built on it."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.constants import MELTING_POINT
from orolift.fire.dryness import fire_humidity, fire_temperature, fire_wind

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

_MILE_PER_HOUR = 0.44704
"""[m s-1] exact: NIST SP 811 (2008) Appendix B."""
HIGHEST_INDEX = 100.0
"""Value at which the Fosberg index is reported when it is higher."""
HIGHEST_DROUGHT = 800.0
"""Highest Keetch-Byram drought index: eight inches of missing water, in hundredths of an inch."""


def equilibrium_fuel_moisture(temperature: ArrayLike, relative_humidity: ArrayLike) -> NDArray[np.float64]:
    """Moisture that fine dead fuel comes to in air that stays as it is.

    Grass and needles come near it within about an hour. `orolift.fire.fine_fuel` follows a fuel that remembers
    yesterday.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        173.15 to 338.15 K.
    relative_humidity : array_like, broadcasts with `temperature` [1]
        0 to 1.

    Returns
    -------
    ndarray, broadcast shape [kg of water per kg of dry fuel]
        0 to 0.3.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    Simard (1968) [1]_, in the form Fosberg (1978) used; with T in degrees Fahrenheit and h in per cent::

        h < 10:        m = 0.03229 + 0.281073 h - 0.000578 h T
        10 <= h <= 50: m = 2.22749 + 0.160107 h - 0.01478 T
        h > 50:        m = 21.0606 + 0.005565 h^2 - 0.00035 h T - 0.483199 h

    and kept within 0 to 30 per cent. The three lines do not meet: at 10 % the moisture jumps up by 0.4, at 50 % by
    0.4 per cent. It knows neither rain, dew and sun on the fuel nor its kind; wetting and drying fuel differ by
    some 2 per cent. Below freezing the fit is carried on beyond the wood it was made for.

    References
    ----------
    .. [1] A. J. Simard (1968), "The moisture content of forest fuels - I", Forest Fire Research Institute, Ottawa,
       Information Report FF-X-14.

    Examples
    --------
    >>> equilibrium_fuel_moisture(303.15, [0.05, 0.2, 0.8]).round(4)
    array([0.0119, 0.0416, 0.1561])
    """
    t = 1.8 * (fire_temperature(temperature) - MELTING_POINT) + 32.0
    h = 100.0 * fire_humidity(relative_humidity)
    driest = 0.03229 + 0.281073 * h - 0.000578 * h * t
    middle = 2.22749 + 0.160107 * h - 0.01478 * t
    dampest = 21.0606 + 0.005565 * h**2 - 0.00035 * h * t - 0.483199 * h
    per_cent = np.where(h < 10.0, driest, np.where(h <= 50.0, middle, dampest))
    return np.asarray(np.clip(per_cent, 0.0, 30.0) / 100.0)[()]


def fosberg_index(
    temperature: ArrayLike, relative_humidity: ArrayLike, wind: ArrayLike, *, capped: bool = True
) -> NDArray[np.float64]:
    """Fosberg Fire Weather Index: how fast and hot a grass fire could run, from this moment's air and wind alone.

    Parameters
    ----------
    temperature : array_like, any shape [K]
        173.15 to 338.15 K.
    relative_humidity : array_like, broadcasts [1]
        0 to 1.
    wind : array_like, broadcasts [m s-1]
        Sustained, at 10 m or 20 feet, 0 to 130 m/s. Never the wind aloft.
    capped : bool
        Values above 100 as 100, as the index is reported; False gives them as they are.

    Returns
    -------
    ndarray, broadcast shape [1]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    Fosberg (1978) [1]_: with m in per cent from `equilibrium_fuel_moisture` and U in miles an hour::

        eta  = 1 - 2 (m/30) + 1.5 (m/30)^2 - 0.5 (m/30)^3
        FFWI = eta sqrt(1 + U^2) / 0.3002

    so that no moisture and 30 miles an hour give 100. It has no memory: neither drought nor last night's rain is in
    it, nor the kind of fuel, live moisture, slope.

    References
    ----------
    .. [1] M. A. Fosberg (1978), "Weather in wildland fire management: the fire weather index", Conference on
       Sierra Nevada Meteorology, American Meteorological Society, 1-4.

    Examples
    --------
    >>> fosberg_index(299.817, 0.2, 11.176).round(1)
    np.float64(62.1)
    """
    part = 100.0 * equilibrium_fuel_moisture(temperature, relative_humidity) / 30.0
    mph = fire_wind(wind) / _MILE_PER_HOUR
    eta = 1.0 - 2.0 * part + 1.5 * part**2 - 0.5 * part**3
    index = eta * np.sqrt(1.0 + mph**2) / 0.3002
    return np.asarray(np.minimum(index, HIGHEST_INDEX) if capped else index)[()]


def fosberg_index_with_drought(index: ArrayLike, drought_index: ArrayLike) -> NDArray[np.float64]:
    """Fosberg index with the dryness of the ground, by the drought index of Keetch and Byram.

    Parameters
    ----------
    index : array_like, any shape [1]
        `fosberg_index` without the cap.
    drought_index : array_like, broadcasts with `index` [hundredths of an inch]
        Keetch-Byram drought index, 0 (wet) to 800.

    Returns
    -------
    ndarray, broadcast shape [1]
        0.72 to 2 times `index`, without a cap.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    Goodrick (2002) [1]_: ``(0.000002 K^2 + 0.72) FFWI``; equation from memory.

    References
    ----------
    .. [1] S. L. Goodrick (2002), "Modification of the Fosberg fire weather index to include drought",
       Int. J. Wildland Fire 11, 205-211.

    Examples
    --------
    >>> fosberg_index_with_drought(50.0, [0.0, 800.0])
    array([ 36., 100.])
    """
    drought = within(
        "drought_index", drought_index, 0.0, HIGHEST_DROUGHT, "hundredths of an inch", "Give the Keetch-Byram index."
    )
    raw = within("index", index, 0.0, 1e4, "", "Give the Fosberg index without its cap.")
    return np.asarray((0.000002 * drought**2 + 0.72) * raw)[()]
