"""Rain along the transect, as plain numbers."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from orolift.crossing.result import Rain

if TYPE_CHECKING:
    from orolift.crossing.solve import Ground, Solution

BANDS = (0.0, 5e3, 10e3, 20e3, 40e3, 80e3)
"""Edges of the distance bands of the lee [m beyond the crest]."""


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
    beyond = (x - crest) * ground.cosine
    bands = tuple(
        (low, high, float(landed[(beyond > low) & (beyond <= high)].sum() / total))
        for low, high in pairwise(BANDS)
        if wet and low < beyond[-1]
    )
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
