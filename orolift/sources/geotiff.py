"""Maps as GeoTIFF, of rain and of the lee, with coordinates, units, missing cells and tags."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.fire.words import named
from orolift.sources.units import UNITS

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from numpy.typing import NDArray

    from orolift.sources.elevation_map import ElevationMap
    from orolift.spread.lee_map import LeeMap
    from orolift.spread.lee_spread import LeeSpread
    from orolift.spread.lee_thresholds import LeeThresholds

    Array = NDArray[np.float64]

NODATA = -9999.0
HOUR = 3600.0


@dataclass(frozen=True, eq=False)
class Band:
    """One layer of a map file.

    Attributes
    ----------
    name : str
        What it shows, in words.
    unit : str
        In which it is written.
    values : ndarray, shape (ny, nx)
        In that unit; NaN where missing.
    """

    name: str
    unit: str
    values: Array


def geotiff(bands: Sequence[Band], placed: ElevationMap, tags: Mapping[str, str] | None = None) -> bytes:
    """A GeoTIFF, whole, to be written with `orolift.sources.files.write_all`.

    Parameters
    ----------
    bands : sequence of Band
        On the grid of the map.
    placed : ElevationMap
    tags : mapping of str to str, optional
        Of the file: title, valid time, what made it.

    Returns
    -------
    bytes
        32-bit floats, compressed, in tiles; missing cells are -9999. The same input gives the same bytes.
    """
    from rasterio.io import MemoryFile

    ny, nx = placed.grid.elevation.shape
    profile = {
        "driver": "GTiff",
        "height": ny,
        "width": nx,
        "count": len(bands),
        "dtype": "float32",
        "crs": placed.crs,
        "transform": placed.transform,
        "nodata": NODATA,
        "compress": "deflate",
        "predictor": 3,
        "tiled": True,
        "blockxsize": 256,
        "blockysize": 256,
        "interleave": "band",
    }
    with MemoryFile() as memory:
        with memory.open(**profile) as out:
            out.update_tags(**(tags or {}))
            for number, band in enumerate(bands, start=1):
                out.write(np.where(np.isnan(band.values), NODATA, band.values).astype(np.float32), number)
                out.set_band_description(number, band.name)
                out.set_band_unit(number, band.unit)
        return bytes(memory.read())


def rain_maps(
    placed: ElevationMap, rate: Array, duration: float, snow_share: Array | None, tags: Mapping[str, str]
) -> dict[str, bytes]:
    """The map files of a case: rate, total over the duration, and rain and snow apart.

    Parameters
    ----------
    placed : ElevationMap
    rate : ndarray, shape (ny, nx) [kg m-2 s-1]
    duration : float [s]
    snow_share : ndarray, shape (ny, nx), or None [1]
    tags : mapping of str to str

    Returns
    -------
    dict of str to bytes
        Name of the file without its ending, and the GeoTIFF.
    """
    hours = duration / HOUR
    over = f"{hours:g} hours"
    maps = {
        "rain_rate": [Band("precipitation rate", "mm h-1", rate * HOUR)],
        "rain_total": [Band(f"precipitation over {over}", "mm", rate * duration)],
    }
    if snow_share is not None:
        maps["rain_and_snow"] = [
            Band(f"rain over {over}", "mm", rate * duration * (1.0 - snow_share)),
            Band(f"snow over {over}, as water", "mm", rate * duration * snow_share),
            Band("share of the precipitation that is snow", "1", snow_share),
        ]
    return {name: geotiff(bands, placed, {**tags, "duration_h": f"{hours:g}"}) for name, bands in maps.items()}


def lee_maps(
    placed: ElevationMap, found: LeeMap, tags: Mapping[str, str], spread: LeeSpread | None = None
) -> dict[str, bytes]:
    """The map files of a lee: temperature, warming, humidity, wind, cloud.

    Parameters
    ----------
    placed : ElevationMap
    found : LeeMap
        On the same grid.
    tags : mapping of str to str
    spread : LeeSpread, optional
        Adds 10 and 90 % of the members as bands, and the chance of cloud.

    Returns
    -------
    dict of str to bytes
        Name of the file without its ending, and the GeoTIFF.
    """
    ranged = {
        "temperature": ("air temperature at the ground", "degC", 1.0, -UNITS["c"].offset),
        "warming": ("temperature above the incoming air at the same height", "K", 1.0, 0.0),
        "relative_humidity": ("relative humidity at the ground", "%", 100.0, 0.0),
        "wind_10m": ("wind at 10 m across the range", "m s-1", 1.0, 0.0),
    }
    maps = {}
    for key, (name, unit, factor, offset) in ranged.items():
        bands = [Band(name, unit, factor * getattr(found, key) + offset)]
        if spread is not None:
            for end, values in (("10 %", spread.low[key]), ("90 %", spread.high[key])):
                bands.append(Band(f"{name}, {end} of the members", unit, factor * values + offset))
        maps[f"lee_{key}"] = bands
    maps["lee_cloud"] = [
        Band("base of the lowest cloud above sea level", "m", found.cloud_base),
        Band("water of all cloud over the ground", "kg m-2", found.cloud_water),
    ]
    if spread is not None:
        maps["lee_cloud"].append(Band("chance of cloud over the ground", "1", spread.cloud))
    maps["lee_behind_crest"] = [Band("distance behind the crest along the wind", "m", found.behind_crest)]
    return {name: geotiff(bands, placed, tags) for name, bands in maps.items()}


def threshold_maps(
    placed: ElevationMap, found: LeeThresholds, tags: Mapping[str, str], spread: LeeSpread | None = None
) -> dict[str, bytes]:
    """The map files of thresholds: how many are met in each cell, then each rule by itself; and their chances.

    Parameters
    ----------
    placed : ElevationMap
    found : LeeThresholds
        On the same grid.
    tags : mapping of str to str
    spread : LeeSpread, optional
        With the chance that at least one is met, then of each rule.

    Returns
    -------
    dict of str to bytes
        Name of the file without its ending, and the GeoTIFF; rules that a map cannot judge are named in its tags.
    """
    maps = {
        "lee_thresholds": [
            Band("number of thresholds met", "1", found.count),
            *(Band(f"threshold met: {one.rule.name}", "1", one.met) for one in found.judged),
        ]
    }
    if spread is not None and spread.any_met is not None:
        maps["lee_threshold_chance"] = [
            Band("chance that a threshold is met", "1", spread.any_met),
            *(
                Band(f"chance of the threshold: {one.rule.name}", "1", chance)
                for one, chance in zip(found.judged, spread.met, strict=True)
            ),
        ]
    own = {
        "rules": "; ".join(one.rule.name for one in found.judged),
        "rules_not_judged": "; ".join(
            f"{rule.name} ({', '.join(named(one).words for one in missing)})" for rule, missing in found.unknown
        ),
        "region": found.region,
        "authority": found.authority,
    }
    own = {name: text for name, text in own.items() if text}
    return {name: geotiff(bands, placed, {**tags, **own}) for name, bands in maps.items()}
