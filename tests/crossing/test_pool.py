"""Cold pools: displaced or not, how deep, and their own air."""

from types import SimpleNamespace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from orolift.air.column import IncomingAir, interpolated
from orolift.air.humidity import relative_humidity_from_mixing_ratio
from orolift.air.temperature import virtual_potential_temperature
from orolift.crossing.pool import Lee, chance_of_breaking_through, humidity_note, pool_air, pool_under


@given(deficit=st.floats(0.5, 15.0), foot=st.floats(0.0, 1500.0))
def test_depth_by_the_deficit(deficit, foot):
    """A pool is as deep as its deficit in virtual potential temperature at 10 K per km (design choice)."""
    warm = 290.0
    pool = pool_under(Lee(temperature=warm - deficit), foot, 95e3, warm, 0.004)
    top = virtual_potential_temperature(95e3, warm, 0.004)
    bottom = virtual_potential_temperature(95e3, float(pool.temperature[0]), float(pool.vapour[0]))
    assert pool.depth == pytest.approx(float(top - bottom) / 0.010, rel=0.01)
    assert pool.temperature[0] == pytest.approx(warm - deficit, abs=0.05)


@given(excess=st.floats(0.0, 10.0))
def test_warmer_air_than_the_arriving_is_no_pool(excess):
    """Lighter air is displaced whatever its depth."""
    pool = pool_under(Lee(temperature=290.0 + excess + 0.5), 200.0, 95e3, 290.0, 0.001)
    assert pool.depth == pytest.approx(0.0, abs=1e-9)


@pytest.mark.parametrize("lee", [Lee(temperature=284.0), Lee(pool_top=900.0)])
def test_a_pool_did_not_cross_and_keeps_the_vapour_of_the_incoming_air(lee):
    """Rain took vapour from the crossing air, not from the pool; cold air holds no more than 90 % of humidity."""
    moist = pool_under(lee, 300.0, 97e3, 291.0, 0.003, 0.006)
    assert moist.vapour[0] == pytest.approx(0.006)
    assert "of the incoming air" in humidity_note(lee, moist)[0]
    cold = pool_under(Lee(temperature=270.0), 300.0, 97e3, 291.0, 0.003, 0.006)
    assert relative_humidity_from_mixing_ratio(97e3, cold.temperature[0], cold.vapour[0]) == pytest.approx(
        0.9, abs=0.005
    )


def test_nothing_is_assumed_where_nothing_stays_or_a_sounding_knows():
    pool = pool_under(Lee(temperature=284.0), 300.0, 97e3, 291.0, 0.003, 0.006)
    assert humidity_note(Lee(temperature=284.0), None) == ()
    assert humidity_note(Lee(air=SimpleNamespace()), pool) == ()


def test_the_top_of_a_pool_is_neutral_to_what_rides_over_it():
    """At its top a pool is as heavy as the crossing air brought there: no jump."""
    pool = pool_under(Lee(pool_top=900.0), 300.0, 97e3, 291.0, 0.003)
    assert pool.top == 900.0
    gradient = np.diff(pool.temperature) / np.diff(pool.height)
    assert (gradient > -0.0005).all()  # 10 K per km of potential temperature is nearly isothermal
    at, vapour = pool_air(pool, 600.0)
    assert pool.temperature.min() <= float(at) <= pool.temperature.max()
    assert float(vapour) > 0.0


def test_a_lee_sounding_gives_the_pool_itself():
    """Up to the lowest level as warm, in virtual potential temperature, as the arriving air.

    By hand: potential temperature rises 22 K per km from 277.4 K, the arriving air has 286.5 K: 410 m.
    """
    height = np.arange(300.0, 12000.0, 50.0)
    temperature = np.where(height < 800.0, 275.0 + 0.012 * (height - 300.0), 281.0 - 0.006 * (height - 800.0))
    pressure = 97e3 * np.exp(-(height - 300.0) / 8000.0)
    still = np.zeros_like(height)
    air = IncomingAir(height, pressure, temperature, still + 0.002, still, still, still, ("measured",) * height.size)
    pool = pool_under(Lee(air=air), 300.0, 97e3, 284.0, 0.002)
    arriving = float(virtual_potential_temperature(97e3, 284.0, 0.002))
    there = interpolated(air, pool.top)
    assert pool.depth == pytest.approx(410.0, abs=15.0)
    found = virtual_potential_temperature(there.pressure, there.temperature, there.vapour)
    assert float(found) == pytest.approx(arriving, abs=0.3)
    assert pool.temperature[0] == pytest.approx(275.0)


def test_nothing_known_is_no_pool():
    """Without lee data there is no pool, and a chance instead."""
    assert not Lee().known
    assert pool_under(Lee(), 300.0, 97e3, 284.0, 0.002).depth == 0.0


@given(wind=st.floats(0.0, 40.0), more=st.floats(0.1, 10.0), sun=st.floats(-1.5, 1.5))
def test_the_chance_grows_with_wind_and_sun(wind, more, sun):
    """Monotone, and between 0 and 1."""
    one = chance_of_breaking_through(sun, wind)
    assert 0.0 <= one <= 1.0
    assert chance_of_breaking_through(sun, wind + more) >= one
    assert chance_of_breaking_through(min(sun + 0.2, 1.5), wind) >= one - 1e-12
    assert chance_of_breaking_through(-1.0, wind) <= chance_of_breaking_through(None, wind)
