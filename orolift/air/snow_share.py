"""Rain or snow by the wet bulb at the ground."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.constants import MELTING_POINT

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

_KELVIN = "orolift works in kelvin; add 273.15 to degrees Celsius."


def snow_share_from_wet_bulb(wet_bulb: ArrayLike, *, threshold: float | None = None) -> NDArray[np.float64]:
    """Share of precipitation that falls as snow, from the wet bulb at the ground. Our choice.

    Parameters
    ----------
    wet_bulb : array_like, any shape [K]
        Over water, 180 K to 330 K.
    threshold : float, optional [K]
        All snow at and below it, all rain above; by default a gradual change.

    Returns
    -------
    ndarray, shape of `wet_bulb` [1]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.

    Notes
    -----
    1 / (1 + 6.99e-5 exp(2 (Tw + 3.97))), Tw in degrees Celsius: Wang et al. (2019) [1]_
    (coefficients from memory; tests hold it against the fit of Jennings et al., made from other data in
    another variable). Half of it is snow at 0.81 degrees.

    References
    ----------
    .. [1] Y.-H. Wang, P. Broxton, Y. Fang, A. Behrangi, M. Barlage, X. Zeng and
       G.-Y. Niu (2019), "A wet-bulb temperature-based rain-snow partitioning
       scheme improves snowpack prediction over the drier western United
       States", Geophys. Res. Lett. 46, 13825-13835.

    Examples
    --------
    >>> snow_share_from_wet_bulb([272.15, 273.15, 274.15, 276.15]).round(2)
    array([0.97, 0.84, 0.41, 0.01])
    """
    tw = within("wet_bulb", wet_bulb, 180.0, 330.0, "K", _KELVIN)
    if threshold is not None:
        return np.where(tw <= within("threshold", threshold, 263.15, 283.15, "K", _KELVIN), 1.0, 0.0)
    return np.asarray(1.0 / (1.0 + 6.99e-5 * np.exp(2.0 * (tw - MELTING_POINT + 3.97))))
