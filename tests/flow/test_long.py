"""Long's equation over a bell ridge: published overturning height, worked surface wind."""

import numpy as np
import pytest

from orolift.errors import OutOfRangeError
from orolift.flow.long import finite_amplitude_wind

A, N, U = 10e3, 0.01, 10.0
STEP = 250.0
X = np.arange(-400e3, 400e3, STEP)


def over_bell(steepness):
    return finite_amplitude_wind(steepness * U / N / (1.0 + (X / A) ** 2), STEP, N, U, padding=2e6)


# N h / U, largest wind, its place in half widths, smallest wind (over the wind upwind); Long 1953 iterated by hand
TABLE = [
    pytest.param(0.5, 1.335, 0.76, 0.796, id="0.5"),
    pytest.param(0.7, 1.538, None, 0.731, id="0.7"),
    pytest.param(0.8, 1.660, None, 0.701, id="0.8"),
    pytest.param(0.85, 1.727, 0.66, 0.686, id="0.85"),
]


@pytest.mark.parametrize(("steepness", "largest", "place", "smallest"), TABLE)
def test_surface_wind(steepness, largest, place, smallest):
    """Wind along the ground within 1 % of the worked solution; the place within two cells."""
    flow = over_bell(steepness)
    assert flow.settled
    assert flow.speed_factor.max() == pytest.approx(largest, rel=0.01)
    assert flow.speed_factor.min() == pytest.approx(smallest, rel=0.01)
    if place is not None:
        assert X[np.argmax(flow.speed_factor)] == pytest.approx(place * A, abs=2.0 * STEP)


def test_overturning_height_of_a_bell_ridge():
    """Steepness reaches 1 at N h / U = 0.85 (Huppert and Miles 1969, J. Fluid Mech. 35, 481-496), within 1 %."""
    assert over_bell(0.99 * 0.85).steepness < 1.0
    assert over_bell(1.01 * 0.85).steepness > 1.0


def test_low_ridges_are_linear():
    """Law: for small ground the wind is 1 +- N h / 2 U at the sides."""
    flow = over_bell(0.01)
    assert flow.speed_factor.max() - 1.0 == pytest.approx(0.005, rel=0.01)
    assert flow.speed_factor.min() - 1.0 == pytest.approx(-0.005, rel=0.01)


def test_stronger_than_linear_in_the_lee():
    """Finite amplitude speeds the lee up more, and slows the windward side less, than 1 +- H/2."""
    flow = over_bell(0.8)
    assert flow.speed_factor.max() > 1.4
    assert flow.speed_factor.min() > 0.6


def test_level_ground_and_towering_ground():
    """No ground, no change; far beyond overturning it says so."""
    np.testing.assert_allclose(finite_amplitude_wind(np.zeros(50), STEP, N, U).speed_factor, 1.0)
    assert not over_bell(3.0).settled
    assert over_bell(3.0).steepness == np.inf


def test_members_together_are_each_alone():
    """Low and high ridges side by side, and two that settle in the same round: none changes another."""
    low, high = (h * U / N for h in (0.1, 0.7))
    heights, places = [low, high, high, 0.84 * U / N, 3.0 * U / N], [0.0, 0.0, 20e3, 0.0, 0.0]
    ground = np.array([h / (1.0 + ((X - x) / A) ** 2) for h, x in zip(heights, places, strict=True)])
    together = finite_amplitude_wind(ground, STEP, np.full(5, N), np.full(5, U))
    for i, row in enumerate(ground):
        alone = finite_amplitude_wind(row, STEP, N, U)
        assert together.settled[i] == alone.settled
        assert together.steepness[i] == pytest.approx(float(alone.steepness), rel=1e-9)
        np.testing.assert_allclose(together.speed_factor[i], alone.speed_factor, rtol=1e-9)


def test_the_padding_hardly_matters():
    """Limit: level ground far away says nothing to the ridge."""
    near, far = (finite_amplitude_wind(500.0 / (1.0 + (X / A) ** 2), STEP, N, U, padding=width) for width in (2e6, 6e6))
    np.testing.assert_allclose(near.speed_factor, far.speed_factor, atol=2e-3)


def test_bad_input_is_named():
    """Knots are not refused, calm is."""
    with pytest.raises(OutOfRangeError, match="wind: 1 of 1"):
        finite_amplitude_wind(np.zeros(5), STEP, N, 0.0)
