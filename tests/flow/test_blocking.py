"""Dividing height, regimes, gaps: published and worked values, and laws."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import OutOfRangeError
from orolift.flow.blocking import (
    Regime,
    blocked_top_lott_miller_1997,
    counterflow_top,
    dividing_height,
    possible_regimes,
    regime,
)
from orolift.flow.gaps import gap_share, gap_share_from_pass, reach_along_crest

# height of the top of the column [m], N [s-1], wind below and above [m s-1], crest [m], dividing height [m]
SHEPPARD = [
    pytest.param(4000.0, 0.01, 10.0, 10.0, 2000.0, 1000.0, id="h - U/N, Hunt and Snyder 1980 JFM 96"),
    pytest.param(4000.0, 0.012, 15.0, 15.0, 3000.0, 1750.0, id="h - U/N, Hunt and Snyder 1980 JFM 96, second"),
    pytest.param(4000.0, 0.01, 5.0, 15.0, 2000.0, 1200.0, id="U = 5 + z/400, Snyder et al. 1985 integral by hand"),
]


@pytest.mark.parametrize(("top", "n", "below", "above", "crest", "expected"), SHEPPARD)
def test_dividing_height_of_worked_columns(top, n, below, above, crest, expected):
    """The integral solved by hand comes out: exact for uniform N and linear wind, so only rounding is left."""
    found = dividing_height([0.0, top], [n**2, n**2], [below, above], crest)
    assert float(found) == pytest.approx(expected, rel=1e-6)


def test_critical_value_shifts_it_as_stated():
    """A uniform column gives h - c U / N: 3000 - 1.5 x 15 / 0.012 = 1125 m."""
    found = dividing_height([0.0, 4e3], [1.44e-4] * 2, [15.0] * 2, 3000.0, critical_value=[0.75, 1.0, 1.5, 3.0])
    np.testing.assert_allclose(found, [2062.5, 1750.0, 1125.0, 0.0], rtol=1e-9)


def test_inversion_below_the_crest():
    """A neutral column with a 3 K jump at 1000 m under a 1500 m crest, U = 8 m/s, by hand.

    Energy lacking below the jump is g' (h - zi) = 9.80665 x 3 / 290 x 500 = 50.7 m2 s-2, more than
    32: air below the inversion is blocked, air above is not. atol 10 m: the jump is 20 m thick here.
    """
    jump = 9.80665 * 3.0 / 290.0
    z = [0.0, 989.0, 990.0, 1010.0, 1011.0, 3000.0]
    n2 = [0.0, 0.0, jump / 21.0, jump / 21.0, 0.0, 0.0]
    assert float(dividing_height(z, n2, [8.0] * 6, 1500.0)) == pytest.approx(1000.0, abs=10.0)
    assert float(dividing_height(z, n2, [10.1] * 6, 1500.0)) == 0.0


def test_lott_miller_worked_value():
    """Uniform column h - 0.5 U / N = 2375 m, by hand."""
    found = blocked_top_lott_miller_1997([0.0, 4e3], [1.44e-4] * 2, [15.0] * 2, 3000.0)
    assert float(found) == pytest.approx(2375.0, rel=1e-6)


def test_nothing_blocked_gives_the_base():
    """Fast or unstable air, or ground above the crest, gives the first height."""
    for n2, wind, crest in ((1e-4, 40.0, 2000.0), (-1e-4, 1.0, 2000.0), (1e-4, 1.0, 50.0)):
        assert float(dividing_height([100.0, 4e3], [n2] * 2, [wind] * 2, crest)) == 100.0


def test_calm_and_counterflow_reach_up_to_where_the_wind_turns():
    """The layer that moves away ends where the component changes sign; calm air counts."""
    assert float(counterflow_top([0.0, 1000.0, 3000.0], [-4.0, 4.0, 12.0], 2000.0)) == pytest.approx(500.0, abs=2.0)
    assert float(counterflow_top([0.0, 1000.0], [3.0, 4.0], 2000.0)) == 0.0
    assert float(counterflow_top([0.0, 1000.0], [0.0, 0.0], 2000.0)) == pytest.approx(2000.0, abs=2.0)


columns = st.lists(st.tuples(st.floats(-1e-5, 6e-4), st.floats(-10.0, 40.0)), min_size=5, max_size=5)
LEVELS = np.array([0.0, 400.0, 1100.0, 2100.0, 4000.0])


@settings(deadline=None, max_examples=200)
@given(columns, st.floats(200.0, 3500.0), st.floats(0.0, 5.0))
def test_less_wind_never_lowers_it(column, crest, less):
    """Law: a weaker wind lifts the dividing height or leaves it."""
    n2, wind = (np.array(part) for part in zip(*column, strict=True))
    strong = float(dividing_height(LEVELS, n2, wind, crest))
    assert float(dividing_height(LEVELS, n2, wind - less, crest)) >= strong - 1e-9


@settings(deadline=None, max_examples=200)
@given(columns, st.floats(200.0, 3500.0), st.integers(0, 4), st.floats(0.0, 5e-4))
def test_more_stability_never_lowers_it(column, crest, level, more):
    """Law: a stronger inversion at any level lifts the dividing height or leaves it."""
    n2, wind = (np.array(part) for part in zip(*column, strict=True))
    weak = float(dividing_height(LEVELS, n2, wind, crest))
    n2[level] += more
    assert float(dividing_height(LEVELS, n2, wind, crest)) >= weak - 1e-9


@settings(deadline=None, max_examples=100)
@given(columns, st.floats(200.0, 3500.0), st.floats(0.3, 3.0))
def test_it_lies_between_base_and_crest_and_falls_with_the_critical_value(column, crest, critical):
    """Law: bounded, and monotone in the critical value; members together equal members alone."""
    n2, wind = (np.array(part) for part in zip(*column, strict=True))
    both = dividing_height(LEVELS, np.stack([n2, n2]), wind, crest, critical_value=[critical, 1.1 * critical])
    assert 0.0 <= both[1] <= both[0] <= crest
    assert both[1] == dividing_height(LEVELS, n2, wind, crest, critical_value=1.1 * critical)


def test_regimes_and_their_uncertainty():
    """Published limits 0.85 (Huppert and Miles 1969) and 1.5 (Pierrehumbert and Wyman 1985), give or take 0.3."""
    assert [regime(x) for x in (0.0, 0.6, 0.9, 1.6, np.inf)] == [
        Regime.FLOWS_OVER,
        Regime.STEEP_WAVES,
        Regime.PARTLY_BLOCKED,
        Regime.BLOCKED,
        Regime.BLOCKED,
    ]
    assert possible_regimes(0.1) == (Regime.FLOWS_OVER,)
    assert possible_regimes(0.7) == (Regime.FLOWS_OVER, Regime.STEEP_WAVES, Regime.PARTLY_BLOCKED)
    assert possible_regimes(4.0) == (Regime.BLOCKED,)
    with pytest.raises(OutOfRangeError, match="nondimensional_height: 1 of 1"):
        regime(-0.1)


def test_gap_share_of_simple_crest_lines():
    """Areas by hand: a triangular notch to half height leaves a quarter, a wall nothing, a plain everything."""
    along = [0.0, 1e3, 2e3]
    assert float(gap_share(along, [2000.0, 1000.0, 2000.0], 0.0, 2000.0)) == pytest.approx(0.25)
    assert float(gap_share(along, [2000.0, 2000.0, 2000.0], 0.0, 1800.0)) == 0.0
    assert float(gap_share(along, [0.0, 0.0, 0.0], 0.0, 1800.0)) == 1.0
    assert float(gap_share(along, [500.0, 500.0, 500.0], 100.0, 100.0)) == 0.0


def test_pass_and_crest_line_agree():
    """A crest line that climbs evenly from pass to crest is what the pass alone assumes."""
    line = np.linspace(900.0, 2400.0, 500)
    tops = np.array([800.0, 1200.0, 2400.0, 2600.0])
    from_line = gap_share(np.linspace(0.0, 5e4, 500), line, 200.0, tops)
    np.testing.assert_allclose(gap_share_from_pass(900.0, 200.0, 2400.0, tops), from_line, atol=1e-3)


@settings(deadline=None)
@given(st.floats(0.0, 2500.0), st.floats(0.0, 2500.0), st.floats(0.0, 1000.0))
def test_higher_pass_never_opens_more(saddle, top, higher):
    """Law: share between 0 and 1, falling with the height of the pass."""
    low = float(gap_share_from_pass(saddle, 0.0, 2500.0, top))
    high = float(gap_share_from_pass(saddle + higher, 0.0, 2500.0, top))
    assert 0.0 <= high <= low + 1e-12 <= 1.0 + 1e-11


def test_reach_is_limited():
    """Half a deformation radius, at most 100 km, also without rotation."""
    assert reach_along_crest(80e3) == 40e3
    assert reach_along_crest(float("inf")) == 100e3
