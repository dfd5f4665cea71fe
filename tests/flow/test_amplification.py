"""Tuned layers and transitional flow: published factors, worked tables, the wave solver."""

import numpy as np
import pytest

from orolift.errors import OutOfRangeError
from orolift.flow.amplification import (
    near_dividing_height,
    transitional_flow_smith_1985,
    tropopause_drag_factor,
    tropopause_wind_factor,
)
from orolift.flow.layers import layers
from orolift.flow.waves import response

SHARES = np.array([0.0, 0.125, 0.25, 0.375, 0.5])  # of a vertical wavelength
DEPTHS = SHARES * 2.0 * np.pi / 1e-3


def test_factors_of_two_layers():
    """Klemp and Lilly 1975, l2 = 2 l1: surface wind 2, 1, 1/2, 1, 2 and drag 2, 0.8, 0.5, 0.8, 2."""
    np.testing.assert_allclose(tropopause_wind_factor(1e-3, 2e-3, DEPTHS), [2.0, 1.0, 0.5, 1.0, 2.0], rtol=1e-6)
    np.testing.assert_allclose(tropopause_drag_factor(1e-3, 2e-3, DEPTHS), [2.0, 0.8, 0.5, 0.8, 2.0], rtol=1e-6)


SOLVER = list(zip(DEPTHS[1:], [1.0, 0.5, 1.0, 2.0], [0.8, 0.5, 0.8, 2.0], strict=True))


@pytest.mark.parametrize(("depth", "wind", "drag"), SOLVER)
def test_the_layered_solver_agrees(depth, wind, drag):
    """The same factors come out of the recursion: |Z| and Im Z at the ground over rho N U."""
    z = response(layers([0.0, depth, depth + 1e3], 1.0, 10.0, [1e-4, 4e-4]), [1e-6], hydrostatic=True).impedance[0, 0]
    assert abs(z) / 0.1 == pytest.approx(wind, rel=1e-5)
    assert z.imag / 0.1 == pytest.approx(drag, rel=1e-5)


# N h / U, dividing height, lee wind over U, drag over linear drag: Smith 1985 J. Atmos. Sci. 42, solved by hand
SMITH = [
    pytest.param(0.1, 2.3086, 1.738, 8.52, id="0.1"),
    pytest.param(0.2, 2.6803, 2.110, 7.25, id="0.2"),
    pytest.param(0.3, 2.9942, 2.423, 6.80, id="0.3"),
    pytest.param(0.5, 3.5459, 2.975, 6.54, id="0.5"),
    pytest.param(0.7, 4.0461, 3.475, 6.57, id="0.7"),
    pytest.param(0.9, 4.5183, 3.948, 6.71, id="0.9"),
    pytest.param(0.985, 4.7133, 4.14, 6.79, id="0.985"),
]


@pytest.mark.parametrize(("ridge", "height", "speed", "drag"), SMITH)
def test_transitional_flow(ridge, height, speed, drag):
    """Table of Smith 1985, 0.1 % (the drag to its printed digits)."""
    flow = transitional_flow_smith_1985(ridge)
    assert flow.dividing_height == pytest.approx(height, rel=1e-3)
    assert flow.lee_speed == pytest.approx(speed, rel=1e-3)
    assert flow.drag == pytest.approx(drag, rel=1e-3)


def test_transitional_flow_meets_its_crest_condition():
    """Law: h = d cos(H0 + d - h) with d = cot(H0 + d - h), solved here by scanning d."""
    ridge = 0.6
    flow = transitional_flow_smith_1985(ridge)
    d = np.linspace(-3.0, -0.01, 300001)
    mismatch = np.abs(d * np.cos(flow.dividing_height + d - ridge) - ridge)
    assert mismatch.min() < 1e-4


def test_where_a_mixed_layer_helps():
    """A quarter to three quarters of a vertical wavelength, and again one wavelength up."""
    wave = 2.0 * np.pi * 10.0 / 0.01
    found = near_dividing_height(np.array([0.2, 0.3, 0.74, 0.8, 1.5]) * wave, 0.01, 10.0)
    np.testing.assert_array_equal(found, [False, True, True, False, True])


def test_higher_ridges_are_refused():
    """The solution ends at 0.985."""
    with pytest.raises(OutOfRangeError, match=r"ridge: 1 of 1 .* 0\.985"):
        transitional_flow_smith_1985(1.2)
