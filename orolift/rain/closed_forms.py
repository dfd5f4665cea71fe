"""Rain of simple terrain in closed form, to check the map against: bell ridge, line source, even slope."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from orolift.rain.parameters import RainParameters

    Array = NDArray[np.float64]


def wave_depth_number(parameters: RainParameters) -> float:
    """How the vapour's depth compares with that of the waves: stability times vapour height over wind.

    Parameters
    ----------
    parameters : RainParameters

    Returns
    -------
    float [1]
        Small: the vapour moves up and down with the ground. Large: the air
        above a slope already sinks while that below rises.

    Examples
    --------
    >>> from orolift.rain.parameters import RainParameters
    >>> print(round(wave_depth_number(RainParameters(15.0, 0.0, 0.005, 2500.0, 0.004)), 4))
    0.8333
    """
    return parameters.stability * parameters.vapour_height / parameters.wind_speed


def bell_ridge_condensation(
    distance: ArrayLike, height: float, half_width: float, parameters: RainParameters
) -> NDArray[np.float64]:
    """Condensation above an endless bell-shaped ridge in hydrostatic flow straight across it.

    Parameters
    ----------
    distance : array_like, any shape [m]
        From the crest, growing downwind.
    height, half_width : float [m]
        The ridge is height / (1 + (distance / half_width)^2).
    parameters : RainParameters
        Its times and background are not used.

    Returns
    -------
    ndarray, shape of `distance` [kg m-2 s-1]
        Negative where cloud evaporates.

    Notes
    -----
    With a the half width, mu = N Hw / U, hydrostatic waves (k much less than N / U),

    ``S = Cw U h a [-2 a x - mu (a^2 - x^2)] / [(1 + mu^2)(a^2 + x^2)^2]``.

    Derived from `spectral.transfer` without delays, whose factor is then 1 / (1 - i mu sgn k).

    Examples
    --------
    >>> from orolift.rain.parameters import RainParameters
    >>> flow = RainParameters(15.0, 0.0, 0.005, 2500.0, 0.004)
    >>> print((3600 * bell_ridge_condensation([-20e3, 0.0], 500.0, 20e3, flow)).round(4))
    [ 1.5934 -2.6557]
    """
    x, a = np.asarray(distance, dtype=np.float64), half_width
    mu = wave_depth_number(parameters)
    scale = parameters.uplift_sensitivity * parameters.wind_speed * height * a / (1.0 + mu**2)
    return np.asarray(scale * (-2.0 * a * x - mu * (a**2 - x**2)) / (a**2 + x**2) ** 2)


def bell_ridge_efficiency(depth_number: ArrayLike) -> NDArray[np.float64]:
    """Condensation on the windward side of a bell-shaped ridge, as a share of the raw upslope estimate.

    Parameters
    ----------
    depth_number : array_like, any shape [1]
        From `wave_depth_number`, 0 to 100.

    Returns
    -------
    ndarray, shape of `depth_number` [1]
        1 where the vapour is shallow, falling toward 0.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    (1 + sqrt(1 + mu^2)) / (2 (1 + mu^2)): the largest running integral of
    `bell_ridge_condensation` from upwind, over Cw U h.

    Examples
    --------
    >>> bell_ridge_efficiency([0.0, 0.5, 1.0, 2.0]).round(6)
    array([1.      , 0.847214, 0.603553, 0.323607])
    """
    square = within("depth_number", depth_number, 0.0, 100.0, "1") ** 2
    return np.asarray((1.0 + np.sqrt(1.0 + square)) / (2.0 * (1.0 + square)))


def line_source_rain(
    distance: ArrayLike, strength: float, wind: float, cloud_time: float, fall_time: float
) -> NDArray[np.float64]:
    """Rain downwind of a line along which water condenses.

    Parameters
    ----------
    distance : array_like, any shape [m]
        From the line, growing downwind.
    strength : float [kg m-1 s-1]
        Water that condenses on each metre of the line.
    wind : float [m s-1]
        Across the line, above 0.
    cloud_time, fall_time : float [s]
        Not both 0.

    Returns
    -------
    ndarray, shape of `distance` [kg m-2 s-1]
        Nothing upwind of the line.

    Raises
    ------
    OutOfRangeError
        If the wind is not positive or both times are 0.

    Notes
    -----
    Solution of the two delay equations of the theory, with Lc = U tc, Lf = U tf:
    S (exp(-x / Lf) - exp(-x / Lc)) / (Lf - Lc), and S (x / L^2) exp(-x / L) for equal times.

    Examples
    --------
    >>> print((3600 * line_source_rain([-5e3, 15e3], 1.0, 15.0, 1000.0, 1000.0)).round(6))
    [0.       0.088291]
    """
    x = np.maximum(np.asarray(distance, dtype=np.float64), 0.0)
    first, last = _lengths(wind, cloud_time, fall_time)
    if last - first > 1e-6 * last:
        decay = np.exp(-x / first) if first > 0.0 else np.zeros_like(x)
        rain = (np.exp(-x / last) - decay) / (last - first)
    else:
        rain = x / last**2 * np.exp(-x / last)
    return np.asarray(np.where(np.asarray(distance) >= 0.0, strength * rain, 0.0))


def line_source_fallen(distance: ArrayLike, wind: float, cloud_time: float, fall_time: float) -> NDArray[np.float64]:
    """Share of the water condensed along a line that has fallen by a distance downwind of it.

    Parameters
    ----------
    distance : array_like, any shape [m]
    wind : float [m s-1]
    cloud_time, fall_time : float [s]
        As in `line_source_rain`, whose integral this is.

    Returns
    -------
    ndarray, shape of `distance` [1]

    Raises
    ------
    OutOfRangeError
        As in `line_source_rain`.

    Examples
    --------
    >>> line_source_fallen([15e3, 60e3], 15.0, 1000.0, 1000.0).round(6)
    array([0.264241, 0.908422])
    """
    x = np.maximum(np.asarray(distance, dtype=np.float64), 0.0)
    first, last = _lengths(wind, cloud_time, fall_time)
    if last - first > 1e-6 * last:
        decay = first * np.exp(-x / first) if first > 0.0 else 0.0
        return np.asarray(1.0 - (last * np.exp(-x / last) - decay) / (last - first))
    return np.asarray(1.0 - (1.0 + x / last) * np.exp(-x / last))


def slope_spill_over(length: float, wind: float, cloud_time: float, fall_time: float) -> float:
    """Share of the rain of an even slope that falls beyond its upper end, on the plateau behind.

    Parameters
    ----------
    length : float [m]
        Of the slope along the wind, above 0.
    wind : float [m s-1]
    cloud_time, fall_time : float [s]
        As in `line_source_rain`.

    Returns
    -------
    float [1]

    Raises
    ------
    OutOfRangeError
        If the length is not positive, or as in `line_source_rain`.

    Notes
    -----
    The slope is a row of line sources of equal strength. With Lc, Lf as there and W the length:
    [Lf^2 (1 - exp(-W / Lf)) - Lc^2 (1 - exp(-W / Lc))] / [W (Lf - Lc)], and
    [2 - exp(-w)(2 + w)] / w for equal times, w = W / L.

    Examples
    --------
    >>> print(round(slope_spill_over(30e3, 15.0, 1000.0, 1000.0), 4))
    0.7293
    """
    within("length", length, 1.0, 1e7, "m")
    first, last = _lengths(wind, cloud_time, fall_time)
    if last - first > 1e-6 * last:
        near = first**2 * -np.expm1(-length / first) if first > 0.0 else 0.0
        return float((last**2 * -np.expm1(-length / last) - near) / (length * (last - first)))
    w = length / last
    return float((2.0 - np.exp(-w) * (2.0 + w)) / w)


def _lengths(wind: float, cloud_time: float, fall_time: float) -> tuple[float, float]:
    """Shorter and longer drift distance [m]; the rain is the same with the two times exchanged."""
    within("wind", wind, 0.1, 200.0, "m/s")
    within("cloud_time, fall_time", [cloud_time, fall_time], 0.0, 1e5, "s")
    first, last = sorted((wind * cloud_time, wind * fall_time))
    within(
        "longer of cloud_time and fall_time", last / wind, 1e-3, 1e5, "s", "Without any delay rain falls on the line."
    )
    return first, last
