"""What the linear theory cannot do in a case, in sentences for the person who uses the map."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.rain.parameters import LEAST_STABILITY
from orolift.rain.rain_map import map_drying_ratio

if TYPE_CHECKING:
    from collections.abc import Iterator

    from orolift.rain.parameters import ColumnRain
    from orolift.rain.rain_map import RainMap

LINEAR_HEIGHT = 1.0  # non-dimensional height above which a linear theory is out of its range; textbook, from memory
BLOCKED_HEIGHT = 3.0  # Colle (2004), J. Atmos. Sci. 61, 588-606: moist N h / U above which low flow was blocked
LARGE_SHARE = 0.5  # of the vapour: more than the linear theory, which does not use it up, can be right about
FAR_OFF = np.radians(45.0)  # design choice, the same as for the crossing
EDGE_SHARE = 0.25  # of the relief: ground this high at the inflow edge cuts a range in two (a judgement)
SMALL_DRY_LIFT = 50.0  # [m] not worth a sentence


def limits_of_theory(
    found: RainMap,
    column: ColumnRain | None = None,
    *,
    blocked_top: float | None = None,
    off_normal: float | None = None,
) -> tuple[str, ...]:
    """Where a case breaks the assumptions of the rain map.

    Parameters
    ----------
    found : RainMap
    column : ColumnRain, optional
        Where its parameters came from.
    blocked_top : float, optional [m above sea level]
        Top of the blocked layer, if there is one.
    off_normal : float, optional [rad]
        Angle between the wind and the direction across the range.

    Returns
    -------
    tuple of str
        Empty where nothing is wrong but the assumptions themselves.

    Notes
    -----
    Thresholds: linear waves need N h / U below about 1; in the two-dimensional
    simulations of Colle (2004) [1]_ low-level flow was blocked, and the rain
    moved upwind, above 3 (moist N). The others are judgements, beside the constants of this module.

    References
    ----------
    .. [1] B. A. Colle (2004), "Sensitivity of orographic precipitation to
       changing ambient conditions and terrain geometries: an idealized modeling
       perspective", J. Atmos. Sci. 61, 588-606.

    Examples
    --------
    >>> from orolift.rain.parameters import RainParameters
    >>> from orolift.rain.rain_map import rain_map
    >>> from orolift.terrain.grid import ElevationGrid
    >>> x = np.arange(-100e3, 101e3, 2e3)
    >>> ridge = ElevationGrid(2500.0 * np.exp(-((x / 15e3) ** 2)) * np.ones((101, 1)), x, x[::-1])
    >>> print(limits_of_theory(rain_map(ridge, RainParameters(10.0, 0.0, 0.005, 2500.0, 0.006)))[0][:60])
    The rain map is outside its theory: stability times relief o
    """
    return tuple(
        sentence
        for part in (
            _linearity(found),
            _blocking(found, blocked_top),
            _moisture(found, column),
            _wind(column, off_normal),
            _map(found),
        )
        for sentence in part
    )


def _linearity(found: RainMap) -> Iterator[str]:
    p = found.parameters
    number = p.stability * found.relief / p.wind_speed
    if number > LINEAR_HEIGHT:
        more = (
            " Above 3, simulated low-level flow was blocked and the most rain fell upwind of the range."
            if number > BLOCKED_HEIGHT
            else ""
        )
        yield (
            f"The rain map is outside its theory: stability times relief over wind is {number:.1f}, and linear flow "
            "over the terrain needs less than about 1. Expect less rain near the crest and more upwind of "
            f"it.{more}"
        )


def _blocking(found: RainMap, blocked_top: float | None) -> Iterator[str]:
    if blocked_top is None or blocked_top <= float(np.nanmin(found.grid.elevation)) + 1.0:
        return
    if found.floor is not None:
        yield (
            f"Low air is blocked: ground below {blocked_top:.0f} m was taken off the terrain of the rain map. Rain "
            "that air makes rising over the blocked layer, upwind of the slope, is missing."
        )
    else:
        yield (
            f"Low air is blocked up to {blocked_top:.0f} m, but the rain map lets it climb; it has too much rain on "
            "the lower slopes."
        )


def _moisture(found: RainMap, column: ColumnRain | None) -> Iterator[str]:
    if column is None:
        return
    if column.stability_squared < LEAST_STABILITY**2:
        yield (
            "Saturated air is unstable in this column: showers and thunderstorms are likely, with peaks far above the "
            "smooth rain of the map, which knows no convection."
        )
    if column.dry_lift > SMALL_DRY_LIFT:
        taken = (
            "ground lower than that above the inflow was taken off the terrain"
            if found.floor is not None
            else "the map rains from the first metre and gives too much"
        )
        yield (
            f"The incoming air is not saturated: it must rise {column.dry_lift:.0f} m on average before it condenses; "
            f"{taken}."
        )
    share = map_drying_ratio(found, column)
    if share > LARGE_SHARE:
        yield (
            f"The rain map takes {100.0 * share:.0f} % of the vapour that flows in. The theory does not use vapour "
            "up on the way; ranges downwind of the first get too much."
        )


def _wind(column: ColumnRain | None, off_normal: float | None) -> Iterator[str]:
    if column is not None and column.turning > FAR_OFF:
        yield (
            f"The wind turns by {np.degrees(column.turning):.0f} degrees in the lowest 3 km; the rain map has one "
            "wind, the mean over the vapour."
        )
    if off_normal is not None and abs(off_normal) > FAR_OFF:
        yield (
            f"The wind blows {np.degrees(abs(off_normal)):.0f} degrees off the direction across the range, nearly "
            "along it: rain then comes from spurs and side ranges, and windward and lee mean little."
        )


def _map(found: RainMap) -> Iterator[str]:
    p = found.parameters
    ny, nx = found.rate.shape
    along = min(
        nx * found.spacing[0] / max(abs(p.eastward_wind) / p.wind_speed, 1e-9),
        ny * found.spacing[1] / max(abs(p.northward_wind) / p.wind_speed, 1e-9),
    )
    drift = p.wind_speed * (p.cloud_time + p.fall_time)
    if drift > along:
        yield (
            f"The map is {along / 1000.0:.0f} km long along the wind, and rain drifts {drift / 1000.0:.0f} km before "
            "it falls: rain made upwind of the map is missing on it. Use a raster that reaches further upwind."
        )
    lowest = float(np.nanmin(found.grid.elevation)) if found.floor is None else found.floor
    if found.relief > 0.0 and found.inflow_ground - lowest > EDGE_SHARE * (found.relief + found.inflow_ground - lowest):
        yield (
            f"The edge of the map that the wind comes in by lies at {found.inflow_ground:.0f} m on average, well up "
            "the range: rain made by the slope before it is missing. Use a raster that reaches further upwind."
        )
