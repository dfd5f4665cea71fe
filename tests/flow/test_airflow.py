"""Streamlines, wind and pressure over a transect: published surface wind, laws, limits."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.constants import GRAVITY, HEAT_CAPACITY_DRY_AIR, R_DRY
from orolift.errors import OutOfRangeError
from orolift.flow.airflow import airflow, highest_pressure, joined
from orolift.flow.boundary import start_level
from orolift.flow.layers import layers_of_column
from orolift.flow.streamlines import join_weight, speed_factor, streamlines
from orolift.flow.waves import waves

X = np.arange(0.0, 240e3, 500.0)
LEVELS = np.linspace(0.0, 20e3, 41)
START = np.linspace(0.0, 16e3, 81)
RHO = 1.2 * np.exp(-LEVELS / 9000.0)
STABLE = np.full(41, 1e-4)
WIND = np.full(41, 15.0)


def ridge(height, width=12e3, place=120e3):
    return height * np.exp(-(((X - place) / width) ** 2))


def flow_over(ground, n2=STABLE, wind=WIND, start=START, **options):
    return airflow(X, ground, LEVELS, RHO, n2, wind, start, **options)


# Finite-amplitude surface wind over a bell ridge, U = 1 upwind: N h / U, largest, its place in half widths, smallest.
LONG = [
    pytest.param(0.5, 1.335, 0.76, 0.796, id="Long's equation, N h / U = 0.5 (Huppert and Miles 1969)"),
    pytest.param(0.7, 1.538, None, 0.731, id="Long's equation, N h / U = 0.7"),
    pytest.param(0.8, 1.660, None, 0.701, id="Long's equation, N h / U = 0.8"),
]


@pytest.mark.parametrize(("steepness", "largest", "place", "smallest"), LONG)
def test_surface_wind_is_close_to_the_finite_amplitude_solution(steepness, largest, place, smallest):
    """Linear waves in streamline coordinates give the nonlinear surface wind within 3 %.

    Linear theory at fixed points would give 1 + H/2, up to 16 % less; the tolerance also holds the first layer's depth.
    """
    a, u, n = 10e3, 10.0, 0.01
    x = np.arange(-400e3, 400e3, 500.0)
    bell = steepness * u / n / (1.0 + (x / a) ** 2)
    start = np.concatenate([[0.0], np.linspace(10.0, 12e3, 60)]) + bell[0]
    column = ([0.0, 20e3], [1.0, 1.0], [n**2, n**2], [u, u])
    flow = airflow(x, bell, *column, start, hydrostatic=True)
    wind = flow.speed_factor[0]
    assert wind.max() == pytest.approx(largest, rel=0.03)
    assert wind.min() == pytest.approx(smallest, rel=0.03)
    if place is not None:
        assert x[np.argmax(wind)] / a == pytest.approx(place, abs=0.3)


def test_level_ground_changes_nothing():
    """Zero terrain: streamlines stay, wind stays, no pressure."""
    flow = flow_over(np.zeros(X.size))
    np.testing.assert_allclose(flow.heights, np.broadcast_to(START[:, None], flow.heights.shape), atol=1e-9)
    np.testing.assert_allclose(flow.speed_factor, 1.0, atol=1e-12)
    np.testing.assert_array_equal(flow.top_pressure, 0.0)
    assert not np.any(flow.breaking)


peaks = st.lists(
    st.tuples(st.floats(0.0, 3000.0), st.floats(3e3, 30e3), st.floats(60e3, 180e3)), min_size=1, max_size=3
)


@settings(deadline=None, max_examples=30)
@given(
    peaks,
    st.floats(-500.0, 500.0),
    st.floats(0.0, 4e-4),
    st.floats(3.0, 40.0),
    st.one_of(st.none(), st.floats(0.0, 2000.0)),
    st.one_of(st.none(), st.floats(0.0, 2000.0)),
)
def test_streamlines_never_cross_nor_go_underground(mountains, step, n2, wind, blocked, pool):
    """Law: over any terrain and column spacing stays positive and the lowest line is the boundary."""
    ground = sum(ridge(*one) for one in mountains)
    ground = 600.0 + np.minimum(ground, 4000.0) + step * (np.tanh((X - 120e3) / 20e3) + 1.0) / 2.0
    low = float(start_level(ground, blocked))
    start = np.linspace(low, low + 15e3, 61)
    flow = flow_over(ground, np.full(41, n2), np.full(41, wind), start, blocked_top=blocked, pool_top=pool)
    assert np.all(np.diff(flow.heights, axis=0) > 0.0)
    np.testing.assert_allclose(flow.heights[0], flow.boundary.height, atol=1e-6)
    assert np.all(flow.heights[0] >= ground - 1e-6)
    assert np.all(np.isfinite(flow.speed_factor))
    assert np.all(flow.speed_factor > 0.0)


def test_mass_flux_is_the_same_at_every_distance():
    """Density times wind, summed up between lowest and highest streamline, does not change along the transect.

    rtol 3e-3: the wind is known at the streamlines and summed by straight lines; layers are 200 m deep.
    """
    flow = flow_over(ridge(900.0), wind=np.linspace(10.0, 25.0, 41))
    density = np.exp(np.interp(START, LEVELS, np.log(RHO)))[:, None]
    rise = flow.heights - START[:, None]
    flux = density * np.exp(-flow.compression[:, None] * rise) * flow.start_wind[:, None] * flow.speed_factor
    total = np.sum(0.5 * (flux[1:] + flux[:-1]) * np.diff(flow.heights, axis=0), axis=0)
    upwind = density[:, 0] * flow.start_wind
    np.testing.assert_allclose(total, np.sum(0.5 * (upwind[1:] + upwind[:-1]) * np.diff(START)), rtol=3e-3)


def test_scales_with_small_ground():
    """Law: ten times lower ground, ten times smaller displacement."""
    small = flow_over(ridge(20.0)).heights - START[:, None]
    large = flow_over(ridge(200.0)).heights - START[:, None]
    np.testing.assert_allclose(large, 10.0 * small, atol=0.5)


def test_a_drop_gives_no_wind_and_does_not_depend_on_the_length_of_the_plain():
    """Blocked up to the crest, the air only sinks: no waves, no speed-up near the ground, same streamlines however
    much plain follows.

    Wind changes only with density: 1.5 km down, slower by exp(-1500 g/c^2), g/c^2 = 1/9000 - N^2/g here.
    """
    ground = ridge(1500.0)
    start = np.linspace(1500.0, 16e3, 81)
    flow = flow_over(ground, start=start, blocked_top=1500.0)
    lowest = (start - 1500.0) < 0.9 * float(flow.boundary.full_depth)
    np.testing.assert_allclose(flow.boundary.wave, 0.0, atol=1e-9)
    np.testing.assert_allclose(flow.stretching[lowest], 1.0, atol=1e-9)
    np.testing.assert_allclose(flow.speed_factor[0, -1], np.exp(-1500.0 * (1.0 / 9000.0 - 1e-4 / GRAVITY)), rtol=1e-6)
    farther = airflow(
        np.arange(0.0, 400e3, 500.0),
        np.append(ground, np.zeros(320)),
        *(LEVELS, RHO, STABLE, WIND, start),
        blocked_top=1500.0,
    )
    np.testing.assert_allclose(farther.heights[:, : X.size], flow.heights, atol=1.0)


def test_no_wrap_round_past_the_ends():
    """A longer plain on both sides moves no streamline over the range by more than 2 % of it."""
    ground = ridge(800.0)
    flow = flow_over(ground)
    longer = airflow(
        np.arange(0.0, 480e3, 500.0),
        np.concatenate([np.zeros(240), ground, np.zeros(240)]),
        *(LEVELS, RHO, STABLE, WIND, START),
    )
    np.testing.assert_allclose(longer.heights[:, 240:720], flow.heights, atol=16.0)


def test_too_high_a_range_is_marked():
    """N h / U = 2: two fifths make waves, and the wave breaks somewhere."""
    flow = flow_over(ridge(3000.0))
    assert float(flow.boundary.wave_share) == pytest.approx(0.4, rel=1e-3)
    assert np.any(flow.breaking)
    assert not np.any(flow_over(ridge(100.0)).breaking)


def test_members_together_equal_members_alone():
    """Leading axes: two columns, two blocked tops, one terrain."""
    wind = np.stack([WIND, np.linspace(20.0, -10.0, 41)])
    tops = np.array([0.0, 700.0])
    start = tops[:, None] + np.linspace(0.0, 14e3, 71)
    both = flow_over(ridge(1200.0), wind=wind, start=start, blocked_top=tops)
    for member in range(2):
        alone = flow_over(ridge(1200.0), wind=wind[member], start=start[member], blocked_top=tops[member])
        np.testing.assert_allclose(both.heights[member], alone.heights, atol=3.0)  # other short waves are kept
        np.testing.assert_allclose(both.top_pressure[member], alone.top_pressure, atol=0.5)
    assert np.isinf(both.critical_level[0])
    assert 7e3 < both.critical_level[1] < 13e3


def test_above_a_critical_level_the_air_is_at_rest():
    """Displacements fade to nothing; the level is told."""
    flow = flow_over(ridge(400.0), wind=np.linspace(20.0, -10.0, 41))
    quiet = float(flow.critical_level) + 2500.0 < START
    np.testing.assert_allclose(
        flow.heights[quiet], np.broadcast_to(START[quiet, None], (quiet.sum(), X.size)), atol=30.0
    )


def exner_of_column(z, n, theta):
    """Exner pressure of a column whose potential temperature grows exponentially, 1 at z = 0; hydrostatic, exact."""
    return 1.0 - GRAVITY**2 / (HEAT_CAPACITY_DRY_AIR * theta * n**2) * (1.0 - np.exp(-(n**2) * z / GRAVITY))


def hydrostatic_surface_pressure(flow, exner, density):
    """Pressure at the lowest streamline from the top down, each streamline keeping its potential temperature.

    Brought back to its upwind height with the weight of its own air, minus the pressure there.
    """
    kappa = R_DRY / HEAT_CAPACITY_DRY_AIR
    top = highest_pressure(flow, 1e5 * exner(flow.start_heights[-1]) ** (1.0 / kappa), density)
    stretched = np.diff(flow.heights, axis=0) / np.diff(flow.start_heights)[:, None]
    lowest = (top / 1e5) ** kappa + np.sum(-np.diff(exner(flow.start_heights))[:, None] * stretched, axis=0)
    lowest = lowest + GRAVITY / (HEAT_CAPACITY_DRY_AIR * 290.0) * (flow.heights[0] - flow.start_heights[0])
    return 1e5 * (lowest ** (1.0 / kappa) - 1.0)


@pytest.mark.parametrize("shear", [0.0, -1.0 / 600.0])
def test_pressure_from_the_top_down_is_that_of_the_waves(shear):
    """Integrating the displaced column down gives the published 30 Pa, rho U N hm / 2, at the sides of a bell ridge.

    rho U^2 hm (g / c^2 - N^2 / g) / 4 lower on both sides, because air expands: 3 %. Then 1.5 % for the finite domain.
    Below a critical level it is still the pressure that the solver gives at the ground, within 3 %.
    """
    hm, a, n = 500.0, 10e3, 0.01
    kappa = R_DRY / HEAT_CAPACITY_DRY_AIR

    def exner(z):
        return exner_of_column(z, n, 290.0)

    theta = 290.0 * np.exp(n**2 * LEVELS / GRAVITY)
    density = 1e5 * exner(LEVELS) ** (1.0 / kappa - 1.0) / (R_DRY * theta)
    wind = 10.0 + shear * LEVELS
    bell = hm / (1.0 + ((X - 120e3) / a) ** 2)
    bell -= bell[0]
    start = np.linspace(0.0, 15e3, 301)
    flow = airflow(X, bell, LEVELS, density, STABLE, wind, start, hydrostatic=True)
    found = hydrostatic_surface_pressure(flow, exner, np.interp(15e3, LEVELS, density))
    expected = 0.5 * density[0] * 10.0 * n * hm
    expansion = -np.gradient(np.log(density), LEVELS)[0] - 2.0 * n**2 / GRAVITY  # g/c^2 - N^2/g
    lower = density[0] * 10.0**2 * hm * expansion / 4.0
    if shear == 0.0:
        assert found.max() == pytest.approx(expected - lower, rel=0.015)
        assert found.min() == pytest.approx(-expected - lower, rel=0.015)
        assert X[np.argmax(found)] == pytest.approx(110e3, abs=3e3)
    assert np.isfinite(flow.critical_level) == (shear != 0.0)
    solver = waves(bell, 500.0, layers_of_column(LEVELS, density, wind, STABLE, start), hydrostatic=True)
    np.testing.assert_allclose(found, solver.surface_pressure, atol=0.03 * expected)


def test_without_breaking_the_top_pressure_is_the_solvers():
    """Weighing the displaced column up from the ground ends at rho U^2 d(eta)/dz: 2 % of the surface pressure."""
    flow = airflow(X, ridge(100.0), LEVELS, RHO, STABLE, WIND, START, hydrostatic=True)
    column = layers_of_column(LEVELS, RHO, WIND, STABLE, START)
    solver = waves(ridge(100.0), 500.0, column, hydrostatic=True, all_pressure=True)
    largest = np.abs(solver.surface_pressure).max()
    np.testing.assert_allclose(flow.top_pressure, solver.pressure[-1], atol=0.02 * largest)


def test_joined_solutions_follow_each_where_its_weight_is_one():
    """Saturated upwind, dry in the lee, smooth between, never crossing."""
    dry = flow_over(ridge(1000.0))
    moist = flow_over(ridge(1000.0), np.full(41, 2e-5))
    weight = join_weight(X, 120e3, 150e3)
    both = joined(moist, dry, weight)
    np.testing.assert_allclose(both.heights[:, X <= 120e3], moist.heights[:, X <= 120e3], atol=1e-9)
    np.testing.assert_allclose(both.heights[:, X >= 150e3], dry.heights[:, X >= 150e3], atol=1e-9)
    assert np.all(np.diff(both.heights, axis=0) > 0.0)
    np.testing.assert_allclose(both.heights[0], ridge(1000.0), atol=1e-6)
    same = joined(dry, dry, weight)
    np.testing.assert_allclose(same.speed_factor, dry.speed_factor, rtol=1e-12)


def test_weight_falls_smoothly():
    """1 to the crest, 0 where cloud ends, and over 2 km at least when it ends at once."""
    weight = join_weight(X, 120e3, 121e3)
    assert np.all(np.diff(weight) <= 0.0)
    assert weight[X <= 120e3].min() == 1.0
    assert weight[X >= 122e3].max() == 0.0


def test_kept_streamlines_are_marked():
    """Lines that would cross are kept two fifths of their distance apart."""
    lines = streamlines([0.0, 100.0, 200.0, 300.0], np.array([[0.0], [0.0], [-150.0], [0.0]]))
    np.testing.assert_allclose(lines.heights[:, 0], [0.0, 100.0, 140.0, 300.0])
    np.testing.assert_array_equal(lines.breaking[:, 0], [False, True, True, True])
    assert speed_factor(lines, [0.0, 100.0, 200.0, 300.0], np.zeros(4)).max() <= 4.0


def test_trapped_waves_are_named_on_request():
    """Only when asked for: the search costs time."""
    column = ([0.0, 2999.0, 3001.0, 16e3], np.ones(4), [1e-4, 1e-4, 1.6e-5, 1.6e-5], np.full(4, 10.0))
    assert airflow(X, ridge(300.0, 3e3), *column, START).trapped is None
    found = airflow(X, ridge(300.0, 3e3), *column, START, find_trapped=True).trapped
    np.testing.assert_allclose(found.wavelength, [9284.9], rtol=1e-3)  # the worked two-layer column, see test_trapped


@pytest.mark.parametrize(
    ("distance", "start", "message"),
    [
        pytest.param(X**1.1, START, "distance: the transect must", id="uneven"),
        pytest.param(X, START + 50.0, "start_heights: the first is 50 m away", id="starts in mid-air"),
        pytest.param(X, START[::-1] - 16e3, "edge: layers need", id="upside down"),
    ],
)
def test_bad_input_is_named(distance, start, message):
    """Message says what to do."""
    with pytest.raises(OutOfRangeError, match=message):
        airflow(distance, ridge(500.0) - ridge(500.0)[0], LEVELS, RHO, STABLE, WIND, start)
