"""The inversion of a column: where it is and how strong."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.flow.profiles import checked_height

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

INVERSION_GRADIENT = 9.8e-3
"""Rise of potential temperature with height [K m-1] above which temperature rises too: g / cp, by definition."""


@dataclass(frozen=True)
class Inversion:
    """A layer in which temperature rises with height.

    Attributes
    ----------
    height : float [m]
        Of its middle, above sea level.
    depth : float [m]
    jump : float [K]
        Rise of potential temperature across it.
    potential_temperature : float [K]
        Below it.
    """

    height: float
    depth: float
    jump: float
    potential_temperature: float


def strongest_inversion(
    height: ArrayLike, potential_temperature: ArrayLike, bottom: float, top: float, *, least_jump: float = 1.0
) -> Inversion | None:
    """Strongest inversion between two heights.

    Parameters
    ----------
    height : array_like, shape (nz,) [m]
        Above sea level, strictly increasing.
    potential_temperature : array_like, shape (nz,) [K]
        100 K to 3000 K; the virtual one where vapour matters.
    bottom, top : float [m]
        Its middle lies between.
    least_jump : float [K]
        Weaker ones are left out: a judgement.

    Returns
    -------
    Inversion or None

    Raises
    ------
    OutOfRangeError
        If heights do not increase or a temperature is outside its range.

    Notes
    -----
    Neighbouring layers whose potential temperature rises by 9.8 K per km or more, taken together.

    Examples
    --------
    >>> found = strongest_inversion([0.0, 900.0, 1100.0, 4000.0], [288.0, 289.0, 295.0, 304.0], 0.0, 3000.0)
    >>> found.height, found.jump
    (1000.0, 6.0)
    """
    levels = checked_height(height)
    theta = within("potential_temperature", potential_temperature, 100.0, 3000.0, "K", "Give kelvin.")
    stable = np.diff(theta) >= INVERSION_GRADIENT * np.diff(levels)
    edges = np.flatnonzero(np.diff(np.concatenate([[0], stable.astype(int), [0]])))
    found: Inversion | None = None
    for foot, head in zip(edges[::2], edges[1::2], strict=True):
        middle, jump = 0.5 * float(levels[foot] + levels[head]), float(theta[head] - theta[foot])
        inside = bottom <= middle <= top and jump >= least_jump
        if inside and (found is None or jump > found.jump):
            found = Inversion(middle, float(levels[head] - levels[foot]), jump, float(theta[foot]))
    return found
