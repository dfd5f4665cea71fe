"""One layer over a ridge: worked tables and laws."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import OutOfRangeError
from orolift.flow.hydraulics import (
    LayerRegime,
    blocking_ratio,
    critical_crest,
    hysteresis_crest,
    layer_flow,
    lee_wind_bound,
    reduced_gravity,
)


def test_critical_crest():
    """Houghton and Kasahara 1968: worked by hand to five digits."""
    ratio = [0.1, 0.2, 0.3, 0.5, 0.7, 0.9, 1.2, 1.5, 2.0, 2.5]
    worked = [0.68183, 0.50701, 0.37279, 0.18006, 0.06244, 0.00675, 0.02614, 0.15944, 0.61890, 1.36198]
    np.testing.assert_allclose(critical_crest(ratio), worked, atol=1e-5)


def test_complete_blocking():
    """Long 1954, Baines 1995: worked by hand to five digits."""
    np.testing.assert_allclose(blocking_ratio([1.2, 1.5, 2.0, 3.0]), [0.19149, 0.45644, 0.86603, 1.63299], atol=1e-5)


def test_hysteresis():
    """Baines 1995, with the + 1: worked by hand to five digits."""
    np.testing.assert_allclose(hysteresis_crest([1.2, 1.5, 2.0, 2.5]), [0.02229, 0.11275, 0.34656, 0.63910], atol=1e-5)


@pytest.mark.parametrize("ratio", [1.2, 1.5, 2.0, 2.5])
def test_hysteresis_limit_is_a_standing_bore(ratio):
    """Solved apart: a bore that stands still upwind of a critical crest (s = 0 in the bore conditions)."""
    depth = 0.5 * (np.sqrt(1.0 + 8.0 * ratio**2) - 1.0)
    speed = ratio / depth
    crest = 0.5 * speed**2 + depth - 1.5 * ratio ** (2.0 / 3.0)
    assert float(hysteresis_crest(ratio)) == pytest.approx(crest, rel=1e-12)


# layer ratio, crest; upwind depth and speed, lee speed over U, lee ratio, speed of the lee jump: solved by hand
STATES = [
    pytest.param(0.5, 0.3, 1.09323, 0.40878, 2.5767, 2.187, -0.0406, id="F = 0.5, M = 0.3"),
    pytest.param(0.5, 0.5, 1.21393, 0.29572, 2.8346, 2.816, -0.0093, id="F = 0.5, M = 0.5"),
]


@pytest.mark.parametrize(("ratio", "crest", "depth", "speed", "lee", "lee_ratio", "jump"), STATES)
def test_partly_blocked_states(ratio, crest, depth, speed, lee, lee_ratio, jump):
    """Houghton and Kasahara 1968 conditions solved by hand, 1e-3."""
    flow = layer_flow(ratio, crest)
    assert flow.regime is LayerRegime.JUMP_ON_SLOPE
    assert flow.upwind_depth == pytest.approx(depth, rel=1e-3)
    assert flow.upwind_speed == pytest.approx(speed, rel=1e-3)
    assert flow.lee_speed == pytest.approx(lee, rel=1e-3)
    assert flow.lee_ratio == pytest.approx(lee_ratio, rel=1e-3)
    assert flow.jump_speed == pytest.approx(jump, abs=1e-3)


def test_regimes():
    """Low crest: nothing; high crest: blocked; fast and high: the jump runs downstream; between: either."""
    assert layer_flow(0.3, 0.1).regime is LayerRegime.SLOW_EVERYWHERE
    assert layer_flow(2.0, 0.2).regime is LayerRegime.FAST_EVERYWHERE
    assert layer_flow(0.3, 1.5).regime is LayerRegime.BLOCKED
    assert layer_flow(0.9, 0.4).regime is LayerRegime.JUMP_DOWNSTREAM
    assert not layer_flow(2.0, 0.3).either
    assert layer_flow(2.0, 0.5).either


@settings(deadline=None, max_examples=60)
@given(st.floats(0.05, 3.0), st.floats(0.01, 3.0))
def test_energy_and_mass_are_kept_over_the_ridge(ratio, crest):
    """Law: flux and head at the lee foot are those upwind of the ridge; the lee wind is below its bound."""
    flow = layer_flow(ratio, crest)
    if flow.regime in (LayerRegime.JUMP_ON_SLOPE, LayerRegime.JUMP_DOWNSTREAM):
        speed = flow.lee_speed * ratio
        depth = flow.upwind_speed * flow.upwind_depth / speed
        head = 0.5 * flow.upwind_speed**2 + flow.upwind_depth
        assert 0.5 * speed**2 + depth == pytest.approx(head, rel=1e-6)
        assert flow.lee_ratio >= 1.0 - 1e-6
        assert speed <= float(lee_wind_bound(flow.upwind_speed, 1.0, flow.upwind_depth)) + 1e-9
    assert np.isnan(flow.jump_speed) == (
        flow.regime in (LayerRegime.SLOW_EVERYWHERE, LayerRegime.FAST_EVERYWHERE, LayerRegime.BLOCKED)
    )


@settings(deadline=None, max_examples=40)
@given(st.floats(0.1, 0.95))
def test_lee_wind_is_continuous_where_blocking_ends(ratio):
    """Limit: just above the critical crest the layer upwind is hardly changed."""
    flow = layer_flow(ratio, float(critical_crest(ratio)) + 1e-6 + 0.001)
    assert flow.upwind_depth == pytest.approx(1.0, abs=0.02)


def test_reduced_gravity_and_bad_input():
    """5 K on 288 K: 9.80665 x 5 / 288. Celsius and negative ratios are refused."""
    assert float(reduced_gravity(5.0, 288.0)) == pytest.approx(0.170254, rel=1e-5)
    with pytest.raises(OutOfRangeError, match="potential_temperature"):
        reduced_gravity(5.0, 15.0)
    with pytest.raises(OutOfRangeError, match="layer_ratio"):
        layer_flow(-0.5, 0.3)
