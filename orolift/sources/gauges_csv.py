"""Rain gauges from CSV, in the coordinates of a map; and fitted values as a piece of a case file."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.errors import DataFileError
from orolift.rain.gauges import MOST_RAIN, Gauges, gauges_at
from orolift.sources.files import read_text
from orolift.sources.table import Column, NumberTable, number_table

if TYPE_CHECKING:
    from pathlib import Path

    from numpy.typing import NDArray

    from orolift.rain.gauge_fit import Fitted, RainFit

    Array = NDArray[np.float64]

COLUMNS = (
    Column("name", text=True),
    Column("longitude", -180.0, 360.0),
    Column("latitude", -90.0, 90.0),
    Column("easting_m", -1e8, 1e8),
    Column("northing_m", -1e8, 1e8),
    Column("total_mm", 0.0, MOST_RAIN),
)
_PLACES = (("longitude", "latitude"), ("easting", "northing"))
_HOUR = 3600.0


def read_gauges(
    path: str | Path,
    crs: Any,
    *,
    source_crs: Any | None = None,
    where: str = "gauges file",
    folder: Path | None = None,
) -> Gauges:
    """Gauges of a CSV file.

    Parameters
    ----------
    path : str or Path
        Columns ``longitude`` and ``latitude``, or ``easting_m`` and ``northing_m`` in the raster's
        coordinate system; ``total_mm`` (or ``total_in``) over the duration of the case; ``name`` if wanted.
    crs : rasterio CRS
        Of the map.
    source_crs : rasterio CRS, optional
        Of the raster, for easting and northing; by default that of the map.
    where, folder
        As in `orolift.sources.files.existing_file`.

    Returns
    -------
    Gauges
        In the order of the file; those at one place averaged, those without a total left out, with notes.

    Raises
    ------
    DataFileError
        If a column or place is missing, or a total negative or impossible; it names file and line.
    MissingFileError
        If it cannot be read.
    """
    table = number_table(read_text(path, where, folder), str(path), COLUMNS)
    x_name, y_name = _place_columns(table)
    total = _column(table, "total", "total_mm")
    names = table.texts.get("name") or tuple(f"gauge of line {line}" for line in table.line)
    known = np.isfinite(total)
    if not known.any():
        raise DataFileError(f"{path}: no gauge has a total.")
    a, b = (_column(table, stem, stem)[known] for stem in (x_name, y_name))
    for values in (a, b):
        missing = np.isnan(values)
        if missing.any():
            line = table.line[known][int(np.argmax(missing))]
            raise DataFileError(f"{path}: line {line}: the place is missing. Fill it in or take the row out.")
    x, y = _moved(a, b, "OGC:CRS84" if x_name == "longitude" else source_crs or crs, crs)
    kept = tuple(name or f"gauge of line {line}" for name, line, on in zip(names, table.line, known, strict=True) if on)
    gauges = gauges_at(x, y, total[known], kept)
    if known.all():
        return gauges
    note = f"{int((~known).sum())} gauges have no total and were left out."
    return Gauges(gauges.x, gauges.y, gauges.total, gauges.name, (note, *gauges.notes))


def _place_columns(table: NumberTable) -> tuple[str, str]:
    """Names of the two columns that hold the place."""
    found = [pair for pair in _PLACES if any(stem in table.columns for stem in pair)]
    if len(found) != 1 or not all(stem in table.columns for stem in found[0]):
        raise DataFileError(
            f"{table.name}: a gauge needs its place: the columns longitude and latitude, or easting_m and northing_m."
        )
    return found[0]


def _column(table: NumberTable, stem: str, head: str) -> Array:
    values = table.columns.get(stem)
    if values is None:
        raise DataFileError(f"{table.name}: has no column {head}. The first line names the columns.")
    return values


def _moved(a: Array, b: Array, source: Any, crs: Any) -> tuple[Array, Array]:
    """Coordinates in the system of the map."""
    from rasterio.warp import transform

    x, y = transform(source, crs, a, b)
    return np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64)


def fitted_rain_toml(fit: RainFit) -> str:
    """Fitted values as lines to paste into the table ``[rain]`` of a case.

    Parameters
    ----------
    fit : RainFit

    Returns
    -------
    str
        TOML, its doubts as comments.
    """
    lines = [
        f"# Fitted to {fit.gauges} gauges. Root mean square error {fit.rms_fitted:.1f} mm;",
        f"# at a gauge left out of the fit {fit.rms_left_out:.1f} mm, before the fit {fit.rms_before:.1f} mm,",
        f"# with the mean of the other gauges {fit.rms_of_mean:.1f} mm.",
        *(f"# {note}" for note in fit.notes),
        "[rain]",
        _line("cloud_time_s", fit.cloud_time, 1.0, 0),
        _line("fall_time_s", fit.fall_time, 1.0, 0),
        _line("background_mm_per_h", fit.background, _HOUR, 3),
        f"# cloud and fall time together: {fit.total_time.value:.0f} s, standard error {fit.total_time.error:.0f} s",
    ]
    return "\n".join(lines) + "\n"


def _line(key: str, found: Fitted, factor: float, digits: int) -> str:
    value, error, low, high = (f"{factor * v:.{digits}f}" for v in (found.value, found.error, found.low, found.high))
    bound = ", at the end of its range" if found.at_bound else ""
    return f"{key} = {value}  # standard error {error}; {low} to {high} with one gauge left out{bound}"
