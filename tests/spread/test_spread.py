"""The spread of a crossing: variance where it is known, nothing by chance of the workers, failures counted."""

from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace

import numpy as np
import pytest

from orolift.cli.executors import executor_of
from orolift.crossing.layer_above import own_differences
from orolift.crossing.result import Site, When
from orolift.crossing.situation import crossing_of
from orolift.errors import OutOfRangeError
from orolift.spread import spread as module
from orolift.spread.at_sites import values_with_method_error, with_method_error
from orolift.spread.ranges import range_of, remarks
from orolift.spread.spread import spread_of
from orolift.spread.uncertainty import INPUTS, METHOD, Uncertainty, latin_hypercube, normal

NONE = Uncertainty(**dict.fromkeys(INPUTS, 0.0))
TENTH = 1.2815515655446004  # NIST/SEMATECH e-Handbook, 1.3.6.7.1: normal quantile of 0.9


def test_variance_of_a_linear_case(stable, stable_crossing):
    """In blocked air a site has the temperature of the column at its height: variances add, with the height squared.

    200 members of a hypercube give the variance of a sum to a few percent.
    """
    assert stable_crossing.lee[0].in_blocked_air
    uncertainty = replace(NONE, temperature=1.2, lapse_rate=2.0e-3)
    found = spread_of(stable, stable_crossing, uncertainty, members=60, seed=4, streamlines=24)
    height = 300.0 - stable.incoming.height[0]
    expected = 1.2**2 + (2.0e-3 * height) ** 2
    assert np.var(found.sites["temperature"][:, 0]) == pytest.approx(expected, rel=0.05)
    low, high = range_of(found.sites["temperature"][:, 0])
    assert high - low == pytest.approx(2.0 * TENTH * expected**0.5, rel=0.08)
    assert found.varied == ("temperature", "lapse_rate")


@pytest.fixture(scope="module")
def small(moist, moist_crossing):
    """Twenty members, worked out here in two groups."""

    def run(**options):
        return spread_of(moist, moist_crossing, Uncertainty(), members=20, streamlines=24, **options)

    with pytest.MonkeyPatch.context() as patched:
        patched.setattr(module, "CHUNK", 10)
        yield run, run(seed=2)


def same(one, other):
    """Whether two spreads are equal to the last bit."""
    for first, second in ((one.values, other.values), (one.sites, other.sites), (one.full_sites, other.full_sites)):
        assert first.keys() == second.keys()
        for name, value in first.items():
            np.testing.assert_array_equal(value, second[name], err_msg=name)


def test_processes_and_threads_give_the_same_numbers(small):
    """However many there are, in whatever order they end."""
    run, here = small
    with executor_of(2) as executor:
        same(here, run(seed=2, executor=executor))
    told = []
    with ThreadPoolExecutor(3) as executor:
        same(here, run(seed=2, executor=executor, told=told.append))
    assert told == [10, 10]


def test_groups_hardly_matter(small, monkeypatch):
    """Marched all together: the same to what roots are found to."""
    run, here = small
    monkeypatch.setattr(module, "CHUNK", 20)
    whole = run(seed=2)
    np.testing.assert_allclose(whole.sites["temperature"], here.sites["temperature"], atol=3e-3)
    np.testing.assert_allclose(whole.values["total"], here.values["total"], rtol=2e-3, atol=1e-3)


def test_another_seed_gives_other_members_and_a_like_range(small):
    """Twenty members know a range to about a third of itself."""
    run, here = small
    other = run(seed=3)
    assert not np.array_equal(other.sites["temperature"], here.sites["temperature"])
    (low, high), (other_low, other_high) = (range_of(one.sites["temperature"][:, 1]) for one in (here, other))
    assert abs(other_low - low) < 0.5 * (high - low)
    assert abs(other_high - high) < 0.5 * (high - low)


def test_wider_inputs_never_narrow_the_range(moist, moist_crossing):
    """Twice as uncertain in everything: wider at every site, within what 20 members can tell."""
    wide = Uncertainty(
        temperature=2.0,
        dew_point=2.0,
        wind=0.3,
        lapse_rate=0.6e-3,
        wind_from=0.35,
        pressure=100.0,
        cloud_time=0.9,
        fall_time=0.9,
    )
    narrow = Uncertainty(
        temperature=1.0,
        dew_point=1.0,
        wind=0.15,
        lapse_rate=0.3e-3,
        wind_from=0.17,
        pressure=50.0,
        cloud_time=0.45,
        fall_time=0.45,
    )
    one, other = (
        spread_of(moist, moist_crossing, uncertainty, members=20, seed=1, streamlines=24)
        for uncertainty in (narrow, wide)
    )
    for name in ("temperature", "dew_point", "relative_humidity"):
        for site in (0, 1):
            before, after = (range_of(found.sites[name][:, site]) for found in (one, other))
            assert after[1] - after[0] > before[1] - before[0], name


def test_a_member_that_fails_is_counted_and_the_rest_goes_on(with_pressure, moist_crossing):
    """Half of these columns have more than 1100 hPa at the ground, which is refused."""
    uncertainty = replace(NONE, pressure=1000.0)
    found = spread_of(with_pressure(110000.0), moist_crossing, uncertainty, members=10, streamlines=24)
    assert len(found.failed) == 5
    assert "ground_pressure" in found.failed[0].reason
    assert found.crosses.sum() == 5
    assert np.isfinite(found.sites["temperature"]).sum() == 5 * len(moist_crossing.lee)
    assert range_of(found.full_sites["temperature"][:, 1]) is not None
    assert remarks(found)[0].startswith("5 of 10 members could not be worked out: ground_pressure")


def test_members_that_do_not_cross_are_counted(calm):
    """And said."""
    found = spread_of(calm, crossing_of(calm), replace(NONE, wind=1.0), members=12, streamlines=24)
    still = 12 - found.crosses.sum()
    assert 0 < still < 12
    assert remarks(found)[0].startswith(f"In {still} of 12 members the wind across the crest is 2 m/s or less")


def test_members_without_ice_are_some_of_them(moist, moist_crossing):
    """Half of the members without freezing, each in its own place: the others are as before."""
    level = latin_hypercube(10, 18, 1)
    uncertainty = replace(NONE, temperature=1.0)
    frozen = spread_of(moist, moist_crossing, uncertainty, members=10, seed=1, streamlines=24)
    half = spread_of(moist, moist_crossing, replace(uncertainty, liquid_cloud=0.5), members=10, seed=1, streamlines=24)
    liquid = level[:, INPUTS.index("liquid_cloud")] < 0.5
    assert liquid.sum() == 5
    change = np.abs(half.values["total"] - frozen.values["total"])
    assert change[~liquid].max() < 1e-2 * frozen.values["total"].max()
    assert np.array_equal(half.values["column_vapour"][~liquid], frozen.values["column_vapour"][~liquid])


def test_the_error_of_the_method_adds_its_variance(moist_crossing):
    """Without any other doubt the full range is that of the stated error, at every site, both signs alike."""
    members = 400
    z = {name: normal(column) for name, column in zip(METHOD, latin_hypercube(members, 3, 1).T, strict=True)}
    one = {
        "temperature": 285.0,
        "warming": 3.0,
        "pressure": 9.6e4,
        "mixing_ratio": 5e-3,
        "wind": 10.0,
        "wind_10m": 7.0,
        "gust": 12.0,
    }
    sites = {name: np.full((members, 2), value) for name, value in one.items()}
    stated = Uncertainty(model_temperature=1.5, model_vapour=0.5e-3)
    full = with_method_error(sites, moist_crossing, stated, z)
    for site in (0, 1):
        low, high = range_of(full["temperature"][:, site])
        assert (low, high) == pytest.approx((285.0 - 1.5 * TENTH, 285.0 + 1.5 * TENTH), abs=0.03)
        low, high = range_of(full["mixing_ratio"][:, site])
        assert (low, high) == pytest.approx((5e-3 - 0.5e-3 * TENTH, 5e-3 + 0.5e-3 * TENTH), abs=2e-5)
        wind = moist_crossing.lee[site].wind
        if wind is not None:
            low, high = range_of(full["wind"][:, site])
            assert low / 10.0 == pytest.approx(wind.low / wind.wind, rel=0.03)
            assert high / 10.0 == pytest.approx(wind.high / wind.wind, rel=0.03)
    assert full["relative_humidity"].max() <= 1.0 + 1e-9
    again = with_method_error(sites, moist_crossing, Uncertainty(model_temperature=0.0, model_vapour=0.0), z)
    np.testing.assert_allclose(again["temperature"], sites["temperature"])
    np.testing.assert_allclose(again["mixing_ratio"], sites["mixing_ratio"])


def test_the_layer_above_without_doubt_about_the_air_is_that_of_the_answer(stable):
    """With heat from the ground and air that went round, both taken off or mixed in as in the answer."""
    noon = When(1793736000.0, -121.0, -46.9)
    case = replace(stable, sites=(Site("Behind", 78e3),), when=noon)
    crossing = crossing_of(case)
    spread = spread_of(case, crossing, NONE, members=10, seed=1)
    assert spread.sites["warming_surface_heating"].min() > 0.2
    assert spread.sites["went_round"].min() > 0.1
    for name, value in own_differences(crossing.lee[0]).items():
        np.testing.assert_allclose(spread.sites[name][:, 0], value, atol=0.1, err_msg=name)


def test_the_lee_wind_without_doubt_about_the_air_is_that_of_the_methods(moist, moist_crossing):
    """By the inputs its range closes on the answer; in full its 10 and 90 % are the range of the methods."""
    spread = spread_of(moist, moist_crossing, NONE, members=10, seed=1)
    winds = moist_crossing.winds
    np.testing.assert_allclose(spread.values["lee_wind"], winds.strongest, atol=0.02)
    assert np.all(spread.values["windstorm_conditions"] == sum(one.met is True for one in winds.conditions))
    z = {"model_wind": normal(latin_hypercube(400, 3, 1)[:, 2])}
    apart = replace(moist_crossing, winds=replace(winds, strongest=20.0, low=16.0, high=30.0))
    full = values_with_method_error({"lee_wind": np.full(400, 20.0)}, apart, z)
    assert range_of(full["lee_wind"]) == pytest.approx((16.0, 30.0), rel=0.02)


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"members": 1}, "members: 1 is outside 10 to 100000. Fewer than 10 have no range"),
        ({"members": 0}, "members: 0 is outside"),
        ({"members": 200_000}, "members: 200000 is outside"),
        ({"seed": -1}, "seed: -1 is below 0"),
    ],
)
def test_numbers_that_make_no_spread_are_refused(moist, moist_crossing, options, message):
    """Before anything is worked out."""
    with pytest.raises(OutOfRangeError, match=message):
        spread_of(moist, moist_crossing, Uncertainty(), **options)
