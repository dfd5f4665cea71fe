"""The upwind column as the range meets it: stability, wind across, what is blocked; members first."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.air.condensation import condensation_point
from orolift.air.parcel import Parcel
from orolift.air.saturation import saturation_mixing_ratio
from orolift.air.temperature import virtual_potential_temperature, virtual_temperature
from orolift.constants import GRAVITY, HEAT_CAPACITY_DRY_AIR, R_DRY
from orolift.flow.blocking import counterflow_top, dividing_height
from orolift.flow.stability import dry_n_squared, effective_n_squared, moist_n_squared

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from orolift.air.column import AirAtHeights, IncomingAir

FINE_SPACING, COARSE_SPACING = 100.0, 250.0
"""Spacing of the levels [m] up to 2 km above the crest, and above: finer than waves feel; a judgement."""
TOP = 16000.0
"""Height [m] up to which waves are worked out (design: at least 16 km)."""
LEAST_CRITICAL, MOST_CRITICAL = 0.75, 3.0
"""Range of the critical value: from where waves first break (Pierrehumbert and Wyman 1985) to twice the usual one."""
LEAST_VAPOUR = 1e-7
"""Vapour [kg per kg] below which air counts as holding this much where a condensation level is asked for."""
ROOM_BELOW_CREST = 25.0
"""The blocked top stays this far below the crest [m]: some air always crosses where the wind at the crest does."""


@dataclass(frozen=True, eq=False)
class Upwind:
    """Levels of the column with what the flow needs; arrays (m, nc).

    Attributes
    ----------
    height : ndarray (nc,) [m above sea level]
        From the base of the range up.
    air : AirAtHeights
        The incoming air at these heights.
    wind : ndarray [m s-1]
        Component across the range, positive toward it.
    density : ndarray [kg m-3]
    dry, moist : ndarray [s-2]
        Buoyancy frequency squared, unsaturated and saturated.
    lifted_share : ndarray [1]
        Share of the way to the crest on which air of a level is saturated.
    lifted : ndarray [s-2]
        For air on its way to the crest: moist over the share of the lift on which it is saturated.
    """

    height: NDArray[np.float64]
    air: AirAtHeights
    wind: NDArray[np.float64]
    density: NDArray[np.float64]
    dry: NDArray[np.float64]
    moist: NDArray[np.float64]
    lifted_share: NDArray[np.float64]
    lifted: NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Blocking:
    """What the range stops; arrays (m,).

    Attributes
    ----------
    dividing_height : ndarray [m above sea level]
        Sheppard's, critical value 1, counter-flow included; the base when nothing is blocked.
    top : ndarray [m above sea level]
        Top of the blocked layer with the member's critical value, counter-flow below the crest included.
    lowest_top, highest_top : ndarray [m above sea level]
        With critical values 3 and 0.75.
    counterflow_top : ndarray [m above sea level]
        Highest calm or counter-flowing air below the crest; the base when there is none.
    nondimensional_height : ndarray [1]
    stability : ndarray [s-1]
        Buoyancy frequency from base to crest, saturated parts as such, weighted by the height still to be climbed.
    """

    dividing_height: NDArray[np.float64]
    top: NDArray[np.float64]
    lowest_top: NDArray[np.float64]
    highest_top: NDArray[np.float64]
    counterflow_top: NDArray[np.float64]
    nondimensional_height: NDArray[np.float64]
    stability: NDArray[np.float64]


def upwind_column(incoming: IncomingAir, bearing: float, base: float, crest: float, *, freezing: bool) -> Upwind:
    """The incoming air on the levels the flow is worked out on.

    Parameters
    ----------
    incoming : IncomingAir, fields (m, nz) or (nz,)
    bearing : float [rad]
        Across the range, downwind.
    base, crest : float [m above sea level]
    freezing : bool

    Returns
    -------
    Upwind
        Fields (m, nc), m = 1 for a single column.

    Notes
    -----
    The share of the lift that is saturated: of the way from a level to the crest, the part above
    the level's own condensation level. Air that does not reach its condensation
    level below the crest, and all air above the crest, counts as dry here.
    """
    top = min(TOP, float(incoming.height[-1]))
    fine = np.arange(base, min(crest + 2000.0, top), FINE_SPACING)
    height = np.concatenate([fine, np.arange(fine[-1] + COARSE_SPACING, top + 1.0, COARSE_SPACING)])
    air = interpolated(incoming, height)
    air = type(air)(height, *(np.atleast_2d(getattr(air, name)) for name in _FIELDS))
    wind = air.eastward_wind * np.sin(bearing) + air.northward_wind * np.cos(bearing)
    theta_v = virtual_potential_temperature(air.pressure, air.temperature, air.vapour, air.cloud)
    density = air.pressure / (R_DRY * virtual_temperature(air.temperature, air.vapour, air.cloud))
    dry = dry_n_squared(height, theta_v)
    # Saturated at its own temperature, with no more water than that: cloud is what the lift makes of it.
    water = np.maximum(
        air.vapour + air.cloud, saturation_mixing_ratio(air.pressure, air.temperature, freezing=freezing)
    )
    moist = np.minimum(moist_n_squared(height, air.pressure, air.temperature, water, freezing=freezing), dry)
    start = Parcel(air.pressure, air.temperature, np.maximum(air.vapour, LEAST_VAPOUR), air.cloud)
    cooling = air.temperature - condensation_point(start, freezing=freezing).temperature
    base_of_cloud = height + cooling * (HEAT_CAPACITY_DRY_AIR / GRAVITY)
    way = crest - height
    share = np.where(way > 0.0, np.clip((crest - base_of_cloud) / np.where(way > 0.0, way, 1.0), 0.0, 1.0), 0.0)
    lifted = effective_n_squared(dry, moist, share)
    return Upwind(height, air, wind, density, dry, moist, share, lifted)


def blocking(upwind: Upwind, crest: float, critical_value: ArrayLike) -> Blocking:
    """What of the column is blocked below the crest.

    Parameters
    ----------
    upwind : Upwind
    crest : float [m above sea level]
    critical_value : array_like (m,)

    Returns
    -------
    Blocking

    Notes
    -----
    Dividing heights on the profile of the lifted air and the wind across the
    range. N and U of the non-dimensional height are means weighted by the height
    still to be climbed, as the dividing height weights them: the same as plain
    means in a uniform column. Calm and counter-flowing layers below the crest, and all air below
    them, belong to the blocked layer whatever the criterion.
    """
    z, n2, wind = upwind.height, upwind.lifted, upwind.wind
    base = float(z[0])
    counter = counterflow_top(z, wind, crest)
    room = max(crest - ROOM_BELOW_CREST, base)

    def top(value: ArrayLike) -> NDArray[np.float64]:
        return np.minimum(np.maximum(dividing_height(z, n2, wind, crest, critical_value=value), counter), room)

    # weighted by the way to the crest, as the dividing height weights it, so that regime and blocked top agree
    inside = z < crest
    weight = np.gradient(z)[inside] * (crest - z[inside])
    mean = np.maximum(np.sum(n2[:, inside] * weight, axis=-1) / np.sum(weight), 0.0)
    speed = np.sum(wind[:, inside] * weight, axis=-1) / np.sum(weight)
    rise = np.sqrt(mean) * (crest - base)
    steepness = np.where(rise > 0.0, np.where(speed > 0.0, rise / np.maximum(speed, 1e-6), np.inf), 0.0)
    return Blocking(
        dividing_height=np.maximum(dividing_height(z, n2, wind, crest), counter),
        top=top(critical_value),
        lowest_top=top(MOST_CRITICAL),
        highest_top=top(LEAST_CRITICAL),
        counterflow_top=counter,
        nondimensional_height=steepness,
        stability=np.sqrt(mean),
    )


_FIELDS = ("pressure", "temperature", "vapour", "cloud", "eastward_wind", "northward_wind")
