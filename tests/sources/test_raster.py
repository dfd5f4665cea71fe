"""Transects cut from rasters whose shape is known, in many coordinate systems."""

import os
import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import numpy as np
import pytest
from geographiclib.geodesic import Geodesic

from orolift.errors import DataFileError, MissingFileError, OutOfRangeError, TerrainError
from orolift.sources.raster import MapPoint, raster_transect, site_positions
from orolift.terrain import features

REAL = Path(__file__).parents[1] / "data" / "real_terrain"
WEST_WIND = np.radians(270.0)
CENTRE = (9.0, 46.0)  # on the central meridian of EPSG:32632, where grid north is true north
NORTHING = (
    0.9996 * Geodesic.WGS84.Inverse(0.0, 9.0, 46.0, 9.0)["s12"]
)  # of `CENTRE`: UTM's scale times the meridian arc


def written(file, values, transform, crs="EPSG:32632", unit=None, **profile):
    """A GeoTIFF with the given cells."""
    import rasterio

    values = np.asarray(values)
    options = {"driver": "GTiff", "count": 1, "dtype": str(values.dtype), "nodata": None, **profile}
    with rasterio.open(
        file, "w", height=values.shape[-2], width=values.shape[-1], crs=crs, transform=transform, **options
    ) as out:
        for band in range(1, options["count"] + 1):
            out.write(values, band)
        if unit:
            out.set_band_unit(1, unit)
    return file


def cell_centres(shape, transform):
    """Coordinates of cell centres by the geotransform's own definition."""
    column, row = np.meshgrid(np.arange(shape[1]) + 0.5, np.arange(shape[0]) + 0.5)
    a, b, c, d, e, f = tuple(transform)[:6]
    return a * column + b * row + c, d * column + e * row + f


def layouts():
    """Geotransforms that put `CENTRE` amid 70 x 70 cells of about 500 m."""
    from affine import Affine
    from rasterio.transform import from_origin

    east, north = 500_000.0, NORTHING
    turned = Affine(400.0, 300.0, east - 24_500.0, 300.0, -400.0, north + 3_500.0)
    return {
        "longitude-latitude": ("EPSG:4326", from_origin(9.0 - 0.2275, 46.0 + 0.1575, 0.0065, 0.0045)),
        "utm": ("EPSG:32632", from_origin(east - 17_500.0, north + 17_500.0, 500.0, 500.0)),
        "rotated": ("EPSG:32632", turned),
        "south-up": ("EPSG:4326", Affine(0.0065, 0.0, 9.0 - 0.2275, 0.0, 0.0045, 46.0 - 0.1575)),
        "northing-first axes": ("EPSG:3035", from_origin(4_227_000.0, 2_559_500.0, 500.0, 500.0)),
    }


@pytest.fixture(scope="module", params=["longitude-latitude", "utm", "rotated", "south-up", "northing-first axes"])
def cone(request, tmp_path_factory):
    """A cone of 4000 m at `CENTRE` that falls by 40 m per geodesic kilometre, by geographiclib."""
    from rasterio.warp import transform as warped

    crs, transform = layouts()[request.param]
    x, y = cell_centres((70, 70), transform)
    longitude, latitude = warped(crs, "EPSG:4326", x.ravel(), y.ravel())
    away = [
        Geodesic.WGS84.Inverse(CENTRE[1], CENTRE[0], b, a, Geodesic.DISTANCE)["s12"]
        for a, b in zip(longitude, latitude, strict=True)
    ]
    ground = (4000.0 - 0.04 * np.array(away)).astype(np.float32).reshape(x.shape)
    return written(tmp_path_factory.mktemp("cone") / "cone.tif", ground, transform, crs)


@pytest.mark.parametrize("wind_from_deg", [0.0, 55.0, 235.0])
def test_a_cone_is_the_same_cone_in_every_coordinate_system(cone, wind_from_deg):
    """Along any bearing through its top the ground falls by 40 m per kilometre.

    atol: bilinear sampling of a cone is off by slope x cell^2 / (8 r), 0.63 m
    at 2 km from the top; a length wrong by 0.2 % gives 1.2 m at 15 km.
    """
    line = raster_transect(
        cone,
        wind_from=np.radians(wind_from_deg),
        through=MapPoint(*CENTRE),
        upwind=15e3,
        downwind=12e3,
        swath=0.0,
    )
    from_top = np.abs(line.distance - 15e3)
    off = from_top > 2000.0
    np.testing.assert_allclose(line.elevation[off], 4000.0 - 0.04 * from_top[off], atol=0.65)
    assert line.high_elevation is None


def test_points_lie_on_the_geodesic():
    """Positions agree with geographiclib to 1e-6 degrees (0.1 m), 120 km upwind and 30 km downwind."""
    line = raster_transect(
        REAL / "coast_9km.tif", wind_from=np.radians(280.0), through=MapPoint(7.2, 61.7), downwind=30e3, points=61
    )
    assert line.bearing == pytest.approx(np.radians(100.0))
    for x, longitude, latitude in zip(line.distance - 120e3, line.longitude, line.latitude, strict=True):
        expected = Geodesic.WGS84.Direct(61.7, 7.2, 100.0, x)
        assert longitude == pytest.approx(expected["lon2"], abs=1e-6)
        assert latitude == pytest.approx(expected["lat2"], abs=1e-6)


@pytest.fixture
def plane(tmp_path):
    """Fine raster in which the ground is 500 m + 600 m per degree east + 900 m per degree north of `CENTRE`."""
    from rasterio.transform import from_origin

    transform = from_origin(8.2, 46.6, 0.001, 0.001)
    x, y = cell_centres((1200, 1600), transform)
    ground = 1500.0 + 600.0 * (x - CENTRE[0]) + 900.0 * (y - CENTRE[1])
    return written(tmp_path / "plane.tif", ground.astype(np.float32), transform, "EPSG:4326", tiled=True)


@pytest.mark.parametrize("swath", [0.0, 8e3])
@pytest.mark.parametrize("points", [32, 700])
def test_a_plane_is_exact_at_every_resolution(plane, swath, points):
    """A plane survives averaging of cells, bilinear sampling and a symmetric swath.

    atol: float32 cells and the curvature of latitude lines over a swath of
    8 km; a shift of half a cell would give 0.3 m.
    """
    line = raster_transect(
        plane,
        wind_from=1.0,
        through=MapPoint(*CENTRE),
        upwind=30e3,
        downwind=30e3,
        swath=swath,
        points=points,
    )
    expected = 1500.0 + 600.0 * (line.longitude - CENTRE[0]) + 900.0 * (line.latitude - CENTRE[1])
    np.testing.assert_allclose(line.elevation, expected, atol=0.03)


def test_overviews_change_nothing_on_a_plane(plane):
    import rasterio
    from rasterio.enums import Resampling

    options = {"wind_from": 2.0, "through": MapPoint(*CENTRE), "upwind": 30e3, "downwind": 30e3, "points": 40}
    before = raster_transect(plane, **options)
    with rasterio.open(plane, "r+") as dataset:
        dataset.build_overviews([2, 4, 8], Resampling.average)
    np.testing.assert_allclose(raster_transect(plane, **options).elevation, before.elevation, atol=0.05)


@pytest.mark.parametrize("wind_from_deg", [0.0, 60.0])
def test_swath_gives_mean_and_ninetieth_percentile(tmp_path, wind_from_deg):
    """Ground rises by 100 m per km away from the line, so over +-5 km: mean 250 m, 90th percentile 450 m.

    rtol: 21 lines instead of a continuous swath (mean 1 in 21 high), and cells of 250 m.
    """
    from rasterio.transform import from_origin

    transform = from_origin(460_000.0, NORTHING + 40_000.0, 250.0, 250.0)
    x, y = cell_centres((320, 320), transform)
    east, north = np.sin(np.radians(wind_from_deg)), np.cos(np.radians(wind_from_deg))
    upwind = (x - 500_000.0) * east + (y - NORTHING) * north
    beside = (x - 500_000.0) * north - (y - NORTHING) * east
    ground = 1000.0 + 0.1 * np.abs(beside) + 0.01 * upwind
    file = written(tmp_path / "trough.tif", ground.astype(np.float32), transform)
    line = raster_transect(
        file, wind_from=np.radians(wind_from_deg), through=MapPoint(*CENTRE), upwind=30e3, downwind=30e3
    )
    floor = line.elevation - 1000.0 - 0.01 * (30e3 - line.distance)
    np.testing.assert_allclose(floor, 250.0, rtol=0.08)
    np.testing.assert_allclose(line.high_elevation - line.elevation, 450.0 - 250.0, rtol=0.08)
    assert "mean of 21 lines across 10 km" in line.notes[0]


def ridge_cells(height=1500.0, cell=500.0, size=400):
    """Bell ridge running north-south through the middle of a square, and its geotransform in EPSG:32632."""
    from rasterio.transform import from_origin

    half = cell * size / 2.0
    transform = from_origin(500_000.0 - half, NORTHING + half, cell, cell)
    x, _ = cell_centres((size, size), transform)
    return 20.0 + height / (1.0 + ((x - 500_000.0) / 12e3) ** 2), transform


def test_feet_are_converted_when_said_or_declared(tmp_path):
    ground, transform = ridge_cells()
    feet = np.rint(ground / 0.3048).astype(np.int16)
    options = {"wind_from": WEST_WIND, "through": MapPoint(*CENTRE), "upwind": 60e3, "downwind": 60e3}
    metres = raster_transect(written(tmp_path / "m.tif", ground.astype(np.float32), transform), **options)
    said = raster_transect(written(tmp_path / "ft.tif", feet, transform), unit="ft", **options)
    declared = raster_transect(written(tmp_path / "d.tif", feet, transform, unit="feet"), **options)
    np.testing.assert_allclose(said.elevation, metres.elevation, atol=0.16)  # half a foot of rounding
    np.testing.assert_array_equal(declared.elevation, said.elevation)
    assert any("in feet; converted" in note for note in declared.notes)
    overruled = raster_transect(tmp_path / "d.tif", unit="m", **options)
    assert any("declares its heights in 'feet', but elevation_unit" in note for note in overruled.notes)


def test_heights_above_any_summit_suggest_feet(tmp_path):
    ground, transform = ridge_cells(height=12_000.0)
    file = written(tmp_path / "high.tif", ground.astype(np.float32), transform)
    with pytest.raises(DataFileError, match=r'high\.tif reaches 120\d\d m.*set elevation_unit = "ft"'):
        raster_transect(file, wind_from=WEST_WIND)


def test_other_declared_units_are_refused(tmp_path):
    ground, transform = ridge_cells()
    file = written(tmp_path / "km.tif", ground.astype(np.float32), transform, unit="km")
    with pytest.raises(DataFileError, match="heights in 'km', which is neither metres nor feet"):
        raster_transect(file, wind_from=WEST_WIND)


def test_scale_and_offset_of_a_band_are_applied(tmp_path):
    import rasterio

    ground, transform = ridge_cells()
    file = written(tmp_path / "dm.tif", np.rint((ground + 100.0) * 10.0).astype(np.int16), transform)
    with rasterio.open(file, "r+") as dataset:
        dataset.scales, dataset.offsets = (0.1,), (-100.0,)
    line = raster_transect(file, wind_from=WEST_WIND, upwind=60e3, downwind=60e3, swath=0.0)
    assert line.elevation.max() == pytest.approx(1520.0, abs=2.0)


def test_sea_counts_as_zero_and_is_said():
    line = raster_transect(REAL / "coast_9km.tif", wind_from=np.radians(280.0), through=MapPoint(6.5, 61.5))
    assert line.elevation.min() == 0.0
    assert any("sea depths" in note for note in line.notes)
    assert any("coarse" in note for note in line.notes)


def test_default_centre_is_the_highest_cell():
    """The highest cell of this file is at 37.3767 N, -104.9933 E (range_90m.md)."""
    line = raster_transect(REAL / "range_90m.tif", wind_from=np.radians(45.0), upwind=30e3, downwind=3e3, points=34)
    assert line.longitude[30] == pytest.approx(-104.9933, abs=1e-4)
    assert line.latitude[30] == pytest.approx(37.3767, abs=1e-4)


def test_real_range_keeps_its_crest_and_plain():
    """The file spans 1645 to 4115 m (range_90m.md); a line 1 km wide keeps most of the summit, a plain lies upwind."""
    line = raster_transect(REAL / "range_90m.tif", wind_from=np.radians(45.0), swath=1e3, downwind=4e3)
    assert 3700.0 < line.elevation.max() <= 4115.0
    assert 1645.0 <= line.elevation.min() < 2000.0
    assert features(line).crest_distance > 25e3
    # a terrace of whole metres may lie a few centimetres under the mean
    assert np.all(line.high_elevation > line.elevation - 0.5)
    assert np.mean(line.high_elevation) > np.mean(line.elevation) + 10.0


@pytest.mark.parametrize("overviews", [[], [2, 4]])
def test_highest_cell_of_a_large_raster_is_found(tmp_path, overviews):
    import rasterio
    from rasterio.enums import Resampling
    from rasterio.transform import from_origin

    transform = from_origin(485_000.0, 5_134_000.0, 30.0, 30.0)
    x, y = cell_centres((2600, 1200), transform)
    ground = 2000.0 - 0.03 * np.hypot(x - 503_000.0, y - 5_090_000.0)
    file = written(tmp_path / "fine.tif", ground.astype(np.float32), transform)
    if overviews:
        with rasterio.open(file, "r+") as dataset:
            dataset.build_overviews(overviews, Resampling.average)
    line = raster_transect(file, wind_from=0.0, upwind=25e3, downwind=25e3, swath=0.0, points=501)
    assert line.elevation.max() == pytest.approx(2000.0, abs=3.0)
    assert line.distance[np.argmax(line.elevation)] == pytest.approx(25e3, abs=150.0)


def test_line_across_the_antimeridian(tmp_path):
    from rasterio.transform import from_origin

    transform = from_origin(178.0, -16.0, 0.01, 0.01)
    x, _ = cell_centres((300, 400), transform)
    ground = 1500.0 / (1.0 + ((x - 180.0) / 0.15) ** 2)
    file = written(tmp_path / "date_line.tif", ground.astype(np.float32), transform, "EPSG:4326")
    line = raster_transect(
        file, wind_from=WEST_WIND, through=MapPoint(-179.99, -17.5), upwind=100e3, downwind=80e3, swath=0.0
    )
    found = features(line)
    # 0.01 degrees of longitude before the centre point, 1.06 km at 17.5 S
    assert found.crest_distance == pytest.approx(98.94e3, abs=500.0)
    assert line.longitude[0] > 0.0 > line.longitude[-1]


def test_line_is_shortened_to_the_raster_and_says_so(tmp_path):
    ground, transform = ridge_cells(size=300)
    file = written(tmp_path / "small.tif", ground.astype(np.float32), transform)
    line = raster_transect(file, wind_from=WEST_WIND, through=MapPoint(*CENTRE))
    # 75 km either side of the centre, 150 m of scale and at most two of 512 steps
    assert line.distance[-1] == pytest.approx(150e3, abs=1000.0)
    assert line.distance.size > 500
    assert line.distance[0] == 0.0
    assert any("starts there instead of 120 km upwind" in note for note in line.notes)
    assert any("ends there instead of 80 km downwind" in note for note in line.notes)


def test_too_little_ground_upwind_of_the_crest_is_refused(tmp_path):
    ground, transform = ridge_cells(size=70)
    file = written(tmp_path / "tiny.tif", ground.astype(np.float32), transform)
    with pytest.raises(TerrainError, match=r"tiny\.tif ends 17\.\d km upwind of the crest, and at least 20 km"):
        raster_transect(file, wind_from=WEST_WIND, through=MapPoint(*CENTRE))


@pytest.mark.parametrize("nodata", [-32768.0, np.nan])
def test_short_hole_is_filled_and_long_one_refused(tmp_path, nodata):
    """Cells of 500 m across the whole swath are missing: 2 (filled), then 20 (refused), 30 km downwind of the west end."""
    ground, transform = ridge_cells()
    options = {"wind_from": WEST_WIND, "through": MapPoint(*CENTRE), "upwind": 80e3, "downwind": 80e3}
    whole = raster_transect(written(tmp_path / "whole.tif", ground.astype(np.float32), transform), **options)
    for cells in (2, 20):
        holed = ground.astype(np.float32)
        holed[:, 100 : 100 + cells] = nodata
        file = written(tmp_path / f"hole{cells}.tif", holed, transform, nodata=nodata)
        if cells == 2:
            line = raster_transect(file, **options)
            assert any("filled by straight lines" in note for note in line.notes)
            np.testing.assert_allclose(line.elevation, whole.elevation, atol=3.0)
        else:
            with pytest.raises(
                TerrainError, match=r"hole of (9\.\d+|10) km in the transect, 30\.?\d* km from its upwind"
            ):
                raster_transect(file, **options)


def test_a_hole_is_measured_in_cells_where_these_are_coarse(tmp_path):
    """Two cells of 2 km are missing, more than ten points of the line but fewer than three cells."""
    ground, transform = ridge_cells(cell=2000.0, size=100)
    ground[:, 25:27] = -9999.0
    file = written(tmp_path / "coarse.tif", ground.astype(np.float32), transform, nodata=-9999.0)
    line = raster_transect(file, wind_from=WEST_WIND, through=MapPoint(*CENTRE), upwind=80e3, downwind=80e3)
    assert any("filled by straight lines" in note for note in line.notes)


def test_missing_cells_beside_the_line_are_left_out_of_the_mean(tmp_path):
    ground, transform = ridge_cells()
    ground = ground.astype(np.float32)
    options = {"wind_from": WEST_WIND, "through": MapPoint(*CENTRE), "upwind": 60e3, "downwind": 60e3}
    whole = raster_transect(written(tmp_path / "whole.tif", ground, transform), **options)
    ground[203:207, 150:250] = -9999.0
    line = raster_transect(written(tmp_path / "part.tif", ground, transform, nodata=-9999.0), **options)
    np.testing.assert_allclose(line.elevation, whole.elevation, atol=1.0)
    assert any("left out of its mean" in note for note in line.notes)


def test_missing_centre_is_refused_with_advice_about_sea(tmp_path):
    ground, transform = ridge_cells()
    ground[:] = -9999.0
    file = written(tmp_path / "empty.tif", ground.astype(np.float32), transform, nodata=-9999.0)
    with pytest.raises(TerrainError, match=r"no elevation round the centre point.*gdalwarp -dstnodata 0"):
        raster_transect(file, wind_from=WEST_WIND, through=MapPoint(*CENTRE))
    with pytest.raises(DataFileError, match=r"empty\.tif holds no elevation: every cell is missing"):
        raster_transect(file, wind_from=WEST_WIND)


@pytest.mark.parametrize("value", [-32768, -9999])
def test_undeclared_missing_values_are_refused(tmp_path, value):
    """A hole in the ground is no sea: taken as 0 m it would cut through the range."""
    ground, transform = ridge_cells()
    ground[:, 150:170] = value
    file = written(tmp_path / "void.tif", ground.astype(np.int16), transform)
    with pytest.raises(DataFileError, match=rf"{value} m, which stands for missing.*a_nodata {value} "):
        raster_transect(file, wind_from=WEST_WIND, through=MapPoint(*CENTRE))


def test_the_deepest_sea_is_no_missing_ground(tmp_path):
    """A trench that passes 9999 m below the sea has cells as deep beside it."""
    ground, transform = ridge_cells()
    ground[:, :30] = np.linspace(-10500.0, -9000.0, 30).round()
    ground[:, 10] = -9999
    file = written(tmp_path / "trench.tif", ground.astype(np.int16), transform)
    line = raster_transect(file, wind_from=WEST_WIND, through=MapPoint(*CENTRE))
    assert line.elevation.min() >= 0.0


def test_flat_ground_is_refused(tmp_path):
    ground, transform = ridge_cells(height=25.0)
    file = written(tmp_path / "flat.tif", ground.astype(np.float32), transform)
    with pytest.raises(TerrainError, match=r"flat\.tif is flat along the transect: 2\d m .*at least 30 m"):
        raster_transect(file, wind_from=WEST_WIND, through=MapPoint(*CENTRE))


def test_point_outside_names_what_the_raster_covers(tmp_path):
    with pytest.raises(
        TerrainError, match=r"\(9\.0000 E, 46\.0000 N\) lies outside.*3\.958 to 8\.958 E, 58\.958 to 63"
    ):
        raster_transect(REAL / "coast_9km.tif", wind_from=0.0, through=MapPoint(*CENTRE))


def test_impossible_numbers_are_refused():
    coast = REAL / "coast_9km.tif"
    with pytest.raises(OutOfRangeError, match=r"latitude.*exchanged\?"):
        raster_transect(coast, wind_from=0.0, through=MapPoint(61.5, 107.0))
    with pytest.raises(OutOfRangeError, match=r"wind_from.*radians"):
        raster_transect(coast, wind_from=235.0)
    with pytest.raises(OutOfRangeError, match="upwind: 1 of 1"):
        raster_transect(coast, wind_from=1.0, upwind=120.0)


def test_easting_and_northing_are_those_of_the_raster(tmp_path):
    ground, transform = ridge_cells()
    file = written(tmp_path / "utm.tif", ground.astype(np.float32), transform)
    options = {"wind_from": WEST_WIND, "upwind": 60e3, "downwind": 60e3}
    by_degrees = raster_transect(file, through=MapPoint(*CENTRE), **options)
    by_metres = raster_transect(file, through=MapPoint(500_000.0, NORTHING, projected=True), **options)
    np.testing.assert_allclose(by_metres.latitude, by_degrees.latitude, atol=1e-8)
    np.testing.assert_allclose(by_metres.longitude, by_degrees.longitude, atol=1e-8)
    with pytest.raises(TerrainError, match="easting and northing mean nothing"):
        raster_transect(REAL / "coast_9km.tif", wind_from=0.0, through=MapPoint(5e5, 5e6, projected=True))


def test_files_that_are_no_elevation_raster_are_refused(tmp_path):
    from affine import Affine

    ground, transform = ridge_cells()
    cells = ground.astype(np.float32)
    text = tmp_path / "notes.tif"
    text.write_text("not a raster")
    cut = written(tmp_path / "cut.tif", cells, transform, tiled=True, blockxsize=256, blockysize=256)
    os.truncate(cut, cut.stat().st_size // 2)
    picture = written(tmp_path / "photo.tif", np.full((9, 9), 8, np.uint8), transform, count=3)
    refused = {
        text: "is not a raster that GDAL can read",
        cut: "is damaged or cut short",
        picture: "is a picture",
        written(tmp_path / "lost.tif", cells, transform, crs=None): "has no coordinate system",
        written(tmp_path / "local.tif", cells, transform, crs='LOCAL_CS["mine",UNIT["metre",1]]'): "brought together",
    }
    with pytest.warns(Warning, match="no geotransform|not georeferenced|identity"):
        refused[written(tmp_path / "nowhere.tif", cells, Affine.identity())] = "has no position"
    for file, message in refused.items():
        with pytest.raises(DataFileError, match=rf"elevation_file: .*{file.name}.*{message}"):
            raster_transect(file, wind_from=WEST_WIND, through=MapPoint(*CENTRE))
    with pytest.raises(MissingFileError, match=r"elevation_file: .*absent\.tif cannot be found"):
        raster_transect("absent.tif", wind_from=0.0, folder=tmp_path)


@pytest.mark.parametrize("address", ["/vsicurl/https://place.invalid/a.tif", "https://place.invalid/a.tif", "s3://a/b"])
def test_addresses_are_refused(address):
    with pytest.raises(DataFileError, match="is an address"):
        raster_transect(address, wind_from=0.0)


def virtual_raster(file, source):
    """A small VRT that reads one band from `source`."""
    file.write_text(
        '<VRTDataset rasterXSize="60" rasterYSize="60"><SRS>EPSG:4326</SRS>'
        "<GeoTransform>3.95833, 0.0833333, 0, 63.95833, 0, -0.0833333</GeoTransform>"
        '<VRTRasterBand dataType="Int16" band="1"><SimpleSource>'
        f'<SourceFilename relativeToVRT="1">{source}</SourceFilename><SourceBand>1</SourceBand>'
        "</SimpleSource></VRTRasterBand></VRTDataset>"
    )
    return file


@pytest.mark.parametrize(
    "source",
    [
        pytest.param("/vsicurl/https://place.invalid/a.tif", id="vsi"),
        pytest.param("https://place.invalid/a.tif", id="web"),
        pytest.param("&#47;vsi&#99;url/place.invalid/a.tif", id="written with entities"),
        pytest.param("NETCDF:/vsis3/bucket/a.nc:z", id="behind a driver prefix"),
    ],
)
def test_addresses_inside_virtual_rasters_are_refused(tmp_path, source):
    direct = virtual_raster(tmp_path / "direct.vrt", source)
    nested = virtual_raster(tmp_path / "nested.vrt", "direct.vrt")
    for file in (direct, nested):
        with pytest.raises(DataFileError, match=rf"{file.name} leads to an address"):
            raster_transect(file, wind_from=0.0)


def test_virtual_raster_of_local_files_is_read(tmp_path):
    (tmp_path / "coast.tif").write_bytes((REAL / "coast_9km.tif").read_bytes())
    options = {"wind_from": np.radians(280.0), "through": MapPoint(7.0, 61.5)}
    virtual = raster_transect(virtual_raster(tmp_path / "coast.vrt", "coast.tif"), **options)
    straight = raster_transect(REAL / "coast_9km.tif", **options)
    np.testing.assert_allclose(virtual.elevation, straight.elevation, atol=0.5)


def test_threads_get_the_same_lines_as_one_after_the_other():
    bearings = np.radians([20.0, 45.0, 70.0, 100.0])

    def ground(wind_from):
        return raster_transect(REAL / "range_90m.tif", wind_from=wind_from).elevation

    with ThreadPoolExecutor(4) as pool:
        together = list(pool.map(ground, bearings, timeout=120))
    for found, wind_from in zip(together, bearings, strict=True):
        np.testing.assert_array_equal(found, ground(wind_from))


def test_a_foreign_projection_database_does_no_harm():
    """PROJ_DATA and PROJ_LIB of another program break every EPSG code unless dropped first."""
    code = (
        "import sys, orolift.sources.raster as r\n"
        "assert 'rasterio' not in sys.modules\n"
        f"print(r.raster_transect({str(REAL / 'coast_9km.tif')!r}, wind_from=4.9).elevation.max())"
    )
    environment = {**os.environ, "PROJ_DATA": "/nonexistent", "PROJ_LIB": "/nonexistent"}
    done = subprocess.run(
        [sys.executable, "-c", code], env=environment, capture_output=True, text=True, timeout=60, check=False
    )
    assert done.returncode == 0, done.stderr
    assert done.stderr == ""
    assert float(done.stdout) > 1000.0


def test_sites_are_placed_along_and_across_the_line():
    """Points set out by geographiclib: 60 km from the upwind end, then 4 km to the right or left of the wind.

    atol: a site 4 km off a line differs by micrometres on the ellipsoid.
    """
    coast = REAL / "coast_9km.tif"
    line = raster_transect(coast, wind_from=np.radians(280.0), through=MapPoint(7.2, 61.7), downwind=30e3)
    on = Geodesic.WGS84.Direct(61.7, 7.2, 100.0, -60e3)
    bearing = Geodesic.WGS84.Inverse(on["lat2"], on["lon2"], 61.7, 7.2)["azi1"]
    right, left = (Geodesic.WGS84.Direct(on["lat2"], on["lon2"], bearing + turn, 4e3) for turn in (90.0, -90.0))
    found = site_positions(coast, line, [MapPoint(p["lon2"], p["lat2"]) for p in (on, right, left)])
    np.testing.assert_allclose(found.distance, 60e3, atol=0.1)
    np.testing.assert_allclose(found.offset, [0.0, 4e3, -4e3], atol=0.1)


def test_sites_get_the_ground_of_the_raster_and_nan_outside(plane):
    line = raster_transect(plane, wind_from=1.0, through=MapPoint(*CENTRE), upwind=30e3, downwind=30e3)
    found = site_positions(plane, line, [MapPoint(9.1, 46.1), MapPoint(20.0, 46.0)])
    assert found.elevation[0] == pytest.approx(1500.0 + 60.0 + 90.0, abs=0.01)
    assert np.isnan(found.elevation[1])


def test_sites_on_a_line_without_positions_are_refused():
    from orolift.terrain import ridge_transect

    with pytest.raises(TerrainError, match="give sites as distance_km"):
        site_positions(REAL / "coast_9km.tif", ridge_transect([0, 1e4, 2e4], [0, 900, 9]), [MapPoint(7.0, 61.0)])


def test_high_ground_is_the_percentile_numpy_gives():
    from orolift.sources.raster import _high

    rng = np.random.default_rng(3)
    ground = rng.normal(1000.0, 300.0, (21, 60))
    ground[rng.random(ground.shape) < 0.3] = np.nan
    np.testing.assert_allclose(_high(ground), np.nanpercentile(ground, 90.0, axis=0), rtol=1e-12)
