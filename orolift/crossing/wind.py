"""The wind in the lee: estimates of several methods, the range they span, the wind at 10 m and its gusts."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.temperature import virtual_potential_temperature
from orolift.crossing.arrival import sampled
from orolift.flow.amplification import tropopause_wind_factor
from orolift.flow.downslope import (
    WindEstimate,
    finite_amplitude_estimate,
    hydraulic_estimate,
    lee_wind_range,
    pressure_limit,
    transitional_estimate,
)
from orolift.flow.inversion import Inversion, strongest_inversion
from orolift.flow.profiles import layer_mean
from orolift.flow.surface_wind import gust_range, wind_near_ground
from orolift.flow.windstorm import Condition, Setting, windstorm_conditions

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.arrival import Here
    from orolift.crossing.solve import Ground, Solution

    Array = NDArray[np.float64]

NEAR_GROUND = 300.0
"""Depth [m] over which the wind near the ground is averaged, by the spacing of streamlines; a judgement."""
ALONG = 5000.0
"""Distance [m] along the lee over which the strongest wind is a mean: one rock is no windstorm; a judgement."""
GUST_DEPTH = 1000.0
"""Height above ground [m] from which turbulence may bring wind down; a judgement."""
WELL_ABOVE = 3000.0
"""Height above the crest [m] at which the wind is compared with that at the crest (as `windstorm.Setting` asks)."""
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


@dataclass(frozen=True)
class SiteWind:
    """Wind at a site, across the range [m s-1].

    Attributes
    ----------
    wind : float
        Mean over the lowest 300 m of crossing air.
    low, high : float
        Range of the methods, in proportion.
    at_10m : float
        By the logarithmic law.
    gust_low, gust_high : float
    """

    wind: float
    low: float
    high: float
    at_10m: float
    gust_low: float
    gust_high: float


def lee_winds(ground: Ground, solution: Solution, crest_wind: float, pressure_drop: float) -> LeeWinds:
    """Lee wind of the first member by all methods.

    Parameters
    ----------
    ground : Ground
    solution : Solution
    crest_wind : float [m s-1]
    pressure_drop : float [Pa]
        Upwind minus lee, at the same height.

    Returns
    -------
    LeeWinds

    Notes
    -----
    N and U of the finite-amplitude, transitional and hydraulic figures are
    means from the lowest streamline to the crest, in dry air.
    """
    shape, upwind, flow = ground.shape, solution.upwind, solution.streams.flow
    speed = _near_ground(flow.heights[0], solution.streams.wind[0][:, np.newaxis] * flow.speed_factor[0])
    lee = np.flatnonzero(ground.transect.distance >= shape.crest_distance)
    step = float(ground.transect.distance[1] - ground.transect.distance[0]) * ground.cosine
    speed = _running_mean(speed, int(np.ceil(ALONG / step)))
    strongest = int(lee[np.argmax(speed[lee])])
    bottom = float(flow.start_heights[0, 0])
    top = max(shape.crest, bottom + 500.0)
    n = float(np.sqrt(max(float(layer_mean(upwind.height, upwind.dry[:1], bottom, top)[0]), 1e-8)))
    wind = max(float(layer_mean(upwind.height, upwind.wind[:1], bottom, top)[0]), 1.0)
    theta_v = virtual_potential_temperature(
        upwind.air.pressure[0], upwind.air.temperature[0], upwind.air.vapour[0], upwind.air.cloud[0]
    )
    inversion = strongest_inversion(upwind.height, theta_v, bottom + 100.0, shape.crest + 1500.0)
    critical = float(flow.critical_level[0])
    mixed = [] if inversion is None else [inversion.height - bottom]
    mixed += [critical - bottom] if np.isfinite(critical) else []
    found = (
        finite_amplitude_estimate(flow.boundary.wave[0], step, n, wind),
        None if inversion is None else hydraulic_estimate(inversion, wind, bottom, shape.crest),
        transitional_estimate(n, wind, max(shape.crest - bottom, 1.0), mixed),
        pressure_limit(max(pressure_drop, 0.0), 1.1, crest_wind),
    )
    estimates = tuple(one for one in found if one is not None)
    low, high = lee_wind_range(float(speed[strongest]), estimates)
    setting = _setting(ground, solution, crest_wind, n, wind, inversion)
    return LeeWinds(
        strongest=float(speed[strongest]),
        strongest_distance=float(ground.transect.distance[strongest]),
        low=low,
        high=high,
        estimates=estimates,
        conditions=windstorm_conditions(setting),
    )


@dataclass(frozen=True, eq=False)
class WindsAt:
    """Wind of every member over a place, across the range; arrays (m,) [m s-1].

    Attributes
    ----------
    mean : ndarray
        Over the lowest 300 m of crossing air.
    at_10m, gust_low, gust_high : ndarray
        As in `SiteWind`.
    """

    mean: Array
    at_10m: Array
    gust_low: Array
    gust_high: Array


def winds_at(here: Here, roughness: float) -> WindsAt:
    """Wind of every member over a place.

    Parameters
    ----------
    here : Here
    roughness : float [m]
        Roughness length.

    Returns
    -------
    WindsAt

    Notes
    -----
    The logarithmic law starts at 150 m, the middle of the layer the wind is averaged over.
    """
    bottom = here.height[:, :1]
    mean = np.mean(sampled(here.height, here.wind, bottom + np.linspace(0.0, NEAR_GROUND, 7)), axis=-1)
    aloft = np.max(sampled(here.height, here.wind, bottom + np.linspace(0.0, GUST_DEPTH, 11)), axis=-1)
    at_10m = wind_near_ground(mean, 0.5 * NEAR_GROUND, roughness=roughness)
    return WindsAt(mean, at_10m, *gust_range(at_10m, aloft, roughness=roughness))


def site_wind(here: Here, winds: LeeWinds, roughness: float) -> SiteWind:
    """Wind at a site of the first member.

    Parameters
    ----------
    here : Here
    winds : LeeWinds
    roughness : float [m]
        Roughness length.

    Returns
    -------
    SiteWind

    Notes
    -----
    The range of the methods holds where the wind is strongest and is taken
    in proportion elsewhere.
    """
    all_of_them = winds_at(here, roughness)
    wind = float(all_of_them.mean[0])
    part = wind / max(winds.strongest, 0.1)
    return SiteWind(
        wind=wind,
        low=min(winds.low * part, wind),
        high=max(winds.high * part, wind),
        at_10m=float(all_of_them.at_10m[0]),
        gust_low=float(all_of_them.gust_low[0]),
        gust_high=float(all_of_them.gust_high[0]),
    )


def _near_ground(height: Array, speed: Array) -> Array:
    """Mean speed over the lowest 300 m above the lowest streamline, (nx,), by the depth of the layers in it."""
    above = np.minimum(height - height[:1], NEAR_GROUND)
    depth = np.diff(above, axis=0)
    mean = 0.5 * (speed[1:] + speed[:-1])
    return np.asarray(np.sum(depth * mean, axis=0) / np.maximum(np.sum(depth, axis=0), 1.0))


def _running_mean(values: Array, width: int) -> Array:
    """Mean over a number of neighbours, the ends as they are beyond."""
    half = max(width // 2, 0)
    padded = np.concatenate([np.full(half, values[0]), values, np.full(half, values[-1])])
    return np.convolve(padded, np.full(2 * half + 1, 1.0 / (2 * half + 1)), mode="valid")


def _setting(
    ground: Ground, solution: Solution, crest_wind: float, n: float, wind: float, inversion: Inversion | None
) -> Setting:
    """What the windstorm conditions are judged by."""
    shape, upwind, flow = ground.shape, solution.upwind, solution.streams.flow
    z, dry = upwind.height, upwind.dry[:1]

    def stability(low: float, high: float) -> float:
        return float(np.sqrt(max(float(layer_mean(z, dry, low, high)[0]), 0.0)))

    air = upwind.air
    at_crest = int(np.argmin(np.abs(z - shape.crest)))
    bearing = float(np.arctan2(air.eastward_wind[0, at_crest], air.northward_wind[0, at_crest]))
    off = abs((bearing - ground.normal + np.pi) % (2.0 * np.pi) - np.pi)
    critical = float(flow.critical_level[0])
    bottom = float(flow.start_heights[0, 0])
    return Setting(
        crest_wind=crest_wind,
        angle_off_normal=off,
        wind_well_above=float(np.interp(shape.crest + WELL_ABOVE, z, upwind.wind[0])),
        relief=shape.crest - shape.lee_foot,
        lee_slope=(shape.crest - shape.lee_foot) / max(shape.lee_foot_distance - shape.crest_distance, 1.0),
        nondimensional_height=n * max(shape.crest - bottom, 0.0) / wind,
        inversion_above_crest=np.inf if inversion is None else inversion.height - shape.crest,
        crest_n=stability(shape.crest - 500.0, shape.crest + 500.0),
        upper_n=stability(shape.crest + 1000.0, shape.crest + 4000.0),
        critical_level_above_crest=critical - shape.crest,
        tropopause_factor=_tropopause_factor(solution, wind),
    )


def _tropopause_factor(solution: Solution, wind: float) -> float | None:
    """Amplification by the tropopause (Klemp and Lilly 1975), None where none is found below 14 km."""
    upwind = solution.upwind
    z, n = upwind.height, np.sqrt(np.maximum(upwind.dry[0], 0.0))
    middle = z + 1500.0 <= z[-1]
    below = np.array([np.mean(n[(z >= h - 2000.0) & (z < h)]) for h in z[middle & (z > 7000.0)]])
    above = np.array([np.mean(n[(z > h) & (z <= h + 1500.0)]) for h in z[middle & (z > 7000.0)]])
    found = np.flatnonzero(above > TROPOPAUSE_STABILITY * np.maximum(below, 1e-3))
    if not found.size:
        return None
    height = float(z[middle & (z > 7000.0)][found[0]])
    lower = float(np.mean(n[z < height])) / wind
    upper = float(np.mean(n[z >= height])) / wind
    return float(tropopause_wind_factor(lower, upper, height - z[0]))
