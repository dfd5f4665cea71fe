"""What a crossing is worked out with: one value for all, or one for each member."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.flow.surface_wind import OPEN_COUNTRY_ROUGHNESS

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

DEFAULT_GOING_ROUND = 0.4
"""Share of low lee air that went round when nothing says otherwise: on 66 real pairs of soundings neither end holds."""
USUAL_TIME = 1000.0
"""Cloud time and fall time [s]: usual value of Smith and Barstad (2004), J. Atmos. Sci. 61, 1377-1391."""


@dataclass(frozen=True)
class Settings:
    """Options of a crossing; numbers may be arrays of shape (m,), one for each member.

    Attributes
    ----------
    removed_share : array_like or None [1]
        Prescribed share of the condensed water that leaves at once, 0 to 1; None
        lets rain form and fall in the two times.
    cloud_time, fall_time : array_like [s]
        In which cloud turns to falling water, and in which that falls; 50 to 20000.
    critical_value : array_like [1]
        Non-dimensional height at which a uniform column starts to be blocked, 0.1 to 10; 0.75 to 3 makes sense.
    going_round_share : array_like or None [1]
        Share of the lee air below the blocked top that went round, 0 to 1; None
        takes it from the gaps of the range where they are known, else 0.4.
    mixing_depth : array_like [m]
        Lee air over which a site's air is mixed, 10 to 1000.
    inflow_depth : float [m]
        Depth of the lowest unblocked air that is mixed before it crosses, 0 to 2000.
    roughness : float [m]
        Roughness length for the wind at 10 m, 0.0001 to 2; 0.03 is open country.
    freezing : bool
        Whether condensate freezes between 0 and -20 degrees Celsius.
    surface_heat : bool
        Whether the ground heats and cools the lee air, where time and place are known.
    """

    removed_share: ArrayLike | None = None
    cloud_time: ArrayLike = USUAL_TIME
    fall_time: ArrayLike = USUAL_TIME
    critical_value: ArrayLike = 1.5
    going_round_share: ArrayLike | None = None
    mixing_depth: ArrayLike = 100.0
    inflow_depth: float = 500.0
    roughness: float = OPEN_COUNTRY_ROUGHNESS
    freezing: bool = True
    surface_heat: bool = True


def checked(settings: Settings) -> Settings:
    """Settings as arrays, all in their range.

    Raises
    ------
    OutOfRangeError
        If one is not.
    """
    share = "It is a share, not a percentage."
    return Settings(
        removed_share=None
        if settings.removed_share is None
        else within("removed_share", settings.removed_share, 0.0, 1.0, "1", share),
        cloud_time=within("cloud_time", settings.cloud_time, 50.0, 20000.0, "s", "Give seconds, usually 1000."),
        fall_time=within("fall_time", settings.fall_time, 50.0, 20000.0, "s", "Give seconds, usually 1000."),
        critical_value=within("critical_value", settings.critical_value, 0.1, 10.0, "1", "It is a number near 1.5."),
        going_round_share=None
        if settings.going_round_share is None
        else within("going_round_share", settings.going_round_share, 0.0, 1.0, "1", share),
        mixing_depth=within("mixing_depth", settings.mixing_depth, 10.0, 1000.0, "m", "Give metres."),
        inflow_depth=float(within("inflow_depth", settings.inflow_depth, 0.0, 2000.0, "m", "Give metres.")),
        roughness=float(within("roughness", settings.roughness, 1e-4, 2.0, "m", "Give the roughness length.")),
        freezing=settings.freezing,
        surface_heat=settings.surface_heat,
    )


def each(value: ArrayLike, members: int) -> np.ndarray[tuple[int, ...], np.dtype[np.float64]]:
    """One value for each member, shape (m,)."""
    return np.broadcast_to(np.asarray(value, dtype=np.float64), (members,))
