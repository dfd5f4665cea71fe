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

KNOTS_30 = 30 * 1852 / 3600


@pytest.fixture(scope="module")
def ridge(straight_ridge):
    return read_bearings(straight_ridge, 10)


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
def test_a_step_that_does_not_divide_the_circle_is_refused(step, straight_ridge):
    with pytest.raises(CaseError, match=rf"--step {step}: it must divide 360"):
        read_bearings(straight_ridge, step)


def test_every_direction_of_a_circular_hill_is_the_same(circular_hill):
    """Law: behind the hill as seen from each wind the air is the same.

    Grid error: the raster is sampled along and across its cells, and a diagonal shows other steps of the slope.
    """
    setup = read_bearings(circular_hill, 45)
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
