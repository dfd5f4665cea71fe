"""Crossings against rows: which estimate a row belongs to, ranges, averages, a sounding, onset."""

import math
from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest

from orolift.air.column_build import air_from_station
from orolift.crossing.crossing import cross
from orolift.crossing.onset import OnsetRule
from orolift.crossing.result import Site
from orolift.fire.rules import Condition, Rule, RuleSet
from orolift.fire.winds import WindMeant
from orolift.spread.compared import all_pairs, profile_comparison
from orolift.spread.compared_rules import rule_tables
from orolift.spread.comparison import Observations, averaged, event_table, nearest_estimates, paired
from orolift.spread.estimates import estimates_of, ranges_of, site_estimate
from orolift.spread.explained import chosen
from orolift.spread.onset_series import onset_at_places
from orolift.terrain import ridge_transect

HOUR = 3600.0


@pytest.fixture(scope="module")
def crossing():
    """A coarse crossing with a lee site and a windward one."""
    ridge = ridge_transect([0.0, 25e3, 60e3], [40.0, 1850.0, 210.0], spacing=500.0)
    air = air_from_station(
        40.0, 100400.0, 287.65, 0.006, wind_speed=15.0, wind_from_direction=np.radians(235.0), lapse_rate=0.005
    )
    return cross(ridge, air, (Site("Tarn", 52e3, 310.0), Site("Kell", 5e3)), streamlines=40)


@pytest.fixture(scope="module")
def estimates(crossing):
    """The crossing as if valid at three hours, and a place that it does not have."""
    sites = [*(site_estimate(crossing, air) for air in crossing.lee), None]
    return tuple(estimates_of(sites, hour * HOUR) for hour in range(3))


def rows(time, place, **values):
    """Observations of a few rows."""
    n = len(time)
    nothing = np.full(n, np.nan)
    names = ("temperature", "dew_point", "mixing_ratio", "relative_humidity", "wind", "gust", "pressure", "rain_rate")
    extra = {
        name: np.asarray(values.pop(name), float) if name in values else nothing
        for name in ("wind_from", "crest_temperature", "crest_pressure", "crest_elevation")
    }
    return Observations(
        time=np.asarray(time, float),
        place=np.asarray(place),
        values={name: np.asarray(values.get(name, nothing), float) for name in names},
        elevation=nothing,
        line=np.arange(2, n + 2),
        **extra,
    )


def test_rows_go_to_the_nearest_estimate_within_reach(estimates):
    """Half an hour either way, ends included; rows without a time belong to none of several."""
    seen = rows([0.0, 1800.0 + 1, 5400.0 + 1, 9000.0, 9001.0, np.nan], [0] * 6, temperature=[280.0] * 6)
    assert nearest_estimates(seen, estimates, 1800.0).tolist() == [0, 1, 2, 2, -1, -1]
    assert nearest_estimates(seen, estimates[:1], 1800.0).tolist() == [0, -1, -1, -1, -1, 0]


def test_each_place_has_its_own_arrival(crossing):
    """Air that takes an hour to place 0 and no time to place 1: rows go to the estimate whose air is there."""
    sites = [site_estimate(crossing, air) for air in crossing.lee]
    estimates = [estimates_of(sites, hour * HOUR, [(hour + 1) * HOUR, hour * HOUR]) for hour in range(2)]
    seen = rows([HOUR, HOUR, 0.0], [0, 1, 0], temperature=[280.0] * 3)
    assert nearest_estimates(seen, estimates, 1800.0).tolist() == [0, 1, -1]


def test_an_estimate_held_against_itself_has_no_error(estimates):
    """Round trip: bias and error 0, all inside, skill 1 against every simple answer."""
    own = estimates[0].values
    seen = rows([0.0, 0.0], [0, 1], temperature=own["temperature"][:2], mixing_ratio=own["mixing_ratio"][:2])
    pairs, verdicts = all_pairs(seen, estimates, np.array([0, 0]))
    assert pairs["temperature"].row.tolist() == [0, 1]
    (warm,) = [one for one in verdicts if one.quantity == "temperature"]
    assert (warm.score.count, warm.score.bias, warm.coverage) == (1, 0.0, 1.0)  # the windward site does not count
    assert set(warm.skill.values()) == {1.0}


def test_range_is_that_of_the_stated_model_error(estimates, crossing):
    """10 and 90 % of a normal distribution are 1.2816 standard deviations off: of 1.5 K with 0.5 K per 100 km added."""
    one, away = estimates[0], crossing.lee[0].distance / 1e5
    sigma_t, sigma_v = math.hypot(1.5, 0.5 * away), math.hypot(0.6e-3, 0.25e-3 * away)
    assert one.high["temperature"][0] - one.values["temperature"][0] == pytest.approx(1.2816 * sigma_t, abs=1e-3)
    assert one.low["mixing_ratio"][0] == pytest.approx(crossing.lee[0].mixing_ratio - 1.2816 * sigma_v, abs=1e-6)
    assert one.low["dew_point"][0] < one.values["dew_point"][0] < one.high["dew_point"][0]


def test_ranges_of_members_are_their_tenths(crossing):
    """By hand: 0 to 10 in eleven members has 1 and 9; without members there is no range."""
    values = np.arange(11.0)[:, np.newaxis] * np.ones((1, 2))
    spread = SimpleNamespace(full_sites={"temperature": 280.0 + values, "wind_10m": values})
    assert ranges_of(spread, crossing, crossing.lee[0]) == {"temperature": (281.0, 289.0), "wind": (1.0, 9.0)}
    assert ranges_of(None, crossing, crossing.lee[0]) == {}


def test_given_ranges_go_before_the_model_error(crossing):
    """Those of many crossings."""
    one = site_estimate(crossing, crossing.lee[0], {"temperature": (270.0, 300.0)})
    assert one.ranges["temperature"] == (270.0, 300.0)
    assert one.ranges["mixing_ratio"][0] > 0.0


def test_a_place_that_a_line_misses_has_no_pairs(estimates):
    """Place 2 is on no line."""
    seen = rows([0.0], [2], temperature=[280.0])
    assert paired(seen, estimates, np.array([0]), "temperature").row.size == 0


def test_averages_stand_for_their_rows(estimates):
    """Worked by hand: 280 and 284 near the first estimate, 290 near the second."""
    seen = rows([0.0, 60.0, HOUR], [0, 0, 0], temperature=[280.0, 284.0, 290.0])
    means, count = averaged(paired(seen, estimates, np.array([0, 0, 1]), "temperature"))
    assert means.observed.tolist() == [282.0, 290.0]
    assert count.tolist() == [2, 1]


def test_events_are_counted_in_the_lee_only(estimates):
    """The estimate's own temperature as threshold: a hit where it was reached, a false alarm where not."""
    limit = float(estimates[0].values["temperature"][0])
    seen = rows([0.0, HOUR, 0.0], [0, 0, 1], temperature=[limit + 1.0, limit - 1.0, limit + 1.0])
    table = event_table(paired(seen, estimates, np.array([0, 1, 0]), "temperature"), limit, above=True)
    assert (table.hits, table.false_alarms, table.misses, table.correct_rejections) == (1, 1, 0, 0)


def test_rules_are_judged_alike_for_estimates_and_observations(estimates):
    """Dry and windy: one hit, one false alarm for want of wind; a rule on an index cannot be judged."""
    wind = WindMeant(10.0, "sustained", 600.0)
    dry = Rule("dry and windy", (Condition("relative_humidity", at_most=0.99), Condition(wind, at_least=1.0)))
    index = Rule("index", (Condition("fosberg_index", at_least=1.0),))
    seen = rows([0.0, HOUR], [0, 0], relative_humidity=[0.5, 0.5], wind=[8.0, 0.2])
    tables, notes = rule_tables(RuleSet("r", "a", "2026-01-01", (dry, index)), seen, estimates, np.array([0, 1]), 0.03)
    ((name, table),) = tables
    assert (name, table.hits, table.false_alarms) == ("dry and windy", 1, 1)
    assert "'index' cannot be judged" in notes[0]


def test_the_worst_comparison_is_chosen(estimates):
    """Largest mean error of temperature where humidity is known too."""
    t = float(estimates[0].values["temperature"][0])
    seen = rows([0.0, HOUR, 2 * HOUR], [0, 0, 0], temperature=[t + 1, t - 3, t + 9], mixing_ratio=[4e-3, 4e-3, np.nan])
    which = np.array([0, 1, 2])
    warm, moist = (paired(seen, estimates, which, name) for name in ("temperature", "mixing_ratio"))
    assert chosen(warm, moist) == (1, 0)
    assert chosen(warm, moist, place=1) is None


def test_a_sounding_like_the_estimate_differs_by_nothing(crossing):
    """The estimated profile as a column, 2 K warmer: minus 2 K in both layers."""
    air = crossing.lee[0]
    z = air.elevation + air.profile.height_above_ground
    column = replace(
        crossing.incoming,
        height=z,
        pressure=1e5 * np.exp(-z / 8000.0),
        temperature=air.profile.temperature + 2.0,
        vapour=air.profile.vapour,
        **{name: np.zeros(z.size) for name in ("cloud", "eastward_wind", "northward_wind")},
    )
    found = profile_comparison(air, column)
    assert [(layer.low, layer.high) for layer in found.layers] == [(50.0, 500.0), (0.0, 1500.0)]
    for layer in found.layers:
        assert layer.temperature == pytest.approx(-2.0)
        assert layer.mixing_ratio == pytest.approx(0.0, abs=1e-12)


def test_onset_of_a_made_up_series(estimates):
    """Lee air equal to crest air from 1 h to 2 h, by height; calm and cold before. Estimates hold at all three hours."""
    lapse = 9.80665 / 1005.7
    warm = 280.0 + 1540.0 * lapse
    seen = rows(
        [0.0, HOUR, 2 * HOUR, 3 * HOUR],
        [0] * 4,
        temperature=[warm - 6.0, warm, warm, warm - 6.0],
        wind=[1.0, 6.0, 6.0, 1.0],
        crest_temperature=[280.0] * 4,
        crest_elevation=[1850.0] * 4,
    )
    which = nearest_estimates(seen, estimates, 1800.0)
    (found,) = onset_at_places(OnsetRule(bridge=0.0), seen, estimates, which, [310.0, 100.0, 0.0])
    (spell,) = found.observed_spells
    assert (spell.start, spell.end) == (HOUR, 2 * HOUR)
    assert found.times == 4
    assert found.table.hits + found.table.misses == 2
    assert abs(found.excess[0]) < 3.0


def test_rain_of_a_site_is_that_of_its_own_line(crossing):
    """A site beside the line has a crossing of its own: rain of the case's line at the same distance is not its rain."""
    air = replace(crossing.lee[0], rain=1.0 / 3600.0)
    assert site_estimate(crossing, air).values["rain_rate"] == 1.0 / 3600.0
