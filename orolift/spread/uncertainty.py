"""How uncertain each input of a crossing is, and members drawn from that by a Latin hypercube."""

from __future__ import annotations

from dataclasses import dataclass
from math import radians
from statistics import NormalDist
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]

STANDARD = NormalDist()
LEAST = 1e-8
"""Distance from 0 and 1 that numbers of the hypercube keep, for the quantiles of a normal distribution."""


@dataclass(frozen=True)
class Uncertainty:
    """One standard deviation of each input; 0 leaves it as it is. All of them are judgements.

    The defaults are those of a sounding; other kinds of source are wider, see `orolift.sources.spread_model`.

    Attributes
    ----------
    temperature : float [K]
        Of the whole incoming column.
    dew_point : float [K]
        Of the whole incoming column; it stays at or below the temperature.
    pressure : float [Pa]
        At the ground of the incoming column.
    wind : float [1]
        Of the wind speed, as a share of it; log-normal.
    wind_from : float [rad]
        Of the direction the wind comes from; the line over the range stays where it is.
    lapse_rate : float [K m-1]
        Of the lapse rate in the lowest 5 km.
    going_round_share : float [1]
        Normal; what falls beyond 0 or 0.8 is put there.
    critical_value : float [1]
        Log-normal, cut at 0.75 and 3.
    cloud_time, fall_time : float [1]
        As shares of them; log-normal.
    removed_share : float [1]
        Of a prescribed share, normal, cut at 0 and 1.
    mixing_depth : float [1]
        As a share of it; log-normal.
    surface_heat : float [1]
        Of the heat from the ground, as a share of it; log-normal.
    liquid_cloud : float [1]
        Share of the members in which condensate does not freeze.
    lee_temperature : float [K]
        Of the air lying in the lee, where it is known; a pool top moves by 100 m for each of them.
    model_temperature, model_vapour : float or None [K], [kg per kg of dry air]
        Error of the method; None takes `orolift.crossing.model_error.model_error`.
    """

    temperature: float = 1.0
    dew_point: float = 1.5
    pressure: float = 50.0
    wind: float = 0.15
    wind_from: float = radians(10.0)
    lapse_rate: float = 0.3e-3
    going_round_share: float = 0.2
    critical_value: float = 0.5
    cloud_time: float = 0.5
    fall_time: float = 0.5
    removed_share: float = 0.1
    mixing_depth: float = 0.5
    surface_heat: float = 0.4
    liquid_cloud: float = 0.0
    lee_temperature: float = 1.0
    model_temperature: float | None = None
    model_vapour: float | None = None


MOST = {
    "temperature": (15.0, "K"),
    "dew_point": (20.0, "K"),
    "pressure": (5000.0, "Pa"),
    "wind": (2.0, "1"),
    "wind_from": (radians(90.0), "rad"),
    "lapse_rate": (5e-3, "K/m"),
    "going_round_share": (1.0, "1"),
    "critical_value": (3.0, "1"),
    "cloud_time": (2.0, "1"),
    "fall_time": (2.0, "1"),
    "removed_share": (1.0, "1"),
    "mixing_depth": (2.0, "1"),
    "surface_heat": (2.0, "1"),
    "liquid_cloud": (1.0, "1"),
    "lee_temperature": (15.0, "K"),
}
"""Largest standard deviation of each input that makes sense, with its unit; a judgement."""
INPUTS = tuple(MOST)
"""Inputs, in the order of the columns of `latin_hypercube`."""
METHOD = ("model_temperature", "model_vapour", "model_wind")
"""What the method itself gets wrong, in the columns after those."""
COLUMNS = (*INPUTS, *METHOD)


def checked(uncertainty: Uncertainty) -> Uncertainty:
    """The same, if every standard deviation is in its range.

    Raises
    ------
    OutOfRangeError
        If one is negative or too large.
    """
    method = {"model_temperature": (15.0, "K"), "model_vapour": (0.02, "kg/kg")}
    for name, (most, unit) in (MOST | method).items():
        value = getattr(uncertainty, name)
        if value is not None:
            within(name, value, 0.0, most, unit, "It is one standard deviation; 0 leaves it out.")
    return uncertainty


def latin_hypercube(members: int, columns: int, seed: int) -> Array:
    """Numbers between 0 and 1, one in each of as many equal parts as there are members, in each column.

    Parameters
    ----------
    members : int
        1 or more.
    columns : int
    seed : int
        0 or more; the same seed gives the same numbers.

    Returns
    -------
    ndarray (members, columns)
        Between 0 and 1, neither included.

    Notes
    -----
    `scipy.stats.qmc.LatinHypercube` (McKay, Beckman and Conover 1979, Technometrics 21, 239-245). Where there are
    more members than columns, the order in the columns is that of normal scores whose correlation is taken out (Iman
    and Conover 1982, Communications in Statistics B 11, 311-334): few members then show what an input does and not what
    chance put beside it.

    Examples
    --------
    >>> np.sort(np.floor(4 * latin_hypercube(4, 2, seed=1)), axis=0)
    array([[0., 0.],
           [1., 1.],
           [2., 2.],
           [3., 3.]])
    """
    from scipy.stats.qmc import LatinHypercube

    sample = LatinHypercube(columns, seed=np.random.default_rng(seed)).random(members)
    if members > columns:
        sample = np.take_along_axis(np.sort(sample, axis=0), _uncorrelated(sample), axis=0)
    return np.asarray(np.clip(sample, LEAST, 1.0 - LEAST))


def _uncorrelated(sample: Array) -> NDArray[np.intp]:
    """Ranks for each column that leave hardly any correlation between columns, as near to the given as can be."""
    count = sample.shape[0]
    scores = normal((np.argsort(np.argsort(sample, axis=0), axis=0) + 0.5) / count)
    mixed = np.linalg.cholesky(np.corrcoef(scores, rowvar=False))
    free = np.linalg.solve(mixed, scores.T).T
    return np.argsort(np.argsort(free, axis=0), axis=0)


def normal(level: Array) -> Array:
    """Standard normal numbers below which the given shares lie.

    Parameters
    ----------
    level : ndarray, any shape [1]
        Between 0 and 1, neither included.

    Returns
    -------
    ndarray, same shape

    Examples
    --------
    >>> normal(np.array([0.1, 0.5])).round(4)
    array([-1.2816,  0.    ])
    """
    return np.array([STANDARD.inv_cdf(p) for p in np.ravel(level)]).reshape(np.shape(level))


def log_normal(level: Array, deviation: float) -> Array:
    """Factors around 1, their median, with a relative standard deviation.

    Parameters
    ----------
    level : ndarray, any shape [1]
    deviation : float [1]
        Standard deviation over mean.

    Returns
    -------
    ndarray, same shape [1]
        Above 0.
    """
    return np.asarray(np.exp(np.sqrt(np.log1p(deviation**2)) * normal(level)))


def cut_normal(level: Array, center: Array, deviation: float, low: float, high: float) -> Array:
    """Normal numbers of which only those between two limits are taken.

    Parameters
    ----------
    level : ndarray (m,) [1]
    center : ndarray (m,)
        Between the limits.
    deviation : float
        Standard deviation before the cut; 0 gives the center.
    low, high : float

    Returns
    -------
    ndarray (m,)

    Examples
    --------
    >>> cut_normal(np.array([0.01, 0.5, 0.99]), np.full(3, 0.4), 0.2, 0.0, 0.8).round(2)
    array([0.03, 0.4 , 0.77])
    """
    if deviation == 0.0:
        return np.array(center, dtype=np.float64)
    first = np.array([STANDARD.cdf((low - c) / deviation) for c in center])
    last = np.array([STANDARD.cdf((high - c) / deviation) for c in center])
    inside = np.clip(first + level * (last - first), 1e-12, 1.0 - 1e-12)
    return np.clip(center + deviation * normal(inside), low, high)
