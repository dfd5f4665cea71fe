"""A column cut into layers in which density, wind and stability are constant."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.constants import GRAVITY
from orolift.errors import OutOfRangeError
from orolift.flow.profiles import checked_height, integral_to, value_at
from orolift.flow.scales import LEAST_WIND

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

_SMOOTHING = 1500.0  # [m] to either side: neither density nor stability is known layer by layer to better than the sum


@dataclass(frozen=True)
class Layers:
    """Layers for the wave solver; leading axes hold members.

    Attributes
    ----------
    edge : ndarray, shape (..., nl + 1) [m]
        From the lowest streamline to the top.
    density, wind, n_squared : ndarray, shape (..., nl) [kg m-3, m s-1, s-2]
        Wind across the range, at least `scales.LEAST_WIND`; stability at least 0.
    compression : ndarray, shape (..., nl) [m-1]
        Gravity over the square of the speed of sound, by which rising air expands; 0 for an incompressible column.
    jump : ndarray, shape (..., nl + 1) [m s-2]
        Reduced gravity ``g dtheta / theta`` of a sharp inversion at each edge; 0 at the others.
    carrying : ndarray of int, shape (...)
        How many of the layers, from below, carry waves: those above the critical
        level do not.
    critical : ndarray of bool, shape (...)
        Whether there is a critical level.
    weak_below : ndarray of bool, shape (...)
        Whether wind had to be raised to `scales.LEAST_WIND` in the lowest layers.
    """

    edge: NDArray[np.float64]
    density: NDArray[np.float64]
    wind: NDArray[np.float64]
    n_squared: NDArray[np.float64]
    compression: NDArray[np.float64]
    jump: NDArray[np.float64]
    carrying: NDArray[np.intp]
    critical: NDArray[np.bool_]
    weak_below: NDArray[np.bool_]


def layers(
    edge: ArrayLike,
    density: ArrayLike,
    wind: ArrayLike,
    n_squared: ArrayLike,
    jump: ArrayLike = 0.0,
    *,
    compression: ArrayLike = 0.0,
) -> Layers:
    """Layers from values that are constant in each.

    Use `layers_of_column` for profiles given at levels.

    Parameters
    ----------
    edge : array_like, shape (..., nl + 1) [m]
        Strictly increasing.
    density : array_like, shape (..., nl) or scalar [kg m-3]
        More than 0.
    wind : array_like, shape (..., nl) or scalar [m s-1]
        Across the range. Layers from the first that falls below 2.5 m/s after a faster
        one carry no waves; slow layers below all others count as 2.5 m/s.
    n_squared : array_like, shape (..., nl) or scalar [s-2]
        Negative counts as neutral.
    jump : array_like, shape (..., nl + 1) or scalar [m s-2]
        Sharp inversions at the edges.
    compression : array_like, shape (..., nl) or scalar [m-1]
        Gravity over the square of the speed of sound; 0 leaves expansion out.

    Returns
    -------
    Layers

    Raises
    ------
    OutOfRangeError
        If edges do not increase or a density is not positive.

    Notes
    -----
    Steady linear waves are singular where the wind vanishes, and are absorbed
    there when the Richardson number is more than 1/4 (Booker and Bretherton 1967, J.
    Fluid Mech. 27, 513-539, from memory); so the top that absorbs all waves is put just
    below that level.

    Examples
    --------
    >>> layers([0.0, 1e3, 2e3, 3e3], 1.0, [10.0, 8.0, 1.0], 1e-4).carrying
    array(2)
    """
    edges = np.asarray(edge, np.float64)
    if edges.shape[-1] < 2 or not np.all(np.diff(edges, axis=-1) > 0.0):
        raise OutOfRangeError("edge: layers need at least 2 edges that strictly increase. Sort them and drop doubles.")
    count = edges.shape[-1] - 1
    parts = [np.asarray(part, np.float64) for part in (density, wind, n_squared, compression)]
    lead = np.broadcast_shapes(edges.shape[:-1], *(part.shape[:-1] for part in parts), np.shape(jump)[:-1])
    rho, speed, stiffness, expansion = (np.broadcast_to(part, (*lead, count)) for part in parts)
    within("density", rho, 1e-6, 20.0, "kg m-3", "Give kilograms a cubic metre.")
    fast = speed >= LEAST_WIND
    reached = np.logical_or.accumulate(fast, axis=-1)
    stopped = reached & ~fast
    critical = np.any(stopped, axis=-1)
    return Layers(
        edge=np.broadcast_to(edges, (*lead, count + 1)),
        density=rho,
        wind=np.maximum(speed, LEAST_WIND),
        n_squared=np.maximum(stiffness, 0.0),
        compression=np.maximum(expansion, 0.0),
        jump=np.broadcast_to(np.asarray(jump, np.float64), (*lead, count + 1)),
        carrying=np.where(critical, np.argmax(stopped, axis=-1), count),
        critical=critical,
        weak_below=~fast[..., 0],
    )


def layers_of_column(
    height: ArrayLike, density: ArrayLike, wind: ArrayLike, n_squared: ArrayLike, edge: ArrayLike
) -> Layers:
    """Layers between given edges, with the means of a column's profiles.

    Means are exact for profiles that are straight lines between levels, so an
    inversion thinner than a layer keeps its strength.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        Strictly increasing.
    density, wind, n_squared : array_like, shape (..., nz) [kg m-3, m s-1, s-2]
        Beyond the column the end values go on.
    edge : array_like, shape (..., nl + 1) [m]
        Strictly increasing.

    Returns
    -------
    Layers

    Raises
    ------
    OutOfRangeError
        If heights or edges do not increase or a density is not positive.

    Notes
    -----
    See `compression` for the expansion of rising air.

    Examples
    --------
    >>> column = ([0.0, 2e3], [1.2, 1.0], [10.0, 20.0], [1e-4, 1e-4])
    >>> layers_of_column(*column, [0.0, 1e3, 2e3]).wind
    array([12.5, 17.5])
    """
    levels = checked_height(height)
    edges = np.asarray(edge, np.float64)
    depth = np.diff(edges, axis=-1)
    if not np.all(depth > 0.0):
        raise OutOfRangeError("edge: layers need edges that strictly increase. Sort them and drop doubles.")
    means = [np.diff(integral_to(levels, part, edges), axis=-1) / depth for part in (density, wind, n_squared)]
    middle = 0.5 * (edges[..., 1:] + edges[..., :-1])
    return layers(edges, *means, compression=compression(levels, density, n_squared, middle))


def compression(height: ArrayLike, density: ArrayLike, n_squared: ArrayLike, level: ArrayLike) -> NDArray[np.float64]:
    """Gravity over the square of the speed of sound, by which rising air expands.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        Strictly increasing.
    density, n_squared : array_like, shape (..., nz) [kg m-3, s-2]
    level : array_like, shape (..., m) [m]
        Heights at which it is wanted.

    Returns
    -------
    ndarray, shape (..., m) [m-1]
        At least 0: a column whose density does not fall enough for its stability is incompressible.

    Notes
    -----
    What the fall of density has beyond stability, ``g / c^2 = -d ln(rho)/dz - N^2 / g``, averaged over
    3 km, for dry and saturated air alike. It is 8.5e-5 at 288 K and 1.1e-4 at 220 K.

    Examples
    --------
    >>> compression([0.0, 1e3, 2e3], np.exp([0.0, -0.095, -0.19]), [1e-4] * 3, [1e3]).round(6)
    array([8.5e-05])
    """
    levels = checked_height(height)
    wanted = np.asarray(level, np.float64)
    low = np.clip(wanted - _SMOOTHING, levels[0], levels[-1] - 1.0)
    high = np.clip(wanted + _SMOOTHING, low + 1.0, levels[-1])
    log_density = np.log(np.asarray(density, np.float64))
    fall = value_at(levels, log_density, low) - value_at(levels, log_density, high)
    stable = integral_to(levels, n_squared, high) - integral_to(levels, n_squared, low)
    return np.asarray(np.maximum((fall - stable / GRAVITY) / (high - low), 0.0))


def least_richardson_number(column: Layers) -> NDArray[np.float64]:
    """Smallest Richardson number between the layers that carry waves.

    Below 1/4 linear waves do not describe the flow: say so.

    Parameters
    ----------
    column : Layers

    Returns
    -------
    ndarray, shape (...) [1]
        Infinite without shear.

    Examples
    --------
    >>> least_richardson_number(layers([0.0, 1e3, 2e3], 1.0, [10.0, 20.0], 1e-4))
    array(1.)
    """
    middle = 0.5 * (column.edge[..., 1:] + column.edge[..., :-1])
    shear = np.diff(column.wind, axis=-1) / np.diff(middle, axis=-1)
    stiffness = 0.5 * (column.n_squared[..., 1:] + column.n_squared[..., :-1])
    sheared = shear != 0.0
    ratio = np.where(sheared, stiffness / np.where(sheared, shear, 1.0) ** 2, np.inf)
    counted = np.arange(1, column.wind.shape[-1]) < column.carrying[..., None]
    return np.asarray(np.min(np.where(counted, ratio, np.inf), axis=-1, initial=np.inf))
