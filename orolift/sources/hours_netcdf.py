"""Hours worked out as NetCDF with CF names (extra `netcdf`)."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import MissingExtraError
from orolift.sources.hours_results import QUANTITIES, RANGED_KEYS, chances_of, columns_of, notes_of

if TYPE_CHECKING:
    from typing import Any

    from orolift.sources.hours_case import HourSetup
    from orolift.spread.timeline import Hours

EPOCH = "seconds since 1970-01-01 00:00:00"
FILL = 9.96921e36
"""Value of what is missing: the usual one of NetCDF for floats."""
CHANCES = {
    "crosses": "share of the members that cross",
    "rain": "share of the members that cross with 0.1 mm/h or more at the site",
    "in_pool": "share of the members that cross with the site in a cold pool",
    "descending_warm_dry": "share of the members with descending warm dry air",
}
STATUS = ("crossing", "no crossing", "missing")


def refuse_without_netcdf(where: str) -> None:
    """Refuse where the extra is not installed, before anything is worked out.

    Raises
    ------
    MissingExtraError
    """
    try:
        import netCDF4  # noqa: F401 (only whether it is there)
    except ImportError as error:
        raise MissingExtraError(
            f"{where} needs netCDF4. Install the extra 'netcdf': pip install 'orolift[netcdf]'."
        ) from error


def hours_netcdf(hours: Hours, setup: HourSetup, version: str) -> bytes:
    """NetCDF of hours worked out.

    Parameters
    ----------
    hours : Hours
    setup : HourSetup
    version : str
        Of orolift.

    Returns
    -------
    bytes
        Of the whole file: dimensions ``time`` (upwind) and ``site``, numbers of CF 1.11.

    Raises
    ------
    MissingExtraError
        If netCDF4 is not installed.
    """
    refuse_without_netcdf("--netcdf")
    import netCDF4

    data = netCDF4.Dataset("hours.nc", "w", format="NETCDF4", memory=1 << 16)
    data.setncatts(
        {
            "Conventions": "CF-1.11",
            "featureType": "timeSeries",
            "title": setup.inputs.case.title or setup.inputs.path.stem,
            "source": f"orolift {version}",
            "comment": " ".join(notes_of(hours, setup)),
        }
    )
    data.createDimension("time", hours.time.size)
    data.createDimension("site", len(hours.sites))
    time = data.createVariable("time", "f8", ("time",))
    time.setncatts({"standard_name": "time", "units": EPOCH, "calendar": "standard", "axis": "T"})
    time.long_name = "time at which the incoming air was observed, upwind"
    time[:] = hours.time
    name = data.createVariable("site_name", str, ("site",))
    name.setncatts({"cf_role": "timeseries_id", "long_name": "name of the site"})
    name[:] = np.array([site.name for site in hours.sites], dtype=object)
    _numbers(data, hours)
    _flags(data, hours)
    _ranges(data, hours)
    if hours.catchments:
        data.createDimension("catchment", len(hours.catchments))
        label = data.createVariable("catchment_name", str, ("catchment",))
        label[:] = np.array([one.name for one in hours.catchments], dtype=object)
        rain = _variable(data, "catchment_rain_mm_per_h", ("time", "catchment"), "mm h-1", "mean rain on the catchment")
        rain[:] = _filled(np.column_stack([3600.0 * one.rate for one in hours.catchments]))
    return bytes(data.close())


def _variable(data: Any, key: str, dimensions: tuple[str, str], unit: str, words: str) -> Any:
    made = data.createVariable(key, "f8", dimensions, fill_value=FILL, zlib=True)
    made.setncatts({"units": unit, "long_name": words})
    if dimensions[1] == "site":
        made.coordinates = "site_name arrival_time"
    return made


def _filled(values: Any) -> Any:
    return np.where(np.isfinite(values), values, FILL)


def _numbers(data: Any, hours: Hours) -> None:
    shape = ("time", "site")
    arrival = _variable(data, "arrival_time", shape, EPOCH, "time at which the air is at the site")
    arrival.setncatts({"standard_name": "time", "calendar": "standard"})
    arrival[:] = _filled(
        np.column_stack([np.where(np.isfinite(one.arrival_error), one.arrival, np.nan) for one in hours.sites])
    )
    error = _variable(data, "arrival_error", shape, "s", "standard deviation of the time of arrival")
    error[:] = _filled(np.column_stack([one.arrival_error for one in hours.sites]))
    columns = [columns_of(site) for site in hours.sites]
    for one in QUANTITIES:
        made = _variable(data, one.key, shape, one.unit, one.words)
        if one.standard_name:
            made.standard_name = one.standard_name
        made[:] = _filled(np.column_stack([column[one.key] for column in columns]))
    code = _variable(data, "fine_fuel_code", shape, "1", "hourly Fine Fuel Moisture Code")
    code[:] = _filled(np.column_stack([column["fine_fuel_code"] for column in columns]))


def _ranges(data: Any, hours: Hours) -> None:
    """Ends of the ranges and chances of the members; nothing where no site has any."""
    if all(site.ranges is None for site in hours.sites):
        return
    shape = ("time", "site")
    nothing = np.full((hours.time.size, 2), np.nan)

    def ends(key: str, unit: str, words: str, each: list[Any]) -> None:
        for i, (end, share) in enumerate((("low", "10"), ("high", "90"))):
            made = _variable(data, f"{key}_{end}", shape, unit, f"{words}: {share} % of the members")
            made[:] = _filled(np.column_stack([values[:, i] for values in each]))

    for one, name in RANGED_KEYS:
        for part, words in (("full", ""), ("inputs", ", by the inputs alone")):
            each = [
                nothing if site.ranges is None else getattr(site.ranges, part)[name] * one.factor + one.offset
                for site in hours.sites
            ]
            ends(one.key if part == "full" else f"{one.key}_inputs", one.unit, f"{one.words}{words}", each)
        data[one.key].ancillary_variables = f"{one.key}_low {one.key}_high"
    codes = [nothing if site.ranges is None else site.ranges.fine_fuel_code for site in hours.sites]
    ends("fine_fuel_code", "1", "hourly Fine Fuel Moisture Code", codes)
    for key, words in CHANCES.items():
        made = _variable(data, f"chance_{key}", shape, "1", words)
        made[:] = _filled(
            np.column_stack(
                [nothing[:, 0] if site.ranges is None else chances_of(site.ranges)[key] for site in hours.sites]
            )
        )


def _flags(data: Any, hours: Hours) -> None:
    """What is no number, as whole numbers with their meanings."""
    status = data.createVariable("status", "i1", ("time", "site"))
    status.setncatts(
        {
            "long_name": "whether the air crosses",
            "flag_values": np.arange(3, dtype=np.int8),
            "flag_meanings": "crossing no_crossing missing",
        }
    )
    status[:] = np.array([[STATUS.index(state.status) for state in site.states] for site in hours.sites]).T
    dry = data.createVariable("descending_warm_dry", "i1", ("time", "site"), fill_value=np.int8(-1))
    dry.setncatts(
        {
            "long_name": "descending warm dry air",
            "flag_values": np.arange(2, dtype=np.int8),
            "flag_meanings": "false true",
        }
    )
    dry[:] = np.array(
        [[-1 if state.descending is None else int(state.descending) for state in site.states] for site in hours.sites]
    ).T
