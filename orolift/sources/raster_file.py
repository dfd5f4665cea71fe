"""Elevation rasters as files: opened with care, read in small windows at the resolution asked for."""

from __future__ import annotations

import os
import re
import warnings
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal
from xml.etree import ElementTree as ET

import numpy as np

from orolift.errors import DataFileError
from orolift.sources.files import TEXT_LIMIT, existing_file
from orolift.terrain.grid import bilinear
from orolift.terrain.transect import HIGHEST_GROUND

if TYPE_CHECKING:
    from collections.abc import Iterator

    from numpy.typing import NDArray

FEET = 0.3048
LONGITUDE_LATITUDE = "EPSG:4326"
CACHE_MB = 64  # GDAL keeps decoded blocks up to this; its default is a share of the machine's memory
OVERVIEW_CELLS = 2048  # longest side at which a whole raster is looked at when it has overviews
WINDOW_CELLS = 8_000_000  # cells read at once when it has none
CHUNK = 32  # points along a line read with one window, so that a slanting line does not read its whole bounding box
ONE_WINDOW = 1_000_000  # cells; a bounding box with fewer is read at once
_NO_GROUND = -12_000.0  # [m] below the deepest trench: a "missing" value nobody declared
_MISSING, _DEEP = -9999.0, -8000.0  # [m] the first is missing ground, unless the sea beside it is as deep as the second
_ADDRESS = re.compile(r"(?<![\w.-])/vsi\w+|\b[a-z][a-z0-9+.-]+://", re.IGNORECASE)
_UNIT_WORDS = {
    "": 1.0,
    **dict.fromkeys(("m", "metre", "metres", "meter", "meters"), 1.0),
    **dict.fromkeys(("ft", "foot", "feet", "us survey foot", "us-ft", "ftus", "foot_us"), FEET),
}


@dataclass(frozen=True)
class RasterFile:
    """An open elevation raster, for one thread.

    Attributes
    ----------
    dataset : rasterio dataset
    name : str
        Key and file, the start of every message.
    metres : float
        What one unit of its heights is in metres.
    notes : dict of str
        What was assumed while reading, each said once; filled as windows are read.
    """

    dataset: Any
    name: str
    metres: float
    notes: dict[str, None] = field(default_factory=dict)


@contextmanager
def opened_raster(
    path: str | Path, unit: Literal["m", "ft"] | None, where: str, folder: Path | None = None
) -> Iterator[RasterFile]:
    """Open a local raster that holds elevation.

    Parameters
    ----------
    path : str or Path
    unit : {"m", "ft"} or None
        Unit of its heights; None for the unit the raster declares, else metres.
    where : str
        Key or option the path came from, for messages.
    folder : Path, optional
        Folder that a relative path starts from.

    Yields
    ------
    RasterFile

    Raises
    ------
    MissingFileError, DataFileError
        If it is not there, not local, or not a georeferenced elevation raster.
    """
    full = existing_file(path, where, folder)
    name = f"{where}: {full}"
    _refuse_hidden_addresses(full, name)
    # A PROJ database of another program breaks every EPSG code in rasterio's own PROJ.
    os.environ.pop("PROJ_DATA", None)
    os.environ.pop("PROJ_LIB", None)
    import rasterio
    from rasterio.errors import NotGeoreferencedWarning, RasterioIOError

    with rasterio.Env(GDAL_CACHEMAX=CACHE_MB, GDAL_NUM_THREADS="ALL_CPUS"):
        try:
            with warnings.catch_warnings():
                warnings.simplefilter("ignore", NotGeoreferencedWarning)  # refused below, in our words
                dataset = rasterio.open(full)
        except RasterioIOError as error:
            raise DataFileError(
                f"{name} is not a raster that GDAL can read. Export the elevation as GeoTIFF."
            ) from error
        with dataset:
            _refuse_unfit(dataset, name)
            notes: dict[str, None] = {}
            metres = _metres_per_unit(dataset, unit, name, notes)
            try:
                yield RasterFile(dataset, name, metres, notes)
            except RasterioIOError as error:
                raise DataFileError(f"{name} cannot be read to its end: it is damaged or cut short.") from error


def _refuse_hidden_addresses(path: Path, name: str) -> None:
    """Refuse text rasters (VRT and its relatives) that lead to a network, also through files they name."""
    seen: set[Path] = set()
    waiting = [path]
    while waiting:
        file = waiting.pop()
        if file in seen or not _is_file(file):
            continue
        seen.add(file)
        text = _description(file)
        found = _ADDRESS.search(text)
        if found:
            raise DataFileError(
                f"{name} leads to an address ({text[found.start() : found.start() + 60].split()[0]}), and orolift "
                "reads local files only. Save what it points to beside the case first."
            )
        words = text.split("\n")
        waiting += [file.parent / word for word in words] + [Path(word) for word in words]


def _is_file(path: Path) -> bool:
    """Whether a text names a file; sentences that are no path at all are none."""
    try:
        return path.is_file()
    except (OSError, ValueError):
        return False


def _description(file: Path) -> str:
    """Every text in an XML or JSON file that describes a raster, one a line; empty for other files."""
    with file.open("rb") as stream:
        if not stream.read(64).lstrip(b"\xef\xbb\xbf \t\r\n").startswith((b"<", b"{")):
            return ""
        stream.seek(0)
        raw = stream.read(TEXT_LIMIT)
    plain = raw.decode("latin-1")
    if "<" not in plain[:64]:
        return plain
    try:
        root = ET.fromstring(raw)  # noqa: S314 (entities are not fetched; expat limits their growth)
    except ET.ParseError as error:
        raise DataFileError(f"{file} is damaged: it starts like XML but is none ({error}).") from error
    texts = [text.strip() for node in root.iter() for text in (node.text or "", node.tail or "", *node.attrib.values())]
    return "\n".join(texts)


def _refuse_unfit(dataset: Any, name: str) -> None:
    """Refuse what GDAL opens but is no georeferenced elevation."""
    if any(_ADDRESS.search(str(file)) for file in dataset.files):
        raise DataFileError(f"{name} leads to an address, and orolift reads local files only.")
    if dataset.count == 0:
        raise DataFileError(f"{name} holds several rasters. Take one out, for example: gdal_translate NAME out.tif")
    if dataset.count >= 3 and dataset.dtypes[0] == "uint8":
        raise DataFileError(f"{name} is a picture ({dataset.count} bands of 8 bits), not elevation.")
    if dataset.crs is None:
        raise DataFileError(
            f"{name} has no coordinate system, so its place on Earth is unknown. If you know it, add it, for example: "
            "gdal_translate -a_srs EPSG:32632 in.tif out.tif"
        )
    if dataset.transform.is_identity or dataset.transform.is_degenerate:
        raise DataFileError(
            f"{name} has no position (no geotransform). If it carries control points, warp it first: "
            "gdalwarp in.tif out.tif"
        )


def _metres_per_unit(dataset: Any, unit: str | None, name: str, notes: dict[str, None]) -> float:
    """Metres per unit of the heights: the user's word, else the raster's, else metres."""
    word = (dataset.units[0] or "").strip().lower()
    declared = _UNIT_WORDS.get(word)
    if unit is not None:
        metres = FEET if unit == "ft" else 1.0
        if word and metres != declared:
            notes[f"The raster declares its heights in '{word}', but elevation_unit = \"{unit}\" was used."] = None
        return metres
    if declared is None:
        raise DataFileError(
            f"{name} declares its heights in '{word}', which is neither metres nor feet. Set elevation_unit, or "
            "convert it first, for example with gdal_calc."
        )
    if declared != 1.0:
        notes["The raster declares its heights in feet; converted to metres."] = None
    return declared


def map_positions(raster: RasterFile, x: Any, y: Any, source: Any, target: Any) -> tuple[Any, Any]:
    """Coordinates `x`, `y` of the system `source` in the system `target`, arrays of any shape."""
    from rasterio.warp import transform

    x, y = np.broadcast_arrays(np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64))
    try:
        found = transform(source, target, x.ravel(), y.ravel())
    except Exception as error:
        raise DataFileError(
            f"{raster.name}: its coordinate system cannot be brought together with longitude and latitude ({error}). "
            "Warp it first, for example: gdalwarp -t_srs EPSG:4326 in.tif out.tif"
        ) from error
    return np.asarray(found[0]).reshape(x.shape), np.asarray(found[1]).reshape(x.shape)


def cell_positions(raster: RasterFile, x: NDArray[np.float64], y: NDArray[np.float64]) -> tuple[Any, Any]:
    """Fractional row and column of points given in the raster's CRS; whole numbers are cell centres."""
    dataset = raster.dataset
    if dataset.crs.is_geographic:
        middle = (dataset.bounds.left + dataset.bounds.right) / 2.0
        x = middle + (x - middle + 180.0) % 360.0 - 180.0
    t = ~dataset.transform
    return t.d * x + t.e * y + t.f - 0.5, t.a * x + t.b * y + t.c - 0.5


def map_coordinates(raster: RasterFile, row: Any, column: Any) -> tuple[Any, Any]:
    """Coordinates in the raster's CRS of fractional rows and columns: the way back of `cell_positions`."""
    t = raster.dataset.transform
    row, column = np.asarray(row) + 0.5, np.asarray(column) + 0.5
    return t.a * column + t.b * row + t.c, t.d * column + t.e * row + t.f


def sampled(raster: RasterFile, row: Any, column: Any, step: int) -> NDArray[np.float64]:
    """Ground at fractional rows and columns, from means of `step` x `step` cells.

    Reads only windows round the points, `CHUNK` points of the last axis at a
    time unless all of them lie close together, with the overviews of the file
    if it has them. NaN where there are no data.

    Parameters
    ----------
    raster : RasterFile
    row, column : ndarray, shape (..., ns) [1]
    step : int
        1 for the cells themselves.

    Returns
    -------
    ndarray, shape (..., ns) [m]
    """
    ground = np.full(row.shape, np.nan)
    r0, r1 = _window_limits(row, step, raster.dataset.height)
    c0, c1 = _window_limits(column, step, raster.dataset.width)
    chunk = row.shape[-1] if (r1 - r0) * (c1 - c0) <= ONE_WINDOW else CHUNK
    for start in range(0, row.shape[-1], chunk):
        part = (..., slice(start, start + chunk))
        r0, r1 = _window_limits(row[part], step, raster.dataset.height)
        c0, c1 = _window_limits(column[part], step, raster.dataset.width)
        if r1 <= r0 or c1 <= c0:
            continue
        cells = window_ground(raster, (r0, r1), (c0, c1), step)
        scale_r, scale_c = (r1 - r0) / cells.shape[0], (c1 - c0) / cells.shape[1]
        ground[part] = bilinear(
            cells, (row[part] + 0.5 - r0) / scale_r - 0.5, (column[part] + 0.5 - c0) / scale_c - 0.5
        )
    return ground


def _window_limits(position: NDArray[np.float64], step: int, size: int) -> tuple[int, int]:
    """First and one past last cell to read for points, on multiples of `step`, cut to the raster."""
    finite = position[np.isfinite(position)]
    if finite.size == 0:
        return 0, 0
    first = (int(np.floor(finite.min())) // step - 1) * step
    last = (int(np.floor(finite.max())) // step + 2) * step
    return max(first, 0), min(last, size)


def window_ground(
    raster: RasterFile, rows: tuple[int, int], columns: tuple[int, int], step: int
) -> NDArray[np.float64]:
    """Ground of a window of cells in metres, missing as NaN, sea as 0; means of `step` x `step` cells.

    Parameters
    ----------
    raster : RasterFile
    rows, columns : (int, int)
        First and one past last.
    step : int
        1 for the cells themselves.

    Returns
    -------
    ndarray, shape of the window over `step`, rounded up [m]
    """
    values: NDArray[np.float64] = _raw_cells(raster, rows, columns, step).astype(np.float64).filled(np.nan)
    return _ground(raster, values)


def _raw_cells(raster: RasterFile, rows: tuple[int, int], columns: tuple[int, int], step: int) -> Any:
    """Cells of a window as the file holds them, missing ones masked; means of `step` x `step` cells."""
    from rasterio.enums import Resampling
    from rasterio.windows import Window

    shape = (-(-(rows[1] - rows[0]) // step), -(-(columns[1] - columns[0]) // step))
    return raster.dataset.read(
        1,
        window=Window.from_slices(rows, columns),
        out_shape=shape,
        resampling=Resampling.average if step > 1 else Resampling.nearest,
        masked=True,
    )


def _ground(raster: RasterFile, values: NDArray[np.float64]) -> NDArray[np.float64]:
    """Ground in metres from raw values: refuses what cannot be ground, takes depths of the sea as 0."""
    scale, offset = float(raster.dataset.scales[0]), float(raster.dataset.offsets[0])
    ground = (values * scale + offset) * raster.metres
    ground[np.isinf(ground)] = np.nan
    known = ground[~np.isnan(ground)]
    highest, lowest = known.max(initial=0.0), known.min(initial=0.0)
    stands_alone = bool((known == _MISSING).any()) and not bool(((known < _DEEP) & (known != _MISSING)).any())
    if lowest < _NO_GROUND or highest > 10 * HIGHEST_GROUND or stands_alone:
        found = lowest if lowest < _NO_GROUND or stands_alone else highest
        raise DataFileError(
            f"{raster.name} holds {found:g} m, which stands for missing cells but is not declared. Declare it, for "
            f"example: gdal_edit.py -a_nodata {found:g} FILE"
        )
    if highest > HIGHEST_GROUND:
        advice = (
            'If its heights are in feet, set elevation_unit = "ft".'
            if raster.metres == 1.0
            else "Is it elevation, and is its unit right?"
        )
        raise DataFileError(
            f"{raster.name} reaches {highest:.0f} m, above the highest summit on Earth ({HIGHEST_GROUND:.0f} m "
            f"allowed). {advice}"
        )
    if lowest < 0.0:
        raster.notes["Cells below sea level (sea depths) were taken as 0 m; so is dry land below sea level."] = None
        ground[ground < 0.0] = 0.0
    return ground


def highest_cell(raster: RasterFile) -> tuple[float, float]:
    """Fractional row and column of the highest cell.

    A raster with overviews and more than `OVERVIEW_CELLS` cells a side is
    looked at in means of several cells, and the middle of the highest mean is
    given; any other is read whole, in parts.
    """
    dataset = raster.dataset
    longest = max(dataset.height, dataset.width)
    step = -(-longest // OVERVIEW_CELLS) if dataset.overviews(1) else 1
    best = (-np.inf, 0.0, 0.0)
    for rows, columns in _whole_blocks(dataset, step):
        cells = np.ma.masked_invalid(_raw_cells(raster, rows, columns, step), copy=False)
        highest = cells.max()
        if highest is not np.ma.masked and highest > best[0]:
            row, column = np.unravel_index(int(cells.argmax()), cells.shape)
            scale_r, scale_c = (rows[1] - rows[0]) / cells.shape[0], (columns[1] - columns[0]) / cells.shape[1]
            best = (
                float(highest),
                float(rows[0] + (row + 0.5) * scale_r - 0.5),
                float(columns[0] + (column + 0.5) * scale_c - 0.5),
            )
    if not np.isfinite(best[0]):
        raise DataFileError(f"{raster.name} holds no elevation: every cell is missing.")
    _ground(raster, np.array([best[0]]))
    return best[1], best[2]


def _whole_blocks(dataset: Any, step: int) -> Iterator[tuple[tuple[int, int], tuple[int, int]]]:
    """Rows and columns of windows that cover a raster and cut none of its blocks, which would be decoded twice."""
    height, width = dataset.block_shapes[0]
    if step > 1:  # blocks of an overview cover more; they are few
        height, width = dataset.height, dataset.width
    across = width * max(1, WINDOW_CELLS // (width * height))
    down = height * max(1, WINDOW_CELLS // (min(across, dataset.width) * height))
    for top in range(0, dataset.height, down):
        for left in range(0, dataset.width, across):
            yield (top, min(top + down, dataset.height)), (left, min(left + across, dataset.width))
