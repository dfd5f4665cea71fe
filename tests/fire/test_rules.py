"""Thresholds: met or not at their edges, the wind they mean, chances, and what would turn them."""

from types import SimpleNamespace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import OutOfRangeError
from orolift.fire.movers import least_change
from orolift.fire.rules import Condition, Rule, judged, margins, rule_met
from orolift.fire.values import QUANTITIES
from orolift.fire.winds import WindMeant, checked_wind_meant, wind_as_meant
from orolift.fire.words import NAMES, named

DRY = Condition("relative_humidity", at_most=0.15)
MEANT = WindMeant(10.0, "sustained", 600.0)
WINDY = Condition(MEANT, at_least=11.0)
RULE = Rule("dry and windy", (DRY, WINDY))


def values(humidity, wind):
    """Of the two quantities of the rule."""
    return {"relative_humidity": humidity, MEANT: wind}


@pytest.mark.parametrize(
    ("humidity", "wind", "status"),
    [
        (0.15, 11.0, "met"),
        (np.nextafter(0.15, 1.0), 11.0, "not met"),
        (0.15, np.nextafter(11.0, 0.0), "not met"),
        (0.10, np.nan, "cannot be judged"),
        (0.30, np.nan, "not met"),
        (np.nan, 5.0, "not met"),
        (np.nan, 15.0, "cannot be judged"),
    ],
)
def test_the_limit_itself_meets_a_rule(humidity, wind, status):
    """All conditions count; what is not known matters only where the known does not decide."""
    assert judged(RULE, values(humidity, wind)).status == status


def test_only_the_strongest_winds():
    """The upper end of the range of winds is told apart."""
    found = judged(RULE, values(0.1, 9.0), windiest=values(0.1, 12.0))
    assert found.status == "met at the upper end of the wind"
    assert [one.met for one in found.conditions] == [True, False]
    assert judged(RULE, values(0.2, 9.0), windiest=values(0.2, 12.0)).status == "not met"


def test_margins_are_in_the_unit_of_the_quantity():
    """12 % against 15 % is met by 3 %; 8 m/s against 11 m/s is missed by 3 m/s."""
    dry, windy = judged(RULE, values(0.12, 8.0)).conditions
    assert dry.margin == pytest.approx(0.03)
    assert windy.margin == pytest.approx(-3.0)
    unknown = judged(RULE, values(0.12, np.nan)).conditions[1]
    assert (unknown.value, unknown.margin, unknown.met) == (None, None, None)


def test_chance_is_the_share_of_members_that_meet_all_conditions():
    """Two of four; one that misses a known limit counts, and where too many cannot be judged there is no chance."""
    members = values(np.array([0.1, 0.1, 0.2, 0.3]), np.array([12.0, 13.0, 14.0, 15.0]))
    found = judged(RULE, values(0.2, 13.0), members=members)
    assert found.chance == 0.5
    assert [one.chance for one in found.conditions] == [0.5, 1.0]
    members[MEANT] = np.array([12.0, np.nan, np.nan, 15.0])
    # the second meets the humidity and its wind is not known: 1 of 4 or 2 of 4, not 1 of 3
    assert judged(RULE, values(0.2, 13.0), members=members).chance is None
    members = values(np.array([0.1] * 11), np.array([12.0] * 5 + [1.0] * 5 + [np.nan]))
    assert judged(RULE, values(0.2, 13.0), members=members).chance == pytest.approx(0.5)
    members = values(np.full(3, 0.1), np.full(3, np.nan))
    assert judged(RULE, values(0.1, np.nan), members=members).chance is None


def test_duration_is_open_from_one_hour():
    """Three hours cannot be judged from one; not met now is not met for three."""
    long = Rule("long", (DRY,), hours=3)
    dry, damp = {"relative_humidity": 0.1}, {"relative_humidity": 0.5}
    assert judged(long, dry).lasts is None
    assert judged(long, dry, lasts=True).lasts is True
    assert judged(long, damp).lasts is False
    assert judged(Rule("now", (DRY,)), dry).lasts is True


def test_warmth_is_never_asked_for():
    """A cold dry night meets the rule as a hot day does."""
    for temperature in (263.15, 308.15):
        assert judged(RULE, {**values(0.1, 12.0), "temperature": temperature}).status == "met"


@settings(max_examples=40)
@given(st.floats(0, 1), st.floats(0, 40), st.floats(0, 0.5), st.floats(0, 20))
def test_drier_and_windier_never_ends_a_rule(humidity, wind, drier, more):
    """Monotone: at most for humidity, at least for wind."""
    before = rule_met(RULE, values(humidity, wind))[0]
    after = rule_met(RULE, values(max(humidity - drier, 0.0), wind + more))[0]
    assert after >= before


def site(mean=10.0, high=13.0, gusts=(14.0, 18.0)):
    """Winds of a site."""
    return SimpleNamespace(wind=np.float64(mean), wind_high=high, gust_low=gusts[0], gust_high=gusts[1])


def test_wind_by_hand():
    """Logarithmic law over 0.03 m: at 6.1 m ln(203.3) / ln(333.3) = 0.9149 of that at 10 m."""
    twenty_feet = WindMeant(6.1, "sustained", 600.0)
    assert wind_as_meant(site(), MEANT, 0.03) == 10.0
    np.testing.assert_allclose(wind_as_meant(site(), twenty_feet, 0.03), 9.149, atol=1e-3)
    np.testing.assert_allclose(wind_as_meant(site(), twenty_feet, 0.03, end="upper"), 13.0 * 0.9149, atol=2e-3)
    gust = WindMeant(10.0, "gust", 3.0)
    assert wind_as_meant(site(), gust, 0.03) == 16.0
    assert wind_as_meant(site(), gust, 0.03, end="upper") == 18.0
    np.testing.assert_allclose(wind_as_meant(site(), WindMeant(6.1, "gust", 3.0), 0.03), 16.0 - 0.851, atol=1e-3)


@settings(max_examples=30)
@given(st.floats(0, 40), st.floats(2, 50), st.floats(2, 50), st.floats(1e-4, 1.0))
def test_wind_grows_with_height(mean, low, high, roughness):
    """And a gust is never weaker than the sustained wind."""
    low, high = sorted((low, high))
    here = site(mean, mean * 1.2, (mean * 1.3, mean * 1.8))
    kinds = {"sustained": 600.0, "gust": 3.0}
    lower, higher = (
        {k: wind_as_meant(here, WindMeant(z, k, t), roughness) for k, t in kinds.items()} for z in (low, high)
    )
    assert all(higher[kind] >= lower[kind] - 1e-9 for kind in kinds)
    assert lower["gust"] >= lower["sustained"]


@pytest.mark.parametrize(
    ("meant", "message"),
    [
        (WindMeant(0.5, "sustained", 600.0), "height: .* outside 2 to 50 m"),
        (WindMeant(10.0, "sustained", 3.0), "averaging: .* 60 to 3600 s .* sustained wind"),
        (WindMeant(10.0, "gust", 600.0), "averaging: .* 1 to 10 s .* gust wind"),
        (WindMeant(10.0, "squall", 3.0), "kind: 'squall' is neither"),
    ],
)
def test_a_wind_nobody_means_is_refused(meant, message):
    """Each with its range."""
    with pytest.raises(OutOfRangeError, match=message):
        checked_wind_meant(meant)


def test_least_change_by_hand():
    """Nearest of two turns; none where nothing turns or nothing is known."""
    amounts = np.arange(-4.0, 5.0)
    assert least_change(amounts, amounts - 2.5) == 2.5
    assert least_change(amounts, np.abs(amounts + 0.5) - 2.0) == 1.5
    assert least_change(amounts, np.full(9, 1.0)) is None
    assert least_change(amounts, np.full(9, np.nan)) is None


def test_every_quantity_has_a_name():
    """Words, measure, digits."""
    assert set(NAMES) == set(QUANTITIES)
    assert named(WindMeant(10.0, "sustained", 120.0)).words == "sustained wind at 10 m, mean of 2 min"


def test_margin_has_the_sign_of_meeting():
    """For both kinds of limits, of any shape."""
    np.testing.assert_allclose(margins(DRY, [[0.1, 0.2]]), [[0.05, -0.05]])
    np.testing.assert_allclose(margins(WINDY, [12.0, 9.0]), [1.0, -2.0])
