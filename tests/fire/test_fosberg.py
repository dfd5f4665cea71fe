"""Equilibrium fuel moisture and the Fosberg Fire Weather Index."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import OutOfRangeError
from orolift.fire.fosberg import equilibrium_fuel_moisture, fosberg_index, fosberg_index_with_drought

BRANCHES = [(0.0, 0.0999), (0.1, 0.5), (0.5001, 1.0)]
MPH = 0.44704


def kelvin(fahrenheit):
    """Of degrees Fahrenheit."""
    return (fahrenheit - 32.0) / 1.8 + 273.15


# The definition page of a university's atmospheric sciences department prints the equations; worked out by hand from
# them. temperature [degF], humidity [%], wind [mph], moisture [%], index without the cap
BY_HAND = [
    (90, 5, 30, 1.17756, 92.3674),
    (80, 20, 25, 4.24723, 62.1330),
    (86, 15, 10, 3.35801, 26.5885),
    (50, 70, 20, 13.28017, 24.3622),
    (68, 10, 30, 2.82352, 82.4544),
    (60, 95, 20, 23.38582, 7.7108),
]


@pytest.mark.parametrize(("fahrenheit", "percent", "mph", "moisture", "index"), BY_HAND)
def test_rows_by_hand(fahrenheit, percent, mph, moisture, index):
    """tolerance: the printed digits."""
    t, u = kelvin(fahrenheit), percent / 100
    np.testing.assert_allclose(100 * equilibrium_fuel_moisture(t, u), moisture, atol=2e-5)
    np.testing.assert_allclose(fosberg_index(t, u, mph * MPH, capped=False), index, atol=1e-3)


# Simard (1968) as printed with the index; by hand. temperature [degC], humidity [%], moisture [%]
@pytest.mark.parametrize(
    ("celsius", "percent", "moisture"), [(21.1, 20, 4.39533), (30, 20, 4.15855), (10, 60, 11.05266), (25, 10, 2.6905)]
)
def test_simard(celsius, percent, moisture):
    """tolerance: the printed digits."""
    np.testing.assert_allclose(100 * equilibrium_fuel_moisture(celsius + 273.15, percent / 100), moisture, atol=2e-5)


def test_normalised_to_100_without_moisture_in_30_mph():
    """Fosberg (1978): 0.3002 is sqrt(1 + 30^2) / 100; bone-dry air at 0 % leaves m = 0.03 %."""
    index = fosberg_index(kelvin(100.0), 0.0, 30 * MPH, capped=False)
    eta = 1 - 2 * 0.03229 / 30 + 1.5 * (0.03229 / 30) ** 2
    np.testing.assert_allclose(index / eta, 100.0, atol=0.02)


def test_reported_as_100_when_above():
    """The raw value stays to be had."""
    raw = fosberg_index(310.0, 0.03, 30.0, capped=False)
    assert raw > 150.0
    assert fosberg_index(310.0, 0.03, 30.0) == 100.0


def test_branches_belong_to_the_middle_at_their_edges():
    """At exactly 10 and 50 % the middle line holds; the lines do not meet there (68 degF, by hand)."""
    t = kelvin(68.0)
    edges = np.array([0.1 - 1e-12, 0.1, 0.5, 0.5 + 1e-12])
    np.testing.assert_allclose(
        100 * equilibrium_fuel_moisture(t, edges), [2.44998, 2.82352, 9.22780, 9.62315], atol=2e-5
    )


@settings(max_examples=40)
@given(st.sampled_from(BRANCHES), st.floats(0, 1), st.floats(0, 1), st.floats(253, 318), st.floats(0, 40))
def test_drier_or_windier_never_lowers_the_index_within_a_branch(branch, one, other, temperature, wind):
    """Fuel moisture falls with humidity and with warmth; the index rises with dryness and wind."""
    low, high = branch
    drier, damper = sorted(low + (high - low) * x for x in (one, other))
    assert equilibrium_fuel_moisture(temperature, drier) <= equilibrium_fuel_moisture(temperature, damper)
    assert equilibrium_fuel_moisture(temperature + 5, drier) <= equilibrium_fuel_moisture(temperature, drier)
    dry, damp = (fosberg_index(temperature, u, wind, capped=False) for u in (drier, damper))
    assert dry >= damp
    assert fosberg_index(temperature, drier, wind + 1.0, capped=False) >= dry


@settings(max_examples=40)
@given(st.floats(233.15, 323.15), st.floats(0, 1))
def test_moisture_stays_in_its_range(temperature, humidity):
    """0 to 30 % whatever the air."""
    assert 0.0 <= equilibrium_fuel_moisture(temperature, humidity) <= 0.3


def test_drought_from_three_quarters_to_double():
    """Goodrick (2002), from memory: 0.72 without drought, 2 at the driest."""
    np.testing.assert_allclose(fosberg_index_with_drought(60.0, [0.0, 400.0, 800.0]), [43.2, 62.4, 120.0])


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: fosberg_index(300.0, 0.2, -3.0), "wind: .* never negative"),
        (lambda: fosberg_index(86.0, 0.2, 3.0), "temperature: .* add 273.15"),
        (lambda: fosberg_index(300.0, 20.0, 3.0), "relative_humidity: .* divide per cent by 100"),
        (lambda: fosberg_index_with_drought(50.0, 900.0), "drought_index: .* outside 0 to 800"),
    ],
)
def test_refuses_what_is_out_of_range(call, message):
    """Each names the argument and the range."""
    with pytest.raises(OutOfRangeError, match=message):
        call()
