"""What members of some strips differ by from the answer there, by distance behind the crest, joined across the wind."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.spread.joined import ON_LEVELS, joined_across, pool_top_of, values_along, weights
from orolift.spread.strip_members import EVERY, MEMBER_LEVELS, level_numbers
from orolift.spread.strips import StripAir

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from numpy.typing import NDArray

    from orolift.crossing.ground_values import GroundValues
    from orolift.spread.strip_members import StripMembers

    Array = NDArray[np.float64]

STEP = 600.0
"""Spacing [m] behind the crest; about that of the places that have members."""
CALM = 1.0
"""Wind [m s-1] below which members differ by no factor: ratios of calms mean nothing. A judgement."""
_DRY = 1e-6


@dataclass(frozen=True, eq=False)
class Deviations:
    """What members differ by. Strips (ns,) across, places (nb,) behind the crest, levels (q,), members last.

    Attributes
    ----------
    across : ndarray (ns,) [m]
        Distance of the strips from the axis.
    behind : ndarray (nb,) [m]
        Distance behind the crest, even.
    temperature, pressure : ndarray (ns, nb, q, m) [K], [Pa]
    vapour : ndarray (ns, nb, q, m) [1]
        A factor.
    wind : ndarray (ns, nb, m) [1]
        A factor.
    lowest : ndarray (ns, nb, m) [m]
    cloudy : ndarray (ns, nb, m) [1]
        Of the share of strips with cloud.
    blocked_top, pool_top : ndarray (ns, m) [m]
    pool : tuple of two ndarray (ns, nb, q, 2 m), or None
        Temperature and vapour of air that stays: of the members, and of their difference from the answer's where that
        has a pool, too. None where no member has any.
    wind_low, wind_high : ndarray (ns,) [1]
        Range of the methods of the lee wind, as shares of it.
    """

    across: Array
    behind: Array
    temperature: Array
    pressure: Array
    vapour: Array
    wind: Array
    lowest: Array
    cloudy: Array
    blocked_top: Array
    pool_top: Array
    pool: tuple[Array, Array] | None
    wind_low: Array
    wind_high: Array


def deviations(parts: Sequence[StripAir], members: Sequence[StripMembers], across: Array) -> Deviations:
    """What members differ by from the answer of their strips.

    Parameters
    ----------
    parts : sequence of StripAir
        Answers of all strips of the map.
    members : sequence of StripMembers
        Of some, all of which have an answer.
    across : ndarray [m]
        Distance of all strips from the axis.

    Returns
    -------
    Deviations

    Notes
    -----
    Places are counted from the crest of each strip, and beyond the ends of a strip they are as at its ends. Strips are
    joined by a Gaussian of half their spacing: what one line does at one crest is not taken over whole.
    """
    answers = [_thinned(parts[one.number]) for one in members]
    lines = [
        [StripAir(answer.start, values) for answer, values in zip(answers, of_one, strict=True)]
        for of_one in zip(*(one.values for one in members), strict=True)
    ]
    places = across[[one.number for one in members]]
    spacing = float(np.min(np.diff(places))) if places.size > 1 else 1.0
    weight = weights(places, 0.5 * spacing)
    crests = [one.start + one.values.crest_distance for one in answers if one.values is not None]
    ends = [_ends(one) for one in answers]
    low = min(end[0] - crest for end, crest in zip(ends, crests, strict=True))
    high = max(end[1] - crest for end, crest in zip(ends, crests, strict=True))
    behind = np.arange(np.floor(low / STEP), np.ceil(high / STEP) + 1.0) * STEP

    def along(some: Sequence[StripAir], name: str) -> Array:
        rows = zip(some, crests, ends, strict=True)
        found = [values_along(one, name, np.clip(behind + c, *e), len(MEMBER_LEVELS)) for one, c, e in rows]
        return np.stack(found)

    def differences(name: str, differ: Callable[[Array, Array], Array]) -> Array:
        answer = along(answers, name)
        return np.stack([joined_across(weight, differ(along(one, name), answer)) for one in lines], axis=-1)

    def of(some: Sequence[StripAir], value: Callable[[GroundValues], float]) -> Array:
        return np.array([np.nan if one.values is None else value(one.values) for one in some])

    def single(value: Callable[[GroundValues], float]) -> Array:
        answer = of(answers, value)
        return np.stack([joined_across(weight, of(one, value) - answer) for one in lines], axis=-1)

    def still(name: str) -> Array:
        return np.concatenate([differences(name, lambda a, _: a), differences(name, np.subtract)], axis=-1)

    pooled = any(one.values is not None and one.values.pool_top is not None for of_one in lines for one in of_one)
    return Deviations(
        across=places,
        behind=behind,
        temperature=differences("temperature", np.subtract),
        pressure=differences("pressure", np.subtract),
        vapour=differences("vapour", lambda a, b: np.maximum(a, _DRY) / np.maximum(b, _DRY)),
        wind=differences("wind_10m", lambda a, b: np.maximum(a, CALM) / np.maximum(b, CALM)),
        lowest=differences("lowest", np.subtract),
        cloudy=differences("cloud_base", lambda a, b: _cloud(a) - _cloud(b)),
        blocked_top=single(lambda values: values.blocked_top),
        pool_top=single(pool_top_of),
        pool=(still("pool_temperature"), still("pool_vapour")) if pooled else None,
        wind_low=joined_across(weight, of(answers, lambda values: values.wind_low)),
        wind_high=joined_across(weight, of(answers, lambda values: values.wind_high)),
    )


def _cloud(base: Array) -> Array:
    return np.where(np.isnan(base), np.nan, np.isfinite(base).astype(np.float64))


def _ends(part: StripAir) -> tuple[float, float]:
    """First and last place of a strip along the axis."""
    if part.values is None:
        return np.nan, np.nan
    return part.start + float(part.values.distance[0]), part.start + float(part.values.distance[-1])


_ALONG = ("distance", "ground", "wind", "wind_10m", "cloud_base", "cloud_water", "lowest")


def _thinned(part: StripAir) -> StripAir:
    """The answer of a strip at the places and levels that members have."""
    values = part.values
    if values is None:
        return part
    kept: dict[str, Any] = {name: getattr(values, name)[::EVERY] for name in _ALONG}
    levels = level_numbers()
    for name in ON_LEVELS:
        if getattr(values, name) is not None:
            kept[name] = getattr(values, name)[::EVERY][:, levels]
    return replace(part, values=replace(values, level=np.array(MEMBER_LEVELS), **kept))


@dataclass(frozen=True, eq=False)
class Reading:
    """Cells among the strips that have members: numbers and weights of the nodes beside each. Arrays (n, corners).

    Attributes
    ----------
    strip, strip_weight : ndarray (n, 2)
    place, place_weight : ndarray (n, 4)
    level, level_weight : ndarray (n, 8)
        Nodes numbered as in the arrays of `Deviations` made flat.
    """

    strip: NDArray[np.intp]
    strip_weight: Array
    place: NDArray[np.intp]
    place_weight: Array
    level: NDArray[np.intp]
    level_weight: Array


def reading(found: Deviations, across: Array, behind: Array, over: Array) -> Reading:
    """Where cells lie among the strips that have members.

    Parameters
    ----------
    found : Deviations
    across, behind, over : ndarray (n,) [m]
        From the axis, behind the crest, over the ground of the strips. Beyond an end, as there.

    Returns
    -------
    Reading
    """
    strip, of_strip = _beside(found.across, across)
    place, of_place = _beside(found.behind, behind)
    level, of_level = _beside(np.array(MEMBER_LEVELS), over)
    nb, q = found.behind.size, len(MEMBER_LEVELS)
    places = (strip[:, :, np.newaxis] * nb + place[:, np.newaxis, :]).reshape(-1, 4)
    weight = (of_strip[:, :, np.newaxis] * of_place[:, np.newaxis, :]).reshape(-1, 4)
    levels = (places[:, :, np.newaxis] * q + level[:, np.newaxis, :]).reshape(-1, 8)
    weights_ = (weight[:, :, np.newaxis] * of_level[:, np.newaxis, :]).reshape(-1, 8)
    return Reading(strip, of_strip, places, weight, levels, weights_)


def _beside(nodes: Array, at: Array) -> tuple[NDArray[np.intp], Array]:
    """The two nodes beside each place, (n, 2), and their weights; at the ends beyond them."""
    if nodes.size == 1:
        return np.zeros((at.size, 2), dtype=np.intp), np.tile([1.0, 0.0], (at.size, 1))
    at = np.clip(at, nodes[0], nodes[-1])
    first = np.clip(np.searchsorted(nodes, at, side="right") - 1, 0, nodes.size - 2)
    share = (at - nodes[first]) / (nodes[first + 1] - nodes[first])
    return np.stack([first, first + 1], axis=1), np.stack([1.0 - share, share], axis=1)


def read(number: NDArray[np.intp], weight: Array, values: Array) -> Array:
    """Values of nodes, the last axis kept, at cells: (n, k). A node without weight does not count, known or not."""
    from scipy.sparse import csr_array

    flat = values.reshape(-1, values.shape[-1])
    rows = np.arange(number.shape[0] + 1) * number.shape[1]
    size = number.shape[0], flat.shape[0]
    chosen = csr_array((weight.ravel(), number.ravel(), rows), shape=size, copy=True)  # zeros are taken out in place
    chosen.eliminate_zeros()
    return np.asarray(chosen @ flat)
