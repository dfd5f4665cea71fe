"""Chances of rain on snow cover and of freezing rain: by hand, and what the flags say of them."""

from types import SimpleNamespace

import numpy as np

from orolift.rain.winter import _likely
from orolift.spread.winter_chances import winter_chances


def members(rain_up_to, freezing, crosses=None):
    """As much of a spread as is asked."""
    values = {"rain_up_to": np.array(rain_up_to), "freezing_rain": np.array(freezing)}
    across = np.ones(len(rain_up_to), bool) if crosses is None else np.array(crosses)
    return SimpleNamespace(values=values, crosses=across)


def test_shares_of_the_members_that_cross():
    """Two of four cross with rain up to the snow; the fifth does not cross and has no values."""
    spread = members([900.0, 1500.0, np.nan, 1200.0, np.nan], [0.0, 1.0, 0.0, 0.0, np.nan], [True] * 4 + [False])
    assert winter_chances(spread, snow_cover_above=1200.0) == {"rain_on_snow": 0.5, "freezing_rain": 0.25}
    assert winter_chances(spread) == {"freezing_rain": 0.25}


def test_rain_beside_the_line_counts():
    """The map of the first member reaches the snow, its line does not."""
    spread = members([900.0, 1500.0, np.nan, np.nan], [0.0] * 4)
    mapped = SimpleNamespace(values={"rain_up_to": np.array([1300.0, np.nan, np.nan, 100.0])})
    assert winter_chances(spread, snow_cover_above=1200.0, mapped=mapped)["rain_on_snow"] == 0.5
    assert winter_chances(spread, snow_cover_above=1200.0)["rain_on_snow"] == 0.25


def test_nothing_is_said_without_members():
    assert winter_chances(None, snow_cover_above=500.0) == {}
    assert winter_chances(members([np.nan], [np.nan], [False]), snow_cover_above=500.0) == {}
    assert _likely("Rain freezes", {}, "freezing_rain") == _likely("Rain freezes", None, "freezing_rain") == ""
    assert _likely("Rain freezes", {"freezing_rain": 0.624}, "freezing_rain").endswith("in 62 % of the members.")
