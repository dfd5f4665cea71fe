"""Where in a CF grid a column is: nearest point or the four around it, and its values."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.errors import DataFileError

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    Array = NDArray[np.float64]

LARGEST_MAP = 50_000_000
"""Points of two-dimensional coordinates looked at: larger grids cost more memory than a column is worth."""
OFF_GRID = 1.5
"""Grid lengths that a place may lie beyond the outermost points."""


@dataclass(frozen=True)
class Corner:
    """A grid point that a column is taken from: index by dimension, and its share."""

    index: dict[str, int]
    weight: float


def column_corners(
    data: Any, variable: Any, longitude: float | None, latitude: float | None, method: str, name: str
) -> tuple[list[Corner], tuple[float | None, float | None]]:
    """Grid points of a column, and where it is.

    Parameters
    ----------
    data : netCDF4.Dataset
    variable : netCDF4.Variable
        A quantity on levels.
    longitude, latitude : float or None [degrees east, degrees north]
    method : 'nearest' or 'bilinear'
    name : str
        File, for messages.

    Returns
    -------
    corners : list of Corner
    place : (longitude, latitude) or (None, None)

    Raises
    ------
    DataFileError
        If the place is missing though there are several columns, or lies off the grid.
    """
    lon, lat = _coordinate(data, variable, "longitude"), _coordinate(data, variable, "latitude")
    if lon is None or lat is None:
        _refuse_many(data, variable, name)
        return [Corner({}, 1.0)], (longitude, latitude)
    x, y = _whole(lon), _whole(lat)
    if x.size == 1 and y.size == 1 and (longitude is None or latitude is None):
        longitude, latitude = float(x.ravel()[0]), float(y.ravel()[0])
    if longitude is None or latitude is None:
        raise DataFileError(
            f"{name}: holds {max(x.size, y.size, x.size * y.size if x.ndim == 1 else x.size)} columns; give longitude "
            "and latitude in model_at."
        )
    if x.ndim == 2:
        if method == "bilinear":
            raise DataFileError(f'{name}: its longitude and latitude are maps, not axes; use method = "nearest".')
        corners = _nearest_on_map(x, y, lon.dimensions, longitude, latitude, name)
    elif lon.dimensions == lat.dimensions and x.size > 1:
        corners = _nearest_on_map(x[np.newaxis], y[np.newaxis], ("", *lon.dimensions), longitude, latitude, name)
    else:
        shifted = x[0] + np.mod(x - x[0], 360.0) if x.size else x
        wanted = shifted[0] + np.mod(longitude - shifted[0], 360.0)
        around = bool(shifted.size > 2 and shifted[-1] - shifted[0] + (shifted[1] - shifted[0]) >= 359.999)
        if np.any(np.diff(shifted) <= 0.0):  # runs westward, or the file has no order
            shifted, wanted, around = x, _same_turn(longitude, x), False
        across = _shares(shifted, wanted, method, f"{name}: longitude {longitude:g}", around=around)
        up = _shares(y, latitude, method, f"{name}: latitude {latitude:g}", around=False)
        corners = [Corner(_index(lon, i) | _index(lat, j), share * other) for i, share in across for j, other in up]
    return corners, (longitude, latitude)


def _coordinate(data: Any, variable: Any, standard_name: str) -> Any | None:
    """Coordinate of a variable by its standard name or its units; only one that fits its dimensions."""
    units = {"longitude": "degrees_east", "latitude": "degrees_north"}[standard_name]
    for one in data.variables.values():
        named = getattr(one, "standard_name", "") == standard_name or getattr(one, "units", "") == units
        if named and set(one.dimensions) <= set(variable.dimensions):
            return one
    return None


def _refuse_many(data: Any, variable: Any, name: str) -> None:
    """Without coordinates only a file of one column can be used."""
    long = [dimension for dimension in variable.dimensions if len(data.dimensions[dimension]) > 1]
    if len(long) > 2:
        raise DataFileError(
            f"{name}: {variable.name} has the dimensions {', '.join(variable.dimensions)}, but no longitude and "
            "latitude are found by their CF standard_name."
        )


def _whole(coordinate: Any) -> Array:
    if coordinate.size > LARGEST_MAP:
        raise DataFileError(f"{coordinate.name}: {coordinate.size} points are more than {LARGEST_MAP}; cut out a part.")
    return np.asarray(np.ma.filled(np.ma.asarray(coordinate[...]).astype(np.float64), np.nan), dtype=np.float64)


def _same_turn(longitude: float, x: Array) -> float:
    """The longitude in the turn of 360 degrees that the axis uses."""
    middle = float(np.nanmean(x))
    return longitude + 360.0 * float(np.rint((middle - longitude) / 360.0))


def _index(coordinate: Any, i: int) -> dict[str, int]:
    """Index of a point of an axis; a scalar coordinate has none."""
    return {coordinate.dimensions[0]: i} if coordinate.dimensions else {}


def _shares(axis: Array, wanted: float, method: str, what: str, *, around: bool) -> list[tuple[int, float]]:
    """Points of an axis around a value and their shares."""
    axis = np.atleast_1d(axis)
    steps = np.diff(axis)
    if axis.size > 1 and not ((steps > 0.0).all() or (steps < 0.0).all()):
        raise DataFileError(f"{what}: the axis of the file is not in order.")
    length = float(np.abs(steps).min()) if axis.size > 1 else 1.0
    low, high = float(axis.min()), float(axis.max())
    if not around and not low - OFF_GRID * length <= wanted <= high + OFF_GRID * length:
        raise DataFileError(f"{what} lies off the grid, which reaches from {low:g} to {high:g}.")
    if around:
        axis = np.append(axis, axis[0] + 360.0)
    count = axis.size - (1 if around else 0)
    if method == "nearest" or axis.size == 1:
        return [(int(np.argmin(np.abs(axis - wanted))) % count, 1.0)]
    order = np.argsort(axis)
    place = int(np.clip(np.searchsorted(axis[order], wanted, side="right") - 1, 0, axis.size - 2))
    i, j = int(order[place]), int(order[place + 1])
    share = float(np.clip((wanted - axis[i]) / (axis[j] - axis[i]), 0.0, 1.0))
    return [(i % count, 1.0 - share), (j % count, share)]


def _nearest_on_map(
    x: Array, y: Array, dimensions: Sequence[str], longitude: float, latitude: float, name: str
) -> list[Corner]:
    """The grid point of a curvilinear grid that is nearest on the sphere."""
    east, north = np.radians(x), np.radians(y)
    there, up = np.radians(longitude), np.radians(latitude)
    half = np.sin(0.5 * (north - up)) ** 2 + np.cos(north) * np.cos(up) * np.sin(0.5 * (east - there)) ** 2
    if not np.isfinite(half).any():
        raise DataFileError(f"{name}: its longitude and latitude hold no values.")
    j, i = np.unravel_index(int(np.nanargmin(half)), half.shape)
    away = 2.0 * np.degrees(np.arcsin(np.sqrt(min(float(half[j, i]), 1.0))))
    step = np.hypot(np.diff(y, axis=1), np.diff(x, axis=1) * np.cos(up)) if x.shape[1] > 1 else np.array([1.0])
    if away > OFF_GRID * max(float(np.nanmedian(np.abs(step))), 0.01):
        raise DataFileError(
            f"{name}: longitude {longitude:g}, latitude {latitude:g} lies {away:.2f} degrees from the nearest grid "
            "point."
        )
    index = {dimensions[0]: int(j), dimensions[1]: int(i)}
    index.pop("", None)
    return [Corner(index, 1.0)]


def values_at(variable: Any, index: dict[str, int], axis: str) -> Array:
    """Values of a variable along the vertical axis at one grid point, NaN where missing; one value without that axis.

    Parameters
    ----------
    variable : netCDF4.Variable
    index : dict of str to int
        By dimension.
    axis : str
        Vertical dimension.

    Returns
    -------
    ndarray (nz,) or (1,)
    """
    key = tuple(slice(None) if dimension == axis else index.get(dimension, 0) for dimension in variable.dimensions)
    values = np.ma.atleast_1d(np.ma.asarray(variable[key or ...]))
    return np.asarray(np.ma.filled(values.astype(np.float64), np.nan), dtype=np.float64).ravel()


def mixed(parts: Sequence[tuple[float, Array]]) -> Array:
    """Weighted mean of the values at the corners; corners that miss a value are left out of it.

    Examples
    --------
    >>> mixed([(0.25, np.array([1.0, 4.0])), (0.75, np.array([np.nan, 8.0]))])
    array([1., 7.])
    """
    weights = np.array([weight for weight, _ in parts])
    values = np.stack([part for _, part in parts])
    known = np.isfinite(values) & (weights[:, np.newaxis] > 0.0)
    total = np.sum(np.where(known, weights[:, np.newaxis], 0.0), axis=0)
    summed = np.sum(np.where(known, weights[:, np.newaxis] * np.nan_to_num(values), 0.0), axis=0)
    return np.asarray(np.where(total > 0.0, summed / np.where(total > 0.0, total, 1.0), np.nan), dtype=np.float64)
