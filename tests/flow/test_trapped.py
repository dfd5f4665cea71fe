"""Trapped lee waves: existence, length, amplitude, leaking."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import OutOfRangeError
from orolift.flow.layers import layers
from orolift.flow.trapped import trapped_waves
from orolift.flow.waves import waves

L1, L2, DEPTH = 1e-3, 4e-4, 3000.0


def two_layers(depth, l1=L1, l2=L2, wind=10.0):
    return layers([0.0, depth, depth + 2000.0], 1.0, wind, [(l1 * wind) ** 2, (l2 * wind) ** 2])


def test_wavelength_of_the_worked_two_layer_column():
    """m1 cot(m1 H) = -mu2 solved by hand: 9284.9 m, k = 6.76709e-4 (Scorer 1949 QJRMS 75)."""
    found = trapped_waves(two_layers(DEPTH))
    np.testing.assert_allclose(found.wavelength, [9284.9], rtol=1e-5)
    np.testing.assert_array_equal(found.decay_distance, [np.inf])


def test_shallow_layer_traps_nothing():
    """8.4e-7 < pi^2 / (4 H^2) = 1.097e-6 for H = 1500 m (Scorer 1949, eq. 17)."""
    assert not np.any(np.isinf(trapped_waves(two_layers(1500.0)).decay_distance))


@settings(deadline=None, max_examples=40)
@given(st.floats(500.0, 12000.0))
def test_number_of_waves_follows_the_existence_rule(depth):
    """n fully trapped waves when sqrt(l1^2 - l2^2) H is more than (2n - 1) pi / 2 (Scorer 1949)."""
    phase = np.sqrt(L1**2 - L2**2) * depth / np.pi - 0.5
    if abs(phase - round(phase)) > 0.05:  # at the limit itself the count is open
        held = np.isinf(trapped_waves(two_layers(depth)).decay_distance)
        assert np.sum(held) == max(int(np.floor(phase)) + 1, 0)


# wind [m s-1], N above [s-1], inversion height [m], jump and temperature [K]; U / sqrt(g' zi), limit, wavelength [m]
INVERSIONS = [
    pytest.param(10.0, 0.01, 800.0, 5.0, 288.0, 0.8567, 0.9111, 6174.5, id="5 K at 800 m, U = 10"),
    pytest.param(8.0, 0.01, 800.0, 4.0, 288.0, 0.7663, 0.8727, 4739.1, id="4 K at 800 m, U = 8"),
    pytest.param(10.0, 0.01, 1000.0, 8.0, 290.0, 0.6079, 0.8727, 4281.6, id="8 K at 1000 m, U = 10"),
]


@pytest.mark.parametrize(("u", "n", "zi", "jump", "theta", "ratio", "limit", "expected"), INVERSIONS)
def test_waves_on_an_inversion(u, n, zi, jump, theta, ratio, limit, expected):
    """U^2 (k coth(k zi) + sqrt(k^2 - l^2)) = g' by hand, g = 9.81 (Scorer; form as in Vosper 2004 QJRMS 130)."""
    gravity = 9.81 * jump / theta
    assert u / np.sqrt(gravity * zi) == pytest.approx(ratio, rel=1e-3)
    assert np.sqrt(np.tanh(n * zi / u) / (n * zi / u)) == pytest.approx(limit, rel=1e-3)
    column = layers([0.0, zi, zi + 3000.0], 1.0, u, [0.0, n**2], [0.0, gravity, 0.0])
    np.testing.assert_allclose(trapped_waves(column).wavelength, [expected], rtol=1e-3)


@pytest.mark.parametrize(("factor", "count"), [(0.98, 1), (1.02, 0)])
def test_weak_inversion_holds_no_waves(factor, count):
    """Stationary waves only while U / sqrt(g' zi) is below sqrt(tanh(N zi/U) / (N zi/U))."""
    u, n, zi = 10.0, 0.01, 800.0
    limit = np.sqrt(np.tanh(n * zi / u) / (n * zi / u))
    gravity = (u / (factor * limit)) ** 2 / zi
    column = layers([0.0, zi, zi + 3000.0], 1.0, u, [0.0, n**2], [0.0, gravity, 0.0])
    assert np.sum(np.isinf(trapped_waves(column).decay_distance)) == count


def test_stratosphere_lets_them_leak():
    """Under a stable layer from 6 km up the same wave is a little longer and fades; from 8 km up it fades less."""
    near = trapped_waves(layers([0.0, 3e3, 6e3, 12e3], 1.0, 10.0, [1e-4, 1.6e-5, 4e-4]))
    far = trapped_waves(layers([0.0, 3e3, 8e3, 12e3], 1.0, 10.0, [1e-4, 1.6e-5, 4e-4]))
    np.testing.assert_allclose(near.wavelength, [9284.9], rtol=0.03)
    assert 50e3 < near.decay_distance[0] < far.decay_distance[0] < np.inf


def test_leaking_waves_fade_as_told():
    """The solver without friction: amplitude falls by a factor e over the decay distance (5 %)."""
    step = 250.0
    x = np.arange(-100e3, 250e3, step)
    column = layers([0.0, 1500.0, 3e3, 4.5e3, 12e3], 1.0, 10.0, [1e-4, 1e-4, 1.6e-5, 4e-4])
    told = trapped_waves(column)
    field = waves(100.0 / (1.0 + (x / 1500.0) ** 2), step, column, friction_length=np.inf, padding=3000e3)
    near, far = (np.ptp(field.displacement[1, (x > start) & (x < start + 12e3)]) for start in (40e3, 100e3))
    assert 60e3 / np.log(near / far) == pytest.approx(told.decay_distance[0], rel=0.05)


def test_far_field_of_a_bell_ridge():
    """Amplitude in the lee from the residue at the pole: 2 pi hm a exp(-k a) F(k, z) / (dF(k, 0)/dk), by hand.

    rtol 5 %: weak friction, and what is left of the spreading waves.
    """
    hm, a, step, z = 100.0, 1500.0, 250.0, 1500.0
    x = np.arange(-100e3, 150e3, step)
    column = layers([0.0, z, DEPTH, DEPTH + 2e3], 1.0, 10.0, [1e-4, 1e-4, 1.6e-5])
    field = waves(hm / (1.0 + (x / a) ** 2), step, column, friction_length=1000e3, padding=6000e3)

    def structure(k, height):
        m1, mu2 = np.sqrt(L1**2 - k**2), np.sqrt(k**2 - L2**2)
        return np.cos(m1 * (height - DEPTH)) - mu2 / m1 * np.sin(m1 * (height - DEPTH))

    k = 6.76709e-4
    slope = (structure(k + 1e-8, 0.0) - structure(k - 1e-8, 0.0)) / 2e-8
    amplitude = abs(2.0 * np.pi * hm * a * np.exp(-k * a) * structure(k, z) / slope)
    far = (x > 60e3) & (x < 110e3)
    found = 0.5 * np.ptp(field.displacement[1, far])
    assert found == pytest.approx(amplitude * np.exp(-85.0 / 1000.0), rel=0.05)
    # the sign: -sin(kx) times the ratio, so the phase is fixed too
    wave = -np.sign(structure(k, z) / slope) * np.sin(k * x[far])
    assert np.corrcoef(wave, field.displacement[1, far])[0, 1] > 0.98


def test_one_column_at_a_time():
    """Leading axes are refused with what to do."""
    with pytest.raises(OutOfRangeError, match=r"1 leading axes.*one by one"):
        trapped_waves(layers([0.0, 1.0, 2.0], 1.0, [[10.0, 10.0]], 1e-4))
