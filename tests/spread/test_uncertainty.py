"""Draws: one in each part, normal, log-normal and cut as they should be, and physical."""

from dataclasses import fields

import numpy as np
import pytest
from scipy import stats

from orolift.air.humidity import relative_humidity_from_mixing_ratio
from orolift.errors import OutOfRangeError
from orolift.spread.draws import columns, draws_of, variation_of, what_varies
from orolift.spread.uncertainty import (
    COLUMNS,
    INPUTS,
    MOST,
    Uncertainty,
    checked,
    cut_normal,
    latin_hypercube,
    log_normal,
    normal,
)


@pytest.mark.parametrize("members", [10, 32, 200])
def test_one_number_in_each_part_of_each_column(members):
    """What makes it a Latin hypercube: McKay, Beckman and Conover (1979)."""
    parts = np.sort(np.floor(members * latin_hypercube(members, 18, 5)), axis=0)
    assert np.array_equal(parts, np.tile(np.arange(members)[:, None], (1, 18)))


def test_columns_are_less_correlated_than_chance_leaves_them():
    """The numbers in each column are those of scipy; their order is changed, and fills the space as well."""
    plain = stats.qmc.LatinHypercube(18, seed=np.random.default_rng(1)).random(32)
    own = latin_hypercube(32, 18, 1)
    np.testing.assert_allclose(np.sort(own, axis=0), np.sort(plain, axis=0), atol=1e-7)
    among, by_chance = (np.corrcoef(sample, rowvar=False) - np.eye(18) for sample in (own, plain))
    assert np.abs(among).max() < 0.5 * np.abs(by_chance).max()
    spread = np.mean([stats.qmc.discrepancy(latin_hypercube(64, 2, seed)) for seed in range(10)])
    theirs = [stats.qmc.discrepancy(stats.qmc.LatinHypercube(2, seed=seed).random(64)) for seed in range(10)]
    assert spread < 1.2 * np.mean(theirs)


def test_the_seed_decides():
    """The same numbers again, and others with another seed."""
    assert np.array_equal(latin_hypercube(20, 3, 7), latin_hypercube(20, 3, 7))
    assert not np.array_equal(latin_hypercube(20, 3, 7), latin_hypercube(20, 3, 8))


def test_distributions_are_those_of_scipy():
    """Quantiles of the normal, of the log-normal with its relative deviation, and of the cut normal."""
    level = np.linspace(0.01, 0.99, 21)
    np.testing.assert_allclose(normal(level), stats.norm.ppf(level), atol=1e-8)
    width = np.sqrt(np.log(1.25))
    np.testing.assert_allclose(log_normal(level, 0.5), stats.lognorm.ppf(level, width), rtol=1e-8)
    assert stats.lognorm.std(width) / stats.lognorm.mean(width) == pytest.approx(0.5)
    for center in (0.0, 0.4, 0.75):
        cut = stats.truncnorm.ppf(level, (0.0 - center) / 0.2, (0.8 - center) / 0.2, center, 0.2)
        np.testing.assert_allclose(cut_normal(level, np.full(21, center), 0.2, 0.0, 0.8), cut, atol=1e-8)
    assert np.array_equal(cut_normal(level, np.full(21, 0.9), 0.0, 0.0, 0.8), np.full(21, 0.9))


def test_columns_stay_physical(moist):
    """Never more vapour than saturation, winds turned and grown, heights as they were."""
    level = latin_hypercube(40, len(COLUMNS), 2)
    drawn = draws_of(moist, Uncertainty(temperature=3.0, dew_point=6.0), level)
    air = columns(moist.incoming, drawn, freezing=True)
    humidity = relative_humidity_from_mixing_ratio(air.pressure, air.temperature, air.vapour)
    low = air.height < 3000.0
    assert np.all(humidity[:, low] <= 1.0 + 1e-6)
    speed = np.hypot(air.eastward_wind, air.northward_wind) / np.hypot(
        moist.incoming.eastward_wind, moist.incoming.northward_wind
    )
    np.testing.assert_allclose(speed, np.broadcast_to(drawn["wind"][:, None], speed.shape), rtol=1e-9)
    was = np.arctan2(moist.incoming.eastward_wind[0], moist.incoming.northward_wind[0])
    turned = np.arctan2(air.eastward_wind[:, 0], air.northward_wind[:, 0]) - was
    np.testing.assert_allclose(np.angle(np.exp(1j * turned)), drawn["wind_from"], atol=1e-9)


def test_options_stay_where_they_make_sense(moist):
    """Critical values between 0.75 and 3, shares between 0 and 0.8, times above 0."""
    level = latin_hypercube(200, len(COLUMNS), 2)
    uncertainty = Uncertainty(critical_value=2.0, going_round_share=0.5, cloud_time=1.5)
    drawn = draws_of(moist, uncertainty, level)
    found = variation_of(moist, uncertainty, drawn, freezing=True)
    assert 0.75 <= found.settings.critical_value.min() < found.settings.critical_value.max() <= 3.0
    assert np.median(found.settings.critical_value) == pytest.approx(1.5, rel=0.02)
    share = found.share(np.full(200, 0.4))
    assert 0.0 <= share.min() < 0.05
    assert 0.75 < share.max() <= 0.8
    assert found.settings.cloud_time.min() >= 50.0


def test_nothing_uncertain_is_the_case_itself(moist):
    """With all deviations 0, every member is the case."""
    none = Uncertainty(**dict.fromkeys(INPUTS, 0.0))
    drawn = draws_of(moist, none, latin_hypercube(4, len(COLUMNS), 1))
    found = variation_of(moist, none, drawn, freezing=True)
    for name in ("pressure", "temperature", "vapour", "eastward_wind"):
        own = getattr(moist.incoming, name)
        np.testing.assert_allclose(getattr(found.incoming, name), np.tile(own, (4, 1)), rtol=1e-6, atol=1e-9)
    np.testing.assert_allclose(found.settings.critical_value, 1.5)
    np.testing.assert_allclose(found.share(np.full(4, 0.3)), 0.3)
    assert what_varies(moist, none) == ()


def test_every_input_has_a_field_and_a_limit():
    """The columns of the hypercube are the fields of the uncertainty, in their order."""
    assert tuple(field.name for field in fields(Uncertainty))[: len(INPUTS)] == INPUTS


@pytest.mark.parametrize("name", MOST)
def test_a_deviation_out_of_range_is_named(name):
    """Negative ones, and ones that cannot be meant."""
    for wrong in (-0.1, 1.01 * MOST[name][0]):
        with pytest.raises(OutOfRangeError, match=f"{name}: .*one standard deviation"):
            checked(Uncertainty(**{name: wrong}))
