"""What the method itself gets wrong: spread of its errors where the incoming air is known, growing with distance."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

TEMPERATURE_ERROR = 2.0
"""Standard deviation of the lee temperature [K] near the incoming air; a judgement."""
VAPOUR_ERROR = 0.8e-3
"""Standard deviation of the lee mixing ratio [kg per kg] near the incoming air; a judgement."""


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

    Examples
    --------
    >>> temperature, vapour = model_error(0.0)
    >>> float(temperature), float(vapour)
    (2.0, 0.0008)
    """
    away = within("distance", distance, 0.0, 2e7, "m", "Give metres from the incoming air to the site.")
    return np.full_like(away, TEMPERATURE_ERROR), np.full_like(away, VAPOUR_ERROR)
