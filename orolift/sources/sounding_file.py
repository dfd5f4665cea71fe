"""A sounding file in whatever form it comes: BUFR, TEMP text or CSV, told apart by its content."""

from __future__ import annotations

from typing import TYPE_CHECKING

from orolift.errors import DataFileError, MissingFileError
from orolift.sources.files import existing_file, read_text

if TYPE_CHECKING:
    from datetime import datetime
    from pathlib import Path

    from orolift.sources.reported_levels import ReportedLevels

NETCDF = (b"CDF\x01", b"CDF\x02", b"CDF\x05", b"\x89HDF")
"""First bytes of NetCDF in its classic forms and in HDF5 (NetCDF users' guide, appendix on formats)."""


def read_sounding_levels(
    path: str | Path,
    where: str = "sounding_file",
    folder: Path | None = None,
    *,
    station: str | None = None,
    near: datetime | None = None,
) -> ReportedLevels:
    """Levels of a sounding file as they stand.

    Parameters
    ----------
    path, where, folder
        As in `orolift.sources.files.existing_file`.
    station : str or None
        Station number or call sign, where the file may hold several soundings.
    near : datetime or None
        With a time zone; of several soundings the nearest is taken, and the
        month of a TEMP report is found by it.

    Returns
    -------
    ReportedLevels

    Raises
    ------
    DataFileError
        If it is none of the forms, or cannot be used.
    MissingFileError
        If it cannot be read.
    MissingExtraError
        If it is BUFR and pdbufr is not installed.
    """
    full = existing_file(path, where, folder)
    try:
        with full.open("rb") as stream:
            head = stream.read(512)
    except OSError as error:
        raise MissingFileError(f"{where}: {full} cannot be read ({error.strerror}).") from error
    if head.startswith(NETCDF):
        raise DataFileError(f"{where}: {full} is NetCDF. Give it as model_file.")
    from orolift.sources.bufr import is_bufr, read_bufr_sounding

    if is_bufr(head):
        return read_bufr_sounding(path, where, folder, station=station, near=near)
    text = read_text(path, where, folder)
    from orolift.sources.temp_fm35 import holds_temp_report, levels_from_temp

    if holds_temp_report(text[:100_000]):
        return levels_from_temp(text, str(path), station=station, near=near)
    from orolift.sources.sounding_csv import levels_from_text

    return levels_from_text(text, str(path))
