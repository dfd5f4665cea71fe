"""How many members agree on a direction: counted by hand."""

import math

import numpy as np
import pytest

from orolift.spread.agreement import agreeing, reach_of, shares_by_direction
from orolift.spread.bearings import Direction, bearings_of
from orolift.spread.site_state import SiteMembers, SiteState

TEN = math.radians(10.0)
NAN = np.nan


def states(*rows, name="warming"):
    """A state for each row of members."""
    return [
        SiteState("crossing", members=SiteMembers({}, {name: np.array(row, dtype=float)}, np.ones(len(row))))
        for row in rows
    ]


def share(found, chosen, *, counts=None, step=TEN, **more):
    wind_from = np.arange(len(found)) * step
    counts = [True] * len(found) if counts is None else counts
    return agreeing(found, counts, wind_from, name="warming", chosen=chosen, reach=reach_of(step), **more)


# four members; the warmest of each: direction 0, 1, 2, 3 of directions ten degrees apart, then one cold one
FOUR = states([4, 1, 0, 0], [2, 3, 1, 1], [1, 2, 5, 2], [0, 0, 2, 3], [-1, -1, -1, -1])


@pytest.mark.parametrize(("chosen", "expected"), [(0, 0.5), (1, 0.75), (2, 0.75), (3, 0.5), (4, 0.25)])
def test_neighbours_ten_degrees_away_agree(chosen, expected):
    """Members 0 and 1 agree on the first direction: their own are it and the one beside it."""
    assert share(FOUR, chosen) == expected


@pytest.mark.parametrize(("chosen", "expected"), [(0, 0.25), (1, 0.25), (4, 0.0)])
def test_directions_far_apart_have_no_neighbours(chosen, expected):
    assert share(FOUR, chosen, step=math.radians(45.0)) == expected


def test_north_is_beside_350_degrees():
    """The circle is closed."""
    rows = [[9.0] if i == 35 else [0.0] for i in range(36)]
    assert share(states(*rows), 0) == 1.0
    assert share(states(*rows), 1) == 0.0


def test_the_lowest_value_is_looked_for_with_the_sign_turned():
    """In all members the last direction is the lowest."""
    assert share(FOUR, 4, sign=-1.0) == 1.0
    assert share(FOUR, 0, sign=-1.0) == 0.0


def test_oblique_directions_and_members_without_air_do_not_count():
    """Without the third direction member 2 is warmest in the fourth; members that cross nowhere are nobody's vote."""
    assert share(FOUR, 1, counts=[True, True, False, True, True]) == 0.5
    assert share(states([4, NAN, NAN], [1, NAN, 2]), 0, step=1.0) == 0.5
    assert share(states([NAN, NAN]), 0) is None
    assert share([SiteState("no crossing")], 0) is None
    assert share(FOUR, None) is None


def test_members_without_any_rain_have_no_wettest_direction():
    """Of the four only two reach 4; they are warmest in the first and the third direction."""
    assert share(FOUR, 0, least=4.0, step=1.0) == 0.5


def test_two_directions_alike_are_both_the_largest():
    """A symmetric ridge has its largest value twice: neither is wrong by the rounding of a member."""
    assert share(states([3.0], [1.0], [3.0 + 1e-6]), 0, step=1.0) == 1.0


def test_sites_without_members_have_no_agreement():
    found = [Direction(0.0, (SiteState("crossing", warming=1.0),))]
    assert bearings_of(found, ["Tarn"], step=1.0, given=0.0, planned=1).sites[0].agreement is None


def test_shares_of_all_directions_add_up():
    """Each of the four members votes once, in a direction of its own; the fourth left out gives its vote to the third."""
    np.testing.assert_allclose(shares_by_direction(FOUR, [True] * 5, "warming"), [0.25, 0.25, 0.25, 0.25, 0.0])
    found = shares_by_direction(FOUR, [True, True, True, False, True], "warming")
    np.testing.assert_allclose(found, [0.25, 0.25, 0.5, NAN, 0.0])
    assert np.isnan(shares_by_direction([SiteState("no crossing")], [True], "warming")).all()
