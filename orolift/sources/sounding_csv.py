"""A sounding as CSV with units in the column names, to the arrays of an upwind column."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import DataFileError
from orolift.sources.files import read_text
from orolift.sources.table import Column, NumberTable, number_table

if TYPE_CHECKING:
    from pathlib import Path

    from numpy.typing import NDArray

COLUMNS = (
    Column("pressure_hpa", 1.0, 1090.0),
    Column("height_m", -430.0, 50000.0),
    Column("temperature_c", -110.0, 60.0),
    Column("dew_point_c", -130.0, 45.0),
    Column("relative_humidity_percent", 0.0, 105.0),
    Column("wind_from_deg", 0.0, 360.0),
    Column("wind_ms", 0.0, 150.0),
)
MINIMUM_LEVELS = 4


@dataclass(frozen=True)
class Sounding:
    """Levels of a sounding from the ground up, NaN where a value is missing.

    Attributes
    ----------
    pressure : ndarray (nz,) [Pa]
        Strictly falling.
    height : ndarray (nz,) [m above sea level] or None
        None when the file has none, or not all.
    ground : float or None [m above sea level]
        Height of the lowest level, when it is given.
    temperature, dew_point : ndarray (nz,) [K]
        Dew point over liquid water. Either `dew_point` or `relative_humidity` is given.
    relative_humidity : ndarray (nz,) [1] or None
    eastward_wind, northward_wind : ndarray (nz,) [m s-1]
        Interpolated by components in the logarithm of pressure where missing between measured winds.
    notes : tuple of str
    """

    pressure: NDArray[np.float64]
    height: NDArray[np.float64] | None
    ground: float | None
    temperature: NDArray[np.float64]
    dew_point: NDArray[np.float64] | None
    relative_humidity: NDArray[np.float64] | None
    eastward_wind: NDArray[np.float64]
    northward_wind: NDArray[np.float64]
    notes: tuple[str, ...]


def read_sounding(path: str | Path, where: str = "sounding_file", folder: Path | None = None) -> Sounding:
    """Sounding of a CSV file.

    Parameters
    ----------
    path, where, folder
        As in `orolift.sources.files.existing_file`.

    Returns
    -------
    Sounding

    Raises
    ------
    DataFileError
        If a column is missing, levels are out of order, repeated or too few,
        no wind is given, or temperature and dew point look swapped.
    MissingFileError
        If it cannot be read.
    """
    return sounding_from_text(read_text(path, where, folder), str(path))


def sounding_from_text(text: str, name: str) -> Sounding:
    """Sounding of CSV text; `name` stands for the file in messages.

    Raises
    ------
    DataFileError
        As `read_sounding`.
    """
    table = number_table(text, name, COLUMNS)
    _needed_columns(table)
    order = _upward(table)
    columns = {key: values[order] for key, values in table.columns.items()}
    line = table.line[order]
    humidity = columns["dew_point"] if "dew_point" in columns else columns["relative_humidity"]
    whole = np.isfinite(columns["temperature"]) & np.isfinite(humidity)
    notes: list[str] = []
    if whole.sum() < MINIMUM_LEVELS:
        raise DataFileError(
            f"{name}: {int(whole.sum())} levels have pressure, temperature and humidity; "
            f"at least {MINIMUM_LEVELS} are needed, the lowest at the ground."
        )
    if not whole[0]:
        notes.append(
            f"The lowest {int(np.argmax(whole))} levels of {name} lack temperature or humidity and are left out."
        )
    eastward, northward = _winds(columns, name)
    pressure, height = columns["pressure"], columns.get("height")
    ground = None if height is None or np.isnan(height[whole][0]) else float(height[whole][0])
    if height is not None and not np.isfinite(height[whole]).all():
        notes.append("Some heights of the sounding are missing: all of them are worked out from pressure.")
        height = None
    if "dew_point" in columns:
        _refuse_swapped(columns["temperature"][whole], columns["dew_point"][whole], name, int(line[whole][0]))
    return Sounding(
        pressure=pressure[whole],
        height=None if height is None else height[whole],
        ground=ground,
        temperature=columns["temperature"][whole],
        dew_point=columns["dew_point"][whole] if "dew_point" in columns else None,
        relative_humidity=columns["relative_humidity"][whole] if "dew_point" not in columns else None,
        eastward_wind=_on_levels(eastward, pressure)[whole],
        northward_wind=_on_levels(northward, pressure)[whole],
        notes=tuple(notes),
    )


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


def _upward(table: NumberTable) -> NDArray[np.int64]:
    """Row order from the ground up; rows without pressure are refused, and so is a broken order."""
    pressure = table.columns["pressure"]
    if np.isnan(pressure).any():
        line = int(table.line[np.isnan(pressure)][0])
        raise DataFileError(f"{table.name}: line {line}: no pressure; every level needs one.")
    order = np.arange(pressure.size)
    if pressure.size > 1 and pressure[0] < pressure[-1]:
        order = order[::-1]
    steps = np.diff(pressure[order])
    if (steps >= 0.0).any():
        at = int(np.argmax(steps >= 0.0))
        lines = table.line[order][at : at + 2]
        if steps[at] == 0.0:
            level = f"{pressure[order][at] / 100:g} hPa"
            raise DataFileError(f"{table.name}: lines {min(lines)} and {max(lines)} repeat {level}; keep one.")
        raise DataFileError(
            f"{table.name}: line {int(lines[1])}: {pressure[order][at + 1] / 100:g} hPa is out of order. "
            "Sort the levels from the ground up (or from the top down)."
        )
    return order


def _winds(columns: dict[str, NDArray[np.float64]], name: str) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    speed, direction = columns["wind"], columns["wind_from"]
    # A calm has no direction: its components are zero whatever the file says.
    direction = np.where(speed == 0.0, 0.0, direction)
    eastward, northward = -speed * np.sin(direction), -speed * np.cos(direction)
    if not np.isfinite(eastward).any():
        raise DataFileError(f"{name}: no level has wind speed and direction; at least one is needed.")
    return eastward, northward


def _on_levels(component: NDArray[np.float64], pressure: NDArray[np.float64]) -> NDArray[np.float64]:
    known = np.isfinite(component)
    return np.interp(-np.log(pressure), -np.log(pressure[known]), component[known])


def _refuse_swapped(temperature: NDArray[np.float64], dew_point: NDArray[np.float64], name: str, line: int) -> None:
    """Dew point above temperature at most levels means that the columns are swapped."""
    above = dew_point > temperature + 0.5
    if above.mean() > 0.5:
        raise DataFileError(
            f"{name}: dew point above temperature at {int(above.sum())} of {above.size} levels, from line {line} on. "
            "Are the two columns swapped?"
        )
