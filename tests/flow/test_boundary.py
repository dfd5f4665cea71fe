"""The lower boundary and how it is taken apart."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import OutOfRangeError
from orolift.flow.boundary import carried_share, crossing_boundary, split_boundary, start_level

GROUND = np.array([100.0, 600.0, 300.0, 2000.0, 900.0, 200.0, 400.0])


def test_it_follows_the_terrain_unless_told_otherwise():
    """Unblocked, broken through: the ground itself."""
    np.testing.assert_array_equal(crossing_boundary(GROUND), GROUND)


def test_blocked_air_upwind_and_cold_air_in_the_lee():
    """Upwind of the crest over the blocked layer, in the lee over the pool, never lower than the ground."""
    line = crossing_boundary(GROUND, blocked_top=1200.0, pool_top=500.0)
    np.testing.assert_array_equal(line, [1200.0, 1200.0, 1200.0, 2000.0, 900.0, 500.0, 500.0])
    assert float(start_level(GROUND, 1200.0)) == 1200.0
    assert float(start_level(GROUND)) == 100.0


def test_a_pool_above_the_crest_counts_as_the_crest():
    """Cold air cannot push the crossing air up in the lee."""
    line = crossing_boundary(GROUND, pool_top=2600.0)
    np.testing.assert_array_equal(line[4:], 2000.0)


def test_members_may_differ():
    """One terrain, two blocked tops."""
    line = crossing_boundary(GROUND, blocked_top=[0.0, 1500.0])
    np.testing.assert_array_equal(line[:, 0], [100.0, 1500.0])


@pytest.mark.parametrize(
    ("end", "body", "wave"),
    [
        pytest.param(0.0, [0, 0, 0, 0, 0], [0, 300, 500, 200, 0], id="ends as high as it starts"),
        pytest.param(-400.0, [0, 0, 0, 0, -400], [0, 300, 500, 200, 0], id="ends lower: the drop is carried"),
        pytest.param(100.0, [0, 100, 100, 100, 100], [0, 200, 400, 100, 0], id="ends higher: the step is carried"),
    ],
)
def test_split_by_hand(end, body, wave):
    """Small ranges: all of the equal-ended part makes waves."""
    apart = split_boundary([0.0, 300.0, 500.0, 200.0, end], 0.01, 20.0)
    np.testing.assert_allclose(apart.body, body)
    np.testing.assert_allclose(apart.wave, wave)
    assert float(apart.wave_share) == 1.0


def test_high_range_makes_waves_up_to_the_limit():
    """N h / U = 2.4: a third makes waves (0.8), the rest is carried."""
    apart = split_boundary([0.0, 2400.0, 0.0], 0.01, 10.0)
    assert float(apart.wave_share) == pytest.approx(1.0 / 3.0)
    np.testing.assert_allclose(apart.wave, [0.0, 800.0, 0.0])
    np.testing.assert_allclose(apart.body, [0.0, 1600.0, 0.0])


def test_a_body_is_full_below_and_fades_aloft():
    """Full to U/N = 1000 m, then linearly over 4 km, or over twice the drop if that is more."""
    shallow = split_boundary([0.0, 100.0, -500.0], 0.01, 10.0)
    np.testing.assert_allclose(carried_share(shallow, [0.0, 1000.0, 2000.0, 5000.0]), [1.0, 1.0, 0.75, 0.0])
    deep = split_boundary([0.0, 100.0, -3000.0], 0.01, 10.0)
    np.testing.assert_allclose(carried_share(deep, [1000.0, 4000.0, 7000.0]), [1.0, 0.5, 0.0])
    neutral = split_boundary([0.0, 100.0, -500.0], 0.0, 10.0)
    np.testing.assert_allclose(carried_share(neutral, [5000.0, 7000.0]), [1.0, 0.5])


terrain = st.lists(st.floats(0.0, 3000.0), min_size=4, max_size=12)


@settings(deadline=None)
@given(terrain, st.floats(0.0, 0.03), st.floats(1.0, 50.0))
def test_parts_add_up_and_waves_end_level(ground, n, wind):
    """Law: start + wave + body is the boundary; the wave part is 0 at both ends and within its limit."""
    apart = split_boundary(ground, n, wind)
    np.testing.assert_allclose(apart.start + apart.wave + apart.body, ground, atol=1e-9)
    assert apart.wave[0] == apart.wave[-1] == 0.0
    assert n * np.abs(apart.wave).max() / wind <= 0.8 + 1e-9


def test_a_calm_column_is_refused():
    """The split needs wind."""
    with pytest.raises(OutOfRangeError, match="wind: 1 of 1"):
        split_boundary([0.0, 100.0, 0.0], 0.01, 0.0)
