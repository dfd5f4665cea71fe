"""Onset of air from over the crest: the published logic of two stations, and spells of time."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.crossing.onset import OnsetRule, holds, potential_excess, spells
from orolift.errors import OutOfRangeError

HOUR = 3600.0
STRICT = OnsetRule(offset=0.0, sector=(np.radians(150.0), np.radians(240.0)), least_speed=2.0)

# Potential temperature in the valley minus at the crest [K], wind from [degrees], speed [m/s], and whether it holds:
# wind in the sector AND a potential temperature equal to or higher than at the crest.
LOGIC = [
    pytest.param(0.0, 190.0, 6.0, 1.0, id="equal, in the sector: Vergeiner (2004)"),
    pytest.param(1.5, 150.0, 6.0, 1.0, id="higher, at the edge of the sector: Vergeiner (2004)"),
    pytest.param(-0.1, 190.0, 6.0, 0.0, id="lower: Vergeiner (2004)"),
    pytest.param(1.5, 20.0, 6.0, 0.0, id="wind up the valley: Drechsel and Mayr (2008)"),
    pytest.param(1.5, np.nan, 0.5, 0.0, id="calm decides, whatever the direction"),
    pytest.param(1.5, np.nan, 6.0, np.nan, id="direction unknown"),
    pytest.param(-3.0, np.nan, 6.0, 0.0, id="cold air decides, whatever the direction"),
]


@pytest.mark.parametrize(("excess", "wind_from", "speed", "expected"), LOGIC)
def test_published_logic(excess, wind_from, speed, expected):
    """Both conditions are needed, one that fails decides."""
    found = holds(STRICT, [excess], np.radians([wind_from]), [speed])
    np.testing.assert_equal(found, [expected])


def test_sector_may_pass_north():
    """From 330 clockwise to 40 degrees."""
    rule = OnsetRule(sector=(np.radians(330.0), np.radians(40.0)))
    found = holds(rule, [0.0] * 4, np.radians([350.0, 20.0, 60.0, 300.0]), [5.0] * 4)
    assert found.tolist() == [1.0, 1.0, 0.0, 0.0]


@given(st.floats(-5, 5), st.floats(0, 3), st.floats(0, 3))
@settings(max_examples=30, deadline=None)
def test_a_wider_tolerance_never_loses_a_case(excess, offset, more):
    """Monotone in the offset."""
    narrow, wide = (holds(OnsetRule(offset=x), [excess])[0] for x in (offset, offset + more))
    assert wide >= narrow


def test_offset_has_a_range():
    """A tolerance in hundredths or hundreds is a slip."""
    with pytest.raises(OutOfRangeError, match="tolerance of about 1 K"):
        holds(OnsetRule(offset=100.0), [0.0])


def test_both_ways_to_the_excess_agree():
    """Dry adiabatic air between the stations has none, by pressure and by height alike.

    288 K at 1000 hPa lies at 900 hPa at 288 (0.9)^0.2857 = 279.46 K (Rd/cp 0.2857, WMO 1966); 9.76 K per km (g/cp,
    9.80665 / 1005.7) over 1 km.
    """
    assert potential_excess([288.0], [279.46], pressures=([1e5], [9e4]))[0] == pytest.approx(0.0, abs=0.05)
    assert potential_excess([288.0], [278.24], elevations=([0.0], [1000.0]))[0] == pytest.approx(0.0, abs=0.02)


def test_pressure_goes_before_height_and_height_fills_in():
    """Row one has both pressures, row two lacks one."""
    found = potential_excess(
        [288.0, 288.0], [280.0, 280.0], pressures=([1e5, np.nan], [9e4, 9e4]), elevations=([0.0, 0.0], [500.0, 500.0])
    )
    assert found[0] == pytest.approx(288.0 - 280.0 / 0.9**0.2857, abs=0.02)
    assert found[1] == pytest.approx(8.0 - 500.0 * 9.80665 / 1005.7)


def test_a_spell_has_the_first_and_last_time_it_holds():
    """Worked by hand: holds at 2, 3 and 4 hours of 0 to 6."""
    time = np.arange(7) * HOUR
    (spell,) = spells(OnsetRule(bridge=0.0), time, [0, 0, 1, 1, 1, 0, 0])
    assert (spell.start, spell.end, spell.count) == (2 * HOUR, 4 * HOUR, 3)
    assert not spell.open_start
    assert not spell.open_end


def test_short_interruptions_are_bridged_and_long_ones_not():
    """Ten-minute data: 20 minutes off within an hour's bridge, then two hours off."""
    time = np.arange(30) * 600.0
    state = np.zeros(30)
    state[[3, 4, 5, 8, 9, 22, 23]] = 1.0
    found = spells(OnsetRule(bridge=HOUR), time, state)
    assert [(one.start / 600.0, one.end / 600.0) for one in found] == [(3.0, 9.0), (22.0, 23.0)]


def test_times_between_three_hourly_observations_do_not_break_a_spell():
    """Nothing failed in between."""
    found = spells(OnsetRule(bridge=HOUR), np.arange(4) * 3 * HOUR, [0, 1, 1, 1])
    assert [(one.start / HOUR, one.end / HOUR, one.open_end) for one in found] == [(3.0, 9.0, True)]


def test_order_of_rows_does_not_matter_and_unknown_times_drop_out():
    """The same spells from shuffled rows with unknown ones among them."""
    time, state = np.array([0.0, 1, 2, 3, 4, 5]) * HOUR, np.array([0.0, 1, 1, 0, 0, 1])
    mixed = np.array([5, 2, 0, 4, 1, 3])
    plain = spells(OnsetRule(bridge=0.0), time, state)
    again = spells(OnsetRule(bridge=0.0), [*time[mixed], np.nan], [*state[mixed], 1.0])
    assert plain == again
    assert len(plain) == 2


def test_one_failure_between_hours_ends_a_spell_that_nothing_bridges():
    """Held, failed, held: two spells without a bridge, one with two hours of it."""
    time, state = np.arange(3) * HOUR, [1, 0, 1]
    assert len(spells(OnsetRule(bridge=0.0), time, state)) == 2
    assert len(spells(OnsetRule(bridge=2 * HOUR), time, state)) == 1
