"""Height of the sun."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray


def sun_height(time: ArrayLike, longitude: ArrayLike, latitude: ArrayLike) -> NDArray[np.float64]:
    """Angle of the sun above the horizon, without refraction.

    Parameters
    ----------
    time : array_like, any shape [s]
        Seconds since 1970-01-01T00:00:00 UTC; 1950 to 2050.
    longitude, latitude : array_like, broadcast with `time` [degrees east, degrees north]
        -180 to 360, -90 to 90.

    Returns
    -------
    ndarray, broadcast shape [rad]
        Negative below the horizon.

    Raises
    ------
    OutOfRangeError
        If a value is outside its range.

    Notes
    -----
    Low-precision coordinates of the sun of the Astronomical Almanac: mean
    longitude 280.460 + 0.9856474 n, mean anomaly 357.528 + 0.9856003 n degrees,
    ecliptic longitude L + 1.915 sin g + 0.020 sin 2g, obliquity 23.439 - 4e-7 n, n days
    from 2000-01-01T12; sidereal time 6.697375 + 0.0657098242 n + UT hours. As
    in Michalsky (1988) [1]_, good to 0.01 degrees from 1950 to 2050 (coefficients from memory).

    References
    ----------
    .. [1] J. J. Michalsky (1988), "The Astronomical Almanac's algorithm for
       approximate solar position (1950-2050)", Solar Energy 40, 227-235.

    Examples
    --------
    Near noon of an equinox on the equator at Greenwich, and at midnight:

    >>> [round(float(np.degrees(sun_height(t, 0.0, 0.0)))) for t in (1710936450.0, 1710893250.0)]
    [90, -90]
    """
    seconds = within("time", time, -6.4e8, 2.6e9, "s", "Give seconds since 1970, 1950 to 2050.")
    east = within("longitude", longitude, -180.0, 360.0, "degrees")
    north = np.radians(within("latitude", latitude, -90.0, 90.0, "degrees"))
    days = seconds / 86400.0 - 10957.5
    mean_longitude = np.radians((280.460 + 0.9856474 * days) % 360.0)
    anomaly = np.radians((357.528 + 0.9856003 * days) % 360.0)
    ecliptic = mean_longitude + np.radians(1.915 * np.sin(anomaly) + 0.020 * np.sin(2.0 * anomaly))
    obliquity = np.radians(23.439 - 4e-7 * days)
    ascension = np.arctan2(np.cos(obliquity) * np.sin(ecliptic), np.cos(ecliptic))
    declination = np.arcsin(np.sin(obliquity) * np.sin(ecliptic))
    hours = (6.697375 + 0.0657098242 * days + (seconds / 3600.0) % 24.0) % 24.0
    hour_angle = np.radians(15.0 * hours + east) - ascension
    return np.asarray(
        np.arcsin(np.sin(north) * np.sin(declination) + np.cos(north) * np.cos(declination) * np.cos(hour_angle))
    )
