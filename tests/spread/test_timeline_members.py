"""Hours put together in each member: sums, codes, onsets and chances are those of the members' own hours."""

from dataclasses import replace

import numpy as np
import pytest

from orolift.fire.fine_fuel import fine_fuel_code_hourly
from orolift.fire.rules import Condition, Rule, RuleSet
from orolift.fire.sites import FireSettings
from orolift.spread.hour_members import RANGED, HourMembers
from orolift.spread.hours import Hour, LineRain
from orolift.spread.site_state import SiteState, Travel
from orolift.spread.timeline import hours_of

HOUR = 3600.0
COUNT = 20
STATE = SiteState(
    "crossing",
    descending=False,
    travel=Travel(HOUR, 0.0),
    temperature=293.15,
    relative_humidity=0.5,
    wind_10m=5.0,
    rain=0.0,
    rule_values={},
)


def members(dry=0, *, rain=0.0, humidity=0.5, way=HOUR, crosses=COUNT, rules=None):
    """An hour of which the first `dry` members have dry wind; those from number `crosses` on do not cross."""
    number = np.arange(COUNT)
    there = number < crosses
    values = np.broadcast_arrays(*(np.asarray(x, float) for x in (293.15, humidity, 5.0, rain, way)), number)[:-1]
    return HourMembers(
        crosses=there.astype(np.int8),
        ends=np.tile([[[1.0, 2.0]]], (2, len(RANGED), 1)),
        rain=0.5,
        in_pool=0.25,
        descending=(number < dry) & there,
        carried=np.where(there, values, np.nan).astype(np.float32),
        rules=None if rules is None else np.atleast_2d(rules).astype(np.int8),
    )


def site(*hours, fire=None, lines=None):
    """A timeline of (state, members), an hour apart."""
    found = [
        Hour(i, i * HOUR, (state,), (1.0 / HOUR,), (one,), None if lines is None else lines[i])
        for i, (state, one) in enumerate(hours)
    ]
    return hours_of(found, ["Tarn"], HOUR, planned=len(found), catchments=["Basin"], fire=fire)


DRY, MOIST = replace(STATE, descending=True), STATE


def test_total_rain_is_summed_member_by_member():
    """Member k has k mm/h for two hours: 10 and 90 % of twice the numbers from 0 to 19."""
    rain = np.arange(COUNT) / HOUR
    found = site(*[(STATE, members(rain=rain))] * 2).sites[0].ranges
    assert found.total_rain == pytest.approx((2.0 * 1.9, 2.0 * 17.1), rel=1e-6)


def test_rain_that_takes_turns_is_no_surer_in_sums_than_it_is():
    """Where wet members of one hour are dry in the next, their sum is sure though neither hour is."""
    rain = np.where(np.arange(COUNT) < 10, 2.0, 0.0) / HOUR
    found = site((STATE, members(rain=rain)), (STATE, members(rain=rain[::-1]))).sites[0].ranges
    assert found.total_rain == pytest.approx((2.0, 2.0), rel=1e-6)


def test_a_lost_member_has_the_rain_of_the_answer_in_that_hour():
    """All have 3 mm/h where they are known: a lost hour takes no rain out of the sum, whether some are lost or all."""
    wet = replace(STATE, rain=3.0 / HOUR)
    whole = members(rain=3.0 / HOUR)
    some = replace(
        whole,
        crosses=np.where(np.arange(COUNT) < 8, -1, 1).astype(np.int8),
        carried=np.where(np.arange(COUNT) < 8, np.nan, whole.carried).astype(np.float32),
    )
    for lost in (some, None):
        found = site((wet, whole), (wet, lost), (SiteState("missing"), None)).sites[0]
        assert found.rain == pytest.approx(6.0)
        assert found.ranges.total_rain == pytest.approx((6.0, 6.0), rel=1e-6)


def test_a_threshold_that_is_never_judged_has_no_chance():
    """No drought index is known in any hour, and all hours cross: no share of no members, and no number that is none."""
    rule = Rule("Drought", (Condition("drought_index", at_least=400.0),))
    fire = FireSettings(rules=RuleSet("Tarn", "none", "2026-05-01", (rule,)))
    unknown = members(rules=np.zeros(COUNT))
    found = site((STATE, unknown), (STATE, unknown), fire=fire).sites[0].ranges.thresholds[0]
    assert found.ever is None
    assert found.lasts is None
    assert np.isnan(found.chance).all()


def test_few_members_that_are_known_have_a_chance_but_no_range():
    """Four of twenty: fewer than five have no 10 and 90 %."""
    few = members(2)
    few = replace(few, crosses=np.where(np.arange(COUNT) < 4, 1, -1).astype(np.int8))
    found = site((DRY, few), (DRY, few)).sites[0].ranges.dry_wind
    assert found.ever == 0.5
    assert found.lasts is None
    assert found.stretches[0].chance == 0.5


def test_fuel_code_is_carried_in_each_member():
    """Two hours of the published form from the same code, with the humidity of each member; a gap does not reset it."""
    humidity = np.linspace(0.2, 0.6, COUNT)
    fire = FireSettings(previous_code=70.0)
    found = site(
        (STATE, members(humidity=humidity)),
        (SiteState("missing"), None),
        (STATE, members(humidity=humidity)),
        fire=fire,
    )
    codes = fine_fuel_code_hourly(np.full(COUNT, 70.0), 293.15, humidity.astype(np.float32), 5.0, hours=2)
    ranges = found.sites[0].ranges
    assert ranges.fine_fuel_code[2] == pytest.approx(np.quantile(codes, (0.1, 0.9)), rel=1e-6)
    assert np.isnan(ranges.fine_fuel_code[1]).all()


def test_onset_of_members_is_that_of_their_own_air():
    """Ten members begin an hour before the answer, ten with it: 10 % an hour earlier, and a chance of all."""
    hours = [(MOIST, members(0)), (MOIST, members(10)), (DRY, members(20)), (MOIST, members(0))]
    found = site(*hours).sites[0]
    (one,) = found.ranges.dry_wind.stretches
    assert found.dry_winds[0].onset == 2.5 * HOUR
    assert one.onset == pytest.approx((1.5 * HOUR, 2.5 * HOUR))
    assert one.end == pytest.approx((3.5 * HOUR, 3.5 * HOUR))
    assert one.chance == 1.0
    assert found.ranges.dry_wind.chance == pytest.approx([0.0, 0.5, 1.0, 0.0])
    assert found.ranges.dry_wind.lasts == pytest.approx((HOUR, 2 * HOUR))


def test_members_that_take_longer_are_there_later():
    """The same hours, but the way of half of the members takes an hour more."""
    way = np.where(np.arange(COUNT) < 10, 1.0, 2.0) * HOUR
    hours = [(MOIST, members(0, way=way)), (DRY, members(20, way=way))]
    (one,) = site(*hours).sites[0].ranges.dry_wind.stretches
    assert one.onset == pytest.approx((1.5 * HOUR, 2.5 * HOUR))


def test_members_without_a_stretch_count_in_its_chance_alone():
    """A quarter has it; a stretch that reaches the first hour has begun before what can be judged."""
    hours = [(DRY, members(5)), (DRY, members(5)), (MOIST, members(0))]
    (one,) = site(*hours).sites[0].ranges.dry_wind.stretches
    assert one.chance == 0.25
    assert one.onset == (None, None)
    assert one.end == pytest.approx((2.5 * HOUR, 2.5 * HOUR))


def test_fewer_than_five_members_have_no_times():
    hours = [(MOIST, members(0)), (DRY, members(4)), (MOIST, members(0))]
    (one,) = site(*hours).sites[0].ranges.dry_wind.stretches
    assert (one.chance, one.onset, one.end) == (0.2, None, None)


def test_what_comes_in_members_alone_has_a_chance():
    found = site((MOIST, members(3)), (MOIST, members(1))).sites[0].ranges.dry_wind
    assert found.ever == pytest.approx(0.15)
    assert found.stretches == ()


def test_a_member_that_does_not_cross_has_no_dry_wind():
    """Of 20 members 8 cross, and all of those are dry: 40 % of all; crossing itself is as likely."""
    found = site((DRY, members(20, crosses=8))).sites[0].ranges
    assert found.dry_wind.chance == pytest.approx([0.4])
    assert found.crosses == pytest.approx([0.4])


def test_missing_and_interrupted_hours_carry_no_range():
    """An hour without members, as one that was not reached, has neither range nor chance; the others keep theirs."""
    found = site((STATE, members()), (SiteState("missing", "not reached"), None)).sites[0].ranges
    for values in (found.full["temperature"], found.inputs["rain"], found.fine_fuel_code):
        assert np.isfinite(values[0]).all()
        assert np.isnan(values[1]).all()
    for chance in (found.crosses, found.rain, found.in_pool, found.dry_wind.chance):
        assert np.isfinite(chance[0])
        assert np.isnan(chance[1])


def test_an_hour_that_does_not_cross_ends_a_stretch_in_every_member():
    calm = SiteState("no crossing", "calm")
    (one,) = site((DRY, members(20)), (calm, HourMembers(np.ones(COUNT, np.int8)))).sites[0].ranges.dry_wind.stretches
    assert one.end == pytest.approx((1.5 * HOUR, 1.5 * HOUR))


def test_no_members_no_ranges():
    assert site((STATE, None)).sites[0].ranges is None


def rules(*conditions, hours=1):
    return FireSettings(
        previous_code=85.0, rules=RuleSet("Tarn", "none", "2026-05-01", (Rule("dry", conditions, hours),))
    )


def test_threshold_lasts_in_the_member_it_is_met_in():
    """Asked for two hours in a row: members that have one each time do not meet it."""
    fire = rules(Condition("relative_humidity", at_most=0.3), hours=2)
    first, second = np.full(COUNT, -1), np.full(COUNT, -1)
    first[:10], second[5:15] = 1, 1
    found = site((STATE, members(rules=first)), (STATE, members(rules=second)), fire=fire).sites[0].ranges.thresholds[0]
    assert found.chance == pytest.approx([0.25, 0.25])
    assert found.ever == 0.25


def test_threshold_on_a_carried_code_is_met_by_the_code_of_the_member():
    """Half of the members are dry enough for the code to reach 85.2 in an hour; the rest of the rule is met in all."""
    fire = rules(Condition("relative_humidity", at_most=0.9), Condition("fine_fuel_code", at_least=85.2))
    humidity = np.where(np.arange(COUNT) < 10, 0.1, 0.9)
    code = fine_fuel_code_hourly(np.full(2, 85.0), 293.15, [0.1, 0.9], 5.0, hours=1)
    assert code[0] > 85.2 > code[1]
    one = members(humidity=humidity, rules=np.ones(COUNT))
    assert site((STATE, one), fire=fire).sites[0].ranges.thresholds[0].chance == pytest.approx([0.5])


def test_no_chance_where_more_than_a_tenth_cannot_be_judged():
    fire = rules(Condition("relative_humidity", at_most=0.3))
    unknown = np.where(np.arange(COUNT) < 3, 0, 1)
    assert np.isnan(site((STATE, members(rules=unknown)), fire=fire).sites[0].ranges.thresholds[0].chance).all()


def test_catchment_total_goes_with_the_rain_on_the_line():
    """Twice the rain on the line in all hours is twice the total; without rain on the line nothing is said."""
    factor = np.linspace(0.5, 1.5, COUNT)
    rain = LineRain(1.0 / HOUR, (factor / HOUR).astype(np.float32))
    basin = site((STATE, members()), (STATE, members()), lines=[rain, rain]).catchments[0]
    assert basin.total == pytest.approx(2.0)
    assert basin.total_range == pytest.approx(2.0 * np.quantile(factor, (0.1, 0.9)), rel=1e-6)
    nothing = LineRain(0.0, np.zeros(COUNT, np.float32))
    assert site((STATE, members()), lines=[nothing]).catchments[0].total_range is None
    assert site((STATE, None), lines=[None]).catchments[0].total_range is None


def test_members_that_could_not_be_worked_out_count_nowhere_and_are_told():
    """Of 20 members two are lost in an hour: nine of the other 18 are dry; an hour without any of them is lost, too."""
    one = members(9)
    one.crosses[18:] = -1
    found = site((STATE, one), (STATE, None), (STATE, members(0))).sites[0].ranges
    assert found.dry_wind.chance[0] == pytest.approx(0.5)
    assert np.isnan(found.dry_wind.chance[1])
    assert found.lost == 2
