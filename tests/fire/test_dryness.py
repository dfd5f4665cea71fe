"""Vapour pressure deficit, Ångström's index, Hot-Dry-Windy."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import OutOfRangeError
from orolift.fire.dryness import angstroem_index, angstroem_words, vapour_pressure_deficit
from orolift.fire.hot_dry_windy import hot_dry_windy

TEMPERATURES = st.floats(243.15, 323.15)
SHARES = st.floats(0.0, 1.0)

# temperature [degC], relative humidity [1], deficit [kPa]
FAO_56 = [
    pytest.param(25.0, 0.0, 3.168, id="FAO-56 table 2.3, 25 degC (from memory)"),
    pytest.param(15.0, 0.0, 1.705, id="FAO-56 table 2.3, 15 degC (from memory)"),
    pytest.param(24.5, 0.0, 3.075, id="FAO-56 example 3, highest temperature (from memory)"),
    pytest.param(18.0, 0.0, 2.064, id="FAO-56 example 5, lowest temperature (from memory)"),
    pytest.param(25.0, 0.54, 3.168 * (1 - 0.54), id="FAO-56 example 5, afternoon (from memory)"),
    pytest.param(18.0, 0.82, 2.064 * (1 - 0.82), id="FAO-56 example 5, morning (from memory)"),
]


@pytest.mark.parametrize(("celsius", "humidity", "kilopascals"), FAO_56)
def test_deficit_of_the_fao_examples(celsius, humidity, kilopascals):
    """rtol: the paper's saturation formula and ours differ by 1.5e-3, printed to a thousandth of a kilopascal."""
    deficit = vapour_pressure_deficit(celsius + 273.15, humidity)
    np.testing.assert_allclose(deficit, 1000.0 * kilopascals, rtol=2.5e-3)


@settings(max_examples=40)
@given(TEMPERATURES, SHARES, st.floats(0.1, 10.0), st.floats(0.0, 0.5))
def test_deficit_grows_with_warmth_and_dryness(temperature, humidity, warmer, damper):
    """Nothing at saturation; more in warmer and in drier air."""
    here = vapour_pressure_deficit(temperature, humidity)
    assert vapour_pressure_deficit(temperature, 1.0) == 0.0
    assert vapour_pressure_deficit(temperature + warmer, humidity) >= here
    assert vapour_pressure_deficit(temperature, min(humidity + damper, 1.0)) <= here


# Chandler et al. 1983 as an open page of a forest research institute prints the formula; worked out by hand from it.
@pytest.mark.parametrize(
    ("celsius", "percent", "index"), [(27, 40, 2.0), (30, 20, 0.7), (35, 10, -0.3), (15, 60, 4.2), (20, 45, 2.95)]
)
def test_angstroem_by_hand(celsius, percent, index):
    """tolerance: rounding."""
    np.testing.assert_allclose(angstroem_index(celsius + 273.15, percent / 100), index, atol=1e-9)


def test_angstroem_classes_at_their_edges():
    """Chandler et al. 1983: above 4, 4 to 2.5, 2.5 to 2, below 2."""
    edges = [4.01, 4.0, 2.51, 2.5, 2.0, 1.99]
    words = ["unlikely", "unfavourable", "unfavourable", "favourable", "favourable", "very likely"]
    assert [angstroem_words(edge) for edge in edges] == words


# One level, saturation pressure after Bolton (1980), by hand; temperature [degC], humidity [%], wind [m/s], index
SINGLE = [(30, 20, 12, 407.575), (35, 10, 15, 760.206), (20, 30, 20, 327.173), (10, 60, 5, 24.543), (25, 100, 10, 0.0)]


@pytest.mark.parametrize(("celsius", "percent", "wind", "index"), SINGLE)
def test_hot_dry_windy_of_one_level(celsius, percent, wind, index):
    """rtol: formulas of saturation pressure differ by up to 0.3 %."""
    found = hot_dry_windy([10.0], [celsius + 273.15], [percent / 100], [wind])
    np.testing.assert_allclose(found, index, rtol=5e-3)


def test_maxima_are_taken_separately():
    """Srock et al. 2018: the driest and the windiest air need not lie at one height (546, not 413)."""
    layer = ([2.0, 150.0, 400.0], [305.15, 303.65, 301.15], [0.18, 0.19, 0.22], [6.0, 10.0, 14.0])
    np.testing.assert_allclose(hot_dry_windy(*layer), 546.358, rtol=5e-3)


def test_only_the_layer_counts():
    """Wind above 500 m adds nothing beyond its value at 500 m."""
    z, warm, dry = [10.0, 400.0, 600.0], [300.0] * 3, [0.3] * 3
    low = hot_dry_windy(z, warm, dry, [5.0, 8.0, 8.0])
    np.testing.assert_allclose(hot_dry_windy(z, warm, dry, [5.0, 8.0, 40.0]), low * 24.0 / 8.0)
    assert hot_dry_windy([10.0, 400.0, 501.0, 900.0], [300.0] * 4, [0.3] * 4, [5.0, 8.0, 8.0, 90.0]) == low


def test_members_come_first():
    """Each member by itself."""
    z = np.array([10.0, 250.0, 700.0])
    t, u, w = np.full((2, 3), 300.0), np.array([[0.2, 0.3, 0.4], [0.5, 0.6, 0.7]]), np.array([[3.0, 9, 9], [3, 4, 12]])
    both = hot_dry_windy(z, t, u, w)
    assert both.shape == (2,)
    assert both[1] == hot_dry_windy(z, t[1], u[1], w[1])


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: vapour_pressure_deficit(25.0, 0.3), "temperature: 1 of 1 values lie outside 173.15 to 338.15 K"),
        (lambda: vapour_pressure_deficit(298.0, 30.0), "relative_humidity: .* outside 0 to 1 .*divide per cent by 100"),
        (lambda: angstroem_index(np.nan, 0.3), "temperature: 1 of 1"),
        (lambda: hot_dry_windy([10.0], [300.0], [0.3], [-1.0]), "wind: .* never negative"),
        (lambda: hot_dry_windy([600.0], [300.0], [0.3], [1.0]), "No level lies in the layer"),
        (lambda: hot_dry_windy([10.0, 5.0], [300.0] * 2, [0.3] * 2, [1.0] * 2), "Heights must increase"),
    ],
)
def test_refuses_what_is_out_of_range(call, message):
    """Each names the argument and the range."""
    with pytest.raises(OutOfRangeError, match=message):
        call()
