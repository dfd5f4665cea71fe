"""A sounding file to a column: read in any form, made whole, completed upward."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column_build import air_from_levels
from orolift.air.humidity import mixing_ratio_from_dew_point_checked, mixing_ratio_from_relative_humidity
from orolift.errors import CaseError
from orolift.sources.sounding import LEAST_HUMIDITY, Sounding, sounding_from_levels

if TYPE_CHECKING:
    from datetime import datetime
    from pathlib import Path

    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir


def read_any_sounding(
    path: str,
    where: str,
    folder: Path | None,
    *,
    elevation: float | None = None,
    station: str | None = None,
    near: datetime | None = None,
) -> Sounding:
    """Sounding of a file in any of the forms that are read, made whole.

    Parameters
    ----------
    path, where, folder
        As in `orolift.sources.files.existing_file`.
    elevation : float or None [m above sea level]
        Of the ground; it goes before what the file says.
    station : str or None
        Where the file holds several soundings.
    near : datetime or None
        With a time zone: when the sounding was, roughly.

    Returns
    -------
    Sounding

    Raises
    ------
    OroliftError
        If it cannot be read or used.
    """
    from orolift.sources.sounding_file import read_sounding_levels

    levels = read_sounding_levels(path, where, folder, station=station, near=near)
    return sounding_from_levels(levels, elevation=elevation)


def air_from_sounding(sounding: Sounding, where: str) -> IncomingAir:
    """Column of a sounding.

    Parameters
    ----------
    sounding : Sounding
    where : str
        Key, for messages.

    Returns
    -------
    IncomingAir

    Raises
    ------
    CaseError
        If nothing says how high its ground is.
    """
    if sounding.height is None and sounding.ground is None:
        raise CaseError(
            f"{where}: the file gives no height of its lowest level. "
            "Add a column height_m, or give sounding_elevation_m, the height of its ground."
        )
    vapour, notes = _vapour(sounding)
    air = air_from_levels(
        sounding.height,
        sounding.pressure,
        sounding.temperature,
        vapour,
        sounding.eastward_wind,
        sounding.northward_wind,
        elevation=sounding.ground if sounding.height is None else None,
    )
    return replace(air, notes=(*sounding.notes, *notes, *air.notes))


def _vapour(sounding: Sounding) -> tuple[NDArray[np.float64], tuple[str, ...]]:
    if sounding.dew_point is not None:
        return mixing_ratio_from_dew_point_checked(sounding.pressure, sounding.temperature, sounding.dew_point)
    humidity = np.maximum(np.asarray(sounding.relative_humidity), LEAST_HUMIDITY)
    notes: tuple[str, ...] = ()
    if (np.asarray(sounding.relative_humidity) < LEAST_HUMIDITY).any():
        notes = (f"Relative humidity below {LEAST_HUMIDITY:.0%} is taken as that, the least a sensor resolves.",)
    return mixing_ratio_from_relative_humidity(sounding.pressure, sounding.temperature, humidity), notes
