"""Chances and ranges from members: shares by hand, the answer as its own member, members without air."""

import math
from dataclasses import replace

import numpy as np
import pytest

from orolift.air.column_build import air_from_station
from orolift.air.humidity import mixing_ratio_from_dew_point
from orolift.crossing.crossing import cross
from orolift.crossing.layer_above import own_differences
from orolift.crossing.result import Site, When
from orolift.fire.chances import CODES_AFTER, NEEDED, with_members
from orolift.fire.nights import NIGHT_VALUES
from orolift.fire.rules import Condition, Rule, RuleSet
from orolift.fire.sites import FireSettings, fire_at_sites
from orolift.fire.values import INDICES
from orolift.fire.winds import WindMeant
from orolift.terrain import ridge_transect

MEANT = WindMeant(10.0, "sustained", 600.0)
CODE = 88.0


@pytest.fixture(scope="module")
def crossing():
    """One site in the lee of a ridge."""
    ridge = ridge_transect([0.0, 8e3, 25e3, 52e3, 60e3], [40.0, 40.0, 1850.0, 210.0, 210.0], spacing=500.0)
    vapour = mixing_ratio_from_dew_point(100400.0, 280.15)
    wind = (14.0, math.radians(270.0), 1850.0)
    air = air_from_station(40.0, 100400.0, 290.15, vapour, 8.0, math.radians(270.0), crest_wind=wind)
    return cross(ridge, air, (Site("Lower Tarn", 45e3),), streamlines=40)


@pytest.fixture(scope="module")
def settings(crossing):
    """A rule that is missed by a little: 1 m/s more wind than there is."""
    limit = crossing.lee[0].wind.at_10m + 1.0
    rule = Rule("windy", (Condition(MEANT, at_least=limit), Condition("relative_humidity", at_most=1.0)))
    return FireSettings(CODE, None, RuleSet("Tarn (invented)", "nobody", "2026-05-01", (rule,)))


def members(air, count):
    """Members that are all the answer."""
    gust = 0.5 * (air.wind.gust_low + air.wind.gust_high)
    given = (air.pressure, air.temperature, air.mixing_ratio, air.wind.at_10m, gust)
    return {name: np.full(count, value) for name, value in zip(NEEDED, given, strict=True)}


def test_chance_is_counted(crossing, settings):
    """Three of four members have two metres a second more than the answer, which alone misses the limit."""
    site = fire_at_sites(crossing, When(), settings)[0]
    given = members(crossing.lee[0], 4)
    given["wind_10m"][1:] += 2.0
    found = with_members(site, given, settings, 0.03)
    judged = found.thresholds[0].judged
    assert judged.status == "not met"
    assert judged.chance == 0.75
    assert [one.chance for one in judged.conditions] == [0.75, 1.0]
    assert site.thresholds[0].judged.chance is None
    assert found.thresholds[0].movers == site.thresholds[0].movers


def test_the_answer_as_its_own_member(crossing, settings):
    """Without any spread each range closes on the answer, the layer's index too."""
    site = fire_at_sites(crossing, When(), settings)[0]
    found = with_members(site, members(crossing.lee[0], 5), settings, 0.03)
    for name in INDICES:
        own = float(getattr(site.indices, name))
        if np.isfinite(own):
            np.testing.assert_allclose(found.ranges[name], own, rtol=1e-9, err_msg=name)
        else:
            assert name not in found.ranges


@pytest.mark.parametrize("when", [When(), When(1793736000.0, -121.0, -46.9)], ids=["unknown time", "noon"])
def test_the_night_of_the_answer_as_its_own_member(crossing, settings, when):
    """Without any spread humidity at each height and the depth of mixing close on the answer, and so do codes."""
    site = fire_at_sites(crossing, when, settings)[0]
    given = members(crossing.lee[0], 5)
    found = with_members(site, given, settings, 0.03, when, inputs=given)
    for name in NIGHT_VALUES:
        np.testing.assert_allclose(found.ranges[name], getattr(site.night, name), rtol=1e-9, err_msg=name)
    for name, code in zip(CODES_AFTER, site.indices.fine_fuel_code_hours, strict=True):
        np.testing.assert_allclose(found.ranges[name], code, rtol=1e-9, err_msg=name)
    assert found.ranges.keys() == found.input_ranges.keys()
    for name, ends in found.ranges.items():
        assert found.input_ranges[name] == pytest.approx(ends), name


def test_moister_members_recover_more(crossing, settings):
    """Law: twice the vapour at the same temperature is twice the humidity by night, at each height, up to dew."""
    site = fire_at_sites(crossing, When(), settings)[0]
    given = members(crossing.lee[0], 5)
    moist = given | {"mixing_ratio": given["mixing_ratio"] * 2.0}
    found = with_members(site, moist, settings, 0.03, inputs=given)
    for name in ("floor_windy", "floor_still", "mid_slope", "ridge"):
        was, now = getattr(site.night, name), found.ranges[name][0]
        assert now == pytest.approx(min(2.0 * was, 1.0), rel=0.02), name
        np.testing.assert_allclose(found.input_ranges[name], was, rtol=1e-9)


def test_more_heat_from_the_ground_leaves_a_colder_night(crossing, settings):
    """Of two members as warm, the one that has more of it from the ground is the more humid once that is gone."""
    site = fire_at_sites(crossing, When(), settings)[0]
    site = replace(site, weather=replace(site.weather, heating=np.asarray(1.0)))
    given = members(crossing.lee[0], 5)
    heated = given | {"warming_surface_heating": np.full(5, 4.0)}
    found = with_members(site, heated, settings, 0.03, inputs=given | {"warming_surface_heating": np.full(5, 1.0)})
    assert found.ranges["floor_windy"][0] > found.input_ranges["floor_windy"][1]
    assert found.ranges["relative_humidity"] == found.input_ranges["relative_humidity"]


def test_less_stable_members_mix_deeper(crossing, settings):
    """Law: members whose air above is colder than the answer's mix deeper, warmer ones less; their ground is as warm."""
    when = When(1793736000.0, -121.0, -46.9)
    site = fire_at_sites(crossing, when, settings)[0]
    own = own_differences(crossing.lee[0])
    given = members(crossing.lee[0], 5)
    depths = []
    for change in (-1.0, 0.0, 1.0):
        moved = {name: np.full(5, value + change) for name, value in own.items()}
        found = with_members(site, given | moved, settings, 0.03, when)
        depths.append(found.ranges["mixing_height"][0])
        np.testing.assert_allclose(found.ranges["floor_windy"], site.night.floor_windy)
    assert depths[0] > depths[1] > depths[2]
    assert depths[1] == pytest.approx(site.night.mixing_height, rel=1e-9)


def test_rules_on_the_depth_of_mixing_take_that_of_each_member(crossing):
    """Law: the heat of the ground lifts heavier air less deep; two of five members, 15 % heavier, miss the limit."""
    when = When(1793736000.0, -121.0, -46.9)
    plain = fire_at_sites(crossing, when, FireSettings())[0]
    depth = plain.night.mixing_height
    rule = Rule("deep", (Condition("mixing_height", at_least=depth - 1.0),))
    own = FireSettings(None, None, RuleSet("Tarn (invented)", "nobody", "2026-05-01", (rule,)))
    site = fire_at_sites(crossing, when, own)[0]
    given = members(crossing.lee[0], 5)
    assert with_members(site, given, own, 0.03, when).thresholds[0].judged.chance == 1.0
    heavy = given | {"pressure": given["pressure"] * np.array([1.0, 1.0, 1.0, 1.15, 1.15])}
    found = with_members(site, heavy, own, 0.03, when)
    assert found.thresholds[0].judged.chance == pytest.approx(0.6)
    assert found.ranges["mixing_height"][0] < depth == pytest.approx(found.ranges["mixing_height"][1])


def test_warmer_and_windier_members_move_the_layer(crossing, settings):
    """Hot-Dry-Windy goes with the strongest wind of 500 m, which gains as much as the mean of the lowest 300 m."""
    site = fire_at_sites(crossing, When(), settings)[0]
    height, wind = site.weather.height_above_ground, site.weather.layer_wind
    given = members(crossing.lee[0], 5)
    given["wind_10m"] *= 2.0
    low, high = with_members(site, given, settings, 0.03).ranges["hot_dry_windy"]
    strongest = wind[height <= 500.0].max()
    factor = (strongest + wind[height <= 300.0].mean()) / strongest
    np.testing.assert_allclose([low, high], factor * float(site.indices.hot_dry_windy))
    given = members(crossing.lee[0], 5)
    given["temperature"] += 3.0
    assert with_members(site, given, settings, 0.03).ranges["hot_dry_windy"][0] > float(site.indices.hot_dry_windy)


def test_a_nearly_calm_answer_does_not_blow_up_what_is_aloft(crossing, settings):
    """Members with fifty times the wind near the ground: aloft they gain that difference, not fifty times the wind."""
    site = fire_at_sites(crossing, When(), settings)[0]
    weather, height = site.weather, site.weather.height_above_ground
    near = height <= 300.0
    calm = replace(weather, wind=0.02 * weather.wind, layer_wind=weather.layer_wind * np.where(near, 0.02, 1.0))
    given = members(crossing.lee[0], 5)
    low, high = with_members(replace(site, weather=calm), given, settings, 0.03).ranges["hot_dry_windy"]
    strongest = weather.layer_wind[height <= 500.0].max()
    factor = (strongest + 0.98 * weather.layer_wind[near].mean()) / strongest
    assert 1.0 < low / float(site.indices.hot_dry_windy) == high / float(site.indices.hot_dry_windy) <= factor


def test_rain_of_the_members_counts(crossing, settings):
    """A rule that asks for hardly any rain is met by the members without; one in four here."""
    rule = Rule("dry", (Condition("rain_rate", at_most=1e-5),))
    own = FireSettings(None, None, RuleSet("Tarn (invented)", "nobody", "2026-05-01", (rule,)))
    site = fire_at_sites(crossing, When(), own)[0]
    given = members(crossing.lee[0], 4)
    given["rain"] = np.array([0.0, 1e-4, 1e-4, 1e-4])
    assert with_members(site, given, own, 0.03).thresholds[0].judged.chance == 0.25


def test_hardly_any_member_gives_no_range(crossing, settings):
    """Four are too few for 10 and 90 %, as everywhere else."""
    site = fire_at_sites(crossing, When(), settings)[0]
    assert with_members(site, members(crossing.lee[0], 4), settings, 0.03).ranges == {}
    assert with_members(site, members(crossing.lee[0], 5), settings, 0.03).ranges


def test_members_without_air_do_not_count(crossing, settings):
    """A member that does not cross is neither met nor missed; none that does leaves the site as it is."""
    site = fire_at_sites(crossing, When(), settings)[0]
    given = members(crossing.lee[0], 4)
    given["wind_10m"][:2] += 2.0
    for name in NEEDED:
        given[name][3] = np.nan
    assert with_members(site, given, settings, 0.03).thresholds[0].judged.chance == pytest.approx(2.0 / 3.0)
    given = {name: np.full(2, np.nan) for name in NEEDED}
    assert with_members(site, given, settings, 0.03) is site


def test_members_without_wind_are_not_judged_by_it(crossing, settings):
    """In a pool the wind is not known: that member counts for dryness alone, and half such members leave no chance."""
    site = fire_at_sites(crossing, When(), settings)[0]
    given = members(crossing.lee[0], 2)
    given["wind_10m"][1], given["gust"][1] = np.nan, np.nan
    judged = with_members(site, given, settings, 0.03).thresholds[0].judged
    assert judged.chance is None
    assert [one.chance for one in judged.conditions] == [0.0, 1.0]
