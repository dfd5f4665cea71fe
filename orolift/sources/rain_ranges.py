"""Ranges of rain over the map for the results file, from its members."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.rain.catchments import WATER_DENSITY
from orolift.spread.ranges import range_of

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.sources.map_inputs import Mapped
    from orolift.sources.result_block import Range

    Array = NDArray[np.float64]

HOUR = 3600.0


def map_ranges(mapped: Mapped) -> Range:
    """Ranges of the map, by the keys of its block.

    Parameters
    ----------
    mapped : Mapped

    Returns
    -------
    dict of str to (float, float)
        Empty without members.
    """
    if mapped.members is None:
        return {}
    rain, values = mapped.rain, mapped.members.values
    cell = rain.found.spacing[0] * rain.found.spacing[1]
    whole = cell * float(np.count_nonzero(np.isfinite(rain.found.rate)))  # what `total` is a sum over
    return _scaled(
        {
            "total_kg_per_s": (values["mean_rate"], whole),
            "volume_m3": (values["mean_rate"], whole * rain.duration / WATER_DENSITY),
            "mean_mm_per_h": (values["mean_rate"], HOUR),
            "peak_mm_per_h": (values["peak_rate"], HOUR),
            "windward_share": (values["windward_share"], 1.0),
            "snow_share": (values["snow_share"], 1.0),
            "snow_level_m": (values["snow_level"], 1.0),
            "drying_ratio": (values["drying_ratio"], 1.0),
        }
    )


def catchment_ranges(mapped: Mapped, number: int) -> Range:
    """Ranges of a catchment, by the keys of its block.

    Parameters
    ----------
    mapped : Mapped
    number : int
        From 0, in the order of the file.

    Returns
    -------
    dict of str to (float, float)
        Empty without members, and for a catchment off the map.
    """
    rain = mapped.rain.catchments[number].rain
    if mapped.members is None or rain.rate is None or rain.volume is None:
        return {}
    rate, snow, windward = (
        mapped.members.catchments[key][:, number] for key in ("rate", "snow_share", "windward_share")
    )
    seconds = mapped.rain.duration
    whole = rain.volume / rain.rate if rain.rate > 0.0 else rain.area * rain.covered_share * seconds / WATER_DENSITY
    return _scaled(
        {
            "mean_mm_per_h": (rate, HOUR),
            "total_mm": (rate, seconds),
            "volume_m3": (rate, whole),
            "snow_share": (snow, 1.0),
            "windward_share": (windward, 1.0),
        }
    )


def gauge_ranges(mapped: Mapped) -> list[Range]:
    """Ranges of the map at every gauge, by the keys of its block.

    Parameters
    ----------
    mapped : Mapped

    Returns
    -------
    list of dict of str to (float, float)
        Empty without members.
    """
    if mapped.members is None:
        return []
    return [_scaled({"map_mm": (values, 1.0)}) for values in mapped.members.gauges.T]


def _scaled(arrays: dict[str, tuple[Array, float]]) -> Range:
    """Ranges of arrays (m,), each times a factor; without those that too few members have."""
    found = {key: (range_of(values), factor) for key, (values, factor) in arrays.items()}
    return {key: (ends[0] * factor, ends[1] * factor) for key, (ends, factor) in found.items() if ends is not None}
