"""Observations in the lee from CSV: rows with time and place, units in the column names."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.humidity import (
    dew_point_from_relative_humidity,
    relative_humidity_from_dew_point,
)
from orolift.errors import DataFileError
from orolift.sources.files import read_text
from orolift.sources.table import Column, NumberTable, number_table

if TYPE_CHECKING:
    from collections.abc import Mapping
    from pathlib import Path

    from numpy.typing import NDArray

    Array = NDArray[np.float64]

MOST_ROWS = 5_000_000
"""Rows read at most: ten stations for a year at one-minute steps."""
SIZE_LIMIT = 512 * 1024 * 1024
"""Largest file read [bytes]."""
FOG_ROUNDING = 0.5
"""Dew point above the temperature [K] that counts as rounding; a judgement, as for the incoming air."""
MEASURED = ("temperature", "dew_point", "relative_humidity", "wind", "gust", "pressure", "rain_rate", "rain_total")
COLUMNS = (
    Column("time", text=True),
    Column("site", text=True),
    Column("longitude", -180.0, 360.0),
    Column("latitude", -89.9, 89.9),
    Column("easting_m", -1e8, 1e8),
    Column("northing_m", -1e8, 1e8),
    Column("distance_km", -2000.0, 5000.0),
    Column("elevation_m", -430.0, 9000.0),
    Column("temperature_c", -90.0, 60.0),
    Column("dew_point_c", -100.0, 45.0),
    Column("relative_humidity_percent", 0.0, 105.0),
    Column("wind_ms", 0.0, 120.0),
    Column("wind_from_deg", 0.0, 360.0),
    Column("gust_ms", 0.0, 150.0),
    Column("pressure_hpa", 300.0, 1100.0),
    Column("rain_rate_mm_per_h", 0.0, 500.0),
    Column("rain_total_mm", 0.0, 3000.0),
    Column("rain_duration_h", 0.01, 744.0),
    Column("crest_temperature_c", -90.0, 60.0),
    Column("crest_pressure_hpa", 300.0, 1100.0),
    Column("crest_elevation_m", -430.0, 9000.0),
)
"""What a row may hold; any other unit of the same kind is read too."""


@dataclass(frozen=True, eq=False)
class ObservedTable:
    """Observations as they stand in the file, in SI; arrays (n,), NaN where a cell is empty.

    Attributes
    ----------
    name : str
        File, for messages.
    time : ndarray [s]
        Since 1970-01-01T00:00:00 UTC; all NaN when the file has no times.
    site : tuple of str
        Empty where the row names none.
    columns : mapping of str to ndarray
        Every column of `COLUMNS` without its unit, those that are not in the file as NaN. Of dew point and relative
        humidity each follows from the other where the temperature is known.
    given : frozenset of str
        Columns that are in the file.
    line : ndarray of int
    notes, cautions : tuple of str
    """

    name: str
    time: Array
    site: tuple[str, ...]
    columns: Mapping[str, Array]
    given: frozenset[str]
    line: NDArray[np.int64]
    notes: tuple[str, ...]
    cautions: tuple[str, ...]


def read_observed(path: str | Path, where: str = "OBSERVED") -> ObservedTable:
    """Observations of a CSV file.

    Parameters
    ----------
    path : str or Path
        Columns as in `COLUMNS`; `time` with its offset from UTC or Z.
    where : str
        Argument, for messages.

    Returns
    -------
    ObservedTable

    Raises
    ------
    DataFileError
        If a column has no unit or is not known, a time has no zone, or nothing was observed; it names file and line.
    MissingFileError
        If it cannot be read.
    """
    return observed_from_text(read_text(path, where, limit=SIZE_LIMIT), str(path))


def observed_from_text(text: str, name: str) -> ObservedTable:
    """As `read_observed`, of a text."""
    table = number_table(text, name, COLUMNS, most_rows=MOST_ROWS)
    count = table.line.size
    given = frozenset([*table.columns, *table.texts])
    measured = [column for column in MEASURED if column in given]
    if not measured:
        raise DataFileError(
            f"{name}: holds nothing to compare with. Give at least one of temperature_c, dew_point_c, "
            "relative_humidity_percent, wind_ms, gust_ms, pressure_hpa, rain_rate_mm_per_h."
        )
    if not any(np.isfinite(table.columns[column]).any() for column in measured):
        raise DataFileError(f"{name}: every cell of {', '.join(measured)} is empty or a code for no value.")
    stems = [column.name for column in COLUMNS if not column.text]
    columns = {_stem(stem): table.columns.get(_stem(stem), np.full(count, np.nan)) for stem in stems}
    rain_note = _with_rain_rate(columns, given, name)
    humid_cautions = _with_humidity(columns, table)
    time, time_note = _times(table)
    return ObservedTable(
        name=name,
        time=time,
        site=table.texts.get("site", ("",) * count),
        columns=columns,
        given=given,
        line=table.line,
        notes=(*table.notes, *_missing_notes(table, measured), *rain_note, *time_note),
        cautions=humid_cautions,
    )


def _stem(name: str) -> str:
    from orolift.sources.units import suffix_of

    return (suffix_of(name) or (name, ""))[0]


def _missing_notes(table: NumberTable, measured: list[str]) -> tuple[str, ...]:
    """How many cells hold no value, and where the first one is."""
    notes = []
    for column in measured:
        missing = np.isnan(table.columns[column])
        count = int(missing.sum())
        if count:
            cells = "1 cell holds" if count == 1 else f"{count} cells hold"
            notes.append(
                f"{table.name}: {column}: {cells} no value (empty, -9999 or the like; first on line "
                f"{int(table.line[int(np.argmax(missing))])})."
            )
    return tuple(notes)


def _with_rain_rate(columns: dict[str, Array], given: frozenset[str], name: str) -> tuple[str, ...]:
    """Rate of rain from totals and their durations, where no rate is given."""
    if "rain_total" not in given:
        return ()
    if "rain_duration" not in given:
        raise DataFileError(f"{name}: rain_total needs a column rain_duration_h, the hours it fell in.")
    from_total = columns["rain_total"] / columns["rain_duration"]
    columns["rain_rate"] = np.where(np.isnan(columns["rain_rate"]), from_total, columns["rain_rate"])
    return (f"{name}: totals of rain are divided by their duration and held against the steady rate.",)


def _with_humidity(columns: dict[str, Array], table: NumberTable) -> tuple[str, ...]:
    """Dew point and relative humidity, each from the other; what contradicts itself is left out."""
    t, dew, humidity = (columns[key].copy() for key in ("temperature", "dew_point", "relative_humidity"))
    cautions = []
    above = dew > t + FOG_ROUNDING
    if above.any():
        dew[above] = np.nan
        humidity[above] = np.nan
        first = int(table.line[int(np.argmax(above))])
        cautions.append(
            f"{table.name}: {_rows(int(above.sum()))} a dew point above the temperature (first on line {first}); "
            "the humidity there is left out."
        )
    both = np.isfinite(t) & np.isfinite(dew)
    dew[both] = np.minimum(dew[both], t[both])
    from_humidity = np.isfinite(t) & np.isfinite(humidity) & np.isnan(dew) & (humidity > 0.0) & ~above
    dew[from_humidity] = dew_point_from_relative_humidity(t[from_humidity], np.minimum(humidity[from_humidity], 1.0))
    from_dew = both & np.isnan(humidity)
    humidity[from_dew] = relative_humidity_from_dew_point(t[from_dew], dew[from_dew])
    columns["dew_point"], columns["relative_humidity"] = dew, np.minimum(humidity, 1.0)
    return tuple(cautions)


def _rows(count: int) -> str:
    return "1 row has" if count == 1 else f"{count} rows have"


def _times(table: NumberTable) -> tuple[Array, tuple[str, ...]]:
    """Seconds since 1970 of each row, and what to say of those without a time."""
    texts = table.texts.get("time")
    if texts is None:
        return np.full(table.line.size, np.nan), ()
    known: dict[str, float] = {"": np.nan}
    for text, line in zip(texts, table.line, strict=True):
        if text not in known:
            known[text] = _moment(text, f"{table.name}: line {line}")
    time = np.array([known[text] for text in texts])
    missing = np.isnan(time)
    if not missing.any():
        return time, ()
    return time, (
        f"{table.name}: {_rows(int(missing.sum()))} no time (first on line {table.line[int(np.argmax(missing))]}).",
    )


def _moment(text: str, where: str) -> float:
    """Seconds since 1970 of a time with its zone."""
    try:
        time = datetime.fromisoformat(text)
    except ValueError as error:
        raise DataFileError(
            f"{where}: time '{text[:40]}' is not a date and time. Write it like 2027-02-14T03:00Z or "
            "2027-02-14T05:00+02:00."
        ) from error
    if time.tzinfo is None:
        raise DataFileError(
            f"{where}: time '{text}' names no zone. Add Z for UTC, or the offset from it, for example +01:00."
        )
    return time.timestamp()
