"""Catchments and gauges as CSV, in the units people use."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from orolift.sources.files import csv_text

if TYPE_CHECKING:
    from collections.abc import Sequence

    from orolift.rain.catchments import CatchmentRain
    from orolift.rain.gauges import GaugeComparison, Gauges
    from orolift.sources.result_block import Range

HOUR = 3600.0
RANGED = {
    "mean_mm_per_h": ("mean_mm_per_h", 1.0),
    "total_mm": ("total_mm", 1.0),
    "volume_m3": ("volume_m3", 1.0),
    "snow_percent": ("snow_share", 100.0),
    "windward_percent": ("windward_share", 100.0),
}
"""Columns with a range: the key of the results it has there, and the factor from there."""
CATCHMENT_HEADER = (
    "name",
    "area_km2",
    "covered_percent",
    "mean_mm_per_h",
    "total_mm",
    "volume_m3",
    "snow_percent",
    "snow_area_percent",
    "windward_percent",
    "lowest_m",
    "mean_elevation_m",
    "highest_m",
    *(f"{name}_{end}" for name in RANGED for end in ("low", "high")),
    "notes",
)
GAUGE_HEADER = ("name", "x_m", "y_m", "observed_mm", "map_mm", "map_minus_observed_mm", "map_mm_low", "map_mm_high")


def catchments_csv(rows: Sequence[tuple[str, CatchmentRain]], ranges: Sequence[Range] = ()) -> str:
    """One row for each catchment.

    Parameters
    ----------
    rows : sequence of (str, CatchmentRain)
        Name, and what it received.
    ranges : sequence of dict
        Of each, as `orolift.sources.rain_ranges.catchment_ranges` has them; empty without members.

    Returns
    -------
    str
        CSV; what is not known is an empty cell.
    """
    each = ranges or [{}] * len(rows)
    return csv_text(CATCHMENT_HEADER, [_catchment_row(*row, found) for row, found in zip(rows, each, strict=True)])


def _catchment_row(name: str, found: CatchmentRain, ranges: Range) -> list[object]:
    ends = [ranges.get(key, (None, None)) for key, _ in RANGED.values()]
    factors = [factor for _, factor in RANGED.values()]
    return [
        name,
        found.area / 1e6,
        100.0 * found.covered_share,
        _times(found.rate, HOUR),
        found.total,
        found.volume,
        _times(found.snow_share, 100.0),
        _times(found.snow_area_share, 100.0),
        _times(found.windward_share, 100.0),
        found.lowest,
        found.mean_elevation,
        found.highest,
        *(_times(end, factor) for pair, factor in zip(ends, factors, strict=True) for end in pair),
        " ".join(found.notes) or None,
    ]


def gauges_csv(gauges: Gauges, comparison: GaugeComparison, ranges: Sequence[Range] = ()) -> str:
    """One row for each gauge, map beside observation.

    Parameters
    ----------
    gauges : Gauges
    comparison : GaugeComparison
        Of the same gauges.
    ranges : sequence of dict
        Of each, as `orolift.sources.rain_ranges.gauge_ranges` has them; empty without members.

    Returns
    -------
    str
        CSV; gauges off the map have no value of it.
    """
    each = ranges or [{}] * len(gauges.name)
    rows = []
    for name, x, y, total, there, found in zip(
        gauges.name, gauges.x, gauges.y, gauges.total, comparison.modelled, each, strict=True
    ):
        known = None if math.isnan(there) else float(there)
        apart = None if known is None else known - float(total)
        rows.append([name, float(x), float(y), float(total), known, apart, *found.get("map_mm", (None, None))])
    return csv_text(GAUGE_HEADER, rows)


def _times(value: float | None, factor: float) -> float | None:
    return None if value is None else value * factor
