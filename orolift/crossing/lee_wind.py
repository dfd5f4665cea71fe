"""The wind down the lee: estimates of several methods side by side, and what favours a downslope windstorm."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.temperature import virtual_potential_temperature
from orolift.crossing.wind import NEAR_GROUND
from orolift.flow.amplification import tropopause_wind_factor
from orolift.flow.downslope import (
    ESTIMATES,
    WindEstimate,
    finite_amplitude_estimates,
    hydraulic_estimate,
    lee_wind_range,
    pressure_limit,
    transitional_estimate,
)
from orolift.flow.inversion import Inversion, strongest_inversion
from orolift.flow.profiles import layer_mean, value_at
from orolift.flow.windstorm import CONDITIONS, Condition, Setting, windstorm_conditions

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from orolift.crossing.solve import Ground, Solution
    from orolift.crossing.upwind import Upwind

    Array = NDArray[np.float64]

ALONG = 5000.0
"""Distance [m] along the lee over which the strongest wind is a mean: one rock is no windstorm; a judgement."""
DENSITY = 1.1
"""Density [kg m-3] of the air that the fall of pressure drives: near that at 1 km; a judgement."""
WELL_ABOVE = 3000.0
"""Height above the crest [m] at which the wind is compared with that at the crest (as `windstorm.Setting` asks)."""
LOWEST_TROPOPAUSE = 7000.0
"""Height above sea level [m] above which the tropopause is looked for; a judgement."""
TROPOPAUSE_STABILITY = 1.5
"""Rise of buoyancy frequency, as a factor, by which the tropopause is known; a judgement."""


@dataclass(frozen=True)
class LeeWinds:
    """Lee wind of a crossing, along the strongest part of the lee.

    Attributes
    ----------
    strongest : float [m s-1]
        By the spacing of the streamlines, mean over the lowest 300 m and over 5 km, where it is largest in the lee.
    strongest_distance : float [m]
        There.
    low, high : float [m s-1]
        Range that all methods span.
    estimates : tuple of WindEstimate
        Of the other methods that apply.
    conditions : tuple of Condition
        That favour a downslope windstorm, and whether they hold.
    """

    strongest: float
    strongest_distance: float
    low: float
    high: float
    estimates: tuple[WindEstimate, ...]
    conditions: tuple[Condition, ...]


@dataclass(frozen=True, eq=False)
class _Low:
    """The air of each member below the crest (m,): lowest streamline [m], N [s-1], wind [m s-1], its inversion."""

    bottom: Array
    n: Array
    wind: Array
    inversions: tuple[Inversion | None, ...]


def lee_winds(
    ground: Ground,
    solution: Solution,
    crest_wind: ArrayLike,
    pressure_drop: ArrayLike,
    *,
    members: int | None = None,
) -> tuple[LeeWinds, ...]:
    """Lee wind of members by all methods.

    Parameters
    ----------
    ground : Ground
    solution : Solution
    crest_wind : array_like (m,) [m s-1]
    pressure_drop : array_like (m,) [Pa]
        Upwind minus lee, at the same height.
    members : int, optional
        How many, from the first; all when left out.

    Returns
    -------
    tuple of LeeWinds, m

    Notes
    -----
    N and U of the finite-amplitude, transitional and hydraulic figures are
    means from the lowest streamline to the crest, in dry air.
    """
    flow, crest = solution.streams.flow, ground.shape.crest
    some = slice(members)
    count = flow.start_heights[some].shape[0]
    across, drop = (np.broadcast_to(np.asarray(x, np.float64), (count,)) for x in (crest_wind, pressure_drop))
    step = float(ground.transect.distance[1] - ground.transect.distance[0]) * ground.cosine
    strongest, distance = _strongest(ground, solution, some, step)
    low = _low(ground, solution, some)
    critical = np.broadcast_to(flow.critical_level[some], (count,))
    waves = finite_amplitude_estimates(flow.boundary.wave[some], step, low.n, low.wind)
    settings = _settings(ground, solution, across, low, critical)
    out = []
    for i, inversion in enumerate(low.inversions):
        bottom, n, wind = float(low.bottom[i]), float(low.n[i]), float(low.wind[i])
        mixed = [] if inversion is None else [inversion.height - bottom]
        mixed += [float(critical[i]) - bottom] if np.isfinite(critical[i]) else []
        found = (
            waves[i],
            None if inversion is None else hydraulic_estimate(inversion, wind, bottom, crest),
            transitional_estimate(n, wind, max(crest - bottom, 1.0), mixed),
            pressure_limit(max(float(drop[i]), 0.0), DENSITY, float(across[i])),
        )
        estimates = tuple(one for one in found if one is not None)
        ends = lee_wind_range(float(strongest[i]), estimates)
        conditions = windstorm_conditions(settings[i])
        out.append(LeeWinds(float(strongest[i]), float(distance[i]), *ends, estimates, conditions))
    return tuple(out)


def lee_wind_arrays(winds: tuple[LeeWinds, ...]) -> dict[str, Array]:
    """Lee winds of members by name: the strongest, where, that of each method, and which conditions hold.

    Parameters
    ----------
    winds : tuple of LeeWinds, m

    Returns
    -------
    dict of str to ndarray (m,)
        ``lee_wind`` [m s-1], ``lee_wind_distance`` [m], ``lee_wind_KEY`` of each method [m s-1], NaN where it does not
        apply, ``windstorm_KEY`` of each condition, 0 or 1, NaN where it is not known, ``windstorm_conditions``, how
        many hold.
    """
    out = {
        "lee_wind": np.array([one.strongest for one in winds]),
        "lee_wind_distance": np.array([one.strongest_distance for one in winds]),
    }
    each = [{estimate.key: estimate.wind for estimate in one.estimates} for one in winds]
    out |= {f"lee_wind_{key}": np.array([one.get(key, np.nan) for one in each]) for key in ESTIMATES}
    held = np.array([[np.nan if one.met is None else float(one.met) for one in wind.conditions] for wind in winds])
    out |= {f"windstorm_{key}": held[:, number] for number, key in enumerate(CONDITIONS)}
    return out | {"windstorm_conditions": np.nansum(held, axis=1)}


def _strongest(ground: Ground, solution: Solution, some: slice, step: float) -> tuple[Array, Array]:
    """Strongest mean wind along the lee and its place, (m,)."""
    streams, x = solution.streams, ground.transect.distance
    above = streams.flow.heights[some] - streams.flow.heights[some, :1]
    # streamlines that are above the layer everywhere have no say
    outside = np.flatnonzero(np.all(above >= NEAR_GROUND, axis=(0, 2)))
    kept = int(outside[0]) + 1 if outside.size else above.shape[1]
    speed = streams.wind[some, :kept, np.newaxis] * streams.flow.speed_factor[some, :kept]
    speed = _running_mean(_near_ground(above[:, :kept], speed), int(np.ceil(ALONG / step)))
    lee = np.flatnonzero(x >= ground.shape.crest_distance)
    at = lee[np.argmax(speed[:, lee], axis=1)]
    return np.take_along_axis(speed, at[:, np.newaxis], axis=1)[:, 0], x[at]


def _near_ground(above: Array, speed: Array) -> Array:
    """Mean speed over the lowest 300 m above the lowest streamline, (m, nx), by the depth of the layers in it."""
    depth = np.diff(np.minimum(above, NEAR_GROUND), axis=1)
    mean = 0.5 * (speed[:, 1:] + speed[:, :-1])
    return np.asarray(np.sum(depth * mean, axis=1) / np.maximum(np.sum(depth, axis=1), 1.0))


def _running_mean(values: Array, width: int) -> Array:
    """Mean of rows over a number of neighbours, the ends as they are beyond."""
    half = max(width // 2, 0)
    padded = np.pad(values, ((0, 0), (half + 1, half)), mode="edge")
    total = np.cumsum(padded, axis=1)
    return np.asarray((total[:, 2 * half + 1 :] - total[:, : -2 * half - 1]) / (2 * half + 1))


def _low(ground: Ground, solution: Solution, some: slice) -> _Low:
    upwind, crest = solution.upwind, ground.shape.crest
    bottom = solution.streams.flow.start_heights[some, 0]
    top = np.maximum(crest, bottom + 500.0)
    n = np.sqrt(np.maximum(layer_mean(upwind.height, upwind.dry[some], bottom, top), 1e-8))
    wind = np.maximum(layer_mean(upwind.height, upwind.wind[some], bottom, top), 1.0)
    air = upwind.air
    theta_v = virtual_potential_temperature(
        air.pressure[some], air.temperature[some], air.vapour[some], air.cloud[some]
    )
    rows = np.broadcast_to(theta_v, (bottom.size, upwind.height.size))
    inversions = tuple(
        strongest_inversion(upwind.height, row, low + 100.0, crest + 1500.0)
        for row, low in zip(rows, bottom.tolist(), strict=True)
    )
    return _Low(bottom, n, wind, inversions)


def _settings(ground: Ground, solution: Solution, crest_wind: Array, low: _Low, critical: Array) -> tuple[Setting, ...]:
    """What the windstorm conditions of each member are judged by."""
    shape, upwind = ground.shape, solution.upwind
    z, count = upwind.height, low.bottom.size
    some = slice(count)

    def each(values: ArrayLike) -> list[float]:
        return [float(value) for value in np.broadcast_to(np.asarray(values), (count,))]

    def stability(bottom: float, top: float) -> list[float]:
        return each(np.sqrt(np.maximum(layer_mean(z, upwind.dry[some], bottom, top), 0.0)))

    at_crest = int(np.argmin(np.abs(z - shape.crest)))
    bearing = np.arctan2(upwind.air.eastward_wind[some, at_crest], upwind.air.northward_wind[some, at_crest])
    off = each(np.abs((bearing - ground.normal + np.pi) % (2.0 * np.pi) - np.pi))
    well_above = each(value_at(z, upwind.wind[some], [shape.crest + WELL_ABOVE])[:, 0])
    crest_n = stability(shape.crest - 500.0, shape.crest + 500.0)
    upper_n = stability(shape.crest + 1000.0, shape.crest + 4000.0)
    nondimensional = each(low.n * np.maximum(shape.crest - low.bottom, 0.0) / low.wind)
    factor = each(_tropopause_factors(upwind, some, low.wind))
    relief = shape.crest - shape.lee_foot
    return tuple(
        Setting(
            crest_wind=float(crest_wind[i]),
            angle_off_normal=off[i],
            wind_well_above=well_above[i],
            relief=relief,
            lee_slope=relief / max(shape.lee_foot_distance - shape.crest_distance, 1.0),
            nondimensional_height=nondimensional[i],
            inversion_above_crest=np.inf if inversion is None else inversion.height - shape.crest,
            crest_n=crest_n[i],
            upper_n=upper_n[i],
            critical_level_above_crest=float(critical[i]) - shape.crest,
            tropopause_factor=factor[i] if np.isfinite(factor[i]) else None,
        )
        for i, inversion in enumerate(low.inversions)
    )


def _tropopause_factors(upwind: Upwind, some: slice, wind: Array) -> Array:
    """Amplification by the tropopause (Klemp and Lilly 1975), (m,); NaN where none is found 1.5 km below the top."""
    z, out = upwind.height, np.full(wind.size, np.nan)
    n = np.broadcast_to(np.sqrt(np.maximum(upwind.dry[some], 0.0)), (wind.size, z.size))
    tried = z[(z + 1500.0 <= z[-1]) & (z > LOWEST_TROPOPAUSE)]
    if not tried.size:
        return out
    h = tried[:, np.newaxis]
    below, above = (_means(n, inside) for inside in ((z >= h - 2000.0) & (z < h), (z > h) & (z <= h + 1500.0)))
    steps = above > TROPOPAUSE_STABILITY * np.maximum(below, 1e-3)
    there = np.flatnonzero(steps.any(axis=1))
    if there.size:
        height = tried[np.argmax(steps[there], axis=1)]
        under = z < height[:, np.newaxis]
        lower, upper = (np.mean(n[there], axis=1, where=inside) / wind[there] for inside in (under, ~under))
        out[there] = tropopause_wind_factor(lower, upper, height - z[0])
    return out


def _means(values: Array, inside: NDArray[np.bool_]) -> Array:
    """Mean of each row (m, nz) over each set of levels (k, nz): (m, k)."""
    share = inside / np.sum(inside, axis=1, keepdims=True)
    return np.asarray(values @ share.T)
