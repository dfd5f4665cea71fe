"""Every wind direction in turn: laws of the ridge, of the circular hill, and of turned air."""

import math
from dataclasses import replace

import numpy as np
import pytest

from orolift.air.column import wind_component
from orolift.crossing.crossing import crest_component
from orolift.errors import CaseError, NoCrossingError
from orolift.sources.bearings_case import bearing_task, read_bearings
from orolift.sources.bearings_results import bearing_rows, bearings_results
from orolift.spread.bearings import (
    Direction,
    bearings_of,
    reversed_situation,
    square_enough,
    turned_air,
    worked_direction,
)
from orolift.spread.site_state import SiteState
from orolift.terrain.features import features
from orolift.terrain.transect import transect_elevation

RIDGE = """
[terrain]
ridge_km_m = [[0, 40], [30, 1250], [60, 40]]
[incoming]
wind_from_deg = 240
station = { elevation_m = 40, temperature_c = 14.5, dew_point_c = 7.0, pressure_hpa = 1004.0, wind_kt = 30 }
[[site]]
name = "Tarn"
distance_km = 50
[[site]]
name = "Kell"
distance_km = 10
"""
KNOTS_30 = 30 * 1852 / 3600


@pytest.fixture(scope="module")
def ridge(tmp_path_factory):
    file = tmp_path_factory.mktemp("ridge") / "case.toml"
    file.write_text(RIDGE)
    return read_bearings(file, 10)


def situation(setup, degrees):
    return bearing_task(setup, math.radians(degrees)).lines[0].situation


def crest_wind(setup, degrees):
    one = situation(setup, degrees)
    crest = features(one.transect).crest
    return crest_component(one.incoming, one.transect.bearing, crest)


@pytest.mark.parametrize("off", [0, 10, 30, 50, 70, -20, -60])
def test_wind_across_a_straight_ridge_follows_the_cosine(ridge, off):
    """Law: U cos of the angle; the same from the other side."""
    expected = KNOTS_30 * math.cos(math.radians(off))
    assert crest_wind(ridge, 240 + off) == pytest.approx(expected, rel=1e-9)
    assert crest_wind(ridge, (60 + off) % 360) == pytest.approx(expected, rel=1e-9)


def test_air_that_runs_along_the_range_is_no_answer(ridge):
    """The angle to the range is that of the wind; directions beyond 45 degrees are named for nothing."""
    degrees = [240, 280, 300, 60, 20]
    found = [worked_direction(bearing_task(ridge, math.radians(one))) for one in degrees]
    off = [one.sites[0].oblique for one in found]
    assert np.degrees(off) == pytest.approx([0.0, 40.0, 60.0, 0.0, 40.0])
    together = bearings_of(found, ["Tarn", "Kell"], step=math.radians(20.0), given=math.radians(240.0), planned=5)
    assert square_enough(together.sites[0].states) == [True, True, True, True, False]
    assert 4 not in {together.sites[0].warmest, together.sites[0].driest, together.sites[0].fire}
    alone = bearings_of(found[2:3], ["Tarn", "Kell"], step=1.0, given=0.0, planned=1)
    assert alone.sites[0].warmest == 0


@pytest.mark.parametrize("degrees", [150, 330])
def test_wind_along_the_ridge_does_not_cross(ridge, degrees):
    with pytest.raises(NoCrossingError, match="does not cross"):
        crest_wind(ridge, degrees)
    states = worked_direction(bearing_task(ridge, math.radians(degrees))).sites
    assert {state.status for state in states} == {"no crossing"}


def test_a_symmetric_ridge_gives_the_two_sides_each_others_air(ridge):
    """Law: with the wind turned round, the site in the lee is the one 10 km from the other end."""
    there, back = (worked_direction(bearing_task(ridge, math.radians(degrees))).sites for degrees in (240, 60))
    assert [state.side for state in there] == ["lee", "windward"]
    assert [state.side for state in back] == ["windward", "lee"]
    assert back[1].temperature == pytest.approx(there[0].temperature, abs=1e-6)
    assert back[1].wind_10m == pytest.approx(there[0].wind_10m, rel=1e-6)
    assert back[1].shelter_distance == pytest.approx(there[0].shelter_distance)


def test_a_line_crossed_from_its_other_end_has_the_same_ground(ridge):
    """Round trip: twice is once; and under every site lies the ground that lay there before."""
    line = ridge.situation.transect
    slope = replace(ridge.situation, transect=replace(line, elevation=line.elevation + 0.01 * line.distance))
    back = reversed_situation(slope)
    for site, other in zip(slope.sites, back.sites, strict=True):
        there = transect_elevation(slope.transect, site.distance)
        assert transect_elevation(back.transect, other.distance) == pytest.approx(float(there))
    again = reversed_situation(back)
    np.testing.assert_array_equal(again.transect.elevation, slope.transect.elevation)
    assert again.transect.bearing == pytest.approx(line.bearing)
    assert [site.distance for site in again.sites] == pytest.approx([site.distance for site in slope.sites])


@pytest.mark.parametrize("angle", [0.3, 2.0, -4.0])
def test_turned_air_keeps_its_speed_and_shear(ridge, angle):
    """Law: components along a bearing turned with the air stay; a whole turn changes nothing."""
    air = ridge.inputs.incoming
    turned = turned_air(air, angle)
    for bearing in (0.0, 1.0, 4.0):
        np.testing.assert_allclose(wind_component(turned, bearing + angle), wind_component(air, bearing), atol=1e-9)
    back = turned_air(air, 2.0 * math.pi)
    np.testing.assert_allclose(back.eastward_wind, air.eastward_wind, atol=1e-9)


@pytest.mark.parametrize("step", [0, 7, 100, -10])
def test_a_step_that_does_not_divide_the_circle_is_refused(step, tmp_path):
    (tmp_path / "case.toml").write_text(RIDGE)
    with pytest.raises(CaseError, match=rf"--step {step}: it must divide 360"):
        read_bearings(tmp_path / "case.toml", step)


def hill(folder, cell=1000.0, half=100):
    """A circular hill of 1200 m on the central meridian of its zone, and sites 25 km from its middle all round."""
    import rasterio
    from rasterio.transform import from_origin

    east, north = 500e3, 5000e3
    across = (np.arange(2 * half) - half + 0.5) * cell
    ground = 1200.0 * np.exp(-(across**2 + across[:, np.newaxis] ** 2) / (2.0 * 10e3**2)) + 10.0
    place = from_origin(east - half * cell, north + half * cell, cell, cell)
    shape = {"width": 2 * half, "height": 2 * half, "count": 1, "dtype": "float32", "crs": "EPSG:32633"}
    with rasterio.open(folder / "hill.tif", "w", driver="GTiff", transform=place, **shape) as out:
        out.write(ground.astype(np.float32), 1)
    sites = "".join(
        f'[[site]]\nname = "{bearing}"\neasting_m = {east + 25e3 * math.sin(math.radians(bearing))}\n'
        f"northing_m = {north + 25e3 * math.cos(math.radians(bearing))}\nelevation_m = 60\n"
        for bearing in (0, 90, 225)
    )
    (folder / "case.toml").write_text(
        f"""
[terrain]
elevation_file = "hill.tif"
[transect]
through = {{ easting_m = {east}, northing_m = {north} }}
upwind_km = 60
downwind_km = 30
swath_km = 0
[incoming]
wind_from_deg = 270
station = {{ elevation_m = 10, temperature_c = 14, dew_point_c = 6, pressure_hpa = 1010, wind_kt = 30 }}
{sites}"""
    )
    return folder / "case.toml"


def test_every_direction_of_a_circular_hill_is_the_same(tmp_path):
    """Law: behind the hill as seen from each wind the air is the same.

    Grid error: the raster is sampled along and across its cells, and a diagonal shows other steps of the slope.
    """
    setup = read_bearings(hill(tmp_path), 45)
    behind = []
    for number, wind_from in enumerate((180, 270, 45)):  # sites north, east and southwest of the hill
        task = bearing_task(setup, math.radians(wind_from))
        line = next(one for one in task.lines if one.numbers == (number,))
        assert line.situation.transect.bearing == pytest.approx(math.radians((wind_from + 180) % 360), abs=1e-3)
        behind.append(worked_direction(type(task)(task.wind_from, task.states, (line,))).sites[number])
    assert {state.side for state in behind} == {"lee"}
    for state in behind[1:]:
        assert state.shelter_height == pytest.approx(behind[0].shelter_height, abs=5.0)
        assert state.shelter_distance == pytest.approx(25e3, abs=500.0)
        assert state.temperature == pytest.approx(behind[0].temperature, abs=0.1)
        assert state.relative_humidity == pytest.approx(behind[0].relative_humidity, abs=0.01)
        assert state.wind_10m == pytest.approx(behind[0].wind_10m, rel=0.05)


def state(**values):
    return SiteState("crossing", **values)


def test_worst_for_fire_is_the_largest_product_of_deficit_and_wind():
    """Neither the driest nor the windiest need be it; directions without a wind do not count."""
    states = [
        state(relative_humidity=0.2, drying_power=1000.0, warming=1.0, rain=0.0),
        state(relative_humidity=0.3, drying_power=4000.0, warming=2.0, rain=1e-3),
        state(relative_humidity=0.1, drying_power=None, warming=5.0, rain=2e-3),
        SiteState("no crossing"),
    ]
    found = [Direction(math.radians(90.0 * i), (one,)) for i, one in enumerate(states)]
    site = bearings_of(reversed(found), ["Tarn"], step=math.radians(90), given=0.0, planned=4).sites[0]
    assert (site.fire, site.driest, site.warmest, site.rain) == (1, 2, 2, 2)


def test_no_rain_from_anywhere_has_no_best_direction():
    found = [Direction(0.0, (state(rain=1e-9),)), Direction(1.0, (SiteState("no crossing"),))]
    site = bearings_of(found, ["Tarn"], step=1.0, given=0.0, planned=2).sites[0]
    assert (site.rain, site.fire, site.warmest) == (None, None, None)


def test_files_have_a_row_for_each_site_and_direction(ridge):
    """Directions in degrees, round numbers staying round; no number is made up where no air crosses."""
    states = tuple(SiteState("no crossing", "calm") for _ in ridge.sites)
    found = [Direction(math.radians(10.0 * i), states) for i in range(36)]
    every = bearings_of(found, ["Tarn", "Kell"], step=math.radians(10), given=math.radians(240), planned=36)
    header, rows = bearing_rows(bearings_results(every, ridge))
    assert len(rows) == 72
    assert [row[header.index("wind_from_deg")] for row in rows[:36]] == [10.0 * i for i in range(36)]
    assert rows[0][header.index("temperature_c")] is None
