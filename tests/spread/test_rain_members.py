"""Rain over a map in members: around the answer, and as the theory has it."""

from dataclasses import replace

import numpy as np
import pytest
import shapely

from orolift.rain.gauges import gauges_at
from orolift.rain.line import MapLine
from orolift.rain.over_map import Catchment, map_rain
from orolift.spread.rain_members import MOST_CELLS, _coarser, rain_members
from orolift.spread.ranges import rank_correlation
from orolift.spread.spread import spread_of
from orolift.spread.uncertainty import Uncertainty
from orolift.terrain.grid import ElevationGrid

NOTHING = Uncertainty(**{name: 0.0 for name in vars(Uncertainty()) if isinstance(vars(Uncertainty())[name], float)})


@pytest.fixture(scope="module")
def mapped(moist, moist_crossing):
    """The moist ridge as a map 120 cells long, two catchments, one of them off it, and two gauges."""
    line = moist.transect
    x = np.linspace(line.distance[0], line.distance[-1], 120)
    y = np.arange(20e3, -20.1e3, -(x[1] - x[0]))
    grid = ElevationGrid(np.tile(np.interp(x, line.distance, line.elevation), (y.size, 1)), x, y)
    crest = moist_crossing.features.crest_distance
    basins = (
        Catchment("Near", shapely.box(crest - 8e3, -5e3, crest, 5e3)),
        Catchment("Far", shapely.box(9e5, 0.0, 9.1e5, 1e4)),
    )
    gauges = gauges_at([crest - 4e3, crest], [0.0, 1e3], [5.0, 6.0])
    return map_rain(
        moist_crossing,
        grid,
        MapLine(line.distance.copy(), np.zeros(line.distance.size), 8e3),
        duration=6 * 3600.0,
        catchments=basins,
        gauges=gauges,
    )


@pytest.fixture(scope="module")
def members(moist, moist_crossing, mapped):
    """Members of that map by an uncertainty, and their spread."""

    def made(uncertainty, **changes):
        spread = spread_of(moist, moist_crossing, uncertainty, members=10, seed=2, streamlines=20)
        spread = replace(spread, **changes) if changes else spread
        return rain_members(spread, moist, moist_crossing, mapped), spread

    return made


def test_members_that_differ_in_nothing_are_the_answer(members, mapped):
    """On its own cells, though they were worked out on coarser ones."""
    found, _ = members(NOTHING)
    assert max(mapped.found.grid.elevation.shape) > MOST_CELLS
    for name, value in (
        ("peak_rate", mapped.peak_rate),
        ("drying_ratio", mapped.drying_ratio),
        ("windward_share", mapped.windward_share),
        ("snow_level", mapped.snow.snow_level),
        ("wind_speed", mapped.column.parameters.wind_speed),
    ):
        assert found.values[name] == pytest.approx(value, rel=1e-3), name
    near = mapped.catchments[0].rain
    assert found.catchments["rate"][:, 0] == pytest.approx(near.rate, rel=1e-3)
    assert found.catchments["windward_share"][:, 0] == pytest.approx(near.windward_share, abs=1e-3)
    assert np.isnan(found.catchments["rate"][:, 1]).all()
    assert found.gauges[0] == pytest.approx(mapped.comparison.modelled, rel=1e-3)


def test_moister_and_warmer_air_rains_more(members):
    """The theory's sensitivity goes with the vapour of saturated air; colder air has a lower snow level."""
    found, spread = members(replace(NOTHING, dew_point=1.5))
    assert rank_correlation(spread.level["dew_point"], found.values["mean_rate"]) > 0.95
    assert rank_correlation(spread.level["dew_point"], found.catchments["rate"][:, 0]) > 0.95
    found, spread = members(replace(NOTHING, temperature=1.5, dew_point=1.5))
    assert rank_correlation(spread.level["temperature"], found.values["snow_level"]) > 0.6


def test_a_member_that_does_not_cross_has_no_map(members):
    """It counts in no range."""
    found, spread = members(NOTHING, crosses=np.arange(10) > 2)
    assert np.isnan(found.values["peak_rate"][:3]).all()
    assert np.isfinite(found.values["peak_rate"][3:]).all()
    assert np.isnan(found.catchments["rate"][:3]).all()
    assert spread.members == 10


def test_a_member_beyond_what_is_physical_has_no_map(members, moist, moist_crossing, mapped):
    """One that would be far too cold fails in the crossing and here, and the others go on."""
    _, spread = members(NOTHING)
    level = {name: value.copy() for name, value in spread.level.items()}
    level["temperature"][:] = 0.5
    level["temperature"][0] = 1e-30
    wild = replace(spread, uncertainty=replace(NOTHING, temperature=15.0), level=level)
    found = rain_members(wild, moist, moist_crossing, mapped)
    assert np.isnan(found.values["mean_rate"][0])
    assert found.values["mean_rate"][1:] == pytest.approx(mapped.mean_rate, rel=1e-3)


def test_coarser_cells_keep_mean_and_place():
    """Of whole cells; missing ground does not count."""
    rng = np.random.default_rng(1)
    x, y = np.arange(240) * 100.0, -np.arange(160) * 100.0
    grid = ElevationGrid(rng.uniform(0.0, 1000.0, (160, 240)), x, y)
    found = _coarser(grid)
    assert found.elevation.shape == (53, 80)
    assert found.elevation.mean() == pytest.approx(grid.elevation[:159].mean())
    assert found.x[0] == 100.0
    assert found.y[0] == -100.0
    holed = grid.elevation.copy()
    holed[0, 0] = np.nan
    assert _coarser(replace(grid, elevation=holed)).elevation[0, 0] == pytest.approx(np.nanmean(holed[:3, :3]))
    small = replace(grid, elevation=grid.elevation[:40, :60], x=x[:60], y=y[:40])
    assert _coarser(small) is small
