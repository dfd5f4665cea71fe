"""What counts as descending warm dry air: one definition for a crossing, and for each of its members."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

LEAST_WARMING = 1.0
"""Warming [K] from which lee air counts as warm: two thirds of the least error of the method; a judgement."""
HALFWAY = 0.5
"""Share of the way from the potential temperature of the incoming air at the height of a site to that at the crest
which air come down from the crest has made at least; what is short of the whole is mixing and low air; a judgement."""


def warm_and_dry(
    theta: ArrayLike,
    beside: ArrayLike,
    crest: ArrayLike,
    *,
    warming: ArrayLike,
    humidity: ArrayLike,
    humidity_beside: ArrayLike,
) -> NDArray[np.bool_]:
    """Whether air behind a crest is descending warm dry air, as far as its own values say.

    Parameters
    ----------
    theta : array_like, any shape [K]
        Potential temperature at the site.
    beside, crest : array_like, broadcasts [K]
        That of the incoming air at the height of the site, and at the crest.
    warming : array_like, broadcasts [K]
        Temperature at the site minus that of the incoming air at its height.
    humidity, humidity_beside : array_like, broadcasts [1]
        Relative humidity at the site, and of the incoming air at its height.

    Returns
    -------
    ndarray of bool, broadcast shape
        False where a value is NaN.

    Notes
    -----
    True where the potential temperature is nearer to that at the crest than to that at the height of the site, the air
    is 1 K or more warmer than beside it and its relative humidity is lower. Both numbers are judgements.

    Examples
    --------
    >>> warm_and_dry([297.0, 293.0], 290.0, 300.0, warming=7.0, humidity=0.3, humidity_beside=0.6)
    array([ True, False])
    """
    low, high = np.asarray(beside, np.float64), np.asarray(crest, np.float64)
    descended = np.asarray(theta, np.float64) >= low + HALFWAY * (high - low)
    warm = np.asarray(warming, np.float64) >= LEAST_WARMING
    return np.asarray(descended & warm & (np.asarray(humidity) < np.asarray(humidity_beside)))
