"""The core of the marches, one evaluation of saturation a step, against the solvers that iterate to the end."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.air import equilibrium, phase, steps
from orolift.air.parcel import (
    Parcel,
    enthalpy,
    entropy,
    equilibrium_from_enthalpy,
    equilibrium_from_entropy,
)
from orolift.air.saturation import saturation_mixing_ratio

PLACES = 40
MARCH = {
    "warm": st.floats(250.0, 300.0),
    "humidity": st.floats(0.3, 1.6),
    "rise": st.floats(-6000.0, 6000.0),
    "freezing": st.booleans(),
}


def parcels(warm, humidity):
    """Air of many temperatures at 850 hPa, some of it cloudy, and some of it dry to the bone."""
    t = warm + np.linspace(-8.0, 8.0, PLACES)
    p = np.full(PLACES, 85e3)
    water = humidity * saturation_mixing_ratio(p, t) * np.linspace(0.7, 1.1, PLACES)
    water[-1] = 0.0
    return equilibrium_from_enthalpy(p, enthalpy(Parcel(p, t, water, np.zeros(PLACES)), freezing=False), water)


def scaled(parcel, freezing):
    """The same air for the core."""
    air = equilibrium_from_entropy(
        parcel.pressure, entropy(parcel, freezing=freezing), parcel.vapour + parcel.cloud, freezing=freezing
    )
    q = np.log(air.temperature * equilibrium.PER_TRIPLE)
    p = air.pressure * equilibrium.PER_TRIPLE_PRESSURE
    return air, steps.air_at(p, q, air.vapour + air.cloud, freezing=freezing)


def alike(found, expected):
    """Temperature to 1e-7 K, vapour to 1e-10, and saturation that belongs to the temperature."""
    np.testing.assert_allclose(phase.TRIPLE * found.t, expected.temperature, atol=1e-7, rtol=0.0)
    np.testing.assert_allclose(found.vapour, expected.vapour, atol=1e-10, rtol=0.0)
    assert ((found.water > found.vapour) <= (expected.cloud > -1e-10)).all()


@pytest.mark.parametrize("freezing", [True, False])
def test_many_places_are_solved_as_few_are(freezing):
    """Told apart into cloud and none first, or not: up and down through cloud base; what was given stays as it was."""
    parcel, air = scaled(parcels(272.0, 1.0), freezing)
    times = -(-steps.MANY // PLACES)
    many = steps.Air(*(np.tile(x, times) if x.ndim else x for x in air))
    s = entropy(parcel, freezing=freezing) * equilibrium.PER_RV
    for rise in (-3000.0, -300.0, 300.0):
        p = (parcel.pressure + rise) * equilibrium.PER_TRIPLE_PRESSURE
        few = steps.moved(air, p, np.log(p), s, freezing=freezing)
        p, water = np.tile(p, times), many.water.copy()
        found = steps.moved(many, p, np.log(p), np.tile(s, times), freezing=freezing)
        assert 0 < np.sum(few.water > few.vapour) < PLACES
        assert np.array_equal(many.water, water)
        for name in ("q", "vapour"):
            np.testing.assert_allclose(getattr(found, name), np.tile(getattr(few, name), times), atol=1e-11, rtol=0.0)
        np.testing.assert_allclose(found.log_saturation, np.tile(few.log_saturation, times), atol=1e-6, rtol=0.0)


@settings(max_examples=40)
@given(**MARCH)
def test_a_move_keeps_entropy(warm, humidity, rise, freezing):
    """Up or down by up to 60 hPa, through cloud base and both ends of the freezing range."""
    parcel, air = scaled(parcels(warm, humidity), freezing)
    s, p = entropy(parcel, freezing=freezing), parcel.pressure + rise
    expected = equilibrium_from_entropy(p, s, air.water, freezing=freezing)
    new = p * equilibrium.PER_TRIPLE_PRESSURE
    found = steps.moved(air, new, np.log(new), s * equilibrium.PER_RV, freezing=freezing)
    alike(found, expected)
    np.testing.assert_allclose(phase.R_VAPOUR * steps.entropy_of(found), s, atol=1e-6)


@settings(max_examples=40)
@given(heat=st.floats(-2000.0, 2000.0), change=st.floats(-0.5e-3, 0.5e-3), **MARCH)
def test_heat_and_water_keep_enthalpy(warm, humidity, rise, freezing, heat, change):
    """Warmed or cooled by up to 2 K, with water gained or lost."""
    del rise
    parcel, air = scaled(parcels(warm, humidity), freezing)
    water = np.maximum(air.water + change, 0.0)
    h = enthalpy(parcel, freezing=freezing) + heat + 2.5e6 * (water - air.water)
    expected = equilibrium_from_enthalpy(parcel.pressure, h, water, freezing=freezing)
    found = steps.heated(air, h * equilibrium.PER_ENTHALPY, water, freezing=freezing)
    alike(found, expected)
    back = steps.enthalpy_of(found) / equilibrium.PER_ENTHALPY
    np.testing.assert_allclose(back, h, atol=1e-4)


@pytest.mark.parametrize("freezing", [True, False])
def test_saturation_that_is_brought_along(freezing):
    """Where steps are short it is that of the new temperature, as evaluated there."""
    parcel, air = scaled(parcels(270.0, 1.2), freezing)
    s = entropy(parcel, freezing=freezing) * equilibrium.PER_RV
    for k in range(1, 30):
        new = (parcel.pressure - 40.0 * k) * equilibrium.PER_TRIPLE_PRESSURE
        air = steps.moved(air, new, np.log(new), s, freezing=freezing)
    log_e, bound, slope, _ = phase.condensate_and_bend(air.q, air.t, freezing)
    cloudy = air.water > air.vapour
    assert cloudy.any()
    np.testing.assert_allclose(air.log_saturation[cloudy], log_e[cloudy], atol=1e-11)
    np.testing.assert_allclose(air.bound[cloudy], bound[cloudy], atol=1e-9)
    np.testing.assert_allclose(
        np.broadcast_to(air.latent_slope, bound.shape)[cloudy], np.broadcast_to(slope, bound.shape)[cloudy], atol=1e-4
    )


def test_bend_is_the_derivative_of_the_slope():
    """Within the freezing range and outside, by central differences."""
    q = np.log(np.array([240.0, 256.0, 262.0, 268.0, 272.0, 280.0]) / phase.TRIPLE)
    slope = [phase.condensate(q + d, np.exp(q + d), freezing=True)[2] for d in (-1e-6, 1e-6)]
    bend = phase.condensate_and_bend(q, np.exp(q), freezing=True)[3]
    np.testing.assert_allclose(bend, (slope[1] - slope[0]) / 2e-6, rtol=1e-6, atol=1e-4)
