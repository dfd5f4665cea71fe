"""A series of incoming air: a table of station values or of sounding files, or model output with times."""

from __future__ import annotations

from dataclasses import dataclass, replace
from datetime import UTC, datetime, timedelta, timezone
from typing import TYPE_CHECKING, Literal

import numpy as np

from orolift.errors import DataFileError
from orolift.sources.files import existing_file, read_text
from orolift.sources.sounding_file import NETCDF
from orolift.sources.table import Column, NumberTable, number_table

if TYPE_CHECKING:
    from collections.abc import Mapping
    from pathlib import Path

    from numpy.typing import NDArray

Kind = Literal["station", "sounding", "model"]

STATION_COLUMNS = (
    Column("temperature_c", -80.0, 56.0),
    Column("dew_point_c", -100.0, 45.0),
    Column("relative_humidity_percent", 0.0, 100.0),
    Column("pressure_hpa", 300.0, 1090.0),
    Column("qnh_hpa", 860.0, 1090.0),
    Column("wind_from_deg", 0.0, 360.0),
    Column("wind_ms", 0.0, 129.0),
    Column("crest_wind_ms", 0.0, 129.0),
    Column("crest_wind_from_deg", 0.0, 360.0),
)
"""Columns of station values; the ranges are those of the case file."""
COLUMNS = (
    Column("time", text=True),
    Column("sounding_file", text=True),
    *STATION_COLUMNS,
    Column("lee_temperature_c", -80.0, 56.0),
)
"""Every column a series may have."""
MOST_HOURS = 500_000
"""Rows read at most: 57 years of hours."""
MOST_FAULTY = 0.5
"""Share of faulty rows beyond which the file is refused: then it is no fault of a row; a judgement."""
GAP = 1.5
"""A step longer than this many usual steps is a gap; a judgement."""
HOUR = 3600.0


@dataclass(frozen=True, eq=False)
class Series:
    """A series of incoming air, in the order of time; hours that are not in it stand there as faults.

    Attributes
    ----------
    name : str
        File, for messages.
    kind : 'station', 'sounding' or 'model'
    path : Path
    time : ndarray (n,) [s]
        Since 1970-01-01T00:00:00 UTC, increasing.
    zone : tzinfo
        In which the file gives its times, where it is the same throughout; else UTC.
    columns : mapping of str to ndarray (n,)
        In SI, NaN where missing.
    files : tuple of str
        Sounding of each row; empty for other kinds.
    line : ndarray of int (n,)
        Line of the file of each row; of model output the number of the time; 0 where there is none.
    faults : mapping of int to str
        Why a row cannot be used, by its number.
    notes : tuple of str
        How it was read.
    """

    name: str
    kind: Kind
    path: Path
    time: NDArray[np.float64]
    zone: timezone
    columns: Mapping[str, NDArray[np.float64]]
    files: tuple[str, ...]
    line: NDArray[np.int64]
    faults: Mapping[int, str]
    notes: tuple[str, ...]

    @property
    def step(self) -> float:
        """Usual time between two rows [s]: the median, of two the shorter; an hour for a single row."""
        between = np.diff(self.time)
        return float(np.quantile(between, 0.5, method="lower")) if between.size else HOUR


def read_series(path: str | Path) -> Series:
    """A series of incoming air.

    Parameters
    ----------
    path : str or Path
        CSV with station values or sounding files, or NetCDF with times.

    Returns
    -------
    Series

    Raises
    ------
    DataFileError
        If a time is missing, without a zone or twice, a column is missing or
        contradicts another, or more than half of the rows are at fault.
    MissingFileError
        If it cannot be read.
    MissingExtraError
        If it is NetCDF and netCDF4 is not installed.

    Notes
    -----
    Rows out of order are sorted, with a note: each carries its own time. A
    row with a cell that is no number or out of range is kept as a fault of that row, and where a step is longer than
    1.5 usual ones the hours between are put in as faults: nothing is interpolated.
    """
    where = "series"
    full = existing_file(path, where)
    with full.open("rb") as stream:
        head = stream.read(8)
    if head.startswith(NETCDF):
        from orolift.sources.model_column import model_times

        time = np.array([one.timestamp() for one in model_times(full, where)])
        order = np.arange(time.size)
        _refuse_twice(time, order + 1, str(path), "time")
        return _with_gaps(Series(str(path), "model", full, time, UTC, {}, (), order + 1, {}, ()))
    name = str(path)
    table = number_table(read_text(path, where), name, COLUMNS, most_rows=MOST_HOURS, forgiving=True)
    kind = _kind(table)
    times = _times(table)
    offsets = {one.utcoffset() for one in times}
    offset = offsets.pop() if len(offsets) == 1 else None
    series = Series(
        name,
        kind,
        full,
        np.array([one.timestamp() for one in times]),
        timezone(offset or timedelta()),
        table.columns,
        table.texts.get("sounding_file", ()),
        table.line,
        _faults(table, kind),
        table.notes,
    )
    return _with_gaps(_checked(_sorted(series)))


def _kind(table: NumberTable) -> Kind:
    """Which kind of series the columns make; refuses those that make none."""
    if "time" not in table.texts:
        raise DataFileError(f"{table.name}: has no column time. Give each row its time, as in 2026-11-03T21:00:00Z.")
    have = set(table.columns) - {"lee_temperature"}
    if "sounding_file" in table.texts:
        if have:
            raise DataFileError(
                f"{table.name}: sounding_file and {min(have)} both give the incoming air. Keep one of them."
            )
        return "sounding"
    for stems in (("temperature",), ("dew_point", "relative_humidity"), ("pressure", "qnh"), ("wind",)):
        given = [stem for stem in stems if stem in have]
        if len(given) == 1:
            continue
        names = " or ".join(next(c.name for c in COLUMNS if c.name.rpartition("_")[0] == stem) for stem in stems)
        what = "has no column" if not given else "has both columns"
        hint = " A series of soundings has time and sounding_file." if not given else " Keep one of them."
        raise DataFileError(f"{table.name}: {what} {names}.{hint}")
    if "crest_wind_from" in have and "crest_wind" not in have:
        raise DataFileError(f"{table.name}: crest_wind_from_deg needs crest_wind_ms beside it.")
    return "station"


def _times(table: NumberTable) -> list[datetime]:
    """Time of every row, with its zone."""
    found = []
    for text, line in zip(table.texts["time"], table.line.tolist(), strict=True):
        try:
            time = datetime.fromisoformat(text)
        except ValueError as error:
            raise DataFileError(
                f"{table.name}: line {line}: time '{text[:40]}' is not a time of ISO 8601, as in 2026-11-03T21:00:00Z."
            ) from error
        if time.tzinfo is None:
            raise DataFileError(
                f"{table.name}: line {line}: time '{text[:40]}' has no time zone. Write {text[:40]}Z for UTC, or the "
                "offset of your local time, as in 2026-11-03T21:00:00+12:00; an hour of local time may occur twice."
            )
        found.append(time)
    return found


def _faults(table: NumberTable, kind: Kind) -> dict[int, str]:
    """Rows that cannot be used, with the reason: cells at fault, and cells missing."""
    faults = dict(table.faults)
    if kind == "sounding":
        missing = np.array([not one for one in table.texts["sounding_file"]])
        for i in np.flatnonzero(missing).tolist():
            faults.setdefault(i, f"{table.name}: line {table.line[i]}: no sounding_file.")
        return faults
    for stem in ("temperature", "dew_point", "relative_humidity", "pressure", "qnh", "wind"):
        if stem in table.columns:
            for i in np.flatnonzero(np.isnan(table.columns[stem])).tolist():
                faults.setdefault(i, f"{table.name}: line {table.line[i]}: no {stem.replace('_', ' ')}.")
    return faults


def _sorted(series: Series) -> Series:
    """The same in the order of time, with a note where it was not."""
    back = np.flatnonzero(np.diff(series.time) < 0.0)
    if not back.size:
        return series
    order = np.argsort(series.time, kind="stable")
    number = np.empty_like(order)
    number[order] = np.arange(order.size)
    note = (
        f"{series.name}: line {series.line[back[0] + 1]} is earlier than the line before it: "
        "the rows are sorted by their times."
    )
    return replace(
        series,
        time=series.time[order],
        columns={stem: values[order] for stem, values in series.columns.items()},
        files=tuple(series.files[i] for i in order) if series.files else (),
        line=series.line[order],
        faults={int(number[i]): text for i, text in series.faults.items()},
        notes=(*series.notes, note),
    )


def _checked(series: Series) -> Series:
    """The series, unless a time stands twice or most rows are at fault."""
    _refuse_twice(series.time, series.line, series.name, "line")
    if len(series.faults) > MOST_FAULTY * series.time.size:
        first = series.faults[min(series.faults)]
        raise DataFileError(
            f"{first} {len(series.faults)} of {series.time.size} rows cannot be used, more than half: check columns "
            "and units of the whole file."
        )
    return series


def _with_gaps(series: Series) -> Series:
    """The same with a fault for each hour that is not there."""
    step = series.step
    between = np.diff(series.time)
    absent = np.where(between > GAP * step, np.rint(between / step) - 1.0, 0.0).astype(np.int64)
    count = int(absent.sum())
    if not count:
        return series
    longest = int(np.argmax(between))
    dates = [
        datetime.fromtimestamp(float(t), UTC).strftime("%Y-%m-%dT%H:%MZ") for t in series.time[longest : longest + 2]
    ]
    span = f"from {dates[0]} to {dates[1]}"
    if count > MOST_HOURS:
        raise DataFileError(
            f"{series.name}: {count} steps of {step:g} s are missing, the longest gap {span}. Is a year mistyped? "
            "If not, run the parts before and after the gap by themselves."
        )
    new = np.concatenate(
        [a + d * np.arange(1, n + 1) / (n + 1) for a, d, n in zip(series.time, between, absent, strict=False) if n]
    )
    time = np.concatenate([series.time, new])
    order = np.argsort(time, kind="stable")
    number = np.empty_like(order)
    number[order] = np.arange(order.size)

    def longer(values: NDArray[np.float64]) -> NDArray[np.float64]:
        return np.concatenate([values, np.full(count, np.nan)])[order]

    files = (*series.files, *("",) * count)
    faults = {int(number[i]): text for i, text in series.faults.items()}
    faults |= {int(i): f"{series.name}: has no row for this hour." for i in number[series.time.size :]}
    note = f"{series.name}: {count} steps are missing, the longest gap {span}. They are shown as gaps."
    return replace(
        series,
        time=time[order],
        columns={stem: longer(values) for stem, values in series.columns.items()},
        files=tuple(files[i] for i in order) if series.files else (),
        line=np.concatenate([series.line, np.zeros(count, dtype=np.int64)])[order],
        faults=faults,
        notes=(*series.notes, note),
    )


def _refuse_twice(time: NDArray[np.float64], line: NDArray[np.int64], name: str, what: str) -> None:
    twice = np.flatnonzero(np.diff(time) == 0.0)
    if twice.size:
        a, b = sorted((int(line[twice[0]]), int(line[twice[0] + 1])))
        when = datetime.fromtimestamp(float(time[twice[0]]), UTC).strftime("%Y-%m-%dT%H:%M:%SZ")
        more = f" ({twice.size} times occur twice)" if twice.size > 1 else ""
        raise DataFileError(f"{name}: {what} {a} and {what} {b} have the same time, {when}{more}. Keep one of them.")
