"""Hot-Dry-Windy index: the driest and the windiest air a fire can mix down."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.fire.dryness import fire_wind, vapour_pressure_deficit

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

LAYER = 500.0
"""Depth above ground [m] of the layer of the Hot-Dry-Windy index: Srock et al. (2018)."""
_HECTOPASCAL = 100.0


def hot_dry_windy(
    height_above_ground: ArrayLike,
    temperature: ArrayLike,
    relative_humidity: ArrayLike,
    wind: ArrayLike,
    *,
    depth: float = LAYER,
) -> NDArray[np.float64]:
    """Hot-Dry-Windy index of the air over a place.

    Parameters
    ----------
    height_above_ground : array_like, shape (nz,) [m]
        Increasing, the first at most `depth`.
    temperature : array_like, shape (..., nz) [K]
        173.15 to 338.15 K.
    relative_humidity : array_like, shape (..., nz) [1]
        0 to 1.
    wind : array_like, shape (..., nz) [m s-1]
        0 to 130 m/s, in the free air; the only index here that means the wind aloft.
    depth : float [m]
        50 to 2000 m.

    Returns
    -------
    ndarray, shape (...) [hPa m s-1]
        Read against what is usual at the same place and season; no threshold holds everywhere.

    Raises
    ------
    OutOfRangeError
        If a value is out of range, heights do not increase, or none lies in the layer.

    Notes
    -----
    Srock et al. (2018) [1]_: the largest wind times the largest vapour pressure deficit of the layer above ground, each
    taken by itself: they may lie at different heights. The published layer is the lowest 50 hPa, about 500 m; here it
    is 500 m everywhere, so that sites at different heights are compared over the same depth (at 2500 m, 50 hPa
    is 600 m). Values at the top of the layer are read between levels. It knows weather only: neither fuel, drought
    and live moisture nor slope.

    References
    ----------
    .. [1] A. F. Srock, J. J. Charney, B. E. Potter and S. L. Goodrick (2018), "The Hot-Dry-Windy Index: A new fire
       weather index", Atmosphere 9, 279, doi:10.3390/atmos9070279.

    Examples
    --------
    >>> hot_dry_windy([2.0, 150.0, 400.0], [305.15, 303.65, 301.15], [0.18, 0.19, 0.22], [6.0, 10.0, 14.0]).round(-1)
    np.float64(550.0)
    """
    top = float(within("depth", depth, 50.0, 2000.0, "m", "Give metres above ground."))
    z = within("height_above_ground", height_above_ground, 0.0, 30000.0, "m", "Give metres above ground.")
    within("height_above_ground, lowest", z[0], 0.0, top, "m", "No level lies in the layer.")
    if z.size > 1:
        within("height_above_ground, step", np.diff(z), 1e-6, 30000.0, "m", "Heights must increase.")
    deficit, speed = np.broadcast_arrays(vapour_pressure_deficit(temperature, relative_humidity), fire_wind(wind))
    return np.asarray(_largest(z, speed, top) * _largest(z, deficit, top) / _HECTOPASCAL)[()]


def _largest(z: NDArray[np.float64], values: NDArray[np.float64], top: float) -> NDArray[np.float64]:
    """Largest value from the lowest level to `top`, (...)."""
    inside = np.max(values[..., z <= top], axis=-1)
    above = int(np.searchsorted(z, top, side="right"))
    if above == z.size:
        return np.asarray(inside)
    share = (top - z[above - 1]) / (z[above] - z[above - 1])
    return np.asarray(np.maximum(inside, (1.0 - share) * values[..., above - 1] + share * values[..., above]))
