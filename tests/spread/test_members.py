"""Members marched together are what each of them gives alone."""

from dataclasses import replace

import numpy as np
import pytest

from orolift.crossing.layer_above import own_differences
from orolift.crossing.member_values import band_name
from orolift.crossing.members import Members, members_of
from orolift.crossing.pool import Lee
from orolift.crossing.rainfall import BAND_STEPS
from orolift.crossing.result import Site, When
from orolift.crossing.situation import crossing_of
from orolift.flow.downslope import ESTIMATES
from orolift.rain.winter import bands_of_sides, winter_flags
from orolift.spread.at_sites import alike, spread_out
from orolift.spread.draws import draws_of, variation_of
from orolift.spread.uncertainty import COLUMNS, Uncertainty, latin_hypercube

FIELDS = ("pressure", "temperature", "vapour", "cloud", "eastward_wind", "northward_wind")
NEAR = {
    "temperature": 2e-3,
    "dew_point": 3e-3,
    "pressure": 2.0,
    "mixing_ratio": 2e-6,
    "wind": 0.05,
    "wind_10m": 0.05,
    "gust": 0.1,
    "source_level": 0.5,
    "warming": 2e-3,
    "upwind_temperature": 1e-9,
    "upwind_dew_point": 1e-9,
    "went_round": 1e-4,
    "popular_picture": 1e-3,
    "descent_only": 1e-3,
    "rain": 2e-6,
}
"""How near: roots are found to 1e-3 K, and a member may be given a step more for another's sake."""


@pytest.fixture(scope="module", params=["no pool", "pool"])
def both(request, moist):
    """Members together, and the situations of some of them alone."""
    whole = replace(moist, lee=Lee(temperature=281.0)) if request.param == "pool" else moist
    uncertainty = Uncertainty(going_round_share=0.0, surface_heat=0.0, lee_temperature=0.0)
    drawn = draws_of(whole, uncertainty, latin_hypercube(5, len(COLUMNS), 3))
    variation = variation_of(whole, uncertainty, drawn, freezing=True)
    found = members_of(whole, variation)
    alone = {}
    for i in (0, 4):
        air = replace(variation.incoming, **{name: getattr(variation.incoming, name)[i] for name in FIELDS})
        own = variation.settings
        settings = replace(
            own,
            critical_value=own.critical_value[i],
            cloud_time=own.cloud_time[i],
            fall_time=own.fall_time[i],
            mixing_depth=own.mixing_depth[i],
        )
        alone[i] = crossing_of(replace(whole, incoming=air, settings=settings))
    return found, alone


def test_sites_are_those_of_a_crossing_alone(both):
    """Air, wind, source level and the comparisons, on both sides of the range."""
    found, alone = both
    for i, crossing in alone.items():
        for number, place in enumerate(crossing.lee):
            wind = place.wind
            own = {name: getattr(place, name) for name in NEAR if hasattr(place, name) and name != "wind"}
            if wind is not None:
                own |= {"wind": wind.wind, "wind_10m": wind.at_10m, "gust": 0.5 * (wind.gust_low + wind.gust_high)}
            for name, value in own.items():
                here = found.sites[name][i, number]
                assert (value is None and np.isnan(here)) or here == pytest.approx(value, abs=NEAR[name]), name
            assert bool(found.sites["in_pool"][i, number]) == place.in_pool


def test_the_budget_is_that_of_a_crossing_alone(both):
    """Part by part; they add up to the warming."""
    found, alone = both
    names = ("descent", "latent", "going_round", "mixing", "surface_heating", "pressure")
    for i, crossing in alone.items():
        for number, place in enumerate(crossing.lee):
            if place.parts is None:
                continue
            parts = [found.sites[f"warming_{name}"][i, number] for name in names]
            assert parts == pytest.approx([getattr(place.parts, name) for name in names], abs=2e-3)
            assert sum(parts) == pytest.approx(found.sites["warming"][i, number], abs=1e-6)


def test_the_layer_above_a_site_is_that_of_a_crossing_alone(both):
    """Without the heat of the ground, to the 0.1 K that mixing by temperature instead of heat leaves open."""
    found, alone = both
    told = 0
    for i, crossing in alone.items():
        for number, place in enumerate(crossing.lee):
            for name, value in own_differences(place).items():
                here = found.sites[name][i, number]
                assert (value is None and np.isnan(here)) or here == pytest.approx(value, abs=0.1), name
                told += value is not None
    assert told


def test_the_whole_is_that_of_a_crossing_alone(both):
    """Blocking, cloud, rain and pressure."""
    found, alone = both
    for i, crossing in alone.items():
        flow, water, rain = crossing.flow, crossing.water, crossing.rain
        own = {
            "cross_range_wind": (flow.crest_wind, 1e-9),
            "nondimensional_height": (flow.nondimensional_height, 1e-9),
            "dividing_height": (flow.dividing_height, 1e-6),
            "blocked_top": (flow.blocked_top, 1e-6),
            "going_round_share": (flow.going_round_share, 1e-9),
            "breaks_through": (flow.break_through_chance, 1e-9),
            "pressure_difference": (flow.pressure_difference, 3.0),
            "cloud_base": (crossing.cloud.base, 0.5),
            "rain_out_share": (water.removed / water.condensed, 1e-3),
            "drying_ratio": (water.removed / water.vapour_in, 1e-4),
            "drying_ratio_full_column": (water.removed / water.column_vapour_flux, 1e-4),
            "windward_share": (rain.windward_share, 1e-3),
            "peak_rate": (rain.peak_rate, 1e-5),
            "total": (rain.total, 0.05),
            "cloud_end": (crossing.cloud.end, 0.5),
            "vapour_in": (water.vapour_in, 0.05),
            "condensed": (water.condensed, 0.05),
            "column_vapour_flux": (water.column_vapour_flux, 1e-6),
            "evaporated_share": (water.evaporated / (water.removed + water.evaporated + water.beyond), 1e-3),
            "pool_top": (None if crossing.pool is None else crossing.pool.top, 1.0),
            "wind_over_pool": (None if crossing.pool is None else float(crossing.wind[-1, 0]), 0.02),
            "critical_level": (flow.critical_level, 1.0),
            **{
                band_name("rain", step, band.side, round(band.lower / step)): (band.rate, 1e-5)
                for step in BAND_STEPS
                for band in bands_of_sides(crossing, step=step)
            },
            **{f"lee_band_{i}": (band[2], 1e-3) for i, band in enumerate(rain.lee_bands)},
        }
        for name, (value, near) in own.items():
            here = found.values[name][i]
            assert (value is None and np.isnan(here)) or here == pytest.approx(value, abs=near), name


@pytest.mark.parametrize("background", [0.0, 0.3 / 3600.0], ids=["no background", "background"])
@pytest.mark.parametrize("lee", [None, Lee(temperature=268.0)], ids=["no pool", "cold pool"])
def test_dangers_of_cold_ground_are_those_of_a_crossing_alone(moist, background, lee):
    """Rain on snow is flagged up to the highest ground with rain and no higher; freezing rain where a member has it."""
    whole = replace(moist, lee=lee, background=background)
    uncertainty = Uncertainty(going_round_share=0.0, surface_heat=0.0, lee_temperature=0.0)
    drawn = draws_of(whole, uncertainty, latin_hypercube(3, len(COLUMNS), 3))
    variation = variation_of(whole, uncertainty, drawn, freezing=True)
    found = members_of(whole, variation)
    names = ("critical_value", "cloud_time", "fall_time", "mixing_depth")
    told = []
    for i in range(3):
        own = replace(variation.settings, **{name: getattr(variation.settings, name)[i] for name in names})
        air = replace(variation.incoming, **{name: getattr(variation.incoming, name)[i] for name in FIELDS})
        crossing = crossing_of(replace(whole, incoming=air, settings=own))
        highest = found.values["rain_up_to"][i]
        assert np.isfinite(highest)

        def flagged(cover, what, crossing=crossing):
            return [flag for flag in winter_flags(crossing, snow_cover_above=cover) if flag.startswith(what)]

        assert flagged(highest - 1.0, "Rain on snow")
        assert not flagged(highest + 1.0, "Rain on snow")
        assert bool(flagged(None, "Freezing rain")) == bool(found.values["freezing_rain"][i])
        told.append(found.values["freezing_rain"][i])
    assert any(told) == (lee is not None)


def test_rotation_matters_by_wind_and_stability(moist):
    """Definitions: the Rossby number goes with the wind across the crest, the deformation radius with N."""
    placed = replace(moist, when=When(None, None, -46.9))
    uncertainty = Uncertainty(wind=0.2)
    drawn = draws_of(placed, uncertainty, latin_hypercube(5, len(COLUMNS), 3))
    values = members_of(placed, variation_of(placed, uncertainty, drawn, freezing=True), streamlines=24).values
    flow = crossing_of(placed).flow
    number, radius = values["rossby_number"], values["deformation_radius"]
    assert number == pytest.approx(flow.rossby_number * values["cross_range_wind"] / flow.crest_wind)
    assert radius == pytest.approx(flow.deformation_radius * values["stability"] / flow.stability)


def test_the_lee_wind_is_that_of_a_crossing_alone(both):
    """The strongest, its place, each method and each condition: one solution for all members changes none."""
    found, alone = both
    for i, crossing in alone.items():
        winds = crossing.winds
        assert found.values["lee_wind"][i] == pytest.approx(winds.strongest, abs=0.05)
        own = {one.key: one.wind for one in winds.estimates}
        for key in ESTIMATES:
            assert found.values[f"lee_wind_{key}"][i] == pytest.approx(own.get(key, np.nan), abs=0.1, nan_ok=True), key
        for one in winds.conditions:
            assert found.values[f"windstorm_{one.key}"][i] == one.met, one.key
        held = sum(one.met is True for one in winds.conditions)
        assert found.values["windstorm_conditions"][i] == held


def test_a_member_without_enough_wind_is_no_error(calm):
    """It counts as no crossing, and has no values; the others are as ever."""
    uncertainty = Uncertainty(wind=1.0)
    drawn = draws_of(calm, uncertainty, latin_hypercube(8, len(COLUMNS), 1))
    found = members_of(calm, variation_of(calm, uncertainty, drawn, freezing=True), streamlines=30)
    assert 0 < found.crosses.sum() < 8
    assert np.array_equal(found.values["cross_range_wind"] > 2.0, found.crosses)
    assert np.array_equal(np.isfinite(found.values["temperature"]), found.crosses)
    assert np.array_equal(np.isfinite(found.sites["temperature"][:, 0]), found.crosses)
    drawn["wind"] = np.full(8, 0.2)
    none = members_of(calm, variation_of(calm, uncertainty, drawn, freezing=True))
    assert not none.crosses.any()
    assert none.sites == {}


def test_many_places_that_are_about_the_same_share_one():
    """Every place keeps one within 1 km and 100 m of it, and its column; a few keep their own."""
    places = tuple(Site(f"P{i}", 50e3 + 137.0 * i, 300.0 + 11.0 * i) for i in range(60))
    kept, back = alike(places)
    assert len(kept) < 30
    for place, number in zip(places, back, strict=True):
        assert abs(kept[number].distance - place.distance) <= 1000.0
        assert abs(kept[number].elevation - place.elevation) <= 100.0
    few, own = alike(places[:24])
    assert few == places[:24]
    assert own.tolist() == list(range(24))
    columns = np.arange(2.0 + len(kept))[np.newaxis]
    spread = spread_out(Members(np.ones(1, bool), {}, {"temperature": columns}), 2, back)
    assert spread.sites["temperature"][0].tolist() == [0.0, 1.0, *(2.0 + back)]
