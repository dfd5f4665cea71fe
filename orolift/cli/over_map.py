"""Rain over the map of a case: worked out where there is a raster, and its files where they are asked for."""

from __future__ import annotations

import logging
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from orolift.errors import CaseError, OroliftError
from orolift.sources.rain_model import keys_of_a_map

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing
    from orolift.sources.inputs import Inputs
    from orolift.sources.map_inputs import MapInputs, Mapped
    from orolift.sources.results import Results

log = logging.getLogger(__name__)


@dataclass(frozen=True)
class RainFiles:
    """Files about rain that the person asked for; None for each that was not.

    Attributes
    ----------
    maps : str or None
        Folder for the GeoTIFF maps.
    catchments, gauges : str or None
        CSV tables.
    geojson : str or None
        The sites as points.
    fit : str or None
        TOML with the fitted values.
    lee_map : str or None
        Folder for GeoTIFF maps of the lee.
    """

    maps: str | None = None
    catchments: str | None = None
    gauges: str | None = None
    geojson: str | None = None
    fit: str | None = None
    lee_map: str | None = None

    def asked(self) -> dict[str, str]:
        """Options given, and their values."""
        values = {
            "--maps": self.maps,
            "--catchments": self.catchments,
            "--gauges": self.gauges,
            "--geojson": self.geojson,
            "--fit": self.fit,
            "--lee-map": self.lee_map,
        }
        return {option: value for option, value in values.items() if value is not None}


def refuse_what_cannot_be(wanted: RainFiles, inputs: Inputs) -> None:
    """Say at once what a case cannot give, before anything is worked out.

    Raises
    ------
    CaseError
        That names the option and what the case lacks.
    """
    case, path = inputs.case, inputs.path
    with_raster = case.terrain.elevation_file is not None
    lacks = {
        "--maps": (with_raster and case.rain.map, "rain over a map: it needs elevation_file, and not map = false"),
        "--catchments": (case.catchments is not None, "[catchments]: name their file there"),
        "--gauges": (case.gauges is not None, "[gauges]: name their file there"),
        "--geojson": (with_raster, "elevation_file: a hand-entered ridge puts no site on the map"),
        "--lee-map": (with_raster, "elevation_file: a hand-entered ridge has no map"),
        "--fit": (case.gauges is not None and case.gauges.fit, "[gauges] with fit = true: nothing is fitted unasked"),
    }
    for option in wanted.asked():
        possible, what = lacks[option]
        if not possible:
            raise CaseError(f"{path}: {option} cannot be written: the case has no {what}.")


def map_inputs_of(inputs: Inputs, *, needed: bool = False) -> tuple[MapInputs | None, tuple[str, ...]]:
    """What rain over the map of a case takes beside the crossing.

    Parameters
    ----------
    inputs : Inputs
    needed : bool
        Whether a file asked for cannot be written without the map.

    Returns
    -------
    MapInputs or None
        None without a raster, where the case leaves the map out, and where none can be made.
    cautions : tuple of str
        Why none can be made.

    Raises
    ------
    OroliftError
        If none can be made and the case or an option needs one.
    """
    case = inputs.case
    if case.terrain.elevation_file is None or not case.rain.map:
        return None, ()
    from orolift.sources.map_inputs import read_map_inputs

    try:
        found = read_map_inputs(inputs)
    except OroliftError as error:
        if needed or _named(inputs):
            raise
        return None, _no_map(inputs, error)
    log.debug("map read, %d x %d cells", *found.placed.grid.elevation.shape)
    return found, ()


def map_of(
    found: MapInputs | None, inputs: Inputs, crossing: Crossing, *, needed: bool = False
) -> tuple[Mapped | None, tuple[str, ...]]:
    """Rain over the map of a case.

    Parameters
    ----------
    found : MapInputs or None
    inputs : Inputs
    crossing : Crossing
    needed : bool
        As in `map_inputs_of`.

    Returns
    -------
    Mapped or None
    cautions : tuple of str
        Why none can be made.

    Raises
    ------
    OroliftError
        As `map_inputs_of`.
    """
    if found is None:
        return None, ()
    from orolift.rain.over_map import map_rain
    from orolift.sources.map_inputs import Mapped

    try:
        rain = map_rain(
            crossing,
            found.placed.grid,
            found.line,
            north=found.placed.north,
            duration=found.duration,
            catchments=found.catchments,
            divide=found.divide,
            gauges=found.gauges,
            fit=found.fit,
        )
    except OroliftError as error:
        if needed or _named(inputs):
            error.args = (f"{inputs.path}: {error}",)
            raise
        return None, _no_map(inputs, error)
    log.debug("rain over the map worked out")
    return Mapped(found, rain), ()


def _named(inputs: Inputs) -> bool:
    """Whether the case has keys that mean nothing without a map."""
    case = inputs.case
    return bool(keys_of_a_map(case.rain, case.catchments, case.gauges))


def _no_map(inputs: Inputs, error: OroliftError) -> tuple[str, ...]:
    reason = str(error).removeprefix(f"{inputs.path}: ")
    return (f"No map of rain could be made: {reason}",)


def map_findings(inputs: Inputs) -> list[str]:
    """What was read for rain over the map, and what is doubtful about it, a line each.

    Raises
    ------
    OroliftError
        If a file named for it is at fault.
    """
    found, doubts = map_inputs_of(inputs)
    if found is None:
        return [f"Doubtful: {text}" for text in doubts]
    ny, nx = found.placed.grid.elevation.shape
    named = [one.name for one in found.catchments]
    lines = [f"Map of rain: {ny} x {nx} cells, {found.placed.transform.a:.0f} m each."]
    lines += [f"Catchments: {', '.join(named)}."] if named else []
    if found.gauges is not None:
        lines += [f"Gauges: {', '.join(found.gauges.name)}."]
        lines += [f"Assumed: {text}" for text in found.gauges.notes]
    lines += [f"Doubtful: {text}" for text in _off_the_map(found)]
    return lines + [f"Assumed: {text}" for text in found.notes]


def _off_the_map(found: MapInputs) -> list[str]:
    """Gauges and catchments that the report leaves out, wholly or in part, as it will say it."""
    import numpy as np

    from orolift.rain.catchments import catchment_rain
    from orolift.rain.gauges import rain_at

    grid, gauges = found.placed.grid, found.gauges
    nothing = np.where(np.isfinite(grid.elevation), 0.0, np.nan)  # where the map will have values
    out = []
    if gauges is not None:
        known = np.isfinite(rain_at(grid, nothing, gauges.x, gauges.y))
        off = [name for name, on_map in zip(gauges.name, known, strict=True) if not on_map]
        out += [f"Gauges not on the map and left out: {', '.join(off)}."] if off else []
    for one in found.catchments:
        notes = catchment_rain(one.polygon, grid, nothing, found.duration).notes
        out += [f"Catchment {one.name}: {note}" for note in notes]
    return out


def rain_files(
    wanted: RainFiles, inputs: Inputs, mapped: Mapped | None, results: Results
) -> dict[Path, tuple[bytes, str]]:
    """The files about rain that were asked for, each with the option that asked.

    Parameters
    ----------
    wanted : RainFiles
        Of which the case can give each.
    inputs : Inputs
    mapped : Mapped or None
    results : Results

    Returns
    -------
    dict of Path to (bytes, str)

    Raises
    ------
    CaseError
        If two options name one file.
    """
    found: list[tuple[str, Path, bytes]] = []
    if wanted.geojson is not None:
        from orolift.sources.sites_geojson import sites_geojson

        found.append(("--geojson", Path(wanted.geojson), sites_geojson(inputs, results).encode()))
    if mapped is not None:
        if wanted.maps is not None:
            found += [("--maps", path, content) for path, content in _maps(Path(wanted.maps), inputs, mapped).items()]
        found += _tables(wanted, mapped)
    out: dict[Path, tuple[bytes, str]] = {}
    for option, path, content in found:
        if path in out:
            raise CaseError(f"{option}: {path} is already what {out[path][1]} writes. Give another name.")
        out[path] = content, option
    return out


def _maps(folder: Path, inputs: Inputs, mapped: Mapped) -> dict[Path, bytes]:
    from orolift import __version__
    from orolift.sources.geotiff import rain_maps

    rain, case = mapped.rain, inputs.case
    tags = {"title": case.title or inputs.path.stem, "software": f"orolift {__version__}"}
    if case.valid_time is not None:
        tags["valid_time"] = case.valid_time.isoformat()
    maps = rain_maps(mapped.inputs.placed, rain.found.rate, rain.duration, rain.snow_share, tags)
    return {folder / f"{inputs.path.stem}_{name}.tif": content for name, content in maps.items()}


def _tables(wanted: RainFiles, mapped: Mapped) -> list[tuple[str, Path, bytes]]:
    from orolift.sources.gauges_csv import fitted_rain_toml
    from orolift.sources.rain_ranges import catchment_ranges, gauge_ranges
    from orolift.sources.rain_tables import catchments_csv, gauges_csv

    rain = mapped.rain
    out: list[tuple[str, Path, bytes]] = []
    if wanted.catchments is not None:
        rows = [(one.catchment.name, one.rain) for one in rain.catchments]
        ranges = [catchment_ranges(mapped, i) for i in range(len(rows))]
        out.append(("--catchments", Path(wanted.catchments), catchments_csv(rows, ranges).encode()))
    if wanted.gauges is not None and rain.gauges is not None and rain.comparison is not None:
        table = gauges_csv(rain.gauges, rain.comparison, gauge_ranges(mapped))
        out.append(("--gauges", Path(wanted.gauges), table.encode()))
    if wanted.fit is not None and rain.fit is not None:
        out.append(("--fit", Path(wanted.fit), fitted_rain_toml(rain.fit).encode()))
    return out
