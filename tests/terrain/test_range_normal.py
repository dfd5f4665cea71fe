"""The range normal of ground whose direction is known."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.terrain.range_normal import range_normal

X, Y = np.meshgrid(np.linspace(-25e3, 25e3, 51), np.linspace(25e3, -25e3, 51))


def ridge(bearing: float, width: float = 8e3) -> np.ndarray:
    """Straight Gaussian ridge whose normal has a bearing."""
    across = X * math.sin(bearing) + Y * math.cos(bearing)
    return 1500.0 * np.exp(-((across / width) ** 2))


@settings(deadline=None, max_examples=40)
@given(bearing=st.floats(0.0, 2.0 * math.pi), wind=st.floats(-1.4, 1.4))
def test_straight_ridge(bearing, wind):
    """A straight ridge has the normal it was built with, whichever way within 80 degrees the wind blows."""
    found = range_normal(ridge(bearing), 1000.0, bearing + wind)
    assert math.cos(found.bearing - bearing) > math.cos(math.radians(1.5))  # the corners of the window turn it a little
    assert found.coherence > 0.99


def test_round_hill_has_no_direction():
    """A round hill: coherence 0."""
    hill = 1500.0 * np.exp(-(X**2 + Y**2) / 8e3**2)
    assert range_normal(hill, 1000.0, 1.0).coherence < 1e-6


def test_flat_ground_takes_the_wind():
    """No slope, no say; holes in the grid do not matter."""
    found = range_normal(np.zeros((5, 5)), 1000.0, 0.7)
    assert (found.bearing, found.coherence) == (0.7, 0.0)
    ground = ridge(0.5)
    ground[10:20, 10:20] = np.nan
    assert range_normal(ground, 1000.0, 0.5).bearing == pytest.approx(0.5, abs=0.05)


def test_side_valleys_do_not_turn_it():
    """Valleys running down the slopes, a third as deep as the ridge is high, turn the normal by less than 3 degrees."""
    along = X * math.cos(0.6) - Y * math.sin(0.6)
    ground = ridge(0.6) * (1.0 + 0.17 * np.sin(2 * math.pi * along / 6e3))
    assert range_normal(ground, 1000.0, 0.6).bearing == pytest.approx(0.6, abs=math.radians(3.0))
