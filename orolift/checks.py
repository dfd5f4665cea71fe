"""Range checks that name the argument, the count and the first culprit."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import OutOfRangeError

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray


def within(name: str, values: ArrayLike, low: float, high: float, unit: str, hint: str = "") -> NDArray[np.float64]:
    """Values as an array of floats, all of them finite and inside a range.

    Parameters
    ----------
    name : str
        Argument name for the message.
    values : array_like, any shape [unit]
        Numbers to check.
    low, high : float [unit]
        Allowed range, ends included.
    unit : str
        Unit for the message.
    hint : str
        Likely cause and next step, a sentence.

    Returns
    -------
    ndarray of float64, shape of `values` [unit]

    Raises
    ------
    OutOfRangeError
        If any value is NaN or outside the range.

    Examples
    --------
    >>> within("height", [280.0, 12.5], 100.0, 350.0, "m", "Metres?")
    Traceback (most recent call last):
        ...
    orolift.errors.OutOfRangeError: height: 1 of 2 values lie outside 100 to 350 m (first: 12.5 at index (1,)). Metres?
    """
    array = np.asarray(values, dtype=np.float64)
    bad = ~((array >= low) & (array <= high))  # written so that NaN counts as outside
    if np.any(bad):
        index = tuple(int(i) for i in np.argwhere(bad)[0])
        place = f" at index {index}" if array.ndim else ""
        message = (
            f"{name}: {int(bad.sum())} of {array.size} values lie outside {low:g} to {high:g} {unit} "
            f"(first: {float(array[index]):g}{place}). {hint}"
        )
        raise OutOfRangeError(message.strip())
    return array
