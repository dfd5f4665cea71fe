"""From files to files: raster, catchments, divide and gauges of an invented range, rain over it, maps and tables."""

import json
from dataclasses import replace

import numpy as np
import pytest
import rasterio
from rasterio.transform import from_origin

from orolift.air.column_build import air_from_station
from orolift.rain.catchments import catchment_rain
from orolift.rain.gauge_fit import fit_to_gauges
from orolift.rain.gauges import gauge_comparison, rain_at
from orolift.rain.limits import limits_of_theory
from orolift.rain.parameters import column_rain
from orolift.rain.rain_map import map_drying_ratio, rain_map
from orolift.rain.snow import snow_by_height, snow_on_ground
from orolift.rain.windward import crest_divide, line_divide, windward_cells, windward_share
from orolift.sources.elevation_map import read_elevation_map
from orolift.sources.gauges_csv import read_gauges
from orolift.sources.geotiff import rain_maps
from orolift.sources.polygons import read_lines, read_polygons

DURATION = 12 * 3600.0


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    """A raster in degrees of a meridional range of 1600 m at 46 degrees north, sea without data west of it."""
    place = tmp_path_factory.mktemp("varn")
    longitude = 8.0 + 0.01 * (np.arange(300) + 0.5)
    latitude = 47.0 - 0.01 * (np.arange(200) + 0.5)
    ground = 1600.0 * np.exp(-(((longitude - 9.6) / 0.22) ** 2)) * (1.0 + 0.25 * np.sin(latitude[:, np.newaxis] * 20.0))
    ground = np.where(longitude < 8.6, -9999.0, ground).astype(np.float32)
    with rasterio.open(
        place / "varn.tif",
        "w",
        driver="GTiff",
        height=200,
        width=300,
        count=1,
        dtype="float32",
        crs="EPSG:4326",
        transform=from_origin(8.0, 47.0, 0.01, 0.01),
        nodata=-9999.0,
    ) as out:
        out.write(ground, 1)

    def box(west, south, east, north, name):
        ring = [[west, south], [east, south], [east, north], [west, north], [west, south]]
        return {"type": "Feature", "properties": {"name": name}, "geometry": {"type": "Polygon", "coordinates": [ring]}}

    basins = [
        box(9.2, 45.8, 9.6, 46.2, "West Tarn"),
        box(9.6, 45.8, 10.0, 46.2, "East Tarn"),
        box(20, 45, 21, 46, "Elsewhere"),
    ]
    (place / "basins.geojson").write_text(json.dumps({"type": "FeatureCollection", "features": basins}))
    line = {"type": "LineString", "coordinates": [[9.6, 45.1], [9.6, 46.9]]}
    (place / "divide.geojson").write_text(json.dumps(line))
    return place


def test_whole_chain(folder):
    """A westerly: more rain on the west basin, nothing on the one elsewhere, shares that agree, files that open."""
    placed = read_elevation_map("varn.tif", folder=folder)
    air = air_from_station(0.0, 1.0e5, 280.15, 0.0058, 16.0, np.radians(270.0), lapse_rate=0.0055)
    column = column_rain(air, 0.0, grid_turn=placed.north)
    found = rain_map(placed.grid, column.parameters, floor=column.dry_lift)
    assert any("sea" in note for note in found.notes)
    assert not any("edge of the map" in line for line in limits_of_theory(found, column))
    assert 0.1 < map_drying_ratio(found, column) < 0.8

    drawn = line_divide(read_lines("divide.geojson", placed.crs, folder=folder), placed.grid, column.parameters.bearing)
    by_crest = windward_cells(placed.grid, crest_divide(placed.grid, column.parameters.bearing))
    by_line = windward_cells(placed.grid, drawn)
    assert windward_share(found.rate, by_crest) == pytest.approx(windward_share(found.rate, by_line), abs=0.03)

    by_height = snow_by_height(air, 0.0, float(np.nanmax(placed.grid.elevation)))
    snow = snow_on_ground(placed.grid.elevation, by_height)
    basins, notes = read_polygons("basins.geojson", placed.crs, name_field="name", folder=folder)
    assert notes == ()
    west, east, off = (
        catchment_rain(basin.polygon, placed.grid, found.rate, DURATION, snow_share=snow, windward=by_line)
        for basin in basins
    )
    assert west.total > 1.2 * east.total
    assert west.windward_share > 0.95
    assert east.windward_share < 0.05
    assert 0.0 < west.snow_share < 1.0
    assert off.total is None

    maps = rain_maps(placed, found.rate, DURATION, snow, {"title": "Westerly over the Varn range"})
    (folder / "rain_total.tif").write_bytes(maps["rain_total"])
    with rasterio.open(folder / "rain_total.tif") as out:
        total = out.read(1, masked=True)
        np.testing.assert_allclose(total.max(), np.nanmax(found.rate) * DURATION, rtol=1e-6)
        assert np.array_equal(np.ma.getmaskarray(total), np.isnan(found.rate))


def test_gauges_of_the_chain(folder):
    """Gauges that caught what longer times give: the comparison shows a bias, the fit takes it away."""
    placed = read_elevation_map("varn.tif", folder=folder, least_cell=2000.0)
    air = air_from_station(0.0, 1.0e5, 280.15, 0.0058, 16.0, np.radians(270.0), lapse_rate=0.0055)
    usual = column_rain(air, 0.0, grid_turn=placed.north).parameters
    rate = rain_map(placed.grid, replace(usual, cloud_time=1500.0, fall_time=2500.0)).rate
    rng = np.random.default_rng(8)
    longitude, latitude = rng.uniform(9.2, 10.4, 15), rng.uniform(45.4, 46.6, 15)
    from rasterio.warp import transform

    x, y = (np.array(a) for a in transform("EPSG:4326", placed.crs, longitude, latitude))
    caught = DURATION * rain_at(placed.grid, rate, x, y)
    rows = [
        f"G{i},{a!r},{b!r},{c!r}"
        for i, (a, b, c) in enumerate(zip(longitude.tolist(), latitude.tolist(), caught.tolist(), strict=True))
    ]
    (folder / "gauges.csv").write_text("name,longitude,latitude,total_mm\n" + "\n".join(rows) + "\n")
    gauges = read_gauges("gauges.csv", placed.crs, source_crs=placed.source_crs, folder=folder)
    before = gauge_comparison(gauges, placed.grid, rain_map(placed.grid, usual).rate, DURATION)
    fit = fit_to_gauges(gauges, placed.grid, usual, DURATION)
    assert before.used == fit.gauges == 15
    assert before.rms_error == pytest.approx(fit.rms_before, rel=0.1)
    assert fit.rms_left_out < 0.2 * fit.rms_before
    assert fit.total_time.value == pytest.approx(4000.0, rel=0.1)
