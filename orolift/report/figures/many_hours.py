"""Long series made short enough to draw: several hours as one, and stretches of hours that hold together."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import NDArray

    Array = NDArray[np.float64]

MOST_MARKS = 1000
"""Hours drawn one by one; of more, so many together as make fewer, each with its lowest and highest value."""


def together_of(count: int) -> int:
    """Hours of so many that are drawn as one.

    Examples
    --------
    >>> together_of(1000), together_of(8760)
    (1, 9)
    """
    return max(1, -(-count // MOST_MARKS))


def runs(flags: NDArray[np.bool_]) -> list[tuple[int, int]]:
    """First and one past last of each stretch of true values.

    Examples
    --------
    >>> runs(np.array([True, True, False, True]))
    [(0, 2), (3, 4)]
    """
    edges = np.flatnonzero(np.diff(np.concatenate([[False], flags, [False]]).astype(np.int8)))
    return list(zip(edges[::2].tolist(), edges[1::2].tolist(), strict=True))


def _grouped(values: NDArray[np.generic], together: int, fill: float | bool) -> NDArray[np.generic]:
    """Values in rows of so many, the last one filled up, (m, together)."""
    short = -values.size % together
    return np.concatenate([values, np.full(short, fill, dtype=values.dtype)]).reshape(-1, together)


def means(x: Array, together: int) -> Array:
    """Means of so many values after each other, the last of what is left."""
    return np.array([float(np.mean(x[i : i + together])) for i in range(0, x.size, together)])


def spans(values: Array, together: int) -> Array:
    """Lowest and highest of so many values after each other, NaN only where all are.

    Examples
    --------
    >>> spans(np.array([1.0, 3.0, 2.0, np.nan]), 2)
    array([1., 3., 2., 2.])
    """
    if together == 1:
        return values
    rows = _grouped(values, together, np.nan).astype(np.float64)
    known = np.isfinite(rows).any(axis=1)
    low, high = np.where(np.isnan(rows), np.inf, rows).min(axis=1), np.where(np.isnan(rows), -np.inf, rows).max(axis=1)
    return np.column_stack([np.where(known, low, np.nan), np.where(known, high, np.nan)]).ravel()


def all_of(flags: Iterable[bool], together: int) -> NDArray[np.bool_]:
    """Whether all of so many flags after each other are true."""
    return np.asarray(_grouped(np.array([*flags], dtype=np.bool_), together, fill=True).all(axis=1))


def any_of(flags: Iterable[bool], together: int) -> NDArray[np.bool_]:
    """Whether any of so many flags after each other is true."""
    return np.asarray(_grouped(np.array([*flags], dtype=np.bool_), together, fill=False).any(axis=1))
