"""The night: recovery of humidity, spells; and the depth of mixing."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.air.humidity import relative_humidity_from_dew_point
from orolift.errors import OutOfRangeError
from orolift.fire.mixing_height import mixing_height
from orolift.fire.night import humidity_after_cooling, lasting, night_cooling, spells

Z = np.linspace(0.0, 3000.0, 61)


def test_cooling_keeps_the_heat_in_balance():
    """Law: heat taken = density cp depth cooling (cp of dry air about 1005 J/kg/K: textbook)."""
    cooling = night_cooling(36000.0, 30.0, 200.0, 1.1)
    np.testing.assert_allclose(cooling * 1.1 * 1005.0 * 200.0, 30.0 * 36000.0, rtol=2e-3)


@settings(max_examples=30)
@given(st.floats(263, 313), st.floats(0.05, 1.0), st.floats(0, 20), st.floats(0, 10))
def test_humidity_recovers_with_cooling_and_keeps_the_dew_point(temperature, humidity, cooling, more):
    """More cooling, more humidity, saturation at the most; the dew point stays where it is."""
    first, second = humidity_after_cooling(temperature, humidity, [cooling, cooling + more])
    assert humidity <= first + 1e-12
    assert first <= second <= 1.0


def test_keeps_the_dew_point():
    """20 degC and a dew point of 5 degC, cooled to 12 degC: the humidity of 12 and 5 degC."""
    before = relative_humidity_from_dew_point(293.15, 278.15)
    after = humidity_after_cooling(293.15, before, 8.0)
    np.testing.assert_allclose(after, relative_humidity_from_dew_point(285.15, 278.15), rtol=1e-12)


def test_spells_by_hand():
    """A stretch too short does not count; those at the ends are open."""
    met = [True, True, False, True, False, True, True, True]
    assert [(one.start, one.end, one.open_start, one.open_end) for one in spells(met, 2)] == [
        (0, 2, True, False),
        (5, 8, False, True),
    ]
    assert spells([False] * 5) == ()
    np.testing.assert_array_equal(lasting(met, 3), [False] * 5 + [True] * 3)


@settings(max_examples=30)
@given(st.lists(st.booleans(), min_size=1, max_size=30), st.integers(1, 5))
def test_spells_are_met_throughout(met, least):
    """Every hour of a spell is met, and it is long enough."""
    for one in spells(met, least):
        assert all(met[one.start : one.end])
        assert one.end - one.start >= least


def test_encroachment_in_a_constant_gradient():
    """Law: heat H fills theta = theta0 + G z up to sqrt(2 H / G) (half of G z^2)."""
    for gradient, heat in [(0.005, 2500.0), (0.003, 600.0), (0.01, 5000.0)]:
        found = mixing_height(Z, 290.0 + gradient * Z, heat=heat, excess=0.0)
        np.testing.assert_allclose(found, np.sqrt(2.0 * heat / gradient), atol=2.0)


def test_parcel_rises_to_where_the_air_is_as_warm():
    """Without heat, 0.5 K of excess in 5 K/km: 100 m; in a well-mixed layer below an inversion, into that."""
    np.testing.assert_allclose(mixing_height(Z, 290.0 + 0.005 * Z), 100.0, atol=1.0)
    mixed = np.where(Z <= 1500.0, 290.0, 290.0 + 0.02 * (Z - 1500.0))
    np.testing.assert_allclose(mixing_height(Z, mixed), 1525.0, atol=2.0)


def test_a_parcel_rises_from_the_heated_layer():
    """Law: sqrt(2 H / G) filled, then the excess over the gradient on top."""
    found = mixing_height(Z, 290.0 + 0.005 * Z, heat=2500.0, excess=1.0)
    np.testing.assert_allclose(found, 1000.0 + 1.0 / 0.005, atol=3.0)


def test_more_heat_never_mixes_less_and_members_come_first():
    """Heat (m,) over one profile; a profile (m, nz)."""
    heat = np.array([0.0, 500.0, 2000.0, 9000.0])
    deep = mixing_height(Z, 290.0 + 0.004 * Z, heat=heat)
    assert deep.shape == (4,)
    assert np.all(np.diff(deep) > 0.0)
    profiles = np.stack([290.0 + 0.004 * Z, 290.0 + 0.008 * Z])
    assert mixing_height(Z, profiles).shape == (2,)
    assert mixing_height(Z, np.full(61, 290.0)) == 3000.0


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: night_cooling(-1.0, 30.0, 100.0, 1.2), "hours: .* outside 0 to 86400"),
        (lambda: night_cooling(3600.0, -30.0, 100.0, 1.2), "flux: .* Out of the air"),
        (lambda: humidity_after_cooling(290.0, 0.3, -2.0), "cooling: .* 0 or more"),
        (lambda: spells([True], 0), "least: .* whole hours"),
        (lambda: mixing_height(Z, Z * 0 + 290.0, heat=-5.0), "heat: .* 0 or more"),
        (lambda: mixing_height(Z[::-1], Z * 0 + 290.0), "Heights must increase"),
    ],
)
def test_refuses_what_is_out_of_range(call, message):
    """Each names the argument and the range."""
    with pytest.raises(OutOfRangeError, match=message):
        call()
