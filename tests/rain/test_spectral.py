"""The transfer function of the linear theory: single waves, limits, a hill summed directly, and its laws."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from orolift.rain.closed_forms import (
    bell_ridge_condensation,
    bell_ridge_efficiency,
    line_source_fallen,
    line_source_rain,
    slope_spill_over,
    wave_depth_number,
)
from orolift.rain.parameters import RainParameters
from orolift.rain.spectral import periodic_rain, transfer
from orolift.rain.upslope import raw_upslope

HOURLY = 3600.0  # kg m-2 s-1 to mm/h
# The flow used throughout: 15 m/s, 0.005 s-1, vapour 2500 m deep, 0.004 kg m-3; N Hw / U = 0.8333.
FLOW = RainParameters(15.0, 0.0, 0.005, 2500.0, 0.004, 1000.0, 1000.0)
PROMPT = RainParameters(15.0, 0.0, 0.005, 2500.0, 0.004, 0.0, 0.0)

# Worked out separately from the equations of Smith and Barstad (2004), not printed there:
# wavelength [m], amplitude of the rain over waves of 100 m [mm/h], its phase [degrees] ahead of the crest
WAVES = [
    pytest.param(10e3, 0.06480, -77.887, id="10 km, decaying upward"),
    pytest.param(50e3, 0.47193, 3.556, id="50 km, propagating"),
    pytest.param(100e3, 0.55621, 42.689, id="100 km, propagating"),
]


def printed_form(k, l, p):  # noqa: E741
    """The equation as it stands in the paper, in complex numbers, one wave at a time."""
    s = p.eastward_wind * k + p.northward_wind * l
    if s == 0.0:
        return 0.0
    square = complex((p.stability**2 - s**2) / s**2 * (k**2 + l**2))
    m = np.sign(s) * np.sqrt(square.real) if square.real >= 0.0 else 1j * np.sqrt(-square.real)
    delays = (1 + 1j * s * p.cloud_time) * (1 + 1j * s * p.fall_time)
    return p.uplift_sensitivity * 1j * s / ((1 - 1j * m * p.vapour_height) * delays)


@pytest.mark.parametrize(("length", "amplitude", "phase"), WAVES)
def test_single_wave(length, amplitude, phase):
    """rtol: the numbers have five digits."""
    found = 100.0 * transfer(np.array([2 * np.pi / length]), np.zeros(1), FLOW)[0]
    assert abs(found) * HOURLY == pytest.approx(amplitude, rel=2e-4)
    assert np.degrees(np.angle(found)) == pytest.approx(phase, abs=1e-3)


@pytest.mark.parametrize(("length", "amplitude", "phase"), WAVES)
def test_single_wave_on_a_grid(length, amplitude, phase):
    """A cosine along x, and the same turned to y with the wind from the south: the sign of the transform matters."""
    x = np.arange(256) * (length / 256)
    wanted = amplitude / HOURLY * np.cos(2 * np.pi * x / length + np.radians(phase))
    ground = 100.0 * np.cos(2 * np.pi * x / length)
    along_x = periodic_rain(np.tile(ground, (3, 1)), (length / 256, 1e3), FLOW)
    np.testing.assert_allclose(along_x, np.tile(wanted, (3, 1)), atol=3e-4 * amplitude / HOURLY)
    southerly = RainParameters(0.0, 15.0, 0.005, 2500.0, 0.004)
    along_y = periodic_rain(np.tile(ground[::-1, np.newaxis], (1, 3)), (1e3, length / 256), southerly)
    np.testing.assert_allclose(along_y[::-1, 0], wanted, atol=3e-4 * amplitude / HOURLY)


@given(
    st.floats(-1e-3, 1e-3),
    st.floats(-1e-3, 1e-3),
    st.floats(-30, 30),
    st.floats(2, 30),
    st.floats(0, 0.02),
    st.floats(0, 5e3),
    st.floats(0, 4e3),
    st.floats(0, 4e3),
)
def test_equals_the_printed_form(k, l, u, v, n, depth, cloud, fall):  # noqa: E741
    """The real arithmetic gives what the complex form gives, and opposite waves give conjugates (real rain)."""
    p = RainParameters(u, v, n, depth, 0.004, cloud, fall)
    found = transfer(np.array([k, -k]), np.array([l, -l]), p)
    s = abs(u * k + v * l)
    if s > 1e-9:  # nearer to zero the printed form loses its digits
        assert found[0] == pytest.approx(printed_form(k, l, p), rel=1e-8, abs=1e-15)
    assert found[1] == found[0].conjugate()


def test_no_rain_from_flat_ground_or_along_the_wind():
    """Waves the air flows along, and the mean height, give nothing; nothing is undefined there."""
    found = transfer(np.array([0.0, 0.0]), np.array([0.0, 1e-4]), FLOW)
    np.testing.assert_array_equal(found, 0.0)
    calm = RainParameters(15.0, 0.0, 0.0, 0.0, 0.004, 0.0, 0.0)
    np.testing.assert_array_equal(transfer(np.zeros(2), np.array([0.0, 1e-4]), calm), 0.0)


def test_raw_upslope_limit():
    """Shallow vapour and no delays: Cw U dh/dx. Gaussian ridge of 500 m, 15 km: 6.17590 mm/h at -10.607 km.

    The number is Cw U h sqrt(2) exp(-1/2) / a. rtol 1e-4: the peak falls between two points 100 m apart.
    """
    x = (np.arange(8192) - 4096) * 100.0
    ground = 500.0 * np.exp(-((x / 15e3) ** 2))[np.newaxis]
    rain = periodic_rain(ground, (100.0, 100.0), RainParameters(15.0, 0.0, 0.005, 1e-3, 0.004, 0.0, 0.0))[0]
    assert rain.max() * HOURLY == pytest.approx(6.17590, rel=1e-4)
    assert x[rain.argmax()] == pytest.approx(-10.607e3, abs=100.0)
    assert rain[rain > 0].sum() * 100.0 == pytest.approx(30.0, rel=1e-4)
    slope = raw_upslope(np.tile(ground, (3, 1)), (100.0, 100.0), PROMPT)[1]
    np.testing.assert_allclose(rain, slope, atol=2e-4 * rain.max())


@pytest.fixture(scope="module")
def bell():
    """A bell ridge of 500 m and 20 km on a line so long that its far images do not matter."""
    x = (np.arange(2**17) - 2**16) * 200.0
    return x, (500.0 * 20e3**2 / (20e3**2 + x**2))[np.newaxis]


def test_bell_ridge(bell):
    """Peak 1.59503 mm/h at -18.5 km, worked out separately with cells of 100 m (2^18 of them).

    Tolerance 0.2 %: what the length of the line changes.
    """
    x, ground = bell
    rain = periodic_rain(ground, (200.0, 1e3), PROMPT)[0] * HOURLY
    assert rain.max() == pytest.approx(1.59503, rel=2e-3)
    assert x[rain.argmax()] == pytest.approx(-18.5e3, abs=300.0)


def test_bell_ridge_in_hydrostatic_flow(bell):
    """A ridge ten times as wide and as high is hydrostatic; the closed form then holds within 1 per thousand."""
    x, ground = bell
    rain = periodic_rain(10.0 * ground, (2000.0, 1e3), PROMPT)[0]
    closed = bell_ridge_condensation(10.0 * x, 5000.0, 200e3, PROMPT)
    np.testing.assert_allclose(rain, closed, atol=2e-3 * closed.max())


# Derived from the closed form and checked with a transform of 2^18 points: x [m], condensation [mm/h]
BELL = [
    (-40e3, 0.828590),
    (-20e3, 1.593443),
    (-18.826e3, 1.601554),
    (0.0, -2.655738),
    (6.012e3, -3.643512),
    (20e3, -1.593443),
]


@pytest.mark.parametrize(("x", "rain"), BELL)
def test_bell_ridge_closed_form(x, rain):
    """rtol: six digits are given."""
    found = bell_ridge_condensation(x, 500.0, 20e3, PROMPT) * HOURLY
    assert found == pytest.approx(rain, rel=2e-6)


def test_bell_ridge_efficiency():
    """0.679193 at N Hw / U = 0.8333; the running integral of the closed form agrees; zeros at -7.241 and 55.241 km."""
    assert bell_ridge_efficiency(wave_depth_number(PROMPT)) == pytest.approx(0.679193, abs=1e-6)
    x = np.arange(-2e7, 1e6, 50.0)
    rain = bell_ridge_condensation(x, 500.0, 20e3, PROMPT)
    running = np.cumsum(rain) * 50.0
    assert running.max() == pytest.approx(20.37578, rel=2e-3)
    assert x[running.argmax()] == pytest.approx(-7.241e3, abs=60.0)
    np.testing.assert_allclose(bell_ridge_condensation([-7240.999, 55240.999], 500.0, 20e3, PROMPT), 0.0, atol=1e-10)


# delay of each stage [s]: peak [mm/h], its place [m], rain over Cw U h, share beyond the crest; worked out separately.
DELAYS = [
    (500.0, 1.3122, -9.8e3, 0.6844, 0.140),
    (1000.0, 1.0031, -5.9e3, 0.5717, 0.205),
    (2000.0, 0.6300, -1.7e3, 0.4169, 0.287),
]


@pytest.mark.parametrize(("delay", "peak", "place", "efficiency", "beyond"), DELAYS)
def test_bell_ridge_with_delays(bell, delay, peak, place, efficiency, beyond):
    """Slower rain: a lower peak, farther downwind, less of it in all, more of it in the lee.

    Tolerance 2 %, that of the numbers, which depend on the length of the line.
    """
    x, ground = bell
    p = RainParameters(15.0, 0.0, 0.005, 2500.0, 0.004, delay, delay)
    rain = np.maximum(periodic_rain(ground, (200.0, 1e3), p)[0], 0.0)
    assert rain.max() * HOURLY == pytest.approx(peak, rel=5e-3)
    assert x[rain.argmax()] == pytest.approx(place, abs=300.0)
    assert rain.sum() * 200.0 / 30.0 == pytest.approx(efficiency, rel=0.02)
    assert rain[x > 0].sum() / rain.sum() == pytest.approx(beyond, abs=0.005)


# 15 m/s: times [s], x [m], rain [mm/h] of 1 kg m-1 s-1, share fallen; exact solution of the delay equations
SOURCES = [
    *(
        (1000.0, 1000.0, x, r, s)
        for x, r, s in [
            (5e3, 0.057323, 0.044625),
            (15e3, 0.088291, 0.264241),
            (30e3, 0.064961, 0.593994),
            (45e3, 0.035847, 0.800852),
            (60e3, 0.017583, 0.908422),
        ]
    ),
    *(
        (500.0, 1500.0, x, r, s)
        for x, r, s in [
            (10e3, 0.090620, 0.170028),
            (20e3, 0.081991, 0.418073),
            (40e3, 0.039404, 0.748894),
            (80e3, 0.006850, 0.957163),
        ]
    ),
]


@pytest.mark.parametrize(("cloud", "fall", "x", "rain", "share"), SOURCES)
def test_line_source_closed_form(cloud, fall, x, rain, share):
    """rtol: six decimals are given; the two times may be exchanged."""
    for first, second in ((cloud, fall), (fall, cloud)):
        assert line_source_rain(x, 1.0, 15.0, first, second) * HOURLY == pytest.approx(rain, abs=6e-7)
        assert line_source_fallen(x, 15.0, first, second) == pytest.approx(share, abs=6e-7)


@pytest.mark.parametrize(("cloud", "fall"), [(1000.0, 1000.0), (500.0, 1500.0), (1000.0, 0.0)])
def test_line_source_on_the_grid(cloud, fall):
    """A step of the ground with shallow vapour is a line source: exact rain downwind, none upwind (causality).

    The step is one smooth rise over 400 m; the ground falls back over the rest of the line, so slowly that it
    takes away 2e-4 of the peak, which is added back. Tolerance 1 % of the peak: the width of the step.
    """
    n, dx = 2**15, 100.0
    x = (np.arange(n) - n // 4) * dx
    rise = 0.5 * (1.0 + np.tanh(x / 150.0)) - (np.arange(n) / n)
    p = RainParameters(15.0, 0.0, 0.0, 0.0, 0.004, cloud, fall)
    rain = periodic_rain((rise / (0.004 * 15.0))[np.newaxis], (dx, dx), p)[0] + 1.0 / (n * dx)
    exact = line_source_rain(x, 1.0, 15.0, cloud, fall)
    clear = (np.abs(x) > 600.0) & (x > -5e5) & (x < 2e6)
    assert np.abs(rain - exact)[clear].max() < 0.01 * exact.max()
    assert np.abs(rain[(x < -600.0) & (x > -5e5)]).max() < 1e-3 * exact.max()


def test_mean_drift_is_the_sum_of_both_distances():
    """Mean distance of the rain from its source: U (tc + tf); all of it falls; the peak where its formula says."""
    x = np.arange(0.0, 2e6, 50.0)
    rain = line_source_rain(x, 1.0, 15.0, 500.0, 1500.0)
    assert rain.sum() * 50.0 == pytest.approx(1.0, rel=1e-4)
    assert (rain * x).sum() * 50.0 == pytest.approx(15.0 * 2000.0, rel=1e-3)
    assert x[rain.argmax()] == pytest.approx(12359.39, abs=50.0)


@pytest.mark.parametrize(("cloud", "fall"), [(1000.0, 1000.0), (400.0, 1600.0)])
def test_slope_spill_over(cloud, fall):
    """Rain beyond the slope's end is the integral over line sources on the slope, by midpoints. Any length."""
    for length in (10e3, 30e3, 100e3):
        middle = (np.arange(20000) + 0.5) * length / 20000
        beyond = 1.0 - line_source_fallen(length - middle, 15.0, cloud, fall).mean()
        assert slope_spill_over(length, 15.0, cloud, fall) == pytest.approx(beyond, rel=1e-6)
    assert slope_spill_over(30e3, 15.0, 1000.0, 0.0) == pytest.approx((1 - np.exp(-2.0)) / 2.0, rel=1e-12)


def test_windier_air_and_slower_fall_spill_more():
    """As reported of storms in New Zealand (Sinclair et al. 1997, Wratt et al. 2000): stronger wind, colder air (snow
    falls more slowly), a narrower slope: more of the rain falls beyond the crest.
    """
    shares = [slope_spill_over(30e3, wind, 1000.0, 1000.0) for wind in (5.0, 10.0, 20.0, 40.0)]
    assert np.all(np.diff(shares) > 0.0)
    assert slope_spill_over(30e3, 15.0, 1000.0, 2000.0) > slope_spill_over(30e3, 15.0, 1000.0, 500.0)
    assert slope_spill_over(15e3, 15.0, 1000.0, 1000.0) > slope_spill_over(60e3, 15.0, 1000.0, 1000.0)


def test_slope_on_the_grid():
    """An even slope of 30 km up to a plateau: all of Cw U h falls, the share beyond the slope by the closed form.

    Tolerance 1 %: the plateau falls back far away, and the corners are those of the grid.
    """
    n, dx = 2**14, 200.0
    x = (np.arange(n) - n // 4) * dx
    ground = 1000.0 * np.clip(x / 30e3, 0.0, 1.0) - 1000.0 * np.clip((x - 600e3) / 1.0e6, 0.0, 1.0)
    p = RainParameters(15.0, 0.0, 0.0, 0.0, 0.004, 1000.0, 1000.0)
    rain = np.maximum(periodic_rain(ground[np.newaxis], (dx, dx), p)[0], 0.0)
    near = x < 500e3
    total = rain[near].sum() * dx
    assert total == pytest.approx(0.004 * 15.0 * 1000.0, rel=0.01)
    assert rain[near & (x > 30e3)].sum() * dx / total == pytest.approx(slope_spill_over(30e3, 15.0, 1e3, 1e3), rel=0.01)


def test_circular_hill_summed_directly():
    """Hill of 500 m and 15 km, the idealised one of Smith and Barstad (2004), as a sum of its known waves.

    The hill's transform is exact, the theory in its printed complex form, the sum over wavenumbers a plain
    trapezoid on another lattice than the grid's: nothing is shared with the code. Tolerance 0.3 % of the peak: images 800 km away.
    """
    a, height = 15e3, 500.0
    n, dx = 400, 2e3
    x = (np.arange(n) - n // 2) * dx
    hill = height * np.exp(-(x[np.newaxis] ** 2 + x[::-1, np.newaxis] ** 2) / a**2)
    rain = periodic_rain(hill, (dx, dx), FLOW)
    k = np.linspace(-5.2 / a, 5.2 / a, 241)
    kk, ll = np.meshgrid(k, k)
    weight = height * a**2 / (4 * np.pi) * np.exp(-(kk**2 + ll**2) * a**2 / 4) * (k[1] - k[0]) ** 2
    theory = np.vectorize(lambda p, q: complex(printed_form(p, q, FLOW)))(kk, ll)
    for east, north in [(0.0, 0.0), (-10e3, 0.0), (6e3, 8e3), (6e3, -8e3), (30e3, 10e3), (-30e3, -4e3)]:
        direct = (weight * theory * np.exp(1j * (kk * east + ll * north))).sum().real
        row, column = round(-north / dx) + n - 1 - n // 2, round(east / dx) + n // 2
        assert rain[row, column] == pytest.approx(direct, abs=3e-3 * rain.max())


def test_conservation_and_linearity():
    """The mean is zero; delays move rain and make none; twice the ground or sensitivity gives twice the rain."""
    ground = np.random.default_rng(3).normal(size=(48, 64)).cumsum(axis=1)
    rain = periodic_rain(ground, (1e3, 1e3), FLOW)
    assert abs(rain.mean()) < 1e-15
    assert periodic_rain(ground, (1e3, 1e3), PROMPT).sum() == pytest.approx(0.0, abs=1e-12)
    np.testing.assert_allclose(periodic_rain(2.0 * ground, (1e3, 1e3), FLOW), 2.0 * rain, atol=1e-15)
    double = RainParameters(15.0, 0.0, 0.005, 2500.0, 0.008)
    np.testing.assert_allclose(periodic_rain(ground, (1e3, 1e3), double), 2.0 * rain, atol=1e-15)


def test_turning_wind_and_ground_together():
    """By quarter turns exactly, on a grid that is square; mirrored too."""
    ground = np.random.default_rng(4).normal(size=(40, 40))
    rain = periodic_rain(ground, (1e3, 1e3), RainParameters(11.0, 7.0, 0.005, 2500.0, 0.004))
    # np.rot90 turns counterclockwise: a wind toward (u, v) turns to (-v, u). The cells' centres keep their lattice.
    turned = periodic_rain(np.rot90(ground), (1e3, 1e3), RainParameters(-7.0, 11.0, 0.005, 2500.0, 0.004))
    np.testing.assert_allclose(turned, np.rot90(rain), atol=1e-16)
    mirrored = periodic_rain(ground[:, ::-1], (1e3, 1e3), RainParameters(-11.0, 7.0, 0.005, 2500.0, 0.004))
    np.testing.assert_allclose(mirrored, rain[:, ::-1], atol=1e-16)


def test_faster_flow_with_fixed_times_lowers_the_peak():
    """Of what is lifted, less falls near the crest: peak over Cw U falls with U."""
    x = (np.arange(4096) - 2048) * 200.0
    ground = (500.0 * np.exp(-((x / 15e3) ** 2)))[np.newaxis]
    peaks = [
        periodic_rain(ground, (200.0, 200.0), RainParameters(u, 0.0, 0.005, 2500.0, 0.004)).max() / u
        for u in (10.0, 20.0, 30.0, 50.0)
    ]
    assert np.all(np.diff(peaks) < 0.0)
