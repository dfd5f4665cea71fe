"""What the method itself gets wrong: spread of its errors where the incoming air is known, growing with distance."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

TEMPERATURE_ERROR, TEMPERATURE_GROWTH = 1.5, 0.5e-5
"""Standard deviation of the lee temperature [K] right at the incoming air, a judgement (no pair nearer than 150 km);
and its growth [K m-1], so that 80 % of 66 real pairs of soundings lie in the 10 to 90 % range: docs/accuracy.md."""
VAPOUR_ERROR, VAPOUR_GROWTH = 0.6e-3, 0.25e-8
"""The same of the lee mixing ratio [kg per kg], [kg per kg m-1]."""


def model_error(distance: ArrayLike) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Standard deviations of the error of a crossing, where the incoming air itself is known.

    Parameters
    ----------
    distance : array_like, any shape [m]
        From where the incoming air was measured to the site; 0 to 20 000 km.

    Returns
    -------
    temperature : ndarray, same shape [K]
    vapour : ndarray, same shape [kg per kg of dry air]

    Raises
    ------
    OutOfRangeError
        If a distance is out of range.

    Notes
    -----
    ``sqrt(near^2 + (growth distance)^2)``. Refined from the layer of 50 to 500 m over the ground; air measured a few
    hundred kilometres away is not the air that crosses, and no method can know the difference.

    Examples
    --------
    >>> temperature, vapour = model_error(0.0)
    >>> float(temperature), float(vapour)
    (1.5, 0.0006)
    """
    away = within("distance", distance, 0.0, 2e7, "m", "Give metres from the incoming air to the site.")
    return np.hypot(TEMPERATURE_ERROR, TEMPERATURE_GROWTH * away), np.hypot(VAPOUR_ERROR, VAPOUR_GROWTH * away)
