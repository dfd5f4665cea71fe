"""A crossing in the library: one large, and a hundred marched together, beside a bare FFT of the same size."""

import math
import time

import numpy as np
import pytest

from orolift.air.column_build import air_from_station
from orolift.air.column_change import with_values
from orolift.air.humidity import mixing_ratio_from_dew_point
from orolift.crossing.pool import Lee
from orolift.crossing.settings import Settings
from orolift.crossing.solve import Ground, solve
from orolift.terrain.features import features
from orolift.terrain.ridge import ridge_transect


def setting(points):
    """A range of 1800 m on a line with a number of points, and moist air from a station."""
    x = np.array([0.0, 40e3, 52e3, 66e3, 75e3, 79e3, 92e3, 120e3, 145e3])
    h = np.array([0.0, 60.0, 210.0, 1120.0, 1900.0, 1430.0, 430.0, 270.0, 280.0])
    line = ridge_transect(x, h, bearing=math.pi / 2, spacing=145e3 / (points - 1))
    vapour = float(mixing_ratio_from_dew_point(100360.0, 283.95))
    air = air_from_station(25.0, 100360.0, 285.95, vapour, 15.0, 1.5 * math.pi)
    return Ground(line, features(line), math.pi / 2, 1.0), air


def best(work, times=3):
    """Shortest time of some runs [s]."""
    shortest = float("inf")
    for _ in range(times):
        began = time.perf_counter()
        work()
        shortest = min(shortest, time.perf_counter() - began)
    return shortest


def bare_fft(points, levels, members=1):
    """Real FFT forward and back of as many values."""
    values = np.random.default_rng(1).normal(size=(members, levels, points))
    return best(lambda: np.fft.irfft(np.fft.rfft(values, axis=-1), axis=-1))


@pytest.mark.speed
@pytest.mark.parametrize("share", [0.7, None], ids=["prescribed share", "rain worked out"])
def test_one_large_crossing(share):
    """2048 points by 150 streamlines, three passes: within 0.3 s on a quiet machine of two cores."""
    ground, air = setting(2048)
    settings = Settings(removed_share=share)
    taken = best(lambda: solve(ground, air, settings, Lee(), streamlines=150, passes=3))
    print(f"\n2048 x 150, {share}: {taken:.2f} s, {taken / bare_fft(2048, 150):.0f} bare FFT round trips")
    assert taken <= 0.3


@pytest.mark.speed
def test_a_hundred_together():
    """100 columns over 512 points by 80 streamlines, marched together: within 3 s."""
    ground, air = setting(512)
    shift = np.linspace(-2.0, 2.0, 100)[:, None]
    many = with_values(air, temperature=air.temperature + shift)
    taken = best(lambda: solve(ground, many, Settings(), Lee(), members=100, streamlines=80, passes=3), times=1)
    print(f"\n100 x 512 x 80: {taken:.2f} s, {taken / bare_fft(512, 80, 100):.0f} bare FFT round trips")
    assert taken <= 3.0


@pytest.mark.speed
def test_the_members_of_a_spread():
    """32 columns with times and critical values of their own, at the usual 60 streamlines and passes: within 1 s."""
    ground, air = setting(512)
    rng = np.random.default_rng(3)
    many = with_values(air, temperature=air.temperature + rng.normal(0.0, 1.0, (32, 1)))
    settings = Settings(
        cloud_time=np.exp(rng.normal(np.log(1000.0), 0.4, 32)),
        fall_time=np.exp(rng.normal(np.log(1000.0), 0.4, 32)),
        critical_value=rng.uniform(0.75, 3.0, 32),
    )
    taken = best(lambda: solve(ground, many, settings, Lee(), members=32))
    print(f"\n32 x 512 x 60: {taken:.2f} s, {taken / bare_fft(512, 60, 32):.0f} bare FFT round trips")
    assert taken <= 1.0
