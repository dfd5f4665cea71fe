"""Gaps of the crest line: what share of the low air may go round instead of over."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.flow.profiles import checked_height

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

LONGEST_REACH = 100e3
"""Farthest [m] along the crest line that a gap still counts: a judgement, no published source."""

_METRES = "Give metres above sea level."


def reach_along_crest(deformation_radius: float) -> float:
    """Distance along the crest line, to either side, within which gaps count.

    Parameters
    ----------
    deformation_radius : float [m]
        From `scales.deformation_radius`; infinity is allowed.

    Returns
    -------
    float [m]
        Half of it, at most 100 km.

    Examples
    --------
    >>> reach_along_crest(120e3)
    60000.0
    """
    return float(min(0.5 * deformation_radius, LONGEST_REACH))


def gap_share(
    distance: ArrayLike, crest_line: ArrayLike, base: ArrayLike, blocked_top: ArrayLike
) -> NDArray[np.float64]:
    """Share of the cross-section below the blocked top that the crest line leaves open.

    Parameters
    ----------
    distance : array_like, shape (ns,) [m]
        Along the crest line, strictly increasing.
    crest_line : array_like, shape (ns,) [m]
        Highest ground at each of them, above sea level.
    base : array_like, shape (...) [m]
        Lowest ground upwind, above sea level.
    blocked_top : array_like, shape (...) [m]
        Above sea level.

    Returns
    -------
    ndarray, shape (...) [1]
        0 to 1; 0 when nothing is blocked.

    Raises
    ------
    OutOfRangeError
        If distances do not increase or elevations are not finite.

    Notes
    -----
    Open area between the crest line and the blocked top, over the area from
    base to blocked top. Assumed: the air uses all open area alike, whatever
    its distance.

    Examples
    --------
    >>> gap_share([0.0, 1e3, 2e3], [2000.0, 1000.0, 2000.0], 0.0, 2000.0)
    array(0.25)
    """
    along = checked_height(distance)
    line = within("crest_line", crest_line, -500.0, 9000.0, "m", _METRES)
    top = np.asarray(blocked_top, np.float64)[..., None]
    foot = np.asarray(base, np.float64)[..., None]
    depth = top - foot
    blocked = depth > 0.0
    open_depth = np.clip(top - line, 0.0, np.where(blocked, depth, 0.0))
    width = np.diff(along)
    area = np.sum(0.5 * (open_depth[..., 1:] + open_depth[..., :-1]) * width, axis=-1)
    whole = np.where(blocked, depth, 1.0)[..., 0] * (along[-1] - along[0])
    return np.asarray(area / whole)


def gap_share_from_pass(
    lowest_pass: ArrayLike, base: ArrayLike, crest: ArrayLike, blocked_top: ArrayLike
) -> NDArray[np.float64]:
    """Share that is open below the blocked top when only the lowest pass is known.

    Use `gap_share` where the elevation along the crest line is known.

    Parameters
    ----------
    lowest_pass, base, crest, blocked_top : array_like, shape (...) [m]
        Above sea level; a pass above the crest counts as the crest.

    Returns
    -------
    ndarray, shape (...) [1]
        0 to 1; 0 when the pass is not below the blocked top.

    Raises
    ------
    OutOfRangeError
        If an elevation is outside -500 m to 9000 m.

    Notes
    -----
    Assumed: elevations along the crest line are spread evenly from the pass to
    the crest, so the open area is ``(top - pass)^2 / (2 (crest - pass))`` for
    each metre of length. A judgement; no published source.

    Examples
    --------
    >>> gap_share_from_pass(1000.0, 0.0, 2000.0, 2000.0)
    array(0.25)
    """
    saddle, foot, peak, top = (
        within(name, value, -500.0, 9000.0, "m", _METRES)
        for name, value in (
            ("lowest_pass", lowest_pass),
            ("base", base),
            ("crest", crest),
            ("blocked_top", blocked_top),
        )
    )
    saddle = np.clip(saddle, foot, np.maximum(peak, foot))
    depth = top - foot
    reach = np.maximum(top - saddle, 0.0)
    spread = np.maximum(peak - saddle, 1.0)
    # above the crest all is open
    area = np.where(top <= peak, reach**2 / (2.0 * spread), reach - 0.5 * (peak - saddle))
    return np.asarray(np.where(depth > 0.0, np.clip(area / np.where(depth > 0.0, depth, 1.0), 0.0, 1.0), 0.0))
