"""What strengthens the wind down a lee slope beyond a single layer: tuned layers, a mixed layer aloft."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

HIGHEST_TRANSITIONAL_RIDGE = 0.985
"""N h / U above which Smith's (1985) solution ends; from memory, consistent with its table."""


def tropopause_wind_factor(lower: ArrayLike, upper: ArrayLike, depth: ArrayLike) -> NDArray[np.float64]:
    """Surface wind perturbation of two layers over that of the lower one alone.

    Parameters
    ----------
    lower, upper : array_like, any shape [m-1]
        N / U of the two layers, more than 0.
    depth : array_like [m]
        Of the lower layer: usually the height of the tropopause above the ridge's base.

    Returns
    -------
    ndarray [1]
        From ``lower / upper`` to ``upper / lower``: largest when the depth is a whole number of half
        vertical wavelengths and the upper layer is the stiffer one.

    Raises
    ------
    OutOfRangeError
        If a value is outside its range.

    Notes
    -----
    Klemp and Lilly (1975) [1]_, hydrostatic: with ``R = (l1 - l2) / (l1 + l2)`` and ``p = l1 H`` the
    amplitude of the surface wind is multiplied by ``|(1 - R exp(2ip)) / (1 + R exp(2ip))|``.

    References
    ----------
    .. [1] J. B. Klemp and D. K. Lilly (1975), "The dynamics of wave-induced downslope
       winds", J. Atmos. Sci. 32, 320-339.

    Examples
    --------
    >>> tropopause_wind_factor(1e-3, 2e-3, [3141.593, 1570.796]).round(3)
    array([2. , 0.5])
    """
    turned = _reflection(lower, upper, depth)
    return np.asarray(np.abs((1.0 - turned) / (1.0 + turned)))[()]


def tropopause_drag_factor(lower: ArrayLike, upper: ArrayLike, depth: ArrayLike) -> NDArray[np.float64]:
    """Drag of two layers over that of the lower one alone.

    Parameters
    ----------
    lower, upper : array_like, any shape [m-1]
        N / U of the two layers, more than 0.
    depth : array_like [m]
        Of the lower layer.

    Returns
    -------
    ndarray [1]

    Raises
    ------
    OutOfRangeError
        If a value is outside its range.

    Notes
    -----
    ``(1 - R^2) / (1 + 2 R cos(2p) + R^2)``, Klemp and Lilly (1975), J. Atmos. Sci. 32, 320-339.

    Examples
    --------
    >>> tropopause_drag_factor(1e-3, 2e-3, [3141.593, 785.398]).round(3)
    array([2. , 0.8])
    """
    turned = _reflection(lower, upper, depth)
    return np.asarray((1.0 - np.abs(turned) ** 2) / np.abs(1.0 + turned) ** 2)[()]


@dataclass(frozen=True)
class Transitional:
    """Flow that changes over under a mixed layer, Smith (1985).

    Attributes
    ----------
    dividing_height : float [1]
        Height upwind, times N / U, of the streamline that becomes the top of the fast layer.
    lee_speed : float [1]
        At the foot of the lee, over the wind upwind.
    drag : float [1]
        Over that of linear waves over a bell ridge of the same height.
    """

    dividing_height: float
    lee_speed: float
    drag: float


def transitional_flow_smith_1985(ridge: float) -> Transitional:
    """Fast flow down the lee under a mixed layer aloft: an upper bound.

    It applies only where an inversion, a critical level or a breaking wave lies near its
    dividing height (`near_dividing_height`).

    Parameters
    ----------
    ridge : float [1]
        ``N h / U``, 0.01 to 0.985.

    Returns
    -------
    Transitional

    Raises
    ------
    OutOfRangeError
        If the ridge is outside the range of the solution.

    Notes
    -----
    Smith (1985) [1]_, all heights times N / U: ``h = d cos(H0 + d - h)``, with the flow changing over at
    the crest, where ``cot(p) = d`` for ``p = H0 + d - h`` between pi/2 and pi, so
    ``h = cos(p)^2 / sin(p)``. Lee wind ``1 + H0 - pi/2``, drag ``(rho N^2 / 6) (H0 - pi U / 2N)^3``.

    References
    ----------
    .. [1] R. B. Smith (1985), "On severe downslope winds", J. Atmos. Sci. 42,
       2597-2603.

    Examples
    --------
    >>> round(transitional_flow_smith_1985(0.5).lee_speed, 3)
    2.975
    """
    height = float(within("ridge", ridge, 0.01, HIGHEST_TRANSITIONAL_RIDGE, "", "It is N h / U."))
    # h = cos^2 / sin, with sin = s: s^2 + h s - 1 = 0; p lies between pi/2 and pi
    sine = 0.5 * (np.sqrt(height**2 + 4.0) - height)
    phase = np.pi - np.arcsin(sine)
    displacement = 1.0 / np.tan(phase)
    dividing = float(phase - displacement + height)
    depth = dividing - 0.5 * np.pi
    return Transitional(dividing, 1.0 + depth, float(depth**3 / 6.0 / (0.25 * np.pi * height**2)))


def near_dividing_height(height: ArrayLike, n: float, wind: float) -> NDArray[np.bool_]:
    """Whether a mixed layer at some height can turn the flow over.

    Parameters
    ----------
    height : array_like, any shape [m]
        Of an inversion, a critical level or a breaking wave, above the base.
    n : float [s-1]
        Below it.
    wind : float [m s-1]
        Below it, more than 0.

    Returns
    -------
    ndarray of bool

    Notes
    -----
    Between 1/4 and 3/4 of a vertical wavelength ``2 pi U / N``, plus whole ones: the dividing
    heights of Smith (1985), J. Atmos. Sci. 42, 2597-2603, from pi/2 to 3 pi/2.

    Examples
    --------
    >>> near_dividing_height([1000.0, 3000.0, 6000.0], 0.01, 10.0)
    array([False,  True, False])
    """
    speed = float(within("wind", wind, 0.1, 200.0, "m s-1"))
    share = np.mod(np.asarray(height, np.float64) * n / (2.0 * np.pi * speed), 1.0)
    return np.asarray((share >= 0.25) & (share <= 0.75))


def _reflection(lower: ArrayLike, upper: ArrayLike, depth: ArrayLike) -> NDArray[np.complex128]:
    """Reflection at the top of the lower layer, turned by the phase of going up and down."""
    below = within("lower", lower, 1e-6, 1.0, "m-1", "It is N / U.")
    above = within("upper", upper, 1e-6, 1.0, "m-1", "It is N / U.")
    thick = within("depth", depth, 0.0, 5e4, "m", "Give metres.")
    return np.asarray((below - above) / (below + above) * np.exp(2j * below * thick), np.complex128)
