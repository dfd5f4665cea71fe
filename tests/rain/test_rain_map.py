"""The linear theory on real terrain: padding, gaps, coasts, floors, and the sentences about its limits."""

from dataclasses import replace

import numpy as np
import pytest

from orolift.air.column_build import air_from_levels, air_from_station
from orolift.errors import IncomingAirError, OutOfRangeError, TerrainError
from orolift.rain.ground import filled_ground, inflow_level, padded_ground, padding_for
from orolift.rain.limits import limits_of_theory
from orolift.rain.parameters import RainParameters, column_rain
from orolift.rain.rain_map import map_drying_ratio, rain_map
from orolift.rain.spectral import periodic_rain
from orolift.terrain.grid import ElevationGrid, grid_elevation

FLOW = RainParameters(15.0, 0.0, 0.005, 2500.0, 0.004)


def hill_grid(spacing=2e3, half=100e3, height=500.0, radius=15e3, centre=(0.0, 0.0)):
    """A round Gaussian hill on a square map."""
    x = np.arange(-half, half + 1.0, spacing)
    square = (x - centre[0]) ** 2 + (x[::-1, np.newaxis] - centre[1]) ** 2
    return ElevationGrid(height * np.exp(-square / radius**2), x, x[::-1])


def test_nothing_comes_round_the_edges():
    """The map equals the same hill in a plain five times as wide. Tolerance 0.3 % of the peak: waves of far images."""
    small, large = hill_grid(), hill_grid(half=500e3)
    a = rain_map(small, FLOW).rate
    b = np.maximum(periodic_rain(large.elevation, (2e3, 2e3), FLOW), 0.0)
    cut = slice(200, 301)
    assert np.abs(a - b[cut, cut]).max() < 3e-3 * a.max()


@pytest.mark.parametrize("wind", [(15.0, 0.0), (0.0, -15.0), (-9.0, 12.0)])
def test_no_rain_upwind_of_the_hill_through_the_padding(wind):
    """A hill at the downwind edge rains into the padding; nothing of it comes back at the other edge.

    With shallow vapour, because waves do lift air upwind of a hill.
    """
    u, v = np.array(wind) / 15.0
    grid = hill_grid(half=60e3, centre=(45e3 * u, 45e3 * v))
    rate = rain_map(grid, RainParameters(*wind, 0.005, 0.0, 0.004)).rate
    x, y = np.meshgrid(grid.x, grid.y)
    upwind = x * u + y * v < -20e3
    assert rate[upwind].max() < 1e-3 * rate.max()


@pytest.mark.parametrize("angle", [30.0, 75.0, 200.0])
def test_turning_the_wind_turns_the_rain_of_a_round_hill(angle):
    """Any angle. Tolerance 1.5 % of the peak: reading between cells, and square padding."""
    grid = hill_grid(spacing=1e3)
    s, c = np.sin(np.radians(angle)), np.cos(np.radians(angle))
    a = rain_map(grid, FLOW).rate
    b = rain_map(grid, RainParameters(15.0 * c, 15.0 * s, 0.005, 2500.0, 0.004)).rate
    x, y = np.meshgrid(np.arange(-40e3, 41e3, 4e3), np.arange(-40e3, 41e3, 4e3))
    turned = grid_elevation(ElevationGrid(b, grid.x, grid.y), x * c - y * s, x * s + y * c)
    np.testing.assert_allclose(turned, grid_elevation(ElevationGrid(a, grid.x, grid.y), x, y), atol=0.015 * a.max())


def test_cells_do_not_matter():
    """Cells of 500 m and of 4 km give the same peak, place and total within 1 %; oblong cells too."""
    fine, coarse = hill_grid(spacing=500.0), hill_grid(spacing=4e3)
    a, b = rain_map(fine, FLOW), rain_map(coarse, FLOW)
    np.testing.assert_allclose(b.rate, a.rate[::8, ::8], atol=0.01 * a.rate.max())
    assert np.nansum(a.rate) * 0.5**2 == pytest.approx(np.nansum(b.rate) * 4.0**2, rel=0.01)
    oblong = ElevationGrid(fine.elevation[::8, ::2], fine.x[::2], fine.y[::8])
    np.testing.assert_allclose(rain_map(oblong, FLOW).rate, a.rate[::8, ::2], atol=0.01 * a.rate.max())


def test_background_and_truncation():
    """Added rain is linear; what reaches the ground is background and that, never below zero."""
    grid = hill_grid()
    plain = rain_map(grid, FLOW)
    assert plain.rate.min() == 0.0
    wet = rain_map(grid, replace(FLOW, background=1.0 / 3600.0))
    assert wet.added == pytest.approx(plain.added, rel=1e-12)
    assert wet.rate.min() >= 0.0
    added = wet.rate - 1.0 / 3600.0
    np.testing.assert_allclose(added[plain.rate > 0.0], plain.rate[plain.rate > 0.0], atol=1e-15)


def test_level_ground_has_the_background_only():
    """Whatever its height above the sea."""
    flat = replace(hill_grid(), elevation=np.full((101, 101), 1234.0))
    np.testing.assert_allclose(rain_map(flat, replace(FLOW, background=2e-4)).rate, 2e-4, rtol=1e-9)


def test_height_above_the_sea_does_not_matter():
    """Only slopes do."""
    grid = hill_grid()
    high = replace(grid, elevation=grid.elevation + 2000.0)
    np.testing.assert_allclose(rain_map(high, FLOW).rate, rain_map(grid, FLOW).rate, atol=1e-12)


def test_floor_takes_ground_away():
    """A floor at the top leaves no rain; at half height it leaves the rain of the upper half alone."""
    grid = hill_grid()
    assert rain_map(grid, FLOW, floor=500.0).rate.max() < 1e-12
    upper = replace(grid, elevation=np.maximum(grid.elevation - 250.0, 0.0))
    np.testing.assert_allclose(rain_map(grid, FLOW, floor=250.0).rate, rain_map(upper, FLOW).rate, atol=1e-12)


def test_gaps_are_filled_to_compute_and_stay_gaps():
    """A hole in the hill changes the rain around it little; a coast is sea at 0 m; neither gets a number.

    Tolerance 2 % of the peak for a hole of 12 km in a hill of 15 km.
    """
    grid = hill_grid()
    whole = rain_map(grid, FLOW)
    holed = grid.elevation.copy()
    holed[52:58, 40:46] = np.nan
    found = rain_map(replace(grid, elevation=holed), FLOW)
    assert np.array_equal(np.isnan(found.rate), np.isnan(holed))
    assert np.nanmax(np.abs(found.rate - whole.rate)) < 0.02 * whole.rate.max()
    assert any("filled smoothly" in note for note in found.notes)
    coast = np.where(grid.elevation < 2.0, np.nan, grid.elevation)
    at_sea = rain_map(replace(grid, elevation=coast), FLOW)
    assert np.nanmax(np.abs(at_sea.rate - whole.rate)) < 0.01 * whole.rate.max()
    assert any("counts as sea" in note for note in at_sea.notes)


def test_smooth_filling_keeps_a_plane():
    """Filled values lie between those around; a gap in level ground is level."""
    ground = np.full((40, 37), 700.0)
    ground[5:30, 8:31] = np.nan
    filled, notes = filled_ground(ground)
    np.testing.assert_allclose(filled, 700.0)
    assert len(notes) == 1
    slope = np.tile(100.0 + 10.0 * np.arange(37.0), (40, 1))
    ground[:] = slope
    ground[5:30, 8:31] = np.nan
    filled, _ = filled_ground(ground)
    gap = filled[5:30, 8:31]
    assert slope[0, 7] <= gap.min() <= gap.max() <= slope[0, 31]


def test_padding_is_stated_and_smooth():
    """Enough room for five drift distances and the waves; no step where it begins, none at the inflow edge."""
    p = RainParameters(12.0, -9.0, 0.005, 2500.0, 0.004, 1200.0, 800.0)
    found = padding_for((300, 400), (500.0, 500.0), p)
    assert found.drifts == 5.0
    assert (found.shape[1] - 400) * 500.0 >= 5 * 12.0 * 2000.0 + 50e3
    assert (found.shape[0] - 300) * 500.0 >= 5 * 9.0 * 2000.0 + 50e3
    ground = np.random.default_rng(1).normal(size=(300, 400)).cumsum(axis=0).cumsum(axis=1)
    padded = padded_ground(ground, found, p)
    largest = max(np.abs(np.diff(ground, axis=a)).max() for a in (0, 1))
    for axis in (0, 1):
        around = np.concatenate([padded, padded.take([0], axis)], axis)
        assert np.abs(np.diff(around, axis=axis)).max() <= largest * 1.5


@pytest.mark.parametrize(
    ("wind", "level"),
    [((15.0, 0.0), 1.0), ((-15.0, 0.0), 2.0), ((0.0, 15.0), 3.0), ((0.0, -15.0), 4.0), ((10.0, 10.0), 2.0)],
)
def test_inflow_edges(wind, level):
    """Edges at 1 m in the west, 2 m in the east, 3 m in the south, 4 m in the north: the upwind ones count."""
    ground = np.zeros((100, 100))
    ground[0], ground[-1] = 4.0, 3.0
    ground[:, 0], ground[:, -1] = 1.0, 2.0
    assert inflow_level(ground, RainParameters(*wind, 0.005, 2500.0, 0.004)) == pytest.approx(level, abs=0.06)


def test_a_map_too_fine_for_its_padding_is_refused():
    """With the size of cells that would do, which does."""
    fast = RainParameters(60.0, 45.0, 0.005, 2500.0, 0.004, 4000.0, 4000.0)
    with pytest.raises(TerrainError, match=r"drifts 600 km .* Use cells of (\d+) m or more"):
        padding_for((4096, 4096), (20.0, 20.0), fast)
    assert padding_for((4096, 4096), (100.0, 100.0), FLOW).shape[0] > 4096


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"x": np.arange(101.0)[::-1]}, "must increase"),
        ({"y": np.arange(101.0)}, "must decrease"),
        ({"elevation": np.full((101, 101), np.nan)}, "every cell of the map is missing"),
        ({"elevation": np.full((101, 101), 30000.0)}, "elevation: 2 of 2 values"),
        ({"x": np.arange(5.0), "elevation": np.zeros((101, 5))}, "needs at least 8"),
    ],
)
def test_unfit_maps(change, message):
    """Each is named."""
    with pytest.raises((TerrainError, OutOfRangeError), match=message):
        rain_map(replace(hill_grid(), **change), FLOW)


@pytest.mark.parametrize(
    ("name", "value"),
    [
        ("cloud_time", -1.0),
        ("fall_time", np.nan),
        ("background", 5.0),
        ("stability", -0.01),
        ("vapour_height", 2e4),
        ("eastward_wind", 0.2),
    ],
)
def test_unfit_parameters(name, value):
    """Out of range, or calm."""
    with pytest.raises(OutOfRangeError, match="wind speed" if name == "eastward_wind" else name):
        replace(FLOW, **{name: value})


# --- parameters from the column


def saturated_air(lapse=0.005, wind=(15.0, 4.7), temperature=283.15, humidity=1.0):
    """Station air at sea level."""
    from orolift.air.humidity import mixing_ratio_from_relative_humidity

    vapour = mixing_ratio_from_relative_humidity(1.0e5, temperature, humidity)
    return air_from_station(0.0, 1.0e5, temperature, vapour, *wind, lapse_rate=lapse)


def test_column_of_saturated_air_agrees_with_the_published_forms():
    """Within 15 %: the published scale height keeps the temperature of the ground, real vapour falls off faster."""
    from orolift.air.lapse import saturated_lapse_rate
    from orolift.rain.moisture import saturated_vapour_density, uplift_sensitivity, vapour_scale_height

    found = column_rain(saturated_air(), 0.0)
    depth = float(vapour_scale_height(283.15, 0.005))
    assert found.parameters.vapour_height == pytest.approx(depth, rel=0.15)
    assert found.parameters.vapour_height < depth
    ground_rate = float(saturated_lapse_rate(1.0e5, 283.15))
    assert found.parameters.uplift_sensitivity == pytest.approx(
        float(uplift_sensitivity(283.15, 0.005, ground_rate)), rel=0.15
    )
    assert found.dry_lift < 100.0
    assert found.column_vapour == pytest.approx(
        float(saturated_vapour_density(283.15)) * found.parameters.vapour_height, rel=0.01
    )


def test_wind_of_the_column_is_turned_to_the_grid():
    """True north 10 degrees right of grid north: a wind toward true east goes 10 degrees south of grid east."""
    found = column_rain(saturated_air(wind=(15.0, 1.5 * np.pi)), 0.0, grid_turn=np.radians(10.0)).parameters
    assert found.bearing == pytest.approx(np.radians(100.0), abs=1e-9)
    assert found.wind_speed == pytest.approx(15.0, rel=1e-9)


def test_dry_air_must_rise_before_it_rains():
    """Drier air has a larger dry lift, less vapour and a smaller sensitivity; 80 % at 10 degrees: about 430 m.

    The lift of ground air by Bolton (1980), eq. 15 and cp / g is 434 m; the mean over the vapour is near it, aloft drier.
    """
    wet, dry = column_rain(saturated_air(), 0.0), column_rain(saturated_air(humidity=0.8), 0.0)
    assert dry.dry_lift == pytest.approx(434.0, abs=80.0)
    assert dry.column_vapour == pytest.approx(0.8 * wet.column_vapour, rel=0.03)
    assert dry.parameters.uplift_sensitivity < wet.parameters.uplift_sensitivity
    assert dry.reference_temperature < wet.reference_temperature


def test_warm_steep_air_is_unstable_and_said_so():
    """25 degrees, saturated, 8 K per km: the stability is set to its least value, with a note and a limit."""
    found = column_rain(saturated_air(lapse=0.008, temperature=298.15), 0.0)
    assert found.stability_squared < 0.0
    assert found.parameters.stability == 1e-3
    assert any("not stable" in note for note in found.notes)
    assert any("showers" in line for line in limits_of_theory(rain_map(hill_grid(), found.parameters), found))


def test_members_and_vapourless_air_are_refused():
    """One column at a time."""
    air = saturated_air()
    both = replace(
        air,
        **{
            n: np.stack([getattr(air, n)] * 2)
            for n in ("pressure", "temperature", "vapour", "cloud", "eastward_wind", "northward_wind")
        },
    )
    with pytest.raises(IncomingAirError, match="takes one column"):
        column_rain(both, 0.0)
    with pytest.raises(IncomingAirError, match="holds no vapour"):
        column_rain(replace(air, vapour=np.zeros_like(air.vapour)), 0.0)
    with pytest.raises(OutOfRangeError, match="wind speed"):
        column_rain(saturated_air(wind=(0.0, 0.0)), 0.0)


# --- limits


def sentences(height=500.0, parameters=FLOW, **options):
    """Limits of a hill, all in one text."""
    grid = hill_grid(height=height, **options.pop("hill", {}))
    return " ".join(limits_of_theory(rain_map(grid, parameters, floor=options.pop("floor", None)), **options))


def test_a_case_within_the_theory_has_no_sentences():
    """Low hill, saturated stable air, wide map."""
    assert sentences() == ""


def test_sentences_for_cases_outside():
    """Each broken assumption has one."""
    assert "is 1.7, and linear flow" in sentences(5000.0)
    assert "flow was blocked" in sentences(5000.0, RainParameters(6.0, 0.0, 0.005, 2500.0, 0.004))
    assert "below 300 m was taken off" in sentences(floor=300.0, blocked_top=300.0)
    assert "lets it climb" in sentences(blocked_top=300.0)
    assert "60 degrees off the direction across" in sentences(off_normal=np.radians(60.0))
    assert "drifts 300 km" in sentences(parameters=RainParameters(75.0, 0.0, 0.005, 2500.0, 0.004, 2000.0, 2000.0))
    assert "well up the range" in sentences(hill={"half": 20e3, "centre": (-18e3, 0.0), "radius": 30e3})


def test_sentences_about_the_column():
    """Unsaturated, turning wind, more rain than vapour."""
    dry = column_rain(saturated_air(humidity=0.7), 0.0)
    assert "must rise" in sentences(column=dry)
    assert "gives too much" in sentences(column=dry)
    assert "taken off the terrain" in sentences(column=dry, floor=200.0)
    assert "turns by 120 degrees" in sentences(column=replace(dry, turning=np.radians(120.0)))
    assert "% of the vapour" in sentences(column=replace(dry, column_vapour=0.05))


def test_drying_ratio_of_a_ridge_across_the_map():
    """Raw upslope, no delay: (Cw / vapour) h of what flows in, whatever the width. Tolerance 1 %: cells and edges."""
    x = np.arange(-100e3, 101e3, 1e3)
    ridge = ElevationGrid(800.0 * np.exp(-((x / 15e3) ** 2)) * np.ones((101, 1)), x, x[:101][::-1])
    prompt = RainParameters(15.0, 0.0, 0.005, 0.0, 0.004, 0.0, 0.0, 2e-4)
    column = replace(column_rain(saturated_air(), 0.0), column_vapour=10.0)
    found = rain_map(ridge, prompt)
    windward = np.where(x < 0.0, found.rate, 2e-4)  # in the lee the background is cut off, not below it
    assert map_drying_ratio(replace(found, rate=windward), column) == pytest.approx(0.004 * 800.0 / 10.0, rel=0.01)


def test_turning_of_the_wind():
    """Southerly below, westerly 3 km higher: a quarter turn."""
    p = np.array([1000e2, 900e2, 700e2, 500e2, 300e2])
    t = np.array([285.0, 280.0, 270.0, 255.0, 230.0])
    air = air_from_levels(
        None,
        p,
        t,
        np.full(5, 1e-3),
        np.array([0.0, 5.0, 15.0, 15.0, 15.0]),
        np.array([10.0, 8.0, 0.0, 0.0, 0.0]),
        elevation=0.0,
    )
    assert np.degrees(column_rain(air, 0.0).turning) == pytest.approx(90.0, abs=3.0)
