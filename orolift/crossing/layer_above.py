"""How much colder the air over a site is than at it, without the heat of the ground: what mixing has to overcome."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.crossing.arrival import frozen_temperature, pressure_at, sampled

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.result import LeeAir
    from orolift.crossing.sites import Arrived
    from orolift.crossing.solve import Solution

    Array = NDArray[np.float64]

HEIGHTS = (500.0, 1000.0, 2000.0, 3000.0)
"""Heights above the site [m] at which members tell it; between them it changes little, a judgement."""
NAMES = tuple(f"above_{height:.0f}" for height in HEIGHTS)
"""Names of the arrays of members."""


def differences(
    place: Arrived, incoming: IncomingAir, solution: Solution, temperature: Array, heating: Array
) -> dict[str, Array]:
    """Temperature over a site minus that at it in every member, both without heat from the ground.

    Parameters
    ----------
    place : Arrived
    incoming : IncomingAir, fields (m, nz)
    solution : Solution
    temperature : ndarray (m,) [K]
        At the site.
    heating : ndarray (m,) [K]
        What of it is heat from the ground.

    Returns
    -------
    dict of str to ndarray (m,) [K]
        By the names in `NAMES`.

    Notes
    -----
    Of the streamlines over the site, with the share that went round mixed in as temperatures: within 0.1 K of the
    profile of a lone crossing, which mixes heat and cloud.
    """
    height = np.broadcast_to(place.elevation + np.array(HEIGHTS), (temperature.size, len(HEIGHTS)))
    share = np.where(height < solution.blocked_top[:, np.newaxis], place.round_share[:, np.newaxis], 0.0)
    low = interpolated(incoming, height)
    beside = frozen_temperature(low.pressure, low.temperature, low.vapour, low.cloud, pressure_at(place.here, height))
    over = (1.0 - share) * sampled(place.here.height, place.here.temperature, height) + share * beside
    found = over - (temperature - heating)[:, np.newaxis]
    return {name: found[:, number] for number, name in enumerate(NAMES)}


def own_differences(air: LeeAir) -> dict[str, float | None]:
    """The same of the answer at a site, None in a pool and in blocked air.

    Parameters
    ----------
    air : LeeAir

    Returns
    -------
    dict of str to (float or None) [K]
    """
    if air.parts is None or air.in_blocked_air:
        return dict.fromkeys(NAMES)
    profile = air.profile
    cool = profile.temperature if profile.warming is None else profile.temperature - profile.warming
    over = np.interp(HEIGHTS, profile.height_above_ground, cool)
    base = air.temperature - air.parts.surface_heating
    return {name: float(value - base) for name, value in zip(NAMES, over, strict=True)}
