"""Depth of the air that mixes up from the ground: how far smoke rises, and from how far up wind may come down."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.flow.profiles import value_at

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Array = NDArray[np.float64]

EXCESS = 0.5
"""Excess of virtual potential temperature of rising air [K]; common practice, no published source."""


def mixing_height(
    height_above_ground: ArrayLike,
    virtual_potential_temperature: ArrayLike,
    *,
    heat: ArrayLike = 0.0,
    excess: float = EXCESS,
) -> Array:
    """Height to which air from the ground mixes by its own warmth.

    Parameters
    ----------
    height_above_ground : array_like, shape (nz,) [m]
        Increasing from the ground.
    virtual_potential_temperature : array_like, shape (..., nz) [K]
        Of the air before the ground heated it.
    heat : array_like, shape (...) [K m]
        Heat from the ground over density and heat capacity, 0 to 20000.
    excess : float [K]
        Of rising air over its surroundings, 0 to 5.

    Returns
    -------
    ndarray, shape (...) [m above ground]
        At most the highest level, which then stands for "at least".

    Raises
    ------
    OutOfRangeError
        If a value is out of range or heights do not increase.

    Notes
    -----
    Two steps. The heat fills the profile from below up to the height z at which ``z theta_v(z)`` less the integral of
    theta_v from the ground to z equals it (encroachment: Stull 1988 [1]_, chapter 11, from memory). From
    there a parcel with the excess rises to where the air is as light (parcel method, Holzworth 1964 [2]_). Wind makes
    turbulence of its own: in a strong lee wind, and always at night, the mixed layer is deeper than this.

    References
    ----------
    .. [1] R. B. Stull (1988), "An Introduction to Boundary Layer Meteorology", Kluwer.
    .. [2] G. C. Holzworth (1964), "Estimates of mean maximum mixing depths in the contiguous United States",
       Mon. Weather Rev. 92, 235-242.

    Examples
    --------
    >>> z = np.array([0.0, 1000.0, 2000.0])
    >>> mixing_height(z, 290.0 + 0.005 * z, excess=0.0, heat=2500.0).round(0)
    np.float64(1000.0)
    """
    z = within("height_above_ground", height_above_ground, 0.0, 30000.0, "m", "Give metres above ground.")
    within("height_above_ground, step", np.diff(z), 1e-6, 30000.0, "m", "Heights must increase.")
    theta = within("virtual_potential_temperature", virtual_potential_temperature, 150.0, 1000.0, "K", "Give kelvin.")
    given = within("heat", heat, 0.0, 2e4, "K m", "Heat over density and heat capacity, 0 or more.")
    extra = float(within("excess", excess, 0.0, 5.0, "K", ""))
    fine = np.linspace(z[0], z[-1], STEPS)
    profile = value_at(z, theta, fine)
    depth = fine - fine[0]
    below = np.concatenate(
        [
            np.zeros((*profile.shape[:-1], 1)),
            np.cumsum(0.5 * (profile[..., 1:] + profile[..., :-1]) * np.diff(fine), axis=-1),
        ],
        axis=-1,
    )
    # Air that is colder above than below mixes without any heat: the running maximum takes that in.
    needed = np.maximum.accumulate(profile * depth - below, axis=-1)
    filled = _first_above(needed, given[..., np.newaxis], fine)
    warm = value_at(fine, np.maximum.accumulate(profile, axis=-1), filled[..., np.newaxis])[..., 0] + extra
    warm = np.maximum(warm, profile[..., 0] + extra)
    risen = _first_above(profile, warm[..., np.newaxis], fine)
    return np.asarray(np.maximum(filled, risen))[()]


STEPS = 301
"""Levels on which the mixing height is looked for: every 10 m of a profile to 3 km."""


def _first_above(values: Array, limit: Array, z: Array) -> Array:
    """Lowest height at which values (..., nz) exceed a limit (..., 1), between levels by straight lines."""
    values, limit = np.broadcast_arrays(values, limit)
    above = values > limit
    number = np.where(above.any(axis=-1), above.argmax(axis=-1), values.shape[-1] - 1)
    before = np.maximum(number - 1, 0)

    def at(index: NDArray[np.intp], of: Array) -> Array:
        return np.asarray(np.take_along_axis(of, index[..., np.newaxis], axis=-1)[..., 0])

    low, high, goal = at(before, values), at(number, values), limit[..., 0]
    rise = np.where(high > low, high - low, 1.0)
    share = np.where(high > low, np.clip((goal - low) / rise, 0.0, 1.0), 1.0)
    return np.asarray(z[before] + share * (z[number] - z[before]))
