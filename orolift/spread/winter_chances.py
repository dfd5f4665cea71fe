"""How likely rain on snow cover and freezing rain are, by the members of a crossing and of the rain over its map."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from orolift.spread.rain_members import RainMembers
    from orolift.spread.spread import Spread


def winter_chances(
    spread: Spread | None, *, snow_cover_above: float | None = None, mapped: RainMembers | None = None
) -> dict[str, float]:
    """Share of the members that cross in which rain falls on snow cover, and in which it freezes on the ground.

    Parameters
    ----------
    spread : Spread or None
    snow_cover_above : float, optional [m above sea level]
        Lowest ground with snow on it.
    mapped : RainMembers, optional
        Rain over the map in members: rain on snow beside the line counts as well.

    Returns
    -------
    dict of str to float [1]
        ``rain_on_snow``, only with snow cover, and ``freezing_rain``; empty without members that cross. No error of
        the method of rain is known.
    """
    if spread is None or not spread.crosses.any():
        return {}
    across = spread.crosses
    out = {"freezing_rain": float(np.mean(spread.values["freezing_rain"][across] > 0.0))}
    if snow_cover_above is not None:
        highest = np.nan_to_num(spread.values["rain_up_to"][across], nan=-np.inf)
        if mapped is not None:
            highest = np.maximum(highest, np.nan_to_num(mapped.values["rain_up_to"][across], nan=-np.inf))
        out["rain_on_snow"] = float(np.mean(highest >= snow_cover_above))
    return out
