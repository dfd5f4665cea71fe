"""Base, crest, lee foot and half width of transects whose shape is known."""

import numpy as np
import pytest

from orolift.errors import OutOfRangeError, TerrainError
from orolift.terrain import Transect, features, ridge_transect


def line_of(elevation, spacing=1000.0, **more):
    """Transect with the given ground on a uniform spacing."""
    ground = np.asarray(elevation, dtype=float)
    return Transect(np.arange(ground.size) * spacing, ground, **more)


def test_triangle_has_half_of_its_half_base_as_half_width():
    found = features(ridge_transect([0.0, 40e3, 80e3], [100.0, 1500.0, 100.0]))
    assert (found.base, found.crest, found.lee_foot) == (100.0, 1500.0, 100.0)
    assert (found.base_distance, found.lee_foot_distance) == (0.0, 80e3)
    # exact on straight lines; the crest may be moved by 1 % of a 160 m spacing
    assert found.crest_distance == pytest.approx(40e3, abs=2.0)
    assert found.half_width == pytest.approx(20e3, abs=2.0)


def test_each_side_is_measured_from_its_own_foot():
    found = features(ridge_transect([0.0, 25e3, 60e3], [40.0, 1850.0, 210.0]))
    # by hand: 12.5 km up, 17.5 km down
    assert found.half_width == pytest.approx(15e3, abs=2.0)


@pytest.mark.parametrize("half_width", [5e3, 20e3])
def test_bell_has_its_own_half_width(half_width):
    """h / (1 + x^2 / a^2) is at half its height at x = a.

    rtol: the line ends at 40 a, where the bell still stands 6e-4 h above its
    limit, which moves the half-height point outward by 6e-4 of a.
    """
    x = np.linspace(-40 * half_width, 40 * half_width, 8001)
    found = features(Transect(x - x[0], 1000.0 / (1.0 + (x / half_width) ** 2)))
    assert found.half_width == pytest.approx(half_width, rel=1e-3)
    assert found.crest_distance == pytest.approx(40 * half_width)


def test_base_is_the_lowest_ground_upwind_and_not_the_end():
    found = features(line_of([300, 50, 80, 900, 20, 400]))
    assert (found.base, found.base_distance) == (50.0, 1000.0)
    assert (found.lee_foot, found.lee_foot_distance) == (20.0, 4000.0)


def test_of_equally_low_ground_the_nearest_to_the_crest_counts():
    found = features(line_of([0, 0, 0, 500, 1000, 300.4, 700, 300.0, 300.0]))
    assert (found.base, found.base_distance) == (0.0, 2000.0)
    assert (found.lee_foot, found.lee_foot_distance) == (300.4, 5000.0)


def test_ground_more_than_a_metre_lower_counts_however_far():
    found = features(line_of([0, 1000, 301.1, 700, 300.0]))
    assert found.lee_foot_distance == 4000.0


def test_first_of_equal_crests_counts():
    assert features(line_of([0, 800, 100, 800, 0])).crest_distance == 1000.0


def test_site_between_two_ranges_takes_the_crest_before_it():
    ground = line_of([0, 600, 100, 1500, 50])
    found = features(ground, site_distance=2000.0)
    assert (found.crest, found.crest_distance) == (600.0, 1000.0)
    assert features(ground).crest == 1500.0
    assert features(ground, site_distance=4000.0).crest == 1500.0


def test_site_between_two_points_sees_only_the_ground_before_it():
    ground = line_of([0, 600, 100, 1500, 50])
    assert features(ground, site_distance=2200.0).crest == 600.0


def test_site_on_the_way_up_takes_the_crest_of_the_line():
    ground = line_of([0, 300, 600, 590, 1500, 50])
    assert features(ground, site_distance=1000.0).crest == 1500.0
    # 10 m below a shoulder with higher ground to come
    assert features(ground, site_distance=3000.0).crest == 1500.0


def test_site_outside_the_line_is_refused():
    with pytest.raises(OutOfRangeError, match=r"site_distance.*lengthen the transect"):
        features(line_of([0, 800, 0]), site_distance=2001.0)


@pytest.mark.parametrize(
    ("ground", "message"),
    [
        pytest.param([900, 500, 100], "900 m.*upwind end.*at 7.0 km.*upwind_km", id="upwind"),
        pytest.param([100, 500, 900], "900 m.*downwind end.*at 9.0 km.*downwind_km", id="downwind"),
        pytest.param([100, 900, 900], "does not fall downwind of the crest.*at 8.0 km", id="plateau"),
    ],
)
def test_crest_at_an_end_is_refused_with_advice(ground, message):
    with pytest.raises(TerrainError, match=message):
        features(line_of(ground, origin=7000.0))
