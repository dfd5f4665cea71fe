"""Sun and heat from the ground against published positions of the sun and hand arithmetic."""

import math
from datetime import UTC, datetime

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from orolift.crossing.heat import SurfaceHeat, heating_at, surface_heat
from orolift.crossing.sun import sun_height
from orolift.errors import OutOfRangeError


def seconds(*moment) -> float:
    """Seconds since 1970 of a UTC moment."""
    return datetime(*moment, tzinfo=UTC).timestamp()


PUBLISHED = [
    # Reda and Andreas (2004), Solar Energy 76, 577-589, worked example: 2003-10-17 12:30:30 at UTC-7, zenith 50.11162
    # degrees with refraction (0.016 degrees there); the example's position from memory.
    pytest.param(seconds(2003, 10, 17, 19, 30, 30), -105.1786, 39.742476, 90.0 - 50.11162 - 0.016, id="Reda 2004"),
    # By definition: at local noon of the June solstice the sun stands overhead on the tropic.
    pytest.param(seconds(2024, 6, 20, 12, 1, 45), 0.0, 23.44, 90.0, id="solstice, overhead on the tropic"),
    # By definition: at an equinox the sun is on the horizon of the pole (centre of the disc, no refraction).
    pytest.param(seconds(2024, 3, 20, 3, 6, 0), 0.0, 90.0, 0.0, id="equinox, pole"),
]


@pytest.mark.parametrize(("time", "longitude", "latitude", "degrees"), PUBLISHED)
def test_height_of_the_sun(time, longitude, latitude, degrees):
    """Within 0.1 degrees: the formula claims 0.01, the overhead passage moves a quarter degree a minute."""
    assert math.degrees(float(sun_height(time, longitude, latitude))) == pytest.approx(degrees, abs=0.1)


@given(time=st.floats(1e9, 2e9), longitude=st.floats(-180.0, 180.0), latitude=st.floats(-89.0, 89.0))
def test_antipodes_have_the_opposite_sun(time, longitude, latitude):
    """What is up here is down there."""
    other = longitude + 180.0 if longitude <= 0.0 else longitude - 180.0
    here, there = sun_height(time, longitude, latitude), sun_height(time, other, -latitude)
    assert float(here + there) == pytest.approx(0.0, abs=1e-9)


def test_a_time_out_of_range_is_refused():
    """Milliseconds for seconds are named."""
    with pytest.raises(OutOfRangeError, match="Give seconds since 1970"):
        sun_height(1.7e12, 0.0, 0.0)


def test_a_whole_night_cools():
    """-30 W m-2 over 800 m for 8 hours: 30 x 28800 / (1.2 x 1005.7 x 800) = 0.895 K, by hand."""
    heat = surface_heat(seconds(2026, 12, 21, 23, 0, 0), 0.0, 60.0, 20 * 3600.0, 1.2)
    assert heat.duration == 8 * 3600.0
    assert heat.night == pytest.approx(-0.895 * 7.15 / 8.0, abs=0.13)  # the sun set at about 14:50
    assert heat.day >= 0.0


def test_a_high_sun_warms():
    """At the equator around noon of an equinox, two hours: 0.21 x 1000 x 0.97 x 7200 / (1.2 x 1005.7 x 1500) = 0.81 K."""
    heat = surface_heat(seconds(2024, 3, 20, 13, 7, 0), 0.0, 0.0, 7200.0, 1.2)
    assert heat.day == pytest.approx(0.21 * 1000.0 * 0.99 * 7200.0 / (1.2 * 1005.7 * 1500.0), rel=0.02)
    assert heat.night == 0.0


def test_layers_of_heat():
    """The day's heat reaches 1500 m, the night's loss 800 m."""
    heat = SurfaceHeat(day=1.0, night=-0.4, duration=3600.0)
    np.testing.assert_allclose(heating_at(heat, np.array([0.0, 799.0, 801.0, 1499.0, 1501.0])), [0.6, 0.6, 1, 1, 0])
