"""Ranges and chances of sites in many crossings: units, what counts, names of columns."""

import numpy as np
import pytest

from orolift.sources.state_ranges import RANGED, members_block, range_columns, state_ranges
from orolift.spread.site_state import KEPT, SiteMembers, SiteState
from orolift.spread.spread import Drawn
from orolift.spread.state_ranges import lost_members
from orolift.spread.uncertainty import Uncertainty

TENS = np.arange(11.0)


def members(**arrays):
    """Eleven members, of which the last two do not cross."""
    crosses = np.where(TENS > 8.0, 0.0, 1.0)
    every = {name: np.where(crosses > 0.0, 0.0, np.nan) for name in KEPT} | arrays
    return SiteMembers(every, {name: value + 0.0 for name, value in every.items()}, crosses)


def test_ranges_are_in_the_unit_of_their_key():
    """10 and 90 % of eleven numbers from 0 to 10 are 1 and 9, in kelvin, shares, kg/(m2 s)."""
    found = state_ranges(
        [
            SiteState(
                "crossing",
                members=members(
                    temperature=273.15 + TENS, relative_humidity=0.01 * TENS, warming=TENS, rain=TENS / 3600.0
                ),
            )
        ]
    )
    for key in ("temperature_c", "relative_humidity_percent", "warming_c", "rain_mm_per_h"):
        assert found.range[key][0] == pytest.approx((1.0, 9.0))
        assert found.input_range[key][0] == pytest.approx((1.0, 9.0))
    assert found.chance["crosses"] == [pytest.approx(9 / 11)]
    assert found.chance["rain"] == [pytest.approx(10 / 11)]  # 0.1 mm/h or more: all but the first


def test_without_an_answer_only_the_chance_of_crossing_is_known():
    still = SiteState("no crossing", "calm", members=SiteMembers({}, {}, np.array([1.0, 0.0, 0.0, np.nan])))
    found = state_ranges([still, SiteState("missing", "no line")])
    assert found.chance == {"crosses": [pytest.approx(1 / 3), None], "rain": [None, None], "in_pool": [None, None]}
    assert all(ends == [None, None] for ends in (*found.range.values(), *found.input_range.values()))


def test_columns_are_called_as_those_of_a_single_crossing():
    columns = range_columns(state_ranges([SiteState("crossing", members=members(temperature=273.15 + TENS))]))
    assert set(columns) == {f"chance_{name}" for name in ("crosses", "rain", "in_pool")} | {
        f"{key}{part}_{end}" for key in RANGED for part in ("", "_inputs") for end in ("low", "high")
    }
    assert columns["temperature_c_low"] == [pytest.approx(1.0)]
    assert columns["temperature_c_inputs_high"] == [pytest.approx(9.0)]


def test_members_and_seed_are_said():
    assert members_block(None) is None
    assert members_block(Drawn(Uncertainty(), 32, 5)).model_dump() == {"members": 32, "seed": 5}


def test_members_are_lost_only_where_there_is_an_answer():
    """A line that runs along the range crosses in no member; a member that could not be worked out is missing."""
    whole = members()
    assert not lost_members(SiteState("crossing", members=whole))
    assert not lost_members(SiteState("no crossing", "the line runs along the range"))
    assert lost_members(SiteState("crossing"))
    assert lost_members(SiteState("crossing", members=SiteMembers({}, {}, np.array([1.0, np.nan]))))
