"""Catchments and gauges as CSV, in the units people use."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from orolift.sources.files import csv_text

if TYPE_CHECKING:
    from collections.abc import Sequence

    from orolift.rain.catchments import CatchmentRain
    from orolift.rain.gauges import GaugeComparison, Gauges

HOUR = 3600.0
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
    "notes",
)
GAUGE_HEADER = ("name", "x_m", "y_m", "observed_mm", "map_mm", "map_minus_observed_mm")


def catchments_csv(rows: Sequence[tuple[str, CatchmentRain]]) -> str:
    """One row for each catchment.

    Parameters
    ----------
    rows : sequence of (str, CatchmentRain)
        Name, and what it received.

    Returns
    -------
    str
        CSV; what is not known is an empty cell.
    """
    return csv_text(CATCHMENT_HEADER, [_catchment_row(name, found) for name, found in rows])


def _catchment_row(name: str, found: CatchmentRain) -> list[object]:
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
        " ".join(found.notes) or None,
    ]


def gauges_csv(gauges: Gauges, comparison: GaugeComparison) -> str:
    """One row for each gauge, map beside observation.

    Parameters
    ----------
    gauges : Gauges
    comparison : GaugeComparison
        Of the same gauges.

    Returns
    -------
    str
        CSV; gauges off the map have no value of it.
    """
    rows = []
    for name, x, y, total, there in zip(
        gauges.name, gauges.x, gauges.y, gauges.total, comparison.modelled, strict=True
    ):
        known = None if math.isnan(there) else float(there)
        rows.append([name, float(x), float(y), float(total), known, None if known is None else known - float(total)])
    return csv_text(GAUGE_HEADER, rows)


def _times(value: float | None, factor: float) -> float | None:
    return None if value is None else value * factor
