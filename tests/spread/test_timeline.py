"""Hours put together: when air arrives, from when to when something holds, what is carried from hour to hour."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.fire.fine_fuel import fine_fuel_code_hourly
from orolift.fire.rules import Condition, Rule, RuleSet
from orolift.fire.sites import FireSettings
from orolift.spread.hours import Hour
from orolift.spread.site_state import SiteState, Travel
from orolift.spread.stretches import arrivals, stretches
from orolift.spread.timeline import hours_of

HOUR = 3600.0


def state(descending=False, way=HOUR, rain=0.0, humidity=0.5, **more):
    return SiteState(
        "crossing",
        descending=descending,
        travel=Travel(way, 0.0),
        temperature=293.15,
        relative_humidity=humidity,
        wind_10m=5.0,
        rain=rain,
        **more,
    )


def timeline(*states, fire=None):
    found = [Hour(i, i * HOUR, (one,)) for i, one in enumerate(states)]
    return hours_of(reversed(found), ["Tarn"], HOUR, planned=len(found), fire=fire).sites[0]


@settings(max_examples=50, derandomize=True)
@given(st.lists(st.floats(0.0, 50.0) | st.just(float("nan")), min_size=1, max_size=30))
def test_arrivals_keep_the_order_and_come_after_the_air_left(way):
    """Law: never earlier than upwind, never later than by its own wind, in the order of the hours."""
    time = np.arange(len(way)) * HOUR
    found = arrivals(time, np.array(way) * HOUR)
    known = np.isfinite(way)
    assert np.all(np.diff(found) >= 0.0)
    assert np.all(found >= time - 1e-6)
    assert np.all(found[known] <= (time + np.array(way) * HOUR)[known] + 1e-6)


def test_onset_lies_halfway_and_its_error_joins_step_and_way():
    """Half an hour for the step and 15 % of two hours on the way: sqrt(1800^2 + 1080^2) s."""
    site = timeline(*[state(descending=on, way=2 * HOUR) for on in (False, True, True, False)])
    (found,) = site.dry_winds
    assert (found.onset, found.end) == (2.5 * HOUR, 4.5 * HOUR)
    assert found.onset_error == pytest.approx(np.hypot(1800.0, 0.15 * 7200.0))


def test_spread_between_streamlines_is_part_of_the_error():
    """Root of the sum of squares of the three parts."""
    both = [SiteState("crossing", descending=on, travel=Travel(2 * HOUR, 700.0)) for on in (False, True)]
    found = timeline(*both).dry_winds[0]
    assert found.onset_error == pytest.approx(np.sqrt(1800.0**2 + 1080.0**2 + 700.0**2))


def test_what_holds_from_the_first_to_the_last_hour_has_neither_onset_nor_end():
    found = timeline(state(descending=True), state(descending=True)).dry_winds[0]
    assert (found.onset, found.onset_error, found.end, found.end_error) == (None, None, None, None)


def test_missing_hours_neither_begin_nor_end_a_stretch_but_widen_its_error():
    """An onset somewhere in a gap of three hours is known to half of that."""
    missing = SiteState("missing", "no row")
    site = timeline(state(), missing, missing, state(descending=True), missing, state(descending=True))
    (found,) = site.dry_winds
    assert (found.onset, found.unknown, found.end) == (2.5 * HOUR, 1, None)
    assert found.onset_error == pytest.approx(np.hypot(1.5 * HOUR, 0.15 * HOUR))


def test_an_hour_without_crossing_ends_a_stretch():
    site = timeline(state(descending=True), SiteState("no crossing", "calm"))
    assert site.dry_winds[0].end == 1.5 * HOUR
    assert site.crossing_hours == 1


def test_rain_is_summed_over_the_hours_that_cross():
    """1 and 2 mm/h for an hour each are 3 mm."""
    site = timeline(state(rain=1 / HOUR), SiteState("missing"), state(rain=2 / HOUR))
    assert site.rain == pytest.approx(3.0)


def test_fuel_code_is_carried_from_hour_to_hour():
    """Two hours of equal air are the two hours of the published form; over a missing hour it stays unknown."""
    site = timeline(state(), state(), SiteState("missing"), state(), fire=FireSettings(previous_code=70.0))
    after = [float(fine_fuel_code_hourly(70.0, 293.15, 0.5, 5.0, hours=n)) for n in (1, 2, 3)]
    assert site.fine_fuel_code[[0, 1, 3]] == pytest.approx(after)
    assert np.isnan(site.fine_fuel_code[2])


def rules(hours):
    rule = Rule("dry", (Condition("relative_humidity", at_most=0.3),), hours)
    return FireSettings(rules=RuleSet("Tarn", "none", "2026-05-01", (rule,)))


DRY, MOIST = (state(rule_values={"relative_humidity": share}) for share in (0.2, 0.6))


def test_a_threshold_counts_only_when_it_lasts():
    """A rule of two hours does not count a single dry one."""
    site = timeline(DRY, MOIST, DRY, DRY, MOIST, fire=rules(2))
    assert site.thresholds[0].met.tolist() == [False, False, True, True, False]
    assert len(site.thresholds[0].stretches) == 1
    assert timeline(DRY, MOIST, fire=rules(1)).thresholds[0].met.tolist() == [True, False]


def test_missing_hours_cannot_be_judged_and_hours_without_crossing_are_not_met():
    site = timeline(DRY, SiteState("missing"), SiteState("no crossing"), fire=rules(1))
    assert site.thresholds[0].judged.tolist() == [True, False, True]
    assert site.thresholds[0].met.tolist() == [True, False, False]


def test_thresholds_on_carried_codes_use_them():
    """The code of an hour is that carried to it, not one from the hour alone."""
    rule = Rule("dry fuel", (Condition("fine_fuel_code", at_least=80.0),))
    fire = FireSettings(previous_code=85.0, rules=RuleSet("Tarn", "none", "2026-05-01", (rule,)))
    wet = state(rain=5 / HOUR, humidity=1.0)
    site = timeline(state(), wet, wet, wet, fire=fire)
    assert site.thresholds[0].met[0]
    assert not site.thresholds[0].met[-1]


def test_stretches_of_nothing_known_are_none():
    nothing = np.zeros(3, dtype=bool)
    assert stretches([True, True, True], nothing, np.arange(3.0), np.arange(3.0)) == ()
