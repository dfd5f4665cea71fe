"""Hydraulic flow of one layer under an inversion over a ridge: regimes, lee wind, jump.

Speeds without unit are over ``sqrt(g' H0)``, depths over H0, the depth of the layer upwind.
The ratio ``U / sqrt(g' H0)`` is called the layer ratio here, not "Froude number".
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import Enum
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.constants import GRAVITY

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike, NDArray


class LayerRegime(Enum):
    """What the layer does at the ridge."""

    SLOW_EVERYWHERE = "dips over the crest and recovers"
    FAST_EVERYWHERE = "swells over the crest and recovers"
    JUMP_ON_SLOPE = "plunges down the lee and jumps back on the slope"
    JUMP_DOWNSTREAM = "plunges down the lee and stays fast over the plain"
    BLOCKED = "does not reach over the crest"


@dataclass(frozen=True)
class LayerFlow:
    """One layer over a ridge.

    Attributes
    ----------
    regime : LayerRegime
    either : bool
        Whether a partly blocked state is possible too, depending on what was before (hysteresis).
    upwind_depth, upwind_speed : float [1]
        Next to the ridge upwind, after any bore has passed.
    lee_speed : float [1]
        At the lee foot, over the speed far upwind; 0 when blocked.
    lee_ratio : float [1]
        Wind over the speed of waves on the layer at the lee foot.
    jump_speed : float [1]
        Of the jump in the lee, downstream positive; NaN when there is none.
    """

    regime: LayerRegime
    either: bool
    upwind_depth: float
    upwind_speed: float
    lee_speed: float
    lee_ratio: float
    jump_speed: float


def reduced_gravity(jump: ArrayLike, potential_temperature: ArrayLike) -> NDArray[np.float64]:
    """Gravity reduced by an inversion, ``g dtheta / theta``.

    Parameters
    ----------
    jump : array_like, any shape [K]
        Rise of potential temperature across the inversion, 0 to 100.
    potential_temperature : array_like [K]
        Of the layer below, 150 to 400.

    Returns
    -------
    ndarray [m s-2]

    Raises
    ------
    OutOfRangeError
        If a value is outside its range.

    Examples
    --------
    >>> reduced_gravity(5.0, 288.0).round(3)
    np.float64(0.17)
    """
    rise = within("jump", jump, 0.0, 100.0, "K")
    theta = within("potential_temperature", potential_temperature, 150.0, 400.0, "K", "Give kelvin.")
    return np.asarray(GRAVITY * rise / theta)[()]


def critical_crest(layer_ratio: ArrayLike) -> NDArray[np.float64]:
    """Crest height over depth above which the layer is partly blocked.

    Parameters
    ----------
    layer_ratio : array_like, any shape [1]
        ``U / sqrt(g' H0)``, at least 0.

    Returns
    -------
    ndarray [1]

    Raises
    ------
    OutOfRangeError
        If a ratio is negative or NaN.

    Notes
    -----
    ``1 + F^2 / 2 - 3/2 F^(2/3)``, Houghton and Kasahara (1968), Communications on Pure and
    Applied Mathematics 21, 1-23.

    Examples
    --------
    >>> critical_crest(0.5).round(5)
    np.float64(0.18006)
    """
    ratio = within("layer_ratio", layer_ratio, 0.0, 1e3, "", "It is U / sqrt(g' H0).")
    return np.asarray(1.0 + 0.5 * ratio**2 - 1.5 * ratio ** (2.0 / 3.0))[()]


def blocking_ratio(crest: ArrayLike) -> NDArray[np.float64]:
    """Layer ratio below which the layer is wholly blocked.

    Parameters
    ----------
    crest : array_like, any shape [1]
        Crest height over depth, at least 0.

    Returns
    -------
    ndarray [1]
        0 for a crest inside the layer.

    Raises
    ------
    OutOfRangeError
        If a height is negative or NaN.

    Notes
    -----
    ``(M - 1) sqrt((M + 1) / (2 M))``, from the bore conditions (Long 1954; Baines 1995).

    Examples
    --------
    >>> blocking_ratio([0.5, 2.0]).round(5)
    array([0.     , 0.86603])
    """
    height = within("crest", crest, 0.0, 1e3, "", "It is the crest height over the depth of the layer.")
    tall = np.maximum(height, 1.0)
    return np.asarray((tall - 1.0) * np.sqrt((tall + 1.0) / (2.0 * tall)))[()]


def hysteresis_crest(layer_ratio: ArrayLike) -> NDArray[np.float64]:
    """Crest height over depth above which a fast layer may also be partly blocked.

    Between this and `critical_crest` both states are possible.

    Parameters
    ----------
    layer_ratio : array_like, any shape [1]
        ``U / sqrt(g' H0)``, at least 1.

    Returns
    -------
    ndarray [1]

    Raises
    ------
    OutOfRangeError
        If a ratio is below 1 or NaN.

    Notes
    -----
    ``[(8 F^2 + 1)^(3/2) + 1] / (16 F^2) - 1/4 - 3/2 F^(2/3)``: a bore upwind that stands still
    (Baines 1995, "Topographic effects in stratified flows"). Often copied without the + 1, which is wrong:
    a test compares it with the bore conditions.

    Examples
    --------
    >>> hysteresis_crest(1.5).round(5)
    np.float64(0.11275)
    """
    ratio = within("layer_ratio", layer_ratio, 1.0, 1e3, "", "Hysteresis needs a fast layer: U > sqrt(g' H0).")
    square = ratio**2
    bore = ((8.0 * square + 1.0) ** 1.5 + 1.0) / (16.0 * square)
    return np.asarray(bore - 0.25 - 1.5 * ratio ** (2.0 / 3.0))[()]


def layer_flow(layer_ratio: float, crest: float) -> LayerFlow:
    """One layer under an inversion over a ridge.

    Parameters
    ----------
    layer_ratio : float [1]
        ``U / sqrt(g' H0)``, 0.01 to 10.
    crest : float [1]
        Crest height over depth, 0.001 to 10.

    Returns
    -------
    LayerFlow

    Raises
    ------
    OutOfRangeError
        If a value is outside its range.

    Notes
    -----
    Shallow-water flow of one layer, Long (1954), Houghton and Kasahara (1968), Baines (1995). Partly blocked:
    a bore runs upwind, ``(F + s)^2 = HA (HA + 1) / 2`` and ``uA = (F + s) / HA - s``, the crest is
    critical, ``uA^2 / 2 + HA = 3/2 (uA HA)^(2/3) + M``, and the lee side fast. The jump in the lee moves
    downstream, or, when its speed is not positive, stays on the slope. No friction, no stable air above the
    layer: an upper estimate.

    References
    ----------
    .. [1] R. R. Long (1954), "Some aspects of the flow of stratified fluids. II",
       Tellus 6, 97-115.
    .. [2] D. D. Houghton and A. Kasahara (1968), "Nonlinear shallow fluid flow over an
       isolated ridge", Communications on Pure and Applied Mathematics 21, 1-23.

    Examples
    --------
    >>> flow = layer_flow(0.5, 0.3)
    >>> flow.regime.value, round(flow.lee_speed, 2)
    ('plunges down the lee and jumps back on the slope', 2.58)
    """
    f = float(within("layer_ratio", layer_ratio, 0.01, 10.0, "", "It is U / sqrt(g' H0)."))
    m = float(within("crest", crest, 1e-3, 10.0, "", "It is the crest height over the depth of the layer."))
    either = False
    if f < float(blocking_ratio(m)):
        return LayerFlow(LayerRegime.BLOCKED, either, _blocked_depth(f), 0.0, 0.0, 0.0, np.nan)
    if m <= float(critical_crest(f)):
        fast = f > 1.0
        regime = LayerRegime.FAST_EVERYWHERE if fast else LayerRegime.SLOW_EVERYWHERE
        either = fast and m > float(hysteresis_crest(f))
        return LayerFlow(regime, either, 1.0, f, 1.0, f, np.nan)
    return _partly_blocked(f, m)


def lee_wind_bound(upwind_speed: ArrayLike, gravity: ArrayLike, upwind_depth: ArrayLike) -> NDArray[np.float64]:
    """Wind that a layer in the lee cannot exceed.

    Parameters
    ----------
    upwind_speed : array_like, any shape [m s-1]
        Next to the ridge upwind.
    gravity : array_like [m s-2]
        Reduced gravity.
    upwind_depth : array_like [m]

    Returns
    -------
    ndarray [m s-1]
        ``sqrt(u^2 + 2 g' H)``: all the layer's height turned into wind.

    Examples
    --------
    >>> lee_wind_bound(5.0, 0.2, 1000.0).round(1)
    np.float64(20.6)
    """
    speed = np.asarray(upwind_speed, np.float64)
    return np.asarray(np.sqrt(speed**2 + 2.0 * np.asarray(gravity, np.float64) * np.asarray(upwind_depth)))[()]


def _partly_blocked(f: float, m: float) -> LayerFlow:
    """State behind a bore that runs upwind, with a critical crest and a fast lee side."""

    def upwind(depth: float) -> float:
        bore = math.sqrt(0.5 * depth * (depth + 1.0)) - f
        return (f + bore) / depth - bore

    def excess(depth: float) -> float:
        speed = upwind(depth)
        flux = max(speed * depth, 0.0)
        return float(0.5 * speed**2 + depth - 1.5 * flux ** (2.0 / 3.0) - m)

    low = 1.0
    high = max(2.0, m + 1.0)
    while excess(high) < 0.0:
        high *= 1.5
    depth = _root(excess, low, high)
    speed = upwind(depth)
    flux = max(speed * depth, 1e-12)
    head = 0.5 * speed**2 + depth
    lee_depth = _root(lambda d: 0.5 * (flux / d) ** 2 + d - head, 1e-6, flux ** (2.0 / 3.0))
    lee_speed = flux / lee_depth
    jump = _lee_jump(f, lee_speed, lee_depth)
    regime = LayerRegime.JUMP_DOWNSTREAM if jump > 0.0 else LayerRegime.JUMP_ON_SLOPE
    return LayerFlow(
        regime=regime,
        either=False,
        upwind_depth=depth,
        upwind_speed=speed,
        lee_speed=lee_speed / f,
        lee_ratio=lee_speed / math.sqrt(lee_depth),
        jump_speed=jump,
    )


def _lee_jump(f: float, speed: float, depth: float) -> float:
    """Speed of the jump that leads from the fast lee side back to the layer downstream, through a rarefaction."""

    def moves(behind: float) -> float:
        return speed - math.sqrt(behind * (behind + depth) / (2.0 * depth))

    def excess(behind: float) -> float:
        jump = moves(behind)
        after = jump + (speed - jump) * depth / behind
        return after - 2.0 * math.sqrt(behind) - (f - 2.0)

    low, high = depth, 1.0
    while excess(high) > 0.0:
        high *= 1.5
    return moves(_root(excess, low, high))


def _blocked_depth(f: float) -> float:
    """Depth behind a bore that brings the layer to rest."""

    def excess(depth: float) -> float:
        bore = math.sqrt(0.5 * depth * (depth + 1.0)) - f
        return (f + bore) / depth - bore

    high = 2.0
    while excess(high) > 0.0:
        high *= 1.5
    return _root(excess, 1.0, high)


def _root(function: Callable[[float], float], low: float, high: float) -> float:
    """Zero of a function that has different signs at both ends, by bisection."""
    rising = function(high) > 0.0
    for _ in range(80):
        middle = 0.5 * (low + high)
        if (function(middle) > 0.0) == rising:
            high = middle
        else:
            low = middle
    return 0.5 * (low + high)
