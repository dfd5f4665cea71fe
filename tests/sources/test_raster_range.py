"""Range normal and crest line read off rasters whose range is known."""

import math

import numpy as np
import pytest
import rasterio
from rasterio.transform import from_origin
from rasterio.warp import transform

from orolift.sources.raster_range import range_of_raster

CRS = "EPSG:32632"
CELL = 500.0


def ridge_raster(path, bearing, pass_depth=0.0):
    """A straight ridge, 2000 m high, whose normal has a bearing from grid north, with one pass 20 km along it."""
    side = np.arange(-125e3, 125e3, CELL) + CELL / 2.0
    east, north = np.meshgrid(side, side[::-1])
    across = east * math.sin(bearing) + north * math.cos(bearing)
    along = east * math.cos(bearing) - north * math.sin(bearing)
    saddle = 1.0 - pass_depth * np.exp(-(((along - 20e3) / 4e3) ** 2))
    ground = (100.0 + 1900.0 * np.exp(-((across / 9e3) ** 2)) * saddle).astype("float32")
    with rasterio.open(
        path, "w", driver="GTiff", width=side.size, height=side.size, count=1, dtype="float32", crs=CRS,
        transform=from_origin(500e3 - 125e3, 5.0e6 + 125e3, CELL, CELL),
    ) as out:  # fmt: skip
        out.write(ground, 1)
    longitude, latitude = transform(CRS, "EPSG:4326", [500e3], [5.0e6])
    return longitude[0], latitude[0]


@pytest.mark.parametrize("degrees", [0.0, 37.0, 90.0, 250.0])
def test_normal_of_a_straight_ridge(tmp_path, degrees):
    """On the central meridian grid north is north: the normal comes back within 1.5 degrees, downwind side."""
    bearing = math.radians(degrees)
    place = ridge_raster(tmp_path / "r.tif", bearing)
    found, line = range_of_raster(tmp_path / "r.tif", *place, bearing + 0.5)
    assert math.cos(found.bearing - bearing) > math.cos(math.radians(1.5))
    assert found.coherence > 0.95
    np.testing.assert_allclose(line.elevation[np.abs(line.distance) < 60e3], 2000.0, atol=5.0)


def test_a_pass_shows_in_the_crest_line(tmp_path):
    """A pass to 60 % of the height, 20 km to the right of the wind, is where it is and as deep as it is."""
    place = ridge_raster(tmp_path / "r.tif", math.radians(55.0), pass_depth=0.4)
    _, line = range_of_raster(tmp_path / "r.tif", *place, math.radians(55.0), normal=math.radians(55.0))
    lowest = int(np.argmin(line.elevation))
    assert line.distance[lowest] == pytest.approx(20e3, abs=1.5e3)
    assert line.elevation[lowest] == pytest.approx(100.0 + 1900.0 * 0.6, abs=30.0)


def test_outside_the_raster_nothing_is_found(tmp_path):
    """Far from the raster there is neither normal nor crest line."""
    ridge_raster(tmp_path / "r.tif", 0.0)
    assert range_of_raster(tmp_path / "r.tif", 20.0, 50.0, 0.0) == (None, None)
