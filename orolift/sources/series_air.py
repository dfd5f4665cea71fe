"""The incoming air of each row of a series: the case's own table with the values of the row in it."""

from __future__ import annotations

from datetime import UTC, datetime
from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import CaseError, DataFileError, OroliftError
from orolift.sources.incoming import read_incoming
from orolift.sources.incoming_model import ModelAt, Station
from orolift.sources.units import UNITS

if TYPE_CHECKING:
    from pathlib import Path

    from orolift.sources.incoming import IncomingReading
    from orolift.sources.incoming_model import Incoming
    from orolift.sources.inputs import Inputs
    from orolift.sources.series import Series

NOTHING = {
    "station": None,
    "stations": None,
    "metar": None,
    "sounding_file": None,
    "sounding_at": None,
    "sounding_elevation_m": None,
    "model_file": None,
    "model_at": None,
    "surface_station": None,
    "surface_metar": None,
    "crest_wind_kt": None,
    "crest_wind_from_deg": None,
}
"""Keys of [incoming] that a row stands in for."""


def _in_unit(value: float, suffix: str) -> float:
    """A number in SI in the unit of a key, without the noise of converting there and back."""
    unit = UNITS[suffix]
    return round((value - unit.offset) / unit.factor, 9)


def refuse_unfit(inputs: Inputs, series: Series) -> tuple[str, ...]:
    """Refuse a case that a series cannot stand in for; else what is assumed.

    Parameters
    ----------
    inputs : Inputs
    series : Series

    Returns
    -------
    tuple of str
        Notes.

    Raises
    ------
    CaseError
        If the case does not say how high the station is, or says already what the series says.
    DataFileError
        If the wind of the series has no direction.
    """
    table, notes = inputs.case.incoming, []
    if series.kind == "station":
        if table.station is None and table.metar is None:
            raise CaseError(
                f"{inputs.path}: {series.name} gives values of a station, and [incoming] has none. Give station = "
                "{ elevation_m = ..., ... } with values of any hour: its elevation and place are used."
            )
        if "wind_from" not in series.columns and table.wind_from_deg is None:
            raise DataFileError(
                f"{series.name}: has no column wind_from_deg, and {inputs.path} no wind_from_deg in [incoming]."
            )
        if "wind_from" not in series.columns:
            notes.append("The series has no direction of the wind: that of the case is taken for every hour.")
        if "crest_wind" not in series.columns:
            dropped = " and that of the case is of its own hour" if table.crest_wind_kt is not None else ""
            notes.append(
                f"The series has no wind at the crest{dropped}: the wind is taken as constant with height, and "
                "blocking is uncertain."
            )
    if "lee_temperature" in series.columns:
        if inputs.lee.pool_top is not None or inputs.lee.air is not None:
            raise CaseError(
                f"{inputs.path}: [lee] and the column lee_temperature_c of {series.name} both say what lies in the "
                "lee. Keep one of them."
            )
    elif inputs.lee.known:
        notes.append("What [lee] says of the air in the lee is taken for every hour.")
    return tuple(notes)


def reading_of_row(inputs: Inputs, series: Series, row: int) -> IncomingReading:
    """Incoming air of a row.

    Parameters
    ----------
    inputs : Inputs
        Of the case.
    series : Series
    row : int

    Returns
    -------
    IncomingReading

    Raises
    ------
    DataFileError
        If the row cannot be used; the message names its line.
    """
    if row in series.faults:
        raise DataFileError(series.faults[row])
    valid = datetime.fromtimestamp(float(series.time[row]), UTC)
    try:
        table, folder = table_of_row(inputs, series, row)
        return read_incoming(table, folder, valid)
    except OroliftError as error:
        text = str(error).removeprefix("[incoming] station: ")
        raise DataFileError(f"{series.name}: {_row(series, row)}: {text}") from error


def table_of_row(inputs: Inputs, series: Series, row: int) -> tuple[Incoming, Path]:
    """The table [incoming] with the values of a row in it, and the folder its paths start from.

    Raises
    ------
    DataFileError
        If the row has a wind without direction, or no moisture at all.
    """
    make = {"station": _station, "sounding": _sounding, "model": _model}[series.kind]
    return make(inputs, series, row)


def _row(series: Series, row: int) -> str:
    return f"time {series.line[row]}" if series.kind == "model" else f"line {series.line[row]}"


def _station(inputs: Inputs, series: Series, row: int) -> tuple[Incoming, Path]:
    table = inputs.case.incoming
    known = table.station or table.metar
    if known is None:
        raise CaseError("[incoming] has no station")

    def value(stem: str, suffix: str) -> float | None:
        found = float(series.columns[stem][row]) if stem in series.columns else np.nan
        return None if np.isnan(found) else _in_unit(found, suffix)

    wind_from = value("wind_from", "deg")
    wind = value("wind", "kt") or 0.0
    if wind_from is None:
        if "wind_from" in series.columns and wind > 0.0:
            raise DataFileError("the wind has no direction.")
        wind_from = table.wind_from_deg or 0.0
    station = Station.model_construct(  # the ranges were checked when the series was read
        elevation_m=known.elevation_m,
        temperature_c=value("temperature", "c"),
        dew_point_c=value("dew_point", "c"),
        relative_humidity_percent=value("relative_humidity", "percent"),
        pressure_hpa=value("pressure", "hpa"),
        qnh_hpa=value("qnh", "hpa"),
        wind_kt=wind,
        wind_from_deg=wind_from,
        longitude=known.longitude,
        latitude=known.latitude,
        distance_km=known.distance_km,
    )
    if station.relative_humidity_percent == 0.0:
        raise DataFileError("relative_humidity_percent 0: perfectly dry air is no measurement.")
    crest = value("crest_wind", "kt")
    crest_from = value("crest_wind_from", "deg")
    new = {
        **NOTHING,
        "station": station,
        "crest_wind_kt": crest,
        "crest_wind_from_deg": None if crest is None else wind_from if crest_from is None else crest_from,
    }
    return table.model_copy(update=new), inputs.path.parent


def _sounding(inputs: Inputs, series: Series, row: int) -> tuple[Incoming, Path]:
    table = inputs.case.incoming
    new = {
        **NOTHING,
        "sounding_file": series.files[row],
        "sounding_at": table.sounding_at,
        "sounding_elevation_m": table.sounding_elevation_m,
        "lapse_rate_c_per_km": None,
    }
    return table.model_copy(update=new), series.path.parent


def _model(inputs: Inputs, series: Series, row: int) -> tuple[Incoming, Path]:
    table = inputs.case.incoming
    at = table.model_at or ModelAt()
    time = datetime.fromtimestamp(float(series.time[row]), UTC)
    new = {
        **NOTHING,
        "model_file": str(series.path.resolve()),
        "model_at": at.model_copy(update={"time": time}),
        "lapse_rate_c_per_km": None,
    }
    return table.model_copy(update=new), series.path.parent
