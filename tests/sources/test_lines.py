"""Many lines over one map: the same place and bearing gives what the raster's own line gives."""

import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from orolift.crossing.result import Site
from orolift.crossing.situation import crossing_of
from orolift.errors import CaseError, TerrainError
from orolift.sources.inputs import read_inputs, situation_of
from orolift.sources.lines import line_through, map_places, read_lines, situation_through

DEMO = Path(__file__).parents[2] / "demo_terrain"


@pytest.fixture(scope="module")
def demo():
    """The moist demo case and its map."""
    inputs = read_inputs(DEMO / "varn_moist.toml")
    return inputs, read_lines(inputs)


@pytest.fixture(scope="module")
def place(demo):
    """The place on the map that the demo's own line passes through."""
    x, y = map_places(demo[1].placed, [-120.9709], [-46.8816])
    return float(x[0]), float(y[0])


def test_is_the_line_cut_from_the_raster(demo, place):
    """Same place, same bearing: ground within metres, the line on the same places."""
    inputs, lines = demo
    own = inputs.transect
    line = line_through(lines, *place, own.bearing).transect
    assert line.distance[-1] == pytest.approx(own.distance[-1], abs=1500.0)
    shift = own.distance[-1] - line.distance[-1]  # both end 35 km beyond the place
    inside = line.distance > abs(shift)
    ground = np.interp(line.distance + shift, own.distance, own.elevation)
    assert np.abs(line.elevation - ground)[inside].max() < 12.0
    assert abs(float(np.mean((line.elevation - ground)[inside]))) < 2.0
    longitude = np.interp(line.distance + shift, own.distance, own.longitude)
    assert np.abs(line.longitude - longitude)[inside].max() < 1e-3


def test_crosses_as_the_line_cut_from_the_raster(demo, place):
    """The lee air agrees within the judgement of 0.15 K, the range normal within a degree."""
    inputs, lines = demo
    own = situation_of(inputs)
    site = own.sites[0]
    there = situation_through(lines, *place, inputs.transect.bearing, (Site(site.name, 0.0, site.elevation),))
    assert there.normal.bearing == pytest.approx(own.normal.bearing, abs=math.radians(1.0))
    assert there.when.latitude == pytest.approx(own.when.latitude, abs=0.01)
    assert there.incoming is own.incoming
    a, b = crossing_of(own), crossing_of(there)
    assert b.lee[0].temperature == pytest.approx(a.lee[0].temperature, abs=0.15)
    assert b.lee[0].dew_point == pytest.approx(a.lee[0].dew_point, abs=0.3)
    assert b.features.crest == pytest.approx(a.features.crest, abs=10.0)
    assert b.flow.blocked_top == pytest.approx(a.flow.blocked_top, abs=30.0)


def test_a_given_normal_stays_given_either_way(demo, place):
    """A normal of the case is not read off the map, and counts in the half circle about downwind."""
    inputs, lines = demo
    given = replace(lines, normal=replace(situation_of(inputs).normal, bearing=math.radians(70.0)))
    one = situation_through(given, *place, math.radians(55.0))
    other = situation_through(given, *place, math.radians(235.0))
    assert one.normal.bearing == pytest.approx(math.radians(70.0))
    assert other.normal.bearing == pytest.approx(math.radians(250.0))


def test_a_line_off_the_map_is_refused(demo):
    """A place far outside has no ground."""
    lines = demo[1]
    with pytest.raises(TerrainError, match="less than 30 km of the line"):
        situation_through(lines, lines.x + 5e5, lines.y, 1.0)


def test_a_ridge_has_no_other_lines():
    """A hand-entered ridge is the only line there is."""
    with pytest.raises(CaseError, match=r"varn_ridge\.toml: other lines need elevation_file"):
        read_lines(read_inputs(DEMO / "varn_ridge.toml"))
