"""How much vapour the air holds: mixing ratio, specific humidity, partial pressure.

Two ideal gases. Mixing ratios are per kilogram of dry air.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.constants import EPSILON
from orolift.errors import OutOfRangeError

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

_PASCALS = "orolift works in pascals; multiply hectopascals by 100."
_PER_KILOGRAM = "Give kilograms per kilogram; divide grams per kilogram by 1000."


def mixing_ratio_from_vapour_pressure(pressure: ArrayLike, vapour_pressure: ArrayLike) -> NDArray[np.float64]:
    """Mixing ratio of air whose vapour has a given partial pressure.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Air pressure, 100 Pa to 120000 Pa.
    vapour_pressure : array_like, broadcasts with `pressure` [Pa]
        Partial pressure of the vapour, 0 up to half the pressure.

    Returns
    -------
    ndarray, broadcast shape [kg kg-1 of dry air]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    r = epsilon e / (p - e), two ideal gases; definition of WMO-No. 8 [1]_,
    annex 4.A. The enhancement of saturation by the dry air (0.3 to 0.5 %) is
    left out, here and everywhere else in orolift.

    References
    ----------
    .. [1] WMO (2018), "Guide to Instruments and Methods of Observation",
       WMO-No. 8, volume I, chapter 4.

    Examples
    --------
    >>> mixing_ratio_from_vapour_pressure(1.0e5, 1000.0).round(5)
    np.float64(0.00628)
    """
    p = within("pressure", pressure, 100.0, 1.2e5, "Pa", _PASCALS)
    e = within("vapour_pressure", vapour_pressure, 0.0, 6.0e4, "Pa", _PASCALS)
    if np.any(e > 0.5 * p):
        count = f"{int(np.sum(e > 0.5 * p))} of {np.broadcast(e, p).size}"
        raise OutOfRangeError(
            f"vapour_pressure: {count} values exceed half the pressure; "
            "no air in the atmosphere holds so much. Check the units of pressure and vapour_pressure (both Pa)."
        )
    return EPSILON * e / (p - e)


def vapour_pressure_from_mixing_ratio(pressure: ArrayLike, mixing_ratio: ArrayLike) -> NDArray[np.float64]:
    """Partial pressure of the vapour in air of a given mixing ratio.

    The inverse of `mixing_ratio_from_vapour_pressure`.

    Parameters
    ----------
    pressure : array_like, any shape [Pa]
        Air pressure, 100 Pa to 120000 Pa.
    mixing_ratio : array_like, broadcasts with `pressure` [kg kg-1 of dry air]
        0 to 0.622.

    Returns
    -------
    ndarray, broadcast shape [Pa]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside its range.

    Notes
    -----
    e = p r / (epsilon + r), WMO-No. 8 [1]_, annex 4.A.

    References
    ----------
    .. [1] WMO (2018), "Guide to Instruments and Methods of Observation",
       WMO-No. 8, volume I, chapter 4.

    Examples
    --------
    >>> vapour_pressure_from_mixing_ratio(1.0e5, 0.01).round(1)
    np.float64(1582.3)
    """
    p = within("pressure", pressure, 100.0, 1.2e5, "Pa", _PASCALS)
    r = within("mixing_ratio", mixing_ratio, 0.0, 0.622, "kg/kg", _PER_KILOGRAM)
    return np.asarray(p * r / (EPSILON + r), dtype=np.float64)


def specific_humidity_from_mixing_ratio(mixing_ratio: ArrayLike) -> NDArray[np.float64]:
    """Vapour per kilogram of moist air, from vapour per kilogram of dry air.

    Parameters
    ----------
    mixing_ratio : array_like, any shape [kg kg-1 of dry air]
        0 to 0.622.

    Returns
    -------
    ndarray, shape of `mixing_ratio` [kg kg-1 of moist air]
        Condensate is not counted in the moist air.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside 0 to 0.622.

    Notes
    -----
    q = r / (1 + r).

    Examples
    --------
    >>> specific_humidity_from_mixing_ratio(0.01).round(6)
    np.float64(0.009901)
    """
    r = within("mixing_ratio", mixing_ratio, 0.0, 0.622, "kg/kg", _PER_KILOGRAM)
    return np.asarray(r / (1.0 + r), dtype=np.float64)


def mixing_ratio_from_specific_humidity(specific_humidity: ArrayLike) -> NDArray[np.float64]:
    """Vapour per kilogram of dry air, from vapour per kilogram of moist air.

    The inverse of `specific_humidity_from_mixing_ratio`.

    Parameters
    ----------
    specific_humidity : array_like, any shape [kg kg-1 of moist air]
        0 to 0.38.

    Returns
    -------
    ndarray, shape of `specific_humidity` [kg kg-1 of dry air]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside 0 to 0.38.

    Notes
    -----
    r = q / (1 - q).

    Examples
    --------
    >>> mixing_ratio_from_specific_humidity(0.01).round(6)
    np.float64(0.010101)
    """
    q = within("specific_humidity", specific_humidity, 0.0, 0.3835, "kg/kg", _PER_KILOGRAM)
    return np.asarray(q / (1.0 - q), dtype=np.float64)
