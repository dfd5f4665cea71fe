"""Scores against worked examples that others published."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.spread.verification import contingency, coverage, score, skill

# Ten days of maximum temperature, forecast and observed [degC], of the worked example of the WWRP/WGNE Joint Working
# Group on Forecast Verification Research, "Forecast verification: issues, methods and FAQ" (from memory):
# mean error 0.8, mean absolute error 2.8, root mean square error 3.2.
FORECAST = [5, 10, 9, 15, 22, 13, 17, 17, 19, 23]
OBSERVED = [-1, 8, 12, 13, 18, 10, 16, 19, 23, 24]

# Finley's tornado forecasts of 1884: 28 hits, 72 false alarms, 23 misses, 2680 rightly not forecast; scores as in
# Wilks (2011), chapter 8 (from memory).
FINLEY = [
    pytest.param("detected", 0.549, id="probability of detection, Wilks (2011)"),
    pytest.param("false_alarm_ratio", 0.720, id="false alarm ratio, Wilks (2011)"),
    pytest.param("threat_score", 0.228, id="threat score, Wilks (2011)"),
    pytest.param("heidke", 0.355, id="Heidke skill score, Wilks (2011)"),
]


def test_errors_of_the_worked_example():
    """One decimal is printed there."""
    found = score(FORECAST, OBSERVED)
    assert found.count == 10
    assert round(found.bias, 1) == 0.8
    assert round(found.mean_absolute_error, 1) == 2.8
    assert round(found.root_mean_square_error, 1) == 3.2


@pytest.fixture(scope="module")
def finley():
    """The table as series of events."""
    ours = np.concatenate([np.ones(28), np.ones(72), np.zeros(23), np.zeros(2680)])
    seen = np.concatenate([np.ones(28), np.zeros(72), np.ones(23), np.zeros(2680)])
    return contingency(ours, seen)


@pytest.mark.parametrize(("name", "expected"), FINLEY)
def test_scores_of_finley(finley, name, expected):
    """Three decimals are printed there."""
    assert (finley.hits, finley.false_alarms, finley.misses, finley.correct_rejections) == (28, 72, 23, 2680)
    assert round(getattr(finley, name), 3) == expected


def test_skill_has_its_fixed_points():
    """1 for a perfect estimate, 0 for one as good as the reference, negative for a worse one."""
    seen, other = np.array([1.0, 2.0, 3.0]), np.array([2.0, 3.0, 5.0])
    assert skill(seen, other, seen) == 1.0
    assert skill(other, other, seen) == 0.0
    assert skill(seen + 3.0, other, seen) < 0.0
    assert skill(seen, seen, seen) is None


@given(st.lists(st.tuples(st.floats(-50, 50), st.floats(-50, 50)), min_size=1, max_size=20))
@settings(max_examples=30, deadline=None)
def test_errors_keep_their_order(pairs):
    """|bias| <= mean absolute error <= root mean square error, whatever the numbers."""
    ours, seen = np.array(pairs).T
    found = score(ours, seen)
    assert abs(found.bias) <= found.mean_absolute_error + 1e-9
    assert found.mean_absolute_error <= found.root_mean_square_error + 1e-9


def test_a_normal_range_covers_what_it_says():
    """80 of 100 draws of a normal distribution lie within 1.2816 standard deviations; 1.5 % is four standard errors."""
    draws = np.random.default_rng(7).normal(size=12000)
    share, count = coverage(np.full(12000, -1.2816), np.full(12000, 1.2816), draws)
    assert count == 12000
    assert share == pytest.approx(0.8, abs=0.015)


def test_unknown_values_count_nowhere():
    """NaN on either side."""
    assert score([np.nan, 2.0], [1.0, np.nan]) is None
    assert score([np.nan, 2.0], [1.0, 1.0]).count == 1
    assert contingency([np.nan], [1.0]) is None
    assert coverage([np.nan], [1.0], [0.0]) is None
    assert contingency([0.0], [0.0]).detected is None
