"""A sounding as CSV with units in the column names, to the arrays of an upwind column."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.errors import DataFileError
from orolift.sources.files import read_text
from orolift.sources.quality import Finding
from orolift.sources.reported_levels import blank_levels
from orolift.sources.sounding import sounding_from_levels
from orolift.sources.table import Column, NumberTable, number_table

if TYPE_CHECKING:
    from pathlib import Path

    from orolift.sources.reported_levels import ReportedLevels
    from orolift.sources.sounding import Sounding

COLUMNS = (
    Column("pressure_hpa", 1.0, 1090.0),
    Column("height_m", -430.0, 50000.0),
    Column("temperature_c", -110.0, 60.0),
    Column("dew_point_c", -130.0, 45.0),
    Column("relative_humidity_percent", 0.0, 105.0),
    Column("wind_from_deg", 0.0, 360.0),
    Column("wind_ms", 0.0, 150.0),
)
COLUMN_FIELDS = {"wind": "wind_speed"}
"""Fields of `ReportedLevels` that are not called as the column is."""


def read_sounding(
    path: str | Path, where: str = "sounding_file", folder: Path | None = None, *, elevation: float | None = None
) -> Sounding:
    """Sounding of a CSV file.

    Parameters
    ----------
    path, where, folder
        As in `orolift.sources.files.existing_file`.
    elevation : float or None [m above sea level]
        Of the ground, for files that do not say it.

    Returns
    -------
    Sounding

    Raises
    ------
    DataFileError
        If a column is missing, levels are out of order, repeated with other
        values or too few, no wind is given, or units look mixed up.
    MissingFileError
        If it cannot be read.
    """
    return sounding_from_text(read_text(path, where, folder), str(path), elevation=elevation)


def sounding_from_text(text: str, name: str, *, elevation: float | None = None) -> Sounding:
    r"""Sounding of CSV text; `name` stands for the file in messages.

    Raises
    ------
    DataFileError
        As `read_sounding`.

    Examples
    --------
    >>> head = "height_m;pressure_hpa;temperature_c;dew_point_c;wind_from_deg;wind_kt"
    >>> rows = ["120;1000;15,5;10", "1480;850;6;1", "3040;700;-3;-9", "5600;500;-20;-32"]
    >>> text = head + "\n" + ";270;20\n".join(rows) + ";;\n"
    >>> sounding = sounding_from_text(text, "varn.csv")
    >>> sounding.temperature[0].round(2), sounding.eastward_wind.round(1), sounding.findings[0].what
    (np.float64(288.65), array([10.3, 10.3, 10.3, 10.3]), 'unusual cells')
    """
    return sounding_from_levels(levels_from_text(text, name), elevation=elevation)


def levels_from_text(text: str, name: str) -> ReportedLevels:
    """Levels of CSV text as they stand, before any of them is checked against another.

    Parameters
    ----------
    text, name : str

    Returns
    -------
    ReportedLevels

    Raises
    ------
    DataFileError
        If the table cannot be read or lacks a column.
    """
    table = number_table(text, name, COLUMNS)
    _needed_columns(table)
    lines = table.line
    fields: dict[str, Any] = {COLUMN_FIELDS.get(key, key): values for key, values in table.columns.items()}
    if not np.isfinite(fields["temperature"]).any():
        raise DataFileError(f"{name}: column temperature is empty; every level needs one.")
    findings = tuple(
        Finding(name, "unusual cells", note.removeprefix(f"{name}: ").removesuffix("."), "read so", "remark")
        for note in table.notes
    )
    blank = blank_levels(name, lines.size, lambda i: f"line {lines[i]}")
    return replace(blank, findings=findings, **fields)


def _needed_columns(table: NumberTable) -> None:
    have = table.columns
    for needed, spelling in (
        ("pressure", "pressure_hpa"),
        ("temperature", "temperature_c"),
        ("wind_from", "wind_from_deg"),
        ("wind", "wind_ms (or wind_kt)"),
    ):
        if needed not in have:
            raise DataFileError(f"{table.name}: column {spelling} is missing.")
    if "dew_point" not in have and "relative_humidity" not in have:
        raise DataFileError(f"{table.name}: column dew_point_c or relative_humidity_percent is missing.")
    if "dew_point" in have and "relative_humidity" in have:
        raise DataFileError(f"{table.name}: give dew_point or relative_humidity, not both.")
