"""Ground between the cells of a grid."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.terrain import ElevationGrid, grid_elevation
from orolift.terrain.grid import bilinear

X, Y = np.linspace(1000.0, 5000.0, 9), np.linspace(9000.0, 6000.0, 7)
PLANE = ElevationGrid(2.0 + 0.1 * X[None, :] - 0.05 * Y[:, None], X, Y)


@settings(deadline=None, max_examples=50)
@given(x=st.floats(1000.0, 5000.0), y=st.floats(6000.0, 9000.0))
def test_a_plane_is_exact_everywhere_between_the_centres(x, y):
    assert grid_elevation(PLANE, x, y) == pytest.approx(2.0 + 0.1 * x - 0.05 * y, abs=1e-9)


def test_outermost_values_hold_to_the_edge_of_the_cells_and_not_beyond():
    np.testing.assert_allclose(grid_elevation(PLANE, [800.0, 740.0], [9000.0, 9000.0]), [PLANE.elevation[0, 0], np.nan])


def test_missing_cells_count_only_where_they_carry_most_of_the_weight():
    values = np.array([[10.0, np.nan], [10.0, np.nan]])
    np.testing.assert_allclose(bilinear(values, [0.0, 0.0], [0.4, 0.6]), [10.0, np.nan])


def test_keeps_the_broadcast_shape():
    assert grid_elevation(PLANE, X[None, :], Y[:, None]).shape == (7, 9)
