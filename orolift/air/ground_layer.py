"""A valley or night layer at the station's ground: how deep it is, so that it can be kept out of the inflow."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.temperature import virtual_potential_temperature, virtual_temperature

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir

    Array = NDArray[np.float64]

STABLE = 1.0e-2
"""Rise of virtual potential temperature [K m-1] of such a layer: the 10 K per km that this work uses for cold pools,
near that of air whose temperature does not fall with height."""
LEAST_DEFICIT = 1.5
"""Deficit of virtual potential temperature from ground to top [K] from which the layer counts: a judgement."""
SHALLOWEST = 50.0
"""Depth [m] below which it is left to the noise of the lowest levels: a judgement."""
DEEPEST = 1500.0
"""Depth [m] to which the layer is looked for; deeper ones are the air mass itself (a judgement)."""
BRIDGED = 100.0
"""A less stable part this thin [m] does not end the layer: a judgement, the step of coded soundings."""
WIND_ABOVE = 500.0
"""Depth above the layer [m] whose wind it is compared with (a judgement)."""
STAGNANT_WIND = 4.0
"""Mean wind [m s-1] below which a stable layer stagnates whatever blows above it (a judgement)."""
STAGNANT_SHARE = 0.5
"""Share of the wind above below which it stagnates, too (a judgement)."""


@dataclass(frozen=True)
class GroundLayer:
    """A stagnant stable layer at the ground of a column.

    Attributes
    ----------
    depth : float [m]
        To be kept out of the inflow of the range; 0 where there is none.
    deficit : float [K]
        How much colder the ground is than the air of its top brought down to it, as virtual temperature.
    wind, wind_above : float [m s-1]
        Speed of the mean wind in it and in the 500 m above it.
    note : str or None
        A sentence on it.
    """

    depth: float
    deficit: float
    wind: float
    wind_above: float
    note: str | None = None


NO_GROUND_LAYER = GroundLayer(0.0, 0.0, 0.0, 0.0)


def ground_layer(air: IncomingAir, crest: float | None = None) -> GroundLayer:
    """The stagnant stable layer at the ground of a column, if there is one.

    Air that has cooled on the floor of the station's valley, or overnight on
    its plain, does not flow over the range: the air above it does.

    Parameters
    ----------
    air : IncomingAir
        One column.
    crest : float or None [m above sea level]
        The layer is not taken to reach above it.

    Returns
    -------
    GroundLayer

    Notes
    -----
    From the ground up as long as virtual potential temperature rises by more
    than 10 K per km (less over at most 100 m), at most 1500 m; it counts when
    it is 50 m deep, the rise is 1.5 K or more in all and its wind is below 4 m/s or below half
    of that above. A stable layer in strong wind is the air mass and stays.
    Assumed: columns drawn from station values by a lapse rate have none.

    Examples
    --------
    >>> from orolift.air.column_build import air_from_levels
    >>> p, wind = [1.0e5, 9.8e4, 9.5e4, 8.5e4, 7.0e4, 5.0e4], [1.0, 2.0, 9.0, 11.0, 15.0, 25.0]
    >>> t = [270.0, 276.0, 275.0, 269.0, 261.0, 245.0]
    >>> air = air_from_levels(None, p, t, [0.002] * 6, wind, [0.0] * 6, elevation=300.0)
    >>> round(ground_layer(air).depth)
    162
    """
    z = air.height - air.height[0]
    theta = virtual_potential_temperature(air.pressure, air.temperature, air.vapour, air.cloud)
    limit = DEEPEST if crest is None else min(DEEPEST, max(crest - float(air.height[0]), 0.0))
    top = _top_of_stable_layer(z, theta, limit)
    depth = float(z[top])
    if depth < SHALLOWEST or theta[top] - theta[0] < LEAST_DEFICIT:
        return NO_GROUND_LAYER
    inside = _mean_speed(air, 0.0, depth)
    above = _mean_speed(air, depth, depth + WIND_ABOVE)
    if inside >= STAGNANT_WIND and inside >= STAGNANT_SHARE * above:
        return NO_GROUND_LAYER
    ground = float(virtual_temperature(air.temperature[0], air.vapour[0], air.cloud[0]))
    deficit = ground * float(theta[top] / theta[0] - 1.0)
    note = (
        f"A cold layer {depth:.0f} m deep lies on the ground of the incoming air: {deficit:.1f} °C colder at the "
        f"ground than the air at its top brought down, {inside:.0f} m/s in it and {above:.0f} m/s above. It is kept "
        "out of the air that meets the range."
    )
    return GroundLayer(depth, deficit, inside, above, note)


def _top_of_stable_layer(z: Array, theta: Array, limit: float) -> int:
    """Level number of the top of the stable layer that begins at the ground."""
    within = int(np.searchsorted(z, limit, side="right"))
    rate = np.diff(theta[:within]) / np.diff(z[:within])
    top = 0
    for i, rise in enumerate(rate):
        if rise >= STABLE:
            top = i + 1
        elif z[i + 1] - z[top] > BRIDGED:
            break
    while top > 0 and theta[top] < float(np.max(theta[: top + 1])):  # a bridge must not end below where it began
        top -= 1
    return top


def _mean_speed(air: IncomingAir, low: float, high: float) -> float:
    """Speed of the mean wind between two heights above the ground of the column."""
    z = air.height - air.height[0]
    heights = np.concatenate([[low], z[(z > low) & (z < high)], [high]])
    u, v = np.interp(heights, z, air.eastward_wind), np.interp(heights, z, air.northward_wind)
    depth = high - low
    mean_u, mean_v = np.trapezoid(u, heights) / depth, np.trapezoid(v, heights) / depth
    return float(np.hypot(mean_u, mean_v))
