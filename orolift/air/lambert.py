"""The lower branch of the Lambert function, in the logarithmic form that cannot underflow."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray


def lower_lambert(logarithm: ArrayLike) -> NDArray[np.float64]:
    """Solution w below -1 of w + ln(-w) = `logarithm`.

    With z = -exp(`logarithm`) this is W of z on the lower branch. Dew points
    and the condensation level have this form, and z itself can be smaller
    than any float there.

    Parameters
    ----------
    logarithm : array_like, any shape [1]
        Right-hand side, below about -1.1; nearer to -1 the branch point is
        close and the result loses digits.

    Returns
    -------
    ndarray, shape of `logarithm` [1]

    Notes
    -----
    Newton's method from the first two terms of the asymptotic series given by
    Corless et al. (1996) [1]_. The error of that start shrinks quadratically:
    five rounds bring every value below -1.1 to rounding.

    References
    ----------
    .. [1] R. M. Corless, G. H. Gonnet, D. E. G. Hare, D. J. Jeffrey and D. E.
       Knuth (1996), "On the Lambert W function", Adv. Comput. Math. 5,
       329-359, doi:10.1007/BF02124750.

    Examples
    --------
    >>> round(float(lower_lambert(-2.0 + np.log(2.0))), 12)
    -2.0
    """
    y = np.asarray(logarithm, dtype=np.float64)
    w = y - np.log(-y)
    for _ in range(5):
        w = w - (w + np.log(-w) - y) * w / (w + 1.0)
    return w
