"""A sounding from a BUFR file, read by the library pdbufr (extra `bufr`), to levels."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.constants import GRAVITY
from orolift.errors import DataFileError, MissingExtraError
from orolift.sources.files import existing_file
from orolift.sources.reported_levels import blank_levels

if TYPE_CHECKING:
    from datetime import datetime
    from pathlib import Path

    from numpy.typing import NDArray

    from orolift.sources.reported_levels import ReportedLevels

LARGEST_FILE = 2 * 2**20
"""Largest BUFR file read, in bytes: one ascent is below 0.3 MB, and a hundred soundings take seconds to decode."""
SURFACE = {"verticalSoundingSignificance": 64, "extendedVerticalSoundingSignificance": 131072}
"""Bit of the surface level: flag tables 0 08 001 (7 bits) and 0 08 042 (18 bits), bit 1 first."""
STATIONS = ("WMO_station_id", "shipOrMobileLandStationIdentifier", "stationOrSiteName")
PLACES = ("longitude", "latitude", "heightOfStationGroundAboveMeanSeaLevel", "heightOfStation")
VALUES = (
    "pressure",
    "airTemperature",
    "dewpointTemperature",
    "windDirection",
    "windSpeed",
    "nonCoordinateGeopotential",
    "nonCoordinateGeopotentialHeight",
    "geopotentialHeight",
)
COLUMNS = (*STATIONS, *PLACES, "data_datetime", *SURFACE, *VALUES)


@dataclass(frozen=True, eq=False)
class _Table:
    """Rows of one sounding by BUFR key."""

    station: str
    observed: datetime | None
    columns: dict[str, NDArray[np.float64]]


def is_bufr(head: bytes) -> bool:
    """Whether the first bytes of a file are those of BUFR, with or without a bulletin heading.

    Examples
    --------
    >>> is_bufr(b"BUFR...") and not is_bufr(b"TTAA 53121")
    True
    """
    return b"BUFR" in head[:256]


def read_bufr_sounding(
    path: str | Path,
    where: str = "sounding_file",
    folder: Path | None = None,
    *,
    station: str | None = None,
    near: datetime | None = None,
) -> ReportedLevels:
    """Levels of a sounding in a BUFR file.

    Parameters
    ----------
    path, where, folder
        As in `orolift.sources.files.existing_file`.
    station : str or None
        Station number or identifier, where the file holds several soundings.
    near : datetime or None
        With a time zone; of several soundings of a station the nearest is taken.

    Returns
    -------
    ReportedLevels

    Raises
    ------
    MissingExtraError
        If pdbufr is not installed.
    DataFileError
        If the file is no BUFR, holds no sounding, or several and nothing says which.
    MissingFileError
        If it cannot be read.
    """
    full = existing_file(path, where, folder)
    if full.stat().st_size > LARGEST_FILE:
        raise DataFileError(f"{where}: {full} is larger than {LARGEST_FILE // 2**20} MB. Cut out the sounding wanted.")
    tables = _tables(full, where)
    table = _chosen(tables, f"{where}: {full}", station, near)
    return _levels(table, str(path))


def _tables(path: Path, where: str) -> list[_Table]:
    """Soundings of a file, in its order."""
    try:
        import pdbufr
    except (ImportError, RuntimeError) as error:  # eccodes says RuntimeError where its library is missing
        raise MissingExtraError(
            f"{where}: {path} is BUFR, which needs pdbufr. Install the extra 'bufr': pip install 'orolift[bufr]'."
        ) from error
    try:
        frame = pdbufr.read_bufr(str(path), columns=COLUMNS, required_columns=("pressure",))
    except Exception as error:  # the errors of pdbufr and eccodes have no common root
        raise DataFileError(f"{where}: {path} cannot be read as BUFR ({type(error).__name__}: {error}).") from error
    if not len(frame):
        raise DataFileError(f"{where}: {path} holds no level with a pressure. Is it a file of soundings?")
    return _split(frame)


def _split(frame: Any) -> list[_Table]:
    """A table for each station and time, in the order of the file."""
    stations = _station_names(frame)
    times = frame["data_datetime"].to_numpy() if "data_datetime" in frame else np.full(len(frame), None)
    columns = {key: _numbers(frame, key) for key in (*PLACES, *SURFACE, *VALUES)}
    keys = list(zip(stations, times, strict=True))
    starts = [i for i in range(len(keys)) if i == 0 or keys[i] != keys[i - 1]]
    return [
        _Table(stations[start], _moment(times[start]), {key: values[start:end] for key, values in columns.items()})
        for start, end in zip(starts, [*starts[1:], len(keys)], strict=True)
    ]


def _station_names(frame: Any) -> list[str]:
    names = [""] * len(frame)
    for key in reversed(STATIONS):
        if key in frame:
            for i, value in enumerate(frame[key].tolist()):
                if value is not None and value == value and str(value).strip():  # noqa: PLR0124 (not NaN)
                    names[i] = f"{int(value):05d}" if isinstance(value, int | float) else str(value).strip()
    return names


def _numbers(frame: Any, key: str) -> NDArray[np.float64]:
    if key not in frame:
        return np.full(len(frame), np.nan)
    return np.array([np.nan if value is None else float(value) for value in frame[key].tolist()], dtype=np.float64)


def _moment(value: Any) -> datetime | None:
    """A time of numpy as one with its zone: BUFR is in UTC."""
    from datetime import UTC, datetime

    if value is None or np.isnat(value):
        return None
    seconds = (np.datetime64(value) - np.datetime64(0, "s")) / np.timedelta64(1, "s")
    return datetime.fromtimestamp(float(seconds), UTC)


def _chosen(tables: list[_Table], name: str, station: str | None, near: datetime | None) -> _Table:
    """The sounding that station and time pick."""
    stations = list(dict.fromkeys(table.station for table in tables))
    shown = f"{', '.join(one or 'unnamed' for one in stations[:8])}{', ...' if len(stations) > 8 else ''}"
    if station is not None:
        wanted = station.strip()
        tables = [table for table in tables if table.station == wanted]
        if not tables:
            raise DataFileError(f"{name}: station {station} is not in it; it holds {shown}.")
    elif len(stations) > 1:
        raise DataFileError(
            f'{name}: holds soundings of {len(stations)} stations ({shown}). Name one with station = "..." in '
            "sounding_at."
        )
    if len(tables) == 1:
        return tables[0]
    if near is not None:
        moment = near
        timed = [table for table in tables if table.observed is not None]
        if timed:
            return min(timed, key=lambda table: _distance(table, moment))
    raise DataFileError(
        f"{name}: holds {len(tables)} soundings of station {tables[0].station or 'unnamed'}. Give valid_time or "
        "observed_time, and the nearest is read."
    )


def _distance(table: _Table, moment: datetime) -> float:
    """Seconds between a sounding and a moment."""
    return abs((table.observed - moment).total_seconds()) if table.observed is not None else np.inf


def _levels(table: _Table, name: str) -> ReportedLevels:
    raw = table.columns
    height = raw["nonCoordinateGeopotentialHeight"]
    for other in (raw["geopotentialHeight"], raw["nonCoordinateGeopotential"] / GRAVITY):
        height = np.where(np.isnan(height), other, height)
    surface = np.zeros(height.size, dtype=np.bool_)
    for key, bit in SURFACE.items():
        known = np.isfinite(raw[key])
        surface[known] |= (raw[key][known].astype(np.int64) & bit) > 0
    ground = raw["pressure"][surface & np.isfinite(raw["temperature" if "temperature" in raw else "airTemperature"])]
    fields: dict[str, Any] = {
        "pressure": _within(raw["pressure"], 100.0, 1.1e5),
        "height": _within(height, -500.0, 60000.0),
        "temperature": _within(raw["airTemperature"], 160.0, 335.0),
        "dew_point": _within(raw["dewpointTemperature"], 140.0, 320.0),
        "wind_speed": _within(raw["windSpeed"], 0.0, 150.0),
        "wind_from": np.radians(_within(raw["windDirection"], 0.0, 360.0)),
    }
    elevation = _first(raw["heightOfStationGroundAboveMeanSeaLevel"], raw["heightOfStation"])
    return replace(
        blank_levels(name, height.size, lambda i: f"level {i + 1}"),
        in_order=False,
        surface_pressure=float(ground[0]) if ground.size else None,
        elevation=elevation,
        observed=table.observed,
        longitude=_first(raw["longitude"]),
        latitude=_first(raw["latitude"]),
        station=table.station or None,
        **fields,
    )


def _within(values: NDArray[np.float64], low: float, high: float) -> NDArray[np.float64]:
    """Values with what no air can have taken out, as BUFR's codes for missing values are."""
    return np.where((values >= low) & (values <= high), values, np.nan)


def _first(*columns: NDArray[np.float64]) -> float | None:
    for values in columns:
        known = values[np.isfinite(values)]
        if known.size:
            return float(known[0])
    return None
