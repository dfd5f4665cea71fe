"""The wind a threshold means: its height above ground, sustained or gust, averaged over a time."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from orolift.checks import within
from orolift.errors import OutOfRangeError

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from orolift.fire.weather import SiteWeather

    Array = NDArray[np.float64]

LOWEST, HIGHEST = 2.0, 50.0
"""Heights above ground [m] a rule may mean: within the layer the logarithmic law holds for; a judgement."""
SUSTAINED_AVERAGE = (60.0, 3600.0)
"""Averaging times [s] of a sustained wind; the mean is the same, shorter means scatter more about it."""
GUST_AVERAGE = (1.0, 10.0)
"""Averaging times [s] of a gust that the gusts of 3 s stand for, within 5 %: Durst's curve in ASCE 7, from memory."""
SITE_HEIGHT = 10.0
"""Height [m] of the wind at a site."""

Kind = Literal["sustained", "gust"]
End = Literal["middle", "upper"]


@dataclass(frozen=True)
class WindMeant:
    """Which wind a rule means.

    Attributes
    ----------
    height : float [m above ground]
        2 to 50 m; 20 feet are 6.1 m.
    kind : 'sustained' or 'gust'
    averaging : float [s]
        60 to 3600 s of a sustained wind, 1 to 10 s of a gust.
    """

    height: float
    kind: Kind
    averaging: float


def checked_wind_meant(meant: WindMeant) -> WindMeant:
    """The same, checked.

    Raises
    ------
    OutOfRangeError
        If height or averaging time is out of range, or the kind is unknown.
    """
    within("height", meant.height, LOWEST, HIGHEST, "m", "Above the ground, of the wind a rule means.")
    if meant.kind not in {"sustained", "gust"}:
        raise OutOfRangeError(f"kind: '{meant.kind}' is neither 'sustained' nor 'gust'.")
    low, high = SUSTAINED_AVERAGE if meant.kind == "sustained" else GUST_AVERAGE
    within("averaging", meant.averaging, low, high, "s", f"That is the averaging time of a {meant.kind} wind.")
    return meant


def wind_as_meant(weather: SiteWeather, meant: WindMeant, roughness: ArrayLike, *, end: End = "middle") -> Array:
    """Wind of a site as a rule means it.

    Parameters
    ----------
    weather : SiteWeather, leading axes (...)
    meant : WindMeant
    roughness : array_like [m]
        Roughness length at the site, 0.0001 to 1.5, below the height that is meant.
    end : 'middle' or 'upper'
        Of the range: for a sustained wind the estimate or the most the methods give, for a gust the middle of its
        range or the most to be expected.

    Returns
    -------
    ndarray (...) [m s-1]
        NaN where no wind is known.

    Raises
    ------
    OutOfRangeError
        If height, kind, averaging time or roughness is out of range.

    Notes
    -----
    Mean wind at 10 m, moved to the height by the logarithmic law ``ln(z / z0) / ln(10 / z0)`` (WMO-No. 8). A gust
    keeps what it has above the mean, as the standard deviation hardly changes with height near the ground. The mean
    of a sustained wind does not depend on its averaging time. Over forest, 20 feet are meant above the trees, which
    the law does not know: give the roughness of the clearing where the station stands.

    Examples
    --------
    >>> from types import SimpleNamespace
    >>> site = SimpleNamespace(wind=np.array(10.0), gust_low=np.array(14.0), gust_high=np.array(16.0))
    >>> [float(wind_as_meant(site, WindMeant(6.1, kind, average), 0.03).round(2))
    ...  for kind, average in (("sustained", 600.0), ("gust", 3.0))]
    [9.15, 14.15]
    """
    checked_wind_meant(meant)
    z0 = within("roughness", roughness, 1e-4, 1.5, "m", "Give the roughness length in metres.")
    factor = np.log(meant.height / z0) / np.log(SITE_HEIGHT / z0)
    mean = np.asarray(weather.wind) * factor
    if meant.kind == "sustained":
        return np.asarray(np.asarray(weather.wind_high) * factor if end == "upper" else mean)
    top = weather.gust_high if end == "upper" else 0.5 * (weather.gust_low + weather.gust_high)
    return np.asarray(mean + (top - weather.wind))
