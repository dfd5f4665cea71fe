"""A column out of model output in NetCDF with CF names (extra `netcdf`), to levels."""

from __future__ import annotations

import contextlib
from dataclasses import replace
from datetime import UTC, datetime
from typing import TYPE_CHECKING, Any, Literal

import numpy as np

from orolift.constants import GRAVITY, R_DRY
from orolift.errors import DataFileError, MissingExtraError
from orolift.sources.files import existing_file
from orolift.sources.model_grid import column_corners, mixed, values_at
from orolift.sources.model_units import converted_from
from orolift.sources.quality import Finding
from orolift.sources.reported_levels import blank_levels

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

    from numpy.typing import NDArray

    from orolift.sources.reported_levels import ReportedLevels

    Array = NDArray[np.float64]

Method = Literal["nearest", "bilinear"]

NAMES = {
    "pressure": ("air_pressure",),
    "height": ("geopotential_height", "altitude"),
    "geopotential": ("geopotential",),
    "temperature": ("air_temperature",),
    "dew_point": ("dew_point_temperature",),
    "relative_humidity": ("relative_humidity",),
    "specific_humidity": ("specific_humidity",),
    "mixing_ratio": ("humidity_mixing_ratio",),
    "eastward": ("eastward_wind",),
    "northward": ("northward_wind",),
    "surface_pressure": ("surface_air_pressure",),
    "surface_altitude": ("surface_altitude",),
    "surface_geopotential": ("surface_geopotential",),
}
"""CF standard names of the quantities read (CF standard name table)."""
LEVEL_QUANTITIES = frozenset(
    {"pressure", "height", "geopotential", "temperature", "dew_point", "relative_humidity", "specific_humidity",
     "mixing_ratio", "eastward", "northward"}
)  # fmt: skip


def read_model_column(
    path: str | Path,
    where: str = "model_file",
    folder: Path | None = None,
    *,
    longitude: float | None = None,
    latitude: float | None = None,
    time: datetime | None = None,
    method: Method = "nearest",
) -> ReportedLevels:
    """Levels of a column of model output.

    Parameters
    ----------
    path, where, folder
        As in `orolift.sources.files.existing_file`.
    longitude, latitude : float or None [degrees east, degrees north]
        Where; may be left out when the file holds one column.
    time : datetime or None
        With a time zone; the nearest time of the file is taken. May be left
        out when the file holds one time.
    method : 'nearest' or 'bilinear'
        Bilinear needs latitude and longitude as axes of their own.

    Returns
    -------
    ReportedLevels
        Levels below the model's ground are marked by its surface pressure.

    Raises
    ------
    MissingExtraError
        If netCDF4 is not installed.
    DataFileError
        If a quantity, the place or the time is missing, or a unit is not known.
    MissingFileError
        If it cannot be read.

    Notes
    -----
    Variables are found by their ``standard_name`` (CF conventions). Pressure
    is the vertical coordinate or a variable; heights are optional with it.
    Winds must be eastward and northward: components along a rotated grid are
    not turned. Only the column is read from the file.
    """
    full = existing_file(path, where, folder)
    with _opened(full, where) as data:
        try:
            return _column(data, str(path), longitude, latitude, time, method)
        except (OSError, RuntimeError, IndexError, KeyError, ValueError, AttributeError, TypeError) as error:
            if isinstance(error, DataFileError):
                raise
            raise DataFileError(f"{where}: {full} cannot be used ({type(error).__name__}: {error}).") from error


def model_times(path: str | Path, where: str = "model_file", folder: Path | None = None) -> list[datetime]:
    """Times that a file of model output holds.

    Parameters
    ----------
    path, where, folder
        As in `orolift.sources.files.existing_file`.

    Returns
    -------
    list of datetime
        In UTC, in the order of the file.

    Raises
    ------
    MissingExtraError, DataFileError, MissingFileError
        As `read_model_column`.
    """
    full = existing_file(path, where, folder)
    with _opened(full, where) as data:
        try:
            temperature = _variable(data, NAMES["temperature"], "temperature")
            if temperature is None:
                raise DataFileError(f"{path}: no variable with the CF standard_name air_temperature.")
            dimension = _time_axis(data, temperature)
            axis = data.variables.get(dimension) if dimension else _scalar_time(data)
            if axis is None:
                raise DataFileError(f"{path}: has no times; give temperature a dimension of time.")
            return _moments(axis)
        except (OSError, RuntimeError, IndexError, KeyError, ValueError, AttributeError, TypeError) as error:
            if isinstance(error, DataFileError):
                raise
            raise DataFileError(f"{where}: {full} cannot be used ({type(error).__name__}: {error}).") from error


@contextlib.contextmanager
def _opened(path: Path, where: str) -> Iterator[Any]:
    try:
        import netCDF4
    except ImportError as error:
        raise MissingExtraError(
            f"{where}: {path} is NetCDF, which needs netCDF4. Install the extra 'netcdf': "
            "pip install 'orolift[netcdf]'."
        ) from error
    try:
        data = netCDF4.Dataset(str(path))
    except (OSError, RuntimeError) as error:
        raise DataFileError(f"{where}: {path} cannot be read as NetCDF ({error}).") from error
    with data:
        yield data


def _column(
    data: Any, name: str, longitude: float | None, latitude: float | None, time: datetime | None, method: Method
) -> ReportedLevels:
    variables = {key: found for key, names in NAMES.items() if (found := _variable(data, names, key)) is not None}
    _refuse_incomplete(variables, data, name)
    axis = _vertical_axis(data, variables["temperature"], name)
    moment, time_index = _time(data, variables["temperature"], time, name)
    corners, place = column_corners(data, variables["temperature"], longitude, latitude, method, name)
    raw: dict[str, Array] = {}
    for key, variable in variables.items():
        fixed = {} if time_index is None else {_time_axis(data, variable): time_index}
        values = mixed([(corner.weight, values_at(variable, corner.index | fixed, axis)) for corner in corners])
        raw[key] = converted_from(values, getattr(variable, "units", ""), key, f"{name}: {variable.name}")
    return _levels(raw, name, moment, place, data.variables.get(axis))


def _variable(data: Any, names: tuple[str, ...], key: str) -> Any | None:
    """The variable with one of the standard names; on levels where the quantity lives there."""
    found = [one for one in data.variables.values() if getattr(one, "standard_name", "") in names]
    if key in LEVEL_QUANTITIES and len(found) > 1:
        most = max(len(one.dimensions) for one in found)
        found = [one for one in found if len(one.dimensions) == most]
    return found[0] if found else None


def _refuse_incomplete(variables: dict[str, Any], data: Any, name: str) -> None:
    present = sorted({getattr(one, "standard_name", "") for one in data.variables.values()} - {""})
    held = f"It holds: {', '.join(present[:20]) or 'no variable with a standard_name'}."
    for key in ("temperature", "eastward", "northward"):
        if key not in variables:
            turned = " Winds along a rotated grid (x_wind, y_wind) are not turned." if key != "temperature" else ""
            raise DataFileError(f"{name}: no variable with the CF standard_name {NAMES[key][0]}.{turned} {held}")
    if not {"dew_point", "relative_humidity", "specific_humidity", "mixing_ratio"} & set(variables):
        raise DataFileError(f"{name}: no humidity (for example specific_humidity by its CF standard_name). {held}")
    if "pressure" not in variables:
        raise DataFileError(f"{name}: no air_pressure, neither as coordinate nor as variable. {held}")


def _vertical_axis(data: Any, temperature: Any, name: str) -> str:
    """Dimension of the levels."""
    for dimension in temperature.dimensions:
        axis = data.variables.get(dimension)
        if axis is None:
            continue
        standard = getattr(axis, "standard_name", "")
        vertical = standard in {"air_pressure", "altitude", "height", "geopotential_height", "model_level_number"}
        if vertical or getattr(axis, "axis", "") == "Z" or hasattr(axis, "positive"):
            return str(dimension)
    pressure = next(
        (one for one in data.variables.values() if getattr(one, "standard_name", "") == "air_pressure"), None
    )
    if pressure is not None and len(pressure.dimensions) == 1:
        return str(pressure.dimensions[0])
    raise DataFileError(
        f"{name}: no vertical coordinate is found among {', '.join(temperature.dimensions)}; give it axis = 'Z' or a "
        "standard_name such as air_pressure."
    )


def _time_axis(data: Any, variable: Any) -> str:
    """Dimension of time of a variable, or an empty name."""
    for dimension in variable.dimensions:
        axis = data.variables.get(dimension)
        if axis is not None and (
            getattr(axis, "standard_name", "") == "time" or " since " in str(getattr(axis, "units", ""))
        ):
            return str(dimension)
    return ""


def _time(data: Any, variable: Any, wanted: datetime | None, name: str) -> tuple[datetime | None, int | None]:
    """The time to read and its number."""
    dimension = _time_axis(data, variable)
    axis = data.variables.get(dimension) if dimension else _scalar_time(data)
    if axis is None:
        return None, None
    times = _moments(axis)
    index = 0
    if len(times) > 1:
        if wanted is None:
            raise DataFileError(f"{name}: holds {len(times)} times; give valid_time, and the nearest is read.")
        moment = wanted
        index = min(range(len(times)), key=lambda i: abs((times[i] - moment).total_seconds()))
    return times[index], index if dimension else None


def _moments(axis: Any) -> list[datetime]:
    """Times of an axis."""
    import netCDF4

    raw = np.ma.filled(np.ma.atleast_1d(axis[...]).astype(np.float64), np.nan)
    calendar = getattr(axis, "calendar", "standard")
    return [
        datetime(one.year, one.month, one.day, one.hour, one.minute, one.second, tzinfo=UTC)
        for one in np.ravel(np.asarray(netCDF4.num2date(raw, axis.units, calendar), dtype=object))
    ]


def _scalar_time(data: Any) -> Any | None:
    return next(
        (one for one in data.variables.values() if getattr(one, "standard_name", "") == "time" and one.size == 1), None
    )


def _levels(
    raw: dict[str, Array],
    name: str,
    moment: datetime | None,
    place: tuple[float | None, float | None],
    axis: Any | None,
) -> ReportedLevels:
    """Levels from the quantities of the column."""
    count = raw["temperature"].size
    ground = _ground(raw)
    surface = float(raw["surface_pressure"].ravel()[0]) if "surface_pressure" in raw else None
    fields: dict[str, Any] = {
        "pressure": np.broadcast_to(raw["pressure"], count),
        "temperature": raw["temperature"],
        "wind_speed": np.hypot(raw["eastward"], raw["northward"]),
        "wind_from": np.mod(np.arctan2(-raw["eastward"], -raw["northward"]), 2.0 * np.pi),
        "height": _heights(raw, axis, ground, name),
        **_humidity(raw),
    }
    if ground is not None and surface is not None and not np.isfinite(fields["height"]).any():
        fields["height"] = _height_of_lowest(fields["pressure"], fields["temperature"], ground, surface)
    findings: tuple[Finding, ...] = ()
    if surface is None and ground is None:
        what, done = "no surface pressure or altitude in the file", "the lowest level is taken as the ground"
        findings = (Finding(name, what, "", done, "doubtful"),)
    return replace(
        blank_levels(name, count, lambda i: f"level {i + 1}"),
        in_order=False,
        surface_pressure=surface,
        observed=moment,
        longitude=place[0],
        latitude=place[1],
        findings=findings,
        **_above(fields, ground),
    )


def _heights(raw: dict[str, Array], axis: Any | None, ground: float | None, name: str) -> Array:
    """Heights above sea level: a variable, or the vertical coordinate where it is one."""
    count = raw["temperature"].size
    if "height" in raw:
        return np.broadcast_to(raw["height"], count)
    if "geopotential" in raw:
        return np.broadcast_to(raw["geopotential"] / GRAVITY, count)
    kind = getattr(axis, "standard_name", "")
    if (
        axis is None
        or kind not in {"altitude", "geopotential_height", "height"}
        or (kind == "height" and ground is None)
    ):
        return np.full(count, np.nan)
    above = converted_from(_whole(axis), getattr(axis, "units", "m"), "height", f"{name}: {axis.name}")
    return above + (ground or 0.0) if kind == "height" else above


def _height_of_lowest(pressure: Array, temperature: Array, ground: float, surface: float) -> Array:
    """Height of the lowest level above the model's ground, from its surface pressure; the others stay unknown."""
    height = np.full(pressure.size, np.nan)
    above = (pressure <= surface) & np.isfinite(temperature)
    if above.any():
        i = int(np.argmax(np.where(above, pressure, 0.0)))
        height[i] = ground + R_DRY / GRAVITY * temperature[i] * np.log(surface / pressure[i])
    return height


def _whole(axis: Any) -> Array:
    return np.asarray(np.ma.filled(np.ma.asarray(axis[...]).astype(np.float64), np.nan), dtype=np.float64)


def _humidity(raw: dict[str, Array]) -> dict[str, Array]:
    """Dew point or relative humidity of the column, of whatever measure it holds."""
    from orolift.air.humidity import dew_point_from_mixing_ratio

    if "dew_point" in raw:
        return {"dew_point": raw["dew_point"]}
    if "mixing_ratio" in raw or "specific_humidity" in raw:
        share = raw.get("specific_humidity")
        ratio = raw["mixing_ratio"] if share is None else share / (1.0 - share)
        known = np.isfinite(ratio) & np.isfinite(raw["pressure"])
        dew_point = np.full(ratio.shape, np.nan)
        pressure = np.broadcast_to(raw["pressure"], ratio.shape)
        dew_point[known] = dew_point_from_mixing_ratio(pressure[known], np.maximum(ratio[known], 1.0e-7))
        return {"dew_point": np.minimum(dew_point, raw["temperature"] + 0.5)}
    return {"relative_humidity": np.clip(raw["relative_humidity"], 0.0, 1.05)}


def _ground(raw: dict[str, Array]) -> float | None:
    for key, scale in (("surface_altitude", 1.0), ("surface_geopotential", 1.0 / GRAVITY)):
        if key in raw and np.isfinite(raw[key]).any():
            return float(raw[key].ravel()[0]) * scale
    return None


def _above(fields: dict[str, Any], ground: float | None) -> dict[str, Any]:
    """Fields with the levels below the model's ground blanked."""
    if ground is None:
        return fields
    below = np.asarray(fields["height"] < ground - 1.0)
    return {key: np.where(below, np.nan, values) for key, values in fields.items()}
