"""How much of the low air is stopped by a range."""

from __future__ import annotations

from enum import Enum
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.flow.profiles import checked_height, value_at

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

_LEVELS = 1001  # between base and crest: 3 m apart for a 3 km range


class Regime(Enum):
    """What a range does to the air that meets it, in the order of growing non-dimensional height.

    The thresholds are those of `regime`.
    """

    FLOWS_OVER = "flows over"
    STEEP_WAVES = "flows over with steep waves"
    PARTLY_BLOCKED = "partly blocked"
    BLOCKED = "blocked"


REGIME_LIMITS = (0.5, 0.85, 1.5)
"""Non-dimensional heights at which one regime gives way to the next; sources in `regime`."""
REGIME_UNCERTAINTY = 0.3
"""Give or take of each limit: spread of published thresholds, from memory (Smith 1989; Bauer et al. 2000)."""


def regime(nondimensional_height: float) -> Regime:
    """What the air does at the range, in words.

    Parameters
    ----------
    nondimensional_height : float [1]
        ``N h / U``, at least 0; infinity is blocked.

    Returns
    -------
    Regime

    Raises
    ------
    OutOfRangeError
        If it is negative or NaN.

    Notes
    -----
    Limits: 0.5, below which linear theory serves (a convention); 0.85, a wave over
    a bell ridge overturns (Long's equation; Huppert and Miles 1969, J. Fluid
    Mech. 35, 481-496; 0.75 for a Gaussian ridge in Pierrehumbert and Wyman 1985);
    1.5, the low air upwind comes to rest (Pierrehumbert and Wyman 1985, J. Atmos.
    Sci. 42, 977-1003). Real ranges have been found to block from 1.5 to 1.8.
    Give or take 0.3 each: `possible_regimes`.

    Examples
    --------
    >>> regime(1.1).value
    'partly blocked'
    """
    value = float(within("nondimensional_height", nondimensional_height, 0.0, np.inf, "", "It is N h / U."))
    return list(Regime)[int(np.searchsorted(REGIME_LIMITS, value, side="right"))]


def possible_regimes(nondimensional_height: float) -> tuple[Regime, ...]:
    """Regimes that the uncertainty of the thresholds leaves open.

    Parameters
    ----------
    nondimensional_height : float [1]
        ``N h / U``, at least 0.

    Returns
    -------
    tuple of Regime
        One or more, in the order of `Regime`.

    Raises
    ------
    OutOfRangeError
        If it is negative or NaN.

    Examples
    --------
    >>> [one.value for one in possible_regimes(1.4)]
    ['partly blocked', 'blocked']
    """
    lowest = regime(max(nondimensional_height - REGIME_UNCERTAINTY, 0.0))
    highest = regime(nondimensional_height + REGIME_UNCERTAINTY)
    order = list(Regime)
    return tuple(order[order.index(lowest) : order.index(highest) + 1])


def dividing_height(
    height: ArrayLike, n_squared: ArrayLike, wind: ArrayLike, crest: ArrayLike, *, critical_value: ArrayLike = 1.0
) -> NDArray[np.float64]:
    """Height of the streamline that just reaches the crest; lower air lacks the energy.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        Above sea level, strictly increasing; the first is the base of the range.
    n_squared : array_like, shape (..., nz) [s-2]
        Sign kept: unstable layers help the air up.
    wind : array_like, shape (..., nz) [m s-1]
        Across the range, positive toward it; negative counts as calm.
    crest : array_like, shape (...) [m]
        Above sea level.
    critical_value : array_like, shape (...) [1]
        Non-dimensional height at which a uniform column starts to be blocked:
        1 is Sheppard's; real ranges block from about 1.5. 0.01 to 100.

    Returns
    -------
    ndarray, shape (...) [m]
        Above sea level; the first height when nothing is blocked or the crest is not above it.

    Raises
    ------
    OutOfRangeError
        If heights do not increase or the critical value is outside its range.

    Notes
    -----
    Sheppard (1956) [1]_, Snyder et al. (1985) [2]_: the highest level z below the crest
    at which ``c^2 U^2 / 2`` is less than the integral of ``N^2 (h - z')`` from z to
    the crest h. Uniform column: ``h - c U / N``. The condition is compared as
    ``c U`` against the root of twice the integral, on levels about 3 m apart, and
    the crossing is found between them by a straight line: exact for uniform N
    with linear wind, and monotone, so that less wind or more stability never
    lowers it. Necessary, not sufficient, for long ridges.

    References
    ----------
    .. [1] P. A. Sheppard (1956), "Airflow over mountains", Q. J. R. Meteorol.
       Soc. 82, 528-529.
    .. [2] W. H. Snyder et al. (1985), "The structure of strongly stratified
       flow over hills: dividing-streamline concept", J. Fluid Mech. 152, 249-288.

    Examples
    --------
    >>> dividing_height([0.0, 4000.0], [1e-4, 1e-4], [10.0, 10.0], 2000.0)
    array(1000.)
    """
    factor = within("critical_value", critical_value, 0.01, 100.0, "", "It is a number near 1.")
    level, stiffness, speed = _below_crest(height, n_squared, wind, crest)
    arm = level[..., -1:] - level
    energy = _from_crest_down(level, stiffness * arm)
    lacking = np.sqrt(2.0 * np.maximum(energy, 0.0)) - factor[..., None] * np.maximum(speed, 0.0)
    return _highest_positive(level, lacking)


def blocked_top_lott_miller_1997(
    height: ArrayLike, n_squared: ArrayLike, wind: ArrayLike, crest: ArrayLike, *, critical_value: ArrayLike = 0.5
) -> NDArray[np.float64]:
    """Top of the blocked layer by the phase criterion of weather models.

    Use `dividing_height`; this one is the upper end of the bracket.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        Above sea level, strictly increasing; the first is the base of the range.
    n_squared : array_like, shape (..., nz) [s-2]
        Negative counts as 0.
    wind : array_like, shape (..., nz) [m s-1]
        Across the range; below 0.1 m/s counts as 0.1 m/s.
    crest : array_like, shape (...) [m]
        Above sea level.
    critical_value : array_like, shape (...) [1]
        0.01 to 100. The default 0.5 is from memory, as is its tuned range 0.4 to 1.

    Returns
    -------
    ndarray, shape (...) [m]
        Above sea level; the first height when nothing is blocked.

    Raises
    ------
    OutOfRangeError
        If heights do not increase or the critical value is outside its range.

    Notes
    -----
    Lott and Miller (1997) [1]_: highest level from which the integral of N/U up to the
    crest reaches the critical value. Uniform column: ``h - c U / N``.

    References
    ----------
    .. [1] F. Lott and M. J. Miller (1997), "A new subgrid-scale orographic drag
       parametrization", Q. J. R. Meteorol. Soc. 123, 101-127.

    Examples
    --------
    >>> blocked_top_lott_miller_1997([0.0, 4000.0], [1.44e-4] * 2, [15.0] * 2, 3000.0).round(6)
    np.float64(2375.0)
    """
    factor = within("critical_value", critical_value, 0.01, 100.0, "", "It is a number near 1.")
    level, stiffness, speed = _below_crest(height, n_squared, wind, crest)
    phase = _from_crest_down(level, np.sqrt(np.maximum(stiffness, 0.0)) / np.maximum(speed, 0.1))
    return _highest_positive(level, phase - factor[..., None])


def counterflow_top(height: ArrayLike, wind: ArrayLike, crest: ArrayLike) -> NDArray[np.float64]:
    """Highest level below the crest at which the air is calm or moves away from the range.

    Such air and all below it belongs to the blocked layer: take the higher of
    this and `dividing_height`, and say so.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        Above sea level, strictly increasing; the first is the base of the range.
    wind : array_like, shape (..., nz) [m s-1]
        Across the range, positive toward it.
    crest : array_like, shape (...) [m]
        Above sea level.

    Returns
    -------
    ndarray, shape (...) [m]
        Above sea level; the first height where all air moves toward the range.

    Examples
    --------
    >>> counterflow_top([0.0, 1000.0], [-5.0, 5.0], 2000.0).round(6)
    np.float64(500.0)
    """
    level, _, speed = _below_crest(height, wind, wind, crest)
    return _highest_positive(level, np.where(speed == 0.0, 1e-9, -speed))


def _below_crest(
    height: ArrayLike, n_squared: ArrayLike, wind: ArrayLike, crest: ArrayLike
) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]:
    """Levels from base to crest, all the same share apart, with stability and wind there."""
    levels = checked_height(height)
    depth = np.maximum(np.asarray(crest, np.float64)[..., None] - levels[0], 0.0)
    level = levels[0] + depth * np.linspace(0.0, 1.0, _LEVELS)
    return level, value_at(levels, n_squared, level), value_at(levels, wind, level)


def _from_crest_down(level: NDArray[np.float64], values: NDArray[np.float64]) -> NDArray[np.float64]:
    """Integral from each level up to the highest one."""
    steps = np.diff(level, axis=-1) * 0.5 * (values[..., 1:] + values[..., :-1])
    above = np.cumsum(steps[..., ::-1], axis=-1)[..., ::-1]
    return np.concatenate([above, np.zeros((*above.shape[:-1], 1))], axis=-1)


def _highest_positive(level: NDArray[np.float64], values: NDArray[np.float64]) -> NDArray[np.float64]:
    """Highest level with positive values below it, between levels by a straight line; the lowest when there is none."""
    level, values = np.broadcast_arrays(level, values)
    below_crest = values[..., :-1] > 0.0
    last = below_crest.shape[-1] - 1
    index = last - np.argmax(below_crest[..., ::-1], axis=-1)[..., None]
    inner = np.take_along_axis(values, index, axis=-1)[..., 0]
    outer = np.minimum(np.take_along_axis(values, index + 1, axis=-1)[..., 0], 0.0)
    found = np.any(below_crest, axis=-1)
    gap = np.where(found, inner - outer, 1.0)
    foot = np.take_along_axis(level, index, axis=-1)[..., 0]
    step = np.take_along_axis(level, index + 1, axis=-1)[..., 0] - foot
    return np.asarray(np.where(found, foot + step * inner / gap, level[..., 0]))
