"""Sites on lines of their own, over a range whose shape is known: a straight ridge with a pass."""

from dataclasses import replace

import numpy as np
import pytest

from orolift.crossing.situation import crossing_of
from orolift.errors import CaseError
from orolift.sources.inputs import read_inputs, situation_of
from orolift.sources.results import results_of
from orolift.sources.site_lines import site_groups
from orolift.sources.site_table import site_rows
from orolift.spread.sites import air_of_groups, with_sites

NORTHING = 5_100_000.0
SITES = {
    "on the line": (525_000, 0),
    "north": (525_000, 30_000),
    "south": (525_000, -30_000),
    "windward north": (470_000, 30_000),
    "far north": (525_000, 51_000),
    "close to the line": (522_000, 300),
    "abreast of north": (530_000, 30_400),
}


@pytest.fixture(scope="module")
def worked(tmp_path_factory, ridge_case):
    """Inputs, and the crossing with all sites."""
    inputs = read_inputs(ridge_case(tmp_path_factory.mktemp("ridge"), SITES))
    own = crossing_of(situation_of(inputs))
    numbers = tuple(number for number, place in enumerate(inputs.places, start=1) if place.on_line)
    return inputs, own, with_sites(own, numbers, air_of_groups(site_groups(inputs)), elsewhere=True)


def named(crossing):
    """The air by the name of the site."""
    return {air.name: air for air in crossing.lee}


def test_sites_keep_the_order_and_numbers_of_the_case(worked):
    """Whatever line they are on, and whichever was finished first."""
    inputs, _, crossing = worked
    done = [name for name in SITES if name not in {site.name for site in crossing.failed}]
    assert [air.name for air in crossing.lee] == done
    assert [inputs.places[air.number - 1].name for air in crossing.lee] == done


def test_sites_on_the_line_are_those_of_the_crossing(worked):
    """Near enough to the line, and in the lee of its crest."""
    _, own, crossing = worked
    assert [air.name for air in own.lee] == ["on the line", "close to the line"]
    assert named(crossing)["on the line"].temperature == own.lee[0].temperature
    assert [air.name for air in crossing.on_line] == ["on the line", "close to the line"]


def test_a_mirrored_range_gives_mirrored_sites(worked):
    """Symmetry: 30 km north and 30 km south of the pass are alike (within what sampling on a turned grid does)."""
    north, south = (named(worked[2])[name] for name in ("north", "south"))
    assert north.temperature == pytest.approx(south.temperature, abs=0.05)
    assert north.own.crest == pytest.approx(south.own.crest, abs=5.0)
    assert north.own.offset == pytest.approx(-south.own.offset, abs=200.0)
    assert north.wind.wind == pytest.approx(south.wind.wind, rel=0.02)


def test_each_site_has_the_crest_of_its_own_line(worked):
    """Behind the pass the crest is the pass, a mean across the swath; beside it the ridge of 2000 m."""
    _, own, crossing = worked
    sites = named(crossing)
    assert 1000.0 < own.features.crest < 1200.0
    assert sites["north"].own.crest == pytest.approx(2000.0, abs=10.0)
    assert sites["north"].own.beyond_crest == pytest.approx(25_000.0, abs=500.0)
    assert sites["windward north"].side == "windward"
    assert sites["north"].side == "lee"
    assert abs(sites["north"].temperature - sites["on the line"].temperature) > 0.1


def test_sites_near_one_line_share_it(worked):
    """One crossing for what lies within a tenth of the swath of one line."""
    groups = list(site_groups(worked[0]))
    assert sorted(tuple(site.name for site in group.sites) for group in groups) == [
        ("far north",),
        ("north", "windward north", "abreast of north"),
        ("south",),
    ]


def test_a_site_does_not_depend_on_the_others(worked, tmp_path, ridge_case):
    """Alone it has the same line."""
    alone = read_inputs(ridge_case(tmp_path, {"on the line": SITES["on the line"], "south": SITES["south"]}))
    (one,) = site_groups(alone)
    same = next(group for group in site_groups(worked[0]) if group.sites[0].name == "south")
    np.testing.assert_array_equal(one.situation.transect.elevation, same.situation.transect.elevation)
    assert one.situation.normal == same.situation.normal


def test_a_failed_site_is_reported_and_the_rest_goes_on(worked):
    """A line along the range cannot be crossed; its sites come with the reason, in results and table."""
    inputs, own, _ = worked
    groups = list(site_groups(inputs))
    normal = replace(groups[0].situation.normal, bearing=np.radians(2.0))
    broken = [replace(groups[0], situation=replace(groups[0].situation, normal=normal)), *groups[1:2]]
    crossing = with_sites(own, (1, 6), air_of_groups(broken), elsewhere=True)
    assert {site.name for site in crossing.failed} == {site.name for site in groups[0].sites}
    assert "the line runs along the range" in crossing.failed[0].reason
    results = results_of(crossing, inputs.case, places=inputs.places)
    header, rows = site_rows(results)
    failed = next(row for row in rows if row[0] == crossing.failed[0].name)
    assert "runs along the range" in failed[header.index("reason")]
    assert failed[header.index("temperature_c")] is None
    assert [row[header.index("number")] for row in rows] == sorted(row[header.index("number")] for row in rows)


def test_when_nothing_can_be_worked_out_the_lee_foot_stays(worked):
    """The page needs one place."""
    inputs, own, _ = worked
    groups = [replace(group, situation=None, reason="no") for group in site_groups(inputs)]
    bare = replace(own, lee=own.lee[:1])
    crossing = with_sites(bare, (), air_of_groups(groups), elsewhere=True)
    assert len(crossing.lee) == 1
    assert {site.reason for site in crossing.failed} == {"no"}


def test_a_site_outside_the_raster_is_an_error(tmp_path, ridge_case):
    """It is said before anything is worked out."""
    with pytest.raises(CaseError, match="site 'off' lies outside the elevation raster"):
        read_inputs(ridge_case(tmp_path, {"off": (600_000, 0)}))


def test_a_height_far_off_the_terrain_is_flagged(tmp_path, ridge_case):
    """More than 150 m, with both heights; of many the number."""
    path = ridge_case(tmp_path, SITES)
    rows = [f"S{n},{500_000 + 1000 * n},{NORTHING:.0f},4000" for n in range(8)]
    (tmp_path / "sites.csv").write_text("name,easting_m,northing_m,elevation_m\n" + "\n".join(rows) + "\n")
    cautions = " ".join(read_inputs(path).cautions)
    assert "S0 is given at 4000 m, and the terrain is at" in cautions
    assert "3 more sites are given more than 150 m off their terrain" in cautions


def test_lines_pass_near_their_sites(worked):
    """No line is farther from a site of its than a tenth of the swath, 1 km, and a step along it."""
    from rasterio.warp import transform

    inputs = worked[0]
    for group in site_groups(inputs):
        line = group.situation.transect
        x, y = transform("OGC:CRS84", "EPSG:32632", line.longitude, line.latitude)
        for placed, site in zip(group.sites, group.situation.sites, strict=True):
            place = inputs.places[placed.number - 1]
            (east,), (north,) = transform("OGC:CRS84", "EPSG:32632", [place.longitude], [place.latitude])
            away = np.hypot(np.array(x) - east, np.array(y) - north)
            assert away.min() < 1100.0, placed.name
            assert line.distance[away.argmin()] == pytest.approx(site.distance, abs=300.0)
