"""Linear mountain waves: analytic solutions, worked values and laws."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import OutOfRangeError
from orolift.flow.layers import layers, layers_of_column, least_richardson_number
from orolift.flow.spectra import over_transect
from orolift.flow.waves import response, wave_drag, waves

N, U, HM, A, RHO = 0.01, 10.0, 500.0, 10e3, 1.2
LINEAR_DRAG = 23561.94  # pi/4 rho N U hm^2 [N m-1], Smith 1979 Adv. Geophys. 21
STEP = 250.0
X = np.arange(-500e3, 500e3, STEP)
BELL = HM * A**2 / (X**2 + A**2)
EDGES = np.arange(0.0, 6001.0, 250.0)


@pytest.fixture(scope="module")
def bell():
    """Hydrostatic waves over the bell ridge, long domain, without friction."""
    column = layers(EDGES, RHO, U, N**2)
    return waves(BELL, STEP, column, hydrostatic=True, friction_length=np.inf, padding=2000e3, all_pressure=True)


def at(distance):
    return int(np.argmin(np.abs(X - distance)))


def queney(x, z):
    """Displacement over the bell ridge (Queney 1948 BAMS 29; Smith 1979), Boussinesq, hydrostatic."""
    return HM * A * (A * np.cos(N / U * z) - x * np.sin(N / U * z)) / (x**2 + A**2)


# distance [m], height [m], displacement [m]; the analytic solution worked out by hand
POINTS = [(-10e3, 0.0, 250.0), (0.0, 1000.0, 270.151), (10e3, 1000.0, -75.292), (5e3, 3000.0, -424.221)]
POINTS += [(20e3, 5000.0, 220.151)]


@pytest.mark.parametrize(("x", "z", "expected"), POINTS)
def test_displacement_over_a_bell_ridge(bell, x, z, expected):
    """Points of the analytic solution, Queney 1948 and Smith 1979.

    atol 1.5 m, 0.3 % of the ridge: the domain is finite. The formula itself agrees to 1e-3 m.
    """
    assert queney(x, z) == pytest.approx(expected, abs=1e-3)
    assert bell.displacement[int(z / 250.0), at(x)] == pytest.approx(expected, abs=1.5)


def test_phase_lines_tilt_upstream():
    """A quarter wavelength up the crest of the wave lies upstream of the ridge: +250 m at -10 km, -250 m at +10 km."""
    height = 2.0 * np.pi * U / N / 4.0
    column = layers([0.0, height, 2.0 * height], RHO, U, N**2)
    field = waves(BELL, STEP, column, hydrostatic=True, friction_length=np.inf, padding=2000e3)
    assert field.displacement[1, at(-10e3)] == pytest.approx(250.0, abs=1.5)
    assert field.displacement[1, at(10e3)] == pytest.approx(-250.0, abs=1.5)
    assert field.displacement[2, at(0.0)] == pytest.approx(-HM, abs=1.5)  # half a wavelength up: the crest turned over


def test_surface_pressure_wind_and_drag_of_a_bell_ridge(bell):
    """+-30 Pa and -+2.5 m/s at -+10 km, drag 23561.94 N/m (Smith 1979; worked by hand). 1 % for the finite domain."""
    pressure = bell.surface_pressure
    assert pressure.max() == pytest.approx(30.0, rel=0.01)
    assert pressure.min() == pytest.approx(-30.0, rel=0.01)
    assert X[np.argmax(pressure)] == pytest.approx(-A, abs=500.0)
    assert X[np.argmin(pressure)] == pytest.approx(A, abs=500.0)
    wind = -pressure / (RHO * U)
    assert wind.max() == pytest.approx(2.5, rel=0.01)
    assert wind.min() == pytest.approx(-2.5, rel=0.01)
    assert float(wave_drag(BELL, STEP, pressure)) == pytest.approx(LINEAR_DRAG, rel=0.01)


def test_default_friction_leaves_a_hydrostatic_wave_alone():
    """With friction and padding as in use the pressure is still the published one within 1 %."""
    field = waves(BELL, STEP, layers(EDGES, RHO, U, N**2), hydrostatic=True)
    assert field.surface_pressure.max() == pytest.approx(30.0, rel=0.01)
    assert field.surface_pressure.min() == pytest.approx(-30.0, rel=0.01)


def bell_drag_ratio(column, a, upper, *, hydrostatic=False):
    """Drag of a bell ridge over its uniform hydrostatic value, from the impedance at the ground by quadrature."""
    node, weight = np.polynomial.legendre.leggauss(800)
    angle = 0.25 * np.pi * (node + 1.0)
    k = upper * np.sin(angle)  # gathers nodes where m goes to zero
    z = response(column, k, hydrostatic=hydrostatic).impedance[0]
    integral = np.sum(weight * 0.25 * np.pi * upper * np.cos(angle) * k * np.exp(-2.0 * k * a) * z.imag)
    rho, u, n = column.density[0], column.wind[0], np.sqrt(column.n_squared[0])
    return np.pi * a**2 * integral / (np.pi / 4.0 * rho * n * u)


@pytest.mark.parametrize(
    ("la", "expected", "speed_up"),
    [
        pytest.param(2.0, 0.780509, 0.474, id="la = 2: integral of Lyra 1943, Queney 1948 by quadrature"),
        pytest.param(10.0, 0.992401, 0.498, id="la = 10: integral of Lyra 1943, Queney 1948 by quadrature"),
    ],
)
def test_non_hydrostatic_drag_and_wind(la, expected, speed_up):
    """Narrow ridges make less drag: D/D0 to 1e-5, largest surface wind over N hm to 1 %."""
    column = layers([0.0, 1000.0, 5000.0], RHO, U, N**2)
    a = la * U / N
    assert bell_drag_ratio(column, a, N / U) == pytest.approx(expected, abs=1e-5)
    step = a / 20.0
    x = np.arange(-200.0 * a, 200.0 * a, step)
    field = waves(
        HM / (1.0 + (x / a) ** 2), step, column, friction_length=np.inf, padding=400.0 * a, shortest=2.0 * step
    )
    wind = -field.surface_pressure / (RHO * U) / (N * HM)
    assert wind.max() == pytest.approx(speed_up, rel=0.01)
    if la == 2.0:
        assert x[np.argmax(wind)] == pytest.approx(1.85 * a, rel=0.05)


@pytest.mark.parametrize(
    ("count", "expected"),
    [
        pytest.param(5, 1.0542, id="5 layers, Riccati recursion worked independently"),
        pytest.param(20, 1.0590, id="20 layers"),
        pytest.param(80, 1.0593, id="80 layers"),
        pytest.param(320, 1.0593, id="320 layers"),
    ],
)
def test_shear_and_convergence_with_layers(count, expected):
    """U = 10 + 0.002 z to 5 km, constant above, N = 0.01, hydrostatic: drag over its value with U at the ground."""
    edges = np.append(np.linspace(0.0, 5000.0, count + 1), 6000.0)
    middle = np.minimum(0.5 * (edges[1:] + edges[:-1]), 5000.0)
    z = response(layers(edges, RHO, 10.0 + 0.002 * middle, N**2), [1e-5], hydrostatic=True).impedance[0, 0]
    assert z.imag / (RHO * N * 10.0) == pytest.approx(expected, rel=2e-3)


@pytest.mark.parametrize("richardson", [25.0, 1.0, 0.5])
def test_linear_shear_without_end(richardson):
    """Drag ratio sqrt(1 - 1/(4 Ri)), Smith 1986 J. Atmos. Sci. 43, 1582, in a column deep enough to need friction.

    Friction makes the wind complex, so the same formula holds with c U for U. rtol 1e-3: layers.
    """

    def formula(c):
        return (c**2 * (-0.5 + 1j * np.sqrt(richardson / c**2 - 0.25))).imag / np.sqrt(richardson)

    assert formula(1.0 + 0.0j) == pytest.approx(np.sqrt(1.0 - 0.25 / richardson), rel=1e-12)
    friction, shear = 0.06, N / np.sqrt(richardson)
    speed = U * np.exp(np.linspace(0.0, 5.0 * np.sqrt(1.0 / richardson) / friction, 6001))
    column = layers((speed - U) / shear, RHO, np.sqrt(speed[1:] * speed[:-1]), N**2)
    z = response(column, [1e-5], friction=[friction], hydrostatic=True).impedance[0, 0]
    assert z.imag / (RHO * N * U) == pytest.approx(formula(1.0 - 1j * friction), rel=1e-3)


def test_waves_grow_as_air_thins():
    """As the inverse root of density (Smith 1979): within 0.1 % one vertical wavelength up."""
    edges = np.linspace(0.0, 8000.0, 161)
    middle = 0.5 * (edges[1:] + edges[:-1])
    m = np.sqrt((N / U) ** 2 - 1.0 / (2.0 * 8000.0) ** 2)
    answer = response(layers(edges, np.exp(-middle / 8000.0), U, N**2), [1e-6], hydrostatic=True)
    level = int(np.argmin(np.abs(edges - 2.0 * np.pi / m)))
    assert abs(answer.displacement[level, 0]) == pytest.approx(np.exp(edges[level] / 16000.0), rel=1e-3)


def test_expanding_air():
    """Constant N and g/c^2: own solution of the compressible equations, m^2 = N^2/U^2 - b^2, 2b = g/c^2 - N^2/g.

    Pressure over displacement at the ground is rho U^2 (im - b); displacement grows as the inverse root of density.
    rtol 1e-3: layers of 50 m.
    """
    sound, gravity = 8.5e-5, 9.80665
    edges = np.linspace(0.0, 16e3, 321)
    middle = 0.5 * (edges[1:] + edges[:-1])
    fall = sound + N**2 / gravity
    column = layers(edges, np.exp(-fall * middle), U, N**2, compression=sound)
    answer = response(column, [1e-6], hydrostatic=True)
    b = 0.5 * (sound - N**2 / gravity)
    m = np.sqrt((N / U) ** 2 - b**2)
    np.testing.assert_allclose(answer.impedance[0, 0], U**2 * (1j * m - b), rtol=1e-3)
    level = round(2.0 * np.pi / m / 50.0)
    expected = np.exp((1j * m + 0.5 * fall) * edges[level])
    np.testing.assert_allclose(answer.displacement[level, 0], expected, rtol=1e-3)
    aloft = np.exp(-fall * edges[level]) * U**2 * (1j * m - b)
    np.testing.assert_allclose(answer.impedance[level, 0], aloft, rtol=3e-3)


def test_a_thin_stable_layer_is_a_jump():
    """An inversion resolved by a 1 m layer and one given as a jump give the same answer; 1 m in 800 m, so rtol 5e-3."""
    jump = 9.81 * 5.0 / 288.0
    k = np.array([2e-4, 5e-4, 2e-3])
    sharp = response(layers([0.0, 800.0, 4000.0], 1.0, U, [0.0, N**2], [0.0, jump, 0.0]), k)
    thin = response(layers([0.0, 799.5, 800.5, 4000.0], 1.0, U, [0.0, jump, N**2]), k)
    np.testing.assert_allclose(thin.impedance[0], sharp.impedance[0], rtol=5e-3)


def test_hundreds_of_fading_layers_stay_exact():
    """Short waves over 40 km of neutral air: the answer is exp(-kz), with nothing lost to rounding."""
    edges = np.linspace(0.0, 40e3, 401)
    answer = response(layers(edges, 1.0, U, 0.0), [6e-3])
    np.testing.assert_allclose(answer.displacement[:, 0].real, np.exp(-6e-3 * edges), rtol=1e-9)


RIDGE_X = np.arange(0.0, 200e3, 500.0)
SHEARED = layers_of_column(
    [0.0, 2000.0, 10e3, 12e3, 20e3],
    [1.2, 1.0, 0.4, 0.3, 0.1],
    [8.0, 14.0, 25.0, 22.0, 20.0],
    [1.5e-4, 1e-4, 0.8e-4, 4e-4, 4e-4],
    np.linspace(0.0, 16e3, 61),
)


def ridge(height, width, place=100e3):
    return height * np.exp(-(((RIDGE_X - place) / width) ** 2))


def test_no_terrain_no_waves():
    """Level ground leaves everything at rest."""
    field = waves(np.zeros(400), 500.0, SHEARED, all_pressure=True)
    assert not np.any(field.displacement)
    assert not np.any(field.pressure)


@settings(deadline=None, max_examples=10)
@given(st.floats(-3.0, 3.0))
def test_waves_scale_with_the_ground(factor):
    """Law: linear."""
    one = waves(ridge(400.0, 8e3), 500.0, SHEARED)
    other = waves(factor * ridge(400.0, 8e3), 500.0, SHEARED)
    np.testing.assert_allclose(other.displacement, factor * one.displacement, atol=1e-8)
    np.testing.assert_allclose(other.surface_pressure, factor * one.surface_pressure, atol=1e-8)


def test_lowest_streamline_is_the_boundary():
    """Also where the ground is rough: shorter parts are carried along and fade upward."""
    rough = ridge(300.0, 9e3) * (1.0 + 0.5 * np.sign(np.sin(RIDGE_X)))
    field = waves(rough, 500.0, SHEARED)
    np.testing.assert_allclose(field.displacement[0], rough, atol=1e-9)


def test_short_parts_press_as_fading_waves_do():
    """Ripples of 2 km in neutral air: suction over their tops, rho U^2 k h when worked out, less when carried along."""
    ripples = ridge(20.0, 8e3) * np.cos(2.0 * np.pi * RIDGE_X / 2e3)
    column = layers(np.linspace(0.0, 10e3, 101), 1.0, U, 0.0)
    exact = waves(ripples, 500.0, column, shortest=1000.0).surface_pressure
    carried = waves(ripples, 500.0, column).surface_pressure
    assert exact.min() == pytest.approx(-(U**2) * 2.0 * np.pi / 2e3 * 20.0, rel=0.03)
    assert 0.3 * exact.min() > carried.min() > exact.min()
    assert np.corrcoef(exact, carried)[0, 1] > 0.95


@pytest.mark.parametrize("width", [3e3, 20e3])
def test_nothing_wraps_round(width):
    """Three times the padding changes no displacement by more than 2 % of the ridge, also with trapped waves."""
    once = waves(ridge(500.0, width), 500.0, SHEARED)
    longer = waves(ridge(500.0, width), 500.0, SHEARED, padding=1200e3)
    np.testing.assert_allclose(once.displacement, longer.displacement, atol=10.0)


def test_upwind_of_a_narrow_ridge_the_air_is_at_rest():
    """Trapped waves lie in the lee: 60 km upwind the displacement is under 2 % of the ridge, in the lee over 5 %."""
    column = layers([0.0, 1500.0, 3000.0, 6000.0], 1.0, U, [1e-4, 1e-4, 1.6e-5])
    field = waves(ridge(300.0, 2e3), 500.0, column)
    upwind = np.abs(field.displacement[1, RIDGE_X < 40e3]).max()
    lee = np.abs(field.displacement[1, RIDGE_X > 160e3]).max()
    assert upwind < 6.0
    assert lee > 15.0


def test_converges_with_layers_and_cells():
    """Twice the layers, or half the spacing, moves the pressure by under 2 %."""
    column = ([0.0, 4e3, 10e3, 20e3], [1.2, 0.8, 0.4, 0.1], [8.0, 14.0, 25.0, 20.0], [1.5e-4, 1e-4, 0.8e-4, 4e-4])
    coarse = layers_of_column(*column, np.linspace(0.0, 16e3, 81))
    fine = layers_of_column(*column, np.linspace(0.0, 16e3, 161))
    one = waves(ridge(500.0, 9e3), 500.0, coarse).surface_pressure
    np.testing.assert_allclose(waves(ridge(500.0, 9e3), 500.0, fine).surface_pressure, one, atol=0.02 * one.max())
    x = np.arange(0.0, 200e3, 250.0)
    dense = waves(500.0 * np.exp(-(((x - 100e3) / 9e3) ** 2)), 250.0, coarse).surface_pressure
    np.testing.assert_allclose(dense[::2], one, atol=0.02 * one.max())


def test_members_together_equal_members_alone():
    """Leading axes: different wind, critical level and boundary in one call."""
    edges = np.linspace(0.0, 12e3, 25)
    wind = np.stack([np.full(24, 12.0), np.linspace(20.0, -5.0, 24)])
    ground = np.stack([ridge(500.0, 9e3), ridge(300.0, 20e3)])
    both = waves(ground, 500.0, layers(edges, 1.0, wind, 1e-4), all_pressure=True)
    for member in range(2):
        alone = waves(ground[member], 500.0, layers(edges, 1.0, wind[member], 1e-4), all_pressure=True)
        # the wavenumbers kept are those that either member needs
        np.testing.assert_allclose(both.displacement[member], alone.displacement, atol=0.5)
        np.testing.assert_allclose(both.pressure[member], alone.pressure, atol=0.05)


def test_a_critical_level_absorbs():
    """The layer below answers as if it had no end, and nothing is left above it."""
    wind = [12.0, 12.0, 12.0, 1.0, -8.0]
    column = layers(np.linspace(0.0, 5e3, 6), 1.0, wind, 1e-4)
    assert bool(column.critical)
    assert int(column.carrying) == 3
    stopped = response(column, [1e-4])
    endless = response(layers([0.0, 3e3], 1.0, 12.0, 1e-4), [1e-4])
    np.testing.assert_allclose(stopped.impedance[0], endless.impedance[0], rtol=1e-12)
    np.testing.assert_array_equal(stopped.impedance[4:], 0.0)


def test_weak_wind_below_is_raised_and_flagged():
    """A calm layer at the bottom is no critical level; it is marked."""
    column = layers([0.0, 500.0, 1000.0], 1.0, [0.5, 10.0], 1e-4)
    assert not bool(column.critical)
    assert bool(column.weak_below)
    assert column.wind[0] == 2.5


def test_richardson_number_of_linear_shear():
    """N^2 over shear squared: 1e-4 / (0.01)^2 = 1."""
    column = layers(np.linspace(0.0, 1000.0, 11), 1.0, 10.0 + 0.01 * np.arange(50.0, 1000.0, 100.0), 1e-4)
    assert float(least_richardson_number(column)) == pytest.approx(1.0)
    assert float(least_richardson_number(layers([0.0, 1e3, 2e3], 1.0, 10.0, 1e-4))) == np.inf


def test_an_inversion_thinner_than_a_layer_keeps_its_strength():
    """The mean stability of a layer is the integral over it."""
    z = [0.0, 990.0, 991.0, 1009.0, 1010.0, 5000.0]
    column = layers_of_column(z, np.ones(6), np.full(6, 10.0), [0.0, 0.0, 0.01, 0.01, 0.0, 0.0], [0.0, 500.0, 1500.0])
    assert column.n_squared[1] * 1000.0 == pytest.approx(0.01 * 19.0)


def test_bad_input_is_named():
    """Unsorted edges, a hole in the boundary."""
    with pytest.raises(OutOfRangeError, match="edge: layers need"):
        layers([0.0, 0.0], 1.0, 10.0, 1e-4)
    with pytest.raises(OutOfRangeError, match="boundary: 1 of 2"):
        waves([0.0, np.nan], 500.0, SHEARED)


@pytest.mark.parametrize("shortest", [1000.0, 8000.0])
def test_waves_at_some_points_are_those_of_all(shortest):
    """Round trip: summed up wave by wave where they are few, by the transform where they are many."""
    at = np.union1d(np.arange(0, RIDGE_X.size, 6), [RIDGE_X.size - 1])
    ground = ridge(400.0, 3e3)
    whole = waves(ground, 500.0, SHEARED, shortest=shortest, all_pressure=True)
    some = waves(ground, 500.0, SHEARED, shortest=shortest, all_pressure=True, at=at)
    for name in ("displacement", "surface_pressure", "pressure"):
        np.testing.assert_allclose(getattr(some, name), getattr(whole, name)[..., at], atol=1e-9)


def test_the_shortest_wave_of_the_transform_counts_once():
    """Law: a zigzag of one point to the next is its own transform, summed up with a half the weight of the others."""
    line = 10.0 * (-1.0) ** np.arange(16)
    spectrum = np.fft.rfft(line)
    np.testing.assert_allclose(over_transect(spectrum, 16, np.array([0, 3])), [10.0, -10.0], atol=1e-12)


def test_a_member_does_not_depend_on_the_others():
    """Law: beside a slow column, which needs shorter waves, a fast one makes the same waves."""
    wind = np.stack([np.full(60, 6.0), np.full(60, 25.0)])
    column = layers(np.linspace(0.0, 12e3, 61), 1.0, wind, 1e-4)
    ground = np.stack([ridge(300.0, 3e3)] * 2)
    both = waves(ground, 500.0, column)
    for i in range(2):
        alone = waves(ground[i], 500.0, layers(column.edge[i], 1.0, wind[i], 1e-4))
        np.testing.assert_allclose(both.displacement[i], alone.displacement, atol=1e-9)
        np.testing.assert_allclose(both.surface_pressure[i], alone.surface_pressure, atol=1e-9)
