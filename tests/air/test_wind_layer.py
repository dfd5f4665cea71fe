"""Wind of a layer: means, parts along a line, turning."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from orolift.air.column_build import air_from_levels, air_from_station
from orolift.air.wind_layer import LayerWind, barrier_wind, layer_wind, line_wind, turning_note
from orolift.errors import IncomingAirError, OutOfRangeError


def column_with_wind(speed, wind_from, crest_wind=None):
    """A station's column with a plain wind."""
    return air_from_station(100.0, 100000.0, 285.0, 0.006, speed, wind_from, crest_wind=crest_wind)


@given(st.floats(0.5, 40.0), st.floats(0.0, 6.28), st.floats(-6.0, 6.0))
def test_parts_along_and_across_are_the_whole_wind(speed, wind_from, bearing):
    """Pythagoras at every level; a line along the wind has all of it along."""
    air = column_with_wind(speed, wind_from)
    parts = line_wind(air, bearing)
    np.testing.assert_allclose(np.hypot(parts.along, parts.across), speed, rtol=1e-12)
    along = line_wind(air, wind_from + np.pi)
    np.testing.assert_allclose(along.along, speed, rtol=1e-12)
    np.testing.assert_allclose(along.across, 0.0, atol=1e-12 * speed)


def test_across_is_positive_to_the_right():
    """A line to the north, wind from the west: it blows to the right."""
    assert line_wind(column_with_wind(10.0, 1.5 * np.pi), 0.0).across[0] == pytest.approx(10.0)


@given(st.floats(0.5, 40.0), st.floats(0.0, 6.28))
def test_constant_wind_is_its_own_mean_and_does_not_turn(speed, wind_from):
    """Limit: no shear."""
    wind = barrier_wind(column_with_wind(speed, wind_from), 0.0, 1800.0)
    assert wind.speed == pytest.approx(speed)
    assert np.cos(wind.from_direction - wind_from) == pytest.approx(1.0)
    assert wind.turning == pytest.approx(0.0, abs=1e-9)
    assert turning_note(wind) is None


def test_mean_of_a_linear_wind_is_that_of_its_middle():
    """Components that change evenly: the mean of a layer inside is the value at its middle, between levels too."""
    air = column_with_wind(4.0, np.pi, crest_wind=(20.0, 1.5 * np.pi, 2100.0))
    wind = layer_wind(air, 333.0, 1777.0)
    share = (0.5 * (333.0 + 1777.0) - 100.0) / 2000.0
    east, north = 20.0 * share, 4.0 * (1.0 - share)  # from west blows east, from south blows north
    assert wind.speed == pytest.approx(np.hypot(east, north))
    assert np.tan(wind.from_direction - np.pi) == pytest.approx(east / north)


@pytest.mark.parametrize(("low", "high", "word"), [(180.0, 270.0, "veers"), (270.0, 180.0, "backs")])
def test_turning_has_a_sign_and_is_said(low, high, word):
    """WMO-No. 182: veering is clockwise. South below and west above veers."""
    air = column_with_wind(10.0, np.radians(low), crest_wind=(10.0, np.radians(high), 2000.0))
    wind = barrier_wind(air, 100.0, 1500.0)
    assert np.sign(wind.turning) == (1.0 if word == "veers" else -1.0)
    assert word in turning_note(wind)


def test_calm_air_has_no_turning():
    """A wind below 2 m/s in either third says nothing about direction."""
    air = column_with_wind(0.5, 0.0, crest_wind=(10.0, np.pi / 2, 9000.0))
    assert layer_wind(air, 100.0, 1000.0).turning == 0.0


def test_layer_begins_at_the_ground_of_the_column():
    """A base lower than the column's ground: what lies below it is not there."""
    wind = barrier_wind(column_with_wind(10.0, 0.0), -50.0, 900.0)
    assert (wind.bottom, wind.top) == (100.0, 1400.0)  # to 500 m above the crest


def test_members_keep_their_own_winds():
    """Leading axes: two members with two winds give two means."""
    air = air_from_station(0.0, 1.0e5, 285.0, 0.006, np.array([5.0, 9.0]), np.array([0.0, np.pi]))
    wind = barrier_wind(air, 0.0, 1000.0)
    np.testing.assert_allclose(wind.speed, [5.0, 9.0])
    assert isinstance(wind, LayerWind)


def test_layers_outside_the_column_are_refused():
    """Below the ground there is no air."""
    with pytest.raises(IncomingAirError, match=r"layer from -300 to 50 m does not lie in the column"):
        layer_wind(column_with_wind(10.0, 0.0), -300.0, 50.0)
    with pytest.raises(OutOfRangeError, match="radians, not degrees"):
        line_wind(column_with_wind(10.0, 0.0), 235.0)


def test_sheared_sounding_uses_its_levels():
    """Uneven levels: a jump between two levels counts by its depth, not by the number of levels."""
    p = np.array([1000e2, 990e2, 980e2, 700e2, 500e2])
    t = np.array([285.0, 284.5, 284.0, 268.0, 250.0])
    air = air_from_levels(None, p, t, np.full(5, 1e-3), np.array([0, 0, 0, 30.0, 30.0]), np.zeros(5), elevation=0.0)
    z = air.height
    expected = 15.0 * (z[3] - z[2]) / z[3]
    assert layer_wind(air, 0.0, float(z[3])).speed == pytest.approx(expected, rel=1e-9)
