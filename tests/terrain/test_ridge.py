"""Hand-entered ridges become transects."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import OutOfRangeError, TerrainError
from orolift.terrain import ridge_transect, transect_elevation

RIDGE = ([0.0, 25e3, 60e3], [40.0, 1850.0, 210.0])


def test_spacing_is_uniform_and_about_512_points():
    ridge = ridge_transect(*RIDGE)
    assert 460 <= ridge.distance.size <= 563
    np.testing.assert_allclose(np.diff(ridge.distance), ridge.distance[1], rtol=1e-9)
    assert ridge.distance[0] == 0.0
    assert ridge.distance[-1] == 60e3


def test_ground_lies_on_straight_lines_between_the_points():
    ridge = ridge_transect(*RIDGE)
    # by hand: 40 + (1850 - 40) / 2 half way up, 1850 - 1640 / 2 half way down
    np.testing.assert_allclose(transect_elevation(ridge, [12.5e3, 42.5e3]), [945.0, 1030.0], atol=0.01)


@settings(deadline=None, max_examples=60)
@given(
    crest=st.floats(0.02, 0.98),
    start=st.floats(-3e5, 3e5),
    length=st.floats(5e3, 5e5),
    height=st.floats(300.0, 4000.0),
)
def test_crest_height_and_both_ends_are_kept_exactly(crest, start, length, height):
    ridge = ridge_transect([start, start + crest * length, start + length], [10.0, height, 120.0])
    assert ridge.elevation.max() == pytest.approx(height, abs=1e-9)
    assert ridge.elevation[0] == 10.0
    assert ridge.elevation[-1] == 120.0
    assert ridge.origin == start
    spacing = ridge.distance[1]
    # moved by a quarter of the spacing or less, as documented
    assert abs(ridge.distance[np.argmax(ridge.elevation)] - crest * length) <= 0.251 * spacing


def test_wanted_spacing_and_bearing_are_used():
    ridge = ridge_transect(*RIDGE, spacing=500.0, bearing=1.0)
    assert ridge.distance[1] == pytest.approx(500.0, rel=0.11)
    assert ridge.bearing == 1.0


def test_says_how_the_ground_between_points_was_made():
    assert "straight lines between 3 points" in ridge_transect(*RIDGE).notes[0]


def test_crest_beside_a_neighbour_or_an_end_keeps_its_height():
    assert ridge_transect([0.0, 30e3, 30.0001e3, 60e3], [0.0, 1000.0, 999.0, 0.0]).elevation.max() == 1000.0
    beside_the_end = ridge_transect([0.0, 10.0, 60e3], [0.0, 1000.0, 0.0]).elevation
    assert (beside_the_end[0], beside_the_end[1]) == (0.0, 1000.0)


@pytest.mark.parametrize(
    ("distance", "elevation", "error", "message"),
    [
        pytest.param([0, 1e4], [0, 900], TerrainError, "2 distances and 2 elev.*at least 3 points", id="two points"),
        pytest.param([0, 1e4, 2e4], [0, 900], TerrainError, "3 distances and 2 elevations", id="unequal"),
        pytest.param([0, 2e4, 2e4, 3e4], [0, 9, 900, 0], TerrainError, "point 3 at 20 km follows 20 km", id="twice"),
        pytest.param([0, 1e4, 2e4], [5, 34, 6], TerrainError, "flat: 29 m.*at least 30 m", id="flat"),
        pytest.param([0, 1.2e6, 2e6], [5, np.nan, 6], OutOfRangeError, r"elevation: 1 of 3.*index \(1,\)", id="nan"),
        pytest.param([0, 1e4, 2e4], [5, 9800, 6], OutOfRangeError, "-430 to 9000 m.*feet", id="feet"),
        pytest.param([0, 1e4, np.inf], [5, 800, 6], OutOfRangeError, "distance: 1 of 3", id="infinite"),
        pytest.param([-1.9e6, 1e4, 1.9e6], [5, 800, 6], TerrainError, "3800 km long.*metres rather than", id="long"),
    ],
)
def test_refuses_what_is_no_ridge_and_says_why(distance, elevation, error, message):
    with pytest.raises(error, match=message):
        ridge_transect(distance, elevation)


def test_relief_of_exactly_thirty_metres_is_enough():
    assert ridge_transect([0, 1e4, 2e4], [5, 35, 6]).elevation.max() == 35.0


def test_refuses_a_spacing_as_long_as_the_ridge():
    with pytest.raises(OutOfRangeError, match=r"spacing.*512 points"):
        ridge_transect(*RIDGE, spacing=60e3)


def test_ground_beyond_the_ends_is_refused():
    with pytest.raises(OutOfRangeError, match="lengthen the transect"):
        transect_elevation(ridge_transect(*RIDGE), 60.1e3)
