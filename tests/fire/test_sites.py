"""Fire weather of a crossing: values fit it, changes turn thresholds where they say, the night, members."""

import math
from dataclasses import replace

import numpy as np
import pytest

from orolift.air.column_build import air_from_station
from orolift.air.humidity import mixing_ratio_from_dew_point
from orolift.crossing.crossing import cross
from orolift.crossing.pool import Lee
from orolift.crossing.result import Site, When
from orolift.fire.flags import fire_flags, windward_cautions
from orolift.fire.fosberg import equilibrium_fuel_moisture, fosberg_index
from orolift.fire.indices import site_fire
from orolift.fire.movers import REACH, shifted
from orolift.fire.rules import Condition, Rule, RuleSet, rule_met
from orolift.fire.sites import FireSettings, fire_at_sites
from orolift.fire.values import site_values
from orolift.fire.weather import (
    humidity,
    layer_pressure,
    site_weather,
    stacked,
    with_more_wind,
    with_other_dew_point,
    with_other_source,
    with_warmer_air,
)
from orolift.fire.winds import WindMeant
from orolift.terrain import ridge_transect

WIND = WindMeant(6.1, "gust", 3.0)
RULES = RuleSet(
    "Tarn (invented)",
    "nobody",
    "2026-05-01",
    (
        Rule("dry", (Condition("relative_humidity", at_most=0.45), Condition(WIND, at_least=12.0)), hours=3),
        Rule("fuel", (Condition("fosberg_index", at_least=20.0), Condition("hot_dry_windy", at_least=1.0))),
    ),
)
NIGHT = When(1793692800.0, -121.0, -46.9)  # midnight there
SITES = (Site("Lower Tarn", 45e3), Site("Mill", 12e3))


@pytest.fixture(scope="module")
def crossing():
    """Dry air over a ridge of 1850 m."""
    ridge = ridge_transect([0.0, 8e3, 25e3, 52e3, 60e3], [40.0, 40.0, 1850.0, 210.0, 210.0], spacing=500.0)
    vapour = mixing_ratio_from_dew_point(100400.0, 280.15)
    air = air_from_station(
        40.0, 100400.0, 290.15, vapour, 8.0, math.radians(270.0), crest_wind=(14.0, math.radians(270.0), 1850.0)
    )
    return cross(ridge, air, SITES, when=NIGHT, streamlines=40)


@pytest.fixture(scope="module")
def found(crossing):
    """At both sites."""
    return fire_at_sites(crossing, NIGHT, FireSettings(88.0, 400.0, RULES))


def test_indices_are_those_of_the_air_at_the_site(crossing, found):
    """Each index from the numbers the page shows: wind at 10 m, never the wind aloft."""
    for air, one in zip(crossing.lee, found, strict=True):
        t, u = air.temperature, air.relative_humidity
        assert one.indices.equilibrium_fuel_moisture == equilibrium_fuel_moisture(t, u)
        if air.wind is not None:
            assert one.indices.fosberg_index == fosberg_index(t, u, air.wind.at_10m)
            assert one.indices.fosberg_index < fosberg_index(t, u, air.wind.wind)
            assert one.indices.hot_dry_windy > 0.0


def test_layer_begins_with_the_pressure_of_the_site(crossing):
    """Hydrostatic above it, near the crossing's own pressure a kilometre up."""
    air = crossing.lee[0]
    weather = site_weather(air)
    pressure = layer_pressure(weather)
    assert pressure[0] == pytest.approx(air.pressure)
    place = int(np.argmin(np.abs(crossing.distance - air.distance)))
    z = air.elevation + 1000.0
    own = np.interp(z, crossing.height[place], crossing.air.pressure[place])
    level = int(np.flatnonzero(weather.height_above_ground == 1000.0)[0])
    np.testing.assert_allclose(pressure[level], own, rtol=2e-3)


def test_each_mover_turns_its_condition_where_it_says(crossing, found):
    """Round trip: the site with the input changed by that amount lies at the limit."""
    air, one = crossing.lee[0], found[0]
    change = {
        "wind across the crest": lambda x: with_more_wind(one.weather, crossing.flow.crest_wind, x),
        "source level": lambda x: with_other_source(one.weather, crossing.incoming, air.source_level, x)[1],
        "temperature": lambda x: with_warmer_air(one.weather, x),
        "dew point": lambda x: with_other_dew_point(one.weather, x),
    }
    seen = set()
    for threshold in one.thresholds:
        for condition, movers in zip(threshold.judged.rule.conditions, threshold.movers, strict=True):
            for move in movers:
                site = change[move.what](np.array([move.amount]))
                values = site_values(site, site_fire(site), RULES.rules, 0.03)
                np.testing.assert_allclose(values[condition.quantity], condition.limit, rtol=0.01)
                assert abs(move.amount) <= REACH[move.what][0]
                seen.add(move.what)
    assert seen == set(change)


def test_changes_have_the_signs_they_should(crossing, found):
    """More wind, more gust; warmer or from higher, drier; higher dew point, damper."""
    weather, air = found[0].weather, crossing.lee[0]
    for one in shifted(weather, crossing.incoming, crest_wind=crossing.flow.crest_wind, source_level=air.source_level):
        wet = humidity(one.weather)
        if one.what == "wind across the crest":
            assert np.all(np.diff(one.weather.gust_high) > 0.0)
        elif one.what == "temperature":
            assert np.all(np.diff(wet) <= 0.0)
        elif one.what == "dew point":
            assert np.all(np.diff(wet) >= 0.0)
        else:
            assert np.all(np.diff(one.weather.mixing_ratio) < 0.0)
            assert wet[-1] < wet[0]


def test_no_change_is_the_site_itself(crossing, found):
    """By each way of changing it."""
    weather, air = found[0].weather, crossing.lee[0]
    none = np.array([0.0])
    for same in (
        with_more_wind(weather, 10.0, none),
        with_warmer_air(weather, none),
        with_other_dew_point(weather, none),
        with_other_source(weather, crossing.incoming, air.source_level, none)[1],
    ):
        np.testing.assert_allclose(humidity(same), humidity(weather), rtol=1e-9)
        np.testing.assert_allclose(site_fire(same).fosberg_index, found[0].indices.fosberg_index, rtol=1e-9)


def test_members_give_what_each_gives_alone(found):
    """Stacked, every index is that of the member by itself; so is whether it meets a rule."""
    weather = found[0].weather
    other = replace(weather, temperature=weather.temperature + 5.0, wind=np.asarray(np.nan))
    both = stacked([weather, other])
    indices = site_fire(both, previous_code=88.0, drought_index=400.0)
    for number, one in enumerate((weather, other)):
        alone = site_fire(one, previous_code=88.0, drought_index=400.0)
        for name in alone.__dataclass_fields__:
            np.testing.assert_allclose(getattr(indices, name)[number], getattr(alone, name), rtol=1e-12, err_msg=name)
    met, known = rule_met(RULES.rules[1], site_values(both, indices, RULES.rules, 0.03))
    assert met.shape == (2,)
    assert known.tolist() == [True, False]


def test_night_is_drier_higher_up_and_damper_at_rest(found):
    """A still valley floor recovers most; what cools less stays drier; midnight in spring has a night of 9 to 15 h."""
    night = found[0].night
    assert night.floor_windy <= night.floor_still <= 1.0
    assert night.length_known
    assert 8 * 3600.0 < night.length < 15 * 3600.0
    assert night.mid_slope_height < night.ridge_height
    assert 0.0 < night.ridge <= 1.0
    assert night.mixing_height <= night.mixing_height_by_day


def test_night_without_a_time_is_assumed(crossing):
    """Twelve hours, said so; and no heat of the sun."""
    night = fire_at_sites(crossing, When())[0].night
    assert not night.length_known
    assert night.length == 12 * 3600.0
    assert night.mixing_height == night.mixing_height_by_day


def test_without_yesterdays_code_there_is_none(crossing):
    """Neither code nor spread index is guessed."""
    indices = fire_at_sites(crossing, NIGHT)[0].indices
    assert np.isnan(indices.fine_fuel_code)
    assert np.isnan(indices.initial_spread_index)
    assert np.isnan(indices.fosberg_index_with_drought)
    assert np.isfinite(indices.fosberg_index)


def test_flags_say_threshold_met_and_never_warning(found):
    """With region, rule, values, limits and what is open."""
    text = " ".join(fire_flags(found, RULES))
    assert "Fire threshold met at Lower Tarn: fuel (Tarn (invented)): Fosberg index" in text
    assert "threshold at least 20, met by" in text
    assert "warning" not in text.lower()
    assert fire_flags(found, None) == ()


def test_windward_sites_are_named(found):
    """Values there are those of air before the crest."""
    cautions = windward_cautions(found, RULES)
    assert any("Mill lies on the windward side" in text for text in cautions)
    assert windward_cautions(found, None) == ()


def test_in_a_cold_pool_the_wind_is_not_known():
    """Rules with a wind cannot be judged, unless the humidity already decides; the free air above still blows."""
    ridge = ridge_transect([0.0, 8e3, 25e3, 52e3, 60e3], [40.0, 40.0, 1850.0, 210.0, 210.0], spacing=500.0)
    vapour = mixing_ratio_from_dew_point(100400.0, 280.15)
    air = air_from_station(
        40.0, 100400.0, 290.15, vapour, 8.0, math.radians(270.0), crest_wind=(14.0, math.radians(270.0), 1850.0)
    )
    crossing = cross(ridge, air, (Site("Deep", 55e3),), lee=Lee(pool_top=500.0), streamlines=40)
    rules = replace(RULES, rules=(Rule("wind", (Condition(WIND, at_least=1.0),)),))
    one = fire_at_sites(crossing, When(), FireSettings(rules=rules))[0]
    assert one.in_pool
    assert one.thresholds[0].judged.status == "cannot be judged"
    assert np.isnan(one.indices.fosberg_index)
    assert one.indices.hot_dry_windy > 0.0
    deep = replace(one.weather, layer_wind=np.zeros_like(one.weather.layer_wind))
    assert np.isnan(site_fire(deep).hot_dry_windy)
    assert one.weather.layer_wind[0] == 0.0
    assert one.weather.layer_wind.max() > 5.0
    assert "is not known" in windward_cautions((one,), rules)[0]
