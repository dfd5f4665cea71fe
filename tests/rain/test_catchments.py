"""Catchments: exact cover of cells, and what falls on them."""

import numpy as np
import pytest
import shapely
from hypothesis import example, given
from hypothesis import strategies as st
from shapely import affinity

from orolift.errors import OutOfRangeError
from orolift.rain.catchments import catchment_rain, elevation_bands
from orolift.rain.coverage import coverage
from orolift.terrain.grid import ElevationGrid

HOUR = 3600.0


def map_of(ny=24, nx=30, dx=1e3, dy=1e3):
    """A map whose lower left corner is at (100 km, 50 km), the ground a slope to the east."""
    x = 100e3 + dx * (np.arange(nx) + 0.5)
    y = 50e3 + dy * (np.arange(ny)[::-1] + 0.5)
    return ElevationGrid(np.tile(np.linspace(0.0, 2000.0, nx), (ny, 1)), x, y)


def cell_polygons(grid):
    """Every cell as a box."""
    dx, dy = grid.x[1] - grid.x[0], grid.y[0] - grid.y[1]
    x, y = np.meshgrid(grid.x, grid.y)
    return shapely.box(x - dx / 2, y - dy / 2, x + dx / 2, y + dy / 2), dx * dy


def on_whole_map(cover, grid):
    """Shares on the whole grid."""
    out = np.zeros(grid.elevation.shape)
    out[cover.rows, cover.columns] = cover.share
    return out


def star(seed, centre, size, points):
    """A random polygon without crossings of its edges, with a hole in the middle."""
    rng = np.random.default_rng(seed)
    angle = np.sort(rng.uniform(0, 2 * np.pi, points))
    reach = rng.uniform(0.3, 1.0, points) * size
    ring = np.column_stack([centre[0] + reach * np.cos(angle), centre[1] + reach * np.sin(angle)])
    outer = shapely.make_valid(shapely.Polygon(ring))
    hole = [(centre[0] + 0.1 * size * np.cos(a), centre[1] + 0.1 * size * np.sin(a)) for a in np.linspace(0, 6, 7)]
    return shapely.difference(outer, shapely.Polygon(hole))


@example(141832, 95000.0, 45000.0, 39046.706337492615, 3)  # a piece that rounds onto the lower edge of the map
@given(st.integers(0, 2**31), st.floats(95e3, 135e3), st.floats(45e3, 80e3), st.floats(1.0, 40e3), st.integers(3, 60))
def test_cover_equals_intersections(seed, east, north, size, points):
    """Any polygon with a hole, inside, across the edge or outside: each cell's share is the area shapely cuts out."""
    grid = map_of(dx=1250.0)
    polygon = star(seed, (east, north), size, points)
    if polygon.geom_type not in {"Polygon", "MultiPolygon"} or polygon.is_empty:
        return
    cells, area = cell_polygons(grid)
    wanted = shapely.area(shapely.intersection(cells, polygon)) / area
    np.testing.assert_allclose(on_whole_map(coverage(polygon, grid), grid), wanted, atol=1e-9)


def test_cover_of_several_parts_and_of_the_whole_map():
    """Islands add up; a polygon larger than the map covers all of it; edges on the lines of the grid are exact."""
    grid = map_of()
    parts = shapely.MultiPolygon([shapely.box(101e3, 51e3, 103e3, 52e3), shapely.box(110e3, 60e3, 110.5e3, 60.5e3)])
    share = on_whole_map(coverage(parts, grid), grid)
    assert share.sum() == pytest.approx(2.25, abs=1e-12)
    assert set(np.unique(share)) == {0.0, 0.25, 1.0}
    np.testing.assert_array_equal(on_whole_map(coverage(shapely.box(0, 0, 1e6, 1e6), grid), grid), 1.0)
    around = shapely.box(0, 0, 1e6, 1e6) - shapely.box(99e3, 49e3, 131e3, 75e3)
    assert coverage(around, grid).share.sum() == 0.0


@pytest.mark.parametrize(
    ("shape", "message"),
    [
        (shapely.Polygon([(0, 0), (1, 1), (1, 0), (0, 1)]), "not valid .*Self-intersection"),
        (shapely.Polygon(), "without area"),
        (shapely.LineString([(0, 0), (1, 1)]), "a LineString has no area"),
    ],
)
def test_what_is_no_polygon(shape, message):
    """Refused with the reason."""
    with pytest.raises(OutOfRangeError, match=message):
        coverage(shape, map_of())


def test_rain_total_and_volume():
    """Two millimetres an hour for six hours on 3 km2: 12 mm, 36 000 m3."""
    grid = map_of()
    found = catchment_rain(shapely.box(102e3, 52e3, 105e3, 53e3), grid, np.full((24, 30), 2 / HOUR), 6 * HOUR)
    assert found.rate * HOUR == pytest.approx(2.0, rel=1e-12)
    assert found.total == pytest.approx(12.0, rel=1e-12)
    assert found.volume == pytest.approx(36000.0, rel=1e-12)
    assert found.area == 3e6
    assert found.covered_share == 1.0
    assert (found.snow_share, found.windward_share, found.notes) == (None, None, ())


def test_shares_of_snow_and_windward():
    """Rain grows eastward, snow lies in the east half: it has more than half of the water, half of the area."""
    grid = map_of()
    rate = np.tile(np.arange(30.0), (24, 1)) / HOUR
    snow = np.tile((np.arange(30) >= 15).astype(float), (24, 1))
    found = catchment_rain(
        shapely.box(100e3, 60e3, 130e3, 61e3), grid, rate, HOUR, snow_share=snow, windward=snow < 0.5
    )
    east, whole = sum(range(15, 30)), sum(range(30))
    assert found.snow_share == pytest.approx(east / whole, rel=1e-12)
    assert found.snow_area_share == pytest.approx(0.5, rel=1e-12)
    assert found.windward_share == pytest.approx(1 - east / whole, rel=1e-12)
    assert found.lowest == 0.0
    assert found.highest == 2000.0
    assert found.mean_elevation == pytest.approx(1000.0, rel=1e-9)


def test_catchments_that_share_ground_or_tile_it():
    """Overlapping ones are each whole; pieces that tile the map add up to its rain (nothing lost, nothing twice)."""
    grid = map_of()
    rate = np.random.default_rng(2).uniform(0, 5, (24, 30)) / HOUR
    half = shapely.box(100e3, 50e3, 118e3, 74e3), shapely.box(108e3, 50e3, 130e3, 74e3)
    assert all(catchment_rain(p, grid, rate, HOUR).covered_share == 1.0 for p in half)
    points = shapely.MultiPoint(np.random.default_rng(5).uniform((100e3, 50e3), (130e3, 74e3), (40, 2)))
    pieces = [
        p & shapely.box(100e3, 50e3, 130e3, 74e3)
        for p in shapely.voronoi_polygons(points, extend_to=shapely.box(90e3, 40e3, 140e3, 84e3)).geoms
    ]
    volume = sum(catchment_rain(p, grid, rate, HOUR).volume for p in pieces)
    assert volume == pytest.approx(rate.sum() * 1e6 * HOUR / 1000.0, rel=1e-10)


def test_tiny_catchment_has_the_rate_of_its_cell():
    """One square metre in a cell of a square kilometre."""
    grid = map_of()
    rate = np.random.default_rng(2).uniform(0, 5, (24, 30)) / HOUR
    found = catchment_rain(shapely.box(104.5e3, 54.5e3, 104.501e3, 54.501e3), grid, rate, HOUR)
    assert found.rate == pytest.approx(rate[24 - 5, 4], rel=1e-9)
    assert found.volume == pytest.approx(rate[24 - 5, 4] * HOUR / 1000.0, rel=1e-6)


def test_partly_or_wholly_off_the_map():
    """Values are for the part on it, with a note; off it there are none. Missing ground counts as off the map."""
    grid = map_of()
    rate = np.full((24, 30), 1 / HOUR)
    part = catchment_rain(shapely.box(95e3, 60e3, 105e3, 61e3), grid, rate, HOUR)
    assert part.covered_share == pytest.approx(0.5)
    assert part.volume == pytest.approx(5e6 * 1e-3)
    assert "Only 50.0 %" in part.notes[0]
    off = catchment_rain(shapely.box(0, 0, 1e3, 1e3), grid, rate, HOUR)
    assert (off.rate, off.total, off.volume, off.highest, off.covered_share) == (None, None, None, None, 0.0)
    assert "outside the map" in off.notes[0]
    holed = rate.copy()
    holed[:, 10:] = np.nan
    assert catchment_rain(shapely.box(105e3, 60e3, 115e3, 61e3), grid, holed, HOUR).covered_share == pytest.approx(0.5)


def test_no_rain_has_no_shares():
    """Zero, not a division by it."""
    grid = map_of()
    none = np.zeros((24, 30))
    found = catchment_rain(shapely.box(101e3, 60e3, 105e3, 61e3), grid, none, HOUR, snow_share=none, windward=none > 1)
    assert found.total == 0.0
    assert found.snow_share is None
    assert found.windward_share is None
    assert found.snow_area_share == 0.0


def test_turned_map_and_catchment():
    """Mirrored ground, rain and catchment give the same numbers."""
    grid = map_of()
    rate = np.random.default_rng(7).uniform(0, 5, (24, 30)) / HOUR
    polygon = star(1, (113e3, 61e3), 9e3, 17)
    mirrored = affinity.scale(polygon, xfact=-1.0, yfact=1.0, origin=(115e3, 62e3))
    a = catchment_rain(polygon, grid, rate, HOUR)
    b = catchment_rain(mirrored, grid, rate[:, ::-1], HOUR)
    assert b.volume == pytest.approx(a.volume, rel=1e-10)


def test_bands_add_up():
    """Area and water of the bands are those of the catchment; each band holds its heights only."""
    grid = map_of()
    rate = np.random.default_rng(7).uniform(0, 5, (24, 30)) / HOUR
    snow = np.clip((grid.elevation - 500.0) / 800.0, 0.0, 1.0)
    polygon = star(1, (113e3, 61e3), 9e3, 17)
    whole = catchment_rain(polygon, grid, rate, HOUR, snow_share=snow)
    bands = elevation_bands(polygon, grid, rate, snow, step=250.0)
    filled = bands.area > 0.0
    assert bands.area.sum() == pytest.approx(whole.area, rel=1e-10)
    assert (bands.area * bands.rate)[filled].sum() * HOUR / 1000.0 == pytest.approx(whole.volume, rel=1e-10)
    assert (bands.area * bands.snow_rate)[filled].sum() / (bands.area * bands.rate)[filled].sum() == pytest.approx(
        whole.snow_share
    )
    np.testing.assert_allclose(bands.snow_rate[bands.edge[1:] <= 500.0], 0.0)
    assert bands.edge[0] <= whole.lowest
    assert bands.edge[-1] > whole.highest
    assert elevation_bands(shapely.box(0, 0, 1, 1), grid, rate, snow) is None


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"duration": 0.0}, "duration"),
        ({"rate": np.zeros((3, 3))}, r"rate: shape \(3, 3\)"),
        ({"duration": 1e9}, "Give the hours"),
    ],
)
def test_bad_arguments(change, message):
    """Duration zero, an array of another grid."""
    arguments = {
        "polygon": shapely.box(101e3, 60e3, 105e3, 61e3),
        "grid": map_of(),
        "rate": np.zeros((24, 30)),
        "duration": HOUR,
    } | change
    with pytest.raises(OutOfRangeError, match=message):
        catchment_rain(**arguments)
