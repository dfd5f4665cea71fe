"""Many sites and the map of the lee: time in crossings, memory of the process that gathers them.

Work of many lines is that of as many crossings; what joins them must cost little beside it. Seconds of processor,
so that a busy machine gives the same; what that comes to on two cores is printed.
"""

import resource
import subprocess
import sys
import time
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from orolift.crossing.situation import crossing_of
from orolift.sources.inputs import read_inputs, situation_of
from orolift.sources.site_lines import site_groups
from orolift.sources.spread_model import uncertainty_of
from orolift.sources.strips import strip_plan
from orolift.spread.lee_map import lee_map
from orolift.spread.lee_spread import MembersDrawn, lee_spread
from orolift.spread.sites import group_air
from orolift.spread.spread import Drawn
from orolift.spread.strip_members import draw, members_of_strips, strips_with_members
from orolift.spread.strips import strip_air

SAMPLED = 12
"""Every so many lines are worked out; the rest is taken as alike."""
DEMO = Path(__file__).parents[2] / "demo_terrain"


def many(folder, count):
    """The moist demo case with so many sites all over its raster."""
    rng = np.random.default_rng(3)
    rows = [
        f"Post {n},{x:.0f},{y:.0f}"
        for n, (x, y) in enumerate(rng.uniform((592e3, 4755e3), (692e3, 4849e3), (count, 2)), start=1)
    ]
    (folder / "sites.csv").write_text("name,easting_m,northing_m\n" + "\n".join(rows) + "\n")
    text = (DEMO / "varn_moist.toml").read_text()
    for name in ("varn.tif", "sounding.csv", "basins.geojson", "gauges.csv"):
        text = text.replace(f'"{name}"', f'"{DEMO / name}"')
    (folder / "many.toml").write_text(f'sites_file = "sites.csv"\n{text}')
    return folder / "many.toml"


def one_crossing(inputs):
    """Seconds of processor for one crossing, the best of three."""
    situation = situation_of(inputs)
    return min(spent(lambda: crossing_of(situation)) for _ in range(3))


def spent(work):
    """Seconds of processor: they hold on a busy machine, too."""
    start = time.process_time()
    work()
    return time.process_time() - start


@pytest.mark.speed
def test_a_thousand_sites(tmp_path):
    """Less work than 160 crossings: sites share lines. Aim: 30 s on two cores."""
    inputs = read_inputs(many(tmp_path, 1000))
    one = one_crossing(inputs)
    groups = []
    drawing = spent(lambda: groups.extend(site_groups(inputs)))
    some = [group for group in groups if group.situation is not None][::SAMPLED]
    done = sum(len(group.sites) for group in groups if group.situation is not None)
    total = drawing + SAMPLED * spent(lambda: [group_air(group) for group in some])
    print(
        f"\n{done} of 1000 sites in {len(groups)} crossings: {total:.0f} s of processor, {total / one:.0f} crossings of "
        f"{one:.2f} s; on two cores about {drawing + 0.5 * (total - drawing):.0f} s"
    )
    assert done > 900
    assert total < 160.0 * one


@pytest.mark.speed
def test_map_of_the_lee():
    """More than 200 strips, each less than a crossing with its ends. Aim: 60 s on two cores with its members, 1 GB."""
    inputs = read_inputs(DEMO / "varn_moist.toml")
    one = one_crossing(inputs)
    plans = []
    drawing = spent(lambda: plans.append(strip_plan(inputs)))
    (plan,) = plans
    crossed = [strip for strip in plan.strips if strip.situation is not None]
    parts = []
    work = SAMPLED * spent(lambda: parts.extend(strip_air(strip) for strip in crossed[::SAMPLED]))
    frame = replace(plan.frame, across=plan.frame.across[: len(parts)])
    joining = spent(lambda: lee_map(parts, frame, plan.placed.grid, inputs.incoming))
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0
    print(
        f"\n{len(crossed)} strips: {work:.0f} s of processor, {work / one:.0f} crossings of {one:.2f} s; drawing "
        f"{drawing:.1f} s, joining {joining:.1f} s; on two cores about {drawing + joining + 0.5 * work:.0f} s; "
        f"{peak:.0f} MB here"
    )
    assert len(crossed) > 200
    assert work < 1.2 * len(crossed) * one  # 14 heights at every place; sites have one or two
    assert drawing + joining < 40.0 * one


@pytest.mark.speed
def test_members_of_the_map():
    """Members on about 14 strips, and the ranges of every cell: less work than the strips of the answer."""
    inputs = read_inputs(DEMO / "varn_moist.toml")
    one = one_crossing(inputs)
    plan = strip_plan(inputs)
    crossed = [i for i, strip in enumerate(plan.strips) if strip.situation is not None]
    some = crossed[::SAMPLED]
    uncertainty, level = uncertainty_of(inputs.case), draw(Drawn(uncertainty_of(inputs.case)))
    numbers = strips_with_members([strip.situation is not None for strip in plan.strips], plan.frame.across)
    found = []
    work = spent(lambda: found.extend(members_of_strips(plan.strips, numbers[:4], uncertainty, level)))
    work *= len(numbers) / 4.0
    known = {i: strip_air(plan.strips[i], methods=True) for i in {*some, *numbers[:4]}}
    parts = [
        known[i] if i in known else replace(known[min(some, key=lambda j: abs(i - j))], start=strip.start)
        for i, strip in enumerate(plan.strips)
    ]
    drawn = MembersDrawn(tuple(found), plan.strips[numbers[0]].situation, uncertainty, level)
    ranges = spent(lambda: lee_spread(parts, plan.frame, plan.placed.grid, drawn))
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0
    print(
        f"\n{level.shape[0]} members on {len(numbers)} strips: {work:.0f} s of processor, {work / one:.0f} crossings of "
        f"{one:.2f} s; their ranges in {plan.placed.grid.elevation.size} cells: {ranges:.1f} s; {peak:.0f} MB here"
    )
    assert 8 < len(numbers) < 20
    assert work < 0.55 * len(crossed) * one
    assert ranges < 80.0 * one


@pytest.mark.speed
def test_memory_does_not_grow_with_the_sites(tmp_path):
    """Ten times the sites, less than twice the memory: groups are made and given back one by one."""
    code = (
        "import resource, sys\n"
        "from orolift.sources.inputs import read_inputs\n"
        "from orolift.sources.site_lines import site_groups\n"
        "n = sum(len(group.sites) for group in site_groups(read_inputs(sys.argv[1])))\n"
        "print(n, resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0)\n"
    )
    peaks = {}
    for count in (1000, 10_000 - 3):
        done = subprocess.run(
            [sys.executable, "-c", code, str(many(tmp_path, count))], capture_output=True, text=True, check=True
        )
        peaks[count] = float(done.stdout.split()[1])
    print(f"\npeak memory by sites: {peaks}")
    assert peaks[9997] < 2.0 * peaks[1000]
