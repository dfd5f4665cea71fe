"""Rain over the map of a crossing: laws it must keep, estimates by hand, and what it refuses."""

import re
from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest
from shapely import box

from orolift.air.column_build import air_from_station
from orolift.crossing.crossing import cross
from orolift.crossing.pool import Pool
from orolift.crossing.result import Site
from orolift.crossing.settings import Settings
from orolift.errors import OutOfRangeError, TerrainError
from orolift.rain.gauges import gauges_at
from orolift.rain.line import MapLine, line_cosine, steps_across
from orolift.rain.over_map import Catchment, map_rain
from orolift.rain.winter import bands_of_sides, winter_flags
from orolift.terrain.grid import ElevationGrid
from orolift.terrain.range_normal import RangeNormal
from orolift.terrain.transect import Transect

HEIGHT, WIDTH = 1500.0, 12e3
X = np.arange(-90e3, 90.1e3, 2e3)
Y = np.arange(60e3, -60.1e3, -2e3)
RIDGE = ElevationGrid(np.repeat(HEIGHT * np.exp(-((X / WIDTH) ** 2))[np.newaxis], Y.size, axis=0), X, Y)


def line_across():
    """Transect of the ridge from 90 km before it to 70 km behind it, and its place on the map."""
    distance = np.linspace(0.0, 160e3, 401)
    x = distance - 90e3
    return Transect(distance, HEIGHT * np.exp(-((x / WIDTH) ** 2)), bearing=np.pi / 2), MapLine(x, 0.0 * x)


def crossed(**more):
    """A moist westerly of 16 m/s over the ridge."""
    air = air_from_station(0.0, 1.0e5, 282.15, 0.0068, 16.0, np.radians(270.0), lapse_rate=0.006)
    return cross(line_across()[0], air, (Site("Lee", 120e3),), **more)


@pytest.fixture(scope="module")
def crossing():
    return crossed()


@pytest.fixture(scope="module")
def over(crossing):
    return map_rain(crossing, RIDGE, line_across()[1])


def test_a_ridge_without_end_has_the_same_rain_on_every_line(crossing, over):
    """Law: nothing changes along the ridge, so that a swath and a line have the same rain, and strips of the map too.

    Tolerance: the ridge ends with the map and fades in the padding, which is felt by less than 2 % of the peak.
    """
    wide = map_rain(crossing, RIDGE, replace(line_across()[1], width=20e3))
    np.testing.assert_allclose(wide.on_line.rate, over.on_line.rate, atol=0.005 * over.peak_rate)
    middle = over.found.rate[Y.size // 4 : -Y.size // 4]
    assert np.ptp(middle, axis=0).max() < 0.02 * over.peak_rate
    assert over.on_line.peak_rate == pytest.approx(over.peak_rate, rel=0.02)


def test_shares_and_totals_of_tiles_add_up(crossing):
    """Conservation: catchments that tile the map share out all its rain, its snow and its windward rain."""
    edges_x, edges_y = (-91e3, -10e3, 5e3, 91e3), (-61e3, 0.0, 61e3)
    tiles = [
        Catchment(f"{i}{j}", box(edges_x[i], edges_y[j], edges_x[i + 1], edges_y[j + 1]))
        for i in range(3)
        for j in range(2)
    ]
    found = map_rain(crossing, RIDGE, line_across()[1], duration=7200.0, catchments=tiles)
    volumes = [one.rain.volume for one in found.catchments]
    assert sum(volumes) * 1000.0 == pytest.approx(found.total * 7200.0, rel=1e-9)
    for share, whole in (("windward_share", found.windward_share), ("snow_share", found.snowing_share)):
        parts = [v * (getattr(one.rain, share) or 0.0) for v, one in zip(volumes, found.catchments, strict=True)]
        assert sum(parts) / sum(volumes) == pytest.approx(whole, rel=1e-9)
    assert (found.bands.area * found.bands.rate).sum() == pytest.approx(found.total, rel=1e-9)


def test_turned_grid_has_the_same_rain(crossing, over):
    """Law: a map whose north points to the grid's east, with everything on it turned, has the same rain."""
    # true north lies 90 degrees clockwise from grid north: what was at (x, y) is at (y, -x)
    grid = ElevationGrid(RIDGE.elevation.T.copy(), -Y, -X)
    turned = map_rain(crossing, grid, MapLine(line_across()[1].y, -line_across()[1].x), north=np.pi / 2)
    assert turned.total == pytest.approx(over.total, rel=1e-6)
    assert turned.windward_share == pytest.approx(over.windward_share, abs=0.01)
    np.testing.assert_allclose(turned.on_line.rate, over.on_line.rate, rtol=1e-6, atol=1e-9)


def test_the_crest_is_the_divide_and_a_drawn_line_there_the_same(crossing, over):
    """Windward cells lie upwind of the ridge's axis, by strips or by a line along the axis."""
    off_crest = X != 0.0  # cells on the divide itself hang on rounding
    assert np.array_equal(over.windward[:, off_crest], np.broadcast_to(X < 0.0, RIDGE.elevation.shape)[:, off_crest])
    axis = [np.array([[1.0, -1e5], [1.0, 1e5]])]
    drawn = map_rain(crossing, RIDGE, line_across()[1], divide=axis)
    assert drawn.drawn_divide
    assert np.array_equal(drawn.windward[:, off_crest], over.windward[:, off_crest])
    assert drawn.windward_share == pytest.approx(
        np.nansum(drawn.found.rate[:, X <= 0.0]) / np.nansum(drawn.found.rate), rel=1e-9
    )


def test_simple_estimates_by_hand(crossing, over):
    """Raw upslope: Cw h over the column's vapour; the bound 1 - exp(-that) (reference forms, worked out here)."""
    p, found = over.column.parameters, over.estimates
    relief = crossing.features.crest - over.reference - over.column.dry_lift
    assert found.relief == pytest.approx(relief)
    assert found.upslope_drying == pytest.approx(p.uplift_sensitivity * relief / over.column.column_vapour, rel=1e-9)
    assert found.largest_drying == pytest.approx(1.0 - np.exp(-found.upslope_drying), rel=1e-9)
    assert found.upslope_rate * found.slope_length == pytest.approx(
        found.upslope_drying * over.column.column_vapour * p.wind_speed, rel=1e-3
    )
    assert 0.0 < found.map_drying < found.largest_drying < found.upslope_drying
    assert 0.0 < found.map_rate < found.laminar_rate


def test_two_estimates_side_by_side(crossing, over):
    """The ratio that is told is that of the totals, and reasons follow where they differ."""
    line = over.on_line
    assert line.ratio == pytest.approx(line.total / crossing.rain.total)
    told = re.match(r"On the line the map gives ([\d.]+) times .* crossing, (\d+) % .* has (\d+) %", line.difference[0])
    assert float(told[1]) == pytest.approx(line.ratio, abs=0.05)
    assert int(told[2]) == pytest.approx(100.0 * line.windward_share, abs=0.5)
    assert int(told[3]) == pytest.approx(100.0 * crossing.rain.windward_share, abs=0.5)
    assert len(line.difference) > 1


def test_the_steps_of_the_line_hold_all_its_rain():
    """Conservation: rate times the steps across the range is the total, also where the line is oblique to it."""
    oblique = crossed(normal=RangeNormal(np.pi / 2 + np.radians(35.0), 1.0))
    assert line_cosine(oblique) == pytest.approx(np.cos(np.radians(35.0)))
    assert (oblique.rain.rate * steps_across(oblique)).sum() == pytest.approx(oblique.rain.total, rel=1e-9)


def test_background_adds_to_totals_and_not_to_the_line(crossing, over):
    """Linear before truncation: on windward ground the rate grows by the background, and the drying ratio does not.

    The line is read between cells, where a truncated neighbour counts: 0.1 % of its total.
    """
    wet = map_rain(crossed(background=1.0 / 3600.0), RIDGE, line_across()[1])
    raining = over.found.rate > 0.0
    np.testing.assert_allclose((wet.found.rate - over.found.rate)[raining], 1.0 / 3600.0, rtol=1e-9)
    assert wet.drying_ratio == pytest.approx(over.drying_ratio, rel=1e-6)
    assert wet.on_line.total == pytest.approx(over.on_line.total, rel=2e-3)
    assert wet.total > over.total


def test_blocked_air_is_taken_off_and_said(crossing):
    """Air that stays is below the floor of the map, and the limits name it."""
    slow = crossed(settings=Settings(critical_value=0.3))
    assert slow.flow.blocked_top > slow.features.base + 100.0
    found = map_rain(slow, RIDGE, line_across()[1])
    assert found.found.floor == pytest.approx(slow.flow.blocked_top + found.column.dry_lift)
    assert any("blocked" in line for line in found.limits)


def test_gauges_that_caught_the_map_show_no_bias_and_nothing_is_fitted_unasked(crossing, over):
    """Gauges with the map's own totals: bias and error vanish; a fit exists only where it is asked for."""
    x, y = np.linspace(-20e3, 25e3, 8), np.linspace(-30e3, 30e3, 8)
    from orolift.rain.gauges import rain_at

    caught = 6 * 3600.0 * rain_at(RIDGE, over.found.rate, x, y)
    found = map_rain(crossing, RIDGE, line_across()[1], duration=6 * 3600.0, gauges=gauges_at(x, y, caught))
    assert found.comparison.bias == pytest.approx(0.0, abs=1e-9)
    assert found.fit is None
    fitted = map_rain(crossing, RIDGE, line_across()[1], duration=6 * 3600.0, gauges=found.gauges, fit=True)
    assert fitted.fit.total_time.value == pytest.approx(2000.0, rel=0.1)
    np.testing.assert_array_equal(fitted.found.rate, found.found.rate)


@pytest.mark.parametrize(
    ("change", "error", "message"),
    [
        ({"duration": 0.0, "catchments": [Catchment("A", box(0, 0, 1e4, 1e4))]}, OutOfRangeError, "duration"),
        ({"divide": [np.array([[0.0, 3e5], [1.0, 4e5]])]}, TerrainError, "does not cross the wind"),
        ({"gauges": gauges_at([0.0], [0.0], [5.0]), "fit": True}, OutOfRangeError, "at least 6"),
    ],
)
def test_what_is_refused(crossing, change, error, message):
    with pytest.raises(error, match=message):
        map_rain(crossing, RIDGE, line_across()[1], **change)


def test_bands_of_both_sides_hold_all_the_rain(crossing):
    """Conservation: the bands, weighted by their places, give the mean rate of the line."""
    bands = bands_of_sides(crossing)
    ground = np.interp(crossing.distance, crossing.transect.distance, crossing.transect.elevation)
    total = 0.0
    for band in bands:
        side = crossing.distance <= crossing.features.crest_distance
        here = (side if band.side == "windward" else ~side) & (ground >= band.lower) & (ground < band.upper)
        assert here.any()
        total += band.rate * here.sum()
    assert total == pytest.approx((crossing.rain.rate + crossing.rain.background).sum())
    # colder higher up: on the windward side no band has less snow than the one below it
    share = [band.snow_share for band in bands if band.side == "windward"]
    assert all(b >= a - 0.05 for a, b in pairwise(share))


def pooled(crossing, kelvin):
    """The crossing with a pool of 300 m in the lee, of one temperature."""
    foot = crossing.features.lee_foot
    height = foot + np.linspace(0.0, 300.0, 4)
    pool = Pool(foot, foot + 300.0, height, np.full(4, kelvin), np.full(4, 0.003))
    return replace(crossing, pool=pool)


def test_freezing_rain_needs_cold_ground_under_rain(crossing):
    """A pool below 0 degrees under rain is flagged; a warm one, and a cold one under snow or nothing, is not."""
    lee = crossing.distance > crossing.features.crest_distance
    wet = replace(crossing.rain, rate=np.where(lee, 1.0 / 3600.0, 0.0), snow_rate=np.zeros(lee.size))
    raining = replace(crossing, rain=wet)
    (flag,) = winter_flags(pooled(raining, 270.15))
    assert re.search(r"Freezing rain: up to 1\.0 mm .* -3\.0 °C", flag)
    assert winter_flags(pooled(raining, 274.15)) == ()
    assert winter_flags(raining) == ()
    assert winter_flags(pooled(replace(crossing, rain=replace(wet, snow_rate=wet.rate)), 270.15)) == ()
    assert winter_flags(pooled(replace(crossing, rain=replace(wet, rate=0.0 * wet.rate)), 270.15)) == ()


def test_rain_on_snow_needs_snow_on_the_ground(crossing, over):
    """Nothing is said unless told of snow; then where rain meets it, on the line or on the map beside it."""
    rain = replace(crossing.rain, snow_rate=0.0 * crossing.rain.rate)
    raining = replace(crossing, rain=rain)
    assert winter_flags(raining) == ()
    (flag,) = winter_flags(raining, snow_cover_above=400.0)
    assert flag.startswith("Rain on snow: up to")
    assert f"{3600.0 * rain.rate.max():.1f} mm" in flag
    assert winter_flags(raining, snow_cover_above=2000.0) == ()
    higher = ElevationGrid(RIDGE.elevation + 600.0, RIDGE.x, RIDGE.y)
    (beside,) = winter_flags(raining, snow_cover_above=1900.0, grid=higher, rain_on_map=over.found.rate)
    assert "beside the line" in beside
