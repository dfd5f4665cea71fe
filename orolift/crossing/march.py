"""The moist march: many streamlines stepped downwind together."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air import equilibrium, phase, steps
from orolift.air.parcel import Parcel, entropy, equilibrium_from_entropy

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class March:
    """Air along streamlines, and the water that left it.

    Attributes
    ----------
    pressure : ndarray, shape (nx, ...) [Pa]
        As given; x grows downwind.
    temperature : ndarray, shape (nx, ...) [K]
    vapour, cloud : ndarray, shape (nx, ...) [kg per kg of dry air]
        What is in the air at each place, after the removal there.
    condensed : ndarray, shape (nx, ...) [kg per kg of dry air]
        Water newly condensed on the step that ends at each place.
    removed : ndarray, shape (nx, ...) [kg per kg of dry air]
        Of it, the water that left the air there; with rain worked out, that turned to falling water.
    entropy : ndarray, shape (nx, ...) [J K-1 per kg of dry air]
        Moist entropy of what is left; changes only where water is removed.
    """

    pressure: Array
    temperature: Array
    vapour: Array
    cloud: Array
    condensed: Array
    removed: Array
    entropy: Array


def march(start: Parcel, pressure: ArrayLike, removed_share: ArrayLike = 0.0, *, freezing: bool = True) -> March:
    """Air taken along prescribed pressures, a share of what condenses leaving at once.

    Parameters
    ----------
    start : Parcel, any shape (...)
        Air at the upwind end; cloud it brings stays until it evaporates.
    pressure : array_like, shape (nx, ...) [Pa]
        Pressure along each streamline, upwind end first.
    removed_share : array_like, broadcast with (...) [1]
        Share of newly condensed water that leaves, 0 to 1.
    freezing : bool
        Whether condensate freezes between 0 and -20 degrees Celsius.

    Returns
    -------
    March

    Notes
    -----
    Each step is reversible at constant moist entropy and total water, which
    is the first law integrated exactly; then the removed water leaves at
    constant temperature and pressure and takes its own entropy along. With
    nothing removed the air returns exactly, whatever the step. The removal is
    first order in the step: with 512 steps the error of the lee temperature is
    below 0.01 K (see ``tests/crossing/test_march.py``).

    Streamlines that never condense, or lose nothing, are solved for all
    places at once; only the others are stepped.
    """
    path = np.asarray(pressure, dtype=np.float64)
    shape = np.broadcast_shapes(path.shape[1:], np.shape(start.temperature))
    path = np.stack([np.broadcast_to(level, shape) for level in path]).reshape(path.shape[0], -1)
    share, s, water, cloud = (
        np.broadcast_to(np.asarray(x, dtype=np.float64), shape).reshape(-1)
        for x in (removed_share, entropy(start, freezing=freezing), start.vapour + start.cloud, start.cloud)
    )
    temperature, cloudy = equilibrium.cloudless(path, s, water, freezing=freezing)
    out = {
        "temperature": temperature,
        "vapour": np.broadcast_to(water, path.shape).copy(),
        "cloud": np.zeros_like(path),
        "condensed": np.zeros_like(path),
        "removed": np.zeros_like(path),
        "entropy": np.broadcast_to(s, path.shape).copy(),
    }
    saturated = cloudy.any(axis=0)
    keeping, losing = np.flatnonzero(saturated & (share <= 0.0)), np.flatnonzero(saturated & (share > 0.0))
    if keeping.size:
        kept = equilibrium_from_entropy(path[:, keeping], s[keeping], water[keeping], freezing=freezing)
        for key, value in (("temperature", kept.temperature), ("vapour", kept.vapour), ("cloud", kept.cloud)):
            out[key][:, keeping] = value
        out["condensed"][:, keeping] = np.maximum(np.diff(kept.cloud, axis=0, prepend=cloud[np.newaxis, keeping]), 0.0)
    if losing.size:
        places = np.flatnonzero(cloudy[:, losing].any(axis=1))
        way = range(int(places[0]), int(places[-1]) + 1)
        if way.start == 0:
            before = path[0, losing], np.broadcast_to(start.temperature, shape).reshape(-1)[losing], cloud[losing]
        else:
            before = path[way.start - 1, losing], temperature[way.start - 1, losing], np.zeros(losing.size)
        _step(out, path, losing, way, before, water[losing], share[losing], freezing=freezing)
    whole = (path.shape[0], *shape)
    return March(pressure=path.reshape(whole), **{key: value.reshape(whole) for key, value in out.items()})


def _step(
    out: dict[str, Array],
    path: Array,
    losing: NDArray[np.intp],
    way: range,
    before: tuple[Array, Array, Array],
    water: Array,
    share: Array,
    *,
    freezing: bool,
) -> None:
    """Step the streamlines that lose water from the first cloudy place of one of them to the last.

    `before` is pressure, temperature and cloud just before. Beyond, air that has lost water is even
    further from cloud than air that has not: all places are solved at once.
    """
    p = path[:, losing]
    scaled = p[way.start : way.stop] * equilibrium.PER_TRIPLE_PRESSURE
    log_scaled = np.log(scaled)
    s = out["entropy"][way.start, losing] * equilibrium.PER_RV
    pressure, temperature, cloud = before
    start = np.log(temperature * equilibrium.PER_TRIPLE)
    air = steps.air_at(pressure * equilibrium.PER_TRIPLE_PRESSURE, start, water, freezing=freezing)
    for i in way:
        air = steps.moved(air, scaled[i - way.start], log_scaled[i - way.start], s, freezing=freezing)
        found = air.water - air.vapour
        new = np.maximum(found - cloud, 0.0)
        removed = share * new
        s = s - removed * steps.condensate_entropy(air)
        cloud = found - removed
        air = air._replace(water=air.water - removed)
        for key, value in (
            ("temperature", phase.TRIPLE * air.t),
            ("vapour", air.vapour),
            ("cloud", cloud),
            ("condensed", new),
            ("removed", removed),
            ("entropy", phase.R_VAPOUR * s),
        ):
            out[key][i, losing] = value
    water, s = air.water, phase.R_VAPOUR * s
    rest = slice(way.stop, path.shape[0])
    if way.stop < path.shape[0]:
        clear = equilibrium_from_entropy(p[rest], s, water, freezing=freezing)
        for key, value in (("temperature", clear.temperature), ("vapour", clear.vapour), ("cloud", clear.cloud)):
            out[key][rest, losing] = value
        out["condensed"][rest, losing] = 0.0
        out["entropy"][rest, losing] = s
