"""Ranges, chances, ranks."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from orolift.spread.ranges import chance_of, noise, range_of, rank_correlation, ranks


def test_range_leaves_a_tenth_on_either_side():
    """Of a thousand normal numbers, near the published quantile 1.2816; members without a value do not count."""
    values = stats.norm.ppf((np.arange(1000) + 0.5) / 1000.0)
    assert range_of(np.append(values, [np.nan] * 50)) == pytest.approx((-1.2816, 1.2816), abs=0.01)
    assert range_of(np.array([1.0, 2.0, np.nan, np.nan, 3.0, 4.0])) is None


def test_chance_is_the_mean_over_members_that_count():
    """Zeros, ones and chances alike."""
    assert chance_of(np.array([1.0, 0.0, np.nan, 1.0, 0.0])) == 0.5
    assert chance_of(np.array([0.3, 0.9])) == pytest.approx(0.6)
    assert chance_of(np.array([np.nan])) is None


@settings(max_examples=40)
@given(st.lists(st.tuples(st.integers(0, 6), st.floats(-5, 5)), min_size=4, max_size=30))
def test_ranks_and_their_correlation_are_those_of_scipy(pairs):
    """With ties; series that do not vary have no correlation."""
    one, other = (np.array(column, dtype=float) for column in zip(*pairs, strict=True))
    np.testing.assert_allclose(ranks(one), stats.rankdata(one))
    if np.ptp(one) == 0.0 or np.ptp(other) == 0.0:
        assert rank_correlation(one, other) == 0.0
    else:
        assert rank_correlation(one, other) == pytest.approx(stats.spearmanr(one, other).statistic, abs=1e-9)


def test_noise_is_what_chance_exceeds_once_in_twenty_times():
    """Against the table of critical values of Spearman's coefficient, 5 %, two sides: 0.362 for 30 pairs (Siegel and Castellan 1988, table Q, from memory)."""
    assert noise(30) == pytest.approx(0.362, abs=0.02)
