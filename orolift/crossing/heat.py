"""Heat and vapour from the ground on the way to the lee: by day the sun's, mixed upward; by night a loss."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.saturation import latent_heat_of_vaporisation, saturation_vapour_pressure_over_liquid
from orolift.constants import (
    EPSILON,
    GRAVITY,
    HEAT_CAPACITY_DRY_AIR,
    KAPPA,
    R_VAPOUR,
    REFERENCE_PRESSURE,
)
from orolift.crossing.sun import sun_height

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import ArrayLike, NDArray

    from orolift.crossing.result import LeeAir, When
    from orolift.crossing.settings import Settings

    Array = NDArray[np.float64]

MOISTURE = 0.6
"""How much of its potential the ground evaporates: 1 is moist grass, 0.45 dry grassland, 0 none (Holtslag and van Ulden
1983, from memory). Between the two: a judgement."""
NIGHT_FLUX = -60.0
"""Flux into the air [W m-2] at night: 30 to 70 W m-2 leave windy air on clear nights (common practice, no published
source); on 66 real pairs of soundings 60 leaves little bias at night."""
NIGHT_DEPTH = 800.0
"""Depth [m] from which the night takes heat; a judgement."""
LONGEST = 8.0 * 3600.0
"""Longest time [s] for which the night takes heat: then the ground is as cold as the sky lets it be; a judgement."""
LONGEST_WAY = 24.0 * 3600.0
"""The way of the air is followed back for no longer [s]: that holds one day and one night."""
FADING = 2.0 * 3600.0
"""Time [s] in which the day's heat is forgotten after sunset and the night's loss after sunrise: the incoming air of
the same hour has it too; a judgement."""
DAY_DEPTH = 3000.0
"""The day's heat is not mixed higher than this [m]; a judgement."""
LEAST_DEPTH = 100.0
"""The day's heat is mixed over no less than this [m]: wind does that much; a judgement."""
SPACING = 25.0
STEPS = 145
"""Moments of the way at which fluxes are worked out."""
_TRAPEZOIDS = np.concatenate([[0.5], np.ones(STEPS - 2), [0.5]])
"""Weights of even steps by the trapezoidal rule, but for the length of a step."""
SHADE, SHADE_POWER = 0.75, 3.4
"""A sky with the share N under cloud passes 1 - 0.75 N^3.4 of the sun (Kasten and Czeplak 1980, from memory)."""
CLOUD_LONGWAVE = 60.0
"""Longwave radiation [W m-2] from cloud that covers the sky (Holtslag and van Ulden 1983, c2, from memory)."""
MUCH = 1.0
"""Warming by the sun on the ground [K] from which cloud over the range is worth a caution; a judgement."""


@dataclass(frozen=True, eq=False)
class SurfaceHeat:
    """What the ground gave the air. Arrays of one shape: travel time and air broadcast.

    Attributes
    ----------
    sensible : ndarray [J m-2]
        Heat of the day; 0 or more.
    evaporated : ndarray [kg m-2]
        Vapour of the day; 0 or more.
    lost : ndarray [J m-2]
        Heat taken by the night; 0 or less.
    duration : ndarray [s]
        Of the way that was followed.
    """

    sensible: Array
    evaporated: Array
    lost: Array
    duration: Array

    def times(self, factor: ArrayLike) -> SurfaceHeat:
        """The same times a factor, 0 or more."""
        f = np.asarray(factor, np.float64)
        return SurfaceHeat(self.sensible * f, self.evaporated * f, self.lost * f, self.duration)


@dataclass(frozen=True, eq=False)
class GroundChange:
    """What the ground changes over a place. Arrays (..., q).

    Attributes
    ----------
    temperature : ndarray [K]
    vapour : ndarray [kg per kg of dry air]
    """

    temperature: Array
    vapour: Array


def cloud_shade(cover: ArrayLike) -> Array:
    """Share of the sun that passes a sky with cloud.

    Parameters
    ----------
    cover : array_like [1]
        Share of the sky under cloud, 0 to 1.

    Returns
    -------
    ndarray [1]
        Of what a clear sky passes: 1 down to 0.25.

    Notes
    -----
    ``1 - 0.75 N^3.4`` (Kasten and Czeplak (1980) [1]_, from memory), a mean over all kinds of cloud.

    References
    ----------
    .. [1] F. Kasten and G. Czeplak (1980), "Solar and terrestrial radiation dependent on the amount and type of
       cloud", Solar Energy 24, 177-189.

    Examples
    --------
    >>> [round(float(cloud_shade(n)), 2) for n in (0.0, 0.5, 1.0)]
    [1.0, 0.93, 0.25]
    """
    return np.asarray(1.0 - SHADE * np.asarray(cover, np.float64) ** SHADE_POWER)


def ground_fluxes(
    sine: ArrayLike,
    temperature: ArrayLike,
    pressure: ArrayLike,
    moisture: float = MOISTURE,
    *,
    cover: ArrayLike = 0.0,
) -> tuple[Array, Array]:
    """Sensible heat and evaporation of the ground.

    Parameters
    ----------
    sine : array_like [1]
        Of the height of the sun.
    temperature, pressure : array_like [K], [Pa]
        Of the air at the ground.
    moisture : float [1]
        0 for dry ground to 1 for moist grass.
    cover : array_like [1]
        Share of the sky under cloud, 0 to 1.

    Returns
    -------
    sensible : ndarray [W m-2]
        Upward; 0 where there is none.
    evaporation : ndarray [kg m-2 s-1]
        0 where there is no sensible heat.

    Notes
    -----
    Holtslag and van Ulden (1983) [1]_, coefficients from memory: the sun ``K = 990 sin(height) - 30``, times
    `cloud_shade` of the cover N; net radiation ``Q = (0.77 K + 5.31e-13 T^6 - sigma T^4 + 60 N) / 1.12``, of which a
    tenth goes into the ground; ``H = ((1 - a) + g) / (1 + g) 0.9 Q - 20 a`` and
    ``L E = a / (1 + g) 0.9 Q + 20 a``, g the psychrometric constant over the slope of the saturation pressure.
    W m-2 and K.

    References
    ----------
    .. [1] A. A. M. Holtslag and A. P. van Ulden (1983), "A simple scheme for daytime estimates of the surface
       fluxes from routine weather data", J. Climate Appl. Meteor. 22, 517-529.

    Examples
    --------
    High sun over dry ground and over moist grass at 20 degrees Celsius:

    >>> [round(float(ground_fluxes(0.9, 293.15, 1e5, a)[0])) for a in (0.0, 1.0)]
    [467, 126]
    """
    up, t, p = (np.asarray(x, np.float64) for x in (sine, temperature, pressure))
    sun = np.maximum(990.0 * up - 30.0, 0.0) * cloud_shade(cover)
    net = (0.77 * sun - longwave_loss(t) + CLOUD_LONGWAVE * np.asarray(cover, np.float64)) / 1.12
    latent = latent_heat_of_vaporisation(t)
    slope = latent * saturation_vapour_pressure_over_liquid(t) / (R_VAPOUR * t**2)
    ratio = HEAT_CAPACITY_DRY_AIR * p / (EPSILON * latent) / slope
    sensible = ((1.0 - moisture) + ratio) / (1.0 + ratio) * 0.9 * net - 20.0 * moisture
    evaporation = (moisture / (1.0 + ratio) * 0.9 * net + 20.0 * moisture) / latent
    shines = sensible > 0.0
    return np.where(shines, sensible, 0.0), np.where(shines, evaporation, 0.0)


def longwave_loss(temperature: ArrayLike) -> Array:
    """Longwave radiation that leaves the ground under a clear sky, less what comes back.

    Parameters
    ----------
    temperature : array_like [K]
        Of the air at the ground.

    Returns
    -------
    ndarray [W m-2]
        ``sigma T^4 - 5.31e-13 T^6`` (Swinbank's formula, as in Holtslag and van Ulden (1983), from memory).
    """
    t = np.asarray(temperature, np.float64)
    return np.asarray(5.67e-8 * t**4 - 5.31e-13 * t**6)


def surface_heat(
    time: float,
    longitude: float,
    latitude: float,
    travel_time: ArrayLike,
    temperature: ArrayLike,
    pressure: ArrayLike,
    *,
    cover: ArrayLike | None = None,
) -> SurfaceHeat:
    """What the ground gives the air on its way from where the incoming air was found to a site.

    Parameters
    ----------
    time : float [s]
        Arrival, seconds since 1970-01-01T00:00:00 UTC.
    longitude, latitude : float [degrees east, degrees north]
    travel_time : array_like, any shape [s]
        Of the way; at most 24 hours count. The sun is worked out once for each.
    temperature, pressure : array_like, broadcast with it [K], [Pa]
        Of the air at the ground of the site.
    cover : array_like (..., 145), optional [1]
        Share of the sky under cloud, 0 to 1, at even steps of time from the beginning of what counts to arrival
        (`orolift.crossing.way.cover_on_the_way`); without it the sky is clear.

    Returns
    -------
    SurfaceHeat

    Raises
    ------
    OutOfRangeError
        If time or place is out of range.

    Notes
    -----
    By day `ground_fluxes`, by night -60 W m-2 for at most 8 hours, added up over the way by the trapezoidal rule. Only
    the present day or the present night counts in full: incoming air of the same hour has been through what was before
    as well, so that of the night (day) before no more than ``exp(-t / 2 h)`` is left a time t after the change. Day
    and night are those of a clear sky. Under cloud the fluxes are the means, by `cover`, of those of a clear and of an
    overcast sky, those by day no larger than under a clear one; the night's loss is as much smaller as net longwave
    radiation is, by 60 W m-2 of `longwave_loss` (a judgement). Snow, sea and slope are not known to it.
    """
    duration = np.clip(np.asarray(travel_time, np.float64), 0.0, LONGEST_WAY)
    t, p = (np.asarray(x, np.float64)[..., np.newaxis] for x in (temperature, pressure))
    back = duration[..., np.newaxis] * np.linspace(1.0, 0.0, STEPS)
    sine = np.sin(sun_height(time - back, longitude, latitude))
    sensible, evaporation = ground_fluxes(sine, t, p)
    day = sensible > 0.0
    weight = _remembered(day, back) * _TRAPEZOIDS
    step = duration / (STEPS - 1.0)

    def sums(values: Array) -> Array:
        return np.asarray(step * np.einsum("...i,...i->...", weight, values))

    night = np.where(day, 0.0, NIGHT_FLUX)
    lost = np.maximum(sums(night), NIGHT_FLUX * LONGEST)
    if cover is not None and np.any(cover):
        n = np.asarray(cover, np.float64)
        shaded = ground_fluxes(sine, t, p, cover=1.0)
        sensible, evaporation = (
            clear - n * np.maximum(clear - under, 0.0)
            for clear, under in zip((sensible, evaporation), shaded, strict=True)
        )
        kept = n * CLOUD_LONGWAVE / np.maximum(longwave_loss(t), CLOUD_LONGWAVE)
        lost = lost * (1.0 - sums(night * kept) / np.minimum(sums(night), -1e-9))
    return SurfaceHeat(sums(sensible), sums(evaporation), lost, np.broadcast_to(duration, lost.shape))


def _remembered(day: NDArray[np.bool_], back: Array) -> Array:
    """How much each moment of the way counts: the present day or night in full, the one before as far as it is left."""
    present = _since(day == day[..., -1:])
    before = _since((day != day[..., -1:]) | present) & ~present
    age = np.max(np.where(present, back, 0.0), axis=-1, keepdims=True)
    return np.asarray(present + before * np.exp(-age / FADING))


def _since(true: NDArray[np.bool_]) -> NDArray[np.bool_]:
    """Whether true from here to the end, along the last axis."""
    return np.logical_and.accumulate(true[..., ::-1], axis=-1)[..., ::-1]


def ground_change(
    heat: SurfaceHeat, height: Array, pressure: ArrayLike, temperature: ArrayLike, vapour: ArrayLike
) -> GroundChange:
    """What heat and vapour from the ground change in the air over a place.

    Parameters
    ----------
    heat : SurfaceHeat, fields (...)
    height : ndarray (q,) [m above ground]
        From 0 to 3000 m or more, growing.
    pressure, temperature, vapour : array_like (..., q) [Pa], [K], [kg per kg of dry air]
        Of the air without that.

    Returns
    -------
    GroundChange

    Notes
    -----
    By day the lowest air is mixed to one potential temperature and one mixing ratio, as deep as the heat
    reaches without overshooting (encroachment, Stull 1988, An Introduction to Boundary Layer
    Meteorology, chapter 11): the deepest layer whose top is no warmer, in potential temperature, than the layer then
    is. By night the lowest 800 m lose heat evenly. Heat and vapour are kept; between levels by straight lines.
    """
    grid = np.arange(0.0, DAY_DEPTH + 0.5 * SPACING, SPACING)
    lines = np.stack([np.interp(grid, height, row) for row in np.eye(height.size)])
    p, t, v = (np.asarray(x, np.float64) @ lines for x in (pressure, temperature, vapour))
    edge = 0.5 * (p[..., 1:] + p[..., :-1])
    edge = np.concatenate([p[..., :1], edge, p[..., -1:]], axis=-1)
    mass = (edge[..., :-1] - edge[..., 1:]) / GRAVITY
    exner = (p / REFERENCE_PRESSURE) ** KAPPA
    theta, capacity = t / exner, HEAT_CAPACITY_DRY_AIR * mass * exner
    gain = heat.sensible[..., np.newaxis]
    inside, held = np.cumsum(capacity, axis=-1), np.cumsum(capacity * theta, axis=-1)
    reached = np.maximum.accumulate(theta * inside - held, axis=-1) <= gain
    reached = (reached | (grid <= LEAST_DEPTH)) & (gain > 0.0)

    def layer(amount: Array, weight: Array, added: Array) -> Array:
        kept = np.where(reached, weight, 0.0)
        whole = np.maximum(np.sum(kept, axis=-1, keepdims=True), 1e-9)
        mean = (np.sum(kept * amount, axis=-1, keepdims=True) + added) / whole
        return np.where(reached, mean - amount, 0.0)

    warming = exner * layer(theta, capacity, gain)
    low = grid <= NIGHT_DEPTH
    below = HEAT_CAPACITY_DRY_AIR * np.sum(np.where(low, mass, 0.0), axis=-1, keepdims=True)
    warming = warming + np.where(low, heat.lost[..., np.newaxis] / below, 0.0)
    moistening = layer(v, mass, heat.evaporated[..., np.newaxis])
    back = np.stack([np.interp(height, grid, row, right=0.0) for row in np.eye(grid.size)])
    return GroundChange(warming @ back, moistening @ back)


def heat_notes(settings: Settings, when: When) -> tuple[str, ...]:
    """That heat from the ground is left out because time or place is not known; nothing where it is counted."""
    if not settings.surface_heat or None not in (when.time, when.longitude, when.latitude):
        return ()
    unknown = "time" if when.time is None else "place"
    return (f"The {unknown} is not known: heat from the ground, by day and by night, is left out.",)


def heat_cautions(lee: Iterable[LeeAir], *, cloudy: bool) -> tuple[str, ...]:
    """That much heat of the sun is counted though there is cloud, of which only the raining part shades.

    Parameters
    ----------
    lee : iterable of LeeAir
    cloudy : bool
        Whether the crossing has cloud.

    Returns
    -------
    tuple of str
    """
    if not cloudy or not any(air.parts is not None and air.parts.surface_heating >= MUCH for air in lee):
        return ()
    text = (
        f"The sun on the ground warms the lee air by more than {MUCH:g} °C. It is shaded where the crossing rains "
        "0.5 mm/h or more; elsewhere it is counted as under a clear sky, but cloud forms over the range: under it the "
        "warming is less. surface_heat = false in [heat] leaves it out."
    )
    return (text,)
