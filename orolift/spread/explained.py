"""One comparison explained: what would have to be different for the estimate to be what was observed."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.explain import Observed, Path, explanation, way
from orolift.crossing.upwind_error import upwind_error

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.explain import Explanation, Way
    from orolift.crossing.result import Crossing, LeeAir
    from orolift.crossing.situation import Situation
    from orolift.crossing.upwind_error import UpwindError
    from orolift.spread.comparison import Observations, Paired

USUAL_SHARE = 0.7
"""Share of condensate that leaves, where nothing condensed in the crossing to tell; a judgement."""


@dataclass(frozen=True, eq=False)
class Source:
    """Where an estimate comes from.

    Attributes
    ----------
    time : float or None [s]
        It is valid for.
    crossing : Crossing
    air : LeeAir
        The estimate.
    situation : Situation
        Of the line of the place.
    site : int
        Number of the place among its sites, from 0.
    """

    time: float | None
    crossing: Crossing
    air: LeeAir
    situation: Situation
    site: int


@dataclass(frozen=True, eq=False)
class Explained:
    """What would explain one comparison.

    Attributes
    ----------
    place, which : int
        Of the comparison: number of the place and of the estimates.
    time : float or None [s]
    rows : int
        Observations it is the mean of.
    estimate : LeeAir
    removed_share : float or None [1]
        Share of the condensate that left in the crossing; None when nothing condensed.
    mixing_depth : float [m]
        Of the crossing.
    explanation : Explanation
    own : Way or None
        What the rule of the explanation gives with the crossing's own three values; None in a pool.
    upwind : tuple of UpwindError
        Wind, then humidity.
    """

    place: int
    which: int
    time: float | None
    rows: int
    estimate: LeeAir
    removed_share: float | None
    mixing_depth: float
    explanation: Explanation
    own: Way | None
    upwind: tuple[UpwindError, ...]


def chosen(warm: Paired, moist: Paired, place: int | None = None) -> tuple[int, int] | None:
    """The comparison to explain: estimates and place with the largest error of temperature.

    Parameters
    ----------
    warm, moist : Paired
        Temperature and mixing ratio.
    place : int, optional
        Only this one.

    Returns
    -------
    (int, int) or None
        None where temperature and humidity were never observed together in the lee.
    """
    both = np.isin(warm.row, moist.row) & warm.in_lee
    if place is not None:
        both &= warm.place == place
    if not both.any():
        return None
    cells = np.stack([warm.which[both], warm.place[both]], axis=-1)
    kinds, member = np.unique(cells, axis=0, return_inverse=True)
    error = (warm.estimated - warm.observed)[both]
    mean = np.bincount(member.ravel(), weights=error) / np.bincount(member.ravel())
    which, where = kinds[int(np.argmax(np.abs(mean)))]
    return int(which), int(where)


def explained(
    chosen_one: tuple[int, int],
    seen: Observations,
    which: NDArray[np.int_],
    source: Source,
) -> Explained:
    """What would explain one comparison.

    Parameters
    ----------
    chosen_one : (int, int)
        Estimates and place.
    seen : Observations
    which : ndarray of int (n,)
        Number of the estimates each row belongs to.
    source : Source
        Of the chosen estimate.

    Returns
    -------
    Explained

    Raises
    ------
    OroliftError
        If the situation cannot be worked out.
    """
    number, place = chosen_one
    crossing, air = source.crossing, source.air
    t, w = seen.values["temperature"], seen.values["mixing_ratio"]
    mine = (which == number) & (seen.place == place) & np.isfinite(t) & np.isfinite(w)
    observed = Observed(float(np.mean(t[mine])), float(np.mean(w[mine])))
    path = Path(
        crossing.incoming,
        crossing.features.crest if air.own is None else air.own.crest,
        air.pressure,
        heating=0.0 if air.parts is None else air.parts.surface_heating,
        freezing=crossing.settings.freezing,
    )
    water = crossing.water
    share = min(water.removed / water.condensed, 1.0) if water.condensed > 0.0 else None
    depth = float(np.asarray(crossing.settings.mixing_depth))
    usual = (USUAL_SHARE if share is None else share, depth)
    own = None if air.source_level is None else way(path, observed, air.source_level, *usual)
    return Explained(
        place=place,
        which=number,
        time=source.time,
        rows=int(mine.sum()),
        estimate=air,
        removed_share=share,
        mixing_depth=depth,
        explanation=explanation(path, observed, usual),
        own=own,
        upwind=(
            upwind_error(source.situation, source.site, observed, "wind", air),
            upwind_error(source.situation, source.site, observed, "humidity", air),
        ),
    )
