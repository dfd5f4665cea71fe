"""Units of CF variables, to SI."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.constants import GRAVITY
from orolift.errors import DataFileError

if TYPE_CHECKING:
    from numpy.typing import NDArray

Factors = dict[str, tuple[float, float]]
"""SI value = value x first + second, by unit."""


def _scaled(names: dict[str, float]) -> Factors:
    """Factors of units without an offset; several spellings of one stand in one key, apart by commas."""
    return {name.strip(): (factor, 0.0) for joined, factor in names.items() for name in joined.split(",")}


_TEMPERATURE: Factors = {
    **_scaled({"K, kelvin": 1.0}),
    **dict.fromkeys(
        ("degC", "deg_C", "degree_C", "degrees_C", "celsius", "degree_Celsius", "degrees_Celsius"), (1.0, 273.15)
    ),
    "degF": (5.0 / 9.0, 273.15 - 32.0 * 5.0 / 9.0),
}
_PRESSURE = _scaled({"Pa, pascal": 1.0, "hPa, mbar, mb, millibar, millibars": 100.0, "kPa": 1000.0})
_HEIGHT = _scaled({"m, metre, metres, meter, meters, gpm": 1.0, "dam": 10.0, "km": 1000.0, "ft": 0.3048})
_GEOPOTENTIAL = _scaled({"m2 s-2, m**2 s**-2, m^2 s^-2, m2/s2, m2s-2, J kg-1": 1.0, "m, gpm": float(GRAVITY)})
_WIND = _scaled(
    {
        "m s-1, m s**-1, m s^-1, m/s, ms-1, meter second-1": 1.0,
        "knot, knots, kt": 1852.0 / 3600.0,
        "km h-1, km/h": 1.0 / 3.6,
    }
)
_RATIO = _scaled({"1, kg kg-1, kg kg**-1, kg/kg": 1.0, "g kg-1, g kg**-1, g/kg": 1.0e-3})
_SHARE = _scaled({"1": 1.0, "%, percent": 0.01})

KINDS: dict[str, tuple[str, Factors, float, float]] = {
    "temperature": ("temperature", _TEMPERATURE, 160.0, 335.0),
    "dew_point": ("temperature", _TEMPERATURE, 130.0, 320.0),
    "pressure": ("pressure", _PRESSURE, 1.0, 1.1e5),
    "surface_pressure": ("pressure", _PRESSURE, 3.0e4, 1.1e5),
    "height": ("height", _HEIGHT, -2000.0, 1.0e5),
    "surface_altitude": ("height", _HEIGHT, -500.0, 9000.0),
    "geopotential": ("geopotential", _GEOPOTENTIAL, -2.0e4, 1.0e6),
    "surface_geopotential": ("geopotential", _GEOPOTENTIAL, -5.0e3, 9.0e4),
    "eastward": ("wind", _WIND, -150.0, 150.0),
    "northward": ("wind", _WIND, -150.0, 150.0),
    "specific_humidity": ("humidity", _RATIO, -1.0e-3, 0.06),
    "mixing_ratio": ("humidity", _RATIO, -1.0e-3, 0.06),
    "relative_humidity": ("humidity", _SHARE, -0.05, 1.6),
}
"""Kind of each quantity, the factors of its units, and its range in SI."""


def converted_from(values: NDArray[np.float64], units: str, key: str, where: str) -> NDArray[np.float64]:
    """Values of a CF variable in SI.

    Parameters
    ----------
    values : ndarray of float64
        NaN where missing.
    units : str
        Its attribute ``units``.
    key : str
        Quantity, a key of `KINDS`.
    where : str
        File and variable, for messages.

    Returns
    -------
    ndarray of float64 [SI]

    Raises
    ------
    DataFileError
        If the unit is not known, or values lie outside the range of the quantity.

    Examples
    --------
    >>> converted_from(np.array([10.0]), "degC", "temperature", "m.nc: ta")
    array([283.15])
    """
    kind, known, low, high = KINDS[key]
    unit = str(units).strip()
    factor = known.get(unit, known.get(unit.lower()))
    if factor is None:
        raise DataFileError(f"{where}: unit '{unit}' of a {kind} is not known. Known: {', '.join(known)}.")
    out = values * factor[0] + factor[1]
    wrong = np.isfinite(out) & ((out < low) | (out > high))
    if wrong.any():
        raise DataFileError(
            f"{where}: {int(wrong.sum())} of {out.size} values lie outside {low:g} to {high:g} in SI units (first: "
            f"{float(out[wrong].ravel()[0]):g}). Is its unit '{unit}' right?"
        )
    return out
