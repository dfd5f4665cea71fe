"""A hand-entered ridge as CSV, to distances and elevations."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import DataFileError
from orolift.sources.files import read_text
from orolift.sources.table import Column, NumberTable, number_table
from orolift.terrain.ridge import LEAST_POINTS, LONGEST_RIDGE
from orolift.terrain.transect import HIGHEST_GROUND, LOWEST_GROUND

if TYPE_CHECKING:
    from pathlib import Path

    from numpy.typing import NDArray

COLUMNS = (
    Column("distance_km", -LONGEST_RIDGE / 1000.0, LONGEST_RIDGE / 1000.0),
    Column("elevation_m", LOWEST_GROUND, HIGHEST_GROUND),
)


def read_ridge(
    path: str | Path, where: str = "ridge_file", folder: Path | None = None
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Points of a hand-entered ridge.

    Parameters
    ----------
    path, where, folder
        As in `orolift.sources.files.existing_file`. The file has the columns
        ``distance_km`` (or ``distance_mi``) and ``elevation_m`` (or
        ``elevation_ft``), from the upwind end to the downwind end.

    Returns
    -------
    distance, elevation : ndarray, shape (n,) [m]
        For `orolift.terrain.ridge_transect`.

    Raises
    ------
    DataFileError
        If a column or a value is missing, or distances do not increase; it names file and line.
    MissingFileError
        If it cannot be read.
    """
    table = number_table(read_text(path, where, folder), str(path), COLUMNS)
    distance, elevation = (_whole_column(table, column.name) for column in COLUMNS)
    if distance.size < LEAST_POINTS:
        raise DataFileError(
            f"{path}: holds {distance.size} points; a ridge needs at least {LEAST_POINTS}: low ground upwind, the "
            "crest, low ground downwind."
        )
    steps = np.diff(distance)
    if np.any(steps <= 0.0):
        late = int(np.argmax(steps <= 0.0)) + 1
        raise DataFileError(
            f"{path}: line {table.line[late]}: distance {distance[late] / 1000:g} km does not lie beyond the "
            f"{distance[late - 1] / 1000:g} km of the row before. Order the points from the upwind end to the "
            "downwind end, each once."
        )
    return distance, elevation


def _whole_column(table: NumberTable, name: str) -> NDArray[np.float64]:
    """A column of which every value is there."""
    stem = name.rpartition("_")[0]
    values = table.columns.get(stem)
    if values is None:
        found = ", ".join(table.columns)
        raise DataFileError(f"{table.name}: has no column {name}, only {found}. The first line names the columns.")
    missing = np.isnan(values)
    if missing.any():
        line = table.line[int(np.argmax(missing))]
        raise DataFileError(f"{table.name}: line {line}: the {stem} is missing. Fill it in or take the row out.")
    return values
