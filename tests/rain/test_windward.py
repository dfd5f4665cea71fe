"""Windward and lee by crests and by drawn divides."""

import numpy as np
import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st

from orolift.errors import OutOfRangeError, TerrainError
from orolift.rain.windward import crest_divide, divide_points, line_divide, windward_cells, windward_share
from orolift.terrain.grid import ElevationGrid

EAST = np.pi / 2


def square_map(ground, spacing=1e3, half=30e3):
    """A map from a function of x and y."""
    x = np.arange(-half, half + 1.0, spacing)
    return ElevationGrid(ground(*np.meshgrid(x, x[::-1])), x, x[::-1])


def across_and_along(grid, bearing):
    """The two directions, for what a test expects."""
    x, y = np.meshgrid(grid.x, grid.y)
    return x * np.cos(bearing) - y * np.sin(bearing), x * np.sin(bearing) + y * np.cos(bearing)


@given(st.floats(-np.pi, np.pi))
def test_straight_ridge_across_any_wind(bearing):
    """All cells upwind of the crest are windward, but for those within a cell of it; west of the crest or anywhere."""
    grid = square_map(lambda x, y: 1000.0 * np.exp(-(((x * np.sin(bearing) + y * np.cos(bearing) + 5e3) / 8e3) ** 2)))
    _, along = across_and_along(grid, bearing)
    found = windward_cells(grid, crest_divide(grid, bearing))
    clear = np.abs(along + 5e3) > 2e3
    np.testing.assert_array_equal(found[clear], along[clear] < -5e3)


def test_oblique_ridge_follows_its_crest():
    """A ridge turned by 30 degrees from across the wind: the divide runs along it, not across the wind."""
    grid = square_map(lambda x, y: 1000.0 * np.exp(-(((x + 0.5774 * y) / 6e3) ** 2)))
    x, y = np.meshgrid(grid.x, grid.y)
    found = windward_cells(grid, crest_divide(grid, EAST))
    clear = np.abs(x + 0.5774 * y) > 2.5e3
    np.testing.assert_array_equal(found[clear], (x + 0.5774 * y < 0.0)[clear])


def test_crest_across_a_gap_and_beside_the_sea():
    """Where a strip has only low ground the divide goes straight from one side to the other."""
    grid = square_map(lambda x, y: 1000.0 * np.exp(-((x / 6e3) ** 2)) * (np.abs(y) > 6e3) + 2.0 * (x > 20e3))
    points = divide_points(crest_divide(grid, EAST))
    np.testing.assert_allclose(points[:, 0], 0.0, atol=1e-6)


def test_windward_share_of_even_rain_is_that_of_the_area():
    """Half on a symmetric map; with rain on one side only all or nothing; none without rain."""
    grid = square_map(lambda x, _: 1000.0 * np.exp(-((x / 6e3) ** 2)))
    west = windward_cells(grid, crest_divide(grid, EAST))
    assert windward_share(np.ones(west.shape), west) == pytest.approx(0.5, abs=0.01)
    assert windward_share(np.where(west, 1.0, 0.0), west) == 1.0
    assert windward_share(np.where(west, np.nan, 2.0), west) == 0.0
    assert windward_share(np.zeros(west.shape), west) is None


@given(st.floats(-np.pi, np.pi), st.integers(0, 2**31))
def test_drawn_divide_against_polygons(bearing, seed):
    """The cells upwind of a winding line across the map, as shapely finds them in the polygon upwind of it."""
    rng = np.random.default_rng(seed)
    grid = square_map(lambda x, _: 0.0 * x)
    s, t = np.linspace(-60e3, 60e3, 25), rng.uniform(-15e3, 15e3, 25)
    s[1:-1] += rng.uniform(-8e3, 8e3, 23)  # bends back on itself across the wind
    c, n = np.cos(bearing), np.sin(bearing)
    line = np.column_stack([s * c + t * n, t * c - s * n])
    if not shapely.LineString(line).is_simple:
        return
    upwind = np.array([[60e3, -100e3], [-60e3, -100e3]])
    ring = np.vstack(
        [line, np.column_stack([upwind[:, 0] * c + upwind[:, 1] * n, upwind[:, 1] * c - upwind[:, 0] * n])]
    )
    polygon = shapely.Polygon(ring)
    x, y = np.meshgrid(grid.x, grid.y)
    wanted = shapely.contains_xy(polygon, x, y)
    near = shapely.distance(shapely.LineString(line), shapely.points(x, y)) < 1e3
    found = windward_cells(grid, line_divide([line], grid, bearing))
    np.testing.assert_array_equal(found[~near], wanted[~near])


def test_short_divide_is_carried_on_from_its_ends():
    """With a note that says on how much of the map."""
    grid = square_map(lambda x, _: 0.0 * x)
    divide = line_divide([np.array([[3e3, -15e3], [3e3, 15e3]])], grid, EAST)
    found = windward_cells(grid, divide)
    other = grid.x != 3e3
    np.testing.assert_array_equal(found[:, other], np.tile(grid.x < 3e3, (61, 1))[:, other])
    assert any(f"{share} % of its width" in divide.notes[0] for share in (50, 51, 52))


def test_what_gives_no_divide():
    """Flat ground, a line along the wind, a line elsewhere, degrees for radians."""
    flat = square_map(lambda x, _: 0.0 * x)
    with pytest.raises(TerrainError, match="the map is flat"):
        crest_divide(flat, EAST)
    with pytest.raises(TerrainError, match="does not cross the wind"):
        line_divide([np.array([[-50e3, 100.0], [50e3, 100.0]])], flat, EAST)
    with pytest.raises(TerrainError, match="does not cross the wind"):
        line_divide([np.array([[0.0, 1e6], [0.0, 2e6]])], flat, EAST)
    with pytest.raises(OutOfRangeError, match="radians, not degrees"):
        crest_divide(square_map(lambda x, _: x + 4e4), 235.0)
