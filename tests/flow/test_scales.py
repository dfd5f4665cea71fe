"""Non-dimensional height, Scorer parameter, rotation."""

import numpy as np
import pytest

from orolift.errors import OutOfRangeError
from orolift.flow.profiles import integral_to, layer_mean, value_at
from orolift.flow.scales import (
    coriolis_parameter,
    deformation_radius,
    nondimensional_height,
    rossby_number,
    scorer_parameter,
)


def test_uniform_column():
    """N h / U by definition: 0.01 x 2000 / 10 = 2."""
    assert float(nondimensional_height([0.0, 4000.0], [1e-4, 1e-4], [10.0, 10.0], 0.0, 2000.0)) == pytest.approx(2.0)


def test_height_above_base_counts_not_above_sea_level():
    """A plateau at 1500 m does not raise the range."""
    column = ([1500.0, 6000.0], [1e-4, 1e-4], [10.0, 10.0])
    assert float(nondimensional_height(*column, 1500.0, 2500.0)) == pytest.approx(1.0)


@pytest.mark.parametrize(
    ("n2", "wind", "expected"),
    [
        pytest.param(-1e-5, 10.0, 0.0, id="unstable air flows over"),
        pytest.param(0.0, 10.0, 0.0, id="neutral air flows over"),
        pytest.param(1e-4, -1.0, np.inf, id="stable air moving away cannot cross"),
        pytest.param(1e-4, 0.0, np.inf, id="stable calm cannot cross"),
    ],
)
def test_limits(n2, wind, expected):
    """Signs and zeros have a meaning, never NaN."""
    assert float(nondimensional_height([0.0, 3e3], [n2, n2], [wind, wind], 0.0, 1e3)) == expected


def test_deformation_radius_of_the_worked_example():
    """N = 0.01, h = 2000 m, f = 1e-4 gives 200 km: N h / f, worked out by hand."""
    latitude = np.arcsin(1e-4 / (2 * 7.292115e-5))
    assert float(deformation_radius(0.01, 2000.0, latitude)) == pytest.approx(200e3, rel=1e-9)


def test_rotation_on_the_equator():
    """No rotation: an infinite radius and Rossby number, without a warning."""
    assert float(rossby_number(10.0, 20e3, 0.0)) == np.inf
    assert float(deformation_radius(0.01, 1e3, 0.0)) == np.inf
    assert float(coriolis_parameter(-np.pi / 2)) == pytest.approx(-1.458423e-4, rel=1e-6)


def test_scorer_parameter_of_a_curved_wind():
    """U = 10 + 1e-6 z^2 has U'' = 2e-6: the parameter is N^2/U^2 - 2e-6/U at inner levels."""
    z = np.linspace(0.0, 4000.0, 41)
    u = 10.0 + 1e-6 * z**2
    found = scorer_parameter(z, np.full_like(z, 1e-4), u)
    np.testing.assert_allclose(found[2:-2], (1e-4 / u**2 - 2e-6 / u)[2:-2], rtol=1e-9)


def test_latitude_in_degrees_is_refused():
    """Degrees where radians are meant are caught."""
    with pytest.raises(OutOfRangeError, match=r"latitude: 1 of 1 .*radians"):
        coriolis_parameter(46.0)


def test_profile_calculus_is_exact_for_straight_lines():
    """Values, integrals and means of broken lines, also beyond the ends and with leading axes."""
    z = np.array([0.0, 1000.0, 1500.0])
    v = np.array([[0.0, 10.0, 0.0], [1.0, 1.0, 1.0]])
    np.testing.assert_allclose(value_at(z, v, [500.0, 1250.0, 9e3]), [[5.0, 5.0, 0.0], [1.0, 1.0, 1.0]])
    np.testing.assert_allclose(integral_to(z, v, [1000.0, 1500.0, 2500.0]), [[5000, 7500, 7500], [1000, 1500, 2500]])
    np.testing.assert_allclose(integral_to(z, v[1], [-100.0]), [-100.0])
    np.testing.assert_allclose(layer_mean(z, v, [0.0, 200.0], [500.0, 200.0]), [2.5, 1.0])
