"""What a solution says about water and flow, as plain numbers and sentences."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.arrival import over, pressure_at
from orolift.crossing.pool import chance_of_breaking_through
from orolift.crossing.result import Flow, Water
from orolift.crossing.sun import sun_height
from orolift.flow.blocking import possible_regimes, regime
from orolift.flow.layers import layers_of_column
from orolift.flow.scales import deformation_radius, rossby_number
from orolift.flow.stability import unstable_share
from orolift.flow.trapped import trapped_waves

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.pool import Lee
    from orolift.crossing.result import When
    from orolift.crossing.settings import Settings
    from orolift.crossing.solve import Ground, Solution

    Array = NDArray[np.float64]

OBLIQUE = np.radians(45.0)
"""Angle between transect and range normal beyond which it is flagged (design choice)."""
LOW_RIDGE = 100.0
"""A range lower than this [m] is worked out with a caution (design choice)."""
SLOW_ROTATION = 1.0
"""Rossby number below which rotation matters; common practice, no published source."""
NEIGHBOURHOOD = 50e3
"""Distance [m] along the range within which its crest line is described; a judgement."""
LOW_BREAKING = 3000.0
"""Height above the crest [m] below which breaking waves matter for the lee; a judgement."""
UNSTABLE = 0.2
"""Share of the layer below the crest that may be unstable before it is said; a judgement."""


def water(solution: Solution, column_vapour_flux: float) -> Water:
    """Water of the crossing air, each streamline weighted by the air it carries.

    Parameters
    ----------
    solution : Solution
        The first member counts.
    column_vapour_flux : float [kg m-1 s-1]

    Returns
    -------
    Water
    """
    streams = solution.streams
    carried, start = streams.carried[0], streams.start
    return Water(
        vapour_in=float(np.sum(carried * start.vapour[0])),
        condensed=float(np.sum(carried * streams.air.condensed[:, 0, :].sum(axis=0))),
        removed=float(streams.falling.landed[:, 0].sum()),
        evaporated=float(streams.falling.evaporated[:, 0].sum()),
        beyond=float(streams.falling.beyond[0]),
        column_vapour_flux=column_vapour_flux,
    )


def flow_facts(
    ground: Ground,
    solution: Solution,
    crest_wind: float,
    settings: Settings,
    lee: Lee,
    when: When,
    *,
    trapped: bool = True,
) -> Flow:
    """How the air meets the range, as plain numbers.

    Parameters
    ----------
    ground : Ground
    solution : Solution
        The first member counts.
    crest_wind : float [m s-1]
    settings : Settings
    lee : Lee
    when : When
    trapped : bool
        Whether trapped waves are looked for.

    Returns
    -------
    Flow
    """
    shape, blocked, streams = ground.shape, solution.blocking, solution.streams
    n, h_hat = float(blocked.stability[0]), float(blocked.nondimensional_height[0])
    latitude = None if when.latitude is None else np.radians(when.latitude)
    sun = None
    if when.time is not None and when.longitude is not None and when.latitude is not None:
        sun = float(sun_height(when.time, when.longitude, when.latitude))
    critical = float(streams.flow.critical_level[0])
    pool = solution.pools[0]
    return Flow(
        normal=ground.normal,
        crest_wind=crest_wind,
        stability=n,
        nondimensional_height=min(h_hat, LARGEST_NONDIMENSIONAL),
        regime=regime(h_hat).value,
        possible_regimes=tuple(one.value for one in possible_regimes(min(h_hat, LARGEST_NONDIMENSIONAL))),
        dividing_height=float(blocked.dividing_height[0]),
        blocked_top=float(solution.blocked_top[0]),
        blocked_top_low=float(blocked.lowest_top[0]),
        blocked_top_high=float(blocked.highest_top[0]),
        counterflow_top=float(blocked.counterflow_top[0]),
        going_round_share=float(solution.going_round[0]),
        going_round_source=_going_round_source(ground, settings),
        rossby_number=None if latitude is None else float(rossby_number(crest_wind, shape.half_width, latitude)),
        deformation_radius=None
        if latitude is None
        else float(deformation_radius(n, shape.crest - shape.base, latitude)),
        breaks_through=(pool is None) if lee.known else None,
        break_through_chance=chance_of_breaking_through(sun, crest_wind) if not lee.known else float(pool is None),
        wave_breaking=bool(low_breaking(solution, shape.crest)[0]),
        trapped_wavelength=_trapped_wavelength(solution) if trapped else None,
        critical_level=critical if np.isfinite(critical) else None,
        pressure_difference=float(pressure_differences(ground, solution)[0]),
    )


LARGEST_NONDIMENSIONAL = 99.0
"""Non-dimensional heights beyond this, as in calm air, are given as this."""


def _going_round_source(ground: Ground, settings: Settings) -> str:
    if settings.going_round_share is not None:
        return "given"
    if ground.lowest_pass is not None:
        return "from the lowest pass"
    if ground.crest_line is not None:
        return "from the gaps of the crest line"
    return "assumed"


def crest_line_notes(ground: Ground, blocked_top: float) -> tuple[str, ...]:
    """Lowest pass and mean crest of the range, and where low air gets through, in a sentence; nothing where unknown.

    Parameters
    ----------
    ground : Ground
    blocked_top : float [m above sea level]

    Returns
    -------
    tuple of str
    """
    line = ground.crest_line
    if line is None:
        return ()
    near = np.abs(line.distance) <= NEIGHBOURHOOD
    if near.sum() < 2:
        return ()
    x, z = line.distance[near], line.elevation[near]
    lowest = int(np.argmin(z))
    side = "right" if x[lowest] > 0.0 else "left"
    sentence = (
        f"Within {NEIGHBOURHOOD / 1000:.0f} km along the range the crest line has a mean of {z.mean():.0f} m; its "
        f"lowest pass, {z[lowest]:.0f} m, lies {abs(x[lowest]) / 1000:.0f} km to the {side} of the line, looking "
        "downwind."
    )
    if blocked_top <= ground.shape.base + 1.0:
        return (sentence,)
    way = "through it" if z[lowest] < blocked_top else "only over the crest: no pass is below the blocked top"
    return (f"{sentence} Low air gets {way}.",)


def low_breaking(solution: Solution, crest: float) -> NDArray[np.bool_]:
    """Whether the wave breaks less than 3 km above the crest, (m,); higher up thin air makes every wave steep."""
    flow = solution.streams.flow
    steep = np.any(flow.breaking & (flow.heights < crest + LOW_BREAKING), axis=(-2, -1))
    # not higher than linear waves bear: steep spots are those of the ground
    return np.asarray(steep & (flow.boundary.wave_share < 1.0))


def _trapped_wavelength(solution: Solution) -> float | None:
    """Length of the longest wave that the dry column over the lee traps."""
    upwind = solution.upwind
    column = layers_of_column(
        upwind.height, upwind.density[0], upwind.wind[0], upwind.dry[0], solution.streams.flow.start_heights[0]
    )
    found = trapped_waves(column).wavelength
    return float(found[0]) if found.size else None


def pressure_differences(ground: Ground, solution: Solution) -> Array:
    """Incoming pressure minus lee pressure at the height of the lee foot, (m,) [Pa]."""
    shape = ground.shape
    here = over(solution.streams, ground.transect.distance, shape.lee_foot_distance)
    lee = pressure_at(here, np.full((here.height.shape[0], 1), shape.lee_foot))[:, 0]
    z, log_p = solution.upwind.height, np.log(solution.upwind.air.pressure)
    upwind = np.exp(np.array([np.interp(shape.lee_foot, z, row) for row in log_p]))
    if shape.lee_foot < z[0]:
        upwind *= np.exp((z[0] - shape.lee_foot) * (log_p[:, 0] - log_p[:, 1]) / (z[1] - z[0]))
    return np.asarray(upwind - lee)


def remarks(ground: Ground, solution: Solution, flow: Flow) -> tuple[str, ...]:
    """Cautions that apply to this case, in sentences.

    Parameters
    ----------
    ground : Ground
    solution : Solution
    flow : Flow

    Returns
    -------
    tuple of str
    """
    shape, streams, out = ground.shape, solution.streams, []
    if np.arccos(np.clip(ground.cosine, -1.0, 1.0)) > OBLIQUE:
        off = np.degrees(np.arccos(ground.cosine))
        out.append(f"The line runs {off:.0f} degrees off the direction across the range: flow along it is left out.")
    if flow.counterflow_top > shape.base + 1.0:
        out.append(
            f"Below {flow.counterflow_top:.0f} m the incoming air is calm or moves away from the range; "
            "it counts as blocked."
        )
    if shape.crest - shape.base < LOW_RIDGE:
        out.append(f"The range rises only {shape.crest - shape.base:.0f} m: errors of the input outweigh its effect.")
    if flow.critical_level is not None:
        out.append(
            f"The wind across the range fades or turns back at {flow.critical_level:.0f} m: waves do not pass that "
            "level, and downslope winds can be stronger than worked out here."
        )
    if flow.rossby_number is not None and flow.rossby_number < SLOW_ROTATION:
        out.append("The range is so wide for this wind that the Earth's rotation matters; it is left out.")
    if not bool(streams.settled[0]):
        out.append("The flow did not settle between saturated and dry air; streamlines are less certain.")
    unstable = float(unstable_share(solution.upwind.height, solution.upwind.dry[0], shape.base, shape.crest))
    if unstable > UNSTABLE:
        out.append(
            f"{unstable:.0%} of the layer below the crest is neutral or unstable: it is taken as neutral, and showers "
            "are not worked out."
        )
    if flow.wave_breaking:
        out.append("Waves break over the range: turbulence, and winds that linear theory does not give.")
    if bool(streams.flow.weak_wind[0]):
        out.append("The lowest crossing air hardly moves; waves are worked out with 2.5 m/s there.")
    return tuple(out)
