"""Rain along the transect, as plain numbers."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.result import Rain

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.crossing.result import Side
    from orolift.crossing.solve import Ground, Solution

    Array = NDArray[np.float64]

LEAST_RAIN = 0.1 / 3600.0
"""Rain [kg m-2 s-1] that counts: 0.1 mm/h, the least a gauge shows in an hour; common practice, no source."""
BAND_STEPS = (200.0, 152.4)
"""Heights of the bands by which members keep their rain [m]: round in metres, and 500 feet."""
BANDS = (0.0, 5e3, 10e3, 20e3, 40e3, 80e3)
"""Edges of the distance bands of the lee [m beyond the crest]."""


def in_bands(ground: Ground, distance: Array, landed: Array) -> list[tuple[float, float, Array]]:
    """What lands in each distance band of the lee.

    Parameters
    ----------
    ground : Ground
    distance : ndarray (nk,) [m]
        Of the places.
    landed : ndarray (nk, ...) [kg m-1 s-1]
        On the step that ends at each of them.

    Returns
    -------
    list of (float, float, ndarray (...))
        From and to beyond the crest [m], along the range normal; bands beyond the transect are left out.
    """
    beyond = (distance - ground.shape.crest_distance) * ground.cosine
    return [
        (low, high, np.asarray(landed[(beyond > low) & (beyond <= high)].sum(axis=0)))
        for low, high in pairwise(BANDS)
        if low < beyond[-1]
    ]


def by_height(
    distance: Array, elevation: Array, crest: float, values: Array, step: float
) -> dict[tuple[Side, int], Array]:
    """Means along a line by side of the crest and height of the ground.

    Parameters
    ----------
    distance, elevation : ndarray (nk,) [m]
        Of the places.
    crest : float [m]
        Distance at which the lee begins.
    values : ndarray (nk, ...)
    step : float [m]
        Height of a band; its edges are multiples of it.

    Returns
    -------
    dict of (str, int) to ndarray (...)
        By side and number of the band, band 0 from sea level up; windward first, each side from the lowest band up.
        Bands without ground are left out.

    Examples
    --------
    >>> x = np.array([0.0, 1.0, 2.0, 3.0])
    >>> by_height(x, np.array([50.0, 250.0, 250.0, 90.0]), 1.0, x, 200.0)
    {('windward', 0): array(0.), ('windward', 1): array(1.), ('lee', 0): array(3.), ('lee', 1): array(2.)}
    """
    band = np.floor(elevation / step).astype(np.intp)
    out: dict[tuple[Side, int], Array] = {}
    sides: tuple[tuple[Side, NDArray[np.bool_]], ...] = (
        ("windward", distance <= crest),
        ("lee", distance > crest),
    )
    for side, here in sides:
        for number in np.unique(band[here]):
            out[side, int(number)] = np.asarray(values[here & (band == number)].mean(axis=0))
    return out


def rainfall(ground: Ground, solution: Solution, background: float) -> Rain:
    """Rain and snow along the transect.

    Parameters
    ----------
    ground : Ground
    solution : Solution
        The first member counts; the others give the range of the drying ratio.
    background : float [kg m-2 s-1]

    Returns
    -------
    Rain

    Notes
    -----
    What lands on a step is spread over its length along the range normal. The
    windward share is split at the crest's point of the transect.
    """
    streams, crest = solution.streams, ground.shape.crest_distance
    x = ground.transect.distance[streams.place]
    step = np.diff(x, prepend=x[0] - (x[1] - x[0])) * ground.cosine
    landed, snow = streams.falling.landed[:, 0], streams.falling.landed_snow[:, 0]
    rate, total = landed / step, float(landed.sum())
    wet = total > 0.0
    peak = int(np.argmax(rate))
    bands = tuple((low, high, float(band / total)) for low, high, band in in_bands(ground, x, landed) if wet)
    vapour = np.sum(streams.carried * streams.start.vapour, axis=-1)
    ratios = streams.falling.landed.sum(axis=0) / np.maximum(vapour, 1e-12)
    return Rain(
        rate=rate,
        snow_rate=snow / step,
        background=background,
        total=total,
        windward_share=float(landed[x <= crest].sum() / total) if wet else None,
        snow_share=float(snow.sum() / total) if wet else None,
        peak_rate=float(rate[peak]) + background,
        peak_distance=float(x[peak]) if wet else None,
        lee_bands=bands,
        drying_ratio_low=float(ratios.min()),
        drying_ratio_high=float(ratios.max()),
    )
