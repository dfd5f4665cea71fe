"""Whole rasters as square grids of true metres, and maps written back."""

import numpy as np
import pytest
from geographiclib.geodesic import Geodesic

from orolift.errors import DataFileError, OutOfRangeError, TerrainError
from orolift.rain.parameters import RainParameters
from orolift.rain.rain_map import rain_map
from orolift.sources.elevation_map import read_elevation_map
from orolift.sources.geotiff import Band, geotiff, rain_maps
from orolift.terrain.grid import grid_elevation

CENTRE = (9.0, 46.0)  # on the central meridian of EPSG:32632
NORTHING = 0.9996 * Geodesic.WGS84.Inverse(0.0, 9.0, 46.0, 9.0)["s12"]


def saved(file, ground, transform, crs="EPSG:32632", **options):
    """A GeoTIFF of elevation."""
    import rasterio

    ground = np.asarray(ground, dtype=np.float32)
    unit = options.pop("unit", None)
    profile = {"driver": "GTiff", "count": 1, "dtype": "float32", "nodata": -9999.0, **options}
    with rasterio.open(
        file, "w", height=ground.shape[0], width=ground.shape[1], crs=crs, transform=transform, **profile
    ) as out:
        out.write(np.where(np.isnan(ground), -9999.0, ground).astype(np.float32), 1)
        if unit:
            out.set_band_unit(1, unit)
    return file


def bell(longitude, latitude):
    """A round hill of 1500 m about `CENTRE`, 12 km wide by the geodesic (azimuthal equidistant, true from its middle)."""
    from rasterio.warp import transform as moved

    about = f"+proj=aeqd +lat_0={CENTRE[1]} +lon_0={CENTRE[0]} +datum=WGS84"
    east, north = moved("EPSG:4326", about, np.ravel(longitude), np.ravel(latitude))
    away = np.hypot(east, north).reshape(np.shape(longitude))
    return 1500.0 * np.exp(-((away / 12e3) ** 2))


def layouts():
    """Coordinate systems and geotransforms with `CENTRE` in the middle of 90 x 90 cells of about 600 m."""
    from affine import Affine
    from rasterio.transform import from_origin

    east, feet = 500e3, 0.3048006096
    return {
        "longitude-latitude": ("EPSG:4326", from_origin(9.0 - 0.3465, 46.0 + 0.243, 0.0077, 0.0054)),
        "utm": ("EPSG:32632", from_origin(east - 27e3, NORTHING + 27e3, 600.0, 600.0)),
        "south-up": ("EPSG:32632", Affine(600.0, 0.0, east - 27e3, 0.0, 600.0, NORTHING - 27e3)),
        "mirrored": ("EPSG:32632", Affine(-600.0, 0.0, east + 27e3, 0.0, -600.0, NORTHING + 27e3)),
        "rotated": ("EPSG:32632", Affine(480.0, 360.0, east - 37.8e3, 360.0, -480.0, NORTHING + 5.4e3)),
        "not square": ("EPSG:32632", from_origin(east - 27e3, NORTHING + 36e3, 600.0, 800.0)),
        "web map": ("EPSG:3857", from_origin(1001875.417 - 38.7e3, 5780349.220 + 38.7e3, 860.0, 860.0)),
        "feet": (
            "+proj=utm +zone=32 +datum=WGS84 +units=us-ft",
            from_origin((east - 27e3) / feet, (NORTHING + 27e3) / feet, 2000.0, 2000.0),
        ),
    }


@pytest.fixture(params=sorted(layouts()))
def hill(request, tmp_path):
    """The hill in each layout."""
    from rasterio.warp import transform as moved

    crs, t = layouts()[request.param]
    column, row = np.meshgrid(np.arange(90) + 0.5, np.arange(90) + 0.5)
    x, y = t.a * column + t.b * row + t.c, t.d * column + t.e * row + t.f
    longitude, latitude = moved(crs, "EPSG:4326", x.ravel(), y.ravel())
    ground = bell(longitude, latitude).reshape(x.shape)
    return saved(tmp_path / "hill.tif", ground, t, crs), request.param


def test_the_same_hill_and_rain_in_every_layout(hill):
    """Square cells of metres, rows north to south, the hill true to shape; so the rain is the same.

    Ground to 12 m (bilinear between cells of 600 m on a hill of that curvature), rain to 2 % of its peak.
    """
    file, layout = hill
    found = read_elevation_map(file)
    grid = found.grid
    assert np.all(np.diff(grid.x) > 0)
    assert np.all(np.diff(grid.y) < 0)
    assert np.ptp(np.diff(grid.x)) < 1e-6
    assert -np.diff(grid.y)[0] == pytest.approx(np.diff(grid.x)[0], rel=1e-3)
    assert (found.longitude, found.latitude) == pytest.approx(CENTRE, abs=0.01)
    from rasterio.warp import transform as moved

    (x,), (y,) = moved("EPSG:4326", found.crs, [CENTRE[0]], [CENTRE[1]])
    for angle in np.radians([20.0, 110.0, 250.0]):
        for away in (0.0, 5e3, 11e3, 20e3):
            ground = grid_elevation(grid, x + away * np.sin(angle), y + away * np.cos(angle))
            assert ground == pytest.approx(1500.0 * np.exp(-((away / 12e3) ** 2)), abs=12.0)
    assert found.north == pytest.approx(0.0, abs=2e-3)
    rate = rain_map(grid, RainParameters(15.0, 0.0, 0.005, 2500.0, 0.004)).rate
    # the peak for this hill from a direct map in metres
    axis = np.arange(-27e3, 27.1e3, 600.0)
    direct = rain_map(
        type(grid)(1500.0 * np.exp(-(axis**2 + axis[::-1, np.newaxis] ** 2) / 12e3**2), axis, axis[::-1]),
        RainParameters(15.0, 0.0, 0.005, 2500.0, 0.004),
    ).rate
    assert np.nanmax(rate) == pytest.approx(direct.max(), rel=0.02), layout


def test_heights_in_feet(tmp_path):
    """Declared by the raster, or said by the user."""
    from rasterio.transform import from_origin

    t = from_origin(500e3, 5100e3, 500.0, 500.0)
    ground = np.full((20, 20), 1000.0)
    ground[10, 10] = 2000.0
    declared = read_elevation_map(saved(tmp_path / "a.tif", ground, t, unit="ft"))
    assert np.nanmax(declared.grid.elevation) == pytest.approx(609.6, abs=0.01)
    assert any("feet" in note for note in declared.notes)
    said = read_elevation_map(saved(tmp_path / "b.tif", ground, t), unit="ft")
    assert np.nanmax(said.grid.elevation) == pytest.approx(609.6, abs=0.01)


def test_grid_north_is_not_true_north(tmp_path):
    """3 degrees east of the central meridian at 60 degrees north UTM grid north lies 2.6 degrees east of true north.

    tan(convergence) = tan(longitude difference) sin(latitude): Snyder (1987), eq. 8-9 on the sphere; 1 % off on the ellipsoid.
    """
    from rasterio.transform import from_origin

    t = from_origin(667e3 - 5e3, 6655e3 + 5e3, 500.0, 500.0)
    found = read_elevation_map(saved(tmp_path / "a.tif", np.ones((20, 20)), t))
    longitude = np.radians(found.longitude - 9.0)
    expected = np.arctan(np.tan(longitude) * np.sin(np.radians(found.latitude)))
    assert 0.04 < expected < 0.05
    assert found.north == pytest.approx(-expected, rel=0.01)


def test_large_and_fine_rasters_are_read_in_means(tmp_path):
    """To the size or the cell wanted, with a note; the mean of the ground stays, missing cells stay out of means."""
    from rasterio.transform import from_origin

    ground = np.random.default_rng(1).uniform(0.0, 1000.0, (402, 301))
    ground[:40, :40] = np.nan
    file = saved(tmp_path / "a.tif", ground, from_origin(500e3, 5100e3, 30.0, 30.0))
    fine = read_elevation_map(file)
    assert fine.grid.elevation.shape == (100, 75)
    assert np.diff(fine.grid.x)[0] == pytest.approx(120.0)
    assert "means of 4 x 4 cells (120 m)" in fine.notes[0]
    np.testing.assert_allclose(fine.grid.elevation[20, 30], ground[80:84, 120:124].mean(), rtol=1e-5)
    assert np.isnan(fine.grid.elevation[:10, :10]).all()
    assert fine.grid.x[0] == pytest.approx(500e3 + 60.0)
    assert fine.grid.y[0] == pytest.approx(5100e3 - 60.0)
    whole = read_elevation_map(file, least_cell=1.0)
    assert whole.grid.elevation.shape == (402, 301)
    small = read_elevation_map(file, least_cell=1.0, most_cells=50)
    assert max(small.grid.elevation.shape) <= 50


def test_means_of_a_fine_raster_in_degrees(tmp_path):
    """Read in means of 3 x 3 cells, sides that 3 does not divide: the hill stays where it is, to 15 m of height."""
    from rasterio.transform import from_origin

    step_x, step_y = 0.0004, 0.0003  # 31 m by 33 m
    longitude = 8.8 + step_x * (np.arange(1000) + 0.5)
    latitude = 46.2 - step_y * (np.arange(1301) + 0.5)
    x, y = (longitude - CENTRE[0]) * 77_400.0, (latitude - CENTRE[1]) * 111_150.0  # metres near the middle
    ground = 1500.0 * np.exp(-((x / 9e3) ** 2) - ((y[:, np.newaxis] / 6e3) ** 2))
    found = read_elevation_map(saved(tmp_path / "a.tif", ground, from_origin(8.8, 46.2, step_x, step_y), "EPSG:4326"))
    from rasterio.warp import transform as moved

    assert np.diff(found.grid.x)[0] == pytest.approx(100.0)
    (east,), (north,) = moved("EPSG:4326", found.crs, [CENTRE[0]], [CENTRE[1]])
    for dx, dy in [(0.0, 0.0), (6e3, 0.0), (-6e3, 3e3), (2e3, -8e3)]:
        wanted = 1500.0 * np.exp(-((dx / 9e3) ** 2) - (dy / 6e3) ** 2)
        assert grid_elevation(found.grid, east + dx, north + dy) == pytest.approx(wanted, abs=15.0)


@pytest.mark.parametrize("layout", ["longitude-latitude", "utm", "south-up", "rotated"])
def test_part_of_a_raster(tmp_path, layout):
    """Only the ground round a point: the same heights at the same places as from the whole, to 12 m."""
    from rasterio.warp import transform as moved

    crs, t = layouts()[layout]
    column, row = np.meshgrid(np.arange(90) + 0.5, np.arange(90) + 0.5)
    longitude, latitude = moved(
        crs, "EPSG:4326", (t.a * column + t.b * row + t.c).ravel(), (t.d * column + t.e * row + t.f).ravel()
    )
    file = saved(tmp_path / "hill.tif", bell(longitude, latitude).reshape(90, 90), t, crs)
    found = read_elevation_map(file, around=(9.05, 46.05), reach=10e3)
    assert 18e3 < np.ptp(found.grid.x) < 42e3  # a turned raster is cut along its own rows
    assert (found.longitude, found.latitude) == pytest.approx((9.05, 46.05), abs=0.01)
    (x,), (y,) = moved("EPSG:4326", found.crs, [CENTRE[0]], [CENTRE[1]])
    for east, north in [(2e3, 3e3), (6e3, 6e3), (10e3, 4e3)]:
        wanted = 1500.0 * np.exp(-(east**2 + north**2) / 12e3**2)
        assert grid_elevation(found.grid, x + east, y + north) == pytest.approx(wanted, abs=12.0)
    with pytest.raises(TerrainError, match=r"does not reach to 20\.000 E, 46\.000 N"):
        read_elevation_map(file, around=(20.0, 46.0), reach=10e3)


def test_sea_depths_count_as_sea_level(tmp_path):
    """As for transects, with the same note."""
    from rasterio.transform import from_origin

    ground = np.linspace(-3000.0, 1000.0, 400).reshape(20, 20)
    found = read_elevation_map(saved(tmp_path / "a.tif", ground, from_origin(500e3, 5100e3, 500.0, 500.0)))
    assert found.grid.elevation.min() == 0.0
    assert any("below sea level" in note for note in found.notes)


@pytest.mark.parametrize(
    ("shape", "cell", "crs", "message"),
    [
        ((5, 50), 500.0, "EPSG:32632", "has 5 x 50 cells"),
        ((40, 40), 10.0, "EPSG:32632", r"0\.4 km wide; at cells of 100 m"),
        ((40, 40), 80e3, "EPSG:3035", "The rain map has one wind"),
        ((180, 360), 1.0, "EPSG:4326", "too much of the Earth|km long"),
    ],
)
def test_rasters_of_the_wrong_size(tmp_path, shape, cell, crs, message):
    """Too small, too fine, too large, the whole Earth."""
    from rasterio.transform import from_origin

    west, top = (-180.0, 90.0) if crs == "EPSG:4326" else (500e3, 5.1e6)
    file = saved(tmp_path / "a.tif", np.ones(shape), from_origin(west, top, cell, cell), crs)
    with pytest.raises(TerrainError, match=message):
        read_elevation_map(file)


def test_unreadable_files(tmp_path):
    """The same messages as for transects."""
    with pytest.raises(DataFileError, match="local files only"):
        read_elevation_map("https://a.example/x.tif")
    (tmp_path / "x.tif").write_bytes(b"no raster at all")
    with pytest.raises(DataFileError, match="not a raster"):
        read_elevation_map(tmp_path / "x.tif")
    with pytest.raises(OutOfRangeError, match="most_cells"):
        read_elevation_map(tmp_path / "x.tif", most_cells=4)


def test_maps_are_written_with_all_they_need(tmp_path):
    """Coordinates, missing cells, units, names and tags come back; south-up rasters too; the same bytes twice."""
    import rasterio
    from affine import Affine

    ground = np.arange(400.0).reshape(20, 20)
    ground[3, 4] = np.nan
    file = saved(tmp_path / "a.tif", ground, Affine(500.0, 0.0, 500e3, 0.0, 500.0, 5100e3))
    placed = read_elevation_map(file)
    rate = placed.grid.elevation / 3600.0 / 100.0
    snow = np.clip(placed.grid.elevation / 400.0, 0.0, 1.0)
    maps = rain_maps(placed, rate, 6 * 3600.0, snow, {"title": "Varn"})
    assert set(maps) == {"rain_rate", "rain_total", "rain_and_snow"}
    assert maps == rain_maps(placed, rate, 6 * 3600.0, snow, {"title": "Varn"})
    for name, data in maps.items():
        (tmp_path / f"{name}.tif").write_bytes(data)
    with rasterio.open(tmp_path / "rain_total.tif") as out:
        values = out.read(1, masked=True)
        assert out.crs == rasterio.crs.CRS.from_epsg(32632)
        assert out.units == ("mm",)
        assert out.descriptions == ("precipitation over 6 hours",)
        assert out.tags()["title"] == "Varn"
        assert out.tags()["duration_h"] == "6"
        # the cell of the south-up raster in row 7, column 11
        row, column = out.index(500e3 + 11.5 * 500.0, 5100e3 + 7.5 * 500.0)
        assert values[row, column] == pytest.approx(6 * (7 * 20 + 11) / 100.0, rel=1e-6)
        assert values.mask.sum() == 1
    with rasterio.open(tmp_path / "rain_and_snow.tif") as out:
        rain, frozen, share = out.read(masked=True)
        np.testing.assert_allclose((rain + frozen).compressed(), values.compressed(), rtol=1e-5)
        np.testing.assert_allclose(
            (frozen / (rain + frozen))[1:, 1:].compressed(), share[1:, 1:].compressed(), rtol=1e-4
        )
    assert set(rain_maps(placed, rate, 3600.0, None, {})) == {"rain_rate", "rain_total"}


def test_a_map_in_a_local_projection_can_be_read_back(tmp_path):
    """Written from longitude and latitude, the file lies where the raster lay."""
    import rasterio
    from rasterio.transform import from_origin
    from rasterio.warp import transform_bounds

    file = saved(tmp_path / "a.tif", np.ones((60, 80)), from_origin(9.0, 46.3, 0.005, 0.005), "EPSG:4326")
    placed = read_elevation_map(file)
    (tmp_path / "b.tif").write_bytes(geotiff([Band("one", "1", placed.grid.elevation)], placed))
    with rasterio.open(tmp_path / "b.tif") as out:
        bounds = transform_bounds(out.crs, "EPSG:4326", *out.bounds)
    assert bounds == pytest.approx((9.0, 46.0, 9.4, 46.3), abs=0.01)
