"""How strong the wind down the lee may be: pressure difference, and the estimates side by side."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from orolift.checks import within
from orolift.flow.amplification import HIGHEST_TRANSITIONAL_RIDGE, near_dividing_height, transitional_flow_smith_1985
from orolift.flow.hydraulics import LayerRegime, layer_flow, reduced_gravity
from orolift.flow.long import finite_amplitude_wind

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import ArrayLike, NDArray

    from orolift.flow.inversion import Inversion

ENTRAINING = 2.8
"""Drag including the entrainment of slow air, over surface drag alone: Overland and Walter (1981), from memory."""


def pressure_difference_wind(pressure_drop: ArrayLike, density: ArrayLike, wind: ArrayLike) -> NDArray[np.float64]:
    """Wind that a fall of pressure along the flow can make without friction: an upper bound.

    Parameters
    ----------
    pressure_drop : array_like, any shape [Pa]
        Upwind minus lee, at the same height; negative slows the air.
    density : array_like [kg m-3]
        0.3 to 2.
    wind : array_like [m s-1]
        Where the pressure is high.

    Returns
    -------
    ndarray [m s-1]
        0 when the air would be stopped. Observed winds are about half of it, because of friction.

    Raises
    ------
    OutOfRangeError
        If a density is outside its range.

    Notes
    -----
    Bernoulli: ``v^2 = v0^2 + 2 dp / rho`` (Stull 2015, "Practical Meteorology", eq. 17.35).

    Examples
    --------
    >>> pressure_difference_wind(1000.0, 1.1, 10.0).round(2)
    np.float64(43.8)
    """
    rho = within("density", density, 0.3, 2.0, "kg m-3", "Give kilograms a cubic metre.")
    start = np.asarray(wind, np.float64)
    square = start**2 + 2.0 * np.asarray(pressure_drop, np.float64) / rho
    return np.asarray(np.sqrt(np.maximum(square, 0.0)))[()]


def gap_wind(
    pressure_gradient: ArrayLike,
    density: ArrayLike,
    wind: ArrayLike,
    distance: ArrayLike,
    *,
    drag_coefficient: float = 0.01,
    depth: float = 1000.0,
    entraining: float = ENTRAINING,
) -> NDArray[np.float64]:
    """Wind along a gap that a pressure gradient drives against friction.

    It is strongest at the exit, not where the gap is narrowest.

    Parameters
    ----------
    pressure_gradient : array_like, any shape [Pa m-1]
        Fall of pressure along the gap, at least 0.
    density : array_like [kg m-3]
        0.3 to 2.
    wind : array_like [m s-1]
        At the entrance.
    distance : array_like [m]
        From the entrance, at least 0.
    drag_coefficient : float [1]
        0.0001 to 1; the default is from memory.
    depth : float [m]
        Of the layer, 10 to 5000.
    entraining : float [1]
        Factor on drag; 1 leaves entrainment out.

    Returns
    -------
    ndarray [m s-1]

    Raises
    ------
    OutOfRangeError
        If a value is outside its range.

    Notes
    -----
    ``u^2 = u0^2 exp(-2Kx) + (P/K) (1 - exp(-2Kx))`` with ``K = entraining Cd / H`` and P the gradient over
    density (Overland and Walter 1981; Mass et al. 1995, Mon. Weather Rev. 123, 315-331; constants from memory).

    Examples
    --------
    >>> gap_wind(0.01, 1.1, 0.0, 100e3, entraining=1.0).round(2)
    np.float64(28.04)
    """
    rho = within("density", density, 0.3, 2.0, "kg m-3", "Give kilograms a cubic metre.")
    push = within("pressure_gradient", pressure_gradient, 0.0, 1.0, "Pa m-1") / rho
    reach = within("distance", distance, 0.0, 1e6, "m", "Give metres.")
    drag = float(within("drag_coefficient", drag_coefficient, 1e-4, 1.0, ""))
    rate = entraining * drag / float(within("depth", depth, 10.0, 5000.0, "m", "Give metres."))
    kept = np.exp(-2.0 * rate * reach)
    return np.asarray(np.sqrt(np.asarray(wind, np.float64) ** 2 * kept + push / rate * (1.0 - kept)))[()]


@dataclass(frozen=True)
class WindEstimate:
    """One estimate of the wind at the foot of the lee.

    Attributes
    ----------
    key : str
        Of the method, a word.
    method : str
        In words.
    wind : float [m s-1]
        Above the layer that friction slows.
    kind : 'estimate', 'upper end' or 'limit'
        An upper end may be reached, a limit cannot be passed.
    source : str
    """

    key: str
    method: str
    wind: float
    kind: Literal["estimate", "upper end", "limit"]
    source: str


ESTIMATES = ("finite_amplitude", "plunging_layer", "changing_over", "fall_of_pressure")
"""Keys of the estimates below."""


def finite_amplitude_estimates(
    ground: ArrayLike, spacing: float, n: ArrayLike, wind: ArrayLike
) -> tuple[WindEstimate | None, ...]:
    """Strongest wind along the ground by Long's equation, of each member.

    Parameters
    ----------
    ground : array_like, shape (m, nx) [m]
        Equal-ended part of the boundary, above the level upwind; `boundary.Boundary.wave` serves.
    spacing : float [m]
    n : array_like, shape (m,) [s-1]
    wind : array_like, shape (m,) [m s-1]
        Both averaged from the lowest streamline to the crest.

    Returns
    -------
    tuple of (WindEstimate or None), m
        None when the solution does not settle or overturns.

    Raises
    ------
    OutOfRangeError
        If a value is outside its range.

    Examples
    --------
    >>> x = np.arange(-100e3, 100e3, 500.0)
    >>> (found,) = finite_amplitude_estimates(500.0 * np.exp(-((x[np.newaxis] / 12e3) ** 2)), 500.0, [0.01], [10.0])
    >>> round(found.wind)
    14
    """
    flow = finite_amplitude_wind(ground, spacing, n, wind)
    strongest = np.asarray(wind, np.float64) * np.max(flow.speed_factor, axis=-1)
    holds = flow.settled & (flow.steepness < 1.0)
    method, source = "waves of finite amplitude", "Long (1953), Tellus 5, 42-58"
    return tuple(
        WindEstimate("finite_amplitude", method, one, "estimate", source) if good else None
        for one, good in zip(strongest.tolist(), holds.tolist(), strict=True)
    )


def hydraulic_estimate(inversion: Inversion, wind: float, base: float, crest: float) -> WindEstimate | None:
    """Lee wind of the layer under an inversion.

    Parameters
    ----------
    inversion : Inversion
    wind : float [m s-1]
        Averaged below the inversion.
    base, crest : float [m]
        Lowest ground upwind and the crest, above sea level.

    Returns
    -------
    WindEstimate or None
        None when the layer is blocked, hardly disturbed, or too thin or weak for the theory.

    Examples
    --------
    >>> from orolift.flow.inversion import Inversion
    >>> round(hydraulic_estimate(Inversion(1500.0, 200.0, 6.0, 288.0), 9.0, 0.0, 700.0).wind)
    25
    """
    depth = inversion.height - base
    gravity = float(reduced_gravity(inversion.jump, inversion.potential_temperature))
    if depth < 50.0 or crest - base < 0.001 * depth or wind <= 0.0:
        return None
    ratio, height = wind / np.sqrt(gravity * depth), (crest - base) / depth
    if not (0.01 <= ratio <= 10.0 and height <= 10.0):
        return None
    flow = layer_flow(float(ratio), float(height))
    if flow.regime not in (LayerRegime.JUMP_ON_SLOPE, LayerRegime.JUMP_DOWNSTREAM):
        return None
    source = "Houghton and Kasahara (1968), Communications on Pure and Applied Mathematics 21, 1-23"
    return WindEstimate(
        "plunging_layer", "layer under the inversion plunging", wind * flow.lee_speed, "estimate", source
    )


def transitional_estimate(n: float, wind: float, relief: float, mixed_heights: Sequence[float]) -> WindEstimate | None:
    """Bound on the lee wind when a mixed layer aloft lets the flow change over.

    Parameters
    ----------
    n : float [s-1]
    wind : float [m s-1]
        Both averaged from the lowest streamline to the crest; wind more than 0.1.
    relief : float [m]
        Crest above the lowest streamline.
    mixed_heights : sequence of float [m]
        Heights above the lowest streamline of an inversion, a critical level, a breaking wave.

    Returns
    -------
    WindEstimate or None
        None when none of them lies where it must, or the ridge is outside the solution.

    Examples
    --------
    >>> round(transitional_estimate(0.01, 10.0, 500.0, [3500.0]).wind)
    30
    """
    ridge = n * relief / wind
    if not 0.01 <= ridge <= HIGHEST_TRANSITIONAL_RIDGE or len(mixed_heights) == 0:
        return None
    if not np.any(near_dividing_height(np.asarray(mixed_heights, np.float64), n, wind)):
        return None
    speed = transitional_flow_smith_1985(ridge).lee_speed
    source = "Smith (1985), J. Atmos. Sci. 42, 2597-2603"
    return WindEstimate("changing_over", "flow changing over under a mixed layer", wind * speed, "upper end", source)


def pressure_limit(pressure_drop: float, density: float, wind: float) -> WindEstimate:
    """Limit on the lee wind from the fall of pressure across the range.

    Parameters
    ----------
    pressure_drop : float [Pa]
        Upwind minus lee, at the same height.
    density : float [kg m-3]
        0.3 to 2.
    wind : float [m s-1]
        Upwind.

    Returns
    -------
    WindEstimate

    Raises
    ------
    OutOfRangeError
        If the density is outside its range.

    Examples
    --------
    >>> round(pressure_limit(500.0, 1.1, 5.0).wind, 2)
    30.56
    """
    limit = float(pressure_difference_wind(pressure_drop, density, wind))
    source = "Bernoulli; Stull (2015), Practical Meteorology, eq. 17.35"
    return WindEstimate(
        "fall_of_pressure", "fall of pressure across the range, without friction", limit, "limit", source
    )


def lee_wind_range(streamline_wind: float, others: Sequence[WindEstimate]) -> tuple[float, float]:
    """Range of the lee wind that the estimates span.

    Parameters
    ----------
    streamline_wind : float [m s-1]
        From the spacing of streamlines.
    others : sequence of WindEstimate

    Returns
    -------
    low, high : float [m s-1]
        From the lowest to the highest of the streamline wind, the estimates and the upper ends; what
        lies above a limit is cut off there, but never below the streamline wind.

    Examples
    --------
    >>> others = [WindEstimate("a", "a", 18.0, "estimate", "s"), WindEstimate("b", "b", 16.0, "limit", "s")]
    >>> lee_wind_range(14.0, others)
    (14.0, 16.0)
    """
    limit = max(min((one.wind for one in others if one.kind == "limit"), default=np.inf), streamline_wind)
    low = min([streamline_wind, *(one.wind for one in others if one.kind == "estimate")])
    high = max([streamline_wind, *(one.wind for one in others if one.kind != "limit")])
    return low, min(high, limit)
