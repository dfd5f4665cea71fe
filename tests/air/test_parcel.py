"""Parcels: conservation laws, returns, and a printed exercise over a mountain."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from orolift.air.parcel import (
    Parcel,
    ascent,
    condensate_entropy,
    enthalpy,
    entropy,
    equilibrium_from_enthalpy,
    equilibrium_from_entropy,
    moved_to,
    without_condensate,
)
from orolift.air.potential import wet_bulb_potential_temperature
from orolift.air.saturation import (
    latent_heat,
    latent_heat_of_fusion,
    latent_heat_of_vaporisation,
    saturation_mixing_ratio,
    saturation_vapour_pressure,
)
from orolift.constants import (
    HEAT_CAPACITY_DRY_AIR,
    HEAT_CAPACITY_ICE,
    HEAT_CAPACITY_LIQUID,
    HEAT_CAPACITY_VAPOUR,
    R_DRY,
    R_VAPOUR,
)
from orolift.errors import OutOfRangeError


def many_parcels(freezing=True, count=2000):
    """Parcels from 225 to 308 K, about a quarter of them cloudy."""
    random = np.random.default_rng(5)
    p, t = random.uniform(4e4, 1.05e5, count), random.uniform(225.0, 308.0, count)
    saturated = saturation_mixing_ratio(p, t, freezing=freezing)
    v = np.minimum(saturated, saturated * random.uniform(0.0, 1.33, count))
    return Parcel(p, t, v, np.where(v == saturated, random.uniform(0.0, 0.012, count), 0.0))


def one_parcel(pressure, celsius, vapour, cloud=0.0):
    """A single parcel from hPa, Celsius and g per kg, as exercises give it."""
    numbers = (pressure * 100.0, celsius + 273.15, vapour / 1000.0, cloud / 1000.0)
    return Parcel(*(np.array(number) for number in numbers))


def volume(parcel):
    """Cubic metres per kg of dry air: two ideal gases, condensate without volume."""
    return (R_DRY + parcel.vapour * R_VAPOUR) * parcel.temperature / parcel.pressure


# -- laws ---------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("freezing", [True, False])
def test_reversible_move_returns_exactly(freezing):
    """Up or down anywhere and back: temperature to 1e-10 K, water to rounding, entropy the same on the way."""
    parcel = many_parcels(freezing)
    there = moved_to(parcel, np.random.default_rng(6).uniform(2e4, 1.1e5, parcel.pressure.size), freezing=freezing)
    back = moved_to(there, parcel.pressure, freezing=freezing)
    np.testing.assert_allclose(back.temperature, parcel.temperature, rtol=0.0, atol=1e-10)
    np.testing.assert_allclose(back.vapour, parcel.vapour, rtol=0.0, atol=1e-15)
    np.testing.assert_allclose(there.vapour + there.cloud, parcel.vapour + parcel.cloud, rtol=0.0, atol=1e-17)
    np.testing.assert_allclose(
        entropy(there, freezing=freezing), entropy(parcel, freezing=freezing), rtol=0.0, atol=1e-10
    )


@given(
    pressure=st.floats(5e4, 1.05e5),
    temperature=st.floats(240.0, 308.0),
    humidity=st.floats(0.0, 1.0),
    by_way_of=st.lists(st.floats(2e4, 1.1e5), min_size=1, max_size=6),
    freezing=st.booleans(),
)
def test_way_between_does_not_matter(pressure, temperature, humidity, by_way_of, freezing):
    """However it travels, the parcel comes back as it was."""
    v = humidity * saturation_mixing_ratio(pressure, temperature, freezing=freezing)
    parcel = Parcel(np.array(pressure), np.array(temperature), v, np.array(0.0))
    for p in [*by_way_of, pressure]:
        parcel = moved_to(parcel, p, freezing=freezing)
    assert abs(float(parcel.temperature) - temperature) < 1e-10
    assert float(parcel.cloud) <= 1e-14


@pytest.mark.parametrize("freezing", [True, False])
def test_first_law_along_a_move(freezing):
    """The integral of volume times dp is the change of enthalpy; through condensation and the freezing range.

    Simpson's rule on 4000 panels; 2e-8 of the change, for the kinks at cloud base and the ends of the freezing range.
    """
    parcel = one_parcel(980.0, 18.0, 10.0)
    log_p = np.linspace(np.log(98e3), np.log(25e3), 8001)
    way = moved_to(parcel, np.exp(log_p), freezing=freezing)
    work = volume(way) * way.pressure
    panels = (work[:-2:2] + 4.0 * work[1:-1:2] + work[2::2]) * (log_p[2::2] - log_p[:-2:2]) / 6.0
    change = enthalpy(way, freezing=freezing)[-1] - enthalpy(parcel, freezing=freezing)
    np.testing.assert_allclose(panels.sum(), change, rtol=2e-7)


@pytest.mark.parametrize("freezing", [True, False])
def test_entropy_and_enthalpy_belong_together(freezing):
    """At constant pressure T ds = dh, for dry, moist, cloudy and freezing air; central differences, 1e-6."""
    t = np.array([230.0, 256.0, 262.0, 270.0, 280.0, 300.0])
    h, p, water = 1e-2, np.array(7e4), np.array(0.008)

    def state(temperature):
        v = np.minimum(water, saturation_mixing_ratio(p, temperature, freezing=freezing))
        return Parcel(p, temperature, v, water - v)

    warm, cold = state(t + h), state(t - h)
    ds = entropy(warm, freezing=freezing) - entropy(cold, freezing=freezing)
    dh = enthalpy(warm, freezing=freezing) - enthalpy(cold, freezing=freezing)
    np.testing.assert_allclose(t * ds, dh, rtol=1e-6)


def test_enthalpy_is_counted_from_what_its_docstring_says():
    """Warm liquid from 273.16 K, freeze it at -20 C, evaporate it: the heats come from the latent heats alone."""
    air = Parcel(np.array(8e4), np.array(283.16), np.array(0.0), np.array(0.001))
    np.testing.assert_allclose(enthalpy(air), 10.0 * (HEAT_CAPACITY_DRY_AIR + 0.001 * HEAT_CAPACITY_LIQUID), rtol=1e-12)
    liquid = enthalpy(Parcel(np.array(8e4), np.array(253.15), np.array(0.0), np.array(1.0)), freezing=False)
    ice = enthalpy(Parcel(np.array(8e4), np.array(253.15), np.array(0.0), np.array(1.0)))
    vapour = enthalpy(Parcel(np.array(8e4), np.array(253.15), np.array(1.0), np.array(0.0)))
    np.testing.assert_allclose(liquid - ice, latent_heat_of_fusion(253.15), rtol=1e-12)
    np.testing.assert_allclose(vapour - liquid, latent_heat_of_vaporisation(253.15), rtol=1e-12)


def test_entropy_of_liquid_and_ice():
    """Constant heat capacities: c ln(T1/T2) within each, and the entropy of fusion at the triple point between them."""
    warm, cold = condensate_entropy(np.array([300.0, 280.0])), condensate_entropy(np.array([250.0, 230.0]))
    np.testing.assert_allclose(warm[0] - warm[1], HEAT_CAPACITY_LIQUID * np.log(300.0 / 280.0), rtol=1e-10)
    np.testing.assert_allclose(cold[0] - cold[1], HEAT_CAPACITY_ICE * np.log(250.0 / 230.0), rtol=1e-10)
    fusion = latent_heat_of_fusion(273.16) / 273.16
    np.testing.assert_allclose(cold[0], HEAT_CAPACITY_ICE * np.log(250.0 / 273.16) - fusion, rtol=1e-10)


def test_dry_parcel_is_exact():
    """Poisson's equation, T proportional to p^(R/cp), with and without vapour short of saturation."""
    for r in (0.0, 0.004):
        kappa = (R_DRY + r * R_VAPOUR) / (HEAT_CAPACITY_DRY_AIR + r * HEAT_CAPACITY_VAPOUR)
        parcel = Parcel(np.array(1e5), np.array(300.0), np.array(r), np.array(0.0))
        up = moved_to(parcel, 8.5e4)
        np.testing.assert_allclose(up.temperature, 300.0 * 0.85**kappa, rtol=1e-14)
        assert up.cloud == 0.0
        assert up.vapour == r


def test_cloud_is_saturated_and_clear_air_is_not():
    """Vapour at saturation wherever there is cloud, below it elsewhere."""
    parcel = many_parcels()
    there = moved_to(parcel, parcel.pressure * np.random.default_rng(7).uniform(0.4, 1.05, parcel.pressure.size))
    limit = saturation_mixing_ratio(there.pressure, there.temperature)
    cloudy = there.cloud > 0.0
    assert cloudy.sum() > 100
    np.testing.assert_allclose(there.vapour[cloudy], limit[cloudy], rtol=1e-9)
    assert np.all(there.vapour[~cloudy] <= limit[~cloudy])
    assert np.all(there.cloud >= 0.0)


# -- solvers ------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("freezing", [True, False])
def test_solvers_find_the_parcel_from_any_guess(freezing):
    """From its entropy or enthalpy and water, with no guess, a good one or one 40 K off."""
    parcel = many_parcels(freezing)
    water = parcel.vapour + parcel.cloud
    random = np.random.default_rng(8)
    for spread in (None, 0.05, 40.0):
        size = parcel.pressure.size
        guess = None if spread is None else parcel.temperature + random.uniform(-spread, spread, size)
        for solver, of in ((equilibrium_from_entropy, entropy), (equilibrium_from_enthalpy, enthalpy)):
            found = solver(parcel.pressure, of(parcel, freezing=freezing), water, freezing=freezing, first_guess=guess)
            np.testing.assert_allclose(found.temperature, parcel.temperature, rtol=0.0, atol=1e-10)
            np.testing.assert_allclose(found.vapour, parcel.vapour, rtol=0.0, atol=1e-14)


def test_tolerance_is_as_documented():
    """A last step of 0.05 K leaves 0.03 per K times its square, and less than itself where it crosses an edge."""
    parcel = many_parcels()
    water, s = parcel.vapour + parcel.cloud, entropy(parcel)
    guess = parcel.temperature + np.random.default_rng(9).uniform(-0.05, 0.05, parcel.pressure.size)
    found = equilibrium_from_entropy(parcel.pressure, s, water, first_guess=guess, tolerance=0.06)
    error = np.abs(found.temperature - parcel.temperature)
    assert 1e-8 < np.quantile(error, 0.99) < 0.03 * 0.06**2
    assert error.max() < 0.05


def test_shapes_broadcast():
    """Scalars, columns and members march together."""
    s = entropy(one_parcel(950.0, 14.0, 8.0))
    found = equilibrium_from_entropy(np.linspace(9e4, 5e4, 6), s, np.full((3, 1), 0.008))
    assert found.temperature.shape == found.vapour.shape == found.cloud.shape == (3, 6)
    assert equilibrium_from_entropy(np.array(9e4), s, np.array(0.008)).temperature.shape == ()


def test_mixing_two_kinds_of_clear_air_makes_fog():
    """Enthalpy and water are shared; the fog holds what exceeds saturation, and no heat is lost."""
    cold, warm = one_parcel(1000.0, 0.0, 3.7), one_parcel(1000.0, 20.0, 14.5)
    fog = equilibrium_from_enthalpy(np.array(1e5), 0.5 * (enthalpy(cold) + enthalpy(warm)), np.array(0.0091))
    assert fog.cloud > 0.0
    np.testing.assert_allclose(enthalpy(fog), 0.5 * (enthalpy(cold) + enthalpy(warm)), rtol=1e-12)
    np.testing.assert_allclose(fog.vapour, saturation_mixing_ratio(1e5, fog.temperature), rtol=1e-10)


def test_what_is_not_a_number_is_refused():
    """A missing value raises instead of spreading; a pressure in hPa gets its hint."""
    with pytest.raises(OutOfRangeError, match=r"no equilibrium temperature.*check the units"):
        equilibrium_from_entropy(np.array([9e4, np.nan]), np.array(100.0), np.array(0.005))
    with pytest.raises(OutOfRangeError, match=r"pressure: 1 of 1 values.*multiply hectopascal by 100"):
        moved_to(one_parcel(950.0, 14.0, 8.0), 70.0)
    with pytest.raises(OutOfRangeError, match=r"removed_share: 1 of 1 values.*Give a share, not per cent"):
        ascent(one_parcel(950.0, 14.0, 8.0), 7e4, removed_share=70.0)


# -- ascent with removal ------------------------------------------------------------------------------------------------


def tight_solution(parcel, pressure_end, share, freezing):
    """The same ascent by scipy.integrate.solve_ivp, from the first law written out for saturated air.

    (cpd + v cpv + c cc) dT + L dv = volume dp with v saturated and c = cloud + (1 - share)(v0 - v).
    """
    from scipy.integrate import solve_ivp

    v0, c0 = float(parcel.vapour), float(parcel.cloud)

    def slope(log_p, y):
        t, p = y[0], np.exp(log_p)
        e = float(saturation_vapour_pressure(t, freezing=freezing))
        heat_l = float(latent_heat(t, freezing=freezing))
        dl = float(latent_heat(t + 1e-3, freezing=freezing) - latent_heat(t - 1e-3, freezing=freezing)) / 2e-3
        v = R_DRY / R_VAPOUR * e / (p - e)
        c = c0 + (1.0 - share) * (v0 - v)
        heat = HEAT_CAPACITY_DRY_AIR + v * HEAT_CAPACITY_VAPOUR + c * (HEAT_CAPACITY_VAPOUR - dl)
        rise = v * p / (p - e)
        return [(R_DRY * t * p / (p - e) + heat_l * rise) / (heat + heat_l**2 * rise / (R_VAPOUR * t**2))]

    ends = (float(np.log(parcel.pressure)), np.log(pressure_end))
    found = solve_ivp(slope, ends, [float(parcel.temperature)], rtol=1e-9, atol=1e-8, max_step=0.05)
    return found.y[0, -1]


@pytest.mark.parametrize("freezing", [True, False])
@pytest.mark.parametrize("share", [1.0, 0.6])
@pytest.mark.parametrize(("celsius", "cloud"), [(2.0, 0.0), (15.0, 0.5), (27.0, 0.0)])
def test_ascent_is_that_of_a_tight_solver(celsius, cloud, share, freezing):
    """From 1000 to 300 hPa within the documented 0.02 K (0.004 K without freezing), with the default steps."""
    v = saturation_mixing_ratio(1e5, celsius + 273.15, freezing=freezing)
    parcel = one_parcel(1000.0, celsius, v * 1000.0, cloud)
    up, removed = ascent(parcel, 3e4, removed_share=share, freezing=freezing)
    expected = tight_solution(parcel, 3e4, share, freezing)
    np.testing.assert_allclose(up.temperature, expected, rtol=0.0, atol=0.02 if freezing else 0.004)
    np.testing.assert_allclose(up.vapour + up.cloud + removed, v + cloud / 1000.0, rtol=1e-14)
    np.testing.assert_allclose(removed, share * (v - up.vapour), rtol=1e-12)


def test_ascent_is_of_second_order():
    """Twice the steps, a quarter of the error (3 to 5), where no kink disturbs."""
    parcel = one_parcel(1000.0, 25.0, 20.0)
    exact, *rough = (
        float(ascent(parcel, 4e4, removed_share=1.0, freezing=False, steps=n)[0].temperature) for n in (512, 4, 8)
    )
    assert 3.0 < (rough[0] - exact) / (rough[1] - exact) < 5.0


def test_ascent_with_nothing_removed_is_the_reversible_move():
    """The same to the last bit; and a parcel that goes down or stays clear loses nothing."""
    parcel = many_parcels()
    up, removed = ascent(parcel, 3e4)
    same = moved_to(parcel, 3e4)
    np.testing.assert_array_equal(up.temperature, same.temperature)
    np.testing.assert_array_equal(removed, 0.0)
    down, removed = ascent(parcel, 1.15e5, removed_share=1.0)
    np.testing.assert_array_equal(down.temperature, moved_to(parcel, 1.15e5).temperature)
    np.testing.assert_array_equal(removed, 0.0)


def test_ascent_in_two_legs_is_one():
    """Kept cloud is not taken later: what was left behind at 700 hPa stays to 400 hPa; within the error of the steps."""
    parcel = one_parcel(950.0, 14.0, 8.0)
    leg, first = ascent(parcel, 7e4, removed_share=0.7, steps=50)
    end, second = ascent(leg, 4e4, removed_share=0.7, steps=50)
    whole, removed = ascent(parcel, 4e4, removed_share=0.7, steps=100)
    np.testing.assert_allclose(end.temperature, whole.temperature, atol=2e-3)
    np.testing.assert_allclose(first + second, removed, rtol=1e-4)


def test_small_steps_with_removal_approach_the_ascent():
    """The long way: many reversible steps, all new cloud taken after each. First order, so 0.1 K for 400 steps."""
    parcel = start = one_parcel(950.0, 14.0, 8.0)
    for p in np.geomspace(95e3, 30e3, 401)[1:]:
        parcel, _ = without_condensate(moved_to(parcel, p), 1.0)
    up, removed = ascent(start, 3e4, removed_share=1.0)
    np.testing.assert_allclose(up.temperature, parcel.temperature, atol=0.1)
    np.testing.assert_allclose(removed, start.vapour - parcel.vapour, rtol=5e-3)


def test_mixed_arrays_take_each_its_own_way():
    """Dry, clear, cloudy and sinking parcels in one call are what they are alone."""
    parcel = many_parcels(count=60)
    end = np.where(np.arange(60) % 5 == 0, 1.08e5, 35e3)
    share = np.linspace(0.0, 1.0, 60)
    up, removed = ascent(parcel, end, removed_share=share, steps=20)
    for i in range(60):
        alone = Parcel(parcel.pressure[i], parcel.temperature[i], parcel.vapour[i], parcel.cloud[i])
        one, gone = ascent(alone, end[i], removed_share=share[i], steps=20)
        np.testing.assert_allclose(up.temperature[i], one.temperature, rtol=0.0, atol=1e-6)
        np.testing.assert_allclose(removed[i], gone, rtol=0.0, atol=1e-9)


def test_removed_water_takes_its_entropy_and_enthalpy():
    """What is left and what went add up."""
    cloudy = moved_to(one_parcel(950.0, 14.0, 8.0), 45e3)
    left, removed = without_condensate(cloudy, 0.7)
    np.testing.assert_allclose(removed, 0.7 * cloudy.cloud)
    np.testing.assert_allclose(
        entropy(left) + removed * condensate_entropy(cloudy.temperature), entropy(cloudy), rtol=1e-13
    )
    h_condensate = HEAT_CAPACITY_VAPOUR * (cloudy.temperature - 273.16) + 2.5009e6 - latent_heat(cloudy.temperature)
    np.testing.assert_allclose(enthalpy(left) + removed * h_condensate, enthalpy(cloudy), rtol=1e-12)


# -- a printed exercise -------------------------------------------------------------------------------------------------

# Wallace and Hobbs (2006), Atmospheric Science, 2nd edition, exercise 3.10: 950 hPa, 14 C, 8 g/kg is lifted to 700 hPa,
# 70 % of the condensate is rained out there, and the rest goes back to 950 hPa. Answers read off a skew-T (numbers from
# memory; an integration with five published sets of constants gave 19.89-19.95 C and 5.68-5.69 g/kg for 70 %, and the
# two bracketing cases below).
# share removed; temperature [C] and mixing ratio [g/kg] back at 950 hPa
EXERCISE = [
    pytest.param(0.7, 20.0, 5.7, id="70 % removed, Wallace and Hobbs 2006 exercise 3.10"),
    pytest.param(1.0, 22.54, 4.69, id="all removed, recomputed from the same exercise"),
    pytest.param(0.0, 14.0, 8.0, id="nothing removed, back to the start"),
]


@pytest.mark.parametrize("freezing", [False, True])
@pytest.mark.parametrize(("share", "celsius", "gram"), EXERCISE)
def test_air_over_a_mountain(share, celsius, gram, freezing):
    """Pressure coordinates; 0.3 K and 0.1 g/kg, the reading of a diagram.

    Printed diagrams know no ice. The freezing switch warms the top (700 hPa, -2 C) by 0.2 K, so that 0.06 g/kg less
    condenses; with 70 % or all of it removed there the air comes back 0.2 K warmer, with nothing removed not at all.
    """
    top = moved_to(one_parcel(950.0, 14.0, 8.0), 7e4, freezing=freezing)
    left, _ = without_condensate(top, share)
    back = moved_to(left, 95e3, freezing=freezing)
    np.testing.assert_allclose(back.temperature - 273.15, celsius, atol=0.3 if share else 1e-10)
    np.testing.assert_allclose(back.vapour * 1000.0, gram, atol=0.1 if share else 1e-12)


def test_exercise_on_its_way():
    """Saturation, crest and end of evaporation of the exercise: 4.7 g/kg at the crest, 3.3 condensed, 1.0 kept; evaporated
    at 760 hPa, 1.8 C (5 hPa, 0.3 K: reading of a diagram); wet-bulb potential temperature 14 C before and after (0.4 K).
    """
    start = one_parcel(950.0, 14.0, 8.0)
    top = moved_to(start, 7e4, freezing=False)
    left, removed = without_condensate(top, 0.7)
    np.testing.assert_allclose([top.vapour, top.cloud, left.cloud], [4.7e-3, 3.3e-3, 1.0e-3], atol=1e-4)
    np.testing.assert_allclose(removed, 2.3e-3, atol=1e-4)
    assert moved_to(left, 75.5e3, freezing=False).cloud > 0.0
    clear = moved_to(left, 76.5e3, freezing=False)
    assert clear.cloud == 0.0
    np.testing.assert_allclose(moved_to(left, 76e3, freezing=False).temperature - 273.15, 1.8, atol=0.3)
    for parcel in (start, moved_to(left, 95e3, freezing=False)):
        found = wet_bulb_potential_temperature(parcel.pressure, parcel.temperature, parcel.vapour)
        np.testing.assert_allclose(found - 273.15, 14.0, atol=0.4)


def test_removal_along_the_way_is_close_to_removal_at_the_top():
    """Taking 70 % as it forms instead of at the crest: 22.54 and 19.90 C by an independent integration, 0.1 K."""
    for share, celsius in ((1.0, 22.54), (0.7, 19.90)):
        up, _ = ascent(one_parcel(950.0, 14.0, 8.0), 7e4, removed_share=share, freezing=False)
        back = moved_to(up, 95e3, freezing=False)
        np.testing.assert_allclose(back.temperature - 273.15, celsius, atol=0.1)


def test_lift_of_an_exercise_of_the_same_book():
    """Wallace and Hobbs (2006), exercise 3.9: 1000 hPa, 15 C, dew point 2 C, lifted 200 hPa beyond saturation (630 hPa).

    Printed answer -15 C and 2.0 g/kg, 2.4 of 4.4 g/kg condensed (from memory); 0.7 K and 0.2 g/kg, reading of a diagram.
    """
    parcel = one_parcel(1000.0, 15.0, float(saturation_mixing_ratio(1e5, 275.15)) * 1000.0)
    up, removed = ascent(parcel, 63e3, removed_share=1.0, freezing=False)
    np.testing.assert_allclose(up.temperature - 273.15, -15.0, atol=0.7)
    np.testing.assert_allclose(up.vapour, 2.0e-3, atol=2e-4)
    np.testing.assert_allclose(removed, 2.4e-3, atol=2e-4)
