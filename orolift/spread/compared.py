"""A whole comparison: crossings against observations in the lee."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import interpolated
from orolift.spread.comparison import event_table, paired, verdict
from orolift.spread.estimates import QUANTITIES

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.onset import OnsetRule
    from orolift.crossing.result import LeeAir
    from orolift.spread.comparison import Observations, Paired, Verdict
    from orolift.spread.estimates import Estimates, Quantity
    from orolift.spread.explained import Explained
    from orolift.spread.onset_series import OnsetAtPlace
    from orolift.spread.verification import Contingency

    Array = NDArray[np.float64]

LAYERS = ((50.0, 500.0), (0.0, 1500.0))
"""Layers over the ground [m] in which a lee sounding is held against the estimate."""


@dataclass(frozen=True)
class Event:
    """A threshold of one quantity.

    Attributes
    ----------
    quantity : Quantity
    threshold : float [SI]
    above : bool
        Whether it is met at or above the threshold, else at or below.
    words : str
        As the user gave it.
    """

    quantity: Quantity
    threshold: float
    above: bool
    words: str


@dataclass(frozen=True, eq=False)
class LayerError:
    """Estimate minus lee sounding in one layer over the ground.

    Attributes
    ----------
    low, high : float [m above ground]
    temperature : float [K]
    mixing_ratio : float [kg per kg]
    """

    low: float
    high: float
    temperature: float
    mixing_ratio: float


@dataclass(frozen=True, eq=False)
class ProfileComparison:
    """A lee sounding against the estimated profile over a place.

    Attributes
    ----------
    place : str
    estimate : LeeAir
    height : ndarray (n,) [m above ground]
    temperature, mixing_ratio : ndarray (n,)
        Of the sounding at these heights; NaN below its ground.
    layers : tuple of LayerError
    """

    place: str
    estimate: LeeAir
    height: Array
    temperature: Array
    mixing_ratio: Array
    layers: tuple[LayerError, ...]


@dataclass(frozen=True, eq=False)
class Compared:
    """Crossings against observations.

    Attributes
    ----------
    names : tuple of str
        Of the places.
    estimates : tuple of Estimates
        In order of time.
    seen : Observations
    which : ndarray of int (n,)
        Number of the estimates each row belongs to, -1 for none.
    within : float [s]
        Rows farther than this from an estimate belong to none.
    pairs : dict of Quantity to Paired
        Those with any pair.
    verdicts : tuple of Verdict
    events : tuple of (str, Contingency)
        Thresholds of the command line and of the case's rules, by their words.
    rule : OnsetRule
    onset : tuple of OnsetAtPlace
    explained : Explained or None
    profile : ProfileComparison or None
    notes, cautions : tuple of str
    """

    names: tuple[str, ...]
    estimates: tuple[Estimates, ...]
    seen: Observations
    which: NDArray[np.int_]
    within: float
    pairs: dict[Quantity, Paired]
    verdicts: tuple[Verdict, ...]
    events: tuple[tuple[str, Contingency], ...]
    rule: OnsetRule
    onset: tuple[OnsetAtPlace, ...]
    explained: Explained | None
    profile: ProfileComparison | None
    notes: tuple[str, ...]
    cautions: tuple[str, ...]


def all_pairs(
    seen: Observations, estimates: Sequence[Estimates], which: NDArray[np.int_]
) -> tuple[dict[Quantity, Paired], tuple[Verdict, ...]]:
    """Pairs of every quantity that has any, and the scores of those in the lee.

    Parameters
    ----------
    seen : Observations
    estimates : sequence of Estimates
    which : ndarray of int (n,)

    Returns
    -------
    dict of Quantity to Paired, tuple of Verdict
    """
    found = {name: paired(seen, estimates, which, name) for name in QUANTITIES}
    pairs = {name: one for name, one in found.items() if one.row.size}
    verdicts = [verdict(one, name) for name, one in pairs.items()]
    return pairs, tuple(one for one in verdicts if one is not None)


def event_tables(
    events: Sequence[Event], pairs: dict[Quantity, Paired]
) -> tuple[tuple[tuple[str, Contingency], ...], tuple[str, ...]]:
    """Hits and false alarms of events, and notes on those that nothing was observed for."""
    tables, notes = [], []
    for event in events:
        one = pairs.get(event.quantity)
        table = None if one is None else event_table(one, event.threshold, above=event.above)
        if table is None:
            notes.append(f"Nothing was observed in the lee to judge {event.words} by.")
        else:
            tables.append((event.words, table))
    return tuple(tables), tuple(notes)


def profile_comparison(air: LeeAir, sounding: IncomingAir) -> ProfileComparison:
    """A lee sounding against the estimated profile over a place.

    Parameters
    ----------
    air : LeeAir
    sounding : IncomingAir
        Its column.

    Returns
    -------
    ProfileComparison

    Notes
    -----
    At equal heights above sea level; layers count from the ground of the
    place, or from that of the sounding where it is higher.
    """
    height = air.profile.height_above_ground
    above = air.elevation + height
    inside = (above >= float(sounding.height[0])) & (above <= float(sounding.height[-1]))
    temperature, vapour = np.full(height.size, np.nan), np.full(height.size, np.nan)
    if inside.any():
        there = interpolated(sounding, above[inside])
        temperature[inside], vapour[inside] = there.temperature, there.vapour
    ground = max(float(sounding.height[0]) - air.elevation, 0.0)
    layers = []
    for low, high in LAYERS:
        layer = inside & (height >= ground + low) & (height <= ground + high)
        if layer.any():
            layers.append(
                LayerError(
                    low,
                    high,
                    float(np.mean(air.profile.temperature[layer] - temperature[layer])),
                    float(np.mean(air.profile.vapour[layer] - vapour[layer])),
                )
            )
    return ProfileComparison(air.name, air, height, temperature, vapour, tuple(layers))
