"""Lines cut from a grid in memory."""

import numpy as np
import pytest

from orolift.errors import TerrainError
from orolift.terrain.grid import ElevationGrid
from orolift.terrain.grid_line import grid_line


def grid(ground, cell=1000.0, half=60.0e3):
    """A square grid about the origin with a ground given as a function of x and y."""
    x = np.arange(-half, half + 1.0, cell)
    y = x[::-1].copy()
    return ElevationGrid(ground(x[np.newaxis, :], y[:, np.newaxis]), x, y)


def test_a_plane_is_sampled_exactly_along_any_bearing():
    """Bilinear sampling is exact on a plane, and a swath about a line has the plane's height on the line."""
    plane = grid(lambda x, y: 1000.0 + 0.004 * x - 0.006 * y)
    for degrees in (0.0, 37.0, 90.0, 215.0):
        bearing = np.radians(degrees)
        line, start = grid_line(plane, 5e3, -2e3, bearing, upwind=30e3, downwind=20e3, swath=8e3, points=101)
        along = line.distance + start
        expected = 1000.0 + 0.004 * (5e3 + along * np.sin(bearing)) - 0.006 * (-2e3 + along * np.cos(bearing))
        np.testing.assert_allclose(line.elevation, expected, atol=1e-8)
        assert line.distance[0] == 0.0
        assert start == pytest.approx(-30e3)


def test_grid_north_turns_the_line():
    """With true north at 30 degrees on the grid, a true bearing of 60 degrees runs along the grid's east."""
    slope = grid(lambda x, y: 800.0 + 0.005 * x + 0.0 * y)
    line, _ = grid_line(
        slope, 0.0, 0.0, np.radians(60.0), upwind=20e3, downwind=20e3, swath=0.0, points=41, north=np.radians(30.0)
    )
    np.testing.assert_allclose(np.diff(line.elevation), 5.0)
    assert line.bearing == pytest.approx(np.radians(60.0))


def test_a_line_is_cut_where_the_grid_ends():
    """It keeps its spacing and says where the point lies."""
    slope = grid(lambda x, y: 500.0 + 0.005 * x + 0.0 * y)
    line, start = grid_line(slope, 0.0, 0.0, np.pi / 2, upwind=100e3, downwind=80e3, swath=0.0, points=181)
    assert line.distance[-1] == pytest.approx(120e3)
    assert start == pytest.approx(-60e3)


@pytest.mark.parametrize(
    ("ground", "message"),
    [(lambda x, y: 100.0 + 0.0 * x + 0.0 * y, "flat"), (lambda x, y: np.nan * x + y, "lie on the elevation raster")],
)
def test_ground_that_is_no_range_is_refused(ground, message):
    """With the reason."""
    with pytest.raises(TerrainError, match=message):
        grid_line(grid(ground), 0.0, 0.0, 1.0, upwind=40e3, downwind=40e3, swath=5e3)
