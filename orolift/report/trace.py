"""The air that reaches a site, followed from the upwind end."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.story import main_site

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import Crossing, LeeAir

    Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Trace:
    """Air followed from the upwind end to a place. Arrays (n,) along its way.

    Attributes
    ----------
    site : LeeAir or None
        The site it reaches, or lies over when cold air stays there; None when no site can be reached and it is
        followed to the lee foot.
    number : int
        Of that site, from 1; 0 without one.
    source : float [m above sea level]
        Where it starts.
    distance, height : ndarray [m]
    pressure : ndarray [Pa]
    temperature, dew_point : ndarray [K]
    vapour, cloud, fallen : ndarray [kg per kg of dry air]
        In the air, and lost by then.
    entropy : ndarray [J K-1 per kg of dry air]
    """

    site: LeeAir | None
    number: int
    source: float
    distance: Array
    height: Array
    pressure: Array
    temperature: Array
    dew_point: Array
    vapour: Array
    cloud: Array
    fallen: Array
    entropy: Array

    @property
    def top(self) -> int:
        """Index of its highest point."""
        return int(np.argmax(self.height))

    @property
    def wet(self) -> NDArray[np.bool_]:
        """Where it is in cloud."""
        lost = np.diff(self.fallen, prepend=self.fallen[0])
        return np.asarray((self.cloud > 0.0) | (lost > 0.0), dtype=np.bool_)


@dataclass(frozen=True, eq=False)
class Way:
    """The way of the air that reaches a place. Arrays (n,) along it.

    Attributes
    ----------
    source : float [m above sea level]
        Where it starts.
    distance, height : ndarray [m]
    number : ndarray [1]
        Of the streamline it is on, between two of them in parts.
    count : int
        Places of the crossing before its end.
    share : float [1]
        Of the last step up to its end.
    """

    source: float
    distance: Array
    height: Array
    number: Array
    count: int
    share: float

    def along(self, values: Array) -> Array:
        """Values (nk, nz) of a crossing along the way, (n,)."""
        return at_number(_until(values, self.count, self.share), self.number)


def way(crossing: Crossing, site: LeeAir | None) -> Way:
    """The way of the air that reaches a site.

    Parameters
    ----------
    crossing : Crossing
    site : LeeAir or None
        None follows the air to the lee foot.

    Returns
    -------
    Way

    Notes
    -----
    It ends on the streamline in the middle of the layer that is mixed at the site. It starts at the
    source level and comes onto that streamline halfway to the crest, because the lowest air is mixed on the way there.
    """
    foot = crossing.features.lee_foot_distance, crossing.features.lee_foot
    place, ground = foot if site is None else (site.distance, site.elevation)
    count = int(np.clip(np.searchsorted(crossing.distance, place), 2, crossing.distance.size - 1))
    x = np.append(crossing.distance[:count], np.clip(place, crossing.distance[0], crossing.distance[-1]))
    share = float((x[-1] - x[-2]) / (crossing.distance[count] - x[-2]))
    heights = _until(crossing.height, count, share)
    depth = float(np.asarray(crossing.settings.mixing_depth))
    numbers = np.arange(heights.shape[1], dtype=np.float64)
    arriving = float(np.interp(ground + 0.5 * depth, heights[-1], numbers))
    source = _source(crossing, site, float(np.interp(arriving, numbers, crossing.start_height)))
    starting = float(np.interp(source, crossing.start_height, numbers))
    halfway = 0.5 * (float(x[0]) + crossing.features.crest_distance)
    done = np.clip((x - x[0]) / max(halfway - float(x[0]), 1.0), 0.0, 1.0)
    number = starting + (arriving - starting) * done * done * (3.0 - 2.0 * done)
    return Way(source, x, at_number(heights, number), number, count, share)


def _until(values: Array, count: int, share: float) -> Array:
    """Values of the streamlines up to a place."""
    last = (1.0 - share) * values[count - 1 : count] + share * values[count : count + 1]
    return np.concatenate([values[:count], last])


def trace(crossing: Crossing) -> Trace:
    """The air that reaches the main site.

    Parameters
    ----------
    crossing : Crossing

    Returns
    -------
    Trace
    """
    site: LeeAir | None = main_site(crossing)
    if site is None or site.in_blocked_air:
        site = None
    gone = way(crossing, site)
    air = crossing.air
    fields = {
        "pressure": air.pressure,
        "temperature": air.temperature,
        "dew_point": crossing.dew_point,
        "vapour": air.vapour,
        "cloud": air.cloud,
        "fallen": np.cumsum(air.removed, axis=0),
        "entropy": air.entropy,
    }
    along = {name: gone.along(values) for name, values in fields.items()}
    number = 0 if site is None else site.number
    return Trace(site=site, number=number, source=gone.source, distance=gone.distance, height=gone.height, **along)


def _source(crossing: Crossing, site: LeeAir | None, arriving: float) -> float:
    """Height [m] at which the air is picked up: the source level, or the middle of the mixed layer it comes from."""
    bottom = float(crossing.start_height[0])
    depth = crossing.settings.inflow_depth
    if site is not None and site.source_level is not None and site.went_round <= 0.0:
        return max(site.source_level, bottom)
    return bottom + 0.5 * depth if arriving <= bottom + depth else arriving


def at_number(values: Array, number: Array) -> Array:
    """Values (n, nz) at streamline numbers (n,), between two of them by straight lines."""
    below = np.clip(number.astype(np.intp), 0, values.shape[1] - 2)
    share = number - below
    row = np.arange(values.shape[0])
    return np.asarray((1.0 - share) * values[row, below] + share * values[row, below + 1])
