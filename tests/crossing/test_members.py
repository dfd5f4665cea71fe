"""Members side by side: what is found for one does not depend on the others."""

import math

import numpy as np
import pytest

from orolift.air.column_build import air_from_station
from orolift.air.column_change import with_values
from orolift.air.humidity import mixing_ratio_from_dew_point
from orolift.crossing.arrival import sampled
from orolift.crossing.pool import Lee
from orolift.crossing.settings import Settings
from orolift.crossing.solve import Ground, solve
from orolift.flow import members as members_module
from orolift.flow.airflow import highest_pressure
from orolift.terrain.features import features
from orolift.terrain.ridge import ridge_transect

WARMER = np.array([-4.0, 0.0, 3.0])
CRITICAL = np.array([0.8, 1.5, 2.5])
CLOUD_TIME = np.array([700.0, 1000.0, 1500.0])


@pytest.fixture(scope="module")
def setting():
    """A range of 1500 m and moist air."""
    x, h = np.array([0.0, 40e3, 60e3, 70e3, 90e3, 130e3]), np.array([0.0, 100.0, 1100.0, 1500.0, 200.0, 250.0])
    line = ridge_transect(x, h, bearing=math.pi / 2, spacing=500.0)
    vapour = float(mixing_ratio_from_dew_point(100500.0, 281.0))
    air = air_from_station(10.0, 100500.0, 284.0, vapour, 13.0, 1.5 * math.pi)
    return Ground(line, features(line), math.pi / 2, 1.0), air


def settings_of(which):
    return Settings(cloud_time=CLOUD_TIME[which], critical_value=CRITICAL[which])


@pytest.fixture(scope="module")
def together(setting):
    """Three members at once."""
    ground, air = setting
    many = with_values(air, temperature=air.temperature + WARMER[:, None])
    return solve(ground, many, settings_of(slice(None)), Lee(), members=3, streamlines=40)


@pytest.mark.parametrize("member", range(3))
def test_a_member_is_as_it_would_be_alone(setting, together, member):
    """Temperature to 1e-4 K, rain to 1e-5: each member has its own shortest wave, and settles by itself."""
    ground, air = setting
    one = with_values(air, temperature=air.temperature + WARMER[member])
    alone = solve(ground, one, settings_of(slice(member, member + 1)), Lee(), streamlines=40).streams
    found = together.streams
    assert np.array_equal(found.place, alone.place)
    np.testing.assert_allclose(found.air.temperature[:, member], alone.air.temperature[:, 0], atol=1e-4)
    np.testing.assert_allclose(found.flow.heights[member], alone.flow.heights[0], atol=1e-3)
    rain = found.falling.landed.sum(axis=0)
    assert rain.min() > 0.0
    assert rain[member] == pytest.approx(alone.falling.landed.sum(), rel=1e-5)


@pytest.mark.parametrize("pooled", [(1,), (0, 2)])
def test_members_with_a_pool_leave_the_others_as_they_are(setting, together, pooled):
    """One without a pool is as if none had any; one with a pool is as it would be alone, all that is kept of it."""
    ground, air = setting
    many = with_values(air, temperature=air.temperature + WARMER[:, None])
    lee = tuple(Lee(pool_top=1000.0 if i in pooled else 0.0) for i in range(3))
    found = solve(ground, many, settings_of(slice(None)), lee, members=3, streamlines=40)
    assert [pool is not None for pool in found.pools] == [i in pooled for i in range(3)]
    for i in range(3):
        one = with_values(air, temperature=air.temperature + WARMER[i])
        alone = solve(ground, one, settings_of(slice(i, i + 1)), lee[i], streamlines=40).streams
        expected, number = (alone, 0) if i in pooled else (together.streams, i)
        for name in ("pressure", "temperature", "vapour", "cloud", "condensed", "removed", "entropy"):
            values, known = (getattr(x.air, name) for x in (found.streams, expected))
            np.testing.assert_allclose(values[:, i], known[:, number], rtol=1e-5, atol=1e-8)
        np.testing.assert_allclose(found.streams.flow.heights[i], expected.flow.heights[number], atol=1e-3)
        assert found.streams.falling.landed[:, i].sum() == pytest.approx(expected.falling.landed[:, number].sum())
        assert found.streams.falling.beyond[i] == pytest.approx(expected.falling.beyond[number], rel=1e-4, abs=1e-9)
        assert found.streams.settled[i] == expected.settled[number]


def test_flow_in_groups_is_the_flow(together):
    """Members taken apart and put together again are the same arrays."""
    flow = together.streams.flow
    parts = [members_module.some_members(flow, np.array([i])) for i in range(3)]
    again = members_module.together(parts, [np.array([i]) for i in range(3)])
    for name in ("heights", "start_heights", "breaking", "speed_factor", "top_pressure", "critical_level"):
        assert np.array_equal(getattr(again, name), getattr(flow, name)), name
    assert np.array_equal(again.boundary.wave, flow.boundary.wave)


def test_flow_at_some_points_is_the_flow_there(together):
    """Round trip: streamlines, wind and pressure at every seventh point."""
    flow, at = together.streams.flow, np.arange(3, together.across.size, 7)
    some = members_module.some_points(flow, at)
    assert np.array_equal(some.heights, flow.heights[..., at])
    assert np.array_equal(some.speed_factor, flow.speed_factor[..., at])
    assert np.array_equal(highest_pressure(some, 10e3, 0.16), highest_pressure(flow, 10e3, 0.16)[..., at])


def test_sampling_is_by_straight_lines():
    """Against numpy's own, row by row, beyond both ends too."""
    rng = np.random.default_rng(1)
    levels, values = np.cumsum(rng.uniform(10.0, 90.0, (3, 9)), axis=-1), rng.normal(size=(3, 9))
    heights = rng.uniform(-50.0, 700.0, (3, 20))
    expected = [np.interp(*row) for row in zip(heights, levels, values, strict=True)]
    np.testing.assert_allclose(sampled(levels, values, heights), expected, atol=1e-12)
