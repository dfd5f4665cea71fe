"""The stagnant layer at the station's ground: found where it is, and nowhere else."""

from pathlib import Path

import numpy as np
import pytest

from orolift.air.column_build import air_from_levels, air_from_station
from orolift.air.ground_layer import NO_GROUND_LAYER, ground_layer
from orolift.air.humidity import mixing_ratio_from_dew_point_checked

REAL = Path(__file__).parents[1] / "data" / "real_crossings"  # origin and licence in its README


def layered(inversion, depth, low_wind, high_wind=12.0):
    """A column with an inversion of so many kelvins on its ground and 6.5 K per km above it."""
    z = np.array([0.0, 0.25, 0.5, 0.75, 1.0]) * depth
    z = np.concatenate([z, depth + np.array([150.0, 400.0, 900.0, 1900.0, 3500.0, 6000.0])])
    t = np.where(z <= depth, 272.0 + inversion * z / depth, 272.0 + inversion - 0.0065 * (z - depth))
    p = 95000.0 * np.exp(-z / 7900.0)
    wind = np.where(z <= depth, low_wind, high_wind)
    return air_from_levels(None, p, t, np.full(z.size, 1e-3), wind, np.zeros(z.size), elevation=500.0)


@pytest.mark.parametrize("depth", [120.0, 300.0, 700.0])
def test_depth_is_that_of_the_inversion(depth):
    """Invented inversions of 4 K: found to their top.

    rtol 3 %: the column's heights are worked out from pressure, so that its depths differ a little from the drawn ones;
    5 % on the deficit, because air brought down warms a little faster than g/cp in air colder than itself.
    """
    layer = ground_layer(layered(4.0, depth, 1.5))
    assert layer.depth == pytest.approx(depth, rel=0.03)
    assert layer.deficit == pytest.approx(4.0 + 0.00975 * depth, rel=0.05)  # brought down at g/cp
    assert layer.wind == pytest.approx(1.5, rel=1e-6)
    assert "kept out of the air that meets the range" in layer.note


def test_a_stable_layer_in_strong_wind_is_the_air_mass():
    """10 m/s in it and 12 above: nothing stagnates."""
    assert ground_layer(layered(4.0, 300.0, 10.0)) == NO_GROUND_LAYER


def test_a_layer_much_slower_than_the_air_above_stagnates():
    """5 m/s under 20 m/s: less than half."""
    assert ground_layer(layered(4.0, 300.0, 5.0, 20.0)).depth > 0.0


def test_it_does_not_reach_above_the_crest():
    """A crest 350 m above the ground: the layer ends at the level below it."""
    assert 0.0 < ground_layer(layered(4.0, 700.0, 1.0), crest=900.0).depth <= 400.0


def test_an_ordinary_column_has_none():
    """A station's column falls by 6.5 K per km: no layer, whatever the wind."""
    assert ground_layer(air_from_station(40.0, 1.0e5, 287.0, 0.006, 1.0, 0.0)) == NO_GROUND_LAYER


def test_an_inversion_aloft_is_no_ground_layer():
    """Well mixed to 600 m, then an inversion: the ground air is the air mass."""
    z = np.array([0.0, 200.0, 400.0, 600.0, 800.0, 1500.0, 3000.0, 5000.0])
    t = np.array([285.0, 283.0, 281.0, 279.0, 284.0, 280.0, 270.0, 257.0])
    p = 95000.0 * np.exp(-z / 7900.0)
    air = air_from_levels(None, p, t, np.full(8, 1e-3), np.full(8, 2.0), np.zeros(8), elevation=500.0)
    assert ground_layer(air) == NO_GROUND_LAYER


def real_air(name):
    """Column of a real sounding."""
    rows = np.genfromtxt(REAL / name, delimiter=",", skip_header=1, filling_values=np.nan)
    pressure, height, t, td, wind_from, speed = rows.T
    r, _ = mixing_ratio_from_dew_point_checked(pressure * 100, t + 273.15, td + 273.15)
    toward = np.radians(wind_from) + np.pi
    return air_from_levels(height, pressure * 100, t + 273.15, r, speed * np.sin(toward), speed * np.cos(toward))


def test_real_night_soundings_have_such_layers_and_real_afternoons_do_not():
    """Local solar hour of each pair: 3 to 7 h at 12 UTC in North America, mid-afternoon in the set of 1999.

    Pairs by their local hour of the lee station as listed with the data: afternoon 1, 8, 9, 10 (14.0 to 16.3 h), night 2
    and 3 (3.2 to 3.8 h, both with inversions from the ground in the sounding itself: temperature of level 2 above level 1).
    """
    for pair in ("pair_01", "pair_08", "pair_09", "pair_10"):
        assert ground_layer(real_air(f"{pair}/upwind.csv")).depth == 0.0
    found = 0
    for file in sorted([*REAL.glob("pair_*/upwind.csv"), *REAL.glob("pair_*/lee.csv")]):
        air = real_air(f"{file.parent.name}/{file.name}")
        layer = ground_layer(air)
        if layer.depth > 0.0:
            found += 1
            top = int(np.argmin(np.abs(air.height - air.height[0] - layer.depth)))
            lapse = -(air.temperature[top] - air.temperature[0]) / layer.depth
            assert lapse < 0.3e-3  # a rise of virtual potential temperature of 10 K/km leaves no fall of temperature
    assert found > 10
