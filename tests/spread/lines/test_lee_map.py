"""The lee as a map: what strips say is what the map says, without stripes."""

from dataclasses import replace

import numpy as np
import pytest

from orolift.crossing.result import Site
from orolift.crossing.situation import crossing_of
from orolift.errors import TerrainError
from orolift.sources import strips as plans
from orolift.sources.geotiff import lee_maps
from orolift.sources.inputs import read_inputs, situation_of
from orolift.spread.lee_map import lee_map
from orolift.spread.strips import Strip, air_of_strips, strip_air
from orolift.terrain.grid import ElevationGrid, grid_elevation

NORTHING = 5_100_000.0


def planned(ridge_case, folder, monkeypatch, **shape):
    """Inputs and strips 5 km apart over a ridge; the parts of its map."""
    monkeypatch.setattr(plans, "STRIP_SHARE", 0.5)
    monkeypatch.setattr("orolift.sources.line_axis.POINTS", 160)
    inputs = read_inputs(ridge_case(folder, {"foot": (530_000, 0)}, **shape))
    return inputs, plans.strip_plan(inputs)


@pytest.fixture(scope="module")
def straight(tmp_path_factory, ridge_case):
    """A straight ridge of one height."""
    with pytest.MonkeyPatch.context() as patch:
        inputs, plan = planned(ridge_case, tmp_path_factory.mktemp("straight"), patch, notch=0.0)
    parts = air_of_strips(plan.strips[8:-8])
    frame = replace(plan.frame, across=plan.frame.across[8:-8])
    return inputs, plan, parts, frame, lee_map(parts, frame, plan.placed.grid, inputs.incoming)


@pytest.fixture(scope="module")
def notched(tmp_path_factory, ridge_case):
    """A ridge with a pass half as high."""
    with pytest.MonkeyPatch.context() as patch:
        inputs, plan = planned(ridge_case, tmp_path_factory.mktemp("notched"), patch)
    parts = air_of_strips(plan.strips[5:-5])
    frame = replace(plan.frame, across=plan.frame.across[5:-5])
    return inputs, plan, parts, frame, lee_map(parts, frame, plan.placed.grid, inputs.incoming)


def middle_rows(found, frame):
    """Rows of the map well inside the strips."""
    reach = 0.5 * float(np.ptp(frame.across)) - 3.0 * frame.smoothing
    return np.abs(found.grid.y - NORTHING) < reach


def test_a_straight_ridge_gives_uniform_strips(straight):
    """Symmetry along the ridge: every row is the same, but for the turn of true north across the map."""
    *_, frame, found = straight
    rows = middle_rows(found, frame)
    assert rows.sum() > 30
    for values, near in ((found.temperature, 0.03), (found.wind_10m, 0.15), (found.relative_humidity, 0.003)):
        inside = values[rows]
        known = np.isfinite(inside).all(axis=0)
        assert known.sum() > 150
        assert np.ptp(inside[:, known], axis=0).max() < near


def test_the_map_along_the_line_is_its_crossing(straight):
    """Cells on the line have the air of sites put there, from the raster's own line."""
    inputs, *_, found = straight
    row = int(np.argmin(np.abs(found.grid.y - NORTHING)))
    columns = np.flatnonzero(np.isfinite(found.wind_10m[row]))[5:-5:15]
    own = situation_of(inputs)
    sites = [own.sites[0]]
    for c in columns:  # the line begins 50 km upwind of its place; the map has UTM's scale of 0.9996
        away = 50_000.0 + (float(found.grid.x[c]) - 500_000.0) / 0.9996
        sites.append(Site(str(c), away, float(found.grid.elevation[row, c])))
    crossing = crossing_of(replace(own, sites=tuple(sites)))
    for column, air in zip(columns, crossing.lee[1:], strict=True):
        if air.in_blocked_air:
            continue
        assert found.temperature[row, column] == pytest.approx(air.temperature, abs=0.15), air.name
        assert found.relative_humidity[row, column] == pytest.approx(air.relative_humidity, abs=0.015)
        assert found.warming[row, column] == pytest.approx(air.warming, abs=0.15)
        assert found.wind_10m[row, column] == pytest.approx(air.wind.at_10m, rel=0.06, abs=0.2)


def test_a_cell_has_the_air_of_its_own_height(straight):
    """A hollow of 200 m in the lee is warmer by what sinking dry air gains: 9.8 K per km, common practice."""
    inputs, _, parts, frame, found = straight
    grid = found.grid
    lower = ElevationGrid(grid.elevation - 200.0, grid.x, grid.y)
    deep = lee_map(parts, frame, lower, inputs.incoming)
    lee = middle_rows(found, frame)[:, np.newaxis] & (found.behind_crest > 25e3) & np.isfinite(deep.wind_10m)
    gain = (deep.temperature - found.temperature)[lee]
    assert gain.size > 100
    assert np.median(gain) == pytest.approx(1.96, abs=0.25)


def test_no_stripes_beside_a_pass(notched):
    """Neighbouring cells of the smooth lee differ little, and the pass shows."""
    *_, frame, found = notched
    rows = middle_rows(found, frame)
    lee = (found.grid.x > 512_000.0) & (found.grid.x < 545_000.0)
    field = found.temperature[rows][:, lee]
    assert np.isfinite(field).all()
    assert np.abs(np.diff(field, axis=0)).max() < 0.25
    curve = np.abs(np.diff(field, n=2, axis=0)).max()
    assert curve < 0.1
    assert np.ptp(field, axis=0).max() > 0.3


def test_failed_strips_are_counted_and_left_out(straight):
    """The map goes on without them; without any there is none."""
    inputs, plan, parts, frame, found = straight
    broken = [replace(part, values=None, reason="no") if i < 4 else part for i, part in enumerate(parts)]
    less = lee_map(broken, frame, plan.placed.grid, inputs.incoming)
    assert less.failed == (("no", 4),)
    assert less.strips == found.strips - 4
    assert np.isnan(less.temperature).sum() > np.isnan(found.temperature).sum()
    with pytest.raises(TerrainError, match="no strip of the map could be worked out: no"):
        lee_map([replace(part, values=None, reason="no") for part in parts], frame, plan.placed.grid, inputs.incoming)
    assert strip_air(Strip(0.0, None, "why")).reason == "why"


def test_a_strip_that_does_not_cross_says_why(straight):
    """It is reported like one without ground."""
    strip = next(strip for strip in straight[1].strips if strip.situation is not None)
    along = replace(strip.situation.normal, bearing=0.02)
    found = strip_air(replace(strip, situation=replace(strip.situation, normal=along)))
    assert found.values is None
    assert "runs along the range" in found.reason


def test_maps_are_written_with_units_and_places(straight):
    """Read back by rasterio: values in the units named, cells where they belong, missing ones declared."""
    from rasterio.io import MemoryFile

    *_, found = straight
    placed = straight[1].placed
    files = lee_maps(placed, found, {"title": "Ridge"})
    with MemoryFile(files["lee_temperature"]) as memory, memory.open() as file:
        cells = file.read(1, masked=True)
        assert (file.units, file.crs.to_epsg()) == (("degC",), 32632)
        assert file.tags()["title"] == "Ridge"
        assert np.array_equal(cells.mask, np.isnan(found.temperature))
        row, column = file.index(530_000.0, NORTHING)
        assert cells[row, column] == pytest.approx(found.temperature[row, column] - 273.15, abs=1e-3)
        assert grid_elevation(found.grid, *file.xy(row, column)) == found.grid.elevation[row, column]
    with MemoryFile(files["lee_cloud"]) as memory, memory.open() as file:
        assert file.units == ("m", "kg m-2")


def test_strips_on_the_right_of_the_wind_lie_there(straight):
    """Wind from the west: strips to its right are in the south, and what is added there is found there."""
    inputs, plan, parts, frame, found = straight
    warmer = [
        part
        if across <= 0.0 or part.values is None
        else replace(part, values=replace(part.values, temperature=part.values.temperature + 5.0))
        for part, across in zip(parts, frame.across, strict=True)
    ]
    changed = lee_map(warmer, frame, plan.placed.grid, inputs.incoming).temperature - found.temperature
    inside = middle_rows(found, frame)
    south = inside & (found.grid.y < NORTHING - 3.0 * frame.smoothing)
    north = inside & (found.grid.y > NORTHING + 3.0 * frame.smoothing)
    assert np.nanmedian(changed[south]) == pytest.approx(5.0, abs=0.1)
    assert np.nanmedian(changed[north]) == pytest.approx(0.0, abs=0.1)
